"""Insulating parts that nobody listed, found from the circuit alone (step 4 of finding domains).

All unlisted multi-pin parts are opened together along their package halves. In an ordinary circuit the halves grow together
again through ground and supply; across a real barrier they do not.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from checker.isolation.groups import Groups, halves
from checker.isolation.groups import groups as pin_groups
from checker.isolation.islands import Union, live_nets
from checker.model.candidate import CONNECTORS, Candidate
from checker.model.circuit import Design

# an inductor with four nets is two windings on a core, which may be a transformer in disguise
_SUSPECT = frozenset({"ic", "unknown", "module", "sensor", "display", "inductor"})
LEAST_NETS = 4
"""A part with fewer live nets cannot hold two circuits of two nets."""


@dataclass(frozen=True, slots=True)
class Unlisted:
    """A part of unknown type whose halves stay apart. nets: number of nets on each half's island."""

    ref: str
    halves: Groups
    nets: tuple[int, int]


def find(design: Design, choice: Mapping[str, Candidate], opened: frozenset[str] = frozenset()) -> tuple[Unlisted, ...]:
    """Candidates for insulating parts among the unlisted ones, in file order."""
    live = live_nets(design, choice)
    split: dict[str, tuple[tuple[str, ...], tuple[str, ...], Groups]] = {}
    union = Union(live)
    diodes = frozenset[frozenset[str]]()
    for ref, part in design.parts.items():
        candidate = choice[ref]
        if ref in opened or not part.fitted:
            continue
        found = pin_groups(part, candidate, lambda a, b: frozenset((a, b)) in diodes)
        if candidate.kind in _SUSPECT and not candidate.listed and len([n for n in part.nets() if n in live]) >= LEAST_NETS:
            both = halves(part, candidate)
            if both:
                net_of = {pin.number: pin.net for pin in part.pins if pin.net in live}
                low, high = (tuple(dict.fromkeys(net_of[p] for p in half if p in net_of)) for half in both)
                if low and high and not set(low) & set(high):
                    split[ref] = (low, high, both)
                found = both
        for group in found:
            nets = [pin.net for pin in part.pins if pin.number in set(group) and pin.net in live]
            for net in nets[1:]:
                union.join(nets[0], net)
    if not split:
        return ()
    members: dict[str, list[str]] = {}
    for net in live:
        members.setdefault(union.find(net), []).append(net)
    result = []
    for ref, (low, high, both) in split.items():
        islands = [{union.find(net) for net in half} for half in (low, high)]
        if islands[0] & islands[1]:
            continue
        if all(_stands(ref, half, members, union, live, choice) for half in (low, high)):
            result.append(Unlisted(ref, both, (len(members[union.find(low[0])]), len(members[union.find(high[0])]))))
    return tuple(result)


def _stands(
    ref: str,
    half: tuple[str, ...],
    members: Mapping[str, list[str]],
    union: Union,
    live: Mapping[str, tuple[str, ...]],
    choice: Mapping[str, Candidate],
) -> bool:
    """Whether one island of this half holds two of its nets and something else: two other parts or a connector."""
    for island in dict.fromkeys(union.find(net) for net in half):
        own = [net for net in half if union.find(net) == island]
        if len(own) >= 2:
            others = {other for net in members[island] for other in live[net] if other != ref}
            if len(others) >= 2 or any(choice[other].kind in CONNECTORS for other in others):
                return True
    return False
