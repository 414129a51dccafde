"""Which words of a schematic are about the part, and which only about the symbol it was drawn with or the net it leads to.

of_symbol("1N4148WS", ("B5819W",))     True: whatever the library says about a 1N4148WS is not said about a B5819W
of_symbol("2N7002", ("2N7002K",))      False
of_symbol("D_Schottky", ("B5819W",))   False: the symbol names no type
"""

from __future__ import annotations

import re
from collections.abc import Sequence

from checker.model.candidate import CONNECTORS
from checker.model.fact import Fact, Trust

# parts whose value is no type, so that symbol and value never agree
_VALUED = CONNECTORS | frozenset("resistor capacitor inductor ferrite network potentiometer crystal fuse switch jumper".split())
_NUMBER = re.compile(r"[0-9]{3,}")
_LETTER = re.compile(r"[A-Za-z]")
_SIZES = frozenset("0201 0402 0603 0805 1206 1210 1812 2010 2512 3216 3528 5050".split())
LABELS = 50.0  # V; a lower voltage in the value of a connector tells what is connected there (common practice, no source)


def of_symbol(symbol: str, names: Sequence[str]) -> bool:
    """Whether a symbol is drawn for one type and every name of the part is of another. names: value and part number."""
    drawn = _numbers(symbol)
    types = [numbers for name in names if (numbers := _numbers(name))]
    return bool(drawn and types) and not any(max(drawn, key=len) in numbers for numbers in types)


def _numbers(text: str) -> frozenset[str]:
    """The longer numbers of a type, () where the text names none."""
    return frozenset(_NUMBER.findall(text)) - _SIZES if _LETTER.search(text) else frozenset()


def own(texts: Sequence[Fact], facts: Sequence[Fact], kind: str) -> list[Fact]:
    """`texts` without the library's description of another type than the part is."""
    symbol = next((str(fact.value) for fact in facts if fact.attribute == "symbol"), "")
    if not symbol or kind in _VALUED:
        return list(texts)
    names = [str(fact.value) for fact in texts if fact.attribute in ("value", "type")]
    if not of_symbol(symbol, names):
        return list(texts)
    return [fact for fact in texts if fact.attribute != "description" or fact.trust > Trust.NETLIST]


def is_name(attribute: str, text: str) -> bool:
    """Whether a description is one word, as where a bill has its values and types in that column."""
    return attribute == "description" and not any(character.isspace() for character in text.strip())


def labels(fact: Fact, kind: str, volts: float, *, with_current: bool) -> bool:
    """Whether a voltage in a text is a label: `24V` as the value of a connector, where no rated current stands beside it."""
    return kind in CONNECTORS and fact.attribute == "value" and volts < LABELS and not with_current
