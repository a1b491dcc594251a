"""The options that shape a reading, for every command that reads pictures; `Settings` judges them."""

import argparse
import math
from dataclasses import replace

from ..settings import LAWS, ZERO_WORDS, Mark, Settings

__all__ = ["add_part_options", "add_reading_options", "settings_from_args"]

NOT_ASCII_MINUS = str.maketrans({"\u2212": "-", "\u2013": "-"})  # the minus sign and the dash of copied text


def add_reading_options(parser):
    """Add the options of `digitise read` that replace a guess of the tool."""
    levels = parser.add_argument_group("levels (dB as printed on the chart)")
    levels.add_argument("--outer", metavar="DB", type=_number, help="level of the outermost ring, dB")
    levels.add_argument("--centre", metavar="DB", type=_number, help="level at the centre point, dB")
    levels.add_argument(
        "--mark",
        metavar="X,Y=DB",
        type=_mark,
        action="append",
        help="a point on a ring, pixels, and its level, dB; two or more replace --outer and --centre",
    )
    levels.add_argument(
        "--law", choices=LAWS, help="how radius becomes level; even (linear in dB) is the usual one"
    )
    levels.add_argument(
        "--ring-levels",
        metavar="DB,DB,...",
        type=_number_list,
        help="level of every drawn ring, outermost first, dB",
    )
    bearings = parser.add_argument_group("bearings (degrees)")
    bearings.add_argument(
        "--zero",
        metavar="|".join(ZERO_WORDS) + "|DEG",
        type=_zero,
        help="where the chart prints 0 degrees; DEG is clockwise from the top",
    )
    bearings.add_argument(
        "--turn", choices=("cw", "ccw"), help="which way the printed angles grow: clockwise or not"
    )
    bearings.add_argument("--step", metavar="DEG", type=_number, help="step of the table, degrees (1)")
    places = parser.add_argument_group("traces and places (pixels from the top left corner)")
    places.add_argument(
        "--ink",
        metavar="'#rrggbb'",
        action="append",
        help="read the trace of this colour; repeatable (every trace found)",
    )
    places.add_argument(
        "--cover",
        metavar="X,Y,W,H",
        type=_box,
        action="append",
        help="leave this region out (a legend); repeatable",
    )
    places.add_argument(
        "--pin",
        metavar="X,Y",
        type=_point,
        action="append",
        help="the trace goes through this point; repeatable",
    )
    add_part_options(places)
    parser.add_argument(
        "--like", metavar="RECORD", help="take the settings from an earlier record; other options override it"
    )


def add_part_options(group):
    """Add the options that choose a part of the picture file."""
    group.add_argument("--crop", metavar="X,Y,W,H", type=_box, help="read only this part of the picture")
    group.add_argument("--page", metavar="N", type=_page, help="page of a PDF or TIFF, from 1 (the first)")


def settings_from_args(args, *, sha256=None):
    """The `Settings` that the options ask for.

    `sha256` is that of the picture to be read, which `--like` needs; raises `UsageError` for options that
    contradict each other and `PictureError` for a record that cannot be read.
    """
    told = {
        "outer_db": args.outer,
        "centre_db": args.centre,
        "marks": args.mark and tuple(args.mark),
        "law": args.law,
        "ring_levels": args.ring_levels,
        "zero_deg": args.zero,
        "turn": args.turn,
        "inks": args.ink and tuple(args.ink),
        "covers": args.cover and tuple(args.cover),
        "pins": args.pin and tuple(args.pin),
        "crop": args.crop,
        "page": args.page,
        "step_deg": args.step,
    }
    told = {name: value for name, value in told.items() if value is not None}
    if not args.like:
        return Settings(**told)
    from ..record import settings_from_record

    like = settings_from_record(args.like, sha256=sha256)
    if told.keys() & {"outer_db", "centre_db", "marks", "law", "ring_levels"}:
        told["scale"] = None
    if told.keys() & {"crop", "page"}:  # the grid and the pins of the record may lie elsewhere
        told = {"grid": None, "chart": None, "pins": ()} | told
    if "zero_deg" in told:
        told["bearing"] = None
        told.setdefault("turn", like.bearing.turn)
    elif "turn" in told:
        told["bearing"] = replace(like.bearing, turn=told["turn"])
    return replace(like, **told)


def _number(text):
    try:
        value = float(text.strip().translate(NOT_ASCII_MINUS))
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise argparse.ArgumentTypeError(f"{text!r} is not a number")
    return value


def _numbers(text, count=None, form=""):
    parts = text.split(",")
    if count is not None and len(parts) != count:
        raise argparse.ArgumentTypeError(f"{text!r} is not of the form {form}")
    return tuple(_number(part) for part in parts)


def _number_list(text):
    return _numbers(text)


def _box(text):
    return _numbers(text, 4, "X,Y,W,H")


def _point(text):
    return _numbers(text, 2, "X,Y")


def _mark(text):
    point, equals, level = text.rpartition("=")
    if not equals:
        raise argparse.ArgumentTypeError(f"{text!r} is not of the form X,Y=DB")
    x_px, y_px = _numbers(point, 2, "X,Y=DB")
    return Mark(x_px=x_px, y_px=y_px, level_db=_number(level))


def _zero(text):
    word = text.strip().lower()
    return ZERO_WORDS[word] if word in ZERO_WORDS else _number(text) % 360


def _page(text):
    if not text.isascii() or not text.isdigit() or not 1 <= int(text[:9]):
        raise argparse.ArgumentTypeError(f"{text!r} is not a page number")
    return int(text)
