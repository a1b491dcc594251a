"""The page's own text about a chart, as `Labels`: which numbers are ring levels, which are bearings, what is legend.

Text of a page is known letter by letter and to a hundredth of a px, so only its meaning is looked for: bearings stand
round the rim and agree on one zero and one turn; levels stand in a row from the centre out.
"""

import re

import numpy as np

from ._vector_lines import looks_of
from .labels import Label, Labels

__all__ = ["ENGINE", "legend_names", "place_texts"]

ENGINE = "page text"
NUMBER = re.compile(r"([-+]?)(\d{1,3}(?:[.,]\d{1,2})?)\s*(\u00b0|deg|dB[id]?)?", re.IGNORECASE)
UNIT = re.compile(r"(?<![A-Za-z])dB([id]?)(?![A-Za-z])", re.IGNORECASE)
FAR_RHO, FAR_NUMBER_RHO = 1.75, 1.45
RIM_FROM_RHO = 0.97
RIM_DEG = 7.0  # how far a rim label's middle may stand off its bearing
RIM_SPREAD = 0.15  # rho
LEAST_RIM = 3
RING_TO_RHO = 1.12
ROW_RHO = 0.1  # how far a ring label may stand off its row
LEGEND_EM = 4.0  # between a sample line and its name
SAMPLE_EM = 12.0  # the longest sample line


def place_texts(page, grid, names):
    """The `Labels` of the chart with this `Grid` on a `VectorPage` in picture px; `names` are its legend's."""
    near = []
    for text in page.texts:
        rho, plane = (float(v) for v in grid.to_plane(text.x, text.y))
        value, unit = _number(text.text)
        if rho <= (FAR_RHO if value is None else FAR_NUMBER_RHO):
            if value is not None and value > 0 and unit != "deg" and text.text[0] != "+" and _minus_drawn(page, text):
                value = -value
            near.append((text, rho, plane, value, unit))
    rim = _rim(near)
    ring = _row([k for k in range(len(near)) if k not in rim and _may_be_level(near[k])], near)
    found = []
    for k, (text, rho, plane, value, unit) in enumerate(near):
        role = "rim" if k in rim else "ring" if k in ring else _other_role(text, rho, plane, value, names)
        found.append(
            Label(
                text=text.text, value=value, unit=unit, x_px=text.x, y_px=text.y, w_px=text.w, h_px=text.h, rho=rho,
                plane_deg=plane, confidence=1.0, role=role, angle_deg=text.angle_deg,
            )
        )  # fmt: skip
    return Labels(found=tuple(found), engine=ENGINE)


def legend_names(page, looks):
    """The legend's name of every `Look`, "" where none stands beside a sample of it."""
    samples = {}
    for path in page.paths:
        for look in looks_of(path):
            if look in looks:
                samples.setdefault(look, []).extend((run.min(axis=0), run.max(axis=0)) for run in path.runs)
    return [_name(page, samples.get(look, ())) for look in looks]


def _name(page, samples):
    best, least = "", np.inf
    for low, high in samples:
        width, height = high - low
        middle = (low[1] + high[1]) / 2
        for text in page.texts:
            em = text.size
            if not 0 < max(width, height) <= SAMPLE_EM * em or height > 1.5 * em or abs(text.angle_deg) > 1:
                continue
            gap = max(text.x - text.w / 2 - high[0], low[0] - text.x - text.w / 2)
            if abs(text.y - middle) > 0.8 * em or not -0.1 * em < gap < min(LEGEND_EM * em, least):
                continue
            if _number(text.text)[0] is None:
                best, least = text.text, gap
    return best


def _number(text):
    """(value, unit) of a text that is a number, with or without a unit; (None, unit) of any other."""
    match = NUMBER.fullmatch(text.strip())
    if match is None:
        unit = UNIT.search(text)
        return None, f"dB{unit[1].lower()}" if unit else ""
    sign, digits, unit = match.groups()
    value = float(digits.replace(",", "."))
    if unit is None:
        unit = ""
    else:
        unit = f"dB{unit[2:].lower()}" if unit.lower().startswith("db") else "deg"
    return (-value if sign == "-" and value else value), unit


def _minus_drawn(page, text):
    """Whether a minus sign stands before a number as a drawn bar, as some programs set it."""
    if abs(text.angle_deg) > 1:
        return False
    em, left = text.size, text.x - text.w / 2
    for path in page.paths:
        for run in path.runs:
            if len(run) > 12:
                continue
            low, high = run.min(axis=0), run.max(axis=0)
            width, height = high - low
            if (
                0.2 * em < width < 0.95 * em and height < 0.2 * em
                and abs((low[1] + high[1]) / 2 - text.y) < 0.3 * em and -0.1 * em < left - high[0] < 0.35 * em
            ):  # fmt: skip
                return True
    return False


def _rim(near):
    """Indices of the bearings round the rim: those that agree best on one zero and one turn."""
    chosen = [k for k, (_, rho, _, value, unit) in enumerate(near)
              if value is not None and unit in ("", "deg") and abs(value) <= 360 and (rho >= RIM_FROM_RHO or unit == "deg")]  # fmt: skip
    if len(chosen) < LEAST_RIM:
        return set()
    plane = np.array([near[k][2] for k in chosen])
    value = np.array([near[k][3] for k in chosen])
    marked = np.array([near[k][4] == "deg" for k in chosen])
    best = np.zeros(len(chosen), bool)
    for sign in (1, -1):
        zero = plane - sign * value
        for candidate in zero:
            agree = np.abs((zero - candidate + 180) % 360 - 180) <= RIM_DEG
            if (agree.sum(), (agree & marked).sum()) > (best.sum(), (best & marked).sum()):
                best = agree
    rho = np.array([near[k][1] for k in chosen])
    if len({round(v) % 360 for v in value[best]}) < LEAST_RIM:
        return set()
    middle = np.median(rho[best & marked] if (best & marked).any() else rho[best])
    best &= np.abs(rho - middle) <= RIM_SPREAD
    rim = {}
    for k in np.flatnonzero(best):
        key = value[k] % 360, round(plane[k] / 20)
        if key not in rim or abs(rho[k] - middle) < abs(rho[rim[key]] - middle):
            rim[key] = k  # a ring level 0 may stand beside the bearing 0
    return {chosen[k] for k in rim.values()}


def _may_be_level(item):
    _, rho, _, value, unit = item
    return value is not None and unit != "deg" and rho <= RING_TO_RHO


def _row(chosen, near):
    """The members of the longest row of levels from the centre out, and of other rows with the same levels."""
    best = []
    for k in chosen:
        angle = np.radians(near[k][2])
        row = []
        for j in chosen:
            rho, turn = near[j][1], np.radians(near[j][2]) - angle
            if rho * np.cos(turn) > -ROW_RHO and abs(rho * np.sin(turn)) <= ROW_RHO:
                row.append(j)
        if len({near[j][3] for j in row}) > len({near[j][3] for j in best}):
            best = row
    levels = {(near[j][3], round(near[j][1], 1)) for j in best}
    return set(best) | {k for k in chosen if (near[k][3], round(near[k][1], 1)) in levels}


def _other_role(text, rho, plane, value, names):
    if text.text in names and value is None:
        return "legend"
    upright = abs(text.angle_deg) < 1
    above_or_below = abs(np.cos(np.radians(plane))) > 0.8
    if value is None and upright and above_or_below and rho > 1.0 and len(text.text) > 3:
        return "caption"
    return "other"
