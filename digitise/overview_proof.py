"""The proof of a look: the grid and the labels that were found, drawn over the picture."""

import numpy as np
from PIL import Image, ImageDraw

from ._proof_colour import distinct_colours, main_colours
from ._proof_panel import Mask, View, arc_angles, picture_panel
from ._proof_text import font, printable

__all__ = ["draw_overview"]

WIDTH_PX, MOST_HEIGHT_PX = 1400, 1800
LINE_PX = 1.4
CENTRE_PX = 9
SPOKES_FROM_RHO = 0.12  # the middle stays open for the eye


def draw_overview(picture, charts):
    """The picture, enlarged or reduced to a readable width, with every chart's grid and labels over it."""
    zoom = min(WIDTH_PX / picture.width, MOST_HEIGHT_PX / picture.height)
    width, height = max(1, round(picture.width * zoom)), max(1, round(picture.height * zoom))
    view = View(left=-0.5, top=-0.5, zoom=zoom, width=width, height=height)
    shown = picture_panel(picture.rgb, view, (255, 255, 255))
    colour, other = distinct_colours(*main_colours(shown), 2)
    grids, texts = Mask(shown), Mask(shown)
    for chart in charts:
        if chart.grid is not None:
            _lay_grid(grids, chart.grid, view)
        for label in chart.labels.found if chart.labels is not None else ():
            x, y = view.place(label.x_px, label.y_px)
            w, h = label.w_px * zoom / 2 + 2, label.h_px * zoom / 2 + 2
            texts.line(
                (
                    np.array([x - w, x + w, x + w, x - w, x - w]),
                    np.array([y - h, y - h, y + h, y + h, y - h]),
                ),
                1,
            )
    grids.lay(colour)
    texts.lay(other)
    image = Image.fromarray(shown)
    draw = ImageDraw.Draw(image)
    for chart in charts:
        centre = (chart.box.centre_x, chart.box.centre_y)
        if chart.grid is not None:
            centre = (chart.grid.centre_x, chart.grid.centre_y)
        x, y = view.place(*centre)
        words = printable(f"chart {chart.number}")
        draw.text((x + 14, y + 12), words, font=font(20), fill=colour, stroke_width=3, stroke_fill="white")
    return image


def _lay_grid(mask, grid, view):
    angles = arc_angles(grid, 361)
    for rho in grid.ring_rho:
        mask.line(view.place(*grid.to_picture(np.full(361, rho), angles)), LINE_PX)
    for plane in grid.spoke_deg:
        mask.line(view.place(*grid.to_picture(np.array([SPOKES_FROM_RHO, 1.0]), np.full(2, plane))), LINE_PX)
    x, y = view.place(grid.centre_x, grid.centre_y)
    for dx, dy in ((CENTRE_PX, 0), (0, CENTRE_PX)):
        mask.line((np.array([x - dx, x + dx]), np.array([y - dy, y + dy])), LINE_PX)
