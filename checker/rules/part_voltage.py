"""What the rules on rated voltages share: how a voltage on a part's own pins is compared with what the part is rated for."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from checker.formulas.derating import compared
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.rule import Analysis
from checker.model.step import Step
from checker.model.stress import Bounds
from checker.model.terminals import named
from checker.model.verdict import Missing, Number, Remedy, Verdict

LOWEST_MAINS = 100.0  # V r.m.s.; no public mains is rated lower
NOISE = 1e-3  # of a bound: arithmetic of sampled waves
SURE = 0.5  # of a limit; where less is sure, a voltage that may be higher is a guess about a signal, not worth a question


@dataclass(frozen=True, slots=True)
class Rated:
    """What a part is rated for, V in `form`: at least `low`, at most `high`. text: for people. facts: who says so."""

    low: float
    high: float
    text: str
    facts: tuple[Fact, ...]
    form: str = ""


@dataclass(frozen=True, slots=True)
class Share:
    """The share of the rating that may be used: at least `strict`, at most `lax` where the family is not known. text: of what."""

    strict: float
    lax: float
    text: str


@dataclass(frozen=True, slots=True)
class Question:
    """One part or string against its rating. seen: `R1 and R2 see` ...; facts: further evidence.

    missing: what settles it when it is open, None when an open would only be a nuisance.
    line: whether the voltage follows the mains, so that it rests on which mains that is. level: of an open, "" as the clause.
    above: what is said of a voltage that is surely above the whole rating.
    """

    subject: Subject
    what: str
    seen: str
    bounds: Bounds
    rated: Rated
    share: Share
    missing: Missing | None
    remedy: Remedy | None = None
    facts: tuple[Fact, ...] = ()
    line: bool = False
    level: str = ""
    above: str = "it is above the rating itself"

    @property
    def limits(self) -> tuple[float, float]:
        """(limit that proves a pass, limit that proves a fail), V."""
        return self.share.strict * self.rated.low, self.share.lax * self.rated.high

    @property
    def outcome(self) -> str:
        """What the comparison gives."""
        return compared(self.bounds.surely, self.bounds.never_above, *self.limits)

    @property
    def used(self) -> float:
        """How much of the limit is used, for the worst of several."""
        return highest(self.bounds) / self.limits[0]


def judged(analysis: Analysis, clause: Clause, question: Question) -> Verdict | None:
    """The verdict of a question; None where it is open and nobody need ask. Above the rating itself a fail is an error."""
    bounds, rated = question.bounds, question.rated
    if bounds.never_above is not None and bounds.surely > bounds.never_above * (1 + NOISE):
        return None  # bounds that contradict one another prove nothing
    strict, lax = question.limits
    outcome = question.outcome
    limit = lax if outcome == "fail" else strict
    form = bounds.form
    most = "" if bounds.never_above is None else f"at most {bounds.never_above:.4g} V {form}"
    sure = f"surely {bounds.surely:.4g} V" + ("" if most else f" {form}")
    known = ", ".join(text for text in (most, sure if bounds.surely else "") if text)
    whole = question.share.strict == question.share.lax == 1.0
    usable = "" if whole else f", of which {question.share.text} may be used: {limit:.4g} V"
    because = f"{question.seen} {known}; {rated.text}{usable}"
    step = Step(
        because, (bounds.step, *rated.facts, *question.facts), formula="U <= ratio x U_rated", result=limit, unit="V", form=form,
        citation=clause.citation,
    )  # fmt: skip
    found = Number(bounds.never_above, "V", form) if bounds.never_above is not None else None
    if outcome == "open":
        if question.missing is None:
            return None
        level = question.level or clause.level
        return clause.opens(question.subject, question.what, because, step, question.missing, found=found, level=level)
    mains = _passing_mains(analysis, bounds, strict) if outcome == "fail" and question.line else 0.0
    if mains >= LOWEST_MAINS:
        answers = ((f"at most {math.floor(mains):g} V", "pass"), ("more", "fail"))
        missing = Missing("rated mains voltage", "supply: {mains: 230 V} in the declaration", answers, question.subject.parts[0])
        told = f"{because}; 100-240 V is assumed, no mains voltage is declared"
        return clause.opens(question.subject, question.what, told, step, missing, found=found)
    above = outcome == "fail" and bounds.surely > rated.high
    more = {"level": "error"} if above else {}
    return clause.at_most(
        question.subject, question.what, because + (f"; {question.above}" if above else ""), step,
        surely=Number(bounds.surely, "V", form), never_above=found, limit=Number(limit, "V", form),
        missing=question.missing or voltage_missing(question.subject.nets, question.subject.parts[0], limit),
        remedy=question.remedy if outcome == "fail" else None, **more,
    )  # fmt: skip


def _passing_mains(analysis: Analysis, bounds: Bounds, limit: float) -> float:
    """The rated mains voltage up to which a voltage that follows it keeps a limit, V r.m.s.; 0 when the mains is declared."""
    rated = analysis.setting.rated
    assumed = any(assumption.key == "supply.mains" for assumption in analysis.setting.assumptions)
    most = highest(bounds)
    return rated.high * limit / most if assumed and rated is not None and most else 0.0


def follows_mains(analysis: Analysis, one: str, other: str) -> bool:
    """Whether the voltage between two nets rises with the mains: on a declared or regulated rail it does not."""
    with_tolerance, without = analysis.stress.between(one, other), analysis.stress.rated(one, other)
    if with_tolerance is None or without is None:
        return False
    return with_tolerance.peak.surely > 1.001 * without.peak.surely > 0


def on_mains_side(analysis: Analysis, net: str) -> bool:
    """Whether a net belongs to the circuit of the mains."""
    name = analysis.isolation.domain_of.get(net)
    return name is not None and analysis.isolation.domains[name].hazard == "mains"


def highest(bounds: Bounds) -> float:
    """The most a voltage is known to reach: its bound, or what is sure where nothing bounds it."""
    return bounds.never_above if bounds.never_above is not None else bounds.surely


def worth_asking(bounds: Bounds, limit: float) -> bool:
    """Whether enough of a voltage is sure that a question about it is about something."""
    return bounds.surely > SURE * limit


def voltage_missing(nets: tuple[str, ...], part: str, limit: float) -> Missing:
    """Asks for the voltage between two nets; limit: up to which it passes, V."""
    then = ((f"at most {limit:.4g} V", "pass"), ("more", "fail"))
    return Missing(f"the highest voltage between {' and '.join(nets)}", "rails in the declaration, as a single figure", then, part)


def percent(ratio: float) -> str:
    """A share for people: `80 %`."""
    return f"{100 * ratio:.3g} %"


_SIGNED = re.compile(
    r"(?:C|CAP|CAPACITOR)_?(?:P|POL|POLARIZED|POLARISED)(?:_?1)?(?:_SMALL|_US|_ALT)*|CP1?(?:_SMALL|_US|_ALT)*|CPOL(?:-\w+)?"
)


def is_polarised(analysis: Analysis, ref: str) -> bool:
    """Whether the schematic draws the capacitor with a polarity: pins named + and -, or a symbol for it."""
    part = analysis.design.parts[ref]
    return bool(named(part, ("+", "POS")) or named(part, ("-", "NEG")) or _SIGNED.fullmatch(part.text("symbol").upper()))
