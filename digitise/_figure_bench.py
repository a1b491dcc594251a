"""A table made ready to be measured: its peak first, with draws from its errors, peak and lobes."""

import numpy as np

from ._draws import draw_levels
from ._lobes import find_lobes
from ._measure import main_peak

__all__ = ["Bench", "wrapped"]


class Bench:
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
        """Rows from low to high, both included."""
        return np.arange(low, high + 1)

    def has_missing(self, rows):
        """Tell whether any of the rows is without a value."""
        return bool(self.missing[rows % self.n].any())


def wrapped(degrees):
    """Degrees from -180 to 180."""
    return (degrees + 180) % 360 - 180
