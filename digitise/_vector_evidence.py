"""Which of a chart's drawn lines are traces: they run round the centre one way, and show.

A pattern is drawn in the order of its bearings, so its line turns about the chart's centre one way; letters,
logos, markers and legend boxes turn to and fro. What the page holds but nothing shows of (a hidden layer, a
line under a filled area) is told by the pixels: a trace's own colour must lie along it.
"""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["Course", "course_of", "find_paper", "is_trace", "shown_ink", "shows"]

LEAST_POINTS = 12
LEAST_LENGTH = 0.5  # outer radii
LEAST_TURN_DEG, LEAST_BEAM_DEG = 30.0, 5.0  # the second for a beam out of the centre and back
ONE_WAY = 0.6  # net turn over turn to and fro
INSIDE = 0.8  # share of the length inside the rim
RIM_RHO = 1.1
CENTRE_RHO = 0.01  # nearer to the centre a bearing means nothing
SAME_RHO = 0.004  # a line that keeps its radius so well is an arc
UPRIGHT = 0.7  # share of a box's outline that runs along the picture's sides
LEAST_SHOWN = 0.2  # of the line's places: dashes and what crosses it leave so much at least
SAMPLES = 400
GROUND_RHO = 0.9  # an area that a chart is drawn upon reaches so far


@dataclass(frozen=True, eq=False, kw_only=True)
class Course:
    """A chain in the chart plane.

    rho, plane_deg : (n,) NaN where the pen was up
    turn_deg : how far it turns about the centre, to and fro; net_deg : clockwise less counter-clockwise
    length : outer radii
    """

    rho: np.ndarray
    plane_deg: np.ndarray
    turn_deg: float
    net_deg: float
    length: float

    def __post_init__(self):
        lock_arrays(self)


def course_of(points, grid):
    """The `Course` of (n, 2) picture points."""
    rho, deg = grid.to_plane(points[:, 0], points[:, 1])
    step = (np.diff(deg) + 180) % 360 - 180
    # Across the centre the bearing jumps without the line going round it.
    through = np.minimum(rho[:-1], rho[1:]) < CENTRE_RHO
    step = np.where(through | ~np.isfinite(step), 0.0, step)
    u, v = rho * np.sin(np.radians(deg)), -rho * np.cos(np.radians(deg))
    length = float(np.nansum(np.hypot(np.diff(u), np.diff(v))))
    return Course(
        rho=rho,
        plane_deg=deg,
        turn_deg=float(np.abs(step).sum()),
        net_deg=float(step.sum()),
        length=length,
    )


def is_trace(chain, course):
    """Whether a chain runs as a trace does."""
    known = np.isfinite(course.rho)
    if known.sum() < LEAST_POINTS or course.length < LEAST_LENGTH:
        return False
    inside = float(np.mean(course.rho[known] <= RIM_RHO))
    touches = bool(course.rho[known].min() < CENTRE_RHO)
    if inside < INSIDE or course.turn_deg < (LEAST_BEAM_DEG if touches else LEAST_TURN_DEG):
        return False
    if abs(course.net_deg) < ONE_WAY * course.turn_deg:
        return False
    if np.ptp(course.rho[known]) < SAME_RHO and abs(course.net_deg) < 300:
        return False
    return not _is_box(chain.points)


def _is_box(points):
    """Whether most of a line runs along the picture's sides."""
    step = np.abs(np.diff(points, axis=0))
    step = step[np.isfinite(step).all(axis=1)]
    length = np.hypot(*step.T)
    along = step.min(axis=1) < 0.01 * length
    return bool(length[along].sum() > UPRIGHT * length.sum())


def find_paper(page, grid, lines):
    """(3,) colour that a chart is drawn upon: the last opaque area under all of it before its grid."""
    first = min((path for path, _ in lines), default=len(page.paths))
    deg = np.arange(0, 360, 15.0)
    x, y = grid.to_picture(np.full(len(deg), GROUND_RHO), deg)
    paper = np.full(3, 255.0)
    for k, path in enumerate(page.paths):
        if (
            path.fill is None
            or path.fill_alpha < 0.99
            or (k >= first and not any((k, j) in lines for j in range(len(path.runs))))
        ):
            continue
        for run in path.runs:
            low, high = run.min(axis=0), run.max(axis=0)
            if low[0] <= x.min() and low[1] <= y.min() and high[0] >= x.max() and high[1] >= y.max():
                paper = np.array(path.fill, float)
    return paper


def shown_ink(look, paper):
    """(3,) the colour of a look as it shows on the paper."""
    return paper + look.alpha * (np.asarray(look.colour, float) - paper)


def shows(chain, rgb, ink, paper):
    """Whether the ink lies on the picture along a chain."""
    contrast = float(np.abs(ink - paper).max())
    if contrast < 8:
        return False
    points = chain.points[np.isfinite(chain.points).all(axis=1)]
    step = np.hypot(*np.diff(points, axis=0).T)
    along = np.concatenate([[0], np.cumsum(step)])
    at = np.linspace(0, along[-1], SAMPLES)
    x, y = np.interp(at, along, points[:, 0]), np.interp(at, along, points[:, 1])
    height, width = rgb.shape[:2]
    least = np.full(SAMPLES, np.inf)
    for dx in (-1, 0, 1):
        for dy in (-1, 0, 1):
            ix, iy = np.round(x + dx).astype(int), np.round(y + dy).astype(int)
            ok = (ix >= 0) & (iy >= 0) & (ix < width) & (iy < height)
            px = rgb[np.clip(iy, 0, height - 1), np.clip(ix, 0, width - 1)].astype(float)
            least = np.where(ok, np.minimum(least, np.abs(px - ink).max(axis=1)), least)
    # A hairline is never wholly inked: half its contrast is enough.
    return bool(np.mean(least < 0.6 * contrast) >= LEAST_SHOWN)
