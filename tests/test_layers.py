"""The layers of DEVELOPERS.md hold: no window code in the library, no stage that imports a later one."""

import ast
from functools import cache
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
LIBRARY = ROOT / "digitise"
STAGES = "settings picture find grid labels scale bearing ink follow budget table reading".split()
USES = (
    "record proof figures compare claims solid batch convert demo outputs".split()
)  # made of a reading: no stage needs them
HEAVY = {"scipy", "skimage", "matplotlib", "rapidocr", "onnxruntime", "pypdfium2", "tqdm", "distributed"}


@cache
def imports(path):
    """List (absolute module name, True when made inside a function) of every import in a file."""
    tree = ast.parse(path.read_text())
    inner = {
        id(node)
        for scope in ast.walk(tree)
        if isinstance(scope, (ast.FunctionDef, ast.AsyncFunctionDef, ast.Lambda))
        for node in ast.walk(scope)
    }
    found = []
    package = list(path.relative_to(ROOT).with_suffix("").parts[:-1])
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            found += [(name.name, id(node) in inner) for name in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = package[: len(package) - node.level + 1] if node.level else []
            stem = ".".join([*base, *([node.module] if node.module else [])])
            found += [
                (name, id(node) in inner) for name in (stem, *(f"{stem}.{part.name}" for part in node.names))
            ]
    return found


FILES = sorted(LIBRARY.rglob("*.py"))


def test_the_library_is_found():
    """The walk sees every stage, so that the tests below cannot pass on nothing."""
    assert {f"{stage}.py" for stage in STAGES} <= {path.name for path in FILES}


def test_imports_are_seen(tmp_path, monkeypatch):
    """Relative, absolute and inner imports are all told apart."""
    monkeypatch.setattr("tests.test_layers.ROOT", tmp_path)
    source = tmp_path / "digitise" / "commands" / "x.py"
    source.parent.mkdir(parents=True)
    source.write_text("import os.path\nfrom ..scale import level\ndef f():\n    from . import y\n")

    assert imports(source) == [
        ("os.path", False),
        ("digitise.scale", False),
        ("digitise.scale.level", False),
        ("digitise.commands", True),
        ("digitise.commands.y", True),
    ]


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(LIBRARY)))
def test_no_window_code_in_the_library(path):
    """Neither tkinter nor gui is imported, not even late; the window command alone hands over to gui."""
    found = {name.split(".")[0] for name, _ in imports(path)} & {"tkinter", "_tkinter", "gui"}

    assert found <= ({"gui"} if path.name == "window.py" and path.parent.name == "commands" else set())


@pytest.mark.parametrize("stage", STAGES)
def test_no_stage_imports_a_later_one(stage):
    """The flow has one direction; a private module counts with the stage that uses it."""
    later = {f"digitise.{name}" for name in [*STAGES[STAGES.index(stage) + 1 :], *USES]}

    assert not later & reached(f"digitise.{stage}")


def reached(module, seen=None):
    """All library modules that importing one brings in, private ones followed, other stages not."""
    seen = set() if seen is None else seen
    path = ROOT / Path(*module.split(".")).with_suffix(".py")
    for name, _ in imports(path):
        if (
            name.startswith("digitise.")
            and (ROOT / Path(*name.split(".")).with_suffix(".py")).exists()
            and name not in seen
        ):
            seen.add(name)
            if name.split(".")[1].startswith("_"):
                reached(name, seen)
    return seen


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(LIBRARY)))
def test_heavy_packages_are_imported_late(path):
    """The command line starts fast: what costs time to import is imported where it is used."""
    early = {name.split(".")[0] for name, inner in imports(path) if not inner}

    assert not early & HEAVY


def test_tkinter_lives_in_gui_alone():
    """Outside gui, its tests and this test, no file of the project imports tkinter."""
    for folder in ("digitise", "sample_images", "tests/draw", "tests/bench", "tests/reference"):
        for path in (ROOT / folder).rglob("*.py"):
            assert "tkinter" not in {name.split(".")[0] for name, _ in imports(path)}, path
