"""Figures as simulators read them: `M` is milli, `Meg` mega, letters behind the scale count for nothing. Nothing is worked out."""

from __future__ import annotations

import re
from decimal import Decimal

_FIGURE = re.compile(r"([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?)([A-Za-z\u00b5\u03bc\u03a9\u2126]*)\Z")
_POWERS = {"f": -15, "p": -12, "n": -9, "u": -6, "\u00b5": -6, "\u03bc": -6, "m": -3, "k": 3, "g": 9, "t": 12}
_LONGEST = 64  # characters of a figure
_SHOWN_IN = {
    "R": ((9, "G\u03a9"), (6, "M\u03a9"), (3, "k\u03a9"), (0, "\u03a9"), (-3, "m\u03a9")),
    "C": ((-6, "uF"), (-9, "nF"), (-12, "pF")),
    "L": ((0, "H"), (-3, "mH"), (-6, "uH"), (-9, "nH")),
}


def figure(text: str) -> Decimal | None:
    """The number a text stands for; None for a name or an expression, and for what no part of a board has."""
    found = _FIGURE.match(text) if len(text) <= _LONGEST else None
    if not found:
        return None
    suffix = found[2].lower()
    number = Decimal(found[1])
    if suffix.startswith("mil"):
        number *= Decimal("25.4e-6")
    else:
        number = number.scaleb(6 if suffix.startswith("meg") else _POWERS.get(suffix[:1], 0))
    return number if not number or -20 < number.adjusted() < 15 else None


def in_units(text: str, letter: str) -> str:
    """A value in words that are read one way everywhere: `1M` of a resistor is 1 mΩ here, `1Meg` 1 MΩ; "" for what is no number."""
    number = figure(text)
    if number is None or letter not in _SHOWN_IN:
        return ""
    scales = _SHOWN_IN[letter]
    power, unit = next((scale for scale in scales if abs(number) >= Decimal(1).scaleb(scale[0])), scales[-1])
    return f"{number.scaleb(-power).normalize():f} {unit}"


def is_expression(text: str) -> bool:
    """Whether a value is to be worked out, which is never done here."""
    return bool(text) and text[0] in "{'"
