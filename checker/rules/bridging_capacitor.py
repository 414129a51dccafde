"""Are the capacitors across a barrier of the right class and voltage, enough of them, and on a quiet node?

A capacitor across insulation is part of it: when it fails short, the barrier is gone. IEC 60384-14 classes say what a
capacitor may bridge: Y1 double or reinforced insulation, Y2 (and Y1) basic or supplementary; class X is for places where a
failure cannot shock. The ruleset says which arrangements each grade accepts (`Y1`, `Y2+Y2`: two in series).

Per chain across a barrier: pass when its classes satisfy the needed grade; fail when a class is stated that does not, when
no class is stated by anything that was read and the part is described completely enough to tell that it is an ordinary one
(a rated voltage that is no a.c. rating, and no class), and when the chain hangs on a switching node (a winding with its
switch or rectifier), where it would carry the switching voltage across. Open when the grade is not known, when nothing but a
value is stated about the part, or when it is rated for a.c. as safety capacitors are and only the class is missing.

Where the mains is on one side, every capacitor with a class Y must be rated, in a.c. r.m.s., for the whole rated mains voltage
without tolerance, also in a series, where either may fail short. A d.c. figure proves nothing about a.c., and a class
alone only that Y2 is good for 150 V: open then, once per chain. Two in series that are accepted only because they are two
must have the same capacitance, so that they share the voltage.

To settle it: BOM columns `Class` and `Voltage`, or `marks: [Y1]` and `ratings: {voltage: 250 V rms}` in a parts file or the
declaration.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.candidate import Candidate
from checker.model.clause import Clause, Subject
from checker.model.domain import Crossing
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict, Words
from checker.parameters import Flag, TextSet
from checker.rules.bridging_voltage import of_split, of_voltage

_CLASSES = ("Y1", "Y2", "Y3", "Y4", "X1", "X2", "X3")
_RANK = {"Y1": 3, "Y2": 2, "Y4": 1, "Y3": 1}
BULK = 0.9e-6  # F; a node with this much capacitance to its own circuit is quiet (common practice, no source)


@dataclass(frozen=True, slots=True)
class Params:
    """Accepted arrangements by grade: a class, or classes in series joined by `+`; any order, better classes count too.

    equal: whether capacitors that are accepted only as a series must have the same capacitance.
    """

    reinforced: Annotated[tuple[str, ...], TextSet()] = ("Y1", "Y2+Y2")
    basic: Annotated[tuple[str, ...], TextSet()] = ("Y1", "Y2")
    equal: Annotated[bool, Flag()] = True


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """Per chain of capacitors: its class, the node it hangs on, its rated voltage, and how a series divides it."""
    seen: set[tuple[tuple[str, ...], tuple[str, str]]] = set()
    for crossing in analysis.isolation.crossings:
        if crossing.how != "capacitor" or (crossing.chain, crossing.between) in seen:
            continue
        seen.add((crossing.chain, crossing.between))
        classed = _of_class(analysis, clause, crossing)
        yield classed
        yield from _of_node(analysis, clause, crossing)
        nets = _end_nets(analysis, crossing)
        classes = ((ref, _class_of(analysis.choice[ref])) for ref in crossing.chain)
        members = [(ref, name) for ref, name in classes if name is not None and _rank(name)]
        for verdict in of_voltage(analysis, clause, crossing, members, nets):
            if verdict.outcome != "open" or classed.outcome != "fail":  # a part that must go need not be asked about
                yield verdict
        if clause.params.equal and _needs_series(analysis, clause, crossing, members):
            yield from of_split(analysis, clause, crossing, members, nets)


def _needs_series(analysis: Analysis, clause: Clause, crossing: Crossing, members: list[tuple[str, str]]) -> bool:
    """Whether the chain is accepted as a series and none of its members would be alone."""
    grade = analysis.grades[(clause.ruleset, "|".join(crossing.between))].grade
    wanted = {"basic": clause.params.basic, "supplementary": clause.params.basic}.get(grade, clause.params.reinforced)
    alone = any(_satisfies([name], arrangement) for _, name in members for arrangement in wanted)
    return not alone and any(_satisfies([name for _, name in members], arrangement) for arrangement in wanted)


def _of_class(analysis: Analysis, clause: Clause, crossing: Crossing) -> Verdict:
    barrier = "|".join(crossing.between)
    grade = analysis.grades[(clause.ruleset, barrier)]
    subject = Subject(crossing.chain, _end_nets(analysis, crossing), key=(*crossing.chain, "class"))
    classes = [_class_of(analysis.choice[ref]) for ref in crossing.chain]
    shown = " + ".join(name or "no class" for name in classes)
    facts = tuple(mark.fact for ref in crossing.chain for mark in analysis.choice[ref].marks) or tuple(
        fact for ref in crossing.chain for fact in _telling(analysis, ref)
    )
    step = Step(
        f"{' - '.join(crossing.chain)}: {shown}; needed across {barrier}: {grade.grade or 'not known'}",
        (*facts, crossing.step, grade.step),
    )
    what = "Class of the capacitors across this barrier."
    if grade.grade in ("none", "functional"):
        return clause.does_not_apply(subject, "These capacitors bridge functional insulation only.", grade.step.text, step)
    wanted = clause.params.basic if grade.grade in ("basic", "supplementary") else clause.params.reinforced
    if not grade.grade:
        if all(_rank(name) >= 3 for name in classes):
            return clause.passes(
                subject, what, f"class {shown} bridges every grade", step, found=Words(shown), limit=Words(", ".join(wanted))
            )
        missing = Missing(
            "the hazardous source, which sets the grade",
            "supply: in the declaration",
            (("mains", "fail unless Y1 or Y2"), ("none", "not-applicable")),
        )
        return clause.opens(subject, what, grade.step.text, step, missing, found=Words(shown))
    words = {"found": Words(shown), "limit": Words(" or ".join(wanted))}
    if any(_satisfies(classes, arrangement) for arrangement in wanted):
        return clause.passes(subject, what, f"{grade.grade} insulation accepts {shown}", step, **words)
    if not _from_mains(analysis, crossing):
        answers = (
            ("Y1 or Y2", "pass"),
            ("none, but made and tested for this insulation", "pass with a concession"),
            ("none", "fail"),
        )
        missing = Missing("class", "BOM column Class, or marks in a parts file", answers, crossing.chain[0])
        because = (
            f"{grade.grade} insulation from a d.c. source, the chain is {shown}; whether a class is needed is not settled here"
        )
        return clause.opens(subject, what, because, step, missing, **words)
    unknown = [
        ref for ref, name in zip(crossing.chain, classes, strict=True) if name is None and not _described(analysis.choice[ref])
    ]
    if unknown and any(_satisfies([name or "Y1" for name in classes], arrangement) for arrangement in wanted):
        then = tuple(
            (name, "pass" if any(_satisfies([c or name for c in classes], a) for a in wanted) else "fail")
            for name in ("Y1", "Y2", "none")
        )
        missing = Missing("class", "BOM column Class, or marks in a parts file", then, unknown[0])
        because = (
            f"nothing that was read states a class or rating of {', '.join(unknown)}; {grade.grade} insulation "
            f"needs {' or '.join(wanted)}"
        )
        return clause.opens(subject, what, because, step, missing, **words)
    return clause.fails(
        subject,
        what,
        f"{grade.grade} insulation needs {' or '.join(wanted)}, the chain is {shown} ({_said(analysis, crossing)})",
        step,
        **words,
    )


def _telling(analysis: Analysis, ref: str) -> list[Fact]:
    """What the papers say a capacitor is, the most trusted first."""
    said = [
        fact
        for fact in analysis.design.parts[ref].facts
        if fact.attribute in ("value", "description", "type", "mark", "rating:voltage")
    ]
    return sorted(said, key=lambda fact: -fact.trust)[:5]


def _from_mains(analysis: Analysis, crossing: Crossing) -> bool:
    """Whether the mains is on one side, directly or through a d.c. source made from it without isolation; any other d.c. source
    is another matter, nothing known is taken for the mains."""
    hazards = {analysis.isolation.domains[name].hazard for name in crossing.between}
    direct = any(supply.kind == "dc" and supply.origin == "mains" for supply in analysis.setting.supplies)
    return "mains" in hazards or "dc" not in hazards or direct


def _class_of(candidate: Candidate) -> str | None:
    """The best class marked on a capacitor, Y before X; None when no class is stated."""
    names = [mark.name for mark in candidate.marks if mark.name in _CLASSES]
    return min(names, key=_CLASSES.index) if names else None


def _rank(name: str | None) -> int:
    return _RANK.get(name or "", 0)


def _satisfies(classes: list[str | None] | list[str], arrangement: str) -> bool:
    """Whether a chain has, for each class of the arrangement, one capacitor of at least that class."""
    wanted = sorted((_rank(name) for name in arrangement.split("+")), reverse=True)
    have = sorted((_rank(name) for name in classes), reverse=True)
    return len(have) >= len(wanted) and all(there >= need > 0 for there, need in zip(have, wanted, strict=False))


def _described(candidate: Candidate) -> bool:
    """Whether a missing class means an ordinary capacitor: a rated voltage is stated, and it is no a.c. rating as safety
    capacitors have it."""
    rating = candidate.ratings.get("voltage")
    return rating is not None and rating.form != "rms"


def _said(analysis: Analysis, crossing: Crossing) -> str:
    texts = []
    for ref in crossing.chain:
        part, rating = analysis.design.parts[ref], analysis.choice[ref].ratings.get("voltage")
        texts.append(
            f"{ref}: {part.text('description') or part.text('value')}" + (f", {float(rating.value):g} V" if rating else "")
        )
    return "; ".join(texts)


def _end_nets(analysis: Analysis, crossing: Crossing) -> tuple[str, ...]:
    """The nets the two ends of the chain hang on."""
    nets = []
    for ref in dict.fromkeys((crossing.chain[0], crossing.chain[-1])):
        nets += [net for net in analysis.design.parts[ref].nets() if analysis.isolation.domain_of.get(net) in crossing.between]
    return tuple(dict.fromkeys(nets))


def _of_node(analysis: Analysis, clause: Clause, crossing: Crossing) -> Iterator[Verdict]:
    if analysis.grades[(clause.ruleset, "|".join(crossing.between))].grade in ("none", "functional", ""):
        return
    nets = _end_nets(analysis, crossing)
    subject = Subject(crossing.chain, nets, key=(*crossing.chain, "node"))
    facts = tuple(analysis.design.nets[net].fact for net in nets)
    hangs = f"{' - '.join(crossing.chain)} hangs on"
    for net in nets:
        swings = _swings(analysis, net, crossing.chain)
        if swings is None:
            continue
        step = Step(f"{hangs} {net}: {swings.because}", (crossing.step, *facts))
        if swings.doubt is None:
            yield clause.fails(
                subject, "A capacitor across the barrier hangs on a switching node.", step.text, step, found=Words(net)
            )
        else:
            answers = (("a switch or rectifier of the winding", "fail"), ("anything else", "pass"))
            missing = Missing("kind", f"parts: {{{swings.doubt}: {{kind: ...}}}} in the declaration", answers, swings.doubt)
            yield clause.opens(subject, "Whether the node of this capacitor is quiet.", step.text, step, missing, found=Words(net))
        return
    step = Step(f"{hangs} {' and '.join(nets)}, no winding is switched or rectified there", (crossing.step, *facts))
    what = "The capacitors across the barrier hang on quiet nodes."
    yield clause.passes(subject, what, step.text, step, found=Words(", ".join(nets)))


@dataclass(frozen=True, slots=True)
class _Swings:
    """Why a net swings with the converter. doubt: the part whose unknown kind or value leaves it open, None when it is sure."""

    because: str
    doubt: str | None = None


_MOVERS = frozenset({"mosfet", "igbt", "bipolar", "diode", "controller", "regulator"})
_PERHAPS = frozenset({"unknown", "ic", "module"})
_HOLDERS = frozenset({"connector", "inlet", "bridge", "fuse"})
CROWDED = 8  # parts on a net from which on it is a reference conductor, not a switching node (common practice, no source)


def _swings(analysis: Analysis, net: str, chain: tuple[str, ...]) -> _Swings | None:
    """A winding and a switch or rectifier meet on the net and nothing beside the chain holds it; None when that is not so."""
    found = dict.fromkeys(ref for ref, _ in analysis.design.nets[net].pins if ref in analysis.choice and ref not in chain)
    refs = [ref for ref in found if analysis.design.parts[ref].fitted]
    kinds = {ref: analysis.kind(ref) for ref in refs}
    winding = next((ref for ref, kind in kinds.items() if kind in ("transformer", "gate-drive-transformer", "inductor")), None)
    mover = next((ref for ref, kind in kinds.items() if kind in _MOVERS), None)
    perhaps = next((ref for ref, kind in kinds.items() if kind in _PERHAPS), None)
    if winding is None or (mover or perhaps) is None or len(refs) >= CROWDED or _HOLDERS & set(kinds.values()):
        return None
    values = {ref: analysis.choice[ref].value for ref, kind in kinds.items() if kind == "capacitor"}
    if any(value is not None and float(value.value) >= BULK for value in values.values()):
        return None
    unread = next((ref for ref, value in values.items() if value is None), None)
    because = f"winding of {winding} and {mover or perhaps} meet there"
    return _Swings(because, unread if mover else perhaps)


RULE = Rule("bridging-capacitor", "shock", Params, ask, __doc__ or "")
