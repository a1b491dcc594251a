"""The small field beside a ring in which its level is typed, with its fault under it."""

import tkinter as tk
from tkinter import ttk

from digitise.exceptions import UsageError

from .level_text import read_level
from .theme import COLOURS
from .words import said

__all__ = ["LevelEditor"]

WIDTH_PX, HEIGHT_PX = 230, 60  # design px, about


class LevelEditor:
    """Asks for the level of a mark on a `ChartView`'s canvas."""

    def __init__(self, view):
        self.view, self.session, self.look = view, view.session, view.look
        self._item = self._box = None
        self.entry = self.fault = None

    def ask(self, x_px, y_px, k=None):
        """Open the field beside a picture place, for a new mark or for the k-th again."""
        self.close()
        px, fonts, paper = self.look.px, self.look.fonts, COLOURS["paper"]
        box = tk.Frame(
            self.view.canvas, background=paper, highlightbackground=COLOURS["mark"], highlightthickness=px(1)
        )
        row = tk.Frame(box, background=paper)
        row.pack(padx=px(6), pady=(px(5), px(4)))
        tk.Label(row, text="Level of this ring", background=paper, font=fonts["text"]).pack(side="left")
        self.entry = ttk.Entry(row, width=7, font=fonts["text"])
        self.entry.pack(side="left", padx=px(4))
        tk.Label(row, text="dB", background=paper, font=fonts["text"]).pack(side="left")
        self.fault = tk.Label(
            box,
            background=paper,
            foreground=COLOURS["alert"],
            font=fonts["small"],
            wraplength=px(220),
            justify="left",
        )
        if k is not None:
            self.entry.insert(0, f"{self.session.settings.marks[k].level_db:g}")
            self.entry.select_range(0, "end")
        x, y = self.view.place(x_px, y_px)
        x = max(0, min(x + px(12), self.view.frame.width - px(WIDTH_PX)))
        y = max(0, min(y - px(16), self.view.frame.height - px(HEIGHT_PX)))
        self._item = self.view.canvas.create_window(x, y, window=box, anchor="nw")
        self._box = box
        self.entry.bind("<Return>", lambda _: self._done(x_px, y_px, k))
        self.entry.bind("<KP_Enter>", lambda _: self._done(x_px, y_px, k))
        self.entry.bind("<Escape>", lambda _: self._stop())
        self.entry.focus_set()

    def close(self):
        """Take the field away."""
        if self._box is not None:
            self.view.canvas.delete(self._item)
            self._box.destroy()
        self._item = self._box = None

    def _done(self, x_px, y_px, k):
        try:
            level = read_level(self.entry.get())
            if k is None:
                self.session.add_mark(round(x_px, 2), round(y_px, 2), level)
            else:
                self.session.relevel_mark(k, level)
        except UsageError as error:
            self.fault.configure(text=said(error))
            self.fault.pack(padx=self.look.px(6), pady=(0, self.look.px(5)), anchor="w")
            return "break"
        self._stop()
        self.view.window.changed()
        return "break"

    def _stop(self):
        self.close()
        self.view.hand.asks = self.view.hand.asks_mark = None
        self.view.canvas.focus_set()
        return "break"
