"""Sheets painted from numbers: lines of known place, width and ink, for the tests of the ink stages."""

import numpy as np

from digitise._sheet import cut_sheet
from digitise.picture import Picture

from .grids import plane_grid

PAPER = np.array([255.0, 255.0, 255.0])
SIZE = 640
RINGS = (1.0, 0.75, 0.5, 0.25)


def cover_of(distance_px, width_px):
    """Coverage (h, w) of a line by the distance to its middle: a box filter, as anti-aliasing renderers have."""
    return np.clip(width_px / 2 + 0.5 - np.abs(distance_px), 0, 1)


def plane_of_pixels(grid):
    """rho and plane angle (degrees) of every pixel of a SIZE x SIZE picture."""
    ys, xs = np.mgrid[0:SIZE, 0:SIZE].astype(float)
    return grid.to_plane(xs, ys)


def line_cover(grid, rho_of_deg, width_px, *, on=None):
    """Coverage of the line rho(angle); a smooth curve, so the distance is the radial one times the slant's cosine."""
    rho, deg = plane_of_pixels(grid)
    target = rho_of_deg(deg)
    slope = (rho_of_deg(deg + 0.05) - rho_of_deg(deg - 0.05)) / np.radians(0.1)
    slant = 1 / np.sqrt(1 + (slope / np.maximum(target, 1e-3)) ** 2)
    cover = cover_of((rho - target) * grid.outer_px * slant, width_px)
    return cover if on is None else cover * on(deg)


def paint(*layers, paper=PAPER):
    """Compose (cover, rgb) layers in order on paper into a Picture."""
    rgb = np.broadcast_to(paper, (SIZE, SIZE, 3)).astype(float)
    for cover, ink in layers:
        rgb = rgb + cover[..., None] * (np.asarray(ink, float) - rgb)
    return Picture(rgb=np.round(rgb).astype(np.uint8), path="painted", sha256="", width=SIZE, height=SIZE)


def grid_layers(grid, ink, width_px=1.2):
    """Rings of a grid as one layer."""
    rho, _ = plane_of_pixels(grid)
    cover = np.zeros((SIZE, SIZE))
    for ring in grid.ring_rho:
        cover = np.maximum(cover, cover_of((rho - ring) * grid.outer_px, width_px))
    return cover, np.asarray(ink, float)


def grid_without_spokes():
    """The grid that the painted sheets are drawn on."""
    return plane_grid(RINGS, spoke_step_deg=np.nan)


def sheet_of(picture, grid):
    """The sheet of a painted picture."""
    return cut_sheet(picture, grid)
