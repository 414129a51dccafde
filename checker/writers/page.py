"""Lines of plain text that nothing from a file can break out of.

Text from a report is made neutral, wrapped at words under a label of our own, and no line it lands on can be taken for a
command by a program that reads a log: those start a line with `::`, even after spaces, or hold `##[` or `##name[` anywhere.
"""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from itertools import zip_longest

from checker.neutral import harmless, neutral

NARROWEST = 60


class Page:
    """Collects lines of at most `width` characters (never below NARROWEST)."""

    def __init__(self, width: int):
        self.width = max(width, NARROWEST)
        self.lines: list[str] = []

    def put(self, text: str = "", label: str = "", indent: int = 0, column: int = 0) -> None:
        """`text` wrapped behind `label`, which stands `indent` spaces in; the text starts, on every line, at `column`.

        Without a column the text follows its label and later lines hang two spaces in. Without text the label stands
        alone, and without both the line is empty.
        """
        label = neutral(label)
        first = " " * indent + label
        if label and text:
            first = f"{first:<{column}}" if len(first) < column else f"{first} "
        elif text:
            first = " " * max(indent, column)
        later = " " * (column or indent + 2)
        flat = neutral(text, limit=2000)
        wrapped = textwrap.wrap(flat, self.width, initial_indent=first, subsequent_indent=later, break_on_hyphens=False)
        self.lines += [harmless(line.rstrip()) for line in wrapped or [first]]

    def grid(self, rows: Sequence[Sequence[str] | str], indent: int = 0) -> bool:
        """Rows of cells in columns as wide as they need; a text among them is wrapped in between.

        False, and nothing put, when the columns are wider than the page.
        """
        cells = [row if isinstance(row, str) else [neutral(cell, limit=self.width) for cell in row] for row in rows]
        columns = zip_longest(*(row for row in cells if not isinstance(row, str)), fillvalue="")
        widths = [max(map(len, column)) for column in columns]
        room = self.width - indent - sum(widths)
        gap = min(2, room // max(len(widths) - 1, 1))
        if room < 0 or (gap < 1 and len(widths) > 1):
            return False
        for row in cells:
            if isinstance(row, str):
                self.put(row, indent=indent)
            else:
                line = (" " * gap).join(f"{cell:<{width}}" for cell, width in zip(row, widths, strict=False))
                self.lines.append(harmless((" " * indent + line).rstrip()))
        return True

    def rule(self, character: str) -> None:
        """A line right across the page."""
        self.lines.append(character * self.width)

    def text(self) -> str:
        """The page, every line ended, without empty lines at the end."""
        return "\n".join(self.lines).rstrip("\n") + "\n"


def some(items: list[str], most: int) -> str:
    """`a, b, c and 5 more`."""
    shown = ", ".join(items[:most])
    return shown if len(items) <= most else f"{shown} and {len(items) - most} more"
