"""Names of files in copied or dropped text."""

import os
import urllib.parse

__all__ = ["paths_from_text"]

MOST_TEXT = 20_000


def paths_from_text(text):
    """Names of files that are there, from lines of text, file addresses or quoted names."""
    found = []
    for line in text[:MOST_TEXT].splitlines():
        name = line.strip().strip("\"'")
        if name.startswith("file://"):
            name = urllib.parse.unquote(urllib.parse.urlparse(name).path)
            if os.name == "nt" and name[:1] == "/":
                name = name[1:]
        name = os.path.expanduser(name)
        try:
            if name and os.path.isfile(name):
                found.append(name)
        except ValueError:  # a null byte
            continue
    return found
