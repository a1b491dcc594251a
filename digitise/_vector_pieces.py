"""Every unbroken drawn line of a page, measured at once: is it straight, is it an arc, about which centre.

Lines are looked at together as arrays, since a page may hold tens of thousands of dashes.
"""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["LONGEST_CHORD", "Pieces", "cut_pieces"]

STRAIGHT_PT = 0.05  # farthest off its chord
LONGEST_CHORD = 0.4  # radii: a circle of 16 chords, which stray 2 % from it
ROUND_SHARE, ROUND_PT = 6e-4, 0.06  # an arc's points stray from a circle by its drawing's rounding, no more


@dataclass(frozen=True, eq=False, kw_only=True)
class Pieces:
    """n unbroken lines with N points in all.

    xy : (N, 2) points, one line after the other; vertex : (N,) bool, points that the drawing names itself
    start : (n,) index of each line's first point; count : (n,) of its points
    path, run : (n,) where each comes from: page.paths[path].runs[run]
    length : (n,); longest : (n,) of its chords; straight : (n,) bool
    centre : (n, 2), radius : (n,) of the circle through each arc, NaN where it is none; sweep_deg : (n,) of
        the arc
    unit : length of one point on the page
    """

    xy: np.ndarray
    vertex: np.ndarray
    start: np.ndarray
    count: np.ndarray
    path: np.ndarray
    run: np.ndarray
    length: np.ndarray
    longest: np.ndarray
    straight: np.ndarray
    centre: np.ndarray
    radius: np.ndarray
    sweep_deg: np.ndarray
    unit: float

    def __post_init__(self):
        lock_arrays(self)

    def points(self, k):
        """(m, 2) points of line k."""
        return self.xy[self.start[k] : self.start[k] + self.count[k]]

    def vertex_of(self, k):
        """(m,) bool, which points of line k the drawing names itself."""
        return self.vertex[self.start[k] : self.start[k] + self.count[k]]

    def slack(self, radius):
        """How far points of a circle of this radius may stray from it."""
        return ROUND_SHARE * np.asarray(radius) + ROUND_PT * self.unit

    def each(self, ufunc, values):
        """A ufunc such as np.maximum over each line's points, (n,)."""
        return ufunc.reduceat(values, self.start)


def cut_pieces(page, shape=None):
    """The `Pieces` of a `VectorPage`, or None when nothing is drawn.

    shape : (2, 2) or None, taken off every point, so that a stretched chart's rings are circles
    """
    runs, vertices, paths, numbers = [], [], [], []
    for k, path in enumerate(page.paths):
        for j, (run, vertex) in enumerate(zip(path.runs, path.vertices, strict=True)):
            runs.append(run)
            vertices.append(vertex)
            paths.append(k)
            numbers.append(j)
    if not runs:
        return None
    xy, vertex = np.concatenate(runs), np.concatenate(vertices)
    if shape is not None:
        xy = xy @ np.linalg.inv(shape).T
    count = np.array([len(run) for run in runs])
    start = np.concatenate([[0], np.cumsum(count)[:-1]])
    owner = np.repeat(np.arange(len(runs)), count)
    unit = page.px_per_pt if np.isfinite(page.px_per_pt) else 1.0

    step = np.hypot(*np.diff(xy, axis=0, append=xy[-1:]).T)
    step[start + count - 1] = 0
    chord = xy[start + count - 1] - xy[start]
    span = np.maximum(np.hypot(*chord.T), 1e-12)
    offset = xy - xy[start][owner]
    off = np.abs(offset[:, 0] * chord[owner, 1] - offset[:, 1] * chord[owner, 0]) / span[owner]
    length, longest = np.add.reduceat(step, start), np.maximum.reduceat(step, start)
    # A closed line has a short chord, which nothing keeps close to: it must not pass for straight.
    straight = (np.maximum.reduceat(off, start) <= STRAIGHT_PT * unit) & (length <= 1.02 * span)
    centre, radius, sweep = _arcs(xy, vertex, start, owner, count, straight, longest, unit)
    return Pieces(
        xy=xy,
        vertex=vertex,
        start=start,
        count=count,
        path=np.array(paths),
        run=np.array(numbers),
        length=length,
        longest=longest,
        straight=straight,
        centre=centre,
        radius=radius,
        sweep_deg=sweep,
        unit=unit,
    )


def _arcs(xy, vertex, start, owner, count, straight, longest, unit):
    """Centre, radius and sweep of every line that is an arc (algebraic fit: Kasa 1976, IEEE Trans. IM 25)."""
    weight = vertex.astype(float)
    total = np.add.reduceat(weight, start)
    middle = np.stack([np.add.reduceat(weight * xy[:, k], start) for k in (0, 1)], axis=1) / total[:, None]
    u, v = (xy - middle[owner]).T
    w = u * u + v * v
    sums = {
        name: np.add.reduceat(weight * value, start)
        for name, value in {"uu": u * u, "uv": u * v, "vv": v * v, "uw": u * w, "vw": v * w, "w": w}.items()
    }
    det = sums["uu"] * sums["vv"] - sums["uv"] ** 2
    good = (total >= 3) & ~straight & (det > 1e-9 * np.maximum(sums["w"], 1e-300) ** 2)
    det = np.where(good, det, 1.0)
    a = 0.5 * (sums["uw"] * sums["vv"] - sums["vw"] * sums["uv"]) / det
    b = 0.5 * (sums["vw"] * sums["uu"] - sums["uw"] * sums["uv"]) / det
    radius = np.sqrt(a * a + b * b + sums["w"] / total)
    centre = middle + np.stack([a, b], axis=1)
    arm = xy - centre[owner]
    stray = np.abs(np.hypot(*arm.T) - radius[owner])
    good &= np.maximum.reduceat(np.where(vertex, stray, 0), start) <= ROUND_SHARE * radius + ROUND_PT * unit
    # Chords and four-arc circles run beside the circle, but not far: a square's corners lie on a circle too.
    good &= np.maximum.reduceat(stray, start) <= 0.02 * radius
    good &= longest <= LONGEST_CHORD * radius
    turn = np.arctan2(arm[:, 1], arm[:, 0])
    turned = np.abs((np.diff(turn, append=turn[-1:]) + np.pi) % (2 * np.pi) - np.pi)
    turned[start + count - 1] = 0
    sweep = np.degrees(np.add.reduceat(turned, start))
    # An arc of little sweep lies on many circles: its chord must rise clear of the rounding.
    rise = radius * (1 - np.cos(np.radians(np.minimum(sweep, 180) / 2)))
    good &= rise > 4 * STRAIGHT_PT * unit
    return np.where(good[:, None], centre, np.nan), np.where(good, radius, np.nan), np.where(good, sweep, 0.0)
