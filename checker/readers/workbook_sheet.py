"""The cells of one sheet of a workbook, whichever form it was saved in, as rows of text."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from decimal import Decimal, InvalidOperation

from checker import limits
from checker.errors import InputError
from checker.neutral import neutral
from checker.readers import bom_headings as headings
from checker.readers.bom_sections import Record

Cell = tuple[int, int]  # row and column, from 1


@dataclass(slots=True)
class Room:
    """What one workbook may still hold: a cell that is repeated, or a text that many cells name, is small in the file only."""

    path: str
    cells: int
    letters: int

    def take(self, letters: int) -> None:
        """Room for a cell of so many characters. Raises InputError when there is none."""
        self.cells -= 1
        self.letters -= letters
        if self.cells < 0:
            raise InputError(self.path, "the workbook holds too many cells", expected=f"at most {limits.SHEET_CELLS:,}")
        if self.letters < 0:
            most = f"at most {limits.SHEET_TEXT:,} characters"
            raise InputError(self.path, "the texts of all cells are too long together", expected=most)


@dataclass(slots=True)
class Sheet:
    """One sheet. cells: row -> column -> text, only what holds text.

    unsolved: formulas without a stored value. faulty: errors such as #N/A. dates: cells that hold a date. hidden: first and last
    of rows that are not shown. merged: first row, first column, last row, last column. carried: cells that `records` filled from
    the first one of a merge, each with the row of that one. fault: why the rest of the sheet was not read.
    """

    room: Room
    name: str
    shown: bool = True
    cells: dict[int, dict[int, str]] = field(default_factory=dict)
    unsolved: list[Cell] = field(default_factory=list)
    faulty: list[Cell] = field(default_factory=list)
    dates: set[Cell] = field(default_factory=set)
    hidden: list[tuple[int, int]] = field(default_factory=list)
    merged: list[tuple[int, int, int, int]] = field(default_factory=list)
    carried: dict[Cell, int] = field(default_factory=dict)
    fault: InputError | None = None

    def put(self, row: int, column: int, text: str) -> None:
        """A cell that holds text; one beyond what a list of parts may have is a `fault` of the sheet.

        Raises InputError when the workbook has no more room.
        """
        if not text:
            return
        self.room.take(len(text))
        fault: tuple[str, str] | None = None
        if column > limits.BOM_COLUMNS:
            fault = "too many columns", f"at most {limits.BOM_COLUMNS}"
        elif row not in self.cells and len(self.cells) >= limits.BOM_ROWS:
            fault = f"more than {limits.BOM_ROWS:,} rows", f"at most {limits.BOM_ROWS:,}"
        elif len(text) > limits.TOKEN:
            fault = "a cell is too long", f"at most {limits.TOKEN:,} characters"
        if fault is None:
            self.cells.setdefault(row, {})[column] = text
        elif self.fault is None:
            self.fault = self.refusal(fault[0], row, place(row, column), fault[1])

    def refusal(self, what: str, row: int, found: str, expected: str = "", remedy: str = "") -> InputError:
        """The error for a row of this sheet."""
        return InputError(
            self.room.path, f"sheet {shown(self.name)}: {what}", line=row, found=found, expected=expected, remedy=remedy
        )

    def records(self) -> list[Record]:
        """Rows that hold something, each with its number, and a blank one wherever rows are left out.

        What was merged downwards stands in each of its rows that holds something of its own; a figure or a mark such as `x`
        that was merged over columns stands in each of them, since it can only count for all.
        """
        rows = sorted(self.cells)
        for merge in self.merged:
            self._carry(rows, *merge)
        return list(self._records(rows))

    def _carry(self, rows: Sequence[int], top: int, left: int, bottom: int, right: int) -> None:
        text = self.cells.get(top, {}).get(left, "")
        if not text:
            return
        over = range(left + 1, min(right, limits.BOM_COLUMNS) + 1) if _counts_for_all(text) else ()
        for row in rows[bisect_left(rows, top) : bisect_right(rows, bottom)]:
            there = self.cells[row]
            self.room.take(0)
            if not any(column < left or column > right for column in there):
                continue  # a caption over the whole table, or a row without anything of its own
            for column in (*((left,) if row > top else ()), *over):
                if column not in there:
                    self.room.take(len(text))
                    there[column] = text
                    self.carried[row, column] = top

    def _records(self, rows: Sequence[int]) -> Iterator[Record]:
        before = 0
        for row in rows:
            if row > before + 1:
                yield before + 1, []
            there = self.cells[row]
            yield row, [there.get(column, "") for column in range(1, max(there) + 1)]
            before = row

    def hidden_rows(self) -> list[int]:
        """The rows that hold something and are not shown."""
        rows = sorted(self.cells)
        found = {row for first, last in self.hidden for row in rows[bisect_left(rows, first) : bisect_right(rows, last)]}
        return sorted(found)


def _counts_for_all(text: str) -> bool:
    return len(text) < 32 and (figure(text) is not None or headings.fitted("fitted+", text) is not None)


def place(row: int, column: int) -> str:
    """`B7` for row 7, column 2."""
    letters = ""
    while column:
        column, rest = divmod(column - 1, 26)
        letters = chr(65 + rest) + letters
    return f"{letters}{row}"


def shown(name: str) -> str:
    """A sheet's name, made harmless, as the programs write it before a cell: `Parts` or `'Parts 2'`."""
    name = neutral(name, 64)
    return name if name.isalnum() else "'" + name.replace("'", "''") + "'"


def figure(text: str) -> Decimal | None:
    """A stored figure without the noise that floats carry behind the 15th digit; None for other text."""
    try:
        value = Decimal(f"{float(text):.15g}")
    except (ValueError, InvalidOperation, OverflowError):
        return None
    return value if value.is_finite() else None


def number(text: str, unit: str = "", percent: bool = False) -> str:
    """A stored figure as people write it, with its unit: `100`, `4.7E-7`, `0.00000047 F`, `5%`; other text as it is."""
    value = figure(text)
    if value is None:
        return text
    value = abs(value) if not value else (value * 100 if percent else value).normalize()
    exponent = value.adjusted() if value else 0
    written = f"{value:E}" if exponent > 15 or exponent < -15 or (exponent < -5 and not unit) else f"{value:f}"
    return f"{written}{unit}{'%' * percent}"
