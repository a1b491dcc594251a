"""A picture of a comparison: the traces on one even dB grid, their differences by bearing below."""

import numpy as np

from ._proof_colour import distinct_colours
from ._proof_panel import Mask
from ._proof_text import shortened
from ._sheet_page import DIM, MARGIN_PX, RULE, WIDTH_PX, SheetPage, nice_step
from .caution import CAUTION_SHORT
from .compare import comparison_text

__all__ = ["draw_comparison"]

POLAR_PX = 760
RIM_SHARE = 0.88  # of the half panel, the outermost ring
STRIP_PX = 300
DEEPEST_DB = 60.0
LINE_PX = 2.0
BAND_STRENGTH = 0.18
STANDS = "0\u00b0 at the top, growing clockwise, however the charts stand"
DASHES_PX = (
    (),
    (16, 7),
    (4, 6),
    (18, 6, 4, 6),
)  # on and off along the line, so that colour alone need not tell


def draw_comparison(names, tables, comparisons, *, level, turn_deg=0.0):
    """The comparison of tables with the first one as a Pillow image."""
    page = SheetPage()
    colours = distinct_colours(np.array([[255.0, 255, 255], RULE]), np.array([255.0, 255, 255]), len(tables))
    page.text(MARGIN_PX, page.y, f"Tables against {shortened(names[0], 90)}", size=26)
    page.y += 44
    _polar(page, tables, colours, level, turn_deg)
    for k, name in enumerate(names):
        y = page.y + 30 + 34 * k
        sample = np.full((20, 70, 3), 255, np.uint8)
        _dashed(sample, np.array([3.0, 66.0]), np.array([10.0, 10.0]), colours[k], k)
        page.panel(MARGIN_PX + POLAR_PX + 40, y, sample)
        page.text(MARGIN_PX + POLAR_PX + 124, y + 10, f"{k + 1}  {shortened(name, 48)}", size=18, anchor="lm")
    page.text(MARGIN_PX + POLAR_PX + 40, page.y + POLAR_PX - 40, _level_words(level), fill=DIM)
    page.text(MARGIN_PX + POLAR_PX + 40, page.y + POLAR_PX - 64, STANDS, fill=DIM)
    if turn_deg:
        said = f"bearings of all but the first turned by {turn_deg:+g} deg"
        page.text(MARGIN_PX + POLAR_PX + 40, page.y + POLAR_PX - 88, said, fill=DIM)
    page.y += POLAR_PX + 20
    _differences(page, comparisons, colours)
    for line in comparison_text(names, comparisons):
        small = line.endswith(CAUTION_SHORT)
        page.lines(line, size=14 if small else 16, fill=DIM if small else (24, 28, 34))
    return page.finish()


def _level_words(level):
    return "dB under each trace's own peak" if level == "relative" else "dB as printed on the rings"


def _polar(page, tables, colours, level, turn_deg):
    """Draw every trace on one even-dB grid, 0 degrees at the top, growing clockwise."""
    levels = [getattr(table, f"{level}_db") for table in tables]
    known = np.concatenate([item[np.isfinite(item)] for item in levels] + [np.zeros(1)])
    step = nice_step(min(DEEPEST_DB, max(np.ptp(known), 3.0)), 6)
    top = np.ceil(known.max() / step - 1e-6) * step
    bottom = max(np.floor(known.min() / step + 1e-6), top / step - DEEPEST_DB / step) * step
    if bottom >= top:
        bottom = top - step
    middle, rim = (POLAR_PX - 1) / 2, POLAR_PX / 2 * RIM_SHARE
    panel = np.full((POLAR_PX, POLAR_PX, 3), 255, np.uint8)

    def place(rho, angle_deg):
        angle = np.radians(angle_deg)
        return middle + rim * rho * np.sin(angle), middle - rim * rho * np.cos(angle)

    grid = Mask(panel)
    rings = np.arange(bottom, top + step / 2, step)
    around = np.linspace(0, 360, 361)
    for ring in rings[1:]:
        grid.line(place(np.full(361, (ring - bottom) / (top - bottom)), around), 1.0)
    for spoke in range(0, 360, 30):
        grid.line(place(np.array([0.0, 1.0]), np.full(2, float(spoke))), 1.0)
    grid.lay(RULE)
    for k, (table, values) in enumerate(zip(tables, levels, strict=True)):
        rho = np.clip((values - bottom) / (top - bottom), 0, 1.05)
        x, y = place(rho, table.angle_deg + (turn_deg if k else 0.0))
        _dashed(panel, np.append(x, x[0]), np.append(y, y[0]), colours[k], k)
    page.panel(MARGIN_PX, page.y, panel)
    for ring in rings:
        x, y = place((ring - bottom) / (top - bottom), 75.0)
        page.text(MARGIN_PX + x, page.y + y, f"{ring:g}", size=14, fill=DIM, anchor="mm", halo_px=2)
    for spoke in range(0, 360, 30):
        x, y = place(1.07, spoke)
        page.text(MARGIN_PX + x, page.y + y, f"{spoke}\u00b0", size=15, fill=DIM, anchor="mm")


def _differences(page, comparisons, colours):
    """Draw every difference by bearing with its error as a band, limits and gaps left out."""
    left, width = MARGIN_PX + 60, WIDTH_PX - 2 * MARGIN_PX - 60
    page.text(MARGIN_PX, page.y, "Difference from the first table by bearing, dB; the band is its 95 % error")
    page.y += 28
    sure = [np.isin(item.state, ("seen", "bridged")) for item in comparisons]
    parts = [np.abs(item.difference_db[kept]) for item, kept in zip(comparisons, sure, strict=True)]
    size = max((float(np.quantile(part, 0.99)) for part in parts if part.size), default=1.0)
    step = nice_step(2 * max(1.15 * size, 0.05), 8)
    half = np.ceil(1.15 * size / step + 1e-9) * step
    panel = np.full((STRIP_PX, width, 3), 255, np.uint8)

    def height(value):
        return (1 - (np.clip(value, -half, half) + half) / (2 * half)) * (STRIP_PX - 1)

    ticks = np.arange(-half, half + step / 2, step)
    grid = Mask(panel)
    for tick in ticks:
        grid.line((np.array([0.0, width]), np.full(2, height(tick))), 2.0 if abs(tick) < step / 9 else 1.0)
    for bearing in range(0, 361, 30):
        grid.line((np.full(2, bearing / 360 * (width - 1)), np.array([0.0, STRIP_PX])), 1.0)
    grid.lay(RULE)
    for k, (item, kept) in enumerate(zip(comparisons, sure, strict=True), 1):
        x = item.angle_deg / 360 * (width - 1)
        low, high = height(item.difference_db - item.error95_db), height(item.difference_db + item.error95_db)
        band = Mask(panel)
        joined = np.flatnonzero(kept[:-1] & kept[1:])
        corners = [
            np.stack([x[joined + d], edge[joined + d]], axis=1)
            for d, edge in ((0, low), (1, low), (1, high), (0, high))
        ]
        band.quads(np.stack(corners, axis=1))
        band.lay(colours[k], BAND_STRENGTH)
        _dashed(panel, x, np.where(kept, height(item.difference_db), np.nan), colours[k], k)
    page.panel(left, page.y, panel)
    for tick in ticks:
        page.text(left - 8, page.y + height(tick), f"{tick:.3g}", size=14, fill=DIM, anchor="rm")
    page.y += STRIP_PX + 4
    for bearing in range(0, 361, 30):
        page.text(
            left + bearing / 360 * (width - 1), page.y, f"{bearing}\u00b0", size=14, fill=DIM, anchor="ma"
        )
    page.y += 34


def _dashed(panel, x, y, colour, number):
    """A line in the dash that goes with a table's number; broken where it has no value."""
    dash = DASHES_PX[number % len(DASHES_PX)]
    mask = Mask(panel)
    known = np.isfinite(x) & np.isfinite(y)
    edges = np.flatnonzero(np.diff(np.concatenate(([0], known.astype(np.int8), [0]))))
    for start, end in zip(edges[::2], edges[1::2], strict=True):
        if end - start < 2:
            continue
        for path in _pieces(x[start:end], y[start:end], dash):
            mask.line(path, LINE_PX)
    mask.lay(colour)


def _pieces(x, y, dash):
    """The drawn pieces of a path, each (x, y)."""
    if not dash:
        return [(x, y)]
    along = np.concatenate(([0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))))
    ends = np.cumsum(np.tile(dash, int(along[-1] // sum(dash)) + 1))
    pieces = []
    for start, end in zip(np.concatenate(([0], ends[1::2])), ends[::2], strict=False):
        inner = along[(along > start) & (along < min(end, along[-1]))]
        at = np.concatenate(([start], inner, [min(end, along[-1])]))
        if start < along[-1]:
            pieces.append((np.interp(at, along, x), np.interp(at, along, y)))
    return pieces
