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
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import permutations, product

from checker.formulas.waveform import bottom, higher, lower, minus, plus, top
from checker.model.fact import Fact
from checker.model.rule import Board
from checker.model.step import Step
from checker.stress.potential import DROPS, SMOOTHING, Potential, Swing, Turns
from checker.stress.valves import Valve, railed, valves
from checker.stress.windings import NO_LOAD, Section, sections

WINDINGS = 8  # of one core; beyond, the sets of directions are too many to try
SPIKE = 1.5  # peak over plateau of a winding's swing (usual default of clamp design, second hand)
CHARGED = 1.3  # crest of a lightly loaded rail over plateau, spikes that charge it (common practice, no source)
TOLERANCE = 0.1  # part by which two plateaus may miss one another and still be the same (common practice, no source)
CITATION = "equal volts per turn, mean zero over a cycle (published method)"


@dataclass(frozen=True, slots=True)
class _Way:
    """One set of directions: conductor -> (the held conductor it is tied to, turns with sign), and the bounds of e: what it
    never leaves and what it surely reaches."""

    tied: Mapping[str, tuple[str, float]]
    low: float
    high: float
    surely_low: float
    surely_high: float

    def turns(self, net: str) -> Turns:
        """What its winding adds to a conductor."""
        return Turns(self.tied[net][1], self.low, self.high, self.surely_low, self.surely_high)


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
    sources = {**railed(there, sources), **sources}
    found = Cores()
    for ref, candidate in board.choice.items():
        if candidate.kind != "transformer" or not board.design.parts[ref].fitted:
            continue
        ends = dict.fromkeys(same.get(net, net) for net in board.design.parts[ref].nets())
        wound = sections(board, ref, same)
        if not wound or len({section.winding for section in wound}) > WINDINGS:
            found.loose.update(dict.fromkeys(ends, (ref, "turns of its windings")))
            continue
        ways = [way for way in _ways(board, ref, wound, there, sources, line) if math.isfinite(way.low) and math.isfinite(way.high)]
        strokes = [_on_stroke(way, there, sources) for way in ways]
        ways = [way for way, count in zip(ways, strokes, strict=True) if count == min(strokes)]
        if ways:
            apart = len({held for way in ways for held, _ in way.tied.values()} & set(line)) < 2
            spike = 1.0 if any({section.one, section.two} <= line.keys() for section in wound) else SPIKE
            nets = dict(_potentials(board, ref, ways, there, sources, apart, spike))
            found.rails.update(_charged(board, nets, there, sources, same))
            found.nets.update(nets)
            for each in _floating(ref, wound, ways, there, sources, spike):
                found.nets.update(dict.fromkeys(each.ends, each.end))
                if each.over is not None and each.above not in sources and _smoothed(board, each.above, sources, same):
                    found.rails[each.above] = each.over
        found.loose.update(dict.fromkeys(ends, (ref, "voltage that one of its windings is rectified to")))
    found.nets = {net: known for net, known in found.nets.items() if not (net in sources and sources[net].held)}
    found.loose = {net: told for net, told in found.loose.items() if net not in found.nets and net not in sources}
    known = {*sources, *found.nets, *found.rails}
    found.loose.update(_fed(there, found.loose, known))
    return found


def _fed(there: Sequence[Valve], loose: Mapping[str, tuple[str, str]], known: Collection[str]) -> dict[str, tuple[str, str]]:
    """What rectifiers charge from windings that nothing bounds."""
    ends = [pair for valve in there if not valve.closes for pair in permutations((valve.anode, valve.cathode))]
    return {far: loose[near] for near, far in ends if near in loose and far not in loose and far not in known}


def _ways(
    board: Board,
    ref: str,
    wound: list[Section],
    there: list[Valve],
    sources: Mapping[str, Potential],
    line: Mapping[str, Potential],
) -> Iterator[_Way]:
    """Every set of directions that the circuit allows, with the bounds that valves give."""
    loaded = NO_LOAD if "secondary" in board.choice[ref].ratings else 1.0
    declared = board.declaration.parts.get(ref)
    dotted = declared is not None and bool(declared.windings)
    windings = sorted({section.winding for section in wound})
    for signs in [(1,) * len(windings)] if dotted else product(*([(1,)] + [(1, -1)] * (len(windings) - 1))):
        direction = dict(zip(windings, signs, strict=True))
        tied = _tied(wound, direction, sources)
        here = [valve for valve in there if valve.anode in tied or valve.cathode in tied]
        bounds = [_bound(valve, tied, sources) for valve in here]
        ends = [_spanned(section, direction, tied, sources) for section in wound]
        low = max([bound[1] for bound in bounds if bound is not None and bound[0] < 0] + [end[0] for end in ends])
        high = min([bound[1] for bound in bounds if bound is not None and bound[0] > 0] + [end[1] for end in ends])
        if _can_close(here, tied, sources) and _drives(here, tied, sources):
            reached = [reach for valve in here if (reach := _reached(valve, tied, sources)) is not None]
            reached += [
                end / loaded
                for section, span in zip(wound, ends, strict=True)
                if {section.one, section.two} <= line.keys()
                for end in span
            ]
            least = min([e for e in reached if e < 0], default=0.0)
            most = max([e for e in reached if e > 0], default=0.0)
            yield _Way(tied, low, high, max(low, least), min(high, most))


def _on_stroke(way: _Way, there: Sequence[Valve], sources: Mapping[str, Potential]) -> int:
    """How many rectifiers would charge a net of unknown voltage while a switch of the core is closed. Such a net follows the
    supply, which no regulated converter is meant to do: of several sets of directions the ones with fewest are meant."""
    strokes = [closed for valve in there if valve.closes and (closed := _closed(valve, way.tied, sources)) is not None]
    count = 0
    for valve in there:
        for end, net, sign in ((valve.anode, valve.cathode, 1), (valve.cathode, valve.anode, -1)):
            if not valve.closes and net not in sources and net not in way.tied and end in way.tied:
                count += any(sign * way.tied[end][1] * closed > 0 for closed in strokes)
    return count


def _reached(valve: Valve, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> float | None:
    """The volts per turn at which a valve conducts that surely does so in every cycle at full load: a switch closes, and what
    nothing else feeds lives on its rectifier. 0.0 or None where that is not known."""
    one, other = _place(valve.anode, tied, sources), _place(valve.cathode, tied, sources)
    if one is None or other is None or one[0].frame != other[0].frame or one[1] == other[1]:
        return None
    far = valve.cathode if valve.anode in tied and tied[valve.anode][1] else valve.anode
    if not valve.closes and not (far in sources and sources[far].output):
        return None
    turns = one[1] - other[1]
    most = top(minus(one[0].high, other[0].low))  # of anode over cathode, without the winding: it conducts soonest there
    most += min(DROPS.sense, TOLERANCE * abs(most)) if valve.closes else 0.0
    return -most / turns if most < 0 else 0.0


def _drives(here: Iterable[Valve], tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> bool:
    """Whether a winding that drives a switch of its own core keeps it closed: its end at the gate is up while the switch is."""
    for valve in here:
        driving = [
            tied[net][1] for net in valve.control if net in tied and tied[net][1] and net not in (valve.anode, valve.cathode)
        ]
        closed = _closed(valve, tied, sources) if valve.closes and driving else None
        if closed is not None and all(turns * closed < 0 for turns in driving):
            return False
    return True


def _closed(valve: Valve, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> float | None:
    """The volts per turn while a switch is closed, about."""
    one, other = _place(valve.anode, tied, sources), _place(valve.cathode, tied, sources)
    if one is None or other is None or one[0].frame != other[0].frame or one[1] == other[1]:
        return None
    apart = minus(one[0].low, other[0].low)
    return -(top(apart) + bottom(apart)) / 2 / (one[1] - other[1])


def _spanned(
    section: Section, direction: Mapping[int, int], tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]
) -> tuple[float, float]:
    """Bounds of e that a section gives between two conductors that are both tied to bounded ones; without bounds else."""
    one, two = _place(section.one, tied, sources), _place(section.two, tied, sources)
    if one is None or two is None or one[0].frame != two[0].frame or section.one == section.two:
        return -math.inf, math.inf
    turns = section.turns * direction[section.winding] - one[1] + two[1]
    if not turns:
        return -math.inf, math.inf
    low, high = sorted(volts / turns for volts in (bottom(minus(one[0].low, two[0].high)), top(minus(one[0].high, two[0].low))))
    return low, high


def _tied(sections: list[Section], direction: Mapping[int, int], sources: Mapping[str, Potential]) -> dict[str, tuple[str, float]]:
    """Conductor -> (held conductor, turns) for all that sections reach from held ones."""
    tied: dict[str, tuple[str, float]] = {
        end: (end, 0.0) for section in sections for end in (section.one, section.two) if end in sources
    }
    changed = True
    while changed:
        changed = False
        for section in sections:
            turns = section.turns * direction[section.winding]
            for near, far, step in ((section.two, section.one, turns), (section.one, section.two, -turns)):
                if near in tied and far not in tied:
                    tied[far] = tied[near][0], tied[near][1] + step
                    changed = True
    return tied


def _place(net: str, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> tuple[Potential, float] | None:
    """(potential of the held conductor, turns) of a conductor on the core or held elsewhere."""
    held, turns = tied.get(net, (net, 0.0))
    base = sources.get(held)
    return (base, turns) if base is not None else None


def _bound(valve: Valve, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> tuple[float, float] | None:
    """(sign, bound) that a valve gives: e <= bound for a positive sign, e >= bound for a negative one."""
    one, other = _place(valve.anode, tied, sources), _place(valve.cathode, tied, sources)
    if one is None or other is None or one[0].frame != other[0].frame:
        return None
    turns = one[1] - other[1]
    if not turns:
        return None
    least = bottom(minus(one[0].low, other[0].high))  # of anode over cathode, without the winding
    return turns, (DROPS.forward - least) / turns


def _can_close(valves: list[Valve], tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> bool:
    """Whether every switch can close without a rectifier between held conductors shorting it through the core."""
    for switch in valves:
        closed = _closed(switch, tied, sources) if switch.closes else None
        for valve in valves if closed is not None else ():
            bound = None if valve.closes else _bound(valve, tied, sources)
            if (
                closed is not None
                and bound is not None
                and (closed - bound[1]) * math.copysign(1.0, bound[0]) > TOLERANCE * abs(bound[1])
            ):
                return False
    return True


def _potentials(
    board: Board, ref: str, ways: list[_Way], valves: list[Valve], sources: Mapping[str, Potential], apart: bool, spike: float
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


def _charged(
    board: Board,
    nets: Mapping[str, Potential],
    there: Sequence[Valve],
    sources: Mapping[str, Potential],
    same: Mapping[str, str],
) -> Iterator[tuple[str, Potential]]:
    """Conductors that a rectifier charges from a winding end and a capacitor holds, where nothing else tells their potential: the
    crest of what the winding adds, less a diode at most, with its spikes at most."""
    for valve in there:
        for end, net, sign in ((valve.anode, valve.cathode, 1), (valve.cathode, valve.anode, -1)):
            known = nets.get(end)
            if valve.closes or known is None or known.swing is None or net in sources or net in nets:
                continue
            if not _smoothed(board, net, sources, same):
                continue
            swing = known.swing
            crests = [max(sign * each.turns * e for e in (each.low, each.high)) for each in swing.ways]
            sure = [max(sign * each.turns * e for e in (each.surely_low, each.surely_high)) for each in swing.ways]
            most, least = max(crests) * min(swing.spike, CHARGED), max(0.0, min(sure) - DROPS.forward)
            low, high = plus(swing.low, least if sign > 0 else -most), plus(swing.high, most if sign > 0 else -least)
            step = Step(
                f"{net} is charged from {end} by a rectifier to the crest of its winding, {least:.4g} V surely, {most:.4g} V with "
                f"spikes at most",
                (known.step,), formula="N x e", result=most, unit="V", form="dc", citation=CITATION,
            )  # fmt: skip
            yield net, Potential(known.frame, low, high, step, held=True, output=True)


def _smoothed(board: Board, net: str, sources: Mapping[str, Potential], same: Mapping[str, str]) -> bool:
    """Whether a smoothing capacitor holds a conductor against one whose potential is known."""
    for ref in board.fitted_on(net):
        value = board.choice[ref].value
        if board.kind(ref) == "capacitor" and value is not None and float(value.value) >= SMOOTHING:
            if any(same.get(far, far) in sources for far in board.design.parts[ref].nets() if far != net):
                return True
    return False


@dataclass(frozen=True, slots=True)
class _Floating:
    """A winding with a bridge. ends: its conductors, end: the potential of both; above: the net that the bridge feeds, "" for none,
    over: its potential."""

    ends: tuple[str, str]
    end: Potential
    above: str
    over: Potential | None


def _floating(
    ref: str, wound: list[Section], ways: list[_Way], there: list[Valve], sources: Mapping[str, Potential], spike: float
) -> Iterator[_Floating]:
    """Windings of which neither end is tied, and a diode keeps each above the same held conductor: one end rests on it while the
    other is as far above as the whole winding gives."""
    most = max(max(abs(way.low), abs(way.high)) for way in ways)
    sure = min(max(abs(way.surely_low), abs(way.surely_high)) for way in ways)
    for section in wound:
        ends = (section.one, section.two)
        if any(end in way.tied for way in ways for end in ends):
            continue
        under = [{valve.anode for valve in there if valve.cathode == end and valve.anode in sources} for end in ends]
        above = [{valve.cathode for valve in there if valve.anode == end} for end in ends]
        for held in sorted(under[0] & under[1])[:1]:
            base, volts = sources[held], section.turns * most * spike
            step = Step(
                f"{section.one} and {section.two} are a winding of {ref} with a bridge above {held}, of at most {volts:.4g} V",
                (base.step,), formula="N x e", result=volts, unit="V", form="peak", citation=CITATION,
            )  # fmt: skip
            end = Potential(base.frame, plus(base.low, -DROPS.forward), plus(base.high, volts), step)
            net = next(iter(sorted(above[0] & above[1])), "")
            least = max(0.0, section.turns * sure - 2 * DROPS.diode)
            fed = Step(
                f"{net} is charged by the bridge to the crest of that winding, {least:.4g} V surely, {volts:.4g} V at most",
                (step,), formula="N x e", result=volts, unit="V", form="dc", citation=CITATION,
            )  # fmt: skip
            over = (
                Potential(base.frame, plus(base.low, least), plus(base.high, volts), fed, held=True, output=True) if net else None
            )
            yield _Floating(ends, end, net, over)


def _said(board: Board, ref: str) -> str:
    return ", ".join(
        f"{'-'.join(winding.pins)}: {'+'.join(f'{count:g}' for count in winding.turns)}" for winding in board.choice[ref].windings
    )
