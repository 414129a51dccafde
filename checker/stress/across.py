"""Working voltages across barriers: what lies between the two sides in normal use at the rated supply.

Two circuits have no common reference, so one is chosen for each: a pole of the supply at earth, either of them, and the
far side tied to earth at its return or at one of its rails, whichever gives most (IEC 62368-1 5.4.1.8, from memory: a
floating circuit is taken as earthed where that gives the highest value). A primary net p and a secondary net s then have

    v(t) = p(t) - pole(t) - (s(t) - earthed point(t))
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import product

from checker.formulas.waveform import Wave, bottom, largest, least, minus, plus, rms, top
from checker.model.rule import Board
from checker.model.separation import Separation
from checker.model.step import Step
from checker.model.stress import Bounds, Voltage
from checker.stress.between import NONE, Voltages
from checker.stress.potential import Potential, Swing, Turns

CITATION = "IEC 62368-1 5.4.1.8 (from memory)"
PAIRS = 2500  # pairs of nets of a barrier that are looked at one by one; beyond that its bridging parts stand for it


@dataclass(frozen=True, slots=True)
class _Extremes:
    """Of one pair of nets over every choice of earth: r.m.s. and peak, surely and at most (inf for no bound)."""

    surely_rms: float
    surely_peak: float
    rms: float
    peak: float


class Across:
    """Working voltages between nets of two domains. earths: nets of each domain that may be at earth."""

    def __init__(self, board: Board, rated: Voltages, earths: Mapping[str, Sequence[str]], frequency: float):
        self._board, self._rated, self._frequency = board, rated, frequency
        self._earths = {
            name: tuple(known.low for net in nets if (known := rated.potential(net, usual=True)) is not None and known.bounded)
            for name, nets in earths.items()
        }
        self._numbers: dict[tuple[tuple[Wave, ...], ...], int] = {}
        self._known: dict[tuple[Wave, Wave, Swing | None, Wave, Wave, Swing | None, int], _Extremes] = {}

    def parts(self) -> Iterator[tuple[tuple[str, tuple[str, str]], Voltage]]:
        """((reference, pair of domains), voltage) of each bridging part on its own pins; a chain member has the whole of it."""
        domain_of = self._board.isolation.domain_of
        chains: dict[tuple[tuple[str, ...], tuple[str, str]], Voltage | None] = {}
        for crossing in self._board.isolation.crossings:
            key = crossing.chain, crossing.between
            if key not in chains:
                nets = dict.fromkeys(net for ref in crossing.chain for net in self._board.design.parts[ref].nets())
                one, two = ([net for net in nets if domain_of.get(net) == name] for name in crossing.between)
                chains[key] = self.between(one, two, crossing.between)
            found = chains[key]
            if found is not None:
                yield (crossing.part, crossing.between), found

    def barrier(self, separation: Separation, parts: Mapping[tuple[str, tuple[str, str]], Voltage]) -> Voltage | None:
        """The highest between any two nets of its sides; where there are too many of them, of the parts across it."""
        one, two = (self._board.isolation.domains[name].nets for name in separation.between)
        if len(one) * len(two) <= PAIRS:
            return self.pair(separation.between)
        there = [parts.get((ref, separation.between)) for ref in separation.bridged_by]
        found = [voltage for voltage in there if voltage is not None]
        if len(found) < len(there) or not found:
            return None
        return max(found, key=lambda voltage: voltage.peak.never_above or math.inf)

    def pair(self, domains: tuple[str, str]) -> Voltage | None:
        """The highest between any two nets of two circuits; None where there are too many to look at."""
        one, two = (self._board.isolation.domains[name].nets for name in domains)
        return self.between(one, two, domains) if len(one) * len(two) <= PAIRS else None

    def between(self, one: Iterable[str], two: Iterable[str], domains: tuple[str, str]) -> Voltage | None:
        """The highest voltage between any net of `one` and any of `two`; None when nothing bounds it and nothing is sure."""
        total = _Extremes(0.0, 0.0, 0.0, 0.0)
        worst: tuple[str, str, tuple[Step, ...]] = ("", "", ())
        for first, second in product(one, two):
            found, steps = self._pair(first, second, domains)
            if found.peak >= total.peak and (found.peak > total.peak or not worst[0]):
                worst = first, second, steps
            total = _Extremes(*(max(getattr(total, name), getattr(found, name)) for name in _Extremes.__slots__))
        if not worst[0] or (math.isinf(total.peak) and total.surely_peak < NONE):
            return None
        return self._voltage(total, worst, domains)

    def _pair(self, first: str, second: str, domains: tuple[str, str]) -> tuple[_Extremes, tuple[Step, ...]]:
        one, two = self._rated.potential(first, usual=True), self._rated.potential(second, usual=True)
        if one is None or two is None:
            return _Extremes(0.0, 0.0, math.inf, math.inf), ()
        return self._extremes(one, two, domains), (one.step, two.step)

    def _extremes(self, one: Potential, two: Potential, domains: tuple[str, str]) -> _Extremes:
        choices = tuple(self._earths.get(name) or (0.0,) for name in domains)
        number = self._numbers.setdefault(choices, len(self._numbers))
        key = (one.low, one.high, one.swing, two.low, two.high, two.swing, number)
        if key not in self._known:
            found = [_at(one, two, earth, tied) for earth, tied in product(*choices)]
            self._known[key] = _Extremes(*(max(getattr(each, name) for each in found) for name in _Extremes.__slots__))
        return self._known[key]

    def _voltage(self, total: _Extremes, worst: tuple[str, str, tuple[Step, ...]], domains: tuple[str, str]) -> Voltage:
        first, second, steps = worst
        facts = tuple(self._board.design.nets[net].fact for net in (first, second))
        bounded = math.isfinite(total.peak)
        made = []
        for form, surely, most in (("rms", total.surely_rms, total.rms), ("peak", total.surely_peak, total.peak)):
            if bounded:
                text = f"working voltage between {first} and {second}, the worst pair: at most {most:.4g} V"
            else:
                text = f"nothing bounds the working voltage between {first} and {second}"
            step = Step(
                f"{text}, surely {surely:.4g} V ({form}), either pole of the supply and any rail of the far side at earth",
                (*steps, *facts), result=most if bounded else None, unit="V", form=form, citation=CITATION,
            )  # fmt: skip
            made.append(Bounds(surely, most if bounded else None, step, form=form))
        return Voltage(made[0], made[1], "mixed", self._frequency, (first, second))


def _at(one: Potential, two: Potential, earth: Wave, tied: Wave) -> _Extremes:
    """Between two nets with these points of theirs at earth."""
    low = minus(minus(one.low, earth), minus(two.high, tied))
    high = minus(minus(one.high, earth), minus(two.low, tied))
    sure, most = least(low, high), largest(low, high)
    if not math.isfinite(top(most)):
        return _Extremes(rms(sure), top(sure), math.inf, top(most))
    if one.swing is None and two.swing is None:
        return _Extremes(rms(sure), top(sure), rms(most), top(most))
    rest = [(swing.low, swing.high) if (swing := each.swing) is not None else (each.low, each.high) for each in (one, two)]
    low = minus(minus(rest[0][0], earth), minus(rest[1][1], tied))
    high = minus(minus(rest[0][1], earth), minus(rest[1][0], tied))
    still, swinging = least(low, high), _swinging(one.swing, two.swing)
    apart = all(swing is None or swing.apart for swing in (one.swing, two.swing))
    whole = math.hypot(rms(largest(low, high)), swinging) if apart else rms(largest(low, high)) + swinging
    peak = min(top(most), _together(low, high, one.swing, two.swing))
    return _Extremes(rms(still), top(still), min(whole, peak), peak)


def _together(low: Wave, high: Wave, one: Swing | None, two: Swing | None) -> float:
    """The highest peak of two nets of one core, which swing together: base + (N1 - N2) x e, with its spikes; else no bound."""
    if one is None or two is None or one.core != two.core:
        return math.inf
    found = 0.0
    for first, second in zip(one.ways, two.ways, strict=True):
        for volts in (one.spike * (first.turns - second.turns) * e for e in (first.low, first.high)):
            found = max(found, top(plus(high, volts)), -bottom(plus(low, volts)))
    return found


def _swinging(one: Swing | None, two: Swing | None) -> float:
    """The highest r.m.s. value that windings add to a difference: |N| x sqrt(-e_low x e_high), for one core of its own N1 - N2."""
    if one is not None and two is not None and one.core == two.core:
        pairs = zip(one.ways, two.ways, strict=True)
        return max(_rms(way, way.turns - other.turns) for way, other in pairs)
    return sum(max(_rms(way, way.turns) for way in swing.ways) for swing in (one, two) if swing)


def _rms(way: Turns, turns: float) -> float:
    return abs(turns) * math.sqrt(max(0.0, -way.low * way.high))
