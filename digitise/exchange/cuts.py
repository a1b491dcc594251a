"""What all formats exchange: an antenna's cuts with what is known of it, and the way to a table and back.

Angles of a `Cut` stand in space, the same for all formats: 0 in front, azimuth growing clockwise seen from
above, elevation growing up. How a table's printed bearings stand in space is said by the user, in
`ExchangeOptions`; how a file's do is the format's own, or stated there too.
"""

import math
from dataclasses import dataclass, field, replace

import numpy as np

from ..exceptions import UsageError
from ..frozen import lock_arrays
from ..table import build_table

__all__ = [
    "DBI_OVER_DBD",
    "PLANES",
    "Antenna",
    "Cut",
    "ExchangeOptions",
    "Exported",
    "cut_from_table",
    "levels_at",
    "resampled",
    "table_from_cut",
]

PLANES = ("azimuth", "elevation")
DBI_OVER_DBD = 2.15  # the trade's offset (common practice, no source); a half-wave dipole has 2.1509 dBi
FINEST_DEG = 0.05
EVEN_DEG = 2e-3  # angles are written with three decimals
NEIGHBOURS_SHARE = 0.8  # of the points of a table with gaps have a neighbour one step on
WIDEST_GAP_DEG = 30.0  # farther apart than this, points are not joined


@dataclass(frozen=True, eq=False, kw_only=True)
class Cut:
    """One cut.

    plane : "azimuth", "elevation" or "" ; name : what tells it from others in a file name
    angle_deg : (n,) from the front, clockwise or up, rising, 0 to below 360, in any steps
    level_db : (n,) in `unit`: "dB" under the largest, "dBi" or "dBd"
    error95_db : (n,) half-width of the 95 % interval, NaN when not known
    state : (n,) str as in a table
    rounding_db : half of the last digit of the levels as they were written, or 0
    frequency_mhz : NaN when not known; polarisation, designator : as a file has them, or ""
    """

    angle_deg: np.ndarray
    level_db: np.ndarray
    error95_db: np.ndarray
    state: np.ndarray
    plane: str = ""
    name: str = ""
    unit: str = "dB"
    rounding_db: float = 0.0
    frequency_mhz: float = math.nan
    polarisation: str = ""
    designator: str = ""

    def __post_init__(self):
        lock_arrays(self)


@dataclass(frozen=True, kw_only=True)
class Antenna:
    """The cuts of one antenna and what is known of it; NaN or "" for what is not.

    gain is in `gain_unit`, "dBi" or "dBd"; tilt_deg is positive down
    from_reading : the levels were read from a picture of a chart, so the caution goes with them
    extra : tuple of (name, text) of what one format holds and the others do not
    comments : lines; notes : what reading the file had to put up with, with line numbers
    """

    cuts: tuple
    maker: str = ""
    model: str = ""
    low_mhz: float = math.nan
    high_mhz: float = math.nan
    gain: float = math.nan
    gain_unit: str = "dBi"
    azimuth_width_deg: float = math.nan
    elevation_width_deg: float = math.nan
    tilt_deg: float = math.nan
    tilt_tolerance_deg: float = math.nan
    front_to_back_db: float = math.nan
    pattern_kind: str = ""
    date: str = ""
    from_reading: bool = False
    extra: tuple = ()
    comments: tuple = ()
    notes: tuple = ()

    @property
    def gain_dbi(self):
        """The gain in dBi."""
        return self.gain + (DBI_OVER_DBD if self.gain_unit == "dBd" else 0.0)


@dataclass(frozen=True, kw_only=True)
class ExchangeOptions:
    """What a published format leaves open, or a file cannot say; every default is stated here.

    plane : which plane a file is that does not say so ("")
    front_deg : printed bearing of a table that is in front (0)
    turn : how the table's azimuth bearings grow seen from above (clockwise, as a compass)
    file_turn : how a file's do (clockwise; readers of NSMA files disagree, so a comment says it)
    up : the way the table's elevation bearings go from the front horizon up (growing); a file's grow upward
    angles : plain CSV: "0..359", "-180..179" or "-180..180", the last with the closing point
    values : plain CSV: "relative" (0 and below), "loss" (positive), "field" (1 and below); "" reads by look
    errors : plain CSV: write error and state as columns of their own
    step_deg : of what is written or read back; NaN keeps the points there are
    decimals : of levels (3)
    designators : NSMA cut names, "H,V" (untilted geometry) or "AZ,EL"
    coordinates : BASTA coordinate system; theta is taken as 0 at the zenith in all of them (not confirmed)
    error95_db : of levels from a file that holds no errors; NaN takes half of the last digit written
    """

    plane: str = ""
    front_deg: float = 0.0
    turn: str = "cw"
    file_turn: str = "cw"
    up: str = "growing"
    angles: str = "0..359"
    values: str = ""
    errors: bool = False
    step_deg: float = math.nan
    decimals: int = 3
    designators: str = "H,V"
    coordinates: str = "SPCS_Polar"
    error95_db: float = math.nan

    def __post_init__(self):
        """Raise `UsageError` for words and numbers that mean nothing."""
        words = {
            "plane": ("", *PLANES),
            "turn": ("cw", "ccw"),
            "file_turn": ("cw", "ccw"),
            "up": ("growing", "falling"),
            "angles": ("0..359", "-180..179", "-180..180"),
            "values": ("", "relative", "loss", "field"),
            "designators": ("H,V", "AZ,EL"),
            "coordinates": ("SPCS_Polar", "SPCS_CW", "SPCS_CCW"),
        }
        for name, known in words.items():
            if getattr(self, name) not in known:
                said = ", ".join(word for word in known if word)
                raise UsageError(f"{name} {getattr(self, name)!r} is not known", remedy=f"choose from {said}")
        if not math.isfinite(self.front_deg) or not 0 <= self.decimals <= 6:
            raise UsageError("the front bearing or the number of decimals cannot be right")
        if not math.isnan(self.step_deg):
            n = 360 / self.step_deg if self.step_deg > 0 else math.inf
            if not FINEST_DEG <= self.step_deg <= 90 or abs(n - round(n)) > 1e-6:
                raise UsageError(
                    f"a step of {self.step_deg:g} degrees does not divide 360", remedy="use 1, 5 or 10, say"
                )
        if not (math.isnan(self.error95_db) or 0 <= self.error95_db < 100):
            raise UsageError(f"an error of {self.error95_db:g} dB cannot be right")

    def of_table(self, plane, bearing_deg):
        """Angles in space of a table's printed bearings."""
        return _tidy(self._sign(plane) * (np.asarray(bearing_deg, float) - self.front_deg) % 360)

    def to_table(self, plane, angle_deg):
        """A table's printed bearings of angles in space."""
        return _tidy((self.front_deg + self._sign(plane) * np.asarray(angle_deg, float)) % 360)

    def of_file(self, plane, angle_deg):
        """Angles in space of a file's angles; the same turn leads back."""
        flip = self.file_turn == "ccw" and plane != "elevation"
        return _tidy((-1 if flip else 1) * np.asarray(angle_deg, float) % 360)

    to_file = of_file

    def _sign(self, plane):
        return 1 if (self.up == "growing" if plane == "elevation" else self.turn == "cw") else -1


@dataclass(frozen=True, kw_only=True)
class Exported:
    """A file's bytes; lost : sentences on what it cannot hold; checks : sentences a person should read."""

    data: bytes
    lost: tuple = ()
    checks: tuple = field(default=())


def cut_from_table(table, *, options, name="", level="relative", unit="dB"):
    """The rows of a `Table` that have a value, as a `Cut`; `level` "relative" or "chart"."""
    kept = np.flatnonzero(table.state != "missing")
    if not kept.size:
        raise UsageError("the table has no values to convert", stage="exchange")
    angle = options.of_table(options.plane, table.angle_deg[kept])
    order = np.argsort(angle, kind="stable")
    kept = kept[order]
    levels = table.relative_db if level == "relative" else table.chart_db
    return Cut(
        plane=options.plane,
        name=name,
        unit=unit if level == "chart" else "dB",
        angle_deg=angle[order],
        level_db=levels[kept],
        error95_db=table.error95_db[kept],
        state=table.state[kept],
    )


def table_from_cut(cut, *, options):
    """The `Table` of a cut, and sentences on what had to be assumed or worked out.

    Points that lie on an even step keep their values, and rows without a point are missing. Others, and all
    when `options.step_deg` asks for another step, are worked out on straight lines and marked bridged.
    """
    said = []
    bearing = options.to_table(cut.plane, cut.angle_deg)
    order = np.argsort(bearing, kind="stable")
    per_row = {name: getattr(cut, name)[order] for name in ("level_db", "error95_db", "state")}
    cut = replace(cut, angle_deg=bearing[order], **per_row)
    unknown = np.isnan(cut.error95_db)
    told = options.error95_db
    errors = np.where(unknown, cut.rounding_db if math.isnan(told) else told, cut.error95_db)
    if unknown.any():
        source = (
            f"half of the last digit written, {cut.rounding_db:g} dB"
            if math.isnan(told)
            else f"as told, {told:g} dB"
        )
        said.append(f"the file holds no errors: error95_db is {source}, which is not the error of the levels")
    even = _even_rows(cut.angle_deg)
    n = even if math.isnan(options.step_deg) else round(360 / options.step_deg)
    if n is None:
        n = 360
        said.append(
            "the points are not on an even step: worked out every degree on straight lines, marked bridged"
        )
    angles = np.arange(n) * 360 / n
    at = np.round(cut.angle_deg * n / 360).astype(int) % n
    own = np.abs((cut.angle_deg - angles[at] + 180) % 360 - 180) < EVEN_DEG
    levels, errors_out = np.full(n, np.nan), np.full(n, np.nan)
    state = np.full(n, "missing", dtype="U8")
    if n != even:
        levels, errors_out, state = _between(cut, errors, angles)
        worked_out = np.isfinite(levels).sum() - own.sum()
        if worked_out > 0 and not math.isnan(options.step_deg):
            said.append(f"{worked_out} levels worked out on straight lines between points, marked bridged")
        if own.sum() < len(own) and not math.isnan(options.step_deg):
            said.append(f"{len(own) - own.sum()} of {len(own)} points, which lie between the new steps")
    levels[at[own]], errors_out[at[own]], state[at[own]] = cut.level_db[own], errors[own], cut.state[own]
    return build_table(angles, levels, errors_out, state), tuple(said)


def resampled(cut, step_deg):
    """The cut every `step_deg`, and a sentence when points had to be worked out; the cut itself for NaN."""
    if math.isnan(step_deg):
        return cut, ()
    table, said = table_from_cut(replace(cut, plane=""), options=ExchangeOptions(step_deg=step_deg))
    new = cut_from_table(table, options=ExchangeOptions(), level="chart", unit=cut.unit)
    kept = {name: getattr(new, name) for name in ("angle_deg", "level_db", "error95_db", "state")}
    return replace(cut, **kept), tuple(
        sentence for sentence in said if "straight" in sentence or "between" in sentence
    )


def levels_at(cut, angle_deg):
    """Levels at other angles, dB, NaN where there is none, and whether any had to be worked out."""
    levels, _, _ = _between(cut, np.zeros(len(cut.angle_deg)), np.asarray(angle_deg, float))
    near = np.abs((np.asarray(angle_deg)[:, None] - cut.angle_deg + 180) % 360 - 180).min(axis=1)
    return levels, bool(np.any(near > EVEN_DEG))


def _even_rows(angle_deg):
    """The number of even steps in the circle that the angles lie on, most beside each other, or None."""
    if len(angle_deg) < 2:
        return None
    apart = np.diff(np.append(angle_deg, angle_deg[0] + 360))
    least = float(apart.min())
    n = round(360 / least) if least > 0 else 0
    if not 2 <= n <= 360 / FINEST_DEG + 1:
        return None
    step = 360 / n
    on_step = np.abs(angle_deg - np.round(angle_deg / step) * step) < EVEN_DEG
    return n if on_step.all() and np.mean(apart < 1.01 * step) >= NEIGHBOURS_SHARE else None


def _between(cut, errors, angles):
    """Levels, errors and states at other angles, on straight lines; nothing across wide gaps."""
    around = np.concatenate((cut.angle_deg[-1:] - 360, cut.angle_deg, cut.angle_deg[:1] + 360))
    order = np.concatenate(([len(cut.angle_deg) - 1], np.arange(len(cut.angle_deg)), [0]))
    right = np.clip(np.searchsorted(around, angles, side="right"), 1, len(around) - 1)
    left = right - 1
    gap = around[right] - around[left]
    share = np.where(gap > 0, (angles - around[left]) / np.maximum(gap, 1e-12), 0.0)
    low, high = order[left], order[right]
    levels = (1 - share) * cut.level_db[low] + share * cut.level_db[high]
    error = np.maximum(errors[low], errors[high])
    state = np.where((cut.state[low] == "floor") | (cut.state[high] == "floor"), "floor", "bridged").astype(
        "U8"
    )
    # Where points lie on even steps, a step without one is a row without a value and stays so.
    n = _even_rows(cut.angle_deg)
    far = gap > (WIDEST_GAP_DEG if n is None else 1.01 * 360 / n)
    far &= np.minimum(angles - around[left], around[right] - angles) > EVEN_DEG
    nearer = np.where(share > 0.5, high, low)
    touched = np.minimum(angles - around[left], around[right] - angles) <= EVEN_DEG
    levels = np.where(touched, cut.level_db[nearer], levels)
    state[far] = "missing"
    return np.where(far, np.nan, levels), np.where(far, np.nan, error), state


def _tidy(angle_deg):
    """Angles without the last digits that turning them left behind, 0 to below 360."""
    angle = np.round(angle_deg, 9)
    return np.where(angle >= 360, 0.0, angle) + 0.0
