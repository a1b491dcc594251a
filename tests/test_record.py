"""The record: complete, exact where a later reading takes it over, refused with a reason when malformed."""

import json
from dataclasses import replace

import numpy as np
import pytest

from digitise.caution import CAUTION
from digitise.exceptions import PictureError
from digitise.record import FORMAT, make_record, read_record, settings_from_record, write_record
from digitise.review import reason
from digitise.settings import Mark
from tests.hand import OUTER_PX, SHA256, hand_reading, hand_table


@pytest.fixture
def record():
    """The record of a reading made by hand."""
    return make_record(hand_reading(), tables=["panel.csv"])


def saved(tmp_path, record):
    """Write a record file."""
    path = tmp_path / "panel.record.json"
    path.write_text(write_record(record), encoding="utf-8")
    return path


def test_the_record_holds_what_the_design_asks(record):
    """Format, chart, grid, scale, bearing, traces, review, software; the caution goes with it."""
    assert record["format"] == FORMAT == "digitise-record/1"
    assert record["chart"]["file"] == "panel.png"
    assert record["chart"]["sha256"] == SHA256
    assert record["chart"]["size"] == [600, 620]
    assert record["chart"]["page"] is None
    assert record["chart"]["crop"] is None
    assert record["grid"]["outer_px"] == pytest.approx(OUTER_PX)
    assert (record["scale"]["outer_db"], record["scale"]["centre_db"]) == pytest.approx((0, -40))
    assert record["bearing"]["turn"] == "cw"
    assert record["software"]["name"] == "digitise"
    assert record["caution"] == CAUTION
    assert record["review"] == []


def test_a_trace_in_the_record(record):
    """Ink, table, peak, figures, budget by part, rows by state; the cardioid's half-power width is 131.06
    degrees.

    131.06: field cardioid, computed from (1 + cos) / 2 at -3.0103 dB.
    """
    trace = record["traces"][0]

    assert trace["ink"] == "#1f4fb4"
    assert trace["table"] == "panel.csv"
    assert trace["peak_db"] == 0
    assert trace["peak_deg"] == 0
    assert trace["figures"]["beamwidth"]["value"] == pytest.approx(131.06, abs=0.1)
    assert sum(trace["rows"].values()) == 360
    assert trace["budget"]["median_u_db"] == {
        "picture": 0.02,
        "grid": 0.02,
        "scale": 0.02,
        "bearing": 0.02,
        "bridging": 0.02,
    }
    assert len(trace["budget"]["rows_u_db"]["grid"]) == 360


def test_the_text_is_strict_json_and_is_read_back(tmp_path, record):
    """No NaN or infinity, numbers on one line a list, and the same values back."""
    text = write_record(record)

    def refuse(name):
        raise AssertionError(name)

    assert json.loads(text, parse_constant=refuse) == record
    assert read_record(saved(tmp_path, record)) == record
    assert max(text.count("\n"), 0) < 300


def test_a_trace_without_values_has_a_record():
    """All rows missing: no peak, and still valid JSON."""
    table = hand_table(state=np.full(360, "missing"))
    record = make_record(hand_reading(table=table), tables=["panel.csv"])

    assert record["traces"][0]["peak_db"] is None
    json.loads(write_record(record))


def test_reasons_become_sentences():
    """The review lists the chart's reasons and the traces', numbered when there are several."""
    item = reason("rows-missing", 0.25)
    record = make_record(hand_reading(2, trace_reasons=(item,)), tables=["a.1.csv", "a.2.csv"])

    assert record["review"] == [
        "rows-missing: 25% of the rows have no value (trace 1, #1f4fb4)",
        "rows-missing: 25% of the rows have no value (trace 2, #c03020)",
    ]
    assert record["traces"][1]["review"] == ["rows-missing: 25% of the rows have no value"]


def test_what_was_told_stands_in_the_record():
    """Every option, under the names of `Settings`."""
    told = {
        "outer_db": None,
        "centre_db": None,
        "marks": (Mark(x_px=300, y_px=60, level_db=0.0), Mark(x_px=300, y_px=310, level_db=-40.0)),
        "covers": ((1.0, 2.0, 3.0, 4.0),),
        "pins": ((5.0, 6.0),),
        "crop": (0.0, 0.0, 600.0, 620.0),
        "step_deg": 2.0,
    }
    record = make_record(hand_reading(**told), tables=["panel.csv"])

    assert record["told"] == {
        "zero_deg": 0.0,
        "turn": "cw",
        "crop": [0.0, 0.0, 600.0, 620.0],
        "covers": [[1.0, 2.0, 3.0, 4.0]],
        "pins": [[5.0, 6.0]],
        "marks": [[300, 60, 0.0], [300, 310, -40.0]],
        "step_deg": 2.0,
    }


def test_settings_come_back_exactly(tmp_path):
    """Scale and bearing to the last digit, and what was told besides."""
    reading = hand_reading(
        outer_db=1 / 3, centre_db=-39.7, inks=("#1f4fb4",), covers=((1.0, 2.0, 3.0, 4.0),), step_deg=2.0
    )
    path = saved(tmp_path, make_record(reading, tables=["panel.csv"]))

    settings = settings_from_record(path, sha256=SHA256)

    for name in ("parameters", "covariance", "anchor_rho", "anchor_db"):
        assert np.array_equal(getattr(settings.scale, name), getattr(reading.scale, name)), name
    rho = np.linspace(0, 1, 50)
    assert np.array_equal(settings.scale.level(rho), reading.scale.level(rho))
    assert np.array_equal(settings.scale.level_u(rho), reading.scale.level_u(rho))
    assert (settings.bearing.zero_deg, settings.bearing.turn, settings.bearing.u_deg) == (0.0, "cw", 0.02)
    assert settings.inks == ("#1f4fb4",)
    assert settings.covers == ((1.0, 2.0, 3.0, 4.0),)
    assert settings.step_deg == 2.0
    assert settings.outer_db is None


def test_pins_and_page_belong_to_the_same_picture_alone(tmp_path):
    """The same template with another antenna's trace: a pin on the first trace would mislead the second."""
    path = saved(tmp_path, make_record(hand_reading(pins=((5.0, 6.0),), page=2), tables=["panel.csv"]))

    same, other = settings_from_record(path, sha256=SHA256), settings_from_record(path, sha256="b" * 64)

    assert (same.pins, same.page) == (((5.0, 6.0),), 2)
    assert (other.pins, other.page) == ((), None)
    assert other.scale is not None


def test_the_grid_is_taken_over_for_the_same_picture(tmp_path):
    """Exactly, with its doubts, so that nothing is measured anew; another picture's grid is found there."""
    reading = hand_reading()
    doubt = reason("grid-residual", 1.5)
    object.__setattr__(reading.grid, "reasons", (doubt,))
    path = saved(tmp_path, make_record(reading, tables=["panel.csv"]))

    settings = settings_from_record(path, sha256=SHA256)

    for name in ("homography", "covariance", "ring_rho", "ring_rho_u", "spoke_deg", "arc_deg"):
        assert np.array_equal(getattr(settings.grid, name), getattr(reading.grid, name)), name
    assert settings.grid.reasons == (doubt,)
    again = make_record(replace(reading, settings=settings), tables=["panel.csv"])
    assert again["told"]["grid"] == "record"
    assert settings_from_record(path).grid is None


def test_doubt_is_taken_over_with_the_scale(tmp_path):
    """A scale that was doubtful stays doubtful: its reasons come back."""
    reading = hand_reading()
    doubt = reason("levels-guessed", 2, "0 and -40")
    object.__setattr__(reading.scale, "reasons", (doubt,))
    path = saved(tmp_path, make_record(reading, tables=["panel.csv"]))

    assert settings_from_record(path).scale.reasons == (doubt,)


def drop(*path):
    """Take a value out of a record."""

    def change(record):
        for name in path[:-1]:
            record = record[name]
        del record[path[-1]]

    return change


def put(value, *path):
    """Put a wrong value into a record."""

    def change(record):
        for name in path[:-1]:
            record = record[name]
        record[path[-1]] = value

    return change


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (put("other/1", "format"), "its format is not"),
        (drop("chart", "sha256"), "chart.sha256 is missing"),
        (put("abc", "chart", "sha256"), "not a sha256"),
        (put(3, "chart", "number"), "not one of the charts"),
        (drop("grid"), "grid.homography is missing"),
        (put([[1, 2], [3, 4]], "grid", "homography"), "not a list of 3"),
        (put("x", "traces"), "traces is not of kind list"),
        (put([1], "review"), "not a list of strings"),
        (put("spiral", "scale", "law"), "scale.law is not one of"),
        (put([1.0], "scale", "parameters"), "parameters is not a list of 2"),
        (put([0.0, None], "scale", "parameters"), "not a finite number"),
        (put([0.0, True], "scale", "parameters"), "not a finite number"),
        (put([0.0, 10**400], "scale", "parameters"), "not a finite number"),
        (put([1.0], "scale", "anchor_rho"), "do not match"),
        (put("left", "bearing", "turn"), "not cw or ccw"),
        (put([{"code": "nonsense", "value": 1}], "bearing", "reasons"), "not a review reason"),
        (put([[1, 2, 3]], "told", "covers"), "covers is not a list of 4"),
        (put(["blue"], "told", "inks"), "settings that cannot be right"),
        (put(7.0, "told", "step_deg"), "settings that cannot be right"),
    ],
)
def test_a_malformed_record_is_refused_with_its_place(tmp_path, record, change, message):
    """One refusal a fault: file name, place, exit status 4."""
    change(record)
    path = saved(tmp_path, record)

    with pytest.raises(PictureError, match=message) as caught:
        settings_from_record(path)

    assert str(path) in str(caught.value)
    assert caught.value.exit_status == 4


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"{",
        b"[]",
        b"nul",
        b"\xff\xfe",
        b'{"format": NaN}',
        b"[" * 100_000,
        b'{"format": "digitise-record/1"}',
    ],
)
def test_what_is_no_record_is_refused(tmp_path, content):
    """Broken JSON, other JSON, deep nesting, not text."""
    path = tmp_path / "a.json"
    path.write_bytes(content)

    with pytest.raises(PictureError, match="is not a digitise-record/1"):
        read_record(path)


def test_a_missing_record_is_refused(tmp_path):
    """A wrong name after --like; a folder."""
    with pytest.raises(PictureError, match="no such file"):
        read_record(tmp_path / "none.json")
    with pytest.raises(PictureError, match="cannot be opened"):
        read_record(tmp_path)
