"""The netlist readers and damaged or hostile files: the answer is a Reading or an InputError a user can act on."""

from __future__ import annotations

import random
import tracemalloc
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.files import read as read_file
from checker.model.reading import Reading
from checker.readers import sexpr_netlist, sniff, xml_netlist

FIXTURES = Path(__file__).resolve().parents[1] / "fixtures" / "readers"
SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"

COMPS = "(components (comp (ref R1)) (comp (ref R2)))"
NETS = "(nets (net (code 1) (name A) (node (ref R1) (pin 1)) (node (ref R2) (pin 1))))"
XCOMPS = '<components><comp ref="R1"/><comp ref="R2"/></components>'
XNETS = '<nets><net code="1" name="A"><node ref="R1" pin="1"/><node ref="R2" pin="1"/></net></nets>'


def sexpr(text: str | bytes) -> Reading:
    return sexpr_netlist.read(Blob("a.net", text if isinstance(text, bytes) else text.encode()))


def xml(text: str | bytes) -> Reading:
    return xml_netlist.read(Blob("a.xml", text if isinstance(text, bytes) else text.encode()))


def refused(read: Callable[[str | bytes], Reading], text: str | bytes, *words: str, line: int | None = None) -> InputError:
    with pytest.raises(InputError) as caught:
        read(text)
    for word in words:
        assert word in str(caught.value)
    if line is not None:
        assert caught.value.line == line
    assert "\n" not in str(caught.value)
    return caught.value


def test_the_plain_files_around_which_the_others_are_built_read() -> None:
    assert len(sexpr(f"(export {COMPS} {NETS})").parts) == 2
    assert len(xml(f"<export>{XCOMPS}{XNETS}</export>").parts) == 2


# --- the content -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "the file is empty"),
        (" \n\t", "the file is empty"),
        ("(edif x (edifVersion 2 0 0))", "found an EDIF 2 0 0 file"),
        ("(exporter (components))", "keyword exporter"),
        ("# Anything Netlist Version 1.1 created\n(", "found a legacy parenthesised netlist"),
        ("( { x }\n", "found a legacy parenthesised netlist"),
        ("(export", "ends inside the form `export`"),
        ("(export)", "no section `components`"),
        (f"(export {COMPS})", "no section `nets`"),
        (f"(export {NETS})", "no section `components`"),
        (f"(export (components) {NETS})", "holds no parts"),
        (f"(export {COMPS} (nets))", "holds no nets"),
        (f"(export {COMPS} (nets (net (code 1) (name A)) (net (code 2) (name B) (node (ref R1) (pin 1)))))", "connects nothing"),
        (f'(export {COMPS} (nets (net (name "") (node (ref R1) (pin 1))) (net (name "") (node (ref R2) (pin 1)))))', "nothing"),
        (f"(export {COMPS} (nets (net (name A) (node (ref R1) (pin 1))) (net (name A) (node (ref R1) (pin 1)))))", "nothing"),
        (f"(export (other {COMPS}) (other {NETS}))", "no section `components`"),
        (f"(export (components (nets {COMPS} {NETS})))", "no section `nets`"),
        (f"(export (components (comp (value 1k))) {NETS})", "a part has no reference"),
        (f'(export (components (comp (ref ""))) {NETS})', "a part has no reference"),
        (f"(export (components (comp)) {NETS})", "a part has no reference"),
        (f"(export {COMPS} (nets (net (name A) (node (ref R1)))))", "has no pin number"),
        (f"(export {COMPS} (nets (net (name A) (node (pin 1)))))", "has no part reference"),
        (f"(export {COMPS} (nets (net (name A) (node))))", "has no part reference"),
        (f"(export {COMPS} (nets (net (name Net-(R1-Pad1)) (node (ref R1) (pin 1)))))", "the name of a net is more than one word"),
        (f"(export {COMPS} (nets (net (name A B) (node (ref R1) (pin 1)))))", "found A B"),
        (f"(export {COMPS} (nets (net (name A) (name B) (node (ref R1) (pin 1)))))", "the name of a net is given twice"),
        (f"(export (components (comp (ref R1) (ref R2))) {NETS})", "the reference of a part is given twice"),
    ],
)
def test_s_expression_files_without_a_usable_netlist(text: str, words: str) -> None:
    refused(sexpr, text, words)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "the file is empty"),
        ("<svg></svg>", "found an XML file of another kind (root element svg)"),
        ("<IPC-2581></IPC-2581>", "found an IPC-2581 file"),
        (f'<export xmlns="urn:x">{XCOMPS}{XNETS}</export>', "the root element is not export"),
        ("<export/>", "no section `components`"),
        (f"<export>{XCOMPS}</export>", "no section `nets`"),
        (f"<export><components/>{XNETS}</export>", "holds no parts"),
        (f"<export>{XCOMPS}<nets/></export>", "holds no nets"),
        (f'<export>{XCOMPS}<nets><net name="A"><node ref="R1" pin="1"/></net></nets></export>', "connects nothing"),
        (f"<export><components><comp/></components>{XNETS}</export>", "a part has no reference"),
        (f'<export>{XCOMPS}<nets><net name="A"><node ref="R1"/></net></nets></export>', "has no pin number"),
        (f'<export><components><comp ref="R1"><ref>R2</ref></comp></components>{XNETS}</export>', "given twice"),
    ],
)
def test_xml_files_without_a_usable_netlist(text: str, words: str) -> None:
    refused(xml, text, words)


# --- the form --------------------------------------------------------------------------------------------------------


def test_a_cut_file_names_the_line_of_the_form_that_is_left_open() -> None:
    refused(sexpr, "(export\n (components\n  (comp (ref R1)\n   (value 1k)\n", "ends inside the form `comp`", line=3)
    refused(sexpr, "(export\n (components\n  (comp (ref R1))\n", "ends inside the form `components`", line=2)
    refused(sexpr, "(export\n (components\n  (comp (ref\n\n", "ends inside the form `ref`", line=3)
    refused(sexpr, f"(export\n {COMPS}\n {NETS}\n", "ends inside the form `export`", line=1)
    refused(sexpr, '(export\n (components\n  (comp (ref "R1)))\n', "in double quotes is not closed", line=3)
    refused(sexpr, '(export\n (components\n  (comp (ref "R1\\"', "in double quotes is not closed", line=3)


@pytest.mark.parametrize("rest", [")", "(export)", "word", '"text"', "'", "')", "(", "[", ";"])
def test_text_after_the_end(rest: str) -> None:
    refused(sexpr, f"(export {COMPS} {NETS})\n\n{rest}", line=3)


@pytest.mark.parametrize(
    ("text", "line"),
    [
        (f"<export>\n{XCOMPS}\n<nets>", 3),
        (f"<export>\n{XCOMPS}</export>\n<export/>", 3),
        (f"<export>\n{XCOMPS}\n</exporter>", 3),
        (f'<export>\n<components>\n<comp ref="R1" ref="R1"/></components>{XNETS}</export>', 3),
        (f"<export>\n&#1;{XCOMPS}{XNETS}</export>", 2),
        (f"<export>\n\0{XCOMPS}{XNETS}</export>", 2),
    ],
)
def test_xml_that_is_not_well_formed(text: str, line: int) -> None:
    refused(xml, text, "the XML is damaged", line=line)


def test_white_space_before_the_xml_declaration_is_named() -> None:
    refused(xml, f'\n<?xml version="1.0"?><export>{XCOMPS}{XNETS}</export>', "white space stands before the XML declaration")


LINK = "&a{};"
LOL = "".join(f'<!ENTITY a{k} "{10 * LINK.format(k - 1)}">' for k in range(1, 12))


@pytest.mark.parametrize(
    "declared",
    [
        "<!DOCTYPE export>",
        '<!DOCTYPE export SYSTEM "file:///etc/passwd">',
        '<!DOCTYPE export [<!ENTITY x "R1">]>',
        '<!DOCTYPE export [<!ENTITY x SYSTEM "file:///etc/passwd">]>',
        f'<!DOCTYPE export [<!ENTITY a0 "lol">{LOL}]>',
        '<!DOCTYPE export [<!ENTITY % p SYSTEM "http://localhost/x"> %p;]>',
        "<!-- <export> --><!DOCTYPE export [<!ELEMENT export ANY>]>",
    ],
)
def test_any_document_type_is_refused(declared: str) -> None:
    text = f'<?xml version="1.0"?>\n{declared}\n<export>{XCOMPS}{XNETS}</export>'
    refused(xml, text, "document type declaration")
    refused(xml, text.replace('ref="R1"/>', 'ref="R1"><value>&x;&a11;</value></comp>'), "document type declaration")


def test_an_entity_nobody_declared_is_an_error_and_not_missing_text() -> None:
    refused(xml, f'<export><components><comp ref="R1"><value>1&x;k</value></comp></components>{XNETS}</export>')


@pytest.mark.parametrize("encoding", ["UTF-7", "utf7", "KOI8-R", "UTF-32", "EBCDIC-CP-US", "Shift_JIS"])
def test_encodings_in_which_a_tag_can_hide_are_refused(encoding: str) -> None:
    refused(xml, f"<?xml version='1.0' encoding='{encoding}'?><export>{XCOMPS}{XNETS}</export>", "encoding", encoding)


# --- the limits ------------------------------------------------------------------------------------------------------


def peak(read: Callable[[str | bytes], Reading], data: bytes) -> int:
    """Bytes allocated at the worst moment of a refusal."""
    tracemalloc.start()
    try:
        with pytest.raises(InputError):
            read(data)
        return tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()


@pytest.mark.parametrize("start", ["", "(export ", "(export (components (comp "])
def test_20_megabytes_of_parentheses_cost_no_more_than_the_text(start: str) -> None:
    assert peak(sexpr, start.encode() + b"(" * 20_000_000) < 2.2 * 20_000_000


def test_20_megabytes_in_one_open_text_cost_no_more_than_the_text() -> None:
    assert peak(sexpr, b'(export (components (comp (ref "' + b"a\\a" * 7_000_000) < 2.5 * 21_000_000


def test_nesting_is_limited() -> None:
    depth = limits.DEPTH - 3
    sexpr(f"(export (components (comp (ref R1) {'(a ' * depth}{')' * depth})) {NETS})")
    refused(
        sexpr, f"(export\n(components (comp (ref R1) {'(a ' * (depth + 1)}{')' * (depth + 1)})) {NETS})", "nested too deep", line=2
    )
    xml(f"<export>{XCOMPS}<x><y>{'<a>' * depth}{'</a>' * depth}</y></x>{XNETS}</export>")
    refused(xml, f"<export>{XCOMPS}\n<x><y>{'<a>' * (depth + 1)}{'</a>' * (depth + 1)}</y></x>{XNETS}</export>", "too deep", line=2)
    refused(xml, "<export>" + "<a>" * 100_000, "too deep")


def test_one_text_is_limited() -> None:
    fits, long = "x" * limits.TOKEN, "x" * (limits.TOKEN + 1)
    sexpr(f'(export (components (comp (ref R1) (value "{fits}") (datasheet {fits}))) {NETS})')
    for text in (f'"{long}"', long, f'"{long}\\n"', f"a {long}"):
        refused(sexpr, f"(export\n (components\n (comp (ref R1) (value {text}))) {NETS})", "a text is too long", line=3)
    xml(f'<export><components><comp ref="R1"><value>{fits}</value></comp></components>{XNETS}</export>')
    for inner in (f"<value>{long}</value>", f'<value v="{long}"/>', f"<value>1</value>{long}"):
        refused(xml, f'<export>\n<components><comp ref="R1">{inner}</comp></components>{XNETS}</export>', "too long", line=2)


def test_names_are_limited() -> None:
    fits, long = "n" * limits.NAME, "n" * (limits.NAME + 1)
    nets = f"(nets (net (name {fits}) (node (ref {fits}) (pin {fits})) (node (ref a) (pin b))))"
    assert sexpr(f"(export (components (comp (ref {fits}))) {nets})").parts[0].ref == fits
    refused(sexpr, f"(export (components (comp (ref {long}))) {NETS})", "the reference of a part is too long")
    for net in (f"(name {long})", f"(name A) (node (ref {long}) (pin 1))", f"(name A) (node (ref R1) (pin {long}))"):
        refused(sexpr, f"(export {COMPS} (nets (net {net})))", "is too long", "at most 1,024 characters")
    refused(xml, f'<export><components><comp ref="{long}"/></components>{XNETS}</export>', "too long")


def test_counts_are_limited(monkeypatch: pytest.MonkeyPatch) -> None:
    text, other = f"(export {COMPS} {NETS})", f"<export>{XCOMPS}{XNETS}</export>"
    libparts = "(libparts (libpart (lib L) (part P) (pins (pin (num 1)) (pin (num 2)))))"
    for name, word in (
        ("PARTS", "parts"),
        ("NETS", "nets"),
        ("PINS_PER_NET", "pins of one net"),
        ("PINS_PER_PART", "pins of one symbol"),
    ):
        with monkeypatch.context() as patched:
            patched.setattr(limits, name, {"NETS": 0}.get(name, 1))
            refused(sexpr, f"(export {libparts} {COMPS} {NETS})", f"too many {word}")
            if name != "PINS_PER_PART":
                refused(xml, other, f"too many {word}")
    for count in range(1, 14):
        with monkeypatch.context() as patched:
            patched.setattr(limits, "ATOMS", count)
            refused(sexpr, text, "too many items")
            refused(xml, other, "too many elements")


@pytest.mark.parametrize("piece", ["()", "(a)", "a ", "' ", '""', "(a b)", "(a (b c) d)"])
def test_items_of_every_sort_are_counted(piece: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, "ATOMS", 1000)
    for start in ("(export ", "(export (components ", "(export (components (comp (ref R1) "):
        refused(sexpr, start + piece * 1001, "too many items")


def test_an_element_with_a_flood_of_attributes_is_refused() -> None:
    flood = " ".join(f'a{k}="1"' for k in range(20_000))
    refused(xml, f'<export><components><comp ref="R1" {flood}/></components>{XNETS}</export>', "too many attributes")


def test_a_million_unknown_sections_leave_one_short_note() -> None:
    reading = sexpr(f"(export {''.join(f'(s{k})' for k in range(20_000))} {COMPS} {NETS})")
    (note,) = [note for note in reading.notes if note.kind == "skipped"]
    assert note.text.startswith("20000 ")
    assert len(note.text) < 200


def test_names_cannot_start_a_line_or_colour_a_terminal() -> None:
    evil = "\x1b[31m\n::error::\u202e"
    error = refused(sexpr, f'(export (components (comp (ref "{evil}") (ref b))) {NETS})')
    notes = sexpr(f'(export (components (comp (ref "{evil}"))) ("{evil}") ({evil.split()[0]}) {NETS})').notes
    for text in (str(error), *(note.text for note in notes)):
        assert not {"\x1b", "\n", "\u202e"} & set(text)


def test_nul_characters_are_refused() -> None:
    refused(sexpr, f"(export {COMPS}\n\0 {NETS})", "NUL", line=2)


# --- damage ----------------------------------------------------------------------------------------------------------

WHOLE = [*sorted((FIXTURES / "sexpr").glob("*")), *sorted((FIXTURES / "xml").glob("*"))]
BIG = [SAMPLES / name for name in ("mains-dimmer/board.net", "formats/sexpr-e-classes.net", "can-adapter/board.xml")]


def attempt(path: Path, data: bytes) -> Reading | None:
    """A Reading, or None for an InputError; anything else fails the test."""
    read = xml_netlist.read if path.suffix == ".xml" else sexpr_netlist.read
    try:
        return read(Blob("damaged", data))
    except InputError:
        return None


def present(paths: list[Path]) -> list[Path]:
    return [path for path in paths if path.is_file()]


@pytest.mark.parametrize("path", present(WHOLE + BIG), ids=lambda path: f"{path.parent.name}-{path.name}")
def test_every_cut_copy_is_refused(path: Path) -> None:
    data = path.read_bytes()
    end = len(data.rstrip())
    step = max(1, end // 150)
    assert attempt(path, data) is not None
    assert [k for k in range(0, end, step) if attempt(path, data[:k]) is not None] == []


@pytest.mark.parametrize("path", present(WHOLE + BIG), ids=lambda path: f"{path.parent.name}-{path.name}")
def test_damaged_copies_never_raise_anything_else(path: Path) -> None:
    data = path.read_bytes()
    chance = random.Random(7)
    answers = set()
    for _ in range(120):
        broken = bytearray(data)
        for _ in range(chance.choice((1, 1, 3, 20))):
            k = chance.randrange(len(broken))
            match chance.randrange(3):
                case 0:
                    broken[k] = chance.randrange(256)
                case 1:
                    broken[k : k + chance.randrange(1, 30)] = b""
                case _:
                    broken[k:k] = chance.choice((b"(", b")", b'"', b"'", b"\\", b"<", b"&", b"\0", b"\xff", b"[", b";"))
        answers.add(attempt(path, bytes(broken)) is None)
    assert answers == {True, False}  # both happen, so the damage is neither too strong nor without effect


@settings(max_examples=200, deadline=None)
@given(st.text(st.sampled_from("()\"'\\ \n;[]ab#"), max_size=60))
def test_any_text_inside_the_form(text: str) -> None:
    for start in ("(export ", "(export (components (comp (ref R1) "):
        attempt(Path("a.net"), (start + text).encode())
        attempt(Path("a.net"), f"{start}{text})) {NETS})".encode())


# --- what a file is --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("data", "meant"),
    [
        (b"", "an empty file"),
        (b"\xef\xbb\xbf \r\n", "an empty file"),
        (b"(export (version D)", "an S-expression netlist"),
        (b"\xef\xbb\xbf\n (export)", "an S-expression netlist"),
        ("(export µ)".encode("utf-16"), "an S-expression netlist"),
        ("(export (version E) ".encode("utf-16-le"), "an S-expression netlist"),
        (b"(EDIF top (edifVersion 2 0 0))", "an EDIF 2 0 0 file"),
        (b"(layout (x))", "an S-expression file of another kind (keyword layout)"),
        (b"# Some Netlist Version 1.1 created today\n( { }", "a legacy parenthesised netlist"),
        (b"( { Netlist }\n", "a legacy parenthesised netlist"),
        (b'<?xml version="1.0"?>\n<!-- <a> -->\n<export version="E">', "an XML netlist"),
        (b"<!DOCTYPE a [<!ENTITY b '>'> ]><export>", "an XML netlist"),
        (b"<IPC-2581 revision='C'>", "an IPC-2581 file"),
        (b"<svg width='1'>", "an XML file of another kind (root element svg)"),
        (b"<!DOCTYPE html><html>", "an XML file of another kind (root element html)"),
        (b"< not markup", "an XML file of unknown kind"),
        (b"P  CODE 00\n317GND              VIA        MD0118PA00X+058547", "an IPC-D-356 netlist"),
        (b"C  comment\n327N1               R1    -1          A01X+1Y+1X1", "an IPC-D-356 netlist"),
        (b"* a circuit\nR1 a b 1k\n", "a SPICE netlist"),
        (b".title x\n", "a SPICE netlist"),
        (b"PK\x03\x04\x14\0", "a spreadsheet workbook (zip)"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1", "a spreadsheet workbook of the old binary form"),
        (b"%PDF-1.7\n\xe2\xe3", "a PDF document"),
        (b"%FSLAX46Y46*%\n", "a Gerber file"),
        (b"G04 layer*\n", "a Gerber file"),
        (b"M48\nMETRIC\n", "a drill file"),
        (b"Ref,Value\nC1,1u\n", "a delimited table"),
        (b"Ref;Value\nC1;1,5u\n", "a delimited table"),
        (b"Company: X\nRef\tValue\nC1\t1u\nC2\t1u\n", "a delimited table"),
        (b"designs:\n  a: {netlist: a.net, bom: b.csv}\n", "a YAML file"),
        (b"- a\n- b\n", "a YAML file"),
        (b'{"a": 1}', "a JSON file"),
        (b"[\n 1, 2]", "a JSON file"),
        (b"\x7fELF\x02\x01\0\0\0", "binary data"),
        (b"some words\nand more\n", "text of no known form"),
    ],
)
def test_what_content_looks_like(data: bytes, meant: str) -> None:
    head = sniff.head(Blob("x", data))
    assert sniff.describe(head) == meant
    assert sexpr_netlist.READER.claims(head) == (meant == "an S-expression netlist")
    assert xml_netlist.READER.claims(head) == (meant == "an XML netlist")


def test_a_head_that_ends_inside_a_character() -> None:
    for width in range(4090, 4100):
        text = "(export " + "x" * (width - 8) + "€" * 20
        assert sniff.head(Blob("x", text.encode())).rstrip("€") == text.rstrip("€")[:4096]
        wide = ("(export " + "x" * 2033 + "𝄞" * 20).encode("utf-16")
        assert sniff.head(Blob("x", wide)).startswith("(export xxx")


@settings(max_examples=300, deadline=None)
@given(
    st.binary(max_size=200),
    st.sampled_from([b"", b"\xff\xfe", b"\xfe\xff", b"\xef\xbb\xbf", b"<", b"(", b"PK\x03\x04", b" " * 5000]),
)
def test_any_bytes_have_a_head_and_a_description(data: bytes, start: bytes) -> None:
    head = sniff.head(Blob("x", start + data))
    assert sniff.describe(head)
    assert head[:1] not in tuple(" \t\r\n\ufeff")


def test_the_readers_say_what_they_are() -> None:
    for module, form in ((sexpr_netlist, "S-expression netlist"), (xml_netlist, "XML netlist")):
        assert (module.READER.form, module.READER.role, module.READER.read) == (form, "netlist", module.read)


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample files are not beside the project")
def test_no_sample_of_another_form_is_claimed() -> None:
    claimed = [
        path.name
        for path in SAMPLES.rglob("*")
        if path.is_file() and any(m.READER.claims(sniff.head(read_file(path))) for m in (sexpr_netlist, xml_netlist))
    ]
    others = ("board-legacy.net", "spice-cp1252.net", "spice-utf16.net", "edif-bus.edf", "edif-case.edf", "ipc2581-small.xml")
    assert len(claimed) >= 13
    assert not set(others) & set(claimed)
