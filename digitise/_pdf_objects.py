"""A page's drawn objects as frozen classes, in display points: lines, texts and images, exactly placed.

Curves are flattened finely; which points the drawing names itself ("vertices") is kept, since those lie on
the curve that was meant, while the points between follow the drawing program's own approximation (a circle of
four Bezier arcs is up to 0.027 % too large between its quarter points). Odd objects are left out, never a
reason to stop.
"""

import ctypes
import itertools
import math
import time
from dataclasses import dataclass, field, replace

import numpy as np

from ._pdf_curves import CURVE, MOVE, flat_line

__all__ = ["VectorImage", "VectorPage", "VectorPath", "VectorText", "collect_objects", "moved"]

MAX_SEGMENTS = 300_000  # about 1.5 s; a page above it is a map or a drawing, read from its pixels
MAX_OBJECTS = 60_000
MAX_POINTS = 3_000_000  # after flattening
COLLECT_SECONDS = 4.0
MAX_DEPTH = 12  # of forms within forms
TEXT, PATH, IMAGE, FORM = 1, 2, 3, 5


@dataclass(frozen=True, eq=False, kw_only=True)
class VectorPath:
    """One drawn path.

    runs : tuple of (n, 2) points, one array per unbroken line; a closed run ends where it began
    vertices : tuple of (n,) bool, points that the drawing names itself (and the middles of its curves)
    curved : whether it holds Bezier curves
    stroke, fill : (r, g, b) 0 to 255, or None
    stroke_alpha, fill_alpha : opacity, 0 to 1
    width : line width
    dash : tuple of lengths, empty when solid
    clips : tuple of (n, 2) closed outlines inside all of which it shows
    """

    runs: tuple
    vertices: tuple
    curved: bool
    stroke: tuple | None
    fill: tuple | None
    stroke_alpha: float
    fill_alpha: float
    width: float
    dash: tuple
    clips: tuple = ()


@dataclass(frozen=True, eq=False, kw_only=True)
class VectorText:
    """One piece of text in one line.

    x, y : centre; w, h : size along and across its own line; angle_deg : clockwise turn of its line
    size : of the font
    """

    text: str
    x: float
    y: float
    w: float
    h: float
    angle_deg: float
    size: float


@dataclass(frozen=True, eq=False, kw_only=True)
class VectorImage:
    """One placed bitmap: matrix (2, 3) from its unit square, y up, to the page; its size in its own px."""

    matrix: np.ndarray
    width: int
    height: int


@dataclass(frozen=True, eq=False, kw_only=True)
class VectorPage:
    """What is drawn on a page, in drawing order within each kind; lengths and places share one unit.

    paths, texts, images : tuples of VectorPath, VectorText, VectorImage
    whole : False when the page held more than is looked at, so that objects are missing
    embedded : the picture is a bitmap of the page, taken at its own pixels
    px_per_pt : picture px per display point, NaN while places are display points
    """

    paths: tuple = ()
    texts: tuple = ()
    images: tuple = ()
    whole: bool = True
    embedded: bool = False
    px_per_pt: float = field(default=math.nan)


class _Budget:
    """What may still be looked at."""

    def __init__(self):
        self.segments, self.objects, self.points = MAX_SEGMENTS, MAX_OBJECTS, MAX_POINTS
        self.deadline = time.monotonic() + COLLECT_SECONDS

    def spend(self, segments):
        """Take one object of so many segments; False when that is too much."""
        self.objects -= 1
        self.segments -= segments
        return min(self.objects, self.segments, self.points) >= 0 and time.monotonic() < self.deadline


def collect_objects(page, view):
    """The paths and images of an open page as a `VectorPage` in display points (texts: `_pdf_text`).

    Also the engine's own handles of the images, in the same order; they die with the page.
    """
    from pypdfium2 import raw

    collector = _Collector(raw, page)
    whole = collector.walk(raw.FPDFPage_CountObjects(page), page, raw.FPDFPage_GetObject, view.matrix, (), 0)
    drawn = VectorPage(paths=tuple(collector.paths), images=tuple(collector.images), whole=whole)
    return drawn, collector.image_items


def moved(page, matrix):
    """A `VectorPage` with every place taken through a (2, 3) matrix."""
    matrix = np.asarray(matrix, float)
    size = math.sqrt(abs(np.linalg.det(matrix[:, :2])))
    turn = math.degrees(math.atan2(matrix[1, 0], matrix[0, 0]))
    clips = {}

    def move(points):
        out = points @ matrix[:, :2].T + matrix[:, 2]
        out.setflags(write=False)
        return out

    def move_clip(points):
        if id(points) not in clips:
            clips[id(points)] = move(points)
        return clips[id(points)]

    paths = tuple(
        replace(
            path,
            runs=tuple(move(run) for run in path.runs),
            width=path.width * size,
            dash=tuple(length * size for length in path.dash),
            clips=tuple(move_clip(clip) for clip in path.clips),
        )
        for path in page.paths
    )
    texts = []
    for text in page.texts:
        x, y = matrix @ (text.x, text.y, 1.0)
        texts.append(
            replace(
                text,
                x=float(x),
                y=float(y),
                w=text.w * size,
                h=text.h * size,
                size=text.size * size,
                angle_deg=text.angle_deg + turn,
            )
        )
    images = tuple(replace(image, matrix=_chain(matrix, image.matrix)) for image in page.images)
    return replace(page, paths=paths, texts=tuple(texts), images=images, px_per_pt=size)


def _chain(outer, inner):
    """(2, 3) matrix that takes `inner` first."""
    if inner is None:
        return outer
    return np.column_stack([outer[:, :2] @ inner[:, :2], outer[:, :2] @ inner[:, 2] + outer[:, 2]])


class _Collector:
    """Walks the objects of a page and of the forms on it."""

    def __init__(self, raw, page):
        self.raw, self.page = raw, page
        self.budget = _Budget()
        self.paths, self.images, self.image_items, self.clips = [], [], [], {}

    def walk(self, count, parent, get, matrix, clips, depth):
        """Take what is on a page or in a form; False when the budget ran out."""
        for k in range(max(count, 0)):
            item = get(parent, k)
            if not item:
                continue
            kind = self.raw.FPDFPageObj_GetType(item)
            segments = self.raw.FPDFPath_CountSegments(item) if kind == PATH else 0
            if not self.budget.spend(max(segments, 0)):
                return False
            if kind == FORM:
                if depth >= MAX_DEPTH:
                    continue
                inner = _chain(matrix, self._matrix(item))
                within = (*clips, *self._clips(item, matrix))
                form = (self.raw.FPDFFormObj_CountObjects(item), item, self.raw.FPDFFormObj_GetObject)
                if not self.walk(*form, inner, within, depth + 1):
                    return False
            elif kind == PATH:
                self._take_path(item, segments, matrix, clips)
            elif kind == IMAGE:
                self._take_image(item, matrix)
        return True

    def _matrix(self, item):
        """(2, 3) of an object, None for the identity."""
        m = self.raw.FS_MATRIX()
        if not self.raw.FPDFPageObj_GetMatrix(item, m) or (m.a, m.b, m.c, m.d, m.e, m.f) == (
            1,
            0,
            0,
            1,
            0,
            0,
        ):
            return None
        return np.array([[m.a, m.c, m.e], [m.b, m.d, m.f]], float)

    def _take_image(self, item, matrix):
        width, height = ctypes.c_uint(), ctypes.c_uint()
        if not self.raw.FPDFImageObj_GetImagePixelSize(item, width, height):
            return
        place = _chain(matrix, self._matrix(item))
        if np.isfinite(place).all() and width.value and height.value:
            self.images.append(VectorImage(matrix=place, width=width.value, height=height.value))
            self.image_items.append(item)

    def _take_path(self, item, n_segments, matrix, clips):
        raw = self.raw
        filled, stroked = ctypes.c_int(), ctypes.c_int()
        if n_segments < 2 or not raw.FPDFPath_GetDrawMode(item, filled, stroked):
            return
        stroke, stroke_alpha = (
            self._colour(item, raw.FPDFPageObj_GetStrokeColor) if stroked.value else (None, 0.0)
        )
        fill, fill_alpha = self._colour(item, raw.FPDFPageObj_GetFillColor) if filled.value else (None, 0.0)
        if stroke is None and fill is None:
            return
        place = _chain(matrix, self._matrix(item))
        runs, curved = self._runs(item, n_segments, raw.FPDFPath_GetPathSegment, place)
        if not runs:
            return
        size = math.sqrt(abs(place[0, 0] * place[1, 1] - place[0, 1] * place[1, 0]))
        width = ctypes.c_float()
        raw.FPDFPageObj_GetStrokeWidth(item, width)
        self.paths.append(
            VectorPath(
                runs=tuple(points for points, _ in runs),
                vertices=tuple(vertex for _, vertex in runs),
                curved=curved,
                stroke=stroke,
                fill=fill,
                stroke_alpha=stroke_alpha,
                fill_alpha=fill_alpha,
                width=max(float(width.value), 0.0) * size,
                dash=self._dash(item, size),
                clips=(*clips, *self._clips(item, matrix)),
            )
        )

    def _colour(self, item, get):
        """((r, g, b), opacity), or (None, 0) for a pattern, an unknown colour or a clear one."""
        parts = [ctypes.c_uint() for _ in range(4)]
        if not get(item, *parts) or parts[3].value == 0:
            return None, 0.0
        return tuple(part.value for part in parts[:3]), parts[3].value / 255

    def _dash(self, item, size):
        count = self.raw.FPDFPageObj_GetDashCount(item)
        if not 0 < count <= 64:
            return ()
        lengths = (ctypes.c_float * count)()
        if not self.raw.FPDFPageObj_GetDashArray(item, lengths, count):
            return ()
        dash = tuple(float(length) * size for length in lengths)
        return dash if sum(dash) > 0 and min(dash) >= 0 else ()

    def _clips(self, item, matrix):
        """Outlines of what an object is clipped to; equal ones are kept once."""
        raw = self.raw
        clip = raw.FPDFPageObj_GetClipPath(item)
        count = raw.FPDFClipPath_CountPaths(clip) if clip else 0
        found = []
        for k in range(min(max(count, 0), 64)):
            n = raw.FPDFClipPath_CountPathSegments(clip, k)
            if n < 3:
                continue

            def get(parent, j, k=k):
                return raw.FPDFClipPath_GetPathSegment(parent, k, j)

            # Every object of a chart carries the same clip: three of its points tell it from another.
            key = (n, matrix.tobytes(), *(self._point(get(clip, j)) for j in (0, n // 2, n - 1)))
            if key not in self.clips:
                if not self.budget.spend(n):
                    continue
                runs, _ = self._runs(clip, n, get, matrix)
                # Several outlines in one clip may be holes: that is left to the pixels.
                self.clips[key] = runs[0][0] if len(runs) == 1 else None
            if self.clips[key] is not None:
                found.append(self.clips[key])
        return tuple(found)

    def _point(self, segment):
        x, y = ctypes.c_float(), ctypes.c_float()
        if not segment or not self.raw.FPDFPathSegment_GetPoint(segment, x, y):
            return None
        return x.value, y.value

    def _runs(self, parent, count, get, matrix):
        """[(points, vertex flags)] of a path's unbroken lines, flat and placed; and whether it has curves."""
        raw = self.raw
        kind_of, point_of, closes = (
            raw.FPDFPathSegment_GetType,
            raw.FPDFPathSegment_GetPoint,
            raw.FPDFPathSegment_GetClose,
        )
        x, y = ctypes.c_float(), ctypes.c_float()
        ref_x, ref_y = ctypes.byref(x), ctypes.byref(y)
        kinds, points, closed = [], [], []
        for k in range(count):
            segment = get(parent, k)
            if not segment or not point_of(segment, ref_x, ref_y):
                return [], False
            kinds.append(kind_of(segment))
            points.append((x.value, y.value))
            closed.append(bool(closes(segment)))
        kinds = np.array(kinds)
        points = np.array(points, float) @ matrix[:, :2].T + matrix[:, 2]
        if not np.isfinite(points).all() or np.abs(points).max() > 1e6:
            return [], False
        starts = [*np.flatnonzero(kinds == MOVE), count]
        if starts[0] != 0:
            return [], False
        runs = [
            flat_line(points[a:b], kinds[a:b], closed[b - 1])
            for a, b in itertools.pairwise(starts)
            if b - a > 1
        ]
        runs = [run for run in runs if run is not None]
        self.budget.points -= sum(len(flat) for flat, _ in runs)
        return runs, bool((kinds == CURVE).any())
