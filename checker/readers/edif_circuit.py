"""From placed cells to parts and nets: references, units of one part, names of nets."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from sys import intern

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.model.reading import NetRecord, Node, Note, PartRecord, SymbolPin
from checker.neutral import neutral
from checker.readers.edif_blocks import Child
from checker.readers.edif_flat import Flat, Leaf, Placed, numbered
from checker.readers.netlist_form import form
from checker.readers.netlist_part import draft
from checker.readers.sniff import WHITE

_SHOWN = 5
_TELLING = ("value", "type", "footprint")  # what units of one part do not disagree about


@dataclass(slots=True, eq=False)
class _Part:
    """A part, or several instances that are its units. pins: number -> (pin, (node of its net, line) of each place)."""

    ref: str
    line: int
    facts: tuple[Fact, ...]
    pins: dict[str, tuple[SymbolPin, list[tuple[int, int]]]] = field(default_factory=dict)


class Circuit:
    """The records of a flattened design. Raises InputError when it holds no parts, connects nothing, or too much of anything."""

    def __init__(self, flat: Flat):
        self.path = flat.plan.path
        self.flat = flat
        self.notes: list[Note] = []
        self._facts: dict[int, tuple[Fact, ...]] = {}  # id of an instance
        self._known: dict[str, list[_Part]] = {}  # reference -> the parts that claim it
        self._count = 0
        self._names = self._named()
        self._ties: dict[int, tuple[str, set[int]]] = {}
        self._numbers: dict[int, tuple[tuple[SymbolPin, int], ...]] = {}
        unlisted: list[str] = []
        placed = Counter(id(leaf.child.instance) for leaf in flat.leaves if not leaf.child.instance.named.dims)
        for leaf in flat.leaves:
            if self._is_part(leaf):
                ref = self._reference(leaf, placed[id(leaf.child.instance)] > 1)
                self._take(leaf, ref)
                if not leaf.child.cell.defined:
                    unlisted.append(ref)
        self.parts, self.nets = self._records()
        self.notes += [*self._noted(unlisted), *self._symbol_notes()]

    def _is_part(self, leaf: Leaf) -> bool:
        """Whether a cell without contents is a part; symbols of ground and supply are remembered for a note."""
        cell, view = leaf.child.cell, leaf.child.view
        if cell.kind == "ripper":
            return False
        if cell.kind == "tie" and view.width == 1:
            _, nets = self._ties.setdefault(id(cell), (cell.named.text, set()))
            root = self.flat.root(leaf.base)
            if root in self._names:
                nets.add(root)
            return False
        return True

    # --- parts

    def _reference(self, leaf: Leaf, several: bool) -> str:
        """several: whether the cell around it is placed more than once, so that a designator names more than one part."""
        instance = leaf.child.instance
        ref = leaf.child.label
        if instance.designator:
            ref = (
                instance.designator + leaf.child.label.removeprefix(instance.named.text)
                if instance.named.dims
                else instance.designator
            )
        if leaf.path and (several or not instance.designator):
            ref = f"{leaf.path}/{ref}"
        if len(ref) > limits.NAME or not ref.strip(WHITE):
            what = "the reference of a part is too long" if ref.strip(WHITE) else "a part has no reference"
            raise InputError(self.path, what, line=instance.line, found=ref, expected=f"at most {limits.NAME:,} characters")
        return intern(ref)

    def _take(self, leaf: Leaf, ref: str) -> None:
        """A part, or a further unit of one."""
        line = leaf.child.instance.line
        made = _Part(ref, line, self._said(leaf))
        for pin, offset in self._pins(leaf.child):
            node = leaf.base + offset
            made.pins.setdefault(pin.number, (pin, []))[1].append((self.flat.root(node), self.flat.lines.get(node, line)))
        known = self._known.setdefault(ref, [])
        for other in known:
            if _of_one_part(other, made):
                for number, (pin, nodes) in made.pins.items():
                    other.pins.setdefault(number, (pin, []))[1].extend(nodes)
                said = {fact.attribute for fact in other.facts}
                other.facts += tuple(fact for fact in made.facts if fact.attribute not in said)
                break
        else:
            if known:
                self._doubled(made, known)
            known.append(made)
            self._count += 1
        if self._count > limits.PARTS:
            raise InputError(self.path, "the file holds too many parts", line=line, expected=f"at most {limits.PARTS:,}")

    def _doubled(self, made: _Part, known: list[_Part]) -> None:
        """A second part with the reference of another gets one of its own."""
        ref, number = made.ref, len(known) + 1
        while f"{ref} ({number})" in self._known:
            number += 1
        made.ref = f"{ref} ({number})"
        self._known[made.ref] = []
        first = known[0]
        text = f"{neutral(ref, 80)} is listed twice (lines {first.line} and {made.line})"
        places = Source(self.path, first.line), Source(self.path, made.line)
        self.notes.append(
            Note("duplicate-reference", f"{text}; both are kept, the second as {neutral(made.ref, 80)}", places, (ref, made.ref))
        )

    def _said(self, leaf: Leaf) -> tuple[Fact, ...]:
        """What the instance says, then what its cell says beyond that."""
        instance, cell = leaf.child.instance, leaf.child.cell
        facts = self._facts.get(id(instance))
        if facts is None:
            names = {said.said("name").casefold() for said in instance.properties}
            inherited = [said for said in cell.properties if said.said("name").casefold() not in names]
            symbol = form(
                instance.line, "libsource", form(instance.line, "lib", cell.library), form(instance.line, "part", cell.named.text)
            )
            written = form(instance.line, "comp", form(instance.line, "ref", "?"), *instance.properties, *inherited, symbol)
            facts = self._facts[id(instance)] = draft(written, self.path).facts
            if cell.kind == "tie":
                facts += (Fact("kind", "net-tie", Source(self.path, cell.line)),)
        return (*facts, Fact("sheet", leaf.path, Source(self.path, instance.line))) if leaf.path else facts

    def _pins(self, child: Child) -> tuple[tuple[SymbolPin, int], ...]:
        """(pin, offset) of each pin; instances of one cell that number nothing themselves share theirs."""
        key = id(child.instance if child.instance.numbers else child.view)
        pins = self._numbers.get(key)
        if pins is None:
            pins = tuple((SymbolPin(intern(number), intern(name), kind), offset) for number, name, kind, offset in numbered(child))
            if len(pins) > limits.PINS_PER_PART:
                expected = f"at most {limits.PINS_PER_PART:,}"
                what = "the file holds too many pins of one part"
                raise InputError(self.path, what, line=child.instance.line, expected=expected)
            self._numbers[key] = pins
        return pins

    # --- nets

    def _named(self) -> dict[int, Placed]:
        """Node -> the net it is on, by the name nearest the top. Notes where names of one block turn out to be one net."""
        found: dict[int, Placed] = {}
        doubled: list[tuple[Placed, Placed]] = []
        for placed in self.flat.nets:
            root = self.flat.root(placed.node)
            first = found.setdefault(root, placed)
            if first.path == placed.path and first.wire.name != placed.wire.name:
                doubled.append((first, placed))
        if doubled:
            shown = ", ".join(f"{neutral(one.wire.name, 40)} and {neutral(two.wire.name, 40)}" for one, two in doubled[:_SHOWN])
            text = f"{len(doubled)} nets are one with another inside a cell: {shown}"
            sources = tuple(Source(self.path, two.wire.line) for _, two in doubled[:_SHOWN])
            self.notes.append(Note("nets-merged", text, sources, nets=tuple(one.wire.name for one, _ in doubled[:_SHOWN])))
        return found

    def _records(self) -> tuple[tuple[PartRecord, ...], tuple[NetRecord, ...]]:
        """Parts in the order they are placed, nets in the order of their names."""
        nodes: dict[int, list[Node]] = {root: [] for root in self._names}
        parts = [part for known in self._known.values() for part in known]
        if not parts:
            raise InputError(self.path, "the netlist holds no parts: the design has no instances of cells without contents")
        for part in parts:
            for number, (pin, places) in part.pins.items():
                for root, line in dict(reversed(places)).items():
                    if root in nodes:
                        nodes[root].append(Node(part.ref, number, pin.name, pin.type, Source(self.path, line)))
        nets = tuple(self._labelled({root: on for root, on in nodes.items() if on}))
        if not any(len(net.nodes) > 1 for net in nets):
            remedy = "Check that the schematic is wired and annotated, and export it again."
            raise InputError(self.path, "the netlist connects nothing: no net has two pins", remedy=remedy)
        records = tuple(
            PartRecord(part.ref, part.facts, Source(self.path, part.line), tuple(pin for pin, _ in part.pins.values()))
            for part in parts
        )
        return records, nets

    def _labelled(self, nodes: dict[int, list[Node]]) -> Iterator[NetRecord]:
        """Names: as written at the top, with the way there below; the name of a page is added where two pages have one name."""
        if len(nodes) > limits.NETS:
            raise InputError(self.path, "the file holds too many nets", expected=f"at most {limits.NETS:,}")
        taken = {self._names[root].wire.name for root in nodes if not self._names[root].path}
        pages: dict[str, str] = {}
        for root, on in nodes.items():
            path, wire, _ = self._names[root]
            label = wire.name
            if len(on) > limits.PINS_PER_NET:
                expected = f"at most {limits.PINS_PER_NET:,}"
                raise InputError(self.path, "the file holds too many pins of one net", line=wire.line, expected=expected)
            if path or pages.setdefault(wire.name, wire.page) != wire.page:
                label = f"{path}/{wire.name}" if path else f"{wire.name} (page {wire.page})"
                while label in taken:
                    label += "'"
                taken.add(label)
            yield NetRecord(label, label, tuple(on), Source(self.path, wire.line))

    # --- notes

    def _noted(self, unlisted: list[str]) -> Iterator[Note]:
        if unlisted:
            shown = ", ".join(neutral(ref, 40) for ref in unlisted[:_SHOWN])
            text = f"{len(unlisted)} parts have no symbol in the file: {shown}{', ...' if len(unlisted) > _SHOWN else ''}"
            yield Note("no-symbol", text, (Source(self.path),), tuple(unlisted[:_SHOWN]))
        ports = len(self.flat.top.view.ports)
        if ports:
            text = f"the cell of the design has {ports} ports of its own; what is connected to them outside is not known"
            yield Note("skipped", text, (Source(self.path, self.flat.top.view.line),))

    def _symbol_notes(self) -> Iterator[Note]:
        """Symbols of supplies on nets of different names."""
        for name, roots in self._ties.values():
            if len(roots) > 1:
                nets = tuple(self._names[root].wire.name for root in self._names if root in roots)
                shown = ", ".join(neutral(net, 40) for net in nets[:_SHOWN])
                text = f"the symbol {neutral(name, 40)} stands on {len(nets)} nets, which are not taken as one: {shown}"
                yield Note("skipped", text, (Source(self.path),), nets=nets[:_SHOWN])


def _of_one_part(one: _Part, other: _Part) -> bool:
    """Whether the second is a further unit of the first: said alike, with pins of its own, none of them on two nets."""
    said = {fact.attribute: fact.value for fact in one.facts}
    if any(fact.attribute in _TELLING and said.get(fact.attribute, fact.value) != fact.value for fact in other.facts):
        return False
    shared = [(one.pins[number][1], nodes) for number, (_, nodes) in other.pins.items() if number in one.pins]
    return len(shared) < len(other.pins) and all(dict(first).keys() == dict(nodes).keys() for first, nodes in shared)
