"""`digitise read`: pictures into tables, records and proofs."""

import hashlib
import logging
import sys
import time
from pathlib import Path

from ..caution import CAUTION
from ..cli import report
from ..exceptions import DigitiseError
from ..outputs import check_folder, check_stems, make_files, write_whole
from .reading_options import add_reading_options, settings_from_args

__all__ = ["add_arguments", "run"]

log = logging.getLogger(__name__)


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument(
        "pictures", metavar="PICTURE", nargs="+", help="PNG, JPEG, GIF, TIFF, BMP, WebP or PDF file"
    )
    parser.add_argument(
        "--out", metavar="DIR", default=".", help="folder for the outputs, made if needed (the current one)"
    )
    parser.add_argument(
        "--json", action="store_true", help="print the record on standard output (a list of several)"
    )
    parser.add_argument(
        "--proof-pdf", action="store_true", help="write the proof as a PDF page too, for a project file"
    )
    add_reading_options(parser)


def run(args):
    """Read every picture; one that fails does not stop the others. Returns the worst exit status."""
    settings_from_args(args)  # options that can fit no picture stop the run before any is opened
    check_stems(args.pictures)
    check_folder(args.out)
    worst, records, taken = 0, [], []
    for path in args.pictures:
        try:
            charts, written = _read_one(path, args, taken)
        except Exception as error:  # whatever it is, the other pictures are still to be read
            if args.debug and not isinstance(error, DigitiseError):
                raise
            worst = max(worst, report(error, source=path))
            continue
        taken += [item.name for item in written.paths]
        records += [chart.record for chart in charts]
        _say_notes(path, written, charts)
        if not args.json:
            for chart in charts:
                _print_summary(chart, args.out)
    if args.json and records:
        from ..record import write_record

        print(write_record(records[0] if len(records) == 1 else records), end="")
    if records:
        print(f"digitise: caution: {CAUTION}", file=sys.stderr)
    return worst


def _read_one(path, args, taken):
    """Read one picture and write its files."""
    from ..picture import open_picture
    from ..reading import read_charts

    start = time.perf_counter()
    settings = settings_from_args(args, sha256=_sha256(path) if args.like else None)
    picture = open_picture(path, page=settings.page)
    log.debug("%s: opened in %.0f ms", path, 1000 * (time.perf_counter() - start))
    readings = read_charts(picture, settings=settings)
    log.debug("%s: read after %.0f ms", path, 1000 * (time.perf_counter() - start))
    charts = make_files(readings, with_proof_pdf=args.proof_pdf)
    log.debug("%s: proof drawn after %.0f ms", path, 1000 * (time.perf_counter() - start))
    written = write_whole(charts, args.out, taken=taken)
    log.debug("%s: written after %.0f ms", path, 1000 * (time.perf_counter() - start))
    return charts, written


def _sha256(path):
    """Of a file's bytes, or None where it cannot be read, which opening it will explain."""
    try:
        with open(path, "rb") as file:
            return hashlib.sha256(file.read()).hexdigest()
    except (OSError, ValueError):
        return None


def _say_notes(path, written, charts):
    """What a person should know, a line each, on standard error."""
    if written.replaced:
        other = " of a picture of that name with other content" if written.other_picture else ""
        print(f"digitise: {path}: note: replaced the earlier reading{other}", file=sys.stderr)
    if written.left_over:
        print(
            f"digitise: {path}: note: left from an earlier reading: {', '.join(written.left_over)}",
            file=sys.stderr,
        )
    for chart in charts:
        number = f" (chart {chart.record['chart']['number']})" if chart.record["chart"]["of"] > 1 else ""
        for sentence in chart.record["review"]:
            print(f"digitise: {path}: review: {sentence}{number}", file=sys.stderr)


def _print_summary(chart, folder):
    """A line for every trace on standard output."""
    n_review = len(chart.record["review"])
    for trace in chart.record["traces"]:
        said = [f"ink {trace['ink']}"]
        if trace["peak_db"] is None:
            said.append("no row has a value")
        else:
            said.append(f"peak {round(trace['peak_db'], 2) + 0.0:.2f} dB at {trace['peak_deg']:g} deg")
            width = trace["figures"]["beamwidth"]
            if width["value"] is not None:
                said.append(f"beamwidth {width['value']:g} +- {width['error95']:g} deg")
            said.append(f"median error {trace['median_error95_db']:.2g} dB")
        said.append(f"{n_review} to review" if n_review else "nothing to review")
        print(f"{Path(folder) / trace['table']}: {', '.join(said)}")
