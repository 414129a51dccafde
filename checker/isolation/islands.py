"""Islands: nets that direct current can reach from one another, before anybody knows what they mean.

Steps 1, 3, 5 and 6 of finding domains: pins that do not count, pin groups, their union, then what capacitors and surge
limiters add. An island is named by its first net in file order.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from checker.isolation.groups import GAPS, LIMITERS, TRANSFORMERS, Groups, groups
from checker.model.candidate import CONNECTORS, INSULATING, MECHANICAL, Candidate
from checker.model.circuit import Design, Part, Pin
from checker.model.names import earth_like, role

# what a stub may hold: an island of these carries a conductor somewhere, it does not process anything
_PASSIVE = CONNECTORS | MECHANICAL | INSULATING | LIMITERS | {
    "capacitor", "fuse", "resettable-fuse", "switch", "common-mode-choke", "filter", "inductor", "ferrite", "jumper", "net-tie",
    "thermistor", "lamp", "motor", "antenna",
}  # fmt: skip
_WIRING = frozenset({"fuse", "resettable-fuse", "switch", "thermistor", "inductor", "ferrite", "jumper"})
WIRED = 8  # nets of a line conductor between a connector and a winding
_NOTHING_MORE = MECHANICAL | {"test-point"}
SMOOTHING = 90e-9  # F; 0.1 uF and more, with the tolerance of a nominal 100 nF, smooths; a barrier capacitor was 1 to 10 nF
SMALL = 11e-9  # F; up to about 10 nF a capacitor between two islands is taken for a barrier capacitor
LINE_RATING = 250.0  # V; a capacitor rated for this much is never taken for a smoothing capacitor


class Union:
    """Disjoint sets of hashable items, near-linear; the root of a set is its first-added member."""

    def __init__(self, items: Iterable[str]) -> None:
        self.parent = {item: item for item in items}
        self.order = {item: at for at, item in enumerate(self.parent)}

    def find(self, item: str) -> str:
        """The representative of the item's set."""
        parent = self.parent
        root = item
        while parent[root] != root:
            root = parent[root]
        while parent[item] != root:
            parent[item], item = root, parent[item]
        return root

    def join(self, one: str, two: str) -> None:
        """Make the two sets one."""
        a, b = self.find(one), self.find(two)
        if a != b:
            if self.order[a] > self.order[b]:
                a, b = b, a
            self.parent[b] = a


@dataclass(slots=True)
class Islands:
    """The circuit as conduction sees it, while the isolation stage works on it.

    live: nets that count. sides: reference -> its pin groups as tuples of live nets, lone pins as groups of one.
    union: the islands. opened: parts taken out of conduction on purpose. joined: capacitors and limiters that joined a stub.
    links: nets with nothing but capacitors, between two islands. bonds: pairs of nets joined by something that is no part.
    """

    design: Design
    choice: Mapping[str, Candidate]
    opened: frozenset[str] = frozenset()
    live: dict[str, tuple[str, ...]] = field(default_factory=dict)
    sides: dict[str, tuple[tuple[str, ...], ...]] = field(default_factory=dict)
    union: Union = field(default_factory=lambda: Union(()))
    joined: dict[str, tuple[str, str]] = field(default_factory=dict)
    links: set[str] = field(default_factory=set)
    halved: dict[str, Groups] = field(default_factory=dict)
    bonds: list[tuple[str, str]] = field(default_factory=list)

    def bond(self, one: str, two: str) -> None:
        """Join two nets that no part joins (a winding, a wire outside the board, the declaration) and remember it."""
        if self.union.find(one) != self.union.find(two):
            self.bonds.append((one, two))
            self.union.join(one, two)

    def kind(self, ref: str) -> str:
        """The kind of the candidate under judgement."""
        return self.choice[ref].kind

    def island(self, net: str) -> str:
        """The island of a live net."""
        return self.union.find(net)

    def members(self) -> dict[str, list[str]]:
        """Island -> its nets, both in file order, links left out."""
        found: dict[str, list[str]] = {}
        for net in self.live:
            if net not in self.links:
                found.setdefault(self.union.find(net), []).append(net)
        return found

    def part_islands(self, ref: str) -> tuple[str, ...]:
        """The islands a part's live nets lie in, each once, links left out."""
        return tuple(dict.fromkeys(self.union.find(n) for side in self.sides[ref] for n in side if n not in self.links))


def build(
    design: Design,
    choice: Mapping[str, Candidate],
    opened: frozenset[str] = frozenset(),
    halved: Mapping[str, Groups] | None = None,
    without: frozenset[str] = frozenset(),
) -> Islands:
    """Islands of the fitted circuit.

    opened: parts that join nothing. halved: parts taken as insulating, with their pin groups. without: nets left out.
    """
    isle = Islands(design, choice, opened, halved=dict(halved or {}))
    isle.live = {net: refs for net, refs in live_nets(design, choice).items() if net not in without}
    diodes = {
        frozenset(nets)
        for ref, part in design.parts.items()
        if part.fitted and choice[ref].kind in ("diode", "zener", "tvs") and len(nets := part.nets()) == 2
    }
    isle.union = Union(isle.live)
    for ref, part in design.parts.items():
        isle.sides[ref] = _sides(isle, part, choice[ref], diodes)
        if ref not in opened:
            for side in isle.sides[ref]:
                for net in side[1:]:
                    isle.union.join(side[0], net)
    return isle


def live_nets(design: Design, choice: Mapping[str, Candidate]) -> dict[str, tuple[str, ...]]:
    """Nets with pins of two parts or more, each with its parts; holes and logos do not count, not-fitted parts do (they may
    be fitted)."""
    live = {}
    for name, net in design.nets.items():
        refs = tuple(dict.fromkeys(ref for ref, _ in net.pins if ref in choice and choice[ref].kind not in ("fiducial", "logo")))
        if len(refs) > 1:
            live[name] = refs
    return live


def _sides(isle: Islands, part: Part, candidate: Candidate, diodes: set[frozenset[str]]) -> tuple[tuple[str, ...], ...]:
    net_of = {pin.number: pin.net for pin in part.pins if pin.net in isle.live}
    if part.ref in isle.halved:
        found: Groups = isle.halved[part.ref]
    else:
        found = groups(part, candidate, lambda a, b: frozenset((a, b)) in diodes)
    taken = {pin for group in found for pin in group}
    sides = [tuple(dict.fromkeys(net_of[pin] for pin in group if pin in net_of)) for group in found]
    sides += [(net,) for pin, net in net_of.items() if pin not in taken]
    return tuple(dict.fromkeys(side for side in sides if side))


def settle_windings(isle: Islands) -> None:
    """Join the ends of a winding that the circuit does not join because one of them leads to a connector only.

    Two stubs on one connector and one transformer are a winding; four are two, paired in the order of the pins; an odd number
    is left alone, since a wrong pair would hide a barrier. A stub with a single pin of a transformer belongs to the winding
    of the neighbouring pins when these agree.
    """
    members = isle.members()
    stub = {island: is_stub(isle, nets) for island, nets in members.items()}
    before = {net: isle.island(net) for net in isle.live}
    for ref, candidate in isle.choice.items():
        if candidate.kind not in TRANSFORMERS or candidate.windings or ref in isle.opened or not isle.design.parts[ref].fitted:
            continue
        ends = [net for pin in in_order(isle.design.parts[ref]) if (net := pin.net) in isle.live and stub.get(before[net], False)]
        by_connector: dict[str, list[str]] = {}
        for net in dict.fromkeys(ends):
            for other in _reached(isle, net, members[before[net]]):
                if isle.kind(other) in CONNECTORS:
                    by_connector.setdefault(other, []).append(net)
        for nets in by_connector.values():
            if len(nets) % 2 == 0:
                for one, two in zip(nets[::2], nets[1::2], strict=True):
                    isle.bond(one, two)
        _settle_fed(isle, ref, ends)
        _settle_lone_ends(isle, ref, ends)


def _settle_fed(isle: Islands, ref: str, ends: list[str]) -> None:
    """A winding fed from a connector of which one end leads to more than wiring: a fault on that end must not open the winding.

    The two ends are neighbours among the pins, at least one is a stub, and no third pin is wired to that connector.
    """
    nets = list(dict.fromkeys(pin.net for pin in in_order(isle.design.parts[ref]) if pin.net in isle.live and pin.net is not None))
    wired: dict[str, list[int]] = {}
    for at, net in enumerate(nets):
        for connector in _wired(isle, net):
            wired.setdefault(connector, []).append(at)
    for places in wired.values():
        if len(places) == 2 and places[1] - places[0] == 1 and (nets[places[0]] in ends or nets[places[1]] in ends):
            isle.bond(nets[places[0]], nets[places[1]])


def _wired(isle: Islands, net: str) -> tuple[str, ...]:
    """Connectors that a net reaches through nothing but wiring, seen a few nets far."""
    reached, found = [net], dict[str, None]()
    for here in reached:
        for ref in isle.live[here]:
            part, nets = isle.design.parts[ref], isle.design.parts[ref].nets()
            if isle.kind(ref) in CONNECTORS:
                found[ref] = None
            elif isle.kind(ref) in _WIRING and part.fitted and ref not in isle.opened and len(nets) == 2 and len(reached) < WIRED:
                reached += [other for other in nets if other in isle.live and other not in reached]
    return tuple(found)


def in_order(part: Part) -> list[Pin]:
    """Pins by number where they are numbered, else as listed."""
    if all(pin.number.isdecimal() and pin.number.isascii() for pin in part.pins):
        return sorted(part.pins, key=lambda pin: int(pin.number))
    return list(part.pins)


def _settle_lone_ends(isle: Islands, ref: str, ends: list[str]) -> None:
    """A stub that holds one pin of a transformer alone: joined to the island both its neighbours lie on, or to the only other pin
    that is alone when that is its neighbour."""
    pins = [pin for pin in in_order(isle.design.parts[ref]) if pin.net in isle.live]
    homes, low = [isle.island(pin.net) for pin in pins if pin.net is not None], _low_half(pins)
    for at, pin in enumerate(pins):
        if pin.net in ends and homes.count(homes[at]) == 1 and len(pins) > 2:
            beside = [other for other in (at - 1, at + 1) if 0 <= other < len(pins)]
            if len({homes[other] for other in beside}) == 1:
                nearest = min(beside, key=lambda other: (low[other] != low[at], (other ^ at) != 1))
                isle.bond(str(pins[nearest].net), pin.net)
                homes = [isle.island(pin.net) for pin in pins if pin.net is not None]
    lone = [at for at in range(len(pins)) if homes.count(homes[at]) == 1]
    whole = all(homes[at] in homes[max(at - 1, 0) : at] + homes[at + 1 : at + 2] for at in range(len(pins)) if at not in lone)
    if whole and len(lone) == 2 and lone[1] - lone[0] == 1 and len(pins) > 3 and any(pins[at].net in ends for at in lone):
        isle.bond(str(pins[lone[0]].net), str(pins[lone[1]].net))  # every other pin has its winding beside it: these two are one


def _low_half(pins: list[Pin]) -> list[bool]:
    """Whether each pin lies on the first side of its package; False for all when pins are not numbered."""
    numbers = [int(pin.number) if pin.number.isdecimal() and pin.number.isascii() else 0 for pin in pins]
    return [0 < number <= (max(numbers) + 1) // 2 for number in numbers]


def _reached(isle: Islands, net: str, island: list[str]) -> tuple[str, ...]:
    """Parts on the net's island when it is small, else on the net alone: the connector behind a fuse or a choke counts."""
    nets = island if len(island) <= 6 else [net]
    return tuple(dict.fromkeys(ref for each in nets for ref in isle.live[each]))


def is_stub(isle: Islands, nets: list[str], beside: frozenset[str] = frozenset()) -> bool:
    """Whether these nets hold only windings, connectors, capacitors and the like, and kinds in `beside`: nothing that processes."""
    return all(isle.kind(ref) in _PASSIVE or isle.kind(ref) in beside for net in nets for ref in isle.live[net])


def settle_capacitors(isle: Islands) -> None:
    """Find the links of capacitor chains, then let smoothing capacitors and limiters join what only hangs on them.

    A net with nothing but capacitors belongs to the one island it touches, else it is a link. 0.1 uF and more with one end
    on a stub joins; so does a small one on a stub that nothing marks as a conductor of its own. Nothing with a safety class
    or a line rating joins, and nothing that would put both sides of an insulating part on one island.
    """
    _find_links(isle)
    members = isle.members()
    stubs = {island: is_stub(isle, nets) for island, nets in members.items()}
    for ref, candidate in sorted(isle.choice.items(), key=lambda item: item[1].kind in GAPS):  # in a string, the gap insulates
        if (
            (candidate.kind != "capacitor" and candidate.kind not in LIMITERS)
            or not isle.design.parts[ref].fitted
            or ref in isle.opened
        ):
            continue
        islands = isle.part_islands(ref)
        if len(islands) != 2 or not (stubs.get(islands[0], False) or stubs.get(islands[1], False)):
            continue
        stub = islands[0] if stubs.get(islands[0], False) else islands[1]
        joins = _in_series(isle, candidate, members[stub]) or (
            _joins(isle, candidate, members[stub]) and not _defeats(isle, candidate, islands, members, stub)
        )
        if joins:
            one, two = islands
            isle.joined[ref] = (one, two)
            isle.union.join(one, two)
            kept = isle.union.find(one)
            gone = two if kept == one else one
            members[kept] = [*members[kept], *members.pop(gone)]
            stubs[kept] = stubs[one] and stubs[two]
            stubs.pop(gone)


def _joins(isle: Islands, candidate: Candidate, stub: list[str]) -> bool:
    if candidate.kind in LIMITERS:  # what a capacitor of class Y leads to is another side
        y_class = any(isle.choice[ref].marked("Y1", "Y2", "Y3", "Y4") for net in stub for ref in isle.live[net])
        return not y_class and not any(earth_like(net) for net in stub)
    if candidate.marks or ((rating := candidate.ratings.get("voltage")) is not None and float(rating.value) >= LINE_RATING):
        return False
    value = candidate.value
    if value is not None and isinstance(value.value, float) and value.value >= SMOOTHING:
        return True
    return not any(earth_like(net) or role(net) for net in stub)


def _in_series(isle: Islands, candidate: Candidate, stub: list[str]) -> bool:
    """Whether a capacitor is in series with a winding: one winding end and capacitors to one island are all there is on the stub.

    A winding that led nowhere else could carry no output, so this is a resonant or blocking capacitor, never one across a barrier.
    """
    if candidate.marks or candidate.kind != "capacitor" or len(stub) != 1:
        return False
    refs = isle.live[stub[0]]
    ends = [ref for ref in refs if isle.kind(ref) in TRANSFORMERS]
    if len(ends) != 1 or not all(isle.kind(ref) in ("capacitor", "test-point") or ref in ends for ref in refs):
        return False
    return len({island for ref in refs if isle.kind(ref) == "capacitor" for island in isle.part_islands(ref)}) == 2


def _defeats(isle: Islands, candidate: Candidate, islands: tuple[str, ...], members: Mapping[str, list[str]], stub: str) -> bool:
    """Whether joining two islands would take away insulation.

    A smoothing capacitor at a bare winding end, such as a centre tap, may join what else the winding is on, as long as the
    transformer keeps another side. Anything smaller, a limiter, and anything on a stub that leads to a connector may not join
    two islands that an insulating part lies between.
    """
    value = candidate.value
    smoothing = candidate.kind == "capacitor" and value is not None and isinstance(value.value, float) and value.value >= SMOOTHING
    outside = any(isle.kind(ref) in CONNECTORS for net in members[stub] for ref in isle.live[net])
    strict = not smoothing or outside
    smaller = min(islands, key=lambda island: len(members[island]))
    for net in members[smaller]:
        for ref in isle.live[net]:
            if isle.choice[ref].insulating or ref in isle.halved:
                here = set(isle.part_islands(ref))
                if len(here) > 1 and (here <= set(islands) or (strict and set(islands) <= here)):
                    return True
    return False


def _find_links(isle: Islands) -> None:
    """Nets on which only capacitors stand (a test point changes nothing), grouped through capacitors; never protective earth,
    which a wire outside the board reaches.

    A group is joined to the one island it touches, else its nets are links.
    """
    bare = {
        net
        for net, refs in isle.live.items()
        if sum(isle.kind(ref) == "capacitor" for ref in refs) > 1
        and role(net) != "earth"
        and all(
            (isle.kind(ref) == "capacitor" and isle.design.parts[ref].fitted and ref not in isle.opened)
            or isle.kind(ref) in _NOTHING_MORE
            for ref in refs
        )
    }
    seen: set[str] = set()
    for net in isle.live:
        if net not in bare or net in seen:
            continue
        touched: dict[str, str] = {}
        group, stack = [], [net]
        seen.add(net)
        while stack:
            here = stack.pop()
            group.append(here)
            for ref in isle.live[here]:
                for other in isle.design.parts[ref].nets():
                    if other in bare:
                        if other not in seen:
                            seen.add(other)
                            stack.append(other)
                    elif other in isle.live:
                        touched.setdefault(isle.island(other), other)
        if len(touched) == 1:
            for other in group:
                isle.bond(next(iter(touched.values())), other)
        elif touched:
            isle.links.update(group)
