"""Sheets of an OpenDocument spreadsheet (ISO/IEC 26300): repeated rows and cells, spans, figures, formulas."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from checker import limits
from checker.errors import InputError
from checker.readers.workbook_sheet import Sheet, number, place
from checker.readers.workbook_zip import Archive, attribute, local

BOOK = "content.xml"

_HIDDEN = ("collapse", "filter")


def sheets(archive: Archive) -> Iterator[Sheet]:
    """Every sheet, in file order. Raises InputError for a book that is damaged, locked or too large."""
    manifest = "META-INF/manifest.xml"
    if manifest in archive and b"encryption-data" in archive.data(manifest):
        raise InputError(archive.path, "the workbook is locked with a password", remedy="Save it without a password.")
    styles = set(_hidden_styles(archive))
    for count, table in enumerate(archive.elements(BOOK, "table")):
        if count >= limits.SHEETS:
            raise InputError(archive.path, "the workbook has too many sheets", expected=f"at most {limits.SHEETS}")
        sheet = Sheet(archive.path, attribute(table, "name")[:64], attribute(table, "style-name") not in styles)
        _fill(table, sheet)
        yield sheet


def _hidden_styles(archive: Archive) -> Iterator[str]:
    """Names of styles of sheets that are not shown."""
    for style in archive.elements(BOOK, "style"):
        if any(local(found) == "table-properties" and attribute(found, "display") == "false" for found in style):
            yield attribute(style, "name")


def _repeated(element: Any, name: str) -> int:
    """How often an element stands there; a figure that is none counts once."""
    text = attribute(element, name, "1")
    return max(1, int(text)) if text.isdecimal() and len(text) < 10 else 1


def _fill(table: Any, sheet: Sheet) -> None:
    row = 1
    for found in _rows(table):
        times = _repeated(found, "number-rows-repeated")
        cells = list(_cells(found, sheet, row))
        if attribute(found, "visibility") in _HIDDEN:
            sheet.hidden.update(range(row, row + min(times, limits.BOM_ROWS)))
        for again in range(times if cells else 0):
            for column, text, span in cells:
                sheet.put(row + again, column, text)
                if span > 1:
                    sheet.down.append((row + again, row + again + min(span, limits.BOM_ROWS) - 1, column))
        row += times


def _rows(table: Any) -> Iterator[Any]:
    """The rows of a sheet, in groups and headers too; not those of a table inside a cell."""
    for child in table:
        if local(child) == "table-row":
            yield child
        elif local(child) in ("table-rows", "table-header-rows", "table-row-group"):
            yield from _rows(child)


def _cells(row: Any, sheet: Sheet, line: int) -> Iterator[tuple[int, str, int]]:
    """(column, text, rows it spans) of each cell that holds text."""
    column = 1
    for cell in row:
        if local(cell) not in ("table-cell", "covered-table-cell"):
            continue
        times = _repeated(cell, "number-columns-repeated")
        text = "" if local(cell) == "covered-table-cell" else _value(cell, sheet, place(line, column))
        for again in range(min(times, limits.BOM_COLUMNS + 1) if text else 0):
            yield column + again, text, _repeated(cell, "number-rows-spanned")
        column += times


def _value(cell: Any, sheet: Sheet, at: str) -> str:
    """The text of a cell: what is shown, for figures what is stored unless a unit is shown with it."""
    shown = "\n".join(_paragraph(child) for child in cell if local(child) == "p")
    kind = attribute(cell, "value-type")
    stored = attribute(cell, "value")
    if shown.startswith(("#N/A", "#VALUE!", "#REF!", "#NAME?", "#DIV/0!", "Err:")):
        sheet.faulty.append(at)
        return ""
    if attribute(cell, "formula") and not (shown or stored):
        sheet.unsolved.append(at)
        return ""
    if kind == "date":
        sheet.dates.append(at)
    if kind == "percentage" and stored:
        return number(stored, percent=True)
    if kind in ("float", "currency") and stored and not any(letter.isalpha() for letter in shown):
        return number(stored)
    if kind == "boolean":
        return {"true": "yes", "false": "no"}.get(attribute(cell, "boolean-value"), shown)
    return shown


def _paragraph(element: Any) -> str:
    """The text of a paragraph; blanks, TABs and line ends are elements of their own, notes are no text of the cell."""
    words = [element.text or ""]
    for child in element:
        name = local(child)
        if name == "s":
            words.append(" " * min(_repeated(child, "c"), limits.CELL))
        elif name in ("tab", "line-break"):
            words.append("\t" if name == "tab" else "\n")
        elif name not in ("annotation", "note"):
            words.append(_paragraph(child))
        words.append(child.tail or "")
    return "".join(words)
