"""What every reader returns: a partial set of facts about one design, in file order."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from checker.files import Blob
from checker.model.fact import NOWHERE, Fact, Source


@dataclass(frozen=True, slots=True)
class Note:
    """Something a stage noticed that is no verdict; rules ask for the kinds they judge.

    kind: a closed word, see `NOTE_KINDS`. parts, nets: what it is about. sources: the places that show it.
    """

    kind: str
    text: str
    sources: tuple[Source, ...] = ()
    parts: tuple[str, ...] = ()
    nets: tuple[str, ...] = ()


NOTE_KINDS = (
    "encoding",  # the file was not plain UTF-8
    "nets-merged",  # net elements of one name were merged
    "pin-on-two-nets",  # one pin stands on two nets; they were joined
    "duplicate-reference",  # two parts with one reference
    "part-not-listed",  # a net names a part that the parts section lacks
    "no-symbol",  # a part whose symbol is not in the file
    "skipped",  # sections, records or rows that were not understood
    "confusable-reference",  # two references that look alike
    "not-in-netlist",
    "not-in-bom",
    "case-differs",
    "value-differs",
    "quantity-differs",
    "reference-unread",
    "duplicate-row",  # two BOM rows name one part and do not agree
    "fitted-differs",
    "empty",
    "unused",  # a declared or listed thing that matches nothing in the design
)


@dataclass(frozen=True, slots=True)
class Node:
    """One pin of one part on a net; name and type are "" when the file does not say."""

    ref: str
    pin: str
    name: str = ""
    type: str = ""
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class NetRecord:
    """A net element. name "" means the file gave none: `label` is then unique and never merged by name."""

    name: str
    label: str
    nodes: tuple[Node, ...]
    source: Source
    classes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class PadRecord:
    """A pad or hole of a layout file: where the copper of one pin lies. Distances in mm, angles in degrees anticlockwise.

    ref, pin: "" for copper that belongs to no part (a via, a hole). label: that of the net in the same reading, "" for none.
    width, height: of the copper before it is turned, along x and y, 0.0 where the file does not say; a round pad has both equal.
    drill: diameter of the hole, 0.0 without one. side: "top", "bottom" or "both", as the copper can be reached.
    """

    ref: str
    pin: str
    label: str
    x: float
    y: float
    width: float
    height: float
    turned: float = 0.0
    drill: float = 0.0
    side: str = "both"
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class SymbolPin:
    """A pin as the symbol library lists it, whether or not it is on a net."""

    number: str
    name: str = ""
    type: str = ""


@dataclass(frozen=True, slots=True)
class PartRecord:
    """A part element: its reference, its facts, every pin its symbol lists, and the pins of each unit where known."""

    ref: str
    facts: tuple[Fact, ...]
    source: Source
    pins: tuple[SymbolPin, ...] = ()
    units: tuple[tuple[str, tuple[str, ...]], ...] = ()


@dataclass(frozen=True, slots=True)
class Row:
    """A BOM row or parts-file entry: what it applies to and what it says.

    refs: expanded references; types: part numbers it applies to instead (parts file `match: {type}`).
    unread: text of the reference cell that could not be expanded. alternates: facts of each further choice of part
    (second manufacturer and number); the row's own `facts` are the first choice.
    table: caption or variant the row belongs to, "" for a file with one table.
    """

    refs: tuple[str, ...]
    facts: tuple[Fact, ...]
    source: Source
    types: tuple[str, ...] = ()
    alternates: tuple[tuple[Fact, ...], ...] = ()
    unread: str = ""
    table: str = ""


@dataclass(frozen=True, slots=True)
class VariantRecord:
    """An assembly variant stored in a netlist: references it fits and leaves out relative to the base."""

    name: str
    fitted: tuple[str, ...] = ()
    not_fitted: tuple[str, ...] = ()
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class Reading:
    """The facts of one file. role: `netlist`, `bom` or `parts`. form: the open format's name. pads: of a layout carrier."""

    role: str
    form: str
    path: str
    sha256: str
    parts: tuple[PartRecord, ...] = ()
    nets: tuple[NetRecord, ...] = ()
    rows: tuple[Row, ...] = ()
    variants: tuple[VariantRecord, ...] = ()
    notes: tuple[Note, ...] = ()
    title: str = ""
    pads: tuple[PadRecord, ...] = ()


@dataclass(frozen=True, slots=True)
class Reader:
    """One open format. form: its name. role: netlist, bom or parts.

    claims: whether the first 4 KiB of a file (decoded, byte-order mark and leading white space gone) are of this form;
    the suffix is never looked at. read: the whole file's Reading; raises InputError.
    """

    form: str
    role: str
    claims: Callable[[str], bool]
    read: Callable[[Blob], Reading]
