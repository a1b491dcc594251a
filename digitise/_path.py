"""The cheapest closed path around the chart: dynamic programming over the unwrapped plane.

A pattern has one level a bearing, so the trace is a single-valued path r(angle) that closes after a full turn.
It may still run almost radially (the flank of a lobe), so a step from column to column may climb any number of
rows, paying for each row passed: cheap over ink, dear over paper. The climb is solved exactly with running
minima (a distance transform in one dimension; Felzenszwalb & Huttenlocher 2012, section 2.1, linear cost).
"""

import numpy as np

__all__ = ["cheapest_path"]

CLIMB_PER_ROW = 0.12  # cost of climbing one row of paper, in columns of paper
CLIMB_ON_INK = 0.003  # cost of climbing one row of ink: small, but a detour is never free
LOOK_AROUND = 240  # columns to either side that settle where a closed path starts


def cheapest_path(cost, paper, *, closed):
    """Follow the cheapest path through the columns.

    Parameters
    ----------
    cost : (n_columns, n_rows) float32, of crossing a column at a row: 0 where the path is sure to run, 1 on paper
    paper : (n_columns, n_rows) float32, how bare each cell is (0 ink, 1 paper): the price of climbing over it
    closed : bool, the last column joins the first

    Returns
    -------
    enter, leave : (n_columns,) int arrays: the rows at which the path enters and leaves each column
    """
    climb = np.cumsum(paper * np.float32(CLIMB_PER_ROW) + np.float32(CLIMB_ON_INK), axis=1, dtype=np.float32)
    if not closed:
        return _solve(cost, climb, np.zeros(cost.shape[1], np.float32))
    shift = _certain_column(cost)
    # The row to start and end at is where the best path over the columns around it crosses.
    around = np.arange(-LOOK_AROUND, LOOK_AROUND + 1) + shift
    around = around % len(cost) if len(cost) > len(around) else (np.arange(len(cost)) + shift - len(cost) // 2) % len(cost)
    start = _solve(cost[around], climb[around], np.zeros(cost.shape[1], np.float32))[0][len(around) // 2]
    rolled, rolled_climb = np.roll(cost, -shift, axis=0), np.roll(climb, -shift, axis=0)
    only = np.full(cost.shape[1], np.inf, np.float32)
    only[start] = 0
    enter, leave = _solve(rolled, rolled_climb, only, end=start)
    return np.roll(enter, shift), np.roll(leave, shift)


def _certain_column(cost):
    """A column where, with those around it, one run of rows is far cheaper than the others."""
    doubt = cost.min(axis=1) + (cost < 0.5).mean(axis=1)
    half = min(LOOK_AROUND // 4, len(doubt) // 4)
    padded = np.concatenate([doubt[-half:], doubt, doubt[:half]]) if half else doubt
    return int(np.argmin(np.convolve(padded, np.ones(2 * half + 1), mode="valid")))


def _solve(cost, climb, before, end=None):
    """One pass of the recursion and its backtracking; `before` is the cost of each row left of the first column."""
    n, rows = cost.shape
    entered = np.empty((n, rows), np.float32)
    reached = before
    for j in range(n):
        up = climb[j]
        row = entered[j]
        np.add(reached, cost[j], out=row)
        low = np.minimum.accumulate(row - up)
        low += up
        high = np.minimum.accumulate((row + up)[::-1])[::-1]
        reached = np.minimum(low, high - up)
    leave = np.empty(n, np.int64)
    enter = np.empty(n, np.int64)
    at = int(np.argmin(reached)) if end is None else int(end)
    for j in range(n - 1, -1, -1):
        leave[j] = at
        at = int(np.argmin(entered[j] + np.abs(climb[j] - climb[j][at])))
        enter[j] = at
    return enter, leave
