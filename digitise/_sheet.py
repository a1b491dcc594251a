"""One chart cut out of its picture, with the paper under it: what the ink stages work on.

A pixel on a drawn line is a blend of the paper and the line's colour (anti-aliasing, scanning and blur all blend),
so everything later works on the contrast to the paper at that place, not on the colour itself. The paper may be
tinted inside the rim, shaded by a scanner, or covered by a filled trace: the commonest colour is taken first and a
quadratic surface is fitted to the pixels near it.
"""

from dataclasses import dataclass

import cv2
import numpy as np


__all__ = ["Sheet", "cut_sheet"]

LARGEST_RADIUS_PX = 640.0  # a larger chart is reduced: at 640 px a line is found to 0.002 dB of a 40 dB chart
MARGIN_RHO = 1.08
PAPER_TOLERANCE = 14.0  # colour levels: wider than scanner noise, narrower than the palest grid line
SHADING_TOLERANCE = 60.0  # colour levels, how far a scanner's shading may take the paper from its commonest colour


@dataclass(frozen=True, eq=False, kw_only=True)
class Sheet:
    """A chart's pixels at working resolution.

    rgb : (h, w, 3) float32; contrast : (h, w, 3) float32, rgb minus the paper under it
    strength : (h, w) float32, length of the contrast
    rho, plane_deg : (h, w) float32, chart-plane position of every pixel
    paper_rgb : (3,) the paper near the middle of the chart; noise : colour levels, one standard deviation
    homography : (3, 3) chart plane -> sheet px; outer_px : mean outer radius, sheet px
    x0, y0 : picture px of the sheet's first pixel before reduction; reduction : sheet px per picture px
    """

    rgb: np.ndarray
    contrast: np.ndarray
    strength: np.ndarray
    rho: np.ndarray
    plane_deg: np.ndarray
    paper_rgb: np.ndarray
    noise: float
    homography: np.ndarray
    outer_px: float
    x0: int
    y0: int
    reduction: float

    def __post_init__(self):
        for name in ("paper_rgb", "homography"):
            getattr(self, name).setflags(write=False)

    def to_sheet(self, rho, plane_deg):
        """Sheet x, y (px) of chart-plane points; arrays broadcast."""
        angle = np.radians(plane_deg)
        u, v = rho * np.sin(angle), -rho * np.cos(angle)
        return _project(self.homography, u, v)

    def to_plane(self, x_px, y_px):
        """Chart-plane u, v of sheet points; arrays broadcast."""
        return _project(np.linalg.inv(self.homography), x_px, y_px)

    def from_picture(self, x_px, y_px):
        """Sheet x, y of picture points."""
        s = self.reduction
        return (x_px - self.x0 + 0.5) * s - 0.5, (y_px - self.y0 + 0.5) * s - 0.5


def cut_sheet(picture, grid):
    """Cut the chart of `grid` out of a `Picture` and find the paper under it."""
    around = np.arange(0.0, 360.0, 3.0)
    x, y = grid.to_picture(MARGIN_RHO, around)
    x0, y0 = max(0, int(x.min()) - 2), max(0, int(y.min()) - 2)
    x1, y1 = min(picture.width, int(x.max()) + 3), min(picture.height, int(y.max()) + 3)
    rgb = picture.rgb[y0:y1, x0:x1]
    reduction = min(1.0, LARGEST_RADIUS_PX / grid.outer_px)
    if reduction < 1:
        size = (round((x1 - x0) * reduction), round((y1 - y0) * reduction))
        rgb = cv2.resize(rgb, size, interpolation=cv2.INTER_AREA)
        reduction = size[0] / (x1 - x0)
    to_sheet = np.array([[reduction, 0, (0.5 - x0) * reduction - 0.5], [0, reduction, (0.5 - y0) * reduction - 0.5], [0, 0, 1]])
    homography = to_sheet @ grid.homography
    homography = homography / homography[2, 2]
    height, width = rgb.shape[:2]
    ys, xs = np.mgrid[0:height, 0:width].astype(np.float32)
    u, v = _project(np.linalg.inv(homography).astype(np.float32), xs, ys)
    rho = np.sqrt(u * u + v * v)
    rgb = rgb.astype(np.float32)
    paper, coefficients, noise = _fit_paper(rgb, rho, u, v)
    contrast = rgb - _surface(coefficients, np.clip(u, -1, 1), np.clip(v, -1, 1))
    return Sheet(
        rgb=rgb, contrast=contrast, strength=np.sqrt(np.einsum("ijk,ijk->ij", contrast, contrast)), rho=rho,
        plane_deg=cv2.phase(-v, u, angleInDegrees=True), paper_rgb=paper, noise=noise, homography=homography,
        outer_px=float(np.sqrt(abs(np.linalg.det(homography[:2, :2])))), x0=x0, y0=y0, reduction=reduction,
    )  # fmt: skip


def _project(h, x, y):
    if h[2, 0] == 0 and h[2, 1] == 0:
        return h[0, 0] * x + h[0, 1] * y + h[0, 2], h[1, 0] * x + h[1, 1] * y + h[1, 2]
    w = h[2, 0] * x + h[2, 1] * y + h[2, 2]
    return (h[0, 0] * x + h[0, 1] * y + h[0, 2]) / w, (h[1, 0] * x + h[1, 1] * y + h[1, 2]) / w


def _fit_paper(rgb, rho, u, v):
    """Commonest colour inside the rim and a quadratic surface through the pixels near it."""
    step = max(1, int(np.sqrt(rho.size / 25000)))
    thin = (slice(None, None, step), slice(None, None, step))
    inside = rho[thin] < 0.97
    px, u, v = rgb[thin][inside], u[thin][inside], v[thin][inside]
    paper = _paper_colour(px, np.hypot(u, v))
    terms = np.stack([np.ones_like(u), u, v, u * u, u * v, v * v], axis=1)
    coefficients = np.zeros((6, 3), np.float32)
    coefficients[0] = paper
    near = np.ones(len(px), bool)
    residual = px - paper
    # The first rounds take a plane, the last ones the quadratic: fewer terms cannot chase a filled lobe.
    for n_terms in (1, 3, 3, 6, 6):
        residual = px - terms @ coefficients
        near = np.abs(residual).max(axis=1) < PAPER_TOLERANCE
        if near.sum() < 50:
            break
        solved = np.linalg.lstsq(terms[near, :n_terms], px[near], rcond=None)[0]
        if np.abs(solved[1:]).max(initial=0) > SHADING_TOLERANCE:
            break
        coefficients[:] = 0
        coefficients[:n_terms] = solved
    spread = residual[near] if near.any() else residual
    noise = float(1.4826 * np.median(np.abs(spread - np.median(spread, axis=0))))
    return coefficients[0].astype(float), coefficients, noise


def _paper_colour(px, rho):
    """The commonest colour, unless it is a trace's fill: along every ray the fill lies inside the paper."""
    first = commonest_colour(px)
    rest = np.abs(px - first).max(axis=1) > PAPER_TOLERANCE
    if rest.mean() < 0.06:
        return first
    second = commonest_colour(px[rest])
    near_first, near_second = (np.abs(px - c).max(axis=1) < 6 for c in (first, second))
    if near_second.mean() > 0.04 and rho[near_second].mean() > rho[near_first].mean() + 0.1:
        return second
    return first


def commonest_colour(px):
    """The mode of (n, 3) colours, as the median of the pixels near the fullest smoothed histogram cell."""
    cells = (px.astype(np.int32) >> 3).clip(0, 31)
    counts = np.bincount(cells[:, 0] * 1024 + cells[:, 1] * 32 + cells[:, 2], minlength=32768)
    counts = counts.reshape(32, 32, 32).astype(np.float32)
    for axis in range(3):
        counts = counts + 0.5 * (np.roll(counts, 1, axis) + np.roll(counts, -1, axis))
    mode = np.array(np.unravel_index(counts.argmax(), counts.shape)) * 8 + 4
    near = np.abs(px - mode).max(axis=1) <= 12
    return np.median(px[near], axis=0) if near.any() else mode.astype(float)


def _surface(coefficients, u, v):
    """Paper colour under pixels: one colour (3,) when it hardly varies, else (h, w, 3)."""
    if np.abs(coefficients[1:]).max() < 0.5:
        return coefficients[0].astype(np.float32)
    planes = [c[0] + c[1] * u + c[2] * v + c[3] * u * u + c[4] * u * v + c[5] * v * v for c in coefficients.T]
    return np.stack(planes, axis=-1).astype(np.float32)
