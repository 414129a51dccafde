"""Boards of any size for the bench: flyback supplies of 60 parts each on one mains, and 20 % logic on their outputs.

    python tests/bench/board_generator.py PARTS FOLDER [SEED]

One inlet feeds every supply, so that there is one mains domain and one isolated output, hence one barrier, a supply; a transformer,
a coupler and a Y capacitor bridge each. Values are typical of 5 V to 24 V supplies and written as people write them, each in one of
several styles; the same seed gives the same bytes. Circuits and part numbers are generic or invented.
"""

from __future__ import annotations

import csv
import random
import sys
import uuid
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from xml.sax.saxutils import quoteattr

IDENTITIES = uuid.UUID("3b0c4f3e-9d0a-5b4e-8a43-6c0f4f5a7e21")  # any fixed value: the same board has the same identities
FULL = 60  # parts of a whole supply
SMALLEST = 41  # the first parts of the circuit `supply` that make a working one
SMALLEST_BOARD = SMALLEST + 1 + 7  # with the inlet and a little logic
ROW = 200  # references of one BOM row at most
BRIDGING = 3  # parts across each barrier: transformer, coupler, Y capacitor

# symbol -> library, description, pins as "number name type" or "number type"
SYMBOLS = {
    "R": ("Passive", "Resistor", "1 passive, 2 passive"),
    "C": ("Passive", "Capacitor", "1 passive, 2 passive"),
    "C_Polarized": ("Passive", "Polarized capacitor", "1 passive, 2 passive"),
    "L": ("Passive", "Inductor", "1 passive, 2 passive"),
    "Fuse": ("Passive", "Fuse", "1 passive, 2 passive"),
    "Varistor": ("Passive", "Voltage dependent resistor", "1 passive, 2 passive"),
    "Thermistor_NTC": ("Passive", "Temperature dependent resistor, negative coefficient", "1 passive, 2 passive"),
    "D": ("Discrete", "Diode", "1 K passive, 2 A passive"),
    "D_Schottky": ("Discrete", "Schottky diode", "1 K passive, 2 A passive"),
    "D_TVS": ("Discrete", "Unidirectional transient-voltage-suppression diode", "1 K passive, 2 A passive"),
    "LED": ("Discrete", "Light emitting diode", "1 K passive, 2 A passive"),
    "Bridge_Rectifier": ("Discrete", "Bridge rectifier", "1 + passive, 2 AC passive, 3 AC passive, 4 - passive"),
    "NMOS": ("Discrete", "N-channel MOSFET", "1 G input, 2 D passive, 3 S passive"),
    "PWM_3844": (
        "Analog",
        "Current-mode PWM controller, 50 % duty",
        "1 COMP output, 2 VFB input, 3 ISENSE input, 4 RT/CT passive, 5 GND power_in, 6 OUT output, 7 VCC power_in, "
        "8 VREF power_out",
    ),
    "TL431": ("Analog", "Adjustable shunt reference", "1 REF passive, 2 A passive, 3 K passive"),
    "Optocoupler": (
        "Isolator",
        "Optocoupler, transistor output",
        "1 A passive, 2 K passive, 3 E open_emitter, 4 C open_collector",
    ),
    "Choke_CommonMode": ("Magnetic", "Common-mode choke", "1 passive, 2 passive, 3 passive, 4 passive"),
    "Transformer_Flyback": (
        "Magnetic",
        "Flyback transformer: primary, bias, secondary",
        "1 P1 passive, 2 P2 passive, 3 B1 passive, 4 B2 passive, 7 S1 passive, 8 S2 passive",
    ),
    "Inlet_C8": ("Connector", "Mains inlet IEC 60320 C8, two poles", "1 L passive, 2 N passive"),
    "Terminal_1x02": ("Connector", "Terminal block, two poles", "1 Pin_1 passive, 2 Pin_2 passive"),
    "Header_1x04": ("Connector", "Pin header, four pins", "1 Pin_1 passive, 2 Pin_2 passive, 3 Pin_3 passive, 4 Pin_4 passive"),
    "Buffer_74x": (
        "Logic",
        "Dual buffer, three-state",
        "1 1OE input, 2 1A input, 3 2Y tri_state, 4 GND power_in, 5 2A input, 6 1Y tri_state, 7 2OE input, 8 VCC power_in",
    ),
}
# The columns of the BOM beside reference, quantity, value, description, maker and type.
COLUMNS = ("Voltage", "Class", "Isolation voltage", "Isolation working voltage", "Creepage", "Clearance", "Windings")


@dataclass(frozen=True, slots=True)
class Kind:
    """A row of circuits.csv. value, bought: styles of writing it in the drawing and in the BOM. columns: as COLUMNS.

    nets: one a pin; with / in front it is the board's, else the supply's; {g} stands for the group of a logic part.
    """

    prefix: str
    symbol: str
    footprint: str
    nets: tuple[str, ...]
    value: tuple[str, ...]
    bought: tuple[str, ...]
    description: str
    columns: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Part:
    """One part: ref, its kind, nets in the order of the symbol's pins, and the texts chosen for it."""

    ref: str
    kind: Kind
    sheet: str
    nets: tuple[str, ...]
    value: str
    bought: str


@dataclass(frozen=True, slots=True)
class Board:
    """What was written. barriers: barriers to be found. bridging: parts across them. files: netlist, xml and bom."""

    parts: int
    nets: int
    supplies: int
    barriers: int
    bridging: int
    netlist: Path
    xml: Path
    bom: Path


def _circuits() -> dict[str, list[Kind]]:
    """The rows of circuits.csv by circuit: inlet, supply, logic."""
    found: dict[str, list[Kind]] = {}
    with (Path(__file__).parent / "circuits.csv").open(encoding="utf-8", newline="") as stream:
        next(stream)
        for circuit, prefix, symbol, footprint, nets, value, bought, description, *columns in csv.reader(stream):
            styles = tuple(value.split(" | ")), tuple(bought.split(" | "))
            found.setdefault(circuit, []).append(
                Kind(prefix, symbol, footprint, tuple(nets.split()), *styles, description, tuple(columns))
            )
    return found


CIRCUITS = _circuits()


def write(parts: int, folder: Path, seed: int = 1) -> Board:
    """Write board.net, board.xml and bom.csv with exactly `parts` parts into `folder`, which is made when it is missing.

    Raises ValueError below SMALLEST_BOARD parts.
    """
    if parts < SMALLEST_BOARD:
        raise ValueError(f"a board has at least {SMALLEST_BOARD} parts")
    folder.mkdir(parents=True, exist_ok=True)
    supplies = _supplies(parts)
    made = tuple(_parts(parts, supplies, random.Random(seed)))
    nets = _nets(made)
    files = (folder / name for name in ("board.net", "board.xml", "bom.csv"))
    board = Board(len(made), len(nets), len(supplies), len(supplies), BRIDGING * len(supplies), *files)
    for path, lines in ((board.netlist, _sexpr(made, nets)), (board.xml, _xml(made, nets))):
        with path.open("w", encoding="utf-8", newline="\n") as stream:
            stream.writelines(f"{line}\n" for line in lines)
    with board.bom.open("w", encoding="utf-8", newline="") as stream:
        csv.writer(stream, lineterminator="\n").writerows(_rows(made))
    return board


def _supplies(parts: int) -> list[int]:
    """How many parts each supply has: four of five parts lie in supplies, the last supply may be a smaller one."""
    whole, rest = divmod(parts - 1 - parts // 5, FULL)
    return [FULL] * whole + ([rest] if rest >= SMALLEST else []) or [SMALLEST]


def _parts(parts: int, supplies: Sequence[int], chance: random.Random) -> Iterator[Part]:
    counts: dict[str, int] = {}
    logic = CIRCUITS["logic"]

    def part(kind: Kind, sheet: str, group: str = "") -> Part:
        counts[kind.prefix] = counts.get(kind.prefix, 0) + 1
        nets = (name.format(g=group) for name in kind.nets)
        return Part(
            f"{kind.prefix}{counts[kind.prefix]}",
            kind,
            sheet,
            tuple(name[1:] if name.startswith("/") else f"{sheet}{name}" for name in nets),
            chance.choice(kind.value),
            chance.choice(kind.bought),
        )

    yield part(CIRCUITS["inlet"][0], "/")
    for number, size in enumerate(supplies, 1):
        for kind in CIRCUITS["supply"][:size]:
            yield part(kind, f"/S{number}/")
    for at in range(parts - 1 - sum(supplies)):
        group, member = divmod(at, len(logic))
        yield part(logic[member], f"/S{group % len(supplies) + 1}/", f"G{group + 1}_")


def _pins(symbol: str) -> list[tuple[str, str, str]]:
    """(number, name, type) of each pin."""
    words = [pin.split() for pin in SYMBOLS[symbol][2].split(", ")]
    return [(pin[0], pin[1] if len(pin) == 3 else "", pin[-1]) for pin in words]


PINS = {symbol: _pins(symbol) for symbol in SYMBOLS}


def _nets(parts: Iterable[Part]) -> dict[str, list[tuple[str, str, str, str]]]:
    """net -> (reference, pin, pin name, pin type) of each of its pins."""
    nets: dict[str, list[tuple[str, str, str, str]]] = {}
    for part in parts:
        for net, pin in zip(part.nets, PINS[part.kind.symbol], strict=True):
            nets.setdefault(net, []).append((part.ref, *pin))
    return nets


def _sexpr(parts: Sequence[Part], nets: dict[str, list[tuple[str, str, str, str]]]) -> Iterator[str]:
    yield '(export (version "E")'
    yield '  (design (source "bench.sch") (tool "board_generator.py"))'
    yield "  (components"
    for part in parts:
        library, what, _ = SYMBOLS[part.kind.symbol]
        yield f'    (comp (ref "{part.ref}")'
        yield f'      (value "{part.value}")'
        yield f'      (footprint "{part.kind.footprint}")'
        yield f'      (libsource (lib "{library}") (part "{part.kind.symbol}") (description "{what}"))'
        yield f'      (property (name "Sheetname") (value "{part.sheet.strip("/") or "Root"}"))'
        yield f'      (sheetpath (names "{part.sheet}") (tstamps "{part.sheet}"))'
        yield f'      (tstamps "{uuid.uuid5(IDENTITIES, part.ref)}"))'
    yield "  )"
    yield "  (libparts"
    for symbol, (library, what, _) in SYMBOLS.items():
        yield f'    (libpart (lib "{library}") (part "{symbol}") (description "{what}")'
        pins = " ".join(f'(pin (num "{number}") (name "{name}") (type "{kind}"))' for number, name, kind in PINS[symbol])
        yield f"      (pins {pins}))"
    yield "  )"
    yield "  (nets"
    for code, (net, nodes) in enumerate(nets.items(), 1):
        yield f'    (net (code "{code}") (name "{net}")'
        for ref, number, name, kind in nodes:
            named = f' (pinfunction "{name}")' if name else ""
            yield f'      (node (ref "{ref}") (pin "{number}"){named} (pintype "{kind}"))'
        yield "    )"
    yield "  ))"


def _xml(parts: Sequence[Part], nets: dict[str, list[tuple[str, str, str, str]]]) -> Iterator[str]:
    q = quoteattr
    yield '<?xml version="1.0" encoding="UTF-8"?>'
    yield '<export version="E"><design><source>bench.sch</source><tool>board_generator.py</tool></design>'
    yield "<components>"
    for part in parts:
        library, what, _ = SYMBOLS[part.kind.symbol]
        yield f"<comp ref={q(part.ref)}>"
        yield f"  <value>{part.value}</value>"
        yield f"  <footprint>{part.kind.footprint}</footprint>"
        yield f"  <libsource lib={q(library)} part={q(part.kind.symbol)} description={q(what)}/>"
        yield f'  <property name="Sheetname" value={q(part.sheet.strip("/") or "Root")}/>'
        yield f"  <sheetpath names={q(part.sheet)} tstamps={q(part.sheet)}/>"
        yield f"  <tstamps>{uuid.uuid5(IDENTITIES, part.ref)}</tstamps>"
        yield "</comp>"
    yield "</components><libparts>"
    for symbol, (library, what, _) in SYMBOLS.items():
        pins = "".join(f"<pin num={q(number)} name={q(name)} type={q(kind)}/>" for number, name, kind in PINS[symbol])
        yield f"<libpart lib={q(library)} part={q(symbol)}><description>{what}</description><pins>{pins}</pins></libpart>"
    yield "</libparts><nets>"
    for code, (net, nodes) in enumerate(nets.items(), 1):
        yield f'<net code="{code}" name={q(net)}>'
        for ref, number, name, kind in nodes:
            named = f" pinfunction={q(name)}" if name else ""
            yield f"  <node ref={q(ref)} pin={q(number)}{named} pintype={q(kind)}/>"
        yield "</net>"
    yield "</nets></export>"


def _rows(parts: Iterable[Part]) -> Iterator[list[str]]:
    """The bill of materials: parts that differ in nothing but their reference share rows of at most ROW references."""
    yield ["Reference", "Qty", "Value", "Description", "Manufacturer", "MPN", *COLUMNS]
    rows: dict[tuple[str, ...], list[str]] = {}
    for part in parts:
        kind = part.kind
        type_ = part.bought if kind.prefix in ("D", "Q", "U", "BR") else ""
        rows.setdefault((part.bought, kind.description, "any", type_, *kind.columns), []).append(part.ref)
    for key, refs in rows.items():
        for at in range(0, len(refs), ROW):
            some = refs[at : at + ROW]
            yield [", ".join(some), str(len(some)), *key]


if __name__ == "__main__":
    print(write(int(sys.argv[1]), Path(sys.argv[2]), *(int(word) for word in sys.argv[3:])))
