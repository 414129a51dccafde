"""Is the fuse made for this supply: voltage, kind, breaking capacity, current?

A fuse must open the circuit at the full mains voltage and the full current of a short circuit. A fuse for vehicles or for low
direct voltage burns on in an arc; one of the low breaking class may burst.

Asked of every fitted fuse in the line, and of resettable fuses there as far as the voltage goes:
- Voltage: rated for the mains voltage without tolerance or more. A rating for d.c. alone below it, a blade fuse and a chip of
  size 0402, 0603 or 0805 without an a.c. rating fail (the last two: common practice, no source). A fuse of 5 x 20 mm or
  6.3 x 32 mm made to IEC 60127 is one of 250 V (from memory).
- Kind: a thermal link opens by heat, it is no fuse; as the only one it fails.
- Breaking capacity: `breaking` or more; by its class (L 35 A, E 150 A, H 1500 A), by the words ceramic and the size, or listed to
  UL 248-14. Less is a warning on a supply with a plug, whose socket is protected, and an error on others. Where no plug is
  declared, what lies between `breaking` and `fixed` is enough or not by the short-circuit current of the installation: open.
- Current: asked when the power is known: declared, or the sum of outputs declared with current. What the supply draws at the
  lowest mains voltage lies between the power itself and the power at the assumed least efficiency and power factor
  (`efficiency`, `power_factor`). A fuse of IEC 60127 carries all of its rated current, one of UL 248 three quarters; where the
  standard is not known a pass keeps the smaller share and only a fail needs the larger.

Open: voltage or breaking capacity not stated (the second is asked once the first is known), or the bounds of the current leave
it open. Nothing: a fuse on a rectified bus, a fuse behind which the line leaves the board, as far as its current goes.

To settle it: BOM columns `Voltage`, `Current`, `Breaking capacity`, the marking (`T2AH250V`) as value or description, `ratings`
in a parts file, `supply: {mains:, power:}` in the declaration.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.formulas import fuse
from checker.formulas.derating import ALTERNATING, compared, next_usual
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Change, Missing, Number, Remedy, Verdict
from checker.parameters import AtLeast, Ratio
from checker.rules.fuse_current import current_verdicts, rated_current
from checker.rules.part_voltage import LOWEST_MAINS, on_mains_side

_CHIPS = frozenset({"0402", "0603", "0805"})
_OF_STANDARD = 250.0  # V a.c.; of the tubes of IEC 60127-2 (from memory)
_TEXTS = ("value", "description", "type", "symbol", "footprint")
_BLADE = re.compile(r"(?<![^\W_])(?:ATO|ATC|blade)(?![^\W_])", re.IGNORECASE)
_TUBE = re.compile(r"(?<![0-9.])(?:5\s?(?:mm)?\s?x\s?20|6[.,]3\d?\s?(?:mm)?\s?x\s?32)(?![0-9])", re.IGNORECASE)
_THERMAL = re.compile(r"thermal[\s_-]?(?:fuse|link|cut[\s-]?off)|thermosicherung", re.IGNORECASE)
_VOLTS = re.compile(r"(?<![0-9.])([1-9][0-9]{1,2})\s?V(?!\s?d)", re.IGNORECASE)
_WHAT_VOLTAGE = "Rated voltage of the fuse against the mains."
_WHAT_BREAKING = "Breaking capacity of the fuse."


@dataclass(frozen=True, slots=True)
class Params:
    """breaking: least breaking capacity at the mains voltage, fixed: that of a fuse on wired terminals.

    iec, ul: share of the rated current that may flow all the time.
    efficiency, power_factor: assumed to be no less.
    """

    breaking: Annotated[float, AtLeast("A")] = 50.0
    fixed: Annotated[float, AtLeast("A")] = 150.0
    iec: Annotated[float, Ratio()] = 1.0
    ul: Annotated[float, Ratio()] = 0.75
    efficiency: Annotated[float, Ratio()] = 0.7
    power_factor: Annotated[float, Ratio()] = 0.5


@dataclass(frozen=True, slots=True)
class _Mains:
    """What the fuse sees: surely and at most, V r.m.s., without tolerance. assumed: nobody declared the mains voltage."""

    surely: float
    most: float
    step: Step
    assumed: bool


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """Up to three verdicts per fuse in the line: voltage, breaking capacity, current; one on its kind for a thermal link."""
    mains = _mains(analysis)
    if mains is None:
        return
    found = [ref for ref in analysis.choice if analysis.kind(ref) in ("fuse", "resettable-fuse") and _in_line(analysis, ref)]
    links = {ref for ref in found if _says(analysis, ref, _THERMAL)}
    fuses = dict.fromkeys(ref for ref in found if analysis.kind(ref) == "fuse" and ref not in links)
    for ref in found:
        if ref in links and not fuses:
            yield _thermal(analysis, clause, ref)
        voltage = _voltage(analysis, clause, ref, mains)
        yield voltage
        if ref in fuses and voltage.outcome == "pass":
            yield _breaking(analysis, clause, ref)
    yield from current_verdicts(analysis, clause, tuple(fuses))


def _mains(analysis: Analysis) -> _Mains | None:
    setting = analysis.setting
    rated = setting.rated
    if setting.mains is None or rated is None or not any(d.hazard == "mains" for d in analysis.isolation.domains.values()):
        return None
    assumed = any(assumption.key == "supply.mains" for assumption in setting.assumptions)
    least = max(rated.low, LOWEST_MAINS) if assumed else rated.high
    surely = least / math.sqrt(3) if setting.mains.phases == 3 else least  # between a phase and the neutral
    said = f"{rated.low:g}-{rated.high:g} V" if rated.low < rated.high else f"{rated.high:g} V"
    step = Step(f"the mains is {said}" + (", assumed" if assumed else ""), setting.facts, result=rated.high, unit="V", form="rms")
    return _Mains(surely, rated.high, step, assumed)


def _in_line(analysis: Analysis, ref: str) -> bool:
    """Whether a fitted part sits in the line; on the mains side where no entry is known."""
    part = analysis.design.parts[ref]
    if not part.fitted:
        return False
    if analysis.stress.entries:
        return any(net in analysis.stress.lines for net in part.nets())
    return any(on_mains_side(analysis, net) for net in part.nets())


def _texts(analysis: Analysis, ref: str) -> list[Fact]:
    """What the papers say of the product under judgement; of an alternate only what every one shares."""
    alternate = bool(analysis.choice[ref].label)
    names = ("footprint",) if alternate else _TEXTS
    return [fact for fact in analysis.design.parts[ref].facts if fact.attribute in names and isinstance(fact.value, str)]


def _says(analysis: Analysis, ref: str, pattern: re.Pattern[str]) -> Fact | None:
    return next((fact for fact in _texts(analysis, ref) if pattern.search(str(fact.value))), None)


def _subject(analysis: Analysis, ref: str, about: str) -> Subject:
    return Subject((ref,), analysis.design.parts[ref].nets(), key=(ref, about))


def _thermal(analysis: Analysis, clause: Clause, ref: str) -> Verdict:
    said = _says(analysis, ref, _THERMAL) or analysis.design.parts[ref].fact
    step = Step(f"{ref} is a thermal link ({said.value}), and no fuse stands in the line", (said, analysis.design.parts[ref].fact))
    because = f"{step.text}; it opens by heat, not by current"
    return clause.fails(_subject(analysis, ref, "kind"), "A thermal link is no fuse.", because, step)


def _voltage(analysis: Analysis, clause: Clause, ref: str, mains: _Mains) -> Verdict:
    rating = analysis.choice[ref].ratings.get("voltage")
    if rating is None:
        return _unstated(analysis, clause, ref, mains)
    part, low = analysis.design.parts[ref], float(rating.value)
    direct = rating.form == "dc"
    high = low if direct else max([low, *map(float, _VOLTS.findall(rating.text))])
    outcome = compared(mains.surely, mains.most, 0.0 if direct else low, high)
    shown = f"{low:g} V" + (" d.c. only" if direct else "")
    because = f"{ref} is rated {shown}; {mains.step.text}"
    step = Step(because, (rating, mains.step, part.fact), formula="U_rated >= U", result=low, unit="V", form=rating.form)
    subject, found, limit = _subject(analysis, ref, "voltage"), Number(low, "V", rating.form), Number(mains.most, "V", "rms")
    missing = Missing(
        "rated a.c. voltage", "BOM column Voltage, or ratings in a parts file",
        ((f"{mains.most:g} V or more", "pass"), (f"below {mains.surely:.3g} V", "fail")), ref,
    )  # fmt: skip
    if outcome == "open" and mains.assumed and not direct and low >= LOWEST_MAINS:
        answers = ((f"at most {low:g} V", "pass"), ("more", "fail"))
        missing = Missing("rated mains voltage", "supply: {mains: 230 V} in the declaration", answers, ref)
    if outcome == "open":
        return clause.opens(subject, _WHAT_VOLTAGE, because, step, missing, found=found)
    if outcome == "fail" and direct:
        because += "; it does not quench the arc of the mains"
    return clause.at_least(
        subject, _WHAT_VOLTAGE, because, step, surely=found, never_below=found,
        limit=limit if outcome == "pass" else Number(mains.surely, "V", "rms"), missing=missing,
        remedy=_remedy(analysis, ref, mains) if outcome == "fail" else None,
    )  # fmt: skip


def _remedy(analysis: Analysis, ref: str, mains: _Mains) -> Remedy | None:
    value = next_usual(mains.most, ALTERNATING)
    if value is None:
        return None
    changes = [Change(ref, "rating:voltage", value, "V", "rms")]
    if analysis.kind(ref) == "resettable-fuse":
        return Remedy(f"{ref} rated {value:g} V a.c. or more", tuple(changes))
    changes.append(Change(ref, "rating:breaking_capacity", fuse.CLASSES["H"], "A"))
    return Remedy(f"{ref} rated {value:g} V a.c. or more, of high breaking capacity", tuple(changes))


def _unstated(analysis: Analysis, clause: Clause, ref: str, mains: _Mains) -> Verdict:
    """No voltage is stated: what the body tells, else open."""
    candidate, part, subject = analysis.choice[ref], analysis.design.parts[ref], _subject(analysis, ref, "voltage")
    blade, tube, size = _says(analysis, ref, _BLADE), _says(analysis, ref, _TUBE), candidate.attributes.get("size")
    mark = candidate.marked("IEC 60127")
    if mark is not None and tube is not None and mains.most <= _OF_STANDARD:
        step = Step(
            f"{ref} is a tube of {_TUBE.findall(str(tube.value))[0]} mm to IEC 60127, one of {_OF_STANDARD:g} V (from memory)",
            (mark.fact, tube, mains.step), result=_OF_STANDARD, unit="V", form="rms",
        )  # fmt: skip
        return clause.passes(subject, _WHAT_VOLTAGE, step.text, step, found=Number(_OF_STANDARD, "V", "rms"))
    told = blade or (size if size is not None and str(size.value) in _CHIPS else None)
    if told is not None:
        sort = "a blade fuse, made for vehicles" if blade else f"a chip of size {told.value}"
        because = f"{ref} is {sort}, and no a.c. rating is stated; {mains.step.text}"
        step = Step(because, (told, mains.step, part.fact), citation="common practice, no source")
        return clause.fails(subject, "The fuse is not made for the mains.", because, step, remedy=_remedy(analysis, ref, mains))
    because = f"nothing that was read states the rated voltage of {ref}; {mains.step.text}"
    step = Step(because, (*_texts(analysis, ref)[:4], mains.step, part.fact))
    missing = Missing(
        "rated a.c. voltage", "BOM column Voltage or description, or ratings in a parts file",
        ((f"{mains.most:g} V or more", "pass"), (f"below {mains.surely:.3g} V, or d.c. only", "fail")), ref,
    )  # fmt: skip
    return clause.opens(subject, _WHAT_VOLTAGE, because, step, missing)


def _breaking(analysis: Analysis, clause: Clause, ref: str) -> Verdict:
    params, part = clause.params, analysis.design.parts[ref]
    supply = analysis.setting.mains
    plug = supply is not None and supply.connection.startswith("pluggable")
    level = "warning" if plug else clause.level
    subject = _subject(analysis, ref, "breaking")
    limit = Number(params.breaking, "A")
    missing = Missing(
        "breaking capacity", "BOM column Breaking capacity, or the marking (T2AH250V)",
        ((f"{params.breaking:g} A or more, class E or H", "pass"), ("less, class L", "fail")), ref,
    )  # fmt: skip
    known, at_least = _capacity(analysis, ref)
    if known is None:
        because = f"nothing that was read states what current {ref} can break"
        step = Step(because, (*_texts(analysis, ref)[:4], part.fact))
        return clause.opens(subject, _WHAT_BREAKING, because, step, missing, level=level)
    found = Number(float(known.result or 0.0), "A")
    if not plug and params.breaking <= found.value < params.fixed:
        return _by_the_installation(analysis, clause, ref, known)
    because = f"{known.text}; {params.breaking:g} A or more are asked for"
    step = Step(because, (known, part.fact), formula="I_breaking >= I", result=found.value, unit="A", citation=clause.citation)
    return clause.at_least(
        subject, _WHAT_BREAKING, because, step, surely=None if at_least else found, never_below=found, limit=limit,
        missing=missing, level=level, remedy=None if at_least or found.value >= limit.value else _of_class_h(ref),
    )  # fmt: skip


def _by_the_installation(analysis: Analysis, clause: Clause, ref: str, known: Step) -> Verdict:
    """A fuse that is enough behind a plug, on a supply that may be wired to a strong network."""
    part = analysis.design.parts[ref]
    because = f"{known.text}; on wired terminals the current of a short circuit may be more"
    step = Step(because, (known, part.fact), citation=clause.citation)
    missing = Missing(
        "short-circuit current at the supply terminals", "a fuse of class E or H; or supply: connection in the declaration",
        ((f"pluggable-A, or a fuse of {clause.params.fixed:g} A or more", "pass"), ("wired to a stronger network", "fail")), ref,
    )  # fmt: skip
    return clause.opens(_subject(analysis, ref, "breaking"), _WHAT_BREAKING, because, step, missing, level="warning")


def _of_class_h(ref: str) -> Remedy:
    most = fuse.CLASSES["H"]
    return Remedy(f"{ref} of high breaking capacity, {most:g} A", (Change(ref, "rating:breaking_capacity", most, "A"),))


def _capacity(analysis: Analysis, ref: str) -> tuple[Step | None, bool]:
    """What the fuse breaks, A: as stated, by its class, or as every listed fuse does; whether it may break more."""
    candidate = analysis.choice[ref]
    stated, letter, mark = (
        candidate.ratings.get("breaking_capacity"), candidate.attributes.get("breaking_class"), candidate.marked("UL 248-14")
    )  # fmt: skip
    rated = rated_current(analysis, ref)
    amperes = None if rated is None else float(rated.value)
    if stated is not None:
        return Step(f"{ref} breaks {float(stated.value):g} A", (stated,), result=float(stated.value), unit="A"), False
    if letter is not None and (least := fuse.breaking_capacity(str(letter.value), amperes)) is not None:
        text = f"{ref} is of breaking class {letter.value}, {least:g} A"
        return Step(text, (letter,), result=least, unit="A", citation="IEC 60127-2, partly from memory"), False
    if mark is not None and amperes is not None and (least := fuse.listed_capacity(amperes)) is not None:
        text = f"{ref} is listed to UL 248-14, which asks for {least:g} A at 250 V"
        return Step(text, (mark.fact,), result=least, unit="A", citation="UL 248-14, fuse maker's guide"), True
    return None, True


RULE = Rule("fuse-rating", "fire", Params, ask, __doc__ or "")
