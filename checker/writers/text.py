"""The report for a person at a terminal: what fails first, then what is open and what settles it, then the rest."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from functools import partial

from msgspec import UNSET

from checker import units
from checker.model.clause import LEVELS
from checker.model.report import Figure, LimitShown, Report, Reports, StepShown, VerdictShown
from checker.writers.door import Writer
from checker.writers.page import Page, some

WIDTH = 100
MOST = 20  # items of one kind; the JSON report has them all
NAMES = 8  # references or nets in one line
PLACES = 3
STEPS = 3
PREFIX = 8  # characters of a fingerprint or a hash
COLUMN = 11  # where the text behind a label starts

_COUNTS = (("fail", "failed"), ("conceded", "conceded"), ("open", "open"), ("pass", "passed"), ("not-applicable", "not applicable"))
_DOUBT = {"partial": "limit partly verified", "false": "limit not verified"}


def write(report: Report | Reports, width: int = WIDTH) -> str:
    """The report as plain text, lines of at most `width` characters (60 and up), no colour."""
    page = Page(width)
    if isinstance(report, Reports):
        _several(page, report)
    else:
        _one(page, report)
    return page.text()


def _several(page: Page, reports: Reports) -> None:
    for report in reports.reports:
        _one(page, report, caution=False)
        page.put()
        page.rule("=")
    for lost in reports.unreadable:
        page.put(f"{lost.design}: {lost.message}", "Not judged:")
    designs = len(reports.reports) + len(reports.unreadable)
    not_judged = f", {len(reports.unreadable)} not judged" if reports.unreadable else ""
    page.put(f"{_counts(reports.summary)}{not_judged}", f"{designs} {'design' if designs == 1 else 'designs'}:")
    page.put()
    page.put(reports.caution, "Caution:")


def _one(page: Page, report: Report, caution: bool = True) -> None:
    variant = f" ({report.variant})" if report.variant else ""
    page.put(f"{report.design}{variant}: {_counts(report.summary)}", "Design")
    failed_block = partial(_failed, steps={step.id: step for step in report.steps})
    now = [verdict for verdict in report.verdicts if verdict.state != "absent"]
    now.sort(key=lambda verdict: LEVELS.index(verdict.level) if verdict.level in LEVELS else len(LEVELS))
    failed = [verdict for verdict in now if verdict.outcome == "fail"]
    _blocks(page, "FAILED", [verdict for verdict in failed if verdict.conceded is None], failed_block)
    _blocks(page, "OPEN: NOT PROVEN, AND WHAT WOULD SETTLE IT", [verdict for verdict in now if verdict.outcome == "open"], _open)
    _blocks(page, "FAILED, WITH A CONCESSION", [verdict for verdict in failed if verdict.conceded is not None], failed_block)
    _by_rule(page, "PASSED", [verdict for verdict in now if verdict.outcome == "pass"])
    _by_rule(page, "DOES NOT APPLY", [verdict for verdict in now if verdict.outcome == "not-applicable"])
    _list(page, "GONE SINCE THE BASELINE", [(f"{_who(v)}: {v.what}", v.rule) for v in report.verdicts if v.state == "absent"])
    _list(page, "ASSUMED, BECAUSE NOBODY SAID", [(f"{made.value}: {made.because}", made.key) for made in report.assumptions])
    _list(page, "NOTED", [(note, "-") for note in report.notes])
    _list(page, "READ", [(f"{read.path} (sha256 {read.sha256[:12]})", read.role) for read in report.inputs])
    _list(page, "JUDGED BY", list(_rulesets(report)))
    if caution:
        page.put()
        page.put(report.caution, "Caution:")


def _counts(summary: Mapping[str, int]) -> str:
    said = [f"{summary.get(key, 0)} {word}" for key, word in _COUNTS if summary.get(key, 0) or key in ("fail", "open", "pass")]
    unconfirmed = summary.get("unconfirmed", 0)
    return ", ".join(said) + (f"; {unconfirmed} passed on a limit that is not verified" if unconfirmed else "")


def _blocks(page: Page, title: str, verdicts: Sequence[VerdictShown], block: Callable[[Page, VerdictShown], None]) -> None:
    """Verdicts in full, those about the same parts under one heading, headings in the order of their worst verdict."""
    if not verdicts:
        return
    page.put()
    page.put("", title)
    groups: dict[str, list[VerdictShown]] = {}
    for verdict in verdicts[:MOST]:
        groups.setdefault(_who(verdict), []).append(verdict)
    for who, group in groups.items():
        page.put()
        page.put(who, _sort(group[0]))
        for at, verdict in enumerate(group):
            if at:
                page.put()
            block(page, verdict)
    _more(page, len(verdicts))


def _failed(page: Page, verdict: VerdictShown, steps: Mapping[str, StepShown]) -> None:
    def line(label: str, text: str) -> None:
        if text:
            page.put(text, label, 2, COLUMN)

    line(verdict.level, verdict.what)
    line("where", where(verdict))
    line("when", verdict.condition)
    line("choice", verdict.candidate)
    line("found", _numbers(verdict))
    line("clause", f"{verdict.citation} ({verdict.clause})" if verdict.citation else verdict.clause)
    line("why", verdict.because)
    for step in _reasons(verdict, steps):
        page.put(step, "-", COLUMN, COLUMN + 2)
    line("remedy", verdict.remedy or "")
    line("conceded", _concession(verdict.conceded or {}))
    line("explain", verdict.fingerprint[:PREFIX] + (f" ({verdict.state})" if verdict.state else ""))


def _open(page: Page, verdict: VerdictShown) -> None:
    page.put(verdict.what, verdict.level, 2, COLUMN)
    if verdict.missing:
        page.put(f"settled by: {verdict.missing.fact} ({verdict.missing.supply_as})", "", COLUMN, COLUMN)
        for answer in verdict.missing.then:
            page.put(f"{answer.answer} -> {answer.outcome}", "if", COLUMN, COLUMN + 3)
    page.put(verdict.fingerprint[:PREFIX], "explain", 2, COLUMN)


def _by_rule(page: Page, title: str, verdicts: Sequence[VerdictShown]) -> None:
    """One line a rule: how often, and about what."""
    groups: dict[str, list[VerdictShown]] = {}
    for verdict in verdicts:
        groups.setdefault(verdict.rule, []).append(verdict)
    lines = []
    for rule, group in groups.items():
        about = some(list(dict.fromkeys(_who(verdict) for verdict in group)), NAMES)
        doubtful = sum(verdict.outcome == "pass" and verdict.verified != "true" for verdict in group)
        lines.append((f"{len(group)}: {about}" + (f" ({doubtful} on a limit not verified)" if doubtful else ""), rule))
    _list(page, title, lines)


def _list(page: Page, title: str, lines: Sequence[tuple[str, str]]) -> None:
    if not lines:
        return
    page.put()
    page.put("", title)
    column = min(max(len(label) for _, label in lines[:MOST]), 30) + 4
    for text, label in lines[:MOST]:
        page.put(text, label, 2, column)
    _more(page, len(lines))


def _more(page: Page, count: int) -> None:
    if count > MOST:
        page.put(f"and {count - MOST} more (see --format json)", "", 2)


def _who(verdict: VerdictShown) -> str:
    return some(verdict.parts, NAMES) or some(verdict.nets, NAMES) or "the whole design"


def _sort(verdict: VerdictShown) -> str:
    """What sort of thing `_who` names."""
    one, names = ("Part", verdict.parts) if verdict.parts else ("Net", verdict.nets)
    return "About" if not names else one if len(names) == 1 else f"{one}s"


def where(verdict: VerdictShown) -> str:
    nets = f"{'net' if len(verdict.nets) == 1 else 'nets'} {some(verdict.nets, NAMES)}" if verdict.nets and verdict.parts else ""
    places = []
    for seen in verdict.evidence:
        cell = f" {seen.cell}" if seen.cell else ""
        places.append(f"{seen.path}:{seen.line}{cell}" if seen.line else f"{seen.path}{cell}")
    return "; ".join(filter(None, (nets, some(list(dict.fromkeys(places)), PLACES))))


def _numbers(verdict: VerdictShown) -> str:
    found = _figure(verdict.found) if verdict.found else ""
    limit = _figure(verdict.limit) if verdict.limit else ""
    if isinstance(verdict.limit, LimitShown) and verdict.limit.bound is not UNSET and limit:
        limit = f"{str(verdict.limit.bound).replace('-', ' ')} {limit}"
    wanted = "allowed" if limit.startswith("at most") else "needed"
    said = [found, f"{wanted} {limit}" if limit else ""]
    if verdict.margin is not None:
        said.append(f"margin {100 * verdict.margin:+.1f}".removesuffix(".0") + " %")
    if limit and verdict.verified in _DOUBT:
        said.append(_DOUBT[verdict.verified])
    return "; ".join(filter(None, said))


def _figure(figure: Figure) -> str:
    if isinstance(figure.value, float | int):
        form = "" if figure.form is UNSET else str(figure.form)
        return units.shown(figure.value, "" if figure.unit is UNSET else str(figure.unit), form)
    return "" if figure.text is UNSET else str(figure.text)


def _reasons(verdict: VerdictShown, steps: Mapping[str, StepShown]) -> Iterator[str]:
    """Up to three steps of the derivation, nearest first, without the sentence that `why` already says."""
    queue = [verdict.step] if verdict.step else []
    seen = set(queue)
    shown = 0
    for at in queue:
        step = steps.get(at)
        if step is None:
            continue
        if step.text and step.text not in verdict.because:
            yield _reason(step)
            shown += 1
        if shown == STEPS:
            return
        queue += [name for name in dict.fromkeys(step.inputs) if name not in seen]
        seen.update(step.inputs)


def _reason(step: StepShown) -> str:
    result = ""
    if isinstance(step.result, float | int):
        result = units.shown(step.result, step.unit, step.form)
    shown = " = ".join(filter(None, (step.formula, result)))
    return step.text + (f" {shown}" if shown else "") + (f" [{step.citation}]" if step.citation else "")


def _concession(conceded: Mapping[str, object]) -> str:
    return "; ".join(f"{key} {value}" for key, value in conceded.items() if isinstance(value, str | int | float))


def _rulesets(report: Report) -> Iterator[tuple[str, str]]:
    for used in report.rulesets:
        said = [f"edition {used.edition}" if used.edition else "", f"revision {used.revision}" if used.revision else ""]
        said.append(f"{used.unverified} figures not fully verified" if used.unverified else "every figure verified")
        yield ", ".join(filter(None, said)) + f" (sha256 {used.sha256[:12]})", used.id
    for plugin in report.plugins:
        yield plugin, "plugin"
    yield f"{report.tool.name} {report.tool.version}".rstrip(), "program"


def _bytes(report: Report | Reports) -> bytes:
    return write(report).encode("utf-8", "backslashreplace")


WRITER = Writer("text", _bytes)
