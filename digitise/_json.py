"""JSON as the records hold it: exact numbers, no NaN, short lists on one line; and typed look-up in it."""

import json
import math

__all__ = ["Malformed", "take", "take_number", "take_numbers", "to_plain", "to_text"]


class Malformed(ValueError):
    """What was read does not hold what it should; the message names the place."""


def to_plain(value, digits=None):
    """Arrays, tuples and non-finite numbers as JSON knows them; floats to so many significant digits."""
    if hasattr(value, "tolist"):
        value = value.tolist()
    if isinstance(value, dict):
        return {str(key): to_plain(item, digits) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [to_plain(item, digits) for item in value]
    if isinstance(value, float):
        if not math.isfinite(value):
            return None
        return value if digits is None else float(f"{value:.{digits}g}")
    return value


def to_text(value, indent=""):
    """JSON text: a line for every name, lists of plain values on one line."""
    inner = indent + " "
    if isinstance(value, dict) and value:
        lines = [f"{inner}{json.dumps(key)}: {to_text(item, inner)}" for key, item in value.items()]
        return "{\n" + ",\n".join(lines) + "\n" + indent + "}"
    if isinstance(value, list) and any(isinstance(item, (dict, list)) for item in value):
        return "[\n" + ",\n".join(inner + to_text(item, inner) for item in value) + "\n" + indent + "]"
    return json.dumps(value, allow_nan=False, ensure_ascii=False)


def take(node, name, kind, *, default=...):
    """`node[name]`, which must be of type `kind`; `name` may be dotted; a default is for an absent one."""
    at = node
    for part in name.split("."):
        if not isinstance(at, dict) or part not in at:
            if default is not ...:
                return default
            raise Malformed(f"{name} is missing")
        at = at[part]
    if not isinstance(at, kind) or (isinstance(at, bool) and kind is not bool):
        said = kind.__name__ if isinstance(kind, type) else " or ".join(item.__name__ for item in kind)
        raise Malformed(f"{name} is not of kind {said}")
    return at


def take_number(node, name, *, or_null=False, default=...):
    """A finite number as float; with `or_null`, NaN for a null."""
    value = take(node, name, (int, float, type(None)) if or_null else (int, float), default=default)
    if value is default and default is not ...:
        return default
    return _number(value, name, or_null=or_null)


def take_numbers(node, name, shape):
    """A list (of lists) of finite numbers, as float; an entry of `shape` may be None for any length."""
    return _numbers(take(node, name, list), name, shape)


def _numbers(value, name, shape):
    if not shape:
        return _number(value, name)
    if not isinstance(value, list) or (shape[0] is not None and len(value) != shape[0]):
        raise Malformed(f"{name} is not a list of {'numbers' if shape[0] is None else shape[0]}")
    return [_numbers(item, name, shape[1:]) for item in value]


def _number(value, name, *, or_null=False):
    if value is None and or_null:
        return math.nan
    try:
        number = float(value) if isinstance(value, (int, float)) and not isinstance(value, bool) else math.nan
    except OverflowError:
        number = math.nan
    if not math.isfinite(number):
        raise Malformed(f"{name} is not a finite number")
    return number
