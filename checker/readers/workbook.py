"""Bill of materials as a workbook, XLSX or ODS: every sheet that has a header with a column of references.

Nothing in it is run, worked out or followed: a formula counts by the value stored beside it, and where none is stored the cell is
empty and a note says so. Hidden sheets and sheets without a header are left out with a note; a sheet that lists again the parts of
an earlier one is left out too, since the two may differ and nobody says which counts.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.errors import InputError
from checker.files import Blob
from checker.model.fact import Source
from checker.model.reading import Note, Reader, Reading
from checker.neutral import neutral
from checker.readers import sniff, workbook_ods, workbook_xlsx
from checker.readers.bom_header import best_header
from checker.readers.bom_rows import Bill, bill
from checker.readers.workbook_sheet import Sheet
from checker.readers.workbook_zip import Archive

FORM = "workbook"

_SHOWN = 8
_AGAIN = 0.5  # a sheet that repeats more of the references of another than this is the same list once more


def claims(head: str) -> bool:
    """Whether the content is a zip file."""
    return head.startswith("PK\x03\x04")


@dataclass(frozen=True, slots=True)
class _Page:
    """A sheet with its bill."""

    sheet: Sheet
    bill: Bill

    @property
    def refs(self) -> set[str]:
        return {ref for row in self.bill.rows for ref in row.refs}


def read(blob: Blob) -> Reading:
    """The rows of every sheet with parts. Lines are rows of the sheet; where several sheets count, the path names the sheet.

    Raises InputError for what is no workbook, is damaged, locked or beyond a limit, and for one without a list of parts.
    """
    if not claims(sniff.head(blob)):
        found = sniff.describe(sniff.head(blob))
        raise InputError(blob.path, "this is no workbook", found=found, expected="a bill of materials as XLSX or ODS")
    archive = Archive(blob)
    form = next((form for form in (workbook_xlsx, workbook_ods) if form.BOOK in archive), None)
    if form is None:
        remedy = "Unpack it and give the file inside, or save the bill of materials as XLSX, ODS or CSV."
        raise InputError(blob.path, "the zip file is no workbook", expected="an XLSX or ODS workbook", remedy=remedy)
    sheets = list(form.sheets(archive))
    listed, notes = _listed(blob.path, sheets)
    if not listed:
        if not any(sheet.cells for sheet in sheets):
            raise InputError(blob.path, "the bill of materials is empty", expected="a table with a header row")
        largest = max((sheet for sheet in sheets if sheet.shown), key=lambda sheet: len(sheet.cells), default=sheets[0])
        bill(blob.path, largest.records())  # says what is missing
    several = len(listed) > 1
    pages: list[_Page] = []
    for sheet in listed:
        page = _Page(sheet, bill(f"{blob.path}[{neutral(sheet.name, 40)}]" if several else blob.path, sheet.records()))
        first = next((known for known in pages if len(known.refs & page.refs) > _AGAIN * len(page.refs)), None)
        if first is None:
            pages.append(page)
            continue
        again = f"sheet {neutral(sheet.name, 40)} lists parts of sheet {neutral(first.sheet.name, 40)} again and is left out"
        notes.append(Note("skipped", again, (Source(blob.path),)))
    for page in pages:
        notes += (*_left_open(blob.path, page.sheet), *page.bill.notes)
    rows = tuple(row for page in pages for row in page.bill.rows)
    variants = tuple(record for page in pages for record in page.bill.variants)
    return Reading("bom", FORM, blob.path, blob.sha256, rows=rows, variants=variants, notes=tuple(notes))


def _listed(path: str, sheets: list[Sheet]) -> tuple[list[Sheet], list[Note]]:
    """The sheets with a header, and a note on those left out."""
    listed, hidden, other = [], [], []
    filled = [sheet for sheet in sheets if sheet.cells]
    for sheet in filled:
        records = sheet.records()
        header = best_header(records)
        if header is None or (header[0] == len(records) - 1 and len(filled) > 1):
            other.append(sheet.name)
        elif sheet.shown:
            listed.append(sheet)
        else:
            hidden.append(sheet.name)
    notes = []
    for names, what in ((hidden, "sheets that are not shown, left out"), (other, "sheets without a list of parts, left out")):
        if names:
            shown = ", ".join(neutral(name, 40) for name in names[:_SHOWN])
            notes.append(Note("skipped", f"{what}: {len(names):,} ({shown})", (Source(path),)))
    return listed, notes


def _left_open(path: str, sheet: Sheet) -> Iterator[Note]:
    """What of a sheet is not known, or not as its author typed it."""
    kinds = (
        (sheet.unsolved, "formulas without a stored value, taken as empty"),
        (sheet.faulty, "cells that hold an error, taken as empty"),
        (sheet.dates, "cells that hold a date, which may have been a type number"),
    )
    for places, what in kinds:
        if places:
            shown = ", ".join(places[:_SHOWN]) + (", ..." if len(places) > _SHOWN else "")
            text = f"sheet {neutral(sheet.name, 40)}: {what}: {len(places):,} ({shown})"
            yield Note("skipped", text, (Source(path),))
    rows = sorted(sheet.hidden & sheet.cells.keys())
    if rows:
        shown = ", ".join(map(str, rows[:_SHOWN])) + (", ..." if len(rows) > _SHOWN else "")
        text = f"sheet {neutral(sheet.name, 40)}: rows that are not shown and count all the same: {len(rows):,} ({shown})"
        yield Note("skipped", text, tuple(Source(path, row) for row in rows[:_SHOWN]))


READER = Reader(FORM, "bom", claims, read)
