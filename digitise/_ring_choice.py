"""Which of the candidate lines about the centre are rings of the grid, and which are traces, letters or spokes.

A ring is drawn all the way round (dashes and what hides it aside), runs true to a few tenths of a pixel, is darker
or lighter than the paper as its fellows are, and mostly stands at an even step with them. A trace may do one of
these things, not all. The outermost ring, the rim, may differ from the others in all but the first two.
"""

from dataclasses import dataclass

import numpy as np

from ._ring_points import STEP_PX, ring_points
from ._unwrap import outer_radius

__all__ = ["Candidate", "choose_rings", "even_step"]

BLOCK_ARC_PX = 24.0  # sectors are at least this long, to hold a dash and its gap
MAX_BLOCKS, MIN_BLOCKS = 72, 12
NEAR_PX = 0.6  # a sector holds the line when it lies this near the usual radius
MIN_RADIUS_PX = 9.0  # nearer the centre, spokes and traces run into one
SMALL_RADIUS_PX = 26.0  # below it a ring needs better evidence
MIN_SCORE = 0.45  # of the radial profile, for a ring that stands by itself
MIN_SHARE = 0.55  # of the sectors
MAX_WANDER_PX = 0.75
WEAK_SCORE, WEAK_SHARE = 0.18, 0.2  # enough where the even step foretells a ring
STEP_MISS_PX = 0.9


@dataclass(frozen=True, eq=False, kw_only=True)
class Candidate:
    """One line about the centre.

    rho, score : from the radial profile; points : LinePoints; share : of the sectors that hold the line near its
    usual radius; wander_px : robust scatter of the sectors' positions
    """

    rho: float
    score: float
    points: object
    share: float
    wander_px: float


def choose_rings(image, homography, rho, score, *, arc_deg, reach_px=5.0):
    """Choose the rings among candidate radii.

    Parameters
    ----------
    image : (h, w) float32 grey; homography : chart plane -> px; rho, score : (n,) of the radial profile, rho falling
    arc_deg : drawn arc

    Returns
    -------
    list of Candidate, rho falling; the first is the rim; empty when there is no ring
    """
    outer_px = outer_radius(homography)
    found = []
    for r, s in zip(rho, score):
        if r * outer_px < MIN_RADIUS_PX:
            continue
        points = ring_points(image, homography, r, arc_deg=arc_deg, reach_px=reach_px, sign=np.sign(s), n_max=180)
        share, wander = _character(points, r * outer_px)
        found.append(Candidate(rho=float(r), score=float(s), points=points, share=share, wander_px=wander))
    sure = [c for c in found if _stands_alone(c, outer_px)]
    if not sure:
        return []
    rim = _rim(sure)
    sign = np.sign(sum(np.sign(c.score) * c.share for c in sure if c is not rim) or rim.score)
    rings = [c for c in sure if c.rho < rim.rho and (np.sign(c.score) == sign)]
    step = even_step(np.array([c.rho for c in rings]) * outer_px)
    if step is not None:
        size, first = step
        for c in found:
            if c in rings or c.rho >= rim.rho or np.sign(c.score) != sign:
                continue
            miss = abs((c.rho * outer_px - first + size / 2) % size - size / 2)
            if miss < STEP_MISS_PX and abs(c.score) > WEAK_SCORE and c.share > WEAK_SHARE:
                rings.append(c)
    return [rim, *sorted(rings, key=lambda c: -c.rho)]


def _stands_alone(c, outer_px):
    """Whether a candidate is a ring on its own evidence."""
    small = c.rho * outer_px < SMALL_RADIUS_PX
    return (
        abs(c.score) > (0.7 if small else MIN_SCORE)
        and c.share > (0.7 if small else MIN_SHARE)
        and c.points.drawn > 0.25
        and c.wander_px < MAX_WANDER_PX
    )


def _rim(sure):
    """The outermost ring; far outside the first guess it needs more evidence than letters can give."""
    for c in sure:
        if c.rho < 1.04 or (abs(c.score) > 0.75 and c.share > 0.75):
            return c
    return sure[-1]


def even_step(radius_px):
    """The even step of rings: (step, a ring's radius) in px, or None when they are uneven or fewer than three."""
    if len(radius_px) < 3:
        return None
    radius = np.sort(radius_px)
    gap = float(np.median(np.diff(radius)))
    for size in (gap, gap / 2, gap / 3):
        if size < 3 * STEP_MISS_PX:
            break
        k = np.round((radius - radius[0]) / size)
        if len(np.unique(k)) < len(k):
            continue
        design = np.stack([k, np.ones_like(k)], axis=1)
        (slope, first), *_ = np.linalg.lstsq(design, radius, rcond=None)
        if np.abs(design @ [slope, first] - radius).max() < STEP_MISS_PX:
            return float(slope), float(first)
    return None


def _character(points, radius_px):
    """Share of the sectors that hold a ring near its usual radius, and the robust scatter of their positions, px."""
    n, m = points.ink.shape
    blocks = int(np.clip(2 * np.pi * radius_px / BLOCK_ARC_PX, MIN_BLOCKS, MAX_BLOCKS))
    edge = np.linspace(0, n, blocks + 1).astype(int)
    ink = np.add.reduceat(points.ink, edge[:-1], axis=0) / np.diff(edge)[:, None]
    s = (np.arange(m) - m // 2) * STEP_PX
    window = np.abs(s) <= min(points.width_px / 2 + 1.5, 0.7 * s[-1])
    positive = np.maximum(ink, 0) * window
    centre = (positive * s).sum(axis=1) / np.maximum(positive.sum(axis=1), 1e-9)
    peak = positive.max(axis=1)
    noise = 1.4826 * float(np.median(np.abs(ink[:, ~window])))
    there = peak > max(2.5 * noise, 1e-6)
    if there.sum() < 4:
        return 0.0, 9.0
    held = there & (peak > 0.3 * np.median(peak[there]))
    middle = np.median(centre[held])
    wander = 1.4826 * float(np.median(np.abs(centre[held] - middle)))
    return float((held & (np.abs(centre - middle) < NEAR_PX)).mean()), wander
