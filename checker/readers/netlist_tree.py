"""What the S-expression and the XML netlist share: from a neutral tree to a Reading.

Both writings hold the same tree. A reader turns each item of a section (a part, a net, a library symbol) into a `Form`
and hands it over as soon as it is complete, so that the tree of a big file never stands in memory as a whole.
The version letter is never asked; what is there is read.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace
from sys import intern

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.model.fact import Fact, Source
from checker.model.reading import NetRecord, Node, Note, PartRecord, Reading, SymbolPin, VariantRecord
from checker.neutral import neutral
from checker.readers.netlist_form import Form, identifier
from checker.readers.netlist_part import Drafted, draft
from checker.readers.sniff import WHITE

# Sections that are understood or known to hold nothing for us; every other one is counted as skipped.
_KNOWN = frozenset({"version", "design", "components", "groups", "variants", "libparts", "libraries", "nets"})
_NO_CONNECT = "no_connect"
_SHOWN = 5  # how many names a note lists


class Netlist:
    """Collects the items of one file in file order; `reading` checks the whole and returns it."""

    def __init__(self, path: str):
        self.path = path
        self._sections: set[str] = set()
        self._skipped = 0
        self._skipped_words: dict[str, None] = {}
        self._parts: list[Drafted] = []
        self._nets: list[tuple[str, str, tuple[Node, ...], Source, tuple[str, ...]]] = []
        self._symbols: dict[tuple[str, str], tuple[tuple[SymbolPin, ...], str, int]] = {}
        self._aliases: dict[tuple[str, str], tuple[str, str]] = {}
        self._variants: dict[str, tuple[list[str], list[str], Source]] = {}
        self._overridden: list[Drafted] = []
        self._titles: dict[str, str] = {}

    def open(self, section: str) -> None:
        """A section begins; an unknown one is counted once, whatever it holds."""
        self._sections.add(section)
        if section not in _KNOWN:
            self._skip(section)

    def _skip(self, word: str) -> None:
        self._skipped += 1
        if len(self._skipped_words) < _SHOWN:
            self._skipped_words[word] = None

    def take(self, section: str, form: Form) -> None:
        """One complete item of a section. Raises InputError for a part or net that cannot be used."""
        match section, form.keyword:
            case "components", "comp":
                self._take_part(form)
            case "nets", "net":
                self._take_net(form)
            case "libparts", "libpart":
                self._take_symbol(form)
            case "variants", "variant":
                self._take_variant(form)
            case "design", "sheet":
                self._take_sheet(form)
            case (("components" | "nets" | "libparts" | "variants"), _):
                self._skip(form.keyword)

    def _take_part(self, form: Form) -> None:
        part = draft(form, self.path)
        self._parts.append(part)
        if len(self._parts) > limits.PARTS:
            raise _beyond(self.path, form.line, "parts", limits.PARTS)
        if part.overrides:
            self._overridden.append(part)
        for name, fits in part.variants:
            fitted, not_fitted, _ = self._variant(name, form.line)
            if fits is not None:
                (fitted if fits else not_fitted).append(part.ref)

    def _take_net(self, form: Form) -> None:
        nodes: dict[tuple[str, str], Node] = {}
        for item in form.children("node"):
            ref = identifier(item, "ref", self.path, "the reference of a net's pin")
            pin = identifier(item, "pin", self.path, "the pin number of a net's pin")
            if not ref or not pin:
                missing = "pin number" if ref else "part reference"
                raise InputError(self.path, f"a pin of a net has no {missing}", line=item.line, expected="a ref and a pin")
            key = intern(ref), intern(pin)
            if key not in nodes:  # several pads of one number stand in the file once each
                name, kind = item.said("pinfunction"), pin_type(item.said("pintype"))
                nodes[key] = Node(*key, intern(name if name != "~" else ""), kind, Source(self.path, item.line))
        if len(nodes) > limits.PINS_PER_NET:
            raise _beyond(self.path, form.line, "pins of one net", limits.PINS_PER_NET)
        if len(self._nets) >= limits.NETS:
            raise _beyond(self.path, form.line, "nets", limits.NETS)
        name = identifier(form, "name", self.path, "the name of a net")
        code = identifier(form, "code", self.path, "the code of a net")
        classes = tuple(intern(word.strip()) for word in form.said("class").split(",") if word.strip())
        name = "" if name == "~" or not name.strip(WHITE) else name
        self._nets.append((name, code, tuple(nodes.values()), Source(self.path, form.line), classes))

    def _take_symbol(self, form: Form) -> None:
        library = identifier(form, "lib", self.path, "the library of a symbol")
        key = library, identifier(form, "part", self.path, "the name of a symbol")
        pins: dict[str, SymbolPin] = {}
        for item in form.nested("pins", "pin"):
            number = identifier(item, "num", self.path, "the number of a symbol's pin")
            if number and number not in pins:  # several pins with one number are one node
                name = item.said("name")
                pins[number] = SymbolPin(intern(number), name if name != "~" else "", pin_type(item.said("type")))
        if len(pins) > limits.PINS_PER_PART:
            raise _beyond(self.path, form.line, "pins of one symbol", limits.PINS_PER_PART)
        self._symbols.setdefault(key, (tuple(pins.values()), form.said("description"), form.line))
        for alias in form.nested("aliases", "alias"):
            self._aliases.setdefault((library, alias.text), key)

    def _take_variant(self, form: Form) -> None:
        """A variant of the whole design. Which parts it leaves out is normally said at the parts; lists of them count too."""
        name = identifier(form, "name", self.path, "the name of a variant")
        if not name:
            return
        fitted, not_fitted, _ = self._variant(name, form.line)
        for word, found in (("fitted", fitted), ("not_fitted", not_fitted), ("dnp", not_fitted)):
            for items in form.children(word):
                found.extend(items.atoms())
                found.extend(item.text for item in items.children("ref"))

    def _variant(self, name: str, line: int) -> tuple[list[str], list[str], Source]:
        return self._variants.setdefault(name, ([], [], Source(self.path, line)))

    def _take_sheet(self, form: Form) -> None:
        for block in form.children("title_block"):
            self._titles.setdefault(form.said("name"), block.said("title"))

    def reading(self, blob: Blob, form: str, notes: Iterable[Note] = ()) -> Reading:
        """The whole file. Raises InputError when it holds no parts, no nets, or connects nothing."""
        for section in ("components", "nets"):
            if section not in self._sections:
                raise InputError(self.path, f"the netlist has no section `{section}`", remedy="Export the netlist again, whole.")
        if not self._parts:
            raise InputError(self.path, "the netlist holds no parts: the section `components` is empty")
        if not self._nets:
            raise InputError(self.path, "the netlist holds no nets: the section `nets` is empty")
        nets = tuple(self._labelled())
        if not _connects(nets):
            raise InputError(
                self.path,
                "the netlist connects nothing: no net has two pins",
                remedy="Check that the schematic is wired and annotated, and export it again.",
            )
        unknown: list[PartRecord] = []
        parts = tuple(self._record(part, unknown) for part in self._parts)
        title = self._titles.get("/", next(iter(self._titles.values()), ""))
        return Reading(
            role="netlist",
            form=form,
            path=self.path,
            sha256=blob.sha256,
            parts=parts,
            nets=nets,
            variants=tuple(
                VariantRecord(name, tuple(dict.fromkeys(fitted)), tuple(dict.fromkeys(absent)), source)
                for name, (fitted, absent, source) in self._variants.items()
            ),
            notes=(*notes, *self._notes(unknown)),
            title="" if title == "~" else title,
        )

    def _labelled(self) -> Iterator[NetRecord]:
        """Nets without a name get a label that no other net has; the names of the file are never touched."""
        taken = {name for name, *_ in self._nets}
        for number, (name, code, nodes, source, classes) in enumerate(self._nets, 1):
            label = name or f"<unnamed:{code}>"
            if not name:
                if not code or label in taken:
                    label = f"<unnamed:{code}, line {source.line}, net {number}>"
                while label in taken:
                    label += "'"
                taken.add(label)
            yield NetRecord(name, label, nodes, source, classes)

    def _record(self, part: Drafted, unknown: list[PartRecord]) -> PartRecord:
        symbol = self._symbols.get(part.symbol)
        if symbol is None and part.symbol in self._aliases:
            symbol = self._symbols[self._aliases[part.symbol]]
        record = PartRecord(part.ref, part.facts, part.source, units=part.units)
        if symbol is None:
            unknown.append(record)
            return record
        pins, description, line = symbol
        if description not in ("", "~", "-") and not part.described:
            fact = Fact("description", description, Source(self.path, line))
            return replace(record, pins=pins, facts=(*part.facts, fact))
        return replace(record, pins=pins)

    def _notes(self, unknown: list[PartRecord]) -> Iterator[Note]:
        if self._skipped:
            words = ", ".join(neutral(word, 40) or "(no keyword)" for word in self._skipped_words)
            more = ", ..." if len(self._skipped_words) == _SHOWN else ""
            text = f"{self._skipped} sections or items not understood and skipped: {words}{more}"
            yield Note("skipped", text, (Source(self.path),))
        if self._overridden:
            count = sum(part.overrides for part in self._overridden)
            text = f"{count} changes of values or fields by assembly variants are not applied"
            yield Note("skipped", text, tuple(p.source for p in self._overridden), tuple(p.ref for p in self._overridden))
        if unknown:
            refs = tuple(record.ref for record in unknown[:_SHOWN])
            more = ", ..." if len(unknown) > _SHOWN else ""
            text = f"{len(unknown)} parts have no symbol in the file: {', '.join(neutral(ref, 40) for ref in refs)}{more}"
            yield Note("no-symbol", text, tuple(record.source for record in unknown[:_SHOWN]), refs)


def pin_type(text: str) -> str:
    """The electrical type of a pin: the first word of `passive+no_connect` and the like, but `no_connect` where it is said."""
    if "+" not in text:
        return intern(text if text != "~" else "")
    words = text.split("+")
    return _NO_CONNECT if _NO_CONNECT in words else intern(words[0])


def _connects(nets: tuple[NetRecord, ...]) -> bool:
    """Whether any net has two pins; generated files write one net element per wire, so equal names count together."""
    first: dict[str, Node] = {}
    for net in nets:
        for node in net.nodes:
            other = first.setdefault(net.label, node)
            if (other.ref, other.pin) != (node.ref, node.pin):
                return True
    return False


def _beyond(path: str, line: int, what: str, limit: int) -> InputError:
    return InputError(path, f"the file holds too many {what}", line=line, expected=f"at most {limit:,}")
