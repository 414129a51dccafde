"""A table of a ruleset: a unit per column, a stated lookup, a source."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from checker.model.fact import NOWHERE, Source

LOOKUPS = ("exact", "next-higher", "interpolate")


@dataclass(frozen=True, slots=True)
class Table:
    """columns: name -> unit ("" text). rows: one cell per column, float or text. lookup: one of LOOKUPS on the first column(s).

    round: how a result is rounded, "" not at all. citation: document and table. verified: true, partial or false.
    """

    id: str
    columns: Mapping[str, str]
    lookup: str
    rows: tuple[tuple[float | str | None, ...], ...]
    citation: str
    verified: str
    round: str = ""
    origin: Source = NOWHERE

    def find(self, *keys: str) -> Mapping[str, float | str | None] | None:
        """The first row whose leading text cells equal `keys` (exact lookup), as column -> cell; None when there is none."""
        for row in self.rows:
            if row[: len(keys)] == keys:
                return dict(zip(self.columns, row, strict=True))
        return None
