"""The stress stage: voltages between nets, across parts and across barriers, as bounds with their derivation.

Order: line conductors and their poles; conductors for direct voltage; what the rectifiers make of the line; what fixes a
direct voltage; how far everything else can be pulled; and, between two circuits, what insulation sees.
"""

from __future__ import annotations

from collections.abc import Mapping
from itertools import combinations

from checker.formulas.waveform import plus
from checker.model.rule import Board
from checker.model.step import Step
from checker.model.stress import Stress
from checker.stress.across import Across
from checker.stress.between import Voltages
from checker.stress.buses import behind_diodes, buses
from checker.stress.conductors import conductors
from checker.stress.cores import cores
from checker.stress.entries import carried, entries
from checker.stress.lines import pole_potentials, poles
from checker.stress.potential import Potential
from checker.stress.pulls import Pulls, pulls
from checker.stress.rails import Rail, grounds, rails
from checker.stress.spread import spread
from checker.stress.strings import String, strings
from checker.stress.windings import means, rectified

MOST_DOMAINS = 16  # circuits of which every pair is looked at, crossed or not


def stressed(board: Board) -> Stress:
    """Everything the stress stage finds."""
    mains = entries(board, "mains")
    on_pole = poles(board, mains.values())
    same = conductors(board, on_pole)
    strung = strings(board)
    references = grounds(board)
    edges = pulls(board, same, strung, references)
    fixed = sorted(rails(board, references), key=lambda rail: -rail.trust)

    def voltages(tolerance: bool) -> Voltages:
        line = pole_potentials(board, mains.values(), tolerance)
        return _voltages(board, line, same, strung, edges, references, fixed)

    between = voltages(tolerance=True)
    rated = voltages(tolerance=False) if mains else between
    earths = {name: [net] for name, net in references.items()}
    for entry in mains.values():
        earths[board.isolation.domain_of[entry.poles[0]]] = list(entry.poles)
    for rail in fixed:
        name = board.isolation.domain_of.get(rail.net)
        if name is not None and board.isolation.domains[name].hazard != "mains" and rail.trust > 1:
            earths.setdefault(name, []).append(rail.net)
    across = Across(board, rated, earths, board.setting.mains_frequency if mains else 0.0)
    parts = dict(across.parts())
    found = {separation.id: across.barrier(separation, parts) for separation in board.isolation.separations}
    domains = board.isolation.domains
    for one, two in combinations(domains, 2) if len(domains) <= MOST_DOMAINS else ():
        if f"{one}|{two}" not in found:
            found[f"{one}|{two}"] = across.pair((one, two))
    barriers = {name: voltage for name, voltage in found.items() if voltage is not None}
    return Stress(
        entries=mains,
        direct_entries=entries(board, "dc"),
        lines=carried(board, mains.values()),
        poles=on_pole,
        between=between.between,
        rated=rated.between,
        sign=between.sign,
        mean_sign=between.mean_sign,
        across=parts,
        barriers=barriers,
        loose=between.loose,
    )


def _voltages(
    board: Board,
    line: Mapping[str, Potential],
    same: Mapping[str, str],
    strung: Mapping[str, String],
    edges: Pulls,
    references: Mapping[str, str],
    fixed: list[Rail],
) -> Voltages:
    sources = dict(line)
    sources.update(buses(board, same, line))
    for name, net in references.items():
        step = Step(f"{net} is the reference of {name}", (board.design.nets[net].fact,))
        sources.setdefault(same.get(net, net), Potential(name, 0.0, 0.0, step, held=True))
    _fix(sources, fixed, same)
    sources.update(behind_diodes(board, same, sources))

    def frame_of(net: str) -> str | None:
        return board.isolation.domain_of.get(net)

    cored = cores(board, sources, line, same)
    sources.update(cored.rails)
    found = spread(sources, line, edges, frame_of, cored.nets)
    mean = means(board, sources, same)
    frequency = board.setting.mains_frequency
    return Voltages(board, found, same, strung, mean, rectified(board, mean, same), cored.loose, frequency)


def _fix(sources: dict[str, Potential], fixed: list[Rail], same: Mapping[str, str]) -> None:
    """Adds the potential of each rail whose one end is known, the most trusted first, until nothing more follows."""
    waiting = fixed
    while waiting:
        left = []
        for rail in waiting:
            net, back = same.get(rail.net, rail.net), same.get(rail.back, rail.back)
            if net in sources and back in sources:
                continue
            if back in sources:
                base = sources[back]
                sources[net] = Potential(
                    base.frame, plus(base.low, rail.low), plus(base.high, rail.high), rail.step, True, rail.fed
                )
            elif net in sources and rail.both:
                base = sources[net]
                low, high = plus(base.low, -rail.high), plus(base.high, -rail.low)
                sources[back] = Potential(base.frame, low, high, rail.step, held=True, output=rail.fed)
            else:
                left.append(rail)
        if len(left) == len(waiting):
            return
        waiting = left
