"""What the cards of a SPICE netlist state: parts with their nodes, models, sub-circuits."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.readers.spice_figures import figure, in_units, is_expression
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
CONTROLLED = frozenset("BEFGHSW")  # cards that sense elsewhere; further nodes of theirs carry no current
MODELLING = frozenset("ABEFGH")  # cards that no drawing of a board holds: a sub-circuit with one is the model of one part
_NO_PART = frozenset("VIBEFGHSTW")  # their reference letters mean other parts on a board
_MODELLED = frozenset("DJZQM")
_DOUBLED = re.compile(r"([A-Z])_(?=\1|[A-Z]{1,4}[0-9]+[A-Z]?\Z)", re.IGNORECASE)  # R_R57, X_U2; R_load is called so
_PLACED = re.compile(r"X(?=[A-Z]{1,2}[0-9]+\Z)|K(?=(?:T|TR|TX)[0-9]+\Z)", re.IGNORECASE)  # XU2, KT1
_NUMBERED = re.compile(r"[DQ](?=[0-9]N[0-9])", re.IGNORECASE)  # D1N4007, a model of 1N4007
_TYPES = {"npn": "Q_NPN", "pnp": "Q_PNP", "lpnp": "Q_PNP", "nmos": "NMOS", "pmos": "PMOS", "vdmos": "MOSFET", "d": "D"}
# parameter -> letters of the cards that it says something of, "" for all, what it says, and the unit of a number
_PARAMETERS = {
    "mfg": ("", "maker", ""),
    "pn": ("", "type", ""),
    "tol": ("RCL", "tolerance", "%"),
    "v": ("C", "rating:voltage", "V"),
    "pwr": ("R", "rating:power", "W"),
    "type": ("C", "technology", ""),
}


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
        letter = _DOUBLED.match(self.name) or _PLACED.match(self.name)
        return self.name[letter.end() :] if letter else self.name


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
        return 4 if words[5].lower() in models or figure(words[5]) is None else 3
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


def facts(made: Device, types: dict[str, str], path: str) -> tuple[Fact, ...]:
    """What a card says of its part. types: model in small letters -> its type.

    Sources, loads and switches of a simulation are of no kind a board has, and no bill of materials lists them.
    """
    source = Source(path, made.line)
    found = []
    if made.value:
        text = in_units(made.value, made.letter)
        found.append(Fact("value", text or made.value, source, text=made.value if text and text != made.value else ""))
    kind = types.get(made.model.lower(), made.model).lower()
    if made.model and not (made.letter in _MODELLED and made.model.lower() in (*_TYPES, "njf", "pjf")):
        found.append(Fact("type", _NUMBERED.sub("", made.model, 1)[: limits.CELL], source))
    symbol = _symbol(made, kind)
    if made.letter in _NO_PART:
        found.append(Fact("kind", "unknown", source, text=f"{symbol.replace('_', ' ').lower()} of a simulation"))
        found.append(Fact("in_bom", False, source))
    if symbol:
        found.append(Fact("symbol", symbol, source))
    found += _stated(made, source)
    return tuple(found)


def _symbol(made: Device, kind: str) -> str:
    """A symbol that says what a part is; "" for a sub-circuit whose reference says more: XF1 is a fuse, XJ1 a connector."""
    if made.letter == "X":
        return "" if made.ref != made.name else "IC"
    if made.letter in _TERMINALS:
        return _TERMINALS[made.letter][1]
    return _TYPES.get(kind, "") or {"Q": "Bipolar_Transistor", "M": "MOSFET"}[made.letter]


def _stated(made: Device, source: Source) -> Iterator[Fact]:
    """What parameters tell of the part that is bought: `mfg="..." pn="..." tol=5 V=25`."""
    for name, (letters, meaning, unit) in _PARAMETERS.items():
        text = made.parameters.get(name, "")
        if not text or is_expression(text) or (letters and made.letter not in letters):
            continue
        number = figure(text) if unit else None
        if unit and number is None:
            continue
        shown = f"{number.normalize():f} {unit}" if number is not None else text
        yield Fact(meaning, shown[: limits.CELL], source, text=f"{name}={text}"[: limits.CELL] if shown != text else "")
