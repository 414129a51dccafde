"""Which net hangs on which terminal of a part, by the names of its pins; None where the names do not tell."""

from __future__ import annotations

from collections.abc import Iterable

from checker.model.circuit import Part

ANODE = frozenset({"A", "ANODE", "AN", "A1"})
_NO_LIGHT = frozenset("E EM EMITTER B BASE COL COLLECTOR NC VCC VDD VO OUT GND VEE MT1 MT2 T1 T2 D D1 D2 S".split())
COIL = frozenset({"A1", "A2", "COIL", "COIL1", "COIL2", "COIL+", "COIL-"})
CATHODE = frozenset({"K", "C", "CATHODE", "CA", "KATHODE"})
_PLUS = frozenset({"+", "V+", "DC+", "POS", "P", "+VE", "VDC+"})
_MINUS = frozenset({"-", "V-", "DC-", "NEG", "-VE", "VDC-"})
_ALTERNATING = frozenset({"~", "AC", "AC1", "AC2", "~1", "~2", "A1", "A2", "AC~", "~A", "~B", "1AC", "2AC"})
GROUND = frozenset("GND VSS AGND PGND DGND SGND COM GROUND V- VEE EP EPAD GND1 GND2 VSSA".split())
SUPPLY = frozenset("VCC VDD VIN VI VDDA AVDD DVDD VS V+ VCC1 VCC2 VDD1 VDD2 VBAT BP BPP BP/M VDDIO AVCC IN VAUX".split())


def named(part: Part, names: Iterable[str]) -> tuple[str, ...]:
    """The nets of pins with one of these names (upper case), each once, in pin order."""
    wanted = frozenset(names)
    return tuple(dict.fromkeys(pin.net for pin in part.pins if pin.net is not None and pin.name.strip().upper() in wanted))


def anode_and_cathode(part: Part) -> tuple[str, str] | None:
    """(net of the anode, net of the cathode) of a part with one of each."""
    anodes, cathodes = named(part, ANODE), named(part, CATHODE)
    if not anodes and not cathodes:  # some symbols number the pins A and K
        numbers = {pin.number.upper(): pin.net for pin in part.pins if pin.net is not None}
        anodes = tuple(net for number, net in numbers.items() if number in ANODE)
        cathodes = tuple(net for number, net in numbers.items() if number in CATHODE)
    return (anodes[0], cathodes[0]) if len(anodes) == 1 and len(cathodes) == 1 and anodes != cathodes else None


def junctions(part: Part) -> tuple[tuple[str, str], ...]:
    """(net of the anode, net of the cathode) of each diode of a part: one, or several with a common anode or cathode."""
    single = anode_and_cathode(part)
    if single is not None:
        return (single,)
    anodes, cathodes = named(part, ANODE | {"A2", "A3"}), named(part, CATHODE | {"K1", "K2", "C1", "C2"})
    if min(len(anodes), len(cathodes)) != 1:
        return ()
    return tuple((anode, cathode) for anode in anodes for cathode in cathodes if anode != cathode)


def bridge(part: Part) -> tuple[str, str, tuple[str, ...]] | None:
    """(net of +, net of -, nets of the a.c. pins) of a rectifier bridge."""
    plus, minus = named(part, _PLUS), named(part, _MINUS)
    if len(plus) != 1 or len(minus) != 1:
        return None
    alternating = named(part, _ALTERNATING) or tuple(net for net in part.nets() if net not in (plus[0], minus[0]))
    return (plus[0], minus[0], alternating) if alternating else None


def coil(part: Part) -> frozenset[str]:
    """The nets on the coil of a relay, by numbers or names of its pins; empty where they say nothing."""
    return frozenset(pin.net for pin in part.pins if pin.net is not None and {pin.number.upper(), pin.name.strip().upper()} & COIL)


def light(part: Part) -> tuple[str, str] | None:
    """(anode, cathode) nets of the one light-emitting diode of a coupler; by the numbers 1 2 of a body with four or six pins where
    names tell no other thing (from memory; every maker numbers it so). Those of an a.c. input have no order."""
    anode, cathode = named(part, ANODE), named(part, CATHODE - {"C"})
    if len(anode) == len(cathode) == 1:
        return anode[0], cathode[0]
    at = {pin.number: pin.net for pin in part.pins}
    small = set(at) <= set("123456") and not any(pin.name.strip().upper() in _NO_LIGHT for pin in part.pins if pin.number in "12")
    one, two = at.get("1"), at.get("2")
    return (one, two) if small and one and two else None


def coupler(part: Part) -> tuple[str, str, str, str] | None:
    """(anode, cathode, collector, emitter) nets of a coupler with a transistor output; by the numbers 1 2 4 3 of a body with
    four pins where names say nothing (from memory; every maker numbers it so)."""
    light = named(part, ANODE), named(part, CATHODE - {"C"})
    output = named(part, ("C", "COL", "COLLECTOR")), named(part, ("E", "EM", "EMITTER"))
    if all(len(nets) == 1 for nets in (*light, *output)):
        return light[0][0], light[1][0], output[0][0], output[1][0]
    at = {pin.number: pin.net for pin in part.pins}
    if set(at) == {"1", "2", "3", "4"} and not any((*light, *output)):
        anode, cathode, emitter, collector = at["1"], at["2"], at["3"], at["4"]
        if anode and cathode and emitter and collector:
            return anode, cathode, collector, emitter
    return None
