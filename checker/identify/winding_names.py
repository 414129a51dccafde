"""Turns stated by the names of windings, with pins that carry the same names.

    Np:Ns:Naux 45:9:7      Np=45, Ns=9, Naux=7      primary 45T, secondary 9T, bias 7T

with pins such as PRI+ PRI- SEC+ SEC- AUX1 AUX2. Every named winding needs two pins of its own and every pin with the name of a
winding needs turns, else the text says nothing.
"""

from __future__ import annotations

import re
from collections.abc import Iterable

from checker import limits
from checker.model.candidate import Winding

_ROLES = {
    "primary": frozenset("P PRI PRIM PRIMARY PRIMAER".split()),
    "secondary": frozenset("S SEC SECONDARY SEK SEKUNDAER OUT OUTPUT".split()),
    "auxiliary": frozenset("A AUX AUXILIARY B BIAS VCC FB HILF HILFS".split()),
}
_LABEL = r"(?:N_?)?[A-Za-z]{1,10}\d?"
_COUNT = r"\d{1,5}(?:\.\d{1,3})?T?"
_LISTED = re.compile(rf"(?<![\w:])({_LABEL}(?:\s?:\s?{_LABEL}){{1,7}})\s?[=:]?\s?({_COUNT}(?:\s?:\s?{_COUNT}){{1,7}})(?![\w:.])")
_EACH = re.compile(rf"(?<![\w:])({_LABEL})\s?(?:[=:]\s?({_COUNT})|\s({_COUNT[:-1]}))(?![\w:.%])")
_PIN = re.compile(r"([A-Z]+?)[_ ]?(?:WDG|WINDING)?[_ ]?(\d*)[_ ]?(\+|-|DOT|[AB])?")


def named_turns(texts: Iterable[str], pins: Iterable[tuple[str, str]]) -> tuple[Winding, ...]:
    """The windings of the first text that states turns by names of windings on these pins (number, name); () when none does."""
    listed = list(pins)
    for text in texts:
        counts = _counts(text[: limits.CELL])
        found = _placed(counts, listed) if len(counts) > 1 else ()
        if found:
            return found
    return ()


def _counts(text: str) -> list[tuple[str, float]]:
    """(role with its number, turns) of each winding, in order; [] where a name is none of a winding or stands twice."""
    together = _LISTED.search(text)
    if together is not None:
        names, counts = (re.split(r"\s?:\s?", part) for part in together.groups())
        pairs = list(zip(names, counts, strict=True)) if len(names) == len(counts) else []
    else:
        pairs = [(each[1], each[2] or each[3]) for each in _EACH.finditer(text) if _role(each[1])]
    found = [(_role(name), float(count.rstrip("T"))) for name, count in pairs]
    roles = [role for role, _ in found]
    return found if all(roles) and len(set(roles)) == len(roles) and all(count for _, count in found) else []


def _role(label: str) -> str:
    """`primary`, `secondary2` ...; "" for a name that is none of a winding."""
    name, number = re.fullmatch(r"(.*?)(\d?)", label.upper().replace("_", ""), re.DOTALL).groups()  # type: ignore[union-attr]
    for role, words in _ROLES.items():
        if name in words or (name.startswith("N") and name[1:] in words):
            return role + number.removeprefix("1") if number != "1" else role
    return ""


def _placed(counts: list[tuple[str, float]], pins: list[tuple[str, str]]) -> tuple[Winding, ...]:
    ends: dict[str, list[str]] = {}
    for number, name in pins:
        match = _PIN.fullmatch(name.strip().upper())
        role = _role(match[1]) if match is not None else ""
        if role:
            ends.setdefault(role, []).append(number)
    wanted: dict[str, list[float]] = {}
    for role, turns in counts:
        wanted.setdefault(role.rstrip("23456789"), []).append(turns)
    if wanted.keys() != ends.keys() or any(len(ends[role]) != 2 * len(turns) for role, turns in wanted.items()):
        return ()
    found = []
    for role, several in wanted.items():
        for at, turns in enumerate(several):
            found.append(Winding(tuple(ends[role][2 * at : 2 * at + 2]), (turns,), role))
    return tuple(found)
