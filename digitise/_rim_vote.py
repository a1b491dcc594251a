"""Where 0 is printed and which way bearings grow: the rim labels vote.

Under a supposed zero and turn every label should stand at its own value. Each label votes with the odds of
its readings; the best zero and turn win when another turn or zero would leave clearly more labels
unexplained. Labels that read the same both ways (0, 90, 180, 90) explain both turns equally well, and that is
said.
"""

from dataclasses import dataclass

import numpy as np

__all__ = ["RimVote", "vote_rim"]

SPREAD_DEG = 2.2  # a label's middle stands so far off its spoke, one standard deviation
REACH_DEG = 7.0  # beyond this a label speaks against
OTHER_DEG = 9.0  # zeros closer than this are the same


@dataclass(frozen=True, kw_only=True)
class RimVote:
    """The winning zero (plane angle, degrees) and turn.

    members : indices of the labels that agree; values : the bearing that each of them is read as
    score, rival_score : sum of odds for this zero and turn, and for the best other one; mirror_score : for
        the best with the other turn; spread_deg : rms of the members' places about their bearings
    """

    zero_deg: float
    turn: str
    members: tuple
    values: tuple
    score: float
    rival_score: float
    mirror_score: float
    spread_deg: float


def vote_rim(plane_deg, options, *, zero_deg=None, turn=None):
    """The best `RimVote`, or None when no label can be a bearing.

    plane_deg : (n,) plane angles of the labels' middles; options : per label, a sequence of (bearing, odds)
    zero_deg, turn : told values that hold, or None
    """
    place, value, odds, owner = [], [], [], []
    for k, (angle, choices) in enumerate(zip(plane_deg, options)):
        for bearing, share in choices:
            place.append(angle), value.append(bearing), odds.append(share), owner.append(k)
    if not place:
        return None
    place, value, odds, owner = (np.array(item, float) for item in (place, value, odds, owner))
    turns = [(name, sign) for name, sign in (("cw", 1.0), ("ccw", -1.0)) if turn in (None, name)]
    told = None if zero_deg is None else np.array([float(zero_deg)])
    trials = [(t, s, z) for t, s in turns for z in (_zeros(place - s * value) if told is None else told)]
    scored = [(_score(place, value, odds, owner, s, z)[0], t, s, z) for t, s, z in trials]
    score, turn, sign, zero = max(scored, key=lambda item: item[0])
    for _ in range(2 if told is None else 0):
        _, member, off = _score(place, value, odds, owner, sign, zero)
        zero = zero + float(np.average(off[member], weights=odds[member])) if member.any() else zero
    score, member, off = _score(place, value, odds, owner, sign, zero)
    rivals = [s for s, t, _, z in scored if t != turn or abs(_wrap(z - zero)) > OTHER_DEG]
    mirrors = [s for s, t, _, _ in scored if t != turn]
    return RimVote(
        zero_deg=float(zero % 360),
        turn=turn,
        members=tuple(int(k) for k in owner[member]),
        values=tuple(float(v) for v in value[member]),
        score=float(score),
        rival_score=float(max(rivals, default=0.0)),
        mirror_score=float(max(mirrors, default=0.0)),
        spread_deg=float(np.sqrt(np.mean(off[member] ** 2))) if member.any() else np.nan,
    )


def _zeros(offsets):
    """Trial zeros: every label's own, those within a degree taken once."""
    return np.unique(np.round(offsets % 360)) % 360


def _score(place, value, odds, owner, sign, zero):
    """Sum over labels of their best agreeing reading; which readings those are; every reading's distance."""
    off = _wrap(place - (zero + sign * value))
    worth = np.where(np.abs(off) < REACH_DEG, odds / (1 + 0.5 * (off / SPREAD_DEG) ** 2), 0.0)
    order = np.lexsort((-worth, owner))
    first = np.ones(len(order), bool)
    first[1:] = owner[order][1:] != owner[order][:-1]
    member = np.zeros(len(order), bool)
    member[order[first]] = worth[order[first]] > 0
    return float(worth[member].sum()), member, off


def _wrap(angle):
    return (angle + 180) % 360 - 180
