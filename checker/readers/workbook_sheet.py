"""The cells of one sheet of a workbook, whichever form it was saved in, as rows of text."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from decimal import Decimal, InvalidOperation

from checker import limits
from checker.errors import InputError
from checker.readers.bom_sections import Record


@dataclass(slots=True)
class Sheet:
    """One sheet. cells: row -> column -> text, both from 1, only what holds text.

    unsolved: places of formulas without a stored value. faulty: places of errors such as #N/A. dates: places of dates.
    hidden: rows that are not shown. down: ranges (first row, last row, column) that were merged.
    """

    path: str
    name: str
    shown: bool = True
    cells: dict[int, dict[int, str]] = field(default_factory=dict)
    unsolved: list[str] = field(default_factory=list)
    faulty: list[str] = field(default_factory=list)
    dates: list[str] = field(default_factory=list)
    hidden: set[int] = field(default_factory=set)
    down: list[tuple[int, int, int]] = field(default_factory=list)

    def put(self, row: int, column: int, text: str) -> None:
        """A cell that holds text. Raises InputError for one far from the others: rows and columns of a BOM are few."""
        if not text:
            return
        if column > limits.BOM_COLUMNS:
            found, most = f"a cell in column {column:,} of {self.name}", f"at most {limits.BOM_COLUMNS}"
            raise InputError(self.path, "too many columns", line=row, found=found, expected=most)
        if row not in self.cells and len(self.cells) >= limits.BOM_ROWS:
            raise InputError(self.path, f"more than {limits.BOM_ROWS:,} rows", line=row, expected=f"at most {limits.BOM_ROWS:,}")
        self.cells.setdefault(row, {})[column] = text[: limits.TOKEN]

    def records(self) -> list[Record]:
        """Rows that hold something, each with its number, and a blank one wherever rows are left out.

        Cells that were merged downwards stand in each of their rows.
        """
        for first, last, column in self.down:
            text = self.cells.get(first, {}).get(column, "")
            for row in range(first + 1, last + 1) if text else ():
                if row in self.cells:
                    self.cells[row].setdefault(column, text)
        return list(self._records())

    def _records(self) -> Iterator[Record]:
        before = 0
        for row in sorted(self.cells):
            if row > before + 1:
                yield before + 1, []
            there = self.cells[row]
            yield row, [there.get(column, "") for column in range(1, max(there) + 1)]
            before = row


def place(row: int, column: int) -> str:
    """`B7` for row 7, column 2."""
    letters = ""
    while column:
        column, rest = divmod(column - 1, 26)
        letters = chr(65 + rest) + letters
    return f"{letters}{row}"


def number(text: str, percent: bool = False) -> str:
    """A stored figure as people write it: `100`, `0.47`, `5%`; floats carry noise behind the 15th digit."""
    try:
        value = Decimal(f"{float(text):.15g}") * (100 if percent else 1)
    except (ValueError, InvalidOperation, OverflowError):
        return text
    if not value.is_finite():
        return text
    if not -15 <= value.adjusted() <= 15 and value:
        return f"{value.normalize():E}{'%' * percent}"
    written = f"{value.normalize():f}" if value else "0"
    return f"{written}{'%' * percent}"
