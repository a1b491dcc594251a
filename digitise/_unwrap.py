"""Sample a picture in the chart plane: rows of plane angle, columns of radius, or short cuts across a line."""

import cv2
import numpy as np

__all__ = ["apply_homography", "outer_radius", "sample", "shrink", "unwrap"]

ROW_LENGTH = 4096  # scattered points are handed to cv2.remap as rows of this length (its limit is 32767)


def apply_homography(homography, u, v):
    """Picture x, y of chart-plane points u, v (arrays broadcast)."""
    h = homography
    w = h[2, 0] * u + h[2, 1] * v + h[2, 2]
    return (h[0, 0] * u + h[0, 1] * v + h[0, 2]) / w, (h[1, 0] * u + h[1, 1] * v + h[1, 2]) / w


def outer_radius(homography):
    """Mean radius in px of the circle rho = 1, for a homography whose last entry is 1."""
    h = homography
    return float(np.sqrt(abs(np.linalg.det(h[:2, :2] - np.outer(h[:2, 2], h[2, :2])))))


def shrink(image, zoom):
    """A float32 picture reduced by zoom (1 or more leaves it), and the (3, 3) map of its px back to the picture's.

    Rounding to whole px makes the zoom a little different in x and y, which a large picture would show as an offset.
    """
    image = np.asarray(image, np.float32)
    h, w = image.shape
    size = (w, h) if zoom >= 1 else (max(8, round(w * zoom)), max(8, round(h * zoom)))
    if size != (w, h):
        image = cv2.resize(image, size, interpolation=cv2.INTER_AREA)
    fx, fy = w / size[0], h / size[1]
    return image, np.array([[fx, 0, 0.5 * fx - 0.5], [0, fy, 0.5 * fy - 0.5], [0, 0, 1]])


def sample(image, x, y):
    """Bilinear values of a float32 image at x, y (any shape, px); the edge is repeated outside."""
    shape = np.shape(x)
    n = int(np.prod(shape))
    width = min(max(n, 1), ROW_LENGTH)
    height = -(-n // width)
    grid = np.zeros((2, width * height), np.float32)
    grid[0, :n], grid[1, :n] = np.ravel(x), np.ravel(y)
    grid = grid.reshape(2, height, width)
    values = cv2.remap(image, grid[0], grid[1], cv2.INTER_LINEAR, borderMode=cv2.BORDER_REPLICATE)
    return values.reshape(-1, *image.shape[2:])[:n].reshape(*shape, *image.shape[2:])


def unwrap(image, homography, plane_deg, rho):
    """Values at every plane angle (rows, degrees) and radius (columns, outermost ring 1), float32."""
    h = homography
    angle = np.radians(np.asarray(plane_deg, float))
    # x - c = (H - c tilt') (u, v) / (1 + tilt (u, v)): outer products of angle and radius, in single precision
    across = h[:2, :2] - np.outer(h[:2, 2], h[2, :2])
    unit = np.stack([np.sin(angle), -np.cos(angle)])
    slope = (across @ unit).astype(np.float32)
    rho = np.asarray(rho, np.float32)
    x, y = np.outer(slope[0], rho), np.outer(slope[1], rho)
    if h[2, 0] or h[2, 1]:
        scale = 1 / (1 + np.outer((h[2, :2] @ unit).astype(np.float32), rho))
        x *= scale
        y *= scale
    x += np.float32(h[0, 2])
    y += np.float32(h[1, 2])
    return cv2.remap(image, x, y, cv2.INTER_LINEAR, borderMode=cv2.BORDER_REPLICATE)
