"""The scale: how radius becomes level, from the user's values, marks, ring levels or the printed labels.

What the user told wins; labels fill in what was not told. A law is taken as recognised when the rings of
known level fit it to a pixel and no other law fits about as well; in doubt the scale carries a review reason.
"""

from dataclasses import dataclass

import numpy as np

from ._laws import LOG_DB, Monotone
from .frozen import lock_arrays

__all__ = ["Scale", "make_scale"]

RING_U_RHO = (
    1e-3  # standard uncertainty of a ring's radius where none was kept: 0.3 px at an outer radius of 300 px
)


@dataclass(frozen=True, eq=False, kw_only=True)
class Scale:
    """Radius (rho, outermost ring = 1) -> level (dB as printed).

    law : one of settings.LAWS
    parameters : (k,) of the law: even (level at rho 1, dB per unit rho); field, power, log-periodic (level at
        rho_ref, rho_ref); rings: none
    covariance : (k, k)
    anchor_rho, anchor_db : (n,) the rings or points that fixed it, for the record and for law "rings"
    anchor_rho_u : (n,) standard uncertainties of anchor_rho; None when not kept
    unit : "dB", "dBi", "dBd" or "" when unknown
    residual_px : rms misfit of the anchors, px of radius; NaN when they are exactly enough
    source : "outer-centre", "marks", "ring-levels", "labels" or "record"
    reasons : tuple of review.Reason
    """

    law: str
    parameters: np.ndarray
    covariance: np.ndarray
    anchor_rho: np.ndarray
    anchor_db: np.ndarray
    unit: str
    residual_px: float
    source: str
    reasons: tuple = ()
    anchor_rho_u: np.ndarray | None = None

    def __post_init__(self):
        lock_arrays(self)

    def level(self, rho):
        """Level in dB at rho (array); -inf at or below the centre of a logarithmic law."""
        rho = np.asarray(rho, float)
        if self.law == "rings":
            return self._curve()(rho)
        if self.law == "even":
            return self.parameters[0] + self.parameters[1] * (rho - 1.0)
        above = rho > 0
        safe = np.where(above, rho, 1.0)
        return np.where(
            above, self.parameters[0] + LOG_DB[self.law] * np.log(safe / self.parameters[1]), -np.inf
        )

    def slope(self, rho):
        """d level / d rho, dB per unit rho (array, positive); inf at or below the centre of a logarithmic
        law.
        """
        rho = np.asarray(rho, float)
        if self.law == "rings":
            return self._curve().slope(rho)
        if self.law == "even":
            return np.full_like(rho, self.parameters[1])
        above = rho > 0
        return np.where(above, LOG_DB[self.law] / np.where(above, rho, 1.0), np.inf)

    def rho(self, level_db):
        """Radius of a level (array); the inverse of `level`."""
        level_db = np.asarray(level_db, float)
        if self.law == "rings":
            return self._curve().inverse(level_db)
        if self.law == "even":
            return 1.0 + (level_db - self.parameters[0]) / self.parameters[1]
        return self.parameters[1] * np.exp((level_db - self.parameters[0]) / LOG_DB[self.law])

    def level_u(self, rho):
        """Standard uncertainty of the level from the anchors alone, dB (array)."""
        rho = np.asarray(rho, float)
        if self.law == "rings":
            rising = slice(None, None, -1)  # anchors are kept outermost first
            known = (
                self.anchor_rho_u
                if self.anchor_rho_u is not None
                else np.full(len(self.anchor_rho), RING_U_RHO)
            )
            return self.slope(rho) * np.interp(rho, self.anchor_rho[rising], known[rising])
        if self.law == "even":
            gradient = np.stack([np.ones_like(rho), rho - 1.0], axis=-1)
        else:
            gradient = np.stack(
                [np.ones_like(rho), np.full_like(rho, -LOG_DB[self.law] / self.parameters[1])], axis=-1
            )
        return np.sqrt(np.maximum(np.einsum("...i,ij,...j->...", gradient, self.covariance, gradient), 0.0))

    @property
    def centre_db(self):
        """Level at the centre point: a number for even and rings, -inf for the others."""
        return float(self.level(np.zeros(1))[0])

    def _curve(self):
        return Monotone(self.anchor_rho[::-1], self.anchor_db[::-1])


def make_scale(grid, *, settings, labels=None):
    """Fix the `Scale` of a `Grid`; raises `NotReadError` naming the option that helps, or `UsageError`.

    grid : Grid; settings : Settings; labels : Labels or None when none were looked for
    """
    from ._scale_told import scale_from_told

    if settings.scale is not None:
        return settings.scale
    told = scale_from_told(grid, settings=settings, labels=labels)
    if told is not None:
        return told
    from ._scale_read import scale_from_labels

    return scale_from_labels(grid, settings=settings, labels=labels)
