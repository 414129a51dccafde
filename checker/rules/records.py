"""Do the papers agree: netlist, bill of materials, parts file, declaration?

A wrong record defeats every other check, because what was judged is then not what is built. The rule fails for

- one reference on two parts, or two references that only look alike;
- a part that the bill of materials lists and the netlist lacks, or the other way round;
- two statements about one safety part that cannot both be true: value, description and part number a power of ten apart,
  a voltage rating or a class that differs;
- a bill of materials that says a part is fitted where the netlist leaves it out.

Smaller things stay notes of the report: a reference written in another case, a quantity that does not fit, a part outside the
safety parts that no bill of materials lists or that is described in two ways. A safety part is one that lies across a barrier
or on the hazardous side, or protects (fuse, varistor), or carries a safety class.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from checker.model.candidate import CONNECTORS, MECHANICAL, Disagreement
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.reading import Note
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Verdict, Words
from checker.units import shown

# note kind -> (headline, level when it fails)
_FAILING: Mapping[str, tuple[str, str]] = {
    "duplicate-reference": ("One reference stands for two parts.", "error"),
    "confusable-reference": ("Two references look alike but are not the same text.", "error"),
    "part-not-listed": ("A net names a part that the parts section lacks.", "warning"),
    "not-in-netlist": ("The bill of materials lists a part that the netlist lacks.", "warning"),
    "not-in-bom": ("A fitted part of the netlist is in no bill of materials.", "warning"),
    "fitted-differs": ("Netlist and bill of materials disagree whether a part is fitted.", "warning"),
    "duplicate-row": ("Two rows of the bill of materials describe one part differently.", "warning"),
    "quantity-differs": ("A quantity does not fit the references of its row.", "note"),
    "case-differs": ("A reference is written differently in netlist and bill of materials.", "note"),
    "reference-unread": ("A reference of the bill of materials could not be read.", "warning"),
    "unused": ("A declared or listed thing matches nothing in the design.", "warning"),
}
_SAFETY_KINDS = frozenset(
    {"fuse", "varistor", "transformer", "optocoupler", "digital-isolator", "isolated-module", "relay", "solid-state-relay"}
)


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters."""


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """A fail per note that is one, a fail per disagreement, one pass when the papers agree."""
    critical = _critical(analysis)
    failed = False
    for note in analysis.design.notes:
        if note.kind in _FAILING:
            verdict = _of_note(analysis, clause, note, critical)
            if verdict is not None:
                failed = True
                yield verdict
    for ref, candidate in analysis.choice.items():
        for disagreement in candidate.disagreements:
            if ref in critical:
                failed = True
                yield _of_disagreement(clause, ref, disagreement)
    if not failed:
        papers = "netlist and bill of materials" if analysis.design.has_bom else "the netlist"
        facts = tuple(Fact("input", f"{paper.role} {paper.path}") for paper in analysis.design.inputs)
        step = Step(f"{papers}: {len(analysis.design.parts)} parts, no contradiction on a safety part", facts)
        if analysis.design.has_bom:
            yield clause.passes(Subject(key=("records",)), "Netlist and bill of materials agree.", step.text, step)
        else:
            yield clause.does_not_apply(
                Subject(key=("records",)), "No bill of materials was given to compare with.", step.text, step
            )


def _critical(analysis: Analysis) -> frozenset[str]:
    """Safety parts: across a barrier, on the hazardous side, or of a kind that protects."""
    crossing = {crossing.part for crossing in analysis.isolation.crossings}
    hazardous = {ref for domain in analysis.isolation.domains.values() if domain.hazard for ref in domain.parts}
    kinds = {ref for ref, candidate in analysis.choice.items() if candidate.kind in _SAFETY_KINDS or candidate.marks}
    return frozenset(crossing | hazardous | kinds)


def _of_note(analysis: Analysis, clause: Clause, note: Note, critical: frozenset[str]) -> Verdict | None:
    """The verdict of a note, None when it is too small to be one: it then stays a note of the report."""
    what, level = _FAILING[note.kind]
    facts = tuple(Fact(note.kind, note.parts[0] if note.parts else note.text, source) for source in note.sources)
    touched = any(ref in critical for ref in note.parts)
    if note.kind in ("not-in-bom", "duplicate-row", "fitted-differs"):
        joining = any(analysis.kind(ref) not in CONNECTORS | MECHANICAL for ref in note.parts if ref in analysis.choice)
        level = "error" if touched and joining else "warning" if note.kind == "fitted-differs" and joining else "note"
    elif note.kind == "part-not-listed":
        level = level if touched else "note"
    elif note.kind == "not-in-netlist" and not any(character.isdigit() for ref in note.parts for character in ref):
        level = "note"  # a case, a board, a cable: bought with the rest, never drawn
    if level == "note":
        return None
    step = Step(note.text, facts)
    subject = Subject(note.parts, note.nets, key=(note.kind, *note.parts) if note.parts else (note.kind, note.text))
    return clause.fails(subject, what, note.text, step, level=level)


def _of_disagreement(clause: Clause, ref: str, found: Disagreement) -> Verdict:
    name = found.attribute.removeprefix("rating:")
    words = " against ".join(f"{_said(fact)} ({fact.source})" for fact in (found.kept, found.other))
    apart = f", a factor of {found.factor:.3g} apart" if found.factor else ""
    because = f"{name} of {ref}: {words}{apart}"
    step = Step(because, (found.kept, found.other))
    what = "Two statements about one part cannot both be true."
    return clause.fails(
        Subject((ref,), key=(ref, found.attribute)), what, because, step,
        found=Words(f"{_said(found.other)} against {_said(found.kept)}"),
    )  # fmt: skip


def _said(fact: Fact) -> str:
    figure = shown(fact.value, fact.unit, fact.form) if isinstance(fact.value, float) else str(fact.value)
    return f"{fact.text} = {figure}" if fact.text and fact.text != figure else figure


RULE = Rule("records", "record", Params, ask, __doc__ or "")
