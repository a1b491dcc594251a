"""The scale from what the user told alone: outer and centre, marks, or the levels ring by ring."""

import numpy as np

from ._laws import LOG_DB, fit_law, fit_laws
from ._level_match import match_levels
from ._marks import MIN_RING_U_PX, Anchors, anchors_from_marks, anchors_from_ring_levels
from .exceptions import UsageError
from .review import reason
from .scale import Scale

__all__ = ["scale_from_told", "to_scale"]

FIT_PX = 1.0  # rings further than this from a law do not follow it
REFUSE_PX = 3.0  # so far off that one of the levels is wrong
CHANCE = 0.02  # that rings fall on whole dB by accident, below which they are evidence of a law


def scale_from_told(grid, *, settings, labels=None):
    """The `Scale` when the user told enough, else None; raises `UsageError` where the values contradict."""
    unit = unit_of(labels)
    law = settings.law
    if settings.ring_levels:
        anchors = None
        if len(settings.ring_levels) != len(grid.ring_rho) and law != "rings":
            anchors = match_levels(grid, settings.ring_levels, law)
        anchors = anchors_from_ring_levels(grid, settings.ring_levels) if anchors is None else anchors
        return _from_ring_levels(grid, anchors, law, unit)
    if settings.marks:
        if len(settings.marks) > 1 or law in LOG_DB:
            return _from_marks(grid, settings.marks, law, unit)
        return None
    if settings.centre_db is not None and law in LOG_DB:
        raise UsageError(
            f"--centre has no meaning under --law {law}, which never reaches the centre",
            remedy="give --outer alone, or --mark on two rings",
            stage="scale",
        )
    if settings.outer_db is None:
        return None
    if law in LOG_DB:
        anchors = Anchors.of(grid, [0], [settings.outer_db])
        return to_scale(
            grid, fit_law(law, anchors.rho, anchors.rho_u, anchors.level_db), anchors, unit, "outer-centre"
        )
    if settings.centre_db is None:
        return None
    return _from_outer_centre(grid, settings.outer_db, settings.centre_db, unit)


def to_scale(grid, fit, anchors, unit, source, reasons=()):
    """A `LawFit` on `Anchors` as a `Scale`."""
    return Scale(
        law=fit.law,
        parameters=fit.parameters,
        covariance=fit.covariance,
        anchor_rho=anchors.rho,
        anchor_rho_u=anchors.rho_u,
        anchor_db=anchors.level_db,
        unit=unit,
        residual_px=fit.rms_rho * grid.outer_px,
        source=source,
        reasons=tuple(reasons),
    )


def unit_of(labels):
    """The unit that most labels print, "" when none does."""
    units = (
        [label.unit for label in labels.found if label.unit.startswith("dB")] if labels is not None else []
    )
    return max(sorted(set(units)), key=units.count) if units else ""


def _from_outer_centre(grid, outer_db, centre_db, unit):
    if centre_db > outer_db:
        raise UsageError(
            f"--centre {centre_db:g} lies above --outer {outer_db:g}; levels must fall from the outside in",
            remedy="write attenuations with a minus sign",
            stage="scale",
        )
    anchors = Anchors.of(grid, [0, -1], [outer_db, centre_db])
    rho_u = np.array([anchors.rho_u[0], MIN_RING_U_PX / grid.outer_px])
    return to_scale(
        grid, fit_law("even", anchors.rho, rho_u, anchors.level_db), anchors, unit, "outer-centre"
    )


def _from_marks(grid, marks, law, unit):
    anchors = anchors_from_marks(grid, marks, enough=1 if law in LOG_DB else 2)
    if law in LOG_DB and anchors.rho[-1] == 0:
        raise UsageError(
            f"a mark gives the centre a level, which --law {law} never reaches",
            remedy="put the mark on a ring",
            stage="scale",
        )
    fit, reasons = _fit(grid, anchors, law)
    off_px = float(np.abs(fit.misfit_rho).max()) * grid.outer_px
    if off_px > REFUSE_PX:
        odd = fit.worst
        raise UsageError(
            f"the marks fit no {'law' if law is None else f'--law {law}'} "
            f"(best {fit.law}, {off_px:.1f} px off at "
            f"{anchors.level_db[odd]:g} dB, radius {anchors.rho[odd] * grid.outer_px:.0f} px)",
            remedy="check the levels, or give them ring by ring with --law rings --ring-levels",
            stage="scale",
        )
    return to_scale(grid, fit, anchors, unit, "marks", reasons)


def _from_ring_levels(grid, anchors, law, unit):
    if law == "rings":
        return _through_rings(anchors, unit)
    fit, reasons = _fit(grid, anchors, law)
    off_px = float(np.abs(fit.misfit_rho).max()) * grid.outer_px
    if law is None and off_px > FIT_PX:
        return _through_rings(anchors, unit)
    if off_px > REFUSE_PX:
        raise UsageError(
            f"the ring levels fit --law {law} only to {off_px:.1f} px "
            f"(worst at {anchors.level_db[fit.worst]:g} dB)",
            remedy="check the levels, or use --law rings",
            stage="scale",
        )
    return to_scale(grid, fit, anchors, unit, "ring-levels", reasons)


def _through_rings(anchors, unit):
    return Scale(
        law="rings",
        parameters=np.zeros(0),
        covariance=np.zeros((0, 0)),
        anchor_rho=anchors.rho,
        anchor_rho_u=anchors.rho_u,
        anchor_db=anchors.level_db,
        unit=unit,
        residual_px=float("nan"),
        source="ring-levels",
    )


def _fit(grid, anchors, law):
    """The told law's fit, or the best law's; with reasons where it is in doubt."""
    data = anchors.rho, anchors.rho_u, anchors.level_db
    if law is not None:
        fit = fit_law(law, *data)
        return fit, _doubt(grid, fit)
    if len(anchors.rho) == 2:
        return _even_or_round(grid, data)
    laws = ("even",) if anchors.rho[-1] == 0 else ("even", *LOG_DB)
    fit, *others = fit_laws(laws, *data)
    reasons = _doubt(grid, fit)
    if not reasons and any(np.abs(other.misfit_rho).max() * grid.outer_px < FIT_PX for other in others):
        reasons = [
            reason("law-doubtful", fit.rms_rho * grid.outer_px, f"{fit.law} (and the {others[0].law})")
        ]
    return fit, reasons


def _doubt(grid, fit):
    off_px = float(np.abs(fit.misfit_rho).max()) * grid.outer_px
    return [reason("law-doubtful", off_px, fit.law)] if off_px > FIT_PX else []


def _even_or_round(grid, data):
    """The law for two known rings: even, unless the rings between them speak for another.

    Two rings fit any law. The other drawn rings decide: under the right law they are evenly spaced, or stand
    at whole dB. When that holds for no law, the even one carries a reason.
    """
    fits = {law: fit_law(law, *data) for law in (("even",) if data[0][-1] == 0 else ("even", *LOG_DB))}
    rho = grid.ring_rho[(grid.ring_rho < data[0].max() - 1e-6) & (grid.ring_rho > data[0].min() + 1e-6)]
    off = {law: whole_db_misfit(fit, rho, grid.outer_px) for law, fit in fits.items()}
    if (
        not len(rho)
        or evenly_spaced(np.concatenate([data[0], rho]), grid.outer_px)
        or off["even"][0] < FIT_PX
    ):
        return fits["even"], []
    law = min(off, key=lambda name: off[name][0])
    worst_px, chance = off[law]
    if worst_px < FIT_PX and chance < CHANCE:
        return fits[law], []
    return fits["even"], [reason("law-doubtful", off["even"][0], "even")]


def whole_db_misfit(fit, rho, outer_px):
    """Largest distance (px) of rings from the whole dB under a law, and the odds that chance does as well."""
    if not len(rho):
        return 0.0, 1.0
    scale = Scale(
        law=fit.law,
        parameters=fit.parameters,
        covariance=fit.covariance,
        anchor_rho=rho,
        anchor_db=rho,
        unit="",
        residual_px=0.0,
        source="",
    )
    off_px = np.abs(scale.rho(np.round(scale.level(rho))) - rho) * outer_px
    px_per_db = outer_px / scale.slope(rho)
    return float(off_px.max()), float(np.prod(np.minimum(1.0, 2 * np.maximum(off_px, 0.3) / px_per_db)))


def evenly_spaced(rho, outer_px):
    """Whether radii are whole multiples of one step (one ring may be missing or extra at either end)."""
    gaps = -np.diff(np.unique(np.round(rho * outer_px, 3))[::-1])
    step = np.median(gaps)
    return bool(
        np.all(np.abs(gaps / step - np.round(gaps / step)) * step < FIT_PX) and np.all(gaps > step / 2)
    )
