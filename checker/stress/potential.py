"""The potential of a net against the reference of its frame, as two waves with the step they come from."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

from checker.formulas.waveform import Wave, bottom, top
from checker.model.step import Step

CITATION = "equal volts per turn, mean zero over a cycle (published method)"


class Turns(NamedTuple):
    """Of one set of winding directions. turns: with their sign. low <= volts per turn <= high at every moment of a switching
    cycle, spikes aside; surely_low, surely_high: reached in every cycle at full load, 0.0 when nothing is sure."""

    turns: float
    low: float
    high: float
    surely_low: float = 0.0
    surely_high: float = 0.0


@dataclass(frozen=True, slots=True)
class Swing:
    """What a winding adds to a potential: turns x volts per turn, whose mean over a switching cycle is zero.

    low, high: the potential without it. ways: one for each set of winding directions that the circuit allows; one core has the
    same sets for all its nets, in the same order. apart: what it is added to is held, so that the two go their own ways and their
    mean squares add; else only their r.m.s. values do. spike: peak over plateau.
    """

    core: str
    low: Wave
    high: Wave
    ways: tuple[Turns, ...]
    apart: bool = True
    spike: float = 1.0


class Line(NamedTuple):
    """low + turns x e .. high + turns x e: a potential by the volts per turn e of a core."""

    low: Wave
    high: Wave
    turns: float


class Limits(NamedTuple):
    """Of one set of winding directions. e: the range of the volts per turn. above: each member is an upper bound, the highest of
    its lines; below: each member is a lower bound, the lowest of its lines."""

    e: Turns
    above: tuple[tuple[Line, ...], ...]
    below: tuple[tuple[Line, ...], ...]


@dataclass(frozen=True, slots=True)
class Fed:
    """How a net that rectifiers feed from windings follows the core. ways: as those of the swings of that core."""

    core: str
    ways: tuple[Limits, ...]
    spike: float


@dataclass(frozen=True, slots=True)
class Potential:
    """low <= potential <= high at every moment of the mains cycle, V against the reference of `frame`, in normal use at the
    highest supply voltage.

    held: something holds the net at a steady potential (a supply, a smoothing capacitor). output: it lives on what the board
    transforms or regulates, no supply feeds it. swing: what a winding has in low and high, None for a net on none. fed: how it
    follows a core whose rectifiers feed it before a choke, None elsewhere.
    """

    frame: str
    low: Wave
    high: Wave
    step: Step
    held: bool = False
    output: bool = False
    swing: Swing | None = None
    fed: Fed | None = None

    @property
    def bounded(self) -> bool:
        """Whether both bounds are finite."""
        return math.isfinite(top(self.high)) and math.isfinite(bottom(self.low))


NOWHERE_STEP = Step("nothing bounds it")


@dataclass(frozen=True, slots=True)
class Drops:
    """Usual drops of a conducting part, V (common practice, no source): what `surely reached` must leave out."""

    diode: float = 1.2  # one rectifier diode at surge current
    forward: float = 1.5  # a clamping diode while it conducts
    schottky: float = 0.9  # the same for a Schottky diode
    sense: float = 5.0  # across a sense resistor of at most SENSE ohm
    light: float = 6.0  # across a light-emitting diode of a coupler or lamp, either way round


DROPS = Drops()
SENSE = 10.0  # ohm; at most this much in series with a switch is a sense resistor (common practice, no source)
SERIES = 100.0  # ohm; at most this much in a line conductor limits inrush and carries the line on (common practice, no source)
COUPLING = 1e-6  # F; a capacitor in series with a winding from here on keeps its voltage over a cycle (common practice, no source)
SMOOTHING = 47e-9  # F; from here on a capacitor holds a rectified voltage (common practice, no source)
