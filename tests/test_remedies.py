"""A remedy is printed only when the rules, run again with it, agree."""

from __future__ import annotations

from pathlib import Path

import pytest

from checker import api, remedies
from checker.model.candidate import Candidate
from checker.model.fact import Fact
from checker.model.verdict import Change, Remedy, Verdict

WRONG = Path(__file__).resolve().parents[1] / "fixtures" / "designs" / "greenhouse-wrong"
CHOICE = {"C1": Candidate("capacitor"), "R1": Candidate("resistor")}


def verdict(rule: str, outcome: str, remedy: Remedy | None = None, candidate: str = "") -> Verdict:
    return Verdict(
        rule,
        f"r/{rule}",
        "",
        outcome,
        "error",
        "shock",
        ("C1",),
        (),
        (),
        "",
        "what",
        "because",
        None,
        remedy=remedy,
        candidate=candidate,
    )


HIGHER = Remedy("C1 rated 450 V", (Change("C1", "rating:voltage", 450.0, "V", "dc"),))
FAILED = {("r/a", "1"): verdict("a", "fail", HIGHER), ("r/b", "1"): verdict("b", "pass")}


@pytest.mark.parametrize(
    ("after", "kept"),
    [
        ({("r/a", "1"): "pass", ("r/b", "1"): "pass"}, True),
        ({("r/a", "1"): "open", ("r/b", "1"): "pass"}, False),  # it does not mend
        ({("r/a", "1"): "pass", ("r/b", "1"): "open"}, False),  # it harms another
        ({("r/a", "1"): "pass", ("r/b", "1"): "pass", ("r/c", "1"): "fail"}, False),  # it brings a new one
        ({("r/a", "1"): "pass", ("r/b", "1"): "pass", ("r/c", "1"): "pass"}, True),
        ({("r/b", "1"): "pass"}, False),  # the question is gone, so nothing is proven
    ],
)
def test_a_remedy_is_kept_only_when_it_mends_and_harms_nothing(after, kept):
    seen = []

    def rerun(choice):
        seen.append(choice["C1"].ratings["voltage"].value)
        return {key: verdict(key[0][2:], outcome) for key, outcome in after.items()}

    found = remedies.tried(FAILED, CHOICE, rerun)
    assert seen == [450.0]
    assert (found["r/a", "1"].remedy is not None) == kept


def test_a_fail_of_an_alternate_and_what_comes_after_the_last_try_have_no_remedy():
    runs = []
    many = {("r/a", str(at)): verdict("a", "fail", HIGHER) for at in range(remedies.MOST + 3)}
    many["r/z", "1"] = verdict("z", "fail", HIGHER, candidate="C1 as B")

    def rerun(choice):
        runs.append(choice)
        return {key: verdict("a", "pass") for key in many}

    found = remedies.tried(many, CHOICE, rerun)
    assert len(runs) == remedies.MOST
    assert sum(one.remedy is not None for one in found.values()) == remedies.MOST
    assert found["r/z", "1"].remedy is None


def test_what_a_change_changes():
    made = remedies.changed(
        CHOICE,
        (Change("C1", "mark", "Y1"), Change("R1", "value", 470e3, "ohm"), Change("R9", "value", 1.0, "ohm")),
    )
    assert made["C1"].marked("Y1") is not None
    assert made["R1"].value == Fact("value", 470e3, trust=made["R1"].value.trust, unit="ohm")
    assert made.keys() == CHOICE.keys()
    assert CHOICE["C1"].marks == ()


def test_the_bulk_capacitor_of_the_wrong_twin_gets_a_remedy_that_was_tried():
    report = api.verify(WRONG / "greenhouse.net", bom=[WRONG / "bom.csv"], declaration=WRONG / "declaration.yaml")
    bulk = next(found for found in report.verdicts if found.rule == "capacitor-voltage" and found.parts == ["C1"])
    assert bulk.outcome == "fail"
    assert bulk.remedy == "C1 rated 400 V or more"
