"""The demo and its wrong twin, judged: what the README promises."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
import yaml

from checker import plugins
from checker.api import verify
from checker.files import read as read_file
from checker.writers import json as json_form
from checker.writers import text as text_form

ROOT = Path(__file__).resolve().parents[1]
DESIGNS = ROOT / "fixtures" / "designs"


def judged(name, netlist="greenhouse.net"):
    """The report of a demo design from one of its two netlists."""
    folder = DESIGNS / name
    return verify(folder / netlist, bom=[folder / "bom.csv"], declaration=folder / "declaration.yaml")


@pytest.fixture(scope="module")
def clean():
    return judged("greenhouse")


@pytest.fixture(scope="module")
def wrong():
    return judged("greenhouse-wrong")


def failing(report, rule):
    """Parts of the failing verdicts of a rule, one set a verdict."""
    return [set(verdict.parts) for verdict in report.verdicts if verdict.rule == rule and verdict.outcome == "fail"]


def test_the_clean_demo_has_no_fail_and_few_opens_that_name_their_fact(clean):
    assert [verdict.what for verdict in clean.verdicts if verdict.outcome == "fail"] == []
    opens = [verdict for verdict in clean.verdicts if verdict.outcome == "open"]
    assert len(opens) <= 5
    assert all(verdict.missing is not None and verdict.missing.fact for verdict in opens)


def test_every_rule_passes_at_least_once_in_the_clean_demo(clean):
    passed = {verdict.rule for verdict in clean.verdicts if verdict.outcome == "pass"}
    assert passed == set(plugins.rule_ids()) - {"pad-distance"}  # which judges a layout, and never passes


def test_the_barrier_of_the_clean_demo(clean):
    (barrier,) = clean.barriers
    assert (barrier.id, barrier.grade, barrier.bridged_by) == ("mains|+12V", "reinforced", ["CY1", "T1", "U2"])
    assert barrier.chains == [["CY1"]]


def test_the_report_shows_the_voltage_across_parts_with_its_derivation(clean):
    steps = {step.id for step in clean.steps}
    shown = {item.part: item for item in clean.stress}
    assert all(item.step in steps and item.quantity == "voltage" and item.never_above >= item.surely for item in clean.stress)
    assert shown["C1"].never_above == pytest.approx(2**0.5 * 264, rel=1e-5)
    assert shown["C10"].never_above == shown["C10"].surely == 12.0
    assert "F1" not in shown


def test_both_netlist_forms_give_the_same_verdicts():
    def essence(report):
        return [(v.rule, v.clause, v.outcome, v.level, v.parts, v.nets, v.fingerprint) for v in report.verdicts]

    for name in ("greenhouse", "greenhouse-wrong"):
        assert essence(judged(name)) == essence(judged(name, "greenhouse.xml"))


@pytest.mark.parametrize(
    ("rule", "parts"),
    [
        ("barrier-insulation", {"R23"}),
        ("bridging-capacitor", {"CY1"}),
        ("bridging-capacitor", {"CY2"}),
        ("fuse", {"RV1", "F1"}),
        ("reachable-connector", {"J3"}),
        ("records", {"CY2"}),
        ("records", {"F2"}),
        ("stored-charge", {"CX1"}),
        ("capacitor-voltage", {"C1"}),
    ],
)
def test_the_planted_mistakes_fail(wrong, rule, parts):
    assert any(parts <= found for found in failing(wrong, rule)), failing(wrong, rule)


def test_the_wrong_twin_fails_nothing_but_its_planted_mistakes(wrong):
    mistakes = yaml.safe_load((DESIGNS / "greenhouse-wrong" / "mistakes.yaml").read_text(encoding="utf-8"))
    planted = {ref for mistake in mistakes["mistakes"] for ref in mistake["parts"]}
    for verdict in wrong.verdicts:
        if verdict.outcome == "fail":
            assert set(verdict.parts) <= planted, verdict.because


def test_a_report_read_back_is_equal(wrong, tmp_path):
    path = tmp_path / "report.json"
    path.write_bytes(json_form.write(wrong))
    assert json_form.read(read_file(path)) == wrong


def test_the_same_inputs_give_the_same_bytes(wrong):
    again = judged("greenhouse-wrong")
    assert json_form.write(again) == json_form.write(wrong)
    assert text_form.write(again) == text_form.write(wrong)


def test_every_verdict_has_its_place_and_its_derivation(wrong):
    ids = {step.id for step in wrong.steps}
    for verdict in wrong.verdicts:
        assert verdict.step in ids
        assert verdict.because
        if verdict.outcome == "fail":
            assert any(evidence.line for evidence in verdict.evidence), verdict.what


def test_fingerprints_tell_the_questions_apart(wrong):
    prints = [verdict.fingerprint for verdict in wrong.verdicts]
    assert len(prints) == len(set(prints))


def test_the_readme_examples_run(capsys, monkeypatch):
    monkeypatch.chdir(ROOT)
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    (python,) = re.findall(r"```python\n(.*?)```", readme, re.DOTALL)
    scope: dict = {}
    exec(compile(python, "README.md", "exec"), scope)
    assert scope["failed"] == []
    (command,) = re.findall(r"\.venv/bin/(withstand verify .*)", readme)
    from checker.cli import run

    assert run(command.split()[1:]) == 0
    assert "does not certify" in capsys.readouterr().out
