"""Results of stages, kept so that a later reading of the same picture redoes only what a change touches.

A stage is a pure function, so its result may be taken again when its inputs are the same: the same frozen
objects (compared by identity), or equal plain values. The window keeps one of these for as long as a picture
is open.
"""

from collections import OrderedDict, defaultdict

__all__ = ["Kept"]

MOST = 12  # results of one stage: as many corrections back cost nothing
MOST_LARGE = 3  # results of a stage that returns pixels, which have 50 MB each


class Kept:
    """The latest results of stages; not for use from two threads at once."""

    def __init__(self):
        self._found = defaultdict(OrderedDict)

    def result(self, stage, *inputs, large=False, **aside):
        """`stage(*inputs, **aside)`, or what it returned before for the same inputs; errors are not kept.

        large : keep only a few; aside : handed on to the stage, and no part of what makes two calls the same
        """
        found = self._found[stage]
        if inputs not in found:
            found[inputs] = stage(*inputs, **aside)
        found.move_to_end(inputs)
        while len(found) > (MOST_LARGE if large else MOST):
            found.popitem(last=False)
        return found[inputs]
