"""Bad input through the whole command: one line that names file and remedy, the right exit status, no file
left.

Nothing is replaced here: the pictures go through the real flow.
"""

import os

import cv2
import numpy as np
import pytest
from PIL import Image

from digitise.cli import main
from digitise.record import make_record, write_record
from tests.draw import Chart, Page, Trace, paint
from tests.hand import CENTRE, OUTER_PX, SHA256, cardioid_page, hand_reading, painted

TOLD = ["--outer", "0", "--centre", "-40", "--zero", "top", "--turn", "cw"]
BEARING = ["--zero", "top", "--turn", "cw"]


def refused(words, capsys, out):
    """Run `digitise read`; the exit status, the one line said, and that nothing was written."""
    status = main(["read", *map(str, words), "--out", str(out)])
    streams = capsys.readouterr()
    assert streams.out == ""
    assert streams.err.count("\n") == 1, streams.err
    assert streams.err.startswith("digitise: ")
    assert not os.path.exists(out)
    return status, streams.err


@pytest.fixture
def out(tmp_path):
    """A folder that must not come into being."""
    return tmp_path / "out"


def saved(tmp_path, rgb, name="panel.png"):
    """Save pixels as a picture file."""
    path = tmp_path / name
    Image.fromarray(rgb).save(path)
    return path


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "the file is empty; save or download it again"),
        (b"angle,dB\n0,-3\n", "is text, not a picture; give a PNG"),
    ],
)
def test_an_empty_file_and_a_text_file(tmp_path, out, capsys, content, message):
    """Exit status 4."""
    path = tmp_path / "panel.png"
    path.write_bytes(content)

    status, said = refused([path, *TOLD], capsys, out)

    assert status == 4
    assert f"{path}: {message}" in said


def test_a_truncated_png(tmp_path, out, capsys):
    """A download that stopped half-way: exit status 4."""
    path = saved(tmp_path, painted(1))
    path.write_bytes(path.read_bytes()[:4000])

    status, said = refused([path, *TOLD], capsys, out)

    assert status == 4
    assert f"{path}: the picture is broken or cut short" in said


def landscape():
    """A photo-like picture without a chart: hills, clouds, grain."""
    rng = np.random.default_rng(73)
    cloud = sum(
        cv2.resize(rng.normal(0, 1, (4 * 2**k, 6 * 2**k)), (720, 480), interpolation=cv2.INTER_CUBIC) / 1.7**k
        for k in range(6)
    )
    hill = np.arange(480)[:, None] > 300 + 60 * np.sin(np.arange(720) / 110)[None, :]
    sky = np.stack([120 + 25 * cloud, 150 + 22 * cloud, 190 + 18 * cloud], axis=2)
    land = np.stack([70 + 20 * cloud, 95 + 22 * cloud, 50 + 15 * cloud], axis=2)
    photo = np.where(hill[:, :, None], land, sky) + rng.normal(0, 4, (480, 720, 3))
    return np.clip(photo, 0, 255).astype(np.uint8)


@pytest.mark.parametrize("kind", ["photo", "white", "noise", "tiny"])
def test_a_picture_without_a_chart(tmp_path, out, capsys, kind):
    """A landscape, a blank page, noise, a few pixels: exit status 3, and what would help."""
    rgb = {
        "photo": landscape(),
        "white": np.full((400, 500, 3), 255, np.uint8),
        "noise": np.random.default_rng(74).integers(0, 256, (300, 320, 3), np.uint8),
        "tiny": np.full((3, 2, 3), 255, np.uint8),
    }[kind]

    status, said = refused([saved(tmp_path, rgb), *TOLD], capsys, out)

    assert status == 3
    assert "--crop" in said


def test_a_chart_without_the_ink_that_was_told(tmp_path, out, capsys):
    """Exit status 3, with the inks that are there."""
    status, said = refused([saved(tmp_path, painted(1)), *TOLD, "--ink", "#e0a000"], capsys, out)

    assert status == 3
    assert "no trace was found in the ink #e0a000" in said
    assert "--ink" in said


def test_a_chart_without_a_trace(tmp_path, out, capsys):
    """A bare grid: exit status 3."""
    page = Page(charts=(Chart(traces=(), centre_x=CENTRE[0], centre_y=CENTRE[1]),), width=600, height=620)

    status, said = refused([saved(tmp_path, paint(page)), *TOLD], capsys, out)

    assert status == 3
    assert "no trace was found" in said


def test_outer_equal_to_centre(tmp_path, out, capsys):
    """Exit status 2, before the picture is opened."""
    status, said = refused([tmp_path / "none.png", "--outer=-3", "--centre", "-3"], capsys, out)

    assert status == 2
    assert "--outer and --centre are both -3 dB" in said


def at(rho, bearing_deg):
    """A click at a place of the chart, whole pixels."""
    t = np.radians(bearing_deg)
    return round(CENTRE[0] + rho * OUTER_PX * np.sin(t)), round(CENTRE[1] - rho * OUTER_PX * np.cos(t))


def mark(rho, bearing_deg, level_db):
    """A `--mark` option."""
    x, y = at(rho, bearing_deg)
    return f"--mark={x},{y}={level_db}"


@pytest.mark.parametrize(
    ("marks", "named"),
    [
        ((mark(1, 37, 0), mark(0.62, 217, -20)), "ring"),
        ((mark(1, 37, 0), mark(1, 217, -10)), "mark"),
        ((mark(1, 37, 0), mark(0.75, 217, -10), mark(0.5, 37, -5)), "mark"),
        ((mark(1, 37, -10), mark(0.5, 217, 0)), "mark"),
    ],
)
def test_marks_that_cannot_be_right(tmp_path, out, capsys, marks, named):
    """Far from any ring, one ring with two levels, levels that rise inward: exit status 2."""
    status, said = refused([saved(tmp_path, painted(1)), *BEARING, *marks], capsys, out)

    assert status == 2
    assert named in said
    assert str(tmp_path / "panel.png") in said


def test_an_out_that_cannot_be_a_folder(tmp_path, capsys):
    """A file stands there: exit status 2, before anything is read; the file stays as it was."""
    path = saved(tmp_path, painted(1))
    (tmp_path / "out").write_text("mine")

    status = main(["read", str(path), *TOLD, "--out", str(tmp_path / "out")])

    said = capsys.readouterr().err
    assert status == 2
    assert said.count("\n") == 1
    assert "--out" in said or "cannot be written" in said
    assert (tmp_path / "out").read_text() == "mine"


def test_an_out_without_permission(tmp_path, capsys, monkeypatch):
    """A folder that may not be written to; the system's answer is put in: nothing binds the superuser."""
    path = saved(tmp_path, painted(1))
    folder = tmp_path / "out"
    folder.mkdir()
    monkeypatch.setattr("digitise.outputs.os.access", lambda place, mode: False)

    assert main(["read", str(path), *TOLD, "--out", str(folder)]) == 2
    assert "may not be written to" in capsys.readouterr().err


def test_the_users_own_file_in_the_way(tmp_path, capsys):
    """`panel.csv` is there and is no table of ours: exit status 2, and it stays."""
    path = saved(tmp_path, painted(1))
    (tmp_path / "panel.csv").write_text("mine")

    status = main(["read", str(path), *TOLD, "--out", str(tmp_path)])

    assert status == 2
    assert "belongs to no earlier reading" in capsys.readouterr().err
    assert (tmp_path / "panel.csv").read_text() == "mine"
    assert sorted(os.listdir(tmp_path)) == ["panel.csv", "panel.png"]


def test_a_like_that_is_no_record(tmp_path, out, capsys):
    """A table, and a record with a fault, after --like: exit status 4."""
    path = saved(tmp_path, painted(1))
    (tmp_path / "a.json").write_text("angle_deg\n")
    record = make_record(hand_reading(), tables=["panel.csv"])
    record["chart"]["sha256"] = SHA256[:10]
    (tmp_path / "b.json").write_text(write_record(record))

    for name, message in (("a.json", "it is not JSON text"), ("b.json", "chart.sha256 is not a sha256")):
        status, said = refused([path, "--like", tmp_path / name], capsys, out)
        assert status == 4
        assert f"{tmp_path / name}: is not a digitise-record/1: {message}" in said


def test_an_unhelped_chart_names_the_options_that_help(tmp_path, out, capsys):
    """Nothing told and no label printed: exit status 3, and the message names --outer, --centre or --mark."""
    page = cardioid_page()
    bare = Page(
        charts=tuple(
            Chart(
                traces=(Trace(db=chart.traces[0].db),),
                centre_x=chart.centre_x,
                centre_y=chart.centre_y,
                ring_labels=None,
                rim_labels=None,
            )
            for chart in page.charts
        ),
        width=page.width,
        height=page.height,
    )

    status, said = refused([saved(tmp_path, paint(bare))], capsys, out)

    assert status == 3
    assert "--outer" in said
