"""Files that were damaged: every format refuses them with one line that names the file, or reads the rest."""

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from digitise.exceptions import DigitiseError
from digitise.exchange import FORMATS, format_module, guess_format
from digitise.exchange.cuts import Antenna, ExchangeOptions, cut_from_table, table_from_cut

from .draw import patterns
from .tables import bearings, table_of

PLAIN = ExchangeOptions()
CUT = cut_from_table(table_of(patterns.sector(bearings(72))), options=ExchangeOptions(plane="azimuth"))
ANTENNA = Antenna(cuts=(CUT,), maker="Example Works", low_mhz=900.0, gain=15.0)
WHOLE = {name: format_module(name).write(ANTENNA, ExchangeOptions(step_deg=5)).data for name in FORMATS}
WORDS = [
    b"",
    b",",
    b"\n",
    b"nan",
    b"1e999",
    b"-",
    b"\xff",
    b"null",
    b"[]",
    b"{}",
    b'"',
    b"9" * 400,
    b"!",
    b"REVNUM:,",
    b"\0",
]


@st.composite
def damaged(draw, name):
    """A file of the format with up to four pieces cut out, doubled, moved or written over."""
    data = bytearray(WHOLE[name])
    for _ in range(draw(st.integers(1, 4))):
        at = draw(st.integers(0, len(data)))
        size = draw(st.sampled_from([1, 2, 7, 40, 400]))
        how = draw(st.sampled_from(["cut", "over", "double", "end"]))
        if how == "cut":
            del data[at : at + size]
        elif how == "over":
            data[at : at + size] = draw(st.sampled_from(WORDS))
        elif how == "double":
            data[at:at] = data[at : at + size]
        else:
            del data[at:]
    return bytes(data)


def read_or_refuse(name, data):
    """Read a file into tables; a refusal is one line that names it."""
    refusal = None
    try:
        antenna = format_module(name).read(data, "panel.x", PLAIN)
        for cut in antenna.cuts:
            table, _ = table_from_cut(cut, options=PLAIN)
            assert np.isfinite(table.chart_db[table.state != "missing"]).all()
    except DigitiseError as error:
        refusal = error
    if refusal:
        refusal.source = refusal.source or "panel.x"
        assert "\n" not in str(refusal)
        assert str(refusal).startswith("panel.x: ")
        assert refusal.exit_status in (2, 4)


@pytest.mark.parametrize("name", FORMATS)
@settings(max_examples=60, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(data=st.data())
def test_damaged_files(name, data):
    """Whatever was done to a file, reading it ends in a table or in one line."""
    read_or_refuse(name, data.draw(damaged(name)))


@pytest.mark.parametrize("name", FORMATS)
@settings(max_examples=40, deadline=None, derandomize=True)
@given(data=st.binary(max_size=200))
def test_any_bytes(name, data):
    """Bytes that are no file of the format."""
    guess_format(data)
    read_or_refuse(name, data)


@pytest.mark.parametrize("name", FORMATS)
def test_whole_files_are_read(name):
    """The files that the others are made of are sound."""
    assert guess_format(WHOLE[name]) == name
    assert len(format_module(name).read(WHOLE[name], "x", PLAIN).cuts) == 1
