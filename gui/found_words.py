"""What the tool found itself, in a line under the fields of each group."""

import numpy as np

__all__ = ["found_words"]

SOURCES = {
    "outer-centre": "as told",
    "marks": "from the marks",
    "ring-levels": "as told",
    "labels": "read from the chart",
    "record": "from a record",
    "told": "as told",
    "assumed": "assumed",
}


def found_words(session, what):
    """A line on the scale, the bearing or the grid; "" when nothing is known."""
    if session.chart is None:
        return ""
    if what == "grid":
        return _grid_words(session.chart)
    reading = session.chart.reading
    return "" if reading is None else {"scale": _scale_words, "bearing": _bearing_words}[what](reading)


def _grid_words(chart):
    grid = chart.grid
    if grid is None:
        return "no grid yet: drag from the centre to the outermost ring with the tool Grid"
    origin = "corrected by hand" if chart.settings.grid is not None else "as found"
    n = len(grid.ring_rho)
    spokes = "" if np.isnan(grid.spoke_step_deg) else f", spokes every {grid.spoke_step_deg:g}\u00b0"
    return (
        f"{origin}: {n} ring{'s' * (n != 1)}{spokes}; centre {grid.centre_x:.2f}, {grid.centre_y:.2f}, "
        f"outermost {grid.outer_px:.2f} px; fits to {grid.residual_px:.2f} px"
    )


def _scale_words(reading):
    scale = reading.scale
    unit = scale.unit or "dB"
    outer, centre = float(scale.level(np.ones(1))[0]), scale.centre_db
    ends = f"{_db(outer)} {unit} outside"
    if np.isfinite(centre):
        ends += f", {_db(centre)} {unit} at the centre"
    return f"{SOURCES.get(scale.source, scale.source)}: {scale.law} law, {ends}"


def _bearing_words(reading):
    bearing = reading.bearing
    turn = "clockwise" if bearing.turn == "cw" else "counter-clockwise"
    origin, zero_deg = SOURCES.get(bearing.source, bearing.source), round(bearing.zero_deg, 1) % 360
    signed = ", printed \u00b1180" if bearing.signed else ""
    return f"{origin}: 0\u00b0 at {zero_deg:g}\u00b0 from the top, {turn}{signed}"


def _db(value):
    return f"{round(value, 2) + 0.0:g}"
