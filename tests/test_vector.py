"""Charts drawn with lines in a PDF: their own numbers are read back, however the program drew them."""

from dataclasses import replace

import numpy as np
import pytest

from digitise.bearing import make_bearing
from digitise.exceptions import NotReadError
from digitise.picture import open_picture
from digitise.reading import read_charts
from digitise.scale import make_scale
from digitise.settings import Settings
from digitise.vector import find_vector_charts, followed, page_labels, trace_at, vector_traces, way_read
from tests.pdf_pages import (
    chord_circle,
    curve_circle,
    dash_circle,
    form,
    line,
    pdf_file,
    polar,
    spokes,
    text,
)

X, Y, R = 200.0, 190.0, 150.0  # points
SPAN_DB = 40.0  # from the rim to the centre
WITHIN_DB = 0.01
DEG = np.arange(360.0)
GRID, INK, THIN = "0.6 0.6 0.6 RG 0.5 w\n", "0.8 0.1 0.1 RG 1.2 w\n", "[] 0 d\n"


def lobes(deg=DEG):
    """An invented pattern with a back lobe, dB, 0 at its peak."""
    t = np.radians(deg - 20)
    return 20 * np.log10(np.abs(0.55 + 0.45 * np.cos(t)) ** 2 + 0.08 * np.abs(np.sin(2 * t)) + 0.03) - 0.56


def radius(level_db):
    """Points from the centre."""
    return R * (1 + level_db / SPAN_DB)


def rings(draw=curve_circle, x=X, y=Y, outer=R, n=4):
    """Even rings, drawn in one of several ways."""
    return "".join(draw(x, y, outer * (k + 1) / n) for k in range(n))


def trace(level_db=None, deg=DEG, *, x=X, y=Y, close=True, paint="S"):
    """The pattern, or other levels, as one path."""
    level_db = lobes(deg) if level_db is None else level_db
    return line(*polar(x, y, radius(level_db), deg), close=close, paint=paint)


def chart(**changes):
    """A plain chart's content: rings, spokes, one red trace."""
    return GRID + rings(**changes) + spokes(X, Y, R) + INK + trace()


@pytest.fixture
def opened(tmp_path):
    """Write a PDF of some content and open its page."""

    def write(content, **options):
        path = tmp_path / "page.pdf"
        path.write_bytes(pdf_file(content, **options))
        return open_picture(path)

    return write


def read(picture, n_traces=1):
    """The only chart of a page, its number of traces checked."""
    charts = find_vector_charts(picture)
    assert len(charts) == 1
    assert len(charts[0].traces) == n_traces
    return charts[0]


def misfit_db(found, level_db=None, deg=DEG, plane_deg=None):
    """Largest difference of a trace from a level curve; NaN where it has none counts."""
    level_db = lobes(deg) if level_db is None else level_db
    own = SPAN_DB * (trace_at(found, deg if plane_deg is None else plane_deg) - 1)
    return float(np.max(np.abs(own - level_db)))


def test_a_plain_chart_is_read_to_a_hundredth_of_a_decibel(opened):
    """Bezier rings, spokes, a closed trace: grid in place, pattern to 0.01 dB, colour and width as drawn."""
    picture = opened(chart())

    found = read(picture)

    scale = picture.vector.px_per_pt
    assert found.grid.outer_px == pytest.approx(R * scale, rel=1e-5)
    assert found.grid.centre_x == pytest.approx(X * scale - 0.5, abs=0.01)
    assert found.grid.centre_y == pytest.approx((400 - Y) * scale - 0.5, abs=0.01)
    assert found.grid.ring_rho == pytest.approx([1, 0.75, 0.5, 0.25], abs=1e-5)
    assert found.grid.spoke_step_deg == pytest.approx(30)
    assert len(found.grid.spoke_deg) == 12
    assert found.traces[0].ink == "#cc1a1a"
    assert found.traces[0].dash == "solid"
    assert found.traces[0].width_px == pytest.approx(1.2 * scale, abs=0.02)
    assert misfit_db(found.traces[0]) < WITHIN_DB


@pytest.mark.parametrize(
    "grid",
    [
        GRID + rings(chord_circle) + spokes(X, Y, R),
        GRID + rings(dash_circle) + spokes(X, Y, R),
        GRID + "[2 2] 0 d\n" + rings() + spokes(X, Y, R) + THIN,
        GRID + rings() + "".join(line([X - dx, X + dx], [Y - dy, Y + dy]) for dx, dy in ((R, 0), (0, R))),
        GRID + rings().replace("S\n", "") + "S\n" + spokes(X, Y, R),
        GRID + rings(),
        "0 0 0 RG 1 w\n" + curve_circle(X, Y, R) + GRID + rings(n=8) + spokes(X, Y, R, 10),
    ],
    ids=["chords", "strokes", "dashes", "diameters", "one-path", "no-spokes", "rim-of-its-own"],
)
def test_grids_drawn_in_other_ways(opened, grid):
    """Rings of chords, of separate strokes, with dashes, all in one path; diameters for spokes; no spokes."""
    found = read(opened(grid + INK + trace()))

    assert found.grid.ring_rho[:1] == pytest.approx([1.0])
    assert len(found.grid.ring_rho) in (4, 8)
    assert misfit_db(found.traces[0]) < WITHIN_DB


def pieces():
    """The trace as a path for every segment."""
    x, y = polar(X, Y, radius(lobes()), DEG)
    x, y = np.append(x, x[0]), np.append(y, y[0])
    return "".join(line(x[k : k + 2], y[k : k + 2]) for k in range(360))


def strokes():
    """The trace as strokes of 3 degrees with gaps of 2."""
    return "".join(trace(deg=np.linspace(k, k + 3, 7), close=False) for k in range(0, 360, 5))


def through_data_units():
    """The trace in units of its own under a matrix that scales x and y differently."""
    x, y = polar(0, 0, 1 + lobes() / SPAN_DB, DEG)
    matrix = f"q {R / 40} 0 0 {R / 9} {X} {Y} cm\n"
    return matrix + "0.2 w\n" + line(x * 40, y * 9, close=True, digits=6) + "Q\n"


@pytest.mark.parametrize(
    ("drawn", "where"),
    [
        (pieces(), DEG),
        (strokes(), np.arange(0, 360, 5.0) + 1),
        (through_data_units(), DEG),
        (trace(paint="B"), DEG),
    ],
    ids=["segments", "strokes", "data-units", "stroked-and-filled"],
)
def test_traces_drawn_in_other_ways(opened, drawn, where):
    """A path a segment, a path a dash, a path in data units, a filled and stroked one: the same pattern."""
    found = read(opened(GRID + rings() + spokes(X, Y, R) + INK + "0.9 0.9 0.6 rg\n" + drawn))

    assert misfit_db(found.traces[0], lobes(where), where) < WITHIN_DB


def test_dashes(opened):
    """Dashes are told by the path's attribute and by separate strokes; gaps between strokes are bridged."""
    dotted = "[0.1 2.4] 0 d 1 J\n" + trace() + "[] 0 d 0 J\n"
    dashed = "0 0 1 RG [6 3] 0 d\n" + trace(lobes() - 6) + THIN
    found = read(opened(GRID + rings() + INK + dotted + dashed + "0 0.5 0 RG\n" + strokes()), 3)

    assert [item.dash for item in found.traces] == ["dotted", "dashed", "dashed"]
    state = followed(found.traces[2], found.grid).state
    assert 0.3 < np.mean(state == "bridged") < 0.5
    assert not np.any(state == "missing")
    assert np.all(followed(found.traces[1], found.grid).state == "seen")


def test_a_trace_of_curves(opened):
    """A trace of cubic curves is followed between its points: a circle off the centre, by its equation."""
    offset, own = 40.0, 60.0
    found = read(opened(GRID + rings() + INK + curve_circle(X, Y + offset, own)))

    t = np.radians(DEG)
    rho = (offset * np.cos(t) + np.sqrt(own**2 - (offset * np.sin(t)) ** 2)) / R
    # Four arcs stray from a circle by 2.7e-4 of its radius at most.
    assert np.max(np.abs(trace_at(found.traces[0], DEG) - rho)) < 3.5e-4 * own / R


@pytest.mark.parametrize("turn", [0, 90, 180, 270])
def test_turned_pages(opened, turn):
    """/Rotate turns the page clockwise, and with it the chart's plane angles."""
    found = read(opened(chart(), size=(400, 430), page=f"/Rotate {turn} /CropBox [10 20 390 420]"))

    assert misfit_db(found.traces[0], plane_deg=DEG + turn) < WITHIN_DB


def test_forms_within_forms_and_y_down(opened):
    """Matrices of a page, of its form and of a form within add up; a mirrored one mirrors the pattern."""
    inner = form("0.8 0.1 0.1 RG 1.2 w\n" + trace(x=0, y=0), matrix=(1, 0, 0, 1, 20, 10))
    outer = form(
        GRID + rings(x=20, y=10) + spokes(20, 10, R) + "/G Do", matrix=(0.5, 0, 0, 0.5, 0, 0)
    ).replace(b"/Font", b"/XObject << /G 11 0 R >> /Font")
    content = "q 1.5 0 0 -1.5 185 200 cm /F Do Q"

    found = read(opened(content, resources="/XObject << /F 10 0 R >>", objects=[outer, inner]))

    assert found.grid.centre_x / found.grid.outer_px == pytest.approx((185 + 15) / (0.75 * R), abs=5e-3)
    assert misfit_db(found.traces[0], plane_deg=180 - DEG) < WITHIN_DB


def test_a_stretched_chart(opened):
    """A chart placed wider than high has ovals for rings; the stretch is taken off its bearings too."""
    content = "q 1.15 0 0 0.9 -20 15 cm\n" + chart() + "Q\n"

    found = read(opened(content, size=(440, 400)))

    assert len(found.grid.spoke_deg) == 12
    assert found.grid.skew_deg == pytest.approx(0, abs=1e-3)
    assert misfit_db(found.traces[0]) < WITHIN_DB


def test_what_is_clipped_away_is_not_read(opened):
    """A trace that leaves the clip outline has no value there, and keeps its value inside."""
    clip = curve_circle(X, Y, 0.9 * R).replace("S\n", "W n\n")
    found = read(opened(GRID + rings() + spokes(X, Y, R) + "q " + clip + INK + trace() + "Q\n"))

    rho = trace_at(found.traces[0], DEG)
    outside = lobes() > SPAN_DB * (0.91 - 1)
    inside = lobes() < SPAN_DB * (0.9 - 1)
    assert np.isnan(rho[outside]).all()
    assert np.max(np.abs(SPAN_DB * (rho[inside] - 1) - lobes()[inside])) < WITHIN_DB


@pytest.mark.parametrize("first", [0.0, 270.0])
def test_half_charts(opened, first):
    """A chart drawn on half a circle: its arc is known, and the trace has no value beyond it."""
    arcs = "".join(chord_circle(X, Y, R * k / 4, 90, (first, first + 180)) for k in (4, 3, 2, 1))
    deg = np.arange(first, first + 181)
    lines = "".join(line(*polar(X, Y, np.array([0, R]), a)) for a in np.arange(first, first + 181, 30))
    found = read(opened(GRID + arcs + lines + INK + trace(deg=deg, close=False)))

    start, end = found.grid.arc_deg
    assert (start - first + 180) % 360 - 180 == pytest.approx(0, abs=1)
    assert end - start == pytest.approx(180, abs=2)
    assert misfit_db(found.traces[0], lobes(deg), deg) < WITHIN_DB
    assert np.isnan(trace_at(found.traces[0], np.array([first + 200, first + 300]))).all()


def test_an_omni_is_a_trace_and_not_a_ring(opened):
    """A circle in an ink of its own is a trace, at a ring's place and elsewhere, in colour and in black."""
    level = np.full(360, -10.0)
    coloured = read(opened(GRID + rings() + spokes(X, Y, R) + INK + trace(level)))
    black = read(opened(GRID + rings() + spokes(X, Y, R) + "0 0 0 RG 0.5 w\n" + trace(level - 3.7)))
    on_rim = read(opened(GRID + rings() + spokes(X, Y, R) + INK + trace(level * 0)))

    assert misfit_db(coloured.traces[0], level) < WITHIN_DB
    assert misfit_db(black.traces[0], level - 3.7) < WITHIN_DB
    assert misfit_db(on_rim.traces[0], level * 0) < WITHIN_DB
    assert all(len(found.grid.ring_rho) == 4 for found in (coloured, black, on_rim))


def test_two_charts_in_reading_order(opened):
    """Two charts on a page are two results, the left one first, each with its own trace."""
    content = ""
    for x, own in ((560.0, lobes() - 5), (200.0, lobes())):
        content += GRID + rings(x=x) + spokes(x, Y, R) + INK + trace(own, x=x)
    charts = find_vector_charts(opened(content, size=(760, 400)))

    assert len(charts) == 2
    assert charts[0].grid.centre_x < charts[1].grid.centre_x
    assert misfit_db(charts[0].traces[0]) < WITHIN_DB
    assert misfit_db(charts[1].traces[0], lobes() - 5) < WITHIN_DB


def test_a_box_chooses_its_chart(opened):
    """With a box only the chart at its place is returned."""
    content = "".join(GRID + rings(x=x) + spokes(x, Y, R) + INK + trace(x=x) for x in (200.0, 560.0))
    picture = opened(content, size=(760, 400))
    both = find_vector_charts(picture)

    assert [c.grid.centre_x for c in find_vector_charts(picture, box=both[1].box)] == [both[1].grid.centre_x]


def test_what_is_no_trace(opened):
    """Legend samples and boxes, arcs, marked lobe edges, outlined letters and arrows are left out."""
    legend = "1 1 1 rg 0 0 0 RG 0.5 w 60 300 80 30 re B\n" + INK + line([66, 86], [315, 315])
    arc = "0 0 1 RG 1 w\n" + chord_circle(X, Y, 80, 30, (10.0, 70.0))
    edges = (
        "0 0 1 RG 1 w\n"
        + line(*polar(X, Y, np.array([0, R]), 35.0))
        + line(*polar(X, Y, np.array([0, R]), 5.0))
    )
    letter = "0 0 0 rg\n" + line(
        X + 30 + 9 * np.sin(np.arange(40)), Y + 40 + 9 * np.cos(2 * np.arange(40)), close=True, paint="f"
    )
    arrow = "0 0 0 RG\n" + line([X, X + 60, X + 52, X + 60, X + 52], [Y, Y + 80, Y + 78, Y + 80, Y + 72])
    found = read(opened(chart() + legend + arc + edges + letter + arrow))

    assert misfit_db(found.traces[0]) < WITHIN_DB


def test_a_line_that_does_not_show_is_no_trace(opened):
    """A line under an opaque area, one in the paper's colour and a clear one are not on the picture."""
    hidden = "0 0 1 RG\n" + trace(lobes() - 4) + f"1 1 1 rg {X - 160} {Y - 160} 320 320 re f\n"
    white = "1 1 1 RG 1 w\n" + trace(lobes() - 8)
    clear = "/Clear gs 0 1 0 RG\n" + trace(lobes() - 6) + "/Seen gs\n"
    states = "/ExtGState << /Clear << /CA 0 >> /Seen << /CA 1 >> >>"
    found = read(opened(hidden + white + clear + chart(), resources=states))

    assert found.traces[0].ink == "#cc1a1a"


def test_a_pale_ink_is_named_as_it_shows(opened):
    """An ink of half opacity on white is half way to white; so it is on a dark page."""
    states = "/ExtGState << /Half << /CA 0.5 >> >>"
    pale = GRID + rings() + spokes(X, Y, R) + "/Half gs 1 0 0 RG 2 w\n" + trace()
    dark = "0 0 0 rg 0 0 400 400 re f\n"

    assert read(opened(pale, resources=states)).traces[0].ink in ("#ff8080", "#ff7f7f")
    assert read(opened(dark + pale, resources=states)).traces[0].ink in ("#800000", "#7f0000")


def test_pieces_with_the_pen_up(opened):
    """A trace that stops and goes on is one trace: bridged over a short way, missing over a long one."""
    parts = [(0, 100), (102, 200), (260, 300), (300, 359)]
    path = "".join(trace(deg=np.arange(a, b + 1.0), close=False, paint="") for a, b in parts) + "S\n"
    found = read(opened(GRID + rings() + spokes(X, Y, R) + INK + path))

    line_ = followed(found.traces[0], found.grid)
    state = dict(zip(np.round(line_.plane_deg, 2), line_.state, strict=True))
    assert state[50.0] == state[280.0] == "seen"
    assert state[101.0] == state[359.5] == "bridged"
    assert state[230.0] == "missing"


def test_a_trace_into_the_centre_is_at_the_floor(opened):
    """Where the pattern's line goes into the centre, the bearings beyond it are at the floor."""
    level = np.where(
        np.abs(DEG - 180) < 100, 20 * np.log10(np.maximum(np.cos(np.radians((DEG - 180) * 0.9)), 1e-9)), -99
    )
    level = np.maximum(level, -SPAN_DB)
    found = read(opened(GRID + rings() + spokes(X, Y, R) + INK + trace(level)))

    line_ = followed(found.traces[0], found.grid)
    state = dict(zip(np.round(line_.plane_deg, 2), line_.state, strict=True))
    assert state[180.0] == "seen"
    assert state[10.0] == "floor"
    seen = np.abs(DEG - 180) < 95
    assert misfit_db(found.traces[0], level[seen], DEG[seen]) < WITHIN_DB


def test_the_outermost_crossing_counts(opened):
    """A line that crosses a bearing several times is read where it is farthest out, as a picture would be."""
    deg = np.concatenate([np.arange(0, 121.0), np.arange(119, 99, -1.0), np.arange(101, 361.0)])
    level = -4 - 8 * np.linspace(0, 1, len(deg))
    found = read(opened(GRID + rings() + spokes(X, Y, R) + INK + trace(level, deg, close=False)))

    first_pass = level[np.flatnonzero(deg == 110)[0]]
    assert SPAN_DB * (trace_at(found.traces[0], np.array([110.0]))[0] - 1) == pytest.approx(
        first_pass, abs=WITHIN_DB
    )


def test_texts_are_placed_and_told_apart(opened):
    """Ring levels, bearings round the rim, a caption and a legend: text, number, unit, place and role."""
    words = "".join(text(X + 3, Y + R * k / 4 - 3, f"{10 * k - 40} dBi") for k in (1, 2, 3, 4))
    for deg in range(0, 360, 30):
        x, y = polar(X, Y, R + 14, float(deg))
        words += text(x - 2.2 * len(str(deg)), y - 3, f"{deg}")
    words += (
        text(120, 385, "Invented panel, azimuth", 11)
        + INK
        + line([20, 40], [20, 20])
        + text(46, 17, "Port one")
    )
    found = read(opened(chart() + words))

    ring = {(item.text, item.value, item.unit) for item in found.labels.with_role("ring")}
    assert ring == {(f"{v} dBi", float(v), "dBi") for v in (-30, -20, -10, 0)}
    assert sorted(item.value for item in found.labels.with_role("rim")) == list(range(0, 360, 30))
    rim = {item.value: item for item in found.labels.with_role("rim")}
    assert rim[90].plane_deg == pytest.approx(90, abs=2)
    assert rim[90].rho == pytest.approx(1 + 14 / R, abs=0.03)
    assert [item.text for item in found.labels.with_role("caption")] == ["Invented panel, azimuth"]
    assert found.traces[0].name == "Port one"
    assert [item.text for item in found.labels.with_role("legend")] == ["Port one"]


@pytest.mark.parametrize(("anchor", "safe"), [("left", True), ("middle", True), ("below", False)])
def test_ring_labels_name_their_rings(opened, anchor, safe):
    """Levels printed beside their rings name them; half-way between two rings they do, but it is not safe."""
    words = ""
    for k in range(1, 9):
        level = f"{5 * k - 40}"
        x, y = polar(X, Y, R * k / 8, 70.0)
        wide = 4.4 * len(level)
        words += text(
            x + {"left": 1, "middle": -wide / 2, "below": -wide}[anchor],
            y - (9 if anchor == "below" else 3),
            level,
        )
    content = GRID + rings(n=8) + spokes(X, Y, R) + INK + trace()
    labels = read(opened(content + words)).labels

    named = {item.value: item.ring_rho for item in labels.with_role("ring")}
    assert named == pytest.approx({5.0 * k - 40: k / 8 for k in range(1, 9)}, abs=1e-6)
    assert labels.ring_safe == safe


def test_scale_and_bearing_from_the_page_text(opened):
    """With levels and bearings printed the chart is read with nothing told: 0 right, turning left."""
    words = "".join(text(X + 3, Y + R * k / 4 - 3, f"{8 * k - 32} dB") for k in (1, 2, 3, 4))
    for deg in range(0, 360, 45):
        x, y = polar(X, Y, R + 16, 90.0 - deg)
        words += text(x - 2.2 * len(str(deg)), y - 3, f"{deg}\xb0")
    found = read(opened(chart() + words))
    settings = Settings()

    scale = make_scale(found.grid, settings=settings, labels=found.labels)
    bearing = make_bearing(found.grid, settings=settings, labels=found.labels)

    assert not scale.reasons
    assert not bearing.reasons
    assert scale.law == "even"
    assert scale.level(np.array([1.0, 0.5])) == pytest.approx([0, -16], abs=1e-4)
    assert (bearing.zero_deg, bearing.turn) == (pytest.approx(90, abs=1e-3), "ccw")


def library_page(path, level_db, *, thinned):
    """A polar chart written by matplotlib; `thinned` leaves the library's own thinning of long lines on."""
    import matplotlib as mpl
    from matplotlib.backends.backend_pdf import FigureCanvasPdf
    from matplotlib.figure import Figure

    with mpl.rc_context({"path.simplify": thinned}):
        figure = Figure(figsize=(6, 6))
        FigureCanvasPdf(figure)
        axes = figure.add_subplot(projection="polar", theta_offset=np.pi / 2, theta_direction=-1)
        axes.plot(np.radians(np.arange(361)), np.append(level_db, level_db[0]), label="Invented antenna")
        axes.set_rlim(-SPAN_DB, 0)
        axes.set_rticks([-40, -30, -20, -10, 0])
        axes.legend(loc="lower left", bbox_to_anchor=(-0.12, -0.12))
        figure.savefig(path)


@pytest.mark.parametrize(("thinned", "within_db"), [(False, 1e-3), (True, 0.05)])
def test_a_plotting_library_page(tmp_path, thinned, within_db):
    """A page by another program is read to 0.001 dB; what its thinning of lines loses stays lost."""
    library_page(tmp_path / "page.pdf", lobes(), thinned=thinned)

    found = read(open_picture(tmp_path / "page.pdf"))

    assert found.traces[0].name == "Invented antenna"
    assert found.traces[0].ink == "#1f77b4"
    assert misfit_db(found.traces[0]) < within_db
    assert {item.value for item in found.labels.with_role("ring")} >= {-30.0, -20.0, -10.0, 0.0}


def test_drawn_lines_and_pixels_agree(tmp_path):
    """The same page read from its lines and its pixels: the tables differ by no more than their errors."""
    library_page(tmp_path / "page.pdf", lobes(), thinned=False)
    picture = open_picture(tmp_path / "page.pdf")
    settings = Settings(outer_db=0, centre_db=-SPAN_DB, zero_deg=0, turn="cw")
    pixels = read_charts(replace(picture, vector=None), settings=settings)[0]
    drawn = read(picture)

    level = SPAN_DB * (trace_at(drawn.traces[0], DEG) - 1)
    table = pixels.traces[0].table
    off = np.abs(table.chart_db - level)
    assert len(pixels.traces) == 1
    assert pixels.grid.centre_x == pytest.approx(drawn.grid.centre_x, abs=0.1)
    assert pixels.grid.outer_px == pytest.approx(drawn.grid.outer_px, abs=0.2)
    assert np.median(off) < 0.03
    assert np.percentile(off, 95) < 0.2
    assert np.mean(off <= table.error95_db + 0.002) > 0.9


def test_a_minus_drawn_as_a_bar_counts(opened):
    """Some programs set the minus sign as a small filled shape, not as a letter."""
    words = "".join(
        text(X + 10, Y + R * k / 4 - 3, f"{40 - 10 * k}")
        + f"0 g {X + 4.5:.2f} {Y + R * k / 4 - 0.6:.2f} 4.2 0.6 re f\n"
        for k in (1, 2, 3)
    )
    found = read(opened(chart() + words + text(X + 10, Y + R - 3, "0")))

    assert {item.value for item in found.labels.with_role("ring")} == {-30.0, -20.0, -10.0, 0.0}


def test_turned_and_hidden_text(opened):
    """Text along a turned line is one label with its turn; text that is not drawn is none."""
    words = text(100, 60, "Gain in dBi", 10, turn_deg=90) + text(X, Y + 20, "-25", mode=3)
    picture = opened(chart() + words)

    labels = read(picture).labels
    turned = next(item for item in labels.found if item.text == "Gain in dBi")
    assert turned.angle_deg == pytest.approx(-90, abs=0.1)
    assert turned.unit == "dBi"
    assert turned.h_px > 0.4 * turned.w_px / len(turned.text)
    assert "-25" not in [item.text for item in labels.found]
    assert page_labels(picture, read(picture).grid).found


def test_a_grid_without_a_drawn_trace(opened):
    """A chart whose trace is not drawn as a line has a grid, labels and no traces."""
    read(opened(GRID + rings() + spokes(X, Y, R)), 0)


@pytest.mark.parametrize(
    "content",
    [
        "",
        "".join(line([20, 380], [y, y]) for y in range(20, 380, 20))
        + "".join(line([x, x], [20, 380]) for x in range(20, 380, 30)),
        curve_circle(100, 100, 30) + curve_circle(250, 260, 60) + curve_circle(300, 100, 45),
        curve_circle(200, 200, 80),
    ],
    ids=["empty", "table", "circles-apart", "one-circle"],
)
def test_pages_without_a_chart(opened, content):
    """A table, circles that share no centre and a lone circle are no charts."""
    assert find_vector_charts(opened("0 0 0 RG 1 w\n" + content)) == ()


def test_a_picture_of_pixels_has_no_drawn_chart(tmp_path):
    """A bitmap file has no drawn objects."""
    from PIL import Image

    Image.new("RGB", (90, 90), "white").save(tmp_path / "plain.png")

    assert find_vector_charts(open_picture(tmp_path / "plain.png")) == ()


def test_the_error_holds_what_thinned_points_lose(opened):
    """A smooth pattern drawn with a point every 4 degrees strays from its chords as the error says."""
    deg = np.arange(0, 360, 4.0)
    found = read(opened(GRID + rings() + spokes(X, Y, R) + INK + trace(lobes(deg) - 0.5, deg)))

    line_ = followed(found.traces[0], found.grid)
    truth = 1 + (lobes(line_.plane_deg) - 0.5) / SPAN_DB
    off_px = np.abs(line_.rho - truth) * line_.radial_share * found.grid.outer_px
    assert np.mean(off_px <= 1.96 * line_.u_px) > 0.95
    assert np.median(line_.u_px) < 4 * np.median(off_px) + 0.02


def test_traces_for_the_rest_of_the_flow(opened):
    """Told inks choose among the drawn traces, covers take rows out, an ink that is not there is refused."""
    picture = opened(chart() + "0.1 0.2 0.8 RG 1 w\n" + trace(lobes() - 8))
    found = read(picture, 2)
    scale = picture.vector.px_per_pt
    cover = ((X - 20) * scale, 0.0, 40 * scale, (400 - Y - 20) * scale)

    both = vector_traces(found, settings=Settings())
    blue = vector_traces(found, settings=Settings(inks=("#2030c0",), covers=(cover,)))
    with pytest.raises(
        NotReadError, match=r"no trace is drawn in the ink #00ff00; inks on the chart: #cc1a1a, #1a33cc"
    ):
        vector_traces(found, settings=Settings(inks=("#00ff00",)))

    assert [item.ink for item, _ in both] == ["#cc1a1a", "#1a33cc"]
    assert [item.ink for item, _ in blue] == ["#1a33cc"]
    line_ = blue[0][0].trace
    assert line_.state[0] == "missing"
    assert line_.state[20 * 90] == "seen"
    assert way_read(picture, found) == "vector"
    assert way_read(picture) == "raster"


def test_a_square_frame_is_no_ring(opened):
    """The corners of a square lie on a circle; the square is none, nor is a many-sided frame."""
    frame = "0 0 0 RG 1 w\n" + line(*polar(X, Y, 185.0, np.array([45, 135, 225, 315])), close=True)
    frame += line(*polar(X, Y, 160.0, np.arange(0, 360, 45)), close=True)
    found = read(opened(frame + chart()))

    assert len(found.grid.ring_rho) == 4
    assert misfit_db(found.traces[0]) < WITHIN_DB


def test_labels_printed_close_together_are_several(opened):
    """A rim label beside a ring label, and a row of levels with units, are labels of their own."""
    words = text(X - R - 16, Y - 3, "270") + "".join(
        text(X - R * k / 4 + 1, Y - 3, f"{10 * k - 40} dB", 13) for k in (4, 3, 2, 1)
    )
    labels = read(opened(chart() + words)).labels

    assert [item.text for item in labels.with_role("ring")] == ["0 dB", "-10 dB", "-20 dB", "-30 dB"]
    assert "270" in [item.text for item in labels.found]


def test_text_of_another_chart_is_left_to_it(opened):
    """Of two charts side by side each has its own rim labels, though they stand close."""
    content = ""
    for x in (200.0, 560.0):
        content += GRID + rings(x=x) + spokes(x, Y, R) + INK + trace(x=x)
        for deg in range(0, 360, 30):
            tx, ty = polar(x, Y, R + 14, float(deg))
            content += text(tx - 2.2 * len(str(deg)), ty - 3, f"{deg}")
    charts = find_vector_charts(opened(content, size=(760, 400)))

    for found in charts:
        rim = sorted(item.value for item in found.labels.with_role("rim"))
        assert rim == list(range(0, 360, 30))
        assert not [item for item in found.labels.found if item.role != "rim"]


def test_bits_of_a_trace_along_the_grid_stay_its_own(opened):
    """Strokes of a dashed trace that happen to lie on a spoke or ring do not join, move or turn the grid."""
    level = np.maximum(lobes(), -10.0)  # along a ring at the back
    flank = np.linspace(-25, -2, 60)  # along a spoke
    dashes = "".join(trace(level[k : k + 2], DEG[k : k + 2], close=False) for k in range(0, 360, 3))
    dashes += "".join(trace(flank[k : k + 2], np.full(2, 210.0), close=False) for k in range(0, 58, 3))
    found = read(opened(GRID + rings() + spokes(X, Y, R) + INK + dashes))
    plain = read(opened(chart()))

    assert found.grid.homography == pytest.approx(plain.grid.homography, abs=1e-4)
    assert found.grid.spoke_deg == pytest.approx(plain.grid.spoke_deg, abs=1e-4)
    assert misfit_db(found.traces[0], level[::3], DEG[::3]) < WITHIN_DB
