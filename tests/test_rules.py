"""Every rule against its cases, and what the rules accept against tables and arithmetic from outside the project."""

from __future__ import annotations

import math
import shutil
from pathlib import Path

import pytest
import yaml

from checker import plugins, testing
from checker.errors import InputError

ROOT = Path(__file__).resolve().parents[1]
RULES = ROOT / "fixtures" / "rules"
CIRCUITS = "circuits.yaml"
STANDARDS = ROOT.parent / "shared" / "reference" / "standards.yaml"
FILES = {path.stem: testing.load_cases(path) for path in sorted(RULES.glob("*.yaml")) if path.name != CIRCUITS}
CASES = [pytest.param(case, id=f"{rule}: {case.name}") for rule, file in FILES.items() for case in file.cases]


@pytest.mark.parametrize("case", CASES)
def test_a_case_gives_exactly_its_verdicts(case):
    assert testing.verdicts_of(case) == case.expect


def test_every_rule_has_a_file_and_every_file_a_rule():
    assert sorted(FILES) == sorted(plugins.rule_ids())
    assert all(file.rule == name for name, file in FILES.items())


@pytest.mark.parametrize("rule", sorted(FILES))
def test_a_file_shows_each_outcome_or_says_why_it_cannot(rule):
    file = FILES[rule]
    shown = {case.outcome for case in file.cases}
    assert {"pass", "fail", "open"} <= shown | set(file.never)
    assert not shown & set(file.never)


@pytest.mark.parametrize("rule", sorted(FILES))
def test_a_case_expects_what_it_is_there_to_show(rule):
    names = [case.name for case in FILES[rule].cases]
    assert len(set(names)) == len(names)
    for case in FILES[rule].cases:
        outcomes = {outcome for outcome, _, _ in case.expect} or {"not-applicable"}
        assert case.outcome in outcomes, case.name


# mistakes in a case file

GOOD = """\
rule: fuse
circuits: {small: {R1: {value: 1k, pins: {1: A, 2: B}}}}
cases:
  - name: one
    outcome: pass
    base: small
    expect: []
"""


def _load(folder: Path, text: str) -> testing.Cases:
    path = folder / "cases.yaml"
    path.write_text(text, encoding="utf-8")
    return testing.load_cases(path)


def test_the_file_the_mistakes_are_made_in_is_good(tmp_path):
    assert [case.line for case in _load(tmp_path, GOOD).cases] == [4]


@pytest.mark.parametrize(
    ("right", "wrong", "line", "said"),
    [
        ("outcome: pass", "outcome: passes", 5, "pass"),
        ("base: small", "base: smal", 6, "small"),
        ("base: small", "base: [small, large]", 6, "large"),
        ("value: 1k", "valeu: 1k", 2, "value"),
        ("pins: {1: A, 2: B}", "pins: [A, B]", 2, "list"),
        ("expect: []", "expect: [[pass, error]]", 7, "[outcome, level, [parts]]"),
        ("expect: []", "expect: [[pass, grave, []]]", 7, "error"),
        ("expect: []", "expect: [[pas, error, []]]", 7, "pass"),
        ("expect: []", "expect: [[pass, error, R1]]", 7, "list"),
        ("expect: []", "expects: []", 4, "expect"),
        ("expect: []", "expect: []\n    declaration: {suply: {mains: 230 V}}", 8, "supply"),
        ("expect: []", "expect: []\n    without: [R2]", 8, "R1"),
        ("expect: []", "expect: []\n    part: {}", 8, "parts"),
        ("rule: fuse", "rule: fuse\nnever: {impossible: never}", 2, "open"),
    ],
)
def test_a_mistake_in_a_case_file_is_told_with_its_line(tmp_path, right, wrong, line, said):
    assert GOOD.count(right) == 1
    with pytest.raises(InputError) as caught:
        _load(tmp_path, GOOD.replace(right, wrong))
    assert caught.value.line == line
    assert said in str(caught.value)


@pytest.mark.parametrize("name", ["../circuits.yaml", "/etc/circuits.yaml", "elsewhere/circuits.yaml"])
def test_circuits_come_from_the_same_folder_only(tmp_path, name):
    with pytest.raises(InputError, match="beside this one"):
        _load(tmp_path, f"rule: fuse\ncircuits: {name}\ncases: []\n")


# checks against something outside the project


@pytest.fixture
def one(tmp_path):
    """A function: the report of the shared flyback with more text of a case (parts, declaration)."""
    shutil.copy(RULES / CIRCUITS, tmp_path / CIRCUITS)

    def report(rule: str, more: str):
        head = f"rule: {rule}\ncircuits: {CIRCUITS}\ncases:\n  - name: one\n    outcome: pass\n    expect: []\n"
        (case,) = _load(tmp_path, head + more).cases
        return testing.report_of(case)

    return report


@pytest.mark.parametrize(
    ("value", "farad", "current"),
    [
        # Three-digit marking: two figures and a power of ten in pF (common practice, no source). 2 pi 50 Hz x 1 nF x 220 V is
        # 69 uA; the same figures read as 102 nF would be 7 mA.
        ("102", 1e-9, 69e-6),
        ("102nF", 102e-9, 7e-3),
        ("103", 10e-9, 0.69e-3),
        ("472", 4.7e-9, 0.325e-3),
    ],
)
def test_what_a_marking_on_a_bridging_capacitor_lets_through(one, value, farad, current):
    part = f'{{value: "{value}", symbol: C, description: CAP CER Y1, pins: {{1: PGND, 2: SGND}}}}'
    report = one("bridging-capacitor", f"    base: flyback\n    parts: {{C9: {part}}}\n")
    read = next(part.value for part in report.parts if part.ref == "C9")
    assert read == pytest.approx(farad, rel=1e-9)
    assert 2 * math.pi * 50 * read * 220 == pytest.approx(current, rel=0.01)


# Which insulation a class of IEC 60384-14 may bridge, one capacitor alone: the class table of that standard as makers and
# a product-safety list tell it (../shared/reference/standards.yaml, iec60384_14_y, verified partly). Class X bridges none.
BRIDGED = {
    "Y1": {"basic", "supplementary", "double", "reinforced"},
    "Y2": {"basic", "supplementary"},
    "X1": set(),
    "X2": set(),
}


@pytest.mark.parametrize("grade", ["basic", "supplementary", "double", "reinforced"])
@pytest.mark.parametrize("name", sorted(BRIDGED))
def test_the_classes_a_grade_accepts(one, name, grade):
    declaration = (
        "    declaration:\n      supply: {mains: 230 V}\n      domains: {line: [PGND], out: [SGND]}\n"
        f"      barriers: [{{between: [line, out], grade: {grade}}}]\n"
    )
    part = f"    base: flyback\n    parts: {{C9: {{value: 1n {name} 300VAC, symbol: C, pins: {{1: PGND, 2: SGND}}}}}}\n"
    report = one("bridging-capacitor", part + declaration)
    (verdict,) = (v for v in report.verdicts if v.rule == "bridging-capacitor" and v.what.startswith("Class"))
    assert verdict.outcome == ("pass" if grade in BRIDGED[name] else "fail")


@pytest.mark.skipif(not STANDARDS.exists(), reason="the reference tables are not here")
def test_the_class_table_is_the_one_of_the_reference():
    table = _reference("iec60384_14_y")
    for name, bridged, *_ in table["rows"]:
        if name in BRIDGED:
            assert set(bridged.split(" or ")) <= BRIDGED[name]
            assert ("reinforced" in bridged) == ("reinforced" in BRIDGED[name])


# ES1, steady state, up to 1 kHz: IEC 62368-1:2018 table 4 (../shared/reference/standards.yaml, iec62368_1_es_limits_voltage,
# these cells read in two public sources).
TOUCHABLE = [("dc", "V", 60.0), ("rms", "V rms", 30.0), ("peak", "V peak", 42.4)]


@pytest.mark.parametrize(("form", "unit", "limit"), TOUCHABLE)
@pytest.mark.parametrize(("factor", "outcome"), [(0.999, "pass"), (1.0, "pass"), (1.001, "fail")])
def test_the_touchable_voltage_of_an_output(one, form, unit, limit, factor, outcome):
    declared = f"    base: flyback\n    declaration: {{supply: {{mains: 230 V, outputs: {{VOUT: {limit * factor:.6g} {unit}}}}}}}\n"
    report = one("reachable-connector", declared)
    (verdict,) = (v for v in report.verdicts if v.rule == "reachable-connector" and tuple(v.parts) == ("J2",))
    assert verdict.outcome == outcome
    assert verdict.limit is not None
    assert (verdict.limit.value, verdict.limit.form) == (limit, form)


@pytest.mark.skipif(not STANDARDS.exists(), reason="the reference tables are not here")
def test_the_touchable_voltages_are_those_of_the_reference():
    rows = {row[1]: row for row in _reference("iec62368_1_es_limits_voltage")["rows"] if row[0] == "ES1"}
    told = {form: limit for form, _, limit in TOUCHABLE}
    assert rows["dc"][2] == told["dc"]
    assert rows["ac <= 1 kHz"][2:] == [f"{told['rms']:g} r.m.s.", f"{told['peak']:g} peak"]


def _reference(name: str) -> dict:
    """The table of that name, wherever it stands in the reference."""
    queue = [yaml.safe_load(STANDARDS.read_text(encoding="utf-8"))]
    for node in queue:
        if isinstance(node, dict):
            if name in node:
                return node[name]
            queue.extend(node.values())
    raise LookupError(name)
