"""Files on disk: their names, and that a picture's files are written whole or not at all."""

import json
import os
from dataclasses import replace

import pytest

from digitise import outputs
from digitise.exceptions import UsageError
from digitise.outputs import chart_stem, check_folder, check_stems, make_files, write_file, write_whole
from digitise.table import read_table
from tests.hand import hand_reading


def files_of(n_traces=1, **more):
    """The files of one chart read by hand."""
    return make_files((hand_reading(n_traces, **more),), with_proof=False)


def names(folder):
    """What lies in a folder, hidden files too."""
    return sorted(os.listdir(folder)) if folder.exists() else []


def test_one_trace():
    """`panel.csv`, `panel.record.json`, `panel.proof.png`; the record names the table."""
    (chart,) = make_files((hand_reading(),))

    assert list(chart.files) == ["panel.csv", "panel.record.json", "panel.proof.png"]
    assert chart.files["panel.proof.png"].startswith(b"\x89PNG")
    assert json.loads(chart.files["panel.record.json"])["traces"][0]["table"] == "panel.csv"


def test_several_traces_are_numbered():
    """`panel.1.csv`, `panel.2.csv`, one record."""
    (chart,) = files_of(2)

    assert list(chart.files) == ["panel.1.csv", "panel.2.csv", "panel.record.json"]
    assert [trace["table"] for trace in chart.record["traces"]] == ["panel.1.csv", "panel.2.csv"]


def test_several_charts_get_a_record_each():
    """`panel-1`, `panel-2`, with the charts' own numbers."""
    readings = tuple(replace(hand_reading(), number=k, n_charts=3) for k in (1, 3))

    charts = make_files(readings, with_proof=False)

    assert [list(chart.files) for chart in charts] == [
        ["panel-1.csv", "panel-1.record.json"],
        ["panel-3.csv", "panel-3.record.json"],
    ]
    assert (charts[1].record["chart"]["number"], charts[1].record["chart"]["of"]) == (3, 3)


def test_a_stem_is_the_name_without_folder_and_last_suffix():
    """Dots and folders in names."""
    assert chart_stem("a/b.c/panel.v2.png") == "panel.v2"
    assert chart_stem("panel") == "panel"


def test_files_are_written_and_read_back(tmp_path):
    """The folder is made; nothing but the named files is in it."""
    written = write_whole(files_of(), tmp_path / "new" / "out")

    assert names(tmp_path / "new" / "out") == ["panel.csv", "panel.record.json"]
    assert [path.name for path in written.paths] == ["panel.csv", "panel.record.json"]
    assert read_table(tmp_path / "new" / "out" / "panel.csv").chart_db.max() == 0
    assert (written.replaced, written.left_over) == ((), ())


def test_an_earlier_reading_is_replaced_and_said(tmp_path):
    """The same picture read again, with fewer traces: what is left over is named, not deleted."""
    write_whole(files_of(2), tmp_path)

    written = write_whole(files_of(1, outer_db=5.0), tmp_path)

    assert written.replaced == ("panel.record.json",)
    assert written.left_over == ("panel.1.csv", "panel.2.csv")
    assert not written.other_picture
    assert names(tmp_path) == ["panel.1.csv", "panel.2.csv", "panel.csv", "panel.record.json"]


def test_another_content_of_the_same_name_is_said(tmp_path):
    """The earlier reading was of a picture with other bytes."""
    write_whole(files_of(), tmp_path)
    reading = hand_reading()
    reading = replace(reading, picture=replace(reading.picture, sha256="c" * 64))

    assert write_whole(make_files((reading,), with_proof=False), tmp_path).other_picture


@pytest.mark.parametrize("name", ["panel.csv", "panel.record.json"])
@pytest.mark.parametrize("kind", ["file", "folder", "link"])
def test_what_is_no_earlier_reading_is_not_touched(tmp_path, name, kind):
    """A file of the user's own, a folder or a link in the way: refused, and it stays as it was."""
    target = tmp_path / name
    if kind == "file":
        target.write_text("mine")
    elif kind == "folder":
        target.mkdir()
    else:
        target.symlink_to("elsewhere")

    with pytest.raises(UsageError, match="belongs to no earlier reading"):
        write_whole(files_of(), tmp_path)

    assert names(tmp_path) == [name]
    assert kind != "file" or target.read_text() == "mine"


def test_the_reading_of_another_picture_is_not_replaced(tmp_path):
    """`panel.jpg` after `panel.png`, and another page of the same file."""
    write_whole(files_of(), tmp_path)
    before = (tmp_path / "panel.csv").read_bytes()

    with pytest.raises(UsageError, match=r"another picture \(panel.png\)"):
        write_whole(files_of(path="panel.jpg"), tmp_path)

    assert (tmp_path / "panel.csv").read_bytes() == before


def test_a_record_that_names_files_elsewhere_moves_nothing(tmp_path):
    """A forged record beside the outputs cannot make the tool replace or name a file that is not its own."""
    mine = tmp_path / "mine.csv"
    mine.write_text("mine")
    folder = tmp_path / "out"
    write_whole(files_of(2), folder)
    record = json.loads((folder / "panel.record.json").read_text())
    record["traces"][0]["table"] = "../mine.csv"
    record["traces"][1]["table"] = str(mine)
    (folder / "panel.record.json").write_text(json.dumps(record))

    written = write_whole(files_of(), folder)

    assert written.left_over == ()
    assert mine.read_text() == "mine"


@pytest.mark.parametrize("fail_at", [1, 2, 3, 4])
@pytest.mark.parametrize("error", [OSError(28, "No space left on device"), KeyboardInterrupt()])
def test_when_one_file_fails_none_stays(tmp_path, monkeypatch, fail_at, error):
    """A full disk or an interrupt at any rename: the earlier reading stands as it was, and alone."""
    folder = tmp_path / "out"
    write_whole(files_of(), folder)
    before = {path.name: path.read_bytes() for path in folder.iterdir()}
    calls = []

    def rename(source, target, rename=os.rename):
        calls.append(source)
        if len(calls) == fail_at:
            raise error
        rename(source, target)

    monkeypatch.setattr(outputs.os, "rename", rename)
    with pytest.raises((UsageError, KeyboardInterrupt)):
        write_whole(files_of(outer_db=7.0), folder)

    assert {path.name: path.read_bytes() for path in folder.iterdir()} == before


def test_a_new_folder_is_taken_away_again_when_writing_fails(tmp_path, monkeypatch):
    """No empty folders are left behind."""

    def rename(source, target):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(outputs.os, "rename", rename)
    with pytest.raises(UsageError, match="No space left on device"):
        write_whole(files_of(), tmp_path / "a" / "b")

    assert names(tmp_path) == []


def test_names_taken_in_the_same_run_are_refused(tmp_path):
    """`panel-1.png` after a `panel.png` that held two charts; case does not tell names apart everywhere."""
    with pytest.raises(UsageError, match="already written for another picture of this run"):
        write_whole(files_of(), tmp_path, taken=["PANEL.csv"])

    assert names(tmp_path) == []


def test_pictures_with_the_same_stem_are_refused_before_anything_is_read():
    """Two folders' `panel`, two kinds of `panel`, and the same file twice."""
    check_stems(["a/panel.png", "a/other.png"])
    for pair in (["a/panel.png", "b/panel.png"], ["panel.png", "Panel.jpg"], ["panel.png", "./panel.png"]):
        with pytest.raises(UsageError, match="take the names of those of"):
            check_stems(pair)


def test_a_folder_that_cannot_be_written_to(tmp_path):
    """A file in the place of the folder or above it; what is merely absent is fine."""
    (tmp_path / "file").write_text("")

    check_folder(tmp_path / "a" / "b")
    assert names(tmp_path) == ["file"]
    for folder in (tmp_path / "file", tmp_path / "file" / "b"):
        with pytest.raises(UsageError, match="cannot be written"):
            check_folder(folder)
    for folder in (tmp_path / "file", tmp_path / "file" / "b", "a\0b"):
        with pytest.raises(UsageError, match="cannot be written"):
            write_whole(files_of(), folder)
    assert names(tmp_path) == ["file"]


def test_a_single_named_file(tmp_path):
    """Written over what was there, but never over the picture itself or a folder."""
    path, picture = tmp_path / "look.png", tmp_path / "panel.png"
    picture.write_bytes(b"pixels")
    for data in (b"one", b"two"):
        write_file(path, data, keep=(picture,))

    assert path.read_bytes() == b"two"
    for place, message in (
        (picture, "the picture itself"),
        (tmp_path, "is a folder"),
        (tmp_path / "no" / "a", "cannot be"),
    ):
        with pytest.raises(UsageError, match=message):
            write_file(place, b"three", keep=(picture,))
    assert picture.read_bytes() == b"pixels"
    assert names(tmp_path) == ["look.png", "panel.png"]
