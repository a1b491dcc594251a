"""Values from handbooks and standards that a drawn and read chart must give back.

`source` names the published origin. Titles and clause numbers are from memory, where nothing else is said;
every number was also worked out anew, by root finding or maximising on the formula, in
tests/test_reference.py.
"""

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True)
class Reference:
    """A published value: `digits` is half a unit of its last printed place."""

    name: str
    value: float
    unit: str
    digits: float
    source: str


BALANIS_WIRE = "Balanis, Antenna Theory, ch. 4 (half-wave dipole); Kraus, Antennas"
BALANIS_LINE = "Balanis, Antenna Theory, ch. 2, 12; Kraus, Antennas (uniform line source, 13.26 dB)"
BALANIS_DISC = "Balanis, Antenna Theory, ch. 12 (uniform circular aperture, 17.57 dB)"
CARDIOID = "first-order microphone and antenna family, field (1 + cos)/2; handbook 131 degrees"
TR_38901 = "3GPP TR 38.901, table 7.3-1, as documented in the ns-3 simulator's sources"
ARRL = (
    "ARRL handbooks: rings spaced 'according to the logarithm of 0.89 times the value of the signal voltage'"
)

DIPOLE_WIDTH = Reference(
    name="half-wave dipole, half power", value=78.08, unit="deg", digits=0.005, source=BALANIS_WIRE
)
LINE_LOBE = Reference(
    name="uniform line, first side lobe", value=-13.26, unit="dB", digits=0.005, source=BALANIS_LINE
)
DISC_LOBE = Reference(
    name="uniform disc, first side lobe", value=-17.57, unit="dB", digits=0.005, source=BALANIS_DISC
)
CARDIOID_WIDTH = Reference(
    name="field cardioid, half power", value=131.06, unit="deg", digits=0.005, source=CARDIOID
)
SECTOR_WIDTH = Reference(name="sector cut at -3.00 dB", value=65.0, unit="deg", digits=0.005, source=TR_38901)

# level, dB, of a half-wave dipole at 10, 20 ... 80 degrees off broadside (formula of BALANIS_WIRE)
DIPOLE_LEVELS = {
    10: -0.194,
    20: -0.779,
    30: -1.761,
    40: -3.165,
    50: -5.053,
    60: -7.581,
    70: -11.164,
    80: -17.239,
}

# azimuth cut of TR_38901, dB at degrees off the main direction
SECTOR_LEVELS = {30: -2.56, 45: -5.75, 60: -10.22, 90: -23.01, 120: -30.0, 180: -30.0}

# nulls of an 8-element uniform array of half-wave spacing, sin t = m / (N d) (Balanis, ch. 6)
ARRAY_NULLS_DEG = (14.48, 30.00, 48.59)

# level, dB -> radius over the outer radius, of a log-periodic grid (ARRL)
LOG_PERIODIC_RADII = {0: 1.0, -3: 0.8396, -6: 0.7050, -10: 0.5584, -20: 0.3118, -30: 0.1741}
