"""The BOM reader: fixtures with rows written by hand, round trips through the csv module, real and damaged files."""

from __future__ import annotations

import csv
import io
import random
import re
from pathlib import Path

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits
from checker.errors import InputError
from checker.files import Blob, read
from checker.model.fact import ATTRIBUTES, Trust
from checker.readers import bom_headings
from checker.readers.bom_headings import attribute, fitted, is_empty, not_fitted_phrase, not_fitted_value, unit_in
from checker.readers.bom_table import READER
from checker.readers.sniff import head

FIXTURES = Path(__file__).resolve().parents[1] / "fixtures" / "readers" / "bom"
SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"
EXPECTED = yaml.safe_load((FIXTURES / "expected.yaml").read_text(encoding="utf-8"))


def parse(text: str | bytes, path: str = "bom.csv"):
    return READER.read(Blob(path, text if isinstance(text, bytes) else text.encode()))


def said(facts):
    return [[fact.attribute, fact.value] for fact in facts]


def shown(row):
    return {
        "line": row.source.line,
        "refs": list(row.refs),
        "facts": said(row.facts),
        **({"unread": row.unread} if row.unread else {}),
        **({"table": row.table} if row.table else {}),
        **({"alternates": [said(choice) for choice in row.alternates]} if row.alternates else {}),
    }


@pytest.mark.parametrize("name", EXPECTED)
def test_fixture(name):
    blob = read(FIXTURES / name, shown=name)
    assert READER.claims(head(blob))
    reading = READER.read(blob)
    assert [shown(row) for row in reading.rows] == EXPECTED[name]
    assert (reading.role, reading.form, reading.path, reading.sha256) == ("bom", "delimited table", name, blob.sha256)


def test_every_fixture_is_expected():
    assert {path.name for path in FIXTURES.iterdir()} == {*EXPECTED, "expected.yaml"}


def test_places_and_trust():
    row = parse('Note\n\nRef,"Value"\nR1,10k\n').rows[0]
    (fact,) = row.facts
    assert (fact.source.path, fact.source.line, fact.source.column, fact.source.cell) == ("bom.csv", 4, 2, "Value")
    assert fact.trust is Trust.BOM


HEADINGS = {
    "ref": "Reference(s)|RefDes|Reference Designator|Designators|Ref.|Schematic Reference",
    "quantity": "Qty/Board|Qnty|Quantity Per PCB|Order Qty.|Menge",
    "value": "Value|Comment|DisplayValue|Description(VALUE)",
    "footprint": "Package(CASE)|PCB Footprint",
    "type": "MPN|MFG#|manf#|Man P/N|Mfr_Part_Number|Manufacturer No|Part #|Manufacturing Part No|Alternate MPN|MPN 2",
    "maker": "MFG|Manufacturer 1|Manufacturer_Name",
    "distributor": "LCSC Part #（optional）|Digi-Key_PN|Supplier and ref|SPN|Cat#|Order Number|Farnell number",
    "description": "Desc|ki_description|Rating|Part|Component",
    "rating:voltage": "Working voltage|CapRatedVoltage|Voltage (V)|Rated voltage",
    "rating:isolation_working": "VIORM|VIOWM|Isolation working voltage",
    "rating:isolation_test": "Isolation voltage (V rms)|VISO|Test voltage",
    "rating:through_insulation": "Distance through insulation|DTI",
    "rating:creepage": "Creepage [mm]",
    "rating:clearance": "Clearance",
    "rating:impulse": "Impulse",
    "rating:melting_integral": "I²t (A²s)|I2t",
    "rating:breaking_capacity": "Breaking capacity",
    "rating:power": "Power / W",
    "technology": "Dielectric|Technology",
    "material_group": "CTI|Material group",
    "mark": "Class|Safety class|Approval|Approvals|Mark|Standard",
    "turns": "Turns",
    "windings": "Windings",
    "tolerance": "Tolerance",
    "kind": "Kind",
    "fitted-": "DNP|DNI|Do Not Place|DONOTPLACE|NoFit",
    "fitted+": "Fit|Place (YES/NO)|Populate|Fitted",
    "row": "#|S.No|Item|Id",
    None: "Price|State||V|Customer",
}


@pytest.mark.parametrize("meaning", HEADINGS)
def test_heading(meaning):
    for heading in HEADINGS[meaning].split("|"):
        assert attribute(heading) == meaning, heading
        if not unit_in(heading):  # the case of a unit has a meaning
            assert attribute(f"  {heading.upper()}: ") == meaning, heading


def test_alias_table_is_closed_and_single():
    specials = {"ref", "row", "fitted+", "fitted-"}
    assert set(bom_headings._ALIASES) <= set(ATTRIBUTES) | specials
    aliases = [alias for text in bom_headings._ALIASES.values() for alias in text.split()]
    assert len(aliases) == len(set(aliases))
    # a key that the normal form of headings never gives would be dead
    assert [alias for alias in aliases if "#" not in alias and bom_headings.heading_key(alias) != alias] == []


@pytest.mark.parametrize(
    "heading, unit",
    [("Voltage (V)", "V"), ("Value [nF]", "nF"), ("Power / W", "W"), ("Temperature (°C)", "degC"), ("Isolation (V rms)", "V rms"),
     ("Reference(s)", ""), ("Description(VALUE)", ""), ("(V)", ""), ("Package(CASE)", ""), ("Current in mA", "mA"), ("Value", "")],
)  # fmt: skip
def test_unit_of_heading(heading, unit):
    assert unit_in(heading) == unit


FITTED = {
    ("DNP", False): "yes|x|1|DNP|TRUE|np|not fitted|Do not populate!|✗",
    ("DNP", True): "no|0|false||fitted|n/a",
    ("DNP", None): "perhaps",
    ("Fit", False): "no|NO|0|dnp|NF|none|fit: none|DNP (option)",
    ("Fit", True): "x|yes|1|all|all, fit: ",
    ("Fit", None): "|SMD|✗|yes, no",
    ("fitted+", False): "no",
    ("fitted-", True): "no",
    ("Do Not Place", False): "Y",
    ("Config", False): "dnp|dnp: yes",
    ("Config", True): "fitted",
    ("Config", None): "no|x|",
}


@pytest.mark.parametrize("column, expected", FITTED)
def test_fitted(column, expected):
    for text in FITTED[column, expected].split("|"):
        assert fitted(column, text) is expected, text


PHRASES = "DNP|dni|nofit|do not populate|Do Not Place|not fitted|no stuff".split("|")
ABSENT = "NP|NF|DNP 100n|100n DNP|100n/DNP|0R (DNP)|NA(100k)|NA/R0402|NS(10k)|n.m.|100n (not fitted)|DNP-100n|n.f.".split("|")
THERE = "|NP0|100n NP0|NA555|NA555(SO8)|NAND|N/A|NA|NC|100 nF|100 NF|10k|NPN|NF-1234|NS1234|fitted|none|NTC|DN-PATCH|1N4007".split(
    "|"
)


@pytest.mark.parametrize("text", PHRASES + ABSENT + THERE)
def test_value_that_says_not_fitted(text):
    assert not_fitted_value(text) is (text not in THERE)
    assert not_fitted_phrase(text) is (text in PHRASES)


@pytest.mark.parametrize(
    "text, line, message",
    [
        ("", 0, "is empty"),
        (" \r\n\n", 0, "is empty"),
        ("Value,Price\n10k,1\n", 1, "found the headings Value, Price; expected a column Reference"),
        ("R1,10k\nR2,1k\n", 1, "no header with a reference column"),
        ("a\nReference\nR1\nR2\n", 2, "no column besides the references"),
        ("Reference,Value\n", 1, "a header but no rows"),
        ("Reference,Value\n,10k\n", 1, "a header but no rows"),
        ('Reference,Value\nR1,10k\nR2,"1k\nR3,1k\n', 3, "never closed"),
        ('Reference,Value\nR1,"1/4" wide"\n', 2, "cannot be cut"),
        ("Reference,Value\nR1," + "x" * 140_000 + "\n", 2, "too long"),
        ("Reference,Value\nR1" + "," * 600 + "\n", 2, "too many columns"),
        ("Reference,Value\nR1" + "," * 90_000 + "\n", 2, "separators in one row"),
        ("Reference,Value\n" + "R1,1k\n" * (limits.BOM_ROWS + 1), limits.BOM_ROWS + 1, "more than 250,000 rows"),
        ('Reference,Value\n"' + ",".join(f"R{n}-R{n + 999}" for n in range(0, 22_000, 1000)) + '",1k\n', 2, "in one cell"),
        ("Reference" + ",MPN" * 40 + "\nR1" + "".join(f",T{n}" for n in range(40)) + "\n", 2, "too many choices of part"),
        ("Reference,Value\nR1,10k\0\n", 0, "binary data"),
        ("Reference,Value\n" + "R1,10k\n" * 1000 + "\0", 1002, "NUL"),
        ('(export (version "E") (components))', 0, "an S-expression netlist"),
        ('<?xml version="1.0"?><export version="E"/>', 0, "an XML netlist"),
        ('{"a": 1}', 0, "a JSON file"),
        ("PK\x03\x04rest", 0, "a spreadsheet workbook"),
        ("\n".join(f"Ref{n},Value\nR1,1k" for n in range(1100)).replace("Ref", "Ref ") + "\n", 0, ""),
    ],
)  # fmt: skip
def test_unusable(text, line, message):
    if not message:  # a thousand and more headers: `Ref 1` to `Ref 1099`, each with a row
        message, line = "too many tables", 2001
    with pytest.raises(InputError, match=re.escape(message)) as caught:
        parse(text)
    assert caught.value.line == line
    assert str(caught.value).startswith("bom.csv")


def test_netlist_given_as_bom_says_what_to_do():
    with pytest.raises(InputError, match="Give the netlist as the first argument"):
        parse("(export (version D))")


@pytest.mark.parametrize(
    "text, claimed",
    [
        ("Reference,Value\nR1,10k\n", True),
        ("Project: x\nRevision: 2\nDate: y\nTitle: z\n\nReference,Value\nR1,10k\n", True),
        ("Reference|Value\nR1|10k\n", True),
        ("schema: withstand-parts/1\nparts:\n  - match: {type: ABC}\n    kind: optocoupler\n", False),
        ("(export (version D))", False),
        ("<export/>", False),
        ('{"a": [1, 2]}', False),
        ("[1, 2]", False),
        ("* netlist\nR1 a b 10k\n", False),
        ("GND R1-1 R2-2\nVCC R1-2 U1-3\n", False),
        ("P  JOB x\nP  UNITS CUST 0\n317GND              R1    -1\n", False),
        ("PK\x03\x04", False),
        ("", False),
    ],
)
def test_claims(text, claimed):
    assert READER.claims(text) is claimed


@pytest.mark.parametrize(
    "text, facts",
    [
        ("Ref,Comment\nR1,10k\n", [["value", "10k"]]),
        ("Ref,Comment,Value\nR1,x,10k\n", [["description", "x"], ["value", "10k"]]),
        ("Ref,Part Number,Manufacturer Part Number\nR1,H-1,RC-1\n", [["field:Part Number", "H-1"], ["type", "RC-1"]]),
        ("Ref,Part Number,Type\nR1,RC-1,SMD\n", [["field:Type", "SMD"], ["type", "RC-1"]]),
        ("Designator,Part,Value\nR1,Resistor,10k\n", [["description", "Resistor"], ["value", "10k"]]),
        ("Part,Value\nR1,10k\n", [["value", "10k"]]),
        ("Component,References,Value\n1,R1,10k\n", [["value", "10k"]]),
        ("Position,Designator,Value\nA1,R1,10k\n", [["field:Position", "A1"], ["value", "10k"]]),
        ("Ref,Class,MPN\nC1,none,any\n", [["mark", "none"]]),
        ("Ref,Value,Qty\nC1,~,\"1,000\"\n", [["quantity", 1000.0]]),
        ("Ref,Value,Qty\nC1,1u,2 pcs\n", [["value", "1u"], ["field:Qty", "2 pcs"]]),
        ("Ref,Voltage (V)\nC1,250 V\n", [["rating:voltage", "250 V"]]),
        ("sep=;\nRef;Value\nC1;4,7u\n", [["value", "4,7u"]]),
        ('Ref, Value\n"C1", "a, b"\n', [["value", "a, b"]]),
    ],
)  # fmt: skip
def test_ambiguous_headings_and_cells(text, facts):
    (row,) = parse(text).rows
    assert said(row.facts) == facts


def test_an_unmarked_section_with_more_headings_does_not_hide_the_first():
    reading = parse("Ref,Value\nR1,10k\nR2,1k\n\nReference,Value,Qty,MPN\nC1,1u,1,X\n")
    assert [row.refs for row in reading.rows] == [("R1",), ("R2",), ("C1",)]
    assert {row.table for row in reading.rows} == {""}


def test_notes_name_what_was_left_out():
    reading = parse("Ref,Value\nR1,10k\n,screw\nR2,1k,0603,\n")
    assert [(note.kind, [source.line for source in note.sources]) for note in reading.notes] == [("skipped", [3]), ("skipped", [4])]
    assert [note.kind for note in parse("Ref,Value\nR1,10\xb5\n".encode("cp1252")).notes] == ["encoding"]


LETTERS = st.characters(codec="utf-8", exclude_categories=("C", "Zl", "Zp")) | st.sampled_from('",;\t|\n')
CELL = st.text(LETTERS, max_size=30).map(str.strip)
PLAIN = st.text(st.characters(min_codepoint=32, max_codepoint=126), max_size=30).map(str.strip)
# encoding, prefix: a byte-order mark where the codec writes none
ENCODINGS = {"utf-8": b"", "utf-8-sig": b"", "utf-16": b"", "utf-16-be": b"\xfe\xff", "utf-16-le": b"", "cp1252": b""}


@settings(max_examples=150, deadline=None)
@given(st.data(), st.sampled_from(sorted(ENCODINGS)), st.sampled_from(",;\t|"), st.sampled_from(["\n", "\r\n"]))
def test_round_trip(data, encoding, delimiter, end):
    cells = CELL if encoding in ("utf-8", "utf-8-sig", "utf-16") else PLAIN
    values = data.draw(st.lists(st.tuples(cells, cells, cells), min_size=1, max_size=8))
    buffer = io.StringIO()
    writer = csv.writer(buffer, delimiter=delimiter, lineterminator=end)
    writer.writerow(["Reference", "Value", "Description", "Stock"])
    lines = []
    for number, texts in enumerate(values, 1):
        lines.append(buffer.getvalue().count("\n") + 1)
        writer.writerow((f"R{number}", *texts))
    reading = parse(ENCODINGS[encoding] + buffer.getvalue().encode(encoding))
    assert [row.refs for row in reading.rows] == [(f"R{number}",) for number in range(1, len(values) + 1)]
    names = ("value", "description", "field:Stock")
    assert [row.source.line for row in reading.rows] == lines
    for row, texts in zip(reading.rows, values, strict=True):
        kept = [fact.value for fact in row.facts if fact.attribute in names]
        assert kept == [text for text in texts if not is_empty(text)]


def counted(path: Path) -> tuple[int, int]:
    """(rows, references) by a plain csv walk: no alias table, no scoring; a row counts when its list column begins as one."""
    data = path.read_bytes()
    text = data.decode("utf-16" if data[:2] == b"\xff\xfe" else "utf-8-sig")
    delimiter = "\t" if path.suffix == ".tsv" else ","
    column, rows, refs = None, 0, 0
    for cells in csv.reader(io.StringIO(text), delimiter=delimiter):
        names = [cell.lower() for cell in cells]
        at = next((names.index(name) for name in ("designator", "reference", "references") if name in names), None)
        if at is not None:
            column = at
        elif column is not None and len(cells) > column and re.match(r"[A-Z]+[0-9k]", cells[column]):
            rows += 1
            for token in re.split(r"[, ]+", cells[column]):
                ends = re.fullmatch(r"[A-Z]+(\d+)-[A-Z]+(\d+)", token)
                refs += int(ends[2]) - int(ends[1]) + 1 if ends else token[:1].isalpha()
    return rows, refs


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample files are not here")
def test_real_files_against_a_plain_walk():
    paths = [path for path in sorted(SAMPLES.rglob("*bom*")) if path.suffix in (".csv", ".tsv")]
    assert len(paths) >= 7
    for path in paths:
        blob = read(path)
        assert READER.claims(head(blob)), path
        reading = READER.read(blob)
        assert (len(reading.rows), sum(len(row.refs) for row in reading.rows)) == counted(path), path


def test_damaged_files_end_in_rows_or_a_message():
    dice = random.Random(7)
    sources = [path.read_bytes() for path in sorted(FIXTURES.iterdir()) if path.suffix != ".yaml"]
    outcomes = {"read": 0, "refused": 0}
    for data in sources:
        for _ in range(60):
            damaged = bytearray(data[: dice.randrange(len(data) + 1)] if dice.random() < 0.4 else data)
            for _ in range(dice.randrange(6)):
                if damaged:
                    damaged[dice.randrange(len(damaged))] = dice.randrange(256)
            try:
                outcomes["read"] += bool(parse(bytes(damaged)).rows)
            except InputError:
                outcomes["refused"] += 1
    assert min(outcomes.values()) > 20
