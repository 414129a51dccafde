"""Ratings that belong to a generic type whoever makes it.

Only figures on which makers' data sheets agree, or the lowest where they do not; every row says so. They are the weakest
statement of a rating: anything a BOM, a parts file or a declaration says goes before them.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType

from checker import limits
from checker.formulas import surge

Rating = tuple[float, str, str]
"""(value in SI, unit, form): (1000.0, "V", "peak")."""

AGREED = "generic type; makers' data sheets agree (from memory)"
LOWEST = "generic type; the lowest of makers' data sheets (from memory)"
RECTIFIER = "generic type; makers' data sheets agree, of surge currents the smallest (from memory)"
VARISTOR = "type code of several makers, whose data sheets agree (from memory)"


@dataclass(frozen=True, slots=True)
class Generic:
    """A generic type and what any maker promises of it.

    ratings: `voltage` is the repetitive reverse voltage of a diode, drain or collector voltage of a transistor, stand-off
    voltage of a suppressor, highest cathode voltage of a shunt reference, highest input voltage of a regulator, highest
    continuous a.c. voltage of a varistor; `surge_current` is the peak of one half wave that a rectifier stands; `current` and
    `power` as usual; `varistor_voltage` (at 1 mA), `zener_voltage`, `reference`, `output` (of a fixed regulator) and
    `minimum_current` are nominal figures that only their kinds have.
    source: where the figures are from.
    Insulation is not among them: what a coupler withstands is its maker's word alone.
    """

    type: str
    kind: str
    ratings: Mapping[str, Rating]
    source: str


@lru_cache(maxsize=8192)
def find(text: str) -> Generic | None:
    """The generic type named in a value or part number; None when there is none."""
    for word in re.split(r"[\s/,;:()\[\]_+|]+", text[: limits.CELL].upper()):
        found = _of_word(word) if 3 <= len(word) <= 32 else None
        if found is not None:
            return found
    return None


def _of_word(word: str) -> Generic | None:
    for pattern, read in _SERIES:
        match = pattern.match(word)
        if match is not None:
            return read(match)
    return None


_FORMS = {"diode": "peak", "bridge": "peak", "mosfet": "peak", "bipolar": "peak", "varistor": "rms"}
_UNITS = {"current": "A", "minimum_current": "A", "surge_current": "A", "power": "W"}
_FIGURE_FORMS = {"power": "", "surge_current": "peak"}


def _generic(name: str, kind: str, source: str = AGREED, **figures: float) -> Generic:
    ratings: dict[str, Rating] = {}
    for key, value in figures.items():
        form = _FORMS.get(kind, "dc") if key == "voltage" else _FIGURE_FORMS.get(key, "dc")
        ratings[key] = (value, _UNITS.get(key, "V"), form)
    return Generic(name, kind, MappingProxyType(ratings), source)


# diodes and bridges: repetitive reverse voltage, mean forward current, surge current of rectifiers

_STEPS = (50.0, 100.0, 200.0, 400.0, 600.0, 800.0, 1000.0)
_LETTERS = {"A": 50.0, "B": 100.0, "C": 150.0, "D": 200.0, "E": 300.0, "G": 400.0, "J": 600.0, "K": 800.0, "M": 1000.0}
_HER = (50.0, 100.0, 200.0, 300.0, 400.0, 600.0, 800.0, 1000.0)
_BRIDGE_STEPS = {"005": 50.0, "01": 100.0, "02": 200.0, "04": 400.0, "06": 600.0, "08": 800.0, "10": 1000.0}
_SURGE = 30.0  # A; of 1 A rectifiers
_SCHOTTKY = {"17": (20.0, 1.0), "18": (30.0, 1.0), "19": (40.0, 1.0), "20": (20.0, 3.0), "21": (30.0, 3.0), "22": (40.0, 3.0)}


def _stepped(name: str, current: float, steps: tuple[float, ...]) -> Callable[[re.Match[str]], Generic]:
    """The last digit counts the steps of reverse voltage from 1."""
    return lambda match: _generic(
        f"{name}{match[1]}", "diode", RECTIFIER, voltage=steps[int(match[1]) - 1], current=current, surge_current=_SURGE
    )


def _lettered(current: float) -> Callable[[re.Match[str]], Generic]:
    return lambda match: _generic(
        match[1] + match[2], "diode", RECTIFIER, voltage=_LETTERS[match[2]], current=current, surge_current=_SURGE
    )


def _schottky(match: re.Match[str]) -> Generic:
    volts, current = _SCHOTTKY[match[1]]
    return _generic(f"1N58{match[1]}", "diode", voltage=volts, current=current)


def _ss(match: re.Match[str]) -> Generic:
    return _generic(match[0], "diode", voltage=10.0 * int(match[2]), current=float(match[1]))


def _bridge(current: float, surge_current: float, steps: Mapping[str, float]) -> Callable[[re.Match[str]], Generic]:
    return lambda match: _generic(
        match[0], "bridge", RECTIFIER, voltage=steps[match[1]], current=current, surge_current=surge_current
    )


# varistors: highest continuous a.c. voltage


def _varistor_at_1_ma(match: re.Match[str]) -> Generic | None:
    """10D471K: 10 mm, 47 x 10^1 V at 1 mA."""
    volts = float(int(match[1]) * 10 ** int(match[2]))
    return _varistor(f"varistor of {volts:g} V at 1 mA", surge.continuous(volts))


def _varistor_rated(match: re.Match[str]) -> Generic | None:
    """S14K275: 14 mm, 275 V a.c."""
    return _varistor(f"varistor of {match[1]} V a.c.", float(match[1]))


def _varistor_coded(match: re.Match[str]) -> Generic | None:
    """B72214S0271K101: 27 x 10^1 V a.c., the last figure of the voltage left out."""
    rounded = int(match[1]) * 10 ** int(match[2])
    whole = (volts for volts in surge.VARISTORS.values() if rounded <= volts < rounded + 10 ** int(match[2]))
    return _varistor(f"varistor of {match[1]}{match[2]}", next(whole, None))


def _varistor(name: str, volts: float | None) -> Generic | None:
    at_1_ma = next((one for one, other in surge.VARISTORS.items() if other == volts), None)
    if volts is None or at_1_ma is None:
        return None
    return _generic(name, "varistor", VARISTOR, voltage=volts, varistor_voltage=float(at_1_ma))


# zener diodes and suppressors

_1N47 = (3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5, 8.2, 9.1, 10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39)
_1N4728 = (*_1N47, 43, 47, 51, 56, 62, 68, 75, 82, 91, 100)  # 1N4728 to 1N4764
_CODED_POWER = {"BZX55": 0.5, "BZX79": 0.4, "BZX84": 0.225, "BZT52": 0.2, "BZX85": 1.0, "BZV55": 0.4, "BZX384": 0.2}


def _zener_1n47(match: re.Match[str]) -> Generic:
    volts = float(_1N4728[int(match[1]) - 28])
    return _generic(f"1N47{match[1]}", "zener", zener_voltage=volts, power=1.0)


def _zener_coded(match: re.Match[str]) -> Generic:
    volts = float(match[2].replace("V", "."))
    return _generic(f"{match[1]} {volts:g} V", "zener", LOWEST, zener_voltage=volts, power=_CODED_POWER[match[1]])


def _standoff(match: re.Match[str]) -> Generic:
    """SMAJ33A: the number is the stand-off voltage."""
    return _generic(f"SM{match[1]}J{match[2]}", "tvs", voltage=float(match[2]))


def _breakdown(match: re.Match[str]) -> Generic:
    """P6KE200A: the number is the nominal breakdown voltage."""
    return _generic(f"{match[1]}{match[2]}", "tvs", zener_voltage=float(match[2]))


def _fixed(generic: Generic) -> Callable[[re.Match[str]], Generic]:
    return lambda _: generic


# type, pattern, kind, collector or drain voltage, direct current
_TRANSISTORS = (
    ("2N7002", r"2N7002", "mosfet", 60.0, 0.115),
    ("BSS138", r"BSS138", "mosfet", 50.0, 0.2),
    ("BS170", r"BS170", "mosfet", 60.0, 0.3),
    ("2N3904", r"(?:2N|MMBT|PMBT)3904", "bipolar", 40.0, 0.2),
    ("2N3906", r"(?:2N|MMBT|PMBT)3906", "bipolar", 40.0, 0.2),
    ("2N2222A", r"(?:P?2N|PN|MMBT)2222A", "bipolar", 40.0, 0.6),
    ("2N2222", r"(?:P?2N|PN|MMBT)2222(?!A)", "bipolar", 30.0, 0.6),
    ("BC846", r"BC8[45]6", "bipolar", 65.0, 0.1),
    ("BC847", r"BC8[45]7", "bipolar", 45.0, 0.1),
    ("BC817", r"BC8[01]7", "bipolar", 45.0, 0.5),
    ("BC547", r"BC5[45]7", "bipolar", 45.0, 0.1),
)

_TL431 = _generic("TL431", "shunt-reference", LOWEST, voltage=36.0, reference=2.495, minimum_current=1e-3)
_TLV431 = _generic("TLV431", "shunt-reference", LOWEST, voltage=6.0, reference=1.24)

_LINEAR_REFERENCE = _generic("317", "regulator", reference=1.25)


def _fixed_linear(match: re.Match[str]) -> Generic:
    """7805, 78L12, 7905: the last two figures are the output, negative for the 79 series; 35 V in, the small L types 30 V."""
    volts = float(match[2]) * (-1 if match[1] == "79" else 1)
    small = f"{match[1]}L" in match[0]
    return _generic(f"{match[1]}{match[2]}", "regulator", LOWEST, output=volts, voltage=30.0 if small else 35.0)


def _low_drop(match: re.Match[str]) -> Generic:
    """1117-3.3, 1117-33: the output; 1117-ADJ holds its reference."""
    said = match[1]
    if not said[0].isdigit():
        return _generic("1117 adjustable", "regulator", reference=1.25)
    volts = float(said if "." in said else f"{said[0]}.{said[1:] or 0}")
    return _generic(f"1117-{volts:g}", "regulator", LOWEST, output=volts, voltage=15.0)


_DISC = "(?:05|07|10|14|20|25)"  # mm
_SERIES: list[tuple[re.Pattern[str], Callable[[re.Match[str]], Generic | None]]] = [
    (re.compile(pattern + r"(?![0-9])"), read)
    for pattern, read in (
        (r"(?:1N|LL|SM)400([1-7])", _stepped("1N400", 1.0, _STEPS)),
        (r"UF400([1-7])", _stepped("UF400", 1.0, _STEPS)),
        (r"HER10([1-8])", _stepped("HER10", 1.0, _HER)),
        (r"FR10([1-7])", _stepped("FR10", 1.0, _STEPS)),
        (r"(?:1N|LL|LS)4148", _fixed(_generic("1N4148", "diode", LOWEST, voltage=75.0, current=0.15))),
        (r"1N4448", _fixed(_generic("1N4448", "diode", LOWEST, voltage=75.0, current=0.15))),
        (r"(?:1N|B)58(1[7-9]|2[0-2])", _schottky),
        (r"SS([1235])([2-6])", _ss),
        (r"(ES1)([A-EGJ])", _lettered(1.0)),
        (r"([UR]S1)([ABDGJKM])", _lettered(1.0)),
        (
            r"MB([124678]|10)S",
            _bridge(0.5, 30.0, {"1": 100.0, "2": 200.0, "4": 400.0, "6": 600.0, "7": 800.0, "8": 800.0, "10": 1000.0}),
        ),
        (r"DB10([1-7])", _bridge(1.0, 30.0, {str(at + 1): volts for at, volts in enumerate(_STEPS)})),
        (r"KBP2(005|01|02|04|06|08|10)", _bridge(2.0, 60.0, _BRIDGE_STEPS)),
        (r"DF(005|01|02|04|06|08|10)[MS]?", _bridge(1.0, 30.0, _BRIDGE_STEPS)),
        (rf"(?:(?:MOV|ZOV|VDR)-?)?{_DISC}D-?([1-9]\d)([0-3])", _varistor_at_1_ma),
        (rf"(?:TVR{_DISC}|ERZ-?[VE]{_DISC}D|(?:FNR|CNR)-?{_DISC}[KD]|JVR-?{_DISC}N)([1-9]\d)([0-3])", _varistor_at_1_ma),
        (rf"([1-9]\d)([0-3])KD{_DISC}", _varistor_at_1_ma),
        (rf"(?:SIOV-?)?S{_DISC}K(\d{{2,3}})", _varistor_rated),
        (r"V(\d{2,3})LA\d{1,2}[AB]?P?(?![A-Z])", _varistor_rated),
        (r"B722\d\dS\d([1-9]\d)([01])K\d{3}", _varistor_coded),
        (r"1N47(2[89]|[345]\d|6[0-4])", _zener_1n47),
        (r"(BZX55|BZX79|BZX84|BZX85|BZX384|BZT52|BZV55)-?[BC](\d{1,2}V\d|\d{1,2})", _zener_coded),
        (r"SM([ABC])J(\d{1,3}(?:\.\d)?)C?A?", _standoff),
        (r"(P4KE|P6KE|1\.5KE)(\d{1,3}(?:\.\d)?)C?A?", _breakdown),
        *(
            (pattern, _fixed(_generic(name, kind, LOWEST, voltage=volts, current=current)))
            for name, pattern, kind, volts, current in _TRANSISTORS
        ),
        (r"(?:AZ|KA|LM|TL|ATL|NCP)431", _fixed(_TL431)),
        (r"TLV431", _fixed(_TLV431)),
        (r"(?:L|LM|UA|MC|KA|NJM|NJW|TA)?(78|79)[LMST]?(05|06|08|09|10|12|15|18|24)", _fixed_linear),
        (r"(?:LM|LD|AMS|AP|AZ|NCP|LT|ZLDO|TLV|REG|LF)?1117\w{0,4}-?(1\.[258]|2\.5|2\.85|3\.3|5\.0|18|25|33|50|ADJ)", _low_drop),
        (r"(?:LM|LT|L|KA|UA)317", _fixed(_LINEAR_REFERENCE)),
    )
]
