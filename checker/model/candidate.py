"""What a part is: kind, value, ratings and marks of each choice the BOM allows."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.model.fact import Fact

# The closed list of kinds. The first group is made to insulate between its sides.
INSULATING = frozenset(
    {
        "transformer",
        "gate-drive-transformer",
        "current-transformer",
        "optocoupler",
        "digital-isolator",
        "isolated-module",
        "relay",
        "solid-state-relay",
        "isolated-amplifier",
        "isolated-driver",
        "hall-sensor",
    }
)
ORDINARY = frozenset(
    {
        "resistor",
        "capacitor",
        "inductor",
        "ferrite",
        "common-mode-choke",
        "filter",
        "diode",
        "zener",
        "tvs",
        "bridge",
        "led",
        "bipolar",
        "mosfet",
        "igbt",
        "jfet",
        "triac",
        "thyristor",
        "varistor",
        "gas-tube",
        "spark-gap",
        "thermistor",
        "fuse",
        "resettable-fuse",
        "switch",
        "jumper",
        "net-tie",
        "crystal",
        "network",
        "battery",
        "potentiometer",
        "motor",
        "lamp",
        "regulator",
        "controller",
        "shunt-reference",
        "module",
        "ic",
        "buzzer",
        "antenna",
        "sensor",
        "display",
    }
)
CONNECTORS = frozenset({"connector", "inlet", "test-point"})
MECHANICAL = frozenset({"hole", "fiducial", "logo", "heatsink", "shield"})
UNKNOWN = "unknown"
KINDS = INSULATING | ORDINARY | CONNECTORS | MECHANICAL | {UNKNOWN}


@dataclass(frozen=True, slots=True)
class Mark:
    """A class or approval: `name` is normal form (`Y1`, `X2`, `IEC 60747-5-5`). fact says where it was read.

    record: number or text of a licence, "" when none was supplied. valid_until: ISO date or "".
    """

    name: str
    fact: Fact
    record: str = ""
    valid_until: str = ""


@dataclass(frozen=True, slots=True)
class Winding:
    """pins: in order, first dotted where known; three or more pins are taps. turns: one number per section, () unknown."""

    pins: tuple[str, ...]
    turns: tuple[float, ...] = ()
    name: str = ""


@dataclass(frozen=True, slots=True)
class Disagreement:
    """Two statements about one attribute that cannot both be true. factor: ratio of the two values, 0 for text."""

    attribute: str
    kept: Fact
    other: Fact
    factor: float = 0.0


@dataclass(frozen=True, slots=True)
class Candidate:
    """One choice of part. value in `unit` (ohm, F, H, A for fuses, V for zeners, Hz for crystals), None when not readable.

    ratings: by the names after `rating:` in model.fact.ATTRIBUTES, each a Fact with a float and its unit and form.
    attributes: technology, material_group, size, pole count and the like, as text facts.
    sure: False when the kind rests on a reference letter or one weak word. listed: the type was recognised by family.
    because: one sentence, why this kind.
    """

    kind: str
    label: str = ""
    sure: bool = True
    listed: bool = False
    because: str = ""
    value: Fact | None = None
    tolerance: Fact | None = None
    ratings: Mapping[str, Fact] = field(default_factory=dict)
    attributes: Mapping[str, Fact] = field(default_factory=dict)
    marks: tuple[Mark, ...] = ()
    windings: tuple[Winding, ...] = ()
    maker: str = ""
    type: str = ""
    disagreements: tuple[Disagreement, ...] = ()

    def marked(self, *names: str) -> Mark | None:
        """The first mark with one of these names, or None."""
        return next((mark for mark in self.marks if mark.name in names), None)

    @property
    def insulating(self) -> bool:
        """Whether parts of this kind are made to insulate between their sides."""
        return self.kind in INSULATING


# reference -> its candidates, first choice first; every part of the design has at least one
Identity = Mapping[str, tuple[Candidate, ...]]
