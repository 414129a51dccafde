"""The two netlist readers: what they make of well-formed files, checked against plain walks of the same bytes."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from lxml import etree

from checker.files import Blob
from checker.files import read as read_file
from checker.model.fact import NOWHERE, Source, Trust
from checker.model.reading import NOTE_KINDS, Node, Reading, SymbolPin
from checker.readers import sexpr_netlist, sniff, xml_netlist

FIXTURES = Path(__file__).resolve().parents[1] / "fixtures" / "readers"
SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"


def sexpr(text: str | bytes) -> Reading:
    return sexpr_netlist.read(Blob("a.net", text if isinstance(text, bytes) else text.encode()))


def xml(text: str | bytes) -> Reading:
    return xml_netlist.read(Blob("a.xml", text if isinstance(text, bytes) else text.encode()))


def supply() -> Reading:
    return sexpr_netlist.read(read_file(FIXTURES / "sexpr" / "supply.net", shown="supply.net"))


def bare() -> Reading:
    return sexpr_netlist.read(read_file(FIXTURES / "sexpr" / "bare-words.net", shown="bare-words.net"))


def board(comps: str = "(comp (ref R1) (value 1k))", nets: str = "", more: str = "") -> Reading:
    """A small netlist around what a test is about."""
    wired = "(net (code 900) (name Z) (node (ref R1) (pin 1)) (node (ref R1) (pin 2)))"
    return sexpr(f"(export (version E) (components {comps}) {more} (nets {wired} {nets}))")


def said(reading: Reading, ref: str = "R1") -> list[tuple[str, object]]:
    (part,) = [part for part in reading.parts if part.ref == ref]
    return [(fact.attribute, fact.value) for fact in part.facts]


def bald(reading: Reading) -> tuple[object, ...]:
    """Everything but paths and lines, to compare two writings of one circuit."""
    parts = [
        replace(part, source=NOWHERE, facts=tuple(sorted((replace(f, source=NOWHERE) for f in part.facts), key=repr)))
        for part in reading.parts
    ]
    nets = [replace(net, source=NOWHERE, nodes=tuple(replace(node, source=NOWHERE) for node in net.nodes)) for net in reading.nets]
    variants = [replace(variant, source=NOWHERE) for variant in reading.variants]
    notes = [(note.kind, note.text, note.parts, note.nets) for note in reading.notes]
    return parts, nets, variants, notes, reading.title


# --- words -----------------------------------------------------------------------------------------------------------

# Names that real netlists hold bare and that a Lisp reader would change (formats reference, 1.3 to 1.5).
BARE_WORDS = (
    *("[", "]", "[x]", "SO/SIO[1]", "'", "'x", "''", "5'6", "a'b'", ";", "a;b", "#;x", "#", "mfg#", "|a", "\\|", "{}", "%2F", ","),
    *("nil", "t", "T", "true", "01", "4.10", "1.1", "1.10", "1E3", "1_000", "+5", "+3.3", "+5E1", "+5E3", "inf", "nan", "-", "+"),
    *("573E1410", "5891E024", "9" * 1000, "C:\\libs\\", "\\", "a\\b", "E:\\new\\table", "http://x.y/?a=b,c;d", "P$1", "`", ",@x"),
    *(
        "Ne\u00a019.\u00a0dubna",
        "\u00a0",
        "\u3000x",
        "a\u2028b",
        "a\u0085b",
        "a\x1cb",
        "ΜМM",
        "~{RESET}",
        "~CS",
        "?",
        ".",
        "&",
        "<x>",
    ),
)


@pytest.mark.parametrize("word", BARE_WORDS)
def test_a_bare_word_is_kept_to_the_letter(word: str) -> None:
    reading = board(
        f"(comp (ref {word}) (value 1))", f"(net (code 1) (name x{word}) (node (ref {word}) (pin {word}) (pinfunction {word})))"
    )
    assert reading.parts[0].ref == word
    assert reading.nets[1].name == f"x{word}"
    assert [(node.ref, node.pin, node.name) for node in reading.nets[1].nodes] == [(word, word, word)]


@pytest.mark.parametrize("word", BARE_WORDS)
def test_bare_words_in_a_row_end_at_ascii_white_space_only(word: str) -> None:
    """A value of several words takes the path without the shortcut for `(keyword word)`."""
    assert ("value", f"{word} a {word} b".strip()) in [
        (name, str(value)) for name, value in said(board(f"(comp (ref R1) (value {word}\ta\r\n{word}\fb))"))
    ]


@pytest.mark.parametrize(
    ("written", "meant"),
    [
        (r'"a b"', "a b"),
        (r'"Net-(R1-Pad1)"', "Net-(R1-Pad1)"),
        (r'"a\"b"', 'a"b'),
        (r'"a\\b"', "a\\b"),
        (r'"a\\"', "a\\"),
        (r'"a\nb\rc\td"', "a\nb\rc\td"),
        (r'"\q\(\)"', "q()"),
        ('"line\nbreak"', "line\nbreak"),
        ('";not a comment"', ";not a comment"),
        ('"it\'s [x]"', "it's [x]"),
        ('"nil"', "nil"),
        ('"01"', "01"),
        ('" lead and trail "', " lead and trail "),
    ],
)
def test_a_quoted_name_is_unescaped(written: str, meant: str) -> None:
    reading = board(nets=f"(net (code 1) (name {written}) (node (ref {written}) (pin {written})))")
    net = reading.nets[1]
    assert (net.name, net.nodes[0].ref, net.nodes[0].pin) == (meant, meant, meant)


def test_names_that_are_equal_as_numbers_stay_apart() -> None:
    reading = bare()
    assert [net.name for net in reading.nets] == ["+5E3", "+5000", "", "", "", "+5E3"]
    assert [node.pin for net in reading.nets for node in net.nodes] == ["1", "1.1", "01", "1.10", "A", "P$1", "-", "nil", "'"]


def test_unquoted_brackets_backslashes_and_no_break_spaces_do_not_break_the_file() -> None:
    reading = bare()
    assert reading.parts[0].pins == (SymbolPin("1", "SO/SIO[1]", "BiDi"), SymbolPin("01", "~CS", "input"))
    assert reading.title == "Old board"
    assert [part.ref for part in reading.parts] == ["U1", "USB-UART1", "+"]


SMALL = (
    "(export (components (comp (ref R1) (value 4\u00b5))) (nets (net (name A) (node (ref R1) (pin 1)) (node (ref R1) (pin 2)))))"
)


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-8"])
def test_encodings_that_hold_every_character(encoding: str) -> None:
    assert ("value", "4\u00b5") in said(sexpr(SMALL.encode(encoding)))


def test_a_file_that_is_not_utf8_is_read_with_a_note() -> None:
    reading = sexpr(SMALL.encode("cp1252"))
    assert ("value", "4\u00b5") in said(reading)
    assert [note.kind for note in reading.notes] == ["encoding", "no-symbol"]


# --- facts -----------------------------------------------------------------------------------------------------------


def test_every_part_net_and_node_knows_its_line() -> None:
    """Source: the fixture searched for the opening words, line by line."""
    lines = (FIXTURES / "sexpr" / "supply.net").read_text().splitlines()
    opened = {word: [n for n, line in enumerate(lines, 1) if line.strip() == f"({word}"] for word in ("comp", "net", "node")}
    reading = supply()
    assert [part.source.line for part in reading.parts] == opened["comp"]
    assert [net.source.line for net in reading.nets] == opened["net"]
    nodes = [line for line in opened["node"] if line != 276]  # the repeated pin of PGND
    assert [node.source.line for net in reading.nets for node in net.nodes] == nodes
    assert {part.source.path for part in reading.parts} == {"supply.net"}


def test_facts_of_a_part_in_file_order_each_once() -> None:
    assert said(supply(), "C7") == [
        ("value", "2n2"),
        ("footprint", "Capacitors:Radial_P7.5"),
        ("description", "Y capacitor"),
        ("type", "YCAP-222"),
        ("rating:voltage", "250 V"),
        ("mark", "Y1"),
        ("field:Assembly hint", 'red "dot" up'),
        ("library", "Parts"),
        ("symbol", "C_Disc"),
        ("mark", "Y2"),
        ("sheet", "/"),
    ]


def test_facts_say_where_they_stand_and_how_far_they_are_trusted() -> None:
    lines = (FIXTURES / "sexpr" / "supply.net").read_text().splitlines()
    for fact in supply().parts[0].facts:
        assert fact.trust is Trust.NETLIST
        words = fact.text or str(fact.value)
        place = " ".join(lines[fact.source.line - 1 : fact.source.line + 2])  # a field's value stands a line below its form
        assert words.replace('"', '\\"') in place


def test_a_description_is_taken_from_the_nearest_place_that_has_one() -> None:
    comp = "(comp (ref R1) {} (libsource (lib L) (part P) {}) {})"
    symbol = '(libparts (libpart (lib L) (part P) (description "of the symbol") (pins)))'
    own, use, key = '(description "own")', '(description "of the use")', '(property (name "ki_description") (value "key"))'
    for written, meant in (
        ((own, use, key), "own"),
        (("", use, key), "of the use"),
        (("", "", key), "key"),
        (("", "", ""), "of the symbol"),
    ):
        reading = board(comp.format(*written), more=symbol)
        assert [value for name, value in said(reading) if name == "description"] == [meant]


def test_no_path_of_a_machine_is_kept() -> None:
    for reading in (supply(), bare()):
        kept = repr(reading)
        assert "somewhere" not in kept
        assert "boards" not in kept
        assert ".sch" not in kept


@pytest.mark.parametrize("text", ['""', '"~"', "~", "-", '"  "', ""])
def test_empty_texts_are_no_facts(text: str) -> None:
    fields = f"(datasheet {text}) (fields (field (name MPN) {text})) (property (name Power) (value {text}))"
    reading = board(f"(comp (ref R1) (value {text}) {fields})")
    assert said(reading) == []


@pytest.mark.parametrize(
    ("children", "meant"),
    [
        ("(property (name dnp))", [("fitted", False)]),
        ("(property (name dnp) (value 1))", [("fitted", False)]),
        ("(property (name dnp) (value no))", [("fitted", True)]),
        ("(property (name DNP) (value ~))", []),
        ("(property (name exclude_from_bom))", [("in_bom", False)]),
        ("(property (name exclude_from_bom) (value 0))", []),
        ("(property (name exclude_from_board)) (property (name exclude_from_sim))", []),
        ("(fields (field (name Fit) no))", [("fitted", False)]),
        ("(fields (field (name Fit) yes))", [("fitted", True)]),
        ("(fields (field (name DNP) x))", [("fitted", False)]),
        ("(fields (field (name Fit) purple))", [("field:Fit", "purple")]),
        ("(fields (field (name DONOTPLACE) true))", [("fitted", False)]),
        ('(value "DNP 100n")', [("value", "DNP 100n"), ("fitted", False)]),
        ("(value NP0)", [("value", "NP0")]),
    ],
)
def test_what_says_that_a_part_is_left_out(children: str, meant: list[tuple[str, object]]) -> None:
    assert said(board(f"(comp (ref R1) {children})")) == meant


def test_field_names_become_attributes() -> None:
    fields = {
        "Manufacturer": "maker",
        "mpn": "type",
        "Working voltage": "rating:voltage",
        "CapRatedVoltage": "rating:voltage",
        "Power": "rating:power",
        "Tolerance": "tolerance",
        "Dielectric": "technology",
        "Creepage": "rating:creepage",
        "Clearance": "rating:clearance",
        "Isolation voltage": "rating:isolation_test",
        "Turns": "turns",
        "Windings": "windings",
        "Class": "mark",
        "Lieferant X": "field:Lieferant X",
        "Quantity": "field:Quantity",
    }
    written = " ".join(f'(field (name "{name}") "text {k}")' for k, name in enumerate(fields))
    reading = board(f"(comp (ref R1) (fields {written}))")
    assert said(reading) == [(attribute, f"text {k}") for k, attribute in enumerate(fields.values())]


def test_weak_field_names_give_way_to_plain_ones() -> None:
    reading = board(
        "(comp (ref R1) (value 1k) (fields (field (name Comment) soft) (field (name MPN2) B-2) (field (name MPN) A-1)))"
    )
    assert said(reading) == [("value", "1k"), ("type", "A-1"), ("description", "soft"), ("field:MPN2", "B-2")]
    assert ("type", "B-2") in said(board("(comp (ref R1) (fields (field (name MPN2) B-2)))"))


def test_order_of_children_does_not_matter() -> None:
    reading = board("(comp (value 1k) (ref R1))", "(net (node (pintype passive) (pin 7) (ref R1)) (name N) (code 4))")
    assert reading.parts[0].ref == "R1"
    assert (reading.nets[1].name, reading.nets[1].nodes[0].pin, reading.nets[1].nodes[0].type) == ("N", "7", "passive")


# --- symbols, units, variants ----------------------------------------------------------------------------------------


def test_pins_come_from_the_symbol_or_the_one_it_is_an_alias_of() -> None:
    two = (SymbolPin("1", "", "passive"), SymbolPin("2", "", "passive"))
    parts = {part.ref: part for part in supply().parts}
    assert parts["C7"].pins == two  # an alias
    assert parts["C8"].pins == two
    assert parts["U1"].pins == (
        SymbolPin("1", "~{OUT}", "output"),
        SymbolPin("2", "-", "input"),
        SymbolPin("1.10", "NC", "no_connect"),
    )


def test_an_alias_counts_only_in_its_own_library() -> None:
    libparts = "(libparts (libpart (lib A) (part P) (aliases (alias Q)) (pins (pin (num 1)))))"
    reading = board("(comp (ref R1) (libsource (lib B) (part Q))) (comp (ref R2) (libsource (lib A) (part Q)))", more=libparts)
    assert [len(part.pins) for part in reading.parts] == [0, 1]
    (note,) = reading.notes
    assert (note.kind, note.parts) == ("no-symbol", ("R1",))


def test_missing_symbols_are_noted_once_with_a_count_and_five_names() -> None:
    reading = board(" ".join(f"(comp (ref R{n}))" for n in range(1, 9)))
    (note,) = reading.notes
    assert note.kind == "no-symbol"
    assert note.text.startswith("8 parts ")
    assert note.parts == ("R1", "R2", "R3", "R4", "R5")


def test_units_of_a_part() -> None:
    assert {part.ref: part.units for part in supply().parts if part.units} == {"U1": (("A", ("1", "2")), ("B", ("1.10",)))}


def test_variants_relative_to_the_base() -> None:
    found = [(variant.name, variant.fitted, variant.not_fitted) for variant in supply().variants]
    assert found == [("eu", ("R1",), ()), ("us", (), ("U1",)), ("bare", (), ())]
    (note,) = supply().notes
    assert (note.kind, note.parts) == ("skipped", ("R1",))  # the other value of R1 in `us`


def test_variants_that_list_their_parts() -> None:
    reading = board(more="(variants (variant (name v) (fitted (ref R1) (ref R2)) (not_fitted R3 R4) (dnp (ref R5))))")
    (variant,) = reading.variants
    assert (variant.fitted, variant.not_fitted) == (("R1", "R2"), ("R3", "R4", "R5"))


# --- nets ------------------------------------------------------------------------------------------------------------


def test_every_net_element_is_kept_and_nameless_ones_have_labels_of_their_own() -> None:
    nets = '(net (code 1) (name "")) (net (code 1) (name "")) (net (name ~)) (net (code 7)) (net (code 8) (name "<unnamed:7>"))'
    reading = board(nets=nets + "(net (code 5) (name A)) (net (code 6) (name A))")
    assert [net.name for net in reading.nets] == ["Z", "", "", "", "", "<unnamed:7>", "A", "A"]
    labels = [net.label for net in reading.nets]
    assert labels[:2] == ["Z", "<unnamed:1>"]
    assert labels[5:] == ["<unnamed:7>", "A", "A"]
    assert len(set(labels)) == 7  # only the two nets that share the name A share a label


def test_a_pin_twice_in_one_net_is_one_node_and_unknown_parts_keep_theirs() -> None:
    reading = board(nets="(net (code 1) (name N) (node (ref J9) (pin 1)) (node (ref J9) (pin 1)) (node (ref J9) (pin 01)))")
    assert [(node.ref, node.pin) for node in reading.nets[1].nodes] == [("J9", "1"), ("J9", "01")]


@pytest.mark.parametrize(
    ("written", "meant"),
    [
        ("passive", "passive"),
        ("passive+no_connect", "no_connect"),
        ("no_connect+passive", "no_connect"),
        ("input+other", "input"),
        ("~", ""),
        ("", ""),
    ],
)
def test_pin_types(written: str, meant: str) -> None:
    reading = board(nets=f"(net (code 1) (name N) (node (ref R1) (pin 1) (pintype {written}) (pinfunction ~)))")
    assert reading.nets[1].nodes == (Node("R1", "1", "", meant, Source("a.net", 1)),)


def test_net_classes() -> None:
    assert [net.classes for net in supply().nets] == [("Power", "Default"), ("Default",), ("Default",)]


def test_one_net_element_per_wire_still_connects() -> None:
    reading = sexpr_netlist.read(read_file(FIXTURES / "sexpr" / "generated.net"))
    assert [net.name for net in reading.nets] == ["GND", "GND", "OUT"]
    assert ("type", "C17724") in said(reading)


def test_unknown_sections_and_items_are_counted_in_one_note() -> None:
    reading = board(more="(new_things (a) (b)) (libparts (odd)) (groups (group (name g))) (libraries (library (logical L)))")
    (note,) = [note for note in reading.notes if note.kind == "skipped"]
    assert note.text.startswith("2 sections or items")
    assert "new_things" in note.text
    assert "odd" in note.text


# --- both writings ---------------------------------------------------------------------------------------------------


def test_both_writings_of_the_fixture_read_alike() -> None:
    other = xml_netlist.read(read_file(FIXTURES / "xml" / "supply.xml"))
    assert bald(supply()) == bald(other)
    assert (supply().form, other.form) == ("S-expression netlist", "XML netlist")


ODD = "aZ09 \"\\'[](){}<>;#&|,.~+-_/%$µΩМ猫é\u00a0\u3000\u2028\n\t"
words = st.text(st.sampled_from(ODD), min_size=1, max_size=12).filter(lambda word: word.strip() not in ("", "~", "-"))


def quoted(text: str) -> str:
    for plain, escaped in (("\\", "\\\\"), ('"', '\\"'), ("\n", "\\n"), ("\t", "\\t")):
        text = text.replace(plain, escaped)
    return f'"{text}"'


@settings(max_examples=120, deadline=None)
@given(
    parts=st.lists(st.tuples(words, words, words, words, st.booleans()), min_size=1, max_size=5),
    nets=st.lists(st.tuples(words, st.lists(st.tuples(words, words, words), min_size=2, max_size=4)), min_size=1, max_size=4),
)
def test_both_writings_of_any_circuit_read_alike(
    parts: list[tuple[str, ...]], nets: list[tuple[str, list[tuple[str, str, str]]]]
) -> None:
    """Source: lxml writes the one file, a plain quoting function the other."""
    root = etree.Element("export", version="E")
    components, libparts, wires = (etree.SubElement(root, name) for name in ("components", "libparts", "nets"))
    comps, symbols, lines = [], [], []
    for ref, value, field, pin, absent in parts:
        comp = etree.SubElement(components, "comp", ref=ref)
        etree.SubElement(comp, "value").text = value
        fields = etree.SubElement(comp, "fields")
        etree.SubElement(fields, "field", name=field).text = value
        etree.SubElement(comp, "libsource", lib="L", part=value)
        if absent:
            etree.SubElement(comp, "property", name="dnp")
        libpart = etree.SubElement(libparts, "libpart", lib="L", part=value)
        etree.SubElement(etree.SubElement(libpart, "pins"), "pin", num=pin, name=field, type="passive")
        r, v, f, p = (quoted(text) for text in (ref, value, field, pin))
        comps.append(
            f"(comp (ref {r}) (value {v}) (fields (field (name {f}) {v})) (libsource (lib L) (part {v}))"
            + (' (property (name "dnp")))' if absent else ")")
        )
        symbols.append(f"(libpart (lib L) (part {v}) (pins (pin (num {p}) (name {f}) (type passive))))")
    for code, (name, nodes) in enumerate(nets):
        net = etree.SubElement(wires, "net", code=str(code), name=name)
        written = []
        for k, (ref, pin, function) in enumerate(nodes):
            etree.SubElement(net, "node", ref=ref, pin=f"{k}{pin}", pinfunction=function)
            written.append(f"(node (ref {quoted(ref)}) (pin {quoted(f'{k}{pin}')}) (pinfunction {quoted(function)}))")
        lines.append(f"(net (code {code}) (name {quoted(name)}) {' '.join(written)})")
    text = f"(export (version E) (components {' '.join(comps)}) (libparts {' '.join(symbols)}) (nets {' '.join(lines)}))"
    one, two = sexpr(text), xml(etree.tostring(root, encoding="UTF-8", xml_declaration=True))
    assert bald(one) == bald(two)
    assert [part.ref for part in one.parts] == [part[0] for part in parts]
    assert [(net.name, [(n.ref, n.name) for n in net.nodes]) for net in one.nets] == [
        (name, [(ref, function) for ref, _, function in nodes]) for name, nodes in nets
    ]


@pytest.mark.parametrize(
    "head",
    [
        '<?xml version="1.0" encoding="UTF-8"?>',
        '<?xml version="1.0"?><!-- a > b --><?pi x?>',
        '<?xml version="1.0" encoding="ISO-8859-1"?>',
        '<?xml version="1.0" encoding="UTF-16"?>',
        "\n  ",
    ],
)
def test_xml_declarations_and_encodings(head: str) -> None:
    nodes = '<node ref="Rµ" pin="1"/><node ref="Rµ" pin="2"/>'
    comp = '<comp ref="Rµ"><value> 1\nk </value></comp>'
    body = f'<export><components>{comp}</components><nets><net name="A">{nodes}</net></nets></export>'
    codec = "latin-1" if "8859" in head else "utf-16" if "UTF-16" in head else "utf-8"
    reading = xml((head + body).encode(codec))
    assert said(reading, "Rµ") == [("value", "1\nk")]


def test_lines_of_an_xml_netlist() -> None:
    """Source: the fixture searched line by line."""
    lines = (FIXTURES / "xml" / "supply.xml").read_text().splitlines()
    reading = xml_netlist.read(read_file(FIXTURES / "xml" / "supply.xml"))
    for word, found in (("comp", [part.source.line for part in reading.parts]), ("net", [net.source.line for net in reading.nets])):
        assert found == [n for n, line in enumerate(lines, 1) if line.strip().startswith(f"<{word} ")]
    assert [lines[node.source.line - 1].split('"')[1] for net in reading.nets for node in net.nodes] == [
        node.ref for net in reading.nets for node in net.nodes
    ]


# --- real files ------------------------------------------------------------------------------------------------------

ATOM = r'("(?:[^"\\]|\\.)*"|[^ \t\r\n\f\v()"]+)'


def plain(atom: str) -> str:
    return re.sub(r"\\(.)", r"\1", atom[1:-1]) if atom.startswith('"') else atom


def section(text: str, name: str) -> str:
    """From the opening of a section to the opening of the next; sections stand in the first two columns or after a TAB."""
    found = re.search(rf"^(?:  |\t)\({name}\b.*?(?=^(?:  |\t)\(|\Z)", text, re.S | re.M)
    return found[0] if found else ""


def samples(reader: object) -> list[Path]:
    if not SAMPLES.is_dir():
        return []
    files = (path for path in sorted(SAMPLES.rglob("*")) if path.is_file())
    return [path for path in files if reader.READER.claims(sniff.head(read_file(path)))]  # type: ignore[attr-defined]


needs_samples = pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample files are not beside the project")


@needs_samples
def test_enough_samples_are_claimed() -> None:
    assert len(samples(sexpr_netlist)) >= 10
    assert len(samples(xml_netlist)) >= 3


@pytest.mark.parametrize("path", samples(sexpr_netlist), ids=lambda path: f"{path.parent.name}-{path.name}")
def test_a_real_s_expression_netlist_equals_a_plain_regex_walk(path: Path) -> None:
    text = path.read_text(encoding="utf-8").replace("\r\n", "\n")
    reading = sexpr_netlist.read(read_file(path))
    refs = [plain(atom) for atom in re.findall(rf"\(comp\s+\(ref\s+{ATOM}\)", section(text, "components"))]
    assert refs
    assert [part.ref for part in reading.parts] == refs
    nets = []
    for chunk in re.split(r"\(net\s+(?=\(code)", section(text, "nets"))[1:]:
        name = re.search(rf"\(name\s+{ATOM}\)", chunk)
        nodes = re.findall(rf"\(node\s+\(ref\s+{ATOM}\)\s+\(pin\s+{ATOM}\)", chunk)
        nets.append((plain(name[1]) if name else "", list(dict.fromkeys((plain(ref), plain(pin)) for ref, pin in nodes))))
    assert [(net.name, [(node.ref, node.pin) for node in net.nodes]) for net in reading.nets] == nets
    symbols: dict[tuple[str, str], set[str]] = {}
    for chunk in re.split(r"\(libpart\s+", section(text, "libparts"))[1:]:
        lib, part = re.match(rf"\(lib\s+{ATOM}\)\s+\(part\s+{ATOM}\)", chunk).groups()  # type: ignore[union-attr]
        pins = {plain(pin) for pin in re.findall(rf"\(pin\s+\(num\s+{ATOM}\)", chunk)}
        for name in (part, *re.findall(rf"\(alias\s+{ATOM}\)", chunk)):
            symbols.setdefault((plain(lib), plain(name)), pins)
    sources = re.findall(rf"\(libsource\s+\(lib\s+{ATOM}\)\s+\(part\s+{ATOM}\)", section(text, "components"))
    assert [{pin.number for pin in part.pins} for part in reading.parts] == [
        symbols.get((plain(lib), plain(part)), set()) for lib, part in sources
    ]


@pytest.mark.parametrize("path", samples(xml_netlist), ids=lambda path: f"{path.parent.name}-{path.name}")
def test_a_real_xml_netlist_equals_a_plain_lxml_walk(path: Path) -> None:
    tree = etree.parse(str(path))
    reading = xml_netlist.read(read_file(path))
    comps = tree.findall("components/comp")
    assert comps
    assert [(part.ref, part.source.line) for part in reading.parts] == [(comp.get("ref"), comp.sourceline) for comp in comps]
    assert [(net.name, [(n.ref, n.pin) for n in net.nodes]) for net in reading.nets] == [
        (net.get("name"), list(dict.fromkeys((node.get("ref"), node.get("pin")) for node in net)))
        for net in tree.findall("nets/net")
    ]
    symbols: dict[tuple[str, str], set[str]] = {}
    for lib in tree.iter("libpart"):
        for name in (lib.get("part"), *(alias.text for alias in lib.iter("alias"))):
            symbols.setdefault((lib.get("lib"), name), {pin.get("num") for pin in lib.iter("pin")})
    for part, comp in zip(reading.parts, comps, strict=True):
        source = comp.find("libsource")
        assert {pin.number for pin in part.pins} == symbols[source.get("lib"), source.get("part")]
        value = comp.findtext("value")
        assert ("value" in {fact.attribute for fact in part.facts}) == (value not in ("~", None))
        assert value == "~" or part.facts[0].value == value.strip()


@pytest.mark.parametrize(
    "path", [*samples(sexpr_netlist), *samples(xml_netlist)], ids=lambda path: f"{path.parent.name}-{path.name}"
)
def test_notes_of_real_files_are_of_known_kinds(path: Path) -> None:
    reader = sexpr_netlist if path in samples(sexpr_netlist) else xml_netlist
    reading = reader.read(read_file(path))
    assert {note.kind for note in reading.notes} <= set(NOTE_KINDS)
    assert reading.role == "netlist"
    assert re.fullmatch(r"[0-9a-f]{64}", reading.sha256)
