"""What a line of text that is no number is for: a caption above or below the chart, a legend entry, or other
print.

A legend entry has a sample of its trace beside it: a short level run of ink, thin against the letters, left
of the text (or right of it). A caption stands above or below the rim, within the chart's width.
"""

import numpy as np

__all__ = ["role_of_text"]

SAMPLE_REACH = 8.0  # heights that a sample may extend from its text
SAMPLE_LEAST = 1.3  # heights that it is long at least, gaps of dashes included
SAMPLE_INK = 0.35  # share of its columns that are inked
SAMPLE_THICK = 0.62  # of a height; letters are thicker
INK_LEVEL = 36  # grey levels off the paper
CAPTION_WIDE = 1.1  # outer radii from the centre line


def role_of_text(sheet, seen):
    """Return "legend", "caption" or "other" for a `Seen` that is neither a ring nor a rim label."""
    line, grid = seen.line, sheet.grid
    letters = sum(character.isalpha() and character.isascii() for character in seen.text)
    if letters < 2 or sum(character.isalnum() for character in seen.text) < 3 or seen.number_odds > 0.3:
        return "other"
    if _has_sample(sheet.plain, line, -1) or _has_sample(sheet.plain, line, 1):
        return "legend"
    inside = seen.rho < 1.0
    level = abs(line.turn_deg) < 20
    off_x, off_y = abs(line.x - grid.centre_x) / grid.outer_px, abs(line.y - grid.centre_y) / grid.outer_px
    if level and not inside and off_y > 0.9 and off_x < CAPTION_WIDE:
        return "caption"
    return "other"


def _has_sample(gray, line, side):
    """Whether a trace's sample stands on one side (-1 left, 1 right) of a level line of text."""
    if abs(line.turn_deg) > 10:
        return False
    h = line.height
    edge = line.x + side * 0.5 * line.length
    x0, x1 = sorted((edge, edge + side * SAMPLE_REACH * h))
    x0, x1 = max(0, int(x0)), min(gray.shape[1], int(x1) + 1)
    y0, y1 = max(0, int(line.y - 0.5 * h)), min(gray.shape[0], int(line.y + 0.5 * h) + 1)
    if x1 - x0 < SAMPLE_LEAST * h or y1 - y0 < 4:
        return False
    patch = gray[y0:y1, x0:x1].astype(np.int16)
    ink = np.abs(patch - np.percentile(patch, 75)) > INK_LEVEL
    thick = ink.sum(axis=0)
    rows = np.arange(ink.shape[0])[:, None]
    middle = np.where(thick > 0, (ink * rows).sum(axis=0) / np.maximum(thick, 1), np.nan)
    good = (thick > 0) & (thick < SAMPLE_THICK * h)
    if not good.any():
        return False
    usual = np.nanmedian(np.where(good, middle, np.nan))
    good &= np.abs(middle - usual) < 0.12 * h + 0.5
    columns = np.flatnonzero(good)
    if len(columns) < 2:
        return False
    span = columns[-1] - columns[0] + 1
    clear = not (thick[columns[0] : columns[-1] + 1] >= SAMPLE_THICK * h).any()
    level = np.std(middle[columns]) < 0.1 * h + 0.5
    return bool(span >= SAMPLE_LEAST * h and len(columns) >= SAMPLE_INK * span and clear and level)
