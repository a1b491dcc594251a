"""The trade's figures of one table: each a value with its error and unit, or absent with the reason.

Definitions. Half power is -3.0103 dB from the lobe's peak (IEEE Std 145 wording), not from a row that noise made the
largest; the width at exactly -3 dB, as some datasheets state it, stands beside it. Levels of lobes and nulls are
relative to the main lobe's peak and negative; front-to-back ratios are positive. "Right" is where the printed bearings
grow. The worst side lobe is the largest level outside the first nulls, back lobe included. Ripple is peak to peak.

Errors are half-widths of 95 % intervals, by Monte Carlo over the rows' errors (JCGM 101:2008; what is assumed about
how rows hang together is in `_draws`). Which lobes and nulls there are is settled once, on the table as read. A figure
says nothing of the chart's own accuracy, nor of the bearing error that all rows share.
"""

import math
from dataclasses import dataclass

import numpy as np

from ._draws import draw_levels, half_width95
from ._lobes import HALF_POWER_DB, find_lobes
from ._measure import bottom_place, crossing, level_at, main_peak, top

__all__ = ["CUTS", "FIGURES", "Figure", "Figures", "figures_of"]

CUTS = ("azimuth", "elevation")
FIGURES = {  # key -> (title, unit)
    "peak_db": ("peak level on the chart", "dB"),
    "peak_deg": ("bearing of the peak", "deg"),
    "beamwidth": ("beamwidth, half power (-3.01 dB)", "deg"),
    "beamwidth3": ("beamwidth at -3.00 dB", "deg"),
    "beamwidth10": ("beamwidth at -10 dB", "deg"),
    "squint": ("squint of the half-power beam", "deg"),
    "null_width": ("first-null beamwidth", "deg"),
    "ftb": ("front-to-back at 180", "dB"),
    "ftb30": ("front-to-back over 180 +- 30", "dB"),
    "sidelobe_left": ("first side lobe, left", "dB"),
    "sidelobe_right": ("first side lobe, right", "dB"),
    "sidelobe_upper": ("first side lobe, upper", "dB"),
    "sidelobe_worst": ("worst side lobe", "dB"),
    "null_left": ("first null, left", "dB"),
    "null_right": ("first null, right", "dB"),
    "null_deepest": ("deepest null", "dB"),
    "null_fill": ("null fill, first null below the beam", "dB"),
    "tilt": ("tilt of the beam below the horizon", "deg"),
    "ripple": ("ripple, max - min", "dB"),
}
OMNI_DB = 6.0  # an azimuth pattern that varies less is called an omni here; common practice, no source
NO_PEAK_SHARE = 0.25  # share of rows that reach the peak within the error, beyond which it has no bearing
TEN_DB = 10.0


@dataclass(frozen=True, kw_only=True)
class Figure:
    """One figure.

    key, title, unit : as in `FIGURES`
    value : NaN when absent; error95 : half-width of its 95 % interval, same unit
    bound : "" or, where the trace runs below the chart's centre, "at least" or "at most"
    at_deg : printed bearing of the lobe or null, else NaN
    note : what was assumed, else ""; reason : why it is absent, else ""
    """

    key: str
    title: str
    unit: str
    value: float = math.nan
    error95: float = math.nan
    bound: str = ""
    at_deg: float = math.nan
    note: str = ""
    reason: str = ""

    @property
    def absent(self):
        """True when the pattern has no such figure, or it cannot be told."""
        return bool(self.reason)

    def rounded(self):
        """Value and error as decimal text, rounded together: the error up, to two digits, never narrower."""
        place = 3 if self.error95 <= 0 else min(3, max(0, 1 - math.floor(math.log10(self.error95))))
        value = round(self.value, place) + 0.0
        error = math.ceil(round((self.error95 + abs(value - self.value)) * 10**place, 6)) / 10**place
        return f"{value:.{place}f}", f"{error:.{place}f}"


@dataclass(frozen=True, kw_only=True)
class Figures:
    """All figures of one table, in the order of `FIGURES`; `figures["beamwidth"]` is one `Figure`."""

    found: tuple

    def __getitem__(self, key):
        return next(item for item in self.found if item.key == key)

    def __iter__(self):
        return iter(self.found)

    def to_json(self):
        """Plain values: key -> value, error95, unit and what else there is to say; value null with a reason."""
        plain = {}
        for item in self.found:
            if item.absent:
                plain[item.key] = {"value": None, "unit": item.unit, "reason": item.reason}
                continue
            value, error = item.rounded()
            entry = {"value": float(value), "error95": float(error), "unit": item.unit}
            if math.isfinite(item.at_deg):
                entry["at_deg"] = round(item.at_deg, 2)
            entry.update({name: getattr(item, name) for name in ("bound", "note") if getattr(item, name)})
            plain[item.key] = entry
        return plain


def figures_of(table, *, cut="", up="", boresight_deg=None, n_draws=200, seed=1):
    """Work out every figure of a `Table`.

    Parameters
    ----------
    table : Table
    cut : "azimuth", "elevation" or "" for not known; tilt, null fill and the upper side lobe need "elevation"
    up : "growing" or "falling", the way the printed bearings go from the horizon up; "" takes a tilted beam to
        point below the horizon
    boresight_deg : printed bearing of the mechanical boresight (in elevation: of the horizon in front); None for
        the nearest of 0, 90, 180 and 270 to the peak
    n_draws, seed : of the Monte Carlo; the same table always gives the same figures
    """
    if cut not in ("", *CUTS) or up not in ("", "growing", "falling"):
        raise ValueError(f"cut {cut!r} or up {up!r} is not one of the known words")
    if not np.isfinite(table.chart_db).any():
        return Figures(found=tuple(_absent(key, "the table has no values") for key in FIGURES))
    bench = _Bench(table, boresight_deg, n_draws, seed)
    found = {}
    for part in (_peak, _widths, _front_to_back, _lobes_and_nulls, _ripple):
        found.update({item.key: item for item in part(bench, cut)})
    found.update({item.key: item for item in _elevation(found, bench, cut, up)})
    return Figures(found=tuple(found[key] for key in FIGURES))


class _Bench:
    """The table turned so that its peak comes first, with its draws, peak and lobes."""

    def __init__(self, table, boresight_deg, n_draws, seed):
        self.n = len(table.angle_deg)
        self.step_deg = 360 / self.n
        levels = draw_levels(table.chart_db, table.error95_db, n_draws=n_draws, seed=seed)
        self.first = int(np.nanargmax(table.chart_db))
        self.levels = np.roll(levels, -self.first, axis=1)
        self.error95_db = np.roll(table.error95_db, -self.first)
        self.floor = np.roll(table.state == "floor", -self.first)
        self.missing = np.roll(table.state == "missing", -self.first)
        self.peak_db, self.peak_place = main_peak(self.levels, 0, self.step_deg)
        self.lobes = find_lobes(self.levels[0], self.error95_db)
        peak_deg = self.bearing(self.peak_place[0])
        told = boresight_deg is not None
        self.boresight_deg = float(boresight_deg) % 360 if told else round(peak_deg / 90) % 4 * 90.0
        self.boresight_said = f"from {self.boresight_deg:g} deg" + ("" if told else ", the nearest quarter")

    def bearing(self, place):
        """Printed bearing of a place in rows."""
        return (self.first + place) * self.step_deg % 360

    def off_boresight(self, place):
        """Degrees from the boresight, -180 to 180, of places in rows."""
        return ((self.first + place) * self.step_deg - self.boresight_deg + 180) % 360 - 180

    def rows_between(self, low, high):
        return np.arange(low, high + 1)

    def has_missing(self, rows):
        return bool(self.missing[rows % self.n].any())


def _present(key, values, *, extra=0.0, **more):
    """A figure from its value as read and the draws; absent when the draws leave it open."""
    error95 = half_width95(values) + extra
    if not math.isfinite(values[0]) or not math.isfinite(error95):
        return _absent(key, "the reading's errors leave it undecided")
    title, unit = FIGURES[key]
    return Figure(key=key, title=title, unit=unit, value=float(values[0]), error95=error95, **more)


def _absent(key, reason):
    title, unit = FIGURES[key]
    return Figure(key=key, title=title, unit=unit, reason=reason)


def _peak(bench, cut):
    yield _present("peak_db", bench.peak_db)
    if bench.has_missing(np.array([-1, 1])):
        yield _absent("peak_deg", "the largest level stands beside rows without a value")
        return
    first = bench.levels[0]
    rival = first + bench.error95_db >= bench.peak_db[0] - bench.error95_db[0]
    share = np.mean(rival)
    if share > NO_PEAK_SHARE:
        yield _absent("peak_deg", f"{share:.0%} of the rows reach the peak within the error")
        return
    # Rivals that hang together with the peak are its own top; others are peaks of their own.
    right = int(np.argmin(rival)) if not rival.all() else bench.n
    left = int(np.argmin(rival[::-1]))
    rival[:right] = False
    rival[bench.n - left :] = False
    note = ""
    if rival.any():
        other = int(np.argmax(np.where(rival, first, -np.inf)))
        note = f"equalled within the error at {bench.bearing(other):g} deg"
    yield _present("peak_deg", bench.peak_place * bench.step_deg + bench.first * bench.step_deg, note=note)


def _widths(bench, cut):
    for key, drop in (("beamwidth", HALF_POWER_DB), ("beamwidth3", 3.0), ("beamwidth10", TEN_DB)):
        right = crossing(bench.levels, 0, bench.peak_db - drop, 1)
        left = crossing(bench.levels, 0, bench.peak_db - drop, -1)
        if math.isfinite(right[0]) and math.isfinite(left[0]):
            yield _present(key, (right + left) * bench.step_deg)
        else:
            yield _absent(key, _no_width(bench, drop))
        if key == "beamwidth":
            middle = bench.off_boresight((right - left) / 2)
            if math.isfinite(middle[0]):
                yield _present("squint", middle[0] + _wrapped(middle - middle[0]), note=bench.boresight_said)
            else:
                yield _absent("squint", "there is no half-power beam")


def _no_width(bench, drop):
    lowest = bench.peak_db[0] - np.nanmin(bench.levels[0])
    if bench.missing.any():
        return "rows without a value lie in the way"
    if bench.floor.any():
        return f"the trace goes below the chart's centre before -{drop:.4g} dB"
    return f"the level stays within {lowest:.1f} dB of the peak all round"


def _front_to_back(bench, cut):
    """The peak's level over that behind it, and over the largest level of 150 to 210 degrees from it."""
    half, wing = bench.n / 2, 30 / bench.step_deg
    back = bench.peak_place + half
    behind = bench.rows_between(math.floor(back[0]), math.ceil(back[0]))
    if bench.has_missing(behind):
        yield _absent("ftb", "there is no value behind the peak")
    else:
        bound = "at least" if bench.floor[behind % bench.n].any() else ""
        yield _present("ftb", bench.peak_db - level_at(bench.levels, back), bound=bound)
    rows = bench.rows_between(math.ceil(back[0] - wing), math.floor(back[0] + wing))
    if bench.has_missing(rows) or len(rows) == 0:
        yield _absent("ftb30", "rows without a value lie within 30 degrees of the back")
        return
    part = bench.levels[:, rows % bench.n]
    largest, row = part.max(axis=1), rows[int(np.argmax(part[0]))]
    edges = [level_at(bench.levels, np.full(len(back), back[0] + way * wing)) for way in (-1, 1)]
    largest = np.fmax(largest, np.fmax(*edges))
    bound = "at least" if bench.floor[row % bench.n] else ""
    yield _present("ftb30", bench.peak_db - largest, bound=bound, at_deg=bench.bearing(row))


def _lobes_and_nulls(bench, cut):
    lobes = bench.lobes
    none = "the main lobe has no null" if lobes.closed else "no null before the rows without a value"
    for side, turns, way in (("left", lobes.left, -1), ("right", lobes.right, 1)):
        yield _null(f"null_{side}", bench, turns[0]) if turns else _absent(f"null_{side}", none)
        if len(turns) < 2:
            yield _absent(f"sidelobe_{side}", "one null only: no side lobe" if turns else none)
            continue
        end = turns[2] if len(turns) > 2 else turns[1]
        rows = bench.rows_between(*sorted((turns[0], end)))
        yield _lobe(f"sidelobe_{side}", bench, rows)
    nulls = lobes.all_nulls
    if nulls:
        yield _null("null_deepest", bench, *sorted(nulls, key=lambda row: bench.levels[0, row % bench.n]))
    else:
        yield _absent("null_deepest", none)
    yield _null_width(bench, none)
    yield _worst(bench, none)


def _lobe(key, bench, rows):
    level, place = top(bench.levels, rows)
    return _present(key, level - bench.peak_db, at_deg=bench.bearing(place[0]))


def _null(key, bench, row, *others):
    """A null at the depth of the table's lowest row, lower than the others: what lies between rows may be deeper."""
    low, high = _floor_run(bench, row)
    rows = _around_null(bench, row)
    place = (low + high) / 2 if high > low else bottom_place(bench.levels[:1], rows)[0][0]
    rows = np.concatenate([rows, *(_around_null(bench, other) for other in others)])
    level = np.nanmin(bench.levels[:, rows % bench.n], axis=1) - bench.peak_db
    bound = "at most" if bench.floor[row % bench.n] else ""
    return _present(key, level, bound=bound, at_deg=bench.bearing(place))


def _floor_run(bench, row):
    """First and last row of the run below the chart's centre around a row; the row itself when it is seen."""
    low = high = row
    if bench.floor[row % bench.n]:
        while high - low < bench.n and bench.floor[(low - 1) % bench.n]:
            low -= 1
        while high - low < bench.n and bench.floor[(high + 1) % bench.n]:
            high += 1
    return low, high


def _null_width(bench, none):
    lobes = bench.lobes
    if not lobes.right or not lobes.left:
        return _absent("null_width", none)
    places, extra = [], 0.0
    for row in (lobes.left[0], lobes.right[0]):
        low, high = _floor_run(bench, row)
        if high > low:
            places.append(np.full(len(bench.levels), (low + high) / 2))
            unsure = (high - low) / 2
        else:
            place, unsure = bottom_place(bench.levels, _around_null(bench, row))
            places.append(place)
        extra = math.hypot(extra, unsure * bench.step_deg)
    note = "both sides meet in one null" if lobes.closed and lobes.right[0] - lobes.left[0] == bench.n else ""
    if note:
        return _present("null_width", np.full(len(bench.levels), 360.0), note=note)
    return _present("null_width", (places[1] - places[0]) * bench.step_deg, extra=extra, note=note)


def _around_null(bench, row):
    """The rows where a draw may have its null: within the errors of the lowest one."""
    first, n = bench.levels[0], bench.n
    reach = first[row % n] + 2 * bench.error95_db[row % n]
    low = high = row
    while row - low < n // 4 and first[(low - 1) % n] - bench.error95_db[(low - 1) % n] <= reach:
        low -= 1
    while high - row < n // 4 and first[(high + 1) % n] - bench.error95_db[(high + 1) % n] <= reach:
        high += 1
    return np.arange(low, high + 1)


def _worst(bench, none):
    lobes = bench.lobes
    candidates = lobes.all_lobes
    if not candidates:
        return _absent("sidelobe_worst", "one null only: no side lobe" if lobes.right or lobes.left else none)
    if not lobes.right or not lobes.left:
        return _absent("sidelobe_worst", "rows without a value hide where the main lobe ends")
    low, high = lobes.right[0], bench.n + lobes.left[0]
    note = "" if lobes.closed else "where the table has values"
    if not lobes.closed:
        rows = np.array([row for row in range(low, high + 1) if not bench.missing[row % bench.n]])
        best = rows[int(np.nanargmax(bench.levels[0, rows % bench.n]))]
        rows = np.arange(best - 1, best + 2)
    else:
        rows = np.arange(low, high + 1)
    level, place = top(bench.levels, rows)
    return _present("sidelobe_worst", level - bench.peak_db, at_deg=bench.bearing(place[0]), note=note)


def _ripple(bench, cut):
    levels = bench.levels
    spread = bench.peak_db[0] - np.nanmin(levels[0])
    if cut == "elevation":
        yield _absent("ripple", "an elevation cut is no omni")
    elif bench.missing.any():
        yield _absent("ripple", "rows are without a value")
    elif spread > OMNI_DB or bench.floor.any():
        yield _absent("ripple", f"the level varies by {spread:.1f} dB: not an omni")
    else:
        lowest, _ = main_peak(-levels, int(np.argmin(levels[0])), bench.step_deg)
        yield _present("ripple", bench.peak_db + lowest, note=f"peak to peak; +-{spread / 2:.2f} dB")


def _elevation(found, bench, cut, up):
    """Tilt, upper side lobe and null fill, which need to know where the horizon and the sky are."""
    keys = ("tilt", "sidelobe_upper", "null_fill")
    if cut != "elevation":
        said = "an azimuth cut has none" if cut else "not known to be an elevation cut"
        return [_absent(key, said) for key in keys]
    if found["peak_deg"].absent:
        return [_absent(key, "the beam has no single peak") for key in keys]
    off = bench.off_boresight(bench.peak_place)
    off = off[0] + _wrapped(off - off[0])
    assumed = "" if up else "; the beam is taken to point down"
    if not up and abs(off[0]) > half_width95(off):
        up = "falling" if off[0] > 0 else "growing"
    down = {"growing": -off, "falling": off}.get(up, np.abs(off))
    tilt = _present("tilt", down, note=bench.boresight_said + assumed)
    if not up:
        return [tilt, *(_absent(key, "which way is up is not known and the beam is level") for key in keys[1:])]
    above, below = ("right", "left") if up == "growing" else ("left", "right")
    return [
        tilt,
        _copy(found[f"sidelobe_{above}"], "sidelobe_upper"),
        _with_field(_copy(found[f"null_{below}"], "null_fill")),
    ]


def _copy(item, key):
    title, unit = FIGURES[key]
    return Figure(**{**vars(item), "key": key, "title": title, "unit": unit})


def _with_field(item):
    """The null fill also as a share of the field, as some state it."""
    return item if item.absent else Figure(**{**vars(item), "note": f"{10 ** (item.value / 20):.0%} of the peak's field"})


def _wrapped(degrees):
    return (degrees + 180) % 360 - 180
