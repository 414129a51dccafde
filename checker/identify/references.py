"""What reference letters suggest. They mislead often (Y1 may be a capacitor, U4 a fuse), so they are asked last.

Common practice in several countries, no single source.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from checker.model.candidate import INSULATING, UNKNOWN


@dataclass(frozen=True, slots=True)
class Class:
    """kind: the usual one. kinds: all kinds that are usual under these letters. choose: by number of pins and value."""

    kind: str
    kinds: frozenset[str]
    choose: Callable[[int, str], str] | None = None

    def kind_for(self, count: int, value: str) -> str:
        """The kind for so many pins (0 not known) and that value text."""
        return self.choose(count, value) if self.choose is not None else self.kind


_RESISTIVE = frozenset({"resistor", "varistor", "thermistor", "potentiometer", "network"})
_DIODES = frozenset({"diode", "zener", "tvs", "led", "bridge"})
_TRANSISTORS = frozenset({"mosfet", "bipolar", "igbt", "jfet", "triac", "thyristor"})
_CIRCUITS = INSULATING | {"ic", "regulator", "controller", "module", "shunt-reference", "sensor"}
_RELAYS = frozenset({"relay", "solid-state-relay"})
_CONNECTORS = frozenset({"connector", "inlet", "test-point"})
_TRANSFORMERS = frozenset({"transformer", "gate-drive-transformer", "current-transformer"})
_OHMS = re.compile(r"\d{1,4}(?:[.,]\d)?\s?[kKMR]\d?(?:\b|_)")
_HERTZ = re.compile(r"\d(?:[.,]\d{1,6})?\s?[kM]Hz", re.IGNORECASE)


def _t(count: int, value: str) -> str:
    return "transformer" if count >= 4 or not count else "bipolar" if count == 3 else UNKNOWN


def _v(count: int, value: str) -> str:
    return "diode" if count == 2 else "bipolar" if count == 3 else UNKNOWN


def _x(count: int, value: str) -> str:
    return "crystal" if _HERTZ.search(value) else "connector"


def _p(count: int, value: str) -> str:
    return "potentiometer" if count == 3 and _OHMS.match(value) else "connector"


def _rv(count: int, value: str) -> str:
    return "potentiometer" if count == 3 else "varistor"


def _vr(count: int, value: str) -> str:
    return "potentiometer" if _OHMS.match(value) else "varistor" if count == 2 else "regulator"


_ROWS: tuple[tuple[str, str, frozenset[str], Callable[[int, str], str] | None], ...] = (
    ("R RES RSH RSHUNT", "resistor", _RESISTIVE, None),
    ("RN RA RM RP RR RNET", "network", _RESISTIVE, None),
    ("RV", "varistor", _RESISTIVE, _rv),
    ("VR", "regulator", _RESISTIVE | {"regulator"}, _vr),
    ("VAR VDR MOV", "varistor", _RESISTIVE, None),
    ("RT TH NTC PTC RK TR_NTC", "thermistor", _RESISTIVE | {"resettable-fuse"}, None),
    ("POT TRIM", "potentiometer", _RESISTIVE, None),
    ("C CX CY CE CAP CP", "capacitor", frozenset({"capacitor"}), None),
    ("L", "inductor", frozenset({"inductor", "ferrite", "common-mode-choke", "filter"}), None),
    ("FB BEAD", "ferrite", frozenset({"ferrite", "inductor"}), None),
    ("FL LF EMI FILT", "filter", frozenset({"filter", "common-mode-choke", "ferrite", "inductor"}), None),
    ("CMC", "common-mode-choke", frozenset({"common-mode-choke", "filter"}), None),
    ("D CR DI", "diode", _DIODES, None),
    ("VD", "diode", _DIODES, None),
    ("DZ ZD Z", "zener", _DIODES, None),
    ("TVS ESD", "tvs", _DIODES, None),
    ("LED LD HL", "led", _DIODES, None),
    ("BR DB BD REC", "bridge", _DIODES, None),
    ("Q FET VT", "mosfet", _TRANSISTORS, lambda count, value: UNKNOWN),
    ("TRIAC", "triac", _TRANSISTORS, None),
    ("T TR", "transformer", _TRANSFORMERS | _TRANSISTORS, _t),
    ("XFMR TX TV TRAFO", "transformer", _TRANSFORMERS, None),
    ("CT", "current-transformer", _TRANSFORMERS, None),
    ("V", "diode", _DIODES | _TRANSISTORS | {"varistor"}, _v),
    ("U IC DA DD N", "ic", _CIRCUITS, None),
    ("OK OC OPT OPTO ISO PC VU", "optocoupler", frozenset({"optocoupler", "digital-isolator", "solid-state-relay"}), None),
    ("K RL RLY RE REL RELAY", "relay", _RELAYS, None),
    ("SSR", "solid-state-relay", _RELAYS, None),
    ("PS PSU DCDC ACDC DC MOD M A CONV", "module", _CIRCUITS | {"motor"}, None),
    ("VREG REG LDO", "regulator", frozenset({"regulator", "ic"}), None),
    ("J CN CON CONN TB TERM SK HDR JACK XP XS XT USB RJ SV CONNECTOR BU ST KL", "connector", _CONNECTORS, None),
    ("P", "connector", _CONNECTORS | {"potentiometer"}, _p),
    ("X", "connector", _CONNECTORS | {"crystal"}, _x),
    ("Y XTAL ZQ OSC", "crystal", frozenset({"crystal"}), None),
    ("F FU FUSE XF", "fuse", frozenset({"fuse", "resettable-fuse"}), None),
    ("GDT", "gas-tube", frozenset({"gas-tube"}), None),
    ("SG", "spark-gap", frozenset({"spark-gap", "gas-tube"}), None),
    ("SW S SA SB BTN BUT KEY ENC", "switch", frozenset({"switch"}), None),
    ("JP SJ LK W", "jumper", frozenset({"jumper", "net-tie"}), None),
    ("NT", "net-tie", frozenset({"net-tie"}), None),
    ("BT BAT GB", "battery", frozenset({"battery", "connector"}), None),
    ("B", UNKNOWN, frozenset({"battery", "bridge", "buzzer"}), None),
    ("BZ LS SPK BUZ HA", "buzzer", frozenset({"buzzer"}), None),
    ("MIC MK", "sensor", frozenset({"sensor"}), None),
    ("ANT AE", "antenna", frozenset({"antenna"}), None),
    ("DS DIS LCD", "display", frozenset({"display", "led", "lamp"}), None),
    ("LA LP", "lamp", frozenset({"lamp"}), None),
    ("MOT", "motor", frozenset({"motor"}), None),
    ("TP TEST", "test-point", frozenset({"test-point"}), None),
    ("H MH MP HOLE", "hole", frozenset({"hole"}), None),
    ("FID FD", "fiducial", frozenset({"fiducial"}), None),
    ("HS", "heatsink", frozenset({"heatsink"}), None),
    ("LOGO", "logo", frozenset({"logo"}), None),
    ("SH", "shield", frozenset({"shield"}), None),
)
CLASSES: dict[str, Class] = {
    letters: Class(kind, kinds | ({kind} if kind != UNKNOWN else set()), choose)
    for listed, kind, kinds, choose in _ROWS
    for letters in listed.split()
}
