"""The isolation stage: from a circuit to domains, what crosses between them, what defeats them, and what is not known."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from checker.isolation import evidence, shorts, unlisted
from checker.isolation.crossings import crossings, separations
from checker.isolation.groups import TRANSFORMERS, halves
from checker.isolation.islands import Islands, build, is_stub, settle_capacitors, settle_windings
from checker.isolation.naming import named
from checker.isolation.shorts import Culprit
from checker.isolation.sides import assign
from checker.model.candidate import CONNECTORS, Candidate
from checker.model.circuit import Design
from checker.model.condition import NORMAL, Condition
from checker.model.declaration import Declaration
from checker.model.domain import Isolation, Question, Short
from checker.model.step import Step

DOUBTED = frozenset({"controller", "regulator", "ic", "module", "unknown", "sensor"})
ROUNDS = 8  # independent shorts looked for in one design
BOND = 10.0  # ohm; a resistor above it is no bond to protective earth (common practice, no source; a bond has 0.1 ohm)
CHAIN_WEIGHED = 6  # links of a series chain that are tried one by one
NETS_WEIGHED = 5_000  # nets of a design beyond which they are not
WEIGHED = 24  # insulating parts that share one island for which the sides' evidence is compared


def isolate(design: Design, choice: Mapping[str, Candidate], declaration: Declaration, condition: Condition = NORMAL) -> Isolation:
    """Domains and barriers of the fitted circuit under a condition.

    A short that defeats insulating parts is taken out and reported, and the domains are those without it: so one planted
    resistor does not hide what else is wrong with the barrier.
    """
    doubtful = unlisted.suspects(design, choice, condition.removed)
    suspects = listed = unlisted.find(doubtful)
    hidden = unlisted.find_shorted(doubtful)
    halved = {suspect.ref: suspect.halves for suspect in suspects}
    opened = condition.removed
    bleeders: frozenset[str] = frozenset()
    found: list[Short] = []
    while True:
        isle = build(design, choice, opened, halved)
        for group in condition.joined:
            first, *others = [net for net in group if net in isle.live] or [""]
            for net in others:
                isle.bond(first, net)
        settle_windings(isle)
        settle_capacitors(isle)
        _join_alike(isle, declaration)
        members = isle.members()
        gathered = evidence.gather(isle, members)
        short, cut, doubted = _next_short(isle, members, gathered, declaration)
        if doubted and len(suspects) < ROUNDS + len(listed):
            suspects += tuple(unlisted.doubt(isle, ref) for ref in doubted)
            halved |= {suspect.ref: suspect.halves for suspect in suspects}
            continue
        if short is None and (weak := _weak_bonds(isle, members, gathered) - opened):
            bleeders |= weak
            opened |= weak
            continue
        if short is None or len(found) >= ROUNDS:
            break
        found.append(short)
        if not cut:
            break
        opened |= frozenset(cut)
    ordinary = {ref: short for short in found for ref in short.chain if ref in opened}
    found += _harmless(isle, members, found)
    sides = assign(isle, members, gathered, declaration)
    domains, domain_of = named(isle, members, sides, declaration)
    crossed, idle = crossings(isle, domain_of, domains, suspects, ordinary, bleeders)
    barriers = separations(design.name, domains, crossed)
    inactive = tuple(ref for ref in _inactive(isle) if not any(ref in short.parts for short in found))
    questions = (
        *(_isolator(design, suspect) for suspect in suspects),
        *(_hidden(design, culprit) for culprit in hidden),
        *sides.questions,
    )
    return Isolation(domains, domain_of, crossed, barriers, tuple(found), questions, tuple(isle.links), inactive, idle)


def _weak_bonds(isle: Islands, members: Mapping[str, list[str]], gathered: Mapping[str, evidence.Evidence]) -> frozenset[str]:
    """Resistors that alone tie a circuit to protective earth: they bleed charge and bond nothing, a fault current least of all."""
    found: set[str] = set()
    mains = set(evidence.on_mains(gathered))
    for island, piece in gathered.items():
        if not piece.is_earth or island in mains:
            continue
        weak = {ref for net in members[island] for ref in isle.live[net] if _bonds_nothing(isle, ref)}
        if not weak or is_stub(isle, members[island], frozenset({"resistor"})):
            continue
        trial = build(isle.design, isle.choice, isle.opened | weak, isle.halved)
        seeds = {trial.island(net) for net in _seed_nets(isle, island, piece.earth.values())}
        if is_stub(trial, [net for net in members[island] if trial.island(net) in seeds], frozenset({"resistor"})):
            found |= {ref for ref in weak if len({trial.island(net) in seeds for net in _ends(trial, ref)}) > 1}
    return frozenset(found)


def _bonds_nothing(isle: Islands, ref: str) -> bool:
    value = isle.choice[ref].value
    return isle.kind(ref) == "resistor" and isle.design.parts[ref].fitted and (value is None or float(value.value) > BOND)


def _ends(isle: Islands, ref: str) -> list[str]:
    return [net for net in isle.design.parts[ref].nets() if net in isle.live and net not in isle.links]


def _inactive(isle: Islands) -> list[str]:
    """Insulating parts with two pin groups or more on live nets, all on one island."""
    return [
        ref
        for ref, candidate in isle.choice.items()
        if (candidate.insulating or ref in isle.halved)
        and isle.design.parts[ref].fitted
        and ref not in isle.opened
        and len(isle.sides[ref]) > 1
        and len(isle.part_islands(ref)) == 1
    ]


def _next_short(
    isle: Islands, members: Mapping[str, list[str]], gathered: Mapping[str, evidence.Evidence], declaration: Declaration
) -> tuple[Short | None, tuple[str, ...], tuple[str, ...]]:
    """The next fault that joins what should be apart, the parts to open so that the rest can be judged, and instead of both a
    circuit in a package that would be the culprit: more likely it insulates and was taken for an ordinary one."""
    for reason, one, two in _opposed(isle, members, gathered, declaration):
        return (*_joined(isle, members, reason, one, two), ())
    inactive = _inactive(isle)
    hazardous = set(evidence.on_mains(gathered))
    for culprit in shorts.find(isle, members, inactive, _active(isle))[:WEIGHED]:
        if culprit.chain and (telling := _telling(isle, culprit, hazardous)):
            return _found(isle, members, culprit, telling)
    exposed = {island: nets for island, nets in members.items() if island in hazardous}
    if len(isle.live) > NETS_WEIGHED:
        return None, (), ()
    partly = [ref for ref in _active(isle) if isle.kind(ref) in TRANSFORMERS and not hazardous.isdisjoint(isle.part_islands(ref))]
    for culprit in shorts.find(isle, exposed, partly, single=True)[:WEIGHED]:
        if telling := _telling(isle, culprit, hazardous, reached=True):
            return _found(isle, members, culprit, telling)
    for culprit in shorts.cuts(isle, exposed, inactive):
        if telling := _telling(isle, culprit, hazardous, reached=True):
            return _found(isle, members, culprit, telling)
    return None, (), ()


def _found(
    isle: Islands, members: Mapping[str, list[str]], culprit: Culprit, telling: Sequence[str]
) -> tuple[Short | None, tuple[str, ...], tuple[str, ...]]:
    if culprit.cut:
        return _short(isle, members, culprit, culprit.chain), culprit.chain, ()
    clean = min(shorts.interleaved(isle, culprit.splits[ref]) for ref in telling)
    likely = _to_open(isle, [ref for ref in telling if shorts.interleaved(isle, culprit.splits[ref]) == clean])
    if _doubtful(isle, likely[0]) and halves(isle.design.parts[likely[0]], isle.choice[likely[0]]):
        return None, (), likely[:1]
    return _short(isle, members, culprit, likely), likely[:1], ()


def _telling(isle: Islands, culprit: Culprit, hazardous: set[str], reached: bool = False) -> tuple[str, ...]:
    """The links of a chain that are a fault, not the way the circuit is meant; of a cut all its parts or none.

    On the mains: those that leave only one of the sides on it when they alone are open, as a planted part would be taken out
    (opening a whole chain would also take away what feeds a side). Elsewhere: all, when two insulating parts and more come
    apart. reached: the side that is no mains must also lead to a connector.
    """
    first, _ = culprit.split[culprit.parts[0]]
    if isle.island(first[0]) not in hazardous:
        return culprit.chain if len(culprit.parts) > 1 else ()
    if culprit.cut:
        simple = len(culprit.parts) > 1 or any(shorts.is_simple(isle, ref) for ref in culprit.chain)
        return culprit.chain if simple and _differ(isle, culprit.split, frozenset(culprit.chain), reached) else ()
    links = shorts.by_suspicion(isle, culprit.chain)[: CHAIN_WEIGHED if len(isle.live) <= NETS_WEIGHED else 1]
    found = []
    for ref in links:
        likely = shorts.is_simple(isle, ref) or _doubtful(isle, ref)
        if (likely or len(culprit.parts) > 1) and _differ(isle, culprit.splits[ref], frozenset((ref,)), reached, every=not likely):
            found.append(ref)
    return tuple(found)


def _doubtful(isle: Islands, ref: str) -> bool:
    """Whether a culprit may be an insulating part nobody knows: an unlisted circuit, or an off-line controller (some insulate)."""
    candidate = isle.choice[ref]
    return candidate.kind in DOUBTED and (not candidate.listed or "offline" in candidate.attributes)


def _active(isle: Islands) -> list[str]:
    """Insulating parts between islands that still have four live nets or more: some of their sides may be shorted."""
    return [
        ref
        for ref, candidate in isle.choice.items()
        if candidate.insulating and isle.design.parts[ref].fitted and len(isle.sides[ref]) > 3 and len(isle.part_islands(ref)) > 1
    ]


def _to_open(isle: Islands, chain: Sequence[str]) -> tuple[str, ...]:
    """The likely links of a series chain, first the one to take out: it leaves fewest connectors that carry both sides."""
    likely = shorts.likeliest(isle, chain)
    if not 1 < len(likely) <= CHAIN_WEIGHED or len(isle.live) > NETS_WEIGHED:
        return likely
    split: dict[str, int] = {}
    for ref in likely:
        trial = build(isle.design, isle.choice, isle.opened | {ref}, isle.halved)
        split[ref] = sum(
            len({trial.island(pin.net) for pin in part.pins if pin.net in trial.live and pin.net not in isle.links}) > 1
            for part in isle.design.parts.values()
            if part.fitted and isle.kind(part.ref) in CONNECTORS and len(isle.part_islands(part.ref)) == 1
        )
    return tuple(sorted(likely, key=lambda ref: split[ref]))


def _opposed(
    isle: Islands, members: Mapping[str, list[str]], gathered: Mapping[str, evidence.Evidence], declaration: Declaration
) -> list[tuple[str, list[str], list[str]]]:
    """Groups of nets on one island that evidence or the declaration says are two circuits: reason, nets of one, nets of the
    other."""
    found = []
    seeds: dict[str, tuple[str, str]] = {}
    for domain in declaration.domains.values():
        for net in domain.nets:
            if net in isle.live and net not in isle.links:
                island = isle.island(net)
                if island in seeds and seeds[island][0] != domain.name:
                    other, first = seeds[island]
                    found.append((f"the declaration keeps {other} and {domain.name} apart", [first], [net]))
                seeds.setdefault(island, (domain.name, net))
    bonded = {net for domain in declaration.domains.values() if domain.side == "earth" for net in domain.nets}
    for island in evidence.on_mains(gathered):
        piece = gathered[island]
        if piece.is_earth and not bonded & set(members[island]):
            earth = _seed_nets(isle, island, piece.earth.values())
            mains = [net for net in _seed_nets(isle, island, piece.mains.values()) if net not in earth]
            if earth and mains:
                found.append(("protective earth and the mains conductors are two circuits", mains[:1], earth[:1]))
    return found


def _seed_nets(isle: Islands, island: str, pieces) -> list[str]:  # type: ignore[no-untyped-def]
    """Nets the strongest pieces of evidence point at: the net itself, or those of the part on this island."""
    nets: dict[str, None] = {}
    for weight, sentence, fact in sorted(pieces, key=lambda piece: -piece[0]):
        if fact.attribute == "net":
            nets[str(fact.value)] = None
        elif weight == evidence.STRONG:
            for pin in isle.design.parts[str(fact.value)].pins:
                if pin.net in isle.live and isle.island(pin.net) == island and f".{pin.number}" in sentence:
                    nets[pin.net] = None
            for net in isle.design.parts[str(fact.value)].nets():
                if net in isle.live and isle.island(net) == island and "contact" not in sentence:
                    nets[net] = None
    return [net for net in nets if isle.island(net) == island]


def _joined(
    isle: Islands, members: Mapping[str, list[str]], reason: str, one: list[str], two: list[str]
) -> tuple[Short, tuple[str, ...]]:
    nets = members[isle.island(one[0])]
    chain, cut = shorts.between(isle, nets, one, two)
    way = shorts.path(isle, one, two, nets)
    likely = chain if cut or not chain else _to_open(isle, _freeing(isle, chain))
    facts = tuple(isle.design.parts[ref].fact for ref in likely) + tuple(isle.design.nets[net].fact for net in (one[0], two[0]))
    step = Step(
        f"{reason}, yet direct current flows from {one[0]} to {two[0]} through {_through(way)}", facts, result=" - ".join(way)
    )
    return Short(likely, (), (one[0], two[0]), way, True, step), likely if cut else likely[:1]


def _freeing(isle: Islands, chain: Sequence[str]) -> list[str]:
    """The simple links of a chain that, taken out, let most insulating parts insulate: the bond of a secondary to earth none."""
    links = [ref for ref in shorts.by_suspicion(isle, chain) if shorts.is_simple(isle, ref)][:CHAIN_WEIGHED]
    if len(links) < 2 or len(isle.live) > NETS_WEIGHED:
        return links or list(chain)
    freed = {}
    for ref in links:
        trial = build(isle.design, isle.choice, isle.opened | {ref}, isle.halved)
        settle_windings(trial)
        settle_capacitors(trial)
        freed[ref] = sum(len(trial.part_islands(other)) > 1 for other, part in isle.choice.items() if part.insulating)
    return [ref for ref in links if freed[ref] == max(freed.values())]


def _through(way: Sequence[str]) -> str:
    parts = way[1::2]
    return ", ".join(parts) if parts else "one net"


def _differ(isle: Islands, split: Mapping[str, shorts.Split], opened: frozenset[str], reached: bool, every: bool = False) -> bool:
    """Whether one side of an insulating part hangs on the mains and the other does not once these parts are open.

    reached: that other side must lead to a connector. every: each of the insulating parts must say so.
    """
    trial = build(isle.design, isle.choice, isle.opened | opened, isle.halved)
    settle_windings(trial)
    settle_capacitors(trial)
    members = trial.members()
    hazardous = set(evidence.on_mains(evidence.gather(trial, members)))
    told = []
    for sides in split.values():
        homes = [{trial.island(net) for net in side if net not in trial.links} for side in sides]
        hazard = [not hazardous.isdisjoint(home) for home in homes]
        free = homes[hazard.index(False)] if hazard[0] != hazard[1] else set()
        if reached:
            free = {home for home in free if any(isle.kind(ref) in CONNECTORS for net in members[home] for ref in isle.live[net])}
        told.append(bool(free))
    return all(told) if every else any(told)


def _short(isle: Islands, members: Mapping[str, list[str]], culprit: Culprit, likely: tuple[str, ...]) -> Short:
    part = culprit.parts[0]
    first, second = culprit.splits.get(likely[0], culprit.split)[part]
    way = shorts.path(isle, first, second, members[isle.island(first[0])])
    facts = tuple(isle.design.parts[ref].fact for ref in (*likely, *culprit.parts[:6]))
    count = len(culprit.parts)
    if culprit.cut:
        taken = f"{' and '.join(culprit.chain)} all"
    else:
        taken = " - ".join(culprit.chain) if len(culprit.chain) == 1 else "any one of " + " - ".join(culprit.chain)
    step = Step(
        f"with {taken} taken out, {count} insulating part{'s' * (count > 1)} "
        f"({', '.join(culprit.parts[:6])}{' ...' * (count > 6)}) separate{'s' * (count == 1)} two circuits; "
        f"otherwise {'it does' if count == 1 else 'they do'} not",
        facts,
        result=" - ".join(way),
    )
    nets = way[:1] + way[-1:] if way else (first[0], second[0])
    return Short(likely, culprit.parts, nets, way, True, step)


def _harmless(isle: Islands, members: Mapping[str, list[str]], known: Sequence[Short]) -> list[Short]:
    """Insulating parts that insulate nothing, without evidence that they should: one piece of information each."""
    found = []
    inactive = [ref for ref in _inactive(isle) if not any(ref in short.parts for short in known)]
    for culprit in shorts.find(isle, members, inactive):
        part = culprit.parts[0]
        facts = tuple(isle.design.parts[ref].fact for ref in (*culprit.chain[:4], *culprit.parts[:6]))
        if culprit.chain:
            first, second = culprit.split[part]
            way = shorts.path(isle, first, second, members[isle.island(first[0])])
            joined = f"{' and '.join(culprit.chain)} join" if culprit.cut else f"{' - '.join(culprit.chain)} joins"
            text = f"{joined} the two sides of {', '.join(culprit.parts)}"
            found.append(Short(culprit.chain, culprit.parts, way[:1] + way[-1:], way, False, Step(text, facts)))
        else:
            faulty = _net_opposes(isle, culprit)
            text = f"net {', '.join(culprit.nets)} is on both sides of {', '.join(culprit.parts)}"
            found.append(Short((), culprit.parts, culprit.nets, culprit.nets[:1], faulty, Step(text, facts)))
    return found


def _net_opposes(isle: Islands, culprit: Culprit) -> bool:
    """Whether a net on both sides of insulating parts defeats them.

    Without that net one side hangs on the mains and the other does not; or two parts and more share it where nothing is
    hazardous on either side (inside a hazardous circuit several couplers may well share a return on purpose).
    """
    hazardous = set(evidence.on_mains(evidence.gather(isle, isle.members())))
    if isle.island(culprit.nets[0]) not in hazardous:
        return len(culprit.parts) > 1
    trial = build(isle.design, isle.choice, isle.opened, isle.halved, frozenset(culprit.nets))
    settle_windings(trial)
    settle_capacitors(trial)
    still = set(evidence.on_mains(evidence.gather(trial, trial.members())))
    for ref in culprit.parts:
        sides = [{trial.island(net) in still for net in side} for side in trial.sides[ref]]
        if {True} in sides and {False} in sides:
            return True
    return False


def _join_alike(isle: Islands, declaration: Declaration) -> None:
    """Make one what is one without a conductor on the board: nets of a declared domain, all mains wires, all protective earth."""
    declared: dict[str, str] = {}
    for domain in declaration.domains.values():
        nets = [net for net in domain.nets if net in isle.live and net not in isle.links]
        for net in nets:
            declared[net] = domain.name
            isle.bond(nets[0], net)
    members = isle.members()
    owner = {isle.island(net): name for net, name in declared.items()}
    gathered = evidence.gather(isle, members)
    mains = [island for island in evidence.on_mains(gathered) if not gathered[island].is_earth]
    for alike in (mains, [island for island, piece in gathered.items() if piece.is_earth]):
        names = {owner[island] for island in alike if island in owner}
        # the very nets that tell it: where a short joins another circuit to an island, that circuit's nets are not bonded
        ends = [_telling_net(isle, island, gathered[island]) for island in alike]
        for end in ends[1:] if len(names) <= 1 else ():
            isle.bond(ends[0], end)


def _telling_net(isle: Islands, island: str, piece: evidence.Evidence) -> str:
    nets = _seed_nets(isle, island, (piece.earth if piece.is_earth else piece.mains).values())
    return nets[0] if nets else island


def _isolator(design: Design, suspect: unlisted.Unlisted) -> Question:
    low, high = (f"{half[0]} to {half[-1]}" for half in suspect.halves)
    text = (
        f"{suspect.ref} has {suspect.nets[0]} nets on the side of pins {low} and {suspect.nets[1]} on that of pins {high}, "
        "and nothing else joins them: is it an isolator?"
    )
    part = design.parts[suspect.ref]
    return Question(
        "isolator",
        text,
        (suspect.ref,),
        (),
        "kind",
        f"parts: {{{suspect.ref}: {{kind: ...}}}} in the declaration, or kind in a parts file",
        (("an insulating kind such as digital-isolator", "pass"), ("an ordinary kind such as ic", "fail")),
        Step(text, (part.fact, *part.facts[:4])),
    )


def _hidden(design: Design, culprit: Culprit) -> Question:
    """Parts of unknown type that would separate two circuits if one simple part were not there."""
    text = (
        f"without {' - '.join(culprit.chain)}, {', '.join(culprit.parts[:6])} would lie between two circuits that nothing else "
        "joins: are they isolators?"
    )
    facts = tuple(design.parts[ref].fact for ref in (*culprit.chain[:3], *culprit.parts[:6]))
    return Question(
        "hidden-isolators",
        text,
        (*culprit.chain, *culprit.parts),
        (),
        "kind",
        f"parts: {{{culprit.parts[0]}: {{kind: ...}}}} in the declaration, or kind in a parts file",
        (
            ("an insulating kind such as digital-isolator", "fail"),
            ("an ordinary kind such as ic", "pass"),
        ),
        Step(text, facts),
    )
