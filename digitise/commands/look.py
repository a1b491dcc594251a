"""`digitise look`: what is on a picture, without reading a trace."""

import numpy as np

from ..outputs import write_file
from ..settings import Settings
from .reading_options import add_part_options

__all__ = ["add_arguments", "run"]


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument("picture", metavar="PICTURE", help="PNG, JPEG, GIF, TIFF, BMP, WebP or PDF file")
    parser.add_argument("--json", action="store_true", help="print what was found as JSON")
    parser.add_argument(
        "--proof", metavar="FILE", help="draw grid and labels over the picture into this PNG file"
    )
    add_part_options(parser)


def run(args):
    """Look at one picture; returns 0, also when a reading would need help, which is said."""
    settings = Settings(crop=args.crop, page=args.page)
    from .._json import to_text
    from ..overview import look_at, overview_json
    from ..picture import open_picture

    picture = open_picture(args.picture, page=args.page)
    charts = look_at(picture, settings=settings)
    if args.proof:
        from ..overview_proof import draw_overview
        from ..proof import encode_proof

        write_file(args.proof, encode_proof(draw_overview(picture, charts)), keep=(args.picture,))
    if args.json:
        print(to_text(overview_json(picture, charts)))
        return 0
    notes = f" ({', '.join(picture.notes)})" if picture.notes else ""
    count = f"{len(charts)} chart{'s' * (len(charts) != 1)}"
    print(f"{args.picture}: {picture.width} x {picture.height} px {picture.kind}{notes}, {count}")
    for chart in charts:
        print("\n".join(_lines(chart)))
    return 0


def _lines(chart):
    """What was found of one chart, as lines of text."""
    yield f"chart {chart.number}"
    grid, scale, bearing = chart.grid, chart.scale, chart.bearing
    if grid is not None:
        spokes = "no spokes" if np.isnan(grid.spoke_step_deg) else f"spokes every {grid.spoke_step_deg:g} deg"
        yield (
            f"  grid     centre {grid.centre_x:.2f}, {grid.centre_y:.2f} px; "
            f"outermost ring {grid.outer_px:.2f} px; {len(grid.ring_rho)} rings; {spokes}; "
            f"skew {grid.skew_deg:.2f} deg; fits to {grid.residual_px:.2f} px"
        )
    if scale is not None:
        outer_db = float(scale.level(np.ones(1))[0])
        centre = f", {scale.centre_db:g} at the centre" if np.isfinite(scale.centre_db) else ""
        outer = f"{outer_db:g} {scale.unit or 'dB'} at the outermost ring"
        yield f"  scale    {scale.law}: {outer}{centre} (from {scale.source})"
    if bearing is not None:
        turn = "clockwise" if bearing.turn == "cw" else "counter-clockwise"
        zero = f"0 deg at {bearing.zero_deg:g} deg from the chart's top"
        yield f"  bearing  {zero}, growing {turn} (from {bearing.source})"
    for role in ("ring", "rim", "caption", "legend"):
        found = chart.labels.with_role(role) if chart.labels is not None else ()
        if found:
            yield f"  {role:8s} {' | '.join(label.text for label in found)}"
    if chart.inks:
        yield "  inks     " + ", ".join(ink.hex + (" (grey)" if ink.neutral else "") for ink in chart.inks)
    for sentence in chart.review:
        yield f"  review   {sentence}"
    for sentence in chart.troubles:
        yield f"  needs    {sentence}"
