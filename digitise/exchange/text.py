"""Reading text of unknown origin: bounded, decoded, with refusals that name the file and the line."""

import json
import math

from ..exceptions import PictureError

__all__ = [
    "MAX_BYTES",
    "MAX_CUTS",
    "MAX_POINTS",
    "decode",
    "line_of",
    "malformed",
    "parse_json",
    "take_float",
]

MAX_BYTES = 40_000_000  # a full sphere at one degree in BASTA JSON has about 4 MB
MAX_POINTS = 20_000  # of one cut
MAX_CUTS = 1000


def malformed(source, line, said, remedy="mend the line or ask the sender for the file again"):
    """A refusal of a file, to be raised."""
    where = "" if line is None else f"line {line}: "
    return PictureError(f"{where}{said}", remedy=remedy, stage="exchange", source=source)


def decode(data, source, *, encoding="utf-8-sig"):
    """Text of bytes; refuses too many of them, zero bytes and what is not in the encoding."""
    if len(data) > MAX_BYTES:
        raise malformed(
            source, None, f"larger than {MAX_BYTES // 1_000_000} MB", "no pattern file is so large"
        )
    if not data.strip():
        raise malformed(source, None, "the file is empty")
    try:
        text = data.decode(encoding)
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise malformed(source, line, f"not {encoding.replace('-sig', '').upper()} text") from None
    if "\0" in text:
        raise malformed(source, text[: text.index("\0")].count("\n") + 1, "holds zero bytes: not a text file")
    return text


def take_float(text, source, line, what):
    """A finite number; refuses anything else with the line."""
    try:
        value = float(text.strip().replace("\u2212", "-"))
    except ValueError:
        value = math.nan
    if not math.isfinite(value) or abs(value) > 1e9:
        raise malformed(source, line, f"{what} is not a number ({text.strip()[:20]!r})")
    return value


def parse_json(data, source):
    """The text and the value of JSON bytes, refused with the line when it is not JSON."""
    text = decode(data, source)
    try:
        value = json.loads(text, parse_constant=lambda name: math.nan)
    except json.JSONDecodeError as error:
        raise malformed(source, error.lineno, f"not JSON ({error.msg.lower()})") from None
    except (RecursionError, ValueError):  # ValueError: an integer of thousands of digits
        raise malformed(
            source, None, "not JSON that can be read (nested too deep or a number too long)"
        ) from None
    if not isinstance(value, dict):
        raise malformed(source, 1, "the file is not one JSON object")
    return text, value


def line_of(text, name):
    """The line where a JSON name stands, or None."""
    at = text.find(f'"{name}"')
    return None if at < 0 else text.count("\n", 0, at) + 1
