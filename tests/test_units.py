"""Units: the closed table against pint, forms, ranges, what is shown, and that nothing else is let through."""

import math
import subprocess
import sys
from decimal import Decimal

import pint
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from checker import units
from checker.errors import InputError
from checker.files import Blob
from checker.strict_yaml import load
from checker.units import Quantity, Span, UnitError, parse, range_of, shown

REGISTRY = pint.UnitRegistry()
# spellings of the table that pint does not know or takes for something else
PINT_SPELLING = {
    "ohm": {"R": "ohm", "k": "kohm", "M": "Mohm", "Ohm": "ohm", "mOhm": "mohm", "kOhm": "kohm", "MOhm": "Mohm"},
    "A2s": {"A2s": "A^2*s", "kA2s": "kA*A*s", "A^2s": "A^2*s", "kA^2s": "kA*A*s", "A^2 s": "A^2*s"},
    "degC": {"C": "degC"},
    "K": {"degC": "delta_degC"},
    "mm": {"mil": "thou"},  # pint's mil is a dimensionless angle
}
ROWS = [(unit, symbol) for unit, symbols in units._SYMBOLS.items() for symbol in symbols if unit]


@pytest.mark.parametrize("unit, symbol", ROWS, ids=[f"{symbol}-for-{unit}" for unit, symbol in ROWS])
def test_every_row_of_the_table_agrees_with_pint(unit, symbol):
    target = {"A2s": "A^2*s", "%": "percent"}.get(unit, unit)
    expected = REGISTRY.Quantity(3.7, REGISTRY.parse_units(PINT_SPELLING.get(unit, {}).get(symbol, symbol)))
    target = "delta_degC" if symbol == "degC" and unit == "K" else target
    assert parse(f"3.7 {symbol}", unit).value == pytest.approx(expected.to(target).magnitude, rel=1e-12)
    assert parse(f"3.7{symbol}", unit).unit == unit


def test_mil_is_a_thousandth_of_an_inch_although_pint_has_an_angle_of_that_name():
    assert parse("100 mil", "mm").value == 2.54  # the inch is 25.4 mm by definition
    assert REGISTRY("mil").dimensionless


@pytest.mark.parametrize(
    "text, unit, value",
    [
        ("6500 ft", "m", 1981.2),  # the foot is 0.3048 m by definition
        ("104 degF", "degC", 40.0),
        ("313.15 K", "degC", 40.0),
        ("5 VA", "W", 5.0),
        ("2 min", "s", 120.0),
        ("3 A^2*s", "A2s", 3.0),
        ("0.1 Gohm", "ohm", 1e8),
        ("1 volt", "V", 1.0),
    ],
)
def test_pint_answers_for_units_outside_the_table(text, unit, value):
    assert parse(text, unit).value == value


@pytest.mark.parametrize(
    "text, unit",
    [
        ("10 A", "V"),
        ("5 rad/s", "Hz"),  # pint would call it 5 Hz
        ("60 rpm", "Hz"),
        ("25 degF", "K"),
        ("1 turn", "%"),
        ("3 mm", "V"),
        ("5 kg", "mm"),
        ("5 V**9", "V"),
        ("5 V^9^9^9", "V"),
        ("5 __import__", "V"),
        ("5 m*m/m*m/m*m/m*m*m", "m"),
    ],
)
def test_another_dimension_is_refused(text, unit):
    with pytest.raises(UnitError, match="is not "):
        parse(text, unit)


@pytest.mark.parametrize(
    "text, value, form",
    [
        *[(f"230 {said}", 230, "rms") for said in ("V rms", "Vrms", "V r.m.s.", "V a.c.", "VAC", "Vac", "V~", "V eff", "V (rms)")],
        *[(f"60{said}", 60, "dc") for said in ("V dc", "Vdc", "VDC", " V d.c.", " V DC")],
        *[(f"325 {said}", 325, "peak") for said in ("V peak", "Vpk", "V pk", "Vp", "V PEAK", "V_peak")],
        ("5 kVrms", 5000, "rms"),
        ("24 V", 24, ""),
    ],
)
def test_forms_of_a_voltage(text, value, form):
    assert parse(text, "V") == Quantity(value, "V", form, text)


def test_forms_of_a_current():
    assert parse("0.25 mA rms", "A") == Quantity(0.00025, "A", "rms", "0.25 mA rms")
    assert parse("3 Adc", "A").form == "dc"


@pytest.mark.parametrize("text", ["3 Vpp", "3 V p-p", "3 V peak to peak", "3 Vpk-pk", "3 kVpp"])
def test_peak_to_peak_is_never_taken_for_peak(text):
    with pytest.raises(UnitError, match="peak to peak"):
        parse(text, "V")


def test_a_form_on_anything_but_voltage_and_current_is_refused():
    with pytest.raises(UnitError, match="is not a power"):
        parse("5 W rms", "W")


@pytest.mark.parametrize(
    "text, value", [("2,5 V", 2.5), ("0,125 V", 0.125), ("12,34 V", 12.34), ("1,2345 V", 1.2345), (".5 V", 0.5)]
)
def test_decimal_comma(text, value):
    assert parse(text, "V").value == value


@pytest.mark.parametrize("text", ["1,000 V", "10,000 V", "999,999 V", "-1,000 V"])
def test_a_comma_that_may_separate_thousands_is_refused(text):
    with pytest.raises(UnitError, match="decimal point or thousands"):
        parse(text, "V")


@pytest.mark.parametrize(
    "text",
    ["", " ", "V", "nan V", "inf V", "1.2.3 V", "1,234,567 V", "1 000 V", "0x10 V", "1e999 V", "--5 V", "1_000 V", "10\u00b2 V"],
)
def test_unreadable_numbers_are_refused(text):
    with pytest.raises(UnitError):
        parse(text, "V")


def test_typographic_spellings():
    assert parse("4.7 \u00b5F", "F").value == parse("4.7 \u03bcF", "F").value == 4.7e-6
    assert parse("2.2 k\u03a9", "ohm").value == parse("2.2 k\u2126", "ohm").value == 2200
    assert parse("40\u00a0\u00b0C", "degC").value == 40
    assert parse("5 A\u00b2s", "A2s").value == 5
    assert parse("\u2212 5 degC".replace(" ", "", 1), "degC").value == -5
    assert parse("\u00b110 %", "%").value == parse("+/- 10 %", "%").value == 10


@pytest.mark.parametrize(
    "text, unit, low, high, form",
    [
        ("100-240 V", "V", 100, 240, ""),
        ("36-72 V", "V", 36, 72, ""),
        ("100 ... 240 V", "V", 100, 240, ""),
        ("100\u2026240 V", "V", 100, 240, ""),
        ("100\u2013240 VAC", "V", 100, 240, "rms"),
        ("100 V - 240 V", "V", 100, 240, ""),
        ("100 V to 240 V rms", "V", 100, 240, "rms"),
        ("100~240V", "V", 100, 240, ""),
        ("900 mV - 1.5 V", "V", 0.9, 1.5, ""),
        ("1.5..3 kV", "V", 1500, 3000, ""),
        ("50/60 Hz", "Hz", 50, 60, ""),
        ("-40..85 degC", "degC", -40, 85, ""),
        ("-40 - 85 \u00b0C", "degC", -40, 85, ""),
        ("-40--20 degC", "degC", -40, -20, ""),
        ("-40 to +85 degC", "degC", -40, 85, ""),
        ("1e-3 V", "V", 0.001, 0.001, ""),
        ("5 V dc", "V", 5, 5, "dc"),
    ],
)
def test_ranges(text, unit, low, high, form):
    assert range_of(text, unit) == Span(low, high, unit, form, text)


@pytest.mark.parametrize(
    "text, why",
    [
        ("240-100 V", "higher end"),
        ("100 V dc - 240 V ac", "mixes two forms"),
        ("100-240", "has no unit"),
        ("110/220/240 V", "is not a voltage"),
        ("230V~50 Hz", "is not a voltage"),
        ("100 A - 240 V", "is not a voltage"),
        ("100-1,000 V", "decimal point or thousands"),
    ],
)
def test_ranges_that_are_refused(text, why):
    with pytest.raises(UnitError, match=why):
        range_of(text, "V")


def test_one_figure_is_asked_where_a_range_stands():
    with pytest.raises(UnitError, match="is a range; found 100-240 V; expected a voltage such as 230 V, as one figure"):
        parse("100-240 V", "V")


@pytest.mark.parametrize(
    "value, unit, form, text",
    [
        (4.7e-9, "F", "", "4.7 nF"),
        (69.1e-6, "A", "rms", "69.1 uA rms"),
        (2200, "ohm", "", "2.2 kohm"),
        (7.6, "mm", "", "7.6 mm"),
        (325.26911, "V", "peak", "325.269 V peak"),
        (999999.7, "ohm", "", "1 Mohm"),
        (0.9999999, "V", "", "1 V"),
        (0.0047, "F", "", "4700 uF"),
        (-12, "V", "", "-12 V"),
        (-0.0, "V", "", "0 V"),
        (0, "V", "dc", "0 V dc"),
        (0.8, "", "", "0.8"),
        (2000, "m", "", "2000 m"),
        (3, "pins", "", "3 pins"),
    ],
)
def test_shown(value, unit, form, text):
    assert shown(value, unit, form) == text


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_no_report_may_hold_is_not_shown(value):
    with pytest.raises(ValueError, match="cannot be shown"):
        shown(value, "V")


@given(st.floats(allow_nan=False, allow_infinity=False), st.sampled_from(units.UNITS))
@example(1.7976931348623157e308, "V")
@example(5e-324, "F")
def test_what_is_shown_reads_back_as_the_six_digits_it_shows(value, unit):
    back = parse(shown(value, unit), unit).value
    assert back == float(f"{value:.5e}")
    assert math.copysign(1, back) > 0 or back < 0  # never minus zero


@given(st.decimals("-1e6", "1e6", places=3), st.sampled_from(ROWS))
def test_a_figure_is_converted_exactly(number, row):
    unit, symbol = row
    expected = float(number * units._SYMBOLS[unit][symbol])
    assert parse(f"{number} {symbol}", unit).value == expected
    span = range_of(f"{number} {symbol} .. {number + Decimal(1)} {symbol}", unit)
    assert span.low == expected < span.high


WORDS = st.sampled_from(
    [*"0123456789.,-+/~eE_ ", "V", "k", "kV", "rms", "pp", "..", "to", "ft", "**", "^", "9", "\u00b2", "\u0663", "("]
)


@settings(max_examples=300, deadline=None)
@given(st.one_of(st.lists(WORDS, max_size=12).map("".join), st.text(max_size=40)), st.sampled_from(units.UNITS))
def test_any_text_gives_a_finite_figure_or_a_unit_error(text, unit):
    for read in (parse, range_of):
        try:
            found = read(text, unit)
        except UnitError:
            continue
        figures = (found.value,) if isinstance(found, Quantity) else (found.low, found.high)
        assert all(math.isfinite(figure) for figure in figures)
        assert found.form in ("", "dc", "rms", "peak")


def test_long_text_is_refused_at_once():
    with pytest.raises(UnitError, match="too long"):
        parse("5" * 4_000_000 + " V", "V")


@pytest.mark.parametrize(
    "text, unit, message",
    [
        ("230", "V", "`v` has no unit; found 230; expected a voltage with its unit such as 230 V"),
        ("8", "mm", "`v` has no unit; found 8; expected a distance with its unit such as 8 mm"),
        ("10 A", "V", "`v` is not a voltage; found 10 A; expected a voltage such as 230 V (in uV, mV, V, kV or MV)"),
        (
            "5 KV",
            "V",
            "`v` is not a voltage; did you mean `kV`?; found 5 KV; expected a voltage such as 230 V (in uV, mV, V, kV or MV)",
        ),
        ("[1, 2]", "V", "`v` has the wrong shape; found a list; expected one text"),
    ],
)
def test_messages_of_a_yaml_value(text, unit, message):
    node = load(Blob("board.yaml", f"\nv: {text}".encode())).need("v")
    for read in (units.quantity, units.span):
        with pytest.raises(InputError) as caught:
            read(node, unit)
        assert str(caught.value) == f"board.yaml:2: {message}"


def test_pint_is_loaded_only_when_the_table_has_no_answer():
    code = (
        "import sys; from checker.units import parse, range_of, shown;"
        "parse('4.7 nF', 'F'); range_of('100-240 V', 'V'); shown(5, 'V');"
        "print('pint' in sys.modules); parse('3 ft', 'm'); print('pint' in sys.modules)"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.split() == ["False", "True"]
