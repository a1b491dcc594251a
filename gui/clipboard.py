"""What the clipboard holds for us: a picture, or the names of files.

On X11 Tk hands over any kind of clipboard contents as numbers in text; there a copied PNG picture is read so.
Windows and macOS give Tk text only, so Pillow's own grabber is asked for the picture. Copied files come as
text everywhere.
"""

import io
import os
import shutil
import tempfile
import time
import tkinter as tk

from .file_names import paths_from_text

__all__ = ["drop_pasted", "pasted_source"]

KINDS = {  # kind asked for -> how its bytes begin; some programs answer any question with what they have
    "image/png": (b"\x89PNG\r\n\x1a\n",),
    "image/jpeg": (b"\xff\xd8\xff",),
    "image/bmp": (b"BM",),
    "image/tiff": (b"II*\0", b"MM\0*"),
}
_folders = []


def pasted_source(widget):
    """(path, whether it is a passing file of a copied picture), or None when the clipboard holds neither."""
    if widget.tk.call("tk", "windowingsystem") == "x11":
        for kind, beginnings in KINDS.items():
            data = _bytes(widget, kind)
            if data.startswith(beginnings):
                return _passing_file(data, "." + kind.split("/")[1]), True
    else:
        grabbed = _grabbed()
        if grabbed is not None:
            return grabbed
    for kind in ("text/uri-list", "UTF8_STRING", "STRING"):
        try:
            paths = paths_from_text(widget.clipboard_get(type=kind))
        except tk.TclError:
            continue
        if paths:
            return paths[0], False
    return None


def drop_pasted():
    """Delete the passing files of pasted pictures, when the window ends."""
    while _folders:
        shutil.rmtree(_folders.pop(), ignore_errors=True)


def _bytes(widget, kind):
    """The clipboard's bytes of one kind; Tk gives every byte as a number in text."""
    try:
        text = widget.clipboard_get(type=kind)
        return bytes(int(word, 16) for word in text.split())
    except (tk.TclError, ValueError):
        return b""


def _grabbed():
    try:
        from PIL import ImageGrab

        held = ImageGrab.grabclipboard()
    except (ImportError, OSError, NotImplementedError):
        return None
    if isinstance(held, list):
        files = [name for name in held if os.path.isfile(name)]
        return (files[0], False) if files else None
    if held is None:
        return None
    data = io.BytesIO()
    held.save(data, "PNG")
    return _passing_file(data.getvalue(), ".png"), True


def _passing_file(data, ending):
    """A file in a folder of its own, named by the time, that holds a pasted picture until it is saved."""
    folder = tempfile.mkdtemp(prefix="digitise-")
    _folders.append(folder)
    path = os.path.join(folder, time.strftime("pasted-%Y%m%d-%H%M%S") + ending)
    with open(path, "wb") as file:
        file.write(data)
    return path
