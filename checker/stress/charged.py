"""What rectifiers charge from a winding where nothing else tells the voltage: the crest of what the winding adds."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from checker.formulas.waveform import plus
from checker.model.rule import Board
from checker.model.step import Step
from checker.stress.directions import Way
from checker.stress.potential import CITATION, DROPS, SMOOTHING, Potential
from checker.stress.valves import Valve
from checker.stress.windings import Section

CHARGED = 1.3  # crest of a lightly loaded rail over plateau, spikes that charge it (common practice, no source)


def charged(
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
            if known is None or known.swing is None or net in sources or net in nets:
                continue
            if not smoothed(board, net, sources, same):
                continue
            swing = known.swing
            crests = [max(sign * each.turns * e for e in (each.low, each.high)) for each in swing.ways]
            sure = [max(sign * each.turns * e for e in (each.surely_low, each.surely_high)) for each in swing.ways]
            clamping = any(other.closes and end in (other.anode, other.cathode) for other in there)
            most, least = (
                max(crests) * (swing.spike if clamping else min(swing.spike, CHARGED)),
                max(0.0, min(sure) - DROPS.forward),
            )
            low, high = plus(swing.low, least if sign > 0 else -most), plus(swing.high, most if sign > 0 else -least)
            step = Step(
                f"{net} is charged from {end} by a rectifier to the crest of its winding, {least:.4g} V surely, {most:.4g} V with "
                f"spikes at most",
                (known.step,), formula="N x e", result=most, unit="V", form="dc", citation=CITATION,
            )  # fmt: skip
            yield net, Potential(known.frame, low, high, step, held=True, output=True)


def smoothed(board: Board, net: str, sources: Mapping[str, Potential], same: Mapping[str, str]) -> bool:
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


def floating(
    ref: str, wound: list[Section], ways: list[Way], there: list[Valve], sources: Mapping[str, Potential], spike: float
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
