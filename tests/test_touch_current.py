"""The current through a person: the network of IEC 60990 figure 4, and capacitors between the mains and what a person touches.

Outside checks: a nodal solution by plain elimination, a table that was computed from the component values elsewhere, printed
examples, and a half wave that is summed up sample by sample.
"""

from __future__ import annotations

import math
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker.formulas import touch_current as formulas
from checker.formulas.nodal import star_mesh
from tests.analyses import analysis

# f, |Z|, U1 per ampere, U2 per ampere, 500 / U2: reference/standards.yaml iec60990_fig4_response, computed there from the component
# values (RS 1500 ohm, CS 0.22 uF, RB 500 ohm, R1 10 kohm, C1 22 nF), which were seen on two public pages.
FIGURE_4 = """
20 1998.4 499.98 499.789 1.0
50 1990.0 499.88 498.689 1.003
60 1985.7 499.83 498.115 1.004
100 1961.0 499.52 494.815 1.01
200 1857.4 498.19 480.178 1.041
500 1433.3 491.92 404.669 1.236
1000 972.5 483.98 283.679 1.763
2000 660.9 478.77 162.853 3.07
5000 511.9 476.65 68.253 7.326
10000 485.4 476.31 34.368 14.549
20000 478.5 476.22 17.214 29.046
50000 476.6 476.2 6.889 72.578
100000 476.3 476.19 3.445 145.145
200000 476.2 476.19 1.722 290.285
500000 476.2 476.19 0.689 725.709
1000000 476.2 476.19 0.344 1451.416
"""
ROWS = [tuple(map(float, line.split())) for line in FIGURE_4.split("\n") if line]


def eliminated(rows: list[list[complex]]) -> list[complex]:
    """The solution of a linear system with the right side as last column, by Gauss elimination with pivots."""
    size = len(rows)
    for at in range(size):
        pivot = max(range(at, size), key=lambda row: abs(rows[row][at]))
        rows[at], rows[pivot] = rows[pivot], rows[at]
        for row in range(size):
            if row != at:
                factor = rows[row][at] / rows[at][at]
                rows[row] = [one - factor * other for one, other in zip(rows[row], rows[at], strict=True)]
    return [row[-1] / row[at] for at, row in enumerate(rows)]


def solved(branches, driven) -> dict[str, complex]:
    """Node potentials of (node, node, admittance), with the potentials of the driven nodes given."""
    free = sorted({end for one, other, _ in branches for end in (one, other)} - set(driven))
    rows = [[0j] * (len(free) + 1) for _ in free]
    for one, other, admittance in branches:
        for here, there in ((one, other), (other, one)):
            if here in driven:
                continue
            at = free.index(here)
            rows[at][at] += admittance
            if there in driven:
                rows[at][-1] += admittance * driven[there]
            else:
                rows[at][free.index(there)] -= admittance
    return dict(zip(free, eliminated(rows), strict=True)) | dict(driven)


def person(frequency: float, node: str):
    """Branches of IEC 60990 figure 4 from that node to earth; U1 stands at `rb`, U2 at `u2`."""
    omega = 2j * math.pi * frequency
    return [
        (node, "rb", 1 / 1500 + omega * 0.22e-6),
        ("rb", "earth", 1 / 500),
        ("rb", "u2", 1 / 10e3),
        ("u2", "earth", omega * 22e-9),
    ]


@pytest.mark.parametrize(("frequency", "z", "u1", "u2", "factor"), ROWS)
def test_the_network_answers_as_the_table(frequency, z, u1, u2, factor):
    assert abs(formulas.z_input(frequency)) == pytest.approx(z, abs=0.051)
    assert formulas.u1_per_ampere(frequency) == pytest.approx(u1, abs=0.0051)
    assert formulas.u2_per_ampere(frequency) == pytest.approx(u2, abs=0.00051)
    assert 500 / formulas.u2_per_ampere(frequency) == pytest.approx(factor, rel=6e-4)


@given(st.floats(15.0, 1e6))
def test_the_network_answers_as_a_nodal_solution(frequency):
    found = solved(person(frequency, "in"), {"in": 1.0, "earth": 0.0})
    current = (found["in"] - found["rb"]) * (1 / 1500 + 2j * math.pi * frequency * 0.22e-6)
    assert abs(formulas.z_input(frequency)) == pytest.approx(abs(1 / current))
    assert formulas.u1_per_ampere(frequency) == pytest.approx(abs(found["rb"] / current))
    assert formulas.u2_per_ampere(frequency) == pytest.approx(abs(found["u2"] / current))


@pytest.mark.parametrize(
    ("farad", "volts", "hertz", "ampere"),
    [
        (4.7e-9, 240, 50, 0.354e-3),  # reference b_ex12, forum
        (100e-9, 240, 50, 7.5e-3),  # b_ex13, textbook; the reactance is 31.8 kohm
        (2.2e-9, 264, 60, 0.219e-3),  # b_ex14
        (2.64e-9, 264, 60, 0.263e-3),  # the same part at + 20 %
        (2.51e-9, 264, 60, 0.25e-3),  # the largest that keeps 0.25 mA
        # reference/faults.md B6, computed there; 264 V, 60 Hz
        (1e-9, 264, 60, 100e-6),
        (3.3e-9, 264, 60, 328e-6),
        (4.7e-9, 264, 60, 468e-6),
        (5.64e-9, 264, 60, 561e-6),
        (10e-9, 264, 60, 995e-6),
        (100e-9, 264, 60, 9953e-6),
    ],
)
def test_printed_currents(farad, volts, hertz, ampere):
    assert formulas.capacitor_current(hertz, farad, volts) == pytest.approx(ampere, rel=0.006)


def test_a_limit_as_a_voltage_of_the_network():
    # b_ex15: 0.35 V peak across C1 is 0.7 mA peak
    ampere = 0.35 / 500
    assert ampere == pytest.approx(0.7e-3)
    assert ampere * formulas.u2_per_ampere(50) == pytest.approx(0.35, rel=0.003)


def test_a_half_wave_keeps_the_peak_and_loses_in_rms():
    # reference/faults.md B9: 0.707 in r.m.s., 141 uA peak per nF at 264 V, 60 Hz unchanged
    assert formulas.rms_of(60, 264, 0, 1e-9) == pytest.approx(formulas.rms_of(60, 264, 1e-9, 0) / math.sqrt(2))
    assert formulas.peak_of(60, 264, 0, 1e-9) == pytest.approx(141e-6, rel=0.005) == formulas.peak_of(60, 264, 1e-9, 0)


@given(st.floats(0, 100e-9), st.floats(1e-12, 100e-9))
def test_sums_of_line_and_rectified_line_are_those_of_the_waveform(full, half):
    hertz, volts, count = 50.0, 230.0, 3600
    crest = math.sqrt(2) * volts
    line = [crest * math.sin(2 * math.pi * at / count) for at in range(count + 1)]
    charge = [full * value + half * min(value, 0.0) for value in line]
    current = [(later - earlier) * count * hertz for earlier, later in pairwise(charge)]
    assert formulas.rms_of(hertz, volts, full, half) == pytest.approx(math.sqrt(sum(i * i for i in current) / count), rel=1e-3)
    assert formulas.peak_of(hertz, volts, full, half) == pytest.approx(max(map(abs, current)), rel=1e-3)


@given(st.lists(st.tuples(st.integers(0, 5), st.integers(0, 5), st.floats(1e-12, 1e-7)), min_size=1, max_size=12))
def test_a_reduced_network_carries_the_current_of_the_whole_one(branches):
    named = [(f"n{one}", f"n{other}", value) for one, other, value in branches if one != other]
    named += [("source", "n0", 1e-9), *((f"n{at}", "touched", 1e-9) for at in range(6))]
    potentials = solved(named, {"source": 1.0, "touched": 0.0})
    whole = sum(value * potentials[({one, other} - {"touched"}).pop()] for one, other, value in named if "touched" in (one, other))
    assert star_mesh(named, ("source", "touched"))["touched"]["source"] == pytest.approx(whole.real, rel=1e-6)


def test_what_the_network_reads_of_a_capacitor_is_that_of_a_nodal_solution():
    hertz, farad = 60.0, 47e-9
    branches = [("line", "in", 2j * math.pi * hertz * farad), *person(hertz, "in")]
    found = solved(branches, {"line": 264.0, "earth": 0.0})
    short = formulas.capacitor_current(hertz, farad, 264.0)
    assert formulas.share_read(hertz, farad) * short == pytest.approx(abs(found["u2"]) / 500)


def test_equal_paths_from_both_poles_leave_the_output_at_half_mains():
    # b_ex24: 115 V at 230 V, and the current through a person is that of one of the two capacitors
    branches = [("line", "out", 2.2e-9), ("neutral", "out", 2.2e-9)]
    assert abs(solved(branches, {"line": 230.0, "neutral": 0.0})["out"]) == pytest.approx(115.0)
    assert star_mesh(branches, ("line", "neutral", "out"))["out"]["line"] == 2.2e-9


# the rule on whole circuits

ENTRY = """
J1: {value: AC inlet, symbol: Conn_C8, description: AC INLET C8, pins: {1: AC_L, 2: AC_N}, names: {1: L, 2: N}}
F1: {value: T1A, symbol: Fuse, description: FUSE 1A 250VAC T, pins: {1: AC_L, 2: L_F}}
T1: {value: 230V/12V, symbol: Transformer_1P_1S, windings: "1-2, 3-4", pins: {1: L_F, 2: AC_N, 3: S1, 4: GND}}
R1: {value: 1k, symbol: R, pins: {1: S1, 2: GND}}
J2: {value: OUT, symbol: Conn_01x02, pins: {1: S1, 2: GND}}
"""


def of(rule: str, circuit: str, declaration: str = "{supply: {mains: 240 V, tolerance: 10 %, frequency: 60 Hz}}"):
    """The verdicts of one rule of the default rulesets."""
    from checker import plugins, rulesets

    stages = analysis(circuit, declaration)
    clauses = [clause for ruleset in rulesets.load_all(rulesets.DEFAULT) for clause in ruleset.clauses if clause.rule == rule]
    return [verdict for clause in clauses for verdict in plugins.rule(rule).ask(stages, clause)]


def capacitor(ref: str, value: str, one: str, other: str) -> str:
    return f'{ref}: {{value: {value}, symbol: C, description: "CAP CER 20% 400VAC Y1", pins: {{1: {one}, 2: {other}}}}}\n'


def test_the_worst_state_is_told_and_every_state_is_a_step():
    (verdict,) = of("touch-current", ENTRY + capacitor("C1", "1n", "L_F", "GND") + capacitor("C2", "1n", "AC_N", "GND"))
    assert verdict.outcome == "pass"
    assert verdict.condition == "only one pole connected"
    assert verdict.found.value == pytest.approx(2 * math.pi * 60 * 2.4e-9 * 264)
    states = [step.result for step in verdict.step.inputs]
    assert states == pytest.approx([119.4e-6, 119.4e-6, 238.9e-6], rel=1e-3)


def test_another_output_adds_what_reaches_it():
    second = """
T2: {value: 230V/12V, symbol: Transformer_1P_1S, windings: "1-2, 3-4", pins: {1: L_F, 2: AC_N, 3: S2, 4: GND2}}
R2: {value: 1k, symbol: R, pins: {1: S2, 2: GND2}}
J3: {value: OUT2, symbol: Conn_01x02, pins: {1: S2, 2: GND2}}
"""
    circuit = ENTRY + second + capacitor("C1", "1n", "L_F", "GND2") + capacitor("C2", "1n", "GND2", "GND")
    found = {verdict.nets: verdict.found.value for verdict in of("touch-current", circuit)}
    assert found[("GND",)] == pytest.approx(2 * math.pi * 60 * 0.6e-9 * 264)
    assert found[("GND2",)] == pytest.approx(2 * math.pi * 60 * 1.2e-9 * 264)


def test_three_phases_drive_less_than_one_and_ride_together_when_one_is_left():
    circuit = """
J1: {value: mains in, symbol: Conn_01x04, pins: {1: L1, 2: L2, 3: L3, 4: N}, names: {1: L1, 2: L2, 3: L3, 4: N}}
T1: {value: 400V/12V, symbol: Transformer_1P_1S, windings: "1-2, 3-4", pins: {1: L1, 2: L2, 3: S1, 4: GND}}
R3: {value: 1M, symbol: R, pins: {1: L3, 2: N}}
R1: {value: 1k, symbol: R, pins: {1: S1, 2: GND}}
J2: {value: OUT, symbol: Conn_01x02, pins: {1: S1, 2: GND}}
"""
    circuit += "".join(capacitor(f"C{at}", "1n", f"L{at}", "GND") for at in (1, 2, 3))
    (verdict,) = of("touch-current", circuit, "{supply: {mains: 400 V, phases: 3, tolerance: 10 %, frequency: 50 Hz}}")
    phase = 440 / math.sqrt(3)
    states, balanced = [step.result for step in verdict.step.inputs], 0.4e-9  # C at + 20 % against two at - 20 %
    assert states == pytest.approx([2 * math.pi * 50 * balanced * phase, 2 * math.pi * 50 * 3.6e-9 * phase])


def test_the_limits_of_the_shipped_ruleset():
    # reference/standards.yaml iec62368_1_es_limits_current, up to 1 kHz: ES1 0.5 mA r.m.s., 0.707 mA peak; ES2 5 mA, 7.07 mA.
    from checker import rulesets

    (ruleset,) = rulesets.load_all(("iec-62368-1",))
    params = {clause.rule: clause.params for clause in ruleset.clauses}
    touch, earth = params["touch-current"], params["earth-current"]
    assert (touch.rms, touch.peak, touch.fault_rms, touch.fault_peak) == pytest.approx((0.5e-3, 0.707e-3, 5e-3, 7.07e-3))
    assert touch.open_pole
    assert (earth.rms, earth.share) == (5e-3, 0.05)
