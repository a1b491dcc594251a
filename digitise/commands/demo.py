"""`digitise demo`: read the shipped sample pictures and compare with their known curves."""

import argparse
import shlex
import sys
import time
from pathlib import Path

from ..caution import CAUTION
from ..cli import report
from ..outputs import check_folder, make_files, write_whole
from .reading_options import add_reading_options, settings_from_args

__all__ = ["add_arguments", "run"]

COLUMNS = "{:<19}{:<17}{:>10}{:>10}{:>14}{:>8}{:>9}{:>8}"


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument("--out", metavar="DIR", default="demo-out", help="folder for the outputs (demo-out)")
    parser.add_argument(
        "--unaided",
        action="store_true",
        help="tell nothing: levels and bearings come from the printed labels, which digitise[labels] reads",
    )


def run(args):
    """Read all samples; returns the worst exit status."""
    from ..demo import samples

    check_folder(args.out)
    print("All antennas on these charts are invented. dB: distance of the reading from the known curve.\n")
    print(
        COLUMNS.format("picture", "trace", "median dB", "95 % dB", "in own error", "rows", "review", "time")
    )
    worst, replaced, commands = 0, 0, []
    for sample in samples():
        options = () if args.unaided else sample.options
        commands.append(shlex.join(["digitise", "read", str(sample.path), *options]))
        start = time.perf_counter()
        try:
            readings, charts, written = _read(sample, options, args.out)
        except Exception as error:  # the other samples are still to be read
            if args.debug:
                raise
            worst = max(worst, report(error, source=str(sample.path)))
            continue
        replaced += len(written.replaced)
        for line in _lines(sample, readings, charts, time.perf_counter() - start):
            print(line)
    print(f"\nRead, for example, as: {commands[0]}")
    if replaced:
        print(f"{replaced} files of an earlier demo were replaced.")
    print(f"Tables, records and proofs are in {args.out}; look at {Path(args.out) / '*.proof.png'}.")
    print(f"digitise: caution: {CAUTION}", file=sys.stderr)
    return worst


def _read(sample, options, folder):
    """Read one sample as `digitise read` does and write its files."""
    from ..picture import open_picture
    from ..reading import read_charts

    parser = argparse.ArgumentParser(allow_abbrev=False)
    add_reading_options(parser)
    settings = settings_from_args(parser.parse_args(options))
    readings = read_charts(open_picture(sample.path, page=settings.page), settings=settings)
    charts = make_files(readings)
    return readings, charts, write_whole(charts, folder)


def _lines(sample, readings, charts, seconds):
    """A line of the report for every known curve of a sample."""
    from ..demo import score_reading

    n_review = sum(len(chart.record["review"]) for chart in charts)
    for k, curve in enumerate(sample.curves):
        score = score_reading(readings, curve)
        numbers = ("not read", "", "", "")
        if score:
            numbers = (
                f"{score.median_db:.3f}",
                f"{score.p95_db:.3f}",
                f"{score.inside:.0%}",
                f"{score.rows:.0%}",
            )
        last = (n_review, f"{seconds:.1f} s") if k == 0 else ("", "")
        yield COLUMNS.format(sample.path.name if k == 0 else "", curve.name, *numbers, *last)
    extra = sum(len(item.traces) for item in readings) - len(sample.curves)
    if extra > 0:
        yield f"{'':<19}and {extra} trace{'s' * (extra > 1)} more than the picture's {len(sample.curves)}"
