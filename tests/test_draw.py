"""The painter itself: ink lies where the truth says, through every renderer and every way of spoiling."""

import json

import cv2
import numpy as np
import pytest
from PIL import Image

from tests.draw import (
    RECIPES,
    RENDERERS,
    Chart,
    Page,
    Stroke,
    Trace,
    paint,
    patterns,
    random_page,
    rho_of,
    spoil,
    truth_of,
    write_case,
)
from tests.draw.spec import N_TRUE, STEP_TRUE, drawn_curve, level_of
from tests.draw.strokes import cut_dashes
from tests.draw.truth import map_points

DEG = np.arange(N_TRUE) * STEP_TRUE
BARE = {
    "ring_db": (),
    "spoke_deg": 0,
    "ring_labels": None,
    "rim_labels": None,
    "rim": Stroke(colour="#ffffff"),
}
MEAN_PX = 0.03  # a renderer may not be off centre by more: a fifth of the best reading's error
SPREAD_PX = {"pillow": 0.08, "plain": 0.45, "matplotlib": 0.06, "opencv": 0.08, "opencv-fine": 0.06}
SPOILED_MEAN_PX = 0.06


def egg(**chart):
    """Make a page with one smooth black curve and nothing else."""
    trace = Trace(db=-10 + 6 * np.cos(np.radians(DEG - 40)), ink="#000000", width=3.0)
    return Page(
        charts=(Chart(traces=(trace,), centre_x=300.3, centre_y=280.7, outer_px=240.4, **{**BARE, **chart}),)
    )


def centroids(rgb, page, homography=None):
    """How far outward the ink's centroid lies from the true curve, px, at every quarter degree."""
    chart = page.charts[0]
    rho, _ = drawn_curve(chart, chart.traces[0])
    off = np.arange(-7, 7.01, 0.1)
    x, y = chart.point(rho[:, None] + off / chart.outer_px, DEG[:, None])
    if homography is not None:
        x, y = map_points(homography, x, y)
    dark = rgb.max() - rgb.astype(np.float32).min(axis=2)
    weight = cv2.remap(dark, x.astype(np.float32), y.astype(np.float32), cv2.INTER_LINEAR)
    weight = np.maximum(weight - np.median(weight[:, :10], axis=1, keepdims=True), 0)
    return (weight * off).sum(axis=1) / weight.sum(axis=1)


@pytest.mark.parametrize("renderer", RENDERERS)
def test_ink_lies_on_the_true_curve(renderer):
    """The line's centre is unbiased in radius, x and y, and its scatter is the renderer's own."""
    page = egg()

    off = centroids(paint(page, renderer=renderer), page)

    t = np.radians(page.charts[0].page_deg(DEG))
    assert abs(off.mean()) < MEAN_PX
    assert abs(2 * (off * np.sin(t)).mean()) < 2 * MEAN_PX
    assert abs(2 * (off * np.cos(t)).mean()) < 2 * MEAN_PX
    assert off.std() < SPREAD_PX[renderer]


@pytest.mark.parametrize("recipe", RECIPES)
def test_spoiled_ink_lies_where_the_homography_says(recipe):
    """After every recipe the true curve, mapped, still runs through the ink."""
    page = egg()

    spoiled = spoil(paint(page, renderer="pillow"), recipe, np.random.default_rng(5))

    assert abs(np.median(centroids(spoiled.rgb, page, spoiled.homography))) < SPOILED_MEAN_PX


@pytest.mark.parametrize("recipe", ["small", "rotate", "stretch", "scan"])
def test_truth_of_a_moved_chart(recipe):
    """Centre, radii and turn written in the truth place the curve as the homography does."""
    page = egg()
    chart = page.charts[0]
    spoiled = spoil(paint(page, renderer="pillow"), recipe, np.random.default_rng(6))

    truth = truth_of(page, spoiled=spoiled)

    rho, _ = drawn_curve(chart, chart.traces[0])
    x, y = map_points(spoiled.homography, *chart.point(rho, DEG))
    t = np.radians(chart.page_deg(DEG) + truth["rotation_deg"])
    np.testing.assert_allclose(
        truth["centre_px"][0] + truth["outer_radius_px"][0] * rho * np.sin(t), x, atol=0.01
    )
    np.testing.assert_allclose(
        truth["centre_px"][1] - truth["outer_radius_px"][1] * rho * np.cos(t), y, atol=0.01
    )


@pytest.mark.parametrize(
    ("zero", "turn", "x", "y"), [("top", "cw", 200, 100), ("top", "ccw", 0, 100), ("right", "ccw", 100, 0)]
)
def test_bearing_90_lies_where_the_chart_prints_it(zero, turn, x, y):
    """Three layouts by hand, centre (100, 100), outer radius 100: picture y grows downward."""
    chart = Chart(traces=(), centre_x=100, centre_y=100, outer_px=100, zero=zero, turn=turn)

    np.testing.assert_allclose(chart.point(1.0, 90.0), (x, y), atol=1e-9)


@pytest.mark.parametrize(
    ("law", "rho"), [("even", 0.75), ("field", 0.3162), ("power", 0.1), ("log-periodic", 0.5584)]
)
def test_radius_of_minus_10_db(law, rho):
    """Radius of -10 dB on a 40 dB chart by each law: values computed by hand from the laws' definitions."""
    got = rho_of(law, -10.0, 0.0, -40.0)

    assert got == pytest.approx(rho, abs=5e-5)
    assert level_of(law, got, 0.0, -40.0) == pytest.approx(-10)


@pytest.mark.parametrize("level", [-10.0, -20.0, -30.0])
@pytest.mark.parametrize("renderer", RENDERERS)
def test_a_ring_crosses_the_pixel_it_should(renderer, level):
    """A black ring is drawn exactly at the pixel its level asks for, on whole-pixel geometry."""
    rings = {**BARE, "ring_db": (-10.0, -20.0, -30.0), "ring": Stroke(colour="#000000")}
    chart = Chart(traces=(), centre_x=300.0, centre_y=280.0, outer_px=240.0, **rings)
    rgb = paint(Page(charts=(chart,)), renderer=renderer)

    x = 300 + round(240 * (1 + level / 40))

    assert rgb[280, x].max() < 90
    assert rgb[280, x + 3].min() > 240


def test_chord_truth_is_on_the_chord():
    """With 5 degree samples the truth half way lies on the straight line drawn, not on the smooth curve."""
    trace = Trace(db=np.zeros(N_TRUE), step_deg=5.0)
    rho, db = drawn_curve(Chart(traces=(trace,)), trace)

    assert rho[10] == pytest.approx(np.cos(np.radians(2.5)), abs=1e-9)
    assert db[10] == pytest.approx(40 * (np.cos(np.radians(2.5)) - 1))
    assert rho[0] == rho[20] == 1.0


def test_levels_below_the_centre_are_drawn_at_the_centre_or_left_out():
    """Plotting programs clip at the centre or leave a gap; the true level is kept either way."""
    db = np.where(DEG < 90, -60.0, -5.0)
    trace = Trace(db=db)

    held, kept = drawn_curve(Chart(traces=(trace,), clip="centre"), trace)
    left, _ = drawn_curve(Chart(traces=(trace,), clip="gap"), trace)

    assert held[:360].max() == 0
    assert np.isnan(left[:360]).all()
    assert kept[0] == -60


def test_half_chart_has_no_truth_below_its_base():
    """Bearings off the drawn half have no level."""
    trace = Trace(db=np.zeros(N_TRUE))

    _, db = drawn_curve(Chart(traces=(trace,), half=True), trace)

    assert np.isnan(db[4 * 91 : 4 * 269]).all()
    assert np.isfinite(db[: 4 * 90]).all()


def test_dashes_have_the_lengths_asked_for():
    """A straight line of 100 px under 10 on, 5 off: seven dashes, each 10 px but the last."""
    parts = cut_dashes(np.array([[0.0, 0], [40, 0], [100, 0]]), (10, 5))

    assert [round(float(np.ptp(p[:, 0])), 6) for p in parts] == [10] * 7
    assert parts[-1][0, 0] == 90


def test_patterns_peak_at_nought():
    """Every pattern has its largest level at 0 dB, so that a drawn peak is where the chart says."""
    rng = np.random.default_rng(2)
    fixed = [
        patterns.half_wave_dipole(DEG),
        patterns.line_source(DEG),
        patterns.disc(DEG),
        patterns.first_order(DEG),
        patterns.sector(DEG),
        patterns.linear_array(DEG),
        patterns.bidirectional(DEG),
        patterns.cosine_beam(DEG),
        patterns.omni(DEG, rng),
        patterns.measured(DEG, rng),
    ]

    for level in fixed:
        assert level.max() == pytest.approx(0, abs=1e-9)
        assert level.min() >= patterns.DEEP_DB


def test_random_pages_repeat_by_seed_and_differ_between_seeds():
    """A seed fixes every pixel; another gives another chart."""
    first, again, other = (
        paint(random_page(np.random.default_rng(s), outer_px=120), renderer="opencv") for s in (1, 1, 2)
    )

    assert np.array_equal(first, again)
    assert first.shape != other.shape or not np.array_equal(first, other)


def test_a_written_case_is_the_practice_layout(tmp_path):
    """The files hold what a scorer needs, and the picture is stored without loss."""
    page = random_page(np.random.default_rng(3), outer_px=100, charts=2)
    rgb = paint(page, renderer="opencv")

    path = write_case(tmp_path, "pair", rgb, [truth_of(page, k) for k in range(2)])

    truth = json.loads((tmp_path / "pair-1.truth.json").read_text())
    assert truth["chart"] == path.name
    assert len(truth["traces"][0]["db"]) == N_TRUE
    assert {
        "centre_px",
        "outer_radius_px",
        "ring_db",
        "outer_db",
        "centre_db",
        "law",
        "zero",
        "turn",
        "crop",
    } <= set(truth)
    with Image.open(path) as image:
        assert np.array_equal(np.asarray(image.convert("RGB")), rgb)


def test_fax_is_one_bit_and_its_ink_black(tmp_path):
    """A fax is stored with one bit a pixel and its truth names black."""
    page = egg()
    spoiled = spoil(paint(page), "fax", np.random.default_rng(1))

    path = write_case(tmp_path, "fax", spoiled.rgb, [truth_of(page, spoiled=spoiled)])

    with Image.open(path) as image:
        assert image.mode == "1"
    assert json.loads((tmp_path / "fax.truth.json").read_text())["traces"][0]["ink"] == "#000000"
