"""The open exchange formats, one module each: `write(antenna, options)` and `read(data, source, options)`.

    nsma      NSMA Recommendation WG16.99.050, tagged text, any number of cuts
    sigmf     antenna extension of a SigMF metadata file, one azimuth and one elevation cut
    basta     NGMN BASTA pattern JSON, one cut a file
    field     relative-field table as 47 CFR 73.316 asks for: 10-degree steps and every maximum and minimum
    plain     comma-separated angle and level

A module's `write` returns `Exported` (bytes and what they cannot hold), `read` an `Antenna`. What a
published text leaves open is a field of `ExchangeOptions` with its default stated there.
"""

import importlib

from ..exceptions import UsageError

__all__ = ["FORMATS", "format_module", "guess_format"]

FORMATS = {  # name -> (module, ending of the file name, one file holds several cuts)
    "nsma": ("nsma", ".nsma.txt", True),
    "sigmf": ("sigmf", ".sigmf-meta", True),
    "basta": ("basta", ".basta.json", False),
    "field": ("relative_field", ".field.csv", False),
    "plain": ("plain", ".plain.csv", False),
}


def format_module(name):
    """The module of a format; raises `UsageError` for a name that is none."""
    if name not in FORMATS:
        raise UsageError(f"{name!r} is no exchange format", remedy=f"choose from {', '.join(FORMATS)}")
    return importlib.import_module(f"digitise.exchange.{FORMATS[name][0]}")


def guess_format(data):
    """The format of a file's bytes by its content: a name of FORMATS, or "table" for the tool's own."""
    head = data[:4096].decode("latin-1").lstrip("\ufeff\xef\xbb\xbf \t\r\n")
    first = head.split("\n", 1)[0].strip().lower()
    if head[:1] == "{":
        return "sigmf" if '"global"' in data[:65536].decode("latin-1") else "basta"
    if head.upper().startswith("REVNUM:") or first.startswith("!"):
        return "nsma"
    names = [name.strip() for name in first.split(",")]
    if "angle_deg" in names and "error95_db" in names and "chart_db" in names:
        return "table"
    return "field" if "relative_field" in names and "point" in names else "plain"
