"""Which island is the hazardous side, which is earth, which a person may touch (step 8 of finding domains).

The declaration first, then scored evidence. Without a known source the islands are equals: nothing is ranked by size or name.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from checker.isolation.evidence import Evidence, on_mains
from checker.isolation.groups import TRANSFORMERS
from checker.isolation.islands import Islands, is_stub
from checker.model.candidate import CONNECTORS
from checker.model.declaration import Declaration, DeclaredDomain, Supply
from checker.model.domain import Question
from checker.model.fact import Fact
from checker.model.names import entry_like, supply_volts
from checker.model.step import Step

HARMLESS = 60.0  # V d.c., class ES1 (IEC 62368-1:2018 table 4)


@dataclass(frozen=True, slots=True)
class Side:
    """What one island is: side, the hazard it carries ("mains", "dc", ""), whether earthed, the declared domain, and why."""

    side: str
    step: Step
    hazard: str = ""
    earthed: bool = False
    declared: DeclaredDomain | None = None


@dataclass(slots=True)
class Sides:
    """Island -> Side, and what could not be told."""

    of: dict[str, Side] = field(default_factory=dict)
    questions: list[Question] = field(default_factory=list)


def assign(isle: Islands, members: Mapping[str, list[str]], gathered: Mapping[str, Evidence], declaration: Declaration) -> Sides:
    """The side of every island."""
    sides = Sides()
    declared = {
        isle.island(net): domain
        for domain in declaration.domains.values()
        for net in domain.nets
        if net in isle.live and net not in isle.links
    }
    hazards = _hazards(isle, members, gathered, declaration, declared, sides)
    known = bool(hazards)
    for island in members:
        piece = gathered[island]
        domain = declared.get(island)
        earthed = piece.is_earth or (domain is not None and domain.side == "earth")
        if domain is not None and domain.side:
            hazard = hazards.get(island, ("", ""))[0]
            fact = Fact("domain", domain.name, domain.source)
            sides.of[island] = Side(
                domain.side,
                Step(f"declared as {domain.side}", (fact,)),
                hazard or _supply_hazard(domain.side, declaration),
                earthed,
                domain,
            )
        elif island in hazards:
            hazard, because = hazards[island]
            facts = tuple(fact for _, _, fact in piece.mains.values()) or _some_facts(isle, members[island])
            sides.of[island] = Side("primary", Step(because, facts), hazard, earthed, domain)
        elif earthed and is_stub(isle, members[island], frozenset({"resistor"})):
            facts = tuple(fact for _, _, fact in piece.earth.values())
            sides.of[island] = Side("earth", Step(_reasons(piece.earth.values()), facts), "", True, domain)
        elif known:
            text = "not connected to the hazardous side" + (
                "; bonded to protective earth: " + _reasons(piece.earth.values()) if earthed else ""
            )
            facts = tuple(fact for _, _, fact in piece.earth.values()) if earthed else ()
            sides.of[island] = Side("secondary", Step(text, facts or _some_facts(isle, members[island])), "", earthed, domain)
        else:
            text = "no source is known, so this side is an equal of the others"
            sides.of[island] = Side(
                "earth" if earthed else "floating", Step(text, _some_facts(isle, members[island])), "", earthed, domain
            )
    return sides


def _reasons(pieces) -> str:  # type: ignore[no-untyped-def]
    return "; ".join(sentence for _, sentence, _ in sorted(pieces, key=lambda piece: -piece[0])[:4])


def _some_facts(isle: Islands, nets: Sequence[str]) -> tuple[Fact, ...]:
    return tuple(isle.design.nets[net].fact for net in nets[:3])


def _supply_hazard(side: str, declaration: Declaration) -> str:
    if side != "primary" or not declaration.supplies:
        return ""
    return "mains" if any(supply.kind == "mains" for supply in declaration.supplies) else "dc"


def _hazards(
    isle: Islands,
    members: Mapping[str, list[str]],
    gathered: Mapping[str, Evidence],
    declaration: Declaration,
    declared: Mapping[str, DeclaredDomain],
    sides: Sides,
) -> dict[str, tuple[str, str]]:
    """Island -> (hazard, sentence) for the islands a hazardous source feeds."""
    if declaration.no_supply is not None:
        return {}
    found: dict[str, tuple[str, str]] = {}
    allowed = [island for island in members if island not in declared or declared[island].side in ("", "primary")]
    supplies = {supply.kind: supply for supply in declaration.supplies}
    for domain_island, domain in declared.items():
        if domain.side == "primary":
            found[domain_island] = (_supply_hazard("primary", declaration), f"declared as the primary domain {domain.name}")
    for island in on_mains(gathered):
        if island in allowed and ("mains" in supplies or not supplies):
            found.setdefault(island, ("mains", "mains: " + _reasons(gathered[island].mains.values())))
    if "mains" in supplies and not any(hazard == "mains" for hazard, _ in found.values()):
        _locate_mains(isle, members, gathered, allowed, supplies["mains"], found, sides)
    # beside the mains a low d.c. supply feeds a side of its own, which is no hazard: where it enters decides nothing
    harmless = "mains" in supplies and "dc" in supplies and supplies["dc"].voltage.high <= HARMLESS
    if "dc" in supplies and not harmless and not any(hazard == "dc" for hazard, _ in found.values()):
        free = [island for island in allowed if island not in found]
        _locate_direct(isle, members, free, supplies["dc"], declaration, found, sides)
    if not supplies and not found:
        for island in allowed:
            if gathered[island].voltage:
                found[island] = ("dc", _reasons(gathered[island].voltage.values()))
    return found


def _locate_mains(
    isle: Islands,
    members: Mapping[str, list[str]],
    gathered: Mapping[str, Evidence],
    allowed: Sequence[str],
    supply: Supply,
    found: dict[str, tuple[str, str]],
    sides: Sides,
) -> None:
    """The declaration says mains and no island proves it alone: the one with most evidence, if there is one."""
    scores = {island: gathered[island].score for island in allowed if gathered[island].score}
    _take_best(isle, members, scores, "mains", supply, found, sides, lambda island: _reasons(gathered[island].mains.values()))


def _locate_direct(
    isle: Islands,
    members: Mapping[str, list[str]],
    allowed: Sequence[str],
    supply: Supply,
    declaration: Declaration,
    found: dict[str, tuple[str, str]],
    sides: Sides,
) -> None:
    """Where a declared d.c. supply enters: connector nets named for it, converter inputs, the switched winding; never a
    declared output."""
    outputs = {net for output in declaration.outputs for net in (output.net, output.return_net)}
    barred = {isle.island(net) for net in outputs if net in isle.live and net not in isle.links}
    scores: dict[str, int] = {}
    why: dict[str, list[str]] = {}

    def add(net: str | None, points: int, because: str) -> None:
        if net in isle.live and net not in isle.links and (island := isle.island(net)) in allowed and island not in barred:
            if because not in why.setdefault(island, []):
                why[island].append(because)
                scores[island] = scores.get(island, 0) + points

    for ref, candidate in isle.choice.items():
        part = isle.design.parts[ref]
        if not part.fitted:
            continue
        if candidate.kind in CONNECTORS:
            for pin in part.pins:
                volts = supply_volts(pin.net or "")
                if volts is not None and supply.voltage.low <= volts <= supply.voltage.high:
                    add(pin.net, 3, f"connector {ref} carries {pin.net}")
                elif entry_like(pin.net or "") or entry_like(pin.name):
                    add(pin.net, 2, f"connector {ref} carries an input ({pin.net})")
        elif candidate.kind == "isolated-module" and len(isle.sides[ref]) >= 2:
            add(isle.sides[ref][0][0], 2, f"input of module {ref}")
        elif candidate.kind in ("mosfet", "controller", "regulator", "bipolar", "ic"):
            for net in part.nets():
                if net in isle.live and candidate.kind in ("mosfet", "controller") and _on_winding(isle, net):
                    add(net, 2, f"{ref} switches a winding")
        elif candidate.kind == "fuse":
            for net in part.nets():
                add(net, 1, f"fuse {ref}")
    _take_best(isle, members, scores, "dc", supply, found, sides, lambda island: "; ".join(why[island][:4]))


def _on_winding(isle: Islands, net: str) -> bool:
    return any(isle.kind(ref) in TRANSFORMERS for ref in isle.live[net])


def _take_best(isle, members, scores, hazard, supply, found, sides, reasons) -> None:  # type: ignore[no-untyped-def]
    what = "mains" if hazard == "mains" else f"d.c. supply of {supply.voltage.text or supply.voltage.high}"
    best = max(scores.values(), default=0)
    top = [island for island, score in scores.items() if score == best and score > 0]
    live = [island for island, nets in members.items() if not is_stub(isle, nets)]
    if len(top) == 1:
        found[top[0]] = (hazard, f"the declared {what} enters here: {reasons(top[0])}")
    elif not top and len(live) == 1:
        found[live[0]] = (hazard, f"the only circuit on the board, so the declared {what} feeds it")
    else:
        names = [members[island][0] for island in (top or live)[:6]]
        places = " or at ".join(names) or "none of the circuits found"
        text = f"the declared {what} could enter at {places}: which one is it?"
        sides.questions.append(
            Question(
                "side",
                text,
                (),
                tuple(names),
                "side of the supply",
                "domains: {supply: {nets: [...], side: primary}} in the declaration",
                (("a net of the hazardous side is named", "pass"),),
                Step(text, (Fact("supply", hazard, supply.source),)),
            )
        )
