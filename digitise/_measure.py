"""Measures on many tables at once: peak, crossings, tops and bottoms between rows.

Every function takes levels of shape (m, n), dB, m tables of n rows around the circle (the table as read and
draws from its errors), and gives m results, NaN where a table has none. Positions are in rows.

Between rows a curve is followed by a polynomial: a peak by the least-squares quartic through its top, so
that one noisy row does not make the peak; a crossing by the cubic through the four rows about it; a null by
a cubic of the field that changes its sign there, or, when it is filled, by a parabola of the power.
"""

import numpy as np

__all__ = ["bottom_place", "crossing", "level_at", "main_peak", "top"]

TOP_DB = 0.6  # rows within this of the largest are a lobe's top; a quartic follows it within 0.01 dB
TOP_DEG = 15.0  # but no wider on either side
FINE = 161  # points that the quartic is evaluated at
NEAR_TOP_DB = 0.01  # the peak stands at the middle of what is so near to the largest value
FILLED_SHARE = 0.1  # a null is filled when its vertex holds more of the power that the lower neighbour has
SAFE_STEEP_DB = 6.0  # rows more than this apart are joined by a straight line: a cubic would swing


def main_peak(levels, row, step_deg):
    """Level (dB) and place (rows) of the lobe whose largest row in the first table is `row`."""
    first = levels[0]
    n = len(first)
    reach = max(1, min(int(TOP_DEG / step_deg), (n - 1) // 2))
    sides = []
    for way in (-1, 1):
        k = 1
        while k <= reach and first[(row + way * k) % n] >= first[row] - TOP_DB:
            k += 1
        sides.append(max(1, k - 1))
    offsets = np.arange(-sides[0], sides[1] + 1)
    offsets = offsets[np.isfinite(first[(row + offsets) % n])]
    degree = 4 if len(offsets) >= 9 else min(2, len(offsets) - 1)
    half = max(float(np.abs(offsets).max()), 1.0)
    fine = np.linspace(offsets[0], offsets[-1], FINE)
    fit = np.vander(fine / half, degree + 1) @ np.linalg.pinv(np.vander(offsets / half, degree + 1))
    curve = levels[:, (row + offsets) % n] @ fit.T
    peak = curve.max(axis=1)
    near = np.maximum(curve - (peak[:, None] - NEAR_TOP_DB), 0)
    return peak, row + near @ fine / near.sum(axis=1)


def crossing(levels, row, threshold, way):
    """Rows from `row` to the first place where the level falls to `threshold` (m,), up (1) or down (-1)."""
    m, n = levels.shape
    order = (row + way * np.arange(n)) % n
    below = ~(levels[:, order] > threshold[:, None])  # a row without a value stops the search too
    j = below.argmax(axis=1)
    each = np.arange(m)
    at = [levels[each, order[(j + k) % n]] - threshold for k in (-2, -1, 0, 1)]
    with np.errstate(divide="ignore", invalid="ignore"):
        t = at[1] / (at[1] - at[2])
        cubic = _cubic_root(at, t)
    smooth = np.abs(at[1] - at[2]) < SAFE_STEEP_DB
    t = np.where(smooth & (cubic >= 0) & (cubic <= 1), cubic, t)
    found = below.any(axis=1) & (j > 0) & np.isfinite(at[2])
    return np.where(found, j - 1 + t, np.nan)


def level_at(levels, place):
    """Level at places (m,) between rows, on the straight line."""
    m, n = levels.shape
    low = np.floor(place).astype(int)
    share = place - low
    each = np.arange(m)
    return (1 - share) * levels[each, low % n] + share * levels[each, (low + 1) % n]


def top(levels, rows):
    """Largest level (dB) among contiguous rows, and its place in rows.

    Between rows by a parabola of field.
    """
    part = levels[:, rows % levels.shape[1]]
    j = np.argmax(np.where(np.isnan(part), -np.inf, part), axis=1)
    shift, rise = _vertex(levels, rows[0] + j, per_db=1 / 20)
    return part[np.arange(len(j)), j] + 20 * np.log10(1 + rise), rows[0] + j + shift


def bottom_place(levels, rows):
    """Place (rows) of the smallest level among contiguous rows, and by how much two ways to find it differ.

    A null that the field passes through is where the cubic through four rows of signed field is zero; a
    filled one is the vertex of the parabola of power, which tells the two apart by its own depth. The
    difference is that of the first table.
    """
    n = levels.shape[1]
    part = levels[:, rows % n]
    j = rows[0] + np.argmin(np.where(np.isnan(part), np.inf, part), axis=1)
    shift, deeper = _vertex(levels, j, per_db=-1 / 10)
    each = np.arange(len(j))
    with np.errstate(divide="ignore", invalid="ignore"):
        left2, left, low, right, right2 = (10 ** (levels[each, (j + k) % n] / 20) for k in (-2, -1, 0, 1, 2))
        to_left = _rough(left2, left, -low, -right, -right2) < _rough(left2, left, low, -right, -right2)
        side = np.where(to_left, -1, 1)
        near, behind = np.where(to_left, left, right), np.where(to_left, right, left)
        beyond = np.where(to_left, left2, right2)
        straight = low / (low + near)
        cubic = _cubic_root((behind, low, -near, -beyond), straight)
        filled = 1 - deeper > FILLED_SHARE * (np.minimum(left, right) / low) ** 2
    cubic = np.where((cubic >= 0) & (cubic <= 1), cubic, straight)
    through = side * cubic
    through = np.where(np.isfinite(through), through, shift)
    place = np.where(filled, shift, through)
    return j + place, float(abs(through[0] - shift[0]))


def _rough(*values):
    """Sum of the sizes of second differences: of two readings of signs, the true one is the smoother."""
    return sum(np.abs(a - 2 * b + c) for a, b, c in zip(values, values[1:], values[2:], strict=False))


def _vertex(levels, at, *, per_db):
    """Shift (rows, within half a row) and rise of a parabola's vertex over the middle of three values.

    The values are field (`per_db` 1/20) about a largest level, or power (-1/10) about a smallest one, there
    turned over, so that what rises is the depth; both in units of the middle value.
    """
    n = levels.shape[1]
    each = np.arange(len(at))
    left, middle, right = (levels[each, (at + k) % n] for k in (-1, 0, 1))
    sign = np.sign(per_db)
    a, c = (sign * 10 ** ((value - middle) * abs(per_db)) for value in (left, right))
    bend = a - 2 * sign + c
    with np.errstate(divide="ignore", invalid="ignore"):
        shift = 0.5 * (a - c) / bend
    good = (bend < 0) & (np.abs(shift) <= 0.5)
    shift = np.where(good, shift, 0.0)
    return shift, np.where(good, -0.25 * (a - c) * shift, 0.0)


def _cubic_root(at, t):
    """Where the cubic through four values at -1, 0, 1, 2 is zero, by Newton's method from t."""
    a, b, c, d = at
    c1 = -a / 3 - b / 2 + c - d / 6
    c2 = (a + c) / 2 - b
    c3 = (d - a) / 6 + (b - c) / 2
    for _ in range(3):
        t = t - (b + t * (c1 + t * (c2 + t * c3))) / (c1 + t * (2 * c2 + t * 3 * c3))
    return t
