"""Order statistics of small arrays, without the overhead of the general functions (which dominated the grid fit)."""

import numpy as np

__all__ = ["median", "quantile", "scatter"]

NORMAL_MAD = 1.4826  # standard deviation of a normal distribution over its median absolute deviation


def quantile(values, share):
    """The element below which this share of the values lies (no interpolation); 0 for an empty array."""
    flat = np.ravel(values)
    if not len(flat):
        return 0.0
    at = min(int(share * len(flat)), len(flat) - 1)
    return float(np.partition(flat, at)[at])


def median(values):
    """The upper median; 0 for an empty array."""
    return quantile(values, 0.5)


def scatter(values, centre=0.0):
    """Robust standard deviation about a centre."""
    return NORMAL_MAD * median(np.abs(np.ravel(values) - centre))
