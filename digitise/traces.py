"""All traces of a chart: which inks carry one, and every trace of each ink.

A told ink is followed as told. Otherwise every ink found is tried, and what was followed must look like a trace: it
runs on ink for most of its way, is long enough, and is not a ring. Several traces may share an ink (a solid and a
dashed one in black): each is followed with the ink of the earlier ones hidden.
"""

from dataclasses import dataclass, replace

import cv2
import numpy as np

from ._frame import make_frame
from ._grid_cover import remove_grid
from .exceptions import NotReadError
from .follow import HUB_RHO, Trace, follow_trace
from .ink import find_inks, separate_ink
from .kept import Kept

__all__ = ["FoundTrace", "find_traces"]

MOST_PER_INK = 4
LEAST_LENGTH = 0.5  # outer radii: ink along a path that is worth returning in doubt
FILL_BLEND = (0.08, 0.85)  # share of the fill's ink in a grid line seen through it
BLEND_MISFIT = 22.0  # colour levels
FAINT_COLOUR = 55.0  # colour levels from the paper; fainter inks are halos of JPEG and paper stains
STRONG_COLOUR = 110.0  # colour levels from the paper; the colour noise of JPEG is paler
LEAST_STRETCH = 0.45  # outer radii: ink along the longest well-inked stretch of a trace
LEAST_ON_INK = 0.18  # share of ink in a window of a dotted line
SOLID_ON_INK = 0.85  # a path with a larger share on ink is drawn solid
SOLID_SHARE = 0.72  # share of a solid line's visible path on ink; crossings with the grid take some
SOLID_SUPPORT = 0.45  # share of a solid line's path on ink that is not dashes
LONG_STRETCH = 1.2
WHOLE_SUPPORT = 0.75
ALONG_PX = 1.5
MOST_ON_GRID = 0.6  # share of a trace that may lie along drawn rings and spokes
DASHED_SUPPORT = 0.5  # share of a dashed line's path on ink or bridged gaps
PIN_REACH_PX = 4.0  # picture px: how roughly a pin is set
PIN_APART_DEG = 12.0  # inks nearer in direction than this are one where a pin is concerned
TOLD_REACH_DEG = 30.0  # a told colour may be this far in direction from the ink on the picture (JPEG, scans)


@dataclass(frozen=True, eq=False, kw_only=True)
class FoundTrace:
    """A trace and its ink.

    ink : "#rrggbb" as found (or as told); dash : "solid", "dashed" or "dotted"; filled : bool
    trace : follow.Trace; length : drawn length on ink, in outer radii
    doubt : 0 when the ink proves the trace, else the share of the path that has none
    """

    ink: str
    dash: str
    filled: bool
    trace: Trace
    length: float
    doubt: float


def find_traces(sheet, grid, *, settings, kept=None):
    """Find and follow all traces; raises `NotReadError` when there is none or a told ink is not on the chart.

    kept : `Kept` results of the same picture; an ink that a change does not touch is not followed again
    """
    kept = Kept() if kept is None else kept
    inks = find_inks(sheet)
    palette = tuple(tuple(ink.rgb) for ink in inks)
    frame = make_frame(sheet, grid)

    def traces_of(rgb, name, told):
        pins = tuple(pin for pin in settings.pins if _concerns(pin, rgb, palette, sheet))
        asked = (grid, tuple(rgb), palette, settings.covers, pins, name, told)
        return kept.result(_traces_of_ink, *asked, sheet=sheet, frame=frame, kept=kept)

    found = []
    if settings.inks:
        for told in settings.inks:
            traces = traces_of(_parse(told), told, True)
            if not traces:
                there = ", ".join(ink.hex for ink in inks[:6]) or "none"
                raise NotReadError(
                    f"no trace was found in the ink {told}", stage="ink",
                    remedy=f"inks on the chart: {there}; choose one with --ink",
                )  # fmt: skip
            found += traces
        return tuple(found)
    for ink in inks:
        strength = np.linalg.norm(ink.rgb - sheet.paper_rgb)
        if ink.length_px < 0.25 * sheet.outer_px or strength < FAINT_COLOUR:
            continue
        # A strong colour of its own is somebody's trace: what cannot be followed surely is returned in doubt.
        strong = not ink.neutral and strength > STRONG_COLOUR
        told = strong and ink.length_px > LEAST_LENGTH * sheet.outer_px
        found += traces_of(ink.rgb, ink.hex, told)
    found = [item for item in found if not _seen_through(item, found, sheet.paper_rgb)]
    found = _without_doubles(found, {ink.hex: (ink.neutral, -ink.length_px) for ink in inks})
    if not found:
        raise NotReadError("no trace was found on the chart", stage="ink", remedy="name its colour with --ink '#rrggbb'")
    return tuple(sorted(found, key=lambda f: -f.length))


def _parse(told):
    return np.array([int(told[k : k + 2], 16) for k in (1, 3, 5)], float)


def _concerns(pin, rgb, palette, sheet):
    """Whether a pin is for this ink: the ink is there, or no ink is and any may be hidden."""
    x, y = (round(float(value)) for value in sheet.from_picture(*pin))
    reach = max(2, round(PIN_REACH_PX * sheet.reduction))
    near = np.s_[max(0, y - reach) : max(0, y + reach + 1), max(0, x - reach) : max(0, x + reach + 1)]
    inked = sheet.strength[near] > FAINT_COLOUR
    vectors = sheet.contrast[near][inked]
    if not len(vectors):
        return True
    inks = [np.asarray(ink) - sheet.paper_rgb for ink in (rgb, *palette)]
    inks = np.array([ink / max(np.linalg.norm(ink), 1e-9) for ink in inks])
    nearest = np.argmax(vectors @ inks.T, axis=1)
    own = inks @ inks[0] > np.cos(np.radians(PIN_APART_DEG))  # a told ink is also among those found, about
    return bool(own[nearest].any())


def _ink_layer(grid, rgb, palette, *, sheet):
    return remove_grid(separate_ink(sheet, np.array(rgb), [np.array(ink) for ink in palette]), sheet, grid)


def _traces_of_ink(grid, rgb, palette, covers, pins, name, told, *, sheet, frame, kept):
    if np.linalg.norm(np.array(rgb) - sheet.paper_rgb) < 20:
        return []
    layer = kept.result(_ink_layer, grid, rgb, palette, large=True, sheet=sheet)
    layer = _with_covers(layer, sheet, covers)
    fill = _fill_cover(layer, sheet)
    pins = tuple(grid.to_plane(np.float64(x), np.float64(y)) for x, y in pins)
    found = []
    for _ in range(MOST_PER_INK):
        item = _next_trace(layer, sheet, grid, frame, fill, pins, name, insist=told and not found, first=not found)
        if item is None:
            break
        found.append(item)
        if fill:
            break
        layer = _erase(layer, item.trace, sheet)
        if _ink_left(layer, sheet, item.trace) < LEAST_STRETCH:
            break
        pins = ()
    return found


def _ink_left(layer, sheet, trace):
    """Drawn length, in outer radii, that the ink away from the hub would make at the trace's width."""
    left = layer.cover[(layer.cover > 0.15) & (sheet.rho > HUB_RHO) & (sheet.rho < 1)]
    return float(left.sum()) / max(trace.width_px * sheet.reduction, 1.0) / sheet.outer_px


def _next_trace(layer, sheet, grid, frame, fill, pins, name, *, insist, first):
    """The next trace of an ink, a solid one first; None when what is left is no trace.

    first : no trace of this ink was found before
    insist : the user named this ink, so the best path is returned even in doubt, as long as it has ink of its own
    """
    best = None
    for solid in (True, False):
        trace = follow_trace(layer, sheet, frame, fill=fill, pins=pins, solid=solid)
        if trace is None:
            continue
        evidence = _evidence(trace, layer, sheet, fill)
        inked = evidence.share > SOLID_SHARE and trace.support > SOLID_SUPPORT if solid else trace.support > DASHED_SUPPORT
        sure = evidence.stretch > LEAST_STRETCH and inked
        item = FoundTrace(
            ink=name, dash="solid" if evidence.share > SOLID_ON_INK else trace.dash, filled=fill > 0, trace=trace,
            length=evidence.length, doubt=1 - (evidence.share if solid else trace.support),
        )  # fmt: skip
        if solid and not first:
            sure = sure and evidence.stretch > LONG_STRETCH
        if trace.dash == "dotted" and (layer.neutral or not first):
            # Leftovers of a grid and of text look like dots: a dotted trace in their ink must be long and whole.
            sure = sure and evidence.stretch > LONG_STRETCH and trace.support > WHOLE_SUPPORT
        if sure and not _is_ring(trace, grid) and _share_on_grid(trace, sheet, grid) < MOST_ON_GRID:
            return replace(item, doubt=0.0)
        if evidence.length > LEAST_LENGTH and (best is None or item.doubt < best.doubt):
            best = item
    return best if insist else None


def _with_covers(layer, sheet, covers):
    """Hide the regions that the user covers."""
    if not covers:
        return layer
    cover, hidden, body = layer.cover.copy(), layer.hidden.copy(), layer.body.copy()
    for x, y, w, h in covers:
        x0, y0 = sheet.from_picture(x - 0.5, y - 0.5)
        x1, y1 = sheet.from_picture(x + w - 0.5, y + h - 0.5)
        area = np.s_[max(0, round(y0)) : max(0, round(y1)), max(0, round(x0)) : max(0, round(x1))]
        cover[area] = body[area] = 0
        hidden[area] = 1
    return replace(layer, cover=cover, hidden=hidden, body=body)


def _fill_cover(layer, sheet):
    """Coverage of a translucent fill in the trace's ink: a coverage far commoner than its neighbours; else 0."""
    inside = sheet.rho < 0.98
    counts = np.histogram(layer.cover[inside], bins=50, range=(0, 1))[0]
    usual = max(float(np.median(counts[2:45])), 1.0)
    k = 2 + int(np.argmax(counts[2:43]))
    around = counts[max(k - 1, 2) : k + 2]
    if around.sum() < 0.02 * inside.sum() or counts[k] < 6 * usual:
        return 0.0
    # A fill stands out on both sides; the skirts of blurred lines only fall from zero coverage.
    if counts[1:k].min(initial=counts[k]) > 0.4 * counts[k] or counts[k + 1 : k + 12].min() > 0.4 * counts[k]:
        return 0.0
    near = inside & (layer.cover > 0.02 * (k - 1)) & (layer.cover < 0.02 * (k + 2))
    return float(np.median(layer.cover[near]))


@dataclass(frozen=True, kw_only=True)
class _Evidence:
    """Ink along a path: share of the visible path on ink; drawn length and longest well-inked stretch, outer radii."""

    share: float
    length: float
    stretch: float


def _evidence(trace, layer, sheet, fill):
    x, y, clear = _course(trace, sheet)
    over = cv2.remap(layer.body, x, y, cv2.INTER_LINEAR, borderValue=0)[:, 0]
    under = cv2.remap(layer.hidden, x, y, cv2.INTER_LINEAR, borderValue=0)[:, 0]
    on = over > max(0.3, 0.5 * (1 + fill)) * max(float(np.percentile(over, 85)), 0.3)
    known = on | (under < 0.4)
    u, v = sheet.to_plane(x[:, 0], y[:, 0])
    away = np.hypot(u, v) > max(HUB_RHO, 2.5 * trace.width_px * sheet.reduction / sheet.outer_px)
    share = float(np.mean(on[known & away])) if (known & away).sum() > 10 else 0.0
    return _Evidence(
        share=share, length=float(on.sum()) / sheet.outer_px,
        stretch=_stretch(on & away & clear, known & away, sheet.outer_px),
    )  # fmt: skip


def _stretch(on, known, outer_px):
    """Longest part of the path, in outer radii, along which every window of a quarter radius is well inked."""
    window = max(9, int(0.25 * outer_px))
    if len(on) < window:
        return 0.0
    ones = np.ones(window)
    inked = np.convolve(on & known, ones, mode="same")
    seen = np.convolve(known, ones, mode="same")
    well = (seen > 0.15 * window) & (inked > LEAST_ON_INK * seen)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], well.astype(int), [0]])))
    lengths = [float((on & known)[a:b].sum()) for a, b in zip(edges[::2], edges[1::2])]
    return max(lengths, default=0.0) / outer_px


def _course(trace, sheet):
    """The trace's line on the sheet, about 1 px apart, floor and missing rows left out: x, y columns and clear."""
    keep = np.isin(trace.state, ("seen", "bridged")) & np.isfinite(trace.rho)
    plane, rho, clear = trace.plane_deg[keep], trace.rho[keep], trace.clear[keep]
    x, y = sheet.to_sheet(rho, plane)
    if len(x) < 2:
        return np.zeros((1, 1), np.float32), np.zeros((1, 1), np.float32), np.zeros(1, bool)
    step = np.hypot(np.diff(x), np.diff(y))
    joined = np.concatenate([[True], np.diff(plane) < 0.5])
    length = np.concatenate([[0], np.cumsum(np.where(joined[1:], step, 0))])
    distinct = np.concatenate([[True], np.diff(length) > 1e-9])
    at = np.arange(0, min(length[-1], 30000.0), 1.0)
    xs, ys = np.interp(at, length[distinct], x[distinct]), np.interp(at, length[distinct], y[distinct])
    clear = np.interp(at, length[distinct], clear[distinct].astype(float)) > 0.5
    return xs.astype(np.float32)[:, None], ys.astype(np.float32)[:, None], clear


def _is_ring(trace, grid):
    """A path that keeps to one ring's radius all round is that ring."""
    rho = trace.rho[np.isfinite(trace.rho)]
    if not rho.size:
        return True
    middle = np.median(rho)
    tolerance = 1.0 / trace.sheet_outer_px
    return np.mean(np.abs(rho - middle) < tolerance) > 0.9 and np.min(np.abs(grid.ring_rho - middle)) < tolerance


def _share_on_grid(trace, sheet, grid):
    """Share of the path that lies along drawn rings or spokes."""
    x, y, _ = _course(trace, sheet)
    u, v = sheet.to_plane(x[:, 0], y[:, 0])
    radius = np.hypot(u, v) * sheet.outer_px
    on = np.min(np.abs(radius[:, None] - grid.ring_rho * sheet.outer_px), axis=1) < ALONG_PX
    if len(grid.spoke_deg):
        turn = np.degrees(np.arctan2(u, -v))[:, None] - grid.spoke_deg
        across = np.abs(radius[:, None] * np.sin(np.radians(turn)))
        on |= np.min(np.where(np.cos(np.radians(turn)) > 0, across, np.inf), axis=1) < ALONG_PX
    return float(on.mean())


def _erase(layer, trace, sheet):
    """Hide the ink of a followed trace."""
    x, y, _ = _course(trace, sheet)
    mask = np.zeros(layer.cover.shape, np.uint8)
    points = np.round(np.concatenate([x, y], axis=1) * 8).astype(np.int32)
    thickness = max(1, round(trace.width_px * sheet.reduction + 2.0))
    gaps = np.flatnonzero(np.hypot(*np.diff(points, axis=0).T) > 8 * 12) + 1
    for part in np.split(points, gaps):
        cv2.polylines(mask, [part[:, None]], False, 1, thickness, cv2.LINE_8, 3)
    hit = mask > 0
    cover, body = (np.where(hit, 0, part).astype(np.float32) for part in (layer.cover, layer.body))
    return replace(layer, cover=cover, hidden=np.where(hit, 1, layer.hidden).astype(np.float32), body=body)


def _seen_through(item, found, paper_rgb):
    """Whether an ink is only the grid seen through a filled trace: a blend of that trace's ink and grey."""
    own = _parse(item.ink) - paper_rgb
    for other in found:
        if other.filled and other.ink != item.ink:
            fill = _parse(other.ink) - paper_rgb
            parts = np.stack([fill, np.full(3, -1.0 if paper_rgb.mean() > 127 else 1.0)], axis=1)
            share = np.linalg.lstsq(parts, own, rcond=None)[0]
            blend = FILL_BLEND[0] < share[0] < FILL_BLEND[1] and share[1] > 0
            if blend and np.linalg.norm(parts @ share - own) < BLEND_MISFIT:
                return True
    return False


def _without_doubles(found, rank):
    """Drop a trace that runs along one of an ink of better rank: the blurred edge of one ink seen as another.

    rank : ink -> (neutral, -length): lightness alone shows a coloured line in grey too, so a colour goes first
    """
    kept = []
    for item in sorted(found, key=lambda f: (f.doubt > 0, rank[f.ink])):
        if not any(other.ink != item.ink and _same_line(other.trace, item.trace) for other in kept):
            kept.append(item)
    return kept


def _same_line(one, two):
    if len(one.rho) != len(two.rho):
        return False
    drawn = ~(np.isin(one.state, ("floor", "missing")) & np.isin(two.state, ("floor", "missing")))
    gap = np.abs(one.rho - two.rho)[drawn] * two.sheet_outer_px
    return gap.size == 0 or np.nanmedian(gap) < max(2.0, two.width_px)
