"""Open a picture file safely and bring it to one form: 8-bit RGB on white, upright.

Stub: the loader follows.
"""

from dataclasses import dataclass, field

import numpy as np

from .frozen import lock_arrays

__all__ = ["Picture", "open_picture"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Picture:
    """The pixels that the reading works on.

    rgb : (height, width, 3) uint8, sRGB, alpha laid on white, EXIF turn applied
    path : the file as named by the user
    sha256 : hex digest of the file's bytes
    width, height : px, of the whole picture (a crop is applied later, in picture coordinates)
    page : 1-based page of a PDF, or None
    kind : "png", "jpeg", "gif", "tiff", "bmp", "webp", "pdf"
    notes : tuple of str, what was done on opening ("first of 3 frames", "16-bit reduced", ...)
    vector : the page's vector objects when a PDF page was opened, else None
    """

    rgb: np.ndarray
    path: str
    sha256: str
    width: int
    height: int
    page: int | None = None
    kind: str = ""
    notes: tuple = ()
    vector: object = field(default=None, repr=False)

    def __post_init__(self):
        lock_arrays(self)


def open_picture(path, *, page=None):
    """Open the file at `path` as a `Picture`; raises `PictureError`."""
    raise NotImplementedError
