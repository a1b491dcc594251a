"""The table: one row a step of bearing, with the level, its error and its state.

Numbers are rounded in one place, `write_table`, value and error together: the written error is the exact one
widened by what rounding moved the value, and rounded up, so that every written interval holds the exact
interval and rounding never costs coverage. A table read back and written again is the same text.
"""

import csv
import io
import os
from dataclasses import dataclass

import numpy as np

from .exceptions import PictureError
from .frozen import lock_arrays

__all__ = ["COLUMNS", "STATES", "Table", "build_table", "read_table", "write_table"]

STATES = ("seen", "bridged", "floor", "missing")
COLUMNS = ("angle_deg", "relative_db", "error95_db", "chart_db", "state")

DECIMALS_DB = 3  # 0.0005 dB is under a tenth of the best reading's error (0.006 dB)
DECIMALS_DEG = 6
EVEN_DEG = 2e-5  # an angle may be off its even step by its own rounding
MAX_TABLE_BYTES = 10_000_000  # the finest table, 0.05 degrees, has 0.3 MB


@dataclass(frozen=True, eq=False, kw_only=True)
class Table:
    """The result of one trace.

    angle_deg : (n,) printed bearings, rising from 0, below 360, evenly stepped
    chart_db : (n,) level as printed on the rings, NaN when missing
    relative_db : (n,) chart_db minus its largest value
    error95_db : (n,) half-width of the 95 % interval of chart_db, NaN when missing
    state : (n,) str, one of STATES
    """

    angle_deg: np.ndarray
    chart_db: np.ndarray
    relative_db: np.ndarray
    error95_db: np.ndarray
    state: np.ndarray

    def __post_init__(self):
        lock_arrays(self)


def build_table(angle_deg, chart_db, error95_db, state):
    """A `Table` of one trace's rows; the relative level is worked out here.

    Parameters
    ----------
    angle_deg : (n,) bearings, rising evenly from 0, below 360
    chart_db, error95_db : (n,) dB; NaN exactly where the state is "missing"
    state : (n,) str, each one of STATES

    Raises ValueError for rows that no table may hold.
    """
    angle_deg, chart_db = np.asarray(angle_deg, float), np.asarray(chart_db, float)
    error95_db, state = np.asarray(error95_db, float), np.asarray(state, str)
    fault = _fault(angle_deg, chart_db, error95_db, state)
    if fault:
        raise ValueError(fault[1] if fault[0] is None else f"row {fault[0]}: {fault[1]}")
    return Table(
        angle_deg=angle_deg,
        chart_db=chart_db,
        relative_db=_relative(chart_db),
        error95_db=error95_db,
        state=state,
    )


def write_table(table):
    """The table as the text of a CSV file: one header row, then a row a step; no comment lines."""
    scale = 10.0**DECIMALS_DB
    chart = np.round(table.chart_db * scale) / scale
    moved = np.abs(chart - table.chart_db)
    error = np.ceil(np.round((table.error95_db + moved) * scale, 6)) / scale  # 6: an exact 0.012 stays 0.012
    relative = _relative(chart)
    lines = [",".join(COLUMNS)]
    for k, state in enumerate(table.state):
        angle = f"{table.angle_deg[k]:.{DECIMALS_DEG}f}".rstrip("0").rstrip(".")
        numbers = ("", "", "") if state == "missing" else (_db(relative[k]), _db(error[k]), _db(chart[k]))
        lines.append(",".join((angle, *numbers, str(state))))
    return "\n".join(lines) + "\n"


def read_table(path):
    """Read a table file back.

    Raises `PictureError` with the line number when the file cannot be opened or is malformed.
    """
    path = os.fspath(path)
    rows = list(csv.reader(io.StringIO(_read_text(path), newline="")))
    header = [name.strip() for name in rows[0]] if rows else []
    lacking = [name for name in COLUMNS if name not in header]
    if lacking:
        remedy = f"a table begins with {','.join(COLUMNS)}"
        if len(header) == 1 and (";" in header[0] or "\t" in header[0]):
            remedy = "save it with commas between the columns and points in the numbers"
        raise _malformed(path, 1, f"no column {lacking[0]}", remedy)
    at = [header.index(name) for name in COLUMNS]
    body = [(number, row) for number, row in enumerate(rows[1:], 2) if any(cell.strip() for cell in row)]
    values, states = np.full((len(body), 4), np.nan), []
    for k, (number, row) in enumerate(body):
        if len(row) <= max(at):
            raise _malformed(path, number, f"{len(row)} columns where the header has {len(header)}")
        for j, column in enumerate(at[:4]):
            values[k, j] = _number(path, number, COLUMNS[j], row[column].strip())
        states.append(row[at[4]].strip())
    angle_deg, relative_db, error95_db, chart_db = values.T
    fault = _fault(angle_deg, chart_db, error95_db, np.array(states, str), relative_db)
    if fault:
        raise _malformed(path, None if fault[0] is None else body[fault[0]][0], fault[1])
    return build_table(angle_deg, chart_db, error95_db, states)


def _fault(angle_deg, chart_db, error95_db, state, relative_db=None):
    """What keeps these rows from being a table, as (row or None, sentence), or None."""
    n = len(angle_deg)
    if n < 2 or not (len(chart_db) == len(error95_db) == len(state) == n):
        return None, f"a table needs two rows or more, alike in every column, and has {n}"
    checks = [
        (~np.isin(state, STATES), f"the state is not one of {', '.join(STATES)}"),
        (
            ~(np.abs(angle_deg - np.arange(n) * 360 / n) < EVEN_DEG),
            f"angle_deg is not on an even step of 360/{n} from 0",
        ),
        (
            np.isfinite(chart_db) == (state == "missing"),
            "chart_db must be empty where the state is missing, only there",
        ),
        (
            np.isfinite(error95_db) == (state == "missing"),
            "error95_db must be empty where the state is missing, only there",
        ),
        (error95_db < 0, "error95_db is negative"),
    ]
    if relative_db is not None:
        off = np.abs(relative_db - _relative(chart_db)) > 1.5 * 10.0**-DECIMALS_DB
        off |= np.isnan(relative_db) != np.isnan(chart_db)
        checks.append((off, "relative_db is not chart_db minus the largest chart_db"))
    for bad, sentence in checks:
        if np.any(bad):
            return int(np.argmax(bad)), sentence
    return None


def _relative(chart_db):
    """Level below the largest one, dB; all NaN when no row has a value."""
    known = chart_db[np.isfinite(chart_db)]
    return chart_db - (known.max() if known.size else np.nan)


def _db(value):
    return f"{round(value, DECIMALS_DB) + 0.0:.{DECIMALS_DB}f}"  # + 0.0: never "-0.000"


def _number(path, line, column, text):
    if not text:
        return np.nan
    try:
        value = float(text)
    except ValueError:
        raise _malformed(path, line, f"{column} is not a number ({text[:20]!r})") from None
    if not np.isfinite(value):
        raise _malformed(path, line, f"{column} is not a finite number")
    return value


def _read_text(path):
    try:
        with open(path, "rb") as file:
            data = file.read(MAX_TABLE_BYTES + 1)
        if len(data) > MAX_TABLE_BYTES:
            raise _malformed(path, None, "larger than any table")
        return data.decode("utf-8-sig")
    except FileNotFoundError:
        raise PictureError(
            "no such file", remedy="check the name and the folder", stage="table", source=path
        ) from None
    except OSError as error:
        raise PictureError(f"cannot be opened ({error.strerror})", stage="table", source=path) from None
    except UnicodeDecodeError:
        raise _malformed(path, None, "not UTF-8 text") from None


def _malformed(path, line, said, remedy="mend the line or read the picture again"):
    where = "" if line is None else f"line {line}: "
    return PictureError(f"{where}{said}", remedy=remedy, stage="table", source=path)
