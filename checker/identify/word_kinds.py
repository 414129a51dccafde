"""What the words of a description, symbol, library or footprint say a part is.

Words are whole: text is split at everything that is no letter or digit, and where a lower-case word runs into a capitalised
one (`ScrewTerminal`) or into a number (`Pack04`). `IEC` is not found in `OnePiece`, nor `C14` in `STDC14`. A noun behind a
preposition (`MOSFET with zener`, `driver for relays`) or before a driving word (`relay driver`) names something else than
the part.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache

from checker import limits
from checker.identify.phrases import PHRASES, WITH_ATTRIBUTES


@dataclass(frozen=True, slots=True)
class Hit:
    """One phrase found. rank: 2 for a phrase with one meaning,"
    " 1 for a word that also names other things. at: word number."""

    kind: str
    rank: int
    words: str
    at: int
    attributes: Mapping[str, str] = field(default_factory=dict)


_WITHOUT_S = frozenset(
    {"trans", "sensors", "res", "process", "relais", "less", "loss", "nos", "gas", "mos", "nmos", "pmos", "photomos", "optomos"}
)

# nouns that make of the word before them a part that only serves such a thing
_HEADS = frozenset(
    (
        "isolated coupled driver drvr drv controller ctrlr charger monitor interface protector supervisor gauge manager tester "
        "simulator socket base board connector header terminal plug contact detector input screw label array management "
        "protection"
    ).split()
)
_HEADED = frozenset(
    (
        "relay transformer led motor mosfet igbt lamp battery display buzzer crystal thyristor triac switch bridge "
        "antenna sensor zener potentiometer fuse diode bipolar gate-drive-transformer solid-state-relay isolated-module"
    ).split()
)
_KEPT_BEFORE = {"array": frozenset({"diode"}), "protection": frozenset({"diode"}), "input": frozenset({"transformer", "fuse"})}
_ARTICLES = frozenset({"a", "an", "the", "integrated"})
_BEFORE = frozenset("for to with of by via without no non plus from drives driving on into für mit pour and".split())


@lru_cache(maxsize=8192)
def tokens(text: str) -> tuple[str, ...]:
    """The words of a text in lower case, without a plural s."""
    split = re.sub(r"(?<=[a-z]{3})(?=[A-Z][a-z]|[0-9])", " ", text[: limits.CELL])
    return tuple(_singular(word) for word in re.findall(r"[^\W_]+", split.lower()))


def _singular(word: str) -> str:
    if len(word) > 4 and word.endswith("s") and not word.endswith(("ss", "us")) and word not in _WITHOUT_S and word.isalpha():
        return word[:-1]
    return word


@dataclass(frozen=True, slots=True)
class _Phrase:
    words: tuple[str, ...]
    kind: str
    rank: int
    attributes: Mapping[str, str]


def _index() -> dict[str, list[_Phrase]]:
    found: dict[tuple[str, ...], _Phrase] = {}
    for kind, (strong, weak) in PHRASES.items():
        for rank, listed in ((2, strong), (1, weak)):
            for phrase in filter(None, listed.split(",")):
                words = tuple(_singular(word) for word in phrase.split())
                found.setdefault(words, _Phrase(words, kind, rank, {}))
    for kind, listed, attributes in WITH_ATTRIBUTES:
        for phrase in listed.split(","):
            words = tuple(_singular(word) for word in phrase.split())
            found[words] = _Phrase(words, kind, 2, attributes)
    by_first: dict[str, list[_Phrase]] = {}
    for entry in sorted(found.values(), key=lambda entry: -len(entry.words)):
        by_first.setdefault(entry.words[0], []).append(entry)
    return by_first


_BY_FIRST = _index()


@lru_cache(maxsize=8192)
def hits(text: str) -> tuple[Hit, ...]:
    """Every phrase of a text, in its order; the longest at each place, none inside another."""
    words = tokens(text)
    found: list[Hit] = []
    at = 0
    while at < len(words):
        entry = next((one for one in _BY_FIRST.get(words[at], ()) if words[at : at + len(one.words)] == one.words), None)
        if entry is None:
            at += 1
            continue
        end = at + len(entry.words)
        if not _served(words, at, end, entry):
            found.append(Hit(entry.kind, entry.rank, " ".join(entry.words), at, entry.attributes))
        at = end
    found += _isolated(words)
    return tuple(found)


def _served(words: Sequence[str], at: int, end: int, entry: _Phrase) -> bool:
    """Whether the phrase names what the part serves and not what it is."""
    if _behind_preposition(words, at):
        return True
    after = words[end] if end < len(words) else ""
    if after not in _HEADS or entry.kind not in _HEADED:
        return False
    return entry.kind not in _KEPT_BEFORE.get(after, frozenset())


def _behind_preposition(words: Sequence[str], at: int) -> bool:
    """Whether `for`, `with` and the like stand before a word, with or without an article between."""
    if at > 1 and words[at - 1] in _ARTICLES:
        at -= 1
    return at > 0 and words[at - 1] in _BEFORE


_NOUNS = {
    "driver": "isolated-driver",
    "drvr": "isolated-driver",
    "amplifier": "isolated-amplifier",
    "amp": "isolated-amplifier",
    "modulator": "isolated-amplifier",
    "adc": "isolated-amplifier",
    "transceiver": "digital-isolator",
    "rs485": "digital-isolator",
    "rs232": "digital-isolator",
    "can": "digital-isolator",
    "usb": "digital-isolator",
    "i2c": "digital-isolator",
    "isolator": "digital-isolator",
    "interface": "digital-isolator",
    "converter": "isolated-module",
    "dcdc": "isolated-module",
    "module": "isolated-module",
}
# after these the word isolated tells about a topology, a case or a net
_OTHER = frozenset(
    (
        "flyback controller ctrlr regulator switcher pwm topology mosfet igbt tab package triac diode thyristor ground "
        "output supply side connector bnc jack coax forward"
    ).split()
)
_WINDOW = 8


def _isolated(words: Sequence[str]) -> Iterator[Hit]:
    """`isolated ... gate driver` with some words between, and `DC DC CONVERTER ... ISOLATED` the other way round."""
    for at, word in enumerate(words):
        if word != "isolated" or _behind_preposition(words, at):
            continue
        for noun in words[at + 1 : at + 1 + _WINDOW]:
            if noun in _OTHER:
                return
            if noun in _NOUNS:
                yield Hit(_NOUNS[noun], 2, f"isolated {noun}", at)
                return
        before = " ".join(words[:at])
        if re.search(r"\b(?:dc dc|dcdc|dc to dc)\b", before) and not re.search(r"\b(?:reg|ctrlr|pwm)\b", before):
            yield Hit("isolated-module", 2, "dc dc isolated", at)
        return


def mains_module(text: str) -> bool:
    """Whether a text calls the part a mains converter as a whole (`AC/DC CONVERTER 5V 5W`), not a circuit for one."""
    words = tokens(text)
    phrases = (("ac", "dc", "converter"), ("ac", "to", "dc"))
    said = "acdc" in words or any(words[at : at + 3] in phrases for at in range(len(words)))
    circuits = {"ic", "controller", "ctrlr", "switcher", "offline", "flyback", "pwm", "reg", "regulator", "switch", "soic", "sot"}
    return said and not circuits & set(words)
