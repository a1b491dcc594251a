"""Opening PDF pages: resolution, bitmaps at their own pixels, turned and cropped pages, refusals."""

import hashlib
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from digitise import _pdf_file, _pdf_objects, pdf
from digitise.exceptions import PictureError
from digitise.pdf import open_pdf_page, page_count, page_thumbnails
from digitise.picture import open_picture
from tests.pdf_pages import bitmap, curve_circle, form, line, pdf_file, spokes, stream, text

X, Y, R = 200.0, 190.0, 150.0
CHART = (
    "0.6 0.6 0.6 RG 0.5 w\n" + "".join(curve_circle(X, Y, R * k / 4) for k in (1, 2, 3, 4)) + spokes(X, Y, R)
)


@pytest.fixture
def write(tmp_path):
    """Write bytes as a file and give its path."""

    def put(data, name="page.pdf"):
        path = tmp_path / name
        path.write_bytes(data)
        return str(path)

    return put


def noise(height, width, seed=5):
    """A picture in which every px differs from its neighbours."""
    return np.random.default_rng(seed).integers(0, 256, (height, width, 3), dtype=np.uint8)


def chart_bitmap(side=420):
    """A picture of rings and spokes of the usual kind."""
    import cv2

    rgb = np.full((side, side, 3), 255, np.uint8)
    middle, radius = side // 2, int(0.42 * side)
    for k in (1, 2, 3, 4):
        cv2.circle(rgb, (middle, middle), radius * k // 4, (120, 120, 120), 1, cv2.LINE_AA)
    for deg in range(0, 360, 30):
        end = middle + radius * np.sin(np.radians(deg)), middle - radius * np.cos(np.radians(deg))
        cv2.line(rgb, (middle, middle), tuple(round(v) for v in end), (150, 150, 150), 1, cv2.LINE_AA)
    return rgb


def placed(rgb, matrix, before="", after="", *, jpeg=False, **options):
    """A PDF with one bitmap under a matrix."""
    content = f"{before} q {' '.join(f'{v:g}' for v in matrix)} cm /I Do Q {after}"
    return pdf_file(
        content, objects=[bitmap(rgb, jpeg=jpeg)], resources="/XObject << /I 10 0 R >>", **options
    )


def test_a_drawn_chart_sets_the_resolution(write):
    """The page is drawn so that the chart's radius is 400 px, and both sides are scaled alike."""
    path = write(pdf_file(CHART, size=(401.3, 517.9)))
    picture = open_picture(path)

    assert picture.kind == "pdf"
    assert picture.page == 1
    assert picture.sha256 == hashlib.sha256(Path(path).read_bytes()).hexdigest()
    assert picture.rgb.shape == (picture.height, picture.width, 3)
    assert R * picture.width / 401.3 == pytest.approx(pdf.OUTER_PX, rel=0.07)
    assert picture.width / 401.3 == pytest.approx(picture.height / 517.9, rel=3e-5)
    assert picture.notes[0] == "page 1 of 1"


def test_drawn_places_and_drawn_pixels_agree(write):
    """A triangle's middle by its corners is its middle by its pixels to 0.01 px, on odd and turned pages."""
    corners = [(50, 40), (110.4, 44), (97, 70.2)]
    for turn in (0, 90, 180, 270):
        shape = "0 0 0 rg\n" + line(*zip(*corners, strict=True), close=True, paint="f")
        path = write(
            pdf_file(shape, size=(200.3, 150.7), page=f"/Rotate {turn} /CropBox [20.2 10.1 180 140]")
        )
        picture = open_pdf_page(path)
        dark = 255.0 - picture.rgb[:, :, 0]
        y, x = np.mgrid[: picture.height, : picture.width]
        seen = np.array([(dark * x).sum(), (dark * y).sum()]) / dark.sum()

        drawn = picture.vector.paths[0].runs[0][:3].mean(axis=0)
        assert seen == pytest.approx(drawn, abs=0.01)


def test_a_scan_is_taken_at_its_own_pixels(write):
    """A page that is one bitmap gives that bitmap, px for px, as PNG-like and as JPEG data."""
    rgb = noise(180, 240)
    picture = open_pdf_page(write(placed(rgb, (397.3, 0, 0, 300.2, 1.1, 0.4), size=(400, 301))))

    assert np.array_equal(picture.rgb, rgb)
    assert picture.vector.embedded
    assert "240 x 180 px" in picture.notes[-1]


@pytest.mark.parametrize("turn", [0, 90, 180, 270])
def test_turned_scans_keep_their_pixels(write, turn):
    """A turned page turns the bitmap by quarters and changes no px."""
    rgb = noise(90, 120)
    picture = open_pdf_page(
        write(placed(rgb, (333.3, 0, 0, 261.7, 3.3, 1.9), size=(340, 265), page=f"/Rotate {turn}"))
    )

    assert np.array_equal(picture.rgb, np.rot90(rgb, -turn // 90))


def test_jpeg_bitmaps_keep_their_pixels(write):
    """JPEG data are not resampled: they are what Pillow decodes, but for a decoder's own rounding."""
    import io

    from PIL import Image

    rgb = chart_bitmap(200)
    data = placed(rgb, (300, 0, 0, 300, 0, 0), size=(300, 300), jpeg=True)
    start = data.index(b"\xff\xd8")
    decoded = np.asarray(
        Image.open(io.BytesIO(data[start : data.index(b"endstream", start)])).convert("RGB")
    ).astype(int)

    picture = open_pdf_page(write(data))

    assert np.abs(picture.rgb - decoded).max() <= 3


def test_strips_of_a_scan_are_joined(write):
    """A scan cut into strips is one picture of all its rows."""
    rgb = noise(150, 100)
    parts = [bitmap(np.ascontiguousarray(rgb[k : k + 50])) for k in (0, 50, 100)]
    content = "".join(f"q 200 0 0 100 0 {200 - 100 * k} cm /I{k} Do Q " for k in range(3))
    names = "/XObject << " + " ".join(f"/I{k} {10 + k} 0 R" for k in range(3)) + " >>"
    picture = open_pdf_page(write(pdf_file(content, size=(200, 300), objects=parts, resources=names)))

    assert np.array_equal(picture.rgb, rgb)


def test_a_chart_bitmap_on_a_page_of_text(write):
    """The chart's bitmap becomes the picture; what is laid over it stays on it, with its place known."""
    rgb = chart_bitmap()
    words = "".join(
        text(40, 700 - 14 * k, "Words of a page about an invented antenna", 10) for k in range(20)
    )
    over = text(290, 202, "-10 dB", 9)
    picture = open_pdf_page(
        write(placed(rgb, (180, 0, 0, 180, 200, 110), before=words, after=over, size=(595, 842)))
    )

    assert picture.rgb.shape == rgb.shape
    differ = np.any(picture.rgb != rgb, axis=2)
    label = next(item for item in picture.vector.texts if item.text == "-10 dB")
    y, x = np.nonzero(differ)
    assert 0 < differ.mean() < 0.01
    assert (x.min() + x.max()) / 2 == pytest.approx(label.x, abs=2)
    assert (y.min() + y.max()) / 2 == pytest.approx(label.y, abs=2)


def test_two_chart_bitmaps_are_stacked(write):
    """Two bitmaps with a chart each are both kept at their own pixels, in reading order."""
    left, right = chart_bitmap(300), chart_bitmap(360)
    content = "q 200 0 0 200 330 300 cm /B Do Q q 200 0 0 200 40 302 cm /A Do Q"
    objects = [bitmap(left), bitmap(right)]
    path = write(
        pdf_file(content, size=(595, 842), objects=objects, resources="/XObject << /A 10 0 R /B 11 0 R >>")
    )
    picture = open_pdf_page(path)

    assert picture.rgb.shape == (300 + 360 + pdf.STACK_GAP_PX, 360, 3)
    assert np.array_equal(picture.rgb[:300, :300], left)
    assert np.array_equal(picture.rgb[-360:], right)


def test_a_plain_page_is_drawn_at_200_dots_an_inch(write):
    """A page without a chart is drawn at the usual resolution."""
    picture = open_pdf_page(write(pdf_file(text(50, 50, "Nothing to see"), size=(400, 300))))

    assert picture.width == pytest.approx(400 * 200 / 72, rel=0.06)
    assert [item.text for item in picture.vector.texts] == ["Nothing to see"]


def test_large_pages_are_bounded(write):
    """A chart small on a huge sheet does not make more than 25 megapixels; a huge page size is refused."""
    small = CHART.replace("0.5 w", "0.1 w")
    content = "q 0.2 0 0 0.2 1000 1000 cm " + small + "Q"
    picture = open_pdf_page(write(pdf_file(content, size=(6000, 6000))))
    assert picture.width * picture.height <= 25e6

    with pytest.raises(PictureError, match=r"the page is 60000 x 40000 points"):
        open_pdf_page(write(pdf_file(CHART, size=(60000, 40000))))
    with pytest.raises(PictureError, match=r"outside 9 to 20000"):
        open_pdf_page(write(pdf_file(CHART, size=(2, 400))))


def test_pages_are_chosen_and_counted(write):
    """Pages are 1-based; the first is the default; one that is not there is refused with the count."""
    path = write(pdf_file([CHART, text(30, 30, "second"), ""], size=(400, 400)))

    assert page_count(path) == 3
    assert open_pdf_page(path, page=2).vector.texts[0].text == "second"
    assert open_pdf_page(path).notes[0] == "page 1 of 3"
    for page in (0, -1, 4):
        with pytest.raises(PictureError, match=rf"has 3 pages, so no page {page}; give another --page"):
            open_pdf_page(path, page=page)


def test_thumbnails(write):
    """Small pictures of some pages, None for one that cannot be drawn."""
    path = write(pdf_file([CHART, CHART, "", CHART], size=(400, 300)))
    found = page_thumbnails(path, size_px=100, first=2, count=2)

    assert [number for number, _ in found] == [2, 3]
    assert found[0][1].shape == (75, 100, 3)
    assert found[0][1].min() < 230
    assert found[1][1].min() == 255
    assert page_thumbnails(write(pdf_file(CHART, size=(90000, 300))))[0][1] is None


def locked(data):
    """A PDF whose trailer says that it is locked with a password nobody knows (standard handler, 40 bits)."""
    return data.replace(
        b"trailer << ",
        b"trailer << /ID [<00> <00>] /Encrypt << /Filter /Standard /V 1 /R 2 /P -4 "
        b"/O <" + b"11" * 32 + b"> /U <" + b"22" * 32 + b"> >> ",
    )


@pytest.mark.parametrize(
    ("data", "said"),
    [
        (locked(pdf_file(CHART)), "locked with a password; save an unlocked copy"),
        (b"%PDF-1.7\nnothing of the kind", "broken or cut short"),
        (pdf_file(CHART)[:300], "broken or cut short"),
        (pdf_file([]), "broken or cut short"),
        (b"", "empty"),
    ],
    ids=["locked", "garbage", "cut", "no-pages", "empty"],
)
def test_refusals_name_cause_and_remedy(write, data, said):
    """A PDF that cannot be opened says why and what helps, and names the file."""
    path = write(data)
    with pytest.raises(PictureError, match=said) as caught:
        open_pdf_page(path)

    assert caught.value.source == path
    assert caught.value.remedy
    assert caught.value.exit_status == 4


def test_a_missing_file_and_a_folder(tmp_path):
    """What is not there and what is no file are refused as for any picture."""
    with pytest.raises(PictureError, match="no such file"):
        page_count(tmp_path / "none.pdf")
    with pytest.raises(PictureError, match="is a folder"):
        page_thumbnails(tmp_path)


def test_a_page_that_takes_too_long_is_refused(write, monkeypatch):
    """Drawing is given up at its time bound."""
    monkeypatch.setattr(_pdf_file, "RENDER_SECONDS", 0.0)
    with pytest.raises(PictureError, match="took longer than 0 s to draw"):
        open_pdf_page(write(pdf_file(CHART * 40)))


@pytest.mark.parametrize(
    ("bound", "value"), [("MAX_OBJECTS", 50), ("MAX_SEGMENTS", 200), ("COLLECT_SECONDS", 0.0)]
)
def test_a_page_with_too_many_objects_is_read_from_pixels(write, monkeypatch, bound, value):
    """Above the bounds the page is still drawn, and says that its objects are not used."""
    monkeypatch.setattr(_pdf_objects, bound, value)
    dots = "".join(f"{k} {k} 0.5 0.5 re f\n" for k in range(100))
    picture = open_pdf_page(write(pdf_file(dots)))

    assert picture.vector is None
    assert any("too many drawn objects" in note for note in picture.notes)


def test_odd_objects_do_not_stop_a_page(write):
    """Forms within themselves, bad numbers, empty paths, wild dashes and clips to nothing are left out."""
    loop = form("/F Do " + CHART).replace(b"/Font", b"/XObject << /F 10 0 R >> /Font")
    odd = (
        "q 1e30 0 0 1e30 0 0 cm 0 0 m 1 1 l S Q\n 0 0 m S\n 5 5 m 5 5 l h S\n"
        "[0 0] 0 d 9 9 m 50 9 l S [] 0 d\n"
        "q 0 0 0 0 0 0 cm 0 0 m 10 10 l S Q\n 10 10 m n\n q 1 1 m 1 1 l W n 0 0 m 100 100 l S Q\n"
        "/Pattern CS /None SCN 0 0 m 90 10 l S\n /Nothing Do BT (unset) Tj ET\n -1 w 0 0 m 33 44 l S 1 w\n"
        "1e9 1e9 m -1e9 1e9 l S\n/F Do\n"
    )
    picture = open_pdf_page(write(pdf_file(odd, objects=[loop], resources="/XObject << /F 10 0 R >>")))

    assert picture.width > 100


def test_spoiled_bytes_never_crash(write):
    """A page with bytes changed at random opens, or is refused as a picture error, and nothing else."""
    from digitise.vector import find_vector_charts

    rng = np.random.default_rng(11)
    whole = bytearray(
        placed(chart_bitmap(60), (100, 0, 0, 100, 0, 0), before=CHART, after=text(30, 30, "-10 dB"))
    )
    refused = []
    for _ in range(25):
        data = bytearray(whole)
        for place in rng.integers(9, len(data), rng.integers(1, 40)):
            data[place] = rng.integers(0, 256)
        try:
            find_vector_charts(open_pdf_page(write(bytes(data))))
        except PictureError as error:
            refused.append(error.remedy)

    assert all(refused)


def test_an_image_without_its_data_leaves_a_page(write):
    """A bitmap of broken data is a blank on the page, not a crash."""
    broken = stream(
        b"no such data",
        "/Type /XObject /Subtype /Image /Width 300 /Height 300 /ColorSpace /DeviceRGB "
        "/BitsPerComponent 8 /Filter /DCTDecode",
    )
    path = write(
        pdf_file("q 300 0 0 300 0 0 cm /I Do Q", objects=[broken], resources="/XObject << /I 10 0 R >>")
    )

    assert open_pdf_page(path).width >= 300


def test_the_engine_is_loaded_only_for_a_pdf():
    """Opening pictures of other kinds and importing the PDF stage itself load no PDF engine."""
    code = "import sys, digitise.pdf, digitise.vector, digitise.reading; sys.exit('pypdfium2' in sys.modules)"

    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
