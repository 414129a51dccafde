"""Domains and barriers for a person at a terminal, from a report alone."""

from __future__ import annotations

from checker.model.report import BarrierShown, BridgingPart, DomainShown, PartShown, Report, Reports
from checker.units import shown
from checker.writers.page import Page, some

WIDTH = 100
NETS = 10  # nets or parts of a domain in one line
_UNITS = {
    "clearance": "mm",
    "creepage": "mm",
    "through_insulation": "mm",
    "isolation_working": "V",
    "isolation_test": "V",
    "impulse": "V",
}
_HOW = {"insulating": "", "capacitor": "", "limiter": "surge limiter", "ordinary": "DOES NOT INSULATE"}


def write(report: Report | Reports, width: int = WIDTH) -> str:
    """The domains with their sides and why, then each barrier with the parts across it and what they state."""
    page = Page(width)
    for one in report.reports if isinstance(report, Reports) else [report]:
        _one(page, one)
    page.put(report.caution, "Caution:")
    return page.text()


def _one(page: Page, report: Report) -> None:
    domains, barriers = len(report.domains), len(report.barriers)
    page.put(f"{report.design}: {domains} domain{'s' * (domains != 1)}, {barriers} barrier{'s' * (barriers != 1)}", "Design")
    page.put()
    steps = {step.id: step.text for step in report.steps}
    for domain in report.domains:
        _domain(page, domain, steps.get(domain.step or "", ""))
    parts = {part.ref: part for part in report.parts}
    if not report.barriers:
        page.put("No barrier: nothing on this board lies between two circuits that are kept apart.")
    for barrier in report.barriers:
        _barrier(page, barrier, parts, steps.get(barrier.step or "", ""))
    questions = [v for v in report.verdicts if v.outcome == "open" and v.rule in ("hazardous-source", "barrier-insulation")]
    for verdict in questions:
        page.put(f"{verdict.because} (settled by {verdict.missing.supply_as})" if verdict.missing else verdict.because, "Asked:")
    if questions:
        page.put()


def _domain(page: Page, domain: DomainShown, because: str) -> None:
    earthed = ", earthed" if domain.earthed and domain.side != "earth" else ""
    page.put(f"{domain.name} ({domain.side}{earthed}): {len(domain.nets)} nets, {len(domain.parts)} parts", "Domain")
    page.put(because, "because", indent=2)
    page.put(some(domain.nets, NETS), "nets", indent=2)
    page.put()


def _barrier(page: Page, barrier: BarrierShown, parts: dict[str, PartShown], because: str) -> None:
    page.put(f"{barrier.between[0]} | {barrier.between[1]}: {barrier.grade or 'grade not known'}", "Barrier")
    page.put(because, "because", indent=2)
    working = barrier.working_voltage
    if working is not None:
        page.put(f"{working.rms} V r.m.s., {working.peak} V peak", "working voltage", indent=2)
    chained = {ref: chain for chain in barrier.chains for ref in chain if len(chain) > 1}
    for bridge in barrier.parts:
        page.put(_bridge(bridge, parts.get(bridge.part), chained.get(bridge.part, [])), "across", indent=2)
    page.put()


def _bridge(bridge: BridgingPart, part: PartShown | None, chain: list[str]) -> str:
    said = [f"{bridge.part} ({part.kind if part else 'part'}), pins {some(bridge.pins, 12)}"]
    if part is not None and part.value is not None:
        said.append(shown(part.value, part.unit))
    if part is not None and part.marks:
        said.append("class " + ", ".join(part.marks))
    said += [f"{name.replace('_', ' ')} {shown(value, _UNITS[name])}" for name, value in bridge.provided.items()]
    if chain:
        said.append("in series " + " - ".join(chain))
    if not bridge.listed:
        said.append("type not listed")
    if _HOW.get(bridge.how):
        said.append(_HOW[bridge.how])
    return "; ".join(said)
