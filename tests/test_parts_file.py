"""The parts file: rows with their matches and facts, what it claims to be, and every mistake with its line."""

import hashlib
from pathlib import Path

import pytest

from checker import files
from checker.errors import InputError
from checker.files import Blob
from checker.model.fact import ATTRIBUTES, Fact, Source, Trust
from checker.model.reading import NOTE_KINDS, Row
from checker.readers.parts_file import READER

FIXTURE = Path(__file__).resolve().parents[1] / "fixtures" / "readers" / "parts" / "couplers.yaml"


def read(text: str):
    return READER.read(Blob("p.yaml", text.encode()))


def test_the_reader():
    assert (READER.form, READER.role) == ("parts file", "parts")


def test_every_row_and_fact():
    reading = READER.read(files.read(FIXTURE, shown="couplers.yaml"))
    assert (reading.role, reading.form, reading.path, reading.notes) == ("parts", "parts file", "couplers.yaml", ())
    assert reading.sha256 == hashlib.sha256(FIXTURE.read_bytes()).hexdigest()

    def fact(attribute, value, line, column, unit="", form="", text=""):
        return Fact(attribute, value, Source("couplers.yaml", line, column), Trust.PARTS_FILE, unit, form, text)

    page = "data sheet, page 4"
    assert reading.rows == (
        Row(
            (),
            (
                fact("kind", "optocoupler", 4, 11, text=page),
                fact("rating:isolation_working", 630, 6, 34, "V", "peak", f"630 V peak; {page}"),
                fact("rating:isolation_test", 5000, 6, 62, "V", "rms", f"5000 V rms; {page}"),
                fact("rating:clearance", 8, 7, 23, "mm", text=f"8 mm; {page}"),
                fact("rating:creepage", 8, 7, 39, "mm", text=f"8 mm; {page}"),
                fact("rating:through_insulation", 0.4, 7, 65, "mm", text=f"0.4 mm; {page}"),
                fact("material_group", "IIIa", 7, 89, text=page),
                fact("mark", "IEC 60747-5-5", 5, 21, text=f"record A, 17; valid until 2027-01-31; {page}"),
                fact("mark", "Y1", 5, 79, text=page),
            ),
            Source("couplers.yaml", 3, 5),
            types=("ABC-123",),
        ),
        Row(
            ("T1", "02"),
            (
                fact("kind", "transformer", 10, 11),
                fact("maker", "Example Windings", 11, 12),
                fact("technology", "triple-insulated wire", 12, 17),
                fact("windings", "1-3, 7-8-10, 4-5", 13, 15),
                fact("turns", "1-3:40, 7-8:6, 8-10:6.5", 13, 15),
            ),
            Source("couplers.yaml", 9, 5),
        ),
        Row(
            (),
            (
                fact("rating:voltage", 250, 15, 88, "V", "rms", "250 VAC"),
                fact("rating:current", 1, 15, 74, "A", text="1 A"),
                fact("rating:breaking_capacity", 35, 15, 34, "A", text="35 A"),
                fact("rating:melting_integral", 5, 15, 58, "A2s", text="5 A\u00b2s"),
            ),
            Source("couplers.yaml", 14, 5),
            types=("F1A", "F2A"),
        ),
    )
    assert {item.attribute for row in reading.rows for item in row.facts} <= set(ATTRIBUTES)


@pytest.mark.parametrize("text", ["", "parts: []", "schema: withstand-parts/1"])
def test_a_file_without_parts_is_noted(text):
    reading = read(text)
    assert reading.rows == ()
    assert [note.kind for note in reading.notes] == ["empty"]
    assert reading.notes[0].kind in NOTE_KINDS


@pytest.mark.parametrize(
    "head, ours",
    [
        ("schema: withstand-parts/1\n", True),
        ("# of the house\nschema: 'withstand-parts/1'\nparts:\n", True),
        ('{"schema": "withstand-parts/1", "parts": []}', True),
        ("parts:\n  - match: {type: X}\n", True),
        ("parts:\r\n- match: {type: X}\r\n", True),
        ("parts: [{match: {type: X}}]", True),
        ("title: x\nparts: # all\n", True),
        ("", False),
        ("designs:\n  a:\n    parts:\n      - x.yaml\n", False),
        ("schema: withstand-declaration/1\nsupply: none\n", False),
        ('{"schema": "withstand-report/1", "parts": []}', False),
        ("parts list of the board;qty\nR1;1\n", False),
        ("Parts,Qty\nR1,1\n", False),
        ("(export (version D)\nparts:\n)", False),
        ("<export>\nparts:\n</export>", False),
    ],
)
def test_what_it_claims(head, ours):
    assert READER.claims(head) is ours


@pytest.mark.parametrize(
    "text, message",
    [
        (
            "parts: {U1: {kind: relay}}",
            "1: `parts` has the wrong shape; found a map of keys; expected a list of {match: ..., kind: ...}",
        ),
        ("part: []", "1: unknown key `part`; did you mean `parts`?"),
        ("parts:\n- U1", "2: `parts[0]` has the wrong shape; found U1; expected a map"),
        ("parts:\n- {kind: relay}", "2: `parts[0]` lacks the key `match`; expected match: {type: ABC-123} or match: {ref: [U1]}"),
        ("parts:\n- match: {}", "2: `parts[0].match` does not name one way to find the part; found neither; expected type or ref"),
        (
            "parts:\n- match: {type: A, ref: U1}",
            "2: `parts[0].match` does not name one way to find the part; found both; expected type or ref",
        ),
        ("parts:\n- match: {typ: A}", "2: unknown key `typ` in `parts[0].match`; did you mean `type`?"),
        ("parts:\n- match: {type: A}\n  kind: optocupler", "3: `parts[0].kind` is no kind of part; did you mean `optocoupler`?"),
        (
            "parts:\n- match: {type: A}\n  core: floating",
            "3: unknown key `core` in `parts[0]`; expected match, windings, source, kind, value, type, maker",
        ),
        (
            "parts:\n- match: {type: A}\n  body: {clearance: 8}",
            "3: `parts[0].body.clearance` has no unit; found 8; expected a distance",
        ),
        ("parts:\n- match: {type: A}\n  body: {clearance: 8-9 mm}", "3: `parts[0].body.clearance` is a range"),
        (
            "parts:\n- match: {type: A}\n  windings: [{pins: [a-b, c]}]",
            "3: `parts[0].windings` names a pin that a winding cannot; found a-b",
        ),
        (
            "schema: withstand-declaration/1",
            "1: `schema` names another kind of file; found withstand-declaration/1; expected withstand-parts/1",
        ),
        ("parts:\n- match: {type: A}\n  marks: [!!str Y1]", "3: there is a tag"),
    ],
)
def test_mistakes_are_told_with_their_line(text, message):
    with pytest.raises(InputError) as caught:
        read(text)
    assert str(caught.value).startswith(f"p.yaml:{message}")
