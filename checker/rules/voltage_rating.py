"""Does every semiconductor and every part in the line keep below its rated voltage, with the margin of the house?

- Diodes and bridges: reverse voltage against the repetitive rating. Rectifiers of the mains keep a larger margin (`rectifier`),
  since a varistor lets more than the crest of the mains through in a surge: 1000 V types serve on 230 V, 400 V types do not.
- Transistors, triacs, coupler outputs: the voltage between their main terminals, where both nets are bounded; a winding that is
  switched is not.
- Suppressors: the steady voltage must not be above the stand-off voltage, else they conduct in normal use.
- Shunt references, regulators, controllers and circuits: the supply or cathode pin against ground, where the pins are named and
  a rated voltage is known.
- Connectors, switches, relay contacts, chokes and filters in the line: the rated voltage against the rated mains voltage,
  without tolerance, as rated voltages of mains parts are meant.

Pass: never above the share that may be used. Fail: surely above it; above the rating itself the fail is an error. Open: a
rectifier of the mains states no reverse voltage, or the bounds leave it open although a good part of the voltage is sure (a note,
where the voltage does not follow the mains). Nothing: other parts without a rating, and nets that nothing bounds.

To settle it: BOM column `Voltage`, `ratings: {voltage: 600 V}` in a parts file or the declaration, `rails` for what a net carries.
"""

from __future__ import annotations

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
    """Share of the rated voltage that may be used. rectifier: of the mains; supply: of supply and cathode pins of circuits."""

    diode: Annotated[float, Ratio()] = 0.8
    rectifier: Annotated[float, Ratio()] = 0.75
    mosfet: Annotated[float, Ratio()] = 0.8
    bipolar: Annotated[float, Ratio()] = 0.8
    thyristor: Annotated[float, Ratio()] = 0.8
    suppressor: Annotated[float, Ratio()] = 1.0
    supply: Annotated[float, Ratio()] = 0.9
    line: Annotated[float, Ratio()] = 1.0


@dataclass(frozen=True, slots=True)
class _Pins:
    """Two nets of a part between which it is rated. family: the parameter that gives the share."""

    one: str
    other: str
    family: str


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per part whose voltage is bounded and whose rating is known, and per mains rectifier without a rating."""
    for ref, candidate in analysis.choice.items():
        if not analysis.design.parts[ref].fitted:
            continue
        verdict = _in_line(analysis, clause, ref) if candidate.kind in _LINE_PARTS else _of_pins(analysis, clause, ref)
        if verdict is not None:
            yield verdict


def _of_pins(analysis: Analysis, clause: Clause, ref: str) -> Verdict | None:
    """The worst pair of pins of a semiconductor or circuit."""
    found = []
    for pins in _pins(analysis, ref):
        voltage = analysis.stress.between(pins.one, pins.other)
        if voltage is not None and not _conducts(analysis, ref, pins):
            pumped = any(_pumped(analysis, net) for net in (pins.one, pins.other))
            bounds = replace(voltage.peak, surely=0.0) if pumped else voltage.peak
            found.append((highest(bounds), pins, bounds))
    if not found:
        return None
    _, pins, bounds = max(found, key=lambda one: one[0])
    rated = _rated(analysis, ref)
    if rated is None:
        return _unrated(analysis, clause, ref, pins, bounds) if pins.family == "rectifier" else None
    ratio = float(getattr(clause.params, pins.family))
    most = highest(bounds)
    nets, stated = (pins.one, pins.other), "voltage" in analysis.choice[ref].ratings
    line = follows_mains(analysis, *nets)
    clamps = pins.family == "suppressor"
    value = next_usual(most / ratio, STANDOFF if clamps else DIRECT if pins.family == "supply" else REVERSE)
    return judged(
        analysis,
        clause,
        Question(
            Subject((ref,), nets, key=(ref, "voltage")),
            _WHAT,
            f"{ref} between {pins.one} and {pins.other} sees",
            bounds,
            rated,
            Share(ratio, ratio, percent(ratio)),
            _missing(nets, ref, bounds, rated, ratio),
            Remedy(f"{ref} rated {value:g} V or more", (Change(ref, "rating:voltage", value, "V", rated.form),))
            if value is not None and stated
            else None,
            (analysis.design.parts[ref].fact,),
            line,
            level="" if line else "note",
            above="it conducts in normal use" if clamps else "it is above the rating itself",
        ),
    )


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
    if rating is not None and (candidate.kind not in _CIRCUITS or rating.trust not in (Trust.NETLIST, Trust.BOM, Trust.GUESSED)):
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
