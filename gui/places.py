"""Where on the picture a reason to look has its place, so that the list can lead there."""

from dataclasses import dataclass

import numpy as np

from .at_place import trace_places

__all__ = ["Spot", "reason_places"]

ON_TRACE = (
    "much-bridged",
    "rows-missing",
    "leaves-chart",
    "trace-doubtful",
    "traces-alike",
    "wide-error",
    "peak-low",
)
ON_RIM = ("bearing-assumed", "bearing-mirrored")


@dataclass(frozen=True, kw_only=True)
class Spot:
    """A place to look at: its middle and how far around it to show, picture px.

    marked : the place is one point, worth a mark on the picture; trace, row : of the table, or None
    """

    x_px: float
    y_px: float
    reach_px: float
    marked: bool = False
    trace: int | None = None
    row: int | None = None


def reason_places(reading):
    """A list of (sentence, `Spot`) in the order of `Reading.review`."""
    items = [(None, item) for item in reading.reasons]
    items += [(k, item) for k, trace in enumerate(reading.traces) for item in trace.reasons]
    return [
        (sentence, _spot(reading, k, item)) for sentence, (k, item) in zip(reading.review, items, strict=True)
    ]


def _spot(reading, k, item):
    grid = reading.grid
    if item.x_px is not None and item.y_px is not None:
        return Spot(x_px=item.x_px, y_px=item.y_px, reach_px=0.3 * grid.outer_px, marked=True, trace=k)
    if k is not None or item.code in ON_TRACE:
        return _on_trace(reading, 0 if k is None else k, item.code)
    if item.code in ON_RIM:
        x, y = grid.to_picture(1.0, float(reading.bearing.to_plane(np.zeros(1))[0]))
        return Spot(x_px=float(x), y_px=float(y), reach_px=0.4 * grid.outer_px)
    return Spot(x_px=grid.centre_x, y_px=grid.centre_y, reach_px=1.3 * grid.outer_px)


def _on_trace(reading, k, code):
    """The middle of the longest run of the rows that the reason is about."""
    trace = reading.traces[k]
    table = trace.table
    if code in ("much-bridged", "trace-doubtful", "traces-alike"):
        row = _longest_run(table.state == "bridged")
    elif code == "rows-missing":
        row = _longest_run(table.state == "missing")
    elif code == "wide-error":
        row = int(np.argmax(np.nan_to_num(table.error95_db, nan=-1.0)))
    else:
        row = int(np.argmax(np.nan_to_num(table.chart_db, nan=-np.inf)))
    x, y = trace_places(reading, trace)
    if not np.isfinite(x[row]):
        x, y = reading.grid.to_picture(1.0, reading.bearing.to_plane(table.angle_deg))
    reach = 0.35 * reading.grid.outer_px
    return Spot(x_px=float(x[row]), y_px=float(y[row]), reach_px=reach, marked=True, trace=k, row=row)


def _longest_run(chosen):
    """Index in the middle of the longest run of True round a circle; 0 when there is none."""
    if not chosen.any() or chosen.all():
        return 0
    start = int(np.argmin(chosen))  # begin where it is False, so that no run is cut
    turned = np.roll(chosen, -start).astype(np.int8)
    edges = np.diff(np.concatenate(([0], turned, [0])))
    first, end = np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)
    longest = int(np.argmax(end - first))
    return int((start + (first[longest] + end[longest] - 1) // 2) % len(chosen))
