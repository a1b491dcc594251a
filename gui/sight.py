"""The keyboard's sight on the picture, and the loupe that shows px as squares."""

import tkinter as tk

from .frame import loupe_pixels, to_ppm
from .theme import COLOURS

__all__ = ["Sight"]

LOUPE_PX, LOUPE_ZOOM = 132, 9  # design px
EDGE_PX = 10


class Sight:
    """Draws on a `ChartView`'s canvas where it points."""

    def __init__(self, view):
        self.view, self.canvas, self.look = view, view.canvas, view.look
        self._image = None

    def draw(self, *, loupe):
        """Draw the sight when the keyboard moves it, and the loupe when it is wanted."""
        self.canvas.delete("sight")
        if self.view.sight is None or not self.view.session.open:
            return
        x, y = self.view.place(*self.view.sight)
        if self.view.by_key:
            self._cross(x, y, 4, 14, COLOURS["text"])
        if loupe:
            self._draw_loupe(x, y)

    def _cross(self, x, y, gap, reach, colour):
        unit = self.look.unit
        gap, reach = gap * unit, reach * unit
        for ink, width in ((COLOURS["paper"], 3), (colour, 1)):
            for dx, dy in ((1, 0), (-1, 0), (0, 1), (0, -1)):
                self.canvas.create_line(
                    x + dx * gap,
                    y + dy * gap,
                    x + dx * reach,
                    y + dy * reach,
                    fill=ink,
                    width=width * unit,
                    tags="sight",
                )

    def _draw_loupe(self, x, y):
        """The loupe in the corner that the pointer is not in; by key it shows what is held."""
        view, session = self.view, self.view.session
        size, edge = self.look.px(LOUPE_PX), self.look.px(EDGE_PX)
        at = session.place_of_held() if view.by_key and session.held else view.sight
        pixels = loupe_pixels(session.now.picture.rgb, *at, size=size, zoom=LOUPE_ZOOM * self.look.unit)
        self._image = tk.PhotoImage(master=self.canvas, data=to_ppm(pixels), format="PPM")
        left = edge
        if x < size + 4 * edge and y < size + 4 * edge:
            left = view.frame.width - size - edge
        self.canvas.create_image(left, edge, image=self._image, anchor="nw", tags="sight")
        self.canvas.create_rectangle(
            left, edge, left + size, edge + size, outline=COLOURS["text"], tags="sight"
        )
        self._cross(left + size / 2, edge + size / 2, 3, LOUPE_PX / 2, COLOURS["mark"])
