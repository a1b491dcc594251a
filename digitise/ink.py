"""Which inks there are on a chart, and how much of one ink each pixel holds.

Anti-aliasing blends colours linearly in the picture's own values, so a pixel on a line is paper + a (ink - paper),
and where the line crosses a grid line or another trace it is a blend of three. Inks are therefore directions away
from the paper: pixels on the crest of a line are gathered by direction, then the coverage of one ink is solved with
the best-fitting second colour beside it. A black trace on a grey grid has no direction of its own; there the
coverage that the known grid lines explain is taken away first (`_grid_cover`).
"""

from dataclasses import dataclass

import cv2
import numpy as np

__all__ = ["Ink", "Layer", "find_inks", "separate_ink"]

LEAST_STRENGTH = 24.0  # colour levels: fainter pixels do not vote for an ink
BIN_DEG = 1.5  # direction histogram bin
APART_DEG = 5.0  # inks closer in direction than this are one (told inks may be closer)
LUMA = np.array([0.299, 0.587, 0.114])  # ITU-R BT.601-7, 2.5.1, as JPEG (ITU-T T.871) uses it
COLOUR_SPREAD_DEG = 4.0  # ink pixels scattered more than this in direction: the colours are blurred
NEUTRAL_DEG = 6.0
LEAST_LUMA_CONTRAST = 45.0  # colour levels of lightness that the place can be read from


@dataclass(frozen=True, eq=False, kw_only=True)
class Ink:
    """A colour that lines are drawn in.

    rgb : (3,) float, the undiluted colour; length_px : drawn length inside the rim, sheet px, about
    neutral : it differs from the paper in lightness alone (as grids and text mostly do)
    """

    rgb: np.ndarray
    length_px: float
    neutral: bool

    @property
    def hex(self):
        """The colour as "#rrggbb"."""
        return "#" + "".join(f"{round(float(np.clip(c, 0, 255))):02x}" for c in self.rgb)


@dataclass(frozen=True, eq=False, kw_only=True)
class Layer:
    """One ink's share of every sheet pixel.

    cover : (h, w) float32, coverage by the ink, 0 to about 1: tells where the ink is
    hidden : (h, w) float32, coverage by something else under which the ink may run, 0 to 1
    body : (h, w) float32, coverage that tells the line's exact place: `cover`, or coverage from lightness alone where
        the picture's colours are blurred (JPEG keeps colour at half resolution)
    """

    cover: np.ndarray
    hidden: np.ndarray
    body: np.ndarray
    neutral: bool


def find_inks(sheet):
    """The inks on a `Sheet`, strongest line first, grid and text included, as a tuple of `Ink`."""
    crest = _crest(sheet)
    vectors = sheet.contrast[crest]
    strength = sheet.strength[crest]
    if len(vectors) < 20:
        return ()
    frame = _frame(sheet.paper_rgb)
    modes = _direction_modes(vectors / strength[:, None], strength, frame)
    inks = []
    for direction in modes:
        along = vectors @ direction
        near = along > np.cos(np.radians(APART_DEG)) * strength
        if near.sum() < 8:
            continue
        # Blurred lines reach their colour only where they crowd or cross.
        full = float(np.percentile(strength[near], 98))
        length = float(near.sum())
        neutral = _is_neutral(direction, sheet.paper_rgb)
        inks.append(Ink(rgb=sheet.paper_rgb + direction * full, length_px=length, neutral=neutral))
    return tuple(sorted(inks, key=lambda ink: -ink.length_px))


def _is_neutral(direction, paper_rgb):
    grey = _frame(paper_rgb)[2]
    return bool(abs(direction @ grey) > np.cos(np.radians(NEUTRAL_DEG)) * np.linalg.norm(direction))


def _crest(sheet):
    """Pixels that are the strongest of their 3 x 3 neighbourhood across at least one axis: the middle of lines."""
    s = sheet.strength
    inside = (sheet.rho < 1.02) & (s > max(LEAST_STRENGTH, 6 * sheet.noise))
    across = (s >= _shift(s, 0, 1)) & (s > _shift(s, 0, -1))
    down = (s >= _shift(s, 1, 0)) & (s > _shift(s, -1, 0))
    return inside & (across | down)


def _shift(image, dy, dx):
    return np.roll(image, (dy, dx), axis=(0, 1))


def _frame(paper_rgb):
    """Orthonormal axes with the last one from the paper towards its opposite grey (black on light paper)."""
    grey = -np.ones(3) if paper_rgb.mean() > 127 else np.ones(3)
    grey = grey / np.linalg.norm(grey)
    a = np.array([1.0, -1.0, 0.0]) / np.sqrt(2)
    return np.stack([a, np.cross(grey, a), grey])


def _direction_modes(units, strength, frame):
    """Densest directions of unit vectors, as unit vectors, at least APART_DEG apart."""
    # Azimuthal equidistant map about the grey axis: bins have nearly equal angles where inks are.
    local = units @ frame.T
    tilt = np.degrees(np.arccos(np.clip(local[:, 2], -1, 1)))
    turn = np.arctan2(local[:, 1], local[:, 0])
    size = int(360 / BIN_DEG) + 3
    x = np.round((tilt * np.cos(turn) + 180) / BIN_DEG).astype(int)
    y = np.round((tilt * np.sin(turn) + 180) / BIN_DEG).astype(int)
    weight = np.clip(strength / 60.0, 0, 2)
    counts = np.bincount(y * size + x, weights=weight, minlength=size * size).reshape(size, size).astype(np.float32)
    smooth = cv2.GaussianBlur(counts, (0, 0), 1.0)
    modes = []
    for _ in range(10):
        k = int(smooth.argmax())
        cy, cx = divmod(k, size)
        reach = int(APART_DEG / BIN_DEG)
        near = (np.abs(x - cx) <= reach) & (np.abs(y - cy) <= reach)
        if weight[near].sum() < 12 or smooth.flat[k] <= 0:
            break
        mean = (units[near] * strength[near, None]).sum(axis=0)
        mean = mean / np.linalg.norm(mean)
        if all(mean @ other < np.cos(np.radians(APART_DEG)) for other in modes):
            modes.append(mean)
        # A blurred cloud (JPEG) must not leave a ring of false modes round its peak: clear all that falls from it.
        smooth[max(cy - 2 * reach, 0) : cy + 2 * reach + 1, max(cx - 2 * reach, 0) : cx + 2 * reach + 1] = 0
    return modes


def separate_ink(sheet, ink_rgb, other_rgbs):
    """Solve how much of one ink every pixel holds, given the other colours on the sheet; returns a `Layer`."""
    own = np.asarray(ink_rgb, float) - sheet.paper_rgb
    power = float(own @ own)
    threshold = max(5.0, 4.0 * sheet.noise)
    active = sheet.strength > threshold
    vectors = sheet.contrast[active].astype(np.float32)
    own32 = own.astype(np.float32)
    cover = np.clip(vectors @ own32 / power, 0, None)
    misfit = np.linalg.norm(vectors - cover[:, None] * own32, axis=1)
    hidden = misfit / np.sqrt(power)
    for rgb in other_rgbs:
        other = np.asarray(rgb, float) - sheet.paper_rgb
        cosine = other @ own / np.sqrt((other @ other) * power)
        if cosine > np.cos(np.radians(max(3.0, 1.2 * sheet.noise))):
            continue
        a, b = _solve_pair(vectors, own32, other.astype(np.float32))
        left = np.linalg.norm(vectors - a[:, None] * own32 - b[:, None] * other.astype(np.float32), axis=1)
        better = left < misfit - 1e-4
        cover, hidden, misfit = np.where(better, a, cover), np.where(better, b, hidden), np.where(better, left, misfit)
    full_cover = np.zeros(sheet.strength.shape, np.float32)
    full_hidden = np.zeros(sheet.strength.shape, np.float32)
    full_cover[active] = np.clip(cover, 0, 1.2)
    full_hidden[active] = np.clip(hidden, 0, 1)
    body = full_cover
    luma = float(own @ LUMA)
    if abs(luma) > LEAST_LUMA_CONTRAST and _colour_spread(vectors, own32, cover) > COLOUR_SPREAD_DEG:
        body = np.clip(sheet.contrast @ (LUMA / luma).astype(np.float32), 0, 1.2)
    return Layer(cover=full_cover, hidden=full_hidden, body=body, neutral=_is_neutral(own, sheet.paper_rgb))


def _colour_spread(vectors, own, cover):
    """Median angle, degrees, between the ink and the pixels on the middle of its lines."""
    core = vectors[cover > 0.6 * np.percentile(cover[cover > 0.15], 90)] if (cover > 0.15).sum() > 20 else vectors[:0]
    if len(core) < 20:
        return 0.0
    cosine = core @ own / np.maximum(np.linalg.norm(core, axis=1) * np.linalg.norm(own), 1e-6)
    return float(np.degrees(np.arccos(np.clip(np.median(cosine), -1, 1))))


def _solve_pair(vectors, own, other):
    """Non-negative least squares with two columns, for every row of `vectors`."""
    gram = np.array([[own @ own, own @ other], [own @ other, other @ other]], float)
    right = np.stack([vectors @ own, vectors @ other], axis=1)
    both = right @ np.linalg.inv(gram).T.astype(np.float32)
    a_alone = np.clip(right[:, 0] / gram[0, 0], 0, None)
    b_alone = np.clip(right[:, 1] / gram[1, 1], 0, None)
    a = np.where(both[:, 1] < 0, a_alone, np.clip(both[:, 0], 0, None))
    b = np.where(both[:, 0] < 0, b_alone, np.clip(both[:, 1], 0, None))
    return a, b
