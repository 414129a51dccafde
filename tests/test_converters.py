"""Bounds on converters: properties that hold whatever the turns and rails, and an enumeration of conduction states beside them.

The enumeration shares no code with the program: it takes the true directions of the windings, lets one valve conduct at a time
without a drop, keeps the states in which no other valve would conduct, and reads the plateaus off.
"""

from __future__ import annotations

import math
import re
from itertools import pairwise, permutations

import pytest
from analyses import analysis
from converters import (
    FREEWHEEL,
    FULL_WAVE,
    INPUT,
    OUTPUT,
    capacitor,
    choke,
    core,
    diode,
    direct,
    flyback,
    part,
    schottky,
    switch,
)
from hypothesis import given, settings
from hypothesis import strategies as st

CLAMP = diode("D9", "DR", "CL") + capacitor("C9", "CL", "VIN", "10nF") + part("R99", "47k", "R", "1: CL, 2: VIN")
SUPPRESSOR = part("D9", "P6KE200A", "D_TVS", "1: DR, 2: VIN", "1: A1, 2: A2")
LEG = switch("Q1", "VIN", "LEG") + switch("Q2", "LEG", "GND")

# name -> (circuit, output, pairs of nets, further rails)
CONVERTERS = {
    "flyback": (flyback("1-2:30, 3-4:10", schottky("D1", "S1", "VO")), 5, (("DR", "GND"), ("VO", "S1"))),
    "forward": (
        core("1-2:10, 3-4:10, 5-6:5", "VIN", "DR", "R1", "GND", "S1", "SGND") + switch("Q1", "DR", "GND")
        + diode("D3", "R1", "VIN") + FREEWHEEL + OUTPUT, 5, (("DR", "GND"), ("X", "S1"), ("X", "SGND"), ("VIN", "R1")),
    ),
    "two switches": (
        core("1-2:12, 3-4:6", "A", "B", "S1", "SGND") + switch("Q1", "VIN", "A") + switch("Q2", "B", "GND")
        + diode("D3", "GND", "A") + diode("D4", "B", "VIN") + FREEWHEEL + OUTPUT, 5,
        (("B", "GND"), ("A", "VIN"), ("X", "S1"), ("X", "SGND")),
    ),
    "push-pull": (
        core("1-2-3:10+10, 4-5-6:20+20", "DA", "VIN", "DB", "S1", "SGND", "S2") + switch("Q1", "DA", "GND")
        + switch("Q2", "DB", "GND") + FULL_WAVE + OUTPUT, 15, (("DA", "GND"), ("DB", "GND"), ("X", "S1"), ("X", "S2")),
    ),
    "half bridge": (
        core("1-2:10, 3-4-5:5+5", "LEG", "MID", "S1", "SGND", "S2") + LEG + capacitor("C3", "VIN", "MID", "2.2uF")
        + capacitor("C4", "MID", "GND", "2.2uF") + FULL_WAVE + OUTPUT, 5,
        (("LEG", "GND"), ("MID", "GND"), ("X", "S1"), ("X", "S2")),
    ),
    "resonant": (
        core("1-2:18, 3-4-5:6+6", "P1", "P2", "S1", "SGND", "S2") + choke("L2", "LEG", "P1") + capacitor("C3", "P2", "GND", "22nF")
        + LEG + schottky("D1", "S1", "VO") + schottky("D2", "S2", "VO") + OUTPUT, 12, (("LEG", "GND"), ("VO", "S1")),
    ),
    "SEPIC": (
        core("1-2:20, 3-4:10", "P1", "GND", "S1", "SGND") + choke("L2", "VIN", "SW") + capacitor("C3", "SW", "P1", "10uF")
        + switch("Q1", "SW", "GND") + schottky("D1", "S1", "VO") + OUTPUT, 12, (("SW", "GND"), ("SW", "P1"), ("VO", "S1")),
    ),
    "Cuk": (
        core("1-2:20, 3-4:10", "P1", "GND", "S1", "SGND") + choke("L2", "VIN", "SW") + capacitor("C3", "SW", "P1", "10uF")
        + switch("Q1", "SW", "GND") + capacitor("C4", "S1", "Y", "10uF") + schottky("D1", "Y", "SGND") + choke("L3", "Y", "VO")
        + OUTPUT, -12, (("SW", "GND"), ("SGND", "Y")),
    ),
}  # fmt: skip


def bounds(circuit: str, declaration: str, pairs):
    """(surely, never above) of each pair; (0, inf) where nothing is told."""
    stress = analysis(INPUT + circuit, declaration).stress
    told = [stress.between(one, other) for one, other in pairs]
    return [
        (0.0, math.inf) if one is None else (one.peak.surely, math.inf if one.peak.never_above is None else one.peak.never_above)
        for one in told
    ]


@pytest.mark.parametrize("name", CONVERTERS)
def test_raising_the_supply_lowers_no_bound(name):
    circuit, output, pairs = CONVERTERS[name]
    rising = [bounds(circuit, direct(volts, output), pairs) for volts in (18, 24, 36, 48, 100, 380)]
    assert all(most < math.inf for found in rising for _, most in found)
    for low, high in pairwise(rising):
        assert all(a[0] <= b[0] + 1e-9 and a[1] <= b[1] + 1e-9 for a, b in zip(low, high, strict=True))


@pytest.mark.parametrize("clamp", [CLAMP, SUPPRESSOR], ids=["capacitor", "suppressor"])
@pytest.mark.parametrize("name", ["flyback", "forward"])
def test_a_clamp_raises_no_bound(name, clamp):
    circuit, output, pairs = CONVERTERS[name]
    bare, clamped = (bounds(circuit + more, direct(48, output), pairs) for more in ("", clamp))
    assert all(with_clamp <= without + 1e-9 for (_, without), (_, with_clamp) in zip(bare, clamped, strict=True))


@pytest.mark.parametrize("name", CONVERTERS)
def test_without_turns_nothing_on_a_winding_is_bounded_and_the_question_is_the_turns(name):
    circuit, output, _ = CONVERTERS[name]
    bare = circuit.partition(', turns: "')
    without = bare[0] + bare[2].partition('"')[2]
    stress = analysis(INPUT + without, direct(48, output)).stress
    assert stress.loose["S1"] == ("T1", "turns of its windings")
    far = {"Cuk": "Y"}.get(name, "VO" if name in ("flyback", "resonant", "SEPIC") else "X")
    found = stress.between("S1", far)
    assert found is None or found.peak.never_above is None


@pytest.mark.parametrize("name", CONVERTERS)
def test_the_order_of_pins_and_windings_does_not_count(name):
    """Nothing but turns is taken from a list of windings: neither dots nor which one is the primary."""
    circuit, output, pairs = CONVERTERS[name]
    head, _, rest = circuit.partition(', turns: "')
    turns, _, tail = rest.partition('"')
    whole = bounds(circuit, direct(48, output), pairs)
    for order in list(permutations(turns.split(", ")))[:3]:
        turned = []
        for at, winding in enumerate(order):
            pins, _, counts = winding.partition(":")
            back = "-".join(reversed(pins.split("-"))) + ":" + "+".join(reversed(counts.split("+")))
            turned.append(back if at % 2 else winding)
        again = bounds(f'{head}, turns: "{", ".join(turned)}"{tail}', direct(48, output), pairs)
        assert again == [pytest.approx(pair) for pair in whole]


def states(valves):
    """Volts per turn of every state in which one valve conducts and no other would. valves: (volts, turns) of the anode over the
    cathode, volts + turns x e; a closed switch is a valve that conducts."""
    found = []
    for at, (volts, turns) in enumerate(valves):
        e = -volts / turns
        if all(v + n * e <= 1e-9 for other, (v, n) in enumerate(valves) if other != at):
            found.append(e)
    return found


@settings(max_examples=20, deadline=None)
@given(st.integers(12, 400), st.integers(5, 120), st.integers(2, 20), st.lists(st.integers(1, 20), min_size=1, max_size=3))
def test_flybacks_of_one_to_three_outputs_against_the_enumeration(supply, primary, tenths, counts):
    """Outputs of one core agree in their volts per turn, but for a few per cent."""
    outputs = [(round(tenths / 10 * turns * (1 + at / 50), 2), turns) for at, turns in enumerate(counts)]
    valves = [(-supply, primary)] + [(-volts, -turns) for volts, turns in outputs]  # e > 0 while the switch is closed
    found = states(valves)
    on, off = max(found), min(found)
    at = [f"{at * 2 + 3}-{at * 2 + 4}:{turns}" for at, (_, turns) in enumerate(outputs)]
    nets = [net for number, _ in enumerate(outputs) for net in (f"S{number}", "SGND")]
    circuit = INPUT + core(", ".join([f"1-2:{primary}", *at]), "VIN", "DR", *nets) + switch("Q1", "DR", "GND")
    for number, _ in enumerate(outputs):
        circuit += schottky(f"D{number + 1}", f"S{number}", f"V{number}") + capacitor(f"C{number + 2}", f"V{number}", "SGND")
    rails = ", ".join(f"V{number}: {{voltage: {volts} V, return: SGND}}" for number, (volts, _) in enumerate(outputs))
    stress = analysis(circuit, f"{{supply: {{dc: {supply} V, tolerance: 0 %, origin: isolated, outputs: {{{rails}}}}}}}").stress
    drain = stress.between("DR", "GND").peak
    exact = supply - primary * off
    assert drain.surely <= exact * 1.001 + 1e-6
    assert exact <= drain.never_above + 1e-6
    told_apart = all(turns * on > 1.2 * (volts + 1.5) for volts, turns in outputs)  # else no rectifier tells the directions
    assert not told_apart or drain.never_above <= exact * 1.04 + 0.9 * max(primary / turns for _, turns in outputs) + 1.5
    for number, (volts, turns) in enumerate(outputs):
        told, exact = stress.between(f"V{number}", f"S{number}").peak, volts + turns * on
        assert told.surely <= exact * 1.001 + 1e-6
        assert exact <= told.never_above + 1e-6
        assert not told_apart or told.never_above <= exact + 1.5 * turns / primary + 1e-6


@settings(max_examples=20, deadline=None)
@given(st.integers(12, 400), st.integers(5, 60), st.integers(5, 60), st.integers(2, 60))
def test_forwards_with_a_reset_winding_against_the_enumeration(supply, primary, reset, secondary):
    found = states([(-supply, primary), (-supply, -reset)])
    on, off = max(found), min(found)
    output = supply * secondary / primary / 3
    circuit = (
        INPUT
        + core(f"1-2:{primary}, 3-4:{reset}, 5-6:{secondary}", "VIN", "DR", "R1", "GND", "S1", "SGND")
        + switch("Q1", "DR", "GND") + diode("D3", "R1", "VIN") + FREEWHEEL + OUTPUT
    )  # fmt: skip
    stress = analysis(circuit, direct(supply, round(output, 3))).stress
    expected = {
        ("DR", "GND"): supply - primary * off,
        ("X", "SGND"): secondary * on,
        ("X", "S1"): -secondary * off,
        ("R1", "VIN"): supply + reset * on,
    }
    ratio = max(primary, reset, secondary) / min(primary, reset)
    for (one, other), exact in expected.items():
        told = stress.between(one, other).peak
        assert told.surely <= exact * 1.001 + 1.0, (one, other)
        assert exact <= told.never_above + 1e-6, (one, other)
        dry = output if (one, other) == ("X", "S1") else 0.0
        assert told.never_above <= exact + dry + 3 * ratio + 1.5, (one, other)


@pytest.mark.parametrize("turns", ["1-2:48, 3-4:8", "1-2:32, 3-4:10"])
def test_a_supply_whose_polarity_nothing_tells_bounds_nothing(turns):
    """Without a ground by its name or by a pin either conductor may be the higher; a bound from a guess would be a false proof."""
    circuit = INPUT + flyback(turns, schottky("D1", "S1", "VO")) + CLAMP  # more parts stand on the higher conductor
    circuit = re.sub(r"\bVIN\b", "ONE", re.sub(r"\bGND\b", "TWO", circuit))
    declared = "{supply: {dc: 24 V, tolerance: 0 %, outputs: {VO: {voltage: 5 V, return: SGND}}}, "
    declared += "domains: {supply: {nets: [ONE, TWO], side: primary}}}"
    found = analysis(circuit, declared).stress.between("DR", "TWO")
    assert found is None or found.peak.never_above is None or found.peak.never_above >= 24 + 5 * 3.2
