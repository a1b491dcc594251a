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
    """Points and vertex flags with every cubic cut into short chords."""
    out, flags, k = [points[:1]], [True], 1
    while k < len(points):
        if kinds[k] != CURVE or k + 2 >= len(points):
            out.append(points[k : k + 1])
            flags.append(True)
            k += 1
            continue
        p = points[k - 1 : k + 3]
        bend = max(np.hypot(*(p[0] - 2 * p[1] + p[2])), np.hypot(*(p[1] - 2 * p[2] + p[3])))
        # By its second derivative a cubic in n equal parts strays at most 6 bend / (8 n^2) from its chords.
        steps = 2 * int(np.clip(math.ceil(math.sqrt(0.75 * bend / FLAT_PT) / 2), 1, MAX_STEPS // 2))
        t = np.arange(1, steps + 1)[:, None] / steps
        s = 1 - t
        out.append(s**3 * p[0] + 3 * s * s * t * p[1] + 3 * s * t * t * p[2] + t**3 * p[3])
        flags += [j == steps or 2 * j == steps for j in range(1, steps + 1)]
        k += 3
    return np.vstack(out), np.array(flags)
