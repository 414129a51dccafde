"""From cells to BOM rows: what each row lists and says."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source, Trust
from checker.model.reading import Note, Row
from checker.readers import bom_headings as headings
from checker.readers.bom_header import CHOICE, Columns, Record, Table, tables
from checker.readers.references import expand, look_like_references

_SHOWN = 5  # examples in a note
_BARE = "rows without a reference, not used"
_TOO_LONG = "rows with more cells than the header, where an unquoted separator may have shifted them"
_FOOTER = re.compile(r"(?:sub|grand )?totals?[ :]*\Z|sum[ :]*\Z|summe[ :]*\Z|notes?[ :]|notes?\Z", re.IGNORECASE)
_BARE_NUMBER = re.compile(r"[+-]?[0-9]{1,15}(?:[.,][0-9]{1,15})?\Z")
_THOUSANDS = re.compile(r"[0-9]{1,3}(?:,[0-9]{3}){1,3}\Z")


def rows_of(path: str, records: Sequence[Record]) -> tuple[tuple[Row, ...], tuple[Note, ...]]:
    """Every row of every table, and notes on what was left out.

    Raises InputError when no header with a reference column is found, when no row follows, or beyond a limit.
    """
    rows: list[Row] = []
    bare: list[int] = []
    long: list[int] = []
    for table in tables(path, records):
        columns = table.columns
        for line, cells, listed in _entries(table, bare):
            if any(text.strip() for text in cells[len(columns.names) :]):
                long.append(line)
            try:
                refs, unread = expand(listed)
            except ValueError as error:
                raise InputError(path, str(error), line=line, expected=f"at most {limits.REFERENCES_PER_ROW:,}") from None
            facts, alternates = _facts(path, line, cells, columns)
            rows.append(Row(refs, facts, Source(path, line), (), alternates, unread, table.caption))
    if not rows:
        raise InputError(path, "the table has a header but no row with a reference", expected="one row per part or group of parts")
    return tuple(rows), (*_skipped(path, bare, _BARE), *_skipped(path, long, _TOO_LONG))


def _entries(table: Table, bare: list[int]) -> Iterator[tuple[int, list[str], str]]:
    """(line, cells, reference list) per row; a list that ends in a separator goes on in a row that holds nothing else.

    Lines of rows that hold something but no reference are added to `bare`.
    """
    ref = table.columns.ref
    entry: tuple[int, list[str]] | None = None
    lists: list[str] = []
    for line, cells in table.records:
        cell = cells[ref].strip() if ref < len(cells) else ""
        others = sum(1 for text in cells if text.strip()) - bool(cell)
        if headings.is_empty(cell) or _FOOTER.match(cell) or (not others and not look_like_references(cell)):
            if others or cell:
                bare.append(line)
            continue
        if entry is not None and not others and lists[-1].endswith((",", ";")):
            lists.append(cell)
            continue
        if entry is not None:
            yield *entry, " ".join(lists)
        entry, lists = (line, cells), [cell]
    if entry is not None:
        yield *entry, " ".join(lists)


def _skipped(path: str, lines: list[int], what: str) -> Iterator[Note]:
    if lines:
        shown = ", ".join(map(str, lines[:_SHOWN])) + (", ..." if len(lines) > _SHOWN else "")
        yield Note("skipped", f"{what}: {len(lines):,} (line {shown})", tuple(Source(path, line) for line in lines[:_SHOWN]))


def _facts(path: str, line: int, cells: list[str], columns: Columns) -> tuple[tuple[Fact, ...], tuple[tuple[Fact, ...], ...]]:
    """What a row says of its first choice, and of each further choice."""
    size = len(cells)
    facts: list[Fact] = []
    absent: Fact | None = None
    for index, attribute, name, unit in columns.plain:
        text = cells[index].strip()[: limits.CELL] if index < size else ""
        if not text or (headings.is_empty(text) and not (attribute == "mark" and text.casefold() == "none")):
            continue
        source = Source(path, line, index + 1, name)
        if headings.not_fitted_phrase(text) or (attribute == "value" and headings.not_fitted_value(text)):
            absent = absent or Fact("fitted", False, source, Trust.BOM, text=text)
        if unit and _BARE_NUMBER.match(text):
            text = f"{text} {unit}"
        facts.append(Fact(attribute, text, source, Trust.BOM))
    choices: dict[tuple[str, str], list[Fact]] = {}
    for pair in columns.choices:
        choice = []
        for attribute, index in zip(CHOICE, pair, strict=True):
            text = cells[index].strip()[: limits.CELL] if 0 <= index < size else ""
            if not text or headings.is_empty(text):
                continue
            fact = Fact(attribute, text, Source(path, line, index + 1, columns.names[index]), Trust.BOM)
            if headings.not_fitted_phrase(text):
                absent = absent or Fact("fitted", False, fact.source, Trust.BOM, text=text)
            else:
                choice.append(fact)
        if choice and (not choices or choice[0].attribute == "type"):
            choices.setdefault((choice[0].attribute, str(choice[0].value).casefold()), choice)
            if len(choices) > limits.ALTERNATES:
                raise InputError(path, "the row has too many choices of part", line=line, expected=f"at most {limits.ALTERNATES}")
    first, *further = choices.values() or [[]]
    facts += first
    facts += _count_and_flags(path, line, cells, columns, absent)
    return tuple(facts), tuple(map(tuple, further))


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
