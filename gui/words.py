"""What the library says, in the window's words; each fault finds the field that it belongs beside."""

import re

from digitise.exceptions import DigitiseError

__all__ = ["FIELD_TITLES", "fault_field", "said"]

FIELD_TITLES = {  # field -> its title in the window
    "outer": "Outermost ring",
    "centre": "Centre",
    "law": "Law",
    "ring-levels": "Ring levels",
    "mark": "a mark",
    "zero": "0\u00b0 at",
    "turn": "Angles grow",
    "step": "Step",
    "ink": "an ink",
    "cover": "a cover",
    "pin": "a pin",
    "crop": "a crop",
    "page": "the page",
}
STAGE_FIELDS = {
    "scale": "outer",
    "bearing": "zero",
    "ink": "ink",
    "follow": "ink",
    "find": "grid",
    "grid": "grid",
}
OPTION = re.compile(r"--([a-z-]+)(?: X,Y,W,H| X,Y| DB| N)?")


def said(error):
    """One sentence for a person in front of the window."""
    if isinstance(error, DigitiseError):
        head = f"{_short(error.source)}: " if error.source else ""
        text = f"{error.cause}; {error.remedy}" if error.remedy else error.cause
        text = OPTION.sub(lambda found: _title(found[1]), text)
        return head + text if head else text[:1].upper() + text[1:]
    if isinstance(error, MemoryError):
        return "not enough memory; crop or scale the picture down first"
    cause = " ".join(str(error).split())[:120]
    return f"internal error ({type(error).__name__}: {cause}); start with --debug to see more"


def fault_field(error):
    """The field that a fault belongs beside: one of `FIELD_TITLES`, "grid", or "" for none."""
    if not isinstance(error, DigitiseError):
        return ""
    for text in (error.cause, error.remedy):
        named = [name for name in OPTION.findall(text) if name in FIELD_TITLES]
        if named:
            return named[0]
    if error.stage == "scale" and "mark" in error.cause:
        return "mark"
    return STAGE_FIELDS.get(error.stage, "")


def _title(option):
    title = FIELD_TITLES.get(option, option)
    return title if title.startswith(("a ", "an ", "the ")) else f"\u201c{title}\u201d"


def _short(path):
    return re.split(r"[/\\]", path)[-1]
