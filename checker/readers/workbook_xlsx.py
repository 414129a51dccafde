"""Sheets of an Office Open XML workbook (ECMA-376, SpreadsheetML): shared and inline strings, figures, formats, merged cells."""

from __future__ import annotations

import posixpath
import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from functools import lru_cache
from typing import Any

from checker import limits
from checker.errors import InputError
from checker.readers.workbook_sheet import Room, Sheet, number, place, shown
from checker.readers.workbook_zip import SAVE, Archive, attribute, local

START = "_rels/.rels"

_CELL = re.compile(r"\$?([A-Z]{1,3})\$?([0-9]{1,7})\Z")
_QUOTED = re.compile(r'"([^"]*)"|\\(.)')
_ASIDE = re.compile(r'"[^"]*"|\\.|\[[^\]]*\]|_.|\*.')  # what of a format is no placeholder
_ESCAPE = re.compile(r"_x([0-9A-Fa-f]{4})_")
_DATES = frozenset((*range(14, 23), *range(27, 37), *range(45, 48), *range(50, 59)))  # built-in formats of dates and times
_PERCENTS = frozenset((9, 10))
_LAST_DAY = 2_957_003  # 9999-12-31 counted from 1904


@dataclass(frozen=True, slots=True)
class _Format:
    """How a style shows a figure: as per cent, as a date, with a unit behind it."""

    percent: bool = False
    dated: bool = False
    unit: str = ""


@dataclass(frozen=True, slots=True)
class _Book:
    """What the sheets of a workbook share. since_1904: from which of two days dates are counted."""

    strings: Sequence[str]
    formats: Sequence[_Format]
    since_1904: bool


def main(archive: Archive) -> str:
    """The member that holds the workbook, "" when the archive is none."""
    if START not in archive:
        return ""
    found = (name for kind, name in _targets(archive, "").values() if kind == "officeDocument" and name in archive)
    name = next(found, "")
    return name if name and next(archive.elements(name, "sheets"), None) is not None else ""


def sheets(archive: Archive, room: Room) -> Iterator[Sheet]:
    """Every worksheet, in the order of the book. Raises InputError for a book that is damaged or too large."""
    name = main(archive)
    targets = _targets(archive, name)
    shared = {kind: member for kind, member in targets.values() if member in archive}
    properties = next(archive.elements(name, "workbookPr"), None)
    since_1904 = properties is not None and attribute(properties, "date1904") in ("1", "true")
    book = _Book(list(_strings(archive, shared.get("sharedStrings", ""))), _formats(archive, shared.get("styles", "")), since_1904)
    for count, found in enumerate(archive.elements(name, "sheet")):
        if count >= limits.SHEETS:
            raise InputError(archive.path, "the workbook has too many sheets", expected=f"at most {limits.SHEETS}")
        sheet = Sheet(room, attribute(found, "name")[:64], attribute(found, "state") in ("", "visible"))
        kind, member = targets.get(attribute(found, "id"), ("worksheet", ""))
        if kind != "worksheet":  # a chart or a dialogue
            continue
        if member not in archive:
            raise InputError(
                archive.path, "the workbook lacks one of its files", expected=f"sheet {shown(sheet.name)}", remedy=SAVE
            )
        _fill(archive, member, sheet, book)
        yield sheet


def _targets(archive: Archive, name: str) -> Mapping[str, tuple[str, str]]:
    """id -> (kind, member) of the relations of a member; links to the outside are left out, so that nothing follows them."""
    folder, base = posixpath.split(name)
    listed = posixpath.join(folder, "_rels", f"{base}.rels")
    found = {}
    for relation in archive.elements(listed, "Relationship"):
        if (relation.get("TargetMode") or "Internal") != "Internal":
            continue
        target = posixpath.normpath(posixpath.join("/", folder, relation.get("Target") or ""))
        found[relation.get("Id") or ""] = (relation.get("Type") or "").rpartition("/")[2], target.lstrip("/")
    return found


def _strings(archive: Archive, name: str) -> Iterator[str]:
    for count, found in enumerate(archive.elements(name, "si") if name else ()):
        if count >= limits.STRINGS:
            raise InputError(archive.path, "the workbook holds too many texts", expected=f"at most {limits.STRINGS:,}")
        yield _text(found)


def _text(element: Any) -> str:
    """The text of a string with its runs; reading aids (`rPh`) are no part of it."""
    return _plain(
        "".join(found.text or "" for found in element.iter() if local(found) == "t" and local(found.getparent()) != "rPh")
    )


def _plain(text: str) -> str:
    """Characters that XML has no room for are written `_x000D_`; a line ends with LF alone."""
    return _ESCAPE.sub(_character, text).replace("\r\n", "\n") if "_x" in text else text


def _character(found: re.Match[str]) -> str:
    """The character of an escape; NUL and halves of characters stay as they are written."""
    code = int(found[1], 16)
    return chr(code) if code and not 0xD800 <= code < 0xE000 else found[0]


def _formats(archive: Archive, name: str) -> Sequence[_Format]:
    """The format of each style of a cell."""
    codes: dict[str, str] = {}
    found: list[_Format] = []
    for element in archive.elements(name, "numFmt", "cellXfs") if name else ():
        if local(element) == "numFmt":
            codes[attribute(element, "numFmtId")] = attribute(element, "formatCode")
            continue
        for style in element:
            identity = attribute(style, "numFmtId", "0")
            found.append(_format(int(identity) if identity.isdecimal() and len(identity) < 9 else 0, codes.get(identity, "")))
    return found


@lru_cache(maxsize=1024)
def _format(identity: int, code: str) -> _Format:
    """Only the first section of a format is looked at, the one for positive figures."""
    code = code[: limits.CELL].partition(";")[0]
    bare = _ASIDE.sub("", code).casefold().replace("general", "")
    percent = identity in _PERCENTS or "%" in bare
    dated = identity in _DATES or re.search(r"[ymdhs]", bare) is not None
    behind = re.split(r"[0#?]|General", code)[-1] if re.search(r"[0#?]|General", code) else ""
    scaled = behind.lstrip(".").startswith(",")  # shown in thousands: a unit behind it is one of the figure shown, not stored
    return _Format(percent, dated, "" if scaled else "".join(one or two for one, two in _QUOTED.findall(behind)).rstrip())


def _fill(archive: Archive, member: str, sheet: Sheet, book: _Book) -> None:
    row = 0
    for found in archive.elements(member, "row", "mergeCell"):
        if local(found) == "mergeCell":
            ends = [match for end in (found.get("ref") or "").split(":") if (match := _CELL.match(end))]
            if len(ends) == 2:
                first, last = ends
                sheet.merged.append((int(first[2]), _column(first[1]), int(last[2]), _column(last[1])))
            continue
        row = int(stated) if (stated := found.get("r") or "").isdecimal() and len(stated) < 9 else row + 1
        if found.get("hidden") in ("1", "true"):
            sheet.hidden.append((row, row))
        column = 0
        for cell in found:
            match = _CELL.match(cell.get("r") or "")
            column = _column(match[1]) if match else column + 1
            sheet.put(row, column, _value(cell, sheet, (row, column), book))


def _column(letters: str) -> int:
    value = 0
    for letter in letters:
        value = 26 * value + ord(letter) - 64
    return value


def _value(cell: Any, sheet: Sheet, at: tuple[int, int], book: _Book) -> str:
    """The text of a cell. Formulas are never worked out: their stored value counts, if there is one."""
    parts = {local(child): child for child in cell}
    kind, raw = cell.get("t") or "n", (parts["v"].text or "") if "v" in parts else ""
    stored = raw.strip()
    if kind == "inlineStr":
        return _text(parts["is"]) if "is" in parts else ""
    if not stored:
        if "f" in parts and not (kind == "str" and "v" in parts):  # a formula may give the empty text
            sheet.unsolved.append(at)
        return ""
    if kind == "s":
        index = int(stored) if stored.isdecimal() and len(stored) < 9 else -1
        if not 0 <= index < len(book.strings):
            raise sheet.refusal("a cell names a text the workbook does not hold", at[0], place(*at), remedy="Save it anew.")
        return book.strings[index]
    if kind == "e":
        sheet.faulty.append(at)
        return ""
    if kind == "b":
        return {"1": "yes", "0": "no"}.get(stored, stored)
    if kind == "d":
        sheet.dates.add(at)
        return stored
    if kind != "n":
        return _plain(raw)
    style = cell.get("s") or ""
    known = style.isdecimal() and len(style) < 9 and int(style) < len(book.formats)
    look = book.formats[int(style)] if known else _Format()
    if look.dated and (date := _date(stored, book.since_1904)):
        sheet.dates.add(at)
        return date
    return number(stored, look.unit, look.percent)


def _date(stored: str, since_1904: bool) -> str:
    """The day of a figure, counted from 1899-12-30 (before March 1900 from the day after) or from 1904-01-01; "" for none."""
    try:
        days = float(stored)
    except ValueError:
        return ""
    if not 0 <= days <= _LAST_DAY:
        return ""
    first = datetime(1904, 1, 1) if since_1904 else datetime(1899, 12, 30 + (days < 61))
    return (first + timedelta(days=days)).date().isoformat()
