"""A page as an ordered list of strokes, areas and lines of print, which every renderer can paint.

Dashes are cut here, by length along the line, so that all renderers dash alike and the truth is the same.
"""

from dataclasses import dataclass

import numpy as np

from .spec import N_TRUE, STEP_TRUE, Panel, Stroke, Text, drawn_curve, rho_of

DASHES = {"dashed": (5.0, 3.0), "dotted": (1.0, 2.0), "dashdot": (7.0, 2.5, 1.2, 2.5)}  # in line widths
N_CIRCLE = 1440


@dataclass(frozen=True, eq=False, kw_only=True)
class Pen:
    """An open or closed line through points (n, 2) px."""

    points: np.ndarray
    colour: str
    width: float
    closed: bool = False


@dataclass(frozen=True, eq=False, kw_only=True)
class Area:
    """A filled outline (n, 2) px, painted with an opacity."""

    points: np.ndarray
    colour: str
    opacity: float = 1.0


def strokes_of(page):
    """All of a page, in painting order: a list of `Pen`, `Area` and `Text`."""
    ops = []
    for chart in page.charts:
        ops += _grid(chart)
        if not chart.labels_over:
            ops += _ring_labels(chart)
        for trace in chart.traces:
            ops += _trace(chart, trace)
        if chart.labels_over:
            ops += _ring_labels(chart)
        ops += _rim_labels(chart)
    for item in page.furniture:
        if isinstance(item, Panel):
            corners = np.array(
                [
                    (item.x, item.y),
                    (item.x + item.w, item.y),
                    (item.x + item.w, item.y + item.h),
                    (item.x, item.y + item.h),
                ]
            )
            ops += [
                Area(points=corners, colour=item.fill),
                Pen(points=corners, colour=item.edge, width=1.0, closed=True),
            ]
        elif isinstance(item, Text):
            ops.append(item)
        else:
            ops += pen_lines(np.array(item.points, float), item.stroke)
    return ops


def pen_lines(points, stroke, *, closed=False):
    """`Pen`s of a line, cut into dashes when the stroke has them."""
    if stroke.dash is None:
        return [Pen(points=points, colour=stroke.colour, width=stroke.width, closed=closed)]
    if closed:
        points = np.vstack([points, points[:1]])
    return [
        Pen(points=part, colour=stroke.colour, width=stroke.width) for part in cut_dashes(points, stroke.dash)
    ]


def cut_dashes(points, dash):
    """Cut a line (n, 2) by a dash pattern (on, off, ...) px into its drawn parts, a list of (m, 2)."""
    step = np.hypot(*np.diff(points, axis=0).T)
    keep = np.r_[True, step > 1e-9]
    points, s = points[keep], np.r_[0, np.cumsum(step[step > 1e-9])]
    if len(points) < 2:
        return []
    parts, at, k = [], 0.0, 0
    while at < s[-1]:
        end = min(at + dash[k % len(dash)], s[-1])
        if k % 2 == 0:
            inner = (s > at) & (s < end)
            along = np.r_[at, s[inner], end]
            parts.append(
                np.column_stack([np.interp(along, s, points[:, 0]), np.interp(along, s, points[:, 1])])
            )
        at, k = end, k + 1
    return parts


def _circle(chart, rho, stroke):
    """Draw a ring; half charts get the half about page-top."""
    t = np.arange(N_CIRCLE) * 2 * np.pi / N_CIRCLE
    if chart.half:
        t = np.linspace(-np.pi / 2, np.pi / 2, N_CIRCLE // 2 + 1)
    r = rho * chart.outer_px
    points = np.column_stack([chart.centre_x + r * np.sin(t), chart.centre_y - r * np.cos(t)])
    return pen_lines(points, stroke, closed=not chart.half)


def _grid(chart):
    ops = []
    if chart.disc:
        t = (
            np.linspace(-np.pi / 2, np.pi / 2, 721)
            if chart.half
            else np.arange(N_CIRCLE) * 2 * np.pi / N_CIRCLE
        )
        points = [chart.centre_x + chart.outer_px * np.sin(t), chart.centre_y - chart.outer_px * np.cos(t)]
        ops.append(Area(points=np.column_stack(points), colour=chart.disc))
    if chart.spoke_deg:
        for bearing in np.arange(0, 360 - 1e-9, chart.spoke_deg):
            if chart.half and abs((chart.page_deg(bearing) + 180) % 360 - 180) > 90 + 1e-6:
                continue
            ends = np.column_stack(chart.point(np.array([chart.hub, 1.0]), bearing))
            ops += pen_lines(ends, chart.spoke)
    for db in chart.ring_db:
        rho = float(rho_of(chart.law, db, chart.outer_db, chart.centre_db))
        if rho < 1 - 1e-6:
            ops += _circle(chart, rho, chart.ring)
    ops += _circle(chart, 1.0, chart.rim)
    if chart.half:
        base = np.array(
            [
                [chart.centre_x - chart.outer_px, chart.centre_y],
                [chart.centre_x + chart.outer_px, chart.centre_y],
            ]
        )
        ops += pen_lines(base, chart.rim)
    return ops


def _trace(chart, trace):
    rho, _ = drawn_curve(chart, trace)
    every = round(trace.step_deg / STEP_TRUE)
    rho, bearing = rho[::every], np.arange(0, N_TRUE, every) * STEP_TRUE
    points = np.column_stack(chart.point(rho, bearing))
    unit = max(trace.width, 1.0) * trace.dash_scale
    dash = tuple(unit * part for part in DASHES[trace.dash]) if trace.dash in DASHES else None
    stroke = Stroke(colour=trace.ink, width=trace.width, dash=dash)
    ops = []
    if trace.dash == "fill":
        shown = np.where(np.isfinite(points), points, (chart.centre_x, chart.centre_y))
        ops.append(Area(points=shown, colour=trace.ink, opacity=trace.fill))
    if np.isfinite(rho).all():
        return ops + pen_lines(points, stroke, closed=True)
    start = int(np.flatnonzero(~np.isfinite(rho))[0])  # begin the round in a gap, so that no run wraps
    points, seen = np.roll(points, -start, axis=0), np.roll(np.isfinite(rho), -start)
    edges = np.flatnonzero(np.diff(np.r_[False, seen, False].astype(int)))
    for first, last in zip(edges[::2], edges[1::2], strict=True):
        if last - first > 1:
            ops += pen_lines(points[first:last], stroke)
    return ops


def _ring_labels(chart):
    say = chart.ring_labels
    if say is None:
        return []
    ops = []
    for db in chart.ring_db:
        r = float(rho_of(chart.law, db, chart.outer_db, chart.centre_db)) * chart.outer_px
        if r < 0.9 * say.size:
            continue
        t = np.radians(say.ray_deg)
        number = f"{say.minus if db < 0 else ''}{abs(db):g}{say.unit}"
        turn = (say.ray_deg - 90 if 0 <= say.ray_deg % 360 < 180 else say.ray_deg + 90) if say.along else 0.0
        ops.append(
            Text(
                x=chart.centre_x + r * np.sin(t),
                y=chart.centre_y - r * np.cos(t),
                text=number,
                size=say.size,
                colour=say.colour,
                family=say.family,
                box=say.box,
                turn_deg=(turn + 180) % 360 - 180,
            )
        )
    return ops


def _rim_labels(chart):
    say = chart.rim_labels
    if say is None:
        return []
    ops = []
    for bearing in np.arange(0, 360 - 1e-9, say.step_deg):
        page_deg = float(chart.page_deg(bearing))
        if chart.half and abs((page_deg + 180) % 360 - 180) > 90 + 1e-6:
            continue
        shown = bearing - 360 if say.signed and bearing > 180 else bearing
        text = f"{say.minus if shown < 0 else ''}{abs(shown):g}{say.unit}"
        t = np.radians(page_deg)
        r = say.reach * chart.outer_px
        wide = 0.3 * say.size * (len(text) - 1)
        x, y = chart.centre_x + (r + wide) * np.sin(t), chart.centre_y - r * np.cos(t)
        ops.append(Text(x=x, y=y, text=text, size=say.size, colour=say.colour, family=say.family))
    return ops
