"""What a datasheet states against a table's figures: agreement within both errors, bounds, refusals."""

import numpy as np
import pytest

from digitise.claims import judge_claims, parse_claims
from digitise.exceptions import UsageError
from digitise.figures import figures_of

from .draw import patterns
from .tables import bearings, table_of

DEG = bearings()
SECTOR = figures_of(
    table_of(patterns.sector(DEG), error95_db=0.1, floor_db=-40.0)
)  # 65.11 wide, 30 dB front-to-back
CLIPPED = figures_of(table_of(patterns.sector(DEG), error95_db=0.1, floor_db=-20.0))
TILTED = figures_of(
    table_of(
        patterns.backed(patterns.linear_array(DEG - 6, n=8, spacing_wl=0.8), DEG),
        error95_db=0.1,
        floor_db=-40.0,
    ),
    cut="elevation",
)


def verdict(text, figures=SECTOR):
    """The only verdict of one claim."""
    return judge_claims(parse_claims(text), figures)[0].verdict


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("beamwidth=65", "agrees"),
        ("beamwidth=63", "differs"),
        ("beamwidth=65.1", "agrees"),
        ("beamwidth3=65.0", "agrees"),
        ("beamwidth=68+-3", "agrees"),
        ("beamwidth=70\u00b13", "differs"),
        ("beamwidth = 65 deg", "agrees"),
        ("ftb=30", "agrees"),
        ("ftb>=25", "agrees"),
        ("ftb>25 dB", "agrees"),
        ("ftb>=33", "differs"),
        ("ftb<=25", "differs"),
        ("squint<=2", "agrees"),
        ("ripple=2", "cannot tell"),
        ("tilt=6", "cannot tell"),
    ],
)
def test_verdicts(text, expected):
    """A 65-degree sector (3GPP TR 38.901 table 7.3-1) with 0.1 dB of reading error."""
    assert verdict(text) == expected


def test_rounding_of_the_stated_value_counts():
    """65 is anything from 64.5 to 65.5 (JCGM 100:2008, 4.3.7).

    65.0 is not: 65.11 with no error of its own differs.
    """
    exact = figures_of(table_of(patterns.sector(DEG), error95_db=0.0, floor_db=-40.0))

    assert verdict("beamwidth=65", exact) == "agrees"
    assert verdict("beamwidth=65.00", exact) == "differs"


def test_a_larger_reading_error_agrees_with_more():
    """0.8 off 65.1 is beyond a small error and within a large one."""
    rough = figures_of(table_of(patterns.sector(DEG), error95_db=0.6, floor_db=-40.0))

    assert verdict("beamwidth=66.00") == "differs" or SECTOR["beamwidth"].error95 > 0.89
    assert verdict("beamwidth=66.00", rough) == "agrees"
    assert verdict("beamwidth=80.00", rough) == "differs"


@pytest.mark.parametrize(
    "text", ["sidelobe_upper=-12.8", "sidelobe_upper=12.8", "sidelobe_upper>=12", "sidelobe_upper<=-12"]
)
def test_suppression_and_level_mean_the_same(text):
    """Side lobes are stated as a level below 0 or as a suppression above it (here -12.8 dB)."""
    assert verdict(text, TILTED) == "agrees"


@pytest.mark.parametrize("text", ["sidelobe_upper>=16", "sidelobe_upper<=-16", "sidelobe_upper=16"])
def test_a_suppression_that_is_not_there_differs(text):
    """16 dB against 12.8."""
    assert verdict(text, TILTED) == "differs"


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("ftb>=18", "agrees"),
        ("ftb=30", "cannot tell"),
        ("ftb>=25", "cannot tell"),
        ("ftb=15", "differs"),
        ("ftb<=15", "differs"),
    ],
)
def test_below_the_charts_centre(text, expected):
    """The chart ends at -20 dB: front-to-back is at least 20 and no more is known."""
    assert verdict(text, CLIPPED) == expected


def test_sentences_hold_the_numbers():
    """A verdict says what was read, and what counts as agreement."""
    sentence = judge_claims(parse_claims("beamwidth=63"), SECTOR)[0].sentence

    assert "read 65.1" in sentence
    assert "+2.1 from the stated" in sentence


@pytest.mark.parametrize(
    "text",
    [
        "width=65",
        "beamwidth",
        "beamwidth=wide",
        "beamwidth=65,",
        "",
        "beamwidth==65",
        "ftb>=25+-1",
        "beamwidth=nan",
    ],
)
def test_what_is_no_claim_is_refused(text):
    """One line, with what would be one."""
    with pytest.raises(UsageError, match="--claim"):
        parse_claims(text)


def test_minus_signs_of_copied_text():
    """A typographic minus sign is a minus sign."""
    assert np.isclose(parse_claims("sidelobe_upper=\u221218")[0].value, -18)
