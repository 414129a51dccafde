"""What stands between the headers of a BOM: rows of parts, captions such as `DNP`, totals, and blocks about something else."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from checker import limits
from checker.model.fact import Fact, Source, Trust
from checker.readers import bom_headings as headings
from checker.readers.references import look_like_references

Record = tuple[int, list[str]]

_TOTAL = re.compile(
    r"(?:(?:sub|grand )?totals?|sum|summe[n]?|summary|zusammenfassung|statistics?|total (?:parts|components|quantity))[ :]*\Z",
    re.IGNORECASE,
)
_NOTE = re.compile(r"notes?[ :]|notes?\Z|bemerkungen?[ :]*\Z|remarks?[ :]*\Z", re.IGNORECASE)
_PARTS = re.compile(r"(?<![^\W_])(?:parts?|components?|items?|list|section|bauteile?|teile?|positionen)(?![^\W_])", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Entry:
    """One row of parts: its line, its cells, its list of references, and the caption above it that says `not fitted`."""

    line: int
    cells: list[str]
    references: str
    absent: Fact | None


@dataclass(slots=True)
class Sections:
    """Walks the records below one header. bare: lines of rows that hold something and name no part."""

    path: str
    ref: int
    absent: Fact | None
    bare: list[int] = field(default_factory=list)

    def entries(self, records: Sequence[Record]) -> Iterator[Entry]:
        """The rows of parts; a list that ends in a separator goes on in a row that holds nothing else."""
        held: tuple[int, list[str], Fact | None] | None = None
        lists: list[str] = []
        below = self.absent  # the caption that counts
        inside = used = False  # the caption came within the table; rows have followed it
        other = total = False  # a block about something else; what follows a total
        for line, cells in records:
            filled = [cell.strip() for cell in cells if cell.strip()]
            if not filled:
                other = total = False
                if inside and used:
                    below, inside = None, False
                continue
            cell = cells[self.ref].strip() if self.ref < len(cells) else ""
            likely = look_like_references(cell)
            if other or (total and not likely) or (not likely and self._no_part(cells, cell, filled)):
                self.bare.append(line)
                other = other or (len(filled) == 1 and _TOTAL.match(filled[0]) is not None) or about_other(filled)
                total = total or _TOTAL.match(filled[0]) is not None
                if inside or len(filled) == 1:
                    below, inside = None, False
                if len(filled) == 1 and says_absent(filled[0]) and self._leads(cells):
                    below = Fact("fitted", False, Source(self.path, line, 1), Trust.BOM, text=filled[0][: limits.CELL])
                    inside, used = True, False
                continue
            if held is not None and len(filled) == 1 and lists[-1].endswith((",", ";")):
                lists.append(cell)
                continue
            if held is not None:
                yield Entry(held[0], held[1], " ".join(lists), held[2])
            held, lists, used = (line, cells, below), [cell], True
        if held is not None:
            yield Entry(held[0], held[1], " ".join(lists), held[2])

    def _no_part(self, cells: Sequence[str], cell: str, filled: Sequence[str]) -> bool:
        return (
            headings.is_empty(cell)
            or _TOTAL.match(cell) is not None
            or _NOTE.match(cell) is not None
            or len(filled) == 1  # one word and nothing else: a caption, unless it looks like a reference
            or about_other(filled)
        )

    def _leads(self, cells: Sequence[str]) -> bool:
        return any(cell.strip() for cell in cells[: self.ref + 1])


def about_other(filled: Sequence[str]) -> bool:
    """Whether a row is the header of a block that lists no parts, such as `Package, Count`: at least two headings, no reference."""
    if len(filled) < 2 or look_like_references(filled[0]):
        return False
    known = sum(headings.attribute(text) is not None for text in filled if len(text) <= 64)
    return known >= 2 and 2 * known >= len(filled)


def says_absent(caption: str) -> bool:
    """Whether a caption such as `DNP`, `Not fitted:` or `Parts not fitted` says that what follows is left out."""
    if len(caption) > 64:
        return False
    return headings.not_fitted_phrase(_PARTS.sub(" ", caption).strip(" :-–=*#"))
