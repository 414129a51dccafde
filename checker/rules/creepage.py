"""Is the creepage of each part across a barrier enough on its own pins?

The shortest way along the surface of the part, as its data sheet states it, is compared with what the ruleset asks for the
r.m.s. working voltage on the part's own pins, pollution degree, material group and grade of insulation; never less than the
clearance. Between two rows of the table the figure is interpolated, as the table says, and rounded up before it is doubled
for reinforced insulation; `between_rows: next-higher` reads the higher row, as some laboratories do.

Pass when the stated creepage is enough whatever is still unknown; fail when it is less than what is needed in any case; open
in between, when the working voltage is not bounded, and when a part states its clearance but not its creepage (a part that
states neither is asked about once, by the rule on clearance). The copper of the board is not judged here.

To settle it: BOM column `Creepage`, or `body: {creepage: 8 mm, material_group: IIIa}` in a parts file; the working voltage under
`barriers:` in the declaration.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.clause import Clause
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict
from checker.parameters import AtLeast, AtMost, Choice, TableName
from checker.rules.insulating_parts import Across, answers, approval, compared, covered, judged, limit_of, longer, needed

WHAT = "Creepage of this part across the barrier."


@dataclass(frozen=True, slots=True)
class Params:
    """table: creepage of basic insulation by r.m.s. voltage, columns `pd2_iiib`, `pd2_iii`, `pd2` (the more specific wins).

    high_frequency: by peak voltage above `frequency`, columns `khz_100` ...; pollution: its factor by pollution degree.
    reinforced_factor: times basic. between_rows: as the table says, or always the higher row.
    """

    table: Annotated[str, TableName(more=True)] = ""
    high_frequency: Annotated[str, TableName(more=True)] = ""
    pollution: Annotated[str, TableName(more=True)] = ""
    frequency: Annotated[float, AtMost("Hz")] = 30000.0
    reinforced_factor: Annotated[float, AtLeast("")] = 2.0
    between_rows: Annotated[str, Choice(("interpolate", "next-higher"))] = "interpolate"


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per insulating part that needs a creepage and states a distance."""
    yield from judged(analysis, clause, lambda across: _judge(across, clause))


def _judge(across: Across, clause: Clause) -> Verdict | None:
    required, fact = across.need.creepage, across.candidate.ratings.get("creepage")
    if required is None:
        return None
    if fact is not None:
        return compared(across, clause, WHAT, fact, required, longer(across, "creepage", required))
    mark = approval(across)
    if mark is not None:
        return covered(across, clause, mark, WHAT)
    if across.crossing.how != "insulating" or not across.stated("clearance"):
        return None
    text = f"{across.ref} states its clearance but not its creepage; {across.where} needs {needed(required)}"
    step = Step(text, (across.candidate.ratings["clearance"], across.crossing.step, required.step))
    supply_as = "BOM column Creepage, or body: {creepage: ...} in a parts file"
    missing = Missing("creepage of the body", supply_as, answers(required), across.ref)
    return clause.opens(across.subject, WHAT, text, step, missing, limit=limit_of(required))


RULE = Rule("creepage", "shock", Params, ask, __doc__ or "")
