"""The window's commands, one method each, named as in `keys`; they tell the session and ask the worker."""

import os

from digitise.exceptions import DigitiseError

from . import flow, jobs
from .clipboard import pasted_source
from .dialogs import AskUnsaved, SaveDialog, ask_picture, show_keys
from .pages import SIZE_PX, PageChooser
from .samples import is_sample
from .table_text import table_text
from .words import said

__all__ = ["Actions"]

SCALINGS = (100, 125, 150, 175, 200, 250, 300)
ZOOM_STEP = 1.5


class Actions:
    """What every key, button and menu line does."""

    def __init__(self, window):
        self.window, self.session = window, window.session
        self.page_chooser = self.dialog = None

    # --- file

    def open_picture(self):
        """Ask for a file and open it."""
        folder = os.path.dirname(self.session.now.source) or None
        path = ask_picture(self.window.root, folder=folder)
        if path:
            self.open_path(path)

    def open_path(self, path, **options):
        """Open a picture or a record, unless work would be lost; options as `flow.open_source` has."""
        self._unless_unsaved("Open", lambda: self._open(path, **options))

    def _open(self, path, **options):
        self.window.say(f"Opening {os.path.basename(path)}\u2026", "busy")
        self.window.worker.ask("open", jobs.open_source, path, options)

    def opened(self, answer):
        """Take up what was opened, or say why it was not."""
        if isinstance(answer.error, flow.NeedsPictureError):
            record = answer.error.source
            self.window.say(said(answer.error), "alert")
            path = ask_picture(
                self.window.root, folder=os.path.dirname(record), title="Where is the record's picture?"
            )
            if path:
                self._open(record, picture_path=path)
            return
        if answer.error is not None:
            self.window.say(said(answer.error), "alert")
            return
        self.session.start(answer.value)
        self.window.picture_changed()
        picture = answer.value.picture
        if picture.kind == "pdf" and picture.page == 1 and answer.value.template.page is None:
            self._offer_pages(1, only_if_several=True)

    def paste(self):
        """Open the picture, or the file, that the clipboard holds."""
        found = pasted_source(self.window.root)
        if found is None:
            self.window.say("The clipboard holds no picture and no picture file's name", "alert")
            return
        path, passing = found
        self.open_path(path, pasted=passing)

    def choose_page(self):
        """Show the pages of the PDF."""
        if self.session.open and self.session.now.picture.kind == "pdf":
            self._offer_pages(1)
        else:
            self.window.say("Only a PDF has pages to choose from", "alert")

    def _offer_pages(self, first, *, only_if_several=False):
        look = self.window.look
        self.window.worker.ask(
            "pages",
            jobs.look_at_pages,
            self.session.now.picture.path,
            look.px(SIZE_PX),
            max(first, 1),
            only_if_several,
        )

    def pages_seen(self, answer):
        """Show the thumbnails."""
        if answer.error is not None:
            self.window.say(said(answer.error), "alert")
            return
        n_pages, thumbnails, first, only_if_several = answer.value
        if only_if_several and n_pages < 2:
            return
        picture = self.session.now.picture
        self.page_chooser = PageChooser(
            self.window.root, self.window.look, n_pages, thumbnails, first=first, here=picture.page,
            chosen=lambda page: self.open_path(picture.path, page=page), more=self._offer_pages,
        )  # fmt: skip

    def save(self, *, then=None):
        """Save into the folder of last time, or ask for one."""
        self.window.leave_fields()
        if not self.session.open:
            self.window.say("There is nothing to save yet", "alert")
        elif self.session.folder is None:
            self.save_elsewhere(then=then)
        else:
            self._save(self.session.folder, then)

    def save_elsewhere(self, *, then=None):
        """Ask for the folder and save."""
        if not self.session.open:
            self.window.say("There is nothing to save yet", "alert")
            return
        now = self.session.now
        folder = self.session.folder or (
            os.getcwd()
            if now.pasted or is_sample(now.source)
            else os.path.dirname(os.path.abspath(now.source))
        )
        self.dialog = SaveDialog(
            self.window.root, self.window.look, now, folder, lambda chosen: self._save(chosen, then)
        )

    def _save(self, folder, then=None):
        self.window.say("Saving\u2026", "busy")
        self.window.worker.ask("save", jobs.save, self.session.now, folder, then)

    def saved(self, answer):
        """Say what was written, and go on with what waited for it."""
        if answer.error is not None:
            self.window.say(said(answer.error), "alert")
            return
        state, saved, then = answer.value
        self.session.take(state)
        self.session.mark_saved(state, saved.folder)
        names = ", ".join(path.name for path in saved.written.paths)
        words = f"Saved in {saved.folder}: {names}"
        if saved.left_out:
            words += f"; not read and left out: chart {', '.join(str(k) for k in saved.left_out)}"
        self.window.changed()
        self.window.say(words, "calm")
        if then is not None:
            then()

    def quit(self):
        """End, unless work would be lost."""
        self._unless_unsaved("Close", self.window.close)

    def _unless_unsaved(self, words, act):
        self.window.leave_fields()
        if not self.session.unsaved:
            act()
            return
        self.dialog = AskUnsaved(
            self.window.root, self.window.look, words=words, lose=act, save=lambda: self.save(then=act)
        )

    # --- edit

    def undo(self):
        """Take back the last step."""
        words = self.session.undo_words
        self.session.undo()
        self.window.stepped(f"Undone: {words}" if words else "Nothing to undo")

    def redo(self):
        """Do a step again."""
        words = self.session.redo_words
        self.session.redo()
        self.window.stepped(f"Done again: {words}" if words else "Nothing to redo")

    def copy_table(self, rows=None):
        """Put the table, or some of its rows, on the clipboard as tab-separated text."""
        chart, trace = self.session.chart, self.session.shown_trace
        if trace is None or not chart.done:
            self.window.say("There is no table yet", "alert")
            return
        text = table_text(trace.table, rows)
        self.window.root.clipboard_clear()
        self.window.root.clipboard_append(text)
        n = text.count("\n") - 1
        self.window.say(f"{n} row{'s' * (n != 1)} copied as tab-separated text", "calm")

    def drop_held(self):
        """Take away the mark, pin, cover or ring that is held."""
        self.attempt(self.session.drop_held)

    def hold_next(self, step=1):
        """Hold the next point."""
        self.session.hold_next(step)
        self.window.show_held()

    def hold_previous(self):
        """Hold the point before."""
        self.hold_next(-1)

    def let_go(self):
        """Stop what is begun, or let go."""
        self.window.hand.cancel()
        self.window.held_changed()
        self.window.chart_view.refresh()

    def attempt(self, edit, *arguments, **more):
        """Do an edit of the session; what cannot be is said, not raised."""
        try:
            edit(*arguments, **more)
        except DigitiseError as error:
            self.window.say(said(error), "alert")
        self.window.changed()

    # --- tools

    def take_tool(self, name):
        """Take a tool in hand."""
        self.window.hand.take(name)
        self.window.tool_changed()

    def settle_grid(self):
        """Fit the grid to the drawn lines near it."""
        chart = self.session.chart
        if chart is None or chart.grid is None:
            self.window.say("There is no grid to settle", "alert")
        else:
            self._ask_grid(flow.settle, chart.grid, "settle the grid")

    def grid_as_found(self):
        """Find the grid again."""
        if self.session.chart is not None:
            self.attempt(self.session.correct_grid, None, "grid as found")

    def place_grid_anew(self):
        """Draw a new grid with the next drag."""
        self.take_tool("grid")
        self.window.hand.anew = True
        self.window.say("Drag from the chart's centre to its outermost ring", "plain")
        self.window.chart_view.canvas.focus_set()

    def grid_drawn(self, draft):
        """A grid was drawn or dragged: look for the drawn lines near it."""
        if draft.kind == "place":
            self._ask_grid(flow.place_grid, draft.grid, "place the grid")
        else:
            self._ask_grid(flow.settle, draft.grid, "correct the grid")

    def _ask_grid(self, work, grid, words):
        self.window.say("Looking for the lines\u2026", "busy")
        self.window.worker.ask("grid", jobs.look_for_lines, work, self.session.now, grid, words)

    def grid_seen(self, answer):
        """Take the grid that was settled, unless something else was done meanwhile."""
        if answer.error is not None:
            self.window.say(said(answer.error), "alert")
            return
        serial, grid, words = answer.value
        if serial == self.session.now.serial:
            self.attempt(self.session.correct_grid, grid, words)

    # --- view

    def zoom_in(self):
        """Zoom in about the middle."""
        self.window.chart_view.zoom(ZOOM_STEP)

    def zoom_out(self):
        """Zoom out about the middle."""
        self.window.chart_view.zoom(1 / ZOOM_STEP)

    def zoom_fit(self):
        """Show the whole chart."""
        self.window.chart_view.fit()

    def zoom_picture(self):
        """Show the whole picture."""
        self.window.chart_view.fit(picture=True)

    def zoom_one(self):
        """One view px a picture px."""
        self.window.chart_view.zoom_to(1.0)

    def toggle_overlay(self):
        """Hide the overlay, or show it again."""
        view = self.window.chart_view
        view.overlay_on = not view.overlay_on
        view.refresh()

    def next_trace(self):
        """Show the next trace in full."""
        reading = self.session.reading
        if reading is not None and reading.traces:
            self.window.trace_chosen((self.session.trace + 1) % len(reading.traces))

    def next_reason(self):
        """Lead to the next reason to look."""
        self.window.show_review()
        self.window.lists.review.step(1)

    def go_to_chart(self, k):
        """Work on another chart."""
        if self.session.now.charts:
            self.session.go_to_chart(k % len(self.session.now.charts))
            self.window.picture_changed(new=False)

    def next_chart(self):
        """Work on the next chart."""
        self.go_to_chart(self.session.now.at + 1)

    def previous_chart(self):
        """Work on the chart before."""
        self.go_to_chart(self.session.now.at - 1)

    def toggle_fields(self):
        """Hide the fields, or show them again."""
        self.window.panes.toggle_fields()

    def next_pane(self):
        """Give the keyboard to the next pane."""
        self.window.panes.focus_next()

    def larger_text(self):
        """The next larger scaling."""
        larger = [percent for percent in SCALINGS if percent > self.window.look.percent]
        if larger:
            self.window.rebuild(larger[0])

    def smaller_text(self):
        """The next smaller scaling."""
        smaller = [percent for percent in SCALINGS if percent < self.window.look.percent]
        if smaller:
            self.window.rebuild(smaller[-1])

    def show_keys(self):
        """Show all keys."""
        self.dialog = show_keys(self.window.root, self.window.look)


def _tool(name):
    def take(self):
        self.take_tool(name)

    take.__doc__ = f"Take the tool {name} in hand."
    return take


for _name in ("look", "mark", "ink", "pin", "cover", "grid", "crop"):
    setattr(Actions, f"tool_{_name}", _tool(_name))
