"""Voltages over one cycle of the mains, as samples: what a net does while the line goes round.

A `Wave` is a float (the same all the cycle) or SAMPLES floats. A quantity that is only known between bounds is a pair of
waves, lower and upper; `-inf` and `inf` stand for no bound.
"""

from __future__ import annotations

import math

SAMPLES = 48  # a multiple of 12: peaks, zeros and the three phases of a sine all fall on samples
Wave = float | tuple[float, ...]


def sine(amplitude: float, phase: float = 0.0) -> Wave:
    """A sine of that amplitude, `phase` in parts of a cycle; exact zero and peak on its quarter points.

    >>> wave = sine(325.0); wave[0], wave[SAMPLES // 4]
    (0.0, 325.0)
    """
    found = []
    for at in range(SAMPLES):
        quarter = 4 * (at / SAMPLES + phase)
        found.append(amplitude * float(round(_sine_of(quarter), 15)))
    return tuple(found)


def _sine_of(quarter: float) -> float:
    return math.sin(quarter * math.pi / 2)


def plus(one: Wave, other: Wave) -> Wave:
    """The sum, sample by sample."""
    if isinstance(one, tuple):
        return tuple(a + b for a, b in zip(one, other, strict=True)) if isinstance(other, tuple) else tuple(a + other for a in one)
    return tuple(one + b for b in other) if isinstance(other, tuple) else one + other


def minus(one: Wave, other: Wave) -> Wave:
    """The difference, sample by sample."""
    if isinstance(one, tuple):
        return tuple(a - b for a, b in zip(one, other, strict=True)) if isinstance(other, tuple) else tuple(a - other for a in one)
    return tuple(one - b for b in other) if isinstance(other, tuple) else one - other


def times(wave: Wave, factor: float) -> Wave:
    """The wave scaled; no bound stays no bound, also with the factor 0."""
    if isinstance(wave, tuple):
        return tuple(value * factor for value in wave)
    if math.isinf(wave):
        return math.copysign(math.inf, wave * (factor or 1.0))
    return wave * factor


def higher(one: Wave, other: Wave) -> Wave:
    """The larger of the two, sample by sample."""
    if one is other or (isinstance(other, float) and other == -math.inf):
        return one
    if isinstance(one, tuple):
        return tuple(map(max, one, other)) if isinstance(other, tuple) else tuple(max(a, other) for a in one)
    return tuple(max(one, b) for b in other) if isinstance(other, tuple) else max(one, other)


def lower(one: Wave, other: Wave) -> Wave:
    """The smaller of the two, sample by sample."""
    if one is other or (isinstance(other, float) and other == math.inf):
        return one
    if isinstance(one, tuple):
        return tuple(map(min, one, other)) if isinstance(other, tuple) else tuple(min(a, other) for a in one)
    return tuple(min(one, b) for b in other) if isinstance(other, tuple) else min(one, other)


def top(wave: Wave) -> float:
    """The highest value of the cycle."""
    return max(wave) if isinstance(wave, tuple) else wave


def bottom(wave: Wave) -> float:
    """The lowest value of the cycle."""
    return min(wave) if isinstance(wave, tuple) else wave


def mean(wave: Wave) -> float:
    """The mean over the cycle."""
    return sum(wave) / len(wave) if isinstance(wave, tuple) else wave


def rms(wave: Wave) -> float:
    """The r.m.s. value over the cycle; exact for sums of a constant and sines, since the samples are evenly spaced.

    >>> round(rms(sine(325.0)), 6) == round(325.0 / math.sqrt(2), 6)
    True
    """
    if isinstance(wave, tuple):
        return math.sqrt(sum(value * value for value in wave) / len(wave))
    return abs(wave)


def largest(low: Wave, high: Wave) -> Wave:
    """The largest magnitude that a quantity between the two bounds can have, sample by sample."""
    return higher(high, times(low, -1.0))


def least(low: Wave, high: Wave) -> Wave:
    """The smallest magnitude that a quantity between the two bounds must have, sample by sample; 0 where it may be zero."""
    return higher(higher(low, times(high, -1.0)), 0.0)
