"""The two legacy netlists: the parenthesised list and the netlist of lines. Source of the forms: formats reference, 1.8."""

from __future__ import annotations

import re
import time
from contextlib import suppress
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
from checker.model.fact import Source
from checker.model.reading import NOTE_KINDS, Reading
from checker.readers import legacy_lines, legacy_list, sniff

FIXTURES = Path(__file__).parents[1] / "fixtures" / "readers" / "legacy"
SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"
BOARD = """# Editor Netlist Version 1.1 created  Sun 25 Mar 2012 03:44:49 PM UTC
(
 ( /4EDEDC07 SM0603 C1 10uF {Lib=C}
  ( 1 /5V_IN )
  ( 2 /GND_IN )
 )
 ( /4EDEDC47/4EDF R1206 R1 4k7 1% {Lib=R}
  ( 1 N-000015 )
  ( 2 /GND_IN )
 )
 ( /4EDF0001 $noname U1 LT 1763 {Lib=LDO REG}
  ( 1 /5V_IN )
  ( 2 N-000015 )
  ( 3 ? )
  ( 4 ? )
 )
)
*
{ Allowed footprints by component:
$component C1
 SM*
 R_{n}
$endlist
}
"""
LINES = "GND\tR1-2 USB-UART1-3 BR1-- \nunnamed_net7\tR1-1 BR1-+ \n+5V out\tUSB-UART1-1 C1-1\n"


def parse(text: str | bytes) -> Reading:
    return legacy_list.read(Blob("a.net", text if isinstance(text, bytes) else text.encode()))


def lines(text: str | bytes) -> Reading:
    return legacy_lines.read(Blob("a.net", text if isinstance(text, bytes) else text.encode()))


def listed(*parts: str) -> Reading:
    """A list of parts as `FOOTPRINT R1 VALUE : 1 A, 2 B`."""
    text = "(\n"
    for part in parts:
        head, _, pins = part.partition(" : ")
        text += f"( /4EDE {head}\n" + "".join(f"( {pin} )\n" for pin in pins.split(", ") if pin) + ")\n"
    return parse(text + ")\n*\n")


def wired(reading: Reading) -> dict[str, list[str]]:
    return {net.name: [f"{node.ref}.{node.pin}" for node in net.nodes] for net in reading.nets}


def said(reading: Reading, ref: str) -> dict[str, object]:
    (part,) = [part for part in reading.parts if part.ref == ref]
    return {fact.attribute: fact.value for fact in part.facts}


# --- the parenthesised list ------------------------------------------------------------------------------------------


def test_parts_values_pins_and_nets() -> None:
    reading = parse(BOARD)
    assert wired(reading) == {
        "/5V_IN": ["C1.1", "U1.1"], "/GND_IN": ["C1.2", "R1.2"], "N-000015": ["R1.1", "U1.2"],
    }  # fmt: skip
    assert said(reading, "C1") == {"value": "10uF", "footprint": "SM0603", "symbol": "C"}
    assert said(reading, "R1") == {"value": "4k7 1%", "footprint": "R1206", "symbol": "R"}
    assert said(reading, "U1") == {"value": "LT 1763", "symbol": "LDO REG"}
    assert [pin.number for pin in reading.parts[2].pins] == ["1", "2", "3", "4"]  # `?` is no net, and joins nothing
    assert (reading.role, reading.form, reading.notes) == ("netlist", "legacy parenthesised netlist", ())


def test_every_part_and_pin_knows_its_line() -> None:
    reading = parse(BOARD)
    assert [part.source for part in reading.parts] == [Source("a.net", line) for line in (3, 7, 11)]
    assert [node.source.line for node in reading.nets[0].nodes] == [4, 12]
    assert {fact.source.line for fact in reading.parts[1].facts} == {7}


def test_a_value_may_say_that_the_part_is_left_out() -> None:
    assert said(listed("SM0603 R1 DNP : 1 A", "SM0603 R2 1k : 1 A"), "R1") == {
        "value": "DNP",
        "footprint": "SM0603",
        "fitted": False,
    }


def test_parentheses_inside_a_word_belong_to_it() -> None:
    reading = listed("SM(0603) R1 1k : 1 Net-(R1-Pad1), 2 A", "SM0603 R2 1k(1%) : 1 Net-(R1-Pad1), 2 A")
    assert list(wired(reading)) == ["Net-(R1-Pad1)", "A"]
    assert said(reading, "R2")["value"] == "1k(1%)"


def test_units_of_one_part_are_one_and_two_parts_of_one_reference_are_two() -> None:
    units = listed("DIP14 U1 LM324 : 1 A, 4 V", "DIP14 U1 LM324 : 5 B, 4 V", "SM R1 1k : 1 A, 2 B", "SM R2 1k : 1 V, 2 B")
    assert [part.ref for part in units.parts] == ["U1", "R1", "R2"]
    assert wired(units)["B"] == ["U1.5", "R1.2", "R2.2"]
    twice = listed("DB9 J2 IN : 1 A, 2 B", "USB J2 OUT : 1 C, 2 B", "SM R1 1k : 1 A, 2 C")
    assert wired(twice) == {"A": ["J2.1", "R1.1"], "B": ["J2.2", "J2 (2).2"], "C": ["J2 (2).1", "R1.2"]}
    (note,) = twice.notes
    assert (note.kind, note.parts, [source.line for source in note.sources]) == ("duplicate-reference", ("J2", "J2 (2)"), [2, 6])


def test_the_other_header_and_line_ends() -> None:
    body = BOARD.split("\n", 1)[1]
    plain = parse(BOARD)
    for text in (f"( {{ made today }}\n{body[2:]}", body, "\ufeff" + BOARD.replace("\n", "\r\n"), BOARD.replace("\n", "\r")):
        other = parse(text)
        assert [(part.ref, said(other, part.ref)) for part in other.parts] == [(p.ref, said(plain, p.ref)) for p in plain.parts]
        assert wired(other) == wired(plain)


@pytest.mark.parametrize(
    ("old", "new", "line", "message"),
    [
        ("( 1 /5V_IN )", "( 1 )", 4, "a pin has not two words; found 1"),
        ("( 1 /5V_IN )", "( 1 /5V IN )", 4, "a pin has not two words"),
        ("( 1 /5V_IN )", "(1 /5V_IN )", 4, "a parenthesis does not stand alone"),
        ("( 1 /5V_IN )", "( 1 /5V_IN)", 4, "a parenthesis does not stand alone"),
        ("( 1 /5V_IN )", "( 1 ( /5V_IN )", 4, "nested too deep"),
        ("SM0603 C1", "SM 0603 C1", 3, "the reference of a part cannot be told"),
        ("SM0603 C1 10uF {Lib=C}", "SM0603 C1", 3, "the reference of a part cannot be told"),
        (" ( /4EDEDC47/4EDF", " ) ( /4EDEDC47/4EDF", 7, "text after the end of the list"),
        ("  ( 2 /GND_IN )\n )\n ( /4EDF0001", "  ( 2 /GND_IN )\n stray )\n ( /4EDF0001", 10, "text behind the pins"),
        ("\n}\n", "\n", 19, "the file ends inside the braces"),
    ],
)
def test_what_cannot_be_told_is_refused_with_its_line(old: str, new: str, line: int, message: str) -> None:
    with pytest.raises(InputError, match=rf"a\.net:{line}: .*{message}"):
        parse(BOARD.replace(old, new, 1))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "the file is empty"),
        ("(export (version D))", "not a legacy parenthesised netlist; found an S-expression netlist"),
        ("# Editor Netlist Version 1.1\n", "the file ends inside the parentheses"),
        ("# Editor Netlist Version 1.1\n(\n)\n*\n", "holds no parts"),
        (BOARD.replace("/GND_IN", "?").replace("N-000015", "?").replace("1 /5V_IN", "1 ?"), "connects nothing"),
        (BOARD[: BOARD.index("  ( 3 ?")], "the file ends inside the parentheses that open here"),
        (BOARD.replace("4k7", "\0"), "NUL"),
        (BOARD.replace("4k7", "x" * limits.TOKEN), "a line is too long"),
        (BOARD.replace(" R1 ", f" {'R' * 2000} "), "the reference of a part is too long"),
        (BOARD.replace("N-000015", "N" * 2000), "the name of a pin or net is too long"),
    ],
)
def test_lists_that_are_refused(text: str, message: str) -> None:
    with pytest.raises(InputError, match=message):
        parse(text)


@pytest.mark.parametrize("name", ["PARTS", "NETS", "PINS_PER_NET", "PINS_PER_PART"])
def test_too_many_parts_nets_or_pins_are_refused(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, name, 1)
    for read, text in ((parse, BOARD), (lines, LINES)):
        with pytest.raises(InputError, match="too many"):
            read(text)


# --- the netlist of lines --------------------------------------------------------------------------------------------


def test_nets_and_pins_of_lines() -> None:
    reading = lines(LINES)
    assert wired(reading) == {
        "GND": ["R1.2", "USB-UART1.3", "BR1.-"], "unnamed_net7": ["R1.1", "BR1.+"], "+5V out": ["USB-UART1.1", "C1.1"],
    }  # fmt: skip
    assert [(part.ref, part.source.line, part.facts) for part in reading.parts] == [
        ("R1", 1, ()), ("USB-UART1", 1, ()), ("BR1", 1, ()), ("C1", 3, ()),
    ]  # fmt: skip
    assert reading.form == "netlist of lines"
    assert [note.text for note in reading.notes] == [
        "a netlist of lines names nets and pins only: values, types and bodies must come from a bill of materials"
    ]
    assert wired(lines("A R1-1 R2-1\r\nB  R1-2  R2-2\r\n")) == {"A": ["R1.1", "R2.1"], "B": ["R1.2", "R2.2"]}


def test_a_net_on_two_lines_is_one_net() -> None:
    assert wired(lines("A\tR1-1 R2-1\nB\tR1-2 R2-2\nA\tR3-1\n"))["A"] == ["R1.1", "R2.1", "R3.1"]


def test_automatic_names_of_both_forms_are_known() -> None:
    design = assemble("a", [lines(LINES)], Declaration())
    assert [name for name, net in design.nets.items() if net.automatic] == ["unnamed_net7"]
    design = assemble("a", [parse(BOARD)], Declaration())
    assert [name for name, net in design.nets.items() if net.automatic] == ["N-000015"]


def test_a_pin_whose_name_has_a_hyphen_is_doubted() -> None:
    (_, note) = lines("A\tU1-OUT-A R1-1\nB\tU1-3 R1-2\n").notes
    assert (note.kind, note.parts) == ("skipped", ("U1-OUT",))
    assert "U1-OUT or a pin of U1" in note.text


ROW = "N{0}\tR{0}-1 R{0}-2\n"
MANY = "".join(map(ROW.format, range(30)))


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("NET", "a net has no pins"),
        ("\tR1-1", "a net has no name"),
        ("  R1-1 R2-2", "a net has no name"),
        ("NET\tR1 R2-2", "this is no pin of a part; found R1"),
        ("NET\tR1- R2-2", "this is no pin of a part; found R1-"),
        ("NET\t-1", "this is no pin of a part; found -1"),
        (f"{'N' * 2000}\tR1-1", "the name of a net is too long"),
        (f"N\t{'R' * 2000}-1", "the reference of a part is too long"),
    ],
)
def test_lines_that_are_no_net_are_refused_with_their_number(line: str, message: str) -> None:
    with pytest.raises(InputError, match=rf"a\.net:31: {message}"):
        lines(MANY + line + "\n")


@pytest.mark.parametrize(
    "text",
    [
        "", "just a line of text\n", "supply: mains-230V class-II\n", "Reference,Value\nR1,1k-5\n", "* a title\nR1 a-1 b-2 10k\n",
        "title\nR1 a-1 b-2 10k\nR2 a-1 b-2 10k\n", "P  UNITS CUST 0\n327A R1-1 R2-1\n", "<export>", "(export (version D))",
        "A\tR1-1\nB\tR2-1\n",
    ],
)  # fmt: skip
def test_other_texts_are_not_claimed(text: str) -> None:
    assert not legacy_lines.claims(sniff.head(Blob("a", text.encode())))
    with pytest.raises(InputError, match="empty" if not text else "not a netlist of lines"):
        lines(text)


def test_one_long_line_is_claimed() -> None:
    text = "GND\t" + " ".join(f"R{number}-1" for number in range(2000)) + "\n"
    assert legacy_lines.claims(sniff.head(Blob("a", text.encode())))
    assert len(lines(text).parts) == 2000


# --- both ------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "reader", "what"), [(BOARD, legacy_list, "legacy parenthesised"), (LINES, legacy_lines, "of lines")]
)
def test_the_door_finds_the_reader(text: str, reader: object, what: str) -> None:
    blob = Blob("board.net", text.encode())
    assert plugins.reader_for(blob, "netlist") is reader.READER  # type: ignore[attr-defined]
    assert what in sniff.describe(sniff.head(blob))
    with pytest.raises(InputError, match=what):
        plugins.reader_for(blob, "bom")


words = st.text("AB12_+-./#$~{}µ", min_size=1, max_size=8).filter(lambda word: word not in ("~", "?", "-", "$noname"))
values = st.text("AB12_+-./µ ()%", min_size=1, max_size=12).filter(
    lambda text: text.strip() and all(word.count("(") == word.count(")") for word in text.split()) and "(" not in text.split()
)
parts = st.dictionaries(
    words.map(lambda word: "R" + word),
    st.tuples(words, values, st.dictionaries(words, st.one_of(st.just("?"), words), min_size=1, max_size=4)),
    min_size=1, max_size=6,
)  # fmt: skip


@settings(max_examples=150, deadline=None)
@given(parts)
def test_a_written_list_is_read_back(drawn: dict[str, tuple[str, str, dict[str, str]]]) -> None:
    meant: dict[str, set[str]] = {}
    text = "# Editor Netlist Version 1.1 created today\n(\n"
    for ref, (footprint, value, pins) in drawn.items():
        text += f" ( /4EDE {footprint} {ref} {value}\n" + "".join(f"  ( {pin} {net} )\n" for pin, net in pins.items()) + " )\n"
        for pin, net in pins.items():
            if net != "?":
                meant.setdefault(net, set()).add(f"{ref}.{pin}")
    text += ")\n*\n"
    if not any(len(pins) > 1 for pins in meant.values()):
        with pytest.raises(InputError, match="connects nothing"):
            parse(text)
        return
    reading = parse(text)
    assert {net: set(pins) for net, pins in wired(reading).items()} == meant
    assert {part.ref: {pin.number for pin in part.pins} for part in reading.parts} == {ref: set(of[2]) for ref, of in drawn.items()}
    for ref, (footprint, value, _) in drawn.items():
        facts = said(reading, ref)
        assert facts["footprint"] == footprint
        assert facts.get("value", "") == re.sub(" +", " ", value).strip().removeprefix("-" if value.strip() == "-" else "")


@settings(max_examples=300, deadline=None)
@given(st.data())
def test_damaged_copies_end_in_a_message_or_a_reading(data: st.DataObject) -> None:
    text, read = data.draw(st.sampled_from([(BOARD, parse), (LINES, lines)]))
    at = data.draw(st.integers(0, len(text) - 1))
    letter = data.draw(st.sampled_from(["", "X", " ", "-", "(", ")", "{", "}", "\n", "\r", "\t", "\0", "é", "\x1a", "*", "?"]))
    damaged = data.draw(st.sampled_from([text[:at], text[:at] + letter + text[at:], text[:at] + letter + text[at + 1 :]]))
    with suppress(InputError):
        assert {note.kind for note in read(damaged).notes} <= set(NOTE_KINDS)


@settings(max_examples=200, deadline=None)
@given(st.binary(max_size=400))
def test_rubbish_behind_a_good_head_is_read_or_refused(rubbish: bytes) -> None:
    for read, head in ((parse, BOARD), (lines, MANY)):
        with suppress(InputError):
            read(head.encode() + rubbish)


@pytest.mark.parametrize(
    "text", ["( " * 200_000, "( /" * 100_000, "# " * 100_000, "A-" * 100_000, "A R1-1 " * 50_000, "#\n" * 100_000]
)
def test_long_rubbish_is_answered_at_once(text: str) -> None:
    for read in (parse, lines):
        with pytest.raises(InputError):
            read(text)


def test_the_real_board() -> None:
    """Source: the file itself, a plain look at its lines; the isolators by hand from their type."""
    path = SAMPLES / "digital-isolator" / "board-legacy.net"
    if not path.is_file():
        pytest.skip("the folder of samples is absent")
    rows = path.read_text().split("*\n")[0].splitlines()
    heads = [row.split() for row in rows if row.startswith(" ( /")]
    pins = [row.split() for row in rows if row.startswith("  ( ")]
    reading = legacy_list.read(read_file(path))
    assert [(part.ref, said(reading, part.ref)["value"]) for part in reading.parts] == [(head[3], head[4]) for head in heads]
    assert sum(len(net.nodes) for net in reading.nets) == sum(pin[2] != "?" for pin in pins)
    assert sum(len(part.pins) for part in reading.parts) == len(pins)
    assert {net.name for net in reading.nets} == {pin[2] for pin in pins} - {"?"}
    report = verify(path)
    assert {part.part for barrier in report.barriers for part in barrier.parts} == {"U1", "U2", "U3", "U4"}


def test_one_supply_in_both_forms() -> None:
    """Source: the files themselves, by hand; without values the type of the converter is the open question."""
    whole, bare = (FIXTURES / f"supply-{form}.net" for form in ("list", "lines"))
    assert wired(legacy_list.read(read_file(whole))) == wired(legacy_lines.read(read_file(bare)))
    report = verify(whole)
    assert [(barrier.between, [part.part for part in barrier.parts]) for barrier in report.barriers] == [
        (["mains", "+12V"], ["U1"])
    ]
    assert {part.ref: part.kind for part in report.parts} == {
        "F1": "fuse", "J1": "inlet", "J2": "connector", "U1": "isolated-module",
    }  # fmt: skip
    asked = [verdict for verdict in verify(bare).verdicts if verdict.rule == "barrier-insulation"]
    assert [(verdict.outcome, verdict.parts) for verdict in asked] == [("open", ["U1"])]


def test_many_parts_of_one_reference_take_linear_time() -> None:
    """Source: half as many take about half as long; the limit is wide, since machines differ."""
    same = "".join(f" ( /4EDE SM R1 1k\n  ( 1 A )\n  ( 2 N{at} )\n )\n" for at in range(8_000))
    units = "".join(f" ( /4EDE SM U1 LM\n  ( {at} A )\n )\n" for at in range(8_000))
    begun = time.process_time()
    assert len(parse(f"(\n{same})\n*\n").parts) == 8_000
    assert len(parse(f"(\n{units})\n*\n").parts) == 1
    assert time.process_time() - begun < 20
