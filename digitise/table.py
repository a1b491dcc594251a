"""The table: one row a step of bearing, with the level, its error and its state.

Stub: building and writing follow.
"""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["STATES", "Table", "read_table", "write_table"]

STATES = ("seen", "bridged", "floor", "missing")


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


def write_table(table):
    """The table as the text of a CSV file (DESIGN: UTF-8, one header row, no comment lines)."""
    raise NotImplementedError


def read_table(path):
    """Read a table file back; raises `PictureError` with the line number when it is malformed."""
    raise NotImplementedError
