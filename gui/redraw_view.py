"""The reading drawn anew: it follows the pointer and tells bearing, level, error and state."""

import itertools
import tkinter as tk
from dataclasses import replace
from tkinter import ttk

import numpy as np

from digitise._proof_panel import BAND_STRENGTH, Mask, arc_angles

from .colours import rgb_of
from .frame import to_ppm
from .overlay import pointed_shapes, redraw_shapes
from .pen import Pen
from .theme import COLOURS

__all__ = ["RedrawView"]

BAND_RHO = 1.12  # an error may reach far beyond the rim: so far it is drawn


class RedrawView(ttk.Frame):
    """The redraw's pane: a row of traces, the chart, and what is under the pointer.

    window : what is called back: `row_pointed(row)`, `trace_chosen(k)`
    """

    def __init__(self, parent, window):
        super().__init__(parent)
        self.window, self.session, self.look = window, window.session, window.look
        px = self.look.px
        self.traces = ttk.Frame(self)
        self.traces.pack(fill="x")
        self.chosen = tk.IntVar(self, 0)
        self.canvas = tk.Canvas(
            self, background=COLOURS["paper"], highlightthickness=px(2), highlightcolor=COLOURS["focus"],
            highlightbackground=COLOURS["rule"], takefocus=True, width=px(300), height=px(250), borderwidth=0,
        )  # fmt: skip
        self.readout = ttk.Frame(self)
        self.readout.pack(
            side="bottom", fill="x", pady=(px(4), 0)
        )  # before the canvas, which takes what is left
        self.canvas.pack(fill="both", expand=True)
        self.cells = {}
        for column, (name, title) in enumerate(
            (
                ("bearing", "bearing"),
                ("level", "level"),
                ("relative", "below peak"),
                ("error", "95 % error"),
                ("state", "state"),
            )
        ):
            ttk.Label(self.readout, text=title, style="Dim.TLabel").grid(
                row=0, column=column, sticky="w", padx=(0, px(8))
            )
            cell = ttk.Label(self.readout, text="", font=self.look.fonts["bold"], width=8)
            cell.grid(row=1, column=column, sticky="w", padx=(0, px(8)))
            self.readout.columnconfigure(column, weight=1)
            self.cells[name] = cell
        self.pen = Pen(self.canvas, self.look, stronger=1.5)
        self._image = self._waiting = None
        self._buttons = ()
        self.canvas.bind("<Configure>", lambda _: self.refresh())
        self.canvas.bind("<Motion>", self._motion)
        self.canvas.bind("<Button-1>", lambda _: self.canvas.focus_set())
        for key, step in (("Left", -1), ("Down", -1), ("Right", 1), ("Up", 1)):
            self.canvas.bind(f"<{key}>", lambda _, step=step: self._step(step))
            self.canvas.bind(f"<Shift-{key}>", lambda _, step=step: self._step(10 * step))

    def refresh(self):
        """Draw anew, once the present events are done."""
        if self._waiting is None:
            self._waiting = self.after_idle(self._draw)

    def use(self, palette):
        """Use the colours of the overlay on the chart's own paper; the grid in the words' colour, softer."""
        soft = 0.62 * np.array(rgb_of(palette.ink)) + 0.38 * np.array(rgb_of(palette.paper))
        grid = "#{:02x}{:02x}{:02x}".format(*np.round(soft).astype(int))
        self.pen.use(replace(palette, grid=grid))
        self.canvas.configure(background=palette.paper)
        self.refresh()

    def _draw(self):
        self._waiting = None
        self._name_traces()
        reading = self.session.reading
        if reading is None:
            self._image = None
            self.canvas.delete("all")
            words = (
                ""
                if not self.session.open
                else "Not read yet"
                if self.session.fault is None
                else "No reading"
            )
            width, height = self.canvas.winfo_width(), self.canvas.winfo_height()
            self.canvas.create_text(
                width / 2, height / 2, text=words, fill=self.pen.palette.ink, font=self.look.fonts["text"]
            )
            self.show_row()
            return
        self.canvas.delete("nothing")
        self._set_panel(reading.grid)
        self._draw_band(reading)
        shapes = redraw_shapes(self.session, self._place, words_rho=self._words_rho, scale_px=self.look.unit)
        self.pen.draw(shapes)
        self.show_row()

    def _set_panel(self, grid):
        """Place the drawn arc as large as the pane allows."""
        width, height = max(self.canvas.winfo_width(), 50), max(self.canvas.winfo_height(), 50)
        angle = np.radians(arc_angles(grid, 181))
        u, v = np.append(np.sin(angle), 0), np.append(-np.cos(angle), 0)
        font, gap = (
            self.look.fonts["text"],
            self.look.px(3),
        )  # from the rim to the middle of a bearing's words:
        self._room = font.measure("-330\u00b0") / 2 + gap, font.metrics("linespace") / 2 + gap
        across, down = width - 4 * self._room[0], height - 4 * self._room[1]
        self._radius = max(min(across / np.ptp(u), down / np.ptp(v)), 20.0)
        self._x0 = width / 2 - self._radius * (u.max() + u.min()) / 2
        self._y0 = height / 2 - self._radius * (v.max() + v.min()) / 2
        self._grid = grid

    def _words_rho(self, plane_deg):
        """Radius at which the words of a bearing stand clear of the rim."""
        angle = np.radians(plane_deg)
        away = abs(np.sin(angle)) * self._room[0] + abs(np.cos(angle)) * self._room[1]
        return 1 + away / self._radius

    def _panel(self, rho, plane_deg):
        angle = np.radians(plane_deg)
        return self._x0 + self._radius * rho * np.sin(angle), self._y0 - self._radius * rho * np.cos(angle)

    def _place(self, x_px, y_px):
        return self._panel(*self._grid.to_plane(x_px, y_px))

    def _draw_band(self, reading):
        """The 95 % error as a band, under everything."""
        pixels = np.empty(
            (max(self.canvas.winfo_height(), 2), max(self.canvas.winfo_width(), 2), 3), np.uint8
        )
        pixels[:] = rgb_of(self.pen.palette.paper)
        if self.session.chart.fresh:
            for trace, colour in zip(reading.traces, itertools.cycle(self.pen.palette.traces), strict=False):
                mask = Mask(pixels)
                mask.quads(self._band(reading, trace))
                mask.lay(rgb_of(colour), BAND_STRENGTH)
        self._image = tk.PhotoImage(master=self.canvas, data=to_ppm(pixels), format="PPM")
        self.canvas.delete("all")
        self.canvas.create_image(0, 0, image=self._image, anchor="nw", tags="band")

    def _band(self, reading, trace):
        """(n, 4, 2) areas from row to row between the ends of the error."""
        table = trace.table
        plane = reading.bearing.to_plane(table.angle_deg)
        known = np.isfinite(table.chart_db)
        level, error = np.where(known, table.chart_db, 0.0), np.where(known, table.error95_db, 0.0)
        ends = [np.clip(reading.scale.rho(level + side * error), 0, BAND_RHO) for side in (-1, 1)]
        low, high = (np.stack(self._panel(rho, plane), axis=1) for rho in ends)
        following = (np.arange(len(known)) + 1) % len(known)
        corners = np.stack([low, low[following], high[following], high], axis=1)
        return corners[known & known[following]]

    def _name_traces(self):
        """A button a trace, with its colour, number, ink and dash."""
        reading = self.session.reading
        traces = reading.traces if reading is not None else ()
        key = tuple((trace.ink, trace.dash) for trace in traces) + self.pen.palette.traces
        if key != self._buttons:
            self._buttons = key
            for child in self.traces.winfo_children():
                child.destroy()
            for k, trace in enumerate(traces):
                colour = self.pen.palette.traces[k % len(self.pen.palette.traces)]
                tk.Frame(self.traces, background=colour, width=self.look.px(14), height=self.look.px(4)).pack(
                    side="left", padx=(self.look.px(4), 0)
                )
                words = f"{trace.ink} {trace.dash}"
                if len(traces) == 1:
                    ttk.Label(self.traces, text=words).pack(
                        side="left", padx=self.look.px(6), pady=self.look.px(3)
                    )
                    continue
                ttk.Radiobutton(
                    self.traces,
                    text=f"{k + 1}  {words}",
                    variable=self.chosen,
                    value=k,
                    style="Tab.Toolbutton",
                    command=lambda k=k: self.window.trace_chosen(k),
                ).pack(side="left")
        self.chosen.set(self.session.trace)

    # --- what is pointed at

    def _motion(self, event):
        reading, trace = self.session.reading, self.session.shown_trace
        if trace is None or self._image is None:
            return
        plane = np.degrees(np.arctan2(event.x - self._x0, self._y0 - event.y))
        self.window.row_pointed(row_at(trace.table, float(reading.bearing.from_plane(plane))))

    def _step(self, step):
        trace = self.session.shown_trace
        if trace is not None:
            row = 0 if self.session.row is None else self.session.row + step
            self.window.row_pointed(row % len(trace.table.angle_deg))
        return "break"

    def show_row(self):
        """Tell the row being pointed at, and draw its place."""
        trace, row = self.session.shown_trace, self.session.row
        words = dict.fromkeys(self.cells, "")
        if trace is not None and row is not None and row < len(trace.table.angle_deg):
            words = row_words(self.session.reading, trace.table, row)
        for name, cell in self.cells.items():
            cell.configure(text=words[name])
        if self.session.reading is not None and self._image is not None:
            self.pen.draw(pointed_shapes(self.session, self._place), tag="pointed")


def row_at(table, bearing_deg):
    """Index of the row nearest to a printed bearing."""
    n = len(table.angle_deg)
    return round(bearing_deg / (360 / n)) % n


def row_words(reading, table, row):
    """The row as a person reads it: bearing, level, relative level, error, state."""
    bearing = float(table.angle_deg[row])
    said = bearing - 360 if reading.bearing.signed and bearing > 180 else bearing
    state = str(table.state[row])
    words = {
        "bearing": f"{said:g}\u00b0",
        "state": state,
        "level": "\u2013",
        "relative": "\u2013",
        "error": "\u2013",
    }
    if state != "missing":
        bound = "\u2264 " if state == "floor" else ""
        words |= {
            "level": f"{bound}{table.chart_db[row]:.2f} {reading.scale.unit or 'dB'}",
            "relative": f"{-table.relative_db[row] + 0.0:.2f} dB",
            "error": f"\u00b1 {table.error95_db[row]:.2f} dB",
        }
    return words
