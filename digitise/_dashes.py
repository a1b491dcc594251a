"""Dashes, and specks of text: the loose pieces of an ink, and the bridge over the gaps between dashes.

A solid line that the removed grid cuts up ends at hidden places; a dash or a glyph ends on paper. Loose pieces of one
size all round the chart are dashes, the others are specks. Along each of twelve directions, strokes that run that way
are kept (an opening with a short line) and the gaps between them closed (a closing with a longer line; Serra 1982,
openings and closings by line segments). The opening comes first so that two lines side by side are not joined across.
"""

from dataclasses import dataclass

import cv2
import numpy as np

__all__ = ["Pieces", "bridge_dashes", "find_pieces"]

N_DIRECTIONS = 12
LEAST_PIECES = 8  # fewer loose pieces of one size are text
LEAST_SECTORS = {True: 5, False: 2}  # of 36, of a text-like ink or not: text stands on one ray, a trace goes round
SPECK_EXTENT = 0.16  # of the outer radius: a larger loose piece is a trace
DOTTED = 3.0  # diagonal over mean width below which a piece is a dot (a round dot has 2.6, a dash of 3:1 has 3.3)
DOT_PITCHES = 1.8  # dots further apart than this many of their usual distances are not neighbours
MOST_DOTS = 2000
THIN_PX = 2.6  # dashes at least this wide are bridged at half resolution: the bridge only guides the path


@dataclass(frozen=True, eq=False, kw_only=True)
class Pieces:
    """Loose pieces of an ink.

    dash, speck : (h, w) bool masks; dashed : whether there are enough dashes to make a trace
    length_px, width_px : of the typical dash, NaN when not dashed
    middles : (n, 2) x, y of the dashes, px
    """

    dash: np.ndarray
    speck: np.ndarray
    dashed: bool
    length_px: float
    width_px: float
    middles: np.ndarray

    @property
    def style(self):
        """"solid", "dashed" or "dotted"."""
        if not self.dashed:
            return "solid"
        return "dotted" if self.length_px < DOTTED * self.width_px else "dashed"


def find_pieces(cover, hidden, sheet, level, *, text_like):
    """Sort the loose pieces of ink on a coverage map.

    cover, hidden : (h, w) float32; sheet : _sheet.Sheet; level : coverage on a line's crest
    text_like : the ink may also print labels (black or grey)
    """
    ink = ((cover > 0.45 * level) & (sheet.rho < 1.03)).astype(np.uint8)
    n, piece, stats, middle = cv2.connectedComponentsWithStats(ink, connectivity=8)
    contacts = _contacts(ink, piece, n, hidden)
    extent = np.hypot(stats[:, cv2.CC_STAT_WIDTH], stats[:, cv2.CC_STAT_HEIGHT])
    area = stats[:, cv2.CC_STAT_AREA].astype(float)
    # A dash across a grid line is left as two parts, each with one end on paper; a line between two grid lines has none.
    loose = (contacts < 2) & (extent < 0.3 * sheet.outer_px)
    loose[0] = False
    whole = loose & (contacts == 0)
    alike, length, width = _alike(whole & (area >= 3), extent, area, middle, sheet, text_like)
    dash = loose & (extent < 1.6 * length) & (alike | (contacts == 1)) if alike.any() else alike
    speck = whole & ~dash & (extent < SPECK_EXTENT * sheet.outer_px) & text_like
    return Pieces(dash=dash[piece], speck=speck[piece], dashed=bool(dash.any()), length_px=length, width_px=width, middles=middle[dash])


def _contacts(ink, piece, n, hidden):
    """At how many separate places each piece of ink touches a hidden place."""
    beside = cv2.dilate((hidden > 0.3).astype(np.uint8), np.ones((3, 3), np.uint8))
    touch = ink & beside
    n_places, place = cv2.connectedComponents(touch, connectivity=8)
    pairs = np.unique(piece[touch > 0].astype(np.int64) * n_places + place[touch > 0])
    return np.bincount(pairs // n_places, minlength=n)


def _alike(loose, extent, area, middle, sheet, text_like):
    """Which loose pieces are dashes: of one size and all round the chart; with their length and width."""
    none = np.zeros(len(loose), bool)
    if loose.sum() < LEAST_PIECES:
        return none, np.nan, np.nan
    length = _weighted_median(extent[loose], area[loose])
    alike = loose & (extent > 0.6 * length) & (extent < 1.6 * length)
    u, v = sheet.to_plane(middle[alike, 0], middle[alike, 1])
    sectors = np.unique((np.degrees(np.arctan2(u, -v)) // 10)[np.hypot(u, v) > 0.15])
    if alike.sum() < LEAST_PIECES or sectors.size < LEAST_SECTORS[text_like]:
        return none, np.nan, np.nan
    return alike, length, float(np.median(area[alike] / np.maximum(extent[alike], 1)))


def bridge_dashes(cover, pieces, level):
    """Coverage-like map, (h, w) float32, high on dashes and in the gaps between them."""
    length, width = pieces.length_px, pieces.width_px
    if pieces.style == "dotted":
        return _joined_dots(cover.shape, pieces)
    reduction = 1 if width < THIN_PX else 2
    small = np.clip(cover / level, 0, 1)
    if reduction > 1:
        small = cv2.resize(small, None, fx=1 / reduction, fy=1 / reduction, interpolation=cv2.INTER_AREA)
    small = (np.clip(small * 1.5, 0, 1) * 255).astype(np.uint8)
    if width < THIN_PX:
        # A line of a pixel or two steps off any straight element: give the element room.
        small = cv2.dilate(small, np.ones((3, 3), np.uint8))
    keep = max(3, round(max(0.6 * length, min(1.7 * width, 0.85 * length)) / reduction))
    reach = max(3, round((1.25 * length + width) / reduction))
    out = np.zeros_like(small)
    for k in range(N_DIRECTIONS):
        angle = np.pi * k / N_DIRECTIONS
        strokes = cv2.morphologyEx(small, cv2.MORPH_OPEN, _line(keep, angle))
        np.maximum(out, cv2.morphologyEx(strokes, cv2.MORPH_CLOSE, _line(reach, angle)), out=out)
    bridged = cv2.resize(out, cover.shape[::-1], interpolation=cv2.INTER_LINEAR)
    return bridged.astype(np.float32) / 255


def _joined_dots(shape, pieces):
    """Lines between dots that are next to each other: a dot has no direction of its own to close along."""
    dots = pieces.middles[:MOST_DOTS].astype(np.float32)
    distance = np.hypot(dots[:, None, 0] - dots[None, :, 0], dots[:, None, 1] - dots[None, :, 1])
    np.fill_diagonal(distance, np.inf)
    first = distance.argmin(axis=1)
    pitch = np.median(distance[np.arange(len(dots)), first])
    # The other neighbour lies on the other side: two lobes side by side must not be laced together.
    towards = dots[first] - dots
    opposite = (dots[None, :, :] - dots[:, None, :]) @ towards[:, :, None]
    other = np.where(opposite[:, :, 0] < 0, distance, np.inf)
    second = other.argmin(axis=1)
    out = np.zeros(shape, np.uint8)
    for i in range(len(dots)):
        for j, away in ((first[i], distance[i, first[i]]), (second[i], other[i, second[i]])):
            if away < DOT_PITCHES * pitch:
                a, b = (tuple(np.round(dots[k] * 16).astype(int).tolist()) for k in (i, j))
                cv2.line(out, a, b, 255, max(1, round(pieces.width_px)), cv2.LINE_AA, 4)
    return out.astype(np.float32) / 255


def _weighted_median(values, weights):
    order = np.argsort(values)
    total = np.cumsum(weights[order])
    return float(values[order][np.searchsorted(total, total[-1] / 2)])


def _line(length, angle):
    """A line-shaped structuring element, odd-sized."""
    half = max(1, length // 2)
    element = np.zeros((2 * half + 1, 2 * half + 1), np.uint8)
    dx, dy = round(half * np.cos(angle)), round(half * np.sin(angle))
    cv2.line(element, (half - dx, half - dy), (half + dx, half + dy), 1)
    return element
