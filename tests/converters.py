"""Parts and stages of converters in the form of the case files of rules: each function gives lines `REF: {...}`."""

from __future__ import annotations


def part(ref: str, value: str, symbol: str, pins: str, names: str = "", more: str = "") -> str:
    named = f", names: {{{names}}}" if names else ""
    return f"{ref}: {{value: {value}, symbol: {symbol}{more}, pins: {{{pins}}}{named}}}\n"


def switch(ref: str, drain: str, source: str) -> str:
    gate = f"G{ref}"
    fet = part(ref, "NMOS", "Q_NMOS", f"1: {gate}, 2: {drain}, 3: {source}", "1: G, 2: D, 3: S", ", description: MOSFET N-CH")
    return fet + part(f"R9{ref[1:]}", "10k", "R", f"1: {gate}, 2: {source}")


def diode(ref: str, anode: str, cathode: str, value: str = "UF4007") -> str:
    return part(ref, value, "D", f"1: {cathode}, 2: {anode}", "1: K, 2: A")


def schottky(ref: str, anode: str, cathode: str) -> str:
    return part(ref, "SS34", "D_Schottky", f"1: {cathode}, 2: {anode}", "1: K, 2: A")


def capacitor(ref: str, one: str, two: str, value: str = "100uF") -> str:
    return part(ref, value, "C", f"1: {one}, 2: {two}")


def choke(ref: str, one: str, two: str, value: str = "100uH") -> str:
    return part(ref, value, "L", f"1: {one}, 2: {two}")


def core(turns: str, *nets: str) -> str:
    """nets: of pins 1, 2, 3 ..."""
    pins = ", ".join(f"{at}: {net}" for at, net in enumerate(nets, 1))
    return part("T1", "TRAFO", "Transformer", pins, more=f', turns: "{turns}"')


INPUT = part("J1", "SUPPLY", "Screw_Terminal_01x02", "1: VIN, 2: GND") + capacitor("C1", "VIN", "GND", "10uF")
OUTPUT = capacitor("C2", "VO", "SGND") + part("J2", "LOAD", "Conn_01x02", "1: VO, 2: SGND")
MAINS = (
    part("J1", "MAINS", "Screw_Terminal_01x02", "1: AC_L, 2: AC_N")
    + part("F1", "T2A", "Fuse", "1: AC_L, 2: LF", more=", description: FUSE 2A 250VAC T 5x20")
    + part("BR1", "DF10", "D_Bridge", "1: VIN, 2: GND, 3: LF, 4: AC_N", '1: +, 2: "-", 3: "~", 4: "~"')
    + capacitor("C1", "VIN", "GND", "47uF")
)
FREEWHEEL = diode("D1", "S1", "X", "SS34") + diode("D2", "SGND", "X", "SS34") + choke("L1", "X", "VO")
FULL_WAVE = schottky("D1", "S1", "X") + schottky("D2", "S2", "X") + choke("L1", "X", "VO")


def direct(volts: float, output: float | None, rails: str = "") -> str:
    outputs = f", outputs: {{VO: {{voltage: {output} V, return: SGND}}}}" if output is not None else ""
    return f"{{supply: {{dc: {volts} V, tolerance: 0 %, origin: isolated{outputs}}}{rails and f', rails: {{{rails}}}'}}}"


def mains(volts: float, output: float) -> str:
    return f"{{supply: {{mains: {volts} V, tolerance: 0 %, outputs: {{VO: {{voltage: {output} V, return: SGND}}}}}}}}"


def flyback(turns: str, rectifier: str) -> str:
    return core(turns, "VIN", "DR", "S1", "SGND") + switch("Q1", "DR", "GND") + rectifier + OUTPUT
