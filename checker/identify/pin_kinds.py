"""What the pin names of a part say it is, whatever it is called.

Insulating kinds need a set of names that an ordinary part does not carry, and where pins are numbered like a package the two
sides must lie on its two sides: a pair of supplies on one half and another pair on the other.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache

MOST_PINS = 40  # parts with more are processors and connectors; no signature has that many


@dataclass(frozen=True, slots=True)
class Signature:
    """kind with the names that show it. sure: False when ordinary parts with such names exist."""

    kind: str
    names: str
    sure: bool = True
    attributes: Mapping[str, str] = field(default_factory=dict)


Pins = tuple[tuple[str, str], ...]  # (number, name)


@lru_cache(maxsize=4096)
def of_pins(pins: Pins) -> Signature | None:
    """The kind that the pin names show, or None. Numbers count where a pin has no name."""
    if not 2 <= len(pins) <= MOST_PINS:
        return None
    seen = _Names(pins)
    if not seen.labels:
        return None
    for look in _LOOKS:
        found = look(seen)
        if found is not None:
            return found
    return None


class _Names:
    """The names of one part in upper case: `all` of them in pin order, `some` as a set, `half` of each by its number."""

    def __init__(self, pins: Pins):
        named = [(number, _plain(name)) for number, name in pins]
        self.pins = [(number, name) for number, name in named if name and name not in _UNUSED]
        self.all = [name for number, name in self.pins if name != number]
        self.labels = [name if name not in ("", "~") else _plain(number) for number, name in named if name not in _UNUSED]
        self.some = set(self.all)
        self.one_a_line = "\n".join(self.all)
        self.count = len({number for number, _ in pins})
        numbers = [int(number) for number, _ in pins if number.isascii() and number.isdecimal() and len(number) < 4]
        self.numbered = len(numbers) == len(pins)
        # the last pin of a package with an odd count may be missing, or be the pad below the body
        self.middles = {(max(numbers, default=0) + 1) // 2, max(numbers, default=0) // 2}

    def has(self, pattern: str) -> bool:
        """Whether a whole name matches."""
        return _whole(pattern).search(self.one_a_line) is not None

    def every(self, pattern: str) -> int:
        """How many pins bear a name that matches."""
        return sum(1 for _ in _whole(pattern).finditer(self.one_a_line))

    def only(self, pattern: str) -> bool:
        """Whether every used pin's label matches."""
        return bool(self.labels) and sum(1 for _ in _whole(pattern).finditer("\n".join(self.labels))) == len(self.labels)

    def apart(self, one: str, other: str) -> bool:
        """Whether the names of `one` lie on one long side of the package and those of `other` on the other side."""
        if not self.numbered:
            return False
        places = [[int(number) for number, name in self.pins if _whole(pattern).fullmatch(name)] for pattern in (one, other)]
        if not all(places):
            return False
        (low, high) = sorted(places)
        return any(max(low) <= middle < min(high) for middle in self.middles)


@lru_cache(maxsize=256)
def _whole(pattern: str) -> re.Pattern[str]:
    """Matches a whole line; names hold no blank, so a line is a name."""
    return re.compile(f"^(?:{pattern})$", re.MULTILINE)


_UNUSED = frozenset({"NC", "N/C", "N.C.", "N.C", "DNC", "NC1", "NC2", "EP", "NIL"})


@lru_cache(maxsize=8192)
def _plain(name: str) -> str:
    """Upper case, without bars and blanks; `AC(L)` and `AC/L` are one name."""
    text = re.sub(r"[~{}\s]", "", name[:64].upper())
    return re.sub(r"[()]", "/", text).rstrip("/") if text else "~" if name.strip() == "~" else ""


_LIGHT = r"(?:A|AN|AN\d|ANODE\d?|A\d|LED\+|\+?IF)"
_DARK = r"(?:K|K\d|CA|CATH|CATHODE\d?|CAT|KATHODE|LED-|CA\d)"


def _optocoupler(seen: _Names) -> Signature | None:
    if not 4 <= seen.count <= 16:
        return None
    anode, cathode = seen.has(_LIGHT), seen.has(_DARK)
    emitter, collector = seen.every(r"(?:E|EM|EMIT|EMITTER|E\d)"), seen.every(r"(?:C|COL|COLL|COLLECTOR|C\d)")
    lit = (anode and (cathode or collector > emitter)) or {"A1", "A2"} <= seen.some
    if lit and emitter and collector and seen.only(rf"{_LIGHT}|{_DARK}|E\w{{0,6}}|C\w{{0,8}}|B|BASE|\d{{1,2}}|~"):
        return Signature("optocoupler", "anode, cathode, collector, emitter", attributes={"output": "transistor"})
    if not (anode and cathode) or seen.count > 8:
        return None
    if seen.has(r"MT1|T1|TR1|TRIAC1|M1") and seen.has(r"MT2|T2|TR2|TRIAC2|M2"):
        return Signature("optocoupler", "anode, cathode, two main terminals", attributes={"output": "triac"})
    if (
        seen.has(r"VCC|VDD|VS|VCC2|VDD2")
        and seen.has(r"GND|VEE|VSS|GND2|VEE2")
        and seen.has(r"V?O\w{0,3}|VOUT|OUT|OUTPUT|V01?|V02?")
    ):
        return Signature("optocoupler", "anode, cathode, supply and output", attributes={"output": "logic"})
    if seen.has(r"S1?|D1|D|S1/D1|\+|-") and seen.has(r"D2|D|S2|S") and seen.has(r"D\d?") and not seen.has("G"):
        return Signature("solid-state-relay", "anode, cathode, drain and source")
    return None


_SUPPLY_ONE = r"(?:V_?DD|V_?CC|V_?BUS|V_?S|V_?IN|V_?L)[_-]?1|V_?CCI|V_?DDI|V_?DDP|V_?INP"
_SUPPLY_TWO = r"(?:V_?DD|V_?CC|V_?BUS|V_?S)[_-]?2|V_?CCO|V_?DDO|V_?ISO\w{0,3}|V_?DDISO|VCC_?ISO|V_?SEC"
_GROUND_ONE = r"(?:GND|VSS)[_-]?1|GNDI|GNDP|GND_?IN|VSSI"
_GROUND_TWO = r"(?:GND|VSS|VEE)[_-]?2|GNDO|GNDS|GND[_-]?ISO|ISOGND|GISO|GND_?OUT|VSSO"


def _isolator(seen: _Names) -> Signature | None:
    """Two supplies with two grounds, each pair on its own side of the package."""
    if not 6 <= seen.count <= 36 or not (seen.has(_SUPPLY_TWO) and seen.has(_GROUND_TWO)):
        return None
    own = seen.has(_SUPPLY_ONE) and seen.has(_GROUND_ONE)
    if not own and not (seen.has(r"V_?DD|V_?CC|V_?IN|VDD1|VCC1") and seen.has(r"GND|VSS|GND1")):
        return None
    apart = seen.apart(_GROUND_ONE if own else r"GND|VSS|GND1", _GROUND_TWO)
    if seen.numbered and not apart:
        return None
    sure = apart and own
    if seen.has(r"V_?IN[PN+-]|IN[+-]|IN[PN]|V_?IN") and seen.has(r"V_?OUT[PN+-]|V_?O[PN+-]|DOUT|MDAT|MCLK|CLKIN"):
        return Signature("isolated-amplifier", "two supplies with two grounds, analogue input", sure)
    if seen.has(r"VEE2|OUTH|OUTL|OUT[+-]|CLAMP|DESAT|VOUTH|VOUTL|GATE"):
        return Signature("isolated-driver", "two supplies with two grounds, gate output", sure)
    return Signature("digital-isolator", "two supplies with two grounds", sure)


def _driver(seen: _Names) -> Signature | None:
    """One logic supply and two floating output supplies, each with its own return."""
    logic = seen.has(r"V_?CCI|V_?DDI|VDD1|VCC1|VCCI1") and seen.has(r"GND|GNDI|VSSI|GND1|GNDP")
    one = seen.has(r"VDDA|VCCA|VDD_?A") and seen.has(r"VSSA|GNDA|VEEA|VSS_?A")
    two = seen.has(r"VDDB|VCCB|VDD_?B") and seen.has(r"VSSB|GNDB|VEEB|VSS_?B")
    if not (logic and one and (two or seen.has(r"GNDI|VSSI|GND1"))) or seen.count > 20:
        return None
    if not seen.apart(r"V_?CCI|V_?DDI|VDD1|VCC1", r"VSSA|GNDA|VEEA|VSS_?A"):
        return None
    return Signature("isolated-driver", "a logic supply and output supplies with their own returns", two)


_CONTACT = r"(?:COM|NO|NC|C|POLE|COMMON)[_-]?\d?|[1-4][1234]|[1-4]"
_COIL = r"A1|A2|COIL\w{0,2}[+-]?|COIL[+-]|\+|-|L[+-]|C[+-]"


def _relay(seen: _Names) -> Signature | None:
    if not 4 <= seen.count <= 16:
        return None
    coil = [label for label in seen.labels if _whole(r"A1|A2|COIL\w{0,2}[+-]?").fullmatch(label)]
    if len(coil) == 2 and len(seen.labels) >= 4 and seen.only(rf"{_COIL}|{_CONTACT}"):
        if sum(1 for label in seen.labels if _whole(r"[1-4][1234]|COM\w*|NO\w*|NC\w*").fullmatch(label)) >= 2 or "COIL" in coil[0]:
            return Signature("relay", "coil and contacts")
    changeover = seen.has(r"COM\d?|C|POLE") and seen.has(r"NO\d?")
    supplied = seen.some & {"V+", "VCC", "VDD", "GND", "IN", "VSS", "EN", "SEL", "S", "V-", "VEE"}
    rest = [label for label in seen.labels if not _whole(r"(?:COM|NO|NC|C|POLE|COMMON)\d?").fullmatch(label)]
    if changeover and not supplied and len(rest) == 2 and all(_whole(rf"{_COIL}|\d{{1,2}}|~").fullmatch(label) for label in rest):
        return Signature("relay", "two coil pins beside COM, NO or NC")
    return None


def _transformer(seen: _Names) -> Signature | None:
    if not 4 <= seen.count <= 20:
        return None
    if {"AA", "AB"} <= seen.some and {"SA", "SB"} <= seen.some:
        return Signature("transformer", "AA, AB, SA, SB")
    winding = (
        r"(?:PRI|SEC|AUX|BIAS)\w{0,4}[+-]?|(?:PRIMARY|SECONDARY)\w{0,3}[+-]?|P\d|S\d|PR\d|SC\d|CT\w?|[PS][+-]|~|\d{1,2}|TAP\w?"
    )
    primary, secondary = seen.every(r"PRI\w{0,8}[+-]?|P\d|P[+-]|PR\d"), seen.every(r"SEC\w{0,10}[+-]?|S\d|S[+-]|SC\d")
    if primary >= 2 and secondary >= 2 and seen.only(winding):
        return Signature("transformer", "primary and secondary")
    return None


def _hall(seen: _Names) -> Signature | None:
    conductor = seen.has(r"IP_?\+(?:_?\d)?|IP1\+|IP\+|IPP|IP_P") and seen.has(r"IP_?-(?:_?\d)?|IP1-|IP-|IPN|IP_N")
    if (
        5 <= seen.count <= 24
        and conductor
        and seen.has(r"VCC|VDD|VS|V\+|5V|VC")
        and seen.has(r"VIOUT|VOUT\d?|OUT|IOUT|VZCR|VREF|FILTER|GND")
    ):
        return Signature("hall-sensor", "conductor IP+ IP-, supply and output")
    return None


_IN = r"[+-]V_?IN\d?|V_?IN[+-]|[+-]IN|IN[+-]|V_?IN|[+-]VI|VI[+-]|GND_?IN|GND_?I"
_OUT = (
    r"[+-]V_?OUT\d?|V_?OUT\d?[+-]|[+-]OUT\d?|OUT\d?[+-]|V_?OUT\d?|[+-]V_?O\d?|V_?O\d?[+-]|VO|0V|COM|COMMON|GND_?OUT|GND_?O"
    r"|[+-]\d{1,2}V|\d{1,2}V"
)
_EXTRA = r"CTRL|REMOTE|ON/OFF|RC|EN|TRIM|ADJ|CASE|[+-]?S(?:ENSE)?[+-]?|NC|GND|NP|CS|PE|FG|CY|CD|CB|~|\d{1,2}"
_AC = r"AC\d?|AC[/_-]?[LN]\d?|AC[/_-]?IN\w{0,2}|V?AC[/_-]?\w{0,2}|L|N|LINE|NEUTRAL|[LN]/AC"
_OUT_PLUS = r"\+V?_?O(?:UT)?\d?|V?_?O(?:UT)?\d?\+|V_?OUT\d?|VO|\+\d{1,2}V|\d{1,2}V|\+V|V\+|\+DC|DC\+|\+"
_OUT_MINUS = r"-V?_?O(?:UT)?\d?|V?_?O(?:UT)?\d?-|0V|COM|COMMON|GND_?O(?:UT)?|GND|-V|V-|-DC|DC-|-"


def _mains_module(seen: _Names) -> Signature | None:
    if not 4 <= seen.count <= 12 or not seen.only(rf"{_AC}|{_OUT}|{_OUT_PLUS}|{_OUT_MINUS}|{_EXTRA}"):
        return None
    entry = seen.every(_AC)
    named = seen.has(r"[+-]?V_?O\w{0,3}[+-]?|[+-]?OUT\w{0,2}[+-]?|0V|[+-]?\d{1,2}V")
    line = seen.has(r"(?:.*[/_-])?L|LINE|L/AC|ACL") and seen.has(r"(?:.*[/_-])?N|NEUTRAL|N/AC|ACN")
    if entry == 2 and (named or line) and seen.has(_OUT_PLUS) and seen.has(_OUT_MINUS):
        return Signature("isolated-module", "a.c. input and direct-voltage output", attributes={"acdc": "yes"})
    return None


def _module(seen: _Names) -> Signature | None:
    """Input and output each with its own return; a three-pin part is a regulator."""
    if not 4 <= seen.count <= 24 or not seen.only(rf"{_IN}|{_OUT}|{_EXTRA}"):
        return None
    plus_in = seen.has(r"\+V?_?I(?:N)?\d?|V?_?I(?:N)?\+|V_?IN")
    minus_in = seen.has(r"-V?_?I(?:N)?\d?|V?_?I(?:N)?-|GND_?I(?:N)?")
    plus_out = seen.has(r"\+V?_?O(?:UT)?\d?|V?_?O(?:UT)?\d?\+|V_?OUT\d?|VO|\+\d{1,2}V")
    minus_out = seen.has(r"-V?_?O(?:UT)?\d?|V?_?O(?:UT)?\d?-|0V|GND_?O(?:UT)?|COM|COMMON")
    if plus_in and plus_out and minus_out and (minus_in or seen.has(r"GND")):
        return Signature("isolated-module", "input and output with separate returns")
    return None


def _bridge(seen: _Names) -> Signature | None:
    rest = [label for label in seen.labels if label not in ("+", "-")]
    if (
        len(seen.labels) == 4
        and {"+", "-"} <= seen.some
        and len(rest) == 2
        and all(_whole(r"~\d?|AC\d?|\d").fullmatch(one) for one in rest)
    ):
        return Signature("bridge", "+, - and two a.c. pins")
    return None


def _filter(seen: _Names) -> Signature | None:
    load = seen.every(r"L'|N'|LOAD\w{0,3}|L_?OUT|N_?OUT|LO|NO")
    line = seen.every(r"L|N|LINE\w{0,3}|L_?IN|N_?IN|LI|NI")
    if 4 <= seen.count <= 6 and load == 2 and line == 2 and not seen.has("COM"):
        return Signature("filter", "line and load, each with two conductors")
    return None


def _exactly(kind: str, names: str, *groups: str) -> Callable[[_Names], Signature | None]:
    """Three-legged parts: every group is there and nothing else but tabs and numbers."""
    whole = "|".join(groups) + r"|TAB|PAD|~|\d{1,2}"

    def look(seen: _Names) -> Signature | None:
        if seen.count <= 10 and all(seen.has(group) for group in groups) and seen.only(whole):
            return Signature(kind, names)
        return None

    return look


_LOOKS: Sequence[Callable[[_Names], Signature | None]] = (
    _hall,
    _optocoupler,
    _isolator,
    _driver,
    _relay,
    _transformer,
    _filter,
    _bridge,
    _mains_module,
    _module,
    _exactly("mosfet", "G, D, S", r"G\d?|GATE", r"D\d?|DRAIN", r"S\d?|SOURCE"),
    _exactly("igbt", "G, C, E", r"G|GATE", r"C|COLLECTOR", r"E|EMITTER"),
    _exactly("bipolar", "B, C, E", r"B\d?|BASE", r"C\d?|COLLECTOR", r"E\d?|EMITTER"),
    _exactly("triac", "main terminals and gate", r"MT1|T1|A1", r"MT2|T2|A2", r"G|GATE"),
    _exactly("shunt-reference", "REF, A, K", r"REF|R|FB", r"A|ANODE", r"K|C|CATHODE"),
    _exactly("thyristor", "A, K, G", r"A|ANODE", r"K|CATHODE", r"G|GATE"),
    _exactly(
        "regulator",
        "IN, GND, OUT",
        r"IN|VIN|VI|INPUT|\+VIN",
        r"GND|VSS|ADJ|ADJ/GND|GND/ADJ|COM",
        r"OUT|VOUT|VO|OUTPUT|\+VOUT|OUT\d",
    ),
    _exactly("regulator", "IN, GND, EN, OUT", r"IN|VIN|VI", r"GND|VSS", r"OUT|VOUT|VO", r"EN|CE|SHDN|ON/OFF|BP|BYP|FB|ADJ|NR"),
    _exactly("diode", "A, K", r"A\d?|ANODE", r"K\d?|C|CATHODE|KK|AK|CC"),
)
