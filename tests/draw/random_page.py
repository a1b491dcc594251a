"""A page drawn by lot: a seeded mix of the styles of printed charts, any part of which can be fixed."""

import numpy as np

from . import patterns
from .fonts import rgb_of
from .spec import N_TRUE, STEP_TRUE, Chart, Line, Page, Panel, Printed, Stroke, Text, Trace

LIGHT_INKS = (
    *"#d62828 #0a58ca #2b9348 #f77f00 #6a0dad #008080 #b5179e".split(),
    *"#111111 #8d5524 #4d7c0f #0096c7 #9d0208 #003049".split(),
)
DARK_INKS = "#ffd166 #06d6a0 #ff5c8a #8ecae6 #ffffff #f4a261 #c77dff".split()
PAPERS = {"white": "#ffffff", "cream": "#fbf6e6", "grey": "#ececec", "blue": "#eef3fa", "dark": "#14181f"}
SCALES = (
    (0, -40, 10), (0, -30, 10), (0, -30, 5), (0, -50, 10), (0, -25, 5), (0, -20, 5), (0, -36, 6), (0, -30, 3),
    (10, -20, 5), (15, -25, 10), (5, -35, 10), (20, -20, 10), (8, -32, 8), (0, -60, 20), (3, -27, 5),
    (2, -38, 10),
)  # fmt: skip
LAW_RINGS = {
    "field": ((0, -1, -2, -3, -6, -10, -20), -20.0),
    "power": ((0, -1, -2, -3, -6, -10), -10.0),
    "log-periodic": ((0, -3, -6, -10, -20, -30), -30.0),
}
LEVELS = {  # family -> levels (1440,) of seeded proportions
    "dipole": lambda deg, rng: patterns.half_wave_dipole(deg),
    "line": lambda deg, rng: patterns.backed(
        patterns.line_source(deg, length_wl=rng.uniform(1.2, 5)), deg, back_db=rng.uniform(-30, -12)
    ),
    "disc": lambda deg, rng: patterns.backed(
        patterns.disc(deg, diameter_wl=rng.uniform(1.5, 5)), deg, back_db=rng.uniform(-30, -12)
    ),
    "cardioid": lambda deg, rng: patterns.first_order(deg, a=0.5),
    "super": lambda deg, rng: patterns.first_order(deg, a=rng.uniform(0.2, 0.6)),
    "sector": lambda deg, rng: patterns.sector(
        deg, half_power_deg=rng.uniform(30, 90), front_to_back_db=rng.uniform(18, 32)
    ),
    "array": lambda deg, rng: patterns.linear_array(
        deg, n=int(rng.integers(2, 9)), spacing_wl=rng.uniform(0.4, 0.9)
    ),
    "omni": lambda deg, rng: patterns.omni(deg, rng, ripple_db=rng.uniform(0.1, 6)),
    "bidirectional": lambda deg, rng: patterns.bidirectional(deg, power=rng.uniform(0.8, 4)),
    "cosine": lambda deg, rng: patterns.cosine_beam(
        deg, power=rng.uniform(1, 8), back_db=rng.uniform(-28, -10), back_power=rng.uniform(0.5, 4)
    ),
    "measured": lambda deg, rng: patterns.measured(
        deg, rng, order=int(rng.integers(4, 14)), front=rng.uniform(0.5, 3)
    ),
    "tilted": lambda deg, rng: patterns.backed(
        patterns.linear_array(deg, n=int(rng.integers(4, 11)), spacing_wl=0.7, phase_deg=rng.uniform(-60, 0)),
        deg,
    ),
}
FAMILIES = tuple(LEVELS)
TITLES = (
    "Azimuth pattern",
    "Elevation, 2 deg tilt",
    "H-plane, 435 MHz",
    "Horizontal cut",
    "E-plane cut",
    "Pattern at 5.8 GHz",
)
MARKED = "invented example"


def random_page(rng, **fixed):
    """Draw a `Page` by lot with a numpy Generator.

    `fixed` may hold any of:     outer_px, law, paper (a key of PAPERS), n_traces, families, widths (low,
    high), dashes, half, charts (1 or 2), mono (all black, grid too), like_grid (a trace of the grid's own
    colour), disc, furniture, step_deg, near_rim
    """
    n_charts = fixed.get("charts", 1)
    outer = float(fixed.get("outer_px") or np.exp(rng.uniform(np.log(110), np.log(420))))
    paper = fixed.get("paper") or rng.choice(list(PAPERS), p=(0.62, 0.12, 0.1, 0.08, 0.08))
    half = bool(fixed.get("half", False))
    side = outer * rng.uniform(2.55, 3.1)
    head, foot = outer * rng.uniform(0.1, 0.3), outer * rng.uniform(0.1, 0.45)
    width, height = round(side * n_charts), round((side * 0.62 if half else side) + head + foot)
    charts, crops = [], []
    for k in range(n_charts):
        cx = side * (k + 0.5) + rng.uniform(-0.06, 0.06) * outer
        cy = head + (side * 0.55 if half else side * 0.5) + rng.uniform(-0.06, 0.06) * outer
        charts.append(_chart(rng, cx, cy, outer, paper, half, fixed))
        crops.append((side * k, 0, side, height))
    furniture = []
    if fixed.get("furniture", True):
        furniture = _furniture(rng, charts, width, height, outer, paper)
    note = "two charts on a page" if n_charts > 1 else ""
    return Page(
        charts=tuple(charts),
        width=width,
        height=height,
        paper=PAPERS[paper],
        furniture=tuple(furniture),
        crops=tuple(crops) if n_charts > 1 else (),
        note=note,
    )


def random_level(rng, family):
    """Levels (1440,) of one pattern family below its own peak, main direction at bearing 0."""
    return LEVELS[family](np.arange(N_TRUE) * STEP_TRUE, rng)


def _chart(rng, cx, cy, outer, paper, half, fixed):
    dark, mono = paper == "dark", fixed.get("mono", False)
    law = fixed.get("law") or rng.choice(
        ("even", "log-periodic", "field", "power"), p=(0.85, 0.07, 0.05, 0.03)
    )
    if law == "even":
        outer_db, centre_db, step = SCALES[rng.integers(len(SCALES))]
        top = step * np.floor(outer_db / step)
        rings = tuple(float(v) for v in np.arange(top, centre_db, -step))
    else:
        outer_db = float(rng.choice((0, 0, 10)))
        rings = tuple(float(v + outer_db) for v in LAW_RINGS[law][0])
        centre_db = outer_db + LAW_RINGS[law][1]
    zero = str(rng.choice(("top", "right", "bottom", "left"), p=(0.55, 0.3, 0.08, 0.07)))
    grid, rim, spoke, disc = _grid_style(rng, dark, mono, max(1.0, outer / 450), fixed)
    inks = (
        ["#000000"] * 4
        if mono
        else _distinct(rng.permutation(DARK_INKS if dark else LIGHT_INKS), grid.colour)
    )
    if fixed.get("like_grid"):
        inks[0] = grid.colour
    n_traces = fixed.get("n_traces") or int(rng.choice((1, 2, 3, 4), p=(0.55, 0.28, 0.12, 0.05)))
    low, high = fixed.get("widths") or (max(1.0, outer / 240), max(1.6, outer / 90))
    traces = []
    for k in range(n_traces):
        family = str(rng.choice(fixed.get("families") or FAMILIES))
        level = np.roll(random_level(rng, family), int(rng.integers(N_TRUE)) if rng.random() < 0.5 else 0)
        span = outer_db - centre_db
        down = 0.0 if rng.random() < 0.35 else rng.uniform(0, 0.2) * span
        if fixed.get("near_rim"):
            down = rng.uniform(0.005, 0.03) * span
        dash = str(rng.choice(fixed.get("dashes") or ("solid", "dashed", "dotted", "dashdot", "fill"),
                              p=None if fixed.get("dashes") else (0.66, 0.16, 0.05, 0.05, 0.08)))  # fmt: skip
        if mono:
            dash = ("solid", "dashed", "dotted", "dashdot")[k % 4]
        traces.append(
            Trace(
                db=np.round(outer_db - down + level, 4),
                ink=str(inks[k]),
                dash=dash,
                width=round(rng.uniform(low, high), 2),
                label=f"{family} {k + 1}",
                fill=rng.uniform(0.15, 0.6),
                step_deg=float(
                    fixed.get("step_deg") or rng.choice((STEP_TRUE, 1.0, 5.0), p=(0.6, 0.35, 0.05))
                ),
                dash_scale=rng.uniform(0.8, 1.6),
            )
        )
    size = float(np.clip(outer * rng.uniform(0.035, 0.06), 7, 30))
    colour = "#d8dde6" if dark else str(rng.choice(("#000000", "#202020", "#404850")))
    family = str(rng.choice(("sans", "serif", "book", "mono", "bold"), p=(0.5, 0.2, 0.1, 0.1, 0.1)))
    labels = {"colour": colour, "family": family, "minus": "\u2212" if rng.random() < 0.3 else "-"}
    box = (disc or PAPERS[paper]) if rng.random() < 0.35 else None
    ray = (
        rng.uniform(-88, 88)
        if half
        else float(rng.choice((90, 0, 82.5, 67.5, 22.5, 270, 180, 7, 97, rng.uniform(0, 360))))
    )
    return Chart(
        traces=tuple(traces),
        centre_x=float(cx),
        centre_y=float(cy),
        outer_px=outer,
        outer_db=float(outer_db),
        centre_db=float(centre_db),
        law=str(law),
        ring_db=rings,
        zero="top" if half else zero,
        turn=str(rng.choice(("cw", "ccw"))),
        spoke_deg=float(rng.choice((10, 15, 30, 45, 90, 0), p=(0.17, 0.2, 0.38, 0.12, 0.08, 0.05))),
        hub=float(rng.choice((0.0, 0.08), p=(0.85, 0.15))),
        ring=grid,
        rim=rim,
        spoke=spoke,
        disc=disc,
        half=half,
        ring_labels=Printed(
            size=size,
            ray_deg=ray,
            along=rng.random() < 0.2,
            box=box,
            unit=str(rng.choice(("", " dB", "dB"), p=(0.7, 0.2, 0.1))),
            **labels,
        ),
        rim_labels=Printed(
            size=size * rng.uniform(0.9, 1.3),
            step_deg=float(rng.choice((30, 45, 90, 15), p=(0.6, 0.15, 0.1, 0.15))),
            signed=rng.random() < 0.3,
            unit="\u00b0" if rng.random() < 0.45 else "",
            reach=1.04 + 0.9 * size / outer,
            **labels,
        ),
        labels_over=rng.random() < 0.5,
    )


def _distinct(inks, grid):
    """Keep the inks, in order, that a reader can tell from each earlier one and from the grid."""
    kept = []
    for ink in inks:
        apart = [
            max(abs(a - b) for a, b in zip(rgb_of(ink), rgb_of(other), strict=True))
            for other in (*kept, grid)
        ]
        if min(apart) > 60 or (grid == "#000000" and not kept and apart[-1] > 20):
            kept.append(str(ink))
    return kept


def _grid_style(rng, dark, mono, bold, fixed):
    """Strokes of rings, rim and spokes, `bold` times the usual width, and the disc's tint or None."""
    kind = (
        "mono"
        if mono
        else fixed.get("grid")
        or rng.choice(("pale", "mid", "black", "colour", "white"), p=(0.35, 0.25, 0.15, 0.15, 0.1))
    )
    disc = None
    if fixed.get("disc") or kind == "white":
        kind, disc = "white", str(rng.choice(("#e5ecf6", "#e6e6e6", "#f3eed0", "#d9ead3", "#cfe2f3")))
        if dark:
            disc = "#2c3340"
    shades = {
        "mono": ("#000000",),
        "pale": ("#c8c8c8", "#d5dbe3", "#bfc8bf"),
        "mid": ("#909090", "#7a8794", "#a09070"),
        "black": ("#000000", "#1c1c1c"),
        "colour": ("#5b8c5a", "#7ba7d9", "#c98f8f", "#b48ead"),
        "white": ("#ffffff",),
    }[kind]
    colour = str(rng.choice(shades))
    if dark:
        colour = "#4a5566" if disc is None else "#8a93a3"
    width = float(rng.choice((1.0, 1.0, 1.4, 2.0))) * bold
    dash = (None, None, None, (6.0, 4.0), (1.0, 2.5), (8.0, 3.0, 2.0, 3.0))[rng.integers(6)]
    dash = dash and tuple(part * bold for part in dash)
    ring = Stroke(colour=colour, width=width, dash=dash)
    spoke = Stroke(colour=colour, width=width, dash=dash if rng.random() < 0.7 else None)
    strong = {"white": "#9aa4b2"}.get(
        kind, colour if rng.random() < 0.5 else ("#c0c8d4" if dark else "#202020")
    )
    rim = Stroke(colour=strong, width=width * float(rng.choice((1.0, 1.5, 2.0))))
    return ring, rim, spoke, disc


def _furniture(rng, charts, width, height, outer, paper):
    """Title, caption, legend and an inset that looks like a mark of the maker's."""
    dark = paper == "dark"
    colour = "#e8ecf2" if dark else "#101010"
    size = float(np.clip(outer * 0.07, 9, 34))
    items = []
    if rng.random() < 0.7:
        title = f"{rng.choice(TITLES)} - {MARKED}"
        items.append(
            Text(
                x=width / 2,
                y=max(size, outer * 0.08),
                text=title,
                size=min(size, 1.6 * width / len(title)),
                colour=colour,
                family="bold",
            )
        )
    if rng.random() < 0.4:
        small = 0.7 * size
        for k, line in enumerate(
            ("All values invented for this example.", "Frequency 2400-2500 MHz   Gain 9 dBi   VSWR 1.5")
        ):
            items.append(
                Text(
                    x=0.03 * width,
                    y=height - (2.2 - 1.3 * k) * small,
                    text=line,
                    size=small,
                    colour=colour,
                    anchor="lm",
                )
            )
    if rng.random() < 0.5 and len(charts) == 1:
        items += _legend(rng, charts[0], height, size, colour, PAPERS[paper], 0.5 * outer)
    if rng.random() < 0.25:
        w = 0.34 * outer
        x, y = width - w - 4, 4 + 1.6 * size
        items += [
            Panel(x=x, y=y, w=w, h=0.6 * w, fill="#2f4f6f", edge="#16324f"),
            Text(
                x=x + w / 2,
                y=y + 0.3 * w,
                text="INVENTED",
                size=max(6.0, w / 6.5),
                colour="#ffffff",
                family="bold",
            ),
        ]
    return items


def _legend(rng, chart, height, size, colour, paper, wide):
    small = 0.65 * size
    high = small * 1.6 * len(chart.traces) + 0.6 * small
    x, y = 5.0, height - high - 4 - 3.5 * small
    items = [Panel(x=x, y=y, w=wide + 9 * small, h=high, fill=paper, edge="#808080")]
    for k, trace in enumerate(chart.traces):
        row = y + small * (1.1 + 1.6 * k)
        dash = {"dashed": (6.0, 4.0), "dotted": (1.5, 3.0), "dashdot": (8.0, 3.0, 2.0, 3.0)}.get(trace.dash)
        stroke = Stroke(colour=trace.ink, width=trace.width, dash=dash)
        items.append(
            Line(points=((x + 0.6 * small, row), (x + 0.6 * small + wide * 0.5, row)), stroke=stroke)
        )
        items.append(
            Text(x=x + small + wide * 0.5, y=row, text=trace.label, size=small, colour=colour, anchor="lm")
        )
    return items
