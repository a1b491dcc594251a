"""Charts that a PDF page draws with lines: grid, labels and traces from the drawing itself, not its pixels.

What the drawing program wrote are the curve's own points, good to a few thousandths of a point on paper:
nothing is searched, followed or refined. The results are of the same classes as those of a picture, in
picture px at the resolution the page was drawn at, so that scale, bearing, budget and table are shared.
"""

from dataclasses import dataclass

import numpy as np

from ._vector_course import at_bearings
from ._vector_grid import find_drawn_grids
from ._vector_labels import legend_names, place_texts
from ._vector_traces import MANY_BREAKS, drawn_traces
from .exceptions import NotReadError
from .find import Box, _reading_order, box_around
from .follow import SAMPLES_PER_DEG, Trace
from .frozen import lock_arrays
from .grid import Grid
from .labels import Labels
from .traces import FoundTrace

__all__ = [
    "VectorChart",
    "VectorTrace",
    "find_vector_charts",
    "followed",
    "page_labels",
    "trace_at",
    "vector_traces",
    "way_read",
]

PLACE_PT = (
    0.004  # standard uncertainty of a drawn point on paper: rounding to 0.01 over the root of 12, and more
)
NEAR_CENTRE_RHO = 0.25
SAME_INK = 48  # levels of a colour's channel that a told ink may be off
BRIDGE_SHARE = 0.1  # of a bridged jump's length, as the standard uncertainty of what lies between


@dataclass(frozen=True, eq=False, kw_only=True)
class VectorTrace:
    """One drawn trace.

    ink : "#rrggbb" as it shows on the paper; dash : "solid", "dashed" or "dotted"; width_px : of the line, 0
        of an area
    rho, plane_deg : (n,) the path's points in order in the chart plane, NaN where the pen was up
    vertex : (n,) bool, points that the drawing names itself; the others lie on its curves, or on a clip's
        outline
    filled : an area is filled inside it; name : of the legend, "" when there is none
    place_u_px : standard uncertainty of a point along the line's normal, px; length : drawn, outer radii
    """

    ink: str
    dash: str
    width_px: float
    rho: np.ndarray
    plane_deg: np.ndarray
    vertex: np.ndarray
    filled: bool
    name: str
    place_u_px: float
    length: float

    def __post_init__(self):
        lock_arrays(self)


@dataclass(frozen=True, eq=False, kw_only=True)
class VectorChart:
    """One drawn chart: box, grid and labels as of a picture; a tuple of `VectorTrace` in drawing order."""

    box: Box
    grid: Grid
    labels: Labels
    traces: tuple


def find_vector_charts(picture, *, box=None):
    """The drawn charts of a PDF page in reading order; empty when it has none.

    picture : Picture whose `vector` is the page's VectorPage (any other gives none)
    box : Box or None; only the chart whose centre lies in its inner half is returned

    A chart whose grid is drawn but whose trace is not (a bitmap under it, an outline of letters) has no
    traces: its grid and labels still hold, and the trace is to be read from the pixels.
    """
    page = picture.vector
    if page is None or not page.whole or not page.paths or not np.isfinite(page.px_per_pt):
        return ()
    charts = []
    found = find_drawn_grids(page)
    for drawn in found:
        grid = drawn.grid
        others = [item.grid for item in found if item is not drawn]
        if (
            box is not None
            and np.hypot(grid.centre_x - box.centre_x, grid.centre_y - box.centre_y) > 0.5 * box.outer_px
        ):
            continue
        traces = drawn_traces(page, drawn, picture.rgb)
        names = legend_names(page, [chain.look for chain, *_ in traces])
        made = [_vector_trace(*item, name, grid, page) for item, name in zip(traces, names, strict=True)]
        charts.append(
            VectorChart(
                box=box_around(grid, picture),
                grid=grid,
                labels=place_texts(page, grid, names, others=others),
                traces=tuple(made),
            )
        )
    order = {id(own): k for k, own in enumerate(_reading_order([chart.box for chart in charts]))}
    return tuple(sorted(charts, key=lambda chart: order[id(chart.box)]))


def page_labels(picture, grid):
    """The page's printed text about a chart read in any way, as `Labels`; empty where there is no text."""
    page = picture.vector
    if page is None or not page.texts or not np.isfinite(page.px_per_pt):
        return Labels()
    return place_texts(page, grid, ())


def vector_traces(chart, *, settings):
    """The drawn traces of a `VectorChart` as `find_traces` gives those of ink: a tuple of (FoundTrace, name).

    settings : Settings; `inks` chooses among them, `covers` takes parts out; pins are not needed

    Raises `NotReadError` when a told ink is not drawn.
    """
    chosen = chart.traces
    if settings.inks:
        chosen = [trace for told in settings.inks for trace in _of_ink(chart, told)]
    return tuple(
        (
            FoundTrace(
                ink=trace.ink,
                dash=trace.dash,
                filled=trace.filled,
                trace=followed(trace, chart.grid, covers=settings.covers),
                length=trace.length,
                doubt=0.0,
            ),
            trace.name,
        )
        for trace in chosen
    )


def way_read(picture, chart=None):
    """How a chart's numbers are taken, for the record: "vector", "embedded" or "raster".

    chart : the `VectorChart` that is read by its lines, or None when the pixels are
    """
    if chart is not None and chart.traces:
        return "vector"
    return "embedded" if picture.vector is not None and picture.vector.embedded else "raster"


def trace_at(trace, plane_deg):
    """Radius rho (n,) of a `VectorTrace` at plane angles: its outermost crossing, NaN where none is."""
    return at_bearings(trace.rho, trace.plane_deg, plane_deg, bridged=False).rho


def followed(trace, grid, *, covers=()):
    """A `VectorTrace` as the `Trace` that following its ink would give, for the rest of the flow.

    Rows where the pen was up for a short way are bridged; where the line went into the centre they are at the
        floor.
    covers : (x, y, w, h) px; what is drawn there is not used
    """
    plane = np.arange(360 * SAMPLES_PER_DEG) / SAMPLES_PER_DEG
    line = at_bearings(_uncovered(trace, grid, covers), trace.plane_deg, plane, vertex=trace.vertex)
    outer_px = grid.outer_px
    floor_px = max(0.5 * trace.width_px, 1.0)
    drawn = np.isfinite(line.rho)
    jumped = drawn & (line.jump_rho > 0)
    # A solid line that stops near the centre and comes back has been below it; a dash gap is only a gap.
    strokes = trace.dash != "solid" and np.isnan(trace.rho).sum() >= MANY_BREAKS
    below = jumped & (line.rho < NEAR_CENTRE_RHO) & (not strokes)
    floor = below | (drawn & (line.rho * outer_px <= floor_px)) | (~drawn & line.centre)
    state = np.select([floor, jumped, drawn], ["floor", "bridged", "seen"], "missing")
    has = drawn & ~floor
    sag_px = np.where(has, line.sag_rho, 0.0) * outer_px
    return Trace(
        plane_deg=plane,
        rho=np.where(has, line.rho, np.where(floor, 0.0, np.nan)),
        # The pattern may run straight from point to point or bend between them: evenly likely over the sag.
        u_px=np.hypot(trace.place_u_px, sag_px / np.sqrt(3)),
        u_bridge_px=np.where(
            floor, 0.5 * floor_px, np.where(jumped, BRIDGE_SHARE * outer_px * line.jump_rho, 0.0)
        ),
        slope=np.where(has, line.slope, 0.0),
        radial_share=np.where(has, line.radial_share, 1.0),
        state=state,
        clear=state == "seen",
        support=1.0,
        dash=trace.dash,
        width_px=trace.width_px,
        sheet_outer_px=outer_px,
    )


def _vector_trace(chain, ink, dash, filled, name, grid, page):
    rho, plane = grid.to_plane(chain.points[:, 0], chain.points[:, 1])
    u, v = rho * np.sin(np.radians(plane)), -rho * np.cos(np.radians(plane))
    return VectorTrace(
        ink="#" + "".join(f"{round(float(np.clip(c, 0, 255))):02x}" for c in ink),
        dash=dash,
        width_px=chain.look.width,
        rho=rho,
        plane_deg=plane,
        vertex=chain.vertex,
        filled=filled,
        name=name,
        place_u_px=PLACE_PT * page.px_per_pt,
        length=float(np.nansum(np.hypot(np.diff(u), np.diff(v)))),
    )


def _of_ink(chart, told):
    """The traces nearest in colour to a told ink, within what a person means by one colour."""
    rgb = np.array([int(told[k : k + 2], 16) for k in (1, 3, 5)], float)
    inks = [np.array([int(trace.ink[k : k + 2], 16) for k in (1, 3, 5)], float) for trace in chart.traces]
    off = [float(np.abs(ink - rgb).max()) for ink in inks]
    if not off or min(off) > SAME_INK:
        there = ", ".join(dict.fromkeys(trace.ink for trace in chart.traces)) or "none"
        raise NotReadError(
            f"no trace is drawn in the ink {told}",
            remedy=f"inks on the chart: {there}; choose one with --ink",
            stage="ink",
        )
    return [trace for trace, own in zip(chart.traces, off, strict=True) if own <= min(off) + 1]


def _uncovered(trace, grid, covers):
    """The trace's rho with the points inside covers taken out."""
    rho = np.array(trace.rho)
    x, y = grid.to_picture(trace.rho, trace.plane_deg)
    for left, top, width, height in covers:
        rho[(x >= left) & (x <= left + width) & (y >= top) & (y <= top + height)] = np.nan
    return rho
