"""One chart plane for all rings and spokes: robust non-linear least squares with an honest covariance.

The unknowns are the centre, the scale, the turn, a symmetric stretch (its angle is free), a mild perspective and the
radii of all rings but the first. Ring points are compared along the radius, spoke points across it, both in px.
Simple models come first; stretch and perspective stay only when they lower the residual more than noise would.
Weights are Tukey's (Huber & Ronchetti 2009); the covariance is the cluster-robust one (Liang & Zeger 1986), because
neighbouring points of one line share the renderer's snapping and are not independent.

With A the affine part, c the centre and t the tilt, the plane point w lies at x = c + A w / (1 + t.w), so
y = A^-1 (x - c) and w = y / (1 - t.y): every derivative below follows from these two lines.
"""

from dataclasses import dataclass

import numpy as np

from ._robust import median, scatter

__all__ = ["PlaneFit", "fit_plane", "homography_of", "parameters_of"]

# order of the plane's parameters
CX, CY, SIZE, TURN, STRETCH_A, STRETCH_B, TILT_X, TILT_Y = range(8)
N_PLANE = 8
HUB_U, HUB_V = 8, 9  # where the spokes meet, beside the rings' centre, px: renderers snap lines, and rings otherwise
N_ALL = 10
TUKEY = 4.685
MIN_SIGMA_PX = 0.02  # floor of a line's scatter: no line weighs without limit
SYSTEMATIC_PX = 0.03  # of renderers: curves flattened to chords, lines snapped; measured on drawn charts
CLUSTER_DEG = 15.0
CLUSTER_RHO = 0.25
MAX_ROUNDS = 10
SIGMA_ROUNDS = 5  # the scatter of the lines is held fixed after these, so that the iteration settles
# standard deviation of the plane's parameters about their first values: wide, to hold what few points leave open
LOOSE = np.array([8.0, 8.0, 0.1, 0.2, 0.12, 0.12, 0.06, 0.06, 0.5, 0.5])
LOOSE_RHO = 0.05
MIN_TILT_PX, MIN_TILT_FEW_PX = 0.1, 0.7  # shift of the rim by a perspective worth having, many and few rings
STRAY_PX, MUTE = 0.12, 30.0
MIN_GAIN = 12.0  # of a richer model, in units of the clusters' variance


@dataclass(frozen=True, eq=False, kw_only=True)
class PlaneFit:
    """Result of `fit_plane`.

    parameters : (8,) of the plane; homography : (3, 3), last entry 1; covariance : (8, 8) of its first eight entries
    ring_rho, ring_rho_u : (n,); turn_u : standard uncertainty of the turn, radians
    residual_px : rms of the points that count; ring_sigma_px, spoke_sigma_px : (n,), (m,) scatter of each line
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


def fit_plane(rings, spokes, spoke_deg, *, start, ring_rho, first=False):
    """Fit the chart plane to measured lines.

    Parameters
    ----------
    rings, spokes : lists of LinePoints; the radius of the first ring is the unit that stays
    spoke_deg : (m,) plane angles that the spokes must have
    start : (8,) plane parameters; ring_rho : (n,) first radii
    first : a quick fit from afar: stretch and no comparison of models, and all lines weighed alike, because a trace
        among them may run truer about a wrong centre than the rings do

    Returns
    -------
    PlaneFit
    """
    points = _Points(rings, spokes, spoke_deg, alike=first)
    begin = np.r_[np.asarray(start, float), 0.0, 0.0]
    if not len(spokes):
        begin[TURN] = 0
    rho = np.array(ring_rho, float)
    free = [CX, CY, SIZE] + ([TURN] if len(spokes) else []) + ([HUB_U, HUB_V] if len(spokes) > 3 else [])
    model = [*free, STRETCH_A, STRETCH_B]
    if first:
        return _finish(points, _iterate(points, begin, rho, model))
    level = begin.copy()
    level[[TILT_X, TILT_Y]] = 0
    best = _choose_model(points, level, rho, free)
    strays = _stray_rings(points, best)
    if strays.any():
        points.muted = strays
        best = _choose_model(points, level, best.rho, free)
    return _finish(points, best)


def _choose_model(points, begin, rho, free):
    """Similarity, stretch or perspective: the plainest that the residuals bear."""
    stretched = [*free, STRETCH_A, STRETCH_B]
    best = _iterate(points, begin, rho, stretched)
    plain = best.plane.copy()
    plain[[STRETCH_A, STRETCH_B]] = 0
    simple = _iterate(points, plain, best.rho, free)
    if not _better(best, simple, points):
        best = simple
    n_sound = points.n_rings - int(points.muted.sum())
    if n_sound > 1:
        tilted = _iterate(points, best.plane, best.rho, [*stretched, TILT_X, TILT_Y])
        shift_px = np.exp(tilted.plane[SIZE]) * np.hypot(*tilted.plane[[TILT_X, TILT_Y]])
        # two or three rings may be off centre because a trace lies along one of them
        if shift_px > (MIN_TILT_PX if n_sound > 3 else MIN_TILT_FEW_PX) and _better(tilted, best, points):
            best = tilted
    return best


def _stray_rings(points, state):
    """(n_lines,) bool: rings whose own centre lies off the one that most rings and the spokes' hub agree on.

    Such a ring has a trace along it, or is one; its radius is kept, its say on the centre is not.
    """
    stray = np.zeros(points.n_lines, bool)
    centres = []
    for k in range(points.n_rings):
        own = points.line == k
        jac = np.column_stack([state.centre_jac[own], np.ones(int(own.sum()))])
        weighted = jac * state.weight[own, None]
        normal = weighted.T @ jac + 1e-9 * np.eye(3) * max(float(state.weight[own].sum()), 1e-9)
        centres.append(np.linalg.lstsq(normal, -weighted.T @ state.residual[own], rcond=None)[0][:2])
    centres = np.array(centres)
    members = np.vstack([centres, state.plane[[HUB_U, HUB_V]]]) if HUB_U in state.model else centres
    if len(members) < 3:
        return stray
    off = np.hypot(*(members - np.median(members, axis=0)).T)
    stray[: points.n_rings] = (off > max(STRAY_PX, 4 * float(np.median(off))))[: points.n_rings]
    return stray


def homography_of(parameters):
    """Homography of plane parameters: stretch times turn times scale, then perspective, about the centre."""
    cx, cy, _, _, _, _, tilt_x, tilt_y = parameters[:N_PLANE]
    h = np.eye(3)
    h[:2, :2] = _affine_of(parameters) + np.outer([cx, cy], [tilt_x, tilt_y])
    h[:2, 2] = cx, cy
    h[2, :2] = tilt_x, tilt_y
    return h


def parameters_of(homography):
    """Plane parameters of a homography whose last entry is 1 (the inverse of `homography_of`)."""
    centre, tilt = homography[:2, 2], homography[2, :2]
    u, s, vt = np.linalg.svd(homography[:2, :2] - np.outer(centre, tilt))
    rotate = u @ vt
    stretch = u @ np.diag(np.log(s)) @ u.T
    size = 0.5 * np.trace(stretch)
    turn = np.arctan2(rotate[1, 0], rotate[0, 0])
    return np.array([*centre, size, turn, 0.5 * (stretch[0, 0] - stretch[1, 1]), stretch[0, 1], *tilt])


def _affine_of(parameters):
    """(2, 2) affine part: exp(size) exp([[a, b], [b, -a]]) rotation(turn)."""
    size, turn, a, b = parameters[SIZE : STRETCH_B + 1]
    r = np.hypot(a, b)
    sinh = np.sinh(r) / r if r > 1e-12 else 1.0
    stretch = np.cosh(r) * np.eye(2) + sinh * np.array([[a, b], [b, -a]])
    rotate = np.array([[np.cos(turn), -np.sin(turn)], [np.sin(turn), np.cos(turn)]])
    return np.exp(size) * stretch @ rotate


class _Points:
    """All points in flat arrays: rings first, then spokes."""

    def __init__(self, rings, spokes, spoke_deg, *, alike):
        self.alike = alike
        self.muted = np.zeros(len(rings) + len(spokes), bool)
        lists = [*rings, *spokes]
        self.line = np.concatenate([np.full(int(p.good.sum()), k) for k, p in enumerate(lists)])
        self.xy = np.stack([np.concatenate([getattr(p, name)[p.good] for p in lists]) for name in "xy"])
        at = np.concatenate([p.at[p.good] for p in lists])
        self.n_rings, self.n_lines = len(rings), len(lists)
        self.is_ring = self.line < self.n_rings
        angle = np.r_[np.zeros(self.n_rings), np.radians(np.asarray(spoke_deg, float))][self.line]
        self.across = np.stack([np.cos(angle), np.sin(angle)])
        block = np.where(self.is_ring, at / CLUSTER_DEG, at / CLUSTER_RHO).astype(np.int64)
        self.cluster = np.unique(self.line * 1000 + block, return_inverse=True)[1]
        self.n_clusters = int(self.cluster.max(initial=-1)) + 1

    def equations(self, plane, rho):
        """Residuals (n,) in px and their derivatives (n, 10) to the parameters."""
        affine = _affine_of(plane)
        inverse = np.linalg.inv(affine)
        tilt = plane[[TILT_X, TILT_Y]]
        y = inverse @ (self.xy - plane[[CX, CY]][:, None])
        shrink = 1 / (1 - tilt @ y)
        w = y * shrink
        r = np.hypot(*w)
        px = np.exp(plane[SIZE])
        target = np.r_[rho, np.zeros(self.n_lines - self.n_rings)][self.line]
        hub = self.across * ~self.is_ring
        residual = px * np.where(self.is_ring, r - target, (w * self.across).sum(axis=0)) - plane[[HUB_U, HUB_V]] @ hub
        # direction in the plane along which the residual is measured, carried back to y
        way = np.where(self.is_ring, w / np.maximum(r, 1e-9), self.across)
        back = way * shrink + np.outer(tilt, (way * w).sum(axis=0) * shrink)
        jac = np.empty((len(r), N_ALL))
        jac[:, [HUB_U, HUB_V]] = -hub.T
        jac[:, [CX, CY]] = -px * (inverse.T @ back).T
        for k in (SIZE, TURN, STRETCH_A, STRETCH_B):
            change = np.zeros(N_ALL)
            change[k] = 1e-6
            slope = inverse @ (_affine_of(plane + change) - _affine_of(plane - change)) / 2e-6
            jac[:, k] = -px * (back * (slope @ y)).sum(axis=0)
        along = (way * w).sum(axis=0)
        jac[:, TILT_X], jac[:, TILT_Y] = px * along * w[0], px * along * w[1]
        jac[:, SIZE] += residual + plane[[HUB_U, HUB_V]] @ hub
        return residual, jac


@dataclass(eq=False)
class _State:
    """Where an iteration ended."""

    plane: np.ndarray
    rho: np.ndarray
    model: list
    residual: np.ndarray
    weight: np.ndarray
    sigma: np.ndarray
    jac: np.ndarray
    normal: np.ndarray
    centre_jac: np.ndarray


def _iterate(points, plane, rho, model):
    """Tukey-weighted Gauss-Newton for the parameters named by `model` and the radii of all rings but the first."""
    first_plane, first_rho = plane.copy(), rho
    first_plane[[HUB_U, HUB_V]] = 0
    plane, rho = plane.copy(), rho.copy()
    hold = np.r_[LOOSE[model], np.full(points.n_rings - 1, LOOSE_RHO)] ** -2
    for round_ in range(MAX_ROUNDS):
        residual, jac = points.equations(plane, rho)
        if round_ < SIGMA_ROUNDS:
            sigma = _line_sigma(points, residual)
        scaled = residual / (TUKEY * sigma[points.line])
        weight = np.where(np.abs(scaled) < 1, (1 - scaled**2) ** 2, 0) / sigma[points.line] ** 2
        full = jac[:, model]
        px = np.exp(plane[SIZE])
        normal, gradient = _normal_equations(points, full, residual, weight, px)
        normal += np.diag(hold)
        pull = np.r_[plane[model] - first_plane[model], rho[1:] - first_rho[1:]] * hold
        scale = np.sqrt(np.maximum(np.diag(normal), 1e-12))
        unit = normal / np.outer(scale, scale) + 1e-9 * np.eye(len(scale))
        step = -np.linalg.solve(unit, (gradient + pull) / scale) / scale
        plane[model] += step[: len(model)]
        rho[1:] += step[len(model) :]
        if round_ >= 2 and np.abs(step[:2]).max() < 3e-4:
            break
    return _State(plane, rho, model, residual, weight, sigma, full, normal, jac[:, [CX, CY]])


def _normal_equations(points, jac, residual, weight, px):
    """Normal matrix and gradient for the plane's parameters, then the radii of all rings but the first.

    A radius touches its own ring alone, with derivative -px, so its rows are sums over that ring's points.
    """
    m, n = jac.shape[1], points.n_rings
    weighted = jac * weight[:, None]
    normal = np.zeros((m + n - 1, m + n - 1))
    gradient = np.empty(m + n - 1)
    normal[:m, :m] = weighted.T @ jac
    gradient[:m] = weighted.T @ residual
    if n > 1:

        def ring_sums(values):
            return np.bincount(points.line, values, minlength=points.n_lines)[1:n]

        normal[:m, m:] = -px * np.stack([ring_sums(column) for column in weighted.T])
        normal[m:, :m] = normal[:m, m:].T
        normal[m:, m:] = np.diag(px * px * ring_sums(weight))
        gradient[m:] = -px * ring_sums(weight * residual)
    return normal, gradient


def _line_sigma(points, residual):
    """Robust scatter of each line about the model (n_lines,), px."""
    sigma = np.ones(points.n_lines)
    edges = np.searchsorted(points.line, np.arange(points.n_lines + 1))
    for k, (first, last) in enumerate(zip(edges[:-1], edges[1:])):
        if last - first > 5:
            sigma[k] = scatter(residual[first:last])
    if points.alike:
        sigma[:] = median(sigma)
    sigma[points.muted] *= MUTE
    return np.maximum(sigma, MIN_SIGMA_PX)


def _better(rich, plain, points):
    """Whether a richer model earns its parameters, judged by the mean residuals of the clusters."""
    weight = np.maximum(rich.weight, 1e-12)
    total = np.bincount(points.cluster, weight)
    mean = [np.bincount(points.cluster, weight * s.residual) / total for s in (rich, plain)]
    first = np.r_[True, np.diff(points.cluster) > 0] if points.n_clusters else np.zeros(0, bool)
    line = np.zeros(points.n_clusters, int)
    line[points.cluster[first]] = points.line[first]
    spread = np.ones(points.n_clusters)
    for k in range(points.n_lines):
        own = line == k
        if own.any():
            spread[own] = max(scatter(mean[0][own]), MIN_SIGMA_PX)
    cost = [np.sum(np.minimum((m / spread) ** 2, TUKEY**2)) for m in mean]
    return cost[1] - cost[0] > MIN_GAIN


def _finish(points, state):
    """Covariances and scatter of the chosen model."""
    plane, jac, n_model = state.plane, state.jac, len(state.model)
    inside = [k for k in range(n_model) if state.model[k] < N_PLANE]
    model = [state.model[k] for k in inside]
    scale = np.sqrt(np.maximum(np.diag(state.normal), 1e-12))
    outer = np.outer(scale, scale)
    inverse = np.linalg.inv(state.normal / outer + 1e-9 * np.eye(len(scale))) / outer
    px = np.exp(plane[SIZE])
    force = state.weight * state.residual
    push = np.zeros((points.n_clusters, len(scale)))
    for k in range(n_model):
        push[:, k] = np.bincount(points.cluster, jac[:, k] * force, minlength=points.n_clusters)
    own = points.is_ring & (points.line > 0)
    np.add.at(push, (points.cluster[own], n_model - 1 + points.line[own]), -px * force[own])
    spread = push.T @ push * points.n_clusters / max(points.n_clusters - len(scale), 1)
    full = inverse @ spread @ inverse
    cov = np.zeros((N_PLANE, N_PLANE))
    cov[np.ix_(model, model)] = full[np.ix_(inside, inside)]
    for k, floor in ((CX, SYSTEMATIC_PX / 2), (CY, SYSTEMATIC_PX / 2), (SIZE, SYSTEMATIC_PX / px)):
        cov[k, k] += floor**2
    to_h = np.empty((8, N_PLANE))
    for k in range(N_PLANE):
        change = np.zeros(N_ALL)
        change[k] = 1e-4 if k in (CX, CY) else 1e-6
        to_h[:, k] = (homography_of(plane + change) - homography_of(plane - change)).ravel()[:8] / (2 * change[k])
    rho_u = np.zeros(points.n_rings)
    rho_u[1:] = np.sqrt(np.maximum(np.diag(full)[n_model:], 0) + (SYSTEMATIC_PX / px) ** 2)
    used = state.weight > 0
    return PlaneFit(
        parameters=plane[:N_PLANE],
        homography=homography_of(plane),
        covariance=to_h @ cov @ to_h.T,
        ring_rho=state.rho,
        ring_rho_u=rho_u,
        turn_u=float(np.sqrt(cov[TURN, TURN])),
        residual_px=float(np.sqrt(np.mean(state.residual[used] ** 2))) if used.any() else float("nan"),
        ring_sigma_px=state.sigma[: points.n_rings],
        spoke_sigma_px=state.sigma[points.n_rings :],
    )
