"""The trial designs against their answer sheets: barrier parts exactly, domains, sides, no false fail, nothing missed.

The sheets were made by hand without a look at how the program decides (fixtures/designs/trials/README.md).
"""

from __future__ import annotations

from pathlib import Path

import pytest
import yaml

from checker.api import verify
from tests.trial_circuits import read

TRIALS = Path(__file__).resolve().parents[1] / "fixtures" / "designs" / "trials"
NAMES = sorted(path.parent.name for path in TRIALS.glob("*/expected.yaml"))
# what each family of the sheets is called here
FAMILIES = {"short": "barrier-insulation", "reachable-connector": "reachable-connector", "discharge": "stored-charge"}


def judged(name):
    """(report, answer sheet) of one trial."""
    folder = TRIALS / name
    netlist = next(path for suffix in ("net", "xml") if (path := folder / f"board.{suffix}").exists())
    bom = [path for path in (folder / "bom.csv", folder / "bom.tsv") if path.exists()]
    declaration = folder / "declaration.yaml"
    report = verify(netlist, bom=bom, declaration=declaration if declaration.exists() else None)
    return report, yaml.safe_load((folder / "expected.yaml").read_text(encoding="utf-8"))


def report_name(report):
    """The trial a report is about: the folder of its netlist."""
    return Path(report.inputs[0].path).parent.name


def across(report):
    """Parts across any barrier that insulate (the ordinary ones are shorts)."""
    return {part.part for barrier in report.barriers for part in barrier.parts if part.how != "ordinary"}


@pytest.fixture(scope="module", params=NAMES)
def trial(request):
    return judged(request.param)


def test_there_are_thirty_trials():
    assert len(NAMES) == 30


def test_barrier_parts_are_exact_or_asked(trial):
    report, sheet = trial
    expected, asked = set(sheet["barrier_parts"]), set(sheet["asked"])
    questions = {ref for verdict in report.verdicts if verdict.outcome == "open" for ref in verdict.parts}
    assert across(report) - asked == expected - asked
    assert asked & expected <= across(report) | questions


def test_domains_and_sides(trial):
    report, sheet = trial
    of = {net: domain.name for domain in report.domains for net in domain.nets}
    # a net with pins of one part only joins nothing to anything: the sheet may place it, the program need not
    circuit = read(TRIALS / report_name(report)).nets()
    live = {net for net, nodes in circuit.items() if len({part.ref for part, _ in nodes}) > 1}
    groups = [[net for net in group if net in live] for group in sheet.get("domains_without_short") or sheet["domains"]]
    names = [{of.get(net) for net in group} for group in groups]
    assert all(len(found) == 1 for found in names), names
    assert len({next(iter(found)) for found in names}) == len(groups), names
    side = {domain.name: domain.side for domain in report.domains}
    for net, wanted in sheet["sides"].items():
        assert side[of[net]] == wanted, net


def test_what_must_fail_does_and_nothing_else_of_these_families(trial):
    report, sheet = trial
    for family, rule in FAMILIES.items():
        failed = {ref for v in report.verdicts if v.rule == rule and v.outcome == "fail" for ref in v.parts}
        expected = {ref for entry in sheet["fails"] if entry["family"] == family for ref in entry["parts"]}
        assert failed == expected, [v.because for v in report.verdicts if v.rule == rule and v.outcome == "fail"]


def test_a_clean_trial_has_no_fail_at_all(trial):
    report, sheet = trial
    if not sheet["fails"]:
        assert [(v.rule, v.parts, v.because) for v in report.verdicts if v.outcome == "fail"] == []


def test_whether_the_source_is_known(trial):
    report, sheet = trial
    (verdict,) = [v for v in report.verdicts if v.rule == "hazardous-source"]
    found = {"pass": "recognised", "not-applicable": "none"}.get(
        verdict.outcome, "question" if verdict.level == "error" else "none"
    )
    assert found == sheet["source"], verdict.because
