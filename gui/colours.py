"""Colours for the overlay: traces as on the proof, and for the grid a calm one that stands off the rest."""

from dataclasses import dataclass

import numpy as np

from digitise._proof_colour import SIGHTS, distinct_colours, main_colours

__all__ = ["Palette", "overlay_colours", "rgb_of"]

CALM = ("#00877a", "#3569b8", "#8a4fb5", "#9a6b00", "#b4512a")
INK, INK_ON_DARK = "#18202a", "#eceef2"
CALM_ON_DARK = ("#5fd0c0", "#8db8f5", "#cfa6ee", "#e0b95a", "#f0a080")


@dataclass(frozen=True, kw_only=True)
class Palette:
    """Colours that stand off one chart, "#rrggbb": of grid, traces and words; and the chart's paper."""

    grid: str
    traces: tuple
    ink: str
    paper: str


def overlay_colours(rgb, n_traces):
    """The `Palette` for a chart's pixels, (h, w, 3) uint8."""
    present, paper = main_colours(rgb)
    traces = [_hex(colour) for colour in distinct_colours(present, paper, max(n_traces, 1))]
    calm = CALM if np.mean(paper) > 127 else CALM_ON_DARK
    taken = np.array([rgb_of(colour) for colour in traces], float)
    coloured = present[np.ptp(present, axis=1) > 40] if len(present) else present
    others = np.concatenate([taken, coloured.reshape(-1, 3)])
    apart = [min(_apart(rgb_of(colour), other) for other in others) for colour in calm]
    ink = INK if np.mean(paper) > 127 else INK_ON_DARK
    return Palette(
        grid=calm[int(np.argmax(apart))],
        traces=tuple(traces),
        ink=ink,
        paper=_hex(np.round(paper).astype(int)),
    )


def _apart(one, other):
    """Mean distance of two colours over kinds of sight; enough to rank five candidates."""
    difference = (np.asarray(one, float) / 255) ** 2.2 - (np.asarray(other, float) / 255) ** 2.2
    return float(np.mean([np.linalg.norm(sight @ difference) for sight in SIGHTS]))


def rgb_of(colour):
    """(r, g, b) of "#rrggbb"."""
    return tuple(int(colour[k : k + 2], 16) for k in (1, 3, 5))


def _hex(rgb):
    return "#{:02x}{:02x}{:02x}".format(*rgb)
