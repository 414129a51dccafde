"""Does every resistor that carries a high voltage keep within its rated voltage?

A resistor has a highest working voltage besides its power: 50 to 200 V for the usual chip sizes, whatever its value. On a.c. the
r.m.s. voltage counts against the working voltage and the peak against the overload voltage, twice that; on direct voltage the
voltage itself. Where its power is stated the voltage that turns it into heat, sqrt(P x R), is a limit too; the lower of both
holds. Resistors in series share the voltage by value and tolerance and are judged as one string, by its worst member: two 1206
of 200 V across 264 V a.c. see 133 V each.

The working voltage is the stated one, else that of the chip size, else that of leaded film resistors of that power; what makers
disagree on (0603: 50 or 75 V) is open where it decides. Only voltages above 30 V matter. Pass: never above the share that may
be used. Fail: surely above it; above the rated voltage itself the fail is an error. Open: nothing tells the working voltage of
a resistor that surely carries more than 50 V and may carry 150 V or more, or the bounds leave it open although a good part of the
voltage is sure (a note, where nothing bounds it).

To settle it: `ratings: {voltage: 200 V}` in a parts file or the declaration, or the size in the BOM's description or footprint.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.formulas.derating import POWERS, RESISTORS, next_usual, of_chip, of_leaded, of_power
from checker.model.clause import Clause, Subject
from checker.model.rule import Analysis, Rule
from checker.model.stress import Bounds, Voltage
from checker.model.verdict import OUTCOMES, Change, Missing, Remedy, Verdict
from checker.parameters import Ratio
from checker.rules.part_voltage import (
    Question,
    Rated,
    Share,
    follows_mains,
    highest,
    judged,
    percent,
    voltage_missing,
    worth_asking,
)

HARMLESS = 30.0  # V; no resistor that is in use is rated lower but for the smallest sizes (common practice, no source)
UNKNOWN_MAY_STAND = 150.0  # V; a leaded resistor of an eighth of a watt (from memory)
UNKNOWN_STANDS = 50.0  # V; a chip of 0402
OVERLOAD = 2.0  # short-time overload voltage over working voltage (makers' data sheets of chip resistors)
_LEADED_WORDS = ("axial", "leaded", "through hole", "through-hole", "tht", "r_radial", "carbon film", "metal oxide")
_WHAT = "Voltage of a resistor against its rated voltage."


@dataclass(frozen=True, slots=True)
class Params:
    """ratio: share of the rated voltage that may be used."""

    ratio: Annotated[float, Ratio()] = 1.0


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per string of resistors in series, or per resistor that stands alone."""
    for refs in strings(analysis):
        questions = [question for ref in refs if (question := _question(analysis, clause, ref, refs)) is not None]
        if questions:
            worst = min(questions, key=lambda question: (OUTCOMES.index(question.outcome), -question.used))
            verdict = judged(analysis, clause, worst)
            if verdict is not None:
                yield verdict


def strings(analysis: Analysis) -> tuple[tuple[str, ...], ...]:
    """The fitted resistors, those in series together: where two resistors meet on a net and nothing else does."""
    parts = analysis.design.parts
    alone = [
        ref
        for ref, candidate in analysis.choice.items()
        if candidate.kind == "resistor" and parts[ref].fitted and len(parts[ref].nets()) == 2
    ]
    group = {ref: [ref] for ref in alone}
    for net in dict.fromkeys(net for ref in alone for net in parts[ref].nets()):
        meeting = [ref for ref in analysis.fitted_on(net) if analysis.kind(ref) != "test-point"]
        if len(meeting) == 2 and all(ref in group for ref in meeting) and group[meeting[0]] is not group[meeting[1]]:
            group[meeting[0]] += group[meeting[1]]
            group.update(dict.fromkeys(group[meeting[1]], group[meeting[0]]))
    return tuple(tuple(members) for members in {id(members): members for members in group.values()}.values())


def _question(analysis: Analysis, clause: Clause, ref: str, refs: tuple[str, ...]) -> Question | None:
    """One resistor of a string; None where nothing bounds its voltage or it is harmless."""
    nets = analysis.design.parts[ref].nets()
    voltage = analysis.stress.between(*nets)
    if voltage is None or analysis.is_link(ref):
        return None
    if highest(voltage.peak) <= HARMLESS:
        return None
    rated = rating(analysis, ref)
    unknown = rated is None
    if rated is None:
        rated = Rated(UNKNOWN_STANDS, float("inf"), "neither its rated voltage nor its size is stated", ())
    bounds, rated = _counted(voltage, rated)
    ratio = clause.params.ratio
    others = [other for other in refs if other != ref]
    seen = f"{ref}, in series with {', '.join(others)}, sees" if others else f"{ref} sees"
    question = Question(
        Subject(refs, nets, key=(*refs, "voltage")), _WHAT, seen, bounds, rated, Share(ratio, ratio, percent(ratio)),
        _missing(ref, nets, bounds, rated, ratio, unknown), _remedy(analysis, refs, bounds, ratio),
        (analysis.design.parts[ref].fact,), follows_mains(analysis, *nets), "" if bounds.never_above is not None else "note",
    )  # fmt: skip
    return question if not unknown or question.missing is not None else None


def rating(analysis: Analysis, ref: str) -> Rated | None:
    """The rated voltage of a resistor: stated, else by size, else by power of leaded ones; never above sqrt(P x R)."""
    candidate, part = analysis.choice[ref], analysis.design.parts[ref]
    stated, size, power = candidate.ratings.get("voltage"), candidate.attributes.get("size"), candidate.ratings.get("power")
    chip = of_chip(str(size.value)) if size is not None else None
    if stated is not None:
        low = high = float(stated.value)
        text, facts = f"it is rated {low:g} V", [stated]
    elif chip is not None and size is not None:
        low, high = chip
        text, facts = f"a chip resistor of size {size.value} works up to {_figures(low, high)}", [size]
    elif power is not None:
        said = " ".join(part.text(name) for name in ("description", "footprint", "value", "technology")).casefold()
        low, high = of_leaded(float(power.value), any(word in said for word in _LEADED_WORDS))
        text, facts = f"a resistor of {float(power.value):g} W works up to {_figures(low, high)} (from memory)", [power]
    else:
        return None
    value = candidate.value
    if power is not None and value is not None and float(value.value) > 0 and float(power.value) > 0:
        heat = of_power(float(power.value), float(value.value))
        if heat < high:
            low, high = min(low, heat), heat
            text += f"; {float(power.value):g} W in {float(value.value):g} ohm is reached at sqrt(P x R) = {heat:.4g} V"
            facts += [power, value]
    return Rated(low, high, text, tuple(dict.fromkeys(facts)))


def _figures(low: float, high: float) -> str:
    return f"{low:g} V" if low == high else f"{low:g} or {high:g} V, by maker"


def _counted(voltage: Voltage, rated: Rated) -> tuple[Bounds, Rated]:
    """What counts: r.m.s. or direct against the working voltage, or the peak where it is nearer to the overload voltage."""
    rms, peak = voltage.rms, voltage.peak
    if rms.never_above is not None and peak.never_above is not None and peak.never_above > OVERLOAD * rms.never_above:
        text = f"{rated.text}; overload voltage {OVERLOAD:g} x that"
        return peak, Rated(OVERLOAD * rated.low, OVERLOAD * rated.high, text, rated.facts)
    return rms, rated


def _missing(ref: str, nets: tuple[str, ...], bounds: Bounds, rated: Rated, ratio: float, unknown: bool) -> Missing | None:
    if not unknown and not worth_asking(bounds, ratio * rated.low):
        return None
    most = highest(bounds)
    then = ((f"{most / ratio:.3g} V or more", "pass"), (f"below {bounds.surely / ratio:.3g} V", "fail"))
    told = "ratings in a parts file or the declaration, or the size in the BOM's description"
    if unknown:
        worth = bounds.surely > UNKNOWN_STANDS and most >= UNKNOWN_MAY_STAND
        return Missing("rated voltage", told, then, ref) if worth else None
    if rated.low < rated.high and most > ratio * rated.low:
        return Missing("rated voltage", told, then, ref)
    return voltage_missing(nets, ref, ratio * rated.low)


def _remedy(analysis: Analysis, refs: tuple[str, ...], bounds: Bounds, ratio: float) -> Remedy | None:
    """The next usual rated voltage, and the next usual power where heat is the limit, for every member of the string."""
    volts = next_usual(highest(bounds) / ratio, RESISTORS)
    if volts is None:
        return None
    changes, hot = [], 0.0
    for ref in refs:
        changes.append(Change(ref, "rating:voltage", volts, "V"))
        power, value = analysis.choice[ref].ratings.get("power"), analysis.choice[ref].value
        if power is not None and value is not None and float(value.value) > 0:
            needed = next_usual((highest(bounds) / ratio) ** 2 / float(value.value), POWERS)
            if needed is None:
                return None
            if needed > float(power.value):
                hot = max(hot, needed)
                changes.append(Change(ref, "rating:power", needed, "W"))
    heat = f" and {hot:g} W" if hot else ""
    return Remedy(f"{', '.join(refs)} rated {volts:g} V{heat} or more", tuple(changes))


RULE = Rule("resistor-voltage", "overstress", Params, ask, __doc__ or "")
