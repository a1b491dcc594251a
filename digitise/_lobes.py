"""The lobes and nulls of a pattern: a walk around the circle that counts a turn only when it is real.

A dip is a null, and a rise a lobe, when the level moves by more than `LEAST_DB` and by more than the two
rows' own errors explain: reading noise on a flank makes no lobes.
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["HALF_POWER_DB", "Lobes", "find_lobes", "turning_rows"]

HALF_POWER_DB = 10 * np.log10(2)  # 3.0103
LEAST_DB = 1.0  # rise from a null to a lobe that counts; common practice, no source


@dataclass(frozen=True, kw_only=True)
class Lobes:
    """Rows of nulls and lobes, counted from the peak's row.

    right : rows (> 0) met while bearings grow: null, lobe, null ...
    left : the same while bearings fall (< 0)
    closed : the walk came round; left and right then name the same rows
    """

    right: tuple
    left: tuple
    closed: bool

    @property
    def all_lobes(self):
        """Rows of all lobes but the main one."""
        right, left = self.right[1::2], self.left[1::2]
        return right if self.closed else (*right, *left)

    @property
    def all_nulls(self):
        """Rows of all nulls."""
        return self.right[::2] if self.closed else (*self.right[::2], *self.left[::2])


def find_lobes(levels_db, error95_db):
    """Find the nulls and lobes of levels that begin with the main lobe's peak.

    Parameters
    ----------
    levels_db, error95_db : (n,) around the circle, dB; NaN where there is no value

    Nulls within half power of the peak are ripple of the main lobe and are left out.

    """
    n = len(levels_db)
    levels, errors = levels_db.tolist(), error95_db.tolist()
    unknown = np.flatnonzero(~np.isfinite(levels_db))
    if len(unknown) == 0:
        turns = turning_rows(levels + levels[:1], errors + errors[:1])
        right = _beyond_half_power(turns, levels)
        left = _beyond_half_power([row - n for row in reversed(turns)], levels)
        if not right or not left:
            return Lobes(right=(), left=(), closed=True)
        right = [row for row in right if row <= left[0] + n]
        left = [row for row in left if row >= right[0] - n]
        return Lobes(right=tuple(right), left=tuple(left), closed=True)
    first, last = int(unknown[0]), int(unknown[-1])
    right = turning_rows(levels[:first], errors[:first])
    back = [0, *range(n - 1, last, -1)]
    left = [-row for row in turning_rows([levels[k] for k in back], [errors[k] for k in back])]
    right, left = (tuple(_beyond_half_power(turns, levels)) for turns in (right, left))
    return Lobes(right=right, left=left, closed=False)


def turning_rows(levels, errors, *, least_db=LEAST_DB):
    """Rows of minimum, maximum, minimum ... along levels that begin at a peak; the last is a minimum."""
    turns, falling, best = [], True, 0
    for row, level in enumerate(levels):
        moved = level - levels[best] if falling else levels[best] - level
        if moved < 0:
            best = row
        elif moved > least_db and moved > 0.7 * (errors[row] ** 2 + errors[best] ** 2) ** 0.5:
            turns.append(best)
            falling, best = not falling, row
    return turns[: len(turns) - 1 + len(turns) % 2]


def _beyond_half_power(turns, levels):
    """The same without the nulls, each with the lobe after it, that lie within half power of the peak."""
    while turns and levels[turns[0]] > levels[0] - HALF_POWER_DB:
        turns = turns[2:]
    return list(turns)
