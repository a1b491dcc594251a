"""The rule that the radii of a grid's rings keep: an even step, or whole decibels of a law.

Most printed charts space their rings evenly in dB on an even scale; the others put them at whole dB of the field,
power or log-periodic law (REFERENCES, radial scale laws). The rim may stand off the step. A rule that most of the
rings keep foretells where faint or half-hidden rings are, and shows up lines that are no rings.
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["Pattern", "find_pattern"]

MISS_PX = 0.9  # a ring keeps the rule within this, and within a thousandth of the outer radius on large pictures
LAW_RATIOS = (10 ** (-1 / 20), 10 ** (-1 / 10), 0.89**0.5)  # radius a dB: field, power, log-periodic
MIN_LAW_GAP_PX = 6.0  # whole dB nearer each other than this prove nothing
MIN_STEP_PX = 5.5
MIN_MERIT = 2.6  # three rings in a row


@dataclass(frozen=True, eq=False, kw_only=True)
class Pattern:
    """Where rings are to be expected.

    kind : "even", "law" or "none"; places_px : (n,) radii inside the rim; miss_px : how near is near
    """

    kind: str
    places_px: np.ndarray
    miss_px: float

    def holds(self, radius_px):
        """Whether a radius is one of the places."""
        return bool(len(self.places_px)) and float(np.abs(self.places_px - radius_px).min()) < self.miss_px


def find_pattern(radius_px):
    """The rule of the ring radii given in px, falling, the rim first, as a `Pattern`."""
    radius = np.asarray(radius_px, float)
    miss = max(MISS_PX, 1e-3 * radius[0])
    step = _even_step(radius, miss)
    if step is not None:
        size, first = step
        places = first + size * np.arange(-400, 401)
        return Pattern(kind="even", places_px=places[(places > 0) & (places < radius[0] - miss)], miss_px=miss)
    ratio = _law(radius, miss)
    if ratio is not None:
        places = radius[0] * ratio ** np.arange(1, 61)
        told = (places * (1 - ratio) > MIN_LAW_GAP_PX) | (np.arange(1, 61) % 10 == 0)
        return Pattern(kind="law", places_px=places[told], miss_px=miss)
    return Pattern(kind="none", places_px=np.zeros(0), miss_px=miss)


def _even_step(radius, miss):
    """The even step that most of the rings keep: (step, a ring's radius), or None when uneven or too few."""
    n = len(radius)
    best, best_merit = None, 0.0
    for i in range(n):
        for j in range(i):
            for part in (1, 2, 3):
                size = (radius[j] - radius[i]) / part
                if size < max(MIN_STEP_PX, 4 * miss):
                    break
                k = np.round((radius - radius[i]) / size)
                fits = np.abs(radius - radius[i] - k * size) < miss
                places = np.ptp(k[fits]) + 1
                merit = fits.sum() - 0.4 * (places - len(np.unique(k[fits])))
                if merit > best_merit and fits.sum() >= max(3, 0.6 * n):
                    best, best_merit = (k[fits], radius[fits]), merit
    if best_merit < MIN_MERIT:
        return None
    size, first = np.polyfit(*best, 1)
    return float(size), float(first)


def _law(radius, miss):
    """The radius ratio of one dB under the law whose whole dB all rings keep, or None."""
    if len(radius) < 4:
        return None
    ratio = radius[1:] / radius[0]
    best, best_miss = None, 0.6 * miss
    for per_db in LAW_RATIOS:
        level = np.round(np.log(ratio) / np.log(per_db))
        off = np.abs(per_db**level - ratio) * radius[0]
        telling = radius[1:] * (1 - per_db) > MIN_LAW_GAP_PX
        if telling.sum() >= 3 and off[telling].max() < miss and len(np.unique(level)) == len(level):
            middle = float(np.median(off[telling]))
            if middle < best_miss:
                best, best_miss = per_db, middle
    return best
