"""Where the charts of a drawn page are: points that rings run round and spokes run through.

A ring may be one circle, many arcs, or hundreds of dashes; a spoke one line or many. So centres are proposed
by arcs and by lines that cross in one point, and each is then judged by all lines that keep one distance from
it or point at it.
"""

from dataclasses import dataclass, replace

import numpy as np

from ._vector_pieces import LONGEST_CHORD

__all__ = ["Hub", "Ring", "Spoke", "find_hubs", "ring_cover", "style_of"]

MIN_OUTER_PT = 18.0
MIN_SWEEP_DEG = 60.0
MIN_RING_SHARE = 0.03  # of the outermost radius: smaller circles mark the centre
BINS = 720  # of half a degree, for how much of a ring is drawn
GAP_DEG, MAX_GAP_DEG = 7.0, 25.0  # the longest gap of a dotted or dashed ring
GAP_RHO = 0.06  # the same as a length, outer radii
RING_COVER = 0.9  # of the chart's arc, gaps of dashes closed
MIN_ARC_DEG = 80.0
LEAST_SWEEP_DEG = 20.0  # of line in one look, for a ring: dots of a fifth of the arc
SPOKE_SHARE = 0.25  # of the outermost radius that a spoke's strokes must cover
SPOKE_DEG = 0.2
MAX_LINES = 160
POINTS_A_RING = 400
MAX_HUBS = 60


@dataclass(frozen=True, eq=False, kw_only=True)
class Ring:
    """Lines at one distance from a hub.

    radius : px; cover : (BINS,) bool, where it is drawn, half a degree each, clockwise from the top
    pieces : (k,) int; style : what most of it is drawn with; disc : only the edge of a filled area
    """

    radius: float
    cover: np.ndarray
    pieces: np.ndarray
    style: tuple
    disc: bool


@dataclass(frozen=True, eq=False, kw_only=True)
class Spoke:
    """Straight lines on one ray from a hub: deg clockwise from the top; pieces : (k,) int; style."""

    deg: float
    pieces: np.ndarray
    style: tuple


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
        view = _View(pieces, x, y)
        worth.append(float(pieces.length[view.round].sum() + pieces.length[view.radial].sum()))
    return [points[k] for k in np.argsort(-np.array(worth), kind="stable")]


class _View:
    """All lines as seen from a point: which run round it, at what radius, and which point at it."""

    def __init__(self, pieces, x, y):
        first, last = pieces.start, pieces.start + pieces.count - 1
        self.arm = pieces.xy - (x, y)
        self.rho = np.hypot(*self.arm.T)
        high = pieces.each(np.maximum, np.where(pieces.vertex, self.rho, -np.inf))
        low = pieces.each(np.minimum, np.where(pieces.vertex, self.rho, np.inf))
        self.radius = 0.5 * (low + high)
        steady = high - low <= 2 * pieces.slack(self.radius)
        whole = pieces.each(np.minimum, self.rho) >= 0.98 * self.radius
        fine = (self.radius > 0.5 * pieces.unit) & (pieces.longest <= LONGEST_CHORD * self.radius)
        self.round = steady & whole & fine
        along = self.arm[last] - self.arm[first]
        span = np.maximum(np.hypot(*along.T), 1e-12)
        miss = np.abs(self.arm[first, 0] * along[:, 1] - self.arm[first, 1] * along[:, 0]) / span
        self.near, self.far = (ufunc(self.rho[first], self.rho[last]) for ufunc in (np.minimum, np.maximum))
        # What a short dash's ends are rounded by turns it: it may miss the hub by more than a long line.
        self.radial = pieces.straight & (miss <= 0.1 * pieces.unit * (1 + self.near / span))


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


def style_of(path):
    """What tells lines apart that were drawn for different ends: colour, width, dashes, curves or chords."""
    colour = path.stroke if path.stroke is not None else path.fill
    return (colour, round(path.width, 2), bool(path.dash), path.curved, path.stroke is not None)


def ring_cover(pieces, chosen, x, y):
    """(BINS,) bool, where lines that run round a point are drawn."""
    cover = np.zeros(BINS, bool)
    for k in chosen:
        arm = pieces.points(k) - (x, y)
        _cover(cover, np.degrees(np.arctan2(arm[:, 0], -arm[:, 1])) % 360)
    return cover


def _proposals(pieces):
    """Points (x, y) that may be centres, likelier ones first."""
    arcs = np.flatnonzero(
        (pieces.sweep_deg >= MIN_SWEEP_DEG) & (pieces.radius >= MIN_OUTER_PT * pieces.unit / 3)
    )
    found = []  # [x, y, weight, reach]
    for k in arcs[np.argsort(-pieces.radius[arcs])][:4000]:
        x, y, radius = *pieces.centre[k], pieces.radius[k]
        weight = min(pieces.sweep_deg[k], 360) / 360
        for item in found:
            if np.hypot(x - item[0], y - item[1]) < 0.01 * radius + 0.3 * pieces.unit:
                share = weight / (item[2] + weight)
                item[0] += share * (x - item[0])
                item[1] += share * (y - item[1])
                item[2] += weight
                break
        else:
            found.append([x, y, weight])
    found += [[x, y, 0.4 * n] for x, y, n in _crossings(pieces)]
    found.sort(key=lambda item: -item[2])
    return [(x, y) for x, y, _ in found[:MAX_HUBS]]


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
    view = _View(pieces, x, y)
    deg = np.degrees(np.arctan2(view.arm[:, 0], -view.arm[:, 1])) % 360
    rings = _rings(pieces, styles, np.flatnonzero(view.round & ~discs), view.radius, deg, disc=False)
    most = max((ring.radius for ring in rings), default=0.0)
    rings += [
        ring
        for ring in _rings(pieces, styles, np.flatnonzero(view.round & discs), view.radius, deg, disc=True)
        if ring.radius > 1.015 * most
    ]
    rings.sort(key=lambda ring: -ring.radius)
    arc, rings = _chart_arc(rings)
    if not rings or rings[0].radius < MIN_OUTER_PT * pieces.unit:
        return None
    outer = rings[0].radius
    rings = tuple(ring for ring in rings if ring.radius >= MIN_RING_SHARE * outer)
    spokes = _spokes(pieces, styles, view, outer)
    if len(rings) < 2 and len(spokes) < 3:
        return None
    evidence = sum(float(ring.cover.mean()) for ring in rings) + 0.25 * min(len(spokes), 12)
    grounds = np.flatnonzero(view.round & discs & (view.radius > 0.985 * outer))
    return Hub(x=x, y=y, rings=rings, spokes=spokes, arc_deg=arc, evidence=evidence, grounds=grounds)


def _rings(pieces, styles, chosen, radius, deg, *, disc):
    """Round lines grouped by what they are drawn with and by radius, those of one radius then together."""
    groups = {}
    for k in chosen:
        groups.setdefault(styles[pieces.path[k]], []).append(k)
    parts = []  # radius, swept degrees, cover, pieces, style
    for style, members in groups.items():
        members = np.array(members)
        swept = np.degrees(pieces.length[members] / radius[members])
        for own in _crowded(radius[members], swept, pieces):
            cover = np.zeros(BINS, bool)
            for k in members[own]:
                _cover(cover, deg[pieces.start[k] : pieces.start[k] + pieces.count[k]])
            at = _weighted_median(radius[members[own]], swept[own])
            parts.append((at, float(swept[own].sum()), cover, members[own], style))
    rings = []
    for at, _, cover, own, style in sorted(parts, key=lambda part: -part[1]):
        for k, ring in enumerate(rings):
            if abs(ring.radius - at) <= 2 * pieces.slack(at):
                rings[k] = replace(ring, cover=ring.cover | cover, pieces=np.concatenate([ring.pieces, own]))
                break
        else:
            rings.append(Ring(radius=at, cover=cover, pieces=own, style=style, disc=disc))
    return rings


def _crowded(radius, swept, pieces):
    """Index arrays of the narrow ranges of radius that hold most line, until too little is left for a ring.

    A window of fixed width, since dashes of a trace that nears a ring would join any chain of neighbours.
    """
    order = np.argsort(radius, kind="stable")
    left = np.ones(len(order), bool)
    found = []
    while left.any():
        live = order[left]
        at, total = radius[live], np.concatenate([[0.0], np.cumsum(swept[live])])
        stop = np.searchsorted(at, at + 2 * pieces.slack(at), side="right")
        held = total[stop] - total[:-1]
        best = int(held.argmax())
        if held[best] < LEAST_SWEEP_DEG:
            break
        found.append(live[best : stop[best]])
        left[np.flatnonzero(left)[best : stop[best]]] = False
    return found


def _weighted_median(values, weights):
    order = np.argsort(values)
    share = np.cumsum(weights[order])
    return float(values[order[np.searchsorted(share, 0.5 * share[-1])]])


def _cover(cover, deg):
    """Mark where a line runs, degrees along it; returns the angle swept."""
    turn = np.concatenate([[0.0], np.cumsum((np.diff(deg) + 180) % 360 - 180)])
    low, high = deg[0] + turn.min(), deg[0] + turn.max()
    first, last = int(np.floor(low * BINS / 360)), int(np.ceil(high * BINS / 360))
    cover[np.arange(first, min(max(last, first + 1), first + BINS)) % BINS] = True
    return high - low


def _closed(cover, radius_share):
    """Cover with the gaps between dashes closed, at a radius as a share of the outermost."""
    gap_deg = np.clip(np.degrees(GAP_RHO / radius_share), GAP_DEG, MAX_GAP_DEG)
    reach = int(gap_deg / 2 * BINS / 360)
    wide = np.zeros_like(cover)
    for shift in range(-reach, reach + 1):
        wide |= np.roll(cover, shift)
    tight = np.ones_like(cover)
    for shift in range(-reach, reach + 1):
        tight &= np.roll(wide, shift)
    return tight | cover


def _chart_arc(rings):
    """((start, end) degrees, rings that are drawn all along it); end - start is 360 for a whole chart."""
    covers = [_closed(ring.cover, ring.radius / rings[0].radius) for ring in rings]
    for first, cover in enumerate(covers):
        if cover.mean() > 0.97:
            arc, part = (0.0, 360.0), np.ones(BINS, bool)
        else:
            start, length = _longest(cover)
            if length * 360 / BINS < MIN_ARC_DEG:
                continue
            arc = (start * 360 / BINS, (start + length) * 360 / BINS)
            part = np.roll(np.arange(BINS) < length, start)
        kept = [
            ring
            for ring, own in zip(rings[first:], covers[first:], strict=True)
            if own[part].mean() >= RING_COVER
        ]
        return arc, kept
    return (0.0, 360.0), []


def _longest(cover):
    """First bin and length of the longest run of True, around the circle."""
    if not cover.any():
        return 0, 0
    offset = int(np.argmin(cover))
    rolled = np.roll(cover, -offset)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], rolled.astype(int), [0]])))
    lengths = edges[1::2] - edges[::2]
    k = int(lengths.argmax())
    return (int(edges[2 * k]) + offset) % BINS, int(lengths[k])


def _spokes(pieces, styles, view, outer):
    """Group straight lines that point at the hub by their bearing."""
    first, last = pieces.start, pieces.start + pieces.count - 1
    arm, rho, near = view.arm, view.rho, view.near
    radial = view.radial & (view.far <= 1.3 * outer)
    ends = []  # (bearing, from, to, piece)
    for k in np.flatnonzero(radial):
        a, b = arm[first[k]], arm[last[k]]
        if a @ b < 0:
            ends += [(_bearing(a), 0.0, rho[first[k]], k), (_bearing(b), 0.0, rho[last[k]], k)]
        else:
            far = a if rho[first[k]] > rho[last[k]] else b
            ends.append((_bearing(far), near[k], max(rho[first[k]], rho[last[k]]), k))
    if not ends:
        return ()
    ends.sort()
    bearings = np.array([item[0] for item in ends])
    groups = np.split(np.arange(len(ends)), np.flatnonzero(np.diff(bearings) > SPOKE_DEG) + 1)
    if len(groups) > 1 and bearings[0] + 360 - bearings[-1] <= SPOKE_DEG:
        groups[0] = np.concatenate([groups.pop(), groups[0]])
    spokes = []
    for group in groups:
        length = np.array([max(min(ends[g][2], outer) - ends[g][1], 0.0) for g in group])
        own = [styles[pieces.path[ends[g][3]]] for g in group]
        by_style = {}
        for style, part in zip(own, length, strict=True):
            by_style[style] = by_style.get(style, 0.0) + part
        style = max(by_style, key=by_style.get)
        if by_style[style] < SPOKE_SHARE * outer:
            continue
        chosen = [g for g, name in zip(group, own, strict=True) if name == style]
        turn = np.array([(ends[g][0] - ends[chosen[0]][0] + 180) % 360 - 180 for g in chosen])
        # A line's direction from the hub is as sure as its far end is far.
        weight = np.array([max(ends[g][2], 1e-9) ** 2 for g in chosen])
        spokes.append(
            Spoke(
                deg=float((ends[chosen[0]][0] + np.average(turn, weights=weight)) % 360),
                pieces=np.unique([ends[g][3] for g in chosen]),
                style=style,
            )
        )
    return tuple(sorted(spokes, key=lambda spoke: spoke.deg))


def _bearing(arm):
    return float(np.degrees(np.arctan2(arm[0], -arm[1])) % 360)
