"""Files dropped on the window, where Tk allows.

Tk by itself takes no dropped files on Windows and X11; where the `tkdnd` extension of Tk is installed it is
used. On macOS files dropped on the application's icon come as a call of Tk itself.
"""

import tkinter as tk

__all__ = ["take_drops"]


def take_drops(root, opened):
    """Call `opened(path)` for a dropped file; returns whether anything can be dropped on the window."""
    if root.tk.call("tk", "windowingsystem") == "aqua":
        root.createcommand("::tk::mac::OpenDocument", lambda *paths: opened(paths[0]) if paths else None)
    try:
        root.tk.call("package", "require", "tkdnd")
        root.tk.call("tkdnd::drop_target", "register", root, "DND_Files")
    except tk.TclError:
        return False

    def dropped(data):
        paths = root.tk.splitlist(data)
        if paths:
            root.after_idle(opened, paths[0])
        return "copy"

    root.tk.call("bind", root, "<<Drop:DND_Files>>", root.register(dropped) + " %D")
    return True
