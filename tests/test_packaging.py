"""What the package promises about itself: pyproject.toml, the licence, and the script of the gate."""

from __future__ import annotations

import importlib
import os
import re
import subprocess
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
GATE = ROOT / ".ci" / "run"


def test_the_console_script_points_at_a_function() -> None:
    module, _, attribute = PROJECT["project"]["scripts"]["withstand"].partition(":")
    assert callable(getattr(importlib.import_module(module), attribute))


def test_the_wheel_holds_the_package_and_the_rulesets_where_they_are_looked_for() -> None:
    wheel = PROJECT["tool"]["hatch"]["build"]["targets"]["wheel"]
    assert wheel["packages"] == ["checker"]
    assert wheel["force-include"] == {"rulesets": "checker/shipped"}  # checker.rulesets.shipped_folder
    assert list((ROOT / "rulesets").glob("*.yaml"))


def test_the_licence_named_is_the_licence_there() -> None:
    assert PROJECT["project"]["license"] == "Apache-2.0"
    text = (ROOT / "LICENSE").read_text(encoding="utf-8")
    assert "Apache License" in text
    assert "Version 2.0, January 2004" in text


def test_every_library_that_is_imported_is_a_stated_dependency() -> None:
    """The distribution names differ from the module names in two cases, listed here."""
    stated = {re.split(r"[<>=~!; \[]", line)[0].casefold() for line in PROJECT["project"]["dependencies"]}
    renamed = {"yaml": "pyyaml"}
    imported = set()
    for path in (ROOT / "checker").rglob("*.py"):
        imported |= set(re.findall(r"^\s*(?:import|from) ([a-z_0-9]+)", path.read_text(encoding="utf-8"), re.MULTILINE))
    outside = {renamed.get(name, name) for name in imported - _standard() - {"checker"}}
    assert outside - stated == set()
    assert stated - outside == set()


def _standard() -> frozenset[str]:
    import sys

    return sys.stdlib_module_names


def test_the_gate_is_a_script_that_bash_can_read() -> None:
    assert os.access(GATE, os.X_OK)
    subprocess.run(["bash", "-n", str(GATE)], check=True, capture_output=True)
    text = GATE.read_text(encoding="utf-8")
    assert text.startswith("#!/usr/bin/env bash\n")
    assert "set -euo pipefail" in text


@pytest.mark.parametrize("word", ["/home/", "/root/", "/work/", "http://", "https://", "--index-url", "sudo"])
def test_the_gate_names_no_machine(word: str) -> None:
    assert word not in GATE.read_text(encoding="utf-8")


def test_the_gate_runs_the_commands_of_the_readme() -> None:
    readme = ROOT / "README.md"
    if not readme.is_file():
        pytest.skip("there is no README yet")
    text = readme.read_text(encoding="utf-8")
    for command in ("pip install -e '.[test]'", "python -m pytest"):
        assert command in text
        assert f"\n{command}\n" in GATE.read_text(encoding="utf-8").replace(" --quiet", "")
