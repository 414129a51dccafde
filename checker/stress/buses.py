"""The rectified mains: which nets diodes feed from the line, what holds them, and their potential.

A net that diodes feed from poles is held by its smoothing capacitors at the crest of what feeds it, against the net at the
capacitors' other end. One rule gives the bridge (sqrt2 x U), the half wave and the doubler (2 x sqrt2 x U):

    high side:  V(X) = V(R) + max over the cycle of (highest pole that feeds X - V(R))
    low side:   V(Y) = lowest pole that Y feeds, at every moment

where R is the low side, or the pole the capacitors return to.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import reduce

from checker.formulas.waveform import Wave, bottom, higher, lower, minus, plus, top
from checker.model.candidate import Candidate
from checker.model.fact import Fact
from checker.model.rule import Board
from checker.model.step import Step
from checker.model.terminals import bridge, junctions
from checker.stress.potential import DROPS, SMOOTHING, Potential

DROPPER = 4.7e-6  # F; a larger capacitor in the line is none that drops its voltage (common practice, no source)
CITATION = "crest of the line, capacitor input (application notes; recomputed)"


@dataclass(slots=True)
class _Fed:
    """What diodes do for one conductor: poles that feed it, poles that it feeds, the rectifiers."""

    up: dict[str, None] = field(default_factory=dict)
    down: dict[str, None] = field(default_factory=dict)
    parts: dict[str, None] = field(default_factory=dict)


def buses(board: Board, same: Mapping[str, str], line: Mapping[str, Potential]) -> dict[str, Potential]:
    """Conductor -> its potential. same: net -> conductor; line: the poles, each with its own."""
    fed = _fed(board, same, line)
    joined = _capacitors(board, same)
    found: dict[str, Potential] = {}
    pumped = _pumped(board, same, line)
    low = {net: what for net, what in fed.items() if what.down and not what.up and net not in pumped}
    high = {net: what for net, what in fed.items() if what.up and not what.down and net not in pumped}
    for net, what in low.items():
        found[net] = _low_side(board, net, what, line, joined.get(net, {}))
    for net, what in high.items():
        returns = _returns(joined.get(net, {}), found, line) or _in_series(net, joined, found)
        found[net] = _high_side(board, net, what, line, returns, found)
    return found


def behind_diodes(board: Board, same: Mapping[str, str], sources: Mapping[str, Potential]) -> dict[str, Potential]:
    """Conductors that only diodes from held direct voltages feed and a capacitor holds: protection against wrong polarity, two
    supplies of which the higher one feeds."""
    feeding: dict[str, dict[str, str]] = {}
    for ref, candidate in board.choice.items():
        if candidate.kind == "diode" and board.design.parts[ref].fitted:
            for anode, cathode in junctions(board.design.parts[ref]):
                feeding.setdefault(same.get(cathode, cathode), {})[same.get(anode, anode)] = ref
    joined = _capacitors(board, same)
    found = {}
    for net, anodes in feeding.items():
        held = [sources[anode] for anode in anodes if anode in sources and sources[anode].held]
        if net in sources or len(held) < len(anodes) or len({one.frame for one in held}) != 1:
            continue
        if not any(far in sources for far in joined.get(net, {})):
            continue
        refs = ", ".join(anodes.values())
        step = Step(f"{net} is fed by {', '.join(anodes)} over {refs}", tuple(one.step for one in held))
        high = reduce(higher, (one.high for one in held))
        low = plus(reduce(higher, (one.low for one in held)), -DROPS.diode)
        found[net] = Potential(held[0].frame, low, high, step, held=True)
    return found


def _fed(board: Board, same: Mapping[str, str], line: Mapping[str, Potential]) -> dict[str, _Fed]:
    found: dict[str, _Fed] = {}
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if not part.fitted or candidate.kind not in ("bridge", "diode"):
            continue
        for anode, cathode in diodes(board, ref):
            one, other = same.get(anode, anode), same.get(cathode, cathode)
            if one in line and other not in line:
                fed = found.setdefault(other, _Fed())
                fed.up[one], fed.parts[ref] = None, None
            elif other in line and one not in line:
                fed = found.setdefault(one, _Fed())
                fed.down[other], fed.parts[ref] = None, None
    return found


def _pumped(board: Board, same: Mapping[str, str], line: Mapping[str, Potential]) -> frozenset[str]:
    """Nets behind a series capacitor in the line from which a diode or zener leads on: a dropper, which no capacitor holds."""
    behind: set[str] = set()
    leads: set[str] = set()
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if not part.fitted:
            continue
        nets = [same.get(net, net) for net in part.nets()]
        if candidate.kind == "capacitor" and len(nets) == 2 and (nets[0] in line) != (nets[1] in line) and _may_drop(candidate):
            behind.update(net for net in nets if net not in line)
        elif candidate.kind in ("zener", "tvs", "led"):
            leads.update(nets)
        elif candidate.kind in ("diode", "bridge"):
            for ends in diodes(board, ref):
                anode, cathode = (same.get(net, net) for net in ends)
                if anode not in line and cathode not in line:
                    leads.update((anode, cathode))
    return frozenset(behind & leads)


def _may_drop(candidate: Candidate) -> bool:
    """Whether a capacitor can carry the line to a circuit: no electrolytic, and small."""
    technology, value = candidate.attributes.get("technology"), candidate.value
    small = value is not None and float(value.value) <= DROPPER
    return small and (technology is None or technology.value not in ("aluminium", "tantalum", "polymer"))


def diodes(board: Board, ref: str) -> list[tuple[str, str]]:
    """(anode net, cathode net) of each diode in a diode or bridge whose pins tell."""
    part = board.design.parts[ref]
    if board.kind(ref) == "bridge":
        pins = bridge(part)
        if pins is None:
            return []
        high, low, alternating = pins
        return [(net, high) for net in alternating] + [(low, net) for net in alternating]
    return list(junctions(part))


def _capacitors(board: Board, same: Mapping[str, str]) -> dict[str, dict[str, list[str]]]:
    """Conductor -> conductor at the other end of a smoothing capacitor -> the capacitors."""
    found: dict[str, dict[str, list[str]]] = {}
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if candidate.kind != "capacitor" or not part.fitted or len(part.nets()) != 2:
            continue
        if candidate.value is None or float(candidate.value.value) < SMOOTHING:
            continue
        one, other = (same.get(net, net) for net in part.nets())
        if one != other:
            found.setdefault(one, {}).setdefault(other, []).append(ref)
            found.setdefault(other, {}).setdefault(one, []).append(ref)
    return found


def _returns(joined: Mapping[str, list[str]], low: Mapping[str, Potential], line: Mapping[str, Potential]) -> dict[str, Potential]:
    """Conductors that hold `net` through a capacitor and whose potential is known."""
    return {other: known for other in joined if (known := low.get(other) or line.get(other)) is not None}


def _low_side(board: Board, net: str, fed: _Fed, line: Mapping[str, Potential], joined: Mapping[str, list[str]]) -> Potential:
    facts = tuple(board.design.parts[ref].fact for ref in fed.parts)
    refs = ", ".join(fed.parts)
    lowest: Wave = reduce(lower, (line[pole].low for pole in fed.down))
    frame = next(line[pole].frame for pole in fed.down)
    inputs: tuple[Step | Fact, ...] = (*(line[pole].step for pole in fed.down), *facts)
    pole = next((other for other in joined if other in line), None)
    if pole is not None:  # the capacitor holds it below that pole: the lower half of a doubler, or a negative half wave
        depth = -bottom(minus(lowest, line[pole].low))
        step = Step(
            f"{net} is held by {', '.join(joined[pole])} at the crest below {pole} (rectified by {refs})", inputs,
            formula="sqrt(2) x U", result=depth, unit="V", form="dc", citation=CITATION,
        )  # fmt: skip
        low = plus(line[pole].low, -depth)
        return Potential(frame, low, plus(low, DROPS.diode), step, held=True)
    step = Step(f"{net} follows the lower pole of the line through {refs}", inputs, citation=CITATION)
    return Potential(frame, lowest, lowest, step, held=True)


def _high_side(
    board: Board,
    net: str,
    fed: _Fed,
    line: Mapping[str, Potential],
    returns: Mapping[str, Potential],
    low: Mapping[str, Potential],
) -> Potential:
    facts = tuple(board.design.parts[ref].fact for ref in fed.parts)
    refs = ", ".join(fed.parts)
    highest: Wave = reduce(higher, (line[pole].high for pole in fed.up))
    frame = next(line[pole].frame for pole in fed.up)
    inputs: tuple[Step | Fact, ...] = (*(line[pole].step for pole in fed.up), *facts)
    lows = {other: known for other, known in returns.items() if other in low} or returns
    if not lows:
        step = Step(f"{net} follows the higher pole of the line through {refs}", inputs, citation=CITATION)
        return Potential(frame, plus(highest, -DROPS.diode), highest, step)
    other, base = next(iter(lows.items()))
    crest = top(minus(highest, base.low))
    count = 1 + (other in low)
    step = Step(
        f"{net} is held at the crest of the line against {other}; rectified by {refs}", (*inputs, base.step),
        formula="sqrt(2) x U" if other in low else "sqrt(2) x U, half wave", result=crest, unit="V", form="dc", citation=CITATION,
    )  # fmt: skip
    high = plus(base.low, crest)
    return Potential(frame, plus(high, -count * DROPS.diode), high, step, held=True)


def _in_series(net: str, joined: Mapping[str, Mapping[str, list[str]]], low: Mapping[str, Potential]) -> dict[str, Potential]:
    """The low sides that two capacitors in series tie to `net`."""
    middle = joined.get(net, {})
    return {other: known for other, known in low.items() if not middle.keys().isdisjoint(joined.get(other, {}))}
