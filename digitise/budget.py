"""The error of every row, from named parts (JCGM 100:2008, 5.1.2).

Stub: the sums follow.
"""

from dataclasses import dataclass

import numpy as np

from .frozen import lock_arrays

__all__ = ["PARTS", "Budget", "make_budget"]

PARTS = ("picture", "grid", "scale", "bearing", "bridging")


@dataclass(frozen=True, eq=False, kw_only=True)
class Budget:
    """Standard uncertainties of the level, dB, one array of shape (n,) a part, row by row with the table.

    picture : where the line lies on the picture (noise, width, anti-aliasing, background)
    grid : centre, rings, stretch and skew under the point
    scale : anchors of the scale
    bearing : bearing error times the trace's slope
    bridging : interpolation where the ink is hidden
    coverage_factor : factor from the combined standard uncertainty to the 95 % half-width
    """

    picture: np.ndarray
    grid: np.ndarray
    scale: np.ndarray
    bearing: np.ndarray
    bridging: np.ndarray
    coverage_factor: float = 1.96

    def __post_init__(self):
        lock_arrays(self)

    def combined(self):
        """Root sum of squares of the parts, dB, shape (n,)."""
        return np.sqrt(sum(getattr(self, part) ** 2 for part in PARTS))

    def error95(self):
        """Half-width of the 95 % interval, dB, shape (n,)."""
        return self.coverage_factor * self.combined()


def make_budget(trace, grid, scale, bearing):
    """Combine the parts for the rows of a followed trace."""
    raise NotImplementedError
