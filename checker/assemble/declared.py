"""What the declaration says of parts, and which of its names match nothing in the design."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from itertools import chain, islice
from typing import Literal

from checker.assemble.draft import Book
from checker.model.circuit import Net
from checker.model.declaration import Declaration, DeclaredPart
from checker.model.fact import Source
from checker.model.reading import Note
from checker.neutral import neutral
from checker.strict_yaml import suggestion

_COMPARED = 5_000  # names a misspelt one is compared with
_SUGGESTED = 20  # misspelt names that get a suggestion: comparing is slow

Sort = Literal["part", "net", "either"]
Name = tuple[str, str, Sort, Source]  # (where it is declared, the name, what it should be, its place)


def apply_declared(book: Book, declaration: Declaration) -> None:
    """Put the declared facts on the parts they name, whichever choice is fitted."""
    for declared in declaration.parts.values():
        for draft in book.find(declared.ref):
            draft.always.extend(declared.facts)
            draft.sources.append(declared.source)


def unused(book: Book, nets: Mapping[str, Net], joined: Mapping[str, str], declaration: Declaration) -> list[Note]:
    """A note for every declared reference, pin or net that the design does not have, with a near name where there is one."""
    notes: list[Note] = []
    for where, name, sort, source in _names(declaration):
        if sort != "net" and (book.find(name) or _on_pin(book, name)):
            continue
        if sort != "part" and name in nets:
            continue
        text = f"{where}: {neutral(name, 80)} matches nothing in the design"
        if sort != "part" and name in joined:
            text = f"{where}: the net {neutral(name, 80)} is part of {neutral(joined[name], 80)}, since a pin stands on both"
        elif len(notes) < _SUGGESTED:
            names = chain(book.copies if sort != "net" else (), nets if sort != "part" else ())
            text += neutral(suggestion(name, islice(names, _COMPARED)), 120)
        parts, of_nets = ((name,), ()) if sort == "part" else ((), (name,) if sort == "net" else ())
        notes.append(Note("unused", text, (source,), parts, of_nets))
    for declared in declaration.parts.values():
        notes.extend(_pins(book, declared))
    return notes


def _names(declaration: Declaration) -> Iterator[Name]:
    for output in (output for supply in declaration.supplies for output in supply.outputs):
        yield "outputs", output.net, "net", output.voltage.source
        if output.return_net:
            yield f"outputs.{neutral(output.net, 40)}.return", output.return_net, "net", output.voltage.source
    for domain in declaration.domains.values():
        for net in domain.nets:
            yield f"domains.{neutral(domain.name, 40)}", net, "net", domain.source
    for rail in declaration.rails:
        yield "rails", rail.net, "net", rail.voltage.source
        if rail.return_net:
            yield f"rails.{neutral(rail.net, 40)}.return", rail.return_net, "net", rail.voltage.source
    for ref, declared in declaration.parts.items():
        yield "parts", ref, "part", declared.source
    for conductor in declaration.conductors:
        for touched in conductor.touches:
            yield f"conductors.{neutral(conductor.name, 40)}", touched, "either", conductor.source
    for ref, source in declaration.unreachable.items():
        yield "unreachable", ref, "part", source
    for variant in declaration.variants.values():
        for ref in (*variant.fitted, *variant.not_fitted):
            yield f"variants.{neutral(variant.name, 40)}", ref, "part", variant.source


def _on_pin(book: Book, name: str) -> bool:
    """Whether a name such as `Q1.2` is a pin that a part has."""
    at = name.find(".")
    while at > 0:
        if any(pin.number == name[at + 1 :] for draft in book.find(name[:at]) for pin in draft.pins):
            return True
        at = name.find(".", at + 1)
    return False


def _pins(book: Book, declared: DeclaredPart) -> Iterator[Note]:
    drafts = book.find(declared.ref)
    numbers = {pin.number for draft in drafts for pin in draft.pins}
    wanted = dict.fromkeys(pin for winding in declared.windings for pin in winding.pins)
    for pin in wanted if drafts else ():
        if pin not in numbers:
            text = f"parts: {neutral(declared.ref, 80)} has no pin {neutral(pin, 40)}"
            yield Note("unused", text, (declared.source,), (declared.ref,))
