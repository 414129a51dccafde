"""Assembly variants in a BOM: a column per variant with quantity, x or DNP, or one column that names variants row by row."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from checker import limits
from checker.model.fact import Source
from checker.model.reading import VariantRecord
from checker.readers import bom_headings as headings

VariantColumn = tuple[int, str, str]  # index, name of the variant, polarity: quantity, fitted+, fitted-, or "" when marks decide

_WORDS = re.compile(r"[\s_:/()\[\]-]+")
_VARIANT_WORDS = frozenset("variant variante build config configuration option ausführung bestückungsvariante".split())
_BY_ROW = frozenset("variant variants variante varianten variantes assemblyvariant assemblyvariants buildvariant".split())
_LEADING = re.compile(r"(?:in|for|für|pour|of|bei)\b[\s:]*", re.IGNORECASE)
# what stands beside `Qty` or alone and is no variant
_NO_VARIANT = frozenset(
    "per total totals order ordered stock available min max panel panels board boards pcb needed required spare spares moq batch "
    "purchase extended onhand instock perboard perpcb rohs smd smt tht leadfree lead free checked check done ok found sourced "
    "top bottom layer side used reel unit units each status polarized critical safety assembled tested notes remark".split()
)
_ALL = frozenset({"", "all", "alle", "any", "both", "every", "*", "common", "tous", "toutes", "base", "default"})
_MOST_NAMES = 40  # more names than this are no variants
_NUMBER = re.compile(r"[0-9]{1,9}(?:[.,][0-9]{1,3})?\Z")
_NONE = frozenset({"-", "--", "–", "—", "none"})
_LISTED = re.compile(r"\s*[,;/|\n&+]\s*")


def by_row(names: Sequence[str]) -> int:
    """The column whose cells name the variants a row is for, -1 without one."""
    return next((index for index, name in enumerate(names) if headings.heading_key(name) in _BY_ROW), -1)


def columns(names: Sequence[str], known: Sequence[str | None], sample: Sequence[Sequence[str]]) -> tuple[VariantColumn, ...]:
    """The columns that say which variant has the part. names, known: headings and meanings; sample: rows that show the cells.

    `Qty EU` counts beside another such column, `DNP EU` and `Variant EU` alone, a heading without any meaning beside another
    whose cells are marks as well.
    """
    found: dict[int, tuple[str, str]] = {}
    bare: dict[int, tuple[str, str]] = {}
    for index, name in enumerate(names):
        if not name or known[index]:
            continue
        said = [_said("", row[index]) for row in sample if index < len(row) and row[index].strip()]
        readable = sum(answer is not None for answer in said)
        if 2 * readable < len(said):
            continue
        split = _split(name)
        if split is not None:
            found[index] = split
        elif _key(name) not in _NO_VARIANT and readable == len(said) and True in said:
            if False in said or len(said) < len(sample):
                bare[index] = (name, "")
    if sum(polarity == "quantity" for _, polarity in found.values()) == 1:
        found = {index: split for index, split in found.items() if split[1] != "quantity"}
    if found or len(bare) > 1:
        found |= bare if len(bare) > 1 else {}
    return tuple((index, name[: limits.NAME], polarity) for index, (name, polarity) in sorted(found.items()))


def _split(heading: str) -> tuple[str, str] | None:
    """(variant, polarity) of `Qty EU`, `EU Qty`, `Variant EU`, `Do not populate (US)`; None for other headings."""
    words = [word for word in _WORDS.split(heading) if word]
    for count in range(len(words) - 1, 0, -1):
        for base, rest in ((words[:count], words[count:]), (words[-count:], words[:-count])):
            polarity = _polarity(" ".join(base))
            name = _LEADING.sub("", " ".join(rest)).strip()
            if polarity is None or not name or headings.attribute(name) is not None or _key(name) in _NO_VARIANT:
                continue
            if polarity == "quantity" and (name.isdigit() or any(word.casefold() in _NO_VARIANT for word in rest)):
                continue
            return name, polarity
    return None


def _polarity(base: str) -> str | None:
    if _key(base) in _VARIANT_WORDS:
        return ""
    meaning = None if base[-1].isdigit() else headings.attribute(base)
    return meaning if meaning in ("quantity", "fitted+", "fitted-") else None


def _key(text: str) -> str:
    return headings.heading_key(text)


def _said(polarity: str, text: str) -> bool | None:
    """What one cell says: fitted, left out, or neither."""
    text = text.strip()
    if polarity in ("fitted+", "fitted-"):
        return headings.fitted(polarity, text)
    if text.casefold() in _NONE:
        return False
    if _NUMBER.match(text):
        return float(text.replace(",", ".")) > 0
    return headings.fitted("fitted+", text)


@dataclass(slots=True)
class Variants:
    """Collects what the rows of one file say of its variants."""

    _fitted: dict[str, dict[str, None]] = field(default_factory=dict)
    _absent: dict[str, dict[str, None]] = field(default_factory=dict)
    _blank: dict[str, tuple[str, list[str]]] = field(default_factory=dict)
    _named: list[tuple[frozenset[str], tuple[str, ...]]] = field(default_factory=list)
    _places: dict[str, Source] = field(default_factory=dict)

    def row(self, at: Source, cells: Sequence[str], found: Sequence[VariantColumn], refs: Sequence[str]) -> str:
        """Notes the columns of one row; gives the words of the first cell when every variant leaves the part out, else ""."""
        answers = []
        for index, name, polarity in found:
            text = cells[index].strip() if index < len(cells) else ""
            self._places.setdefault(name, at)
            _, blank = self._blank.setdefault(name, (polarity, []))
            said = _said(polarity, text) if text else None
            answers.append(said)
            if said is not None:
                (self._fitted if said else self._absent).setdefault(name, {}).update(dict.fromkeys(refs))
            elif not text:
                blank += refs
        all_out = bool(answers) and all(answer is False for answer in answers)
        return cells[found[0][0]].strip()[: limits.CELL] if all_out else ""

    def named(self, at: Source, text: str, refs: Sequence[str]) -> str:
        """Notes a cell that names variants; gives the name when it is a single one, else ""."""
        names = [name for name in _LISTED.split(text.strip()[: limits.CELL]) if not headings.is_empty(name)]
        if not names or any(name.casefold() in _ALL for name in names):
            return ""
        for name in names:
            self._places.setdefault(name, at)
        self._named.append((frozenset(names), tuple(refs)))
        return names[0] if len(names) == 1 else ""

    def records(self) -> Iterator[VariantRecord]:
        """What each variant fits and leaves out, in the order of the file. A blank cell means `left out` where the column marks
        what is fitted, and `fitted` where it only marks what is left out."""
        names = {name for listed, _ in self._named for name in listed}
        by_row = self._named if len(names) <= _MOST_NAMES else []
        for name, place in self._places.items():
            fitted, absent = dict(self._fitted.get(name, {})), dict(self._absent.get(name, {}))
            polarity, blank = self._blank.get(name, ("", []))
            if polarity == "quantity" or (fitted and not absent and polarity != "fitted-"):
                absent |= dict.fromkeys(blank)
            elif polarity == "fitted-" or (absent and not fitted):
                fitted |= dict.fromkeys(blank)
            for listed, refs in by_row:
                (fitted if name in listed else absent).update(dict.fromkeys(refs))
            if fitted or absent:
                yield VariantRecord(name, tuple(fitted), tuple(absent), place)
