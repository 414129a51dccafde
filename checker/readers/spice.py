"""A netlist for a SPICE simulator, as a limited carrier: it shows what is connected, and little else.

    * title                      the first line, always
    R1 IN N1 10k                 a part: reference, nodes, value or model
    D1 0 N1 1N4007
    + area=2                     continues the line above
    X1 IN OUT 0 FILTER           a sub-circuit
    .subckt FILTER A B G
    L1 A C 1m
    K1 L1 L2 0.99                couples coils: together they are one part of kind transformer, a winding each
    .ends

What a simulation leaves out cannot be read from it: connectors, fuses, ratings, classes, footprints, parts that are not fitted.
Pins are numbered by their order in the file and are not those of a package. Node `0` (also called GND) is one everywhere, so
that a circuit whose two sides both stand on it has no barrier here. Controlled sources and switches are parts of their two output
nodes; the nodes they sense carry no current and are left out, as are substrates of transistors. Other files that are named are
never opened, expressions never worked out. Numbers are read as simulators do: `M` is milli, `Meg` mega. Bring a bill of materials
and a declaration for everything else; a coupling called `K_T1` is part T1 of that bill, a sub-circuit `XU2` part U2.
"""

from __future__ import annotations

import re

from checker import limits
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.model.fact import Source
from checker.model.reading import NetRecord, Node, Note, PartRecord, Reader, Reading, SymbolPin
from checker.readers import sniff, spice_cards, spice_notes
from checker.readers.spice_cards import Device
from checker.readers.spice_flat import GROUND, Flat, Part, Scope
from checker.readers.spice_lines import Card, cards

FORM = "SPICE netlist"

_REMEDY = "A netlist of the schematic editor says more than one of a simulator; export that if there is one."
_AUTOMATIC = re.compile(r"N[0-9]{3}|\$N_[0-9]+|NC_[0-9]+|(?:Net|unconnected)-_.*_")  # names that schematic editors give
_OPENING = frozenset({".include", ".inc", ".lib", ".incl"})
_COMMANDS = frozenset(
    ".param .params .func .tran .ac .dc .op .noise .tf .four .ic .nodeset .options .option .opt .temp .step .meas .measure .probe "
    ".print .plot .save .backanno .width .machine .endl .wave .net .sens .pz .disto .fft .title .end .csparam .alter .data "
    ".enddata .loadbias .savebias .text .prot .unprot .distribution .mc .wcase .watch .vector .aliases".split()
)


def claims(head: str) -> bool:
    """Whether the text begins as such netlists do, or holds statements to a simulator between lines that look like parts."""
    return sniff.SPICE_START.match(head) is not None or sniff.spice_lines(head)


class _File:
    """Sorts the statements of a file."""

    def __init__(self, path: str, title: str):
        self.path = path
        self.titled = title.lower().startswith(".subckt")
        self.top = Scope("", 0, [])
        self.types: dict[str, str] = {}  # model in small letters -> type
        self.shared = {GROUND}
        self.opening: list[Card] = []
        self.unread: list[Card] = []
        self._scope = self.top
        self._scopes = [self.top]

    def take(self, card: Card) -> None:
        """One statement. Raises InputError for one that changes what is connected and is not understood."""
        if card.letter != ".":
            self._scope.take(card)
        elif card.keyword == ".subckt":
            self._begin(card)
        elif card.keyword == ".ends":
            if self._scope.outer is None:
                remedy = "The first line of a file is its title, whatever it holds; put another line in front of it."
                raise InputError(self.path, "`.ends` without `.subckt`", line=card.line, remedy=remedy if self.titled else "")
            self._scope = self._scope.outer
        elif card.keyword == ".model":
            if len(card.words) > 2:
                self.types[card.words[1].lower()] = card.words[2].partition("(")[0].lower()
        elif card.keyword == ".global":
            self.shared.update(card.words[1:])
        elif card.keyword in _OPENING:
            self.opening.append(card)
        elif card.keyword in (".if", ".else", ".elseif", ".endif"):
            raise InputError(self.path, "parts under a condition are not read", line=card.line, found=card.words[0], remedy=_REMEDY)
        elif card.keyword not in _COMMANDS:
            self.unread.append(card)

    def _begin(self, card: Card) -> None:
        words = card.positional()
        if len(words) < 2:
            raise InputError(self.path, "a sub-circuit has no name", line=card.line, expected=".subckt NAME NODES")
        if len(self._scopes) > limits.PARTS:
            raise InputError(
                self.path, "the file holds too many sub-circuits", line=card.line, expected=f"at most {limits.PARTS:,}"
            )
        made = Scope(words[1], card.line, words[2:], self._scope)
        if len({node.lower() for node in made.nodes}) < len(made.nodes):
            raise InputError(self.path, "a sub-circuit names a node twice", line=card.line, found=" ".join(card.words)[:200])
        if made.name.lower() in self._scope.inner:
            raise InputError(self.path, "a sub-circuit is defined twice", line=card.line, found=made.name)
        self._scope.inner[made.name.lower()] = made
        self._scopes.append(made)
        self._scope = made

    def end(self) -> None:
        """Raises InputError for a file that ends inside a sub-circuit."""
        if self._scope is not self.top:
            what = "the file ends inside the sub-circuit that begins here"
            raise InputError(
                self.path, what, line=self._scope.line, remedy="The file may have been cut off; export or copy it again."
            )

    def devices(self, scope: Scope) -> list[Device]:
        """The parts of a circuit, now that all models are known. Raises InputError for two of one name."""
        found: dict[str, Device] = {}
        for card in scope.cards:
            made = spice_cards.device(card, self.types, self.path)
            if made is None:
                self.unread.append(card)
            elif (first := found.setdefault(made.name.lower(), made)) is not made:
                what = f"a part is listed twice (first in line {first.line})"
                raise InputError(self.path, what, line=made.line, found=made.name)
        return list(found.values())


def read(blob: Blob) -> Reading:
    """The netlist. Raises InputError, with the line, for what cannot be a whole netlist."""
    head = sniff.head(blob)
    if not claims(head):
        what = "the file is not a SPICE netlist" if head else "the file is empty"
        raise InputError(blob.path, what, found=sniff.describe(head), expected="a title, then parts such as R1 IN OUT 10k")
    text, note = decoded(blob)
    text = text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
    first = text.partition("\n")[0].strip(sniff.WHITE)
    file = _File(blob.path, first)
    for card in cards(text, blob.path):
        file.take(card)
    file.end()
    flat = Flat(blob.path, file.top, file.devices, file.types, file.shared)
    title = re.sub(r"\A(?:\*|\.title\b)\s*", "", first, flags=re.IGNORECASE)
    parts, nets = _records(flat, blob.path)
    encoding = [Note("encoding", note, (Source(blob.path),))] if note else []
    return Reading(
        role="netlist",
        form=FORM,
        path=blob.path,
        sha256=blob.sha256,
        parts=parts,
        nets=nets,
        notes=(*encoding, *spice_notes.notes(blob.path, flat, file.opening, file.unread, first)),
        title="" if re.search(r"[/\\]", title) else title[: limits.NAME],
    )


def _records(flat: Flat, path: str) -> tuple[tuple[PartRecord, ...], tuple[NetRecord, ...]]:
    """Raises InputError for a circuit without parts or connections, and for too many."""
    nets: dict[str, list[Node]] = {}
    for part in flat.parts:
        for number, name, net in part.pins:
            nets.setdefault(net, []).append(Node(part.ref, number, name, source=Source(path, part.line)))
    if not flat.parts:
        raise InputError(path, "the netlist holds no parts", remedy=_REMEDY)
    if not any(len(nodes) > 1 for nodes in nets.values()):
        raise InputError(path, "the netlist connects nothing: no node has two pins", remedy=_REMEDY)
    most = max(map(len, nets.values())), limits.PINS_PER_NET, "pins of one node"
    for count, limit, what in ((len(flat.parts), limits.PARTS, "parts"), (len(nets), limits.NETS, "nodes"), most):
        if count > limit:
            raise InputError(path, f"the file holds too many {what}", expected=f"at most {limit:,}")
    return tuple(_record(part, path) for part in flat.parts), tuple(
        NetRecord("" if _AUTOMATIC.fullmatch(name) else name, name, tuple(nodes), nodes[0].source) for name, nodes in nets.items()
    )


def _record(part: Part, path: str) -> PartRecord:
    return PartRecord(
        part.ref, part.facts, Source(path, part.line), tuple(SymbolPin(number, name) for number, name, _ in part.pins)
    )


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
