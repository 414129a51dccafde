"""Sheets of an Office Open XML workbook (ECMA-376, SpreadsheetML): shared and inline strings, figures, formats, merged cells."""

from __future__ import annotations

import re
from collections.abc import Iterator
from datetime import datetime, timedelta
from typing import Any

from checker import limits
from checker.errors import InputError
from checker.readers.workbook_sheet import Sheet, number, place
from checker.readers.workbook_zip import Archive, attribute, local

BOOK = "xl/workbook.xml"

_CELL = re.compile(r"\$?([A-Z]{1,3})\$?([0-9]{1,7})\Z")
_LITERAL = re.compile(r'"([^"]*)"|\\(.)|\[[^\]]*\]|_.|\*.')
_DATES = frozenset((*range(14, 23), *range(27, 37), *range(45, 48), *range(50, 59)))  # built-in formats of dates and times
_PERCENTS = frozenset((9, 10))


def sheets(archive: Archive) -> Iterator[Sheet]:
    """Every worksheet, in the order of the book. Raises InputError for a book that is damaged or too large."""
    targets = _targets(archive)
    strings = list(_strings(archive))
    formats = list(_formats(archive))
    book = next(archive.elements(BOOK, "workbook"), None)
    if book is None:
        raise InputError(archive.path, "the workbook has no sheets")
    since_1904 = any(local(found) == "workbookPr" and attribute(found, "date1904") in ("1", "true") for found in book.iter())
    named = [found for found in book.iter() if local(found) == "sheet"]
    if len(named) > limits.SHEETS:
        raise InputError(archive.path, "the workbook has too many sheets", expected=f"at most {limits.SHEETS}")
    for found in named:
        target = targets.get(attribute(found, "id"), "")
        if target in archive and "/worksheets/" in f"/{target}":
            sheet = Sheet(archive.path, attribute(found, "name")[:64], attribute(found, "state") in ("", "visible"))
            _fill(archive, target, sheet, strings, formats, since_1904)
            yield sheet


def _targets(archive: Archive) -> dict[str, str]:
    """id -> member, of the relations of the book to other files of the archive; links to the outside are no members."""
    found = {}
    for relation in archive.elements("xl/_rels/workbook.xml.rels", "Relationship"):
        target = relation.get("Target") or ""
        found[relation.get("Id") or ""] = target.lstrip("/") if target.startswith("/") else f"xl/{target}"
    return found


def _strings(archive: Archive) -> Iterator[str]:
    if "xl/sharedStrings.xml" not in archive:
        return
    for count, found in enumerate(archive.elements("xl/sharedStrings.xml", "si")):
        if count >= limits.STRINGS:
            raise InputError(archive.path, "the workbook holds too many texts", expected=f"at most {limits.STRINGS:,}")
        yield _text(found)


def _text(element: Any) -> str:
    """The text of a string with its runs; readings aids (`rPh`) are no part of it."""
    words = []
    for found in element.iter():
        if local(found) == "t" and local(found.getparent()) != "rPh":
            words.append(found.text or "")
    return "".join(words)


def _formats(archive: Archive) -> Iterator[tuple[bool, bool, str]]:
    """For each style: whether it shows per cent, whether dates, and a unit that stands behind the figure."""
    if "xl/styles.xml" not in archive:
        return
    styles = next(archive.elements("xl/styles.xml", "styleSheet"), None)
    codes = {}
    for found in styles.iter() if styles is not None else ():
        if local(found) == "numFmt":
            codes[attribute(found, "numFmtId")] = attribute(found, "formatCode")
    for found in styles.iter() if styles is not None else ():
        if local(found) == "xf" and local(found.getparent()) == "cellXfs":
            identity = attribute(found, "numFmtId", "0")
            yield _format(int(identity) if identity.isdecimal() else 0, codes.get(identity, ""))


def _format(identity: int, code: str) -> tuple[bool, bool, str]:
    positive = code.partition(";")[0]
    bare = _LITERAL.sub("", positive)
    percent = identity in _PERCENTS or "%" in bare
    dated = identity in _DATES or (re.search(r"[ymdhs]", bare, re.IGNORECASE) is not None and "general" not in bare.lower())
    behind = re.split(r"[0#?]|General", positive)[-1] if code else ""
    unit = "".join(one or two for one, two in re.findall(r'"([^"]*)"|\\(.)', behind))
    return percent, dated, unit


def _fill(
    archive: Archive, member: str, sheet: Sheet, strings: list[str], formats: list[tuple[bool, bool, str]], since_1904: bool
) -> None:
    row = 0
    for found in archive.elements(member, "row", "mergeCell"):
        if local(found) == "mergeCell":
            _merge(sheet, found.get("ref") or "")
            continue
        row = int(stated) if (stated := found.get("r") or "").isdecimal() and len(stated) < 9 else row + 1
        if found.get("hidden") in ("1", "true"):
            sheet.hidden.add(row)
        column = 0
        for cell in found:
            match = _CELL.match(cell.get("r") or "")
            column = _column(match[1]) if match else column + 1
            sheet.put(row, column, _value(cell, sheet, place(row, column), strings, formats, since_1904))


def _column(letters: str) -> int:
    value = 0
    for letter in letters:
        value = 26 * value + ord(letter) - 64
    return value


def _merge(sheet: Sheet, text: str) -> None:
    ends = [match for end in text.split(":") if (match := _CELL.match(end))]
    if len(ends) == 2 and ends[0][1] == ends[1][1] and int(ends[1][2]) - int(ends[0][2]) < limits.BOM_ROWS:
        sheet.down.append((int(ends[0][2]), int(ends[1][2]), _column(ends[0][1])))


def _value(cell: Any, sheet: Sheet, at: str, strings: list[str], formats: list[tuple[bool, bool, str]], since_1904: bool) -> str:
    """The text of a cell. Formulas are never worked out: their stored value counts, if there is one."""
    parts = {local(child): child for child in cell}
    kind, stored = cell.get("t") or "n", (parts["v"].text or "").strip() if "v" in parts else ""
    if kind == "inlineStr":
        return _text(parts["is"]) if "is" in parts else ""
    if not stored:
        if "f" in parts:
            sheet.unsolved.append(at)
        return ""
    if kind == "s":
        index = int(stored) if stored.isdecimal() and len(stored) < 9 else -1
        if not 0 <= index < len(strings):
            raise InputError(sheet.path, "a cell names a text the workbook does not hold", found=f"{at} of {sheet.name}")
        return strings[index]
    if kind == "e":
        sheet.faulty.append(at)
        return ""
    if kind == "b":
        return {"1": "yes", "0": "no"}.get(stored, stored)
    if kind != "n":
        return parts["v"].text or ""
    style = cell.get("s") or ""
    percent, dated, unit = formats[int(style)] if style.isdecimal() and int(style) < len(formats) else (False, False, "")
    if dated:
        sheet.dates.append(at)
        return _date(stored, since_1904)
    return number(stored, percent) + unit


def _date(stored: str, since_1904: bool) -> str:
    """What a spreadsheet made of something that looked like a date; the days are counted from 1899-12-30, or from 1904."""
    try:
        start = datetime(1904, 1, 1) if since_1904 else datetime(1899, 12, 30)
        moment = start + timedelta(days=float(stored))
    except (ValueError, OverflowError):
        return stored
    return moment.strftime("%Y-%m-%d")
