"""Does each part across a barrier withstand the test voltage that its insulation needs?

The test voltage the maker states (one minute, as UL 1577 and most data sheets give it) is compared with the highest that the
ruleset asks by transients, working voltage and temporary overvoltage. Like is compared with like: an r.m.s. figure with the
r.m.s. equivalent, peak and d.c. with the peak. A test voltage says nothing of the voltage a part may work at for years.

Pass when the stated voltage is enough whatever is still unknown; fail when it is less than what is needed in any case; open in
between, when the figure has no form and only one of r.m.s. and d.c. is enough, and when a part states something about its
insulation but no test voltage. Nothing is asked of a part that states nothing at all: the rule on its grade asks first.

To settle it: BOM column `Isolation voltage` such as `5000 V rms`, or `ratings: {isolation_test: 5000 V rms}` in a parts file.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.clause import Clause
from checker.model.fact import Fact
from checker.model.requirement import Required
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Change, Missing, Number, Remedy, Verdict
from checker.parameters import TableName
from checker.rules.insulating_parts import STATED, Across, answers, approval, compared, covered, figure, judged, limit_of, needed

WHAT = "Electric strength of this part across the barrier."
SUPPLY_AS = "BOM column Isolation voltage with V rms or V dc, or ratings: {isolation_test: 5000 V rms} in a parts file"
USUAL = (1500.0, 2500.0, 3000.0, 3750.0, 4000.0, 5000.0, 5300.0, 7500.0)  # V r.m.s., as makers offer (common practice, no source)


@dataclass(frozen=True, slots=True)
class Params:
    """Tables of test voltages, columns `basic` and `reinforced`: transient by impulse voltage, temporary by mains voltage.

    Tables of factors by grade: working on the peak working voltage, overvoltage on the temporary overvoltage.
    """

    transient: Annotated[str, TableName(more=True)] = ""
    temporary: Annotated[str, TableName(more=True)] = ""
    working: Annotated[str, TableName(more=True)] = ""
    overvoltage: Annotated[str, TableName(more=True)] = ""


AT_LIMIT = 0.015  # part of a test voltage below which two figures differ by rounding alone (common practice, no source)


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per insulating part that needs a test voltage."""
    yield from judged(analysis, clause, lambda across: _judge(across, clause))


def _judge(across: Across, clause: Clause) -> Verdict | None:
    needs, fact = across.need.electric_strength, across.candidate.ratings.get("isolation_test")
    if not needs or across.crossing.how != "insulating":
        return None
    if fact is not None:
        return _compared(across, clause, fact, needs["rms" if fact.form == "rms" else "peak"], needs["rms"])
    mark = approval(across)
    if mark is not None:
        return covered(across, clause, mark, WHAT)
    if not across.asked or not across.stated(*STATED):
        return None
    required = needs["rms"]
    text = f"nothing that was read states the test voltage of {across.ref}; {across.where} needs {needed(required)}"
    step = Step(text, (across.crossing.step, required.step))
    missing = Missing("isolation test voltage", SUPPLY_AS, answers(required), across.ref)
    return clause.opens(across.subject, WHAT, text, step, missing, limit=limit_of(required))


def _compared(across: Across, clause: Clause, fact: Fact, required: Required, rms: Required) -> Verdict:
    """A figure without a form is at least itself and, as r.m.s., at most the square root of two times itself, in peak volts."""
    volts = float(fact.value)
    remedy = _stronger(across.ref, rms)
    if fact.form == "rms" and required.at_least * (1 - AT_LIMIT) <= volts < required.at_least:
        return _at_limit(across, clause, fact, required)
    if fact.form:
        return compared(across, clause, WHAT, fact, required, remedy)
    span = (Number(volts, "V", "peak"), Number(volts * math.sqrt(2), "V", "peak"))
    alternating = "pass" if required.enough is not None and span[1].value >= required.enough else "open"
    then = (("r.m.s.", alternating), ("d.c. or peak", "fail"))
    doubt = Missing("form of the stated test voltage", SUPPLY_AS, then, across.ref)
    return compared(across, clause, WHAT, fact, required, remedy, span, doubt)


def _at_limit(across: Across, clause: Clause, fact: Fact, required: Required) -> Verdict:
    """A stated figure is rounded, and so is the r.m.s. value of a test voltage that the table gives as a peak: too near to fail."""
    text = f"{across.ref} states {figure(float(fact.value), 'V', 'rms')}; {across.where} needs {needed(required)}, nearly the same"
    step = Step(text, (across.crossing.step, fact, required.step))
    missing = Missing("exact isolation test voltage, r.m.s. or peak", SUPPLY_AS, answers(required), across.ref)
    found = Number(float(fact.value), "V", "rms")
    return clause.opens(across.subject, WHAT, text, step, missing, found=found, limit=limit_of(required), level="warning")


def _stronger(ref: str, rms: Required) -> Remedy | None:
    volts = next((usual for usual in USUAL if rms.enough is not None and usual >= rms.enough), None)
    if volts is None:
        return None
    text = f"{ref} tested with {figure(volts, 'V', 'rms')} or more"
    return Remedy(text, (Change(ref, "rating:isolation_test", volts, "V", "rms"),))


RULE = Rule("electric-strength", "shock", Params, ask, __doc__ or "")
