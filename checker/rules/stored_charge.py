"""What voltage is left at the plug after it is pulled?

Capacitors across the line keep the peak of the mains on the pins of a pulled plug unless something takes their charge away. The
ruleset says how much may be left after how long (a table by capacitance: a small capacitor may keep more), for normal use and
with one fault. Charge is judged from the pins, between each two poles: capacitors from pole to pole, those from each pole to
protective earth in series, those before the rectifier of a supply without transformer. Ways are resistors from pole to pole in
strings of any length, a winding, a lamp with a filament, and circuits made to discharge the capacitor. A resistor behind the
rectifier is no way: the bulk capacitor holds the rectifier closed. Worst values count: the supply at its upper limit with
tolerance, capacitors and resistors at the upper end of theirs. What one pole keeps against earth alone is not judged.

Two verdicts for each entry of pluggable equipment. The first is over every state of the contacts: all closed, each switch open,
and each fuse blown, which is a fault: pass when what is left is within the limit in all of them, fail when it is above it even
with the best values or when there is no way at all. The second is with one resistor open: pass when a second way is enough,
or when the resistor is marked as tested for this place (`marks: [G.10]`); else open. Not applicable to equipment that is
permanently connected. Open too: a value that was not read, tolerances that alone decide, and a part from pole to pole of which
nobody says whether it takes the charge (a converter module, a filter block, a controller fed from both poles over diodes).

To settle it: values and tolerances in the bill of materials; `connection: permanent` in the declaration; `marks: [G.10]` on
resistors that passed the test for it, and on modules and circuits whose data sheet promises the discharge.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.formulas.discharge import left, most_ohms, usual_ohms
from checker.formulas.lookup import last, look_up
from checker.model.clause import Clause, Subject
from checker.model.entry import Entry
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.table import Table
from checker.model.verdict import OUTCOMES, Change, Limit, Missing, Number, Remedy, Verdict
from checker.parameters import AtMost, TableName, TextSet
from checker.rules.discharge_means import Means
from checker.rules.discharge_path import RESISTOR, Element, Plug, plugs
from checker.units import shown

_WHAT = "Voltage left at the plug after it is pulled."
_FAULT = "Voltage left at the plug with one discharge resistor open."


@dataclass(frozen=True, slots=True)
class Params:
    """time: after pulling the plug. limits: table of capacitance [F] against the voltage that may be left, columns `normal` and
    `fault` [V]. tested: marks of resistors that need not be taken as open, and of other parts that are made for this."""

    time: Annotated[float, AtMost("s")] = 2.0
    limits: Annotated[str, TableName()] = "charged-capacitor"
    tested: Annotated[tuple[str, ...], TextSet()] = ("G.10",)


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """Two verdicts per mains entry with capacitors across its pins."""
    mains, volts = analysis.setting.mains, analysis.setting.mains_voltage(tolerance=True)
    table = analysis.table(clause.ruleset, clause.params.limits)
    if mains is None or volts is None or table is None:
        return
    for entry in analysis.stress.entries.values():
        states = [plug for plug in plugs(analysis, entry) if plug.capacitors]
        if not states:
            continue
        if mains.connection == "permanent":
            subject = Subject((entry.ref,), entry.poles, key=(entry.ref, "plug"))
            step = Step(f"{entry.ref} is connected permanently: there is no plug to pull", (analysis.design.parts[entry.ref].fact,))
            yield clause.does_not_apply(subject, _WHAT, step.text, step)
            continue
        judge = _Judge(analysis, clause, entry, math.sqrt(2) * volts, table)
        normal = min((judge.state(plug) for plug in states), key=_badness)
        yield normal
        if normal.outcome == "pass":
            faults = [found for plug in states if not plug.fault and (found := judge.one_open(plug)) is not None]
            yield from sorted(faults, key=_badness)[:1]


def _badness(verdict: Verdict) -> tuple[int, float]:
    return OUTCOMES.index(verdict.outcome), verdict.margin if verdict.margin is not None else 0.0


@dataclass(frozen=True, slots=True)
class _Judge:
    """The pins of one entry, state by state. crest: the highest voltage between two poles, V peak."""

    analysis: Analysis
    clause: Clause
    entry: Entry
    crest: float
    table: Table

    def state(self, plug: Plug) -> Verdict:
        """What is left in one state of the contacts."""
        subject = self._subject(plug, "plug")
        start, column = self._start(plug), "fault" if plug.fault else "normal"
        high, low = plug.capacitance(1), plug.capacitance(-1)
        limit = self._limit(high, column)
        unread = next((one for one in (*plug.capacitors, *plug.resistors) if one.value is None), None)
        if unread is None and start <= limit:
            because = f"{shown(high, 'F')} may keep {limit:.4g} V, and the crest of the mains is {start:.4g} V"
            return self._compared("pass", subject, _WHAT, because, plug, start, limit)
        sure = [one for one in plug.means if self._takes(one, start, high, limit)]
        if sure:
            others = ", ".join(f"{one.ref} ({one.how})" for one in sure)
            because = f"{others} between the poles discharges {self._names(plug)}"
            return self.clause.passes(subject, _WHAT, because, self._step(plug, because, column))
        if unread is not None:
            return self._unread(subject, plug, unread, column)
        after, at_best = self._left(plug, 1), self._left(plug, -1)
        told = self._told(plug, after, limit)
        if after <= limit:
            return self._compared("pass", subject, _WHAT, told, plug, after, limit)
        doubt = self._doubt(plug)
        if doubt is None and at_best > self._limit(low, column):
            return self._compared("fail", subject, _WHAT, told, plug, after, limit, remedy=self._remedy(plug, limit))
        if doubt is None:
            doubt = told, self._tolerances(plug, at_best, after)
        step = self._step(plug, doubt[0], column, after)
        limit_shown = Limit(limit, "V", "peak", "at-most", self.clause.verified)
        return self.clause.opens(subject, _WHAT, doubt[0], step, doubt[1], found=Number(after, "V", "peak"), limit=limit_shown)

    def one_open(self, plug: Plug) -> Verdict | None:
        """The worst resistor of this state open; None when resistors are not the way or the charge cannot hurt then."""
        start, limit = self._start(plug), self._limit(plug.capacitance(1), "fault")
        if plug.means or not plug.resistors or start <= limit:
            return None
        tested = self.clause.params.tested
        untested = (found for found in plug.each_open() if self.analysis.choice[found[0].ref].marked(*tested) is None)
        worst, ohms = max(untested, key=lambda found: found[1], default=(None, math.inf))
        subject = self._subject(plug, "one resistor open", f"{worst.ref} open" if worst else "")
        if worst is None:
            because = f"{', '.join(one.ref for one in plug.resistors)} passed the test for this place"
            return self.clause.passes(subject, _FAULT, because, self._step(plug, because, "fault"))
        after = left(start, ohms, plug.capacitance(1), self.clause.params.time)
        because = f"with {worst.ref} open{self._state(plug, ' and ')} {after:.3g} V are left after {self.clause.params.time:g} s"
        if after <= limit:
            return self._compared("pass", subject, _FAULT, because, plug, after, limit, opened=(worst, ohms))
        missing = Missing(
            f"whether {worst.ref} passed the test of discharge resistors",
            f"marks: [{tested[0] if tested else 'G.10'}] in the declaration or a parts file, or a second string of resistors",
            (("it did", "pass"), ("it did not", "fail")), worst.ref,
        )  # fmt: skip
        limit_shown = Limit(limit, "V", "peak", "at-most", self.clause.verified)
        step = self._step(plug, because, "fault", after, (worst, ohms))
        return self.clause.opens(
            subject, _FAULT, because, step, missing, found=Number(after, "V", "peak"), limit=limit_shown
        )  # fmt: skip

    def _takes(self, one: Means, start: float, farads: float, limit: float) -> bool:
        """Whether a part is known to take the charge, and the resistors on the way to it let it do so in time."""
        known = one.sure or self.analysis.choice[one.ref].marked(*self.clause.params.tested) is not None
        slowest = one.ohms * (1 + RESISTOR / 100)
        return known and (not slowest or left(start, slowest, farads, self.clause.params.time) <= limit)

    def _start(self, plug: Plug) -> float:
        """The voltage at the moment the plug is pulled: the crest, of three phases less from one of them to the neutral."""
        mains = self.analysis.setting.mains
        star = mains is not None and mains.phases == 3 and self.entry.neutral in plug.pins
        return self.crest / math.sqrt(3) if star else self.crest

    def _limit(self, farads: float, column: str) -> float:
        """The voltage that may be left on that capacitance, V."""
        return (look_up(self.table, column, farads) or last(self.table, column)).value

    def _left(self, plug: Plug, sign: int) -> float:
        return left(self._start(plug), plug.ohms(sign), plug.capacitance(sign), self.clause.params.time)

    def _most(self, plug: Plug, limit: float) -> float:
        return most_ohms(self._start(plug), plug.capacitance(1), limit, self.clause.params.time)

    def _told(self, plug: Plug, after: float, limit: float) -> str:
        """The arithmetic in a sentence."""
        names, state, ohms = self._names(plug), self._state(plug, " with "), plug.ohms(1)
        if not math.isfinite(ohms):
            return f"nothing discharges {names}{state}: {after:.4g} V stay on the pins"
        most = self._most(plug, limit)
        constant = ohms * plug.capacitance(1)
        return (
            f"{names} with {shown(_three(ohms), 'ohm')}, time constant {shown(_three(constant), 's')}, keep {after:.3g} V after "
            f"{self.clause.params.time:g} s{state}; at most {shown(_three(most), 'ohm')} between the poles are enough, "
            f"{shown(usual_ohms(most / (1 + RESISTOR / 100)), 'ohm')} of the usual series with 5 %"
        )

    def _doubt(self, plug: Plug) -> tuple[str, Missing] | None:
        """A part that perhaps takes the charge, or takes it one way: what is said of it, and what would settle it."""
        if plug.means:
            one = plug.means[0]
            because = f"{self._names(plug)} and {one.ref} ({one.how}) lie between the poles"
            then = (("it takes the charge within the time", "pass"), ("it does not", "fail"))
            if one.sure and math.isfinite(one.ohms):
                because += f"; the resistors on the way to it, {shown(_three(one.ohms), 'ohm')} together, may be too large"
                supply_as = "smaller resistors, or a concession with the voltage that was measured"
            else:
                because += "; whether it takes the charge is not said"
                mark = self.clause.params.tested[0] if self.clause.params.tested else "G.10"
                supply_as = f"its data sheet: a resistor beside it, or parts: {{{one.ref}: {{marks: [{mark}]}}}} in the declaration"
            return because, Missing(f"whether {one.ref} takes the charge from the pins", supply_as, then, one.ref)
        if plug.one_way and not math.isfinite(plug.ohms(1)):
            because = f"{', '.join(plug.one_way)} lets the charge of {self._names(plug)} go one way only"
            then = (("there is one", "pass"), ("there is none", "fail"))
            supply_as = "a resistor from pole to pole, or a diode the other way round beside it"
            return because, Missing("a way for either polarity", supply_as, then, plug.one_way[0])
        return None

    def _tolerances(self, plug: Plug, at_best: float, after: float) -> Missing:
        then = ((f"{at_best:.3g} V left at the narrowest", "pass"), (f"{after:.3g} V left at the widest", "fail"))
        if not plug.resistors:
            names = plug.capacitors[0].ref
            then = (("so small that it may keep the peak", "pass"), ("larger", "fail"))
            return Missing(f"capacitance with its tolerance of {names}", "BOM column Tolerance", then, names)
        return Missing("tolerances of the capacitors and resistors", "BOM column Tolerance", then, plug.resistors[0].ref)

    def _remedy(self, plug: Plug, limit: float) -> Remedy | None:
        """Smaller resistors in every string, all by one factor, so that one of them may open where there are several strings."""
        ohms = plug.ohms(1)
        if not plug.resistors or not math.isfinite(ohms):
            return None
        factor = self._most(plug, limit) / ohms
        open_ohms = max(found for _, found in plug.each_open())
        if math.isfinite(open_ohms) and not plug.fault:
            factor = min(factor, self._most(plug, self._limit(plug.capacitance(1), "fault")) / open_ohms)
        values = {one.ref: usual_ohms(one.value * factor) for one in plug.resistors if one.value}
        text = ", ".join(f"{ref} {shown(value, 'ohm')}" for ref, value in values.items())
        return Remedy(text, tuple(Change(ref, "value", value, "ohm") for ref, value in values.items()))

    def _compared(
        self, outcome: str, subject: Subject, what: str, because: str, plug: Plug, after: float, limit: float, *,
        remedy: Remedy | None = None, opened: tuple[Element, float] | None = None,
    ) -> Verdict:  # fmt: skip
        shown_limit = Limit(limit, "V", "peak", "at-most", self.clause.verified)
        column = "fault" if plug.fault or what is _FAULT else "normal"
        step = self._step(plug, because, column, after, opened)
        found, margin = Number(after, "V", "peak"), (limit - after) / limit
        if outcome == "pass":
            return self.clause.passes(subject, what, because, step, found=found, limit=shown_limit, margin=margin)
        return self.clause.fails(subject, what, because, step, found=found, limit=shown_limit, margin=margin, remedy=remedy)

    def _unread(self, subject: Subject, plug: Plug, unread: Element, column: str) -> Verdict:
        what = "capacitance" if unread in plug.capacitors else "resistance"
        because = f"the {what} of {unread.ref} was not read"
        missing = Missing(what, "BOM column Value", (("known", "pass or fail"),), unread.ref)
        return self.clause.opens(subject, _WHAT, because, self._step(plug, because, column), missing)

    def _subject(self, plug: Plug, question: str, condition: str = "") -> Subject:
        parts = (*(one.ref for one in (*plug.capacitors, *plug.resistors)), *plug.opened)
        return Subject(tuple(dict.fromkeys(parts)), plug.pins, (self.entry.ref, question), condition or plug.text)

    def _names(self, plug: Plug) -> str:
        names = " and ".join(dict.fromkeys(one.ref for one in plug.capacitors))
        read = all(one.value for one in plug.capacitors)
        return f"{names} ({shown(_three(plug.capacitance(1)), 'F')} with tolerance)" if read else names

    def _state(self, plug: Plug, word: str) -> str:
        return f"{word}{plug.text}" if plug.text else ""

    def _step(
        self, plug: Plug, text: str, column: str, after: float | None = None, opened: tuple[Element, float] | None = None
    ) -> Step:
        """opened: the resistor that is open and the resistance left without it."""
        start = self._start(plug)
        crest = Step(
            "the supply at its upper limit with tolerance", self.analysis.setting.facts, formula="sqrt(2) x U", result=start,
            unit="V", form="peak",
        )  # fmt: skip
        held = Step(
            f"capacitance between {' and '.join(plug.pins)}: {_listed(plug.capacitors, 'F')}",
            tuple(fact for one in plug.capacitors for fact in one.facts), result=plug.capacitance(1), unit="F",
        )  # fmt: skip
        inputs = [crest, held]
        ohms = opened[1] if opened is not None else plug.ohms(1)
        if plug.resistors and math.isfinite(ohms):
            there = tuple(one for one in plug.resistors if opened is None or one.ref != opened[0].ref)
            said = f"resistance between {' and '.join(plug.pins)}: {_listed(there, 'ohm')}"
            inputs.append(Step(said, tuple(fact for one in there for fact in one.facts), result=ohms, unit="ohm"))
        found = look_up(self.table, column, plug.capacitance(1)) or last(self.table, column)
        which = "in normal use" if column == "normal" else "with one fault"
        inputs.append(
            Step(
                f"what the capacitance may keep {which}: {found.how}", (held,), result=found.value, unit="V", form="peak",
                citation=self.table.citation,
            )
        )  # fmt: skip
        formula = f"V0 x exp(-{self.clause.params.time:g} s / (R C))" if after is not None and math.isfinite(ohms) else ""
        result = {"result": after, "unit": "V", "form": "peak"} if after is not None else {}
        others = (self.analysis.design.parts[one.ref].fact for one in plug.means)
        return Step(text, (*inputs, *others), formula=formula, citation=self.table.citation, **result)  # type: ignore[arg-type]


def _listed(elements: tuple[Element, ...], unit: str) -> str:
    """Values with their tolerances, for people."""
    return ", ".join(
        f"{one.ref} {shown(one.value, unit) if one.value is not None else 'not read'} +{100 * one.spread:g} %"
        f"{'' if one.stated else ' (assumed)'}"
        for one in elements
    )


def _three(value: float) -> float:
    """Three significant digits, for people."""
    return float(f"{value:.3g}")


RULE = Rule("stored-charge", "shock", Params, ask, __doc__ or "")
