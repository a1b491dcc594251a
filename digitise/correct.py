"""Correct a grid by hand: move its centre or a ring, add or drop a ring, settle it on the drawn lines.

Each correction is a pure function from `Grid` to `Grid`, in picture px as a person points at them. What was
placed by hand is uncertain by `HAND_U_PX`; settling it on the lines on the picture gives it back a measured
uncertainty.
"""

from dataclasses import replace

import cv2
import numpy as np

from ._ring_fit import fit_plane, parameters_of
from ._ring_points import ring_points, spoke_points
from ._unwrap import outer_radius
from .exceptions import NotReadError, UsageError
from .grid import Grid

__all__ = ["add_ring", "drop_ring", "grid_by_hand", "move_centre", "move_ring", "settle_grid", "stretch_grid"]

HAND_U_PX = 0.4  # standard uncertainty of a point set by hand under a loupe; a judgement
LEAST_APART_PX = 2.0  # two rings nearer than this are one line
SETTLE_REACH_PX = (7.0, 4.0, 3.0)  # half lengths of the cuts across a line, round by round
LEAST_POINTS = 12  # on a ring, for it to take part
LEAST_SHARE = (
    0.25  # of a ring's cuts that must find a line, likewise: a line that only crosses it is another one
)
PLACES = np.array([2, 5])  # of the centre's x and y among the homography's first eight entries
SIZES = np.array([0, 1, 3, 4])  # of the entries that hold size, turn and stretch


def grid_by_hand(centre_x, centre_y, outer_px):
    """A grid that has nothing but a centre and an outermost ring, as drawn by hand."""
    homography = np.array([[outer_px, 0, centre_x], [0, outer_px, centre_y], [0, 0, 1.0]])
    covariance = np.zeros((8, 8))
    covariance[PLACES, PLACES] = HAND_U_PX**2
    covariance[SIZES, SIZES] = HAND_U_PX**2
    one, none = np.ones(1), np.zeros(0)
    return Grid(
        homography=homography, covariance=covariance, ring_rho=one, ring_rho_u=one * HAND_U_PX / outer_px,
        ring_drawn=one, ring_width_px=one, spoke_deg=none, spoke_step_deg=np.nan, spoke_width_px=np.nan,
        arc_deg=np.array([0.0, 360.0]), skew_deg=0.0, skew_u_deg=1.0, residual_px=HAND_U_PX,
    )  # fmt: skip


def move_centre(grid, dx_px, dy_px):
    """The whole grid moved on the picture."""
    shift = np.array([[1, 0, dx_px], [0, 1, dy_px], [0, 0, 1.0]])
    covariance = grid.covariance.copy()
    covariance[PLACES, PLACES] += HAND_U_PX**2
    homography = shift @ grid.homography
    return replace(grid, homography=homography / homography[2, 2], covariance=covariance, reasons=())


def move_ring(grid, ring, rho):
    """One ring given another radius `rho`, in the grid as it is now; the other rings stay where they are.

    Raises `UsageError` when the ring would pass a neighbour.
    """
    radii = grid.ring_rho.copy()
    radii[ring] = rho
    _check_order(radii, grid.outer_px)
    uncertain = grid.ring_rho_u.copy()
    uncertain[ring] = HAND_U_PX / grid.outer_px
    return _from_radii(grid, radii, uncertain)


def stretch_grid(grid, factor, plane_deg):
    """The grid made longer by `factor` along one plane angle, about the centre."""
    along = np.array([np.sin(np.radians(plane_deg)), -np.cos(np.radians(plane_deg))])
    stretch = np.eye(3)
    stretch[:2, :2] += (factor - 1) * np.outer(along, along)
    homography = grid.homography @ stretch
    covariance = grid.covariance.copy()
    covariance[SIZES, SIZES] += HAND_U_PX**2
    return replace(grid, homography=homography / homography[2, 2], covariance=covariance, reasons=())


def add_ring(grid, rho):
    """A further ring at radius `rho`; outside the outermost one it becomes the outermost."""
    radii = np.append(grid.ring_rho, rho)
    order = np.argsort(-radii)
    _check_order(radii[order], grid.outer_px)
    more = {
        "ring_drawn": np.append(grid.ring_drawn, 1.0)[order],
        "ring_width_px": np.append(grid.ring_width_px, np.median(grid.ring_width_px))[order],
    }
    uncertain = np.append(grid.ring_rho_u, HAND_U_PX / grid.outer_px)[order]
    return _from_radii(grid, radii[order], uncertain, **more)


def drop_ring(grid, ring):
    """The grid without one ring; the next one becomes the outermost when that was it."""
    if len(grid.ring_rho) < 2:
        raise UsageError("the last ring cannot be taken away", remedy="place the grid anew", stage="grid")
    keep = np.arange(len(grid.ring_rho)) != ring
    more = {name: getattr(grid, name)[keep] for name in ("ring_drawn", "ring_width_px")}
    return _from_radii(grid, grid.ring_rho[keep], grid.ring_rho_u[keep], **more)


def settle_grid(picture, grid):
    """Fit the grid to the drawn lines near it, as finding a grid does at its end.

    Raises `NotReadError` when there is no drawn ring within a few px.
    """
    full = cv2.cvtColor(np.ascontiguousarray(picture.rgb), cv2.COLOR_RGB2GRAY).astype(np.float32)
    plane, rho, parameters = grid.homography, grid.ring_rho, parameters_of(grid.homography)
    keep = np.ones(len(rho), bool)
    for reach in SETTLE_REACH_PX:
        rings = [
            ring_points(full, plane, r, arc_deg=grid.arc_deg, reach_px=max(reach, w / 2 + 2.5))
            for r, w in zip(rho, grid.ring_width_px, strict=True)
        ]
        found = np.array(
            [points.good.sum() >= max(LEAST_POINTS, LEAST_SHARE * len(points.good)) for points in rings]
        )
        if not found.any():
            raise NotReadError(
                f"no drawn ring lies within {SETTLE_REACH_PX[0]:.0f} px of the grid", stage="grid",
                remedy="move the centre and the outermost ring nearer to the drawn ones",
            )  # fmt: skip
        lines = [spoke_points(full, plane, angle, 0.25, 0.97) for angle in grid.spoke_deg]
        chosen = np.flatnonzero(found)
        fit = fit_plane(
            [rings[k] for k in chosen], lines, grid.spoke_deg, start=parameters, ring_rho=rho[chosen]
        )
        parameters, plane = fit.parameters, fit.homography
        rho, uncertain = rho.copy(), np.full(len(rho), HAND_U_PX / outer_radius(plane))
        rho[chosen], uncertain[chosen] = fit.ring_rho, fit.ring_rho_u
        keep = found
    settled = replace(
        grid,
        homography=plane,
        covariance=fit.covariance,
        residual_px=fit.residual_px,
        reasons=(),
        skew_deg=float(np.degrees(parameters[3])),
        skew_u_deg=float(np.degrees(fit.turn_u)) if lines else grid.skew_u_deg,
        ring_drawn=np.where(keep, [points.drawn for points in rings], grid.ring_drawn),
        ring_width_px=np.where(keep, [points.width_px for points in rings], grid.ring_width_px),
    )
    return _from_radii(settled, rho, uncertain)


def place_labels(labels, grid, corrected):
    """Move the `Labels` that were read with one grid to a corrected one; a ring label keeps its ring.

    Reading them anew is surer but takes a second: this is for showing at once what a correction does.
    """
    return replace(labels, found=tuple(_place_label(label, grid, corrected) for label in labels.found))


def _place_label(label, grid, corrected):
    rho, plane_deg = (float(value) for value in corrected.to_plane(label.x_px, label.y_px))
    ring_rho = label.ring_rho
    if np.isfinite(ring_rho):
        k = int(np.argmin(np.abs(grid.ring_rho - ring_rho)))
        if len(grid.ring_rho) == len(corrected.ring_rho) and abs(grid.ring_rho[k] - ring_rho) < 1e-6:
            ring_rho = float(corrected.ring_rho[k])
        else:
            ring_rho = float(corrected.to_plane(*grid.to_picture(ring_rho, label.plane_deg))[0])
    return replace(label, rho=rho, plane_deg=plane_deg, ring_rho=ring_rho)


def _check_order(radii, outer_px):
    if radii[-1] * outer_px < LEAST_APART_PX or np.any(-np.diff(radii) * outer_px < LEAST_APART_PX):
        raise UsageError(
            "a ring would lie on another one or on the centre", remedy="move it elsewhere", stage="grid"
        )


def _from_radii(grid, radii, uncertain, **more):
    """The grid with other radii, the plane made larger or smaller so that the first of them is 1 again."""
    size = float(radii[0])
    homography = grid.homography @ np.diag([size, size, 1.0])
    entries = grid.homography.ravel()[SIZES]
    covariance = grid.covariance * np.outer(_grown(size), _grown(size))
    if size != 1.0:
        spread = entries * uncertain[0]
        covariance[np.ix_(SIZES, SIZES)] += np.outer(spread, spread)
    return replace(
        grid, homography=homography / homography[2, 2], covariance=covariance, reasons=(),
        ring_rho=radii / size, ring_rho_u=uncertain / size, **more,
    )  # fmt: skip


def _grown(size):
    """What an enlargement of the plane multiplies the homography's first eight entries by."""
    return np.array([size, size, 1, size, size, 1, size, size])
