"""What a rule is, and what it is given."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass

from checker.model.candidate import Candidate, Identity
from checker.model.circuit import Design
from checker.model.clause import Clause
from checker.model.condition import NORMAL, Condition
from checker.model.declaration import Declaration, Range, Supply
from checker.model.domain import Isolation
from checker.model.fact import Fact
from checker.model.requirement import Grade
from checker.model.verdict import Verdict


@dataclass(frozen=True, slots=True)
class Assumption:
    """What the run took for granted because nobody said it. key: dotted key of the declaration that would replace it."""

    key: str
    value: str
    because: str


@dataclass(frozen=True, slots=True)
class Setting:
    """The supply and surroundings the run judges under: declared values, else assumed ones (each then in `assumptions`).

    mains: the supply of kind mains, None when there is none. protection_class "" while nothing tells it.
    """

    mains: Supply | None
    supplies: tuple[Supply, ...]
    protection_class: str
    rated: Range | None  # rated mains voltage, V r.m.s.
    assumptions: tuple[Assumption, ...]
    facts: tuple[Fact, ...] = ()


@dataclass(frozen=True, slots=True)
class Analysis:
    """All stages' results for one design under one condition; the only thing a rule sees.

    choice: reference -> the candidate under judgement, one per part. grades: (ruleset id, separation id) -> needed grade.
    """

    design: Design
    declaration: Declaration
    identity: Identity
    choice: Mapping[str, Candidate]
    isolation: Isolation
    setting: Setting
    grades: Mapping[tuple[str, str], Grade]
    condition: Condition = NORMAL

    def kind(self, ref: str) -> str:
        """The kind of the candidate under judgement."""
        return self.choice[ref].kind


@dataclass(frozen=True, slots=True)
class Rule:
    """id: words with hyphens, never changed. hazard: shock, fire, overstress or record.

    params: a frozen dataclass with defaults; its field types decide how a ruleset value is read and compared.
    ask: yields verdicts made by the clause. The docstring of the module is what `withstand explain` prints.
    """

    id: str
    hazard: str
    params: type
    ask: Callable[[Analysis, Clause], Iterator[Verdict]]
    manual: str
