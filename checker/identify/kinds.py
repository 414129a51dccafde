"""The kind of a part, and why.

Order of trust: a declared kind; the type family of value, part number or symbol; words of symbol, value, description, library
and footprint; pin names; the reference letters; the value. A part wrongly taken for an ordinary one makes a sound board look
shorted, and one wrongly taken for an insulating one can hide a short: a word alone never makes an insulating part of something
with the reference of a connector, resistor, capacitor, diode or transistor, or with too few pins.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache

from checker import limits
from checker.identify import families, pin_kinds, word_kinds
from checker.identify.described import is_name
from checker.identify.references import CLASSES, Class
from checker.identify.word_kinds import Hit
from checker.model.candidate import CONNECTORS, INSULATING, MECHANICAL, UNKNOWN
from checker.model.circuit import Part
from checker.model.fact import Fact
from checker.model.kind_words import normal_kind
from checker.neutral import neutral

__all__ = ["Judged", "judge", "normal_kind", "prefix"]


@dataclass(frozen=True, slots=True)
class Judged:
    """kind of `KINDS`. sure: False when it rests on a reference letter or one weak word. listed: declared or a known type family.

    because: one sentence that names the words and where they stand. attributes: output (triac, thyristor, transistor, logic,
    driver) of couplers and solid-state relays, offline, acdc and magnetics as `yes`.
    """

    kind: str
    sure: bool
    listed: bool
    because: str
    attributes: dict[str, str] = field(default_factory=dict)


# where text is read, most telling first; links and distributors' numbers are never read
_PLACES = ("symbol", "value", "type", "description", "library", "footprint")
_TYPED = ("value", "type", "symbol")
_WEIGHT = {"symbol": 3, "value": 2, "type": 2, "description": 3, "library": 1, "footprint": 1}
_READ = frozenset({*_PLACES, "kind"})

# fewest pins a part of the kind can have
_LEAST_PINS = {"current-transformer": 2, "digital-isolator": 6, "isolated-driver": 6, "isolated-amplifier": 6, "hall-sensor": 4}
# kinds whose words stand for more special ones too: a chip footprint `L_0603`, `transceiver` of an isolated one
_GENERIC = frozenset({"resistor", "capacitor", "inductor", "diode", "ic", "module", "sensor", "bipolar"})
# kinds that say little: pin names or a more telling word may say more
_VAGUE = frozenset({"ic", "module", "sensor", "regulator", "controller", UNKNOWN})
# references of parts that are never insulating by a word alone
_PLAIN = frozenset(
    "R C D Q J P X CN CON CONN F FB FU RV TH RT NTC PTC Y SW S BT H MH FID TP LED DZ ZD VD VT TVS CX CY CE BR DB JP L".split()
)

Texts = tuple[tuple[str, str], ...]  # (attribute, text)


def judge(part: Part, facts: Sequence[Fact] | None = None) -> Judged:
    """The kind that the facts of one choice of a part, its pins and its reference show. facts: default those of the part."""
    stated = [
        fact
        for fact in (part.facts if facts is None else facts)
        if fact.attribute in _READ and isinstance(fact.value, str) and fact.value
    ]
    if any(fact.trust != stated[0].trust for fact in stated):
        stated.sort(key=lambda fact: -fact.trust)
    texts = tuple((fact.attribute, str(fact.value)[: limits.CELL]) for fact in stated)
    few = len(part.pins) <= pin_kinds.MOST_PINS
    pins = tuple((pin.number, pin.name) for pin in part.pins) if few else ()
    found = _judge(prefix(part.ref), texts, pins, len(part.pins))
    return Judged(found.kind, found.sure, found.listed, found.because, dict(found.attributes))


_LETTERS = re.compile(r"[^\W\d_]+")


def prefix(ref: str) -> str:
    """The letters a reference begins with, in upper case, or those in front of its number where only these are known."""
    groups: list[str] = _LETTERS.findall(ref[:64].upper())
    if not groups:
        return ""
    first, last = groups[0], groups[-1]
    return last if first not in CLASSES and last in CLASSES and len(groups) > 1 else first


@lru_cache(maxsize=4096)
def _judge(letters: str, texts: Texts, pins: pin_kinds.Pins, count: int) -> Judged:
    family = _family(letters, texts, count)
    for attribute, text in texts:
        kind = normal_kind(text) if attribute == "kind" else None
        if kind is not None:
            more = dict(family.attributes) if family is not None and family.kind == kind else {}
            return Judged(kind, True, True, f"kind given as `{neutral(text, limit=60)}`", more)
    signature = pin_kinds.of_pins(pins) if pins else None
    if family is not None:
        if family.kind == "mosfet" and signature is not None and signature.kind == "igbt":
            return Judged("igbt", True, True, f"{family.because}; pin names: {signature.names}")  # 20N60 is either
        return family
    group = CLASSES.get(letters)
    wound = next((place for place, text in texts if place == "description" and count >= 4 and _insulated_winding(text)), "")
    if wound and letters == "L":
        return Judged("transformer", False, False, f"an auxiliary winding with a test voltage in the {wound}")
    words = _words(letters, group, texts, count)
    if signature is not None and _contradicted(signature.kind, letters, count, words):
        signature = None
    if words is not None and not (signature is not None and _says_more(signature.kind, words)):
        sure = words.sure or (signature is not None and signature.kind == words.kind)
        more = {**words.attributes, **_said_of(words.kind, texts)}
        if signature is not None and signature.kind == words.kind:
            more = {**signature.attributes, **more}
        return Judged(words.kind, sure, False, words.because, more)
    if signature is not None:
        return Judged(signature.kind, signature.sure, False, f"pin names: {signature.names}", dict(signature.attributes))
    return _by_reference(letters, group, texts, count)


def _family(letters: str, texts: Texts, count: int) -> Judged | None:
    """The first known type among value, part number and symbol that can stand under such a reference."""
    for attribute, text in texts:
        found = families.find(text) if attribute in _TYPED or is_name(attribute, text) else None
        if found is None:
            continue
        kind = found.family.kind
        attributes = dict(found.family.attributes)
        if kind == "transformer" and letters in _CONNECTING:
            kind, attributes = "connector", {"magnetics": "yes"}
        if not _possible(kind, letters, count):
            continue
        where = {"type": "part number"}.get(attribute, attribute)
        return Judged(kind, True, True, f"type family {found.family.what} in {where} `{neutral(found.word, limit=60)}`", attributes)
    return None


_CONNECTING = frozenset(letters for letters, group in CLASSES.items() if group.kind == "connector")
_PASSIVE = frozenset("R C L CX CY CE RN FB".split())


def _possible(kind: str, letters: str, count: int) -> bool:
    """Whether a part of that kind can have such a reference and so many pins (0: not known)."""
    group = CLASSES.get(letters)
    if letters in _PASSIVE and group is not None and kind not in group.kinds and 0 < count < 4:
        return False
    if kind in INSULATING and letters in _PLAIN and 0 < count < 4:
        return False
    return not (kind in INSULATING and letters in ("C", "CX", "CY", "CE", "R") and count < 4)


_VOLTS = re.compile(r"(?<![\w.])(\d{3,5})\s?V(?:DC|AC|RMS)?\b|(?<![\w.])\d(?:\.\d{1,2})?\s?KV", re.IGNORECASE)


def _insulated_winding(text: str) -> bool:
    """Whether an inductor has a second winding that is insulated for some hundred volts: it crosses like a transformer."""
    words = set(word_kinds.tokens(text))
    volts = _VOLTS.search(text)
    return bool(words & {"aux", "auxiliary"} and "winding" in words and volts and int(volts[1] or 1000) >= 500)


@dataclass(frozen=True, slots=True)
class _Word:
    kind: str
    sure: bool
    because: str
    attributes: Mapping[str, str]


def _words(letters: str, group: Class | None, texts: Texts, count: int) -> _Word | None:
    """The most telling phrase of all texts; one that agrees with the reference goes before another."""
    best: tuple[int, str, Hit] | None = None
    for place in _PLACES:
        for attribute, text in texts:
            if attribute != place:
                continue
            for hit in _hits(place, text):
                hit = _fitting(hit, count)
                agrees = group is not None and hit.kind in group.kinds
                if not _allowed(hit, place, letters, count, agrees):
                    continue
                score = 2 * hit.rank + 3 * agrees + _WEIGHT[place] + (hit.kind not in _GENERIC) + (hit.kind == "common-mode-choke")
                if best is None or score > best[0]:
                    best = score, place, hit
    if best is None:
        return None
    _, place, hit = best
    agrees = group is not None and hit.kind in group.kinds
    kind = hit.kind
    if group is not None and agrees and group.choose is None and place in ("footprint", "library") and kind in _GENERIC:
        kind = group.kind  # an inductor's footprint below FB1: the reference knows better
    where = {"type": "part number"}.get(place, place)
    return _Word(kind, hit.rank > 1 or agrees, f"word `{hit.words}` in the {where}", hit.attributes)


@lru_cache(maxsize=8192)
def _hits(place: str, text: str) -> tuple[Hit, ...]:
    found = word_kinds.hits(text)
    if place == "value" and word_kinds.tokens(text)[:2] == ("ac", "dc"):
        found = (*found, Hit("isolated-module", 1, "ac dc", 0, {"acdc": "yes"}))
    if place in ("value", "type") and _BEAD.match(text):
        found = (*found, Hit("ferrite", 2, "FB", 0))
    if any(_ONE_ROW.fullmatch(word) for word in word_kinds.tokens(text)):
        found = tuple(_in_line(hit) for hit in found)
    if place in ("description", "value", "footprint") and word_kinds.mains_module(text):
        found = (*found, Hit("isolated-module", 2, "ac dc converter", 0, {"acdc": "yes"}))
    # single letters are symbols (`C`, `R_Small`) or chip footprints, never words of a text
    return tuple(hit for hit in found if len(hit.words) > 2 or (hit.at == 0 and place in ("symbol", "footprint")) or hit.rank > 1)


# a bead named by its size or its impedance: `FB0805/600R/2A`, `FB-600R`
_BEAD = re.compile(r"FB[-_ ]?(?:0201|0402|0603|0805|1206|[0-9]{2,4}R)(?![0-9A-Z])")


_ONE_ROW = re.compile(r"sip[0-9]{0,2}")


def _in_line(hit: Hit) -> Hit:
    """An `isolator` with one row of pins is a converter module; couplers have two rows."""
    return Hit("isolated-module", 2, hit.words, hit.at) if hit.words == "isolator" else hit


def _said_of(kind: str, texts: Texts) -> dict[str, str]:
    """Attributes that a word anywhere tells of a part whose kind is known: a triac output, transformers inside a jack."""
    words = [word_kinds.tokens(text) for attribute, text in texts if attribute in _PLACES]
    if kind in ("optocoupler", "solid-state-relay") and any("triac" in line for line in words):
        return {"output": "triac"}
    if kind == "connector" and any(_with_magnetics(line) for line in words):
        return {"magnetics": "yes"}
    return {}


def _with_magnetics(words: Sequence[str]) -> bool:
    at = next((at for at, word in enumerate(words) if word in ("magnetic", "magjack")), None)
    return at is not None and not {"without", "no", "non", "less"} & set(words[max(0, at - 2) : at + 2])


def _fitting(hit: Hit, count: int) -> Hit:
    """`isolator` alone may be a coupler, `GDT` a gate-drive transformer: the pins tell."""
    if hit.words == "gdt" and count >= 4:
        return Hit("gate-drive-transformer", hit.rank, hit.words, hit.at, hit.attributes)
    if hit.words == "isolator" and hit.kind != "isolated-module" and 0 < count <= 6:
        return Hit("optocoupler", hit.rank, hit.words, hit.at, hit.attributes)
    return hit


def _allowed(hit: Hit, place: str, letters: str, count: int, agrees: bool) -> bool:
    if hit.kind in INSULATING and (0 < count < _LEAST_PINS.get(hit.kind, 4) or letters in _PLAIN - _LARGE_COILS):
        return False
    if letters in ("C", "CX", "CY", "CE") and 0 < count <= 2 and hit.kind != "capacitor":
        return False
    if (hit.kind in _TWO_ENDED and count > 3) or (hit.kind == "bridge" and count == 2):
        return False
    if hit.rank == 1 and letters in CLASSES and not agrees and place != "symbol":
        return False
    if hit.kind in _OPEN and letters in CLASSES and not agrees and place in ("description", "value", "type"):
        return hit.kind == "capacitor" and hit.rank > 1 and count == 2
    if hit.kind == "inductor" and hit.rank == 1 and letters in ("T", "TR") and count >= 4:
        return False
    # the value of a connector says what is plugged in there
    return not (letters in _CONNECTING and place in ("value", "type") and hit.kind not in CONNECTORS and not agrees)


# kinds that carry no current between their pins: a wrong one would hide a short, so a sentence alone does not make them
_OPEN = CONNECTORS | MECHANICAL | {"capacitor", "varistor", "gas-tube", "spark-gap"}
_TWO_ENDED = frozenset({"capacitor", "varistor", "gas-tube", "spark-gap"})  # a third pin is a case or a middle electrode
_LARGE_COILS = frozenset({"L"})  # a transformer may be drawn as L1; with four pins the word is believed


def _says_more(kind: str, words: _Word) -> bool:
    """Whether a pin signature goes before the words: an insulating kind before a vague one, a named part before `transistor`."""
    if kind == words.kind:
        return False
    if kind in INSULATING:
        return words.kind in _VAGUE or (words.kind in INSULATING and not words.sure)
    return words.kind in ("ic", "module") or (not words.sure and words.kind in ("bipolar", "diode"))


def _contradicted(kind: str, letters: str, count: int, words: _Word | None) -> bool:
    if kind == "bridge" and letters in ("K", "RL", "RLY", "RE", "SSR"):
        return True  # + - ~ ~ are the pins of a solid-state relay too
    if kind in INSULATING and letters in _CONNECTING:
        return words is None or words.kind in CONNECTORS
    return kind in INSULATING and letters in ("R", "C") and count < 4


def _by_reference(letters: str, group: Class | None, texts: Texts, count: int) -> Judged:
    values = " ".join(text for attribute, text in texts if attribute in ("value", "type"))
    quoted = neutral(letters, limit=20)
    if group is not None:
        kind = group.kind_for(count, values)
        if kind in INSULATING and 0 < count < _LEAST_PINS.get(kind, 4):
            kind = UNKNOWN
        if kind != UNKNOWN:
            return Judged(kind, False, False, f"reference letters {quoted} alone")
    if values:
        for pattern, kind in _VALUES:
            if pattern.match(values.strip()) and 0 <= count <= 2:
                return Judged(kind, False, False, f"value `{neutral(values.strip(), limit=60)}` alone")
    return Judged(UNKNOWN, False, False, "nothing says what it is")


_VALUES = (
    (re.compile(r"\d{1,5}(?:[.,]\d{1,3})?\s?[pnuµμm]F?\d{0,2}(?![A-Za-z])"), "capacitor"),
    (re.compile(r"\d{1,5}(?:[.,]\d{1,3})?\s?[pnuµμm]?H(?![A-Za-z])"), "inductor"),
    (re.compile(r"\d{1,5}(?:[.,]\d{1,3})?\s?(?:[kKMR]\d{0,3}|[kM]?(?:ohm|Ω|Ω))(?![A-Za-z])"), "resistor"),
    (re.compile(r"\d{1,5}(?:[.,]\d{1,6})?\s?[kM]Hz", re.IGNORECASE), "crystal"),
)
