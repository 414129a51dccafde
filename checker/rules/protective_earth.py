"""Is protective earth there when the protection class needs it, and absent when it must not be?

Class I equipment relies on protective earth: its supply entry has an earth contact, and that contact is connected to
something on the board. Class II equipment relies on double or reinforced insulation and has no protective earth. Class III
is fed from a safe source and has none either.

Pass or fail per design once the class is declared or follows from the board; a fed-in earth contact that ends nowhere fails
in class I. Open when a supply entry has an earth contact that is not connected and no class is declared.

To settle it: `supply: {protection_class: I}` (or II) in the declaration.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
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
    if loose and not declared and not earthed:
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
        if earthed:
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
    """Earth contacts of inlets and mains connectors that lead nowhere: (reference, pin)."""
    isolation, found = analysis.isolation, []
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if candidate.kind not in ("inlet", "connector") or not part.fitted:
            continue
        on_mains = any(
            isolation.domains[isolation.domain_of[net]].hazard == "mains" for net in part.nets() if net in isolation.domain_of
        )
        if on_mains:
            for pin in part.pins:
                alone = pin.net is None or len({other for other, _ in analysis.design.nets[pin.net].pins}) < 2
                words = {pin.name.upper().replace(" ", ""), (pin.net or "").rsplit("/", 1)[-1].upper()}
                if alone and words & _EARTH_PINS:
                    found.append((ref, pin.number))
    return found


RULE = Rule("protective-earth", "shock", Params, ask, __doc__ or "")
