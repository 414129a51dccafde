"""The circuits of a SPICE netlist, one inside the other, flattened into parts on nets.

A sub-circuit is placed where `X` names it, wherever it is defined. It stays one part, not looked into, where its definition is not
in the file, where it holds controlled sources (then it is the model of a part), and where the schematic calls it a part (`XU2`,
`X_U2`), unless it holds coupled coils.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, field

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.neutral import neutral
from checker.readers import spice_cards
from checker.readers.spice_cards import Device
from checker.readers.spice_lines import Card

GROUND = "0"


@dataclass(slots=True, eq=False)
class Scope:
    """The file itself, or one `.subckt`. nodes: as its first line names them. inner: its own sub-circuits by name."""

    name: str
    line: int
    nodes: list[str]
    outer: Scope | None = None
    cards: list[Card] = field(default_factory=list)
    couplings: list[Card] = field(default_factory=list)
    inner: dict[str, Scope] = field(default_factory=dict)

    def find(self, name: str) -> Scope | None:
        """The sub-circuit of that name as seen from here."""
        scope: Scope | None = self
        while scope is not None:
            if (found := scope.inner.get(name.lower())) is not None:
                return found
            scope = scope.outer
        return None


@dataclass(slots=True)
class Part:
    """A part where it is placed. pins: (number, name, net)."""

    ref: str
    line: int
    facts: tuple[Fact, ...]
    pins: list[tuple[str, str, str]]


class Flat:
    """All parts of a file. Raises InputError for definitions that contain themselves, do not fit, or come to too much."""

    def __init__(self, path: str, top: Scope, parts: Callable[[Scope], list[Device]], types: dict[str, str], shared: Iterable[str]):
        self.path, self.types = path, types
        self.shared = frozenset(node.lower() for node in shared)  # nodes that are the same everywhere
        self.whole: list[str] = []  # sub-circuits that were taken as one part
        self.parts: list[Part] = []
        self._parts_of = parts
        self._devices: dict[int, list[Device]] = {}  # id of a scope
        self._weights: dict[int, int] = {}
        self._open: list[Scope] = []
        self._names: dict[str, str] = {}  # net in small letters -> as written first
        self._weigh(top)
        self._place(top, "", {})

    @property
    def used(self) -> Iterator[Device]:
        """Every part as written, of circuits that are placed."""
        return (device for devices in self._devices.values() for device in devices)

    def _block(self, scope: Scope, device: Device) -> Scope | None:
        """The definition a part is placed from, None where it stays one part."""
        found = scope.find(device.model) if device.letter == "X" else None
        if found is None or any(card.letter in spice_cards.MODELLING for card in found.cards):
            return None
        return found if device.ref == device.name or found.couplings else None

    def _weigh(self, scope: Scope) -> int:
        """Parts and pins a circuit comes to."""
        if id(scope) in self._weights:
            return self._weights[id(scope)]
        if scope in self._open:
            names = " -> ".join(neutral(one.name, 40) for one in (*self._open[self._open.index(scope) :], scope))
            raise InputError(self.path, "a sub-circuit contains itself", line=scope.line, found=names)
        if len(self._open) >= limits.DEPTH:
            raise InputError(
                self.path, "sub-circuits are nested too deep", line=scope.line, expected=f"at most {limits.DEPTH} levels"
            )
        self._open.append(scope)
        self._devices[id(scope)] = self._parts_of(scope)
        weight = 0
        for device in self._devices[id(scope)]:
            block = self._block(scope, device)
            weight += 1 + len(device.nodes) + (self._weigh(block) if block is not None else 0)
            if weight > limits.FLATTENED:
                what, expected = (
                    "the circuit is too large once every sub-circuit is placed",
                    f"at most {limits.FLATTENED:,} parts and pins",
                )
                raise InputError(self.path, what, line=device.line, expected=expected)
            if block is not None and len(block.nodes) != len(device.nodes):
                found, expected = f"{len(device.nodes)} nodes", f"{len(block.nodes)} nodes, as in line {block.line}"
                what = "a sub-circuit is given other nodes than it has"
                raise InputError(self.path, what, line=device.line, found=found, expected=expected)
        self._open.pop()
        self._weights[id(scope)] = weight
        return weight

    def _net(self, node: str, path: str, given: dict[str, str]) -> str:
        """The net of a node inside a circuit at that path."""
        folded = node.lower()
        if folded in given:
            return given[folded]
        name = node if not path or folded in self.shared else f"{path}/{node}"
        if len(name) > limits.NAME:
            raise InputError(
                self.path, "the name of a node is too long", found=name, expected=f"at most {limits.NAME:,} characters"
            )
        return self._names.setdefault(name.lower(), name)

    def _place(self, scope: Scope, path: str, given: dict[str, str]) -> None:
        refs = self._references(scope)
        coils = {device.name.lower(): device for device in self._devices[id(scope)] if device.letter == "L"}
        cores = list(self._cores(scope, coils))
        wound = {id(coil) for _, core in cores for coil in core}
        for device in self._devices[id(scope)]:
            if id(device) in wound:
                continue
            nets = [self._net(node, path, given) for _, node in device.nodes]
            ref = self._path(path, refs[id(device)], device)
            block = self._block(scope, device)
            if block is not None:
                self._place(block, f"{path}/{refs[id(device)]}", dict(zip(map(str.lower, block.nodes), nets, strict=True)))
                continue
            names = [name for name, _ in device.nodes]
            if device.letter == "X":
                self.whole.append(ref)
                found = scope.find(device.model)
                names = found.nodes if found is not None and len(found.nodes) == len(nets) else names
            pins = [(str(at), name, net) for at, (name, net) in enumerate(zip(names, nets, strict=True), 1)]
            self.parts.append(Part(ref, device.line, spice_cards.facts(device, self.types, self.path), pins))
        for card, core in cores:
            self.parts.append(self._transformer(card, core, path, given))

    def _path(self, path: str, ref: str, device: Device) -> str:
        ref = f"{path}/{ref}" if path else ref
        if len(ref) > limits.NAME:
            expected = f"at most {limits.NAME:,} characters"
            raise InputError(self.path, "the reference of a part is too long", line=device.line, found=ref, expected=expected)
        return ref

    def _references(self, scope: Scope) -> dict[int, str]:
        """id of a part -> its reference: as on the schematic where that is no other part's name too."""
        claimed: dict[str, list[Device]] = defaultdict(list)
        for device in self._devices[id(scope)]:
            claimed[device.name.lower()].append(device)
            if device.ref != device.name:
                claimed[device.ref.lower()].append(device)
        return {
            id(device): device.ref if len(claimed[device.ref.lower()]) == 1 else device.name for device in self._devices[id(scope)]
        }

    def _cores(self, scope: Scope, coils: dict[str, Device]) -> Iterator[tuple[Card, list[Device]]]:
        """(first card `K`, its coils in order) of each core; cards that share a coil are of one core."""
        cores: list[tuple[Card, dict[str, Device]]] = []
        for card in scope.couplings:
            named = [word.lower() for word in card.positional()[1:] if word[:1] in "Ll"]
            missing = next((name for name in named if name not in coils), "")
            if missing or len(named) < 2:
                found = missing or " ".join(card.words)[:200]
                what = "a coupling names a coil that is not there" if missing else "a coupling names fewer than two coils"
                raise InputError(self.path, what, line=card.line, found=found, expected="two or more parts L and a factor")
            core = {name: coils[name] for name in named}
            apart = []
            for first, other in cores:
                if core.keys() & other.keys():
                    card, core = first, other | core
                else:
                    apart.append((first, other))
            cores = [*apart, (card, core)]
        yield from ((card, list(core.values())) for card, core in cores)

    def _transformer(self, card: Card, core: list[Device], path: str, given: dict[str, str]) -> Part:
        """Coupled coils as one part with a winding each, its pins numbered in the order of the coils."""
        pins = [
            (str(2 * at + end + 1), coil.ref, self._net(coil.nodes[end][1], path, given))
            for at, coil in enumerate(core)
            for end in (0, 1)
        ]
        source = Source(self.path, card.line)
        windings = ", ".join(f"{2 * at + 1}-{2 * at + 2}" for at in range(len(core)))
        names = ", ".join(neutral(coil.ref, 40) for coil in core[:8])
        facts = (
            Fact("kind", "transformer", source, text=" ".join(card.words)[: limits.CELL]),
            Fact("windings", windings, source, text=f"coupled coils {names}"),
            Fact("symbol", "Transformer", source),
        )
        name = card.words[0]
        ref = name[2:] if name[1:2] == "_" and len(name) > 2 else name
        return Part(f"{path}/{ref}" if path else ref, card.line, facts, pins)
