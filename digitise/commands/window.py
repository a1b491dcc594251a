"""`digitise window`: the desktop window."""

import os
import sys

__all__ = ["add_arguments", "run"]

EXIT_NO_SCREEN = 2


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument("picture", metavar="PICTURE", nargs="?", help="picture, PDF or record to begin with")
    parser.add_argument("--page", metavar="N", type=int, help="page of a PDF or TIFF, from 1 (the first)")
    parser.add_argument(
        "--scaling",
        metavar="PERCENT",
        type=int,
        help="size of text and lines, 75 to 400 percent (the screen's own)",
    )


def run(args):
    """Show the window until it is closed; returns 0, or 2 where there is no screen or no tkinter."""
    if args.scaling is not None and not 75 <= args.scaling <= 400:
        print("digitise: --scaling takes 75 to 400 percent", file=sys.stderr)
        return EXIT_NO_SCREEN
    try:
        import tkinter as tk

        from gui.window import Window
    except ModuleNotFoundError as error:
        if error.name not in ("tkinter", "_tkinter"):
            raise
        print("digitise: the window needs tkinter; install it (Debian, Ubuntu: python3-tk)", file=sys.stderr)
        return EXIT_NO_SCREEN
    _sharp_on_windows()
    try:
        root = tk.Tk(className="digitise")
    except tk.TclError as error:
        print(f"digitise: the window needs a screen ({error})", file=sys.stderr)
        return EXIT_NO_SCREEN
    window = Window(root, percent=args.scaling)
    root.report_callback_exception = _reporter(window, args.debug)
    if args.picture:
        root.after_idle(lambda: window.actions.open_path(args.picture, page=args.page))
    root.mainloop()
    return 0


def _reporter(window, debug):
    """An error of the program is said in the status line; with --debug its trace is printed too."""

    def report(kind, error, trace):
        if debug:
            import traceback

            traceback.print_exception(kind, error, trace)
        from gui.words import said

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
