"""What an EDIF file holds: libraries of cells, their views with ports, instances and nets, and the design at the top.

`Library` is the sink of `edif_text.walk`. Items are turned into the records below as they close, so that a big file never stands
in memory as a tree. References stay names here: a file may use a cell before it defines it.
"""

from __future__ import annotations

from collections.abc import Callable
from decimal import Decimal
from sys import intern

from checker import limits
from checker.errors import InputError
from checker.readers import edif_names
from checker.readers.bom_headings import attribute, heading_key
from checker.readers.edif_names import Named, Names, Place, words
from checker.readers.edif_records import Cell, Instance, Join, Port, Reference, View
from checker.readers.netlist_form import Form, form

# container -> containers inside it
_INSIDE = {
    "edif": {"library", "external"},
    "library": {"cell"},
    "external": {"cell"},
    "cell": {"view"},
    "view": {"interface", "contents"},
    "contents": {"page"},
}
_NAMED = frozenset({"edif", "library", "external", "cell", "view", "page"})
# forms that say nothing about the circuit
_SILENT = frozenset(
    "status comment userdata ediflevel technology property keywordmap designator symbol protectionframe arrayrelatedinfo parameter "
    "permutable simulate timing weakjoined mustjoin figure boundingbox commentgraphics pagesize annotate portimplementation "
    "display nettype criticality origin".split()
)
_OF_NET = _SILENT | {"rename", "array", "joined", "net", "instance", "netdelay", "viewref", "cellref", "name"}
_PIN_NUMBERS = frozenset({"pinnumber", "pinno", "pin", "no", "num", "packagepin", "padno", "pad"})


class Library:
    """All of one file. Raises InputError for forms that cannot be used."""

    def __init__(self, path: str):
        self.path = path
        self.place = Place(path)
        self.cells: dict[str, Names[Cell]] = {}  # folded identifier of a library -> its cells
        self.tops: list[tuple[str, str, str, int, str]] = []  # cell, library, view, line, name of each design
        self.skipped: dict[str, int] = {}
        self._open: list[tuple[str, int, bool]] = []  # keyword, line, whether its name is known
        self._library = self._shown = ""
        self._scale: dict[str, Decimal] = {}
        self._cell = Cell(Named("", ""), "", 0)
        self._view = View(Named("", ""), 0)
        self._page = ""

    def enter(self, keyword: str, line: int) -> bool:
        """Whether the form is a container."""
        if not self._open:
            if keyword != "edif":
                raise InputError(self.path, "the file is not EDIF", line=line, found=keyword, expected="(edif")
        elif keyword not in _INSIDE.get(self._open[-1][0], ()):
            return False
        elif not self._open[-1][2]:
            raise InputError(
                self.path, f"a form `{self._open[-1][0]}` does not begin with its name", line=line, found=f"({keyword}"
            )
        self._open.append((keyword, line, keyword not in _NAMED))
        return True

    def leave(self) -> None:
        """The container is complete."""
        keyword, line, named = self._open.pop()
        if not named:
            raise InputError(self.path, f"a form `{keyword}` has no name", line=line, expected=f"({keyword} NAME ...)")
        if keyword == "page":
            self._page = ""

    def item(self, item: str | Form) -> None:
        """One item of the container."""
        keyword, line, named = self._open[-1]
        if not named:
            self._open[-1] = keyword, line, True
            name = self.place.named(item, item if isinstance(item, Form) else form(line, keyword, item), f"a form `{keyword}`")
            self._begin(keyword, name, line)
        elif isinstance(item, str):
            raise InputError(self.path, f"a word stands alone in a form `{keyword}`", line=line, found=item, expected="forms")
        else:
            take = _TAKEN.get((keyword if keyword != "page" else "contents", item.keyword))
            if take is not None:
                take(self, item)
            elif item.keyword not in _SILENT:
                self.skipped[item.keyword] = self.skipped.get(item.keyword, 0) + 1

    def _begin(self, keyword: str, named: Named, line: int) -> None:
        """A container whose name is known now."""
        if keyword in ("library", "external"):
            self._library, self._shown = named.ident.lower(), named.text
            self._scale = {}
            self.cells.setdefault(self._library, Names())
        elif keyword == "cell":
            self._cell = Cell(named, self._shown, line)
            if not self.cells[self._library].add(named.ident, self._cell):
                raise self._twice("a cell", named, line)
        elif keyword == "view":
            self._view = View(named, line)
            if not self._cell.views.add(named.ident, self._view):
                raise self._twice("a view", named, line)
        elif keyword == "page":
            self._page = named.ident

    def _twice(self, what: str, named: Named, line: int) -> InputError:
        return InputError(self.path, f"{what} is given twice", line=line, found=named.text, remedy="Export the file again, whole.")

    # --- forms of the file, a library, a cell

    def _version(self, item: Form) -> None:
        if item[1:2] != ["2"]:
            raise self.place.wrong("the version of EDIF is not known", item, "2 0 0")

    def _level(self, item: Form) -> None:
        level = item.said("keywordlevel")
        if level not in ("", "0") or len(item.forms()) > 1:
            raise self.place.wrong("the file defines keywords of its own", item, "(keywordMap (keywordLevel 0))")

    def _design(self, item: Form) -> None:
        named = self.place.named(item[1] if len(item) > 1 else "", item, "a design")
        cell, library, view = self._cell_named(item)
        self.tops.append((cell, library, view, item.line, named.text))

    def _technology(self, item: Form) -> None:
        self._scale = dict(edif_names.scales(item))

    def _kind(self, item: Form) -> None:
        self._cell.kind = item.text.lower()

    def _cell_property(self, item: Form) -> None:
        self._cell.properties.append(self._property(item))

    def _property(self, item: Form) -> Form:
        """`(property (name NAME) (value TEXT))`, as facts are drafted from."""
        name = self.place.named(item[1] if len(item) > 1 else "", item, "a property").text
        return form(
            item.line, "property", form(item.line, "name", name), form(item.line, "value", edif_names.value(item, self._scale))
        )

    def _cell_named(self, item: Form) -> tuple[str, str, str]:
        """(cell, library, view) of a form with `viewRef` or `cellRef` in it; the library where none is named is the own one."""
        seen = item.child("viewref") or next(item.nested("viewlist", "viewref"), None)
        cell = (seen or item).child("cellref")
        if cell is None:
            raise self.place.wrong("a form does not say which cell it means", item, "(cellRef CELL (libraryRef LIBRARY))")
        library = cell.child("libraryref")
        view = self.place.member(seen[1], seen)[0] if seen is not None and len(seen) > 1 else ""
        home = self.place.member(library[1], library)[0].lower() if library is not None and len(library) > 1 else self._library
        return self.place.member(cell[1] if len(cell) > 1 else "", cell)[0], home, view

    # --- forms of an interface

    def _port(self, item: Form) -> Port:
        named = self.place.named(item[1] if len(item) > 1 else "", item, "a port")
        port = self._view.port(named)
        if port is None:
            raise self._twice("a port", named, item.line)
        port.number, port.direction = self._number(item), intern(item.said("direction").lower())
        return port

    def _number(self, item: Form) -> str:
        """The number of the pin that a port is: its designator, else a property that says so."""
        designator = item.child("designator")
        if designator is not None and (number := words(designator).strip()):
            return self._bounded(number, "the number of a pin", item)
        for said in map(self._property, item.children("property")):
            if heading_key(said.said("name")) in _PIN_NUMBERS and said.said("value").strip():
                return self._bounded(said.said("value").strip(), "the number of a pin", item)
        return ""

    def _bounded(self, text: str, what: str, item: Form) -> str:
        if len(text) > limits.NAME:
            raise InputError(
                self.path, f"{what} is too long", line=item.line, found=text, expected=f"at most {limits.NAME:,} characters"
            )
        return intern(text)

    def _bundle(self, item: Form) -> None:
        ident = self.place.named(item[1] if len(item) > 1 else "", item, "a bundle of ports").ident
        self._view.bundles[ident.lower()] = [self._port(port).named.ident for port in item.nested("listofports", "port")]

    def _joined(self, item: Form) -> None:
        self._view.joined.append(Join(Named("", ""), item.line, self._sides(item)))

    # --- forms of contents

    def _instance(self, item: Form) -> None:
        named = self.place.named(item[1] if len(item) > 1 else "", item, "an instance")
        cell, library, view = self._cell_named(item)
        made = Instance(named, item.line, cell, library, view)
        made.properties = [self._property(said) for said in item.children("property")]
        for said in item.children("portinstance"):
            if len(said) > 1 and (number := self._number(said)):
                port, index = self.place.member(said[1], said)
                made.numbers[port.lower(), index] = number
        designator = item.child("designator")
        made.designator = words(designator).strip() if designator is not None else ""
        if not made.designator:
            texts = (said.said("value").strip() for said in made.properties if attribute(said.said("name")) == "ref")
            made.designator = next(filter(None, texts), "")
        if made.designator.endswith("?"):  # not annotated
            made.designator = ""
        self._bounded(made.designator, "the reference of a part", item)
        if not self._view.instances.add(self._on_page(named.ident), made):
            raise self._twice("an instance", named, item.line)

    def _net(self, item: Form) -> Join:
        named = self.place.named(item[1] if len(item) > 1 else "", item, "a net")
        for inner in item.forms():
            if inner.keyword not in _OF_NET:  # a misspelt `joined` would lose a connection without a word
                raise self.place.wrong("a net holds a form that is not known there", inner, "(joined (portRef ...))")
        made = Join(named, item.line, [side for joined in item.children("joined") for side in self._sides(joined)], self._page)
        for inner in item.children("net"):
            made.sides += self._net(inner).sides
            self._view.nets.pop()
        self._view.nets.append(made)
        return made

    def _net_bundle(self, item: Form) -> None:
        """Nets side by side, each its own; what the bundle joins is joined net by net."""
        nets = [self._net(net) for net in item.nested("listofnets", "net")]
        ends = [side for joined in item.children("joined") for side in self._sides(joined)]
        if nets and ends:
            first = [net.sides[0] if net.sides else [] for net in nets]
            if not all(first):
                raise self.place.wrong("a bundle holds a net that joins nothing", item, "nets with ports")
            whole = [reference for side in first for reference in side]
            self._view.nets.append(Join(Named("", ""), item.line, [whole, *ends], self._page))

    def _sides(self, joined: Form) -> list[list[Reference]]:
        """What a form `joined` connects."""
        sides = []
        for item in joined.forms():
            if item.keyword in ("portref", "globalportref"):
                sides.append([self._reference(item)])
            elif item.keyword == "portlist":
                sides.append([self._reference(said) for said in item.children("portref")])
            elif item.keyword not in _SILENT:
                raise self.place.wrong("a net joins what is no port", item, "(portRef PORT (instanceRef INSTANCE))")
        return [side for side in sides if side]

    def _reference(self, item: Form) -> Reference:
        port, index = self.place.member(item[1] if len(item) > 1 else "", item)
        inner = item
        while (outer := inner.child("portref")) is not None:  # a port of a bundle
            inner = outer
        found = inner.child("instanceref")
        if found is None:
            return Reference(intern(port), index, "*" if item.keyword == "globalportref" else "", (), item.line)
        if found.child("instanceref") is not None or len(found) < 2:
            raise self.place.wrong("a net joins a port deep inside an instance", item, "a port of the instance itself")
        instance, member = self.place.member(found[1], found)
        return Reference(intern(port), index, intern(self._on_page(instance)), member, item.line)

    def _on_page(self, ident: str) -> str:
        """The identifier of an instance, which counts on its page only."""
        return f"{self._page}\n{ident}" if self._page else ident

    def _connector(self, item: Form) -> None:
        named = self.place.named(item[1] if len(item) > 1 else "", item, "a connector of pages")
        self._view.pages.add(named.ident, Port(named, len(self._view.pages)))


_TAKEN: dict[tuple[str, str], Callable[[Library, Form], object]] = {
    ("edif", "edifversion"): Library._version,
    ("edif", "keywordmap"): Library._level,
    ("edif", "design"): Library._design,
    ("library", "technology"): Library._technology,
    ("external", "technology"): Library._technology,
    ("cell", "celltype"): Library._kind,
    ("cell", "property"): Library._cell_property,
    ("view", "property"): Library._cell_property,
    ("interface", "property"): Library._cell_property,
    ("view", "viewtype"): lambda library, item: None,
    ("interface", "port"): Library._port,
    ("interface", "portbundle"): Library._bundle,
    ("interface", "joined"): Library._joined,
    ("contents", "offpageconnector"): Library._connector,
    ("contents", "instance"): Library._instance,
    ("contents", "net"): Library._net,
    ("contents", "netbundle"): Library._net_bundle,
}
