"""The unwrapped plane that paths are sought in: a column an angle, a row a step of radius.

The path only has to come within half a line of the trace, so a large chart is unwrapped at reduced size.
"""

from dataclasses import dataclass

import cv2
import numpy as np

__all__ = ["Frame", "make_frame"]

LARGEST_RADIUS = 340.0  # rows to the outermost ring
BEYOND_RIM = 1.04  # rows go this far: a trace may touch the rim or lie on it


@dataclass(frozen=True, eq=False, kw_only=True)
class Frame:
    """Where each cell of the unwrapped plane lies on the sheet.

    angles : (n_columns,) plane angles, rising, evenly spaced; whole : the first column follows the last
    x, y : (n_columns, n_rows) float32, on the sheet reduced by `reduction`
    reduction : frame rows per sheet px; outer_rows : rows per unit rho
    """

    angles: np.ndarray
    whole: bool
    x: np.ndarray
    y: np.ndarray
    reduction: float
    outer_rows: float

    def unwrap(self, image):
        """Sample a (h, w) float32 sheet map on the frame, (n_columns, n_rows)."""
        if self.reduction < 1:
            image = cv2.resize(image, self._size(image), interpolation=cv2.INTER_AREA)
        return cv2.remap(image, self.x, self.y, cv2.INTER_LINEAR, borderValue=0)

    def _size(self, image):
        return tuple(max(1, round(side * self.reduction)) for side in image.shape[::-1])


def make_frame(sheet, grid):
    """The `Frame` of a `Sheet` over the arc on which the chart is drawn."""
    start, end = float(grid.arc_deg[0]), float(grid.arc_deg[1])
    extent = end - start if end > start else end - start + 360.0
    reduction = min(1.0, LARGEST_RADIUS / sheet.outer_px)
    outer_rows = sheet.outer_px * reduction
    n = int(np.ceil(2 * np.pi * outer_rows * extent / 360.0))
    angles = start + (np.arange(n) + 0.5) * extent / n
    rows = np.arange(int(outer_rows * BEYOND_RIM) + 2) / outer_rows
    x, y = sheet.to_sheet(rows[None, :], angles[:, None])
    height, width = sheet.strength.shape
    # Reduced pixels have their centres at ((x + 0.5) r - 0.5), r being the exact ratio of the whole-pixel sizes.
    rx = max(1, round(width * reduction)) / width if reduction < 1 else 1.0
    ry = max(1, round(height * reduction)) / height if reduction < 1 else 1.0
    return Frame(
        angles=angles, whole=extent >= 359.0, x=((x + 0.5) * rx - 0.5).astype(np.float32),
        y=((y + 0.5) * ry - 0.5).astype(np.float32), reduction=reduction, outer_rows=outer_rows,
    )  # fmt: skip
