"""What ordinary parts can do to the nets they hang on: pull up, pull down, clamp, or swing without a bound.

A net that only ordinary parts reach lies between the lowest and the highest potential they can pull it to. A winding, an
inductor that is switched, or a capacitor driven by such a net can take it beyond; a diode into a held net, a zener or a
suppressor keep it below.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from checker.model.candidate import CONNECTORS
from checker.model.rule import Board
from checker.model.terminals import ANODE, CATHODE, GROUND, SUPPLY, anode_and_cathode, coupler, light, named
from checker.stress.buses import diodes
from checker.stress.potential import DROPS
from checker.stress.rails import ZENER_MOST, zener_voltage
from checker.stress.strings import String

_OPEN = frozenset("capacitor varistor gas-tube spark-gap test-point hole fiducial logo heatsink shield antenna crystal".split())
_WOUND = frozenset("transformer gate-drive-transformer current-transformer inductor unknown battery".split())
_CHIPS = frozenset(
    "controller ic regulator module digital-isolator isolated-amplifier isolated-driver isolated-module hall-sensor sensor "
    "display".split()
)
_HIGH = frozenset("HV DRAIN D SW LX BST BOOT VB HO HS HB PHASE VSW CB HVIN".split())
_SWINGING = _HIGH | frozenset("DR LO OUT OUTA OUTB GATE DRV DRIVE G CP CN C1+ C1- C2+ C2-".split())
TOUCHABLE = 60.0  # V; class ES1, d.c. (IEC 62368-1:2018 table 4)
COUPLER = 80.0  # V; the most that usual couplers with a transistor output are rated for (common practice, no source)


@dataclass(slots=True)
class Pulls:
    """Edges between conductors (representatives), hubs included as names that begin with a space.

    up: conductor -> those that can pull it up; down likewise. above: conductor -> (conductor, volts it can be above it).
    below: the same downwards. swings: conductors nothing bounds. agile: conductors that move fast, unless something holds
    them. coupled: ends of a capacitor, through which an agile one takes the other along. usual: (one, other, volts the first
    can be above the second, volts the second can be above the first) by the ratings that parts keep in normal use. plugged:
    conductors of one circuit on one connector.
    """

    up: dict[str, list[str]] = field(default_factory=dict)
    down: dict[str, list[str]] = field(default_factory=dict)
    above: dict[str, list[tuple[str, float]]] = field(default_factory=dict)
    below: dict[str, list[tuple[str, float]]] = field(default_factory=dict)
    swings: set[str] = field(default_factory=set)
    agile: dict[str, None] = field(default_factory=dict)
    coupled: list[tuple[str, str]] = field(default_factory=list)
    usual: list[tuple[str, str, float, float]] = field(default_factory=list)
    plugged: list[list[str]] = field(default_factory=list)

    def both(self, nets: Iterable[str], hub: str) -> None:
        """Parts that conduct both ways between all their nets."""
        there = list(dict.fromkeys(nets))
        if len(there) == 2:
            self._tie(there[0], there[1])
        elif len(there) > 2:
            for net in there:
                self._tie(net, f" {hub}")

    def _tie(self, one: str, other: str) -> None:
        for net, far in ((one, other), (other, one)):
            self.up.setdefault(net, []).append(far)
            self.down.setdefault(net, []).append(far)

    def diode(self, anode: str, cathode: str) -> None:
        """Current flows from anode to cathode only."""
        self.up.setdefault(cathode, []).append(anode)
        self.down.setdefault(anode, []).append(cathode)
        self.clamp(anode, cathode, DROPS.forward)

    def clamp(self, high: str, low: str, volts: float) -> None:
        """`high` is at most `volts` above `low`, when one of the two is held."""
        self.above.setdefault(high, []).append((low, volts))
        self.below.setdefault(low, []).append((high, volts))

    def keeps(self, one: str, other: str, volts: float, back: float | None = None) -> None:
        """In normal use `one` is at most `volts` above `other`, and `other` at most `back` above `one`."""
        if math.isfinite(volts) and volts > 0:
            self.usual.append((one, other, volts, volts if back is None else back))


def pulls(board: Board, same: Mapping[str, str], strung: Mapping[str, String], grounds: Mapping[str, str]) -> Pulls:
    """The edges of every fitted part. same: net -> conductor. strung: resistor -> its string, taken as one edge. grounds: domain
    -> its reference net."""
    found = Pulls()
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if not part.fitted:
            continue
        nets = [same.get(net, net) for net in part.nets() if net in board.isolation.domain_of]
        kind = candidate.kind
        if ref in strung:
            if strung[ref].members[0] == ref:
                ends = strung[ref].nets[0], strung[ref].nets[-1]
                found.both([same.get(net, net) for net in ends], ref)
        elif kind == "capacitor":
            if len(nets) == 2:
                found.coupled.append((nets[0], nets[1]))
        elif kind in _WOUND:
            if len(set(nets)) > 1:  # a filter choke whose two ends are one conductor swings nothing
                found.swings.update(nets)
                found.agile.update(dict.fromkeys(nets))
        elif kind in CONNECTORS - {"test-point"}:
            found.swings.update(nets)  # what is plugged in drives it, nobody knows with what
            found.plugged.extend(_by_domain(board, ref, same).values())
            _touched(board, ref, same, grounds, found)
        elif kind in _CHIPS:
            _chip(board, ref, same, found)
        elif kind not in _OPEN:
            _ordinary(board, ref, kind, nets, same, found)
        _usual(board, ref, kind, same, found)
    return found


def _touched(board: Board, ref: str, same: Mapping[str, str], grounds: Mapping[str, str], found: Pulls) -> None:
    """In normal use a contact of a side without a hazard stays within what a person may touch."""
    for net in board.design.parts[ref].nets():
        name = board.isolation.domain_of.get(net)
        if name is not None and name in grounds and net != grounds[name] and board.isolation.domains[name].side == "secondary":
            found.keeps(same.get(net, net), same.get(grounds[name], grounds[name]), TOUCHABLE)


def _by_domain(board: Board, ref: str, same: Mapping[str, str]) -> dict[str, list[str]]:
    """The conductors a part touches in each domain: an insulating part conducts on each side by itself."""
    found: dict[str, list[str]] = {}
    for net in board.design.parts[ref].nets():
        domain = board.isolation.domain_of.get(net)
        if domain is not None:
            found.setdefault(domain, []).append(same.get(net, net))
    return found


def _chip(board: Board, ref: str, same: Mapping[str, str], found: Pulls) -> None:
    """A pin of an integrated circuit lies between its ground and its supply, pins that switch a high voltage excepted."""
    part = board.design.parts[ref]
    for domain, nets in _by_domain(board, ref, same).items():
        pins = [pin for pin in part.pins if pin.net is not None and board.isolation.domain_of.get(pin.net) == domain]
        ground = [same.get(pin.net or "", pin.net or "") for pin in pins if pin.name.strip().upper() in GROUND]
        supply = [same.get(pin.net or "", pin.net or "") for pin in pins if pin.name.strip().upper() in SUPPLY]
        for pin in pins:
            name, net = pin.name.strip().upper(), same.get(pin.net or "", pin.net or "")
            if name in _SWINGING or not name:
                found.agile[net] = None
            if name in _HIGH:
                found.swings.add(net)
        if not ground or not supply:
            found.both(nets, f"{ref}:{domain}")
            continue
        for net in dict.fromkeys(nets):
            if net in ground:
                continue
            found.down.setdefault(net, []).extend(ground)
            if net not in supply:
                found.up.setdefault(net, []).extend(supply)


def _ordinary(board: Board, ref: str, kind: str, nets: list[str], same: Mapping[str, str], found: Pulls) -> None:
    part = board.design.parts[ref]
    if kind in ("diode", "bridge", "led"):
        directed = diodes(board, ref) if kind != "led" else [pair] if (pair := anode_and_cathode(part)) else []
        for anode, cathode in directed:
            found.diode(same.get(anode, anode), same.get(cathode, cathode))
        if not directed:
            found.both(nets, ref)
        return
    if kind in ("zener", "tvs"):
        found.both(nets, ref)
        pins, volts = anode_and_cathode(part), _clamping(board, ref)
        if pins is not None:
            anode, cathode = (same.get(net, net) for net in pins)
            found.clamp(anode, cathode, DROPS.forward)
            if volts is not None:
                found.clamp(cathode, anode, volts)
        return
    if kind in ("mosfet", "igbt", "jfet"):
        gate = {same.get(net, net) for net in named(part, ("G", "GATE"))}
        ways = [net for net in nets if net not in gate] if gate else nets
        drain, source = named(part, ("D", "DRAIN")), named(part, ("S", "SOURCE"))
        if kind == "mosfet" and len(drain) == len(source) == 1:
            found.clamp(same.get(source[0], source[0]), same.get(drain[0], drain[0]), DROPS.forward)  # its body diode
        found.agile.update(dict.fromkeys(ways))
        found.both(ways, ref)
        return
    for domain, sides in _by_domain(board, ref, same).items():
        found.both(sides, f"{ref}:{domain}")


def _clamping(board: Board, ref: str) -> float | None:
    volts = zener_voltage(board, ref) if board.kind(ref) == "zener" else None  # a suppressor clamps events, no steady voltage
    return float(volts.value) * ZENER_MOST if volts is not None else None


def _usual(board: Board, ref: str, kind: str, same: Mapping[str, str], found: Pulls) -> None:
    """What a part's rating says of the voltage between its nets in normal use."""
    part, candidate = board.design.parts[ref], board.choice[ref]
    rating = candidate.ratings.get("voltage")
    rated = math.inf if rating is None else float(rating.value) * (math.sqrt(2) if rating.form == "rms" else 1.0)

    def one(names: Iterable[str]) -> str | None:
        nets = named(part, names)
        return same.get(nets[0], nets[0]) if len(nets) == 1 else None

    def pair(high: str | None, low: str | None, volts: float, back: float | None = None) -> None:
        if high is not None and low is not None and high != low:
            found.keeps(high, low, volts, back)

    if kind == "capacitor":
        nets = part.nets()
        if len(nets) == 2:
            pair(same.get(nets[0], nets[0]), same.get(nets[1], nets[1]), rated)
    elif kind in ("controller", "ic", "regulator"):
        ground = named(part, GROUND)
        for net in named(part, SUPPLY) if ground else ():
            pair(same.get(net, net), same.get(ground[0], ground[0]), rated)
    elif kind == "shunt-reference":
        pair(one(CATHODE), one(ANODE), rated, 1.5)
    elif kind == "optocoupler":
        ends, pins_of = light(part), coupler(part)
        if ends is not None:
            pair(same.get(ends[0], ends[0]), same.get(ends[1], ends[1]), DROPS.light)
        if pins_of is not None:
            _, _, collector, emitter = (same.get(net, net) for net in pins_of)
            pair(collector, emitter, rated if math.isfinite(rated) else COUPLER, DROPS.light)
    elif kind == "led":
        pair(one(ANODE), one(CATHODE), DROPS.light)
    elif kind in ("mosfet", "bipolar", "igbt"):
        pair(one(("D", "C", "DRAIN", "COLLECTOR")), one(("S", "E", "SOURCE", "EMITTER")), rated)
        pair(one(("G", "B", "GATE", "BASE")), one(("S", "E", "SOURCE", "EMITTER")), 30.0)
    elif kind in ("diode", "zener"):
        pins = anode_and_cathode(part)
        if pins is not None:
            volts = rated if kind == "diode" else _clamping(board, ref) or math.inf
            pair(same.get(pins[1], pins[1]), same.get(pins[0], pins[0]), volts, DROPS.forward)
