"""Where the charts of a drawn page are: points that rings run round and spokes run through.

Centres are proposed by arcs and by lines that cross in one point, and each is then judged by all lines that
keep one distance from it or point at it.
"""

from dataclasses import dataclass

import numpy as np

from ._vector_rings import View, chart_arc, group_rings, group_spokes, style_of

__all__ = ["Hub", "find_hubs"]

MIN_OUTER_PT = 18.0
MIN_SWEEP_DEG = 60.0
MIN_RING_SHARE = 0.03  # of the outermost radius: smaller circles mark the centre
MAX_LINES = 160
POINTS_A_RING = 400
MAX_HUBS = 60


@dataclass(frozen=True, eq=False, kw_only=True)
class Hub:
    """A chart's centre (px), its rings from the outermost in, its spokes, and the arc it is drawn on.

    grounds : (k,) int, pieces that are filled discs as large as the chart: what it is drawn upon
    """

    x: float
    y: float
    rings: tuple
    spokes: tuple
    arc_deg: tuple
    evidence: float
    grounds: np.ndarray

    @property
    def outer(self):
        """Radius of the outermost ring."""
        return self.rings[0].radius


def find_hubs(page, pieces):
    """The charts' `Hub`s on a `VectorPage` cut into `Pieces`, strongest first, clear of each other."""
    styles = [style_of(path) for path in page.paths]
    discs = np.array([path.stroke is None for path in page.paths])[pieces.path]
    kept = []
    for x, y in _ranked(pieces, _proposals(pieces)):
        if any(np.hypot(x - hub.x, y - hub.y) < 0.8 * hub.outer for hub in kept):
            continue
        hub = _judge(pieces, styles, discs, x, y)
        if hub is None:
            continue
        hub = _judge(pieces, styles, discs, *_centred(pieces, styles, hub)) or hub
        if all(
            np.hypot(hub.x - other.x, hub.y - other.y) > 0.8 * max(other.outer, hub.outer) for other in kept
        ):
            kept.append(hub)
    return sorted(kept, key=lambda hub: -hub.evidence)


def _ranked(pieces, points):
    """Points in the order of how much line runs round them or at them."""
    worth = []
    for x, y in points:
        view = View(pieces, x, y)
        worth.append(float(pieces.length[view.round].sum() + pieces.length[view.radial].sum()))
    return [points[k] for k in np.argsort(-np.array(worth), kind="stable")]


def _proposals(pieces):
    """Points (x, y) that may be centres, likelier ones first."""
    arcs = np.flatnonzero(
        (pieces.sweep_deg >= MIN_SWEEP_DEG) & (pieces.radius >= MIN_OUTER_PT * pieces.unit / 3)
    )
    found = []  # (weight, x, y)
    if len(arcs):
        cell = np.round(pieces.centre[arcs] / pieces.unit).astype(np.int64)
        _, owner = np.unique(cell, axis=0, return_inverse=True)
        weight = np.bincount(owner.ravel(), np.minimum(pieces.sweep_deg[arcs], 360) / 360)
        # The longest arc of a cell tells its centre best.
        order = np.argsort(pieces.sweep_deg[arcs] * pieces.radius[arcs], kind="stable")
        best = np.zeros(len(weight), int)
        best[owner.ravel()[order]] = arcs[order]
        found = [(w, *pieces.centre[k]) for w, k in zip(weight, best, strict=True)]
    found += [(0.4 * n, x, y) for x, y, n in _crossings(pieces)]
    found.sort(key=lambda item: -item[0])
    return [(float(x), float(y)) for _, x, y in found[:MAX_HUBS]]


def _crossings(pieces):
    """Points where long straight lines of three or more directions meet: x, y, number of directions."""
    lines = np.flatnonzero(pieces.straight & (pieces.length > 0.3 * MIN_OUTER_PT * pieces.unit))
    lines = lines[np.argsort(-pieces.length[lines], kind="stable")][:MAX_LINES]
    if len(lines) < 3:
        return []
    first = pieces.xy[pieces.start[lines]]
    along = pieces.xy[pieces.start[lines] + pieces.count[lines] - 1] - first
    along /= np.hypot(*along.T)[:, None]
    normal = np.stack([-along[:, 1], along[:, 0]], axis=1)
    level = np.einsum("ij,ij->i", normal, first)
    i, j = np.triu_indices(len(lines), 1)
    det = normal[i, 0] * normal[j, 1] - normal[i, 1] * normal[j, 0]
    ok = np.abs(det) > 0.05
    i, j, det = i[ok], j[ok], det[ok]
    x = (level[i] * normal[j, 1] - level[j] * normal[i, 1]) / det
    y = (normal[i, 0] * level[j] - normal[j, 0] * level[i]) / det
    cell = np.round(np.stack([x, y], axis=1) / (0.5 * pieces.unit)).astype(np.int64)
    _, inverse, counts = np.unique(cell, axis=0, return_inverse=True, return_counts=True)
    found = []
    for k in np.argsort(-counts, kind="stable")[:40]:
        if counts[k] < 2:
            break
        chosen = inverse.ravel() == k
        cx, cy = np.median(x[chosen]), np.median(y[chosen])
        through = np.abs(normal @ (cx, cy) - level) < 0.3 * pieces.unit
        directions = np.unique(
            np.round(np.degrees(np.arctan2(along[through, 1], along[through, 0])) % 180).astype(int)
        )
        if len(directions) >= 3:
            found.append((float(cx), float(cy), len(directions)))
    return found


def _judge(pieces, styles, discs, x, y):
    """The `Hub` at a point; None when no chart is there."""
    view = View(pieces, x, y)
    deg = np.degrees(np.arctan2(view.arm[:, 0], -view.arm[:, 1])) % 360
    rings = group_rings(pieces, styles, np.flatnonzero(view.round & ~discs), view.radius, deg, disc=False)
    most = max((ring.radius for ring in rings), default=0.0)
    rings += [
        ring
        for ring in group_rings(
            pieces, styles, np.flatnonzero(view.round & discs), view.radius, deg, disc=True
        )
        if ring.radius > 1.015 * most
    ]
    rings.sort(key=lambda ring: -ring.radius)
    arc, rings = chart_arc(rings)
    if not rings or rings[0].radius < MIN_OUTER_PT * pieces.unit:
        return None
    outer = rings[0].radius
    rings = tuple(ring for ring in rings if ring.radius >= MIN_RING_SHARE * outer)
    spokes = group_spokes(pieces, styles, view, outer)
    if len(rings) < 2 and len(spokes) < 3:
        return None
    evidence = sum(float(ring.cover.mean()) for ring in rings) + 0.25 * min(len(spokes), 12)
    grounds = np.flatnonzero(view.round & discs & (view.radius > 0.985 * outer))
    return Hub(x=x, y=y, rings=rings, spokes=spokes, arc_deg=arc, evidence=evidence, grounds=grounds)


def _centred(pieces, styles, hub):
    """A hub's x, y by robust least squares over its rings, of any radius, and spokes (Gauss-Newton)."""
    x, y = hub.x, hub.y
    rings = []
    for ring in hub.rings:
        own = [k for k in ring.pieces if styles[pieces.path[k]] == ring.style]
        points = np.concatenate([pieces.points(k)[pieces.vertex_of(k)] for k in own])
        rings.append(points[:: max(1, len(points) // POINTS_A_RING)])
    lines = [k for spoke in hub.spokes for k in spoke.pieces]
    ends = np.array([pieces.points(k)[[0, -1]] for k in lines]).reshape(-1, 2, 2)
    along = ends[:, 1] - ends[:, 0]
    length = np.hypot(*along.T)
    normal = np.stack([-along[:, 1], along[:, 0]], axis=1) / np.maximum(length, 1e-12)[:, None]
    for _ in range(4):
        rows, misses, trust = (
            [normal],
            [np.einsum("ij,ij->i", normal, ends[:, 0] - (x, y))],
            [length / hub.outer],
        )
        for points in rings:
            arm = points - (x, y)
            rho = np.hypot(*arm.T)
            unit = arm / rho[:, None]
            # With the ring's own radius solved for, what is left are deviations from its mean.
            rows.append(unit - unit.mean(axis=0))
            misses.append(rho - rho.mean())
            trust.append(np.ones(len(rho)))
        rows, misses, trust = np.concatenate(rows), np.concatenate(misses), np.concatenate(trust)
        # Lines of a trace that happen to point at the hub must not pull it.
        scale = 2.0 * float(np.median(np.abs(misses))) + 1e-4 * pieces.unit
        weight = trust * np.minimum(1.0, scale / np.maximum(np.abs(misses), 1e-12))
        step = np.linalg.lstsq(rows * weight[:, None], misses * weight, rcond=None)[0]
        x, y = x + float(step[0]), y + float(step[1])
    return x, y
