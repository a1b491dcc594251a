"""Take the drawn grid away from an ink's coverage, where grid and trace share a colour.

Rings and spokes are known lines; how dark each is drawn is measured from the picture itself: the typical coverage of
its pixels by their distance from the line, along all of its length, which a trace that crosses it does not change.
Opaque drawing composes as m = a + (1 - a) g, so a = (m - g) / (1 - g) recovers the trace's coverage a wherever the
grid's g is not near 1; where it is, nothing can be told and the pixel counts as hidden.
"""

from dataclasses import replace

import numpy as np

__all__ = ["remove_grid"]

HALF_PROFILE_PX = 4.0
BIN_PX = 0.25
OPAQUE = 0.82  # above this grid coverage, what lies there cannot be told
BESIDE_GRID = 0.7
FAINT = 0.04  # a grid fainter than this in the ink's coverage needs no removal
HUB_PX = 12.0  # spokes are not measured nearer to the centre: they overlap there


def remove_grid(layer, sheet, grid):
    """Return a `Layer` with the grid's own coverage taken from `cover` and `body` and added to `hidden`."""
    rings, spokes = _ring_pixels(sheet, grid), _spoke_pixels(sheet, grid)
    body, grid_cover = _remove(layer.cover, grid, rings, spokes)
    # A ring hides only where the pixel is inked at all: a gap of a dashed ring hides nothing.
    hidden = np.maximum(layer.hidden, np.minimum(grid_cover, layer.cover))
    # Beside a grid line of its own colour an ink is only partly known: it counts less for where the trace runs.
    cover = body * (1 - BESIDE_GRID * grid_cover)
    if layer.body is not layer.cover:
        body, _ = _remove(layer.body, grid, rings, spokes)
    return replace(layer, cover=cover, hidden=hidden, body=body)


def _remove(cover, grid, rings, spokes):
    """Coverage without the grid, and the grid's own."""
    flat = cover.ravel()
    clear = np.ones(flat.size, np.float32)
    inner_drawn = float(np.median(grid.ring_drawn[1:])) if len(grid.ring_drawn) > 1 else 1.0
    lines = [(pixels, bins, float(d), slice(None)) for (pixels, bins), d in zip(rings, grid.ring_drawn)]
    lines += [(pixels, bins, inner_drawn, outer) for pixels, bins, outer in spokes]
    for pixels, bins, drawn, measured in lines:
        profile = _profile(flat[pixels[measured]], bins[measured], drawn)
        if profile.max() > FAINT:
            clear[pixels] *= 1 - profile[bins]
    grid_cover = (1 - clear).reshape(cover.shape)
    if grid_cover.max() < FAINT:
        return cover, grid_cover
    left = (cover - grid_cover) / np.maximum(1 - grid_cover, 1 - OPAQUE)
    # Renderers differ in how they spread a line over pixels: what is small beside the grid there is the grid's.
    left = np.where((left < 0.35 * grid_cover) | (grid_cover > OPAQUE), 0, left)
    return np.clip(left, 0, 1.1).astype(np.float32), grid_cover


def _profile(values, bins, drawn):
    """Typical coverage by distance bin.

    The drawn share ranks the samples: with a share d of a dashed line inked, the rank 1 - 0.6 d lies inside the inked
    ones, below those that a trace has darkened.
    """
    n_bins = int(2 * HALF_PROFILE_PX / BIN_PX) + 1
    rank = np.clip(1 - 0.6 * drawn, 0.4, 0.85)
    order = np.lexsort((values, bins))
    count = np.bincount(bins, minlength=n_bins)
    first = np.cumsum(count) - count
    at = first + np.minimum((rank * count).astype(int), np.maximum(count - 1, 0))
    profile = np.where(count > 7, values[order][np.minimum(at, len(values) - 1)], 0) if len(values) else np.zeros(n_bins)
    return np.clip(profile, 0, 1).astype(np.float32)


def _bins(distance_px):
    return np.round((distance_px + HALF_PROFILE_PX) / BIN_PX).astype(np.int64)


def _ring_pixels(sheet, grid):
    """(flat pixel index, distance bin) of the pixels near each ring."""
    radius = (sheet.rho * sheet.outer_px).ravel()
    order = np.argsort(radius, kind="stable")
    ordered = radius[order]
    out = []
    for rho in grid.ring_rho:
        middle = rho * sheet.outer_px
        low, high = np.searchsorted(ordered, (middle - HALF_PROFILE_PX, middle + HALF_PROFILE_PX))
        out.append((order[low:high], _bins(ordered[low:high] - middle)))
    return out


def _spoke_pixels(sheet, grid):
    """(flat pixel index, distance bin, which of them to measure) of the pixels near each spoke."""
    out = []
    for spoke in grid.spoke_deg:
        x0, y0 = sheet.to_sheet(0.0, spoke)
        x1, y1 = sheet.to_sheet(1.01, spoke)
        pixels, distance, along = _band(sheet.rho.shape, float(x0), float(y0), float(x1), float(y1))
        length = np.hypot(x1 - x0, y1 - y0)
        outer = (along > max(HUB_PX, 0.3 * length)) & (along < 0.97 * length)
        out.append((pixels, _bins(distance), outer))
    return out


def _band(shape, x0, y0, x1, y1):
    """Pixels within HALF_PROFILE_PX of a segment: flat index, signed distance, place along it."""
    length = max(np.hypot(x1 - x0, y1 - y0), 1e-6)
    tx, ty = (x1 - x0) / length, (y1 - y0) / length
    # Walk along the segment's steeper axis and take the pixels beside it, without visiting the whole sheet.
    n = int(length) + 1
    steps = np.linspace(0, length, n)
    reach = np.arange(-int(HALF_PROFILE_PX * 1.5) - 1, int(HALF_PROFILE_PX * 1.5) + 2)
    if abs(tx) >= abs(ty):
        px = np.round(x0 + steps * tx).astype(np.int64)[:, None] + 0 * reach
        py = np.round(y0 + steps * ty).astype(np.int64)[:, None] + reach
    else:
        px = np.round(x0 + steps * tx).astype(np.int64)[:, None] + reach
        py = np.round(y0 + steps * ty).astype(np.int64)[:, None] + 0 * reach
    px, py = px.ravel(), py.ravel()
    across, along = (px - x0) * -ty + (py - y0) * tx, (px - x0) * tx + (py - y0) * ty
    keep = (px >= 0) & (py >= 0) & (px < shape[1]) & (py < shape[0]) & (np.abs(across) < HALF_PROFILE_PX) & (along >= 0)
    index, first = np.unique(py[keep] * shape[1] + px[keep], return_index=True)
    return index, across[keep][first], along[keep][first]
