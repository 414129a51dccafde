"""Names for domains, and which islands are domains at all."""

from __future__ import annotations

from collections.abc import Mapping

from checker.isolation.islands import Islands, is_stub
from checker.isolation.sides import Side, Sides
from checker.model.candidate import CONNECTORS, MECHANICAL
from checker.model.declaration import Declaration
from checker.model.domain import Domain
from checker.model.names import ground_like, supply_volts, tokens
from checker.model.order import natural


def named(
    isle: Islands, members: Mapping[str, list[str]], sides: Sides, declaration: Declaration
) -> tuple[dict[str, Domain], dict[str, str]]:
    """Domains by name, and net -> domain name. A conductor that nothing crosses, loads or names is no domain."""
    domains: dict[str, Domain] = {}
    domain_of: dict[str, str] = {}
    parts = _parts(isle)
    crossing = _crossing_islands(isle)
    ranked = sorted(members, key=lambda island: (_rank(sides.of[island]), isle.union.order[island]))
    for island in ranked:
        nets, side = members[island], sides.of[island]
        if not _is_domain(isle, island, nets, side, crossing):
            continue
        name, by_person = _name(isle, nets, side, declaration)
        name = name.replace("|", "_")
        taken, count = name, 2
        while taken in domains:
            taken, count = f"{name}-{count}", count + 1
        domains[taken] = Domain(
            taken,
            side.side,
            tuple(nets),
            tuple(sorted(parts.get(island, ()), key=natural)),
            side.step,
            side.earthed,
            side.hazard,
            by_person and taken == name,
            side.declared.accessible if side.declared else None,
            side.step.facts(),
        )
        domain_of.update(dict.fromkeys(nets, taken))
    return domains, domain_of


def _rank(side: Side) -> int:
    return {"primary": 0, "earth": 1, "secondary": 2}.get(side.side, 3)


def _parts(isle: Islands) -> dict[str, dict[str, None]]:
    found: dict[str, dict[str, None]] = {}
    for net, refs in isle.live.items():
        if net not in isle.links:
            found.setdefault(isle.island(net), {}).update(dict.fromkeys(refs))
    return found


def _crossing_islands(isle: Islands) -> set[str]:
    """Islands that an insulating part or a capacitor has one of its sides on."""
    found: set[str] = set()
    for ref, candidate in isle.choice.items():
        if candidate.insulating or ref in isle.halved or ref in isle.opened or candidate.kind == "capacitor":
            islands = isle.part_islands(ref)
            if len(islands) > 1 or (
                islands and candidate.kind == "capacitor" and any(net in isle.links for net in isle.design.parts[ref].nets())
            ):
                found.update(islands)
    return found


def _is_domain(isle: Islands, island: str, nets: list[str], side: Side, crossing: set[str]) -> bool:
    if side.declared is not None or side.hazard or side.side == "earth":
        return True
    fitted = [
        net for net in nets if sum(isle.design.parts[ref].fitted and isle.kind(ref) not in MECHANICAL for ref in isle.live[net]) > 1
    ]
    return bool(fitted) and (island in crossing or not is_stub(isle, nets))


def _name(isle: Islands, nets: list[str], side: Side, declaration: Declaration) -> tuple[str, bool]:
    """(name, whether a person made it)."""
    if side.declared is not None:
        return side.declared.name, True
    if side.hazard == "mains":
        return "mains", True
    if side.side == "earth":
        return "earth", True
    if side.hazard == "dc":
        return "supply", True
    here = set(nets)
    for output in declaration.outputs:
        for net in (output.net, output.return_net):
            if net in here:
                return _short(net), True
    written = [net for net in nets if not isle.design.nets[net].automatic]
    outlet = [net for net in written if any(isle.kind(ref) in CONNECTORS for ref in isle.live[net])]
    for choice in (
        [net for net in outlet if _is_rail(net)],
        [net for net in written if _is_rail(net)],
        [net for net in outlet if ground_like(net)],
        [net for net in written if ground_like(net)],
    ):
        if choice:
            return _short(min(choice, key=lambda net: (-len(isle.live[net]), natural(net)))), True
    if written:
        return "island-" + _short(min(written, key=natural)), True
    return "island-" + min(nets, key=natural), False


def _short(net: str) -> str:
    return net.rsplit("/", 1)[-1] or net


def _is_rail(net: str) -> bool:
    return supply_volts(net) is not None or bool({"VOUT", "VCC", "VDD", "OUT", "V+", "VO", "VBUS"} & set(tokens(net)))
