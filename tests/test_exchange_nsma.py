"""NSMA WG16.99.050: the published layout, written and read back; small faults noted, others refused."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given

from digitise.exceptions import PictureError, UsageError
from digitise.exchange import guess_format
from digitise.exchange._nsma_tags import LENGTHS, LONGEST_COMMENT, LONGEST_POINT, REQUIRED
from digitise.exchange.cuts import Antenna, ExchangeOptions, cut_from_table, table_from_cut
from digitise.exchange.nsma import CAUTION_LINES, read, write

from .draw import patterns
from .strategies import FEW, antennas
from .tables import bearings, table_of, without

PLAIN = ExchangeOptions()
# The synthetic example of REFERENCES.md section 4: an invented antenna, 45-degree steps; an independent open
# auditor found no fault in it. The layout is that of its table 1 as open readers transcribe it.
EXAMPLE = b"""REVNUM:,NSMA WG16.99.050
REVDAT:,19990520
COMNT1:,Synthetic example - invented antenna
ANTMAN:,Example Works
MODNUM:,EX-0001
DESCR1:,Values read from a printed chart; not the maker's measured data
DTDATA:,20250101
LOWFRQ:,400.0
HGHFRQ:,470.0
GUNITS:,DBI/DBR
MDGAIN:,6.5
AZWIDT:,131.1
ELTILT:,0.0,0.0
PATTYP:,typical
NOFREQ:,1
PATFRE:,435.0
NUMCUT:,2
PATCUT:,H
POLARI:,V/V
NUPOIN:,8
FSTLST:,-180.000,+135.000
-180.000,-40.000,
-135.000,-16.686,
-90.000,-6.021,
-45.000,-1.375,
0.000,0.000,
+45.000,-1.375,
+90.000,-6.021,
+135.000,-16.686,
PATCUT:,V
POLARI:,V/V
NUPOIN:,8
FSTLST:,-180.000,+135.000
-180.000,-40.000,
-135.000,-20.728,
-90.000,-40.000,
-45.000,-5.417,
0.000,0.000,
+45.000,-5.417,
+90.000,-40.000,
+135.000,-20.728,
ENDFIL:,EOF
""".replace(b"\n", b"\r\n")


def changed(old, new, times=1):
    """The example with something replaced."""
    assert old in EXAMPLE
    return EXAMPLE.replace(old, new, times)


def line_of(words):
    """The line of the example where words stand."""
    return EXAMPLE[: EXAMPLE.index(words)].count(b"\n") + 1


def test_the_example_is_read():
    """Every field and point of the example, without a note."""
    antenna = read(EXAMPLE, "x", PLAIN)
    across, tall = antenna.cuts

    assert guess_format(EXAMPLE) == "nsma"
    assert antenna.notes == ()
    assert (antenna.maker, antenna.model, antenna.date) == ("Example Works", "EX-0001", "20250101")
    assert (antenna.low_mhz, antenna.high_mhz, antenna.gain, antenna.gain_unit) == (400, 470, 6.5, "dBi")
    assert (across.plane, tall.plane, across.frequency_mhz, across.polarisation) == (
        "azimuth",
        "elevation",
        435,
        "V/V",
    )
    np.testing.assert_array_equal(across.angle_deg, np.arange(8) * 45.0)
    np.testing.assert_array_equal(across.level_db, [0, -1.375, -6.021, -16.686, -40, -16.686, -6.021, -1.375])


def test_what_is_written_is_laid_out_as_published():
    """CRLF, ASCII, the order and longest lines of the fields, all required ones, points of 28 characters."""
    antenna = replace(read(EXAMPLE, "x", PLAIN), from_reading=True)
    data = write(antenna, PLAIN).data
    lines = data.decode("ascii").split("\r\n")
    tags = [line.partition(":")[0] for line in lines if ":," in line]

    assert lines[-1] == ""
    assert b"\n" not in data.replace(b"\r\n", b"")
    assert lines[-2] == "ENDFIL:,EOF"
    head = tags[: tags.index("PATCUT")]
    assert head == [tag for tag in LENGTHS if tag in head]
    assert set(REQUIRED) <= set(tags)
    for line in lines[:-1]:
        longest = (
            LONGEST_COMMENT if line.startswith("!") else LENGTHS.get(line.partition(":")[0], LONGEST_POINT)
        )
        assert len(line) <= longest
    assert "FSTLST:,-180.000,+135.000" in lines
    assert "COMNT1:,Azimuth grows clockwise seen from above; points as the cuts hold" in lines
    assert all(f"DESCR{k}:,{words}" in lines for k, words in enumerate(CAUTION_LINES, 1))


@FEW
@given(antenna=antennas())
def test_written_and_read_back(antenna):
    """Points and facts come back the same; states and errors do not, and that is said."""
    exported = write(antenna, PLAIN)
    back = read(exported.data, "x", PLAIN)

    assert back.notes == ()
    for one, other in zip(antenna.cuts, back.cuts, strict=True):
        np.testing.assert_allclose(other.angle_deg, one.angle_deg, atol=1e-9)
        np.testing.assert_array_equal(other.level_db, one.level_db)
        assert one.plane == other.plane
    facts = ("maker", "low_mhz", "high_mhz", "gain", "gain_unit", "azimuth_width_deg", "elevation_width_deg")
    for name in (
        *facts,
        "model",
        "tilt_deg",
        "tilt_tolerance_deg",
        "front_to_back_db",
        "pattern_kind",
        "date",
    ):
        assert getattr(back, name) == getattr(antenna, name), name
    assert "row states and errors (error95_db)" in exported.lost


def test_a_second_writing_is_the_same():
    """What was read is written as it was, comments and unknown facts included."""
    data = changed(
        b"PATTYP:,typical\r\n", b"RADCTR:,1.25\r\nMAXPOW:,500\r\nPATTYP:,envelope\r\n! a remark\r\n"
    )
    once = write(read(data, "x", PLAIN), PLAIN).data

    assert b"RADCTR:,1.25\r\n" in once
    assert b"MAXPOW:,500\r\n" in once
    assert b"a remark\r\n" in once
    assert write(read(once, "x", PLAIN), PLAIN).data == once


def test_a_reading_and_back():
    """A table of 360 rows through a file gives the same levels; what lay at the centre is said to be lost."""
    level = patterns.sector(bearings())
    table = table_of(level, floor_db=-25)
    options = ExchangeOptions(plane="azimuth")
    antenna = Antenna(cuts=(cut_from_table(table, options=options),), low_mhz=900, gain=15, from_reading=True)
    exported = write(antenna, PLAIN)
    back, said = table_from_cut(read(exported.data, "x", PLAIN).cuts[0], options=PLAIN)

    np.testing.assert_allclose(back.relative_db, table.relative_db, atol=5.1e-4)
    assert any("upper limits" in sentence for sentence in exported.lost)
    assert "not the error of the levels" in said[0]
    assert b"-180.000," in exported.data
    assert (
        exported.data.count(b"\r\n+") + exported.data.count(b"\r\n-") + exported.data.count(b"\r\n0.000")
        == 360
    )


def test_missing_rows_stay_missing():
    """A half chart is written without the rows that it lacks, and comes back with them missing."""
    table = without(table_of(patterns.sector(bearings())), slice(91, 270))
    cut = cut_from_table(table, options=ExchangeOptions(plane="elevation"))
    data = write(Antenna(cuts=(cut,), low_mhz=900, gain=15), PLAIN).data
    back, _ = table_from_cut(read(data, "x", PLAIN).cuts[0], options=PLAIN)

    assert b"NUPOIN:,181\r\n" in data
    np.testing.assert_array_equal(back.state == "missing", table.state == "missing")


def test_the_turn_of_azimuth():
    """A counter-clockwise file is mirrored in azimuth, not in elevation, and its comment says so."""
    lopsided = changed(b"+45.000,-1.375,", b"+45.000,-3.000,", 1)
    usual, turned = (read(lopsided, "x", ExchangeOptions(file_turn=turn)) for turn in ("cw", "ccw"))
    written = write(usual, ExchangeOptions(file_turn="ccw")).data

    assert (usual.cuts[0].level_db[1], usual.cuts[0].level_db[7]) == (-3, -1.375)
    assert (turned.cuts[0].level_db[1], turned.cuts[0].level_db[7]) == (-1.375, -3)
    np.testing.assert_array_equal(turned.cuts[1].level_db, usual.cuts[1].level_db)
    assert b"Azimuth grows counter-clockwise" in written
    assert "counter-clockwise" in read(written, "x", PLAIN).notes[0]
    np.testing.assert_array_equal(
        read(written, "x", ExchangeOptions(file_turn="ccw")).cuts[0].level_db, usual.cuts[0].level_db
    )


def test_the_closing_point():
    """A last point that names the first direction again must have the same level."""
    closed = changed(b"+135.000,-16.686,\r\n", b"+135.000,-16.686,\r\n+180.000,-40.000,\r\n")
    torn = changed(b"+135.000,-16.686,\r\n", b"+135.000,-16.686,\r\n+180.000,-30.000,\r\n")

    antenna = read(closed, "x", PLAIN)
    assert len(antenna.cuts[0].angle_deg) == 8
    assert "NUPOIN says 8 points, the cut holds 9" in antenna.notes[0]
    with pytest.raises(PictureError, match="line 30: 180 degrees stand twice"):
        read(torn, "x", PLAIN)


@pytest.mark.parametrize(
    ("old", "new", "note"),
    [
        (b"NUPOIN:,8", b"NUPOIN:,9", "NUPOIN says 9 points, the cut holds 8"),
        (b"NUMCUT:,2", b"NUMCUT:,3", "NUMCUT says 3 cuts, 2 follow"),
        (b"NOFREQ:,1", b"NOFREQ:,2", "NOFREQ says 2 frequencies, 1 follow"),
        (b"POLARI:,V/V", b"POLARI:,X/Y", "polarisation 'X/Y'"),
        (b"PATTYP:,typical", b"COLOUR:,red\r\nPATTYP:,typical", "field COLOUR is not one"),
        (b"ANTMAN:,Example Works", b"ANTMAN:," + b"x" * 60, "ANTMAN has 68 characters, 42 are allowed"),
        (b"MDGAIN:,6.5\r\n", b"MDGAIN:,6.5\r\nMDGAIN:,7.5\r\n", "MDGAIN stands twice"),
        (
            b"DTDATA:,20250101\r\nLOWFRQ:,400.0",
            b"LOWFRQ:,400.0\r\nDTDATA:,20250101",
            "DTDATA stands out of order",
        ),
        (b"ENDFIL:,EOF\r\n", b"", "ENDFIL is missing"),
        (b"ENDFIL:,EOF\r\n", b"ENDFIL:,EOF\r\nmore\r\n", "after ENDFIL"),
        (b"MODNUM:,EX-0001\r\n", b"", "required fields are missing: MODNUM"),
        (b"0.000,0.000,\r\n", b"0.000,0.000,12.5,\r\n", "1 points hold a phase"),
    ],
)
def test_faults_that_are_put_up_with(old, new, note):
    """The data are taken, and the fault is noted with its line."""
    antenna = read(changed(old, new), "x", PLAIN)

    assert any(note in sentence for sentence in antenna.notes), antenna.notes
    assert len(antenna.cuts) == 2


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        (
            b"-90.000,-6.021,",
            b"-90.000,six,",
            f"line {line_of(b'-90.000,-6.021,')}: the level is not a number",
        ),
        (
            b"-90.000,-6.021,",
            b"east,-6.021,",
            f"line {line_of(b'-90.000,-6.021,')}: the angle is not a number",
        ),
        (
            b"-90.000,-6.021,",
            b"-90.000,",
            f"line {line_of(b'-90.000,-6.021,')}: a point needs angle and level",
        ),
        (b"-90.000,-6.021,", b"-90.000,nan,", "the level is not a number"),
        (b"-90.000,-6.021,", b"-990.000,-6.021,", "not between -360 and 360"),
        (b"-90.000,-6.021,", b"-140.000,-6.021,", "the angle -140 goes back"),
        (b"-135.000,-16.686,\r\n-90", b"-90.000,-16.686,\r\n-90", "goes back"),
        (b"MDGAIN:,6.5", b"MDGAIN:,six", f"line {line_of(b'MDGAIN')}: MDGAIN is not a number"),
        (b"GUNITS:,DBI/DBR", b"GUNITS:,DBI/VOLT", f"line {line_of(b'GUNITS')}: the unit 'VOLT'"),
        (b"PATCUT:,H\r\n", b"", f"line {line_of(b'PATCUT')}: POLARI stands before PATCUT"),
        (b"REVNUM:,NSMA WG16.99.050\r\n", b"a letter\r\n", "line 1: the file does not begin with REVNUM"),
    ],
)
def test_faults_that_are_refused(old, new, words):
    """What cannot be understood stops the file, with its line."""
    with pytest.raises(PictureError, match=words):
        read(changed(old, new), "x", PLAIN)


def test_files_that_are_none():
    """Fields without a cut, a cut without points, binary, empty."""
    head = EXAMPLE[: EXAMPLE.index(b"PATCUT")]
    for data, words in (
        (head, "no cut"),
        (head + b"PATCUT:,H\r\nENDFIL:,EOF\r\n", "no points"),
        (b"REVNUM:,\0\0", "zero bytes"),
        (b" \r\n", "empty"),
    ):
        with pytest.raises(PictureError, match=words):
            read(data, "x", PLAIN)


def test_field_and_absolute_levels():
    """LIN levels are field (20 log), DBI ones keep their unit; a field of 0 is below all that was written."""
    linear = changed(b"DBI/DBR", b"DBI/LIN")
    for old, new in (
        (b"-40.000", b"0.000"),
        (b"-16.686", b"0.1465"),
        (b"-6.021", b"0.5"),
        (b"-1.375", b"0.8536"),
    ):
        linear = linear.replace(old, new)
    linear = (
        linear.replace(b"\n0.000,0.000,", b"\n0.000,1.000,")
        .replace(b"-20.728", b"0.0919")
        .replace(b"-5.417", b"0.536")
    )
    cut = read(linear, "x", PLAIN).cuts[0]

    np.testing.assert_allclose(cut.level_db[:4], [0, -1.375, -6.021, -16.686], atol=0.006)
    assert cut.state[4] == "floor"
    assert read(changed(b"DBI/DBR", b"DBI/DBI"), "x", PLAIN).cuts[0].unit == "dBi"
    with pytest.raises(PictureError, match="a field is negative"):
        read(changed(b"DBI/DBR", b"DBI/LIN"), "x", PLAIN)


def test_what_is_not_known_is_not_made_up():
    """No gain, no frequency: refused, with the options that give them; no tilt: written as 0 and said."""
    cut = cut_from_table(table_of(patterns.sector(bearings())), options=ExchangeOptions(plane="azimuth"))

    with pytest.raises(UsageError, match="give --frequency and --gain"):
        write(Antenna(cuts=(cut,)), PLAIN)
    odd = replace(cut, polarisation="X")
    checks = write(Antenna(cuts=(odd,), low_mhz=900, gain=15), PLAIN).checks
    assert any("polarisation 'X' is not one of the text" in sentence for sentence in checks)
    assert "ELTILT is required and not known: written as 0.0" in checks


def test_long_and_foreign_letters_are_cut_and_said():
    """ASCII and the longest lines rule; what does not fit is named."""
    antenna = replace(read(EXAMPLE, "x", PLAIN), maker="W\u00e4rks " * 20, comments=("x" * 200,))
    exported = write(antenna, PLAIN)

    assert b"ANTMAN:,W?rks" in exported.data
    assert {
        "letters of ANTMAN beyond ASCII or its longest line",
        "letters of DESCR1 beyond ASCII or its longest line",
    } <= set(exported.lost)


def test_size_is_bounded(monkeypatch):
    """More points, cuts or bytes than any pattern has are refused."""
    many = b"".join(b"%.3f,-1.000,\r\n" % (k / 100) for k in range(20_001))
    with pytest.raises(PictureError, match="more than 20000 points"):
        read(changed(b"-180.000,-40.000,\r\n", many), "x", PLAIN)
    monkeypatch.setattr("digitise.exchange.text.MAX_BYTES", 100)
    with pytest.raises(PictureError, match="larger than"):
        read(EXAMPLE, "x", PLAIN)
