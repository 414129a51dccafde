"""Which pins of a part conduct into one another.

Every ordinary part joins all its pins; connectors and mechanical parts join none; capacitors carry no direct current.
An insulating part joins only the pins of one side: by stated windings, by pin names, by package halves, by a gap in the
numbering. Pins that no rule places stay alone: the circuit around them then shows which belong together.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from itertools import pairwise

from checker.model.candidate import CONNECTORS, MECHANICAL, Candidate
from checker.model.circuit import Part, Pin

Groups = tuple[tuple[str, ...], ...]

# surge limiters carry nothing in normal use; whether they join two islands is decided with the capacitors
GAPS = frozenset({"gas-tube", "spark-gap"})
LIMITERS = GAPS | {"varistor"}
OPEN_KINDS = CONNECTORS | MECHANICAL | LIMITERS | {"capacitor"}
HALVED = frozenset({"optocoupler", "digital-isolator", "isolated-driver", "isolated-amplifier", "solid-state-relay"})
MAGNETICS_PINS = 12  # a transformer with as many pins is a set of them in one package, line side against cable side
TRANSFORMERS = frozenset({"transformer", "gate-drive-transformer", "current-transformer"})


def groups(part: Part, candidate: Candidate, across_diode: Callable[[str, str], bool]) -> Groups:
    """Pin numbers in conduction groups; a pin in no group is alone.

    across_diode(net, net): whether a diode sits between two nets, which marks the coil of a relay without pin names.
    """
    kind = candidate.kind
    if (not part.fitted and kind != "fuse") or kind in OPEN_KINDS:
        return ()  # an empty fuse holder keeps nothing apart: a fuse will be put in
    if kind in TRANSFORMERS:
        return _windings(part, candidate) or (halves(part, candidate) if len(part.pins) >= MAGNETICS_PINS else ())
    if kind in HALVED:
        return _light_and_output(part) or halves(part, candidate) or _by_suffix(part)
    if kind == "isolated-module":
        return _module(part, candidate)
    if kind == "relay":
        return _relay(part, across_diode)
    if kind == "hall-sensor":
        return _hall(part, candidate)
    return (tuple(pin.number for pin in part.pins),)


def package_pins(part: Part, candidate: Candidate) -> int:
    """How many pins the package has: from the footprint when it says so and that fits the numbers, else the highest number
    made even; 0 when pins are not numbered."""
    highest = max((int(pin.number) for pin in part.pins if _numbered(pin)), default=0)
    said = candidate.attributes.get("package_pins")
    if said is not None and isinstance(said.value, float) and highest <= said.value <= highest + 4:
        return int(said.value)
    return highest + highest % 2


def halves(part: Part, candidate: Candidate) -> Groups:
    """The two long sides of a dual-in-line package; () when the pins are not numbered so."""
    count = package_pins(part, candidate)
    low = tuple(pin.number for pin in part.pins if _numbered(pin) and int(pin.number) <= count // 2)
    high = tuple(pin.number for pin in part.pins if _numbered(pin) and count // 2 < int(pin.number) <= count)
    return (low, high) if low and high else ()


def _numbered(pin: Pin) -> bool:
    return pin.number.isdecimal() and pin.number.isascii() and 0 < len(pin.number) < 5 and int(pin.number) > 0


_LIGHT = frozenset({"A", "K", "AN", "CA", "ANODE", "CATHODE", "LED+", "LED-"})
_OUTPUT = frozenset(
    {"E", "B", "C", "COL", "EM", "COLLECTOR", "EMITTER", "BASE", "VO", "VOUT", "VE", "MT1", "MT2", "T1", "T2", "D", "S"}
)
_NO_PIN = frozenset({"", "~", "NC", "N/C", "N.C."})


def _light_and_output(part: Part) -> Groups:
    """The light side and the output side of a coupler with one channel, by pin names: a body may have more places than pins
    that the symbol shows, so its numbers alone mislead. () when the names do not tell every pin."""
    names = {pin.number: pin.name.strip().upper() for pin in part.pins if pin.net is not None}
    light = tuple(number for number, name in names.items() if name in _LIGHT)
    output = tuple(number for number, name in names.items() if name in _OUTPUT)
    told = len(light) + len(output) + sum(name in _NO_PIN for name in names.values())
    return (light, output) if len(light) == 2 and len(output) >= 2 and told == len(names) else ()


def _by_suffix(part: Part) -> Groups:
    """Groups by a trailing 1 or 2 of the pin names (VDD1 GND1 against VDD2 GND2); () when they do not all carry one."""
    sides: dict[str, list[str]] = {}
    for pin in part.pins:
        match = re.fullmatch(r"(?:VDD|VCC|GND|V|VS|GNDISO|VISO)_?([12])", pin.name.upper())
        if match:
            sides.setdefault(match[1], []).append(pin.number)
    return tuple(tuple(side) for side in sides.values()) if len(sides) == 2 else ()


def _windings(part: Part, candidate: Candidate) -> Groups:
    if candidate.windings:
        listed = {pin.number for pin in part.pins}
        return tuple(pins for w in candidate.windings if len(pins := tuple(p for p in w.pins if p in listed)) > 1)
    named: dict[str, list[str]] = {}
    for pin in part.pins:
        name = pin.name.upper()
        if name in ("AA", "AB"):
            named.setdefault("A", []).append(pin.number)
        elif re.fullmatch(r"S[A-F]", name):
            named.setdefault("S", []).append(pin.number)
    found = [tuple(pins) for pins in named.values() if len(pins) <= 3]
    found += [tuple(pins[at : at + 2]) for pins in named.values() if len(pins) > 3 for at in range(0, len(pins) - 1, 2)]
    return tuple(group for group in found if len(group) > 1)


_MODULE_IN = re.compile(
    r"(?:[+-]?V?(?:IN|I)[+-]?\d?|AC\w{0,4}[~]?|~|L|N|LINE|NEUTRAL|VAC\w{0,2}|CTRL|REMOTE|ON/OFF|RC|EN|PE|FG|GND_?IN|GNDI|VI[NP]?\d?)"
)
_MODULE_OUT = re.compile(r"[+-]?V?(?:OUT|O)[+-]?\d?|TRIM|[+-]?S(?:ENSE)?|0V|VO\d?[+-]?|COM(?:MON)?|GND_?OUT|GNDO|[+-]\d+V|\d+V")


def _module(part: Part, candidate: Candidate) -> Groups:
    """Input pins against output pins of an isolated converter: by names, by the gap in a single row, by the ends of a double
    row."""
    entry: list[str] = []
    exit_: list[str] = []
    rest: list[Pin] = []
    for pin in part.pins:
        name = re.sub(r"[\s_()/]|(?<=\w)-(?=\w)", "", pin.name.upper())
        if name and _MODULE_IN.fullmatch(name):
            entry.append(pin.number)
        elif name and _MODULE_OUT.fullmatch(name):
            exit_.append(pin.number)
        else:
            rest.append(pin)
    if entry and exit_:
        for pin in rest:
            near_in, near_out = _distance(pin, entry), _distance(pin, exit_)
            if near_in != near_out and pin.net is not None:
                (entry if near_in < near_out else exit_).append(pin.number)
        return tuple(entry), tuple(exit_)
    return _module_by_numbers(part, candidate)


def _distance(pin: Pin, others: Sequence[str]) -> int:
    if not _numbered(pin):
        return 0
    return min((abs(int(pin.number) - int(other)) for other in others if other.isdecimal()), default=0)


def _module_by_numbers(part: Part, candidate: Candidate) -> Groups:
    numbers = sorted(int(pin.number) for pin in part.pins if _numbered(pin))
    if len(numbers) < 3:
        return ()
    count = package_pins(part, candidate)
    if count >= 14:
        ends = tuple(str(n) for n in numbers if n <= count / 4 or n > 3 * count / 4)
        middle = tuple(str(n) for n in numbers if str(n) not in ends)
        return (ends, middle) if ends and middle else ()
    gaps = [high - low for low, high in pairwise(numbers)]
    widest = max(gaps)
    if widest > 1 and gaps.count(widest) == 1:
        cut = numbers[gaps.index(widest)]
        return tuple(str(n) for n in numbers if n <= cut), tuple(str(n) for n in numbers if n > cut)
    return halves(part, candidate)


_CONTACT = re.compile(r"(?:COM|NO|NC|C|SW|CONTACT|POLE|S)_?-?(\d*)|([1-4])([124])")
_COIL = re.compile(r"A[12]|COIL[_\d+-]*\w?|[+-]|L[+-]|C\+|C-")


def _relay(part: Part, across_diode: Callable[[str, str], bool]) -> Groups:
    """Coil against contacts, contacts by pole where the names tell the pole."""
    named = [(pin, (pin.name if pin.name not in ("", "~") else pin.number).upper()) for pin in part.pins]
    coil = [pin.number for pin, name in named if _COIL.fullmatch(name)]
    poles: dict[str, list[str]] = {}
    contacts: list[str] = []
    for pin, name in named:
        match = _CONTACT.fullmatch(name)
        if match and pin.number not in coil:
            poles.setdefault(match[1] or match[2] or "", []).append(pin.number)
            contacts.append(pin.number)
    rest = [pin for pin, _ in named if pin.number not in coil and pin.number not in contacts]
    if len(coil) < 2 and len(contacts) >= 2 and len(rest) + len(coil) == 2:
        coil, rest = [*coil, *(pin.number for pin in rest)], []
    if len(coil) < 2 or not contacts:
        pair = next(
            (
                (a, b)
                for at, a in enumerate(part.pins)
                for b in part.pins[at + 1 :]
                if a.net and b.net and across_diode(a.net, b.net)
            ),
            None,
        )
        if pair is None:
            return ()
        coil = [pair[0].number, pair[1].number]
        return tuple(coil), tuple(pin.number for pin in part.pins if pin.number not in coil)
    by_pole = [tuple(pins) for pole, pins in sorted(poles.items()) if pole]
    together = tuple(contacts) if "" in poles or len(by_pole) < 2 or any(len(pins) < 2 for pins in by_pole) else ()
    return (tuple(coil), together) if together else (tuple(coil), *by_pole)


def _hall(part: Part, candidate: Candidate) -> Groups:
    """Conductor pins (IP+ IP-) against the signal side; a three-pin Hall switch has no conductor and joins all."""
    conductor = tuple(pin.number for pin in part.pins if re.fullmatch(r"I?P?[_ ]?[+-]|IP\w?[+-]?\d?|I[+-]\d?", pin.name.upper()))
    signal = tuple(pin.number for pin in part.pins if pin.number not in conductor)
    if conductor and len(signal) >= 2:
        return conductor, signal
    return halves(part, candidate) if len(part.pins) >= 8 else (tuple(pin.number for pin in part.pins),)
