"""From cells to a bill of materials: what each row lists and says.

`bill` is the one door for every carrier of a table (delimited text, workbook): it takes the rows of cells of one sheet, blank
rows included, each with the number of its row.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source, Trust
from checker.model.reading import Note, Row, VariantRecord
from checker.neutral import neutral
from checker.readers import bom_headings as headings
from checker.readers.bom_choices import choices
from checker.readers.bom_header import Columns, Table, tables
from checker.readers.bom_sections import Entry, Record, Sections
from checker.readers.bom_variants import Variants
from checker.readers.references import Listed, listed

_SHOWN = 5  # examples in a note
_BARE = "rows without a reference, not used"
_TOO_LONG = "rows with more cells than the header, where an unquoted separator may have shifted them"
_ORDERED = "rows with a distributor's number where the maker's type belongs: the products behind these numbers are not judged"
_BARE_NUMBER = re.compile(r"[+-]?[0-9]{1,15}(?:[.,][0-9]{1,15})?\Z")
_THOUSANDS = re.compile(r"[0-9]{1,3}(?:,[0-9]{3}){1,3}\Z")
_POINTS = re.compile(r"(?<![0-9.,])[0-9]{1,3}(?:\.[0-9]{3})+(?![0-9.])")  # 5.000 V where the comma is the decimal sign
_DECIMAL = re.compile(r"(?<![0-9.,])[0-9]{1,6}([.,])[0-9]{1,2}(?![0-9.,])")


@dataclass(frozen=True, slots=True)
class Bill:
    """The rows of a BOM in file order, notes on what was left out, and the variants it describes."""

    rows: tuple[Row, ...]
    notes: tuple[Note, ...]
    variants: tuple[VariantRecord, ...]


def bill(path: str, records: Sequence[Record]) -> Bill:
    """Every row of every table. records: (line, cells), blank ones too.

    Raises InputError when no header with a reference column is found, when no row follows, or beyond a limit.
    """
    rows: list[Row] = []
    bare: list[int] = []
    long: list[int] = []
    twice: list[Note] = []
    remarks: list[tuple[int, str]] = []
    variants = Variants()
    for table in tables(path, records):
        columns = table.columns
        comma = _decimal_comma(table)
        absent = Fact("fitted", False, Source(path, table.absent[0], 1), Trust.BOM, text=table.absent[1]) if table.absent else None
        sections = Sections(path, columns.ref, absent)
        for entry in sections.entries(table.records):
            if any(text.strip() for text in entry.cells[len(columns.names) :]):
                long.append(entry.line)
            try:
                found = listed(entry.references)
            except ValueError as error:
                raise InputError(path, str(error), line=entry.line, expected=f"at most {limits.REFERENCES_PER_ROW:,}") from None
            rows += _rows(path, entry, found, table, variants, comma)
            twice += _twice(path, entry.line, found)
            remarks += ((entry.line, remark.text) for remark in found.remarks)
        bare += sections.bare
    if not rows:
        raise InputError(path, "the table has a header but no row with a reference", expected="one row per part or group of parts")
    skipped = ((sorted(bare), _BARE), (long, _TOO_LONG), (_ordered(rows), _ORDERED))
    notes = (*(note for lines, what in skipped for note in _skipped(path, lines, what)), *twice, *_remarked(path, remarks))
    return Bill(tuple(rows), notes, tuple(variants.records()))


def _rows(path: str, entry: Entry, found: Listed, table: Table, variants: Variants, comma: bool) -> Iterator[Row]:
    """The row, and a second one for those of its references beside which `(DNP)` stands."""
    columns, source = table.columns, Source(path, entry.line)
    facts, alternates = _facts(path, entry.line, entry.cells, columns, comma)
    if entry.absent is not None:
        facts += (entry.absent,)
    all_out = variants.row(source, entry.cells, columns.variants, found.refs)
    if all_out and entry.absent is None:
        index, _, _ = columns.variants[0]
        facts += (Fact("fitted", False, Source(path, entry.line, index + 1, columns.names[index]), Trust.BOM, text=all_out),)
    name = ""
    if 0 <= columns.by_variant < len(entry.cells):
        name = variants.named(source, entry.cells[columns.by_variant], found.refs)
    row = Row(found.refs, facts, source, (), alternates, found.unread, table.caption or name)
    out = {ref: remark.text for remark in found.remarks if _left_out(remark.text) for ref in remark.refs}
    if not out:
        yield row
        return
    # the quantity of the row may count the ones left out or not
    counted = tuple(_uncounted(fact) if fact.attribute == "quantity" else fact for fact in facts)
    kept = tuple(ref for ref in found.refs if ref not in out)
    if kept:
        yield replace(row, refs=kept, facts=counted)
    words = next(iter(out.values()))
    said = Fact("fitted", False, Source(path, entry.line, columns.ref + 1, columns.names[columns.ref]), Trust.BOM, text=words)
    yield replace(row, refs=tuple(out), facts=(*counted, said), unread="" if kept else found.unread)


def _uncounted(quantity: Fact) -> Fact:
    return replace(quantity, attribute=f"field:{quantity.source.cell}", value=quantity.text, text="")


def _ordered(rows: Sequence[Row]) -> list[int]:
    """The lines of rows in which a column of types holds a distributor's number."""
    found = {
        row.source.line: None
        for row in rows
        for fact in row.facts
        if fact.attribute == "distributor" and headings.attribute(fact.source.cell) != "distributor"
    }
    return list(found)


def _left_out(remark: str) -> bool:
    return headings.not_fitted_phrase(remark.strip(" ()[]-–—:"))


def _decimal_comma(table: Table) -> bool:
    """Whether the figures of a table are written with a comma and none with a point."""
    signs: set[str] = set()
    looked = [index for index, attribute, _, _ in table.columns.plain if attribute.startswith("rating:") or attribute == "value"]
    for _, cells in table.records:
        for index in looked:
            if index < len(cells) and (found := _DECIMAL.search(cells[index][:64])) is not None:
                signs.add(found[1])
        if "." in signs:
            return False
    return signs == {","}


def _twice(path: str, line: int, found: Listed) -> Iterator[Note]:
    if found.repeated:
        shown = ", ".join(neutral(ref, 40) for ref in found.repeated[:_SHOWN]) + (", ..." if len(found.repeated) > _SHOWN else "")
        source = Source(path, line)
        yield Note("quantity-differs", f"{shown} stands in one row more than once ({source})", (source,), found.repeated)


def _remarked(path: str, remarks: list[tuple[int, str]]) -> Iterator[Note]:
    if remarks:
        shown = "; ".join(f"line {line}: {neutral(text, 60)}" for line, text in remarks[:_SHOWN])
        more = "; ..." if len(remarks) > _SHOWN else ""
        text = f"words beside references, taken for remarks: {len(remarks):,} ({shown}{more})"
        yield Note("skipped", text, tuple(Source(path, line) for line, _ in remarks[:_SHOWN]))


def _skipped(path: str, lines: list[int], what: str) -> Iterator[Note]:
    if lines:
        shown = ", ".join(map(str, lines[:_SHOWN])) + (", ..." if len(lines) > _SHOWN else "")
        yield Note("skipped", f"{what}: {len(lines):,} (line {shown})", tuple(Source(path, line) for line in lines[:_SHOWN]))


def _facts(
    path: str, line: int, cells: list[str], columns: Columns, comma: bool
) -> tuple[tuple[Fact, ...], tuple[tuple[Fact, ...], ...]]:
    """What a row says of its first choice, and of each further choice."""
    size = len(cells)
    facts: list[Fact] = []
    absent: Fact | None = None
    of_variants = {index for index, _, _ in columns.variants}
    for index, attribute, name, unit in columns.plain:
        text = cells[index].strip()[: limits.CELL] if index < size else ""
        if not text or (headings.is_empty(text) and not (attribute == "mark" and text.casefold() == "none")):
            continue
        source = Source(path, line, index + 1, name)
        phrase = index not in of_variants and headings.not_fitted_phrase(text)
        if phrase or (attribute == "value" and headings.not_fitted_value(text)):
            absent = absent or Fact("fitted", False, source, Trust.BOM, text=text)
        if comma and attribute.startswith("rating:"):
            text = _POINTS.sub(lambda found: found[0].replace(".", ""), text)
        if unit and _BARE_NUMBER.match(text):
            text = f"{text} {unit}"
        facts.append(Fact(attribute, text, source, Trust.BOM))
    named, ordered, left_out = choices(path, line, cells, columns.choices, columns.names)
    facts += (*ordered, *(named[0] if named else ()))
    facts += _count_and_flags(path, line, cells, columns, absent or left_out)
    return tuple(facts), named[1:]


def _count_and_flags(path: str, line: int, cells: list[str], columns: Columns, absent: Fact | None) -> Iterator[Fact]:
    """The quantity as a float, and whether the row says that the part is fitted."""
    if 0 <= columns.quantity < len(cells):
        index = columns.quantity
        text, name = cells[index].strip(), columns.names[index]
        if _BARE_NUMBER.match(text) or _THOUSANDS.match(text):
            number = float(text.replace(",", "" if _THOUSANDS.match(text) else "."))
            yield Fact("quantity", number, Source(path, line, index + 1, name), Trust.BOM, text=text)
        elif headings.not_fitted_phrase(text):
            absent = absent or Fact("fitted", False, Source(path, line, index + 1, name), Trust.BOM, text=text)
        elif not headings.is_empty(text):
            yield Fact(f"field:{name}", text[: limits.CELL], Source(path, line, index + 1, name), Trust.BOM)
    if absent is not None:
        yield absent
    for index, polarity in columns.fitted:
        text = cells[index].strip() if index < len(cells) else ""
        said = headings.fitted(polarity, text)
        source = Source(path, line, index + 1, columns.names[index])
        if said is not None and not (said and absent is not None and not text):
            yield Fact("fitted", said, source, Trust.BOM, text=text[: limits.CELL])
        elif said is None and not headings.is_empty(text):
            yield Fact(f"field:{columns.names[index]}", text[: limits.CELL], source, Trust.BOM)
