"""Colours for the proof: what the picture holds, and what is far from all of it, for every kind of sight."""

import colorsys

import numpy as np

__all__ = ["distinct_colours", "main_colours"]

LEAST_SHARE = 3e-4  # a colour on fewer pixels than this share cannot be mistaken for a trace
SAMPLE_PIXELS = 120_000
LEAST_CONTRAST = (
    2.6  # of a line to the paper; 3 is what WCAG 2.1, 1.4.11, asks of graphics, and leaves too few hues
)

# Colour-blind sight: protanopia and deuteranopia as matrices on linear RGB
# (Machado, Oliveira & Fernandes 2009, IEEE TVCG 15(6):1291-1298, severity 1.0; values from memory).
SIGHTS = (
    np.eye(3),
    np.array(
        [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]
    ),
    np.array(
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]]
    ),
)

APART_WEIGHT = 0.55  # two traces side by side must differ more than a trace from what lies under it
SIGHT_WEIGHTS = np.array([0.5, 0.25, 0.25])
TO_CONES = np.array(
    [
        [0.4122214708, 0.5363325363, 0.0514459929],
        [0.2119034982, 0.6806995451, 0.1073969566],
        [0.0883024619, 0.2817188376, 0.6299787005],
    ]
)
TO_OKLAB = np.array(
    [
        [0.2104542553, 0.7936177850, -0.0040720468],
        [1.9779984951, -2.4285922050, 0.4505937099],
        [0.0259040371, 0.7827717662, -0.8086757660],
    ]
)


def main_colours(rgb):
    """The colours on a picture and the commonest of them.

    Parameters
    ----------
    rgb : (height, width, 3) uint8

    Returns
    -------
    colours : (k, 3) float, mean RGB of every 4-bit cell that holds a visible share of the pixels
    paper : (3,) float, the commonest one
    """
    every = max(1, int(np.sqrt(rgb.shape[0] * rgb.shape[1] / SAMPLE_PIXELS)))
    pixels = rgb[::every, ::every].reshape(-1, 3)
    cell = (
        (pixels[:, 0].astype(np.int32) >> 4) << 8
        | (pixels[:, 1].astype(np.int32) >> 4) << 4
        | pixels[:, 2] >> 4
    )
    counts = np.bincount(cell, minlength=4096)
    kept = np.flatnonzero(counts >= max(LEAST_SHARE * len(pixels), 1))
    sums = np.stack([np.bincount(cell, weights=pixels[:, k], minlength=4096) for k in range(3)], axis=1)
    return sums[kept] / counts[kept, None], sums[counts.argmax()] / counts.max()


def distinct_colours(present, paper, n):
    """Pick `n` colours far from those present and from each other, that stand off the paper.

    The distance is a weighted mean over common sight, protanopia and deuteranopia, in the Oklab space.

    Parameters
    ----------
    present : (k, 3) float RGB, 0 to 255; paper : (3,) float RGB; n : int

    Returns a list of (r, g, b) ints.
    """
    candidates = np.array(
        [
            np.array(colorsys.hsv_to_rgb(hue / 24, saturation, value)) * 255
            for hue in range(24)
            for saturation, value in ((1, 1), (1, 0.8), (1, 0.6), (0.6, 1))
        ]
    )
    contrast = _contrast(candidates, paper)
    candidates = candidates[contrast >= min(LEAST_CONTRAST, np.sort(contrast)[-2 * n])]
    seen = [_oklab(candidates, sight) for sight in SIGHTS]
    nearest = np.array(
        [_distance(lab, _oklab(present, sight)) for lab, sight in zip(seen, SIGHTS, strict=True)]
    )
    apart, picked = np.full_like(nearest, np.inf), []
    for _ in range(n):
        best = int(np.argmax(np.minimum(SIGHT_WEIGHTS @ nearest, APART_WEIGHT * (SIGHT_WEIGHTS @ apart))))
        picked.append(tuple(int(round(value)) for value in candidates[best]))
        apart = np.minimum(apart, [_distance(lab, lab[best : best + 1]) for lab in seen])
    return picked


def _linear(rgb):
    """Linear light, 0 to 1, of sRGB values 0 to 255 (IEC 61966-2-1)."""
    unit = np.asarray(rgb, float) / 255
    return np.where(unit <= 0.04045, unit / 12.92, ((unit + 0.055) / 1.055) ** 2.4)


def _contrast(rgb, paper):
    """Contrast ratio of each colour (n, 3) to the paper, 1 to 21 (W3C WCAG 2.1, relative luminance)."""
    weights = np.array([0.2126, 0.7152, 0.0722])
    light, other = _linear(rgb) @ weights, _linear(paper) @ weights
    return (np.maximum(light, other) + 0.05) / (np.minimum(light, other) + 0.05)


def _oklab(rgb, sight):
    """Oklab of sRGB colours (n, 3) as a pair of eyes of one kind sees them (Ottosson 2020; values from
    memory).

    The colour axes count double, so that a step of hue weighs about as much as one of lightness.
    """
    cones = np.cbrt(np.clip(_linear(rgb) @ sight.T, 0, 1) @ TO_CONES.T)
    return cones @ TO_OKLAB.T * (1, 2, 2)


def _distance(lab, others):
    """For every colour of `lab` the distance to the nearest of `others`."""
    return np.sqrt(((lab[:, None] - others[None]) ** 2).sum(axis=2)).min(axis=1)
