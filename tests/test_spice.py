"""SPICE netlists as a limited carrier. Source of the forms: formats reference, 6."""

from __future__ import annotations

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
from checker.model.declaration import Declaration
from checker.model.reading import Reading
from checker.readers import sniff, spice
from checker.readers.spice_figures import in_units

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


@settings(max_examples=120, deadline=None)
@given(st.sampled_from([FLYBACK, BLOCK]), st.integers(0, 4_000), st.sampled_from(list("()+*.'{=0\n")), st.booleans())
def test_damaged_copies_end_in_a_message_or_read(text: str, at: int, letter: str, cut: bool) -> None:
    at %= len(text)
    broken = text[:at] if cut else text[:at] + letter + text[at + 1 :]
    try:
        assert read(broken).parts
    except InputError as error:
        assert str(error).startswith("a.cir")


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample boards are not beside this checkout")
@pytest.mark.parametrize("name", ["spice-utf16.net", "spice-cp1252.net"])
def test_samples(name: str) -> None:
    reading = read(read_file(SAMPLES / "formats" / name).data)
    assert len(reading.parts) > 3
    assert len(reading.notes) > 1
