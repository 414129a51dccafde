"""The capacitors that tie circuits to the mains, as one network, and what each supply state drives through it.

Every circuit that is no mains side is one node, every net inside a chain of capacitors is one, protective earth with all that is
bonded to it is one. A net of the mains side is a source: it carries a pole, or the rectified line (what a bridge or diodes make
of both poles: it follows the live pole for half of every cycle), or something that nothing which was read tells.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import product

from checker.formulas.nodal import star_mesh
from checker.model.entry import Entry
from checker.model.fact import Fact
from checker.model.rule import Analysis
from checker.model.terminals import anode_and_cathode, bridge

SMALL = 100e3  # ohm; next to the megohms of a nanofarad at mains frequency a resistor up to this is a wire
LARGE = 100e-9  # F; and so is a capacitor from this on
STEADY = 30.0  # V; a net that stays this near to another moves with it, next to the hundreds of volts of the mains
HOPS = 4  # parts in a row that are looked through
USUAL = 20.0  # %; tolerance of a safety capacitor that states none: M, the widest usual one (common practice, no source)
POLE, BUS, OTHER, EARTH, CIRCUIT, LINK = "pole", "bus", "other", "earth", "circuit", "link"
SOURCES = frozenset({POLE, BUS, OTHER})

Node = tuple[str, str]  # (what it is, the pole, net or circuit)


@dataclass(frozen=True, slots=True)
class Tie:
    """A capacitor of the network. value: nominal [F], None when nothing states it. tolerance: [%]; stated: whether it was read."""

    ref: str
    ends: tuple[Node, Node]
    value: float | None
    tolerance: float
    stated: bool
    facts: tuple[Fact, ...]

    def at(self, sign: int) -> float:
        """The capacitance at the upper (1), lower (-1) end of the tolerance, or nominal (0) [F]; 0 when it is not known."""
        return (self.value or 0.0) * max(0.0, 1 + sign * self.tolerance / 100)


@dataclass(frozen=True, slots=True)
class State:
    """A supply state. live: pole -> its voltage against earth as a multiple of the supply voltage. whole: set when one pole alone
    is connected, so that the whole mains side rides on it at this multiple. earth: whether protective earth is connected."""

    text: str
    live: Mapping[str, complex]
    whole: float | None = None
    earth: bool = True

    @property
    def top(self) -> float:
        """The highest magnitude on the mains side."""
        return self.whole if self.whole is not None else max((abs(value) for value in self.live.values()), default=1.0)


@dataclass(frozen=True, slots=True)
class Drive:
    """What ties a circuit to the mains in one state [F], times the share of the supply voltage there: full to what follows a
    pole, half to the rectified line, other to nets whose potential nothing tells."""

    full: float
    half: float
    other: float


@dataclass(frozen=True, slots=True)
class Network:
    """ties: every capacitor between two circuits. earths: names of the circuits that are or are bonded to protective earth."""

    ties: tuple[Tie, ...]
    earths: tuple[str, ...]

    def scaled(self, values: Mapping[str, float]) -> Network:
        """The network with other nominal values [F] for some of its capacitors."""
        return replace(self, ties=tuple(replace(tie, value=values.get(tie.ref, tie.value)) for tie in self.ties))

    def around(self) -> Callable[[Node], Network]:
        """Node -> the part of the network that can drive a current into it: what is reached from it without crossing a source;
        no capacitors at all when no source is."""
        at: dict[Node, list[Tie]] = {}
        for tie in self.ties:
            for end in tie.ends:
                at.setdefault(end, []).append(tie)

        def reached(node: Node) -> Network:
            seen, waiting, found = {node}, [node], dict.fromkeys(at.get(node, ()))
            while waiting:
                for tie in at.get(waiting.pop(), ()):
                    found[tie] = None
                    further = [end for end in tie.ends if end not in seen and end[0] not in SOURCES]
                    seen.update(further)
                    waiting += further
            driven = any(end[0] in SOURCES for tie in found for end in tie.ends)
            return replace(self, ties=tuple(found) if driven else ())

        return reached

    @property
    def unread(self) -> tuple[Tie, ...]:
        """The capacitors whose value nothing states."""
        return tuple(tie for tie in self.ties if tie.value is None)

    def drive(self, node: Node, state: State, sign: int) -> Drive:
        """What drives a current into that node, held at earth, in that state; sign: 1 for the most that the tolerances allow,
        -1 for the least, 0 for the nominal values.

        A capacitor to a conductor at earth takes current away from the node: it stands at the other end of its tolerance.
        """
        row = self._row(node, state, sign)
        if state.whole is not None:
            known = sum(value for (what, _), value in row.items() if what in (POLE, BUS))
            return Drive(known * state.whole, 0.0, state.whole * sum(v for (what, _), v in row.items() if what == OTHER))
        half, other = (state.top * sum(v for (what, _), v in row.items() if what == kind) for kind in (BUS, OTHER))
        return Drive(self._from_poles(node, state, sign, row), half, other)

    def _row(self, node: Node, state: State, sign: int) -> Mapping[Node, float]:
        """The capacitance between the node and everything that is held in that state."""
        zero = {(POLE, pole) for pole, value in state.live.items() if not value} if state.whole is None else set()
        if state.earth:
            zero.add((EARTH, ""))
        branches = [
            (*tie.ends, tie.at(-sign if node not in tie.ends and not zero.isdisjoint(tie.ends) else sign)) for tie in self.ties
        ]
        held = {end for tie in self.ties for end in tie.ends if end[0] in SOURCES} | zero | {node}
        return star_mesh(branches, held).get(node, {})

    def _from_poles(self, node: Node, state: State, sign: int, row: Mapping[Node, float]) -> float:
        """The magnitude of the sum over the poles. Phases cancel one another, so the most is where some of their capacitors
        stand at one end of the tolerance and the others at the other end."""
        poles = {end: state.live.get(end[1], 1.0) for end in row if end[0] == POLE}
        if not sign or all(not complex(value).imag for value in poles.values()):
            return abs(sum(row[end] * value for end, value in poles.items()))
        other = self._row(node, state, -sign)
        ranges = [(row[end] * value, other.get(end, 0.0) * value) for end, value in poles.items()]
        return (max if sign > 0 else min)(abs(sum(choice)) for choice in product(*ranges))


def network(analysis: Analysis) -> Network:
    """The capacitors of the design that lie between two circuits."""
    isolation = analysis.isolation
    earths = tuple(name for name, domain in isolation.domains.items() if domain.earthed or domain.side == "earth")
    node_of = _nodes(analysis, frozenset(earths))
    refs = dict.fromkeys(crossing.part for crossing in isolation.crossings if crossing.how == "capacitor")
    ties = tuple(tie for ref in refs for tie in _ties(analysis, ref, node_of))
    return Network(ties, earths)


def _ties(analysis: Analysis, ref: str, node_of: Callable[[str], Node]) -> Iterator[Tie]:
    part, candidate = analysis.design.parts[ref], analysis.choice[ref]
    nodes = tuple(dict.fromkeys(node_of(net) for net in part.nets()))
    value, tolerance = candidate.value, candidate.tolerance
    facts = tuple(fact for fact in (part.fact, value, tolerance) if fact is not None)
    for at, one in enumerate(nodes):
        for other in nodes[:at]:
            yield Tie(
                ref, (other, one), None if value is None else float(value.value),
                USUAL if tolerance is None else float(tolerance.value), tolerance is not None, facts,
            )  # fmt: skip


def _nodes(analysis: Analysis, earths: frozenset[str]) -> Callable[[str], Node]:
    isolation, poles = analysis.isolation, analysis.stress.poles
    rectified = _rectified(analysis)
    mains = {name for name, domain in isolation.domains.items() if domain.hazard == "mains"}
    known: dict[str, Node] = {}

    def follows(net: str, other: str) -> bool:
        voltage = analysis.stress.between(net, other)
        if voltage is None or voltage.shape != "dc" or voltage.peak.never_above is None:
            return False
        return voltage.peak.never_above - voltage.peak.surely <= STEADY

    def direct(net: str) -> Node | None:
        if net in poles:
            return POLE, poles[net]
        pole = next((pole for pole in dict.fromkeys(poles.values()) if follows(net, pole)), None)
        if pole is not None:
            return POLE, pole
        if net in rectified or any(follows(net, other) for other in rectified):
            return BUS, ""
        return None

    def of_mains(net: str) -> Node:
        reached = [net]
        for _ in range(HOPS):
            found = next((node for near in reached if (node := direct(near)) is not None), None)
            if found is not None:
                return found
            further = (far for near in reached for far in _beyond(analysis, near) if isolation.domain_of.get(far) in mains)
            reached = list(dict.fromkeys((*reached, *further)))
        return OTHER, net

    def node(net: str) -> Node:
        name = isolation.domain_of.get(net)
        if name is None:
            return LINK, net
        if name in earths:
            return EARTH, ""
        if name not in mains:
            return CIRCUIT, name
        if net not in known:
            known[net] = of_mains(net)
        return known[net]

    return node


def _beyond(analysis: Analysis, net: str) -> Iterator[str]:
    """The nets that parts of little impedance at mains frequency join to that one."""
    for ref in analysis.fitted_on(net):
        part, candidate = analysis.design.parts[ref], analysis.choice[ref]
        at = {pin.number: pin.net for pin in part.pins if pin.net is not None}
        value = float(candidate.value.value) if candidate.value is not None else None
        if candidate.kind in ("transformer", "common-mode-choke"):
            ends = [at.get(pin) for winding in candidate.windings for pin in winding.pins if net in map(at.get, winding.pins)]
            yield from (end for end in ends if end is not None and end != net)
        elif len(part.nets()) == 2 and (
            candidate.kind in ("inductor", "ferrite", "fuse", "jumper", "net-tie", "thermistor")
            or (candidate.kind == "resistor" and value is not None and value <= SMALL)
            or (candidate.kind == "capacitor" and value is not None and value >= LARGE)
        ):
            yield from (other for other in part.nets() if other != net)


def _rectified(analysis: Analysis) -> tuple[str, ...]:
    """The nets that rectifiers feed from the poles or that return to them."""
    poles, found = analysis.stress.poles, {}
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if not part.fitted or candidate.kind not in ("bridge", "diode"):
            continue
        pins = bridge(part) if candidate.kind == "bridge" else None
        ends = anode_and_cathode(part) if candidate.kind == "diode" else None
        if pins is not None and any(net in poles for net in pins[2]):
            found.update(dict.fromkeys(pins[:2]))
        elif ends is not None and (ends[0] in poles) != (ends[1] in poles):
            found.update(dict.fromkeys(net for net in ends if net not in poles))
    return tuple(found)


def polarities(analysis: Analysis) -> tuple[State, ...]:
    """The supply connected either way round: each pole of the supply at earth in turn; three phases with their neutral at earth."""
    entries, mains = analysis.stress.entries.values(), analysis.setting.mains
    if mains is not None and mains.phases == 3:
        live = {pole: value for entry in entries for pole, value in _phases(entry).items()}
        return (State("neutral of the supply at earth", live),)
    normal = {pole: value for entry in entries for pole, value in _normal(entry).items()}
    return (
        State("supply as drawn", normal),
        State("supply the other way round", {pole: 1.0 - value for pole, value in normal.items()}),
    )


def one_pole(analysis: Analysis) -> State:
    """One pole alone connected, as a switch or fuse in the other one leaves it."""
    three = analysis.setting.mains is not None and analysis.setting.mains.phases == 3
    return State("only one pole connected", {}, 1 / math.sqrt(3) if three else 1.0)


def earth_open(states: Iterable[State]) -> tuple[State, ...]:
    """The same states with protective earth interrupted."""
    return tuple(replace(state, text=f"protective earth interrupted, {state.text}", earth=False) for state in states)


def _normal(entry: Entry) -> dict[str, complex]:
    """Pole -> 1 for the line, 0 for the neutral, or for the last pole where none is the neutral."""
    others = [pole for pole in entry.poles if pole != entry.line]
    neutral = entry.neutral or (others[-1] if others else None)
    return {pole: complex(pole != neutral) for pole in entry.poles}


def _phases(entry: Entry) -> dict[str, complex]:
    lines = [pole for pole in entry.poles if pole != entry.neutral]
    found = {pole: cmath.rect(1 / math.sqrt(3), 2 * math.pi * at / 3) for at, pole in enumerate(lines)}
    return found | ({entry.neutral: 0j} if entry.neutral else {})
