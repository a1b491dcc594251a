"""Text on the proofs, in Pillow's own scalable font, so that nothing need be installed."""

import functools
import unicodedata

from PIL import ImageFont

__all__ = ["font", "printable", "shortened"]

ALSO_THERE = "\u00b0\u00b1"  # degree and plus-minus signs, which the font has besides ASCII


@functools.cache
def font(size):
    """The font at a size in px."""
    return ImageFont.load_default(size)


def printable(words):
    """Text in the letters that the font has; dashes and the minus sign become hyphens, others "?"."""
    return "".join(_letter(letter) for letter in words)


def _letter(letter):
    if letter in ALSO_THERE:
        return letter
    if unicodedata.category(letter) == "Pd" or letter == "\u2212":
        return "-"
    return unicodedata.normalize("NFKD", letter).encode("ascii", "ignore").decode() or "?"


def shortened(words, most):
    """Text cut to so many letters."""
    return words if len(words) <= most else words[: most - 3] + "..."
