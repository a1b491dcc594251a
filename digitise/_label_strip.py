"""Ring labels printed end to end along a ray: the whole row is read as one line and cut by columns at the
rings.

A recogniser gives odds column by column, so every character has a place. Where labels stand closer than their
own length, a crop of one holds pieces of its neighbours; the columns about each ring do not.
"""

from dataclasses import replace

import numpy as np

__all__ = ["in_line", "strip_numbers"]

LONGEST = 14.0  # heights of row read at once
SHIFTS = (0.0, -0.2, 0.2, -0.35, 0.35)  # of the gap between rings, that the labels may stand off them
WINDOW = 0.55  # of the gap, on either side of a ring


def in_line(grid, ray, rings):
    """Whether neighbouring labels of a ray stand in one line of text."""
    if len(rings) < 2:
        return False
    first, second = (ray.line_at(grid, grid.ring_rho[ring]) for ring in rings[:2])
    turn = np.radians(ray.turn_deg)
    dx, dy = second.x - first.x, second.y - first.y
    return bool(abs(-dx * np.sin(turn) + dy * np.cos(turn)) < 0.8 * ray.height)


def strip_numbers(sheet, engine, ray, rings):
    """The numbers of every ring from the row as a whole.

    Returns a list, one a trial shift, of (shift in rho, {ring: tuple of NumberOdds}), the plain one first.
    """
    grid = sheet.grid
    places = np.array(
        [(line.x, line.y) for line in (ray.line_at(grid, grid.ring_rho[ring]) for ring in rings)]
    )
    turn = np.radians(ray.turn_deg)
    along = places @ [np.cos(turn), np.sin(turn)]
    gap = float(np.median(np.abs(np.diff(along)))) if len(along) > 1 else ray.length
    columns, centres = _read_row(sheet, engine, ray, places, along, gap)
    gap_rho = float(np.median(np.abs(np.diff(grid.ring_rho[rings])))) if len(rings) > 1 else 0.2
    outward = np.sign(along[0] - along[-1]) if len(along) > 1 else 1.0
    out = []
    for share in SHIFTS:
        numbers = {}
        for ring, at in zip(rings, along + outward * share * gap):
            mine = np.abs(centres - at) < WINDOW * gap
            if mine.any():
                numbers[ring] = tuple(engine.alphabet.numbers(columns[mine], "level"))
        out.append((share * gap_rho, numbers))
    return out


def _read_row(sheet, engine, ray, places, along, gap):
    """Log odds of all columns of the row, and where each column stands along it, sheet px."""
    start, stop = along.min() - gap, along.max() + gap
    middle = places.mean(axis=0)
    n = max(1, int(np.ceil((stop - start) / (LONGEST * ray.height))))
    span = (stop - start) / n
    turn = np.radians(ray.turn_deg)
    lines = []
    for k in range(n):
        off = start + (k + 0.5) * span - along.mean()
        base = ray.line_at(sheet.grid, 0.5)
        lines.append(
            replace(
                base,
                x=middle[0] + off * np.cos(turn),
                y=middle[1] + off * np.sin(turn),
                length=span,
                height=1.1 * ray.height,
            )
        )
    odds = engine.read([sheet.line_picture(line) for line in lines])
    centres, kept = [], []
    for k, (line, columns) in enumerate(zip(lines, odds)):
        px_per_column = engine.column_px * line.height / engine.line_px
        at = start + k * span + (np.arange(len(columns)) + 0.5) * px_per_column
        inside = at < start + (k + 1) * span
        centres.append(at[inside])
        kept.append(columns[inside])
    return np.concatenate(kept), np.concatenate(centres)
