"""Is protective earth there when the protection class needs it, and absent when it must not be?

Class I equipment relies on protective earth: its supply entry has an earth contact, and that contact is connected to
something on the board. Class II equipment relies on double or reinforced insulation and has no protective earth. Class III
is fed from a safe source and has none either.

Pass or fail per design once the class is declared or follows from the board; a fed-in earth contact that ends nowhere fails
in class I. Open, while no class is declared, when a supply entry has an earth contact that is not connected, and when line
capacitors meet on a net named after earth that no earth contact feeds: half the mains would stand there.

To settle it: `supply: {protection_class: I}` (or II) in the declaration.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.candidate import CONNECTORS, MECHANICAL
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.names import earth_like
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict, Words

_EARTH_PINS = frozenset({"PE", "E", "EARTH", "PROTECTIVEEARTH", "PROTECTIVE_EARTH", "GROUND", "PE_G"})


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters."""


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict for a design on the mains."""
    if analysis.setting.mains is None:
        return
    declared = bool(next((supply for supply in analysis.declaration.supplies if supply.protection_class), None))
    protection = analysis.setting.protection_class
    earthed = [domain for domain in analysis.isolation.domains.values() if domain.earthed]
    loose = _loose_contacts(analysis)
    steps = tuple(domain.step for domain in earthed)
    nets = tuple(net for domain in earthed for net in domain.nets[:3])
    facts = analysis.setting.facts + tuple(
        Fact("pin", f"{ref}.{pin}", analysis.design.parts[ref].fact.source) for ref, pin in loose
    )
    origin = "declared" if declared else "as the board shows"
    subject = Subject(tuple(dict.fromkeys(ref for ref, _ in loose)), nets, key=("earth",))
    unfed = _unfed_nets(analysis) if not declared and not earthed else []
    if unfed and not loose:
        refs = tuple(dict.fromkeys(ref for net in unfed for ref, _ in analysis.design.nets[net].pins if ref in analysis.choice))
        step = Step(
            f"{', '.join(refs[:8])} meet on {', '.join(unfed)}, which is named after earth, and no earth contact feeds it",
            tuple(analysis.design.nets[net].fact for net in unfed),
        )
        missing = Missing(
            "protection class and what this net is bonded to",
            "supply: {protection_class: I or II}, and domains: {earth: {nets: [...], side: earth}} in the declaration",
            (("protective earth, class I", "pass"), ("a conductor that a user can touch, class II", "fail")),
        )
        what = "Line capacitors meet on a net named after earth."
        yield clause.opens(Subject(nets=tuple(unfed), key=("earth",)), what, step.text, step, missing)
    elif loose and not declared and not earthed:
        pins = ", ".join(f"{ref}.{pin}" for ref, pin in loose)
        step = Step(f"the earth contact {pins} is connected to nothing", facts)
        missing = Missing(
            "protection class",
            "supply: {protection_class: I or II} in the declaration",
            (("I", "fail"), ("II", "pass")),
            loose[0][0],
        )
        yield clause.opens(subject, "Protective earth and the protection class.", step.text, step, missing)
    elif protection == "I":
        if earthed and not loose:
            step = Step(f"class I ({origin}); protective earth is {', '.join(domain.name for domain in earthed)}", (*steps, *facts))
            yield clause.passes(subject, "Protective earth is present and bonded.", step.text, step, found=Words(", ".join(nets)))
        else:
            pins = ", ".join(f"{ref}.{pin}" for ref, pin in loose)
            step = Step(
                f"class I ({origin}), and "
                + (f"the earth contact {pins} is connected to nothing" if loose else "no protective earth is found"),
                facts,
            )
            yield clause.fails(subject, "Protective earth is missing.", step.text, step)
    elif earthed:
        step = Step(
            f"class {protection} ({origin}), yet {', '.join(domain.name for domain in earthed)} is protective earth",
            (*steps, *facts),
        )
        yield clause.fails(
            subject,
            "Protective earth in equipment that relies on double insulation.",
            step.text,
            step,
            found=Words(", ".join(nets)),
        )
    else:
        step = Step(f"class {protection} ({origin}); no protective earth on the board", facts)
        yield clause.passes(subject, "No protective earth, as the protection class wants.", step.text, step)


def _loose_contacts(analysis: Analysis) -> list[tuple[str, str]]:
    """Earth contacts that lead nowhere, of inlets and mains connectors without one that does: (reference, pin)."""
    isolation, found = analysis.isolation, []
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if candidate.kind not in ("inlet", "connector") or not part.fitted:
            continue
        on_mains = any(
            isolation.domains[isolation.domain_of[net]].hazard == "mains" for net in part.nets() if net in isolation.domain_of
        )
        fed = any(isolation.domains[isolation.domain_of[net]].earthed for net in part.nets() if net in isolation.domain_of)
        if on_mains and not fed:
            for pin in part.pins:
                alone = pin.net is None or len({other for other, _ in analysis.design.nets[pin.net].pins}) < 2
                words = {pin.name.upper().replace(" ", ""), (pin.net or "").rsplit("/", 1)[-1].upper()}
                if alone and words & _EARTH_PINS:
                    found.append((ref, pin.number))
    return found


def _unfed_nets(analysis: Analysis) -> list[str]:
    """Nets named after earth on which two capacitors from the mains meet and nothing else that is electric stands."""
    found = []
    for name, net in analysis.design.nets.items():
        if earth_like(name):
            electric = [
                ref
                for ref in dict.fromkeys(ref for ref, _ in net.pins if ref in analysis.choice)
                if analysis.design.parts[ref].fitted and analysis.kind(ref) not in MECHANICAL | CONNECTORS
            ]
            if len(electric) > 1 and all(_from_mains(analysis, ref, name) for ref in electric):
                found.append(name)
    return found


def _from_mains(analysis: Analysis, ref: str, net: str) -> bool:
    """Whether this part is a capacitor between the net and the mains side."""
    isolation = analysis.isolation
    others = [other for other in analysis.design.parts[ref].nets() if other != net and other in isolation.domain_of]
    return analysis.kind(ref) == "capacitor" and any(
        isolation.domains[isolation.domain_of[other]].hazard == "mains" for other in others
    )


RULE = Rule("protective-earth", "shock", Params, ask, __doc__ or "")
