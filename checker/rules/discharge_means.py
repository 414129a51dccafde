"""What else than resistors takes the charge from the pins of a plug, and what perhaps does.

Sure are windings from pole to pole (a mains transformer, a motor, the coil of a relay), lamps with a filament, and circuits
made to discharge the capacitor. What nobody describes so far that it is known not to (a module, a filter block, a controller
that both poles feed over diodes, a glow lamp, which stops conducting above the limit) leaves the question open.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from checker.model.candidate import Candidate
from checker.model.circuit import Part
from checker.model.rule import Analysis
from checker.model.terminals import coil
from checker.rules.dropper import on_mains

_PERHAPS = frozenset({"isolated-module", "module", "filter", "network", "controller", "regulator", "ic", "lamp", "unknown"})
_LINKS = frozenset({"resistor", "diode", "led"})
_BESIDE = _LINKS | {"capacitor", "test-point", "varistor", "tvs"}
_FEW = 8  # parts; a net with more is a rail, not a link of a string (common practice, no source)
_STATED = re.compile(
    r"x[\s-]?cap(?:acitor)?s?\s+discharg|discharg\w*\s+(?:of\s+)?(?:the\s+)?x[\s-]?cap|active\s+x?[\s-]?discharge", re.IGNORECASE
)
# circuits for this one purpose, by type (from memory)
_TYPES = re.compile(r"(?<![a-z0-9])(?:cap[023]\d\d?d[gn]|tea1708|ncp4810|hf81)(?![0-9])", re.IGNORECASE)
_FILAMENT = re.compile(r"bulb|incandesc|halogen|filament|tungsten|gl(?:ü|ue)hlampe", re.IGNORECASE)
_NO_FILAMENT = re.compile(r"neon|glow|glimm|(?<![a-z])led(?![a-z])|(?<![a-z])ne-?2", re.IGNORECASE)
_CHOKE = re.compile(r"\d\s*[mu]H(?![a-z])|choke|common|drossel", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Means:
    """how: what it is, for people. sure: whether it is known to take the charge. ends: line conductors that it joins. ohms: the
    sum of the resistors on the way to it."""

    ref: str
    how: str
    sure: bool
    ends: frozenset[str]
    ohms: float = 0.0

    def joins(self, pins: tuple[str, str], one: Mapping[str, str]) -> bool:
        """Whether it lies between the pins when only the conductors `one` (net -> pin) are still on them."""
        return {one[net] for net in self.ends if net in one} >= set(pins)


def means(analysis: Analysis, closed: Mapping[str, str]) -> Iterator[Means]:
    """Every part that joins line conductors of two poles this way. closed: net -> the pin it is one conductor with."""
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if not part.fitted:
            continue
        found = _of_part(analysis, part, candidate, closed)
        if found is not None and len({closed[net] for net in found.ends}) > 1:
            yield found


def _of_part(analysis: Analysis, part: Part, candidate: Candidate, closed: Mapping[str, str]) -> Means | None:
    kind = candidate.kind
    direct = frozenset(net for net in part.nets() if net in closed)
    if kind == "transformer":
        return _transformer(analysis, part, candidate, direct) if len(direct) > 1 else None
    if kind == "motor" and len(direct) > 1:
        return Means(part.ref, "winding", True, direct)
    if kind == "relay":
        return Means(part.ref, "coil", True, frozenset(net for net in coil(part) if net in closed))
    text = _text(part) if kind == "lamp" else ""
    if _FILAMENT.search(text) and not _NO_FILAMENT.search(text):
        return Means(part.ref, "filament", True, direct)
    if kind in _PERHAPS or is_circuit(analysis, part.ref):
        ends, ohms = (direct, 0.0) if len({closed[net] for net in direct}) > 1 else _reached(analysis, part, closed)
        stated = _is_stated(part)
        return Means(part.ref, "discharge circuit" if stated else kind.replace("-", " "), stated, ends, ohms)
    return None


def is_circuit(analysis: Analysis, ref: str) -> bool:
    """Whether a capacitor is none: a circuit to discharge one has the word in its description, and no capacitance."""
    return analysis.kind(ref) == "capacitor" and analysis.choice[ref].value is None and _is_stated(analysis.design.parts[ref])


def _is_stated(part: Part) -> bool:
    text = _text(part)
    return _STATED.search(text) is not None or _TYPES.search(text) is not None


def _text(part: Part) -> str:
    return " ".join(part.text(name) for name in ("value", "description", "symbol", "type"))


def _transformer(analysis: Analysis, part: Part, candidate: Candidate, direct: frozenset[str]) -> Means:
    """One winding, or several in series, from pole to pole. Where no windings are stated: all its other pins lie in another
    circuit, so that what is on the line is its primary; else, and where its words or pins are those of a choke, it may be a
    choke for both poles drawn as a transformer."""
    at = {pin.number: pin.net for pin in part.pins if pin.net is not None}
    windings = [[at[pin] for pin in winding.pins if pin in at] for winding in candidate.windings]
    if not windings:
        apart = not any(on_mains(analysis, net) for net in part.nets() if net not in direct)
        pins = {pin.number for pin in part.pins if pin.net in direct}
        usual = len(at) != 4 or not pins <= {"1", "2", "3", "4"} or pins in ({"1", "2"}, {"3", "4"})
        return Means(part.ref, "winding", apart and usual and not _CHOKE.search(_text(part)), direct)
    groups: list[set[str]] = []
    for nets in windings:
        joined = set(nets).union(*(group for group in groups if group & set(nets)))
        groups = [group for group in groups if not group & joined] + [joined]
    return Means(part.ref, "winding", True, max((direct & group for group in groups), key=len))


def _reached(analysis: Analysis, part: Part, closed: Mapping[str, str]) -> tuple[frozenset[str], float]:
    """The line conductors that strings of resistors and diodes lead to from the pins of a part, and the sum of those resistors in
    ohm, infinite when one is not read."""
    found = dict.fromkeys(net for net in part.nets() if net in closed or _is_link(analysis, net, part.ref))
    queue = [net for net in found if net not in closed]
    resistors = set()
    for net in queue:
        for ref in analysis.fitted_on(net):
            if ref == part.ref or analysis.kind(ref) not in _LINKS:
                continue
            ends = analysis.design.parts[ref].nets()
            if analysis.kind(ref) == "resistor" and all(end in closed or _is_link(analysis, end, part.ref) for end in ends):
                resistors.add(ref)
            for other in ends:
                if other not in found and (other in closed or _is_link(analysis, other, part.ref)):
                    found[other] = None
                    if other not in closed:
                        queue.append(other)
    values = [analysis.choice[ref].value for ref in sorted(resistors)]
    ohms = sum(float(value.value) if value is not None else math.inf for value in values)
    return frozenset(net for net in found if net in closed), ohms


def _is_link(analysis: Analysis, net: str, ref: str) -> bool:
    """Whether nothing but the part, resistors, diodes and what draws nothing hangs on a net."""
    if len(analysis.design.nets[net].pins) > _FEW:
        return False
    return all(other == ref or analysis.kind(other) in _BESIDE for other in analysis.fitted_on(net))
