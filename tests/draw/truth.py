"""What is true of a painted page, in the layout of the practice set, and writing a case to a folder."""

import json
from pathlib import Path

import numpy as np
from PIL import Image

from .spec import drawn_curve

ABSENT_DB = -999.0  # level written where a curve is not drawn
CLEAR_DB = -200.0


def truth_of(page, k=0, *, spoiled=None, renderer=""):
    """Tell the truth of the k-th chart of a page as a dict ready for JSON.

    centre_px, outer_radius_px (x, y), rotation_deg : the printed circle is the unit circle turned by
    rotation_deg (clockwise) and then stretched to the two radii; under a perspective these hold at the
    chart's centre only
    homography : (3, 3) picture as painted -> picture as spoiled, or absent
    """
    chart = page.charts[k]
    centre, radii, turn_deg = (chart.centre_x, chart.centre_y), (chart.outer_px, chart.outer_px), 0.0
    if spoiled is not None:
        centre, radii, turn_deg = _through(spoiled.homography, chart)
    truth = {
        "renderer": renderer,
        "traces": [_trace(chart, trace, spoiled) for trace in chart.traces],
        "zero": chart.zero,
        "turn": chart.turn,
        "ring_db": [float(db) for db in chart.ring_db],
        "outer_db": float(chart.outer_db),
        "centre_db": float(chart.centre_db),
        "law": chart.law,
        "centre_px": [float(v) for v in centre],
        "outer_radius_px": [float(v) for v in radii],
        "rotation_deg": float(turn_deg),
        "labels": chart.ring_labels is not None,
        "note": "half chart" if chart.half else page.note,
    }
    if page.crops:
        truth["crop"] = _crop(page.crops[k], spoiled)
    if spoiled is not None:
        truth["degrade"] = {"recipe": spoiled.recipe}
        truth["homography"] = spoiled.homography.tolist()
    return truth


def write_case(folder, name, rgb, truths, *, suffix="png", **save):
    """Write a picture and one truth file a chart beside it; returns the picture's path."""
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / f"{name}.{suffix}"
    image = Image.fromarray(rgb)
    if suffix == "gif":
        image = image.quantize(256, dither=Image.Dither.NONE)
    elif len(np.unique(rgb)) == 2 and set(np.unique(rgb)) == {0, 255} and (rgb == rgb[..., :1]).all():
        image = image.convert("1", dither=Image.Dither.NONE)
    image.save(path, **save)
    for k, truth in enumerate(truths):
        stem = name if len(truths) == 1 else f"{name}-{k}"
        (folder / f"{stem}.truth.json").write_text(json.dumps({"chart": path.name, **truth}))
    return path


def map_points(homography, x, y):
    """Picture px as painted -> as spoiled (arrays)."""
    w = homography[2, 0] * x + homography[2, 1] * y + homography[2, 2]
    return (
        (homography[0, 0] * x + homography[0, 1] * y + homography[0, 2]) / w,
        (homography[1, 0] * x + homography[1, 1] * y + homography[1, 2]) / w,
    )


def _through(homography, chart):
    """Centre, two radii and turn of a chart's circle after a homography, by its derivative at the centre."""
    step = 1e-3
    x, y = chart.centre_x, chart.centre_y
    cx, cy = map_points(homography, x, y)
    ax, ay = map_points(homography, x + step, y)
    bx, by = map_points(homography, x, y + step)
    m = np.array([[ax - cx, bx - cx], [ay - cy, by - cy]]) / step * chart.outer_px
    radii = np.hypot(*m.T)
    unit = m / radii[:, None]
    return (cx, cy), radii, np.degrees(np.arctan2(unit[1, 0] - unit[0, 1], unit[0, 0] + unit[1, 1]))


def _trace(chart, trace, spoiled):
    db = np.round(drawn_curve(chart, trace)[1], 4)
    db = np.where(np.isfinite(db) & (db > CLEAR_DB), db, ABSENT_DB)
    ink = trace.ink if spoiled is None else spoiled.ink(trace.ink)
    dash = "solid" if trace.dash == "fill" else trace.dash
    scale = (
        1.0 if spoiled is None else float(np.mean(_through(spoiled.homography, chart)[1])) / chart.outer_px
    )
    return {
        "label": trace.label,
        "ink": ink,
        "dash": dash,
        "drawn": trace.dash,
        "width_px": round(trace.width * scale, 2),
        "db": db.tolist(),
    }


def _crop(crop, spoiled):
    x, y, w, h = crop
    if spoiled is None:
        return [round(v) for v in crop]
    px, py = map_points(spoiled.homography, np.array([x, x + w, x, x + w]), np.array([y, y, y + h, y + h]))
    left, top = max(0, px.min()), max(0, py.min())
    return [round(float(v)) for v in (left, top, px.max() - left, py.max() - top)]
