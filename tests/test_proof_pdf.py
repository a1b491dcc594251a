"""The proof as a PDF page: the words and numbers of the other proof, lines where the reading lies."""

import numpy as np
import pytest

from digitise.outputs import make_files
from digitise.pdf import open_pdf_page, page_count
from digitise.picture import open_picture
from digitise.proof import draw_proof
from digitise.proof_pdf import proof_pdf
from digitise.record import make_record
from digitise.review import reason
from digitise.vector import find_vector_charts, trace_at
from tests.hand import hand_reading, hand_table

A4_PT = 595.276, 841.89  # ISO 216


def written(tmp_path, reading):
    """The proof of a reading as a file, opened by another program's reader."""
    tables = [f"panel.{k}.csv" for k in range(len(reading.traces))]
    path = tmp_path / "proof.pdf"
    path.write_bytes(proof_pdf(reading, make_record(reading, tables=tables)))
    return path


def words_of(picture):
    """All text of a page, joined."""
    return "\n".join(item.text for item in picture.vector.texts)


@pytest.mark.parametrize("n_traces", [1, 3])
def test_one_page_of_paper_with_the_words_of_the_proof(tmp_path, n_traces):
    """An A4 page whose text is text: file, tables, figures, states, and the caution."""
    path = written(tmp_path, hand_reading(n_traces))
    picture = open_picture(path)

    assert page_count(path) == 1
    assert picture.width / picture.height == pytest.approx(A4_PT[0] / A4_PT[1], rel=1e-3)
    said = words_of(picture)
    for words in (
        "panel.png",
        "panel.0.csv",
        "half-power width",
        "bridged",
        "The reading over the chart",
        "Not for RF",
    ):
        assert words in said
    assert "?" not in said


def test_the_reading_drawn_anew_can_be_read_again(tmp_path):
    """The page's own chart, read by its lines, gives the table's numbers back to 0.02 dB."""
    reading = hand_reading(table=hand_table(np.maximum(-8 + 6 * np.cos(np.radians(np.arange(360.0))), -40)))
    charts = find_vector_charts(open_picture(written(tmp_path, reading)))

    assert len(charts) == 1
    grid = charts[0].grid
    assert grid.ring_rho == pytest.approx([1, 0.75, 0.5, 0.25], abs=1e-3)
    assert len(grid.spoke_deg) == 12
    level = [40 * (trace_at(trace, np.arange(360.0)) - 1) for trace in charts[0].traces]
    off = [np.abs(item - reading.traces[0].table.chart_db) for item in level]
    assert min(float(np.nanmax(item)) for item in off) < 0.02
    rim = {item.value for item in charts[0].labels.with_role("rim")}
    assert rim == {float(deg) for deg in range(0, 360, 30)}


def test_it_looks_as_the_other_proof_does(tmp_path):
    """Drawn in pixels at the same size the page differs from the picture proof by edges alone."""
    import cv2

    reading = hand_reading(2)
    tables = ["panel.1.csv", "panel.2.csv"]
    plain = np.asarray(draw_proof(reading, make_record(reading, tables=tables)))
    page = open_pdf_page(written(tmp_path, reading)).rgb
    scale = (A4_PT[0] - 40) / A4_PT[0] * page.shape[1] / plain.shape[1]
    left = top = 20 / A4_PT[0] * page.shape[1]
    matrix = np.array([[scale, 0, left], [0, scale, top]])
    size = plain.shape[1], plain.shape[0]
    seen = cv2.warpAffine(page, matrix, size, flags=cv2.INTER_LINEAR | cv2.WARP_INVERSE_MAP)

    soft = [cv2.GaussianBlur(item, (0, 0), 4).astype(int) for item in (plain, seen)]
    assert np.mean(np.abs(soft[0] - soft[1]).max(axis=2) > 40) < 0.005


def test_doubt_and_odd_names_are_printed(tmp_path):
    """Reasons to look stand on the page with their place; letters that the font lacks do not stop it."""
    doubt = reason("grid-residual", 1.25, x_px=300, y_px=200)
    reading = hand_reading(path="übersicht (нет) \\ 1).png", reasons=(doubt,))
    picture = open_picture(written(tmp_path, reading))

    assert "the grid fits the picture only to 1.25 px" in words_of(picture)
    assert any(path.curved and path.stroke == (160, 60, 0) for path in picture.vector.paths)


def test_it_is_written_only_when_asked_for():
    """`make_files` gives the page beside the picture, the same bytes every time, and only on demand."""
    readings = (hand_reading(),)

    assert not any(name.endswith(".pdf") for name in make_files(readings)[0].files)
    files = make_files(readings, with_proof_pdf=True)[0].files
    assert sorted(files) == ["panel.csv", "panel.proof.pdf", "panel.proof.png", "panel.record.json"]
    assert files["panel.proof.pdf"] == make_files(readings, with_proof_pdf=True)[0].files["panel.proof.pdf"]
