"""The choices of part a BOM row allows: which columns hold them, which numbers are a distributor's, several in one cell."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source, Trust
from checker.readers import bom_headings as headings

CHOICE = ("type", "maker")

_ALTERNATE = re.compile(
    r"(?<![^\W_])(?:alt|alternat(?:e|es|iv|ive|ives)|substitutes?|(?:second|2nd)(?:[\s_-]?source)?|ersatz)(?![^\W_])", re.IGNORECASE
)
# headings that name an alternate without saying number or type
_ALTERNATE_ALONE = frozenset({"", "part", "parts", "source", "partno", "typ", "type"})
_NUMBER = re.compile(r"([0-9]{1,3})\W*\Z")
# order numbers of distributors that tell themselves: a suffix, one letter with a long number, a line code before the type
# (common practice, no source)
_DISTRIBUTOR = re.compile(r"\S+-ND\Z|C[0-9]{5,8}\Z|[1-9][0-9]{1,2}-(?=[A-Z][^\s]*[0-9])[A-Z0-9+/.,_-]{5,}\Z")
_CODED = re.compile(r"[1-9][0-9]{1,2}-(\S{4,})\Z")
_BETWEEN = re.compile(r"\s*(?:[;\n|]|,\s|\s/\s|\s(?:or|oder|ou)\s)\s*", re.IGNORECASE)
_PIECE = re.compile(r"(?=\S*[A-Za-z])(?=\S*[0-9])\S{5,}\Z")
_FIGURE = re.compile(r"[±<>+-]?[0-9.,]+[A-Za-zµμΩ%]{0,4}\Z")


def meaning_of(heading: str) -> str | None:
    """`type` or `maker` for a heading such as `MPN (alternate)` or `Alternates`; None for every other."""
    if not _ALTERNATE.search(heading):
        return None
    rest = headings.heading_key(_ALTERNATE.sub(" ", heading)).rstrip("0123456789")
    meaning = "type" if rest in _ALTERNATE_ALONE else headings.attribute(rest)
    return meaning if meaning in CHOICE else None


def pairs(columns: Sequence[tuple[int, str, str]]) -> tuple[tuple[int, int], ...]:
    """(column of the type, column of the maker) of each choice, the first one first; -1 for none.

    columns: (index, `type` or `maker`, heading). A number in the heading pairs `MPN 2` with `Manufacturer 2` wherever they
    stand; without one (or with equal ones) the columns pair in their order. Alternates come last.
    """
    numbered = {(meaning, _place(heading)[1]) for _, meaning, heading in columns}
    groups: dict[tuple[bool, int], dict[str, list[int]]] = {}
    for index, meaning, heading in columns:
        alternate, number = _place(heading)
        if not number and (meaning, 1) not in numbered:
            number = 1
        groups.setdefault((alternate, number), {"type": [], "maker": []})[meaning].append(index)
    found: list[tuple[int, int]] = []
    for _, group in sorted(groups.items()):
        types, makers = group["type"], group["maker"]
        for at in range(max(len(types), len(makers))):
            found.append((types[at] if at < len(types) else -1, makers[at] if at < len(makers) else -1))
    return tuple(found)


def _place(heading: str) -> tuple[bool, int]:
    number = _NUMBER.search(heading)
    return _ALTERNATE.search(heading) is not None, int(number[1]) if number else 0


def is_distributor_number(text: str, beside: Iterable[str] = ()) -> bool:
    """Whether a number in a column of types is surely a distributor's: `490-10494-2-ND`, `81-GRM219R7YA105KA2J`, `C14663`.

    beside: the cells of the row; `538-39-28-1063` is one where `39-28-1063` stands beside it.
    """
    if _DISTRIBUTOR.match(text):
        return True
    coded = _CODED.match(text)
    return coded is not None and any(coded[1] == cell.strip().removesuffix("-ND") for cell in beside)


def choices(
    path: str, line: int, cells: Sequence[str], columns: Sequence[tuple[int, int]], names: Sequence[str]
) -> tuple[tuple[tuple[Fact, ...], ...], tuple[Fact, ...], Fact | None]:
    """(facts of each choice of one row, distributors' numbers found among the types, a cell that says `not fitted`).

    Raises InputError beyond limits.ALTERNATES.
    """
    found: dict[tuple[str, str], tuple[Fact, ...]] = {}
    ordered: list[Fact] = []
    absent: Fact | None = None
    for pair in columns:
        said: list[list[Fact]] = [[], []]
        for attribute, index, facts in zip(CHOICE, pair, said, strict=True):
            text = cells[index].strip()[: limits.CELL] if 0 <= index < len(cells) else ""
            if not text or headings.is_empty(text):
                continue
            source = Source(path, line, index + 1, names[index])
            if headings.not_fitted_phrase(text):
                absent = absent or Fact("fitted", False, source, Trust.BOM, text=text)
                continue
            texts = several(text) if attribute == "type" else _makers(text, len(said[0]))
            facts += [Fact(attribute, one, source, Trust.BOM) for one in texts]
        for choice in _matched(*said):
            if choice[0].attribute == "type" and is_distributor_number(str(choice[0].value), cells):
                ordered.append(replace(choice[0], attribute="distributor"))
                choice = choice[1:]
            if choice and (not found or choice[0].attribute == "type"):
                found.setdefault((choice[0].attribute, str(choice[0].value).casefold()), choice)
        if len(found) > limits.ALTERNATES:
            raise InputError(path, "the row has too many choices of part", line=line, expected=f"at most {limits.ALTERNATES}")
    kept = list(found.values())
    if len(kept) > 1 and ordered and kept[0][0].attribute == "maker":  # what is left of a choice named by its order number
        kept = kept[1:]
    return tuple(kept), tuple(ordered), absent


def _matched(types: list[Fact], makers: list[Fact]) -> Iterator[tuple[Fact, ...]]:
    """Types with their makers: one to one where there are as many, else the maker belongs to the first."""
    for at in range(max(len(types), min(len(makers), 1))):
        yield (*types[at : at + 1], *makers[at : at + 1])


def _makers(text: str, types: int) -> list[str]:
    """The makers of one cell beside so many types; a cell stays whole unless it names as many."""
    pieces = _BETWEEN.split(text) if types > 1 else []
    return pieces if pieces and len(pieces) == types and all(pieces) else [text]


def several(text: str) -> list[str]:
    """The type numbers of one cell: `ABC-101; DEF-202` holds two; a cell stays whole unless every piece looks like one."""
    if ";" not in text and "|" not in text and not any(map(str.isspace, text)):
        return [text]
    pieces = [piece for piece in _BETWEEN.split(text) if piece]
    if len(pieces) > 1 and all(_PIECE.match(piece) and not _FIGURE.match(piece) for piece in pieces):
        return pieces
    return [text]
