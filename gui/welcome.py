"""What an empty window says: how to begin, and the samples."""

import os
from tkinter import ttk

from .theme import COLOURS

__all__ = ["Welcome"]

MOST_SAMPLES = 8


class Welcome(ttk.Frame):
    """Three ways to begin, and the sample charts that come with the program."""

    def __init__(self, parent, window, samples):
        super().__init__(parent)
        px = window.look.px
        middle = ttk.Frame(self)
        middle.place(relx=0.5, rely=0.45, anchor="center")
        ttk.Label(middle, text="From a picture of a radiation pattern to a table", style="Title.TLabel").pack(
            anchor="w"
        )
        ways = ["Open a picture, a PDF or an earlier record", "Paste one with Ctrl+V"]
        if window.drops:
            ways.append("Drop one on this window")
        for words in ways:
            ttk.Label(middle, text=f"\u2013  {words}").pack(anchor="w", pady=(px(6), 0))
        ttk.Button(middle, text="Open\u2026", style="Main.TButton", command=window.actions.open_picture).pack(
            anchor="w", pady=px(14)
        )
        if samples:
            ttk.Label(
                middle, text="Or try a sample; the antennas are invented:", foreground=COLOURS["dim"]
            ).pack(anchor="w")
            row = ttk.Frame(middle)
            row.pack(anchor="w", pady=px(4))
            for k, path in enumerate(samples[:MOST_SAMPLES]):
                ttk.Button(
                    row, text=os.path.splitext(os.path.basename(path))[0], style="Small.TButton",
                    command=lambda path=path: window.actions.open_path(path),
                ).grid(row=k // 4, column=k % 4, padx=(0, px(6)), pady=px(2), sticky="w")  # fmt: skip
