"""Plain comma-separated angle and level, in the ways that planning tools ask for.

Angles run 0..359, -180..179 or -180..180 with the closing point; levels are relative (0 and below), a
positive loss, or a relative field (1 and below). With `errors` the file holds error and state too, and
nothing of a table is lost but the level that stood on the rings. Read back are also semicolons and tabs,
decimal commas with either, and files with a header or without.
"""

import re
from dataclasses import replace

import numpy as np

from ..exceptions import UsageError
from ..table import STATES
from .cuts import Antenna, Cut, Exported, resampled
from .text import MAX_POINTS, decode, malformed, take_float

__all__ = ["read", "write"]

VALUES = {"relative": "relative_db", "loss": "loss_db", "field": "relative_field"}
ANGLES = (
    "angle_deg",
    "angle",
    "azimuth",
    "azimuth_deg",
    "elevation",
    "elevation_deg",
    "bearing",
    "deg",
    "theta",
    "phi",
)
LEVELS = {
    "relative_db": "relative", "level_db": "relative",
    "level": "", "db": "", "gain": "", "gain_db": "", "value": "",
    "loss_db": "loss", "loss": "loss", "attenuation_db": "loss", "attenuation": "loss",
    "relative_field": "field", "field": "field",
}  # fmt: skip
NUMBER = re.compile(r"[-+\u2212]?[\d.,]+([eE][-+]?\d+)?")
SAME_DB = 0.011  # a closing point may differ from the first one by a rounding
LEAST_FIELD = 1e-6


def write(antenna, options):
    """The one cut of an antenna as `Exported`."""
    cut, said = resampled(one_cut(antenna), options.step_deg)
    values = options.values or "relative"
    angle = options.to_file(cut.plane, cut.angle_deg)
    if options.angles != "0..359":
        angle = np.where(angle >= 180, angle - 360, angle)
    order = np.argsort(angle, kind="stable")
    rows = [(angle[k], k) for k in order]
    if options.angles == "-180..180" and angle[order[0]] == -180:
        rows.append((180.0, order[0]))
    lines = [",".join(("angle_deg", VALUES[values], *(("error95_db", "state") if options.errors else ())))]
    for at, k in rows:
        cells = [f"{at:.6f}".rstrip("0").rstrip("."), level_text(cut.level_db[k], values, options.decimals)]
        if options.errors:
            cells += [
                "" if np.isnan(cut.error95_db[k]) else f"{cut.error95_db[k]:.{options.decimals}f}",
                cut.state[k],
            ]
        lines.append(",".join(cells))
    lost = list(said)
    if not options.errors:
        lost.append("row states and errors (error95_db): --errors keeps them")
        if (cut.state == "floor").any():
            lost.append("that levels at the chart's centre are upper limits")
    return Exported(data=("\n".join(lines) + "\n").encode(), lost=tuple(lost))


def read(data, source, options):
    """An `Antenna` of one cut; raises `PictureError` with the line number."""
    rows = [(number, row) for number, row in enumerate(decode(data, source).splitlines(), 1)]
    rows = [(number, row.strip()) for number, row in rows if row.strip() and not row.lstrip().startswith("#")]
    if not rows:
        raise malformed(source, None, "the file holds no rows")
    cells = _split(rows)
    columns, values, body = _columns(cells, source, options)
    if len(body) > MAX_POINTS:
        raise malformed(source, body[MAX_POINTS][0], f"more than {MAX_POINTS} points")
    if len(body) < 2:
        raise malformed(source, rows[-1][0], "a cut needs two points or more")
    angle, level, error, state, decimals = _values(body, columns, source)
    angle, level, error, state, body = _without_closing(angle, level, error, state, body, source)
    values = values or _look(level, source)
    level_db, floor = to_level(level, values, 0.5 * 10.0**-decimals, source, [number for number, _ in body])
    state[floor & (state == "seen")] = "floor"
    bearing = options.of_file(options.plane, angle)
    cut = sorted_cut(bearing, level_db, error, state, body, source, decimals, values)
    return Antenna(cuts=(replace(cut, plane=options.plane),))


def one_cut(antenna):
    """The only cut of an antenna, for formats that hold one."""
    if len(antenna.cuts) != 1:
        raise UsageError(
            f"the format holds one cut a file, not {len(antenna.cuts)}",
            remedy="convert them one by one",
            stage="exchange",
        )
    return antenna.cuts[0]


def level_text(level_db, values, decimals):
    """A level as a file states it."""
    number = {"relative": level_db, "loss": -level_db, "field": 10 ** (level_db / 20)}[values]
    return f"{round(float(number), decimals) + 0.0:.{decimals}f}"


def to_level(values, kind, rounding, source, lines):
    """Work out dB of levels as a file states them, and where a field is too small to have any."""
    if kind == "relative":
        return values + 0.0, np.zeros(len(values), bool)
    if kind == "loss":
        return -values + 0.0, np.zeros(len(values), bool)
    if np.any(values < 0):
        raise malformed(source, lines[int(np.argmin(values))], "a field is negative")
    if not np.any(values > 0):
        raise malformed(source, lines[0], "no field is above 0")
    least = max(rounding, LEAST_FIELD)
    return 20 * np.log10(np.maximum(values, least)), values < least


def sorted_cut(bearing, level_db, error, state, body, source, decimals, values):
    """A `Cut` in the order of bearings; refuses one direction twice."""
    order = np.argsort(bearing, kind="stable")
    again = np.flatnonzero(np.diff(bearing[order]) <= 0)
    if again.size:
        raise malformed(source, body[order[again[0] + 1]][0], "the direction stands twice")
    return Cut(
        angle_deg=bearing[order],
        level_db=level_db[order],
        error95_db=error[order],
        state=state[order],
        rounding_db=0.5 * 10.0**-decimals if values != "field" else _field_rounding(level_db, decimals),
    )


def _field_rounding(level_db, decimals):
    """Half of the last digit of a field in dB, at the middle level."""
    field = 10 ** (float(np.median(level_db)) / 20)
    return float(8.686 * 0.5 * 10.0**-decimals / max(field, LEAST_FIELD))


def _split(rows):
    """Split rows at tabs or semicolons (with decimal commas allowed), else at commas, else at blanks."""
    sample = rows[min(1, len(rows) - 1)][1]
    for mark in ("\t", ";"):
        if mark in sample:
            return [(number, [_point(cell) for cell in row.split(mark)]) for number, row in rows]
    if "," in sample:
        return [(number, [cell.strip() for cell in row.split(",")]) for number, row in rows]
    return [(number, row.split()) for number, row in rows]


def _point(cell):
    cell = cell.strip()
    return (
        cell.replace(",", ".")
        if NUMBER.fullmatch(cell) and cell.count(",") == 1 and "." not in cell
        else cell
    )


def _columns(cells, source, options):
    """Where angle, level, error and state stand, what the levels are, and the rows below the header."""
    head = [cell.strip().strip('"').lower() for cell in cells[0][1]]
    if all(NUMBER.fullmatch(cell) for cell in head if cell) and any(head):
        if len(head) < 2:
            raise malformed(source, cells[0][0], "a row needs angle and level")
        return (0, 1, None, None), options.values, cells
    angle = next((k for k, name in enumerate(head) if name in ANGLES), None)
    level = next((k for k, name in enumerate(head) if name in LEVELS), None)
    if angle is None or level is None:
        raise malformed(
            source, cells[0][0],
            f"no column of {'angles' if angle is None else 'levels'} is named in the header",
            "name them angle_deg and relative_db, loss_db or relative_field",
        )  # fmt: skip
    error = head.index("error95_db") if "error95_db" in head else None
    state = head.index("state") if "state" in head else None
    return (angle, level, error, state), options.values or LEVELS[head[level]], cells[1:]


def _values(body, columns, source):
    n, (at, level_at, error_at, state_at) = len(body), columns
    angle, level, error = np.empty(n), np.empty(n), np.full(n, np.nan)
    state = np.full(n, "seen", dtype="U8")
    decimals = 0
    for k, (number, row) in enumerate(body):
        if len(row) <= max(at, level_at):
            raise malformed(source, number, "the row has too few columns")
        angle[k] = take_float(row[at], source, number, "the angle")
        level[k] = take_float(row[level_at], source, number, "the level")
        if not -360 <= angle[k] <= 360:
            raise malformed(source, number, f"the angle {angle[k]:g} is not between -360 and 360")
        decimals = max(decimals, len(row[level_at].lower().partition("e")[0].partition(".")[2]))
        if error_at is not None and len(row) > error_at and row[error_at]:
            error[k] = take_float(row[error_at], source, number, "the error")
            if error[k] < 0:
                raise malformed(source, number, "the error is negative")
        if state_at is not None and len(row) > state_at:
            if row[state_at] not in STATES or row[state_at] == "missing":
                raise malformed(source, number, f"the state {row[state_at][:12]!r} of a point is not known")
            state[k] = row[state_at]
    return angle, level, error, state, min(decimals, 12)


def _without_closing(angle, level, error, state, body, source):
    """The points without a last one that names the first direction again with the same level."""
    if len(angle) < 3 or abs(abs(angle[-1] - angle[0]) - 360) > 1e-6:
        return angle, level, error, state, body
    if abs(level[-1] - level[0]) > SAME_DB:
        said = f"the direction {angle[-1]:g} stands twice with levels {level[0]:g} and {level[-1]:g}"
        raise malformed(source, body[-1][0], said)
    return angle[:-1], level[:-1], error[:-1], state[:-1], body[:-1]


def _look(level, source):
    """What unnamed levels are, by their sign."""
    if np.all(level <= 0):
        return "relative"
    if np.all(level >= 0) and level.min() < 1e-9 and level.max() > 1.5:
        return "loss"
    raise malformed(
        source, None, "the levels may be relative, losses or fields",
        "say which with --values relative, loss or field",
    )  # fmt: skip
