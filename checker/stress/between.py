"""The voltage between two nets, out of their potentials."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from checker.formulas.waveform import Wave, bottom, higher, largest, least, lower, mean, minus, plus, rms, times, top
from checker.model.rule import Board
from checker.model.step import Step
from checker.model.stress import Bounds, Voltage
from checker.stress.plateaus import furthest, limits_of, reached
from checker.stress.potential import CITATION, Potential
from checker.stress.spread import Field
from checker.stress.strings import String, facts

MINOR = 1.25  # how much larger a voltage may be by what parts keep in normal use than by what physics alone tells
NONE = 0.5  # V; what is surely less than this is no voltage worth telling


class Voltages:
    """Answers `voltage between two nets` for one choice of supply voltage; answers are kept."""

    def __init__(
        self,
        board: Board,
        found: Field,
        same: Mapping[str, str],
        strung: Mapping[str, String],
        means: Mapping[str, str],
        rectified: Mapping[str, tuple[int, str]],
        loose: Mapping[str, tuple[str, str]],
        frequency: float,
    ):
        self._board, self._found, self._same, self._means, self._frequency = board, found, same, means, frequency
        self._rectified = rectified
        self.loose = {net: loose[at] for net in board.isolation.domain_of if (at := same.get(net, net)) in loose}
        self._strings = {net: string for string in strung.values() for net in string.nets[1:-1]}
        self._ends: dict[tuple[str, str], String] = {}
        for string in strung.values():
            for one, other in zip(string.nets, string.nets[1:], strict=False):
                self._ends[one, other] = self._ends[other, one] = string
        self._known: dict[tuple[str, str], Voltage | None] = {}
        self._figures: dict[tuple[tuple[Wave, Wave] | None, ...], _Figures | None] = {}

    def between(self, one: str, other: str) -> Voltage | None:
        """The voltage between two nets, None when nothing bounds it and nothing of it is sure."""
        key = (one, other) if one <= other else (other, one)
        if key not in self._known:
            self._known[key] = self._voltage(*key)
        return self._known[key]

    def sign(self, one: str, other: str) -> int:
        """1 when `one` is surely above `other` all the cycle, -1 when surely below, 0 when that is not known."""
        a, b = self.potential(one, usual=True), self.potential(other, usual=True)
        if a is None or b is None or a.frame != b.frame:
            return 0
        if bottom(minus(a.low, b.high)) > NONE:
            return 1
        return -1 if bottom(minus(b.low, a.high)) > NONE else 0

    def mean_sign(self, one: str, other: str) -> int:
        """As `sign`, for the means over a switching cycle: a winding end has that of the held net at the winding's other end,
        and what a rectifier feeds from the winding lies above or below that."""
        ends = [self._same.get(net, net) for net in (one, other)]
        tied = [self._means.get(end, end) for end in ends]
        known = self.sign(tied[0], tied[1])
        for at, way in ((0, 1), (1, -1)):
            sign, held = self._rectified.get(ends[at], (0, ""))
            if not known and held == tied[1 - at]:
                known = sign * way
        return known

    def potential(self, net: str, usual: bool) -> Potential | None:
        """The potential of a net; inside a resistor string by its share of the voltage between the ends."""
        known = self._found.usual if usual else self._found.sure
        string = self._strings.get(net)
        if string is None:
            return known.get(self._same.get(net, net))
        ends = [known.get(self._same.get(end, end)) for end in (string.nets[0], string.nets[-1])]
        if ends[0] is None or ends[1] is None or ends[0].frame != ends[1].frame:
            return None
        shares = string.share(0, string.nets.index(net))
        low = lower(*(_at(ends[0].low, ends[1].low, share) for share in shares))
        high = higher(*(_at(ends[0].high, ends[1].high, share) for share in shares))
        step = Step(f"{net} divides the voltage between {string.nets[0]} and {string.nets[-1]}", (ends[0].step, ends[1].step))
        return Potential(ends[0].frame, low, high, step)

    def _voltage(self, one: str, other: str) -> Voltage | None:
        string = self._ends.get((one, other)) or self._strings.get(one) or self._strings.get(other)
        if string is not None and one in string.nets and other in string.nets:
            whole = self._of_ends(string)
            if whole is None or (string.steady and whole.shape != "dc"):
                return None
            return self._shared(string, one, other, whole)
        return self._of_core(one, other) or self._of_potentials(one, other)

    def _of_core(self, one: str, other: str) -> Voltage | None:
        """The plateau of the voltage between two nets of which a core moves one or both, spikes aside."""
        first, second = self.potential(one, usual=True), self.potential(other, usual=True)
        if first is None or second is None or first.frame != second.frame:
            return None
        known = next((of for end in (first, second) if (of := end.fed or end.swing) is not None), None)
        if known is None or any(of.core != known.core for end in (first, second) if (of := end.fed or end.swing) is not None):
            return None
        limits = [limits_of(end, hard=self.potential(net, usual=False), like=known) for net, end in ((one, first), (other, second))]
        if limits[0] is None or limits[1] is None:
            return None
        most, sure, spikes = [], [], []
        for ways in zip(limits[0], limits[1], strict=True):
            most.append(furthest(*ways, 1.0))
            spikes.append(furthest(*ways, known.spike))
            sure.append(reached(*ways))
        if not math.isfinite(max(most)):
            return None
        return _plateau(one, other, min(sure), max(most), max(spikes), (first.step, second.step))

    def _of_ends(self, string: String) -> Voltage | None:
        return self._of_potentials(string.nets[0], string.nets[-1])

    def _shared(self, string: String, one: str, other: str, whole: Voltage) -> Voltage:
        low, high = string.share(string.nets.index(one), string.nets.index(other))
        if (low, high) == (1.0, 1.0):
            return whole
        first, last = sorted((string.nets.index(one), string.nets.index(other)))
        refs = ", ".join(string.members[first:last])

        def scaled(bounds: Bounds) -> Bounds:
            most = None if bounds.never_above is None else bounds.never_above * high
            step = Step(
                f"{refs} of the string {' - '.join(string.members)} takes {100 * low:.3g} to {100 * high:.3g} % of it, by values "
                f"and tolerances", (bounds.step, *facts(self._board, string)), formula="U x R / (R + rest)",
                result=most, unit="V", form=bounds.form,
            )  # fmt: skip
            return Bounds(bounds.surely * low, most, step, form=bounds.form)

        return Voltage(scaled(whole.rms), scaled(whole.peak), whole.shape, whole.frequency)

    def _of_potentials(self, one: str, other: str) -> Voltage | None:
        soft = self.potential(one, usual=True), self.potential(other, usual=True)
        if soft[0] is None or soft[1] is None or soft[0].frame != soft[1].frame:
            return None
        hard = self.potential(one, usual=False), self.potential(other, usual=False)
        waves = tuple((known.low, known.high) if known is not None else None for known in (*soft, *hard))
        if waves not in self._figures:
            sure = minus(soft[0].low, soft[1].high), minus(soft[0].high, soft[1].low)
            never = (-math.inf, math.inf) if hard[0] is None or hard[1] is None else _decisive(hard[0], hard[1], sure)
            self._figures[waves] = _figures(never, sure)
        figures = self._figures[waves]
        return None if figures is None else _told(one, other, figures, (soft[0].step, soft[1].step), self._frequency)


def _plateau(one: str, other: str, surely: float, most: float, spike: float, steps: tuple[Step, ...]) -> Voltage:
    text = f"the voltage between {one} and {other} has plateaus of at most {most:.4g} V, surely {surely:.4g} V; spikes come on top"
    step = Step(text, steps, formula="V + N x e", result=most, unit="V", form="peak", citation=CITATION)
    peak = Bounds(surely, most, step, form="peak", kind="repetitive")
    return Voltage(Bounds(0.0, most, step, form="rms", kind="repetitive"), peak, "mixed", None, spike=spike)


def _decisive(one: Potential, other: Potential, sure: tuple[Wave, Wave]) -> tuple[Wave, Wave]:
    """The interval that the difference of two potentials never leaves.

    Where physics bounds it one way only, the other way is taken as in normal use, so long as that is not what decides its
    size, by more than the part MINOR: a start-up string sees at most the bus, whatever its far end is rated for. Otherwise
    ratings would prove themselves.
    """
    low, high = minus(one.low, other.high), minus(one.high, other.low)
    if math.isinf(bottom(low)) and math.isfinite(top(high)) and -bottom(sure[0]) <= MINOR * top(high):
        return sure[0], high
    if math.isinf(top(high)) and math.isfinite(bottom(low)) and top(sure[1]) <= -MINOR * bottom(low):
        return low, sure[1]
    return low, high


def _at(one: Wave, other: Wave, share: float) -> Wave:
    """The point at `share` of the way from `one` to `other`."""
    return one if share <= 0 else other if share >= 1 else plus(times(one, 1 - share), times(other, share))


@dataclass(frozen=True, slots=True)
class _Figures:
    """(surely, never above) of peak and r.m.s., never above None where nothing bounds it."""

    shape: str
    peak: tuple[float, float | None]
    rms: tuple[float, float | None]


def _figures(upper: tuple[Wave, Wave], sure: tuple[Wave, Wave]) -> _Figures | None:
    """What a difference never leaves and what it has in normal use, lower and upper wave each, as figures.

    None when nothing bounds it and nothing of it is sure.
    """
    most, surely = largest(*upper), least(*sure)
    bounded = math.isfinite(top(most))
    if not bounded and top(surely) < NONE:
        return None
    peak, whole = (top(most) + 0.0, rms(most)) if bounded else (None, None)
    return _Figures(_shape(upper if bounded else sure), (top(surely) + 0.0, peak), (rms(surely), whole))


def _told(one: str, other: str, figures: _Figures, steps: tuple[Step, ...], frequency: float) -> Voltage:
    """The figures as a Voltage with its derivation."""
    made = []
    for name, (surely, most) in (("rms", figures.rms), ("peak", figures.peak)):
        form = "dc" if figures.shape == "dc" else name
        between = f"the voltage between {one} and {other}"
        text = f"nothing bounds {between}" if most is None else f"{between} is at most {most:.4g} V"
        if surely >= NONE:
            text += f", surely {surely:.4g} V"
        step = Step(f"{text} ({'direct' if form == 'dc' else name})", steps, result=most, unit="V", form=form)
        made.append(Bounds(surely, most, step, form=form))
    return Voltage(made[0], made[1], figures.shape, 0.0 if figures.shape == "dc" else frequency)


def _shape(band: tuple[Wave, Wave]) -> str:
    low, high = band
    if isinstance(low, float) and isinstance(high, float):
        return "dc"
    spread = max(abs(top(high)), abs(bottom(low)))
    if max(top(high) - bottom(high), top(low) - bottom(low)) <= 0.02 * spread:
        return "dc"
    middle = (mean(low) + mean(high)) / 2
    return "ac" if math.isfinite(middle) and abs(middle) < 0.02 * spread and bottom(low) < 0 < top(high) else "mixed"
