"""The sample pictures that come with the program."""

import importlib.resources
import os

__all__ = ["is_sample", "sample_pictures"]


def sample_pictures():
    """Their file names, sorted; empty when they are not installed."""
    try:
        folder = importlib.resources.files("digitise.samples")
        names = sorted(str(item) for item in folder.iterdir())
    except (ModuleNotFoundError, OSError):
        return []
    # A sample `x.png` has its truth `x.json` beside it; other pictures there are proofs and the like.
    return [
        name
        for name in names
        if name.endswith((".png", ".jpg")) and os.path.exists(name.rsplit(".", 1)[0] + ".json")
    ]


def is_sample(path):
    """Whether a file is one of them: nothing is to be saved beside it."""
    return os.path.abspath(path) in {os.path.abspath(name) for name in sample_pictures()}
