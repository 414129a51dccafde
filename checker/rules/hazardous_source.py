"""Where is the hazardous source?

Every other question rests on the answer: a barrier keeps people from something, and a board whose source nobody knows
proves nothing. The rule passes when the mains or another hazardous source is recognised in the netlist or declared, and
does not apply when the declaration says `supply: none`.

Open, level warning: contacts of relays switch circuits that end at connectors. What flows there comes from outside the board, and
where it is the mains, the relays lie across a barrier that nobody asked for.

Open, level error: something on the board is made to insulate, to sit across the line or to take a mains plug, and yet no
source is recognised. Open, level note: nothing on the board hints at a source. Silence is not safety.

To settle it: declare `supply:` (`mains: 100-240 V`, `dc: 24 V`, or `supply: none`); for circuits outside, the grade of the barrier
(`barriers: [{between: [GND, load], grade: reinforced}]`, with `domains: {load: [NET]}` for its name).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.order import natural
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict, Words
from checker.rules.outside_circuits import Outside, outside

_SUPPLY_AS = "supply: in the declaration (mains: 100-240 V, dc: 24 V, or supply: none)"
_LINE_CLASSES = ("X1", "X2", "X3", "Y1", "Y2", "Y3", "Y4")


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters."""


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict for the board."""
    declaration, isolation = analysis.declaration, analysis.isolation
    hazardous = [domain for domain in isolation.domains.values() if domain.hazard]
    named = dict.fromkeys(str(fact.value) for domain in hazardous for fact in domain.evidence if fact.attribute == "net")
    subject = Subject(key=("source",), nets=tuple(named)[:8])
    if declaration.no_supply is not None:
        step = Step(
            "the declaration says that nothing hazardous feeds this board", (Fact("supply", "none", declaration.no_supply),)
        )
        yield clause.does_not_apply(subject, "No hazardous source feeds this board.", "declared: supply: none", step)
        return
    located = next((question for question in isolation.questions if question.about == "side"), None)
    if located is not None:
        yield clause.opens(
            Subject(nets=located.nets, key=("source",)), "The declared supply is not found on the board.", located.text,
            located.step,
            Missing(located.fact, located.supply_as, located.then),
        )  # fmt: skip
    elif hazardous:
        steps = tuple(domain.step for domain in hazardous)
        names = ", ".join(f"{domain.name} ({domain.hazard})" for domain in hazardous)
        step = Step(f"the hazardous side is {names}", steps)
        declared = " and declared" if declaration.supplies else ""
        because = "; ".join(domain.step.text for domain in hazardous)
        yield clause.passes(subject, "The hazardous source is known.", f"recognised{declared}: {because}", step, found=Words(names))
        if (switched := outside(analysis)) is not None:
            yield _switched(analysis, clause, switched)
    else:
        yield _silent(analysis, clause)


def _switched(analysis: Analysis, clause: Clause, switched: Outside) -> Verdict:
    """What contacts carry that lead to connectors only."""
    relays, ends = ", ".join(switched.relays[:8]), ", ".join(switched.connectors[:8])
    because = f"contacts of {relays} lead to {ends} and to no source on this board"
    facts = tuple(analysis.design.parts[ref].fact for ref in (*switched.relays[:8], *switched.connectors[:8]))
    missing = Missing(
        "the voltage of what these contacts switch",
        "barriers in the declaration (barriers: [{between: [GND, load], grade: reinforced}], domains: {load: [NET]})",
        (("a harmless circuit (grade: functional)", "pass"), ("the mains", "the barrier of the relays is judged")),
        switched.relays[0],
    )
    subject = Subject((*switched.relays[:8], *switched.connectors[:8]), key=("contacts", *sorted(switched.relays)))
    what = "Contacts may switch a hazardous circuit outside the board."
    return clause.opens(subject, what, because, Step(because, facts), missing, level="warning")


def _silent(analysis: Analysis, clause: Clause) -> Verdict:
    hints = _hints(analysis)
    then = (
        ("mains or d.c. above 60 V", "its barriers are judged"),
        ("none, or d.c. up to 60 V from an isolated source", "not-applicable or pass"),
    )
    missing = Missing("what feeds this board", _SUPPLY_AS, then)
    if hints:
        parts = tuple(hints)[:12]
        step = Step(
            "parts that are made to insulate or to sit across the line", tuple(analysis.design.parts[ref].fact for ref in parts)
        )
        more = f" and {len(hints) - len(parts)} more" if len(hints) > len(parts) else ""
        because = f"{', '.join(parts)}{more} insulate{'s' * (len(hints) == 1)} from something: {next(iter(hints.values()))}"
        return clause.opens(
            Subject(parts, key=("source",)), "No hazardous source is recognised, though the board has parts that "
            "insulate from one.",
            because, step, missing,
        )  # fmt: skip
    step = Step("no insulating part, line capacitor or mains inlet was found on the board", ())
    return clause.opens(
        Subject(key=("source",)), "Nothing on the board hints at a hazardous source.", "a netlist without one proves "
        "nothing about what is plugged in",
        step, missing, level="note",
    )  # fmt: skip


def _hints(analysis: Analysis) -> dict[str, str]:
    """Reference -> why it hints at a hazardous source."""
    found: dict[str, str] = {}
    for crossing in sorted(analysis.isolation.crossings, key=lambda crossing: natural(crossing.part)):
        if crossing.how == "insulating" or analysis.choice[crossing.part].marks:
            found.setdefault(crossing.part, crossing.step.text)
    for ref, candidate in analysis.choice.items():
        if not analysis.design.parts[ref].fitted:
            continue
        if candidate.kind == "capacitor" and candidate.marked(*_LINE_CLASSES):
            found.setdefault(ref, f"capacitor of class {candidate.marks[0].name}")
        elif candidate.kind == "inlet":
            found.setdefault(ref, candidate.because)
    return found


RULE = Rule("hazardous-source", "shock", Params, ask, __doc__ or "")
