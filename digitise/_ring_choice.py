"""Which of the candidate lines about the centre are rings of the grid, and which are traces, letters or spokes.

A ring is drawn all the way round (dashes and what hides it aside), runs true to a few tenths of a pixel, is darker
or lighter than the paper as its fellows are, and mostly stands at an even step with them. A trace may do one of
these things, not all. The outermost ring, the rim, may differ from the others in all but the first two.
"""

from dataclasses import dataclass

import numpy as np

from ._ring_points import STEP_PX, ring_points
from ._robust import median, scatter
from ._unwrap import outer_radius

__all__ = ["Candidate", "choose_rings", "even_step"]

BLOCK_ARC_PX = 24.0  # sectors are at least this long, to hold a dash and its gap
MAX_BLOCKS, MIN_BLOCKS = 72, 12
NEAR_PX = 0.6  # a sector holds the line when it lies this near the usual radius
MIN_RADIUS_PX = 10.5  # nearer the centre, spokes and traces run into one
SMALL_RADIUS_PX = 26.0  # below it a ring needs better evidence
MIN_SCORE = 0.45  # of the radial profile, for a ring that stands by itself
MIN_SHARE = 0.55  # of the sectors
MAX_WANDER_PX = 0.75
MAX_FORETOLD_WANDER_PX = 0.45
WEAK_SHARE = 0.33  # enough where the even step foretells a ring
STEP_MISS_PX = 0.9
MIN_LAW_GAP_PX = 6.0
LAW_RATIOS = (10 ** (-1 / 20), 10 ** (-1 / 10), 0.89**0.5)  # radius a dB: field, power, log-periodic
N_CUTS = 150  # at most, across a candidate
REACH_PX = 5.0  # half length of the cuts across a candidate


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

    def candidate(r, s):
        points = ring_points(
            image,
            homography,
            r,
            arc_deg=arc_deg,
            reach_px=REACH_PX,
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
    step = even_step(np.array([c.rho for c in [rim, *rings]]) * outer_px)
    rings = _without_strangers(rings, step, outer_px)
    if step is not None:
        places, min_share = step[1] + step[0] * np.arange(-200, 201), WEAK_SHARE
    else:
        places, min_share = _law_places(rings, rim, outer_px), MIN_SHARE
    rings += _foretold(found, rings, rim, places, sign, outer_px, candidate, min_share)
    return [rim, *sorted(rings, key=lambda c: -c.rho)]


def _off_step(c, step, outer_px):
    """Distance from the nearest place of the even step, px."""
    size, first = step
    return abs((c.rho * outer_px - first + size / 2) % size - size / 2)


def _without_strangers(rings, step, outer_px):
    """Drop lines whose contrast or completeness sets them apart and that no even step supports: round traces."""
    if len(rings) < 2:
        return rings
    kept = []
    for c in rings:
        others = [o for o in rings if o is not c]
        share = np.median([o.share for o in others])
        odd = c.contrast > 1.7 * max(o.contrast for o in others) or c.share < 0.8 * share
        supported = step is not None and _off_step(c, step, outer_px) < STEP_MISS_PX
        if supported or not odd:
            kept.append(c)
    return kept


def _foretold(found, rings, rim, places_px, sign, outer_px, candidate, min_share):
    """Fainter or half-hidden rings at radii that the step or the law of the others foretells."""
    usual = np.median([c.contrast for c in rings]) if rings else rim.contrast
    usual_drawn = np.median([c.points.drawn for c in rings]) if rings else rim.points.drawn
    more = []
    for place in places_px:
        if not MIN_RADIUS_PX < place < rim.rho * outer_px - 2:
            continue
        if any(abs(c.rho * outer_px - place) < 2 * STEP_MISS_PX for c in [rim, *rings, *more]):
            continue
        near = [c for c in found if abs(c.rho * outer_px - place) < STEP_MISS_PX and np.sign(c.score) == sign]
        best = max([*near, candidate(place / outer_px, sign * MIN_SCORE)], key=lambda c: c.share)
        fits = best.share > min_share and best.points.drawn > min(0.25, 0.6 * usual_drawn)
        if fits and best.wander_px < MAX_FORETOLD_WANDER_PX and 0.4 < best.contrast / usual < 2.5:
            more.append(best)
    return more


def _law_places(rings, rim, outer_px):
    """Radii of whole dB under the law (REFERENCES: field, power, log-periodic) that all rings obey, or none."""
    if len(rings) < 3:
        return []
    ratio = np.array([c.rho for c in rings]) / rim.rho
    edge = rim.rho * outer_px
    best, best_miss = None, 0.5
    for per_db in LAW_RATIOS:
        level = np.round(np.log(ratio) / np.log(per_db))
        miss = np.abs(per_db**level - ratio) * edge
        if miss.max() < STEP_MISS_PX and len(np.unique(level)) == len(level) and np.median(miss) < best_miss:
            best, best_miss = per_db, float(np.median(miss))
    places = [] if best is None else edge * best ** np.arange(1.0, 41.0)
    return [place for place in places if place * (1 - best) > MIN_LAW_GAP_PX]


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
    """The even step of most of the rings: (step, a ring's radius) in px, or None when they are uneven or too few."""
    radius = np.sort(radius_px)
    n = len(radius)
    best, best_merit = None, 0.0
    for i in range(n):
        for j in range(i + 1, n):
            for part in (1, 2, 3):
                size = (radius[j] - radius[i]) / part
                if size < 6 * STEP_MISS_PX:
                    break
                k = np.round((radius - radius[i]) / size)
                fits = np.abs(radius - radius[i] - k * size) < STEP_MISS_PX
                places = k[fits].max() - k[fits].min() + 1
                merit = fits.sum() - 0.4 * (places - len(np.unique(k[fits])))
                if merit > best_merit and fits.sum() >= max(3, 0.6 * n):
                    best, best_merit = (k[fits], radius[fits]), merit
    if best is None or best_merit < 2.6:
        return None
    k, at = best
    size, first = np.polyfit(k, at, 1)
    return float(size), float(first)


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
