"""A part while the facts of several files are being put together."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass, field

from checker import limits
from checker.model.circuit import Part, Pin
from checker.model.fact import Fact, Source, Trust
from checker.model.reading import Row

_UNIT_SUFFIX = re.compile(r"(.+[0-9])[-._]?[A-Za-z]\Z")
_RANGE_LIKE = re.compile(r"([A-Za-z_]{1,16})([0-9]{1,9})(?:[-~–]|\.\.)([A-Za-z_]{0,16})([0-9]{1,9})\Z")


@dataclass(slots=True)
class Draft:
    """A part in the making.

    said: what the netlist says. choices: what BOM and parts file say of each choice, the first one first.
    always: what parts files and the declaration say of the reference.
    rows: each BOM row that lists the part, with what it says of being fitted. forced: what the variant says.
    """

    ref: str
    sources: list[Source]
    said: tuple[Fact, ...] = ()
    pins: tuple[Pin, ...] = ()
    units: tuple[tuple[str, tuple[str, ...]], ...] = ()
    choices: list[list[Fact]] = field(default_factory=lambda: [[]])
    always: list[Fact] = field(default_factory=list)
    rows: list[tuple[bool | None, Row]] = field(default_factory=list)
    forced: bool | None = None

    def fitted(self) -> bool:
        """Whether the part is on the board: variant, then declaration and parts file, then BOM, then netlist.

        Where equals disagree the part counts as fitted, since a part that may bridge must be judged.
        """
        if self.forced is not None:
            return self.forced
        stated = [fact for fact in self.always if fact.attribute == "fitted"]
        if stated:
            top = max(fact.trust for fact in stated)
            return any(fact.value is True for fact in stated if fact.trust == top)
        listed = {flag for flag, _ in self.rows}
        if listed - {None}:  # a row that is silent lists the part, so it disagrees with one that leaves it out
            return listed != {False}
        drawn = [fact.value for fact in self.said if fact.attribute == "fitted"]
        return not drawn or True in drawn

    def says(self, attribute: str) -> list[Fact]:
        """What netlist and first choice say of an attribute."""
        return [fact for fact in (*self.said, *self.choices[0], *self.always) if fact.attribute == attribute]

    def named(self, choice: int) -> str:
        """The type number of one choice as the most trusted place says it, "" when none does; one in a BOM hides a drawn one."""
        types = [fact for fact in self.choices[choice] if fact.attribute == "type"]
        if not types and choice == 0:
            types = [fact for fact in self.said if fact.attribute == "type"]
        return str(max(types, key=lambda fact: fact.trust).value) if types else ""

    def part(self) -> Part:
        """The finished part. An alternate holds what is said of that choice alone: it inherits no mark or rating of the first."""
        return Part(
            self.ref,
            self.pins,
            (*self.said, *self.choices[0], *self.always),
            tuple(dict.fromkeys(self.sources)),
            tuple(map(tuple, self.choices[1:])),
            self.units,
            self.fitted(),
        )


@dataclass(slots=True)
class Book:
    """All parts: by final reference in file order, and by the reference the files use (a duplicate has several)."""

    drafts: dict[str, Draft]
    copies: dict[str, list[Draft]]
    folded: dict[str, list[str]] = field(default_factory=dict)
    whole: dict[str, tuple[str, tuple[str, ...]]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        for ref in self.copies:
            self.folded.setdefault(fold(ref), []).append(ref)
            members = _members(ref)
            if members and members[0] not in self.copies:
                self.whole[members[0]] = ref, members

    def find(self, ref: str) -> list[Draft]:
        """The parts of exactly that reference."""
        if ref in self.copies:
            return self.copies[ref]
        return [self.drafts[ref]] if ref in self.drafts else []

    def like(self, ref: str) -> str:
        """The one reference that equals `ref` but for case or look-alike letters, else the stem of `U1A`, else ""."""
        same = self.folded.get(fold(ref), [])
        if len(same) == 1:
            return same[0]
        stem = _UNIT_SUFFIX.match(ref)
        return stem[1] if stem and not same and stem[1] in self.copies else ""

    def unexpanded(self, refs: Sequence[str]) -> Sequence[str]:
        """`refs` with every run that a reader expanded from a name of its own (`A1-4` is one part here) put back."""
        if not self.whole:
            return refs
        kept: list[str] = []
        at = 0
        while at < len(refs):
            name, members = self.whole.get(refs[at], ("", ()))
            if name and tuple(refs[at : at + len(members)]) == members:
                kept.append(name)
                at += len(members)
            else:
                kept.append(refs[at])
                at += 1
        return kept


def fold(ref: str) -> str:
    """A reference without its case and its compatibility forms."""
    return ref.casefold() if ref.isascii() else unicodedata.normalize("NFKC", ref).casefold()


def _members(ref: str) -> tuple[str, ...]:
    """What a reader would make of a reference that reads like a range; () when it does not."""
    match = _RANGE_LIKE.match(ref)
    if match is None or match[3] not in ("", match[1]):
        return ()
    low, high = int(match[2]), int(match[4])
    width = len(match[2]) if match[2].startswith("0") else 0
    return tuple(f"{match[1]}{number:0{width}d}" for number in range(low, high + 1)) if low < high <= low + limits.RANGE else ()


def row_fitted(facts: Sequence[Fact]) -> bool | None:
    """What one BOM row says about being fitted; a contradiction counts as fitted.

    Words come first, then a quantity of nothing, then an empty cell of a column that marks what is absent.
    """
    flags = [fact for fact in facts if fact.attribute == "fitted"]
    worded = [fact for fact in flags if fact.text]
    if worded:
        return any(fact.value is True for fact in worded)
    if any(fact.attribute == "quantity" and fact.value == 0 for fact in facts):
        return False
    return any(fact.value is True for fact in flags) if flags else None


def statement(fact: Fact) -> str:
    """How a fitted fact is shown: the words and the place."""
    words = fact.text or ("fitted" if fact.value is True else "not fitted")
    return f"{words!r} ({'BOM' if fact.trust == Trust.BOM else 'netlist'}{f' line {fact.source.line}' if fact.source.line else ''})"
