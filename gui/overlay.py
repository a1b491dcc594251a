"""What lies over the picture, as plain shapes in screen px: grid, traces, marks, pins, covers, reasons.

States and kinds differ by dash and shape besides colour: a seen row is a full line, a bridged one a dashed
line with open circles, floor a filled triangle, missing a cross on the outermost ring; a mark is a diamond, a
pin a drop.
"""

from dataclasses import dataclass

import numpy as np

from digitise._proof_panel import on_arc

from .at_place import trace_places
from .places import reason_places

__all__ = ["Shape", "overlay_shapes", "pointed_shapes", "redraw_shapes"]

MARKER_APART_PX = 12.0
RING_POINTS = 181
TURN_SHOWN_DEG = 14.0  # length of the arrow that shows where 0 degrees is and which way angles grow
LABEL_APART_PX = 30.0  # between two ring levels along a spoke


@dataclass(frozen=True, eq=False, kw_only=True)
class Shape:
    """One thing to draw.

    kind : "line", "arrow", "circle", "triangle", "cross", "diamond", "drop", "box", "tag", "words" or "plus"
    style : what it stands for, which the view turns into colour, width and dash
    points : (n, 2) screen px; text : of a tag or beside a marker; k : which trace; held : it is what the keys
    move
    """

    kind: str
    style: str
    points: np.ndarray
    text: str = ""
    k: int = 0
    held: bool = False


def overlay_shapes(session, place, *, draft=None, scale_px=1.0):
    """Everything that lies over the picture, from the bottom up, as a list of `Shape`.

    place : picture x, y -> screen x, y (arrays); draft : hand.Draft; scale_px : screen px a design px
    """
    if not session.open:
        return []
    shapes = list(_boxes(session, place))
    chart = session.chart
    if chart is not None:
        grid = draft.grid if draft is not None and draft.grid is not None else chart.grid
        stale = not chart.fresh or grid is not chart.grid
        if grid is not None:
            shapes += _grid(session, grid, place, stale, scale_px)
        if session.reading is not None and grid is chart.grid:
            shapes += _traces(session, place, stale, scale_px)
        shapes += _told(session, place, draft)
        if chart.reading is not None:
            shapes += _reasons(chart.reading, place)
    elif draft is not None and draft.grid is not None:
        shapes += _grid(session, draft.grid, place, True, scale_px)
    if draft is not None and draft.kind in ("cover", "crop"):
        shapes.append(_box(draft.box, place, f"draft-{draft.kind}"))
    return shapes


def redraw_shapes(session, place, *, words_rho, scale_px=1.0):
    """The reading drawn anew, without the picture; `place` as for `overlay_shapes`.

    words_rho : plane angle -> radius at which its bearing is written
    """
    reading, stale = session.reading, not session.chart.fresh
    shapes = list(_grid(session, reading.grid, place, stale, scale_px, zero=False))
    for bearing in range(0, 360, 30):
        plane = float(reading.bearing.to_plane(np.array([float(bearing)]))[0])
        if on_arc(reading.grid, plane):
            said = bearing - 360 if reading.bearing.signed and bearing > 180 else bearing
            point = _on_grid(reading.grid, place, np.array([words_rho(plane)]), plane)
            shapes.append(Shape(kind="words", style="rim", points=point, text=f"{said}\u00b0"))
    return [*shapes, *_traces(session, place, stale, scale_px)]


def pointed_shapes(session, place):
    """The row being pointed at, as a list of none or one `Shape`."""
    trace, row = session.shown_trace, session.row
    if trace is None or row is None or not session.chart.fresh or row >= len(trace.table.angle_deg):
        return []
    x, y = trace_places(session.reading, trace)
    points = _points(place, x[row : row + 1], y[row : row + 1])
    k = session.reading.traces.index(trace)
    return [Shape(kind="circle", style="pointed", points=points, k=k)] if np.isfinite(points).all() else []


def _boxes(session, place):
    """The other charts' places, and the crop."""
    charts = session.now.charts or ()
    for k, chart in enumerate(charts):
        if len(charts) > 1:
            box = (chart.box.x, chart.box.y, chart.box.w, chart.box.h)
            state = "read" if chart.reading is not None else "awaited" if not chart.done else "needs help"
            style = "chart-here" if k == session.now.at else "chart-other"
            yield _box(box, place, style, f"{k + 1}: {state}")
    if session.now.template.crop:
        yield _box(session.now.template.crop, place, "crop")
    for k, cover in enumerate(session.settings.covers):
        yield _box(cover, place, "cover", held=session.held == ("cover", k))


def _box(box, place, style, text="", *, held=False):
    x, y, w, h = box
    points = _points(place, np.array([x, x + w]) - 0.5, np.array([y, y + h]) - 0.5)
    return Shape(kind="box", style=style, points=points, text=text, held=held)


def _grid(session, grid, place, stale, scale_px, *, zero=True):
    """Rings, spokes, centre, and the levels on the rings."""
    start, end = grid.arc_deg
    angles = start + np.linspace(0, (end - start) % 360 or 360.0, RING_POINTS)
    style = "grid-stale" if stale else "grid"
    for plane in grid.spoke_deg:
        yield Shape(
            kind="line", style=f"{style}-spoke", points=_on_grid(grid, place, np.array([0.06, 1.0]), plane)
        )
    for k, rho in enumerate(grid.ring_rho):
        name = f"{style}-outer" if k == 0 else f"{style}-ring"
        held = session.held == ("ring", k)
        yield Shape(kind="line", style=name, points=_on_grid(grid, place, rho, angles), held=held)
    centre = _points(place, np.array([grid.centre_x]), np.array([grid.centre_y]))
    yield Shape(kind="plus", style=style, points=centre, held=session.held == ("centre", 0))
    reading = session.reading
    if reading is None or stale:
        return
    last = None
    along = _quiet_angle(reading)
    for rho, level in zip(grid.ring_rho, reading.scale.level(grid.ring_rho), strict=True):
        point = _on_grid(grid, place, np.array([rho]), along)
        if last is None or np.hypot(*(point - last)[0]) >= LABEL_APART_PX * scale_px:
            yield Shape(
                kind="tag", style="ring-level", points=point, text=f"{round(float(level), 2) + 0.0:g}"
            )
            last = point
    if zero:
        start = float(reading.bearing.to_plane(np.zeros(1))[0])
        along = np.linspace(0, TURN_SHOWN_DEG if reading.bearing.turn == "cw" else -TURN_SHOWN_DEG, 9)
        tick = _on_grid(grid, place, np.array([1.0, 1.1]), start)
        yield Shape(kind="line", style="zero", points=tick)
        yield Shape(kind="arrow", style="zero", points=_on_grid(grid, place, 1.05, start + along))


def _quiet_angle(reading):
    """Plane angle between labels where the traces leave the ring levels room."""
    best = (-1.0, 15.0)
    for angle in np.arange(15, 360, 30.0):
        clear = 1.0
        for trace in reading.traces:
            table = trace.table
            plane = reading.bearing.to_plane(table.angle_deg)
            near = (np.abs((plane - angle + 180) % 360 - 180) < 6) & np.isfinite(table.chart_db)
            if near.any():
                rho = reading.scale.rho(table.chart_db[near])
                clear = min(clear, float(np.abs(rho[:, None] - reading.grid.ring_rho).min()))
        if on_arc(reading.grid, angle) and clear > best[0] + 0.005:
            best = (clear, angle)
    return best[1]


def _traces(session, place, stale, scale_px):
    """Every trace by the states of its rows."""
    reading = session.reading
    suffix = "-stale" if stale else ""
    for k, trace in enumerate(reading.traces):
        x, y = trace_places(reading, trace)
        points = _points(place, x, y)
        plane = reading.bearing.to_plane(trace.table.angle_deg)
        state = np.where(
            on_arc(reading.grid, plane), trace.table.state, ""
        )  # off the drawn arc nothing is missed
        for first, last, style in _runs(state):
            index = np.arange(first, last + 1) % len(state)
            yield Shape(kind="line", style=f"trace-{style}{suffix}", points=points[index], k=k)
        ring = _on_grid(reading.grid, place, 1.0, plane)
        for name, kind, where in (
            ("bridged", "circle", points),
            ("floor", "triangle", points),
            ("missing", "cross", ring),
        ):
            for point in _apart(where[state == name], MARKER_APART_PX * scale_px):
                yield Shape(kind=kind, style=f"trace-{name}{suffix}", points=point[None], k=k)


def _runs(state):
    """(first, last, "seen" or "bridged") of the lines round a table; last may be its length, to close."""
    n = len(state)
    lined = np.isin(state, ("seen", "bridged"))
    joined = lined & np.roll(lined, -1)
    solid = joined & (state == "seen") & (np.roll(state, -1) == "seen")
    for chosen, style in ((solid, "seen"), (joined & ~solid, "bridged")):
        edges = np.diff(np.concatenate(([0], chosen.astype(np.int8), [0])))
        for first, end in zip(np.flatnonzero(edges == 1), np.flatnonzero(edges == -1), strict=True):
            yield first, min(end, n), style


def _apart(points, least_px):
    """Points of a list that are not too near the one before."""
    before = None
    for point in points:
        if np.isfinite(point).all() and (before is None or np.hypot(*(point - before)) >= least_px):
            before = point
            yield point


def _told(session, place, draft):
    """Marks and pins; one being dragged is drawn where it is."""
    settings = session.settings
    for k, mark in enumerate(settings.marks):
        at = _dragged(session, draft, ("mark", k)) or (mark.x_px, mark.y_px)
        points = _points(place, np.array([at[0]]), np.array([at[1]]))
        yield Shape(
            kind="diamond",
            style="mark",
            points=points,
            text=f"{mark.level_db:g}",
            held=session.held == ("mark", k),
        )
    for k, pin in enumerate(settings.pins):
        at = _dragged(session, draft, ("pin", k)) or pin
        points = _points(place, np.array([at[0]]), np.array([at[1]]))
        yield Shape(kind="drop", style="pin", points=points, held=session.held == ("pin", k))


def _dragged(session, draft, what):
    return draft.box[:2] if draft is not None and draft.kind == "point" and session.held == what else None


def _reasons(reading, place):
    for number, (_, spot) in enumerate(reason_places(reading), 1):
        if spot.marked:
            points = _points(place, np.array([spot.x_px]), np.array([spot.y_px]))
            yield Shape(kind="circle", style="reason", points=points, text=str(number))


def _on_grid(grid, place, rho, plane_deg):
    x, y = grid.to_picture(rho, plane_deg)
    return _points(place, x, y)


def _points(place, x, y):
    x, y = place(np.asarray(x, float), np.asarray(y, float))
    return np.stack(np.broadcast_arrays(x, y), axis=-1).reshape(-1, 2)
