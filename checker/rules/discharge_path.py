"""What hangs on the pins of a plug once it is pulled: capacitors, and the ways by which they lose their charge.

A state of the contacts says which conductors are still one with each pin: a switch may be open, a fuse may have opened.
"""

from __future__ import annotations

import math
import re
from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from itertools import combinations

import networkx as nx

from checker.formulas.nodal import star_mesh
from checker.model.entry import Entry
from checker.model.fact import Fact
from checker.model.rule import Analysis
from checker.model.terminals import anode_and_cathode, coupler
from checker.rules.discharge_means import Means, is_circuit, means
from checker.rules.plug_conductors import CONTACTS, FUSES, behind, conductors

_LIGHTLY = frozenset({"capacitor", "test-point", "controller", "ic", "optocoupler", "led", "diode", "zener", "bridge"})
_BOTH_WAYS = re.compile(r"bi-?dir|ac[ -]?input|ac[ -]?eingang|(?<![0-9])814(?![0-9])|h11aa|(?<![0-9])620(?![0-9])", re.IGNORECASE)
_LINK = 1e-3  # ohm; what a resistor of 0 ohm has (common practice, no source)
NOISE = 1e-9  # part of a conductance that is arithmetic of floats
CAPACITOR, RESISTOR = 20.0, 5.0  # %; tolerances when none is stated: the widest usual ones (common practice, no source)


@dataclass(frozen=True, slots=True)
class Element:
    """A capacitor [F] or resistor [ohm] between two conductors. value: None when not read; spread: its tolerance as a ratio,
    the usual one where none is stated."""

    ref: str
    ends: tuple[str, str]
    value: float | None
    spread: float
    facts: tuple[Fact, ...]
    stated: bool = True

    def at(self, sign: int) -> float:
        return (self.value or 0.0) * (1 + sign * self.spread)


@dataclass(frozen=True, slots=True)
class Way:
    """Resistors that hang together between line conductors. ends: those conductors, as nets."""

    ends: frozenset[str]
    resistors: tuple[Element, ...]

    def branches(self, sign: int, without: str, node: Callable[[str], str]) -> Iterator[tuple[str, str, float]]:
        """(node, node, conductance) of each resistor at that end of its tolerance."""
        for one in self.resistors:
            if one.ref != without and one.value is not None:
                yield node(one.ends[0]), node(one.ends[1]), 1 / max(one.at(sign), _LINK)


@dataclass(frozen=True, slots=True)
class Wiring:
    """What hangs on the line conductors of an entry with every contact closed.

    closed: net -> the pin it is one conductor with. means: what else joins them. known: conductances that were worked out, by
    way and end of the tolerance; they are the same in every state that leaves the way whole. joint: with more than two poles
    ways share the other poles, so that they count together only.
    """

    closed: Mapping[str, str]
    capacitors: tuple[Element, ...]
    ways: tuple[Way, ...]
    means: tuple[Means, ...]
    one_way: tuple[str, ...]
    joint: bool
    known: dict[tuple[int, int], float] = field(default_factory=dict, compare=False)


@dataclass(frozen=True, slots=True)
class Plug:
    """Two pins of an entry in one state. text: the state, "" for all contacts closed; opened: what is open; fault: whether it is
    a fuse that has blown.

    one: net -> pin, for the conductors still on the pins. The rest is what of the wiring is on them: capacitors with charge, ways
    that take it, and what else does.
    """

    text: str
    pins: tuple[str, str]
    one: Mapping[str, str]
    capacitors: tuple[Element, ...]
    ways: tuple[Way, ...]
    means: tuple[Means, ...] = ()
    opened: tuple[str, ...] = ()
    fault: bool = False
    one_way: tuple[str, ...] = ()
    joint: bool = False
    known: dict[tuple[int, int], float] = field(default_factory=dict, compare=False)

    @property
    def resistors(self) -> tuple[Element, ...]:
        """Those of ways from pin to pin."""
        return tuple(one for way in self.ways if len({self.one.get(end) for end in way.ends} - {None}) > 1 for one in way.resistors)

    def capacitance(self, sign: int) -> float:
        """F between the pins, every capacitor at that end of its tolerance; those that meet elsewhere in series."""
        branches = [(self._node(c.ends[0]), self._node(c.ends[1]), c.at(sign)) for c in self.capacitors]
        direct = sum(value for one, other, value in branches if {one, other} == set(self.pins))
        return direct + _between(self.pins, (branch for branch in branches if not {branch[0], branch[1]} <= set(self.pins)))

    def ohms(self, sign: int) -> float:
        """ohm between the pins, every resistor at that end of its tolerance; inf without a way."""
        conductance, apart = 0.0, list[tuple[str, str, float]]()
        for way in self.ways:
            if self._is_alone(way):
                conductance += self._of_way(way, sign)
            else:
                apart += way.branches(sign, "", self._node)
        conductance += _between(self.pins, apart) if apart else 0.0
        return 1 / conductance if conductance > 0 else math.inf

    def each_open(self) -> Iterator[tuple[Element, float]]:
        """(resistor, ohm between the pins with that one open, all others at the upper end of their tolerance)."""
        whole = self.ohms(1)
        for way in self.ways:
            for one in way.resistors if len({self.one.get(end) for end in way.ends} - {None}) > 1 else ():
                if self._is_alone(way):
                    rest = 1 / whole - self._of_way(way, 1) + _between(self.pins, way.branches(1, one.ref, self._node))
                else:
                    rest = _between(self.pins, [branch for other in self.ways for branch in other.branches(1, one.ref, self._node)])
                yield one, 1 / rest if rest * whole > NOISE else math.inf

    def _is_alone(self, way: Way) -> bool:
        """Whether a way ends on the pins alone; else it shares a conductor with others."""
        return not self.joint and all(end in self.one for end in way.ends)

    def _of_way(self, way: Way, sign: int) -> float:
        """The conductance of a way between the pins, worked out once."""
        key = id(way), sign
        if key not in self.known:
            self.known[key] = _between(self.pins, way.branches(sign, "", self._node))
        return self.known[key]

    def _node(self, net: str) -> str:
        return self.one.get(net, net)


def _between(pins: tuple[str, str], branches: Iterable[tuple[str, str, float]]) -> float:
    return star_mesh(branches, pins).get(pins[0], {}).get(pins[1], 0.0)


def plugs(analysis: Analysis, entry: Entry) -> Iterator[Plug]:
    """The pins of an entry with all contacts closed, then with each switch and each fuse of its conductors open.

    Of more than two poles every two: the capacitors and resistors to the others count as a network without current at them,
    which is exact where the two networks are alike, as on a balanced line.
    """
    if len(entry.poles) < 2:
        return
    found = conductors(analysis, entry)
    wiring = _wiring(analysis, entry, found.pin)
    apart = [
        (ref, behind(analysis, found, ref))
        for ref in dict.fromkeys(ref for _, ref in found.before.values() if ref)
        if analysis.kind(ref) in CONTACTS | FUSES
    ]
    held = _by_end((one.ends, one.at(1)) for one in wiring.capacitors)
    for pins in combinations(entry.poles, 2):
        whole = _plug(wiring, pins, wiring.closed)
        yield whole
        capacitance, conductance = whole.capacitance(1), 1 / whole.ohms(1)
        taken = _by_end((way.ends, wiring.known.get((id(way), 1), 0.0)) for way in wiring.ways)
        for ref, gone in apart:
            lost, missed = (_sum_at(table, gone) for table in (taken, held))
            # what goes with its own capacitors leaves the rest no slower than before
            other = wiring.joint or any(not one.ends.isdisjoint(gone) for one in wiring.means)
            if gone and (other or lost * capacitance > missed * conductance):
                left = {net: pin for net, pin in wiring.closed.items() if net not in gone}
                yield _plug(wiring, pins, left, ref, analysis.kind(ref) in FUSES)


def _by_end(found: Iterable[tuple[Iterable[str], float]]) -> dict[str, list[tuple[int, float]]]:
    """Net -> (number, figure) of everything that ends on it."""
    table: dict[str, list[tuple[int, float]]] = {}
    for number, (ends, figure) in enumerate(found):
        for end in ends:
            table.setdefault(end, []).append((number, figure))
    return table


def _sum_at(table: Mapping[str, list[tuple[int, float]]], nets: Iterable[str]) -> float:
    """The sum of the figures that end on any of these nets, each once."""
    return sum(dict(entry for net in nets for entry in table.get(net, ())).values())


def _wiring(analysis: Analysis, entry: Entry, closed: Mapping[str, str]) -> Wiring:
    lit, half = _lights(analysis, closed)
    inner = _inner(analysis, closed) | frozenset(entry.earth)
    capacitors, resistors = [], []
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        nets = part.nets()
        if not part.fitted or len(nets) != 2:
            continue
        if candidate.kind == "capacitor" and _charged(analysis, nets, closed) and not is_circuit(analysis, ref):
            capacitors.append(_element(analysis, ref, (nets[0], nets[1]), CAPACITOR))
        elif candidate.kind == "resistor" and all(net in closed or net in inner for net in nets):
            resistors.append(_element(analysis, ref, (lit.get(nets[0], nets[0]), lit.get(nets[1], nets[1])), RESISTOR))
    return Wiring(
        closed=closed,
        capacitors=tuple(capacitors),
        ways=tuple(_ways(resistors, closed)),
        means=tuple(means(analysis, closed)),
        one_way=_one_way(resistors, closed, half),
        joint=len(entry.poles) > 2,
    )


def _plug(wiring: Wiring, pins: tuple[str, str], one: Mapping[str, str], opened: str = "", blown: bool = False) -> Plug:
    return Plug(
        text=f"{opened} {'blown' if blown else 'open'}" if opened else "",
        pins=pins,
        one=one,
        capacitors=tuple(c for c in wiring.capacitors if all(end in one or end not in wiring.closed for end in c.ends)),
        ways=tuple(way for way in wiring.ways if any(end in one for end in way.ends)),
        means=tuple(found for found in wiring.means if found.joins(pins, one)),
        opened=(opened,) if opened else (),
        fault=blown,
        one_way=wiring.one_way,
        joint=wiring.joint,
        known=wiring.known,
    )


def _one_way(resistors: list[Element], closed: Mapping[str, str], half: Mapping[tuple[str, str], list[str]]) -> tuple[str, ...]:
    """The diodes that would complete a way from pin to pin if they conducted both ways."""
    links = [Element(refs[0], ends, 1.0, 0.0, ()) for ends, refs in half.items()]
    diodes = {one.ref for one in links}
    found = []
    for way in _ways([*resistors, *links], closed):
        there = [one.ref for one in way.resistors if one.ref in diodes]
        if there and len(there) < len(way.resistors) and len({closed[end] for end in way.ends}) > 1:
            found += there
    return tuple(found)


def _ways(resistors: list[Element], closed: Mapping[str, str]) -> Iterator[Way]:
    """Resistors that hang together over inner nets and reach two line conductors; what ends on a net of its own is taken off."""
    kept = list(resistors)
    while True:
        ends = Counter(end for one in kept for end in one.ends)
        left = [one for one in kept if all(end in closed or ends[end] > 1 for end in one.ends)]
        if len(left) == len(kept):
            break
        kept = left
    group = nx.Graph()
    for at, one in enumerate(kept):
        group.add_edges_from((f" {at}", end) for end in one.ends if end not in closed)
        group.add_node(f" {at}")
    for piece in nx.connected_components(group):
        members = tuple(kept[at] for at in sorted(int(node) for node in piece if node.startswith(" ")))
        ends_of = frozenset(end for one in members for end in one.ends if end in closed)
        if len(ends_of) > 1:
            yield Way(ends_of, members)


def _charged(analysis: Analysis, nets: tuple[str, ...], one: Mapping[str, str]) -> bool:
    """Whether a capacitor holds charge on the pins: between two line conductors, or from one to protective earth."""
    isolation = analysis.isolation
    earthed = [net in isolation.domain_of and isolation.domains[isolation.domain_of[net]].earthed for net in nets]
    pins = [one.get(net) for net in nets]
    told = all(pin is not None or grounded for pin, grounded in zip(pins, earthed, strict=True))
    return told and any(pins) and pins[0] != pins[1]


def _inner(analysis: Analysis, one: Mapping[str, str]) -> frozenset[str]:
    """Nets between resistors of a way from line to line: nothing on them but resistors and what takes little current."""
    found = set()
    for net in analysis.design.nets:
        refs = analysis.fitted_on(net)
        resistors = [ref for ref in refs if analysis.kind(ref) == "resistor"]
        rest = [analysis.kind(ref) for ref in refs if ref not in resistors]
        joined = len(resistors) + sum(kind in ("optocoupler", "led", "diode") for kind in rest)
        if net not in one and resistors and joined >= 2 and all(kind in _LIGHTLY for kind in rest):
            found.add(net)
    return frozenset(found)


def _lights(analysis: Analysis, one: Mapping[str, str]) -> tuple[dict[str, str], dict[tuple[str, str], list[str]]]:
    """Diodes of couplers and lamps: (net -> the net it is taken as one with, ends -> those that conduct one way only).

    Next to a crest of hundreds of volts such a diode is a wire, once its pair or its own make lets it conduct both ways.
    """
    ways: dict[tuple[str, str], set[bool]] = {}
    refs: dict[tuple[str, str], list[str]] = {}
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if not part.fitted or candidate.kind not in ("optocoupler", "led", "diode"):
            continue
        ends = _light_ends(analysis, ref)
        if ends is None or all(end in one for end in ends):
            continue
        key = (min(ends), max(ends))
        texts = " ".join(part.text(name) for name in ("value", "description", "symbol"))
        refs.setdefault(key, []).append(ref)
        ways.setdefault(key, set()).update({True, False} if _BOTH_WAYS.search(texts) else {ends == key})
    lit = {one.get(high, high): one.get(low, low) for (low, high), found in ways.items() if len(found) == 2 and high not in one}
    lit |= {low: one[high] for (low, high), found in ways.items() if len(found) == 2 and high in one}
    return lit, {key: refs[key] for key, found in ways.items() if len(found) == 1}


def _light_ends(analysis: Analysis, ref: str) -> tuple[str, str] | None:
    """(anode, cathode) net of a diode, or of the light side of a coupler; of an a.c. input in any order."""
    part = analysis.design.parts[ref]
    if analysis.kind(ref) != "optocoupler":
        return anode_and_cathode(part)
    pins = coupler(part)
    if pins is not None:
        return pins[:2]
    at = {pin.number: pin.net for pin in part.pins}
    one, two = at.get("1"), at.get("2")
    return (one, two) if one is not None and two is not None and one != two else None


def _element(analysis: Analysis, ref: str, ends: tuple[str, str], usual: float) -> Element:
    candidate = analysis.choice[ref]
    tolerance = candidate.tolerance
    stated = tolerance is not None and tolerance.unit == "%"
    spread = float(tolerance.value) if tolerance is not None and stated else usual
    facts = tuple(fact for fact in (candidate.value, candidate.tolerance) if fact is not None) or (analysis.design.parts[ref].fact,)
    value = float(candidate.value.value) if candidate.value is not None else None
    return Element(ref, ends, value, spread / 100, facts, stated)
