"""Published values come back: each antenna is drawn, the picture is read, and the reading is compared.

The expected values stand in tests/reference with their source. They are also worked out from the formula by
general mathematics (SciPy), so that a slip in the list shows. A reading is held to its own 95 % interval,
widened to three standard uncertainties since one in twenty intervals may miss by right; the interval itself
must be narrow.
"""

import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar
from scipy.special import j1

from digitise.figures import figures_of
from digitise.picture import open_picture
from digitise.reading import read_charts
from digitise.settings import Settings
from tests.bench.accuracy import told_settings
from tests.draw import Chart, Page, Stroke, Trace, paint, patterns, write_case
from tests.draw.spec import N_TRUE, STEP_TRUE, Printed
from tests.reference.values import (
    ARRAY_NULLS_DEG,
    CARDIOID_WIDTH,
    DIPOLE_LEVELS,
    DIPOLE_WIDTH,
    DISC_LOBE,
    LINE_LOBE,
    LOG_PERIODIC_RADII,
    SECTOR_LEVELS,
    SECTOR_WIDTH,
)

DEG = np.arange(N_TRUE) * STEP_TRUE
THREE_SIGMA = 3 / 1.96
NARROW_DEG = 1.0  # a width read no better would prove nothing; at half power a cardioid falls 0.1 dB a degree
NARROW_DB = 0.3
NULL_DEG = 0.25
HALF_POWER = np.sqrt(0.5)


def draw_and_read(folder, level, *, renderer="matplotlib", settings=None, **chart):
    """Draw one pattern on a usual chart and read it with levels, bearing and ink told."""
    trace = Trace(db=level, ink="#b3261e", width=2.2)
    look = {"centre_x": 331.4, "centre_y": 342.8, "outer_px": 262.3, "ring": Stroke(colour="#b9bec6")}
    page = Page(charts=(Chart(traces=(trace,), **{**look, **chart}),), width=660, height=690)
    path = write_case(folder, "reference", paint(page, renderer=renderer), ())
    return read_charts(open_picture(path), settings=settings or told_settings(page.charts[0], trace.ink))[0]


def holds(figure, reference, narrow):
    """Tell whether a figure agrees with its reference within its own error, and that error is narrow."""
    assert figure.error95 < narrow
    return abs(figure.value - reference.value) <= THREE_SIGMA * figure.error95 + reference.digits


def test_the_dipole_reference_follows_from_its_formula():
    """cos(90 cos t)/sin t falls to half power 39.04 degrees either side of broadside."""
    edge = brentq(lambda t: np.cos(np.pi / 2 * np.cos(t)) / np.sin(t) - HALF_POWER, 0.5, 1.5)

    assert 180 - 2 * np.degrees(edge) == pytest.approx(DIPOLE_WIDTH.value, abs=DIPOLE_WIDTH.digits)


def test_the_cardioid_reference_follows_from_its_formula():
    """(1 + cos t)/2 falls to half power at 65.53 degrees."""
    edge = brentq(lambda t: 0.5 + 0.5 * np.cos(t) - HALF_POWER, 0.1, 3)

    assert 2 * np.degrees(edge) == pytest.approx(CARDIOID_WIDTH.value, abs=CARDIOID_WIDTH.digits)


@pytest.mark.parametrize(
    ("reference", "field", "between"),
    [(LINE_LOBE, lambda u: np.sin(u) / u, (3.3, 6)), (DISC_LOBE, lambda u: 2 * j1(u) / u, (4, 6.5))],
)
def test_the_side_lobe_references_follow_from_their_formulas(reference, field, between):
    """The first lobe beyond the first zero, by numerical maximising."""
    top = minimize_scalar(lambda u: -abs(field(u)), bounds=between, method="bounded")

    assert 20 * np.log10(-top.fun) == pytest.approx(reference.value, abs=reference.digits)


@pytest.mark.parametrize("renderer", ["matplotlib", "pillow", "opencv-fine"])
def test_half_wave_dipole_beamwidth(tmp_path, renderer):
    """78.08 degrees between half-power points, through three renderers."""
    reading = draw_and_read(tmp_path, patterns.half_wave_dipole(DEG), renderer=renderer)

    assert holds(figures_of(reading.traces[0].table)["beamwidth"], DIPOLE_WIDTH, NARROW_DEG)


def test_half_wave_dipole_levels(tmp_path):
    """The levels at 10 to 80 degrees off broadside, on all four sides."""
    table = draw_and_read(tmp_path, patterns.half_wave_dipole(DEG)).traces[0].table

    for off, level in DIPOLE_LEVELS.items():
        for row in (off, 180 - off, 180 + off, 360 - off):
            assert abs(table.chart_db[row] - level) <= THREE_SIGMA * table.error95_db[row] + 5e-4
            assert off > 60 or table.error95_db[row] < NARROW_DB


def test_uniform_line_source_first_side_lobe(tmp_path):
    """-13.26 dB on both sides of a line four wavelengths long."""
    figures = figures_of(draw_and_read(tmp_path, patterns.line_source(DEG, length_wl=4.0)).traces[0].table)

    for side in ("sidelobe_left", "sidelobe_right"):
        assert holds(figures[side], LINE_LOBE, NARROW_DB)


def test_uniform_disc_first_side_lobe(tmp_path):
    """-17.57 dB on both sides of a disc four wavelengths across."""
    figures = figures_of(draw_and_read(tmp_path, patterns.disc(DEG, diameter_wl=4.0)).traces[0].table)

    for side in ("sidelobe_left", "sidelobe_right"):
        assert holds(figures[side], DISC_LOBE, NARROW_DB)


@pytest.mark.parametrize(("zero", "turn"), [("top", "cw"), ("right", "ccw")])
def test_field_cardioid_beamwidth(tmp_path, zero, turn):
    """131.06 degrees, in both usual layouts of printed bearings."""
    reading = draw_and_read(tmp_path, patterns.first_order(DEG), zero=zero, turn=turn)

    assert holds(figures_of(reading.traces[0].table)["beamwidth"], CARDIOID_WIDTH, NARROW_DEG)


def test_sector_cut_beamwidth_and_levels(tmp_path):
    """The 3GPP cut: 65 degrees at -3.00 dB, its levels off the beam, and the plateau at -30 dB."""
    level = patterns.sector(DEG, half_power_deg=65.0, front_to_back_db=30.0)

    table = draw_and_read(tmp_path, level).traces[0].table

    assert holds(figures_of(table)["beamwidth3"], SECTOR_WIDTH, NARROW_DEG)
    for off, expected in SECTOR_LEVELS.items():
        for row in (off, (360 - off) % 360):
            assert abs(table.chart_db[row] - expected) <= THREE_SIGMA * table.error95_db[row] + 5e-3


def test_linear_array_nulls_lie_at_their_bearings(tmp_path):
    """Eight elements half a wavelength apart: nulls at 14.48, 30 and 48.59 degrees either side."""
    table = draw_and_read(tmp_path, patterns.linear_array(DEG, n=8, spacing_wl=0.5)).traces[0].table

    for null in ARRAY_NULLS_DEG:
        for bearing in (null, 360 - null):
            # Flanks of a null are even about it: the mean bearing of the rows near it, weighted by depth.
            rows = np.arange(round(bearing) - 3, round(bearing) + 4)
            depth = np.maximum(-table.chart_db[rows % 360] - 24, 0)
            assert np.average(rows, weights=depth) == pytest.approx(bearing, abs=NULL_DEG)


def test_log_periodic_rings_and_trace(tmp_path):
    """A grid painted at the published radii is read as 0, -3 ... -30 dB, a trace by 17.1624 ln(r)."""
    radii = tuple(LOG_PERIODIC_RADII.values())
    rho = 0.58 + 0.38 * np.cos(np.radians(DEG - 50))
    numbers = Printed(size=11, ray_deg=80)
    settings = Settings(outer_db=0.0, law="log-periodic", zero_deg=0.0, turn="cw", inks=("#b3261e",))

    # Painted on an even scale from 0 to 1, so that no law of the painter's takes part.
    reading = draw_and_read(
        tmp_path,
        rho,
        settings=settings,
        outer_db=1.0,
        centre_db=0.0,
        ring_db=radii,
        ring_labels=None,
        rim_labels=numbers,
    )

    np.testing.assert_allclose(
        reading.scale.level(reading.grid.ring_rho), list(LOG_PERIODIC_RADII), atol=0.05
    )
    table = reading.traces[0].table
    inside = rho[::4] > 0.25
    off = np.abs(table.chart_db - 17.1624 * np.log(rho[::4]))[inside]
    assert np.mean(off <= THREE_SIGMA * table.error95_db[inside]) > 0.95
    assert np.median(off) < 0.02
