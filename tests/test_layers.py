"""Imports point down, and a command loads only what it needs.

A module may import what lies in a lower layer or in its own; the stages are strangers to one another. Imports inside functions
and for type checkers count too.
"""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
PACKAGE = ROOT / "checker"
DEMO = ROOT / "fixtures" / "designs" / "greenhouse"

STAGES = ("readers", "assemble", "identify", "isolation", "stress", "requirements", "rules", "compare", "writers")
# From the ground up. Names of one line are one layer and may import one another, except the stages.
LAYERS: tuple[tuple[str, ...], ...] = (
    ("errors", "limits", "neutral", "files", "strict_yaml"),
    ("units",),
    ("model",),
    ("parameters",),
    ("formulas",),
    STAGES,
    ("plugins", "ruleset_file", "ruleset_layers", "rulesets", "declaration", "project"),
    ("remedies", "reporting", "reporting_barriers", "reporting_steps", "unnamed_earth", "pipeline"),
    ("api", "testing"),
    ("cli",),
)
LEVEL = {name: level for level, names in enumerate(LAYERS) for name in names}
# The package itself only hands on to `checker.api`, when it is first used.
FRONT = "__init__"


def modules() -> Iterator[tuple[str, Path]]:
    """(first name below the package, file) of every module."""
    for path in sorted(PACKAGE.rglob("*.py")):
        yield path.relative_to(PACKAGE).parts[0].removesuffix(".py"), path


def imported(path: Path) -> Iterator[tuple[int, str]]:
    """(line, first name below the package) of everything a file imports from the package; imports inside functions too."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"), str(path))):
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path.relative_to(ROOT)}:{node.lineno} imports by a relative name"
            whole = node.module == "checker"
            names = [f"checker.{alias.name}" for alias in node.names] if whole else [str(node.module)]
        else:
            continue
        yield from ((node.lineno, name.split(".")[1]) for name in names if name.startswith("checker."))


def wrong(importer: str, target: str) -> str:
    """Why `importer` may not import `target`, "" when it may."""
    if target not in LEVEL:
        return "is in no layer"
    if LEVEL[target] > LEVEL[importer]:
        return "lies above"
    return "is another stage" if {importer, target} <= set(STAGES) and importer != target else ""


def test_every_module_has_its_layer() -> None:
    found = {name for name, _ in modules()} - {FRONT}
    assert found - LEVEL.keys() == set()
    assert set(STAGES) - found <= {"compare"}  # the stage that is not written yet; every other name is a real folder


def test_imports_point_down_and_stages_are_strangers() -> None:
    seen, found = 0, []
    for name, path in modules():
        if name == FRONT:
            continue
        for line, target in imported(path):
            seen += 1
            why = wrong(name, target)
            if why:
                found.append(f"{path.relative_to(ROOT)}:{line}: {target} {why}")
    assert seen > 200  # the walk sees imports at all
    assert found == []


def test_the_front_of_the_package_reaches_only_the_api() -> None:
    assert {target for _, target in imported(PACKAGE / "__init__.py")} == {"api"}


@pytest.mark.parametrize(
    ("importer", "target", "why"),
    [
        ("readers", "writers", "is another stage"),
        ("rules", "isolation", "is another stage"),
        ("model", "readers", "lies above"),
        ("errors", "units", "lies above"),
        ("rules", "plugins", "lies above"),
        ("pipeline", "api", "lies above"),
        ("api", "somewhere", "is in no layer"),
        ("declaration", "readers", ""),
        ("model", "files", ""),
        ("rules", "formulas", ""),
    ],
)
def test_what_the_walk_objects_to(importer: str, target: str, why: str) -> None:
    assert wrong(importer, target) == why


def test_pipeline_alone_knows_the_stages() -> None:
    """Above the stages only the pipeline imports one that works on a design; readers and writers stand behind doors."""
    inner = {"assemble", "identify", "isolation", "stress", "requirements", "rules", "compare"}
    found = {name: {target for _, target in imported(path)} & inner for name, path in modules() if name not in STAGES}
    assert {name for name, targets in found.items() if targets} <= {"pipeline", FRONT}
    assert {"assemble", "identify", "isolation"} <= found["pipeline"]


# --- what a command loads --------------------------------------------------------------------------------------------

HEAVY = ("networkx", "pint", "numpy", "lxml", "openpyxl", "jinja2", "rich", "yaml", "msgspec", "sexpdata", "importlib.metadata")
_RUN = """
import sys, checker.cli
status = checker.cli.run(sys.argv[1:])
print("LOADED", status, *sorted(sys.modules), file=sys.stderr)
"""


def loaded(*arguments: str) -> tuple[int, set[str]]:
    """The status of the command line in a process of its own, and every module that the process had loaded at its end."""
    done = subprocess.run(
        [sys.executable, "-I", "-c", f"import sys; sys.path.insert(0, {str(ROOT)!r}){_RUN}", *arguments],
        capture_output=True,
        text=True,
        check=True,
    )
    messages, _, names = done.stderr.partition("LOADED ")
    assert messages == ""
    status, *modules = names.split()
    assert "checker.cli" in modules
    return int(status), set(modules)


def below(names: set[str], heavy: str) -> set[str]:
    return {name for name in names if name == heavy or name.startswith(f"{heavy}.")}


@pytest.mark.parametrize("arguments", [("--help",), ("verify", "--help"), ("ruleset", "--help")])
def test_help_loads_no_library_but_the_one_that_prints_it(arguments: tuple[str, ...]) -> None:
    status, names = loaded(*arguments)
    assert status == 0
    assert "click" in names
    assert {name: below(names, name) for name in HEAVY if below(names, name)} == {}
    assert not {name for name in names if name.startswith("checker.") and name.count(".") == 1} - {
        "checker.cli",
        "checker.errors",
        "checker.neutral",
    }


def test_verify_needs_neither_pint_nor_any_library_of_other_forms() -> None:
    status, names = loaded(
        "verify", str(DEMO / "greenhouse.net"), "--bom", str(DEMO / "bom.csv"), "--declaration", str(DEMO / "declaration.yaml")
    )
    assert status in (0, 1)
    assert {"yaml", "sexpdata"} <= names
    rare = ("pint", "numpy", "openpyxl", "jinja2", "rich", "checker.testing")
    assert {name for name in rare if below(names, name)} == set()
