"""The stages' results for a circuit written as in the case files of rules."""

from __future__ import annotations

import tempfile
from pathlib import Path

from checker import pipeline, rulesets, testing
from checker.assemble.join import assemble
from checker.identify.candidates import identify
from checker.model.rule import Analysis


def analysis(circuit: str, declaration: str = "{}", judged: tuple[str, ...] = rulesets.DEFAULT) -> Analysis:
    """circuit: lines `REF: {value: ..., pins: {1: NET}}`; declaration: a YAML map on one line."""
    indented = "\n".join(f"      {line}" for line in circuit.strip().splitlines())
    head = f"rule: fuse\ncases:\n  - name: one\n    outcome: pass\n    declaration: {declaration}\n    parts:\n"
    text = f"{head}{indented}\n    expect: []\n"
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "case.yaml"
        path.write_text(text, encoding="utf-8")
        case = testing.load_cases(path).cases[0]
    design = assemble(case.name, testing.readings(case.parts, case.rows), case.declaration, None)
    identity = identify(design, case.declaration)
    choice = next(iter(pipeline.choices(identity)))
    return pipeline.analyse(design, case.declaration, identity, choice, rulesets.load_all(judged))
