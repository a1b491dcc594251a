"""`digitise figures`: the trade's figures of tables, one column a table."""

from .table_options import add_cut_options, cuts_of, read_tables, short_names

__all__ = ["add_arguments", "run"]


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument("tables", metavar="TABLE", nargs="+", help="table as digitise read writes it")
    form = parser.add_mutually_exclusive_group()
    form.add_argument("--json", action="store_true", help="print JSON")
    form.add_argument("--csv", action="store_true", help="print CSV, one row a figure of a table")
    parser.add_argument(
        "--claim", metavar="FIGURE=VALUE,...", default="",
        help="what the datasheet states, such as beamwidth=65,ftb>=25,tilt=6+-0.5, held against each table",
    )  # fmt: skip
    add_cut_options(parser)


def run(args):
    """Print the figures; returns 0, also when a claim differs."""
    from ..claims import judge_claims, parse_claims
    from ..figures import figures_of
    from ..figures_report import figures_csv, figures_json, figures_text

    claims = parse_claims(args.claim) if args.claim else ()
    cuts = cuts_of(args)
    tables, names = read_tables(args.tables), short_names(args.tables)
    figures = [
        figures_of(table, cut=cut, up=args.up, boresight_deg=args.boresight)
        for table, cut in zip(tables, cuts, strict=True)
    ]
    verdicts = [judge_claims(claims, item) for item in figures]
    if args.json:
        from .._json import to_plain, to_text

        print(to_text(to_plain(figures_json(names, figures, verdicts))))
    elif args.csv:
        print(figures_csv(names, figures, verdicts), end="")
    else:
        print("\n".join(figures_text(names, figures, verdicts)))
    return 0
