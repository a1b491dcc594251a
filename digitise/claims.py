"""What a datasheet states, held against the figures of a table: agrees, differs or cannot be told.

A stated figure is itself rounded: "65" is anything from 64.5 to 65.5, a rectangular error of half the last
digit (JCGM 100:2008, 4.3.7), unless it comes with a tolerance of its own. It agrees when the difference is
within the 95 % half-width of both together. Agreement says that chart and sheet are of one mind and no more:
both come from the same maker, often typical, at one frequency.
"""

import math
import re
from dataclasses import dataclass

from .exceptions import UsageError
from .figures import FIGURES

__all__ = ["Claim", "Verdict", "judge_claims", "parse_claims"]

FORM = re.compile(
    r"\s*(?P<key>[a-z0-9_]+)\s*(?P<sense><=|>=|=|<|>)\s*(?P<value>[-+]?\d+(\.\d+)?)"
    r"\s*((\+-|±)\s*(?P<tolerance>\d+(\.\d+)?))?\s*(dB|deg)?\s*"
)
EXAMPLE = "beamwidth=65,ftb>=25,sidelobe_upper=-18,tilt=6+-0.5"
LEVELS = (
    "sidelobe_",
    "null_left",
    "null_right",
    "null_deepest",
    "null_fill",
)  # stated negative, or as suppression
RECTANGULAR95 = 1.96 / math.sqrt(3)  # from the half-width of a rounding to its part of a 95 % half-width
TURNED = {"=": "=", ">=": "<=", "<=": ">="}


@dataclass(frozen=True, kw_only=True)
class Claim:
    """One stated figure.

    key : of `FIGURES`; value : as stated, levels negative; sense : "=", ">=" or "<="
    tolerance : stated with it, else NaN; rounding : half of the last digit; text : as it was typed
    """

    key: str
    value: float
    sense: str
    tolerance: float
    rounding: float
    text: str


@dataclass(frozen=True, kw_only=True)
class Verdict:
    """What the table says of one claim.

    verdict : "agrees", "differs" or "cannot tell"; sentence : with the numbers behind it
    """

    claim: Claim
    verdict: str
    sentence: str


def parse_claims(text):
    """The claims of `--claim`, such as `beamwidth=65,ftb>=25`; raises `UsageError` for what is not one."""
    claims = []
    for part in text.split(","):
        match = FORM.fullmatch(part.replace("\u2212", "-").replace("\u2013", "-"))
        if not match:
            raise UsageError(
                f"--claim {part.strip()!r} is not a claim", remedy=f"write {EXAMPLE}", stage="claims"
            )
        key, sense, value = match["key"], match["sense"], float(match["value"])
        if key not in FIGURES:
            raise UsageError(
                f"--claim {key!r} is no figure", remedy=f"choose from {', '.join(FIGURES)}", stage="claims"
            )
        sense = sense if sense == "=" else sense[0] + "="  # "less than" and "at most" are one within an error
        if (
            key.startswith(LEVELS) and value > 0
        ):  # a suppression of 18 dB or more is a level of -18 dB or less
            value, sense = -value, TURNED[sense]
        decimals = len(match["value"].partition(".")[2])
        tolerance = float(match["tolerance"]) if match["tolerance"] else math.nan
        if match["tolerance"] and sense != "=":
            raise UsageError(f"--claim {part.strip()!r} has both a limit and a tolerance", stage="claims")
        claims.append(
            Claim(
                key=key,
                value=value,
                sense=sense,
                tolerance=tolerance,
                rounding=0.5 * 10.0**-decimals,
                text=part.strip(),
            )
        )
    return tuple(claims)


def judge_claims(claims, figures):
    """One `Verdict` a claim, from the `Figures` of a table."""
    return tuple(_judge(claim, figures[claim.key]) for claim in claims)


def _judge(claim, figure):
    if figure.absent:
        return Verdict(claim=claim, verdict="cannot tell", sentence=f"{claim.text}: {figure.reason}")
    read = abs(figure.value) if claim.key == "squint" and claim.sense == "<=" else figure.value
    away, margin = read - claim.value, _margin(claim, figure)
    # Below the chart's centre the true value may be anywhere beyond the one read.
    beyond = {"": "", "at least": ">=", "at most": "<="}[figure.bound]
    low_ok = away >= -margin or claim.sense == "<="
    high_ok = away <= margin or claim.sense == ">="
    if low_ok and high_ok:
        settled = not beyond or beyond == claim.sense
    else:
        settled = not ((beyond == ">=" and high_ok) or (beyond == "<=" and low_ok))
    verdict = ("agrees" if low_ok and high_ok else "differs") if settled else "cannot tell"
    value, error = figure.rounded()
    bound = f"{figure.bound} " if figure.bound else ""
    sentence = f"{claim.text}: read {bound}{value} +- {error} {figure.unit}"
    sentence += f", {away:+.2g} from the stated, within {margin:.2g} counts as agreement"
    return Verdict(claim=claim, verdict=verdict, sentence=sentence)


def _margin(claim, figure):
    if claim.sense != "=":
        return figure.error95 + claim.rounding
    if math.isfinite(claim.tolerance):
        return claim.tolerance + figure.error95
    return math.hypot(figure.error95, RECTANGULAR95 * claim.rounding)
