"""Find where the charts are on the picture.

A chart is a circle (the rim) with further circles about the same centre, or with straight lines through it.
Candidates come from gradient votes (`_ring_votes`), which letters, tables and traces do not gather; each is then
judged by the share of every circle about it that is really drawn.
"""

from dataclasses import dataclass

import cv2
import numpy as np

from ._ring_profile import centre_profile, drawn_arc, ring_profile
from ._ring_votes import centre_candidates, find_edges, fit_hub, ring_shares
from ._spokes import find_spokes

__all__ = ["Box", "box_around", "find_charts"]

MIN_OUTER_PX = 40.0  # smallest chart looked for, picture px
MIN_OUTER_WORK_PX = 22.0  # and on the reduced picture
RIM_SHARE = 0.68  # of the rim's circumference that must be drawn; rim labels alone reach 0.6
HALF_SHARE = 0.9  # of the better half circle, for half charts
MIN_LINE_SCORE = 0.45  # mean vote of the sectors for a ring
MIN_RINGS = 0.7  # sum of the scores: one ring at least
MIN_EVIDENCE = 1.45  # rings and spokes together
SPOKE_WORTH, MAX_SPOKES = 0.1, 12  # a spoke counts as a tenth of a ring
MIN_RING_WORK_PX = 6.0
MAX_WANDER_PX = 1.0  # scatter of a ring's sectors, px of the reduced picture
EDGE_PX = 7.0  # the edge of an area looks like a dark and a light line this near each other
SURE_EVIDENCE = 2.5  # nothing else is looked for inside such a chart
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
        x, y, _ = edges.to_full @ [chart["x"], chart["y"], 1] + [left, top, 0]
        outer = chart["outer"] * edges.to_full[0, 0]
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
        rim = _rim(edges, hub)
        if rim is None:
            return None
        outer, share = rim
        hub = fit_hub(edges, hub.x, hub.y, reach_px=1.06 * outer, a=hub.a, b=hub.b, tolerances=(0.06, 0.04, 0.03))
        if hub is None:
            return None
    if outer < max(MIN_OUTER_WORK_PX, MIN_OUTER_PX / edges.to_full[0, 0]):
        return None
    plane = hub.homography(outer)
    return None if plane is None else _prove(edges, plane, outer, share)


def _rim(edges, hub):
    """Radius and drawn share of the outermost circle about a hub; None when there is none."""
    share, half = ring_shares(edges, hub)
    usual = float(np.median(share[10:])) if len(share) > 20 else 0.0
    is_rim = (share > RIM_SHARE) | ((half > HALF_SHARE) & (share > 0.45))
    rows = np.flatnonzero(is_rim & (share > usual + 0.3))
    if not len(rows):
        return None
    last = first = int(rows[-1])
    while first - 1 in rows[-40:] and share[first - 1] >= 0.9 * share[last]:
        first -= 1
    return 0.5 * (first + last), float(share[last])


def _prove(edges, plane, outer, share):
    """Count the lines about a centre that are drawn all the way; None when they make no chart.

    A circle alone is a logo, a pie or a plate; the edge of a disc is no line. A chart has more rings than one, or
    an even comb of spokes.
    """
    plane = centre_profile(edges.image, plane, rounds=3)
    profile = ring_profile(edges.image, plane, reach=1.06)
    blocks, arc = drawn_arc(profile)
    rho, score, level = profile.peaks(MIN_LINE_SCORE, blocks)
    radius = rho * outer
    rings = 0.0
    for k in range(len(rho)):
        beside = (np.abs(radius - radius[k]) < EDGE_PX) & (np.abs(level) > 0.5 * abs(level[k]))
        is_edge = np.any(beside & (score * score[k] < 0))
        again = np.any(beside[:k] & (score[:k] * score[k] > 0))  # the other side of a thick line
        if radius[k] > MIN_RING_WORK_PX and not (is_edge or again):
            if profile.wander(rho[k], score[k], blocks) < MAX_WANDER_PX:
                rings += abs(score[k])
    spokes = find_spokes(edges.image, plane, arc_deg=arc)
    evidence = rings + min(len(spokes.deg), MAX_SPOKES) * SPOKE_WORTH
    if rings < MIN_RINGS or evidence < MIN_EVIDENCE:
        return None
    x, y = plane[:2, 2]
    return {"x": x, "y": y, "outer": outer, "share": share, "evidence": evidence}


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
