"""The README keeps pace with the program: commands, options, columns, and the test command."""

import argparse
import re
import subprocess
from pathlib import Path

import pytest

from digitise.cli import COMMANDS
from digitise.commands import read
from digitise.table import COLUMNS, STATES

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")


def test_every_command_is_named():
    """Each command stands in the table of commands."""
    for name in COMMANDS:
        assert re.search(rf"^\| `{name}[ `]", README, re.MULTILINE), name


def test_every_option_of_read_is_named():
    """Each long option of `read` stands in the README."""
    parser = argparse.ArgumentParser()
    read.add_arguments(parser)

    for action in parser._actions:
        for option in action.option_strings:
            if option.startswith("--") and option != "--help":
                assert f"`{option}" in README, option


def test_columns_and_states_are_explained():
    """The table's columns, in order, and every state."""
    assert ",".join(COLUMNS) in README
    for name in (*COLUMNS, *STATES):
        assert f"`{name}`" in README, name


@pytest.mark.parametrize("place", re.findall(r"\]\((?!http)([^)]+)\)|`(sample_images/[\w.-]+)`", README))
def test_files_that_are_named_are_there(place):
    """Links and sample pictures."""
    assert (ROOT / "".join(place)).exists(), place


def test_the_test_command_is_found_by_the_script():
    """`.ci/run` cuts the command out of the README by its marker; what it gets runs pytest."""
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    cut = re.search(r"^command=\$\((.*)\)$", script, re.MULTILINE)[1]

    found = subprocess.run(["bash", "-c", cut], cwd=ROOT, capture_output=True, text=True, check=True).stdout

    assert found.strip().endswith("-m pytest")
    assert found.count("\n") == 1
    assert f"```\n{found}```" in README
