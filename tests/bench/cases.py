"""The seeded charts that the benchmark reads, grouped by how the picture was spoiled and by law."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from tests.draw import Page, paint, random_page, spoil, truth_of, write_case

RENDERERS = ("matplotlib", "pillow", "opencv-fine", "opencv")
# how: (spoiling recipe or None, what is fixed on the page)
GROUPS = {
    "clean": (None, {"law": "even"}),
    "small": ("small", {"law": "even", "outer_px": 330}),
    "JPEG": ("jpeg", {"law": "even"}),
    "scan": ("scan", {"law": "even"}),
    "fax": ("fax", {"law": "even", "paper": "white", "grid": "mid", "n_traces": 1, "dashes": ("solid",)}),
    "skew": ("perspective", {"law": "even"}),
    "stretch": ("stretch", {"law": "even"}),
    "field": (None, {"law": "field"}),
    "power": (None, {"law": "power"}),
    "log-periodic": (None, {"law": "log-periodic"}),
}
SEED = 71000


@dataclass(frozen=True, eq=False, kw_only=True)
class Case:
    """One picture on disk with the page it was painted from and the inks its traces have now."""

    name: str
    group: str
    path: Path
    page: Page
    inks: tuple


def make_case(folder, group, number, *, seed=SEED, **more):
    """Paint, spoil and write the `number`-th chart of a group with its truth; the seed follows from both.

    more : what else is fixed on the page, as in `random_page`
    """
    recipe, fixed = GROUPS[group]
    rng = np.random.default_rng([seed, list(GROUPS).index(group), number])
    renderer = RENDERERS[number % len(RENDERERS)]
    page = random_page(rng, **{**fixed, **more})
    rgb, spoiled, suffix, options = paint(page, renderer=renderer), None, "png", {}
    if recipe:
        spoiled = spoil(rgb, recipe, rng)
        rgb, suffix, options = spoiled.rgb, spoiled.suffix, spoiled.save_options()
    truth = truth_of(page, spoiled=spoiled, renderer=renderer)
    inks = tuple(trace["ink"] for trace in truth["traces"])
    name = f"{group}-{number:03d}"
    path = write_case(folder, name, rgb, (truth,), suffix=suffix, **options)
    return Case(name=name, group=group, path=path, page=page, inks=inks)
