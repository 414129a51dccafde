"""Static stress against closed forms, a numerical simulation and a nodal solution that share no code with the program."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
from analyses import analysis
from hypothesis import given, settings
from hypothesis import strategies as st

MAINS = "{supply: {mains: 220 V, tolerance: 0 %, frequency: 50 Hz}}"
ENTRY = """
J1: {value: MAINS, symbol: Screw_Terminal_01x02, pins: {1: AC_L, 2: AC_N}}
F1: {value: T2A, symbol: Fuse, description: FUSE 2A 250VAC T 5x20, pins: {1: AC_L, 2: LF}}
RV1: {value: 10D471K, symbol: Varistor, description: VARISTOR 300VAC 10MM, pins: {1: LF, 2: AC_N}}
"""
BRIDGE = """
BR1: {value: MB6S, symbol: D_Bridge, pins: {1: VB, 2: PG, 3: LF, 4: AC_N}, names: {1: +, 2: "-", 3: "~", 4: "~"}}
C1: {value: 22uF, symbol: CP, description: CAP ALUM 22UF 400V, pins: {1: VB, 2: PG}}
R9: {value: 1M, symbol: R, pins: {1: VB, 2: PG}}
"""


def simulated(circuit: str, rms: float) -> dict[str, float]:
    """Voltages after 40 cycles of a transient solution by small steps: ideal source, diodes of 0.8 V and 0.1 ohm, 22 uF, 1 Mohm."""
    step, volts = 2e-5, {"upper": 0.0, "lower": 0.0}
    for at in range(int(0.8 / step)):
        line = math.sqrt(2) * rms * math.sin(2 * math.pi * 50 * at * step)
        if circuit == "bridge":
            current = max(0.0, (abs(line) - volts["upper"] - 1.6) / 0.2)
            volts["upper"] += (current - volts["upper"] / 1e6) * step / 22e-6 if current < 1e4 else 0.0
        else:  # half wave, and with "doubler" the other half as well
            up, down = max(0.0, (line - volts["upper"] - 0.8) / 0.1), max(0.0, (-line - volts["lower"] - 0.8) / 0.1)
            volts["upper"] += (up - volts["upper"] / 1e6) * step / 22e-6
            volts["lower"] += (down - volts["lower"] / 1e6) * step / 22e-6 if circuit == "doubler" else 0.0
    return volts


def test_220_v_rectifies_to_311_v():  # common practice, no source
    found = analysis(ENTRY + BRIDGE, MAINS).stress.between("VB", "PG")
    assert found.shape == "dc"
    assert found.peak.never_above == pytest.approx(311.1, abs=0.05)
    assert found.peak.surely <= simulated("bridge", 220)["upper"] <= found.peak.never_above


# stress.md 1, recomputed there: 265 V -> 374.8, 264 -> 373.4, 305 -> 431, 132 -> 186.7
@pytest.mark.parametrize(("rms", "crest"), [(265, 374.8), (264, 373.4), (305, 431), (132, 186.7)])
def test_the_crest_of_a_bridge(rms, crest):
    found = analysis(ENTRY + BRIDGE, MAINS.replace("220", str(rms))).stress.between("VB", "PG")
    assert found.peak.never_above == pytest.approx(crest, rel=1e-3)


def test_tolerance_counts_for_parts_and_not_for_insulation():
    stress = analysis(ENTRY + BRIDGE, "{supply: {mains: 100-240 V, tolerance: 10 %}}").stress
    assert stress.between("VB", "PG").peak.never_above == pytest.approx(math.sqrt(2) * 264)
    assert stress.rated("VB", "PG").peak.never_above == pytest.approx(math.sqrt(2) * 240)


def test_half_wave_and_doubler_against_the_simulation():
    half = (
        ENTRY
        + """
D1: {value: 1N4007, symbol: D, pins: {1: VB, 2: LF}, names: {1: K, 2: A}}
C1: {value: 22uF, symbol: CP, pins: {1: VB, 2: AC_N}}
R9: {value: 1M, symbol: R, pins: {1: VB, 2: AC_N}}
"""
    )
    found = analysis(half, MAINS).stress
    upper = found.between("VB", "AC_N").peak
    assert upper.surely <= simulated("half", 220)["upper"] <= upper.never_above
    assert found.between("VB", "LF").peak.never_above == pytest.approx(2 * math.sqrt(2) * 220)  # reverse voltage of the diode
    doubler = (
        half
        + """
D2: {value: 1N4007, symbol: D, pins: {1: LF, 2: VN}, names: {1: K, 2: A}}
C2: {value: 22uF, symbol: CP, pins: {1: AC_N, 2: VN}}
R8: {value: 1M, symbol: R, pins: {1: AC_N, 2: VN}}
"""
    )
    volts = simulated("doubler", 132)
    found = analysis(doubler, MAINS.replace("220", "132")).stress
    whole = found.between("VB", "VN").peak
    # stress.md 1 (from memory there): doubler 2 sqrt2 x 132 V = 373 V, each half sqrt2 x U
    assert whole.never_above == pytest.approx(373.4, abs=0.1)
    assert whole.surely <= volts["upper"] + volts["lower"] <= whole.never_above
    assert found.between("AC_N", "VN").peak.never_above == pytest.approx(math.sqrt(2) * 132)
    assert found.sign("VB", "VN") == 1


def test_a_start_up_string_divides_by_value_and_tolerance_and_the_supply_behind_it_is_not_at_bus_voltage():
    circuit = (
        ENTRY
        + BRIDGE
        + """
R1: {value: 220k, symbol: R, description: RES 220K 1% 1206, pins: {1: VB, 2: M1}}
R2: {value: 110k, symbol: R, description: RES 110K 1% 1206, pins: {1: M1, 2: VCC}}
C2: {value: 10u, symbol: C, description: CAP CER 10UF 35V X5R 1206, pins: {1: VCC, 2: PG}}
U1:
  value: controller
  symbol: PWM_Controller
  description: Off-line current-mode PWM controller SOT-23-6
  pins: {1: PG, 2: FB, 3: CS, 5: VCC, 6: G}
  names: {1: GND, 2: FB, 3: CS, 5: VCC, 6: DRV}
R3: {value: 10k, symbol: R, pins: {1: FB, 2: PG}}
R4: {value: 10k, symbol: R, pins: {1: CS, 2: PG}}
R5: {value: 10k, symbol: R, pins: {1: G, 2: PG}}
"""
    )
    stress = analysis(circuit, MAINS).stress
    share = 220 * 1.01 / (220 * 1.01 + 110 * 0.99)
    top = stress.between("VB", "M1").peak
    assert top.never_above == pytest.approx(math.sqrt(2) * 220 * share)
    assert top.surely > 170
    behind = stress.between("VCC", "PG")
    assert behind is None or behind.peak.surely == 0


def test_a_three_phase_supply_is_declared_from_line_to_line():
    circuit = """
J1: {value: MAINS, symbol: Screw_Terminal_01x04, pins: {1: L1, 2: L2, 3: L3, 4: N}}
RV1: {value: 20D102K, symbol: Varistor, pins: {1: L1, 2: L2}}
RV2: {value: 20D102K, symbol: Varistor, pins: {1: L2, 2: L3}}
RV3: {value: 14D471K, symbol: Varistor, pins: {1: L3, 2: N}}
"""
    stress = analysis(circuit, "{supply: {mains: 400 V, phases: 3, tolerance: 0 %}}").stress
    assert stress.between("L1", "L2").rms.never_above == pytest.approx(400)
    assert stress.between("L3", "N").rms.never_above == pytest.approx(400 / math.sqrt(3))


SECONDARY = """
T1:
  value: EE16
  symbol: Transformer_2P_1S
  windings: 1-2, 5-6
  pins: {1: VB, 2: DR, 5: SEC, 6: SG}
Q1: {value: 2N60, symbol: NMOS, description: MOSFET N-CH 600V 2A, pins: {1: G, 2: DR, 3: PG}, names: {1: G, 2: D, 3: S}}
R7: {value: 10k, symbol: R, pins: {1: G, 2: PG}}
D3: {value: 1N5822, symbol: D, pins: {1: VO, 2: SEC}, names: {1: K, 2: A}}
C4: {value: 470uF, symbol: CP, description: CAP ALUM 470UF 25V, pins: {1: VO, 2: SG}}
CY1: {value: 1nF, symbol: C, description: CAP CER 1NF 400VAC Y1, pins: {1: PG, 2: SG}}
CY2: {value: 1nF, symbol: C, description: CAP CER 1NF 400VAC Y1, pins: {1: VB, 2: SG}}
J2: {value: OUT, symbol: Conn_01x02, pins: {1: VO, 2: SG}}
"""


def test_working_voltage_of_the_bus_against_the_closed_forms():
    """stress.md 5, checked there by Monte Carlo: at 265 V bulk - has 375 V peak and 187 r.m.s., bulk + 375 peak and 294 r.m.s."""
    stress = analysis(ENTRY + BRIDGE + SECONDARY, MAINS.replace("220", "265")).stress
    found = {ref: voltage for (ref, _), voltage in stress.across.items()}
    low, high = found["CY1"], found["CY2"]
    assert (low.peak.never_above, low.rms.never_above) == pytest.approx((374.8, 187.4), rel=2e-3)
    assert (high.peak.never_above, high.rms.never_above) == pytest.approx((374.8, 294), rel=3e-3)


def test_a_winding_with_its_switch_is_not_bounded_by_the_bus():
    stress = analysis(ENTRY + BRIDGE + SECONDARY, MAINS).stress
    drain = stress.between("DR", "PG")
    assert drain is None or drain.peak.never_above is None


def test_diodes_into_held_rails_bound_a_winding():
    circuit = (
        ENTRY
        + BRIDGE
        + """
L1: {value: 1mH, symbol: L, pins: {1: MID, 2: SW}}
C5: {value: 1u, symbol: C, pins: {1: MID, 2: PG}}
Q1: {value: 2N60, symbol: NMOS, description: MOSFET N-CH 600V 2A, pins: {1: G, 2: SW, 3: PG}, names: {1: G, 2: D, 3: S}}
R7: {value: 10k, symbol: R, pins: {1: G, 2: PG}}
D5: {value: UF4007, symbol: D, pins: {1: VB, 2: SW}, names: {1: K, 2: A}}
D6: {value: UF4007, symbol: D, pins: {1: SW, 2: PG}, names: {1: K, 2: A}}
"""
    )
    found = analysis(circuit, MAINS).stress.between("SW", "PG")
    assert found.peak.never_above == pytest.approx(math.sqrt(2) * 220 + 1.5)
    free = analysis(circuit.replace("D5: {", "D5: {fitted: false, "), MAINS).stress.between("SW", "PG")
    assert free is None or free.peak.never_above is None


OUTPUT = """
U3: {value: TL431, symbol: TL431, pins: {1: REF, 2: SG, 3: K}, names: {1: REF, 2: A, 3: K}}
R1: {value: 38k3, symbol: R, description: RES 38.3K 1% 0805, pins: {1: VO, 2: REF}}
R2: {value: 10k, symbol: R, description: RES 10K 1% 0805, pins: {1: REF, 2: SG}}
R3: {value: 1k, symbol: R, pins: {1: VO, 2: LA}}
U2: {value: "817", symbol: Optocoupler, description: OPTOISO 5KV TRANS 4DIP, pins: {1: LA, 2: K, 3: PG, 4: FB}}
R4: {value: 10k, symbol: R, pins: {1: FB, 2: VB}}
J2: {value: OUT, symbol: Conn_01x02, pins: {1: VO, 2: SG}}
C4: {value: 470uF, symbol: CP, description: CAP ALUM 470UF 25V, pins: {1: VO, 2: SG}}
"""


def test_a_divider_of_a_shunt_reference_gives_the_output():
    found = analysis(ENTRY + BRIDGE + OUTPUT, MAINS).stress.between("VO", "SG").peak
    assert found.surely < 2.495 * (1 + 38.3 / 10) < found.never_above
    assert found.never_above - found.surely < 1.2


def test_a_zener_and_the_diode_of_a_coupler_hold_their_sum():
    """Common practice, no source: a coupler's diode drops 1.0 to 1.3 V, so 4.2 V of zener would need 0.8 V to hold 5.0 V."""
    circuit = (
        ENTRY
        + BRIDGE
        + """
U2: {value: "817", symbol: Optocoupler, pins: {1: LA, 2: SG, 3: PG, 4: FB}, names: {1: A, 2: K, 3: E, 4: C}}
D5: {value: 4V2, symbol: D_Zener, description: ZENER 4.2V 500MW, pins: {1: VO, 2: LA}, names: {1: K, 2: A}}
R4: {value: 10k, symbol: R, pins: {1: FB, 2: VB}}
J2: {value: OUT, symbol: Conn_01x02, pins: {1: VO, 2: SG}}
C4: {value: 470uF, symbol: CP, description: CAP ALUM 470UF 25V, pins: {1: VO, 2: SG}}
"""
    )
    found = analysis(circuit, MAINS).stress.between("VO", "SG").peak
    assert found.surely == pytest.approx(4.2 * 0.95 + 1.0)
    assert found.never_above == pytest.approx(4.2 * 1.05 + 1.3)


@st.composite
def ladders(draw):
    """Resistors between a handful of nets that all hang on the bus somehow, as (one, other, ohms)."""
    nets = ["VB", "PG"] + [f"N{at}" for at in range(draw(st.integers(1, 5)))]
    edges = [(net, draw(st.sampled_from(nets[:at])), draw(st.integers(1, 1000))) for at, net in enumerate(nets) if at > 1]
    more = draw(st.lists(st.tuples(st.sampled_from(nets), st.sampled_from(nets), st.integers(1, 1000)), max_size=6))
    return nets, edges + [edge for edge in more if edge[0] != edge[1]]


def nodal(nets, edges, volts):
    """Potentials by Kirchhoff's current law, in exact fractions: VB at `volts`, PG at 0."""
    inner = nets[2:]
    rows = []
    for net in inner:
        row = dict.fromkeys(inner, Fraction(0))
        known = Fraction(0)
        for one, other, ohms in edges:
            if net in (one, other):
                far = other if net == one else one
                row[net] += Fraction(1, ohms)
                if far in row:
                    row[far] -= Fraction(1, ohms)
                else:
                    known += Fraction(volts if far == "VB" else 0, ohms)
        rows.append([*(row[name] for name in inner), known])
    for at in range(len(inner)):  # Gauss and Jordan
        pivot = next((down for down in range(at, len(inner)) if rows[down][at]), None)
        if pivot is None:
            return None
        rows[at], rows[pivot] = rows[pivot], rows[at]
        rows[at] = [cell / rows[at][at] for cell in rows[at]]
        for other in range(len(inner)):
            if other != at:
                rows[other] = [cell - rows[other][at] * top for cell, top in zip(rows[other], rows[at], strict=True)]
    return {"VB": Fraction(volts), "PG": Fraction(0)} | {net: rows[at][-1] for at, net in enumerate(inner)}


@settings(max_examples=60, deadline=None)
@given(ladders())
def test_every_voltage_of_a_resistor_network_lies_within_its_bounds(network):
    nets, edges = network
    solved = nodal(nets, edges, 400)
    parts = "\n".join(
        f"R{at + 20}: {{value: {ohms}k, symbol: R, pins: {{1: {one}, 2: {other}}}}}" for at, (one, other, ohms) in enumerate(edges)
    )
    stress = analysis(ENTRY + BRIDGE + parts, "{supply: {mains: 220 V}, rails: {VB: {voltage: 311 V, return: PG}}}").stress
    if solved is None:
        return
    scale = stress.between("VB", "PG").peak.never_above / 400
    for one, other, _ in edges:
        exact = abs(float(solved[one] - solved[other])) * scale
        found = stress.between(one, other)
        if found is None:
            continue
        assert found.peak.never_above is None or exact <= found.peak.never_above * 1.0001 + 1e-6, (one, other)
        assert exact >= found.peak.surely * 0.98 - 1.5, (one, other)


def flyback(turns: str, volts: float) -> str:
    return f"""
T1: {{value: EE16, symbol: Transformer_2P_1S, turns: "{turns}", pins: {{1: VB, 2: DR, 5: SEC, 6: SG}}}}
Q1: {{value: 2N60, symbol: NMOS, description: MOSFET N-CH 600V 2A, pins: {{1: G, 2: DR, 3: PG}}, names: {{1: G, 2: D, 3: S}}}}
R7: {{value: 10k, symbol: R, pins: {{1: G, 2: PG}}}}
D3: {{value: 1N5822, symbol: D, pins: {{1: VO, 2: SEC}}, names: {{1: K, 2: A}}}}
C4: {{value: 470uF, symbol: CP, description: CAP ALUM 470UF 25V, pins: {{1: VO, 2: SG}}}}
J2: {{value: OUT, symbol: Conn_01x02, pins: {{1: VO, 2: SG}}}}
"""


# stress.md 5, closed form checked there by Monte Carlo: drain of a flyback at 265 V against an earthed secondary, by the
# voltage reflected from it: 80 V -> 341 V r.m.s., 110 -> 357, 135 -> 370
@pytest.mark.parametrize(("reflected", "rms"), [(80, 341), (110, 357), (135, 370)])
def test_working_voltage_of_a_flyback_transformer(reflected, rms):
    output = 8.5  # V; with the 1.5 V that a diode may drop, 10 V on a tenth of the turns
    turns = f"1-2:{reflected}, 5-6:10"
    declared = f"{{supply: {{mains: 265 V, tolerance: 0 %, outputs: {{VO: {{voltage: {output} V, return: SG}}}}}}}}"
    stress = analysis(ENTRY + BRIDGE + flyback(turns, output), declared).stress
    found = next(voltage for (ref, _), voltage in stress.across.items() if ref == "T1")
    assert rms <= found.rms.never_above <= 1.04 * rms
    # the plateau is 374.8 V + what is reflected; spikes are allowed for on top of it
    assert 374.8 + reflected <= found.peak.never_above <= 374.8 + 1.5 * reflected + 2 * output


def test_a_rectifier_that_would_short_the_switch_settles_the_direction_of_a_winding():
    """Both directions of the secondary are tried; with the forward one the diode would short the closing switch."""
    declared = "{supply: {mains: 265 V, tolerance: 0 %, outputs: {VO: {voltage: 8.5 V, return: SG}}}}"
    steps = analysis(ENTRY + BRIDGE + flyback("1-2:80, 5-6:10", 8.5), declared).stress
    found = next(voltage for (ref, _), voltage in steps.across.items() if ref == "T1")
    assert " or " not in _swing(found.peak.step)


def _swing(step) -> str:
    """The sentence that tells the volts per turn, out of a derivation."""
    stack = [step]
    while stack:
        at = stack.pop()
        if "V per turn" in getattr(at, "text", ""):
            return at.text.partition("within ")[2]
        stack.extend(link for link in getattr(at, "inputs", ()))
    raise AssertionError("no volts per turn in the derivation")


def test_a_mains_transformer_follows_the_line_by_its_rated_voltages():
    circuit = """
J1: {value: MAINS, symbol: Screw_Terminal_01x02, pins: {1: AC_L, 2: AC_N}}
F1: {value: 100mA T, symbol: Fuse, description: FUSE 100MA 250VAC T 5x20, pins: {1: AC_L, 2: LF}}
T1: {value: 230V 9V 3VA, symbol: Transformer_1P_1S, pins: {1: LF, 2: AC_N, 3: S1, 4: S2}}
BR1: {value: DB104, symbol: D_Bridge, pins: {1: VRAW, 2: GND, 3: S1, 4: S2}, names: {1: +, 2: "-", 3: "~", 4: "~"}}
C1: {value: 1000u/25V, symbol: CP, pins: {1: VRAW, 2: GND}}
U1: {value: "7805", symbol: LM7805, pins: {1: VRAW, 2: GND, 3: VO}, names: {1: IN, 2: GND, 3: OUT}}
C2: {value: 100n, symbol: C, pins: {1: VO, 2: GND}}
J2: {value: OUT, symbol: Conn_01x02, pins: {1: VO, 2: GND}}
"""
    stress = analysis(circuit, "{supply: {mains: 230 V}}").stress
    found = next(voltage for (ref, _), voltage in stress.across.items() if ref == "T1")
    secondary = 1.3 * 9  # without load, as a small transformer may have it (stress.md 1, from memory)
    assert 230 <= found.rms.never_above <= 230 + 2 * secondary
    assert found.peak.never_above <= math.sqrt(2) * 230 + 3 * math.sqrt(2) * secondary


def test_the_coil_of_a_mains_relay_carries_no_line_on():
    parts = """
K1: {value: RELAY 230VAC, symbol: Relay, pins: {A1: AC_L, A2: AC_N, 11: OUT1, 14: OUT2}}
J5: {value: CONTACT, symbol: Screw_Terminal_01x02, pins: {1: OUT1, 2: OUT2}}
"""
    stress = analysis(ENTRY + parts).stress
    assert stress.poles["AC_L"] == "AC_L"
    assert stress.poles["AC_N"] == "AC_N"


@pytest.mark.parametrize(
    ("text", "volts"),
    [
        ("12V OUT", 12),
        ("sortie LED 36V 550mA", 36),
        ("Ausgang 5,1 V", 5.1),
        ("OUT 300V", None),
        ("12V", None),
        ("OUT 5V/12V", None),
    ],
)
def test_the_text_of_an_output_connector_states_its_voltage(text, volts):
    """A figure without a word for an output may be a rating, and so may one above what a person may touch."""
    circuit = (
        ENTRY
        + BRIDGE
        + f"""
U2: {{value: "817", symbol: Optocoupler, description: OPTOISO 5KV TRANS 4DIP, pins: {{1: LA, 2: GND, 3: PG, 4: FB}}}}
R3: {{value: 1k, symbol: R, pins: {{1: VO, 2: LA}}}}
R4: {{value: 10k, symbol: R, pins: {{1: FB, 2: VB}}}}
J2: {{value: "{text}", symbol: Conn_01x02, pins: {{1: VO, 2: GND}}}}
"""
    )
    found = analysis(circuit, MAINS).stress.between("VO", "GND")
    if volts is None:
        assert found is None or found.peak.surely == 0
    else:
        assert (found.peak.surely, found.peak.never_above) == pytest.approx((0.9 * volts, 1.1 * volts))
