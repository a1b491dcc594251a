"""One whole reading: the flow from picture to tables, and the frozen result that everything else uses.

A stage that a told value makes needless is not run: with levels and bearing told, no label is read.
"""

from dataclasses import dataclass, field, replace

import numpy as np

from . import bearing as bearing_stage
from . import scale as scale_stage
from ._sheet import cut_sheet
from .budget import PARTS, Budget, make_budget
from .exceptions import DigitiseError, NotReadError
from .find import box_around, find_charts
from .grid import find_grid
from .kept import Kept
from .labels import Labels, read_labels
from .review import reason
from .settings import Settings
from .table import Table
from .traces import find_traces

__all__ = ["Reading", "TraceReading", "read_charts"]

MUCH_BRIDGED = 0.35  # share of rows
MANY_MISSING = 0.1
WIDE_ERROR_DB = 1.0
LEAVES_CHART_RHO = 1.015


@dataclass(frozen=True, eq=False, kw_only=True)
class TraceReading:
    """One trace as read.

    name : legend text when it was read, else "" ; ink : "#rrggbb"; dash : "solid", "dashed", "dotted" or "fill"
    table : Table; budget : Budget, row by row with the table
    width_px : drawn line width
    reasons : tuple of review.Reason that concern this trace alone
    """

    name: str
    ink: str
    dash: str
    table: Table
    budget: Budget
    width_px: float
    reasons: tuple = ()


@dataclass(frozen=True, eq=False, kw_only=True)
class Reading:
    """One chart as read: every stage's result.

    picture, box, settings, grid, labels, scale, bearing : the stages' results
    traces : tuple of TraceReading
    caption : text printed with the chart, "" when none was read
    reasons : tuple of review.Reason that concern the whole chart
    number, n_charts : which chart of the picture this is, from 1 in reading order, and how many there are
    """

    picture: object
    box: object
    settings: object
    grid: object
    labels: object
    scale: object
    bearing: object
    traces: tuple = field(default=())
    caption: str = ""
    reasons: tuple = ()
    number: int = 1
    n_charts: int = 1

    @property
    def review(self):
        """All reasons to look, as sentences: the chart's own, then each trace's; empty when the tool is sure."""
        own = [str(item) for item in self.reasons]
        n = len(self.traces)
        for k, trace in enumerate(self.traces, 1):
            own += [f"{item} (trace {k}, {trace.ink})" if n > 1 else str(item) for item in trace.reasons]
        return own


def read_charts(picture, *, settings):
    """Read every chart on a `Picture` with `Settings`; a tuple of `Reading` in reading order.

    A grid that the settings hold is that of one chart, which is then read alone.

    Raises `NotReadError` when a chart needs help (no grid, no levels, no ink), `UsageError` for settings that
    do not fit this picture (a mark far from any ring, contradictory marks). With several charts, those that can be
    read are, and an error is raised only when none can.
    """
    if settings.grid is not None:
        number, n_charts = settings.chart or (1, 1)
        reading = read_chart(picture, box_around(settings.grid, picture), settings=settings)
        return (replace(reading, number=number, n_charts=n_charts),)
    boxes = find_charts(picture, crop=settings.crop)
    if not boxes:
        raise NotReadError(
            "no polar chart was found on the picture", stage="find", remedy="cut the chart out with --crop X,Y,W,H"
        )
    wanted = range(1, len(boxes) + 1)
    if settings.chart is not None:
        number, n_charts = settings.chart
        if n_charts != len(boxes):
            raise NotReadError(
                f"the record is of chart {number} of {n_charts}, and {len(boxes)} were found", stage="find",
                remedy="cut the chart out with --crop X,Y,W,H",
            )  # fmt: skip
        wanted = (number,)
    readings, failures = [], []
    for number in wanted:
        try:
            reading = read_chart(picture, boxes[number - 1], settings=settings)
            readings.append(replace(reading, number=number, n_charts=len(boxes)))
        except DigitiseError as error:
            failures.append((number, error))
    if not readings:
        raise failures[0][1]
    if failures:
        first = f"chart {failures[0][0]}: {failures[0][1].cause}"
        unread = reason("chart-unread", len(failures), first)
        readings = [replace(reading, reasons=(*reading.reasons, unread)) for reading in readings]
    return tuple(readings)


def read_chart(picture, box, *, settings, kept=None, labels=None):
    """Read the chart at one `Box`; raises as `read_charts` does.

    kept : `Kept` stages of earlier readings of the same picture, taken again where a change does not touch them
    labels : `Labels` to use where they are needed, in place of reading them
    """
    kept = Kept() if kept is None else kept
    grid = settings.grid or kept.result(find_grid, picture, box)
    if not _needs_labels(settings):
        labels = Labels()
    elif labels is None:
        labels = kept.result(read_labels, picture, box, grid)
    scale = settings.scale or scale_stage.make_scale(grid, settings=settings, labels=labels)
    bearing = settings.bearing or bearing_stage.make_bearing(grid, settings=settings, labels=labels)
    found = kept.result(_all_traces, picture, grid, settings.inks, settings.covers, settings.pins, kept=kept)
    traces = tuple(_trace_reading(item, grid, scale, bearing, settings) for item in found)
    reasons = (*grid.reasons, *scale.reasons, *bearing.reasons)
    caption = " ".join(label.text for label in labels.with_role("caption"))
    return Reading(
        picture=picture, box=box, settings=settings, grid=grid, labels=labels, scale=scale, bearing=bearing,
        traces=traces, caption=caption, reasons=reasons,
    )  # fmt: skip


def _all_traces(picture, grid, inks, covers, pins, *, kept):
    """The traces, by the settings that they hang on and no others."""
    sheet = kept.result(cut_sheet, picture, grid, large=True)
    return find_traces(sheet, grid, settings=Settings(inks=inks, covers=covers, pins=pins), kept=kept)


def _needs_labels(settings):
    levels_told = (
        settings.scale is not None
        or len(settings.marks) >= 2
        or bool(settings.ring_levels)
        or (settings.outer_db is not None and (settings.centre_db is not None or settings.law not in (None, "even")))
    )
    bearing_told = settings.bearing is not None or (settings.zero_deg is not None and settings.turn is not None)
    return not (levels_told and bearing_told)


def _trace_reading(found, grid, scale, bearing, settings):
    trace = found.trace
    budget = make_budget(trace, grid, scale, bearing)
    table, rows_budget = _tabulate(trace, budget, grid, scale, bearing, settings.step_deg)
    return TraceReading(
        name="", ink=found.ink, dash="fill" if found.filled else found.dash, table=table, budget=rows_budget,
        width_px=trace.width_px, reasons=tuple(_trace_reasons(found, table, scale)),
    )  # fmt: skip


def _tabulate(trace, budget, grid, scale, bearing, step_deg):
    """Rows at even bearings, with the budget row by row."""
    angle = np.arange(round(360 / step_deg)) * step_deg
    plane = bearing.to_plane(angle)
    rho, state = _at(trace, trace.rho, plane), _state_at(trace, plane)
    level = scale.level(rho)
    floor = state == "floor"
    least = scale.level(np.array([max(trace.width_px / 2, 1.0) / grid.outer_px]))[0]
    level = np.where(floor | (level < least), np.maximum(least, np.nan_to_num(level, nan=-np.inf)), level)
    level = np.where(state == "missing", np.nan, level)
    parts = {part: np.where(state == "missing", np.nan, _at(trace, getattr(budget, part), plane)) for part in PARTS}
    rows = Budget(**parts, coverage_factor=budget.coverage_factor)
    peak = np.nanmax(level) if np.isfinite(level).any() else np.nan
    table = Table(
        angle_deg=angle, chart_db=level, relative_db=level - peak, error95_db=rows.error95(), state=state
    )  # fmt: skip
    return table, rows


def _at(trace, values, plane_deg):
    """Values of the trace's samples at plane angles; NaN outside the angles that the trace covers."""
    period = np.interp(plane_deg, trace.plane_deg, values, period=360.0)
    span = trace.plane_deg[-1] - trace.plane_deg[0]
    if span > 359:
        return period
    ahead = (plane_deg - trace.plane_deg[0]) % 360
    return np.where(ahead <= span + 0.51, period, np.nan)


def _state_at(trace, plane_deg):
    step = trace.plane_deg[1] - trace.plane_deg[0]
    index = np.round(((plane_deg - trace.plane_deg[0]) % 360) / step).astype(int)
    outside = index >= len(trace.plane_deg)
    wraps = trace.plane_deg[-1] - trace.plane_deg[0] > 359
    state = trace.state[np.where(outside, 0 if wraps else len(trace.plane_deg) - 1, index)]
    near_end = index <= len(trace.plane_deg) + round(0.51 / step)
    return state if wraps else np.where(outside & ~near_end, "missing", state)


def _trace_reasons(found, table, scale):
    """Reasons to look at one trace, each with its number."""
    if found.doubt > 0:
        yield reason("trace-doubtful", found.doubt)
    state = table.state
    drawn = state != "missing"
    bridged = float(np.mean(state[drawn] == "bridged")) if drawn.any() else 1.0
    if bridged > MUCH_BRIDGED:
        yield reason("much-bridged", bridged)
    outside = float(np.mean(np.nan_to_num(scale.rho(table.chart_db)) > LEAVES_CHART_RHO))
    if outside > 0:
        yield reason("leaves-chart", outside)
    half = float(np.nanmedian(table.error95_db)) if np.isfinite(table.error95_db).any() else np.inf
    if half > WIDE_ERROR_DB:
        yield reason("wide-error", half)
