"""The fields as data: what each is called, how its text is read, told and shown; no widget."""

from collections.abc import Callable
from dataclasses import dataclass

from digitise.exceptions import UsageError
from digitise.settings import LAWS, ZERO_WORDS

from .level_text import read_level

__all__ = ["SPECS", "Spec"]

AS_FOUND = "as found"
TURNS = {AS_FOUND: None, "clockwise": "cw", "counter-clockwise": "ccw"}
LEVEL_WORDS = {"outer_db": "outermost ring", "centre_db": "centre", "ring_levels": "ring levels"}


@dataclass(frozen=True, kw_only=True)
class Spec:
    """One field.

    title, unit : as shown; read : text -> value, raising `UsageError`; tell : (session, value) -> None
    show : session -> text of what is told; choices : to choose from; fixed : nothing else may be typed
    """

    title: str
    unit: str
    read: Callable
    tell: Callable
    show: Callable
    choices: tuple = ()
    fixed: bool = False


def _numbers(text):
    return tuple(read_level(part) for part in text.replace(";", ",").split(",") if part.strip())


def _level_or_none(text):
    return read_level(text) if text else None


def _law(text):
    return None if text == AS_FOUND else text


def _zero(text):
    if text in ("", AS_FOUND):
        return None
    return ZERO_WORDS[text] if text in ZERO_WORDS else read_level(text.removesuffix("\u00b0")) % 360


def _step(text):
    return read_level(text.removesuffix("\u00b0")) if text else 1.0


def _box(text):
    numbers = _numbers(text)
    if numbers and len(numbers) != 4:
        raise UsageError("four numbers are needed: left, top, width, height")
    return numbers or None


def _show_number(value):
    return "" if value is None else f"{value:g}"


def _show_numbers(values):
    return ", ".join(f"{value:g}" for value in values or ())


def _show_zero(session):
    value = session.settings.zero_deg
    words = {deg: word for word, deg in ZERO_WORDS.items()}
    return AS_FOUND if value is None else words.get(value, f"{value:g}")


def _show_turn(session):
    return next(word for word, turn in TURNS.items() if turn == session.settings.turn)


def _tell_level(name):
    def tell(session, value):
        number = f" {value:g} dB" if isinstance(value, float) else ""
        session.tell_levels(LEVEL_WORDS[name] + number, **{name: value})

    return tell


def _tell_zero(session, value):
    session.tell_bearing(
        "0\u00b0 as found" if value is None else f"0\u00b0 at {value:g}\u00b0", zero_deg=value
    )


def _tell_turn(session, value):
    words = {"cw": "clockwise", "ccw": "counter-clockwise", None: "turn as found"}[value]
    session.tell_bearing(words, turn=value)


SPECS = {  # by the name that faults know a field by
    "outer": Spec(
        title="Outermost ring",
        unit="dB",
        read=_level_or_none,
        tell=_tell_level("outer_db"),
        show=lambda session: _show_number(session.settings.outer_db),
    ),
    "centre": Spec(
        title="Centre",
        unit="dB",
        read=_level_or_none,
        tell=_tell_level("centre_db"),
        show=lambda session: _show_number(session.settings.centre_db),
    ),
    "law": Spec(
        title="Law",
        unit="",
        read=_law,
        tell=lambda session, value: session.tell_law(value),
        show=lambda session: session.settings.law or AS_FOUND,
        choices=(AS_FOUND, *LAWS),
        fixed=True,
    ),
    "ring-levels": Spec(
        title="Ring levels",
        unit="dB",
        read=_numbers,
        tell=_tell_level("ring_levels"),
        show=lambda session: _show_numbers(session.settings.ring_levels),
    ),
    "zero": Spec(
        title="0\u00b0 at",
        unit="\u00b0",
        read=_zero,
        tell=_tell_zero,
        show=_show_zero,
        choices=(AS_FOUND, *ZERO_WORDS),
    ),
    "turn": Spec(
        title="Angles grow",
        unit="",
        read=TURNS.get,
        tell=_tell_turn,
        show=_show_turn,
        choices=tuple(TURNS),
        fixed=True,
    ),
    "step": Spec(
        title="Step",
        unit="\u00b0",
        read=_step,
        tell=lambda session, value: session.tell(f"step {value:g}\u00b0", step_deg=value),
        show=lambda session: _show_number(session.settings.step_deg),
    ),
    "crop": Spec(
        title="Crop",
        unit="px",
        read=_box,
        tell=lambda session, value: session.tell_crop(value),
        show=lambda session: _show_numbers(session.now.template.crop),
    ),
}
