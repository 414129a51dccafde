"""Does anything but insulation join two domains?

Only parts made to insulate may lie across a barrier. The rule fails, with the shortest conducting path, when an ordinary
part joins or hangs across two domains, when one net is on both sides of insulating parts, when a connector carries nets of
two sides that must be kept apart, or when protective earth meets the mains by anything but a classed capacitor or a surge
limiter. It passes for each barrier that only insulating parts and capacitors cross (the capacitors have a rule of their own).

Open: a part of unknown type lies where an isolator would lie; the question names it. Open too where a form of netlist may have
made one net of two (names that were cut, node 0 of a simulation) and that net is on both sides. Open with level note: an insulating
part has both sides in one circuit and nothing tells that it should insulate there.

To settle it: take the part out, or declare what it is (`parts: {U1: {kind: digital-isolator}}`).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.candidate import CONNECTORS
from checker.model.clause import Clause, Subject
from checker.model.domain import Crossing, Domain, Short
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict, Words


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters."""


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """Verdicts per short, per ordinary crossing, per connector, per question, then one pass per clean barrier."""
    spoiled: set[frozenset[str]] = set()
    shorted = {ref for short in analysis.isolation.shorts for ref in short.chain}
    for short in analysis.isolation.shorts:
        yield _of_short(analysis, clause, short)
    for crossing in analysis.isolation.crossings:
        if crossing.how == "ordinary":
            spoiled.add(frozenset(crossing.between))
            if crossing.part not in shorted:
                yield _of_ordinary(analysis, clause, crossing)
        elif crossing.how == "bleeder":
            spoiled.add(frozenset(crossing.between))
        elif crossing.how == "limiter" and not _to_earth(analysis, crossing):
            spoiled.add(frozenset(crossing.between))
            yield _of_limiter(analysis, clause, crossing)
    for ref, candidate in analysis.choice.items():
        if candidate.kind in CONNECTORS and analysis.design.parts[ref].fitted and "magnetics" not in candidate.attributes:
            pair = _opposed(analysis, ref)
            if pair is not None:
                spoiled.add(frozenset(domain.name for domain in pair))
                yield _of_connector(analysis, clause, ref, *pair)
    for question in analysis.isolation.questions:
        if question.about == "hidden-isolators":
            yield clause.opens(
                Subject(question.parts, key=question.parts),
                "Parts of unknown type may be isolators that one part defeats.",
                question.text,
                question.step,
                Missing(question.fact, question.supply_as, question.then, question.parts[-1]),
                level="note",
            )
        elif question.about == "isolator":
            subject = Subject(question.parts, question.nets, key=question.parts)
            yield clause.opens(
                subject, "A part of unknown type lies between two circuits.", question.text, question.step,
                Missing(question.fact, question.supply_as, question.then, question.parts[0]),
            )  # fmt: skip
    across = analysis.isolation.across()
    for barrier in analysis.isolation.separations:
        crossings = across[barrier.between]
        if frozenset(barrier.between) not in spoiled and any(c.listed for c in crossings) and all(c.listed for c in crossings):
            key = (barrier.id,) if barrier.named else barrier.bridged_by
            lie = "lies" if len(barrier.bridged_by) == 1 else "lie"
            place = f"{_listed(barrier.bridged_by)} {lie} across {barrier.between[0]} and {barrier.between[1]}"
            because = f"{place}, and direct current finds no way"
            yield clause.passes(
                Subject(barrier.bridged_by, key=key),
                "Only insulating parts and capacitors cross this barrier.",
                because,
                barrier.step,
                found=Words(", ".join(barrier.bridged_by[:12])),
            )


def _listed(refs: tuple[str, ...]) -> str:
    return ", ".join(refs[:8]) + (f" and {len(refs) - 8} more" if len(refs) > 8 else "")


def _of_short(analysis: Analysis, clause: Clause, short: Short) -> Verdict:
    way = " - ".join(short.path)
    if short.faulty:
        if short.chain:
            what = "An ordinary part joins two circuits that insulating parts keep apart."
        else:
            what = "One net is on both sides of insulating parts."
        if not short.parts:
            what = "Two circuits that must be kept apart are joined."
        because = short.step.text + (f"; shortest path {way}" if way and way not in short.step.text else "")
        subject = Subject(short.chain or short.parts, short.nets, key=tuple(sorted({*short.chain, *short.parts})) or short.nets)
        merged = {net for note in analysis.design.notes if note.kind == "nets-merged" for net in note.nets} & set(short.nets)
        if merged and not short.chain:
            net = min(merged)
            missing = Missing(
                f"whether {net} is one net on the board",
                "the netlist of the schematic (S-expression, XML, EDIF): this form may have made one net of two",
                (("one net", "fail"), ("two nets", "judged as two circuits")),
                short.parts[0] if short.parts else "",
            )
            text = f"{short.step.text}; the form of the netlist may have made {net} one net of two"
            return clause.opens(subject, what, text, Step(text, (short.step,)), missing)
        return clause.fails(subject, what, because, short.step, found=Words(way or ", ".join(short.nets)))
    missing = Missing(
        "whether this part is meant to insulate",
        "domains: {one: [net], other: [net]} in the declaration names the two circuits it should keep apart",
        (("yes, two circuits are declared", "fail"), ("no", "not-applicable")),
        short.parts[0],
    )
    joining = tuple(ref for ref in short.chain if analysis.kind(ref) in _JOINING)
    subject = Subject((*short.parts, *joining), short.nets, key=tuple(sorted(short.parts)))
    return clause.opens(
        subject, "An insulating part has both sides in one circuit.",
        short.step.text, short.step, missing, level="note",
    )  # fmt: skip


def _of_ordinary(analysis: Analysis, clause: Clause, crossing: Crossing) -> Verdict:
    ref = crossing.part
    nets = tuple(net for net in analysis.design.parts[ref].nets() if net in analysis.isolation.domain_of)
    candidate = analysis.choice[ref]
    if not candidate.sure or candidate.kind == "unknown":
        missing = Missing(
            "kind", f"parts: {{{ref}: {{kind: ...}}}} in the declaration, or kind in a parts file", _KIND_ANSWERS, ref
        )
        return clause.opens(
            Subject((ref,), nets, key=(ref,)),
            "A part of unknown kind lies across a barrier.",
            candidate.because,
            crossing.step,
            missing,
        )
    what = f"A part that does not insulate ({candidate.kind}) lies across a barrier."
    because = f"{crossing.step.text}; {candidate.kind} because {candidate.because}"
    return clause.fails(Subject((ref,), nets, key=(ref,)), what, because, crossing.step, found=Words(candidate.kind))


_JOINING = frozenset({"resistor", "jumper", "net-tie", "ferrite", "inductor", "capacitor"})
_KIND_ANSWERS = (("an insulating kind such as digital-isolator", "pass"), ("an ordinary kind", "fail"))


def _to_earth(analysis: Analysis, crossing: Crossing) -> bool:
    return any(analysis.isolation.domains[name].earthed for name in crossing.between) or not any(
        analysis.isolation.domains[name].hazard for name in crossing.between
    )


def _of_limiter(analysis: Analysis, clause: Clause, crossing: Crossing) -> Verdict:
    nets = tuple(net for net in analysis.design.parts[crossing.part].nets() if net in analysis.isolation.domain_of)
    what = "A surge limiter bridges the barrier between the hazardous side and a circuit that is not earthed."
    return clause.fails(Subject((crossing.part,), nets, key=(crossing.part,)), what, crossing.step.text, crossing.step)


def _opposed(analysis: Analysis, ref: str) -> tuple[Domain, Domain] | None:
    """Two domains on one connector that lie on different sides of the hazard; the earth contact of a supply entry is none."""
    domains = analysis.isolation.domains
    names = dict.fromkeys(
        analysis.isolation.domain_of[net] for net in analysis.design.parts[ref].nets() if net in analysis.isolation.domain_of
    )
    hazardous = [domains[name] for name in names if domains[name].hazard]
    touchable = [
        domains[name]
        for name in names
        if not domains[name].hazard and not domains[name].earthed and domains[name].side == "secondary"
    ]
    return (hazardous[0], touchable[0]) if hazardous and touchable else None


def _of_connector(analysis: Analysis, clause: Clause, ref: str, hazardous: Domain, touchable: Domain) -> Verdict:
    part = analysis.design.parts[ref]
    pins = {
        name: [pin.number for pin in part.pins if analysis.isolation.domain_of.get(pin.net or "") == name]
        for name in (hazardous.name, touchable.name)
    }
    because = "; ".join(f"pin{'s' * (len(found) > 1)} {', '.join(found[:8])} on {name}" for name, found in pins.items())
    step = Step(
        f"{ref} carries nets of {hazardous.name} and of {touchable.name}: {because}", (part.fact, hazardous.step, touchable.step)
    )
    what = "A connector carries the hazardous side and a circuit that is kept apart from it."
    missing = Missing(
        "which of its pins are spaced and which mating parts keep them apart",
        "separate connectors, or a concession with the drawing of the connector",
        (("the connector insulates between these pins", "pass"), ("an ordinary connector", "fail")),
        ref,
    )
    if analysis.choice[ref].kind != "test-point" and not analysis.choice[ref].sure:
        known = Missing("kind", f"parts: {{{ref}: {{kind: ...}}}} in the declaration", _KIND_ANSWERS, ref)
        return clause.opens(Subject((ref,), key=(ref,)), "A part that may be a connector carries both sides.", because, step, known)
    if analysis.choice[ref].kind == "test-point":
        return clause.opens(Subject((ref,), key=(ref,)), what, because, step, missing, level="note")
    return clause.fails(Subject((ref,), part.nets(), key=(ref,)), what, because, step)


RULE = Rule("barrier-insulation", "shock", Params, ask, __doc__ or "")
