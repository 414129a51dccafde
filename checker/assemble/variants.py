"""Assembly variants: which are known, and what the chosen one fits and leaves out."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from itertools import chain
from types import MappingProxyType

from checker.assemble.draft import Book
from checker.errors import ArgumentError
from checker.model.declaration import Declaration, Variant
from checker.model.fact import Source
from checker.model.reading import Note, Reading, Row, VariantRecord
from checker.neutral import neutral


def known_variants(readings: Sequence[Reading], declaration: Declaration) -> tuple[str, ...]:
    """Names of variants: declared, stored in the netlist or in columns of a BOM, then captions of its tables; each once."""
    drawn = (record.name for reading in readings for record in reading.variants)
    captions = (row.table for reading in readings if reading.role == "bom" for row in reading.rows if row.table)
    return tuple(dict.fromkeys(chain(declaration.variants, drawn, captions)))


def check_variant(variant: str | None, known: Sequence[str]) -> None:
    """Raises ArgumentError, with the names there are, for a variant that nothing defines."""
    if variant is None or variant in known:
        return
    names = ", ".join(neutral(name, 60) for name in known[:20]) + (", ..." if len(known) > 20 else "")
    there = f"the variants of this design are {names}" if known else "this design defines no variants"
    raise ArgumentError(f"there is no variant {neutral(variant, 60)}; {there}")


def apply_variant(book: Book, variant: str | None, readings: Iterable[Reading], declaration: Declaration) -> None:
    """Force what the chosen variant says; the declaration overrides the netlist, and fitted overrides not fitted."""
    if variant is None:
        return
    chosen: list[VariantRecord | Variant] = [
        record for reading in readings for record in reading.variants if record.name == variant
    ]
    if variant in declaration.variants:
        chosen.append(declaration.variants[variant])
    for record in chosen:
        force(book, record)


def force(book: Book, record: VariantRecord | Variant, short: Mapping[str, str] = MappingProxyType({})) -> None:
    """Fit and leave out what a variant says; a reference may be written as `Book.like` allows, or stand in `short` as the
    netlist cuts it."""
    for refs, fitted in ((record.not_fitted, False), (record.fitted, True)):
        for ref in refs:
            for draft in book.find(ref) or book.find(short.get(ref) or book.like(ref)):
                draft.forced = fitted


def of_columns(book: Book, reading: Reading, variant: str | None, short: Mapping[str, str]) -> Iterator[Note]:
    """Forces what the columns of the chosen variant say; a note when there are variants and none is chosen."""
    for record in reading.variants:
        if record.name == variant:
            force(book, record, short)
    if reading.variants and variant is None:
        names = ", ".join(neutral(record.name, 40) for record in reading.variants[:5]) + (
            ", ..." if len(reading.variants) > 5 else ""
        )
        text = (
            f"the BOM tells variants apart ({names}) and none was chosen: what any of them fits counts as fitted; --variant chooses"
        )
        yield Note("skipped", text, tuple(record.source for record in reading.variants[:5]))


def beside(book: Book, resolved: Sequence[tuple[Row, list[str]]], variant: str, counts: Mapping[str, str]) -> Iterator[Note]:
    """Leaves out the parts that only tables beside the chosen one list: tables that share a reference with it, such as another
    assembly of the same board. A table that shares none, such as a list of mechanical parts, belongs to every variant."""
    listed: dict[str, dict[str, Source]] = {}
    for row, refs in resolved:
        listed.setdefault(row.table, {}).update((ref, row.source) for ref in refs)
    chosen = listed[variant]
    for table, places in listed.items():
        if table == variant or not table or chosen.keys().isdisjoint(places):
            continue
        out = [ref for ref in places if counts[ref] == table and book.find(ref)]
        for ref in out:
            for draft in book.find(ref):
                draft.forced = False
        if out:
            shown = ", ".join(neutral(ref, 40) for ref in out[:5]) + (", ..." if len(out) > 5 else "")
            text = f"{shown} of the BOM table {neutral(table, 80)!r} are left out of the variant {neutral(variant, 80)!r}"
            yield Note("skipped", text, (places[out[0]],), tuple(out))
