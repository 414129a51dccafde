"""From the nets whose potential something fixes to all the others: the interval each of them can lie in.

Twice: what holds whatever the parts are rated for, and what holds in normal use, where every part keeps within its rating.
The first proves that a voltage is never exceeded; the second says what is surely reached, and how far apart two circuits
are in normal use, which is what insulation is judged by.
"""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass, field
from functools import reduce

from checker.formulas.waveform import Wave, bottom, higher, lower, plus, top
from checker.model.step import Step
from checker.stress.potential import Potential
from checker.stress.pulls import Pulls

ROUNDS = 3  # how far a rating reaches from a bounded net; each round is sound by itself


@dataclass(slots=True)
class Field:
    """Potentials by conductor. sure: by physics alone; usual: in normal use, within or equal to `sure`."""

    sure: dict[str, Potential] = field(default_factory=dict)
    usual: dict[str, Potential] = field(default_factory=dict)


def spread(
    sources: Mapping[str, Potential],
    line: Collection[str],
    pulls: Pulls,
    frame_of: Callable[[str], str | None],
    wound: Mapping[str, Potential],
) -> Field:
    """The potential of every conductor of `pulls`. line: those sources that follow the line, which moves what a capacitor ties
    to it. frame_of: conductor -> its frame, None for one without a domain. wound: conductors on windings, in normal use."""
    moving = {net for net in pulls.agile if net not in sources} | set(line)
    swings = set(pulls.swings)
    for one, other in pulls.coupled:
        swings.update(far for net, far in ((one, other), (other, one)) if net in moving)
    sure = _pulled_from(sources, pulls, swings, frame_of)
    found = Field({**sources, **sure}, {**sources, **sure, **wound})
    if wound:
        near = _pulled_from({**sources, **wound}, pulls, swings - wound.keys(), frame_of)
        for field_ in (found.sure, found.usual):
            _fill(field_, near)
    if loads := _loads(pulls, sources, line):
        _fill(found.usual, _pulled_from({**sources, **wound, **loads}, pulls, swings - wound.keys() - loads.keys(), frame_of))
        found.usual.update(loads)
    _by_ratings(found, pulls, sources, swings, frame_of)
    return found


def _fill(known: dict[str, Potential], more: Mapping[str, Potential]) -> None:
    """Adds what is bounded where nothing bounded it before."""
    known.update({net: one for net, one in more.items() if one.bounded and not _is_bounded(known.get(net))})


def _is_bounded(known: Potential | None) -> bool:
    return known is not None and known.bounded


def _pulled_from(
    sources: Mapping[str, Potential], pulls: Pulls, swings: Collection[str], frame_of: Callable[[str], str | None]
) -> dict[str, Potential]:
    """Every other conductor -> what the sources can pull it to, where they bound it at least one way."""
    nets = dict.fromkeys((*pulls.up, *pulls.down, *pulls.above, *pulls.below, *swings))
    high = _reached(sources, pulls.up, pulls.above, swings, nets, 1)
    low = _reached(sources, pulls.down, pulls.below, swings, nets, -1)
    found = {}
    for net in nets:
        frame = frame_of(net)
        if net in sources or frame is None or net.startswith(" "):
            continue
        (above, highest), (below, lowest) = high[net], low[net]
        ends = [sources[name] for name in dict.fromkeys((lowest, highest)) if name in sources]
        if not ends or any(end.frame != frame for end in ends):
            continue
        found[net] = Potential(frame, below, above, _between(net, lowest, highest, ends))
    return found


def _between(net: str, lowest: str, highest: str, ends: Sequence[Potential]) -> Step:
    steps = tuple(end.step for end in ends)
    if not lowest or not highest:
        return Step(
            f"{net} can be pulled {'up' if highest else 'down'} to {highest or lowest}; nothing bounds it the other way", steps
        )
    return Step(f"{net} lies between {lowest} and {highest}: only ordinary parts reach it", steps)


def _reached(
    sources: Mapping[str, Potential],
    edges: Mapping[str, list[str]],
    clamps: Mapping[str, list[tuple[str, float]]],
    swings: Collection[str],
    nets: Mapping[str, None],
    sign: int,
) -> dict[str, tuple[Wave, str]]:
    """Conductor -> (the extreme potential that something can pull it to, the source that pulls furthest, "" for no bound).

    sign 1: highest, by `up` edges; -1: lowest, by `down` edges.
    """
    end = math.inf * sign
    further, nearer = (higher, lower) if sign > 0 else (lower, higher)
    extreme = top if sign > 0 else bottom
    known: dict[str, tuple[Wave, str]] = {net: (source.high if sign > 0 else source.low, net) for net, source in sources.items()}
    back: dict[str, list[str]] = {}
    for net, pulling in edges.items():
        for other in pulling:
            back.setdefault(other, []).append(net)
    limits = {
        net: [(plus(known[other][0], sign * volts), other) for other, volts in there if other in sources and sources[other].held]
        for net, there in clamps.items()
        if net not in sources
    }

    def clamped(net: str, wave: Wave, by: str) -> tuple[Wave, str]:
        for limit, other in limits.get(net, ()):
            if extreme(wave) * sign > extreme(limit) * sign:
                by = other
            wave = nearer(wave, limit)
        return wave, by

    queue: deque[str] = deque()
    for net in swings:
        if net not in sources:
            known[net] = clamped(net, end, "")
            queue.append(net)
    queue.extend(net for net in sources)
    while queue:
        at = queue.popleft()
        wave, by = known[at]
        for net in back.get(at, ()):
            if net in sources:
                continue
            old = known.get(net)
            if old is None:
                made = clamped(net, wave, by)
            else:
                joint = further(old[0], wave)
                if joint == old[0]:
                    continue
                made = clamped(net, joint, by if extreme(wave) * sign >= extreme(old[0]) * sign else old[1])
                if made[0] == old[0]:
                    continue
            known[net] = made
            queue.append(net)
    return {net: known.get(net) or clamped(net, end, "") for net in nets}


def _loads(pulls: Pulls, sources: Mapping[str, Potential], line: Collection[str]) -> dict[str, Potential]:
    """A contact beside a conductor of the line carries a load on the line, which in normal use leaves it between the conductors."""
    found = {}
    for contacts in pulls.plugged:
        poles = [sources[net] for net in contacts if net in line and net in sources]
        if not poles or any(pole.frame != poles[0].frame for pole in poles):
            continue
        for net in contacts:
            if net in sources:
                continue
            ends = [source for name, source in sources.items() if name in line and source.frame == poles[0].frame]
            because = f"in normal use {net} carries a load of the line and stays between its conductors"
            step = Step(because, tuple(end.step for end in ends[:2]))
            low, high = reduce(lower, (end.low for end in ends)), reduce(higher, (end.high for end in ends))
            found[net] = Potential(poles[0].frame, low, high, step)
    return found


def _by_ratings(
    found: Field, pulls: Pulls, sources: Mapping[str, Potential], swings: set[str], frame_of: Callable[[str], str | None]
) -> None:
    """Narrows what physics alone does not bound by its neighbours, and every net by what the parts on it are rated for."""
    loose = {
        net: frame
        for net in dict.fromkeys((*pulls.up, *pulls.down))
        if net not in sources and net not in swings and not _is_bounded(found.sure.get(net)) and (frame := frame_of(net))
    }
    for _ in range(ROUNDS):
        changed = False
        for net, frame in loose.items():
            changed |= _pulled(found, pulls, net, frame)
        for one, other, volts, back in pulls.usual:
            for net, far, up, down in ((one, other, volts, back), (other, one, back, volts)):
                changed |= _narrowed(found, sources, net, far, up, down)
        if not changed:
            return


def _narrowed(found: Field, sources: Mapping[str, Potential], net: str, far: str, up: float, down: float) -> bool:
    """Keeps `net` within `up` above and `down` below `far`, where that is nearer than what bounded it before."""
    there, known = found.usual.get(far), found.usual.get(net)
    if there is None or net in sources:
        return False
    if known is None:
        known = Potential(there.frame, -math.inf, math.inf, there.step)
    if known.frame != there.frame:
        return False
    high = plus(there.high, up) if top(there.high) + up < top(known.high) else known.high
    low = plus(there.low, -down) if bottom(there.low) - down > bottom(known.low) else known.low
    if high is known.high and low is known.low:
        return False
    step = Step(
        f"in normal use {net} keeps within {max(up, down):g} V of {far}, for which a part between them is rated", (there.step,)
    )
    found.usual[net] = Potential(known.frame, low, high, step, swing=known.swing, fed=known.fed)
    return True


def _pulled(found: Field, pulls: Pulls, net: str, frame: str) -> bool:
    """Bounds a conductor by those that pull it, where these are bounded nearer in normal use than it is itself."""
    known = found.usual.get(net)
    high, low, ends = (math.inf, -math.inf, list[Potential]()) if known is None else (known.high, known.low, list[Potential]())
    pulling = _neighbours(found, pulls.up, net, frame)
    if pulling:
        reached = reduce(higher, (other.high for other in pulling))
        if top(reached) < top(high):
            high, ends = reached, [*ends, *pulling]
    pulling = _neighbours(found, pulls.down, net, frame)
    if pulling:
        reached = reduce(lower, (other.low for other in pulling))
        if bottom(reached) > bottom(low):
            low, ends = reached, [*ends, *pulling]
    if not ends:
        return False
    step = Step(f"in normal use {net} lies between what it hangs on", tuple(end.step for end in ends[:2]))
    found.usual[net] = Potential(frame, low, high, step)
    return True


def _neighbours(found: Field, edges: Mapping[str, list[str]], net: str, frame: str) -> list[Potential]:
    """The potentials of all that pull a conductor, through hubs; empty when one of them is not known."""
    seen, stack, there = {net}, list(edges.get(net, ())), []
    while stack:
        at = stack.pop()
        if at in seen:
            continue
        seen.add(at)
        if at.startswith(" "):
            stack.extend(edges.get(at, ()))
            continue
        known = found.usual.get(at)
        if known is None or known.frame != frame:
            return []
        there.append(known)
    return there
