"""Plain angle and level: every way to write it comes back, usual other ways are read, the rest refused."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from digitise.exceptions import PictureError, UsageError
from digitise.exchange import guess_format
from digitise.exchange.cuts import Antenna, ExchangeOptions, cut_from_table, table_from_cut
from digitise.exchange.plain import read, write

from .draw import patterns
from .strategies import FEW, cuts
from .tables import bearings, table_of, without

PLAIN = ExchangeOptions()


@FEW
@given(
    cut=cuts(plane=""),
    angles=st.sampled_from(["0..359", "-180..179", "-180..180"]),
    values=st.sampled_from(["relative", "loss"]),
    turn=st.sampled_from(["cw", "ccw"]),
)
def test_written_and_read_back(cut, angles, values, turn):
    """Angles, levels, errors and states come back the same in every form that keeps errors."""
    options = ExchangeOptions(angles=angles, values=values, errors=True, file_turn=turn)
    exported = write(Antenna(cuts=(cut,)), options)
    back = read(exported.data, "x", options).cuts[0]

    np.testing.assert_allclose(back.angle_deg, cut.angle_deg, atol=1e-9)
    np.testing.assert_array_equal(back.level_db, cut.level_db)
    np.testing.assert_array_equal(back.error95_db, cut.error95_db)
    np.testing.assert_array_equal(back.state, cut.state)
    assert exported.lost == ()


@FEW
@given(cut=cuts(plane="", deepest_db=-40.0))
def test_field_written_and_read_back(cut):
    """A relative field of six decimals holds levels down to -40 dB within 0.0005 dB."""
    options = ExchangeOptions(values="field", decimals=6)
    back = read(write(Antenna(cuts=(cut,)), options).data, "x", PLAIN).cuts[0]

    np.testing.assert_allclose(back.level_db, cut.level_db, atol=5e-4)


def test_forms():
    """The heads, the ranges of angles, the sign of losses and the closing point, seen by eye."""
    table = table_of(np.array([0.0, -3.0, -20.0, -3.5]))
    antenna = Antenna(cuts=(cut_from_table(table, options=PLAIN),))

    def text(**how):
        return write(antenna, ExchangeOptions(decimals=1, **how)).data.decode().splitlines()

    assert text() == ["angle_deg,relative_db", "0,0.0", "90,-3.0", "180,-20.0", "270,-3.5"]
    assert text(angles="-180..180", values="loss") == [
        "angle_deg,loss_db", "-180,20.0", "-90,3.5", "0,0.0", "90,3.0", "180,20.0",
    ]  # fmt: skip
    assert text(angles="-180..179", values="field")[1:3] == ["-180,0.1", "-90,0.7"]
    assert text(errors=True)[1] == "0,0.0,0.0,seen"


def test_another_step():
    """Every tenth degree of a table is its own row; every half degree lies on the line between two."""
    table = table_of(patterns.first_order(bearings()), floor_db=-30)
    antenna = Antenna(cuts=(cut_from_table(table, options=PLAIN),))
    tens = read(write(antenna, ExchangeOptions(step_deg=10)).data, "x", PLAIN).cuts[0]
    halves = read(write(antenna, ExchangeOptions(step_deg=0.5, decimals=6)).data, "x", PLAIN).cuts[0]

    np.testing.assert_allclose(tens.level_db, table.relative_db[::10], atol=5.1e-4)
    np.testing.assert_allclose(halves.level_db[::2], table.relative_db, atol=1e-6)
    between = (table.relative_db + np.roll(table.relative_db, -1)) / 2
    np.testing.assert_allclose(halves.level_db[1::2], between, atol=1e-6)


def test_gaps_are_not_filled_by_another_step():
    """Rows that were not read stay away at every step."""
    table = without(table_of(patterns.first_order(bearings())), slice(100, 120))
    antenna = Antenna(cuts=(cut_from_table(table, options=PLAIN),))

    for step in (1, 5, 0.5):
        cut = read(write(antenna, ExchangeOptions(step_deg=step)).data, "x", PLAIN).cuts[0]
        assert not np.any((cut.angle_deg > 99) & (cut.angle_deg < 120))
        assert 99 in cut.angle_deg or step == 5


@pytest.mark.parametrize(
    "text",
    [
        "angle_deg,relative_db\n0,0\n90,-3.5\n180,-20\n270,-3\n",
        "0,0\n90,-3.5\n180,-20\n270,-3\n",
        "0 0\n90 -3.5\n180 -20\n270 -3\n",
        "0\t0,0\n90\t-3,5\n180\t-20,0\n270\t-3,0\n",
        "angle;level\n0;0,0\n90;-3,5\n180;-20,0\n270;-3,0\n",
        "\ufeffAngle,Attenuation\r\n0,0\r\n90,3.5\r\n180,20\r\n270,3\r\n",
        "# a remark\n\nazimuth,field\n0,1\n90,0.668344\n180,0.1\n270,0.707946\n",
        "level_db,angle\n-20,-180\n-3,-90\n0,0\n-3.5,90\n-20,180\n",
        "angle,level\n0,0.0\n90,\u22123.5\n180,\u221220\n270,\u22123\n",
    ],
)
def test_ways_of_other_programs(text):
    """Delimiters, decimal commas, heads or none, losses, fields, typographic minus: one pattern."""
    assert guess_format(text.encode()) == "plain"
    cut = read(text.encode(), "x", PLAIN).cuts[0]

    np.testing.assert_array_equal(cut.angle_deg, [0, 90, 180, 270])
    np.testing.assert_allclose(cut.level_db, [0, -3.5, -20, -3], atol=1e-4)


def test_levels_that_say_nothing_of_their_kind():
    """Positive numbers without a head may be losses or fields: asked, never guessed."""
    text = b"0,0.1\n90,0.9\n180,0.5\n"

    with pytest.raises(PictureError, match="say which with --values"):
        read(text, "x", PLAIN)
    cut = read(text, "x", ExchangeOptions(values="field")).cuts[0]
    assert cut.level_db[1] == pytest.approx(20 * np.log10(0.9))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("angle_deg,relative_db\n0,0\n90,low\n", "line 3: the level is not a number"),
        ("angle_deg,relative_db\n0,0\n90\n", "line 3: the row has too few columns"),
        ("angle_deg,relative_db\n0,0\n90,inf\n", "line 3: the level is not a number"),
        ("angle_deg,relative_db\n0,0\n900,-3\n", "line 3: the angle 900 is not between"),
        ("angle_deg,relative_db\n0,0\n90,-3\n90,-4\n", "line 4: the direction stands twice"),
        ("angle_deg,relative_db\n0,0\n90,-3\n360,-4\n", "line 4: the direction 360 stands twice"),
        ("angle_deg,relative_db\n0,0\n", "two points or more"),
        ("angle_deg,colour\n0,0\n90,1\n", "line 1: no column of levels"),
        ("place,relative_db\n0,0\n90,-3\n", "line 1: no column of angles"),
        ("angle_deg,relative_field\n0,1\n90,-0.5\n", "line 3: a field is negative"),
        ("angle_deg,relative_field\n0,0\n90,0\n", "no field is above 0"),
        (
            "angle_deg,relative_db,error95_db,state\n0,0,0.1,seen\n90,-3,-1,seen\n",
            "line 3: the error is negative",
        ),
        (
            "angle_deg,relative_db,error95_db,state\n0,0,0.1,seen\n90,-3,1,guessed\n",
            "line 3: the state 'guessed'",
        ),
        ("", "empty"),
        ("0\n1\n", "line 1: a row needs angle and level"),
        ("angle_deg,relative_db\n0,\0\n", "zero bytes"),
    ],
)
def test_refusals_name_the_line(text, words):
    """What is malformed stops the file, with its line."""
    with pytest.raises(PictureError, match=words):
        read(text.encode(), "x", PLAIN)


def test_bytes_that_are_no_text():
    """The line where the encoding breaks."""
    with pytest.raises(PictureError, match="line 2: not UTF-8 text"):
        read(b"angle_deg,relative_db\n\xff\xfe,0\n", "x", PLAIN)


def test_one_cut_a_file():
    """Two cuts are refused."""
    cut = cut_from_table(table_of(np.zeros(4)), options=PLAIN)
    with pytest.raises(UsageError, match="one cut a file"):
        write(Antenna(cuts=(cut, cut)), PLAIN)


@pytest.mark.parametrize("text", ["0,0\n90.5,-3\n180,-20\n270.2,-3\n300,-1\n"])
def test_uneven_points_become_rows_between_them(text):
    """Points on no even step are worked out every degree, marked bridged, not across wide gaps."""
    table, said = table_from_cut(read(text.encode(), "x", PLAIN).cuts[0], options=PLAIN)

    assert "not on an even step" in said[-1]
    assert len(table.angle_deg) == 360
    assert (table.state[300], table.state[285], table.state[45]) == ("seen", "bridged", "missing")
    assert table.chart_db[285] == pytest.approx(-3 + 2 * (285 - 270.2) / 29.8)


def test_errors_of_a_file_without_errors():
    """Half of the last digit, or what the user tells."""
    cut = read(b"0,0.0\n90,-3.5\n180,-20.0\n270,-3.0\n", "x", PLAIN).cuts[0]

    assert set(table_from_cut(cut, options=PLAIN)[0].error95_db) == {0.05}
    assert set(table_from_cut(cut, options=ExchangeOptions(error95_db=0.5))[0].error95_db) == {0.5}


@pytest.mark.parametrize(
    "how",
    [
        {"turn": "left"},
        {"step_deg": 7},
        {"step_deg": -1},
        {"decimals": 9},
        {"front_deg": float("inf")},
        {"error95_db": -1},
    ],
)
def test_options_that_mean_nothing(how):
    """Refused before any file is opened."""
    with pytest.raises(UsageError):
        ExchangeOptions(**how)


@FEW
@given(
    front=st.integers(0, 359),
    turn=st.sampled_from(["cw", "ccw"]),
    up=st.sampled_from(["growing", "falling"]),
    plane=st.sampled_from(["", "azimuth", "elevation"]),
    seed=st.integers(0, 9999),
)
def test_a_table_through_space_and_back(front, turn, up, plane, seed):
    """However a table's bearings stand, turning them into space and back gives the same rows."""
    level = np.random.default_rng(seed).uniform(-30, 0, 72)
    table = without(table_of(np.round(level, 3), error95_db=0.25), [3, 4])
    options = ExchangeOptions(front_deg=front, turn=turn, up=up, plane=plane)
    if front % 5:
        return
    back, _ = table_from_cut(cut_from_table(table, options=options), options=options)

    np.testing.assert_array_equal(back.state, table.state)
    np.testing.assert_allclose(back.chart_db, table.relative_db, atol=1e-12)
    np.testing.assert_array_equal(back.error95_db, table.error95_db)
