"""Quantities at the edges: text with a unit becomes an SI float, an SI float becomes text for people.

    parse("4.7 kohm", "ohm")          Quantity(4700.0, "ohm")
    parse("250 V a.c.", "V")          Quantity(250.0, "V", "rms")
    range_of("100-240 V", "V")        Span(100.0, 240.0, "V")
    shown(6.91e-05, "A", "rms")       "69.1 uA rms"

The asked unit is one of UNITS: V, A, ohm, F, H, Hz, W, J, s, mm, m, degC, K (differences), %, A2s, "" (plain ratio). A closed
table serves the usual spellings; pint is loaded for the rest only (`3 ft` for m, `104 degF` for degC). Form of a voltage
or current: "dc", "rms" (also `a.c.`, `VAC`, `V~`), "peak", or "" when not said. Unreadable text raises UnitError; `quantity`
and `span` do the same for a YAML node and raise InputError at its place.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from dataclasses import dataclass
from decimal import Decimal
from functools import cache
from typing import Any, TypeVar

from checker.strict_yaml import Node, either

TEXT = 120  # characters of a quantity or range; the longest sensible one has 40


@dataclass(frozen=True, slots=True)
class Quantity:
    """value in `unit` (one of UNITS); form "dc", "rms", "peak" or ""; text: the words it was read from."""

    value: float
    unit: str
    form: str = ""
    text: str = ""


@dataclass(frozen=True, slots=True)
class Span:
    """A closed interval in `unit`; low == high for a single figure. form and text as in Quantity."""

    low: float
    high: float
    unit: str
    form: str = ""
    text: str = ""


class UnitError(ValueError):
    """Text that is not the quantity asked for. what: a predicate ("has no unit"); found, expected: short phrases."""

    def __init__(self, what: str, found: str, expected: str):
        self.what, self.found, self.expected = what, found, expected
        super().__init__(f"{what}; found {found}; expected {expected}")


# asked unit: what it measures, an example, the prefixes that are read and shown
_ASKED = {
    "V": ("a voltage", "230 V", "u m - k M"),
    "A": ("a current", "1.5 A", "p n u m - k"),
    "ohm": ("a resistance", "4.7 kohm", "u m - k M G"),
    "F": ("a capacitance", "4.7 nF", "p n u -"),
    "H": ("an inductance", "10 mH", "n u m -"),
    "Hz": ("a frequency", "50 Hz", "m - k M G"),
    "W": ("a power", "5 W", "u m - k M"),
    "J": ("an energy", "0.5 J", "u m - k"),
    "s": ("a time", "20 ms", "n u m -"),
    "mm": ("a distance", "8 mm", "-"),
    "m": ("a length", "2000 m", "-"),
    "degC": ("a temperature", "40 degC", "-"),
    "K": ("a temperature difference", "25 K", "-"),
    "%": ("a percentage", "10 %", "-"),
    "A2s": ("a melting integral", "5 A2s", "- k"),
    "": ("a number", "0.8", "-"),
}
UNITS = tuple(_ASKED)
_POWER = {"p": -12, "n": -9, "u": -6, "m": -3, "-": 0, "k": 3, "M": 6, "G": 9}
_MORE = {  # further spellings: factor to the asked unit
    "F": {"mF": "1e-3"},
    "ohm": {"R": "1", "k": "1e3", "M": "1e6", "Ohm": "1", "mOhm": "1e-3", "kOhm": "1e3", "MOhm": "1e6", "ohms": "1"},
    "mm": {"um": "1e-3", "cm": "10", "m": "1e3", "mil": "0.0254", "in": "25.4", "inch": "25.4"},
    "m": {"mm": "1e-3", "cm": "1e-2", "km": "1e3"},
    "degC": {"C": "1"},
    "K": {"degC": "1"},
    "%": {"percent": "1", "ppm": "1e-4"},
    "A2s": {"A^2s": "1", "kA^2s": "1e3", "A^2 s": "1"},
    "": {"%": "1e-2"},
}
_SYMBOLS: dict[str, dict[str, Decimal]] = {
    unit: {("" if p == "-" else p) + unit: Decimal(10) ** _POWER[p] for p in prefixes.split()}
    | {symbol: Decimal(factor) for symbol, factor in _MORE.get(unit, {}).items()}
    for unit, (_, _, prefixes) in _ASKED.items()
}
# What pint converts to. Left out: Hz, since pint takes rad/s and rpm for 1/s; K, since it would move a difference by
# 273.15; % and plain ratios, since it takes angles for ratios.
_PINT = {"V": "V", "A": "A", "ohm": "ohm", "F": "F", "H": "H", "W": "W", "J": "J", "s": "s", "mm": "mm", "m": "m"} | {
    "degC": "degC",
    "A2s": "A^2*s",
}
# Tried in this order, so that "pk" and "peak" are seen before "p"; peak to peak is refused before any of them.
_FORMS = {"peak": "peak", "rms": "rms", "eff": "rms", "ac": "rms", "dc": "dc", "pk": "peak", "p": "peak", "~": "rms"}
_PEAK_TO_PEAK = ("pp", "p-p", "pk-pk", "pkpk", "peak to peak", "peak-to-peak", "peak-peak")

_SPELLINGS = str.maketrans(
    {"\u00b5": "u", "\u03bc": "u", "\u2126": "ohm", "\u03a9": "ohm", "\u00b0": "deg", "\u2103": "degC", "\u00b2": "^2"}
    | dict.fromkeys("\u2010\u2011\u2012\u2013\u2014\u2212", "-")
    | {"\u2026": "...", "\u00b1": "+-", "(": " ", ")": " "}
)
_NUMBER = re.compile(r"[+-]?(?:[0-9]{1,30}(?:[.,][0-9]{1,30})?|\.[0-9]{1,30})(?:[eE][+-]?[0-9]{1,3})?(?![0-9])")
_THOUSANDS = re.compile(r"[+-]?[1-9][0-9]{0,2},[0-9]{3}(?![0-9])")
_BETWEEN = re.compile(r" ?(?:\.\.\.?|to|[-/~]) ?(?=[+-]?\.?[0-9])")
_WORD = r"[A-Za-z]{1,24}(?:\^?[1-9])?"
_PINT_UNIT = re.compile(rf"{_WORD}(?: ?[*/ ] ?{_WORD}){{0,3}}")


def parse(text: str, unit: str) -> Quantity:
    """The one figure that `text` states, in `unit`. Raises UnitError; a range is not one figure."""
    tidy = _tidy(text, unit)
    if unit == "%" and tidy.startswith(("+-", "+/-")):
        tidy = tidy[tidy.index("-") + 1 :].strip()
    number, said = _split(tidy, text, unit)
    if _BETWEEN.search(said):
        raise _wrong("is a range", text, unit, ", as one figure")
    value, form = _converted(number, said, text, unit)
    return Quantity(value, unit, form, text)


def range_of(text: str, unit: str) -> Span:
    """The interval that `text` states, in `unit`: `100-240 V`, `100 V to 240 V`, `50/60 Hz`, `-40..85 degC`, or one figure."""
    tidy = _tidy(text, unit)
    number, said = _split(tidy, text, unit)
    between = _BETWEEN.search(said)
    if between is None:
        value, form = _converted(number, said, text, unit)
        return Span(value, value, unit, form, text)
    high_number, high_said = _split(said[between.end() :], text, unit)
    low_said = said[: between.start()].strip() or high_said
    low, low_form = _converted(number, low_said, text, unit)
    high, form = _converted(high_number, high_said, text, unit)
    if low_form and form and low_form != form:
        raise _wrong("mixes two forms of voltage or current", text, unit, ", both ends of one form")
    if low > high:
        raise _wrong("starts with the higher end", text, unit, ", the lower end first")
    return Span(low, high, unit, form or low_form, text)


_Read = TypeVar("_Read")


def quantity(node: Node, unit: str) -> Quantity:
    """`parse` of a YAML scalar; raises InputError at its place."""
    return _at(node, unit, parse)


def span(node: Node, unit: str) -> Span:
    """`range_of` of a YAML scalar; raises InputError at its place."""
    return _at(node, unit, range_of)


def shown(value: float, unit: str, form: str = "") -> str:
    """`value` (in `unit`) for people: six significant digits, a prefix that leaves 1 to 999 before the point where there is one.

    Raises ValueError for NaN and infinity, which no report may hold.
    """
    if not math.isfinite(value):
        raise ValueError(f"{value} cannot be shown as a quantity")
    rounded = Decimal(f"{value:.5e}")
    if not rounded:
        return f"0 {unit} {form}".rstrip()
    prefixes = _ASKED[unit][2].split() if unit in _ASKED else ["-"]
    prefix = next((p for p in reversed(prefixes) if _POWER[p] <= rounded.adjusted()), prefixes[0])
    scaled = rounded.scaleb(-_POWER[prefix]).normalize()
    figure = f"{scaled:f}" if -7 < scaled.adjusted() < 12 else str(scaled)
    return " ".join(word for word in (figure, ("" if prefix == "-" else prefix) + unit, form) if word)


def _at(node: Node, unit: str, read: Callable[[str, str], _Read]) -> _Read:
    try:
        return read(node.text(), unit)
    except UnitError as error:
        raise node.error(error.what, found=error.found, expected=error.expected) from None


def _wrong(what: str, text: str, unit: str, instead: str = "") -> UnitError:
    name, example, _ = _ASKED[unit]
    return UnitError(what, text, f"{name} such as {example}{instead}")


def _tidy(text: str, unit: str) -> str:
    if len(text) > TEXT:
        raise _wrong("is too long", text[:40] + "...", unit)
    return " ".join(text.translate(_SPELLINGS).split())


def _split(tidy: str, text: str, unit: str) -> tuple[Decimal, str]:
    """The number at the start of `tidy` and what follows it."""
    found = _NUMBER.match(tidy)
    said = tidy[found.end() :].strip() if found else ""
    if found is None or re.match(r"[0-9]|[.,][0-9]", said):
        raise _wrong("does not start with a readable number", text, unit)
    if _THOUSANDS.match(tidy):
        raise _wrong(
            "has a comma that may mean a decimal point or thousands",
            text,
            unit,
            ", with a decimal point and no separator of thousands",
        )
    return Decimal(found.group().replace(",", ".")), said


def _converted(number: Decimal, said: str, text: str, unit: str) -> tuple[float, str]:
    """The number in `unit` and the form its unit text `said` carries."""
    symbol, form = _without_form(said, text, unit) if unit in ("V", "A") else (said, "")
    if not symbol and unit:
        name, example, _ = _ASKED[unit]
        like = text if re.fullmatch(r"[0-9.]{1,8}", text) else ""
        raise UnitError("has no unit", text, f"{name} with its unit such as " + (f"{like} {unit}" if like else example))
    factor = _SYMBOLS[unit].get(symbol)
    value = float(number * factor) if factor is not None else _by_pint(float(number), symbol, text, unit)
    if not math.isfinite(value):
        raise _wrong("is too large", text, unit)
    return value + 0.0, form  # minus zero becomes zero


def _without_form(said: str, text: str, unit: str) -> tuple[str, str]:
    plain = said.replace(".", "").replace("_", " ")
    folded = plain.casefold()
    if folded.endswith(_PEAK_TO_PEAK):
        raise _wrong("is given peak to peak", text, unit, ", from zero to peak (`peak`)")
    for suffix, form in _FORMS.items():
        if folded.endswith(suffix):
            return plain[: -len(suffix)].strip(), form
    return said, ""


def _by_pint(number: float, symbol: str, text: str, unit: str) -> float:
    """What pint makes of a unit outside the table, when its dimension is the one asked for."""
    target = _PINT.get(unit)
    if target and _PINT_UNIT.fullmatch(symbol):
        registry = _registry()
        try:
            found = float(registry.Quantity(number, registry.parse_units(symbol)).to(target).magnitude)
            return float(f"{found:.12g}")  # its factors are binary: 6500 ft would come out as 1981.1999999999998 m
        except Exception:  # pint raises a dozen kinds for unknown names and wrong dimensions; all mean no
            pass
    name, example, _ = _ASKED[unit]
    accepted = _SYMBOLS[unit]
    alike = next((known for known in accepted if known.casefold() == symbol.casefold()), "")
    hint = f"; did you mean `{alike}`?" if alike else ""
    raise UnitError(f"is not {name}{hint}", text, f"{name} such as {example}" + (f" (in {either(accepted)})" if unit else ""))


@cache
def _registry() -> Any:
    import pint  # a third of a second, so only when the table has no answer

    return pint.UnitRegistry()
