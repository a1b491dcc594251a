"""Letters: the open fonts that come with matplotlib, so that no font of the machine is needed."""

from functools import lru_cache
from pathlib import Path

FILES = {
    "sans": "DejaVuSans.ttf",
    "bold": "DejaVuSans-Bold.ttf",
    "serif": "STIXGeneral.ttf",
    "book": "DejaVuSerif.ttf",
    "mono": "DejaVuSansMono.ttf",
}


@lru_cache
def font_file(family):
    """Path of a font by family name of `FILES`, or the family itself when it is a path."""
    if family not in FILES:
        return family
    import matplotlib as mpl

    return str(Path(mpl.get_data_path()) / "fonts" / "ttf" / FILES[family])


def rgb_of(colour):
    """Turn "#rrggbb" into (r, g, b), 0 to 255."""
    return tuple(int(colour[k : k + 2], 16) for k in (1, 3, 5))
