"""Bill of materials as a workbook, XLSX or ODS: every sheet that has a header with a column of references.

Nothing in it is run, worked out or followed: a formula counts by the value stored beside it, and where none is stored the cell is
empty and a note says so. Hidden rows count, with a note. Hidden sheets are left out, with a note, unless no other lists parts.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import chain

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.model.fact import Source
from checker.model.reading import Note, Reader, Reading
from checker.readers import sniff, workbook_ods, workbook_xlsx
from checker.readers.bom_header import best_header, tables
from checker.readers.bom_rows import Bill, bill
from checker.readers.bom_sections import Record
from checker.readers.workbook_pages import Page, folded, joined, placed
from checker.readers.workbook_sheet import Cell, Room, Sheet, place, shown
from checker.readers.workbook_zip import Archive

FORM = "XLSX or ODS workbook"

_ZIP = "PK\x03\x04"
_COMPOUND = "\xd0\xcf\x11\xe0"  # the old binary form, and any form with a password
_SHOWN = 8
_SAVE = "Open it in a spreadsheet program and save it again, so that it stores what its formulas give."


def claims(head: str) -> bool:
    """Whether the content is a zip file, or the container of old and of locked workbooks."""
    return head.startswith((_ZIP, _COMPOUND))


@dataclass(frozen=True, slots=True)
class _Listing:
    """A sheet as rows of cells. headed: whether one of the first rows is a header."""

    sheet: Sheet
    records: list[Record]
    headed: bool

    def __str__(self) -> str:
        return shown(self.sheet.name)


def read(blob: Blob) -> Reading:
    """The rows of every sheet with parts; each place names sheet, row and cell.

    Raises InputError for what is no workbook, is damaged, locked or beyond a limit, and for one without a list of parts.
    """
    listings = [_listing(sheet) for sheet in _sheets(blob) if sheet.cells or sheet.fault]
    if not listings:
        raise InputError(blob.path, "the bill of materials is empty", expected="a table with a header row")
    headed = [found for found in listings if found.headed]
    if not headed:
        raise _no_list(blob.path, listings)
    visible = [found for found in headed if found.sheet.shown]
    pages: list[Page] = []
    bare: list[_Listing] = []
    for found in visible or headed:
        page = _page(blob.path, found)
        if page is None:
            bare.append(found)
        else:
            pages.append(page)
    if not pages:
        what, expected = "the table has a header but no row with a reference", "one row per part or group of parts"
        raise bare[0].sheet.refusal(what, 0, "", expected, _SAVE if bare[0].sheet.unsolved else "")
    rows, variants, notes = joined(blob.path, pages)
    left_out = (
        ([found for found in headed if visible and not found.sheet.shown], "sheets that are not shown and list parts, left out"),
        ([*(found for found in listings if not found.headed), *bare], "sheets without a list of parts, left out"),
        ([] if visible else headed, "sheets that are not shown, read all the same since no other lists parts"),
    )
    told = [note for found, what in left_out for note in _named(blob.path, found, what)]
    told += (note for page in pages for note in _left_open(blob.path, page))
    return Reading("bom", FORM, blob.path, blob.sha256, rows=rows, variants=variants, notes=(*told, *notes))


def _sheets(blob: Blob) -> Iterator[Sheet]:
    """The sheets of either form. Raises InputError for anything else."""
    head = sniff.head(blob)
    if head.startswith(_COMPOUND):
        what = "this is a workbook of the old binary form, or one with a password"
        raise InputError(blob.path, what, remedy="Save it as XLSX, ODS or CSV, without a password.")
    if not claims(head):
        raise InputError(
            blob.path, "this is no workbook", found=sniff.describe(head), expected="a bill of materials as XLSX or ODS"
        )
    archive, room = Archive(blob), Room(blob.path, limits.SHEET_CELLS, limits.SHEET_TEXT)
    if workbook_xlsx.main(archive):
        return workbook_xlsx.sheets(archive, room)
    if workbook_ods.main(archive):
        return workbook_ods.sheets(archive, room)
    remedy = "Unpack it and give the file inside, or save the bill of materials as XLSX, ODS or CSV."
    raise InputError(blob.path, "the zip file is no workbook", expected="an XLSX or ODS workbook", remedy=remedy)


def _listing(sheet: Sheet) -> _Listing:
    records = sheet.records()
    return _Listing(sheet, records, best_header(records) is not None)


def _page(path: str, found: _Listing) -> Page | None:
    """The bill of a sheet, None when no part follows its header. Raises InputError for a sheet that was not read to its end."""
    sheet = found.sheet
    if sheet.fault is not None:
        raise sheet.fault
    try:
        made = bill(path, found.records)
    except InputError as error:
        if not error.line:  # the one error that is not about a row: none has a reference
            return None
        raise _on(found, error) from None
    if sheet.carried or sheet.unsolved or sheet.faulty:
        made = _checked(path, found, made)
    return placed(path, sheet, made)


def _checked(path: str, found: _Listing, made: Bill) -> Bill:
    """The bill with choices that share one merged cell of references put together.

    Raises InputError where a formula without a value would tell the variants apart: an empty cell there leaves a part out.
    """
    lost = {*found.sheet.unsolved, *found.sheet.faulty}
    merged: dict[int, int] = {}
    for table in tables(path, found.records):
        deciding = [index + 1 for index, _, _ in table.columns.variants] + [table.columns.by_variant + 1]
        for line, cells in table.records:
            if not any(cells):
                continue
            for column in deciding:
                if (line, column) in lost:
                    what, at = "which variant has the part stands in a formula without a stored value", place(line, column)
                    raise found.sheet.refusal(what, line, f"nothing in {at}", remedy=_SAVE)
            top = found.sheet.carried.get((line, table.columns.ref + 1))
            if top is not None:
                merged[line] = top
    return replace(made, rows=folded(made.rows, merged)) if merged else made


def _no_list(path: str, listings: Sequence[_Listing]) -> InputError:
    """What the sheet with the most rows holds instead of a header."""
    fault = next((found.sheet.fault for found in listings if found.sheet.fault is not None), None)
    if fault is not None:
        return fault
    largest = max(listings, key=lambda found: len(found.records))
    try:
        bill(path, largest.records)
    except InputError as error:
        remedy = error.remedy or (_SAVE if largest.sheet.unsolved else "")
        if len(listings) == 1 or not error.remedy:  # only a missing header has one
            return largest.sheet.refusal(error.what, error.line, error.found, error.expected, remedy)
        names = ", ".join(str(found) for found in listings[:_SHOWN])
        what = "no sheet has a header with a reference column"
        return InputError(path, what, found=f"the sheets {names}", expected=error.expected, remedy=remedy)
    raise AssertionError("a sheet without a header gave a bill")


def _on(found: _Listing, error: InputError) -> InputError:
    return found.sheet.refusal(error.what, error.line, error.found, error.expected, error.remedy)


def _named(path: str, listings: Sequence[_Listing], what: str) -> Iterator[Note]:
    if listings:
        names = ", ".join(str(found) for found in listings[:_SHOWN]) + (", ..." if len(listings) > _SHOWN else "")
        yield Note("skipped", f"{what}: {len(listings):,} ({names})", (Source(path),))


def _left_open(path: str, page: Page) -> Iterator[Note]:
    """What of a sheet is not known, or not as its author typed it."""
    sheet = page.sheet
    name = shown(sheet.name)
    kinds: tuple[tuple[Sequence[Cell], str], ...] = (
        (sheet.unsolved, "formulas without a stored value, taken as empty"),
        (sheet.faulty, "cells that hold an error, taken as empty"),
        (_dated(page), "cells that hold a date, which may have been typed as something else"),
    )
    for cells, what in kinds:
        if cells:
            listed = ", ".join(place(*cell) for cell in cells[:_SHOWN]) + (", ..." if len(cells) > _SHOWN else "")
            yield Note("skipped", f"sheet {name}: {what}: {len(cells):,} ({listed})", (Source(path),))
    rows = sheet.hidden_rows()
    if rows:
        listed = ", ".join(map(str, rows[:_SHOWN])) + (", ..." if len(rows) > _SHOWN else "")
        what = f"sheet {name}: rows that are not shown and count all the same: {len(rows):,} ({listed})"
        yield Note("skipped", what, (Source(path),))


def _dated(page: Page) -> list[Cell]:
    """The cells with a date that a fact with a meaning was read from."""
    if not page.sheet.dates:
        return []
    facts = (
        fact for row in page.bill.rows for fact in chain(row.facts, *row.alternates) if not fact.attribute.startswith("field:")
    )
    return sorted({(fact.source.line, fact.source.column) for fact in facts} & page.sheet.dates)


READER = Reader(FORM, "bom", claims, read)
