"""The scale from the printed ring labels, with what the user told laid on top.

The labels vote for a law and levels (`_level_vote`); the rings that they name, and the other drawn rings that
stand at whole steps of the same scale, then fix it by least squares. How sure that is shows in how many
labels agree, whether any as sure disagrees, and how far the best other scale is behind; below the bounds here
the scale carries a reason.
"""

import numpy as np

from ._laws import LOG_DB, fit_law
from ._level_vote import LevelReading, vote_levels
from ._marks import Anchors, anchors_from_marks
from ._scale_told import FIT_PX, REFUSE_PX, to_scale, unit_of
from .exceptions import NotReadError
from .review import reason

__all__ = ["scale_from_labels"]

ENOUGH = 3  # labels that agree, with which habits of the trade are not needed
SURE_MARGIN = 3.0  # log odds by which the next scale must be behind, with ENOUGH labels
CLEAR_MARGIN = 5.0  # with which up to half as many may disagree
PAIR_MARGIN = 3.5  # and with two
ALONE_MARGIN = 3.0  # and with one label, to go on at all
ON_STEP_PX = 0.5  # a drawn ring this near to a whole step of the scale is taken to stand on it
TOLD_ODDS = 1.0


def scale_from_labels(grid, *, settings, labels):
    """The `Scale` that the labels support; raises `NotReadError` naming the options that help."""
    told = _told_anchors(grid, settings)
    readings = _readings(grid, labels, told)
    laws = (settings.law,) if settings.law in ("even", *LOG_DB) else ("even", *LOG_DB)
    if settings.centre_db is not None:
        laws = ("even",)
    vote = (
        vote_levels(readings, ring_rho=grid.ring_rho, outer_px=grid.outer_px, laws=laws) if readings else None
    )
    n_read = sum(1 for item in readings if item.options[0][1] >= 0.5 and item.ring not in told)
    if (
        vote is None
        or not n_read
        or not vote.support
        or (len(vote.support) < 2 and vote.margin < ALONE_MARGIN)
    ):
        raise _refusal(settings, labels, n_read)
    anchors = _anchors(grid, vote, told)
    fit = fit_law(vote.law, anchors.rho, anchors.rho_u, anchors.level_db)
    off_px = float(np.abs(fit.misfit_rho).max()) * grid.outer_px
    if off_px > REFUSE_PX:
        raise _refusal(settings, labels, n_read)
    reasons = _reasons(vote, labels, n_read, off_px)
    return to_scale(grid, fit, anchors, unit_of(labels), "labels", reasons)


def _told_anchors(grid, settings):
    """{ring index (-1 the centre): level} of what the user told."""
    told = {}
    if settings.outer_db is not None:
        told[0] = float(settings.outer_db)
    if settings.centre_db is not None:
        told[-1] = float(settings.centre_db)
    if settings.marks:
        one = anchors_from_marks(grid, settings.marks, enough=1)
        ring = -1 if one.rho[0] == 0 else int(np.argmin(np.abs(grid.ring_rho - one.rho[0])))
        told[ring] = float(one.level_db[0])
    return told


def _readings(grid, labels, told):
    """What every ring says: labels, replaced by what was told."""
    readings, lone = {}, []
    for label in labels.with_role("ring") if labels is not None else ():
        options = label.readings or (((label.value, label.confidence),) if label.value is not None else ())
        if not options:
            continue
        if label.ring_rho_u > 0:
            lone.append(
                LevelReading(ring=None, rho=label.ring_rho, rho_u=label.ring_rho_u, options=tuple(options))
            )
            continue
        rho = label.ring_rho if np.isfinite(label.ring_rho) else label.rho
        ring = int(np.argmin(np.abs(grid.ring_rho - rho)))
        readings[ring] = LevelReading(ring=ring, rho=float(grid.ring_rho[ring]), options=tuple(options))
    for ring, level in told.items():
        rho = float(grid.ring_rho[ring]) if ring >= 0 else 0.0
        readings[ring] = LevelReading(ring=ring, rho=rho, options=((level, TOLD_ODDS),))
    return [*readings.values(), *lone]


def _anchors(grid, vote, told):
    """Rings of known level: those whose labels agree, and the others that stand at whole steps of the same
    scale.
    """
    level = {**{ring: value for ring, value in vote.support if ring is not None}, **told}
    values = np.array(sorted({value for _, value in vote.support} | set(told.values())))
    scale_level = vote.level(grid.ring_rho)
    if vote.law == "even":
        step = float(np.diff(values).min()) if len(values) > 1 else 1.0
        whole = values[0] + step * np.round((scale_level - values[0]) / step)
        off_px = np.abs(whole - scale_level) / vote.slope * grid.outer_px
        for ring in np.flatnonzero(off_px < ON_STEP_PX):
            level.setdefault(int(ring), float(whole[ring]))
        if len(level) < 2:  # one label and habit: the scale as voted
            level.setdefault(-1, float(vote.level(0.0)))
    return Anchors.of(grid, list(level), list(level.values()))


def _reasons(vote, labels, n_read, off_px):
    n, detail = len(vote.support), f"law {vote.law}, outermost ring {vote.outer_db:.3g} dB"
    few_against = vote.against <= n / 3 or (vote.against <= n / 2 and vote.margin >= CLEAR_MARGIN)
    enough = n >= ENOUGH and vote.margin >= SURE_MARGIN and few_against
    pair = n == vote.signed == 2 and vote.margin >= PAIR_MARGIN and vote.against == 0 and vote.law == "even"
    if not (enough or pair):
        yield reason("levels-guessed", n, detail)
    elif labels is not None and not labels.ring_safe:
        yield reason("levels-guessed", n, f"{detail}; the labels stand between rings")
    if off_px > FIT_PX:
        yield reason("law-doubtful", off_px, vote.law)


def _refusal(settings, labels, n_read=0):
    lacking = [] if settings.outer_db is not None else ["--outer"]
    lacking += [] if settings.centre_db is not None else ["--centre"]
    if settings.marks:
        lacking = ["another --mark"]
    if labels is None or not labels.engine:
        lacking += [] if settings.zero_deg is not None else ["--zero"]
        lacking += [] if settings.turn is not None else ["--turn"]
        cause, also = (
            "the ring levels are not told and labels are not read here",
            ', or install "digitise[labels]"',
        )
    else:
        cause = "no ring labels were found" if n_read == 0 else f"the {n_read} ring labels read fit no scale"
        lacking += [] if settings.law else ["--law"]
        also = ""
    listed = lacking[0] if len(lacking) == 1 else f"{', '.join(lacking[:-1])} and {lacking[-1]}"
    return NotReadError(cause, remedy=f"give {listed}{also}", stage="scale")
