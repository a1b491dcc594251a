"""Labels: numbers from a recogniser's odds, the votes for levels and bearings, and whole charts where the
extra is in.
"""

import numpy as np
import pytest

from digitise import _ocr
from digitise._label_number import Alphabet
from digitise._level_vote import LevelReading, vote_levels
from digitise._rim_vote import vote_rim
from digitise.bearing import make_bearing
from digitise.exceptions import NotReadError
from digitise.labels import Label, Labels, read_labels
from digitise.scale import make_scale
from digitise.settings import Settings

from .grids import plane_grid

CHARACTERS = ["", *"0123456789-+.dBi°OlS−", " "]
RINGS = [1.0, 0.75, 0.5, 0.25]


def odds_of(text, *, share=0.9):
    """Log odds of a recogniser that is `share` sure of every character, with a blank column between them."""
    rows = []
    for character in text:
        for seen in ("", character):
            row = np.full(len(CHARACTERS), (1 - share) / (len(CHARACTERS) - 1))
            row[CHARACTERS.index(seen)] = share
            rows.append(row)
    return np.log(np.array(rows))


def ring_label(rho, readings, unit="dB"):
    """A ring label read with (value, odds) alternatives."""
    value, odds = readings[0]
    return Label(
        text=f"{value:g}",
        value=value,
        unit=unit,
        x_px=0.0,
        y_px=0.0,
        w_px=20.0,
        h_px=12.0,
        rho=rho,
        plane_deg=80.0,
        confidence=odds,
        role="ring",
        readings=tuple(readings),
        ring_rho=rho,
    )


def rim_label(plane_deg, readings):
    """A rim label read with (value, odds) alternatives."""
    value, odds = readings[0]
    return Label(
        text=f"{value:g}",
        value=value,
        unit="",
        x_px=0.0,
        y_px=0.0,
        w_px=20.0,
        h_px=12.0,
        rho=1.1,
        plane_deg=plane_deg,
        confidence=odds,
        role="rim",
        readings=tuple(readings),
    )


def labels_of(*found):
    """`Labels` as an engine would give them."""
    return Labels(found=found, engine="some engine")


@pytest.mark.parametrize(
    ("text", "value", "unit"),
    [
        ("-10", -10, ""),
        ("0", 0, ""),
        ("+5", 5, ""),
        ("−5", -5, ""),
        ("-3 dB", -3, "dB"),
        ("12dBi", 12, "dBi"),
        ("-2.5", -2.5, ""),
    ],
)
def test_a_level_is_read_from_odds(text, value, unit):
    """Signs of either kind, a decimal and the unit are understood."""
    best = Alphabet(CHARACTERS).numbers(odds_of(text), "level")[0]

    assert (best.value, best.unit) == (value, unit)
    assert best.odds > 0.3


@pytest.mark.parametrize(("text", "value", "unit"), [("330°", 330, "deg"), ("-150", -150, ""), ("0", 0, "")])
def test_a_bearing_is_read_from_odds(text, value, unit):
    """Bearings have up to three digits and may have a degree sign."""
    best = Alphabet(CHARACTERS).numbers(odds_of(text), "bearing")[0]

    assert (best.value, best.unit) == (value, unit)


def test_look_alikes_count_for_each_other():
    """A capital O is a zero, an l a one and an S a five, at a discount."""
    alphabet = Alphabet(CHARACTERS)

    assert alphabet.numbers(odds_of("lO"), "level")[0].value == 10
    assert alphabet.numbers(odds_of("-S"), "level")[0].value == -5
    assert alphabet.numbers(odds_of("-S"), "level")[0].odds < alphabet.numbers(odds_of("-5"), "level")[0].odds


@pytest.mark.parametrize("law", ["even", "field", "power", "log-periodic"])
def test_three_labels_tell_the_law(law):
    """Rings at their published radii with their levels are recognised, and fit to far below a pixel."""
    levels = np.array([0.0, -3, -6, -10])
    rho = {
        "even": 1 + levels / 12,
        "field": 10 ** (levels / 20),
        "power": 10 ** (levels / 10),
        "log-periodic": 0.89 ** (-levels / 2),
    }[law]
    labels = labels_of(*(ring_label(r, [(v, 0.95)]) for r, v in zip(rho, levels)))
    scale = make_scale(plane_grid(rho), settings=Settings(), labels=labels)

    assert (scale.law, scale.unit, scale.source) == (law, "dB", "labels")
    assert scale.residual_px < 0.01
    assert not scale.reasons
    np.testing.assert_allclose(scale.level(rho), levels, atol=1e-6)


def test_one_wrong_label_does_not_win_over_two_right_ones():
    """-10 read as 40 with confidence changes nothing but the count of labels."""
    labels = labels_of(
        ring_label(1.0, [(0.0, 0.9)]),
        ring_label(0.75, [(40.0, 0.95)]),
        ring_label(0.5, [(-20.0, 0.9)]),
        ring_label(0.25, [(-30.0, 0.9)]),
    )
    scale = make_scale(plane_grid(RINGS), settings=Settings(), labels=labels)

    np.testing.assert_allclose(scale.level(np.array(RINGS)), [0, -10, -20, -30], atol=1e-9)


def test_lost_minus_signs_show_as_a_reversed_step():
    """0, 10, 20, 30 inward are 0, -10, -20, -30: levels fall inward."""
    labels = labels_of(*(ring_label(r, [(v, 0.9)]) for r, v in zip(RINGS, (0.0, 10.0, 20.0, 30.0))))
    scale = make_scale(plane_grid(RINGS), settings=Settings(), labels=labels)

    np.testing.assert_allclose(scale.level(np.array(RINGS)), [0, -10, -20, -30], atol=1e-9)


def test_one_label_alone_is_flagged_or_refused():
    """What rests on habits of the trade says so."""
    try:
        scale = make_scale(
            plane_grid(RINGS), settings=Settings(), labels=labels_of(ring_label(0.5, [(-20.0, 0.95)]))
        )
    except NotReadError as error:
        assert "--outer" in str(error)
    else:
        assert "levels-guessed" in [item.code for item in scale.reasons]


def test_labels_that_fit_no_law_are_refused_or_flagged():
    """Levels at random are not made into a scale without a word; the refusal names the options."""
    wrong = labels_of(*(ring_label(r, [(v, 0.9)]) for r, v in zip(RINGS, (3.0, 17.0, -41.0, -44.0))))
    try:
        scale = make_scale(plane_grid(RINGS), settings=Settings(), labels=wrong)
    except NotReadError as error:
        assert "--outer, --centre and --law" in str(error)
    else:
        assert scale.reasons
    with pytest.raises(NotReadError, match="no ring labels were found; give --outer, --centre and --law"):
        make_scale(plane_grid(RINGS), settings=Settings(), labels=labels_of())


def test_told_values_win_over_labels():
    """A told outer level holds exactly, and the labels give the rest."""
    labels = labels_of(*(ring_label(r, [(v, 0.9)]) for r, v in zip(RINGS[1:], (-10.0, -20.0, -30.0))))
    scale = make_scale(plane_grid(RINGS), settings=Settings(outer_db=0.0), labels=labels)

    np.testing.assert_allclose(scale.level(np.array(RINGS)), [0, -10, -20, -30], atol=1e-9)


def test_nothing_to_vote_on():
    """No reading proposes no scale, no label no bearing."""
    assert vote_levels([], ring_rho=np.array(RINGS), outer_px=250.0) is None
    assert (
        vote_levels([LevelReading(ring=0, rho=1.0, options=())], ring_rho=np.array(RINGS), outer_px=250.0)
        is None
    )
    assert vote_rim([], []) is None


@pytest.mark.parametrize("turn", ["cw", "ccw"])
@pytest.mark.parametrize("zero", [0.0, 90.0, 270.0])
@pytest.mark.parametrize("signed", [False, True])
def test_rim_labels_tell_zero_and_turn(turn, zero, signed):
    """Twelve labels, 2 degrees off their spokes, one of them wrong."""
    rng = np.random.default_rng(5)
    bearings = np.arange(0, 360, 30.0)
    plane = zero + (1 if turn == "cw" else -1) * bearings + rng.normal(0, 1.0, 12)
    printed = np.where(bearings > 180, bearings - 360, bearings) if signed else bearings.copy()
    printed[4] = 300.0
    labels = labels_of(*(rim_label(p % 360, [(float(v), 0.9)]) for p, v in zip(plane, printed)))
    bearing = make_bearing(plane_grid(RINGS), settings=Settings(), labels=labels)

    assert bearing.zero_deg == pytest.approx(zero)
    assert (bearing.turn, bearing.signed, bearing.source) == (turn, signed, "labels")
    assert not bearing.reasons


def test_symmetric_rim_labels_are_flagged():
    """0, 90, 180, 90 read the same both ways."""
    labels = labels_of(
        *(rim_label(p, [(v, 0.95)]) for p, v in ((0, 0.0), (90, 90.0), (180, 180.0), (270, 90.0)))
    )
    bearing = make_bearing(plane_grid(RINGS), settings=Settings(), labels=labels)

    assert bearing.zero_deg == 0
    assert [item.code for item in bearing.reasons] == ["bearing-mirrored"]
    assert not make_bearing(
        plane_grid(RINGS), settings=Settings(turn="ccw", zero_deg=0.0), labels=labels
    ).reasons


def test_no_rim_label_is_an_assumption():
    """Without bearings 0 at the top and clockwise is assumed, and said."""
    bearing = make_bearing(plane_grid(RINGS), settings=Settings(), labels=labels_of())

    assert (bearing.zero_deg, bearing.turn, bearing.source) == (0.0, "cw", "assumed")
    assert [item.code for item in bearing.reasons] == ["bearing-assumed"]


def test_without_the_extra_nothing_is_read(monkeypatch):
    """No engine, no labels, and the scale's refusal names what to install."""
    monkeypatch.setattr(_ocr, "get_engine", lambda: None)
    labels = read_labels(None, None, None)

    assert (labels.found, labels.engine) == ((), "")
    with pytest.raises(
        NotReadError, match=r'give --outer, --centre, --zero and --turn, or install "digitise\[labels\]"'
    ):
        make_scale(plane_grid(RINGS), settings=Settings(), labels=labels)


def test_a_drawn_chart_is_read_whole(tmp_path):
    """Grid, labels, scale and bearing of a painted chart, nothing told."""
    pytest.importorskip("rapidocr")
    from digitise.find import find_charts
    from digitise.grid import find_grid
    from digitise.picture import open_picture
    from tests.draw import Chart, Page, Trace, paint, patterns, write_case

    angle = np.arange(0, 360, 0.25)
    chart = Chart(
        traces=(Trace(db=patterns.first_order(angle - 40)),), zero="right", turn="ccw", outer_px=230.0
    )
    page = Page(charts=(chart,), width=640, height=640)
    path = write_case(tmp_path, "chart", paint(page, renderer="matplotlib"), [])
    picture = open_picture(path)
    box = find_charts(picture)[0]
    grid = find_grid(picture, box)
    labels = read_labels(picture, box, grid)
    scale = make_scale(grid, settings=Settings(), labels=labels)
    bearing = make_bearing(grid, settings=Settings(), labels=labels)

    assert labels.engine.startswith("rapidocr")
    np.testing.assert_allclose(scale.level(np.array([1.0, 0.5])), [0.0, -20.0], atol=0.2)
    assert (bearing.zero_deg % 360, bearing.turn) == (pytest.approx(90.0, abs=0.1), "ccw")
    assert not scale.reasons
    assert not bearing.reasons
