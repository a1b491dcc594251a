"""The demo: every sample is complete, readings are judged rightly, and the command reads what is shipped."""

import os
import re
from dataclasses import replace

import numpy as np
import pytest

import digitise.demo
from digitise.cli import main
from digitise.demo import Curve, samples, score_reading
from digitise.picture import open_picture
from tests.hand import hand_reading, hand_table

LEAST_SAMPLES = 6
MEDIAN_DB = 0.1  # a clean sample is read to about 0.01 dB; this only tells a reading from a failure


def curve_of(off_db=0.0, **more):
    """A known curve that lies beside the hand-made table of a field cardioid."""
    table = hand_table()
    return Curve(
        **{"chart": 1, "name": "a", "angle_deg": table.angle_deg, "chart_db": table.chart_db + off_db, **more}
    )


def test_every_sample_is_complete():
    """A picture that opens, a sentence that says it is invented, options, and a curve a trace."""
    found = samples()

    assert len(found) >= LEAST_SAMPLES
    for sample in found:
        assert open_picture(sample.path).width > 300
        assert "invented" in sample.about
        assert all(option.startswith("--") for option in sample.options)
        for curve in sample.curves:
            assert len(curve.angle_deg) >= 90
            assert np.all(np.isfinite(curve.chart_db))


def test_a_reading_is_judged_by_its_distance():
    """Equal curves score 0; one beside the reading by 0.3 dB scores that, outside an error of 0.1 dB."""
    same, beside = (score_reading((hand_reading(),), curve_of(off)) for off in (0.0, 0.3))

    assert (same.median_db, same.p95_db, same.inside, same.rows) == (0, 0, 1, 1)
    assert beside.median_db == pytest.approx(0.3)
    assert beside.inside == 0


def test_the_nearest_trace_of_the_right_chart_counts():
    """With two traces the nearer one; another chart's curve finds none; a table without values neither."""
    two = hand_reading(2)

    assert score_reading((two,), curve_of()).median_db == 0
    assert score_reading((two,), curve_of(chart=2)) is None
    assert score_reading((replace(two, number=2),), curve_of(chart=2)).median_db == 0
    empty = hand_reading(table=hand_table(state=np.full(360, "missing")))
    assert score_reading((empty,), curve_of()) is None


def test_rows_without_a_value_lower_the_share():
    """Every fourth row missing: three quarters have a value; a floor row on the chart counts too."""
    state = np.where(np.arange(360) % 4 == 0, "missing", "seen").astype("U8")
    some = score_reading((hand_reading(table=hand_table(state=state)),), curve_of())
    state[1::4] = "floor"
    fewer = score_reading((hand_reading(table=hand_table(state=state)),), curve_of())

    assert some.rows == pytest.approx(0.75, abs=0.01)
    assert fewer.rows == pytest.approx(0.5, abs=0.01)


def test_what_lies_below_the_centre_is_not_asked_for():
    """A known curve that falls out of the chart, where no reading can follow: it is judged on the rest."""
    curve = curve_of()
    level = np.where(np.arange(360) < 90, -75.0, curve.chart_db)

    score = score_reading((hand_reading(),), replace(curve, chart_db=level))

    assert (score.median_db, score.p95_db, score.rows) == (0, 0, 1)


def test_the_command_reads_samples_and_leaves_files(tmp_path, monkeypatch, capsys):
    """Two samples, to be quick: a line a curve, files in demo-out, exit status 0; run twice it says so."""
    chosen = tuple(sample for sample in samples() if sample.path.stem in ("panel", "scan"))
    monkeypatch.setattr(digitise.demo, "samples", lambda: chosen)
    monkeypatch.chdir(tmp_path)

    assert main(["demo"]) == 0
    streams = capsys.readouterr()

    lines = [line for line in streams.out.splitlines() if line.startswith(("panel.png", "scan.jpg"))]
    assert len(lines) == 2
    assert all(float(re.search(r" (\d+\.\d{3}) ", line)[1]) < MEDIAN_DB for line in lines)
    assert {"panel.proof.png", "panel.record.json", "scan.proof.png"} <= set(os.listdir("demo-out"))
    assert "caution" in streams.err
    monkeypatch.setattr(digitise.demo, "samples", lambda: chosen[:1])
    assert main(["demo"]) == 0
    assert "of an earlier demo were replaced" in capsys.readouterr().out


def test_a_sample_that_fails_is_said(tmp_path, monkeypatch, capsys):
    """The worst exit status comes through, with the picture's name."""
    broken = replace(samples()[0], path=tmp_path / "none.png")
    monkeypatch.setattr(digitise.demo, "samples", lambda: (broken,))

    assert main(["demo", "--out", str(tmp_path / "out")]) == 4
    assert "none.png: no such file" in capsys.readouterr().err
