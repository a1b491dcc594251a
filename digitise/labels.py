"""Printed ring levels, units, bearings, captions and legends, read with an optional OCR engine.

Stub: the reader follows.
"""

from dataclasses import dataclass

__all__ = ["Label", "Labels", "read_labels"]


@dataclass(frozen=True, kw_only=True)
class Label:
    """One piece of text on the picture.

    text : as read; value : its number or None; unit : "dB", "dBi", "dBd", "deg" or ""
    x_px, y_px, w_px, h_px : centre and size on the picture; angle_deg : its own turn
    rho, plane_deg : centre in the chart plane; confidence : 0 to 1
    role : "ring", "rim", "caption", "legend", "other"
    """

    text: str
    value: float | None
    unit: str
    x_px: float
    y_px: float
    w_px: float
    h_px: float
    rho: float
    plane_deg: float
    confidence: float
    role: str
    angle_deg: float = 0.0


@dataclass(frozen=True, kw_only=True)
class Labels:
    """All text found near one chart: tuple of `Label`; engine is the OCR engine's name, "" when none is installed."""

    found: tuple = ()
    engine: str = ""

    def with_role(self, role):
        """The labels of one role."""
        return tuple(label for label in self.found if label.role == role)


def read_labels(picture, box, grid):
    """Read the text of one chart; an empty `Labels` when the extra is not installed."""
    return Labels()
