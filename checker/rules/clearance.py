"""Is the clearance of each part across a barrier enough on its own pins?

The shortest way through air over the body of the part, as its data sheet states it, is compared with what the ruleset asks
for the grade of insulation, the working voltage on the part's own pins, the transients of the supply, pollution degree and
altitude: the highest of two procedures (standing and temporary voltages; transients), times the factor of the altitude.

Pass when the stated clearance is enough whatever is still unknown; fail when it is less than what is needed in any case;
open in between, when the working voltage is not bounded, and when a coupler, isolator, transformer or sensor states neither
clearance nor creepage. Not applicable where an approval covers the part as a whole (modules, relays, transformers). A
capacitor is judged here only when its distances are stated: its class says what it may bridge. The copper of the board is
not judged here.

To settle it: BOM columns `Clearance` and `Creepage`, or `body: {clearance: 8 mm, creepage: 8 mm}` in a parts file; the working
voltage under `barriers:` in the declaration.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.clause import Clause
from checker.model.requirement import Required
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict
from checker.parameters import AtLeast, AtMost, Choice, TableName
from checker.rules.insulating_parts import Across, answers, approval, compared, covered, figure, judged, limit_of, longer, needed

WHAT = "Clearance of this part across the barrier."


@dataclass(frozen=True, slots=True)
class Params:
    """Tables by what they answer; one that is not named is not asked.

    impulse: required impulse voltage by mains voltage, columns ovc_i to ovc_iv. temporary: temporary overvoltage by mains
    voltage, or temporary_added: what the mains voltage rises by. steady, withstand: clearance by the highest standing and by
    the impulse voltage, columns `reinforced_pd2`, `reinforced`, `pd2` ... (the more specific wins). high_frequency: by peak
    voltage above `frequency`, pollution: its factor by pollution degree. series: preferred impulse voltages, where reinforced
    insulation is that of the next step and of reinforced_factor times other voltages. altitude: factor by altitude.
    supply: which mains voltage chooses the row.
    """

    impulse: Annotated[str, TableName(more=True)] = ""
    temporary: Annotated[str, TableName(more=True)] = ""
    temporary_added: Annotated[float, AtLeast("V", "rms")] = 0.0
    steady: Annotated[str, TableName(more=True)] = ""
    withstand: Annotated[str, TableName(more=True)] = ""
    high_frequency: Annotated[str, TableName(more=True)] = ""
    pollution: Annotated[str, TableName(more=True)] = ""
    frequency: Annotated[float, AtMost("Hz")] = 30000.0
    series: Annotated[str, TableName()] = ""
    reinforced_factor: Annotated[float, AtLeast("")] = 1.6
    altitude: Annotated[str, TableName(more=True)] = ""
    supply: Annotated[str, Choice(("rated", "with-tolerance"))] = "rated"


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per insulating part that needs a clearance."""
    yield from judged(analysis, clause, lambda across: _judge(across, clause))


def _judge(across: Across, clause: Clause) -> Verdict | None:
    required, fact = across.need.clearance, across.candidate.ratings.get("clearance")
    if required is None:
        return None
    if fact is not None:
        return compared(across, clause, WHAT, fact, required, longer(across, "clearance", required))
    mark = approval(across)
    if mark is not None:
        return covered(across, clause, mark, WHAT)
    if across.crossing.how == "insulating" and (across.asked or across.stated("creepage")):
        return _asks(across, clause, required)
    return None


def _asks(across: Across, clause: Clause, required: Required) -> Verdict:
    """One question: for the clearance, and for the creepage too where that is not stated either."""
    creepage = None if across.stated("creepage") else across.need.creepage
    if creepage is None:
        fact, wanted, then = "clearance of the body", needed(required), answers(required)
        supply_as = "BOM column Clearance, or body: {clearance: ...} in a parts file"
    else:
        fact, wanted = "clearance and creepage of the body", f"{needed(required)}, and {needed(creepage)} of creepage"
        supply_as = "BOM columns Clearance and Creepage, or body: {clearance: ..., creepage: ...} in a parts file"
        bounded = required.enough is not None and creepage.enough is not None
        least = f"clearance less than {figure(required.at_least, 'mm')} or creepage less than {figure(creepage.at_least, 'mm')}"
        then = (f"clearance {needed(required)}, creepage {needed(creepage)}", "pass" if bounded else "open"), (least, "fail")
    text = f"nothing that was read states the {fact.removesuffix(' of the body')} of {across.ref}; {across.where} needs {wanted}"
    step = Step(text, (across.crossing.step, required.step, *((creepage.step,) if creepage is not None else ())))
    return clause.opens(across.subject, WHAT, text, step, Missing(fact, supply_as, then, across.ref), limit=limit_of(required))


RULE = Rule("clearance", "shock", Params, ask, __doc__ or "")
