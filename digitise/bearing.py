"""The bearing: where 0 degrees is printed and which way angles grow.

Stub: the reading of rim labels follows.
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["Bearing", "make_bearing"]


@dataclass(frozen=True, kw_only=True)
class Bearing:
    """Printed bearing <-> chart-plane angle.

    zero_deg : plane angle at which 0 is printed (0 = chart's up, clockwise); turn : "cw" or "ccw"
    u_deg : standard uncertainty of the zero; source : "told", "labels" or "assumed"
    signed : the chart prints -180..180 rather than 0..360 (kept for the record)
    reasons : tuple of review.Reason
    """

    zero_deg: float
    turn: str
    u_deg: float
    source: str
    signed: bool = False
    reasons: tuple = ()

    def to_plane(self, bearing_deg):
        """Plane angle, 0 to 360, of printed bearings (array)."""
        sign = 1.0 if self.turn == "cw" else -1.0
        return np.mod(self.zero_deg + sign * np.asarray(bearing_deg, float), 360.0)

    def from_plane(self, plane_deg):
        """Printed bearing, 0 to 360, of plane angles (array)."""
        sign = 1.0 if self.turn == "cw" else -1.0
        return np.mod(sign * (np.asarray(plane_deg, float) - self.zero_deg), 360.0)


def make_bearing(grid, *, settings, labels=None):
    """Fix the `Bearing`; raises `NotReadError` naming --zero and --turn when neither told nor readable."""
    raise NotImplementedError
