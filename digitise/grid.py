"""The chart's grid: centre, rings, spokes, skew, stretch and mild perspective, to sub-pixel, with covariance.

Stub: the fit follows.
"""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["Grid", "find_grid"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Grid:
    """The map between picture pixels and the chart plane, and the rings and spokes drawn on it.

    The chart plane has its origin at the chart's centre, the outermost ring at radius rho = 1, and plane angles
    that grow clockwise from the chart's own "up" (skew removed): u = rho sin(plane), v = -rho cos(plane).

    homography : (3, 3), chart plane (u, v, 1) -> picture px (x, y, 1) up to scale, last entry 1
    covariance : (8, 8), of the first eight entries, row by row
    ring_rho : (n,) radii of the drawn rings, falling, the first 1.0 (the outermost)
    ring_rho_u : (n,) their standard uncertainties
    ring_drawn : (n,) share of the ring's arc that is inked, 0 to 1 (a dashed ring has about 0.5)
    ring_width_px : (n,) drawn line width, px
    spoke_deg : (m,) plane angles of the drawn spokes, rising, 0 to 360
    spoke_step_deg : their common step, NaN when none was found
    spoke_width_px : drawn line width, px, NaN when none was found
    arc_deg : (2,) plane angles between which the chart is drawn, clockwise from first to second; (0, 360) whole
    skew_deg : turn of the chart on the picture, clockwise, that was removed (within +-10)
    skew_u_deg : its standard uncertainty
    residual_px : rms distance of the ring and spoke points from the model
    reasons : tuple of review.Reason
    """

    homography: np.ndarray
    covariance: np.ndarray
    ring_rho: np.ndarray
    ring_rho_u: np.ndarray
    ring_drawn: np.ndarray
    ring_width_px: np.ndarray
    spoke_deg: np.ndarray
    spoke_step_deg: float
    spoke_width_px: float
    arc_deg: np.ndarray
    skew_deg: float
    skew_u_deg: float
    residual_px: float
    reasons: tuple = ()

    def __post_init__(self):
        lock_arrays(self)

    @property
    def centre_x(self):
        """Picture x of the centre, px."""
        return float(self.homography[0, 2])

    @property
    def centre_y(self):
        """Picture y of the centre, px."""
        return float(self.homography[1, 2])

    @property
    def outer_px(self):
        """Mean radius of the outermost ring on the picture, px."""
        return float(np.sqrt(abs(np.linalg.det(self.homography[:2, :2]))))

    def to_picture(self, rho, plane_deg):
        """Picture x, y (px) of chart-plane points; arrays broadcast."""
        angle = np.radians(plane_deg)
        u, v = rho * np.sin(angle), -rho * np.cos(angle)
        h = self.homography
        w = h[2, 0] * u + h[2, 1] * v + h[2, 2]
        return (h[0, 0] * u + h[0, 1] * v + h[0, 2]) / w, (h[1, 0] * u + h[1, 1] * v + h[1, 2]) / w

    def to_plane(self, x_px, y_px):
        """Chart-plane rho and plane angle (degrees, 0 to 360) of picture points; arrays broadcast."""
        h = np.linalg.inv(self.homography)
        w = h[2, 0] * x_px + h[2, 1] * y_px + h[2, 2]
        u = (h[0, 0] * x_px + h[0, 1] * y_px + h[0, 2]) / w
        v = (h[1, 0] * x_px + h[1, 1] * y_px + h[1, 2]) / w
        return np.hypot(u, v), np.degrees(np.arctan2(u, -v)) % 360


def find_grid(picture, box):
    """Fit the grid of the chart at `box` on a `Picture`; raises `NotReadError` when there is none."""
    raise NotImplementedError
