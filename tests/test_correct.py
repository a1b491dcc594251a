"""Corrections of a grid by hand: what is moved moves, the rest stays, settling finds the lines again."""

import numpy as np
import pytest

from digitise import correct
from digitise.exceptions import NotReadError, UsageError
from digitise.picture import Picture
from digitise.reading import read_charts
from digitise.record import make_record, read_record, settings_as_told, settings_from_record, write_record
from digitise.settings import Settings
from tests.grids import CENTRE, OUTER_PX, plane_grid
from tests.hand import RING_RHO, hand_reading

SETTLED_PX = 0.02  # of a clean painted grid, as far as finding it from scratch goes
HAND_PX = 3.0  # a rough hand


@pytest.fixture
def grid():
    """A grid of four rings, turned by two degrees."""
    return plane_grid(RING_RHO, skew_deg=2.0)


def radii_px(grid):
    """Radii of all rings on the picture."""
    return grid.ring_rho * grid.outer_px


def test_the_centre_moves_with_all_rings(grid):
    """Moving the centre shifts every point alike, and makes its place as uncertain as a hand is."""
    moved = correct.move_centre(grid, 2.5, -1.5)

    before, after = grid.to_picture(0.75, 40.0), moved.to_picture(0.75, 40.0)
    assert (after[0] - before[0], after[1] - before[1]) == pytest.approx((2.5, -1.5))
    assert np.sqrt(moved.covariance[2, 2]) == pytest.approx(correct.HAND_U_PX, rel=0.01)


def test_an_inner_ring_moves_alone(grid):
    """The other rings and the plane stay."""
    moved = correct.move_ring(grid, 1, 0.8)

    assert radii_px(moved) == pytest.approx(OUTER_PX * np.array([1, 0.8, 0.5, 0.25]))
    assert moved.ring_rho_u[1] == pytest.approx(correct.HAND_U_PX / OUTER_PX)


def test_the_outermost_ring_moves_and_the_others_stay_on_the_picture(grid):
    """Rho 1 is the outermost ring again, and the inner rings keep their px."""
    moved = correct.move_ring(grid, 0, 1.02)

    assert moved.ring_rho[0] == 1
    assert radii_px(moved) == pytest.approx(OUTER_PX * np.array([1.02, 0.75, 0.5, 0.25]))
    assert moved.to_picture(0.0, 0.0) == pytest.approx(CENTRE)


def test_the_outermost_ring_by_hand_leaves_its_size_uncertain(grid):
    """The point at its top is known in y as well as the hand is steady."""
    moved = correct.move_ring(grid, 0, 1.02)

    size_u = np.sqrt(moved.covariance[4, 4])
    assert size_u == pytest.approx(correct.HAND_U_PX, rel=0.1)


def test_a_stretch_lengthens_one_way(grid):
    """Right and left move out, top and bottom stay."""
    wide = correct.stretch_grid(plane_grid(RING_RHO), 1.1, 90.0)

    assert wide.to_picture(1.0, 90.0)[0] == pytest.approx(CENTRE[0] + 1.1 * OUTER_PX)
    assert wide.to_picture(1.0, 0.0)[1] == pytest.approx(CENTRE[1] - OUTER_PX)


def test_a_ring_is_added_and_taken_away(grid):
    """Added between, outside, and dropped again, radii on the picture are what they were."""
    between, outside = correct.add_ring(grid, 0.6), correct.add_ring(grid, 1.25)

    assert radii_px(between) == pytest.approx(OUTER_PX * np.array([1, 0.75, 0.6, 0.5, 0.25]))
    assert radii_px(outside) == pytest.approx(OUTER_PX * np.array([1.25, 1, 0.75, 0.5, 0.25]))
    assert radii_px(correct.drop_ring(outside, 0)) == pytest.approx(radii_px(grid))
    assert correct.drop_ring(outside, 0).homography == pytest.approx(grid.homography)


@pytest.mark.parametrize("rho", [0.75, 0.5, 0.4, 0.001])
def test_a_ring_cannot_lie_on_another(grid, rho):
    """Nor pass it, nor lie on the centre."""
    with pytest.raises(UsageError, match="another one or on the centre"):
        correct.move_ring(grid, 1 if rho < 0.6 else 2, rho)


def test_the_last_ring_stays():
    """A grid has a ring."""
    with pytest.raises(UsageError, match="last ring"):
        correct.drop_ring(correct.grid_by_hand(100, 100, 50), 0)


def test_settling_finds_the_lines_again():
    """A grid moved by a rough hand returns to where the chart was painted, with a measured uncertainty."""
    reading = hand_reading()
    rough = correct.move_ring(correct.move_centre(reading.grid, HAND_PX, -0.7 * HAND_PX), 0, 1.01)

    settled = correct.settle_grid(reading.picture, rough)

    assert (settled.centre_x, settled.centre_y) == pytest.approx(CENTRE, abs=SETTLED_PX)
    assert radii_px(settled) == pytest.approx(OUTER_PX * np.array(RING_RHO), abs=SETTLED_PX)
    assert np.sqrt(settled.covariance[2, 2]) < 0.1 * correct.HAND_U_PX


def test_settling_on_paper_is_refused():
    """Where no ring is drawn the message says what to do."""
    rgb = np.full((300, 300, 3), 255, np.uint8)
    blank = Picture(rgb=rgb, path="blank.png", sha256="0" * 64, width=300, height=300)

    with pytest.raises(NotReadError, match=r"no drawn ring lies within .* nearer"):
        correct.settle_grid(blank, correct.grid_by_hand(150, 150, 100))


def test_no_correction_alters_its_input(grid):
    """Every correction returns a new grid."""
    before = grid.homography.copy(), grid.ring_rho.copy(), grid.covariance.copy()
    correct.move_centre(grid, 1, 1)
    correct.move_ring(grid, 0, 1.1)
    correct.add_ring(grid, 0.6)
    correct.drop_ring(grid, 0)
    correct.stretch_grid(grid, 1.2, 30.0)

    for now, then in zip((grid.homography, grid.ring_rho, grid.covariance), before, strict=True):
        assert np.array_equal(now, then)


def test_a_grid_by_hand_is_read_with_and_recorded(tmp_path):
    """The reading takes the told grid as it is, its record says so, and gives the same table again."""
    reading = hand_reading()
    by_hand = correct.move_ring(reading.grid, 0, 1.004)
    settings = Settings(
        outer_db=0.0, centre_db=-40.0, zero_deg=0.0, turn="cw", grid=by_hand, crop=(0, 0, 600, 620)
    )
    (first,) = read_charts(reading.picture, settings=settings)
    path = tmp_path / "panel.record.json"
    path.write_text(
        write_record(make_record(first, tables=["panel.csv"] * len(first.traces))), encoding="utf-8"
    )

    told = settings_as_told(read_record(path))
    (again,) = read_charts(reading.picture, settings=told)
    (like,) = read_charts(reading.picture, settings=settings_from_record(path, sha256=reading.picture.sha256))

    assert first.grid is by_hand
    assert (told.outer_db, told.turn, told.crop, told.scale) == (0.0, "cw", (0, 0, 600, 620), None)
    for other in (again, like):
        assert np.array_equal(other.traces[0].table.chart_db, first.traces[0].table.chart_db, equal_nan=True)
    assert settings_from_record(path, sha256="b" * 64).grid is None
