"""The window: routes keys to actions and answers of the worker to the session, keeps all panes in step."""

import tkinter as tk
from tkinter import ttk

import numpy as np

from . import flow
from .actions import Actions
from .chart_view import ChartView
from .clipboard import drop_pasted
from .drop import take_drops
from .fields import Fields
from .hand import TOOLS, Hand
from .keys import COMMANDS, command, groups
from .lists import Lists
from .panes import Panes
from .place_menu import open_place_menu
from .redraw_view import RedrawView, row_at
from .samples import sample_pictures
from .session import Session
from .sweeper import Sweeper
from .theme import COLOURS, Look
from .welcome import Welcome
from .words import said
from .worker import Worker

__all__ = ["Window"]

POLL_MS = 15
ABOVE_PX = 64  # design px that a desktop's title bar and our menu take of the screen's height
TYPING = ("Entry", "TEntry", "TCombobox")
MARKS = {
    "plain": ("", "TLabel"),
    "busy": ("\u22ef ", "TLabel"),
    "calm": ("\u2713 ", "Calm.TLabel"),
    "alert": ("! ", "Alert.TLabel"),
}


class Window:
    """All widgets of one window over one session.

    root : tk.Tk; percent : scaling, None for the screen's own
    """

    def __init__(self, root, *, session=None, percent=None):
        self.root = root
        self.session = session or Session()
        self.sweeper = Sweeper()
        self.worker = Worker()
        self.hand = Hand(self.session)
        self.actions = Actions(self)
        self.colours = COLOURS
        self.closed = False
        self._polling = None
        self._asked = None
        self.look = Look(root, percent)
        self.drops = take_drops(root, self.actions.open_path)
        self._bind_keys()
        root.protocol("WM_DELETE_WINDOW", self.actions.quit)
        self._build()
        width, height = root.winfo_screenwidth(), root.winfo_screenheight()
        height -= self.look.px(ABOVE_PX)
        root.geometry(f"{min(self.look.px(1320), width)}x{min(self.look.px(860), height)}+0+0")
        root.minsize(min(self.look.px(620), width), min(self.look.px(340), height))
        self._poll()

    # --- building

    def _build(self):
        root, px = self.root, self.look.px
        self._menus()
        self.all = ttk.Frame(root, padding=px(6))
        self.all.pack(fill="both", expand=True)
        self._build_top()
        self._build_status()
        self.body = ttk.Frame(self.all)
        self.body.pack(fill="both", expand=True)
        self.tool = tk.StringVar(root, self.hand.tool)
        self.fields = Fields(self.body, self)
        self.tools = ttk.Frame(self.body)
        for name, (title, _) in TOOLS.items():
            key = command(f"tool_{name}").shown
            ttk.Radiobutton(
                self.tools, text=f"{title} ({key})", variable=self.tool, value=name, style="Tool.Toolbutton",
                command=lambda name=name: self.actions.take_tool(name), width=9,
            ).pack(fill="x", pady=(0, px(3)))  # fmt: skip
        self.chart_view = ChartView(self.body, self)
        self.redraw = RedrawView(self.body, self)
        self.lists = Lists(self.body, self)
        self.welcome = Welcome(self.body, self, sample_pictures())
        self.panes = Panes(self)
        self._title()
        self.changed()

    def _build_top(self):
        px = self.look.px
        bar = ttk.Frame(self.all)
        bar.pack(fill="x", pady=(0, px(6)))
        self.buttons = {}
        for name, title in (("open_picture", "Open"), ("save", "Save"), ("undo", "Undo"), ("redo", "Redo")):
            style = "Main.TButton" if name == "save" else "TButton"
            button = ttk.Button(bar, text=title, command=getattr(self.actions, name), style=style)
            button.pack(side="left", padx=(0, px(4)))
            self.buttons[name] = button
        self.name = ttk.Label(bar, text="", style="Bold.TLabel")
        self.name.pack(side="left", padx=px(10))
        for name, title in (("zoom_fit", "Fit"), ("zoom_in", "+"), ("zoom_out", "\u2212")):
            button = ttk.Button(bar, text=title, command=getattr(self.actions, name), width=3)
            button.pack(side="right", padx=(px(3), 0))
        self.charts = ttk.Frame(bar)
        self.charts.pack(side="right", padx=px(12))
        ttk.Button(self.charts, text="\u25c0", width=2, command=self.actions.previous_chart).pack(side="left")
        self.chart_name = ttk.Label(self.charts, text="")
        self.chart_name.pack(side="left", padx=px(6))
        ttk.Button(self.charts, text="\u25b6", width=2, command=self.actions.next_chart).pack(side="left")

    def _build_status(self):
        px = self.look.px
        bar = ttk.Frame(self.all)
        bar.pack(side="bottom", fill="x", pady=(px(5), 0))
        self.place = ttk.Label(bar, text="", style="Dim.TLabel", anchor="e")
        self.place.pack(side="right")
        self.status = ttk.Label(bar, text="", anchor="w")
        self.status.pack(side="left", fill="x", expand=True)

    def _menus(self):
        menu = tk.Menu(self.root, tearoff=False, relief="flat", borderwidth=0)
        for title, items in groups().items():
            part = tk.Menu(menu, tearoff=False)
            for item in items:
                part.add_command(
                    label=item.words, accelerator=item.shown, command=getattr(self.actions, item.name)
                )
            menu.add_cascade(label=title, menu=part, underline=0)
        self.menu = menu
        self.root.configure(menu=menu)

    def _bind_keys(self):
        aqua = self.root.tk.call("tk", "windowingsystem") == "aqua"
        mac = "<Command-" if aqua else "<Control-"
        for item in COMMANDS:
            for key in item.keys:
                for sequence in {key, key.replace("<Control-", mac)}:
                    self.root.bind_all(sequence, lambda event, item=item: self._key(event, item))

    def _key(self, event, item):
        """Do a command, unless text is being typed there that wants the key."""
        widget = event.widget
        kind = widget.winfo_class() if isinstance(widget, tk.Misc) else ""
        if isinstance(widget, tk.Misc) and widget.winfo_toplevel() is not self.root:
            return None
        if kind in TYPING and (item.plain or item.name == "paste"):
            return None
        if item.name == "undo" and self.fields.take_back(widget):
            return "break"
        getattr(self.actions, item.name)()
        return "break"

    def rebuild(self, percent):
        """Build all widgets anew at another scaling; the session stays as it is."""
        self.leave_fields()
        self.all.destroy()
        self.menu.destroy()
        self.look = Look(self.root, percent)
        self._build()
        self.picture_changed(new=False)

    def show_review(self):
        """Bring the review into sight."""
        self.panes.show("lists")
        self.lists.book.select(0)

    # --- keeping in step

    def changed(self):
        """The session changed: ask for what is awaited, and show everything."""
        now = self.session.now
        if self.session.open and not now.done and self._asked != now.serial:
            self._asked = now.serial
            self.worker.ask("quick", flow.quick, now)
            self.worker.ask("read", flow.complete, now)
        self._show_all()
        if self.session.open and not now.done:
            self.say("Reading\u2026", "busy")
        elif self.session.open:
            self.say(*self._summary())

    def _show_all(self):
        session = self.session
        self.fields.refresh()
        self.chart_view.refresh()
        self.redraw.refresh()
        self.lists.refresh()
        self.buttons["undo"].state(["!disabled" if session.undo_words else "disabled"])
        self.buttons["redo"].state(["!disabled" if session.redo_words else "disabled"])
        self.buttons["save"].state(["!disabled" if session.open else "disabled"])
        charts = session.now.charts or ()
        if len(charts) > 1:
            self.chart_name.configure(text=f"chart {session.now.at + 1} of {len(charts)}")
            self.charts.pack(side="right", padx=self.look.px(12))
        else:
            self.charts.pack_forget()
        self._title()

    def _title(self):
        session = self.session
        star = "\u2022 " if session.unsaved else ""
        name = session.now.picture.path.replace("\\", "/").rsplit("/", 1)[-1] if session.open else ""
        page = f", page {session.now.picture.page}" if session.open and session.now.picture.page else ""
        self.root.title(f"{star}{name}{page} \u2013 digitise" if name else "digitise")
        self.name.configure(text=f"{star}{name}{page}")

    def _summary(self):
        """One line on the chart being worked on, and its kind."""
        session = self.session
        if session.fault is not None:
            return said(session.fault), "alert"
        reading = session.chart.reading
        n, looks = len(reading.traces), len(reading.review)
        words = f"{n} trace{'s' * (n != 1)} read"
        return (f"{words}, {looks} to review", "plain") if looks else (f"{words}, nothing to review", "calm")

    def say(self, words, kind):
        """Write the status line; kind: "plain", "busy", "calm" or "alert"."""
        mark, style = MARKS[kind]
        self.status.configure(text=(mark + words) if words else "", style=style)

    def stepped(self, words):
        """The history was walked."""
        self.changed()
        if self.session.now.done and self.session.fault is None:
            self.say(words, "plain")

    def picture_changed(self, *, new=True):
        """Another picture or chart is being worked on."""
        self.hand.cancel()
        if new:
            self.panes.show("chart")
        self.panes.arrange()
        self.root.update_idletasks()
        self.chart_view.picture_changed()
        self.changed()

    def tool_changed(self):
        """Another tool was taken in hand."""
        self.tool.set(self.hand.tool)
        self.panes.show("chart")
        self.chart_view.tool_changed()

    def colours_changed(self, palette):
        """The overlay chose colours for this picture."""
        self.redraw.use(palette)

    def grid_drawn(self, draft):
        """A grid was drawn or dragged."""
        self.actions.grid_drawn(draft)

    def held_changed(self):
        """Something else is held."""
        self.fields.held_changed()

    def show_held(self):
        """Something is held that may be out of sight: bring it into sight."""
        self.held_changed()
        self.panes.show("chart")
        place = self.session.place_of_held()
        if place is not None:
            view = self.chart_view
            view.sight, view.by_key = place, True
            view.canvas.focus_set()
            view.refresh()

    def pointed(self, x_px, y_px):
        """The pointer stands at a place on the picture, or nowhere."""
        reading = self.session.reading
        if x_px is None:
            self.place.configure(text="")
            return
        words = f"x {x_px:.1f}  y {y_px:.1f} px"
        if reading is not None and self.session.chart.fresh:
            rho, plane = (float(value) for value in reading.grid.to_plane(x_px, y_px))
            bearing = float(reading.bearing.from_plane(plane))
            level = float(reading.scale.level(rho))
            words += f"   {bearing:.1f}\u00b0"
            if np.isfinite(level):
                words += f"   {round(level, 2) + 0.0:.2f} dB here"
            trace = self.session.shown_trace
            if trace is not None and rho < 1.3:
                self.row_pointed(row_at(trace.table, bearing))
        self.place.configure(text=words)

    def row_pointed(self, row):
        """A row of the table is pointed at, in any pane."""
        if row != self.session.row:
            self.session.row = row
            self.redraw.show_row()
            self.chart_view.show_row()
            self.lists.show_row()

    def trace_chosen(self, k):
        """Another trace is shown in full."""
        self.session.trace = k
        self.redraw.refresh()
        self.chart_view.refresh()
        self.lists.refresh()

    def lead_to(self, spot):
        """Lead to the place of a reason."""
        if spot.trace is not None:
            self.trace_chosen(spot.trace)
        self.panes.show("chart")
        self.chart_view.show_place(spot.x_px, spot.y_px, spot.reach_px)
        if spot.row is not None:
            self.row_pointed(spot.row)

    def place_menu(self, x_root, y_root, x_px, y_px):
        """What can be done at a place on the picture."""
        if self.session.open:
            open_place_menu(self, x_root, y_root, x_px, y_px)

    def ask_level(self, x_px, y_px):
        """Ask for the level of the ring at a place."""
        self.chart_view.ask_level(x_px, y_px)

    def leave_fields(self):
        """Take in what is still being typed."""
        self.fields.leave()

    # --- the worker

    def _poll(self):
        try:
            for answer in self.worker.answers():
                self._take(answer)
                if self.closed:
                    return
            self.sweeper.sweep()
        finally:  # an error in one answer must not end the listening
            if not self.closed:
                self._polling = self.root.after(POLL_MS, self._poll)

    def _take(self, answer):
        if answer.name == "read":
            if answer.error is not None:
                self._asked = None
                self.say(said(answer.error), "alert")
            elif self.session.take(answer.value):
                self.changed()
        elif answer.name == "quick":
            if answer.value is not None and not self.session.now.done and self.session.take(answer.value):
                self._show_all()
        elif not answer.late or answer.name == "save":
            {
                "open": self.actions.opened,
                "save": self.actions.saved,
                "grid": self.actions.grid_seen,
                "pages": self.actions.pages_seen,
            }[answer.name](answer)

    def close(self):
        """End the worker and the window."""
        self.closed = True
        if self._polling is not None:
            self.root.after_cancel(self._polling)
        self.worker.close()
        self.root.destroy()
        self.sweeper.stop()
        drop_pasted()
