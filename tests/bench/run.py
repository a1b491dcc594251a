"""The benchmark command: accuracy and coverage by class, speed by size, each beside the short script."""

import argparse
import os
import tempfile

from .cases import GROUPS


def main(argv=None):
    """Print the tables; returns 0."""
    parser = argparse.ArgumentParser(prog="python -m tests.bench", description=__doc__)
    parser.add_argument("--charts", type=int, default=8, help="charts a group (8)")
    parser.add_argument(
        "--groups", nargs="+", choices=GROUPS, default=list(GROUPS), help="which groups (all)"
    )
    parser.add_argument("--no-speed", action="store_true", help="leave the speed table out")
    parser.add_argument("--no-accuracy", action="store_true", help="leave the accuracy tables out")
    parser.add_argument("--each", action="store_true", help="print every trace as it is read")
    parser.add_argument("--keep", metavar="FOLDER", help="keep the charts here, with their truth files")
    args = parser.parse_args(argv)
    os.environ.setdefault("OMP_NUM_THREADS", "1")
    with tempfile.TemporaryDirectory() as scratch:
        folder = args.keep or scratch
        if not args.no_accuracy:
            _print_accuracy(folder, args)
        if not args.no_speed:
            from .speed import measure_speed

            print("\nSpeed, whole process on one core, best of three")
            print("\n".join(measure_speed(folder)))
    return 0


def _print_accuracy(folder, args):
    from .accuracy import measure, table_by_class, table_by_group

    results = measure(folder, args.charts, groups=args.groups, say=_say if args.each else None)
    print(
        "Accuracy with levels, bearing and ink told\n"
        "inside: rows within their own error95_db, to be 93 to 97 %"
    )
    print("width: median error95_db over median error, 2.9 for a normal error; seen: rows with a value;")
    print("silent: traces off by more than 0.5 dB in the median without a reason to look")
    print("\n".join(table_by_group(results)))
    for title, groups in (
        ("clean", ("clean",)),
        ("spoiled", ("small", "JPEG", "scan", "fax", "skew", "stretch")),
        ("all", None),
    ):
        print(f"\nRows by class, {title}")
        print("\n".join(table_by_class(results, groups)))
    unread = [f"{r.name} trace {r.trace}: {r.fault}" for r in results if r.fault]
    unread += [
        f"{r.name} trace {r.trace}: wrong without a reason to look" for r in results if r.silently_wrong
    ]
    if unread:
        print("\nNot read, or wrong without a reason to look")
        print("\n".join(unread))


def _say(result):
    import numpy as np

    said = result.fault
    if result.rows is not None:
        error = np.abs(result.rows.error_db)
        inside = np.mean(error <= result.rows.claimed_db)
        said = f"med {np.median(error):.4f} p95 {np.percentile(error, 95):.3f} inside {inside:.0%}"
        said += f"  {'; '.join(item.split(':')[0] for item in result.review)}"
    print(f"{result.name} trace {result.trace}: {said}", flush=True)
