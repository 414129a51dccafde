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
from collections.abc import Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass
from itertools import pairwise, product

from checker.formulas.waveform import bottom, higher, lower, minus, plus, top
from checker.model.candidate import Winding
from checker.model.fact import Fact
from checker.model.rule import Board
from checker.model.step import Step
from checker.model.terminals import GROUND, named
from checker.stress.buses import diodes
from checker.stress.potential import DROPS, SENSE, Potential, Swing

NO_LOAD = 1.3  # a small mains transformer without load over its rated voltage, at most (from memory: 10 to 30 % above)
WINDINGS = 8  # of one core; beyond, the sets of directions are too many to try
SPIKE = 1.5  # peak over plateau of a winding's swing (usual default of clamp design, second hand)
TOLERANCE = 0.1  # part by which two plateaus may miss one another and still be the same (common practice, no source)
CITATION = "equal volts per turn, mean zero over a cycle (published method)"
_SWITCH_PINS = frozenset({"DRAIN", "D", "SW", "HV", "COLLECTOR", "C"})


@dataclass(frozen=True, slots=True)
class _Section:
    """Turns between two conductors; winding: which of the core's windings it belongs to (all its sections point one way)."""

    one: str
    two: str
    turns: float
    winding: int


@dataclass(frozen=True, slots=True)
class _Valve:
    """Conducts from anode to cathode; closes: a switch, which can be closed both ways."""

    anode: str
    cathode: str
    closes: bool


@dataclass(frozen=True, slots=True)
class _Way:
    """One set of directions: conductor -> (the held conductor it is tied to, turns with sign), and the bounds of e."""

    tied: Mapping[str, tuple[str, float]]
    low: float
    high: float


def cores(board: Board, sources: Mapping[str, Potential], line: Collection[str], same: Mapping[str, str]) -> dict[str, Potential]:
    """Conductor on a winding -> its potential in normal use, for every core whose turns are known and whose e is bounded.

    line: the poles of the mains; a core with a winding between two of them swings with the line, not apart from it.
    """
    near = _near(board, sources, same)
    valves = list(_valves(board, same, near))
    sources = {**_railed(valves, sources), **sources}
    found: dict[str, Potential] = {}
    for ref, candidate in board.choice.items():
        if candidate.kind == "transformer" and board.design.parts[ref].fitted:
            sections = _sections(board, ref, same)
            if sections and len({section.winding for section in sections}) <= WINDINGS:
                ways = [
                    way
                    for way in _ways(board, ref, sections, valves, sources)
                    if math.isfinite(way.low) and math.isfinite(way.high)
                ]
                if ways:
                    apart = len({held for way in ways for held, _ in way.tied.values()} & set(line)) < 2
                    found.update(_potentials(board, ref, ways, valves, sources, apart))
                    found.update(_floating(ref, sections, ways, valves, sources))
    return {net: known for net, known in found.items() if not (net in sources and sources[net].held)}


def means(board: Board, sources: Mapping[str, Potential], same: Mapping[str, str]) -> dict[str, str]:
    """Conductor on a winding -> the held conductor at whose potential it lies on the mean of a cycle: a winding has no direct
    voltage, whatever its turns."""
    found: dict[str, str] = {}
    for ref, candidate in board.choice.items():
        if candidate.kind not in ("transformer", "inductor") or not board.design.parts[ref].fitted:
            continue
        at = {pin.number: same.get(pin.net, pin.net) for pin in board.design.parts[ref].pins if pin.net is not None}
        for winding in candidate.windings or _by_sides(board, ref):
            ends = dict.fromkeys(at[pin] for pin in winding.pins if pin in at)
            held = [end for end in ends if end in sources]
            if len(held) == 1:
                found.update({end: held[0] for end in ends if end not in sources})
    return found


def rectified(board: Board, means: Mapping[str, str], same: Mapping[str, str]) -> dict[str, tuple[int, str]]:
    """Conductor that a diode ties to a winding end -> (1 above or -1 below, the held conductor of that winding's mean)."""
    found: dict[str, tuple[int, str]] = {}
    both: set[str] = set()
    for ref, candidate in board.choice.items():
        if candidate.kind not in ("diode", "bridge") or not board.design.parts[ref].fitted:
            continue
        for ends in diodes(board, ref):
            anode, cathode = (same.get(net, net) for net in ends)
            for net, end, sign in ((cathode, anode, 1), (anode, cathode, -1)):
                if end in means and net not in means and found.setdefault(net, (sign, means[end])) != (sign, means[end]):
                    both.add(net)
    return {net: told for net, told in found.items() if net not in both}


def _sections(board: Board, ref: str, same: Mapping[str, str]) -> list[_Section]:
    """The sections of a core; empty when the turns of one winding are neither stated nor follow from rated voltages."""
    at = {pin.number: pin.net for pin in board.design.parts[ref].pins}
    found = []
    for number, winding in enumerate(board.choice[ref].windings or _by_sides(board, ref)):
        turns = winding.turns or (_rated_turns(board, ref, [at.get(pin) for pin in winding.pins]),) * (len(winding.pins) - 1)
        if len(turns) != len(winding.pins) - 1 or not all(turns):
            return []
        for count, (first, second) in zip(turns, pairwise(winding.pins), strict=True):
            one, two = at.get(first), at.get(second)
            if one is not None and two is not None:
                found.append(_Section(same.get(one, one), same.get(two, two), count, number))
    return found


def _rated_turns(board: Board, ref: str, nets: Iterable[str | None]) -> float:
    """For a mains transformer the rated voltage of the winding stands for its turns, that of a secondary without load."""
    primary, secondary = (board.choice[ref].ratings.get(name) for name in ("primary", "secondary"))
    domain = next((name for net in nets if (name := board.isolation.domain_of.get(net or "")) is not None), None)
    if primary is None or secondary is None or domain is None:
        return 0.0
    on_mains = board.isolation.domains[domain].hazard == "mains"
    return float(primary.value) if on_mains else NO_LOAD * float(secondary.value)


def _by_sides(board: Board, ref: str) -> tuple[Winding, ...]:
    """The windings of a transformer of which none is stated, with two or three pins on each side: one a side, else none."""
    sides: dict[str, list[str]] = {}
    for pin in board.design.parts[ref].pins:
        domain = board.isolation.domain_of.get(pin.net or "")
        if domain is not None:
            sides.setdefault(domain, []).append(pin.number)
    return tuple(Winding(tuple(pins)) for pins in sides.values()) if all(len(pins) in (2, 3) for pins in sides.values()) else ()


def _near(board: Board, sources: Mapping[str, Potential], same: Mapping[str, str]) -> dict[str, str]:
    """Conductor behind a sense resistor -> the held conductor at its other end."""
    found = {}
    for ref, candidate in board.choice.items():
        value, nets = candidate.value, board.design.parts[ref].nets()
        if candidate.kind == "resistor" and board.design.parts[ref].fitted and len(nets) == 2 and value is not None:
            one, other = (same.get(net, net) for net in nets)
            if float(value.value) <= SENSE and (one in sources) != (other in sources):
                found.update({other: one} if one in sources else {one: other})
    return found


def _valves(board: Board, same: Mapping[str, str], near: Mapping[str, str]) -> Iterator[_Valve]:
    """Rectifiers, switches with their body diodes, and the switch pins of controllers."""

    def conductor(net: str) -> str:
        there = same.get(net, net)
        return near.get(there, there)

    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if not part.fitted:
            continue
        if candidate.kind in ("diode", "bridge"):
            for anode, cathode in diodes(board, ref):
                yield _Valve(conductor(anode), conductor(cathode), False)
        elif candidate.kind in ("mosfet", "igbt", "bipolar"):
            drain, source = named(part, ("D", "C", "DRAIN", "COLLECTOR")), named(part, ("S", "E", "SOURCE", "EMITTER"))
            if len(drain) == len(source) == 1:
                yield _Valve(conductor(source[0]), conductor(drain[0]), True)
        elif candidate.kind in ("controller", "ic", "regulator"):
            drains, grounds = named(part, _SWITCH_PINS), named(part, GROUND | {"S", "SOURCE"})
            if len(drains) == 1 and grounds:
                yield _Valve(conductor(grounds[0]), conductor(drains[0]), True)


def _railed(valves: list[_Valve], sources: Mapping[str, Potential]) -> dict[str, Potential]:
    """Switching nodes that valves keep between two held conductors, such as the middle of a half bridge."""
    up: dict[str, Potential] = {}
    down: dict[str, Potential] = {}
    for valve in valves:
        if valve.anode not in sources and valve.cathode in sources:
            up.setdefault(valve.anode, sources[valve.cathode])
        if valve.cathode not in sources and valve.anode in sources:
            down.setdefault(valve.cathode, sources[valve.anode])
    return {
        net: Potential(
            high.frame, plus(low.low, -DROPS.forward), plus(high.high, DROPS.forward),
            Step(f"{net} is kept between two rails by the switches or diodes on it", (low.step, high.step)),
        )
        for net, high in up.items()
        if (low := down.get(net)) is not None and low.frame == high.frame
    }  # fmt: skip


def _ways(
    board: Board, ref: str, sections: list[_Section], valves: list[_Valve], sources: Mapping[str, Potential]
) -> Iterator[_Way]:
    """Every set of directions that the circuit allows, with the bounds that valves give."""
    declared = board.declaration.parts.get(ref)
    dotted = declared is not None and bool(declared.windings)
    windings = sorted({section.winding for section in sections})
    for signs in [(1,) * len(windings)] if dotted else product(*([(1,)] + [(1, -1)] * (len(windings) - 1))):
        direction = dict(zip(windings, signs, strict=True))
        tied = _tied(sections, direction, sources)
        here = [valve for valve in valves if valve.anode in tied or valve.cathode in tied]
        bounds = [_bound(valve, tied, sources) for valve in here]
        ends = [_spanned(section, direction, tied, sources) for section in sections]
        low = max([bound[1] for bound in bounds if bound is not None and bound[0] < 0] + [end[0] for end in ends])
        high = min([bound[1] for bound in bounds if bound is not None and bound[0] > 0] + [end[1] for end in ends])
        if _can_close(here, tied, sources):
            yield _Way(tied, low, high)


def _spanned(
    section: _Section, direction: Mapping[int, int], tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]
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


def _tied(sections: list[_Section], direction: Mapping[int, int], sources: Mapping[str, Potential]) -> dict[str, tuple[str, float]]:
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


def _bound(valve: _Valve, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> tuple[float, float] | None:
    """(sign, bound) that a valve gives: e <= bound for a positive sign, e >= bound for a negative one."""
    one, other = _place(valve.anode, tied, sources), _place(valve.cathode, tied, sources)
    if one is None or other is None or one[0].frame != other[0].frame:
        return None
    turns = one[1] - other[1]
    if not turns:
        return None
    least = bottom(minus(one[0].low, other[0].high))  # of anode over cathode, without the winding
    return turns, (DROPS.forward - least) / turns


def _can_close(valves: list[_Valve], tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> bool:
    """Whether every switch can close without a rectifier between held conductors shorting it through the core."""
    for switch in valves:
        one, other = _place(switch.anode, tied, sources), _place(switch.cathode, tied, sources)
        if not switch.closes or one is None or other is None or one[0].frame != other[0].frame or one[1] == other[1]:
            continue
        apart = minus(one[0].low, other[0].low)
        closed = -(top(apart) + bottom(apart)) / 2 / (one[1] - other[1])
        for valve in valves:
            bound = None if valve.closes else _bound(valve, tied, sources)
            if bound is not None and (closed - bound[1]) * math.copysign(1.0, bound[0]) > TOLERANCE * abs(bound[1]):
                return False
    return True


def _potentials(
    board: Board, ref: str, ways: list[_Way], valves: list[_Valve], sources: Mapping[str, Potential], apart: bool
) -> Iterator[tuple[str, Potential]]:
    """The potential of each conductor on a core over all its ways; a valve into a held conductor stops its spikes."""
    said = board.choice[ref].ratings.get("secondary") or Fact("turns", _said(board, ref), board.design.parts[ref].fact.source)
    for net in ways[0].tied:
        held = {way.tied[net][0] for way in ways if net in way.tied}
        if len(held) != 1 or not all(net in way.tied for way in ways):
            continue
        base = sources[next(iter(held))]
        sets = tuple((way.tied[net][1], way.low, way.high) for way in ways)
        low, high = base.low, base.high
        for count, least, most in sets:
            ends = sorted((count * least * SPIKE, count * most * SPIKE))
            low, high = lower(low, plus(base.low, ends[0])), higher(high, plus(base.high, ends[1]))
        for valve in valves:
            if valve.anode == net and valve.cathode in sources:
                high = lower(high, plus(sources[valve.cathode].high, DROPS.forward))
            if valve.cathode == net and valve.anode in sources:
                low = higher(low, plus(sources[valve.anode].low, -DROPS.forward))
        counts = " or ".join(sorted({f"{abs(count):g}" for count, _, _ in sets}))
        volts = " or ".join([f"{least:.3g} to {most:.3g}" for _, least, most in dict.fromkeys(sets)][:4])
        step = Step(
            f"{net} is tied by {counts} turns of {ref} to {next(iter(held))}; rectifiers and switches keep the core within {volts} "
            f"V per turn, spikes are allowed for as {SPIKE:g} times that",
            (base.step, said), formula="V_held + N x e", result=top(high), unit="V", form="peak", citation=CITATION,
        )  # fmt: skip
        yield net, Potential(base.frame, low, high, step, swing=Swing(ref, base.low, base.high, sets, apart and base.held))


def _floating(
    ref: str, sections: list[_Section], ways: list[_Way], valves: list[_Valve], sources: Mapping[str, Potential]
) -> Iterator[tuple[str, Potential]]:
    """A winding with a bridge: neither end is tied, and a diode keeps each above the same held conductor.

    One end rests on it while the other is as far above as the whole winding gives.
    """
    most = max(max(abs(way.low), abs(way.high)) for way in ways)
    for section in sections:
        if any(section.one in way.tied or section.two in way.tied for way in ways):
            continue
        under = [
            {valve.anode for valve in valves if valve.cathode == end and valve.anode in sources}
            for end in (section.one, section.two)
        ]
        for held in sorted(under[0] & under[1])[:1]:
            base, volts = sources[held], section.turns * most
            step = Step(
                f"{section.one} and {section.two} are a winding of {ref} with a bridge above {held}, of at most {volts:.4g} V",
                (base.step,),
                formula="N x e", result=volts, unit="V", form="peak", citation=CITATION,
            )  # fmt: skip
            low, high = plus(base.low, -DROPS.forward), plus(base.high, volts * SPIKE)
            for end in (section.one, section.two):
                yield end, Potential(base.frame, low, high, step)


def _said(board: Board, ref: str) -> str:
    return ", ".join(
        f"{'-'.join(winding.pins)}: {'+'.join(f'{count:g}' for count in winding.turns)}" for winding in board.choice[ref].windings
    )
