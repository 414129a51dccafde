"""Nets on the windings of a switched core, in normal use.

All windings of a core have the same volts per turn e(t) at each moment, and its mean over a switching cycle is zero. A
net that windings tie to a held net therefore has the potential

    v(t) = V_held(t) + N x e(t)        N: turns between them, with the sign of the winding's direction

A rectifier or the body diode of a switch conducts once its anode is above its cathode and keeps e where it then is, so each of
them bounds e from one side. Where no dot is stated, every set of winding directions is tried and those are dropped in which a
switch could not close without a rectifier shorting it. Between its bounds and with mean zero, e has at most the mean square
-e_low x e_high (two plateaus), which gives r.m.s. values without duty or frequency.

Spikes of leakage inductances are no part of e: they are in the peak as an allowance (SPIKE), not in the r.m.s. value, and no
rating is judged by what stands here.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from itertools import permutations

from checker.formulas.waveform import higher, lower, plus, top
from checker.model.fact import Fact
from checker.model.rule import Board
from checker.model.step import Step
from checker.stress.charged import charged, floating, smoothed
from checker.stress.chokes import before_chokes, behind_chokes, between_rectifiers
from checker.stress.coupled import chokes, coupled
from checker.stress.directions import Around, Way, directed, leads_off, may_reset, on_stroke
from checker.stress.potential import CITATION, DROPS, Potential, Swing
from checker.stress.valves import Valve, railed, valves
from checker.stress.windings import Section, sections

WINDINGS = 8  # of one core; beyond, the sets of directions are too many to try
SPIKE = 1.5  # peak over plateau of a winding's swing (usual default of clamp design, second hand)


@dataclass(slots=True)
class Cores:
    """nets: conductor on a winding -> its potential in normal use. rails: conductor that a rectifier charges from a winding and a
    capacitor holds -> its potential. loose: conductor on a winding that nothing bounds -> (the core, the fact that is missing)."""

    nets: dict[str, Potential] = field(default_factory=dict)
    rails: dict[str, Potential] = field(default_factory=dict)
    loose: dict[str, tuple[str, str]] = field(default_factory=dict)


def cores(board: Board, sources: Mapping[str, Potential], line: Mapping[str, Potential], same: Mapping[str, str]) -> Cores:
    """The nets on every core whose turns are known and whose volts per turn are bounded.

    line: the poles of the mains; a core with a winding between two of them swings with the line, not apart from it.
    """
    there = list(valves(board, sources, same))
    legs = railed(there, sources).keys() - sources.keys()
    sources = {**railed(there, sources), **sources}
    choked = chokes(board, sources, same, there)
    found = Cores()
    for ref, candidate in board.choice.items():
        if candidate.kind != "transformer" or not board.design.parts[ref].fitted:
            continue
        ends = dict.fromkeys(same.get(net, net) for net in board.design.parts[ref].nets())
        wound = sections(board, ref, same)
        if not wound or len({section.winding for section in wound}) > WINDINGS:
            found.loose.update(dict.fromkeys(ends, (ref, "turns of its windings")))
            continue
        around = Around(there, sources, line, same, legs, choked)
        told = {end for section in wound for end in (section.one, section.two)}
        _core(board, ref, wound, found, around, partly=not told >= ends.keys())
        found.loose.update((end, (ref, "turns of its windings")) for end in ends if end not in told)
        found.loose.update(dict.fromkeys(told, (ref, _unknown(board, ends, around))))
    found.nets = {net: known for net, known in found.nets.items() if not (net in sources and sources[net].held)}
    found.loose = {net: told for net, told in found.loose.items() if net not in found.nets and net not in sources}
    known = {*sources, *found.nets, *found.rails}
    found.loose.update(_fed(there, found.loose, known))
    return found


def _core(board: Board, ref: str, wound: list[Section], found: Cores, around: Around, partly: bool) -> None:
    """Adds what follows from one core. partly: it has windings of unknown turns."""
    there, line, same, choked = around.there, around.line, around.same, around.choked
    linked = coupled(board, ref, around.sources, around.legs, same, there, choked)
    sources = {**around.sources, **linked.held}
    wound = [replace(each, one=linked.behind.get(each.one, each.one), two=linked.behind.get(each.two, each.two)) for each in wound]
    possible = list(directed(board, ref, wound, sources, linked, around))
    ways = [way for way in possible if math.isfinite(way.low) and math.isfinite(way.high)]
    endless = [way for way in possible if way not in ways]
    strokes = [on_stroke(way, there, sources, choked) for way in ways]
    ways = [way for way, count in zip(ways, strokes, strict=True) if count == min(strokes)]
    if not ways or (endless and partly) or any(may_reset(board, way, there, sources, around) for way in endless):
        return
    if any(leads_off(board, valve, way.tied, sources, same) for way in ways for valve in there):
        return
    apart = len({held for way in ways for held, _ in way.tied.values()} & set(line)) < 2
    spike = 1.0 if any({section.one, section.two} <= line.keys() for section in wound) else SPIKE
    nets = dict(_potentials(board, ref, ways, there, sources, apart, spike))
    found.rails.update(charged(board, nets, there, sources, same))
    found.rails.update(linked.held)
    found.nets.update(nets)
    free = {net: far for net, far in choked.items() if not any(net in way.tied for way in ways)}
    found.nets.update(before_chokes(ref, ways, there, sources, free, spike))
    for number in {section.winding for section in wound}:
        whole = _whole([section for section in wound if section.winding == number])
        if not any(net in way.tied for way in ways for net, _ in whole):
            found.nets.update(between_rectifiers(ref, number, whole, ways, there, sources, choked, spike))
    found.rails.update(behind_chokes({net: known for net, known in found.nets.items() if known.fed}, choked, sources))
    for each in floating(ref, wound, ways, there, sources, spike):
        for net in each.ends:
            found.nets.setdefault(net, each.end)
        if each.over is not None and each.above not in sources and smoothed(board, each.above, sources, same):
            found.rails[each.above] = each.over


def _unknown(board: Board, ends: Collection[str], around: Around) -> str:
    """The fact that would bound a core: what a capacitor holds behind a switch or rectifier of its primary, else an output."""
    for valve in around.there:
        for end, far in ((valve.anode, valve.cathode), (valve.cathode, valve.anode)):
            known = end in around.sources or far in around.sources or far in around.choked or far in ends
            driven = any(other.closes and end in (other.anode, other.cathode) for other in around.there if other != valve)
            if end in ends and not known and driven and _held_by_capacitor(board, far, around):
                return f"voltage that {far} is charged to"
    return "voltage that one of its windings is rectified to"


def _held_by_capacitor(board: Board, net: str, around: Around) -> bool:
    return net in board.design.nets and any(
        board.kind(ref) == "capacitor"
        and any(around.same.get(far, far) in around.sources for far in board.design.parts[ref].nets())
        for ref in board.fitted_on(net)
    )


def _whole(sections: Sequence[Section]) -> list[tuple[str, float]]:
    """(conductor, turns from the first one) along a winding; what one turn adds from its second end to its first is e."""
    found = [(sections[0].one, 0.0)]
    for section in sections:
        found.append((section.two, found[-1][1] - section.turns))
    return found


def _fed(there: Sequence[Valve], loose: Mapping[str, tuple[str, str]], known: Collection[str]) -> dict[str, tuple[str, str]]:
    """What rectifiers charge from windings that nothing bounds."""
    ends = [pair for valve in there if not valve.closes for pair in permutations((valve.anode, valve.cathode))]
    return {far: loose[near] for near, far in ends if near in loose and far not in loose and far not in known}


def _potentials(
    board: Board, ref: str, ways: list[Way], valves: list[Valve], sources: Mapping[str, Potential], apart: bool, spike: float
) -> Iterator[tuple[str, Potential]]:
    """The potential of each conductor on a core over all its ways; a valve into a held conductor stops its spikes."""
    said = board.choice[ref].ratings.get("secondary") or Fact("turns", _said(board, ref), board.design.parts[ref].fact.source)
    for net in ways[0].tied:
        held = {way.tied[net][0] for way in ways if net in way.tied}
        if len(held) != 1 or not all(net in way.tied for way in ways):
            continue
        base = sources[next(iter(held))]
        sets = tuple(way.turns(net) for way in ways)
        low, high = base.low, base.high
        for each in sets:
            ends = sorted((each.turns * each.low * spike, each.turns * each.high * spike))
            low, high = lower(low, plus(base.low, ends[0])), higher(high, plus(base.high, ends[1]))
        for valve in valves:
            if valve.anode == net and valve.cathode in sources:
                high = lower(high, plus(sources[valve.cathode].high, DROPS.forward))
            if valve.cathode == net and valve.anode in sources:
                low = higher(low, plus(sources[valve.anode].low, -DROPS.forward))
        swing = Swing(ref, base.low, base.high, sets, apart and base.held, spike)
        counts = " or ".join(sorted({f"{abs(each.turns):g}" for each in sets}))
        volts = " or ".join(list(dict.fromkeys(f"{each.low:.3g} to {each.high:.3g}" for each in sets))[:4])
        step = Step(
            f"{net} is tied by {counts} turns of {ref} to {next(iter(held))}; rectifiers and switches keep the core within {volts} "
            f"V per turn, spikes are allowed for as {spike:g} times that",
            (base.step, said), formula="V_held + N x e", result=top(high), unit="V", form="peak", citation=CITATION,
        )  # fmt: skip
        yield net, Potential(base.frame, low, high, step, swing=swing)


def _said(board: Board, ref: str) -> str:
    return ", ".join(
        f"{'-'.join(winding.pins)}: {'+'.join(f'{count:g}' for count in winding.turns)}" for winding in board.choice[ref].windings
    )
