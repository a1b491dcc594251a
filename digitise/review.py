"""The registry of review reasons: why a person should look at a reading.

Each reason has a stable code, one sentence and a number behind it. A stage that goes on in doubt returns
`Reason` objects; the record lists them as strings ("code: sentence"). Codes never change their meaning.
"""

from dataclasses import dataclass

__all__ = ["REASONS", "Reason", "reason"]

# code -> sentence with one named number {value}, and optionally {detail}. `place` may say where on the picture.
REASONS = {
    "levels-guessed": "the ring levels were not all read; {value:.0f} labels support the levels used ({detail})",
    "unit-unknown": "no unit was found on the chart ({value:.0f} labels read); levels are taken as dB as printed",
    "law-doubtful": "the ring radii fit the {detail} law only to {value:.1f} px",
    "bearing-assumed": "zero or turn rests on {value:.0f} rim labels; {detail}",
    "bearing-mirrored": "the rim labels do not tell the turn ({detail}); {value:.0f} labels read",
    "ink-ambiguous": "{value:.0f} inks could be the trace; {detail}",
    "grid-residual": "the grid fits the picture only to {value:.2f} px",
    "much-bridged": "{value:.0%} of the rows were interpolated where the ink is hidden",
    "rows-missing": "{value:.0%} of the rows have no value",
    "leaves-chart": "the trace runs outside the outer ring on {value:.0%} of the rows",
    "trace-doubtful": "the trace could not be followed with confidence on {value:.0%} of the rows",
    "traces-alike": "two traces share an ink over {value:.0%} of the rows and may be swapped",
    "peak-low": "the trace peaks {value:.1f} dB below the outermost ring",
    "wide-error": "half of the rows have an error above {value:.2f} dB",
    "text-unread": "labels were not read: {detail} ({value:.0f} found)",
    "chart-unread": "{value:.0f} more charts on the picture could not be read ({detail})",
    "ring-missing": "the rings are uneven: {value:.0f} seem to be missing or extra",
}


@dataclass(frozen=True, kw_only=True)
class Reason:
    """One reason to look.

    code : key of `REASONS`; value : the number behind it, in the unit of its sentence; detail : free words;
    x_px, y_px : a place on the picture that shows it, or None.
    """

    code: str
    value: float
    detail: str = ""
    x_px: float | None = None
    y_px: float | None = None

    def __str__(self):
        return f"{self.code}: {REASONS[self.code].format(value=self.value, detail=self.detail)}"


def reason(code, value, detail="", *, x_px=None, y_px=None):
    """Make a `Reason`; a code that is not in the registry raises KeyError at once."""
    REASONS[code]
    return Reason(code=code, value=float(value), detail=detail, x_px=x_px, y_px=y_px)
