"""Printed ring levels, units, bearings, captions and legends, read with an optional OCR engine.

The region of the chart is brought to a size that suits letters and its grid lines are filled in
(`_label_sheet`); lines of text are detected and read as text and as numbers (`_label_lines`); numbers outside
the rim vote for the bearing (`_rim_vote`); numbers inside propose rays on which the ring labels stand, and
there one crop a ring is read again (`_label_rings`). What the numbers mean together is left to the stages
scale and bearing.
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["Label", "Labels", "read_labels"]

RIM_FROM, RIM_TO = 0.99, 1.6  # rho between which a bearing is printed
RIM_ODDS = 0.2
RIM_LEAST = 3  # bearings that must agree before they are taken out of the search for ring labels
RIM_TURN_DEG = 60.0  # bearings are printed level or nearly so
KEPT_READINGS = 5
TEXT_ODDS = 0.4  # mean odds of the characters of a line that is worth keeping


@dataclass(frozen=True, kw_only=True)
class Label:
    """One piece of text on the picture.

    text : as read; value : its number or None; unit : "dB", "dBi", "dBd", "deg" or ""
    x_px, y_px, w_px, h_px : centre and size on the picture; angle_deg : its own turn
    rho, plane_deg : centre in the chart plane; confidence : 0 to 1
    role : "ring", "rim", "caption", "legend", "other"
    readings : ((value, odds), ...) best first, for ring and rim labels
    ring_rho, ring_rho_u : radius of the ring that a ring label names, NaN for others, and how far it may be
        off (0 for a ring that the grid holds)
    """

    text: str
    value: float | None
    unit: str
    x_px: float
    y_px: float
    w_px: float
    h_px: float
    rho: float
    plane_deg: float
    confidence: float
    role: str
    angle_deg: float = 0.0
    readings: tuple = ()
    ring_rho: float = float("nan")
    ring_rho_u: float = 0.0


@dataclass(frozen=True, kw_only=True)
class Labels:
    """All text found near one chart: tuple of `Label`; engine is the OCR engine's name, "" when none is
    installed.

    ring_safe : whether the ring labels stand at their rings, not midway between two
    """

    found: tuple = ()
    engine: str = ""
    ring_safe: bool = True

    def with_role(self, role):
        """The labels of one role."""
        return tuple(label for label in self.found if label.role == role)


def read_labels(picture, box, grid):
    """Read the text of one chart; an empty `Labels` when the extra is not installed.

    picture : Picture; box : Box of the chart; grid : Grid of the chart, in picture px
    """
    from ._ocr import engine_name, get_engine

    engine = get_engine()
    if engine is None:
        return Labels()
    from ._label_lines import find_lines
    from ._label_rings import read_ring_texts
    from ._label_sheet import cut_label_sheet

    sheet = cut_label_sheet(picture, box, grid)
    seen = find_lines(sheet, engine)
    rim = _rim_members(seen)
    texts, safe = read_ring_texts(sheet, engine, seen, rim=set(rim) if len(rim) >= RIM_LEAST else set())
    found = [_ring_label(sheet, text) for text in texts]
    used = {id(text.seen) for text in texts}
    for k, item in enumerate(seen):
        if (
            not item.text.strip()
            or id(item) in used
            or any(_overlap(item.line, text.seen.line) for text in texts)
        ):
            continue
        if k in rim or item.text_odds > TEXT_ODDS:
            found.append(_rim_label(sheet, item, rim[k]) if k in rim else _text_label(sheet, item))
    return Labels(found=tuple(found), engine=engine_name(), ring_safe=safe)


def bearing_options(item):
    """The bearings that a line may be: ((bearing, odds), ...)."""
    total = {}
    for number in item.bearings:
        if -180 <= number.value <= 360:
            total[number.value] = min(1.0, total.get(number.value, 0.0) + float(number.odds))
    return tuple(sorted(total.items(), key=lambda pair: -pair[1])[:KEPT_READINGS])


def _rim_members(seen):
    """{index of line: bearing it is read as} of the lines that agree on one zero and turn."""
    from ._rim_vote import vote_rim

    near = [
        k
        for k, item in enumerate(seen)
        if RIM_FROM < item.rho < RIM_TO
        and item.number_odds > RIM_ODDS
        and abs(item.line.turn_deg) < RIM_TURN_DEG
    ]
    vote = vote_rim([seen[k].plane_deg for k in near], [bearing_options(seen[k]) for k in near])
    return {near[k]: value for k, value in zip(vote.members, vote.values)} if vote else {}


def _overlap(line, other):
    """Whether two lines are the same print."""
    return np.hypot(line.x - other.x, line.y - other.y) < 0.5 * max(
        line.height, 0.6 * min(line.length, other.length)
    )


def _label(sheet, seen, **fields):
    x, y = sheet.to_picture(seen.line.x, seen.line.y)
    return Label(
        text=seen.text,
        x_px=float(x),
        y_px=float(y),
        w_px=seen.line.length / sheet.zoom,
        h_px=seen.line.height / sheet.zoom,
        angle_deg=seen.line.turn_deg,
        rho=seen.rho,
        plane_deg=seen.plane_deg,
        **fields,
    )


def _ring_label(sheet, text):
    best = text.numbers[0]
    return _label(
        sheet,
        text.seen,
        value=best.value,
        unit=best.unit,
        confidence=best.odds,
        role="ring",
        readings=tuple((number.value, number.odds) for number in text.numbers),
        ring_rho=text.rho,
        ring_rho_u=text.rho_u,
    )


def _rim_label(sheet, seen, bearing):
    options = bearing_options(seen)
    odds = dict(options).get(bearing, 0.0)
    unit = "deg" if any(number.unit == "deg" for number in seen.bearings[:1]) else ""
    return _label(
        sheet, seen, value=bearing, unit=unit, confidence=min(1.0, odds), role="rim", readings=options
    )


def _text_label(sheet, seen):
    from ._label_roles import role_of_text

    number = max((*seen.levels[:1], *seen.bearings[:1]), key=lambda item: item.odds, default=None)
    number = number if number is not None and number.odds > 0.5 else None
    return _label(
        sheet,
        seen,
        value=number.value if number else None,
        unit=number.unit if number else "",
        confidence=seen.text_odds,
        role=role_of_text(sheet, seen),
    )
