"""Barriers, further separations and stress as the report shows them: voltages, what each ruleset needs, what parts state."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from checker.formulas.rounding import significant
from checker.model.declaration import DeclaredBarrier, Range
from checker.model.domain import Crossing
from checker.model.fact import Fact
from checker.model.order import natural
from checker.model.report import BarrierShown, BridgingPart, StressShown, WorkingVoltage
from checker.model.requirement import Need, Required
from checker.model.rule import Analysis
from checker.model.separation import GRADES, Separation
from checker.model.step import Step
from checker.model.stress import Bounds, Voltage
from checker.reporting_steps import Steps

_PROVIDED = ("clearance", "creepage", "through_insulation", "isolation_working", "isolation_test", "impulse")
_DISTANCES = ("clearance", "creepage", "through_insulation")
# how a test voltage is called in the report; a peak value is what a d.c. test applies
_STRENGTH = {"peak": "dc", "dc": "dc", "rms": "rms"}


def barriers(analysis: Analysis, rulesets: Sequence[str], steps: Steps) -> list[BarrierShown]:
    """Each barrier with what lies across it, in the order of the domains."""
    across = analysis.isolation.across()
    return [_shown(analysis, barrier, across[barrier.between], rulesets, steps) for barrier in analysis.isolation.separations]


def separations(analysis: Analysis, rulesets: Sequence[str], steps: Steps) -> list[BarrierShown]:
    """What else the layout keeps apart, in the same shape."""
    return [_shown(analysis, separation, (), rulesets, steps) for separation in analysis.further]


def _shown(
    analysis: Analysis, separation: Separation, crossings: Sequence[Crossing], rulesets: Sequence[str], steps: Steps
) -> BarrierShown:
    asked = [grade for ruleset in rulesets if (grade := analysis.grades.get((ruleset, separation.id))) is not None]
    grades = [grade for grade in asked if grade.grade] or asked
    highest = max(grades, key=lambda grade: _grade_rank(grade.grade), default=None)
    declared = next((b for b in analysis.declaration.barriers if set(b.between) == set(separation.between)), None)
    return BarrierShown(
        id=separation.id,
        between=list(separation.between),
        grade=highest.grade if highest else "",
        bridged_by=list(separation.bridged_by),
        chains=[list(chain) for chain in separation.chains],
        working_voltage=_working_voltage(declared, analysis.stress.barriers.get(separation.id), steps),
        required=_required(analysis, rulesets, separation, "", steps),
        parts=[
            _bridging(analysis, separation, crossing, rulesets, steps)
            for crossing in sorted(crossings, key=lambda crossing: natural(crossing.part))
        ],
        reason=separation.reason,
        step=steps.id(highest.step if highest else separation.step),
    )


def _grade_rank(grade: str) -> int:
    return GRADES.index(grade) if grade in GRADES else len(GRADES)


def _working_voltage(declared: DeclaredBarrier | None, found: Voltage | None, steps: Steps) -> WorkingVoltage | None:
    """Each of r.m.s. and peak as declared, else what is never exceeded; None when neither is known."""
    facts, behind, values = list[Fact](), list[Step](), list[float | None]()
    for said, bounds in (
        (declared.rms if declared else None, found.rms if found else None),
        (declared.peak if declared else None, found.peak if found else None),
    ):
        if said is not None:
            facts.append(_declared_fact(said))
            values.append(significant(said.high))
        else:
            behind += [bounds.step] if bounds else []
            values.append(_highest(bounds))
    if not facts and not behind:
        return None
    text = "working voltage as declared" if not behind else "working voltage, the highest over the pairs of nets"
    return WorkingVoltage(rms=values[0], peak=values[1], step=steps.id(Step(text, (*facts, *_each_once(behind)))))


def _declared_fact(said: Range) -> Fact:
    return Fact("working_voltage", said.high, said.source, unit="V", form=said.form, text=said.text)


def _bridging(
    analysis: Analysis, separation: Separation, crossing: Crossing, rulesets: Sequence[str], steps: Steps
) -> BridgingPart:
    ratings = analysis.choice[crossing.part].ratings
    own = analysis.stress.across.get((crossing.part, separation.between))
    rms, peak = (own.rms, own.peak) if own is not None else (None, None)
    return BridgingPart(
        part=crossing.part,
        pins=[*crossing.sides[0], *crossing.sides[1]],
        rms=_highest(rms),
        peak=_highest(peak),
        required=_required(analysis, rulesets, separation, crossing.part, steps),
        provided={
            name: significant(float(fact.value))
            for name in _PROVIDED
            if (fact := ratings.get(name)) is not None and isinstance(fact.value, float)
        },
        how=crossing.how,
        listed=crossing.listed,
        step=steps.id(crossing.step),
        sides=[list(side) for side in crossing.sides],
        voltage_step=None
        if own is None
        else steps.id(Step("working voltage on its pins", _each_once((own.rms.step, own.peak.step)))),
    )


def _highest(bounds: Bounds | None) -> float | None:
    return None if bounds is None or bounds.never_above is None else significant(bounds.never_above)


def _required(analysis: Analysis, rulesets: Sequence[str], separation: Separation, part: str, steps: Steps) -> list[dict[str, Any]]:
    """One entry a ruleset that asks anything of the separation (part "") or of a part across it."""
    found = []
    for ruleset in rulesets:
        need = analysis.needs.get((ruleset, separation.id, part))
        figures = dict(_figures(need)) if need is not None else {}
        if need is not None and figures:
            found.append(_need(need, figures, part or " and ".join(separation.between), steps))
    return found


def _figures(need: Need) -> Iterator[tuple[str, Required]]:
    """(name, figure) of everything the ruleset asks; test voltages as `electric_strength.dc` and `.rms`."""
    for name in _DISTANCES:
        figure = getattr(need, name)
        if figure is not None:
            yield name, figure
    for form, figure in need.electric_strength.items():
        yield f"electric_strength.{_STRENGTH.get(form, form)}", figure


def _need(need: Need, figures: dict[str, Required], subject: str, steps: Steps) -> dict[str, Any]:
    """The figures that suffice, with a step each.

    at_least: what is needed in any case, of the figures whose voltage has two bounds. unbounded: those that nothing bounds from
    above; their value is what is needed at least, and `bounded` is then false. missing: the facts that settle both.
    """
    shown: dict[str, Any] = {"ruleset": need.ruleset, "grade": need.grade}
    numbers: dict[str, Any] = {}
    for name, figure in figures.items():
        value = significant(figure.at_least if figure.enough is None else figure.enough)
        group, _, form = name.partition(".")
        if form:
            shown.setdefault(group, {})[form] = value
            numbers.setdefault(group, {})[form] = steps.id(figure.step)
        else:
            shown[group], numbers[group] = value, steps.id(figure.step)
    whole = Step(f"what {need.ruleset} asks of {subject}", _each_once(figure.step for figure in figures.values()))
    shown |= {"step": steps.id(whole), "steps": numbers}
    shown["verified"] = max((figure.verified for figure in figures.values()), key=("true", "partial", "false").index)
    loose = {name: figure for name, figure in figures.items() if figure.enough != figure.at_least}
    if loose:
        shown["at_least"] = {name: significant(figure.at_least) for name, figure in loose.items()}
        shown["missing"] = list(dict.fromkeys(figure.missing for figure in loose.values() if figure.missing))
    unbounded = [name for name, figure in loose.items() if figure.enough is None]
    if unbounded:
        shown |= {"bounded": False, "unbounded": unbounded}
    return shown


def _each_once(steps: Iterable[Step]) -> tuple[Step, ...]:
    """Steps without repeats; by identity, since comparing two would walk their whole derivations."""
    return tuple({id(step): step for step in steps}.values())


def stress(analysis: Analysis, steps: Steps) -> list[StressShown]:
    """The highest voltage across every fitted part between two nets that the files bound, the supply at its upper limit."""
    shown = []
    for ref, part in analysis.design.parts.items():
        nets = part.nets()
        voltage = analysis.stress.between(*nets) if len(nets) == 2 else None
        if voltage is None or not voltage.peak.never_above:  # 0 V: nets that a fuse or choke ties, whose own drop is not counted
            continue
        bounds = voltage.peak
        shown.append(
            StressShown(
                part=ref,
                net=None,
                quantity="voltage",
                surely=significant(bounds.surely),
                never_above=_highest(bounds),
                unit=bounds.unit,
                form=bounds.form,
                kind=bounds.kind,
                condition="",
                step=steps.id(bounds.step),
            )
        )
    return shown
