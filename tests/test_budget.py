"""The budget: each part alone, by numbers that can be worked by hand."""

from dataclasses import replace

import numpy as np
import pytest

from digitise.bearing import Bearing
from digitise.budget import COVERAGE_FACTOR, PARTS, make_budget
from digitise.follow import Trace
from digitise.scale import make_scale
from digitise.settings import Settings

from .grids import OUTER_PX, plane_grid

SPAN_DB = 40.0


def trace(*, rho=0.5, u_px=0.1, u_bridge_px=0.0, slope=0.0, radial_share=1.0):
    """A trace of four equal samples."""
    n = 4
    return Trace(
        plane_deg=np.arange(n) * 90.0, rho=np.full(n, rho), u_px=np.full(n, u_px),
        u_bridge_px=np.full(n, u_bridge_px), slope=np.full(n, slope), radial_share=np.full(n, radial_share),
        state=np.full(n, "seen"), clear=np.ones(n, bool), support=1.0, dash="solid", width_px=2.0,
        sheet_outer_px=OUTER_PX,
    )  # fmt: skip


def budget(item, *, bearing_u_deg=0.0):
    """Budget of a trace on an even 0..-40 dB chart."""
    grid = plane_grid((1.0, 0.75, 0.5, 0.25))
    scale = make_scale(grid, settings=Settings(outer_db=0.0, centre_db=-SPAN_DB))
    bearing = Bearing(zero_deg=0.0, turn="cw", u_deg=bearing_u_deg, source="told")
    return make_budget(item, grid, scale, bearing)


def test_picture_part():
    """0.1 px on a 40 dB chart of 250 px is 0.016 dB (REFERENCES section 6: S/R times u_r)."""
    assert budget(trace()).picture == pytest.approx(0.1 * SPAN_DB / OUTER_PX)


def test_slant_turns_place_into_level():
    """Where the line runs at 60 degrees to the ring, the same shift along its normal counts twice."""
    flat, slanted = budget(trace()), budget(trace(radial_share=0.5))

    assert slanted.picture == pytest.approx(2 * flat.picture)


def test_bearing_part():
    """0.2 degrees of bearing on a slope of 0.01 of the radius a degree is 0.08 dB."""
    assert budget(trace(slope=0.01), bearing_u_deg=0.2).bearing == pytest.approx(0.2 * 0.01 * SPAN_DB)


def test_bridging_stands_apart():
    """What is hidden counts as bridging, not as picture."""
    item = budget(trace(u_bridge_px=1.0))

    assert item.bridging == pytest.approx(SPAN_DB / OUTER_PX)
    assert item.picture == pytest.approx(budget(trace()).picture)


def test_centre_error_moves_the_level():
    """A centre off by 0.2 px to the right moves what lies to the right and left of it, not what lies above."""
    grid = plane_grid((1.0, 0.75, 0.5, 0.25))
    covariance = np.zeros((8, 8))
    covariance[2, 2] = 0.2**2
    scale = make_scale(grid, settings=Settings(outer_db=0.0, centre_db=-SPAN_DB))
    bearing = Bearing(zero_deg=0.0, turn="cw", u_deg=0.0, source="told")

    above, right, _, left = make_budget(trace(), replace(grid, covariance=covariance), scale, bearing).grid

    assert [right, left] == pytest.approx([0.2 * SPAN_DB / OUTER_PX] * 2, rel=1e-3)
    assert above < 1e-3 * right


def test_parts_add_as_squares():
    """The 95 % half-width is the coverage factor times the root sum of squares (JCGM 100:2008, 5.1.2)."""
    item = budget(trace(u_bridge_px=0.4, slope=0.02), bearing_u_deg=0.1)
    total = np.sqrt(sum(getattr(item, part) ** 2 for part in PARTS))

    assert item.error95() == pytest.approx(COVERAGE_FACTOR * total)
