"""Sub-pixel position of a followed line: where it lies along its own normal.

A pattern's flank runs almost radially, so a column mean in the unwrapped plane is biased there; the profile along
the line's normal is symmetric instead. Each profile is cut at the valleys beside the line (the next lobe, another
crossing), its one-sided background (a filled trace) is taken off, and the centroid of what is left is the line's
middle. Where lines have merged the profile is too wide to have one middle: then the edge that faces paper stands
half a line width from the middle, and where neither edge does, nothing is claimed but the width itself.
"""

from dataclasses import dataclass

import cv2
import numpy as np

__all__ = ["Course", "refine_course"]

STEP_PX = 0.5  # along the profile
BESIDE_PX = 3.0  # how far past the line's edge the profile looks
FLOOR_PX = 0.03  # least uncertainty in weighing neighbours: no profile on an 8-bit picture does better
LONGEST_GAP_PX = 60.0
# Standard uncertainty along the normal as a root sum of squares of weighted signs, px each: the most likely weights
# for 75,000 rows of drawn charts with known curves, scaled so that 95 % lie within budget.COVERAGE_FACTOR of them.
PROFILE_WEIGHTS = (0.245, 0.172, 0.27, 0.078, 0.04, 0.13)  # asymmetry, excess, roughness, bend, beside, width / radius
BRIDGE_WEIGHTS = (1.74, 0.11, 18.5)  # one edge only, way to the nearest whole sample, width / radius
LONGEST_BRIDGE_PX = 48  # a longer gap of ink says too little of what runs there
BRIDGE_END_PX = 5  # of seen line on either side that gives the bridge its direction
EDGE_PX = 0.15  # extra uncertainty of a middle inferred from one edge and the line width


@dataclass(frozen=True, eq=False, kw_only=True)
class Course:
    """The followed line, sample by sample in order.

    x, y : (n,) refined positions, sheet px; nx, ny : (n,) unit normals
    u_px : (n,) standard uncertainty of the position along the normal, from the profile itself
    u_bridge_px : (n,) the same, from ink that is hidden, missing or merged with other ink
    kind : (n,) int8: 0 seen whole, 1 inferred from one edge, 2 merged on both sides, 3 no ink
    width_px : drawn line width (its coverage summed across)
    """

    x: np.ndarray
    y: np.ndarray
    nx: np.ndarray
    ny: np.ndarray
    u_px: np.ndarray
    u_bridge_px: np.ndarray
    kind: np.ndarray
    width_px: float


def refine_course(x, y, cover, hidden, from_centre_px, *, fill=0.0):
    """Refine an ordered, evenly spaced (about 1 px) closed or open polyline on a coverage map.

    Parameters
    ----------
    x, y : (n,) sheet px
    cover, hidden : (h, w) float32 coverage by the ink, and by what may hide it, 0 to 1
    from_centre_px : (n,) distance of the samples from the chart's centre
    fill : coverage of a fill on one side of the line, 0 when there is none
    """
    drawn, width = _line_width(x, y, cover)
    moved = np.zeros(len(x))
    for _ in range(2):
        nx, ny = _normals(x, y)
        shift, u, kind, asymmetry, excess = _locate(x, y, nx, ny, cover, width, fill)
        smooth = _smooth(np.where(kind < 3, shift, 0.0), np.where(kind < 3, 1 / u**2, 1e-3))
        x, y = x + smooth * nx, y + smooth * ny
        moved += shift
    x, y, gap = _bridge(x, y, kind)
    signs = _signs(x, y, nx, ny, moved, asymmetry, excess, hidden)
    near_centre = np.minimum(width / np.maximum(from_centre_px, 1.0), 3.0)
    u = np.sqrt(np.column_stack([signs, np.minimum(near_centre, 0.5)]) ** 2 @ np.square(PROFILE_WEIGHTS))
    merged = np.column_stack([kind == 1, np.minimum(gap, LONGEST_GAP_PX), near_centre])
    u_bridge = np.where(kind > 0, np.sqrt(merged**2 @ np.square(BRIDGE_WEIGHTS)), 0.0)
    return Course(x=x, y=y, nx=nx, ny=ny, u_px=u, u_bridge_px=u_bridge, kind=kind, width_px=drawn)


def _signs(x, y, nx, ny, moved, asymmetry, excess, hidden):
    """What tells how well a sample lies, (n, 5), px.

    asymmetry : centroid of the profile against the middle of its edges; excess : its width against the line's own;
    roughness : rms of the line's small-scale jitter nearby; bend : sagitta of the line over 6 px; beside : how much
    of something else lies on the profile
    """
    jitter = moved - np.convolve(np.pad(moved, 3, mode="edge"), np.ones(7) / 7, mode="valid")
    roughness = np.sqrt(np.convolve(np.pad(jitter**2, 6, mode="edge"), np.ones(13) / 13, mode="valid"))
    k = np.arange(len(x))
    a, b = np.clip(k - 6, 0, len(x) - 1), np.clip(k + 6, 0, len(x) - 1)
    bend = np.hypot(x[a] + x[b] - 2 * x, y[a] + y[b] - 2 * y) / 2
    _, covered = _profiles(x, y, nx, ny, hidden, 2.0)
    beside = covered.mean(axis=1)
    return np.stack([np.abs(asymmetry), np.abs(excess), roughness, bend, beside], axis=1)


def _bridge(x, y, kind):
    """Draw the line smoothly over short gaps of ink, and measure each sample's way to the nearest one seen whole.

    A dash gap or a crossing is short beside the line's curves, so a cubic with the direction of both ends (Hermite)
    follows it better than the path, which knows whole pixels only.
    """
    n = len(x)
    seen = np.flatnonzero(kind == 0)
    if seen.size < 8:
        return x, y, np.full(n, float(n))
    x, y = x.copy(), y.copy()
    before = np.maximum.accumulate(np.where(kind == 0, np.arange(n), -n))
    after = np.minimum.accumulate(np.where(kind == 0, np.arange(n), 2 * n)[::-1])[::-1]
    gap = np.minimum(np.arange(n) - before, after - np.arange(n)).astype(float)
    for start, stop in zip(seen[:-1], seen[1:]):
        if not 1 < stop - start <= LONGEST_BRIDGE_PX or (kind[start + 1 : stop] == 1).any():
            continue
        a, b = max(start - BRIDGE_END_PX, 0), min(stop + BRIDGE_END_PX, n - 1)
        if (kind[a : start + 1] > 1).any() or (kind[stop : b + 1] > 1).any() or a == start or b == stop:
            continue
        t = np.arange(1, stop - start) / (stop - start)
        h = np.stack([2 * t**3 - 3 * t**2 + 1, t**3 - 2 * t**2 + t, -2 * t**3 + 3 * t**2, t**3 - t**2])
        for v in (x, y):
            scale = stop - start
            ends = (v[start], (v[start] - v[a]) / (start - a) * scale, v[stop], (v[b] - v[stop]) / (b - stop) * scale)
            v[start + 1 : stop] = np.tensordot(ends, h, axes=1)
    return x, y, gap


def _profiles(x, y, nx, ny, cover, reach):
    s = np.arange(-reach, reach + 1e-6, STEP_PX)
    px = (x[:, None] + s * nx[:, None]).astype(np.float32)
    py = (y[:, None] + s * ny[:, None]).astype(np.float32)
    return s, _remap(cover, px, py)


def _remap(image, px, py):
    """cv2.remap for any number of rows (it takes fewer than 32768)."""
    parts = [
        cv2.remap(image, px[k : k + 30000], py[k : k + 30000], cv2.INTER_LINEAR, borderValue=0)
        for k in range(0, len(px), 30000)
    ]
    return np.concatenate(parts) if parts else np.zeros(px.shape, np.float32)


def _line_width(x, y, cover):
    """Drawn width (area under the profile) and the profile's own width (area over peak: wider when blurred), px."""
    nx, ny = _normals(x, y)
    s, m = _profiles(x, y, nx, ny, cover, 8.0)
    peak = m.max(axis=1)
    alone = (m[:, 0] < 0.1) & (m[:, -1] < 0.1) & (peak > 0.5 * np.percentile(peak, 80)) & (peak > 0.15)
    if alone.sum() < 12:
        return 2.0, 2.5
    areas = np.clip(m[alone], 0, None).sum(axis=1) * STEP_PX
    drawn = float(np.clip(np.median(areas), 0.7, 16.0))
    return drawn, float(np.clip(np.median(areas / peak[alone]), drawn, 18.0))


def _normals(x, y):
    """Unit normals of a polyline from a short smoothed difference."""
    half = 3
    k = np.arange(len(x))
    a, b = np.clip(k - half, 0, len(x) - 1), np.clip(k + half, 0, len(x) - 1)
    tx, ty = x[b] - x[a], y[b] - y[a]
    length = np.maximum(np.hypot(tx, ty), 1e-9)
    return -ty / length, tx / length


def _locate(x, y, nx, ny, cover, width, fill):
    """Shift along the normal, its standard uncertainty, and the kind of each sample."""
    reach = width / 2 + BESIDE_PX
    s, m = _profiles(x, y, nx, ny, cover, reach)
    n, k = m.shape
    rows = np.arange(n)
    # Start from the best place within half a width of where the path put it.
    near = np.abs(s) <= width / 2 + 1.0
    weight = np.where(near, m, 0)
    kernel = max(1, int(round(width / STEP_PX)) | 1)
    summed = cv2.blur(weight, (kernel, 1), borderType=cv2.BORDER_CONSTANT) - 0.002 * np.abs(s)
    middle = summed.argmax(axis=1)
    peak = np.maximum(m[rows, middle], 1e-3)
    level = np.maximum(peak, 0.5 * np.percentile(peak, 80))[:, None]
    index = np.arange(k)
    background = fill
    low = m < 0.5 * (level + background)
    right_edge = np.where(low & (index > middle[:, None]), index, k).min(axis=1)
    left_edge = np.where(low & (index < middle[:, None]), index, -1).max(axis=1)
    right = _crossing(s, m, right_edge, -1, 0.5 * (level[:, 0] + background), k)
    left = _crossing(s, m, left_edge, +1, 0.5 * (level[:, 0] + background), k)
    wide = right - left
    # Centroid between the valleys: from the middle outward until the coverage starts to rise again.
    rising_right = np.where((index > right_edge[:, None]) & (np.diff(m, axis=1, append=m[:, -1:]) > 0.02), index, k)
    rising_left = np.where((index < left_edge[:, None]) & (np.diff(m, axis=1, prepend=m[:, :1]) < -0.02), index, -1)
    stop, start = rising_right.min(axis=1), rising_left.max(axis=1)
    inside = (index <= stop[:, None]) & (index >= start[:, None])
    side_right = np.where(right_edge < k, m[rows, np.clip(stop, 0, k - 1)], 0)
    side_left = np.where(left_edge >= 0, m[rows, np.clip(start, 0, k - 1)], 0)
    base = np.where(s > s[middle][:, None], side_right[:, None], side_left[:, None]) * (fill > 0)
    body = np.clip(np.where(inside, (m - base) / np.maximum(1 - base, 0.2), 0), 0, None)
    area = body.sum(axis=1)
    centroid = (body * s).sum(axis=1) / np.maximum(area, 1e-6)
    kind = np.zeros(n, np.int8)
    u = np.full(n, FLOOR_PX)
    whole = (wide < 1.35 * width + 1.0) & (right_edge < k) & (left_edge >= 0)
    only_right = ~whole & (right_edge < k) & (right < width / 2 + 2.0)
    only_left = ~whole & (left_edge >= 0) & (left > -(width / 2 + 2.0))
    shift = np.where(whole, centroid, 0.0)
    half = width / 2
    one = only_right ^ only_left
    shift = np.where(one & only_right, right - half, shift)
    shift = np.where(one & only_left, left + half, shift)
    kind = np.where(whole, 0, np.where(one, 1, 2)).astype(np.int8)
    both = ~whole & only_right & only_left
    shift = np.where(both, (right + left) / 2, shift)
    kind = np.where(peak < 0.4 * np.percentile(peak, 80), 3, kind).astype(np.int8)
    u = np.where(kind == 1, EDGE_PX, u)
    spread = np.clip(wide - width, 0, 2 * reach) / np.sqrt(12)
    u = np.where(kind == 2, np.maximum(0.3, spread), u)
    u = np.where(kind == 3, 1.0, u)
    asymmetry = np.where(kind == 0, centroid - (right + left) / 2, 0.0)
    excess = np.where(kind == 0, wide - width, 0.0)
    return np.clip(shift, -reach, reach), u, kind, asymmetry, excess


def _crossing(s, m, edge, towards, level, k):
    """Sub-sample place at which the profile crosses `level` between index `edge` and its neighbour."""
    rows = np.arange(len(m))
    e = np.clip(edge, 0, k - 1)
    i = np.clip(e + towards, 0, k - 1)
    a, b = m[rows, e], m[rows, i]
    share = np.clip((level - a) / np.where(np.abs(b - a) < 1e-6, 1, b - a), 0, 1)
    return s[e] + share * (s[i] - s[e])


def _smooth(value, weight):
    """Weighted local mean over five samples: neighbours 1 px apart share pixels, so little is lost."""
    kernel = np.array([0.5, 1, 1, 1, 0.5])
    top = np.convolve(np.pad(value * weight, 2, mode="edge"), kernel, mode="valid")
    bottom = np.convolve(np.pad(weight, 2, mode="edge"), kernel, mode="valid")
    return top / np.maximum(bottom, 1e-12)
