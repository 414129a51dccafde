"""Names for pins that only have numbers, where the symbol's name spells them or everybody numbers such parts alike.

Bare netlists and test netlists of boards carry numbers alone. The letters at the end of a symbol's name are its pins in order
(`Q_NMOS_GDS`, `D_Bridge_+-AA`, `D_Schottky_Dual_AKA`). Two-pin diodes have their cathode at pin 1, power transistors and rectifier
bridges in packages of their own are numbered alike by all makers (common practice, no source). Where that rests on usage alone
and the other diodes of the board do not confirm it, the pins are marked as `usual`: voltages follow them, polarity is not judged.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import replace

from checker.model.candidate import Candidate
from checker.model.circuit import Design, Part
from checker.model.names import ground_like, supply_volts

CONFIRMED = 2  # diodes of a board that stand as the usual numbering says, from which on it is taken for known
_DIODES = frozenset({"diode", "zener", "tvs", "led"})
_SPELLED = re.compile(r"_((?:[GDS]{3}|[BCE]{3}|[GCE]{3}|[AK]{2,4}|[KAG]{3}|[+\-A~]{4}))(?:_|\Z)")
_POWER = re.compile(r"TO-?(?:220|247|251|252|262|263|264|3P)(?![0-9])|(?<![A-Z])D2?-?PAK|IPAK", re.IGNORECASE)
_SMALL = re.compile(r"SOT-?23(?![0-9-])|SOT-?23-3(?![0-9])", re.IGNORECASE)
_INLINE = re.compile(r"(?<![A-Z])(?:GBU|GBJ|KBP|KBL)(?![A-Z])|(?<![A-Z])(?:GBU|GBJ|KBP|KBL)(?=[0-9_])", re.IGNORECASE)
_BRIDGE = {"+": "+", "-": "-", "A": "~", "~": "~"}
# (kind, package): names of pins 1, 2, 3 (from memory; the same with nearly every maker)
_USUAL = (
    ("mosfet", _POWER, "GDS"),
    ("mosfet", _SMALL, "GSD"),
    ("igbt", _POWER, "GCE"),
    ("bipolar", _SMALL, "BEC"),
    ("bipolar", _POWER, "BCE"),
)


def with_pin_names(design: Design, choice: Mapping[str, Candidate]) -> Design:
    """The design with names for the pins of parts that have none; parts that nothing names stay as they are."""
    bare = {ref: part for ref, part in design.parts.items() if part.pins and not any(pin.name.strip() for pin in part.pins)}
    named = {ref: made for ref, part in bare.items() if (made := _named(part, choice[ref].kind)) is not None}
    found = {ref: part for ref, part in named.items() if not _contradicted(part, design, choice)}
    diodes = [ref for ref, part in bare.items() if ref not in found and _two(part, choice[ref].kind)]
    votes = {ref: _vote(bare[ref], design, choice) for ref in diodes if choice[ref].kind != "led"}
    total = sum(votes.values())
    first, second = ("A", "K") if total < 0 else ("K", "A")
    for ref in diodes:
        sure = abs(total - votes.get(ref, 0)) >= CONFIRMED
        found[ref] = replace(
            bare[ref],
            pins=tuple(replace(pin, name=first if pin.number == "1" else second, usual=not sure) for pin in bare[ref].pins),
        )
    return replace(design, parts={**design.parts, **found}) if found else design


def _named(part: Part, kind: str) -> Part | None:
    """A part with the pin names that its symbol spells or its package implies; None where neither does."""
    count = len(part.pins)
    if {pin.number for pin in part.pins} != {str(at + 1) for at in range(count)}:
        return None
    spelled = _spelled(part, kind, count)
    names = spelled or next(_implied(part, kind, count), ())
    if not names:
        return None
    return replace(part, pins=tuple(replace(pin, name=names[int(pin.number) - 1], usual=not spelled) for pin in part.pins))


def _spelled(part: Part, kind: str, count: int) -> tuple[str, ...]:
    match = _SPELLED.search(part.text("symbol"))
    if match is None or len(match[1]) != count:
        return ()
    if kind == "bridge":
        return tuple(_BRIDGE[letter] for letter in match[1]) if set(match[1]) == {"+", "-", "A"} else ()
    wanted = {"mosfet": "GDS", "igbt": "GCE", "bipolar": "BCE", "diode": "AK", "zener": "AK", "tvs": "AK", "thyristor": "KAG"}
    return tuple(match[1]) if set(match[1]) == set(wanted.get(kind, "")) else ()


def _implied(part: Part, kind: str, count: int) -> Iterator[tuple[str, ...]]:
    package = part.text("footprint")
    if count == 3:
        yield from (tuple(names) for of, pattern, names in _USUAL if of == kind and pattern.search(package))
    if kind == "bridge" and count == 4 and any(_INLINE.search(text) for text in (package, part.text("value"), part.text("type"))):
        yield ("+", "~", "~", "-")


def _contradicted(part: Part, design: Design, choice: Mapping[str, Candidate]) -> bool:
    """Whether the surroundings of a bridge say otherwise than usage: that its + is its -, or that one of its ~ is a rail."""
    told = [(pin.name, _plus(pin.net, design, choice)) for pin in part.pins if pin.usual]
    wrong = {"+": -1, "-": 1}
    return {name for name, _ in told} == {"+", "-", "~"} and any(plus and wrong.get(name, plus) == plus for name, plus in told)


def _two(part: Part, kind: str) -> bool:
    return kind in _DIODES and [pin.number for pin in part.pins] in (["1", "2"], ["2", "1"])


def _vote(part: Part, design: Design, choice: Mapping[str, Candidate]) -> int:
    """1 when the surroundings say that pin 1 is the cathode, -1 when the other way round, 0 when they say nothing."""
    at = {pin.number: pin.net for pin in part.pins}
    score = _plus(at.get("1"), design, choice) - _plus(at.get("2"), design, choice)
    return (score > 0) - (score < 0)


def _plus(net: str | None, design: Design, choice: Mapping[str, Candidate]) -> int:
    """1 for a net that is named as a supply or hangs on the plus of a polarised capacitor, -1 for a ground, else 0."""
    if net is None:
        return 0
    if ground_like(net):
        return -1
    volts = supply_volts(net)
    if volts is not None:
        return 1 if volts > 0 else -1
    for ref, number in design.nets[net].pins:
        if ref in choice and choice[ref].kind == "capacitor" and "polari" in design.parts[ref].text("symbol").lower():
            name = next((pin.name.strip() for pin in design.parts[ref].pins if pin.number == number), "")
            return 1 if (name or number) in ("+", "1", "POS") else -1
    return 0
