"""Sheets of an OpenDocument spreadsheet (ISO/IEC 26300): repeated rows and cells, spans, figures, formulas."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from decimal import Decimal
from typing import Any

from checker import limits
from checker.errors import InputError
from checker.readers.workbook_sheet import Room, Sheet, figure, number
from checker.readers.workbook_zip import Archive, attribute, attributes, local

MAIN = "content.xml"

_MANIFEST = "META-INF/manifest.xml"
_TYPE = "mimetype"
_HIDDEN = ("collapse", "filter")
_GROUPS = frozenset({"table-rows", "table-header-rows", "table-row-group"})
_ASIDE = frozenset({"annotation", "note", "ruby-text"})  # beside the text of a cell, no part of it
_BLANKS = re.compile(r"[ \t\r\n]+")
_SHOWN = re.compile(r"(-?[0-9][0-9.,']*)(\s*[^\W\d_].*)", re.DOTALL)  # a figure and a unit
_ERRORS = ("#N/A", "#VALUE!", "#REF!", "#NAME?", "#DIV/0!", "#NUM!", "#NULL!", "Err:")


def main(archive: Archive) -> str:
    """The member that holds the sheets, "" when the archive is no spreadsheet. Raises InputError for a locked one."""
    if MAIN not in archive or (_TYPE in archive and b"spreadsheet" not in archive.data(_TYPE)):
        return ""
    if _MANIFEST in archive and next(archive.elements(_MANIFEST, "encryption-data"), None) is not None:
        raise InputError(archive.path, "the workbook is locked with a password", remedy="Save it without a password.")
    return MAIN


def sheets(archive: Archive, room: Room) -> Iterator[Sheet]:
    """Every sheet with rows, in file order. Raises InputError for a book that is damaged or too large."""
    hidden: set[str] = set()
    sheet: Sheet | None = None
    table: Any = None
    row = count = 0
    for found in archive.elements(MAIN, "style", "table-row"):
        if local(found) == "style":
            if any(local(said) == "table-properties" and attribute(said, "display") == "false" for said in found):
                hidden.add(attribute(found, "name"))
            continue
        place = _table(found)
        if place is None:
            continue
        if sheet is None or place is not table:
            if sheet is not None:
                yield sheet
            count += 1
            if count > limits.SHEETS:
                raise InputError(archive.path, "the workbook has too many sheets", expected=f"at most {limits.SHEETS}")
            table, row = place, 1
            sheet = Sheet(room, attribute(table, "name")[:64], attribute(table, "style-name") not in hidden)
        row += _fill(found, sheet, row)
    if sheet is not None:
        yield sheet


def _table(row: Any) -> Any:
    """The sheet of a row; None for a row of what is no sheet, such as the copy of a linked file."""
    parent = row.getparent()
    while parent is not None and local(parent) in _GROUPS:
        parent = parent.getparent()
    above = parent.getparent() if parent is not None and local(parent) == "table" else None
    return parent if above is not None and local(above) == "spreadsheet" else None


def _count(said: Mapping[str, str], name: str) -> int:
    """How often something stands there; a figure that is none counts once."""
    text = said.get(name, "1")
    return max(1, int(text)) if text.isdecimal() and len(text) < 10 else 1


def _fill(found: Any, sheet: Sheet, row: int) -> int:
    """Puts the cells of one row element in its place; gives the number of rows it stands for."""
    said = attributes(found)
    times = _count(said, "number-rows-repeated")
    if said.get("visibility") in _HIDDEN:
        sheet.hidden.append((row, row + times - 1))
    cells = list(_cells(found, sheet, row))
    for again in range(min(times, limits.BOM_ROWS + 1) if cells else 0):
        for column, text in cells:
            sheet.put(row + again, column, text)
    return times


def _cells(found: Any, sheet: Sheet, row: int) -> Iterator[tuple[int, str]]:
    """(column, text) of each cell that holds text."""
    column = 1
    for cell in found:
        name = local(cell)
        if name not in ("table-cell", "covered-table-cell"):
            continue
        said = attributes(cell)
        times = _count(said, "number-columns-repeated")
        text = _value(cell, said, sheet, (row, column)) if name == "table-cell" else ""
        if text:
            down, over = _count(said, "number-rows-spanned"), _count(said, "number-columns-spanned")
            if down * over > 1:
                sheet.merged.append((row, column, row + down - 1, column + over - 1))
            yield from ((at, text) for at in range(column, min(column + times, limits.BOM_COLUMNS + 2)))  # one too far is told
        column += times


def _value(cell: Any, said: Mapping[str, str], sheet: Sheet, at: tuple[int, int]) -> str:
    """The text of a cell. Formulas are never worked out: their stored value counts, if there is one."""
    seen = "\n".join(_paragraph(child).strip(" ") for child in cell if local(child) == "p")
    kind, stored = said.get("value-type", ""), said.get("value", "")
    if seen.startswith(_ERRORS):
        sheet.faulty.append(at)
        return ""
    if said.get("formula") and not (seen or stored or kind == "string"):  # a formula may give the empty text
        sheet.unsolved.append(at)
        return ""
    if kind == "string":
        return seen or said.get("string-value", "")
    if kind == "boolean":
        return {"true": "yes", "false": "no"}.get(said.get("boolean-value", ""), seen)
    if kind == "date":
        sheet.dates.add(at)
        return said.get("date-value", "").partition("T")[0] or seen
    if kind == "percentage" and stored:
        return number(stored, percent=True)
    return _figure(stored, seen) if stored else seen


def _figure(stored: str, seen: str) -> str:
    """A stored figure with the unit that is shown behind it; as shown where that is another figure, such as `4.7k` for 4700."""
    match = _SHOWN.match(seen)
    value = figure(stored)
    if match is None or value is None or figure(seen) is not None:
        return number(stored)
    bare = re.sub(r"[\s']", "", match[1])
    for text in (bare.replace(",", ""), bare.replace(".", "").replace(",", ".")):  # 1,000.5 and 1.000,5
        near = figure(text)
        if near is not None and abs(near - value) * 2 <= Decimal(1).scaleb(min(0, int(near.as_tuple().exponent))):
            return number(stored, match[2])
    return seen


def _paragraph(element: Any) -> str:
    """The text of a paragraph; blanks that count, TABs and line ends are elements of their own, the others are one blank."""
    words = [_BLANKS.sub(" ", element.text or "")]
    for child in element:
        name = local(child)
        if name == "s":
            words.append(" " * min(_count(attributes(child), "c"), limits.CELL))
        elif name in ("tab", "line-break"):
            words.append("\t" if name == "tab" else "\n")
        elif name not in _ASIDE:
            words.append(_paragraph(child))
        words.append(_BLANKS.sub(" ", child.tail or ""))
    return "".join(words)
