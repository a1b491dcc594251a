"""What is on a page: plain frozen descriptions, all places in picture px (pixel centre at integers, y down).

A page angle is in degrees clockwise from the top; a bearing is the angle as the chart prints it.
"""

from dataclasses import dataclass

import numpy as np

N_TRUE = 1440  # samples of a true curve, every 0.25 degrees
STEP_TRUE = 360 / N_TRUE
TOP = {"top": 0.0, "right": 90.0, "bottom": 180.0, "left": 270.0}


@dataclass(frozen=True, kw_only=True)
class Stroke:
    """How a line is drawn: colour "#rrggbb", width px, dash (on, off, ...) px or None when solid."""

    colour: str = "#808080"
    width: float = 1.0
    dash: tuple | None = None


@dataclass(frozen=True, eq=False, kw_only=True)
class Trace:
    """One curve: `db` (1440,) levels at every quarter degree of bearing, NaN where it is not drawn.

    dash : "solid", "dashed", "dotted", "dashdot" or "fill" (the area inside tinted, its outline drawn)
    fill : opacity of the tint ; step_deg : the curve is drawn by straight chords between samples this far
    apart
    dash_scale : length of the dash pattern in line widths' multiples (1 = the usual)
    """

    db: np.ndarray
    ink: str = "#1f4fb4"
    dash: str = "solid"
    width: float = 2.0
    label: str = "invented"
    fill: float = 0.3
    step_deg: float = STEP_TRUE
    dash_scale: float = 1.0


@dataclass(frozen=True, kw_only=True)
class Printed:
    """A run of printed numbers: text size px, colour, family name, unit appended, box colour behind or None.

    ray_deg : page angle of the ray that ring labels stand on ; along : turned along that ray
    step_deg : of rim labels ; signed : -180..180 ; reach : rim labels' radius over the outer radius
    """

    size: float = 11.0
    colour: str = "#202020"
    family: str = "sans"
    unit: str = ""
    box: str | None = None
    ray_deg: float = 80.0
    along: bool = False
    step_deg: float = 30.0
    signed: bool = False
    reach: float = 1.09
    minus: str = "-"


@dataclass(frozen=True, eq=False, kw_only=True)
class Chart:
    """One polar chart.

    ring_db : levels of the drawn rings, outermost first; the rim is drawn at outer_db whether or not it is in
    here
    spoke_deg : step of the spokes in bearing, 0 for none ; hub : spokes begin at this share of the outer
    radius
    disc : tint inside the rim, or None ; half : only the half about page-top is drawn
    labels_over : the ring labels are painted over the traces instead of under them
    clip : "centre" (levels below the centre are drawn at the centre) or "gap" (left out)
    """

    traces: tuple
    centre_x: float = 320.0
    centre_y: float = 320.0
    outer_px: float = 250.0
    outer_db: float = 0.0
    centre_db: float = -40.0
    law: str = "even"
    ring_db: tuple = (0.0, -10.0, -20.0, -30.0)
    zero: str = "top"
    turn: str = "cw"
    spoke_deg: float = 30.0
    hub: float = 0.0
    ring: Stroke = Stroke()
    rim: Stroke = Stroke(colour="#404040", width=1.5)
    spoke: Stroke = Stroke()
    disc: str | None = None
    half: bool = False
    ring_labels: Printed | None = Printed()
    rim_labels: Printed | None = Printed()
    labels_over: bool = True
    clip: str = "centre"

    def page_deg(self, bearing_deg):
        """Page angle of printed bearings (array)."""
        sign = 1.0 if self.turn == "cw" else -1.0
        return TOP[self.zero] + sign * np.asarray(bearing_deg, float)

    def point(self, rho, bearing_deg):
        """Picture px (x, y) of radius shares and bearings (arrays)."""
        t = np.radians(self.page_deg(bearing_deg))
        r = np.asarray(rho, float) * self.outer_px
        return self.centre_x + r * np.sin(t), self.centre_y - r * np.cos(t)


@dataclass(frozen=True, kw_only=True)
class Text:
    """A line of print: anchor "mm" (middle) or "lm" (left), turned by `turn_deg` clockwise."""

    x: float
    y: float
    text: str
    size: float = 12.0
    colour: str = "#202020"
    family: str = "sans"
    anchor: str = "mm"
    turn_deg: float = 0.0
    box: str | None = None


@dataclass(frozen=True, kw_only=True)
class Panel:
    """A rectangle with an edge, as a legend or an inset has."""

    x: float
    y: float
    w: float
    h: float
    fill: str = "#ffffff"
    edge: str = "#808080"


@dataclass(frozen=True, kw_only=True)
class Line:
    """A straight or broken line of the page's furniture (a legend's sample, a table rule)."""

    points: tuple
    stroke: Stroke


@dataclass(frozen=True, eq=False, kw_only=True)
class Page:
    """A picture: size px, paper colour, charts, furniture painted after them; crops: a box a chart or ()."""

    charts: tuple
    width: int = 640
    height: int = 640
    paper: str = "#ffffff"
    furniture: tuple = ()
    crops: tuple = ()
    note: str = ""


def rho_of(law, level_db, outer_db, centre_db):
    """Radius share of a level x dB down: even, field 10^(x/20), power 10^(x/10), log-periodic 0.89^(-x/2)."""
    x = np.asarray(level_db, float) - outer_db
    if law == "even":
        return 1 + x / (outer_db - centre_db)
    return {"field": 10 ** (x / 20), "power": 10 ** (x / 10), "log-periodic": 0.89 ** (-x / 2)}[law]


def level_of(law, rho, outer_db, centre_db):
    """Level of a radius share; the inverse of `rho_of`."""
    rho = np.asarray(rho, float)
    if law == "even":
        return outer_db + (rho - 1) * (outer_db - centre_db)
    factor = {"field": 20 / np.log(10), "power": 10 / np.log(10), "log-periodic": -2 / np.log(0.89)}[law]
    return outer_db + factor * np.log(np.maximum(rho, 1e-30))


def drawn_curve(chart, trace):
    """Work out the curve as it is drawn: rho (1440,), NaN where left out, and the true levels (1440,).

    With a coarse `step_deg` the pen goes straight between samples, so the truth between them lies on the
    chord: r = r1 r2 sin(b) / (r1 sin(t) + r2 sin(b - t)) for a chord over the angle b, t from its first end.
    """
    db = np.asarray(trace.db, float)
    rho = rho_of(chart.law, db, chart.outer_db, chart.centre_db)
    every = round(trace.step_deg / STEP_TRUE)
    if every > 1:
        ends = np.append(rho[::every], rho[0])
        k, part = np.divmod(np.arange(N_TRUE), every)
        r1, r2 = np.maximum(ends[k], 1e-9), np.maximum(ends[k + 1], 1e-9)
        b, t = np.radians(every * STEP_TRUE), np.radians(part * STEP_TRUE)
        rho = np.where(part == 0, ends[k], r1 * r2 * np.sin(b) / (r1 * np.sin(t) + r2 * np.sin(b - t)))
        db = level_of(chart.law, np.maximum(rho, 1e-9), chart.outer_db, chart.centre_db)
        db = np.where(part == 0, np.asarray(trace.db, float), db)
    if chart.half:
        off = (chart.page_deg(np.arange(N_TRUE) * STEP_TRUE) + 180) % 360 - 180
        rho, db = (
            np.where(np.abs(off) > 90 + 1e-9, np.nan, rho),
            np.where(np.abs(off) > 90 + 1e-9, np.nan, db),
        )
    if chart.clip == "gap":
        rho = np.where(rho < 0, np.nan, rho)
    return np.maximum(rho, 0.0), db
