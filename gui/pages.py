"""The pages of a PDF as small pictures to choose from."""

import tkinter as tk
from tkinter import ttk

import numpy as np

from .frame import to_ppm
from .jobs import MOST_PAGES
from .theme import COLOURS, toplevel

__all__ = ["SIZE_PX", "PageChooser"]

COLUMNS, SIZE_PX = 4, 150


class PageChooser:
    """A window of thumbnails; `chosen(page)` is called with the one that is clicked."""

    def __init__(self, parent, look, n_pages, thumbnails, *, first, here, chosen, more):
        self.top = toplevel(parent, "Choose a page", look)
        self.chosen = chosen
        px = look.px
        self._images, self.buttons = [], []
        grid = ttk.Frame(self.top)
        grid.pack(fill="both", expand=True)
        for k, (page, pixels) in enumerate(thumbnails):
            shown = np.full((px(SIZE_PX), px(SIZE_PX) // 2, 3), 235, np.uint8) if pixels is None else pixels
            image = tk.PhotoImage(master=self.top, data=to_ppm(shown), format="PPM")
            self._images.append(image)
            button = tk.Button(
                grid,
                image=image,
                text=f"page {page}",
                compound="top",
                font=look.fonts["text"],
                relief="flat",
                background=COLOURS["accent-soft"] if page == here else COLOURS["paper"],
                borderwidth=0,
                highlightthickness=px(2),
                highlightcolor=COLOURS["focus"],
                highlightbackground=COLOURS["rule"],
                activebackground=COLOURS["accent-soft"],
                command=lambda page=page: self.choose(page),
                width=px(SIZE_PX) + px(8),
                height=px(SIZE_PX) + look.fonts["text"].metrics("linespace") + px(8),
            )
            button.bind("<Return>", lambda _, page=page: self.choose(page))
            button.grid(row=k // COLUMNS, column=k % COLUMNS, padx=px(4), pady=px(4))
            self.buttons.append(button)
        row = ttk.Frame(self.top)
        row.pack(fill="x", pady=(px(8), 0))
        ttk.Label(row, text=f"{n_pages} pages", style="Dim.TLabel").pack(side="left")
        if first + len(thumbnails) <= n_pages:
            ttk.Button(row, text="Later pages", command=lambda: self._more(more, first + MOST_PAGES)).pack(
                side="right"
            )
        if first > 1:
            ttk.Button(row, text="Earlier pages", command=lambda: self._more(more, first - MOST_PAGES)).pack(
                side="right"
            )
        if self.buttons:
            self.buttons[0].focus_set()

    def choose(self, page):
        """Take a page."""
        self.top.destroy()
        self.chosen(page)

    def _more(self, more, first):
        self.top.destroy()
        more(first)
