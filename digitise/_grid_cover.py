"""Take the drawn grid away from an ink's coverage, where grid and trace share a colour.

Rings and spokes are known lines; how dark each is drawn is measured from the picture itself: the typical profile
across it, along all of its length, which a trace that crosses it does not change. Opaque drawing composes as
m = a + (1 - a) g, so a = (m - g) / (1 - g) recovers the trace's coverage a wherever the grid's g is not near 1;
where it is, nothing can be told and the pixel counts as hidden.
"""

import cv2
import numpy as np

from .ink import Layer

__all__ = ["remove_grid"]

HALF_PROFILE_PX = 5.0
PROFILE_STEP_PX = 0.25
OPAQUE = 0.82  # above this grid coverage, what lies there cannot be told


def remove_grid(layer, sheet, grid):
    """Return a `Layer` with the grid's own coverage taken from `cover` and `body` and added to `hidden`."""
    cover, hidden = _remove(layer.cover, layer.hidden, sheet, grid)
    if layer.body is layer.cover:
        return Layer(cover=cover, hidden=hidden, body=cover)
    body, _ = _remove(layer.body, layer.hidden, sheet, grid)
    return Layer(cover=cover, hidden=hidden, body=body)


def _remove(cover, hidden, sheet, grid):
    offsets = np.arange(-HALF_PROFILE_PX, HALF_PROFILE_PX + 1e-6, PROFILE_STEP_PX)
    ring_profiles = np.stack(
        [_ring_profile(cover, sheet, grid, rho, offsets, d) for rho, d in zip(grid.ring_rho, grid.ring_drawn)]
    )
    grid_cover = _rings_on_sheet(sheet, grid, ring_profiles, offsets)
    if len(grid.spoke_deg):
        spoke_profile = _spoke_profile(cover, sheet, grid, offsets)
        if spoke_profile.max() > 0.04:
            spokes = _spokes_on_sheet(sheet, grid, spoke_profile, offsets)
            grid_cover = 1 - (1 - grid_cover) * (1 - spokes)
    if grid_cover.max() < 0.04:
        return cover, hidden
    left = (cover - grid_cover) / np.maximum(1 - grid_cover, 1 - OPAQUE)
    # A pixel-phase mismatch of a sharp line leaves a little: what is small beside the grid there is the grid's.
    left = np.where(left < 0.35 * grid_cover, 0, left)
    # A ring shows only where the pixel is inked at all: a gap of a dashed ring hides nothing.
    hidden = np.maximum(hidden, np.minimum(grid_cover, cover))
    return np.where(grid_cover < OPAQUE, np.clip(left, 0, 1.1), 0).astype(np.float32), hidden.astype(np.float32)


def _sample(image, sheet, rho, plane_deg):
    x, y = sheet.to_sheet(rho, plane_deg)
    return cv2.remap(image, x.astype(np.float32), y.astype(np.float32), cv2.INTER_LINEAR, borderValue=0)


def _angles(grid, n):
    start, end = grid.arc_deg
    return start + (np.arange(n) + 0.5) / n * ((end - start - 1e-9) % 360 + 1e-9)


def _ring_profile(cover, sheet, grid, rho, offsets, drawn):
    """Typical coverage across a ring."""
    angles = _angles(grid, 720)
    samples = _sample(cover, sheet, rho + offsets[None, :] / sheet.outer_px, angles[:, None])
    return np.clip(_typical(samples, drawn), 0, 1)


def _typical(samples, drawn):
    """Mean profile of the drawn part of a line, (n, m) samples along and across it; a trace over it does not count.

    The drawn share ranks the samples: with a share d of a dashed line inked, the rank 1 - 0.6 d lies inside the inked
    ones, below those that a trace has darkened.
    """
    middle = samples.shape[1] // 2
    peak = samples[:, middle - 4 : middle + 5].max(axis=1)
    level = np.quantile(peak, np.clip(1 - 0.6 * drawn, 0.4, 0.85))
    if level < 0.03:
        return np.zeros(samples.shape[1], np.float32)
    like = (peak > 0.6 * level) & (peak < 1.2 * level + 0.02)
    return np.median(samples[like], axis=0)


def _spoke_profile(cover, sheet, grid, offsets):
    rho = np.linspace(0.35, 0.97, 160)
    drawn = float(np.median(grid.ring_drawn[1:])) if len(grid.ring_drawn) > 1 else 1.0
    profiles = []
    for spoke in grid.spoke_deg:
        turn = np.degrees(offsets[None, :] / (rho[:, None] * sheet.outer_px))
        samples = _sample(cover, sheet, np.broadcast_to(rho[:, None], turn.shape), spoke + turn)
        profiles.append(_typical(samples, drawn))
    return np.clip(np.stack(profiles), 0, 1)


def _rings_on_sheet(sheet, grid, profiles, offsets):
    radius = sheet.rho * sheet.outer_px
    out = np.zeros(radius.shape, np.float32)
    for rho, profile in zip(grid.ring_rho, profiles):
        if profile.max() < 0.04:
            continue
        near = np.abs(radius - rho * sheet.outer_px) < HALF_PROFILE_PX
        value = np.interp(radius[near] - rho * sheet.outer_px, offsets, profile)
        out[near] = 1 - (1 - out[near]) * (1 - value)
    return out


def _spokes_on_sheet(sheet, grid, profiles, offsets):
    """Each spoke's profile, by perpendicular distance; near the hub several overlap."""
    out = np.zeros(sheet.rho.shape, np.float32)
    inside = sheet.rho < 1.02
    radius = sheet.rho * sheet.outer_px
    for spoke, profile in zip(grid.spoke_deg, profiles):
        if profile.max() < 0.04:
            continue
        turn = np.radians(sheet.plane_deg - spoke)
        across = radius * np.sin(turn)
        near = inside & (np.abs(across) < HALF_PROFILE_PX) & (np.cos(turn) > 0)
        value = np.interp(across[near], offsets, profile)
        out[near] = 1 - (1 - out[near]) * (1 - value)
    return out
