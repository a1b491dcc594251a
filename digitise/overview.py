"""What is on a picture, without reading a trace: charts, grid, labels, scale, bearing and inks.

Nothing that is lacking stops the look: what a reading would have to be told stands in the chart's `troubles`.
"""

import os
from dataclasses import dataclass

from ._record_parts import bearing_part, grid_part, labels_part, scale_part, software_part
from ._sheet import cut_sheet
from .bearing import make_bearing
from .exceptions import DigitiseError, NotReadError
from .find import find_charts
from .grid import find_grid
from .ink import find_inks
from .labels import read_labels
from .scale import make_scale

__all__ = ["FORMAT", "Overview", "look_at", "overview_json"]

FORMAT = "digitise-look/1"


@dataclass(frozen=True, eq=False, kw_only=True)
class Overview:
    """One chart as far as it is known before a trace is read.

    number : from 1, in reading order; box : its place
    grid, labels, scale, bearing : the stages' results, None where a stage could not go on
    inks : tuple of ink.Ink, the longest drawn first; grid and text are among them
    troubles : tuple of str, what stopped a stage, with the option that helps
    """

    number: int
    box: object
    grid: object = None
    labels: object = None
    scale: object = None
    bearing: object = None
    inks: tuple = ()
    troubles: tuple = ()

    @property
    def review(self):
        """Reasons to look at what was found, as sentences."""
        stages = (self.grid, self.scale, self.bearing)
        return [str(item) for stage in stages if stage is not None for item in stage.reasons]


def look_at(picture, *, settings):
    """Look at every chart of a `Picture`; a tuple of `Overview`.

    Raises `NotReadError` when there is no chart.
    """
    boxes = find_charts(picture, crop=settings.crop)
    if not boxes:
        raise NotReadError(
            "no polar chart was found on the picture",
            stage="find",
            remedy="cut the chart out with --crop X,Y,W,H",
        )
    return tuple(_look_at_chart(picture, box, number, settings) for number, box in enumerate(boxes, 1))


def _look_at_chart(picture, box, number, settings):
    found, troubles = {}, []
    try:
        grid = found["grid"] = find_grid(picture, box)
        labels = found["labels"] = read_labels(picture, box, grid)
        found["inks"] = find_inks(cut_sheet(picture, grid))
    except DigitiseError as error:
        return Overview(number=number, box=box, troubles=(str(error),), **found)
    for name, stage in (("scale", make_scale), ("bearing", make_bearing)):
        try:
            found[name] = stage(grid, settings=settings, labels=labels)
        except DigitiseError as error:
            troubles.append(str(error))
    return Overview(number=number, box=box, troubles=tuple(troubles), **found)


def overview_json(picture, charts):
    """What was seen, as plain JSON values."""
    return {
        "format": FORMAT,
        "software": software_part(),
        "picture": {
            "file": os.path.basename(picture.path),
            "sha256": picture.sha256,
            "kind": picture.kind,
            "size": [picture.width, picture.height],
            "page": picture.page,
            "notes": list(picture.notes),
        },
        "charts": [_chart_json(chart) for chart in charts],
    }


def _chart_json(chart):
    return {
        "number": chart.number,
        "region": [chart.box.x, chart.box.y, chart.box.w, chart.box.h],
        "grid": None if chart.grid is None else grid_part(chart.grid),
        "labels": labels_part(chart.labels),
        "scale": None if chart.scale is None else scale_part(chart.scale),
        "bearing": None if chart.bearing is None else bearing_part(chart.bearing),
        "inks": [
            {"ink": ink.hex, "length_px": round(float(ink.length_px), 1), "neutral": bool(ink.neutral)}
            for ink in chart.inks
        ],
        "troubles": list(chart.troubles),
        "review": chart.review,
    }
