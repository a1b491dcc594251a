"""What the pointer and the arrow keys do on the picture, tool by tool; no widget takes part.

Places are in picture px; `reach_px` is how near a click must be, which the view works out from its zoom. A
press and a release with little between them is a click. While something is dragged, `draft` says what to
draw.
"""

from dataclasses import dataclass

import numpy as np

from digitise import correct
from digitise.exceptions import UsageError

__all__ = ["TOOLS", "Draft", "Hand"]

TOOLS = {  # name -> (title, what it does)
    "look": ("Look", "drag to move the picture, wheel to zoom"),
    "mark": ("Mark", "click a ring and type its level"),
    "ink": ("Ink", "click the trace to read; with Shift one more"),
    "pin": ("Pin", "click a point that the trace goes through"),
    "cover": ("Cover", "drag over a legend or a logo to leave it out"),
    "grid": ("Grid", "drag the centre or a ring; Shift on the outermost stretches it"),
    "crop": ("Crop", "drag over the part to read"),
}
CLICK_SHARE = 0.25  # of the reach: a pointer that moves less between press and release has clicked
LEAST_BOX_PX = 4.0
LEAST_RADIUS_PX = 20.0


@dataclass(frozen=True, eq=False, kw_only=True)
class Draft:
    """What is being drawn: a box (x, y, w, h) and its kind, or a grid that is not yet told."""

    kind: str
    box: tuple | None = None
    grid: object = None


class Hand:
    """The tool in hand and what it is in the middle of.

    tool : key of `TOOLS`; draft : Draft or None; asks : place of a new mark whose level is to be typed, or
    None;
    asks_mark : index of a mark whose level is to be typed again, or None; placed : Draft of a grid that was
    drawn or dragged, for the caller to look for lines near it; anew : the next drag with the tool Grid draws
    a new grid
    """

    def __init__(self, session):
        self.session = session
        self.tool = "look"
        self.draft = self.asks = self.asks_mark = self.placed = None
        self.anew = False
        self._from = self._at = None

    def take(self, tool):
        """Take another tool in hand."""
        self.cancel()
        self.tool = tool

    def cancel(self):
        """Stop in the middle, or let go of what is held."""
        if self.draft is None and self.asks is None and self.asks_mark is None:
            self.session.held = None
        self.draft = self.asks = self.asks_mark = self._from = None
        self.anew = False

    def stop_drag(self):
        """Leave what was begun, and keep holding what is held."""
        self.draft = self._from = None

    @property
    def busy(self):
        """Whether something is being dragged."""
        return self._from is not None

    def press(self, x, y, *, reach_px, shift=False):
        """Begin at a point."""
        self.asks = self.asks_mark = None
        self._from, self._at, self._shift, self._reach = (x, y), (x, y), shift, reach_px
        held = None if self.anew else self.nearest(x, y, reach_px)
        self.session.held = self._held = held

    def move(self, x, y):
        """Go on to another point."""
        if self._from is None:
            return
        self._at = x, y
        if self.tool in ("cover", "crop") and self._held is None:
            self.draft = Draft(kind=self.tool, box=_box(self._from, self._at))
        elif self.tool == "grid" and self._dragged():
            self.draft = self._grid_draft()
        elif self._held is not None and self._held[0] in ("mark", "pin", "cover") and self._dragged():
            self.draft = Draft(kind="point", box=(x, y, 0, 0))

    def release(self, x, y):
        """End at a point, and do what the tool does there."""
        if self._from is None:
            return
        self.move(x, y)
        draft, self.draft = self.draft, None
        start, self._from = self._from, None
        dx, dy = x - start[0], y - start[1]
        if self._held is not None and self._held[0] in ("mark", "pin", "cover"):
            if draft is not None:
                self.session.move_held(dx, dy, group=object())
            elif self.tool == "mark" and self._held[0] == "mark":
                self.asks_mark = self._held[1]
            return
        clicked = not self._dragged(start)
        if self.tool in ("cover", "crop"):
            self._box_done(draft)
        elif self.tool == "grid":
            self._grid_done(draft)
        elif self.tool == "mark" and clicked:
            self.asks = x, y
        elif self.tool == "ink" and clicked:
            self.session.pick_ink(x, y, also=self._shift)
        elif self.tool == "pin" and clicked:
            self.session.add_pin(round(x, 2), round(y, 2))

    def nearest(self, x, y, reach_px):
        """What can be held at a point with this tool: the nearest one within reach, or None."""
        session = self.session
        chart = session.chart
        if chart is None:
            return None
        settings, found = chart.settings, []
        for k, mark in enumerate(settings.marks):
            found.append((np.hypot(mark.x_px - x, mark.y_px - y), ("mark", k)))
        for k, pin in enumerate(settings.pins):
            found.append((np.hypot(pin[0] - x, pin[1] - y), ("pin", k)))
        if self.tool in ("look", "cover"):
            for k, (left, top, w, h) in enumerate(settings.covers):
                if left <= x <= left + w and top <= y <= top + h:
                    found.append((reach_px, ("cover", k)))
        if self.tool == "grid" and chart.grid is not None:
            found += self._grid_parts(chart.grid, x, y)
        within = [item for item in found if item[0] <= reach_px]
        return min(within, key=lambda item: item[0])[1] if within else None

    @staticmethod
    def _grid_parts(grid, x, y):
        """Distance of the centre and of every ring; the centre is the easier to take hold of."""
        yield 0.6 * float(np.hypot(grid.centre_x - x, grid.centre_y - y)), ("centre", 0)
        _, plane = grid.to_plane(x, y)
        ring_x, ring_y = grid.to_picture(grid.ring_rho, plane)
        for k, off in enumerate(np.hypot(ring_x - x, ring_y - y)):
            yield float(off), ("ring", k)

    def _dragged(self, start=None):
        start = start or self._from
        return np.hypot(self._at[0] - start[0], self._at[1] - start[1]) > CLICK_SHARE * self._reach

    def _box_done(self, draft):
        if draft is None or draft.box is None or min(draft.box[2:]) < LEAST_BOX_PX:
            return
        box = tuple(round(value, 1) for value in draft.box)
        if draft.kind == "cover":
            self.session.add_cover(box)
        else:
            self.session.tell_crop(tuple(round(value) for value in box))

    def _grid_draft(self):
        """The grid as it would be if it were let go of here."""
        (x0, y0), (x, y) = self._from, self._at
        grid = self.session.chart.grid if self.session.chart else None
        if grid is None or self.anew:
            radius = float(np.hypot(x - x0, y - y0))
            return Draft(kind="place", grid=correct.grid_by_hand(x0, y0, max(radius, 1.0)))
        if self._held is None:
            return None
        name, k = self._held
        if name == "centre":
            return Draft(kind="grid", grid=correct.move_centre(grid, x - x0, y - y0))
        rho, plane = (float(value) for value in grid.to_plane(x, y))
        if k == 0 and self._shift:
            return Draft(kind="grid", grid=correct.stretch_grid(grid, max(rho, 0.2), plane))
        return Draft(kind="grid", grid=_ring_or_none(grid, k, rho) or grid)

    def _grid_done(self, draft):
        if draft is None or draft.grid is None:
            return
        if draft.kind == "place":
            self.anew = False
            if draft.grid.outer_px >= LEAST_RADIUS_PX:
                self.placed = draft
            return
        name, k = self._held
        if name == "ring" and not (k == 0 and self._shift):
            rho = float(self.session.chart.grid.to_plane(*self._at)[0])
            correct.move_ring(self.session.chart.grid, k, rho)  # says why it cannot go there
        self.placed = draft


def _ring_or_none(grid, k, rho):
    try:
        return correct.move_ring(grid, k, rho)
    except UsageError:
        return None


def _box(one, other):
    """Box between two points; it begins at the outer edge of its first px, half a px before the centre."""
    x, y = min(one[0], other[0]) + 0.5, min(one[1], other[1]) + 0.5
    return x, y, abs(one[0] - other[0]), abs(one[1] - other[1])
