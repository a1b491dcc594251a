"""Published ways to fill the sphere from two cuts, and the integral over it. All are estimates off the cuts.

Levels are dB under the antenna's peak in the elevation cut, `across` the azimuth cut under the point that
both cuts share. Arrays over the sphere are (elevations, azimuths).
"""

import numpy as np

__all__ = ["LIMITS", "METHODS", "cell_weights", "directivity_dbi", "fill_sphere"]

METHODS = ("summing", "cross-weighted", "hybrid", "projection")
HYBRID_N = 20.0  # of the 2005 paper, from memory; an open code takes 3.5, which leans to cross-weighted
CROSS_K = 2.0
# What each method is known to do: errors on closed-form patterns, off the cuts, held by tests/test_solid.py.
LIMITS = {
    "summing": "exact where the pattern is a product of both cuts (dipole, column of sectors); elsewhere, "
    "and behind the antenna, off by several dB and by 20 dB or more in side lobes of round beams",
    "cross-weighted": "even in the beam off by some dB (2 dB rms and 14 dB at most for a column of sectors)",
    "hybrid": "near summing in the beam, and with its faults for round beams and behind the antenna",
    "projection": "keeps the read back half and tilt; off by up to 14 dB for sectors and square beams, 20 dB "
    "for round ones, and as deep behind as the back null was read",
}


def fill_sphere(method, across_db, front_db, back_db, off_deg):
    """Levels in every direction, dB, (..., elevations, azimuths).

    Parameters
    ----------
    method : one of METHODS
    across_db : (..., azimuths) azimuth cut, 0 where the cuts meet
    front_db, back_db : (..., elevations) both halves of the elevation cut
    off_deg : (azimuths,) degrees from the elevation cut's plane, -180 to 180

    """
    h_db, v_db = across_db[..., None, :], front_db[..., :, None]
    if method == "summing":
        return h_db + v_db
    if method == "projection":
        # Horizontal projection: the azimuth cut, moved by what both halves of the elevation cut say.
        share = np.abs(off_deg) / 180
        ahead, behind = across_db[..., _at(off_deg, 0)], across_db[..., _at(off_deg, 180)]
        moved = (1 - share) * (ahead[..., None, None] - v_db)
        moved = moved + share * (behind[..., None, None] - back_db[..., :, None])
        return h_db - moved
    h, v = np.minimum(10 ** (h_db / 10), 1.0), np.minimum(10 ** (v_db / 10), 1.0)
    w1, w2 = v * (1 - h), h * (1 - v)
    size = (w1**CROSS_K + w2**CROSS_K) ** (1 / CROSS_K)
    with np.errstate(divide="ignore", invalid="ignore"):
        cross = np.where(size > 0, (h_db * w1 + v_db * w2) / size, 0.0)
    if method == "cross-weighted":
        return cross
    # Vasiliadis, Dimitriou & Sergiadis 2005, IEEE AP-53(7):2212-2219; its m from an open code.
    m = (h * v) ** (1 / HYBRID_N)
    return (h_db + v_db) * m + cross * (1 - m)


def cell_weights(elevation_deg):
    """Share of the sphere of each row of elevation, -90 to 90: the integral of cos over its cell."""
    edges = np.concatenate(([-90.0], (elevation_deg[1:] + elevation_deg[:-1]) / 2, [90.0]))
    return np.diff(np.sin(np.radians(edges))) / 2


def directivity_dbi(levels_db, elevation_deg):
    """Directivity over the sphere, dBi: the largest power over the mean power.

    levels_db : (..., elevations, azimuths), azimuths even around the circle
    """
    power = 10 ** (levels_db / 10)
    mean = np.mean(power, axis=-1) @ cell_weights(elevation_deg)
    return 10 * np.log10(np.max(power, axis=(-2, -1)) / mean)


def _at(off_deg, wanted):
    return int(np.argmin(np.abs((off_deg - wanted + 180) % 360 - 180)))
