"""The bearing from the rim labels, with a told zero or turn laid on top."""

import numpy as np

from ._rim_vote import vote_rim
from .bearing import Bearing
from .review import reason

__all__ = ["bearing_from_labels"]

ENOUGH = 3  # labels that agree
SURE_SHARE = 0.6  # of the best score that any other zero or turn may reach
SNAP_DEG = 4.0  # the zero is printed on a spoke; labels stand this near to theirs
UPRIGHT_DEG = 1.5  # without spokes, a zero this near to a right angle is taken to be there
LABEL_U_DEG = 1.0  # of one label's place, where no spoke tells better
MUCH_SPREAD_DEG = 3.5  # of labels that agree: above, they stand too far off their spokes


def bearing_from_labels(grid, labels, *, zero_deg=None, turn=None):
    """The `Bearing` that the rim labels support; in doubt it carries a reason.

    zero_deg : plane angle that the user told, or None; turn : told, or None
    """
    rim = labels.with_role("rim")
    options = [label.readings or ((label.value, label.confidence),) for label in rim]
    vote = vote_rim([label.plane_deg for label in rim], options, zero_deg=zero_deg, turn=turn)
    if vote is None or not vote.members:
        assumed = [f"0 at the {'top' if zero_deg is None else 'told place'}", turn or "cw"]
        reasons = (reason("bearing-assumed", 0, f"{', '.join(assumed)} is assumed"),)
        at = 0.0 if zero_deg is None else zero_deg
        return Bearing(
            zero_deg=at, turn=turn or "cw", u_deg=float(grid.skew_u_deg), source="assumed", reasons=reasons
        )
    at, u_deg = (zero_deg, float(grid.skew_u_deg)) if zero_deg is not None else _snapped(grid, vote)
    return Bearing(
        zero_deg=float(at % 360),
        turn=vote.turn,
        u_deg=u_deg,
        source="labels",
        signed=any(value < 0 for value in vote.values),
        reasons=tuple(_reasons(vote)),
    )


def _snapped(grid, vote):
    """The zero on the drawn spoke that the labels mean, and its standard uncertainty, degrees."""
    if len(grid.spoke_deg):
        off = (grid.spoke_deg - vote.zero_deg + 180) % 360 - 180
        nearest = off[np.argmin(np.abs(off))]
        if abs(nearest) < SNAP_DEG:
            return vote.zero_deg + nearest, float(grid.skew_u_deg)
    right = 90.0 * round(vote.zero_deg / 90)
    spread_u = max(vote.spread_deg, LABEL_U_DEG) / np.sqrt(len(vote.members))
    if abs(right - vote.zero_deg) < UPRIGHT_DEG:
        return right, float(spread_u)
    return vote.zero_deg, float(spread_u)


def _reasons(vote):
    n = len(vote.members)
    said = f"0 at {vote.zero_deg:.0f} degrees from the chart's top, {vote.turn}"
    if vote.mirror_score > SURE_SHARE * vote.score:
        yield reason("bearing-mirrored", n, f"{vote.turn} is assumed")
    elif n < ENOUGH or vote.rival_score > SURE_SHARE * vote.score or vote.spread_deg > MUCH_SPREAD_DEG:
        yield reason("bearing-assumed", n, said)
