"""The small windows: where to save, whether to lose work, all keys. Each keeps its fault beside its field."""

import os
import tkinter as tk
from tkinter import filedialog, ttk

from digitise.caution import CAUTION_SHORT
from digitise.exceptions import DigitiseError
from digitise.outputs import chart_stem, check_folder

from .keys import POINTER_KEYS, groups
from .theme import toplevel
from .words import said

__all__ = ["AskUnsaved", "SaveDialog", "show_keys"]

PICTURE_TYPES = (
    (
        "Pictures and records",
        "*.png *.jpg *.jpeg *.gif *.tif *.tiff *.bmp *.webp *.pdf *.PNG *.JPG *.PDF *.json",
    ),
    ("All files", "*"),
)


def ask_picture(parent, *, folder=None, title="Open a picture or a record"):
    """A file's name, or ""."""
    return (
        filedialog.askopenfilename(parent=parent, title=title, initialdir=folder, filetypes=PICTURE_TYPES)
        or ""
    )


class SaveDialog:
    """Asks for the folder; `done(folder)` is called with one that may be written to.

    fault : the label beside the field; ok : what the button does
    """

    def __init__(self, parent, look, state, folder, done):
        self.done, self.state = done, state
        self.top = toplevel(parent, "Save", look)
        px = look.px
        ttk.Label(self.top, text="Folder for table, record and proof").grid(
            row=0, column=0, columnspan=2, sticky="w"
        )
        self.folder = tk.StringVar(self.top, folder)
        self.entry = ttk.Entry(self.top, textvariable=self.folder, width=52, font=look.fonts["text"])
        self.entry.grid(row=1, column=0, sticky="ew", pady=px(4))
        ttk.Button(self.top, text="Choose\u2026", command=self._choose).grid(row=1, column=1, padx=(px(6), 0))
        self.fault = ttk.Label(self.top, style="Alert.TLabel", wraplength=px(460), justify="left")
        self.fault.grid(row=2, column=0, columnspan=2, sticky="w")
        ttk.Label(self.top, text=self._names(), style="Dim.TLabel", wraplength=px(460), justify="left").grid(
            row=3, column=0, columnspan=2, sticky="w", pady=(px(4), px(12))
        )
        ttk.Label(self.top, text=CAUTION_SHORT, style="Dim.TLabel", wraplength=px(460), justify="left").grid(
            row=4, column=0, columnspan=2, sticky="w", pady=(0, px(12))
        )
        buttons = ttk.Frame(self.top)
        buttons.grid(row=5, column=0, columnspan=2, sticky="e")
        ttk.Button(buttons, text="Cancel", command=self.top.destroy).pack(side="left", padx=px(6))
        ttk.Button(buttons, text="Save", style="Main.TButton", command=self.ok).pack(side="left")
        self.top.columnconfigure(0, weight=1)
        self.entry.bind("<Return>", lambda _: self.ok())
        self.entry.focus_set()
        self.entry.icursor("end")

    def ok(self):
        """Check the folder; close, or say beside the field what is wrong."""
        folder = os.path.expanduser(self.folder.get().strip())
        try:
            if not folder:
                self.fault.configure(text="Name a folder")
                return
            check_folder(folder)
        except DigitiseError as error:
            self.fault.configure(text=said(error))
            return
        self.top.destroy()
        self.done(folder)

    def _choose(self):
        chosen = filedialog.askdirectory(
            parent=self.top, initialdir=self.folder.get() or None, title="Folder"
        )
        if chosen:
            self.folder.set(chosen)

    def _names(self):
        """The files that will be there."""
        names = []
        for chart in self.state.charts or ():
            reading = chart.reading
            if reading is None:
                continue
            stem = chart_stem(self.state.picture.path, chart_number=reading.number, n_charts=reading.n_charts)
            n = len(reading.traces)
            tables = [f"{stem}.csv"] if n == 1 else [f"{stem}.1.csv \u2026 {stem}.{n}.csv"]
            names += [*tables, f"{stem}.record.json", f"{stem}.proof.png"]
        return ", ".join(names)


class AskUnsaved:
    """Asks whether to save, to lose the work, or to stay; calls one of three functions."""

    def __init__(self, parent, look, *, save, lose, words="Close"):
        self.top = toplevel(parent, "Unsaved work", look)
        self.save, self.lose = save, lose
        px = look.px
        ttk.Label(self.top, text="What you told of this picture is not saved.", style="Bold.TLabel").pack(
            anchor="w"
        )
        ttk.Label(self.top, text="Save it first?").pack(anchor="w", pady=(px(2), px(14)))
        buttons = ttk.Frame(self.top)
        buttons.pack(anchor="e")
        for title, act, style in (
            (f"{words} without saving", self.lose_it, "TButton"),
            ("Stay", self.top.destroy, "TButton"),
            ("Save\u2026", self.save_it, "Main.TButton"),
        ):
            button = ttk.Button(buttons, text=title, command=act, style=style)
            button.pack(side="left", padx=(px(6), 0))
            button.bind("<Return>", lambda _, act=act: act())
        button.focus_set()
        self.top.grab_set()

    def lose_it(self):
        """Go on without saving."""
        self.top.destroy()
        self.lose()

    def save_it(self):
        """Save, and go on afterwards."""
        self.top.destroy()
        self.save()


def show_keys(parent, look):
    """All keys, by menu."""
    top = toplevel(parent, "All keys", look)
    px = look.px
    columns = [("On the picture", POINTER_KEYS)]
    columns += [(title, [(item.shown, item.words) for item in items]) for title, items in groups().items()]
    heights = [0, 0, 0]
    frames = [ttk.Frame(top) for _ in heights]
    for frame in frames:
        frame.pack(side="left", anchor="n", padx=px(10))
    for title, items in sorted(columns, key=lambda column: -len(column[1])):
        at = heights.index(min(heights))
        block = ttk.Frame(frames[at])
        block.pack(anchor="w", pady=(0, px(12)))
        ttk.Label(block, text=title, style="Bold.TLabel").grid(row=0, column=0, columnspan=2, sticky="w")
        for row, (key, words) in enumerate(items, 1):
            ttk.Label(block, text=key, style="Fixed.TLabel").grid(
                row=row, column=0, sticky="w", padx=(0, px(10))
            )
            ttk.Label(block, text=words, wraplength=px(230), justify="left").grid(
                row=row, column=1, sticky="w"
            )
        heights[at] += len(items) + 2
    top.focus_set()
    return top
