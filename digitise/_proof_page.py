"""The sheet of the proof: text, numbers and parts laid out from the top down, 1400 px wide."""

import textwrap

import numpy as np
from PIL import Image, ImageDraw

from ._proof_panel import ERROR_TICKS_DB, draw_sample, error_place, on_arc
from ._proof_text import font, printable, shortened
from .caution import CAUTION_SHORT

__all__ = ["MARGIN_PX", "PANEL_PX", "STRIP_PX", "WIDTH_PX", "Page"]

WIDTH_PX = 1400
ROOM_PX, ROOM_FOR_TRACE_PX = 1700, 110  # height of the sheet before it is cut to what was laid on it
MARGIN_PX = 24
PANEL_PX = (WIDTH_PX - 3 * MARGIN_PX) // 2
STRIP_PX = 104
TEXT, DIM, RULE, PAPER = (24, 28, 34), (96, 104, 114), (208, 212, 218), (255, 255, 255)
ALERT, CALM = (160, 60, 0), (0, 95, 80)
STATE_WORDS = {
    "seen": "seen: read from ink",
    "bridged": "bridged: ink hidden, interpolated",
    "floor": "floor: at or below the centre, an upper limit",
    "missing": "missing: no value",
}
FIGURES_SHOWN = {  # key of `figures.FIGURES` -> short title
    "beamwidth": "half-power width",
    "beamwidth10": "width at -10 dB",
    "ftb": "front-to-back",
    "ftb30": "the same, 180 \u00b1 30\u00b0",
    "sidelobe_worst": "worst side lobe",
    "null_deepest": "deepest null",
    "tilt": "tilt below horizon",
    "ripple": "ripple, max - min",
}
FIGURE_CELL_PX = 185
MAX_REASONS = 12  # the record holds them all


class Page:
    """The sheet that the parts are laid on, from the top down; a picture of pixels.

    What is laid on it goes through `draw` and `put`, so that a sheet of another kind need only answer these.
    """

    def __init__(self, reading, record, colours, paper):
        self.reading, self.record, self.colours, self.paper = reading, record, colours, paper
        self.y = MARGIN_PX
        self.begin(ROOM_PX + ROOM_FOR_TRACE_PX * len(reading.traces))

    def begin(self, height):
        """Make an empty sheet and its pen."""
        self.image = Image.new("RGB", (WIDTH_PX, height), PAPER)
        self.draw = ImageDraw.Draw(self.image)

    def blank(self, width, height):
        """An empty panel in the chart's paper."""
        panel = np.empty((height, width, 3), np.uint8)
        panel[:] = np.round(self.paper)
        return panel

    def over(self, panel, rgb, view):
        """The panel that the reading is laid over: the picture's part in a `View`, whose px `panel` holds."""
        return panel

    def put(self, panel, x, y):
        """Lay a finished panel on the sheet."""
        self.image.paste(Image.fromarray(panel), (x, y))

    def text(self, x, y, words, *, size=16, fill=TEXT, anchor="la"):
        """Put a line of text; the anchor is Pillow's."""
        self.draw.text((x, y), printable(words), font=font(size), fill=fill, anchor=anchor)

    def head(self):
        """File, chart, and how radius and bearing were taken."""
        chart, reading = self.record["chart"], self.reading
        which = f"   chart {chart['number']} of {chart['of']}" if chart["of"] > 1 else ""
        page = f"   page {chart['page']}" if chart["page"] else ""
        self.text(MARGIN_PX, self.y, shortened(chart["file"], 70) + page + which, size=26)
        if reading.caption:
            self.text(
                WIDTH_PX - MARGIN_PX,
                self.y + 6,
                shortened(reading.caption, 60),
                size=18,
                fill=DIM,
                anchor="ra",
            )
        self.y += 38
        self.text(MARGIN_PX, self.y, _scale_words(reading) + "   " + _bearing_words(reading), fill=DIM)
        self.y += 34

    def panels(self, shown, plain, anew, over):
        """The two panels with their titles, ring levels, bearings, and the places of the reasons."""
        right = MARGIN_PX * 2 + PANEL_PX
        self.text(MARGIN_PX, self.y, "The reading over the chart")
        self.text(
            right,
            self.y,
            "The same reading drawn anew: rings and bearings as they were read, 95 % error as a band",
        )
        self.y += 26
        for x, panel in ((MARGIN_PX, shown), (right, plain)):
            self.put(panel, x, self.y)
            self.draw.rectangle(
                (x - 1, self.y - 1, x + panel.shape[1], self.y + panel.shape[0]), outline=RULE
            )
        self._label_grid(right, anew)
        self._number_traces(right, anew)
        self._number_places(over)
        self.y += plain.shape[0] + 18

    def _label_grid(self, left, to_panel):
        grid, scale, bearing = self.reading.grid, self.reading.scale, self.reading.bearing
        ink = TEXT if np.mean(self.paper) > 127 else (236, 238, 242)
        halo = tuple(int(v) for v in np.round(self.paper))
        signed = bearing.signed

        def put(rho, plane_deg, words, size):
            x, y = to_panel(np.array([rho]), np.array([float(plane_deg)]))
            place = (left + float(x[0]), self.y + float(y[0]))
            self.draw.text(
                place, words, font=font(size), fill=ink, anchor="mm", stroke_width=2, stroke_fill=halo
            )

        for angle in range(0, 360, 30):
            plane = float(bearing.to_plane(np.array([float(angle)]))[0])
            if on_arc(grid, plane):
                put(1.075, plane, f"{angle - 360 if signed and angle > 180 else angle}\u00b0", 16)
        along = self._quiet_spoke()
        last = None
        for rho in grid.ring_rho:
            if last is None or (last - rho) * grid.outer_px >= 0.085 * grid.outer_px:
                put(rho, along, f"{round(float(scale.level(np.array([rho]))[0]), 1) + 0.0:g}", 14)
                last = rho

    def _quiet_spoke(self):
        """Plane angle, half-way between labels, along which the traces leave the ring levels most room."""
        grid, reading = self.reading.grid, self.reading
        free = []
        for angle in np.arange(15, 360, 30.0):
            if not on_arc(grid, angle):
                continue
            clear = 1.0
            for trace in reading.traces:
                near = np.abs((reading.bearing.to_plane(trace.table.angle_deg) - angle + 180) % 360 - 180) < 6
                level = trace.table.chart_db[near & np.isfinite(trace.table.chart_db)]
                if level.size:
                    rho = reading.scale.rho(level)
                    clear = min(clear, float(np.abs(rho[:, None] - grid.ring_rho[None]).min()))
            free.append((round(clear, 2), -abs(angle - 75), angle))
        return max(free)[2] if free else 15.0

    def _number_traces(self, left, to_panel):
        """The number of each trace where the others are farthest, so that colour alone need not tell."""
        reading = self.reading
        if len(reading.traces) < 2:
            return
        halo = tuple(int(v) for v in np.round(self.paper))
        levels = np.array([trace.table.chart_db for trace in reading.traces])
        rho = np.clip(reading.scale.rho(np.where(np.isfinite(levels), levels, 0.0)), 0, 1.5)
        for k, trace in enumerate(reading.traces):
            apart = np.nanmin(
                np.where(np.isfinite(levels), np.abs(rho - rho[k]), 2.0)[np.arange(len(rho)) != k], axis=0
            )
            worth = np.where(trace.table.state == "seen", np.minimum(apart, 0.2) + 0.3 * rho[k], -1.0)
            at = int(worth.argmax())
            plane = reading.bearing.to_plane(trace.table.angle_deg[at : at + 1])
            x, y = to_panel(rho[k, at : at + 1] - 0.05, plane)
            place = (left + float(x[0]), self.y + float(y[0]))
            self.draw.text(
                place,
                str(k + 1),
                font=font(20),
                fill=self.colours[k],
                anchor="mm",
                stroke_width=2,
                stroke_fill=halo,
            )

    def _number_places(self, over):
        """Small numbered rings on the picture where a reason to look has its place."""
        for number, item in enumerate(_reasons(self.reading), 1):
            if item.x_px is None or item.y_px is None:
                continue
            rho, plane = self.reading.grid.to_plane(item.x_px, item.y_px)
            x, y = (float(v) for v in over(rho, plane))
            x, y = MARGIN_PX + x, self.y + y
            self.draw.ellipse((x - 11, y - 11, x + 11, y + 11), outline=ALERT, width=2)
            self.draw.text(
                (x + 16, y),
                str(number),
                font=font(16),
                fill=ALERT,
                anchor="lm",
                stroke_width=3,
                stroke_fill=PAPER,
            )

    def strip(self, strip):
        """The error by bearing."""
        left = MARGIN_PX + 60
        self.text(MARGIN_PX, self.y, "95 % error by bearing, dB")
        self.y += 26
        self.put(strip, left, self.y)
        self.draw.rectangle((left - 1, self.y - 1, left + strip.shape[1], self.y + STRIP_PX), outline=RULE)
        for level in ERROR_TICKS_DB:
            y = self.y + (1 - float(error_place(level))) * (STRIP_PX - 1)
            self.text(left - 8, y, f"{level:g}", size=14, fill=DIM, anchor="rm")
        self.y += STRIP_PX + 4
        for bearing in range(0, 361, 30):
            said = bearing - 360 if self.reading.bearing.signed and bearing > 180 else bearing
            x = left + bearing / 360 * (strip.shape[1] - 1)
            self.text(x, self.y, f"{said}\u00b0", size=14, fill=DIM, anchor="ma")
        self.y += 32

    def traces(self):
        """One line a trace with its figures, and what the states look like."""
        for k, (trace, node) in enumerate(zip(self.reading.traces, self.record["traces"], strict=True)):
            self._sample(MARGIN_PX, "seen", self.colours[k])
            number = f"{k + 1}   " if len(self.reading.traces) > 1 else ""
            name = f"  {shortened(trace.name, 40)}" if trace.name else ""
            self.text(
                MARGIN_PX + 52,
                self.y,
                f"{number}{node['table']}{name}   ink {trace.ink}, {trace.dash}",
                size=18,
            )
            self.y += 26
            self.text(MARGIN_PX + 52, self.y, _row_words(node), fill=DIM)
            self.y += 26
            for column, (title, value) in enumerate(_figure_cells(node)):
                x = MARGIN_PX + 52 + column * FIGURE_CELL_PX
                self.text(x, self.y, title, size=13, fill=DIM)
                self.text(x, self.y + 17, value, size=16)
            self.y += 48
        x = MARGIN_PX
        colour = self.colours[0]
        for state, words in STATE_WORDS.items():
            self._sample(x, state, colour)
            self.text(x + 52, self.y, words, size=14, fill=DIM)
            x += 52 + int(font(14).getlength(words)) + 36
        self.y += 34

    def _sample(self, x, state, colour):
        sample = self.blank(44, 20)
        draw_sample(sample, state, colour)
        self.put(sample, x, self.y)

    def review(self):
        """The reasons to look, and the caution."""
        self.draw.line((MARGIN_PX, self.y, WIDTH_PX - MARGIN_PX, self.y), fill=RULE)
        self.y += 14
        sentences = self.record["review"]
        if not sentences:
            self.text(
                MARGIN_PX, self.y, "Review: nothing; the tool is sure of this reading.", size=18, fill=CALM
            )
            self.y += 30
        else:
            self.text(MARGIN_PX, self.y, f"Review: {len(sentences)} to look at", size=18, fill=ALERT)
            self.y += 28
        for number, sentence in enumerate(sentences[:MAX_REASONS], 1):
            for line in textwrap.wrap(f"{number}  {sentence}", 165, subsequent_indent="   "):
                self.text(MARGIN_PX, self.y, line)
                self.y += 22
        if len(sentences) > MAX_REASONS:
            self.text(MARGIN_PX, self.y, f"and {len(sentences) - MAX_REASONS} more in the record")
            self.y += 22
        self.y += 8
        self.text(MARGIN_PX, self.y, CAUTION_SHORT, size=14, fill=DIM)
        self.y += 20

    def finish(self):
        """The sheet, cut to what was laid on it."""
        return self.image.crop((0, 0, WIDTH_PX, self.y + MARGIN_PX // 2))


def _reasons(reading):
    """The reasons in the order of `Reading.review`."""
    return [*reading.reasons, *(item for trace in reading.traces for item in trace.reasons)]


def _scale_words(reading):
    scale = reading.scale
    unit = scale.unit or "dB"
    outer, centre = float(scale.level(np.ones(1))[0]), scale.centre_db
    ends = f"{outer:.4g} {unit} at the outermost ring"
    if np.isfinite(centre):
        ends += f", {centre:.4g} {unit} at the centre"
    return f"Scale: {scale.law} law, {ends} (from {scale.source})"


def _bearing_words(reading):
    bearing = reading.bearing
    turn = "clockwise" if bearing.turn == "cw" else "counter-clockwise"
    zero = f"0\u00b0 is {bearing.zero_deg:.4g}\u00b0 clockwise from the chart's top"
    return f"Bearing: {zero}, growing {turn} (from {bearing.source})"


def _row_words(node):
    """Peak, error and states of one trace."""
    if node["peak_db"] is None:
        return "no row has a value"
    rows = ", ".join(f"{count} {state}" for state, count in node["rows"].items() if count)
    error = f"median error {node['median_error95_db']:.2g} dB"
    peak = f"peak {round(node['peak_db'], 2) + 0.0:.2f} dB at {node['peak_deg']:g}\u00b0"
    return f"{peak};  {error};  rows: {rows}"


def _figure_cells(node):
    """Title and value with error of each figure that one trace has."""
    for key, title in FIGURES_SHOWN.items():
        figure = node["figures"][key]
        if figure["value"] is not None:
            unit = "\u00b0" if figure["unit"] == "deg" else f" {figure['unit']}"
            bound = f"{figure['bound']} " if figure.get("bound") else ""
            yield title, f"{bound}{figure['value']} \u00b1 {figure['error95']}{unit}"
