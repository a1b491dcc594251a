"""What is at a place on the picture: the rows of a trace, and the ink."""

import numpy as np

from digitise.exceptions import UsageError

__all__ = ["ink_at", "trace_places"]

AROUND_PX = 2  # the strongest colour this near to a click is meant
LEAST_CONTRAST = 24.0  # colour levels to the paper, as for finding inks


def trace_places(reading, trace):
    """Picture x, y of every row of a table, (n,) each, NaN where it has no value."""
    table = trace.table
    known = np.isfinite(table.chart_db)
    rho = np.where(known, reading.scale.rho(np.where(known, table.chart_db, 0.0)), np.nan)
    return reading.grid.to_picture(rho, reading.bearing.to_plane(table.angle_deg))


def ink_at(picture, reading, x_px, y_px, *, reach_px=3.0):
    """The ink at a point as "#rrggbb": of the trace that was read there, else the strongest colour around.

    reading : Reading or None; raises `UsageError` where there is only paper
    """
    for trace in reading.traces if reading is not None else ():
        x, y = trace_places(reading, trace)
        if np.nanmin(np.hypot(x - x_px, y - y_px), initial=np.inf) < reach_px:
            return trace.ink
    rgb = picture.rgb
    y0, x0 = round(y_px), round(x_px)
    rows = slice(max(0, y0 - AROUND_PX), max(0, y0 + AROUND_PX + 1))
    part = rgb[rows, max(0, x0 - AROUND_PX) : max(0, x0 + AROUND_PX + 1)].reshape(-1, 3).astype(float)
    if not part.size:
        raise UsageError("there is no picture at that point", remedy="click on the trace")
    paper = np.median(rgb[::7, ::7].reshape(-1, 3), axis=0)
    contrast = np.linalg.norm(part - paper, axis=1)
    if contrast.max() < LEAST_CONTRAST:
        raise UsageError("there is only paper at that point", remedy="click on the trace itself")
    return "#" + "".join(f"{int(value):02x}" for value in part[int(np.argmax(contrast))])
