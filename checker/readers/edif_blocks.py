"""Every cell that is used as a `Block`, once, with its references resolved.

What placing all blocks would cost is summed here, before anything is placed, so that ten levels of ten instances are refused and
not built.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from sys import intern
from typing import NamedTuple

from checker import limits
from checker.errors import InputError
from checker.model.fact import Source
from checker.model.reading import Note
from checker.neutral import neutral
from checker.readers.edif_names import Named, Names, members
from checker.readers.edif_records import Cell, Instance, Join, Port, Reference, View
from checker.readers.edif_tree import Library

_OWN, _GLOBAL, _PAGE = -1, -2, -3  # places of a block that belong to no child


class End(NamedTuple):
    """A member of a port. child: number of the child, or one of the places above."""

    child: int
    offset: int
    line: int


class Wire(NamedTuple):
    """One net of one block; name "" for what only joins nets that have names."""

    name: str
    page: str
    line: int
    ends: list[End]


@dataclass(slots=True)
class Block:
    """A cell with contents. weight: instances, ports and connections it comes to when it is placed. height: levels below it."""

    view: View
    children: list[Child] = field(default_factory=list)
    wires: list[Wire] = field(default_factory=list)
    weight: int = 0
    height: int = 0


@dataclass(slots=True)
class Child:
    """One instance, or one of an array. block: None for a part."""

    instance: Instance
    label: str
    cell: Cell
    view: View
    block: Block | None


class Plan:
    """The blocks of one file. Raises InputError for references that lead nowhere, cells in themselves, and too much of anything."""

    def __init__(self, library: Library):
        self.path, self.library = library.path, library
        self.notes: list[Note] = []
        self.globals: dict[str, int] = {}
        self._blocks: dict[int, Block | None] = {}  # id of a view
        self._open: list[View] = []
        self._unlisted: set[int] = set()  # views whose ports are those that nets name
        self._connections = 0

    def top(self) -> Block:
        """The block of the design."""
        tops = self.library.tops
        if len(tops) != 1:
            what = "the file holds several designs" if tops else "the file does not say which cell is the design"
            line = tops[1][3] if tops else 0
            raise InputError(self.path, what, line=line, expected="(design NAME (cellRef CELL (libraryRef LIBRARY)))")
        name, library, view_name, line, _ = tops[0]
        cell = self._cells(library, name)
        view = cell.view(view_name) if cell is not None else None
        block = self._block(cell, view) if cell is not None and view is not None else None
        if block is None:
            found = f"{name} of library {library}"
            raise InputError(self.path, "the cell of the design has no contents", line=line, found=found)
        return block

    def _cells(self, library: str, name: str) -> Cell | None:
        cells = self.library.cells.get(library)
        return cells.find(name) if cells is not None else None

    def _block(self, cell: Cell, view: View) -> Block | None:
        """The block of a view, None for a part."""
        if id(view) in self._blocks:
            return self._blocks[id(view)]
        if not (view.instances or view.nets or (cell.kind == "ripper" and view.joined)):
            self._blocks[id(view)] = None
            return None
        if view in self._open:
            names = " -> ".join(neutral(one.named.text, 40) for one in (*self._open[self._open.index(view) :], view))
            raise InputError(self.path, "a cell contains itself", line=view.line, found=names)
        if len(self._open) >= limits.DEPTH:
            raise InputError(self.path, "cells are nested too deep", line=view.line, expected=f"at most {limits.DEPTH} levels")
        self._open.append(view)
        block = Block(view)
        first = self._children(block)
        for join in view.nets or view.joined:
            block.wires.extend(self._wires(join, block, first))
        self._doubted(block)
        block.weight += sum(len(wire.ends) for wire in block.wires) + view.width
        for child in block.children:
            block.weight += child.block.weight if child.block else child.view.width
            block.height = max(block.height, child.block.height + 1 if child.block else 0)
        self._bounded(block.weight, view.line)
        if block.height > limits.DEPTH:
            raise InputError(self.path, "cells are nested too deep", line=view.line, expected=f"at most {limits.DEPTH} levels")
        self._open.pop()
        self._blocks[id(view)] = block
        return block

    def _bounded(self, count: int, line: int) -> None:
        if count > limits.FLATTENED:
            expected = f"at most {limits.FLATTENED:,} instances, ports and connections"
            raise InputError(self.path, "the design is too large once every cell is placed", line=line, expected=expected)

    def _children(self, block: Block) -> dict[int, int]:
        """Fills in the children; returns id of an instance -> number of its first child."""
        first: dict[int, int] = {}
        for instance in block.view.instances:
            cell, view = self._meant(instance)
            first[id(instance)] = len(block.children)
            inner = self._block(cell, view)
            block.weight += instance.named.width
            self._bounded(block.weight, instance.line)
            if inner is None and view.width > limits.PINS_PER_PART:
                expected = f"at most {limits.PINS_PER_PART:,}"
                raise InputError(self.path, "the file holds too many pins of one part", line=view.line, expected=expected)
            block.children += [Child(instance, label, cell, view, inner) for label in members(instance.named)]
        return first

    def _meant(self, instance: Instance) -> tuple[Cell, View]:
        """Cell and view of an instance; made up where the file does not hold them."""
        cell = self._cells(instance.library, instance.cell)
        if cell is None:
            cell = Cell(Named(instance.cell, instance.cell.removeprefix("&")), instance.library, instance.line, defined=False)
            if not self.library.cells.setdefault(instance.library, Names()).add(instance.cell, cell):
                raise InputError(self.path, "it cannot be told which cell is meant", line=instance.line, found=instance.cell)
        view = cell.view(instance.view)
        if view is None and len(cell.views):
            raise InputError(self.path, "the cell has no such view", line=instance.line, found=f"{instance.cell} {instance.view}")
        if view is None:
            view = View(Named("", ""), instance.line)
            cell.views.add(instance.view, view)
            self._unlisted.add(id(view))
        return cell, view

    def _wires(self, join: Join, block: Block, first: dict[int, int]) -> Iterator[Wire]:
        """The nets of one form `net`, one for each member."""
        sides = [[end for reference in side for end in self._ends(reference, block, first)] for side in join.sides]
        width = max((len(side) for side in sides), default=0)
        if any(len(side) != width for side in sides) or (join.named.dims and sides and join.named.width != width):
            found = " and ".join(sorted({str(len(side)) for side in sides}))
            raise InputError(self.path, "a net joins ports of different widths", line=join.line, found=found, expected="one width")
        named = join.named if width < 2 or join.named.dims or not join.named.text else join.named._replace(dims=(width,))
        if sides:
            for place, name in enumerate(members(named) if named.text else [""] * width):
                yield Wire(intern(name), join.page, join.line, [side[place] for side in sides])

    def _ends(self, reference: Reference, block: Block, first: dict[int, int]) -> Iterator[End]:
        """Every member a reference stands for."""
        if reference.instance == "*":
            yield End(_GLOBAL, self.globals.setdefault(reference.port.lower(), len(self.globals)), reference.line)
            return
        if not reference.instance:
            page = block.view.pages.find(reference.port) if block.view.ports.find(reference.port) is None else None
            if page is not None:
                yield End(_PAGE, page.offset, reference.line)
                return
            for offset in self._offsets(block.view, reference):
                yield End(_OWN, offset, reference.line)
            return
        instance = block.view.instances.find(reference.instance)
        if instance is None:
            found = reference.instance.partition("\n")[2] or reference.instance
            raise InputError(self.path, "a net joins an instance that is not there", line=reference.line, found=found)
        at, dims = first[id(instance)], instance.named.dims
        chosen = range(at, at + instance.named.width)
        if reference.member:
            at += self.library.place.offset(reference.member, dims, reference.line, "the instance")
            chosen = range(at, at + 1)
        for child in chosen:
            for offset in self._offsets(block.children[child].view, reference):
                yield End(child, offset, reference.line)

    def _offsets(self, view: View, reference: Reference) -> Iterator[int]:
        """The places of a port's members among those of its view."""
        ports = [self._port(view, name, reference) for name in view.bundles.get(reference.port.lower(), [reference.port])]
        for port in ports:
            dims = port.named.dims
            index = reference.index if id(view) not in self._unlisted else ()
            self._connections += 1 if index else port.named.width
            self._bounded(self._connections, reference.line)
            if index:
                yield port.offset + self.library.place.offset(index, dims, reference.line, "the port")
            else:
                yield from range(port.offset, port.offset + port.named.width)

    def _port(self, view: View, name: str, reference: Reference) -> Port:
        if id(view) in self._unlisted:  # each member seen is a port of its own
            named = Named(name, name.removeprefix("&"))
            if reference.index:
                label = named.text + "".join(f"[{one}]" for one in reference.index)
                named = Named(label, label)
            port = view.ports.find(named.ident) or view.port(named)
        else:
            port = view.ports.find(name)
        if port is None or view.width > limits.FLATTENED:
            raise InputError(self.path, "a net joins a port that is not there", line=reference.line, found=name)
        return port

    def _doubted(self, block: Block) -> None:
        """A note where a pin of a part is on two nets of one block."""
        seen: dict[tuple[int, int], Wire] = {}
        for wire in block.wires:
            for child, offset, line in wire.ends:
                if not wire.name or child < 0 or block.children[child].block is not None:
                    continue
                other = seen.setdefault((child, offset), wire)
                if other is not wire and other.name != wire.name:
                    part = block.children[child].label
                    text = f"a pin of {neutral(part, 80)} is on two nets, {neutral(other.name, 80)} and {neutral(wire.name, 80)}"
                    places = Source(self.path, other.line), Source(self.path, line)
                    note = Note("pin-on-two-nets", f"{text}; they are taken as one", places, nets=(other.name, wire.name))
                    self.notes.append(note)
