"""What conducts one way beside a core: rectifiers, switches with their body diodes, switch pins of controllers."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from checker.formulas.waveform import plus
from checker.model.rule import Board
from checker.model.step import Step
from checker.model.terminals import GROUND, SUPPLY, named
from checker.stress.buses import diodes
from checker.stress.conductors import SWITCH_PINS
from checker.stress.potential import DROPS, SENSE, SERIES, Potential

DRIVE = 3  # parts in series between a winding and what it drives (common practice, no source)
CROWD = 8  # parts on one net, beyond which it drives nothing but is a ground or a rail
_DRIVER_PINS = frozenset("OUT OUTA OUTB OUT1 OUT2 GATE DRV DRIVE LO".split())  # between supply and ground of their circuit


@dataclass(frozen=True, slots=True)
class Valve:
    """Conducts from anode to cathode; closes: a switch, which can be closed both ways.

    control: conductors that drive the gate or base of a switch over resistors and capacitors. drop: at most, V, while it conducts.
    """

    anode: str
    cathode: str
    closes: bool
    control: frozenset[str] = frozenset()
    drop: float = DROPS.forward


_SCHOTTKY = re.compile(
    r"schottky|(?<![A-Za-z0-9])(?:1N58(?:1[7-9]|2[0-5])|B58(?:17|18|19)|(?:SS|SK|SB|B)[1-5][2-6]\w?|MBR\w*\d{3,}\w*)(?![A-Za-z0-9])",
    re.I,
)


def drop(board: Board, ref: str) -> float:
    """The most that a rectifier drops: less for a Schottky diode, by its symbol, its type or its description."""
    texts = (board.design.parts[ref].text(name) for name in ("symbol", "value", "description"))
    return DROPS.schottky if board.kind(ref) == "diode" and any(map(_SCHOTTKY.search, texts)) else DROPS.forward


def _near(board: Board, sources: Mapping[str, Potential], same: Mapping[str, str]) -> dict[str, str]:
    """Conductor behind a small resistor -> the one at its other end: a sense resistor on a held conductor, and a resistor in
    series with a rectifier, where nothing else hangs between the two."""
    found = {}
    for ref, candidate in board.choice.items():
        value, nets = candidate.value, board.design.parts[ref].nets()
        if candidate.kind != "resistor" or not board.design.parts[ref].fitted or len(nets) != 2 or value is None:
            continue
        one, other = (same.get(net, net) for net in nets)
        if float(value.value) <= SENSE and (one in sources) != (other in sources):
            found.update({other: one} if one in sources else {one: other})
        elif float(value.value) <= SERIES:
            for near, far in ((one, other), (other, one)):
                if near not in sources and [board.kind(there) for there in board.fitted_on(near) if there != ref] == ["diode"]:
                    found[near] = far
    return found


def valves(board: Board, sources: Mapping[str, Potential], same: Mapping[str, str]) -> Iterator[Valve]:
    """Rectifiers, switches with their body diodes, and the switch pins of controllers; a sense resistor is no conductor apart."""
    near = _near(board, sources, same)

    def conductor(net: str) -> str:
        there = same.get(net, net)
        return near.get(there, there)

    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if not part.fitted:
            continue
        if candidate.kind in ("diode", "bridge"):
            for anode, cathode in diodes(board, ref):
                yield Valve(conductor(anode), conductor(cathode), False, drop=drop(board, ref))
        elif candidate.kind in ("mosfet", "igbt", "bipolar"):
            drain, source = named(part, ("D", "C", "DRAIN", "COLLECTOR")), named(part, ("S", "E", "SOURCE", "EMITTER"))
            if len(drain) == len(source) == 1:
                gate = named(part, ("G", "GATE", "B", "BASE"))
                control = frozenset(map(conductor, _driving(board, gate[0], ref))) if len(gate) == 1 else frozenset()
                yield Valve(conductor(source[0]), conductor(drain[0]), True, control)
        elif candidate.kind in ("controller", "ic", "regulator"):
            drains, grounds = named(part, SWITCH_PINS), named(part, GROUND | {"S", "SOURCE"})
            for net in drains if grounds and len(drains) <= 2 else ():
                yield Valve(conductor(grounds[0]), conductor(net), True)
            supplies = named(part, SUPPLY)
            for net in named(part, _DRIVER_PINS) if grounds and len(supplies) == 1 else ():
                yield Valve(conductor(grounds[0]), conductor(net), True)
                yield Valve(conductor(net), conductor(supplies[0]), True)


def _driving(board: Board, gate: str, switch: str) -> set[str]:
    """The nets that a gate or base hangs on over at most DRIVE resistors and capacitors in series."""
    found, edge = {gate}, {gate}
    for _ in range(DRIVE):
        parts = {
            ref for net in edge for ref in board.fitted_on(net) if ref != switch and board.kind(ref) in ("resistor", "capacitor")
        }
        edge = {net for ref in parts for net in board.design.parts[ref].nets()} - found
        edge = {net for net in edge if len(board.fitted_on(net)) <= CROWD}
        found |= edge
    return found


def railed(valves: list[Valve], sources: Mapping[str, Potential]) -> dict[str, Potential]:
    """Switching nodes that valves keep between two held conductors, such as the middle of a half bridge."""
    up: dict[str, Potential] = {}
    down: dict[str, Potential] = {}
    for valve in valves:
        if valve.anode not in sources and valve.cathode in sources:
            up.setdefault(valve.anode, sources[valve.cathode])
        if valve.cathode not in sources and valve.anode in sources:
            down.setdefault(valve.cathode, sources[valve.anode])
    return {
        net: Potential(
            high.frame, plus(low.low, -DROPS.forward), plus(high.high, DROPS.forward),
            Step(f"{net} is kept between two rails by the switches or diodes on it", (low.step, high.step)),
        )
        for net, high in up.items()
        if (low := down.get(net)) is not None and low.frame == high.frame
    }  # fmt: skip
