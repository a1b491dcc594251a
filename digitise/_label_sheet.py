"""The region of one chart at a size that suits letters, cleaned, and the lines of text cut out of it
upright.
"""

from dataclasses import dataclass, replace

import cv2
import numpy as np

from ._label_clean import clean_gray

__all__ = ["LabelSheet", "Line", "cut_label_sheet"]

SMALL_OUTER_PX = (
    420.0  # charts below are enlarged, by MAX_ZOOM at most: letters of 6 px are unreadable as they are
)
LARGE_OUTER_PX = 700.0  # charts above are reduced: their letters stay large enough
MAX_ZOOM = 2.5
SHARPEN, SHARPEN_PX = 1.2, 2.0  # amount and radius of the unsharp mask, sheet px
LINE_PX = 48  # height that the recogniser reads


@dataclass(frozen=True, kw_only=True)
class Line:
    """A line of text on the sheet: centre, length along the text and height, px; turn clockwise, degrees."""

    x: float
    y: float
    length: float
    height: float
    turn_deg: float

    def turned(self, by_deg):
        """The same box read from another side; by a right angle swaps length and height."""
        swap = round(by_deg / 90) % 2 == 1
        length, height = (self.height, self.length) if swap else (self.length, self.height)
        turn = (self.turn_deg + by_deg + 180) % 360 - 180
        return replace(self, length=length, height=height, turn_deg=turn)


@dataclass(frozen=True, eq=False, kw_only=True)
class LabelSheet:
    """Working pictures of one chart's region.

    clean : (h, w) uint8, letters dark on white, grid lines and colours faded; plain : (h, w) uint8, the same
        with the lines left in; grid : the `Grid` in sheet px; x0, y0, zoom : sheet px = (picture px - x0 +
        0.5) zoom - 0.5
    """

    clean: np.ndarray
    plain: np.ndarray
    grid: object
    x0: float
    y0: float
    zoom: float

    def to_picture(self, x, y):
        """Picture px of sheet px."""
        return (x + 0.5) / self.zoom - 0.5 + self.x0, (y + 0.5) / self.zoom - 0.5 + self.y0

    def line_picture(self, line, *, cleaned=True):
        """(LINE_PX, w, 3) uint8: the line cut out upright."""
        scale = LINE_PX / max(line.height, 2.0)
        width = int(np.clip(round(line.length * scale), 8, 40 * LINE_PX))
        turn = np.radians(line.turn_deg)
        along, down = (
            np.array([np.cos(turn), np.sin(turn)]) / scale,
            np.array([-np.sin(turn), np.cos(turn)]) / scale,
        )
        start = np.array([line.x, line.y]) - along * (width - 1) / 2 - down * (LINE_PX - 1) / 2
        to_sheet = np.array([[along[0], down[0], start[0]], [along[1], down[1], start[1]]])
        source = self.clean if cleaned else self.plain
        flags = cv2.INTER_CUBIC | cv2.WARP_INVERSE_MAP
        out = cv2.warpAffine(source, to_sheet, (width, LINE_PX), flags=flags, borderMode=cv2.BORDER_REPLICATE)
        return np.repeat(out[:, :, None], 3, axis=2)


def cut_label_sheet(picture, box, grid):
    """Cut the `LabelSheet` of the chart at `box`."""
    rgb = np.ascontiguousarray(picture.rgb[box.y : box.y + box.h, box.x : box.x + box.w])
    outer = max(grid.outer_px, 1.0)
    zoom = (
        min(MAX_ZOOM, SMALL_OUTER_PX / outer) if outer < SMALL_OUTER_PX else min(1.0, LARGE_OUTER_PX / outer)
    )
    size = max(32, round(rgb.shape[1] * zoom)), max(32, round(rgb.shape[0] * zoom))
    if size != rgb.shape[1::-1]:
        rgb = cv2.resize(rgb, size, interpolation=cv2.INTER_AREA if zoom < 1 else cv2.INTER_CUBIC)
    moved = _moved(grid, box.x, box.y, zoom)
    plain, clean = clean_gray(rgb, moved)
    if zoom > 1:
        plain, clean = _sharpened(plain), _sharpened(clean)
    return LabelSheet(clean=clean, plain=plain, grid=moved, x0=float(box.x), y0=float(box.y), zoom=zoom)


def _sharpened(gray):
    """Enlarged letters are soft; an unsharp mask brings back the contrast of their strokes."""
    soft = cv2.GaussianBlur(gray, (0, 0), SHARPEN_PX)
    return cv2.addWeighted(gray, 1 + SHARPEN, soft, -SHARPEN, 0)


def _moved(grid, x0, y0, zoom):
    """The grid in sheet px."""
    to_sheet = np.array([[zoom, 0, (0.5 - x0) * zoom - 0.5], [0, zoom, (0.5 - y0) * zoom - 0.5], [0, 0, 1.0]])
    h = to_sheet @ grid.homography
    widths = {"ring_width_px": grid.ring_width_px * zoom, "spoke_width_px": grid.spoke_width_px * zoom}
    return replace(grid, homography=h / h[2, 2], **widths)
