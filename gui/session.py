"""All that the window holds, without a window: the state, its history, what is held, what is unsaved.

Every edit makes a new frozen `State` and keeps the old one. Edits that cannot be right for any picture raise
`UsageError` and change nothing; those that do not fit this picture become the fault of the chart when it is
read.
"""

from dataclasses import replace

import numpy as np

from digitise import correct
from digitise.exceptions import UsageError
from digitise.find import box_around
from digitise.settings import Mark

from .at_place import ink_at
from .state import Chart, State

__all__ = ["Session"]

MOST_STEPS = 200  # of undo
LEVEL_NAMES = ("outer_db", "centre_db", "marks", "ring_levels")
NOTHING = State(picture=None, kept=None, charts=())


class Session:
    """The state being worked on and its history.

    now : State; held : ("mark", k), ("pin", k), ("cover", k), ("centre", 0), ("ring", k) or None, what the
    arrow keys move; row : index of the table row being pointed at, or None; trace : index of the trace shown
    in full
    """

    def __init__(self):
        self.now = NOTHING
        self.held = None
        self.row = None
        self.trace = 0
        self._past, self._future = [], []
        self._saved = NOTHING
        self.folder = None

    # --- what there is

    @property
    def open(self):
        """Whether there is a picture."""
        return self.now.picture is not None

    @property
    def chart(self):
        """The chart being worked on, or None."""
        return self.now.chart

    @property
    def settings(self):
        """What the user told of the chart being worked on."""
        return self.chart.settings if self.chart else self.now.template

    @property
    def reading(self):
        """The reading to show, or None."""
        return self.chart.shown if self.chart else None

    @property
    def shown_trace(self):
        """The TraceReading shown in full, or None."""
        traces = self.reading.traces if self.reading is not None else ()
        return traces[min(self.trace, len(traces) - 1)] if traces else None

    @property
    def fault(self):
        """What keeps the chart, or the picture, from being read; None when nothing does."""
        return self.chart.fault if self.chart else self.now.fault

    @property
    def unsaved(self):
        """Whether work would be lost: something was told since the picture was opened or saved."""
        return self._settings_of(self.now) != self._settings_of(self._saved)

    # --- history

    def start(self, state):
        """Take up a picture that was opened and read; the history begins anew."""
        self.now = self._saved = state
        self._past, self._future = [], []
        self.held = self.row = None
        self.trace = 0

    def take(self, state):
        """Take in a state that was read meanwhile, wherever it stands; True when it is the one shown."""
        for steps in (self._past, self._future):
            for k, other in enumerate(steps):
                if other.serial == state.serial:
                    steps[k] = state
        if self._saved.serial == state.serial:
            self._saved = state
        if self.now.serial != state.serial:
            return False
        at = self.now.at if self.now.charts is not None else state.at
        self.now = replace(state, at=min(at, max(len(state.charts) - 1, 0)))
        self._let_go_of_lost()
        return True

    def mark_saved(self, state, folder):
        """Remember that a state was written to a folder."""
        self._saved, self.folder = state, folder

    @property
    def undo_words(self):
        """What undo would take back, "" when there is nothing."""
        return self.now.words if self._past else ""

    @property
    def redo_words(self):
        """What redo would do again, "" when there is nothing."""
        return self._future[-1].words if self._future else ""

    def undo(self):
        """Go one step back."""
        if self._past:
            self._future.append(self.now)
            self.now = self._past.pop()
            self._let_go_of_lost()

    def redo(self):
        """Go one step forward again."""
        if self._future:
            self._past.append(self.now)
            self.now = self._future.pop()
            self._let_go_of_lost()

    def _go(self, state):
        """Make a step, or alter the present one when both are of one group."""
        same = state.group is not None and state.group == self.now.group and self._past
        if not same:
            self._past.append(self.now)
            del self._past[:-MOST_STEPS]
        self.now, self._future = state, []
        self._let_go_of_lost()

    def _settings_of(self, state):
        """What was told, in a form to compare; frozen grids compare by identity."""
        charts = None if state.charts is None else tuple(chart.settings for chart in state.charts)
        return state.picture, state.template, charts

    # --- edits

    def tell(self, words, *, group=None, **changes):
        """Change settings of the chart being worked on; names as in `Settings`."""
        if self.chart is None:
            raise UsageError(
                "there is no chart yet", remedy="open a picture, or place a grid with the tool Grid"
            )
        settings = replace(self.settings, **changes)
        if settings != self.settings:
            self._go(self.now.with_chart(self.chart.told(settings), words, group=group))

    def tell_levels(self, words, *, group=None, **changes):
        """Tell levels in one way: the other ways, and a scale from a record, give way to it."""
        way = {"outer_db": ("outer_db", "centre_db"), "centre_db": ("outer_db", "centre_db")}
        kept = {name for changed in changes for name in way.get(changed, (changed,))}
        given = any(value not in (None, ()) for value in changes.values())
        cleared = (
            {name: () if name in ("marks", "ring_levels") else None for name in LEVEL_NAMES} if given else {}
        )
        others = {name: value for name, value in cleared.items() if name not in kept}
        self.tell(words, group=group, scale=None, **(others | changes))

    def tell_law(self, law):
        """Tell the law; None leaves it to the tool."""
        self.tell(f"law {law}" if law else "law as found", law=law, scale=None)

    def tell_bearing(self, words, **changes):
        """Tell zero_deg or turn; a bearing from a record gives way, but for what is not told anew."""
        earlier = self.settings.bearing
        if earlier is not None:
            changes.setdefault("turn", earlier.turn)
            changes.setdefault("zero_deg", earlier.zero_deg)
        self.tell(words, bearing=None, **changes)

    def zero_here(self, x_px, y_px):
        """Tell that 0 degrees is printed in the direction of a point; a spoke nearby is meant."""
        x0, y0 = self._grid().to_picture(0.0, 0.0)
        page_deg = float(np.degrees(np.arctan2(x_px - x0, y0 - y_px)) % 360)
        step = self._grid().spoke_step_deg
        for unit in (90.0, step if np.isfinite(step) else 90.0):
            nearest = round(page_deg / unit) * unit
            if abs(page_deg - nearest) < min(4.0, unit / 3):
                page_deg = nearest
                break
        self.tell_bearing(
            f"0\u00b0 at {page_deg % 360:.1f}\u00b0 from the top", zero_deg=round(page_deg % 360, 2)
        )

    def add_mark(self, x_px, y_px, level_db):
        """Add a mark; it is held afterwards."""
        marks = (*self.settings.marks, Mark(x_px=x_px, y_px=y_px, level_db=level_db))
        self.tell_levels(f"mark {level_db:g} dB", marks=marks)
        self.held = ("mark", len(marks) - 1)

    def relevel_mark(self, k, level_db):
        """Give a mark another level."""
        marks = _with(self.settings.marks, k, replace(self.settings.marks[k], level_db=level_db))
        self.tell_levels(f"mark {level_db:g} dB", marks=marks)

    def toggle_ink(self, ink):
        """Choose an ink to read, or no longer; with none chosen every trace is read."""
        inks = self.settings.inks
        inks = tuple(item for item in inks if item != ink) if ink in inks else (*inks, ink)
        self.tell(f"ink {ink}", inks=inks)

    def pick_ink(self, x_px, y_px, *, also=False):
        """Read the trace whose ink is at a point; `also` keeps the inks chosen before."""
        reading = self.chart.reading if self.chart else None
        ink = ink_at(self.now.picture, reading, x_px, y_px)
        before = self.settings.inks if also else ()
        if ink not in before:
            self.tell(f"ink {ink}", inks=(*before, ink))

    def add_cover(self, box):
        """Leave a region out of the reading; it is held afterwards."""
        self.tell("cover", covers=(*self.settings.covers, box))
        self.held = ("cover", len(self.settings.covers) - 1)

    def add_pin(self, x_px, y_px):
        """Say that the trace goes through a point; it is held afterwards."""
        self.tell("pin", pins=(*self.settings.pins, (x_px, y_px)))
        self.held = ("pin", len(self.settings.pins) - 1)

    def tell_crop(self, box):
        """Read only a part of the picture, or all of it; the charts are looked for again."""
        now = self.now
        template = replace(now.template, crop=box)
        if template == now.template:
            return
        words = "crop" if box else "no crop"
        before = now.charts or now.before
        self._go(now.step(words, charts=None, template=template, before=before, fault=None))

    def correct_grid(self, grid, words, *, group=None):
        """Use a grid corrected by hand; None finds it again."""
        if self.chart is not None:
            self.tell(words, grid=grid, group=group)
            return
        chart = Chart(settings=replace(self.now.template, grid=grid), box=box_around(grid, self.now.picture))
        self._go(self.now.step(words, charts=(chart,), at=0, fault=None))

    def go_to_chart(self, k):
        """Work on another chart; no step of the history, since nothing changes."""
        if self.now.charts and 0 <= k < len(self.now.charts) and k != self.now.at:
            self.now = replace(self.now, at=k)
            self.held = self.row = None
            self.trace = 0

    # --- what is held

    def points(self):
        """Everything that can be held, in order: marks, pins, covers, then the centre and the rings."""
        settings, grid = self.settings, self.chart.grid if self.chart else None
        rings = [("centre", 0), *(("ring", k) for k in range(len(grid.ring_rho)))] if grid is not None else []
        lists = (("mark", settings.marks), ("pin", settings.pins), ("cover", settings.covers))
        return [(name, k) for name, items in lists for k in range(len(items))] + rings

    def hold_next(self, step=1):
        """Hold the next of `points`, or the one before."""
        points = self.points()
        if points:
            at = points.index(self.held) if self.held in points else (-1 if step > 0 else 0)
            self.held = points[(at + step) % len(points)]

    def place_of_held(self):
        """Picture x, y of what is held, or None."""
        if self.held is None:
            return None
        name, k = self.held
        settings = self.settings
        if name == "mark":
            return settings.marks[k].x_px, settings.marks[k].y_px
        if name == "pin":
            return settings.pins[k]
        if name == "cover":
            x, y, w, h = settings.covers[k]
            return x + w / 2, y + h / 2
        rho = 0.0 if name == "centre" else self._grid().ring_rho[k]
        x, y = self._grid().to_picture(rho, 45.0)
        return float(x), float(y)

    def move_held(self, dx_px, dy_px, *, group=None):
        """Move what is held; a ring grows with a move to the right or up."""
        name, k = self.held
        settings = self.settings
        group = group or ("move", self.held)
        if name == "mark":
            mark = settings.marks[k]
            moved = replace(mark, x_px=round(mark.x_px + dx_px, 3), y_px=round(mark.y_px + dy_px, 3))
            self.tell_levels("move a mark", group=group, marks=_with(settings.marks, k, moved))
        elif name == "pin":
            x, y = settings.pins[k]
            self.tell(
                "move a pin",
                group=group,
                pins=_with(settings.pins, k, (round(x + dx_px, 3), round(y + dy_px, 3))),
            )
        elif name == "cover":
            x, y, w, h = settings.covers[k]
            self.tell(
                "move a cover", group=group, covers=_with(settings.covers, k, (x + dx_px, y + dy_px, w, h))
            )
        elif name == "centre":
            self.correct_grid(correct.move_centre(self._grid(), dx_px, dy_px), "move the centre", group=group)
        else:
            grid = self._grid()
            rho = float(grid.ring_rho[k]) + (dx_px - dy_px) / grid.outer_px
            self.correct_grid(correct.move_ring(grid, k, rho), "move a ring", group=group)

    def drop_held(self):
        """Take away what is held."""
        if self.held is None:
            return
        name, k = self.held
        settings = self.settings
        if name == "mark":
            self.tell("remove a mark", marks=_without(settings.marks, k))
        elif name in ("pin", "cover"):
            items = getattr(settings, f"{name}s")
            self.tell(f"remove a {name}", **{f"{name}s": _without(items, k)})
        elif name == "ring":
            self.correct_grid(correct.drop_ring(self._grid(), k), "remove a ring")
        self.held = None

    def _let_go_of_lost(self):
        if self.held is not None and self.held not in self.points():
            self.held = None
        n = len(self.reading.traces) if self.reading is not None else 0
        self.trace = min(self.trace, max(n - 1, 0))

    def _grid(self):
        grid = self.chart.grid if self.chart else None
        if grid is None:
            raise UsageError("there is no grid yet", remedy="drag from the centre to the outermost ring")
        return grid


def _with(items, k, item):
    return (*items[:k], item, *items[k + 1 :])


def _without(items, k):
    return (*items[:k], *items[k + 1 :])
