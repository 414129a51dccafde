"""Is the distance through the insulation of each part across a barrier enough?

Supplementary, double and reinforced insulation above class ES2 has to be so thick, whatever the voltage; basic insulation has
no least thickness. Optical and digital isolators approved to their own standard are exempt: the approval tests the insulation
itself. So are windings of insulated wire or in layers, which are counted, not measured.

Pass when the stated distance is enough; fail when a transformer or other part states less; open when an isolator without an
approval or a winding with insulated wire states less (the approval or the layers decide), and when a transformer states
something about its insulation but not this. Nothing is asked of a part that states nothing at all, nor of an isolator that
only lacks its approval: the rule on the grade asks for that.

To settle it: BOM column `Class` with the approval (`IEC 60747-5-5`), BOM column `DTI`, or `body: {through_insulation: 0.4 mm}` in
a parts file.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.clause import Clause
from checker.model.requirement import Required
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict
from checker.parameters import AtMost, TableName, TextSet
from checker.rules.insulating_parts import (
    STATED,
    Across,
    answers,
    approval,
    compared,
    covered,
    figure,
    judged,
    limit_of,
    longer,
    needed,
)

WHAT = "Distance through the insulation of this part."
ISOLATORS = frozenset("optocoupler digital-isolator isolated-amplifier isolated-driver solid-state-relay".split())
WOUND = frozenset({"transformer", "gate-drive-transformer", "current-transformer"})
_LAYERS = re.compile(r"\b(?:triple[\s-]insulated|TIW|FIW|layers?|tape)\b", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Params:
    """table: distance by grade. above_dc, above_peak: the working voltage from which on it is asked (the limits of ES2).

    exempt: approvals of isolators that test the insulation itself.
    """

    table: Annotated[str, TableName(more=True)] = ""
    above_dc: Annotated[float, AtMost("V", "dc")] = 120.0
    above_peak: Annotated[float, AtMost("V", "peak")] = 70.7
    exempt: Annotated[tuple[str, ...], TextSet()] = ("IEC 60747-5-5", "IEC 60747-17", "VDE 0884", "VDE 0884-10", "VDE 0884-11")


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per insulating part that needs a distance through its insulation."""
    yield from judged(analysis, clause, lambda across: _judge(analysis, across, clause))


def _judge(analysis: Analysis, across: Across, clause: Clause) -> Verdict | None:
    required, fact = across.need.through_insulation, across.candidate.ratings.get("through_insulation")
    if required is None or across.crossing.how != "insulating":
        return None
    short = fact is None or required.enough is None or float(fact.value) < required.enough
    exempt = across.candidate.marked(*clause.params.exempt) if across.candidate.kind in ISOLATORS else None
    mark = exempt or approval(across)
    if short and mark is not None:
        return covered(across, clause, mark, WHAT)
    if fact is not None:
        doubt = _doubt(analysis, across, required) if short else None
        if doubt is not None:
            text = (
                f"{across.ref} states {figure(float(fact.value), 'mm')}; {across.where} needs {needed(required)}, or {doubt.fact}"
            )
            step = Step(text, (fact, across.crossing.step, required.step))
            return clause.opens(across.subject, WHAT, text, step, doubt, limit=limit_of(required))
        return compared(across, clause, WHAT, fact, required, longer(across, "through_insulation", required))
    if not across.asked or across.candidate.kind in ISOLATORS or not across.stated(*STATED):
        return None  # the approval of an isolator is asked for by the rule on its grade
    doubt = _doubt(analysis, across, required)
    text = (
        f"nothing that was read states the distance through the insulation of {across.ref}; {across.where} needs {needed(required)}"
    )
    step = Step(text, (across.crossing.step, required.step))
    supply_as = "BOM column DTI, or body: {through_insulation: ...} in a parts file"
    missing = doubt or Missing("distance through the insulation", supply_as, answers(required), across.ref)
    return clause.opens(across.subject, WHAT, text, step, missing, limit=limit_of(required))


def _doubt(analysis: Analysis, across: Across, required: Required) -> Missing | None:
    """What may exempt the part from a distance: the approval of an isolator, the layers of a winding."""
    if across.candidate.kind in ISOLATORS:
        then = (("IEC 60747-5-5 or IEC 60747-17", "not-applicable"), *answers(required))
        fact = "approval as an isolator, which exempts it"
        return Missing(fact, "BOM column Class, or marks in a parts file", then, across.ref)
    text = " ".join(
        str(fact.value) for fact in analysis.design.parts[across.ref].facts if fact.attribute in ("value", "description")
    )
    if across.candidate.kind in WOUND and _LAYERS.search(text):
        then = (("approved insulated wire or layers that pass the test", "not-applicable with a concession"), *answers(required))
        return Missing("the layers of its insulation", "BOM column Class with the approval of the transformer", then, across.ref)
    return None


RULE = Rule("through-insulation", "shock", Params, ask, __doc__ or "")
