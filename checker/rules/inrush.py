"""Does something limit the inrush current, and does the rectifier survive it?

An empty bulk capacitor is a short circuit for the mains that is switched on at its crest: only the resistance of the way limits the
current. Too much of it destroys rectifiers, ages fuses and welds contacts.

The way is followed from pole to pole: line, rectifiers, bulk of 1 uF or more, back. Asked of bulk above `small`:
- Pass: on every way stands a thermistor or a resistor of 1 ohm to 1 kohm; a contact across it closes later and does not count.
- Fail (a warning): some way has none.
- Open: some way has none but a choke, whose resistance may do.

Where the surge current of the rectifiers is known (`IFSM 60A` in the text, generic types), whatever the bulk:
- Pass: the peak, crest of the highest mains over the least resistance of the limiters when cold, is within it, or its
  current-squared integral U^2 x C / 2R within that of the half wave the surge current is stated for.
- Fail: the integral is above it for certain, with the most resistance of limiters, capacitor and supply.
- Open: between the two, where a limiter is there. Nothing when there is none, since the question above says so.

Nothing: converter modules, capacitive droppers, boards whose way from the mains to the bulk is not recognised. A thermistor that is
still hot limits less; whether a fuse stands the pulse is not judged here.

To settle it: value and tolerance of the limiter, `IFSM 60A` in the description of the rectifier.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.formulas import surge
from checker.formulas.derating import compared, next_usual
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact, Trust
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Change, Missing, Number, Remedy, Verdict, Words
from checker.parameters import AtMost
from checker.rules.charging_path import Charge, charges
from checker.rules.part_voltage import LOWEST_MAINS

_LIMITER = "Something limits the inrush current into the bulk."
_SURVIVES = "The rectifier survives the inrush current."
_MORE = 2.0  # what a maker may promise beyond the smallest surge current of all, at most (from memory)
_BULK_TOLERANCE = 20.0  # %; of an electrolytic capacitor that states none (from memory)
_OHMS = (1.0, 1.5, 2.5, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0, 10.0, 12.0, 16.0, 20.0, 22.0, 25.0, 30.0, 33.0, 47.0, 50.0, 60.0, 80.0, 120.0)


@dataclass(frozen=True, slots=True)
class Params:
    """small: bulk that needs no limiter of its own."""

    small: Annotated[float, AtMost("F")] = 4.7e-6


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """Per group of rectifiers: whether there is a limiter, and whether the rectifiers survive."""
    if analysis.setting.mains is None or not analysis.stress.poles:
        return
    for charge in charges(analysis):
        if charge.capacitance > clause.params.small * (1 + 1e-9):
            yield _limiter(analysis, clause, charge)
        survival = _survives(analysis, clause, charge)
        if survival is not None:
            yield survival


def _limiter(analysis: Analysis, clause: Clause, charge: Charge) -> Verdict:
    parts = analysis.design.parts
    shown, bulk = ", ".join(charge.rectifiers), ", ".join(charge.bulk)
    way = f"the way through {shown} into {bulk} ({charge.capacitance * 1e6:.4g} uF)"
    values = [value for ref in charge.bulk if (value := analysis.choice[ref].value) is not None]
    named = charge.limiters or charge.chokes
    subject = Subject((*charge.rectifiers, *charge.bulk, *named), charge.ends, key=(*sorted(charge.rectifiers), "limiter"))
    facts = (*values, *(parts[ref].fact for ref in (*charge.rectifiers, *named)))
    if charge.limiters:
        step = Step(f"{', '.join(charge.limiters)} stand{'s' * (len(charge.limiters) == 1)} in {way}", facts)
        return clause.passes(subject, _LIMITER, step.text, step, found=Words(", ".join(charge.limiters)))
    if charge.chokes:
        step = Step(f"no thermistor or resistor stands in {way}, only {', '.join(charge.chokes)}", facts)
        missing = Missing(
            "inrush current, or the resistance of the choke", "a concession with the measurement, or a limiter",
            (("the rectifier's surge current is kept", "pass with a concession"), ("no", "fail")), charge.chokes[0],
        )  # fmt: skip
        return clause.opens(subject, _LIMITER, step.text, step, missing)
    step = Step(f"no thermistor or resistor stands in {way}", facts, citation=clause.citation)
    return clause.fails(subject, "Nothing limits the inrush current.", step.text, step)


def _survives(analysis: Analysis, clause: Clause, charge: Charge) -> Verdict | None:
    stated = [analysis.choice[ref].ratings.get("surge_current") for ref in charge.rectifiers]
    known = [fact for fact in stated if fact is not None]
    if not known or len(known) < len(stated):
        return None
    weakest = min(known, key=lambda fact: float(fact.value))
    least = float(weakest.value)
    most = least * _MORE if weakest.trust == Trust.CATALOGUE else least
    low, high = surge.surge_integral(least, surge.HALF_WAVE[0]), surge.surge_integral(most, surge.HALF_WAVE[1])
    crest, step = _crest(analysis)
    surely, never_above, whole = _integral(analysis, charge, crest)
    peak = surge.charging_peak(crest[1], charge.resistance) if charge.resistance > 0 else None
    outcome = "pass" if peak is not None and peak <= least else compared(surely, never_above, low, high)
    if outcome == "open" and never_above is None:
        return None
    shown = ", ".join(charge.rectifiers)
    values = (*_values(analysis, charge.limiters), *_values(analysis, charge.bulk))
    told = f"{charge.resistance:.3g} ohm or more" if charge.resistance else "no limiter"
    because = (
        f"{crest[1]:.4g} V and {told} charge {charge.capacitance * 1e6:.4g} uF"
        + (f" with a peak of at most {peak:.3g} A" if peak is not None else "")
        + f", {whole}; {shown} stand{'s' * (len(charge.rectifiers) == 1)} {least:g} A or {low:.3g} A2s"
    )
    subject = Subject((*charge.rectifiers, *charge.bulk, *charge.limiters), charge.ends, key=(*sorted(charge.rectifiers), "surge"))
    derived = Step(
        because, (step, weakest, *values, *(analysis.design.parts[ref].fact for ref in charge.rectifiers)),
        formula="I = U / R, I2t = U^2 x C / 2R", result=never_above if never_above is not None else surely, unit="A2s",
        citation="charging of a capacitor (makers' notes on inrush limiters and fuses)",
    )  # fmt: skip
    if outcome == "pass" and peak is not None and peak <= least:
        return clause.at_most(
            subject, _SURVIVES, because, derived, surely=Number(peak, "A", "peak"), never_above=Number(peak, "A", "peak"),
            limit=Number(least, "A", "peak"), missing=_missing(charge, low),
        )  # fmt: skip
    return clause.at_most(
        subject, _SURVIVES, because, derived, surely=Number(surely, "A2s"),
        never_above=None if never_above is None else Number(never_above, "A2s"),
        limit=Number(high if outcome == "fail" else low, "A2s"), missing=_missing(charge, low),
        remedy=_remedy(analysis, charge, crest[1], low) if outcome == "fail" else None,
    )  # fmt: skip


def _crest(analysis: Analysis) -> tuple[tuple[float, float], Step]:
    """The crest of the line at the highest supply: (surely, at most), V. An assumed mains is surely no more than the lowest."""
    setting = analysis.setting
    voltage = setting.mains_voltage(tolerance=True) or 0.0
    assumed = any(assumption.key == "supply.mains" for assumption in setting.assumptions)
    surely = LOWEST_MAINS if assumed else voltage
    if setting.mains is not None and setting.mains.phases == 3:
        surely /= math.sqrt(3)
    step = Step(
        f"the crest of the mains is at most {math.sqrt(2) * voltage:.4g} V", setting.facts, formula="sqrt(2) x U",
        result=math.sqrt(2) * voltage, unit="V", form="peak",
    )  # fmt: skip
    return (math.sqrt(2) * surely, math.sqrt(2) * voltage), step


def _integral(analysis: Analysis, charge: Charge, crest: tuple[float, float]) -> tuple[float, float | None, str]:
    """(surely reached, never exceeded, in words): the current-squared integral of the charge, A2s."""
    spread = max((float(fact.value) for ref in charge.bulk if (fact := analysis.choice[ref].tolerance) is not None), default=None)
    share = (spread if spread is not None else _BULK_TOLERANCE) / 100
    surely, never_above = 0.0, None
    if charge.high is not None and share < 1:
        ohms = charge.high + surge.SUPPLY + surge.series_resistance(charge.capacitance)
        surely = surge.charging_integral(crest[0], ohms, charge.capacitance * (1 - share))
    if charge.resistance > 0:
        never_above = surge.charging_integral(crest[1], charge.resistance, charge.capacitance * (1 + share))
    least, most = f"at least {surely:.3g} A2s", "" if never_above is None else f"at most {never_above:.3g} A2s"
    return surely, never_above, " and ".join(text for text in (least if surely else "", most) if text) or "an unknown integral"


def _values(analysis: Analysis, refs: tuple[str, ...]) -> list[Fact]:
    return [value for ref in refs if (value := analysis.choice[ref].value) is not None]


def _missing(charge: Charge, limit: float) -> Missing:
    return Missing(
        "current-squared integral of the inrush current", "a concession with the measurement, or a limiter of more ohms",
        ((f"at most {limit:.3g} A2s", "pass with a concession"), ("more", "fail")), charge.rectifiers[0],
    )  # fmt: skip


def _remedy(analysis: Analysis, charge: Charge, crest: float, limit: float) -> Remedy | None:
    """Another value of the one limiter with which the integral is kept, capacitor and limiter at the wrong end of 20 %."""
    needed = crest**2 * 1.2 * charge.capacitance / (2 * limit * 0.8)
    value = next_usual(needed, _OHMS)
    if value is None or len(charge.limiters) != 1:
        return None
    ref = charge.limiters[0]
    return Remedy(f"{ref} of {value:g} ohm or more", (Change(ref, "value", value, "ohm"),))


RULE = Rule("inrush", "overstress", Params, ask, __doc__ or "")
