"""NGMN BASTA pattern JSON: a cut's rows and no more, attenuation positive, written, read back, refused."""

import json
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from digitise.exceptions import PictureError, UsageError
from digitise.exchange import guess_format
from digitise.exchange.basta import read, write
from digitise.exchange.cuts import Antenna, ExchangeOptions, cut_from_table

from .draw import patterns
from .strategies import FEW
from .tables import bearings, table_of, without

PLAIN = ExchangeOptions()
DEG = bearings()
REQUIRED = (  # of the schema in an open library, REFERENCES.md section 4
    "Supplier", "Antenna_Model", "Coordinate_System", "Frequency", "Gain", "Phi_HPBW", "Theta_HPBW",
    "Front_to_Back", "Theta_Electrical_Tilt", "Nominal_Polarization", "Theta_Sampling", "Phi_Sampling",
    "Data_Set_Row_Structure", "Data_Set",
)  # fmt: skip


def antenna_of(plane, level_db, **facts):
    """An antenna of one cut."""
    cut = cut_from_table(table_of(level_db), options=ExchangeOptions(plane=plane))
    return Antenna(cuts=(cut,), low_mhz=1800.0, high_mhz=1800.0, gain=15.0, from_reading=True, **facts)


LOPSIDED = patterns.sector(DEG - 20)


def rows_of(antenna, options=PLAIN):
    """theta, phi -> attenuation of what is written."""
    node = json.loads(write(antenna, options).data)
    return {(theta, phi): loss for theta, phi, loss in node["Data_Set"]}


def test_an_azimuth_cut_lies_on_the_horizon():
    """Theta 90, phi 0 to 359, attenuation 0 at the peak and positive elsewhere; all names are there."""
    data = write(antenna_of("azimuth", patterns.sector(DEG)), PLAIN).data
    node = json.loads(data)
    rows = rows_of(antenna_of("azimuth", patterns.sector(DEG)))

    assert guess_format(data) == "basta"
    assert set(REQUIRED) <= set(node)
    assert node["Theta_Sampling"] == [90, 1, 90]
    assert node["Phi_Sampling"] == [0, 1, 359]
    assert len(rows) == 360
    assert (rows[90, 0], rows[90, 65], rows[90, 180]) == (0, pytest.approx(12), 30)
    assert "Comment" in node


def test_an_elevation_cut_lies_on_phi_0_and_180():
    """Up is theta 0; what is behind stands at phi 180; the poles stand once."""
    level = patterns.first_order(DEG - 30)  # points 30 degrees up
    rows = rows_of(antenna_of("elevation", np.maximum(level, -50)))

    assert len(rows) == 360
    assert rows[60, 0] == 0
    assert rows[90, 0] == pytest.approx(-level[0], abs=1e-3)
    assert rows[0, 0] == pytest.approx(-level[90], abs=1e-3)
    assert rows[90, 180] == pytest.approx(-level[180], abs=1e-3)
    assert (0, 180) not in rows


def test_phi_grows_as_the_coordinate_system_says():
    """A beam 20 degrees clockwise stands at phi 340 in SPCS_Polar and at 20 in SPCS_CW (from memory)."""
    antenna = antenna_of("azimuth", LOPSIDED)

    assert rows_of(antenna)[90, 340] == 0
    assert rows_of(antenna, ExchangeOptions(coordinates="SPCS_CCW"))[90, 340] == 0
    assert rows_of(antenna, ExchangeOptions(coordinates="SPCS_CW"))[90, 20] == 0


@FEW
@given(
    seed=st.integers(0, 2**32 - 1),
    plane=st.sampled_from(["azimuth", "elevation"]),
    coordinates=st.sampled_from(["SPCS_Polar", "SPCS_CW", "SPCS_CCW"]),
    tilt=st.integers(-200, 200),
)
def test_written_and_read_back(seed, plane, coordinates, tilt):
    """All points and facts come back the same, in every coordinate system."""
    level = np.round(np.random.default_rng(seed).uniform(-40, 0, 360), 3)
    level[7] = 0.0
    antenna = antenna_of(
        plane, level, maker="Example Works", model="EX-1", tilt_deg=tilt / 10, front_to_back_db=25.0
    )
    back = read(write(antenna, ExchangeOptions(coordinates=coordinates)).data, "x", PLAIN)

    (cut,) = back.cuts
    assert cut.plane == plane
    np.testing.assert_allclose(cut.angle_deg, DEG, atol=1e-9)
    np.testing.assert_allclose(cut.level_db, level, atol=1e-9)
    for name in ("maker", "model", "gain", "gain_unit", "low_mhz", "tilt_deg", "front_to_back_db"):
        assert getattr(back, name) == getattr(antenna, name), name


def test_both_cuts_of_a_full_sphere():
    """A file that fills the sphere gives its two cuts, and the other rows are said to be left out."""
    across, tall = patterns.sector(DEG), patterns.first_order(DEG, a=0.7)
    rows = []
    for theta in range(0, 181, 5):
        for phi in range(0, 360, 5):
            up = tall[90 - theta] if phi < 90 or phi >= 270 else tall[90 + theta]
            rows.append([theta, phi, float(-(across[phi] + up))])
    node = json.loads(write(antenna_of("azimuth", across), PLAIN).data) | {"Data_Set": rows}
    antenna = read(json.dumps(node).encode(), "x", PLAIN)

    assert [cut.plane for cut in antenna.cuts] == ["azimuth", "elevation"]
    np.testing.assert_allclose(antenna.cuts[0].level_db[:5], across[(-np.arange(0, 25, 5)) % 360])
    assert antenna.cuts[1].level_db[2] == pytest.approx(tall[10])
    assert "rows are the two cuts" in antenna.notes[0]


def test_missing_rows_are_not_written():
    """Rows that were not read are not in Data_Set, and a person is told."""
    cut = cut_from_table(
        without(table_of(LOPSIDED), slice(100, 120)), options=ExchangeOptions(plane="azimuth")
    )
    exported = write(Antenna(cuts=(cut,), low_mhz=900, gain=9.0), PLAIN)

    assert len(json.loads(exported.data)["Data_Set"]) == 340
    assert "20 of 360 rows are not in Data_Set: only what was read is written" in exported.checks
    assert "Phi_HPBW is required and not known: written as null" in exported.checks


@pytest.mark.parametrize(
    ("facts", "words"),
    [
        ({"low_mhz": math.nan, "gain": 9.0}, "give --frequency"),
        ({"low_mhz": 900.0, "gain": math.nan}, "give --gain"),
    ],
)
def test_what_is_not_known_is_not_made_up(facts, words):
    """Gain and frequency are required and cannot be read from a chart."""
    cut = cut_from_table(table_of(LOPSIDED), options=ExchangeOptions(plane="azimuth"))
    with pytest.raises(UsageError, match=words):
        write(Antenna(cuts=(cut,), **facts), PLAIN)


def test_the_plane_must_be_known():
    """A cut of no plane has no place on the sphere; points between steps do not fit the sampling."""
    cut = cut_from_table(table_of(LOPSIDED), options=PLAIN)
    with pytest.raises(UsageError, match="--cut"):
        write(Antenna(cuts=(cut,), low_mhz=900, gain=9.0), PLAIN)


def broken(**changes):
    """A file with fields replaced, or taken away with None."""
    node = json.loads(write(antenna_of("azimuth", LOPSIDED), PLAIN).data) | changes
    return json.dumps({name: value for name, value in node.items() if value is not None}, indent=1).encode()


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"{", "line 1: not JSON"),
        (broken(Coordinate_System="SPCS_Geo"), r"line \d+: coordinate system 'SPCS_Geo'"),
        (broken(Coordinate_System=["SPCS_CW"]), "coordinate system"),
        (broken(Data_Set_Row_Structure=["Theta", "MagAttenuationTP"]), r"line \d+: .*lacks Theta or Phi"),
        (
            broken(Data_Set_Row_Structure=["Theta", "Phi", "PhaseCo"]),
            "no MagAttenuationTP or MagAttenuationCo",
        ),
        (broken(Data_Set=[]), r"line \d+: Data_Set is not a list"),
        (broken(Data_Set=None), "Data_Set is not a list"),
        (broken(Data_Set=[[90, 0, 1], [90, 10], [90, 20, 1]]), "row 2 of Data_Set is not 3 numbers"),
        (broken(Data_Set=[[90, 0, 1], [90, 10, "x"], [90, 20, 1]]), "row 2 of Data_Set is not 3 numbers"),
        (broken(Data_Set=[[190, 0, 1], [90, 10, 2], [90, 20, 1]]), "outside 0 to 180"),
        (broken(Data_Set=[[90, 0, 1], [90, 10, 2], [90, 10, 5]]), "stands twice"),
        (broken(Data_Set=[[45, 10, 1], [45, 20, 2], [45, 30, 5]]), "no row lies on the horizon"),
        (broken(Gain={"value": "high"}), "value is not a number"),
        (broken(Frequency={"value": 1, "unit": "furlong"}), r"line \d+: the unit of Frequency"),
    ],
)
def test_refusals_name_the_line(data, words):
    """What is malformed stops the file, with the line of the field."""
    with pytest.raises(PictureError, match=words):
        read(data, "x", PLAIN)


def test_frequency_units():
    """GHz as MHz, and a bare number as MHz."""
    assert read(broken(Frequency={"value": 1.8, "unit": "GHz"}), "x", PLAIN).low_mhz == pytest.approx(1800)
    assert read(broken(Frequency=950), "x", PLAIN).low_mhz == 950
