"""Bitmaps that were placed on a page, and the view that shows one px of theirs as one px of the picture.

A scan may be cut into strips, and a chart's bitmap may have text laid over it. So it is not the bitmap that
is taken, but the page, drawn with the bitmap's own px as the unit: strips join, what lies over it is there,
and since px fall on px nothing is resampled.
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["Bitmap", "bitmaps_of", "native_view"]

MIN_SIDE_PX = 80  # smaller bitmaps are icons
UPRIGHT = 2e-3  # how far a bitmap's sides may stand off the page's
SAME_SCALE = 2e-3
OFF_LATTICE_PX = 0.1
INSIDE_PX = 1e-3  # the engine rounds outward: a bitmap that fills its px to the last would gain a row


@dataclass(frozen=True, eq=False, kw_only=True)
class Bitmap:
    """One or more placed bitmaps with one lattice of px.

    left, top, right, bottom : display points; px_per_pt : (x, y)
    parts : tuple of (number of the image on the page, left, top, right, bottom), one a strip
    """

    left: float
    top: float
    right: float
    bottom: float
    px_per_pt: tuple
    parts: tuple

    @property
    def size(self):
        """(width, height), px."""
        return (
            max(1, round((self.right - self.left) * self.px_per_pt[0])),
            max(1, round((self.bottom - self.top) * self.px_per_pt[1])),
        )

    def clipped(self, width_pt, height_pt):
        """The part on the page, in whole px of its own lattice; None when nothing is."""
        sides = self._cut((self.left, self.top, self.right, self.bottom), width_pt, height_pt)
        if sides is None:
            return None
        parts = [
            (part[0], *cut)
            for part in self.parts
            if (cut := self._cut(part[1:], width_pt, height_pt)) is not None
        ]
        return Bitmap(
            **dict(zip(("left", "top", "right", "bottom"), sides, strict=True)),
            px_per_pt=self.px_per_pt,
            parts=tuple(parts),
        )

    def _cut(self, box, width_pt, height_pt):
        low_x, low_y, high_x, high_y = box
        sides = []
        for low, high, end, scale in (
            (low_x, high_x, width_pt, self.px_per_pt[0]),
            (low_y, high_y, height_pt, self.px_per_pt[1]),
        ):
            first = max(0, int(np.ceil(-low * scale - OFF_LATTICE_PX)))
            last = min(round((high - low) * scale), int(np.floor((end - low) * scale + OFF_LATTICE_PX)))
            if last - first < 1:
                return None
            sides.append((low + first / scale, low + last / scale))
        return sides[0][0], sides[1][0], sides[0][1], sides[1][1]

    def part_views(self):
        """[(image's number, x, y, width, height px, scale, shift)] of every strip, as of `native_view`."""
        found = []
        for number, left, top, right, bottom in self.parts:
            part = Bitmap(left=left, top=top, right=right, bottom=bottom, px_per_pt=self.px_per_pt, parts=())
            place = round((left - self.left) * self.px_per_pt[0]), round((top - self.top) * self.px_per_pt[1])
            found.append((number, *place, *part.size, *native_view(part)))
        return found


def bitmaps_of(page):
    """The upright bitmaps of a `VectorPage` in display points, strips of one scan joined, largest first."""
    found = []
    for number, image in enumerate(page.images):
        bitmap = _upright(image, number)
        if bitmap is None:
            continue
        for k, other in enumerate(found):
            joined = _joined(other, bitmap)
            if joined is not None:
                found[k] = joined
                break
        else:
            found.append(bitmap)
    found = [item for item in found if min(item.size) >= MIN_SIDE_PX]
    return sorted(found, key=lambda item: -(item.right - item.left) * (item.bottom - item.top))


def native_view(bitmap):
    """(scale, shift), each (x, y): display points times scale plus shift are the bitmap's outer corners."""
    scale, shift = [], []
    for low, high, n in zip(
        (bitmap.left, bitmap.top), (bitmap.right, bitmap.bottom), bitmap.size, strict=True
    ):
        scale.append((n - 2 * INSIDE_PX) / (high - low))
        shift.append(INSIDE_PX - low * scale[-1])
    return tuple(scale), tuple(shift)


def _upright(image, number):
    """A `Bitmap` of one image whose sides are along the page's, turned by quarters or not; else None."""
    m = image.matrix[:, :2]
    x, y = np.abs(m)
    turned = x[1] > x[0]
    across, down = (image.height, image.width) if turned else (image.width, image.height)
    wide, high = (x[1], y[0]) if turned else (x[0], y[1])
    slant = max(x[0], y[1]) if turned else max(x[1], y[0])
    if min(wide, high) <= 0 or slant > UPRIGHT * min(wide, high):
        return None
    corners = image.matrix @ np.array([[0, 1, 0, 1], [0, 0, 1, 1], [1, 1, 1, 1]])
    left, top = corners.min(axis=1)
    right, bottom = corners.max(axis=1)
    return Bitmap(
        left=left,
        top=top,
        right=right,
        bottom=bottom,
        px_per_pt=(across / wide, down / high),
        parts=((number, left, top, right, bottom),),
    )


def _joined(a, b):
    """Two bitmaps as one, when they share a lattice and touch; else None."""
    if max(abs(p / q - 1) for p, q in zip(a.px_per_pt, b.px_per_pt, strict=True)) > SAME_SCALE:
        return None
    scale = np.array(a.px_per_pt)
    off = (np.array([b.left - a.left, b.top - a.top])) * scale
    gap = (
        np.array([max(a.left, b.left) - min(a.right, b.right), max(a.top, b.top) - min(a.bottom, b.bottom)])
    ) * scale
    if np.abs(off - np.round(off)).max() > OFF_LATTICE_PX or gap.max() > 1:
        return None
    return Bitmap(
        left=min(a.left, b.left),
        top=min(a.top, b.top),
        right=max(a.right, b.right),
        bottom=max(a.bottom, b.bottom),
        px_per_pt=a.px_per_pt,
        parts=a.parts + b.parts,
    )
