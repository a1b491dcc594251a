"""Inks and their coverage: painted blends, found again and separated."""

import io

import numpy as np
import pytest
from PIL import Image

from digitise._grid_cover import remove_grid
from digitise.ink import find_inks, separate_ink
from digitise.picture import Picture

from . import inked

RED, GREEN, GREY, BLACK = (200, 16, 46), (0, 138, 62), (176, 176, 176), (0, 0, 0)


@pytest.fixture(scope="module")
def grid():
    """The grid that all sheets here are drawn on."""
    return inked.grid_without_spokes()


def two_traces(grid):
    """A red and a green line that do not cross, on grey rings."""
    one = inked.line_cover(grid, lambda deg: 0.6 + 0.2 * np.cos(np.radians(deg)), 2.4)
    two = inked.line_cover(grid, lambda deg: 0.3 + 0.05 * np.cos(np.radians(2 * deg)), 1.3)
    return one, two, inked.paint(inked.grid_layers(grid, GREY), (one, RED), (two, GREEN))


def _near(ink, rgb, levels=12):
    return np.abs(ink.rgb - np.asarray(rgb)).max() <= levels


def test_finds_every_ink(grid):
    """Two traces and the grid are three inks; the grid's is neutral, the traces' are not."""
    _, _, picture = two_traces(grid)

    inks = find_inks(inked.sheet_of(picture, grid))

    for rgb, neutral in ((RED, False), (GREEN, False), (GREY, True)):
        like = [ink for ink in inks if _near(ink, rgb)]
        assert len(like) == 1
        assert like[0].neutral is neutral


def test_coverage_is_recovered(grid):
    """Coverage of one ink over the grid and beside another is that which was painted, to two hundredths."""
    one, _, picture = two_traces(grid)
    sheet = inked.sheet_of(picture, grid)
    inks = find_inks(sheet)

    layer = separate_ink(sheet, np.array(RED, float), [ink.rgb for ink in inks])

    y0, x0 = sheet.y0, sheet.x0
    true = one[y0 : y0 + layer.cover.shape[0], x0 : x0 + layer.cover.shape[1]]
    assert np.percentile(np.abs(layer.cover - true)[true > 0.05], 95) < 0.02
    assert np.percentile(layer.cover[(true == 0) & (sheet.rho < 1.05)], 99.5) < 0.05


def test_black_trace_apart_from_grey_grid(grid):
    """A black trace and a grey grid differ by place alone: the grid is taken off, the trace is left."""
    trace = inked.line_cover(grid, lambda deg: 0.62 + 0.2 * np.cos(np.radians(deg)), 2.4)
    picture = inked.paint(inked.grid_layers(grid, (128, 128, 128), 1.5), (trace, BLACK))
    sheet = inked.sheet_of(picture, grid)

    layer = remove_grid(separate_ink(sheet, np.zeros(3), [ink.rgb for ink in find_inks(sheet)]), sheet, grid)

    true = trace[sheet.y0 : sheet.y0 + layer.body.shape[0], sheet.x0 : sheet.x0 + layer.body.shape[1]]
    away = (true == 0) & (sheet.rho < 1.1)
    assert np.percentile(layer.body[away], 99.5) < 0.1
    assert np.median(layer.body[true > 0.95]) > 0.9


def test_lightness_places_a_jpeg(grid):
    """Where JPEG has blurred the colours, the line's body comes from lightness, closer to what was painted."""
    one, _, picture = two_traces(grid)
    file = io.BytesIO()
    Image.fromarray(picture.rgb).save(file, "JPEG", quality=50)
    rgb = np.asarray(Image.open(file).convert("RGB"))
    sheet = inked.sheet_of(Picture(rgb=rgb, path="jpeg", sha256="", width=inked.SIZE, height=inked.SIZE), grid)

    layer = separate_ink(sheet, np.array(RED, float), [ink.rgb for ink in find_inks(sheet)])

    true = one[sheet.y0 : sheet.y0 + layer.cover.shape[0], sheet.x0 : sheet.x0 + layer.cover.shape[1]]
    near = (true > 0.05) & (np.min([np.abs(sheet.rho - r) for r in grid.ring_rho], axis=0) > 0.03)
    assert layer.body is not layer.cover
    assert np.abs(layer.body - true)[near].mean() < np.abs(layer.cover - true)[near].mean()
