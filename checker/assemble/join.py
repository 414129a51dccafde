"""Netlist, BOM, parts files and declaration joined on reference and pin into one Design."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

from checker.assemble.bom_match import CUT, match_bom, match_parts, not_in_bom
from checker.assemble.declared import apply_declared, unused
from checker.assemble.draft import Book, Draft, statement
from checker.assemble.nets import merged
from checker.assemble.pads import placed
from checker.assemble.variants import apply_variant, check_variant, known_variants
from checker.errors import ArgumentError
from checker.model.circuit import Design, Input, Net, Part, Pin
from checker.model.declaration import Declaration
from checker.model.fact import NOWHERE, Source
from checker.model.order import natural
from checker.model.reading import Node, Note, PartRecord, Reading, SymbolPin
from checker.neutral import neutral

Named = Node | SymbolPin  # what a net or a symbol says of a pin


def assemble(name: str, readings: Sequence[Reading], declaration: Declaration, variant: str | None = None) -> Design:
    """One design from exactly one netlist reading and any number of BOM and parts readings.

    Every fact is kept with its trust. Notes: those of the readings and of their matching in the order of `readings`,
    then contradictions, parts no BOM lists, and declared names that match nothing.
    Raises ArgumentError for a number of netlists other than one and for a variant nobody defines, InputError for a
    part with too many choices.
    """
    netlists = [reading for reading in readings if reading.role == "netlist"]
    if len(netlists) != 1:
        raise ArgumentError(f"a design needs exactly one netlist, {len(netlists)} were given")
    known = known_variants(readings, declaration)
    check_variant(variant, known)
    circuit = merged(netlists[0].nets)
    book, notes = _book(netlists[0])
    _place_pins(book, netlists[0], circuit.nets)
    notes = [*netlists[0].notes, *circuit.notes, *notes]
    boms = [reading for reading in readings if reading.role == "bom"]
    for reading in boms:
        notes += (*reading.notes, *match_bom(book, reading, variant, CUT.get(netlists[0].form, 0)))
    for reading in readings:
        if reading.role == "parts":
            notes += (*reading.notes, *match_parts(book, reading))
    apply_declared(book, declaration)
    apply_variant(book, variant, netlists, declaration)
    notes += _flags(book)
    if boms:
        notes += not_in_bom(book, frozenset(ref for note in notes if note.kind == "reference-unread" for ref in note.parts))
    notes += unused(book, circuit.nets, circuit.joined, declaration)
    return Design(
        name,
        {ref: _in_order(book.drafts[ref].part()) for ref in sorted(book.drafts, key=natural)},
        _sorted_nets(_with_copies(book, circuit.nets)),
        tuple(notes),
        tuple(Input(reading.role, reading.path, reading.sha256) for reading in readings),
        variant,
        bool(boms),
        known,
        placed(netlists[0].pads, circuit.nets, circuit.joined),
    )


def _in_order(part: Part) -> Part:
    """The part with its pins by number: nothing may depend on the order of a file, which no two forms share."""
    return replace(part, pins=tuple(sorted(part.pins, key=lambda pin: natural(pin.number))))


def _sorted_nets(nets: Mapping[str, Net]) -> dict[str, Net]:
    """Nets by name, with their pins by reference and number."""

    def place(pin: tuple[str, str]) -> tuple[object, ...]:
        return natural(pin[0]), natural(pin[1])

    return {name: replace(nets[name], pins=tuple(sorted(nets[name].pins, key=place))) for name in sorted(nets, key=natural)}


def _book(netlist: Reading) -> tuple[Book, list[Note]]:
    """A draft per part record, then a stub per reference that only nets name; duplicates keep a name of their own."""
    notes: list[Note] = []
    taken = {record.ref for record in netlist.parts}
    drafts: dict[str, Draft] = {}
    copies: dict[str, list[Draft]] = {}
    for record in netlist.parts:
        ref = record.ref
        if ref in copies:
            ref = _free(record.ref, len(copies[ref]) + 1, taken)
            taken.add(ref)
            notes.append(_duplicate(record, copies[record.ref][0].sources[0], ref))
        draft = Draft(ref, [record.source], record.facts, units=record.units)
        drafts[ref] = draft
        copies.setdefault(record.ref, []).append(draft)
    for net in netlist.nets:
        for node in net.nodes:
            if node.ref in copies:
                continue
            source = node.source if node.source != NOWHERE else net.source
            drafts[node.ref] = draft = Draft(node.ref, [source])
            copies[node.ref] = [draft]
            if netlist.parts:
                text = f"{neutral(node.ref, 80)} stands on a net ({source}) and is not among the parts"
                notes.append(Note("part-not-listed", text, (source,), (node.ref,)))
    notes += _alike(copies)
    return Book(drafts, copies), notes


def _free(ref: str, number: int, taken: set[str]) -> str:
    while f"{ref} ({number})" in taken:
        number += 1
    return f"{ref} ({number})"


def _duplicate(record: PartRecord, first: Source, ref: str) -> Note:
    text = (
        f"{neutral(record.ref, 80)} is listed twice (lines {first.line} and {record.source.line}); "
        f"both are kept, the second as {neutral(ref, 80)}"
    )
    return Note("duplicate-reference", text, (first, record.source), (record.ref, ref))


def _alike(copies: Mapping[str, list[Draft]]) -> Iterator[Note]:
    """References that differ in bytes and are one after compatibility normalisation."""
    same: dict[str, str] = {}
    for ref in copies:
        plain = ref if ref.isascii() else unicodedata.normalize("NFKC", ref)
        if plain == ref:
            continue
        other = plain if plain in copies else same.get(plain, "")
        same.setdefault(plain, ref)
        if other:
            text = f"the references {neutral(ascii(other), 80)} and {neutral(ascii(ref), 80)} look alike and are two parts"
            yield Note("confusable-reference", text, (copies[other][0].sources[0], copies[ref][0].sources[0]), (other, ref))


def _place_pins(book: Book, netlist: Reading, nets: Mapping[str, Net]) -> None:
    """Give every draft its pins: those of its symbol, then those only nets name, each number once."""
    on = {pin: net.name for net in nets.values() for pin in net.pins}
    noted: dict[str, dict[str, Named]] = {}
    for record in netlist.nets:
        for node in record.nodes:
            _note_pin(noted.setdefault(node.ref, {}), node.pin, node)
    symbols: dict[int, dict[str, Named]] = {}  # parts of one symbol share its tuple of pins
    shown: dict[str, list[dict[str, Named]]] = {}
    for part in netlist.parts:
        if id(part.pins) not in symbols:
            listed: dict[str, Named] = {}
            for pin in part.pins:
                _note_pin(listed, pin.number, pin)
            symbols[id(part.pins)] = listed
        shown.setdefault(part.ref, []).append(symbols[id(part.pins)])
    for ref, drafts in book.copies.items():
        said = noted.get(ref, {})
        lists = shown.get(ref, [{}])
        somewhere = {number for listed in lists for number in listed} if len(drafts) > 1 else set()
        for draft, listed in zip(drafts, lists, strict=True):
            # of two parts with one reference each has the pins its own symbol lists, and those that no symbol lists
            own = said if len(drafts) == 1 or not listed else [pin for pin in said if pin in listed or pin not in somewhere]
            numbers = listed if len(listed) == len(own) and listed.keys() == set(own) else dict.fromkeys((*listed, *own))
            draft.pins = tuple(_pin(number, said.get(number), listed.get(number), on.get((ref, number))) for number in numbers)


def _note_pin(pins: dict[str, Named], number: str, named: Named) -> None:
    """Keep the first statement about a pin, or the first with a name when that one has none."""
    if number not in pins or (named.name and not pins[number].name):
        pins[number] = named


def _pin(number: str, said: Named | None, listed: Named | None, net: str | None) -> Pin:
    first, second = said or listed, listed or said
    if first is None or second is None:
        return Pin(number, net=net)
    return Pin(number, first.name or second.name, first.type or second.type, net)


def _with_copies(book: Book, nets: dict[str, Net]) -> dict[str, Net]:
    """Nets whose pins name the final references: a pin of a duplicate reference stands for each copy that has it."""
    doubled = {ref: drafts for ref, drafts in book.copies.items() if len(drafts) > 1}
    if not doubled:
        return nets
    has = {(draft.ref, pin.number) for drafts in doubled.values() for draft in drafts for pin in draft.pins}
    made = dict(nets)
    for name in {pin.net for drafts in doubled.values() for draft in drafts for pin in draft.pins if pin.net is not None}:
        pins = tuple(
            (draft.ref, number)
            for ref, number in nets[name].pins
            for draft in book.copies[ref]
            if ref not in doubled or (draft.ref, number) in has
        )
        made[name] = replace(nets[name], pins=pins)
    return made


def _flags(book: Book) -> Iterator[Note]:
    """Parts that one place calls fitted and another not."""
    for draft in book.drafts.values():
        listed = {flag for flag, _ in draft.rows}
        flags = [fact for facts in (draft.said, *draft.choices) for fact in facts if fact.attribute == "fitted"]
        if len({fact.value for fact in flags} | (listed - {None})) < 2 and listed != {False, None}:
            continue
        said = "; ".join(dict.fromkeys(neutral(statement(fact), 80) for fact in flags[:6]))
        taken = "fitted" if draft.fitted() else "not fitted"
        text = f"{neutral(draft.ref, 80)} is stated both fitted and not fitted ({said}); taken as {taken}"
        yield Note("fitted-differs", text, tuple(dict.fromkeys(fact.source for fact in flags)), (draft.ref,))
