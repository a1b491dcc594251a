"""A white sheet with text, panels and legends, for pictures of comparisons and whole-sphere patterns."""

import textwrap

import numpy as np
from PIL import Image, ImageDraw

from ._proof_page import DIM, MARGIN_PX, PAPER, RULE, TEXT, WIDTH_PX
from ._proof_text import font, printable

__all__ = ["DIM", "MARGIN_PX", "PAPER", "RULE", "TEXT", "WIDTH_PX", "SheetPage", "nice_step"]

LONGEST_PX = 6000


class SheetPage:
    """Laid out from the top down; `y` is where the next thing goes."""

    def __init__(self):
        self.image = Image.new("RGB", (WIDTH_PX, LONGEST_PX), PAPER)
        self.draw = ImageDraw.Draw(self.image)
        self.y = MARGIN_PX

    def text(self, x, y, words, *, size=16, fill=TEXT, anchor="la", halo_px=0):
        """Put one line at a place, with a halo of paper where it may lie on a line."""
        self.draw.text(
            (x, y),
            printable(words),
            font=font(size),
            fill=fill,
            anchor=anchor,
            stroke_width=halo_px,
            stroke_fill=PAPER,
        )

    def lines(self, words, *, size=16, fill=TEXT, left=MARGIN_PX):
        """Text wrapped to the sheet's width; the sheet grows downward."""
        for line in textwrap.wrap(words, int((WIDTH_PX - left - MARGIN_PX) / (0.5 * size))) or [""]:
            self.text(left, self.y, line, size=size, fill=fill)
            self.y += round(1.4 * size)

    def panel(self, x, y, array):
        """Put a panel, (height, width, 3) uint8, on the sheet."""
        self.image.paste(Image.fromarray(array), (x, y))
        self.draw.rectangle((x - 1, y - 1, x + array.shape[1], y + array.shape[0]), outline=RULE)

    def finish(self):
        """The sheet, cut to what was laid on it."""
        return self.image.crop((0, 0, WIDTH_PX, min(self.y + MARGIN_PX // 2, LONGEST_PX)))


def nice_step(span, at_most):
    """The smallest of 1, 2, 5, 10, 20 ... (and tenths) that divides a span into so many steps or fewer."""
    for power in range(-3, 6):
        for digit in (1, 2, 5):
            step = digit * 10.0**power
            if span / step <= at_most:
                return step
    return float(np.ceil(span))
