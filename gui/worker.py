"""One worker thread beside the window: takes jobs, answers through a queue that the window polls.

Of several waiting jobs of one name only the newest is done. A job that has begun is finished; its answer is
marked as late when a newer one of its name was asked for meanwhile.
"""

import logging
import queue
import threading
from dataclasses import dataclass

from digitise.exceptions import DigitiseError

__all__ = ["Answer", "Worker"]

log = logging.getLogger(__name__)


@dataclass(frozen=True, eq=False, kw_only=True)
class Answer:
    """What came of a job: its name, the value or the error; late when a newer one was asked for."""

    name: str
    value: object = None
    error: BaseException | None = None
    late: bool = False


class Worker:
    """A thread that does jobs one after the other."""

    def __init__(self):
        self._waiting = {}  # name -> (number, work, arguments); the order is that of asking
        self._newest = {}
        self._running = False
        self._change = threading.Condition()
        self._answers = queue.SimpleQueue()
        self._closed = False
        self._thread = threading.Thread(target=self._run, name="reading", daemon=True)
        self._thread.start()

    def ask(self, name, work, *arguments):
        """Ask for `work(*arguments)`, in place of a waiting job of the same name."""
        with self._change:
            number = self._newest[name] = self._newest.get(name, 0) + 1
            self._waiting[name] = (number, work, arguments)
            self._change.notify()

    def answers(self, most=10):
        """The answers that are there, as a list; never waits."""
        found = []
        while len(found) < most:
            try:
                found.append(self._answers.get_nowait())
            except queue.Empty:
                break
        return found

    @property
    def busy(self):
        """Whether a job is waiting or being done."""
        with self._change:
            return bool(self._waiting) or self._running

    def close(self, *, wait_s=2.0):
        """Drop what waits and end the thread, waiting a little for the job at hand."""
        with self._change:
            self._closed = True
            self._waiting.clear()
            self._change.notify()
        self._thread.join(wait_s)

    def _run(self):
        while True:
            with self._change:
                self._running = False
                while not self._waiting and not self._closed:
                    self._change.wait()
                if self._closed:
                    return
                name = next(iter(self._waiting))
                number, work, arguments = self._waiting.pop(name)
                self._running = True
            self._answers.put(self._do(name, number, work, arguments))

    def _do(self, name, number, work, arguments):
        try:
            value, error = work(*arguments), None
        except DigitiseError as failure:
            value, error = None, failure
        except Exception as failure:
            log.debug("job %s failed", name, exc_info=True)
            value, error = None, failure
        with self._change:
            late = number != self._newest[name]
        return Answer(name=name, value=value, error=error, late=late)
