"""Bridge the gaps of a dashed or dotted line, so that the path over it is as cheap as over a solid one.

Along each of twelve directions, strokes that run that way are kept (an opening with a short line) and the gaps
between them closed (a closing with a longer line): Serra 1982, openings and closings by line segments. The opening
comes first so that two solid lines side by side are not joined across.
"""

import cv2
import numpy as np

__all__ = ["bridge_dashes"]

N_DIRECTIONS = 12
LEAST_PIECES = 10  # fewer separate pieces of ink are a solid line with interruptions
REDUCTION = 2  # the bridge only guides the path; half resolution is enough


def bridge_dashes(cover, rho, outer_px, level):
    """Coverage-like map, (h, w) float32, high on dashes and in the gaps between them; None when nothing is dashed.

    cover : (h, w) float32; rho : (h, w) radius, outermost ring 1; level : coverage on a line's crest
    """
    ink = ((cover > 0.45 * level) & (rho < 1.03)).astype(np.uint8)
    n, _, stats, _ = cv2.connectedComponentsWithStats(ink, connectivity=8)
    if n < 2:
        return None
    extent = np.maximum(stats[1:, cv2.CC_STAT_WIDTH], stats[1:, cv2.CC_STAT_HEIGHT])
    area = stats[1:, cv2.CC_STAT_AREA]
    dash = (area >= 3) & (extent < 0.25 * outer_px)
    if dash.sum() < LEAST_PIECES:
        return None
    # Typical stroke: the long side of the pieces, weighted by their ink, so that specks do not rule.
    length = _weighted_median(np.hypot(*stats[1:, 2:4].T)[dash], area[dash])
    width = float(np.median(area[dash] / np.maximum(extent[dash], 1)))
    small = cv2.resize(np.clip(cover / level, 0, 1), None, fx=1 / REDUCTION, fy=1 / REDUCTION, interpolation=cv2.INTER_AREA)
    small = (np.clip(small * 1.5, 0, 1) * 255).astype(np.uint8)
    dotted = length < 2.2 * width
    keep = 1 if dotted else max(3, round(0.6 * length / REDUCTION))
    reach = max(3, round((2.6 * width + 2 if dotted else 1.9 * length + width) / REDUCTION))
    out = np.zeros_like(small)
    for k in range(N_DIRECTIONS):
        angle = np.pi * k / N_DIRECTIONS
        strokes = small if dotted else cv2.morphologyEx(small, cv2.MORPH_OPEN, _line(keep, angle))
        np.maximum(out, cv2.morphologyEx(strokes, cv2.MORPH_CLOSE, _line(reach, angle)), out=out)
    bridged = cv2.resize(out, cover.shape[::-1], interpolation=cv2.INTER_LINEAR)
    return bridged.astype(np.float32) / 255


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
