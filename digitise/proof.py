"""The proof: a picture that shows the reading over the chart, for a person's eye.

On the left the reading lies over the chart itself, in colours measured to be far from all that is on it; on
the right the same trace is drawn anew with the grid as it was read, so that two things can be checked at a
glance: that the line lies on the ink, and that rings, levels and bearings say what the chart prints. Under
them the error of every row, the figures, the reasons to look, and the caution.
"""

import io

import numpy as np

from ._proof_colour import distinct_colours, main_colours
from ._proof_page import MARGIN_PX, PANEL_PX, STRIP_PX, WIDTH_PX, Page
from ._proof_panel import draw_error_strip, draw_grid, draw_trace, make_view, picture_panel, rule_strip

__all__ = ["draw_proof", "encode_proof", "lay_out"]

PANEL_LEAST_PX, PANEL_MOST_PX = 360, 690
STRIP_LABELS_PX = 60  # room left of the strip for its numbers


def draw_proof(reading, record):
    """The proof of one chart as a Pillow image.

    Parameters
    ----------
    reading : Reading
    record : its record (`record.make_record`), for the figures and names
    """
    return lay_out(reading, record, Page)


def lay_out(reading, record, kind):
    """A proof on a sheet of a kind (`Page`, or what answers its calls): what its `finish` returns."""
    view = make_view(reading, width=PANEL_PX, least=PANEL_LEAST_PX, most=PANEL_MOST_PX)
    shown = picture_panel(reading.picture.rgb, view, (255, 255, 255))
    present, paper = main_colours(shown)
    colours = distinct_colours(present, paper, max(len(reading.traces), 1))
    page = kind(reading, record, colours, paper)
    shown, plain = page.over(shown, reading.picture.rgb, view), page.blank(view.width, view.height)
    over, anew = _over_chart(view, reading), _drawn_anew(view, reading)
    draw_grid(plain, reading, anew, paper)
    for trace, colour in zip(reading.traces, colours, strict=False):
        draw_trace(plain, reading, trace, anew, colour, anew=True)
        draw_trace(shown, reading, trace, over, colour, anew=False)
    strip = page.blank(WIDTH_PX - 2 * MARGIN_PX - STRIP_LABELS_PX, STRIP_PX)
    rule_strip(strip, paper)
    for trace, colour in zip(reading.traces, colours, strict=False):
        draw_error_strip(strip, trace.table, colour)
    page.head()
    page.panels(shown, plain, anew, over)
    page.strip(strip)
    page.traces()
    page.review()
    return page.finish()


def encode_proof(image):
    """The proof as PNG bytes; packed lightly, since packing it hard takes longer than the reading."""
    data = io.BytesIO()
    image.save(data, "PNG", compress_level=2)
    return data.getvalue()


def _over_chart(view, reading):
    """Chart plane -> panel of the picture."""

    def to_panel(rho, plane_deg):
        return view.place(*reading.grid.to_picture(rho, plane_deg))

    return to_panel


def _drawn_anew(view, reading):
    """Chart plane -> panel drawn anew: same place and size, but round and upright."""
    grid = reading.grid
    x0, y0 = view.place(grid.centre_x, grid.centre_y)
    radius = grid.outer_px * view.zoom

    def to_panel(rho, plane_deg):
        angle = np.radians(plane_deg)
        return x0 + radius * rho * np.sin(angle), y0 - radius * rho * np.cos(angle)

    return to_panel
