"""Cubic curves of a path cut into short chords, with the points kept apart that the drawing names itself."""

import math

import numpy as np

__all__ = ["CURVE", "MOVE", "flat_line"]

FLAT_PT = 0.002  # farthest that a flattened curve strays from the true one
MAX_STEPS = 128
CURVE, MOVE = 1, 2  # kinds of path segments, as the engine counts them (ISO 32000-1, table 59)


def flat_line(points, kinds, closed):
    """(points, vertex flags) of one unbroken line with its curves made fine; None when it has no length."""
    if (kinds == CURVE).any():
        if (kinds == CURVE).sum() % 3 or kinds[0] == CURVE:
            return None
        points, vertex = _without_curves(points, kinds)
    else:
        vertex = np.ones(len(points), bool)
    if closed and np.hypot(*(points[-1] - points[0])) > 1e-9:
        points, vertex = np.vstack([points, points[:1]]), np.append(vertex, True)
    keep = np.concatenate([[True], np.any(np.diff(points, axis=0) != 0, axis=1)])
    points, vertex = points[keep], vertex[keep]
    if len(points) < 2:
        return None
    points.setflags(write=False)
    vertex.setflags(write=False)
    return points, vertex


def _without_curves(points, kinds):
    """Points and vertex flags with every cubic cut into short chords, all cubics of a line into as many."""
    ends = np.flatnonzero(kinds == CURVE)[2::3]  # a cubic is three points in a row: two controls and its end
    p = points[ends[:, None] + np.arange(-3, 1)]
    bend = np.hypot(*np.moveaxis(p[:, 2:] - 2 * p[:, 1:3] + p[:, :2], 2, 0)).max()
    # By its second derivative a cubic in n equal parts strays at most 6 bend / (8 n^2) from its chords.
    half = int(np.clip(math.ceil(math.sqrt(0.75 * bend / FLAT_PT) / 2), 1, MAX_STEPS // 2))
    t = np.arange(1, 2 * half + 1) / (2 * half)
    weights = np.stack([(1 - t) ** 3, 3 * (1 - t) ** 2 * t, 3 * (1 - t) * t**2, t**3], axis=1)
    flat = np.einsum("ti,mij->mtj", weights, p).reshape(-1, 2)
    place = (ends[:, None] - 1 + t).ravel()
    named = np.tile((t == 0.5) | (t == 1.0), len(ends))
    straight = np.flatnonzero(kinds != CURVE)
    order = np.argsort(np.concatenate([straight, place]), kind="stable")
    flags = np.concatenate([np.ones(len(straight), bool), named])
    return np.concatenate([points[straight], flat])[order], flags[order]
