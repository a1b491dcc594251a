"""How the panes are laid out: side by side where there is room, else one at a time behind tabs."""

import tkinter as tk
from tkinter import ttk

__all__ = ["Panes"]

NARROW_PX = 1000  # design px: below, the panes share one place
TITLES = {"chart": "Chart", "redraw": "Redraw", "lists": "Lists"}


class Panes:
    """Lays out the parts of a window's body.

    window : has body, fields, tools, chart_view, redraw, lists, welcome; tab : the pane in sight when narrow
    """

    def __init__(self, window):
        self.window, self.body, self.look = window, window.body, window.look
        self.tab = tk.StringVar(self.body, "chart")
        self.tabs = ttk.Frame(self.body)
        for name, title in TITLES.items():
            ttk.Radiobutton(
                self.tabs,
                text=title,
                variable=self.tab,
                value=name,
                style="Tab.Toolbutton",
                command=self.arrange,
            ).pack(side="left", padx=(0, self.look.px(3)))
        self.narrow = False
        self.fields_on = True
        self.body.bind("<Configure>", lambda event: self._sized(event.width))
        self.arrange()

    def _sized(self, width):
        narrow = width < self.look.px(NARROW_PX)
        if narrow != self.narrow:
            self.narrow = narrow
            self.arrange()

    def arrange(self):
        """Lay out anew."""
        window, body, px = self.window, self.body, self.look.px
        named = {"chart": window.chart_view, "redraw": window.redraw, "lists": window.lists}
        for pane in (window.fields, window.tools, self.tabs, *named.values(), window.welcome):
            pane.grid_forget()
        for k in range(4):
            body.columnconfigure(k, weight=0, uniform="")
            body.rowconfigure(k, weight=0, uniform="")
        if not window.session.open:
            body.columnconfigure(2, weight=1)
            body.rowconfigure(1, weight=1)
            window.welcome.grid(row=1, column=2, sticky="nsew")
            return
        if self.fields_on:
            window.fields.grid(row=0, column=0, rowspan=3, sticky="ns", padx=(0, px(6)))
        if self.narrow:
            self._one_at_a_time(named)
        else:
            self._side_by_side()

    def _one_at_a_time(self, named):
        body, px = self.body, self.look.px
        body.columnconfigure(2, weight=1)
        body.rowconfigure(1, weight=1)
        self.tabs.grid(row=0, column=1, columnspan=2, sticky="w", pady=(0, px(4)))
        if self.tab.get() == "chart":
            self.window.tools.grid(row=1, column=1, sticky="n", padx=(0, px(6)))
            named["chart"].grid(row=1, column=2, sticky="nsew")
        else:
            named[self.tab.get()].grid(row=1, column=1, columnspan=2, sticky="nsew")

    def _side_by_side(self):
        window, body, px = self.window, self.body, self.look.px
        body.columnconfigure(2, weight=5, uniform="panes")
        body.columnconfigure(3, weight=4, uniform="panes")
        body.rowconfigure(0, weight=3, uniform="side")
        body.rowconfigure(1, weight=2, uniform="side")
        window.tools.grid(row=0, column=1, rowspan=2, sticky="n", padx=(0, px(6)))
        window.chart_view.grid(row=0, column=2, rowspan=2, sticky="nsew")
        window.redraw.grid(row=0, column=3, sticky="nsew", padx=(px(8), 0), pady=(0, px(6)))
        window.lists.grid(row=1, column=3, sticky="nsew", padx=(px(8), 0))

    def show(self, name):
        """Bring a pane into sight."""
        if self.tab.get() != name:
            self.tab.set(name)
            if self.narrow:
                self.arrange()

    def toggle_fields(self):
        """Hide the fields, or show them again."""
        self.fields_on = not self.fields_on
        self.arrange()

    def focus_next(self):
        """Give the keyboard to the next pane that is in sight."""
        window = self.window
        panes = [
            (window.fields, window.fields.focus_first),
            (window.chart_view, window.chart_view.canvas.focus_set),
            (window.redraw, window.redraw.canvas.focus_set),
            (window.lists, window.lists.focus_page),
        ]
        here = str(self.body.focus_get() or "")
        at = next((k for k, (pane, _) in enumerate(panes) if here.startswith(str(pane))), -1)
        for step in range(1, len(panes) + 1):
            pane, focus = panes[(at + step) % len(panes)]
            if pane.winfo_ismapped():
                focus()
                return
