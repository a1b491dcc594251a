"""Every command of the window with its words and its key, in one table so that none is hidden.

Single letters act only while no text is being typed.
"""

from dataclasses import dataclass

__all__ = ["COMMANDS", "Command", "command", "groups"]


@dataclass(frozen=True, kw_only=True)
class Command:
    """One command.

    name : method of the window that does it; words : as in the menus; keys : Tk event sequences; shown : the
    key as shown; group : the menu it stands in; plain : a bare key, which text fields keep for themselves
    """

    name: str
    words: str
    keys: tuple
    shown: str
    group: str
    plain: bool = False


def _plain(name, words, key, shown, group):
    keys = (f"<Key-{key}>", f"<Key-{key.upper()}>") if len(key) == 1 and key.isalpha() else (f"<Key-{key}>",)
    return Command(name=name, words=words, keys=keys, shown=shown, group=group, plain=True)


def _held(name, words, keys, shown, group):
    return Command(name=name, words=words, keys=keys, shown=shown, group=group)


COMMANDS = (
    _held("open_picture", "Open a picture or a record\u2026", ("<Control-o>",), "Ctrl+O", "File"),
    _held("paste", "Paste a picture", ("<Control-v>",), "Ctrl+V", "File"),
    _held("choose_page", "Choose a page\u2026", ("<Control-p>",), "Ctrl+P", "File"),
    _held("save", "Save table, record and proof", ("<Control-s>",), "Ctrl+S", "File"),
    _held("save_elsewhere", "Save in another folder\u2026", ("<Control-S>",), "Ctrl+Shift+S", "File"),
    _held("quit", "Quit", ("<Control-q>",), "Ctrl+Q", "File"),
    _held("undo", "Undo", ("<Control-z>",), "Ctrl+Z", "Edit"),
    _held("redo", "Redo", ("<Control-y>", "<Control-Z>"), "Ctrl+Y", "Edit"),
    _held("copy_table", "Copy the table", ("<Control-C>",), "Ctrl+Shift+C", "Edit"),
    _plain("drop_held", "Remove what is held", "Delete", "Delete", "Edit"),
    _plain("hold_next", "Hold the next point", "bracketright", "]", "Edit"),
    _plain("hold_previous", "Hold the point before", "bracketleft", "[", "Edit"),
    _plain("let_go", "Let go, or stop", "Escape", "Esc", "Edit"),
    _plain("tool_look", "Look", "l", "L", "Tools"),
    _plain("tool_mark", "Mark a ring's level", "m", "M", "Tools"),
    _plain("tool_ink", "Pick the ink", "i", "I", "Tools"),
    _plain("tool_pin", "Pin the trace", "p", "P", "Tools"),
    _plain("tool_cover", "Cover a legend", "c", "C", "Tools"),
    _plain("tool_grid", "Correct the grid", "g", "G", "Tools"),
    _plain("tool_crop", "Crop", "x", "X", "Tools"),
    _plain("settle_grid", "Settle the grid on the lines", "s", "S", "Tools"),
    _plain("zoom_in", "Zoom in", "plus", "+", "View"),
    _plain("zoom_out", "Zoom out", "minus", "\u2212", "View"),
    _plain("zoom_fit", "Whole chart", "0", "0", "View"),
    _plain("zoom_picture", "Whole picture", "9", "9", "View"),
    _plain("zoom_one", "Pixel by pixel", "1", "1", "View"),
    _plain("toggle_overlay", "Hide or show the overlay", "h", "H", "View"),
    _plain("next_trace", "Next trace", "t", "T", "View"),
    _plain("next_reason", "Next reason to look", "n", "N", "View"),
    _held("next_chart", "Next chart", ("<Control-Next>",), "Ctrl+Page Down", "View"),
    _held("previous_chart", "Chart before", ("<Control-Prior>",), "Ctrl+Page Up", "View"),
    _held("toggle_fields", "Hide or show the fields", ("<F4>",), "F4", "View"),
    _held("next_pane", "Go to the next pane", ("<F6>",), "F6", "View"),
    _held("larger_text", "Larger text", ("<Control-plus>", "<Control-equal>"), "Ctrl++", "View"),
    _held("smaller_text", "Smaller text", ("<Control-minus>",), "Ctrl+\u2212", "View"),
    _held("show_keys", "All keys", ("<F1>",), "F1", "Help"),
)
POINTER_KEYS = (  # keys on the picture that are no command of a menu
    ("Arrows", "move what is held by 0.1 px, else the sight by 1 px"),
    ("Shift+Arrows", "by 1 px, the sight by 10 px"),
    ("Enter", "click at the sight"),
    ("Wheel", "zoom about the pointer"),
    ("Right button, Menu", "what can be done at this place"),
)


def command(name):
    """The command of a name."""
    return next(item for item in COMMANDS if item.name == name)


def groups():
    """Menu title -> its commands, in order."""
    found = {}
    for item in COMMANDS:
        found.setdefault(item.group, []).append(item)
    return found
