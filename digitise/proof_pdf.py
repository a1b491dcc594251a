"""The proof as a PDF page, for a project file: the layout of `proof` in lines and letters, for print.

The chart itself stays a bitmap, at twice the resolution of the proof's picture where it has so much.
"""

from dataclasses import replace

import numpy as np

from ._pdf_sheet import LinePanel, PdfPen, pdf_bytes
from ._proof_page import MARGIN_PX, WIDTH_PX, Page
from ._proof_panel import picture_panel
from .proof import lay_out

__all__ = ["proof_pdf"]

FINEST = 2.0  # bitmap px a layout px


def proof_pdf(reading, record):
    """The proof of one chart as the bytes of a PDF with one A4 page.

    Parameters
    ----------
    reading : Reading
    record : its record (`record.make_record`), for the figures and names
    """
    return lay_out(reading, record, _PdfPage)


class _PdfPage(Page):
    """The proof's sheet as a PDF page."""

    def begin(self, height):
        """Start with an empty page, as high as what will be laid on it."""
        self.draw = PdfPen()

    def blank(self, width, height):
        """An empty panel of lines in the chart's paper."""
        return LinePanel(width, height, self.paper)

    def over(self, panel, rgb, view):
        """A panel of lines over the picture's part, as fine as the picture is."""
        finer = float(np.clip(1 / view.zoom, 1.0, FINEST))
        size = round(view.width * finer), round(view.height * finer)
        part = replace(view, zoom=view.zoom * finer, width=size[0], height=size[1])
        return LinePanel(
            view.width, view.height, self.paper, bitmap=picture_panel(rgb, part, (255, 255, 255))
        )

    def put(self, panel, x, y):
        """Lay a finished panel on the page."""
        self.draw.panel(panel, x, y)

    def finish(self):
        """The file's bytes."""
        chart = self.record["chart"]
        title = f"Proof of the reading of {chart['file']}" + (
            f", chart {chart['number']}" if chart["of"] > 1 else ""
        )
        return pdf_bytes(self.draw, WIDTH_PX, self.y + MARGIN_PX // 2, title=title)
