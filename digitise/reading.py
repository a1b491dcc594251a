"""One whole reading: the flow from picture to tables, and the frozen result that everything else uses.

Stub: the flow follows; the result classes are settled.
"""

from dataclasses import dataclass, field

from .budget import Budget
from .table import Table

__all__ = ["Reading", "TraceReading", "read_charts"]


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

    Raises `NotReadError` when a chart needs help (no grid, no levels, no ink), `UsageError` for settings that
    do not fit this picture (a mark far from any ring, contradictory marks).
    """
    raise NotImplementedError
