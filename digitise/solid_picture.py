"""A picture of a whole-sphere estimate: a map of every direction, azimuth across and elevation up."""

import cv2
import numpy as np

from ._proof_panel import Mask
from ._proof_text import shortened
from ._sheet_page import DIM, MARGIN_PX, WIDTH_PX, SheetPage
from .caution import CAUTION_SHORT
from .solid_report import ESTIMATE, solid_text

__all__ = ["draw_solid"]

MAP_WIDTH_PX, MAP_HEIGHT_PX = 1180, 590
BAR_PX = 26
DEEPEST_DB = 40.0
ALERT = (160, 60, 0)
LEVEL_DB = (-3.0, -10.0, -20.0)  # drawn as lines


def draw_solid(solid, names, check=None):
    """The estimate as a Pillow image."""
    page = SheetPage()
    page.text(
        MARGIN_PX, page.y, f"{shortened(names[0], 50)} and {shortened(names[1], 50)}: {solid.method}", size=26
    )
    page.y += 40
    page.text(MARGIN_PX, page.y, ESTIMATE, size=20, fill=ALERT)
    page.y += 36
    left = MARGIN_PX + 56
    order = np.argsort((solid.azimuth_deg - _left_edge(solid)) % 360)
    levels = np.clip(solid.relative_db[::-1][:, order], -DEEPEST_DB, 0).astype(np.float32)
    whole = np.concatenate([levels, levels[:, :1]], axis=1)  # the map closes on itself
    fine = cv2.resize(whole, (MAP_WIDTH_PX, MAP_HEIGHT_PX), interpolation=cv2.INTER_LINEAR)
    panel = _colours(fine)
    _contours(panel, fine)
    page.panel(left, page.y, panel)
    _axes(page, solid, left)
    _bar(page, left + MAP_WIDTH_PX + 24)
    page.y += MAP_HEIGHT_PX + 30
    page.text(
        left + MAP_WIDTH_PX / 2,
        page.y,
        "azimuth, degrees as the azimuth cut prints them",
        fill=DIM,
        anchor="ma",
    )
    page.y += 34
    page.lines(
        "Lines at -3, -10 and -20 dB under the largest level. Only the two cuts themselves were read.",
        fill=DIM,
    )
    for line in list(solid_text(solid, names, check))[2:]:
        if line == CAUTION_SHORT:
            page.lines(line, size=14, fill=DIM)
            continue
        word, _, rest = line.partition("  ")
        page.text(MARGIN_PX, page.y, word, fill=DIM)
        page.lines(rest.strip(), left=MARGIN_PX + 100)
    return page.finish()


def _left_edge(solid):
    """The azimuth at the map's left edge, so that the front is in its middle."""
    return solid.azimuth_deg[0]


def _colours(levels):
    """Levels as colours of even lightness steps, (height, width, 3) uint8 RGB."""
    shade = np.round((levels + DEEPEST_DB) / DEEPEST_DB * 255).astype(np.uint8)
    return cv2.applyColorMap(shade, cv2.COLORMAP_VIRIDIS)[:, :, ::-1].copy()


def _contours(panel, levels):
    for level, width in zip(LEVEL_DB, (2.4, 1.6, 1.0), strict=True):
        lines, _ = cv2.findContours((levels > level).astype(np.uint8), cv2.RETR_LIST, cv2.CHAIN_APPROX_NONE)
        mask = Mask(panel)
        for line in lines:
            x, y = line[:, 0, 0].astype(float), line[:, 0, 1].astype(float)
            rim = (x < 1) | (x > MAP_WIDTH_PX - 2) | (y < 1) | (y > MAP_HEIGHT_PX - 2)
            x[rim] = np.nan
            edges = np.flatnonzero(np.diff(np.concatenate(([0], (~rim).astype(np.int8), [0]))))
            for start, end in zip(edges[::2], edges[1::2], strict=True):
                if end - start > 2:
                    mask.line((x[start:end], y[start:end]), width)
        mask.lay((255, 255, 255) if level < -15 else (0, 0, 0))


def _axes(page, solid, left):
    for tall in range(-90, 91, 30):
        y = page.y + (90 - tall) / 180 * (MAP_HEIGHT_PX - 1)
        page.text(left - 8, y, f"{tall}\u00b0", size=14, fill=DIM, anchor="rm")
    for across in range(0, 361, 30):
        x = left + across / 360 * (MAP_WIDTH_PX - 1)
        page.text(
            x,
            page.y + MAP_HEIGHT_PX + 6,
            f"{(_left_edge(solid) + across) % 360:g}\u00b0",
            size=14,
            fill=DIM,
            anchor="ma",
        )


def _bar(page, x):
    fall = np.repeat(np.linspace(0, -DEEPEST_DB, MAP_HEIGHT_PX, dtype=np.float32)[:, None], BAR_PX, axis=1)
    page.panel(x, page.y, _colours(fall))
    for level in range(0, -int(DEEPEST_DB) - 1, -10):
        y = page.y - level / DEEPEST_DB * (MAP_HEIGHT_PX - 1)
        page.text(
            x + BAR_PX + 8,
            y,
            f"{level}" if level > -DEEPEST_DB else f"<{level}",
            size=14,
            fill=DIM,
            anchor="lm",
        )
    page.text(min(x, WIDTH_PX - MARGIN_PX - 40), page.y + MAP_HEIGHT_PX + 6, "dB", size=14, fill=DIM)
