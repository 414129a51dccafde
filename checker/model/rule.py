"""What a rule is, and what it is given."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field

from checker.model.candidate import Candidate, Identity
from checker.model.circuit import Design
from checker.model.clause import Clause
from checker.model.condition import NORMAL, Condition
from checker.model.declaration import Declaration, Range, Supply
from checker.model.domain import Isolation
from checker.model.fact import Fact
from checker.model.requirement import Grade, Need
from checker.model.separation import Separation
from checker.model.stress import Stress
from checker.model.table import Table
from checker.model.verdict import Verdict

LINK = 1.0  # ohm; a resistor below this in the line is a link or a shunt, not a load (common practice, no source)


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
    environment: pollution_degree, altitude, material_group, and ambient when declared; a fact that was assumed has no place.
    """

    mains: Supply | None
    supplies: tuple[Supply, ...]
    protection_class: str
    rated: Range | None  # rated mains voltage, V r.m.s.
    assumptions: tuple[Assumption, ...]
    facts: tuple[Fact, ...] = ()
    environment: Mapping[str, Fact] = field(default_factory=dict)

    def mains_voltage(self, tolerance: bool) -> float | None:
        """The highest mains voltage, V r.m.s.: the rated one, or with its tolerance; None without mains."""
        if self.mains is None:
            return None
        high = self.mains.voltage.high
        return high * (1 + self.mains.tolerance.high / 100) if tolerance and self.mains.tolerance is not None else high

    @property
    def mains_frequency(self) -> float:
        """The highest mains frequency, Hz; 60 when nothing tells it."""
        return self.mains.frequency.high if self.mains is not None and self.mains.frequency is not None else 60.0


@dataclass(frozen=True, slots=True)
class Board:
    """The stages' results up to the setting, for one choice of candidates. choice: reference -> the candidate under judgement."""

    design: Design
    declaration: Declaration
    identity: Identity
    choice: Mapping[str, Candidate]
    isolation: Isolation
    setting: Setting

    def kind(self, ref: str) -> str:
        """The kind of the candidate under judgement."""
        return self.choice[ref].kind

    def is_link(self, ref: str) -> bool:
        """Whether a part is a resistor so small that it carries the line on: a link or a current shunt."""
        value = self.choice[ref].value
        return self.kind(ref) == "resistor" and value is not None and isinstance(value.value, float) and value.value < LINK

    def fitted_on(self, net: str) -> tuple[str, ...]:
        """The fitted parts with a pin on that net, each once, in file order."""
        parts = self.design.parts
        return tuple(dict.fromkeys(ref for ref, _ in self.design.nets[net].pins if ref in self.choice and parts[ref].fitted))


@dataclass(frozen=True, slots=True)
class Analysis(Board):
    """All stages' results for one design under one condition; the only thing a rule sees.

    grades: (ruleset id, separation id) -> needed grade. needs: (ruleset id, separation id, "" or the part on its own pins).
    further: what must be kept apart beside the barriers. tables: ruleset id -> its tables.
    """

    grades: Mapping[tuple[str, str], Grade] = field(default_factory=dict)
    stress: Stress = field(default_factory=Stress)
    needs: Mapping[tuple[str, str, str], Need] = field(default_factory=dict)
    condition: Condition = NORMAL
    further: tuple[Separation, ...] = ()
    tables: Mapping[str, Mapping[str, Table]] = field(default_factory=dict)

    def table(self, ruleset: str, name: str) -> Table | None:
        """A table of a ruleset, None when it has none of that name."""
        return self.tables.get(ruleset, {}).get(name)


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
