"""Read benchmark charts in-process and gather their rows by class."""

import time
import warnings

import numpy as np

from digitise.exceptions import DigitiseError
from digitise.picture import open_picture
from digitise.reading import read_charts
from digitise.settings import ZERO_WORDS, Settings

from . import short_script
from .cases import GROUPS, make_case
from .rows import CLASSES, judge


def told_settings(chart, ink):
    """What a user would be told about a painted chart: levels, law, bearing and one ink."""
    return Settings(
        outer_db=chart.outer_db,
        centre_db=chart.centre_db if chart.law == "even" else None,
        law=None if chart.law == "even" else chart.law,
        zero_deg=ZERO_WORDS[chart.zero],
        turn=chart.turn,
        inks=(ink,),
    )


def read_case(case, k):
    """Read the k-th trace of a case: (`Rows`, seconds, fault); the rows are None when it could not be read.

    The fault is "" or what was raised: a refusal in the tool's own words, or the name of an unforeseen error.
    Several traces may share an ink; then the one that fits the wanted curve best is judged.
    """
    chart = case.page.charts[0]
    start = time.perf_counter()
    try:
        reading = read_charts(open_picture(case.path), settings=told_settings(chart, case.inks[k]))[0]
    except DigitiseError as error:
        return None, time.perf_counter() - start, f"refused: {error}"
    except Exception as error:  # a benchmark goes on, and says what broke
        return None, time.perf_counter() - start, f"BROKE: {error!r}"
    seconds = time.perf_counter() - start
    tables = [trace.table for trace in reading.traces]
    rows = [judge(chart, k, t.angle_deg, t.chart_db, t.error95_db, t.state) for t in tables]
    rows = [item for item in rows if len(item.error_db)]
    if not rows:
        return None, seconds, "nothing inside the chart was read"
    return min(rows, key=lambda item: float(np.median(np.abs(item.error_db)))), seconds, ""


def read_short(case, k):
    """Absolute errors (n,) of the short script on the same trace, dB; empty when it found no circle."""
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


def measure(folder, n_charts, *, groups=tuple(GROUPS), say=None):
    """Read `n_charts` of every group; a list of dicts, one a trace, for `table_by_group` and `table_by_class`."""
    results = []
    for group in groups:
        for number in range(n_charts):
            case = make_case(folder, group, number)
            for k in range(len(case.inks)):
                rows, seconds, fault = read_case(case, k)
                short = read_short(case, k) if case.page.charts[0].law == "even" else np.empty(0)
                results.append(
                    {
                        "group": group,
                        "name": case.name,
                        "k": k,
                        "rows": rows,
                        "seconds": seconds,
                        "fault": fault,
                        "short": short,
                    }
                )
                if say:
                    say(results[-1])
    return results


def table_by_group(results):
    """Lines of text: one row a group, medians and 95th percentiles over all rows of the group's traces."""
    lines = [
        "group          traces read   med dB   p95 dB  inside  width  seen    s/chart | short: med dB   p95 dB",
    ]
    for group in [*dict.fromkeys(r["group"] for r in results), "all"]:
        part = [r for r in results if group in (r["group"], "all")]
        read = [r["rows"] for r in part if r["rows"] is not None]
        short = np.concatenate([r["short"] for r in part]) if part else np.empty(0)
        wanted = sum(rows.n_wanted for rows in read)
        lines.append(
            f"{group:13s} {len(read):4d}/{len(part):<4d} {_figures(read)} {sum(len(r.error_db) for r in read) / max(wanted, 1):6.1%}"
            f" {np.median([r['seconds'] for r in part]):8.2f} | {_quantile(short, 50):13.3f} {_quantile(short, 95):8.2f}"
        )
    return lines


def table_by_class(results, groups=None):
    """Lines of text: one row a class of rows, over the groups given or all."""
    part = [r["rows"] for r in results if r["rows"] is not None and (groups is None or r["group"] in groups)]
    lines = ["class            rows    med dB   p95 dB  inside  width"]
    for kind in CLASSES:
        n = sum(int((rows.kind == kind).sum()) for rows in part)
        lines.append(f"{kind:12s} {n:8d}  {_figures(part, kind)}")
    return lines


def coverage(rows_list, kind=None):
    """Share of rows inside their own error95_db, over several `Rows`, of one class or all; NaN without rows."""
    error, claimed = _gather(rows_list, kind)
    return float(np.mean(error <= claimed)) if len(error) else np.nan


def _gather(rows_list, kind=None):
    if not rows_list:
        return np.empty(0), np.empty(0)
    pick = [slice(None) if kind is None else rows.kind == kind for rows in rows_list]
    error = np.concatenate([np.abs(rows.error_db[p]) for rows, p in zip(rows_list, pick)])
    return error, np.concatenate([rows.claimed_db[p] for rows, p in zip(rows_list, pick)])


def _figures(rows_list, kind=None):
    """Median and 95th percentile of the error, share inside error95_db, median claim over median error."""
    error, claimed = _gather(rows_list, kind)
    if not len(error):
        return "      -        -       -      -"
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", RuntimeWarning)
        width = np.nanmedian(claimed) / max(float(np.median(error)), 1e-9)
    return f"{np.median(error):8.4f} {np.percentile(error, 95):8.3f} {np.mean(error <= claimed):7.1%} {width:6.1f}"


def _quantile(values, percent):
    known = values[np.isfinite(values)]
    return float(np.percentile(known, percent)) if len(known) else np.nan
