"""Figures of the main beam and of the whole circle: peak, beamwidths, squint, front-to-back, ripple."""

import math

import numpy as np

from ._figure import absent, present
from ._figure_bench import wrapped
from ._lobes import HALF_POWER_DB
from ._measure import crossing, level_at, main_peak

__all__ = ["front_to_back", "peak", "ripple", "widths"]

OMNI_DB = 6.0  # an azimuth pattern that varies less is called an omni here; common practice, no source
NO_PEAK_SHARE = 0.25  # share of rows that reach the peak within the error, beyond which it has no bearing
TEN_DB = 10.0


def peak(bench, cut):
    """Level and bearing of the peak."""
    yield present("peak_db", bench.peak_db)
    if bench.has_missing(np.array([-1, 1])):
        yield absent("peak_deg", "the largest level stands beside rows without a value")
        return
    first = bench.levels[0]
    rival = first + bench.error95_db >= bench.peak_db[0] - bench.error95_db[0]
    share = np.mean(rival)
    if share > NO_PEAK_SHARE:
        yield absent("peak_deg", f"{share:.0%} of the rows reach the peak within the error")
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
    at_deg = bench.bearing(bench.peak_place)
    yield present("peak_deg", at_deg[0] + wrapped(at_deg - at_deg[0]), note=note)


def widths(bench, cut):
    """Beamwidths and the squint."""
    for key, drop in (("beamwidth", HALF_POWER_DB), ("beamwidth3", 3.0), ("beamwidth10", TEN_DB)):
        right = crossing(bench.levels, 0, bench.peak_db - drop, 1)
        left = crossing(bench.levels, 0, bench.peak_db - drop, -1)
        if math.isfinite(right[0]) and math.isfinite(left[0]):
            yield present(key, (right + left) * bench.step_deg)
        else:
            yield absent(key, _no_width(bench, drop))
        if key == "beamwidth":
            middle = bench.off_boresight((right - left) / 2)
            if math.isfinite(middle[0]):
                yield present("squint", middle[0] + wrapped(middle - middle[0]), note=bench.boresight_said)
            else:
                yield absent("squint", "there is no half-power beam")


def _no_width(bench, drop):
    lowest = bench.peak_db[0] - np.nanmin(bench.levels[0])
    if bench.missing.any():
        return "rows without a value lie in the way"
    if bench.floor.any():
        return f"the trace goes below the chart's centre before -{drop:.4g} dB"
    return f"the level stays within {lowest:.1f} dB of the peak all round"


def front_to_back(bench, cut):
    """Compare the peak with the level behind it, and with the largest level 150 to 210 degrees from it."""
    half, wing = bench.n / 2, 30 / bench.step_deg
    back = bench.peak_place + half
    behind = bench.rows_between(math.floor(back[0]), math.ceil(back[0]))
    if bench.has_missing(behind):
        yield absent("ftb", "there is no value behind the peak")
    else:
        bound = "at least" if bench.floor[behind % bench.n].any() else ""
        yield present("ftb", bench.peak_db - level_at(bench.levels, back), bound=bound)
    rows = bench.rows_between(math.ceil(back[0] - wing), math.floor(back[0] + wing))
    if bench.has_missing(rows) or len(rows) == 0:
        yield absent("ftb30", "rows without a value lie within 30 degrees of the back")
        return
    part = bench.levels[:, rows % bench.n]
    largest, row = part.max(axis=1), rows[int(np.argmax(part[0]))]
    edges = [level_at(bench.levels, np.full(len(back), back[0] + way * wing)) for way in (-1, 1)]
    largest = np.fmax(largest, np.fmax(*edges))
    bound = "at least" if bench.floor[row % bench.n] else ""
    yield present("ftb30", bench.peak_db - largest, bound=bound, at_deg=bench.bearing(row))


def ripple(bench, cut):
    """Largest less smallest level, of an omni."""
    levels = bench.levels
    spread = bench.peak_db[0] - np.nanmin(levels[0])
    if cut == "elevation":
        yield absent("ripple", "an elevation cut is no omni")
    elif bench.missing.any():
        yield absent("ripple", "rows are without a value")
    elif spread > OMNI_DB or bench.floor.any():
        yield absent("ripple", f"the level varies by {spread:.1f} dB: not an omni")
    else:
        lowest, _ = main_peak(-levels, int(np.argmin(levels[0])), bench.step_deg)
        yield present("ripple", bench.peak_db + lowest, note=f"peak to peak; +-{spread / 2:.2f} dB")
