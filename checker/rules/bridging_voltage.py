"""What the classed capacitors of a chain across a mains barrier are rated for, and whether two in series are alike."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from checker import units
from checker.formulas.derating import ALTERNATING, next_usual
from checker.model.clause import Clause, Subject
from checker.model.domain import Crossing
from checker.model.fact import Fact
from checker.model.rule import Analysis
from checker.model.step import Step
from checker.model.verdict import Change, Limit, Missing, Number, Remedy, Verdict, Words

WHAT = "Rated voltage of the capacitors across this barrier, each for the whole mains voltage."
SPLIT = "Two capacitors in series across this barrier have the same capacitance."
OF_CLASS = {"Y2": 150.0}  # V r.m.s.; the least rated voltage of a class, IEC 60384-14 (standards list, partly from memory)


@dataclass(frozen=True, slots=True)
class _Rated:
    """A capacitor and the a.c. voltage it is surely good for and may at most be good for, V r.m.s.; most None: nothing says."""

    ref: str
    least: float
    most: float | None
    text: str
    facts: tuple[Fact, ...]


def of_voltage(
    analysis: Analysis, clause: Clause, crossing: Crossing, members: Sequence[tuple[str, str]], nets: tuple[str, ...]
) -> Iterator[Verdict]:
    """One verdict for a chain from the mains whose members (reference, class) have a class Y."""
    mains = analysis.setting.mains
    volts = analysis.setting.mains_voltage(tolerance=False)
    if mains is None or volts is None or not members or not from_mains(analysis, crossing):
        return
    three = mains.phases == 3
    need = volts / math.sqrt(3) if three else volts
    rated = [_rated(analysis, ref, name) for ref, name in members]
    weakest = min(rated, key=lambda one: (math.inf if one.most is None else one.most, one.least))
    supply = Step(
        f"rated mains voltage without tolerance{', line to neutral' if three else ''}", analysis.setting.facts,
        formula="U / sqrt(3)" if three else "", result=need, unit="V", form="rms",
    )  # fmt: skip
    because = f"{'; '.join(one.text for one in rated)}; the mains is {_volts(need)}"
    step = Step(because, (crossing.step, supply, *(fact for one in rated for fact in one.facts)))
    subject = Subject(crossing.chain, nets, key=(*crossing.chain, "voltage"))
    limit = Limit(need, "V", "rms", "at-least", clause.verified)
    if all(one.least >= need for one in rated):
        least = min(one.least for one in rated)
        margin = (least - need) / need
        yield clause.passes(subject, WHAT, because, step, found=Number(least, "V", "rms"), limit=limit, margin=margin)
    elif weakest.most is not None and weakest.most < need:
        yield _too_low(analysis, clause, subject, rated, weakest, need, step)
    else:
        asked = next(one for one in rated if one.least < need)
        then = ((f"{_volts(need)} or more", "pass"), (f"less than {_volts(need)}", "fail"))
        missing = Missing("rated a.c. voltage", "BOM column Voltage such as 250 VAC, or ratings in a parts file", then, asked.ref)
        yield clause.opens(subject, WHAT, because, step, missing, limit=limit)


def _too_low(
    analysis: Analysis, clause: Clause, subject: Subject, rated: Sequence[_Rated], weakest: _Rated, need: float, step: Step
) -> Verdict:
    assert weakest.most is not None
    found, limit = Number(weakest.most, "V", "rms"), Limit(need, "V", "rms", "at-least", clause.verified)
    assumed = any(item.key == "supply.mains" for item in analysis.setting.assumptions)
    if assumed and analysis.setting.rated is not None and weakest.most >= analysis.setting.rated.low:
        then = ((f"{_volts(weakest.most)} at most", "pass"), ("more", "fail"))
        missing = Missing("supply", "supply: {mains: ...} in the declaration", then)
        return clause.opens(subject, WHAT, step.text, step, missing, found=found, limit=limit)
    low = [one.ref for one in rated if one.most is not None and one.most < need]
    usual = next_usual(need, ALTERNATING)
    remedy = None
    if usual is not None:
        changes = tuple(Change(ref, "rating:voltage", usual, "V", "rms") for ref in low)
        remedy = Remedy(f"{' and '.join(low)} rated {_volts(usual)} or more", changes)
    margin = (weakest.most - need) / need
    return clause.fails(subject, WHAT, step.text, step, found=found, limit=limit, margin=margin, remedy=remedy)


def _rated(analysis: Analysis, ref: str, name: str) -> _Rated:
    """A figure without a form is a.c. on a part of class Y, which has no other rating; a d.c. figure says no more than that an
    a.c. voltage with a higher crest is too much."""
    candidate = analysis.choice[ref]
    rating, mark = candidate.ratings.get("voltage"), candidate.marked(name)
    classed = () if mark is None else (mark.fact,)
    if rating is None:
        least = OF_CLASS.get(name, 0.0)
        text = f"{ref}: no rated voltage is stated, class {name}"
        return _Rated(ref, least, None, text + (f" is never below {_volts(least)}" if least else ""), classed)
    volts = float(rating.value)
    if rating.form in ("dc", "peak"):
        text = f"{ref}: {units.shown(volts, 'V', rating.form)} says nothing of a.c."
        most = volts / math.sqrt(2)
        known = _Rated(ref, 0.0, most, text, (rating, *classed))
        return known if most < _highest(analysis) else _Rated(ref, 0.0, None, text, (rating, *classed))
    return _Rated(ref, volts, volts, f"{ref}: {_volts(volts)}", (rating, *classed))


def _highest(analysis: Analysis) -> float:
    return analysis.setting.mains_voltage(tolerance=False) or 0.0


def of_split(
    analysis: Analysis, clause: Clause, crossing: Crossing, members: Sequence[tuple[str, str]], nets: tuple[str, ...]
) -> Iterator[Verdict]:
    """One verdict for a chain from the mains that satisfies its grade only because it has two members with a class."""
    if len(members) < 2 or not from_mains(analysis, crossing):
        return
    refs = [ref for ref, _ in members]
    values = {ref: None if (fact := analysis.choice[ref].value) is None else float(fact.value) for ref in refs}
    shown = " + ".join("unknown" if value is None else units.shown(value, "F") for value in values.values())
    facts = tuple(fact for ref in refs if (fact := analysis.choice[ref].value) is not None)
    step = Step(f"{' - '.join(refs)}: {shown}", (crossing.step, *facts))
    subject = Subject(crossing.chain, nets, key=(*crossing.chain, "split"))
    words = {"found": Words(shown), "limit": Words("equal")}
    known = [value for value in values.values() if value is not None]
    if known and max(known) > min(known) * (1 + 1e-6):
        least = min(known)
        larger = [ref for ref, value in values.items() if value is not None and value > least]
        changes = tuple(Change(ref, "value", least, "F") for ref in larger)
        remedy = Remedy(f"{' and '.join(larger)} {units.shown(least, 'F')}", changes)
        because = f"{shown} in series: the smaller one takes most of the voltage"
        yield clause.fails(subject, SPLIT, because, step, remedy=remedy, **words)
    elif len(known) < len(refs):
        unread = next(ref for ref in refs if values[ref] is None)
        then = (("equal", "pass"), ("different", "fail"))
        missing = Missing("value", f"value of {unread} in the netlist or the BOM", then, unread)
        yield clause.opens(subject, SPLIT, f"the capacitance of {unread} is not stated", step, missing, **words)
    else:
        yield clause.passes(subject, SPLIT, f"{shown} in series", step, **words)


def from_mains(analysis: Analysis, crossing: Crossing) -> bool:
    """Whether the mains itself is on one side of a chain."""
    return any(analysis.isolation.domains[name].hazard == "mains" for name in crossing.between)


def _volts(value: float) -> str:
    return units.shown(float(f"{value:.4g}"), "V", "rms").replace(" rms", " a.c.")
