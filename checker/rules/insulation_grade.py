"""Is each insulating part made for the grade of insulation it forms?

A transformer, coupler, isolator, relay or isolated module across a barrier is the barrier. It has to be made for the grade
the barrier needs, and that is shown by an approval for its kind of part, or by its maker naming the grade. A test voltage
shows neither: 5 kV for a minute (the figure of UL 1577) says nothing about the voltage the part may bear for years.

Per part that lies across basic or better insulation, the worst of its barriers counts. Pass: an approval that covers the
grade, or the grade named, and nothing lower named. Fail: a lower grade is named (functional where basic is needed, basic where
reinforced is needed), the stated working voltage of the insulation is below the voltage that surely stands across it, or a
module on the mains states nothing but a test of 1.5 kV d.c. or less, which is what modules with functional insulation have.
Open: only a test voltage is stated, or nothing; an approval that leaves the grade open (IEC 60747-17 covers basic and
reinforced); triple-insulated wire in a transformer without an approval; two grades named at once.

To settle it: BOM column `Class` (`IEC 60747-5-5`, `Reinforced`), or `marks` of the part in a parts file or the declaration.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.candidate import Candidate
from checker.model.clause import Clause, Subject
from checker.model.domain import Crossing
from checker.model.requirement import Grade
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.stress import Bounds, Voltage
from checker.model.verdict import Missing, Number, Verdict, Words
from checker.rules.insulation_evidence import (
    BASIC,
    REINFORCED,
    SORTS,
    Params,
    Shown,
    approvals,
    in_short,
    named_grades,
    shown,
    volts,
)

_NEEDED = {"basic": BASIC, "supplementary": BASIC, "double": REINFORCED, "reinforced": REINFORCED}
_SUPPLY = "BOM column Class, or marks in a parts file"
_WHAT = "Insulation of a part across a barrier."


@dataclass(frozen=True, slots=True)
class _Place:
    """A part across one barrier: what is needed there and what voltage stands across it."""

    ref: str
    candidate: Candidate
    crossing: Crossing
    grade: Grade
    voltage: Voltage | None
    on_mains: bool

    @property
    def between(self) -> str:
        return " and ".join(self.crossing.between)


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per insulating part across basic or better insulation: that of its worst barrier."""
    verdicts: dict[str, list[Verdict]] = {}
    for crossing in analysis.isolation.crossings:
        grade = analysis.grades[(clause.ruleset, "|".join(crossing.between))]
        candidate = analysis.choice[crossing.part]
        # what an unlisted part is comes first; barrier-insulation asks that
        if crossing.how == "insulating" and crossing.listed and candidate.kind in SORTS and grade.grade in _NEEDED:
            domains = (analysis.isolation.domains[name] for name in crossing.between)
            on_mains = any(domain.hazard == "mains" for domain in domains)
            voltage = analysis.stress.across.get((crossing.part, crossing.between))
            place = _Place(crossing.part, candidate, crossing, grade, voltage, on_mains)
            verdicts.setdefault(crossing.part, []).append(_judge(analysis, clause, place))
    for found in verdicts.values():
        yield min(found, key=lambda verdict: ("fail", "open", "pass").index(verdict.outcome))


def _judge(analysis: Analysis, clause: Clause, place: _Place) -> Verdict:
    part = analysis.design.parts[place.ref]
    needed = _NEEDED[place.grade.grade]
    said = shown(place.candidate, clause.params)
    subject = Subject((place.ref,), part.nets(), key=(place.ref,))
    stated = said.text or "nothing that was read states a grade or an approval"
    text = f"{place.ref} between {place.between} has to be {place.grade.grade} insulation; {stated}"
    step = Step(text, (part.fact, *said.facts, place.crossing.step, place.grade.step), citation=clause.citation)
    words = {"found": Words(in_short(place.candidate)), "limit": Words(place.grade.grade)}
    if said.most is not None and said.most < needed and named_grades(place.candidate):
        return clause.fails(subject, _WHAT, text, step, **words)
    below = _working(clause, subject, place, step)
    if below is not None and below.outcome == "fail":
        return below
    tested = _only_functional(place, said, clause.params)
    if tested is not None:
        step = Step(f"{text}; {tested}", step.inputs, citation=clause.citation)
        return clause.fails(subject, _WHAT, step.text, step, **words)
    if said.least is not None and said.least >= needed:
        return below or clause.passes(subject, _WHAT, text, _with_voltage(place, step), **words)
    return clause.opens(subject, _WHAT, text, step, _missing(place, needed, clause.params), **words)


def _only_functional(place: _Place, said: Shown, params: Params) -> str | None:
    """Why the test voltage of a module shows functional insulation, None where it does not. A bare figure may be r.m.s."""
    test = place.candidate.ratings.get("isolation_test")
    if test is None or said.least is not None or not place.on_mains or place.candidate.kind != "isolated-module":
        return None
    if any(mark.name.startswith("IEC") for mark in place.candidate.marks):
        return None
    peak = float(test.value) * (1.0 if test.form in ("dc", "peak") else math.sqrt(2))
    if peak > params.functional_test:
        return None
    return "a module tested with so little has functional insulation and is no barrier against the mains"


def _working(clause: Clause, subject: Subject, place: _Place, step: Step) -> Verdict | None:
    """The stated working voltage of the insulation against the one across it; None where one is not known or it suffices."""
    rating = place.candidate.ratings.get("isolation_working")
    if rating is None or place.voltage is None:
        return None
    sure, most, form = _compared(place.voltage, rating.form)
    stated = Number(float(rating.value), "V", form)
    if stated.value < sure.surely:
        bound, reaches = sure, Number(sure.surely, "V", form)
    elif most.never_above is not None and stated.value < most.never_above:
        bound, reaches = most, Number(most.never_above, "V", form)
    else:
        return None
    fails = bound is sure and stated.value < sure.surely
    text = (
        f"the insulation of {place.ref} between {place.between} is made for {volts(rating)} in continuous use; "
        f"{'at least' if fails else 'up to'} {volts(reaches)} stand across it"
    )
    inputs = (rating, bound.step, *step.inputs)
    link = Step(text, inputs, "U_across <= U_working", reaches.value, "V", form, clause.citation)
    missing = Missing(
        f"working voltage across {place.ref}", "barriers: {working_voltage: ...} or rails in the declaration",
        ((f"up to {volts(stated)}", "pass"), ("more", "fail")), place.ref,
    )  # fmt: skip
    return clause.at_least(
        subject, _WHAT, text, link, surely=stated, never_below=stated if fails else None, limit=reaches if fails else stated,
        missing=missing,
    )  # fmt: skip


def _with_voltage(place: _Place, step: Step) -> Step:
    """The step with the stated working voltage that suffices, and what it was compared with."""
    rating = place.candidate.ratings.get("isolation_working")
    if rating is None or place.voltage is None:
        return step
    _, most, form = _compared(place.voltage, rating.form)
    if most.never_above is None:
        text = f"made for {volts(rating)} in continuous use, which is not compared: nothing bounds the voltage across it"
        return Step(step.text, (*step.inputs, Step(text, (rating, most.step))), citation=step.citation)
    text = f"made for {volts(rating)} in continuous use; {volts(Number(most.never_above, 'V', form))} at most stand across it"
    compared = Step(text, (rating, most.step), "U_across <= U_working", most.never_above, "V", form)
    return Step(step.text, (*step.inputs, compared), citation=step.citation)


def _compared(voltage: Voltage, form: str) -> tuple[Bounds, Bounds, str]:
    """What a stated working voltage has to be compared with: its surest bound, its highest bound, and the form shown.

    A figure without a form may be meant as r.m.s. or as peak: it is too low for sure when it is below the r.m.s. voltage, and
    enough when it is above the peak.
    """
    if form == "rms":
        return voltage.rms, voltage.rms, "rms"
    if form in ("peak", "dc"):
        return voltage.peak, voltage.peak, "peak"
    return voltage.rms, voltage.peak, ""


def _missing(place: _Place, needed: int, params: Params) -> Missing:
    reinforced, basic = approvals(place.candidate, params)
    enough = reinforced if needed == REINFORCED else (*basic, *reinforced)
    if needed == REINFORCED and basic:
        like = f" (such as {basic[0]} for reinforced insulation)"
    else:
        like = f" (such as {enough[0]})" if enough else ", with its grade"
    then = (
        (" or ".join(("reinforced", *enough[:2])), "pass"),
        ("basic", "pass" if needed == BASIC else "fail"),
        ("functional", "fail"),
    )
    return Missing(f"approval of its insulation{like}", _SUPPLY, then, place.ref)


RULE = Rule("insulation-grade", "shock", Params, ask, __doc__ or "")
