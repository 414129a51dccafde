"""What people mean with a bill of materials, from the text of the table to the parts of the design."""

from __future__ import annotations

import csv
import io
import random
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.assemble.join import assemble
from checker.errors import ArgumentError, InputError
from checker.files import Blob, read
from checker.identify.candidates import identify
from checker.model.declaration import Declaration, Variant
from checker.model.fact import Fact, Source
from checker.model.reading import NOTE_KINDS, PartRecord, Reading, SymbolPin
from checker.readers import bom_choices, bom_variants
from checker.readers.bom_headings import attribute, fitted, not_fitted_phrase, unit_in
from checker.readers.bom_rows import bill
from checker.readers.bom_sections import about_other, says_absent
from checker.readers.bom_table import READER

FIXTURES = Path(__file__).resolve().parents[1] / "fixtures" / "readers" / "bom"


def parse(text: str | bytes, path: str = "bom.csv") -> Reading:
    return READER.read(Blob(path, text if isinstance(text, bytes) else text.encode()))


def drawn(*refs: str, **kinds: str) -> Reading:
    """A netlist of these parts; kinds: reference -> symbol."""
    source = Source("n.net", 1)
    parts = [PartRecord(ref, (), source, (SymbolPin("1"), SymbolPin("2"))) for ref in refs]
    parts += [PartRecord(ref, (Fact("symbol", name, source),), source, (SymbolPin("1"),)) for ref, name in kinds.items()]
    return Reading("netlist", "test", "n.net", "00", tuple(parts))


def design(bom: str | bytes, *refs: str, variant: str | None = None, declaration: Declaration | None = None, **kinds: str):
    made = assemble("board", (drawn(*refs, **kinds), parse(bom)), declaration or Declaration(), variant)
    assert {note.kind for note in made.notes} <= set(NOTE_KINDS)
    return made


def candidates(bom: str | bytes, **kinds: str):
    made = design(bom, **kinds)
    return identify(made, Declaration())


def out(made):
    """The parts that are not fitted."""
    return [ref for ref, part in made.parts.items() if not part.fitted]


def notes(made, *kinds):
    return [(note.kind, *note.parts) for note in made.notes if not kinds or note.kind in kinds]


def rows(text):
    return [(row.refs, {fact.attribute: fact.value for fact in row.facts}) for row in parse(text).rows]


# headers


@pytest.mark.parametrize("before", [0, 1, 8, 39])
def test_the_header_may_stand_in_any_of_the_first_forty_rows(before):
    lines = [f"Line {number}: text" for number in range(before)]
    assert parse("\n".join([*lines, "Ref,Value", "R1,10k"])).rows[0].source.line == before + 2


def test_a_header_further_down_is_not_looked_for():
    with pytest.raises(InputError, match="no header with a reference column"):
        parse("\n".join([*["x,y"] * 40, "Ref,Value", "R1,10k"]))


def test_blank_rows_and_columns_around_the_table_do_not_matter():
    assert rows(",,\n,Ref,Value\n,,\n,R1,10k\n") == [(("R1",), {"value": "10k"})]


# several tables, sections and totals


SECTIONS = {
    "a caption": "Ref,Value\nR1,1k\n\nDNP\nR2,1k\n",
    "a caption with the word parts": "Ref,Value\nR1,1k\n\nParts not fitted:,\nR2,1k\n",
    "a caption without a blank row": "Ref,Value\nR1,1k\nNot populated\nR2,1k\n",
    "a caption and a header of its own": "Ref,Value\nR1,1k\n\nDNP\nRef,Value\nR2,1k\n",
    "a caption and another header": "Ref,Value\nR1,1k\n\nDo not fit\n\nDesignator,Qty,Value\nR2,1,1k\n",
    "in German": "Bauteil;Wert\nR1;1k\n\nNicht bestückt\nR2;1k\n",
    "in French": "Repère;Valeur\nR1;1k\n\nNon monté\nR2;1k\n",
    "the section comes first": "DNP\nRef,Value\nR2,1k\n\nFitted\nRef,Value\nR1,1k\n",
    "beside the reference": 'Ref,Value\n"R1, R2 (DNP)",1k\n',
    "behind the reference": "Ref,Value\nR1,1k\nR2 not fitted,1k\n",
    "a blank row between the caption and its rows": "Ref,Value\nR1,1k\n\nDNP,\n,\nR2,1k\n",
}


@pytest.mark.parametrize("name", SECTIONS)
def test_a_section_of_parts_that_are_left_out(name):
    assert out(design(SECTIONS[name], "R1", "R2")) == ["R2"]


@pytest.mark.parametrize(
    "text",
    [
        "Ref,Value\nR2,1k\n\nDNP\nR3,1k\n\nR1,1k\n",  # a blank row ends the section: what follows is judged
        "Ref,Value\nR2,1k\n\nDNP\nR3,1k\nMechanical\nR1,1k\n",  # so does another caption
        "Ref,Value\nR2,1k\n\nDNP\nR3,1k\n\nSMD\nRef,Value\nR1,1k\n",  # and another table
        "Ref,Value\nR2,1k\n\n,DNP\nR1,1k\nR3,DNP\n",  # a cell under another column is no caption
    ],
)
def test_where_a_section_ends(text):
    assert out(design(text, "R1", "R2", "R3")) == ["R3"]


def test_a_part_in_the_list_and_in_the_section_is_a_contradiction():
    made = design("Ref,Value\nR1,1k\n\nDNP\nRef,Value\nR1,1k\n", "R1")
    assert out(made) == []
    assert notes(made) == [("fitted-differs", "R1")]


@pytest.mark.parametrize(
    "tail",
    [
        "Total,5\n",
        "\nTotals\nQty,Value\n5,10k\nQ1,1k\n",
        "\nSumme:,\nSOT23,1\n",
        "\nPackage,Count\nSOT23,1\n0603,4\n",
        "\nTotal parts,5\nUnique parts,3\n",
        "\nNotes:,fit R1 last\n,and C1\n",
        "\nSummary\nResistors,4\nCapacitors,1\n",
    ],
)
def test_totals_and_other_blocks_list_no_parts(tail):
    reading = parse("Ref,Value\nR1,10k\n" + tail)
    assert [row.refs for row in reading.rows] == [("R1",)]
    assert [note.kind for note in reading.notes] == ["skipped"]


def test_rows_behind_a_subtotal_are_parts():
    assert [refs for refs, _ in rows("Ref,Value\nR1,10k\nSubtotal,1\nC1,1u\n\nC2,1u\nTotal,3\n")] == [("R1",), ("C1",), ("C2",)]


@pytest.mark.parametrize(
    "text, absent",
    [
        ("DNP", True),
        ("Not fitted parts:", True),
        ("** DNP **", True),
        ("SMD parts", False),
        ("Parts", False),
        ("", False),
        ("DNP parts of the old board, for the record", False),
    ],
)
def test_captions(text, absent):
    assert says_absent(text) is absent


@pytest.mark.parametrize(
    "cells, other",
    [
        (["Package", "Count"], True),
        (["Qty", "Price", "Shop", "Value"], True),
        (["IN, OUT", "Pad", "Pad"], False),
        (["C1", "Value", "Class"], False),
        (["Qty"], False),
        (["Qty", "Price", "Shop", "Link"], False),
    ],
)
def test_headers_of_other_blocks(cells, other):
    assert about_other(cells) is other


# variants


COLUMNS = "Ref,Value,Variant A,Variant B\nR1,10k,1,0\nR2,1k,x,\nR3,1k,DNP,x\nR4,0R,,\n"
QUANTITIES = "Ref,Value,Qty (230 V),Qty (115 V)\nR1,10k,1,0\nR2,1k,,1\nR3,1k,1,1\n"
MARKS = "Ref;Wert;Export;Inland\nR1;10k;x;x\nR2;1k;x;\nR3;1k;;x\n"
ABSENT = "Ref,Value,DNP EU,DNP US\nR1,10k,x,\nR2,1k,,yes\nR3,1k,,\n"
FITTED = "Ref,Value,EU fitted,US fitted\nR1,10k,yes,no\nR2,1k,no,yes\nR3,1k,yes,\n"
BY_ROW = 'Ref,Value,Variant\nR1,10k,EU\nR1,22k,US\nR2,1k,"EU, US"\nR3,1k,US\nR4,1k,\nR5,1k,all\n'


@pytest.mark.parametrize(
    "text, variant, absent",
    [
        (COLUMNS, None, []),
        (COLUMNS, "A", ["R3"]),
        (COLUMNS, "B", ["R1"]),
        (QUANTITIES, "230 V", ["R2"]),
        (QUANTITIES, "115 V", ["R1"]),
        (MARKS, "Export", ["R3"]),
        (MARKS, "Inland", ["R2"]),
        (ABSENT, "EU", ["R1"]),
        (ABSENT, "US", ["R2"]),
        (FITTED, "EU", ["R2"]),
        (FITTED, "US", ["R1"]),
        (BY_ROW, None, []),
        (BY_ROW, "EU", ["R3"]),
        (BY_ROW, "US", []),
    ],
)
def test_a_variant_leaves_out_what_its_column_says(text, variant, absent):
    refs = [f"R{number}" for number in range(1, 6) if f"R{number}" in text]
    assert out(design(text, *refs, variant=variant)) == absent


@pytest.mark.parametrize("variant, value", [(None, "10k"), ("EU", "10k"), ("US", "22k")])
def test_a_row_of_a_variant_gives_the_value(variant, value):
    assert design(BY_ROW, "R1", "R2", "R3", "R4", "R5", variant=variant).parts["R1"].text("value") == value


def test_a_note_when_no_variant_is_chosen_and_none_when_one_is():
    made = design(QUANTITIES, "R1", "R2", "R3")
    assert made.variants == ("230 V", "115 V")
    (note,) = made.notes
    assert (note.kind, [source.line for source in note.sources]) == ("skipped", [2, 2])
    assert "230 V, 115 V" in note.text
    assert design(QUANTITIES, "R1", "R2", "R3", variant="115 V").notes == ()


def test_an_unknown_variant_is_refused_with_the_names():
    with pytest.raises(ArgumentError, match="the variants of this design are 230 V, 115 V"):
        design(QUANTITIES, "R1", "R2", "R3", variant="EU")


def test_a_part_that_no_variant_fits_is_left_out():
    assert out(design("Ref,Value,Qty EU,Qty US\nR1,1k,1,1\nR2,1k,0,DNP\n", "R1", "R2")) == ["R2"]


def test_a_declared_variant_goes_before_that_of_the_bom():
    declared = Declaration(variants={"115 V": Variant("115 V", fitted=("R1",), not_fitted=("R3",))})
    assert out(design(QUANTITIES, "R1", "R2", "R3", variant="115 V", declaration=declared)) == ["R3"]


def test_variants_and_references_written_in_another_case():
    assert out(design("Ref,Value,Qty EU,Qty US\nr1,1k,1,0\nr2,1k,1,1\n", "R1", "R2", variant="US")) == ["R1"]


def test_the_chosen_table_leaves_out_what_only_its_rival_lists():
    text = "Fixed\n\nRef,Value\nR1,1k\nR2,1k\n\nVariable\n\nRef,Value\nR1,2k\nR3,1k\n\nMechanics\n\nRef,Value\nH1,M3\n"
    made = design(text, "R1", "R2", "R3", "H1", variant="Fixed")
    assert (out(made), made.parts["R1"].text("value")) == (["R3"], "1k")
    made = design(text, "R1", "R2", "R3", "H1", variant="Variable")
    assert (out(made), made.parts["R1"].text("value")) == (["R2"], "2k")
    assert out(design(text, "R1", "R2", "R3", "H1")) == []


@pytest.mark.parametrize(
    "header, cells, found",
    [
        ("Ref,Value,Qty EU,Qty US", "1,0", ["EU", "US"]),
        ("Ref,Value,EU Qty,US Qty", "1,0", ["EU", "US"]),
        ("Ref,Value,Menge EU,Menge US", "1,0", ["EU", "US"]),
        ("Ref,Value,Qty,Qty EU", "1,0", []),  # one alone may be an order
        ("Ref,Value,Qty per panel,Qty ordered", "1,0", []),
        ("Ref,Value,Qty 100,Qty 1000", "100,1000", []),
        ("Ref,Value,Total qty,Stock qty", "1,0", []),
        ("Ref,Value,Variant EU,Price", "x,1.20", ["EU"]),
        ("Ref,Value,DNP_EU,Price", "x,1.20", ["EU"]),
        ("Ref,Value,Not fitted (EU),Price", "x,1.20", ["EU"]),
        ("Ref,Value,Fitted in EU,Price", "x,1.20", ["EU"]),
        ("Ref,Value,Mount Type,Assembly side", "SMD,top", []),
        ("Ref,Value,Load current,Load capacitance", "1,2", []),
        ("Ref,Value,RoHS,Lead free", "x,", []),
        ("Ref,Value,Remark,Customer", "x,", []),
    ],
)
def test_which_columns_are_variants(header, cells, found):
    names = header.split(",")
    known = [attribute(name) for name in names]
    sample = [["R1", "1k", *cells.split(",")], ["R2", "1k", *cells.split(",")]]
    assert [name for _, name, _ in bom_variants.columns(names, known, sample)] == found


# choices of part


ALTERNATES = {
    "MPN,Manufacturer": ("A1,Ma", [("A1", "Ma")]),
    "MPN 1,MPN 2,Manufacturer 2,Manufacturer 1": ("A1,B2,Mb,Ma", [("A1", "Ma"), ("B2", "Mb")]),
    "MPN 2,Manufacturer 2,MPN 1,Manufacturer 1": ("B2,Mb,A1,Ma", [("A1", "Ma"), ("B2", "Mb")]),
    "MPN,Manufacturer 2,MPN 2": ("A1,Mb,B2", [("A1", ""), ("B2", "Mb")]),
    "Manufacturer,MPN,MPN 2": ("Ma,A1,B2", [("A1", "Ma"), ("B2", "")]),
    "Alternate MPN,Alternate Manufacturer,MPN,Manufacturer": ("B2,Mb,A1,Ma", [("A1", "Ma"), ("B2", "Mb")]),
    "MPN,MPN (alternate)": ("A1,B2", [("A1", ""), ("B2", "")]),
    "MPN,Alternates": ("A1,B2345; C2345", [("A1", ""), ("B2345", ""), ("C2345", "")]),
    "Manufacturer,MPN,2nd source,2nd source MPN": ("Ma,A1,,B2", [("A1", "Ma"), ("B2", "")]),
    "MPN,Manufacturer,Ersatztyp": ("A1,Ma,", [("A1", "Ma")]),
    "MPN,MPN 1,MPN 2": ("A1,B2,C3", [("A1", ""), ("B2", ""), ("C3", "")]),
    "Manufacturer,MPN,Manufacturer,MPN": ("Ma,A1,Mb,A1", [("A1", "Ma")]),
    "Hersteller,Herstellernummer,Bestellnummer": ("Ma,A1,12-34", [("A1", "Ma")]),
}


def chosen(text):
    (row,) = parse(text).rows
    every = [row.facts, *row.alternates]
    named = [{fact.attribute: fact.value for fact in facts if fact.attribute in ("type", "maker")} for facts in every]
    return [(one.get("type", ""), one.get("maker", "")) for one in named]


@pytest.mark.parametrize("header", ALTERNATES)
def test_alternates(header):
    cells, expected = ALTERNATES[header]
    assert chosen(f"Ref,Value,{header}\nC1,1n,{cells}\n") == expected


@pytest.mark.parametrize(
    "cell, types",
    [
        ("ABC-101; DEF-202", ["ABC-101", "DEF-202"]),
        ('"ABC-101\nDEF-202"', ["ABC-101", "DEF-202"]),
        ("ABC-101 / DEF-202", ["ABC-101", "DEF-202"]),
        ("ABC-101 or DEF-202", ["ABC-101", "DEF-202"]),
        ("MKP-X2-47NR10/310", ["MKP-X2-47NR10/310"]),
        ('"BAS316,115"', ["BAS316,115"]),
        ("ABC-101 / 250V", ["ABC-101 / 250V"]),
        ("ABC-101 or equivalent", ["ABC-101 or equivalent"]),
    ],
)
def test_several_types_in_one_cell(cell, types):
    assert [name for name, _ in chosen(f"Ref,MPN\nC1,{cell}\n")] == types


@pytest.mark.parametrize(
    "text, expected",
    [
        ("490-10494-2-ND", True),
        ("399-6806-ND", True),
        ("81-GRM219R7YA105KA2J", True),
        ("667-EEE-FK1V470P", True),
        ("C14663", True),
        ("C1815", False),
        ("1-726388-2", False),
        ("61-1560-21/0030", False),
        ("19-217/GHC-YR1S2/3T", False),
        ("GRM219R7YA105KA12D", False),
        ("236-202", False),
        ("", False),
    ],
)
def test_order_numbers_of_distributors(text, expected):
    assert bom_choices.is_distributor_number(text) is expected


def test_an_order_number_is_no_choice_and_is_told():
    reading = parse(read(FIXTURES / "order-numbers.csv").data)
    assert [note.text.partition(":")[0] for note in reading.notes] == [
        "rows with a distributor's number where the maker's type belongs"
    ]
    made = candidates("Ref,Value,MPN,MPN,LCSC Part #\nC1,1n,187-CL10B104KO8NNNC,CL-105,C14663\n", C1="C")["C1"]
    assert [one.type for one in made] == ["CL-105"]


def test_an_alternate_is_a_candidate_of_its_own():
    first, second = candidates("Ref,Value,Class,MPN 1,MPN 2\nC1,1n,Y1,AB-1,CD-2\n", C1="C")["C1"]
    assert (first.type, [mark.name for mark in first.marks]) == ("AB-1", ["Y1"])
    assert (second.type, second.marks, second.label) == ("CD-2", (), "CD-2")
    assert float(second.value.value) == float(first.value.value) == 1e-9


# figures as people write them


@pytest.mark.parametrize(
    "heading, cell, name, value",
    [
        ("Voltage [V]", "250", "voltage", 250),
        ("Spannung V", "2,5", "voltage", 2.5),
        ("Voltage_V", "400", "voltage", 400),
        ("Isolation voltage kV", "5", "isolation_test", 5000),
        ("Isolationsspannung", "", None, None),
        ("Creepage", "2,5 mm", "creepage", 2.5),
        ("Clearance (mm)", "8,0", "clearance", 8),
        ("Surge current [A]", "60", "surge_current", 60),
        ("IFSM", "30 A", "surge_current", 30),
        ("Peak forward surge current", "30", "surge_current", 30),
        ("Breaking capacity", "1500 A", "breaking_capacity", 1500),
        ("Ausschaltvermögen (kA)", "1,5", "breaking_capacity", 1500),
        ("Tolerance %", "5", "tolerance", 5),
        ("Leistung W", "0,25", "power", 0.25),
    ],
)
def test_figures_of_ratings(heading, cell, name, value):
    (made,) = candidates(f"Ref;Value;{heading}\nX1;;{cell}\n".encode(), X1="D")["X1"]
    if name == "tolerance":
        assert float(made.tolerance.value) == value
    elif name:
        assert float(made.ratings[name].value) == pytest.approx(value)


@pytest.mark.parametrize(
    "heading, cell, symbol, value",
    [
        ("Wert", "4,7µ", "C", 4.7e-6),
        ("Value (uF)", "4.7", "C", 4.7e-6),
        ("Value [µF]", "4,7", "C", 4.7e-6),
        ("Kapazität nF", "4,7", "C", 4.7e-9),
        ("Capacitance (pF)", "100", "C", 1e-10),
        ("Widerstand", "4,7", "R", 4.7),
        ("Résistance (kΩ)", "4,7", "R", 4700),
        ("Value", "4k7", "R", 4700),
        ("Inductance µH", "10", "L", 1e-5),
    ],
)
def test_figures_of_values(heading, cell, symbol, value):
    (made,) = candidates(f"Ref;{heading}\nX1;{cell}\n".encode(), X1=symbol)["X1"]
    assert float(made.value.value) == pytest.approx(value)


def test_points_are_thousands_where_the_comma_is_the_decimal_sign():
    text = "Ref;Spannung;Kriechstrecke\nU1;5.000 V;8,5 mm\nU2;1.000;2,5\n"
    assert [facts["rating:voltage"] for _, facts in rows(text)] == ["5000 V", "1000"]
    assert [facts["rating:voltage"] for _, facts in rows("Ref;Voltage;Creepage\nU1;1.250;8.5 mm\nU2;5;2,5\n")] == ["1.250", "5"]


@pytest.mark.parametrize("heading", ["Class F", "Type A", "Part C", "Value F", "Rating V", "Customer V"])
def test_a_last_word_that_is_no_unit(heading):
    assert unit_in(heading) == ""


# fitted or not


@pytest.mark.parametrize(
    "heading, cell, expected",
    [
        ("DNP", "x", False),
        ("DNP?", "yes", False),
        ("DNP", "no", True),
        ("Fitted", "no", False),
        ("Fitted?", "yes", True),
        ("Populate", "0", False),
        ("Populate", "1", True),
        ("Mount", "NC", False),
        ("Mount", "SMD", True),
        ("Bestückung", "nicht bestückt", False),
        ("Bestückung", "n.b.", False),
        ("Bestückt", "ja", True),
        ("nicht bestückt", "x", False),
        ("Montiert", "nein", False),
        ("Value", "nicht bestückt", False),
        ("Value", "DNP 10k", False),
        ("Value", "NC", True),
        ("Remark", "do not populate", False),
        ("Qty", "0", False),
        ("Qty", "DNP", False),
        ("MPN", "DNP", False),
    ],
)
def test_polarities(heading, cell, expected):
    assert design(f"Ref,{heading},Description\nR1,{cell},text\n", "R1").parts["R1"].fitted is expected


@pytest.mark.parametrize("text", ["nicht bestückt", "Nicht bestueckt", "unbestückt", "entfällt", "non monté", "ne pas monter"])
def test_phrases_of_other_languages(text):
    assert not_fitted_phrase(text)
    assert fitted("Fitted", text) is False


@pytest.mark.parametrize(
    "text",
    [
        "Ref,Value,Fitted,DNP\nR1,1k,yes,yes\n",
        "Ref,Value,Fitted,DNP\nR1,1k,no,no\n",
        "Ref,Value,Fitted\nR1,DNP,yes\n",
        "Ref,Value,Qty,Fitted\nR1,1k,0,yes\n",
        "Ref,Value,Fitted\nR1,1k,yes\nR1,1k,no\n",
        "Ref,Value,Fitted\nR1 (DNP),1k,yes\n",
        "Ref,Value,Fitted\n\nDNP\nR1,1k,yes\n",
    ],
)
def test_contradictions_count_as_fitted_and_are_recorded(text):
    made = design(text, "R1")
    assert made.parts["R1"].fitted
    assert notes(made, "fitted-differs") == [("fitted-differs", "R1")]


# references and quantities


@pytest.mark.parametrize(
    "cell, refs",
    [
        ("R1-R4", "R1 R2 R3 R4"),
        ("R1..R4", "R1 R2 R3 R4"),
        ("C1 – C3", "C1 C2 C3"),
        ("R1-R3 (optional)", "R1 R2 R3"),
        ("R1, R2 only for 115 V", "R1 R2"),
        ("R1, R2 only with R3", "R1 R2"),
        ("R1 und R2", "R1 R2"),
        ("R1\nR2", "R1 R2"),
        ("r1, R 2", "R1 R2"),
        ("R1\u200b, R2 ", "R1 R2"),
        ("R1/R2", "R1 R2"),
        ("Ｒ1", "R1"),
        ("U1A, U1B", "U1"),
    ],
)
def test_references_reach_their_parts(cell, refs):
    made = design(f'Ref,Value\n"{cell}",seen\n', *(f"{letter}{number}" for letter in "RCU" for number in range(1, 5)))
    assert [ref for ref, part in made.parts.items() if part.text("value") == "seen"] == refs.split()
    assert not notes(made, "reference-unread", "not-in-netlist")


def test_remarks_are_told_and_are_no_faults():
    made = design('Ref,Value,Qty\n"R1-R3 (optional)",1k,3\n"R4, R5 only for 115 V",1k,3\n', "R1", "R2", "R3", "R4", "R5")
    assert notes(made) == [("skipped",), ("quantity-differs", "R4", "R5")]
    assert "line 2: (optional); line 3: only for 115 V" in made.notes[0].text


@pytest.mark.parametrize(
    "text, expected",
    [
        ("Ref,Value,Qty\n\"R1, R2\",1k,2\n", []),
        ("Ref,Value,Qty\n\"R1, R2\",1k,20\n", []),  # per order
        ("Ref,Value,Qty\n\"R1, R2\",1k,3\n", [("quantity-differs", "R1", "R2")]),
        ("Ref,Value,Qty\n\"R1, R2\",1k,1\n", [("quantity-differs", "R1", "R2")]),
        ("Ref,Value,Qty\n\"R1, R2\",1k,\"2,0\"\n", []),
        ("Ref,Value,Qty\n\"R1, R2, R1\",1k,3\n", [("quantity-differs", "R1"), ("quantity-differs", "R1", "R2")]),
        ("Ref,Value\nR1,1k\nR2,1k\nR1,2k\n", [("duplicate-row", "R1")]),
        ("Ref,Value\nR1,1k\nr1,1k\nR2,1k\n", [("case-differs", "R1")]),
        ("Ref,Value\nR1,1k\nR2,1k\nR9,1k\n", [("not-in-netlist", "R9")]),
        ("Ref,Value\nR1,1k\n", [("not-in-bom", "R2")]),
        ("Ref,Value\nR1,1k\nR2,1k\nR3-R1,1k\n", [("reference-unread",)]),
    ],
)  # fmt: skip
def test_what_is_recorded(text, expected):
    assert notes(design(text, "R1", "R2")) == expected


# encodings, delimiters and the seam


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "cp1252"])
@pytest.mark.parametrize("delimiter", [",", ";", "\t", "|"])
def test_encodings_and_delimiters(encoding, delimiter):
    buffer = io.StringIO()
    writer = csv.writer(buffer, delimiter=delimiter)
    writer.writerows([["Bauteil", "Wert", "Bestückung"], ["C1, C2", "4,7µ", "nicht bestückt\n(Muster)"], ["C3", "10µ", "ja"]])
    made = design(buffer.getvalue().encode(encoding), "C1", "C2", "C3")
    assert (made.parts["C2"].text("value"), out(made)) == ("4,7µ", ["C1", "C2"])


def test_any_carrier_feeds_rows_of_cells_with_their_place():
    records = [(3, ["Title"]), (4, []), (7, ["Ref", "Value", "Qty EU", "Qty US"]), (9, ["R1", "10k", "1", "0"])]
    found = bill("book.xlsx", records)
    assert [(row.refs, str(row.source)) for row in found.rows] == [(("R1",), "book.xlsx:9")]
    assert [(one.name, one.fitted, one.not_fitted) for one in found.variants] == [("EU", ("R1",), ()), ("US", (), ("R1",))]


# write, read, compare


REFS = st.lists(st.sampled_from([f"{letter}{number}" for letter in "RCDU" for number in range(1, 40)]), unique=True, max_size=24)
PLAIN = {
    "value": ["Value", "Wert", "Comment"],
    "rating:voltage": ["Voltage", "Rated voltage", "Spannung"],
    "rating:surge_current": ["IFSM", "Surge current"],
    "mark": ["Class", "Safety class"],
    "technology": ["Technology", "Dielectric"],
    "distributor": ["LCSC Part #", "Order number"],
}
WORDS = st.sampled_from(["10k", "4,7µ", "250 VAC", "Y1", "ceramic", "ab\ncd", 'say "x"', "a;b", "a,b", "x|y", "100 nF", "C14663"])
STATE = st.sampled_from([("Fitted", "yes", "no"), ("DNP", "no", "yes"), ("Populate", "1", "0"), ("Bestückung", "ja", "n.b.")])
TYPES = st.lists(st.sampled_from(["AB-101", "CD-202", "EF303", "1N4007", "BC-547B"]), max_size=3, unique=True)


@settings(max_examples=120, deadline=None)
@given(st.data(), REFS.filter(bool), STATE, st.sampled_from(",;\t|"), st.booleans())
def test_what_is_written_is_read(data, refs, state, delimiter, shuffled):
    heading, yes, no = state
    names = {meaning: data.draw(st.sampled_from(headings)) for meaning, headings in PLAIN.items()}
    columns = ["Reference", *names.values(), "MPN 1", "MPN 2", "MPN 3", heading, "Qty EU", "Qty US"]
    order = data.draw(st.permutations(range(len(columns)))) if shuffled else list(range(len(columns)))
    expected = []
    table = [columns]
    while refs:
        count = data.draw(st.integers(1, len(refs)))
        own, refs = refs[:count], refs[count:]
        words = {meaning: data.draw(WORDS) for meaning in names}
        types, is_fitted, eu = data.draw(TYPES), data.draw(st.booleans()), data.draw(st.booleans())
        cells = [", ".join(own), *words.values(), *[*types, "", "", ""][:3], yes if is_fitted else no]
        table.append([*cells, str(count) if eu else "", "" if eu else str(count)])
        expected.append((tuple(own), words, types, is_fitted, eu))
    buffer = io.StringIO()
    csv.writer(buffer, delimiter=delimiter).writerows([[row[at] for at in order] for row in table])
    reading = parse(buffer.getvalue())
    found = []
    for row in reading.rows:
        said = {fact.attribute: fact.value for fact in row.facts}
        types = [fact.value for facts in (row.facts, *row.alternates) for fact in facts if fact.attribute == "type"]
        eu = set(row.refs) <= set(next((one.fitted for one in reading.variants if one.name == "EU"), ()))
        found.append((row.refs, {meaning: said.get(meaning) for meaning in names}, types, said["fitted"], eu))
    assert found == expected


def test_damaged_copies_end_in_rows_or_a_message():
    dice = random.Random(11)
    samples = [path.read_bytes() for path in sorted(FIXTURES.iterdir()) if path.suffix != ".yaml"]
    samples += [text.encode() for text in (*SECTIONS.values(), COLUMNS, QUANTITIES, MARKS, ABSENT, FITTED, BY_ROW)]
    refused = 0
    for data in samples:
        for _ in range(40):
            damaged = bytearray(data[: dice.randrange(len(data) + 1)] if dice.random() < 0.4 else data)
            for _ in range(dice.randrange(6)):
                if damaged:
                    at = dice.randrange(len(damaged))
                    damaged[at : at + dice.randrange(3)] = bytes(
                        dice.choice(b'(),;"\n\t |-0AR\xff') for _ in range(dice.randrange(3))
                    )
            try:
                design(bytes(damaged), "R1", "R2", "C1", variant=None)
            except InputError as error:
                refused += 1
                assert str(error).startswith("bom.csv")
    assert refused > 20
