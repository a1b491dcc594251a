"""Draw the sample pictures and write their known curves.

Run in the repository: python -m sample_images.draw_samples

Every antenna, text and number here is invented. Beside each picture NAME.png or NAME.jpg stand NAME.json
(what a user would be told, and the curves with their inks) and a known curve a trace, `angle_deg,chart_db` at
every whole degree that is drawn: NAME.known.csv, with several traces NAME.1.known.csv ..., with two charts
NAME-1.known.csv ...
"""

import json
from pathlib import Path

import numpy as np

from tests.draw import Chart, Page, Stroke, Trace, paint, patterns, spoil
from tests.draw.degrade import Spoiled
from tests.draw.spec import N_TRUE, STEP_TRUE, Line, Panel, Printed, Text, drawn_curve
from tests.draw.truth import write_case

HERE = Path(__file__).parent
DEG = np.arange(N_TRUE) * STEP_TRUE
MARKED = "invented example"
NOTE = "All names and values on this sheet are invented."
BELOW_DB = -80.0  # deeper levels of a formula's null are written as this


def samples():
    """Yield (name, page, renderer, recipe or None, sentence) of every sample."""
    yield "panel", _panel(), "matplotlib", None, "a clean chart: one trace, even dB rings"
    yield (
        "screenshot",
        _screenshot(),
        "opencv-fine",
        "jpeg",
        "a JPEG screenshot on a dark ground, filled trace",
    )
    yield "two-bands", _two_bands(), "pillow", None, "two traces that cross, with a legend"
    yield "dashed", _dashed(), "pillow", None, "black and white, a dashed trace on a black grid"
    yield (
        "log-periodic",
        _log_periodic(),
        "matplotlib",
        None,
        "rings at 0, -3, -6, -10, -20, -30 dB on the log-periodic law",
    )
    yield "half", _half(), "opencv-fine", None, "a half chart of the upper half plane"
    yield (
        "scan",
        _scan(),
        "pillow",
        "scan",
        "a scanned sheet, a little turned, of a nearly round trace by the rim",
    )
    yield "pair", _pair(), "matplotlib", None, "both cuts of one antenna on a page"


def main():
    """Write all samples beside this file."""
    for name, page, renderer, recipe, about in samples():
        rgb = paint(page, renderer=renderer)
        spoiled = spoil(rgb, recipe, np.random.default_rng(21)) if recipe else None
        _write(name, page, spoiled or Spoiled(rgb=rgb, homography=np.eye(3), recipe=""), about)


def _write(name, page, spoiled, about):
    path = write_case(
        HERE, name, spoiled.rgb, (), suffix=spoiled.suffix, optimize=True, **spoiled.save_options()
    )
    curves = []
    several = len(page.charts) > 1
    for k, chart in enumerate(page.charts, 1):
        for n, trace in enumerate(chart.traces, 1):
            stem = f"{name}-{k}" if several else name
            known = f"{stem}.{n}.known.csv" if len(chart.traces) > 1 else f"{stem}.known.csv"
            _, db = drawn_curve(chart, trace)
            rows = [f"{a},{max(db[4 * a], BELOW_DB):.3f}" for a in range(360) if np.isfinite(db[4 * a])]
            (HERE / known).write_text("angle_deg,chart_db\n" + "\n".join(rows) + "\n")
            curves.append({"chart": k, "ink": spoiled.ink(trace.ink), "name": trace.label, "known": known})
    chart = page.charts[0]
    told = {
        "outer": chart.outer_db,
        "centre": chart.centre_db,
        "law": chart.law,
        "zero": chart.zero,
        "turn": chart.turn,
    }
    if chart.law != "even":
        del told["centre"]
    options = [
        f"--{key}={value:g}" if isinstance(value, float) else f"--{key}={value}"
        for key, value in told.items()
    ]
    sheet = {
        "picture": path.name,
        "about": f"{MARKED}: {about}",
        "told": told,
        "options": options,
        "curves": curves,
    }
    (HERE / f"{name}.json").write_text(json.dumps(sheet, indent=1) + "\n")


def _title(page_width, y, text, size=17, colour="#101010"):
    return Text(x=page_width / 2, y=y, text=f"{text} - {MARKED}", size=size, colour=colour, family="bold")


def _note(y, colour="#404040"):
    return Text(x=24, y=y, text=NOTE, size=11, colour=colour, anchor="lm")


def _panel():
    level = np.logaddexp(
        np.log(10) / 10 * patterns.cosine_beam(DEG, power=2.6, back_db=-26, back_power=1.4),
        np.log(10) / 10 * (patterns.first_order(np.abs(DEG - 35), a=0.3) - 24),
    ) / (np.log(10) / 10)
    trace = Trace(db=level - level.max(), ink="#b3261e", width=2.4, label="Port 1, vertical")
    chart = Chart(
        traces=(trace,),
        centre_x=331.4,
        centre_y=352.8,
        outer_px=251.3,
        ring=Stroke(colour="#b9bec6"),
        spoke=Stroke(colour="#b9bec6"),
        ring_labels=Printed(size=12, ray_deg=82),
        rim_labels=Printed(size=13, unit="\u00b0"),
    )
    texts = (_title(660, 30, "Panel antenna, azimuth, 2450 MHz"), _note(668))
    return Page(charts=(chart,), width=660, height=690, furniture=texts)


def _screenshot():
    rng = np.random.default_rng(4)
    trace = Trace(
        db=12 + patterns.measured(DEG, rng, order=7, front=2.2),
        ink="#4cc9f0",
        width=2.2,
        dash="fill",
        fill=0.25,
    )
    chart = Chart(
        traces=(trace,),
        centre_x=300.6,
        centre_y=308.2,
        outer_px=214.5,
        outer_db=15.0,
        centre_db=-15.0,
        ring_db=(15.0, 10.0, 5.0, 0.0, -5.0, -10.0),
        zero="right",
        turn="ccw",
        ring=Stroke(colour="#4a5566"),
        spoke=Stroke(colour="#4a5566"),
        rim=Stroke(colour="#aab4c4", width=1.5),
        ring_labels=Printed(size=11, colour="#d8dde6", ray_deg=8, unit=" dBi", box="#161b24"),
        rim_labels=Printed(size=13, colour="#d8dde6"),
    )
    texts = (_title(600, 26, "Yagi antenna, E-plane, 435 MHz", colour="#e8ecf2"), _note(586, "#aab4c4"))
    return Page(charts=(chart,), width=600, height=606, paper="#161b24", furniture=texts)


def _two_bands():
    low = patterns.sector(DEG, half_power_deg=78, front_to_back_db=25)
    high = np.roll(
        patterns.backed(patterns.linear_array(DEG, n=5, spacing_wl=0.62, phase_deg=18), DEG, back_db=-17), 8
    )
    traces = (
        Trace(db=low, ink="#0a58ca", width=2.2, label="880 MHz"),
        Trace(db=high - 1.5, ink="#d9730d", width=2.2, label="1800 MHz"),
    )
    chart = Chart(
        traces=traces,
        centre_x=330.2,
        centre_y=340.7,
        outer_px=248.0,
        centre_db=-30.0,
        ring_db=(0.0, -5.0, -10.0, -15.0, -20.0, -25.0),
        spoke_deg=15,
        ring=Stroke(colour="#9aa0a6", dash=(5, 3)),
        spoke=Stroke(colour="#c6cad0"),
        turn="ccw",
        ring_labels=Printed(size=11, ray_deg=97),
        rim_labels=Printed(size=12, signed=True),
    )
    items = [_title(660, 30, "Sector antenna, azimuth"), Panel(x=24, y=632, w=240, h=30), _note(690)]
    for k, trace in enumerate(traces):
        x = 34 + 115 * k
        items.append(
            Line(points=((x, 647), (x + 30, 647)), stroke=Stroke(colour=trace.ink, width=trace.width))
        )
        items.append(Text(x=x + 36, y=647, text=trace.label, size=12, anchor="lm"))
    return Page(charts=(chart,), width=660, height=710, furniture=tuple(items))


def _dashed():
    trace = Trace(
        db=patterns.half_wave_dipole(DEG),
        ink="#000000",
        width=2.6,
        dash="dashed",
        label="free space",
        dash_scale=1.3,
    )
    black = Stroke(colour="#000000")
    chart = Chart(
        traces=(trace,),
        centre_x=310.0,
        centre_y=322.0,
        outer_px=236.0,
        ring=black,
        spoke=black,
        rim=Stroke(colour="#000000", width=2),
        ring_labels=Printed(size=12, ray_deg=100, family="serif", box="#ffffff", colour="#000000"),
        rim_labels=Printed(size=14, family="serif", colour="#000000"),
        zero="right",
        turn="ccw",
    )
    texts = (_title(620, 28, "Half-wave dipole, E-plane"), _note(634))
    return Page(charts=(chart,), width=620, height=656, furniture=texts)


def _log_periodic():
    level = patterns.backed(patterns.linear_array(DEG, n=3, spacing_wl=0.42), DEG, back_db=-19)
    grey = Stroke(colour="#8c8c8c")
    chart = Chart(
        traces=(Trace(db=level, ink="#1b6e3c", width=2.3, label="14.2 MHz"),),
        centre_x=318.6,
        centre_y=330.1,
        outer_px=239.2,
        law="log-periodic",
        centre_db=-30.0,
        ring_db=(0.0, -3.0, -6.0, -10.0, -20.0, -30.0),
        spoke_deg=15,
        ring=grey,
        spoke=grey,
        ring_labels=Printed(size=11, ray_deg=90, box="#ffffff"),
        rim_labels=Printed(size=12),
        zero="right",
        turn="ccw",
    )
    texts = (_title(636, 28, "Three-element beam, azimuth"), _note(650))
    return Page(charts=(chart,), width=636, height=672, furniture=texts)


def _half():
    level = 8.0 + patterns.backed(patterns.linear_array(DEG, n=3, spacing_wl=0.55), DEG, back_db=-25)
    pale = Stroke(colour="#a8b4c0")
    chart = Chart(
        traces=(Trace(db=level, ink="#6a0dad", width=2.4, label="elevation"),),
        centre_x=330.5,
        centre_y=352.4,
        outer_px=262.7,
        outer_db=10.0,
        centre_db=-20.0,
        ring_db=(10.0, 5.0, 0.0, -5.0, -10.0, -15.0),
        half=True,
        ring=pale,
        spoke=pale,
        spoke_deg=10,
        ring_labels=Printed(size=11, ray_deg=62),
        rim_labels=Printed(size=12, unit="\u00b0", signed=True),
    )
    texts = (_title(660, 30, "Ground station, upper half plane"), _note(420))
    return Page(charts=(chart,), width=660, height=440, furniture=texts)


def _scan():
    level = patterns.omni(DEG, np.random.default_rng(12), ripple_db=3.0)
    grey = Stroke(colour="#707070")
    chart = Chart(
        traces=(Trace(db=level + 5.2, ink="#1d3fa5", width=2.6, label="omni"),),
        centre_x=322.0,
        centre_y=330.0,
        outer_px=240.0,
        outer_db=6.0,
        centre_db=-18.0,
        ring_db=(6.0, 0.0, -6.0, -12.0),
        ring=grey,
        spoke=grey,
        rim=Stroke(colour="#303030", width=2),
        ring_labels=Printed(size=12, ray_deg=80, unit=" dBi"),
        rim_labels=Printed(size=13),
    )
    texts = (_title(644, 28, "Whip antenna, azimuth, 162 MHz"), _note(646))
    return Page(charts=(chart,), width=644, height=668, paper="#fffdf6", furniture=texts)


def _pair():
    azimuth = patterns.sector(DEG, half_power_deg=65, front_to_back_db=28)
    elevation = patterns.backed(
        patterns.linear_array(DEG, n=4, spacing_wl=0.7, phase_deg=-25), DEG, back_db=-22
    )
    charts = []
    for k, (level, cx) in enumerate(((azimuth, 262.3), (elevation - elevation.max(), 772.8))):
        charts.append(
            Chart(
                traces=(
                    Trace(
                        db=level, ink=("#c2185b", "#00695c")[k], width=2.1, label=("azimuth", "elevation")[k]
                    ),
                ),
                centre_x=cx,
                centre_y=292.6,
                outer_px=196.4,
                ring=Stroke(colour="#b0b0b0"),
                spoke=Stroke(colour="#b0b0b0"),
                ring_labels=Printed(size=10, ray_deg=75),
                rim_labels=Printed(size=11),
            )
        )
    texts = [_title(1036, 26, "Panel antenna, both cuts, gain 14 dBi"), _note(560)]
    for name, chart in zip(("Azimuth (horizontal plane)", "Elevation (vertical plane)"), charts, strict=True):
        texts.append(Text(x=chart.centre_x, y=62, text=name, size=13))
    crops = ((0, 44, 518, 490), (518, 44, 518, 490))
    return Page(charts=tuple(charts), width=1036, height=580, furniture=tuple(texts), crops=crops)


if __name__ == "__main__":
    main()
