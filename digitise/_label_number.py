"""Numbers in a line of text, with their odds: what a recogniser's columns say about every number that a chart
prints.

A prefix search over the columns (Graves et al., ICML 2006, section 3.2) keeps only prefixes that can still
become a sign, digits and a unit. Characters that look alike in small print count for each other with a
discount: the capital O for a zero, a long dash for a minus. The odds of all texts add to 1, so what is
missing is the odds of "no number".
"""

import math
import re
from dataclasses import dataclass

import numpy as np

__all__ = ["Alphabet", "NumberOdds", "plain_text"]

LOOKS_LIKE = {
    "0": "OoØøΟο〇○",
    "1": "lI|i丨",
    "2": "Zz",
    "3": "",
    "4": "",
    "5": "Ss",
    "6": "Gb",
    "7": "",
    "8": "B",
    "9": "gq",
    "-": "−–—_~－一ー﹣‐‑",
    "+": "十＋",
    ".": ",·。",
    "d": "oc4a6",
    "B": "8bRРВ",
    "i": "l1I!",
    "°": "º˚oO'\"",
    " ": "",
}
ALIKE = 0.5  # what a look-alike counts
DEGREE_FROM_ZERO = 0.15  # a raised ring may be read as a zero
WHOLE = {
    "bearing": re.compile(r"([-+]?)(\d{1,3})(°)?"),
    "level": re.compile(r"([-+]?)(\d{1,2}(?:\.\d)?)(dB[id]?)?"),
}
PREFIX = {  # every beginning of such a number
    "bearing": re.compile(r"[-+]?(\d{1,3}(°)?)?"),
    "level": re.compile(r"[-+]?(\d{1,2}(\.\d?)?(d(B[id]?)?)?)?"),
}
BEAM = 10
LEAST = 1e-4  # odds of a character in a column below which it is not followed


@dataclass(frozen=True, kw_only=True)
class NumberOdds:
    """One reading of a line as a number: value, unit ("", "deg", "dB", "dBi", "dBd") and odds, 0 to 1."""

    value: float
    unit: str
    odds: float


class Alphabet:
    """Columns of a recogniser's classes brought down to the few characters of numbers."""

    def __init__(self, characters):
        place = {}
        for k, character in enumerate(characters):
            place.setdefault(character, k)
        self.symbols = list(LOOKS_LIKE)
        self._classes = [
            [(place[c], 1.0 if c == s else ALIKE) for c in s + LOOKS_LIKE[s] if c in place]
            for s in self.symbols
        ]

    def numbers(self, log_odds, kind):
        """The likeliest numbers of a line, best first: list of `NumberOdds`.

        log_odds : (columns, classes); kind : "bearing" (three digits, degree sign) or "level" (two digits,
            one decimal, dB)
        """
        odds = np.exp(log_odds)
        columns = np.stack(
            [sum(odds[:, k] * weight for k, weight in classes) for classes in self._classes], axis=1
        )
        degree, zero = self.symbols.index("°"), self.symbols.index("0")
        columns[:, degree] += DEGREE_FROM_ZERO * columns[:, zero]
        columns = np.minimum(columns, 1.0)
        blank = np.minimum(
            odds[:, 0] + columns[:, self.symbols.index(" ")], 1.0
        )  # spaces carry no meaning here
        return _gather(_prefix_search(self.symbols, columns, blank, PREFIX[kind]), WHOLE[kind])


def _prefix_search(symbols, columns, blank, prefix):
    """Odds of the likeliest texts: {text: odds}."""
    beams = {"": (1.0, 0.0)}  # text: odds of ending in a blank, in its last character
    for row, gap in zip(columns, blank):
        grown = {}

        def add(text, in_blank, in_mark, grown=grown):
            old = grown.get(text, (0.0, 0.0))
            grown[text] = (old[0] + in_blank, old[1] + in_mark)

        live = [(symbol, row[k]) for k, symbol in enumerate(symbols) if symbol != " " and row[k] > LEAST]
        for text, (in_blank, in_mark) in beams.items():
            add(text, (in_blank + in_mark) * gap, 0.0)
            for symbol, share in live:
                if text and text[-1] == symbol:
                    add(text, 0.0, in_mark * share)
                    fresh = in_blank * share
                else:
                    fresh = (in_blank + in_mark) * share
                if fresh > 0 and prefix.fullmatch(text + symbol):
                    add(text + symbol, 0.0, fresh)
        kept = sorted(grown.items(), key=lambda item: -sum(item[1]))[:BEAM]
        beams = dict(kept)
    return {text: sum(both) for text, both in beams.items()}


def _gather(texts, whole):
    """Texts of one value and unit together, best first."""
    total = {}
    for text, odds in texts.items():
        match = whole.fullmatch(text)
        if match is None:
            continue
        sign, digits, unit = match.groups()
        if len(digits) > 1 and digits[0] == "0" and "." not in digits:
            continue
        value = math.copysign(float(digits), -1.0) if sign == "-" and float(digits) else float(digits)
        key = value, {"°": "deg", None: ""}.get(unit, unit)
        total[key] = min(1.0, total.get(key, 0.0) + odds)
    ranked = sorted(total.items(), key=lambda item: -item[1])
    return [NumberOdds(value=value, unit=unit, odds=float(odds)) for (value, unit), odds in ranked]


def plain_text(log_odds, characters):
    """The likeliest text of a line and the mean odds of its characters."""
    best = log_odds.argmax(axis=1)
    first = (best != 0) & (best != np.concatenate([[0], best[:-1]]))
    if not first.any():
        return "", 0.0
    text = "".join(characters[k] for k in best[first])
    return text, float(np.exp(np.mean(log_odds[first, best[first]])))
