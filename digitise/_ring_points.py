"""Sub-pixel positions of rings and spokes: centroids of short cuts across the line.

A drawn line, anti-aliased and symmetric, has its centroid on its own centre whatever its width, and averaging over
many pixel phases removes what the sampling leaves. Cuts that something else disturbs (a trace, a letter, the edge of
a filled area) differ in contrast or in the levels of both ends and are left out.
"""

from dataclasses import dataclass

import numpy as np

from ._robust import median, quantile, scatter
from ._unwrap import apply_homography, outer_radius, sample

__all__ = ["LinePoints", "ring_points", "spoke_points"]

STEP_PX = 0.5


@dataclass(frozen=True, eq=False, kw_only=True)
class LinePoints:
    """Points on one line (ring or spoke).

    x, y : (n,) picture px; at : (n,) plane angle in degrees (ring) or rho (spoke) of each cut
    good : (n,) undisturbed; offset_px : (n,) from where the line was looked for
    ink : (n, m) float32, the cuts themselves above their surroundings; contrast : (n,) grey levels, positive; sign : 1 darker than the surroundings, -1 lighter
    drawn : share of the cuts that are inked; width_px : of the line
    """

    x: np.ndarray
    y: np.ndarray
    at: np.ndarray
    good: np.ndarray
    offset_px: np.ndarray
    ink: np.ndarray
    contrast: np.ndarray
    sign: float
    drawn: float
    width_px: float


def ring_points(image, homography, rho, *, arc_deg=(0.0, 360.0), reach_px=4.0, sign=None, width_px=None, n_max=300, avoid_deg=(), avoid_px=2.5):
    """Cut across the ring of radius rho every few pixels of arc, as `LinePoints`.

    image : (h, w) float32 grey; reach_px : half length of a cut; sign : polarity when known; width_px when known;
    avoid_deg, avoid_px : plane angles of spokes and how far to keep from them (where that leaves enough of the ring)
    """
    outer_px = outer_radius(homography)
    span = (arc_deg[1] - arc_deg[0]) % 360 or 360.0
    n = int(np.clip(2 * np.pi * rho * outer_px * span / 360 / 2.0, 48, n_max))
    angle = arc_deg[0] + (np.arange(n) + 0.5) * span / n
    if len(avoid_deg):
        apart = np.abs((angle[:, None] - np.asarray(avoid_deg) + 180) % 360 - 180).min(axis=1)
        clear = np.radians(apart) * rho * outer_px > avoid_px
        if clear.sum() > 0.3 * n:
            angle = angle[clear]
    phi = np.radians(angle)
    x0, y0 = apply_homography(homography, rho * np.sin(phi), -rho * np.cos(phi))
    x1, y1 = apply_homography(homography, rho * 1.01 * np.sin(phi), -rho * 1.01 * np.cos(phi))
    nx, ny = x1 - x0, y1 - y0
    length = np.hypot(nx, ny)
    nx, ny = nx / length, ny / length
    # three neighbouring cuts are averaged, half a px apart, each about its own point of the circle
    bow = rho * outer_px
    return _cut(image, x0, y0, nx, ny, angle % 360, reach_px, sign, width_px, bow_px=bow)


def spoke_points(image, homography, plane_deg, rho_from, rho_to, *, reach_px=4.0, sign=None, width_px=None):
    """Cut across the spoke at a plane angle every few pixels of radius, as `LinePoints`."""
    outer_px = outer_radius(homography)
    n = int(np.clip((rho_to - rho_from) * outer_px / 3.0, 12, 60))
    rho = rho_from + (np.arange(n) + 0.5) * (rho_to - rho_from) / n
    phi = np.radians(plane_deg)
    x0, y0 = apply_homography(homography, rho * np.sin(phi), -rho * np.cos(phi))
    x1, y1 = apply_homography(homography, (rho + 0.01) * np.sin(phi), -(rho + 0.01) * np.cos(phi))
    tx, ty = x1 - x0, y1 - y0
    length = np.hypot(tx, ty)
    # the cut's direction is clockwise, as plane angles grow
    return _cut(image, x0, y0, -ty / length, tx / length, rho, reach_px, sign, width_px, bow_px=None)


def _usual_contrast(contrast, beside):
    """Contrast of the line itself among cuts that also hold gaps between dashes, and traces that cross it."""
    noise = scatter(beside[::3])
    above = contrast[contrast > max(1.0, 2.5 * noise)]
    if len(above) < 4:
        return median(contrast)
    usual = quantile(above, 0.65)
    for _ in range(3):
        usual = median(above[above > 0.4 * usual])
    return usual


def _cut(image, x0, y0, nx, ny, at, reach_px, sign, width_px, *, bow_px):
    """Cuts along (nx, ny) about (x0, y0)."""
    half = int(np.ceil(reach_px / STEP_PX))
    s = np.arange(-half, half + 1) * STEP_PX
    along = np.array([-0.7, 0.0, 0.7])
    sag = along**2 / (2 * bow_px) if bow_px else np.zeros(3)
    x = x0[:, None, None] + nx[:, None, None] * (s - sag[:, None]) - ny[:, None, None] * along[:, None]
    y = y0[:, None, None] + ny[:, None, None] * (s - sag[:, None]) + nx[:, None, None] * along[:, None]
    inside = (x[:, 1, 0] > 1) & (y[:, 1, 0] > 1) & (x[:, 1, -1] > 1) & (y[:, 1, -1] > 1)
    h, w = image.shape
    inside &= (x[:, 1, 0] < w - 2) & (x[:, 1, -1] < w - 2) & (y[:, 1, 0] < h - 2) & (y[:, 1, -1] < h - 2)
    cut = sample(image, x, y).mean(axis=1)
    left, right = cut[:, :2].mean(axis=1), cut[:, -2:].mean(axis=1)
    ramp = left[:, None] + (right - left)[:, None] * (s - s[0]) / (s[-1] - s[0])
    ink = ramp - cut
    middle = np.abs(s) <= max(1.0, 0.35 * reach_px)
    if sign is None:
        sign = 1.0 if median(ink[:, middle].mean(axis=1)) >= 0 else -1.0
    raw = sign * ink
    ink = np.maximum(raw, 0)
    contrast = ink[:, middle].max(axis=1)
    usual = _usual_contrast(contrast, raw[:, ~middle])
    if width_px is None:
        typical = ink[(contrast > 0.5 * usual) & (contrast < 1.7 * usual + 1)]
        if len(typical):
            width_px = np.median(typical, axis=0).sum() * STEP_PX / max(quantile(typical.max(axis=1), 0.75), 1e-6)
        width_px = float(np.clip(width_px or 1.0, 0.5, 1.6 * reach_px))
    centre = np.zeros(len(cut))
    for _ in range(3):
        window = np.clip(width_px / 2 + 1.75 - np.abs(s[None] - centre[:, None]), 0, 0.5)
        weight = ink * window
        total = weight.sum(axis=1)
        centre = np.where(total > 0, (weight * s).sum(axis=1) / np.maximum(total, 1e-9), 0)
        centre = np.clip(centre, -reach_px, reach_px)
    drawn = contrast > 0.35 * usual
    good = drawn & inside & (contrast < 1.7 * usual + 4) & (np.abs(right - left) < 0.5 * contrast + 1)
    good &= np.abs(centre) < reach_px - width_px / 2
    share = float(drawn[inside].mean()) if inside.any() else 0.0
    return LinePoints(
        x=x0 + nx * centre,
        y=y0 + ny * centre,
        at=at,
        good=good,
        offset_px=centre,
        ink=raw.astype(np.float32),
        contrast=contrast,
        sign=float(sign),
        drawn=share,
        width_px=width_px,
    )
