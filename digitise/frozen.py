"""Help for the frozen results that the stages hand on: arrays are copied and locked."""

import numpy as np

__all__ = ["lock_arrays"]


def lock_arrays(result):
    """Replace each array field of a frozen dataclass by a locked copy; call from ``__post_init__``."""
    for name, value in vars(result).items():
        if isinstance(value, np.ndarray):
            copy = np.array(value)
            copy.setflags(write=False)
            object.__setattr__(result, name, copy)
