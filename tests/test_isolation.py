"""Domains, cuts and chains against brute force on small random circuits, and the steps of the method one by one."""

from __future__ import annotations

from itertools import pairwise

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.isolation import shorts
from checker.isolation.domains import isolate
from checker.isolation.islands import build, settle_capacitors
from checker.model.declaration import Declaration, DeclaredDomain
from checker.model.names import earth_like, role
from tests.circuits import choice, design

NETS = [f"n{at}" for at in range(9)]
ORDINARY = ("resistor", "diode", "inductor", "mosfet", "ic")


@st.composite
def circuits(draw, insulating=True):
    """Random circuits of two- and three-pin ordinary parts, capacitors, connectors and four-pin couplers."""
    parts = {}
    for at in range(draw(st.integers(3, 14))):
        kind = draw(st.sampled_from((*ORDINARY, "capacitor", "connector") + (("optocoupler",) * 3 if insulating else ())))
        pins = 4 if kind == "optocoupler" else draw(st.integers(2, 3)) if kind in ("mosfet", "ic", "connector") else 2
        nets = draw(st.lists(st.sampled_from(NETS), min_size=pins, max_size=pins))
        parts[f"P{at}"] = (kind, {str(pin + 1): net for pin, net in enumerate(nets)})
    return parts


def components(parts, without=frozenset()):
    """Brute force: nets joined by every ordinary part and each half of a coupler (networkx, no code of the program)."""
    graph = nx.Graph()
    live = {net for net in NETS if sum(net in pins.values() for _, pins in parts.values()) > 1}
    graph.add_nodes_from(live)
    for ref, (kind, pins) in parts.items():
        groups = (
            [[pins[p] for p in pins if p in "12"], [pins[p] for p in pins if p in "34"]]
            if kind == "optocoupler"
            else [list(pins.values())]
        )
        if kind in ("capacitor", "connector") or ref in without:
            continue
        for group in groups:
            nets = [net for net in group if net in live]
            graph.add_edges_from(pairwise(nets))
    return {net: frozenset(group) for group in nx.connected_components(graph) for net in group}


@given(circuits())
@settings(max_examples=300, deadline=None)
def test_islands_are_the_connected_components(parts):
    isle = build(design(parts), choice(parts))
    expected = components(parts)
    assert set(isle.live) == set(expected)
    for one in expected:
        for two in expected:
            assert (isle.island(one) == isle.island(two)) == (two in expected[one])


@given(circuits())
@settings(max_examples=400, deadline=None)
def test_culprits_are_exactly_the_parts_whose_removal_separates_a_coupler(parts):
    isle = build(design(parts), choice(parts))
    together = components(parts)
    inactive, expected = [], {}
    for ref, (kind, pins) in parts.items():
        if kind != "optocoupler":
            continue
        sides = [[pins[p] for p in half if pins[p] in together] for half in ("12", "34")]
        if not all(sides) or together[sides[0][0]] != together[sides[1][0]]:
            continue
        inactive.append(ref)
        for other, (ordinary, _) in parts.items():
            if ordinary in ORDINARY:
                after = components(parts, {other})
                if after[sides[0][0]] != after[sides[1][0]]:
                    expected.setdefault(other, set()).add(ref)
    found = {}
    for culprit in shorts.find(isle, isle.members(), inactive):
        if culprit.chain and not culprit.cut:
            for ref in culprit.chain:
                found.setdefault(ref, set()).update(culprit.parts)
    for ref, couplers in found.items():
        assert couplers <= expected.get(ref, set())
    explained = {coupler for couplers in found.values() for coupler in couplers}
    assert explained == {coupler for couplers in expected.values() for coupler in couplers}


@given(circuits())
@settings(max_examples=300, deadline=None)
def test_the_stage_never_puts_one_net_into_two_domains_and_never_raises(parts):
    isolation = isolate(design(parts), choice(parts), Declaration())
    seen = [net for domain in isolation.domains.values() for net in domain.nets]
    assert len(seen) == len(set(seen))
    assert {net: isolation.domain_of[net] for net in seen} == dict(isolation.domain_of)
    for crossing in isolation.crossings:
        assert crossing.between[0] != crossing.between[1]
        assert set(crossing.between) <= set(isolation.domains)


@given(circuits(insulating=False))
@settings(max_examples=200, deadline=None)
def test_without_insulating_parts_an_ordinary_part_never_crosses(parts):
    isolation = isolate(design(parts), choice(parts), Declaration())
    assert all(crossing.how == "capacitor" for crossing in isolation.crossings)


def flyback(**extra):
    """A mains flyback in a dozen parts; pins of T1: primary 1 2, auxiliary 3 4, secondary 7 8."""
    parts = {
        "J1": ("inlet", {"1": "L", "2": "N"}),
        "F1": ("fuse", {"1": "L", "2": "LF"}),
        "BR1": ("bridge", {"1": "LF", "2": "N", "3": "VBUS", "4": "PGND"}),
        "C1": ("capacitor", {"1": "VBUS", "2": "PGND"}),
        "T1": ("transformer", {"1": "VBUS", "2": "DRAIN", "3": "AUX", "4": "PGND", "7": "SEC", "8": "SGND"}),
        "Q1": ("mosfet", {"1": "GATE", "2": "DRAIN", "3": "PGND"}),
        "U1": ("controller", {"1": "FB", "2": "VCC", "3": "PGND", "4": "GATE"}),
        "D2": ("diode", {"1": "AUX", "2": "VCC"}),
        "D3": ("diode", {"1": "SEC", "2": "VOUT"}),
        "C2": ("capacitor", {"1": "VOUT", "2": "SGND"}),
        "R5": ("resistor", {"1": "VOUT", "2": "LED"}),
        "U2": ("optocoupler", {"1": "LED", "2": "REF", "3": "PGND", "4": "FB"}),
        "U3": ("shunt-reference", {"1": "REF", "2": "SGND"}),
        "R6": ("resistor", {"1": "VOUT", "2": "SGND"}),
        "J2": ("connector", {"1": "VOUT", "2": "SGND"}),
    }
    parts.update(extra)
    return parts


def barriers(parts, **more):
    isolation = isolate(design(parts), choice(parts, **more), more.pop("declaration", Declaration()))
    return {separation.id: separation.bridged_by for separation in isolation.separations}, isolation


def test_a_flyback_has_one_barrier_with_its_transformer_and_coupler():
    found, isolation = barriers(flyback())
    assert found == {"mains|VOUT": ("T1", "U2")}
    assert isolation.domains["mains"].side == "primary"
    assert isolation.domains["VOUT"].side == "secondary"
    assert not isolation.shorts


def test_a_planted_resistor_is_named_with_its_path_and_the_barrier_stays_visible():
    found, isolation = barriers(flyback(R99=("resistor", {"1": "PGND", "2": "SGND"})))
    (short,) = isolation.shorts
    assert short.faulty
    assert short.chain == ("R99",)
    assert set(short.parts) == {"T1", "U2"}
    assert found == {"mains|VOUT": ("R99", "T1", "U2")}


def test_a_series_string_across_the_barrier_is_one_chain():
    parts = flyback(R98=("resistor", {"1": "PGND", "2": "MID"}), R99=("resistor", {"1": "MID", "2": "SGND"}))
    _, isolation = barriers(parts)
    (short,) = isolation.shorts
    assert set(short.chain) == {"R98", "R99"}


def test_two_capacitors_in_series_are_a_chain_through_a_link():
    parts = flyback(CY1=("capacitor", {"1": "PGND", "2": "MID"}), CY2=("capacitor", {"1": "MID", "2": "SGND"}))
    found, isolation = barriers(parts, CY1={"value": 2.2e-9}, CY2={"value": 2.2e-9})
    assert isolation.links == ("MID",)
    assert found["mains|VOUT"] == ("CY1", "CY2", "T1", "U2")
    assert {crossing.chain for crossing in isolation.crossings if crossing.how == "capacitor"} == {("CY1", "CY2")}


def test_several_secondaries_are_domains_of_their_own():
    parts = flyback(
        T1=(
            "transformer",
            {"1": "VBUS", "2": "DRAIN", "3": "AUX", "4": "PGND", "7": "SEC", "8": "SGND", "9": "SEC2", "10": "GND2"},
        ),
        D4=("diode", {"1": "SEC2", "2": "+5V"}),
        R8=("resistor", {"1": "+5V", "2": "GND2"}),
        J3=("connector", {"1": "+5V", "2": "GND2"}),
    )
    found, _ = barriers(parts)
    assert set(found) == {"mains|VOUT", "mains|+5V", "VOUT|+5V"}


@pytest.mark.parametrize("joined", [("jumper", {}), ("resistor", {"value": 0.0}), ("inductor", {})])
def test_a_secondary_bonded_to_protective_earth_is_an_earthed_secondary(joined):
    kind, more = joined
    parts = flyback(J1=("inlet", {"1": "L", "2": "N", "3": "PE"}), R7=(kind, {"1": "PE", "2": "SGND"}))
    found, isolation = barriers(parts, R7=more)
    assert isolation.domains["VOUT"].earthed
    assert not isolation.shorts
    assert set(found) == {"mains|VOUT"}


@pytest.mark.parametrize("values", [({"value": 1e6},), ({},), ({"value": 470e3}, {"value": 470e3})])
def test_a_resistor_bleeds_to_protective_earth_and_bonds_nothing(values):
    parts = flyback(J1=("inlet", {"1": "L", "2": "N", "3": "PE"}))
    nets = ["PE", *(f"PE{number}" for number in range(1, len(values))), "SGND"]
    for number in range(len(values)):
        parts[f"R{number + 7}"] = ("resistor", {"1": nets[number], "2": nets[number + 1]})
    found, isolation = barriers(parts, **{f"R{number + 7}": more for number, more in enumerate(values)})
    assert not isolation.domains["VOUT"].earthed
    assert isolation.domains["earth"].earthed
    assert not isolation.shorts
    assert found["earth|VOUT"] == ("R7",)


def test_protective_earth_joined_to_the_primary_is_a_short():
    parts = flyback(J1=("inlet", {"1": "L", "2": "N", "3": "PE"}), R7=("resistor", {"1": "PE", "2": "PGND"}))
    _, isolation = barriers(parts)
    assert [(short.chain, short.faulty) for short in isolation.shorts] == [(("R7",), True)]


def test_a_board_without_insulating_parts_has_no_barrier():
    parts = {
        "J1": ("connector", {"1": "VIN", "2": "GND"}),
        "U1": ("regulator", {"1": "VIN", "2": "GND", "3": "SW"}),
        "L1": ("inductor", {"1": "SW", "2": "VOUT"}),
        "C1": ("capacitor", {"1": "VOUT", "2": "GND"}),
        "J2": ("connector", {"1": "VOUT", "2": "GND"}),
    }
    found, isolation = barriers(parts)
    assert found == {}
    assert not isolation.questions


def test_isolators_whose_sides_share_a_net_are_named_with_the_net():
    parts = {f"U{at}": ("optocoupler", {"1": f"A{at}", "2": "GND", "3": "GND", "4": f"B{at}"}) for at in (1, 2)}
    parts |= {f"R{at}": ("resistor", {"1": f"A{at}", "2": "VCC"}) for at in (1, 2)}
    parts |= {f"R1{at}": ("resistor", {"1": f"B{at}", "2": "VCC"}) for at in (1, 2)}
    _, isolation = barriers(parts)
    (short,) = isolation.shorts
    assert short.nets == ("GND",)
    assert short.parts == ("U1", "U2")


def test_an_unlisted_isolator_is_asked_about():
    pins = {str(pin): f"a{pin % 3}" if pin <= 8 else f"b{pin % 3}" for pin in range(1, 17)}
    parts = {"U7": ("ic", pins)}
    for side in "ab":
        parts |= {f"R{side}{at}": ("resistor", {"1": f"{side}{at}", "2": f"{side}{(at + 1) % 3}"}) for at in range(3)}
        parts[f"J{side}"] = ("connector", {"1": f"{side}0", "2": f"{side}1"})
    pins["17"] = "a0"
    del pins["17"]
    pins["8"], pins["16"] = "a1", "b2"
    _, isolation = barriers(parts)
    assert [question.parts for question in isolation.questions] == [("U7",)]
    assert [crossing.listed for crossing in isolation.crossings] == [False]


def test_declared_domains_on_one_island_are_a_short():
    parts = {
        "R1": ("resistor", {"1": "GNDI", "2": "GND"}),
        "R2": ("resistor", {"1": "GNDI", "2": "X"}),
        "R3": ("resistor", {"1": "GND", "2": "Y"}),
        "J1": ("connector", {"1": "X", "2": "Y"}),
    }
    declared = Declaration(domains={"field": DeclaredDomain("field", ("GNDI",)), "logic": DeclaredDomain("logic", ("GND",))})
    isolation = isolate(design(parts), choice(parts), declared)
    assert [short.chain for short in isolation.shorts] == [("R1",)]
    assert set(isolation.domains) == {"field", "logic"}


def test_a_small_capacitor_on_a_stub_joins_unless_the_stub_sounds_like_earth():
    for stub, joined in (("ANT", True), ("SHIELD", False), ("CHASSIS", False)):
        parts = {
            "J1": ("connector", {"1": stub, "2": "GND"}),
            "C1": ("capacitor", {"1": stub, "2": "OUT"}),
            "R1": ("resistor", {"1": "OUT", "2": "GND"}),
        }
        isle = build(design(parts), choice(parts, C1={"value": 1e-10}))
        settle_capacitors(isle)
        assert (isle.island(stub) == isle.island("OUT")) is joined, stub


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("L", "line"), ("/AC/AC_L", "line"), ("L_FUSED", "line"), ("N", "neutral"), ("AC_N_IN", "neutral"), ("PE", "earth"),
        ("230V_L", "line"), ("MAINS_SENSE", "mains"), ("230VAC", "mains"),
        # names of real boards that are no evidence (reference: names that lie)
        ("CAN_L", ""), ("AUDIO_L", ""), ("D_N", ""), ("VBUS", ""), ("Earth", ""), ("GNDA", ""), ("MISO", ""), ("Net-(L1-Pad1)", ""),
    ],
)  # fmt: skip
def test_what_a_name_hints_at(name, expected):
    assert role(name) == expected


def test_earth_like_names_are_only_a_hint():
    assert earth_like("Earth")
    assert earth_like("USB_SHIELD")
    assert not earth_like("GND")


@pytest.mark.parametrize("kind, value", [("capacitor", 1e-9), ("capacitor", 1e-7), ("varistor", None)])
def test_nothing_small_joins_a_mains_stub_to_one_of_two_secondaries(kind, value):
    parts = {
        "J1": ("inlet", {"1": "L", "2": "N"}),
        "F1": ("fuse", {"1": "L", "2": "LF"}),
        "T1": ("transformer", {"1": "LF", "2": "N", "5": "A1", "6": "A2", "7": "B1", "8": "B2"}),
        "BR1": ("bridge", {"1": "A1", "2": "A2", "3": "VA", "4": "GNDA"}),
        "R1": ("resistor", {"1": "VA", "2": "GNDA"}),
        "BR2": ("bridge", {"1": "B1", "2": "B2", "3": "VB", "4": "GNDB"}),
        "R2": ("resistor", {"1": "VB", "2": "GNDB"}),
        "X9": (kind, {"1": "N", "2": "GNDA"}),
    }
    found, _ = barriers(parts, X9={"value": value} if value else {})
    assert found["mains|GNDA"] == ("T1", "X9")
