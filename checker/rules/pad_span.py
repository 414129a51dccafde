"""Do the pads of a part leave room for the distance its barrier needs?

A coupler whose body keeps 8 mm is worth nothing on pads that keep 6 mm. The name of the footprint often tells the most that
its pads can keep: `DIP-4_W7.62mm` has its pad rows 7.62 mm apart, centre to centre, and each pad takes away at least its hole
and the ring around it; a gull-wing body of 3.9 mm (`SOIC-8_3.9x4.9mm`) has its pads at most 2 mm further apart than it is wide;
`_Clearance8mm` says it outright. Where there is no such name, the outline in the bill of materials counts (`4DIP 400MIL`).
The pads of the two sides are taken by the numbers of the pins, so that a part with both sides on one row is seen too.

Per insulating part across basic or better insulation whose names tell something. Fail: the most the pads can keep is less than
the clearance or the creepage needed on the part's own pins; for creepage alone a slot between the pads mends it too. Pass: pads
of the usual size leave room for both; tracks and slots are not seen, so this is no proof of the layout. Open: it depends on
the size of the pads; as a note only, the need is not bounded, since the rules on clearance and creepage ask for that. A bill
that orders one outline (`400MIL`) for the footprint of another fails as a warning.

To settle it: a footprint with wider rows, or one whose name tells the distance of the copper (`SMDIP-4_W9.53mm_Clearance8mm`).
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace

from checker.model.clause import Clause, Subject
from checker.model.domain import Crossing
from checker.model.requirement import Required
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Limit, Missing, Number, Verdict
from checker.model.verified import weakest
from checker.rules.insulating_parts import Across, figure, judged, unsettled
from checker.rules.pad_room import Params, Room, outline, room

APART = 1.0  # mm; two outlines that differ by more are not the same
_WHAT = "Room between the pads of this part across the barrier."
_GRADES = ("basic", "supplementary", "double", "reinforced")


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per part whose footprint or outline tells something, and one where those two differ."""
    yield from judged(analysis, clause, lambda across: _judge(analysis, clause, across))
    seen: set[str] = set()
    for crossing in analysis.isolation.crossings:
        grade = analysis.grades[(clause.ruleset, "|".join(crossing.between))].grade
        if crossing.how == "insulating" and crossing.listed and grade in _GRADES and crossing.part not in seen:
            seen.add(crossing.part)
            yield from _outline(analysis, clause, crossing)


def _judge(analysis: Analysis, clause: Clause, across: Across) -> Verdict | None:
    air, surface = across.need.clearance, _on_the_board(analysis, clause, across)
    if not across.crossing.listed or across.crossing.how != "insulating" or across.need.grade not in _GRADES or air is None:
        return None
    found = room(across.candidate, across.crossing, analysis.design.parts[across.ref].text("footprint"), clause.params)
    if found is None:
        return None
    asked = [("clearance", air)] + ([("creepage", surface)] if surface is not None else [])
    short = next(((name, need) for name, need in asked if found.most < need.at_least), None)
    if short is not None:
        return _short(across, clause, found, *short)
    if found.usual is None:
        return None
    usual = found.usual
    name, need = max(asked, key=lambda one: (usual < one[1].at_least, math.inf if one[1].enough is None else one[1].enough))
    return _decided(across, clause, found, name, need)


def _on_the_board(analysis: Analysis, clause: Clause, across: Across) -> Required | None:
    """The creepage needed between the pads: on the board, whose material may be another than that of the part's body.

    Where the part states a material of its own, what the whole barrier needs suffices, and only the clearance is needed surely.
    """
    surface, air = across.need.creepage, across.need.clearance
    if "material_group" not in across.candidate.attributes or air is None:
        return surface
    whole = analysis.needs.get((clause.ruleset, "|".join(across.crossing.between), ""))
    return None if whole is None or whole.creepage is None else replace(whole.creepage, at_least=air.at_least)


def _short(across: Across, clause: Clause, room: Room, name: str, need: Required) -> Verdict:
    """The pads are too near one another whatever their size."""
    clause = replace(clause, verified=weakest(clause.verified, need.verified))
    slot = " or a slot between the pads" if name == "creepage" else ""
    body = across.candidate.ratings.get(name)
    taken = (
        f"; the {figure(float(body.value), 'mm')} of its body are lost on these pads"
        if body is not None and float(body.value) > room.most
        else ""
    )
    text = (
        f"{room.step.text}: less than the {figure(need.at_least, 'mm')} of {name} that {across.where} needs{taken}; "
        f"a footprint with wider rows{slot} is needed"
    )
    inputs = (room.step, need.step, across.crossing.step, *((body,) if body is not None else ()))
    step = Step(text, inputs, "most between the pads >= needed", room.most, "mm", citation=clause.citation)
    limit, most = Number(need.at_least, "mm"), Number(room.most, "mm")
    missing = Missing("distance between the pads", "a footprint", (), across.ref)
    return clause.at_least(across.subject, _WHAT, text, step, surely=most, never_below=None, limit=limit, missing=missing)


def _decided(across: Across, clause: Clause, room: Room, name: str, need: Required) -> Verdict:
    """Pass when pads of the usual size leave enough, else open: by the pads, or by what is not known of the need."""
    clause = replace(clause, verified=weakest(clause.verified, need.verified))
    usual = Number(room.usual or 0.0, "mm")
    wanted = need.at_least if need.enough is None else need.enough
    pads = "" if room.usual == room.most else f", {figure(usual.value, 'mm')} with pads of the usual size"
    text = (
        f"{room.step.text}{pads}; {across.where} needs "
        f"{'at least ' if need.enough is None else ''}{figure(wanted, 'mm')} of {name}; tracks and slots are not seen"
    )
    step = Step(text, (room.step, need.step, across.crossing.step), "usual between the pads >= needed", usual.value, "mm")
    if usual.value >= need.at_least:
        missing, level = unsettled(across, need, figure(usual.value, "mm")), "note"
    else:
        supply_as = (
            "a footprint with wider rows, or one that names it (..._Clearance8mm), or a concession with the measured distance"
        )
        then = (f"{figure(wanted, 'mm')} or more", "pass"), (f"less than {figure(need.at_least, 'mm')}", "fail")
        missing, level = Missing("distance between the pads of the two sides", supply_as, then, across.ref), clause.level
    if need.enough is None or usual.value < need.enough:
        limit = Limit(wanted, "mm", "", "at-least", clause.verified)
        return clause.opens(across.subject, _WHAT, text, step, missing, found=usual, limit=limit, level=level)
    enough = Number(need.enough, "mm")
    return clause.at_least(across.subject, _WHAT, text, step, surely=None, never_below=usual, limit=enough, missing=missing)


def _outline(analysis: Analysis, clause: Clause, crossing: Crossing) -> Iterator[Verdict]:
    """The outline that is ordered against that of the footprint, for parts with straight leads."""
    ref, said = crossing.part, analysis.choice[crossing.part].attributes
    span, ordered = said.get("pad_span"), said.get("row_span")
    if span is None or ordered is None or "SMD" in span.text.upper():
        return
    pads, leads = float(span.value), outline(ordered)
    if abs(pads - leads) <= APART:
        return
    text = f"{ref} is ordered with rows {leads:g} mm apart, its footprint has them {pads:g} mm apart"
    step = Step(text, (ordered, span, crossing.step))
    subject = Subject((ref,), key=(ref, "outline"))
    what = "The part that is ordered does not fit its footprint."
    yield clause.fails(subject, what, text, step, level="warning", found=Number(leads, "mm"))


RULE = Rule("pad-span", "shock", Params, ask, __doc__ or "")
