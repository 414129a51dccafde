"""How much current flows in the protective conductor?"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.clause import Clause
from checker.model.rule import Analysis, Rule
from checker.model.verdict import Verdict


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters yet."""


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """Nothing yet."""
    yield from ()


RULE = Rule("earth-current", "shock", Params, ask, __doc__ or "")
