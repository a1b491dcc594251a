"""Paint a page with Pillow: large and averaged down, or on whole pixels without anti-aliasing."""

from functools import lru_cache

import numpy as np
from PIL import Image, ImageDraw, ImageFont

from .fonts import font_file, rgb_of
from .spec import Text
from .strokes import Area, strokes_of

FINE = 6  # times larger, where the sheet stays below FINE_LIMIT
FINE_LIMIT = 5000  # px, longest side of the enlarged sheet


def paint_smooth(page):
    """Anti-aliased: drawn larger by a whole factor, then averaged over boxes."""
    factor = max(2, min(FINE, FINE_LIMIT // max(page.width, page.height)))
    return np.asarray(_paint(page, factor, smooth=True).reduce(factor))


def paint_plain(page):
    """Whole pixels, hard edges, letters without anti-aliasing."""
    return np.asarray(_paint(page, 1, smooth=False))


def _paint(page, factor, *, smooth):
    image = Image.new("RGB", (page.width * factor, page.height * factor), page.paper)
    pen = ImageDraw.Draw(image)
    pen.fontmode = "L" if smooth else "1"
    for op in strokes_of(page):
        if isinstance(op, Text):
            _write(image, pen, op, factor, smooth=smooth)
        elif isinstance(op, Area):
            _fill(image, op, factor)
            pen = ImageDraw.Draw(image)
            pen.fontmode = "L" if smooth else "1"
        else:
            points = (op.points + 0.5) * factor - 0.5
            if op.closed:
                points = np.vstack([points, points[:2]])  # two: the joint at the seam is drawn too
            width = 2 * round((op.width * factor - 1) / 2) + 1 if factor > 1 else max(1, round(op.width))
            xy = [(int(x), int(y)) for x, y in np.rint(points)]  # Pillow would cut, not round
            pen.line(xy, fill=op.colour, width=width, joint="curve" if width > 2 else None)
    return image


def _fill(image, op, factor):
    mask = Image.new("L", image.size, 0)
    points = np.rint((op.points + 0.5) * factor - 0.5)
    ImageDraw.Draw(mask).polygon([tuple(p) for p in points], fill=round(255 * op.opacity))
    image.paste(Image.new("RGB", image.size, op.colour), mask=mask)


@lru_cache(maxsize=64)
def _font(family, size):
    return ImageFont.truetype(font_file(family), size)


def _write(image, pen, op, factor, *, smooth):
    font = _font(op.family, max(4, round(op.size * factor)))
    x, y = (op.x + 0.5) * factor - 0.5, (op.y + 0.5) * factor - 0.5
    if not op.turn_deg:
        if op.box:
            left, top, right, bottom = pen.textbbox((x, y), op.text, font=font, anchor=op.anchor)
            pen.rectangle((left - 2 * factor, top - factor, right + 2 * factor, bottom + factor), fill=op.box)
        pen.text((x, y), op.text, fill=op.colour, font=font, anchor=op.anchor)
        return
    left, top, right, bottom = font.getbbox(op.text)
    size = (int(right - left + 4 * factor), int(bottom - top + 4 * factor))
    for colour, is_box in ((op.box, True), (op.colour, False)):
        if colour is None:
            continue
        mask = Image.new("L", size, 255 if is_box else 0)
        if not is_box:
            drawer = ImageDraw.Draw(mask)
            drawer.fontmode = "L" if smooth else "1"
            drawer.text((size[0] / 2, size[1] / 2), op.text, fill=255, font=font, anchor="mm")
        turned = mask.rotate(-op.turn_deg, resample=Image.BICUBIC if smooth else Image.NEAREST, expand=True)
        at = (round(x - turned.width / 2), round(y - turned.height / 2))
        image.paste(Image.new("RGB", turned.size, rgb_of(colour)), at, turned)
