"""Reads the descriptions of the trial designs: `fixtures/designs/trials/<name>/circuit.txt` and `symbols.txt`.

A circuit.txt has a header and three sections, `symbols`, `parts` and `answers`. Header lines are `key: value`:

title     the design's title
form      netlist layout: `D` bare atoms, `Dq` and `E` quoted, `Etabs` newest layout, `X` XML twin
libparts  `yes` (default) or `no`
flag      how the netlist marks an unfitted part: `property`, a field as `NAME=text`, or `none`
bom       words: comma semicolon tab, utf-8 utf-8-sig utf-16, decimal-comma, blanks ranges joined, preamble; no line: no BOM
columns   `Heading=key | Heading=key ...`

A part is `REF[,REF..] value symbol footprint : net ... ; key=text`: nets in the order of the symbol's pins or as
`pin,pin=net`, `-` for a pin in no net, a leading `.` for a net to which the schematic gave no name. Keys with a capital
reach the netlist as fields. Answers are YAML, written by hand with the same short net names.
"""

from __future__ import annotations

import re
import shlex
from dataclasses import dataclass, field, replace
from pathlib import Path

import yaml

TRIALS = Path(__file__).resolve().parents[1] / "fixtures" / "designs" / "trials"
_RANGE = re.compile(r"([A-Za-z_]+)([0-9]+)-([A-Za-z_]+)([0-9]+)\Z")
_CONNECTOR = re.compile(r"(CONN|SCREW|HDR)(?:([0-9])X)?([0-9]+)")
_NAMED_AS_SYMBOL = {"Device", "Connector", "Mechanical", "Jumper", "Switch", "Transformer", "Valve", "QX"}
_CHIP = {
    "R": "Resistor_SMD:R",
    "C": "Capacitor_SMD:C",
    "L": "Inductor_SMD:L",
    "FB": "Inductor_SMD:L",
    "F": "Fuse:Fuse",
    "D": "LED_SMD:LED",
}
_METRIC = {"0402": "1005", "0603": "1608", "0805": "2012", "1206": "3216", "1210": "3225", "1812": "4532", "2512": "6332"}


@dataclass(frozen=True, slots=True)
class Symbol:
    """A library symbol. groups: pin numbers that conduct to one another; a pin in none conducts to nothing. part "": the value."""

    name: str
    library: str
    part: str
    description: str
    pins: tuple[tuple[str, str], ...]
    groups: tuple[tuple[str, ...], ...]
    capacitor: bool = False


@dataclass(frozen=True, slots=True)
class Part:
    """A placed part; nets maps pin number to the final net name."""

    ref: str
    value: str
    symbol: Symbol
    footprint: str
    nets: dict[str, str]
    keys: dict[str, str]

    @property
    def fitted(self) -> bool:
        """Whether the part is on the assembled board."""
        return "unfitted" not in self.keys

    @property
    def library_part(self) -> str:
        """The part's name in its library."""
        return self.symbol.part or self.value


@dataclass(frozen=True, slots=True)
class Trial:
    """One design as described; answers with final net names."""

    name: str
    header: dict[str, str]
    parts: tuple[Part, ...]
    answers: dict[str, object] = field(default_factory=dict)

    def nets(self) -> dict[str, list[tuple[Part, str]]]:
        """Net name -> its (part, pin) nodes, both in the order of the parts."""
        found: dict[str, list[tuple[Part, str]]] = {}
        for part in self.parts:
            for pin, net in part.nets.items():
                found.setdefault(net, []).append((part, pin))
        return found


def _symbol(line: str) -> Symbol:
    """A symbol from `NAME library[:part] rule : pins -- description`."""
    head, _, rest = line.partition(" : ")
    pins, _, description = f" {rest}".partition(" -- ")
    name, library, rule = head.split()
    library, _, part = library.partition(":")
    groups = [[pin for one in group.split(",") if one.strip() for pin in _pins(one)] for group in pins.split("|")]
    numbers = tuple(tuple(number for number, _ in group) for group in groups) if rule in ("join", "split") else ()
    flat = tuple(pin for group in groups for pin in group)
    part = part or (name if library in _NAMED_AS_SYMBOL else "")
    return Symbol(name, library, part, description.strip(), flat, numbers, rule == "cap")


def _pins(text: str) -> list[tuple[str, str]]:
    """`3 GND` is one named pin, `4` one without a name, `5-20` sixteen of those."""
    span = re.fullmatch(r"\s*([0-9]+)-([0-9]+)\s*", text)
    if span:
        return [(str(number), "") for number in range(int(span[1]), int(span[2]) + 1)]
    number, _, name = text.strip().partition(" ")
    return [(number, name.strip())]


def _connector(name: str) -> Symbol | None:
    """CONN5, SCREW2, HDR2X5: connectors of any size."""
    found = _CONNECTOR.fullmatch(name)
    if not found:
        return None
    count = int(found[3])
    part, what, library = {
        "CONN": (f"Conn_01x{count:02d}", "Generic connector, single row", "Connector_Generic"),
        "SCREW": (f"Screw_Terminal_01x{count:02d}", "Generic screw terminal", "Connector"),
        "HDR": (f"Conn_02x{count:02d}_Odd_Even", "Generic connector, double row, odd/even pin numbering", "Connector_Generic"),
    }[found[1]]
    pins = tuple((str(number), f"Pin_{number}") for number in range(1, int(found[2] or 1) * count + 1))
    return Symbol(name, library, part, what, pins, ())


def _references(text: str) -> list[str]:
    found: list[str] = []
    for token in text.split(","):
        span = _RANGE.match(token)
        found += [f"{span[1]}{number}" for number in range(int(span[2]), int(span[4]) + 1)] if span else [token]
    return found


def _footprint(text: str, ref: str) -> str:
    """`-` is none; a bare chip size becomes the usual library name for that reference."""
    if text not in _METRIC:
        return "" if text == "-" else text
    letters = re.match(r"[A-Z]+", ref)
    return f"{_CHIP[letters[0] if letters else 'R']}_{text}_{_METRIC[text]}Metric"


def _placed(line: str, symbols: dict[str, Symbol]) -> list[Part]:
    head, _, rest = f"{line} ".partition(" : ")
    rest, *attributes = rest.split(";")
    refs, value, name, footprint = shlex.split(head)
    shape = symbols.get(name) or _connector(name)
    if shape is None:
        raise ValueError(f"no symbol {name} in: {line}")
    numbers = [number for number, _ in shape.pins]
    tokens = shlex.split(rest)
    if not any("=" in token for token in tokens) and len(tokens) != len(numbers):
        raise ValueError(f"{len(tokens)} nets for {len(numbers)} pins in: {line}")
    nets: dict[str, str] = {}
    for at, token in enumerate(tokens):
        pins, equals, net = token.rpartition("=")
        for pin in pins.split(",") if equals else [numbers[at]]:
            if pin not in numbers or pin in nets:
                raise ValueError(f"pin {pin} unknown or twice in: {line}")
            nets[pin] = net
    ordered = {number: nets[number] for number in numbers if nets.get(number, "-") != "-"}
    keys = {key.strip(): text.strip() for key, _, text in (one.partition("=") for one in attributes)}
    return [Part(ref, value, shape, _footprint(footprint, ref), ordered, keys) for ref in _references(refs)]


def natural(ref: str) -> tuple[tuple[str, int], ...]:
    """Sort key of a reference: letters, then number."""
    return tuple((letters, int(digits or 0)) for letters, digits in re.findall(r"([^0-9]*)([0-9]*)", ref) if letters or digits)


def _automatic(trial: Trial) -> dict[str, str]:
    """Names for the nets that the schematic left unnamed, after their first pin."""
    names: dict[str, str] = {}
    for net, nodes in trial.nets().items():
        if not net.startswith("."):
            continue
        part, pin = min(nodes, key=lambda node: (natural(node[0].ref), node[1]))
        label = "" if trial.header["form"].startswith("D") else dict(part.symbol.pins)[pin].replace("~", "")
        alone = [name for _, name in part.symbol.pins].count(label) == 1
        tail = label.replace("/", "{slash}") + ("" if alone else f"-Pad{pin}") if label else f"Pad{pin}"
        names[net] = f"Net-({part.ref}-{tail})"
    return names


def _renamed(value: object, names: dict[str, str]) -> object:
    if isinstance(value, dict):
        return {names.get(key, key): _renamed(one, names) for key, one in value.items()}
    if isinstance(value, list):
        return [_renamed(one, names) for one in value]
    return names.get(value, value) if isinstance(value, str) else value


def _lines(text: str) -> list[str]:
    """Logical lines: comments and blank lines dropped, an indented line continues the one before."""
    found: list[str] = []
    for line in text.splitlines():
        if not line.strip() or line.startswith("#"):
            continue
        if line[0] == " " and found:
            found[-1] += " " + line.strip()
        else:
            found.append(line.rstrip())
    return found


def _symbols(text: str) -> dict[str, Symbol]:
    return {one.name: one for one in map(_symbol, _lines(text))}


def read(folder: Path) -> Trial:
    """The trial described in a folder's circuit.txt, automatic net names made. Raises ValueError for a line that does not fit."""
    body, _, sheet = (folder / "circuit.txt").read_text("utf-8").partition("\nanswers\n")
    top, _, placed = body.partition("\nparts\n")
    head, _, own = f"{top}\n".partition("\nsymbols\n")
    header = dict(line.split(": ", 1) for line in _lines(head))
    symbols = _symbols((TRIALS / "symbols.txt").read_text("utf-8")) | _symbols(own)
    trial = Trial(folder.name, header, tuple(part for line in _lines(placed) for part in _placed(line, symbols)))
    names = _automatic(trial)
    parts = tuple(replace(part, nets={pin: names.get(net, net) for pin, net in part.nets.items()}) for part in trial.parts)
    answers = _renamed(yaml.safe_load(sheet), names)
    if not isinstance(answers, dict):
        raise ValueError(f"the answers of {folder.name} are no mapping")
    return replace(trial, parts=parts, answers=answers)


def folders() -> list[Path]:
    """Every trial folder, in name order."""
    return sorted(path.parent for path in TRIALS.glob("*/circuit.txt"))
