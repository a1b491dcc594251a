"""Paint polar charts from known patterns, with several renderers, and spoil them as copies are spoiled.

    page = Page(charts=(Chart(traces=(Trace(patterns.cardioid(angles)),)),))
    rgb = paint(page, renderer="matplotlib")
    truth = truth_of(page)
    rgb, moved, ink = spoil(rgb, "scan", rng)

Nothing here uses the reader's own code: laws, angles and patterns are worked out anew, so that a fault in the
reader cannot hide in the truth.
"""

from .degrade import RECIPES, spoil
from .random_page import random_page
from .render import RENDERERS, paint
from .spec import Chart, Page, Stroke, Trace, rho_of
from .truth import truth_of, write_case

__all__ = [
    "RECIPES",
    "RENDERERS",
    "Chart",
    "Page",
    "Stroke",
    "Trace",
    "paint",
    "random_page",
    "rho_of",
    "spoil",
    "truth_of",
    "write_case",
]
