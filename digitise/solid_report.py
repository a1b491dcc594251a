"""A whole-sphere estimate as lines of text, as CSV and as JSON values, always labelled as an estimate."""

import io
import math

import numpy as np

from .caution import CAUTION, CAUTION_SHORT
from .solid import SOURCES

__all__ = ["ESTIMATE", "solid_csv", "solid_json", "solid_text"]

ESTIMATE = "ESTIMATE from two cuts: off the cuts no figure is better than several dB"


def solid_csv(solid):
    """CSV text, a row a direction: azimuth_deg, elevation_deg, estimated_relative_db, source."""
    out = io.StringIO()
    out.write("azimuth_deg,elevation_deg,estimated_relative_db,source\n")
    azimuth = [f"{value:.6f}".rstrip("0").rstrip(".") for value in solid.azimuth_deg]
    for row, tall in enumerate(solid.elevation_deg):
        height = f"{tall + 0.0:.6f}".rstrip("0").rstrip(".")
        for column in np.argsort(solid.azimuth_deg, kind="stable"):
            level = round(float(solid.relative_db[row, column]), 2) + 0.0
            out.write(f"{azimuth[column]},{height},{level:.2f},{SOURCES[solid.source[row, column]]}\n")
    return out.getvalue()


def solid_text(solid, names, check=None):
    """Lines: directivity with both parts of its error, other methods, what was assumed, limits, caution."""
    row, column = np.unravel_index(int(np.argmax(solid.relative_db)), solid.relative_db.shape)
    yield f"{ESTIMATE}."
    yield f"cuts         {names[0]} (azimuth), {names[1]} (elevation)"
    yield f"method       {solid.method}: {solid.limits}"
    yield (
        f"directivity  {solid.directivity_dbi:.2f} dBi, +- {max(solid.error95_db, 0.01):.2f} dB from "
        f"the reading of the cuts; the methods differ by {solid.spread_db:.1f} dB ({_others(solid)})"
    )
    across, tall = solid.azimuth_deg[column], solid.elevation_deg[row]
    yield f"peak         azimuth {across:g} deg, elevation {tall:g} deg"
    if math.isfinite(solid.gap_behind_db):
        gap = solid.gap_behind_db
        yield f"behind       the elevation cut is {gap:+.1f} dB against the azimuth cut where they meet"
    for sentence in solid.assumed:
        yield f"assumed      {sentence}"
    if check:
        yield f"gain         {check.verdict}: {check.sentence}"
    yield CAUTION_SHORT


def solid_json(solid, names, check=None):
    """Plain values for JSON, without the directions."""
    node = {
        "format": "digitise-solid/1",
        "label": ESTIMATE,
        "caution": CAUTION,
        "azimuth": names[0],
        "elevation": names[1],
        "method": solid.method,
        "limits": solid.limits,
        "directivity_dbi": round(solid.directivity_dbi, 3),
        "reading_error95_db": round(solid.error95_db, 3),
        "spread_of_methods_db": round(solid.spread_db, 3),
        "directivity_by_method_dbi": {
            name: None if value is None else round(value, 3) for name, value in solid.others_dbi.items()
        },
        "gap_behind_db": round(solid.gap_behind_db, 3) if math.isfinite(solid.gap_behind_db) else None,
        "assumed": list(solid.assumed),
    }
    if check:
        node["gain"] = {"stated_dbi": check.gain_dbi, "verdict": check.verdict, "because": check.sentence}
    return node


def _others(solid):
    return ", ".join(
        f"{name} {'not possible' if value is None else f'{value:.2f}'}"
        for name, value in solid.others_dbi.items()
    )
