"""The command line: options, exit statuses, messages, and what goes to which stream; called in-process."""

import json
import os
import subprocess
import sys
from dataclasses import replace
from importlib.util import find_spec

import numpy as np
import pytest
from PIL import Image

import digitise.reading
from digitise.caution import CAUTION
from digitise.cli import COMMANDS, main
from digitise.commands.reading_options import add_reading_options, settings_from_args
from digitise.exceptions import NotReadError, UsageError
from digitise.outputs import make_files, write_whole
from digitise.picture import open_picture
from digitise.review import reason
from digitise.settings import Mark
from digitise.table import read_table
from tests.draw import patterns
from tests.hand import SHA256, cardioid_page, hand_reading, painted

TOLD = ["--outer", "0", "--centre", "-40", "--zero", "top", "--turn", "cw"]
START_SECONDS = 5.0  # for `--help` in a process of its own on a busy machine; it takes about 0.15 s
HEAVY = ("numpy", "cv2", "scipy", "skimage", "PIL", "matplotlib", "onnxruntime", "tkinter")


@pytest.fixture
def picture(tmp_path):
    """A picture file with one chart."""
    path = tmp_path / "panel.png"
    Image.fromarray(painted(1)).save(path)
    return str(path)


@pytest.fixture
def quick(monkeypatch):
    """Put a reading made by hand in the place of the flow; the settings it got are kept."""
    seen = []

    def read_charts(picture, *, settings):
        seen.append(settings)
        reading = hand_reading(2 if "two" in picture.path else 1, path=picture.path)
        return (replace(reading, picture=picture, settings=settings),)

    monkeypatch.setattr(digitise.reading, "read_charts", read_charts)
    return seen


def parsed(*words, sha256=None):
    """The settings that `digitise read` would make of these options."""
    import argparse

    from digitise.cli import _join_negative

    parser = argparse.ArgumentParser(allow_abbrev=False)
    add_reading_options(parser)
    return settings_from_args(parser.parse_args(_join_negative(list(words))), sha256=sha256)


def test_every_option_reaches_the_settings():
    """All options of `read`, with the negative numbers that dB bring along."""
    settings = parsed(
        "--outer",
        "-3",
        "--centre=-43.5",
        "--zero",
        "left",
        "--turn",
        "ccw",
        "--ink",
        "#1F4fb4",
        "--ink",
        "#000000",
        "--cover",
        "1,2,3,4",
        "--cover",
        "5,6,7,8",
        "--pin",
        "9,10",
        "--crop",
        "0,0,600,620",
        "--page",
        "2",
        "--step",
        "0.5",
        "--law",
        "even",
    )

    assert (settings.outer_db, settings.centre_db) == (-3.0, -43.5)
    assert (settings.zero_deg, settings.turn, settings.step_deg, settings.page) == (270.0, "ccw", 0.5, 2)
    assert settings.inks == ("#1F4fb4", "#000000")
    assert settings.covers == ((1, 2, 3, 4), (5, 6, 7, 8))
    assert (settings.pins, settings.crop, settings.law) == (((9, 10),), (0, 0, 600, 620), "even")


@pytest.mark.parametrize(
    ("words", "levels"),
    [
        (("--ring-levels", "0,-3,-10"), (0, -3, -10)),
        (("--ring-levels=-3,-10",), (-3, -10)),
        (("--ring-levels", "-3,-10"), (-3, -10)),
        (("--ring-levels", "-.5,-10,-20.5"), (-0.5, -10, -20.5)),
        (("--ring-levels", "0,\u22123,\u201310"), (0, -3, -10)),
    ],
)
def test_ring_levels_in_every_way_of_writing(words, levels):
    """A list that begins with a minus must not be taken for an option; copied minus signs count too."""
    assert parsed(*words).ring_levels == levels


def test_marks_and_zero_by_degrees():
    """`X,Y=DB` with a negative level; DEG beyond a full turn."""
    settings = parsed("--mark", "300.5,60=0", "--mark", "300,310=-40.5", "--zero", "-90")

    assert settings.marks == (Mark(x_px=300.5, y_px=60, level_db=0), Mark(x_px=300, y_px=310, level_db=-40.5))
    assert settings.zero_deg == 270.0


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("--outer", "x"), "'x' is not a number"),
        (("--outer", "nan"), "'nan' is not a number"),
        (("--mark", "1,2"), "not of the form X,Y=DB"),
        (("--mark", "1=2"), "not of the form X,Y=DB"),
        (("--cover", "1,2,3"), "not of the form X,Y,W,H"),
        (("--cover", "1,2,3,0"), "has no size"),
        (("--pin", "1"), "not of the form X,Y"),
        (("--page", "0"), "not a page number"),
        (("--turn", "left"), "invalid choice"),
        (("--law", "cubic"), "invalid choice"),
        (("--ink", "blue"), "is not a colour"),
        (("--step", "7"), "does not divide 360"),
        (("--outer", "1", "--centre", "1"), "are both 1 dB"),
        (("--outer", "1", "--mark", "1,2=3"), "give one or the other"),
        (("--mark", "1,2=3", "--ring-levels", "0,-3"), "give one or the other"),
        (("--ring-levels", "-3,0"), "must fall"),
        (("--law", "rings"), "needs the levels"),
        (("--out",), "expected one argument"),
        (("--cent", "-40"), "unrecognized arguments"),
    ],
)
def test_wrong_options_are_refused_before_anything_is_read(words, message, picture, tmp_path, capsys, quick):
    """Exit status 2, one line on standard error, nothing on standard output, no file."""
    before = sorted(os.listdir(tmp_path))

    assert main(["read", picture, "--out", str(tmp_path / "out"), *words]) == 2

    streams = capsys.readouterr()
    assert message in streams.err
    assert streams.err.count("\n") == 1
    assert streams.out == ""
    assert sorted(os.listdir(tmp_path)) == before
    assert quick == []


def test_a_reading_writes_its_files_and_says_so(picture, tmp_path, capsys, quick):
    """Summary on standard output; caution once, on standard error; three files."""
    assert main(["read", picture, "--out", str(tmp_path / "out")]) == 0

    streams = capsys.readouterr()
    assert sorted(os.listdir(tmp_path / "out")) == ["panel.csv", "panel.proof.png", "panel.record.json"]
    assert streams.out.startswith(str(tmp_path / "out" / "panel.csv") + ": ")
    assert "peak 0.00 dB at 0 deg" in streams.out
    assert "beamwidth 131" in streams.out
    assert "nothing to review" in streams.out
    assert streams.err == f"digitise: caution: {CAUTION}\n"


def test_review_reasons_are_a_line_each(picture, tmp_path, capsys, monkeypatch):
    """On standard error, with the file's name; the summary counts them."""
    reading = hand_reading(path=picture, reasons=(reason("peak-low", 6.0), reason("grid-residual", 1.2)))
    monkeypatch.setattr(digitise.reading, "read_charts", lambda picture, *, settings: (reading,))

    assert main(["read", picture, "--out", str(tmp_path / "out")]) == 0

    streams = capsys.readouterr()
    lines = [line for line in streams.err.splitlines() if ": review: " in line]
    assert [line.split(": ")[3] for line in lines] == ["peak-low", "grid-residual"]
    assert all(line.startswith(f"digitise: {picture}: review: ") for line in lines)
    assert "2 to review" in streams.out


def test_json_prints_the_record_alone(picture, tmp_path, capsys, quick):
    """Standard output is the record, the same as in the file."""
    assert main(["read", picture, "--out", str(tmp_path / "out"), "--json"]) == 0

    printed = json.loads(capsys.readouterr().out)
    assert printed == json.loads((tmp_path / "out" / "panel.record.json").read_text())


def test_json_of_several_is_a_list(picture, tmp_path, capsys, quick):
    """Two pictures: one valid JSON document."""
    Image.fromarray(painted(1)).save(tmp_path / "other.png")

    assert main(["read", picture, str(tmp_path / "other.png"), "--out", str(tmp_path / "out"), "--json"]) == 0

    assert [record["chart"]["file"] for record in json.loads(capsys.readouterr().out)] == [
        "panel.png",
        "other.png",
    ]


def test_the_current_folder_is_the_default(picture, tmp_path, monkeypatch, quick):
    """Without --out the files go where the user stands, not beside the picture."""
    (tmp_path / "here").mkdir()
    monkeypatch.chdir(tmp_path / "here")

    assert main(["read", picture]) == 0
    assert sorted(os.listdir()) == ["panel.csv", "panel.proof.png", "panel.record.json"]


def test_one_failure_does_not_stop_the_others(picture, tmp_path, capsys, quick):
    """A missing file between two good ones: both are read, and the exit status is the worst."""
    two = tmp_path / "two.png"
    Image.fromarray(painted(1)).save(two)

    status = main(["read", picture, str(tmp_path / "none.png"), str(two), "--out", str(tmp_path / "out")])

    streams = capsys.readouterr()
    assert status == 4
    assert f"digitise: {tmp_path / 'none.png'}: no such file" in streams.err
    assert sorted(name for name in os.listdir(tmp_path / "out") if name.endswith(".csv")) == [
        "panel.csv",
        "two.1.csv",
        "two.2.csv",
    ]
    assert streams.err.count("caution") == 1


@pytest.mark.parametrize(
    ("error", "status", "said"),
    [
        (
            NotReadError("no ring levels were found", remedy="give --outer and --centre", stage="scale"),
            3,
            "give --outer",
        ),
        (
            UsageError("a mark is 40 px from the nearest ring", remedy="click on a ring", stage="scale"),
            2,
            "click on a ring",
        ),
        (MemoryError(), 70, "not enough memory"),
        (ZeroDivisionError("division by zero"), 70, "internal error (ZeroDivisionError: division by zero)"),
    ],
)
def test_what_stops_a_reading_is_one_line(picture, tmp_path, capsys, monkeypatch, error, status, said):
    """Status by kind, the file's name, the remedy; no file is left and no traceback shown."""

    def fail(picture, *, settings):
        raise error

    monkeypatch.setattr(digitise.reading, "read_charts", fail)

    assert main(["read", picture, "--out", str(tmp_path / "out")]) == status

    streams = capsys.readouterr()
    assert said in streams.err
    assert streams.err.count("\n") == 1
    assert streams.err.startswith(f"digitise: {picture}: ")
    assert not (tmp_path / "out").exists()


def test_debug_shows_where_an_error_of_the_program_arose(picture, tmp_path, monkeypatch):
    """With --debug, before or after the command, the exception comes through."""
    monkeypatch.setattr(digitise.reading, "read_charts", lambda picture, *, settings: 1 / 0)

    for words in (["--debug", "read", picture], ["read", picture, "--debug"]):
        with pytest.raises(ZeroDivisionError):
            main([*words, "--out", str(tmp_path / "out")])


def test_an_interrupt_ends_cleanly(picture, tmp_path, capsys, monkeypatch):
    """Exit status 130, one word, no traceback, no file."""

    def interrupt(picture, *, settings):
        raise KeyboardInterrupt

    monkeypatch.setattr(digitise.reading, "read_charts", interrupt)

    assert main(["read", picture, "--out", str(tmp_path / "out")]) == 130
    assert capsys.readouterr().err == "digitise: interrupted\n"
    assert not (tmp_path / "out").exists()


def test_a_reader_that_goes_away_ends_quietly(tmp_path):
    """`digitise --help | true`: nothing on standard error."""
    code = "import sys; from digitise.cli import main; sys.exit(main(['--help']))"
    child = subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    child.stdout.close()

    assert child.stderr.read() == b""
    child.stderr.close()
    child.wait(timeout=60)


def test_help_starts_without_heavy_imports():
    """`--help` lists the commands and loads neither numpy nor any of its like."""
    code = "import sys; from digitise.cli import main; main(['--help']); "
    code += f"print([m for m in {HEAVY} if m in sys.modules])"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, timeout=60, check=True
    )

    assert done.stdout.rstrip().endswith("[]")
    assert "read the charts on pictures" in done.stdout


@pytest.mark.parametrize("name", [name for name in COMMANDS if find_spec(f"digitise.commands.{name}")])
def test_every_command_has_a_help(name, capsys):
    """Each listed command parses `--help`, with exit status 0, and has the common options."""
    assert main([name, "--help"]) == 0

    said = capsys.readouterr().out
    assert f"digitise {name}" in said
    assert "--verbose" in said


def test_no_command_and_an_unknown_one(capsys):
    """Exit status 2 and the way to the help."""
    assert main([]) == 2
    assert main(["draw"]) == 2
    assert capsys.readouterr().err.count("see digitise --help") == 2


def test_the_version(capsys):
    """`--version` names program and version."""
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"digitise {digitise.__version__}\n"


def test_python_m_digitise(tmp_path):
    """The module runs as the command does."""
    done = subprocess.run(
        [sys.executable, "-m", "digitise", "read", str(tmp_path / "none.png")],
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )

    assert done.returncode == 4
    assert done.stderr == f"digitise: {tmp_path / 'none.png'}: no such file; check the name and the folder\n"


def test_verbose_logs_stages_and_times(picture, tmp_path, quick):
    """`--verbose` on standard error, in a process of its own, since logging is set up once."""
    done = subprocess.run(
        [
            sys.executable,
            "-m",
            "digitise",
            "read",
            picture,
            "--out",
            str(tmp_path / "out"),
            *TOLD,
            "--verbose",
        ],
        capture_output=True,
        text=True,
        timeout=120,
        check=True,
    )

    assert " ms digitise.commands.read: " in done.stderr
    for stage in ("opened", "read", "proof", "written"):
        assert stage in done.stderr


def test_reading_again_says_what_it_replaces(picture, tmp_path, capsys, quick):
    """Nothing is written over in silence."""
    for _ in range(2):
        assert main(["read", picture, "--out", str(tmp_path / "out")]) == 0

    assert "note: replaced the earlier reading\n" in capsys.readouterr().err


def test_pictures_whose_files_would_collide_are_refused(picture, tmp_path, capsys, quick):
    """Same stem, other folder: exit status 2 and nothing read."""
    (tmp_path / "b").mkdir()
    Image.fromarray(painted(1)).save(tmp_path / "b" / "panel.png")

    assert main(["read", picture, str(tmp_path / "b" / "panel.png"), "--out", str(tmp_path / "out")]) == 2
    assert "take the names of those of" in capsys.readouterr().err
    assert quick == []


def record_of(tmp_path, **told):
    """A record on disk, and its path."""
    write_whole(make_files((hand_reading(**told),), with_proof=False), tmp_path / "like")
    return str(tmp_path / "like" / "panel.record.json")


def test_like_takes_the_settings_and_options_override_them(tmp_path):
    """Levels told anew replace the record's scale; a told zero or turn its bearing; a told step its step."""
    like = record_of(tmp_path, step_deg=2.0, pins=((5.0, 6.0),))

    assert parsed("--like", like).step_deg == 2.0
    assert parsed("--like", like).scale.law == "even"
    assert parsed("--like", like).pins == ()
    assert parsed("--like", like, sha256=SHA256).pins == ((5.0, 6.0),)
    told = parsed("--like", like, "--outer", "10", "--step", "1")
    assert (told.scale, told.outer_db, told.step_deg) == (None, 10.0, 1.0)
    assert told.bearing.zero_deg == 0.0
    turned = parsed("--like", like, "--turn", "ccw")
    assert (turned.bearing.turn, turned.bearing.zero_deg) == ("ccw", 0.0)
    assert parsed("--like", like, sha256=SHA256).grid is not None
    for words in (("--crop", "0,0,300,300"), ("--page", "2")):
        elsewhere = parsed("--like", like, *words, sha256=SHA256)
        assert (elsewhere.grid, elsewhere.pins) == (None, ())
    assert parsed("--like", like, "--page", "2", "--pin", "7,8", sha256=SHA256).pins == ((7.0, 8.0),)
    zeroed = parsed("--like", like, "--zero", "right")
    assert (zeroed.bearing, zeroed.zero_deg, zeroed.turn) == (None, 90.0, "cw")


def test_a_chart_is_read_end_to_end_and_again_like_its_record(picture, tmp_path):
    """The whole way on a field cardioid: within the reading's own error; --like repeats the table."""
    assert main(["read", picture, "--out", str(tmp_path / "a"), *TOLD, "--ink", "#1f4fb4"]) == 0
    like = str(tmp_path / "a" / "panel.record.json")
    assert main(["read", picture, "--out", str(tmp_path / "b"), "--like", like]) == 0

    table = read_table(tmp_path / "a" / "panel.csv")
    true = patterns.first_order(table.angle_deg)
    seen = (table.state == "seen") & (true > -35)
    assert np.mean(np.abs(table.chart_db - true)[seen] <= table.error95_db[seen]) > 0.85
    assert np.median(np.abs(table.chart_db - true)[seen]) < 0.05
    assert (tmp_path / "b" / "panel.csv").read_bytes() == (tmp_path / "a" / "panel.csv").read_bytes()


def test_look_says_what_is_there(picture, tmp_path, capsys):
    """The grid as it was drawn, the ink, and a proof of both; `--json` holds the same."""
    chart = cardioid_page().charts[0]
    proof = tmp_path / "look.png"

    assert main(["look", picture, "--proof", str(proof)]) == 0
    said = capsys.readouterr().out
    assert main(["look", picture, "--json"]) == 0
    seen = json.loads(capsys.readouterr().out)

    assert "600 x 620 px png, 1 chart\n" in said
    assert "4 rings; spokes every 30 deg" in said
    assert seen["format"] == "digitise-look/1"
    assert seen["charts"][0]["grid"]["centre_px"] == pytest.approx([chart.centre_x, chart.centre_y], abs=0.1)
    assert seen["charts"][0]["grid"]["outer_px"] == pytest.approx(chart.outer_px, abs=0.1)
    assert any(
        abs(int(ink["ink"][5:], 16) - 0xB4) < 12 and not ink["neutral"] for ink in seen["charts"][0]["inks"]
    )
    shown = open_picture(proof).rgb
    assert shown.shape[1] == 1400
    assert sorted(os.listdir(tmp_path)) == ["look.png", "panel.png"]


def test_look_does_not_write_over_the_picture(picture, tmp_path, capsys):
    """`--proof` with the picture's own name."""
    before = (tmp_path / "panel.png").read_bytes()

    assert main(["look", picture, "--proof", picture]) == 2
    assert "is the picture itself" in capsys.readouterr().err
    assert (tmp_path / "panel.png").read_bytes() == before
