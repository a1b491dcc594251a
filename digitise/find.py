"""Find where the charts are on the picture.

Stub: the finder follows.
"""

from dataclasses import dataclass

__all__ = ["Box", "find_charts"]


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
    """Return the charts on a `Picture` as a tuple of `Box` in reading order; empty when there is none."""
    raise NotImplementedError
