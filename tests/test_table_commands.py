"""digitise figures, compare, solid and convert in-process: output, exit status, files, one-line refusals."""

import csv
import io
import json

import numpy as np
import pytest
from PIL import Image

from digitise.cli import main
from digitise.table import write_table

from .draw import patterns
from .tables import bearings, table_of

DEG = bearings()
NO_EVIDENCE = "No evidence that a direction is safe"


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """A working folder with an azimuth and an elevation table."""
    monkeypatch.chdir(tmp_path)
    column = patterns.backed(patterns.linear_array(DEG - 6, n=8, spacing_wl=0.8), DEG, back_db=-25)
    for name, level in (("az", patterns.sector(DEG)), ("el", column), ("card", patterns.first_order(DEG))):
        (tmp_path / f"{name}.csv").write_text(write_table(table_of(level, error95_db=0.1, floor_db=-40)))
    return tmp_path


def test_figures_as_text(folder, capsys):
    """A column a table, reasons under it, a verdict a claim, the caution last."""
    status = main(
        ["figures", "az.csv", "el.csv", "--cut", "azimuth,elevation", "--claim", "beamwidth=65,tilt=6"]
    )
    out = capsys.readouterr().out
    lines = out.splitlines()

    assert status == 0
    assert lines[0].split() == ["az.csv", "el.csv"]
    row = next(line for line in lines if line.startswith("beamwidth, half power"))
    assert "65.11 +- " in row
    assert "az.csv: agrees: beamwidth=65" in out
    assert "az.csv: cannot tell: tilt=6: an azimuth cut has none" in out
    assert "el.csv: differs: beamwidth=65" in out
    assert "el.csv: agrees: tilt=6" in out
    assert NO_EVIDENCE in lines[-1]


def test_figures_as_json(folder, capsys):
    """Value, error and unit of every figure, null with a reason, and the caution."""
    assert main(["figures", "az.csv", "--json", "--claim", "ftb>=25"]) == 0
    node = json.loads(capsys.readouterr().out)
    figures = node["tables"][0]["figures"]

    assert node["format"] == "digitise-figures/1"
    assert figures["beamwidth"]["value"] == pytest.approx(65.11, abs=0.02)
    assert figures["ripple"] == {
        "value": None,
        "unit": "dB",
        "reason": "the level varies by 30.0 dB: not an omni",
    }
    assert node["tables"][0]["claims"][0]["verdict"] == "agrees"
    assert "exclusion zones" in node["caution"]


def test_figures_as_csv(folder, capsys):
    """A row a figure of a table; bounds and claims in columns of their own."""
    assert main(["figures", "az.csv", "card.csv", "--csv", "--claim", "ftb>=25,ftb<=50"]) == 0
    rows = list(csv.DictReader(io.StringIO(capsys.readouterr().out)))
    ftb = {row["table"]: row for row in rows if row["figure"] == "ftb"}

    assert len(rows) == 2 * 19
    assert (ftb["card.csv"]["bound"], float(ftb["card.csv"]["value"])) == ("at least", 40)
    assert ftb["card.csv"]["verdict"] == "agrees; cannot tell"
    assert ftb["az.csv"]["claim"] == "ftb>=25; ftb<=50"


def test_compare(folder, capsys):
    """The sums, the figures side by side, every row in a file, a picture."""
    status = main(["compare", "az.csv", "card.csv", "--out", "diff.csv", "--picture", "diff.png"])
    out = capsys.readouterr().out
    rows = list(csv.DictReader(io.StringIO((folder / "diff.csv").read_text())))

    assert status == 0
    assert out.startswith("card.csv - az.csv: mean ")
    assert "beamwidth, half power" in out
    assert NO_EVIDENCE in out
    assert len(rows) == 360
    level = patterns.first_order(np.array([90.0]))[0] - patterns.sector(np.array([90.0]))[0]
    assert float(rows[90]["difference_db"]) == pytest.approx(level, abs=0.002)
    with Image.open(folder / "diff.png") as image:
        assert image.size[0] == 1400


def test_compare_as_json(folder, capsys):
    """The sums and both tables' figures."""
    assert main(["compare", "az.csv", "az.csv", "--json"]) == 0
    node = json.loads(capsys.readouterr().out)

    assert node["format"] == "digitise-compare/1"
    assert node["differences"][0]["rms_db"] == 0
    assert len(node["tables"]) == 2


def test_solid(folder, capsys):
    """Directivity, the check of the gain, every direction in a file, a picture; an estimate throughout."""
    status = main(
        [
            "solid",
            "az.csv",
            "el.csv",
            "--gain",
            "17.5",
            "--out",
            "all.csv",
            "--picture",
            "all.png",
            "--step",
            "5",
        ]
    )
    out = capsys.readouterr().out

    assert status == 0
    assert out.startswith("ESTIMATE from two cuts")
    assert "gain         agrees: stated gain 17.5 dBi" in out
    assert NO_EVIDENCE in out
    assert len((folder / "all.csv").read_text().splitlines()) == 1 + 72 * 37
    with Image.open(folder / "all.png") as image:
        assert image.size[0] == 1400


def test_solid_as_json(folder, capsys):
    """The same as plain values; a negative gain is a value and no option."""
    assert main(["solid", "az.csv", "el.csv", "--json", "--gain", "-3", "--method", "hybrid"]) == 0
    node = json.loads(capsys.readouterr().out)

    assert node["label"].startswith("ESTIMATE")
    assert node["method"] == "hybrid"
    assert node["gain"]["verdict"] == "differs"


def test_convert(folder, capsys):
    """Files are written, what is lost is said on standard output, the caution on standard error."""
    words = ["convert", "az.csv", "el.csv", "--cut", "azimuth,elevation", "--up", "falling", "--to", "nsma"]
    status = main(
        [*words, "--frequency", "1710,2170", "--gain", "17", "--out", "new/deep", "--date", "20250101"]
    )
    captured = capsys.readouterr()

    assert status == 0
    assert (folder / "new/deep/az.nsma.txt").read_bytes().startswith(b"REVNUM:,NSMA WG16.99.050\r\n")
    assert "not kept  row states and errors (error95_db)" in captured.out
    assert "digitise: caution: Values read from a picture" in captured.err
    assert captured.err.count("\n") == 1


def test_convert_back(folder, capsys):
    """From a format to a table that digitise figures reads."""
    assert (
        main(
            [
                "convert",
                "az.csv",
                "--to",
                "plain",
                "--angles",
                "-180..180",
                "--values",
                "loss",
                "--out",
                "new",
            ]
        )
        == 0
    )
    assert main(["convert", "new/az.plain.csv", "--to", "table", "--out", "back"]) == 0
    assert main(["figures", "back/az.csv", "--json"]) == 0
    captured = capsys.readouterr()

    assert (folder / "new/az.plain.csv").read_text().splitlines()[:2] == ["angle_deg,loss_db", "-180,30.000"]
    assert '"value": 65.1' in captured.out
    assert "as good as the files they come from" in captured.err


def test_convert_writes_over_nothing_unasked(folder, capsys):
    """A file that is there stays, until --replace; the sources are never written over."""
    words = ["convert", "az.csv", "--to", "plain"]
    assert main(words) == 0
    (folder / "az.plain.csv").write_text("mine")
    assert main(words) == 2
    assert (folder / "az.plain.csv").read_text() == "mine"
    assert main([*words, "--replace"]) == 0
    before = (folder / "az.csv").read_bytes()
    assert main(["convert", "az.plain.csv", "--to", "table"]) == 2
    assert main(["convert", "az.csv", "--to", "table", "--replace"]) == 2
    assert (folder / "az.csv").read_bytes() == before
    assert "is there already; give another --out, or --replace" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("words", "status", "said"),
    [
        (["figures", "none.csv"], 4, "none.csv: no such file"),
        (["figures", "az.csv", "--claim", "width=3"], 2, "--claim 'width' is no figure"),
        (["figures", "az.csv", "--cut", "azimuth,azimuth"], 2, "names 2 cuts for 1 tables"),
        (["figures", "az.csv", "--cut", "sideways"], 2, "is not azimuth or elevation"),
        (["figures", "az.csv", "--json", "--csv"], 2, "not allowed with"),
        (["compare", "az.csv"], 2, "compare needs two tables"),
        (["compare", "az.csv", "el.csv", "--turn-by", "nan"], 2, "is not a number"),
        (["compare", "az.csv", "el.csv", "--picture", "az.csv"], 2, "az.csv"),
        (["solid", "az.csv", "el.csv", "--step", "7"], 2, "does not divide 90"),
        (["solid", "az.csv", "none.csv"], 4, "no such file"),
        (["convert", "az.csv", "--to", "nsma"], 2, "give --frequency and --gain"),
        (["convert", "az.csv", "--to", "wax"], 2, "invalid choice"),
        (["convert", "az.csv", "--to", "nsma", "--frequency", "9,5"], 2, "is not a frequency"),
        (["convert", "az.csv", "--to", "plain", "--step", "7"], 2, "does not divide 360"),
        (
            ["convert", "az.csv", "el.csv", "--to", "plain", "--front", "1,2,3"],
            2,
            "--front has 3 values for 2 files",
        ),
        (["convert", "az.csv", "--to", "plain", "--out", "az.csv"], 2, "az.csv"),
    ],
)
def test_refusals_are_one_line(folder, capsys, words, status, said):
    """Wrong use says what is wrong in one line, writes nothing, and has its exit status."""
    before = {path.name: path.read_bytes() for path in folder.iterdir()}
    assert main(words) == status

    captured = capsys.readouterr()
    assert captured.err.count("\n") == 1
    assert said in captured.err
    assert {path.name: path.read_bytes() for path in folder.iterdir()} == before


@pytest.mark.parametrize("command", ["figures", "compare", "solid", "convert"])
def test_help_names_units(capsys, command):
    """Every command explains itself."""
    assert main([command, "--help"]) == 0
    assert "DEG" in capsys.readouterr().out
