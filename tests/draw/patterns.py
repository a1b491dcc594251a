"""Radiation patterns with a known formula: degrees off the main direction -> level below the peak, dB.

Every function takes an array of any shape and returns one of the same shape, at most 0 dB, at least
`DEEP_DB`. Names and formulas as in the antenna handbooks; check values are in REFERENCES.md section 2 of the
project's notes and in tests/reference.
"""

import numpy as np
from scipy.special import j1

DEEP_DB = -90.0  # a null is drawn this deep: far below every chart's centre


def _field_db(field):
    """Relative field (any sign) -> dB, normalised to its own largest value over the circle by the caller."""
    return np.maximum(20 * np.log10(np.maximum(np.abs(field), 1e-30)), DEEP_DB)


def half_wave_dipole(deg):
    """cos(90 cos t) / sin t, t from the wire's axis; the axis lies at 90 degrees off the main direction."""
    t = np.radians(np.asarray(deg, float) + 90)
    sine = np.sin(t)
    safe = np.where(np.abs(sine) < 1e-12, 1.0, sine)
    return _field_db(np.where(np.abs(sine) < 1e-12, 0.0, np.cos(np.pi / 2 * np.cos(t)) / safe))


def line_source(deg, *, length_wl=4.0):
    """Uniform line source of `length_wl` wavelengths across the main direction: sin u / u, u = pi L sin t."""
    return _field_db(np.sinc(length_wl * np.sin(np.radians(deg))))


def disc(deg, *, diameter_wl=4.0):
    """Uniform circular aperture: 2 J1(u) / u, u = pi D sin t."""
    u = np.pi * diameter_wl * np.sin(np.radians(np.asarray(deg, float)))
    safe = np.where(np.abs(u) < 1e-9, 1.0, u)
    return _field_db(np.where(np.abs(u) < 1e-9, 1.0, 2 * j1(safe) / safe))


def first_order(deg, *, a=0.5):
    """Field a + (1 - a) cos t: cardioid at 0.5, supercardioid 0.366, hypercardioid 0.25."""
    return _field_db(a + (1 - a) * np.cos(np.radians(deg)))


def sector(deg, *, half_power_deg=65.0, front_to_back_db=30.0):
    """3GPP sector cut, -min(12 (t / t3)^2, Am) dB (TR 36.814 A.2.1.1; TR 38.901 table 7.3-1)."""
    t = (np.asarray(deg, float) + 180) % 360 - 180
    return -np.minimum(12 * (t / half_power_deg) ** 2, front_to_back_db)


def linear_array(deg, *, n=8, spacing_wl=0.5, phase_deg=0.0):
    """Uniform linear array: sin(N psi/2) / (N sin(psi/2)), psi = 2 pi d sin t + beta."""
    half = np.pi * spacing_wl * np.sin(np.radians(np.asarray(deg, float))) + np.radians(phase_deg) / 2
    below = np.sin(half)
    flat = np.abs(below) < 1e-9
    return _field_db(np.where(flat, 1.0, np.sin(n * half) / (n * np.where(flat, 1.0, below))))


def backed(level_db, deg, *, back_db=-20.0):
    """Hold a front-back symmetric pattern down behind by a field cardioid on a pedestal of `back_db`."""
    pedestal = 10 ** (back_db / 20)
    weight = pedestal + (1 - pedestal) * (0.5 + 0.5 * np.cos(np.radians(deg)))
    return np.maximum(level_db + 20 * np.log10(weight), DEEP_DB)


def bidirectional(deg, *, power=2.0):
    """Two equal opposite lobes, field |cos t|^power."""
    return _field_db(np.abs(np.cos(np.radians(deg))) ** power)


def cosine_beam(deg, *, power=3.0, back_db=-22.0, back_power=2.0):
    """Field cos^power in front and a back lobe of another width; deep nulls at the sides."""
    cosine = np.cos(np.radians(deg))
    back = 10 ** (back_db / 20) * np.abs(cosine) ** back_power
    return _field_db(np.where(cosine >= 0, np.abs(cosine) ** power, back))


def omni(deg, rng, *, ripple_db=2.0):
    """Omni with a seeded ripple of `ripple_db` peak to peak, a few smooth harmonics."""
    t = np.radians(np.asarray(deg, float))
    level = sum(rng.normal() / (k + 1) * np.cos(k * t + rng.uniform(0, 2 * np.pi)) for k in range(1, 6))
    span = np.ptp(level) or 1.0
    return (level - np.max(level)) / span * ripple_db


def measured(deg, rng, *, order=8, front=1.5):
    """As a range measures one: a seeded complex Fourier series over a broad beam, with deep nulls."""
    t = np.radians(np.asarray(deg, float))
    field = front * (0.5 + 0.5 * np.cos(t)) ** 2 * np.exp(1j * rng.uniform(0, 6))
    for k in range(1, order + 1):
        size = rng.normal(scale=0.35 / np.sqrt(k)) * np.exp(1j * rng.uniform(0, 2 * np.pi))
        field = field + size * np.exp(1j * k * t * rng.choice((-1, 1)))
    level = _field_db(field)
    return np.maximum(level - np.max(level), DEEP_DB)
