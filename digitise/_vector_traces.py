"""The traces among a chart's chains: pieces of one put together, a line and its filled area made one."""

from dataclasses import replace

import numpy as np

from ._vector_course import CROWDED_RHO, at_bearings
from ._vector_evidence import course_of, find_paper, is_trace, shown_ink, shows
from ._vector_lines import find_chains

__all__ = ["MANY_BREAKS", "drawn_traces"]

SAME_DEG = 2.0  # step of the comparison of two lines
SAME_RHO = 0.003
SHARED_TURN = 0.1  # bearings that two pieces of one trace may share
MANY_BREAKS = 8  # of the pen: fewer are no dashes
DOT_LENGTH = 2.2  # line widths: longer strokes are dashes
DASH_LENGTH = 0.15  # outer radii: longer ones are lines


def drawn_traces(page, drawn, rgb):
    """The traces of a `DrawnGrid` on a `VectorPage` in px: a list of (Chain, ink (3,), dash, filled)."""
    grid = drawn.grid
    paper = find_paper(page, grid, drawn.lines)
    chains = find_chains(page, grid, drawn.lines)
    found = []
    for chain in chains:
        if len(chain.points) > 3 and is_trace(chain, course_of(chain.points, grid)):
            ink = shown_ink(chain.look, paper)
            if shows(chain, rgb, ink, paper):
                found.append(chain)
    found = _whole(found, chains, grid)
    kept = []
    # What is drawn later lies on top; a stroke tells the place better than the edge of an area.
    for chain in sorted(found, key=lambda item: (item.look.filled, -item.order)):
        twin = next((k for k, (other, *_) in enumerate(kept) if _same(chain, other, grid)), None)
        if twin is None:
            kept.append((chain, shown_ink(chain.look, paper), _dash(chain, grid.outer_px), chain.look.filled))
        else:
            other, ink, dash, filled = kept[twin]
            kept[twin] = (other, ink, dash, filled or chain.look.filled)
    return sorted(kept, key=lambda item: item[0].order)


def _whole(found, chains, grid):
    """Traces whose pieces are put together: of one look, and at bearings where the others are not."""
    whole = []  # lists of chains
    for chain in sorted(found, key=lambda item: -len(item.points)):
        for own in whole:
            if own[0].look == chain.look and all(_apart(chain, other, grid) for other in own):
                own.append(chain)
                break
        else:
            whole.append([chain])
    for own in whole:
        paths = frozenset().union(*(chain.paths for chain in own))
        for chain in chains:
            short = (
                chain.look == own[0].look and chain.paths & paths and not any(chain is item for item in found)
            )
            if short and all(_apart(chain, other, grid) for other in own):
                own.append(chain)  # a short stretch between two breaks of the same path
    return [_together(own, grid) for own in whole]


def _apart(a, b, grid):
    """Whether two chains lie at different bearings."""
    wanted = np.arange(0, 360, SAME_DEG / 4)
    # At the centre a line meets every bearing.
    seen = [np.nan_to_num(_reach(chain, grid, wanted)) > CROWDED_RHO for chain in (a, b)]
    least = min(seen[0].sum(), seen[1].sum())
    return (seen[0] & seen[1]).sum() <= SHARED_TURN * least


def _same(a, b, grid):
    """Whether two chains run along each other."""
    wanted = np.arange(0.37, 360, SAME_DEG)
    first, second = (_reach(chain, grid, wanted) for chain in (a, b))
    both = np.isfinite(first) & np.isfinite(second)
    either = np.isfinite(first) | np.isfinite(second)
    if both.sum() < 0.9 * either.sum() or not both.any():
        return False
    return float(np.percentile(np.abs(first - second)[both], 90)) < SAME_RHO


def _reach(chain, grid, wanted):
    rho, deg = grid.to_plane(chain.points[:, 0], chain.points[:, 1])
    return at_bearings(rho, deg, wanted, bridged=False).rho


def _together(chains, grid):
    """Chains as one, all clockwise and in the order of their bearings, the pen up between them."""
    if len(chains) == 1:
        return chains[0]
    parts = []
    for chain in chains:
        course = course_of(chain.points, grid)
        way = slice(None) if course.net_deg >= 0 else slice(None, None, -1)
        parts.append((course.plane_deg[way][0], chain.points[way], chain.vertex[way]))
    parts.sort(key=lambda part: part[0])
    points, vertex = [parts[0][1]], [parts[0][2]]
    for _, own, flags in parts[1:]:
        points += [np.full((1, 2), np.nan), own]
        vertex += [[False], flags]
    return replace(
        chains[0],
        points=np.vstack(points),
        vertex=np.concatenate(vertex).astype(bool),
        paths=frozenset().union(*(chain.paths for chain in chains)),
        closed=False,
        order=max(chain.order for chain in chains),
    )


def _dash(chain, outer_px):
    """Solid, dashed or dotted: by the path's own dashes, or by the strokes that it is made of."""
    width = max(chain.look.width, 0.1)
    if chain.look.dash:
        on = chain.look.dash[::2] if len(chain.look.dash) > 1 else chain.look.dash
        return "dotted" if max(on) <= DOT_LENGTH * width else "dashed"
    up = np.isnan(chain.points[:, 0])
    if up.sum() < MANY_BREAKS:
        return "solid"
    strokes = [part[~np.isnan(part[:, 0])] for part in np.split(chain.points, np.flatnonzero(up))]
    usual = np.median([np.hypot(*np.diff(part, axis=0).T).sum() for part in strokes if len(part)])
    if usual > DASH_LENGTH * outer_px:
        return "solid"  # lobes, with the pen up between them
    return "dotted" if usual <= DOT_LENGTH * width else "dashed"
