"""NSMA Recommendation WG16.99.050 (1999): tagged ASCII text, one record a line, any number of cuts.

Order, lengths and required fields are those of its table 1 as transcribed by open readers; the body of the
text was not read. Written are 360 points a cut from -180 (the text is said to forbid one direction twice);
a 361st that closes the circle is accepted. The sense of azimuth is not certain, so a comment states it;
elevation grows upward.
"""

import datetime
import math

import numpy as np

from .. import __version__
from ..exceptions import UsageError
from ._nsma_read import read_nsma
from ._nsma_tags import DESCRIPTIONS, FREE, LENGTHS, LONGEST_POINT, POLARISATIONS, fit
from .cuts import PLANES, Exported, resampled

__all__ = ["read", "write"]

CAUTION_LINES = (
    "Values read from a picture of a chart; not the maker's measured data",
    "Reading error only; the chart's own accuracy is unknown",
    "Not for RF exposure, exclusion zones, coordination, licensing, aviation",
    "No evidence that a direction is safe",
)
SENSE = {"cw": "clockwise", "ccw": "counter-clockwise"}
read = read_nsma


def write(antenna, options):
    """The antenna as `Exported`. Raises `UsageError` where a required field is not known."""
    unknown = [
        word
        for word, value in (("--frequency", antenna.low_mhz), ("--gain", antenna.gain))
        if math.isnan(value)
    ]
    if unknown:
        raise UsageError(
            "the format requires what is not known", remedy=f"give {' and '.join(unknown)}", stage="nsma"
        )
    lost = ["row states and errors (error95_db)"]
    if any((cut.state == "floor").any() for cut in antenna.cuts):
        lost.append("that levels at the chart's centre are upper limits: they are written as plain levels")
    checks = []
    for name, value in (("ELTILT", antenna.tilt_deg), ("AZWIDT", antenna.azimuth_width_deg)):
        if math.isnan(value):
            checks.append(f"{name} is required and not known: written as 0.0")
    for word in {cut.polarisation for cut in antenna.cuts} - {"", *POLARISATIONS}:
        checks.append(f"polarisation {word!r} is not one of the text: {', '.join(POLARISATIONS)}")
    lines = _header(antenna, options)
    by_frequency = {}
    for cut in antenna.cuts:
        frequency = cut.frequency_mhz if math.isfinite(cut.frequency_mhz) else _middle(antenna)
        by_frequency.setdefault(frequency, []).append(cut)
    lines.append(("NOFREQ", str(len(by_frequency))))
    for frequency, cuts in by_frequency.items():
        lines += [("PATFRE", _plain(frequency)), ("NUMCUT", str(len(cuts)))]
        for cut in cuts:
            new, said = resampled(cut, options.step_deg)
            lost += said
            lines += _cut_lines(new, options)
    lines.append(("ENDFIL", "EOF"))
    rows = []
    for tag, value in lines:
        row, changed = fit(tag, value)
        rows.append(row)
        if changed:
            lost.append(f"letters of {tag or 'a comment'} beyond ASCII or its longest line")
    data = "".join(f"{row}\r\n" for row in rows).encode("ascii")
    return Exported(data=data, lost=tuple(dict.fromkeys(lost)), checks=tuple(checks))


def _header(antenna, options):
    """(tag, value) of all fields before the patterns, in the order of the text."""
    extra = dict(antenna.extra)
    points = "as the cuts hold" if math.isnan(options.step_deg) else f"every {options.step_deg:g} degrees"
    known = {  # what the text requires, or what stands in for it
        "REVNUM": "NSMA WG16.99.050",
        "REVDAT": "19990520",
        "COMNT1": f"Azimuth grows {SENSE[options.file_turn]} seen from above; points {points}",
        "COMNT2": f"Elevation grows upward; written by digitise {__version__}",
        "ANTMAN": antenna.maker or "not stated",
        "MODNUM": antenna.model or "not stated",
        "DTDATA": antenna.date or datetime.date.today().strftime("%Y%m%d"),
        "LOWFRQ": _plain(antenna.low_mhz),
        "HGHFRQ": _plain(antenna.high_mhz if math.isfinite(antenna.high_mhz) else antenna.low_mhz),
        "GUNITS": f"{antenna.gain_unit.upper()}/{_data_unit(antenna.cuts)}",
        "MDGAIN": _plain(antenna.gain),
        "AZWIDT": _plain(_or_zero(antenna.azimuth_width_deg)),
        "ELWIDT": _plain(antenna.elevation_width_deg) if math.isfinite(antenna.elevation_width_deg) else "",
        "FRTOBA": f"{antenna.front_to_back_db:.0f}" if math.isfinite(antenna.front_to_back_db) else "",
        "ELTILT": f"{_or_zero(antenna.tilt_deg) + 0.0:.1f},{_or_zero(antenna.tilt_tolerance_deg):.1f}",
        "PATTYP": antenna.pattern_kind or "typical",
    }
    told = dict(zip(DESCRIPTIONS, _descriptions(antenna), strict=False))
    fields = []
    for tag in LENGTHS:
        value = known.get(tag) or told.get(tag) or (extra.get(tag) if tag in FREE else None)
        if value:
            fields.append((tag, value))
        if tag == "PATTYP":
            break
    return fields + [("", f"! {text}") for text in _descriptions(antenna)[len(DESCRIPTIONS) :]]


def _descriptions(antenna):
    """Lines to go with the levels: the caution first, where they were read from a picture."""
    caution = CAUTION_LINES if antenna.from_reading else ()
    return (*caution, *(text for text in antenna.comments if text not in caution))


def _cut_lines(cut, options):
    angle = options.to_file(cut.plane, cut.angle_deg)
    angle = np.where(angle >= 180, angle - 360, angle)
    order = np.argsort(angle, kind="stable")
    designator = cut.designator or dict(zip(PLANES, options.designators.split(","), strict=True)).get(
        cut.plane, "H"
    )
    yield ("PATCUT", designator)
    yield ("POLARI", cut.polarisation or "V/V")
    yield ("NUPOIN", str(len(order)))
    yield ("FSTLST", f"{_signed(angle[order[0]])},{_signed(angle[order[-1]])}")
    for k in order:
        level = f"{cut.level_db[k] + 0.0:.{options.decimals}f}"
        row = f"{_signed(angle[k])},{'0.' + '0' * options.decimals if float(level) == 0 else level},"
        if len(row) > LONGEST_POINT:
            raise ValueError(f"a point of {len(row)} characters: {row}")
        yield ("", row)


def _data_unit(cuts):
    return {"dB": "DBR", "dBi": "DBI", "dBd": "DBD"}[cuts[0].unit]


def _middle(antenna):
    high = antenna.high_mhz if math.isfinite(antenna.high_mhz) else antenna.low_mhz
    return (antenna.low_mhz + high) / 2


def _or_zero(value):
    return value if math.isfinite(value) else 0.0


def _plain(value):
    """A number with one decimal at least and six at most."""
    text = f"{value + 0.0:.6f}".rstrip("0")
    return text + "0" if text.endswith(".") else text


def _signed(angle):
    return "0.000" if abs(angle) < 5e-4 else f"{angle:+.3f}"
