"""The lines inside a chart that may be traces: clipped as they show, and what continues them joined.

A trace may be one path, a path a segment, or hundreds of dashes. Lines of one look are joined where one ends
and the next begins; across a gap only where both are short, as dashes are, so that two traces are never made
one.
"""

from dataclasses import dataclass

import cv2
import numpy as np

from .frozen import lock_arrays

__all__ = ["Chain", "Look", "find_chains", "looks_of"]

TOUCH_PX = 0.3  # ends that meet
DASH_LENGTH = 0.3  # outer radii: longer lines are not dashes
DASH_GAP = 0.06  # outer radii between dashes
NEAR_RHO = 1.25  # a trace comes at least this near
MAX_STROKES = 3000  # of one look
BISECTIONS = 24


@dataclass(frozen=True, kw_only=True)
class Look:
    """What lines of one trace share: colour (r, g, b), opacity, width px (0 of areas), dash lengths px."""

    colour: tuple
    alpha: float
    width: float
    dash: tuple
    filled: bool


@dataclass(frozen=True, eq=False, kw_only=True)
class Chain:
    """One line on the picture.

    points : (n, 2) px, a row of NaN where the pen was up
    vertex : (n,) bool, points that the drawing names itself
    look : Look; paths : frozenset of the page's path numbers; closed : it ends where it began
    curved : whether it was drawn with curves; order : drawing order
    """

    points: np.ndarray
    vertex: np.ndarray
    look: Look
    paths: frozenset
    closed: bool
    curved: bool
    order: int

    def __post_init__(self):
        lock_arrays(self)


def find_chains(page, grid, lines):
    """Every `Chain` near a `Grid` on a `VectorPage` in picture px; `lines` are the grid's own (path, run)."""
    groups = {}
    for k, path in enumerate(page.paths):
        for look in looks_of(path):
            for j, (run, vertex) in enumerate(zip(path.runs, path.vertices, strict=True)):
                if (k, j) in lines or not _near(run, grid):
                    continue
                slack = 0.5 * path.width + TOUCH_PX
                for points, flags in _clipped(run, vertex, path.clips, slack):
                    closed = len(points) > 3 and np.hypot(*(points[0] - points[-1])) < TOUCH_PX
                    groups.setdefault(look, []).append(
                        Chain(
                            points=points,
                            vertex=flags,
                            look=look,
                            paths=frozenset([k]),
                            closed=bool(closed),
                            curved=path.curved,
                            order=k,
                        )
                    )
    return [chain for group in groups.values() for chain in _joined(group, grid.outer_px)]


def looks_of(path):
    """The stroke and the fill of a path, as far as there are any."""
    if path.stroke is not None:
        dash = tuple(round(length, 2) for length in path.dash)
        yield Look(
            colour=path.stroke,
            alpha=round(path.stroke_alpha, 2),
            width=round(path.width, 2),
            dash=dash,
            filled=False,
        )
    if path.fill is not None:
        yield Look(colour=path.fill, alpha=round(path.fill_alpha, 2), width=0.0, dash=(), filled=True)


def _near(run, grid):
    low, high = run.min(axis=0), run.max(axis=0)
    nearest = np.clip((grid.centre_x, grid.centre_y), low, high)
    if np.hypot(*(nearest - (grid.centre_x, grid.centre_y))) > 2 * NEAR_RHO * grid.outer_px:
        return False  # twice: a stretched chart's radius is a mean
    rho, _ = grid.to_plane(run[:, 0], run[:, 1])
    return bool(rho.min() < NEAR_RHO)


def _clipped(points, vertex, clips, slack):
    """[(points, vertex)] of the parts of a line inside every clip, cut where it crosses the outline."""
    parts = [(points, vertex)]
    for clip in clips:
        parts = [cut for part in parts for cut in _cut(*part, clip, slack)]
    return [part for part in parts if len(part[0]) > 1]


def _cut(points, vertex, clip, slack):
    low, high = clip.min(axis=0), clip.max(axis=0)
    corner = np.all((np.abs(clip - low) < 1e-3) | (np.abs(clip - high) < 1e-3), axis=1)
    if corner.all() and len(clip) <= 6 and np.all((points >= low) & (points <= high)):
        return [(points, vertex)]
    outline = clip.astype(np.float32)[:, None]

    def inside(where):
        return np.array(
            [cv2.pointPolygonTest(outline, (float(x), float(y)), True) >= -slack for x, y in where], bool
        )

    within = inside(points)
    if within.all():
        return [(points, vertex)]
    if not within.any():
        return []
    change = np.flatnonzero(np.diff(within.astype(int)))
    inner = np.where(within[change], change, change + 1)
    near, far = points[inner].copy(), points[np.where(within[change], change + 1, change)].copy()
    for _ in range(BISECTIONS):
        middle = 0.5 * (near + far)
        ok = inside(middle)
        near[ok], far[~ok] = middle[ok], middle[~ok]
    parts = []
    starts = np.flatnonzero(within & ~np.concatenate([[False], within[:-1]]))
    stops = np.flatnonzero(within & ~np.concatenate([within[1:], [False]])) + 1
    border = dict(zip(change.tolist(), near, strict=True))
    for start, stop in zip(starts, stops, strict=True):
        part, flags = [points[start:stop]], [vertex[start:stop]]
        if start - 1 in border:
            part.insert(0, border[start - 1][None])
            flags.insert(0, [False])
        if stop - 1 in border:
            part.append(border[stop - 1][None])
            flags.append([False])
        parts.append((np.concatenate(part), np.concatenate(flags).astype(bool)))
    if len(parts) > 1 and within[0] and within[-1] and np.hypot(*(points[0] - points[-1])) < TOUCH_PX:
        head, tail = parts[0], parts.pop()  # a closed line that begins inside
        parts[0] = (np.concatenate([tail[0], head[0][1:]]), np.concatenate([tail[1], head[1][1:]]))
    return parts


def _joined(group, outer_px):
    """Chains of one look with what continues what made one."""
    long = DASH_LENGTH * outer_px
    # A short closed line may be a dash that goes into the centre and out again.
    done = [chain for chain in group if chain.closed and _length(chain.points) >= long]
    rest = [chain for chain in group if not chain.closed or _length(chain.points) < long]
    lines = _link(_in_order(rest, TOUCH_PX), TOUCH_PX)
    done += [chain for chain in lines if _length(chain.points) >= long]
    dashes = [chain for chain in lines if _length(chain.points) < long]
    if len(dashes) >= 3 and not group[0].look.filled:
        gap = max(DASH_GAP * outer_px, 6 * group[0].look.width)
        joined = _in_order(dashes, gap)
        # A program draws dashes one after the other; where it does not, the nearest ends are tried.
        dashes = joined if len(joined) <= len(dashes) / 3 else _link(dashes, gap)
    return done + dashes


def _in_order(chains, reach):
    """Chains joined where each begins within reach of the end of the one drawn before it."""
    joined, run = [], []
    for chain in chains:
        if run and np.hypot(*(chain.points[0] - run[-1].points[-1])) > reach:
            joined.append(run)
            run = []
        run.append(chain)
    return [_merged(run, [False] * len(run)) if len(run) > 1 else run[0] for run in [*joined, run] if run]


def _length(points):
    return float(np.nansum(np.hypot(*np.diff(points, axis=0).T)))


def _link(chains, reach):
    """Greedy: from each line on to the nearest free end within reach, then back from its start."""
    n = len(chains)
    if not 2 <= n <= MAX_STROKES:
        return chains
    ends = np.array([[chain.points[0], chain.points[-1]] for chain in chains])  # (n, 2, 2)
    free = np.ones(n, bool)
    linked = []
    for first in range(n):
        if not free[first]:
            continue
        free[first] = False
        order = [(first, False)]
        for forward in (True, False):
            while True:
                k, turned = order[-1] if forward else order[0]
                at = ends[k, (0 if turned else 1) if forward else (1 if turned else 0)]
                away = np.where(free[:, None], np.hypot(*np.moveaxis(ends - at, 2, 0)), np.inf)
                j = int(away.argmin())
                other, side = divmod(j, 2)
                if away[other, side] > reach:
                    break
                free[other] = False
                if forward:
                    order.append((other, side == 1))
                else:
                    order.insert(0, (other, side == 0))
        linked.append(_merged([chains[k] for k, _ in order], [turned for _, turned in order]))
    return linked


def _merged(chains, turned):
    """One chain of several in order; a row of NaN where they do not touch."""
    points, vertex = [], []
    for chain, back in zip(chains, turned, strict=True):
        own = chain.points[::-1] if back else chain.points
        flags = chain.vertex[::-1] if back else chain.vertex
        if points:
            if np.hypot(*(own[0] - points[-1][-1])) > TOUCH_PX:
                points.append(np.full((1, 2), np.nan))
                vertex.append(np.zeros(1, bool))
            else:
                own, flags = own[1:], flags[1:]
        points.append(own)
        vertex.append(flags)
    points, vertex = np.concatenate(points), np.concatenate(vertex)
    closed = len(points) > 3 and np.hypot(*(points[0] - points[-1])) < TOUCH_PX
    return Chain(
        points=points,
        vertex=vertex,
        look=chains[0].look,
        paths=frozenset().union(*(chain.paths for chain in chains)),
        closed=bool(closed),
        curved=any(chain.curved for chain in chains),
        order=max(chain.order for chain in chains),
    )
