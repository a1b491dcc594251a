"""What must hold whatever is drawn: turn, mirror, size, added level, repetition, write and read back."""

from dataclasses import replace

import cv2
import numpy as np
import pytest

from digitise.cli import main
from digitise.figures import figures_of
from digitise.picture import open_picture
from digitise.reading import read_charts
from digitise.table import read_table, write_table
from tests.bench.accuracy import told_settings
from tests.draw import Chart, Page, Stroke, Trace, paint, patterns, write_case
from tests.draw.spec import N_TRUE, STEP_TRUE, Printed

DEG = np.arange(N_TRUE) * STEP_TRUE
INK = "#6a0dad"
SAME_DB = 0.02  # two readings of the same pixels, turned or mirrored, may differ by this in the median
SAME_SHARE = 0.95  # and this share of rows by no more than their two intervals together


def lobed(outer_px=210.0):
    """Make a page with one lop-sided pattern, so that a turn or a mirror cannot go unseen."""
    rng = np.random.default_rng(14)
    trace = Trace(db=patterns.measured(DEG, rng, order=5, front=2.0) - 1.5, ink=INK, width=outer_px / 100)
    grid = Stroke(colour="#b0b8c0", width=max(1.0, outer_px / 250))
    number = Printed(size=outer_px / 20)
    place = {"centre_x": 1.25 * outer_px + 0.3, "centre_y": 1.3 * outer_px + 0.2, "outer_px": outer_px}
    chart = Chart(traces=(trace,), ring=grid, spoke=grid, ring_labels=number, rim_labels=number, **place)
    return Page(charts=(chart,), width=round(2.5 * outer_px), height=round(2.6 * outer_px))


def read(folder, rgb, settings, name="chart"):
    """Write a picture without loss and read it: the one trace's table."""
    return read_charts(open_picture(write_case(folder, name, rgb, ())), settings=settings)[0].traces[0].table


def agree(one, other, rows=slice(None)):
    """Tell whether two tables agree: closely in the median, and within their intervals nearly everywhere."""
    apart = np.abs(one.chart_db - other.chart_db[rows])
    limit = one.error95_db + other.error95_db[rows]
    known = np.isfinite(apart)
    return np.median(apart[known]) < SAME_DB and np.mean(apart[known] <= limit[known]) > SAME_SHARE


@pytest.fixture(scope="module")
def drawn(tmp_path_factory):
    """(page, its pixels, its settings, its table), painted and read once."""
    page = lobed()
    rgb = paint(page, renderer="pillow")
    settings = told_settings(page.charts[0], INK)
    return page, rgb, settings, read(tmp_path_factory.mktemp("properties"), rgb, settings)


@pytest.mark.parametrize("quarters", [1, 2, 3])
def test_a_turned_picture_rolls_the_table(tmp_path, drawn, quarters):
    """A picture turned clockwise, its 0 told at the top as before: each quarter adds 90 degrees."""
    _, rgb, settings, table = drawn

    turned = read(tmp_path, np.ascontiguousarray(np.rot90(rgb, -quarters)), settings)

    assert agree(turned, table, (np.arange(360) - 90 * quarters) % 360)


def test_a_turned_picture_with_its_zero_told_gives_the_same_table(tmp_path, drawn):
    """The same turn with 0 told at the right changes nothing."""
    _, rgb, settings, table = drawn

    turned = read(tmp_path, np.ascontiguousarray(np.rot90(rgb, -1)), replace(settings, zero_deg=90.0))

    assert agree(turned, table)


def test_a_mirrored_picture_reverses_the_table(tmp_path, drawn):
    """Left and right changed over: bearing b is read where 360 - b was."""
    _, rgb, settings, table = drawn

    mirrored = read(tmp_path, np.ascontiguousarray(rgb[:, ::-1]), settings)

    assert agree(mirrored, table, -np.arange(360) % 360)


def test_the_other_turn_reverses_the_table(tmp_path, drawn):
    """The same pixels with the bearings told to grow the other way: reversed exactly, but for rounding."""
    _, rgb, settings, table = drawn

    other = read(tmp_path, rgb, replace(settings, turn="ccw"))

    np.testing.assert_allclose(other.chart_db, table.chart_db[-np.arange(360) % 360], atol=1e-6)


@pytest.mark.parametrize("factor", [0.7, 1.6])
def test_a_resized_picture_gives_the_same_levels(tmp_path, drawn, factor):
    """Half as many pixels or twice as many: the same dB within the errors."""
    _, rgb, settings, table = drawn
    how = cv2.INTER_AREA if factor < 1 else cv2.INTER_CUBIC

    resized = read(tmp_path, cv2.resize(rgb, None, fx=factor, fy=factor, interpolation=how), settings)

    assert agree(resized, table)


def test_error_shrinks_as_the_picture_grows(tmp_path, drawn):
    """The same chart painted at twice the size has a clearly smaller claim."""
    table = drawn[3]
    page = lobed(420.0)

    larger = read(tmp_path, paint(page, renderer="pillow"), told_settings(page.charts[0], INK))

    assert np.nanmedian(larger.error95_db) < 0.8 * np.nanmedian(table.error95_db)


def test_added_level_leaves_the_beamwidth(tmp_path, drawn):
    """Rings told 7 dB higher: every level 7 dB higher, every relative level and the beamwidth unchanged."""
    _, rgb, settings, table = drawn
    higher = replace(settings, outer_db=settings.outer_db + 7, centre_db=settings.centre_db + 7)

    lifted = read(tmp_path, rgb, higher)

    np.testing.assert_allclose(lifted.chart_db, table.chart_db + 7, atol=1e-6)
    np.testing.assert_allclose(lifted.relative_db, table.relative_db, atol=1e-6)
    assert figures_of(lifted)["beamwidth"].value == pytest.approx(
        figures_of(table)["beamwidth"].value, abs=1e-6
    )


def test_a_trace_drawn_lower_keeps_its_beamwidth(tmp_path, drawn):
    """The same pattern drawn 4 dB further in: the same beamwidth within the two errors."""
    page = drawn[0]
    trace = page.charts[0].traces[0]
    chart = replace(page.charts[0], traces=(replace(trace, db=trace.db - 4),))

    low = read(tmp_path, paint(replace(page, charts=(chart,)), renderer="pillow"), drawn[2])

    wide, narrow = figures_of(drawn[3])["beamwidth"], figures_of(low)["beamwidth"]
    assert abs(wide.value - narrow.value) <= wide.error95 + narrow.error95


def test_the_same_picture_reads_the_same_twice(tmp_path, drawn):
    """Nothing in a reading is left to chance."""
    _, rgb, settings, table = drawn

    assert write_table(read(tmp_path, rgb, settings)) == write_table(table)


def test_written_and_read_back(tmp_path, drawn):
    """A table through a file keeps its values to the last written place, and is the same text again."""
    table = drawn[3]
    path = tmp_path / "table.csv"
    path.write_text(write_table(table))

    back = read_table(path)

    np.testing.assert_allclose(back.chart_db, table.chart_db, atol=5.01e-4)
    assert (back.error95_db >= table.error95_db - 1e-12).all()
    assert list(back.state) == list(table.state)
    assert write_table(back) == path.read_text()


def test_a_record_repeats_its_table(tmp_path, drawn):
    """`--like` with the record of the same picture writes the same table."""
    path = write_case(tmp_path, "chart", drawn[1], ())
    told = ["--outer=0", "--centre=-40", "--zero=top", "--turn=cw", f"--ink={INK}"]

    assert main(["read", str(path), *told, "--out", str(tmp_path / "first")]) == 0
    record = tmp_path / "first" / "chart.record.json"
    assert main(["read", str(path), "--like", str(record), "--out", str(tmp_path / "again")]) == 0

    assert (tmp_path / "again" / "chart.csv").read_text() == (tmp_path / "first" / "chart.csv").read_text()
