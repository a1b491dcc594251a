"""Paint a page with OpenCV's line drawing: sub-pixel ends by fixed-point shift, whole widths."""

from functools import lru_cache

import cv2
import numpy as np
from PIL import Image, ImageDraw, ImageFont

from .fonts import font_file, rgb_of
from .spec import Text
from .strokes import Area, strokes_of

SHIFT = 6  # fixed-point bits: ends placed to 1/64 px
FINE = 3


def paint(page):
    """Native anti-aliased lines of whole px widths."""
    return _paint(page, 1)


def paint_fine(page):
    """Draw the same three times larger and average over areas."""
    big = _paint(page, FINE)
    return cv2.resize(big, (page.width, page.height), interpolation=cv2.INTER_AREA)


def _paint(page, factor):
    sheet = np.empty((page.height * factor, page.width * factor, 3), np.uint8)
    sheet[:] = rgb_of(page.paper)
    for op in strokes_of(page):
        if isinstance(op, Text):
            _write(sheet, op, factor)
        elif isinstance(op, Area):
            over = sheet.copy()
            cv2.fillPoly(over, [_fixed(op.points, factor)], rgb_of(op.colour), cv2.LINE_AA, SHIFT)
            sheet[:] = (
                over if op.opacity >= 1 else cv2.addWeighted(over, op.opacity, sheet, 1 - op.opacity, 0)
            )
        else:
            width = max(1, round(op.width * factor))
            cv2.polylines(
                sheet, [_fixed(op.points, factor)], op.closed, rgb_of(op.colour), width, cv2.LINE_AA, SHIFT
            )
    return sheet


def _fixed(points, factor):
    return np.rint(((points + 0.5) * factor - 0.5) * 2**SHIFT).astype(np.int32).reshape(-1, 1, 2)


@lru_cache(maxsize=64)
def _font(family, size):
    return ImageFont.truetype(font_file(family), size)


def _write(sheet, op, factor):
    """Letters as a coverage mask, turned and blended in."""
    font = _font(op.family, max(4, round(op.size * factor)))
    left, top, right, bottom = font.getbbox(op.text, anchor="mm" if op.anchor == "mm" else "lm")
    half = int(np.ceil(max(abs(left), abs(right), abs(top), abs(bottom)))) + 3 * factor
    x, y = (op.x + 0.5) * factor - 0.5, (op.y + 0.5) * factor - 0.5
    x0, y0 = int(np.floor(x)), int(np.floor(y))
    mask = Image.new("L", (2 * half + 1, 2 * half + 1), 0)
    ImageDraw.Draw(mask).text((half + x - x0, half + y - y0), op.text, fill=255, font=font, anchor=op.anchor)
    layers = []
    if op.box:
        box = np.zeros((2 * half + 1, 2 * half + 1), np.uint8)
        pad = 2 * factor
        box[
            int(half + top - pad) : int(half + bottom + pad) + 1,
            int(half + left - pad) : int(half + right + pad) + 1,
        ] = 255
        layers.append((box, op.box))
    layers.append((np.asarray(mask), op.colour))
    about = cv2.getRotationMatrix2D((half, half), -op.turn_deg, 1.0)
    for cover, colour in layers:
        turned = (
            cv2.warpAffine(cover, about, cover.shape[::-1], flags=cv2.INTER_LINEAR) if op.turn_deg else cover
        )
        _blend(sheet, turned, x0 - half, y0 - half, rgb_of(colour))


def _blend(sheet, cover, x0, y0, colour):
    h, w = cover.shape
    top, left = max(0, -y0), max(0, -x0)
    bottom, right = min(h, sheet.shape[0] - y0), min(w, sheet.shape[1] - x0)
    if bottom <= top or right <= left:
        return
    part = sheet[y0 + top : y0 + bottom, x0 + left : x0 + right]
    share = cover[top:bottom, left:right, None] / 255.0
    part[:] = np.rint(part * (1 - share) + np.array(colour) * share).astype(np.uint8)
