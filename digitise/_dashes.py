"""Bridge the gaps of a dashed or dotted line, so that the path over it is as cheap as over a solid one.

Along each of twelve directions, strokes that run that way are kept (an opening with a short line) and the gaps
between them closed (a closing with a longer line): Serra 1982, openings and closings by line segments. The opening
comes first so that two solid lines side by side are not joined across.
"""

import cv2
import numpy as np

__all__ = ["bridge_dashes"]

N_DIRECTIONS = 12
LEAST_PIECES = 8  # fewer separate pieces of ink are a solid line with interruptions, or text
LEAST_SECTORS = 5  # of 36: text stands on one ray, a dashed trace goes round
REDUCTION = 2  # the bridge only guides the path; half resolution is enough


def bridge_dashes(cover, hidden, sheet, level):
    """Coverage-like map, (h, w) float32, high on dashes and in the gaps between them; None when nothing is dashed.

    cover, hidden : (h, w) float32; sheet : _sheet.Sheet; level : coverage on a line's crest
    """
    pieces = _free_pieces(cover, hidden, sheet, level)
    if pieces is None:
        return None
    length, width = pieces
    small = cv2.resize(np.clip(cover / level, 0, 1), None, fx=1 / REDUCTION, fy=1 / REDUCTION, interpolation=cv2.INTER_AREA)
    small = (np.clip(small * 1.5, 0, 1) * 255).astype(np.uint8)
    dotted = length < 2.0 * width
    keep = max(3, round(max(0.6 * length, min(1.7 * width, 0.85 * length)) / REDUCTION))
    reach = max(3, round((2.6 * width + 2 if dotted else 1.25 * length + width) / REDUCTION))
    out = np.zeros_like(small)
    for k in range(N_DIRECTIONS):
        angle = np.pi * k / N_DIRECTIONS
        strokes = small if dotted else cv2.morphologyEx(small, cv2.MORPH_OPEN, _line(keep, angle))
        np.maximum(out, cv2.morphologyEx(strokes, cv2.MORPH_CLOSE, _line(reach, angle)), out=out)
    bridged = cv2.resize(out, cover.shape[::-1], interpolation=cv2.INTER_LINEAR)
    return bridged.astype(np.float32) / 255


def _free_pieces(cover, hidden, sheet, level):
    """Length and width of the dashes: pieces of ink of one size that touch no hidden place; None without them.

    A solid line cut up by the removed grid ends at hidden places; a dash ends on paper.
    """
    ink = ((cover > 0.45 * level) & (sheet.rho < 1.03)).astype(np.uint8)
    n, piece, stats, middle = cv2.connectedComponentsWithStats(ink, connectivity=8)
    if n < 1 + LEAST_PIECES:
        return None
    touching = cv2.dilate((hidden > 0.3).astype(np.uint8), np.ones((3, 3), np.uint8)) > 0
    touched = np.bincount(piece[touching], minlength=n)[1:] > 0
    extent = np.hypot(stats[1:, cv2.CC_STAT_WIDTH], stats[1:, cv2.CC_STAT_HEIGHT])
    area = stats[1:, cv2.CC_STAT_AREA].astype(float)
    free = ~touched & (area >= 3) & (extent < 0.3 * sheet.outer_px)
    if free.sum() < LEAST_PIECES:
        return None
    length = _weighted_median(extent[free], area[free])
    alike = free & (extent > 0.6 * length) & (extent < 1.6 * length)
    x, y = middle[1:, 0][alike], middle[1:, 1][alike]
    u, v = sheet.to_plane(x, y)
    sectors = np.unique((np.degrees(np.arctan2(u, -v)) // 10)[np.hypot(u, v) > 0.15])
    if alike.sum() < LEAST_PIECES or sectors.size < LEAST_SECTORS:
        return None
    return length, float(np.median(area[alike] / np.maximum(extent[alike], 1)))


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
