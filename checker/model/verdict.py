"""The answer of one clause about one subject."""

from __future__ import annotations

from dataclasses import dataclass

from checker.model.fact import Fact
from checker.model.step import Step

OUTCOMES = ("fail", "open", "pass", "not-applicable")


@dataclass(frozen=True, slots=True)
class Number:
    """A figure in SI; text instead of a figure for findings such as a class."""

    value: float
    unit: str = ""
    form: str = ""


@dataclass(frozen=True, slots=True)
class Words:
    """A finding or limit that is not a number, such as `X2`."""

    text: str


@dataclass(frozen=True, slots=True)
class Limit:
    """bound: "at-most" or "at-least". status: verified, partial or false as the ruleset says."""

    value: float
    unit: str
    form: str
    bound: str
    status: str


@dataclass(frozen=True, slots=True)
class Missing:
    """The one fact that settles an open verdict. then: (answer, outcome it leads to)."""

    fact: str
    supply_as: str
    then: tuple[tuple[str, str], ...]
    part: str | None = None


@dataclass(frozen=True, slots=True)
class Change:
    """One attribute of one part set anew. attribute: "value", "mark", or a rating such as "rating:voltage".

    value: SI figure in `unit` with `form`, or the text of a mark.
    """

    ref: str
    attribute: str
    value: float | str
    unit: str = ""
    form: str = ""


@dataclass(frozen=True, slots=True)
class Remedy:
    """A change that mends a fail. text: for a person, which part to which value. It is printed only after the rules were run
    again with `changes`, this verdict passed and no other got worse."""

    text: str
    changes: tuple[Change, ...]


@dataclass(frozen=True, slots=True)
class Verdict:
    """See design section 8; `step` and the facts behind it are objects here and ids in the report."""

    rule: str
    clause: str
    citation: str
    outcome: str
    level: str
    hazard: str
    parts: tuple[str, ...]
    nets: tuple[str, ...]
    key: tuple[str, ...]
    condition: str
    what: str
    because: str
    step: Step | None
    verified: str = "false"
    found: Number | Words | None = None
    limit: Limit | Words | None = None
    margin: float | None = None
    missing: Missing | None = None
    remedy: Remedy | None = None
    evidence: tuple[Fact, ...] = ()
    candidate: str = ""
