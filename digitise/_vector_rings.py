"""Rings and spokes about a point of a drawn page: lines that keep one distance from it, or point at it.

A ring may be one circle, many arcs, or hundreds of dashes; a spoke one line or many. Bits of a trace that
happen to run along them are told apart by what they are drawn with.
"""

from dataclasses import dataclass, replace

import numpy as np

from ._vector_pieces import LONGEST_CHORD

__all__ = ["Ring", "Spoke", "View", "chart_arc", "group_rings", "group_spokes", "ring_cover", "style_of"]

BINS = 720  # of half a degree, for how much of a ring is drawn
GAP_DEG, MAX_GAP_DEG = 7.0, 25.0  # the longest gap of a dotted or dashed ring
GAP_RHO = 0.06  # the same as a length, outer radii
RING_COVER = 0.9  # of the chart's arc, gaps of dashes closed
MIN_ARC_DEG = 80.0
LEAST_SWEEP_DEG = 20.0  # of line in one look, for a ring: dots of a fifth of the arc
SPOKE_SHARE = 0.25  # of the outermost radius that a spoke's strokes must cover
SPOKE_DEG = 0.2


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


class View:
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


def group_rings(pieces, styles, chosen, radius, deg, *, disc):
    """Round lines grouped by what they are drawn with and by radius, those of one radius then together."""
    groups = {}
    for k in chosen:
        groups.setdefault(styles[pieces.path[k]], []).append(k)
    parts = []  # radius, swept degrees, cover, pieces, style
    for style, own in groups.items():
        members = np.array(own)
        swept = np.degrees(pieces.length[members] / radius[members])
        for held in _crowded(radius[members], swept, pieces):
            cover = np.zeros(BINS, bool)
            for k in members[held]:
                _cover(cover, deg[pieces.start[k] : pieces.start[k] + pieces.count[k]])
            at = _weighted_median(radius[members[held]], swept[held])
            parts.append((at, float(swept[held].sum()), cover, members[held], style))
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


def chart_arc(rings):
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


def group_spokes(pieces, styles, view, outer):
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
