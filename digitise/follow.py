"""Follow one trace: the cheapest closed path over its ink in the unwrapped plane, then sub-pixel along the normal.

The unwrapped plane has a column an angle (about 1 px apart on the rim) and a row a pixel of radius. Ink is cheap,
paper dear, what hides ink nearly as dear as paper; a path that leaves ink of its own unexplained above it pays, since
a pattern has a single level a bearing and its lines merge towards the centre: there the outer edge tells the level.
"""

from dataclasses import dataclass

import cv2
import numpy as np

from ._dashes import bridge_dashes, find_pieces
from ._path import cheapest_path
from ._refine import refine_course
from .frozen import lock_arrays

__all__ = ["Trace", "follow_trace"]

HIDDEN_WORTH = 0.15  # how much better than paper a hidden place is
GAP_WORTH = 0.95  # worth of a bridged dash gap, of a full line
SPECK_WORTH = 0.25  # worth of ink in loose pieces, of ink in a line
TOO_DEEP = 0.5  # cost of running deeper in solid ink than the line is wide
LEFT_ABOVE = 0.4  # cost of leaving ink above the path
FLOOR_COST = 0.8  # cost of the centre: dearer than dashes, cheaper than bare paper
HUB_RHO = 0.08  # nearer to the centre lines merge and prove nothing
HUB_WIDTHS = 4.0  # nearer to the centre than this many line widths, flanks of lobes merge
SAMPLES_PER_DEG = 20  # of the level curve that rows are read from


@dataclass(frozen=True, eq=False, kw_only=True)
class Trace:
    """One followed trace, on evenly spaced plane angles.

    plane_deg : (n,) plane angles
    rho : (n,) radius, NaN where missing
    u_px : (n,) standard uncertainty of the line's place along its normal, sheet px, where it is seen
    u_bridge_px : (n,) the same from ink that is hidden, missing or merged; at the centre, of the radius itself
    slope : (n,) d rho / d plane angle, per degree
    radial_share : (n,) how much of a shift along the normal is radial, 0 to 1 (cosine of the line's slant)
    state : (n,) str, one of table.STATES
    clear : (n,) bool, the line stands alone there: its whole profile was seen
    support : share of the path, away from the centre, on ink or on a bridged gap of dashes
    dash : "solid", "dashed" or "dotted", by the pieces of ink that were bridged
    width_px : drawn line width, sheet px; sheet_outer_px : sheet px per unit rho
    """

    plane_deg: np.ndarray
    rho: np.ndarray
    u_px: np.ndarray
    u_bridge_px: np.ndarray
    slope: np.ndarray
    radial_share: np.ndarray
    state: np.ndarray
    clear: np.ndarray
    support: float
    dash: str
    width_px: float
    sheet_outer_px: float

    def __post_init__(self):
        lock_arrays(self)


def follow_trace(layer, sheet, frame, *, fill=0.0, pins=(), solid=False):
    """Follow the strongest trace of a `Layer`.

    Parameters
    ----------
    layer : ink.Layer; sheet : _sheet.Sheet; frame : _frame.Frame of the sheet
    fill : coverage of the trace's own filled area, 0 when not filled
    pins : tuple of (rho, plane_deg) that the trace goes through
    solid : look for a solid line: dashes count little and their gaps are not bridged

    Returns
    -------
    Trace on SAMPLES_PER_DEG samples a degree, or None when there is no ink to follow
    """
    reference = _line_peak(layer, sheet)
    if reference is None:
        return None
    lifted = np.clip((layer.cover - fill) / (1 - fill), 0, 1) if fill else layer.cover
    pieces = find_pieces(lifted, layer.hidden, sheet, reference, text_like=layer.neutral)
    faint = pieces.speck | pieces.dash if solid else pieces.speck
    lifted = np.where(faint, SPECK_WORTH * lifted, lifted)
    bridged = [bridge_dashes(lifted, pieces, reference)] if pieces.dashed and not solid else []
    deep, width = _depth(lifted, reference)
    evidence, hidden, depth, *bridged = (frame.unwrap(m) for m in (lifted, layer.hidden, deep, *bridged))
    ink = np.clip((evidence - 0.15 * reference) / (0.5 * reference), 0, 1)
    if bridged:
        np.maximum(ink, GAP_WORTH * np.clip((bridged[0] - 0.3) / 0.4, 0, 1), out=ink)
    _apply_pins(ink, hidden, frame, pins)
    floor_rows = int(width * frame.reduction / 2 + 2)
    cost, paper = _costs(ink, hidden, depth, floor_rows)
    enter, leave = cheapest_path(cost, paper, closed=frame.whole)
    if np.mean(np.maximum(enter, leave) < floor_rows) > 0.98:
        return None
    return _trace_from_path(enter, leave, frame, layer, sheet, floor_rows, fill, ink, "solid" if solid else pieces.style)


def _line_peak(layer, sheet):
    """Typical coverage on the line's crest: below 1 for lines thinner than a pixel or blurred; None without ink."""
    c = layer.cover
    crest = (c >= np.roll(c, 1, 0)) & (c >= np.roll(c, -1, 0)) | (c >= np.roll(c, 1, 1)) & (c >= np.roll(c, -1, 1))
    strong = c[crest & (c > 0.2) & (sheet.rho < 1.03)]
    if strong.size < 0.2 * sheet.outer_px:
        return None
    return float(np.clip(np.percentile(strong, 60), 0.3, 1.0))


def _apply_pins(ink, hidden, frame, pins):
    """Make a pinned place certain and the rest of its columns bare."""
    for rho, plane_deg in pins:
        column = int(np.argmin(np.abs((frame.angles - plane_deg + 180) % 360 - 180)))
        row = int(np.clip(round(rho * frame.outer_rows), 0, ink.shape[1] - 1))
        near = slice(max(column - 1, 0), column + 2)
        ink[near] = 0
        hidden[near] = 0
        ink[near, max(row - 2, 0) : row + 3] = 1


def _depth(cover, level):
    """How deep in solid ink each pixel lies beyond what one line explains, 0 to 1, and the line's width, px."""
    solid = (cover > 0.5 * level).astype(np.uint8)
    depth = cv2.distanceTransform(solid, cv2.DIST_L2, 3)
    crest = depth[(depth > 0) & (depth >= cv2.dilate(depth, np.ones((3, 3), np.uint8)))]
    width = 2 * float(np.median(crest)) if crest.size else 2.0
    return np.clip((depth - 0.7 * width - 0.5) / (0.5 * width), 0, 1).astype(np.float32), width


def _costs(ink, hidden, depth, floor_rows):
    """Cost of crossing each cell, and its bareness for climbing, both (n_columns, n_rows) float32."""
    solid = ink > 0.5
    # Ink counts as left above once paper parts it from the path: a flank's own ink does not.
    ends = np.zeros(solid.shape, bool)
    ends[:, :-1] = solid[:, 1:] & ~solid[:, :-1]
    above = np.logical_or.accumulate(ends[:, ::-1], axis=1)[:, ::-1]
    # Solid ink between a cell and the outer end of its run: the level lies further out.
    solid_rows, depth_rows = np.ascontiguousarray(solid.T), np.ascontiguousarray(depth.T)
    deep = np.zeros(depth_rows.shape, np.float32)
    deepest = np.zeros(depth_rows.shape[1], np.float32)
    for r in range(len(deep) - 1, -1, -1):
        deepest = np.maximum(deepest, depth_rows[r]) * solid_rows[r]
        deep[r] = deepest
    paper = (1 - np.maximum(ink, HIDDEN_WORTH * hidden)).astype(np.float32)
    cost = paper + np.float32(TOO_DEEP) * deep.T + np.float32(LEFT_ABOVE) * above
    cost[:, :floor_rows] = np.maximum(cost[:, :floor_rows], FLOOR_COST)
    return cost, paper


def _trace_from_path(enter, leave, frame, layer, sheet, floor_rows, fill, ink, dash):
    columns, rows = _walk(enter, leave)
    away = rows > max(2 * floor_rows, HUB_RHO * frame.outer_rows)
    support = float(ink[columns[away], rows[away]].mean()) if away.any() else 0.0
    plane = frame.angles[columns]
    x, y = sheet.to_sheet(rows / frame.outer_rows, plane)
    x, y, plane = _evenly(x, y, plane)
    rho = np.hypot(*sheet.to_plane(x, y)) * sheet.outer_px
    course = refine_course(x, y, layer.body, layer.hidden, rho, fill=fill)
    # Where lines have merged at the hub the path's own place is as good, and its angles are in order.
    merged = (course.kind > 0) & (rho < HUB_WIDTHS * max(course.width_px, 1.0))
    u, v = sheet.to_plane(np.where(merged, x, course.x), np.where(merged, y, course.y))
    rho = np.hypot(u, v)
    # Unwrap the angle near the path's own, so that a crossing of 0 degrees does not jump.
    bearing = plane + ((np.degrees(np.arctan2(u, -v)) - plane + 180) % 360 - 180)
    at_centre = np.maximum(enter, leave) < floor_rows
    return _resample(course, rho, bearing, at_centre, floor_rows / frame.reduction, frame, sheet, support, dash)


def _walk(enter, leave):
    """Cells of the path in order: (columns, rows) with every row of a climb."""
    count = np.abs(leave - enter) + 1
    columns = np.repeat(np.arange(len(enter)), count)
    first = np.repeat(np.cumsum(count) - count, count)
    direction = np.repeat(np.sign(leave - enter), count)
    rows = np.repeat(enter, count) + direction * (np.arange(count.sum()) - first)
    return columns, rows


def _evenly(x, y, plane):
    """Resample the path about 1 px apart along its smoothed course."""
    kernel = np.ones(5) / 5
    xs = np.convolve(np.pad(x, 2, mode="edge"), kernel, mode="valid")
    ys = np.convolve(np.pad(y, 2, mode="edge"), kernel, mode="valid")
    length = np.concatenate([[0], np.cumsum(np.hypot(np.diff(xs), np.diff(ys)))])
    keep = np.concatenate([[True], np.diff(length) > 1e-9])
    at = np.arange(0, length[-1], 1.0)
    return tuple(np.interp(at, length[keep], values[keep]) for values in (xs, ys, plane))


def _resample(course, rho, bearing, at_centre, floor_px, frame, sheet, support, dash):
    """Level curve on an even angle grid, from the samples in order along the path."""
    step = 1.0 / SAMPLES_PER_DEG
    angles = frame.angles
    start = np.ceil(angles[0] / step) * step
    grid_deg = np.arange(0, 360, step) if frame.whole else np.arange(start, angles[-1] + 1e-9, step)
    # Within a few pixels of the centre an angle means nothing; those columns are set below.
    order = np.argsort(bearing, kind="stable")
    order = order[rho[order] * sheet.outer_px > max(floor_px - 1, 2)]
    if order.size < 2:
        return None
    b, first = np.unique(bearing[order], return_index=True)
    order = order[first]
    period = 360.0 if frame.whole else None

    def at(values):
        return np.interp(grid_deg, b, values[order], period=period)

    column = np.clip(np.round((grid_deg - angles[0]) % 360 / (angles[1] - angles[0])).astype(int), 0, len(angles) - 1)
    floor = at_centre[column]
    curve = np.where(floor, 0.5 * floor_px / sheet.outer_px, at(rho))
    slope = np.where(floor, 0.0, np.gradient(curve, step))
    kind = np.where(floor, 2.0, at(course.kind.astype(float)))
    bridge = np.where(floor, 0.5 * floor_px, at(course.u_bridge_px))
    state = np.where(floor, "floor", np.where(kind > 1.5, "bridged", "seen"))
    slant = 1 / np.sqrt(1 + (slope * 180 / np.pi / np.maximum(curve, 0.02)) ** 2)
    return Trace(
        plane_deg=grid_deg, rho=curve, u_px=at(course.u_px), u_bridge_px=bridge, slope=slope, radial_share=slant,
        state=state, clear=kind < 0.5, support=support, dash=dash,
        width_px=course.width_px / sheet.reduction, sheet_outer_px=sheet.outer_px,
    )  # fmt: skip
