"""Which law and which levels the rings have: the ring labels vote.

Every pair of readings proposes an even scale, every single reading a logarithmic one. A proposal is worth the odds of
all readings that stand where it says, so one wrong label cannot win over two right ones; a reading whose minus sign
was lost counts a little for its negative. Habits of the trade (whole dB, steps of 1, 2, 3, 5, 6, 10 or 20 dB, 0 or a
multiple of the step at the rim) rank proposals that the labels alone do not tell apart; what rests on them is told
from `support` and `margin`.
"""

from dataclasses import dataclass

import numpy as np

from ._laws import LOG_DB

__all__ = ["LevelReading", "LevelVote", "vote_levels"]

SIGN_LOST = 0.12  # share of a reading that counts for its negative: minus signs are thin
SIGN_MADE = 0.03  # and of a negative one for its positive: a grid line may look like a minus
FLOOR = 0.02  # odds left to a label that is read wrong with confidence
UNREAD = 0.2  # worth of the odds of "no number"
MATCH_PX, MATCH_RHO = 1.0, 0.002
USUAL_STEPS = (1.0, 2.0, 3.0, 5.0, 6.0, 10.0, 20.0)
RARE_STEPS = (0.5, 2.5, 4.0, 8.0, 15.0, 25.0, 30.0, 40.0, 50.0)
SAME_DB = 0.3  # scales that differ by less are the same proposal
SURE_ODDS = 0.5
MAX_SPAN_DB = 150.0


@dataclass(frozen=True, kw_only=True)
class LevelReading:
    """What a ring may say: its index, radius, and (level, odds) pairs."""

    ring: int
    rho: float
    options: tuple


@dataclass(frozen=True, eq=False, kw_only=True)
class LevelVote:
    """The winning scale.

    law ; slope : dB per rho of the even law, else NaN ; outer_db : level at rho 1
    support : readings (ring, level) that agree with odds of SURE_ODDS or more
    against : number of readings as sure that disagree
    score : log odds with habits, margin : over the best other proposal
    """

    law: str
    outer_db: float
    slope: float
    support: tuple
    against: int
    score: float
    margin: float

    def level(self, rho):
        """Level at radii, dB."""
        return _levels(self.law, self.outer_db, self.slope, np.asarray(rho, float))


def vote_levels(readings, *, ring_rho, outer_px, laws=("even", *LOG_DB)):
    """The best `LevelVote`, or None when the readings propose nothing.

    readings : sequence of LevelReading; ring_rho : (n,) radii of all drawn rings; outer_px : px of rho 1
    """
    rho, level, odds, owner = _flatten(readings)
    if not len(rho):
        return None
    tolerance = MATCH_PX / outer_px + MATCH_RHO
    best = []
    for law in laws:
        outer, slope = _proposals(law, rho, level, owner)
        if not len(outer):
            continue
        worth, unread = _worth(law, outer, slope, rho, level, odds, owner, len(readings), tolerance)
        score = np.log(worth + UNREAD * unread + FLOOR).sum(axis=1) + _habit(law, outer, slope, ring_rho, tolerance)
        order = np.argsort(-score)[:40]
        best += [(float(score[k]), law, float(outer[k]), float(slope[k]), worth[k]) for k in order]
    if not best:
        return None
    best.sort(key=lambda item: -item[0])
    score, law, outer, slope, worth = best[0]
    probe = np.append(ring_rho[ring_rho > 0.2], 0.35)
    mine = _levels(law, outer, slope, probe)
    others = [s for s, *kind, _ in best[1:] if np.abs(_levels(*kind, probe) - mine).max() > SAME_DB]
    support, against = _count(readings, worth, law, outer, slope, tolerance)
    return LevelVote(
        law=law, outer_db=outer, slope=slope, support=support, against=against, score=score,
        margin=score - max(others, default=score - 99.0),
    )  # fmt: skip


def _flatten(readings):
    rows = [(r.rho, level, odds, k) for k, r in enumerate(readings) for level, odds in _with_signs(r.options)]
    return tuple(np.array(column, float) for column in zip(*rows)) if rows else (np.zeros(0),) * 4


def _with_signs(options):
    """Options with a share of each for the other sign."""
    out = {}
    for level, odds in options:
        out[level] = out.get(level, 0.0) + odds
        if level:
            out[-level] = out.get(-level, 0.0) + odds * (SIGN_LOST if level > 0 else SIGN_MADE)
    return [(level, min(odds, 1.0)) for level, odds in out.items() if odds > 0.004]


def _proposals(law, rho, level, owner):
    """Outer level and slope of every scale that one reading (or two, for even) fixes."""
    if law != "even":
        outer = level - LOG_DB[law] * np.log(rho)
        return outer, np.full(len(outer), np.nan)
    apart = np.abs(rho[:, None] - rho[None, :])
    slope = np.divide(level[:, None] - level[None, :], rho[:, None] - rho[None, :], out=np.zeros(apart.shape), where=apart > 1e-6)
    good = np.triu((owner[:, None] != owner[None, :]) & (apart > 0.02) & (slope > 2) & (slope < MAX_SPAN_DB), 1)
    i, j = np.nonzero(good)
    return level[i] + slope[i, j] * (1 - rho[i]), slope[i, j]


def _levels(law, outer, slope, rho):
    if law == "even":
        return outer + slope * (rho - 1)
    return outer + LOG_DB[law] * np.log(np.maximum(rho, 1e-9))


def _radii(law, outer, slope, level):
    """Radius of levels under every proposal: (proposals, levels)."""
    down = level[None, :] - outer[:, None]
    return 1 + down / slope[:, None] if law == "even" else np.exp(down / LOG_DB[law])


def _worth(law, outer, slope, rho, level, odds, owner, n, tolerance):
    """Agreeing odds of every reading under every proposal (proposals, n), and the odds that it is no number (n,)."""
    match = np.abs(_radii(law, outer, slope, level) - rho[None, :]) < tolerance
    worth, read = np.zeros((len(outer), n)), np.zeros(n)
    for k in range(n):
        mine = owner == k
        worth[:, k] = (match[:, mine] * odds[mine]).sum(axis=1)
        read[k] = odds[mine].sum()
    return np.minimum(worth, 1.0), np.maximum(0.0, 1 - read)


def _habit(law, outer, slope, ring_rho, tolerance):
    """Log of how usual the proposals are (proposals,): whole levels on the rings, a usual step, a usual rim."""
    rings = ring_rho[ring_rho > 0.1]
    levels = np.stack([_levels(law, outer, slope, np.full(len(outer), r)) for r in rings], axis=1)
    per_rho = slope[:, None] if law == "even" else LOG_DB[law] / rings[None, :]
    odd = np.abs(levels - np.round(levels)) > np.maximum(per_rho * tolerance, 0.02)
    habit = -np.minimum(odd.sum(axis=1), 4.0) - (0.0 if law == "even" else 0.7)
    if law == "even" and len(rings) > 1:
        step = slope * np.median(-np.diff(rings))
        slack = slope * tolerance
        near = [np.min(np.abs(step[:, None] - np.array(steps)), axis=1) < slack for steps in (USUAL_STEPS, RARE_STEPS)]
        habit = habit - np.where(near[0], 0.0, np.where(near[1], 1.0, 2.0))
        off_step = np.abs(levels[:, 0] / step - np.round(levels[:, 0] / step)) * step
        habit = habit - np.where(np.abs(levels[:, 0]) < slack, 0.0, np.where(off_step < slack, 0.4, 1.2))
    return habit


def _count(readings, worth, law, outer, slope, tolerance):
    """The agreeing readings that are sure, and how many as sure disagree."""
    support, against = [], 0
    for reading, agreed in zip(readings, worth):
        top_level, top_odds = max(reading.options, key=lambda item: item[1])
        if agreed >= SURE_ODDS:
            level = float(_levels(law, outer, slope, np.array(reading.rho)))
            near = min((abs(s * value - level), s * value) for value, _ in reading.options for s in (1, -1))[1]
            support.append((reading.ring, near))
        elif top_odds >= SURE_ODDS:
            here = _radii(law, np.array([outer]), np.array([slope]), np.array([top_level, -top_level]))[0]
            against += int(np.all(np.abs(here - reading.rho) >= tolerance))
    return tuple(support), against
