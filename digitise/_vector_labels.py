"""The page's own text about a chart, as `Labels`: ring levels, bearings, caption and legend told apart.

Text of a page is known letter by letter and to a hundredth of a px, so only its meaning is looked for:
bearings stand round the rim and agree on one zero and one turn; levels stand in a row from the centre out.
"""

import re

import numpy as np

from ._rim_vote import vote_rim
from ._vector_lines import looks_of
from .labels import Label, Labels

__all__ = ["ENGINE", "legend_names", "place_texts"]

ENGINE = "page text"
NUMBER = re.compile(r"([-+]?)(\d{1,3}(?:[.,]\d{1,2})?)\s*(\u00b0|deg|dB[id]?)?", re.IGNORECASE)
UNIT = re.compile(r"(?<![A-Za-z])dB([id]?)(?![A-Za-z])", re.IGNORECASE)
FAR_RHO, FAR_NUMBER_RHO = 1.75, 1.45
RIM_FROM_RHO = 0.97
PLAIN_ODDS = 0.8  # of a number without a degree sign to be a bearing
RIM_SPREAD = 0.15  # rho
LEAST_RIM = 3
RING_TO_RHO = 1.12
FAR_LEVEL_DB = 150.0  # of any level that a chart prints
ROW_RHO = 0.1  # how far a ring label may stand off its row
FAR_SHIFT, SAFE_SHIFT = 0.6, 0.34  # of the gap between rings, that labels may stand off theirs
RIVAL_SHARE = 0.05  # of that gap, by which another naming of the rings must fit worse
ANCHORS = [(0, 0), *((a, b) for a in (-1, 0, 1) for b in (-1, 0, 1) if a or b)]  # the middle first
LEGEND_EM = 4.0  # between a sample line and its name
SAMPLE_EM = 12.0  # the longest sample line


def place_texts(page, grid, names, *, others=()):
    """The `Labels` of a chart by its `Grid` on a `VectorPage` in picture px; `names` are its legend's.

    others : grids of the page's other charts; text that stands nearer to one of them is left to it
    """
    near = []
    for text in page.texts:
        rho, plane = (float(v) for v in grid.to_plane(text.x, text.y))
        if rho > 1 and any(other.to_plane(text.x, text.y)[0] < rho for other in others):
            continue
        value, unit = _number(text.text)
        if rho <= (FAR_RHO if value is None else FAR_NUMBER_RHO):
            if (
                value is not None
                and value > 0
                and unit != "deg"
                and text.text[0] != "+"
                and _minus_drawn(page, text)
            ):
                value = -value
            near.append((text, rho, plane, value, unit))
    rim = _rim(near)
    ring, safe = _row([k for k in range(len(near)) if k not in rim and _may_be_level(near[k])], near, grid)
    found = []
    for k, (text, rho, plane, value, unit) in enumerate(near):
        role = "rim" if k in rim else "ring" if k in ring else _other_role(text, rho, plane, value, names)
        found.append(
            Label(
                text=text.text,
                value=value,
                unit=unit,
                x_px=text.x,
                y_px=text.y,
                w_px=text.w,
                h_px=text.h,
                rho=rho,
                plane_deg=plane,
                confidence=1.0,
                role=role,
                angle_deg=text.angle_deg,
                readings=((value, 1.0),) if role in ("ring", "rim") else (),
                ring_rho=ring.get(k, float("nan")),
            )
        )
    return Labels(found=tuple(found), engine=ENGINE, ring_safe=safe)


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
                0.2 * em < width < 0.95 * em
                and height < 0.2 * em
                and abs((low[1] + high[1]) / 2 - text.y) < 0.3 * em
                and -0.1 * em < left - high[0] < 0.35 * em
            ):
                return True
    return False


def _rim(near):
    """Indices of the bearings round the rim: those that agree best on one zero and one turn."""
    chosen = [
        k
        for k, (_, rho, _, value, unit) in enumerate(near)
        if value is not None
        and unit in ("", "deg")
        and abs(value) <= 360
        and (rho >= RIM_FROM_RHO or unit == "deg")
    ]
    odds = [1.0 if near[k][4] == "deg" else PLAIN_ODDS for k in chosen]
    vote = vote_rim(
        [near[k][2] for k in chosen], [((near[k][3], own),) for k, own in zip(chosen, odds, strict=True)]
    )
    if vote is None or len({value % 360 for value in vote.values}) < LEAST_RIM:
        return set()
    best = [chosen[k] for k in vote.members]
    marked = [k for k in best if near[k][4] == "deg"]
    middle = float(np.median([near[k][1] for k in (marked if len(marked) >= LEAST_RIM else best)]))
    rim = {}
    for k in best:
        rho, plane, value = near[k][1:4]
        key = value % 360, round(plane / 20)
        off = abs(rho - middle)
        if off <= RIM_SPREAD and (key not in rim or off < abs(near[rim[key]][1] - middle)):
            rim[key] = k  # a ring level 0 may stand beside the bearing 0
    return set(rim.values())


def _may_be_level(item):
    _, rho, _, value, unit = item
    return value is not None and abs(value) <= FAR_LEVEL_DB and unit != "deg" and rho <= RING_TO_RHO


def _row(chosen, near, grid):
    """({index: radius of the ring that it names}, safe) of the levels in a row from the centre out.

    The same levels printed in other rows are named too.

    Labels are printed at one offset from their rings, by their middle, an end or a corner: the place that
    keeps the steadiest and smallest offset is taken. Safe is whether they stand clearly nearer to their rings
    than to the next, and no other offset names other rings about as well.
    """
    best = []
    for k in chosen:
        row = [j for j in chosen if _beside(near[j], near[k])]
        if len({near[j][3] for j in row}) > len({near[j][3] for j in best}):
            best = row
    if not best:
        return {}, True
    rings = np.append(grid.ring_rho, 0.0)  # the centre may have a label too
    gap = float(np.abs(np.diff(rings)).min())
    along = np.radians(
        np.median([(near[k][2] - near[best[0]][2] + 180) % 360 - 180 for k in best]) + near[best[0]][2]
    )
    values = [near[k][3] for k in best]
    fits = sorted(
        (
            fit
            for anchor in ANCHORS
            for fit in _fits(_reach(best, near, grid, along, anchor), values, rings, gap)
        ),
        key=lambda fit: fit[0],
    )
    cost, shift, nearest = fits[0]
    rival = next((fit[0] for fit in fits if not np.array_equal(fit[2], nearest)), np.inf)
    named = {j: float(rings[n]) for j, n in zip(best, nearest, strict=True)}
    ring_of = {near[j][3]: ring for j, ring in named.items()}
    for k in chosen:
        ring = ring_of.get(near[k][3])
        if ring is not None and abs(near[k][1] - ring) < gap:
            named.setdefault(k, ring)
    return named, bool(abs(shift) <= SAFE_SHIFT * gap and rival > 2 * cost + RIVAL_SHARE * gap)


def _beside(item, other):
    """Whether a label stands on the ray from the centre through another."""
    rho, turn = item[1], np.radians(item[2] - other[2])
    return rho * np.cos(turn) > -ROW_RHO and abs(rho * np.sin(turn)) <= ROW_RHO


def _reach(row, near, grid, along, anchor):
    """(n,) how far out the labels of a row stand, by a point of their boxes: (across, down) in half sizes."""
    reach = []
    for k in row:
        text = near[k][0]
        turn = np.radians(text.angle_deg)
        s, t = anchor[0] * text.w / 2, anchor[1] * text.h / 2
        rho, plane = grid.to_plane(
            text.x + s * np.cos(turn) - t * np.sin(turn), text.y + s * np.sin(turn) + t * np.cos(turn)
        )
        reach.append(float(rho * np.cos(np.radians(plane) - along)))
    return np.array(reach)


def _fits(reach, values, rings, gap):
    """[(cost, offset, indices of the rings)] of labels that all stand at one offset from their rings."""
    fits = []
    for shift in np.unique(np.round((reach[:, None] - rings[None]).ravel(), 4)):
        if abs(shift) > FAR_SHIFT * gap:
            continue
        off = np.abs(reach[:, None] - shift - rings[None])
        nearest = off.argmin(axis=1)
        doubles = len(set(zip(values, nearest.tolist(), strict=True))) - len(set(nearest.tolist()))
        fits.append((float(off.min(axis=1).mean() + 0.1 * abs(shift) + gap * doubles), float(shift), nearest))
    return fits or [(np.inf, 0.0, np.abs(reach[:, None] - rings[None]).argmin(axis=1))]


def _other_role(text, rho, plane, value, names):
    if text.text in names and value is None:
        return "legend"
    upright = abs(text.angle_deg) < 1
    above_or_below = abs(np.cos(np.radians(plane))) > 0.8
    if value is None and upright and above_or_below and rho > 1.0 and len(text.text) > 3:
        return "caption"
    return "other"
