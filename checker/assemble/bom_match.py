"""BOM and parts-file rows to the parts of the netlist. A row never adds a part to the circuit."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from functools import lru_cache

from checker import limits
from checker.assemble.draft import Book, Draft, row_fitted, statement
from checker.assemble.variants import beside, of_columns
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.model.reading import Note, Reading, Row
from checker.neutral import neutral

# things a BOM need not list, as words of footprint, symbol or value (common practice, no source)
_UNLISTED = (
    "mounting hole",
    "mounting holes",
    "mountinghole",
    "tooling hole",
    "test point",
    "testpoint",
    "test pad",
    "testpad",
    "fiducial",
    "fiducials",
    "logo",
    "solder jumper",
    "solderjumper",
    "net tie",
    "nettie",
    "power flag",
    "pwr flag",
    "mouse bite",
    "mousebite",
)
CUT = {"IPC-D-356 netlist": 6}  # netlist forms that cut references, and how many characters they keep
_WORDS = re.compile(r"[A-Z]+(?![a-z])|[A-Z]?[a-z]+|[0-9]+")


def match_bom(book: Book, reading: Reading, variant: str | None, cut: int = 0) -> list[Note]:
    """Put the facts of every row on the parts it names; notes in row order.

    Of several tables of one file that list a reference, the one whose caption is `variant` counts, else the first; parts
    that only a table beside the chosen one lists are left out. What the columns of a variant say is forced.
    cut: how many characters of a reference the netlist keeps, 0 for all of them.
    Raises InputError when a part has more than limits.ALTERNATES choices.
    """
    notes: list[Note] = []
    short, unclear = _shortened(book, reading, cut, notes) if cut else ({}, frozenset())
    resolved = [(row, list(_resolved(book, row, short, notes))) for row in reading.rows]
    counts: dict[str, str] = {}  # reference -> the table that is used for it
    if len({row.table for row in reading.rows}) > 1:
        for row, refs in resolved:
            for ref in refs:
                counts[ref] = row.table if row.table == variant else counts.get(ref, row.table)
    passed: dict[str, dict[str, Source]] = {}
    absent: dict[str, None] = {}
    for row, refs in resolved:
        flag = row_fitted(row.facts)
        for ref in refs:
            if ref in unclear:
                continue
            if counts.get(ref, row.table) != row.table:
                passed.setdefault(row.table, {}).setdefault(ref, row.source)
                continue
            drafts = book.find(ref)
            if not drafts and ref not in absent:
                absent[ref] = None
                text = f"{neutral(ref, 80)} is in the BOM ({row.source}) and not in the netlist"
                notes.append(Note("not-in-netlist", text, (row.source,), (ref,)))
            for draft in drafts:
                notes.extend(_add(draft, row))
                draft.rows.append((flag, row))
        notes.extend((*_quantity(row, refs), *_nothing_fitted(row, refs)))
    notes.extend(_other_table(table, places, counts) for table, places in passed.items())
    if variant is not None and variant in counts.values():
        notes.extend(beside(book, resolved, variant, counts))
    notes.extend(of_columns(book, reading, variant, short))
    return notes


def _shortened(book: Book, reading: Reading, cut: int, notes: list[Note]) -> tuple[dict[str, str], frozenset[str]]:
    """(reference of the BOM -> what the netlist has cut it to, references that could be several parts); adds notes on both.

    A cut reference is joined only where a single longer one begins with it and none equals it.
    """
    places = {ref: row.source for row in reading.rows for ref in row.refs}
    begun: dict[str, list[str]] = {}
    for ref in places:
        stem = ref[:cut]
        if len(ref) > cut and stem in book.copies and stem not in places and not book.find(ref):
            begun.setdefault(stem, []).append(ref)
    short: dict[str, str] = {}
    unclear: list[str] = []
    for stem, refs in begun.items():
        kept = neutral(stem, 40)
        alike = [ref for ref in book.drafts if ref == stem or ref.startswith(f"{stem} (")]
        if len(refs) == len(alike) == 1:
            short[refs[0]] = stem
            text = f"the netlist keeps {cut} characters of a reference: its {kept} was taken for {neutral(refs[0], 80)} of the BOM"
            notes.append(Note("case-differs", text, (places[refs[0]],), (stem,)))
            continue
        unclear += refs
        names = ", ".join(neutral(ref, 40) for ref in refs[:5]) + (", ..." if len(refs) > 5 else "")
        text = f"the netlist keeps {cut} characters of a reference: {kept} may be any of {names}: nothing of them was used"
        notes.append(Note("reference-unread", text, tuple(places[ref] for ref in refs[:5]), (*alike, *refs)))
    return short, frozenset(unclear)


def _resolved(book: Book, row: Row, short: Mapping[str, str], notes: list[Note]) -> Iterator[str]:
    """The references of a row as the netlist writes them, where it has them; adds notes on those it writes differently."""
    refs = list(book.unexpanded(row.refs))
    words = row.unread.split()
    refs.extend(word for word in words if book.find(word))  # an odd name such as `+` or `R?` that a part really has
    unread = " ".join(word for word in words if not book.find(word))
    seen: set[str] = set()
    for ref in refs:
        known = ref if book.find(ref) else short.get(ref) or book.like(ref)
        if known and known != ref and known.casefold() == ref.casefold():
            text = f"the BOM writes {neutral(ref, 80)}, the netlist {neutral(known, 80)}"
            notes.append(Note("case-differs", text, (row.source,), (known,)))
        elif known and known != ref and not ref.startswith(known):
            text = f"{neutral(ascii(ref), 80)} in the BOM looks like {neutral(known, 80)} in the netlist and was taken for it"
            notes.append(Note("confusable-reference", text, (row.source,), (known,)))
        name = known or ref
        if name not in seen:
            seen.add(name)
            yield name
    if unread:
        text = f"the references {neutral(unread, 200)} could not be read ({row.source})"
        notes.append(Note("reference-unread", text, (row.source,), tuple(refs)))


def _add(draft: Draft, row: Row) -> Iterator[Note]:
    """The row's choices on one part: the first row sets them, a row of another type number is a further choice."""
    facts = list(row.facts)
    at = _same_choice(draft, row)
    if at is None:
        first = draft.rows[0][1].source
        text = f"{neutral(draft.ref, 80)} has two BOM rows that do not agree ({first} and {row.source}); both are judged"
        yield Note("duplicate-row", text, (first, row.source), (draft.ref,))
        draft.choices.append(facts)
    else:
        held = set(draft.choices[at])
        draft.choices[at].extend([fact for fact in facts if fact not in held] if held else facts)
    if row.alternates:
        names = {_name(choice).casefold() for choice in draft.choices}
        draft.choices.extend(list(choice) for choice in row.alternates if _name(choice).casefold() not in names)
    if len(draft.choices) > limits.ALTERNATES:
        raise InputError(
            row.source.path,
            f"{neutral(draft.ref, 80)} has too many choices of part",
            line=row.source.line,
            expected=f"at most {limits.ALTERNATES}",
        )
    draft.sources.append(row.source)


def _same_choice(draft: Draft, row: Row) -> int | None:
    """Which choice of the part a row speaks of; None: a further one. Another file may add facts to a choice it names less fully."""
    if not draft.rows:
        return 0
    name, names = _name(row.facts).casefold(), [_name(choice).casefold() for choice in draft.choices]
    if name and names[0]:
        return names.index(name) if name in names else None
    if draft.rows[0][1].source.path == row.source.path:  # one table: rows without two type numbers differ by their values
        values = {text.casefold() for text in (_text(row.facts, "value"), _text(draft.choices[0], "value")) if text}
        return 0 if len(values) < 2 else None
    return 0


def _name(facts: Sequence[Fact]) -> str:
    return _text(facts, "type")


def _text(facts: Sequence[Fact], attribute: str) -> str:
    return next((str(fact.value) for fact in facts if fact.attribute == attribute), "")


def _quantity(row: Row, refs: Sequence[str]) -> Iterator[Note]:
    """A quantity may be per panel or per order: only one that is no multiple of the count is told."""
    fact = next((fact for fact in row.facts if fact.attribute == "quantity"), None)
    if fact is None or not isinstance(fact.value, float) or not refs or row.unread or fact.value % len(refs) == 0:
        return
    text = f"the quantity is {fact.value:g} and the row lists {len(refs):,} references ({row.source})"
    yield Note("quantity-differs", text, (fact.source,), tuple(refs))


def _nothing_fitted(row: Row, refs: Sequence[str]) -> Iterator[Note]:
    """A quantity of nothing beside words that say `fitted`."""
    none = next((fact for fact in row.facts if fact.attribute == "quantity" and fact.value == 0), None)
    said = next((fact for fact in row.facts if fact.attribute == "fitted" and fact.value is True and fact.text), None)
    if none is not None and said is not None and refs:
        text = f"the quantity is 0 and the row says {neutral(statement(said), 80)}; taken as fitted"
        yield Note("fitted-differs", text, (none.source, said.source), tuple(refs))


def _other_table(table: str, places: dict[str, Source], counts: dict[str, str]) -> Note:
    refs = list(places)
    shown = ", ".join(neutral(ref, 40) for ref in refs[:5]) + (", ..." if len(refs) > 5 else "")
    text = (
        f"{len(refs):,} references of the BOM table {neutral(table, 80)!r} were not used ({shown}): "
        f"the table {neutral(counts[refs[0]], 80)!r} lists them too; --variant with a table's caption chooses it"
    )
    return Note("skipped", text, (places[refs[0]],), tuple(refs))


def not_in_bom(book: Book, told: frozenset[str] = frozenset()) -> Iterator[Note]:
    """Every fitted part that no BOM lists, but for parts kept out on purpose, things nobody buys and those a note tells of."""
    for draft in book.drafts.values():
        if draft.ref in told or draft.rows or not draft.fitted() or any(fact.value is False for fact in draft.says("in_bom")):
            continue
        if any(_nothing_to_buy(str(fact.value)) for name in ("footprint", "symbol", "value") for fact in draft.says(name)):
            continue
        where = f" ({draft.sources[0]})" if draft.sources else ""
        text = f"{neutral(draft.ref, 80)} is in the netlist{where} and no BOM lists it"
        yield Note("not-in-bom", text, tuple(draft.sources), (draft.ref,))


@lru_cache(maxsize=16384)
def _nothing_to_buy(text: str) -> bool:
    words = f" {' '.join(_WORDS.findall(text[: limits.CELL])).casefold()} "
    return any(f" {phrase} " in words for phrase in _UNLISTED)


def match_parts(book: Book, reading: Reading) -> list[Note]:
    """Put the facts of a parts file on the parts it names by reference, else on every choice that has the type number.

    A choice without a type number is matched by the part's value or symbol; one with another number is not.
    """
    notes: list[Note] = []
    index: dict[str, list[tuple[Draft, int]]] = {}
    for draft in book.drafts.values() if any(row.types for row in reading.rows) else ():
        for at in range(len(draft.choices)):
            for name in {text.casefold() for text in _called(draft, at)}:
                index.setdefault(name, []).append((draft, at))
    for row in reading.rows:
        for ref in row.refs:
            drafts = book.find(ref)
            if not drafts:
                notes.append(_unused(row, ref, "reference"))
            for draft in drafts:
                draft.always.extend(row.facts)
                draft.sources.append(row.source)
        for name in row.types:
            found = index.get(name.casefold().strip(), ())
            if not found:
                notes.append(_unused(row, name, "type"))
            for draft, at in found:
                draft.choices[at].extend(row.facts)
                draft.sources.append(row.source)
    return notes


def _called(draft: Draft, choice: int) -> list[str]:
    name = draft.named(choice).strip()
    return [name] if name else [str(fact.value).strip() for word in ("value", "symbol") for fact in draft.says(word)]


def _unused(row: Row, name: str, what: str) -> Note:
    text = f"the parts-file entry for {what} {neutral(name, 80)} matches no part of the design ({row.source})"
    return Note("unused", text, (row.source,), (name,) if what == "reference" else ())
