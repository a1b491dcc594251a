"""Options of the commands that take tables: which cut a table is, and how its bearings stand in space."""

import argparse
import os

from ..exceptions import UsageError
from ..figures import CUTS
from ..table import read_table

__all__ = ["add_cut_options", "cuts_of", "read_tables", "short_names"]

MOST_TABLES = 200


def add_cut_options(parser):
    """Add `--cut`, `--up` and `--boresight`."""
    group = parser.add_argument_group("how the bearings stand in space")
    group.add_argument(
        "--cut", metavar="|".join(CUTS), type=_cuts, default=("",),
        help="which plane the table is; several tables: one word for all or one each, with commas",
    )  # fmt: skip
    group.add_argument(
        "--up", choices=("growing", "falling"), default="",
        help="elevation: the way bearings go from the horizon up (a tilted beam is taken to point down)",
    )  # fmt: skip
    group.add_argument(
        "--boresight", metavar="DEG", type=float, default=None,
        help="bearing of the mechanical boresight, in elevation of the horizon in front "
        "(the nearest of 0, 90, 180 and 270 to the peak)",
    )  # fmt: skip


def cuts_of(args):
    """One cut a table; raises `UsageError` when `--cut` names another number of them."""
    if len(args.cut) == 1:
        return args.cut * len(args.tables)
    if len(args.cut) != len(args.tables):
        raise UsageError(
            f"--cut names {len(args.cut)} cuts for {len(args.tables)} tables",
            remedy="name one for all or one each",
        )
    return args.cut


def read_tables(paths):
    """The tables of files, in order."""
    if len(paths) > MOST_TABLES:
        raise UsageError(f"{len(paths)} tables at once are too many", remedy=f"name {MOST_TABLES} at most")
    return [read_table(path) for path in paths]


def short_names(paths):
    """The files' bare names; where two are alike, the paths as given."""
    names = [os.path.basename(path) for path in paths]
    return names if len(set(names)) == len(names) else [os.fspath(path) for path in paths]


def _cuts(text):
    words = tuple(word.strip().lower() for word in text.split(","))
    if any(word not in CUTS for word in words):
        raise argparse.ArgumentTypeError(f"{text!r} is not {' or '.join(CUTS)}")
    return words
