"""The part of a picture that a view shows, and the pixels of that part; no widget."""

from dataclasses import dataclass, replace

import cv2
import numpy as np

from digitise._proof_panel import picture_panel

__all__ = ["Frame", "fit_frame", "frame_pixels", "loupe_pixels", "to_ppm"]

LEAST_ZOOM, MOST_ZOOM = 0.05, 32.0
BEYOND = (226, 229, 233)  # round the picture
DIMMED = 0.62  # how far what is not read is faded
HATCH_PX = 9


@dataclass(frozen=True, kw_only=True)
class Frame:
    """What a view shows.

    left, top : picture px of the outer corner of the view's first pixel; zoom : view px per picture px
    width, height : view px
    """

    left: float
    top: float
    zoom: float
    width: int
    height: int

    def place(self, x_px, y_px):
        """View px of picture px; both have pixel centres at integers."""
        return (x_px - self.left) * self.zoom - 0.5, (y_px - self.top) * self.zoom - 0.5

    def picture_place(self, x, y):
        """Picture px of view px."""
        return (x + 0.5) / self.zoom + self.left, (y + 0.5) / self.zoom + self.top

    def moved(self, dx, dy):
        """The frame after the picture was moved by view px."""
        return replace(self, left=self.left - dx / self.zoom, top=self.top - dy / self.zoom)

    def zoomed(self, factor, x, y):
        """The frame zoomed so that the picture's point under view px x, y stays there."""
        zoom = float(np.clip(self.zoom * factor, LEAST_ZOOM, MOST_ZOOM))
        px, py = self.picture_place(x, y)
        return replace(self, zoom=zoom, left=px - (x + 0.5) / zoom, top=py - (y + 0.5) / zoom)

    def resized(self, width, height):
        """The frame of a view of another size, with the same middle."""
        px, py = self.picture_place((self.width - 1) / 2, (self.height - 1) / 2)
        return replace(
            self, width=width, height=height, left=px - width / 2 / self.zoom, top=py - height / 2 / self.zoom
        )


def fit_frame(box, width, height, *, most_zoom=4.0):
    """The frame in which a box (x, y, w, h) of the picture just fits."""
    x, y, w, h = box
    zoom = float(np.clip(min(width / max(w, 1), height / max(h, 1)), LEAST_ZOOM, most_zoom))
    return Frame(
        left=x - 0.5 + w / 2 - width / 2 / zoom, top=y - 0.5 + h / 2 - height / 2 / zoom,
        zoom=zoom, width=width, height=height,
    )  # fmt: skip


def frame_pixels(rgb, frame, *, crop=None, covers=()):
    """(height, width, 3) uint8 of the part; what is not read is faded, covers are hatched besides."""
    pixels = picture_panel(rgb, frame, BEYOND)
    if crop is not None:
        kept = np.zeros(pixels.shape[:2], bool)
        kept[_area(frame, crop)] = True
        pixels[~kept] = _faded(pixels[~kept])
    for cover in covers:
        area = _area(frame, cover)
        part = _faded(pixels[area])
        rows, columns = np.indices(part.shape[:2])
        x0, y0 = frame.place(cover[0], cover[1])
        part[(rows + columns + int(x0) + int(y0)) % HATCH_PX == 0] = (96, 104, 114)
        pixels[area] = part
    return pixels


def loupe_pixels(rgb, x_px, y_px, *, size, zoom):
    """(size, size, 3) uint8 about a point of the picture, its pixels as squares."""
    reach = int(size / zoom / 2) + 2
    x0, y0 = round(x_px), round(y_px)
    part = np.full((2 * reach + 1, 2 * reach + 1, 3), BEYOND, np.uint8)
    height, width = rgb.shape[:2]
    xs, ys = np.arange(x0 - reach, x0 + reach + 1), np.arange(y0 - reach, y0 + reach + 1)
    inside_x, inside_y = (xs >= 0) & (xs < width), (ys >= 0) & (ys < height)
    part[np.ix_(inside_y, inside_x)] = rgb[np.ix_(ys[inside_y], xs[inside_x])]
    # Middle of the loupe = the point itself.
    middle = (size - 1) / 2
    matrix = np.array(
        [
            [zoom, 0, middle - (x_px - x0 + reach) * zoom],
            [0, zoom, middle - (y_px - y0 + reach) * zoom],
        ]
    )
    return cv2.warpAffine(part, matrix, (size, size), flags=cv2.INTER_NEAREST, borderValue=BEYOND)


def to_ppm(pixels):
    """The pixels as the bytes of a PPM file, which Tk reads without any other package."""
    height, width = pixels.shape[:2]
    return b"P6 %d %d 255\n" % (width, height) + np.ascontiguousarray(pixels).tobytes()


def _area(frame, box):
    """Index of a box's view px."""
    x, y, w, h = box
    x0, y0 = frame.place(x - 0.5, y - 0.5)
    x1, y1 = frame.place(x + w - 0.5, y + h - 0.5)
    # A view px belongs to the box when its centre does.
    left, right = (int(np.clip(np.ceil(value), 0, frame.width)) for value in (x0, x1))
    top, bottom = (int(np.clip(np.ceil(value), 0, frame.height)) for value in (y0, y1))
    return np.s_[top:bottom, left:right]


def _faded(pixels):
    return np.round(pixels * (1 - DIMMED) + np.array(BEYOND) * DIMMED).astype(np.uint8)
