"""Are the capacitors across the line of the right class and voltage, and in the right place?

A capacitor between two poles of the mains burns when it fails short and nothing clears it, so IEC 60384-14 has classes for that
place: X1 and X2, and the Y classes serve as well (X3 is withdrawn and still in old designs). Judged are capacitors between two
poles, directly or with a resistor in series (a snubber), those in series with a rectifier that the line feeds without a
transformer (a dropper), and those across a contact in the line, at level warning.

Class: pass when one is marked; fail when none is and what is said of the part (a rated voltage, and no class) shows an ordinary
capacitor; open when nothing but a value is said, and when an alternating voltage, a voltage that only such parts have (275 V)
or a word such as "suppression" speaks for a class that is not named. Voltage: the rated alternating voltage covers the rated mains
voltage, without tolerance. Place: a capacitor ahead of the fuse is accepted when its class is marked, and told; without a
class nothing clears it, and the fail says so.

To settle it: BOM columns `Class` and `Voltage`, or `marks: [X2]` and `ratings: {voltage: 275 V rms}` in a parts file.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.candidate import Candidate
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Change, Limit, Missing, Number, Remedy, Verdict, Words
from checker.parameters import TextSet
from checker.rules.dropper import MOST, dropper
from checker.rules.fuse_path import toward_fuse

_USUAL = (125.0, 150.0, 250.0, 275.0, 305.0, 310.0, 440.0, 480.0)  # V r.m.s., ratings of class X parts on the market
# V; figures that class X and Y parts have for alternating voltage; 250 and 300 V are usual d.c. ratings too, so not sure
_PERHAPS_AC = frozenset({250.0, 275.0, 300.0, 305.0, 310.0, 330.0, 440.0, 480.0, 760.0})
_FOR_SAFETY = re.compile(r"safety|suppress|interference|(?<![a-z])emi(?![a-z])|entst(?:ö|oe)r", re.IGNORECASE)
_LEAST_MAINS = 100.0  # V r.m.s., the lowest mains there is
_CONTACTS = frozenset({"relay", "switch", "triac", "solid-state-relay"})
_LOADS = frozenset({"connector", "inlet", "lamp", "motor", "transformer"})
_SMALL = 60.0  # V peak; a capacitor with less on it lies beside the contact, on a low-voltage supply (common practice, no source)


@dataclass(frozen=True, slots=True)
class Params:
    """classes: marks that may stand between two poles of the mains."""

    classes: Annotated[tuple[str, ...], TextSet()] = ("X1", "X2", "X3", "Y1", "Y2", "Y3", "Y4")


@dataclass(frozen=True, slots=True)
class _Place:
    """where: for people, such as "between AC_L and AC_N"; contact: across a contact of one pole; before: the fuse it stands
    ahead of, or ""; across: the nets whose voltage it has on it."""

    where: str
    contact: bool
    before: str
    across: tuple[str, ...]


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict on the class and one on the voltage of each capacitor across the line."""
    if analysis.setting.mains is None:
        return
    ahead = _ahead(analysis)
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if candidate.kind == "capacitor" and part.fitted and len(part.nets()) == 2:
            place = _place(analysis, ref, ahead)
            if place is not None:
                marked = candidate.marked(*clause.params.classes)
                yield _of_class(analysis, clause, ref, candidate, place)
                if marked is not None:
                    yield _of_voltage(analysis, clause, ref, candidate, place)


def _place(analysis: Analysis, ref: str, ahead: dict[str, str]) -> _Place | None:
    nets = analysis.design.parts[ref].nets()
    ends = [_pole(analysis, ref, net) for net in nets]
    if ends[0] is None and ends[1] is None:
        return None
    if ends[0] != ends[1] and None not in ends:
        before = next((ahead[net] for net in nets if net in ahead), "")
        return _Place(f"between {nets[0]} and {nets[1]}", False, before if ref in _direct(analysis, nets) else "", nets)
    contact = _contact(analysis, ref, nets)
    if contact is not None:
        return _Place(f"across the contact of {contact}", True, "", nets)
    found = dropper(analysis, ref)
    if found is None:
        return None
    where = f"between {found.near} and rectifier {found.rectifier} (which leads to {found.base})"
    return _Place(where, False, ahead.get(found.near, ""), (found.near, found.base))


def _contact(analysis: Analysis, ref: str, nets: tuple[str, ...]) -> str | None:
    """The contact in a line conductor that a capacitor lies across, itself or with a resistor in series. Behind the contact is
    the line again or a load, not the coil or the gate, to which a capacitor beside the contact leads as well."""
    poles, around = analysis.stress.poles, _around(analysis, ref, nets)
    supply = analysis.stress.between(*nets) if not poles.keys() >= set(nets) else None
    if supply is not None and supply.peak.never_above is not None and supply.peak.never_above < _SMALL:
        return None
    for name in dict.fromkeys(other for net in around for other in analysis.fitted_on(net) if analysis.kind(other) in _CONTACTS):
        spanned = set(analysis.design.parts[name].nets()) & set(around)
        loads = (net for net in spanned if net not in poles)
        if len(spanned) > 1 and all(any(analysis.kind(load) in _LOADS for load in analysis.fitted_on(net)) for net in loads):
            return name
    return None


def _direct(analysis: Analysis, nets: tuple[str, ...]) -> tuple[str, ...]:
    """The capacitors directly between these two line conductors."""
    return tuple(ref for ref in analysis.fitted_on(nets[0]) if set(analysis.design.parts[ref].nets()) == set(nets))


def _around(analysis: Analysis, ref: str, nets: tuple[str, ...]) -> tuple[str, ...]:
    """The ends of a capacitor, and those of a resistor in series with it on a net of their own."""
    found = dict.fromkeys(nets)
    for net in nets:
        series = _series(analysis, ref, net)
        if series is not None:
            found.update(dict.fromkeys(analysis.design.parts[series].nets()))
    return tuple(found)


def _series(analysis: Analysis, ref: str, net: str) -> str | None:
    """The one resistor that hangs on a net beside a capacitor; None where it is so large that it has the voltage itself."""
    others = [other for other in analysis.fitted_on(net) if other != ref and analysis.kind(other) != "test-point"]
    if len(others) != 1 or analysis.kind(others[0]) != "resistor":
        return None
    value = analysis.choice[others[0]].value
    return others[0] if value is None or float(value.value) <= MOST else None


def _pole(analysis: Analysis, ref: str, net: str) -> str | None:
    """The pole that a net carries, itself or behind the resistor in series with the capacitor."""
    poles = analysis.stress.poles
    if net in poles:
        return poles[net]
    series = _series(analysis, ref, net)
    far = [poles[other] for other in analysis.design.parts[series].nets() if other in poles] if series is not None else []
    return far[0] if far else None


def _ahead(analysis: Analysis) -> dict[str, str]:
    """Line conductor ahead of a fuse -> that fuse."""
    found: dict[str, str] = {}
    for entry in analysis.stress.entries.values():
        for pole in entry.poles:
            before = toward_fuse(analysis, pole)
            found.update(dict.fromkeys(before.nets, before.fuses[0]) if before.fuses else {})
    return found


def _of_class(analysis: Analysis, clause: Clause, ref: str, candidate: Candidate, place: _Place) -> Verdict:
    part, rating = analysis.design.parts[ref], candidate.ratings.get("voltage")
    subject = Subject((ref,), part.nets(), (ref, "class"))
    level = {"level": "warning"} if place.contact else {}
    what = "Class of a capacitor across the line."
    wanted = Words("X1, X2 or a Y class")
    mark = candidate.marked(*clause.params.classes)
    said: tuple[Fact, ...] = tuple(one.fact for one in candidate.marks) or tuple(fact for fact in (rating,) if fact is not None)
    if mark is not None:
        where = f", ahead of fuse {place.before}" if place.before else ""
        old = ", a class that is withdrawn: X2 is its place in a new design" if mark.name == "X3" else ""
        because = f"{ref} lies {place.where}{where} and is marked {mark.name}{old}"
        step = Step(because, (part.fact, *said))
        return clause.passes(subject, what, because, step, found=Words(mark.name), limit=wanted, **level)
    text = part.text("description") or part.text("value")
    hinted = _FOR_SAFETY.search(" ".join(part.text(name) for name in ("value", "description", "symbol"))) is not None
    step = Step(f"{ref} lies {place.where}; no class is stated: {text}", (part.fact, *said))
    if rating is not None and rating.form != "rms" and not hinted and not _perhaps_ac(rating):
        because = f"{ref} lies {place.where} and is an ordinary capacitor for {float(rating.value):g} V: {text}"
        if place.before:
            because += f"; it stands ahead of fuse {place.before}, which cannot clear it"
        remedy = Remedy(
            f"{ref} of class X2", (Change(ref, "mark", "X2"), Change(ref, "rating:voltage", _usual(analysis, place), "V", "rms"))
        )
        return clause.fails(
            subject, "A capacitor across the line has no safety class.", because, step, found=Words("no class"), limit=wanted,
            remedy=remedy, **level,
        )  # fmt: skip
    then = (("X1, X2 or a Y class", "pass"), ("none", "fail"))
    missing = Missing("class", "BOM column Class, or marks in a parts file", then, ref)
    return clause.opens(subject, what, step.text, step, missing, found=Words("no class stated"), limit=wanted, **level)


def _perhaps_ac(rating: Fact) -> bool:
    """Whether a voltage of which nobody says the form may be the alternating voltage of a class X or Y part."""
    return rating.form == "" and float(rating.value) in _PERHAPS_AC


def _of_voltage(analysis: Analysis, clause: Clause, ref: str, candidate: Candidate, place: _Place) -> Verdict:
    part, rating = analysis.design.parts[ref], candidate.ratings.get("voltage")
    mains = analysis.setting.mains
    volts = _volts(analysis, place)
    subject = Subject((ref,), part.nets(), (ref, "voltage"))
    what = "Rated voltage of a capacitor across the line."
    level = {"level": "warning"} if place.contact or rating is None else {}
    crest = Step(f"rated mains voltage {volts:.4g} V", analysis.setting.facts, result=volts, unit="V", form="rms")
    limit = Limit(volts, "V", "rms", "at-least", clause.verified)
    then = ((f"{volts:.4g} V a.c. or more", "pass"), (f"below {volts:.4g} V a.c.", "fail"))
    missing = Missing("rated alternating voltage", "BOM column Voltage, or ratings in a parts file", then, ref)
    if rating is None or rating.form == "dc":
        said = "states no voltage" if rating is None else f"states {float(rating.value):g} V d.c. only"
        step = Step(f"{ref} {place.where} {said}", (part.fact, crest))
        return clause.opens(subject, what, step.text, step, missing, limit=limit, **level)
    stated = float(rating.value)
    found = Number(stated, "V", "rms")
    because = f"{ref} {place.where} is rated {stated:g} V a.c., the supply {volts:.4g} V"
    step = Step(because, (rating, crest), result=stated, unit="V", form="rms")
    if stated >= volts:
        return clause.passes(subject, what, because, step, found=found, limit=limit, margin=(stated - volts) / volts, **level)
    if mains is not None and not mains.voltage.source.path and stated >= _LEAST_MAINS:
        missing = Missing(
            "rated mains voltage", "supply: {mains: ...} in the declaration",
            ((f"up to {stated:g} V", "pass"), (f"above {stated:g} V", "fail")),
        )  # fmt: skip
        return clause.opens(subject, what, because, step, missing, found=found, limit=limit, **level)
    remedy = Remedy(
        f"{ref} rated {_usual(analysis, place):g} V a.c. or more",
        (Change(ref, "rating:voltage", _usual(analysis, place), "V", "rms"),),
    )
    return clause.fails(
        subject, "A capacitor across the line is rated below the mains.", because, step, found=found, limit=limit,
        margin=(stated - volts) / volts, remedy=remedy, **level,
    )  # fmt: skip


def _volts(analysis: Analysis, place: _Place) -> float:
    """The rated mains voltage on the capacitor, V r.m.s.: of three phases less where it lies between a line and the neutral."""
    mains, volts = analysis.setting.mains, analysis.setting.mains_voltage(tolerance=False) or 0.0
    neutrals = {entry.neutral for entry in analysis.stress.entries.values()}
    ends = {analysis.stress.poles.get(net, net) for net in place.across}
    star = mains is not None and mains.phases == 3 and not ends.isdisjoint(neutrals) and len(ends) > 1
    return volts / math.sqrt(3) if star else volts


def _usual(analysis: Analysis, place: _Place) -> float:
    """The next usual rating from that voltage on, V r.m.s."""
    volts = _volts(analysis, place)
    return next((usual for usual in _USUAL if usual >= volts), volts)


RULE = Rule("line-capacitor", "fire", Params, ask, __doc__ or "")
