"""The rated current of a fuse against what the supply draws from the mains."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence

from checker.formulas import fuse
from checker.formulas.derating import compared, next_usual
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.rule import Analysis
from checker.model.step import Step
from checker.model.verdict import Change, Missing, Number, Remedy, Verdict

_OUTLETS = frozenset({"connector", "inlet"})
_WHAT = "Rated current of the fuse against what the supply draws."


def rated_current(analysis: Analysis, ref: str) -> Fact | None:
    """The rated current of a fuse, A: its value, else a rating."""
    candidate = analysis.choice[ref]
    return candidate.value or candidate.ratings.get("current")


def current_verdicts(analysis: Analysis, clause: Clause, fuses: Sequence[str]) -> Iterator[Verdict]:
    """One per fuse that alone carries what the declared power draws."""
    drawn = _drawn(analysis, clause)
    if drawn is not None:
        leaves = _leaves(analysis)
        for ref in _alone(analysis, fuses):
            yield from _verdict(analysis, clause, ref, drawn, leaves)


def _verdict(analysis: Analysis, clause: Clause, ref: str, drawn: tuple[float, float, Step], leaves: bool) -> Iterator[Verdict]:
    """leaves: whether loads beyond the board add what nobody knows, so that only a fail is certain."""
    surely, most, step = drawn
    rated, (strict, lax) = rated_current(analysis, ref), _shares(analysis, clause, ref)
    part = analysis.design.parts[ref]
    subject = Subject((ref,), part.nets(), key=(ref, "current"))
    if rated is None:
        if leaves:
            return
        because = f"the rated current of {ref} is not stated; {step.text}"
        answers = ((f"{fuse.needed_rating(most, strict):.3g} A or more", "pass"), (f"below {surely:.2g} A", "fail"))
        missing = Missing("rated current", "BOM column Value or Current", answers, ref)
        yield clause.opens(subject, _WHAT, because, Step(because, (step, part.fact)), missing)
        return
    amperes = float(rated.value)
    outcome = compared(surely, None if leaves else most, strict * amperes, lax * amperes)
    if outcome == "open" and leaves:
        return
    share = lax if outcome == "fail" else strict
    because = f"{ref} of {amperes:g} A may carry {share * amperes:.3g} A all the time; {step.text}"
    whole = Step(
        because, (step, rated, part.fact), formula="I <= k x I_rated", result=share * amperes, unit="A", citation=clause.citation
    )
    answers = ((f"at most {strict * amperes:.3g} A", "pass"), (f"more than {lax * amperes:.3g} A", "fail"))
    missing = Missing(
        "highest input current", "the input current on the rating label against the fuse, as a concession", answers, ref
    )
    if outcome == "open" and most <= lax * amperes:
        missing = Missing(
            "standard of the fuse",
            "BOM column Class",
            (("IEC 60127", "pass"), ("UL 248-14", "open until the current is known")),
            ref,
        )
    yield clause.at_most(
        subject, _WHAT, because, whole,
        surely=Number(surely, "A", "rms"), never_above=Number(most, "A", "rms"), limit=Number(share * amperes, "A", "rms"),
        missing=missing, remedy=_remedy(ref, most / strict) if outcome == "fail" else None,
    )  # fmt: skip


def _remedy(ref: str, needed: float) -> Remedy | None:
    value = next_usual(needed, fuse.RATINGS)
    return None if value is None else Remedy(f"{ref} of {value:g} A", (Change(ref, "value", value, "A"),))


def _drawn(analysis: Analysis, clause: Clause) -> tuple[float, float, Step] | None:
    """(current surely drawn, never exceeded, step), A r.m.s.; None while the power is not known or the supply has three phases."""
    supply, rated = analysis.setting.mains, analysis.setting.rated
    if supply is None or rated is None or (supply.phases or 1) > 1:
        return None
    outputs = [(output.voltage.high, output.current) for output in supply.outputs]
    if supply.power is not None:
        power = supply.power.high
    elif outputs and all(current is not None for _, current in outputs):
        power = sum(abs(volts) * current.high for volts, current in outputs if current is not None)
    else:
        return None
    params, share = clause.params, (supply.tolerance.high if supply.tolerance else 0.0) / 100
    lowest = rated.low * (1 - share)
    surely = fuse.line_current(power, lowest, 1.0, 1.0)  # the declared power may be what is drawn, by a supply without losses
    most = fuse.line_current(power, lowest, params.efficiency, params.power_factor)
    step = Step(
        f"{power:g} W at {lowest:g} V draw at least {surely:.3g} A and at most {most:.3g} A, with an efficiency of "
        f"{params.efficiency:g} and a power factor of {params.power_factor:g} or more, assumed",
        analysis.setting.facts, formula="I = P / (eta x lambda x U)", result=most, unit="A", form="rms",
    )  # fmt: skip
    return surely, most, step


def _alone(analysis: Analysis, fuses: Sequence[str]) -> list[str]:
    """The fuses in whose pole no other sits, so that they carry all the supply draws."""
    parts, known = analysis.design.parts, analysis.stress.poles
    poles = {ref: {known[net] for net in parts[ref].nets() if net in known} for ref in fuses}
    count = Counter(pole for found in poles.values() for pole in found)
    return [ref for ref, found in poles.items() if len(fuses) == 1 or (found and all(count[pole] == 1 for pole in found))]


def _leaves(analysis: Analysis) -> bool:
    """Whether the line leaves the board at a connector that is no entry: what is connected there draws its current too."""
    entries = analysis.stress.entries
    taken = {*entries, *(ref for entry in entries.values() for ref in entry.also)}
    return any(
        analysis.kind(ref) in _OUTLETS and ref not in taken
        for net in analysis.stress.lines
        for ref in analysis.fitted_on(net)
    )  # fmt: skip


def _shares(analysis: Analysis, clause: Clause, ref: str) -> tuple[float, float]:
    """The shares of the rated current that prove a pass and a fail."""
    candidate, params = analysis.choice[ref], clause.params
    if candidate.marked("IEC 60127") is not None or "breaking_class" in candidate.attributes:
        return params.iec, params.iec
    if candidate.marked("UL 248-14") is not None:
        return params.ul, params.ul
    return min(params.ul, params.iec), max(params.ul, params.iec)
