"""Values out of free part text: a hand-written table, a general units library, and texts that hold no value."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import pint
import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits
from checker.identify.values import Decoded, decode, part_number_value, plain
from checker.model.candidate import KINDS

TABLE = Path(__file__).resolve().parents[1] / "fixtures" / "identify" / "values.yaml"


@cache
def table() -> dict[str, list[list[object]]]:
    return yaml.safe_load(TABLE.read_text("utf-8"))


def rows(*, part_numbers: bool) -> list[list[object]]:
    return [row for name, group in table().items() if (name == "part numbers") is part_numbers for row in group]


def check(row: list[object], decoded: Decoded | None) -> None:
    value, sure = row[2], "unsure" not in row[3:]
    if value is None:
        assert decoded is None
    else:
        assert decoded is not None
        assert decoded.value == float(str(value))  # to the last bit: SI floats without rounding noise
        assert decoded.sure is sure


@pytest.mark.parametrize(
    "row", rows(part_numbers=False), ids=lambda row: f"{row[1]}: {row[0]}"[:60].encode("ascii", "replace").decode()
)
def test_table(row: list[object]) -> None:
    check(row, decode(str(row[0]), str(row[1])))


@pytest.mark.parametrize("row", rows(part_numbers=True), ids=lambda row: f"{row[1]}: {row[0]}")
def test_part_numbers(row: list[object]) -> None:
    check(row, part_number_value(str(row[0]), str(row[1])))


def test_the_table_is_large_and_names_known_kinds() -> None:
    assert len(rows(part_numbers=False)) >= 250
    assert {row[1] for row in rows(part_numbers=False)} <= KINDS


def test_units_by_kind() -> None:
    assert [decode(*pair).unit for pair in (("1k", "resistor"), ("1n", "capacitor"), ("1u", "inductor"))] == ["ohm", "F", "H"]
    assert [decode(*pair).unit for pair in (("1A", "fuse"), ("5V1", "zener"), ("8MHz", "crystal"))] == ["A", "V", "Hz"]
    assert [decode(*pair).unit for pair in (("600R@100MHz", "inductor"), ("600R", "ferrite"), ("10uH", "ferrite"))] == [
        "ohm",
        "ohm",
        "H",
    ]


@pytest.mark.parametrize(
    "text, kind, rest",
    [
        ("4n7", "capacitor", ""),
        ("0.1uF/250V", "capacitor", "/250V"),
        ("CAP CER 2200PF 400VAC Y1 RADIAL", "capacitor", "CAP CER 400VAC Y1 RADIAL"),
        ("470u25V", "capacitor", "25V"),
        ("2k/5W", "resistor", "/5W"),
        ("T2A 250V", "fuse", "T 250V"),
        ("10K OHM 1%", "resistor", "1%"),
    ],
)
def test_rest(text: str, kind: str, rest: str) -> None:
    assert decode(text, kind).rest == rest


# --- against pint, which knows nothing of this program ------------------------------------------------------------------------

UNITS = pint.UnitRegistry()
PREFIXES = {"resistor": ["", "k", "M"], "capacitor": ["p", "n", "u"], "inductor": ["n", "u", "m"], "crystal": ["k", "M"]}
SYMBOLS = {"resistor": ("ohm", "ohm"), "capacitor": ("F", "farad"), "inductor": ("H", "henry"), "crystal": ("Hz", "hertz")}
TAILS = ("", "/50V", " 5%", "/0603", ", 1%", " (spare)", "_50V")


@st.composite
def written(draw: st.DrawFn) -> tuple[str, str, str]:
    """(text in one of several styles, kind, the same quantity for pint)"""
    kind = draw(st.sampled_from(sorted(PREFIXES)))
    prefix = draw(st.sampled_from(PREFIXES[kind]))
    whole, fraction = draw(st.integers(1, 999)), draw(st.integers(0, 99))
    symbol, name = SYMBOLS[kind]
    number = f"{whole}.{fraction}" if fraction else f"{whole}"
    comma = number.replace(".", ",")
    styles = [f"{number}{prefix}{symbol}", f"{number} {prefix}{symbol}", f"{comma}{prefix}{symbol}"]
    if prefix and (prefix, kind) != ("p", "inductor"):
        styles += [f"{whole}{prefix}{fraction}" if fraction else f"{whole}{prefix}", f"{number}{prefix}", f"{comma}{prefix}"]
    if prefix == "u":
        styles += [style.replace("u", sign) for style in styles for sign in "\u00b5\u03bc"]
    return draw(st.sampled_from(styles)) + draw(st.sampled_from(TAILS)), kind, f"{number} {prefix}{name}"


@settings(max_examples=400, deadline=None)
@given(written())
def test_agrees_with_pint(case: tuple[str, str, str]) -> None:
    text, kind, quantity = case
    expected = UNITS.Quantity(quantity).to(SYMBOLS[kind][1]).magnitude
    decoded = decode(text, kind)
    assert decoded is not None
    assert decoded.value == pytest.approx(expected, rel=1e-12)


@settings(max_examples=300, deadline=None)
@given(st.text(max_size=80), st.sampled_from(sorted(KINDS)))
def test_any_text_is_survived(text: str, kind: str) -> None:
    decoded = decode(text, kind)
    assert decoded is None or decoded.value >= 0
    part_number_value(text, kind)


@settings(max_examples=200, deadline=None)
@given(st.text(alphabet="0123456789.,kKMunpFRV/- x", max_size=30), st.sampled_from(["resistor", "capacitor", "fuse", "zener"]))
def test_a_value_never_starts_inside_a_word(text: str, kind: str) -> None:
    assert (
        decode(f"ABX{text.replace(' ', '').replace('/', '').replace(',', '').replace('-', '').replace('.', '')}", "inductor")
        is None
    )
    decoded = decode(text, kind)
    left = "" if decoded is None else decoded.rest.replace(" ", "")  # pieces of the rest are set apart by blanks
    assert decoded is None or len(left) < max(1, len(text.replace(" ", "")))


@pytest.mark.parametrize("unit", ["1", "1.", "k", "1k", "4x", "R", "10 ", "1,", "±", "a.b/", "B", "T2A", "+-", "1k ohm "])
def test_long_cells_are_cut_and_cheap(unit: str) -> None:
    text = unit * (100_000 // len(unit))
    assert len(plain(text)) <= limits.CELL
    for kind in ("resistor", "capacitor", "fuse", "zener", "ferrite", "thermistor"):
        decode(text, kind)
    assert decode("x" * limits.CELL + " 10k", "resistor") is None
