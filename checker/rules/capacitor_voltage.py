"""Does every capacitor keep the voltage margin of the house?

The voltage between the two nets of a capacitor, at the highest supply voltage with tolerance, against its rated voltage times
the ratio for its technology: direct voltage where it is steady, the peak where it is not. Aluminium electrolytics and film
capacitors on the rectified mains have a ratio of their own (`bulk`): 400 V parts at 373 V are common practice. Capacitors of
class X or Y, across the line or across a barrier belong to other rules; on a.c. a rating that does not say its form is left alone.

Pass: the voltage is never above the share that may be used. Fail: it surely is; above the rating itself the fail is an
error. The technology comes from the text, else from the symbol, the footprint and the value; while several are possible the
strictest ratio decides a pass and the laxest a fail. Open on declared rails and on the rectified mains: the technology decides,
or the rail is a range, or no rating is stated (once per rail). On other rails one note per rail, where the house margin cannot
be shown because the rail is only known by its name or its regulator. Nets that nothing bounds give nothing.

To settle it: BOM column `Voltage`, `ratings: {voltage: 25 V}` in a parts file or the declaration, or `rails` in the declaration.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Annotated

from checker.formulas.derating import DIRECT, next_usual
from checker.model.candidate import Candidate
from checker.model.clause import Clause, Subject
from checker.model.declaration import Output
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.stress import Voltage
from checker.model.verdict import Change, Missing, Number, Remedy, Verdict
from checker.parameters import Ratio
from checker.rules.part_voltage import (
    Question,
    Rated,
    Share,
    follows_mains,
    highest,
    is_polarised,
    judged,
    on_mains_side,
    percent,
    voltage_missing,
)

HIGH = 60.0  # V; above this a direct voltage on the mains side is the bus, not an auxiliary supply (common practice, no source)
SMALLEST_POLARISED = 100e-9  # F; no tantalum, polymer or aluminium part has less (from memory)
HIGHEST = {"tantalum": 125.0, "polymer": 250.0}  # V; highest rated voltage that is made (from memory)
_CLASSES = ("X1", "X2", "X3", "Y1", "Y2", "Y3", "Y4")
_POLARISED = frozenset({"aluminium", "tantalum", "polymer"})
_UNPOLARISED = frozenset({"ceramic", "film"})
_BULK = frozenset({"aluminium", "film"})
_PEAK_OF_RMS = (1.414, 3.0)  # d.c. rating of a part with an a.c. rating, per volt r.m.s.: least and most (from memory)
DOUBLE_LAYER = (0.04, 6.5)  # F and V; from here on and up to here nothing else is made (common practice, no source)
NOTHING = 0.5  # V; between nets that are one conductor, or where no supply is
SHOWN = 12  # references told in one sentence


@dataclass(frozen=True, slots=True)
class Params:
    """Share of the rated voltage that may be used, by technology; bulk: aluminium and film on the rectified mains."""

    ceramic: Annotated[float, Ratio()] = 0.8
    film: Annotated[float, Ratio()] = 0.8
    aluminium: Annotated[float, Ratio()] = 0.9
    tantalum: Annotated[float, Ratio()] = 0.5
    polymer: Annotated[float, Ratio()] = 0.8
    bulk: Annotated[float, Ratio()] = 0.95


@dataclass(frozen=True, slots=True)
class _Place:
    """A capacitor between two nets that the stress stage bounds. output: the declared rail, if it is one. bulk: on the bus."""

    ref: str
    candidate: Candidate
    nets: tuple[str, str]
    voltage: Voltage
    output: Output | None
    bulk: bool

    @property
    def important(self) -> bool:
        """Whether evidence that is missing here is asked for."""
        return self.output is not None or self.bulk


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per rated capacitor whose voltage is bounded, one per rail for those without a rating or without proof."""
    unrated: dict[frozenset[str], list[_Place]] = {}
    unproven: dict[frozenset[str], list[Question]] = {}
    for place in _places(analysis):
        if "voltage" not in place.candidate.ratings:
            if place.important:
                unrated.setdefault(frozenset(place.nets), []).append(place)
            continue
        question = _question(analysis, clause, place)
        if question is None:
            continue
        if question.outcome == "open" and not place.important:
            if _rail_like(place.voltage) and _worth_a_note(analysis, question):
                unproven.setdefault(frozenset(place.nets), []).append(question)
            continue
        verdict = judged(analysis, clause, question)
        if verdict is not None:
            yield verdict
    yield from (_unrated(analysis, clause, places) for places in unrated.values())
    yield from (_unproven(clause, questions) for questions in unproven.values())


def _places(analysis: Analysis) -> Iterator[_Place]:
    rails = {frozenset((output.net, output.return_net)): output for output in analysis.declaration.outputs if output.return_net}
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        nets = part.nets()
        if candidate.kind != "capacitor" or not part.fitted or len(nets) != 2 or candidate.marked(*_CLASSES):
            continue
        one, other = nets
        if {one, other} <= analysis.stress.lines or analysis.isolation.crossing(ref) or _double_layer(candidate):
            continue
        voltage = analysis.stress.between(one, other)
        if voltage is not None and highest(voltage.peak) > NOTHING:
            bus = on_mains_side(analysis, one) and on_mains_side(analysis, other) and voltage.shape != "ac"
            output = rails.get(frozenset(nets))
            yield _Place(ref, candidate, (one, other), voltage, output, bus and voltage.peak.surely > HIGH)


def _double_layer(candidate: Candidate) -> bool:
    """Whether it can only be a double-layer capacitor, which is used up to its rated voltage and derated by its life."""
    value, rating = candidate.value, candidate.ratings.get("voltage")
    return (
        value is not None
        and rating is not None
        and float(value.value) >= DOUBLE_LAYER[0]
        and float(rating.value) <= DOUBLE_LAYER[1]
    )


def _question(analysis: Analysis, clause: Clause, place: _Place) -> Question | None:
    """The voltage against the rating; None for an a.c. voltage and a rating that does not say which form it has."""
    rating = place.candidate.ratings["voltage"]
    rated = float(rating.value)
    alternating = place.voltage.shape == "ac"
    if alternating and not rating.form:
        return None
    bounds = place.voltage.rms if alternating and rating.form == "rms" else place.voltage.peak
    low, high = (1.0, 1.0) if rating.form != "rms" or bounds is place.voltage.rms else _PEAK_OF_RMS
    text = f"it is rated {rated:g} V {rating.form}".strip()
    possible, facts = technologies(analysis, place.ref)
    share = _share(clause.params, possible, place.bulk)
    ref, most = place.ref, highest(bounds)
    value = next_usual(most / share.strict, DIRECT)
    remedy = None
    if value is not None and bounds.form != "rms":
        remedy = Remedy(f"{ref} rated {value:g} V or more", (Change(ref, "rating:voltage", value, "V", "dc"),))
    return Question(
        Subject((ref,), place.nets, key=(ref, "voltage")),
        "Voltage of a capacitor with the margin for its technology.",
        f"{ref} between {place.nets[0]} and {place.nets[1]} sees",
        bounds,
        Rated(low * rated, high * rated, text, (rating,), bounds.form),
        share,
        _missing(clause.params, place, most, rated, possible),
        remedy,
        facts,
        follows_mains(analysis, *place.nets),
    )


def technologies(analysis: Analysis, ref: str) -> tuple[tuple[str, ...], tuple[Fact, ...]]:
    """What a capacitor may be made of, and the facts that tell: its text, else symbol, footprint, value and rating."""
    part, candidate = analysis.design.parts[ref], analysis.choice[ref]
    names = ("ceramic", "film", "aluminium", "tantalum", "polymer")
    said = candidate.attributes.get("technology")
    if said is not None and said.value in names:
        return (str(said.value),), (said,)
    possible, facts = set(names), []
    symbol, footprint = part.say("symbol"), part.say("footprint")
    polarised = is_polarised(analysis, ref)
    if polarised and symbol is not None:
        possible &= _POLARISED
        facts.append(symbol)
    shape = str(footprint.value).rpartition(":")[2].upper() if footprint is not None else ""
    if footprint is not None and not polarised and (shape.startswith(("C_0", "C_1", "C_2", "C0", "C1", "C2"))):
        possible &= _UNPOLARISED
        facts.append(footprint)
    elif footprint is not None and shape.startswith(("CP_EIA", "CP_TANTALUM", "CP_ELEC", "CP_RADIAL", "CP_AXIAL")):
        possible &= {"tantalum", "polymer"} if shape.startswith(("CP_EIA", "CP_T")) else {"aluminium", "polymer"}
        facts.append(footprint)
    value, rating = candidate.value, candidate.ratings.get("voltage")
    if value is not None and float(value.value) < SMALLEST_POLARISED and not polarised:
        possible &= _UNPOLARISED
        facts.append(value)
    for name, made in HIGHEST.items():
        if rating is not None and rating.form != "rms" and float(rating.value) > made:
            possible.discard(name)
    # what rules everything out contradicts itself and tells nothing
    return (tuple(name for name in names if name in possible), tuple(facts)) if possible else (names, ())


def _share(params: Params, possible: tuple[str, ...], bulk: bool) -> Share:
    ratios = {name: _ratio(params, name, bulk) for name in possible}
    strict, lax = min(ratios.values()), max(ratios.values())
    what = "bulk" if bulk and set(possible) <= _BULK else possible[0] if len(possible) == 1 else "technology not stated"
    text = percent(strict) if strict == lax else f"{percent(strict)} to {percent(lax)}"
    return Share(strict, lax, f"{text} ({what})")


def _ratio(params: Params, name: str, bulk: bool) -> float:
    return params.bulk if bulk and name in _BULK else float(getattr(params, name))


def _missing(params: Params, place: _Place, most: float, rated: float, possible: tuple[str, ...]) -> Missing:
    answers = tuple((name, "pass" if most <= _ratio(params, name, place.bulk) * rated else "fail") for name in possible)
    if len({outcome for _, outcome in answers}) > 1:
        return Missing("technology", "BOM column Technology, or its name in the description", answers, place.ref)
    return voltage_missing(place.nets, place.ref, min(_ratio(params, name, place.bulk) for name in possible) * rated)


def _rail_like(voltage: Voltage) -> bool:
    """Whether a voltage is that of a rail and not the hull of what a signal may reach."""
    most = voltage.peak.never_above
    return most is not None and voltage.peak.surely >= most / 2


def _worth_a_note(analysis: Analysis, question: Question) -> bool:
    """Whether more than a technology is in doubt that the schematic does not draw: no tantalum stands on a plain symbol."""
    asked = question.missing is not None and question.missing.fact
    return asked != "technology" or any(is_polarised(analysis, ref) for ref in question.subject.parts)


def _unrated(analysis: Analysis, clause: Clause, places: list[_Place]) -> Verdict:
    """One open verdict for all capacitors of a rail that state no rating: one question, one answer in the BOM."""
    refs, first = tuple(place.ref for place in places), places[0]
    bounds = first.voltage.peak
    most = highest(bounds)
    ratios = [
        _ratio(clause.params, name, place.bulk)
        for place in places
        for name in technologies(analysis, place.ref)[0]
        if HIGHEST.get(name, bounds.surely) >= bounds.surely
    ]
    facts = tuple(analysis.design.parts[ref].fact for ref in refs[:SHOWN])
    because = f"{', '.join(refs[:SHOWN])} between {first.nets[0]} and {first.nets[1]}, {most:.4g} V: no rated voltage is stated"
    step = Step(because, (bounds.step, *facts))
    then = ((f"{most / min(ratios):.3g} V or more", "pass"), (f"below {bounds.surely / max(ratios):.3g} V", "fail"))
    missing = Missing("rated voltage", "BOM column Voltage, or ratings in a parts file", then, refs[0])
    what = "Voltage of the capacitors on a rail: no rating is stated."
    key = (first.output.net, "unrated") if first.output is not None else (*refs, "unrated")
    return clause.opens(
        Subject(refs, first.nets, key=key), what, because, step, missing, found=Number(most, "V", bounds.form)
    )  # fmt: skip


def _unproven(clause: Clause, questions: list[Question]) -> Verdict:
    """One note for the capacitors of a rail nobody declares whose margin hangs on its exact voltage or on their technology."""
    first = max(questions, key=lambda question: question.used)
    refs = tuple(part for question in questions for part in question.subject.parts)
    bounds, nets = first.bounds, first.subject.nets
    most = highest(bounds)
    because = (
        f"{', '.join(refs[:SHOWN])} between {nets[0]} and {nets[1]}: {bounds.surely:.4g} to {most:.4g} V, {first.rated.text} "
        f"({first.subject.parts[0]}), of which {first.share.text} may be used"
    )
    step = Step(because, (bounds.step, *(fact for question in questions for fact in (*question.rated.facts, *question.facts))))
    missing = first.missing
    assert missing is not None
    return clause.opens(
        Subject(refs, nets, key=(*refs, "margin")), "Margin of the capacitors on a rail that is not declared.", because, step,
        replace(missing, part=first.subject.parts[0]), found=Number(most, "V", bounds.form), level="note",
    )  # fmt: skip


RULE = Rule("capacitor-voltage", "overstress", Params, ask, __doc__ or "")
