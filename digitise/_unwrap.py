"""Sample a picture in the chart plane: rows of plane angle, columns of radius, or short cuts across a line."""

import cv2
import numpy as np

__all__ = ["apply_homography", "sample", "unwrap"]



def apply_homography(homography, u, v):
    """Picture x, y of chart-plane points u, v (arrays broadcast)."""
    h = homography
    w = h[2, 0] * u + h[2, 1] * v + h[2, 2]
    return (h[0, 0] * u + h[0, 1] * v + h[0, 2]) / w, (h[1, 0] * u + h[1, 1] * v + h[1, 2]) / w


def sample(image, x, y):
    """Bilinear values of a float32 image at x, y (any shape, px); the edge is repeated outside."""
    shape = np.shape(x)
    n = int(np.prod(shape))
    width = min(max(n, 1), 4096)
    height = -(-n // width)
    grid_x, grid_y = np.zeros(width * height, np.float32), np.zeros(width * height, np.float32)
    grid_x[:n], grid_y[:n] = np.ravel(x), np.ravel(y)
    values = cv2.remap(
        image,
        grid_x.reshape(height, width),
        grid_y.reshape(height, width),
        cv2.INTER_LINEAR,
        borderMode=cv2.BORDER_REPLICATE,
    )
    if image.ndim == 3:
        return values.reshape(-1, image.shape[2])[:n].reshape(*shape, image.shape[2])
    return values.ravel()[:n].reshape(shape)


def unwrap(image, homography, plane_deg, rho):
    """Values at every plane angle (rows, degrees) and radius (columns, outermost ring 1), float32."""
    angle = np.radians(np.asarray(plane_deg, float))[:, None]
    rho = np.asarray(rho, float)[None, :]
    x, y = apply_homography(homography, rho * np.sin(angle), -rho * np.cos(angle))
    return cv2.remap(
        image, x.astype(np.float32), y.astype(np.float32), cv2.INTER_LINEAR, borderMode=cv2.BORDER_REPLICATE
    )
