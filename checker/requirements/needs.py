"""What each ruleset asks of each separation, and of each part across it on its own pins."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from checker.model.requirement import Basis, Grade, Need
from checker.model.rule import Board
from checker.model.stress import Stress


def needs(
    board: Board, stress: Stress, grades: Mapping[tuple[str, str], Grade], basis: Basis
) -> Iterator[tuple[tuple[str, str, str], Need]]:
    """((ruleset id, separation id, ""), need) of each separation, then ((..., reference), need) of each part across it."""
    for separation in board.isolation.separations:
        grade = grades[(basis.ruleset, separation.id)].grade
        for ref in ("", *separation.bridged_by):
            yield (basis.ruleset, separation.id, ref), Need(basis.ruleset, grade)
