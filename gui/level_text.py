"""Levels as people type them."""

import math

from digitise.exceptions import UsageError

__all__ = ["read_level"]

ALSO_MINUS = str.maketrans({"\u2212": "-", "\u2013": "-", ",": "."})  # as copied text and other tongues write


def read_level(text):
    """The number that was typed, with or without a unit of level; raises `UsageError`."""
    plain = text.strip().translate(ALSO_MINUS).lower()
    for unit in ("dbi", "dbd", "db"):
        plain = plain.removesuffix(unit).strip()
    try:
        value = float(plain)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise UsageError(
            f"\u201c{text.strip()}\u201d is not a number" if text.strip() else "type a level in dB"
        )
    return value
