"""Rated voltages against figures and arithmetic from outside the project."""

from __future__ import annotations

import doctest
import math
from dataclasses import replace
from pathlib import Path

import pytest
import yaml
from analyses import analysis
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import plugins, rulesets
from checker.formulas import derating
from checker.identify import ratings
from checker.model.step import Step
from checker.model.stress import Bounds, Stress, Voltage
from checker.rules.capacitor_voltage import technologies

REFERENCE = Path(__file__).resolve().parents[2] / "shared" / "reference"
ENTRY = """
J1: {value: MAINS, symbol: Screw_Terminal_01x02, pins: {1: AC_L, 2: AC_N}}
F1: {value: T2A, symbol: Fuse, description: FUSE 2A 250VAC T 5x20, pins: {1: AC_L, 2: LF}}
BR1: {value: DB107, symbol: D_Bridge, pins: {1: VB, 2: PG, 3: LF, 4: AC_N}, names: {1: +, 2: "-", 3: "~", 4: "~"}}
"""


def verdicts(rule: str, circuit: str, declaration: str = "{}", stress: Stress | None = None):
    """The verdicts of a rule with its clause of the commercial profile."""
    found = analysis(circuit, declaration, ("derating-commercial",))
    if stress is not None:
        found = replace(found, stress=stress)
    clause = next(clause for clause in rulesets.load("derating-commercial").clauses if clause.rule == rule)
    return list(plugins.rule(rule).ask(found, clause))


def test_the_examples_of_the_formulas():
    assert doctest.testmod(derating).failed == 0
    assert doctest.testmod(derating).attempted >= 5


# makers' sheets as collected: for each size the lowest and the highest figure of five makers
@pytest.mark.skipif(not REFERENCE.exists(), reason="the reference tables are not here")
def test_chip_sizes_are_those_of_the_reference():
    tables = yaml.safe_load((REFERENCE / "standards.yaml").read_text(encoding="utf-8"))["tables"]
    seen = yaml.safe_load((REFERENCE / "derating.yaml").read_text(encoding="utf-8"))
    seen = seen["resistor_max_working_voltage_by_chip_size_V"]
    plain = {str(key).zfill(4): float(volts) for key, volts in seen["standard_thick_film"].items()}
    for size, *cells in tables["chip_resistor_voltage"]["rows"]:
        size = str(size).zfill(4)
        figures = [float(cell) for cell in (*cells, plain.get(size)) if cell is not None]
        assert derating.of_chip(size) == (min(figures), max(figures)), size


@given(st.floats(0, 1e4), st.floats(0, 1e4), st.floats(0.1, 1e4), st.floats(0.1, 1e4))
def test_a_comparison_is_never_both(one, two, three, four):
    surely, never = sorted((one, two))
    strict, lax = sorted((three, four))
    found = derating.compared(surely, never, strict, lax)
    assert (found == "pass") == (never <= strict)
    assert (found == "fail") == (surely > lax)
    assert derating.compared(surely, None, strict, lax) != "pass"


@pytest.mark.parametrize(
    "series", [derating.DIRECT, derating.REVERSE, derating.STANDOFF, derating.RESISTORS, derating.POWERS, derating.ALTERNATING]
)
def test_usual_values_rise(series):
    assert list(series) == sorted(set(series))
    assert derating.next_usual(series[-1] * 1.01, series) is None
    assert all(derating.next_usual(value, series) == value for value in series)


# 0.25 W in 1 Mohm is reached at 500 V, in 22 kohm at 74 V
@pytest.mark.parametrize(("power", "ohms"), [(0.25, 1e6), (0.25, 22e3), (2.0, 150e3)])
def test_rated_power_is_reached_at_the_rated_voltage(power, ohms):
    volts = derating.of_power(power, ohms)
    assert volts**2 / ohms == pytest.approx(power)


# 450 V parts sit at 69 % of their rating on 220 V and at 83 % on 264 V (common practice, no source)
@pytest.mark.parametrize(("mains", "tolerance", "share"), [(220, 0, 0.69), (240, 10, 0.83)])
def test_a_bulk_capacitor_of_450_v(mains, tolerance, share):
    circuit = ENTRY + "C1: {value: 22uF, symbol: CP, description: CAP ALUM 22UF 450V, pins: {1: VB, 2: PG}}"
    (verdict,) = verdicts("capacitor-voltage", circuit, f"{{supply: {{mains: {mains} V, tolerance: {tolerance} %}}}}")
    assert verdict.outcome == "pass"
    assert verdict.found.value / 450 == pytest.approx(share, abs=0.005)
    assert verdict.limit.value == pytest.approx(0.95 * 450)


# a string divides by value: the share of R1 is R1 / (R1 + R2), its r.m.s. voltage that share of 264 V
@settings(max_examples=30, deadline=None)
@given(st.integers(1, 99), st.integers(1, 99))
def test_a_string_is_judged_by_its_worst_member(one, two):
    circuit = ENTRY + (
        f"R1: {{value: {one}0k, symbol: R, description: RES 0% 1206, pins: {{1: LF, 2: RX}}}}\n"
        f"R2: {{value: {two}0k, symbol: R, description: RES 0% 1206, pins: {{1: RX, 2: AC_N}}}}"
    )
    (verdict,) = verdicts("resistor-voltage", circuit, "{supply: {mains: 240 V}}")
    worst = 264 * max(one, two) / (one + two)
    spread = 0.06  # the tolerance of a resistor that states none
    assert verdict.parts == ("R1", "R2")
    if verdict.outcome == "pass":
        assert worst <= 200 * (1 + spread)
    else:
        assert worst > 200 * (1 - spread)
        assert verdict.outcome in ("open", "fail")


def made(surely: float, never_above: float | None, shape: str = "dc") -> Voltage:
    step = Step("made up")
    bounds = Bounds(surely, never_above, step, form="dc" if shape == "dc" else "peak")
    return Voltage(replace(bounds, form="dc" if shape == "dc" else "rms"), bounds, shape)


RAIL = "C1: {value: 10u/25V/X7R, symbol: C, pins: {1: A, 2: B}}\nR1: {value: 1k, symbol: R, pins: {1: A, 2: B}}"


@pytest.mark.parametrize(
    ("surely", "never", "expected"),
    [
        (0.0, 20.0, ["pass"]),
        (0.0, 20.1, []),  # a signal that may reach more
        (19.0, 20.1, ["open"]),
        (20.1, 22.0, ["fail"]),
        (26.0, 30.0, ["fail"]),
        (26.0, None, ["fail"]),
        (12.0, None, []),
        (26.0, 10.0, []),  # bounds that contradict one another
    ],
)
def test_bounds_of_a_made_up_voltage(surely, never, expected):
    found = verdicts("capacitor-voltage", RAIL, stress=Stress(between=lambda one, other: made(surely, never)))
    assert [verdict.outcome for verdict in found] == expected
    assert [verdict.level for verdict in found if verdict.outcome == "fail"] == ["error" if surely > 25 else "warning"] * (
        "fail" in expected
    )


def test_the_remedy_is_the_next_usual_rating():
    (verdict,) = verdicts("capacitor-voltage", RAIL, stress=Stress(between=lambda one, other: made(26.0, 30.0)))
    assert verdict.remedy is not None
    assert [change.value for change in verdict.remedy.changes] == [50.0]  # 30 V / 0.8 = 37.5 V


@pytest.mark.parametrize("sign", [1, 0, -1])
def test_polarity_follows_the_sign(sign):
    circuit = "C1: {value: 10u, symbol: CP, pins: {1: A, 2: B}}\nR1: {value: 1k, symbol: R, pins: {1: A, 2: B}}"
    found = verdicts("polarity", circuit, stress=Stress(between=lambda one, other: made(5.0, 6.0), sign=lambda one, other: sign))
    assert [verdict.outcome for verdict in found] == {1: ["pass"], 0: [], -1: ["fail"]}[sign]


@pytest.mark.parametrize(
    ("text", "volts"),
    [("TVS DIODE 15VWM 24.4VC SMA", 15), ("TVS DIODE 5.0VWM 9.2VC", 5), ("TVS VRWM 33V 600W", 33), ("TVS DIODE SMA 400W", None)],
)
def test_the_stand_off_voltage_of_a_suppressor(text, volts):
    found = ratings.read(text, "tvs").ratings.get("voltage")
    assert (found.value if found is not None else None) == volts


@pytest.mark.parametrize(("symbol", "footprint", "value", "expected"), [
    ("C", "", "10n", {"ceramic", "film"}),
    ("C", "", "10u", {"ceramic", "film", "aluminium", "tantalum", "polymer"}),
    ("C", "Capacitor_SMD:C_0805_2012Metric", "10u", {"ceramic", "film"}),
    ("CP", "", "10u", {"aluminium", "tantalum", "polymer"}),
    ("CP", "Capacitor_THT:CP_Radial_D8.0mm_P3.50mm", "10u", {"aluminium", "polymer"}),
    ("CP", "Capacitor_Tantalum_SMD:CP_EIA-3528-21", "10u", {"tantalum", "polymer"}),
    ("CP", "Capacitor_Tantalum_SMD:CP_EIA-3528-21", "10u/400V", {"ceramic", "film", "aluminium", "tantalum", "polymer"}),
    ("CP", "", "22u/400V", {"aluminium"}),
])  # fmt: skip
def test_what_symbol_footprint_and_value_rule_out(symbol, footprint, value, expected):
    shape = f", footprint: '{footprint}'" if footprint else ""
    found = analysis(f"C1: {{value: {value}, symbol: {symbol}{shape}, pins: {{1: A, 2: B}}}}")
    assert set(technologies(found, "C1")[0]) == expected


def test_the_share_table_names_every_parameter_of_its_clause():
    said = rulesets.load("derating-commercial")
    clause = next(clause for clause in said.clauses if clause.rule == "voltage-rating")
    rows = {str(family): ratio for family, ratio in said.tables["part-ratio"].rows}
    assert rows == {name: getattr(clause.params, name) for name in clause.params.__dataclass_fields__}
    assert all(isinstance(ratio, float) and 0 < ratio <= 1 and math.isfinite(ratio) for ratio in rows.values())
