"""Colours for the overlay: traces as on the proof, and for the grid a calm one that stands off the rest."""

import numpy as np

from digitise._proof_colour import SIGHTS, distinct_colours, main_colours

__all__ = ["overlay_colours"]

CALM = ("#00877a", "#3569b8", "#8a4fb5", "#9a6b00", "#b4512a")
CALM_ON_DARK = ("#5fd0c0", "#8db8f5", "#cfa6ee", "#e0b95a", "#f0a080")


def overlay_colours(rgb, n_traces):
    """(grid colour, list of trace colours) as "#rrggbb" for a chart's pixels, (h, w, 3) uint8."""
    present, paper = main_colours(rgb)
    traces = [_hex(colour) for colour in distinct_colours(present, paper, max(n_traces, 1))]
    calm = CALM if np.mean(paper) > 127 else CALM_ON_DARK
    taken = np.array([_rgb(colour) for colour in traces], float)
    coloured = present[np.ptp(present, axis=1) > 40] if len(present) else present
    others = np.concatenate([taken, coloured.reshape(-1, 3)])
    apart = [min(_apart(_rgb(colour), other) for other in others) for colour in calm]
    return calm[int(np.argmax(apart))], traces


def _apart(one, other):
    """Mean distance of two colours over kinds of sight; enough to rank five candidates."""
    difference = (np.asarray(one, float) / 255) ** 2.2 - (np.asarray(other, float) / 255) ** 2.2
    return float(np.mean([np.linalg.norm(sight @ difference) for sight in SIGHTS]))


def _rgb(colour):
    return tuple(int(colour[k : k + 2], 16) for k in (1, 3, 5))


def _hex(rgb):
    return "#{:02x}{:02x}{:02x}".format(*rgb)
