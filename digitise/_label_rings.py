"""Read the label of every ring: the lines detected on a ray, and looks where the others must be.

Each row of labels that the detected numbers propose is read again ring by ring, with the grid lines filled
and with them left in; where neighbouring labels stand in one line of text, the row is read whole. The row
whose numbers fit a scale best is taken.
"""

from dataclasses import dataclass, replace

import numpy as np

from ._label_lines import Seen, read_lines
from ._label_number import NumberOdds
from ._label_ray import SAFE_SHIFT, find_rays
from ._label_strip import in_line, strip_numbers
from ._level_vote import LevelReading, vote_levels

__all__ = ["RingText", "read_ring_texts"]

OFF_RING = 0.36  # of the gap to the next ring, that a label may lie off the ring it names
OFF_ROW = 1.0  # heights
LONE_ODDS, LONE_OFF = (
    0.6,
    0.5,
)  # of a label that stands at no known ring: odds at least, heights off its place at most
CROP_PAD = 0.4  # heights of paper left at the end of a crop
MINUS_PAD = 0.65  # and before its beginning
CROP_TALL = 0.95  # height of a crop over a detected line's
MIN_RHO = 0.03
MAX_RINGS = 24
FEW_RINGS, SAME_TURN_DEG = 5, 6.0  # rings looked at for the turn of the letters; turns closer are one
READ_WELL = 0.75  # mean odds of the crops of a row that is the right way up
LONG_OVER_TALL = 2.0  # length of a short label over its height
SURE_SUPPORT, SURE_MARGIN = 3, 3.0  # of a vote that ends the search
WEIGHTS = {"detected": 2.0, "filled": 1.2, "plain": 0.4, "strip": 1.5}  # of the looks at one label


BLIND = 0.25  # weight of a look that sees no number at all
STROKES, NOISE = (
    (1.0, 7.0, 11.0),
    0.6,
)  # numbers that a passing line looks like, and what a crop's word on them counts


@dataclass(frozen=True, eq=False, kw_only=True)
class RingText:
    """What stands at one ring: its index (None beside no ring that was found), its radius and how far that
    may be off.

    seen : the best look; numbers : `NumberOdds` over all looks, best first
    """

    ring: int | None
    rho: float
    rho_u: float
    seen: Seen
    numbers: tuple


def read_ring_texts(sheet, engine, seen, *, rim=()):
    """Ring labels of the likeliest row: tuple of `RingText` (one a ring at most), and whether their place is
    safe.
    """
    rings = [k for k, rho in enumerate(sheet.grid.ring_rho[:MAX_RINGS]) if rho > MIN_RHO]
    best, best_worth, safe = (), 0.0, True
    for ray in find_rays(sheet.grid, seen, rim=rim) if rings else ():
        for texts, placed in _read_row(sheet, engine, seen, ray, rings, rim):
            worth, sure = _worth(sheet.grid, texts)
            worth -= 0.3 * (not placed)
            if worth > best_worth:
                best, best_worth, safe = texts, worth, placed
            if sure and placed:
                return texts, placed
    return best, safe


def _read_row(sheet, engine, seen, ray, rings, rim):
    """Yield what a row says, each as texts and whether the labels' place is safe."""
    grid = sheet.grid
    ray = _right_way_up(sheet, engine, ray, rings)
    found, lone = _detected(grid, ray, seen, rings, rim)
    lines = [_crop_line(grid, ray, ring, found.get(ring)) for ring in rings]
    filled, plain = (read_lines(sheet, engine, lines, cleaned=cleaned) for cleaned in (True, False))
    crops = {ring: {"filled": a, "plain": b} for ring, a, b in zip(rings, filled, plain)}
    for ring, item in found.items():
        crops[ring]["detected"] = item
    yield _texts(grid, crops) + lone, ray.safe
    if in_line(grid, ray, rings):
        for shift, numbers in strip_numbers(sheet, engine, ray, rings):
            moved = replace(ray, shift=ray.shift + shift)
            gap = float(np.median(np.abs(np.diff(grid.ring_rho[rings]))))
            strips = {
                ring: {
                    "strip": replace(
                        crops[ring]["filled"], line=moved.line_at(grid, grid.ring_rho[ring]), levels=mine
                    )
                }
                for ring, mine in numbers.items()
            }
            yield _texts(grid, strips), abs(moved.shift) < SAFE_SHIFT * gap


def _right_way_up(sheet, engine, ray, rings):
    """The row with the turn of its letters settled, by how well a few of its labels read.

    A short label that is turned looks square, so its turn is not known from its box: letters may stand level,
    along the ray or across it.
    """
    few, best, tried = rings[:FEW_RINGS], None, []
    page = _page_deg(sheet.grid, ray)
    for way in (ray.turn_deg, 0.0, page - 90, page + 90, page, page + 180):
        turn = (way + 180) % 360 - 180
        if any(abs((turn - other + 180) % 360 - 180) < SAME_TURN_DEG for other in tried):
            continue
        turned = _as_turned(ray, turn) if tried else ray
        looks = read_lines(sheet, engine, [_crop_line(sheet.grid, turned, ring, None) for ring in few])
        odds = [look.levels[0].odds if look.levels else 0.0 for look in looks]
        if best is None or sum(odds) > best[0] + 0.5:
            best = sum(odds), turned
        if not tried and np.mean(odds) > READ_WELL:
            break
        tried.append(turn)
    return best[1]


def _as_turned(ray, turn_deg):
    """The row with its letters at another turn, their height worked out from the box that they fill."""
    lean = np.radians(turn_deg - ray.turn_deg)
    height = ray.height / (0.5 * LONG_OVER_TALL * abs(np.sin(lean)) + abs(np.cos(lean)))
    length = max(ray.length, LONG_OVER_TALL * height) if abs(np.sin(lean)) < 0.2 else 2.6 * height
    side, shift = ray.middle
    return replace(
        ray, turn_deg=turn_deg, height=float(height), length=float(length), anchor=0, side=side, shift=shift
    )


def _page_deg(grid, ray):
    """Direction of a ray on the sheet, degrees clockwise from the top."""
    plane = np.degrees(np.arctan2(ray.along[0], -ray.along[1]))
    x, y = grid.to_picture(np.array([0.2, 0.8]), plane)
    return float(np.degrees(np.arctan2(x[1] - x[0], -(y[1] - y[0]))))


def _detected(grid, ray, seen, rings, rim):
    """{ring: Seen} of the detected lines that are labels of the row, and the labels that stand at no known
    ring.
    """
    found, lone = {}, []
    for k, item in enumerate(seen):
        off = abs((item.line.turn_deg - ray.turn_deg + 180) % 360 - 180)
        if k in rim or not item.levels or off > 20 or not 0.5 < item.line.height / ray.height < 2.0:
            continue
        rho, off_row = ray.place_of(grid, item.line)
        if abs(off_row) > OFF_ROW * ray.height / grid.outer_px:
            continue
        ring = min(rings, key=lambda k: abs(grid.ring_rho[k] - rho))
        if abs(grid.ring_rho[ring] - rho) < OFF_RING * _room(grid, ring):
            if ring not in found or item.level_odds > found[ring].level_odds:
                found[ring] = item
        elif item.level_odds > LONE_ODDS and MIN_RHO < rho < 1.0:
            rho_u = LONE_OFF * ray.height / grid.outer_px
            if all(abs(rho - other.rho) > 2 * rho_u for other in lone):
                lone.append(RingText(ring=None, rho=rho, rho_u=rho_u, seen=item, numbers=item.levels))
    return found, tuple(lone)


def _room(grid, ring):
    """Distance to the nearest other ring, rho."""
    others = np.delete(grid.ring_rho, ring)
    return float(np.abs(others - grid.ring_rho[ring]).min()) if len(others) else float(grid.ring_rho[ring])


def _crop_line(grid, ray, ring, found):
    """The crop for a ring's label, no longer than its neighbours leave room for."""
    line = ray.line_at(grid, grid.ring_rho[ring])
    before = (
        MINUS_PAD * ray.height
    )  # a minus sign is thin, and easily left out of the boxes that proposed the row
    room = ray.length + CROP_PAD * ray.height + before
    others = np.delete(grid.ring_rho, ring)
    if len(others):
        other = ray.line_at(grid, others[np.argmin(np.abs(others - grid.ring_rho[ring]))])
        turn = np.radians(line.turn_deg)
        dx, dy = other.x - line.x, other.y - line.y
        apart, above = abs(dx * np.cos(turn) + dy * np.sin(turn)), abs(-dx * np.sin(turn) + dy * np.cos(turn))
        if above < 0.8 * ray.height:
            room = min(room, max(apart, 1.2 * ray.height))
    if found is not None:
        room = min(room, max(found.line.length + CROP_PAD * ray.height, 1.6 * ray.height) + before)
        line = replace(found.line, turn_deg=ray.turn_deg)
    off = 0.5 * (before - CROP_PAD * ray.height)
    turn = np.radians(line.turn_deg)
    return replace(
        line,
        x=line.x - off * np.cos(turn),
        y=line.y - off * np.sin(turn),
        length=room,
        height=CROP_TALL * ray.height,
    )


def _texts(grid, looks):
    """`RingText` of every ring, from {ring: {kind of look: Seen}}."""
    texts = []
    for ring, seen in looks.items():
        numbers = _pooled(seen)
        if numbers:
            lead = max(
                seen.values(),
                key=lambda item: sum(n.odds for n in item.levels if n.value == numbers[0].value),
            )
            texts.append(
                RingText(ring=ring, rho=float(grid.ring_rho[ring]), rho_u=0.0, seen=lead, numbers=numbers)
            )
    return tuple(texts)


def _pooled(looks):
    """Mean odds of the numbers over the looks at one label, best first.

    A look that sees no number says little about which number it is, so it weighs by its own odds of seeing
    one.
    """
    weight = {kind: WEIGHTS[kind] * (BLIND + look.level_odds) for kind, look in looks.items()}
    total = {}
    for kind, look in looks.items():
        for number in look.levels[:6]:
            key = number.value, number.unit
            noise = NOISE if abs(number.value) in STROKES and kind != "detected" else 1.0
            total[key] = total.get(key, 0.0) + noise * weight[kind] * float(number.odds) / sum(
                weight.values()
            )
    ranked = sorted(total.items(), key=lambda item: -item[1])
    return tuple(
        NumberOdds(value=value, unit=unit, odds=odds) for (value, unit), odds in ranked[:6] if odds > 0.01
    )


def _worth(grid, texts):
    """How much a row says together: the odds of its numbers, and more for those that fit one scale; and
    whether it is sure.
    """
    readings = [
        LevelReading(
            ring=text.ring, rho=text.rho, rho_u=text.rho_u, options=[(n.value, n.odds) for n in text.numbers]
        )
        for text in texts
    ]
    vote = vote_levels(readings, ring_rho=grid.ring_rho, outer_px=grid.outer_px)
    odds = sum(text.numbers[0].odds for text in texts)
    if vote is None:
        return 0.3 * odds, False
    sure = len(vote.support) >= SURE_SUPPORT and vote.margin >= SURE_MARGIN and not vote.against
    return 0.3 * odds + len(vote.support) - 0.5 * vote.against + 0.2 * min(vote.margin, 5.0), sure
