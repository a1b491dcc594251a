"""The PDF engine behind a few safe calls: open a document, know a page's size, make pixels within bounds.

The engine (pdfium) is not safe for threads, so every use holds one lock. Coordinates: a page's own units are
points with y up; "display points" are what a viewer shows at 72 dpi: the crop box only, turned upright, y
down, origin at the upper left corner.
"""

import contextlib
import ctypes
import threading
import time
from dataclasses import dataclass

import numpy as np

from .exceptions import PictureError

__all__ = [
    "PageView",
    "hidden_objects",
    "opened_document",
    "opened_page",
    "page_view",
    "refusal",
    "render_exact",
    "render_whole",
]

MIN_SIDE_PT, MAX_SIDE_PT = (
    9.0,
    20_000.0,
)  # a chart needs some paper; 14 400 is the format's own bound (ISO 32000-1, C.2)
RENDER_SECONDS = 20.0  # a page that takes longer is refused
PROBE = 1000  # device px that the display matrix is measured with
PASSWORD_CODES = (4, 5)  # pdfium's FPDF_ERR_PASSWORD, FPDF_ERR_SECURITY

_lock = threading.RLock()


@dataclass(frozen=True, eq=False, kw_only=True)
class PageView:
    """How a page is shown.

    width_pt, height_pt : of the page as displayed
    matrix : (2, 3), page points (x, y, 1) -> display points
    """

    width_pt: float
    height_pt: float
    matrix: np.ndarray


@contextlib.contextmanager
def opened_document(path, data=None):
    """Hold the engine's lock with the document open; `data` are its bytes when already read."""
    with _lock:
        import pypdfium2

        try:
            document = pypdfium2.PdfDocument(path if data is None else data)
        except pypdfium2.PdfiumError as error:
            raise _open_refusal(path, error) from None
        try:
            yield document
        finally:
            document.close()


@contextlib.contextmanager
def opened_page(document, number, path):
    """One page by its 1-based number, closed at the end."""
    import pypdfium2

    n_pages = len(document)
    if not 1 <= number <= n_pages:
        said = f"has {n_pages} page{'s' * (n_pages > 1)}, so no page {number}"
        raise refusal(path, said, "give another --page")
    try:
        page = document[number - 1]
    except pypdfium2.PdfiumError as error:
        raise refusal(
            path, f"page {number} is broken ({error})", "give another --page, or save the PDF again"
        ) from None
    try:
        yield page
    finally:
        page.close()


def page_view(page, path):
    """The `PageView` of an open page; refuses sizes that no page has."""
    from pypdfium2 import raw

    width, height = (float(v) for v in page.get_size())
    sides = (width, height)
    if not all(np.isfinite(sides)) or not MIN_SIDE_PT <= min(sides) or not max(sides) <= MAX_SIDE_PT:
        cause = f"the page is {width:.5g} x {height:.5g} points, outside {MIN_SIDE_PT:g} to {MAX_SIDE_PT:g}"
        raise refusal(path, cause, "save the chart's part of it as PNG")
    corners = [_to_page(raw, page, x, y) for x, y in ((0, 0), (PROBE, 0), (0, PROBE))]
    columns = np.column_stack([(corners[1] - corners[0]) / width, (corners[2] - corners[0]) / height])
    if not np.isfinite(columns).all() or abs(np.linalg.det(columns)) < 1e-9:
        raise refusal(path, "the page has no area", "save or download it again")
    inverse = np.linalg.inv(columns)
    matrix = np.column_stack([inverse, -inverse @ corners[0]])
    return PageView(width_pt=width, height_pt=height, matrix=matrix)


def _to_page(raw, page, x, y):
    """Page points of a px of a display PROBE px wide and high."""
    page_x, page_y = ctypes.c_double(), ctypes.c_double()
    raw.FPDF_DeviceToPage(page, 0, 0, PROBE, PROBE, 0, x, y, page_x, page_y)
    return np.array([page_x.value, page_y.value])


def render_whole(page, width_px, height_px, path, *, seconds=None):
    """(height, width, 3) uint8 RGB of a whole page on white, given up and refused after so many seconds."""
    from pypdfium2 import raw

    seconds = RENDER_SECONDS if seconds is None else seconds
    bitmap = _white_bitmap(width_px, height_px)
    deadline = time.monotonic() + seconds
    pause = raw.IFSDK_PAUSE()
    pause.version = 1
    # The engine asks between objects whether to stop; the callback must outlive the rendering.
    ask = type(pause.NeedToPauseNow)(lambda _: time.monotonic() > deadline)
    pause.NeedToPauseNow = ask
    status = raw.FPDF_RenderPageBitmap_Start(
        bitmap, page, 0, 0, width_px, height_px, 0, raw.FPDF_ANNOT, pause
    )
    while status == raw.FPDF_RENDER_TOBECONTINUED and time.monotonic() <= deadline:
        status = raw.FPDF_RenderPage_Continue(page, pause)
    raw.FPDF_RenderPage_Close(page)
    if status == raw.FPDF_RENDER_TOBECONTINUED:
        raise refusal(
            path, f"the page took longer than {seconds:g} s to draw", "save the chart's part of it as PNG"
        )
    if status != raw.FPDF_RENDER_DONE:
        raise refusal(path, "the page could not be drawn", "save it as PNG")
    return _rgb(bitmap)


def render_exact(page, scale, shift, size):
    """(height, width, 3) uint8 RGB: display points times `scale` plus `shift` (x, y) are outer px corners."""
    from pypdfium2 import raw

    width, height = size
    bitmap = _white_bitmap(width, height)
    matrix = raw.FS_MATRIX(scale[0], 0, 0, scale[1], shift[0], shift[1])
    raw.FPDF_RenderPageBitmapWithMatrix(
        bitmap, page, matrix, raw.FS_RECTF(0, 0, width, height), raw.FPDF_ANNOT
    )
    return _rgb(bitmap)


@contextlib.contextmanager
def hidden_objects(items):
    """Page objects, by the engine's handles, left out of what is drawn for a while."""
    from pypdfium2 import raw

    for item in items:
        raw.FPDFPageObj_SetIsActive(item, False)
    try:
        yield
    finally:
        for item in items:
            raw.FPDFPageObj_SetIsActive(item, True)


def _white_bitmap(width, height):
    import pypdfium2
    from pypdfium2 import raw

    bitmap = pypdfium2.PdfBitmap.new_native(width, height, raw.FPDFBitmap_BGR)
    raw.FPDFBitmap_FillRect(bitmap, 0, 0, width, height, 0xFFFFFFFF)
    return bitmap


def _rgb(bitmap):
    rgb = np.ascontiguousarray(bitmap.to_numpy()[:, :, ::-1])
    bitmap.close()
    return rgb


def _open_refusal(path, error):
    code = getattr(error, "err_code", None)
    if code in PASSWORD_CODES or "password" in str(error).lower():
        return refusal(path, "the PDF is locked with a password", "save an unlocked copy, or the page as PNG")
    said = " ".join(str(error).split())[:80]
    return refusal(path, f"the PDF is broken or cut short ({said})", "save or download it again")


def refusal(path, cause, remedy):
    """A `PictureError` of this stage."""
    return PictureError(cause, remedy=remedy, stage="picture", source=path)
