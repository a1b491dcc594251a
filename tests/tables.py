"""Tables of patterns with a known formula, as a perfect reading would give them."""

import numpy as np

from digitise.table import build_table

__all__ = ["bearings", "table_of", "with_noise", "without"]


def bearings(n=360):
    """N even bearings from 0, degrees."""
    return np.arange(n) * 360 / n


def table_of(level_db, *, error95_db=0.02, floor_db=-60.0):
    """A table of levels (n,), dB; what lies below `floor_db` is at the chart's centre."""
    level_db = np.asarray(level_db, float)
    n = len(level_db)
    state = np.where(level_db < floor_db, "floor", "seen").astype("U8")
    return build_table(bearings(n), np.maximum(level_db, floor_db), np.broadcast_to(error95_db, n), state)


def without(table, rows):
    """The table with some rows missing."""
    chart, error, state = (
        np.array(column) for column in (table.chart_db, table.error95_db, table.state.astype("U8"))
    )
    chart[rows], error[rows], state[rows] = np.nan, np.nan, "missing"
    return build_table(table.angle_deg, chart, error, state)


def with_noise(table, rng, *, near_deg=0.0):
    """The table with normal errors of the size that it states, shared by rows nearer than `near_deg`."""
    n = len(table.angle_deg)
    noise = rng.standard_normal(n)
    if near_deg:
        away = np.minimum(table.angle_deg, 360 - table.angle_deg)
        noise = np.real(np.fft.ifft(np.fft.fft(noise) * np.fft.fft(np.exp(-0.5 * (away / near_deg) ** 2))))
        noise /= noise.std()
    chart = table.chart_db + noise * table.error95_db / 1.96
    return build_table(table.angle_deg, chart, table.error95_db, table.state)
