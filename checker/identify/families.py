"""Which type family a part number belongs to.

A pattern begins with a plain letter or digit, a class or a group, matches the start of a word in upper case and must not be
followed by a further digit: `LM317` is found in `LM317T` and not in `LM3171`. A pattern that ends with `$` takes the whole
word. Values, packages and pin names must match no family; a test holds the table to that.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType

from checker import limits
from checker.identify.insulating_types import INSULATING_FAMILIES, Row
from checker.identify.ordinary_types import ORDINARY_FAMILIES

_WORD_ENDS = re.compile(r"[\s/,;:()\[\]<>|=\"'_+*&]+")
_LONGEST = 48  # characters of a word that can still be a type


@dataclass(frozen=True, slots=True)
class Family:
    """A series of types. what: the series in a few words. attributes: what else the series tells, as `Judged.attributes`."""

    kind: str
    what: str
    attributes: Mapping[str, str]


@dataclass(frozen=True, slots=True)
class Found:
    """A family and the word, as written but in upper case, that belongs to it."""

    family: Family
    word: str


@lru_cache(maxsize=8192)
def find(text: str) -> Found | None:
    """The first word of a value, type or symbol that belongs to a family; None when none does.

    `TMR 1-0511` and `PC 817` are one type in two words; a word with dashes is also looked at from behind each dash.
    """
    for word in _words(text[: limits.CELL].upper()):
        family = _family_of(word)
        if family is not None:
            return Found(family, word)
    return None


def _words(text: str) -> Iterator[str]:
    words = [word for word in _WORD_ENDS.split(text) if word]
    for at, word in enumerate(words):
        if len(word) > _LONGEST:
            continue
        if len(word) > 2:
            yield word
        if word.isalpha() and 2 <= len(word) <= 6 and at + 1 < len(words) and words[at + 1][0].isdecimal():
            yield f"{word}{words[at + 1]}"[:_LONGEST]
        pieces = word.split("-")
        for start in range(1, min(len(pieces), 4)):
            if len(rest := "-".join(pieces[start:])) >= 5:
                yield rest


@lru_cache(maxsize=8192)
def _family_of(word: str) -> Family | None:
    bucket = _BUCKETS.get(word[0])
    if bucket is None:
        return None
    match = bucket.pattern.match(word)
    return None if match is None or match.lastindex is None else bucket.families[match.lastindex - 1]


@dataclass(frozen=True, slots=True)
class _Bucket:
    """Every pattern that may begin with one character, as one expression with one group each."""

    pattern: re.Pattern[str]
    families: tuple[Family, ...]


def starts(pattern: str) -> frozenset[str]:
    """The characters a word that matches `pattern` may begin with."""
    if pattern.startswith("(?:"):
        depth, at = 1, 3
        choices = [3]
        while depth:
            if pattern[at] == "|" and depth == 1:
                choices.append(at + 1)
            depth += (pattern[at] == "(") - (pattern[at] == ")")
            at += 1
        found = frozenset[str]().union(*(starts(pattern[choice:]) for choice in choices))
        return found | starts(pattern[at + 1 :]) if pattern[at : at + 1] == "?" else found
    if pattern.startswith("["):
        listed = pattern[1 : pattern.index("]")]
        spans = re.findall(r"(\w)-(\w)", listed)
        chars = {chr(code) for low, high in spans for code in range(ord(low), ord(high) + 1)}
        return frozenset(chars | set(re.sub(r"\w-\w", "", listed)))
    if pattern.startswith(r"\d"):
        return frozenset("0123456789")
    if pattern[1:2] == "?":
        return frozenset(pattern[0]) | starts(pattern[2:])
    return frozenset(pattern[0])


def _buckets(rows: tuple[Row, ...]) -> dict[str, _Bucket]:
    parts: dict[str, list[tuple[str, Family]]] = {}
    for kind, what, attributes, patterns in rows:
        family = Family(kind, what, MappingProxyType(attributes))
        for pattern in patterns.split():
            for start in sorted(starts(pattern)):
                parts.setdefault(start, []).append((pattern, family))
    return {
        start: _Bucket(re.compile("|".join(f"({one})(?![0-9])" for one, _ in found)), tuple(family for _, family in found))
        for start, found in parts.items()
    }


_BUCKETS = _buckets(INSULATING_FAMILIES + ORDINARY_FAMILIES)
