"""Which of the candidate lines about the centre are rings of the grid, and which are traces, letters or spokes.

A ring is drawn all the way round (dashes and what hides it aside), runs true to a few tenths of a pixel, is darker
or lighter than the paper as its fellows are, and mostly stands at an even step with them. A trace may do one of
these things, not all. The outermost ring, the rim, may differ from the others in all but the first two.
"""

from dataclasses import dataclass

import numpy as np

from ._ring_pattern import find_pattern
from ._ring_points import STEP_PX, ring_points
from ._robust import median, scatter
from ._unwrap import outer_radius

__all__ = ["Candidate", "choose_rings"]

BLOCK_ARC_PX = 24.0  # sectors are at least this long, to hold a dash and its gap
MAX_BLOCKS, MIN_BLOCKS = 72, 12
NEAR_PX = 0.6  # a sector holds the line when it lies this near the usual radius
MIN_RADIUS_PX = 10.5  # nearer the centre, spokes and traces run into one
SMALL_RADIUS_PX, SMALL_SHARE = 26.0, 0.09  # below it, or below this share of the rim, a ring needs better evidence
MIN_SCORE = 0.45  # of the radial profile, for a ring that stands by itself
MIN_SHARE = 0.55  # of the sectors
MAX_WANDER_PX = 0.75
MAX_FORETOLD_WANDER_PX = 0.55
WEAK_SHARE = 0.33  # enough where the even step foretells a ring
N_CUTS = 216  # at most, across a candidate
REACH_PX = 5.0  # half length of the cuts across a candidate
NARROW_REACH_PX = 3.0  # and across a place that the rule of the others foretells


@dataclass(frozen=True, eq=False, kw_only=True)
class Candidate:
    """One line about the centre.

    rho, score : from the radial profile; points : LinePoints; share : of the sectors that hold the line near its
    usual radius; wander_px : robust scatter of the sectors' positions; contrast : of the sectors, grey levels
    """

    rho: float
    score: float
    points: object
    share: float
    wander_px: float
    contrast: float


def choose_rings(image, homography, rho, score, *, arc_deg, avoid_deg=(), avoid_px=2.5):
    """Choose the rings among candidate radii.

    Parameters
    ----------
    image : (h, w) float32 grey; homography : chart plane -> px; rho, score : (n,) of the radial profile, rho falling
    arc_deg : drawn arc; avoid_deg, avoid_px : as for `ring_points`

    Returns
    -------
    list of Candidate, rho falling; the first is the rim; empty when there is no ring
    """
    outer_px = outer_radius(homography)

    def candidate(r, s, reach_px=REACH_PX):
        points = ring_points(
            image,
            homography,
            r,
            arc_deg=arc_deg,
            reach_px=reach_px,
            sign=np.sign(s),
            n_max=N_CUTS,
            avoid_deg=avoid_deg,
            avoid_px=avoid_px,
        )
        share, wander, contrast = _character(points, r * outer_px)
        return Candidate(
            rho=float(r), score=float(s), points=points, share=share, wander_px=wander, contrast=contrast
        )

    found = [candidate(r, s) for r, s in zip(rho, score) if r * outer_px > MIN_RADIUS_PX]
    sure = [c for c in found if _stands_alone(c, outer_px)]
    if not sure:
        return []
    rim = _rim(sure)
    sign = np.sign(sum(c.score * c.share * c.contrast for c in sure if c is not rim) or rim.score)
    rings = [c for c in sure if c.rho < rim.rho and np.sign(c.score) == sign]
    pattern = find_pattern(np.array([c.rho for c in [rim, *rings]]) * outer_px)
    rings = _without_strangers(rings, pattern, outer_px)
    rings += _foretold(found, rings, rim, pattern, outer_px, candidate)
    return [rim, *sorted(rings, key=lambda c: -c.rho)]


def _without_strangers(rings, pattern, outer_px):
    """Drop lines that no rule supports and whose contrast, completeness or small radius sets them apart."""
    kept = []
    for c in rings:
        others = [o for o in rings if o is not c]
        odd = pattern.kind != "none" and c.rho * outer_px < _small_px(outer_px)
        if others:
            louder = c.contrast > 1.7 * max(o.contrast for o in others)
            thinner = c.share < 0.8 * np.median([o.share for o in others])
            odd |= louder or thinner and abs(c.score) < 0.8 * np.median([abs(o.score) for o in others])
        if pattern.holds(c.rho * outer_px) or not odd:
            kept.append(c)
    return kept


def _foretold(found, rings, rim, pattern, outer_px, candidate):
    """Fainter or half-hidden rings at radii that the rule of the others foretells."""
    usual = np.median([c.contrast for c in rings]) if rings else rim.contrast
    usual_drawn = np.median([c.points.drawn for c in rings]) if rings else rim.points.drawn
    sign = np.sign(rings[0].score if rings else rim.score)
    min_share = WEAK_SHARE if pattern.kind == "even" else MIN_SHARE
    more = []
    for place in pattern.places_px:
        if not MIN_RADIUS_PX < place < rim.rho * outer_px - 2:
            continue
        if any(abs(c.rho * outer_px - place) < 2 * pattern.miss_px for c in [rim, *rings, *more]):
            continue
        near = [c for c in found if abs(c.rho * outer_px - place) < pattern.miss_px and np.sign(c.score) == sign]
        near.append(candidate(place / outer_px, sign * MIN_SCORE, NARROW_REACH_PX))
        best = max(near, key=lambda c: c.share)
        fits = best.share > min_share and best.points.drawn > min(0.25, 0.6 * usual_drawn)
        if fits and best.wander_px < MAX_FORETOLD_WANDER_PX and 0.4 < best.contrast / usual < 2.5:
            more.append(best)
    return more


def _small_px(outer_px):
    """Radius below which a ring needs better evidence."""
    return max(SMALL_RADIUS_PX, SMALL_SHARE * outer_px)


def _stands_alone(c, outer_px):
    """Whether a candidate is a ring on its own evidence."""
    small = c.rho * outer_px < _small_px(outer_px)
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


def _character(points, radius_px):
    """Share of the sectors that hold a ring near its usual radius, scatter of their positions (px), contrast."""
    n, m = points.ink.shape
    blocks = min(int(np.clip(2 * np.pi * radius_px / BLOCK_ARC_PX, MIN_BLOCKS, MAX_BLOCKS)), n)
    edge = np.linspace(0, n, blocks + 1).astype(int)
    ink = np.add.reduceat(points.ink, edge[:-1], axis=0) / np.diff(edge)[:, None]
    s = (np.arange(m) - m // 2) * STEP_PX
    window = np.abs(s) <= min(points.width_px / 2 + 1.5, 0.7 * s[-1])
    positive = np.maximum(ink, 0) * window
    centre = (positive * s).sum(axis=1) / np.maximum(positive.sum(axis=1), 1e-9)
    peak = positive.max(axis=1)
    noise = scatter(ink[:, ~window])
    there = peak > max(2.5 * noise, 1e-6)
    if there.sum() < 4:
        return 0.0, 9.0, 0.0
    held = there & (peak > 0.3 * median(peak[there]))
    middle = median(centre[held])
    wander = scatter(centre[held], middle)
    return float((held & (np.abs(centre - middle) < NEAR_PX)).mean()), wander, median(peak[there])
