"""The design of an EDIF file flattened: from the cell at the top down to the cells without contents, which are the parts."""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator
from typing import NamedTuple

from checker import limits
from checker.errors import InputError
from checker.readers.edif_blocks import Block, Child, Plan, Wire
from checker.readers.edif_names import Index, members


class Leaf(NamedTuple):
    """A part where it is placed. base: node of the first member of its first port."""

    child: Child
    path: str
    base: int


class Placed(NamedTuple):
    """A net where it is placed, and one node on it."""

    path: str
    wire: Wire
    node: int


class Flat:
    """A design with every block placed: nodes, those that are one, parts and nets."""

    def __init__(self, plan: Plan):
        self.plan = plan
        self.leaves: list[Leaf] = []
        self.nets: list[Placed] = []
        self.lines: dict[int, int] = {}  # node of a pin -> where a net names it
        top = plan.top()
        self._one: list[int] = list(range(len(plan.globals) + top.view.width))
        self.top = top
        waiting = deque([(top, "", len(plan.globals))])
        while waiting:  # level by level, so that a net gets the name it has nearest the top
            block, path, own = waiting.popleft()
            self._place(block, path, own, waiting)

    def _nodes(self, count: int) -> int:
        base = len(self._one)
        self._one.extend(range(base, base + count))
        return base

    def _place(self, block: Block, path: str, own: int, waiting: deque[tuple[Block, str, int]]) -> None:
        bases = []
        for child in block.children:
            base = self._nodes(child.view.width)
            bases.append(base)
            if child.block is None:
                self.leaves.append(Leaf(child, path, base))
                continue
            inner = f"{path}/{child.instance.designator or child.label}"
            if len(inner) > limits.NAME:
                what, expected = "the name of a cell inside cells is too long", f"at most {limits.NAME:,} characters"
                raise InputError(self.plan.path, what, line=child.instance.line, found=inner, expected=expected)
            waiting.append((child.block, inner, base))
        bases += [self._nodes(len(block.view.pages)), 0, own]  # found by the places -3, -2, -1
        for wire in block.wires:
            first = self.root(bases[wire.ends[0].child] + wire.ends[0].offset)
            for child_number, offset, line in wire.ends:
                node = bases[child_number] + offset
                self._one[self.root(node)] = first
                if child_number >= 0:
                    self.lines.setdefault(node, line)
            if wire.name:
                self.nets.append(Placed(path, wire, first))

    def root(self, node: int) -> int:
        """The node that stands for all that are one with this."""
        one = self._one
        while one[node] != node:
            one[node] = one[one[node]]
            node = one[node]
        return node


def numbered(child: Child) -> Iterator[tuple[str, str, str, int]]:
    """(number, name, type, offset) of each pin of a part; the name of a port is its number where no other is given."""
    for port in child.view.ports:
        indices: Iterator[Index] = _indices(port.named.dims)
        for place, (name, index) in enumerate(zip(members(port.named), indices, strict=True)):
            number = child.instance.numbers.get((port.named.ident.lower(), index)) or ("" if port.named.dims else port.number)
            yield number or name, "" if number in ("", name) else name, port.direction, port.offset + place


def _indices(dims: Index) -> Iterator[Index]:
    if not dims:
        yield ()
        return
    for first in range(dims[0]):
        for rest in _indices(dims[1:]):
            yield (first, *rest)
