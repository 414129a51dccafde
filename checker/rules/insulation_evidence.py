"""What the papers of a part say of its insulation: approvals, named grades, and what shows neither."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Annotated

from checker.model.candidate import Candidate, Mark
from checker.model.fact import Fact
from checker.model.verdict import Number
from checker.parameters import AtLeast, TextSet

FUNCTIONAL, BASIC, REINFORCED = 0, 1, 2
_NAMED = {"functional": FUNCTIONAL, "basic": BASIC, "double": REINFORCED, "reinforced": REINFORCED}
SORTS = {
    "optocoupler": "coupler",
    "solid-state-relay": "coupler",
    "digital-isolator": "isolator",
    "isolated-driver": "isolator",
    "isolated-amplifier": "isolator",
    "transformer": "transformer",
    "gate-drive-transformer": "transformer",
    "current-transformer": "transformer",
    "relay": "relay",
    "isolated-module": "module",
    "hall-sensor": "sensor",
}
_KINDS = {
    "coupler": "a coupler",
    "isolator": "an isolator",
    "transformer": "a transformer",
    "relay": "a relay",
    "module": "an isolated module",
    "line_module": "a module on the mains",
    "sensor": "a current sensor",
}
_TRIPLE = "triple insulated"


@dataclass(frozen=True, slots=True)
class Params:
    """Approvals that show a grade, by kind of part: first those for reinforced (and every lesser) insulation.

    line_module: a module that makes the output from the mains itself; the others named `..._basic` show basic insulation and
    leave open whether it is more. functional_test: a module on the mains whose only statement is a test voltage up to this one
    has functional insulation.
    """

    coupler: Annotated[tuple[str, ...], TextSet()] = ("IEC 60747-5-5",)
    isolator: Annotated[tuple[str, ...], TextSet()] = ("IEC 60747-5-5",)
    transformer: Annotated[tuple[str, ...], TextSet()] = ("IEC 61558-2-16", "IEC 61558-2-6")
    line_module: Annotated[tuple[str, ...], TextSet()] = (
        "IEC 62368-1",
        "UL 62368-1",
        "IEC 60950-1",
        "IEC 60335-1",
        "IEC 60601-1",
        "IEC 61558-2-16",
    )
    isolator_basic: Annotated[tuple[str, ...], TextSet()] = ("IEC 60747-17", "VDE 0884-17", "VDE 0884-11", "VDE 0884-10")
    relay_basic: Annotated[tuple[str, ...], TextSet()] = ("IEC 61810-1",)
    sensor_basic: Annotated[tuple[str, ...], TextSet()] = ("IEC 62368-1", "UL 62368-1", "IEC 60950-1")
    functional_test: Annotated[float, AtLeast("V", "dc")] = 1500.0


@dataclass(frozen=True, slots=True)
class Shown:
    """What the papers say of a part's insulation. least, most: the lowest and highest grade, None when no grade is shown.

    text: what is stated, for a person. facts: where.
    """

    least: int | None
    most: int | None
    text: str
    facts: tuple[Fact, ...]


def in_short(candidate: Candidate) -> str:
    """The marks, else the test voltage, in short."""
    test = candidate.ratings.get("isolation_test")
    marks = ", ".join(mark.name for mark in candidate.marks)
    return marks or (f"tested with {volts(test)}" if test is not None else "not stated")


def named_grades(candidate: Candidate) -> list[Mark]:
    """The grades somebody names, of the most trusted source only."""
    marks = [mark for mark in candidate.marks if mark.name.lower() in _NAMED]
    best = max((mark.fact.trust for mark in marks), default=None)
    return [mark for mark in marks if mark.fact.trust == best]


def shown(candidate: Candidate, params: Params) -> Shown:
    """What the marks show, a named grade before an approval; test voltages and the like only explain what is missing."""
    reinforced, basic = approvals(candidate, params)
    found = [mark for mark in candidate.marks if mark.name in (*reinforced, *basic)]
    facts = tuple(mark.fact for mark in candidate.marks)
    named = named_grades(candidate)
    names = ", ".join(dict.fromkeys(mark.name for mark in (*found, *named)))
    if named:
        grades = [_NAMED[mark.name.lower()] for mark in named]
        said = f"its papers name {names}"
        return Shown(min(grades), max(grades), said + (", and not which holds here" if min(grades) < max(grades) else ""), facts)
    if any(mark.name in reinforced for mark in found):
        return Shown(REINFORCED, REINFORCED, f"it is marked {names}", facts)
    if found:
        return Shown(BASIC, None, f"it is marked {names}, which covers basic insulation and not always more", facts)
    return Shown(None, None, *_hints(candidate))


def _sort(candidate: Candidate) -> str:
    """The group of kinds that one set of approvals is for."""
    sort = SORTS[candidate.kind]
    return "line_module" if sort == "module" and "acdc" in candidate.attributes else sort


def approvals(candidate: Candidate, params: Params) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Names of the approvals for this kind of part: for reinforced, and for basic insulation."""
    reinforced: tuple[str, ...] = getattr(params, _sort(candidate), ())
    basic: tuple[str, ...] = getattr(params, f"{_sort(candidate)}_basic", ())
    return reinforced, basic


def _hints(candidate: Candidate) -> tuple[str, tuple[Fact, ...]]:
    """What is stated but shows no grade."""
    hints: list[str] = []
    facts: list[Fact] = []
    test, record = candidate.ratings.get("isolation_test"), candidate.marked("UL 1577")
    if test is not None or record is not None:
        said = " to ".join(([volts(test)] if test is not None else []) + (["UL 1577"] if record is not None else []))
        hints.append(f"{said} is a test voltage, which proves neither a working voltage nor a grade")
        facts += [fact for fact in (test, record.fact if record is not None else None) if fact is not None]
    if (triple := candidate.marked(_TRIPLE)) is not None:
        hints.append("triple-insulated wire is named, which is reinforced insulation only with an approval")
        facts.append(triple.fact)
    others = [mark for mark in candidate.marks if mark.name not in (_TRIPLE, "UL 1577")]
    if others:
        hints.append(f"{', '.join(mark.name for mark in others)} does not tell the grade of {_KINDS[_sort(candidate)]}")
        facts += [mark.fact for mark in others]
    return "; ".join(hints), tuple(facts)


def volts(one: Fact | Number) -> str:
    form = {"rms": " r.m.s.", "dc": " d.c.", "peak": " peak"}.get(one.form, "")
    return f"{float(one.value):.4g} V{form}"
