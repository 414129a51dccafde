"""Which nets are one conductor with the pins of a plug, and which an open contact takes off them."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from checker.model.entry import Entry
from checker.model.rule import Analysis
from checker.rules.dropper import droppers

CONTACTS = frozenset({"switch", "relay", "solid-state-relay", "triac"})
FUSES = frozenset({"fuse", "resettable-fuse"})
_WIRES = frozenset("jumper net-tie thermistor inductor ferrite common-mode-choke filter current-transformer hall-sensor".split())
_WIRE = 100.0  # ohm; at most this much in a line conductor carries the line on (common practice, no source)
_SLOWEST = 50.0  # Hz, the lowest frequency of a mains


@dataclass(frozen=True, slots=True)
class Conductors:
    """pin: net -> the pole of the entry it is one conductor with, every contact closed. before: net -> (the net before it, the
    part that carries the line on to it), both "" for a pole. base: net that only parts of a dropper or snubber join to a
    line conductor -> that conductor; such nets are in `pin` too."""

    pin: Mapping[str, str]
    before: Mapping[str, tuple[str, str]]
    base: Mapping[str, str]


def conductors(analysis: Analysis, entry: Entry) -> Conductors:
    """The line conductors behind the poles of an entry; a part for both poles carries each on to the nets of that pole."""
    pin = {pole: pole for pole in entry.poles}
    before = dict.fromkeys(entry.poles, ("", ""))
    queue = list(entry.poles)
    poles = analysis.stress.poles
    for net in queue:
        for ref in analysis.fitted_on(net):
            if _carries(analysis, ref):
                for other in analysis.design.parts[ref].nets():
                    if other not in pin and poles.get(other) == poles.get(net) and other in poles:
                        pin[other], before[other] = pin[net], (net, ref)
                        queue.append(other)
    base = dict(_joined(analysis, pin))
    return Conductors(pin | {net: pin[line] for net, line in base.items()}, before, base)


def _joined(analysis: Analysis, pin: Mapping[str, str]) -> Iterator[tuple[str, str]]:
    """(net behind a capacitor, the line conductor that it is as good as one with): over a rectifier, or over a resistor that is
    small against the capacitor."""
    for found in droppers(analysis):
        if found.base in pin and found.near in pin:
            yield from ((net, found.base) for net in found.inner)
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        nets = part.nets()
        if candidate.kind == "capacitor" and part.fitted and len(nets) == 2 and (nets[0] in pin) != (nets[1] in pin):
            net = nets[0] if nets[1] in pin else nets[1]
            series = _resistor_after(analysis, ref, net)
            if series is not None and _is_small(analysis, series, ref):
                yield from ((net, far) for far in analysis.design.parts[series].nets() if far in pin)


def _resistor_after(analysis: Analysis, ref: str, net: str) -> str | None:
    """The one resistor on a net beside a capacitor."""
    others = [other for other in analysis.fitted_on(net) if other != ref and analysis.kind(other) != "test-point"]
    return others[0] if len(others) == 1 and analysis.kind(others[0]) == "resistor" else None


def _is_small(analysis: Analysis, resistor: str, capacitor: str) -> bool:
    """Whether a resistor takes less of the mains voltage than the capacitor it is in series with, or is not read."""
    ohms, farads = analysis.choice[resistor].value, analysis.choice[capacitor].value
    return ohms is None or farads is None or float(ohms.value) * float(farads.value) * 2 * math.pi * _SLOWEST < 1


def behind(analysis: Analysis, found: Conductors, ref: str) -> frozenset[str]:
    """The conductors that an open contact takes off the pins; none when another part still carries them."""
    starts = [net for net in analysis.design.parts[ref].nets() if found.before.get(net, ("", ""))[1] == ref]
    gone = dict.fromkeys(starts)
    queue = list(starts)
    for net in queue:
        for other_ref in analysis.fitted_on(net):
            if other_ref == ref or not _carries(analysis, other_ref):
                continue
            for other in analysis.design.parts[other_ref].nets():
                if other in found.before and found.pin[other] == found.pin[net] and other not in gone:
                    if found.before[other][0] not in gone:  # reached from elsewhere: the contact is not the only way
                        return frozenset()
                    gone[other] = None
                    queue.append(other)
    return frozenset(gone) | {net for net, line in found.base.items() if line in gone}


def _carries(analysis: Analysis, ref: str) -> bool:
    kind, value = analysis.kind(ref), analysis.choice[ref].value
    small = kind == "resistor" and value is not None and float(value.value) <= _WIRE
    return kind in _WIRES or kind in CONTACTS or kind in FUSES or small
