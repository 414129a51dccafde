"""Circuits nobody tuned the isolation stage to: what joins the two sides is named, and nothing else is."""

from __future__ import annotations

import pytest

from checker.identify.kinds import judge
from checker.isolation.domains import isolate
from checker.model.circuit import Part, Pin
from checker.model.declaration import Declaration
from checker.model.fact import Fact
from tests.circuits import choice, design

Parts = dict[str, tuple[str, dict[str, str]]]


def judged(parts: Parts, **more: dict[str, object]):
    return isolate(design(parts), choice(parts, **more), Declaration())


def faults(parts: Parts, **more: dict[str, object]) -> list[tuple[tuple[str, ...], tuple[str, ...]]]:
    """(chain, insulating parts) of every short that is a fault."""
    return [(short.chain, short.parts) for short in judged(parts, **more).shorts if short.faulty]


def two(kind: str, one: str, other: str) -> tuple[str, dict[str, str]]:
    return kind, {"1": one, "2": other}


def rectified(prefix: str, ac: tuple[str, str]) -> Parts:
    """Bridge, capacitor, load resistor and output connector on one winding."""
    rail, ground = f"{prefix}_OUT", f"{prefix}_GND"
    return {
        f"BR{prefix}": ("bridge", {"1": rail, "2": ac[0], "3": ac[1], "4": ground}),
        f"C{prefix}": two("capacitor", rail, ground),
        f"R{prefix}": two("resistor", rail, ground),
        f"J{prefix}": two("connector", rail, ground),
    }


def toroid() -> Parts:
    """Mains transformer with nothing but wiring on the primary side and two secondaries of their own."""
    pins = {"1": "L1", "2": "N", "5": "A1", "6": "A2", "7": "B1", "8": "B2"}
    return {
        "X1": two("connector", "L", "N"),
        "F1": two("fuse", "L", "L1"),
        "T1": ("transformer", pins),
        **rectified("A", ("A1", "A2")),
        **rectified("B", ("B1", "B2")),
    }


def flyback() -> Parts:
    """Primary-side regulated: only the transformer insulates, and nobody states its windings."""
    return {
        "J1": ("inlet", {"1": "L", "2": "N"}),
        "F1": two("fuse", "L", "LF"),
        "BR1": ("bridge", {"1": "VBUS", "2": "LF", "3": "N", "4": "PGND"}),
        "C1": two("capacitor", "VBUS", "PGND"),
        "R1": two("resistor", "VBUS", "VCC"),
        "Q1": ("mosfet", {"1": "GATE", "2": "SW", "3": "PGND"}),
        "U1": ("controller", {"1": "VCC", "2": "GATE", "3": "PGND", "4": "FB"}),
        "R2": two("resistor", "AUX", "FB"),
        "R3": two("resistor", "FB", "PGND"),
        "D1": two("diode", "VCC", "AUX"),
        "D2": two("diode", "CL", "SW"),
        "R4": two("resistor", "CL", "VBUS"),
        "T1": ("transformer", {"1": "VBUS", "2": "SW", "3": "AUX", "4": "PGND", "8": "SEC", "10": "SGND"}),
        "D3": two("diode", "VOUT", "SEC"),
        "R5": two("resistor", "VOUT", "SGND"),
        "J2": two("connector", "VOUT", "SGND"),
    }


def test_a_toroid_supply_is_clean():
    assert faults(toroid()) == []
    assert sorted(s.bridged_by for s in judged(toroid()).separations) == [("T1",)] * 3


@pytest.mark.parametrize("nets", [("N", "A_GND"), ("L1", "B_OUT"), ("A_OUT", "L"), ("B_GND", "L1")])
@pytest.mark.parametrize("kind", ["resistor", "ferrite", "tvs", "net-tie"])
def test_a_part_across_a_transformer_with_bare_wiring_on_its_primary_is_named(kind, nets):
    assert faults({**toroid(), "P9": two(kind, *nets)}) == [(("P9",), ("T1",))]


@pytest.mark.parametrize("kind", ["resistor", "ferrite", "tvs", "zener", "diode"])
def test_a_part_across_a_transformer_of_unknown_windings_is_named(kind):
    assert faults(flyback()) == []
    assert faults({**flyback(), "P9": two(kind, "PGND", "SGND")}) == [(("P9",), ("T1",))]


def test_two_parts_across_a_transformer_of_unknown_windings_are_both_named():
    parts = {**flyback(), "R98": two("resistor", "PGND", "SGND"), "R99": two("resistor", "VCC", "VOUT")}
    assert faults(parts) == [(("R98", "R99"), ("T1",))]


def dropper() -> Parts:
    """Capacitive dropper: its logic hangs on neutral, and a relay switches the line with coil and contacts in one circuit."""
    return {
        "J1": ("connector", {"1": "L", "2": "N", "3": "LOAD"}),
        "F1": two("fuse", "L", "LF"),
        "C1": two("capacitor", "LF", "MID"),
        "R1": two("resistor", "LF", "BLEED"),
        "R2": two("resistor", "BLEED", "MID"),
        "R3": two("resistor", "MID", "AC"),
        "BR1": ("bridge", {"1": "V24", "2": "AC", "3": "N", "4": "GND"}),
        "C2": two("capacitor", "V24", "GND"),
        "U1": ("regulator", {"1": "V24", "2": "GND", "3": "V5"}),
        "U2": ("ic", {"1": "V5", "2": "GND", "3": "DRIVE"}),
        "Q1": ("bipolar", {"1": "DRIVE", "2": "GND", "3": "COIL"}),
        "D1": two("diode", "V24", "COIL"),
        "K1": ("relay", {"1": "LF", "2": "V24", "3": "LOAD", "5": "COIL"}),
    }


def test_a_relay_inside_a_dropper_supply_insulates_nothing_and_no_resistor_is_blamed():
    parts = dropper()
    assert faults(parts, C1={"value": 680e-9, "marks": ["X2"]}) == []
    assert judged(parts, C1={"value": 680e-9, "marks": ["X2"]}).separations == ()


def dimmer() -> Parts:
    """Triac and zero-crossing coupler; the neutral reaches the line only through the resistors of the latter."""
    return {
        "J1": ("connector", {"1": "L", "2": "N", "3": "LOAD"}),
        "F1": two("fuse", "L", "LF"),
        "Q1": ("triac", {"1": "LF", "2": "LOAD", "3": "GATE"}),
        "U1": ("optocoupler", {"1": "A", "2": "DIM", "3": "GATE", "4": "T"}),
        "R1": two("resistor", "T", "LOAD"),
        "R2": two("resistor", "+5V", "A"),
        "R3": two("resistor", "LF", "Z1"),
        "R4": two("resistor", "N", "Z2"),
        "BR1": ("bridge", {"1": "Z+", "2": "Z1", "3": "Z2", "4": "Z-"}),
        "U2": ("optocoupler", {"1": "Z+", "2": "Z-", "3": "GND", "4": "ZC"}),
        "R5": two("resistor", "+5V", "ZC"),
        "U3": ("ic", {"1": "+5V", "2": "GND", "3": "ZC", "4": "DIM"}),
        "J2": two("connector", "+5V", "GND"),
    }


@pytest.mark.parametrize("kind", ["resistor", "ferrite", "tvs"])
def test_of_a_series_chain_only_the_link_that_separates_mains_from_the_rest_is_named(kind):
    assert faults(dimmer()) == []
    assert faults({**dimmer(), "P9": two(kind, "N", "GND")}) == [(("P9",), ("U1", "U2"))]


def test_of_two_links_the_one_that_leaves_the_windings_whole_is_named():
    parts = {
        "J1": ("inlet", {"1": "L", "2": "N"}),
        "F1": two("fuse", "L", "L1"),
        "T1": ("transformer", {"1": "L1", "2": "N", "5": "HA", "6": "GND", "7": "HB"}),
        "D1": two("diode", "B+", "HA"),
        "D2": two("diode", "B+", "HB"),
        "L1": two("inductor", "B+", "B2"),
        "R1": two("resistor", "B2", "GND"),
        "J2": two("connector", "B2", "GND"),
        "P9": two("tvs", "N", "GND"),
    }
    assert faults(parts) == [(("P9",), ("T1",))]


def test_earth_with_nothing_but_capacitors_is_earth_and_no_node_of_the_mains():
    parts = {
        **flyback(),
        "C8": two("capacitor", "LF", "PE"),
        "C9": two("capacitor", "N", "PE"),
        "H1": ("mounting-hole", {"1": "PE"}),
    }
    isolation = judged(parts, C8={"value": 2.2e-9, "marks": ["Y2"]}, C9={"value": 2.2e-9, "marks": ["Y2"]})
    assert not [short for short in isolation.shorts if short.faulty]
    assert isolation.domain_of["PE"] != isolation.domain_of["N"]
    assert {crossing.part for crossing in isolation.crossings if crossing.how == "capacitor"} == {"C8", "C9"}


def test_the_net_on_both_sides_is_named_when_the_way_leads_through_circuits():
    parts = flyback()
    parts |= {
        "U2": ("optocoupler", {"1": "VOUT", "2": "K", "3": "FB", "4": "VCC"}),
        "U3": ("shunt-reference", {"1": "REF", "2": "PGND", "3": "K"}),
        "R6": two("resistor", "VOUT", "REF"),
        "R7": two("resistor", "REF", "PGND"),
        "T1": ("transformer", {"1": "VBUS", "2": "SW", "8": "SEC", "10": "SEC2"}),
        "D3": two("diode", "SEC", "PGND"),
        "D4": two("diode", "SEC", "VOUT"),
        "D5": two("diode", "SEC2", "PGND"),
        "D6": two("diode", "SEC2", "VOUT"),
        "R5": two("resistor", "VOUT", "PGND"),
        "J2": two("connector", "VOUT", "PGND"),
    }
    found = [short for short in judged(parts).shorts if short.faulty]
    assert {net for short in found for net in short.nets} == {"PGND"}
    assert {"T1", "U2"} == {ref for short in found for ref in short.parts}


def test_a_winding_end_with_capacitors_to_both_sides_belongs_to_neither_by_the_capacitor_across():
    parts = flyback()
    parts |= {
        "C5": two("capacitor", "SEC", "DBL"),
        "D3": two("diode", "VOUT", "DBL"),
        "D4": two("diode", "DBL", "SGND"),
        "C99": two("capacitor", "SEC", "PGND"),
    }
    isolation = judged(parts, C5={"value": 47e-9}, C99={"value": 33e-9})
    assert isolation.domain_of["VOUT"] != isolation.domain_of["PGND"]
    assert "C99" in {crossing.part for crossing in isolation.crossings}


def test_the_bond_of_a_secondary_to_earth_is_not_blamed_for_what_joins_it_to_the_mains():
    parts = {
        **flyback(),
        "J1": ("inlet", {"1": "L", "2": "N", "3": "PE"}),
        "R8": two("resistor", "SGND", "PE"),
    }
    assert faults(parts) == []
    assert [chain for chain, _ in faults({**parts, "P9": two("ferrite", "PGND", "SGND")})] == [("P9",)]


def test_an_output_choke_is_not_blamed_for_a_ground_net_on_both_sides():
    parts = flyback()
    parts |= {
        "T1": ("transformer", {"1": "VBUS", "2": "SW", "7": "SEC", "8": "SEC", "9": "PGND", "10": "PGND"}),
        "D3": two("diode", "VO", "SEC"),
        "L1": two("inductor", "VO", "VOUT"),
        "R5": two("resistor", "VOUT", "PGND"),
        "J2": two("connector", "VOUT", "PGND"),
    }
    assert all("L1" not in chain for chain, _ in faults(parts))


def test_an_empty_fuse_holder_keeps_nothing_apart():
    parts = {**toroid(), "RV1": two("varistor", "L1", "N"), "C1": two("capacitor", "L1", "N")}
    isolation = isolate(design(parts, frozenset({"F1"})), choice(parts, C1={"value": 1e-7, "marks": ["X2"]}), Declaration())
    assert isolation.domain_of["L"] == isolation.domain_of["L1"] == isolation.domain_of["N"]
    assert {crossing.part for crossing in isolation.crossings} == {"T1"}


def test_two_resistors_on_either_side_of_a_fuse_are_named_not_the_net_behind_it():
    parts = {
        "X1": ("connector", {"1": "L", "2": "N"}),
        "F1": two("fuse", "L", "LF"),
        "T1": ("transformer", {"1": "LF", "2": "N", "3": "A1", "4": "A2"}),
        **rectified("A", ("A1", "A2")),
        "K1": ("relay", {"1": "L", "2": "A_OUT", "3": "HEATER", "5": "COIL"}),
        "Q1": ("bipolar", {"1": "DRIVE", "2": "A_GND", "3": "COIL"}),
        "R1": two("resistor", "A_OUT", "DRIVE"),
        "D1": two("diode", "A_OUT", "COIL"),
        "X2": two("connector", "HEATER", "N"),
    }
    assert faults(parts) == []
    parts |= {"R98": two("resistor", "LF", "A_GND"), "R99": two("resistor", "L", "A_OUT")}
    assert {ref for chain, _ in faults(parts) for ref in chain} == {"R98", "R99"}


def test_the_primary_of_a_current_transformer_that_leads_to_a_terminal_is_one_winding():
    parts = {
        **flyback(),
        "T2": ("current-transformer", {"1": "SW", "2": "SW2", "3": "CS", "4": "SGND"}),
        "R8": two("resistor", "CS", "SGND"),
        "X2": two("connector", "SW2", "VBUS"),
    }
    isolation = judged(parts)
    assert isolation.domain_of["SW2"] == isolation.domain_of["SW"] != isolation.domain_of["CS"]


@pytest.mark.parametrize(
    ("ref", "count", "kind"), [("T2", 6, "gate-drive-transformer"), ("GDT1", 2, "gas-tube"), ("GDT1", 3, "gas-tube")]
)
def test_gdt_is_a_gas_tube_only_with_the_pins_of_one(ref, count, kind):
    pins = tuple(Pin(str(at), "", "", f"n{at}") for at in range(1, count + 1))
    assert judge(Part(ref, pins, (Fact("value", "GDT 1:1:1" if count > 3 else "GDT 230V"),), ())).kind == kind


@pytest.mark.parametrize("nets", [("N", "S1"), ("LF", "S2"), ("S1", "L"), ("S2", "N")])
@pytest.mark.parametrize("first", [False, True])
def test_a_resistor_across_a_transformer_with_bare_terminals_on_both_sides_is_named(nets, first):
    parts = {
        "J1": two("connector", "L", "N"),
        "F1": two("fuse", "L", "LF"),
        "T1": ("transformer", {"1": "LF", "5": "N", "7": "S1", "9": "S2"}),
        "J2": two("connector", "S1", "S2"),
    }
    planted = {"P9": two("resistor", *nets)}
    assert faults({**planted, **parts} if first else {**parts, **planted}) == [(("P9",), ("T1",))]
