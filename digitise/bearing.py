"""The bearing: where 0 degrees is printed and which way angles grow.

What the user told wins; the rim labels give the rest. Where neither tells, 0 at the top and clockwise is
assumed and the bearing carries a review reason.
"""

from dataclasses import dataclass

import numpy as np

from .exceptions import NotReadError

__all__ = ["Bearing", "make_bearing"]

ON_SPOKE_DEG = 0.01  # a told angle that is a multiple of the spoke step, but for rounding
RIGHT_ANGLE_DEG = 90.0


@dataclass(frozen=True, kw_only=True)
class Bearing:
    """Printed bearing <-> chart-plane angle.

    zero_deg : plane angle at which 0 is printed (0 = chart's up, clockwise); turn : "cw" or "ccw"
    u_deg : standard uncertainty of the zero; source : "told", "labels", "assumed" or "record"
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
    """Fix the `Bearing` of a `Grid`; raises `NotReadError` naming --zero and --turn when labels are not read.

    grid : Grid; settings : Settings; labels : Labels or None when none were looked for
    """
    if settings.bearing is not None:
        return settings.bearing
    zero_deg = None if settings.zero_deg is None else _told_zero(grid, settings.zero_deg)
    if zero_deg is not None and settings.turn is not None:
        return Bearing(zero_deg=zero_deg, turn=settings.turn, u_deg=float(grid.skew_u_deg), source="told")
    if labels is None or not labels.engine:
        lacking = [name for name, told in (("--zero", zero_deg), ("--turn", settings.turn)) if told is None]
        raise NotReadError(
            "where the chart prints 0 degrees and which way angles grow is not told, "
            "and labels are not read here",
            remedy=f'give {" and ".join(lacking)}, or install "digitise[labels]"',
            stage="bearing",
        )
    from ._bearing_read import bearing_from_labels

    return bearing_from_labels(grid, labels, zero_deg=zero_deg, turn=settings.turn)


def _told_zero(grid, page_deg):
    """Plane angle of a told zero.

    A word, or an angle that spokes stand at, means the chart's own direction: a skewed chart has its 0 at its
    own top. Any other angle was measured on the picture, so it is carried through the grid.
    """
    step = grid.spoke_step_deg if np.isfinite(grid.spoke_step_deg) else RIGHT_ANGLE_DEG
    for unit in (RIGHT_ANGLE_DEG, step):
        if abs(page_deg / unit - round(page_deg / unit)) * unit < ON_SPOKE_DEG:
            return float(page_deg % 360)
    angle, reach = np.radians(page_deg), 0.5 * grid.outer_px
    x, y = grid.centre_x + reach * np.sin(angle), grid.centre_y - reach * np.cos(angle)
    return float(grid.to_plane(x, y)[1])
