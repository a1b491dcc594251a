"""`digitise compare`: tables against the first one, bearing by bearing and figure by figure."""

import argparse
import math

from ..exceptions import UsageError
from ..outputs import write_file
from .table_options import add_cut_options, cuts_of, read_tables, short_names

__all__ = ["add_arguments", "run"]


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument(
        "tables",
        metavar="TABLE",
        nargs="+",
        help="two tables or more; the first is what the others are held against",
    )
    parser.add_argument(
        "--level", choices=("relative", "chart"), default="relative",
        help="dB under each trace's own peak (relative), or as printed on the rings (chart)",
    )  # fmt: skip
    parser.add_argument(
        "--turn-by", metavar="DEG", type=_degrees, default=0.0,
        help="degrees to add to the bearings of all tables but the first (0)",
    )  # fmt: skip
    parser.add_argument("--out", metavar="FILE", help="write the difference of every row into this CSV file")
    parser.add_argument(
        "--picture", metavar="FILE", help="draw the tables and their differences into this PNG file"
    )
    parser.add_argument(
        "--json", action="store_true", help="print JSON: the differences summed up, and the figures"
    )
    add_cut_options(parser)


def run(args):
    """Print what the differences amount to and the figures side by side; returns 0."""
    if len(args.tables) < 2:
        raise UsageError("compare needs two tables or more", remedy="name the second one")
    from ..compare import compare_tables, comparison_csv, comparison_json, comparison_text
    from ..figures import figures_of
    from ..figures_report import figures_json, figures_text

    cuts = cuts_of(args)
    tables, names = read_tables(args.tables), short_names(args.tables)
    found = [
        compare_tables(tables[0], other, level=args.level, turn_deg=args.turn_by) for other in tables[1:]
    ]
    figures = [
        figures_of(table, cut=cut, up=args.up, boresight_deg=args.boresight)
        for table, cut in zip(tables, cuts, strict=True)
    ]
    if args.out:
        write_file(args.out, comparison_csv(names, found).encode(), keep=args.tables)
    if args.picture:
        from ..compare_picture import draw_comparison
        from ..proof import encode_proof

        image = draw_comparison(names, tables, found, level=args.level, turn_deg=args.turn_by)
        write_file(args.picture, encode_proof(image), keep=args.tables)
    if args.json:
        from .._json import to_plain, to_text

        plain = figures_json(names, figures, [()] * len(figures))
        print(to_text(to_plain({**plain, "format": "digitise-compare/1", "level": args.level,
                                "differences": comparison_json(names, found)}, 6)))  # fmt: skip
        return 0
    print("\n".join(comparison_text(names, found)))
    print()
    print("\n".join(figures_text(names, figures, [()] * len(figures))))
    return 0


def _degrees(text):
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise argparse.ArgumentTypeError(f"{text!r} is not a number")
    return value
