"""Which plane angles carry a drawn spoke: a profile over angle, and the even comb that explains it."""

from dataclasses import dataclass

import cv2
import numpy as np

from ._robust import scatter
from ._unwrap import outer_radius, unwrap

__all__ = ["Spokes", "find_spokes"]

STEPS_DEG = (5.0, 6.0, 7.5, 9.0, 10.0, 12.0, 15.0, 18.0, 20.0, 22.5, 30.0, 36.0, 45.0, 60.0, 72.0, 90.0, 120.0, 180.0)
N_ANGLES = 1800
N_PARTS, PER_PART = 24, 5
INNER, OUTER = 0.22, 0.965  # part of the radius that is looked at
SIDE_PX = 3.0  # distance of the paper that a line is compared with
FLOOR_LEVELS = 0.8
PRESENT = 0.33  # score of a spoke that is there, in a comb
COMB_SHARE = 0.62  # of a comb's lines that must be there
MAX_SKEW_DEG = 10.0


@dataclass(frozen=True, eq=False, kw_only=True)
class Spokes:
    """An even comb of spokes.

    deg : (m,) nominal plane angles (multiples of the step, or beside them by `offset` when the comb does not fit)
    step_deg : NaN when there is none; skew_deg : turn of the comb, clockwise; score : (m,) share of each line drawn
    """

    deg: np.ndarray
    step_deg: float
    skew_deg: float
    score: np.ndarray

    @property
    def drawn_deg(self):
        """(m,) plane angles at which the spokes were found, skew included."""
        return (self.deg + self.skew_deg) % 360


NO_SPOKES = Spokes(deg=np.zeros(0), step_deg=float("nan"), skew_deg=0.0, score=np.zeros(0))


def find_spokes(image, homography, *, arc_deg):
    """Find the comb of spokes on a float32 grey picture, as `Spokes`; the homography's turn is taken as given."""
    score = _angle_profile(image, homography)
    inside = _inside(np.arange(N_ANGLES) * 360.0 / N_ANGLES, arc_deg, 1.5)
    peak_deg, peak_score = _peaks(np.where(inside, score, 0))
    if not len(peak_deg):
        return NO_SPOKES
    # beside every line the detector answers with the other sign, and twice
    window = np.degrees(2 * SIDE_PX / (INNER * outer_radius(homography)))
    apart = np.abs((peak_deg[:, None] - peak_deg + 180) % 360 - 180)
    other = (peak_score[:, None] * peak_score < 0) & (np.abs(peak_score) > np.abs(peak_score)[:, None])
    main = ~(other & (apart < window)).any(axis=1)
    peak_deg, peak_score = peak_deg[main], peak_score[main]
    sign = 1.0 if np.sum(peak_score) >= 0 else -1.0
    size = np.where(inside, np.maximum(sign * score, 0), 0).astype(np.float32)
    near = cv2.dilate(np.r_[size[-4:], size, size[:4]][None], np.ones((1, 7), np.uint8))[0][4:-4]
    best = None
    for step in STEPS_DEG:
        comb = _best_comb(near, inside, step, peak_deg, np.abs(peak_score))
        if comb is not None and (best is None or comb[0] > best[0] + 0.5):
            best = comb
    if best is None:
        return NO_SPOKES
    _, step, phase, lines, line_score = best
    fold = {180.0: 90.0, 120.0: 30.0, 60.0: 30.0, 72.0: 18.0, 45.0: 45.0}.get(step, step)
    skew = (phase + fold / 2) % fold - fold / 2
    if abs(skew) > MAX_SKEW_DEG:
        skew = 0.0
    return Spokes(deg=(lines - skew) % 360, step_deg=step, skew_deg=float(skew), score=line_score)


def _angle_profile(image, homography):
    """(N_ANGLES,) mean vote of the radial parts: 1 a dark line all the way, -1 a light one."""
    outer_px = outer_radius(homography)
    rho = INNER + (np.arange(N_PARTS * PER_PART) + 0.5) * (OUTER - INNER) / (N_PARTS * PER_PART)
    angle = np.arange(N_ANGLES) * 360.0 / N_ANGLES
    polar = unwrap(image, homography, angle, rho)
    shift = np.clip(np.round(SIDE_PX / (rho * outer_px) * N_ANGLES / (2 * np.pi)), 1, N_ANGLES // 72).astype(int)
    answer = np.empty_like(polar)
    for value in np.unique(shift):
        columns = shift == value
        part = polar[:, columns]
        answer[:, columns] = 0.5 * (np.roll(part, value, axis=0) + np.roll(part, -value, axis=0)) - part
    blocks = answer.reshape(N_ANGLES, N_PARTS, PER_PART).mean(axis=2)
    noise = scatter(blocks)
    return np.clip(blocks / max(3 * noise, FLOOR_LEVELS), -1, 1).mean(axis=1)


def _inside(angle_deg, arc_deg, slack_deg):
    """Whether angles lie on the drawn arc."""
    span = (arc_deg[1] - arc_deg[0]) % 360 or 360.0
    if span >= 360:
        return np.ones(np.shape(angle_deg), bool)
    return (angle_deg - arc_deg[0] + slack_deg) % 360 <= span + 2 * slack_deg


def _peaks(score):
    """Angles and scores of lines that are surely there."""
    size = np.abs(score).astype(np.float32)
    reach = max(1, round(0.8 * N_ANGLES / 360))
    ring = np.r_[size[-reach:], size, size[:reach]]
    top = cv2.dilate(ring[None], np.ones((1, 2 * reach + 1), np.uint8))[0][reach:-reach]
    at = np.flatnonzero((size >= top) & (size > 0.5))
    before, after = size[at - 1], size[(at + 1) % len(size)]
    bend = before - 2 * size[at] + after
    shift = np.where(bend < -1e-6, 0.5 * (before - after) / np.where(bend < -1e-6, bend, 1), 0)
    return (at + np.clip(shift, -0.5, 0.5)) * 360.0 / N_ANGLES % 360, score[at]


def _best_comb(near, inside, step, peak_deg, peak_size):
    """Best phase of a comb with this step: (merit, step, phase, line angles, line scores) or None."""
    per_deg = N_ANGLES / 360
    at = np.arange(round(step * per_deg))[:, None] + np.arange(round(360 / step)) * step * per_deg
    at = np.round(at).astype(int) % N_ANGLES
    counted, score = inside[at], near[at]
    n = counted.sum(axis=1)
    share = ((score > PRESENT) & counted).sum(axis=1) / np.maximum(n, 1)
    merit = np.where((n >= 2) & (share >= COMB_SHARE), (score * counted).sum(axis=1) - 0.35 * n, -1)
    top = int(np.argmax(merit))
    if merit[top] <= 0:
        return None
    # the dilated score has a flat top: take its middle, then the peaks themselves
    level = np.flatnonzero(merit > merit[top] - 1e-3)
    phase = float(np.mean(level[np.abs(level - top) < 6])) / per_deg
    apart = (peak_deg - phase + step / 2) % step - step / 2
    close = np.abs(apart) < 0.8
    if close.any():
        phase += float(np.sum(apart[close] * peak_size[close]) / np.sum(peak_size[close]))
    lines = (phase + step * np.arange(round(360 / step))) % 360
    index = np.round(lines * per_deg).astype(int) % N_ANGLES
    lines, index = lines[inside[index]], index[inside[index]]
    order = np.argsort(lines)
    return float(merit[top]), step, phase, lines[order], near[index][order]
