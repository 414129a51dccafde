"""Everything the layout must keep apart: the barriers, circuits that nothing lies between, the poles of the mains before the fuse,
and the two ends of a fuse.

Barriers are what parts lie across; a layout needs a distance between the other pairs of circuits as well. Before the fuse
nothing switches the supply off when the poles touch, and an opened fuse has the whole supply across its ends, so both take the
spacing of basic insulation (the ruleset's table says so and cites where it stands).
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from itertools import combinations

from checker.model.domain import Domain
from checker.model.order import natural
from checker.model.requirement import Grade, Spacing
from checker.model.rule import Board
from checker.model.separation import Separation
from checker.model.step import Step
from checker.model.stress import Stress, Voltage
from checker.model.table import Table

POLES = "line to line before the fuse"
FUSE = "ends of a fuse"
APART = "nothing lies between them"
MOST_EQUALS = 16  # circuits without a hazard of which each pair is listed; beyond, their pairs would drown the table

_FUSES = frozenset({"fuse", "resettable-fuse"})
_NO_CONDUCTOR = frozenset({"capacitor", "varistor", "gas-tube", "tvs", "spark-gap"})  # never carry a pole on to the same pole


def separations(board: Board, stress: Stress) -> tuple[Separation, ...]:
    """What must be kept apart beside the barriers: poles, the ends of fuses, pairs of circuits that nothing crosses."""
    return (*_poles(board, stress), *_fuses(board, stress), *_apart(board))


def sides(board: Board, separation: Separation) -> tuple[Domain, ...]:
    """The circuits on either side; for a spacing within one circuit, that one twice."""
    isolation = board.isolation
    names = (isolation.domain_of[side[0]] for side in separation.nets) if isinstance(separation, Spacing) else separation.between
    return tuple(isolation.domains[name] for name in names)


def voltages(further: Iterable[Separation], stress: Stress) -> dict[str, Voltage]:
    """Separation id -> working voltage of each spacing that is no pair of circuits, where the stress stage bounds it."""
    found = {}
    for spacing in further:
        if isinstance(spacing, Spacing):
            voltage = stress.rated(*spacing.across)
            if voltage is not None:
                found[spacing.id] = voltage
    return found


def grades(further: Iterable[Separation], table: Table | None) -> dict[str, Grade]:
    """Separation id -> grade of each spacing that is no pair of circuits: the table's rows `live, neutral` and `fuse, fuse`."""
    found = {}
    for spacing in further:
        if isinstance(spacing, Spacing):
            words = ("fuse", "fuse") if spacing.reason == FUSE else ("live", "neutral")
            row = table.find(*words) if table is not None else None
            if table is None or row is None:
                text = f"the ruleset does not say which spacing {spacing.reason} takes"
                found[spacing.id] = Grade("", Step(text, (spacing.step,)))
            else:
                grade = str(row["grade"])
                step = Step(f"{spacing.reason}: {grade} insulation", (spacing.step,), result=grade, citation=table.citation)
                found[spacing.id] = Grade(grade, step)
    return found


def _poles(board: Board, stress: Stress) -> Iterator[Spacing]:
    """The poles of each entry against one another, each with the conductors that no fuse parts from it."""
    entries = _entries(stress)
    for label, poles, neutral in entries:
        where = f"{label} " if len(entries) > 1 else ""
        names = _names(poles, neutral)
        before = {pole: _before_fuse(board, stress, pole) for pole in poles}
        facts = tuple(board.design.nets[pole].fact for pole in poles)
        for one, other in combinations(sorted(poles, key=lambda pole: names[pole]), 2):
            between = (f"{where}{names[one]}", f"{where}{names[other]}")
            step = Step(f"{one} and {other} enter at {label}; up to the fuse nothing switches them off", facts)
            yield Spacing(
                "|".join(between), between, POLES, (), (), True, step, nets=(before[one], before[other]), across=(one, other)
            )


def _entries(stress: Stress) -> list[tuple[str, tuple[str, ...], str | None]]:
    """(label, poles, the neutral) of each mains entry with more than one pole."""
    return [
        (" and ".join(sorted((entry.ref, *entry.also), key=natural)), entry.poles, entry.neutral)
        for entry in stress.entries.values()
        if len(entry.poles) > 1
    ]


def _names(poles: Sequence[str], neutral: str | None) -> dict[str, str]:
    """Pole -> `live`, `live 1`, ... or `neutral`; of two poles without a named neutral the second is called so."""
    if neutral is None and len(poles) == 2:
        neutral = poles[1]
    lines = [pole for pole in poles if pole != neutral]
    named = {pole: f"live {at}" if len(lines) > 1 else "live" for at, pole in enumerate(lines, 1)}
    return named | ({neutral: "neutral"} if neutral is not None else {})


def _before_fuse(board: Board, stress: Stress, pole: str) -> tuple[str, ...]:
    """The pole and every conductor of the same pole that is reached without passing a fuse."""
    reached = {pole: None}
    queue = [pole]
    for net in queue:
        for ref in board.fitted_on(net):
            kind = board.kind(ref)
            if kind in _FUSES or kind in _NO_CONDUCTOR or (kind == "resistor" and not board.is_link(ref)):
                continue
            for other in board.design.parts[ref].nets():
                if other not in reached and stress.poles.get(other) == pole:
                    reached[other] = None
                    queue.append(other)
    return tuple(reached)


def _fuses(board: Board, stress: Stress) -> Iterator[Spacing]:
    """The two ends of each fuse in a pole: once it has opened, the whole supply is across it."""
    others = {pole: next(other for other in poles if other != pole) for _, poles, _ in _entries(stress) for pole in poles}
    for ref in sorted(board.choice, key=natural):
        part = board.design.parts[ref]
        nets = part.nets()
        if not part.fitted or board.kind(ref) not in _FUSES or len(nets) != 2:
            continue
        if any(net not in board.isolation.domain_of for net in nets):  # an end that leads nowhere
            continue
        pole = next((stress.poles.get(net, net) for net in nets if stress.poles.get(net, net) in others), None)
        if pole is None:
            continue
        before = _before_fuse(board, stress, pole)
        ends = sorted(nets, key=lambda net: net not in before)
        between = (f"{ref} before", f"{ref} behind")
        step = Step(f"fuse {ref} sits in the conductor of {pole}; once it has opened, the supply is across it", (part.fact,))
        nets_of = ((ends[0],), (ends[1],))
        yield Spacing("|".join(between), between, FUSE, (), (), True, step, nets=nets_of, across=(pole, others[pole]))


def _apart(board: Board) -> Iterator[Separation]:
    """Pairs of circuits that no part lies between. Where there are many circuits, pairs of two harmless ones are left out."""
    domains = board.isolation.domains
    crossed = {frozenset(separation.between) for separation in board.isolation.separations}
    special = [name for name, domain in domains.items() if domain.hazard or domain.side in ("primary", "earth")]
    every = len(domains) <= MOST_EQUALS
    for one, other in _pairs(tuple(domains), frozenset(special), every):
        if frozenset((one, other)) not in crossed:
            a, b = domains[one], domains[other]
            step = Step(f"no part lies between {one} and {other}", (a.step, b.step))
            yield Separation(f"{one}|{other}", (one, other), APART, (), (), a.named and b.named, step)


def _pairs(names: Sequence[str], special: frozenset[str], every: bool) -> Iterator[tuple[str, str]]:
    """Pairs in the order of the domains; without `every`, only those with one that is special."""
    if every:
        yield from combinations(names, 2)
        return
    position = {name: at for at, name in enumerate(names)}
    for one in names:
        if one in special:
            yield from ((one, other) for other in names if other not in special or position[other] > position[one])
