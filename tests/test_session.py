"""The window's session, hand, worker and shapes, without a screen."""

import json
import subprocess
import sys
import threading
import time
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from digitise import correct
from digitise.cli import main
from digitise.exceptions import NotReadError, PictureError, UsageError
from digitise.kept import Kept
from digitise.labels import Label, Labels
from digitise.picture import open_picture
from digitise.record import read_record
from digitise.review import REASONS, reason
from digitise.settings import Mark, Settings
from digitise.table import build_table, read_table
from gui import flow
from gui.at_place import trace_places
from gui.file_names import paths_from_text
from gui.frame import Frame, fit_frame, frame_pixels, loupe_pixels, to_ppm
from gui.hand import Hand
from gui.level_text import read_level
from gui.overlay import overlay_shapes, pointed_shapes, redraw_shapes
from gui.places import reason_places
from gui.session import Session
from gui.state import State
from gui.table_text import table_text
from gui.words import FIELD_TITLES, fault_field, said
from gui.worker import Worker
from tests.draw import Chart, Page, Trace, paint, patterns
from tests.grids import CENTRE, OUTER_PX
from tests.hand import DEG, INKS, RING_RHO, cardioid_page, hand_reading

TOLD = {"outer_db": 0.0, "centre_db": -40.0, "zero_deg": 0.0, "turn": "cw"}
ARGUMENTS = ["--outer", "0", "--centre", "-40", "--zero", "top", "--turn", "cw"]
NO_WIDGETS = (
    "at_place", "colours", "file_names", "flow", "found_words", "frame", "hand", "jobs", "keys", "level_text",
    "overlay", "places", "samples", "session", "specs", "state", "table_text", "words", "worker",
)  # fmt: skip
REACH = 6.0
CLICK_PX = 0.8  # how roughly a person clicks under the loupe
LEVEL_DB = 0.05  # of a clean painted chart, with room
MEGAPIXEL_S = 0.3  # one change of a told value, on one core


@pytest.fixture(autouse=True)
def no_labels(monkeypatch):
    """No labels are read: what is told is what counts here, and reading text takes a second."""
    monkeypatch.setattr("digitise._ocr.get_engine", lambda: None)


@pytest.fixture(scope="module")
def picture_path(tmp_path_factory):
    """A painted chart with two traces, as a file."""
    path = tmp_path_factory.mktemp("session") / "panel.png"
    Image.fromarray(paint(cardioid_page(INKS[:2]))).save(path)
    return str(path)


@pytest.fixture(scope="module")
def opened(picture_path):
    """The chart read with levels and bearing told; read once."""
    state = State(
        picture=open_picture(picture_path), kept=Kept(), template=Settings(**TOLD), source=picture_path
    )
    return flow.complete(state)


@pytest.fixture
def session(opened):
    """A fresh session over the chart that was read."""
    session = Session()
    session.start(opened)
    return session


def read(session):
    """Do what the worker would do."""
    session.take(flow.complete(session.now))
    return session.chart


def ring_point(session, ring, plane_deg=75.0):
    """A picture place on a ring."""
    x, y = session.chart.grid.to_picture(session.chart.grid.ring_rho[ring], plane_deg)
    return float(x), float(y)


def level_error(reading, k=0):
    """Largest error of the k-th trace, dB, from -8 to -1 dB, where it runs clear of rings."""
    trace = reading.traces[k]
    true = patterns.first_order(np.arange(360.0) - 40 * INKS.index(trace.ink))
    return float(np.abs(trace.table.chart_db - true)[(true > -8) & (true < -1)].max())


# --- no screen


def test_the_session_needs_no_tkinter():
    """Everything but the widgets is imported without it."""
    names = [f"gui.{name}" for name in NO_WIDGETS]
    load = "[importlib.import_module(name) for name in sys.argv[1:]]"
    code = f"import importlib, sys; {load}; sys.exit('tkinter' in sys.modules)"

    assert subprocess.run([sys.executable, "-c", code, *names], check=False).returncode == 0


# --- history


EDITS = {
    "level": lambda s: s.tell_levels("outermost ring 3 dB", outer_db=3.0),
    "law": lambda s: s.tell("law field", law="field", centre_db=None),
    "zero": lambda s: s.tell_bearing("0 at right", zero_deg=90.0),
    "turn": lambda s: s.tell_bearing("counter-clockwise", turn="ccw"),
    "step": lambda s: s.tell("step 5", step_deg=5.0),
    "ink": lambda s: s.toggle_ink(INKS[0]),
    "mark": lambda s: s.add_mark(*ring_point(s, 0), 0.0),
    "pin": lambda s: s.add_pin(*(float(v) for v in s.chart.grid.to_picture(1.0, 0.0))),
    "cover": lambda s: s.add_cover((20.0, 20.0, 60.0, 40.0)),
    "crop": lambda s: s.tell_crop((0, 0, 590, 610)),
    "grid": lambda s: s.correct_grid(s.chart.grid, "correct the grid"),
}


@pytest.mark.parametrize("name", EDITS)
def test_every_edit_is_undone_and_done_again(session, name):
    """Undo gives back the very state and reading from before, redo those from after; nothing is read anew."""
    before = session.now

    EDITS[name](session)
    assert session.now is not before
    assert not session.now.done
    read(session)
    after = session.now
    assert after.done
    assert session.unsaved
    session.undo()
    assert session.now is before
    assert session.reading is before.chart.reading
    assert not session.unsaved
    session.redo()
    assert session.now is after
    assert session.redo_words == ""


def test_a_new_edit_ends_what_could_be_redone(session):
    """After an undo another edit takes its own way."""
    session.toggle_ink(INKS[0])
    session.undo()
    assert session.redo_words == f"ink {INKS[0]}"

    session.toggle_ink(INKS[1])

    assert session.redo_words == ""
    session.redo()
    assert session.settings.inks == (INKS[1],)


def test_telling_the_same_again_is_no_step(session):
    """A field left as it was makes no history."""
    session.tell_levels("outermost ring 0 dB", outer_db=0.0)

    assert session.undo_words == ""


def test_small_moves_of_one_point_are_one_step(session):
    """Ten taps of an arrow key are undone at once; another point begins a new step."""
    x, y = (round(value, 2) for value in ring_point(session, 0, 0.0))
    session.add_pin(x, y)
    for _ in range(10):
        session.move_held(0.1, 0.0)
    assert session.settings.pins[0] == pytest.approx((x + 1.0, y))

    session.undo()

    assert session.settings.pins[0] == pytest.approx((x, y))


def test_a_reading_finds_its_step_wherever_it_stands(session):
    """A result that comes after the step was undone is kept there; it does not show."""
    session.tell_levels("outermost ring 3 dB", outer_db=3.0)
    late = flow.complete(session.now)
    session.undo()

    shown = session.take(late)

    assert not shown
    assert session.settings.outer_db == 0.0
    session.redo()
    assert session.now.done
    assert session.reading.scale.level(np.ones(1))[0] == pytest.approx(3.0)


def test_while_a_reading_is_awaited_the_one_before_is_shown(session):
    """Stale, but not gone."""
    before = session.reading

    session.tell_levels("outermost ring 3 dB", outer_db=3.0)

    assert not session.chart.done
    assert session.reading is before
    assert session.chart.reading is None


def test_what_cannot_be_right_changes_nothing(session):
    """A contradiction is refused at once, and there is no step to undo."""
    with pytest.raises(UsageError, match="both 0 dB"):
        session.tell_levels("centre 0 dB", centre_db=0.0)

    assert session.settings.centre_db == -40.0
    assert session.undo_words == ""


# --- levels and bearing


def test_two_marks_give_the_scale(session):
    """Marks clicked on two rings replace the told levels; the level of the trace follows."""
    for ring, level in ((0, 10.0), (3, -20.0)):
        x, y = ring_point(session, ring)
        session.add_mark(x + CLICK_PX, y - CLICK_PX, level)
    chart = read(session)

    assert (chart.settings.outer_db, chart.settings.centre_db) == (None, None)
    assert chart.reading.scale.source == "marks"
    assert chart.reading.scale.level(np.array([1.0, 0.25])) == pytest.approx([10, -20], abs=LEVEL_DB)


def test_a_mark_off_every_ring_is_a_fault_beside_the_marks(session):
    """The fault names no option of the command line, the grid is still shown, and undo mends it."""
    session.add_mark(*ring_point(session, 0), 0.0)
    session.add_mark(CENTRE[0] + 0.6 * OUTER_PX, CENTRE[1], -20.0)
    chart = read(session)

    assert chart.reading is None
    assert fault_field(chart.fault) == "mark"
    assert "--" not in said(chart.fault)
    assert chart.grid is not None
    session.undo()
    session.undo()
    assert session.fault is None


def test_levels_are_told_in_one_way_at_a_time(session):
    """Ring levels take the place of marks, and outer and centre that of ring levels."""
    session.add_mark(*ring_point(session, 0), 0.0)
    session.tell_levels("ring levels", ring_levels=(0.0, -10.0, -20.0, -30.0))
    assert session.settings.marks == ()
    assert read(session).reading.scale.source == "ring-levels"

    session.tell_levels("outermost ring 0 dB", outer_db=0.0)

    assert session.settings.ring_levels == ()


def test_a_mark_gets_another_level(session):
    """Typing its level again keeps its place."""
    session.add_mark(*ring_point(session, 0), 0.0)
    place = session.settings.marks[0].x_px

    session.relevel_mark(0, 5.0)

    assert session.settings.marks == (Mark(x_px=place, y_px=session.settings.marks[0].y_px, level_db=5.0),)


def test_zero_and_turn_move_the_table(session):
    """0 at the right and counter-clockwise: the first trace's peak, at the top, is printed at 90."""
    session.tell_bearing("0 at right", zero_deg=90.0)
    session.tell_bearing("counter-clockwise", turn="ccw")
    read(session)

    first = next(trace for trace in session.reading.traces if trace.ink == INKS[0])
    assert first.table.angle_deg[int(np.nanargmax(first.table.chart_db))] == pytest.approx(90, abs=6)


@pytest.mark.parametrize(("plane_deg", "told"), [(88.0, 90.0), (31.0, 30.0), (14.0, 14.0)])
def test_zero_is_told_by_a_place(session, plane_deg, told):
    """A direction near a spoke means the spoke; one between spokes means itself."""
    x, y = session.chart.grid.to_picture(0.9, plane_deg)

    session.zero_here(float(x), float(y))

    assert session.settings.zero_deg == pytest.approx(told, abs=0.2)


# --- inks, pins, covers, crop


def test_a_click_on_the_trace_picks_its_ink(session):
    """Only that trace is read then; with Shift the other one too."""
    places = {trace.ink: trace_places(session.reading, trace) for trace in session.reading.traces}
    (x0, y0), (x1, y1) = places[INKS[0]], places[INKS[1]]

    session.pick_ink(float(x0[340]) + CLICK_PX, float(y0[340]))
    assert [trace.ink for trace in read(session).reading.traces] == [INKS[0]]
    session.pick_ink(float(x1[80]), float(y1[80]), also=True)
    assert {trace.ink for trace in read(session).reading.traces} == set(INKS[:2])
    assert all(level_error(session.reading, k) < LEVEL_DB for k in (0, 1))


def test_paper_is_no_ink(session):
    """A click beside everything says so."""
    with pytest.raises(UsageError, match="only paper"):
        session.pick_ink(8.0, 8.0)


def test_a_pin_on_the_trace_leaves_the_reading_right(session):
    """The trace still runs where it was painted."""
    session.toggle_ink(INKS[0])
    session.add_pin(*(float(value) for value in session.chart.grid.to_picture(1.0, 0.0)))

    assert level_error(read(session).reading) < LEVEL_DB


def test_a_cover_off_the_chart_changes_nothing(session):
    """A covered corner of the page leaves the table as it was."""
    before = {trace.ink: trace.table.chart_db for trace in session.reading.traces}
    session.add_cover((5.0, 5.0, 40.0, 30.0))

    after = {trace.ink: trace.table.chart_db for trace in read(session).reading.traces}

    assert all(np.array_equal(after[ink], before[ink], equal_nan=True) for ink in before)


def test_a_cover_over_the_trace_bridges_it(session):
    """Rows under the cover are not read from ink."""
    x, y = session.chart.grid.to_picture(0.97, 0.0)
    session.toggle_ink(INKS[0])
    session.add_cover((float(x) - 30, float(y) - 30, 60.0, 60.0))

    state = read(session).reading.traces[0].table.state

    assert set(state[[0, 1, 2, 358, 359]]) == {"bridged"}
    assert state[60] == "seen"


def test_a_crop_looks_for_the_charts_again_and_keeps_what_was_told(session):
    """The chart in the crop keeps its settings; without the crop it is as before."""
    session.tell_levels("outermost ring 3 dB", outer_db=3.0)
    read(session)

    session.tell_crop((10, 10, 580, 600))
    chart = read(session)

    assert chart.settings.outer_db == 3.0
    assert chart.settings.crop == (10, 10, 580, 600)
    session.tell_crop(None)
    assert read(session).settings.crop is None


def test_a_crop_without_a_chart_says_what_to_do(session):
    """The fault belongs to the grid, and undo brings the chart back."""
    session.tell_crop((0, 0, 40, 40))
    read(session)

    assert session.chart is None
    assert isinstance(session.fault, NotReadError)
    assert "tool Grid" in said(session.fault)
    session.undo()
    assert session.chart.reading is not None


# --- the grid


@pytest.fixture
def hand(session):
    """A hand with the tool for the grid."""
    hand = Hand(session)
    hand.take("grid")
    return hand


def drag(hand, start, end, *, shift=False):
    """Press, move and release."""
    hand.press(*start, reach_px=REACH, shift=shift)
    hand.move(*((a + b) / 2 for a, b in zip(start, end, strict=True)))
    hand.move(*end)
    hand.release(*end)


def test_a_dragged_centre_settles_on_the_lines(session, hand):
    """A centre dropped 4 px off is drawn there, and settled where the rings were painted."""
    x, y = session.chart.grid.centre_x, session.chart.grid.centre_y
    drag(hand, (x, y), (x + 4, y - 2))
    assert hand.placed.grid.centre_x == pytest.approx(x + 4)

    session.correct_grid(flow.settle(session.now, hand.placed.grid), "correct the grid")
    chart = read(session)

    assert (chart.grid.centre_x, chart.grid.centre_y) == pytest.approx(CENTRE, abs=0.05)
    assert chart.settings.grid is not None
    assert level_error(chart.reading) < LEVEL_DB


def test_a_dragged_ring_moves_alone(session, hand):
    """An inner ring takes the radius of the pointer."""
    start = ring_point(session, 1)
    end = session.chart.grid.to_picture(0.8, 75.0)

    drag(hand, start, tuple(float(v) for v in end))

    assert hand.placed.grid.ring_rho == pytest.approx([1, 0.8, 0.5, 0.25], abs=0.002)


def test_shift_on_the_outermost_ring_stretches(session, hand):
    """Dragging its right side out with Shift makes the grid wider, not higher."""
    x, y = ring_point(session, 0, 90.0)

    drag(hand, (x, y), (x + 20, y), shift=True)

    right, top = hand.placed.grid.to_picture(1.0, 90.0), hand.placed.grid.to_picture(1.0, 0.0)
    assert right[0] == pytest.approx(x + 20, abs=0.1)
    assert top[1] == pytest.approx(CENTRE[1] - OUTER_PX, abs=0.1)


def test_a_ring_dragged_onto_another_is_refused(session, hand):
    """With the reason, and the grid stays."""
    end = session.chart.grid.to_picture(0.501, 75.0)

    with pytest.raises(UsageError, match="on another one"):
        drag(hand, ring_point(session, 1), tuple(float(v) for v in end))
    assert session.settings.grid is None


def test_a_grid_is_placed_where_none_was_found():
    """On a picture without a chart a drag from the centre to the rim makes one."""
    rgb = np.full((620, 600, 3), 255, np.uint8)
    picture = hand_reading(rgb=rgb).picture
    session = Session()
    session.start(flow.complete(State(picture=picture, kept=Kept(), template=Settings(**TOLD))))
    assert session.chart is None
    hand = Hand(session)
    hand.take("grid")

    drag(hand, CENTRE, (CENTRE[0] + OUTER_PX, CENTRE[1]))
    session.correct_grid(flow.place_grid(session.now, *CENTRE, hand.placed.grid.outer_px), "place the grid")
    read(session)

    assert session.chart.grid.outer_px == pytest.approx(OUTER_PX)
    assert fault_field(session.fault) == "ink"
    session.undo()
    assert session.chart is None


def test_a_placed_grid_is_found_more_exactly(session, hand):
    """A rough drag on a real chart gives the rings that are drawn there."""
    hand.anew = True
    drag(hand, (CENTRE[0] + 3, CENTRE[1] + 2), (CENTRE[0] + OUTER_PX - 2, CENTRE[1] + 2))
    assert hand.placed.kind == "place"
    grid = hand.placed.grid

    found = flow.place_grid(session.now, grid.centre_x, grid.centre_y, grid.outer_px)

    assert found.ring_rho == pytest.approx(RING_RHO, abs=0.002)
    assert found.outer_px == pytest.approx(OUTER_PX, abs=0.1)


def test_a_corrected_grid_is_read_quickly_with_the_labels_taken_over(session):
    """Where labels give the levels, they are moved to the corrected grid first, and read anew afterwards."""
    before = session.reading
    levels = ((1.0, 0), (0.5, -20), (0.25, -30))
    labels = Labels(found=tuple(ring_label(before.grid, rho, level) for rho, level in levels))
    told = replace(session.settings, outer_db=None, centre_db=None)
    chart = replace(session.chart, settings=told, reading=replace(before, labels=labels, settings=told))
    session.start(replace(session.now, charts=(chart,)))
    session.correct_grid(correct.move_ring(before.grid, 0, 1.02), "correct the grid")

    quick = flow.quick(session.now)
    session.take(quick)

    assert session.chart.fresh
    assert not session.now.done
    assert session.reading.scale.source == "labels"
    assert session.reading.scale.level(np.array([1.0, 0.5 / 1.02])) == pytest.approx([0, -20], abs=0.8)
    session.undo()
    assert flow.quick(session.now) is None


def test_a_pin_is_read_quickly_for_the_traces_there_are(session):
    """Only inks that had a trace are followed at first, and what is shown is what the whole reading gives."""
    session.add_pin(*(float(value) for value in session.chart.grid.to_picture(1.0, 0.0)))
    session.take(flow.quick(session.now))
    assert session.chart.fresh
    assert session.chart.reading is None
    quick = {trace.ink: trace.table.chart_db for trace in session.reading.traces}

    read(session)

    assert session.chart.quick is None
    for trace in session.reading.traces:
        difference = np.abs(quick[trace.ink] - trace.table.chart_db)
        assert np.nanpercentile(difference[trace.table.chart_db > -20], 95) < LEVEL_DB


def test_a_level_needs_no_quick_reading(session):
    """The traces are there already."""
    session.tell_levels("outermost ring", outer_db=1.0)

    assert flow.quick(session.now) is None


def ring_label(grid, rho, level_db):
    """A ring's level as the reader of labels would give it, printed at the right."""
    x, y = grid.to_picture(rho, 80.0)
    return Label(
        text=f"{level_db}", value=float(level_db), unit="dB", x_px=float(x), y_px=float(y), w_px=20.0,
        h_px=10.0, rho=rho, plane_deg=80.0, confidence=0.99, role="ring", ring_rho=rho,
        readings=((float(level_db), 0.99),),
    )  # fmt: skip


# --- the hand


def test_a_click_on_a_ring_asks_for_its_level(session):
    """With the tool Mark; on a mark that stands there it asks for that one's."""
    hand = Hand(session)
    hand.take("mark")
    place = ring_point(session, 0)

    drag(hand, place, place)
    assert hand.asks == place
    session.add_mark(*hand.asks, 0.0)
    hand.asks = None
    drag(hand, place, (place[0] + 1, place[1]))

    assert hand.asks is None
    assert hand.asks_mark == 0


def test_a_mark_is_dragged(session):
    """Press on it, move, release."""
    session.add_mark(*ring_point(session, 0), 0.0)
    x, y = ring_point(session, 0)
    hand = Hand(session)
    hand.take("look")

    drag(hand, (x + 1, y), (x + 41, y + 10))

    mark = session.settings.marks[0]
    assert (mark.x_px, mark.y_px) == pytest.approx((x + 40, y + 10), abs=0.01)
    assert session.undo_words == "move a mark"


@pytest.mark.parametrize("tool", ["cover", "crop"])
def test_a_box_is_drawn_either_way(session, tool):
    """From any corner to the opposite one; a click draws none."""
    hand = Hand(session)
    hand.take(tool)
    drag(hand, (100, 90), (100, 90))
    assert session.undo_words == ""

    drag(hand, (400, 300), (100, 90))

    box = session.settings.covers[0] if tool == "cover" else session.now.template.crop
    assert box == pytest.approx((100, 90, 300, 210), abs=1)


def test_holding_goes_round_all_points(session):
    """Marks, pins, covers, centre and rings in turn; removing lets go."""
    session.add_mark(*ring_point(session, 0), 0.0)
    session.add_pin(300.0, 60.0)
    session.held = None
    seen = []
    for _ in session.points():
        session.hold_next()
        seen.append(session.held)

    assert seen == [("mark", 0), ("pin", 0), ("centre", 0), *(("ring", k) for k in range(4))]
    session.held = ("pin", 0)
    session.drop_held()
    assert session.settings.pins == ()
    assert session.held is None


def test_undo_lets_go_of_what_is_no_longer_there(session):
    """A pin that is undone is not held."""
    session.add_pin(300.0, 60.0)
    assert session.held == ("pin", 0)

    session.undo()

    assert session.held is None


def test_arrow_keys_move_the_grid_by_tenths(session):
    """Centre by 0.1 px, a ring's radius by 0.1 px."""
    grid = session.chart.grid
    session.held = ("centre", 0)
    session.move_held(0.1, 0.0)
    assert session.chart.grid.centre_x == pytest.approx(grid.centre_x + 0.1)

    session.held = ("ring", 1)
    session.move_held(0.1, 0.0)

    moved = session.chart.grid
    assert moved.ring_rho[1] * moved.outer_px == pytest.approx(grid.ring_rho[1] * grid.outer_px + 0.1)


# --- several charts


@pytest.fixture(scope="module")
def pair_path(tmp_path_factory):
    """Two charts on one picture, as a file."""
    trace = Trace(db=patterns.first_order(DEG), ink=INKS[0])
    charts = [
        Chart(traces=(trace,), centre_x=x, centre_y=300.0, outer_px=180.0, ring_db=(0, -10, -20, -30))
        for x in (250, 750)
    ]
    path = tmp_path_factory.mktemp("pair") / "pair.png"
    Image.fromarray(paint(Page(charts=tuple(charts), width=1000, height=600))).save(path)
    return str(path)


@pytest.fixture(scope="module")
def pair(pair_path):
    """Both charts read."""
    state = State(picture=open_picture(pair_path), kept=Kept(), template=Settings(**TOLD), source=pair_path)
    return flow.complete(state)


def test_each_chart_has_its_own_settings(pair, tmp_path):
    """What is told of the second leaves the first alone; both are saved and opened again with their own."""
    session = Session()
    session.start(pair)
    session.go_to_chart(1)
    session.tell_levels("outermost ring 10 dB", outer_db=10.0)
    read(session)
    assert [chart.settings.outer_db for chart in session.now.charts] == [0.0, 10.0]
    assert session.now.charts[0].reading is pair.charts[0].reading

    saved = flow.save_charts(session.now, tmp_path)
    assert sorted(path.name for path in saved.written.paths)[:3] == [
        "pair-1.csv",
        "pair-1.proof.png",
        "pair-1.record.json",
    ]
    (tmp_path / "pair.png").write_bytes(Path(pair.source).read_bytes())
    again = flow.open_source(tmp_path / "pair-2.record.json")

    assert again.at == 1
    assert [chart.settings.outer_db for chart in again.charts] == [0.0, 10.0]
    assert again.charts[1].reading.number == 2


def test_going_to_another_chart_while_one_is_read(pair):
    """The result that comes does not turn the page back."""
    session = Session()
    session.start(pair)
    session.tell_levels("outermost ring 2 dB", outer_db=2.0)
    result = flow.complete(session.now)
    session.go_to_chart(1)

    session.take(result)

    assert session.now.at == 1
    assert session.now.charts[0].reading.scale.level(np.ones(1))[0] == pytest.approx(2.0)


# --- saving and opening again


def test_saving_writes_what_the_command_line_writes(session, picture_path, tmp_path):
    """Table, record and proof byte for byte."""
    assert main(["read", picture_path, "--out", str(tmp_path / "line"), *ARGUMENTS]) == 0

    saved = flow.save_charts(session.now, tmp_path / "window")

    names = sorted(path.name for path in saved.written.paths)
    assert names == ["panel.1.csv", "panel.2.csv", "panel.proof.png", "panel.record.json"]
    for name in names:
        assert (tmp_path / "window" / name).read_bytes() == (tmp_path / "line" / name).read_bytes(), name


def test_opening_a_record_restores_the_session(session, picture_path, tmp_path):
    """Everything told is there again, a hand-made grid too, and the tables are the same."""
    for ring, level in ((0, 0.0), (3, -30.0)):
        session.add_mark(*ring_point(session, ring), level)
    session.toggle_ink(INKS[0])
    session.add_cover((5.0, 5.0, 40.0, 30.0))
    session.add_pin(*(float(v) for v in session.chart.grid.to_picture(1.0, 0.0)))
    session.tell("step 2", step_deg=2.0)
    session.held = ("centre", 0)
    session.move_held(0.1, 0.0)
    read(session)
    assert session.fault is None
    (tmp_path / "panel.png").write_bytes(Path(picture_path).read_bytes())
    flow.save_charts(session.now, tmp_path)

    again = flow.open_source(tmp_path / "panel.record.json")

    told = again.chart.settings
    for name in ("marks", "inks", "covers", "pins", "step_deg", "zero_deg", "turn", "outer_db"):
        assert getattr(told, name) == getattr(session.settings, name), name
    assert told.grid.homography == pytest.approx(session.settings.grid.homography)
    table = again.chart.reading.traces[0].table
    assert np.array_equal(table.chart_db, session.reading.traces[0].table.chart_db, equal_nan=True)


def test_a_record_without_its_picture_asks_for_it(session, picture_path, tmp_path):
    """Beside it first, then where it is shown; another picture is refused."""
    flow.save_charts(session.now, tmp_path)
    record = tmp_path / "panel.record.json"

    with pytest.raises(flow.NeedsPictureError, match=r"panel\.png is not beside it"):
        flow.open_source(record)
    assert flow.open_source(record, picture_path=picture_path).chart.reading is not None
    other = tmp_path / "other.png"
    Image.fromarray(paint(cardioid_page(INKS[2:3]))).save(other)
    with pytest.raises(PictureError, match="not the picture that the record was made from"):
        flow.open_source(record, picture_path=other)


def test_a_record_opens_nothing_outside_its_folder(session, tmp_path):
    """A record that names a path gets a bare name."""
    flow.save_charts(session.now, tmp_path / "out")
    path = tmp_path / "out" / "panel.record.json"
    record = json.loads(path.read_text())
    record["chart"]["file"] = "../secret.png"
    path.write_text(json.dumps(record))
    (tmp_path / "secret.png").write_bytes(b"x")

    with pytest.raises(flow.NeedsPictureError, match=r"its picture secret\.png is not beside it"):
        flow.open_source(path)


def test_unsaved_work_is_known(session, tmp_path):
    """Reading alone is no work; telling is, until it is saved, and undoing past the save is again."""
    assert not session.unsaved
    session.tell_levels("outermost ring 1 dB", outer_db=1.0)
    assert session.unsaved
    read(session)

    flow.save_charts(session.now, tmp_path)
    session.mark_saved(session.now, str(tmp_path))

    assert not session.unsaved
    session.undo()
    assert session.unsaved


def test_a_chart_that_is_not_read_is_left_out_and_said(pair, tmp_path):
    """The other one is saved; with none read nothing is written."""
    session = Session()
    session.start(pair)
    session.tell_levels("ring levels", ring_levels=(0.0, -10.0))
    read(session)
    assert session.fault is not None

    saved = flow.save_charts(session.now, tmp_path / "one")

    assert saved.left_out == (1,)
    assert (tmp_path / "one" / "pair-2.csv").exists()
    session.go_to_chart(1)
    session.tell_levels("ring levels", ring_levels=(0.0, -10.0))
    read(session)
    with pytest.raises(UsageError, match="no chart is read"):
        flow.save_charts(session.now, tmp_path / "none")
    assert not (tmp_path / "none").exists()


def test_a_pasted_picture_is_saved_beside_its_record(opened, picture_path, tmp_path):
    """So that the record opens again; saving twice is no fault."""
    pasted = replace(opened, pasted=True)

    flow.save_charts(pasted, tmp_path)
    flow.save_charts(pasted, tmp_path)

    assert (tmp_path / "panel.png").read_bytes() == Path(picture_path).read_bytes()
    assert flow.open_source(tmp_path / "panel.record.json").chart.reading is not None
    assert read_record(tmp_path / "panel.record.json")["chart"]["file"] == "panel.png"


# --- speed


def test_a_told_level_is_read_anew_at_once(session):
    """Stages that the change does not touch are not run again (CPU time, best of three)."""
    spent = []
    for level in (1.0, 2.0, 3.0):
        session.tell_levels("outermost ring", outer_db=level)
        start = time.process_time()
        read(session)
        spent.append(time.process_time() - start)

    assert min(spent) < MEGAPIXEL_S / 3


# --- the worker


@pytest.fixture
def worker():
    """A worker that is closed at the end."""
    worker = Worker()
    yield worker
    worker.close()


def wait_for(worker, n):
    """The next n answers."""
    found = []
    pause = threading.Event()
    for _ in range(400):
        found += worker.answers()
        if len(found) >= n:
            return found
        pause.wait(0.01)
    raise AssertionError(f"{len(found)} answers of {n}")


def test_of_waiting_jobs_of_a_name_the_newest_is_done(worker):
    """The one at hand is finished and late; those between are never begun."""
    begun, gate, done = threading.Event(), threading.Event(), []

    def work(k):
        begun.set()
        assert gate.wait(5)
        done.append(k)
        return k

    worker.ask("read", work, 0)
    assert begun.wait(5)
    for k in (1, 2, 3):
        worker.ask("read", work, k)
    worker.ask("save", work, "other")
    gate.set()
    answers = wait_for(worker, 3)

    assert done == [0, 3, "other"]
    assert [(item.name, item.value, item.late) for item in answers] == [
        ("read", 0, True), ("read", 3, False), ("save", "other", False),
    ]  # fmt: skip


def test_an_error_in_the_worker_comes_back(worker):
    """Ours and any other; the thread lives on."""

    def fails(error):
        raise error

    worker.ask("a", fails, NotReadError("no ring"))
    worker.ask("b", fails, ValueError("odd"))
    worker.ask("c", lambda: 7)
    errors = [item.error for item in wait_for(worker, 3)]

    assert str(errors[0]) == "no ring"
    assert "internal error (ValueError: odd)" in said(errors[1])
    assert errors[2] is None


# --- words


@pytest.mark.parametrize(
    ("error", "field", "part"),
    [
        (
            NotReadError("no levels", remedy="give --outer and --centre", stage="scale"),
            "outer",
            "“Outermost ring” and “Centre”",
        ),
        (NotReadError("not told", remedy="give --turn", stage="bearing"), "turn", "“Angles grow”"),
        (
            UsageError("--ring-levels gives 2 levels, but 4 rings were found", stage="scale"),
            "ring-levels",
            "“Ring levels” gives",
        ),
        (UsageError("marks 1,2=0 and 3,4=-3 give one ring two levels", stage="scale"), "mark", "Marks 1,2=0"),
        (
            NotReadError("no chart", remedy="cut it out with --crop X,Y,W,H", stage="find"),
            "crop",
            "with a crop",
        ),
        (NotReadError("no rings", stage="grid"), "grid", "No rings"),
        (ValueError("x"), "", "internal error"),
    ],
)
def test_faults_speak_the_windows_words(error, field, part):
    """Options become field names, and each fault finds the field that it belongs beside."""
    assert fault_field(error) == field
    assert part in said(error)
    assert "--" not in said(error).replace("--debug", "")


def test_every_option_that_tells_something_has_a_field():
    """The command line's options that shape a reading are all known to the window."""
    from argparse import ArgumentParser

    from digitise.commands.reading_options import add_reading_options

    parser = ArgumentParser()
    add_reading_options(parser)
    options = {
        option[2:]
        for action in parser._actions
        for option in action.option_strings
        if option.startswith("--")
    }

    assert options - {"help", "like"} <= set(FIELD_TITLES)


@pytest.mark.parametrize(
    ("text", "level"), [("-10", -10), (" −3.5 dB", -3.5), ("5 dBi", 5), ("-2,5", -2.5), ("0", 0), ("+3", 3)]
)
def test_levels_as_people_type_them(text, level):
    """With a unit, a true minus sign, a comma for the point."""
    assert read_level(text) == level


@pytest.mark.parametrize("text", ["", "ten", "nan", "inf", "1 2"])
def test_what_is_no_level(text):
    """Is refused with words for the place beside the field."""
    with pytest.raises(UsageError, match=r"number|type a level"):
        read_level(text)


# --- what is drawn


def by_kind(shapes, style):
    """Shapes whose style begins so."""
    return [shape for shape in shapes if shape.style.startswith(style)]


def test_states_differ_by_shape(opened):
    """Seen is a line, bridged dashed with circles, floor has triangles, missing crosses on the rim."""
    level = np.full(360, -10.0)
    state = np.full(360, "seen", "U8")
    state[100:140], state[200:220], state[300:320] = "bridged", "floor", "missing"
    level[state == "floor"] = -40
    error = np.where(state == "missing", np.nan, 0.1)
    table = build_table(np.arange(360.0), np.where(state == "missing", np.nan, level), error, state)
    session = Session()
    reading = hand_reading(table=table)
    chart = replace(opened.chart, reading=reading, settings=reading.settings)
    session.start(replace(opened, charts=(chart,)))

    shapes = overlay_shapes(session, lambda x, y: (x, y))

    kinds = {(shape.kind, shape.style) for shape in by_kind(shapes, "trace")}
    assert kinds == {
        ("line", "trace-seen"), ("line", "trace-bridged"), ("circle", "trace-bridged"),
        ("triangle", "trace-floor"), ("cross", "trace-missing"),
    }  # fmt: skip
    crosses = np.concatenate([shape.points for shape in shapes if shape.kind == "cross"])
    assert np.hypot(*(crosses - CENTRE).T) == pytest.approx(OUTER_PX, abs=0.5)
    seen = [shape for shape in shapes if shape.style == "trace-seen"]
    assert len(seen) == 4  # 0 to 100, 140 to 200, 220 to 300, and 320 round to 0
    assert seen[-1].points[-1] == pytest.approx(seen[0].points[0])


def test_the_overlay_lies_on_the_chart(session):
    """Rings lie at their radii with their levels, the trace where the picture has its ink."""
    shapes = overlay_shapes(session, lambda x, y: (x, y))

    rings = [shape for shape in shapes if shape.style in ("grid-outer", "grid-ring")]
    radii = [float(np.hypot(*(shape.points - CENTRE).T).mean()) for shape in rings]
    assert radii == pytest.approx(OUTER_PX * np.array(RING_RHO), abs=0.1)
    assert {shape.text for shape in by_kind(shapes, "ring-level")} == {"0", "-10", "-20", "-30"}
    session.row = 10
    (pointed,) = pointed_shapes(session, lambda x, y: (x, y))
    x, y = np.round(pointed.points[0]).astype(int)
    assert session.now.picture.rgb[y - 1 : y + 2, x - 1 : x + 2].min() < 120


def test_the_redraw_shows_the_bearings(session):
    """Twelve of them round the rim, and the traces."""
    shapes = redraw_shapes(session, lambda x, y: (x, y), words_rho=lambda plane: 1.1)

    assert [shape.text for shape in shapes if shape.kind == "words"] == [
        f"{angle}°" for angle in range(0, 360, 30)
    ]
    assert len({shape.k for shape in by_kind(shapes, "trace")}) == 2


def test_a_held_mark_and_a_pin_are_drawn(session):
    """A mark as a diamond with its level, a pin as a drop."""
    session.add_mark(*ring_point(session, 0), -3.0)
    session.add_pin(300.0, 60.0)

    shapes = {shape.kind: shape for shape in overlay_shapes(session, lambda x, y: (x, y))}

    assert shapes["diamond"].text == "-3"
    assert not shapes["diamond"].held
    assert shapes["drop"].held


@pytest.mark.parametrize("code", sorted(REASONS))
def test_every_reason_leads_to_a_place_on_the_picture(code):
    """Of the chart and of a trace alike."""
    item = reason(code, 0.5, "detail")
    reading = hand_reading(reasons=(item,), trace_reasons=(item,))

    places = reason_places(reading)

    assert len(places) == 2
    for sentence, spot in places:
        assert sentence == str(item)
        assert 0 <= spot.x_px < 600
        assert 0 <= spot.y_px < 620
        assert spot.reach_px > 10


def test_a_reason_with_a_place_leads_there():
    """Its own place is taken."""
    reading = hand_reading(reasons=(reason("grid-residual", 2.0, x_px=123.0, y_px=45.0),))

    ((_, spot),) = reason_places(reading)

    assert (spot.x_px, spot.y_px, spot.marked) == (123.0, 45.0, True)


# --- the frame


def test_zooming_keeps_the_place_under_the_pointer():
    """The picture's point under the pointer stays, zooming in and out."""
    frame = Frame(left=12.5, top=-3.0, zoom=1.3, width=640, height=480)
    point = frame.picture_place(200, 77)

    for factor in (1.25, 8.0, 0.1):
        assert frame.zoomed(factor, 200, 77).place(*point) == pytest.approx((200, 77))


def test_place_and_picture_place_are_inverse():
    """There and back."""
    frame = fit_frame((10, 20, 300, 200), 640, 480)

    assert frame.picture_place(*frame.place(33.3, 44.4)) == pytest.approx((33.3, 44.4))
    assert frame.place(10 - 0.5 + 150, 20 - 0.5 + 100) == pytest.approx((319.5, 239.5))


def test_the_frames_pixels_are_the_pictures():
    """At zoom 1 a px is a px; what is cropped away is faded; a cover is hatched."""
    rng = np.random.default_rng(7)
    rgb = rng.integers(0, 256, (40, 50, 3), np.uint8)
    frame = Frame(left=-0.5, top=-0.5, zoom=1.0, width=50, height=40)

    whole = frame_pixels(rgb, frame)
    cropped = frame_pixels(rgb, frame, crop=(10, 5, 20, 10), covers=((12, 6, 4, 4),))

    assert np.array_equal(whole, rgb)
    assert np.array_equal(cropped[10:15, 20:30], rgb[10:15, 20:30])
    assert not np.array_equal(cropped[30:, 40:], rgb[30:, 40:])
    assert not np.array_equal(cropped[6:10, 12:16], rgb[6:10, 12:16])


def test_the_loupe_has_its_point_in_the_middle():
    """A single dark px, looked at half a px beside its middle, lies half a px beside the loupe's middle."""
    rgb = np.full((30, 30, 3), 255, np.uint8)
    rgb[12, 17] = 0

    loupe = loupe_pixels(rgb, 17.5, 12.0, size=81, zoom=9)

    rows, columns = np.nonzero(loupe[:, :, 0] == 0)
    assert rows.mean() == pytest.approx(40, abs=0.5)
    assert columns.mean() == pytest.approx(40 - 4.5, abs=0.5)


def test_the_loupe_at_the_pictures_edge():
    """Beyond the edge is ground, not an error."""
    rgb = np.zeros((10, 10, 3), np.uint8)

    assert loupe_pixels(rgb, -3.0, 4.0, size=60, zoom=6).shape == (60, 60, 3)
    assert loupe_pixels(rgb, 500.0, 4.0, size=60, zoom=6).min() > 200


def test_ppm_bytes():
    """A header and the pixels, as the format's description has it (netpbm, ppm: P6, width, height, 255)."""
    pixels = np.arange(12, dtype=np.uint8).reshape(2, 2, 3)

    assert to_ppm(pixels) == b"P6 2 2 255\n" + bytes(range(12))


# --- clipboard


def test_paths_in_copied_text(tmp_path):
    """File addresses, quoted names and plain ones; what is not there is left out."""
    path = tmp_path / "a chart.png"
    path.write_bytes(b"x")
    text = f'copy\nfile://{str(path).replace(" ", "%20")}\n"{path}"\n{path}\nno such file\n\0\n'

    assert paths_from_text(text) == [str(path)] * 3


def test_the_table_as_tab_separated_text(session, tmp_path):
    """Header and all rows; turned back into commas it is the very table that is saved."""
    table = session.reading.traces[0].table
    path = tmp_path / "table.csv"
    path.write_text(table_text(table).replace("\t", ","))

    assert table_text(table).splitlines()[0] == "angle_deg\trelative_db\terror95_db\tchart_db\tstate"
    assert read_table(path).chart_db == pytest.approx(table.chart_db, abs=6e-4, nan_ok=True)
    assert table_text(table, [3, 5]).splitlines()[1].startswith("3\t")
    assert len(table_text(table, [3, 5]).splitlines()) == 3
