#!/usr/bin/env python3
"""How well printed labels are read, by class: right and wrong labels, seconds, and what comes of them.

Charts are painted by lot (tests/draw) with known ring levels and bearings. For every class the script prints,
of the ring and rim labels printed: read right, read wrong (with odds above one half), and lost minus signs;
the processor seconds a chart; and of the charts: scale and bearing right, right with a review reason,
refused, WRONG and silent. What engines were tried and why this one is used stands in LABELS.md beside this
file.
"""

import argparse
import collections
import sys
import tempfile
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from digitise.bearing import make_bearing
from digitise.exceptions import DigitiseError
from digitise.find import find_charts
from digitise.grid import find_grid
from digitise.labels import read_labels
from digitise.picture import open_picture
from digitise.scale import make_scale
from digitise.settings import Settings
from tests.draw import Page, paint, random_page, rho_of, spoil, write_case
from tests.draw.spec import TOP, level_of

RENDERERS = ("matplotlib", "pillow", "opencv-fine")
# class: (spoiling recipe or None, what is fixed on the page)
CLASSES = {
    "clean": (None, {"outer_px": 260}),
    "large": (None, {"outer_px": 420}),
    "tiny": (None, {"outer_px": 130}),
    "small": ("small", {"outer_px": 330}),
    "jpeg": ("jpeg", {"outer_px": 260}),
    "rotate": ("rotate", {"outer_px": 260}),
    "scan": ("scan", {"outer_px": 260}),
    "fax": ("fax", {"outer_px": 260, "paper": "white", "grid": "mid", "n_traces": 1}),
    "blur": ("blur", {"outer_px": 260}),
}
SEED = 52000
PROBE_RHO = np.array([1.0, 0.7, 0.4, 0.25])
RIGHT_DB, RIGHT_DEG = 0.3, 0.5


def read_case(folder, name, number):
    """Paint, spoil and read one chart; its counts, or None when no grid is found."""
    recipe, fixed = CLASSES[name]
    rng = np.random.default_rng(SEED + number)
    page: Page = random_page(rng, **fixed)
    rgb, save, suffix = paint(page, renderer=RENDERERS[number % len(RENDERERS)]), {}, "png"
    if recipe:
        spoiled = spoil(rgb, recipe, rng)
        rgb, save, suffix = spoiled.rgb, spoiled.save_options(), spoiled.suffix
    picture = open_picture(write_case(folder, f"{name}-{number}", rgb, [], suffix=suffix, **save))
    boxes = find_charts(picture)
    if not boxes:
        return None
    try:
        grid = find_grid(picture, boxes[0])
    except DigitiseError:
        return None
    start = time.process_time()
    labels = read_labels(picture, boxes[0], grid)
    counts = collections.Counter(seconds=time.process_time() - start, charts=1)
    _count_labels(page.charts[0], labels, counts)
    counts[f"scale {_scale_outcome(page.charts[0], grid, labels)}"] += 1
    counts[f"bearing {_bearing_outcome(page.charts[0], grid, labels)}"] += 1
    return counts


def _count_labels(chart, labels, counts):
    if chart.ring_labels is not None:
        radii = rho_of(chart.law, np.array(chart.ring_db), chart.outer_db, chart.centre_db)
        counts["ring printed"] += len(chart.ring_db)
        for label in labels.with_role("ring"):
            near = int(np.argmin(np.abs(radii - label.ring_rho)))
            true = chart.ring_db[near] if abs(radii[near] - label.ring_rho) < 0.02 else None
            counts["ring right"] += label.value == true
            counts["ring wrong"] += label.value != true and label.confidence > 0.5
            counts["ring sign lost"] += true is not None and label.value == -true and true != 0
    for label in labels.with_role("rim"):
        off = (label.value - _bearing_at(chart, label.plane_deg) + 180) % 360 - 180
        counts["rim right" if abs(off) < 5 else "rim wrong"] += 1


def _bearing_at(chart, plane_deg):
    return (plane_deg - TOP[chart.zero]) * (1 if chart.turn == "cw" else -1)


def _scale_outcome(chart, grid, labels):
    try:
        scale = make_scale(grid, settings=Settings(), labels=labels)
    except DigitiseError:
        return "refused"
    true = level_of(chart.law, PROBE_RHO, chart.outer_db, chart.centre_db)
    right = np.abs(scale.level(PROBE_RHO) - true).max() < RIGHT_DB
    return ("right" if right else "WRONG") + (" flagged" if scale.reasons else "")


def _bearing_outcome(chart, grid, labels):
    bearing = make_bearing(grid, settings=Settings(), labels=labels)
    off = (bearing.zero_deg - TOP[chart.zero] + 180) % 360 - 180
    right = abs(off) < RIGHT_DEG and bearing.turn == chart.turn
    return ("right" if right else "WRONG") + (" flagged" if bearing.reasons else "")


def main(argv=None):
    """Print the table; the exit status is 1 when a chart is wrong and silent."""
    parser = argparse.ArgumentParser(
        description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument(
        "classes", nargs="*", metavar="CLASS", help=f"of {', '.join(CLASSES)}; all by default"
    )
    parser.add_argument("-n", type=int, default=6, help="charts a class (6)")
    options = parser.parse_args(argv)
    unknown = set(options.classes) - set(CLASSES)
    if unknown:
        parser.error(f"no class {', '.join(sorted(unknown))}")
    columns = ("scale right", "scale right flagged", "scale refused", "scale WRONG flagged", "scale WRONG")
    columns += ("bearing right", "bearing right flagged", "bearing WRONG flagged", "bearing WRONG")
    print(
        "| class | charts | ring right | ring wrong | sign lost | rim right | rim wrong | s | "
        + " | ".join(columns)
        + " |"
    )
    print("|---" * (8 + len(columns)) + "|")
    silent = 0
    with tempfile.TemporaryDirectory() as folder:
        read_case(folder, "clean", 0)  # loads the engine
        for name in options.classes or CLASSES:
            total = sum(
                (read_case(folder, name, k) or collections.Counter() for k in range(options.n)),
                collections.Counter(),
            )
            n, printed = max(1, total["charts"]), max(1, total["ring printed"])
            shares = [f"{total[key] / printed:.2f}" for key in ("ring right", "ring wrong", "ring sign lost")]
            cells = [name, str(total["charts"]), *shares, str(total["rim right"]), str(total["rim wrong"])]
            cells += [f"{total['seconds'] / n:.1f}", *(str(total[key]) for key in columns)]
            print("| " + " | ".join(cells) + " |", flush=True)
            silent += total["scale WRONG"] + total["bearing WRONG"]
    return 1 if silent else 0


if __name__ == "__main__":
    sys.exit(main())
