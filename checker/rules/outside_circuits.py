"""Circuits that contacts of relays switch and that end at connectors: what flows there comes from outside the board."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.candidate import CONNECTORS, MECHANICAL
from checker.model.domain import Domain
from checker.model.rule import Analysis
from checker.model.terminals import coil

_PASSING = CONNECTORS | MECHANICAL | {"relay", "fuse", "resettable-fuse", "varistor", "resistor", "capacitor", "switch", "gas-tube"}


@dataclass(frozen=True, slots=True)
class Outside:
    """relays, connectors: references. domains: names of the circuits."""

    relays: tuple[str, ...]
    connectors: tuple[str, ...]
    domains: tuple[str, ...]


def outside(analysis: Analysis) -> Outside | None:
    """All of them together, None without any. Circuits that the declaration names are left out: somebody has thought of them."""
    found = {domain.name: domain for domain in analysis.isolation.domains.values() if _switched_outside(analysis, domain)}
    if not found:
        return None

    def all_of(kinds: frozenset[str]) -> Iterator[str]:
        for domain in found.values():
            yield from (ref for ref in domain.parts if analysis.kind(ref) in kinds and analysis.design.parts[ref].fitted)

    relays = dict.fromkeys(all_of(frozenset({"relay"})))
    return Outside(tuple(relays), tuple(dict.fromkeys(all_of(CONNECTORS))), tuple(found))


def _switched_outside(analysis: Analysis, domain: Domain) -> bool:
    if domain.hazard or domain.earthed or domain.side != "secondary" or _declared(analysis, domain):
        return False
    parts = [ref for ref in domain.parts if analysis.design.parts[ref].fitted]
    kinds = {analysis.kind(ref) for ref in parts}
    coils = {net for ref in parts if analysis.kind(ref) == "relay" for net in coil(analysis.design.parts[ref])}
    return kinds <= _PASSING and "relay" in kinds and bool(kinds & {"connector"}) and not coils & set(domain.nets)


def _declared(analysis: Analysis, domain: Domain) -> bool:
    said = analysis.declaration
    named = {name for barrier in said.barriers for name in barrier.between}
    named |= {name for name, declared in said.domains.items() if declared.side}
    return domain.name in named or not {output.net for output in said.outputs}.isdisjoint(domain.nets)
