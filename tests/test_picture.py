"""Opening pictures: every kind ends as the same upright RGB on white; others are refused in a line."""

import hashlib
import os
import struct
import zlib

import numpy as np
import pytest
from PIL import Image

from digitise.exceptions import PictureError
from digitise.picture import open_picture

JPEG_LEVELS = 6  # colour levels that a JPEG of quality 95 may be off on smooth areas
WIDTH, HEIGHT = 40, 26


def sample():
    """A picture with a corner of each kind: white, black, a grey ramp and a strong colour; not square."""
    rgb = np.full((HEIGHT, WIDTH, 3), 255, np.uint8)
    rgb[:13, :20] = 0
    rgb[13:, :20] = np.linspace(0, 255, 20).astype(np.uint8)[None, :, None]
    rgb[13:, 20:] = (200, 30, 60)
    return rgb


def save(tmp_path, image, name="a.png", **options):
    """Save a Pillow image and give its path."""
    path = tmp_path / name
    image.save(path, **options)
    return path


def grey(rgb):
    """The luma that Pillow makes of RGB (ITU-R BT.601 weights)."""
    return np.array(Image.fromarray(rgb).convert("L"))


@pytest.mark.parametrize(
    ("suffix", "kind"), [("png", "png"), ("bmp", "bmp"), ("tiff", "tiff"), ("webp", "webp")]
)
def test_lossless_kinds_keep_every_pixel(tmp_path, suffix, kind):
    """PNG, BMP, TIFF and lossless WebP: pixels, size, kind and sha256."""
    options = {"lossless": True} if suffix == "webp" else {}
    path = save(tmp_path, Image.fromarray(sample()), f"a.{suffix}", **options)

    picture = open_picture(path)

    assert np.array_equal(picture.rgb, sample())
    assert (picture.width, picture.height, picture.kind) == (WIDTH, HEIGHT, kind)
    assert picture.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()
    assert picture.path == str(path)
    assert not picture.rgb.flags.writeable


def test_the_kind_is_told_by_content_not_by_name(tmp_path):
    """A PNG that is named .jpg opens as PNG."""
    path = save(tmp_path, Image.fromarray(sample()), "a.jpg", format="PNG")

    assert open_picture(path).kind == "png"


def test_jpeg_is_opened_close_to_its_pixels(tmp_path):
    """A JPEG of high quality."""
    picture = open_picture(save(tmp_path, Image.fromarray(sample()), "a.jpg", quality=95, subsampling=0))

    assert picture.kind == "jpeg"
    assert np.median(np.abs(picture.rgb.astype(int) - sample())) <= JPEG_LEVELS


def test_a_cmyk_jpeg_becomes_rgb(tmp_path):
    """CMYK as print shops deliver it; black ink is black, bare paper white."""
    image = Image.fromarray(sample()).convert("CMYK")
    picture = open_picture(save(tmp_path, image, "a.jpg", quality=95, subsampling=0))

    assert picture.rgb[5, 30].min() > 245
    assert picture.rgb[5, 5].max() < 12
    assert "CMYK" in picture.notes[0]


@pytest.mark.parametrize("orientation", range(1, 9))
def test_the_exif_turn_is_applied(tmp_path, orientation):
    """Every orientation of Exif (CIPA DC-008, 4.6.4): the picture stands upright again."""
    back = {
        2: 0,
        3: 3,
        4: 1,
        5: 5,
        6: 2,
        7: 6,
        8: 4,
    }  # Image.Transpose that undoes each orientation when storing
    upright = Image.fromarray(sample())
    stored = upright if orientation == 1 else upright.transpose(Image.Transpose(back[orientation]))
    exif = Image.Exif()
    exif[0x0112] = orientation
    picture = open_picture(save(tmp_path, stored, "a.png", exif=exif))

    assert np.array_equal(picture.rgb, sample())
    assert (picture.width, picture.height) == (WIDTH, HEIGHT)


@pytest.mark.parametrize("mode", ["L", "1", "LA", "P"])
def test_grey_bilevel_and_palette_pictures(tmp_path, mode):
    """Fewer colours than RGB, the same look."""
    bare = Image.fromarray(sample())
    image = bare.quantize(256) if mode == "P" else bare.convert(mode)
    picture = open_picture(save(tmp_path, image))

    expected = np.array(bare.convert("1")) * 255 if mode == "1" else grey(sample())
    assert picture.rgb.shape == (HEIGHT, WIDTH, 3)
    assert np.abs(grey(picture.rgb).astype(int) - expected).max() <= (3 if mode == "P" else 0)


@pytest.mark.parametrize(("white", "note"), [(65535, "16-bit"), (4095, "12-bit")])
def test_deep_grey_is_reduced_to_eight_bits(tmp_path, white, note):
    """16-bit PNGs, and 12-bit scans stored in 16 bits, keep white white and the ramp even."""
    deep = np.round(np.linspace(0, white, WIDTH)[None, :] * np.ones((HEIGHT, 1))).astype(np.uint16)
    picture = open_picture(save(tmp_path, Image.fromarray(deep)))

    assert picture.rgb[0, -1, 0] == 255
    assert np.abs(picture.rgb[0, :, 0] - np.linspace(0, 255, WIDTH)).max() <= 1
    assert note in picture.notes[0]


def test_floating_grey_is_stretched(tmp_path):
    """A TIFF of floating numbers from 0 to 1."""
    deep = np.linspace(0, 1, WIDTH, dtype=np.float32)[None, :] * np.ones((HEIGHT, 1), np.float32)
    picture = open_picture(save(tmp_path, Image.fromarray(deep), "a.tiff"))

    assert np.abs(picture.rgb[0, :, 0] - np.linspace(0, 255, WIDTH)).max() <= 1


@pytest.mark.parametrize("mode", ["RGBA", "LA", "P"])
def test_transparent_parts_are_white(tmp_path, mode):
    """Alpha, grey with alpha, and a palette with a transparent entry are laid on white."""
    rgba = np.zeros((HEIGHT, WIDTH, 4), np.uint8)
    rgba[:, 10:20, 3] = 255
    rgba[:, 20:30, 3] = 128
    image = Image.fromarray(rgba)
    if mode == "P":
        index = np.full((HEIGHT, WIDTH), 1, np.uint8)
        index[:, 10:20] = 0
        image = Image.fromarray(index)
        image.putpalette([0, 0, 0, 9, 9, 9])
        picture = open_picture(save(tmp_path, image, transparency=1))
    else:
        picture = open_picture(save(tmp_path, image.convert(mode)))

    assert picture.rgb[:, :10].min() == 255
    assert picture.rgb[:, 10:20].max() == 0
    assert "white" in picture.notes[0]
    if mode == "RGBA":
        assert np.abs(picture.rgb[:, 20:30].astype(int) - 127).max() <= 1


@pytest.mark.parametrize("suffix", ["gif", "webp"])
def test_the_first_frame_of_an_animation(tmp_path, suffix):
    """Moving pictures: the first frame counts, and that is noted."""
    frames = [Image.fromarray(np.full((20, 30, 3), level, np.uint8)) for level in (200, 90, 10)]
    options = {"lossless": True} if suffix == "webp" else {}
    path = save(tmp_path, frames[0], f"a.{suffix}", save_all=True, append_images=frames[1:], **options)

    picture = open_picture(path)

    assert np.abs(picture.rgb.astype(int) - 200).max() <= 2
    assert picture.notes[0] == "first of 3 frames"


def test_a_page_of_a_tiff_can_be_chosen(tmp_path):
    """Fax and scan files hold several pages of different size."""
    first, second = np.full((20, 30), 200, np.uint8), np.full((25, 35), 90, np.uint8)
    path = save(
        tmp_path, Image.fromarray(first), "a.tiff", save_all=True, append_images=[Image.fromarray(second)]
    )

    picture = open_picture(path, page=2)

    assert picture.rgb.shape == (25, 35, 3)
    assert picture.page == 2
    assert picture.rgb.max() == 90


def png_header(width, height):
    """The bytes of a PNG that announces a size and holds next to nothing (ISO/IEC 15948)."""

    def chunk(kind, body):
        return struct.pack(">I", len(body)) + kind + body + struct.pack(">I", zlib.crc32(kind + body))

    body = struct.pack(">IIBBBBB", width, height, 8, 2, 0, 0, 0)
    return (
        b"\x89PNG\r\n\x1a\n"
        + chunk(b"IHDR", body)
        + chunk(b"IDAT", zlib.compress(b"\0" * 100))
        + chunk(b"IEND", b"")
    )


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "empty"),
        (b"angle,level\n0,1\n", "is text, not a picture"),
        (b"<?xml version='1.0'?><svg xmlns='x'/>", "SVG"),
        (b"<!DOCTYPE html><html>", "web page"),
        (b"\0\0\0\x20ftypheic" + b"\0" * 40, "HEIF"),
        (b"PK\3\4" + b"\0" * 100, "not a picture of a known kind"),
        (png_header(40_000, 40_000), "megapixels"),
        (png_header(12_000, 10_000), "120 megapixels"),
        (png_header(40_000, 2), "side above"),
        (png_header(100, 100), "broken or cut short"),
        (png_header(0, 100), "broken|no pixels|known kind"),
    ],
)
def test_what_cannot_be_opened_is_refused_in_one_line(tmp_path, content, message):
    """Empty, not a picture, too large for its header, broken: cause, remedy, file name, exit status 4."""
    path = tmp_path / "a.png"
    path.write_bytes(content)

    with pytest.raises(PictureError, match=message) as caught:
        open_picture(path)

    said = str(caught.value)
    assert said.startswith(str(path))
    assert "\n" not in said
    assert caught.value.remedy
    assert caught.value.exit_status == 4


@pytest.mark.parametrize("suffix", ["png", "jpg", "gif", "bmp", "tiff", "webp"])
def test_a_truncated_picture_is_refused(tmp_path, suffix):
    """A download that stopped half-way, for every kind."""
    rng = np.random.default_rng(71)
    path = save(tmp_path, Image.fromarray(rng.integers(0, 255, (60, 80, 3), np.uint8)), f"a.{suffix}")
    data = path.read_bytes()
    path.write_bytes(data[: len(data) // 2])

    with pytest.raises(PictureError, match="broken or cut short"):
        open_picture(path)


def test_bytes_changed_at_random_never_escape_the_refusal(tmp_path):
    """A damaged file opens or is refused; no decoder's own exception comes through."""
    rng = np.random.default_rng(72)
    for suffix in ("png", "gif", "tiff", "jpg", "webp", "bmp"):
        path = save(tmp_path, Image.fromarray(sample()), f"a.{suffix}")
        whole = np.frombuffer(path.read_bytes(), np.uint8)
        for _ in range(25):
            damaged = whole.copy()
            damaged[rng.integers(4, len(whole), 6)] = rng.integers(0, 256, 6)
            path.write_bytes(damaged.tobytes())
            try:
                assert open_picture(path).rgb.ndim == 3
            except PictureError:
                pass


def test_places_that_are_no_file_are_refused(tmp_path):
    """A folder, a missing file, a device, a name that no system allows."""
    for path, message in (
        (tmp_path, "is a folder"),
        (tmp_path / "none.png", "no such file"),
        (os.devnull, "not an ordinary file"),
        ("a\0b.png", "cannot be opened"),
    ):
        with pytest.raises(PictureError, match=message):
            open_picture(path)


def test_a_page_that_is_not_there_is_refused(tmp_path):
    """`--page 3` of a picture with one page."""
    path = save(tmp_path, Image.fromarray(sample()))

    with pytest.raises(PictureError, match="1 page, so no page 3"):
        open_picture(path, page=3)
