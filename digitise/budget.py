"""The error of every row, from named parts (JCGM 100:2008, 5.1.2).

At a fixed bearing, a shift d of the line along its own normal moves its radius by d / cos(slant), the slant being the
angle between the line and the circle through it; on a flank that is the same as an angle error times the slope. Parts
stay apart to the end, so that a reader sees which one rules.
"""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["PARTS", "Budget", "make_budget"]

PARTS = ("picture", "grid", "scale", "bearing", "bridging")
# A line's place has a few large errors among many small ones, as Student's t with 3 degrees of freedom has: 95 %
# within 3.18 standard uncertainties (JCGM 100:2008, table G.2).
COVERAGE_FACTOR = 3.18
STEEPEST = 0.05  # least cosine of the slant: beyond it the line is a spoke and the bridging part takes over


@dataclass(frozen=True, eq=False, kw_only=True)
class Budget:
    """Standard uncertainties of the level, dB, one array of shape (n,) a part, row by row with the table.

    picture : where the line lies on the picture (noise, width, anti-aliasing, background)
    grid : centre, rings, stretch and skew under the point
    scale : anchors of the scale
    bearing : bearing error times the trace's slope
    bridging : interpolation where the ink is hidden
    coverage_factor : factor from the combined standard uncertainty to the 95 % half-width
    """

    picture: np.ndarray
    grid: np.ndarray
    scale: np.ndarray
    bearing: np.ndarray
    bridging: np.ndarray
    coverage_factor: float = COVERAGE_FACTOR

    def __post_init__(self):
        lock_arrays(self)

    def combined(self):
        """Root sum of squares of the parts, dB, shape (n,)."""
        return np.sqrt(sum(getattr(self, part) ** 2 for part in PARTS))

    def error95(self):
        """Half-width of the 95 % interval, dB, shape (n,)."""
        return self.coverage_factor * self.combined()


def make_budget(trace, grid, scale, bearing):
    """Combine the parts for every sample of a followed trace.

    Parameters
    ----------
    trace : follow.Trace; grid : grid.Grid; scale : scale.Scale; bearing : bearing.Bearing

    Returns
    -------
    Budget whose arrays go with `trace.plane_deg`; NaN where the trace is missing
    """
    rho = trace.rho
    per_rho = np.abs(scale.slope(np.maximum(rho, 0.5 / trace.sheet_outer_px)))
    per_px = per_rho / np.maximum(trace.radial_share, STEEPEST) / trace.sheet_outer_px
    return Budget(
        picture=per_px * trace.u_px,
        grid=per_rho * _grid_u(trace, grid),
        scale=np.broadcast_to(scale.level_u(rho), rho.shape),
        bearing=per_rho * np.abs(trace.slope) * bearing.u_deg,
        bridging=per_px * trace.u_bridge_px,
    )


def _grid_u(trace, grid):
    """Standard uncertainty of rho at a fixed bearing from the grid's eight parameters."""
    x, y = grid.to_picture(trace.rho, trace.plane_deg)
    flat = grid.homography.ravel()
    base_rho, base_deg = grid.to_plane(x, y)
    columns = []
    sizes = np.sqrt(np.maximum(np.diag(grid.covariance), 0))
    for k in range(8):
        step = max(float(sizes[k]), 1e-9)
        moved = flat.copy()
        moved[k] += step
        rho, deg = _plane(moved.reshape(3, 3), x, y)
        turned = (deg - base_deg + 180) % 360 - 180
        columns.append((rho - base_rho - trace.slope * turned) / step)
    jacobian = np.stack(columns, axis=1)
    variance = np.einsum("ni,ij,nj->n", jacobian, grid.covariance, jacobian)
    return np.sqrt(np.maximum(variance, 0))


def _plane(homography, x, y):
    h = np.linalg.inv(homography)
    w = h[2, 0] * x + h[2, 1] * y + h[2, 2]
    u, v = (h[0, 0] * x + h[0, 1] * y + h[0, 2]) / w, (h[1, 0] * x + h[1, 1] * y + h[1, 2]) / w
    return np.hypot(u, v), np.degrees(np.arctan2(u, -v)) % 360
