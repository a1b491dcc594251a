"""The picture with the reading over it: zoom, pan, loupe and the tools; a thin widget over `Hand`."""

import tkinter as tk
from tkinter import ttk

import numpy as np

from digitise.exceptions import DigitiseError

from .colours import overlay_colours
from .frame import fit_frame, frame_pixels, to_ppm
from .hand import TOOLS
from .level_editor import LevelEditor
from .overlay import overlay_shapes, pointed_shapes
from .pen import Pen
from .sight import Sight
from .theme import COLOURS
from .words import said

__all__ = ["ChartView"]

REACH_PX = 9  # design px, how near a click must be
WHEEL_FACTOR = 1.25
CURSORS = {"look": "fleur", "ink": "crosshair", "grid": "crosshair"}
ARROWS = {"Left": (-1, 0), "Right": (1, 0), "Up": (0, -1), "Down": (0, 1)}


class ChartView(ttk.Frame):
    """The picture's pane.

    window : what is called back: `changed()`, `say(words, kind)`, `settle(grid)`, `place(grid)`, `pointed(x,
    y)`
    """

    def __init__(self, parent, window):
        super().__init__(parent)
        self.window, self.session, self.hand, self.look = window, window.session, window.hand, window.look
        self.canvas = tk.Canvas(
            self, background="#e2e5e9", highlightthickness=self.look.px(2), highlightcolor=COLOURS["focus"],
            highlightbackground=COLOURS["rule"], takefocus=True, borderwidth=0,
        )  # fmt: skip
        self.canvas.pack(fill="both", expand=True)
        self.pen = Pen(self.canvas, self.look)
        self.frame = fit_frame((0, 0, 100, 100), 100, 100)
        self.sight = None  # picture place of the pointer or of the keyboard's sight
        self.by_key = False
        self.overlay_on = True
        self._image = self._waiting = self._pan = None
        self._sight = Sight(self)
        self.editor = LevelEditor(self)
        self._fitted, self._coloured = None, None
        bind = self.canvas.bind
        bind("<Configure>", lambda event: self._resized(event.width, event.height))
        bind("<ButtonPress-1>", self._press)
        bind("<B1-Motion>", self._drag)
        bind("<ButtonRelease-1>", self._release)
        bind("<Motion>", self._motion)
        bind("<Leave>", self._leave)
        bind("<ButtonPress-2>", self._start_pan)
        bind("<B2-Motion>", self._drag_pan)
        bind(
            "<ButtonPress-3>",
            lambda event: self.window.place_menu(event.x_root, event.y_root, *self._at(event)),
        )
        bind("<Menu>", lambda _: self._menu_at_sight())
        bind("<MouseWheel>", lambda event: self._wheel(event, event.delta))
        bind("<Button-4>", lambda event: self._wheel(event, 1))
        bind("<Button-5>", lambda event: self._wheel(event, -1))
        bind("<Return>", self._click_at_sight)
        for name, (dx, dy) in ARROWS.items():
            for prefix, step in (("", 1), ("Shift-", 10)):
                bind(f"<{prefix}{name}>", lambda _, x=dx * step, y=dy * step: self._arrow(x, y))

    # --- what is shown

    def refresh(self):
        """Draw anew, once the present events are done."""
        if self._waiting is None:
            self._waiting = self.after_idle(self._draw)

    def fit(self, *, picture=False):
        """Show the whole chart, or the whole picture."""
        if not self.session.open:
            return
        now, chart = self.session.now, self.session.chart
        box = (0, 0, now.picture.width, now.picture.height)
        if chart is not None and not picture:
            box = (chart.box.x, chart.box.y, chart.box.w, chart.box.h)
        self.frame = fit_frame(box, max(self.canvas.winfo_width(), 50), max(self.canvas.winfo_height(), 50))
        self.refresh()

    def zoom(self, factor, x=None, y=None):
        """Zoom about a view point, the middle when none is given."""
        x = self.frame.width / 2 if x is None else x
        y = self.frame.height / 2 if y is None else y
        self.frame = self.frame.zoomed(factor, x, y)
        self.refresh()

    def zoom_to(self, zoom):
        """Zoom to so many view px per picture px."""
        self.zoom(zoom / self.frame.zoom)

    def show_place(self, x_px, y_px, reach_px):
        """Lead to a place on the picture."""
        w, h = self.frame.width, self.frame.height
        box = (x_px - reach_px, y_px - reach_px, 2 * reach_px, 2 * reach_px)
        self.frame = fit_frame(box, w, h, most_zoom=8.0)
        self.sight, self.by_key = (x_px, y_px), True
        self.refresh()

    def picture_changed(self):
        """A picture was opened, or its charts were looked for again."""
        self._coloured = None
        self.sight = None
        self.fit()

    def _resized(self, width, height):
        edge = 2 * int(self.canvas["highlightthickness"])
        width, height = max(width - edge, 10), max(height - edge, 10)
        first = self._fitted is None
        self._fitted = True
        if first:
            self.fit()
        else:
            self.frame = self.frame.resized(width, height)
        self.refresh()

    def _draw(self):
        self._waiting = None
        if not self.session.open:
            self.canvas.delete("all")
            return
        self._draw_picture()
        self._choose_colours()
        shapes = []
        if self.overlay_on:
            shapes = overlay_shapes(self.session, self.place, draft=self.hand.draft, scale_px=self.look.unit)
        self.pen.draw(shapes)
        self.show_row()
        self._draw_sight()

    def show_row(self):
        """Draw the place of the row being pointed at."""
        self.pen.draw(pointed_shapes(self.session, self.place) if self.overlay_on else [], tag="pointed")

    def place(self, x, y):
        """Canvas px of picture px."""
        x, y = self.frame.place(x, y)
        edge = int(self.canvas["highlightthickness"])
        return x + edge, y + edge

    def _draw_picture(self):
        now = self.session.now
        draft = self.hand.draft
        covers = self.session.settings.covers
        if draft is not None and draft.kind == "cover":
            covers = (*covers, draft.box)
        pixels = frame_pixels(now.picture.rgb, self.frame, crop=now.template.crop, covers=covers)
        self._image = tk.PhotoImage(master=self.canvas, data=to_ppm(pixels), format="PPM")
        self.canvas.delete("picture")
        edge = int(self.canvas["highlightthickness"])
        self.canvas.create_image(edge, edge, image=self._image, anchor="nw", tags="picture")
        self.canvas.tag_lower("picture")

    def _choose_colours(self):
        """Colours that stand off what is on the chart, for every kind of sight."""
        chart = self.session.chart
        n = len(self.session.reading.traces) if self.session.reading is not None else 1
        key = (self.session.now.picture, chart and chart.box, n)
        if key == self._coloured:
            return
        self._coloured = key
        rgb = self.session.now.picture.rgb
        if chart is not None:
            box = chart.box
            rgb = rgb[box.y : box.y + box.h, box.x : box.x + box.w]
        self.pen.use(overlay_colours(rgb, n))
        self.window.colours_changed(self.pen.palette)

    def _draw_sight(self):
        self._sight.draw(loupe=self.hand.tool != "look" or self.session.held is not None)

    # --- the pointer

    def _at(self, event):
        edge = int(self.canvas["highlightthickness"])
        return self.frame.picture_place(event.x - edge, event.y - edge)

    @property
    def _reach(self):
        return REACH_PX * self.look.unit / self.frame.zoom

    def _press(self, event):
        self.canvas.focus_set()
        self.editor.close()
        if not self.session.open:
            return
        self.by_key = False
        x, y = self._at(event)
        self.hand.press(x, y, reach_px=self._reach, shift=bool(event.state & 1))
        if self.hand.tool == "look" and self.session.held is None:
            self._start_pan(event)
        self.window.held_changed()
        self.refresh()

    def _drag(self, event):
        if self._pan is not None:
            self._drag_pan(event)
            return
        self.sight = self._at(event)
        self.hand.move(*self.sight)
        self.refresh()

    def _release(self, event):
        if self._pan is not None:
            moved = np.hypot(event.x - self._pan_from[0], event.y - self._pan_from[1])
            self._pan = None
            self.canvas.configure(cursor=self._cursor())
            self.hand.cancel()
            if moved < 4 * self.look.unit:
                self._choose_chart(*self._at(event))
            return
        self._finish(lambda: self.hand.release(*self._at(event)))

    def _finish(self, act):
        """Do what the tool does, and what it leaves to be done."""
        try:
            act()
        except DigitiseError as error:
            self.hand.cancel()
            self.window.say(said(error), "alert")
        if self.hand.placed is not None:
            draft, self.hand.placed = self.hand.placed, None
            self.window.grid_drawn(draft)
        if self.hand.asks is not None:
            self.editor.ask(*self.hand.asks)
        elif self.hand.asks_mark is not None:
            mark = self.session.settings.marks[self.hand.asks_mark]
            self.editor.ask(mark.x_px, mark.y_px, self.hand.asks_mark)
        self.window.changed()

    def _choose_chart(self, x, y):
        for k, chart in enumerate(self.session.now.charts or ()):
            box = chart.box
            if box.x <= x < box.x + box.w and box.y <= y < box.y + box.h and k != self.session.now.at:
                self.window.actions.go_to_chart(k)
                return

    def _start_pan(self, event):
        self._pan = self._pan_from = (event.x, event.y)
        self.canvas.configure(cursor="fleur")

    def _drag_pan(self, event):
        if self._pan is None:
            return
        self.frame = self.frame.moved(event.x - self._pan[0], event.y - self._pan[1])
        self._pan = (event.x, event.y)
        self.refresh()

    def _motion(self, event):
        if not self.session.open:
            return
        self.sight, self.by_key = self._at(event), False
        self.window.pointed(*self.sight)
        self._draw_sight()

    def _leave(self, _):
        if not self.by_key:
            self.sight = None
            self._draw_sight()
            self.window.pointed(None, None)

    def _wheel(self, event, delta):
        edge = int(self.canvas["highlightthickness"])
        self.zoom(WHEEL_FACTOR if delta > 0 else 1 / WHEEL_FACTOR, event.x - edge, event.y - edge)

    # --- the keyboard

    def _arrow(self, dx, dy):
        if not self.session.open:
            return "break"
        self.by_key = True
        if self.session.held is not None:
            try:
                self.session.move_held(0.1 * dx, 0.1 * dy)
            except DigitiseError as error:
                self.window.say(said(error), "alert")
            self.sight = self.session.place_of_held() or self.sight
            self.window.changed()
            return "break"
        if self.sight is None:
            self.sight = self.frame.picture_place(self.frame.width / 2, self.frame.height / 2)
        self.sight = self.sight[0] + dx, self.sight[1] + dy
        self.window.pointed(*self.sight)
        self.hand.move(*self.sight)
        self._draw() if self.hand.busy else self._draw_sight()
        return "break"

    def _click_at_sight(self, event):
        """Click at the sight; with tools that draw, the first click is one end, the second the other."""
        if not self.session.open or self.sight is None:
            return
        self.by_key = True
        if self.hand.tool in ("cover", "crop", "grid") and not self.hand.busy:
            self.hand.press(*self.sight, reach_px=self._reach, shift=bool(event.state & 1))
            self.window.say("move to the other end with the arrows, then Enter", "plain")
            self.window.held_changed()
            if self.session.held is not None and self.hand.tool == "grid":
                self.hand.stop_drag()
            return
        if not self.hand.busy:
            self.hand.press(*self.sight, reach_px=self._reach, shift=bool(event.state & 1))
        self._finish(lambda: self.hand.release(*self.sight))

    def _menu_at_sight(self):
        if self.session.open and self.sight is not None:
            x, y = self.place(*self.sight)
            self.window.place_menu(
                self.canvas.winfo_rootx() + int(x), self.canvas.winfo_rooty() + int(y), *self.sight
            )

    def ask_level(self, x_px, y_px):
        """Ask for the level of the ring at a place."""
        self.editor.ask(x_px, y_px)

    def tool_changed(self):
        """Another tool was taken in hand."""
        self.editor.close()
        self.canvas.configure(cursor=self._cursor())
        self.window.say(TOOLS[self.hand.tool][1] if self.session.open else "", "plain")
        self.refresh()

    def _cursor(self):
        return "" if self.hand.tool == "look" else CURSORS.get(self.hand.tool, "crosshair")
