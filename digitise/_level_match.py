"""Ring levels given in a list against rings found, when their numbers differ: which ring is which.

A faint ring may be missing from the grid, or an extra one in it. Under a law, the outermost level on the
outermost ring and any other level on any other ring fix the scale; the pairing that puts every ring on a
listed level is right, when it is the only one.
"""

import numpy as np

from ._laws import LOG_DB, fit_law
from ._marks import Anchors

__all__ = ["match_levels"]

ON_LEVEL_PX = 1.0
HUB_RHO = 0.12  # rings further in may be a hub or part of a spoke's crowd


def match_levels(grid, ring_levels, law=None):
    """`Anchors` of the rings that stand on listed levels under one law, or None when no pairing is clear.

    ring_levels : tuple of float, outermost first ; law : a law that radius follows, or None for any
    """
    levels = np.asarray(ring_levels, float)
    rings = np.flatnonzero(grid.ring_rho > HUB_RHO)
    found = {}
    for name in (law,) if law else ("even", *LOG_DB):
        for ring in rings[1:] if name == "even" else rings[:1]:
            for level in levels[1:] if name == "even" else levels[:1]:
                pairs = _pairs(grid, name, rings, levels, int(ring), float(level))
                if pairs is not None:
                    found[pairs] = found.get(pairs, name)
    if not found:
        return None
    most = max(len(pairs) for pairs in found)
    best = [pairs for pairs in found if len(pairs) == most]
    if len(best) > 1 or most < 2:
        return None
    return Anchors.of(grid, [ring for ring, _ in best[0]], [level for _, level in best[0]])


def _pairs(grid, law, rings, levels, ring, level):
    """((ring, level), ...) of every ring when all stand on listed levels, else None."""
    chosen = sorted({0, ring})
    anchors = Anchors.of(grid, chosen, [levels[0], level][: len(chosen)])
    if len(chosen) > 1 and level >= levels[0]:
        return None
    fit = fit_law(law, anchors.rho, anchors.rho_u, anchors.level_db)
    if law == "even":
        radii = 1 + (levels - fit.parameters[0]) / fit.parameters[1]
    else:
        radii = fit.parameters[1] * np.exp((levels - fit.parameters[0]) / LOG_DB[law])
    off_px = np.abs(grid.ring_rho[rings][:, None] - radii[None, :]) * grid.outer_px
    if (off_px.min(axis=1) > ON_LEVEL_PX).any():
        return None
    return tuple((int(k), float(levels[j])) for k, j in zip(rings, off_px.argmin(axis=1)))
