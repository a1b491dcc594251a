"""The work behind the window, run in its worker thread: open, read what is awaited, settle a grid, save.

Pure functions of frozen states: nothing here knows the window, and nothing is done twice (`digitise.kept`).
"""

import os
import re
from dataclasses import dataclass, replace
from pathlib import Path

from digitise._sheet import cut_sheet
from digitise.correct import grid_by_hand, place_labels, settle_grid
from digitise.exceptions import DigitiseError, NotReadError, PictureError, UsageError
from digitise.find import Box, box_around, find_charts
from digitise.grid import find_grid
from digitise.ink import find_inks
from digitise.kept import Kept
from digitise.outputs import make_files, write_file, write_whole
from digitise.picture import open_picture
from digitise.reading import read_chart
from digitise.record import read_record, settings_as_told
from digitise.settings import Settings

from .state import Chart, Seen, State

__all__ = [
    "NeedsPictureError",
    "Saved",
    "complete",
    "open_source",
    "place_grid",
    "quick",
    "save_charts",
    "settle",
]

RECORD_END = ".json"


class NeedsPictureError(DigitiseError):
    """A record was opened whose picture is not beside it; `source` is the record."""


@dataclass(frozen=True, kw_only=True)
class Saved:
    """What was saved: outputs.Written, the folder, the numbers of the charts left out as not read."""

    written: object
    folder: str
    left_out: tuple = ()


def open_source(path, *, page=None, crop=None, picture_path=None, pasted=False):
    """Open a picture or a record and read it; a complete `State`.

    page, crop : as in `Settings`; pasted : the file is a passing one
    picture_path : the picture that goes with a record, when it is not beside it
    Raises `PictureError`, or `NeedsPictureError` for a record whose picture is elsewhere.
    """
    path = os.fspath(path)
    if path.lower().endswith(RECORD_END):
        return _open_record(path, picture_path)
    picture = open_picture(path, page=page)
    template = Settings(page=page, crop=crop)
    return complete(State(picture=picture, kept=Kept(), template=template, source=path, pasted=pasted))


def complete(state):
    """Find the charts if they are awaited, and read every one that is, the one worked on first."""
    if state.charts is None:
        state = _find(state)
    charts = list(state.charts)
    for k in sorted(range(len(charts)), key=lambda k: k != state.at):
        if not charts[k].done:
            charts[k] = _read(state, charts[k])
    return replace(state, charts=tuple(charts))


def quick(state):
    """Read quickly the chart worked on, from what its earlier reading found; None where nothing is gained.

    After a change of grid, pins or covers only the inks that had a trace are followed, and labels are moved
    with the grid instead of read anew. The whole reading follows, and alone is saved.
    """
    chart = state.chart
    if chart is None or chart.done or chart.earlier is None or not chart.earlier.traces:
        return None
    told, earlier = chart.settings, chart.earlier
    if all(getattr(told, name) == getattr(earlier.settings, name) for name in ("grid", "pins", "covers")):
        return None  # the traces are there already
    labels = place_labels(earlier.labels, earlier.grid, told.grid or earlier.grid)
    inks = told.inks or tuple(dict.fromkeys(trace.ink for trace in earlier.traces))
    try:
        reading = read_chart(
            state.picture, chart.box, settings=replace(told, inks=inks), kept=state.kept, labels=labels
        )
    except DigitiseError:
        return None  # the whole reading tells why
    charts = list(state.charts)
    charts[state.at] = replace(chart, quick=_numbered(reading, told))
    return replace(state, charts=tuple(charts))


def settle(state, grid):
    """The grid settled on the drawn lines; as it is where there are none."""
    try:
        return settle_grid(state.picture, grid)
    except NotReadError:
        return grid


def place_grid(state, centre_x, centre_y, outer_px):
    """The grid whose centre and outermost ring were drawn by hand: found there, or as drawn."""
    picture = state.picture
    by_hand = grid_by_hand(centre_x, centre_y, outer_px)
    try:
        found = find_grid(picture, box_around(by_hand, picture))
        near = abs(found.centre_x - centre_x) + abs(found.centre_y - centre_y) < 0.2 * outer_px
        if near and abs(found.outer_px - outer_px) < 0.1 * outer_px:
            return found
    except DigitiseError:
        pass
    return settle(state, by_hand)


def save_charts(state, folder):
    """Write the files of every chart that was read, as `digitise read` does; a `Saved`.

    A pasted picture is written beside them, so that the record finds it again.
    """
    readings = tuple(chart.reading for chart in state.charts if chart.reading is not None)
    if not readings:
        raise UsageError(
            "no chart is read yet", remedy="mend what is said beside the fields", stage="outputs"
        )
    left_out = tuple(k for k, chart in enumerate(state.charts, 1) if chart.reading is None)
    target = Path(folder) / os.path.basename(state.picture.path)
    if state.pasted and target.exists() and target.read_bytes() != Path(state.picture.path).read_bytes():
        raise UsageError(
            "is there already", remedy="name another folder", stage="outputs", source=str(target)
        )
    written = write_whole(make_files(readings), folder)
    if state.pasted and not target.exists():
        write_file(target, Path(state.picture.path).read_bytes())
    return Saved(written=written, folder=os.fspath(folder), left_out=left_out)


def _find(state):
    """The state with its charts found, each with the settings of the one that was there before."""
    template, picture = state.template, state.picture
    boxes = state.kept.result(_charts_in, picture, template.crop)
    if not boxes:
        fault = NotReadError(
            "no polar chart was found on the picture", stage="find",
            remedy="with the tool Grid, drag from a chart's centre to its outermost ring",
        )  # fmt: skip
        return replace(state, charts=(), at=0, fault=fault)
    charts = []
    for number, box in enumerate(boxes, 1):
        settings = _settings_there(box, state.before) or template
        chart = (number, len(boxes)) if len(boxes) > 1 else None
        charts.append(
            Chart(settings=replace(settings, crop=template.crop, page=template.page, chart=chart), box=box)
        )
    at = min(state.at, len(charts) - 1)
    return replace(state, charts=tuple(charts), at=at, before=(), fault=None)


def _charts_in(picture, crop):
    return find_charts(picture, crop=crop)


def _settings_there(box, before):
    """Settings of the chart that stood at this place, or None."""
    for chart in before:
        apart = abs(chart.box.centre_x - box.centre_x) + abs(chart.box.centre_y - box.centre_y)
        if apart < 0.5 * box.outer_px:
            return chart.settings
    return None


def _read(state, chart):
    """The chart with its reading, or with what stopped it and what was found all the same."""
    picture, kept, settings = state.picture, state.kept, chart.settings
    try:
        reading = read_chart(picture, chart.box, settings=settings, kept=kept)
        reading = _numbered(reading, settings)
        return replace(chart, reading=reading, seen=_look(state, reading.grid), quick=None, earlier=None)
    except DigitiseError as fault:
        return replace(chart, fault=fault, seen=_look_anyway(state, chart), quick=None, earlier=None)


def _numbered(reading, settings):
    if settings.chart is None:
        return reading
    return replace(reading, number=settings.chart[0], n_charts=settings.chart[1])


def _look_anyway(state, chart):
    try:
        grid = chart.settings.grid or state.kept.result(find_grid, state.picture, chart.box)
    except DigitiseError:
        return Seen()
    try:
        return _look(state, grid)
    except DigitiseError:
        return Seen(grid=grid)


def _look(state, grid):
    """The grid with the inks found on it."""
    return state.kept.result(_seen, state.picture, grid, kept=state.kept)


def _seen(picture, grid, *, kept):
    sheet = kept.result(cut_sheet, picture, grid, large=True)
    return Seen(grid=grid, inks=find_inks(sheet))


def _open_record(path, picture_path):
    """A record and its picture; the records of the picture's other charts beside it are taken up too."""
    record = read_record(path)
    name = re.split(r"[/\\]", record["chart"]["file"])[-1]  # a bare name, whatever the record says
    beside = Path(path).parent / name
    if picture_path is None:
        if not name or not beside.is_file():
            raise NeedsPictureError(
                f"its picture {name} is not beside it", remedy="show where it is", source=path
            )
        picture_path = beside
    told = _told(record, path)
    picture = open_picture(picture_path, page=told.page)
    if picture.sha256 != record["chart"]["sha256"]:
        raise PictureError(
            "is not the picture that the record was made from",
            remedy="open the picture itself to read it anew",
            stage="record",
            source=os.fspath(picture_path),
        )
    state = State(
        picture=picture,
        kept=Kept(),
        template=Settings(page=told.page, crop=told.crop, step_deg=told.step_deg),
        source=path,
        at=record["chart"]["number"] - 1,
    )
    if told.grid is not None and told.chart is None:
        chart = Chart(settings=told, box=_recorded_box(record, told.grid, picture))
        return complete(replace(state, charts=(chart,), at=0))
    state = _find(state)
    wanted = _siblings(path, record)
    number, of = record["chart"]["number"], record["chart"]["of"]
    if len(state.charts) != of:
        raise PictureError(
            f"is of chart {number} of {of}, and {len(state.charts)} were found",
            remedy="open the picture itself to read it anew", stage="record", source=path,
        )  # fmt: skip
    charts = [
        replace(chart, settings=wanted[number]) if number in wanted else chart
        for number, chart in enumerate(state.charts, 1)
    ]
    return complete(replace(state, charts=tuple(charts)))


def _recorded_box(record, grid, picture):
    region = record["chart"].get("region")
    if isinstance(region, list) and len(region) == 4 and all(isinstance(value, int) for value in region):
        x, y, w, h = region
        if 0 <= x and 0 <= y and 0 < w <= picture.width - x and 0 < h <= picture.height - y:
            return Box(
                x=x,
                y=y,
                w=w,
                h=h,
                centre_x=grid.centre_x,
                centre_y=grid.centre_y,
                outer_px=grid.outer_px,
                score=1.0,
            )
    return box_around(grid, picture)


def _siblings(path, record):
    """Number of a chart -> its settings, from this record and those beside it of the same picture."""
    number, of = record["chart"]["number"], record["chart"]["of"]
    wanted = {number: _told(record, path)}
    parts = re.fullmatch(rf"(.*-){number}(\.record\.json)", os.path.basename(path))
    for other in range(1, of + 1) if parts else ():
        beside = Path(path).parent / f"{parts[1]}{other}{parts[2]}"
        if other == number or not beside.is_file():
            continue
        try:
            sibling = read_record(beside)
            if (sibling["chart"]["sha256"], sibling["chart"]["number"]) == (record["chart"]["sha256"], other):
                wanted[other] = _told(sibling, beside)
        except DigitiseError:
            continue  # a broken record of another chart does not keep this one from opening
    return wanted


def _told(record, path):
    try:
        return settings_as_told(record)
    except UsageError as error:
        raise PictureError(
            f"holds settings that cannot be right: {error.cause}",
            remedy="open the picture itself to read it anew",
            stage="record",
            source=os.fspath(path),
        ) from None
