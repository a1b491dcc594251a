"""The scale from told values, marks and ring levels: laws against published radii, contradictions refused."""

import warnings

import numpy as np
import pytest

from digitise.exceptions import NotReadError, UsageError
from digitise.scale import make_scale
from digitise.settings import Mark, Settings

from .grids import CENTRE, OUTER_PX, plane_grid

EVEN_40 = [1.0, 0.75, 0.5, 0.25]
LOG_RINGS = np.array([0.0, -1, -2, -3, -6, -10, -20, -30])


def mark_at(grid, rho, level_db, bearing=37.0, off_px=(0.0, 0.0)):
    """A click near a ring, rounded to whole pixels as a click is."""
    x, y = grid.to_picture(rho, bearing)
    return Mark(x_px=round(float(x) + off_px[0]), y_px=round(float(y) + off_px[1]), level_db=level_db)


def law_rho(law, level_db):
    """Ring radii of levels below 0 dB, from the published definitions of the laws."""
    return {
        "field": 10 ** (level_db / 20),
        "power": 10 ** (level_db / 10),
        "log-periodic": 0.89 ** (-level_db / 2),
    }[law]


def test_outer_and_centre_give_the_even_law():
    """Even dB, 40 dB from rim to centre: a quarter of the radius is 10 dB."""
    scale = make_scale(plane_grid(EVEN_40), settings=Settings(outer_db=5.0, centre_db=-35.0))

    assert scale.law == "even"
    np.testing.assert_allclose(scale.level(np.array([1.0, 0.75, 0.5, 0.0])), [5, -5, -15, -35], atol=1e-12)
    assert scale.centre_db == pytest.approx(-35)
    np.testing.assert_allclose(scale.slope(np.array([0.1, 0.9])), [40, 40])
    np.testing.assert_allclose(scale.rho(np.array([5.0, -35.0])), [1, 0], atol=1e-12)


@pytest.mark.parametrize(
    ("law", "published"),
    [
        # radius over outer radius at -3, -10, -20, -30 dB: 10^(dB/20), 10^(dB/10) (definitions of field and
        # power ratio), and 0.89^(-dB/2) as quoted from the 2018 ARRL Handbook's description of its polar grid
        ("field", [0.7079, 0.3162, 0.1000, 0.0316]),
        ("power", [0.5012, 0.1000, 0.0100, 0.0010]),
        ("log-periodic", [0.8396, 0.5584, 0.3118, 0.1741]),
    ],
)
def test_outer_alone_is_enough_for_a_logarithmic_law(law, published):
    """The logarithmic laws hang on one level; their radii are the published ones."""
    scale = make_scale(plane_grid([1.0, 0.7, 0.4]), settings=Settings(outer_db=0.0, law=law))

    np.testing.assert_allclose(scale.rho(np.array([-3.0, -10, -20, -30])), published, atol=5e-5)
    np.testing.assert_allclose(scale.level(scale.rho(LOG_RINGS)), LOG_RINGS, atol=1e-9)
    assert scale.centre_db == -np.inf


def test_no_warning_at_or_below_the_centre():
    """A logarithmic law is -inf at the centre and below, quietly, also for vectors and scalars."""
    scale = make_scale(plane_grid([1.0, 0.7, 0.4]), settings=Settings(outer_db=0.0, law="field"))
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        level = scale.level(np.array([[-0.1, 0.0], [0.5, 1.0]]))
        slope, level_u = scale.slope(np.array([-0.1, 0.0, 1.0])), scale.level_u(np.array([-0.1, 0.0, 1.0]))

    assert level.shape == (2, 2)
    assert (level[0] == -np.inf).all()
    assert np.isinf(slope[:2]).all() and slope[2] == pytest.approx(8.685889638)
    assert np.isfinite(level_u).all()


@pytest.mark.parametrize("law", ["even", "field", "power", "log-periodic", "rings"])
def test_slope_is_the_derivative_and_rho_the_inverse(law):
    """Analytic slope against a central difference; radius against level, there and back."""
    levels = (0.0, -1.0, -3.0, -6.0, -10.0)
    rings = 1 + np.array(levels) / 12 if law in ("even", "rings") else law_rho(law, np.array(levels))
    if law == "rings":
        rings = rings**0.7
    scale = make_scale(plane_grid(rings), settings=Settings(ring_levels=levels, law=law))
    rho = np.linspace(0.15, 1.05, 40)
    step = 1e-6

    assert scale.law == law
    np.testing.assert_allclose(
        scale.slope(rho), (scale.level(rho + step) - scale.level(rho - step)) / (2 * step), rtol=1e-5
    )
    np.testing.assert_allclose(scale.rho(scale.level(rho)), rho, atol=1e-9)
    assert np.all(np.diff(scale.level(np.linspace(0.01, 1.3, 200))) > 0)


def test_rings_law_agrees_with_a_general_library():
    """Law "rings" passes through its rings as SciPy's monotone interpolator does."""
    from scipy.interpolate import PchipInterpolator

    rho, levels = np.array([1.0, 0.9, 0.62, 0.5, 0.2, 0.1]), (0.0, -2.0, -5.0, -11.0, -20.0, -40.0)
    scale = make_scale(plane_grid(rho), settings=Settings(ring_levels=levels, law="rings"))
    inside = np.linspace(0.1, 1.0, 301)

    np.testing.assert_allclose(
        scale.level(inside), PchipInterpolator(rho[::-1], levels[::-1])(inside), atol=1e-9
    )
    np.testing.assert_allclose(scale.level(rho), levels, atol=1e-12)


@pytest.mark.parametrize("law", ["even", "field", "power", "log-periodic"])
@pytest.mark.parametrize("n_marks", [2, 4])
def test_marks_read_the_ring_not_the_click(law, n_marks):
    """Clicks 1 to 2 px off name their rings; the scale is exact to the rings' own error."""
    levels = np.array([0.0, -3, -6, -9, -12])
    rings = 1 + levels / 16 if law == "even" else law_rho(law, levels)
    grid = plane_grid(rings)
    chosen = [0, 4] if n_marks == 2 else [0, 1, 3, 4]
    marks = tuple(mark_at(grid, rings[k], levels[k], 37.0 + 60 * k, (1.2, -1.4)) for k in chosen)
    scale = make_scale(grid, settings=Settings(marks=marks, law=law if n_marks == 2 else None))

    assert scale.law == law
    np.testing.assert_allclose(scale.level(rings), levels, atol=1e-6)
    assert not scale.reasons


@pytest.mark.parametrize(
    ("rings", "levels", "law"),
    [
        (EVEN_40, [0, -10, -20, -30], "even"),
        (law_rho("field", LOG_RINGS[:7]), LOG_RINGS[:7], "field"),
        (law_rho("power", LOG_RINGS[:6]), LOG_RINGS[:6], "power"),
        (law_rho("log-periodic", LOG_RINGS), LOG_RINGS, "log-periodic"),
    ],
)
def test_two_marks_without_a_law_are_judged_by_the_other_rings(rings, levels, law):
    """Outermost and innermost ring named: the rings between, which stand at whole dB, tell the law."""
    grid = plane_grid(rings)
    marks = mark_at(grid, rings[0], levels[0]), mark_at(grid, rings[-1], levels[-1], 217.0)
    scale = make_scale(grid, settings=Settings(marks=marks))

    assert scale.law == law
    assert not scale.reasons
    np.testing.assert_allclose(scale.level(np.asarray(rings)), levels, atol=1e-6)


def test_two_marks_on_rings_of_no_law_are_flagged():
    """Rings that follow no law cannot be read from two marks without a word."""
    rings = [1.0, 0.83, 0.71, 0.4, 0.33]
    grid = plane_grid(rings)
    scale = make_scale(grid, settings=Settings(marks=(mark_at(grid, 1.0, 0.0), mark_at(grid, 0.33, -10.0))))

    assert [item.code for item in scale.reasons] == ["law-doubtful"]


def test_a_mark_at_the_centre_is_an_anchor():
    """The centre point may be marked under the even law, and not under a logarithmic one."""
    grid = plane_grid(EVEN_40)
    centre = Mark(x_px=CENTRE[0] + 1, y_px=CENTRE[1], level_db=-40.0)
    scale = make_scale(grid, settings=Settings(marks=(mark_at(grid, 0.75, -10.0), centre)))

    assert scale.centre_db == pytest.approx(-40)
    assert scale.level(np.array(1.0)) == pytest.approx(0)
    with pytest.raises(UsageError, match="never reaches"):
        make_scale(grid, settings=Settings(marks=(mark_at(grid, 0.75, -10.0), centre), law="field"))


def test_a_mark_far_from_any_ring_is_refused():
    """The message names the mark and the nearest ring's radius."""
    grid = plane_grid(EVEN_40)
    marks = mark_at(grid, 1.0, 0.0), mark_at(grid, 0.84, -6.4)

    with pytest.raises(UsageError, match=r"mark \d+,\d+=-6\.4 lies 210 px .* nearest ring at 188 px"):
        make_scale(grid, settings=Settings(marks=marks))


def test_contradictory_marks_are_refused():
    """One ring with two levels, levels that rise inward, one ring marked twice, a level that fits no law."""
    grid = plane_grid(EVEN_40)
    top = mark_at(grid, 1.0, 0.0)

    with pytest.raises(UsageError, match="one ring two levels"):
        make_scale(grid, settings=Settings(marks=(top, mark_at(grid, 1.0, -5.0, 90.0))))
    with pytest.raises(UsageError, match="do not fall inward"):
        make_scale(grid, settings=Settings(marks=(top, mark_at(grid, 0.5, 20.0))))
    with pytest.raises(UsageError, match="all name one ring"):
        make_scale(grid, settings=Settings(marks=(top, mark_at(grid, 1.0, 0.0, 200.0))))
    with pytest.raises(UsageError, match="fit no law"):
        make_scale(
            grid,
            settings=Settings(
                marks=(top, mark_at(grid, 0.75, -10.0), mark_at(grid, 0.5, -12.0), mark_at(grid, 0.25, -30.0))
            ),
        )


def test_ring_levels_must_match_the_rings_found():
    """A wrong number of levels is refused with the radii; levels that fit no law are interpolated."""
    grid = plane_grid([1.0, 0.8, 0.5, 0.3])

    with pytest.raises(UsageError, match="gives 3 levels, but 4 rings"):
        make_scale(grid, settings=Settings(ring_levels=(0.0, -5.0, -10.0)))
    scale = make_scale(grid, settings=Settings(ring_levels=(0.0, -3.0, -10.0, -30.0)))
    assert (scale.law, scale.source) == ("rings", "ring-levels")
    with pytest.raises(UsageError, match="fit --law even only to"):
        make_scale(grid, settings=Settings(ring_levels=(0.0, -3.0, -10.0, -30.0), law="even"))


@pytest.mark.parametrize("law", ["even", "field", "log-periodic"])
@pytest.mark.parametrize("missing", [1, 3, 4])
def test_ring_levels_reach_past_a_ring_that_was_not_found(law, missing):
    """Five levels, four rings found: the law says which ring is missing, or the user is asked."""
    levels = np.array([0.0, -3, -6, -10, -15])
    rings = 1 + levels / 20 if law == "even" else law_rho(law, levels)
    scale = make_scale(
        plane_grid(np.delete(rings, missing)), settings=Settings(ring_levels=tuple(levels), law=law)
    )

    assert scale.law == law
    np.testing.assert_allclose(scale.level(rings), levels, atol=1e-6)


def test_what_is_lacking_is_named():
    """Without labels the refusal names what to give; a centre above the rim or under a logarithmic law is
    refused.
    """
    grid = plane_grid(EVEN_40)

    with pytest.raises(NotReadError, match="give --outer, --centre, --zero and --turn"):
        make_scale(grid, settings=Settings())
    with pytest.raises(NotReadError, match="give --centre,"):
        make_scale(grid, settings=Settings(outer_db=0.0, zero_deg=0.0, turn="cw"))
    with pytest.raises(UsageError, match="fall from the outside in"):
        make_scale(grid, settings=Settings(outer_db=0.0, centre_db=40.0))
    with pytest.raises(UsageError, match="no meaning under --law field"):
        make_scale(grid, settings=Settings(outer_db=0.0, centre_db=-40.0, law="field"))


@pytest.mark.parametrize("law", ["even", "field", "rings"])
def test_stated_error_is_the_scatter(law):
    """Rings redrawn with their stated error scatter the level by level_u (25 % allowed for 400 draws)."""
    rng = np.random.default_rng(31)
    levels = (0.0, -2.0, -4.0, -6.0, -8.0)
    true = 1 + np.array(levels) / 11 if law != "field" else law_rho("field", np.array(levels))
    ring_u_px = 0.5
    rho = np.array([0.4, 0.6, 0.95])
    read = []
    for _ in range(400):
        grid = plane_grid(true + rng.normal(0, ring_u_px / OUTER_PX, len(true)), ring_u_px=ring_u_px)
        scale = make_scale(grid, settings=Settings(ring_levels=levels, law=law))
        read.append(scale.level(rho))
    stated = make_scale(
        plane_grid(true, ring_u_px=ring_u_px), settings=Settings(ring_levels=levels, law=law)
    ).level_u(rho)

    np.testing.assert_allclose(np.std(read, axis=0), stated, rtol=0.25 if law != "rings" else 0.45)


def test_an_earlier_scale_is_taken_over():
    """Settings that carry a scale from a record use it as it is."""
    grid = plane_grid(EVEN_40)
    earlier = make_scale(grid, settings=Settings(outer_db=0.0, centre_db=-40.0))

    assert make_scale(grid, settings=Settings(scale=earlier)) is earlier
