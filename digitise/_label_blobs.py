"""Small print that the text detector overlooks: groups of ink of a letter's size on the cleaned sheet.

A detector made for lines of text misses a lone "-3". With grid lines and colours gone, what is left inside
the chart is traces, which are long, and letters; groups of letter-sized pieces are proposed as lines of text.
"""

import cv2
import numpy as np

from ._label_sheet import Line

__all__ = ["blob_lines"]

CAP_SHARE = 0.62  # height of a capital over that of a detected box
INK_SHARE = 0.45  # of the way from paper to the darkest ink that counts as ink
LEAST_CONTRAST = 45
TALL = (0.62, 1.5)  # height of a group over a capital's
PIECE = 2.0  # largest side of one piece, in capitals
SPECK = 0.22  # largest side of a piece that is dropped
JOIN = 0.34  # pieces this near, in capitals, are one group
PAD = 0.3  # paper left around a group
LONGEST = 7.5
MOST = 40
INSIDE_RHO = 1.1


def blob_lines(sheet, cap_px, *, taken=()):
    """Groups of letter-sized ink inside the chart as `Line`, at most MOST.

    cap_px : height of a capital on the sheet, px; taken : `Line` already read, whose ink is left out
    """
    ink = _ink(sheet.clean)
    for line in taken:
        box = cv2.boxPoints(((line.x, line.y), (line.length, line.height), line.turn_deg))
        cv2.fillPoly(ink, [np.rint(box).astype(np.int32)], 0)
    n, labels, stats, _ = cv2.connectedComponentsWithStats(ink, connectivity=8)
    side = stats[:, 2:4].max(axis=1)
    keep = (side > SPECK * cap_px) & (side < PIECE * cap_px)
    keep[0] = False
    pieces = keep[labels].astype(np.uint8)
    reach = max(1, round(JOIN * cap_px / 2))
    joined = cv2.dilate(pieces, cv2.getStructuringElement(cv2.MORPH_ELLIPSE, (2 * reach + 1, 2 * reach + 1)))
    n, groups = cv2.connectedComponents(joined, connectivity=8)
    ys, xs = np.nonzero(pieces)
    owner = groups[ys, xs]
    order = np.argsort(owner, kind="stable")
    bounds = np.searchsorted(owner[order], np.arange(1, n + 1))
    lines = []
    for start, stop in zip(bounds[:-1], bounds[1:]):
        mine = order[start:stop]
        line = _line_of(np.stack([xs[mine], ys[mine]], axis=1), cap_px)
        if line is not None and sheet.grid.to_plane(line.x, line.y)[0] < INSIDE_RHO:
            lines.append(line)
    lines.sort(key=lambda line: abs(np.log((line.height - 2 * PAD * cap_px) / cap_px)))
    return lines[:MOST]


def _ink(clean):
    paper, dark = np.percentile(clean, 60), np.percentile(clean, 0.5)
    return (clean < paper - max(LEAST_CONTRAST, INK_SHARE * (paper - dark))).astype(np.uint8)


def _line_of(points, cap_px):
    """The level or turned box around a group's pixels, or None when it is not of a letter's height."""
    if len(points) < 4:
        return None
    x, y, w, h = cv2.boundingRect(points.astype(np.int32))
    (cx, cy), (length, height), turn = cv2.minAreaRect(points.astype(np.float32))
    length, height = length + 1, height + 1
    if length < height:
        length, height, turn = height, length, turn + 90
    turn = (turn + 90) % 180 - 90
    if abs(turn) < 12 or length < 1.5 * height:  # level, or too short to tell
        cx, cy, length, height, turn = x + (w - 1) / 2, y + (h - 1) / 2, w, h, 0.0
    if not TALL[0] < height / cap_px < TALL[1] or length > LONGEST * cap_px:
        return None
    pad = 2 * PAD * cap_px
    return Line(
        x=float(cx), y=float(cy), length=float(length + pad), height=float(height + pad), turn_deg=float(turn)
    )
