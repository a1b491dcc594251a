"""Tables held against each other: differences that add up, errors as squares, limits and gaps kept apart."""

import csv
import io

import numpy as np
import pytest

from digitise.compare import compare_tables, comparison_csv, comparison_json, comparison_text
from digitise.compare_picture import draw_comparison
from digitise.exceptions import UsageError

from .draw import patterns
from .tables import bearings, table_of, with_noise, without

DEG = bearings()
SECTOR = table_of(patterns.sector(DEG), error95_db=0.3, floor_db=-40.0)


def test_a_table_against_itself_differs_nowhere():
    """Zero, with the error of two readings: 0.3 times the root of two (JCGM 100:2008, 5.1.2)."""
    found = compare_tables(SECTOR, SECTOR)

    np.testing.assert_array_equal(found.difference_db, np.zeros(360))
    np.testing.assert_allclose(found.error95_db, 0.3 * np.sqrt(2))
    assert (found.rms_db, found.outside_share, found.n_rows) == (0, 0, 360)


def test_relative_and_chart_levels():
    """3 dB more on the chart are no difference of the patterns, and 3 dB of the levels as printed."""
    lifted = table_of(patterns.sector(DEG) + 3, error95_db=0.3)

    assert compare_tables(SECTOR, lifted).rms_db == pytest.approx(0, abs=1e-12)
    assert compare_tables(SECTOR, lifted, level="chart").mean_db == pytest.approx(3)


def test_the_largest_difference_is_found():
    """One row moved by 2 dB."""
    level = patterns.sector(DEG).copy()
    level[77] -= 2
    found = compare_tables(SECTOR, table_of(level, error95_db=0.3))

    assert (found.largest_db, found.largest_deg) == (pytest.approx(-2), 77)
    assert found.outside_share == pytest.approx(1 / 360)


def test_turning_undoes_a_turned_chart():
    """A chart printed 30 degrees on, turned back, is the same."""
    turned = table_of(np.roll(patterns.sector(DEG), 30), error95_db=0.3)

    assert compare_tables(SECTOR, turned, turn_deg=-30).rms_db == pytest.approx(0, abs=1e-9)
    assert compare_tables(SECTOR, turned).rms_db > 3


def test_other_steps_are_read_between_rows():
    """A sector of 5-degree rows against one of 1: off by what a straight line leaves of 12 (t / 65)^2."""
    coarse = table_of(patterns.sector(bearings(72)), error95_db=0.3)
    found = compare_tables(SECTOR, coarse)

    before_corner = np.abs((DEG + 180) % 360 - 180) < 100
    assert np.max(np.abs(found.difference_db[before_corner])) == pytest.approx(12 / 65**2 * 2 * 3)
    assert found.rms_db < 0.1
    assert found.n_rows == 360


def test_limits_and_gaps_are_left_out_of_the_sums():
    """Rows at the chart's centre and rows without a value have their own states."""
    clipped = without(table_of(patterns.sector(DEG), floor_db=-20), slice(10, 20))
    found = compare_tables(SECTOR, clipped)

    assert set(found.state[10:20]) == {"missing"}
    assert found.state[180] == "floor"
    assert found.n_rows == int(np.sum(patterns.sector(DEG) >= -20)) - 10
    assert np.isnan(found.difference_db[10:20]).all()


def test_noise_of_the_stated_size_is_within_the_errors():
    """Two noisy readings of one pattern differ by more than their errors on about 5 % of the rows."""
    rng = np.random.default_rng(8)
    shares = [
        compare_tables(with_noise(SECTOR, rng), with_noise(SECTOR, rng), level="chart").outside_share
        for _ in range(20)
    ]

    assert 0.035 < np.mean(shares) < 0.065


def test_nothing_in_common():
    """Tables whose values do not meet say so and have no numbers."""
    found = compare_tables(without(SECTOR, slice(0, 180)), without(SECTOR, slice(180, 360)))

    assert found.n_rows == 0
    assert "no bearing where both have a value" in "\n".join(comparison_text(["a", "b"], [found]))


def test_csv_and_json_hold_what_was_found():
    """Every row in the CSV; the sums in the JSON; the caution in the text."""
    found = [compare_tables(SECTOR, without(SECTOR, [5]))]
    rows = list(csv.reader(io.StringIO(comparison_csv(["a", "b"], found))))

    assert rows[0] == ["table", "against", "angle_deg", "difference_db", "error95_db", "state"]
    assert rows[1] == ["b", "a", "0", "0.000", "0.424", "seen"]
    assert rows[6] == ["b", "a", "5", "", "", "missing"]
    assert comparison_json(["a", "b"], found)[0]["n_rows"] == 359
    assert "No evidence that a direction is safe." in list(comparison_text(["a", "b"], found))[-1]


@pytest.mark.parametrize("how", [{"level": "absolute"}, {"turn_deg": float("nan")}])
def test_unknown_words_are_refused(how):
    """A level that is none, a turn that is no number."""
    with pytest.raises(UsageError, match="not known"):
        compare_tables(SECTOR, SECTOR, **how)


def test_picture_shows_each_table_in_its_own_colour():
    """The picture holds two lines of different colours and the band; gaps do not stop it."""
    other = without(table_of(patterns.first_order(DEG), floor_db=-40), slice(100, 130))
    image = draw_comparison(
        ["a.csv", "b.csv"], [SECTOR, other], [compare_tables(SECTOR, other)], level="relative"
    )
    rgb = np.asarray(image).reshape(-1, 3).astype(int)
    vivid = rgb[np.ptp(rgb, axis=1) > 120]

    assert image.size[0] == 1400
    assert len(np.unique(vivid // 32, axis=0)) >= 2


def test_picture_of_flat_and_empty_tables():
    """A table that is one level everywhere, and two with nothing in common, still make a picture."""
    flat = table_of(np.zeros(360))
    halves = without(flat, slice(0, 180)), without(flat, slice(180, 360))

    for tables in ((flat, flat), halves):
        image = draw_comparison(["a", "b"], tables, [compare_tables(*tables)], level="chart", turn_deg=15.0)
        assert image.size[1] > 900
