"""The lists beside the picture: reasons to look, the table, the trade's figures."""

from tkinter import ttk

import numpy as np

from digitise.caution import CAUTION_SHORT
from digitise.figures import figures_of
from digitise.table import write_table

from .review_list import ReviewList
from .theme import COLOURS

__all__ = ["Lists"]

COLUMNS = (  # column of the table, heading
    ("angle_deg", "bearing \u00b0"),
    ("relative_db", "relative dB"),
    ("error95_db", "error95 dB"),
    ("chart_db", "chart dB"),
    ("state", "state"),
)


class Lists(ttk.Frame):
    """Three pages: review, table, figures."""

    def __init__(self, parent, window):
        super().__init__(parent)
        self.window, self.session, self.look = window, window.session, window.look
        self.book = ttk.Notebook(self)
        self.book.pack(fill="both", expand=True)
        self.review = ReviewList(self.book, window)
        self.table = TableView(self.book, window)
        self.figures = FiguresView(self.book, window)
        for page, title in ((self.review, "Review"), (self.table, "Table"), (self.figures, "Figures")):
            self.book.add(page, text=title)
        self.book.enable_traversal()
        self.book.bind("<<NotebookTabChanged>>", lambda _: self.refresh())

    def refresh(self):
        """Show the session; only the page in sight is worked out."""
        n = self.review.refresh()
        self.book.tab(0, text=f"Review ({n})" if n else "Review")
        page = self.book.index("current")
        if page == 1:
            self.table.refresh()
        elif page == 2:
            self.figures.refresh()

    def focus_page(self):
        """Give the keyboard to the list in sight."""
        page = (self.review, self.table, self.figures)[self.book.index("current")]
        page.tree.focus_set()
        if page is not self.review and page.tree.get_children() and not page.tree.focus():
            page.tree.focus(page.tree.get_children()[0])

    def show_row(self):
        """Show the row being pointed at."""
        if self.book.index("current") == 1:
            self.table.show_row()


class TableView(ttk.Frame):
    """The table of the trace shown, with copy."""

    def __init__(self, parent, window):
        super().__init__(parent)
        self.window, self.session, self.look = window, window.session, window.look
        px = self.look.px
        top = ttk.Frame(self)
        top.pack(side="bottom", fill="x", pady=(px(3), 0))
        ttk.Button(top, text="Copy the table", style="Small.TButton", command=window.actions.copy_table).pack(
            side="left"
        )
        self.note = ttk.Label(top, style="Dim.TLabel")
        self.note.pack(side="left", padx=px(8))
        _caution(self, self.look)
        names = [name for name, _ in COLUMNS]
        self.tree = ttk.Treeview(self, columns=names, show="headings", selectmode="extended", height=4)
        for name, heading in COLUMNS:
            self.tree.heading(name, text=heading)
            width = max(
                self.look.fonts["small"].measure(heading), self.look.fonts["text"].measure("bridged")
            ) + px(10)
            self.tree.column(
                name, width=width, minwidth=px(40), anchor="center" if name == "state" else "e", stretch=True
            )
        bar = ttk.Scrollbar(self, orient="vertical", command=self.tree.yview)
        self.tree.configure(yscrollcommand=bar.set)
        bar.pack(side="right", fill="y")
        self.tree.pack(fill="both", expand=True)
        self.tree.tag_configure("bridged", foreground="#6a4a00")
        self.tree.tag_configure("floor", foreground="#7a1fa2")
        self.tree.tag_configure("missing", foreground=COLOURS["dim"])
        self.tree.bind("<<TreeviewSelect>>", self._selected)
        self.tree.bind("<Control-a>", lambda _: self.tree.selection_set(self.tree.get_children()))
        self.tree.bind("<Control-c>", lambda _: self._copy_rows())
        self._shown, self._by_pointer = None, False

    def refresh(self):
        """Show the rows of the trace."""
        trace = (
            self.session.shown_trace if self.session.chart is not None and self.session.chart.fresh else None
        )
        if trace is self._shown:
            return
        self._shown = trace
        self.tree.delete(*self.tree.get_children())
        for k, line in enumerate(write_table(trace.table).splitlines()[1:] if trace is not None else ()):
            values = line.split(",")
            self.tree.insert(
                "", "end", iid=str(k), values=[value or "\u2013" for value in values], tags=(values[-1],)
            )
        self.show_row()
        self.note.configure(
            text=f"{len(self.tree.get_children())} rows" if trace is not None else "no table yet"
        )

    def show_row(self):
        """Select the row being pointed at."""
        row = self.session.row
        if row is not None and self.tree.exists(str(row)) and self.tree.selection() != (str(row),):
            self._by_pointer = True
            self.tree.selection_set(str(row))
            self.tree.see(str(row))

    def _selected(self, _):
        chosen = self.tree.selection()
        if self._by_pointer:
            self._by_pointer = False
        elif len(chosen) == 1:
            self.window.row_pointed(int(chosen[0]))

    def _copy_rows(self):
        chosen = self.tree.selection()
        rows = sorted(int(item) for item in chosen) if len(chosen) > 1 else None
        self.window.actions.copy_table(rows)


class FiguresView(ttk.Frame):
    """The trade's figures of the trace shown, each with its error or the reason why there is none."""

    def __init__(self, parent, window):
        super().__init__(parent)
        self.session, self.look = window.session, window.look
        px = self.look.px
        _caution(self, self.look)
        self.tree = ttk.Treeview(self, columns=("title", "value"), show="", selectmode="browse", height=4)
        self.tree.column("title", width=px(210), stretch=True)
        self.tree.column("value", width=px(150), stretch=True)
        bar = ttk.Scrollbar(self, orient="vertical", command=self.tree.yview)
        self.tree.configure(yscrollcommand=bar.set)
        bar.pack(side="right", fill="y")
        self.tree.pack(fill="both", expand=True)
        self.tree.tag_configure("absent", foreground=COLOURS["dim"])
        self._shown = None

    def refresh(self):
        """Show the figures, worked out when they come into sight."""
        chart = self.session.chart
        trace = self.session.shown_trace if chart is not None and chart.fresh else None
        if trace is self._shown:
            return
        self._shown = trace
        self.tree.delete(*self.tree.get_children())
        if trace is None:
            return
        caption = self.session.reading.caption.lower()
        named = [cut for cut in ("azimuth", "elevation") if cut in caption]
        for item in figures_of(trace.table, cut=named[0] if len(named) == 1 else ""):
            self.tree.insert(
                "", "end", values=(item.title, figure_words(item)), tags=("absent",) if item.absent else ()
            )


def _caution(page, look):
    """The caution at the foot of a page."""
    label = ttk.Label(page, text=CAUTION_SHORT, style="Dim.TLabel", justify="left", wraplength=look.px(380))
    label.pack(side="bottom", fill="x", pady=(look.px(3), 0))
    page.bind(
        "<Configure>", lambda event: label.configure(wraplength=max(event.width - look.px(6), 50)), add="+"
    )


def figure_words(item):
    """A figure's value and error, or the reason why there is none."""
    if item.absent:
        return item.reason
    value, error = item.rounded()
    at = f" at {item.at_deg:.0f}\u00b0" if np.isfinite(item.at_deg) else ""
    unit = "\u00b0" if item.unit == "deg" else f" {item.unit}"
    return f"{item.bound} {value} \u00b1 {error}{unit}{at}".strip()
