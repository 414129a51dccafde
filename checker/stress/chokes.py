"""Nets that windings feed before a choke, and windings that only rectifiers hold.

Before a choke, the current of which flows on through whichever rectifier can carry it, a net X fed by winding ends W over
rectifiers, with the output U behind the choke, has at every moment

    max(W) - V_F <= X <= max(W, U)

where U counts when the choke runs dry at light load; the same upside down for a negative output. A winding with two or more of its
ends above a held net by rectifiers alone has one of them there while current flows, and so has its other ends the turns between
them above.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from functools import reduce

from checker.formulas.waveform import bottom, higher, lower, plus, top
from checker.model.step import Step
from checker.stress.directions import Way
from checker.stress.potential import CITATION, DROPS, Fed, Limits, Line, Potential, Turns
from checker.stress.valves import Valve


def before_chokes(
    ref: str,
    ways: Sequence[Way],
    there: Sequence[Valve],
    sources: Mapping[str, Potential],
    choked: Mapping[str, str],
    spike: float,
) -> Iterator[tuple[str, Potential]]:
    """The potential of each conductor that rectifiers on a core feed before a choke."""
    for net, far in choked.items():
        for sign in (1, -1):
            limits = [_fed(net, far, way, there, sources, sign) for way in ways]
            if all(limit is not None for limit in limits):
                whole = tuple(limit for limit in limits if limit is not None)
                text = f"rectifiers on {ref} feed {net} before a choke: the furthest of their windings, or {far} when it runs dry"
                base = next(known for known, _ in _feeding(net, ways[0], there, sources, sign))
                yield net, _potential(ref, whole, base, text, spike)
                break


def behind_chokes(
    fed: Mapping[str, Potential], choked: Mapping[str, str], sources: Mapping[str, Potential]
) -> Iterator[tuple[str, Potential]]:
    """Conductors behind chokes that nothing else tells of: between what the winding returns to and the plateau before the choke."""
    for net, far in choked.items():
        if net in fed and far not in sources:
            before = fed[net]
            low, high = lower(before.low, 0.0), higher(before.high, 0.0)
            step = Step(f"{far} is no further than the plateaus of {net} before its choke", (before.step,))
            yield far, Potential(before.frame, low, high, step, held=True, output=True)


def _feeding(
    net: str, way: Way, there: Sequence[Valve], sources: Mapping[str, Potential], sign: int
) -> Iterator[tuple[Potential, Line]]:
    """(what it is tied to, lowest or highest line) of each rectifier end that feeds the net: 1 from below, -1 from above."""
    for valve in there:
        end, at = (valve.anode, valve.cathode) if sign > 0 else (valve.cathode, valve.anode)
        base, turns = way.tied.get(end, (end, 0.0))
        if at == net and end != net and base in sources:
            yield sources[base], _shifted(sources[base], turns, -sign * valve.drop)


def _fed(net: str, far: str, way: Way, there: Sequence[Valve], sources: Mapping[str, Potential], sign: int) -> Limits | None:
    """sign 1: rectifiers feed the net; -1: it feeds them. None when none of them is on the core."""
    feeding = list(_feeding(net, way, there, sources, sign))
    ends = [known for known, _ in feeding] + ([sources[far]] if far in sources else [])
    count = sum(net == (valve.cathode if sign > 0 else valve.anode) for valve in there)
    if not any(line.turns for _, line in feeding) or len({end.frame for end in ends}) != 1 or len(feeding) < count:
        return None
    bounds = tuple((line,) for _, line in feeding)
    held = [_shifted(known, line.turns, 0.0) for known, line in feeding] + [_shifted(end, 0.0, 0.0) for end in ends[len(feeding) :]]
    if far not in sources:  # it is no further than the plateaus
        held += [_furthest(line, way.e, sign) for line in held]
    joint = (tuple(held),)
    return Limits(way.e, joint, bounds) if sign > 0 else Limits(way.e, bounds, joint)


def _furthest(line: Line, e: Turns, sign: int) -> Line:
    """A line that stays where the other is at its furthest, upwards for 1."""
    volts = (max if sign > 0 else min)(line.turns * e.low, line.turns * e.high)
    return Line(plus(line.low, volts), plus(line.high, volts), 0.0)


def _shifted(known: Potential, turns: float, volts: float) -> Line:
    return Line(plus(known.low, volts), plus(known.high, volts), turns)


def between_rectifiers(
    ref: str,
    winding: int,
    nets: Sequence[tuple[str, float]],
    ways: Sequence[Way],
    there: Sequence[Valve],
    sources: Mapping[str, Potential],
    choked: Mapping[str, str],
    spike: float,
) -> Iterator[tuple[str, Potential]]:
    """The conductors of a winding that rectifiers alone hold above one held conductor, and what they feed before a choke.

    nets: (conductor, turns from the winding's first one) in order.
    """
    turns = dict(nets)
    under = {net: {valve.anode for valve in there if valve.cathode == net and valve.anode in sources} for net in turns}
    grounds = sorted({ground for feeding in under.values() for ground in feeding})
    for ground in grounds:
        clamped = [net for net in turns if ground in under[net]]
        taps = [net for net in turns if net in choked]
        above = sorted({valve.cathode for valve in there if valve.anode in turns and valve.cathode in choked})
        if len(clamped) < 2 or not (taps or above):
            continue
        base = sources[ground]
        out = sources.get(choked[(taps or above)[0]])
        if out is not None and out.frame != base.frame:
            continue
        for net in (*turns, *above):
            limits = tuple(
                _held(net, turns, clamped, taps, way, base, out, way.direction.get(winding, 1), net in above) for way in ways
            )
            text = f"{net} is held by rectifiers of a winding of {ref} above {ground}"
            yield net, _potential(ref, limits, base, text, spike)
        return


def _held(
    net: str,
    turns: Mapping[str, float],
    clamped: Sequence[str],
    taps: Sequence[str],
    way: Way,
    base: Potential,
    out: Potential | None,
    direction: int,
    over: bool,
) -> Limits:
    """over: the net is fed by both ends over further rectifiers. out: what is behind the choke, None for unknown."""
    ends = list(turns) if over else [net]
    high = [Line(base.low, base.high, direction * (turns[end] - turns[at])) for end in ends for at in clamped]
    if out is None:
        crests = [_furthest(line, way.e, 1) for line in high]
        out = Potential(base.frame, base.low, reduce(higher, (line.high for line in crests)), base.step)
    high += [Line(out.low, out.high, direction * (turns[end] - turns[tap])) for end in ends for tap in taps]
    high += [Line(out.low, plus(out.high, DROPS.forward), 0.0)]
    drop = DROPS.forward * (1 + over)
    low = [
        (Line(plus(base.low, -drop), plus(base.high, -drop), direction * (turns[end] - turns[at])),)
        for end in ends
        for at in clamped
    ]
    return Limits(way.e, (tuple(high),), tuple(low))


def _potential(ref: str, ways: tuple[Limits, ...], base: Potential, text: str, spike: float) -> Potential:
    low, high = [], []
    for way in ways:
        swung = (way.e.low * spike, way.e.high * spike)
        high.append(reduce(lower, (reduce(higher, (plus(x.high, x.turns * e) for x in each for e in swung)) for each in way.above)))
        low.append(reduce(higher, (reduce(lower, (plus(x.low, x.turns * e) for x in each for e in swung)) for each in way.below)))
    lowest, highest = reduce(lower, low), reduce(higher, high)
    step = Step(
        text,
        (base.step,),
        formula="max(N x e, U)",
        result=max(top(highest), -bottom(lowest)),
        unit="V",
        form="peak",
        citation=CITATION,
    )
    return Potential(base.frame, lowest, highest, step, fed=Fed(ref, ways, spike))
