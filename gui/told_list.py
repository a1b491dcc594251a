"""The short lists among the fields: inks to choose from, and the marks, pins and covers that were told."""

import tkinter as tk
from tkinter import ttk

__all__ = ["ToldList", "TraceList"]

MOST_INKS = 8
LEAST_INK = 0.25  # outer radii: shorter inks are letters


class ToldList:
    """Marks, pins or covers, a line each, with a button to take one away."""

    def __init__(self, panel, row, kind, title):
        self.panel, self.session, self.look, self.kind = panel, panel.session, panel.look, kind
        self.title = ttk.Label(panel.body, text=title, style="Panel.TLabel")
        self.title.grid(row=row, column=0, sticky="nw", pady=self.look.px(2))
        self.frame = ttk.Frame(panel.body, style="Panel.TFrame")
        self.frame.grid(row=row, column=1, columnspan=2, sticky="ew")
        self.fault = ttk.Label(panel.body, style="Fault.TLabel", wraplength=self.look.px(230), justify="left")
        self.fault.grid(row=row + 1, column=0, columnspan=3, sticky="w")
        self._shown = None

    def refresh(self):
        """Show what was told, and which one is held."""
        settings = self.session.settings
        lines = {
            "mark": [f"{mark.level_db:g} dB" for mark in settings.marks],
            "pin": [f"{x:.1f}, {y:.1f}" for x, y in settings.pins],
            "cover": [f"{w:.0f} \u00d7 {h:.0f} px" for _, _, w, h in settings.covers],
        }[self.kind]
        held = self.session.held
        shown = (tuple(lines), held if held is not None and held[0] == self.kind else None)
        if shown == self._shown:
            return
        self._shown = shown
        for child in self.frame.winfo_children():
            child.destroy()
        if not lines:
            ttk.Label(self.frame, text="none", style="PanelDim.TLabel").grid(row=0, column=0, sticky="w")
        for k, words in enumerate(lines):
            mark = "\u25c6 " if held == (self.kind, k) else ""
            button = ttk.Button(
                self.frame, text=mark + words, style="Small.TButton", command=lambda k=k: self._hold(k)
            )
            button.grid(row=k, column=0, sticky="ew", pady=1)
            remove = ttk.Button(
                self.frame, text="\u00d7", style="Small.TButton", command=lambda k=k: self._drop(k)
            )
            remove.grid(row=k, column=1, padx=(self.look.px(3), 0), pady=1)

    def say(self, words):
        """Write a fault under the list, or take it away."""
        self.fault.configure(text=words)
        (self.fault.grid if words else self.fault.grid_remove)()

    def _hold(self, k):
        self.session.held = (self.kind, k)
        self.panel.window.show_held()

    def _drop(self, k):
        self.session.held = (self.kind, k)
        self.panel.window.actions.drop_held()


class TraceList:
    """The inks on the chart, each to be chosen; with none chosen every trace is read."""

    def __init__(self, panel, row):
        self.panel, self.session, self.look = panel, panel.session, panel.look
        self.frame = ttk.Frame(panel.body, style="Panel.TFrame")
        self.frame.grid(row=row, column=0, columnspan=3, sticky="ew")
        self._shown = None

    def refresh(self):
        """Show the inks found and told."""
        shown = self._inks()
        if shown == self._shown:
            return
        self._shown = shown
        for child in self.frame.winfo_children():
            child.destroy()
        told = any(chosen for _, _, chosen in shown)
        words = (
            "only the chosen inks are read" if told else "every trace is read; choose inks to read only those"
        )
        ttk.Label(
            self.frame,
            text=words if shown else "",
            style="PanelDim.TLabel",
            wraplength=self.look.px(228),
            justify="left",
        ).pack(anchor="w")
        for ink, traced, chosen in shown:
            line = ttk.Frame(self.frame, style="Panel.TFrame")
            line.pack(fill="x")
            variable = tk.BooleanVar(line, chosen)
            box = ttk.Checkbutton(
                line, text=f"{ink}{traced}", variable=variable, style="Panel.TCheckbutton",
                command=lambda ink=ink: self._toggle(ink),
            )  # fmt: skip
            box.variable = variable  # Tk does not hold it
            swatch = tk.Frame(
                line, background=ink, width=self.look.px(22), height=self.look.px(12),
                highlightbackground=self.panel.window.colours["rule"], highlightthickness=1,
            )  # fmt: skip
            swatch.pack(side="left", padx=(0, self.look.px(6)))
            box.pack(side="left")

    def _inks(self):
        """(ink, words, chosen) of every ink to show."""
        chart = self.session.chart
        if chart is None:
            return ()
        told = chart.settings.inks
        reading = chart.reading
        traces = {}
        for trace in reading.traces if reading is not None else ():
            traces.setdefault(trace.ink, []).append(trace.dash)
        outer = chart.grid.outer_px if chart.grid is not None else 0
        found = [ink.hex for ink in chart.seen.inks if ink.length_px > LEAST_INK * outer][:MOST_INKS]
        order = [*traces, *(ink for ink in (*told, *found) if ink not in traces)]
        return tuple(
            (ink, f"  {', '.join(traces[ink])}" if ink in traces else "", ink in told)
            for ink in dict.fromkeys(order)
        )

    def _toggle(self, ink):
        self.session.toggle_ink(ink)
        self.panel.window.changed()
