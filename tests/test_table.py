"""The table on disk: written and read back, rounding costs no coverage, a fault is named by its line."""

import csv

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from digitise.exceptions import PictureError
from digitise.table import COLUMNS, STATES, build_table, read_table, write_table
from tests.hand import hand_table

ROUNDING_DB = 1e-9  # floating-point slack of the comparison; the written interval itself may not be narrower


def written(tmp_path, text):
    """Put text into a table file."""
    path = tmp_path / "a.csv"
    path.write_text(text, encoding="utf-8")
    return path


def test_the_file_is_as_designed(tmp_path):
    """One header row, a row a degree, no comment lines, 0 at the peak, missing rows without numbers."""
    state = np.full(360, "seen", "U8")
    state[7] = "missing"
    text = write_table(hand_table(np.linspace(-3, -30, 360), state=state))

    lines = text.split("\n")
    assert lines[0] == "angle_deg,relative_db,error95_db,chart_db,state"
    assert lines[1] == "0,0.000,0.100,-3.000,seen"
    assert lines[8] == "7,,,,missing"
    assert len(lines) == 362
    assert lines[-1] == ""
    assert list(csv.DictReader(text.splitlines()))[359]["angle_deg"] == "359"


def test_written_and_read_back_is_equal(tmp_path):
    """Values to the written digits, states and angles exactly; written again it is the same text."""
    table = hand_table()
    text = write_table(table)

    back = read_table(written(tmp_path, text))

    assert write_table(back) == text
    assert np.array_equal(back.angle_deg, table.angle_deg)
    assert np.array_equal(back.state, table.state)
    np.testing.assert_allclose(back.chart_db, table.chart_db, atol=0.0005 + ROUNDING_DB)


@pytest.mark.parametrize("step", [0.05, 0.5, 5, 360 / 7, 30])
def test_other_steps(tmp_path, step):
    """Fine, coarse and uneven steps keep their angles."""
    n = round(360 / step)
    angle = np.arange(n) * step
    table = build_table(angle, -angle / 36, np.full(n, 0.1), np.full(n, "seen"))

    back = read_table(written(tmp_path, write_table(table)))

    np.testing.assert_allclose(back.angle_deg, angle, atol=1e-6)


rows = st.lists(
    st.tuples(st.floats(-120, 40), st.floats(0, 60), st.sampled_from(STATES)), min_size=2, max_size=24
)


@given(rows)
@example([(-0.0004, 0.0, "seen"), (-0.0005, 0.0005, "bridged")])
@example([(0.0, 0.0, "missing"), (0.0, 0.0, "missing")])
def test_the_written_interval_holds_the_exact_one(tmp_path_factory, given_rows):
    """Rounding never narrows an interval, for any rows, and writing twice changes nothing."""
    level, error, state = (np.array(column) for column in zip(*given_rows, strict=True))
    level = np.where(state == "missing", np.nan, level)
    error = np.where(state == "missing", np.nan, error)
    table = build_table(np.arange(len(level)) * 360 / len(level), level, error, state)
    path = tmp_path_factory.mktemp("table") / "a.csv"
    path.write_text(write_table(table))

    back = read_table(path)

    has = state != "missing"
    assert np.all(back.chart_db[has] - back.error95_db[has] <= level[has] - error[has] + ROUNDING_DB)
    assert np.all(back.chart_db[has] + back.error95_db[has] >= level[has] + error[has] - ROUNDING_DB)
    assert np.all(back.error95_db[has] <= error[has] + 0.0015 + ROUNDING_DB)
    if has.any():
        assert np.max(back.relative_db[has]) == 0
    assert write_table(back) == path.read_text()
    assert "-0.000" not in path.read_text()


def test_spreadsheet_habits_are_read(tmp_path):
    """A byte-order mark, Windows line ends, blank lines at the end, columns in another order."""
    text = write_table(hand_table())
    body = list(csv.DictReader(text.splitlines()))
    turned = ["note," + ",".join(reversed(COLUMNS))]
    turned += ["x," + ",".join(row[name] for name in reversed(COLUMNS)) for row in body]
    path = tmp_path / "a.csv"
    path.write_bytes(b"\xef\xbb\xbf" + "\r\n".join([*turned, "", ""]).encode())

    assert write_table(read_table(path)) == text


HEAD = ",".join(COLUMNS) + "\n"


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "line 1: no column angle_deg"),
        ("angle_deg;relative_db;error95_db;chart_db;state\n0;0;0;0;seen\n", "commas between the columns"),
        ("angle_deg,relative_db,error95_db,state\n", "no column chart_db"),
        (HEAD, "two rows or more"),
        (HEAD + "0,0,0.1,-3,seen\n180,x,0.1,-3,seen\n", "line 3: relative_db is not a number"),
        (HEAD + "0,0,0.1,-3,seen\n180,0,inf,-3,seen\n", "line 3: error95_db is not a finite number"),
        (HEAD + "0,0,0.1,-3,seen\n180,0,0.1\n", "line 3: 3 columns"),
        (HEAD + "0,0,0.1,-3,seen\n180,0,0.1,-3,guessed\n", "line 3: the state is not one of"),
        (HEAD + "0,0,0.1,-3,seen\n90,0,0.1,-3,seen\n", "line 3: angle_deg is not on an even step"),
        (HEAD + "1,0,0.1,-3,seen\n181,0,0.1,-3,seen\n", "line 2: angle_deg is not on an even step"),
        (HEAD + "0,0,0.1,-3,seen\n180,,,,seen\n", "line 3: chart_db must be empty"),
        (HEAD + "0,0,0.1,-3,seen\n180,0,0.1,-3,missing\n", "line 3: chart_db must be empty"),
        (HEAD + "0,0,0.1,-3,seen\n180,0,,-3,seen\n", "line 3: error95_db must be empty"),
        (HEAD + "0,0,0.1,-3,seen\n180,0,-0.1,-3,seen\n", "line 3: error95_db is negative"),
        (HEAD + "0,0,0.1,-3,seen\n\n180,-9,0.1,-3,seen\n", "line 4: relative_db is not chart_db minus"),
    ],
)
def test_a_malformed_table_is_refused_by_line(tmp_path, text, message):
    """One refusal a fault, with the line number, the file's name and exit status 4."""
    path = written(tmp_path, text)

    with pytest.raises(PictureError, match=message) as caught:
        read_table(path)

    assert str(path) in str(caught.value)
    assert caught.value.exit_status == 4


def test_files_that_are_no_text(tmp_path):
    """A missing file, a folder, and bytes that are not UTF-8."""
    path = tmp_path / "a.csv"
    path.write_bytes(b"\xff\xfe\x00\x01")

    for place, message in (
        (path, "not UTF-8"),
        (tmp_path, "cannot be opened"),
        (tmp_path / "b.csv", "no such file"),
    ):
        with pytest.raises(PictureError, match=message):
            read_table(place)


def test_rows_that_no_table_may_hold_are_a_fault_of_the_program():
    """A seen row without a value must not be built at all."""
    with pytest.raises(ValueError, match="row 1: chart_db must be empty"):
        build_table([0, 180], [0, np.nan], [0.1, np.nan], ["seen", "seen"])


def test_a_table_is_locked():
    """Its arrays cannot be altered, nor does it alter those it was made of."""
    level = np.zeros(4)
    table = build_table(np.arange(4) * 90.0, level, np.full(4, 0.1), np.full(4, "seen"))
    level[:] = 9

    assert table.chart_db.max() == 0
    with pytest.raises(ValueError, match="read-only"):
        table.chart_db[0] = 1
