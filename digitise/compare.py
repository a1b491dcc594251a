"""Two tables against each other: the difference at every bearing with its error, and what it amounts to.

The two readings are taken to be independent, so that their errors add as squares (JCGM 100:2008, 5.1.2).
Two traces of one chart share its grid and scale; their difference is then surer than said here.
"""

import csv
import io
import math
from dataclasses import dataclass

import numpy as np

from .caution import CAUTION_SHORT
from .exceptions import UsageError
from .frozen import lock_arrays

__all__ = ["LEVELS", "Comparison", "compare_tables", "comparison_csv", "comparison_json", "comparison_text"]

LEVELS = ("relative", "chart")
CSV_COLUMNS = ("table", "against", "angle_deg", "difference_db", "error95_db", "state")


@dataclass(frozen=True, eq=False, kw_only=True)
class Comparison:
    """The second table less the first, where both have a value.

    angle_deg : (n,) bearings of the first table
    difference_db : (n,) NaN where either is missing
    error95_db : (n,) half-width of its 95 % interval
    state : (n,) str; "seen" when both were, else "bridged", "floor" or "missing" as the worse of the two
    mean_db, rms_db : over the rows that are no limits; NaN when there is none
    largest_db, largest_deg : the difference farthest from 0 and its bearing
    outside_share : share of those rows whose difference is beyond its error
    n_rows : how many those rows are
    """

    angle_deg: np.ndarray
    difference_db: np.ndarray
    error95_db: np.ndarray
    state: np.ndarray
    mean_db: float
    rms_db: float
    largest_db: float
    largest_deg: float
    outside_share: float
    n_rows: int

    def __post_init__(self):
        lock_arrays(self)


def compare_tables(first, second, *, level="relative", turn_deg=0.0):
    """Compare two `Table`.

    Parameters
    ----------
    level : "relative" for dB under each trace's own peak, "chart" for dB as printed on the rings
    turn_deg : added to the second table's bearings first

    The second table is read on straight lines between its rows where its bearings are not those of the first.

    """
    if level not in LEVELS or not math.isfinite(turn_deg):
        raise UsageError(f"level {level!r} or turn {turn_deg!r} is not known", stage="compare")
    other = _at(second, first.angle_deg - turn_deg, level)
    own = {"level": getattr(first, f"{level}_db"), "error": first.error95_db, "state": first.state}
    difference = other["level"] - own["level"]
    error = np.hypot(other["error"], own["error"])
    state = _worse(own["state"], other["state"])
    sure = np.isin(state, ("seen", "bridged"))
    kept = difference[sure]
    at = int(np.argmax(np.abs(np.where(sure, difference, 0.0)))) if kept.size else 0
    return Comparison(
        angle_deg=first.angle_deg,
        difference_db=difference,
        error95_db=error,
        state=state,
        mean_db=float(kept.mean()) if kept.size else math.nan,
        rms_db=float(np.sqrt(np.mean(kept**2))) if kept.size else math.nan,
        largest_db=float(difference[at]) if kept.size else math.nan,
        largest_deg=float(first.angle_deg[at]) if kept.size else math.nan,
        outside_share=float(np.mean(np.abs(kept) > error[sure])) if kept.size else math.nan,
        n_rows=int(kept.size),
    )


def comparison_csv(names, comparisons):
    """CSV text: every row of every comparison; the first of the names is what the others are against."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(CSV_COLUMNS)
    for name, item in zip(names[1:], comparisons, strict=True):
        for angle, value, error, state in zip(
            item.angle_deg, item.difference_db, item.error95_db, item.state, strict=True
        ):
            numbers = ("", "") if math.isnan(value) else (f"{value + 0.0:.3f}", f"{error:.3f}")
            writer.writerow((name, names[0], f"{angle:.6f}".rstrip("0").rstrip("."), *numbers, state))
    return out.getvalue()


def comparison_json(names, comparisons):
    """Plain values for JSON, without the rows."""
    fields = ("mean_db", "rms_db", "largest_db", "largest_deg", "outside_share", "n_rows")
    return [
        {"table": name, "against": names[0], **{field: getattr(item, field) for field in fields}}
        for name, item in zip(names[1:], comparisons, strict=True)
    ]


def comparison_text(names, comparisons):
    """Lines that say what the differences amount to."""
    for name, item in zip(names[1:], comparisons, strict=True):
        if not item.n_rows:
            yield f"{name} - {names[0]}: no bearing where both have a value"
            continue
        yield (
            f"{name} - {names[0]}: mean {item.mean_db:+.2f} dB, rms {item.rms_db:.2f} dB, "
            f"largest {item.largest_db:+.2f} dB at {item.largest_deg:g} deg; "
            f"{item.outside_share:.0%} of {item.n_rows} rows differ by more than their errors"
        )
    yield "Errors of two readings are added as independent. " + CAUTION_SHORT


def _at(table, angle_deg, level):
    """Level, error and state at other bearings, on straight lines; a limit or a gap beside one stays one."""
    n = len(table.angle_deg)
    place = np.round((np.asarray(angle_deg) % 360) * n / 360, 6)
    low = np.floor(place).astype(int)
    share, high = place - low, (low + 1) % n
    low %= n
    high = np.where(share == 0, low, high)
    levels, errors = getattr(table, f"{level}_db"), table.error95_db
    return {
        "level": (1 - share) * levels[low] + share * levels[high],
        "error": np.maximum(errors[low], errors[high]),  # near rows share most of their error
        "state": _worse(table.state[low], table.state[high]),
    }


def _worse(one, other):
    state = np.full(len(one), "seen", dtype="U8")
    for word in ("bridged", "floor", "missing"):
        state[(one == word) | (other == word)] = word
    return state
