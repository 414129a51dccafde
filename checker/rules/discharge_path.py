"""What hangs on the pins of a plug once it is pulled: capacitors, and the ways by which they lose their charge.

A state of the contacts says which conductors are still one with each pin: a switch may be open, a fuse may have opened.
"""

from __future__ import annotations

import math
import re
from collections import Counter
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field

from checker.formulas.nodal import star_mesh
from checker.model.entry import Entry
from checker.model.fact import Fact
from checker.model.rule import Analysis
from checker.model.terminals import anode_and_cathode, coupler

_CONTACTS = frozenset({"switch", "relay", "solid-state-relay", "triac"})
_FUSES = frozenset({"fuse", "resettable-fuse"})
_WIRES = frozenset("jumper net-tie thermistor inductor ferrite common-mode-choke filter current-transformer hall-sensor".split())
_LOADS = frozenset({"lamp", "motor"})
_LIGHTLY = frozenset({"capacitor", "test-point", "controller", "ic", "optocoupler", "led", "diode", "zener", "bridge"})
_BOTH_WAYS = re.compile(r"bi-?dir|ac[ -]?input|ac[ -]?eingang|(?<![0-9])814(?![0-9])|h11aa|(?<![0-9])620(?![0-9])", re.IGNORECASE)
_DISCHARGER = re.compile(
    r"x[\s-]?cap(?:acitor)?s?\s+discharg|discharg\w*\s+(?:of\s+)?(?:the\s+)?x[\s-]?cap|active discharge", re.IGNORECASE
)
CAPACITOR, RESISTOR = 20.0, 5.0  # %; tolerances when none is stated: the widest usual ones (common practice, no source)
WIRE = 100.0  # ohm; at most this much in a line conductor carries the line on (common practice, no source)


@dataclass(frozen=True, slots=True)
class Element:
    """A capacitor [F] or resistor [ohm] between two conductors. value: None when not read; spread: its tolerance as a ratio."""

    ref: str
    ends: tuple[str, str]
    value: float | None
    spread: float
    facts: tuple[Fact, ...]

    def at(self, sign: int) -> float:
        return (self.value or 0.0) * (1 + sign * self.spread)


@dataclass(frozen=True, slots=True)
class Plug:
    """The pins of an entry in one state. capacitors: those with charge on the pins; resistors: of the ways between them.

    windings, loads: what else takes the charge away; dischargers: circuits made for it; text: the state, "" for all closed.
    one_way: diodes in the ways, which take the charge of one polarity only.
    """

    text: str
    pins: tuple[str, str]
    capacitors: tuple[Element, ...]
    resistors: tuple[Element, ...]
    windings: tuple[str, ...] = ()
    loads: tuple[str, ...] = ()
    dischargers: tuple[str, ...] = ()
    opened: tuple[str, ...] = field(default=())
    one_way: tuple[str, ...] = ()

    def capacitance(self, sign: int) -> float:
        """F between the pins, every capacitor at that end of its tolerance; those that meet elsewhere in series."""
        return _between(self.pins, ((c.ends[0], c.ends[1], c.at(sign)) for c in self.capacitors))

    def ohms(self, sign: int, without: str = "") -> float:
        """ohm between the pins, every resistor at that end of its tolerance; inf without a way."""
        ways = ((r.ends[0], r.ends[1], 1 / ohms) for r in self.resistors if r.ref != without and (ohms := r.at(sign)) > 0)
        conductance = _between(self.pins, ways)
        return 1 / conductance if conductance > 0 else math.inf


def _between(pins: tuple[str, str], branches: Iterator[tuple[str, str, float]]) -> float:
    return star_mesh(branches, pins).get(pins[0], {}).get(pins[1], 0.0)


def plugs(analysis: Analysis, entry: Entry) -> Iterator[Plug]:
    """The pins of an entry with all contacts closed, then with each switch and each fuse of its conductors open.

    An entry with other than two poles gives nothing: which pins a hand reaches first is not settled here.
    """
    if len(entry.poles) != 2:
        return
    closed = _conductors(analysis, entry, ())
    yield _plug(analysis, entry, closed, "", ())
    on_line = [ref for ref in analysis.choice if analysis.kind(ref) in _CONTACTS | _FUSES and analysis.design.parts[ref].fitted]
    for ref in on_line:
        if any(net in closed for net in analysis.design.parts[ref].nets()):
            apart = _conductors(analysis, entry, (ref,))
            if len(apart) < len(closed):
                what = "open" if analysis.kind(ref) in _CONTACTS else "blown"
                yield _plug(analysis, entry, apart, f"{ref} {what}", (ref,))


def _conductors(analysis: Analysis, entry: Entry, opened: tuple[str, ...]) -> dict[str, str]:
    """Net -> the pin of the entry it is one conductor with. A part for both poles carries each pole on to the nets of that pole."""
    found = {pole: pole for pole in entry.poles}
    queue = list(entry.poles)
    poles = analysis.stress.poles
    for net in queue:
        for ref in analysis.fitted_on(net):
            if ref in opened or not _carries(analysis, ref):
                continue
            for other in analysis.design.parts[ref].nets():
                if other not in found and poles.get(other) == poles.get(net) and other in poles:
                    found[other] = found[net]
                    queue.append(other)
    return found


def _carries(analysis: Analysis, ref: str) -> bool:
    kind, value = analysis.kind(ref), analysis.choice[ref].value
    small = kind == "resistor" and value is not None and float(value.value) <= WIRE
    return kind in _WIRES or kind in _CONTACTS or kind in _FUSES or small


def _plug(analysis: Analysis, entry: Entry, one: Mapping[str, str], text: str, opened: tuple[str, ...]) -> Plug:
    pins = (entry.poles[0], entry.poles[1])

    lit, half = _lights(analysis, one)

    def node(net: str) -> str:
        return lit.get(one.get(net, net), one.get(net, net))

    capacitors, resistors, windings, loads, dischargers = [], [], [], [], []
    inner = _inner(analysis, one)
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        nets = part.nets()
        if not part.fitted or ref in opened:
            continue
        at = [node(net) for net in nets]
        if candidate.kind == "capacitor" and len(at) == 2 and at[0] != at[1] and _charged(analysis, ref, nets, one):
            capacitors.append(_element(analysis, ref, (at[0], at[1]), CAPACITOR))
        elif candidate.kind == "resistor" and len(at) == 2 and at[0] != at[1]:
            if all(net in one or net in inner for net in nets):
                resistors.append(_element(analysis, ref, (at[0], at[1]), RESISTOR))
        elif set(pins) <= set(at):
            if candidate.kind == "transformer":
                windings.append(ref)
            elif candidate.kind in _LOADS:
                loads.append(ref)
        if _DISCHARGER.search(_texts(analysis, ref)):
            dischargers.append(ref)
    return Plug(
        text=text,
        pins=pins,
        capacitors=tuple(capacitors),
        resistors=_ways(resistors, pins),
        windings=tuple(windings),
        loads=tuple(loads),
        dischargers=tuple(dischargers),
        opened=opened,
        one_way=_one_way(resistors, pins, half, node),
    )


def _one_way(
    resistors: list[Element], pins: tuple[str, str], half: Mapping[tuple[str, str], list[str]], node: Callable[[str], str]
) -> tuple[str, ...]:
    """The diodes that would complete a way from pin to pin if they conducted both ways."""
    links = [Element(refs[0], (node(low), node(high)), 1.0, 0.0, ()) for (low, high), refs in half.items()]
    whole = _ways([*resistors, *links], pins)
    through = tuple(one.ref for one in whole if one in links)
    return through if any(one in resistors for one in whole) else ()


def _ways(resistors: list[Element], pins: tuple[str, str]) -> tuple[Element, ...]:
    """Those resistors that lead from pin to pin: what ends on a net of its own is taken off, end by end."""
    found = list(resistors)
    while True:
        ends = Counter(end for one in found for end in one.ends)
        kept = [one for one in found if all(end in pins or ends[end] > 1 for end in one.ends)]
        if len(kept) == len(found):
            return tuple(kept)
        found = kept


def _charged(analysis: Analysis, ref: str, nets: tuple[str, ...], one: Mapping[str, str]) -> bool:
    """Whether a capacitor holds charge on the pins: between two line conductors, or from one to protective earth."""
    isolation = analysis.isolation
    earthed = [net in isolation.domain_of and isolation.domains[isolation.domain_of[net]].earthed for net in nets]
    return all(net in one or grounded for net, grounded in zip(nets, earthed, strict=True)) and any(net in one for net in nets)


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
        refs.setdefault(key, []).append(ref)
        ways.setdefault(key, set()).update({True, False} if _BOTH_WAYS.search(_texts(analysis, ref)) else {ends == key})
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
    spread = usual
    if candidate.tolerance is not None and candidate.tolerance.unit == "%":
        spread = float(candidate.tolerance.value)
    facts = tuple(fact for fact in (candidate.value, candidate.tolerance) if fact is not None) or (analysis.design.parts[ref].fact,)
    value = float(candidate.value.value) if candidate.value is not None else None
    return Element(ref, ends, value, spread / 100, facts)


def _texts(analysis: Analysis, ref: str) -> str:
    part = analysis.design.parts[ref]
    return " ".join(part.text(name) for name in ("value", "description", "symbol"))
