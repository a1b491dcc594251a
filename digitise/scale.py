"""The scale: how radius becomes level, from the user's values, marks, ring levels or the printed labels.

Stub: the choice of law and anchors follows.
"""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["Scale", "make_scale"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Scale:
    """Radius (rho, outermost ring = 1) -> level (dB as printed).

    law : one of settings.LAWS
    parameters : (k,) of the law: even (level at rho 1, dB per unit rho); field, power, log-periodic (level at
        rho_ref, rho_ref); rings: none
    covariance : (k, k)
    anchor_rho, anchor_db : (n,) the rings or points that fixed it, for the record and for law "rings"
    unit : "dB", "dBi", "dBd" or "" when unknown
    residual_px : rms misfit of the anchors, px of radius; NaN when they are exactly enough
    source : "outer-centre", "marks", "ring-levels" or "labels"
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

    def __post_init__(self):
        lock_arrays(self)

    def level(self, rho):
        """Level in dB at rho (array); -inf at or below the centre of a logarithmic law."""
        raise NotImplementedError

    def slope(self, rho):
        """d level / d rho, dB per unit rho (array, positive)."""
        raise NotImplementedError

    def rho(self, level_db):
        """Radius of a level (array); the inverse of `level`."""
        raise NotImplementedError

    def level_u(self, rho):
        """Standard uncertainty of the level from the anchors alone, dB (array)."""
        raise NotImplementedError

    @property
    def centre_db(self):
        """Level at the centre point: a number for even and rings, -inf for the others."""
        return float(self.level(np.zeros(1))[0])


def make_scale(grid, *, settings, labels=None):
    """Fix the `Scale` of a `Grid`; raises `NotReadError` naming the option that helps, or `UsageError`."""
    raise NotImplementedError
