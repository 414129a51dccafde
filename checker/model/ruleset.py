"""A ruleset as loaded: inert data, every value knowing the layer, file and line that set it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.model.clause import Clause
from checker.model.table import Table


@dataclass(frozen=True, slots=True)
class Ruleset:
    """id without edition; edition "" when it has none; path and sha256 of its file. tables by id."""

    id: str
    edition: str
    revision: str
    title: str
    path: str
    sha256: str
    clauses: tuple[Clause, ...]
    tables: Mapping[str, Table] = field(default_factory=dict)

    @property
    def unverified(self) -> int:
        """How many clauses and tables rest on a figure that was not fully verified."""
        return sum(c.verified != "true" for c in self.clauses) + sum(t.verified != "true" for t in self.tables.values())
