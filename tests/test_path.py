"""The cheapest closed path: on arrays whose best path is seen by eye."""

import numpy as np

from digitise._path import cheapest_path

COLUMNS, ROWS = 200, 60


def _costs(rows):
    cost = np.ones((COLUMNS, ROWS), np.float32)
    for column, row in enumerate(rows):
        cost[column, row] = 0
    return cost, cost.copy()


def test_follows_a_line():
    """A line of free cells is followed cell by cell."""
    rows = np.round(30 + 10 * np.sin(np.linspace(0, 2 * np.pi, COLUMNS, endpoint=False))).astype(int)

    enter, leave = cheapest_path(*_costs(rows), closed=True)

    assert np.abs(leave - rows).max() <= 1
    assert np.abs(enter - rows).max() <= 1


def test_bridges_a_gap():
    """Twenty bare columns are crossed straight, not by way of another line far off."""
    rows = np.full(COLUMNS, 30)
    cost, paper = _costs(rows)
    cost[80:100, 30] = paper[80:100, 30] = 1
    cost[:, 55] = 0.9

    _, leave = cheapest_path(cost, paper, closed=True)

    assert set(leave) == {30}


def test_climbs_a_radial_line():
    """A column that is free from top to bottom is climbed without a price worth naming."""
    rows = np.r_[np.full(100, 5), np.full(100, 50)]
    cost, paper = _costs(rows)
    paper[100, 5:51] = paper[0, 5:51] = 0

    enter, leave = cheapest_path(cost, paper, closed=True)

    assert (enter[100], leave[100]) in {(5, 50), (50, 50)}
    assert set(leave[10:90]) == {5}
    assert set(leave[110:190]) == {50}


def test_closes_on_itself():
    """Of two lines that cross the seam, the path ends in the row that it began in, wherever the seam is."""
    rows = np.round(30 + 20 * np.sin(np.linspace(0, 2 * np.pi, COLUMNS, endpoint=False) + 1)).astype(int)
    cost, paper = _costs(rows)

    for shift in (0, 57, 133):
        enter, leave = cheapest_path(np.roll(cost, shift, 0), np.roll(paper, shift, 0), closed=True)

        assert abs(int(enter[0]) - int(leave[-1])) <= 1
        assert np.abs(np.roll(leave, -shift) - rows).max() <= 1


def test_an_open_path_need_not_close():
    """A half chart's path may end in another row than it began in."""
    rows = np.linspace(5, 55, COLUMNS).round().astype(int)

    _, leave = cheapest_path(*_costs(rows), closed=False)

    assert leave[0] <= 6
    assert leave[-1] >= 54
