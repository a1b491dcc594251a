"""Antenna extension (v1.0.0) of a SigMF metadata file: dBi at azimuth 0..359 and elevation -90..90.

The two patterns and the gain are as in the extension's specification; the frame around them (a
metadata-only file of core version 1.0.0) is from memory. Levels are absolute, so the gain must be known.
"""

import math

import numpy as np

from .._json import to_plain, to_text
from ..caution import CAUTION
from ..exceptions import UsageError
from .cuts import DBI_OVER_DBD, Antenna, Cut, Exported, levels_at
from .text import line_of, malformed, parse_json

__all__ = ["read", "write"]

VERSION = "1.0.0"
PATTERNS = {  # plane -> (name, the file's angles)
    "azimuth": ("antenna:horizontal_gain_pattern", np.arange(360.0)),
    "elevation": ("antenna:vertical_gain_pattern", np.arange(-90.0, 91.0)),
}
NUMBERS = {  # name -> field of Antenna
    "antenna:low_frequency": "low_mhz",
    "antenna:high_frequency": "high_mhz",
    "antenna:horizontal_beam_width": "azimuth_width_deg",
    "antenna:vertical_beam_width": "elevation_width_deg",
}
IN_HZ = ("antenna:low_frequency", "antenna:high_frequency")


def write(antenna, options):
    """An antenna with one cut a plane as `Exported`."""
    if not math.isfinite(antenna.gain):
        raise UsageError(
            "the format's levels are absolute and the gain is not known", remedy="give --gain DBI"
        )
    planes = [cut.plane for cut in antenna.cuts]
    if "" in planes or len(set(planes)) != len(planes):
        raise UsageError(
            "the format holds one azimuth and one elevation cut", remedy="say which is which with --cut"
        )
    node = {
        "core:datatype": "cf32_le",
        "core:version": "1.0.0",
        "core:metadata_only": True,
        "core:extensions": [{"name": "antenna", "version": VERSION, "optional": True}],
        "antenna:model": antenna.model or "not stated",
        "antenna:gain": round(antenna.gain_dbi, 6),
    }
    if antenna.from_reading:
        node["core:description"] = CAUTION
    if antenna.comments:
        node["core:comment"] = "\n".join(antenna.comments)
    for name, attribute in NUMBERS.items():
        value = getattr(antenna, attribute)
        if math.isfinite(value):
            node[name] = value * 1e6 if name in IN_HZ else value
    lost = ["row states and errors (error95_db)", "the maker, date and polarisation"]
    if any((cut.state == "floor").any() for cut in antenna.cuts):
        lost.append("that levels at the chart's centre are upper limits")
    for cut in antenna.cuts:
        levels, said = _pattern(cut, antenna, options)
        node[PATTERNS[cut.plane][0]] = [round(float(value), options.decimals) for value in levels]
        lost += said
    text = to_text(to_plain({"global": node, "captures": [], "annotations": []})) + "\n"
    return Exported(data=text.encode(), lost=tuple(dict.fromkeys(lost)))


def read(data, source, options):
    """An `Antenna`; raises `PictureError`, with the line where a field is malformed."""
    text, whole = parse_json(data, source)
    node = whole.get("global")
    if not isinstance(node, dict):
        raise malformed(source, line_of(text, "global"), "no global object: is it a SigMF metadata file?")
    cuts = []
    for plane, (name, angles) in PATTERNS.items():
        if name not in node:
            continue
        levels = _numbers(node[name], len(angles), name, text, source)
        bearing = options.of_file(plane, angles)
        order = np.argsort(bearing, kind="stable")
        decimals = max(_decimals(value) for value in node[name])
        cuts.append(
            Cut(
                plane=plane, name="H" if plane == "azimuth" else "V", unit="dBi",
                rounding_db=0.5 * 10.0**-decimals,
                angle_deg=bearing[order], level_db=levels[order], error95_db=np.full(len(order), np.nan),
                state=np.full(len(order), "seen", dtype="U8"),
            )
        )  # fmt: skip
    if not cuts:
        raise malformed(source, line_of(text, "global"), "no antenna pattern in the file")
    values = {
        attribute: _number(node, name, text, source) / (1e6 if name in IN_HZ else 1)
        for name, attribute in NUMBERS.items()
    }
    comment = node.get("core:comment")
    return Antenna(
        cuts=tuple(cuts),
        model=str(node.get("antenna:model", ""))[:200],
        gain=_number(node, "antenna:gain", text, source),
        comments=tuple(comment.splitlines()) if isinstance(comment, str) else (),
        **values,
    )


def _pattern(cut, antenna, options):
    """Absolute levels at every degree that the format has, and what was lost on the way."""
    angles = PATTERNS[cut.plane][1]
    wanted = options.of_file(cut.plane, angles)
    levels, worked_out = levels_at(cut, wanted)
    if np.isnan(levels).any():
        gap = float(wanted[np.argmax(np.isnan(levels))])
        raise UsageError(
            f"the {cut.plane} cut has no value at {gap:g} deg, and the format has no word for that",
            remedy="read it whole, or choose another format",
        )
    lost = (
        [f"the {cut.plane} cut's own points: worked out every degree on straight lines"] if worked_out else []
    )
    if cut.plane == "elevation" and np.ptp(cut.angle_deg) > 180:
        lost.append("the back half of the elevation cut")
    if cut.unit == "dBi":
        return levels, lost
    if cut.unit == "dBd":
        return levels + DBI_OVER_DBD, lost
    return levels - np.max(cut.level_db) + antenna.gain_dbi, lost


def _numbers(value, n, name, text, source):
    line = line_of(text, name)
    if not isinstance(value, list) or len(value) != n:
        size = len(value) if isinstance(value, list) else "no list"
        raise malformed(source, line, f"{name} must have {n} numbers, not {size}")
    good = [
        isinstance(item, (int, float)) and not isinstance(item, bool) and abs(item) < 1e9 for item in value
    ]
    if not all(good):
        raise malformed(
            source, line, f"{name} holds something that is no number, at place {good.index(False) + 1}"
        )
    return np.array(value, float)


def _number(node, name, text, source):
    value = node.get(name)
    if value is None:
        return math.nan
    if not isinstance(value, (int, float)) or isinstance(value, bool) or not abs(value) < 1e15:
        raise malformed(source, line_of(text, name), f"{name} is not a number")
    return float(value)


def _decimals(value):
    return min(len(repr(value).partition(".")[2]), 12) if isinstance(value, float) else 0
