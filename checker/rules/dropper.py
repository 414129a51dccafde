"""Capacitors in series with a circuit that the line feeds without a transformer: on a line conductor, before a rectifier.

Such a capacitor carries the line as one across it does: it has nearly the whole voltage on it, and the peak of it on the pins of
a pulled plug, which the rectifier joins to its other end.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.circuit import Part
from checker.model.rule import Analysis
from checker.model.terminals import bridge, junctions

_IN_SERIES = frozenset({"resistor", "inductor", "ferrite", "fuse", "resettable-fuse", "thermistor", "jumper", "net-tie"})
_ONE_WAY = frozenset({"diode", "led", "optocoupler"})
_BOTH_WAYS = frozenset({"zener", "tvs"})
MOST = 10e3  # ohm; more in series with it and the resistor takes the voltage, not the capacitor (common practice, no source)
_FEW = 8  # parts; a net with more is a rail, not the node behind a capacitor (common practice, no source)
_IN, _OUT, _UNTOLD = "in", "out", "untold"


@dataclass(frozen=True, slots=True)
class Dropper:
    """near: the end on a line conductor. inner: the nets from the other end to the rectifier. base: the line conductor of the
    other pole to which the rectifier leads. rectifier: its part behind the capacitor."""

    ref: str
    near: str
    inner: tuple[str, ...]
    base: str
    rectifier: str


def droppers(analysis: Analysis) -> Iterator[Dropper]:
    """Every capacitor that is one, in file order."""
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if candidate.kind == "capacitor" and part.fitted and len(part.nets()) == 2:
            found = dropper(analysis, ref)
            if found is not None:
                yield found


def dropper(analysis: Analysis, ref: str) -> Dropper | None:
    """The capacitor `ref` as one in series with a rectifier; None when it is none.

    Current must be able to go both ways behind it (a bridge, two diodes, a zener) and lead to the other pole, never to its own:
    so a capacitor on the direct side of a rectifier is none.
    """
    poles = analysis.stress.poles
    ends = analysis.design.parts[ref].nets()
    near = [net for net in ends if net in poles]
    if len(near) != 1:
        return None
    inner = _inner(analysis, ref, next(net for net in ends if net not in poles))
    rectifiers = [found for net in inner for found in _rectifiers(analysis, net)]
    reached = {base: name for name, _, bases in rectifiers for base in bases}
    ways = [way for _, way, _ in rectifiers]
    both = bool(set(ways) & {"both"}) or len(set(ways) - {_UNTOLD}) + ways.count(_UNTOLD) > 1
    if not both or not reached or any(poles[base] == poles[near[0]] for base in reached):
        return None
    base, rectifier = next(iter(reached.items()))
    return Dropper(ref, near[0], tuple(inner), base, rectifier)


def _inner(analysis: Analysis, ref: str, first: str) -> dict[str, None]:
    """The nets from an end of a capacitor on, over parts in series; none when one of them is a rail."""
    found = {first: None}
    for net in (queue := [first]):
        if len(analysis.design.nets[net].pins) > _FEW:
            return {}
        for other_ref in analysis.fitted_on(net):
            part, value = analysis.design.parts[other_ref], analysis.choice[other_ref].value
            small = analysis.kind(other_ref) != "resistor" or (value is not None and float(value.value) <= MOST)
            if other_ref != ref and analysis.kind(other_ref) in _IN_SERIES and small and len(part.nets()) == 2:
                for other in part.nets():
                    if other not in found and other not in analysis.stress.poles:
                        found[other] = None
                        queue.append(other)
    return found


def _rectifiers(analysis: Analysis, net: str) -> Iterator[tuple[str, str, tuple[str, ...]]]:
    """(part, which way it lets current through, line conductors it leads to) of each rectifying part on a net."""
    poles = analysis.stress.poles
    for ref in analysis.fitted_on(net):
        part, kind = analysis.design.parts[ref], analysis.kind(ref)
        if kind == "bridge":
            found = bridge(part)
            if found is None or net in found[2]:
                yield ref, "both", tuple(other for other in part.nets() if other in poles)
        elif kind in _ONE_WAY | _BOTH_WAYS:
            beyond = [other for other in part.nets() if other != net and on_mains(analysis, other)]
            bases = [base for other in beyond for base in ([other] if other in poles else _behind(analysis, other, ref))]
            yield ref, "both" if kind in _BOTH_WAYS else _way(part, net), tuple(dict.fromkeys(bases))


def _behind(analysis: Analysis, net: str, ref: str) -> Iterator[str]:
    """The line conductors that rectifying parts other than `ref` join to the net behind a diode."""
    for other_ref in analysis.fitted_on(net):
        if other_ref != ref and analysis.kind(other_ref) in _ONE_WAY | _BOTH_WAYS | {"bridge"}:
            yield from (other for other in analysis.design.parts[other_ref].nets() if other in analysis.stress.poles)


def _way(part: Part, net: str) -> str:
    """Whether a diode takes current out of the net, lets it in, or both (the middle of two); its pins may not tell."""
    ends = {_OUT if anode == net else _IN for anode, cathode in junctions(part) if net in (anode, cathode)}
    return "both" if len(ends) > 1 else next(iter(ends), _UNTOLD)


def on_mains(analysis: Analysis, net: str) -> bool:
    """Whether a net belongs to the mains side."""
    name = analysis.isolation.domain_of.get(net)
    return name is not None and analysis.isolation.domains[name].hazard == "mains"
