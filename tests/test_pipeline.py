"""What the engine promises beyond single rules: worst alternate, a rule that raises, conditions, ruleset filters."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from checker import files, pipeline, plugins, rulesets
from checker.declaration import read as read_declaration
from checker.isolation.domains import isolate
from checker.model.condition import Condition
from checker.model.declaration import Declaration
from checker.model.fact import Fact, Source, Trust
from checker.model.rule import Rule
from checker.testing import load_cases, readings
from checker.writers import json as json_form
from tests.circuits import choice, design
from tests.test_isolation import flyback

ROOT = Path(__file__).resolve().parents[1]


def judged(parts, **more):
    return pipeline.judge("case", readings(parts), more.pop("declaration", Declaration()), rulesets.load_all(rulesets.DEFAULT), ())


@pytest.fixture(scope="module")
def clean():
    """A case whose circuit gives at least one pass."""
    found = load_cases(ROOT / "fixtures" / "rules" / "barrier-insulation.yaml").cases
    return next(case for case in found if case.outcome == "pass")


def test_a_rule_that_raises_is_an_open_question_and_a_fault_of_the_program(monkeypatch, clean):
    def ask(analysis, clause):
        raise ZeroDivisionError("planted")
        yield

    real = plugins.rule
    broken = Rule("fuse", "fire", real("fuse").params, ask, "planted")
    monkeypatch.setattr(plugins, "rule", lambda name: broken if name == "fuse" else real(name))
    result = judged(clean.parts, declaration=clean.declaration)
    (verdict,) = [v for v in result.report.verdicts if v.rule == "fuse"]
    assert (verdict.outcome, verdict.level) == ("open", "error")
    assert "ZeroDivisionError" in result.raised[0]


def test_every_verdict_of_the_contract_has_every_key(clean):
    # the keys of design section 8, written down here by hand
    keys = set(
        "rule clause citation outcome level hazard parts nets condition what found limit margin missing because step remedy "
        "evidence fingerprint facts_hash state conceded".split()
    )
    report = json.loads(json_form.write(judged(clean.parts, declaration=clean.declaration).report))
    top = "schema design variant tool plugins inputs rulesets assumptions parts domains barriers separations stress verdicts steps"
    assert {*top.split(), "summary", "caution"} <= set(report)
    assert all(keys <= set(verdict) for verdict in report["verdicts"])
    assert report["schema"] == "withstand-report/1"
    assert set(report["summary"]) == {"pass", "fail", "open", "not-applicable", "conceded", "unconfirmed"}
    assert sum(report["summary"][outcome] for outcome in ("pass", "fail", "open", "not-applicable")) == len(report["verdicts"])
    order = ["fail", "open", "pass", "not-applicable"]
    assert [order.index(v["outcome"]) for v in report["verdicts"]] == sorted(order.index(v["outcome"]) for v in report["verdicts"])


def test_a_condition_is_an_overlay_on_the_circuit():
    parts = flyback(R99=("resistor", {"1": "PGND", "2": "SGND"}))
    circuit, kinds = design(parts), choice(parts)
    assert isolate(circuit, kinds, Declaration()).shorts
    assert not isolate(circuit, kinds, Declaration(), Condition("R99 open", frozenset({"R99"}))).shorts
    joined = Condition("coupler short", frozenset({"R99"}), (frozenset({"LED", "FB"}),))
    assert len(isolate(circuit, kinds, Declaration(), joined).domains) == 1


def test_the_worst_alternate_of_the_bill_is_shown_and_named():
    folder = ROOT / "fixtures" / "designs" / "greenhouse"
    netlist, bom = (plugins.reader_for(blob, role).read(blob) for role, blob in blobs(folder))
    other = (
        Fact("type", "DISC-1KV-102K", Source("bom.csv", 30), Trust.BOM),
        Fact("description", "CAP CER 1NF 1KV X7R", Source("bom.csv", 30), Trust.BOM),
    )
    rows = tuple(replace(row, alternates=(other,)) if row.refs == ("CY1",) else row for row in bom.rows)
    declaration = read_declaration(files.read(folder / "declaration.yaml"))
    report = pipeline.judge("d", [netlist, replace(bom, rows=rows)], declaration, rulesets.load_all(rulesets.DEFAULT), ()).report
    (verdict,) = [v for v in report.verdicts if v.outcome == "fail"]
    assert (verdict.rule, verdict.parts, verdict.candidate) == ("bridging-capacitor", ["CY1"], "CY1 as DISC-1KV-102K")
    assert "DISC-1KV-102K" in verdict.because


def blobs(folder):
    """(role, blob) of a demo design's netlist and bill."""
    return [("netlist", files.read(folder / "greenhouse.net")), ("bom", files.read(folder / "bom.csv"))]
