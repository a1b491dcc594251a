"""Judge a table row by row against a true curve, and say which class a row belongs to.

Classes, each row in the first that fits: `bridged` (the reader says so), `crossing` (another trace within a
few px), `null` (about a deep minimum), `flank` (the line runs more along the radius than across it) and
`flat`. Only rows whose true level lies inside the chart count: above its centre by 2 % of the span, below its
rim + 2 %.
"""

from dataclasses import dataclass

import numpy as np

from tests.draw.spec import N_TRUE, drawn_curve

CLASSES = ("flat", "flank", "null", "crossing", "bridged")
EDGE = 0.02  # of the span, as the practice scorer takes it
NULL_DEPTH_DB = 10.0  # a minimum this far below the peaks on both sides
NULL_REACH_DEG = 3.0
CROSSING_PX = 4.0  # between line centres, beyond half of both widths


@dataclass(frozen=True, eq=False, kw_only=True)
class Rows:
    """Rows of one table inside the chart.

    error_db, claimed_db (the table's error95_db), kind : each (n,) ; n_wanted : rows that were due
    """

    error_db: np.ndarray
    claimed_db: np.ndarray
    kind: np.ndarray
    n_wanted: int


def judge(chart, k, angle_deg, chart_db, error95_db, state):
    """`Rows` of a table of whole degrees read from the k-th trace of a painted `Chart`."""
    rho, db = drawn_curve(chart, chart.traces[k])
    span = chart.outer_db - chart.centre_db
    inside = np.isfinite(db) & (db > chart.centre_db + EDGE * span) & (db <= chart.outer_db + EDGE * span)
    at = np.round(np.asarray(angle_deg) * N_TRUE / 360).astype(int) % N_TRUE
    have = inside[at] & np.isfinite(chart_db)
    kind = np.array(row_kinds(chart, k, rho, db))[at]
    kind[np.asarray(state) == "bridged"] = "bridged"
    return Rows(
        error_db=np.asarray(chart_db)[have] - db[at][have],
        claimed_db=np.asarray(error95_db)[have],
        kind=kind[have],
        n_wanted=int(inside[at].sum()),
    )


def row_kinds(chart, k, rho, db):
    """Class of every quarter degree of the true curve, (1440,) str, without the reader's word."""
    kind = np.full(N_TRUE, "flat", dtype="<U8")
    step = np.radians(2 * 360 / N_TRUE)
    slope = (np.roll(rho, -1) - np.roll(rho, 1)) / step
    kind[np.abs(slope) > rho] = "flank"  # slant over 45 degrees from the circle
    kind[_near_nulls(db)] = "null"
    kind[_near_others(chart, k, rho)] = "crossing"
    return kind


def _near_nulls(db):
    """Rows within NULL_REACH_DEG of a minimum that lies NULL_DEPTH_DB below the level on either side."""
    level = np.where(np.isfinite(db), db, 0.0)
    lowest = level <= np.minimum(np.roll(level, 1), np.roll(level, -1))
    near = np.zeros(N_TRUE, bool)
    reach = round(NULL_REACH_DEG * N_TRUE / 360)
    for i in np.flatnonzero(lowest):
        rise = [_climb(np.roll(level, -i)), _climb(np.roll(level[::-1], i + 1))]
        if min(rise) > NULL_DEPTH_DB:
            near[np.arange(i - reach, i + reach + 1) % N_TRUE] = True
    return near


def _climb(level):
    """How far the level rises from its first sample before it falls below that sample again."""
    below = np.flatnonzero(level < level[0] - 1e-9)
    return float(np.max(level[: below[0]] if len(below) else level) - level[0])


def _near_others(chart, k, rho):
    """Rows where another drawn line comes close."""
    near = np.zeros(N_TRUE, bool)
    own = np.column_stack(chart.point(rho, np.arange(N_TRUE) * 360 / N_TRUE))
    for n, other in enumerate(chart.traces):
        if n == k:
            continue
        points = np.column_stack(chart.point(drawn_curve(chart, other)[0], np.arange(N_TRUE) * 360 / N_TRUE))
        limit = CROSSING_PX + (chart.traces[k].width + other.width) / 2
        for start in range(0, N_TRUE, 180):
            part = own[start : start + 180]
            apart = np.hypot(part[:, None, 0] - points[None, :, 0], part[:, None, 1] - points[None, :, 1])
            near[start : start + 180] |= np.nanmin(apart, axis=1) < limit
    return near
