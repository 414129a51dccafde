"""What a ruleset asks of a separation, or of one part across it on its own pins."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from checker.model.separation import Separation
from checker.model.step import Step
from checker.model.table import Table


@dataclass(frozen=True, slots=True)
class Grade:
    """The grade of insulation a ruleset needs across one separation; "" while the sides are not known, `step` says why."""

    grade: str
    step: Step


@dataclass(frozen=True, slots=True)
class Required:
    """One figure that is needed, between two bounds since the voltage it rests on has two.

    at_least: what is needed in any case: less is a fail. enough: what suffices in any case: as much is a pass; None when
    nothing bounds it (the voltage is not bounded, or a table ends). missing: the fact that would settle it, "" when
    at_least == enough. verified: the weakest mark ("true", "partial", "false") of the tables and limits it rests on.
    unit: mm or V; form "peak", "rms", "dc" for volts.
    """

    at_least: float
    enough: float | None
    step: Step
    verified: str
    unit: str = "mm"
    form: str = ""
    missing: str = ""


@dataclass(frozen=True, slots=True)
class Need:
    """Everything one ruleset asks of one separation or part; a figure is None when the ruleset does not ask for it.

    electric_strength: by form of the test voltage, "peak" (also d.c.) and "rms".
    """

    ruleset: str
    grade: str
    clearance: Required | None = None
    creepage: Required | None = None
    through_insulation: Required | None = None
    electric_strength: Mapping[str, Required] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Basis:
    """What the requirement stage takes from a ruleset: parameters of its clauses by `rule.parameter`.

    tables: parameters that name a table, as the table. figures: every other parameter.
    """

    ruleset: str
    tables: Mapping[str, Table] = field(default_factory=dict)
    figures: Mapping[str, Any] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Spacing(Separation):
    """A separation that is no barrier between two domains, with what the domains would otherwise tell.

    nets: of each side. across: the two nets whose voltage stands between the sides: for the two ends of a fuse, which is one
    conductor until it opens, the pole it sits in and the other one.
    """

    nets: tuple[tuple[str, ...], tuple[str, ...]] = ((), ())
    across: tuple[str, str] = ("", "")
