"""What keeps the spike of a switch that a winding hangs on: a leakage inductance drives it up until something takes the current."""

from __future__ import annotations

from checker.model.rule import Analysis
from checker.model.terminals import junctions

_SWITCHES = frozenset({"mosfet", "igbt", "bipolar"})
_SUPPRESSORS = frozenset({"tvs", "zener", "varistor"})


def clamp(analysis: Analysis, net: str, switch: str) -> tuple[str, ...]:
    """The parts that keep the spikes on a net of a switch, () when there is none.

    A suppressor; a diode to a net that a capacitor holds, with a resistor or suppressor that empties it (RCD), or to a rail; a
    second switch with a capacitor (active clamp).
    """
    for ref in analysis.fitted_on(net):
        part, kind = analysis.design.parts[ref], analysis.kind(ref)
        if ref == switch:
            continue
        if kind in _SUPPRESSORS:
            return (ref,)
        if kind == "diode" and (far := [cathode for anode, cathode in junctions(part) if anode == net]):
            held = _held(analysis, far[0], ref)
            if held:
                return (ref, *held)
        if kind in _SWITCHES and ref != switch:
            others = [other for other in part.nets() if other != net]
            caps = [other for there in others for other in analysis.fitted_on(there) if analysis.kind(other) == "capacitor"]
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
