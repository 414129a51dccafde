"""Assembly variants: which are known, and what the chosen one fits and leaves out."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from itertools import chain

from checker.assemble.draft import Book
from checker.errors import ArgumentError
from checker.model.declaration import Declaration, Variant
from checker.model.reading import Reading, VariantRecord
from checker.neutral import neutral


def known_variants(readings: Sequence[Reading], declaration: Declaration) -> tuple[str, ...]:
    """Names of variants: declared, stored in the netlist, then captions of the tables of a BOM; each once."""
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
        for refs, fitted in ((record.not_fitted, False), (record.fitted, True)):
            for ref in refs:
                for draft in book.find(ref):
                    draft.forced = fitted
