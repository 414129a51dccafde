"""SPICE netlists as a limited carrier. Source of the forms: formats reference, 6."""

from __future__ import annotations

import time
from contextlib import suppress
from decimal import Decimal
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits, plugins
from checker.api import verify
from checker.assemble.join import assemble
from checker.errors import InputError
from checker.files import Blob
from checker.files import read as read_file
from checker.identify.candidates import identify
from checker.model.declaration import Declaration
from checker.model.reading import NOTE_KINDS, Reading
from checker.readers import sniff, spice
from checker.readers.spice_figures import in_units

FIXTURE = Path(__file__).parents[1] / "fixtures" / "readers" / "spice" / "flyback.cir"
SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"
FLYBACK = """* an isolated converter
V1 IN 0 DC 24
L1 IN SW 100u
L2 SOUT 0S 25u
K1 L1 L2 0.99
M1 SW G 0 0 NMOS1
D1 SOUT VOUT DX
C1 VOUT 0S 100uF
R1 VOUT 0S 1k
R2 G 0 10k
.model NMOS1 NMOS(Vto=2)
.model DX D(Is=1e-14)
.tran 1u 10m
.end
"""


def read(text: str | bytes, name: str = "a.cir") -> Reading:
    return spice.READER.read(Blob(name, text if isinstance(text, bytes) else text.encode()))


def wired(reading: Reading) -> dict[str, set[str]]:
    return {net.name: {f"{node.ref}.{node.name or node.pin}" for node in net.nodes} for net in reading.nets}


def said(reading: Reading, ref: str) -> dict[str, object]:
    (part,) = [part for part in reading.parts if part.ref == ref]
    return {fact.attribute: fact.value for fact in part.facts}


def notes(reading: Reading) -> list[str]:
    return [note.text for note in reading.notes]


def refused(text: str | bytes, *words: str) -> None:
    with pytest.raises(InputError) as caught:
        read(text)
    assert str(caught.value).startswith("a.cir")
    for word in words:
        assert word in str(caught.value)


# --- what is read ----------------------------------------------------------------------------------------------------


def test_parts_nets_and_a_transformer_of_coupled_coils() -> None:
    reading = read(FLYBACK)
    assert [part.ref for part in reading.parts] == ["V1", "M1", "D1", "C1", "R1", "R2", "K1"]
    assert wired(reading)["SW"] == {"M1.D", "K1.L1"}
    assert said(reading, "K1")["windings"] == "1-2, 3-4"
    assert (said(reading, "C1")["value"], said(reading, "R1")["value"]) == ("100 uF", "1 k\u03a9")
    assert reading.title == "an isolated converter"
    assert plugins.reader_for(Blob("x.net", FLYBACK.encode()), "netlist").form == spice.FORM


def test_the_windings_are_a_barrier_and_node_0_joins_everything(tmp_path: Path) -> None:
    path = tmp_path / "a"
    path.write_text(FLYBACK, encoding="utf-8")
    assert len(verify(path).domains) == 2
    path.write_text(FLYBACK.replace("0S", "0"), encoding="utf-8")
    assert len(verify(path).domains) == 1
    (note,) = [note for note in read(path.read_text(encoding="utf-8")).notes if note.kind == "nets-merged"]
    assert (note.parts, note.nets) == (("K1",), ("0",))
    assert "node 0 is one net wherever it stands, at both sides of K1" in note.text
    assert not any("node 0" in text for text in notes(read(FLYBACK)))


def test_the_first_line_is_the_title_even_when_it_looks_like_a_part() -> None:
    reading = read("R9 a b 1k\nR1 a b 1k\nR2 a b 2k\n.end\n")
    assert [part.ref for part in reading.parts] == ["R1", "R2"]
    assert any("the first line is the title" in text for text in notes(reading))


def test_continuations_comments_and_the_end() -> None:
    text = "* t\nR1 a\n* between\n+ b\n+ 1k ; rest of the line\nR2 a b 2k $ more\nC1 a b 1n\n.end\nR3 a b 3k\n"
    reading = read(text)
    assert {part.ref: said(reading, part.ref)["value"] for part in reading.parts} == {
        "R1": "1 k\u03a9",
        "R2": "2 k\u03a9",
        "C1": "1 nF",
    }


@pytest.mark.parametrize(
    ("text", "letter", "shown"),
    [
        ("1M", "R", "1 m\u03a9"), ("1Meg", "R", "1 M\u03a9"), ("4.7kOhm", "R", "4.7 k\u03a9"), ("10uF", "C", "10 uF"),
        ("2\u00b5", "C", "2 uF"), ("1e-9", "C", "1 nF"), ("100", "R", "100 \u03a9"), ("2.2n", "L", "2.2 nH"), ("abc", "R", ""),
        ("{2*R}", "R", ""),
    ],
)  # fmt: skip
def test_figures_as_simulators_read_them(text: str, letter: str, shown: str) -> None:
    assert in_units(text, letter) == shown


def test_references_are_those_of_the_schematic() -> None:
    reading = read("* t\nR_R57 a b 1k\nXU2 a b AMP\nX_U3 a b AMP\nC_R57 a b 1n\n")
    assert {part.ref for part in reading.parts} == {"R_R57", "U2", "U3", "C_R57"}


def test_transistors_with_and_without_a_substrate() -> None:
    text = "* t\nQ1 c b e QN\nQ2 c b e s QN\nQ3 c b e QN 2\nM1 d g s s MN\nM2 d g s blk MN\n.model QN NPN\n.model MN NMOS\n"
    pins = {part.ref: [pin.name for pin in part.pins] for part in read(text).parts}
    assert pins == {"Q1": ["C", "B", "E"], "Q2": ["C", "B", "E"], "Q3": ["C", "B", "E"], "M1": ["D", "G", "S"],
                    "M2": ["D", "G", "S", "B"]}  # fmt: skip


BLOCK = "* t\nX1 a b FILTER\nX2 b c FILTER\nR9 a c 1k\n.subckt FILTER in out\nR1 in mid 1k\nC1 mid 0 1n\nL1 mid out 1m\n.ends\n"


def test_sub_circuits_are_placed_where_they_are_named_and_may_follow() -> None:
    found = wired(read(BLOCK))
    assert found["a"] == {"/X1/R1.1", "R9.1"}
    assert found["/X1/mid"] == {"/X1/R1.2", "/X1/C1.1", "/X1/L1.1"}
    assert found["0"] == {"/X1/C1.2", "/X2/C1.2"}


def test_a_sub_circuit_that_is_not_there_or_models_a_part_stays_one_part() -> None:
    model = "* t\nXU1 a b c OPAMP\nXU2 a b c OTHER\nR1 a b 1k\n.subckt OPAMP p n o\nE1 o 0 p n 1e5\n.ends\n"
    reading = read(model)
    assert [part.ref for part in reading.parts] == ["U1", "U2", "R1"]
    assert any("taken as one part each" in text for text in notes(reading))


def test_a_whole_supply() -> None:
    """Source: the file itself, by hand."""
    reading = spice.read(read_file(FIXTURE))
    refs = "V1 R5 D1 D2 D3 D4 C1 /T1/LLEAK T1 M1 R1 U1 D5 C2 D6 C3 U2 R2 U3 R3 R4 CY1 RLOAD"
    assert [part.ref for part in reading.parts] == refs.split()
    assert wired(reading)["PGND"] == {"D3.A", "D4.A", "C1.2", "T1.L3", "R1.2", "U1.5", "C2.2", "U2.e", "CY1.1"}
    assert wired(reading)["/T1/x"] == {"/T1/LLEAK.1", "T1.L1"}
    assert said(reading, "T1")["turns"] == "1-2:10, 3-4:1, 5-6:1"
    assert said(reading, "D1") == {"type": "1N4007", "symbol": "D"}
    assert said(reading, "M1") == {"type": "NMOS700", "symbol": "MOSFET"}
    assert said(reading, "U2") == {"type": "PC817"}
    assert said(reading, "C1") == {
        "value": "10 uF", "symbol": "C", "rating:voltage": "400 V", "technology": "Al electrolytic",
    }  # fmt: skip
    assert said(reading, "R4") == {"value": "2.49 k\u03a9", "symbol": "R", "tolerance": "1 %", "rating:power": "0.1 W"}
    assert said(reading, "V1") == {"value": "SINE(0 325 50)", "kind": "unknown", "in_bom": False, "symbol": "Voltage_Source"}
    assert [note.sources[0].line for note in reading.notes] == [0, 40, 24, 30, 0, 2]
    assert reading.notes[-1].text == (
        "V1 gives 325 V peak at 50 Hz; where it stands for the mains, declare supply: {mains: 230 V} and "
        "domains: {supply: {nets: [L], side: primary}}"
    )
    report = verify(FIXTURE)
    assert {part.part for barrier in report.barriers for part in barrier.parts} == {"T1", "U2", "CY1"}
    assert not [verdict for verdict in report.verdicts if verdict.outcome == "fail"]


def test_what_the_notes_ask_to_declare_finds_the_supply(tmp_path: Path) -> None:
    circuit = tmp_path / "a.cir"
    circuit.write_text(FLYBACK.replace("DC 24", "DC 400"), encoding="utf-8")
    (told,) = [text for text in notes(spice.read(read_file(circuit))) if "V1 gives" in text]
    asked = told.partition("declare ")[2].split(" and ")
    assert asked == ["supply: {dc: 400 V}", "domains: {supply: {nets: [IN], side: primary}}"]
    (tmp_path / "d.yaml").write_text("\n".join(asked), encoding="utf-8")
    found = {domain.name: domain for domain in verify(circuit, declaration=tmp_path / "d.yaml").domains}
    assert "IN" in found["supply"].nets
    assert found["supply"].side == "primary"
    assert len(found) == 2


@pytest.mark.parametrize(
    "value", ["24", "DC 48", "SINE(0 12 50)", "SINE(0 325 100k)", "PULSE(0 400 0 1u 1u 5u 10u)", "{VIN}", "SIN(0 {A} 50)", ""]
)
def test_sources_that_do_no_harm_or_say_nothing_are_not_spoken_of(value: str) -> None:
    assert not any("gives" in text for text in notes(read(f"* t\nV1 a 0 {value}\nR1 a 0 1k\n")))


@pytest.mark.parametrize(
    ("cards", "turns"),
    [
        ("L1 a b 2m\nL2 c d 20u\nK1 L1 L2 0.98", "1-2:10, 3-4:1"),
        ("L1 a b 1m\nL2 c d 3m\nK1 L1 L2 1", "1-2:1, 3-4:1.732"),
        ("L1 a b 1m\nL2 c d 1m\nL3 e f 4m\nK1 L1 L2 .99\nK2 L3 L2 .95", "1-2:1, 3-4:1, 5-6:2"),
        ("L1 a b 1m\nL2 c d 1m\nL3 e f 4m\nK1 L1 L2 .99\nK2 L3 L2 .5", None),  # loose
        ("L1 a b 1m\nL2 c d 1m\nK1 L1 L2 -1", None),  # dots the other way: left out, so that nothing wrong is said
        ("L1 a b 1m\nL2 c d 1m\nK1 L1 L2 {k}", None),
        ("L1 a b {x}\nL2 c d 1m\nK1 L1 L2 1", None),
        ("L1 a b 0\nL2 c d 1m\nK1 L1 L2 1", None),
        ("L1 a b 40\nL2 c d 4\nK1 L1 L2 0.99 3C90", None),  # with a model of the core the figures may be turns
        ("L1 a b 40\nL2 c d 1f\nK1 L1 L2 1", None),  # no winding
    ],
)  # fmt: skip
def test_turns_follow_from_inductances_on_one_core(cards: str, turns: str | None) -> None:
    """Source: L = N^2 A_L."""
    reading = read(f"* t\n{cards}\nR1 a c 1k\nR2 b d 1k\n")
    assert [part.ref for part in reading.parts if part.ref[0] in "KL"] == ["K1"]
    assert said(reading, "K1").get("turns") == turns


def test_cores_that_share_no_coil_are_apart_and_named_as_on_the_schematic() -> None:
    coils = "".join(f"L{at} a{at} b 1m\n" for at in range(1, 9))
    reading = read(f"* t\n{coils}K_T1 L1 L2 1\nKT2 L3 L4 1\nK_L7 L5 L6 1\nKL9 L7 L8 1\nR1 a1 b 1k\n")
    assert [part.ref for part in reading.parts] == ["R1", "T1", "T2", "K_L7", "KL9"]
    twice = read(f"* t\n{coils}K_R1 L1 L2 1\nR1 a1 b 1k\n")
    assert {part.ref for part in twice.parts} >= {"K_R1", "R1"}


def test_parts_inside_the_model_of_a_transformer_are_in_no_bill(tmp_path: Path) -> None:
    circuit, bom = tmp_path / "a.cir", tmp_path / "a.csv"
    circuit.write_bytes(FIXTURE.read_bytes())
    refs = "R5 D1 D2 D3 D4 C1 T1 M1 R1 U1 D5 C2 D6 C3 U2 R2 U3 R3 R4 CY1 RLOAD"
    bom.write_text("Reference,Description\n" + "".join(f"{ref},as drawn\n" for ref in refs.split()), encoding="utf-8")
    records = [verdict for verdict in verify(circuit, bom=[bom]).verdicts if verdict.rule == "records"]
    assert [verdict.outcome for verdict in records] == ["pass"]


def test_kinds_of_sub_circuits_follow_their_references() -> None:
    text = "* t\nXF1 a b FUSE\nXJ1 a b c PLUG\nXT1 a b c d TRAFO\nXU1 a b c AMP\nX1 a b c BLOCK\nR1 a c 1k\nR2 b d 1k\n"
    design = assemble("a", [read(text)], Declaration())
    kinds = {ref: choices[0].kind for ref, choices in identify(design, Declaration()).items()}
    assert kinds == {
        "F1": "fuse",
        "J1": "connector",
        "T1": "transformer",
        "U1": "ic",
        "X1": "ic",
        "R1": "resistor",
        "R2": "resistor",
    }


def test_names_of_nodes() -> None:
    reading = read(
        "* t\nR1 a 0 1k\nR2 A gnd 1k\nR3 N001 a 1\nR4 N001 /X1/m 1k\nX1 a VCC B\nR5 VCC 0 1k\n"
        ".global VCC\n.subckt B p q\nR1 p m 1\nR2 m VCC 1\nR3 m $G_5V 1\nR4 q $G_5V 1\n.ends\n"
    )
    found = {net.label: {f"{node.ref}.{node.pin}" for node in net.nodes} for net in reading.nets}
    assert found["0"] == {"R1.2", "R2.2", "R5.2"}  # GND is node 0
    assert found["a"] == {"R1.1", "R2.1", "R3.2", "/X1/R1.1"}  # capitals count for nothing
    assert found["/X1/m"] == {"R4.2"}  # a node of that name is not the one inside
    assert found["/X1/m'"] == {"/X1/R1.2", "/X1/R2.1", "/X1/R3.1"}
    assert found["VCC"] == {"R5.1", "/X1/R2.2", "/X1/R4.1"}
    assert found["$G_5V"] == {"/X1/R3.2", "/X1/R4.2"}
    assert any("nodes 0 and gnd are one" in text for text in notes(reading))
    text = "* t\nR1 N001 $N_0002 1\nR2 N001 Net-_R2-Pad2_ 1\nR3 5 N12 1\nR4 NC_01 VCC 1\n"
    design = assemble("a", [read(text)], Declaration())
    assert {name for name, net in design.nets.items() if not net.automatic} == {"N12", "VCC"}


def test_node_0_on_both_sides_is_spoken_of_only_where_it_joins_them() -> None:
    joined = "* t\nL1 a 0 1m\nL2 b 0 1m\nK1 L1 L2 1\nR1 a x 1k\nR2 b y 1k\nC1 x y 1n\nXU1 x 0 y 0 COUPLER\n"
    assert any("node 0 is one net" in text for text in notes(read(joined)))
    for apart in (joined.replace("b 0", "b s").replace("y 0", "y s"), joined.replace("C1 x y 1n", "R3 x y 1k")):
        assert not any("node 0 is one net" in text for text in notes(read(apart)))


def test_what_controlled_sources_sense_is_left_out() -> None:
    reading = read(
        "* t\nE1 a 0 b c 10\nF1 a 0 V1 2\nS1 a 0 b c SW\nR1 b c 1k\nR2 a 0 1k\nQ1 a b c s QN\n.model QN NPN\nU1 a b 0 X\n"
    )
    assert wired(reading)["b"] == {"R1.1", "Q1.B"}
    found = notes(reading)
    assert any(
        "of controlled sources and switches only the output is read, not what they sense: E1, F1, S1;" in text for text in found
    )
    assert any("the substrates of transistors are left out: Q1" in text for text in found)
    assert any("1 statement not understood and skipped: U1" in text for text in found)


def test_commands_to_the_simulator_are_no_parts() -> None:
    reading = read("* t\nR1 a b 1k\nR2 a b 1k\n.CONTROL\nrun\nplot v(a)\n+ x\n.ENDC\n.Tran 1u 1m\n.foo 1\n.END\nnonsense\n")
    assert [part.ref for part in reading.parts] == ["R1", "R2"]
    assert any("1 statement not understood and skipped: .foo" in text for text in notes(reading))


@pytest.mark.parametrize("encode", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "cp1252"])
def test_encodings(encode: str) -> None:
    text = "* stromversorgung\nC1 a b 2\u00b5\nC2 a b 1n\n"
    assert said(read(text.encode(encode)), "C1")["value"] == "2 uF"


def test_nothing_is_opened_and_nothing_worked_out(tmp_path: Path) -> None:
    (tmp_path / "secret.lib").write_text("R7 a b 1k\n", encoding="utf-8")
    text = f"* t\n.include {tmp_path}/secret.lib\n.lib /etc/passwd x\nR1 a b {{2*R}}\nR2 a b '1/0'\n.param R=__import__('os')\n"
    reading = read(text)
    assert [part.ref for part in reading.parts] == ["R1", "R2"]
    assert any("2 statements that would open other files, which is never done: .include, .lib" in text for text in notes(reading))
    assert any("expressions are not worked out: R1, R2" in text for text in notes(reading))
    design = assemble("a", [reading], Declaration())
    assert design.parts["R1"].text("value") == "{2*R}"


def test_a_file_without_a_star_is_known_by_its_lines() -> None:
    assert sniff.describe("my circuit\nR1 a b 1k\n.tran 1u 1m\n") == "a SPICE netlist"
    assert sniff.describe("my circuit\nR1 a b 1k\n") != "a SPICE netlist"


# --- what is refused -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("lines", "words"),
    [
        ("+ R1 a b 1k", ("a.cir:2", "continues nothing")),
        ("R1 a", ("a.cir:2", "too few words")),
        ("R1 a b 1k\nR1 a b 2k", ("a.cir:3", "listed twice (first in line 2)")),
        ("R1 a b 1k\nR2 a b 1k\n.ends", ("a.cir:4", "`.ends` without `.subckt`")),
        (".subckt A a b\nR1 a b 1k", ("a.cir:2", "the file ends inside the sub-circuit")),
        ("X1 a b c A\n.subckt A a b\nR1 a b 1k\n.ends", ("a.cir:2", "given other nodes", "3 nodes", "2 nodes, as in line 3")),
        ("X1 a b A\n.subckt A a b\nX1 a b A\n.ends", ("contains itself", "A -> A")),
        ("X1 a b A\n.subckt A a b\nX1 a b B\n.ends\n.subckt B a b\nX1 a b A\n.ends", ("contains itself",)),
        ("L1 a b 1m\nK1 L1 L9 1\nR1 a b 1k", ("a coupling names a coil that is not there", "l9")),
        ("L1 a b 1m\nK1 L1 1\nR1 a b 1k", ("a.cir:3", "fewer than two coils")),
        ("L1 a b 1m\nK1 L1 l1 1\nR1 a b 1k", ("fewer than two coils",)),
        ("L1 a b 1m\nL2 a b 1m\nK1 L1 L2 1\nk1 L1 L2 1", ("a.cir:5", "listed twice (first in line 4)")),
        (".subckt A a A\nR1 a a 1k\n.ends", ("a.cir:2", "names a node twice")),
        (".subckt", ("a.cir:2", "has no name")),
        (f"L1 a b 1m\nL2 a b 1m\nK{'1' * 2000} L1 L2 1", ("a name is too long",)),
        ("R1 a b 1k\n.if (x)\nR2 a b 2k\n.endif", ("parts under a condition",)),
        ("* nothing", ("holds no parts",)),
        ("R1 a b 1k", ()),
        ("R1 a b 1k\n.subckt A a\nR1 a a 1k\n.ends\n.subckt a a\nR1 a a 1k\n.ends", ("a sub-circuit is defined twice",)),
        (f"R1 {'a' * 2000} b 1k", ("a name is too long",)),
    ],
)
def test_faults_of_a_file(lines: str, words: tuple[str, ...]) -> None:
    if words:
        refused(f"* t\n{lines}\n", *words)
    else:
        refused(f"* t\n{lines}\n", "connects nothing")


def test_sub_circuits_deep_and_multiplied() -> None:
    def block(at: int, copies: int) -> str:
        return f".subckt C{at} a b\n" + "".join(f"X{n} a b C{at + 1}\n" for n in range(copies)) + ".ends\n"

    end = ".subckt C{} a b\nR1 a b 1k\n.ends\n"
    refused("* t\nX1 a b C0\n" + "".join(block(at, 1) for at in range(100)) + end.format(100), "nested too deep")
    refused("* t\nX1 a b C0\n" + "".join(block(at, 10) for at in range(9)) + end.format(9), "too large once")


RESISTORS = "".join(f"R{at} a b 1\n" for at in range(5_000))


def test_a_file_that_begins_with_a_sub_circuit_needs_a_title() -> None:
    text = ".subckt A a b\nR1 a b 1k\n.ends\nX1 a b A\n.tran 1u\n"
    refused(text, "a.cir:3", "`.ends` without `.subckt`", "The first line of a file is its title")


@pytest.mark.parametrize(
    "text",
    [
        "".join(f"L{at} a{at} b 1m\nL{at}b c{at} d 1m\nK{at} L{at} L{at}b 1\n" for at in range(5_000)),
        "".join(f"L{at} a b 1m\n" for at in range(5_000)) + "".join(f"K{at} L{at} L{at + 1} 1\n" for at in range(4_999)),
        "".join(f"XU{at} a b A\n" for at in range(5_000)) + f".subckt A a b\n{RESISTORS}.ends\n",
        "".join(f".subckt A{at} a b\n" for at in range(5_000)) + "R1 a b 1\n" + ".ends\n" * 5_000 + "R1 a b 1\nR2 a b 1\n",
        "R1 a b\n" + "+ 1\n" * 50_000 + "R2 a b 1\n",
        "V1 a 0 SINE(" + "0 " * 20_000 + "\nR2 a 0 1\n",
        "R1 a b " + "(" * 40_000 + "\nR2 a b 1\n",
        "R1 a b " + "{" * 40_000 + "\nR2 a b '1\n",
        ".include a.cir\n" * 20_000 + "R1 a b 1\nR2 a b 1\n",
    ],
    ids=["cores", "one core", "parts", "definitions", "continued", "sine", "parentheses", "braces", "includes"],
)  # fmt: skip
def test_much_of_one_thing_takes_linear_time(text: str) -> None:
    """Source: each takes well under a second; squared time would take minutes."""
    begun = time.process_time()
    with suppress(InputError):
        assert read("* t\n" + text).parts
    assert time.process_time() - begun < 10


def test_lines_and_words_without_end() -> None:
    refused("* t\nR1 a b " + "1" * (limits.TOKEN + 1), "a line is too long")
    rows = (" ".join(f"n{at}" for at in range(row, row + 500)) for row in range(0, 30_000, 500))
    refused("* t\nX1 " + "\n+ ".join(rows) + " A\n", "too many pins of one part")


def test_empty_files_and_files_of_another_form() -> None:
    refused("", "the file is empty")
    refused("(export (version E))", "not a SPICE netlist", "S-expression")


# --- every reader ----------------------------------------------------------------------------------------------------

_nodes = st.from_regex(r"[A-Za-z0-9_+#-]{1,6}", fullmatch=True).filter(lambda name: name[0] not in "+*")


@settings(max_examples=80, deadline=None)
@given(st.lists(st.tuples(st.sampled_from("RCL"), _nodes, _nodes, st.integers(1, 999)), min_size=2, max_size=8))
def test_what_is_written_is_read(rows: list[tuple[str, str, str, int]]) -> None:
    lines = [f"{letter}{at} {one} {two} {value}" for at, (letter, one, two, value) in enumerate(rows)]
    nets: dict[str, set[str]] = {}
    for at, (letter, one, two, _) in enumerate(rows):
        for pin, node in (("1", one), ("2", two)):
            nets.setdefault("0" if node.lower() == "gnd" else node.lower(), set()).add(f"{letter}{at}.{pin}")
    text = "\n".join(["* t", *lines, ".end", ""])
    if not any(len(pins) > 1 for pins in nets.values()):
        refused(text, "connects nothing")
        return
    reading = read(text)
    found = {net.name.lower(): {f"{node.ref}.{node.pin}" for node in net.nodes} for net in reading.nets}
    assert found == nets
    units = {"R": "\u03a9", "C": "F", "L": "H"}
    for at, (letter, _, _, value) in enumerate(rows):
        number, unit = str(said(reading, f"{letter}{at}")["value"]).split(" ")
        scale = {"u": -6, "m": -3, "k": 3, "M": 6}.get(unit[0], 0) if unit != units[letter] else 0
        assert Decimal(number).scaleb(scale) == value


_devices = st.lists(
    st.tuples(st.sampled_from(["R", "D", "Q"]), st.lists(st.sampled_from("pqmn0"), min_size=3, max_size=3)), max_size=3
)


def _flat(blocks: list[list[tuple[str, list[str]]]], at: int, path: str, given: dict[str, str]) -> dict[str, set[str]]:
    """Net -> pins, written out plainly: block `at` holds its parts and the block behind it twice, the second time turned."""
    nets: dict[str, set[str]] = {}
    inside = {node: given.get(node, "0" if node == "0" else f"{path}/{node}") for node in "pqmn0"}
    for number, (letter, nodes) in enumerate(blocks[at]):
        for pin, node in zip({"R": ("1", "2"), "D": ("A", "K"), "Q": ("C", "B", "E")}[letter], nodes, strict=False):
            nets.setdefault(inside[node], set()).add(f"{path}/{letter}{number}.{pin}")
    if at + 1 < len(blocks):
        for name, one, two in (("X1", "p", "m"), ("X2", "n", "q")):
            for net, pins in _flat(blocks, at + 1, f"{path}/{name}", {"p": inside[one], "q": inside[two]}).items():
                nets.setdefault(net, set()).update(pins)
    return nets


@settings(max_examples=80, deadline=None)
@given(st.lists(_devices, min_size=1, max_size=3), st.booleans())
def test_circuits_in_circuits_are_those_written_out(blocks: list[list[tuple[str, list[str]]]], before: bool) -> None:
    text = ""
    for at, parts in enumerate(blocks):
        rows = [
            f"{letter}{number} {' '.join(nodes[: 3 if letter == 'Q' else 2])} X\n" for number, (letter, nodes) in enumerate(parts)
        ]
        rows += [f"X1 p m B{at + 1}\n", f"x2 n q b{at + 1}\n"] if at + 1 < len(blocks) else []
        text += f".subckt B{at} p q\n{''.join(rows)}.ends B{at}\n"
    top = "X0 a 0 B0\nR1 a 0 1k\nR2 a 0 1k\n"
    reading = read("* t\n" + (top + text if before else text + top))
    meant = _flat(blocks, 0, "/X0", {"p": "a", "q": "0"})
    meant.setdefault("a", set()).update({"R1.1", "R2.1"})
    meant.setdefault("0", set()).update({"R1.2", "R2.2"})
    found = {net: {pin.replace("/x2", "/X2") for pin in pins} for net, pins in wired(reading).items()}
    assert {net.replace("/x2", "/X2"): pins for net, pins in found.items()} == meant


@settings(max_examples=300, deadline=None)
@given(st.data())
def test_damaged_copies_end_in_a_message_or_a_reading(data: st.DataObject) -> None:
    text = data.draw(st.sampled_from([FLYBACK, BLOCK, FIXTURE.read_text(encoding="utf-8")]))
    at = data.draw(st.integers(0, len(text) - 1))
    letter = data.draw(st.sampled_from(["", *"()+*.'{}=0XKL; $\n\t\r\0\x1a\u00e9"]))
    damaged = data.draw(st.sampled_from([text[:at], text[:at] + letter + text[at:], text[:at] + letter + text[at + 1 :]]))
    try:
        reading = read(damaged)
    except InputError as error:
        assert str(error).startswith("a.cir")
    else:
        assert {note.kind for note in reading.notes} <= set(NOTE_KINDS)
        assemble("a", [reading], Declaration())


@settings(max_examples=100, deadline=None)
@given(st.binary(max_size=400))
def test_rubbish_behind_a_good_head_is_read_or_refused(rubbish: bytes) -> None:
    with suppress(InputError):
        read(FLYBACK.partition(".end")[0].encode() + rubbish)


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample boards are not beside this checkout")
@pytest.mark.parametrize("name", ["spice-utf16.net", "spice-cp1252.net"])
def test_samples(name: str) -> None:
    reading = read(read_file(SAMPLES / "formats" / name).data)
    assert len(reading.parts) > 3
    assert len(reading.notes) > 1
