"""Windings behind capacitors and chokes: what is known from the means over a switching cycle alone.

A winding or an inductor has no direct voltage, so that the nets it joins have one mean. A series capacitor carries no direct
current, so that it has the difference of the means of its two sides:

    U_C = mean(one side) - mean(other side)        (volt-second and charge balance)

which gives the coupling capacitors of isolated SEPIC and Cuk converters and the blocking capacitors of bridges without a name for
any of them. A capacitor that takes part in a resonance does not keep its voltage: small ones are left out, and so are those between
the middle of a switched leg and a winding whose rectifiers have no choke behind them, unless far too large to resonate.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace

from checker.formulas.waveform import bottom, minus, plus, times, top
from checker.model.rule import Board
from checker.model.step import Step
from checker.stress.potential import COUPLING, SMOOTHING, Potential
from checker.stress.valves import Valve

STORED = 0.04  # J, C x U^2; no resonant capacitor of a leg is as large, it would carry 4 kW at 100 kHz (common practice, no source)
_WOUND = frozenset({"transformer", "inductor", "gate-drive-transformer"})


@dataclass(frozen=True, slots=True)
class Tie:
    """`one` is low to high volts above `two`, kept by the capacitor ref."""

    one: str
    two: str
    low: float
    high: float
    ref: str


@dataclass(slots=True)
class Coupled:
    """held: conductor that a capacitor keeps at the mean of its winding -> its potential. ties: capacitors between two conductors
    of which neither is held. behind: conductor between a series choke and a winding -> the one at the choke's other end.
    even: those of `held` that two equal capacitors divide -> where they are while the switches of the leg close for equal times.
    """

    held: dict[str, Potential] = field(default_factory=dict)
    ties: list[Tie] = field(default_factory=list)
    behind: dict[str, str] = field(default_factory=dict)
    even: dict[str, Potential] = field(default_factory=dict)


def chokes(board: Board, sources: Mapping[str, Potential], same: Mapping[str, str], valves: Sequence[Valve]) -> dict[str, str]:
    """Conductor that rectifiers feed, or a winding's tap, before an inductor -> the conductor behind that inductor, which something
    or a capacitor holds."""
    fed = {end for valve in valves for end in (valve.anode, valve.cathode)} | set(_on(board, same, {"transformer"}))
    smoothed = {
        net
        for one, two, ref in _two_ended(board, same, "capacitor")
        if (value := board.choice[ref].value) is not None and float(value.value) >= SMOOTHING
        for net, far in ((one, two), (two, one))
        if far in sources and net not in sources
    }
    found = {}
    for one, other, _ in _two_ended(board, same, "inductor"):
        for near, far in ((one, other), (other, one)):
            if near in fed and near not in sources and (far in smoothed or (far in sources and sources[far].output)):
                found[near] = far
    return found


def coupled(
    board: Board,
    ref: str,
    sources: Mapping[str, Potential],
    legs: Collection[str],
    same: Mapping[str, str],
    valves: Sequence[Valve],
    choked: Collection[str],
) -> Coupled:
    """What capacitors and chokes in series with the windings of a core do. legs: those of the sources that switches move."""
    found = Coupled()
    ends = {same.get(net, net) for net in board.design.parts[ref].nets()}
    soft = _into_capacitors(ends, sources, valves, choked)
    means = _means(board, sources, legs, same)
    for one, two, capacitor in _two_ended(board, same, "capacitor"):
        value = board.choice[capacitor].value
        if value is None or float(value.value) < COUPLING or not {one, two} & ends - sources.keys() or one == two:
            continue
        if one not in means or two not in means or means[one].frame != means[two].frame:
            continue
        apart = minus(means[one].low, means[two].high), minus(means[one].high, means[two].low)
        low, high = bottom(apart[0]), top(apart[1])
        if (
            soft
            and any(means[net] is sources[leg] for net in (one, two) for leg in legs)
            and float(value.value) * max(abs(low), abs(high)) ** 2 < STORED
        ):
            continue
        if one in sources or two in sources:
            near, far, sign = (one, two, -1) if one in sources else (two, one, 1)
            if near not in legs:
                base = sources[near]
                step = Step(
                    f"{capacitor} keeps {far} at the mean of what its winding hangs on", (base.step, means[far].step),
                    formula="U_C = mean(one side) - mean(other side)", result=high if sign > 0 else -low, unit="V", form="dc",
                )  # fmt: skip
                volts = (low, high) if sign > 0 else (-high, -low)
                found.held[far] = Potential(base.frame, plus(base.low, volts[0]), plus(base.high, volts[1]), step)
                continue
        found.ties.append(Tie(one, two, low, high, capacitor))
    for net, known in found.held.items():
        halves = [(farad, other) for farad, other in _capacitors(board, same, net) if other in sources and other not in legs]
        rails = [sources[other] for _, other in halves]
        if len(halves) == 2 and halves[0][0] == halves[1][0] and rails[0].frame == rails[1].frame:
            lowest, highest = plus(rails[0].low, rails[1].low), plus(rails[0].high, rails[1].high)
            found.even[net] = replace(known, low=times(lowest, 0.5), high=times(highest, 0.5))
    if not soft:
        found.behind.update(_behind(board, ends, legs, sources, same))
    return found


def _into_capacitors(
    ends: Collection[str], sources: Mapping[str, Potential], valves: Sequence[Valve], choked: Collection[str]
) -> bool:
    """Whether a rectifier of the core leads straight to or from what a capacitor holds: the core may be resonant."""
    for valve in valves:
        for end, far in ((valve.anode, valve.cathode), (valve.cathode, valve.anode)):
            if end in ends and end not in sources and end not in choked and far in sources and sources[far].output:
                return True
        if valve.cathode in ends and valve.cathode not in choked and valve.anode in sources:
            taps = [net for net in ends if net in sources and sources[net].output]
            if taps:
                return True
    return False


def _capacitors(board: Board, same: Mapping[str, str], net: str) -> Iterator[tuple[float, str]]:
    """(farad, conductor at the other end) of each capacitor on a conductor that may divide a voltage."""
    for one, two, ref in _two_ended(board, same, "capacitor"):
        value = board.choice[ref].value
        if net in (one, two) and value is not None and float(value.value) >= COUPLING:
            yield float(value.value), two if one == net else one


def _two_ended(board: Board, same: Mapping[str, str], kind: str) -> Iterator[tuple[str, str, str]]:
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if candidate.kind == kind and part.fitted and len(part.nets()) == 2:
            one, two = (same.get(net, net) for net in part.nets())
            yield one, two, ref


def _on(board: Board, same: Mapping[str, str], kinds: Collection[str]) -> Iterator[str]:
    for ref, candidate in board.choice.items():
        if candidate.kind in kinds and board.design.parts[ref].fitted:
            yield from (same.get(net, net) for net in board.design.parts[ref].nets())


def _means(board: Board, sources: Mapping[str, Potential], legs: Collection[str], same: Mapping[str, str]) -> dict[str, Potential]:
    """Conductor -> the bounds of its mean: its own when it is held, else that of the one held conductor which windings and
    inductors join it with, else of a leg they join it with."""
    joined: dict[str, set[str]] = {}
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if candidate.kind not in _WOUND or not part.fitted:
            continue
        at = {pin.number: same.get(pin.net, pin.net) for pin in part.pins if pin.net is not None}
        groups = [[at[pin] for pin in winding.pins if pin in at] for winding in candidate.windings]
        if not candidate.windings and len(at) == 2:
            groups = [list(at.values())]
        for group in groups:
            for net in group:
                joined.setdefault(net, set()).update(group)
    found: dict[str, Potential] = dict(sources)
    seen: set[str] = set()
    for start in joined:
        if start in seen:
            continue
        island, stack = set(), [start]
        while stack:
            at_net = stack.pop()
            if at_net in island:
                continue
            island.add(at_net)
            if at_net not in sources or at_net in legs:
                stack.extend(joined.get(at_net, ()))
            else:
                stack.extend(net for net in joined.get(at_net, ()) if net not in sources)
        seen |= {net for net in island if net not in sources}
        held = [sources[net] for net in sorted(island) if net in sources and net not in legs]
        moved = [sources[net] for net in sorted(island) if net in legs]
        for known in (held[:1] if len(held) == 1 else []) or (moved[:1] if not held else []):
            found.update({net: known for net in island if net not in sources or net in legs})
    return found


def _behind(
    board: Board, ends: Collection[str], legs: Collection[str], sources: Mapping[str, Potential], same: Mapping[str, str]
) -> Iterator[tuple[str, str]]:
    """A choke between a switched leg and a winding, in which leakage would do the same: its plateau is the leg's."""
    capacitive = {
        net
        for one, two, ref in _two_ended(board, same, "capacitor")
        if (value := board.choice[ref].value) is not None and float(value.value) >= SMOOTHING
        for net in (one, two)
    }
    for one, two, _ in _two_ended(board, same, "inductor"):
        for near, far in ((one, two), (two, one)):
            if near in ends and near not in sources and near not in capacitive and far in legs:
                yield near, far
