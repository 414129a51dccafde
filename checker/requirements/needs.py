"""What each ruleset asks of each separation, and of each part across it on its own pins."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from checker.model.fact import Fact
from checker.model.requirement import Basis, Grade, Need
from checker.model.rule import Board
from checker.model.separation import Separation
from checker.model.stress import Stress
from checker.requirements.clearance import clearance
from checker.requirements.creepage import GROUPS, creepage
from checker.requirements.duty import Duty, Sources, sources, word, working
from checker.requirements.electric_strength import electric_strength
from checker.requirements.through_insulation import through_insulation


def needs(
    board: Board,
    separations: Iterable[Separation],
    stress: Stress,
    grades: Mapping[tuple[str, str], Grade],
    basis: Basis,
) -> Iterator[tuple[tuple[str, str, str], Need]]:
    """((ruleset id, separation id, ""), need) of each separation, then ((..., reference), need) of each part across it."""
    for separation in separations:
        grade = grades[(basis.ruleset, separation.id)].grade
        asked = bool(word(grade)) and _asks(basis)
        outside = sources(board, separation, basis) if asked else Sources()
        for ref in ("", *separation.bridged_by):
            key = (basis.ruleset, separation.id, ref)
            yield key, need(_duty(board, stress, separation, ref, grade, outside, basis)) if asked else Need(basis.ruleset, grade)


def _asks(basis: Basis) -> bool:
    """Whether the ruleset has a clause of one of the four rules."""
    rules = {name.partition(".")[0] for name in (*basis.tables, *basis.figures)}
    return bool(rules & {"clearance", "creepage", "through-insulation", "electric-strength"})


def need(duty: Duty) -> Need:
    """The four figures of one insulation."""
    air = clearance(duty)
    return Need(duty.basis.ruleset, duty.wanted, air, creepage(duty, air), through_insulation(duty), electric_strength(duty))


def _duty(board: Board, stress: Stress, separation: Separation, ref: str, grade: str, outside: Sources, basis: Basis) -> Duty:
    rms, peak, voltage = working(board, stress, separation, ref, outside)
    return Duty(
        word(grade),
        grade,
        rms,
        peak,
        voltage.frequency if voltage is not None else None,
        voltage.shape if voltage is not None else "",
        outside,
        _surroundings(board, ref),
        basis,
    )


def _surroundings(board: Board, ref: str) -> Mapping[str, Fact]:
    """The environment; a part whose own material group is stated is judged by that one, on its own body."""
    own = board.choice[ref].attributes.get("material_group") if ref else None
    return (
        board.setting.environment
        if own is None or own.value not in GROUPS
        else {**board.setting.environment, "material_group": own}
    )
