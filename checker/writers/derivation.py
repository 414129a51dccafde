"""One verdict, or every figure of one barrier, with the whole derivation, for a person at a terminal, from a report alone."""

from __future__ import annotations

from checker.model.report import BarrierShown, Report, StepShown, VerdictShown
from checker.units import shown
from checker.writers.page import Page
from checker.writers.text import where

WIDTH = 100


def write(report: Report, verdict: VerdictShown, width: int = WIDTH) -> str:
    """The question, the answer, every step with what it rests on down to file and line, and the clause."""
    page = Page(width)
    page.put(f"{verdict.outcome} ({verdict.level}): {verdict.what}", "Verdict")
    page.put(where(verdict), "where", indent=2)
    page.put(verdict.because, "why", indent=2)
    page.put(f"{verdict.citation} ({verdict.clause})", "clause", indent=2)
    if verdict.missing is not None:
        page.put(f"{verdict.missing.fact} ({verdict.missing.supply_as})", "settled by", indent=2)
        for answer in verdict.missing.then:
            page.put(f"{answer.answer} -> {answer.outcome}", "if", indent=4)
    page.put()
    page.put("Derivation, what it rests on below each step")
    steps = {step.id: step for step in report.steps}
    _tree(page, verdict.step, steps, set())
    page.put()
    page.put(f"{verdict.fingerprint}, facts {verdict.facts_hash}", "fingerprint", indent=2)
    page.put(report.caution, "Caution:")
    return page.text()


def barrier(report: Report, shown: BarrierShown, width: int = WIDTH) -> str:
    """A barrier or another separation: how its grade, its voltages and each figure that is needed came about."""
    page = Page(width)
    page.put(f"{' | '.join(shown.between)}: {shown.grade or 'grade not known'} ({shown.reason})", "Separation")
    steps = {step.id: step for step in report.steps}
    seen: set[str] = set()
    _section(page, "Grade", shown.step, steps, seen)
    _section(page, "Working voltage", shown.working_voltage.step if shown.working_voltage else None, steps, seen)
    for need in shown.required:
        _section(page, f"Needed by {need.get('ruleset')}", need.get("step"), steps, seen)
    for bridge in shown.parts:
        _section(page, f"{bridge.part}: why it lies across", bridge.step, steps, seen)
        _section(page, f"{bridge.part}: voltage on its pins", bridge.voltage_step, steps, seen)
        for need in bridge.required:
            _section(page, f"{bridge.part}: needed by {need.get('ruleset')}", need.get("step"), steps, seen)
    page.put()
    page.put(report.caution, "Caution:")
    return page.text()


def _section(page: Page, title: str, root: str | None, steps: dict[str, StepShown], seen: set[str]) -> None:
    if root is not None:
        page.put()
        page.put(title)
        _tree(page, root, steps, seen)


def _tree(page: Page, root: str | None, steps: dict[str, StepShown], seen: set[str]) -> None:
    """Steps depth first; one that is in `seen`, shown before, is named by its id only."""
    stack = [(root, 1)] if root is not None else []
    while stack:
        at, depth = stack.pop()
        step = steps.get(at)
        indent = min(2 * depth, 30)
        if step is None or at in seen:
            page.put("as above", f"{at}", indent=indent)
            continue
        seen.add(at)
        said = step.text + (f" [{step.formula}]" if step.formula else "")
        if isinstance(step.result, float):
            said += f" = {shown(step.result, step.unit, step.form)}"
        page.put(said + (f" ({step.citation})" if step.citation else ""), step.id, indent=indent)
        for evidence in step.evidence:
            place = f"{evidence.path}:{evidence.line}" if evidence.line else evidence.path or "the program's catalogue"
            page.put(f"{evidence.text} ({place}{' ' + evidence.cell if evidence.cell else ''})", "-", indent=indent + 2)
        stack += [(below, depth + 1) for below in reversed(step.inputs)]
