"""What the cards of a SPICE netlist state: parts with their nodes, models, sub-circuits."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass, field
from decimal import Decimal

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.readers.bom_headings import attribute
from checker.readers.spice_lines import Card

# letter -> names of its terminals in the order of its nodes, and a symbol that says what it is; nodes that only sense are left out
_TERMINALS = {
    "R": (("", ""), "R"),
    "C": (("", ""), "C"),
    "L": (("", ""), "L"),
    "D": (("A", "K"), "D"),
    "J": (("D", "G", "S"), "JFET"),
    "Z": (("D", "G", "S"), "MESFET"),
    "V": (("+", "-"), "Voltage_Source"),
    "I": (("+", "-"), "Current_Source"),
    "B": (("+", "-"), "Controlled_Source"),
    "E": (("+", "-"), "Controlled_Source"),
    "F": (("+", "-"), "Controlled_Source"),
    "G": (("+", "-"), "Controlled_Source"),
    "H": (("+", "-"), "Controlled_Source"),
    "S": (("", ""), "Controlled_Switch"),
    "W": (("", ""), "Controlled_Switch"),
    "T": (("", "", "", ""), "Transmission_Line"),
}
SENSING = frozenset("EGS")  # cards with two further nodes that carry no current
MODELLING = frozenset("ABEFGH")  # cards that no drawing of a board holds: a sub-circuit with one is the model of one part
_NO_PART = frozenset("VIBEFGHSTW")  # their reference letters mean other parts on a board
_MODELLED = frozenset("DJZQM")
_PLACED = re.compile(r"X[A-Z]{1,2}[0-9]+\Z", re.IGNORECASE)  # XU2
_DOUBLED = re.compile(r"[A-Za-z]_(?=[^\W_])")  # R_R57
_UNIT = re.compile(r"([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?)([A-Za-zµμ\u03a9\u2126]*)\Z")
_POWERS = {"f": -15, "p": -12, "n": -9, "u": -6, "µ": -6, "μ": -6, "m": -3, "k": 3, "g": 9, "t": 12}
_SHOWN_IN = {
    "R": ((9, "G\u03a9"), (6, "M\u03a9"), (3, "k\u03a9"), (0, "\u03a9"), (-3, "m\u03a9")),
    "C": ((-6, "uF"), (-9, "nF"), (-12, "pF")),
    "L": ((0, "H"), (-3, "mH"), (-6, "uH"), (-9, "nH")),
}
_TYPES = {"npn": "Q_NPN", "pnp": "Q_PNP", "lpnp": "Q_PNP", "nmos": "NMOS", "pmos": "PMOS", "vdmos": "MOSFET", "d": "D"}


@dataclass(slots=True)
class Device:
    """A part of one circuit. nodes: (name of the terminal, node as written). model: of it, or the sub-circuit it is.

    substrate: whether it has one, which no single part on a board has; that node is left out.
    """

    letter: str
    name: str
    line: int
    nodes: list[tuple[str, str]]
    model: str = ""
    value: str = ""
    parameters: dict[str, str] = field(default_factory=dict)
    substrate: bool = False

    @property
    def ref(self) -> str:
        """The reference on the schematic: `R_R57` is R57, `XU2` U2."""
        if _DOUBLED.match(self.name):
            return self.name[2:]
        return self.name[1:] if self.letter == "X" and _PLACED.match(self.name) else self.name


def device(card: Card, models: Iterable[str], path: str) -> Device | None:
    """The part of a card, None for one of a letter that is not understood. models: all that the file defines, in small letters.

    Raises InputError for a card with too few words.
    """
    words, letter = card.positional(), card.letter
    made = Device(letter, words[0] if words else card.words[0], card.line, [], parameters=card.parameters())
    if letter == "X":
        if len(words) < 3:
            raise _short(card, path, "nodes and a sub-circuit")
        made.nodes, made.model = [("", node) for node in words[1:-1]], words[-1]
    elif letter == "Q":
        count = _base_nodes(words, models)
        _take(made, card, words, ("C", "B", "E", "S")[:count], path)
        made.nodes, made.substrate = made.nodes[:3], count == 4
    elif letter == "M":
        bulk = len(words) > 5
        _take(made, card, words, ("D", "G", "S", "B")[: 4 if bulk else 3], path)
        if bulk and made.nodes[3][1].lower() == made.nodes[2][1].lower():
            made.nodes.pop()  # tied to the source inside, as in every single transistor
    elif letter in _TERMINALS:
        _take(made, card, words, _TERMINALS[letter][0], path)
    else:
        return None
    if len(made.nodes) > limits.PINS_PER_PART:
        raise InputError(
            path, "the file holds too many pins of one part", line=card.line, expected=f"at most {limits.PINS_PER_PART:,}"
        )
    for word in (made.name, *(node for _, node in made.nodes)):
        if len(word) > limits.NAME:
            expected = f"at most {limits.NAME:,} characters"
            raise InputError(path, "a name is too long", line=card.line, found=word, expected=expected)
    return made


def _base_nodes(words: list[str], models: Iterable[str]) -> int:
    """Whether a bipolar transistor has a substrate: the word that is a known model decides, else a number that is an area."""
    if len(words) > 5 and words[4].lower() not in models:
        return 4 if words[5].lower() in models or not _UNIT.match(words[5]) else 3
    return 3


def _take(made: Device, card: Card, words: list[str], names: tuple[str, ...], path: str) -> None:
    """Nodes, then model or value."""
    rest = words[1 + len(names) :]
    if len(words) < 1 + len(names) or (made.letter in _MODELLED and not rest):
        raise _short(card, path, f"{len(names)} nodes{' and a model' if made.letter in _MODELLED else ''}")
    made.nodes = list(zip(names, words[1:], strict=False))
    if made.letter in _MODELLED:
        made.model = rest[0]
    elif made.letter in "RCL":
        values = [word for word in rest[:2] if not _is_model(word)]
        made.value = (values or rest or [""])[0] or made.parameters.get(made.letter.lower(), "")
    elif made.letter not in "SWT":
        made.value = " ".join(rest)[: limits.CELL]


def _is_model(word: str) -> bool:
    """Whether a word in the place of a value is a name."""
    return word[:1].isalpha()


def _short(card: Card, path: str, expected: str) -> InputError:
    return InputError(path, "a part has too few words", line=card.line, found=" ".join(card.words)[:200], expected=expected)


def is_expression(text: str) -> bool:
    """Whether a value is to be worked out, which is never done here."""
    return bool(text) and text[0] in "{'"


def in_units(text: str, letter: str) -> str:
    """A value in words that are read one way everywhere: `1M` of a resistor is 1 mΩ here, `1Meg` 1 MΩ; "" for what is no number.

    Letters behind the scale count for nothing: `10uF`, `4.7kOhm`.
    """
    found = _UNIT.match(text.replace("\u00b5", "µ"))
    if not found or letter not in _SHOWN_IN:
        return ""
    suffix = found[2].lower()
    number = Decimal(found[1])
    if suffix.startswith("mil"):
        number *= Decimal("25.4e-6")
    elif suffix.startswith("meg"):
        number = number.scaleb(6)
    else:
        number = number.scaleb(_POWERS.get(suffix[:1], 0))
    if not -20 < number.adjusted() < 15 and number:
        return ""
    scales = _SHOWN_IN[letter]
    power, unit = next((scale for scale in scales if abs(number) >= Decimal(1).scaleb(scale[0])), scales[-1])
    return f"{number.scaleb(-power).normalize():f} {unit}"


def facts(made: Device, types: dict[str, str], path: str) -> tuple[Fact, ...]:
    """What a card says of its part. types: model in small letters -> its type."""
    source = Source(path, made.line)
    found = []
    if made.value:
        text = in_units(made.value, made.letter)
        found.append(Fact("value", text or made.value, source, text=made.value if text and text != made.value else ""))
    kind = types.get(made.model.lower(), made.model).lower()
    if made.model and not (made.letter in _MODELLED and made.model.lower() in (*_TYPES, "njf", "pjf")):
        found.append(Fact("type", made.model, source))
    symbol = "IC" if made.letter == "X" else _TERMINALS[made.letter][1] if made.letter in _TERMINALS else _TYPES.get(kind, "")
    if made.letter in _NO_PART:
        found.append(Fact("kind", "unknown", source, text=f"{symbol.replace('_', ' ').lower()} of a simulation"))
    symbol = symbol or {"Q": "Bipolar_Transistor", "M": "MOSFET"}[made.letter]
    found.append(Fact("symbol", symbol, source))
    for name, text in made.parameters.items():
        meaning = {"mfg": "maker", "pn": "type"}.get(name) or (attribute(name) if name == "tol" else None)
        if meaning and text:
            found.append(Fact(meaning, text[: limits.CELL], source))
    return tuple(found)
