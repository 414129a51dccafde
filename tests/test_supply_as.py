"""What an open verdict asks for can be given the way it says: each promised BOM column and parts-file key is tried.

The open verdicts of all rule cases are collected; for each sort of question the answer is written into a BOM or a parts file as a
user would write it, read by the real readers, and the same question must then be gone.
"""

from __future__ import annotations

import ast
import re
from functools import lru_cache
from pathlib import Path

import pytest

from checker import pipeline, rulesets, testing
from checker.files import Blob
from checker.readers import bom_headings, bom_table, parts_file
from checker.readers.parts_file import RATINGS

ROOT = Path(__file__).resolve().parents[1]
ASKING = ("rules", "isolation", "requirements", "stress")
_BOM = re.compile(r"BOM|bill of materials")
_PARTS = re.compile(r"parts file")

# how a question begins -> answers in a BOM (heading -> cell), answers as an entry of a parts file; () where that is not promised
ANSWERS = {
    "kind": ((), ("kind: digital-isolator",)),
    "class": (({"Class": "X1/Y1"},), ("marks: [X1/Y1]",)),
    "rated a.c. voltage": (({"Voltage": "440 VAC"}, {"Voltage [V AC]": "440"}), ("ratings: {voltage: 440 V rms}",)),
    "rated alternating voltage": (({"Voltage": "440 VAC"},), ("ratings: {voltage: 440 V rms}",)),
    "continuous a.c. voltage": (({"Description": "VARISTOR 300VAC"}, {"Value": "S14K300"}), ("ratings: {voltage: 300 V rms}",)),
    "rated voltage of this product": (({"Voltage": "1000 V"},), ("ratings: {voltage: 1000 V}",)),
    "reverse voltage": (({"Voltage": "1000 V"}, {"Description": "BRIDGE 1000V 2A"}), ("ratings: {voltage: 1000 V}",)),
    "rated voltage": (({"Voltage": "1000 V"},), ("ratings: {voltage: 1000 V}",)),
    "technology": (({"Technology": "ceramic"}, {"Description": "CAP CER 16V"}), ()),
    "clearance and creepage": (
        ({"Clearance": "20 mm", "Creepage": "20 mm"}, {"Clearance [mm]": "20", "Creepage [mm]": "20,0"}),
        ("body: {clearance: 20 mm, creepage: 20 mm}",),
    ),
    "clearance of the body": (({"Clearance": "20 mm"},), ("body: {clearance: 20 mm}",)),
    "creepage of the body": (({"Creepage": "40 mm"},), ("body: {creepage: 40 mm}",)),
    "tolerance": (({"Tolerance": "1 %"}, {"Tolerance [%]": "1"}), ("tolerance: 1 %",)),
    "value": (({"Value": "1 nF"}, {"Capacitance nF": "1"}), ("value: 1 nF",)),
    "isolation test voltage": (({"Isolation voltage": "6000 V rms"},), ("ratings: {isolation_test: 6000 V rms}",)),
    "form of the stated test voltage": (({"Isolation voltage": "3000 V rms"},), ("ratings: {isolation_test: 3000 V rms}",)),
    "breaking capacity": (({"Breaking capacity": "1500 A"}, {"Value": "T2AH250V"}), ("ratings: {breaking_capacity: 1500 A}",)),
    "rated current": (({"Value": "T2A"}, {"Current": "2 A"}), ("ratings: {current: 2 A}",)),
    "approval of its insulation": (({"Class": "reinforced"}, {"Class": "IEC 61558-2-16, reinforced"}), ("marks: [reinforced]",)),
    "approval as an isolator": (({"Class": "IEC 60747-5-5"},), ("marks: [IEC 60747-5-5]",)),
    "distance through the insulation": (({"DTI": "0.6 mm"}, {"DTI (mm)": "0,6"}), ("body: {through_insulation: 0.6 mm}",)),
    "the layers of its insulation": (({"Class": "IEC 61558-2-16"},), ()),
    "capacitance with its tolerance": (({"Tolerance": "1 %"},), ()),
    "capacitance": (({"Value": "1 nF"},), ()),
    "tolerances of the capacitors and resistors": (({"Tolerance": "1 %"},), ()),
    "turns of its windings": (({"Turns": "1-2:128, 3-4:16, 5-6:8"},), ()),
    "whether": ((), ("marks: [G.10]",)),
}


def cases():
    for path in sorted((ROOT / "fixtures" / "rules").glob("*.yaml")):
        if path.name != "circuits.yaml":
            yield from testing.load_cases(path).cases


def judged(case, *more):
    given = [*testing.readings(case.parts, case.rows, case.pads), *more]
    return pipeline.judge(case.name, given, case.declaration, rulesets.load_all(case.rulesets), ()).report.verdicts


@lru_cache(maxsize=1)
def asked():
    """(rule, question, how it is to be answered) -> the first (case, verdict) that asks it."""
    found = {}
    for case in cases():
        if not any(outcome == "open" for outcome, _, _ in case.expect):
            continue
        for verdict in judged(case):
            missing = verdict.missing
            if verdict.outcome == "open" and (_BOM.search(missing.supply_as) or _PARTS.search(missing.supply_as)):
                begin = max((word for word in ANSWERS if missing.fact.startswith(word)), key=len, default=missing.fact)
                found.setdefault((verdict.rule, begin, re.sub(r"\{\w+:", "{", missing.supply_as)), (case, verdict))
    return found


def gone(case, verdict, reading):
    again = [one for one in judged(case, reading) if one.fingerprint == verdict.fingerprint]
    return not any(one.missing is not None and one.missing.fact == verdict.missing.fact for one in again)


def refs_of(case, verdict):
    if verdict.missing.fact.startswith("tolerances"):
        return [part.ref for part in case.parts]
    if verdict.rule == "capacitor-voltage" and verdict.missing.fact == "rated voltage":
        return verdict.parts  # one question for all capacitors of a rail
    return verdict.missing.part.split(", ")


def test_every_promise_is_tried_here():
    assert {begin for _, begin, _ in asked()} <= set(ANSWERS)
    assert len(asked()) > 25


def test_answers_in_a_bom_settle_what_they_are_asked_for():
    left = []
    for (rule, begin, supply_as), (case, verdict) in asked().items():
        answers = ANSWERS[begin][0] if _BOM.search(supply_as) else ()
        assert answers or not re.search(r"BOM columns? [A-Z]", supply_as), (begin, supply_as)
        for answer in answers:
            text = ";".join(("Reference", *answer)) + "\n"
            text += "".join(";".join((ref, *answer.values())) + "\n" for ref in refs_of(case, verdict))
            if not gone(case, verdict, bom_table.READER.read(Blob("answer.csv", text.encode()))):
                left.append((rule, begin, answer, case.name))
    assert left == []


def test_answers_in_a_parts_file_settle_what_they_are_asked_for():
    left = []
    for (rule, begin, supply_as), (case, verdict) in asked().items():
        answers = ANSWERS[begin][1] if _PARTS.search(supply_as) else ()
        assert answers or not _PARTS.search(supply_as), (begin, supply_as)
        for answer in answers:
            text = "schema: withstand-parts/1\nparts:\n"
            text += "".join(f"  - match: {{ref: [{ref}]}}\n    {answer}\n" for ref in refs_of(case, verdict))
            if not gone(case, verdict, parts_file.READER.read(Blob("answer.yaml", text.encode()))):
                left.append((rule, begin, answer, case.name))
    assert left == []


def words():
    """Every text of the stages that ask, docstrings included."""
    for stage in ASKING:
        for path in sorted((ROOT / "checker" / stage).glob("*.py")):
            for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
                if isinstance(node, ast.Constant) and isinstance(node.value, str):
                    yield path.name, " ".join(node.value.split())


HEADING = r"`?[A-Z]\w*(?: (?!such\b|with\b|or\b|and\b)[a-z]+)?`?"


def test_every_heading_that_is_named_is_known():
    named = set()
    for file, text in words():
        for match in re.finditer(rf"BOM columns? ({HEADING}(?:(?:, | and | or ){HEADING})*)", text):
            named |= {(file, word.strip(" `")) for word in re.split(r", | and | or ", match[1]) if word.strip(" `")}
    assert {heading for _, heading in named} >= {"Class", "Voltage", "Isolation voltage", "Breaking capacity", "DTI", "Tolerance"}
    assert [(file, heading) for file, heading in sorted(named) if bom_headings.attribute(heading) is None] == []


def test_every_key_that_is_named_is_accepted():
    named = {
        (section, key)
        for _, text in words()
        for section, inside in re.findall(r"(ratings|body): \{([^}]*)\}?", text)
        for key in re.findall(r"([a-z_]+):", inside)
    }
    assert {("body", "clearance"), ("ratings", "isolation_test"), ("ratings", "voltage")} <= named
    assert {key for section, key in named if section == "ratings"} <= set(RATINGS)
    assert {key for section, key in named if section == "body"} <= {"clearance", "creepage", "through_insulation", "material_group"}


# ratings that only free text or a table of types gives: what a part is, not what it withstands
FROM_TEXT = {"output", "reference", "secondary", "varistor_voltage", "zener_voltage"}


def test_every_rating_a_rule_reads_has_a_heading_and_a_key():
    read = {
        name
        for stage in ASKING
        for path in (ROOT / "checker" / stage).glob("*.py")
        for name in re.findall(r"ratings(?:\.get\(|\[)\"([a-z_]+)\"", path.read_text(encoding="utf-8"))
    }
    assert {"surge_current", "breaking_capacity", "voltage", "isolation_test"} <= read
    assert read - FROM_TEXT <= set(RATINGS)
    assert {f"rating:{name}" for name in read - FROM_TEXT} <= set(bom_headings._ALIASES)


@pytest.mark.parametrize("name", sorted(RATINGS))
def test_every_key_of_a_parts_file_has_a_heading(name):
    assert f"rating:{name}" in bom_headings._ALIASES
