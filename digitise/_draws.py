"""Possible tables behind one table: draws from the rows' own errors (Monte Carlo, JCGM 101:2008).

A table holds one error a row and not how the errors of two rows hang together. The parts of a reading's
budget tell the kinds: noise of the picture is independent from row to row; what pulls a line (a crossing, a
pixel pattern, a filled side) reaches over a few rows; scale and grid errors are common to all rows (a wrong
ring radius lifts every level, a displaced centre lifts one side and lowers the other). The assumption here
is a fixed share of each row's variance for each kind. Were all errors common, differences of near levels
would come out too sure; were all independent, so would what is averaged over rows; the mixture leaves
neither out.
"""

import numpy as np

__all__ = ["COVERAGE_FACTOR", "draw_levels", "half_width95"]

SHARES = {
    "row": 0.25,
    "near": 0.4,
    "common": 0.35,
}  # of a row's variance; a judgement, held against read charts
NEAR_DEG = 3.0  # standard deviation of the weight by which near rows share an error
OFFSET_SHARE = 1 / 3  # of the common variance, the same for all rows; the rest is a displaced centre
COVERAGE_FACTOR = 1.96  # 95 % of a normal distribution (JCGM 100:2008, table G.1)
MOST_FAILED = 0.05  # share of draws without a value beyond which a figure is undecided


def draw_levels(levels_db, error95_db, *, n_draws, seed):
    """Levels as read and as they may be, dB.

    Parameters
    ----------
    levels_db, error95_db : (n,) evenly around the circle; NaN stays NaN
    n_draws : how many; seed : of the random generator, so that a figure is always the same

    Returns
    -------
    (1 + n_draws, n) dB, the levels as read first

    """
    n = len(levels_db)
    rng = np.random.default_rng(seed)
    turn = 2 * np.pi * np.arange(n) / n
    offset, tilt = np.sqrt(OFFSET_SHARE), np.sqrt(1 - OFFSET_SHARE)
    shapes = np.stack([np.full(n, offset), tilt * np.cos(turn), tilt * np.sin(turn)])
    noise = np.zeros((1 + n_draws, n))
    noise[1:] = np.sqrt(SHARES["row"]) * rng.standard_normal((n_draws, n))
    noise[1:] += np.sqrt(SHARES["near"]) * _smooth(rng.standard_normal((n_draws, n)))
    noise[1:] += np.sqrt(SHARES["common"]) * rng.standard_normal((n_draws, 3)) @ shapes
    noise *= np.asarray(error95_db) / COVERAGE_FACTOR
    noise += levels_db
    return noise


def _smooth(noise):
    """Noise that near rows share, of variance 1 a row."""
    n = noise.shape[1]
    away_deg = np.arange(n) * 360 / n
    weight = np.exp(-0.5 * (np.minimum(away_deg, 360 - away_deg) / NEAR_DEG) ** 2)
    weight /= np.sqrt(np.sum(weight**2))
    return np.fft.irfft(np.fft.rfft(noise) * np.fft.rfft(weight), n)


def half_width95(values):
    """Half-width of the interval about the first value that holds 95 % of the others; inf if too many failed.

    Taken about the value itself and not about the draws' mean: what noise does to a maximum or a minimum on
    average belongs to the error too.
    """
    away = np.abs(values[1:] - values[0])
    away[np.isnan(away)] = np.inf
    return float(np.quantile(away, 1 - MOST_FAILED, method="higher"))
