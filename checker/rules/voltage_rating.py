"""Does every semiconductor and every part in the line keep below its rated voltage, with the margin of the house?

- Diodes and bridges: reverse voltage against the repetitive rating. Rectifiers of the mains keep a larger margin (`rectifier`),
  since a varistor lets more than the crest of the mains through in a surge: 1000 V types serve on 230 V, 400 V types do not.
- Transistors, triacs, coupler outputs, switches inside controllers: the voltage between their main terminals.
- On the winding of a switched core the plateaus count, by volts per turn. The ringing of rectifiers is what their margin is for
  (`diode`; a fail is what leaves less than `most`). A switch passes only with a clamp: plateau up to `winding`, its spikes, taken
  as those of a clamp of usual design, up to `spike` of the rating. Without a clamp nothing bounds them.
- Suppressors: the steady voltage must not be above the stand-off voltage, else they conduct in normal use.
- Shunt references, regulators, controllers and circuits: the supply or cathode pin against ground, where the pins are named and
  a rated voltage is known.
- Connectors, switches, relay contacts, chokes and filters in the line: the rated voltage against the rated mains voltage,
  without tolerance, as rated voltages of mains parts are meant.

Pass: never above the share that may be used. Fail: surely above it; above the rating itself the fail is an error. Open: a
rectifier of the mains states no reverse voltage, or the bounds leave it open although a good part of the voltage is sure (a note,
where the voltage does not follow the mains). Where the turns of a core are not stated, one open names its parts. Nothing: other
parts without a rating, and nets that nothing bounds.

To settle it: BOM column `Turns` (`1-2:128, 3-4:16`), BOM column `Voltage`, `ratings: {voltage: 600 V}` in a parts file or the
declaration, `rails` for what a net carries.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Annotated

from checker.formulas.derating import ALTERNATING, DIRECT, REVERSE, STANDOFF, next_usual
from checker.model.clause import Clause, Subject
from checker.model.fact import Trust
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.stress import Bounds
from checker.model.terminals import GROUND, anode_and_cathode, bridge, coupler, named
from checker.model.verdict import Change, Missing, Number, Remedy, Verdict
from checker.parameters import Ratio
from checker.rules.clamps import clamp
from checker.rules.part_voltage import (
    Question,
    Rated,
    Share,
    follows_mains,
    highest,
    judged,
    on_mains_side,
    percent,
    voltage_missing,
    worth_asking,
)

_STANDOFF_OF_BREAKDOWN = (0.81, 1.05)  # stand-off voltage per volt of nominal breakdown, least; breakdown, most (from memory)
_MORE = 1.5  # what a maker may promise beyond the lowest of all, at most (from memory)
_DRAIN = ("DRAIN", "D", "SW", "HV", "COLLECTOR", "C")
SWITCH = 100.0  # V; no supply pin of a controller is rated as much, no drain of an off-line one less (from memory)
_CIRCUITS = frozenset({"regulator", "controller", "ic"})
_SUPPLY = ("VCC", "VDD", "VIN", "VI", "IN", "V+", "VS", "VBAT")
_TERMINALS = {
    "mosfet": (("D", "DRAIN"), ("S", "SOURCE")),
    "jfet": (("D", "DRAIN"), ("S", "SOURCE")),
    "igbt": (("C", "COLLECTOR"), ("E", "EMITTER")),
    "bipolar": (("C", "COLLECTOR"), ("E", "EMITTER")),
    "triac": (("MT1", "T1", "A1"), ("MT2", "T2", "A2")),
    "thyristor": (("A", "ANODE"), ("K", "CATHODE")),
}
_LINE_PARTS = frozenset("connector inlet switch relay solid-state-relay common-mode-choke filter inductor jumper".split())
_CALLED = frozenset({100.0, 110.0, 115.0, 120.0, 127.0, 200.0, 208.0, 220.0, 230.0})  # V; names of mains, not ratings
_ONLY_VOLTS = re.compile(r"\s*[0-9.,]+\s?V[0-9]?\s*")
_VOLTS = re.compile(r"(?<![0-9.])([1-9][0-9]{1,2})\s?V")
_WHAT = "Voltage of a part against its rated voltage."


@dataclass(frozen=True, slots=True)
class Params:
    """Share of the rated voltage that may be used.

    rectifier: of the mains; supply: of supply and cathode pins of circuits. winding, spike: of switches on a winding, plateau and
    peak; most: plateau of any part on a winding, beyond which it surely fails.
    """

    diode: Annotated[float, Ratio()] = 0.8
    rectifier: Annotated[float, Ratio()] = 0.75
    mosfet: Annotated[float, Ratio()] = 0.8
    bipolar: Annotated[float, Ratio()] = 0.8
    thyristor: Annotated[float, Ratio()] = 0.8
    suppressor: Annotated[float, Ratio()] = 1.0
    supply: Annotated[float, Ratio()] = 0.9
    winding: Annotated[float, Ratio()] = 0.85
    spike: Annotated[float, Ratio()] = 0.95
    most: Annotated[float, Ratio()] = 0.9
    line: Annotated[float, Ratio()] = 1.0


@dataclass(frozen=True, slots=True)
class _Pins:
    """Two nets of a part between which it is rated. family: the parameter that gives the share."""

    one: str
    other: str
    family: str


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per part whose voltage is bounded and whose rating is known, per mains rectifier without a rating, and per core
    that bounds nothing."""
    loose: dict[tuple[str, str], list[str]] = {}
    for ref, candidate in analysis.choice.items():
        if not analysis.design.parts[ref].fitted:
            continue
        verdict = _in_line(analysis, clause, ref) if candidate.kind in _LINE_PARTS else _of_pins(analysis, clause, ref)
        if verdict is not None:
            yield verdict
        elif (core := _core(analysis, ref)) is not None:
            loose.setdefault(core, []).append(ref)
    yield from (_loose(analysis, clause, core, fact, refs) for (core, fact), refs in loose.items())


def _core(analysis: Analysis, ref: str) -> tuple[str, str] | None:
    """(core, missing fact) for a rated part on a winding that nothing bounds, or on what is rectified from it."""
    nets = analysis.design.parts[ref].nets()
    ends = [(pins.one, pins.other) for pins in _pins(analysis, ref)] if _rated(analysis, ref) is not None else []
    if analysis.kind(ref) == "capacitor" and len(nets) == 2 and not analysis.isolation.crossing(ref):
        ends = [(nets[0], nets[1])] if "voltage" in analysis.choice[ref].ratings else []
    for one, other in ends:
        if analysis.stress.between(one, other) is None:
            told = [analysis.stress.loose[net] for net in (one, other) if net in analysis.stress.loose]
            if told:
                return told[0]
    return None


def _loose(analysis: Analysis, clause: Clause, core: str, fact: str, refs: list[str]) -> Verdict:
    parts = (core, *refs)
    because = f"{', '.join(refs)} stand on windings of {core} or on what these feed, and nothing bounds the voltages there"
    step = Step(because, tuple(analysis.design.parts[ref].fact for ref in parts))
    then = (("stated, and the ratings cover what follows", "pass"), ("stated, and one is too low", "fail"))
    supply = "outputs in the declaration"
    if fact.startswith("turns"):
        supply = "BOM column Turns (1-2:128, 3-4:16)"
    elif fact.endswith("is charged to"):
        supply = "rails in the declaration"
    missing = Missing(fact, supply, then, core)
    return clause.opens(Subject(parts, key=(core, "windings")), _WHAT, because, step, missing)


def _of_pins(analysis: Analysis, clause: Clause, ref: str) -> Verdict | None:
    """The worst pair of pins of a semiconductor or circuit."""
    found = []
    for pins in _pins(analysis, ref):
        voltage = analysis.stress.between(pins.one, pins.other)
        if voltage is not None and not _conducts(analysis, ref, pins):
            pumped = any(_pumped(analysis, net) for net in (pins.one, pins.other))
            bounds = replace(voltage.peak, surely=0.0) if pumped and voltage.peak.kind == "steady" else voltage.peak
            found.append((highest(bounds), pins, replace(voltage, peak=bounds)))
    if not found:
        return None
    _, pins, voltage = max(found, key=lambda one: one[0])
    bounds = voltage.peak
    rated = _rated(analysis, ref)
    if rated is None:
        return _unrated(analysis, clause, ref, pins, bounds) if pins.family == "rectifier" else None
    share = _share(clause.params, pins.family, bounds)
    seen, facts, missing = f"{ref} between {pins.one} and {pins.other} sees", [analysis.design.parts[ref].fact], None
    if bounds.kind == "repetitive" and pins.family in ("mosfet", "bipolar") and bounds.surely <= share.lax * rated.high:
        clamping = clamp(analysis, ref, (pins.one, pins.other))
        facts += [analysis.design.parts[other].fact for other in clamping]
        if not clamping:
            bounds = replace(bounds, never_above=None)
            seen = f"nothing clamps the spikes of {ref}, which between {pins.one} and {pins.other} sees"
            missing = _unclamped(pins, ref)
        elif voltage.spike * share.strict > (bounds.never_above or math.inf) * clause.params.spike:
            bounds = replace(bounds, never_above=voltage.spike)
            share = Share(clause.params.spike, clause.params.spike, percent(clause.params.spike))
            seen = f"{ref} between {pins.one} and {pins.other}, with spikes that {', '.join(clamping)} clamps, sees"
    most = highest(bounds)
    nets, stated = (pins.one, pins.other), "voltage" in analysis.choice[ref].ratings
    line = follows_mains(analysis, *nets)
    clamps = pins.family == "suppressor"
    value = next_usual(most / share.strict, STANDOFF if clamps else DIRECT if pins.family == "supply" else REVERSE)
    return judged(
        analysis,
        clause,
        Question(
            Subject((ref,), nets, key=(ref, "voltage")),
            _WHAT,
            seen,
            bounds,
            rated,
            share,
            missing or _missing(nets, ref, bounds, rated, share.strict),
            Remedy(f"{ref} rated {value:g} V or more", (Change(ref, "rating:voltage", value, "V", rated.form),))
            if value is not None and stated
            else None,
            tuple(facts),
            line,
            level="" if line or bounds.kind == "repetitive" else "note",
            above="it conducts in normal use" if clamps else "it is above the rating itself",
        ),
    )


def _share(params: Params, family: str, bounds: Bounds) -> Share:
    """What of the rating may be used: on a winding less than it may have before it surely fails."""
    ratio = float(getattr(params, family))
    if bounds.kind != "repetitive":
        return Share(ratio, ratio, percent(ratio))
    strict = params.winding if family in ("mosfet", "bipolar") else ratio
    lax = max(strict, params.most)
    return Share(strict, lax, f"{percent(strict)} to {percent(lax)}" if lax > strict else percent(strict))


def _unclamped(pins: _Pins, ref: str) -> Missing:
    then = (("a clamp is fitted, or the peak is measured and conceded", "pass"), ("it rings beyond the rating", "fail"))
    return Missing("what clamps the spikes", f"a clamp at {pins.one} in the netlist", then, ref)


def _pins(analysis: Analysis, ref: str) -> Iterator[_Pins]:
    """The pairs of nets between which a part is rated."""
    part, kind = analysis.design.parts[ref], analysis.kind(ref)
    nets, lines = part.nets(), analysis.stress.lines
    if kind == "diode" and len(nets) == 2:
        yield _Pins(*nets, "rectifier" if set(nets) & lines else "diode")
    elif kind == "bridge" and (ends := bridge(part)) is not None:
        plus, minus, alternating = ends
        family = "rectifier" if set(alternating) & lines else "diode"
        yield _Pins(plus, minus, family)
        yield from (_Pins(alternating[0], net, family) for net in alternating[1:])
    elif kind in _TERMINALS:
        one, other = (named(part, names) for names in _TERMINALS[kind])
        if len(one) == len(other) == 1 and one != other:
            family = {"triac": "thyristor", "jfet": "mosfet", "igbt": "mosfet"}.get(kind, kind)
            yield _Pins(one[0], other[0], family)
    elif kind == "optocoupler" and (ends_of := coupler(part)) is not None:
        yield _Pins(ends_of[2], ends_of[3], "bipolar")
    elif kind == "tvs" and len(nets) == 2:
        yield _Pins(*nets, "suppressor")
    elif kind == "shunt-reference" and (pair := anode_and_cathode(part)) is not None:
        yield _Pins(*pair, "supply")
    elif kind in _CIRCUITS:
        drains, sources = named(part, _DRAIN), named(part, GROUND | {"S", "SOURCE"})
        if len(drains) == 1 and sources and _is_drain_rating(analysis, ref):
            yield _Pins(drains[0], sources[0], "mosfet")
            return
        grounds, supplies = named(part, GROUND), named(part, _SUPPLY)
        if grounds and supplies:
            yield from (_Pins(net, grounds[0], "supply") for net in supplies if net != grounds[0])


def _conducts(analysis: Analysis, ref: str, pins: _Pins) -> bool:
    """Whether a diode stands in its forward direction there all the time, so that what it sees is no reverse voltage."""
    if analysis.kind(ref) != "diode":
        return False
    ends = anode_and_cathode(analysis.design.parts[ref])
    return ends is not None and analysis.stress.sign(*ends) > 0 and {pins.one, pins.other} == set(ends)


def _pumped(analysis: Analysis, net: str) -> bool:
    """Whether one diode carries current to a net and another on from it, as behind the capacitor of a dropper: how far such a net
    swings is up to the load, so that nothing of it is sure."""
    if net in analysis.stress.lines:
        return False
    ends = [anode_and_cathode(analysis.design.parts[ref]) for ref in analysis.fitted_on(net) if analysis.kind(ref) == "diode"]
    return any(pair is not None and pair[0] == net for pair in ends) and any(pair is not None and pair[1] == net for pair in ends)


def _rated(analysis: Analysis, ref: str) -> Rated | None:
    """What is known of the rating; of a generic type at least what every maker promises. A figure in a bill beside a circuit is
    its supply as often as its limit, so that circuits need a parts file, a declaration or a generic type; a diode whose value is
    nothing but a voltage may be a zener."""
    candidate = analysis.choice[ref]
    rating = candidate.ratings.get("voltage")
    said = analysis.design.parts[ref].text("value")
    if candidate.kind == "diode" and rating is not None and rating.text == said and _ONLY_VOLTS.fullmatch(said):
        return None
    drain = candidate.kind in _CIRCUITS and _is_drain_rating(analysis, ref)
    if rating is not None and (
        drain or candidate.kind not in _CIRCUITS or rating.trust not in (Trust.NETLIST, Trust.BOM, Trust.GUESSED)
    ):
        low = float(rating.value)
        high = low * _MORE if rating.trust == Trust.CATALOGUE and "lowest" in rating.text else low
        name = "stand-off voltage" if candidate.kind == "tvs" else "rating"
        return Rated(low, high, f"its {name} is {low:g} V" + (" or more, by maker" if high > low else ""), (rating,), rating.form)
    breakdown = candidate.ratings.get("zener_voltage")
    if candidate.kind == "tvs" and breakdown is not None:
        least, most = (factor * float(breakdown.value) for factor in _STANDOFF_OF_BREAKDOWN)
        text = f"it breaks down at {float(breakdown.value):g} V, so that its stand-off voltage is {least:.4g} V or more"
        return Rated(least, most, text, (breakdown,), breakdown.form)
    return None


def _is_drain_rating(analysis: Analysis, ref: str) -> bool:
    """Whether the rated voltage of a circuit with a drain pin is that of the switch inside: no supply pin bears as much."""
    rating = analysis.choice[ref].ratings.get("voltage")
    return rating is not None and float(rating.value) >= SWITCH and bool(named(analysis.design.parts[ref], _DRAIN))


def _missing(nets: tuple[str, str], ref: str, bounds: Bounds, rated: Rated, ratio: float) -> Missing | None:
    """The rating where makers differ about it and that decides, else the voltage; None where the part is switched, so that nothing
    bounds its voltage, or where too little is sure."""
    if bounds.never_above is None or not worth_asking(bounds, ratio * rated.low):
        return None
    if bounds.never_above > ratio * rated.high:
        return voltage_missing(nets, ref, ratio * rated.low)
    then = ((f"{bounds.never_above / ratio:.3g} V or more", "pass"), (f"below {bounds.surely / ratio:.3g} V", "fail"))
    return Missing("rated voltage of this product", "BOM column Voltage, or ratings in a parts file", then, ref)


def _unrated(analysis: Analysis, clause: Clause, ref: str, pins: _Pins, bounds: Bounds) -> Verdict | None:
    most, ratio = bounds.never_above, clause.params.rectifier
    if most is None or not on_mains_side(analysis, pins.one):
        return None
    because = f"{ref} rectifies the mains and sees at most {most:.4g} V peak; its reverse voltage is not stated"
    step = Step(
        because, (bounds.step, analysis.design.parts[ref].fact), formula="U / ratio", result=most / ratio, unit="V", form="peak"
    )
    least = next_usual(most / ratio, REVERSE) or most / ratio
    missing = Missing(
        "reverse voltage", "BOM column Voltage or description, or ratings in a parts file",
        ((f"{least:g} V or more", "pass"), (f"below {bounds.surely / ratio:.3g} V", "fail")), ref,
    )  # fmt: skip
    subject = Subject((ref,), (pins.one, pins.other), key=(ref, "voltage"))
    return clause.opens(subject, _WHAT, because, step, missing, found=Number(most, "V", "peak"))


def _in_line(analysis: Analysis, clause: Clause, ref: str) -> Verdict | None:
    """A part in the line: its rated voltage against the rated mains voltage; names of mains and d.c. figures are no ratings."""
    part, candidate = analysis.design.parts[ref], analysis.choice[ref]
    rating, poles, mains = candidate.ratings.get("voltage"), analysis.stress.poles, analysis.setting.mains_voltage(tolerance=False)
    nets = [net for net in part.nets() if net in poles]
    if rating is None or mains is None or not nets or rating.form in ("dc", "peak"):
        return None
    if rating.text == part.text("value") and candidate.kind in ("connector", "inlet", "relay"):
        return None  # `12V OUT` or `5V 10A` names what is connected or the coil
    rated = float(rating.value)
    if rated in _CALLED and rated < mains:
        return None
    high = max([rated, *map(float, _VOLTS.findall(rating.text))])  # `10A 125VAC, 7A 250VAC`: two ratings for two currents
    step = Step(
        f"{ref} is in the line, {mains:g} V rated", (*analysis.setting.facts, part.fact), result=mains, unit="V", form="rms"
    )
    value = next_usual(mains, ALTERNATING)
    ratio = clause.params.line
    return judged(
        analysis,
        clause,
        Question(
            Subject((ref,), tuple(nets), key=(ref, "voltage")),
            "Rated voltage of a part in the line.",
            f"{ref} in the line sees",
            Bounds(mains, mains, step, form="rms"),
            Rated(rated, high, f"it is rated {rated:g} V", (rating,), rating.form),
            Share(ratio, ratio, percent(ratio)),
            None,
            Remedy(f"{ref} rated {value:g} V a.c. or more", (Change(ref, "rating:voltage", value, "V", "rms"),)) if value else None,
            line=True,
        ),
    )


RULE = Rule("voltage-rating", "overstress", Params, ask, __doc__ or "")
