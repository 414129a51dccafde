"""The records of an EDIF file: cells, their views with ports, instances and nets. References in them are names."""

from __future__ import annotations

from dataclasses import dataclass, field

from checker.readers.edif_names import Index, Named, Names
from checker.readers.netlist_form import Form


@dataclass(slots=True, eq=False)
class Port:
    """offset: of its first member among the members of all ports of its view. numbers: of its pins, "" not said."""

    named: Named
    offset: int
    number: str = ""
    numbers: dict[Index, str] = field(default_factory=dict)
    direction: str = ""


@dataclass(slots=True, eq=False)
class Reference:
    """A port of an instance, of an instance's member, or with instance "" of the cell itself; index () for all members."""

    port: str
    index: Index
    instance: str
    member: Index
    line: int


@dataclass(slots=True, eq=False)
class Join:
    """What one net connects. sides: lists of references as wide as the net is; the n-th members of all are one net."""

    named: Named
    line: int
    sides: list[list[Reference]] = field(default_factory=list)
    page: str = ""


@dataclass(slots=True, eq=False)
class Instance:
    """A cell used once, or an array of it. numbers: (port, member) -> number of the pin here."""

    named: Named
    line: int
    cell: str = ""
    library: str = ""
    view: str = ""
    designator: str = ""
    numbers: dict[tuple[str, Index], str] = field(default_factory=dict)
    properties: list[Form] = field(default_factory=list)


@dataclass(slots=True, eq=False)
class View:
    """A cell as one view shows it. width: members of all its ports. bundles: names of several ports together.

    pages: connectors that carry a net from page to page. joined: ports that are one inside.
    """

    named: Named
    line: int
    ports: Names[Port] = field(default_factory=Names)
    width: int = 0
    bundles: dict[str, list[str]] = field(default_factory=dict)
    pages: Names[Port] = field(default_factory=Names)
    joined: list[Join] = field(default_factory=list)
    instances: Names[Instance] = field(default_factory=Names)
    nets: list[Join] = field(default_factory=list)

    def port(self, named: Named) -> Port | None:
        """A further port, None when there is one of that name."""
        made = Port(named, self.width)
        if not self.ports.add(named.ident, made):
            return None
        self.width += named.width
        return made


@dataclass(slots=True, eq=False)
class Cell:
    """kind: generic, tie or ripper. defined: False for one that is only referred to."""

    named: Named
    library: str
    line: int
    kind: str = "generic"
    views: Names[View] = field(default_factory=Names)
    properties: list[Form] = field(default_factory=list)
    defined: bool = True

    def view(self, name: str) -> View | None:
        """The view of that name; the only one, or the first with contents, where none is named."""
        if name:
            return self.views.find(name)
        return next((view for view in self.views if len(view.instances)), next(iter(self.views), None))
