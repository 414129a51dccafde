"""Voltages as pairs of bounds: what is surely reached, and what is never exceeded.

Bounds prove a pass, only what is surely reached proves a fail; between the two stands an open verdict.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from checker.model.entry import Entry
from checker.model.step import Step

KINDS = ("steady", "repetitive", "event")


@dataclass(frozen=True, slots=True)
class Bounds:
    """Bounds of a magnitude, V, A or W. surely: the largest that is surely reached, 0.0 when nothing is sure.

    never_above: None when nothing bounds it. form: "dc", "rms", "peak". kind: one of KINDS. step: where both come from.
    """

    surely: float
    never_above: float | None
    step: Step
    unit: str = "V"
    form: str = "peak"
    kind: str = "steady"


@dataclass(frozen=True, slots=True)
class Voltage:
    """The voltage between two nets or two circuits.

    shape: "ac" when it follows the mains and changes sign, "dc" when its sign stays and its value is steady, "mixed" otherwise.
    peak is the largest magnitude of the waveform, rms its r.m.s. value (for "dc" both are the direct voltage).
    frequency: of the fundamental, Hz; 0.0 for "dc", None when nothing tells it. worst: of a maximum over pairs of nets, the pair
    that gives it, or the pair that nothing bounds. spike: of a plateau on a winding, V, what its spikes reach behind a clamp of
    usual design; 0.0 elsewhere.
    """

    rms: Bounds
    peak: Bounds
    shape: str
    frequency: float | None = 0.0
    worst: tuple[str, str] = ("", "")
    spike: float = 0.0


@dataclass(frozen=True, slots=True)
class Stress:
    """What the stress stage found, all in normal use.

    entries, direct_entries: supply entries of the mains and of the hazardous d.c. side, by reference.
    lines: every net that is a line conductor: the poles and what switches, fuses, chokes, limiters carry on from them.
    poles: line conductor -> the pole it belongs to, named by the entry's net ("AC_L"); a net both poles reach is absent.
    between: two nets -> the voltage between them at the highest supply voltage *with* tolerance, None when they are not
    bounded against one another (also: nets of two circuits that nothing ties, unknown nets). For the ratings of parts.
    rated: the same at the highest *rated* supply voltage, without tolerance.
    mean_sign: the same for the means over a switching cycle, which winding ends have even where nothing bounds them.
    sign: two nets -> 1 when the first is surely above the second all the time, -1 when below, 0 when that is not known.
    across: (part, pair of domains) -> working voltage across that bridging part on its own pins, at the rated supply,
    without tolerance, the far side taken as earthed where that is worse, as insulation is judged.
    loose: net on a winding whose voltages nothing bounds -> (the core, the fact that is missing).
    barriers: separation id (`name|name` for two circuits that nothing crosses) -> the same as maximum over every pair of nets of
    its two sides.
    """

    entries: Mapping[str, Entry] = field(default_factory=dict)
    direct_entries: Mapping[str, Entry] = field(default_factory=dict)
    lines: frozenset[str] = frozenset()
    poles: Mapping[str, str] = field(default_factory=dict)
    between: Callable[[str, str], Voltage | None] = lambda one, other: None
    rated: Callable[[str, str], Voltage | None] = lambda one, other: None
    sign: Callable[[str, str], int] = lambda one, other: 0
    mean_sign: Callable[[str, str], int] = lambda one, other: 0
    across: Mapping[tuple[str, tuple[str, str]], Voltage] = field(default_factory=dict)
    barriers: Mapping[str, Voltage] = field(default_factory=dict)
    loose: Mapping[str, tuple[str, str]] = field(default_factory=dict)
