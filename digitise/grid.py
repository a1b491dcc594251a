"""The chart's grid: centre, rings, spokes, skew, stretch and mild perspective, to sub-pixel, with covariance.

The flow: edge gradients give a first centre and stretch (`_ring_votes`); a radial profile in that plane lists the
rings (`_ring_profile`) and one over angle the spokes (`_spokes`); sub-pixel points on all of them (`_ring_points`)
are fitted together (`_ring_fit`), and rings whose points do not run true are dropped again.
"""

from dataclasses import dataclass

import cv2
import numpy as np

from ._ring_choice import choose_rings
from ._ring_fit import fit_plane, homography_of, parameters_of
from ._ring_points import ring_points, spoke_points
from ._ring_profile import centre_profile, drawn_arc, ring_profile
from ._ring_votes import find_edges, fit_hub
from ._spokes import find_spokes
from ._unwrap import outer_radius, shrink
from .exceptions import NotReadError
from .frozen import lock_arrays
from .review import reason

__all__ = ["Grid", "find_grid"]

WORK_OUTER_PX = 320.0  # rings are looked for on a picture reduced to this outer radius
HUB_PIXELS = 0.12e6  # and the first centre on one of this many px
MIN_DRAWN = 0.15  # share of a ring's arc: less is an accident
IN_LINE_PX = 0.15  # rms of the strong rings about a first plane that is good enough
MAX_TILT_RESIDUAL_PX = 1.0  # a perspective from a first plane is believed below this rms
SETTLED_PX = 0.1  # the lines are not measured again once the plane moves less
AVOID_PX = 2.5  # ring points keep this far from spokes
STRONG, WEAK = 0.4, 0.15  # mean vote of the sectors for a ring


@dataclass(frozen=True, eq=False, kw_only=True)
class Grid:
    """The map between picture pixels and the chart plane, and the rings and spokes drawn on it.

    The chart plane has its origin at the chart's centre, the outermost ring at radius rho = 1, and plane angles
    that grow clockwise from the chart's own "up" (skew removed): u = rho sin(plane), v = -rho cos(plane).

    homography : (3, 3), chart plane (u, v, 1) -> picture px (x, y, 1) up to scale, last entry 1
    covariance : (8, 8), of the first eight entries, row by row
    ring_rho : (n,) radii of the drawn rings, falling, the first 1.0 (the outermost)
    ring_rho_u : (n,) their standard uncertainties
    ring_drawn : (n,) share of the ring's arc that is inked, 0 to 1 (a dashed ring has about 0.5)
    ring_width_px : (n,) drawn line width, px
    spoke_deg : (m,) plane angles of the drawn spokes, rising, 0 to 360
    spoke_step_deg : their common step, NaN when none was found
    spoke_width_px : drawn line width, px, NaN when none was found
    arc_deg : (2,) plane angles between which the chart is drawn, clockwise from first to second; (0, 360) whole
    skew_deg : turn of the chart on the picture, clockwise, that was removed (within +-10)
    skew_u_deg : its standard uncertainty
    residual_px : rms distance of the ring and spoke points from the model
    reasons : tuple of review.Reason
    """

    homography: np.ndarray
    covariance: np.ndarray
    ring_rho: np.ndarray
    ring_rho_u: np.ndarray
    ring_drawn: np.ndarray
    ring_width_px: np.ndarray
    spoke_deg: np.ndarray
    spoke_step_deg: float
    spoke_width_px: float
    arc_deg: np.ndarray
    skew_deg: float
    skew_u_deg: float
    residual_px: float
    reasons: tuple = ()

    def __post_init__(self):
        lock_arrays(self)

    @property
    def centre_x(self):
        """Picture x of the centre, px."""
        return float(self.homography[0, 2])

    @property
    def centre_y(self):
        """Picture y of the centre, px."""
        return float(self.homography[1, 2])

    @property
    def outer_px(self):
        """Mean radius of the outermost ring on the picture, px."""
        return outer_radius(self.homography)

    def to_picture(self, rho, plane_deg):
        """Picture x, y (px) of chart-plane points; arrays broadcast."""
        angle = np.radians(plane_deg)
        u, v = rho * np.sin(angle), -rho * np.cos(angle)
        h = self.homography
        w = h[2, 0] * u + h[2, 1] * v + h[2, 2]
        return (h[0, 0] * u + h[0, 1] * v + h[0, 2]) / w, (h[1, 0] * u + h[1, 1] * v + h[1, 2]) / w

    def to_plane(self, x_px, y_px):
        """Chart-plane rho and plane angle (degrees, 0 to 360) of picture points; arrays broadcast."""
        h = np.linalg.inv(self.homography)
        w = h[2, 0] * x_px + h[2, 1] * y_px + h[2, 2]
        u = (h[0, 0] * x_px + h[0, 1] * y_px + h[0, 2]) / w
        v = (h[1, 0] * x_px + h[1, 1] * y_px + h[1, 2]) / w
        return np.hypot(u, v), np.degrees(np.arctan2(u, -v)) % 360


def find_grid(picture, box):
    """Fit the grid of the chart at `box` on a `Picture`; raises `NotReadError` when there is none."""
    rgb = np.ascontiguousarray(picture.rgb[box.y : box.y + box.h, box.x : box.x + box.w])
    full = cv2.cvtColor(rgb, cv2.COLOR_RGB2GRAY).astype(np.float32)
    work, to_full = shrink(full, WORK_OUTER_PX / box.outer_px)
    plane = _first_plane(work, np.linalg.inv(to_full), box)
    if plane is None:
        raise _no_grid(picture)
    plane = centre_profile(work, plane)
    _, arc = drawn_arc(ring_profile(work, plane))
    spokes = find_spokes(work, plane, arc_deg=arc)
    plane = _align(work, plane, spokes, arc)
    if plane is None:
        raise _no_grid(picture)
    spokes = find_spokes(work, plane, arc_deg=arc)
    profile = ring_profile(work, plane, spoke_deg=spokes.drawn_deg)
    blocks, arc = drawn_arc(profile)
    rho, score, _ = profile.peaks(WEAK, blocks)
    plane = to_full @ plane
    plane /= plane[2, 2]
    rings = choose_rings(full, plane, rho, score, arc_deg=arc, avoid_deg=spokes.drawn_deg)
    if not rings:
        raise _no_grid(picture)
    return _measure(full, plane, rings, spokes, arc, (box.x, box.y))


def _no_grid(picture):
    return NotReadError(
        "no rings about a common centre were found",
        remedy="give --crop X,Y,W,H around one chart",
        stage="grid",
        source=picture.path,
    )


def _first_plane(work, to_work, box):
    """First homography (px of the reduced picture) from edge gradients about the box's centre; None without."""
    edges = find_edges(work, work_pixels=HUB_PIXELS)
    to_small = np.linalg.inv(edges.to_full)
    x, y, _ = to_small @ to_work @ [box.centre_x - box.x, box.centre_y - box.y, 1]
    outer = box.outer_px * to_work[0, 0] * to_small[0, 0]
    hub = fit_hub(edges, x, y, reach_px=1.08 * outer, tolerances=(0.08, 0.06, 0.04, 0.03))
    h = None if hub is None else hub.homography(outer)
    return None if h is None else edges.to_full @ h


def _align(work, plane, spokes, arc):
    """Bring the strong rings into line on the reduced picture; None when there are none."""
    for first in (True, False):
        profile = ring_profile(work, plane, reach=1.1, spoke_deg=spokes.drawn_deg)
        rho, score, level = profile.peaks(STRONG)
        order = np.argsort(-np.abs(score) * np.sqrt(np.abs(level)))[:6]
        if not len(order):
            return None
        rings = [
            ring_points(work, plane, rho[k], sign=np.sign(score[k]), n_max=120, avoid_deg=spokes.drawn_deg, arc_deg=arc)
            for k in order
        ]
        fit = fit_plane(rings, [], [], start=parameters_of(plane), ring_rho=rho[order], first=first)
        if first or fit.residual_px < MAX_TILT_RESIDUAL_PX:
            plane = fit.homography
        if fit.residual_px < IN_LINE_PX:
            break
    return plane


def _measure(full, plane, rings, spokes, arc, origin):
    """Sub-pixel fit of everything, as a `Grid` in picture px."""
    plane = plane @ np.diag([rings[0].rho, rings[0].rho, 1.0])
    plane /= plane[2, 2]
    rho = np.array([ring.rho for ring in rings]) / rings[0].rho
    sign, width = [ring.points.sign for ring in rings], [ring.points.width_px for ring in rings]
    parameters = parameters_of(plane)
    parameters[3] = np.radians(spokes.skew_deg)
    lines = [spoke_points(full, plane, a, 0.25, 0.97) for a in spokes.drawn_deg]
    for n_max in (100, 300, 300):
        plane = homography_of(parameters)
        rings = [
            ring_points(
                full,
                plane,
                r,
                arc_deg=arc,
                reach_px=max(3.0, w / 2 + 2.5),
                sign=s,
                n_max=n_max,
                avoid_deg=spokes.deg,
                avoid_px=AVOID_PX,
            )
            for r, s, w in zip(rho, sign, width)
        ]
        keep = [k == 0 or p.drawn > MIN_DRAWN for k, p in enumerate(rings)]
        rho, sign, width, rings = (
            rho[keep], *([v for v, ok in zip(values, keep) if ok] for values in (sign, width, rings))
        )
        fit = fit_plane(rings, lines, spokes.deg, start=parameters, ring_rho=rho)
        moved = np.abs(fit.homography[:2] - plane[:2]).max()
        parameters, rho = fit.parameters, fit.ring_rho
        if moved < SETTLED_PX and n_max == 300:
            break
    shift = np.array([[1, 0, origin[0]], [0, 1, origin[1]], [0, 0, 1.0]])
    h = shift @ fit.homography
    move = np.eye(8)
    move[0, 6], move[1, 7], move[3, 6], move[4, 7] = origin[0], origin[0], origin[1], origin[1]
    reasons = ()
    return Grid(
        homography=h,
        covariance=move @ fit.covariance @ move.T,
        ring_rho=rho,
        ring_rho_u=fit.ring_rho_u,
        ring_drawn=np.array([p.drawn for p in rings]),
        ring_width_px=np.array([p.width_px for p in rings]),
        spoke_deg=spokes.deg,
        spoke_step_deg=spokes.step_deg,
        spoke_width_px=float(np.median([p.width_px for p in lines])) if lines else float("nan"),
        arc_deg=arc,
        skew_deg=float(np.degrees(fit.parameters[3])),
        skew_u_deg=float(np.degrees(fit.turn_u)) if len(spokes.deg) else 5.0,
        residual_px=fit.residual_px,
        reasons=reasons,
    )
