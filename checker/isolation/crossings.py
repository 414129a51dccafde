"""What lies across the domains: insulating parts, chains of capacitors, and ordinary parts that should not be there."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from itertools import combinations

from checker.errors import InputError
from checker.isolation.groups import LIMITERS
from checker.isolation.islands import Islands
from checker.isolation.unlisted import Unlisted
from checker.limits import BARRIERS
from checker.model.candidate import CONNECTORS, MECHANICAL
from checker.model.domain import Crossing, Domain, Short
from checker.model.order import natural
from checker.model.separation import Separation
from checker.model.step import Step

CHAIN_LENGTH = 8  # capacitors in one chain
CHAINS = 64  # chains through one group of links

_SIDE_ORDER = {"primary": 0, "earth": 1, "secondary": 2, "floating": 3}


def crossings(
    isle: Islands,
    domain_of: Mapping[str, str],
    domains: Mapping[str, Domain],
    suspects: Sequence[Unlisted],
    ordinary: Mapping[str, Short],
    bleeders: Collection[str] = (),
) -> tuple[tuple[Crossing, ...], tuple[Crossing, ...]]:
    """(crossings, not-fitted parts that would cross), each in file order."""
    found: list[Crossing] = []
    idle: list[Crossing] = []
    unlisted = {suspect.ref for suspect in suspects}
    # primary first, then earth, secondary, floating; equals in the order of the domains
    rank = {name: (_SIDE_ORDER.get(domain.side, 4), at) for at, (name, domain) in enumerate(domains.items())}
    chains = _chains(isle, domain_of, rank)
    for ref, part in isle.design.parts.items():
        candidate = isle.choice[ref]
        kind = candidate.kind
        if ref in chains:
            found += chains[ref]
            continue
        if (kind in CONNECTORS and "magnetics" not in candidate.attributes) or kind in MECHANICAL:
            continue
        by_domain: dict[str, dict[str, None]] = {}
        for pin in part.pins:
            if pin.net is not None and pin.net in domain_of:
                by_domain.setdefault(domain_of[pin.net], {})[pin.number] = None
        if kind in CONNECTORS:
            # the shield and the lamps of a jack with transformers inside are no winding of it
            by_domain = {name: pins for name, pins in by_domain.items() if len(pins) > 1}
        if len(by_domain) < 2:
            continue
        if ref in bleeders:
            how, step = "bleeder", Step(f"resistor {ref} between {' and '.join(by_domain)} bonds nothing", (part.fact,))
        elif ref in ordinary:
            how, step = "ordinary", ordinary[ref].step
        elif candidate.insulating or ref in unlisted or kind in CONNECTORS:
            how, step = "insulating", Step(f"{ref} has pins in {' and '.join(by_domain)}: {candidate.because}", (part.fact,))
        elif kind == "capacitor":
            how, step = "capacitor", Step(f"capacitor {ref} hangs between {' and '.join(by_domain)}", (part.fact,))
        elif kind in LIMITERS:
            how, step = "limiter", Step(f"{kind} {ref} hangs between {' and '.join(by_domain)}", (part.fact,))
        else:
            how, step = "ordinary", Step(f"{kind} {ref} has pins in {' and '.join(by_domain)}", (part.fact,))
        target = found if part.fitted else idle
        for pair in combinations(sorted(by_domain, key=rank.__getitem__), 2):
            sides = (tuple(by_domain[pair[0]]), tuple(by_domain[pair[1]]))
            target.append(Crossing(ref, how, pair, sides, (ref,), ref not in unlisted, step))
    return tuple(found), tuple(idle)


def _chains(isle: Islands, domain_of: Mapping[str, str], rank: Mapping[str, tuple[int, int]]) -> dict[str, list[Crossing]]:
    """reference -> its crossings as a member of chains through links."""
    found: dict[str, list[Crossing]] = {}
    starts: dict[str, list[tuple[str, str]]] = {}
    for link in isle.links:
        for ref in isle.live[link]:
            for net in isle.design.parts[ref].nets():
                if net in domain_of:
                    starts.setdefault(ref, []).append((net, link))
    seen: set[frozenset[str]] = set()
    for ref in (ref for ref in isle.design.parts if ref in starts):
        for net, link in starts[ref]:
            for chain, end in _paths(isle, domain_of, ref, link, domain_of[net]):
                if frozenset(chain) in seen:
                    continue
                seen.add(frozenset(chain))
                pair = sorted((domain_of[net], end), key=rank.__getitem__)
                ordered = chain if pair[0] == domain_of[net] else chain[::-1]
                facts = tuple(isle.design.parts[member].fact for member in ordered)
                step = Step(f"{' - '.join(ordered)} in series between {pair[0]} and {pair[1]}", facts)
                for member in ordered:
                    pins = tuple(pin.number for pin in isle.design.parts[member].pins)
                    crossing = Crossing(member, "capacitor", (pair[0], pair[1]), (pins[:1], pins[1:]), ordered, True, step)
                    found.setdefault(member, []).append(crossing)
    return found


def _paths(isle: Islands, domain_of: Mapping[str, str], first: str, link: str, home: str) -> list[tuple[tuple[str, ...], str]]:
    """Series chains from a domain through links to another domain: (references, name of the far domain)."""
    found: list[tuple[tuple[str, ...], str]] = []
    stack: list[tuple[tuple[str, ...], str]] = [((first,), link)]
    while stack and len(found) < CHAINS:
        chain, at = stack.pop()
        for ref in isle.live[at]:
            if ref in chain:
                continue
            for net in isle.design.parts[ref].nets():
                if net == at:
                    continue
                if net in domain_of:
                    if domain_of[net] != home:
                        found.append(((*chain, ref), domain_of[net]))
                elif net in isle.links and len(chain) < CHAIN_LENGTH:
                    stack.append(((*chain, ref), net))
    return found


def separations(design: str, domains: Mapping[str, Domain], crossed: Sequence[Crossing]) -> tuple[Separation, ...]:
    """A barrier for every pair of domains that something crosses, in the order of the domains."""
    pairs: dict[tuple[str, str], list[Crossing]] = {}
    for crossing in crossed:
        pairs.setdefault(crossing.between, []).append(crossing)
    if len(pairs) > BARRIERS:
        raise InputError(design, "too many pairs of circuits", found=f"{len(pairs):,} barriers", expected=f"at most {BARRIERS:,}")
    position = {name: at for at, name in enumerate(domains)}
    found = []
    for pair in sorted(pairs, key=lambda pair: (position[pair[0]], position[pair[1]])):
        crossing_here = pairs[pair]
        refs = tuple(sorted({c.part for c in crossing_here}, key=natural))
        chains = tuple(dict.fromkeys(c.chain for c in crossing_here if c.how in ("capacitor", "ordinary", "limiter")))
        one, two = domains[pair[0]], domains[pair[1]]
        step = Step(
            f"{len(refs)} part{'s' * (len(refs) != 1)} lie between {pair[0]} and {pair[1]}",
            tuple(c.step for c in crossing_here[:12]),
        )
        found.append(Separation(f"{pair[0]}|{pair[1]}", pair, "barrier", refs, chains, one.named and two.named, step))
    return tuple(found)
