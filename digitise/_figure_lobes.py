"""Figures of side lobes and nulls, and those of an elevation cut: tilt, upper side lobe, null fill."""

import math

import numpy as np

from ._draws import half_width95
from ._figure import FIGURES, Figure, absent, present
from ._figure_bench import wrapped
from ._measure import bottom_place, top

__all__ = ["elevation", "lobes_and_nulls"]


def lobes_and_nulls(bench, cut):
    """First side lobes and nulls on both sides, the worst and the deepest, and the first-null width."""
    lobes = bench.lobes
    none = "the main lobe has no null" if lobes.closed else "no null before the rows without a value"
    for side, turns in (("left", lobes.left), ("right", lobes.right)):
        yield _null(f"null_{side}", bench, turns[0]) if turns else absent(f"null_{side}", none)
        if len(turns) < 2:
            yield absent(f"sidelobe_{side}", "one null only: no side lobe" if turns else none)
            continue
        end = turns[2] if len(turns) > 2 else turns[1]
        rows = bench.rows_between(*sorted((turns[0], end)))
        yield _lobe(f"sidelobe_{side}", bench, rows)
    nulls = lobes.all_nulls
    if nulls:
        yield _null("null_deepest", bench, *sorted(nulls, key=lambda row: bench.levels[0, row % bench.n]))
    else:
        yield absent("null_deepest", none)
    yield _null_width(bench, none)
    yield _worst(bench, none)


def _lobe(key, bench, rows):
    level, place = top(bench.levels, rows)
    return present(key, level - bench.peak_db, at_deg=bench.bearing(place[0]))


def _null(key, bench, row, *others):
    """A null at the depth of the table's lowest row; between rows it may be deeper.

    The nulls of the other rows are shallower as read, but may be the deepest in a draw.
    """
    low, high = _floor_run(bench, row)
    rows = _around_null(bench, row)
    place = (low + high) / 2 if high > low else bottom_place(bench.levels[:1], rows)[0][0]
    rows = np.concatenate([rows, *(_around_null(bench, other) for other in others)])
    level = np.nanmin(bench.levels[:, rows % bench.n], axis=1) - bench.peak_db
    bound = "at most" if bench.floor[row % bench.n] else ""
    return present(key, level, bound=bound, at_deg=bench.bearing(place))


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
        return absent("null_width", none)
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
        return present("null_width", np.full(len(bench.levels), 360.0), note=note)
    return present("null_width", (places[1] - places[0]) * bench.step_deg, extra=extra, note=note)


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
        return absent("sidelobe_worst", "one null only: no side lobe" if lobes.right or lobes.left else none)
    if not lobes.right or not lobes.left:
        return absent("sidelobe_worst", "rows without a value hide where the main lobe ends")
    low, high = lobes.right[0], bench.n + lobes.left[0]
    note = "" if lobes.closed else "where the table has values"
    if not lobes.closed:
        rows = np.array([row for row in range(low, high + 1) if not bench.missing[row % bench.n]])
        best = rows[int(np.nanargmax(bench.levels[0, rows % bench.n]))]
        rows = np.arange(best - 1, best + 2)
    else:
        rows = np.arange(low, high + 1)
    level, place = top(bench.levels, rows)
    return present("sidelobe_worst", level - bench.peak_db, at_deg=bench.bearing(place[0]), note=note)


def elevation(found, bench, cut, up):
    """Tilt, upper side lobe and null fill, which need to know where the horizon and the sky are."""
    keys = ("tilt", "sidelobe_upper", "null_fill")
    if cut != "elevation":
        said = "an azimuth cut has none" if cut else "not known to be an elevation cut"
        return [absent(key, said) for key in keys]
    if found["peak_deg"].absent:
        return [absent(key, "the beam has no single peak") for key in keys]
    off = bench.off_boresight(bench.peak_place)
    off = off[0] + wrapped(off - off[0])
    assumed = "" if up else "; the beam is taken to point down"
    if not up and abs(off[0]) > half_width95(off):
        up = "falling" if off[0] > 0 else "growing"
    down = {"growing": -off, "falling": off}.get(up, np.abs(off))
    tilt = present("tilt", down, note=bench.boresight_said + assumed)
    if not up:
        said = "which way is up is not known and the beam is level"
        return [tilt, *(absent(key, said) for key in keys[1:])]
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
    note = f"{10 ** (item.value / 20):.0%} of the peak's field"
    return item if item.absent else Figure(**{**vars(item), "note": note})
