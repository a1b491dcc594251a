"""`digitise convert`: tables to the open exchange formats, and files in them to tables or to each other."""

import argparse
import math
import os
import re
import sys
from pathlib import Path

from ..exceptions import UsageError
from ..exchange import FORMATS
from ..outputs import check_folder, write_file

__all__ = ["add_arguments", "run"]

ELSEWHERE = "the levels are as good as the files they come from; no evidence that a direction is safe"
WORDS = ("", "azimuth", "elevation")
DATE = re.compile(r"(19|20)\d\d(0[1-9]|1[0-2])(0[1-9]|[12]\d|3[01])")


def add_arguments(parser):
    """Declare the command's options."""
    parser.add_argument("files", metavar="TABLE", nargs="+", help="tables, or files in an exchange format")
    parser.add_argument("--to", choices=(*FORMATS, "table"), required=True, help="format to write")
    parser.add_argument(
        "--from",
        dest="kind",
        choices=(*FORMATS, "table"),
        default="",
        help="format of the files (told by content)",
    )
    parser.add_argument(
        "--out", metavar="DIR", default=".", help="folder for the outputs, made if needed (the current one)"
    )
    parser.add_argument("--replace", action="store_true", help="write over files that are there already")
    parser.add_argument(
        "--cut", metavar="azimuth|elevation", type=_cuts, default=("",),
        help="which plane the files are; several: one word for all or one each, with commas",
    )  # fmt: skip
    _add_angles(parser.add_argument_group("angles and levels"))
    _add_facts(parser.add_argument_group("what a format asks for and a table does not hold"))


def run(args):
    """Convert the files, write all or none, and say what could not be kept; returns 0."""
    from ..convert import convert
    from ..exchange.cuts import ExchangeOptions

    options = ExchangeOptions(
        turn=args.turn, file_turn=args.file_turn, up=args.up, angles=args.angles,
        values=args.values, errors=args.errors, step_deg=args.step, decimals=args.decimals,
        designators=args.designators, coordinates=args.coordinates, error95_db=args.error95,
    )  # fmt: skip
    made = convert(
        args.files, to=args.to, options=options, planes=_each(args.cut, args, "--cut"),
        fronts=_each(args.front, args, "--front"), facts=_facts(args), kind=args.kind,
        level=args.level, unit=args.unit,
    )  # fmt: skip
    _write(made, args)
    for item in made:
        print(f"{Path(args.out) / item.name}: from {item.source}")
        for sentence in item.lost:
            print(f"  not kept  {sentence}")
        for sentence in item.checks:
            print(f"  look at   {sentence}")
    if any(item.from_reading for item in made):
        from ..caution import CAUTION

        print(f"digitise: caution: {CAUTION}", file=sys.stderr)
    else:
        print(f"digitise: caution: {ELSEWHERE}", file=sys.stderr)
    return 0


def _each(values, args, option):
    """One value a file, from one for all or one each."""
    if len(values) not in (1, len(args.files)):
        raise UsageError(
            f"{option} has {len(values)} values for {len(args.files)} files",
            remedy="give one for all or one each",
        )
    return values * len(args.files) if len(values) == 1 else values


def _write(made, args):
    names = [item.name.casefold() for item in made]
    if len(set(names)) < len(names):
        raise UsageError(
            "two of the files would take the same name",
            remedy="convert them in two runs with different --out",
        )
    check_folder(args.out)
    folder = Path(args.out)
    for item in made:
        if os.path.lexists(folder / item.name) and not args.replace:
            raise UsageError(
                "is there already", remedy="give another --out, or --replace", source=str(folder / item.name)
            )
    folder.mkdir(parents=True, exist_ok=True)
    for item in made:
        write_file(folder / item.name, item.data, keep=args.files)


def _add_angles(group):
    group.add_argument(
        "--front", metavar="DEG", type=_bearings, default=(0.0,),
        help="the table's printed bearing in front, at the horizon (0); one for all or one each",
    )  # fmt: skip
    group.add_argument(
        "--turn",
        choices=("cw", "ccw"),
        default="cw",
        help="how the table's azimuth grows seen from above (cw)",
    )
    group.add_argument(
        "--file-turn",
        choices=("cw", "ccw"),
        default="cw",
        help="how the file's azimuth grows seen from above (cw)",
    )
    group.add_argument(
        "--up", choices=("growing", "falling"), default="growing",
        help="elevation: the way the table's bearings go from the front horizon up (growing)",
    )  # fmt: skip
    group.add_argument(
        "--angles",
        choices=("0..359", "-180..179", "-180..180"),
        default="0..359",
        help="plain: angles to write",
    )
    group.add_argument(
        "--values", choices=("relative", "loss", "field"), default="",
        help="plain: relative dB, positive loss or relative field (relative; read by the header or by look)",
    )  # fmt: skip
    group.add_argument("--errors", action="store_true", help="plain: write error and state as columns")
    group.add_argument(
        "--step", metavar="DEG", type=_number, default=math.nan, help="step to write (the points there are)"
    )
    group.add_argument(
        "--decimals", metavar="N", type=int, choices=range(7), default=3, help="decimals of levels (3)"
    )
    group.add_argument(
        "--level",
        choices=("relative", "chart"),
        default="relative",
        help="levels of a table to write (relative)",
    )
    group.add_argument(
        "--unit",
        choices=("dB", "dBi", "dBd"),
        default="dB",
        help="unit printed on the chart, for --level chart",
    )
    group.add_argument(
        "--designators",
        metavar="H,V|AZ,EL",
        choices=("H,V", "AZ,EL"),
        default="H,V",
        help="NSMA names of the cuts (H,V: untilted)",
    )
    group.add_argument(
        "--coordinates",
        choices=("SPCS_Polar", "SPCS_CW", "SPCS_CCW"),
        default="SPCS_Polar",
        help="BASTA coordinate system",
    )
    group.add_argument(
        "--error95", metavar="DB", type=_number, default=math.nan,
        help="error of levels from a file that holds none, 95 %% half-width, dB (half of its last digit)",
    )  # fmt: skip


def _add_facts(group):
    group.add_argument("--maker", metavar="TEXT", help="maker's name")
    group.add_argument("--model", metavar="TEXT", help="model number")
    group.add_argument(
        "--frequency", metavar="MHZ[,MHZ]", type=_frequencies, help="frequency, or lowest and highest, MHz"
    )
    group.add_argument("--gain", metavar="DB", type=_number, help="stated gain at mid-band, in --gain-unit")
    group.add_argument("--gain-unit", choices=("dBi", "dBd"), help="unit of the gain (dBi)")
    group.add_argument(
        "--tilt",
        metavar="DEG",
        type=_number,
        help="electrical tilt, degrees down (as the elevation cut has it)",
    )
    group.add_argument("--polarisation", metavar="A/B", help="antenna and source polarisation, such as V/V")
    group.add_argument("--pattern", choices=("typical", "envelope"), help="kind of pattern (typical)")
    group.add_argument("--date", metavar="YYYYMMDD", type=_date, help="date of the data (today)")


def _facts(args):
    facts = {"maker": args.maker, "model": args.model, "gain": args.gain, "gain_unit": args.gain_unit}
    facts |= {
        "tilt_deg": args.tilt,
        "polarisation": args.polarisation,
        "pattern_kind": args.pattern,
        "date": args.date,
    }
    if args.frequency:
        facts |= {"low_mhz": args.frequency[0], "high_mhz": args.frequency[-1]}
        facts |= {"frequency_mhz": sum(args.frequency) / len(args.frequency)}
    return {name: value for name, value in facts.items() if value is not None}


def _number(text):
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise argparse.ArgumentTypeError(f"{text!r} is not a number")
    return value


def _frequencies(text):
    values = tuple(_number(part) for part in text.split(","))
    if len(values) > 2 or any(value <= 0 for value in values) or list(values) != sorted(values):
        raise argparse.ArgumentTypeError(f"{text!r} is not a frequency, or a lowest and a highest one")
    return values


def _bearings(text):
    return tuple(_number(part) % 360 for part in text.split(","))


def _cuts(text):
    words = tuple(word.strip().lower() for word in text.split(","))
    if any(word not in WORDS for word in words):
        raise argparse.ArgumentTypeError(f"{text!r} is not azimuth or elevation")
    return words


def _date(text):
    if not DATE.fullmatch(text):
        raise argparse.ArgumentTypeError(f"{text!r} is not a date of the form YYYYMMDD")
    return text
