"""Discharge of capacitors against published worked examples and a numerical solution."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker.formulas.discharge import left, most_ohms, seconds_until

CREST = math.sqrt(2) * 264


def test_a_published_example_of_a_resistor_maker():
    """Design tool sheet of a resistor maker (b_ex07): 195 uF from 1500 V to 320 V through 50 ohm takes 15.06 ms."""
    assert seconds_until(1500, 50, 195e-6, 320) == pytest.approx(0.01506, rel=1e-3)
    assert left(1500, 50, 195e-6, 0.01506) == pytest.approx(320, rel=1e-3)


@pytest.mark.parametrize(
    ("limit", "seconds", "nominal", "worst"),
    # b_ex10: largest bleeder on 1 uF at 264 V by IEC 60335-1, 60601-1, 62368-1; with C + 20 % and R + 5 %
    [(34, 1, 417e3, 331e3), (60, 1, 547e3, 434e3), (60, 2, 1094e3, 868e3)],
)
def test_the_largest_bleeder_by_three_rules(limit, seconds, nominal, worst):
    assert most_ohms(CREST, 1e-6, limit, seconds) == pytest.approx(nominal, rel=2e-3)
    assert most_ohms(CREST, 1.2e-6, limit, seconds) / 1.05 == pytest.approx(worst, rel=2e-3)


def test_a_time_constant_of_a_second():
    """IEC 60950-1 2.1.1.7 (b_ex09, b_ex10): 1 s on 0.2 uF is 5 Mohm; after one constant 37 % are left, 137 V of 373 V."""
    assert left(373.4, 5e6, 200e-9, 1.0) == pytest.approx(137, abs=0.5)
    # to 60 V in 2 s from 373 V a constant of 1.09 s is enough, to 34 V in 1 s one of 0.417 s (faults.md C21, recomputed there)
    assert most_ohms(373.4, 1.0, 60, 2) == pytest.approx(1.09, abs=0.005)
    assert most_ohms(373.4, 1.0, 34, 1) == pytest.approx(0.417, abs=0.001)


def test_what_a_discharge_circuit_maker_uses():
    """Component selection of a discharge circuit (b_ex08): 780 kohm on 1 uF, a constant of 0.78 s."""
    assert left(CREST, 780e3, 1e-6, 2.0) < 60


@given(st.floats(100, 400), st.floats(1e4, 1e7), st.floats(1e-8, 1e-5), st.floats(0.1, 5))
def test_the_closed_form_is_the_solution_of_the_equation(start, ohms, farads, seconds):
    steps = 4000
    volts, step = start, seconds / steps
    for _ in range(steps):  # Heun's method on dV/dt = -V/(RC)
        first = -volts / (ohms * farads)
        second = -(volts + step * first) / (ohms * farads)
        volts += step * (first + second) / 2
    if step < 0.1 * ohms * farads:  # the method is good for small steps
        assert left(start, ohms, farads, seconds) == pytest.approx(volts, rel=1e-3, abs=1e-3)


def test_no_way_and_no_capacitor():
    assert left(373.0, math.inf, 1e-6, 2.0) == 373.0
    assert left(373.0, 1e6, 0.0, 2.0) == 0.0
    assert most_ohms(50.0, 1e-6, 60.0, 2.0) == math.inf
    assert seconds_until(50.0, 1e6, 1e-6, 60.0) == 0.0
