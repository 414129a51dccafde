"""What the netlist cannot say, as the user declares it; every value keeps its place in the file."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.model.candidate import Mark, Winding
from checker.model.fact import NOWHERE, Fact, Source


@dataclass(frozen=True, slots=True)
class Range:
    """A closed interval in `unit` with form "dc", "rms", "peak" or ""; low == high for a single figure."""

    low: float
    high: float
    unit: str
    form: str = ""
    source: Source = NOWHERE
    text: str = ""


@dataclass(frozen=True, slots=True)
class Output:
    """A declared output or rail: net -> voltage to `return_net` ("" when not said)."""

    net: str
    voltage: Range
    return_net: str = ""
    current: Range | None = None


@dataclass(frozen=True, slots=True)
class Supply:
    """kind: "mains" or "dc". voltage: rated range, r.m.s. for mains. origin (d.c. only): isolated, mains, unknown.

    protection_class: "I", "II", "III" or "" when not declared. connection: pluggable-A, pluggable-B, permanent or "".
    """

    name: str
    kind: str
    voltage: Range
    origin: str = ""
    phases: int | None = None
    tolerance: Range | None = None
    frequency: Range | None = None
    protection_class: str = ""
    overvoltage_category: str = ""
    connection: str = ""
    outputs: tuple[Output, ...] = ()
    power: Range | None = None
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class DeclaredBarrier:
    """What is wanted between two named domains; grade "" and voltages None when not said."""

    between: tuple[str, str]
    grade: str = ""
    rms: Range | None = None
    peak: Range | None = None
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class DeclaredDomain:
    """A name with seed nets. side: primary, secondary, earth, floating or ""; accessible None when not said."""

    name: str
    nets: tuple[str, ...]
    side: str = ""
    accessible: bool | None = None
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class DeclaredPart:
    """What is declared about one reference. facts carry kind, ratings, attributes with Trust.DECLARED."""

    ref: str
    facts: tuple[Fact, ...] = ()
    marks: tuple[Mark, ...] = ()
    windings: tuple[Winding, ...] = ()
    core: str = ""
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class Conductor:
    """A conductor outside the netlist (heatsink, panel, core): what it touches, as `Q1.2`, a reference or a net name."""

    name: str
    touches: tuple[str, ...]
    accessible: bool | None = None
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class Variant:
    """An assembly variant: references fitted and left out relative to the base."""

    name: str
    fitted: tuple[str, ...] = ()
    not_fitted: tuple[str, ...] = ()
    source: Source = NOWHERE


@dataclass(frozen=True, slots=True)
class Declaration:
    """Everything optional. no_supply: `supply: none`, the user says there is no hazardous source on this board.

    environment: pollution_degree, altitude (m), material_group, ambient (degC) as facts, those declared only.
    """

    path: str = ""
    supplies: tuple[Supply, ...] = ()
    no_supply: Source | None = None
    environment: Mapping[str, Fact] = field(default_factory=dict)
    rulesets: tuple[str, ...] = ()
    impulse: Range | None = None
    barriers: tuple[DeclaredBarrier, ...] = ()
    domains: Mapping[str, DeclaredDomain] = field(default_factory=dict)
    rails: tuple[Output, ...] = ()
    parts: Mapping[str, DeclaredPart] = field(default_factory=dict)
    conductors: tuple[Conductor, ...] = ()
    unreachable: Mapping[str, Source] = field(default_factory=dict)
    variants: Mapping[str, Variant] = field(default_factory=dict)
    concessions: str = ""

    @property
    def outputs(self) -> tuple[Output, ...]:
        """Declared outputs of every supply, then declared rails."""
        return tuple(output for supply in self.supplies for output in supply.outputs) + self.rails
