"""The way on which the bulk behind a rectifier is charged when the mains comes on, and what limits the current on it."""

from __future__ import annotations

import heapq
import itertools
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field

from checker.model.rule import LINK, Analysis
from checker.model.terminals import anode_and_cathode, bridge
from checker.rules.part_voltage import on_mains_side

BULK = 1e-6  # F; a smaller capacitor behind the rectifier only filters (common practice, no source)
LIMITING = 1e3  # ohm; a larger resistor in the way charges nothing, it is a load or a divider (common practice, no source)
_THERMISTOR = 20.0  # %; tolerance of an inrush limiter that states none (from memory)
_RESISTOR = 10.0  # %; of a resistor that states none, at most (common practice, no source)
_UNKNOWN = 1e9  # ohm; stands for a resistance nobody states, larger than any sum of those that are stated
_PLAIN = frozenset("fuse resettable-fuse jumper net-tie ferrite switch current-transformer hall-sensor".split())
_CONTACTS = frozenset("relay solid-state-relay triac thyristor".split())
_CHOKES = frozenset("inductor common-mode-choke filter".split())
_FOR_BOTH = frozenset("common-mode-choke filter switch".split())


@dataclass(frozen=True, slots=True)
class _Link:
    """What carries the charging current between two nets. low, high: its resistance, ohm; high None where nobody states it.

    sort: "limiter", "choke" or "" for what limits nothing. forward: a diode, from `one` to `other` alone.
    """

    refs: tuple[str, ...]
    one: str
    other: str
    low: float = 0.0
    high: float | None = 0.0
    sort: str = ""
    forward: bool = False


@dataclass(frozen=True, slots=True)
class Charge:
    """rectifiers, bulk: references. capacitance: F, of all that one rectifier charges. ends: nets of the bulk, positive first.

    limiters: parts on the way, () when some way has none. chokes: of a way without a limiter, parts whose resistance may limit.
    resistance: of the least of all ways, ohm, at least; high: at most, None where a part does not state it.
    """

    rectifiers: tuple[str, ...]
    bulk: tuple[str, ...]
    capacitance: float
    ends: tuple[str, str]
    limiters: tuple[str, ...]
    chokes: tuple[str, ...]
    resistance: float
    high: float | None


Weight = Callable[[_Link], float]
_Ways = Mapping[str, list[tuple[str, _Link]]]
_Far = Mapping[str, tuple[float, tuple[_Link, ...]]]  # net -> (sum of weights, links on the way)


def _limiters(link: _Link) -> float:
    return float(link.sort == "limiter")


def _limiters_and_chokes(link: _Link) -> float:
    return float(link.sort != "")


def _least(link: _Link) -> float:
    return link.low


def _most(link: _Link) -> float:
    return _UNKNOWN if link.high is None else link.high


_WEIGHTS: tuple[Weight, ...] = (_limiters, _limiters_and_chokes, _least, _most)


@dataclass(slots=True)
class _Map:
    """The links of a board. onward: net -> (next net, link) the way the current goes; back: against it. line: the line's nets."""

    onward: dict[str, list[tuple[str, _Link]]] = field(default_factory=dict)
    back: dict[str, list[tuple[str, _Link]]] = field(default_factory=dict)
    line: frozenset[str] = frozenset()
    poles: tuple[str, ...] = ()

    def add(self, link: _Link) -> None:
        ends = [(link.one, link.other)] if link.forward else [(link.one, link.other), (link.other, link.one)]
        for one, other in ends:
            self.onward.setdefault(one, []).append((other, link))
            self.back.setdefault(other, []).append((one, link))


def charges(analysis: Analysis) -> Iterator[Charge]:
    """One for each net that rectifiers of the line feed and where bulk of a known size is charged."""
    links = _links(analysis)
    known = _Map(poles=tuple(dict.fromkeys(analysis.stress.poles.values())))
    for link in links:
        known.add(link)
    in_line = {net: [way for way in ways if not way[1].forward] for net, ways in known.onward.items()}
    known.line = frozenset(_far(in_line, known.poles, _least))
    far = {weight: {pole: _far(in_line, (pole,), weight, known.line) for pole in known.poles} for weight in _WEIGHTS}
    fed = [link for link in links if link.forward and link.one in known.line and link.other not in known.line]
    drawn = [link for link in links if link.forward and link.other in known.line and link.one not in known.line]
    below = frozenset(_far(known.back, dict.fromkeys(link.one for link in drawn), _least)) - known.line
    capacitors = _capacitors(analysis)
    seen: set[str] = set()
    for net in dict.fromkeys(link.other for link in fed):
        if net not in seen:
            above = frozenset(_far(known.onward, (net,), _least)) - known.line
            seen |= above
            bulk = _bulk(capacitors, above, below, known.line)
            if bulk is not None:
                yield from _charge(known, far, bulk)


_Bulk = tuple[tuple[str, ...], float, tuple[str, str]]  # (references, F, nets of the ends)


def _charge(known: _Map, far: Mapping[Weight, Mapping[str, _Far]], bulk: _Bulk) -> Iterator[Charge]:
    """The bulk with its loop through the two poles; nothing when no loop is closed."""
    refs, capacitance, (high, low) = bulk
    loops = {}
    rectifiers: dict[str, None] = {}
    for weight in _WEIGHTS:
        into = _far(known.back, (high,), weight, stop=known.line)
        out = _far(known.onward, (low,), weight, stop=known.line)
        loop = _loop(known, far[weight], into, out)
        if loop is None:
            return
        loops[weight] = loop
        rectifiers |= dict.fromkeys((*_meeting(known.back, into, known.line), *_meeting(known.onward, out, known.line)))
    limited, on_way = loops[_limiters]
    chokes = (
        ()
        if limited
        else tuple(dict.fromkeys(ref for link in loops[_limiters_and_chokes][1] if link.sort == "choke" for ref in link.refs))
    )
    most = loops[_most][0]
    yield Charge(
        tuple(rectifiers),
        refs,
        capacitance,
        (high, low),
        tuple(dict.fromkeys(ref for link in on_way if link.sort == "limiter" for ref in link.refs)) if limited else (),
        chokes,
        loops[_least][0],
        None if most >= _UNKNOWN else most,
    )


def _meeting(ways: _Ways, local: _Far, line: frozenset[str]) -> Iterator[str]:
    """The rectifiers between the nets around the bulk and the line."""
    for net in local:
        for other, link in ways.get(net, ()) if net not in line else ():
            if link.forward and other in line:
                yield from link.refs


def _loop(known: _Map, far: Mapping[str, _Far], into: _Far, out: _Far) -> tuple[float, tuple[_Link, ...]] | None:
    """The least way from one pole over the bulk to another: its weight and links."""
    best: tuple[float, tuple[_Link, ...]] | None = None
    feeding = {pole: _joined(far[pole], into, known.line) for pole in known.poles}
    drawing = {pole: _joined(far[pole], out, known.line) for pole in known.poles}
    for one, other in itertools.permutations(known.poles, 2):
        first, second = feeding[one], drawing[other]
        if first is not None and second is not None and (best is None or first[0] + second[0] < best[0]):
            best = first[0] + second[0], (*first[1], *second[1])
    return best


def _joined(pole: _Far, local: _Far, line: frozenset[str]) -> tuple[float, tuple[_Link, ...]] | None:
    """The least way between a pole and the bulk, over the nets where both meet."""
    ways = [(pole[net][0] + far, (*pole[net][1], *links)) for net, (far, links) in local.items() if net in line and net in pole]
    return min(ways, key=lambda way: way[0], default=None)


def _far(
    ways: _Ways, starts: Iterable[str], weight: Weight, within: frozenset[str] | None = None, stop: frozenset[str] = frozenset()
) -> _Far:
    """Every net reached from `starts`, inside `within`, not beyond a net of `stop`, by the least sum of weights."""
    found: dict[str, tuple[float, tuple[_Link, ...]]] = {}
    count = itertools.count()
    queue: list[tuple[float, int, str, tuple[_Link, ...]]] = [(0.0, next(count), net, ()) for net in starts]
    while queue:
        so_far, _, net, links = heapq.heappop(queue)
        if net in found:
            continue
        found[net] = so_far, links
        for other, link in ways.get(net, ()) if net not in stop else ():
            if other not in found and (within is None or other in within):
                kept = (*links, link) if link.sort else links
                heapq.heappush(queue, (so_far + weight(link), next(count), other, kept))
    return found


_Capacitors = Mapping[str, list[tuple[str, str, float]]]  # net -> (reference, other net, F)


def _capacitors(analysis: Analysis) -> _Capacitors:
    found: dict[str, list[tuple[str, str, float]]] = {}
    for ref, candidate in analysis.choice.items():
        nets, value = analysis.design.parts[ref].nets(), candidate.value
        if candidate.kind == "capacitor" and value is not None and len(nets) == 2 and analysis.design.parts[ref].fitted:
            if float(value.value) >= BULK:
                for one, other in (nets, nets[::-1]):
                    found.setdefault(one, []).append((ref, other, float(value.value)))
    return found


def _bulk(capacitors: _Capacitors, above: frozenset[str], below: frozenset[str], line: frozenset[str]) -> _Bulk | None:
    """What is charged between a positive side and a negative one or a pole: in parallel, else two in series."""
    across = [(ref, net, other, farad) for net in sorted(above) for ref, other, farad in capacitors.get(net, ())]
    whole = [one for one in across if one[2] in below] or [one for one in across if one[2] in line]
    if whole:
        return tuple(one[0] for one in whole), sum(one[3] for one in whole), (whole[0][1], whole[0][2])
    for ref, net, middle, farad in across:
        for second, other, more in capacitors.get(middle, ()):
            if second != ref and other in below:
                return (ref, second), farad * more / (farad + more), (net, other)
    return None


def _links(analysis: Analysis) -> list[_Link]:
    """Every part of the mains side that can carry the charging current; limiters side by side are one."""
    found: list[_Link] = []
    limiters: dict[frozenset[str], list[_Link]] = {}
    contacts: list[str] = []
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if not part.fitted:
            continue
        nets = [net for net in part.nets() if on_mains_side(analysis, net)]
        if candidate.kind in ("diode", "bridge"):
            found += [_Link((ref,), anode, cathode, forward=True) for anode, cathode in _diodes(analysis, ref)]
        elif candidate.kind in _CONTACTS:
            contacts.append(ref)
        elif candidate.kind in _FOR_BOTH and len(nets) > 2:
            choke = candidate.kind in _CHOKES
            for one, other in _of_one_pole(analysis, nets):
                found.append(_Link((ref,), one, other, 0.0, None, "choke") if choke else _Link((ref,), one, other))
        elif len(nets) == len(part.nets()) == 2:
            if candidate.kind in _PLAIN or analysis.is_link(ref):
                found.append(_Link((ref,), nets[0], nets[1]))
            elif candidate.kind in _CHOKES:
                found.append(_Link((ref,), nets[0], nets[1], 0.0, None, "choke"))
            elif _limits(analysis, ref):
                limiters.setdefault(frozenset(nets), []).append(_limiter(analysis, ref))
    found += [_parallel(links) for links in limiters.values()]
    for ref in contacts:
        nets = [net for net in analysis.design.parts[ref].nets() if net in analysis.stress.lines]
        pairs = list(itertools.combinations(nets, 2))
        if not any(frozenset(pair) in limiters for pair in pairs):  # a contact across a limiter closes once the bulk is charged
            found += [_Link((ref,), one, other) for one, other in pairs]
    return found


def _limits(analysis: Analysis, ref: str) -> bool:
    """Whether a part limits the charging current: a thermistor, or a resistor of the ohms that are used for it."""
    candidate = analysis.choice[ref]
    if candidate.kind == "thermistor":
        return candidate.value is None or float(candidate.value.value) <= LIMITING
    return candidate.kind == "resistor" and candidate.value is not None and LINK <= float(candidate.value.value) <= LIMITING


def _limiter(analysis: Analysis, ref: str) -> _Link:
    candidate = analysis.choice[ref]
    one, other = analysis.design.parts[ref].nets()
    if candidate.value is None:
        return _Link((ref,), one, other, 0.0, None, "limiter")
    spread = _THERMISTOR if candidate.kind == "thermistor" else _RESISTOR
    if candidate.tolerance is not None:
        spread = min(float(candidate.tolerance.value), 100.0)
    ohms = float(candidate.value.value)
    return _Link((ref,), one, other, ohms * (1 - spread / 100), ohms * (1 + spread / 100), "limiter")


def _parallel(links: list[_Link]) -> _Link:
    """Limiters between the same two nets as one; where one does not state its resistance, nor does the whole."""
    if len(links) == 1:
        return links[0]
    low = 1 / sum(1 / link.low for link in links) if all(link.low > 0 for link in links) else 0.0
    highs = [link.high for link in links if link.high is not None]
    high = 1 / sum(1 / ohms for ohms in highs) if len(highs) == len(links) else None
    return _Link(tuple(ref for link in links for ref in link.refs), links[0].one, links[0].other, low, high, "limiter")


def _diodes(analysis: Analysis, ref: str) -> list[tuple[str, str]]:
    """(anode, cathode) nets of each diode in a diode or bridge whose pins tell."""
    part = analysis.design.parts[ref]
    if analysis.kind(ref) == "bridge":
        ends = bridge(part)
        return [] if ends is None else [(net, ends[0]) for net in ends[2]] + [(ends[1], net) for net in ends[2]]
    pair = anode_and_cathode(part)
    return [] if pair is None else [pair]


def _of_one_pole(analysis: Analysis, nets: list[str]) -> Iterator[tuple[str, str]]:
    """Pairs of nets of a part for several poles that belong to one."""
    poles = analysis.stress.poles
    for one, other in itertools.combinations(nets, 2):
        if one in poles and poles[one] == poles.get(other):
            yield one, other
