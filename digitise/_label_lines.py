"""Lines of text seen on a label sheet, read as text and as numbers, the right way up."""

from dataclasses import dataclass

import numpy as np

from ._label_blobs import CAP_SHARE, blob_lines
from ._label_number import plain_text
from ._label_sheet import Line

__all__ = ["Seen", "find_lines", "read_lines"]

SURE = 0.5  # odds of some number above which a line is not turned over to try again
SQUARE = 1.45  # length over height below which the way of reading is not known from the box
LEVEL_DEG = 8.0  # a detected turn below this is the box's wobble, not the text's
USUAL_CAP = 0.03  # height of a capital over the outer radius
LEVEL_RHO, BEARING_RHO = 1.25, 0.95  # levels are printed inside the first, bearings outside the second
NEAR_RHO = 1.12  # rotated labels stand inside the chart or just outside it


@dataclass(frozen=True, eq=False, kw_only=True)
class Seen:
    """A line as read: its box on the sheet, text with its mean odds, place in the plane; the numbers that it
    may be.

    levels, bearings : tuples of `NumberOdds`, best first; which of them is meant hangs on the place
    """

    line: Line
    text: str
    text_odds: float
    levels: tuple
    bearings: tuple
    rho: float
    plane_deg: float

    @property
    def number_odds(self):
        """Odds that the line is a number at all."""
        return min(1.0, max(sum(item.odds for item in kind) for kind in (self.levels, self.bearings)))

    @property
    def level_odds(self):
        """Odds that the line is a level."""
        return min(1.0, sum(item.odds for item in self.levels))


def find_lines(sheet, engine):
    """Detect and read every line of text on the sheet: a list of `Seen`."""
    boxes = engine.detect(np.repeat(sheet.clean[:, :, None], 3, axis=2))
    lines = [Line(x=x, y=y, length=w, height=h, turn_deg=_settled(w, h, turn)) for x, y, w, h, turn in boxes]
    lines = [line.turned(-line.turn_deg) if _is_square(line) else line for line in lines]
    seen = read_lines(sheet, engine, lines)
    seen += read_lines(
        sheet, engine, blob_lines(sheet, _cap_px(sheet, seen), taken=[s.line for s in seen if _done(s)])
    )
    again = [(k, turned) for k, item in enumerate(seen) for turned in _other_ways(item)]
    for (k, _), item in zip(again, read_lines(sheet, engine, [turned for _, turned in again])):
        if item.number_odds > max(0.3, seen[k].number_odds):
            seen[k] = item
    return seen


def _done(item):
    """Whether a detected line needs no second look: a number, or clearly words."""
    return item.number_odds > SURE or (item.text_odds > 0.8 and len(item.text) > 3)


def _cap_px(sheet, seen):
    """Height of a capital on the sheet, px, from the numbers detected; a usual share of the chart without
    any.
    """
    heights = [item.line.height for item in seen if item.number_odds > SURE]
    return CAP_SHARE * float(np.median(heights)) if heights else USUAL_CAP * sheet.grid.outer_px


def read_lines(sheet, engine, lines, *, cleaned=True):
    """Read given lines: a list of `Seen`."""
    if not lines:
        return []
    odds = engine.read([sheet.line_picture(line, cleaned=cleaned) for line in lines])
    rho, plane = sheet.grid.to_plane(
        np.array([line.x for line in lines]), np.array([line.y for line in lines])
    )
    seen = []
    for line, columns, r, angle in zip(lines, odds, rho, plane):
        text, text_odds = plain_text(columns, engine.characters)
        levels = tuple(engine.alphabet.numbers(columns, "level")) if r < LEVEL_RHO else ()
        bearings = tuple(engine.alphabet.numbers(columns, "bearing")) if r > BEARING_RHO else ()
        seen.append(
            Seen(
                line=line,
                text=text,
                text_odds=text_odds,
                levels=levels,
                bearings=bearings,
                rho=float(r),
                plane_deg=float(angle),
            )
        )
    return seen


def _settled(length, height, turn_deg):
    """The box's turn, level when it wobbles; short boxes wobble more."""
    wobble = LEVEL_DEG if length < 6 * height else 3.0
    return 0.0 if abs(turn_deg) < wobble else float(turn_deg)


def _is_square(line):
    return line.length < SQUARE * line.height


def _other_ways(item):
    """The line turned over, when it did not read as a number and may not be level."""
    if item.number_odds > SURE or item.rho > NEAR_RHO:
        return []
    ways = [item.line.turned(180)]
    if _is_square(item.line) or abs(abs(item.line.turn_deg) - 90) < LEVEL_DEG:
        ways += [item.line.turned(90), item.line.turned(-90)]
    return ways
