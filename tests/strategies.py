"""Generators of what the exchange formats hold, for tests that write and read back."""

import numpy as np
from hypothesis import settings
from hypothesis import strategies as st

from digitise.exchange.cuts import Antenna, Cut

__all__ = ["FEW", "antennas", "cuts", "printable_text"]

FEW = settings(max_examples=40, deadline=None, derandomize=True)  # the same cases in every run


def printable_text(most=20):
    """ASCII words as a maker or model may have, without blanks at the ends."""
    letters = st.characters(min_codepoint=32, max_codepoint=126)
    return st.text(letters, max_size=most).map(str.strip)


@st.composite
def cuts(draw, *, plane=None, even=None, deepest_db=-80.0, decimals=3):
    """Draw a cut of even or uneven points, levels of `decimals` decimals, the largest 0."""
    n = draw(st.sampled_from([4, 8, 36, 72, 360]))
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    if draw(st.booleans()) if even is None else even:
        angle = np.arange(n) * 360 / n
    else:
        angle = np.sort(rng.choice(np.arange(0, 360_000, 5), n, replace=False)) / 1000
    level = np.round(rng.uniform(deepest_db, 0, n), decimals)
    level[rng.integers(n)] = 0.0
    return Cut(
        plane=draw(st.sampled_from(["azimuth", "elevation"])) if plane is None else plane,
        angle_deg=angle,
        level_db=level + 0.0,
        error95_db=np.round(rng.uniform(0.001, 2, n), 3),
        state=np.array(["seen", "bridged", "floor"], dtype="U8")[rng.integers(0, 3, n)],
    )


@st.composite
def antennas(draw, cuts_of=cuts, most_cuts=3):
    """An antenna with one to `most_cuts` cuts and facts of the size that an NSMA file has room for."""
    low = draw(st.integers(30, 5000))
    found = [draw(cuts_of()) for _ in range(draw(st.integers(1, most_cuts)))]
    return Antenna(
        cuts=tuple(found),
        maker=draw(printable_text()) or "Example Works",
        model=draw(printable_text()) or "EX-1",
        low_mhz=float(low),
        high_mhz=float(low + draw(st.integers(0, 900))),
        gain=draw(st.integers(-100, 400)) / 10,
        gain_unit=draw(st.sampled_from(["dBi", "dBd"])),
        azimuth_width_deg=draw(st.integers(1, 3600)) / 10,
        elevation_width_deg=draw(st.integers(1, 1800)) / 10,
        tilt_deg=draw(st.integers(-99, 99)) / 10,
        tilt_tolerance_deg=draw(st.integers(0, 9)) / 10,
        front_to_back_db=float(draw(st.integers(0, 60))),
        pattern_kind=draw(st.sampled_from(["typical", "envelope"])),
        date="20250101",
        from_reading=draw(st.booleans()),
    )
