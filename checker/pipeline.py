"""The order of the stages, and nothing else: readings -> design -> identity -> isolation -> setting -> grades -> verdicts ->
report."""

from __future__ import annotations

import traceback
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import permutations

from checker import parameters, plugins
from checker.assemble.join import assemble
from checker.errors import WithstandError
from checker.identify.candidates import identify
from checker.identify.usual_pins import with_pin_names
from checker.isolation.domains import isolate
from checker.limits import VERDICTS
from checker.model.candidate import Candidate, Identity
from checker.model.circuit import Design
from checker.model.clause import Clause, Subject
from checker.model.declaration import Declaration
from checker.model.reading import Reading
from checker.model.report import Report
from checker.model.requirement import Basis, Grade, Need, Spacing
from checker.model.rule import Analysis, Board
from checker.model.ruleset import Ruleset
from checker.model.step import Step
from checker.model.table import Table
from checker.model.verdict import OUTCOMES, Missing, Verdict
from checker.remedies import tried
from checker.reporting import fingerprint, report
from checker.requirements.grade import TABLE, needed
from checker.requirements.needs import needs
from checker.requirements.separations import grades as spacing_grades
from checker.requirements.separations import separations, voltages
from checker.stress.sources import setting
from checker.stress.voltages import stressed
from checker.unnamed_earth import doubted, unnamed_contact


@dataclass(frozen=True, slots=True)
class Judged:
    """A report, and the tracebacks of rules that raised (each is an open verdict in the report; the run ends with 3)."""

    report: Report
    raised: tuple[str, ...] = ()


def judge(
    name: str,
    readings: Sequence[Reading],
    declaration: Declaration,
    rulesets: Sequence[Ruleset],
    inputs: Sequence[tuple[str, str, str]],
    variant: str | None = None,
) -> Judged:
    """Everything from readings to the report. inputs: (role, path as shown, sha256) of each file the run rests on."""
    design = assemble(name, readings, declaration, variant)
    identity = identify(design, declaration)
    design = with_pin_names(design, {ref: candidates[0] for ref, candidates in identity.items()})
    raised: list[str] = []
    worst: dict[tuple[str, str], Verdict] = {}
    first: Analysis | None = None

    def answers(choice: Mapping[str, Candidate]) -> tuple[Analysis, dict[tuple[str, str], Verdict]]:
        analysis = analyse(design, declaration, identity, choice, rulesets)
        found: dict[tuple[str, str], Verdict] = {}
        for verdict in verdicts(analysis, rulesets, raised):
            key = (verdict.clause, fingerprint(verdict))
            if key not in found or _rank(verdict) < _rank(found[key]):
                found[key] = verdict
            if len(found) > VERDICTS:
                raise WithstandError(f"{name}: more than {VERDICTS:,} verdicts; split the design")
        return analysis, found

    for choice in choices(identity):
        analysis, found = answers(choice)
        first = first or analysis
        for key, verdict in found.items():
            if key not in worst or _rank(verdict) < _rank(worst[key]):
                worst[key] = verdict if analysis is first else _from_alternate(verdict, choice, identity)
    assert first is not None
    told = len(raised)
    worst = tried(worst, first.choice, lambda choice: answers(choice)[1])
    del raised[told:]  # a fault that a remedy brings out is the remedy's, which is dropped
    return Judged(report(first, tuple(worst.values()), rulesets, inputs, plugins.plugin_names()), tuple(raised))


def choices(identity: Identity) -> Iterator[Mapping[str, Candidate]]:
    """Choices to judge: every first candidate, then every second, ..., so that each candidate of each part is judged once."""
    yield {ref: candidates[0] for ref, candidates in identity.items()}
    for at in range(1, max((len(candidates) for candidates in identity.values()), default=1)):
        yield {ref: candidates[min(at, len(candidates) - 1)] for ref, candidates in identity.items()}


def analyse(
    design: Design, declaration: Declaration, identity: Identity, choice: Mapping[str, Candidate], rulesets: Sequence[Ruleset]
) -> Analysis:
    """The stages between identity and rules for one choice of candidates."""
    isolation = isolate(design, choice, declaration)
    set_up = setting(declaration, isolation)
    board = Board(design, declaration, identity, choice, isolation, set_up)
    stress = stressed(board)
    further = separations(board, stress)
    stress = replace(stress, barriers={**stress.barriers, **voltages(further, stress)})
    every = (*isolation.separations, *further)
    grades: dict[tuple[str, str], Grade] = {}
    asked: dict[tuple[str, str, str], Need] = {}
    for ruleset in rulesets:
        table = ruleset.tables.get(TABLE)
        pairs = [separation for separation in every if not isinstance(separation, Spacing)]
        found = needed(pairs, isolation.domains, declaration, set_up, table) | spacing_grades(further, table)
        grades.update({(ruleset.id, separation): grade for separation, grade in found.items()})
        asked.update(needs(board, every, stress, grades, basis(ruleset)))
    return Analysis(
        design,
        declaration,
        identity,
        choice,
        isolation,
        set_up,
        grades=grades,
        stress=stress,
        needs=asked,
        further=further,
        tables={ruleset.id: ruleset.tables for ruleset in rulesets},
    )


def basis(ruleset: Ruleset) -> Basis:
    """What the clauses of a ruleset give the requirement stage: their parameters by `rule.parameter`, tables as tables."""
    tables: dict[str, Table] = {}
    figures: dict[str, object] = {}
    for clause in ruleset.clauses:
        named = parameters.tables_in(clause.params)
        for name in parameters.types_of(type(clause.params)):
            if name in named:
                tables.setdefault(f"{clause.rule}.{name}", ruleset.tables[named[name]])
            else:
                figures.setdefault(f"{clause.rule}.{name}", getattr(clause.params, name))
    return Basis(ruleset.id, tables, figures)


def verdicts(analysis: Analysis, rulesets: Sequence[Ruleset], raised: list[str]) -> Iterator[Verdict]:
    """The verdicts of every clause. A rule that raises leaves its question open and adds its traceback to `raised`."""
    contact = unnamed_contact(analysis)
    for ruleset in rulesets:
        for clause in ruleset.clauses:
            if not _applies(clause, analysis):
                continue
            try:
                for verdict in plugins.rule(clause.rule).ask(analysis, clause):
                    if _concerns(clause, verdict, analysis):
                        yield verdict if contact is None else doubted(verdict, contact, analysis)
            except WithstandError:
                raise
            except Exception as error:
                raised.append(traceback.format_exc())
                step = Step(f"the rule {clause.rule} stopped with {type(error).__name__}", ())
                missing = Missing("an answer of the program itself", "a report of this fault to the program's authors", ())
                yield clause.opens(
                    Subject(key=("raised",)), "The program failed to answer this question.", step.text, step, missing, level="error"
                )


def _applies(clause: Clause, analysis: Analysis) -> bool:
    """Whether the conditions of a clause that concern the whole design hold."""
    mains = analysis.setting.mains
    known = {
        "protection_class": analysis.setting.protection_class,
        "overvoltage_category": mains.overvoltage_category if mains else "",
    }
    return all(known[key] in wanted for key, wanted in clause.when.items() if key in known)


def _concerns(clause: Clause, verdict: Verdict, analysis: Analysis) -> bool:
    """Whether the conditions of a clause that concern a subject hold for this verdict."""
    domains = [
        analysis.isolation.domains[analysis.isolation.domain_of[net]] for net in verdict.nets if net in analysis.isolation.domain_of
    ]
    for key, wanted in clause.when.items():
        if key == "kind" and not any(analysis.kind(ref) in wanted for ref in verdict.parts if ref in analysis.choice):
            return False
        if key == "side" and not any(domain.side in wanted for domain in domains):
            return False
        if key == "accessible" and not any(str(domain.accessible).lower() in wanted for domain in domains):
            return False
        if key == "grade":
            names = {domain.name for domain in domains} | {
                name for ref in verdict.parts for crossing in analysis.isolation.crossing(ref) for name in crossing.between
            }
            barriers = [f"{one}|{two}" for one, two in permutations(names, 2)]
            grades = [analysis.grades.get((clause.ruleset, barrier)) for barrier in barriers]
            if not any(grade is not None and grade.grade in wanted for grade in grades):
                return False
    return True


def _rank(verdict: Verdict) -> tuple[int, float]:
    """Worse is smaller: by outcome, then by margin."""
    return OUTCOMES.index(verdict.outcome), verdict.margin if verdict.margin is not None else 0.0


def _from_alternate(verdict: Verdict, choice: Mapping[str, Candidate], identity: Identity) -> Verdict:
    """A verdict that an alternate part makes worse says which one."""
    labels = [
        f"{ref} as {choice[ref].label}" for ref in verdict.parts if ref in choice and choice[ref].label and len(identity[ref]) > 1
    ]
    if not labels:
        return verdict
    return replace(verdict, candidate=", ".join(labels), because=f"with the alternate {', '.join(labels)}: {verdict.because}")
