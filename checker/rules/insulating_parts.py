"""What the four rules on insulating parts share: which parts they judge, by what need, and how a stated figure is compared."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from checker import units
from checker.model.candidate import Candidate, Mark
from checker.model.clause import Clause, Subject
from checker.model.domain import Crossing
from checker.model.fact import Fact
from checker.model.requirement import Need, Required
from checker.model.rule import Analysis
from checker.model.step import Step
from checker.model.verdict import OUTCOMES, Change, Limit, Missing, Number, Remedy, Verdict
from checker.model.verified import weakest

# Parts whose approval as a whole covers what is inside; every other insulating part is built into the equipment's insulation.
WHOLE = frozenset({"isolated-module", "relay"})
# Approvals of a whole supply, transformer or apparatus, with the insulation in it (from memory).
APPROVALS = frozenset("62368-1 60950-1 60065 60601-1 60335-1 61010-1 61558-1 61558-2-6 61558-2-16 61558-2-17".split())
RELAY_APPROVAL = "61810-1"  # says nothing of the grade by itself
DISTANCES = ("clearance", "creepage")
STATED = (*DISTANCES, "through_insulation", "isolation_test", "isolation_working")


@dataclass(frozen=True, slots=True)
class Across:
    """A part across insulation that needs something. need: on the part's own pins. nets: one of its nets on each side."""

    ref: str
    crossing: Crossing
    candidate: Candidate
    need: Need
    nets: tuple[str, ...]

    @property
    def subject(self) -> Subject:
        """One verdict a part: the reference alone is the key."""
        return Subject((self.ref,), self.nets, key=(self.ref,))

    @property
    def where(self) -> str:
        """The insulation it is part of, for people."""
        return f"{self.need.grade} insulation between {' and '.join(self.crossing.between)}"

    def stated(self, *names: str) -> bool:
        """Whether the part states one of these ratings."""
        return any(name in self.candidate.ratings for name in names)

    @property
    def asked(self) -> bool:
        """Whether what it does not state has to be asked for: approved modules and relays, and capacitors, are judged as such."""
        return self.crossing.how == "insulating" and self.candidate.kind not in WHOLE


def judged(analysis: Analysis, clause: Clause, judge: Callable[[Across], Verdict | None]) -> Iterator[Verdict]:
    """The worst verdict of each part over the barriers it lies across: insulating parts, and single capacitors."""
    found: dict[str, list[Verdict]] = {}
    for crossing in analysis.isolation.crossings:
        if crossing.how != "insulating" and not (crossing.how == "capacitor" and crossing.chain == (crossing.part,)):
            continue
        need = analysis.needs.get((clause.ruleset, "|".join(crossing.between), crossing.part))
        if need is None:
            continue
        across = Across(crossing.part, crossing, analysis.choice[crossing.part], need, _nets(analysis, crossing))
        verdict = judge(across)
        if verdict is not None:
            found.setdefault(crossing.part, []).append(verdict)
    for verdicts in found.values():
        yield min(verdicts, key=_badness)


def _badness(verdict: Verdict) -> tuple[int, float]:
    needed = verdict.limit.value if isinstance(verdict.limit, Limit) else 0.0
    return OUTCOMES.index(verdict.outcome), -needed


def _nets(analysis: Analysis, crossing: Crossing) -> tuple[str, ...]:
    at = {pin.number: pin.net for pin in analysis.design.parts[crossing.part].pins if pin.net is not None}
    first = (next((at[pin] for pin in side if pin in at), None) for side in crossing.sides)
    return tuple(net for net in first if net is not None)


def approval(across: Across) -> Mark | None:
    """The mark that covers the insulation of the part as a whole; of a relay with a word on the grade that suffices."""
    candidate = across.candidate
    for mark in candidate.marks:
        number = mark.name.rpartition(" ")[2]
        if number in APPROVALS and (candidate.kind in WHOLE or number.startswith("61558") or candidate.kind == "transformer"):
            return mark
        if number == RELAY_APPROVAL and candidate.kind == "relay":
            wanted = ("basic", "reinforced", "double") if across.need.grade == "basic" else ("reinforced", "double")
            if candidate.marked(*wanted) is not None:
                return mark
    return None


def covered(across: Across, clause: Clause, mark: Mark, what: str) -> Verdict:
    """Nothing to compare: the approval of the part answers."""
    text = f"{across.ref} is approved to {mark.name}: the approval covers it"
    return clause.does_not_apply(across.subject, what, text, Step(text, (mark.fact, across.crossing.step)))


def figure(value: float, unit: str, form: str = "") -> str:
    """A figure for people."""
    return units.shown(value, unit, form)


def compared(
    across: Across,
    clause: Clause,
    what: str,
    fact: Fact,
    required: Required,
    remedy: Remedy | None = None,
    found: tuple[Number, Number] | None = None,
    doubt: Missing | None = None,
) -> Verdict:
    """Pass from `enough` on, fail below `at_least`, else open.

    found: the smallest and the largest value the stated figure can mean, None for the figure itself. doubt: what settles it
    when the figure itself is the reason; else the fact that bounds the requirement does.
    """
    clause = replace(clause, verified=weakest(clause.verified, required.verified))
    low, high = found or (Number(float(fact.value), required.unit, required.form),) * 2
    limit = required.at_least if required.enough is None or high.value < required.at_least else required.enough
    shown = figure(limit, required.unit, required.form)
    stated = figure(float(fact.value), required.unit, fact.form)
    known = f"needs {'at least ' if required.enough is None else ''}{shown}" if limit else "needs what no table tells"
    text = f"{across.ref} states {stated}; {across.where} {known}"
    step = Step(text, (fact, required.step, across.crossing.step), f"{float(fact.value):g} >= {limit:g}")
    bound = Number(limit, required.unit, required.form)
    if required.enough is not None or high.value < required.at_least:
        sure = high if high.value < required.at_least else None
        missing = doubt if doubt is not None and low.value < required.at_least else unsettled(across, required, stated)
        return clause.at_least(
            across.subject, what, text, step, surely=sure, never_below=low, limit=bound, missing=missing, **_remedy(sure, remedy)
        )
    shown_limit = Limit(limit, required.unit, required.form, "at-least", clause.verified)
    return clause.opens(across.subject, what, text, step, unsettled(across, required, stated), found=low, limit=shown_limit)


def _remedy(sure: Number | None, remedy: Remedy | None) -> dict[str, Remedy]:
    return {"remedy": remedy} if sure is not None and remedy is not None else {}


def unsettled(across: Across, required: Required, stated: str) -> Missing:
    """The fact that bounds the requirement, and what its answers lead to."""
    then = ((f"one that asks for {stated} or less", "pass"), (f"one that asks for more than {stated}", "fail"))
    return Missing(required.missing or "the requirement", _supplied(across, required.missing), then, across.ref)


def _supplied(across: Across, missing: str) -> str:
    one, two = across.crossing.between
    if missing.startswith(("working voltage", "r.m.s. working voltage", "frequency")):
        return f"barriers: [{{between: [{one}, {two}], working_voltage: {{rms: ..., peak: ...}}}}] in the declaration"
    if missing.startswith("origin"):
        return "origin: isolated or mains under supply in the declaration, or impulse"
    if missing.startswith("impulse"):
        return "impulse in the declaration"
    if missing.startswith("altitude"):
        return "environment: {altitude: ...} in the declaration, or a table with that altitude in a ruleset of the house"
    return "a ruleset of the house with such a table"


def limit_of(required: Required) -> Limit:
    """What suffices, else what is needed in any case, as the limit of a verdict that compares nothing."""
    value = required.at_least if required.enough is None else required.enough
    return Limit(value, required.unit, required.form, "at-least", required.verified)


def longer(across: Across, distance: str, required: Required) -> Remedy | None:
    """The part with the distance that suffices; None where nothing is known to suffice."""
    if required.enough is None:
        return None
    said = "through its insulation" if distance == "through_insulation" else f"of {distance}"
    text = f"{across.ref} with {figure(required.enough, 'mm')} or more {said}"
    return Remedy(text, (Change(across.ref, f"rating:{distance}", required.enough, "mm"),))


def needed(required: Required) -> str:
    """What suffices, for people: `5 mm or more`."""
    return f"{figure(required.at_least if required.enough is None else required.enough, required.unit, required.form)} or more"


def answers(required: Required) -> tuple[tuple[str, str], ...]:
    """What each stated figure would lead to."""
    enough = "open" if required.enough is None else "pass"
    return (needed(required), enough), (f"less than {figure(required.at_least, required.unit, required.form)}", "fail")
