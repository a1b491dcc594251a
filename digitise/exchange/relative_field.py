"""The relative-field table that 47 CFR 73.316(c) asks for: 10-degree steps, every maximum and minimum.

As in the 2006 to 2009 text: field relative to 1.0 at the maximum, steps no greater than 10 degrees, maxima
and minima with their azimuths; a ratio over 15 dB, or for some stations a change over 2 dB in 10 degrees,
is refused there. Both are said here as facts of the numbers; what they mean for a filing is for licensed
practice to judge.
"""

from dataclasses import replace

import numpy as np

from .._lobes import turning_rows
from .cuts import Antenna, Exported, resampled
from .plain import level_text, one_cut, sorted_cut, to_level
from .text import MAX_POINTS, decode, malformed, take_float

__all__ = ["read", "write"]

COLUMNS = ("azimuth_deg", "relative_field", "point")
POINTS = ("", "maximum", "minimum")
STEP_DEG = 10
LEAST_DB = 0.1  # a smaller rise or fall, or one within the errors, is no maximum or minimum
LARGEST_RATIO_DB, LARGEST_CHANGE_DB = 15.0, 2.0
FINE_DEG = 1.0


def write(antenna, options):
    """The one cut of an antenna as `Exported`; only every tenth degree and the turning points are kept."""
    cut = one_cut(antenna)
    fine, said = resampled(cut, FINE_DEG if np.isnan(options.step_deg) else options.step_deg)
    angle = np.round(options.to_file(fine.plane, fine.angle_deg), 6)
    order = np.argsort(angle, kind="stable")
    angle, level = angle[order], fine.level_db[order] - np.max(fine.level_db)
    error = np.nan_to_num(fine.error95_db[order])
    point = _turning(level, error)
    kept = (np.abs(angle - np.round(angle / STEP_DEG) * STEP_DEG) < 1e-6) | (point > 0)
    lines = [",".join(COLUMNS)]
    for k in np.flatnonzero(kept):
        where = f"{angle[k]:.6f}".rstrip("0").rstrip(".")
        lines.append(f"{where},{level_text(level[k], 'field', options.decimals)},{POINTS[point[k]]}")
    lost = [
        f"{len(angle) - kept.sum()} of {len(angle)} rows between the 10-degree steps",
        "errors, states and ring levels",
    ]
    if (fine.state == "floor").any():
        lost.append("that levels at the chart's centre are upper limits")
    lost += said
    return Exported(data=("\n".join(lines) + "\n").encode(), lost=tuple(lost), checks=_checks(angle, level))


def read(data, source, options):
    """An `Antenna` of one cut; raises `PictureError` with the line number."""
    rows = [
        (number, row.strip())
        for number, row in enumerate(decode(data, source).splitlines(), 1)
        if row.strip()
    ]
    if tuple(cell.strip() for cell in rows[0][1].split(",")) != COLUMNS:
        raise malformed(source, rows[0][0], f"the header is not {','.join(COLUMNS)}")
    body = [(number, [cell.strip() for cell in row.split(",")]) for number, row in rows[1:]]
    if not 2 <= len(body) <= MAX_POINTS:
        raise malformed(source, None, f"{len(body)} points, where 2 to {MAX_POINTS} are expected")
    angle, field, decimals = np.empty(len(body)), np.empty(len(body)), 0
    for k, (number, row) in enumerate(body):
        if len(row) != len(COLUMNS):
            raise malformed(source, number, f"{len(row)} columns where {len(COLUMNS)} are expected")
        if row[2] not in POINTS:
            raise malformed(source, number, f"a point is a maximum or a minimum, not {row[2][:12]!r}")
        angle[k] = take_float(row[0], source, number, "the azimuth")
        field[k] = take_float(row[1], source, number, "the field")
        if not 0 <= angle[k] <= 360 or not 0 <= field[k] <= 1.0 + 1e-6:
            raise malformed(source, number, "the azimuth must be 0 to 360 and the field 0 to 1")
        decimals = max(decimals, len(row[1].partition(".")[2]))
    if len(angle) > 2 and angle[-1] - angle[0] == 360:
        angle, field, body = angle[:-1], field[:-1], body[:-1]
    level, floor = to_level(field, "field", 0.5 * 10.0**-decimals, source, [number for number, _ in body])
    state = np.where(floor, "floor", "seen").astype("U8")
    cut = sorted_cut(
        options.of_file(options.plane, angle),
        level,
        np.full(len(level), np.nan),
        state,
        body,
        source,
        min(decimals, 12),
        "field",
    )
    return Antenna(cuts=(replace(cut, plane=options.plane),))


def _turning(level, error):
    """0, 1 or 2 a row: plain, maximum, minimum."""
    first, n = int(np.argmax(level)), len(level)
    point = np.zeros(n, int)
    around = [(first + k) % n for k in range(n + 1)]
    turns = turning_rows([level[k] for k in around], [error[k] for k in around], least_db=LEAST_DB)
    for number, row in enumerate(turns):
        point[around[row]] = 2 - number % 2
    point[first] = 1
    return point


def _checks(angle, level):
    ratio = -float(level.min())
    steps = np.arange(0, 360, 1.0)
    around = np.interp(
        np.arange(-10, 371), np.concatenate((angle - 360, angle, angle + 360)), np.tile(level, 3)
    )
    change = float(np.max(np.abs(around[10 : 10 + len(steps)] - around[20 : 20 + len(steps)])))
    checks = []
    if ratio > LARGEST_RATIO_DB:
        checks.append(
            f"maximum over minimum is {ratio:.1f} dB; 47 CFR 73.316 (2009 text) refuses more than 15 dB"
        )
    if change > LARGEST_CHANGE_DB:
        checks.append(
            f"the level changes by up to {change:.1f} dB in 10 degrees; that text has 2 dB for some stations"
        )
    return tuple(checks)
