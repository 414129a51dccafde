"""In which directions the windings of a core can point, and how far its volts per turn go in each.

Where no dot is stated, every set of directions is tried, and dropped where a switch could not close without a rectifier
shorting it, a winding that drives a switch would open it, or nothing would feed a choke. A rectifier or the body diode of a
switch conducts once its anode is above its cathode and keeps the volts per turn e where they then are: it bounds e from one side.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import product

from checker.formulas.waveform import bottom, minus, plus, top
from checker.model.rule import Board
from checker.model.step import Step
from checker.stress.coupled import Coupled, Tie
from checker.stress.potential import CITATION, DROPS, Potential, Turns
from checker.stress.valves import Valve
from checker.stress.windings import NO_LOAD, Section

TOLERANCE = 0.1  # part by which two plateaus may miss one another and still be the same (common practice, no source)
_PASSIVE = frozenset("capacitor resistor mosfet igbt bipolar diode tvs zener test-point transformer inductor".split())


@dataclass(frozen=True, slots=True)
class Around:
    """What is known around the cores. there: valves; sources: held conductors; line: poles of the mains; same: net -> conductor;
    legs: those of the sources that switches move; choked: conductor before a choke -> the one behind it."""

    there: list[Valve]
    sources: Mapping[str, Potential]
    line: Mapping[str, Potential]
    same: Mapping[str, str]
    legs: Collection[str]
    choked: Mapping[str, str]


@dataclass(frozen=True, slots=True)
class Way:
    """One set of directions (winding -> 1 or -1): conductor -> (the held conductor it is tied to, turns with sign), and the bounds
    of e: what it never leaves and what it surely reaches."""

    tied: Mapping[str, tuple[str, float]]
    low: float
    high: float
    surely_low: float
    surely_high: float
    direction: Mapping[int, int]

    def turns(self, net: str) -> Turns:
        """What its winding adds to a conductor."""
        return Turns(self.tied[net][1], self.low, self.high, self.surely_low, self.surely_high)

    @property
    def e(self) -> Turns:
        """The bounds without a net."""
        return Turns(0.0, self.low, self.high, self.surely_low, self.surely_high)


def directed(
    board: Board, ref: str, wound: list[Section], sources: dict[str, Potential], linked: Coupled, around: Around
) -> Iterator[Way]:
    """Every set of directions that the circuit allows, with the bounds that valves give."""
    there, line = around.there, around.line
    loaded = NO_LOAD if "secondary" in board.choice[ref].ratings else 1.0
    declared = board.declaration.parts.get(ref)
    dotted = declared is not None and bool(declared.windings)
    windings = sorted({section.winding for section in wound})
    for signs in [(1,) * len(windings)] if dotted else product(*([(1,)] + [(1, -1)] * (len(windings) - 1))):
        direction = dict(zip(windings, signs, strict=True))
        tied = _tied(wound, direction, sources, linked.ties)
        here = [valve for valve in there if valve.anode in tied or valve.cathode in tied]
        bounds = [_bound(valve, tied, sources) for valve in here]
        ends = [_spanned(section, direction, tied, sources) for section in wound]
        couplings = [_coupling(tie, tied, sources) for tie in linked.ties]
        low = max([bound[1] for bound in bounds if bound is not None and bound[0] < 0] + [end[0] for end in (*ends, *couplings)])
        high = min([bound[1] for bound in bounds if bound is not None and bound[0] > 0] + [end[1] for end in (*ends, *couplings)])
        if _can_close(here, tied, sources) and _drives(here, tied, sources):
            usual = {**sources, **linked.even}
            reached = [reach for valve in here if (reach := _reached(valve, tied, usual)) is not None]
            stepped = [e for section in wound for e in _legs_reach(section, direction, there, usual, around.legs)]
            if any(e > high + TOLERANCE * abs(high) or e < low - TOLERANCE * abs(low) for e in stepped):
                continue  # a rectifier would short a leg
            if not _feeds(here, tied, sources, around.choked, stepped) or not _returns(here, tied, sources):
                continue
            reached += stepped
            reached += [
                end / loaded
                for section, span in zip(wound, ends, strict=True)
                if {section.one, section.two} <= line.keys()
                for end in span
            ]
            least = min([e for e in reached if e < 0], default=0.0)
            most = max([e for e in reached if e > 0], default=0.0)
            # a rectifier that drops nothing keeps e nearer than its bound: of two outputs that disagree the nearer is sure
            hard = [bound for valve in here if (bound := _bound(replace(valve, drop=0.0), tied, sources)) is not None]
            least = max([low, least, *(e for turns, e in hard if turns < 0)])
            most = min([high, most, *(e for turns, e in hard if turns > 0)])
            yield Way(tied, low, high, min(least, 0.0), max(most, 0.0), direction)


def _feeds(
    here: Iterable[Valve],
    tied: Mapping[str, tuple[str, float]],
    sources: Mapping[str, Potential],
    choked: Collection[str],
    stepped: Iterable[float],
) -> bool:
    """Whether what stands before a choke is fed while a switch of the core is closed, as a choke is there for.

    stepped: the volts per turn while those of legs are."""
    strokes = [closed for valve in here if valve.closes and (closed := _closed(valve, tied, sources)) is not None]
    strokes += [e for e in stepped if e]
    feeding: dict[str, list[float]] = {}
    for valve in here:
        for end, net, sign in ((valve.anode, valve.cathode, 1), (valve.cathode, valve.anode, -1)):
            if net in choked and net not in tied and end in tied and tied[end][1]:
                feeding.setdefault(net, []).append(sign * tied[end][1])
    return not strokes or all(any(turns * closed > 0 for turns in there for closed in strokes) for there in feeding.values())


def _returns(here: Sequence[Valve], tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> bool:
    """Whether a rectifier that returns energy of the core to its supply does so while no switch is closed, as it is there for."""
    strokes = [closed for valve in here if valve.closes and (closed := _closed(valve, tied, sources)) is not None]
    switched = {end for valve in here if valve.closes for end in (valve.anode, valve.cathode)}
    for valve in here if strokes else ():
        for end, far, sign in ((valve.anode, valve.cathode, 1), (valve.cathode, valve.anode, -1)):
            if valve.closes or end in switched or end not in tied or far not in sources:
                continue
            held, turns = tied[end]
            fed = sources[held].output or sources[far].output or held == far
            if turns and not fed and all(sign * turns * closed > 0 for closed in strokes):
                return False
    return True


def _legs_reach(
    section: Section,
    direction: Mapping[int, int],
    there: Sequence[Valve],
    sources: Mapping[str, Potential],
    legs: Collection[str],
) -> Iterator[float]:
    """The volts per turn that a winding between two legs, or a leg and a held conductor, surely reaches: its power comes so."""
    turns = section.turns * direction[section.winding]
    for one, two, sign in ((section.one, section.two, 1), (section.two, section.one, -1)):
        if one not in sources or two not in sources or not {one, two} & set(legs):
            continue
        up = [sources[valve.cathode] for valve in there if valve.closes and valve.anode == one] if one in legs else [sources[one]]
        down = [sources[valve.anode] for valve in there if valve.closes and valve.cathode == two] if two in legs else [sources[two]]
        for high, low in product(up, down):
            if high.frame == low.frame:
                volts = bottom(minus(high.low, low.high))
                yield sign * max(0.0, volts - min(DROPS.sense, TOLERANCE * volts)) / turns


def on_stroke(way: Way, there: Sequence[Valve], sources: Mapping[str, Potential], choked: Collection[str]) -> int:
    """How many rectifiers would charge a net of unknown voltage while a switch of the core is closed. Such a net follows the
    supply, which no regulated converter is meant to do: of several sets of directions the ones with fewest are meant."""
    strokes = [closed for valve in there if valve.closes and (closed := _closed(valve, way.tied, sources)) is not None]
    count = 0
    for valve in there:
        for end, net, sign in ((valve.anode, valve.cathode, 1), (valve.cathode, valve.anode, -1)):
            if not valve.closes and net not in sources and net not in way.tied and net not in choked and end in way.tied:
                count += any(sign * way.tied[end][1] * closed > 0 for closed in strokes)
    return count


def may_reset(board: Board, way: Way, there: Sequence[Valve], sources: Mapping[str, Potential], around: Around) -> bool:
    """Whether a rectifier into what is not known may be what bounds the core on the side where nothing known does. A core that
    nothing can reset is no converter. What a resistor alone empties counts where rectifiers lead to chokes: they reset nothing."""
    for valve in there:
        for end, far, sign in ((valve.anode, valve.cathode, 1), (valve.cathode, valve.anode, -1)):
            if end not in way.tied or far in sources or far in way.tied or far in around.choked:
                continue
            bounds = way.high if sign * way.tied[end][1] > 0 else way.low
            if math.isinf(bounds) and way.tied[end][1] and (around.choked or _fed_elsewhere(board, far, around.same)):
                return True
    return False


def _fed_elsewhere(board: Board, net: str, same: Mapping[str, str]) -> bool:
    nets = [one for one in board.design.nets if same.get(one, one) == net]
    return any(board.kind(ref) not in _PASSIVE for one in nets for ref in board.fitted_on(one))


def leads_off(
    board: Board, valve: Valve, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential], same: Mapping[str, str]
) -> bool:
    """Whether a switch ties the core to a conductor of unknown voltage that something else feeds: it may drive the core there."""
    if not valve.closes or (valve.anode in tied) == (valve.cathode in tied):
        return False
    end, far = (valve.anode, valve.cathode) if valve.anode in tied else (valve.cathode, valve.anode)
    if far in sources or not tied[end][1]:
        return False
    return _fed_elsewhere(board, far, same)


def _reached(valve: Valve, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> float | None:
    """The volts per turn at which a valve conducts that surely does so in every cycle at full load: a switch closes, and what
    nothing else feeds lives on its rectifier. 0.0 or None where that is not known."""
    one, other = _place(valve.anode, tied, sources), _place(valve.cathode, tied, sources)
    if one is None or other is None or one[0].frame != other[0].frame or one[1] == other[1]:
        return None
    far = valve.cathode if valve.anode in tied and tied[valve.anode][1] else valve.anode
    supplies = far in tied and not tied[far][1]  # a winding hangs on it: it may as well feed the core
    if not valve.closes and (supplies or not (far in sources and sources[far].output)):
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


def _coupling(tie: Tie, tied: Mapping[str, tuple[str, float]], sources: Mapping[str, Potential]) -> tuple[float, float]:
    """Bounds of e that a series capacitor gives between two conductors that both follow otherwise; without bounds else."""
    one, two = _place(tie.one, tied, sources), _place(tie.two, tied, sources)
    if one is None or two is None or one[0].frame != two[0].frame or one[1] == two[1]:
        return -math.inf, math.inf
    apart = bottom(minus(one[0].low, two[0].high)), top(minus(one[0].high, two[0].low))
    low, high = sorted(volts / (two[1] - one[1]) for volts in (apart[0] - tie.high, apart[1] - tie.low))
    return low, high


def _tied(
    sections: list[Section], direction: Mapping[int, int], sources: dict[str, Potential], ties: Sequence[Tie]
) -> dict[str, tuple[str, float]]:
    """Conductor -> (held conductor, turns) for all that sections and series capacitors reach from held ones; what lies behind a
    capacitor is tied to a conductor apart from the held one by its voltage, which is added to the sources."""
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
        for tie in ties:
            for near, far, low, high in ((tie.two, tie.one, tie.low, tie.high), (tie.one, tie.two, -tie.high, -tie.low)):
                if near in tied and far not in tied:
                    held, turns = tied[near]
                    name = f"{held} over {tie.ref}"
                    sources[name] = _over(sources[held], tie, low, high)
                    tied[far] = name, turns
                    changed = True
    return tied


def _over(base: Potential, tie: Tie, low: float, high: float) -> Potential:
    """The potential that a series capacitor sets apart from a held one."""
    step = Step(
        f"{tie.ref} in series has the difference of the means of its two sides, {low:.4g} to {high:.4g} V", (base.step,),
        formula="U_C = mean(one side) - mean(other side)", result=max(abs(low), abs(high)), unit="V", form="dc", citation=CITATION,
    )  # fmt: skip
    return Potential(base.frame, plus(base.low, low), plus(base.high, high), step, held=base.held)


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
    return turns, (valve.drop - least) / turns


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
