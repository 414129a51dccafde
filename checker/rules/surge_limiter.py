"""Is a surge limiter behind the fuse, high enough in voltage, and never alone to earth?

A varistor wears with every surge. One chosen too near the mains voltage conducts in normal use, heats and burns; one from the
line to earth that fails short puts the mains on the case of equipment whose plug may have no earth.

Across the line (line to neutral, line to line), one verdict per limiter or string of them:
- The highest continuous a.c. voltage is `rule` (1.25) times the rated supply voltage or more, without tolerance, of a range at its
  upper end: pass. The makers' own least, `least` (1.1) times, is kept but not the rule: fail as a warning, on a declared supply
  only, since 275 V on 230 V is widely sold. Below that: fail, an error.
- While 100-240 V is only assumed, what is enough for part of it is open: the rated supply voltage decides.
- A gas tube alone, also one to earth, is open: whether it stops conducting when the surge is over is its maker's word. From the
  neutral of a permanent connection to earth it passes (common practice, no source).

From the line to protective earth:
- Equipment with a plug of the ordinary kind (pluggable type A, or an inlet) needs a gas tube in series, so that no varistor alone
  bridges to earth: without one, fail. Connection not declared and no inlet: open. Permanent connection: pass.
- The voltage is judged like across the line, where no tube is in series. A maker asks for 430 V at 1 mA even on 100 V mains,
  since the insulation test is made across it: below, fail as a note.

Open as well: neither the continuous voltage nor a type code is known (430, 470, 510 V ... are read as the voltage at 1 mA, where
no other series has that figure). Nothing: limiters on a rectified bus or outside the mains side, across a barrier (rule
barrier-insulation), suppressor diodes (rule voltage-rating). That a limiter stands ahead of the fuse is judged by the rule fuse and
mentioned here.

To settle it: type code (`10D471K`, `S14K300`) or `300VAC` in the BOM, `ratings: {voltage: 300 V rms}` in a parts file,
`supply: {mains:, connection:}` in the declaration.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.formulas import surge
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Change, Limit, Missing, Number, Remedy, Verdict
from checker.parameters import AtLeast
from checker.rules.fuse_path import toward_fuse
from checker.rules.limiter_strings import LimiterString, is_earth, strings
from checker.rules.part_voltage import LOWEST_MAINS

_GAPS = frozenset({"gas-tube", "spark-gap"})
_INLET = re.compile(r"(?<![^\W_])(?:inlet|60320|C6|C8|C14|C18)(?![^\W_])", re.IGNORECASE)
_ACROSS = "Continuous voltage of the surge limiter against the mains."
_TO_EARTH = "Surge limiter from the line to protective earth."


@dataclass(frozen=True, slots=True)
class Params:
    """rule, least: continuous a.c. voltage per volt of the rated supply; by the standard, and by makers.

    to_earth: least voltage at 1 mA of a varistor to earth.
    """

    rule: Annotated[float, AtLeast("")] = 1.25
    least: Annotated[float, AtLeast("")] = 1.1
    to_earth: Annotated[float, AtLeast("V", "dc")] = 430.0


@dataclass(frozen=True, slots=True)
class _Rated:
    """What a varistor stands all the time, V r.m.s., between two bounds; facts: who says so."""

    low: float
    high: float
    text: str
    facts: tuple[Fact, ...]


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One or two verdicts per string of limiters between two poles, or a pole and earth."""
    if analysis.setting.mains is None:
        return
    ahead = _ahead(analysis)
    for string in strings(analysis):
        mention = _mention(string, ahead)
        other = string.ends[1]
        gaps = [ref for ref in string.parts if analysis.kind(ref) in _GAPS]
        varistors = [ref for ref in string.parts if analysis.kind(ref) == "varistor"]
        to_earth = is_earth(analysis, other)
        if len(gaps) == len(string.parts):
            yield _gap_alone(analysis, clause, string, mention)
        elif to_earth:
            yield _to_earth(analysis, clause, string, gaps)
            yield from _test_voltage(analysis, clause, string, gaps, varistors)
        if varistors and not (to_earth and gaps):
            yield _voltage(analysis, clause, string, varistors, mention)


def _to_earth(analysis: Analysis, clause: Clause, string: LimiterString, gaps: list[str]) -> Verdict:
    shown = " - ".join(string.parts)
    connection = analysis.setting.mains.connection if analysis.setting.mains is not None else ""
    subject = Subject(string.parts, string.ends, key=(*sorted(string.parts), "earth"))
    facts = tuple(analysis.design.parts[ref].fact for ref in string.parts)
    said = f"{shown} lies between {string.ends[0]} and earth {string.ends[1]}"
    step = Step(f"{said}, " + (f"with gas tube {', '.join(gaps)} in series" if gaps else "without a gas tube"), facts)
    if gaps:
        return clause.passes(subject, _TO_EARTH, step.text, step)
    inlets = [ref for ref in analysis.stress.entries if _is_inlet(analysis, ref)]
    assumed = any(assumption.key == "supply.connection" for assumption in analysis.setting.assumptions)
    if connection != "pluggable-A":
        because = f"{step.text}; the supply is {connection}, whose earth is relied on (from memory)"
        return clause.passes(subject, _TO_EARTH, because, step)
    if assumed and not inlets:
        missing = Missing(
            "how the equipment is connected", "supply: {connection: pluggable-A, pluggable-B or permanent} in the declaration",
            (("pluggable-A", "fail"), ("pluggable-B or permanent", "pass")), string.parts[0],
        )  # fmt: skip
        return clause.opens(subject, _TO_EARTH, step.text, step, missing)
    why = f"{', '.join(inlets)} takes a cord with a plug" if inlets and assumed else "the supply is pluggable type A"
    inlet_facts = tuple(analysis.design.parts[ref].fact for ref in inlets)
    step = Step(f"{step.text}; {why}", (*facts, *analysis.setting.facts, *inlet_facts), citation=clause.citation)
    because = f"{step.text}, whose earth may be missing: a varistor needs a gas tube in series"
    return clause.fails(subject, "A varistor alone lies between the line and earth.", because, step)


def _is_inlet(analysis: Analysis, ref: str) -> bool:
    """Whether an entry takes a mains cord with an ordinary plug."""
    part = analysis.design.parts[ref]
    return analysis.kind(ref) == "inlet" or any(_INLET.search(part.text(name)) for name in ("value", "description", "symbol"))


def _test_voltage(
    analysis: Analysis, clause: Clause, string: LimiterString, gaps: list[str], varistors: list[str]
) -> Iterator[Verdict]:
    """A note where the varistors to earth conduct 1 mA below what a maker asks for."""
    known = [analysis.choice[ref].ratings.get("varistor_voltage") for ref in varistors]
    volts = sum(float(fact.value) for fact in known if fact is not None)
    least = clause.params.to_earth
    if gaps or None in known or not known or volts >= least:
        return
    shown = " - ".join(varistors)
    because = (
        f"{shown} to earth conducts 1 mA at {volts:g} V; a maker asks for {least:g} V, since the insulation test is made there"
    )
    facts = tuple(fact for fact in known if fact is not None)
    step = Step(because, facts, formula="U_1mA >= U", result=volts, unit="V", form="dc", citation=clause.citation)
    subject = Subject(string.parts, string.ends, key=(*sorted(string.parts), "test"))
    yield clause.fails(
        subject, "A varistor to earth is low.", because, step, level="note", found=Number(volts, "V", "dc"),
        limit=Limit(least, "V", "dc", "at-least", clause.verified), margin=(volts - least) / least,
    )  # fmt: skip


def _gap_alone(analysis: Analysis, clause: Clause, string: LimiterString, mention: str) -> Verdict:
    shown = " - ".join(string.parts)
    facts = tuple(analysis.design.parts[ref].fact for ref in string.parts)
    place = f"from {string.ends[0]} to earth" if is_earth(analysis, string.ends[1]) else "across the line"
    step = Step(f"{shown} lies {place} without a varistor in series{mention}", facts)
    subject = Subject(string.parts, string.ends, key=(*sorted(string.parts), "voltage"))
    what = "A gas tube alone lies at the line."
    if is_earth(analysis, string.ends[1]) and _relies_on_earth(analysis) and _is_neutral(analysis, string.ends[0]):
        because = f"{step.text}; the neutral of a permanent connection drives no current through it (common practice, no source)"
        return clause.passes(subject, what, because, step)
    missing = Missing(
        "whether the gas tube stops conducting after a surge", "a concession with its data sheet, or a varistor in series",
        (("yes", "pass with a concession"), ("no", "fail")), string.parts[0],
    )  # fmt: skip
    return clause.opens(subject, what, step.text, step, missing, level="warning")


def _relies_on_earth(analysis: Analysis) -> bool:
    supply = analysis.setting.mains
    return supply is not None and supply.connection in ("permanent", "pluggable-B")


def _is_neutral(analysis: Analysis, net: str) -> bool:
    pole = analysis.stress.poles.get(net)
    return pole is not None and any(entry.neutral == pole for entry in analysis.stress.entries.values())


def _voltage(analysis: Analysis, clause: Clause, string: LimiterString, varistors: list[str], mention: str) -> Verdict:
    params, shown = clause.params, " - ".join(varistors)
    subject = Subject(string.parts, string.ends, key=(*sorted(string.parts), "voltage"))
    mains, supply = _mains(analysis, string)
    rated = [_rated(analysis, ref) for ref in varistors]
    wanted, least = (surge.least_varistor(mains, factor) for factor in (params.rule, params.least))
    facts = tuple(analysis.design.parts[ref].fact for ref in varistors)
    unknown = [ref for ref, known in zip(varistors, rated, strict=True) if known is None]
    settles = Missing(
        "continuous a.c. voltage", "the type code or `300VAC` in the BOM, or ratings in a parts file",
        ((f"{wanted:.4g} V or more", "pass"), (f"below {wanted:.4g} V", "fail")), (unknown or varistors)[0],
    )  # fmt: skip
    if unknown:
        because = f"nothing that was read tells the continuous voltage of {', '.join(unknown)}; {supply.text}"
        return clause.opens(subject, _ACROSS, because, Step(because, (supply, *facts)), settles)
    low, high = (sum(getattr(known, end) for known in rated if known is not None) for end in ("low", "high"))
    told = "; ".join(known.text for known in rated if known is not None)
    because = f"{told}; {supply.text}, {params.rule:g} times that is {wanted:.4g} V{mention}"
    step = Step(
        because, (supply, *(fact for known in rated if known is not None for fact in known.facts), *facts),
        formula="U_ac >= k x U", result=low, unit="V", form="rms", citation=clause.citation,
    )  # fmt: skip
    found = Number(low, "V", "rms")
    limit = Limit(wanted, "V", "rms", "at-least", clause.verified)
    if low >= wanted:
        return clause.passes(subject, _ACROSS, because, step, found=found, limit=limit, margin=(low - wanted) / wanted)
    error = high < least
    level = clause.level if error else "warning"
    assumed = any(assumption.key == "supply.mains" for assumption in analysis.setting.assumptions)
    if assumed and high >= params.least * LOWEST_MAINS:
        upto = math.floor(low / params.rule)
        missing = Missing(
            "rated mains voltage", "supply: {mains: 230 V} in the declaration",
            ((f"at most {upto:g} V", "pass"), ("more", "fail")), varistors[0],
        )  # fmt: skip
        told = f"{because}; 100-240 V is assumed, no mains voltage is declared"
        return clause.opens(subject, _ACROSS, told, step, missing, found=found, limit=limit, level=level)
    if high >= wanted:
        return clause.opens(subject, _ACROSS, because, step, settles, found=found, limit=limit)
    because += (
        f"; the makers' own least, {params.least:g} times, is {least:.4g} V" + ("" if error else ", which is kept")
    )  # fmt: skip
    value = surge.next_varistor(wanted)
    remedy = None
    if value is not None and len(varistors) == 1:
        remedy = Remedy(f"{shown} for {value:g} V a.c. or more", (Change(varistors[0], "rating:voltage", value, "V", "rms"),))
    return clause.fails(
        subject, _ACROSS, because, step, found=Number(high, "V", "rms"), limit=limit, margin=(high - wanted) / wanted,
        level=level, remedy=remedy,
    )  # fmt: skip


def _mains(analysis: Analysis, string: LimiterString) -> tuple[float, Step]:
    """The rated voltage between the ends of a string, V r.m.s., without tolerance: to earth that of the line to neutral."""
    setting = analysis.setting
    volts = setting.mains_voltage(tolerance=False) or 0.0
    neutral = any(_is_neutral(analysis, net) for net in string.ends)
    if setting.mains is not None and setting.mains.phases == 3 and (neutral or is_earth(analysis, string.ends[1])):
        volts /= math.sqrt(3)
    step = Step(f"the rated mains voltage there is {volts:.4g} V", setting.facts, result=volts, unit="V", form="rms")
    return volts, step


def _rated(analysis: Analysis, ref: str) -> _Rated | None:
    """The continuous a.c. voltage of a varistor. A bare figure may be the voltage at 1 mA, a d.c. figure tells neither."""
    ratings = analysis.choice[ref].ratings
    rating, at_1_ma = ratings.get("voltage"), ratings.get("varistor_voltage")
    if rating is not None and rating.form == "rms":
        volts = float(rating.value)
        return _Rated(volts, volts, f"{ref} stands {volts:g} V a.c. all the time", (rating,))
    coded = surge.continuous(float(at_1_ma.value)) if at_1_ma is not None else None
    if at_1_ma is not None and coded is not None:
        return _Rated(coded, coded, f"{ref} is a type of {coded:g} V a.c.", (at_1_ma,))
    if rating is None or rating.form:
        return None
    volts = float(rating.value)
    implied, is_continuous = surge.continuous(volts), volts in surge.VARISTORS.values()
    if implied is None and not is_continuous:
        return None
    low, high = implied if implied is not None else volts, volts if is_continuous else implied or volts
    text = f"{ref} is of {volts:g} V" + (f" at 1 mA, {low:g} V a.c." if low == high != volts else "")
    return _Rated(low, high, text, (rating,))


def _ahead(analysis: Analysis) -> dict[str, tuple[str, ...]]:
    """Load -> the fuses it stands ahead of."""
    found: dict[str, tuple[str, ...]] = {}
    for entry in analysis.stress.entries.values():
        for pole in entry.poles:
            before = toward_fuse(analysis, pole)
            found |= dict.fromkeys(before.loads if before.fuses else (), before.fuses)
    return found


def _mention(string: LimiterString, ahead: dict[str, tuple[str, ...]]) -> str:
    fuses = next((ahead[ref] for ref in string.parts if ref in ahead), ())
    return f"; it stands ahead of fuse {', '.join(fuses)} (rule fuse)" if fuses else ""


RULE = Rule("surge-limiter", "fire", Params, ask, __doc__ or "")
