"""Are the pads of the board far enough apart across a barrier?

A layout file that says where the pads lie (IPC-D-356) shows the most that the board can keep: two pads of the two circuits on
one side of it, copper to copper. Pads with holes count on both sides, vias too, and so do the pads of one part: what its body
keeps is worth nothing on pads that keep less. A pad is taken with round ends, the least copper its size allows.

Per barrier that needs basic insulation or better. Fail: two pads are nearer than the clearance or the creepage that is needed in
any case; for creepage alone a slot in the board between them helps too. Open: they are nearer than the worst pair of nets of
the barrier needs, or nearer only if their corners are square; and as a note for every other barrier, with what its pads leave,
since tracks and planes are not seen and may lie nearer. Never a pass. A footprint whose name gives another distance of the pad
rows than the board fails as a warning: one of the two is not what is built. Without pads nothing is asked.

To settle it: the pads further apart; `barriers: [{between: [...], working_voltage: {...}}]` in the declaration where only the worst
pair of nets needs more; a concession with the measured distance of the copper.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from statistics import median
from typing import Annotated

from checker.model.circuit import Pad
from checker.model.clause import Clause, Subject
from checker.model.domain import Crossing
from checker.model.requirement import Need, Required
from checker.model.rule import Analysis, Rule
from checker.model.separation import Separation
from checker.model.step import Step
from checker.model.verdict import Limit, Missing, Number, Verdict
from checker.model.verified import weakest
from checker.parameters import AtMost
from checker.rules.pad_pairs import Copper, Pair, mm, nearest_pads, pad_fact

WHAT = "Distance between pads across the barrier."
_GRADES = ("basic", "supplementary", "double", "reinforced")


@dataclass(frozen=True, slots=True)
class Params:
    """rows: how far the pad rows may lie from where the name of the footprint has them, mm."""

    rows: Annotated[float, AtMost("mm")] = 0.5


@dataclass(frozen=True, slots=True)
class _Barrier:
    """A separation under judgement. need: of the whole of it, over its worst pair of nets."""

    analysis: Analysis
    clause: Clause
    separation: Separation
    need: Need

    @property
    def where(self) -> str:
        return f"{self.need.grade} insulation between {' and '.join(self.separation.between)}"

    @property
    def key(self) -> tuple[str, ...]:
        return (self.separation.id,) if self.separation.named else self.separation.bridged_by

    def subject(self, pair: Pair) -> Subject:
        """One question a barrier, and one for each part whose own pads are too near; where pads lie is no part of it."""
        refs = tuple(dict.fromkeys(pad.ref for pad in (pair.one, pair.two) if pad.ref in self.analysis.design.parts))
        return Subject(refs, pair.nets, key=(*self.key, pair.ref) if pair.ref else self.key)

    def needed(self, pair: Pair) -> Iterator[tuple[str, Required]]:
        """(`clearance` or `creepage`, what this pair needs); at_least is what it needs whatever the voltage between its nets."""
        whole = self.need
        worst = self.analysis.stress.barriers.get(self.separation.id)
        refs = (pair.ref,) if pair.ref in self.separation.bridged_by else self.separation.bridged_by
        parts = {ref: self.analysis.needs.get((self.clause.ruleset, self.separation.id, ref)) for ref in refs}
        for name in ("clearance", "creepage"):
            required: Required | None = getattr(whole, name)
            if required is None:
                continue
            if worst is None or set(worst.worst) != set(pair.nets):  # another pair of nets may need less
                least = (self._of_part(ref, need, name) for ref, need in parts.items() if need is not None)
                required = replace(required, at_least=min((required.at_least, *least)))
            yield name, required

    def _of_part(self, ref: str, need: Need, name: str) -> float:
        """What is surely needed on a part's own pins; the material of its body says nothing of the board."""
        if name == "creepage" and "material_group" in self.analysis.choice[ref].attributes:
            name = "clearance"
        required: Required | None = getattr(need, name)
        return 0.0 if required is None else required.at_least


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """What fails, and else one question a barrier; then footprints that lie elsewhere than their names say."""
    if not analysis.design.pads:
        return
    pads: dict[str, list[Pad]] = {name: [] for name in analysis.isolation.domains}
    for pad in analysis.design.pads:
        if pad.net is not None and pad.net in analysis.isolation.domain_of:
            pads[analysis.isolation.domain_of[pad.net]].append(pad)
    copper = {name: Copper(found) for name, found in pads.items()}
    for separation in analysis.isolation.separations:
        need = analysis.needs.get((clause.ruleset, separation.id, ""))
        if need is not None and need.grade in _GRADES and need.clearance is not None:
            one, two = (copper[name] for name in separation.between)
            yield from _judge(_Barrier(analysis, clause, separation, need), one, two)
    for crossing in analysis.isolation.crossings:
        if crossing.how == "insulating":
            yield from _rows(analysis, clause, crossing)


def _judge(barrier: _Barrier, one: Copper, two: Copper) -> Iterator[Verdict]:
    both = [ref for ref in one.by_part if ref in two.by_part]
    own = [pair for ref in both if (pair := nearest_pads(one.by_part[ref], two.by_part[ref])) is not None]
    found = nearest_pads(one, two, apart=True)
    pairs = sorted([*own, *([found] if found is not None else [])], key=lambda pair: pair.most)
    kept = []
    for pair in pairs:
        verdict = _short(barrier, pair)
        if verdict is None:
            kept.append(pair)
        else:
            yield verdict
    if kept and (found is None or found in kept):
        yield _asked(barrier, kept)


def _short(barrier: _Barrier, pair: Pair) -> Verdict | None:
    """Nearer than anything that is surely needed between them."""
    for name, required in barrier.needed(pair):
        if pair.most >= required.at_least:
            continue
        clause = replace(barrier.clause, verified=weakest(barrier.clause.verified, required.verified))
        slot = "; a slot in the board between them would lengthen it" if name == "creepage" else ""
        of = f", both of {pair.ref}" if pair.ref else ""
        text = f"{pair.step.text}{of}: less than the {mm(required.at_least)} of {name} that {barrier.where} needs{slot}"
        step = Step(text, (pair.step, required.step), "distance >= needed", pair.most, "mm", citation=clause.citation)
        missing = Missing("distance between the pads", "a layout file", ())
        surely, limit = Number(pair.most, "mm"), Number(required.at_least, "mm")
        return clause.at_least(
            barrier.subject(pair), WHAT, text, step, surely=surely, never_below=None, limit=limit, missing=missing
        )
    return None


def _asked(barrier: _Barrier, pairs: Sequence[Pair]) -> Verdict:
    """What the pads leave, and what else would have to be known."""
    for pair in pairs:
        for name, required in barrier.needed(pair):
            whole: Required = getattr(barrier.need, name)
            if pair.least < required.at_least:
                text = f"{mm(pair.least)} if their corners are square, less than the {mm(required.at_least)} of {name} needed"
                supply_as = "pads further apart, or a concession with the measured distance"
                return _open(barrier, pair, name, required, text, Missing("shape of the pads", supply_as, _then(required.at_least)))
            if pair.most < whole.at_least and not pair.ref:
                text = f"less than the {mm(whole.at_least)} of {name} that the worst pair of nets of this barrier needs"
                between = ", ".join(barrier.separation.between)
                supply_as = f"barriers: [{{between: [{between}], working_voltage: {{rms: ..., peak: ...}}}}] in the declaration"
                then = (f"one that asks for {mm(pair.most)} or less", "pass"), ("one that asks for more", "fail")
                missing = Missing(f"working voltage between {' and '.join(pair.nets)}", supply_as, then)
                return _open(barrier, pair, name, whole, text, missing)
    need = barrier.need
    assert need.clearance is not None  # a barrier without it is not judged
    name, figure = "clearance", need.clearance
    if need.creepage is not None and need.creepage.at_least >= figure.at_least:
        name, figure = "creepage", need.creepage
    wanted = figure.at_least if figure.enough is None else figure.enough
    known = f"at least {mm(wanted)}" if figure.enough is None else mm(wanted)
    text = f"no other pads of the two circuits are nearer, {known} of {name} must be kept, and tracks were not seen"
    supply_as = "a concession with the distance measured in the layout, tracks and planes included"
    missing = Missing("copper of the board", supply_as, _then(wanted))
    return _open(barrier, pairs[0], name, replace(figure, at_least=wanted), text, missing, level="note")


def _open(
    barrier: _Barrier, pair: Pair, name: str, required: Required, text: str, missing: Missing, level: str | None = None
) -> Verdict:
    clause = replace(barrier.clause, verified=weakest(barrier.clause.verified, required.verified))
    text = f"{pair.step.text}: {text}"
    step = Step(text, (pair.step, required.step), f"distance >= {name} needed", pair.most, "mm", citation=clause.citation)
    limit = Limit(required.at_least, "mm", "", "at-least", clause.verified)
    subject = replace(barrier.subject(pair), key=barrier.key)
    what = f"The pads across this barrier leave {mm(pair.most)}; tracks were not seen."
    return clause.opens(subject, what, text, step, missing, found=Number(pair.most, "mm"), limit=limit, level=level or clause.level)


def _then(wanted: float) -> tuple[tuple[str, str], ...]:
    return (f"{mm(wanted)} or more everywhere", "pass"), (f"less than {mm(wanted)} somewhere", "fail")


def _rows(analysis: Analysis, clause: Clause, crossing: Crossing) -> Iterator[Verdict]:
    """The distance of the pad rows by the name of the footprint against where the pads lie, for two rows numbered around."""
    ref, said = crossing.part, analysis.choice[crossing.part].attributes
    span, count = said.get("pad_span"), said.get("package_pins")
    places = {pad.pin: pad for pad in analysis.design.pads if pad.ref == ref and pad.pin.isdecimal() and pad.pin.isascii()}
    if span is None or len(places) < 2:
        return
    last = int(float(count.value)) if count is not None else max(map(int, places))
    facing = [
        (places[str(pin)], places[str(last + 1 - pin)])
        for pin in range(1, last // 2 + 1)
        if {str(pin), str(last + 1 - pin)} <= places.keys()
    ]
    if not facing:
        return
    named = float(span.value)
    found = round(median(((one.x - two.x) ** 2 + (one.y - two.y) ** 2) ** 0.5 for one, two in facing), 3)
    if abs(found - named) <= clause.params.rows:
        return
    text = f"the name of the footprint of {ref} has its pad rows {mm(named)} apart, on the board they lie {mm(found)} apart"
    step = Step(text, (span, *(pad_fact(pad) for pad in facing[0])), "median of the distances of facing pads", found, "mm")
    what = "The pads of a part lie elsewhere than its footprint says."
    subject = Subject((ref,), key=(ref, "rows"))
    yield clause.fails(subject, what, text, step, level="warning", found=Number(found, "mm"))


RULE = Rule("pad-distance", "shock", Params, ask, __doc__ or "")
