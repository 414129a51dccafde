"""The voltage between two nets that one core moves, out of their limits by its volts per turn."""

from __future__ import annotations

from collections.abc import Sequence
from functools import reduce

from checker.formulas.waveform import Wave, higher, least, lower, minus, plus, top
from checker.stress.potential import Fed, Limits, Line, Potential, Swing


def limits_of(end: Potential, hard: Potential | None, like: Fed | Swing) -> Sequence[Limits] | None:
    """The limits of a net for each set of directions of the core of `like`; of a net that no core moves by what physics alone
    bounds, None when that is nothing."""
    if end.fed is not None:
        return end.fed.ways
    if end.swing is not None:
        lines = [(Line(end.swing.low, end.swing.high, way.turns),) for way in end.swing.ways]
        return [Limits(way, (line,), (line,)) for way, line in zip(end.swing.ways, lines, strict=True)]
    if hard is None:
        return None
    still = (Line(hard.low, hard.high, 0.0),)
    sets = [way.e for way in like.ways] if isinstance(like, Fed) else like.ways
    return [Limits(way, (still,), (still,)) for way in sets]


def furthest(one: Limits, other: Limits, spike: float) -> float:
    """The largest magnitude of the difference. It is convex in e between any two lines, so that its ends count."""
    return max(_above(one, other, spike), _above(other, one, spike))


def _above(one: Limits, other: Limits, spike: float) -> float:
    return min(
        max(
            top(plus(minus(a.high, b.low), (a.turns - b.turns) * e * spike))
            for a in high
            for b in low
            for e in (one.e.low, one.e.high)
        )
        for high in one.above
        for low in other.below
    )


def reached(one: Limits, other: Limits) -> float:
    """The largest magnitude of the difference that is surely reached, at one of the volts per turn which surely are."""
    found = 0.0
    for e in (one.e.surely_low, one.e.surely_high):
        (low, high), (under, over) = _at(one, e), _at(other, e)
        found = max(found, top(least(minus(low, over), minus(high, under))))
    return found


def _at(limits: Limits, e: float) -> tuple[Wave, Wave]:
    low = reduce(higher, (reduce(lower, (plus(line.low, line.turns * e) for line in each)) for each in limits.below))
    high = reduce(lower, (reduce(higher, (plus(line.high, line.turns * e) for line in each)) for each in limits.above))
    return low, high
