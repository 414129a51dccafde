"""The measured identification score: its bounds, the rows it rests on, and that they stand in the sample files as written."""

from __future__ import annotations

import ast
from collections import Counter
from functools import cache
from pathlib import Path

import pytest
from score import FIELDS, SCORED, TEXTS, Row, agree, given, rows, scores, told

from checker import plugins
from checker.files import read
from checker.identify.pin_kinds import MOST_PINS
from checker.model.candidate import KINDS, UNKNOWN
from checker.model.reading import Reading

SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"
PRECISION, RECALL = 0.97, 0.95
LEAST_ROWS = 300


@cache
def judged():
    return [(row, told(row.part())) for row in rows()]


@pytest.mark.parametrize("field", FIELDS)
def test_precision_and_recall(field):
    score = next(score for score in scores(judged()) if score.field == field)
    faults = "\n".join(map(str, score.faults))
    assert score.precision >= PRECISION, faults
    assert score.recall >= RECALL, faults


def test_few_parts_that_say_what_they_are_stay_unknown():
    unread = [row.line for row, candidate in judged() if candidate.kind == UNKNOWN and row.stated("kind")[0]]
    assert len(unread) <= 2, unread


def test_there_are_many_rows_of_many_files_and_kinds():
    found = rows()
    files = Counter(row.cells["file"] for row in found)
    kinds = {said.words for row in found for said in row.stated("kind")[0]}
    assert len(found) >= LEAST_ROWS
    assert len(files) >= 25
    assert max(files.values()) <= len(found) // 8
    assert len(kinds) >= 25
    assert len({(row.cells["file"], row.cells["ref"]) for row in found}) == len(found)


def test_rows_are_well_formed():
    for row in rows():
        assert None not in {*row.cells, *row.cells.values()}, row.line
        assert row.cells["licence"], row.line
        assert row.cells["carrier"] in ("bom", "netlist"), row.line
        for field in FIELDS:
            certain, known = row.stated(field)
            assert field != "kind" or {said.words for said in (*certain, *known)} <= KINDS, row.line


def test_the_score_reads_nothing_but_its_rows():
    """The rows stand in the project, and no expectation is taken from the program: it is imported in `told` and `given` alone."""
    tree = ast.parse(Path(__file__).with_name("score.py").read_text("utf-8"))
    calls = [node for node in ast.walk(tree) if isinstance(node, ast.Name) and node.id == "identify"]
    inside = next(node for node in tree.body if isinstance(node, ast.FunctionDef) and node.name == "told")
    assert len(calls) == 1
    assert calls[0] in ast.walk(inside)
    assert SCORED.is_file()


def test_a_wrong_answer_and_a_missed_one_are_counted():
    row = next(row for row in rows() if row.cells["is_kind"] == "capacitor" and row.cells["is_value"] == "100 nF")
    other = next(candidate for at, candidate in judged() if at.cells["is_kind"] == "resistor" and candidate.value is not None)
    found = {score.field: score for score in scores([(row, other)])}
    for field in ("kind", "value"):
        assert (found[field].count("wrong"), found[field].count("missed")) == (1, 1)
        assert (found[field].precision, found[field].recall) == (0.0, 0.0)


def test_what_is_known_of_a_type_is_right_when_given_and_no_miss_when_not():
    row = next(row for row in rows() if row.cells["is_voltage"] == "(1000 V)")
    assert row.stated("voltage")[0] == ()
    candidate = told(row.part())
    assert agree(row.stated("voltage")[1][0], given(candidate, "voltage")[0], known=True)


# a circuit-simulation netlist names no symbols; what its reader says of the element letter is not text of the file
READ_IN = {"SPICE netlist": frozenset({"symbol", "kind"})}


@cache
def _reading(name: str) -> Reading:
    blob = read(SAMPLES / name)
    carrier = next(row.cells["carrier"] for row in rows() if row.cells["file"] == name)
    return plugins.reader_for(blob, carrier).read(blob)


def _stands(row: Row, name: str, text: str, facts: list[tuple[str, str]]) -> bool:
    """Whether a file says the fact; a long description may be cut in the row."""
    cut = name == "description"
    return any(attribute == name and (said == text or (cut and said.startswith(text))) for attribute, said in facts)


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample boards are not here")
@pytest.mark.parametrize("name", sorted({row.cells["file"] for row in rows()}))
def test_rows_stand_in_the_samples(name):
    reading = _reading(name)
    places = {(record.ref, record.source.line): record for record in reading.parts}
    tables = {(ref, record.source.line): record for record in reading.rows for ref in record.refs[:1]}
    nodes: dict[str, dict[str, str]] = {}
    for net in reading.nets:
        for node in net.nodes:
            nodes.setdefault(node.ref, {}).setdefault(node.pin, node.name)
    for row in (row for row in rows() if row.cells["file"] == name):
        key = (row.cells["ref"], int(row.cells["line"]))
        record = tables[key] if row.cells["carrier"] == "bom" else places[key]
        facts = [(fact.attribute, str(fact.value)) for fact in record.facts]
        written = [(attribute, text) for attribute, text in row.facts() if attribute not in READ_IN.get(reading.form, ())]
        assert all(_stands(row, attribute, text, facts) for attribute, text in written), row.line
        said = {attribute for attribute, text in facts if text and attribute in TEXTS} - READ_IN.get(reading.form, frozenset())
        assert said == {attribute for attribute, _ in written if attribute in TEXTS}, row.line
        if row.cells["carrier"] == "netlist":
            listed = [(pin.number, pin.name) for pin in places[key].pins] or list(nodes.get(row.cells["ref"], {}).items())
            assert len(listed) == len(row.pins())
            assert len(listed) > MOST_PINS or listed == [(pin.number, pin.name) for pin in row.pins()], row.line
