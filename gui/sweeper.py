"""Garbage collection in the window's own thread alone.

Python collects wherever it happens to allocate. In the worker thread that would free Tk's variables and
images there, and Tk takes calls from its own thread only: it would wait for a main loop that may be waiting
for it.
"""

import gc
import time

__all__ = ["Sweeper"]

YOUNG_S = 1.0  # between two sweeps of what is young
ALL_EVERY = 20  # sweeps of what is young for one of everything, which takes some 50 ms


class Sweeper:
    """Takes the collecting over from Python until `stop`."""

    def __init__(self):
        self._was_on = gc.isenabled()
        gc.disable()
        self._count, self._next = 0, time.monotonic() + YOUNG_S

    def sweep(self):
        """Collect, when it is time again."""
        if time.monotonic() < self._next:
            return
        self._count += 1
        gc.collect(2 if self._count % ALL_EVERY == 0 else 1)
        self._next = time.monotonic() + YOUNG_S

    def stop(self):
        """Collect what the window leaves, and give the collecting back to Python."""
        gc.collect()
        if self._was_on:
            gc.enable()
