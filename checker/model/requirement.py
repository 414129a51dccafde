"""What a ruleset asks of a separation."""

from __future__ import annotations

from dataclasses import dataclass

from checker.model.step import Step


@dataclass(frozen=True, slots=True)
class Grade:
    """The grade of insulation a ruleset needs across one separation; "" while the sides are not known, `step` says why."""

    grade: str
    step: Step
