"""The IPC-D-356 reader: every kind of record, the names the form cuts off, files that are damaged or hostile."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits, pipeline, plugins, rulesets, testing
from checker.api import verify
from checker.assemble.bom_match import CUT
from checker.assemble.join import assemble
from checker.errors import InputError
from checker.files import Blob
from checker.files import read as read_file
from checker.model.circuit import Design
from checker.model.declaration import Declaration
from checker.model.fact import Fact, Source, Trust
from checker.model.reading import NOTE_KINDS, Note, PadRecord, Reading, Row
from checker.readers import ipcd356, sniff
from checker.readers.ipcd356_records import CODES

FIXTURE = Path(__file__).resolve().parents[1] / "fixtures" / "readers" / "ipcd356" / "supply.ipc"
SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"
HEAD = "P  UNITS CUST 0\n"
END = "999\n"
PAIR = ("A R1 1", "A R2 1")


def land(
    net: str = "", ref: str = "", pin: str = "", at: tuple[int, int] = (0, 0), size: tuple[int, int] = (500, 400),
    code: str = "327", access: str = "01", hole: str = "      ", turned: str = "R000", mid: bool = False,
) -> str:  # fmt: skip
    """One record, columns as the form has them."""
    hyphen = "-" if pin else " "
    names = f"{code}{net[:14]:<14}   {ref[:6]:<6}{hyphen}{pin[:4]:<4}{'M' if mid else ' '}"
    return f"{names}{hole}A{access}X{at[0]:+07d}Y{at[1]:+07d}X{size[0]:04d}Y{size[1]:04d}{turned} S0"


def plain(*said: str) -> list[str]:
    """Records from `NET REF PIN`; `-` for no net."""
    return [land("" if net == "-" else net, ref, pin) for net, ref, pin in (text.split() for text in said)]


def parse(text: str | bytes) -> Reading:
    return ipcd356.read(Blob("a.ipc", text if isinstance(text, bytes) else text.encode()))


def file(*lines: str, head: str = HEAD, end: str = END) -> Reading:
    return parse(head + "".join(f"{line}\n" for line in lines) + end)


def wired(reading: Reading) -> dict[str, list[str]]:
    return {net.name: [f"{node.ref}.{node.pin}" for node in net.nodes] for net in reading.nets}


def kinds(reading: Reading) -> list[str]:
    return [note.kind for note in reading.notes]


def supply() -> Reading:
    return ipcd356.read(read_file(FIXTURE, shown="supply.ipc"))


# --- records ---------------------------------------------------------------------------------------------------------


def test_nets_parts_and_pins_of_the_fixture() -> None:
    reading = supply()
    assert wired(reading) == {
        "AC_L": ["J1.1", "R1.1"],
        "AC_N": ["J1.2", "U1.2"],
        "LED": ["R1.2", "U1.1"],
        "SGND": ["U1.3", "R2.2", "J2.1"],
        "SECONDARY_FEEDBACK_ANODE": ["U1.4", "R2.1", "J2.2"],
    }
    assert [(part.ref, [pin.number for pin in part.pins]) for part in reading.parts] == [
        ("J1", ["1", "2"]), ("R1", ["1", "2"]), ("U1", ["1", "2", "3", "4"]), ("R2", ["1", "2"]), ("J2", ["1", "2", "3"]),
    ]  # fmt: skip
    assert all(part.facts == () for part in reading.parts)
    assert (reading.role, reading.form) == ("netlist", "IPC-D-356 netlist")


def test_every_part_net_node_and_pad_knows_its_line() -> None:
    """Source: the fixture searched line by line."""
    lines = FIXTURE.read_text().splitlines()
    reading = supply()
    for part in reading.parts:
        assert lines[part.source.line - 1][20:26].strip() == part.ref
    for net in reading.nets:
        for node in net.nodes:
            assert (lines[node.source.line - 1][20:26].strip(), lines[node.source.line - 1][27:31].strip()) == (node.ref, node.pin)
    assert [pad.source.line for pad in reading.pads] == [n for n, line in enumerate(lines, 1) if line[:3] in CODES | {"017"}]


def test_pads_in_millimetres_and_degrees() -> None:
    pads = {(pad.ref, pad.pin): pad for pad in supply().pads}
    assert pads["J1", "1"] == PadRecord(
        "J1", "1", "AC_L", 0.0, 0.0, 1.99898, 1.99898, 0.0, 1.00076, "both", Source("supply.ipc", 10)
    )
    assert (pads["J1", "2"].width, pads["J1", "2"].height) == (1.99898, 1.99898)  # no height: round
    assert (pads["R1", "1"].side, pads["R1", "1"].turned, pads["R1", "1"].y) == ("top", 90.0, 12.7)
    assert (pads["R2", "1"].side, pads["R2", "1"].turned, pads["R2", "1"].label) == ("bottom", 45.0, "SECONDARY_FEEDBACK_ANODE")
    assert (pads["J1", ""].drill, pads["J1", ""].width, pads["J1", ""].label) == (2.99974, 0.0, "")
    assert (pads["", ""].label, pads["", ""].drill) == ("LED", 0.29972)  # a via, mid-point of its net
    assert pads["J2", "3"].label == ""  # not connected
    assert pads["U1", "1"].y == -2.54


def test_a_continuation_is_more_copper_of_the_same_pin() -> None:
    found = [(pad.x, pad.y) for pad in supply().pads if (pad.ref, pad.pin) == ("J2", "1")]
    assert found == [(50.8, 0.0), (50.8, 1.27)]


def test_records_that_are_not_of_nets_or_pads_are_counted() -> None:
    (note,) = supply().notes
    assert (note.kind, note.text) == (
        "skipped", "3 lines that do not bear on nets and pads, or were not understood, were skipped: 378, 078, 379",
    )  # fmt: skip


@pytest.mark.parametrize(
    ("said", "unit", "degrees"),
    [("CUST 0", 0.00254, 1), ("CUST", 0.00254, 1), ("cust   1", 0.001, 1), ("SI", 0.001, 1), ("CUST 2", 0.00254, 57.29578)],
)
def test_units(said: str, unit: float, degrees: float) -> None:
    reading = file(*plain(*PAIR), land("A", "R3", "1", (1000, -2000), (300, 100), turned="R002"), head=f"P  UNITS {said}\n")
    pad = reading.pads[-1]
    assert (pad.x, pad.y, pad.width, pad.height) == pytest.approx((1000 * unit, -2000 * unit, 300 * unit, 100 * unit))
    assert pad.turned == pytest.approx(2 * degrees)


def test_without_units_nothing_is_read() -> None:
    with pytest.raises(InputError, match=r"a\.ipc:2: the file does not say its units.*Add the line `P  UNITS CUST 0`"):
        file(*plain(*PAIR), head="P  JOB X\n")
    with pytest.raises(InputError, match="the units are not known"):
        file(*plain(*PAIR), head="P  UNITS FURLONG\n")
    with pytest.raises(InputError, match="the units change"):
        file(*plain(*PAIR), "P  UNITS CUST 1", *plain("A R3 1"))


def test_blank_padded_figures_and_no_angle() -> None:
    """As an old layout program writes them: no signs, blanks instead of zeros, angle in two digits."""
    reading = file("327VCC              C1    --          A01X  13950Y    -23X1535Y 630R 90", *plain("VCC C1 +"))
    pad = reading.pads[0]
    assert wired(reading) == {"VCC": ["C1.-", "C1.+"]}
    assert (pad.x, pad.y, pad.turned) == (35.433, -0.05842, 90.0)
    bare = file("327VCC              C1    --          A01X  13950Y    -23X1535", *plain("VCC C1 +"))
    assert (bare.pads[0].width, bare.pads[0].height, bare.pads[0].turned) == (3.8989, 3.8989, 0.0)
    assert not bare.notes


@pytest.mark.parametrize(("access", "sides"), [("00", "both"), ("01", "top"), ("10", "bottom"), ("  ", "both")])
def test_sides(access: str, sides: str) -> None:
    reading = file(*plain(*PAIR), land("A", "R3", "1", access="10"), land("A", "R4", "1", access=access))
    assert reading.pads[-1].side == sides


def test_a_board_with_lands_on_top_only_or_with_holes_only() -> None:
    for access, side in (("01", "top"), ("00", "both")):
        reading = file(land("A", "R1", "1", access=access), land("A", "R2", "1", access="00"))
        assert [pad.side for pad in reading.pads] == [side, "both"]


def test_copper_inside_the_board_is_on_its_net_and_no_pad() -> None:
    reading = file(*plain(*PAIR), land("A", "R3", "1", access="04"), land("A", "VIA", "", access="02", code="307"))
    assert wired(reading)["A"] == ["R1.1", "R2.1", "R3.1"]
    assert [pad.ref for pad in reading.pads] == ["R1", "R2", "R3"]
    assert kinds(reading) == ["skipped"]


def test_line_ends_trailing_blanks_and_a_byte_order_mark_do_not_matter() -> None:
    text = FIXTURE.read_text()
    for other in (text.replace("\n", "   \r\n"), text.replace("\n", "\r"), "\ufeff" + text + "\x1a", text + "\n\n"):
        reading = ipcd356.read(Blob("supply.ipc", other.encode()))
        assert (reading.parts, reading.nets, reading.pads, reading.notes) == (
            supply().parts, supply().nets, supply().pads, supply().notes,
        )  # fmt: skip


def test_a_name_that_is_not_ascii_counts_as_characters_or_as_bytes() -> None:
    by_character = land("µNET", "R1", "1", (100, 200))
    by_byte = "327" + "µNET".ljust(13) + by_character[17:]
    for first in (by_character, by_byte):
        reading = file(first, land("µNET", "R2", "1"))
        assert wired(reading) == {"µNET": ["R1.1", "R2.1"]}
        assert reading.pads[0].x == 0.254


def test_images_after_the_first_are_left_out_with_a_note() -> None:
    reading = file("P  IMAGE PRIMARY", *plain(*PAIR), "P  IMAGE PANEL", *plain("B R1 1", "B R2 1"))
    assert wired(reading) == {"A": ["R1.1", "R2.1"]}
    assert kinds(reading) == ["skipped"]


# --- names that are cut ----------------------------------------------------------------------------------------------

LONG = "A_NAME_OF_A_NET_THAT_IS_LONG"


@pytest.mark.parametrize(
    ("declared", "used"),
    [(f"P  NNAME1 {LONG}", "NNAME1"), (f"P  NNAMEm0001 {LONG}", "m0001"), (f"C  NNAMEm0001 {LONG}", "m0001")],
)
def test_aliases_of_net_names(declared: str, used: str) -> None:
    for lines in ((declared, *plain(f"{used} R1 1", f"{used} R2 1")), (*plain(f"{used} R1 1", f"{used} R2 1"), declared)):
        assert wired(file(*lines)) == {LONG: ["R1.1", "R2.1"]}
        assert not file(*lines).notes


def test_two_names_cut_alike_are_told_apart_by_their_aliases() -> None:
    reading = file(
        "P  NNAME1 SAME_FOURTEEN_CHARACTERS_A", "P  NNAME2 SAME_FOURTEEN_CHARACTERS_B",
        *plain("NNAME1 R1 1", "NNAME1 R2 1", "NNAME2 R1 2", "NNAME2 R2 2"),
    )  # fmt: skip
    assert list(wired(reading)) == ["SAME_FOURTEEN_CHARACTERS_A", "SAME_FOURTEEN_CHARACTERS_B"]


def test_a_net_called_like_the_number_of_an_alias_keeps_its_name() -> None:
    reading = file(f"P  NNAME1 {LONG}", "P  NNAMEx OTHER", *plain("NNAME1 R1 1", "NNAME1 R2 1", "1 R1 2", "1 R2 2", "x R3 1"))
    assert list(wired(reading)) == [LONG, "1", "x"]
    assert list(wired(file(f"P  NNAME1 {LONG}", *plain("1 R1 2", "1 R2 2")))) == ["1"]


def test_aliases_are_resolved_once_and_may_not_contradict() -> None:
    loop = file("P  NNAMEa b", "P  NNAMEb a", *plain("a R1 1", "a R2 1", "b R1 2", "b R2 2"))
    assert wired(loop) == {"b": ["R1.1", "R2.1"], "a": ["R1.2", "R2.2"]}
    with pytest.raises(InputError, match=r"a\.ipc:3: the net alias NNAMEa has another name than in line 2"):
        file("P  NNAMEa ONE", "P  NNAMEa TWO", *plain(*PAIR))
    unknown = file(*plain("NNAME7 R1 1", "NNAME7 R2 1"))
    assert (kinds(unknown), list(wired(unknown))) == (["skipped"], ["NNAME7"])


def test_a_name_as_long_as_the_form_allows_may_be_cut() -> None:
    reading = file(*plain("FOURTEEN_CHARS R1 1", "FOURTEEN_CHARS R2 1"))
    (note,) = reading.notes
    assert (note.kind, note.nets) == ("nets-merged", ("FOURTEEN_CHARS",))
    for whole in ("THIRTEEN_CHAR", "NET-(J1-PIN_1)"):
        assert not file(*plain(f"{whole} R1 1", f"{whole} R2 1")).notes
    assert file(*plain("NET-(J10-PIN_1 R1 1", "NET-(J10-PIN_1 R2 1")).notes
    assert file(*plain("TED-(U1-PAD15) R1 1", "TED-(U1-PAD15) R2 1")).notes


def test_parts_whose_references_are_cut_alike_are_told_apart_part_by_part() -> None:
    """RELAY_1 and RELAY_2 are both RELAY_; joining their pins would short A, B and C."""
    reading = file(*plain("A RELAY_ 1", "B RELAY_ 2", "A RELAY_ 1", "C RELAY_ 2", "A R1 1", "B R1 2", "C R2 1", "B R2 2"))
    assert wired(reading) == {
        "A": ["RELAY_.1", "RELAY_ (2).1", "R1.1"], "B": ["RELAY_.2", "R1.2", "R2.2"], "C": ["RELAY_ (2).2", "R2.1"],
    }  # fmt: skip
    assert kinds(reading) == ["pin-on-two-nets"]
    apart = file(*plain("A RELAY_ 1", "B RELAY_ 2", "A R1 1", "B R1 2", "A RELAY_ 1", "C RELAY_ 2", "C R2 1", "B R2 2"))
    assert wired(apart)["C"] == ["RELAY_ (2).2", "R2.1"]
    test_points = file(*plain("A TP_MAI 1", "B TP_MAI 1", "A R1 1", "B R1 2"))
    assert wired(test_points) == {"A": ["TP_MAI.1", "R1.1"], "B": ["TP_MAI (2).1", "R1.2"]}


def test_one_reference_on_two_parts_is_a_duplicate() -> None:
    reading = file(*plain("A J2 1", "B J2 2", "A R1 1", "B R1 2", "C J2 1", "B J2 2", "C R3 1", "A R3 2"))
    assert wired(reading)["C"] == ["J2 (2).1", "R3.1"]
    assert kinds(reading) == ["duplicate-reference"]


def test_a_file_sorted_by_net_cannot_tell_them_apart() -> None:
    lines = plain(
        "A RELAY_ 1", "A R1 1", "B RELAY_ 1", "B R1 2", "A R2 1", "C R2 2", "C RELAY_ 2", "C R3 1", "B R3 2", "D RELAY_ 2", "D R3 3"
    )
    with pytest.raises(InputError, match=r"a\.ipc:2: pin 1 of RELAY_ stands on several nets.*shorter ones"):
        file(*lines)


def test_pins_that_are_cut_alike_and_lands_without_a_number() -> None:
    reading = file(*plain("A X1 PAD_", "B X1 PAD_", "A R1 1", "B R1 2"))
    assert wired(reading) == {"A": ["X1.PAD_", "R1.1"], "B": ["X1.PAD_ (2)", "R1.2"]}
    bare = file(land("A", "X1"), *plain("A R1 1", "B R1 2"))
    assert wired(bare)["A"] == ["X1.?", "R1.1"]


def test_a_pin_on_a_net_of_its_own_beside_another_is_one_pin() -> None:
    """Programs give each land of an unconnected pin a net: U2.12 on two nets that lead nowhere."""
    reading = file(*plain("NC-PAD12 U2 12", "NC-PAD12_1 U2 12", "A U2 1", "A R1 1"))
    assert [part.ref for part in reading.parts] == ["U2", "R1"]


# --- the join to the bill of materials -------------------------------------------------------------------------------


def joined(reading: Reading, *refs: str, form: str = "") -> Design:
    rows = tuple(
        Row((ref,), (Fact("value", f"of {ref}", Source("b.csv", n), Trust.BOM),), Source("b.csv", n))
        for n, ref in enumerate(refs, 1)
    )
    return assemble("a", [reading, Reading("bom", "table", "b.csv", "", rows=rows)], Declaration())


def test_the_form_whose_references_are_cut_is_the_readers() -> None:
    assert CUT == {ipcd356.FORM: 6}


def test_a_cut_reference_is_joined_to_the_one_that_begins_with_it() -> None:
    reading = file(*plain("A RELAY_ 1", "B RELAY_ 2", "A R1 1", "B R1 2"))
    design = joined(reading, "RELAY_MAINS", "R1")
    assert design.parts["RELAY_"].text("value") == "of RELAY_MAINS"
    assert [(note.kind, note.parts) for note in design.notes] == [("case-differs", ("RELAY_",))]


def test_an_exact_reference_goes_first() -> None:
    design = joined(file(*plain("A RELAY1 1", "B RELAY1 2", "A R1 1", "B R1 2")), "RELAY12", "RELAY1", "R1")
    assert design.parts["RELAY1"].text("value") == "of RELAY1"
    assert [(note.kind, note.parts) for note in design.notes] == [("not-in-netlist", ("RELAY12",))]


def test_of_two_that_begin_alike_neither_is_taken() -> None:
    design = joined(file(*plain("A RELAY_ 1", "B RELAY_ 2", "A R1 1", "B R1 2")), "RELAY_A", "RELAY_B", "R1")
    assert design.parts["RELAY_"].text("value") == ""
    assert [(note.kind, note.parts) for note in design.notes] == [("reference-unread", ("RELAY_", "RELAY_A", "RELAY_B"))]


def test_nothing_is_joined_to_a_shorter_reference() -> None:
    design = joined(file(*plain("A K1 1", "B K1 2", "A R1 1", "B R1 2")), "K1_MAIN", "R1")
    assert {note.kind for note in design.notes} == {"not-in-netlist", "not-in-bom"}


# --- damaged and hostile ---------------------------------------------------------------------------------------------

WHOLE = land("A", "R1", "1")


@pytest.mark.parametrize(
    ("line", "message"),
    [
        (WHOLE[:19] + WHOLE[20:], "columns 18 to 20"),
        (WHOLE[:19] + " " + WHOLE[19:], "no hyphen"),
        (WHOLE[:5] + WHOLE[6:], "columns 18 to 20"),
        ("327A              R1    -1          A01X+000000Y+000000", "columns 18 to 20"),
        ("327A                R1", "no hyphen"),
        ("327A                      -1          A01X+000000Y+000000", "a pin has no reference"),
    ],
)
def test_records_whose_names_cannot_be_told_are_refused_with_the_line(line: str, message: str) -> None:
    with pytest.raises(InputError, match=rf"a\.ipc:4: .*{message}"):
        file(*plain(*PAIR), line)


@pytest.mark.parametrize(
    "figures",
    [
        "A01X+0O0000Y+000000",
        "A01X+000000",
        "",
        "A01Y+000000X+000000",
        "A01X+000000Y+000000X05\u0660\u0660Y0400",
        "A01X++00000Y+000000",
        "D99P",
    ],
)
def test_records_whose_figures_cannot_be_read_keep_their_net_and_are_noted(figures: str) -> None:
    reading = file(*plain(*PAIR), f"327A                R3    -1          {figures}")
    assert wired(reading)["A"] == ["R1.1", "R2.1", "R3.1"]
    assert len(reading.pads) == 2
    (note,) = reading.notes
    assert (note.kind, note.parts, note.sources) == ("skipped", ("R3",), (Source("a.ipc", 4),))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (HEAD + END, "no test records"),
        (HEAD + "\n".join(plain("A R1 1", "B R1 2")) + "\n" + END, "connects nothing"),
        (
            HEAD + "\n".join(plain(*PAIR)) + "\n" + END + HEAD + "\n".join(plain(*PAIR)) + "\n" + END,
            "more after the end record 999 of line 4",
        ),
        (HEAD + "\n".join(plain(*PAIR)) + "\nC  " + "x" * limits.TOKEN + "\n" + END, "a line is too long"),
        (HEAD + "\n".join(plain(*PAIR)) + "\0\n" + END, "NUL characters"),
        ("(export (version D))", "not an IPC-D-356 netlist"),
        ("", "the file is empty"),
        ("\x00\x01\x02", "not an IPC-D-356 netlist"),
    ],
)
def test_files_that_are_refused(text: str, message: str) -> None:
    with pytest.raises(InputError, match=message):
        parse(text)


def test_a_file_without_its_end_is_noted() -> None:
    (note,) = file(*plain(*PAIR), end="").notes
    assert note.kind == "skipped"
    assert "no end record 999" in note.text


def test_long_lines_and_lines_of_no_known_kind_are_noted() -> None:
    reading = file(plain("A R1 1")[0].ljust(80) + "more", *plain("A R2 1"), "hello", "318X", "017 first", "390 x")
    assert [note.text[:40] for note in reading.notes] == [
        "1 lines are longer than 80 columns; what",
        "4 lines that do not bear on nets and pad",
    ]


def test_too_many_records_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, "PADS", 3)
    with pytest.raises(InputError, match=r"a\.ipc:5: the file holds too many records; expected at most 3"):
        file(*plain(*PAIR, "A R3 1", "A R4 1"))


@pytest.mark.parametrize("name", ["PARTS", "NETS", "PINS_PER_NET", "PINS_PER_PART"])
def test_too_many_parts_nets_or_pins_are_refused(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, name, 1)
    with pytest.raises(InputError, match="too many"):
        file(*plain(*PAIR, "B R1 2", "B R2 2"))


names = st.text("ABC123_+-/#", min_size=1, max_size=5).filter(lambda name: name not in ("VIA", "N/C"))
steps = st.integers(-99999, 99999)
circuits = st.dictionaries(
    st.tuples(names.map(lambda name: name[:5]), st.text("ABC123+-", min_size=1, max_size=3)),
    st.tuples(st.one_of(st.just(""), names), steps, steps, st.integers(1, 9999), st.integers(0, 359)),
    min_size=2, max_size=20,
)  # fmt: skip


def write(circuit: dict[tuple[str, str], tuple[str, int, int, int, int]]) -> str:
    lines = [
        land(net, ref, pin, (x, y), (size, 2 * size % 10000), turned=f"R{turned:03d}")
        for (ref, pin), (net, x, y, size, turned) in circuit.items()
    ]
    return HEAD + "\n".join(lines) + "\n" + END


@settings(max_examples=150, deadline=None)
@given(circuits)
def test_a_written_circuit_is_read_back(circuit: dict[tuple[str, str], tuple[str, int, int, int, int]]) -> None:
    meant: dict[str, set[str]] = {}
    for (ref, pin), (net, *_) in circuit.items():
        if net:
            meant.setdefault(net, set()).add(f"{ref}.{pin}")
    if not any(len(pins) > 1 for pins in meant.values()):
        with pytest.raises(InputError, match="connects nothing"):
            parse(write(circuit))
        return
    reading = parse(write(circuit))
    assert {net: set(pins) for net, pins in wired(reading).items()} == meant
    assert {(pad.ref, pad.pin): (pad.label, pad.x, pad.turned) for pad in reading.pads} == {
        key: (net, pytest.approx(x * 0.00254), turned) for key, (net, x, _, _, turned) in circuit.items()
    }
    assert not reading.notes


@settings(max_examples=300, deadline=None)
@given(st.data())
def test_damaged_copies_end_in_a_message_or_a_reading(data: st.DataObject) -> None:
    """Cut off, a character lost, added or changed: never another exception, and no pin moves to another net unnoticed."""
    text = FIXTURE.read_text()
    at = data.draw(st.integers(0, len(text) - 1))
    letter = data.draw(st.sampled_from(["", "X", " ", "-", "9", "\n", "\r", "\t", "\0", "é", "\x1a", "999\n"]))
    damaged = data.draw(st.sampled_from([text[:at], text[:at] + letter + text[at:], text[:at] + letter + text[at + 1 :]]))
    try:
        reading = ipcd356.read(Blob("supply.ipc", damaged.encode()))
    except InputError:
        return
    assert {note.kind for note in reading.notes} <= set(NOTE_KINDS)
    if damaged == text[:at] and damaged.rstrip("\n") != text.rstrip("\n"):
        assert any("may have been cut off" in note.text for note in reading.notes)


@settings(max_examples=200, deadline=None)
@given(st.binary(max_size=400))
def test_binary_rubbish_behind_a_good_head_is_read_or_refused(rubbish: bytes) -> None:
    with suppress(InputError):
        parse(HEAD.encode() + "\n".join(plain(*PAIR)).encode() + b"\n" + rubbish)


# --- real files ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "nets", "records"),
    [("formats/ipcd356-inch.ipc", 18, 105), ("formats/ipcd356-aliases.ipc", 642, 5763)],
)
def test_counts_of_real_files(name: str, nets: int, records: int) -> None:
    """Source: a plain look at the columns, and section 4.5 of the reference on formats, where blank and N/C names count."""
    path = SAMPLES / name
    if not path.is_file():
        pytest.skip("the folder of samples is absent")
    lines = [line for line in path.read_text().splitlines() if line[:3] in CODES]
    columns = {line[3:17].strip() for line in lines}
    reading = ipcd356.read(read_file(path))
    assert len(lines) == records
    assert len(columns) in (nets, nets - 1)
    assert len(reading.nets) == len(columns - {"", "N/C"})
    assert len(reading.pads) == records
    assert not any(net.name.startswith(("NNAME", "m00")) for net in reading.nets)


@pytest.mark.parametrize("name", ["mains-strip", "engine-ecu"])
def test_real_boards_are_read_and_joined(name: str) -> None:
    path = SAMPLES / name / "board.ipc"
    if not path.is_file():
        pytest.skip("the folder of samples is absent")
    blob = read_file(path)
    assert plugins.reader_for(blob, "netlist").form == ipcd356.FORM
    assert sniff.describe(sniff.head(blob)) == "an IPC-D-356 netlist"
    reading = ipcd356.read(blob)
    lines = path.read_text().splitlines()
    assert {part.ref for part in reading.parts} == {line[20:26].strip() for line in lines if line[0] == "3"} - {"VIA"}
    design = assemble(name, [reading], Declaration())
    assert len(design.pads) == sum(line[0] == "3" for line in lines)
    assert all(pad.net in design.nets for pad in design.pads if pad.net is not None)


@pytest.mark.parametrize(
    ("name", "barrier_parts", "fails", "apart"),
    [
        (
            "mains-strip",
            {"K1", "K2", "K3", "K4", "PS1"},
            {("fuse", ("RV1", "F1")), ("stored-charge", ("C1", "F1"))},
            {("PS1", "R1"): 23.8522},
        ),
        ("engine-ecu", {"U4"}, set(), {}),
    ],
)
def test_what_is_said_of_real_boards(
    name: str, barrier_parts: set[str], fails: set[tuple[str, tuple[str, ...]]], apart: dict[tuple[str, ...], float]
) -> None:
    """Source: types of the parts and the nets, looked through by hand; the pads nearest across the barrier from their places."""
    folder = SAMPLES / name
    if not folder.is_dir():
        pytest.skip("the folder of samples is absent")
    report = verify(folder / "board.ipc", bom=[folder / "bom.csv"])
    assert {part.part for barrier in report.barriers for part in barrier.parts} == barrier_parts
    assert {(v.rule, tuple(v.parts)) for v in report.verdicts if v.outcome == "fail"} == fails
    pads = {tuple(v.parts): v.found.value for v in report.verdicts if v.rule == "pad-distance" and v.found is not None}
    assert pads == apart
    if name == "mains-strip":
        side = {net: domain.side for domain in report.domains for net in domain.nets}
        assert (side["NET-(J1-PIN_1)"], side["S1-AC{SLASH}L)"], side["GND"]) == ("primary", "primary", "secondary")


def test_one_net_on_both_sides_of_a_barrier_is_a_question_where_its_name_may_be_cut() -> None:
    path = Path(__file__).resolve().parents[1] / "fixtures" / "rules" / "barrier-insulation.yaml"
    (case,) = [case for case in testing.load_cases(path).cases if case.name == "the output return is the primary return"]
    netlist, *more = testing.readings(case.parts, case.rows, case.pads)
    cut = replace(netlist, notes=(*netlist.notes, Note("nets-merged", "names may be cut", (), nets=("PGND",))))
    outcomes = {}
    for taken in (netlist, cut):
        found = pipeline.judge("board", [taken, *more], case.declaration, rulesets.load_all(case.rulesets), ()).report.verdicts
        (outcomes[taken is cut],) = [v.outcome for v in found if v.rule == "barrier-insulation" and v.nets == ["PGND"]]
    assert outcomes == {False: "fail", True: "open"}
