"""A line of a ruleset: it applies a rule with parameters and a citation, and it alone makes verdicts."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from checker.model.fact import NOWHERE, Fact, Source
from checker.model.step import Step
from checker.model.verdict import Limit, Missing, Number, Verdict

LEVELS = ("error", "warning", "note")


@dataclass(frozen=True, slots=True)
class Clause:
    """params: the rule's own frozen dataclass of parameters. when: closed vocabulary -> accepted values.

    verified: "true", "partial" or "false": whether the limit was read in a public source. origin: layer file and line.
    """

    ruleset: str
    id: str
    rule: str
    level: str
    citation: str
    params: Any
    hazard: str
    verified: str = "false"
    mandatory: bool = False
    when: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    origin: Source = NOWHERE
    loosened: str = ""

    def _verdict(self, outcome: str, subject: Subject, what: str, because: str, step: Step | None, **more: Any) -> Verdict:
        return Verdict(
            rule=self.rule,
            clause=f"{self.ruleset}/{self.id}",
            citation=self.citation,
            outcome=outcome,
            level=more.pop("level", self.level),
            hazard=self.hazard,
            parts=subject.parts,
            nets=subject.nets,
            key=subject.key,
            condition=subject.condition,
            what=what,
            because=because,
            step=step,
            verified=self.verified,
            **more,
        )

    def passes(self, subject: Subject, what: str, because: str, step: Step | None, **more: Any) -> Verdict:
        """The evidence proves the clause is met."""
        return self._verdict("pass", subject, what, because, step, **more)

    def fails(self, subject: Subject, what: str, because: str, step: Step | None, **more: Any) -> Verdict:
        """The evidence proves the clause is not met."""
        return self._verdict("fail", subject, what, because, step, **more)

    def opens(self, subject: Subject, what: str, because: str, step: Step | None, missing: Missing, **more: Any) -> Verdict:
        """Evidence is missing; `missing` names the one fact that settles it."""
        return self._verdict("open", subject, what, because, step, missing=missing, **more)

    def does_not_apply(self, subject: Subject, what: str, because: str, step: Step | None = None, **more: Any) -> Verdict:
        """The question has no object here."""
        return self._verdict("not-applicable", subject, what, because, step, **more)

    def at_most(
        self,
        subject: Subject,
        what: str,
        because: str,
        step: Step,
        *,
        surely: Number,
        never_above: Number | None,
        limit: Number,
        missing: Missing,
        **more: Any,
    ) -> Verdict:
        """Pass when never_above <= limit, fail when surely > limit, else open. Values in the limit's unit, compared unrounded."""
        found: Number | None
        if never_above is not None and never_above.value <= limit.value:
            outcome, found = "pass", never_above
        elif surely.value > limit.value:
            outcome, found = "fail", surely
        else:
            outcome, found = "open", never_above
        return self._compared(
            outcome, "at-most", found, limit, missing, subject=subject, what=what, because=because, step=step, **more
        )

    def at_least(
        self,
        subject: Subject,
        what: str,
        because: str,
        step: Step,
        *,
        surely: Number | None,
        never_below: Number | None,
        limit: Number,
        missing: Missing,
        **more: Any,
    ) -> Verdict:
        """Pass when never_below >= limit, fail when surely < limit, else open.

        surely: the largest value the part can be said to have (an upper bound); never_below: the smallest. A stated
        figure is both.
        """
        found: Number | None
        if never_below is not None and never_below.value >= limit.value:
            outcome, found = "pass", never_below
        elif surely is not None and surely.value < limit.value:
            outcome, found = "fail", surely
        else:
            outcome, found = "open", never_below
        return self._compared(
            outcome, "at-least", found, limit, missing, subject=subject, what=what, because=because, step=step, **more
        )

    def _compared(self, outcome: str, bound: str, found: Number | None, limit: Number, missing: Missing, **more: Any) -> Verdict:
        shown = Limit(limit.value, limit.unit, limit.form, bound, self.verified)
        if outcome == "open" or found is None:
            return self._verdict("open", found=found, limit=shown, missing=missing, **more)
        distance = limit.value - found.value if bound == "at-most" else found.value - limit.value
        return self._verdict(outcome, found=found, limit=shown, margin=distance / limit.value if limit.value else None, **more)


@dataclass(frozen=True, slots=True)
class Subject:
    """What a verdict is about. key: what tells two subjects of one clause apart and enters the fingerprint.

    key holds references, `ref.pin`, separation ids with stable names: never a value, a line or an automatic net name.
    When key is () the sorted parts stand in for it.
    """

    parts: tuple[str, ...] = ()
    nets: tuple[str, ...] = ()
    key: tuple[str, ...] = ()
    condition: str = ""


def evidence_of(step: Step | None) -> tuple[Fact, ...]:
    """The facts a verdict shows as its evidence."""
    return () if step is None else step.facts()
