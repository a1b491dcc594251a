"""What the user asks of a reading: every option of `digitise read` that shapes the result, checked."""

import math
import re
from dataclasses import dataclass, fields

from .exceptions import UsageError

__all__ = ["LAWS", "Mark", "Settings"]

LAWS = ("even", "field", "power", "log-periodic", "rings")
ZERO_WORDS = {"top": 0.0, "right": 90.0, "bottom": 180.0, "left": 270.0}
INK_FORM = re.compile(r"#[0-9a-fA-F]{6}")


@dataclass(frozen=True, kw_only=True)
class Mark:
    """A point clicked on a ring: x_px, y_px on the picture, level_db as typed."""

    x_px: float
    y_px: float
    level_db: float


@dataclass(frozen=True, kw_only=True)
class Settings:
    """Everything the user may fix; None or () leaves it to the tool.

    outer_db, centre_db : level at the outermost ring and at the centre point, dB
    marks : tuple of Mark
    law : one of LAWS
    ring_levels : tuple of float, outermost first, dB
    zero_deg : where 0 degrees is printed, degrees clockwise from the top of the picture
    turn : "cw" or "ccw"
    inks : tuple of "#rrggbb"
    covers : tuple of (x, y, w, h), px
    pins : tuple of (x, y), px
    crop : (x, y, w, h), px
    page : 1-based page of a PDF
    step_deg : step of the table, degrees
    scale, bearing : a Scale and a Bearing taken over from an earlier record, used in place of finding them
    grid : a Grid used in place of finding it; grid_from : "by hand", or "record" for an earlier record's
    chart : (k, n), read only the k-th, from 1 in reading order, of the n charts on the picture
    """

    outer_db: float | None = None
    centre_db: float | None = None
    marks: tuple = ()
    law: str | None = None
    ring_levels: tuple = ()
    zero_deg: float | None = None
    turn: str | None = None
    inks: tuple = ()
    covers: tuple = ()
    pins: tuple = ()
    crop: tuple | None = None
    page: int | None = None
    step_deg: float = 1.0
    scale: object = None
    bearing: object = None
    grid: object = None
    grid_from: str = "by hand"
    chart: tuple | None = None

    def __post_init__(self):
        """Refuse what cannot be right for any picture, naming the option."""
        if self.law is not None and self.law not in LAWS:
            raise UsageError(f"--law {self.law} is not one of {', '.join(LAWS)}", stage="settings")
        if self.turn not in (None, "cw", "ccw"):
            raise UsageError(f"--turn {self.turn} is not cw or ccw", stage="settings")
        if self.outer_db is not None and self.outer_db == self.centre_db:
            raise UsageError(
                f"--outer and --centre are both {self.outer_db:g} dB",
                remedy="give the level of the outermost ring and that of the centre point",
                stage="settings",
            )
        if not 0.05 <= self.step_deg <= 30 or abs(360 / self.step_deg - round(360 / self.step_deg)) > 1e-6:
            raise UsageError(f"--step {self.step_deg:g} does not divide 360 degrees evenly (0.05 to 30)", stage="settings")
        if self.law == "rings" and not self.ring_levels:
            raise UsageError("--law rings needs the levels", remedy="add --ring-levels, outermost first", stage="settings")
        if len(self.ring_levels) == 1:
            raise UsageError("--ring-levels needs two levels or more", stage="settings")
        if self.ring_levels and any(b >= a for a, b in zip(self.ring_levels, self.ring_levels[1:])):
            raise UsageError("--ring-levels must fall from the outermost ring inward", stage="settings")
        if (self.marks or self.ring_levels) and (self.outer_db is not None or self.centre_db is not None):
            raise UsageError("--mark and --ring-levels replace --outer and --centre; give one or the other", stage="settings")
        if self.marks and self.ring_levels:
            raise UsageError("--mark and --ring-levels both give levels; give one or the other", stage="settings")
        for ink in self.inks:
            if not INK_FORM.fullmatch(ink):
                raise UsageError(f"--ink {ink} is not a colour", remedy="write it as '#rrggbb'", stage="settings")
        for box in (*self.covers, *([self.crop] if self.crop else [])):
            if box[2] <= 0 or box[3] <= 0:
                cause = f"{'--crop' if box is self.crop else '--cover'} {','.join(f'{v:g}' for v in box)} has no size"
                raise UsageError(cause, remedy="give X,Y,WIDTH,HEIGHT in pixels", stage="settings")
        for name, value in self._numbers():
            if not math.isfinite(value):
                raise UsageError(f"{name} is not a finite number", stage="settings")

    def _numbers(self):
        """Yield (name, value) of every number held, nested tuples and marks included."""
        for field in fields(self):
            stack = [getattr(self, field.name)]
            while stack:
                value = stack.pop()
                if isinstance(value, Mark):
                    stack.extend((value.x_px, value.y_px, value.level_db))
                elif isinstance(value, (tuple, list)):
                    stack.extend(value)
                elif isinstance(value, (int, float)):
                    yield field.name, value
