"""Several sheets of a workbook that list parts: what each row says stays with its place, and which sheets count.

Sheets of different parts are all read, and so is one that says more of the parts of another, such as their classes. Where two
sheets contradict each other on a part they are tables of one bill, each called as its sheet: `--variant` chooses, else the first
counts. A sheet that lists the same parts again and says nothing new is left out.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from itertools import chain, combinations

from checker.model.fact import Fact, Source, Trust
from checker.model.reading import Note, Row, VariantRecord
from checker.readers.bom_rows import Bill
from checker.readers.bom_sections import says_absent
from checker.readers.workbook_sheet import Sheet, place, shown

_KNOWN_ANYWAY = frozenset({"value", "description", "footprint", "quantity", "datasheet", "distributor"})
_SAME = 0.5  # a sheet with a larger share of the references of another lists its parts again


@dataclass(frozen=True, slots=True)
class Place(Source):
    """A cell or row of a sheet. line: its row. cell: as the programs write it, `Parts!C7` or `Parts!7:7` for a whole row."""

    def __str__(self) -> str:
        return f"{self.path}, sheet {self.cell.rpartition('!')[0]}, row {self.line}"


@dataclass(slots=True)
class Page:
    """A sheet and the bill read from it, with references -> what tells one choice of part from another."""

    sheet: Sheet
    bill: Bill
    parts: dict[str, dict[str, set[str]]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        for row in self.bill.rows:
            for ref in row.refs:
                said = self.parts.setdefault(ref, {})
                for fact in chain(row.facts, *row.alternates):
                    if fact.attribute in ("value", "type", "fitted"):
                        said.setdefault(fact.attribute, set()).add(str(fact.value).casefold())

    def says_more(self) -> bool:
        """Whether it says anything that a list of parts with their values does not."""
        return any(
            fact.attribute not in _KNOWN_ANYWAY
            and not fact.attribute.startswith("field:")
            and (fact.attribute, fact.value) != ("fitted", True)
            for row in self.bill.rows
            for fact in chain(row.facts, *row.alternates)
        )


def placed(path: str, sheet: Sheet, found: Bill) -> Page:
    """The page of a sheet: every place names it, and a sheet called `DNP` leaves its parts out."""
    name = shown(sheet.name)

    def source(old: Source) -> Source:
        cell = place(old.line, old.column) if old.column else f"{old.line}:{old.line}"
        return Place(path, old.line, old.column, f"{name}!{cell}")

    def facts(old: Iterable[Fact]) -> tuple[Fact, ...]:
        return tuple(replace(fact, source=source(fact.source)) for fact in old)

    def row(old: Row) -> Row:
        said = facts(old.facts)
        if says_absent(sheet.name) and not any(fact.attribute == "fitted" for fact in said):
            said += (Fact("fitted", False, source(old.source), Trust.BOM, text=sheet.name),)
        return replace(old, facts=said, source=source(old.source), alternates=tuple(map(facts, old.alternates)))

    def note(old: Note) -> Note:
        text = old.text
        for at in old.sources:
            text = text.replace(f"({at})", f"({source(at)})")
        return replace(old, text=text, sources=tuple(map(source, old.sources)))

    variants = tuple(replace(variant, source=source(variant.source)) for variant in found.variants)
    return Page(sheet, Bill(tuple(map(row, found.rows)), tuple(map(note, found.notes)), variants))


def joined(path: str, pages: Sequence[Page]) -> tuple[tuple[Row, ...], tuple[VariantRecord, ...], tuple[Note, ...]]:
    """(rows, variants, notes) of all sheets that count, in the order of the workbook."""
    apart: dict[int, None] = {}
    again: dict[int, int] = {}
    by_size = sorted(range(len(pages)), key=lambda at: -len(pages[at].parts))
    for first, other in combinations(by_size, 2):
        common = pages[first].parts.keys() & pages[other].parts.keys()
        if first in again or other in again or not common:
            continue
        if any(_contradict(pages[first].parts[ref], pages[other].parts[ref]) for ref in common):
            apart |= dict.fromkeys((first, other))
        elif len(common) > _SAME * len(pages[other].parts) and not pages[other].says_more():
            again[other] = first
    rows: list[Row] = []
    notes: list[Note] = []
    variants: dict[str, VariantRecord] = {}
    for at, page in enumerate(pages):
        if at in again:
            text = f"sheet {shown(page.sheet.name)} lists parts of sheet {shown(pages[again[at]].sheet.name)} again and is left out"
            notes.append(Note("skipped", text, (Source(path),)))
            continue
        rows += (replace(row, table=row.table or page.sheet.name) for row in page.bill.rows) if at in apart else page.bill.rows
        notes += page.bill.notes
        for variant in page.bill.variants:
            known = variants.get(variant.name)
            variants[variant.name] = variant if known is None else _together(known, variant)
    return tuple(rows), tuple(variants.values()), tuple(notes)


def _contradict(one: Mapping[str, set[str]], other: Mapping[str, set[str]]) -> bool:
    """Whether two sheets cannot both be right on a part; a sheet that is silent contradicts nothing."""
    return any(one[said].isdisjoint(other[said]) for said in one.keys() & other.keys())


def _together(one: VariantRecord, other: VariantRecord) -> VariantRecord:
    return replace(one, fitted=(*one.fitted, *other.fitted), not_fitted=(*one.not_fitted, *other.not_fitted))


def folded(rows: Sequence[Row], merged: Mapping[int, int]) -> tuple[Row, ...]:
    """The rows, where a cell of references that was merged over several of them lists choices of part.

    merged: row whose references come from a merged cell -> row of that cell. A row with a type number of its own becomes an
    alternate of the first, unless it says that it is left out; others stay rows.
    """
    kept: list[Row] = []
    firsts: dict[int, int] = {}
    for row in rows:
        at = firsts.get(merged.get(row.source.line, 0))
        first = kept[at] if at is not None else None
        types = _types(row.facts)
        if first is not None and at is not None and types and first.refs == row.refs and not _left_out(row):
            known = set(chain(_types(first.facts), *map(_types, first.alternates)))
            if known and types.isdisjoint(known):
                kept[at] = replace(first, alternates=(*first.alternates, row.facts, *row.alternates))
                continue
        firsts.setdefault(row.source.line, len(kept))
        kept.append(row)
    return tuple(kept)


def _types(facts: Iterable[Fact]) -> set[str]:
    return {str(fact.value).casefold() for fact in facts if fact.attribute == "type"}


def _left_out(row: Row) -> bool:
    return any(fact.attribute == "fitted" and fact.value is False for fact in row.facts)
