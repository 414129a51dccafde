"""From verdicts and stages to the report: ids for steps, fingerprints, rounding, order. What is printed is decided here, once."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Mapping, Sequence
from importlib.metadata import PackageNotFoundError, version

import msgspec

from checker import reporting_barriers
from checker.formulas.rounding import significant
from checker.model.candidate import Candidate
from checker.model.clause import LEVELS
from checker.model.fact import Fact
from checker.model.order import natural
from checker.model.reading import Note
from checker.model.report import (
    AssumptionMade,
    Consequence,
    DomainShown,
    Evidence,
    Figure,
    InputFile,
    LimitShown,
    MissingFact,
    PartShown,
    Report,
    RulesetUsed,
    Tool,
    VerdictShown,
)
from checker.model.rule import Analysis
from checker.model.ruleset import Ruleset
from checker.model.verdict import OUTCOMES, Limit, Number, Verdict, Words
from checker.reporting_steps import Steps, evidence

MOST_EVIDENCE = 12  # places shown with one verdict; its steps have them all
MOST_ALIKE = 3  # notes of one kind that are listed one by one
_TOGETHER = {
    "not-in-bom": "are in the netlist and no BOM lists them",
    "not-in-netlist": "are in the BOM and not in the netlist",
    "case-differs": "are written in another case in netlist and BOM",
}


def tool_version() -> str:
    """The installed version, "0" in a checkout that was never installed."""
    try:
        return version("withstand")
    except PackageNotFoundError:
        return "0"


def fingerprint(verdict: Verdict) -> str:
    """Which question about what: rule, clause and subject, never a value, a line, a path or an automatic net name."""
    subject = verdict.key or tuple(sorted(verdict.parts))
    return _hash([verdict.rule, verdict.clause, list(subject)])


def facts_hash(verdict: Verdict) -> str:
    """Everything the verdict rests on: the facts behind its steps and its limit, without their places."""
    facts = sorted({(f.attribute, str(f.value), f.unit, f.form) for f in _facts(verdict)})
    limit = verdict.limit
    bound = [limit.value, limit.unit, limit.form, limit.bound] if isinstance(limit, Limit) else [limit.text] if limit else []
    return _hash([verdict.rule, verdict.clause, [list(fact) for fact in facts], bound, verdict.candidate])


def _hash(content: object) -> str:
    return hashlib.sha256(msgspec.json.encode(content)).hexdigest()[:32]


def _facts(verdict: Verdict) -> tuple[Fact, ...]:
    return verdict.evidence or (verdict.step.facts() if verdict.step is not None else ())


def report(
    analysis: Analysis,
    verdicts: Sequence[Verdict],
    rulesets: Sequence[Ruleset],
    inputs: Sequence[tuple[str, str, str]],
    plugin_names: Sequence[str],
) -> Report:
    """The report of one design."""
    steps = Steps()
    design, isolation = analysis.design, analysis.isolation
    domains = [
        DomainShown(
            name=domain.name,
            side=domain.side,
            earthed=domain.earthed,
            nets=list(domain.nets),
            parts=list(domain.parts),
            step=steps.id(domain.step),
            accessible=domain.accessible,
        )
        for domain in isolation.domains.values()
    ]
    named = [ruleset.id for ruleset in rulesets]
    barriers = reporting_barriers.barriers(analysis, named, steps)
    separations = reporting_barriers.separations(analysis, named, steps)
    stress = reporting_barriers.stress(analysis, steps)
    ordered = sorted(verdicts, key=_order)
    shown = [_verdict(verdict, steps) for verdict in ordered]
    return Report(
        design=design.name,
        variant=design.variant,
        tool=Tool(version=tool_version()),
        plugins=list(plugin_names),
        inputs=[InputFile(role=role, path=path, sha256=sha) for role, path, sha in inputs],
        rulesets=[
            RulesetUsed(id=r.id, edition=r.edition, revision=r.revision, sha256=r.sha256, unverified=r.unverified) for r in rulesets
        ],
        assumptions=[AssumptionMade(key=a.key, value=a.value, because=a.because) for a in analysis.setting.assumptions],
        parts=_parts(analysis),
        domains=domains,
        barriers=barriers,
        separations=separations,
        stress=stress,
        verdicts=shown,
        steps=steps.shown,
        summary=summary(shown),
        notes=_notes(analysis, frozenset(verdict.because for verdict in verdicts)),
        environment=_environment(analysis.setting.environment),
    )


def summary(verdicts: Iterable[VerdictShown]) -> dict[str, int]:
    """Counts by outcome; conceded fails and passes on unverified limits are counted besides."""
    counts = dict.fromkeys(("pass", "fail", "open", "not-applicable", "conceded", "unconfirmed"), 0)
    for verdict in verdicts:
        counts[verdict.outcome] += 1
        counts["conceded"] += verdict.conceded is not None
        counts["unconfirmed"] += verdict.outcome == "pass" and verdict.verified != "true"
    return counts


def _order(verdict: Verdict) -> tuple[int, int, str, list[object], str]:
    return (
        OUTCOMES.index(verdict.outcome),
        LEVELS.index(verdict.level),
        verdict.rule,
        [natural(ref) for ref in verdict.parts],
        fingerprint(verdict),
    )


def _verdict(verdict: Verdict, steps: Steps) -> VerdictShown:
    missing = verdict.missing
    return VerdictShown(
        rule=verdict.rule,
        clause=verdict.clause,
        citation=verdict.citation,
        outcome=verdict.outcome,
        level=verdict.level,
        hazard=verdict.hazard,
        parts=list(verdict.parts),
        nets=list(verdict.nets),
        condition=verdict.condition,
        what=verdict.what,
        found=_figure(verdict.found),
        limit=_limit(verdict.limit),
        margin=None if verdict.margin is None else significant(verdict.margin),
        missing=None
        if missing is None
        else MissingFact(
            part=missing.part,
            fact=missing.fact,
            supply_as=missing.supply_as,
            then=[Consequence(answer=answer, outcome=outcome) for answer, outcome in missing.then],
        ),
        because=verdict.because,
        step=steps.id(verdict.step),
        remedy=None if verdict.remedy is None else verdict.remedy.text,
        evidence=evidence(_facts(verdict)[:MOST_EVIDENCE]),
        fingerprint=fingerprint(verdict),
        facts_hash=facts_hash(verdict),
        verified=verdict.verified,
        candidate=verdict.candidate,
    )


def _figure(found: Number | Words | None) -> Figure | None:
    if found is None:
        return None
    if isinstance(found, Words):
        return Figure(text=found.text)
    return Figure(value=significant(found.value), unit=found.unit, form=found.form)


def _limit(limit: Limit | Words | None) -> LimitShown | None:
    if limit is None:
        return None
    if isinstance(limit, Words):
        return LimitShown(text=limit.text)
    return LimitShown(value=significant(limit.value), unit=limit.unit, form=limit.form, bound=limit.bound, status=limit.status)


def _parts(analysis: Analysis) -> list[PartShown]:
    isolation = analysis.isolation
    crossing = {c.part for c in isolation.crossings}
    hazardous = {ref for domain in isolation.domains.values() if domain.hazard for ref in domain.parts}
    shown = []
    for ref in sorted(analysis.design.parts, key=natural):
        part, candidate = analysis.design.parts[ref], analysis.choice[ref]
        value = candidate.value
        domains = dict.fromkeys(isolation.domain_of[net] for net in part.nets() if net in isolation.domain_of)
        shown.append(
            PartShown(
                ref=ref,
                kind=candidate.kind,
                value=significant(float(value.value)) if value is not None else None,
                unit=value.unit if value is not None else "",
                ratings=_ratings(candidate),
                marks=[mark.name for mark in candidate.marks],
                maker=candidate.maker or None,
                type=candidate.type or None,
                fitted=part.fitted,
                critical=ref in crossing or ref in hazardous or bool(candidate.marks),
                domains=list(domains),
                evidence=[Evidence(path=s.path, line=s.line, column=s.column, cell=s.cell or None, text=ref) for s in part.sources],
                because=candidate.because,
                candidates=[other.label for other in analysis.identity[ref][1:]],
            )
        )
    return shown


def _ratings(candidate: Candidate) -> dict[str, Figure]:
    return {
        name: Figure(value=significant(float(fact.value)), unit=fact.unit, form=fact.form)
        for name, fact in candidate.ratings.items()
        if isinstance(fact.value, float)
    }


def _environment(facts: Mapping[str, Fact]) -> dict[str, str | float]:
    """The surroundings the run judged under, declared or assumed: text, or a figure in SI."""
    return {name: significant(fact.value) if isinstance(fact.value, float) else str(fact.value) for name, fact in facts.items()}


def _notes(analysis: Analysis, told: frozenset[str]) -> list[str]:
    """What was noticed on the way and no verdict tells: notes of the readers, not-fitted parts that would cross, idle insulators.

    told: reasons that verdicts already give. Many notes of one kind about parts become one line.
    """
    by_kind: dict[str, list[Note]] = {}
    for note in analysis.design.notes:
        if note.text not in told:
            by_kind.setdefault(note.kind, []).append(note)
    found = []
    for kind, notes in by_kind.items():
        refs = [ref for note in notes for ref in note.parts]
        if len(notes) > MOST_ALIKE and kind in _TOGETHER and refs:
            found.append(f"{len(notes)} parts {_TOGETHER[kind]}: {', '.join(refs)}")
            continue
        for note in notes:
            places = ", ".join(str(source) for source in note.sources[:2])
            found.append(
                f"{note.text} ({places})" if places and not all(str(s) in note.text for s in note.sources[:2]) else note.text
            )
    if analysis.declaration.concessions:
        found.append(f"{analysis.declaration.concessions} is declared; this version applies no concessions, so every fail stands")
    circuits = len(analysis.isolation.domains)
    listed = {frozenset(separation.between) for separation in (*analysis.isolation.separations, *analysis.further)}
    left_out = circuits * (circuits - 1) // 2 - sum(between <= analysis.isolation.domains.keys() for between in listed)
    if analysis.further and left_out > 0:
        found.append(f"{left_out} pairs of circuits without a hazard that nothing lies between are not among the separations")
    for crossing in analysis.isolation.idle:
        found.append(f"{crossing.part} is not fitted; fitted, it would lie across {' and '.join(crossing.between)}")
    for ref in analysis.isolation.inactive:
        found.append(f"{ref} is made to insulate but has both sides in one circuit")
    return found
