"""Following a trace: painted lines of known radius come back to a few hundredths of a pixel."""

import numpy as np
import pytest

from digitise.exceptions import NotReadError
from digitise.settings import Settings
from digitise.traces import find_traces

from . import inked

BLUE, ORANGE, GREY = (31, 79, 180), (224, 123, 0), (176, 176, 176)
PLACE_PX = 0.04  # median, crossings with rings included; a lone line without noise is placed to 0.01 to 0.03 px


@pytest.fixture(scope="module")
def grid():
    """The grid that all sheets here are drawn on."""
    return inked.grid_without_spokes()


def heart(deg):
    """A smooth closed line, flat in front and steep behind."""
    return 0.55 + 0.35 * np.cos(np.radians(deg))


def read(grid, *layers, **told):
    """Traces found on grey rings under painted layers."""
    picture = inked.paint(inked.grid_layers(grid, GREY), *layers)
    return find_traces(inked.sheet_of(picture, grid), grid, settings=Settings(**told))


def errors_px(found, rho_of_deg, grid):
    """Radial error of every sample, px."""
    return (found.trace.rho - rho_of_deg(found.trace.plane_deg)) * grid.outer_px


@pytest.mark.parametrize("width", [1.2, 2.0, 3.7, 6.0])
def test_solid_line(grid, width):
    """A solid line is found by itself, placed to hundredths of a pixel, and its width measured."""
    (found,) = read(grid, (inked.line_cover(grid, heart, width), BLUE))

    error = errors_px(found, heart, grid)
    assert np.median(np.abs(error)) < PLACE_PX
    assert np.percentile(np.abs(error), 95) < 0.2
    assert found.dash == "solid"
    assert found.trace.width_px == pytest.approx(width, abs=0.15)
    assert found.doubt == 0


def test_dashed_line(grid):
    """A dashed line is one trace: its gaps are bridged smoothly and said to be."""
    dashes = inked.line_cover(grid, heart, 2.2, on=lambda deg: (deg % 6) < 3.5)

    (found,) = read(grid, (dashes, BLUE))

    error = np.abs(errors_px(found, heart, grid))
    assert found.dash == "dashed"
    assert np.median(error) < 4 * PLACE_PX
    assert np.percentile(error, 95) < 0.8
    assert (found.trace.state == "bridged").any()


def test_two_traces_that_cross(grid):
    """Two inks that cross twice are both followed through the crossings."""
    other = lambda deg: 0.55 - 0.25 * np.cos(np.radians(deg))  # noqa: E731

    found = read(grid, (inked.line_cover(grid, heart, 2.4), BLUE), (inked.line_cover(grid, other, 2.4), ORANGE))

    assert len(found) == 2
    for line in (heart, other):
        best = min(np.percentile(np.abs(errors_px(item, line, grid)), 95) for item in found)
        assert best < 0.3


def test_filled_trace(grid):
    """A translucent fill under the line does not pull it inward."""
    rho, deg = inked.plane_of_pixels(grid)
    fill = 0.3 * np.clip((heart(deg) - rho) * grid.outer_px + 0.5, 0, 1)

    (found,) = read(grid, (fill, BLUE), (inked.line_cover(grid, heart, 2.0), BLUE))

    assert found.filled
    assert np.median(np.abs(errors_px(found, heart, grid))) < 3 * PLACE_PX


def test_cover_hides(grid):
    """Under a cover nothing is read; the line is bridged there and its error grows."""
    layer = (inked.line_cover(grid, heart, 2.2), BLUE)
    x, y = (float(v) for v in grid.to_picture(heart(30.0), 30.0))

    (plain,) = read(grid, layer)
    (covered,) = read(grid, layer, covers=((x - 14, y - 14, 28, 28),))

    k = int(np.argmin(np.abs(plain.trace.plane_deg - 30)))
    assert plain.trace.state[k] == "seen"
    assert covered.trace.state[k] == "bridged"
    assert covered.trace.u_bridge_px[k] > plain.trace.u_bridge_px[k] + 0.3


def test_pin_draws_the_trace(grid):
    """A pin settles which way a line goes where its ink is missing for a long way."""
    gap = inked.line_cover(grid, heart, 2.2, on=lambda deg: np.abs((deg - 60 + 180) % 360 - 180) > 12)
    x, y = (float(v) for v in grid.to_picture(0.80, 60.0))

    (found,) = read(grid, (gap, BLUE), pins=((x, y),), inks=("#1f4fb4",))

    assert found.trace.rho[int(np.argmin(np.abs(found.trace.plane_deg - 60)))] == pytest.approx(0.80, abs=0.03)


def test_told_ink_that_is_not_there(grid):
    """An ink that the chart does not have is refused, and those that it has are named."""
    with pytest.raises(NotReadError, match="no trace was found in the ink #00ff00.*#1f4fb4"):
        read(grid, (inked.line_cover(grid, heart, 2.2), BLUE), inks=("#00ff00",))


def test_bare_grid(grid):
    """Rings alone are no trace."""
    with pytest.raises(NotReadError, match="no trace was found.*--ink"):
        read(grid)


def test_sheet_is_not_altered(grid):
    """Finding traces leaves the sheet as it was."""
    picture = inked.paint(inked.grid_layers(grid, GREY), (inked.line_cover(grid, heart, 2.0), BLUE))
    sheet = inked.sheet_of(picture, grid)
    before = sheet.contrast.copy()

    find_traces(sheet, grid, settings=Settings(covers=((300, 300, 20, 20),)))

    assert np.array_equal(sheet.contrast, before)
