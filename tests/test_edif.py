"""EDIF 2 0 0, netlist view. Source of the forms: formats reference, 3; round trips of whole boards stand in test_carriers.py."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits, plugins
from checker.api import verify
from checker.errors import InputError
from checker.files import Blob
from checker.model.reading import Reading
from checker.readers import edif
from tests import carriers
from tests.test_carriers import DESIGNS, board

SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"
PARTS = """
 (library parts (edifLevel 0) (technology (numberDefinition))
  (cell R (cellType GENERIC) (view v (viewType NETLIST) (interface (port A (designator "1")) (port B (designator "2")))))
  (cell U (cellType GENERIC) (property Description (string "microcontroller"))
   (view v (viewType NETLIST) (interface (port (rename VCC "VCC+") (direction INPUT)) (port GND)
    (port (array (rename D "D[3:0]") 4) (direction INOUT)))))
  {cells})
"""
R = "(viewRef v (cellRef R (libraryRef parts)))"
U = "(viewRef v (cellRef U (libraryRef parts)))"
WIRED = f"""
 (instance I1 {R} (designator "R1") (property Value (string "4k7")) (property (rename P1 "PCB Footprint") (string "R_0603")))
 (instance I2 {R} (designator "R2"))
 (net (rename N1 "+5 V/A") (joined (portRef A (instanceRef I1)) (portRef A (instanceRef I2))))
 (net N2 (joined (portRef B (instanceRef I1)) (portRef B (instanceRef I2))))
"""


def file(contents: str = WIRED, cells: str = "", interface: str = "") -> str:
    """A whole file with one board. contents: of its view. cells: further cells of the library `parts`."""
    return f"""(edif board (edifVersion 2 0 0) (edifLevel 0) (keywordMap (keywordLevel 0))
 {PARTS.replace("{cells}", cells)}
 (library boards (edifLevel 0) (technology (numberDefinition))
  (cell board (cellType GENERIC) (view v (viewType NETLIST) (interface {interface}) (contents {contents}))))
 (design board (cellRef board (libraryRef boards))))"""


def read(text: str | bytes) -> Reading:
    return edif.READER.read(Blob("a.edf", text if isinstance(text, bytes) else text.encode()))


def wired(reading: Reading) -> dict[str, set[str]]:
    return {net.name: {f"{node.ref}.{node.pin}" for node in net.nodes} for net in reading.nets}


def said(reading: Reading, ref: str) -> dict[str, object]:
    (part,) = [part for part in reading.parts if part.ref == ref]
    return {fact.attribute: fact.value for fact in part.facts}


def refused(text: str | bytes, *words: str) -> None:
    with pytest.raises(InputError) as caught:
        read(text)
    assert str(caught.value).startswith("a.edf")
    for word in words:
        assert word in str(caught.value)


# --- what is read ----------------------------------------------------------------------------------------------------


def test_parts_pins_values_and_names_of_nets() -> None:
    reading = read(file())
    assert wired(reading) == {"+5 V/A": {"R1.1", "R2.1"}, "N2": {"R1.2", "R2.2"}}
    told = said(reading, "R1")
    assert (told["value"], told["footprint"], told["symbol"]) == ("4k7", "R_0603", "R")
    assert [pin.number for pin in reading.parts[0].pins] == ["1", "2"]
    assert reading.notes == ()
    assert plugins.reader_for(Blob("x", file().encode()), "netlist").form == edif.FORM


def test_keywords_and_handles_in_any_case_names_as_written() -> None:
    text = file().replace("(instanceRef I1)", "(INSTANCEREF i1)").replace("(net N2", "(Net n2").replace("(cellRef R", "(cellref r")
    assert wired(read(text)) == {"+5 V/A": {"R1.1", "R2.1"}, "n2": {"R1.2", "R2.2"}}


def test_names_that_differ_in_case_by_rename_only_are_two() -> None:
    contents = f"""(instance I1 {R}) (instance I2 {R})
     (net (rename a1 "CLK") (joined (portRef A (instanceRef I1)) (portRef A (instanceRef I2))))
     (net (rename a2 "Clk") (joined (portRef B (instanceRef I1)) (portRef B (instanceRef I2))))"""
    assert set(wired(read(file(contents)))) == {"CLK", "Clk"}


def test_texts_have_no_backslash_and_codes_between_per_cent_signs() -> None:
    contents = WIRED.replace('"4k7"', '"C:\\new %34%4k7%34 181% and\n more"')
    assert said(read(file(contents)), "R1")["value"] == 'C:\\new "4k7"µ and more'


def test_numbers_of_pins_at_the_instance_and_by_property() -> None:
    contents = WIRED.replace('(designator "R2")', '(designator "R2") (portInstance A (designator "7"))')
    assert wired(read(file(contents)))["+5 V/A"] == {"R1.1", "R2.7"}
    cell = '(cell Q (view v (viewType NETLIST) (interface (port G (property PinNumber (string "3"))) (port (rename x "&S")))))'
    contents = """(instance Q1 (viewRef v (cellRef Q (libraryRef parts)))) (instance Q2 (viewRef v (cellRef Q (libraryRef parts))))
     (net G (joined (portRef G (instanceRef Q1)) (portRef G (instanceRef Q2))))
     (net S (joined (portRef x (instanceRef Q1)) (portRef x (instanceRef Q2))))"""
    assert wired(read(file(contents, cell))) == {"G": {"Q1.3", "Q2.3"}, "S": {"Q1.&S", "Q2.&S"}}


def test_references_by_designator_property_or_name() -> None:
    contents = WIRED.replace('(designator "R1")', '(property RefDes (string "R9"))').replace(
        '(designator "R2")', '(designator "R?")'
    )
    assert sorted(part.ref for part in read(file(contents)).parts) == ["I2", "R9"]


def test_members_of_a_bus_count_from_the_left() -> None:
    contents = f"""(instance U1 {U}) (instance R1 {R})
     (net X (joined (portRef (member D 0) (instanceRef U1)) (portRef A (instanceRef R1))))
     (net Y (joined (portRef (member D 3) (instanceRef U1)) (portRef B (instanceRef R1))))"""
    assert wired(read(file(contents))) == {"X": {"U1.D[3]", "R1.1"}, "Y": {"U1.D[0]", "R1.2"}}


def test_arrays_of_instances_nets_and_bundles() -> None:
    contents = f"""(instance U1 {U}) (instance (array (rename RN "RN[0:3]") 4) {R})
     (net (array (rename B "B[3:0]") 4) (joined (portRef D (instanceRef U1)) (portRef A (instanceRef RN))))
     (net G (joined (portRef B (instanceRef (member RN 0))) (portRef GND (instanceRef U1))))"""
    found = wired(read(file(contents)))
    assert found == {
        "B[3]": {"U1.D[3]", "RN[0].1"}, "B[2]": {"U1.D[2]", "RN[1].1"}, "B[1]": {"U1.D[1]", "RN[2].1"},
        "B[0]": {"U1.D[0]", "RN[3].1"}, "G": {"RN[0].2", "U1.GND"},
    }  # fmt: skip


def test_cells_inside_cells() -> None:
    inner = f"""(cell F (view v (viewType NETLIST) (interface (port IN) (port OUT)) (contents
     (instance Ra {R} (designator "R1")) (instance Rb {R} (designator "R2"))
     (net IN (joined (portRef IN) (portRef A (instanceRef Ra))))
     (net MID (joined (portRef B (instanceRef Ra)) (portRef A (instanceRef Rb))))
     (net OUT (joined (portRef OUT) (portRef B (instanceRef Rb)))))))"""
    block = "(viewRef v (cellRef F (libraryRef parts)))"
    once = f"""(instance F1 {block}) (instance R9 {R})
     (net X (joined (portRef IN (instanceRef F1)) (portRef A (instanceRef R9))))
     (net Y (joined (portRef OUT (instanceRef F1)) (portRef B (instanceRef R9))))"""
    assert wired(read(file(once, inner))) == {"X": {"R1.1", "R9.1"}, "/F1/MID": {"R1.2", "R2.1"}, "Y": {"R2.2", "R9.2"}}
    twice = once.replace(f"(instance R9 {R})", f"(instance F2 {block})").replace("(instanceRef R9)", "(instanceRef F2)")
    twice = twice.replace("portRef A", "portRef IN").replace("portRef B", "portRef OUT")
    assert wired(read(file(twice, inner)))["X"] == {"/F1/R1.1", "/F2/R1.1"}


def test_a_symbol_of_ground_is_no_part_and_joins_nothing_by_itself() -> None:
    tie = "(cell GND (cellType TIE) (view v (viewType NETLIST) (interface (port P))))"
    contents = (
        WIRED
        + """(instance G1 (viewRef v (cellRef GND (libraryRef parts))))
     (net N3 (joined (portRef P (instanceRef G1))))"""
    )
    assert sorted(part.ref for part in read(file(contents, tie)).parts) == ["R1", "R2"]


def test_two_parts_of_one_name_are_kept_and_units_of_one_joined() -> None:
    two = read(file(WIRED.replace('(designator "R2")', '(designator "R1") (property Value (string "1k"))')))
    assert [part.ref for part in two.parts] == ["R1", "R1 (2)"]
    assert [note.kind for note in two.notes] == ["duplicate-reference"]


def test_what_is_not_understood_is_said() -> None:
    (note,) = read(file(WIRED + "(gizmo 1) (gizmo 2)")).notes
    assert (note.kind, "gizmo" in note.text, note.text[0]) == ("skipped", True, "2")
    (note,) = read(file(WIRED, interface="(port X)")).notes
    assert "1 ports of its own" in note.text


def test_a_mains_supply_is_judged_as_from_its_first_form(tmp_path: Path) -> None:
    path = tmp_path / "board"
    path.write_bytes(carriers.edif(board("greenhouse-wrong")))
    folder = DESIGNS / "greenhouse-wrong"
    given = {"bom": [folder / "bom.csv"], "declaration": folder / "declaration.yaml"}
    one, two = (verify(netlist, **given) for netlist in (path, folder / "greenhouse.net"))
    assert [(v.rule, v.parts, v.outcome) for v in one.verdicts if v.outcome == "fail"] == [
        (v.rule, v.parts, v.outcome) for v in two.verdicts if v.outcome == "fail"
    ]


# --- what is refused -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("(edifVersion 2 0 0)", "(edifVersion 4 0 0)", ("a.edf:1", "the version of EDIF is not known", "2 0 0")),
        ("(keywordLevel 0)", "(keywordLevel 1)", ("defines keywords of its own",)),
        ("(instanceRef I2)", "(instanceRef I7)", ("joins an instance that is not there", "I7")),
        ("(net N2 (joined", "(net N2 (joind", ("a net holds a form that is not known there", "joind")),
        ("(portRef B ", "(portRef Q ", ("joins a port that is not there", "Q")),
        ("(instance I2", "(instance I1", ("an instance is given twice",)),
        ('"4k7"', '"4k7', ("not closed",)),
        ("(design board (cellRef board (libraryRef boards)))", "", ("which cell is the design",)),
        ("(cellRef board (libraryRef boards))", "(cellRef R (libraryRef parts))", ("no contents",)),
        ("(net N2 (joined", "(net N2 (joined junk", ()),
        (
            "(design board",
            "(design second (cellRef board (libraryRef boards))) (design board",
            ("holds several designs",),
        ),
    ],
)
def test_faults_of_a_file(old: str, new: str, words: tuple[str, ...]) -> None:
    text = file()
    assert old in text
    if not words:
        assert read(text.replace(old, new)).parts
        return
    refused(text.replace(old, new), *words)


def test_empty_files_and_files_of_another_form() -> None:
    refused("", "the file is empty")
    refused("(export (version D))", "not an EDIF netlist", "S-expression")
    refused(file(""), "no contents")
    refused(file(f"(instance I1 {R})"), "the netlist connects nothing")


def test_cells_in_themselves_deep_and_multiplied() -> None:
    def cell(name: str, inside: str, copies: int) -> str:
        placed = "".join(f"(instance I{at} (viewRef v (cellRef {inside} (libraryRef parts))))" for at in range(copies))
        return f"(cell {name} (view v (viewType NETLIST) (interface (port P)) (contents {placed})))"

    use = "(instance X (viewRef v (cellRef C0 (libraryRef parts))))" + WIRED
    refused(file(use, cell("C0", "C1", 1) + cell("C1", "C0", 1)), "a cell contains itself")
    deep = "".join(cell(f"C{at}", f"C{at + 1}", 1) for at in range(100)) + cell("C100", "R", 1)
    refused(file(use, deep), "nested too deep")
    wide = "".join(cell(f"C{at}", f"C{at + 1}", 10) for at in range(10)) + cell("C10", "R", 10)
    refused(file(use, wide), "too large once every cell is placed")


def test_forms_nested_without_end_and_arrays_without_end() -> None:
    refused("(edif a " + "(x " * 100_000, "nested too deep")
    for width in ("2000000000", "-1", "0", "x"):
        refused(file(f"(instance (array RN {width}) {R})" + WIRED), "a.edf:")
    refused(file().replace("(array (rename D", "(array (rename D").replace('"D[3:0]") 4', '"D[3:0]") 2000000000'), "a.edf:")
    refused(file(WIRED + "(net X (joined (portRef (member A 5) (instanceRef I1))))"), "a.edf:")


def test_long_names_are_refused() -> None:
    refused(file(WIRED.replace('"R1"', f'"{"R" * (limits.NAME + 1)}"')), "too long")


@pytest.mark.parametrize("cut", range(40, len(file()) - 1, 97))
def test_a_file_that_was_cut_off_is_refused(cut: int) -> None:
    refused(file()[:cut])


# --- every reader ----------------------------------------------------------------------------------------------------

_idents = st.from_regex(r"[A-Za-z&][A-Za-z0-9_]{0,8}", fullmatch=True)
_texts = st.text(st.characters(codec="utf-8", exclude_categories=("Cc", "Cs", "Co", "Cn", "Zl", "Zp")), min_size=1, max_size=10)


@settings(max_examples=60, deadline=None)
@given(st.lists(st.tuples(_texts, _texts), min_size=2, max_size=6, unique_by=lambda pair: pair[0].strip()), _texts)
def test_what_is_written_is_read(parts: list[tuple[str, str]], net: str) -> None:
    """References, values and the name of a net, in whatever characters."""
    parts = [(ref.strip() or "R", f"v{value.strip()}") for ref, value in parts]
    if any(ref.endswith("?") or not ref for ref, _ in parts) or len({ref for ref, _ in parts}) < len(parts) or not net.strip():
        return
    lines = [
        f"(instance I{at} {R} (designator {carriers._string(ref)}) (property Value (string {carriers._string(value)})))"
        for at, (ref, value) in enumerate(parts)
    ]
    ends = " ".join(f"(portRef A (instanceRef I{at}))" for at in range(len(parts)))
    reading = read(file("\n".join([*lines, f"(net (rename N {carriers._string(net)}) (joined {ends}))"])))
    assert {part.ref: said(reading, part.ref)["value"] for part in reading.parts} == dict(parts)
    assert wired(reading) == {net: {f"{ref}.1" for ref, _ in parts}}


@settings(max_examples=120, deadline=None)
@given(st.integers(0, 4_000), st.sampled_from(list('()" %\\&0A')), st.booleans())
def test_damaged_copies_end_in_a_message_or_read(at: int, letter: str, cut: bool) -> None:
    text = file()
    at %= len(text)
    broken = text[:at] if cut else text[:at] + letter + text[at + 1 :]
    try:
        assert read(broken).parts
    except InputError as error:
        assert str(error).startswith("a.edf")


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample boards are not beside this checkout")
def test_samples() -> None:
    found = read((SAMPLES / "formats" / "edif-bus.edf").read_bytes())
    assert len(found.parts) > 3
    refused((SAMPLES / "formats" / "edif-case.edf").read_bytes(), "no contents")
