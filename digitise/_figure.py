"""One figure of a pattern: a value with its error and unit, or the reason why there is none."""

import math
from dataclasses import dataclass

from ._draws import half_width95

__all__ = ["FIGURES", "Figure", "absent", "present"]

FIGURES = {  # key -> (title, unit)
    "peak_db": ("peak level on the chart", "dB"),
    "peak_deg": ("bearing of the peak", "deg"),
    "beamwidth": ("beamwidth, half power (-3.01 dB)", "deg"),
    "beamwidth3": ("beamwidth at -3.00 dB", "deg"),
    "beamwidth10": ("beamwidth at -10 dB", "deg"),
    "squint": ("squint of the half-power beam", "deg"),
    "null_width": ("first-null beamwidth", "deg"),
    "ftb": ("front-to-back at 180", "dB"),
    "ftb30": ("front-to-back over 180 +- 30", "dB"),
    "sidelobe_left": ("first side lobe, left", "dB"),
    "sidelobe_right": ("first side lobe, right", "dB"),
    "sidelobe_upper": ("first side lobe, upper", "dB"),
    "sidelobe_worst": ("worst side lobe", "dB"),
    "null_left": ("first null, left", "dB"),
    "null_right": ("first null, right", "dB"),
    "null_deepest": ("deepest null", "dB"),
    "null_fill": ("null fill, first null below the beam", "dB"),
    "tilt": ("tilt of the beam below the horizon", "deg"),
    "ripple": ("ripple, max - min", "dB"),
}


@dataclass(frozen=True, kw_only=True)
class Figure:
    """One figure.

    key, title, unit : as in `FIGURES`
    value : NaN when absent; error95 : half-width of its 95 % interval, same unit
    bound : "" or, where the trace runs below the chart's centre, "at least" or "at most"
    at_deg : printed bearing of the lobe or null, else NaN
    note : what was assumed, else ""; reason : why it is absent, else ""
    """

    key: str
    title: str
    unit: str
    value: float = math.nan
    error95: float = math.nan
    bound: str = ""
    at_deg: float = math.nan
    note: str = ""
    reason: str = ""

    @property
    def absent(self):
        """True when the pattern has no such figure, or it cannot be told."""
        return bool(self.reason)

    def rounded(self):
        """Value and error as decimal text, rounded together: the error up, to two digits, never narrower."""
        place = 3 if self.error95 <= 0 else min(3, max(0, 1 - math.floor(math.log10(self.error95))))
        value = round(self.value, place) + 0.0
        error = math.ceil(round((self.error95 + abs(value - self.value)) * 10**place, 6)) / 10**place
        if self.key == "peak_deg":
            value %= 360  # a bearing just under 360 is written as 0
        return f"{value:.{place}f}", f"{error:.{place}f}"


def present(key, values, *, extra=0.0, at_deg=math.nan, **more):
    """A figure from its value as read and the draws; absent when the draws leave it open."""
    error95 = half_width95(values) + extra
    if not math.isfinite(values[0]) or not math.isfinite(error95):
        return absent(key, "the reading's errors leave it undecided")
    title, unit = FIGURES[key]
    return Figure(
        key=key, title=title, unit=unit, value=float(values[0]), error95=error95, at_deg=float(at_deg), **more
    )


def absent(key, reason):
    title, unit = FIGURES[key]
    return Figure(key=key, title=title, unit=unit, reason=reason)
