"""The trade's figures of one table: each a value with its error and unit, or absent with the reason.

Definitions. Half power is -3.0103 dB from the lobe's peak (IEEE Std 145 wording), not from a row that noise
made the largest; the width at exactly -3 dB, as some datasheets state it, stands beside it. Levels of lobes
and nulls are relative to the main lobe's peak and negative; front-to-back ratios are positive. "Right" is
where the printed bearings grow. The worst side lobe is the largest level outside the first nulls, back lobe
included. Ripple is peak to peak.

Errors are half-widths of 95 % intervals, by Monte Carlo over the rows' errors (JCGM 101:2008; what is
assumed about how rows hang together is in `_draws`). Which lobes and nulls there are is settled once, on
the table as read. A figure says nothing of the chart's own accuracy, nor of the bearing error that all rows
share.
"""

import math
from dataclasses import dataclass

import numpy as np

from ._figure import FIGURES, Figure, absent
from ._figure_beam import front_to_back, peak, ripple, widths
from ._figure_bench import Bench
from ._figure_lobes import elevation, lobes_and_nulls

__all__ = ["CUTS", "FIGURES", "Figure", "Figures", "figures_of"]

CUTS = ("azimuth", "elevation")


@dataclass(frozen=True, kw_only=True)
class Figures:
    """All figures of one table, in the order of `FIGURES`; `figures["beamwidth"]` is one `Figure`."""

    found: tuple

    def __getitem__(self, key):
        return next(item for item in self.found if item.key == key)

    def __iter__(self):
        return iter(self.found)

    def to_json(self):
        """Plain values: key -> value, error95, unit and what there is to add; value null with a reason."""
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
    up : "growing" or "falling", the way the printed bearings go from the horizon up; "" takes a tilted beam
        to point below the horizon
    boresight_deg : printed bearing of the mechanical boresight (in elevation: of the horizon in front);
        None for the nearest of 0, 90, 180 and 270 to the peak
    n_draws, seed : of the Monte Carlo; the same table always gives the same figures

    """
    if cut not in ("", *CUTS) or up not in ("", "growing", "falling"):
        raise ValueError(f"cut {cut!r} or up {up!r} is not one of the known words")
    if not np.isfinite(table.chart_db).any():
        return Figures(found=tuple(absent(key, "the table has no values") for key in FIGURES))
    bench = Bench(table, boresight_deg, n_draws, seed)
    found = {}
    for part in (peak, widths, front_to_back, lobes_and_nulls, ripple):
        found.update({item.key: item for item in part(bench, cut)})
    found.update({item.key: item for item in elevation(found, bench, cut, up)})
    return Figures(found=tuple(found[key] for key in FIGURES))
