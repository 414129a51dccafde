"""Fuses, surge limiters and inrush against tables and worked examples from outside the project."""

from __future__ import annotations

import doctest
import math
from dataclasses import replace
from pathlib import Path

import pytest
import yaml
from analyses import analysis
from hypothesis import given
from hypothesis import strategies as st

from checker import plugins, rulesets
from checker.formulas import fuse, surge
from checker.rules.charging_path import charges

STANDARDS = Path(__file__).resolve().parents[2] / "shared" / "reference" / "standards.yaml"
reference = pytest.mark.skipif(not STANDARDS.exists(), reason="the reference tables are not here")

SUPPLY = """
J1: {value: MAINS, symbol: Screw_Terminal_01x02, pins: {1: AC_L, 2: AC_N}}
F1: {value: T2A, symbol: Fuse, description: FUSE 2A 250VAC T 5x20 1500A, pins: {1: AC_L, 2: LF}}
RT1: {value: 10R, symbol: Thermistor_NTC, description: NTC 10 OHM 20%, pins: {1: LF, 2: LT}}
BR1: {value: DB107, symbol: D_Bridge, pins: {1: VB, 2: PG, 3: LT, 4: AC_N}, names: {1: +, 2: "-", 3: "~", 4: "~"}}
C1: {value: 100uF, symbol: CP, description: CAP ALUM 100UF 450V 20%, pins: {1: VB, 2: PG}}
"""


def verdicts(rule: str, circuit: str, declaration: str = "{}"):
    """The verdicts of a rule with its clause of the shipped ruleset."""
    found = analysis(circuit, declaration, ("iec-62368-1",))
    clause = next(clause for clause in rulesets.load("iec-62368-1").clauses if clause.rule == rule)
    return list(plugins.rule(rule).ask(found, clause))


def reached(table: str):
    return yaml.safe_load(STANDARDS.read_text(encoding="utf-8"))["tables"][table]["rows"]


def test_the_examples_of_the_formulas():
    for module in (fuse, surge):
        assert doctest.testmod(module).failed == 0
        assert doctest.testmod(module).attempted >= 5


# worked examples that others printed, with the page each stands on


def test_a_fuse_at_sixty_degrees():
    """Distributor's article on five criteria: 1 A at 60 degC with 17 % less needs 1.205 A, so 1.25 A (b_ex16)."""
    needed = fuse.needed_rating(1.0, 1.0, 0.83)
    assert needed == pytest.approx(1.205, abs=5e-4)
    assert min(rated for rated in (1.0, 1.25, 1.6, 2.0) if rated >= needed) == 1.25


def test_a_chip_fuse():
    """Chip fuse data sheet: 1.5 A with 70 % load and 95 % for temperature need 2.256 A, printed 2.255 (b_ex17)."""
    assert fuse.needed_rating(1.5, 0.7, 0.95) == pytest.approx(2.256, abs=1e-3)


def test_a_fuse_against_inrush():
    """Fuse maker's pulse table and 5 x 20 mm sheet: 373.4 V, 10 ohm, 100 uF, 100,000 pulses (b_ex18)."""
    pulse = surge.charging_integral(373.4, 10.0, 100e-6)
    assert surge.charging_peak(373.4, 10.0) == pytest.approx(37.3, abs=0.05)
    assert pulse == pytest.approx(0.697, abs=5e-4)
    needed = fuse.melting_needed(pulse, 0.22)
    assert needed == pytest.approx(3.17, abs=5e-3)
    melting = {1.0: 1.7, 1.25: 3.0, 1.6: 5.4, 2.0: 9.7}  # A -> A2s of the sheet
    assert min(rated for rated, integral in melting.items() if integral >= needed) == 1.6


def test_an_inrush_limiter():
    """Limiter maker's example: 480 V + 10 %, 2350 uF, at most 30 A: 655 J and 24.9 ohm (b_ex19)."""
    crest = math.sqrt(2) * 480 * 1.1
    assert crest == pytest.approx(746.7, abs=0.05)
    assert surge.charging_energy(crest, 2350e-6) == pytest.approx(655, abs=0.5)
    assert surge.least_resistance(crest, 30.0) == pytest.approx(24.9, abs=0.05)


def test_inrush_without_a_limiter():
    """Page on limiter sizing: 325 V over 0.5 ohm is 650 A (b_ex20)."""
    assert surge.charging_peak(325.0, 0.5) == 650.0


def test_a_varistor_by_the_high_line():
    """Varistor data page: 220 V + 10 % is 242 V; 1.25 times is 275 V (b_ex21)."""
    assert surge.least_varistor(220.0, 1.1) == pytest.approx(242.0)
    assert surge.least_varistor(220.0, 1.25) == 275.0
    assert surge.next_varistor(surge.least_varistor(220.0, 1.1)) == 250.0


# tables

# IEC 60127-2 at 250 V a.c.: H on two makers' sheets, L and E from memory
BREAKING = {"L": 35.0, "E": 150.0, "H": 1500.0}
# UL 248-14 at 250 V a.c., fuse maker's guide: over, up to, A
LISTED = [(0, 1, 35), (1, 3.5, 100), (3.5, 10, 200), (10, 15, 750), (15, 30, 1500)]


@pytest.mark.parametrize("letter", BREAKING)
def test_breaking_classes(letter):
    assert fuse.breaking_capacity(letter) == BREAKING[letter]
    assert fuse.breaking_capacity(letter, 10.0) == max(BREAKING[letter], 100.0 if letter == "L" else 0.0)


@pytest.mark.parametrize(("over", "up_to", "least"), LISTED)
def test_listed_interrupting_ratings(over, up_to, least):
    assert fuse.listed_capacity(up_to) == least
    assert fuse.listed_capacity(over + 0.01) == least


@reference
def test_the_tables_are_those_of_the_reference():
    assert reached("fuse_ul_interrupt") == [list(row) for row in LISTED]
    told = {row[0][0]: row[1] for row in reached("fuse_breaking")}
    assert (told["E"], told["H"]) == (BREAKING["E"], BREAKING["H"])
    assert told["L"].startswith("35 or 10 In")
    for volts, _, at_1_ma, *_ in reached("mov_ratings"):
        assert surge.continuous(float(at_1_ma)) == volts


def test_varistors_rise():
    assert list(surge.VARISTORS) == sorted(surge.VARISTORS)
    assert list(surge.VARISTORS.values()) == sorted(surge.VARISTORS.values())
    # the continuous crest stays below the voltage at 1 mA less its 10 %, or the varistor would conduct in normal use
    assert all(math.sqrt(2) * volts < 0.98 * at_1_ma for at_1_ma, volts in surge.VARISTORS.items())


# what holds whatever the figures


@given(st.floats(1, 1e3), st.floats(0.1, 1e3), st.floats(1e-6, 1e-2))
def test_the_integral_is_that_of_the_decay(volts, ohms, farad):
    """Half the peak squared times the time constant, and energy over resistance."""
    peak = surge.charging_peak(volts, ohms)
    assert surge.charging_integral(volts, ohms, farad) == pytest.approx(0.5 * peak**2 * ohms * farad)
    assert surge.charging_integral(volts, ohms, farad) == pytest.approx(surge.charging_energy(volts, farad) / ohms)


@given(st.floats(1, 1e4), st.floats(50, 300), st.floats(0.3, 1), st.floats(0.3, 1))
def test_worse_efficiency_draws_more(power, volts, one, other):
    low, high = sorted((one, other))
    assert fuse.line_current(power, volts, low, 1.0) >= fuse.line_current(power, volts, high, 1.0)


# the rules' own figures


def test_the_current_of_a_declared_power():
    """18 W at 100 V - 10 %: 0.2 A without losses, 0.571 A with 0.7 and 0.5."""
    (found,) = (v for v in verdicts("fuse-rating", SUPPLY, "{supply: {mains: 100-240 V, power: 18 W}}") if v.key[-1] == "current")
    assert found.found.value == pytest.approx(18 / (0.7 * 0.5 * 90))
    assert found.limit.value == pytest.approx(0.75 * 2.0)
    assert found.outcome == "pass"


@pytest.mark.parametrize(
    ("mains", "volts", "outcome", "level"),
    [(230, 300, "pass", "error"), (230, 275, "fail", "warning"), (230, 250, "fail", "error"), (120, 150, "pass", "error")],
)
def test_the_continuous_voltage_of_a_varistor(mains, volts, outcome, level):
    circuit = SUPPLY + f"RV1: {{value: S14K{volts}, symbol: Varistor, pins: {{1: LF, 2: AC_N}}}}"
    (found,) = verdicts("surge-limiter", circuit, f"{{supply: {{mains: {mains} V}}}}")
    assert (found.outcome, found.level) == (outcome, level)
    assert found.limit.value == pytest.approx(1.25 * mains)
    if outcome == "fail":
        assert [change.value for change in found.remedy.changes] == [300.0]


def test_the_peak_and_the_integral_of_a_charge():
    """373.4 V over 8 ohm (10 ohm - 20 %) are 46.7 A; the capacitor at + 20 % takes 1.05 A2s."""
    survival = next(v for v in verdicts("inrush", SUPPLY) if v.key[-1] == "surge")
    assert survival.outcome == "pass"
    assert survival.found.value == pytest.approx(373.4**2 * 120e-6 / (2 * 8), rel=1e-3)
    assert survival.limit.value == pytest.approx(30**2 / 120 / 2)


def test_parts_of_the_way_that_limit():
    (charge,) = charges(analysis(SUPPLY))
    assert (charge.rectifiers, charge.bulk, charge.limiters, charge.chokes) == (("BR1",), ("C1",), ("RT1",), ())
    assert (charge.resistance, charge.high) == (pytest.approx(8.0), pytest.approx(12.0))
    twice = SUPPLY + "RT2: {value: 10R, symbol: Thermistor_NTC, description: NTC 10 OHM 20%, pins: {1: LF, 2: LT}}"
    (charge,) = charges(analysis(twice))
    assert charge.limiters == ("RT1", "RT2")
    assert charge.resistance == pytest.approx(4.0)


def test_a_way_through_both_poles_counts_both_limiters():
    circuit = (
        SUPPLY.replace("4: AC_N}, names", "4: NT}, names") + "RT2: {value: 5R, symbol: Thermistor_NTC, pins: {1: AC_N, 2: NT}}"
    )
    (charge,) = charges(analysis(circuit))
    assert set(charge.limiters) == {"RT1", "RT2"}
    assert charge.resistance == pytest.approx(0.8 * 15.0)


def test_an_alternate_fuse_is_not_vouched_for_by_the_first_choice():
    """What the schematic says of the first product (a tube of a class) is no proof for another one."""
    found = analysis(SUPPLY, judged=("iec-62368-1",))
    bare = replace(found.choice["F1"], label="other", ratings={}, attributes={}, marks=())
    clause = next(clause for clause in rulesets.load("iec-62368-1").clauses if clause.rule == "fuse-rating")
    (verdict,) = plugins.rule("fuse-rating").ask(replace(found, choice={**found.choice, "F1": bare}), clause)
    assert verdict.outcome == "open"
