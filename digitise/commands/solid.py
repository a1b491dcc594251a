"""`digitise solid`: an azimuth and an elevation cut into an estimate of the pattern in every direction."""

from ..outputs import write_file
from .table_options import read_tables, short_names

__all__ = ["add_arguments", "run"]


def add_arguments(parser):
    """Declare the command's options."""
    from ..solid import METHODS

    parser.add_argument("azimuth", metavar="AZIMUTH", help="table of the azimuth cut")
    parser.add_argument("elevation", metavar="ELEVATION", help="table of the elevation cut")
    parser.add_argument(
        "--gain", metavar="DBI", type=float, help="the stated gain, dBi, to hold against the directivity"
    )
    parser.add_argument(
        "--method", choices=METHODS, default="summing", help="published way to fill the sphere (summing)"
    )
    parser.add_argument(
        "--step", metavar="DEG", type=float, default=1.0, help="step of the sphere, degrees (1)"
    )
    parser.add_argument("--out", metavar="FILE", help="write every direction into this CSV file")
    parser.add_argument("--picture", metavar="FILE", help="draw a map of every direction into this PNG file")
    parser.add_argument("--json", action="store_true", help="print JSON")
    places = parser.add_argument_group("how the cuts stand in space (degrees)")
    places.add_argument(
        "--azimuth-front", metavar="DEG", type=float,
        help="bearing of the azimuth cut in the elevation cut's plane (the quarter nearest its peak)",
    )  # fmt: skip
    places.add_argument(
        "--elevation-front", metavar="DEG", type=float,
        help="bearing of the elevation cut at the horizon in front (the quarter nearest its peak)",
    )  # fmt: skip
    places.add_argument(
        "--up", choices=("growing", "falling"), default="",
        help="the way the elevation cut's bearings go from the horizon up (a tilted beam points down)",
    )  # fmt: skip
    places.add_argument(
        "--azimuth-at", metavar="DEG", type=float, default=0.0,
        help="elevation at which the azimuth cut was taken, positive up (0, the horizon)",
    )  # fmt: skip


def run(args):
    """Print directivity and checks, write what was asked for; returns 0."""
    from ..solid import check_gain, make_solid
    from ..solid_report import solid_csv, solid_json, solid_text

    azimuth, elevation = read_tables([args.azimuth, args.elevation])
    solid = make_solid(
        azimuth,
        elevation,
        method=args.method,
        step_deg=args.step,
        azimuth_front_deg=args.azimuth_front,
        elevation_front_deg=args.elevation_front,
        up=args.up,
        azimuth_at_deg=args.azimuth_at,
    )
    check = None if args.gain is None else check_gain(solid, args.gain)
    names, keep = short_names([args.azimuth, args.elevation]), (args.azimuth, args.elevation)
    if args.out:
        write_file(args.out, solid_csv(solid).encode(), keep=keep)
    if args.picture:
        from ..proof import encode_proof
        from ..solid_picture import draw_solid

        write_file(args.picture, encode_proof(draw_solid(solid, names, check)), keep=keep)
    if args.json:
        from .._json import to_text

        print(to_text(solid_json(solid, names, check)))
    else:
        print("\n".join(solid_text(solid, names, check)))
    return 0
