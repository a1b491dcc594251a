"""Two cuts into the pattern in every direction, an estimate off the cuts, and its directivity.

The cuts meet at one point: the azimuth cut's bearing in the elevation cut's plane, at the elevation where
the azimuth cut was taken (the horizon, or the cone of the beam). The azimuth cut is referred to that point,
once, so that a tilted beam is not counted twice. Levels that were read stay: on the cuts themselves the
sphere holds them.

The directivity's error has two parts that are said apart: what the reading of the cuts leaves open (Monte
Carlo, JCGM 101:2008), and how far the methods disagree, which is a sign of what two cuts cannot tell and no
bound on it.
"""

import math
from dataclasses import dataclass, field, replace

import numpy as np

from ._draws import draw_levels, half_width95
from ._solid_methods import LIMITS, METHODS, directivity_dbi, fill_sphere
from .exceptions import UsageError
from .frozen import lock_arrays

__all__ = ["METHODS", "SOURCES", "GainCheck", "Solid", "check_gain", "make_solid"]

SOURCES = ("estimate", "azimuth cut", "elevation cut")
N_DRAWS = 60
DRAWS_STEP_DEG = (
    3.0  # the draws give only the spread of the directivity, which a coarser sphere shows as well
)
USUAL_LOSS_DB = 3.0  # more than this between directivity and gain is worth a look; common practice, no source


@dataclass(frozen=True, eq=False, kw_only=True)
class Solid:
    """The estimated pattern over the sphere.

    azimuth_deg : (a,) bearings as the azimuth table prints them
    elevation_deg : (e,) -90 to 90, positive up
    relative_db : (e, a) dB under the largest level on the sphere
    source : (e, a) index into `SOURCES`: what is an estimate and what was read
    method : one of METHODS; limits : what it is known to get wrong
    directivity_dbi : and error95_db, the half-width from the reading of the cuts alone
    others_dbi : method -> directivity by it, or None where it could not be used
    gap_behind_db : elevation cut less azimuth cut where they meet behind the antenna, NaN when not known;
        0 if both are of one antenna and well read
    assumed : sentences
    """

    azimuth_deg: np.ndarray
    elevation_deg: np.ndarray
    relative_db: np.ndarray
    source: np.ndarray
    method: str
    limits: str
    directivity_dbi: float
    error95_db: float
    others_dbi: dict = field(default_factory=dict)
    gap_behind_db: float = math.nan
    assumed: tuple = ()

    def __post_init__(self):
        lock_arrays(self)

    @property
    def spread_db(self):
        """Largest less smallest directivity of the methods."""
        known = [value for value in self.others_dbi.values() if value is not None]
        return max(known) - min(known)


@dataclass(frozen=True, kw_only=True)
class GainCheck:
    """A stated gain against the directivity: verdict "agrees", "differs" or "cannot tell", and a sentence."""

    gain_dbi: float
    verdict: str
    sentence: str


@dataclass(frozen=True, kw_only=True)
class _Cuts:
    """Both cuts on the sphere's own angles; arrays may have draws as their first axis."""

    off_deg: np.ndarray
    elevation_deg: np.ndarray
    across: np.ndarray
    front: np.ndarray
    back: np.ndarray


def make_solid(
    azimuth,
    elevation,
    *,
    method="summing",
    step_deg=1.0,
    azimuth_front_deg=None,
    elevation_front_deg=None,
    up="",
    azimuth_at_deg=0.0,
):
    """Fill the sphere from an azimuth and an elevation `Table`.

    Parameters
    ----------
    method : one of METHODS
    step_deg : of the sphere; must divide 90
    azimuth_front_deg : bearing of the azimuth table in the elevation cut's plane; None for the quarter
        (0, 90, 180, 270) nearest to its peak
    elevation_front_deg : bearing of the elevation table at the horizon in front; None for the quarter
        nearest to its peak
    up : "growing" or "falling", the way the elevation table's bearings go from the front horizon up;
        "" takes a tilted beam to point down
    azimuth_at_deg : elevation at which the azimuth cut was taken

    Raises `UsageError` for a cut without values where the method needs them.

    """
    if method not in METHODS:
        raise UsageError(
            f"method {method!r} is none", remedy=f"choose from {', '.join(METHODS)}", stage="solid"
        )
    if not (0.25 <= step_deg <= 15 and abs(90 / step_deg - round(90 / step_deg)) < 1e-9):
        raise UsageError(
            f"a step of {step_deg:g} degrees does not divide 90", remedy="use 1, 2, 3 or 5", stage="solid"
        )
    if not -90 < azimuth_at_deg < 90:
        raise UsageError("the azimuth cut's elevation must lie between -90 and 90", stage="solid")
    ahead, front, growing, assumed = _stand(azimuth, elevation, azimuth_front_deg, elevation_front_deg, up)
    place = {"ahead": ahead, "front": front, "growing": growing}
    cuts = _on_sphere(azimuth.relative_db[None], elevation.relative_db[None], step_deg, **place)
    _check_values(cuts, method)
    levels = fill_sphere(method, cuts.across, cuts.front, cuts.back, cuts.off_deg)[0]
    directivity = directivity_dbi(levels, cuts.elevation_deg)
    others = {name: _by(name, cuts) for name in METHODS}
    levels, source = _keep_read(levels, cuts, azimuth_at_deg)
    behind = _gap_behind(cuts, azimuth_at_deg)
    return Solid(
        azimuth_deg=(cuts.off_deg + ahead) % 360,
        elevation_deg=cuts.elevation_deg,
        relative_db=levels - np.max(levels),
        source=source,
        method=method,
        limits=LIMITS[method],
        directivity_dbi=float(directivity),
        error95_db=_reading_error(azimuth, elevation, method, place),
        others_dbi=others,
        gap_behind_db=behind,
        assumed=tuple(assumed),
    )


def check_gain(solid, gain_dbi):
    """Hold a stated gain (dBi) against the directivity: it can be no larger, and is smaller by the losses."""
    loss = solid.directivity_dbi - gain_dbi
    margin = math.hypot(solid.error95_db, solid.spread_db)
    said = (
        f"stated gain {gain_dbi:.1f} dBi, estimated directivity {solid.directivity_dbi:.1f} dBi: "
        f"{loss:+.1f} dB loss, "
        f"sure to about {margin:.1f} dB (reading and spread of the methods)"
    )
    if loss < -margin:
        return GainCheck(
            gain_dbi=gain_dbi, verdict="differs",
            sentence=f"{said}; no antenna has more gain than directivity: gain, cuts or method are wrong",
        )  # fmt: skip
    if loss > USUAL_LOSS_DB + margin:
        return GainCheck(
            gain_dbi=gain_dbi, verdict="differs",
            sentence=f"{said}; more than usual losses: dBd taken for dBi, or cuts of another antenna?",
        )  # fmt: skip
    if margin > USUAL_LOSS_DB:
        return GainCheck(gain_dbi=gain_dbi, verdict="cannot tell", sentence=said)
    return GainCheck(gain_dbi=gain_dbi, verdict="agrees", sentence=said)


def _stand(azimuth, elevation, azimuth_front_deg, elevation_front_deg, up):
    """How both tables stand in space, and what had to be assumed."""
    assumed = []
    ahead = azimuth_front_deg
    if ahead is None:
        ahead = _quarter(_peak_deg(azimuth))
        assumed.append(
            f"the elevation cut lies at the azimuth cut's {ahead:g} deg, the quarter nearest its peak"
        )
    front, peak = elevation_front_deg, _peak_deg(elevation)
    if front is None:
        front = _quarter(peak)
        assumed.append(
            f"the horizon in front is the elevation cut's {front:g} deg, the quarter nearest its peak"
        )
    if not up:
        tilted = (peak - front + 180) % 360 - 180
        up = "falling" if tilted > 0.5 else "growing"
        assumed.append(
            f"bearings {'grow' if up == 'growing' else 'fall'} from the horizon up: a tilted beam points down"
        )
    return float(ahead) % 360, float(front) % 360, up == "growing", assumed


def _peak_deg(table):
    if not np.isfinite(table.chart_db).any():
        raise UsageError("a cut has no values", stage="solid")
    return float(table.angle_deg[np.nanargmax(table.chart_db)])


def _quarter(angle_deg):
    return round(angle_deg / 90) % 4 * 90.0


def _on_sphere(azimuth_db, elevation_db, step_deg, *, ahead, front, growing):
    """Both cuts at the sphere's angles; the azimuth cut is 0 where they meet."""
    off = np.arange(-180, 180, step_deg)
    tall = np.linspace(-90, 90, round(180 / step_deg) + 1)
    sign = 1 if growing else -1
    across = _read_at(azimuth_db, ahead + off)
    return _Cuts(
        off_deg=off,
        elevation_deg=tall,
        across=across - _read_at(azimuth_db, np.array([ahead])),
        front=_read_at(elevation_db, front + sign * tall),
        back=_read_at(elevation_db, front + 180 - sign * tall),
    )


def _read_at(levels_db, angle_deg):
    """Levels (..., n) at other bearings, on straight lines between rows."""
    n = levels_db.shape[-1]
    place = np.round(np.asarray(angle_deg) % 360 * n / 360, 6)
    low = np.floor(place).astype(int)
    share = place - low
    high = np.where(share == 0, low, low + 1) % n
    return (1 - share) * levels_db[..., low % n] + share * levels_db[..., high]


def _check_values(cuts, method):
    needed = [("azimuth", cuts.across, cuts.off_deg), ("elevation", cuts.front, cuts.elevation_deg)]
    if method == "projection":
        needed.append(("elevation", cuts.back, cuts.elevation_deg))
    for name, levels, angles in needed:
        unknown = ~np.isfinite(levels[0])
        if unknown.any():
            at = float(angles[np.argmax(unknown)])
            behind = "behind, " if levels is cuts.back else ""
            raise UsageError(
                f"the {name} cut has no value {behind}at {at:g} deg from the front",
                remedy="use --method summing, which needs the front half only"
                if behind
                else "read it whole first",
                stage="solid",
            )


def _by(method, cuts):
    if method == "projection" and not np.isfinite(cuts.back).all():
        return None
    levels = fill_sphere(method, cuts.across, cuts.front, cuts.back, cuts.off_deg)
    return float(directivity_dbi(levels, cuts.elevation_deg)[0])


def _gap_behind(cuts, azimuth_at_deg):
    """By how much the cuts disagree where they meet again, behind the antenna, dB."""
    row = int(np.argmin(np.abs(cuts.elevation_deg - azimuth_at_deg)))
    if azimuth_at_deg != 0 or not np.isfinite(cuts.back[0, row]):
        return math.nan
    return float(cuts.back[0, row] - cuts.across[0, 0] - cuts.front[0, row])


def _keep_read(levels, cuts, azimuth_at_deg):
    """The levels with those that were read in their places, and where each comes from."""
    levels = levels.copy()
    source = np.zeros(levels.shape, np.uint8)
    row = int(np.argmin(np.abs(cuts.elevation_deg - azimuth_at_deg)))
    if abs(cuts.elevation_deg[row] - azimuth_at_deg) < 1e-6:
        levels[row] = cuts.across[0] + cuts.front[0, row]
        source[row] = SOURCES.index("azimuth cut")
    for half, wanted in ((cuts.front[0], 0.0), (cuts.back[0], -180.0)):
        column = int(np.argmin(np.abs(cuts.off_deg - wanted)))
        known = np.isfinite(half)
        levels[known, column] = half[known]
        source[known, column] = SOURCES.index("elevation cut")
    return levels, source


def _reading_error(azimuth, elevation, method, place):
    """Half-width of the 95 % interval of the directivity from the cuts' own errors."""
    drawn = [
        draw_levels(np.asarray(table.relative_db), np.asarray(table.error95_db), n_draws=N_DRAWS, seed=seed)
        for seed, table in ((1, azimuth), (2, elevation))
    ]
    cuts = _on_sphere(*drawn, DRAWS_STEP_DEG, **place)
    values = []
    for k in range(1 + N_DRAWS):
        one = replace(cuts, across=cuts.across[k], front=cuts.front[k], back=cuts.back[k])
        levels = fill_sphere(method, one.across, one.front, one.back, one.off_deg)
        values.append(float(directivity_dbi(levels, one.elevation_deg)))
    return half_width95(np.array(values))
