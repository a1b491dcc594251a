"""Where the ring labels stand: along one ray from the chart's centre, at the same offset from every ring.

The numbers found inside the chart propose rays. A ray is a direction, the turn of its letters, and the offset
of the label's middle or of one of its ends from the ring; the offset nearest to the rings is taken, since
labels are printed beside the ring that they name.
"""

from dataclasses import dataclass

import numpy as np

from ._label_sheet import Line

__all__ = ["Ray", "find_rays"]

NUMBER_ODDS = 0.3  # a line proposes a ray only when it may well be a number
LONE_RHO = 1.03  # a single number further out is no ring label
FEW, UNREAD = 1.2, 0.2  # odds of numbers in all, below which unread marks propose rows too, at this weight
INSIDE_RHO = 1.16
MAX_RAYS = 3
APART_DEG = 7.0
LONG = 4.5  # length over height of a line that may be a whole row of labels
BESIDE = 2.4  # heights that a row may pass the centre by
SPREAD = 0.75  # heights that a label may lie off its row
TURN_SLACK_DEG = 14.0
SAFE_SHIFT = 0.34  # of the gap between rings: a label further off may belong to either neighbour
END_SHARE = 0.18  # of a line's height that its box is longer than the text, at either end


@dataclass(frozen=True, eq=False, kw_only=True)
class Ray:
    """A row of ring labels.

    along, across : unit vectors in the chart plane (u, v), outward and clockwise from it
    side : distance of the row from the centre along `across`, rho; shift : of a label beyond its ring, rho
    anchor : -1, 0, 1 for the left end, middle or right end of the text
    turn_deg, height, length : of the labels on the sheet, degrees clockwise and px
    safe : whether the shift leaves no doubt about which ring a label names
    middle : side and shift of the labels' middles, whichever the anchor
    members : indices of the lines that proposed it; score : sum of their odds
    """

    along: np.ndarray
    across: np.ndarray
    side: float
    shift: float
    anchor: int
    turn_deg: float
    height: float
    length: float
    safe: bool
    middle: tuple
    members: tuple
    score: float

    def line_at(self, grid, rho, *, length=None):
        """The `Line` (sheet px) of the label of the ring at rho."""
        length = self.length if length is None else length
        u, v = (rho + self.shift) * self.along + self.side * self.across
        x, y = grid.to_picture(np.hypot(u, v), np.degrees(np.arctan2(u, -v)))
        turn = np.radians(self.turn_deg)
        back = -0.5 * self.anchor * (length - 2 * END_SHARE * self.height)
        return Line(
            x=float(x + back * np.cos(turn)),
            y=float(y + back * np.sin(turn)),
            length=length,
            height=self.height,
            turn_deg=self.turn_deg,
        )

    def place_of(self, grid, line):
        """Radius of the ring that a line's label would name, and its distance off the row, both rho."""
        point = _plane_point(grid, line, self.anchor)
        return float(point @ self.along) - self.shift, float(point @ self.across) - self.side


def find_rays(grid, seen, *, rim=()):
    """The likeliest rows of ring labels, best first: tuple of `Ray`.

    grid : Grid in sheet px; seen : list of Seen; rim : indices of those that are bearings
    """
    inside = [k for k, item in enumerate(seen) if item.rho < INSIDE_RHO and k not in rim]
    odds = {k: seen[k].level_odds for k in inside}
    if sum(share for k, share in odds.items() if share > NUMBER_ODDS and seen[k].rho < LONE_RHO) < FEW:
        # letters that are turned do not read as yet
        odds.update({k: max(odds[k], UNREAD) for k in inside if _may_be_label(grid, seen[k])})
    marks = [k for k in inside if odds[k] > (NUMBER_ODDS if odds[k] != UNREAD else 0.0)]
    points = {k: _plane_point(grid, seen[k].line, 0) for k in inside}
    proposals = [(points[i], points[j]) for n, i in enumerate(marks) for j in marks[n + 1 :]]
    proposals += [(points[k], np.zeros(2)) for k in marks if seen[k].rho < LONE_RHO]
    rows = [_gather(grid, seen, marks, points, a, b) for a, b in proposals]
    long = [k for k in inside if seen[k].line.length > LONG * seen[k].line.height]
    rows += [_from_long(grid, seen[k].line, k) for k in long]
    rows += [
        _from_long(grid, _levelled(seen[k].line), k)
        for k in long
        if 0 < abs(seen[k].line.turn_deg) < TURN_SLACK_DEG
    ]
    best = []
    for ray in sorted((row for row in rows if row is not None), key=lambda row: -row.score):
        if all(np.degrees(np.arccos(np.clip(ray.along @ other.along, -1, 1))) > APART_DEG for other in best):
            best.append(ray)
        if len(best) == MAX_RAYS:
            break
    return tuple(best)


def _may_be_label(grid, item):
    """Whether an unread line is as compact as a label and stands at a ring."""
    off = np.abs(grid.ring_rho - item.rho).min()
    return item.line.length < 3.0 * item.line.height and item.rho < 1.0 and off < 0.2 * _gap(grid)


def _plane_point(grid, line, anchor):
    """(u, v) of a line's middle or end in the chart plane."""
    turn = np.radians(line.turn_deg)
    reach = 0.5 * anchor * (line.length - 2 * END_SHARE * line.height)
    rho, plane = grid.to_plane(line.x + reach * np.cos(turn), line.y + reach * np.sin(turn))
    return np.array([rho * np.sin(np.radians(plane)), -rho * np.cos(np.radians(plane))])


def _gather(grid, seen, marks, points, first, second):
    """The ray along the line through two points, with every mark that lies on it; None when it misses the
    centre.
    """
    step = first - second
    if np.hypot(*step) < 0.03:
        return None
    along = step / np.hypot(*step)
    if along @ (first + second) < 0:
        along = -along
    across = np.array([-along[1], along[0]])
    side = float(first @ across)
    heights = {k: seen[k].line.height / grid.outer_px for k in marks}
    on = [
        k for k in marks if abs(points[k] @ across - side) < SPREAD * heights[k] and points[k] @ along > -0.02
    ]
    if not on:
        return None
    turn = _usual_turn([seen[k] for k in on])
    height = float(
        np.median([seen[k].line.height for k in on if abs(seen[k].line.turn_deg - turn) < TURN_SLACK_DEG])
    )
    on = [k for k in on if _alike(seen[k].line, turn, height)]
    if not on or abs(side) > BESIDE * height / grid.outer_px:
        return None
    return _anchored(grid, seen, on, along, across, turn)


def _usual_turn(items):
    """The turn that most of the lines agree on, by the odds of their numbers; a short line's turn says
    less.
    """
    weights = [
        item.level_odds * (1.0 if item.line.length > 1.5 * item.line.height else 0.5) for item in items
    ]
    weights = [
        weight * (1.0 if item.line.turn_deg == 0 else 0.7) for weight, item in zip(weights, items)
    ]  # most print is level
    turns = np.array([item.line.turn_deg for item in items])
    off = np.abs((turns[:, None] - turns[None, :] + 180) % 360 - 180)
    return float(turns[np.argmax((off < TURN_SLACK_DEG) @ np.array(weights))])


def _alike(line, turn_deg, height):
    """Whether a line's letters stand as the row's do and are of its size."""
    square = line.length < 1.5 * line.height
    off = abs((line.turn_deg - turn_deg + 180) % 360 - 180)
    return 0.55 < line.height / height < 1.8 and (square or off < TURN_SLACK_DEG)


def _anchored(grid, seen, on, along, across, turn_deg):
    """The `Ray` whose anchor and shift bring its labels nearest to the rings."""
    gap = _gap(grid)
    shifts = np.linspace(-0.5, 0.5, 41) * gap
    best = middle = None
    for anchor in (0, -1, 1):
        points = np.array([_plane_point(grid, seen[k].line, anchor) for k in on])
        s, sides = points @ along, points @ across
        off = np.abs((s[:, None, None] - shifts[None, :, None]) - grid.ring_rho[None, None, :]).min(axis=2)
        cost = np.mean(np.minimum(off, 0.3 * gap) ** 2, axis=0) + 0.04 * shifts**2 + np.var(sides)
        k = int(np.argmin(cost))
        cost = cost[k] * (1.0 if anchor == 0 else 1.1)
        if best is None or cost < best[0]:
            best = cost, anchor, shifts[k], float(np.median(sides))
        middle = middle or (float(np.median(sides)), float(shifts[k]))
    _, anchor, shift, side = best
    heights, lengths = [seen[k].line.height for k in on], [seen[k].line.length for k in on]
    tall = [h for h, w in zip(heights, lengths) if w > 1.5 * h] or heights
    score = sum(max(seen[k].level_odds, UNREAD) for k in on)
    return Ray(
        along=along,
        across=across,
        side=side,
        shift=float(shift),
        anchor=anchor,
        turn_deg=turn_deg,
        height=float(np.median(tall)),
        length=float(max(*lengths, 2.0 * np.median(tall))),
        safe=abs(shift) < SAFE_SHIFT * gap,
        members=tuple(on),
        score=float(score),
        middle=middle,
    )


def _levelled(line):
    """A line whose slant may come from what it was joined with."""
    turn = np.radians(line.turn_deg)
    height = max(0.6 * line.height, line.height - line.length * abs(np.sin(turn)))
    return Line(x=line.x, y=line.y, length=line.length, height=height, turn_deg=0.0)


def _from_long(grid, line, index):
    """The ray along one long line that runs towards the centre: a row of labels detected as one."""
    turn = np.radians(line.turn_deg)
    ends = [
        _plane_point(
            grid,
            Line(
                x=line.x + s * np.cos(turn), y=line.y + s * np.sin(turn), length=0.0, height=0.0, turn_deg=0.0
            ),
            0,
        )
        for s in (-line.length / 2, line.length / 2)
    ]
    inner, outer = sorted(ends, key=lambda p: float(np.hypot(*p)))
    step = outer - inner
    if np.hypot(*step) < 0.1:
        return None
    along = step / np.hypot(*step)
    across = np.array([-along[1], along[0]])
    side = float((inner + outer) @ across / 2)
    if abs(side) > BESIDE * line.height / grid.outer_px or outer @ along < 0:
        return None
    return Ray(
        along=along,
        across=across,
        side=side,
        shift=0.0,
        anchor=0,
        turn_deg=line.turn_deg,
        height=line.height,
        length=2.6 * line.height,
        safe=True,
        members=(index,),
        score=0.6,
        middle=(side, 0.0),
    )


def _gap(grid):
    """The usual distance between neighbouring rings, rho."""
    rho = np.append(grid.ring_rho, 0.0) if len(grid.ring_rho) < 3 else grid.ring_rho
    return float(np.median(-np.diff(rho)))
