"""Kept stages: the same inputs are not worked out twice, others are, and few results are held."""

import pytest

from digitise.kept import MOST, MOST_LARGE, Kept


class Counting:
    """A stage that counts its runs."""

    def __init__(self):
        self.runs = []

    def __call__(self, *inputs, more=0):
        """Run."""
        self.runs.append(inputs)
        return [*inputs, more]


def test_the_same_inputs_run_once():
    """Equal plain values and the same objects are the same inputs; another object is not, were it alike."""
    kept, stage, one, other = Kept(), Counting(), object(), object()

    first = kept.result(stage, one, (1.0, 2.0))

    assert kept.result(stage, one, (1.0, 2.0)) is first
    assert kept.result(stage, other, (1.0, 2.0)) is not first
    assert kept.result(stage, one, (1.0, 2.5)) is not first
    assert len(stage.runs) == 3


def test_what_is_handed_aside_is_no_input():
    """An argument by name reaches the stage and does not make it run again."""
    kept, stage = Kept(), Counting()

    assert kept.result(stage, 1, more=2) == [1, 2]
    assert kept.result(stage, 1, more=3) == [1, 2]


def test_two_stages_do_not_mix():
    """The same inputs of two stages are two results."""
    kept, first, second = Kept(), Counting(), Counting()

    kept.result(first, 1)
    kept.result(second, 1)

    assert (len(first.runs), len(second.runs)) == (1, 1)


@pytest.mark.parametrize(("large", "most"), [(False, MOST), (True, MOST_LARGE)])
def test_only_the_latest_are_held(large, most):
    """The result not asked for longest goes first."""
    kept, stage = Kept(), Counting()
    for k in range(most):
        kept.result(stage, k, large=large)
    kept.result(stage, 0, large=large)
    kept.result(stage, "new", large=large)
    runs = len(stage.runs)

    kept.result(stage, 0, large=large)
    assert len(stage.runs) == runs
    kept.result(stage, 1, large=large)
    assert len(stage.runs) == runs + 1


def test_what_raises_is_tried_again():
    """A stage that could not go on is run again when asked again."""
    kept, runs = Kept(), []

    def stage(value):
        runs.append(value)
        raise ValueError(value)

    for _ in range(2):
        with pytest.raises(ValueError, match="1"):
            kept.result(stage, 1)
    assert runs == [1, 1]
