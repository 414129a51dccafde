"""Which type family a part number belongs to.

A pattern begins with a plain letter or digit, a class or a group and matches the start of a word in upper case. One that ends
in a number of two or more digits must not be followed by a further digit: `LM350` is found in `LM350T` and not in `LM3501`.
One that ends in a letter or a single digit is open: what follows does not matter. `$` takes the whole word. Values, packages
and pin names must match no family; a test holds the table to that.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cache, lru_cache
from types import MappingProxyType

from checker import limits
from checker.identify.insulating_types import INSULATING_FAMILIES
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
    bucket = _bucket(word[0])
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
    end = _first_item(pattern)
    item = pattern[:end]
    found: frozenset[str]
    if item.startswith("(?:"):
        found = frozenset[str]().union(*(starts(choice) for choice in _choices(item[3:-1])))
    elif item.startswith("["):
        spans = re.findall(r"(\w)-(\w)", item)
        single = re.sub(r"\w-\w", "", item[1:-1])
        found = frozenset(single).union(chr(code) for low, high in spans for code in range(ord(low), ord(high) + 1))
    else:
        found = frozenset("0123456789") if item == r"\d" else frozenset(item)
    rest = pattern[end:]
    return found | starts(rest[1:]) if rest.startswith("?") else found


def _first_item(pattern: str) -> int:
    """Where the first character, class or group of a pattern ends."""
    if pattern.startswith("["):
        return pattern.index("]") + 1
    if not pattern.startswith("("):
        return 2 if pattern.startswith("\\") else 1
    depth = 0
    for at, character in enumerate(pattern):
        depth += (character == "(") - (character == ")")
        if not depth:
            return at + 1
    raise ValueError(f"a group is not closed: {pattern}")


def _choices(inside: str) -> list[str]:
    """The alternatives of a group, nested groups left whole."""
    depth, found = 0, [""]
    for character in inside:
        depth += (character == "(") - (character == ")")
        if character == "|" and not depth:
            found.append("")
        else:
            found[-1] += character
    return found


_DIGIT = r"(?:\\d|[0-9]|\[[0-9-]+\])"
_ENDS_IN_NUMBER = re.compile(rf"(?:{_DIGIT}(?:\{{[0-9,]+\}}|\?)?{_DIGIT}(?:\{{[0-9,]+\}}|\?)?|{_DIGIT}\{{[0-9,]+\}}|\))\Z")


def _closed(pattern: str) -> str:
    return f"({pattern})(?![0-9])" if _ENDS_IN_NUMBER.search(pattern) else f"({pattern})"


@cache
def _patterns() -> dict[str, list[tuple[str, Family]]]:
    """First character -> the patterns that may begin with it, in the order of the tables."""
    parts: dict[str, list[tuple[str, Family]]] = {}
    for kind, what, attributes, patterns in INSULATING_FAMILIES + ORDINARY_FAMILIES:
        family = Family(kind, what, MappingProxyType(attributes))
        for pattern in patterns.split():
            for start in sorted(starts(pattern)):
                parts.setdefault(start, []).append((pattern, family))
    return parts


@cache
def _bucket(start: str) -> _Bucket | None:
    """Compiled when a word with that first character is first met: a small board needs few of them."""
    found = _patterns().get(start)
    if found is None:
        return None
    return _Bucket(re.compile("|".join(_closed(one) for one, _ in found)), tuple(family for _, family in found))
