"""The picture as letters want it: dark on light, colours and grid lines faded.

Letters are read in spite of a crossing line, but a spoke through a number looks like a minus sign and a ring
like a 1 or a bracket. A pixel on a grid line that is no darker than the line's usual tone is filled in from
both sides across the line, so that a stroke which runs over the line stays whole.
"""

import cv2
import numpy as np

__all__ = ["clean_gray"]

TONE_SLACK = 28.0  # grey levels that a pixel may be darker than its grid line and still count as line
MARGIN_PX = 1.2  # of a line's blurred edge, beyond half its width
MIN_SPOKE_RHO = 0.02
DARK_PAPER = 110  # median of all colours below which the paper is dark
OUTSIDE_RHO = 1.03


def clean_gray(rgb, grid):
    """(h, w) uint8 twice: letters dark on white; first with the grid lines left in, then with them filled.

    Inside the chart grey is the strongest of the three colours, so that coloured traces fade on white while
    dark letters stay; on dark paper the weakest, inverted. Outside, where no trace runs, it is the usual
    luma.
    """
    dark_paper = np.median(rgb[::4, ::4]) < DARK_PAPER
    luma = cv2.cvtColor(rgb, cv2.COLOR_RGB2GRAY)
    plain, luma = (255 - rgb.min(axis=2), 255 - luma) if dark_paper else (rgb.max(axis=2), luma)
    inside = np.zeros(luma.shape, np.uint8)
    x, y = grid.to_picture(OUTSIDE_RHO, np.arange(0, 360, 3.0))
    cv2.fillPoly(inside, [np.rint(np.stack([x, y], axis=1)).astype(np.int32)], 1)
    plain = np.where(inside > 0, plain, luma)
    filled = plain.astype(np.float32)
    for line in _lines(grid, filled.shape):
        _fill_line(filled, line)
    return plain, np.clip(filled, 0, 255).astype(np.uint8)


def _lines(grid, shape):
    """Every ring and spoke as (x, y, normal x, normal y, half width) sampled about every px."""
    plane = np.arange(0, 360, 57.0 / max(grid.outer_px, 60.0))
    for rho, width in zip(grid.ring_rho, grid.ring_width_px):
        x, y = grid.to_picture(rho, plane)
        x2, y2 = grid.to_picture(rho * 1.01, plane)
        yield _line(x, y, x2 - x, y2 - y, width, shape)
    along = np.arange(MIN_SPOKE_RHO, 1.0, 1.0 / grid.outer_px)
    width = grid.spoke_width_px if np.isfinite(grid.spoke_width_px) else 1.0
    for deg in grid.spoke_deg:
        x, y = grid.to_picture(along, deg)
        x2, y2 = grid.to_picture(along + 0.01, deg)
        yield _line(x, y, -(y2 - y), x2 - x, width, shape)


def _line(x, y, nx, ny, width, shape):
    size = np.maximum(np.hypot(nx, ny), 1e-9)
    half = 0.5 * max(1.0, width if np.isfinite(width) else 1.0) + MARGIN_PX
    inside = (x > half + 2) & (y > half + 2) & (x < shape[1] - half - 3) & (y < shape[0] - half - 3)
    return x[inside], y[inside], (nx / size)[inside], (ny / size)[inside], half


def _fill_line(gray, line):
    """Fill one line in place."""
    x, y, nx, ny, half = line
    if len(x) < 8:
        return
    offsets = np.arange(-np.ceil(half), np.ceil(half) + 0.5, 0.5)
    px, py = x[None] + offsets[:, None] * nx[None], y[None] + offsets[:, None] * ny[None]
    tone = cv2.remap(gray, px.astype(np.float32), py.astype(np.float32), cv2.INTER_LINEAR)
    usual = np.percentile(
        tone, 25, axis=1, keepdims=True
    )  # a dashed line is inked on half its length or less
    reach = np.ceil(half) + 0.5
    beside = [
        ((x + side * nx).astype(np.float32), (y + side * ny).astype(np.float32)) for side in (-reach, reach)
    ]
    sides = [cv2.remap(gray, *place, cv2.INTER_LINEAR).ravel() for place in beside]
    share = (offsets[:, None] + reach) / (2 * reach)
    between = (1 - share) * sides[0][None] + share * sides[1][None]
    fill = (tone > usual - TONE_SLACK) & (np.abs(offsets[:, None]) <= half) & (between > tone)
    ix, iy = np.rint(px[fill]).astype(int), np.rint(py[fill]).astype(int)
    gray[iy, ix] = np.maximum(gray[iy, ix], between[fill])
