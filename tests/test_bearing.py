"""The bearing from told values."""

import numpy as np
import pytest

from digitise.bearing import Bearing, make_bearing
from digitise.exceptions import NotReadError
from digitise.settings import Settings

from .grids import plane_grid

RINGS = [1.0, 0.5]


@pytest.mark.parametrize("skew_deg", [-7.0, 0.0, 3.0])
@pytest.mark.parametrize("zero_deg", [0.0, 90.0, 180.0, 270.0, 30.0, 330.0])
def test_a_told_direction_is_the_charts_own(zero_deg, skew_deg):
    """ "top" on a skewed chart is the chart's own top; its error is the skew's."""
    bearing = make_bearing(
        plane_grid(RINGS, skew_deg=skew_deg), settings=Settings(zero_deg=zero_deg, turn="ccw")
    )

    assert (bearing.zero_deg, bearing.turn, bearing.source) == (zero_deg, "ccw", "told")
    assert bearing.u_deg == pytest.approx(0.02)


def test_an_odd_told_angle_is_measured_on_the_picture():
    """An angle off the spokes is a page angle, so the skew is taken off it."""
    bearing = make_bearing(plane_grid(RINGS, skew_deg=3.0), settings=Settings(zero_deg=17.5, turn="cw"))

    assert bearing.zero_deg == pytest.approx(14.5)


@pytest.mark.parametrize("turn", ["cw", "ccw"])
def test_there_and_back(turn):
    """Printed bearing to plane angle and back, and the sense of the turn."""
    bearing = Bearing(zero_deg=270.0, turn=turn, u_deg=0.0, source="told")
    angle = np.arange(0.0, 360.0, 7.5)

    np.testing.assert_allclose(bearing.from_plane(bearing.to_plane(angle)), angle, atol=1e-9)
    assert bearing.to_plane(90.0) == pytest.approx(0.0 if turn == "cw" else 180.0)


def test_what_is_lacking_is_named():
    """Without labels the refusal names the options."""
    with pytest.raises(NotReadError, match="give --zero and --turn"):
        make_bearing(plane_grid(RINGS), settings=Settings())
    with pytest.raises(NotReadError, match="give --turn,"):
        make_bearing(plane_grid(RINGS), settings=Settings(zero_deg=0.0))
