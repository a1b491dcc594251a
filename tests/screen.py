"""A screen for the tests of the window: one of our own where Xvfb is installed."""

import contextlib
import os
import shutil
import subprocess
import time
from pathlib import Path

import pytest
from PIL import ImageGrab

__all__ = ["Driver", "open_screen", "take_picture"]

SIZE = "1920x1080x24"
PICTURES = Path(__file__).parent / "screenshots"
WAIT_S = 20.0  # for a reading on a busy machine; a quiet one needs well under a second
REQUIRED = "DIGITISE_REQUIRE_SCREEN"  # set where a missing screen is a fault, not a reason to skip


@contextlib.contextmanager
def open_screen():
    """Start Xvfb and point DISPLAY at it; without any screen skip, or fail where one is required."""
    before = os.environ.get("DISPLAY")
    if shutil.which("Xvfb") is None:
        if before:
            yield before
            return
        reason = "no screen: install Xvfb (Debian, Ubuntu: xvfb) or set DISPLAY"
        (pytest.fail if os.environ.get(REQUIRED) else pytest.skip)(reason)
    read, write = os.pipe()
    server = subprocess.Popen(
        ["Xvfb", "-displayfd", str(write), "-screen", "0", SIZE, "-nolisten", "tcp", "-noreset"],
        pass_fds=(write,),
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    os.close(write)
    with os.fdopen(read) as pipe:
        number = pipe.readline().strip()  # empty when the server could not start
    try:
        if not number:
            pytest.fail("Xvfb did not start")
        os.environ["DISPLAY"] = f":{number}"
        yield f":{number}"
    finally:
        server.terminate()
        server.wait(10)
        if before is None:
            os.environ.pop("DISPLAY", None)
        else:
            os.environ["DISPLAY"] = before


def take_picture(root, name):
    """Keep a picture of a window in the screen's corner for a person to look at; returns it."""
    root.update()
    box = (0, 0, root.winfo_rootx() + root.winfo_width(), root.winfo_rooty() + root.winfo_height())
    picture = ImageGrab.grab(xdisplay=os.environ["DISPLAY"]).crop(box)
    PICTURES.mkdir(exist_ok=True)
    picture.save(PICTURES / f"{name}.png")
    return picture


class Driver:
    """Drives a window by events, as a person at the screen does.

    errors : what was raised in the window's callbacks
    """

    def __init__(self, window):
        self.window, self.root, self.session = window, window.root, window.session
        self.errors = []
        self.root.report_callback_exception = lambda kind, error, trace: self.errors.append(error)
        self.root.update()

    def settle(self):
        """Let the window take in what has happened."""
        self.root.update()
        self.root.update_idletasks()
        self.root.update()

    def until(self, done, what):
        """Run the window until something is so."""
        end = time.monotonic() + WAIT_S
        while not done():
            self.root.update()
            time.sleep(0.005)
            if self.errors:
                raise self.errors[0]
            assert time.monotonic() < end, f"waited for {what}; the window says: {self.status}"
        self.settle()

    def read(self):
        """Run the window until nothing is awaited."""
        self.until(
            lambda: self.session.open and self.session.now.done and not self.window.worker.busy, "the reading"
        )

    @property
    def status(self):
        """What the status line says."""
        return self.window.status.cget("text")

    def view_place(self, x_px, y_px):
        """Widget px on the chart's canvas of a picture place."""
        return tuple(round(float(value)) for value in self.window.chart_view.place(x_px, y_px))

    def click(self, x_px, y_px, *, shift=False):
        """Click at a picture place."""
        self.drag((x_px, y_px), shift=shift)

    def drag(self, *places, shift=False):
        """Press at the first picture place, move along the others, release at the last."""
        canvas = self.window.chart_view.canvas
        state = 0x1 if shift else 0
        x, y = self.view_place(*places[0])
        canvas.event_generate("<Motion>", x=x, y=y, state=state)
        canvas.event_generate("<ButtonPress-1>", x=x, y=y, state=state)
        for place in places[1:]:
            x, y = self.view_place(*place)
            canvas.event_generate("<B1-Motion>", x=x, y=y, state=state | 0x100)
        canvas.event_generate("<ButtonRelease-1>", x=x, y=y, state=state | 0x100)
        self.settle()

    def key(self, sequence, widget=None):
        """Press a key where the keyboard is, or in a widget."""
        if widget is not None:
            widget.focus_force()
            self.settle()
        (self.root.focus_get() or self.root).event_generate(sequence)
        self.settle()

    def type(self, words):
        """Type into the field that has the keyboard, in place of what stands there."""
        entry = self.root.focus_get()
        entry.delete(0, "end")
        entry.insert(0, words)
        self.settle()

    def tell(self, name, words):
        """Fill in a field of the panel and press Enter."""
        field = self.window.fields.fields[name]
        field.widget.focus_force()
        self.settle()
        field.text.set(words)
        self.key("<Return>")
