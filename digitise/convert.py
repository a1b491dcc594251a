"""From tables to the open exchange formats and back, with what could not be kept."""

import math
import os
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from .exceptions import PictureError, UsageError
from .exchange import FORMATS, format_module, guess_format
from .exchange.cuts import Antenna, cut_from_table, table_from_cut
from .exchange.text import MAX_BYTES
from .figures import figures_of
from .table import read_table, write_table

__all__ = ["Converted", "convert", "load"]

TABLE_ENDING = ".csv"
ENDINGS = (*(ending for _, ending, _ in FORMATS.values()), TABLE_ENDING)


@dataclass(frozen=True, kw_only=True)
class Converted:
    """One file to write.

    name : bare file name; data : bytes; source : the file it comes from
    lost : what the format cannot hold; checks : what a person should look at
    from_reading : True when the levels were read from a picture
    """

    name: str
    data: bytes
    source: str
    lost: tuple = ()
    checks: tuple = ()
    from_reading: bool = False


def load(path, options, *, kind="", level="relative", unit="dB"):
    """An `Antenna` from a file of any format; `kind` of `FORMATS` or "table", "" to tell by the content."""
    path = os.fspath(path)
    data = _read(path)
    kind = kind or guess_format(data)
    if kind == "table":
        return _from_table(path, options, level, unit)
    return format_module(kind).read(data, path, options)


def convert(sources, *, to, options, planes, fronts, facts, kind="", level="relative", unit="dB"):
    """Convert files; a list of `Converted`.

    Parameters
    ----------
    sources : paths; planes : the plane of each, "" for not known; fronts : the bearing in front of each
    to : of `FORMATS` or "table"
    options : ExchangeOptions
    facts : name -> value of fields of `Antenna` that the user told
    kind : format of the sources, "" to tell by the content
    level, unit : of tables: "relative" or "chart", and the unit printed on the chart
    """
    antennas = []
    stands = [
        replace(options, plane=plane, front_deg=front) for plane, front in zip(planes, fronts, strict=True)
    ]
    for path, stand in zip(sources, stands, strict=True):
        antenna = load(path, stand, kind=kind, level=level, unit=unit)
        told = {name: value for name, value in facts.items() if name not in ("polarisation", "frequency_mhz")}
        antenna = replace(antenna, **told, cuts=tuple(_told(cut, facts) for cut in antenna.cuts))
        antennas.append(antenna)
    if to == "table":
        return [item for parts in zip(sources, antennas, stands, strict=True) for item in _tables(*parts)]
    module = format_module(to)
    _, ending, several = FORMATS[to]
    if several:
        return [_one(module, _stem(sources[0]) + ending, sources[0], _joined(antennas), options)]
    made = []
    for path, antenna in zip(sources, antennas, strict=True):
        for cut in antenna.cuts:
            part = f".{_safe(cut.name)}" if len(antenna.cuts) > 1 else ""
            one = replace(antenna, cuts=(cut,))
            made.append(_one(module, _stem(path) + part + ending, path, one, options))
    return made


def _one(module, name, source, antenna, options):
    exported = module.write(antenna, options)
    return Converted(
        name=name,
        data=exported.data,
        source=os.fspath(source),
        lost=exported.lost,
        checks=(*antenna.notes, *exported.checks),
        from_reading=antenna.from_reading,
    )


def _tables(path, antenna, options):
    for cut in antenna.cuts:
        table, said = table_from_cut(cut, options=options)
        part = f".{_safe(cut.name)}" if len(antenna.cuts) > 1 else ""
        yield Converted(
            name=_stem(path) + part + TABLE_ENDING,
            data=write_table(table).encode(),
            source=os.fspath(path),
            lost=("what the file says besides the levels",),
            checks=(*antenna.notes, *said),
            from_reading=antenna.from_reading,
        )


def _from_table(path, options, level, unit):
    """A reading's table as an antenna of one cut, with those of its figures that formats ask for."""
    table = read_table(path)
    plane = options.plane
    cut = cut_from_table(table, options=options, name=_stem(path), level=level, unit=unit)
    up = options.up if plane == "elevation" else ""
    figures = figures_of(
        table, cut=plane, up=up, boresight_deg=options.front_deg if plane == "elevation" else None
    )
    width = figures["beamwidth"].value
    if plane == "azimuth" and not figures["ripple"].absent:
        width = 360.0
    azimuth, tilt_deg = plane == "azimuth", _rounded(figures["tilt"].value)
    notes = ()
    if tilt_deg < -max(0.5, figures["tilt"].error95):
        turned = "falling" if options.up == "growing" else "growing"
        notes = (
            f"the beam points up by {-tilt_deg:.1f} degrees; if it should point down, say --up {turned}",
        )
    return Antenna(
        cuts=(cut,),
        from_reading=True,
        azimuth_width_deg=_rounded(width) if azimuth else math.nan,
        elevation_width_deg=_rounded(width) if plane == "elevation" else math.nan,
        tilt_deg=tilt_deg,
        notes=notes,
        front_to_back_db=_rounded(figures["ftb"].value) if azimuth else math.nan,
    )


def _joined(antennas):
    """One antenna of all cuts; what one does not know is taken from the next."""
    first = antennas[0]
    found = {}
    for name in vars(first):
        values = [getattr(antenna, name) for antenna in antennas]
        if name in ("cuts", "comments", "notes", "extra"):
            found[name] = tuple(dict.fromkeys(item for value in values for item in value))
        elif name == "from_reading":
            found[name] = any(values)
        else:
            known = [v for v in values if v != "" and not (isinstance(v, float) and math.isnan(v))]
            found[name] = known[0] if known else values[0]
    return replace(first, **found)


def _told(cut, facts):
    polarisation = facts.get("polarisation") or cut.polarisation
    frequency = facts.get("frequency_mhz", cut.frequency_mhz)
    return replace(cut, polarisation=polarisation, frequency_mhz=frequency)


def _rounded(value):
    return round(float(value), 2) if np.isfinite(value) else math.nan


def _stem(path):
    """The bare file name without the ending of any format."""
    name = Path(path).name
    ending = next((end for end in sorted(ENDINGS, key=len, reverse=True) if name.lower().endswith(end)), None)
    return name[: -len(ending)] if ending and len(name) > len(ending) else Path(path).stem


def _safe(name):
    """A cut's name as part of a file name."""
    return "".join(letter if letter.isalnum() or letter in "+-" else "_" for letter in name)[:24] or "cut"


def _read(path):
    try:
        with open(path, "rb") as file:
            data = file.read(MAX_BYTES + 1)
    except FileNotFoundError:
        raise PictureError(
            "no such file", remedy="check the name and the folder", stage="convert", source=path
        ) from None
    except (OSError, ValueError) as error:
        said = getattr(error, "strerror", None) or str(error)
        raise PictureError(f"cannot be opened ({said})", stage="convert", source=path) from None
    if len(data) > MAX_BYTES:
        raise PictureError("larger than any pattern file", stage="convert", source=path)
    if not data.strip():
        raise UsageError(
            "the file is empty", remedy="name a table or a pattern file", stage="convert", source=path
        )
    return data
