"""One chart plane for all rings and spokes: robust non-linear least squares with an honest covariance.

The unknowns are the centre, the scale, the turn, a symmetric stretch (its angle is free), a mild perspective and the
radii of all rings but the outermost. Ring points are compared along the radius, spoke points across it, both in px.
Simple models come first; stretch and perspective stay only when they lower the residual more than noise would.
Weights are Tukey's (Huber & Ronchetti 2009); the covariance is the cluster-robust one (Liang & Zeger 1986), because
neighbouring points of one line share the renderer's snapping and are not independent.
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["PlaneFit", "fit_plane", "homography_of", "parameters_of"]

# order of the plane's parameters
CX, CY, SIZE, TURN, STRETCH_A, STRETCH_B, TILT_X, TILT_Y = range(8)
N_PLANE = 8
TUKEY = 4.685
MIN_SIGMA_PX = 0.02  # floor of a line's scatter: no line weighs without limit
SYSTEMATIC_PX = 0.012  # of a renderer's sub-pixel offset, common to all lines
CLUSTER_DEG = 15.0


@dataclass(frozen=True, eq=False, kw_only=True)
class PlaneFit:
    """Result of `fit_plane`.

    parameters : (8,) of the plane; homography : (3, 3), last entry 1; covariance : (8, 8) of its first eight entries
    ring_rho, ring_rho_u : (n,); turn_u : standard uncertainty of the turn, radians
    residual_px : robust rms of the points that count; ring_sigma_px, spoke_sigma_px : (n,), (m,) scatter of each line
    """

    parameters: np.ndarray
    homography: np.ndarray
    covariance: np.ndarray
    ring_rho: np.ndarray
    ring_rho_u: np.ndarray
    turn_u: float
    residual_px: float
    ring_sigma_px: np.ndarray
    spoke_sigma_px: np.ndarray


def homography_of(parameters):
    """Homography of plane parameters: stretch times turn times scale, then perspective, about the centre."""
    cx, cy, size, turn, a, b, tilt_x, tilt_y = parameters
    r = np.hypot(a, b)
    # exponential of the symmetric, traceless matrix [[a, b], [b, -a]]
    sinh = np.sinh(r) / r if r > 1e-12 else 1.0
    stretch = np.cosh(r) * np.eye(2) + sinh * np.array([[a, b], [b, -a]])
    rotate = np.array([[np.cos(turn), -np.sin(turn)], [np.sin(turn), np.cos(turn)]])
    affine = np.exp(size) * stretch @ rotate
    h = np.eye(3)
    h[:2, :2] = affine + np.outer([cx, cy], [tilt_x, tilt_y])
    h[:2, 2] = cx, cy
    h[2, :2] = tilt_x, tilt_y
    return h


def parameters_of(homography):
    """Plane parameters of a homography whose last entry is 1."""
    h = homography / homography[2, 2]
    centre, tilt = h[:2, 2], h[2, :2]
    affine = h[:2, :2] - np.outer(centre, tilt)
    u, s, vt = np.linalg.svd(affine)
    rotate = u @ vt
    log_stretch = u @ np.diag(np.log(s)) @ u.T
    size = 0.5 * np.trace(log_stretch)
    return np.array(
        [
            *centre,
            size,
            np.arctan2(rotate[1, 0], rotate[0, 0]),
            0.5 * (log_stretch[0, 0] - log_stretch[1, 1]),
            log_stretch[0, 1],
            *tilt,
        ]
    )


def _plane_uv(parameters, x, y):
    h = np.linalg.inv(homography_of(parameters))
    w = h[2, 0] * x + h[2, 1] * y + h[2, 2]
    return (h[0, 0] * x + h[0, 1] * y + h[0, 2]) / w, (h[1, 0] * x + h[1, 1] * y + h[1, 2]) / w


class _Points:
    """All points in flat arrays: rings first, then spokes."""

    def __init__(self, rings, spokes, spoke_deg):
        lists = [*rings, *spokes]
        self.line = np.concatenate([np.full(int(p.good.sum()), k) for k, p in enumerate(lists)])
        self.x = np.concatenate([p.x[p.good] for p in lists])
        self.y = np.concatenate([p.y[p.good] for p in lists])
        at = np.concatenate([p.at[p.good] for p in lists])
        self.n_rings, self.n_lines = len(rings), len(lists)
        self.is_ring = self.line < self.n_rings
        angle = np.radians(np.asarray(spoke_deg, float)) if len(spoke_deg) else np.zeros(0)
        self.angle = np.r_[np.zeros(self.n_rings), angle][self.line]
        block = np.where(self.is_ring, np.floor(at / CLUSTER_DEG), np.floor(at * 4))
        self.cluster = np.unique(self.line * 1000 + block.astype(int), return_inverse=True)[1]

    def residual(self, plane, rho):
        """Signed distances in px, along the radius (rings) or across it (spokes)."""
        u, v = _plane_uv(plane, self.x, self.y)
        r = np.hypot(u, v)
        px = np.exp(plane[SIZE])
        ring = r - np.r_[rho, np.zeros(self.n_lines - self.n_rings)][self.line]
        across = u * np.cos(self.angle) + v * np.sin(self.angle)
        return px * np.where(self.is_ring, ring, across)


def fit_plane(rings, spokes, spoke_deg, *, start, ring_rho, allow_stretch=True, allow_tilt=True):
    """Fit the chart plane to measured lines.

    Parameters
    ----------
    rings, spokes : lists of LinePoints; the first ring is the outermost
    spoke_deg : (m,) plane angles that the spokes must have
    start : (8,) plane parameters; ring_rho : (n,) first radii
    allow_stretch, allow_tilt : whether these models may be tried

    Returns
    -------
    PlaneFit
    """
    points = _Points(rings, spokes, spoke_deg)
    plane = np.array(start, float)
    plane[[TILT_X, TILT_Y]] = 0
    rho = np.array(ring_rho, float)
    free = [CX, CY, SIZE] + ([TURN] if len(spokes) else [])
    best = None
    models = [free]
    if allow_stretch:
        models.append([*free, STRETCH_A, STRETCH_B])
    if allow_tilt and len(rings) > 1 and allow_stretch:
        models.append([*free, STRETCH_A, STRETCH_B, TILT_X, TILT_Y])
    first = plane.copy()
    for model in models:
        begin = first.copy()
        held = [k for k in range(N_PLANE) if k not in model and k not in (TURN,)]
        begin[held] = 0
        if not len(spokes):
            begin[TURN] = 0
        result = _iterate(points, begin, rho, model)
        if best is None or _better(result, best, points):
            best = result
    return _finish(points, best)


def _iterate(points, plane, rho, model):
    """Tukey-weighted Gauss-Newton; returns (plane, rho, model, residual, weight, sigma, jacobian)."""
    plane, rho = plane.copy(), rho.copy()
    sigma = None
    for round_ in range(12):
        residual = points.residual(plane, rho)
        sigma = _line_sigma(points, residual)
        scaled = residual / (TUKEY * sigma[points.line])
        weight = np.where(np.abs(scaled) < 1, (1 - scaled**2) ** 2, 0) / sigma[points.line] ** 2
        jac = _jacobian(points, plane, rho, model)
        normal = (jac * weight[:, None]).T @ jac
        gradient = (jac * weight[:, None]).T @ residual
        scale = np.sqrt(np.maximum(np.diag(normal), 1e-12))
        step = -np.linalg.solve(normal / np.outer(scale, scale) + 1e-10 * np.eye(len(scale)), gradient / scale) / scale
        plane[model] += step[: len(model)]
        rho[1:] += step[len(model) :]
        if round_ > 4 and np.abs(step[:2]).max() < 1e-4:
            break
    return plane, rho, model, residual, weight, sigma, jac


def _line_sigma(points, residual):
    """Robust scatter of each line about the model (n_lines,), px."""
    sigma = np.empty(points.n_lines)
    for k in range(points.n_lines):
        own = residual[points.line == k]
        sigma[k] = 1.4826 * np.median(np.abs(own)) if len(own) > 5 else 1.0
    return np.maximum(sigma, MIN_SIGMA_PX)


def _jacobian(points, plane, rho, model):
    """Derivatives of the residuals: plane parameters of the model, then radii of all rings but the first."""
    columns = []
    step = np.array([1e-3, 1e-3, 1e-6, 1e-6, 1e-6, 1e-6, 1e-7, 1e-7])
    for k in model:
        up, down = plane.copy(), plane.copy()
        up[k] += step[k]
        down[k] -= step[k]
        columns.append((points.residual(up, rho) - points.residual(down, rho)) / (2 * step[k]))
    px = np.exp(plane[SIZE])
    for k in range(1, points.n_rings):
        columns.append(np.where(points.line == k, -px, 0.0))
    return np.stack(columns, axis=1)


def _better(new, old, points):
    """Whether a richer model earns its parameters: an F-like test with one count a cluster, not a point."""
    cost = []
    sigma = np.maximum(new[5], MIN_SIGMA_PX)[points.line]
    for result in (old, new):
        cost.append(np.minimum((result[3] / sigma) ** 2, TUKEY**2))
    n = points.cluster.max() + 1
    size = np.bincount(points.cluster)
    gain = np.bincount(points.cluster, (cost[0] - cost[1]))
    gain = float(np.sum(gain / np.sqrt(size)))
    return gain > 14.0 + 0.0 * n


def _finish(points, result):
    """Covariances and scatter of the chosen model."""
    plane, rho, model, residual, weight, sigma, jac = result
    normal = (jac * weight[:, None]).T @ jac
    scale = np.sqrt(np.maximum(np.diag(normal), 1e-12))
    inverse = np.linalg.inv(normal / np.outer(scale, scale) + 1e-10 * np.eye(len(scale))) / np.outer(scale, scale)
    n_clusters = int(points.cluster.max()) + 1
    push = np.stack([np.bincount(points.cluster, g, minlength=n_clusters) for g in (jac * (weight * residual)[:, None]).T])
    spread = push @ push.T * n_clusters / max(n_clusters - len(scale), 1)
    full = inverse @ spread @ inverse
    n_model = len(model)
    cov = np.zeros((N_PLANE, N_PLANE))
    cov[np.ix_(model, model)] = full[:n_model, :n_model]
    cov[CX, CX] += SYSTEMATIC_PX**2
    cov[CY, CY] += SYSTEMATIC_PX**2
    px = np.exp(plane[SIZE])
    cov[SIZE, SIZE] += (SYSTEMATIC_PX / px) ** 2
    h = homography_of(plane)
    rows = []
    step = np.array([1e-3, 1e-3, 1e-6, 1e-6, 1e-6, 1e-6, 1e-8, 1e-8])
    for k in range(N_PLANE):
        up, down = plane.copy(), plane.copy()
        up[k] += step[k]
        down[k] -= step[k]
        rows.append((homography_of(up) - homography_of(down)).ravel()[:8] / (2 * step[k]))
    to_h = np.array(rows).T
    used = weight > 0
    rho_u = np.zeros(points.n_rings)
    rho_u[1:] = np.sqrt(np.maximum(np.diag(full)[n_model:], 0) + (SYSTEMATIC_PX / px) ** 2)
    return PlaneFit(
        parameters=plane,
        homography=h,
        covariance=to_h @ cov @ to_h.T,
        ring_rho=rho,
        ring_rho_u=rho_u,
        turn_u=float(np.sqrt(cov[TURN, TURN])),
        residual_px=float(np.sqrt(np.mean(residual[used] ** 2))) if used.any() else float("nan"),
        ring_sigma_px=sigma[: points.n_rings],
        spoke_sigma_px=sigma[points.n_rings :],
    )
