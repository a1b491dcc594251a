"""The scale from the printed ring labels, with what the user told laid on top."""

from .exceptions import NotReadError

__all__ = ["scale_from_labels"]


def scale_from_labels(grid, *, settings, labels):
    """The `Scale` that the labels support; raises `NotReadError` naming the options that help."""
    raise _refusal(settings, labels)


def _refusal(settings, labels):
    lacking = [] if settings.outer_db is not None else ["--outer"]
    lacking += [] if settings.centre_db is not None else ["--centre"]
    if settings.marks:
        lacking = ["another --mark"]
    if labels is None or not labels.engine:
        lacking += [] if settings.zero_deg is not None else ["--zero"]
        lacking += [] if settings.turn is not None else ["--turn"]
        cause, also = "the ring levels are not told and labels are not read here", ', or install "digitise[labels]"'
    else:
        cause, also = "the ring levels could not be read", ""
        lacking += [] if settings.law else ["--law"]
    listed = lacking[0] if len(lacking) == 1 else f"{', '.join(lacking[:-1])} and {lacking[-1]}"
    return NotReadError(cause, remedy=f"give {listed}{also}", stage="scale")
