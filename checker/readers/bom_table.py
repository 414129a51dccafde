"""Bill of materials as a delimited table: comma, semicolon, TAB or bar; any encoding `checker.files.decoded` accepts."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from contextlib import suppress
from itertools import islice

from checker import limits
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.model.fact import Source
from checker.model.reading import Note, Reader, Reading
from checker.readers.bom_header import HEADER_ROWS, best_header
from checker.readers.bom_rows import bill
from checker.readers.bom_sections import Record
from checker.readers.sniff import describe, head

FORM = "delimited table"
_DELIMITERS = ",;\t|"
_MOST_CELLS = 2 * limits.REFERENCES_PER_ROW + limits.BOM_COLUMNS  # a quoted list of references holds separators too
_LOOKED_AT = HEADER_ROWS + 60  # records that decide about the delimiter
_TABLE = "a delimited table"
_TEXT = (_TABLE, "a YAML file", "text of no known form")  # a block of `key: value` lines may stand above a table


def claims(head: str) -> bool:
    """Whether the head is a delimited table, or text in which a header row with a reference column is found."""
    form = describe(head)
    return form == _TABLE or (form in _TEXT and _scored(head)[0] > 0)


def read(blob: Blob) -> Reading:
    """The rows of a BOM; every cell becomes a fact with the line of its row and its heading.

    Raises InputError for content of another form, no header, no rows, an unclosed quote, and beyond a limit.
    """
    start = head(blob)
    form = describe(start)
    if not start.strip():
        raise InputError(blob.path, "the bill of materials is empty", expected="a table with a header row")
    if form not in _TEXT:
        remedy = "Give the netlist as the first argument." if "netlist" in form else "Save the table as CSV."
        raise InputError(blob.path, "this is no delimited table", found=form, expected="a bill of materials as CSV", remedy=remedy)
    text, encoding = decoded(blob)
    records = list(_records(blob.path, text, _scored(text)[1]))
    found = bill(blob.path, records)
    notes = (Note("encoding", encoding, (Source(blob.path),)), *found.notes) if encoding else found.notes
    return Reading("bom", FORM, blob.path, blob.sha256, rows=found.rows, variants=found.variants, notes=notes)


def _scored(text: str) -> tuple[int, str]:
    """(score, delimiter) of the best header over all delimiters; without one the delimiter that cuts the most cells."""
    best, chosen, cells = 0, ",", 0
    for delimiter in _DELIMITERS:
        records: list[Record] = []
        with suppress(csv.Error):  # what came before the error counts
            for record in islice(_parsed(text, delimiter), _LOOKED_AT):
                records.append(record)
        found = best_header(records)
        score = found[1].score if found else 0
        count = sum(len(row) - 1 for _, row in records)
        if (score, count if not score else 0) > (best, cells if not best else 0):
            best, chosen, cells = score, delimiter, count
    return best, chosen


def _parsed(text: str, delimiter: str) -> Iterator[Record]:
    """Records with the line each begins on; raises csv.Error, for a record of very many cells before it is built."""
    cut = 0

    def lines() -> Iterator[str]:
        nonlocal cut
        for line in io.StringIO(text, newline=""):
            cut += line.count(delimiter)
            if cut > _MOST_CELLS:
                raise csv.Error(f"more than {_MOST_CELLS:,} separators in one row")
            yield line

    reader = csv.reader(lines(), delimiter=delimiter, strict=True, skipinitialspace=delimiter != "\t")
    begins = 1
    for cells in reader:
        yield begins, cells
        begins, cut = reader.line_num + 1, 0


def _records(path: str, text: str, delimiter: str) -> Iterator[Record]:
    """Every record that is not blank, within the limits; raises InputError with the line the broken record begins on."""
    last = 0
    try:
        for count, (line, cells) in enumerate(_parsed(text, delimiter)):
            if count >= limits.BOM_ROWS:
                raise InputError(path, f"more than {limits.BOM_ROWS:,} rows", line=line, expected=f"at most {limits.BOM_ROWS:,}")
            if len(cells) > limits.BOM_COLUMNS:
                most = f"at most {limits.BOM_COLUMNS}"
                raise InputError(path, "too many columns", line=line, found=f"{len(cells):,}", expected=most)
            yield line, cells
            last = line + sum(cell.count("\n") for cell in cells)
    except csv.Error as error:
        raise _broken(path, str(error), last + 1) from None


def _broken(path: str, said: str, line: int) -> InputError:
    if "unexpected end" in said:
        remedy = 'Close it, or double a quote that is part of the text: "".'
        return InputError(path, "a quote is opened and never closed", line=line, remedy=remedy)
    if "field larger" in said:
        return InputError(
            path,
            "a cell is too long",
            line=line,
            found=f"more than {csv.field_size_limit():,} characters",
            remedy="Look for a quote that is opened and never closed.",
        )
    if "separators" in said:
        return InputError(path, said, line=line, expected=f"at most {limits.BOM_COLUMNS} columns")
    return InputError(
        path,
        f"the row cannot be cut into cells ({said})",
        line=line,
        remedy='Double a quote that is part of the text, as in "1/4"" wide".',
    )


READER = Reader(FORM, "bom", claims, read)
