"""Where a drawn line meets the ray of a bearing: exact crossings of its segments, the outermost."""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["CROWDED_RHO", "Crossings", "at_bearings"]

BRIDGE_RHO = 0.12  # the longest jump of the pen that is bridged, outer radii
BRIDGE_STEPS = 8
STRAY_COSINE = 0.5
CENTRE_RHO = 0.003  # a line that comes so near has reached the chart's centre
CROWDED_RHO = 0.03  # so near the centre lines of all bearings meet
TOUCH_RHO = 3e-5  # a ray that passes an end so near meets it: a hundredth of a px at a radius of 400
MAX_TOUCH_DEG = 0.01
SHARPEST = 1.0  # radians between two chords of a curve: a sharper turn is a corner (a null's tip)
STEEPEST = 50.0  # d rho / d degree: a radial line has no slope


@dataclass(frozen=True, eq=False, kw_only=True)
class Crossings:
    """A line at n plane angles.

    rho : (n,) NaN where it is not drawn
    slope : (n,) d rho / d plane angle, per degree
    radial_share : (n,) cosine of the angle between the line and the circle through it, 0 to 1
    sag_rho : (n,) how far a smooth curve through the drawn points may stray from the chord there
    jump_rho : (n,) length of the pen's jump that was bridged there, 0 where drawn
    centre : whether the line reaches the chart's centre
    """

    rho: np.ndarray
    slope: np.ndarray
    radial_share: np.ndarray
    sag_rho: np.ndarray
    jump_rho: np.ndarray
    centre: bool

    def __post_init__(self):
        lock_arrays(self)


def at_bearings(rho, plane_deg, wanted_deg, *, vertex=None, bridged=True):
    """Cross a line with rays.

    Parameters
    ----------
    rho, plane_deg : (m,) the line's points in order, NaN where the pen was up
    wanted_deg : (n,) plane angles of the rays
    vertex : (m,) bool, points that the drawing names itself, for the sag; None takes none
    bridged : go smoothly over short jumps of the pen, also from the last point to the first

    Returns
    -------
    Crossings

    """
    start, end, jump, sag = _segments(rho, plane_deg, vertex, bridged)
    wanted = np.asarray(wanted_deg, float).ravel()
    ray, segment = _meetings(start, end, wanted)
    direction = np.stack([np.sin(np.radians(wanted)), -np.cos(np.radians(wanted))], axis=1)[ray]
    a, b = start[segment], end[segment]
    side_a, side_b = _cross(direction, a), _cross(direction, b)
    along = side_a - side_b
    radial = np.abs(along) < 1e-12
    share = np.clip(side_a / np.where(radial, 1.0, along), 0.0, 1.0)
    far = np.einsum("ij,ij->i", a, direction) > np.einsum("ij,ij->i", b, direction)
    share = np.where(radial, np.where(far, 0.0, 1.0), share)
    reach = np.einsum("ij,ij->i", a + share[:, None] * (b - a), direction)
    ok = reach >= -1e-9
    ray, segment, share, reach = ray[ok], segment[ok], share[ok], np.maximum(reach[ok], 0.0)

    # Drawn before bridged, then outermost: the last of each ray in this order. But a line through the centre
    # crosses every ray there, also those whose own stretch lies in a gap.
    rank = 2 * (reach > CROWDED_RHO) + (jump[segment] == 0)
    order = np.lexsort((reach, rank, ray))
    ray, segment, share, reach = ray[order], segment[order], share[order], reach[order]
    last = np.flatnonzero(np.diff(ray, append=-1) != 0)
    n = len(wanted)
    out = {name: np.full(n, np.nan) for name in ("rho", "slope", "radial_share", "sag_rho", "jump_rho")}
    at = ray[last]
    out["rho"][at] = reach[last]
    out["slope"][at], out["radial_share"][at] = _slant(
        start[segment[last]], end[segment[last]], wanted[at], reach[last]
    )
    out["sag_rho"][at] = sag[segment[last]] * 4 * share[last] * (1 - share[last])
    out["jump_rho"][at] = jump[segment[last]]
    known = np.isfinite(rho)
    return Crossings(**out, centre=bool(known.any() and rho[known].min() < CENTRE_RHO))


def _segments(rho, plane_deg, vertex, bridged):
    """start, end (k, 2) in the plane, jump (k,) bridged length or 0, sag (k,) at the middle, outer radii."""
    u, v = rho * np.sin(np.radians(plane_deg)), -rho * np.cos(np.radians(plane_deg))
    points = np.stack([u, v], axis=1)
    known = np.flatnonzero(np.isfinite(points).all(axis=1))
    if len(known) < 2:
        empty = np.zeros((0, 2))
        return empty, empty, np.zeros(0), np.zeros(0)
    first, second = known[:-1], known[1:]
    if bridged and len(known) > 2 and np.hypot(*(points[known[0]] - points[known[-1]])) > 1e-9:
        first, second = np.append(first, known[-1]), np.append(second, known[0])  # round to the beginning
    up = second != first + 1
    start, end = points[first], points[second]
    sag = np.zeros(len(start)) if vertex is None else _sag(start, end, vertex[first] & vertex[second] & ~up)
    jumps = np.flatnonzero(up & (np.hypot(*(end - start).T) <= BRIDGE_RHO)) if bridged else []
    starts, ends, sags, lengths = [start[~up]], [end[~up]], [sag[~up]], [np.zeros(int((~up).sum()))]
    for k in jumps:
        course = _bridge(points, first[k], second[k])
        starts.append(course[:-1])
        ends.append(course[1:])
        sags.append(np.zeros(len(course) - 1))
        lengths.append(np.full(len(course) - 1, np.hypot(*(end[k] - start[k]))))
    return np.concatenate(starts), np.concatenate(ends), np.concatenate(lengths), np.concatenate(sags)


def _bridge(points, a, b):
    """(k, 2) a way from one point to another that leaves and arrives as the line does (cubic Hermite)."""
    gap = points[b] - points[a]
    length = np.hypot(*gap)
    tangents = []
    for here, beside, sign in ((a, a - 1, 1.0), (b, b + 1, -1.0)):
        own = sign * (points[here] - points[beside]) if 0 <= beside < len(points) else gap
        size = np.hypot(*own)
        # A line that turns away from the gap ends there: its direction says nothing about the other side.
        follows = np.isfinite(size) and size > 0 and own @ gap > STRAY_COSINE * size * length
        tangents.append(own / size * length if follows else gap)
    t = np.linspace(0, 1, BRIDGE_STEPS + 1)[:, None]
    return (
        (1 + 2 * t) * (1 - t) ** 2 * points[a]
        + t * (1 - t) ** 2 * tangents[0]
        + t * t * (3 - 2 * t) * points[b]
        + t * t * (t - 1) * tangents[1]
    )


def _sag(start, end, chord):
    """Rise of a smooth curve over each chord: its length times the turn to its neighbour, over 8."""
    step = end - start
    length = np.hypot(*step.T)
    if len(step) < 2:
        return np.zeros(len(step))
    course = np.arctan2(step[:, 1], step[:, 0])
    turn = np.abs((np.diff(course) + np.pi) % (2 * np.pi) - np.pi)
    turn = np.minimum(turn, SHARPEST)
    bend = np.maximum(np.concatenate([[0.0], turn]), np.concatenate([turn, [0.0]]))
    return np.where(chord, length * bend / 8, 0.0)


def _meetings(start, end, wanted):
    """(ray, segment) index pairs of every segment and the rays within its angle."""
    a = np.degrees(np.arctan2(start[:, 0], -start[:, 1])) % 360
    turn = (np.degrees(np.arctan2(end[:, 0], -end[:, 1])) - a + 180) % 360 - 180
    # A flank may run from one drawn point to the next along a ray: rounding must not lose its outer end.
    least = np.radians(MAX_TOUCH_DEG)
    touch_a, touch_b = (
        np.degrees(np.minimum(TOUCH_RHO / np.maximum(np.hypot(*p.T), TOUCH_RHO), least)) for p in (start, end)
    )
    low = np.where(turn >= 0, a - touch_a, a + turn - touch_b)
    high = np.where(turn >= 0, a + turn + touch_b, a + touch_a)
    order = np.argsort(wanted % 360, kind="stable")
    ordered = (wanted % 360)[order]
    three = np.concatenate([ordered - 360, ordered, ordered + 360])
    first, stop = np.searchsorted(three, low), np.searchsorted(three, high, side="right")
    count = stop - first
    segment = np.repeat(np.arange(len(count)), count)
    offset = np.arange(count.sum()) - np.repeat(np.cumsum(count) - count, count)
    index = np.repeat(first, count) + offset
    return order[index % max(len(ordered), 1)], segment


def _slant(start, end, plane_deg, rho):
    """Slope d rho / d degree, and the cosine of the slant, of segments at plane angles."""
    out = np.stack([np.sin(np.radians(plane_deg)), -np.cos(np.radians(plane_deg))], axis=1)
    round_ = np.stack([-out[:, 1], out[:, 0]], axis=1)
    step = end - start
    radial, tangential = np.einsum("ij,ij->i", step, out), np.einsum("ij,ij->i", step, round_)
    flat = np.where(np.abs(tangential) < 1e-12, 1e-12, tangential)
    slope = np.clip(np.radians(1.0) * rho * radial / flat, -STEEPEST, STEEPEST)
    return slope, np.abs(tangential) / np.maximum(np.hypot(radial, tangential), 1e-12)


def _cross(a, b):
    return a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0]
