"""Whole conversions: several cuts into one file, facts told and found, names, what goes with what."""

from dataclasses import replace

import numpy as np
import pytest

from digitise.convert import convert, load
from digitise.exceptions import PictureError, UsageError
from digitise.exchange import FORMATS, format_module, guess_format
from digitise.exchange.cuts import ExchangeOptions
from digitise.table import read_table, write_table

from .draw import patterns
from .tables import bearings, table_of

DEG = bearings()
FACTS = {
    "low_mhz": 1710.0,
    "high_mhz": 2170.0,
    "gain": 17.0,
    "maker": "Example Works",
    "model": "EX-9",
    "date": "20250101",
}
SECTOR = table_of(patterns.sector(DEG), error95_db=0.1, floor_db=-40)
COLUMN = table_of(
    patterns.backed(patterns.linear_array(DEG - 6, n=8, spacing_wl=0.8), DEG, back_db=-25),
    error95_db=0.1,
    floor_db=-40,
)


@pytest.fixture
def two_cuts(tmp_path):
    """Tables of a sector and of a column that points 6 degrees towards growing bearings."""
    paths = [tmp_path / "az.csv", tmp_path / "el.csv"]
    for path, table in zip(paths, (SECTOR, COLUMN), strict=True):
        path.write_text(write_table(table))
    return paths


def run(paths, to, *, planes=("azimuth", "elevation"), fronts=None, options=None, facts=FACTS, **how):
    """Convert with the usual facts."""
    options = options or ExchangeOptions(up="falling")
    fronts = fronts or (0.0,) * len(paths)
    return convert(paths, to=to, options=options, planes=planes, fronts=fronts, facts=facts, **how)


def test_figures_of_the_tables_go_into_the_file(two_cuts):
    """Beamwidths, front-to-back and tilt are those of the tables; gain, frequency and names those told."""
    (made,) = run(two_cuts, "nsma")
    antenna = format_module("nsma").read(made.data, "x", ExchangeOptions())

    assert made.name == "az.nsma.txt"
    assert (antenna.azimuth_width_deg, antenna.front_to_back_db) == (pytest.approx(65.11, abs=0.02), 30)
    assert antenna.elevation_width_deg == pytest.approx(7.96, abs=0.05)
    assert antenna.tilt_deg == pytest.approx(6.0, abs=0.05)
    assert (antenna.maker, antenna.gain, antenna.low_mhz, antenna.high_mhz) == (
        "Example Works",
        17.0,
        1710.0,
        2170.0,
    )
    assert [cut.plane for cut in antenna.cuts] == ["azimuth", "elevation"]
    assert antenna.cuts[1].level_db[354] == 0  # 6 degrees down
    assert antenna.comments[0].startswith("Values read from a picture")


def test_a_beam_that_points_up_is_asked_about(two_cuts):
    """With the default way up this column points to the sky: a person is told which option turns it."""
    (made,) = run(two_cuts, "nsma", options=ExchangeOptions())

    assert any("points up by 6.0 degrees" in said and "--up falling" in said for said in made.checks)


@pytest.mark.parametrize("to", FORMATS)
def test_there_and_back(two_cuts, tmp_path, to):
    """Every format and back to tables: the same levels where the format has points."""
    out = tmp_path / "out"
    out.mkdir()
    backs = {}
    for item in run(two_cuts, to):
        (out / item.name).write_bytes(item.data)
        assert guess_format(item.data) == to
        plane = "elevation" if item.name.startswith("el") else "azimuth"
        for back in run([out / item.name], "table", planes=(plane,), facts={}):
            (out / back.name).write_bytes(back.data)
            backs[back.name] = read_table(out / back.name)

    assert len(backs) == 2
    for name, table in backs.items():
        truth = COLUMN if "el" in name or ".V" in name else SECTOR
        same = np.isfinite(table.chart_db)
        if to == "field":  # only steps and turning points
            same &= np.isin(table.state, ("seen",)) & (truth.relative_db > -30)
        if to == "sigmf" and truth is COLUMN:  # the front half only
            assert same.sum() == 181
        np.testing.assert_allclose(
            table.relative_db[same], truth.relative_db[same], atol=0.15 if to == "field" else 1.1e-3
        )


def test_format_to_format(two_cuts, tmp_path):
    """A foreign file goes on to another format with its facts, and without the caution of a reading."""
    (nsma,) = run(two_cuts, "nsma")
    path = tmp_path / "panel.nsma.txt"
    path.write_bytes(nsma.data)
    made = run([path], "basta", planes=("",), facts={})

    assert [item.name for item in made] == ["panel.H.basta.json", "panel.V.basta.json"]
    assert b'"Supplier": "Example Works"' in made[0].data
    assert not made[0].from_reading
    assert b"Comment" not in made[0].data


def test_fronts_of_charts_that_stand_otherwise(tmp_path):
    """An elevation chart with the horizon at 90 and an azimuth chart turned by 45: the file is the same."""
    for name, table, turn in (("az.csv", SECTOR, 45), ("el.csv", COLUMN, 90)):
        turned = table_of(np.roll(table.chart_db, turn), error95_db=0.1, floor_db=-40)
        (tmp_path / name).write_text(write_table(turned))
        (tmp_path / f"plain-{name}").write_text(write_table(table))
    turned = run([tmp_path / "az.csv", tmp_path / "el.csv"], "nsma", fronts=(45.0, 90.0))
    plain = run([tmp_path / "plain-az.csv", tmp_path / "plain-el.csv"], "nsma")

    assert turned[0].data == plain[0].data


def test_chart_levels_with_their_unit(two_cuts):
    """Levels as printed, in dBi, are said to be so in the file."""
    (made,) = run(two_cuts[:1], "nsma", planes=("azimuth",), level="chart", unit="dBi")

    assert b"GUNITS:,DBI/DBI" in made.data


def test_told_facts_win_over_those_of_a_file(two_cuts, tmp_path):
    """An NSMA file with another gain and polarisation."""
    (tmp_path / "x.nsma.txt").write_bytes(run(two_cuts, "nsma")[0].data)
    (made,) = run([tmp_path / "x.nsma.txt"], "nsma", planes=("",), facts={"gain": 3.0, "polarisation": "H/H"})

    assert b"MDGAIN:,3.0\r\n" in made.data
    assert made.data.count(b"POLARI:,H/H\r\n") == 2


def test_an_omni_is_360_degrees_wide(tmp_path):
    """A pattern that never falls to half power has no beamwidth; its azimuth width is the whole circle."""
    path = tmp_path / "omni.csv"
    path.write_text(write_table(table_of(0.3 * np.cos(np.radians(3 * DEG)))))

    assert load(path, ExchangeOptions(plane="azimuth")).azimuth_width_deg == 360


def test_files_that_cannot_be_opened(tmp_path):
    """Missing, empty, a folder: one line each."""
    (tmp_path / "empty.csv").write_bytes(b"")
    with pytest.raises(PictureError, match="no such file"):
        run([tmp_path / "none.csv"], "nsma", planes=("azimuth",))
    with pytest.raises(UsageError, match="empty"):
        run([tmp_path / "empty.csv"], "nsma", planes=("azimuth",))
    with pytest.raises(PictureError, match="cannot be opened"):
        run([tmp_path], "nsma", planes=("azimuth",))


def test_an_unknown_format_is_refused(two_cuts):
    """The names that there are."""
    with pytest.raises(UsageError, match="choose from nsma, sigmf"):
        run(two_cuts, "xyz")


def test_facts_are_kept_apart_from_cuts(two_cuts):
    """Loading a table changes nothing of the options, and each file has its own plane."""
    options = ExchangeOptions()
    antennas = [
        load(path, replace(options, plane=plane))
        for path, plane in zip(two_cuts, ("azimuth", ""), strict=True)
    ]

    assert [antenna.cuts[0].plane for antenna in antennas] == ["azimuth", ""]
    assert np.isnan(antennas[1].azimuth_width_deg)
