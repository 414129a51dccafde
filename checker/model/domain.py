"""Domains, what crosses between them, and what the isolation stage could not settle."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from checker.model.fact import Fact
from checker.model.separation import Separation
from checker.model.step import Step

SIDES = ("primary", "secondary", "earth", "floating")


@dataclass(frozen=True, slots=True)
class Domain:
    """Nets that are galvanically one circuit.

    side: one of SIDES, or "" while nothing tells it (boards without a known source: the sides are equals).
    earthed: bonded to protective earth. hazard: "mains", "dc" (a hazardous d.c. source) or "" when none is known.
    named: the name comes from a person (declared, or a net name a person wrote), so it may enter a fingerprint.
    accessible: as declared, None when not said. step: why these nets are one, and why this side.
    """

    name: str
    side: str
    nets: tuple[str, ...]
    parts: tuple[str, ...]
    step: Step
    earthed: bool = False
    hazard: str = ""
    named: bool = True
    accessible: bool | None = None
    evidence: tuple[Fact, ...] = ()


@dataclass(frozen=True, slots=True)
class Crossing:
    """A part whose pins lie in two domains. sides: pins per domain name, for a chain member the nets it hangs on.

    kind of crossing: "insulating" (made for it, or a candidate nobody listed), "capacitor", "limiter", "bleeder" (a resistor to
    protective earth), "ordinary".
    chain: the references in series this part belongs to, itself alone when it spans the barrier by itself.
    listed: False for an insulating part that only the circuit shows to be one. step: the evidence for the crossing.
    """

    part: str
    how: str
    between: tuple[str, str]
    sides: tuple[tuple[str, ...], tuple[str, ...]]
    chain: tuple[str, ...]
    listed: bool
    step: Step


@dataclass(frozen=True, slots=True)
class Short:
    """Ordinary parts that defeat insulating parts: take any one of `chain` out and `parts` insulate again.

    nets: the shortest conducting path between the two sides, net names in order; a single net that is on both sides
    of `parts` gives chain (). faulty: the sides differ in evidence or two or more insulating parts come apart.
    """

    chain: tuple[str, ...]
    parts: tuple[str, ...]
    nets: tuple[str, ...]
    path: tuple[str, ...]
    faulty: bool
    step: Step


@dataclass(frozen=True, slots=True)
class Question:
    """One thing the netlist does not say. about: "isolator", "hidden-isolators", "side".

    fact and supply_as fill `missing` of the open verdict; then: (answer, outcome) pairs.
    """

    about: str
    text: str
    parts: tuple[str, ...]
    nets: tuple[str, ...]
    fact: str
    supply_as: str
    then: tuple[tuple[str, str], ...]
    step: Step


@dataclass(frozen=True, slots=True)
class Isolation:
    """Everything the isolation stage found.

    domain_of: net -> domain name; nets of a chain link and nets with pins of fewer than two parts are absent.
    links: nets inside chains. inactive: insulating parts with both sides in one domain that no short explains.
    idle: not-fitted parts that would cross if they were fitted.
    """

    domains: Mapping[str, Domain]
    domain_of: Mapping[str, str]
    crossings: tuple[Crossing, ...] = ()
    separations: tuple[Separation, ...] = ()
    shorts: tuple[Short, ...] = ()
    questions: tuple[Question, ...] = ()
    links: tuple[str, ...] = ()
    inactive: tuple[str, ...] = ()
    idle: tuple[Crossing, ...] = ()

    def across(self) -> dict[tuple[str, str], list[Crossing]]:
        """Pair of domain names -> what crosses between them."""
        found: dict[tuple[str, str], list[Crossing]] = {}
        for crossing in self.crossings:
            found.setdefault(crossing.between, []).append(crossing)
        return found

    def crossing(self, part: str) -> tuple[Crossing, ...]:
        """Every crossing of that part."""
        return tuple(crossing for crossing in self.crossings if crossing.part == part)
