"""The drawn parts of the proof: the reading over the picture, the same reading drawn anew, and its error by
bearing.

Everything is drawn as a mask of twice the size, shrunk and laid on, which gives even lines of any width.
States differ by shape besides colour: seen is a thick line, bridged a thin line with open circles, floor
triangles, missing a gap with a cross on the outer ring.
"""

from dataclasses import dataclass

import cv2
import numpy as np

__all__ = [
    "ERROR_TICKS_DB",
    "Mask",
    "View",
    "arc_angles",
    "draw_error_strip",
    "draw_grid",
    "draw_sample",
    "draw_trace",
    "error_place",
    "make_mask",
    "make_view",
    "on_arc",
    "picture_panel",
    "rule_strip",
]

FINER = 2  # mask pixels a panel pixel
SHIFT = 4  # fixed-point bits of a place, for OpenCV
ARC_SLACK_DEG = 0.5
THIN_PX, HAIR_PX = 0.9, 0.5
OVER_PX, ANEW_PX = 1.4, 2.2  # a seen trace over the chart leaves the ink in sight on both sides
MARKER_PX = 3.4
MARKER_APART_PX = 11.0
BAND_STRENGTH = 0.35
RING_STRENGTH, SPOKE_STRENGTH = 0.42, 0.22  # how far grid lines stand off the paper
ERROR_FROM_DB, ERROR_TO_DB = 0.003, 30.0  # ends of the error axis
ERROR_TICKS_DB = (0.01, 0.1, 1.0, 10.0)


@dataclass(frozen=True, kw_only=True)
class View:
    """The part of the picture that a panel shows.

    left, top : px on the picture of the outer corner of the panel's first pixel; zoom : panel px per picture
        px; width, height : panel px
    """

    left: float
    top: float
    zoom: float
    width: int
    height: int

    def place(self, x_px, y_px):
        """Panel px of picture px; both have pixel centres at integers."""
        return (x_px - self.left) * self.zoom - 0.5, (y_px - self.top) * self.zoom - 0.5


def arc_angles(grid, n):
    """(n,) plane angles along the arc that the chart is drawn on."""
    start, end = grid.arc_deg
    return start + np.linspace(0, (end - start) % 360 or 360.0, n)


def on_arc(grid, plane_deg):
    """True where the chart is drawn at a plane angle."""
    start, end = grid.arc_deg
    return (plane_deg - start + ARC_SLACK_DEG) % 360 <= ((end - start) % 360 or 360.0) + 2 * ARC_SLACK_DEG


def make_view(reading, *, width, least, most):
    """The `View` round one chart: its region, as far as its labels can be, `least` to `most` px high."""
    grid, box = reading.grid, reading.box
    x, y = grid.to_picture(np.full(181, 1.0), arc_angles(grid, 181))
    x, y = np.append(x, grid.centre_x), np.append(y, grid.centre_y)
    near, far = 0.16 * grid.outer_px, 0.24 * grid.outer_px  # room for the line, room for rim labels
    left = min(x.min() - near, max(box.x, x.min() - far))
    right = max(x.max() + near, min(box.x + box.w, x.max() + far))
    top = min(y.min() - near, max(box.y, y.min() - far))
    bottom = max(y.max() + near, min(box.y + box.h, y.max() + far))
    zoom = min(width / (right - left), most / (bottom - top))
    height = int(np.clip(round(zoom * (bottom - top)), least, most))
    return View(
        left=(left + right) / 2 - width / zoom / 2,
        top=(top + bottom) / 2 - height / zoom / 2,
        zoom=zoom,
        width=width,
        height=height,
    )


def picture_panel(rgb, view, paper):
    """The picture's part as a panel, (height, width, 3) uint8; beyond the picture is paper."""
    x0, y0 = max(int(view.left) - 2, 0), max(int(view.top) - 2, 0)
    part = rgb[
        y0 : int(view.top + view.height / view.zoom) + 3, x0 : int(view.left + view.width / view.zoom) + 3
    ]
    across, down = 1.0, 1.0
    if view.zoom < 0.7:  # averaging first keeps thin lines whole
        height, width = part.shape[:2]
        size = max(1, round(width * view.zoom)), max(1, round(height * view.zoom))
        part = cv2.resize(part, size, interpolation=cv2.INTER_AREA)
        across, down = size[0] / width, size[1] / height
    # Panel px of the part's px: through the outer corners, which pixel sizes do not move.
    zx, zy = view.zoom / across, view.zoom / down
    matrix = np.array(
        [
            [zx, 0, (x0 - 0.5 - view.left) * view.zoom + 0.5 * zx - 0.5],
            [0, zy, (y0 - 0.5 - view.top) * view.zoom + 0.5 * zy - 0.5],
        ]
    )
    return cv2.warpAffine(
        part,
        matrix,
        (view.width, view.height),
        flags=cv2.INTER_CUBIC,
        borderMode=cv2.BORDER_CONSTANT,
        borderValue=tuple(float(v) for v in paper),
    )


class Mask:
    """Where one colour is to be laid, and how thickly; places are panel px."""

    def __init__(self, canvas):
        self.canvas = canvas
        height, width = canvas.shape[:2]
        self.fine = np.zeros((height * FINER, width * FINER), np.uint8)

    def line(self, path, width_px):
        """A line through the points of `path`, (x, y) arrays."""
        cv2.polylines(
            self.fine,
            [self._fixed(np.stack(path, axis=1))],
            False,
            255,
            max(1, round(width_px * FINER)),
            cv2.LINE_AA,
            SHIFT,
        )

    def circle(self, place):
        """A small open circle."""
        centre = tuple(int(v) for v in self._fixed(place))
        cv2.circle(self.fine, centre, int(MARKER_PX * FINER * (1 << SHIFT)), 255, FINER, cv2.LINE_AA, SHIFT)

    def triangle(self, place):
        """A small filled triangle that points down."""
        corners = place + MARKER_PX * np.array([[-1.1, -1.0], [1.1, -1.0], [0.0, 1.2]])
        cv2.fillPoly(self.fine, [self._fixed(corners)], 255, cv2.LINE_AA, SHIFT)

    def cross(self, place):
        """A small cross."""
        for side in (-1, 1):
            ends = place + MARKER_PX * np.array([[-1, -side], [1, side]])
            self.line((ends[:, 0], ends[:, 1]), THIN_PX)

    def quads(self, corners):
        """Filled convex areas, (n, 4, 2)."""
        for quad in self._fixed(corners):
            cv2.fillConvexPoly(self.fine, quad, 255, cv2.LINE_8, SHIFT)

    def lay(self, colour, strength=1.0):
        """Shrink the mask and lay the colour on the canvas."""
        height, width = self.canvas.shape[:2]
        cover = cv2.resize(self.fine, (width, height), interpolation=cv2.INTER_AREA)
        y, x = np.nonzero(cover)
        share = (cover[y, x] * (strength / 255.0))[:, None]
        self.canvas[y, x] = np.round(self.canvas[y, x] * (1 - share) + np.asarray(colour, float) * share)

    @staticmethod
    def _fixed(points):
        """Panel px, centres at integers, as OpenCV's fixed-point places on the mask."""
        return np.round(((np.asarray(points) + 0.5) * FINER - 0.5) * (1 << SHIFT)).astype(np.int32)


def make_mask(canvas):
    """The mask of a panel: of pixels for an array, the panel's own where it is drawn with lines."""
    return Mask(canvas) if isinstance(canvas, np.ndarray) else canvas.mask()


def draw_grid(canvas, reading, to_panel, paper):
    """The chart's rings and spokes on a panel of plain paper."""
    grid = reading.grid
    opposite = np.zeros(3) if np.mean(paper) > 127 else np.full(3, 255.0)
    angles = arc_angles(grid, 361)
    spokes, rings = make_mask(canvas), make_mask(canvas)
    for plane in grid.spoke_deg:
        if on_arc(grid, plane):
            spokes.line(to_panel(np.array([0.0, 1.0]), np.array([plane, plane])), THIN_PX)
    for k, rho in enumerate(grid.ring_rho):
        rings.line(to_panel(np.full(361, rho), angles), 1.8 if k == 0 else THIN_PX)
    spokes.lay(opposite, SPOKE_STRENGTH)
    rings.lay(opposite, RING_STRENGTH)


def draw_trace(canvas, reading, trace, to_panel, colour, *, anew):
    """One trace on a panel: when drawn anew with its error as a band, else as a fine line over the ink."""
    table = trace.table
    plane = reading.bearing.to_plane(table.angle_deg)
    has = np.isfinite(table.chart_db)
    level = np.where(has, table.chart_db, reading.scale.level(np.ones(1))[0])
    if anew:
        error = np.where(has, table.error95_db, 0.0)
        low, high = reading.scale.rho(level - error), reading.scale.rho(level + error)
        band = make_mask(canvas)
        band.quads(_quads(to_panel(np.clip(low, 0, 1.5), plane), to_panel(np.clip(high, 0, 1.5), plane), has))
        band.lay(colour, BAND_STRENGTH)
    mask = make_mask(canvas)
    x, y = to_panel(np.clip(reading.scale.rho(level), 0, 1.5), plane)
    ring = to_panel(np.ones(len(plane)), plane)
    state = np.where(on_arc(reading.grid, plane), table.state, "")  # off the drawn arc nothing is missed
    _states(mask, x, y, state, ANEW_PX if anew else OVER_PX, closed=True, ring=ring)
    mask.lay(colour)


def draw_error_strip(canvas, table, colour):
    """The error of every row against bearing, on a logarithmic axis, with the marks of the states."""
    height, width = canvas.shape[:2]
    has = np.isfinite(table.error95_db)
    error = np.clip(np.where(has, table.error95_db, ERROR_FROM_DB), ERROR_FROM_DB, ERROR_TO_DB)
    x = table.angle_deg / 360 * (width - 1)
    y = (1 - error_place(error)) * (height - 1)
    mask = make_mask(canvas)
    _states(mask, x, y, table.state, ANEW_PX, closed=False, ring=(x, np.full(len(x), 6.0)))
    mask.lay(colour)


def error_place(error_db):
    """Place of an error on the strip's axis, 0 at its lower end and 1 at its upper one."""
    return np.log(np.asarray(error_db) / ERROR_FROM_DB) / np.log(ERROR_TO_DB / ERROR_FROM_DB)


def rule_strip(strip, paper):
    """Lines of even error and bearing on the bare strip."""
    height, width = strip.shape[:2]
    mask = make_mask(strip)
    for level in ERROR_TICKS_DB:
        y = round((1 - float(error_place(level))) * (height - 1))
        mask.line((np.array([0, width - 1]), np.array([y, y])), HAIR_PX)
    for bearing in range(0, 361, 30):
        x = round(bearing / 360 * (width - 1))
        mask.line((np.array([x, x]), np.array([0, height - 1])), HAIR_PX)
    mask.lay(np.clip(paper + (-1 if np.mean(paper) > 127 else 1) * 60, 0, 255))


def draw_sample(canvas, state, colour):
    """A short piece of a trace in one state, for the legend."""
    height, width = canvas.shape[:2]
    x = np.linspace(4, width - 5, 12)
    y = np.full(12, (height - 1) / 2)
    mask = make_mask(canvas)
    _states(mask, x, y, np.full(12, state), ANEW_PX, closed=False, ring=(x, y))
    mask.lay(colour)


def _states(mask, x, y, state, width_px, *, closed, ring):
    """Draw a path by the states of its points; `ring` is where a missing point gets its cross."""
    n = len(x)
    following = (np.arange(n) + 1) % n
    lined = np.isin(state, ("seen", "bridged"))
    joined = lined & lined[following] & ((np.arange(n) < n - 1) | closed)
    thick = joined & (state == "seen") & (state[following] == "seen")
    for chosen, width in ((thick, width_px), (joined & ~thick, THIN_PX)):
        for first, count in _runs(chosen):
            at = (first + np.arange(count + 1)) % n
            mask.line((x[at], y[at]), width)
    for name, mark, places in (
        ("bridged", mask.circle, (x, y)),
        ("floor", mask.triangle, (x, y)),
        ("missing", mask.cross, ring),
    ):
        before = None
        for k in np.flatnonzero(state == name):
            place = np.array([places[0][k], places[1][k]])
            if before is None or np.hypot(*(place - before)) >= MARKER_APART_PX:
                mark(place)
                before = place


def _runs(chosen):
    """First index and length of every run of True."""
    edges = np.diff(np.concatenate(([0], chosen.astype(np.int8), [0])))
    starts, ends = np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)
    return zip(starts, ends - starts, strict=True)


def _quads(low, high, has):
    """(n, 4, 2) areas between two closed paths, from every row to the next where both have a value."""
    following = (np.arange(len(has)) + 1) % len(has)
    low, high = np.stack(low, axis=1), np.stack(high, axis=1)
    return np.stack([low, low[following], high[following], high], axis=1)[has & has[following]]
