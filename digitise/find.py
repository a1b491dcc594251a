"""Find where the charts are on the picture.

A chart is a circle (the rim) with further circles about the same centre, or with straight lines through it.
Candidates come from gradient votes (`_ring_votes`), which letters, tables and traces do not gather; each is then
judged by the share of every circle about it that is really drawn.
"""

from dataclasses import dataclass

import cv2
import numpy as np

from ._ring_votes import centre_candidates, find_edges, fit_hub, ring_shares, spoke_count

__all__ = ["Box", "box_around", "find_charts"]

MIN_OUTER_PX = 40.0  # smallest chart looked for, picture px
MIN_OUTER_WORK_PX = 22.0  # and on the reduced picture
RIM_SHARE = 0.68  # of the rim's circumference that must be drawn; rim labels alone reach 0.6
HALF_SHARE = 0.9  # of the better half circle, for half charts
RING_SHARE = 0.55
MIN_EVIDENCE = 1.9  # rings (sum of shares) and spokes together
SURE_EVIDENCE = 4.0
MARGIN = 1.30  # the region reaches this many outer radii from the centre, to hold the rim labels


@dataclass(frozen=True, kw_only=True)
class Box:
    """A chart's place: a first centre and outer radius in picture px, and the region x, y, w, h to look at.

    The region holds the whole chart with its rim labels where the picture allows; score is the share of the
    outer ring's circumference that votes for it.
    """

    x: int
    y: int
    w: int
    h: int
    centre_x: float
    centre_y: float
    outer_px: float
    score: float


def find_charts(picture, *, crop=None):
    """Return the charts on a `Picture` as a tuple of `Box` in reading order; empty when there is none.

    crop : (x, y, w, h) in picture px, or None; only that part is looked at
    """
    left, top, width, height = _clip_crop(crop, picture.width, picture.height)
    if min(width, height) < 2 * MIN_OUTER_PX * 0.6:
        return ()
    gray = cv2.cvtColor(np.ascontiguousarray(picture.rgb[top : top + height, left : left + width]), cv2.COLOR_RGB2GRAY)
    edges = find_edges(gray)
    found = []
    for x, y, _ in centre_candidates(edges):
        if any(c["evidence"] > SURE_EVIDENCE and np.hypot(x - c["x"], y - c["y"]) < 0.8 * c["outer"] for c in found):
            continue  # a trace inside a sure chart
        chart = _judge(edges, x, y)
        if chart is not None:
            found.append(chart)
    boxes = []
    for chart in _without_overlap(found):
        x, y = (chart["x"] + 0.5) / edges.zoom - 0.5 + left, (chart["y"] + 0.5) / edges.zoom - 0.5 + top
        outer = chart["outer"] / edges.zoom
        boxes.append(_box(x, y, outer, chart["share"], (left, top, width, height)))
    return tuple(_reading_order(boxes))


def box_around(grid, picture):
    """The `Box` of a chart whose `Grid` is known already."""
    size = (0, 0, picture.width, picture.height)
    return _box(grid.centre_x, grid.centre_y, grid.outer_px, float(grid.ring_drawn[0]), size)


def _clip_crop(crop, width, height):
    """The crop as whole px inside the picture."""
    if crop is None:
        return 0, 0, width, height
    x, y, w, h = (round(float(value)) for value in crop)
    x0, y0 = min(max(x, 0), width), min(max(y, 0), height)
    return x0, y0, max(0, min(x + w, width) - x0), max(0, min(y + h, height) - y0)


def _judge(edges, x, y):
    """Refine one candidate; None when no chart is there."""
    hub = fit_hub(edges, x, y)
    if hub is None:
        return None
    for _ in range(2):
        rims = _rings(edges, hub)
        if not rims:
            return None
        outer, share, evidence = rims
        refined = fit_hub(edges, hub.x, hub.y, reach_px=1.06 * outer, a=hub.a, b=hub.b, tolerances=(0.06, 0.04, 0.03))
        if refined is None:
            return None
        hub = refined
    evidence += min(spoke_count(edges, hub, outer), 8) * 0.5
    if outer < max(MIN_OUTER_WORK_PX, MIN_OUTER_PX * edges.zoom) or evidence < MIN_EVIDENCE:
        return None
    return {"x": hub.x, "y": hub.y, "outer": outer, "share": share, "evidence": evidence}


def _rings(edges, hub):
    """The rim's radius and share, and the sum of shares of all rings; None without a rim."""
    share, half = ring_shares(edges, hub)
    usual = float(np.median(share[10:])) if len(share) > 20 else 0.0
    is_rim = (share > RIM_SHARE) | ((half > HALF_SHARE) & (share > 0.45))
    is_rim &= share > usual + 0.3
    rows = np.flatnonzero(is_rim)
    if not len(rows):
        return None
    last = rows[-1]
    first = last
    while first - 1 in rows[-40:] and share[first - 1] >= 0.9 * share[last]:
        first -= 1
    outer = 0.5 * (first + last)
    strong = (share[: last + 1] > max(RING_SHARE, usual + 0.25)) | is_rim[: last + 1]
    runs = np.flatnonzero(strong & ~np.r_[False, strong[:-1]])
    evidence = 0.0
    for start in runs:
        stop = start
        while stop + 1 < len(strong) and strong[stop + 1]:
            stop += 1
        if start > 6:
            evidence += float(share[start : stop + 1].max())
    return outer, float(share[last]), evidence


def _without_overlap(found):
    """The best candidates, none with its centre inside a better one or the better one's centre inside it."""
    kept = []
    for chart in sorted(found, key=lambda item: -item["evidence"]):
        clear = True
        for other in kept:
            apart = np.hypot(chart["x"] - other["x"], chart["y"] - other["y"])
            clear &= apart > max(chart["outer"], other["outer"])
        if clear:
            kept.append(chart)
    return kept


def _box(x, y, outer, share, crop):
    """A `Box` with its region clipped to the part looked at."""
    left, top, width, height = crop
    reach = MARGIN * outer + 12
    x0, y0 = max(left, int(x - reach)), max(top, int(y - reach))
    x1, y1 = min(left + width, int(np.ceil(x + reach)) + 1), min(top + height, int(np.ceil(y + reach)) + 1)
    return Box(
        x=x0, y=y0, w=x1 - x0, h=y1 - y0, centre_x=float(x), centre_y=float(y), outer_px=float(outer), score=share
    )


def _reading_order(boxes):
    """Rows from the top, each from the left; charts whose centres differ by less than a radius share a row."""
    rows = []
    for box in sorted(boxes, key=lambda item: item.centre_y):
        if rows and box.centre_y - rows[-1][0].centre_y < 0.7 * min(box.outer_px, rows[-1][0].outer_px):
            rows[-1].append(box)
        else:
            rows.append([box])
    return [box for row in rows for box in sorted(row, key=lambda item: item.centre_x)]
