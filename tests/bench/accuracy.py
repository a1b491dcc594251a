"""Read benchmark charts in-process and gather their rows by class."""

import time
from dataclasses import dataclass, field

import numpy as np

from digitise.exceptions import DigitiseError
from digitise.picture import open_picture
from digitise.reading import read_charts
from digitise.settings import ZERO_WORDS, Settings

from . import short_script
from .cases import GROUPS, make_case
from .rows import CLASSES, Rows, judge

GROSS_DB = 0.5  # a median error above this is a wrong reading, as the practice scorer takes it


@dataclass(frozen=True, eq=False, kw_only=True)
class Result:
    """One trace of one chart: its rows, or None and the fault why it could not be read.

    fault : "" or what was raised: a refusal in the tool's own words, or "BROKE: ..." for an unforeseen error
    review : the reading's reasons to look ; seconds : of the reading, picture opened and all
    short_db : absolute errors of the short script on the same trace, dB; empty when it found no circle
    """

    group: str
    name: str
    trace: int
    rows: Rows | None
    fault: str
    review: tuple
    seconds: float
    short_db: np.ndarray = field(default_factory=lambda: np.empty(0))

    @property
    def silently_wrong(self):
        """True when the reading is grossly off and gives no reason to look."""
        return self.rows is not None and not self.review and np.median(np.abs(self.rows.error_db)) > GROSS_DB


def told_settings(chart, ink):
    """Build the settings that a user would give for a painted chart: levels, law, bearing and one ink."""
    return Settings(
        outer_db=chart.outer_db,
        centre_db=chart.centre_db if chart.law == "even" else None,
        law=None if chart.law == "even" else chart.law,
        zero_deg=ZERO_WORDS[chart.zero],
        turn=chart.turn,
        inks=(ink,),
    )


def read_case(case, k, *, short=False):
    """Read the k-th trace of a case, and with `short` also by the short script: a `Result`.

    Several traces may share an ink; then the one that fits the wanted curve best is judged.
    """
    chart = case.page.charts[0]
    rows, fault, review = None, "", ()
    start = time.perf_counter()
    try:
        reading = read_charts(open_picture(case.path), settings=told_settings(chart, case.inks[k]))[0]
    except DigitiseError as error:
        fault = f"refused: {error}"
    except Exception as error:  # a benchmark goes on, and says what broke
        fault = f"BROKE: {error!r}"
    seconds = time.perf_counter() - start
    if not fault:
        review = tuple(reading.review)
        found = [_judge(chart, k, trace.table) for trace in reading.traces]
        found = [item for item in found if len(item.error_db)]
        if found:
            rows = min(found, key=lambda item: float(np.median(np.abs(item.error_db))))
        else:
            fault = "nothing inside the chart was read"
    return Result(
        group=case.group,
        name=case.name,
        trace=k + 1,
        rows=rows,
        fault=fault,
        review=review,
        seconds=seconds,
        short_db=_read_short(case, k) if short and chart.law == "even" else np.empty(0),
    )


def measure(folder, n_charts, *, groups=tuple(GROUPS), say=None):
    """Read `n_charts` of every group, each also by the short script; a list of `Result`."""
    results = []
    for group in groups:
        for number in range(n_charts):
            case = make_case(folder, group, number)
            for k in range(len(case.inks)):
                results.append(read_case(case, k, short=True))
                if say:
                    say(results[-1])
    return results


def table_by_group(results):
    """Lines of text: one row a group, medians and 95th percentiles over all rows of the group's traces."""
    lines = [
        "group         traces read   med dB   p95 dB  inside  width    seen  silent  s/chart"
        " | short: med   p95 dB"
    ]
    for group in [*dict.fromkeys(r.group for r in results), "all"]:
        part = [r for r in results if group in (r.group, "all")]
        read = [r.rows for r in part if r.rows is not None]
        short = np.concatenate([r.short_db for r in part])
        seen = sum(len(r.error_db) for r in read) / max(sum(r.n_wanted for r in read), 1)
        lines.append(
            f"{group:13s} {len(read):5d}/{len(part):<5d} {_figures(read)} {seen:7.1%}"
            f" {sum(r.silently_wrong for r in part):7d} {np.median([r.seconds for r in part]):8.2f}"
            f" | {_quantile(short, 50):10.3f} {_quantile(short, 95):8.2f}"
        )
    return lines


def table_by_class(results, groups=None):
    """Lines of text: one row a class of rows, over the groups given or all."""
    part = [r.rows for r in results if r.rows is not None and (groups is None or r.group in groups)]
    lines = ["class            rows    med dB   p95 dB  inside  width"]
    for kind in CLASSES:
        n = sum(int((rows.kind == kind).sum()) for rows in part)
        lines.append(f"{kind:12s} {n:8d}  {_figures(part, kind)}")
    return lines


def coverage(rows_list, kind=None):
    """Share of rows inside their own error95_db, over several `Rows`, of one class or all; else NaN."""
    error, claimed = _gather(rows_list, kind)
    return float(np.mean(error <= claimed)) if len(error) else np.nan


def _judge(chart, k, table):
    return judge(chart, k, table.angle_deg, table.chart_db, table.error95_db, table.state)


def _read_short(case, k):
    chart = case.page.charts[0]
    levels = short_script.read(
        case.path,
        outer_db=chart.outer_db,
        centre_db=chart.centre_db,
        zero=chart.zero,
        turn=chart.turn,
        ink=case.inks[k],
    )
    if levels is None:
        return np.empty(0)
    none = np.full(360, np.nan)
    return np.abs(judge(chart, k, np.arange(360), levels, none, np.full(360, "seen")).error_db)


def _gather(rows_list, kind=None):
    if not rows_list:
        return np.empty(0), np.empty(0)
    pick = [slice(None) if kind is None else rows.kind == kind for rows in rows_list]
    error = [np.abs(rows.error_db[p]) for rows, p in zip(rows_list, pick, strict=True)]
    claimed = [rows.claimed_db[p] for rows, p in zip(rows_list, pick, strict=True)]
    return np.concatenate(error), np.concatenate(claimed)


def _figures(rows_list, kind=None):
    """Median and 95th percentile of the error, share inside error95_db, median claim over median error."""
    error, claimed = _gather(rows_list, kind)
    if not len(error):
        return "      -        -       -      -"
    width = np.median(claimed) / max(float(np.median(error)), 1e-9)
    median, p95, inside = np.median(error), np.percentile(error, 95), np.mean(error <= claimed)
    return f"{median:8.4f} {p95:8.3f} {inside:7.1%} {width:6.1f}"


def _quantile(values, percent):
    known = values[np.isfinite(values)]
    return float(np.percentile(known, percent)) if len(known) else np.nan
