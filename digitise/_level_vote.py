"""Which law and which levels the rings have: the ring labels vote.

Every pair of readings proposes an even scale, every single reading a logarithmic one. A proposal is worth the
odds of all readings that stand where it says, so one wrong label cannot win over two right ones; a reading
whose minus sign was lost counts a little for its negative. Habits of the trade (whole dB, steps of 1, 2, 3,
5, 6, 10 or 20 dB, 0 or a multiple of the step at the rim) rank proposals that the labels alone do not tell
apart; what rests on them is told from `support` and `margin`.
"""

from dataclasses import dataclass

import numpy as np

from ._laws import LOG_DB

__all__ = ["LevelReading", "LevelVote", "vote_levels"]

SIGN_LOST = 0.12  # share of a reading that counts for its negative: minus signs are thin
ALL_LOST, ALL_LOST_COST = (
    0.8,
    2.0,
)  # the same where a whole chart's minus signs were lost, and the log odds of that
SIGN_MADE = 0.03  # and of a negative one for its positive: a grid line may look like a minus
FLOOR = 0.02  # odds left to a label that is read wrong with confidence
UNREAD = 0.2  # worth of the odds of "no number"
MATCH_PX, MATCH_RHO = 1.0, 0.002
USUAL_STEPS = (1.0, 2.0, 3.0, 5.0, 6.0, 10.0, 20.0)
RARE_STEPS = (0.5, 2.5, 4.0, 8.0, 15.0, 25.0, 30.0, 40.0, 50.0)
SAME_DB = 0.3  # scales that differ by less are the same proposal
SURE_ODDS = 0.5
AGREED_ODDS, AGREED_SHARE = 0.35, 0.6  # of a reading that supports: at least, and of all its numbers
MAX_SPAN_DB = 150.0


@dataclass(frozen=True, kw_only=True)
class LevelReading:
    """What a ring may say: its index (None where a label stands at no ring that was found), radius, (level,
    odds) pairs.

    rho_u : how far the radius may be off, rho
    """

    ring: int | None
    rho: float
    options: tuple
    rho_u: float = 0.0


@dataclass(frozen=True, eq=False, kw_only=True)
class LevelVote:
    """The winning scale.

    law ; slope : dB per rho of the even law, else NaN ; outer_db : level at rho 1
    support : (ring, level) of the readings that agree; their sign may have been lost
    signed : how many of these were read with their sign (or are 0)
    against : number of readings as sure that disagree
    score : log odds with habits, margin : over the best other proposal
    """

    law: str
    outer_db: float
    slope: float
    support: tuple
    signed: int
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
    rho, level, odds, owner = _flatten(readings, SIGN_LOST)
    if not len(rho):
        return None
    tolerance = MATCH_PX / outer_px + MATCH_RHO
    slack = tolerance + np.array([reading.rho_u for reading in readings])
    best = []
    for law in laws:
        outer, slope = _proposals(law, rho, level, owner)
        if not len(outer):
            continue
        score = _habit(law, outer, slope, ring_rho, tolerance) + np.maximum(
            _agreement(law, outer, slope, (rho, level, odds, owner), slack),
            _agreement(law, outer, slope, _flatten(readings, ALL_LOST), slack) - ALL_LOST_COST,
        )
        order = np.argsort(-score)[:40]
        best += [(float(score[k]), law, float(outer[k]), float(slope[k])) for k in order]
    if not best:
        return None
    best.sort(key=lambda item: -item[0])
    score, law, outer, slope = best[0]
    probe = np.append(ring_rho[ring_rho > 0.2], 0.35)
    mine = _levels(law, outer, slope, probe)
    others = [s for s, *kind in best[1:] if np.abs(_levels(*kind, probe) - mine).max() > SAME_DB]
    support, signed, against = _count(readings, law, outer, slope, slack)
    return LevelVote(
        law=law,
        outer_db=outer,
        slope=slope,
        support=support,
        signed=signed,
        against=against,
        score=score,
        margin=score - max(others, default=score - 99.0),
    )


def _flatten(readings, lost):
    """Radius, level, odds and index of every option of every reading, either sign of it."""
    rows = [
        (r.rho, level, odds, k)
        for k, r in enumerate(readings)
        for level, odds in _with_signs(r.options, lost)
    ]
    return tuple(np.array(column, float) for column in zip(*rows)) if rows else (np.zeros(0),) * 4


def _with_signs(options, lost):
    """Options with a share of each for the other sign."""
    out = {}
    for level, odds in options:
        out[level] = out.get(level, 0.0) + odds
        if level:
            out[-level] = out.get(-level, 0.0) + odds * (lost if level > 0 else SIGN_MADE)
    return [(level, min(odds, 1.0)) for level, odds in out.items() if odds > 0.004]


def _proposals(law, rho, level, owner):
    """Outer level and slope of every scale that one reading (or two, for even) fixes."""
    if law != "even":
        outer = level - LOG_DB[law] * np.log(rho)
        return outer, np.full(len(outer), np.nan)
    apart = np.abs(rho[:, None] - rho[None, :])
    slope = np.divide(
        level[:, None] - level[None, :],
        rho[:, None] - rho[None, :],
        out=np.zeros(apart.shape),
        where=apart > 1e-6,
    )
    good = np.triu(
        (owner[:, None] != owner[None, :]) & (apart > 0.02) & (slope > 2) & (slope < MAX_SPAN_DB), 1
    )
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


def _agreement(law, outer, slope, options, slack):
    """Log odds of all readings under every proposal (proposals,)."""
    rho, level, odds, owner = options
    owner = owner.astype(int)
    match = np.abs(_radii(law, outer, slope, level) - rho[None, :]) < slack[owner]
    total = np.zeros(len(outer))
    for k in range(len(slack)):
        mine = owner == k
        agreed = np.minimum((match[:, mine] * odds[mine]).sum(axis=1), 1.0)
        total += np.log(agreed + UNREAD * max(0.0, 1 - odds[mine].sum()) + FLOOR)
    return total


def _habit(law, outer, slope, ring_rho, tolerance):
    """Log of how usual the proposals are (proposals,): whole levels on the rings, a usual step, a usual
    rim.
    """
    rings = ring_rho[ring_rho > 0.1]
    levels = np.stack([_levels(law, outer, slope, np.full(len(outer), r)) for r in rings], axis=1)
    per_rho = slope[:, None] if law == "even" else LOG_DB[law] / rings[None, :]
    odd = np.abs(levels - np.round(levels)) > np.maximum(per_rho * tolerance, 0.02)
    habit = -np.minimum(odd.sum(axis=1), 4.0) - (0.0 if law == "even" else 0.7)
    if law == "even" and len(rings) > 1:
        step = slope * np.median(-np.diff(rings))
        slack = slope * tolerance
        near = [
            np.min(np.abs(step[:, None] - np.array(steps)), axis=1) < slack
            for steps in (USUAL_STEPS, RARE_STEPS)
        ]
        habit = habit - np.where(near[0], 0.0, np.where(near[1], 1.0, 2.0))
        off_step = np.abs(levels[:, 0] / step - np.round(levels[:, 0] / step)) * step
        habit = habit - np.where(np.abs(levels[:, 0]) < slack, 0.0, np.where(off_step < slack, 0.4, 1.2))
    return habit


def _count(readings, law, outer, slope, slack):
    """The readings that agree, how many of them with their sign, and how many that are as sure disagree."""
    support, signed, against = [], 0, 0
    for reading, near in zip(readings, slack):
        values = np.array([value for value, _ in reading.options])
        odds = np.array([share for _, share in reading.options])
        with_sign, without = (
            np.abs(_radii(law, np.array([outer]), np.array([slope]), sign * values)[0] - reading.rho) < near
            for sign in (1, -1)
        )
        agreed = odds[with_sign | without].sum()
        if agreed >= AGREED_ODDS and agreed >= AGREED_SHARE * odds.sum():
            best = int(np.argmax(np.where(with_sign | without, odds, -1.0)))
            support.append((reading.ring, float(values[best] if with_sign[best] else -values[best])))
            signed += int(odds[with_sign].sum() >= odds[without & ~with_sign].sum())
        elif odds.max() >= SURE_ODDS:
            against += 1
    return tuple(support), signed, against
