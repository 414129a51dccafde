"""A contact beside the poles of the supply entry that nothing names: protective earth, or not.

Nets of programs' own naming (`Net-(J1-Pad3)`) and pins without names leave a third contact of a mains connector unexplained. Taken
for a circuit of its own it would need reinforced insulation and lack a protective earth; taken for earth it would need less. So
what hangs on it is open until somebody says which it is.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from checker.model.rule import Analysis
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict

_MUTE = re.compile(r"(?:PIN_?|P)?\d*|~", re.IGNORECASE)  # names of pins that say nothing
_ABOUT_EARTH = ("protective-earth", "earth-current")
_RESTS_ON_IT = frozenset(
    "barrier-insulation bridging-capacitor insulation-grade clearance creepage through-insulation electric-strength pad-span "
    "pad-distance touch-current reachable-connector".split()
)


@dataclass(frozen=True, slots=True)
class Contact:
    """ref and pin of the contact, the net on it, and the name of its circuit."""

    ref: str
    pin: str
    net: str
    domain: str


def unnamed_contact(analysis: Analysis) -> Contact | None:
    """The one contact of a mains entry beside its two poles or more, where no protective earth is known and none is ruled out."""
    isolation, declared = analysis.isolation, analysis.declaration
    said = any(domain.side == "earth" for domain in declared.domains.values())
    said = said or any(supply.protection_class in ("II", "III") for supply in declared.supplies)
    if said or any(domain.earthed for domain in isolation.domains.values()):
        return None
    for ref, entry in analysis.stress.entries.items():
        pins = analysis.design.parts[ref].pins
        beside = [pin for pin in pins if pin.net in isolation.domain_of and pin.net not in analysis.stress.poles]
        beside = [pin for pin in beside if not isolation.domains[isolation.domain_of[pin.net or ""]].hazard]
        if len(entry.poles) < 2 or len(beside) != 1 or not _MUTE.fullmatch(beside[0].name.strip()):
            continue
        net = beside[0].net or ""
        if analysis.design.nets[net].automatic:
            return Contact(ref, beside[0].number, net, isolation.domain_of[net])
    return None


def doubted(verdict: Verdict, contact: Contact, analysis: Analysis) -> Verdict:
    """The verdict, open where it rests on what that contact is."""
    isolation = analysis.isolation
    about = verdict.rule in _ABOUT_EARTH and verdict.outcome in ("pass", "fail", "not-applicable")
    if not about and not (verdict.outcome == "fail" and verdict.rule in _RESTS_ON_IT and _touches(verdict, contact, analysis)):
        return verdict
    missing = Missing(
        f"whether contact {contact.pin} of {contact.ref} is protective earth",
        f"domains in the declaration (domains: {{earth: {{nets: [{contact.net}], side: earth}}}}), or protection_class: II",
        (("it is", "judged against earth"), ("it is not", verdict.outcome)),
        contact.ref,
    )
    text = f"{verdict.because}; nothing tells whether contact {contact.pin} of {contact.ref} is protective earth"
    facts = (analysis.design.parts[contact.ref].fact, *isolation.domains[contact.domain].evidence)
    inputs = (*((verdict.step,) if verdict.step is not None else ()), *facts)
    return replace(verdict, outcome="open", because=text, step=Step(text, inputs), missing=missing, remedy=None, margin=None)


def _touches(verdict: Verdict, contact: Contact, analysis: Analysis) -> bool:
    """Whether a verdict concerns the circuit of the contact."""
    isolation = analysis.isolation
    named = {isolation.domain_of.get(net) for net in verdict.nets}
    named |= {name for ref in verdict.parts for crossing in isolation.crossing(ref) for name in crossing.between}
    named |= {isolation.domain_of.get(net) for ref in verdict.parts for net in analysis.design.parts[ref].nets()}
    return contact.domain in named
