"""Start the window, or say in one line why it cannot be started."""

import os
import sys
import traceback

__all__ = ["start"]

EXIT_NO_SCREEN = 2


def start(picture=None, *, page=None, crop=None, scaling=None, debug=False):
    """Show the window until it is closed; returns 0, or 2 where there is no screen or no tkinter.

    picture : file to begin with; page : of a PDF or TIFF, from 1; crop : (x, y, w, h), read only this part
    scaling : percent, None for the screen's own; debug : print where an error of the program arose
    """
    try:
        import tkinter as tk
    except ModuleNotFoundError:
        print("digitise: the window needs tkinter; install it (Debian, Ubuntu: python3-tk)", file=sys.stderr)
        return EXIT_NO_SCREEN
    from .window import Window

    _sharp_on_windows()
    try:
        root = tk.Tk(className="digitise")
    except tk.TclError as error:
        print(f"digitise: the window needs a screen ({error})", file=sys.stderr)
        return EXIT_NO_SCREEN
    window = Window(root, percent=scaling)
    root.report_callback_exception = _reporter(window, debug)
    if picture:
        root.after_idle(lambda: window.actions.open_path(picture, page=page, crop=crop))
    root.mainloop()
    return 0


def _reporter(window, debug):
    """An error of the program is said in the status line; with --debug its trace is printed too."""
    from .words import said

    def report(kind, error, trace):
        if debug:
            traceback.print_exception(kind, error, trace)
        window.say(said(error), "alert")

    return report


def _sharp_on_windows():
    """Ask Windows not to stretch the window's pixels on finer screens."""
    if os.name == "nt":
        import ctypes

        try:
            ctypes.windll.shcore.SetProcessDpiAwareness(1)
        except (AttributeError, OSError):
            pass
