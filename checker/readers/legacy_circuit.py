"""What the two legacy netlists share: parts and nets collected in file order, limits, one error where nothing is connected."""

from __future__ import annotations

from collections.abc import Iterable

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.model.fact import Fact, Source
from checker.model.reading import NetRecord, Node, Note, PartRecord, Reading, SymbolPin


class Circuit:
    """Collects one file; `reading` checks the whole and returns it."""

    def __init__(self, path: str):
        self.path = path
        self._parts: dict[str, tuple[tuple[Fact, ...], Source, dict[str, SymbolPin]]] = {}
        self._nets: dict[str, tuple[Source, dict[tuple[str, str], Node]]] = {}

    def part(self, ref: str, line: int, facts: tuple[Fact, ...] = ()) -> None:
        """A part, unless it is known. Raises InputError for one too many."""
        if ref not in self._parts:
            self._parts[ref] = (facts, Source(self.path, line), {})
            self._bounded(len(self._parts), "parts", limits.PARTS, line)

    def pin(self, ref: str, number: str, net: str, line: int) -> None:
        """A pin of a known part. net: "" for a pin on none."""
        pins = self._parts[ref][2]
        pins.setdefault(number, SymbolPin(number))
        self._bounded(len(pins), "pins of one part", limits.PINS_PER_PART, line)
        if net:
            _, nodes = self._nets.setdefault(net, (Source(self.path, line), {}))
            nodes.setdefault((ref, number), Node(ref, number, source=Source(self.path, line)))
            self._bounded(len(self._nets), "nets", limits.NETS, line)
            self._bounded(len(nodes), "pins of one net", limits.PINS_PER_NET, line)

    def name(self, text: str, what: str, line: int) -> str:
        """A reference, pin or net name as written. Raises InputError for one that is too long."""
        if len(text) > limits.NAME:
            expected = f"at most {limits.NAME:,} characters"
            raise InputError(self.path, f"{what} is too long", line=line, found=text, expected=expected)
        return text

    def places(self) -> dict[str, Source]:
        """Each reference and where it stands first."""
        return {ref: source for ref, (_, source, _) in self._parts.items()}

    def _bounded(self, count: int, what: str, limit: int, line: int) -> None:
        if count > limit:
            raise InputError(self.path, f"the file holds too many {what}", line=line, expected=f"at most {limit:,}")

    def reading(self, blob: Blob, form: str, notes: Iterable[Note]) -> Reading:
        """The whole file. Raises InputError when it holds no parts or connects nothing."""
        if not self._parts:
            raise InputError(self.path, "the netlist holds no parts", remedy="Export the netlist again, whole.")
        if not any(len(nodes) > 1 for _, nodes in self._nets.values()):
            raise InputError(
                self.path,
                "the netlist connects nothing: no net has two pins",
                remedy="Check that the schematic is wired and annotated, and export it again.",
            )
        parts = ((ref, *of) for ref, of in self._parts.items())
        return Reading(
            role="netlist",
            form=form,
            path=self.path,
            sha256=blob.sha256,
            parts=tuple(PartRecord(ref, facts, source, tuple(pins.values())) for ref, facts, source, pins in parts),
            nets=tuple(NetRecord(net, net, tuple(nodes.values()), source) for net, (source, nodes) in self._nets.items()),
            notes=tuple(notes),
        )
