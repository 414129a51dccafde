"""Netlist, BOM, parts file and declaration joined: every behaviour as a small case, nets against networkx."""

from __future__ import annotations

import networkx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits
from checker.assemble.join import assemble
from checker.assemble.nets import is_automatic, merged
from checker.errors import ArgumentError, InputError
from checker.model.candidate import Winding
from checker.model.declaration import Conductor, Declaration, DeclaredDomain, DeclaredPart, Output, Range, Supply, Variant
from checker.model.fact import Fact, Source, Trust
from checker.model.reading import NOTE_KINDS, NetRecord, Node, Note, PartRecord, Reading, Row, SymbolPin, VariantRecord


def facts(trust=Trust.NETLIST, line=0, /, **said):
    return tuple(Fact(name.replace("__", ":"), value, Source("f", line), trust) for name, value in said.items())


def part(ref, pins="", line=1, **said):
    return PartRecord(ref, facts(**said), Source("n.net", line), tuple(SymbolPin(pin) for pin in pins.split()))


def net(name, nodes="", line=100, classes=()):
    made = tuple(Node(*text.rsplit(".", 1), source=Source("n.net", line)) for text in nodes.split())
    return NetRecord(name, f"<unnamed:{line}>", made, Source("n.net", line), classes)


def netlist(parts=(), nets=(), **more):
    return Reading("netlist", "test", "n.net", "00", tuple(parts), tuple(nets), **more)


def row(refs, line=2, *, path="b.csv", alternates=(), table="", unread="", quantity=None, **said):
    more = (Fact("quantity", float(quantity), Source(path, line), Trust.BOM),) if quantity is not None else ()
    made = tuple(facts(Trust.BOM, line, **choice) for choice in alternates)
    return Row(tuple(refs.split()), facts(Trust.BOM, line, **said) + more, Source(path, line), (), made, unread, table)


def bom(*rows, path="b.csv", notes=()):
    return Reading("bom", "test", path, "11", rows=rows, notes=notes)


def parts_file(*rows):
    return Reading("parts", "test", "p.yaml", "22", rows=rows)


def entry(*, refs="", types=(), line=3, **said):
    return Row(tuple(refs.split()), facts(Trust.PARTS_FILE, line, **said), Source("p.yaml", line), tuple(types))


def joined(*readings, declaration=None, variant=None):
    design = assemble("board", readings, declaration or Declaration(), variant)
    assert {note.kind for note in design.notes} <= set(NOTE_KINDS)
    return design


def notes(design, *kinds):
    return [(note.kind, note.parts) for note in design.notes if not kinds or note.kind in kinds]


def pins(part):
    return [(pin.number, pin.net) for pin in part.pins]


TWO = netlist([part("R1", "1 2"), part("C1", "1 2")], [net("A", "R1.1 C1.1"), net("B", "R1.2 C1.2", 101)])


def test_plain_join():
    design = joined(TWO, bom(row("R1 C1", value="x", quantity=2)))
    assert list(design.parts) == ["C1", "R1"]
    assert pins(design.parts["R1"]) == [("1", "A"), ("2", "B")]
    assert [(made.name, made.pins, made.source.line, made.automatic) for made in design.nets.values()] == [
        ("A", (("C1", "1"), ("R1", "1")), 100, False),
        ("B", (("C1", "2"), ("R1", "2")), 101, False),
    ]
    assert design.parts["C1"].text("value") == "x"
    assert [str(source) for source in design.parts["C1"].sources] == ["n.net:1", "b.csv:2"]
    assert design.notes == ()
    assert [(given.role, given.path, given.sha256) for given in design.inputs] == [
        ("netlist", "n.net", "00"),
        ("bom", "b.csv", "11"),
    ]
    assert (design.name, design.variant, design.has_bom, design.variants) == ("board", None, True, ())


@pytest.mark.parametrize("readings", [(), (bom(),), (TWO, TWO)])
def test_exactly_one_netlist(readings):
    with pytest.raises(ArgumentError, match="exactly one netlist"):
        assemble("board", readings, Declaration())


# nets


MACHINE = "|Net-(R1-Pad1)|/Net-(U1-K)|N-000012|unconnected-(J1-Pad3)|unnamed_net7|<unnamed:12>|N$12|NetR1_2|$1N23|17".split("|")
# as forms write them that keep the first or the last characters, in capitals
MACHINE += "NET-(D5-K)|NET-(R100-PAD1|TED-(U1-PAD15)|(U2-3V3-PAD12)|D4{SLASH}SDA)|2-3V3-PAD12)_1|n-000012|UNNAMED_NET7".split("|")
PERSON = "VOUT(5V)|GND|/A/OUT|Net|NetGND|N|+5V|L1|3V3|N12|NET_A".split("|")


@pytest.mark.parametrize("name", MACHINE + PERSON)
def test_automatic_names(name):
    assert is_automatic(name) is (name in MACHINE)


def test_one_name_is_one_net_and_no_name_is_none():
    design = joined(
        netlist(
            [part(f"R{number}", "1 2") for number in range(1, 5)],
            [
                net("GND", "R1.1", 10, ("a",)),
                net("", "R1.2", 11),
                net("GND", "R2.1", 12, ("b",)),
                net("", "R2.2", 13),
                net("X", "R3.1", 14),
            ],
        )
    )
    assert {name: made.pins for name, made in design.nets.items()} == {
        "GND": (("R1", "1"), ("R2", "1")),
        "<unnamed:11>": (("R1", "2"),),
        "<unnamed:13>": (("R2", "2"),),
        "X": (("R3", "1"),),
    }
    assert design.nets["GND"].classes == ("a", "b")
    assert [made.automatic for made in design.nets.values()] == [True, True, False, False]
    (note,) = design.notes
    assert (note.kind, note.nets, [source.line for source in note.sources]) == ("nets-merged", ("GND",), [12])


def test_a_label_that_is_also_a_name_stays_apart():
    records = [NetRecord("", "7", (Node("R1", "1"),), Source("n", 1)), NetRecord("7", "7", (Node("R2", "1"),), Source("n", 2))]
    nets = merged(records).nets
    assert {name: made.pins for name, made in nets.items()} == {"7 (2)": (("R1", "1"),), "7": (("R2", "1"),)}


def test_a_pin_on_two_nets_joins_them_under_the_name_a_person_wrote():
    design = joined(
        netlist([part("U1", "1 2")], [net("Net-(U1-1)", "U1.1 U1.2", 10), net("BP_RTN", "U1.1", 20), net("Z", "U1.1", 30)]),
        declaration=Declaration(rails=(Output("Z", Range(1, 1, "V", source=Source("d.yaml", 4))),)),
    )
    assert list(design.nets) == ["BP_RTN"]
    assert pins(design.parts["U1"]) == [("1", "BP_RTN"), ("2", "BP_RTN")]
    assert [(note.kind, note.parts, note.nets, [source.line for source in note.sources]) for note in design.notes] == [
        ("pin-on-two-nets", ("U1",), ("Net-(U1-1)", "BP_RTN"), [10, 20]),
        ("pin-on-two-nets", ("U1",), ("Net-(U1-1)", "Z"), [10, 30]),
        ("unused", (), ("Z",), [4]),
    ]
    assert "U1.1 stands on net Net-(U1-1) (line 10) and on net BP_RTN (line 20)" in design.notes[0].text
    assert "the net Z is part of BP_RTN" in design.notes[2].text


NETS = st.lists(
    st.tuples(
        st.sampled_from(["", "", "GND", "A", "Net-(X)", "B", "C"]),
        st.lists(st.tuples(st.sampled_from(["R1", "R2", "U1", "U2"]), st.sampled_from("123456")), max_size=4),
    ),
    max_size=9,
)


@settings(deadline=None, max_examples=300)
@given(NETS)
def test_nets_are_the_components_of_names_and_pins(listed):
    records = [net(name, " ".join(f"{ref}.{pin}" for ref, pin in nodes), 10 + at) for at, (name, nodes) in enumerate(listed)]
    graph = networkx.Graph()
    for at, (name, nodes) in enumerate(listed):
        graph.add_edge(("record", at), ("name", name) if name else ("nameless", at))
        graph.add_edges_from((("record", at), ("pin", *node)) for node in nodes)
    expected = []
    for component in networkx.connected_components(graph):
        numbers = sorted(item[1] for item in component if item[0] == "record")
        names = [listed[at][0] or f"<unnamed:{10 + at}>" for at in numbers]
        name = next((name for name in names if not name.startswith(("Net-(", "<"))), names[0])
        expected.append((numbers[0], name, {item[1:] for item in component if item[0] == "pin"}))
    found = merged(records).nets
    assert [(made.name, set(made.pins)) for made in found.values()] == [
        (name, on) for _, name, on in sorted(expected, key=lambda e: e[0])
    ]
    assert all(len(made.pins) == len(set(made.pins)) for made in found.values())


# parts and pins


def test_pins_come_from_symbol_and_nodes_once_each():
    record = PartRecord(
        "U1", (), Source("n.net", 1), (SymbolPin("1", "VCC", "power"), SymbolPin("3", "IN"), SymbolPin("3"), SymbolPin("2", "G"))
    )
    nodes = (Node("U1", "2", "GND", "power_in"), Node("U1", "9"), Node("U1", "1"))
    design = joined(netlist([record], [NetRecord("A", "1", nodes, Source("n.net", 5))]))
    assert [(pin.number, pin.name, pin.type, pin.net) for pin in design.parts["U1"].pins] == [
        ("1", "VCC", "power", "A"),
        ("2", "GND", "power_in", "A"),
        ("3", "IN", "", None),
        ("9", "", "", "A"),
    ]


def test_duplicate_reference_keeps_both():
    parts = [part("J2", "1 2", 5, value="CON2"), part("J2", "2 3", 9, value="CON3"), part("J2 (2)", "1", 11), part("R1", "1", 12)]
    design = joined(
        netlist(parts, [net("A", "J2.1 R1.1"), net("B", "J2.2", 101), net("C", "J2.3 J2.7", 102)]), bom(row("J2", line=4, type="X"))
    )
    assert list(design.parts) == ["J2", "J2 (2)", "J2 (3)", "R1"]
    assert pins(design.parts["J2"]) == [("1", "A"), ("2", "B"), ("7", "C")]
    assert pins(design.parts["J2 (3)"]) == [("2", "B"), ("3", "C"), ("7", "C")]
    assert design.nets["A"].pins == (("J2", "1"), ("R1", "1"))
    assert design.nets["B"].pins == (("J2", "2"), ("J2 (3)", "2"))
    assert design.nets["C"].pins == (("J2", "7"), ("J2 (3)", "3"), ("J2 (3)", "7"))
    assert [design.parts[ref].text("type") for ref in ("J2", "J2 (3)")] == ["X", "X"]
    note = design.notes[0]
    assert (note.kind, note.parts, [source.line for source in note.sources]) == ("duplicate-reference", ("J2", "J2 (3)"), [5, 9])


def test_duplicate_reference_without_a_symbol_gets_every_pin():
    design = joined(netlist([part("J2"), part("J2", "1")], [net("A", "J2.1"), net("B", "J2.2")]))
    assert pins(design.parts["J2"]) == pins(design.parts["J2 (2)"]) == [("1", "A"), ("2", "B")]


def test_unlisted_reference_is_kept_as_a_stub():
    design = joined(netlist([part("R1", "1")], [net("A", "R1.1 U9.4", 30)]))
    assert (design.parts["U9"].facts, pins(design.parts["U9"]), design.parts["U9"].fitted) == ((), [("4", "A")], True)
    assert [(note.kind, note.parts, note.sources[0].line) for note in design.notes] == [("part-not-listed", ("U9",), 30)]
    # a form without a parts section lists no part anywhere
    assert joined(netlist([], [net("A", "R1.1 U9.4")])).notes == ()


def test_references_that_look_alike():
    design = joined(netlist([part("R1", line=1), part("Ｒ1", line=2), part("Ｃ5", line=3), part("µ1", line=4), part("μ1", line=5)]))
    assert notes(design) == [("confusable-reference", ("R1", "Ｒ1")), ("confusable-reference", ("μ1", "µ1"))]
    assert list(design.parts) == ["R1", "µ1", "μ1", "Ｃ5", "Ｒ1"]


# BOM


def test_facts_of_a_row_go_to_every_reference_with_their_trust():
    design = joined(
        netlist([part("R1", value="10k"), part("R2", value="1k")]), bom(row("R1 R2", value="10k", rating__voltage="75 V"))
    )
    assert [(fact.value, fact.trust) for fact in design.parts["R2"].facts] == [
        ("1k", Trust.NETLIST),
        ("10k", Trust.BOM),
        ("75 V", Trust.BOM),
    ]
    assert design.parts["R2"].text("value") == "10k"


@pytest.mark.parametrize(
    "known, listed, applied, kinds",
    [
        ("R1", "R1", "R1", []),
        ("R1", "r1", "R1", ["case-differs"]),
        ("R1", "Ｒ1", "R1", ["confusable-reference"]),
        ("U1", "U1A", "U1", []),
        ("U1", "U1-B", "U1", []),
        ("U1 U1A", "U1A", "U1A", ["not-in-bom"]),
        ("r1 R1", "R1", "R1", ["not-in-bom"]),
        ("Ab1 aB1", "AB1", "", ["not-in-netlist", "not-in-bom", "not-in-bom"]),
        ("R1", "R12A", "", ["not-in-netlist", "not-in-bom"]),
        ("R1-4", "R1 R2 R3 R4", "R1-4", []),
        ("A07-09", "X1 A07 A08 A09", "A07-09", ["not-in-netlist"]),
        ("R1-4", "R1 R2", "", ["not-in-netlist", "not-in-netlist", "not-in-bom"]),
        ("R1-4 R1", "R1 R2", "R1", ["not-in-netlist", "not-in-bom"]),
    ],
)
def test_matching_of_references(known, listed, applied, kinds):
    design = joined(netlist([part(ref) for ref in known.split()]), bom(row(listed, value="seen")))
    assert [ref for ref, made in design.parts.items() if made.text("value")] == applied.split()
    assert [note.kind for note in design.notes] == kinds


def test_both_directions_one_note_each_and_no_part_is_added():
    design = joined(TWO, bom(row("R1 R9 R8", line=2), row("R9", line=3)))
    assert notes(design) == [("not-in-netlist", ("R9",)), ("not-in-netlist", ("R8",)), ("not-in-bom", ("C1",))]
    assert list(design.parts) == ["C1", "R1"]
    assert not joined(TWO).has_bom
    assert joined(TWO).notes == ()


@pytest.mark.parametrize(
    "said, noted",
    [
        ({"value": "10k"}, True),
        ({"fitted": False}, False),
        ({"in_bom": False}, False),
        ({"footprint": "MountingHole:MountingHole_3.2mm_M3"}, False),
        ({"symbol": "TestPoint"}, False),
        ({"symbol": "SolderJumper_2_Open"}, False),
        ({"footprint": "NetTie:NetTie-2_SMD"}, False),
        ({"footprint": "Fiducial:Fiducial_1mm"}, False),
        ({"value": "PWR_FLAG"}, False),
        ({"value": "LOGO"}, False),
        ({"value": "test point"}, False),
        ({"value": "CATALOGOS"}, True),
        ({"symbol": "Jumper_2"}, True),
        ({"footprint": "Connector:Testpointless"}, True),
        ({"description": "mounting hole"}, True),
    ],
)
def test_what_a_bom_need_not_list(said, noted):
    design = joined(netlist([part("R1"), part("X1", **said)]), bom(row("R1")))
    assert notes(design) == ([("not-in-bom", ("X1",))] if noted else [])


def test_an_alternate_holds_its_own_statements_only():
    design = joined(
        netlist([part("C7", value="1n", type="OLD")]),
        bom(row("C7", mark="Y1", type="YC", maker="A", alternates=[{"type": "VY", "maker": "B"}, {"type": "ZY"}])),
        parts_file(
            entry(types=["vy"], rating__voltage="400 V"), entry(types=["old"], kind="x"), entry(refs="C7", kind="capacitor")
        ),
        declaration=Declaration(parts={"C7": DeclaredPart("C7", facts(Trust.DECLARED, technology="film"))}),
    )
    said = [
        [(fact.attribute, fact.value) for fact in choice] for choice in (design.parts["C7"].facts, *design.parts["C7"].alternates)
    ]
    first = [
        ("value", "1n"),
        ("type", "OLD"),
        ("mark", "Y1"),
        ("type", "YC"),
        ("maker", "A"),
        ("kind", "capacitor"),
        ("technology", "film"),
    ]
    # Y1 is said of the first product and the type the BOM replaced gets no credit: neither may reach the alternates
    assert said == [first, [("type", "VY"), ("maker", "B"), ("rating:voltage", "400 V")], [("type", "ZY")]]
    assert [note.kind for note in design.notes] == ["unused"]


@pytest.mark.parametrize(
    "second, count, kinds",
    [
        ({"type": "B"}, 1, ["duplicate-row"]),
        ({"type": "a", "value": "100 n"}, 0, []),
        ({"value": "100N"}, 0, []),
        ({"value": "1u"}, 1, ["duplicate-row"]),
        ({"type": "ALT"}, 1, []),
    ],
)
def test_two_rows_of_one_table(second, count, kinds):
    rows = (
        row("C1", line=2, value="100n", type="A", alternates=[{"type": "ALT"}] if second == {"type": "ALT"} else ()),
        row("C1", 5, **second),
    )
    design = joined(netlist([part("C1")]), bom(*rows))
    assert (len(design.parts["C1"].alternates), [note.kind for note in design.notes]) == (count, kinds)
    for note in design.notes:
        assert (note.parts, [source.line for source in note.sources]) == (("C1",), [2, 5])


def test_a_second_bom_adds_facts_and_contradicts_only_by_type():
    first, other = bom(row("C1", value="100n")), row("C1", 7, path="c.csv", value="100nF", mark="X2")
    assert joined(netlist([part("C1")]), first, bom(other, path="c.csv")).notes == ()
    typed = bom(row("C1", value="100n", type="A"))
    design = joined(netlist([part("C1")]), typed, bom(row("C1", 7, path="c.csv", type="B"), path="c.csv"))
    assert notes(design) == [("duplicate-row", ("C1",))]
    assert [source.path for source in design.notes[0].sources] == ["b.csv", "c.csv"]


def test_too_many_choices():
    rows = [row("C1", line, type=f"T{line}") for line in range(2, limits.ALTERNATES + 3)]
    with pytest.raises(InputError, match=r"b\.csv:34: C1 has too many choices"):
        joined(netlist([part("C1")]), bom(*rows))
    assert len(joined(netlist([part("C1")]), bom(*rows[:-1])).parts["C1"].alternates) == limits.ALTERNATES - 1


@pytest.mark.parametrize("variant, value, out", [(None, "10k", ()), ("short", "10k", ("Q1",)), ("long", "22k", ("C1",))])
def test_tables_of_one_file(variant, value, out):
    rows = (
        row("R1 C1", 2, table="short", value="10k"),
        row("R1", 8, table="long", value="22k"),
        row("Q1", 9, table="long", value="t"),
    )
    design = joined(netlist([part("R1"), part("C1"), part("Q1")]), bom(*rows), variant=variant)
    assert [design.parts[ref].text("value") for ref in ("R1", "C1", "Q1")] == [value, "10k", "t"]
    assert notes(design) == [("skipped", ("R1",)), *([("skipped", out)] if out else [])]
    assert tuple(ref for ref, made in design.parts.items() if not made.fitted) == out
    assert design.variants == ("short", "long")


@pytest.mark.parametrize(
    "count, refs, noted",
    [(2, "R1 C1", False), (4, "R1 C1", False), (3, "R1 C1", True), (1, "R1 C1", True), (0, "R1 C1", False), (5, "R1", False)],
)
def test_quantity(count, refs, noted):
    design = joined(TWO, bom(row(refs, quantity=count)))
    assert [note.parts for note in design.notes if note.kind == "quantity-differs"] == ([tuple(refs.split())] if noted else [])


def test_unread_words():
    design = joined(netlist([part("R1"), part("+"), part("R?")]), bom(row("R1", unread="+ 3* R?", quantity=5)))
    assert notes(design) == [("reference-unread", ("R1", "+", "R?"))]
    assert "3*" in design.notes[0].text
    assert "+" not in design.notes[0].text


@pytest.mark.parametrize(
    "drawn, listed, fitted, noted",
    [
        ((), [None], True, False),
        ((), [], True, False),
        ((False,), [], False, False),
        ((False,), [None], False, False),
        ((True, False), [None], True, True),
        ((), [False], False, False),
        ((True,), [False], False, True),
        ((False,), [True], True, True),
        ((False,), [False], False, False),
        ((), [True, False], True, True),
        ((), [None, False], True, True),
    ],
)
def test_fitted(drawn, listed, fitted, noted):
    record = PartRecord("R1", tuple(Fact("fitted", flag, Source("n.net", 3), text="words") for flag in drawn), Source("n.net", 1))
    rows = [row("R1", line, **({} if flag is None else {"fitted": flag})) for line, flag in enumerate(listed, 2)]
    design = joined(netlist([record]), *([bom(*rows)] if rows else []))
    assert design.parts["R1"].fitted is fitted
    assert [note.kind for note in design.notes if note.kind == "fitted-differs"] == ["fitted-differs"] * noted


def test_a_quantity_of_nothing_is_not_fitted():
    assert not joined(TWO, bom(row("R1 C1", quantity=0))).parts["R1"].fitted
    # an empty cell of a DNP column says less than the count, a word says more
    assert not joined(TWO, bom(row("R1 C1", quantity=0, fitted=True))).parts["R1"].fitted
    worded = Row(("R1", "C1"), (Fact("fitted", True, text="no"), Fact("quantity", 0.0)), Source("b.csv", 2))
    assert joined(TWO, bom(worded)).parts["R1"].fitted


# parts file


def test_parts_file_by_type_value_symbol_and_reference():
    design = joined(
        netlist(
            [
                part("U1", value="817"),
                part("U2", symbol="OPTO-X"),
                part("U3", value="817", type="817C"),
                part("U4", value="817"),
                part("U5"),
            ]
        ),
        bom(row("U4", type="OTHER"), row("U1 U2 U3 U5")),
        parts_file(
            entry(types=["817"], line=3, kind="a"),
            entry(types=["opto-x"], line=5, kind="b"),
            entry(types=["817c", "nothing"], line=7, kind="c"),
            entry(refs="U5 U6", line=9, kind="d"),
        ),
    )
    assert {ref: made.text("kind") for ref, made in design.parts.items()} == {"U1": "a", "U2": "b", "U3": "c", "U4": "", "U5": "d"}
    assert [(note.kind, note.parts, note.sources[0].line) for note in design.notes] == [("unused", (), 7), ("unused", ("U6",), 9)]
    assert design.parts["U1"].say("kind").trust is Trust.PARTS_FILE
    assert [str(source) for source in design.parts["U5"].sources] == ["n.net:1", "b.csv:2", "p.yaml:9"]


# variants


VARIANTS = netlist([part("R1"), part("R2", fitted=False), part("R3")], variants=(VariantRecord("lite", ("R2",), ("R1",)),))


@pytest.mark.parametrize("variant, fitted", [(None, "R1 R3"), ("lite", "R2 R3"), ("eu", "R1 R2"), ("both", "R1 R3")])
def test_variants(variant, fitted):
    declared = {"eu": Variant("eu", ("R2",), ("R3",)), "both": Variant("both", ("R1",), ("R1",))}
    design = joined(VARIANTS, declaration=Declaration(variants=declared), variant=variant)
    assert [ref for ref, made in design.parts.items() if made.fitted] == fitted.split()
    assert (design.variant, design.variants) == (variant, ("eu", "both", "lite"))


def test_declared_variant_overrides_the_drawn_one_of_its_name():
    design = joined(VARIANTS, declaration=Declaration(variants={"lite": Variant("lite", ("R1",))}), variant="lite")
    assert [made.fitted for made in design.parts.values()] == [True, True, True]


def test_unknown_variant_names_the_known_ones():
    with pytest.raises(ArgumentError, match="there is no variant us; the variants of this design are lite"):
        joined(VARIANTS, variant="us")
    with pytest.raises(ArgumentError, match="defines no variants"):
        joined(TWO, variant="us")


def test_a_part_left_out_by_the_variant_need_not_be_listed():
    assert notes(joined(VARIANTS, bom(row("R3")), variant="lite")) == [("not-in-bom", ("R2",))]


# declaration


def test_declared_facts_and_names_that_match_nothing():
    volts, place = Range(5, 5, "V", source=Source("d.yaml", 7)), Source("d.yaml", 9)
    declaration = Declaration(
        supplies=(Supply("s", "dc", volts, outputs=(Output("A", volts, "NOWHERE"),)),),
        domains={"d": DeclaredDomain("d", ("B", "b"), source=place)},
        rails=(Output("C1", volts),),
        parts={
            "R1": DeclaredPart("R1", facts(Trust.DECLARED, kind="fuse"), windings=(Winding(("1", "8")),), source=place),
            "r1": DeclaredPart("r1", source=place),
        },
        conductors=(Conductor("sink", ("R1", "R1.2", "A", "R1.9", "Z"), source=place),),
        unreachable={"C11": place},
        variants={"v": Variant("v", ("C1",), ("Q1",), place)},
    )
    design = joined(TWO, declaration=declaration)
    assert design.parts["R1"].say("kind").trust is Trust.DECLARED
    assert design.parts["R1"].sources[-1] == place
    assert [(note.text, note.parts, note.nets) for note in design.notes] == [
        ("outputs.A.return: NOWHERE matches nothing in the design", (), ("NOWHERE",)),
        ("domains.d: b matches nothing in the design; did you mean `B`?", (), ("b",)),
        ("rails: C1 matches nothing in the design", (), ("C1",)),
        ("parts: r1 matches nothing in the design; did you mean `R1`?", ("r1",), ()),
        ("conductors.sink: R1.9 matches nothing in the design", (), ()),
        ("conductors.sink: Z matches nothing in the design", (), ()),
        ("unreachable: C11 matches nothing in the design; did you mean `C1`?", ("C11",), ()),
        ("variants.v: Q1 matches nothing in the design", ("Q1",), ()),
        ("parts: R1 has no pin 8", ("R1",), ()),
    ]
    assert {note.kind for note in design.notes} == {"unused"}
    assert all(note.sources[0].path == "d.yaml" for note in design.notes)


def test_notes_keep_the_order_of_the_files_and_hostile_names_are_neutral():
    design = joined(
        netlist([part("R1")], [net("A\n::error", "R1.1 X\x1b[1m.2", 40)], notes=(Note("no-symbol", "x"),)),
        bom(row("R1 Q\u202e1"), notes=(Note("skipped", "y"),)),
    )
    assert [note.kind for note in design.notes] == ["no-symbol", "part-not-listed", "skipped", "not-in-netlist", "not-in-bom"]
    assert all(note.text.isprintable() for note in design.notes)


def test_same_inputs_same_design():
    readings = (TWO, bom(row("R1 c1 X9", type="A", alternates=[{"type": "B"}])))
    assert assemble("b", readings, Declaration()) == assemble("b", readings, Declaration())
