"""Open a picture file safely and bring it to one form: 8-bit RGB on white, upright.

The file is judged before it is decoded: what kind it is by its first bytes (never by its name), how large it
will become by its header. Only then are pixels made, so that a small file that unpacks to gigabytes costs
nothing. Colours are taken as sRGB; an embedded colour profile is not applied, since a trace's place does not
hang on it.
"""

import hashlib
import io
import os
import stat
import warnings
from dataclasses import dataclass, field

import numpy as np

from .exceptions import PictureError
from .frozen import lock_arrays

__all__ = ["MAX_MEGAPIXELS", "Picture", "open_picture"]

MAX_MEGAPIXELS = 100  # 300 MB as RGB; a 600 dpi scan of an A3 sheet has 70
MAX_SIDE_PX = 30_000  # OpenCV's remapping addresses pixels with 16-bit signed numbers
MAX_FILE_BYTES = 500_000_000  # read whole for its sha256; uncompressed 100 megapixels are 400 MB

KINDS = {
    "PNG": "png",
    "JPEG": "jpeg",
    "MPO": "jpeg",
    "GIF": "gif",
    "TIFF": "tiff",
    "BMP": "bmp",
    "WEBP": "webp",
}
DECODERS = ("PNG", "JPEG", "GIF", "TIFF", "BMP", "WEBP")
KINDS_SAID = "PNG, JPEG, GIF, TIFF, BMP, WebP or PDF"
FULL_SCALES = (255, 1023, 4095, 16383, 65535)  # white in 8, 10, 12, 14 and 16 bits
EXIF_ORIENTATION = 0x0112  # CIPA DC-008 (Exif 2.3), 4.6.4, tag Orientation


@dataclass(frozen=True, eq=False, kw_only=True)
class Picture:
    """The pixels that the reading works on.

    rgb : (height, width, 3) uint8, sRGB, alpha laid on white, EXIF turn applied
    path : the file as named by the user
    sha256 : hex digest of the file's bytes
    width, height : px, of the whole picture (a crop is applied later, in picture coordinates)
    page : 1-based page of a PDF or TIFF, or None
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
    """Open the file at `path` as a `Picture`.

    Parameters
    ----------
    path : str or path-like
    page : 1-based page of a PDF or of a TIFF with several pages; None takes the first

    Raises `PictureError` (missing, a folder, empty, not a picture, broken, too large, no such page).
    """
    path = os.fspath(path)
    data = _read_bytes(path)
    if data[:1024].lstrip().startswith(b"%PDF-"):
        return _open_pdf(path, page)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # remarks on odd headers; our own bounds are checked below
        image, notes = _open_image(data, path, page)
        kind = KINDS[image.format]
        try:
            image, turned = _upright(image)
            rgb, made = _to_rgb(image)
        except MemoryError:
            raise _refusal(
                path, "not enough memory to open it", "crop or scale the picture down first"
            ) from None
        except Exception as error:  # a broken file makes decoders raise nearly anything
            raise _broken(path, error) from error
    return Picture(
        rgb=rgb,
        path=path,
        sha256=hashlib.sha256(data).hexdigest(),
        width=rgb.shape[1],
        height=rgb.shape[0],
        page=page,
        kind=kind,
        notes=(*notes, *turned, *made),
    )


def _read_bytes(path):
    """The file's bytes, refused when it is no ordinary file, empty or huge."""
    try:
        status = os.stat(path)
        if stat.S_ISDIR(status.st_mode):
            raise _refusal(path, "is a folder", "name the pictures in it, or use digitise batch")
        if not stat.S_ISREG(status.st_mode):
            raise _refusal(path, "is not an ordinary file", "name a picture file")
        if status.st_size > MAX_FILE_BYTES:
            cause = f"has {status.st_size / 1e6:.0f} MB, more than {MAX_FILE_BYTES / 1e6:.0f}"
            raise _refusal(path, cause, "crop or scale the picture down first")
        with open(path, "rb") as file:
            data = file.read()
    except FileNotFoundError:
        raise _refusal(path, "no such file", "check the name and the folder") from None
    except (OSError, ValueError) as error:  # ValueError: a null byte in the name
        said = getattr(error, "strerror", None) or str(error)
        raise _refusal(path, f"cannot be opened ({said})", "check the name and the permissions") from None
    if not data:
        raise _refusal(path, "the file is empty", "save or download it again")
    return data


def _open_image(data, path, page):
    """A Pillow image with its size checked and nothing decoded yet, on the right frame; and notes."""
    from PIL import Image, UnidentifiedImageError

    try:
        image = Image.open(io.BytesIO(data), formats=DECODERS)
    except Image.DecompressionBombError:
        raise _too_large(path, "more than 178 megapixels") from None
    except UnidentifiedImageError:
        raise _not_a_picture(path, data) from None
    except Exception as error:
        raise _broken(path, error) from error
    _check_size(path, image.size)
    try:
        n_frames = int(getattr(image, "n_frames", 1))
    except Exception:  # a cut file may still hold a whole first frame
        n_frames = 1
    if page is not None and not 1 <= page <= n_frames:
        raise _refusal(
            path, f"has {n_frames} page{'s' * (n_frames > 1)}, so no page {page}", "give another --page"
        )
    notes = []
    try:
        image.seek((page or 1) - 1)
    except Exception as error:
        raise _broken(path, error) from error
    if n_frames > 1:
        notes.append(f"{'first' if page is None else f'number {page}'} of {n_frames} frames")
    _check_size(path, image.size)  # pages of one TIFF differ in size
    return image, notes


def _check_size(path, size):
    """Refuse a picture whose header announces no pixel, or too many."""
    width, height = size
    if width < 1 or height < 1:
        raise _refusal(path, f"has no pixels ({width} x {height})", "save or download it again")
    if width * height > MAX_MEGAPIXELS * 1e6:
        raise _too_large(path, f"{width} x {height} px is {width * height / 1e6:.0f} megapixels")
    if max(width, height) > MAX_SIDE_PX:
        raise _refusal(
            path,
            f"{width} x {height} px has a side above {MAX_SIDE_PX} px",
            "crop the picture to the chart first",
        )


def _upright(image):
    """Decode, and turn as the camera's orientation tag says; an unreadable tag turns nothing."""
    from PIL import ImageOps

    image.load()
    try:
        orientation = image.getexif().get(EXIF_ORIENTATION, 1)
    except Exception:
        return image, ()
    if orientation not in range(2, 9):
        return image, ()
    return ImageOps.exif_transpose(image), ("turned as its EXIF tag says",)


def _to_rgb(image):
    """(height, width, 3) uint8 of a decoded Pillow image of any mode, and notes on what was done."""
    from PIL import Image

    if image.mode == "F" or image.mode.startswith("I"):
        grey, note = _to_eight_bits(np.asarray(image))
        return np.repeat(grey[:, :, None], 3, axis=2), (note,)
    if image.has_transparency_data:
        image = image.convert("RGBA")
        if image.getchannel("A").getextrema()[0] == 255:
            return np.array(image.convert("RGB")), ()
        paper = Image.new("RGBA", image.size, "white")
        return np.array(Image.alpha_composite(paper, image).convert("RGB")), (
            "transparent parts laid on white",
        )
    notes = (f"{image.mode} colours taken as RGB",) if image.mode in ("CMYK", "YCbCr", "LAB", "HSV") else ()
    return np.array(image.convert("RGB")), notes


def _to_eight_bits(values):
    """(height, width) uint8 of deep grey values: by the bit depth that holds them, or by their range."""
    if values.dtype.kind == "b":
        return values.astype(np.uint8) * 255, "1-bit widened"
    finite = np.where(np.isfinite(values), values, 0).astype(np.float32)
    low, high = float(finite.min()), float(finite.max())
    if values.dtype.kind in "iu" and 0 <= low and high <= FULL_SCALES[-1]:
        white = next(scale for scale in FULL_SCALES if high <= scale)
        return np.round(finite * np.float32(255 / white)).astype(
            np.uint8
        ), f"{white.bit_length()}-bit grey reduced"
    if values.dtype.kind == "f" and 0 <= low and high <= 1:
        low, high = 0.0, 1.0
    span = (high - low) or 1.0
    return np.round((finite - np.float32(low)) * np.float32(255 / span)).astype(
        np.uint8
    ), "deep grey stretched"


def _open_pdf(path, page):
    """A page of a PDF, by the optional reader."""
    try:
        from .pdf import open_pdf_page

        return open_pdf_page(path, page=page)
    except ModuleNotFoundError as error:
        if (error.name or "").split(".")[0] != "pypdfium2":
            raise
        raise _refusal(
            path,
            "is a PDF, and the PDF reader is not installed",
            'pip install "digitise[pdf]", or save the page as PNG',
        ) from None


def _not_a_picture(path, data):
    """The refusal for bytes of no known kind, with a word on what they look like."""
    head = data[:4096]
    remedy = f"give a {KINDS_SAID} file"
    if b"<svg" in head.lower():
        return _refusal(path, "is an SVG drawing", "export it as PNG, 1000 px wide or more")
    if b"<html" in head.lower() or b"<!doctype html" in head.lower():
        return _refusal(path, "is a web page, not a picture", "save the picture itself")
    if head[4:12] in (b"ftypheic", b"ftypheix", b"ftypmif1", b"ftypavif"):
        return _refusal(path, "is a HEIF or AVIF picture", "save it as PNG or JPEG")
    if b"\0" not in head:
        return _refusal(path, "is text, not a picture", remedy)
    return _refusal(path, "is not a picture of a known kind", remedy)


def _broken(path, error):
    said = " ".join(str(error).split())[:80] or type(error).__name__
    return _refusal(path, f"the picture is broken or cut short ({said})", "save or download it again")


def _too_large(path, said):
    return _refusal(
        path,
        f"{said}, above the bound of {MAX_MEGAPIXELS}",
        "crop the picture to the chart or scale it down first",
    )


def _refusal(path, cause, remedy):
    return PictureError(cause, remedy=remedy, stage="picture", source=path)
