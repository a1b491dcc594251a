"""Grids made from numbers, for the tests of what follows the grid."""

import numpy as np

from digitise.grid import Grid

OUTER_PX = 250.0
CENTRE = 300.0, 310.0


def plane_grid(ring_rho, *, ring_u_px=0.03, spoke_step_deg=30.0, skew_deg=0.0, outer_px=OUTER_PX):
    """A `Grid` without distortion, turned by the skew."""
    turn = np.radians(skew_deg)
    homography = np.eye(3)
    homography[:2, :2] = outer_px * np.array([[np.cos(turn), -np.sin(turn)], [np.sin(turn), np.cos(turn)]])
    homography[:2, 2] = CENTRE
    ring_rho = np.asarray(ring_rho, float)
    return Grid(
        homography=homography,
        covariance=np.eye(8) * 1e-6,
        ring_rho=ring_rho,
        ring_rho_u=np.full(len(ring_rho), ring_u_px / outer_px),
        ring_drawn=np.ones(len(ring_rho)),
        ring_width_px=np.ones(len(ring_rho)),
        spoke_deg=np.arange(0, 360, spoke_step_deg) if np.isfinite(spoke_step_deg) else np.zeros(0),
        spoke_step_deg=spoke_step_deg,
        spoke_width_px=1.0,
        arc_deg=np.array([0.0, 360.0]),
        skew_deg=skew_deg,
        skew_u_deg=0.02,
        residual_px=0.1,
    )
