"""What is raised when a reading cannot go on.

    DigitiseError                 base: a stage, a cause and a remedy, shown as one line
     +-- UsageError        exit 2   options that contradict each other or cannot be right
     +-- NotReadError      exit 3   the picture opened, but needs the user's help (no grid, no levels, no ink)
     +-- PictureError      exit 4   the file cannot be opened (missing, empty, broken, too large, not a picture)

A reading that goes on but is doubtful raises nothing: it carries a row state or a review reason (`review`).
"""

__all__ = ["DigitiseError", "NotReadError", "PictureError", "UsageError"]


class DigitiseError(Exception):
    """Base of every error that a user can cause or cure.

    Parameters
    ----------
    cause : str
        What is wrong, one clause, no full stop.
    remedy : str
        What the user can do, one clause; may name a command-line option.
    stage : str
        The stage of the flow that stopped ("picture", "grid", "scale", ...).
    source : str
        The file concerned; may be filled in later by the caller that knows it.
    """

    exit_status = 3

    def __init__(self, cause, *, remedy="", stage="", source=""):
        super().__init__(cause)
        self.cause = cause
        self.remedy = remedy
        self.stage = stage
        self.source = source

    def __str__(self):
        head = f"{self.source}: " if self.source else ""
        tail = f"; {self.remedy}" if self.remedy else ""
        return " ".join(f"{head}{self.cause}{tail}".split())

    def __reduce__(self):
        # Keyword-only fields do not survive the default pickling, which worker processes rely on.
        return (_rebuild, (type(self), self.cause, self.remedy, self.stage, self.source))


class UsageError(DigitiseError):
    """Options that contradict each other or cannot be right for any picture."""

    exit_status = 2


class NotReadError(DigitiseError):
    """The picture opened but cannot be read without help; the remedy names the option that helps."""

    exit_status = 3


class PictureError(DigitiseError):
    """The file cannot be opened as a picture or a page."""

    exit_status = 4


def _rebuild(kind, cause, remedy, stage, source):
    return kind(cause, remedy=remedy, stage=stage, source=source)
