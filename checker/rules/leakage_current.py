"""The current that a network of capacitors drives into a circuit at earth, over supply states, and what would change it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace

from checker import units
from checker.formulas.touch_current import peak_of, rms_of, share_read
from checker.model.fact import Fact
from checker.model.order import natural
from checker.model.rule import Analysis
from checker.model.step import Step
from checker.model.verdict import Change, Missing, Number, Remedy
from checker.rules.leakage import OTHER, Drive, Network, Node, State, Tie

E6 = (1.0, 1.5, 2.2, 3.3, 4.7, 6.8)
LEAST = 100e-12  # F; no safety capacitor has less (common practice, no source)
SAME = 0.001  # limits in r.m.s. and peak are rounded figures of one sine: less than this apart they say the same
CITATION = "IEC 60990 figure 4"


@dataclass(frozen=True, slots=True)
class Mains:
    """The supply as judged: highest voltage with tolerance [V r.m.s.] and highest frequency [Hz]; sure_*: what of it is declared,
    else the low end of what is assumed."""

    voltage: float
    frequency: float
    sure_voltage: float
    sure_frequency: float
    facts: tuple[Fact, ...]

    def __str__(self) -> str:
        return f"{self.voltage:.4g} V, {self.frequency:g} Hz"


def mains(analysis: Analysis) -> Mains | None:
    """The mains supply, None when there is none."""
    setting, supply = analysis.setting, analysis.setting.mains
    high = setting.mains_voltage(tolerance=True)
    if supply is None or high is None:
        return None
    assumed = {item.key for item in setting.assumptions}
    sure = supply.voltage.low if "supply.mains" in assumed else supply.voltage.high if "supply.tolerance" in assumed else high
    low = supply.frequency.low if supply.frequency is not None and "supply.frequency" in assumed else setting.mains_frequency
    return Mains(high, setting.mains_frequency, sure, low, setting.facts)


@dataclass(frozen=True, slots=True)
class Reading:
    """The current in one state [A], in `form`, beside the limit in that form; surely: the least that must flow; as_judged: the same
    should the assumed supply be the real one; nominal: with nominal values."""

    state: State
    form: str
    never_above: float
    surely: float
    as_judged: float
    nominal: float
    limit: float

    @property
    def used(self) -> float:
        """The share of the limit."""
        return self.never_above / self.limit if self.limit else math.inf

    def number(self, value: float) -> Number:
        """A figure of this reading."""
        return Number(value, "A", self.form)


@dataclass(frozen=True, slots=True)
class Leak:
    """What flows into one node of a network, in some states of the supply, against limits in r.m.s. and peak [A]; peak 0: none.

    around: the part of the network that drives the node. person: whether the current goes through a person, who is taken for
    the network of IEC 60990 figure 4, or through a conductor.
    """

    around: Network
    node: Node
    states: tuple[State, ...]
    supply: Mains
    rms: float
    peak: float
    person: bool

    def readings(self) -> tuple[Reading, ...]:
        """Every state in r.m.s., and in peak where the rectified line takes part: a sine that keeps the one keeps the other."""
        found = []
        for state in self.states:
            most, least, nominal = (self.around.drive(self.node, state, sign) for sign in (1, -1, 0))
            volts, hertz = self.supply.voltage, self.supply.frequency
            sure = self._surely(least, self.supply.sure_voltage, self.supply.sure_frequency)
            as_judged = self._surely(least, volts, hertz)
            for form, limit, current, crest in (("rms", self.rms, rms_of, 1.0), ("peak", self.peak, peak_of, math.sqrt(2))):
                if form == "peak" and not (most.half and limit):
                    continue
                never = current(hertz, volts, most.full + most.other, most.half)
                usual = current(hertz, volts, nominal.full + nominal.other, nominal.half)
                found.append(Reading(state, form, never, crest * sure, crest * as_judged, usual, limit))
        return tuple(found)

    def _surely(self, least: Drive, volts: float, hertz: float) -> float:
        """The r.m.s. current that must flow [A], of a person what the network reads of its fundamental, weighted; the crest is at
        least sqrt(2) times that."""
        if not self.person:
            return rms_of(hertz, volts, least.full, least.half)
        return rms_of(hertz, volts, least.full + least.half / 2, 0.0) * share_read(hertz, least.full + least.half)

    def keeps(self, values: Mapping[str, float]) -> bool:
        """Whether every limit is kept with other nominal values [F] for some of the capacitors."""
        return all(reading.used <= 1 for reading in replace(self, around=self.around.scaled(values)).readings())

    @property
    def refs(self) -> tuple[str, ...]:
        """The capacitors, in natural order."""
        return tuple(sorted({tie.ref for tie in self.around.ties}, key=natural))


def worst(found: tuple[Reading, ...]) -> Reading:
    """The reading that decides: one that surely exceeds its limit, else the one that uses most of it; r.m.s. among equals."""
    most = max(reading.used for reading in found)

    def rank(reading: Reading) -> tuple[bool, bool, bool, float]:
        near = reading.used >= most * (1 - SAME)
        return reading.surely > reading.limit, near, reading.form == "rms", reading.used

    return max(found, key=rank)


def amount(value: float, unit: str, form: str = "") -> str:
    """A figure for people, four digits."""
    return units.shown(float(f"{value:.4g}"), unit, {"rms": "r.m.s."}.get(form, form))


def said(leak: Leak, words: str, reading: Reading) -> str:
    """One sentence: the capacitors, the state, the current, and what would still be allowed."""
    ties = sorted(leak.around.ties, key=lambda tie: natural(tie.ref))
    values = [f"{tie.ref} {amount(tie.value, 'F') if tie.value is not None else 'of unknown value'}" for tie in ties]
    more = f" and {len(values) - 8} more" if len(values) > 8 else ""
    text = f"{', '.join(values[:8])}{more} tie{'s' * (len(values) == 1)} {words} to the mains; {reading.state.text}: "
    if reading.surely > reading.limit:
        text += f"at least {amount(reading.surely, 'A', reading.form)}, "
    text += f"at most {amount(reading.never_above, 'A', reading.form)} at {leak.supply}"
    if leak.around.unread:
        return text + " without the capacitors of unknown value"
    if not reading.never_above:
        return text + ", since protective earth takes it"
    factor = reading.limit / reading.never_above
    if len(ties) > 1:
        return text + f"; still allowed: {factor:.3g} times these capacitances"
    return text + f"; still allowed: {amount((ties[0].value or 0.0) * factor, 'F')} of this tolerance"


def state_steps(leak: Leak) -> tuple[Step, ...]:
    """One step per state and form; all rest on the same capacitors and supply."""
    inputs: tuple[Step | Fact, ...] = (*(_tie_step(tie) for tie in leak.around.ties), *leak.supply.facts)
    steps = []
    for reading in leak.readings():
        most, usual = (amount(value, "A", reading.form) for value in (reading.never_above, reading.nominal))
        text = f"{reading.state.text}: at most {most}, with nominal values {usual}"
        formula = "2 pi f C U" if reading.form == "rms" else "sqrt(2) x 2 pi f C U"
        citation = CITATION if leak.person else ""
        steps.append(Step(text, inputs, formula, reading.never_above, "A", reading.form, citation))
    return tuple(steps)


def _tie_step(tie: Tie) -> Step:
    """What is known of one capacitor."""
    value = amount(tie.value, "F") if tie.value is not None else "value not known"
    tolerance = f"+-{tie.tolerance:g} %" + ("" if tie.stated else ", assumed, since nothing states it")
    result = tie.at(1) if tie.value is not None else None
    ends = " and ".join(_place(end) for end in tie.ends)
    text = f"{tie.ref} between {ends}: {value}, {tolerance}"
    return Step(text, tie.facts, formula="C x (1 + tolerance)", result=result, unit="F")


def _place(node: Node) -> str:
    what, name = node
    return {"pole": f"pole {name}", "bus": "the rectified line", "earth": "protective earth"}.get(what, name)


def smaller(leak: Leak) -> Remedy | None:
    """The largest capacitor at the largest usual value that keeps the limits, else all of them at the same share."""
    if leak.around.unread:
        return None
    now = {tie.ref: tie.value or 0.0 for tie in leak.around.ties}
    largest = max(now, key=now.__getitem__)
    alone = next((value for value in _usual(now[largest]) if leak.keeps({largest: value})), None)
    values = {largest: alone} if alone is not None else _together(leak, now)
    if not values:
        return None
    text = " and ".join(f"{ref} {amount(value, 'F')} or less" for ref, value in values.items())
    return Remedy(text, tuple(Change(ref, "value", value, "F") for ref, value in values.items()))


def _together(leak: Leak, now: Mapping[str, float]) -> dict[str, float]:
    share = 1 / max(reading.used for reading in leak.readings())
    found = {ref: next(iter(_usual(value * share)), None) for ref, value in now.items()}
    values = {ref: value for ref, value in found.items() if value is not None}
    return values if len(values) == len(now) else {}


def _usual(most: float) -> list[float]:
    """The values of the E6 series up to `most` [F], the largest first."""
    powers = range(-12, -4)
    values = sorted((float(f"{step * 10.0**power:.3g}") for power in powers for step in E6), reverse=True)
    return [value for value in values if LEAST <= value <= most * (1 + 1e-9)]


def missing(leak: Leak, reading: Reading) -> Missing:
    """The one fact that settles a current that is neither proven nor surely too much."""
    unread = leak.around.unread
    if unread:
        most = next((v for v in _usual(1e-6) if leak.keeps({tie.ref: v for tie in unread})), None)
        then = ((f"{amount(most, 'F')} or less" if most else f"less than {amount(LEAST, 'F')}", "pass"), ("more", "open or fail"))
        return Missing("value", f"value of {unread[0].ref} in the netlist or the BOM", then, unread[0].ref)
    for tie in leak.around.ties:
        net = next((name for what, name in tie.ends if what == OTHER), None)
        if net is not None:
            then = (("no alternating voltage against it", "pass or fail, by value"), ("anything else", "open"))
            return Missing(
                f"what {net} follows", f"rails: {{{net}: {{voltage: ..., return: ...}}}} in the declaration", then, tie.ref
            )
    if reading.as_judged > reading.limit:
        most_volts = f"{leak.supply.voltage * reading.limit / reading.never_above:.3g} V at most, with its tolerance"
        then = ((most_volts, "pass"), (f"{leak.supply}", "fail"))
        return Missing("supply", "supply: {mains: ..., tolerance: ..., frequency: ...} in the declaration", then)
    return _tolerance(leak.around, reading)


def _tolerance(around: Network, reading: Reading) -> Missing:
    """Only the tolerance decides: how much above the nominal value the parts may be."""
    largest = max(around.ties, key=lambda tie: (not tie.stated, tie.at(1)))
    nominal = reading.nominal or reading.limit
    above = 100 * (reading.limit / nominal - 1)
    if above >= 0:
        then = ((f"at most {math.floor(10 * above) / 10:g} % above the nominal value", "pass"), ("more", "open: take less"))
        return Missing("tolerance", "BOM column Tolerance, or tolerance in a parts file", then, largest.ref)
    most = amount((largest.value or 0.0) * reading.limit / nominal, "F")
    then = ((f"at most {most}, its tolerance included", "pass"), ("as it is", "open: most parts exceed the limit"))
    return Missing("a smaller value", f"value of {largest.ref} in the netlist and the BOM", then, largest.ref)
