"""Which radii carry a drawn ring: a radial profile of line contrast, judged sector by sector.

Each sector of a few degrees averages over the dashes of a ring and says whether a thin line, darker or lighter
than its surroundings, crosses it at a radius. A ring is a radius at which most sectors agree; letters, spokes and
traces speak for a few sectors only, however black they are, because every sector's vote is limited.
"""

from dataclasses import dataclass

import cv2
import numpy as np

from ._ring_fit import homography_of, parameters_of
from ._robust import median, scatter
from ._unwrap import outer_radius, unwrap

__all__ = ["RingProfile", "centre_profile", "drawn_arc", "ring_profile"]

N_BLOCKS = 72
STEP_PX = 0.5
LINE_SIGMA_PX = 1.2  # of the line detector
FLOOR_LEVELS = 0.35  # weakest line, grey levels of the detector's answer
NOISE_FACTOR = 3.0
APART_PX = 3.5  # lines closer than this are one
LOBE_PX = 10.0  # reach of the detector's side lobes
ARC_SCORE = 0.25  # rings that show where the chart is drawn
MIN_GAP_DEG = 100.0
LOBE_SHARE = 0.6  # and their size, next to the line's own answer


@dataclass(frozen=True, eq=False, kw_only=True)
class RingProfile:
    """Line contrast about a centre.

    rho : (n,) radii, outermost ring of the first guess 1
    answer : (N_BLOCKS, n) float32, the line detector's answer of every sector, grey levels, positive for a dark line
    floor : the answer that counts as a line
    """

    rho: np.ndarray
    answer: np.ndarray
    floor: float

    def score(self, blocks=slice(None)):
        """(n,) mean vote of the sectors (all, or those of a boolean mask), -1 to 1."""
        return np.clip(self.answer[blocks] / self.floor, -1, 1).mean(axis=0)

    def level(self, blocks=slice(None)):
        """(n,) mean answer of the sectors with the loudest held back, grey levels."""
        answer = self.answer[blocks]
        cap = max(float(np.abs(np.median(answer, axis=0)).max()), self.floor)
        return np.clip(answer, -cap, cap).mean(axis=0)

    def peaks(self, threshold, blocks=slice(None)):
        """Lines on which enough sectors agree: arrays rho (falling), score, level."""
        score, level = self.score(blocks), self.level(blocks)
        size = np.where(np.abs(score) > threshold, np.abs(level), 0).astype(np.float32)
        reach = max(1, round(APART_PX / STEP_PX))
        top = cv2.dilate(size[None], np.ones((1, 2 * reach + 1), np.uint8))[0]
        at = np.flatnonzero((size >= top) & (size > 0))
        at = at[(at > 0) & (at < len(size) - 1)][::-1]
        left, mid, right = size[at - 1], size[at], size[at + 1]
        bend = np.minimum(left - 2 * mid + right, -1e-9)
        step = self.rho[1] - self.rho[0]
        rho = self.rho[at] + np.clip(0.5 * (left - right) / bend, -0.5, 0.5) * step
        keep = ~_lobes(rho / step * STEP_PX, level[at])
        return rho[keep], score[at][keep], level[at][keep]

    def wander(self, rho, score, blocks=slice(None)):
        """Robust scatter of a line's place among the sectors that hold it, px."""
        c, reach = round(rho / self.rho[1]), round(4.0 / STEP_PX)
        part = np.sign(score) * self.answer[blocks][:, max(c - reach, 0) : c + reach + 1]
        held = part.max(axis=1) > 0.5 * self.floor
        return scatter(place := part[held].argmax(axis=1), median(place)) * STEP_PX if held.any() else np.inf


def ring_profile(image, homography, *, reach=1.25, inner_px=5.0, spoke_deg=(), spoke_width_px=1.5):
    """Measure line contrast about the centre of a chart plane on a float32 picture, as a `RingProfile`.

    reach : largest radius; spoke_deg : plane angles of lines to leave out of the sectors
    """
    outer_px = outer_radius(homography)
    per_block = int(np.clip(round(2 * np.pi * outer_px / N_BLOCKS / 2.5), 4, 10))
    angle = (np.arange(N_BLOCKS * per_block) + 0.5) * (360.0 / (N_BLOCKS * per_block))
    rho = np.arange(0, reach * outer_px, STEP_PX) / outer_px
    polar = unwrap(image, homography, angle, rho)
    block = polar.reshape(N_BLOCKS, per_block, -1).mean(axis=1)
    if len(spoke_deg):
        free = _clear_of(angle, np.asarray(spoke_deg), spoke_width_px / 2 + 1.0, rho * outer_px)
        share = free.reshape(N_BLOCKS, per_block, -1).sum(axis=1, dtype=np.float32)
        kept = (polar * free).reshape(N_BLOCKS, per_block, -1).sum(axis=1)
        block = np.where(share >= max(1, 0.25 * per_block), kept / np.maximum(share, 1), block)
    sigma = LINE_SIGMA_PX / STEP_PX
    smooth = cv2.GaussianBlur(block, (0, 0), sigmaX=sigma, sigmaY=1e-3)
    wide = cv2.GaussianBlur(block, (0, 0), sigmaX=2.2 * sigma, sigmaY=1e-3)
    answer = wide - smooth
    answer[:, rho * outer_px < inner_px] = 0
    inside = answer[:, (rho * outer_px > inner_px) & (rho < 1)]
    # What the sectors have in common is rings; the quiet part of what they differ by is noise, even where most of a
    # busy chart is lines (0.385 sigma is the 30 % point of a normal distribution's size).
    noise = float(np.percentile(np.abs(inside - np.median(inside, axis=0)), 30)) / 0.385
    return RingProfile(rho=rho, answer=answer, floor=max(NOISE_FACTOR * noise, FLOOR_LEVELS))


def _clear_of(angle_deg, spoke_deg, half_px, radius_px):
    """(angles, radii) bool: further than half_px from every spoke."""
    apart = np.abs((angle_deg[:, None] - spoke_deg + 180) % 360 - 180).min(axis=1)
    return np.radians(apart)[:, None] * radius_px[None, :] > half_px


def _lobes(radius_px, level):
    """Whether lines are side lobes of the detector, beside a stronger line of the other polarity."""
    apart = np.abs(radius_px[:, None] - radius_px[None, :])
    stronger = np.abs(level)[None, :] * LOBE_SHARE > np.abs(level)[:, None]
    return ((apart < LOBE_PX) & stronger & (level[:, None] * level[None, :] < 0)).any(axis=1)


def drawn_arc(profile):
    """Sectors in which the chart is drawn: boolean (N_BLOCKS,), and the arc (first, last) in degrees.

    The chart is part of a circle only when its rim is empty over MIN_GAP_DEG or more and full elsewhere, and the
    other rings are empty there too; else it is whole.
    """
    whole = np.ones(N_BLOCKS, bool), np.array([0.0, 360.0])
    rho, score, level = profile.peaks(ARC_SCORE)
    near_rim = np.flatnonzero((rho > 0.93) & (rho < 1.07))
    if not len(near_rim):
        return whole
    rim = near_rim[np.argmax(np.abs(level[near_rim]))]
    votes = np.clip(profile.answer / profile.floor, -1, 1)

    def drawn(k):
        c = int(np.clip(round(rho[k] / profile.rho[1]), 1, votes.shape[1] - 2))
        return (np.sign(score[k]) * votes[:, c - 1 : c + 2]).max(axis=1) > 0.4

    on_rim = drawn(rim)
    if on_rim.all() or not on_rim.any():
        return whole
    starts = np.flatnonzero(~on_rim & np.roll(on_rim, 1))
    length, start = max((int(np.argmax(np.roll(on_rim, -start))), int(start)) for start in starts)
    width = 360.0 / N_BLOCKS
    mask = np.ones(N_BLOCKS, bool)
    mask[(start + np.arange(length)) % N_BLOCKS] = False
    others = [drawn(k)[~mask].mean() for k in range(len(rho)) if 0.3 < rho[k] < 0.93 and drawn(k)[mask].mean() > 0.6]
    if length * width < MIN_GAP_DEG or on_rim[mask].mean() < 0.85 or np.median(others or [0.0]) > 0.2:
        return whole
    return mask, np.array([((start + length) * width) % 360, (start * width) % 360])


def centre_profile(image, homography, *, reach_px=7.0, rounds=6):
    """Shift and stretch a homography until the sectors' profiles agree; returns the improved homography.

    Every sector is slid along the radius to fit the mean of all (all rings at once); its slide is the share of a
    shift of the centre and of a stretch in its direction.
    """
    parameters = parameters_of(homography)
    phi = np.radians((np.arange(N_BLOCKS) + 0.5) * 360.0 / N_BLOCKS)
    lags = np.arange(-round(reach_px / STEP_PX), round(reach_px / STEP_PX) + 1)
    for _ in range(rounds):
        profile = ring_profile(image, homography_of(parameters), reach=1.1)
        cap = max(float(np.abs(profile.answer.mean(axis=0)).max()), profile.floor)
        lines = np.clip(profile.answer, -cap, cap)
        mean = lines.mean(axis=0)
        n = len(mean)
        slid = np.zeros((len(lags), n), np.float32)
        for row, lag in zip(slid, lags):
            row[max(lag, 0) : n + min(lag, 0)] = mean[max(-lag, 0) : n - max(lag, 0)]
        match = lines @ slid.T
        best = np.clip(np.argmax(match, axis=1), 1, len(lags) - 2)
        rows = np.arange(N_BLOCKS)
        left, mid, right = match[rows, best - 1], match[rows, best], match[rows, best + 1]
        bend = np.minimum(left - 2 * mid + right, -1e-9)
        slide = (lags[best] + np.clip(0.5 * (left - right) / bend, -0.5, 0.5)) * STEP_PX
        strength = np.maximum(mid - np.median(match, axis=1), 0)
        strength = np.minimum(strength / max(float(np.percentile(strength, 80)), 1e-9), 1) ** 2
        radius = float(np.sum(np.abs(mean) * profile.rho) / max(np.sum(np.abs(mean)), 1e-9)) * np.exp(parameters[2])
        basis = np.stack([np.sin(phi), -np.cos(phi), -radius * np.cos(2 * phi), -radius * np.sin(2 * phi), 1 + 0 * phi])
        change, spread, hold = np.zeros(5), reach_px, np.array([1e-4, 1e-4, 0.1, 0.1, 1e-4])
        for _ in range(4):
            miss = slide - change @ basis
            weight = strength / (1 + (miss / spread) ** 2) ** 2
            # a half chart leaves the stretch open: hold it as if a tenth of the sectors spoke for none
            normal = (basis * weight) @ basis.T + np.diag(hold * (basis**2).sum(axis=1))
            change = np.linalg.solve(normal, (basis * weight) @ slide)
            spread = max(0.5, 1.5 * float(np.median(np.abs(slide - change @ basis))))
        parameters[[0, 1, 4, 5]] += change[:4]
        if np.abs(change[:2]).max() < 0.15:
            break
    return homography_of(parameters)
