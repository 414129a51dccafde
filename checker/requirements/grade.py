"""Which grade of insulation a separation needs, by its two sides; the table is ruleset data."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from checker.model.declaration import Declaration
from checker.model.domain import Domain
from checker.model.fact import Fact
from checker.model.requirement import Grade
from checker.model.rule import Setting
from checker.model.separation import Separation
from checker.model.step import Step
from checker.model.table import Table

TABLE = "needed-grade"


def needed(
    separations: Iterable[Separation],
    domains: Mapping[str, Domain],
    declaration: Declaration,
    setting: Setting,
    table: Table | None,
) -> dict[str, Grade]:
    """Separation id -> grade: as declared between these two names, else the table's for their sides."""
    declared = {frozenset(barrier.between): barrier for barrier in declaration.barriers if barrier.grade}
    found = {}
    for separation in separations:
        barrier = declared.get(frozenset(separation.between))
        if barrier is not None:
            fact = Fact("grade", barrier.grade, barrier.source)
            found[separation.id] = Grade(
                barrier.grade, Step(f"declared as {barrier.grade} insulation", (fact,), result=barrier.grade)
            )
        elif declaration.no_supply is not None:
            fact = Fact("supply", "none", declaration.no_supply)
            step = Step(
                "nothing hazardous feeds the board, so insulation is functional at most",
                (fact, separation.step),
                result="functional",
            )
            found[separation.id] = Grade("functional", step)
        else:
            one, two = (domains[name] for name in separation.between)
            found[separation.id] = _by_sides(one, two, setting, table)
    return found


def side_word(domain: Domain, setting: Setting) -> str:
    """The word a domain goes by in the table: mains, dc-up-to-60, dc-up-to-120, dc-above-120, earth, secondary,
    secondary-earthed, floating."""
    if domain.hazard == "mains":
        return "mains"
    if domain.hazard == "dc":
        direct = [supply for supply in setting.supplies if supply.kind == "dc"]
        if not direct:
            return "dc-above-120"
        highest = max(supply.voltage.high for supply in direct)
        if any(supply.origin in ("mains", "unknown") for supply in direct):
            return "dc-above-120" if any(supply.origin == "mains" for supply in direct) else "dc-unknown"
        return "dc-up-to-60" if highest <= 60 else "dc-up-to-120" if highest <= 120 else "dc-above-120"
    if domain.side == "earth":
        return "earth"
    if domain.side == "secondary":
        return "secondary-earthed" if domain.earthed else "secondary"
    return domain.side


def _by_sides(one: Domain, two: Domain, setting: Setting, table: Table | None) -> Grade:
    words = (side_word(one, setting), side_word(two, setting))
    inputs = (one.step, two.step)
    if table is None:
        return Grade("", Step("the ruleset has no table of needed grades", inputs))
    row = table.find(*words) or table.find(*words[::-1])
    if row is None:
        text = f"{one.name} and {two.name} are equals ({words[0]}, {words[1]}): without a known source no grade follows"
        return Grade("", Step(text, inputs))
    grade = str(row["grade"])
    text = f"between {one.name} ({words[0]}) and {two.name} ({words[1]}): {grade} insulation"
    return Grade(grade, Step(text, inputs, result=grade, citation=table.citation))
