"""Where the header of a bill of materials is, and what each column under it means.

Works on records (line, cells), so that every carrier of a table can use it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from checker import limits
from checker.errors import InputError
from checker.neutral import neutral
from checker.readers import bom_choices, bom_variants
from checker.readers import bom_headings as headings
from checker.readers.bom_sections import Record, says_absent
from checker.readers.bom_variants import VariantColumn
from checker.readers.references import look_like_references

HEADER_ROWS = 40  # a header further down is not looked for
_TABLES = 1_000  # of one file
_SAMPLE = 40  # rows that show what a column holds
_ACCEPTED = "a column Reference, References, RefDes, Designator or Reference Designator, and at least one more such as Value"
# a row without any of these words is no second header: spares the full look at a hundred thousand rows
_HEADER_WORDS = ("ref", "designat")


@dataclass(frozen=True, slots=True)
class Columns:
    """The meaning of a header: ref column, plain columns as (index, attribute, heading, unit), and the choice columns.

    choices: (index of the type, index of the maker) per choice of part, -1 for none. fitted: (index, polarity).
    quantity: its index or -1. score: how many columns have a meaning. variants: a column per variant; by_variant: the
    column that names variants row by row, or -1.
    """

    ref: int
    names: tuple[str, ...]
    plain: tuple[tuple[int, str, str, str], ...]
    choices: tuple[tuple[int, int], ...]
    fitted: tuple[tuple[int, str], ...]
    quantity: int
    score: int
    variants: tuple[VariantColumn, ...] = ()
    by_variant: int = -1


@dataclass(frozen=True, slots=True)
class Table:
    """One header with the records below it. caption: "" unless the file has several tables.

    absent: (line, caption) when the caption says that its parts are not fitted; the table then belongs to the one above.
    """

    columns: Columns
    records: tuple[Record, ...]
    caption: str = ""
    absent: tuple[int, str] | None = None


def tables(path: str, records: Sequence[Record]) -> tuple[Table, ...]:
    """The tables of a file: each header with its rows; repeated header lines are left out. Raises InputError without one."""
    found = best_header(records)
    if found is None:
        raise _no_header(path, records)
    first, columns = _earlier(records, *found)
    starts = [(first, columns, _caption(records, first, 0))]
    seen = {_plain(records[at][1]) for at in range(max(0, first - 1), first + 1)}
    dropped: set[int] = set()
    for at in range(first + 1, len(records)):
        cells = records[at][1]
        if not _like_header(cells):
            continue
        dropped.add(at)
        start, columns, caption = starts[-1]
        below = at == start + 1
        title = _caption(records, at, start + 1)
        if not below and not title[1] and _plain(cells) in seen:
            continue
        again = columns_of(cells, records, at)
        if below:  # two header rows, one for people and one for a program: the better understood counts
            seen.add(_plain(cells))
            if again is not None and again.score > columns.score:
                starts[-1] = (at, again, caption)
        elif again is not None:
            starts.append((at, again, title))
            seen = {_plain(cells)}
            dropped.update(_caption_rows(records, at, start + 1) if title[1] else ())
            if len(starts) > _TABLES:
                raise InputError(path, "too many tables", line=records[at][0], expected=f"at most {_TABLES:,} header rows")
    ends = [start[0] for start in starts[1:]] + [len(records)]
    made: list[Table] = []
    over = ""
    several = sum(not says_absent(title) for _, _, (_, title) in starts) > 1
    for (start, columns, title), end in zip(starts, ends, strict=True):
        absent = title if says_absent(title[1]) else None
        over = over if absent else title[1]
        rows = tuple(records[at] for at in range(start + 1, end) if at not in dropped)
        made.append(Table(columns, rows, over if several else "", absent))
    return tuple(made)


def _earlier(records: Sequence[Record], best: int, columns: Columns) -> tuple[int, Columns]:
    """The first header that has rows of its own above the best one: another table stands there."""
    for at in range(best):
        above = columns_of(records[at][1], records, at) if _like_header(records[at][1]) else None
        if above is None:
            continue
        cells = [row[above.ref] for _, row in records[at + 1 : best] if above.ref < len(row)]
        if any(map(look_like_references, cells)):
            return at, above
    return best, columns


def best_header(records: Sequence[Record]) -> tuple[int, Columns] | None:
    """The first of the rows with the most known headings among the first 40; None when no row is a header."""
    best: tuple[int, Columns] | None = None
    for at in range(min(HEADER_ROWS, len(records))):
        columns = columns_of(records[at][1], records, at)
        if columns is not None and (best is None or columns.score > best[1].score):
            best = at, columns
    return best


def columns_of(cells: Sequence[str], records: Sequence[Record], at: int) -> Columns | None:
    """What the row at `at` means as a header: None without a reference column and one more known heading."""
    names = tuple(cell.strip()[: limits.NAME] for cell in cells)
    known = [(name and headings.attribute(name)) or bom_choices.meaning_of(name) for name in names]
    sure = [index for index, meaning in enumerate(known) if meaning == "ref"]
    perhaps = [index for index, name in enumerate(names) if name and headings.perhaps_references(name) and index not in sure]
    score = sum(1 for meaning in known if meaning)
    if not (sure or perhaps) or score + len(perhaps) < 2:
        return None
    sample = [row for _, row in records[at + 1 : at + 1 + _SAMPLE] if not _like_header(row)]
    ref = _reference_column(sure, perhaps, sample)
    return None if ref is None else _columns(names, known, ref, sample)


def _reference_column(sure: list[int], perhaps: list[int], sample: list[list[str]]) -> int | None:
    """A plain reference heading above one that only may be; among equals the column whose cells look most like references."""
    best: tuple[float, int] | None = None
    for indexes, least in ((sure, 0.001), (perhaps, 0.5), (sure, 0.0)):
        for index in indexes:
            texts = [row[index] for row in sample if index < len(row) and not headings.is_empty(row[index])]
            share = sum(map(look_like_references, texts)) / len(texts) if texts else -1.0
            if share >= least and (best is None or share > best[0]):
                best = share, index
        if best is not None:
            return best[1]
    return None


def _columns(names: tuple[str, ...], known: list[str | None], ref: int, sample: list[list[str]]) -> Columns | None:
    plain: list[tuple[int, str, str, str]] = []
    chosen: list[tuple[int, str, str]] = []
    fitted: list[tuple[int, str]] = []
    quantity = -1
    for index, name in enumerate(names):
        meaning = _settled(index, names, known)
        if index == ref or not name or meaning == "row":
            continue
        if meaning in bom_choices.CHOICE:
            chosen.append((index, str(meaning), name))
        elif meaning in ("fitted+", "fitted-"):
            fitted.append((index, meaning))
        elif meaning == "quantity" and quantity < 0:
            quantity = index
        elif meaning == "description" and headings.perhaps_references(name) and _numbers(index, sample):
            continue  # `Component` as a running number
        else:
            own = meaning is None or meaning in ("ref", "quantity")
            plain.append((index, f"field:{name}" if own else str(meaning), name, headings.unit_in(name)))
    score = sum(1 for index, meaning in enumerate(known) if meaning or index == ref)
    if score < 2:
        return None
    variants = bom_variants.columns(names, known, sample)
    by_variant = bom_variants.by_row(names)
    return Columns(ref, names, tuple(plain), bom_choices.pairs(chosen), tuple(fitted), quantity, score, variants, by_variant)


def _settled(index: int, names: tuple[str, ...], known: list[str | None]) -> str | None:
    """The meaning of a column among its neighbours: `Comment` is a value, but beside `Value` a description."""
    name, meaning = names[index], known[index]
    if meaning is None or not name or not headings.is_weak(name):
        return meaning
    for other, text in enumerate(names):
        if known[other] != meaning or headings.heading_key(text) == headings.heading_key(name):
            continue
        if not headings.is_weak(text) or other < index:
            return headings.weak_meaning(name)
    return meaning


def _numbers(index: int, sample: list[list[str]]) -> bool:
    texts = [row[index].strip() for row in sample if index < len(row) and row[index].strip()]
    return bool(texts) and 2 * sum(text.isdigit() for text in texts) > len(texts)


def _like_header(cells: Sequence[str]) -> bool:
    """Whether a row names a reference column and one more: cheap, for every row of a long table."""
    text = " ".join(cells[: limits.BOM_COLUMNS])[:4096].casefold()
    if not any(word in text for word in _HEADER_WORDS):
        return False
    meanings = [headings.attribute(cell.strip()) for cell in cells if 0 < len(cell) <= 64]
    return "ref" in meanings and sum(1 for meaning in meanings if meaning) >= 2


def _caption_rows(records: Sequence[Record], at: int, floor: int) -> range:
    """The blank rows above a header and the row of one cell above them."""
    above = at - 1
    while above >= floor and not any(cell.strip() for cell in records[above][1]):
        above -= 1
    return range(max(above, floor), at)


def _caption(records: Sequence[Record], at: int, floor: int) -> tuple[int, str]:
    """Line and text of the only cell of the row above a header, the text "" when that row has several or looks like references."""
    rows = _caption_rows(records, at, floor)
    line, row = records[rows[0]] if rows else records[at]
    cells = [cell.strip() for cell in row if cell.strip()] if rows else []
    return line, cells[0][: limits.NAME] if len(cells) == 1 and not look_like_references(cells[0]) else ""


def _plain(cells: Sequence[str]) -> tuple[str, ...]:
    return tuple(cell.strip().casefold() for cell in cells if cell.strip())


def _no_header(path: str, records: Sequence[Record]) -> InputError:
    """What was found instead: the row of the first 40 with the most known headings, else with the most cells."""

    def rank(record: Record) -> tuple[int, int]:
        names = [cell.strip() for cell in record[1] if cell.strip()]
        return sum(1 for name in names if headings.attribute(name)), len(names)

    shown = [record for record in records[:HEADER_ROWS] if any(cell.strip() for cell in record[1])]
    line, cells = max(shown, key=rank, default=(0, []))
    names = [cell.strip() for cell in cells if cell.strip()]
    known = [name and headings.attribute(name) for name in names]
    if "ref" in known and sum(1 for meaning in known if meaning) > 1:
        return InputError(path, "the table has a header but no rows", line=line, expected="one row per part or group of parts")
    seen = ", ".join(neutral(name, 40) for name in names[:8])
    return InputError(
        path,
        "no header with a reference column was found" if "ref" not in known else "the header has no column besides the references",
        line=line,
        found=f"the headings {seen}" if names else "nothing but blank rows",
        expected=_ACCEPTED,
        remedy="Name the column that lists the references Reference or Designator.",
    )
