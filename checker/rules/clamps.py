"""What keeps the spike of a switch that a winding hangs on: a leakage inductance drives it up until something takes the current."""

from __future__ import annotations

from checker.model.rule import Analysis
from checker.model.terminals import junctions

_SWITCHES = frozenset({"mosfet", "igbt", "bipolar"})
_SUPPRESSORS = frozenset({"tvs", "zener", "varistor"})


def clamp(analysis: Analysis, switch: str, nets: tuple[str, str]) -> tuple[str, ...]:
    """The parts that keep the spikes of a switch between two nets, () when there is none.

    A suppressor; a diode to or from a net that a capacitor holds, with a resistor or suppressor that empties it (RCD), or a rail;
    a second switch with a capacitor (active clamp).
    """
    for net in nets:
        for ref in analysis.fitted_on(net):
            part, kind = analysis.design.parts[ref], analysis.kind(ref)
            if ref == switch:
                continue
            if kind in _SUPPRESSORS:
                return (ref,)
            if kind == "diode":
                far = [end for pair in junctions(part) if net in pair for end in pair if end != net and end not in nets]
                if far and (held := _held(analysis, far[0], ref)):
                    return (ref, *held)
            if kind in _SWITCHES:
                others = [other for other in part.nets() if other not in nets]
                caps = [there for other in others for there in analysis.fitted_on(other) if analysis.kind(there) == "capacitor"]
                if caps:
                    return (ref, caps[0])
    return ()


def _held(analysis: Analysis, net: str, diode: str) -> tuple[str, ...]:
    """What takes the current of a clamping diode behind it."""
    refs = [ref for ref in analysis.fitted_on(net) if ref != diode]
    for kind in sorted(_SUPPRESSORS):
        found = [ref for ref in refs if analysis.kind(ref) == kind]
        if found:
            return (found[0],)
    resistors = [ref for ref in refs if analysis.kind(ref) == "resistor"]
    capacitors = [ref for ref in refs if analysis.kind(ref) == "capacitor"]
    if capacitors and (resistors or len(refs) > 2):
        return (*capacitors[:1], *resistors[:1])
    return ()
