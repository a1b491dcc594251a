"""Read the label of every ring: the lines detected on a ray, and crops placed where the others must be."""

from dataclasses import dataclass, replace

import numpy as np

from ._label_lines import Seen, read_lines
from ._label_number import NumberOdds
from ._label_ray import find_rays
from ._level_vote import LevelReading, vote_levels

__all__ = ["RingText", "read_ring_texts"]

OFF_RING = 0.36  # of the gap to the next ring, that a label may lie off the ring it names
OFF_ROW = 1.0  # heights
CROP_PAD = 0.35  # heights of paper left at either end
MIN_RHO = 0.03
MAX_RINGS = 24


@dataclass(frozen=True, eq=False, kw_only=True)
class RingText:
    """What stands at one ring: its index, the best `Seen`, and the numbers' odds over all looks."""

    ring: int
    seen: Seen
    numbers: tuple
    detected: bool


def read_ring_texts(sheet, engine, seen, *, rim=()):
    """Ring labels of the likeliest ray: list of `RingText` (one a ring at most) and whether the ray is safe."""
    best, best_worth, safe = [], 0.0, True
    for ray in find_rays(sheet.grid, seen, rim=rim):
        texts = _read_ray(sheet, engine, seen, ray, rim)
        worth = _worth(sheet.grid, texts)
        if worth > best_worth:
            best, best_worth, safe = texts, worth, ray.safe
    return best, safe


def _worth(grid, texts):
    """How much a row of labels says together: the odds of its numbers, those that fit one scale counted thrice."""
    readings = [
        LevelReading(ring=text.ring, rho=float(grid.ring_rho[text.ring]), options=[(n.value, n.odds) for n in text.numbers])
        for text in texts
    ]
    vote = vote_levels(readings, ring_rho=grid.ring_rho, outer_px=grid.outer_px)
    agreed = len(vote.support) - 0.5 * vote.against if vote else 0
    return sum(text.numbers[0].odds for text in texts) + 2 * agreed


def _read_ray(sheet, engine, seen, ray, rim):
    grid = sheet.grid
    rings = [k for k, rho in enumerate(grid.ring_rho[:MAX_RINGS]) if rho > MIN_RHO]
    found = {}
    for k, item in enumerate(seen):
        if k in rim or not item.numbers:
            continue
        ring = _ring_of(grid, ray, item.line, rings)
        if ring is not None and (ring not in found or item.number_odds > found[ring].number_odds):
            found[ring] = item
    lines = [_crop_line(grid, ray, ring, found.get(ring)) for ring in rings]
    looks = [read_lines(sheet, engine, lines, cleaned=cleaned) for cleaned in (True, False)]
    texts = []
    for ring, *crops in zip(rings, *looks):
        seen_here = ([found[ring]] if ring in found else []) + crops
        numbers = _pooled(seen_here, ring in found)
        if numbers:
            lead = max(seen_here, key=lambda item: _odds_of(item, numbers[0].value))
            texts.append(RingText(ring=ring, seen=lead, numbers=numbers, detected=ring in found))
    return texts


def _ring_of(grid, ray, line, rings):
    """The ring whose label a detected line is, or None."""
    if not 0.5 < line.height / ray.height < 2.0 or not rings:
        return None
    rho, off_row = ray.place_of(grid, line)
    if abs(off_row) > OFF_ROW * ray.height / grid.outer_px:
        return None
    ring = min(rings, key=lambda k: abs(grid.ring_rho[k] - rho))
    others = np.delete(grid.ring_rho, ring)
    gap = np.abs(others - grid.ring_rho[ring]).min() if len(others) else grid.ring_rho[ring]
    return ring if abs(grid.ring_rho[ring] - rho) < OFF_RING * gap else None


def _crop_line(grid, ray, ring, found):
    """The crop for a ring's label, no longer than its neighbours leave room for."""
    line = ray.line_at(grid, grid.ring_rho[ring])
    room = ray.length + 2 * CROP_PAD * ray.height
    others = np.delete(grid.ring_rho, ring)
    if len(others):
        near = others[np.argmin(np.abs(others - grid.ring_rho[ring]))]
        other = ray.line_at(grid, near)
        turn = np.radians(line.turn_deg)
        dx, dy = other.x - line.x, other.y - line.y
        apart, above = abs(dx * np.cos(turn) + dy * np.sin(turn)), abs(-dx * np.sin(turn) + dy * np.cos(turn))
        if above < 0.8 * ray.height:
            room = min(room, max(apart, 1.2 * ray.height))
    if found is not None:
        room = min(room, max(found.line.length + 2 * CROP_PAD * ray.height, 1.6 * ray.height))
        return replace(found.line, length=room, height=ray.height * 1.05, turn_deg=ray.turn_deg)
    return replace(line, length=room, height=ray.height * 1.15)


def _odds_of(item, value):
    return sum(number.odds for number in item.numbers if number.value == value)


def _pooled(looks, detected):
    """Mean odds over the looks; the detected line counts as much as both crops together."""
    weights = [2.0, 1.0, 1.0] if detected else [1.0, 0.6]
    total = {}
    for look, weight in zip(looks, weights):
        for number in look.numbers[:6]:
            if number.unit != "deg":
                key = number.value, number.unit
                total[key] = total.get(key, 0.0) + weight * float(number.odds) / sum(weights)
    ranked = sorted(total.items(), key=lambda item: -item[1])
    return tuple(NumberOdds(value=value, unit=unit, odds=odds) for (value, unit), odds in ranked[:6] if odds > 0.01)
