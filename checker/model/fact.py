"""One statement from one place, and where it was made."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum


@dataclass(frozen=True, slots=True)
class Source:
    """A place in an input: the path as the user named it, line and column (1-based, 0 unknown), sheet cell or ""."""

    path: str
    line: int = 0
    column: int = 0
    cell: str = ""

    def __str__(self) -> str:
        return f"{self.path}:{self.line}" if self.line else self.path


NOWHERE = Source("")


class Trust(IntEnum):
    """How far a fact is believed when two disagree; the higher wins, the other stays visible."""

    GUESSED = 0  # read out of a size, a prefix or a bare number
    CATALOGUE = 1  # the generic-type catalogue of the program
    NETLIST = 2  # text of the schematic
    BOM = 3  # text of the bill of materials
    PARTS_FILE = 4  # a parts file, whoever wrote it names the data sheet
    DECLARED = 5  # the declaration


@dataclass(frozen=True, slots=True)
class Fact:
    """attribute = value, as one place says it.

    attribute: one of the names in `ATTRIBUTES`, or `field:<heading>` for a column or field with no meaning of its own.
    value: text as written, or a float in SI (V, A, ohm, F, H, W, mm for distances, degC), or a bool.
    unit: SI symbol of a float, else "". form: "dc", "rms", "peak" or "" when not said.
    text: the words the value was read from, when they differ from it.
    """

    attribute: str
    value: str | float | bool
    source: Source = NOWHERE
    trust: Trust = Trust.NETLIST
    unit: str = ""
    form: str = ""
    text: str = ""


# Attributes that readers set on a part or a BOM row. Identify derives kind, value, ratings and marks from them.
ATTRIBUTES = (
    "value",  # the value text of the symbol or the BOM row
    "footprint",  # library:footprint
    "library",  # library of the symbol
    "symbol",  # name of the symbol in its library
    "description",  # free text
    "datasheet",  # a link; never used for marks or ratings
    "type",  # manufacturer's part number
    "maker",
    "distributor",  # a distributor's number; never used for ratings
    "fitted",  # bool
    "in_bom",  # bool, False: excluded from the BOM on purpose
    "quantity",  # float
    "kind",  # declared kind (parts file, declaration, BOM column)
    "mark",  # safety class or approval text (column Class, parts file)
    "windings",
    "turns",
    "sheet",  # path of the sheet the part is drawn on
    "rating:voltage",
    "rating:current",
    "rating:power",
    "rating:temperature",
    "rating:isolation_working",
    "rating:isolation_test",
    "rating:impulse",
    "rating:clearance",
    "rating:creepage",
    "rating:through_insulation",
    "rating:breaking_capacity",
    "rating:melting_integral",
    "rating:surge_current",
    "tolerance",
    "technology",
    "material_group",
)
