"""Readings made by hand, for the tests of what is made of a reading; no stage of the flow takes part."""

import functools

import numpy as np

from digitise.bearing import Bearing
from digitise.budget import Budget
from digitise.find import Box
from digitise.labels import Labels
from digitise.picture import Picture
from digitise.reading import Reading, TraceReading
from digitise.scale import make_scale
from digitise.settings import Settings
from digitise.table import build_table
from tests.draw import Chart, Page, Trace, paint, patterns
from tests.draw.spec import N_TRUE, STEP_TRUE
from tests.grids import CENTRE, OUTER_PX, plane_grid

DEG = np.arange(N_TRUE) * STEP_TRUE
RING_RHO = (1.0, 0.75, 0.5, 0.25)
INKS = ("#1f4fb4", "#c03020", "#2a8a3a")
SHA256 = "a1" * 32


def cardioid_page(inks=INKS[:1], *, paper="#ffffff"):
    """A page with one chart, 0 to -40 dB, and a field cardioid turned by 40 degrees more for every ink."""
    traces = tuple(Trace(db=patterns.first_order(DEG - 40 * k), ink=ink) for k, ink in enumerate(inks))
    chart = Chart(traces=traces, centre_x=CENTRE[0], centre_y=CENTRE[1], outer_px=OUTER_PX)
    return Page(charts=(chart,), width=600, height=620, paper=paper)


@functools.cache
def painted(n_traces):
    """The cardioid page with so many traces, painted once."""
    rgb = paint(cardioid_page(INKS[:n_traces]))
    rgb.setflags(write=False)
    return rgb


def hand_table(level_db=None, *, state=None, error_db=0.1):
    """A table of 360 rows; a field cardioid where no level is given; missing rows are emptied."""
    level = patterns.first_order(np.arange(360.0)) if level_db is None else np.asarray(level_db, float)
    state = (
        np.where(level < -39.9, "floor", "seen").astype("U8") if state is None else np.asarray(state, "U8")
    )
    level = np.where(state == "missing", np.nan, np.maximum(level, -40))
    error = np.where(state == "missing", np.nan, error_db)
    return build_table(np.arange(360.0), level, error, state)


def hand_reading(
    n_traces=1, *, path="panel.png", table=None, rgb=None, reasons=(), trace_reasons=(), **settings
):
    """A `Reading` of the cardioid page as it would be if every stage had done its work without error."""
    rgb = painted(n_traces) if rgb is None else rgb
    settings = Settings(**({"outer_db": 0.0, "centre_db": -40.0, "zero_deg": 0.0, "turn": "cw"} | settings))
    grid = plane_grid(RING_RHO)
    traces = []
    for k in range(n_traces):
        rows = table or hand_table(patterns.first_order(np.arange(360.0) - 40 * k))
        parts = {part: np.full(360, 0.02) for part in ("picture", "grid", "scale", "bearing", "bridging")}
        traces.append(
            TraceReading(
                name="",
                ink=INKS[k],
                dash="solid",
                table=rows,
                budget=Budget(**parts),
                width_px=2.0,
                reasons=trace_reasons,
            )
        )
    return Reading(
        picture=Picture(
            rgb=rgb, path=path, sha256=SHA256, width=rgb.shape[1], height=rgb.shape[0], kind="png"
        ),
        box=Box(x=0, y=0, w=600, h=620, centre_x=CENTRE[0], centre_y=CENTRE[1], outer_px=OUTER_PX, score=1.0),
        settings=settings,
        grid=grid,
        labels=Labels(),
        scale=make_scale(grid, settings=settings, labels=Labels()),
        bearing=Bearing(zero_deg=0.0, turn="cw", u_deg=0.02, source="told"),
        traces=tuple(traces),
        reasons=reasons,
    )
