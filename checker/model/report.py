"""The report as it is written: a superset of everything the program prints (design section 8, `withstand-report/1`).

Plain records; reading the JSON back gives an equal object and ignores keys it does not know.
"""

from __future__ import annotations

from typing import Any

import msgspec
from msgspec import UNSET, UnsetType

SCHEMA = "withstand-report/1"
SCHEMA_SEVERAL = "withstand-reports/1"

CAUTION = (
    "Withstand does not certify anything. It checks the files it was given against general clauses; accredited "
    "certification bodies, licensed practice and local codes decide. What is open is not proven. "
    "Measure and test before anybody touches the product."
)


class Record(msgspec.Struct, frozen=True):
    """Base of every record: frozen, named fields, all written unless UNSET."""


class Tool(Record, frozen=True, kw_only=True):
    name: str = "withstand"
    version: str = ""


class InputFile(Record, frozen=True, kw_only=True):
    role: str
    path: str
    sha256: str


class RulesetUsed(Record, frozen=True, kw_only=True):
    id: str
    edition: str
    revision: str
    sha256: str
    unverified: int


class AssumptionMade(Record, frozen=True, kw_only=True):
    key: str
    value: str
    because: str


class Figure(Record, frozen=True, kw_only=True):
    """Either value, unit and form, or text; what is UNSET is not written."""

    value: float | UnsetType = UNSET
    unit: str | UnsetType = UNSET
    form: str | UnsetType = UNSET
    text: str | UnsetType = UNSET


class Evidence(Record, frozen=True, kw_only=True):
    path: str
    line: int
    column: int
    cell: str | None
    text: str


class PartShown(Record, frozen=True, kw_only=True):
    ref: str
    kind: str
    value: float | None
    unit: str
    ratings: dict[str, Figure]
    marks: list[str]
    maker: str | None
    type: str | None
    fitted: bool
    critical: bool
    domains: list[str]
    evidence: list[Evidence]
    because: str = ""
    candidates: list[str] = []


class DomainShown(Record, frozen=True, kw_only=True):
    name: str
    side: str
    earthed: bool
    nets: list[str]
    parts: list[str]
    step: str | None
    accessible: bool | None = None


class WorkingVoltage(Record, frozen=True, kw_only=True):
    rms: float | None
    peak: float | None
    step: str | None


class BridgingPart(Record, frozen=True, kw_only=True):
    part: str
    pins: list[str]
    rms: float | None = None
    peak: float | None = None
    required: list[dict[str, Any]] = []
    provided: dict[str, Any] = {}
    how: str = ""
    listed: bool = True
    step: str | None = None
    sides: list[list[str]] = []
    voltage_step: str | None = None


class BarrierShown(Record, frozen=True, kw_only=True):
    id: str
    between: list[str]
    grade: str
    bridged_by: list[str]
    chains: list[list[str]]
    working_voltage: WorkingVoltage | None
    required: list[dict[str, Any]]
    parts: list[BridgingPart]
    reason: str = "barrier"
    step: str | None = None


class StressShown(Record, frozen=True, kw_only=True):
    part: str | None
    net: str | None
    quantity: str
    surely: float | None
    never_above: float | None
    unit: str
    form: str
    kind: str
    condition: str
    step: str | None


class LimitShown(Figure, frozen=True, kw_only=True):
    """A figure with its bound (at-most, at-least) and whether the limit was verified."""

    bound: str | UnsetType = UNSET
    status: str | UnsetType = UNSET


class Consequence(Record, frozen=True, kw_only=True, rename={"answer": "if"}):
    answer: str
    outcome: str


class MissingFact(Record, frozen=True, kw_only=True):
    part: str | None
    fact: str
    supply_as: str
    then: list[Consequence]


class VerdictShown(Record, frozen=True, kw_only=True):
    rule: str
    clause: str
    citation: str
    outcome: str
    level: str
    hazard: str
    parts: list[str]
    nets: list[str]
    condition: str
    what: str
    found: Figure | None
    limit: LimitShown | None
    margin: float | None
    missing: MissingFact | None
    because: str
    step: str | None
    remedy: str | None
    evidence: list[Evidence]
    fingerprint: str
    facts_hash: str
    state: str | None = None
    conceded: dict[str, Any] | None = None
    verified: str = "false"
    candidate: str = ""


class StepShown(Record, frozen=True, kw_only=True):
    id: str
    text: str
    formula: str
    inputs: list[str]
    result: float | str | None
    unit: str
    form: str
    citation: str
    evidence: list[Evidence] = []


class Report(Record, frozen=True, kw_only=True):
    schema: str = SCHEMA
    design: str
    variant: str | None
    tool: Tool
    plugins: list[str]
    inputs: list[InputFile]
    rulesets: list[RulesetUsed]
    assumptions: list[AssumptionMade]
    parts: list[PartShown]
    domains: list[DomainShown]
    barriers: list[BarrierShown]
    separations: list[BarrierShown]
    stress: list[StressShown]
    verdicts: list[VerdictShown]
    steps: list[StepShown]
    summary: dict[str, int]
    caution: str = CAUTION
    notes: list[str] = []
    environment: dict[str, str | float] = {}


class Unreadable(Record, frozen=True, kw_only=True):
    design: str
    message: str


class Reports(Record, frozen=True, kw_only=True):
    """Several designs of one project file."""

    schema: str = SCHEMA_SEVERAL
    reports: list[Report]
    unreadable: list[Unreadable]
    summary: dict[str, int]
    caution: str = CAUTION
