"""Insulating parts that nobody listed, found from the circuit alone (step 4 of finding domains).

All unlisted multi-pin parts are opened together along their package halves. In an ordinary circuit the halves grow together
again through ground and supply; across a real barrier they do not.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from checker.isolation import shorts
from checker.isolation.groups import Groups, halves
from checker.isolation.islands import Islands, build, live_nets
from checker.isolation.shorts import Culprit
from checker.model.candidate import CONNECTORS, Candidate
from checker.model.circuit import Design

# an inductor with four nets is two windings on a core, which may be a transformer in disguise
_SUSPECT = frozenset({"ic", "unknown", "module", "sensor", "display", "inductor"})
_SIMPLE = frozenset({"resistor", "jumper", "net-tie", "ferrite", "inductor", "capacitor"})
LEAST_NETS = 4  # a part with fewer live nets cannot hold two circuits of two nets
LEAST_HIDDEN = 2  # parts of unknown type that one simple part must join before anybody is asked


@dataclass(frozen=True, slots=True)
class Unlisted:
    """A part of unknown type whose halves stay apart. nets: number of nets on each half's island."""

    ref: str
    halves: Groups
    nets: tuple[int, int]


@dataclass(frozen=True, slots=True)
class Suspects:
    """isle: islands with every unlisted part opened along its halves; members: its islands; parts: those, in file order."""

    isle: Islands
    members: Mapping[str, Sequence[str]]
    parts: tuple[str, ...]


def suspects(design: Design, choice: Mapping[str, Candidate], opened: frozenset[str] = frozenset()) -> Suspects | None:
    """Every unlisted part with enough nets, all opened at once; None when there is none."""
    live = live_nets(design, choice)
    halved = {}
    for ref, part in design.parts.items():
        candidate = choice[ref]
        if candidate.kind in _SUSPECT and not candidate.listed and part.fitted and ref not in opened:
            if sum(net in live for net in part.nets()) >= LEAST_NETS and (both := halves(part, candidate)):
                halved[ref] = both
    if not halved:
        return None
    isle = build(design, choice, opened, halved)
    return Suspects(isle, isle.members(), tuple(halved))


def find(found: Suspects | None) -> tuple[Unlisted, ...]:
    """Parts whose halves lie on different islands, each holding two of its nets and something else: taken for isolators."""
    if found is None:
        return ()
    isle, result = found.isle, []
    for ref in found.parts:
        low, high = _halves_of(isle, ref)
        apart = {isle.island(net) for net in low}.isdisjoint(isle.island(net) for net in high)
        if low and high and apart and all(_stands(found, ref, half) for half in (low, high)):
            sizes = (len(found.members[isle.island(low[0])]), len(found.members[isle.island(high[0])]))
            result.append(Unlisted(ref, isle.halved[ref], sizes))
    return tuple(result)


def find_shorted(found: Suspects | None) -> tuple[Culprit, ...]:
    """Simple parts without which two unlisted parts or more would lie between two circuits: asked about, never failed."""
    if found is None or len(found.parts) < LEAST_HIDDEN:
        return ()
    isle = found.isle
    joined = [
        ref
        for ref in found.parts
        if len(isle.sides[ref]) > 1 and len(isle.part_islands(ref)) == 1 and not shorts.shared_nets(isle, ref)
    ]
    return tuple(
        culprit
        for culprit in shorts.find(isle, found.members, joined)
        if culprit.chain
        and not culprit.cut
        and len(culprit.parts) >= LEAST_HIDDEN
        and all(isle.kind(ref) in _SIMPLE for ref in culprit.chain)
        and all(len(side) >= 2 for split in culprit.split.values() for side in split)
    )


def doubt(isle: Islands, ref: str) -> Unlisted:
    """A part taken for an ordinary one that alone joins the mains to another side: taken apart along its halves and asked about."""
    both = halves(isle.design.parts[ref], isle.choice[ref])
    nets = [{pin.net for pin in isle.design.parts[ref].pins if pin.number in half and pin.net in isle.live} for half in both]
    return Unlisted(ref, both, (len(nets[0]), len(nets[1])))


def _halves_of(isle: Islands, ref: str) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """The live nets of the two halves of a part, each once."""
    net_of = {pin.number: pin.net for pin in isle.design.parts[ref].pins if pin.net in isle.live}
    low, high = (tuple(dict.fromkeys(str(net_of[pin]) for pin in half if pin in net_of)) for half in isle.halved[ref])
    return low, high


def _stands(found: Suspects, ref: str, half: Sequence[str]) -> bool:
    """Whether one island of this half holds two of its nets and something else: two other parts or a connector."""
    isle = found.isle
    for island in dict.fromkeys(isle.island(net) for net in half):
        if sum(isle.island(net) == island for net in half) >= 2:
            others = {other for net in found.members[island] for other in isle.live[net] if other != ref}
            if len(others) >= 2 or any(isle.kind(other) in CONNECTORS for other in others):
                return True
    return False
