"""What the window shows, as frozen values: a picture, its charts, what was told of each and its reading.

Every change makes a new `State`; the old ones are kept as they are, results included, so that undo costs
nothing.
"""

import itertools
from dataclasses import dataclass, field, replace

from digitise.settings import Settings

__all__ = ["Chart", "Seen", "State"]

NOTHING_TOLD = Settings()
_serials = itertools.count(1)


@dataclass(frozen=True, eq=False, kw_only=True)
class Seen:
    """What is on a chart, whether or not it could be read: grid or None, tuple of ink.Ink."""

    grid: object = None
    inks: tuple = ()


@dataclass(frozen=True, eq=False, kw_only=True)
class Chart:
    """One chart of the picture.

    settings : what the user told; box : find.Box, its place
    reading : as read with these settings, or None
    fault : DigitiseError that stopped the reading, or None
    seen : what was found on it
    quick : a reading with these settings that takes over labels, shown until `reading` is there
    earlier : the latest reading with other settings, shown faded until either is there
    """

    settings: Settings
    box: object
    reading: object = None
    fault: object = None
    seen: Seen = Seen()
    quick: object = None
    earlier: object = None

    @property
    def done(self):
        """Whether these settings were tried."""
        return self.reading is not None or self.fault is not None

    @property
    def grid(self):
        """The grid to draw: as corrected, as read, or as found."""
        if self.settings.grid is not None:
            return self.settings.grid
        if self.reading is not None:
            return self.reading.grid
        return self.seen.grid

    @property
    def shown(self):
        """The reading to draw: the one with these settings, or while that is awaited the one before."""
        return self.reading if self.done else self.quick or self.earlier

    @property
    def fresh(self):
        """Whether what is shown goes with the settings."""
        return self.done or self.quick is not None

    def told(self, settings):
        """The chart with other settings, its reading awaited."""
        return Chart(
            settings=settings,
            box=self.box,
            seen=self.seen,
            earlier=self.reading or self.quick or self.earlier,
        )


@dataclass(frozen=True, eq=False, kw_only=True)
class State:
    """One step of the history.

    picture : Picture; kept : Kept, stages of earlier readings of it
    charts : tuple of Chart, empty when none was found; None while they are awaited
    at : index of the chart being worked on
    template : Settings that charts begin with when they are looked for
    before : charts whose settings pass on to charts found in the same place
    fault : DigitiseError when no chart was found
    words : what the user did to come here; group : steps of one group count as one for undo
    source : the file as named by the user; pasted : the picture came from the clipboard and has no file of
    its own
    """

    picture: object
    kept: object = field(repr=False)
    charts: tuple | None = None
    at: int = 0
    template: Settings = NOTHING_TOLD
    before: tuple = ()
    fault: object = None
    words: str = ""
    group: object = None
    source: str = ""
    pasted: bool = False
    serial: int = field(default_factory=lambda: next(_serials))

    @property
    def done(self):
        """Whether nothing is awaited."""
        return self.charts is not None and all(chart.done for chart in self.charts)

    @property
    def chart(self):
        """The chart being worked on, or None."""
        return self.charts[self.at] if self.charts else None

    def step(self, words, *, group=None, **changes):
        """The next state; changes are fields of `State`."""
        return replace(self, words=words, group=group, serial=next(_serials), **changes)

    def with_chart(self, chart, words, *, group=None):
        """The next state, in which the chart being worked on is `chart`."""
        charts = (*self.charts[: self.at], chart, *self.charts[self.at + 1 :])
        return self.step(words, group=group, charts=charts)
