"""What voltage is left at the plug after it is pulled?

Capacitors across the line keep the peak of the mains on the pins of a pulled plug unless something takes their charge away. The
ruleset says how much may be left after how long (a table by capacitance: a small capacitor may keep more), for normal use and
with one fault. Charge is judged from the pins: capacitors between the poles, and from each pole to protective earth in series;
ways are resistors from pole to pole, in strings of any length, a transformer winding, a lamp or motor, and circuits made to
discharge the capacitor. A resistor behind the rectifier is no way: the bulk capacitor holds the rectifier closed. Worst
values count: the supply at its upper limit with tolerance, capacitors and resistors at the upper end of theirs.

Two verdicts for each entry of pluggable equipment with two poles. In normal use, over every state of the contacts (all closed,
each switch open, each fuse blown): pass when what is left is below the limit in all of them, fail when it is above it even with
the best values or when there is no way at all. With one resistor open: pass when a second way is enough, or when the
resistor is marked as tested for this place (`marks: [G.10]`); else open. Not applicable to equipment that is permanently
connected. Open too: a value that was not read, or tolerances that alone decide.

To settle it: values and tolerances in the bill of materials; `connection: permanent` in the declaration; `marks: [G.10]` on
resistors that passed the test for it.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.formulas.discharge import left, most_ohms
from checker.formulas.lookup import last, look_up
from checker.model.clause import Clause, Subject
from checker.model.entry import Entry
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.table import Table
from checker.model.verdict import OUTCOMES, Limit, Missing, Number, Verdict
from checker.parameters import AtMost, TableName, TextSet
from checker.rules.discharge_path import Element, Plug, plugs
from checker.units import shown

_WHAT = "Voltage left at the plug after it is pulled."
_FAULT = "Voltage left at the plug with one discharge resistor open."


@dataclass(frozen=True, slots=True)
class Params:
    """time: after pulling the plug. limits: table of capacitance [F] against the voltage that may be left, columns `normal` and
    `fault` [V]. tested: marks of resistors that need not be taken as open."""

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
        normal = min((judge.normal(plug) for plug in states), key=_badness)
        yield normal
        if normal.outcome == "pass" and not states[0].text:
            fault = judge.one_open(states[0])
            if fault is not None:
                yield fault


def _badness(verdict: Verdict) -> tuple[int, float]:
    return OUTCOMES.index(verdict.outcome), verdict.margin if verdict.margin is not None else 0.0


@dataclass(frozen=True, slots=True)
class _Judge:
    analysis: Analysis
    clause: Clause
    entry: Entry
    start: float  # V, the crest of the mains
    table: Table

    def limit(self, farads: float, column: str) -> float:
        """The voltage that may be left on that capacitance, V."""
        found = look_up(self.table, column, farads) or last(self.table, column)
        return found.value

    def normal(self, plug: Plug) -> Verdict:
        subject = self._subject(plug, "plug")
        other = plug.windings or plug.loads or plug.dischargers
        high, low = plug.capacitance(1), plug.capacitance(-1)
        limit = self.limit(high, "normal")
        unread = next((one for one in (*plug.capacitors, *plug.resistors) if one.value is None), None)
        if unread is None and self.start <= limit:
            because = f"{shown(high, 'F')} may keep {limit:.4g} V, and the crest of the mains is {self.start:.4g} V"
            return self.clause.passes(
                subject, _WHAT, because, self._step(plug, because, self.start), found=self._number(self.start)
            )
        if other:
            what = "winding" if plug.windings else "load" if plug.loads else "discharge circuit"
            because = f"{', '.join(other)} discharges {self._names(plug)} ({what} between the poles)"
            return self.clause.passes(subject, _WHAT, because, self._step(plug, because))
        if unread is not None:
            return self._unread(subject, plug, unread)
        after = self._left(plug, 1)
        modules = self._modules(plug)
        if not math.isfinite(plug.ohms(1)) and modules:
            because = (
                f"{self._names(plug)} and {', '.join(modules)} lie across the pins; whether the module takes the charge is not said"
            )
            then = (("it does within the time", "pass"), ("it does not", "fail"))
            supply_as = f"its data sheet: a resistor beside it, or parts: {{{modules[0]}: {{marks: [G.10]}}}} in the declaration"
            missing = Missing("whether the module discharges its input", supply_as, then, modules[0])
            if self.analysis.choice[modules[0]].marked(*self.clause.params.tested) is not None:
                return self.clause.passes(subject, _WHAT, f"{modules[0]} discharges its input", self._step(plug, because))
            return self.clause.opens(subject, _WHAT, because, self._step(plug, because), missing)
        if not math.isfinite(plug.ohms(1)) and plug.one_way:
            because = f"{', '.join(plug.one_way)} lets the charge of {self._names(plug)} go one way only"
            missing = Missing(
                "a way for either polarity", "a resistor from pole to pole, or a diode the other way round beside it",
                (("there is one", "pass"), ("there is none", "fail")), plug.one_way[0],
            )  # fmt: skip
            return self.clause.opens(subject, _WHAT, because, self._step(plug, because), missing)
        if not math.isfinite(plug.ohms(1)):
            because = f"nothing discharges {self._names(plug)}{self._state(plug)}: {after:.4g} V stay on the pins"
            return self._compared("fail", subject, _WHAT, because, plug, after, limit)
        at_best = self._left(plug, -1)
        told = (
            f"{self._names(plug)} with {shown(plug.ohms(1), 'ohm')} keep {after:.3g} V after {self.clause.params.time:g} s"
            f"{self._state(plug)}; at most {self._most(high, limit)} between the poles are enough"
        )
        if after <= limit:
            return self._compared("pass", subject, _WHAT, told, plug, after, limit)
        if at_best > self.limit(low, "normal"):
            return self._compared("fail", subject, _WHAT, told, plug, after, limit)
        missing = Missing(
            "tolerances of the capacitors and resistors", "BOM column Tolerance",
            ((f"{at_best:.3g} V left at the narrowest", "pass"), (f"{after:.3g} V left at the widest", "fail")),
            plug.resistors[0].ref,
        )  # fmt: skip
        return self.clause.opens(subject, _WHAT, told, self._step(plug, told, after), missing, found=self._number(after))

    def _modules(self, plug: Plug) -> tuple[str, ...]:
        """Converter modules with both poles on the line behind the pins."""
        poles = self.analysis.stress.poles
        return tuple(
            ref
            for ref, candidate in self.analysis.choice.items()
            if candidate.kind == "isolated-module"
            and {poles.get(net) for net in self.analysis.design.parts[ref].nets()} >= {*plug.pins}
        )

    def one_open(self, plug: Plug) -> Verdict | None:
        """The plug with each resistor open in turn; None when resistors are not the way."""
        if (
            plug.windings
            or plug.loads
            or plug.dischargers
            or not plug.resistors
            or self.start <= self.limit(plug.capacitance(1), "fault")
        ):
            return None
        tested = self.clause.params.tested
        open_ = [one for one in plug.resistors if self.analysis.choice[one.ref].marked(*tested) is None]
        limit = self.limit(plug.capacitance(1), "fault")
        worst = max(open_, key=lambda one: self._left(plug, 1, one.ref), default=None)
        if worst is None:
            because = f"{', '.join(one.ref for one in plug.resistors)} passed the test for this place"
            subject = self._subject(plug, "one resistor open")
            return self.clause.passes(subject, _FAULT, because, self._step(plug, because))
        after = self._left(plug, 1, worst.ref)
        subject = self._subject(plug, "one resistor open", f"{worst.ref} open")
        because = f"with {worst.ref} open {after:.3g} V are left after {self.clause.params.time:g} s"
        if after <= limit:
            return self._compared("pass", subject, _FAULT, because, plug, after, limit)
        missing = Missing(
            f"whether {worst.ref} passed the test of discharge resistors",
            f"marks: [{tested[0] if tested else 'G.10'}] in the declaration or a parts file, or a second string of resistors",
            (("it did", "pass"), ("it did not", "fail")), worst.ref,
        )  # fmt: skip
        limit_shown = Limit(limit, "V", "peak", "at-most", self.clause.verified)
        return self.clause.opens(
            subject, _FAULT, because, self._step(plug, because, after), missing, found=self._number(after), limit=limit_shown
        )

    def _left(self, plug: Plug, sign: int, without: str = "") -> float:
        return left(self.start, plug.ohms(sign, without), plug.capacitance(sign), self.clause.params.time)

    def _most(self, farads: float, limit: float) -> str:
        return shown(most_ohms(self.start, farads, limit, self.clause.params.time), "ohm")

    def _compared(self, outcome: str, subject: Subject, what: str, because: str, plug: Plug, after: float, limit: float) -> Verdict:
        made = self.clause.passes if outcome == "pass" else self.clause.fails
        shown_limit = Limit(limit, "V", "peak", "at-most", self.clause.verified)
        step = self._step(plug, because, after)
        return made(subject, what, because, step, found=self._number(after), limit=shown_limit, margin=(limit - after) / limit)

    def _unread(self, subject: Subject, plug: Plug, unread: Element) -> Verdict:
        what = "capacitance" if unread in plug.capacitors else "resistance"
        because = f"the {what} of {unread.ref} was not read"
        missing = Missing(what, "BOM column Value", (("known", "pass or fail"),), unread.ref)
        return self.clause.opens(subject, _WHAT, because, self._step(plug, because), missing)

    def _subject(self, plug: Plug, question: str, condition: str = "") -> Subject:
        parts = (*(one.ref for one in (*plug.capacitors, *plug.resistors)), *plug.opened)
        return Subject(tuple(dict.fromkeys(parts)), plug.pins, (self.entry.ref, question), condition or plug.text)

    def _names(self, plug: Plug) -> str:
        names = " and ".join(dict.fromkeys(one.ref for one in plug.capacitors))
        return f"{names} ({shown(plug.capacitance(1), 'F')} with tolerance)" if all(one.value for one in plug.capacitors) else names

    def _state(self, plug: Plug) -> str:
        return f" with {plug.text}" if plug.text else ""

    def _step(self, plug: Plug, text: str, after: float | None = None) -> Step:
        facts: list[Fact] = [fact for one in (*plug.capacitors, *plug.resistors) for fact in one.facts]
        crest = Step(
            "the supply at its upper limit",
            self.analysis.setting.facts,
            formula="sqrt(2) x U",
            result=self.start,
            unit="V",
            form="peak",
        )
        return Step(
            text, (crest, *facts), formula="V0 x exp(-t / (R C))" if after is not None else "", result=after, unit="V", form="peak",
            citation=self.table.citation,
        )  # fmt: skip

    def _number(self, volts: float) -> Number:
        return Number(volts, "V", "peak")


RULE = Rule("stored-charge", "shock", Params, ask, __doc__ or "")
