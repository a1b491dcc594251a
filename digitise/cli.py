"""The command line: find the command's module by name, let it parse and run, turn what is raised into one
line.

A command is a module of `digitise.commands` with `add_arguments(parser)` and `run(args) -> exit status`. Only
the module of the command at hand is imported, so that one command never waits for another's imports. Every
command has `--verbose` and `--debug` from here.

Exit status: 0 done; 2, 3, 4 as in `digitise.exceptions`; 70 an error of the program itself; 130 interrupted;
141 the reader of our output went away.
"""

import argparse
import importlib
import importlib.util
import logging
import os
import re
import sys

from . import __version__
from .exceptions import DigitiseError

__all__ = ["main"]

COMMANDS = {
    "read": "read the charts on pictures into tables, records and proofs",
    "look": "say what is on a picture without reading a trace: charts, grid, labels, inks",
    "figures": "the trade's figures from tables: beamwidth, front-to-back, side lobes and more",
    "compare": "set tables beside each other or against a reference",
    "solid": "two cuts into a full-sphere pattern and its directivity",
    "convert": "tables to and from the open exchange formats",
    "batch": "read many pictures, resumable, with a summary table",
    "window": "open the desktop window",
    "demo": "read the shipped sample pictures and compare with their known curves",
}
EXIT_INTERNAL = 70  # sysexits.h, EX_SOFTWARE
EXIT_INTERRUPTED, EXIT_BROKEN_PIPE = 130, 141  # 128 + SIGINT, 128 + SIGPIPE, as shells report them
NEGATIVE = re.compile(r"-\.?\d")


def main(argv=None):
    """Run one command; returns the exit status and raises nothing that a user can cause."""
    argv = _join_negative(sys.argv[1:] if argv is None else list(argv))
    debug = "--debug" in argv
    try:
        status = _run(argv)
        sys.stdout.flush()
        return status
    except SystemExit as stop:  # argparse, after --help or a wrong option
        return stop.code if isinstance(stop.code, int) else 2
    except KeyboardInterrupt:
        print("digitise: interrupted", file=sys.stderr)
        return EXIT_INTERRUPTED
    except BrokenPipeError:
        # The interpreter flushes standard output once more when it ends: give it somewhere to go.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return EXIT_BROKEN_PIPE
    except Exception as error:
        if debug:
            raise
        return report(error)


def report(error, *, source=""):
    """Say an error in one line on standard error; returns the exit status that goes with it."""
    if isinstance(error, DigitiseError):
        error.source = error.source or source
        print(f"digitise: {error}", file=sys.stderr)
        return error.exit_status
    where = f"{source}: " if source else ""
    said = " ".join(str(error).split())[:200]
    if isinstance(error, MemoryError):
        print(f"digitise: {where}not enough memory; crop or scale the picture down first", file=sys.stderr)
    else:
        print(
            f"digitise: {where}internal error ({type(error).__name__}: {said}); "
            "run again with --debug to see where",
            file=sys.stderr,
        )
    return EXIT_INTERNAL


class _Parser(argparse.ArgumentParser):
    """Says what is wrong in one line, with the way to the help."""

    def error(self, message):
        """Exit with status 2."""
        self.exit(2, f"{self.prog}: {' '.join(message.split())}; see {self.prog} --help\n")


def _run(argv):
    parser = _Parser(
        prog="digitise",
        description="Reads a picture of a polar antenna radiation-pattern chart into a table of angle "
        "against relative dB, with an error for every row.",
        epilog="digitise COMMAND --help tells a command's options. Numbers are in degrees, dB and pixels.",
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"digitise {__version__}")
    _add_common(parser, default=False)
    named = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    wanted = next((word for word in argv if not word.startswith("-")), None)
    module = None
    for name, purpose in COMMANDS.items():
        if importlib.util.find_spec(f"digitise.commands.{name}") is None:
            continue
        command = named.add_parser(
            name, help=purpose, description=purpose[:1].upper() + purpose[1:] + ".", allow_abbrev=False
        )
        if name == wanted:
            module = importlib.import_module(f"digitise.commands.{name}")
            module.add_arguments(command)
        _add_common(command, default=argparse.SUPPRESS)  # what stood before the command stays
    args = parser.parse_args(argv)
    if args.verbose:
        logging.basicConfig(
            stream=sys.stderr, level=logging.WARNING, format="%(relativeCreated)6.0f ms %(name)s: %(message)s"
        )
        logging.getLogger("digitise").setLevel(logging.DEBUG)
    return module.run(args)


def _add_common(parser, *, default):
    parser.add_argument(
        "--verbose", action="store_true", default=default, help="log stages and times on standard error"
    )
    parser.add_argument(
        "--debug", action="store_true", default=default, help="show where an error of the program arose"
    )


def _join_negative(argv):
    """`--ring-levels -3,-10` as `--ring-levels=-3,-10`: argparse would take the value for an option."""
    joined = []
    for word in argv:
        if joined and NEGATIVE.match(word) and re.fullmatch(r"--[a-z][a-z0-9-]*", joined[-1]):
            joined[-1] += f"={word}"
        else:
            joined.append(word)
    return joined
