"""The `Grid` of every chart drawn on a page, and which lines are the grid's own.

A trace may be a circle too (an omni), and nothing in its shape tells it from a ring. What it is drawn with
does: rings share colour and width with each other or with the spokes, and one tool draws them all alike.
"""

from dataclasses import dataclass

import numpy as np

from ._vector_hubs import find_hubs
from ._vector_pieces import cut_pieces
from ._vector_rings import ring_cover, style_of
from .grid import Grid

__all__ = ["DrawnGrid", "find_drawn_grids"]

CHROMATIC = 30  # largest minus smallest of r, g, b: less is a grey
STRAY = 0.2  # of a ring's ink: bits of a trace that run along it
BOLD = 1.8  # times the usual ring's width
ASPECT = 0.5, 2.0  # of a stretched chart
MIN_OVAL_PT = 36.0
MAX_OVALS = 400
MAX_SKEW_DEG = 10.0
LATTICE_DEG = 0.3  # how far spokes may stand off even steps
ROUNDING_PT = 0.003  # what drawing programs round places to, about


@dataclass(frozen=True, eq=False, kw_only=True)
class DrawnGrid:
    """A chart's grid as drawn: the `Grid` in picture px, and (path, run) of every line that belongs to it."""

    grid: Grid
    lines: frozenset


def find_drawn_grids(page):
    """The `DrawnGrid`s of a `VectorPage`, strongest first."""
    found = []
    for shape in (None, *_oval_shapes(page)):
        pieces = cut_pieces(page, shape)
        if pieces is None:
            return []
        for hub in find_hubs(page, pieces):
            item = _drawn_grid(page, pieces, hub, np.eye(2) if shape is None else shape)
            if item is None:
                continue
            apart = [
                np.hypot(item.grid.centre_x - g.grid.centre_x, item.grid.centre_y - g.grid.centre_y)
                / max(item.grid.outer_px, g.grid.outer_px)
                for g in found
            ]
            if not apart or min(apart) > 0.8:
                found.append(item)
    return found


def _oval_shapes(page):
    """Shapes (2, 2) of stretched charts: those of two or more ovals that differ in size alone."""
    unit = page.px_per_pt if np.isfinite(page.px_per_pt) else 1.0
    shapes = []
    runs = [run for path in page.paths for run in path.runs if len(run) >= 9]
    closed = [
        run
        for run in runs
        if np.hypot(*(run[0] - run[-1])) < 0.1 * unit and min(np.ptp(run, axis=0)) > MIN_OVAL_PT * unit
    ]
    for run in closed[:MAX_OVALS]:
        shape = _oval(run, unit)
        if shape is not None:
            shapes.append(shape)
    kept = []
    for k, shape in enumerate(shapes):
        alike = sum(np.abs(shape - other).max() < 2e-3 for other in shapes)
        if alike >= 2 and all(np.abs(shape - other).max() > 2e-3 for other in kept):
            kept.append(
                np.mean([other for other in shapes[k:] if np.abs(shape - other).max() < 2e-3], axis=0)
            )
    return kept[:3]


def _oval(run, unit):
    """The (2, 2) symmetric shape of area 1 that makes the oval from a circle; None for all else."""
    middle, size = run.mean(axis=0), np.ptp(run, axis=0).max()
    x, y = ((run - middle) / size).T
    design = np.stack([x * x, x * y, y * y, x, y], axis=1)
    a, b, c, d, e = np.linalg.lstsq(design, np.ones(len(run)), rcond=None)[0]
    matrix = np.array([[a, b / 2], [b / 2, c]])
    values, vectors = np.linalg.eigh(matrix)
    if values.min() <= 0:
        return None
    centre = -np.linalg.solve(matrix, [d, e]) / 2
    level = 1 + centre @ matrix @ centre
    reach = np.sqrt(
        np.einsum("ni,ij,nj->n", np.stack([x, y], 1) - centre, matrix, np.stack([x, y], 1) - centre) / level
    )
    aspect = float(np.sqrt(values.max() / values.min()))
    if np.abs(reach - 1).max() > 1.5e-3 + 0.1 * unit / size or not 1 + 5e-4 < aspect < ASPECT[1]:
        return None
    axes = values**-0.5
    return vectors @ np.diag(axes / np.sqrt(axes.prod())) @ vectors.T


def _drawn_grid(page, pieces, hub, shape):
    """The `DrawnGrid` of a hub with the circles left out that are traces; None when no grid is left."""
    rings = _ruled(page, pieces, hub)
    if not rings:
        return None
    spokes = _plain_spokes(hub)
    if len(rings) < 2 and len(spokes) < 3:
        return None
    outer = rings[0][0]
    residual, n = _residual(pieces, hub, rings)
    skew, step = _lattice([spoke.deg for spoke in spokes])
    skew = skew if _texts_turned(page, skew) else 0.0
    turn = np.radians(skew)
    homography = np.eye(3)
    homography[:2, :2] = outer * shape @ [[np.cos(turn), -np.sin(turn)], [np.sin(turn), np.cos(turn)]]
    homography[:2, 2] = shape @ (hub.x, hub.y)
    u_px = max(residual, ROUNDING_PT * pieces.unit)
    spread = np.full(8, u_px / np.sqrt(n))
    spread[6:] = 1e-9  # a drawn page has no perspective
    drawn = [_drawn(page, pieces, chosen, cover) for _, chosen, cover in rings]
    ruled = [
        *(chosen for _, chosen, _ in rings),
        *(spoke.pieces for spoke in spokes),
        hub.grounds,
    ]
    lines = {(int(pieces.path[k]), int(pieces.run[k])) for chosen in ruled for k in chosen}
    start, end = hub.arc_deg
    arc = (0.0, 360.0) if end - start > 359 else ((start - skew) % 360, (start - skew) % 360 + end - start)
    grid = Grid(
        homography=homography,
        covariance=np.diag(spread**2),
        ring_rho=np.array([radius / outer for radius, _, _ in rings]),
        ring_rho_u=np.full(len(rings), u_px / outer),
        ring_drawn=np.array(drawn),
        ring_width_px=np.array(
            [float(np.median([page.paths[pieces.path[k]].width for k in chosen])) for _, chosen, _ in rings]
        ),
        spoke_deg=np.sort((np.array([spoke.deg for spoke in spokes]) - skew) % 360),
        spoke_step_deg=step,
        spoke_width_px=float(np.median([spoke.style[1] for spoke in spokes])) if spokes else float("nan"),
        arc_deg=np.array(arc),
        skew_deg=float(skew),
        skew_u_deg=float(np.degrees(u_px / outer)),
        residual_px=float(residual),
    )
    return DrawnGrid(grid=grid, lines=frozenset(lines))


def _key(style):
    """What rings and spokes of one grid share: colour and width."""
    return style[:2]


def _ruled(page, pieces, hub):
    """[(radius, pieces, cover)] of the rings, the circles that look like traces left out."""
    items = [item for ring in hub.rings for item in _by_style(page, pieces, hub, ring)]
    radii = {}
    for radius, style, _, _ in items:
        radii.setdefault(_make(style), set()).add(radius)
    spoke_keys = {_key(spoke.style) for spoke in hub.spokes}
    many = max(radii, key=lambda make: len(radii[make]))
    lone = [
        len(radii[_make(style)]) == 1 and (_key(style) not in spoke_keys or style[3] != many[2])
        for _, style, _, _ in items
    ]
    usual = [item for item, alone in zip(items, lone, strict=True) if not alone] or items
    rings = {}
    for (radius, style, chosen, cover), alone in zip(items, lone, strict=True):
        shared = any(item[0] == radius and item[1] != style for item in items)
        if alone and _is_trace(style, usual, outermost=radius == items[0][0], shared=shared):
            continue
        known = rings.get(radius)
        rings[radius] = (
            (chosen, cover) if known is None else (np.concatenate([known[0], chosen]), known[1] | cover)
        )
    return [(radius, *rings[radius]) for radius in sorted(rings, reverse=True)]


def _by_style(page, pieces, hub, ring):
    """(radius, style, pieces, cover) of a ring's lines by what they are drawn with, without stray bits."""
    styles = [style_of(page.paths[pieces.path[k]]) for k in ring.pieces]
    found = []
    for style in dict.fromkeys(styles):
        chosen = np.array([k for k, own in zip(ring.pieces, styles, strict=True) if own == style])
        found.append((ring.radius, style, chosen, ring_cover(pieces, chosen, hub.x, hub.y)))
    most = max(cover.mean() for *_, cover in found)
    return [item for item in found if item[3].mean() > STRAY * most]


def _make(style):
    """What tells the rings of one grid from a trace: colour, width, and whether of curves or chords."""
    return (*style[:2], style[3])


def _is_trace(style, usual, *, outermost, shared):
    """Whether a circle that stands alone in colour and width is a trace rather than a ring."""
    colour, width, dashed, curved, stroked = style
    if not stroked or (outermost and not shared):
        return False
    if max(colour) - min(colour) > CHROMATIC:
        return True
    chorded = not curved and all(item[1][3] for item in usual)
    bold = width > BOLD * float(np.median([item[1][1] for item in usual]))
    full = not dashed and len(usual) >= 2 and all(item[1][2] for item in usual)
    return chorded or (not outermost and (bold or full))  # a rim is often bolder than the rings


def _plain_spokes(hub):
    """The spokes that share their look with most others; a lone coloured line marks something else."""
    if not hub.spokes:
        return []
    keys = [_key(spoke.style) for spoke in hub.spokes]
    ring_keys = {_key(ring.style) for ring in hub.rings}
    return [
        spoke for spoke, key in zip(hub.spokes, keys, strict=True) if key in ring_keys or keys.count(key) > 2
    ]


def _residual(pieces, hub, rings):
    """Rms distance (px) of the rings' own points from their circles, and how many points there are."""
    misses = []
    for radius, chosen, _ in rings:
        for k in chosen:
            misses.append(np.hypot(*(pieces.points(k)[pieces.vertex_of(k)] - (hub.x, hub.y)).T) - radius)
    misses = np.concatenate(misses)
    return float(np.sqrt(np.mean(misses**2))), len(misses)


def _lattice(bearings):
    """Skew (degrees, within +-MAX_SKEW_DEG) of evenly spaced spokes and their step; 0 and NaN of others."""
    if len(bearings) < 2:
        return 0.0, float("nan")
    bearings = np.asarray(bearings)
    gaps = np.diff(np.concatenate([bearings, bearings[:1] + 360]))
    step = float(np.median(gaps))
    steps = gaps / step
    if (
        np.abs(steps - np.round(steps)).max() * step > LATTICE_DEG * 2
        or abs(360 / step - round(360 / step)) > 0.02
    ):
        return 0.0, float("nan")
    step = 360 / round(360 / step)
    phase = np.angle(np.exp(2j * np.pi * bearings / step).mean()) / (2 * np.pi) * step
    return (float(phase) if abs(phase) <= MAX_SKEW_DEG else 0.0), step


def _texts_turned(page, skew):
    """Whether the page's text is turned as the spokes are: else even spokes off the upright are no skew."""
    if abs(skew) < 0.02 or not page.texts:
        return True
    turns = np.array([(text.angle_deg + 45) % 90 - 45 for text in page.texts])
    return bool(np.mean(np.abs(turns - skew) < 0.5) > 0.5)


def _drawn(page, pieces, chosen, cover):
    """Share of a ring that is inked."""
    dashes = [page.paths[pieces.path[k]].dash for k in chosen]
    if any(not dash for dash in dashes):
        return float(cover.mean()) if cover.mean() < 1 else 1.0
    dash = dashes[0] if len(dashes[0]) % 2 == 0 else dashes[0] * 2
    return float(cover.mean() * sum(dash[::2]) / sum(dash))
