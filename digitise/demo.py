"""The shipped sample pictures, and how far a reading of one lies from its known curve.

Each sample NAME.png or NAME.jpg has a NAME.json (what a user would tell, and its curves) and a known curve a
trace. Known curves are used to judge a reading after it is done, never to make it.
"""

import csv
import json
from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path

import numpy as np

__all__ = ["Curve", "Sample", "Score", "samples", "score_reading"]

WITHOUT_VALUE = ("missing", "floor")
LEAST_RHO, MOST_RHO = 0.02, 1.02  # radii, in outer radii, where a level of the known curve is on the chart


@dataclass(frozen=True, eq=False, kw_only=True)
class Curve:
    """A known curve.

    chart : number of its chart on the picture, from 1; name : as in the legend
    angle_deg, chart_db : (n,) whole bearings that are drawn, and the level at each
    """

    chart: int
    name: str
    angle_deg: np.ndarray
    chart_db: np.ndarray


@dataclass(frozen=True, eq=False, kw_only=True)
class Sample:
    """A sample picture.

    path : the file; about : one sentence; options : what a user would tell, as on the command line
    curves : tuple of Curve
    """

    path: Path
    about: str
    options: tuple
    curves: tuple


@dataclass(frozen=True, kw_only=True)
class Score:
    """How a table compares with its known curve, where the curve is on the chart (above its centre).

    median_db, p95_db : of the absolute difference; inside : share of rows within their own 95 % error
    rows : share of these bearings that have a value
    """

    median_db: float
    p95_db: float
    inside: float
    rows: float


def samples():
    """Every shipped sample, in the order of their names."""
    found = []
    folder = Path(str(files("digitise.samples")))
    for path in sorted(folder.glob("*.json")):
        told = json.loads(path.read_text(encoding="utf-8"))
        curves = tuple(_curve(folder / item["known"], item) for item in told["curves"])
        options = tuple(told["options"])
        found.append(
            Sample(path=folder / told["picture"], about=told["about"], options=options, curves=curves)
        )
    return tuple(found)


def score_reading(readings, curve):
    """The best `Score` among the traces of the curve's chart; None when none of them can be compared."""
    charts = [item for item in readings if item.number == curve.chart]
    scores = [_score(trace.table, item.scale, curve) for item in charts for trace in item.traces]
    return min((score for score in scores if score), key=lambda score: score.median_db, default=None)


def _score(table, scale, curve):
    row = np.minimum(np.searchsorted(table.angle_deg, curve.angle_deg), len(table.angle_deg) - 1)
    rho = scale.rho(curve.chart_db)
    drawn = (rho > LEAST_RHO) & (rho <= MOST_RHO) & (np.abs(table.angle_deg[row] - curve.angle_deg) < 1e-6)
    read = drawn & ~np.isin(table.state[row], WITHOUT_VALUE)
    if not read.any():
        return None
    off = np.abs(table.chart_db[row] - curve.chart_db)[read]
    return Score(
        median_db=float(np.median(off)),
        p95_db=float(np.percentile(off, 95)),
        inside=float(np.mean(off <= table.error95_db[row][read])),
        rows=float(read.sum() / drawn.sum()),
    )


def _curve(path, item):
    with open(path, newline="", encoding="utf-8") as file:
        rows = [(float(row["angle_deg"]), float(row["chart_db"])) for row in csv.DictReader(file)]
    angle_deg, chart_db = np.array(rows).T
    return Curve(chart=item["chart"], name=item["name"], angle_deg=angle_deg, chart_db=chart_db)
