"""`digitise window`: the desktop window."""

import argparse

from .reading_options import add_part_options

__all__ = ["add_arguments", "run"]

SCALINGS = range(75, 401)  # percent


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument("picture", metavar="PICTURE", nargs="?", help="picture, PDF or record to begin with")
    add_part_options(parser)
    parser.add_argument(
        "--scaling", metavar="PERCENT", type=_scaling,
        help="size of text and lines, 75 to 400 percent (the screen's own)",
    )  # fmt: skip


def run(args):
    """Show the window until it is closed; returns 0, or 2 where there is no screen or no tkinter."""
    from gui.start import start

    return start(args.picture, page=args.page, crop=args.crop, scaling=args.scaling, debug=args.debug)


def _scaling(text):
    percent = text.strip().removesuffix("%")
    if not percent.isascii() or not percent.isdigit() or int(percent[:9]) not in SCALINGS:
        raise argparse.ArgumentTypeError(f"{text!r} is not a percentage from 75 to 400")
    return int(percent)
