"""The record: a JSON file that holds all that is needed to repeat or audit a reading.

Numbers that a later reading takes over (scale, bearing, what the user told) are written exactly, so that
`--like` on the same picture gives the same table to the last digit; per-row parts of the error are for the
eye and are rounded. A record names files by their bare names only, and nothing that a record says is ever
opened or written.
"""

import json
import os
from dataclasses import replace

import numpy as np

from ._json import Malformed, take, take_number, take_numbers, to_plain, to_text
from ._record_parts import bearing_part, grid_back, grid_part, labels_part, scale_part, software_part
from .bearing import Bearing
from .budget import PARTS
from .caution import CAUTION
from .exceptions import DigitiseError, PictureError
from .review import REASONS, reason
from .scale import Scale
from .settings import LAWS, Mark, Settings
from .table import STATES

__all__ = ["FORMAT", "make_record", "read_record", "settings_as_told", "settings_from_record", "write_record"]

FORMAT = "digitise-record/1"
MAX_RECORD_BYTES = 50_000_000  # ten traces at the finest step have about 5 MB
N_PARAMETERS = {"even": 2, "field": 2, "power": 2, "log-periodic": 2, "rings": 0}
FROM_RECORD = "record"
ROW_DIGITS = 3  # significant digits of the per-row parts of the error


def make_record(reading, *, tables):
    """The record of one chart, as plain JSON values.

    Parameters
    ----------
    reading : Reading
    tables : the table file's bare name for every trace
    """
    picture = reading.picture
    cut = _cut_named(reading.caption)
    return {
        "format": FORMAT,
        "software": software_part(),
        "caution": CAUTION,
        "chart": {
            "file": os.path.basename(picture.path),
            "sha256": picture.sha256,
            "kind": picture.kind,
            "size": [picture.width, picture.height],
            "page": picture.page,
            "crop": to_plain(reading.settings.crop),
            "number": reading.number,
            "of": reading.n_charts,
            "region": [reading.box.x, reading.box.y, reading.box.w, reading.box.h],
            "caption": reading.caption,
            "cut": cut,
            "notes": list(picture.notes),
        },
        "told": _told(reading.settings),
        "grid": grid_part(reading.grid),
        "scale": scale_part(reading.scale),
        "bearing": bearing_part(reading.bearing),
        "labels": labels_part(reading.labels),
        "traces": [_trace(trace, name, cut) for trace, name in zip(reading.traces, tables, strict=True)],
        "review": reading.review,
    }


def write_record(record):
    """The record as JSON text."""
    return to_text(record) + "\n"


def read_record(path):
    """Read a record file back as plain JSON values, checked; raises `PictureError` when it is malformed."""
    try:
        with open(path, "rb") as file:
            data = file.read(MAX_RECORD_BYTES + 1)
    except FileNotFoundError:
        raise _refusal(path, "no such file", "check the name and the folder") from None
    except (OSError, ValueError) as error:
        raise _refusal(
            path, f"cannot be opened ({getattr(error, 'strerror', None) or error})", "name a record"
        ) from None
    try:
        if len(data) > MAX_RECORD_BYTES:
            raise Malformed("larger than any record")
        record = json.loads(data.decode("utf-8-sig"), parse_constant=_no_constant)
        _check(record)
    except (ValueError, RecursionError) as error:  # ValueError: not UTF-8, not JSON, or `Malformed`
        said = str(error) if isinstance(error, Malformed) else "it is not JSON text"
        raise _refusal(
            path, f"is not a {FORMAT}: {said}", "name a .record.json file as digitise read wrote it"
        ) from None
    return record


def settings_from_record(path, *, sha256=None):
    """The `Settings` of an earlier record, for the same template or the same picture.

    The scale and the bearing are taken over as they were found, and what was told besides levels and angles
    as it was told. What belongs to one picture alone (the grid, pins, the page, which of its charts) is taken
    only when `sha256`, that of the picture to be read now, is the record's own: then nothing is measured anew
    that the rows hang on, and the table comes out the same.
    """
    record = read_record(path)
    try:
        told = record["told"]
        same = sha256 == record["chart"]["sha256"]
        return Settings(
            scale=_scale_back(record["scale"]),
            bearing=_bearing_back(record["bearing"]),
            inks=tuple(told.get("inks", ())),
            covers=_tuples(told.get("covers", ())),
            crop=_tuples(told.get("crop")),
            step_deg=told.get("step_deg", 1.0),
            pins=_tuples(told.get("pins", ())) if same else (),
            page=told.get("page") if same else None,
            grid=_grid_back(record["grid"]) if same else None,
            grid_from=told.get("grid", FROM_RECORD),
            chart=(record["chart"]["number"], record["chart"]["of"])
            if same and record["chart"]["of"] > 1
            else None,
        )
    except DigitiseError as error:
        raise _refusal(
            path, f"holds settings that cannot be right: {error.cause}", "make the record anew"
        ) from None


def settings_as_told(record):
    """The `Settings` that a record was made with, to take up the same picture's reading where it was left.

    Unlike `settings_from_record` what the tool had found itself is left to be found again.

    record : as `read_record` returns it; raises `UsageError` when the settings contradict each other
    """
    told, chart = record["told"], record["chart"]
    plain = (
        "outer_db",
        "centre_db",
        "law",
        "zero_deg",
        "turn",
        "page",
        "ring_levels",
        "inks",
        "covers",
        "pins",
        "crop",
    )
    x_y_db = ("x_px", "y_px", "level_db")
    return Settings(
        **{name: _tuples(told[name]) for name in plain if name in told},
        marks=tuple(Mark(**dict(zip(x_y_db, values, strict=True))) for values in told.get("marks", ())),
        step_deg=told.get("step_deg", 1.0),
        scale=_scale_back(record["scale"]) if record["scale"].get("source") == FROM_RECORD else None,
        bearing=_bearing_back(record["bearing"]) if record["bearing"].get("source") == FROM_RECORD else None,
        grid=_grid_back(record["grid"]) if "grid" in told else None,
        grid_from=told.get("grid", FROM_RECORD),
        chart=(chart["number"], chart["of"]) if chart["of"] > 1 else None,
    )


def _told(settings):
    """What the user fixed, by the names of `Settings`; what was left to the tool is absent."""
    told = {}
    for name in ("outer_db", "centre_db", "law", "zero_deg", "turn", "page", "crop"):
        if getattr(settings, name) is not None:
            told[name] = to_plain(getattr(settings, name))
    for name in ("ring_levels", "inks", "covers", "pins"):
        if getattr(settings, name):
            told[name] = to_plain(getattr(settings, name))
    if settings.marks:
        told["marks"] = [[mark.x_px, mark.y_px, mark.level_db] for mark in settings.marks]
    if settings.grid is not None:
        told["grid"] = settings.grid_from
    told["step_deg"] = settings.step_deg
    return told


def _cut_named(caption):
    """The cut that the caption names, or "" when it names none or both; H- and E-plane say neither."""
    named = [cut for cut in ("azimuth", "elevation") if cut in caption.lower()]
    return named[0] if len(named) == 1 else ""


def _trace(trace, table_name, cut):
    from .figures import figures_of

    table, budget = trace.table, trace.budget
    known = np.isfinite(table.chart_db)
    peak = int(np.nanargmax(table.chart_db)) if known.any() else None
    return {
        "ink": trace.ink,
        "dash": trace.dash,
        "name": trace.name,
        "width_px": to_plain(float(trace.width_px), 4),
        "table": table_name,
        "peak_db": None if peak is None else round(float(table.chart_db[peak]), 3) + 0.0,
        "peak_deg": None if peak is None else round(float(table.angle_deg[peak]), 6),
        "median_error95_db": to_plain(_median(table.error95_db), 4),
        "rows": {state: int(np.sum(table.state == state)) for state in STATES},
        "figures": to_plain(figures_of(table, cut=cut).to_json()),
        "budget": {
            "coverage_factor": budget.coverage_factor,
            "median_u_db": {part: to_plain(_median(getattr(budget, part)), 4) for part in PARTS},
            "rows_u_db": {part: to_plain(getattr(budget, part), ROW_DIGITS) for part in PARTS},
        },
        "review": [str(item) for item in trace.reasons],
    }


def _median(values):
    finite = np.asarray(values)[np.isfinite(values)]
    return float(np.median(finite)) if finite.size else float("nan")


def _check(record):
    """Raise `Malformed` where the record lacks what a later reading or the window would take from it."""
    if not isinstance(record, dict) or record.get("format") != FORMAT:
        raise Malformed(f"its format is not {FORMAT}")
    digest = take(record, "chart.sha256", str)
    if len(digest) != 64:
        raise Malformed("chart.sha256 is not a sha256")
    take(record, "chart.file", str)
    if not 1 <= take(record, "chart.number", int) <= take(record, "chart.of", int):
        raise Malformed("chart.number is not one of the charts")
    take_numbers(record, "chart.size", (2,))
    take_numbers(record, "grid.homography", (3, 3))
    for trace in take(record, "traces", list):
        take(trace, "ink", str)
        take(trace, "table", str)
    if not all(isinstance(item, str) for item in take(record, "review", list)):
        raise Malformed("review is not a list of strings")
    _grid_back(take(record, "grid", dict))
    _scale_back(take(record, "scale", dict))
    _bearing_back(take(record, "bearing", dict))
    _check_told(take(record, "told", dict))


def _check_told(told):
    for name, shape in (
        ("ring_levels", (None,)),
        ("crop", (4,)),
        ("covers", (None, 4)),
        ("pins", (None, 2)),
        ("marks", (None, 3)),
    ):
        if name in told:
            take_numbers(told, name, shape)
    if not all(isinstance(ink, str) for ink in take(told, "inks", list, default=[])):
        raise Malformed("inks is not a list of colours")
    for name in ("step_deg", "outer_db", "centre_db", "zero_deg"):
        take_number(told, name, default=0.0)
    for name in ("law", "turn", "grid"):
        take(told, name, str, default="")
    take(told, "page", int, default=1)


def _grid_back(node):
    return replace(grid_back(node), reasons=_reasons_back(node))


def _scale_back(node):
    law = take(node, "law", str)
    if law not in LAWS:
        raise Malformed(f"scale.law is not one of {', '.join(LAWS)}")
    n = N_PARAMETERS[law]
    anchors_rho, anchors_db = (
        take_numbers(node, "anchor_rho", (None,)),
        take_numbers(node, "anchor_db", (None,)),
    )
    if len(anchors_rho) != len(anchors_db) or (law == "rings" and len(anchors_rho) < 2):
        raise Malformed("scale.anchor_rho and scale.anchor_db do not match")
    return Scale(
        law=law,
        parameters=np.array(take_numbers(node, "parameters", (n,)), float),
        covariance=np.array(take_numbers(node, "covariance", (n, n)), float).reshape(n, n),
        anchor_rho=np.array(anchors_rho, float),
        anchor_db=np.array(anchors_db, float),
        unit=take(node, "unit", str),
        residual_px=take_number(node, "residual_px", or_null=True),
        source=FROM_RECORD,
        reasons=_reasons_back(node),
    )


def _bearing_back(node):
    turn = take(node, "turn", str)
    if turn not in ("cw", "ccw"):
        raise Malformed("bearing.turn is not cw or ccw")
    return Bearing(
        zero_deg=take_number(node, "zero_deg"),
        turn=turn,
        u_deg=take_number(node, "u_deg"),
        source=FROM_RECORD,
        signed=take(node, "signed", bool, default=False),
        reasons=_reasons_back(node),
    )


def _reasons_back(node):
    reasons = []
    for item in take(node, "reasons", list, default=[]):
        code = take(item, "code", str)
        if code not in REASONS:
            raise Malformed(f"{code[:30]!r} is not a review reason")
        reasons.append(reason(code, take_number(item, "value"), take(item, "detail", str, default="")))
    return tuple(reasons)


def _tuples(value):
    return tuple(_tuples(item) for item in value) if isinstance(value, (list, tuple)) else value


def _no_constant(name):
    raise Malformed(f"{name} is not a number")


def _refusal(path, cause, remedy):
    return PictureError(cause, remedy=remedy, stage="record", source=os.fspath(path))
