"""The radial laws of polar charts: level against radius, and their weighted fit to rings of known level.

Level here is in dB, rho is the radius with the outermost ring at 1. The logarithmic laws differ in one
number, the dB per factor e of radius: field 20 log10(e), power 10 log10(e), log-periodic 2 / ln(1 / 0.89)
(the grid of the amateur handbooks, whose lines are "spaced according to the logarithm of 0.89 times the value
of the signal voltage").
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["LOG_DB", "LawFit", "Monotone", "fit_law", "fit_laws"]

LOG_DB = {"field": 20 / np.log(10), "power": 10 / np.log(10), "log-periodic": -2 / np.log(0.89)}


@dataclass(frozen=True, eq=False, kw_only=True)
class LawFit:
    """One law fitted to rings.

    law, parameters, covariance : as in `Scale`
    misfit_rho : (n,) ring radius minus the law's radius of its level
    """

    law: str
    parameters: np.ndarray
    covariance: np.ndarray
    misfit_rho: np.ndarray

    @property
    def rms_rho(self):
        """Root mean square misfit, rho; NaN when the rings are just enough."""
        n_free = 2 if self.law == "even" else 1
        misfit = self.misfit_rho
        return float(np.sqrt(np.mean(misfit**2))) if len(misfit) > n_free else float("nan")

    @property
    def worst(self):
        """Index of the ring that fits worst."""
        return int(np.argmax(np.abs(self.misfit_rho)))


def fit_law(law, rho, rho_u, level_db):
    """Weighted least squares of radius on level: a `LawFit`.

    rho, rho_u, level_db : (n,) radii, their standard uncertainties (> 0) and levels; n >= 2 for even, 1 for
        the others

    Radii are what is uncertain, levels are exact, so the radius is the dependent variable. The covariance is
    that of the stated radius errors, raised to what the residuals show when these are larger (Bevington &
    Robinson, Data Reduction and Error Analysis, ch. 6: reduced chi-squared).
    """
    rho, rho_u, level_db = (np.asarray(value, float) for value in (rho, rho_u, level_db))
    weight = rho_u**-2.0
    if law == "even":
        return _fit_even(rho, weight, level_db)
    top = int(np.argmax(level_db))
    shape = np.exp((level_db - level_db[top]) / LOG_DB[law])  # radius over that of the highest ring
    norm = np.sum(weight * shape**2)
    rho_ref = np.sum(weight * shape * rho) / norm
    misfit = rho - rho_ref * shape
    covariance = np.zeros((2, 2))
    covariance[1, 1] = _spread(misfit, weight, 1) / norm
    return LawFit(
        law=law, parameters=np.array([level_db[top], rho_ref]), covariance=covariance, misfit_rho=misfit
    )


def fit_laws(laws, rho, rho_u, level_db):
    """`LawFit` of every law, best first; the misfits compare fairly only with three rings or more."""
    fits = [fit_law(law, rho, rho_u, level_db) for law in laws]
    return sorted(fits, key=lambda fit: float(np.sum(fit.misfit_rho**2)))


def _fit_even(rho, weight, level_db):
    shift = np.sum(weight * level_db) / np.sum(weight)  # centred, so that the two unknowns do not correlate
    x = level_db - shift
    mean, slope = np.sum(weight * rho) / np.sum(weight), np.sum(weight * x * rho) / np.sum(weight * x**2)
    misfit = rho - mean - slope * x
    excess = _spread(misfit, weight, 2)
    var_mean, var_slope = excess / np.sum(weight), excess / np.sum(weight * x**2)
    # level at rho 1 = shift + (1 - mean) / slope; dB per rho = 1 / slope
    jacobian = np.array([[-1 / slope, -(1 - mean) / slope**2], [0.0, -1 / slope**2]])
    covariance = jacobian @ np.diag([var_mean, var_slope]) @ jacobian.T
    parameters = np.array([shift + (1 - mean) / slope, 1 / slope])
    return LawFit(law="even", parameters=parameters, covariance=covariance, misfit_rho=misfit)


def _spread(misfit, weight, n_free):
    """Factor by which the residuals ask for larger variances, 1 or more."""
    n = len(misfit)
    return max(1.0, float(np.sum(weight * misfit**2)) / (n - n_free)) if n > n_free else 1.0


class Monotone:
    """Monotone piecewise cubic through given points (Fritsch & Butland 1984), with straight ends beyond them.

    x, y : (n,) both strictly rising, n >= 2
    """

    def __init__(self, x, y):
        self.x, self.y = np.asarray(x, float), np.asarray(y, float)
        self.h = np.diff(self.x)
        self.secant = np.diff(self.y) / self.h
        self.d = self._derivatives()

    def _derivatives(self):
        h, s = self.h, self.secant
        if len(s) == 1:
            return np.repeat(s, 2)
        w1, w2 = 2 * h[1:] + h[:-1], h[1:] + 2 * h[:-1]
        inner = (w1 + w2) / (w1 / s[:-1] + w2 / s[1:])  # weighted harmonic mean of the two secants
        return np.concatenate([[_end(h[0], h[1], s[0], s[1])], inner, [_end(h[-1], h[-2], s[-1], s[-2])]])

    def __call__(self, x):
        """Values at x (array)."""
        k, t, outside = self._place(x)
        h, t2 = self.h[k], t * t
        inside = (
            self.y[k] * (1 + 2 * t) * (1 - t) ** 2
            + h * self.d[k] * t * (1 - t) ** 2
            + self.y[k + 1] * t2 * (3 - 2 * t)
            - h * self.d[k + 1] * t2 * (1 - t)
        )
        return inside + outside * self._end_slope(outside)

    def slope(self, x):
        """Derivative at x (array), positive."""
        k, t, outside = self._place(x)
        inside = (
            6 * t * (1 - t) * self.secant[k]
            + self.d[k] * (1 - t) * (1 - 3 * t)
            + self.d[k + 1] * t * (3 * t - 2)
        )
        return np.where(outside != 0, self._end_slope(outside), inside)

    def inverse(self, y):
        """x at values y (array), by bisection within the right piece."""
        y = np.asarray(y, float)
        low = np.where(y < self.y[0], self.x[0] - (self.y[0] - y) / self._end_slope(-1.0), self.x[0])
        high = np.where(y > self.y[-1], self.x[-1] + (y - self.y[-1]) / self._end_slope(1.0), self.x[-1])
        for _ in range(60):
            middle = 0.5 * (low + high)
            below = self(middle) < y
            low, high = np.where(below, middle, low), np.where(below, high, middle)
        return 0.5 * (low + high)

    def _place(self, x):
        """Piece, place in it 0 to 1, and distance beyond the ends (signed)."""
        x = np.asarray(x, float)
        held = np.clip(x, self.x[0], self.x[-1])
        k = np.clip(np.searchsorted(self.x, held, side="right") - 1, 0, len(self.h) - 1)
        return k, (held - self.x[k]) / self.h[k], x - held

    def _end_slope(self, outside):
        """Slope of the straight ends: the curve's own where it has one, else that of the last piece."""
        ends = [
            d if d > 0.05 * s else s for d, s in ((self.d[0], self.secant[0]), (self.d[-1], self.secant[-1]))
        ]
        return np.where(np.asarray(outside) < 0, ends[0], ends[1])


def _end(h0, h1, s0, s1):
    """Three-point derivative at an end, kept monotone (Fritsch & Carlson 1980)."""
    d = ((2 * h0 + h1) * s0 - h0 * s1) / (h0 + h1)
    return min(max(d, 0.0), 3 * s0)
