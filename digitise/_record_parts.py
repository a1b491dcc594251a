"""How the results of the stages stand in a record, as plain JSON values."""

import platform
import sys

import numpy as np

from . import __version__
from ._json import Malformed, take, take_number, take_numbers, to_plain
from .grid import Grid

__all__ = [
    "bearing_part",
    "grid_back",
    "grid_part",
    "labels_part",
    "reasons_part",
    "scale_part",
    "software_part",
]

PLACE_DIGITS = 6  # significant digits of label places, px


def software_part():
    """What the result was made with: only what took part is named."""
    versions = {"name": "digitise", "version": __version__, "python": platform.python_version()}
    versions["numpy"] = np.__version__
    if "cv2" in sys.modules:
        versions["opencv"] = sys.modules["cv2"].__version__
    return versions


def grid_part(grid):
    """The grid, in full and exact."""
    names = ("homography", "covariance", "ring_rho", "ring_rho_u", "ring_drawn", "ring_width_px", "spoke_deg")
    names += ("spoke_step_deg", "spoke_width_px", "arc_deg", "skew_deg", "skew_u_deg", "residual_px")
    plain = {name: to_plain(getattr(grid, name)) for name in names}
    return {
        "centre_px": [grid.centre_x, grid.centre_y],
        "outer_px": grid.outer_px,
        **plain,
        "reasons": reasons_part(grid.reasons),
    }


def grid_back(node):
    """The `Grid` of a record; raises `Malformed`."""
    n, m = (len(take(node, name, list)) for name in ("ring_rho", "spoke_deg"))
    shapes = {"homography": (3, 3), "covariance": (8, 8), "spoke_deg": (m,), "arc_deg": (2,)}
    shapes |= dict.fromkeys(("ring_rho", "ring_rho_u", "ring_drawn", "ring_width_px"), (n,))
    arrays = {name: np.array(take_numbers(node, name, shape), float) for name, shape in shapes.items()}
    names = ("spoke_step_deg", "spoke_width_px", "skew_deg", "skew_u_deg", "residual_px")
    if n < 1 or arrays["ring_rho"][0] != 1 or np.any(np.diff(arrays["ring_rho"]) >= 0):
        raise Malformed("grid.ring_rho does not fall from 1")
    if abs(np.linalg.det(arrays["homography"])) < 1e-9 or arrays["homography"][2, 2] != 1:
        raise Malformed("grid.homography is not a map between planes")
    return Grid(**arrays, **{name: take_number(node, name, or_null=True) for name in names})


def scale_part(scale):
    """The scale, exact, with its levels at the outermost ring and the centre."""
    names = ("law", "parameters", "covariance", "anchor_rho", "anchor_db", "unit", "residual_px", "source")
    plain = {name: to_plain(getattr(scale, name)) for name in names}
    outer_db = float(scale.level(np.ones(1))[0])
    return {
        **plain,
        "outer_db": outer_db,
        "centre_db": to_plain(scale.centre_db),
        "reasons": reasons_part(scale.reasons),
    }


def bearing_part(bearing):
    """The bearing, exact."""
    plain = {
        name: to_plain(getattr(bearing, name)) for name in ("zero_deg", "turn", "u_deg", "source", "signed")
    }
    return {**plain, "reasons": reasons_part(bearing.reasons)}


def labels_part(labels):
    """The text that was read."""
    if labels is None:
        return {"engine": "", "found": []}
    names = ("text", "value", "unit", "role", "x_px", "y_px", "w_px", "h_px", "angle_deg", "confidence")
    found = [{name: to_plain(getattr(label, name), PLACE_DIGITS) for name in names} for label in labels.found]
    return {"engine": labels.engine, "found": found}


def reasons_part(reasons):
    """Review reasons by code, number and detail."""
    return [{"code": item.code, "value": item.value, "detail": item.detail} for item in reasons]
