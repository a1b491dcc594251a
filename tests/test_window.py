"""The real window, driven by events on a screen of its own; pictures of it are kept in tests/screenshots."""

import os
import subprocess
import sys
import time
import tkinter as tk
from dataclasses import replace

import numpy as np
import pytest
from PIL import Image

from digitise.cli import main
from digitise.kept import Kept
from digitise.picture import open_picture
from digitise.review import reason
from digitise.settings import Settings
from gui import flow
from gui.actions import Actions
from gui.dialogs import AskUnsaved
from gui.keys import COMMANDS
from gui.place_menu import place_choices
from gui.state import State
from gui.theme import COLOURS
from gui.window import Window
from tests.draw import Chart, Page, Trace, paint, patterns
from tests.grids import CENTRE, OUTER_PX
from tests.hand import DEG, INKS, cardioid_page
from tests.screen import WAIT_S, Driver, open_screen, take_picture

LEVEL_DB = 0.05
LEAST_CONTRAST = 4.5  # of text to its ground (W3C WCAG 2.1, 1.4.3)
TEXT_ON_GROUND = (
    "text on ground", "text on paper", "dim on ground", "dim on panel", "accent on panel", "alert on panel",
    "alert on ground", "paper on accent", "text on accent-soft", "text on alert-soft", "mark on paper",
    "pin on paper",
)  # fmt: skip
ABOVE_PX = 64  # of the screen's height, for a desktop's title bar and our menu
SIZES = [("1280x800", 100), ("1280x800", 200), ("1920x1080", 100), ("1920x1080", 200)]


@pytest.fixture(scope="module", autouse=True)
def screen():
    """A screen for all tests of this file."""
    with open_screen() as display:
        yield display


@pytest.fixture(autouse=True)
def no_labels(monkeypatch):
    """No labels are read: what is told is what counts here, and reading text takes a second."""
    monkeypatch.setattr("digitise._ocr.get_engine", lambda: None)


@pytest.fixture(scope="module")
def picture_path(tmp_path_factory):
    """A painted chart with two traces, as a file."""
    path = tmp_path_factory.mktemp("window") / "panel.png"
    Image.fromarray(paint(cardioid_page(INKS[:2]))).save(path)
    return path


@pytest.fixture(scope="module")
def opened(picture_path):
    """The chart read with levels and bearing told; read once."""
    told = Settings(outer_db=0.0, centre_db=-40.0, zero_deg=0.0, turn="cw")
    picture = open_picture(str(picture_path))
    return flow.complete(State(picture=picture, kept=Kept(), template=told, source=str(picture_path)))


@pytest.fixture
def make_window():
    """Make windows that are closed at the end; nothing may have been raised in them."""
    made = []

    def make(*, size="1280x736", percent=100):
        root = tk.Tk()
        driver = Driver(Window(root, percent=percent))
        root.geometry(f"{size}+0+0")
        root.focus_force()
        driver.settle()
        made.append(driver)
        return driver

    yield make
    for driver in made:
        if not driver.window.closed:
            driver.window.close()
    assert [driver.errors for driver in made] == [[] for _ in made]


@pytest.fixture
def driver(make_window, opened):
    """A window over the chart that was read."""
    driver = make_window()
    show(driver, opened)
    return driver


def show(driver, state):
    """Take up a state that was read already."""
    driver.session.start(state)
    driver.window.picture_changed()
    driver.settle()


def ring_point(driver, ring, plane_deg=75.0):
    """A picture place on a ring."""
    grid = driver.session.chart.grid
    return tuple(float(value) for value in grid.to_picture(grid.ring_rho[ring], plane_deg))


# --- the whole way


def test_from_a_picture_to_saved_files_and_back(make_window, picture_path, tmp_path):
    """Open, mark two rings, tell zero and turn, pick an ink, pin, undo, save, and open the record again."""
    driver = make_window()
    session, window = driver.session, driver.window
    take_picture(driver.root, "empty")
    window.actions.open_path(str(picture_path))
    driver.read()
    assert session.chart.grid is not None
    faults = [field.fault for field in window.fields.fields.values() if field.fault.winfo_ismapped()]
    assert len(faults) == 1
    assert "--" not in faults[0].cget("text")

    mark_two_rings(driver)
    driver.tell("zero", "top")
    driver.tell("turn", "clockwise")
    driver.read()
    assert session.fault is None
    assert session.reading.scale.level(np.array([1.0, 0.25])) == pytest.approx([0, -30], abs=LEVEL_DB)
    assert len(session.reading.traces) == 2

    driver.key("<Key-i>", window.chart_view.canvas)
    driver.click(*(float(value) for value in session.chart.grid.to_picture(true_rho(0, 300.0), 300.0)))
    driver.read()
    assert [trace.ink for trace in session.reading.traces] == [INKS[0]]

    pin_nudge_and_undo(driver)

    driver.key("<Control-s>")
    dialog = window.actions.dialog
    take_dialog(driver, dialog, "save")
    dialog.folder.set(str(tmp_path))
    dialog.ok()
    driver.until(lambda: driver.status.startswith("\u2713 Saved"), "the save")
    assert sorted(path.name for path in tmp_path.iterdir()) == [
        "panel.csv",
        "panel.proof.png",
        "panel.record.json",
    ]
    assert not session.unsaved

    (tmp_path / "panel.png").write_bytes(picture_path.read_bytes())
    table = session.reading.traces[0].table
    window.actions.open_path(str(tmp_path / "panel.record.json"))
    driver.until(lambda: session.now.source.endswith("record.json"), "the record")
    driver.read()
    assert session.settings.inks == (INKS[0],)
    assert len(session.settings.marks) == 2
    assert np.array_equal(session.reading.traces[0].table.chart_db, table.chart_db, equal_nan=True)


def mark_two_rings(driver):
    """Take the tool by its key, click two rings, type their levels."""
    driver.key("<Key-m>", driver.window.chart_view.canvas)
    assert driver.window.hand.tool == "mark"
    for ring, level in ((0, "0"), (3, "-30 dB")):
        driver.click(*ring_point(driver, ring))
        driver.type(level)
        take_picture(driver.root, f"mark-{ring}")
        driver.key("<Return>")
    driver.read()
    assert [mark.level_db for mark in driver.session.settings.marks] == [0, -30]


def pin_nudge_and_undo(driver):
    """Pin the trace, move the pin by a tenth of a px, and take both back."""
    session = driver.session
    driver.key("<Key-p>", driver.window.chart_view.canvas)
    driver.click(*(float(value) for value in session.chart.grid.to_picture(true_rho(0, 60.0), 60.0)))
    driver.read()
    assert session.held == ("pin", 0)
    take_picture(driver.root, "pin")
    x = session.settings.pins[0][0]
    driver.key("<Right>")
    assert session.settings.pins[0][0] == pytest.approx(x + 0.1)
    driver.key("<Control-z>")
    assert session.settings.pins[0][0] == pytest.approx(x)
    driver.key("<Control-z>")
    assert session.settings.pins == ()


def true_rho(k, bearing_deg):
    """Radius of the k-th painted cardioid on a chart from 0 to -40 dB."""
    return 1 + float(patterns.first_order(np.array([bearing_deg - 40 * k]))[0]) / 40


def take_dialog(driver, dialog, name):
    """Keep a picture with a small window on it."""
    dialog.top.geometry(f"+{driver.root.winfo_rootx() + 150}+{driver.root.winfo_rooty() + 120}")
    dialog.top.lift()
    take_picture(driver.root, name)


@pytest.mark.parametrize(("size", "percent"), SIZES)
def test_everything_is_in_sight(make_window, opened, size, percent):
    """At both sizes and both scalings nothing is cut off; pictures are kept for a person to look at."""
    width, height = (int(part) for part in size.split("x"))
    driver = make_window(size=f"{width}x{height - ABOVE_PX}", percent=percent)
    show(driver, opened)
    window = driver.window
    window.row_pointed(40)
    assert window.panes.narrow == (width / percent < 10.2)

    for pane in ("chart", "redraw", "lists") if window.panes.narrow else ("chart",):
        window.panes.show(pane)
        take_picture(driver.root, f"{size}-{percent}-{pane}")
        shown = [pane for pane in (window.chart_view, window.redraw, window.lists) if pane.winfo_ismapped()]
        if window.redraw in shown:
            assert_in_sight(window.redraw.readout, driver.root)
            assert window.redraw.readout.winfo_height() >= window.redraw.readout.winfo_reqheight()
        for widget in (window.status, *window.buttons.values(), *shown):
            assert_in_sight(widget, driver.root)
        assert min(shown[0].winfo_width(), shown[0].winfo_height()) > 300
    for page in (1, 2):
        window.panes.show("lists")
        window.lists.book.select(page)
        take_picture(driver.root, f"{size}-{percent}-page{page}")


def assert_in_sight(widget, root):
    """A widget lies within the window, and has the room that it asks for."""
    assert widget.winfo_ismapped()
    assert widget.winfo_rootx() + widget.winfo_width() <= root.winfo_rootx() + root.winfo_width()
    assert widget.winfo_rooty() + widget.winfo_height() <= root.winfo_rooty() + root.winfo_height()
    if widget.winfo_class() == "TButton":
        assert widget.winfo_width() >= widget.winfo_reqwidth()


@pytest.mark.parametrize("percent", [100, 200])
def test_no_field_is_cut_off(make_window, opened, percent):
    """Every widget of the panel of fields is as wide as it asks to be, at both scalings."""
    driver = make_window(percent=percent)
    show(driver, opened)
    for edit in (lambda s: s.add_mark(*ring_point(driver, 0), -10.5), lambda s: s.add_pin(1234.5, 1234.5)):
        edit(driver.session)
    driver.window.changed()
    driver.settle()

    body = driver.window.fields.body
    right = body.winfo_rootx() + body.winfo_width()
    for widget in every_widget(body):
        if widget.winfo_ismapped():
            assert widget.winfo_rootx() + widget.winfo_width() <= right, widget
            if widget.winfo_class() in ("TButton", "TCheckbutton"):
                assert widget.winfo_width() >= widget.winfo_reqwidth(), widget.cget("text")


def every_widget(widget):
    """A widget's children, theirs, and so on."""
    for child in widget.winfo_children():
        yield child
        yield from every_widget(child)


# --- looking


def test_the_wheel_zooms_about_the_pointer(driver):
    """The picture's place under the pointer stays there."""
    view = driver.window.chart_view
    place = ring_point(driver, 1)
    x, y = driver.view_place(*place)
    under = view.frame.picture_place(x - 2, y - 2)
    before = view.frame.zoom

    for _ in range(3):
        view.canvas.event_generate("<Button-4>", x=x, y=y)
    driver.settle()

    assert view.frame.zoom == pytest.approx(before * 1.25**3)
    assert view.frame.picture_place(x - 2, y - 2) == pytest.approx(under)


def test_the_picture_is_moved_by_dragging(driver):
    """By as much as the pointer."""
    view = driver.window.chart_view
    left = view.frame.left

    driver.drag((100.0, 100.0), (130.0, 100.0))

    assert view.frame.left == pytest.approx(left - 30, abs=1.5)
    assert driver.session.undo_words == ""


def test_the_redraw_follows_the_pointer(driver):
    """Over the picture, and over the redraw itself; the row is shown in every pane."""
    window = driver.window
    grid = driver.session.chart.grid
    x, y = driver.view_place(*(float(value) for value in grid.to_picture(0.6, 130.0)))
    window.chart_view.canvas.event_generate("<Motion>", x=x, y=y)
    driver.settle()
    assert window.redraw.cells["bearing"].cget("text") == "130\u00b0"
    assert window.redraw.cells["state"].cget("text") == "seen"
    assert "130" in window.place.cget("text")
    assert window.chart_view.canvas.find_withtag("pointed")

    canvas = window.redraw.canvas
    canvas.event_generate("<Motion>", x=canvas.winfo_width() - 20, y=canvas.winfo_height() // 2)
    driver.settle()
    assert window.redraw.cells["bearing"].cget("text") == "90\u00b0"
    trace = driver.session.shown_trace
    assert window.redraw.cells["level"].cget("text") == f"{trace.table.chart_db[90]:.2f} dB"
    driver.key("<Right>", canvas)
    assert driver.session.row == 91


def test_the_loupe_is_there_for_the_tools_that_point(driver):
    """And not in the way while looking."""
    view = driver.window.chart_view
    x, y = driver.view_place(*ring_point(driver, 1))
    view.canvas.event_generate("<Motion>", x=x, y=y)
    driver.settle()
    assert not view.canvas.find_withtag("sight")

    driver.key("<Key-m>", view.canvas)
    view.canvas.event_generate("<Motion>", x=x + 1, y=y)
    driver.settle()

    assert view.canvas.find_withtag("sight")


def test_the_overlay_can_be_hidden(driver):
    """H takes it away and brings it back."""
    canvas = driver.window.chart_view.canvas
    assert canvas.find_withtag("overlay")

    driver.key("<Key-h>", canvas)
    assert not canvas.find_withtag("overlay")
    driver.key("<Key-h>", canvas)

    assert canvas.find_withtag("overlay")


def test_a_reason_leads_to_its_place(driver, opened):
    """A click on the sentence shows the place and its row; N goes to the next one."""
    reasons = (reason("grid-residual", 1.2, x_px=200.0, y_px=210.0), reason("bearing-assumed", 0, "assumed"))
    reading = replace(opened.chart.reading, reasons=reasons)
    show(driver, replace(opened, charts=(replace(opened.chart, reading=reading),)))
    window = driver.window
    assert window.lists.book.tab(0, "text") == "Review (2)"

    x, y, _, height = window.lists.review.text.bbox("1.8")
    for event in ("<Motion>", "<Button-1>"):
        window.lists.review.text.event_generate(event, x=x, y=y + height // 2)
    driver.settle()

    view = window.chart_view
    middle = view.frame.picture_place(view.frame.width / 2, view.frame.height / 2)
    assert middle == pytest.approx((200, 210), abs=2)
    driver.key("<Key-n>", view.canvas)
    assert window.lists.review.at == 1


# --- correcting


def test_dragging_the_centre_corrects_the_grid(driver):
    """It settles on the drawn lines, and undo brings the grid as found back."""
    session = driver.session
    driver.key("<Key-g>", driver.window.chart_view.canvas)
    x, y = session.chart.grid.centre_x, session.chart.grid.centre_y

    driver.drag((x, y), (x + 2, y + 3), (x + 4, y + 3))
    driver.until(lambda: session.settings.grid is not None, "the corrected grid")
    driver.read()

    assert (session.chart.grid.centre_x, session.chart.grid.centre_y) == pytest.approx(CENTRE, abs=0.05)
    assert session.undo_words == "correct the grid"
    driver.key("<Control-z>")
    assert session.settings.grid is None


def test_a_cover_is_drawn_with_the_keyboard(driver):
    """Enter at one corner, arrows, Enter at the other."""
    view = driver.window.chart_view
    driver.key("<Key-c>", view.canvas)
    view.sight = (20.0, 30.0)

    driver.key("<Return>")
    for _ in range(4):
        driver.key("<Shift-Right>")
        driver.key("<Shift-Down>")
    driver.key("<Return>")
    driver.read()

    assert driver.session.settings.covers[0] == pytest.approx((20.5, 30.5, 40, 40))
    driver.key("<Delete>")
    assert driver.session.settings.covers == ()


def test_a_crop_is_drawn_and_undone(driver):
    """The picture outside is not read; undo brings all of it back."""
    driver.key("<Key-x>", driver.window.chart_view.canvas)

    driver.drag((12.0, 14.0), (300.0, 300.0), (588.0, 606.0))
    driver.read()

    assert driver.session.now.template.crop == pytest.approx((12, 14, 576, 592), abs=2)
    assert driver.session.chart.reading is not None
    driver.key("<Control-z>")
    assert driver.session.now.template.crop is None


def test_a_fault_stands_beside_its_field(driver):
    """What is no number is said under the field and told to nobody; Escape and undo take it back."""
    fields = driver.window.fields.fields
    driver.tell("outer", "ten")
    assert "not a number" in fields["outer"].fault.cget("text")
    assert fields["outer"].fault.winfo_ismapped()
    assert driver.session.undo_words == ""
    take_picture(driver.root, "fault")

    driver.tell("centre", "0")
    assert "both 0 dB" in fields["centre"].fault.cget("text")
    driver.key("<Escape>", fields["outer"].widget)
    driver.key("<Control-z>", fields["centre"].widget)

    assert fields["outer"].text.get() == "0"
    assert not fields["outer"].fault.winfo_ismapped()


def test_a_fault_of_the_reading_stands_beside_its_field(driver):
    """Ring levels that do not fit the rings found."""
    driver.tell("ring-levels", "0, -10")
    driver.read()

    fault = driver.window.fields.fields["ring-levels"].fault
    assert "4 rings were found" in fault.cget("text")
    assert fault.winfo_ismapped()
    assert driver.status.startswith("!")


def test_a_level_is_typed_again_in_its_place(driver):
    """A click on a mark asks for its level; what is no level is said there."""
    driver.key("<Key-m>", driver.window.chart_view.canvas)
    driver.click(*ring_point(driver, 0))
    editor = driver.window.chart_view.editor
    driver.type("x")
    driver.key("<Return>")
    assert "not a number" in editor.fault.cget("text")
    driver.type("0")
    driver.key("<Return>")
    driver.click(*ring_point(driver, 0))
    assert driver.root.focus_get().get() == "0"

    driver.type("5")
    driver.key("<Return>")

    assert [mark.level_db for mark in driver.session.settings.marks] == [5.0]


def test_letters_typed_into_a_field_are_no_commands(driver):
    """A single letter acts on the picture only."""
    entry = driver.window.fields.fields["outer"].widget
    for key in "mipcgxs":
        driver.key(f"<Key-{key}>", entry)

        assert driver.window.hand.tool == "look", key


def test_what_can_be_done_at_a_place(driver):
    """On a ring its level can be typed; between rings one can be added; on paper the zero is told."""
    on_ring = [words for words, _ in place_choices(driver.window, *ring_point(driver, 1))]
    assert "Type this ring's level\u2026" in on_ring
    choices = dict(place_choices(driver.window, CENTRE[0], CENTRE[1] - 0.6 * OUTER_PX))

    choices["Add a ring here"]()
    driver.read()
    assert len(driver.session.chart.grid.ring_rho) == 5
    driver.key("<Control-z>")
    dict(place_choices(driver.window, CENTRE[0] + 0.6 * OUTER_PX, CENTRE[1]))[
        "0\u00b0 is printed in this direction"
    ]()

    assert driver.session.settings.zero_deg == 90


# --- table, files, closing


def test_the_table_is_copied(driver):
    """All of it, or the rows chosen, as tab-separated text on the clipboard."""
    window = driver.window
    window.lists.book.select(1)
    driver.settle()
    driver.key("<Control-C>", window.chart_view.canvas)
    lines = driver.root.clipboard_get().splitlines()
    assert lines[0].split("\t") == ["angle_deg", "relative_db", "error95_db", "chart_db", "state"]
    assert len(lines) == 361

    tree = window.lists.table.tree
    tree.selection_set("10", "11")
    driver.key("<Control-c>", tree)

    assert [line.split("\t")[0] for line in driver.root.clipboard_get().splitlines()] == [
        "angle_deg",
        "10",
        "11",
    ]


def test_a_row_of_the_table_is_pointed_at(driver):
    """Choosing it shows its place in the other panes."""
    window = driver.window
    window.lists.book.select(1)
    driver.settle()

    window.lists.table.tree.selection_set("77")
    driver.settle()

    assert driver.session.row == 77
    assert window.redraw.cells["bearing"].cget("text") == "77\u00b0"


def test_the_figures_are_shown(driver):
    """Each with its error."""
    driver.window.lists.book.select(2)
    driver.settle()

    rows = [
        driver.window.lists.figures.tree.item(item, "values")
        for item in driver.window.lists.figures.tree.get_children()
    ]
    width = next(value for title, value in rows if title.startswith("beamwidth, half power"))
    assert float(width.split()[0]) == pytest.approx(131.06, abs=1)  # of a field cardioid, at -3.0103 dB


def test_closing_with_unsaved_work_asks(driver):
    """Stay keeps the window; without work there is no question."""
    driver.tell("outer", "3")
    driver.read()
    driver.key("<Control-q>")
    dialog = driver.window.actions.dialog
    assert isinstance(dialog, AskUnsaved)
    take_dialog(driver, dialog, "unsaved")
    dialog.top.destroy()
    driver.settle()
    assert not driver.window.closed

    driver.key("<Control-z>", driver.window.chart_view.canvas)
    driver.key("<Control-q>", driver.window.chart_view.canvas)

    assert driver.window.closed


def test_saving_first_and_closing_then(driver, tmp_path):
    """The window closes when the files are there."""
    driver.tell("outer", "3")
    driver.read()
    driver.session.folder = str(tmp_path)
    driver.key("<Control-q>")

    driver.window.actions.dialog.save_it()
    wait_closed(driver)

    assert (tmp_path / "panel.record.json").exists()


def test_a_folder_that_cannot_be_written_to_is_said_beside_it(driver, tmp_path):
    """The dialog stays open."""
    (tmp_path / "file").write_text("x")
    driver.window.actions.save_elsewhere()
    dialog = driver.window.actions.dialog
    dialog.folder.set(str(tmp_path / "file" / "below"))

    dialog.ok()
    driver.settle()

    assert "not a folder" in dialog.fault.cget("text")
    dialog.top.destroy()


def test_files_that_are_in_the_way_are_not_written_over(driver, tmp_path):
    """The message names the remedy, and the work stays unsaved."""
    (tmp_path / "panel.1.csv").write_text("mine")
    driver.tell("outer", "3")
    driver.read()
    driver.session.folder = str(tmp_path)

    driver.window.actions.save()
    driver.until(lambda: driver.status.startswith("!"), "the refusal")

    assert "is there already" in driver.status
    assert (tmp_path / "panel.1.csv").read_text() == "mine"
    assert driver.session.unsaved


@pytest.mark.parametrize(("content", "words"), [(b"", "empty"), (b"no picture", "text, not a picture")])
def test_what_cannot_be_opened_is_said(driver, tmp_path, content, words):
    """In the status line; what was open stays open."""
    path = tmp_path / "bad.png"
    path.write_bytes(content)
    before = driver.session.now

    driver.window.actions.open_path(str(path))
    driver.until(lambda: driver.status.startswith("!"), "the refusal")

    assert words in driver.status
    assert driver.session.now is before


def test_an_error_of_the_program_is_said_in_one_line(driver, monkeypatch):
    """No traceback, and the window goes on."""

    def fails(state):
        raise ZeroDivisionError("odd")

    monkeypatch.setattr(flow, "complete", fails)
    driver.tell("outer", "3")
    driver.until(lambda: "internal error" in driver.status, "the message")

    monkeypatch.undo()
    driver.tell("outer", "4")
    driver.until(lambda: driver.session.now.done, "the reading")


# --- charts, pages, clipboard


def test_two_charts_in_turn(make_window, tmp_path):
    """Ctrl+Page Down works on the next one; a click on the other one goes there."""
    trace = Trace(db=patterns.first_order(DEG), ink=INKS[0])
    charts = tuple(
        Chart(traces=(trace,), centre_x=x, centre_y=300.0, outer_px=180.0, ring_db=(0, -10, -20, -30))
        for x in (250, 750)
    )
    path = tmp_path / "pair.png"
    Image.fromarray(paint(Page(charts=charts, width=1000, height=600))).save(path)
    driver = make_window()
    driver.window.actions.open_path(str(path))
    driver.read()
    assert driver.window.chart_name.cget("text") == "chart 1 of 2"
    take_picture(driver.root, "two-charts")

    driver.key("<Control-Next>", driver.window.chart_view.canvas)
    assert driver.session.now.at == 1
    driver.window.actions.zoom_picture()
    driver.settle()
    driver.click(250.0, 300.0)

    assert driver.session.now.at == 0


def test_the_pages_of_a_pdf(make_window, picture_path, tmp_path):
    """A PDF of two pages offers both as small pictures; the second is opened."""
    chart = Image.open(picture_path)
    path = tmp_path / "sheet.pdf"
    chart.save(path, "PDF", save_all=True, append_images=[chart])
    driver = make_window()
    driver.window.actions.open_path(str(path))
    driver.until(lambda: driver.window.actions.page_chooser is not None, "the pages")
    chooser = driver.window.actions.page_chooser
    take_dialog(driver, chooser, "pages")
    assert len(chooser.buttons) == 2

    chooser.buttons[1].invoke()
    driver.until(lambda: driver.session.now.picture.page == 2, "page 2")

    assert "page 2" in driver.root.title()


def test_a_copied_picture_is_pasted(make_window, picture_path):
    """From a clipboard that holds a PNG, as bytes told one by one, which is how Tk hands them over."""
    driver = make_window()
    data = " ".join(f"0x{byte:x}" for byte in picture_path.read_bytes())
    driver.root.clipboard_clear()
    driver.root.clipboard_append(data, type="image/png")

    driver.key("<Control-v>", driver.root)
    driver.until(lambda: driver.session.open, "the picture")

    assert driver.session.now.pasted
    assert driver.session.now.picture.width == 600
    driver.read()


def test_a_copied_files_name_is_pasted(make_window, picture_path):
    """A file address on the clipboard opens the file."""
    driver = make_window()
    driver.root.clipboard_clear()
    driver.root.clipboard_append(picture_path.as_uri())

    driver.key("<Control-v>", driver.root)
    driver.read()

    assert driver.session.now.source == str(picture_path)
    driver.root.clipboard_clear()
    driver.root.clipboard_append("nothing of the kind")
    driver.key("<Control-v>", driver.window.chart_view.canvas)
    assert "no picture" in driver.status


# --- scaling, keys, colours


def test_another_scaling_keeps_the_work(driver):
    """All widgets are built anew over the same session."""
    driver.tell("outer", "3")
    driver.read()
    before = driver.session.now

    driver.key("<Control-plus>", driver.window.chart_view.canvas)

    assert driver.window.look.percent == 125
    assert driver.session.now is before
    assert driver.window.fields.fields["outer"].text.get() == "3"


def test_every_command_has_its_action_and_a_key_of_its_own():
    """No two commands share a key, and each is in a menu with its key shown."""
    keys = [key for item in COMMANDS for key in item.keys]

    assert len(keys) == len(set(keys))
    for item in COMMANDS:
        assert callable(getattr(Actions, item.name)), item.name
        assert item.shown
        assert item.words


def test_every_pane_is_reached_by_key(driver):
    """F6 goes round fields, picture, redraw and lists."""
    window = driver.window
    driver.key("<F6>", window.fields.fields["outer"].widget)
    seen = []
    for _ in range(4):
        seen.append(str(driver.root.focus_get()))
        driver.key("<F6>")

    for pane, name in zip((window.chart_view, window.redraw, window.lists, window.fields), seen, strict=True):
        assert name.startswith(str(pane))


def test_all_keys_are_shown(driver):
    """F1 lists every command."""
    driver.key("<F1>", driver.window.chart_view.canvas)
    top = driver.window.actions.dialog

    shown = {child.cget("text") for child in every_widget(top) if child.winfo_class() == "TLabel"}
    top.geometry("+60+60")
    top.lift()
    take_picture(driver.root, "keys")
    assert {item.words for item in COMMANDS} <= shown
    assert top.winfo_reqheight() < 800 - 64
    top.destroy()


@pytest.mark.parametrize("pair", TEXT_ON_GROUND)
def test_text_stands_off_its_ground(pair):
    """Contrast as W3C WCAG 2.1 defines it, at least 4.5 : 1 (success criterion 1.4.3)."""
    ink, ground = pair.split(" on ")
    light, dark = sorted((luminance(COLOURS[ink]), luminance(COLOURS[ground])), reverse=True)

    assert (light + 0.05) / (dark + 0.05) >= LEAST_CONTRAST


def luminance(colour):
    """Relative luminance of "#rrggbb" (W3C WCAG 2.1, definition of relative luminance)."""
    parts = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    red, green, blue = (
        part / 12.92 if part <= 0.03928 else ((part + 0.055) / 1.055) ** 2.4 for part in parts
    )
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


# --- the command


def test_the_command_opens_a_window(picture_path, monkeypatch):
    """`digitise window PICTURE` shows the picture and returns 0 when the window is closed."""
    seen = []

    def main_loop(root, n=0):
        end = time.monotonic() + WAIT_S
        while time.monotonic() < end and "panel.png" not in root.title():
            root.update()
            time.sleep(0.01)
        seen.append(root.title())
        root.tk.call(root.protocol("WM_DELETE_WINDOW"))

    monkeypatch.setattr(tk.Tk, "mainloop", main_loop)

    assert main(["window", str(picture_path), "--scaling", "125"]) == 0
    assert seen == ["panel.png \u2013 digitise"]


def test_without_a_screen_the_command_says_so():
    """Exit status 2 and one line."""
    environment = {name: value for name, value in os.environ.items() if name != "DISPLAY"}
    done = subprocess.run(
        [sys.executable, "-m", "gui"], env=environment, capture_output=True, text=True, check=False
    )

    assert done.returncode == 2
    assert "the window needs a screen" in done.stderr
    assert done.stderr.count("\n") == 1


def wait_closed(driver):
    """Run the window until it is closed."""
    end = time.monotonic() + WAIT_S
    while not driver.window.closed and time.monotonic() < end:
        driver.root.update()
        time.sleep(0.005)
    assert driver.window.closed
