"""SigMF antenna extension (v1.0.0): absolute patterns of 360 and 181 values, written, read back, refused."""

import json
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from digitise.exceptions import PictureError, UsageError
from digitise.exchange import guess_format
from digitise.exchange.cuts import Antenna, Cut, ExchangeOptions, cut_from_table
from digitise.exchange.sigmf import read, write

from .draw import patterns
from .strategies import FEW, printable_text
from .tables import bearings, table_of, without

PLAIN = ExchangeOptions()
DEG = bearings()


def cut_of(plane, level_db, **how):
    """A cut of a table, as `digitise convert` makes it."""
    return cut_from_table(table_of(level_db, **how), options=ExchangeOptions(plane=plane))


AZIMUTH = cut_of("azimuth", patterns.sector(DEG))
ELEVATION = cut_of("elevation", patterns.first_order(DEG), floor_db=-30)
ANTENNA = Antenna(cuts=(AZIMUTH, ELEVATION), gain=15.0, low_mhz=1710, high_mhz=2170, from_reading=True)


def test_the_two_patterns_of_the_specification():
    """Horizontal gain at 0..359 and vertical at -90..90 in 1 degree, dBi: the gain is the largest level."""
    data = write(ANTENNA, PLAIN).data
    node = json.loads(data)["global"]

    assert guess_format(data) == "sigmf"
    assert len(node["antenna:horizontal_gain_pattern"]) == 360
    assert len(node["antenna:vertical_gain_pattern"]) == 181
    assert node["antenna:horizontal_gain_pattern"][0] == node["antenna:gain"] == 15.0
    assert node["antenna:horizontal_gain_pattern"][65] == pytest.approx(15 - 12)
    assert node["antenna:vertical_gain_pattern"][90] == 15.0
    assert node["antenna:vertical_gain_pattern"][0] == pytest.approx(15 - 6.021, abs=1e-3)
    assert node["antenna:low_frequency"] == 1710e6
    assert "No" in node["core:description"] or "Not" in node["core:description"]


def test_what_is_lost_is_said():
    """The back half of the elevation cut, errors, states, limits."""
    lost = write(ANTENNA, PLAIN).lost

    assert "the back half of the elevation cut" in lost
    assert "row states and errors (error95_db)" in lost
    assert "that levels at the chart's centre are upper limits" in lost


@FEW
@given(
    seed=st.integers(0, 2**32 - 1),
    gain=st.integers(-100, 400),
    model=printable_text(),
    planes=st.sampled_from([("azimuth",), ("elevation",), ("azimuth", "elevation")]),
    turn=st.sampled_from(["cw", "ccw"]),
)
def test_written_and_read_back(seed, gain, model, planes, turn):
    """Levels at the format's own degrees come back the same, absolute."""
    rng = np.random.default_rng(seed)
    levels = {plane: np.round(rng.uniform(-40, 0, 360), 3) for plane in planes}
    for level in levels.values():
        level[0] = 0.0
    cuts = tuple(cut_of(plane, level) for plane, level in levels.items())
    options = ExchangeOptions(file_turn=turn)
    antenna = Antenna(cuts=cuts, gain=gain / 10, model=model, azimuth_width_deg=65.1, low_mhz=900.0)
    back = read(write(antenna, options).data, "x", options)

    assert (back.gain, back.azimuth_width_deg, back.low_mhz) == (gain / 10, 65.1, 900.0)
    assert back.model == (model or "not stated")
    assert math.isnan(back.elevation_width_deg)
    for cut in back.cuts:
        own = levels[cut.plane][np.round(cut.angle_deg).astype(int)]
        np.testing.assert_allclose(cut.level_db, own + gain / 10, atol=1e-9)
        assert len(cut.angle_deg) == (360 if cut.plane == "azimuth" else 181)


def test_absolute_levels_are_kept():
    """A cut that is in dBi already is written as it is; one in dBd 2.15 dB higher."""
    for unit, lift in (("dBi", 0.0), ("dBd", 2.15)):
        cut = Cut(**{**vars(AZIMUTH), "unit": unit, "level_db": AZIMUTH.level_db + 8.0})
        node = json.loads(write(Antenna(cuts=(cut,), gain=99.0), PLAIN).data)["global"]
        assert node["antenna:horizontal_gain_pattern"][0] == pytest.approx(8.0 + lift)


def test_gain_in_dbd():
    """A gain of 13 dBd is 15.15 dBi (2.15 dB, common practice)."""
    node = json.loads(write(Antenna(cuts=(AZIMUTH,), gain=13.0, gain_unit="dBd"), PLAIN).data)["global"]

    assert node["antenna:gain"] == pytest.approx(15.15)


def test_other_steps_are_worked_out_and_said():
    """A table of 5-degree rows gets its levels on straight lines, which is said; the rows themselves stay."""
    cut = cut_from_table(table_of(patterns.sector(bearings(72))), options=ExchangeOptions(plane="azimuth"))
    exported = write(Antenna(cuts=(cut,), gain=0.0), PLAIN)
    pattern = json.loads(exported.data)["global"]["antenna:horizontal_gain_pattern"]

    np.testing.assert_allclose(pattern[::5], cut.level_db, atol=5.1e-4)
    assert any("straight lines" in sentence for sentence in exported.lost)


@pytest.mark.parametrize(
    ("antenna", "words"),
    [
        (Antenna(cuts=(AZIMUTH,)), "give --gain"),
        (Antenna(cuts=(AZIMUTH, AZIMUTH), gain=1.0), "one azimuth and one elevation"),
        (Antenna(cuts=(Cut(**{**vars(AZIMUTH), "plane": ""}),), gain=1.0), "--cut"),
        (
            Antenna(
                cuts=(
                    cut_from_table(
                        without(table_of(np.zeros(360)), [7]), options=ExchangeOptions(plane="azimuth")
                    ),
                ),
                gain=1.0,
            ),
            "no value at 7 deg",
        ),
    ],
)
def test_what_cannot_be_written(antenna, words):
    """No gain, two cuts of a plane, a plane that is not known, a missing row: refused with the remedy."""
    with pytest.raises(UsageError, match=words):
        write(antenna, PLAIN)


def broken(**changes):
    """The file with fields of its global object replaced."""
    whole = json.loads(write(ANTENNA, PLAIN).data)
    whole["global"].update(changes)
    return json.dumps(whole, indent=1).encode()


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b'{"global": {\n"a": 1,\n}}', "line 3: not JSON"),
        (b'{"captures": [],\n "global": []}', "line 2: no global object"),
        (b'{"global": {}}', "line 1: no antenna pattern"),
        (b'["global"]', "line 1: the file is not one JSON object"),
        (b'{"global": ' + b"[" * 100_000, "not JSON"),
        (b"", "empty"),
        (
            broken(**{"antenna:horizontal_gain_pattern": [0.0] * 361}),
            r"line \d+: .*must have 360 numbers, not 361",
        ),
        (
            broken(**{"antenna:vertical_gain_pattern": [0.0] * 180 + ["x"]}),
            r"line \d+: .*no number, at place 181",
        ),
        (broken(**{"antenna:vertical_gain_pattern": [0.0] * 180 + [math.nan]}), "no number, at place 181"),
        (broken(**{"antenna:gain": "much"}), r"line \d+: antenna:gain is not a number"),
        (broken(**{"antenna:horizontal_gain_pattern": 7}), "must have 360 numbers, not no list"),
    ],
)
def test_refusals_name_the_line(data, words):
    """What is malformed stops the file, with its line."""
    with pytest.raises(PictureError, match=words):
        read(data, "x", PLAIN)
