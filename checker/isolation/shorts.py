"""Which ordinary part defeats the insulating parts (step 9 of finding domains).

The question is asked from the two sides of an insulating part whose sides lie on one island: which part, taken out, makes
them come apart again? A part that does is an articulation point of the circuit graph on the way between the sides, so one
depth-first walk per island answers for all parts and all insulating parts (Hopcroft and Tarjan, Communications of the ACM
16, 1973: a child c of p lies apart from the rest without p when low(c) >= depth(p)).
"""

from __future__ import annotations

from bisect import bisect_right
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import pairwise
from typing import Any

from checker.isolation.groups import TRANSFORMERS
from checker.isolation.islands import Islands, build, in_order

MOST_CUTS = 8  # insulating parts for which a minimum cut is tried when no single part explains the short
MOST_PLACES = 6  # places along the pins of a transformer where its windings may part
DEAREST_CUT = 12  # beyond this many parts' worth the two sides are simply one circuit
CUT_NODES = 20_000  # nets and parts of an island beyond which no minimum cut is tried


Split = tuple[tuple[str, ...], tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Culprit:
    """chain: ordinary parts in series, any of which, taken out, separates `parts`. nets: when a net itself is on both sides.

    splits: for each link of the chain, and each insulating part, its live nets on the two sides once that link is open; of a cut,
    whose parts must all be opened, under the first of them.
    """

    chain: tuple[str, ...]
    parts: tuple[str, ...]
    nets: tuple[str, ...] = ()
    splits: Mapping[str, Mapping[str, Split]] = field(default_factory=dict)
    cut: bool = False

    @property
    def split(self) -> Mapping[str, Split]:
        """The sides of the insulating parts once the first link is open."""
        return self.splits[self.chain[0]] if self.chain else {}


@dataclass(slots=True)
class _Walk:
    """Depth-first numbers of one island's graph; nodes are `n:net`, `p:side:ref` and `b:number:...` for a bond."""

    enter: dict[str, int] = field(default_factory=dict)
    leave: dict[str, int] = field(default_factory=dict)
    low: dict[str, int] = field(default_factory=dict)
    parent: dict[str, str | None] = field(default_factory=dict)
    children: dict[str, list[str]] = field(default_factory=dict)

    def without(self, node: str, other: str) -> str:
        """The component `other` lies in when `node` is taken out, named by a child of `node` or "" for the part above."""
        if not self.enter[node] < self.enter[other] <= self.leave[node]:
            return ""
        children = self.children[node]
        child = children[bisect_right([self.enter[c] for c in children], self.enter[other]) - 1]
        return child if self.low[child] >= self.enter[node] else ""

    def between(self, one: str, two: str) -> list[str]:
        """Nodes of the tree path from one to two, ends included."""
        up, down = [one], [two]
        while up[-1] != down[-1]:
            if self.enter[up[-1]] > self.enter[down[-1]]:
                up.append(self.parent[up[-1]] or "")
            else:
                down.append(self.parent[down[-1]] or "")
        return up + down[-2::-1]


def _graph(isle: Islands, nets: Iterable[str]) -> dict[str, list[str]]:
    graph: dict[str, list[str]] = {f"n:{net}": [] for net in nets}
    seen = set()
    for net in nets:
        for ref in isle.live[net]:
            if ref in seen or ref in isle.opened:
                continue
            seen.add(ref)
            sides = list(isle.sides[ref])
            if ref in isle.joined:
                sides = [tuple(n for side in sides for n in side)]
            for at, side in enumerate(sides):
                here = [f"n:{n}" for n in side if f"n:{n}" in graph]
                if len(here) > 1:
                    node = f"p:{at}:{ref}"
                    graph[node] = here
                    for other in here:
                        graph[other].append(node)
    for at, (one, two) in enumerate(isle.bonds):
        if f"n:{one}" in graph and f"n:{two}" in graph:
            node = f"b:{at}:(outside the board)"
            graph[node] = [f"n:{one}", f"n:{two}"]
            graph[f"n:{one}"].append(node)
            graph[f"n:{two}"].append(node)
    return graph


def _walk(graph: Mapping[str, Sequence[str]], root: str) -> _Walk:
    walk = _Walk()
    clock = 0
    stack: list[tuple[str, int]] = [(root, 0)]
    walk.parent[root] = None
    while stack:
        node, at = stack.pop()
        if at == 0:
            walk.enter[node] = walk.low[node] = clock
            walk.children[node] = []
            clock += 1
        elif walk.children[node] and walk.parent[graph[node][at - 1]] == node:
            walk.low[node] = min(walk.low[node], walk.low[graph[node][at - 1]])
        neighbours = graph[node]
        while at < len(neighbours):
            other = neighbours[at]
            at += 1
            if other not in walk.enter:
                walk.parent[other] = node
                walk.children[node].append(other)
                stack.append((node, at))
                stack.append((other, 0))
                break
            if other != walk.parent[node]:
                walk.low[node] = min(walk.low[node], walk.enter[other])
        else:
            walk.leave[node] = clock - 1
    return walk


def _ref(node: str) -> str:
    return node.split(":", 2)[2]


def find(
    isle: Islands,
    members: Mapping[str, Sequence[str]],
    inactive: Sequence[str],
    support: Sequence[str] = (),
    single: bool = False,
) -> tuple[Culprit, ...]:
    """For insulating parts with all sides on one island: what joins them, best explanation first; unexplained parts are absent.

    support: insulating parts that insulate elsewhere and have two sides or more on such an island; they add weight to a part
    that explains others, never explain one alone. single: only single parts are looked for, no cuts and no nets.
    """
    by_island: dict[str, list[str]] = {}
    for ref in inactive:
        for island in isle.part_islands(ref):
            if island in members:
                by_island.setdefault(island, []).append(ref)
    beside: dict[str, list[str]] = {}
    for ref in support:
        for island in isle.part_islands(ref):
            beside.setdefault(island, []).append(ref)
    found: list[Culprit] = []
    for island, refs in by_island.items():
        found += _on_island(isle, members[island], refs, beside.get(island, []), single)
    return tuple(sorted(found, key=lambda culprit: -len(culprit.parts)))


def cuts(isle: Islands, members: Mapping[str, Sequence[str]], refs: Sequence[str]) -> tuple[Culprit, ...]:
    """Several simple parts that together join the sides of insulating parts: the cheapest cut of each, where it is one of those."""
    found: list[Culprit] = []
    for island, nets in members.items():
        here = [ref for ref in refs if island in isle.part_islands(ref)]
        if here and len(nets) <= CUT_NODES:
            found += _cuts(isle, _graph(isle, nets), here)
    return tuple(cut for cut in found if all(isle.kind(ref) in _RANK for ref in cut.chain))


def _on_island(
    isle: Islands, nets: Sequence[str], refs: Sequence[str], support: Sequence[str], single: bool = False
) -> list[Culprit]:
    graph = _graph(isle, nets)
    walk = _walk(graph, f"n:{nets[0]}")
    separates: dict[str, dict[str, Split]] = {}
    shared: list[Culprit] = []
    for ref in refs:
        both = shared_nets(isle, ref)
        if both:
            shared.append(Culprit((), (ref,), both))
            continue
        for node in _candidates(isle, walk, ref):
            split = _split(isle, walk, node, ref)
            if split is not None:
                separates.setdefault(_ref(node), {})[ref] = split
    for ref in support:
        for node in _candidates(isle, walk, ref):
            if _ref(node) in separates and (split := _split(isle, walk, node, ref)) is not None:
                separates[_ref(node)][ref] = split
    if single:
        return _grouped(separates)
    shared += _by_net(isle, refs, separates, shared)
    culprits = _grouped(separates)
    explained = {ref for culprit in culprits for ref in culprit.parts} | {ref for culprit in shared for ref in culprit.parts}
    rest = [ref for ref in refs if ref not in explained]
    if rest and not culprits and len(graph) <= CUT_NODES:
        several = _cuts(isle, graph, rest)
        simple = {ref for cut in several if all(isle.kind(each) in _RANK for each in cut.chain) for ref in cut.parts}
        narrow = [culprit for ref in rest if ref not in simple for culprit in _narrow(isle, walk, ref)]
        shared += narrow
        culprits += [cut for cut in several if not any(culprit.parts[0] in cut.parts for culprit in narrow)]
    merged: dict[tuple[str, ...], list[str]] = {}
    for culprit in shared:
        merged.setdefault(culprit.nets, []).append(culprit.parts[0])
    return culprits + [Culprit((), tuple(parts), both) for both, parts in merged.items()]


def _by_net(
    isle: Islands, refs: Sequence[str], explained: Mapping[str, Mapping[str, object]], shared: Sequence[Culprit]
) -> list[Culprit]:
    """Insulating parts that come apart when one net is taken away: a net already found on both sides of another part, or one
    that two ends of different windings share."""
    rest = [
        ref for ref in refs if not any(ref in parts for parts in explained.values()) and not any(ref in c.parts for c in shared)
    ]
    nets = {culprit.nets for culprit in shared}
    for ref in rest:
        if isle.kind(ref) in TRANSFORMERS:
            pins = Counter(pin.net for pin in isle.design.parts[ref].pins if pin.net in isle.live)
            nets |= {(net,) for net, count in pins.items() if count > 1 and net is not None}
    found = []
    for both in sorted(nets) if rest else ():
        trial = build(isle.design, isle.choice, isle.opened, isle.halved, frozenset(both))
        for ref in rest:
            homes = Counter(trial.island(net) for side in trial.sides[ref] for net in side[:1])
            ends = 1 if isle.kind(ref) not in TRANSFORMERS or isle.choice[ref].windings else 2
            if len(homes) > 1 and (ends == 1 or max(homes.values()) >= ends):
                found.append(Culprit((), (ref,), both))
        rest = [ref for ref in rest if not any(ref in culprit.parts for culprit in found)]
    return found


def shared_nets(isle: Islands, ref: str) -> tuple[str, ...]:
    """Nets that are on both sides of a part with two or more pin groups."""
    sides = [set(side) for side in isle.sides[ref] if len(side) > 0]
    if isle.kind(ref) in TRANSFORMERS and not isle.choice[ref].windings:
        return ()
    counts = Counter(net for side in sides for net in side)
    return tuple(net for net in isle.live if counts.get(net, 0) > 1) if any(n > 1 for n in counts.values()) else ()


def _on_the_way(isle: Islands, walk: _Walk, ref: str) -> list[str]:
    """Nodes on the tree paths between the sides of an insulating part."""
    ends = [f"n:{side[0]}" for side in isle.sides[ref] if f"n:{side[0]}" in walk.enter]
    return list(dict.fromkeys(node for end in ends[1:] for node in walk.between(ends[0], end)))


def _candidates(isle: Islands, walk: _Walk, ref: str) -> list[str]:
    """Ordinary parts on the way between the sides of an insulating part."""
    return [
        node
        for node in _on_the_way(isle, walk, ref)
        if node.startswith("p:") and not isle.choice[_ref(node)].insulating and _ref(node) not in isle.halved
    ]


def _narrow(isle: Islands, walk: _Walk, ref: str) -> list[Culprit]:
    """The net through which everything goes from side to side of an insulating part; of several, the one with most parts on it."""
    nets = [node[2:] for node in _on_the_way(isle, walk, ref) if node.startswith("n:") and _parted(isle, walk, node, ref)]
    return [Culprit((), (ref,), (max(nets, key=lambda net: len(isle.live[net])),))] if nets else []


def _parted(isle: Islands, walk: _Walk, node: str, ref: str) -> bool:
    """Whether an insulating part comes apart without a net; a pin on that net belongs to either side."""
    pins = {f"n:{pin.net}" for pin in isle.design.parts[ref].pins if f"n:{pin.net}" in walk.enter}
    homes = Counter(walk.without(node, pin) for pin in pins if pin != node)
    least = 2 - (node in pins) if isle.kind(ref) in TRANSFORMERS and not isle.choice[ref].windings else 1
    return sum(count >= least for count in homes.values()) > 1


def _split(isle: Islands, walk: _Walk, node: str, ref: str) -> Split | None:
    """The nets of an insulating part on the two sides of `node` once it is open, None when that does not separate the part."""
    parts: dict[str, list[str]] = {}
    for side in isle.sides[ref]:
        homes = {walk.without(node, f"n:{net}") for net in side if f"n:{net}" in walk.enter}
        if not homes:
            continue  # this side lies on another island, which the part does insulate
        if len(homes) > 1:
            return None
        parts.setdefault(homes.pop(), []).extend(side)
    if len(parts) < 2:
        return None
    if isle.kind(ref) in TRANSFORMERS and not isle.choice[ref].windings:
        # a winding has two ends: a cut that leaves one net alone opens a rectifier or a switch, not the barrier
        parts = {home: nets for home, nets in parts.items() if len(set(nets)) >= 2}
        if len(parts) < 2:
            return None
    first, *others = parts.values()
    return tuple(dict.fromkeys(first)), tuple(dict.fromkeys(net for nets in others for net in nets))


def _grouped(separates: Mapping[str, Mapping[str, Split]]) -> list[Culprit]:
    """The part that separates most insulating parts wins; ties that separate the same ones are one chain. Repeated for what
    is left."""
    left = {ref: dict(parts) for ref, parts in separates.items()}
    found = []
    while left:
        most = max(len(parts) for parts in left.values())
        best = next(ref for ref, parts in left.items() if len(parts) == most)
        parts = tuple(left[best])
        chain = tuple(ref for ref, others in left.items() if tuple(others) == parts)
        found.append(Culprit(chain, parts, (), {ref: left[ref] for ref in chain}))
        left = {ref: rest for ref, others in left.items() if (rest := {p: s for p, s in others.items() if p not in parts})}
    return found


# networkx takes a tenth of a second to import and is needed only where several parts bridge
def _flow(isle: Islands, graph: Mapping[str, Sequence[str]]) -> Any:
    """The flow network whose minimum cut is the cheapest set of ordinary parts; a part costs more the more nets it joins."""
    import networkx as nx

    flow = nx.DiGraph()
    for node, neighbours in graph.items():
        capacity = float("inf")
        if node.startswith("p:") and not isle.choice[_ref(node)].insulating and _ref(node) not in isle.halved:
            count = len(neighbours)
            usual = 1 if isle.kind(_ref(node)) in _RANK else 1.5  # of two cuts of one size the one of simple parts
            capacity = usual if count <= 2 else 2 if count == 3 else 3 if count <= 8 else 10
        flow.add_edge(("in", node), ("out", node), capacity=capacity)
        for other in neighbours:
            flow.add_edge(("out", node), ("in", other), capacity=float("inf"))
    return flow


def _minimum_cut(isle: Islands, flow: Any, one: str, two: str) -> tuple[str, ...]:
    """References of the cheapest cut between two nets, in file order; () when only insulating parts or nets could be cut."""
    import networkx as nx

    try:
        value, (near, _) = nx.minimum_cut(flow, ("out", f"n:{one}"), ("in", f"n:{two}"))
    except nx.NetworkXUnbounded:
        return ()
    if value > DEAREST_CUT:
        return ()
    cut = {_ref(node) for half, node in near if half == "in" and node.startswith("p:") and ("out", node) not in near}
    return tuple(ref for ref in isle.design.parts if ref in cut)


def _cuts(isle: Islands, graph: Mapping[str, Sequence[str]], refs: Sequence[str]) -> list[Culprit]:
    """Several parts bridge: the cheapest cut between the sides of each insulating part that no single part explains."""
    flow = _flow(isle, graph)
    found: list[Culprit] = []
    for ref in refs[:MOST_CUTS]:
        sides = [side for side in isle.sides[ref] if f"n:{side[0]}" in graph]
        if len(sides) < 2:
            continue
        if isle.kind(ref) in TRANSFORMERS and not isle.choice[ref].windings:
            found += _cut_windings(isle, graph, flow, ref)
            continue
        parts = _minimum_cut(isle, flow, sides[0][0], sides[1][0])
        if parts:
            found.append(Culprit(parts, (ref,), (), {parts[0]: {ref: (sides[0], sides[1])}}, cut=True))
    merged: dict[tuple[str, ...], Culprit] = {}
    for culprit in found:
        known = merged.get(culprit.chain)
        parts = (known.parts if known else ()) + culprit.parts
        merged[culprit.chain] = Culprit(
            culprit.chain, parts, (), {culprit.chain[0]: {**(known.split if known else {}), **culprit.split}}, cut=True
        )
    return list(merged.values())


def _cut_windings(isle: Islands, graph: Mapping[str, Sequence[str]], flow: Any, ref: str) -> list[Culprit]:
    """The cheapest cut between neighbouring groups of pins of a transformer whose windings nobody states, when its parts are
    simple and it leaves no pin alone."""
    pins = [str(pin.net) for pin in in_order(isle.design.parts[ref]) if f"n:{pin.net}" in graph]
    found: list[tuple[str, ...]] = []
    for at in sorted(range(2, len(pins) - 1), key=lambda at: abs(2 * at - len(pins)))[:MOST_PLACES]:
        one, two = pins[:at], pins[at:]
        if set(one).isdisjoint(two):
            for net in one:
                flow.add_edge(("out", f"n:<{ref} {at}"), ("in", f"n:{net}"), capacity=float("inf"))
            for net in two:
                flow.add_edge(("out", f"n:{net}"), ("in", f"n:>{ref} {at}"), capacity=float("inf"))
            found.append(_minimum_cut(isle, flow, f"<{ref} {at}", f">{ref} {at}"))
    for parts in sorted((parts for parts in found if parts), key=len):
        if all(isle.kind(other) in _RANK for other in parts):
            trial = build(isle.design, isle.choice, isle.opened | set(parts), isle.halved)
            homes: dict[str, list[str]] = {}
            for net in pins:
                homes.setdefault(trial.island(net), []).append(net)
            if len(homes) > 1 and all(len(set(nets)) > 1 for nets in homes.values()):
                first, *others = homes.values()
                split = (tuple(dict.fromkeys(first)), tuple(dict.fromkeys(net for nets in others for net in nets)))
                return [Culprit(parts, (ref,), (), {parts[0]: {ref: split}}, cut=True)]
    return []


def interleaved(isle: Islands, split: Mapping[str, Split]) -> int:
    """How often the two sides change along the pins of transformers: windings lie side by side, so the barrier changes once."""
    changes = 0
    for ref, (first, second) in split.items():
        if isle.kind(ref) in TRANSFORMERS:
            sides = [pin.net in first for pin in in_order(isle.design.parts[ref]) if pin.net in first or pin.net in second]
            changes += sum(one != two for one, two in pairwise(sides))
    return changes


def path(isle: Islands, one: Sequence[str], two: Sequence[str], nets: Iterable[str]) -> tuple[str, ...]:
    """The shortest conducting way from one group of nets to another: net, part, net ... ; () when there is none."""
    graph = _graph(isle, nets)
    goal = {f"n:{net}" for net in two}
    came: dict[str, str] = {f"n:{net}": "" for net in one if f"n:{net}" in graph}
    queue = list(came)
    for node in queue:
        if node in goal:
            way = [node]
            while came[way[-1]]:
                way.append(came[way[-1]])
            return tuple(n.split(":", 1)[1] if n.startswith("n:") else _ref(n) for n in reversed(way))
        for other in graph[node]:
            if other not in came:
                came[other] = node
                queue.append(other)
    return ()


_SUSPICION = (
    "net-tie", "jumper", "resistor", "ferrite", "potentiometer", "network", "inductor", "capacitor", "diode", "led", "zener", "tvs",
)  # fmt: skip
_RANK = {kind: at for at, kind in enumerate(_SUSPICION)}


def _suspicion(isle: Islands, ref: str) -> int:
    return _RANK.get(isle.kind(ref), len(_SUSPICION))


def is_simple(isle: Islands, ref: str) -> bool:
    """Whether people put such a part across by mistake; a fuse or a contactor of the line is none."""
    return isle.kind(ref) in _RANK


def by_suspicion(isle: Islands, chain: Sequence[str]) -> list[str]:
    """The links of a chain, the simplest kind first."""
    return sorted(chain, key=lambda ref: _suspicion(isle, ref))


def likeliest(isle: Islands, chain: Sequence[str]) -> tuple[str, ...]:
    """The links of a series chain that most likely do not belong there: the simplest kind in it, fewest pins first."""
    best = min(_suspicion(isle, ref) for ref in chain)
    simplest = (ref for ref in chain if _suspicion(isle, ref) == best)
    return tuple(sorted(simplest, key=lambda ref: len(isle.design.parts[ref].pins)))


def between(isle: Islands, nets: Sequence[str], one: Sequence[str], two: Sequence[str]) -> tuple[tuple[str, ...], bool]:
    """What joins two groups of nets of one island: (series chain of ordinary parts, False), or (cheapest cut, True), or ((),
    False)."""
    graph = _graph(isle, nets)
    walk = _walk(graph, f"n:{nets[0]}")
    way = walk.between(f"n:{one[0]}", f"n:{two[0]}")
    chain = tuple(
        dict.fromkeys(
            _ref(node)
            for node in way
            if node.startswith("p:")
            and not isle.choice[_ref(node)].insulating
            and walk.without(node, f"n:{one[0]}") != walk.without(node, f"n:{two[0]}")
        )
    )
    if chain or set(one) & set(two) or len(graph) > CUT_NODES:
        return chain, False
    parts = _minimum_cut(isle, _flow(isle, graph), one[0], two[0])
    return parts, bool(parts)
