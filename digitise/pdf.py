"""A page of a PDF as a `Picture`, at the resolution that its charts ask for, with its drawn objects.

Three ways, in this order. A chart drawn with lines decides the scale by its own radius, and keeps its lines
for `vector`. A bitmap placed on the page is taken px for px, since drawing it anew at another scale only
blurs it. Any other page is drawn at an even 200 dots an inch.
"""

import hashlib
import os
from dataclasses import replace

import numpy as np

from ._pdf_file import hidden_objects, opened_document, opened_page, page_view, render_exact, render_whole
from ._pdf_native import bitmaps_of, native_view
from ._pdf_objects import VectorPage, collect_objects, moved
from ._pdf_text import collect_texts
from .picture import Picture, _read_bytes

__all__ = ["open_pdf_page", "page_count", "page_thumbnails"]

POINTS_PER_INCH = 72.0  # ISO 32000-1, 8.3.2.3
OUTER_PX = 400.0  # radius wanted for the smallest drawn chart
PLAIN_DPI = 200.0
MAX_DPI = 1200.0
MAX_MEGAPIXELS = 25.0
MAX_SIDE_PX = 15_000
SCAN_COVER = 0.8  # of the page that a bitmap covers when the page is a scan
MAX_BITMAPS = 6
STACK_GAP_PX = 24
SIZES_TRIED = 60


def open_pdf_page(path, *, page=None):
    """Open one page of a PDF as a `Picture`.

    Parameters
    ----------
    path : str or path-like
    page : 1-based; None takes the first

    The picture's `vector` is a `VectorPage` in picture px, or None where the page holds none or too much.
    Raises `PictureError` for a file that is missing, locked, broken, without that page, or whose page is too
    large or takes too long.

    """
    path = os.fspath(path)
    data = _read_bytes(path)
    number = 1 if page is None else page
    with opened_document(path, data) as document, opened_page(document, number, path) as opened:
        view = page_view(opened, path)
        drawn, items, notes = _objects(opened, view)
        n_pages = len(document)
        rgb, vector, made = _pixels(opened, view, drawn, items, path)
    notes = (f"page {number} of {n_pages}", *notes, *made)
    return Picture(
        rgb=rgb,
        path=path,
        sha256=hashlib.sha256(data).hexdigest(),
        width=rgb.shape[1],
        height=rgb.shape[0],
        page=number,
        kind="pdf",
        notes=notes,
        vector=vector,
    )


def page_count(path):
    """How many pages a PDF has; raises `PictureError` as `open_pdf_page` does."""
    path = os.fspath(path)
    with opened_document(path, _read_bytes(path)) as document:
        return len(document)


def page_thumbnails(path, *, size_px=160, first=1, count=24):
    """Small pictures of `count` pages from page `first`, each at most `size_px` wide and high.

    Returns a tuple of (page number, (h, w, 3) uint8 RGB or None where a page cannot be drawn).
    """
    path = os.fspath(path)
    found = []
    with opened_document(path, _read_bytes(path)) as document:
        for number in range(max(first, 1), min(first + count, len(document) + 1)):
            found.append((number, _thumbnail(document, number, path, size_px)))
    return tuple(found)


def _thumbnail(document, number, path, size_px):
    from .exceptions import PictureError

    try:
        with opened_page(document, number, path) as page:
            view = page_view(page, path)
            zoom = size_px / max(view.width_pt, view.height_pt)
            size = max(1, round(view.width_pt * zoom)), max(1, round(view.height_pt * zoom))
            return render_whole(page, *size, path, seconds=3.0)
    except PictureError:
        return None


def _objects(page, view):
    """What is drawn on the page, in display points, its images' handles, and a note on what is left out."""
    try:
        drawn, items = collect_objects(page, view)
        if drawn.whole:
            drawn = replace(drawn, texts=collect_texts(page, view))
    except Exception as error:  # an odd object must not keep the page from being seen
        return VectorPage(whole=False), [], (f"drawn objects not taken ({type(error).__name__})",)
    return drawn, items, () if drawn.whole else ("too many drawn objects: read from pixels alone",)


def _pixels(page, view, drawn, items, path):
    """(rgb, VectorPage or None, notes) of an open page by the way that suits it."""
    radii = _chart_radii(drawn)
    if radii:
        return _rendered(page, view, drawn, path, OUTER_PX / min(radii))
    bitmaps = [
        b
        for b in (item.clipped(view.width_pt, view.height_pt) for item in bitmaps_of(drawn))
        if b is not None
    ]
    if not bitmaps:
        return _rendered(page, view, drawn, path, PLAIN_DPI / POINTS_PER_INCH)
    if _area(bitmaps[0]) >= SCAN_COVER * view.width_pt * view.height_pt:
        return _embedded(page, view, drawn, items, bitmaps[:1], path)
    plain = _rendered(page, view, drawn, path, PLAIN_DPI / POINTS_PER_INCH)
    holders = _chart_bitmaps(plain[0], plain[1].px_per_pt, bitmaps[:MAX_BITMAPS])
    return plain if holders is None else _embedded(page, view, drawn, items, holders, path)


def _chart_radii(drawn):
    """Outer radii (points) of the charts drawn with lines."""
    if not drawn.whole or not drawn.paths:
        return []
    from ._vector_grid import find_drawn_grids

    return [item.grid.outer_px for item in find_drawn_grids(drawn)]


def _rendered(page, view, drawn, path, px_per_pt):
    """The whole page drawn at a scale, or at the greatest that the bounds allow."""
    most = np.sqrt(MAX_MEGAPIXELS * 1e6 / (view.width_pt * view.height_pt))
    most = min(most, MAX_SIDE_PX / max(view.width_pt, view.height_pt), MAX_DPI / POINTS_PER_INCH)
    scale = min(px_per_pt, most)
    width, height = _even_size(view, scale)
    rgb = render_whole(page, width, height, path)
    x, y = width / view.width_pt, height / view.height_pt
    # Display points count from the outer corner, px centres from the middle of the first px.
    vector = moved(drawn, [[x, 0, -0.5], [0, y, -0.5]]) if drawn.whole else None
    return rgb, vector, (f"drawn at {scale * POINTS_PER_INCH:.0f} dots an inch",)


def _even_size(view, scale):
    """Whole px (width, height) near a scale that scale both sides alike: circles stay circles."""
    width = np.arange(max(1, int(view.width_pt * scale) - SIZES_TRIED), int(view.width_pt * scale) + 1)
    height = np.maximum(np.round(width * view.height_pt / view.width_pt), 1)
    uneven = np.abs(height / view.height_pt / (width / view.width_pt) - 1)
    best = int(uneven.argmin())
    return int(width[best]), int(height[best])


def _embedded(page, view, drawn, items, bitmaps, path):
    """Bitmaps of the page at their own px; several are stacked in reading order."""
    parts, total = [], 0.0
    for bitmap in sorted(bitmaps, key=lambda item: (round(item.top / 20), item.left)):
        width, height = bitmap.size
        total += width * height / 1e6
        if total > MAX_MEGAPIXELS or max(width, height) > MAX_SIDE_PX:
            rgb, vector, notes = _rendered(page, view, drawn, path, max(bitmap.px_per_pt))
            return rgb, vector, (*notes, "bitmaps too large for their own px")
        parts.append((_native(page, bitmap, items), *native_view(bitmap)))
    rgb, scale, shift = parts[0]
    if len(parts) > 1:
        said = f"{len(parts)} bitmaps of the page at their own px, stacked"
        return _stacked([part[0] for part in parts]), VectorPage(embedded=True), (said,)
    vector = None
    if drawn.whole:
        vector = moved(drawn, [[scale[0], 0, shift[0] - 0.5], [0, scale[1], shift[1] - 0.5]])
    vector = replace(vector or VectorPage(whole=False), embedded=True)
    return rgb, vector, (f"the page's bitmap at its own {rgb.shape[1]} x {rgb.shape[0]} px",)


def _native(page, bitmap, items):
    """(h, w, 3) of a bitmap's part of the page at its own px.

    Each strip is drawn alone: the engine rounds a bitmap's edges outward, over its neighbour's first row.
    """
    width, height = bitmap.size
    sheet = np.full((height, width, 3), 255, np.uint8)
    own = [part[0] for part in bitmap.parts]
    for number, x, y, w, h, scale, shift in bitmap.part_views():
        with hidden_objects([items[k] for k in own if k != number]):
            drawn = render_exact(page, scale, shift, (w, h))
        sheet[y : y + h, x : x + w] = drawn[: height - y, : width - x]
    return sheet


def _stacked(parts):
    """(h, w, 3) of several pictures one below the other on white."""
    width = max(part.shape[1] for part in parts)
    height = sum(part.shape[0] for part in parts) + STACK_GAP_PX * (len(parts) - 1)
    sheet = np.full((height, width, 3), 255, np.uint8)
    top = 0
    for part in parts:
        sheet[top : top + part.shape[0], : part.shape[1]] = part
        top += part.shape[0] + STACK_GAP_PX
    return sheet


def _chart_bitmaps(rgb, px_per_pt, bitmaps):
    """The bitmaps that hold the page's charts; None when a chart stands outside them all or none is found."""
    from .find import find_charts

    picture = Picture(rgb=rgb, path="", sha256="", width=rgb.shape[1], height=rgb.shape[0])
    boxes = find_charts(picture)
    if not boxes:
        return bitmaps if len(bitmaps) == 1 else None
    holders = []
    for box in boxes:
        x, y, reach = (
            (v + shift) / px_per_pt
            for v, shift in ((box.centre_x, 0.5), (box.centre_y, 0.5), (0.97 * box.outer_px, 0))
        )
        inside = [
            b
            for b in bitmaps
            if b.left <= x - reach and x + reach <= b.right and b.top <= y - reach and y + reach <= b.bottom
        ]
        if not inside:
            return None
        holders.append(inside[-1])
    return list(dict.fromkeys(holders))


def _area(bitmap):
    return (bitmap.right - bitmap.left) * (bitmap.bottom - bitmap.top)
