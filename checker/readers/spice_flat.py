"""The circuits of a SPICE netlist, one inside the other, flattened into parts on nets.

A sub-circuit is placed where `X` names it, wherever it is defined. It stays one part, not looked into, where its definition is not
in the file, where it holds controlled sources (then it is the model of a part), and where the schematic calls it a part (`XU2`,
`X_U2`), unless it holds coupled coils: then its core has the name of the part, and what else is inside belongs to the model.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.neutral import neutral
from checker.readers import spice_cards, spice_cores
from checker.readers.spice_cards import Device
from checker.readers.spice_cores import Core
from checker.readers.spice_lines import Card

GROUND = "0"
_GROUNDS = frozenset({"0", "gnd"})
_EVERYWHERE = "$g_"  # begins nodes that are one everywhere


@dataclass(slots=True, eq=False)
class Scope:
    """The file itself, or one `.subckt`. nodes: as its first line names them. inner: its own sub-circuits by name."""

    name: str
    line: int
    nodes: list[str]
    outer: Scope | None = None
    cards: list[Card] = field(default_factory=list)
    couplings: list[Card] = field(default_factory=list)
    models: bool = False  # it holds cards that no board does
    inner: dict[str, Scope] = field(default_factory=dict)

    def take(self, card: Card) -> None:
        """A part or a coupling of coils."""
        (self.couplings if card.letter == "K" else self.cards).append(card)
        self.models = self.models or card.letter in spice_cards.MODELLING

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

    letter: str
    ref: str
    line: int
    facts: tuple[Fact, ...]
    pins: list[tuple[str, str, str]]


@dataclass(slots=True)
class Supply:
    """A voltage source where it is placed, and one of its nets, not node 0 where it has another."""

    ref: str
    device: Device
    net: str


class Flat:
    """All parts of a file. Raises InputError for definitions that contain themselves, do not fit, or come to too much."""

    def __init__(self, path: str, top: Scope, parts: Callable[[Scope], list[Device]], types: dict[str, str], shared: Iterable[str]):
        self.path, self.types = path, types
        self.shared = frozenset(node.lower() for node in shared)  # nodes that are the same everywhere
        self.whole: list[str] = []  # sub-circuits that were taken as one part
        self.coupled: list[tuple[str, Core]] = []  # coupled coils as placed
        self.supplies: list[Supply] = []
        self.parts: list[Part] = []
        self._parts_of = parts
        self._devices: dict[int, list[Device]] = {}  # id of a scope
        self._cores: dict[int, list[Core]] = {}
        self._weights: dict[int, int] = {}
        self._open: list[Scope] = []
        self.grounds: dict[str, str] = {}  # spellings of node 0, in small letters -> as written first
        self._names: dict[tuple[str, str], str] = {}  # circuit and node in small letters -> net, as written first
        self._taken: set[str] = set()
        self._weigh(top)
        self._place(top, "", {})

    @property
    def used(self) -> Iterator[Device]:
        """Every part as written, of circuits that are placed."""
        return (device for devices in self._devices.values() for device in devices)

    def _block(self, scope: Scope, device: Device) -> Scope | None:
        """The definition a part is placed from, None where it stays one part."""
        found = scope.find(device.model) if device.letter == "X" else None
        if found is None or found.models:
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
        coils = {device.name.lower(): device for device in self._devices[id(scope)] if device.letter == "L"}
        self._cores[id(scope)] = spice_cores.cores(scope.couplings, coils, self.path)
        weight = len(scope.couplings)
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
        if folded in _GROUNDS:
            self.grounds.setdefault(folded, node)
            folded, node = GROUND, GROUND
        inside = "" if folded in self.shared or folded.startswith(_EVERYWHERE) else path
        if (inside, folded) not in self._names:
            name = f"{inside}/{node}" if inside else node
            if len(name) > limits.NAME:
                expected = f"at most {limits.NAME:,} characters"
                raise InputError(self.path, "the name of a node is too long", found=name, expected=expected)
            while name.lower() in self._taken:  # a node that is written as one inside a sub-circuit is named here
                name += "'"
            self._taken.add(name.lower())
            self._names[inside, folded] = name
        return self._names[inside, folded]

    def _place(self, scope: Scope, path: str, given: dict[str, str], part: str = "", modelled: bool = False) -> None:
        """Every part of a circuit. part: the reference of the part it is the model of. modelled: whether it is inside of such."""
        devices, cores = self._devices[id(scope)], self._cores[id(scope)]
        refs = _references([*devices, *(core.device for core in cores)])
        wound = {id(coil) for core in cores for coil in core.coils}
        for device in devices:
            if id(device) in wound:
                continue
            nets = [self._net(node, path, given) for _, node in device.nodes]
            ref = self._path(path, refs[id(device)], device)
            block = self._block(scope, device)
            if block is not None:
                inner = dict(zip(map(str.lower, block.nodes), nets, strict=True))
                model = device.ref != device.name
                self._place(block, f"{path}/{refs[id(device)]}", inner, ref if model and not modelled else "", model or modelled)
                continue
            names = [name for name, _ in device.nodes]
            if device.letter == "V":
                self.supplies.append(Supply(ref, device, next((net for net in nets if net != GROUND), GROUND)))
            if device.letter == "X":
                self.whole.append(ref)
                found = scope.find(device.model)
                names = found.nodes if found is not None and len(found.nodes) == len(nets) else names
            pins = [(str(at), name, net) for at, (name, net) in enumerate(zip(names, nets, strict=True), 1)]
            said = spice_cards.facts(device, self.types, self.path)
            if modelled:
                said = (*said, Fact("in_bom", False, Source(self.path, device.line)))
            self.parts.append(Part(device.letter, ref, device.line, said, pins))
        for core in cores:
            ref = part if part and len(cores) == 1 else self._path(path, refs[id(core.device)], core.device)
            pins = [(str(at), name, self._net(node, path, given)) for at, (name, node) in enumerate(core.device.nodes, 1)]
            self.coupled.append((ref, core))
            self.parts.append(Part("K", ref, core.device.line, spice_cores.facts(core, self.path), pins))

    def _path(self, path: str, ref: str, device: Device) -> str:
        ref = f"{path}/{ref}" if path else ref
        if len(ref) > limits.NAME:
            expected = f"at most {limits.NAME:,} characters"
            raise InputError(self.path, "the reference of a part is too long", line=device.line, found=ref, expected=expected)
        return ref


def _references(devices: Sequence[Device]) -> dict[int, str]:
    """id of a part -> its reference: as on the schematic where that is no other part's name too."""
    claimed = Counter(name for device in devices for name in {device.name.lower(), device.ref.lower()})
    return {id(device): device.ref if claimed[device.ref.lower()] == 1 else device.name for device in devices}
