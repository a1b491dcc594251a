"""What the user says of levels (marks, ring levels, outer and centre) as rings of known level, or a clear
refusal.
"""

from dataclasses import dataclass

import numpy as np

from .exceptions import UsageError

__all__ = ["Anchors", "anchors_from_marks", "anchors_from_ring_levels"]

MARK_REACH_PX = 5.0  # a click is 1 to 2 px rough, and twice that on a small screen
MIN_RING_U_PX = 0.02  # no drawn ring is known better: renderers snap lines to fractions of a pixel


@dataclass(frozen=True, eq=False, kw_only=True)
class Anchors:
    """Rings (or the centre, rho 0) of known level, outermost first: rho, rho_u and level_db of shape (n,)."""

    rho: np.ndarray
    rho_u: np.ndarray
    level_db: np.ndarray

    @classmethod
    def of(cls, grid, rings, level_db, *, rho_u_px=0.0):
        """Anchors on rings of `grid` by their indices; -1 stands for the centre."""
        rings = np.asarray(rings, int)
        least = np.hypot(MIN_RING_U_PX, rho_u_px) / grid.outer_px
        rho = np.where(rings >= 0, grid.ring_rho[rings], 0.0)
        rho_u = np.where(rings >= 0, np.hypot(grid.ring_rho_u[rings], least), least)
        order = np.argsort(-rho)
        return cls(rho=rho[order], rho_u=rho_u[order], level_db=np.asarray(level_db, float)[order])


def anchors_from_marks(grid, marks, *, enough=2):
    """The rings that the marks name: `Anchors`; raises `UsageError` naming the mark that cannot be right.

    enough : so many different rings are needed
    """
    named = {}
    for mark in marks:
        ring = _ring_of(grid, mark)
        other = named.setdefault(ring, mark)
        if other.level_db != mark.level_db:
            raise UsageError(
                f"marks {_said(other)} and {_said(mark)} give one ring two levels",
                remedy="take one of them away",
                stage="scale",
            )
    anchors = Anchors.of(grid, list(named), [mark.level_db for mark in named.values()])
    if len(named) < enough:
        raise UsageError(
            f"{'the mark names' if len(marks) == 1 else 'the marks all name'} one ring",
            remedy="add a --mark on another ring",
            stage="scale",
        )
    check_fall(anchors, "--mark")
    return anchors


def check_fall(anchors, option):
    """Refuse levels that do not fall from the outside in."""
    for k, step in enumerate(np.diff(anchors.level_db)):
        if step >= 0:
            raise UsageError(
                f"{option} levels do not fall inward: {anchors.level_db[k]:g} dB, "
                f"then {anchors.level_db[k + 1]:g} dB",
                remedy="write attenuations with a minus sign, and check each level",
                stage="scale",
            )


def anchors_from_ring_levels(grid, ring_levels):
    """`Anchors` of levels given ring by ring, outermost first; raises `UsageError` when their number
    differs.
    """
    n = len(grid.ring_rho)
    if len(ring_levels) != n:
        radii = ", ".join(f"{rho * grid.outer_px:.0f}" for rho in grid.ring_rho)
        raise UsageError(
            f"--ring-levels gives {len(ring_levels)} levels, but {n} rings were found (radii {radii} px)",
            remedy="give one level a ring, outermost first, or use --mark",
            stage="scale",
        )
    return Anchors.of(grid, np.arange(n), ring_levels)


def _ring_of(grid, mark):
    """Index of the ring that a mark names; -1 for the centre."""
    x0, y0 = grid.centre_x, grid.centre_y
    if np.hypot(mark.x_px - x0, mark.y_px - y0) <= MARK_REACH_PX:
        return -1
    rho, plane_deg = grid.to_plane(mark.x_px, mark.y_px)
    x, y = grid.to_picture(grid.ring_rho, plane_deg)
    off_px = np.hypot(x - mark.x_px, y - mark.y_px)
    ring = int(np.argmin(off_px))
    if off_px[ring] > MARK_REACH_PX:
        radius = np.hypot(mark.x_px - x0, mark.y_px - y0)
        ring_radius = np.hypot(x[ring] - x0, y[ring] - y0)
        raise UsageError(
            f"mark {_said(mark)} lies {radius:.0f} px from the centre, "
            f"but the nearest ring at {ring_radius:.0f} px",
            remedy="put the mark on a drawn ring",
            stage="scale",
        )
    return ring


def _said(mark):
    return f"{mark.x_px:g},{mark.y_px:g}={mark.level_db:g}"
