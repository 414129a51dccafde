"""Domains and barriers for a person at a terminal, from a report alone: what each barrier needs beside what its parts state.

A need is a figure, `3 to 5.6 mm` (less is too little, as much is enough, in between a fact is missing) or `at least 3 mm` where
nothing bounds the voltage. Behind a statement stands `SHORT` when a ruleset needs more on the part's own pins, `open` when it
may need more; `not stated` where the inputs say nothing. Marks only compare figures; the verdicts decide.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from msgspec import UNSET

from checker.model.report import BarrierShown, BridgingPart, DomainShown, PartShown, Report, Reports, WorkingVoltage
from checker.units import shown
from checker.writers.page import Page, some

WIDTH = 100
NETS = 10  # nets or parts of a domain in one line
MOST = 40  # further separations; the spacing table has them all
DIGITS = 4  # significant; JSON and the spacing table have six
LABEL = 11  # where the text behind a label starts
_DISTANCES = {"clearance": "clearance", "creepage": "creepage", "through_insulation": "through ins."}
STRENGTH = "electric_strength"
_COLUMNS = _DISTANCES | {STRENGTH: "test"}
_HOW = {"insulating": "", "capacitor": "", "limiter": "surge limiter", "ordinary": "DOES NOT INSULATE"}


def write(report: Report | Reports, width: int = WIDTH) -> str:
    """The domains with their sides and why, each barrier with needs and statements, then what else is kept apart."""
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
        page.put()
    for barrier in report.barriers:
        _barrier(page, barrier, parts, steps.get(barrier.step or "", ""))
    _separations(page, report.separations)
    _questions(page, report)
    _legend(page, (*report.barriers, *report.separations))


def _domain(page: Page, domain: DomainShown, because: str) -> None:
    earthed = ", earthed" if domain.earthed and domain.side != "earth" else ""
    side = f"{domain.side or 'side not known'}{earthed}"
    nets, parts = len(domain.nets), len(domain.parts)
    page.put(f"{domain.name} ({side}): {nets} net{'s' * (nets != 1)}, {parts} part{'s' * (parts != 1)}", "Domain")
    page.put(because, "because", 2, LABEL)
    page.put(some(domain.nets, NETS), "nets", 2, LABEL)
    page.put()


def _barrier(page: Page, barrier: BarrierShown, parts: Mapping[str, PartShown], because: str) -> None:
    page.put(f"{barrier.between[0]} | {barrier.between[1]}: {barrier.grade or 'grade not known'}", "Barrier")
    page.put(because, "because", 2, LABEL)
    page.put(_voltage(barrier.working_voltage), "voltage", 2, LABEL)
    rows: list[Sequence[str] | str] = []
    if barrier.required:
        rows += ["between the two sides", *(_needs(need) for need in barrier.required)]
    chained = {ref: chain for chain in barrier.chains for ref in chain if len(chain) > 1}
    for bridge in {bridge.part: bridge for bridge in barrier.parts}.values():
        part = parts.get(bridge.part)
        rows.append(_across(bridge, part, chained.get(bridge.part, [])))
        rows += [_states(bridge, part), *(_needs(need, _form(part)) for need in bridge.required)]
    _table(page, rows)
    missing = dict.fromkeys(text for need in _all_needs([barrier]) for text in need.get("missing", ()))
    if missing:
        page.put("; ".join(missing), "open: settled by", 2)
    page.put(barrier.id, "explain", 2, LABEL)
    page.put()


def _across(bridge: BridgingPart, part: PartShown | None, chain: Sequence[str]) -> str:
    """One line about a part: what it is, its pins on either side, the voltage on them."""
    said = [f"{bridge.part}: {part.kind if part else 'part'}"]
    if part is not None and part.value is not None:
        said.append(_short(part.value, part.unit))
    if part is not None and part.marks:
        said.append("class " + ", ".join(part.marks))
    said.append("pins " + " | ".join(some(side, 8) for side in bridge.sides or [bridge.pins]))
    if bridge.rms is not None or bridge.peak is not None:
        said.append(_voltage(WorkingVoltage(rms=bridge.rms, peak=bridge.peak, step=None)))
    else:
        said.append("voltage on them not bounded")
    working = part.ratings.get("isolation_working") if part else None
    if working is not None and isinstance(working.value, float | int):
        said.append(f"stated for {_short(working.value, 'V', str(working.form or ''))}")
    if chain:
        said.append("in series " + " - ".join(chain))
    if not bridge.listed:
        said.append("type not listed")
    if _HOW.get(bridge.how):
        said.append(_HOW[bridge.how])
    return "; ".join(said)


def _voltage(working: WorkingVoltage | None) -> str:
    rms, peak = (working.rms, working.peak) if working is not None else (None, None)
    said = [_short(value, "V", form) for value, form in ((rms, "rms"), (peak, "peak")) if value is not None]
    return ", ".join(said) or "not bounded"


def _needs(need: Mapping[str, Any], form: str = "") -> list[str]:
    """One row: the name of the ruleset and what it needs. form: of the test voltage to show, that of the part's statement."""
    return [f"  {need.get('ruleset', '')}", *(_range(_asked(need, name, form)) for name in _COLUMNS)]


def _states(bridge: BridgingPart, part: PartShown | None) -> list[str]:
    """One row: what the part states, with a mark where that is short of a need, perhaps short of it, or missing."""
    cells = ["  stated"]
    for name in _COLUMNS:
        form = _form(part) if name == STRENGTH else ""
        value = bridge.provided.get("isolation_test" if name == STRENGTH else name)
        asked = [found for need in bridge.required if (found := _asked(need, name, form)) is not None]
        if value is None:
            cells.append("not stated" if asked else "")
            continue
        short = any(value < found.at_least for found in asked)
        proven = all(found.enough is not None and value >= found.enough for found in asked)
        mark = " SHORT" if short else "" if proven else " open"
        cells.append(_short(value, "V" if name == STRENGTH else "mm", form) + mark)
    return cells


@dataclass(frozen=True, slots=True)
class _Asked:
    """One figure of a need: what is needed at least and what is enough, None where nothing bounds it."""

    at_least: float
    enough: float | None
    unit: str
    form: str


def _asked(need: Mapping[str, Any], name: str, form: str) -> _Asked | None:
    """The figure of that name; a test voltage in the form of the statement: r.m.s. also for one without a form, else d.c."""
    if name != STRENGTH:
        return _bounds(need, name, need.get(name), 1.0, "mm", "")
    values = need.get(name, {})
    wanted, other, factor = ("dc", "rms", math.sqrt(2)) if form in ("dc", "peak") else ("rms", "dc", math.sqrt(0.5))
    if wanted in values:
        other, factor = wanted, 1.0
    return _bounds(need, f"{name}.{other}", values.get(other), factor, "V", wanted)


def _bounds(need: Mapping[str, Any], key: str, value: float | None, factor: float, unit: str, form: str) -> _Asked | None:
    if value is None:
        return None
    enough = None if key in need.get("unbounded", ()) else value * factor
    return _Asked(need.get("at_least", {}).get(key, value) * factor, enough, unit, form)


def _range(asked: _Asked | None) -> str:
    """`3 mm`, `3 to 5.6 mm`, `at least 3 mm`; zero at least says nothing."""
    if asked is None:
        return ""
    if asked.enough is None:
        return f"at least {_short(asked.at_least, asked.unit, asked.form)}" if asked.at_least else "not bounded"
    enough = _short(asked.enough, asked.unit, asked.form)
    if asked.at_least == asked.enough:
        return enough
    low = _short(asked.at_least, asked.unit, asked.form) if asked.at_least else "0"
    return f"{low.removesuffix(' ' + enough.partition(' ')[2])} to {enough}"


def _form(part: PartShown | None) -> str:
    """The form of the test voltage a part states, "" when it states none."""
    test = part.ratings.get("isolation_test") if part else None
    return "" if test is None or test.form is UNSET else str(test.form)


def _separations(page: Page, separations: Sequence[BarrierShown]) -> None:
    if not separations:
        return
    page.put("for the layout: no part lies across them", "Further separations")
    rows: list[Sequence[str] | str] = []
    for separation in separations[:MOST]:
        grade = separation.grade or "grade not known"
        said = _voltage(separation.working_voltage)
        rows.append(f"{' | '.join(separation.between)}: {grade}; {said} ({separation.reason})")
        rows += [_needs(need) for need in separation.required]
    _table(page, rows)
    if len(separations) > MOST:
        page.put(f"and {len(separations) - MOST} more (see --format csv)", indent=2)
    page.put()


def _table(page: Page, rows: Sequence[Sequence[str] | str]) -> None:
    """The rows under their headings without the columns that nobody fills; as lines where the page is too narrow for columns."""
    filled = [at for at in range(1, len(_COLUMNS) + 1) if any(row[at] for row in rows if not isinstance(row, str))]
    heads = ["", *_COLUMNS.values()]
    kept: list[Sequence[str] | str] = [row if isinstance(row, str) else [row[at] for at in (0, *filled)] for row in rows]
    kept = [row for row in kept if isinstance(row, str) or any(row[1:])]
    if not rows:
        return
    page.put()
    if not filled or not page.grid([[heads[at] for at in (0, *filled)], *kept], indent=2):
        for row in kept:
            if isinstance(row, str):
                page.put(row, indent=2)
            else:
                said = (f"{heads[at]} {cell}" for at, cell in zip(filled, row[1:], strict=True) if cell)
                page.put(", ".join(said), f"{row[0].strip()}:", 4)


def _questions(page: Page, report: Report) -> None:
    questions = [v for v in report.verdicts if v.outcome == "open" and v.rule in ("hazardous-source", "barrier-insulation")]
    for verdict in questions:
        page.put(f"{verdict.because} (settled by {verdict.missing.supply_as})" if verdict.missing else verdict.because, "Asked:")
    if questions:
        page.put()


def _legend(page: Page, barriers: Iterable[BarrierShown]) -> None:
    """Which rulesets' figures were not read in their source."""
    doubtful = sorted({str(need.get("ruleset", "")) for need in _all_needs(barriers) if need.get("verified", "true") != "true"})
    if doubtful:
        page.put(f"not every figure that {' and '.join(doubtful)} needs was verified in its source.", "Note:")
        page.put()


def _all_needs(barriers: Iterable[BarrierShown]) -> Iterator[Mapping[str, Any]]:
    for barrier in barriers:
        yield from barrier.required
        for bridge in barrier.parts:
            yield from bridge.required


def _short(value: float, unit: str, form: str = "") -> str:
    return shown(float(f"{value:.{DIGITS}g}"), unit, form)
