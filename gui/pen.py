"""Draws `overlay.Shape`s on a Tk canvas: style to colour, width, dash and marker."""

import numpy as np

from .colours import Palette
from .theme import COLOURS

__all__ = ["Pen"]

MARK, PIN = COLOURS["mark"], COLOURS["pin"]
STALE = "#8a929b"
# style -> (width, dash) in design px
LINES = {
    "grid-outer": (1.4, (7, 4)),
    "grid-ring": (1.0, (5, 4)),
    "grid-spoke": (1.0, (1, 5)),
    "grid-stale-outer": (1.6, (3, 3)),
    "grid-stale-ring": (1.0, (3, 3)),
    "grid-stale-spoke": (1.0, (1, 6)),
    "zero": (2.2, None),
    "trace-seen": (1.4, None),
    "trace-bridged": (1.2, (4, 3)),
    "trace-seen-stale": (1.4, (2, 3)),
    "trace-bridged-stale": (1.4, (2, 5)),
}
MARKER_PX = 4.2
MARKED_PX = 7.0


class Pen:
    """Draws shapes in the colours of one reading.

    canvas : tk.Canvas; look : theme.Look; stronger : factor of the traces' widths
    """

    def __init__(self, canvas, look, *, stronger=1.0):
        self.canvas, self.look, self.stronger = canvas, look, stronger
        self.palette = Palette(
            grid="#2f6fb0", traces=("#b3005e",), ink=COLOURS["text"], paper=COLOURS["paper"]
        )

    def use(self, palette):
        """Take the colours that stand off a picture, a `colours.Palette`."""
        self.palette = palette

    def draw(self, shapes, *, tag="overlay"):
        """Draw anew everything under a tag."""
        self.canvas.delete(tag)
        self.tag = tag
        for shape in shapes:
            getattr(self, f"_{shape.kind}")(shape)

    def colour(self, shape):
        """The colour of a shape by its style."""
        if shape.style.endswith("-stale") or shape.style.startswith("grid-stale"):
            return STALE
        if shape.style.startswith("trace") or shape.style == "pointed":
            return self.palette.traces[shape.k % len(self.palette.traces)]
        return {"mark": MARK, "pin": PIN, "reason": COLOURS["alert"]}.get(shape.style, self.palette.grid)

    def _line(self, shape):
        points = shape.points[np.isfinite(shape.points).all(axis=1)]
        if len(points) < 2:
            return
        width, dash = LINES[shape.style]
        if shape.style.startswith("trace"):
            width *= self.stronger
        if shape.held:
            width, dash = width + 1.2, None
        colour = MARK if shape.held else self.colour(shape)
        unit = self.look.unit
        scaled = tuple(max(1, round(part * unit)) for part in dash) if dash else ()
        self.canvas.create_line(
            *np.round(points, 2).ravel().tolist(),
            fill=colour,
            width=width * unit,
            dash=scaled,
            tags=self.tag,
            capstyle="round" if not dash else "butt",
            joinstyle="round",
        )

    def _arrow(self, shape):
        unit, points = self.look.unit, np.round(shape.points, 2).ravel().tolist()
        head = (9 * unit, 11 * unit, 4.5 * unit)
        options = {"fill": self.colour(shape), "width": 2.2 * unit, "tags": self.tag, "smooth": True}
        self.canvas.create_line(*points, arrow="last", arrowshape=head, **options)

    def _round(self, x, y, radius, **options):
        self.canvas.create_oval(x - radius, y - radius, x + radius, y + radius, tags=self.tag, **options)

    def _circle(self, shape):
        (x, y), unit, colour = shape.points[0], self.look.unit, self.colour(shape)
        if shape.style == "pointed":
            self._round(x, y, 6 * unit, outline=COLOURS["paper"], width=4 * unit)
            self._round(x, y, 6 * unit, outline=colour, width=2 * unit)
        elif shape.style == "reason":
            self._round(x, y, 11 * unit, outline=COLOURS["paper"], width=4 * unit)
            self._round(x, y, 11 * unit, outline=colour, width=2 * unit)
            self._label(x + 14 * unit, y, shape.text, COLOURS["alert"], "w")
        else:
            self._round(x, y, 0.8 * MARKER_PX * unit, outline=colour, width=1.4 * unit)

    def _triangle(self, shape):
        (x, y), r = shape.points[0], MARKER_PX * self.look.unit
        self.canvas.create_polygon(
            x - r, y - 0.8 * r, x + r, y - 0.8 * r, x, y + r, fill=self.colour(shape), tags=self.tag
        )

    def _cross(self, shape):
        (x, y), r = shape.points[0], 0.9 * MARKER_PX * self.look.unit
        for side in (-1, 1):
            self.canvas.create_line(
                x - r,
                y - side * r,
                x + r,
                y + side * r,
                fill=self.colour(shape),
                width=1.6 * self.look.unit,
                tags=self.tag,
            )

    def _plus(self, shape):
        (x, y), unit = shape.points[0], self.look.unit
        r = 9 * unit
        colour = MARK if shape.held else self.colour(shape)
        for dx, dy in ((r, 0), (0, r)):
            self.canvas.create_line(
                x - dx,
                y - dy,
                x + dx,
                y + dy,
                fill=colour,
                width=(2.6 if shape.held else 1.6) * unit,
                tags=self.tag,
            )

    def _diamond(self, shape):
        (x, y), unit = shape.points[0], self.look.unit
        r = MARKED_PX * unit
        points = (x, y - r, x + r, y, x, y + r, x - r, y)
        self.canvas.create_polygon(points, fill="", outline=COLOURS["paper"], width=4 * unit, tags=self.tag)
        self.canvas.create_polygon(
            points, fill="", outline=MARK, width=(2.6 if shape.held else 1.6) * unit, tags=self.tag
        )
        self._round(x, y, 1.2 * unit, fill=MARK, outline="")
        self._label(x + r + 4 * unit, y, f"{shape.text} dB", MARK, "w", filled=shape.held)

    def _drop(self, shape):
        """A pin: a drop whose tip is the point."""
        (x, y), unit = shape.points[0], self.look.unit
        r = 5.5 * unit
        top = y - 3.1 * r
        turn = np.radians(np.linspace(-215, 35, 14))
        arc = [(x + r * np.cos(a), top + r + r * np.sin(a)) for a in turn]
        points = [value for point in [*arc, (x, y)] for value in point]
        fill = PIN if shape.held else COLOURS["paper"]
        self.canvas.create_polygon(points, fill="", outline=COLOURS["paper"], width=4 * unit, tags=self.tag)
        self.canvas.create_polygon(points, fill=fill, outline=PIN, width=1.8 * unit, tags=self.tag)

    def _box(self, shape):
        (x0, y0), (x1, y1) = shape.points
        unit = self.look.unit
        colour = {"cover": COLOURS["dim"], "draft-cover": COLOURS["dim"]}.get(shape.style, COLOURS["accent"])
        if shape.style == "chart-other":
            colour = COLOURS["dim"]
        dash = {"crop": (8, 4), "draft-crop": (8, 4), "chart-other": (2, 4), "chart-here": (2, 4)}.get(
            shape.style
        )
        scaled = tuple(max(1, round(part * unit)) for part in dash) if dash else ()
        self.canvas.create_rectangle(
            x0, y0, x1, y1, outline=MARK if shape.held else colour, width=(2.4 if shape.held else 1.4) * unit,
            dash=scaled, tags=self.tag,
        )  # fmt: skip
        if shape.text:
            self._label(x0 + 4 * unit, y0 + 10 * unit, shape.text, colour, "w")

    def _tag(self, shape):
        x, y = shape.points[0]
        self._label(x, y, shape.text, self.palette.grid, "center", ground=self.palette.paper)

    def _words(self, shape):
        x, y = shape.points[0]
        self.canvas.create_text(
            x, y, text=shape.text, fill=self.palette.ink, font=self.look.fonts["text"], tags=self.tag
        )

    def _label(self, x, y, words, colour, anchor, *, filled=False, ground=COLOURS["paper"]):
        """Words on a small ground of their own, readable on any picture."""
        font, unit = self.look.fonts["small"], self.look.unit
        width, height = font.measure(words) + 6 * unit, font.metrics("linespace")
        left = x - width / 2 if anchor == "center" else x
        ground, ink = (colour, COLOURS["paper"]) if filled else (ground, colour)
        self.canvas.create_rectangle(
            left, y - height / 2, left + width, y + height / 2, fill=ground, outline="", tags=self.tag
        )
        self.canvas.create_text(
            left + 3 * unit, y, text=words, fill=ink, font=font, anchor="w", tags=self.tag
        )
