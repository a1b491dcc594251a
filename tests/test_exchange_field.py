"""The relative-field table of 47 CFR 73.316(c): steps, every maximum and minimum, its limits said."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from digitise.exceptions import PictureError
from digitise.exchange import guess_format
from digitise.exchange.cuts import Antenna, ExchangeOptions, cut_from_table, table_from_cut
from digitise.exchange.relative_field import read, write

from .draw import patterns
from .strategies import FEW
from .tables import bearings, table_of, without

PLAIN = ExchangeOptions()
DEG = bearings()


def antenna_of(level_db, **how):
    """An antenna of one azimuth cut."""
    return Antenna(
        cuts=(cut_from_table(table_of(level_db, **how), options=ExchangeOptions(plane="azimuth")),)
    )


def rows_of(level_db, options=PLAIN, **how):
    """Azimuth -> (field, point) of what is written."""
    lines = write(antenna_of(level_db, **how), options).data.decode().splitlines()
    assert lines[0] == "azimuth_deg,relative_field,point"
    return {float(a): (float(f), point) for a, f, point in (line.split(",") for line in lines[1:])}


WAVY = 20 * np.log10(0.7 + 0.3 * np.cos(np.radians(3 * (DEG - 17))))  # field 1 at 17, 137, 257; 0.4 between


def test_steps_maxima_and_minima():
    """Three lobes: 36 steps, three maxima of 1.000 and three minima of 0.400 at their azimuths."""
    rows = rows_of(WAVY)

    assert len(rows) == 36 + 6
    assert [a for a, row in rows.items() if row == (1.0, "maximum")] == [17, 137, 257]
    assert [a for a, row in rows.items() if row == (0.4, "minimum")] == [77, 197, 317]
    assert rows[0][0] == pytest.approx(0.7 + 0.3 * np.cos(np.radians(51)), abs=5.1e-4)


def test_the_largest_field_is_one():
    """Levels are relative to the largest, whatever the chart's reference."""
    assert rows_of(WAVY + 11) == rows_of(WAVY)


def test_ripple_within_the_error_is_no_maximum():
    """Noise of the size of the reading's error makes no turning points."""
    noisy = patterns.first_order(DEG) + 0.2 * np.random.default_rng(1).standard_normal(360)
    rows = rows_of(np.maximum(noisy, -25), error95_db=0.8)

    assert sum(bool(point) for _, point in rows.values()) <= 4


@pytest.mark.parametrize(
    ("level_db", "checks"),
    [
        (WAVY * 0.1, ()),
        (WAVY, ("changes by up to",)),
        (np.maximum(patterns.first_order(DEG), -16), ("is 16.0 dB", "changes by up to")),
    ],
)
def test_limits_of_the_rule_are_said(level_db, checks):
    """Over 15 dB between maximum and minimum, or over 2 dB in 10 degrees (2006-2009 text of 73.316)."""
    said = write(antenna_of(level_db), PLAIN).checks

    assert len(said) == len(checks)
    assert all(words in sentence for words, sentence in zip(checks, said, strict=True))


def test_slope_over_ten_degrees_is_measured_round_the_circle():
    """The steepest 10 degrees lie across north: 3 dB from 355 to 5."""
    level = np.interp(np.arange(360), [0, 5, 180, 355, 359], [-1.5, 0, 0, -3.0, -1.8])

    assert "changes by up to 3.0 dB" in write(antenna_of(level), PLAIN).checks[0]


@FEW
@given(seed=st.integers(0, 2**32 - 1))
def test_written_and_read_back(seed):
    """Every written point comes back within its rounding, and what lies between on a line."""
    rng = np.random.default_rng(seed)
    level = patterns.omni(DEG, rng, ripple_db=6.0)
    antenna = antenna_of(level)
    cut = read(write(antenna, PLAIN).data, "x", ExchangeOptions(plane="azimuth")).cuts[0]
    table, said = table_from_cut(cut, options=PLAIN)

    assert cut.plane == "azimuth"
    np.testing.assert_allclose(
        10 ** (cut.level_db / 20), 10 ** (level[cut.angle_deg.astype(int)] / 20), atol=5.1e-4
    )
    assert np.max(np.abs(table.chart_db - level)) < 0.6
    assert any("straight lines" in sentence for sentence in said)


def test_what_is_lost_is_said():
    """Rows between the steps, errors and states."""
    lost = write(antenna_of(WAVY), PLAIN).lost

    assert lost[0] == "318 of 360 rows between the 10-degree steps"
    assert "errors, states and ring levels" in lost


def test_missing_rows_are_not_made_up():
    """Steps that were not read are not in the table."""
    cut = cut_from_table(without(table_of(WAVY), slice(95, 125)), options=ExchangeOptions(plane="azimuth"))
    lines = write(Antenna(cuts=(cut,)), PLAIN).data.decode().splitlines()

    assert not any(line.startswith(("100,", "110,", "120,")) for line in lines)
    assert any(line.startswith("130,") for line in lines)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("azimuth_deg,field\n0,1\n", "line 1: the header is not"),
        ("azimuth_deg,relative_field,point\n0,1.000,\n10,high,\n", "line 3: the field is not a number"),
        ("azimuth_deg,relative_field,point\n0,1.000,\n10,1.2,\n", "line 3: the azimuth must be 0 to 360"),
        ("azimuth_deg,relative_field,point\n0,1.000,\n10,0.9,middle\n", "line 3: a point is a maximum"),
        ("azimuth_deg,relative_field,point\n0,1.000,\n10,0.9\n", "line 3: 2 columns where 3"),
        ("azimuth_deg,relative_field,point\n0,1.000,\n0,0.9,\n", "line 3: the direction stands twice"),
        ("azimuth_deg,relative_field,point\n0,1.000,\n", "1 points"),
        ("azimuth_deg,relative_field,point\n0,0,\n10,0,\n", "no field is above 0"),
    ],
)
def test_refusals_name_the_line(text, words):
    """What is malformed stops the file, with its line."""
    with pytest.raises(PictureError, match=words):
        read(text.encode(), "x", PLAIN)


def test_it_is_told_from_plain_tables():
    """By its header."""
    assert guess_format(write(antenna_of(WAVY), PLAIN).data) == "field"
