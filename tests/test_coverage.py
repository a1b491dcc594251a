"""The error column holds: 93 to 97 % of rows lie inside their own error95_db, on seeded charts of every kind.

Rows of one chart share its grid and its line, so they are far from independent; the charts are many and small
rather than few and large. Classes of rows are those of tests/bench/rows.py, where the full table by class is
printed.
"""

import numpy as np
import pytest

from tests.bench.accuracy import coverage, read_case
from tests.bench.cases import GROUPS, make_case
from tests.bench.rows import CLASSES, judge, row_kinds
from tests.draw import Chart, Trace, patterns
from tests.draw.spec import N_TRUE, STEP_TRUE, drawn_curve

DEG = np.arange(N_TRUE) * STEP_TRUE
N_CHARTS = 3  # a group of GROUPS: 30 charts, some 40 traces, 14 000 rows
OUTER_PX = 170
SEED = 5  # other charts than the benchmark's
HOLDS = (0.93, 0.97)
CLASS_HOLDS = (0.90, 0.99)  # a class has fewer charts behind it
LEAST_ROWS = 150
SURE_SHARE = 0.7  # of the traces are read without a reason to look
NARROW = 4.5  # median claim over median error; 2.9 for a normal error

FLAGGED = pytest.mark.xfail(
    strict=False, reason="about a third of the spoiled charts are read with a reason to look, more than should be"
)
CROSSED = pytest.mark.xfail(strict=False, reason="where traces cross, the claim beside the crossing is too narrow")
WIDE = pytest.mark.xfail(strict=False, reason="claims are about twice as wide as the errors ask for")


@pytest.fixture(scope="module")
def results(tmp_path_factory):
    """Read every trace of every chart: a list of `Result`."""
    folder = tmp_path_factory.mktemp("coverage")
    cases = [
        make_case(folder, group, number, seed=SEED, outer_px=OUTER_PX, n_traces=1 + number % 2)
        for group in GROUPS
        for number in range(N_CHARTS)
    ]
    return [read_case(case, k) for case in cases for k in range(len(case.inks))]


def sure(results):
    """`Rows` of the traces that were read without a reason to look."""
    return [item.rows for item in results if item.rows is not None and not item.review]


def test_nothing_breaks(results):
    """A trace may be refused with a remedy, never with an unforeseen error; nearly all are read."""
    faults = [f"{item.name} trace {item.trace}: {item.fault}" for item in results if item.fault]

    assert not [fault for fault in faults if "BROKE" in fault]
    assert len(faults) <= 0.1 * len(results), faults


def test_nothing_is_wrong_in_silence(results):
    """A reading that is grossly off gives a reason to look."""
    assert [f"{item.name} trace {item.trace}" for item in results if item.silently_wrong] == []


@FLAGGED
def test_error95_holds_over_all_rows(results):
    """93 to 97 % of all rows of sure readings, which most readings are."""
    rows = sure(results)

    assert len(rows) >= SURE_SHARE * len(results)
    assert HOLDS[0] <= coverage(rows) <= HOLDS[1]


@pytest.mark.parametrize(
    "kind", [pytest.param(kind, marks=CROSSED) if kind == "crossing" else kind for kind in CLASSES]
)
def test_error95_holds_by_class(results, kind):
    """Also on flanks, by nulls, at crossings and where rows are bridged."""
    rows = sure(results)

    assert sum((item.kind == kind).sum() for item in rows) >= LEAST_ROWS
    assert CLASS_HOLDS[0] <= coverage(rows, kind) <= CLASS_HOLDS[1]


@WIDE
def test_error95_is_not_bought_with_width(results):
    """The claim stays near what a normal error asks for."""
    error = np.concatenate([np.abs(rows.error_db) for rows in sure(results)])
    claimed = np.concatenate([rows.claimed_db for rows in sure(results)])

    assert np.median(claimed) / np.median(error) < NARROW


def test_rows_are_classed_as_the_eye_would():
    """A figure-of-eight: lobes flat, its two nulls null, the sides of the lobes flank."""
    trace = Trace(db=patterns.bidirectional(DEG, power=1.0))
    chart = Chart(traces=(trace,))
    kind = row_kinds(chart, 0, *drawn_curve(chart, trace))

    assert set(kind[4 * np.arange(-30, 31)]) == {"flat"}
    assert set(kind[4 * np.array([88, 90, 92, 268, 270, 272])]) == {"null"}
    assert set(kind[4 * np.array([84, 96, 264, 276])]) == {"flank"}


def test_crossing_rows_are_seen():
    """Two circles apart and two that touch."""
    flat = Trace(db=np.full(N_TRUE, -10.0))
    wavy = Trace(db=-10 + 3 * np.sin(np.radians(DEG)))
    chart = Chart(traces=(flat, wavy), outer_px=250)
    kind = row_kinds(chart, 0, *drawn_curve(chart, flat))

    assert kind[0] == "crossing"
    assert kind[4 * 90] == "flat"


def test_judge_counts_only_rows_inside_the_chart():
    """Below the centre no row is due; a row read 0.3 dB high is 0.3 dB off."""
    db = np.where(DEG < 180, -60.0, -10.0)
    chart = Chart(traces=(Trace(db=db),))

    rows = judge(chart, 0, np.arange(360), np.full(360, -9.7), np.full(360, 0.5), np.full(360, "seen"))

    assert rows.n_wanted == len(rows.error_db) == 180
    np.testing.assert_allclose(rows.error_db, 0.3)
    assert coverage([rows]) == 1.0
