"""The joined design: parts with pins on nets, every fact kept, nothing yet concluded from text."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.model.fact import NOWHERE, Fact, Source
from checker.model.reading import Note


@dataclass(frozen=True, slots=True)
class Pin:
    """number and name are text, compared exactly. net is None when the pin is on no net. usual: the name follows from the usual
    numbering of such parts, nobody says it."""

    number: str
    name: str = ""
    type: str = ""
    net: str | None = None
    usual: bool = False


@dataclass(frozen=True, slots=True)
class Part:
    """One reference. facts: all statements about the first choice; alternates: statements of each further choice.

    ref is unique in a Design; a duplicate reference of the file becomes `J2 (2)`, with both noted.
    fitted: False when the chosen variant leaves the part out. sources: every place that names the part.
    """

    ref: str
    pins: tuple[Pin, ...]
    facts: tuple[Fact, ...]
    sources: tuple[Source, ...]
    alternates: tuple[tuple[Fact, ...], ...] = ()
    units: tuple[tuple[str, tuple[str, ...]], ...] = ()
    fitted: bool = True
    _nets: tuple[str, ...] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "_nets", tuple(dict.fromkeys(pin.net for pin in self.pins if pin.net is not None)))

    def say(self, attribute: str) -> Fact | None:
        """The most trusted fact of that attribute; among equals the first."""
        found = None
        for fact in self.facts:
            if fact.attribute == attribute and (found is None or fact.trust > found.trust):
                found = fact
        return found

    def text(self, attribute: str) -> str:
        """The most trusted text of that attribute, or ""."""
        fact = self.say(attribute)
        return "" if fact is None else str(fact.value)

    def nets(self) -> tuple[str, ...]:
        """The nets its pins are on, each once, in pin order."""
        return self._nets

    @property
    def fact(self) -> Fact:
        """That this part stands in the design, as evidence with its place."""
        return Fact("part", self.ref, self.sources[0] if self.sources else NOWHERE)


@dataclass(frozen=True, slots=True)
class Net:
    """pins: (reference, pin number). automatic: the name was made by a program (or by us), not by a person."""

    name: str
    pins: tuple[tuple[str, str], ...]
    source: Source
    automatic: bool = False
    classes: tuple[str, ...] = ()

    @property
    def fact(self) -> Fact:
        """That this net stands in the design, as evidence with its place."""
        return Fact("net", self.name, self.source)


@dataclass(frozen=True, slots=True)
class Pad:
    """Copper of one pin on the board, as in `PadRecord`, joined: ref as in the design, net as in the design or None."""

    ref: str
    pin: str
    net: str | None
    x: float
    y: float
    width: float
    height: float
    turned: float = 0.0
    drill: float = 0.0
    side: str = "both"
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class Input:
    """One file the run rests on. role: netlist, bom, parts, declaration, project, ruleset, report."""

    role: str
    path: str
    sha256: str


@dataclass(frozen=True, slots=True)
class Design:
    """name: as declared in a project file, else from the netlist's file name. Mappings are in file order."""

    name: str
    parts: Mapping[str, Part]
    nets: Mapping[str, Net]
    notes: tuple[Note, ...] = ()
    inputs: tuple[Input, ...] = ()
    variant: str | None = None
    has_bom: bool = False
    variants: tuple[str, ...] = field(default=())
    pads: tuple[Pad, ...] = ()
