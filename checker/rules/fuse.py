"""Is there a fuse in the line, before what it must protect?

Equipment on the mains needs a protective device that opens the supply when a part behind it fails short. It belongs in
the line conductor; where the supply entry has two poles and no polarity (protection class II), either pole will do. What
lies before it must be wiring: inlet, switch, terminals. A varistor, a rectifier, a converter module or a transformer that is
tapped ahead of the fuse is not protected by it. A line capacitor ahead of the fuse is accepted and mentioned.

Per supply entry: pass when every load behind a pole is reached through a fitted fuse; fail when there is no fuse, when the
fuse is not fitted or something conducts around it, when it stands in the neutral of a polarised or class I entry alone, or
when a load is tapped before it; of several phases each that feeds a load needs its own. A resettable thermistor is no fuse:
it limits, it does not open the circuit. Open when the board has a mains side but no connector that is recognised as its
entry, when a resistor across the line stands ahead of the fuse, and when a fusible resistor is all there is.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.clause import Clause, Subject
from checker.model.entry import Entry
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict, Words
from checker.rules.fuse_path import Before, toward_fuse


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters."""


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per supply entry of the mains side."""
    if analysis.setting.mains is None or not any(domain.hazard == "mains" for domain in analysis.isolation.domains.values()):
        return
    found = analysis.stress.entries
    if not found:
        yield _no_entry(analysis, clause)
    reached = {ref: {pole: toward_fuse(analysis, pole) for pole in entry.poles} for ref, entry in found.items()}
    taken = frozenset(fuse for poles in reached.values() for before in poles.values() for fuse in before.fuses)
    for ref, entry in found.items():
        yield _of_entry(analysis, clause, ref, entry, reached[ref], taken)


def _no_entry(analysis: Analysis, clause: Clause) -> Verdict:
    domain = next(domain for domain in analysis.isolation.domains.values() if domain.hazard == "mains")
    fuses = tuple(ref for ref in domain.parts if analysis.kind(ref) == "fuse" and analysis.design.parts[ref].fitted)
    missing = Missing(
        "the connector where the mains enters", "parts: {J1: {kind: inlet}} in the declaration",
        (("a fuse is the first part behind it", "pass"), ("something else is", "fail")),
    )  # fmt: skip
    because = (
        f"the mains side has {'fuse ' + ', '.join(fuses) if fuses else 'no fuse'}, and no connector is recognised as its entry"
    )
    return clause.opens(Subject(fuses, key=("fuse",)), "Fuse at the supply entry.", because, domain.step, missing)


def _of_entry(
    analysis: Analysis, clause: Clause, ref: str, entry: Entry, reached: dict[str, Before], taken: frozenset[str]
) -> Verdict:
    what = "Fuse in the line, before what it must protect."
    line = list(entry.lines) or [pole for pole in entry.poles if pole != entry.neutral]
    either = len(entry.poles) <= 2 and not entry.earth and analysis.setting.protection_class != "I"
    poles = list(entry.poles) if either else line
    fuses = [fuse for pole in poles for fuse in reached[pole].fuses]
    key = Subject((ref, *dict.fromkeys(fuses)), entry.poles, key=(ref, "fuse"))
    facts = (analysis.design.parts[ref].fact, *(analysis.design.parts[fuse].fact for fuse in dict.fromkeys(fuses)))
    if not fuses:
        return _without(analysis, clause, ref, entry, reached, taken, what)
    phases = len(entry.lines) > 2 or (len(entry.lines) > 1 and entry.neutral is not None)
    bare = [pole for pole in entry.lines if reached[pole].loads and not reached[pole].fuses] if phases else []
    if bare:
        loads = tuple(dict.fromkeys(load for pole in bare for load in reached[pole].loads))
        has = ", ".join(dict.fromkeys(fuses))
        because = f"{', '.join(bare)} of {ref} has no fuse before {', '.join(loads[:6])}; {has} stands in another conductor"
        step = Step(because, facts)
        return clause.fails(Subject((ref, *loads[:6]), tuple(bare), key=(ref, "fuse")), "A phase has no fuse.", because, step)
    # the pole with the fewest parts before its fuse is the one the fuse is meant for; every phase needs its own
    fused = [pole for pole in poles if reached[pole].fuses]
    judged = fused if phases else [min(fused, key=lambda pole: (len(reached[pole].loads), len(reached[pole].resistors), pole))]
    for pole in judged:
        ahead = _ahead(analysis, clause, ref, entry, pole, reached, facts)
        if ahead is not None:
            return ahead
    passed = tuple(dict.fromkeys(part for pole in judged for part in reached[pole].passed))
    capacitors = tuple(dict.fromkeys(part for pole in judged for part in reached[pole].capacitors))
    found = tuple(dict.fromkeys(fuse for pole in judged for fuse in reached[pole].fuses))
    step = Step(
        f"from {ref} on {', '.join(judged)}: fuse {', '.join(found)}, before it {', '.join(passed) or 'only wiring'}", facts
    )
    because = step.text + (f"; line capacitor {', '.join(capacitors)} stands ahead of it" if capacitors else "")
    return clause.passes(key, what, because, step, found=Words(", ".join(found)))


def _ahead(
    analysis: Analysis,
    clause: Clause,
    ref: str,
    entry: Entry,
    pole: str,
    reached: dict[str, Before],
    facts: tuple[Fact, ...],
) -> Verdict | None:
    """What is wrong ahead of the fuse of a pole: a bypass, a load, a resistor; None when nothing is."""
    before, parts = reached[pole], analysis.design.parts
    nets = set(before.nets)
    around = [fuse for fuse in before.fuses if set(parts[fuse].nets()) <= nets]
    if around:
        ends = {frozenset(parts[fuse].nets()) for fuse in around}
        within = [part for part in before.passed if set(parts[part].nets()) <= nets]
        links = [part for part in within if frozenset(parts[part].nets()) in ends] or within
        because = f"{', '.join(links[:6])} conduct{'s' * (len(links) == 1)} around fuse {', '.join(around)}"
        step = Step(because, (*facts, *(parts[part].fact for part in links[:6])))
        return clause.fails(Subject((*links[:6], *around), (pole,), key=(ref, "fuse")), "The fuse is bypassed.", because, step)
    others = [reached[other] for other in entry.poles if other != pole and not reached[other].fuses]
    tapped = tuple(_unprotected(analysis, before, others))
    if tapped:
        ahead = f"{', '.join(tapped[:6])} hang{'s' * (len(tapped) == 1)} on {pole} ahead of fuse {', '.join(before.fuses)}"
        because = f"{ahead}, which cannot clear a short there"
        step = Step(because, (*facts, *(parts[part].fact for part in tapped[:6])))
        subject = Subject((*tapped[:6], *before.fuses), (pole,), key=(ref, "fuse"))
        return clause.fails(subject, "A part is tapped ahead of the fuse.", because, step)
    resistors = tuple(part for part in before.resistors if set(parts[part].nets()) - nets)
    return _resistors_ahead(analysis, clause, ref, pole, resistors, before, facts) if resistors else None


def _resistors_ahead(
    analysis: Analysis, clause: Clause, ref: str, pole: str, resistors: tuple[str, ...], before: Before, facts: tuple[Fact, ...]
) -> Verdict:
    """A resistor ahead of the fuse draws little as long as it is whole; whether it may be trusted is its maker's statement."""
    parts = resistors[:6]
    because = f"{', '.join(parts)} hang{'s' * (len(parts) == 1)} on {pole} ahead of fuse {', '.join(before.fuses)}"
    step = Step(because, (*facts, *(analysis.design.parts[part].fact for part in parts)))
    missing = Missing(
        "whether a short of this resistor has to be assumed", "a concession with the test of the resistor, or the resistor behind "
        "the fuse",
        (("it passed the tests for resistors across insulation or the line", "pass with a concession"), ("no", "fail")),
        parts[0],
    )  # fmt: skip
    return clause.opens(
        Subject((*parts, *before.fuses), (pole,), key=(ref, "fuse")), "A resistor is tapped ahead of the fuse.", because, step,
        missing, level="warning",
    )  # fmt: skip


def _unprotected(analysis: Analysis, before: Before, other_poles: list[Before]) -> dict[str, None]:
    """Loads on a pole ahead of its fuse; one that reaches the other pole only behind a fuse cannot draw an unfused current."""
    found: dict[str, None] = {}
    others = {net for other in other_poles for net in other.nets}
    for ref in before.loads:
        nets = set(analysis.design.parts[ref].nets())
        if analysis.kind(ref) in ("common-mode-choke", "filter"):
            if nets & set(before.nets) and nets & others:
                found[ref] = None
        elif nets - set(before.nets):
            found[ref] = None
    return found


def _without(
    analysis: Analysis, clause: Clause, ref: str, entry: Entry, reached: dict[str, Before], taken: frozenset[str], what: str
) -> Verdict:
    """The verdict of an entry without a fuse of its own; taken: fuses that stand behind some entry."""
    part = analysis.design.parts[ref]
    fuses = [name for name, candidate in analysis.choice.items() if candidate.kind == "fuse"]
    left_out = [name for name in fuses if not analysis.design.parts[name].fitted]
    in_neutral = [fuse for pole, before in reached.items() if pole == entry.neutral for fuse in before.fuses]
    resettable = [name for before in reached.values() for name in before.passed if analysis.kind(name) == "resettable-fuse"]
    elsewhere = [name for name in fuses if name not in taken and analysis.design.parts[name].fitted and _on_mains(analysis, name)]
    loads = tuple(dict.fromkeys(load for before in reached.values() for load in before.loads))
    subject = Subject((ref, *(left_out or in_neutral or resettable or elsewhere)[:4]), entry.poles, key=(ref, "fuse"))
    step = Step(
        f"from {ref} on {', '.join(entry.poles)}: no fitted fuse before {', '.join(loads[:6]) or 'the rest of the circuit'}",
        (part.fact,),
    )
    if in_neutral:
        because = f"fuse {', '.join(in_neutral)} stands in the neutral; the line of {ref} has none"
        return clause.fails(subject, "The fuse is not in the line.", because, step)
    if left_out:
        return clause.fails(
            subject, "The fuse is not fitted.", f"{', '.join(left_out)} is not fitted, and the line of {ref} has no other", step
        )
    fusible = [name for before in reached.values() for name in before.resistors if _is_fusible(analysis, name)]
    if fusible:
        missing = Missing(
            "whether the fusible resistor is approved to open the supply", "a concession with its approval, or a fuse",
            (("yes", "pass with a concession"), ("no", "fail")),
            fusible[0],
        )  # fmt: skip
        because = f"{', '.join(fusible)} is a fusible resistor, and the line of {ref} has no fuse"
        return clause.opens(Subject((ref, *fusible[:4]), entry.poles, key=(ref, "fuse")), what, because, step, missing)
    if elsewhere and not loads:
        missing = Missing(
            "which conductor the fuse protects",
            "parts in the declaration (kind of the parts between entry and fuse)",
            (("the line", "pass"), ("another", "fail")),
        )
        because = f"fuse {', '.join(elsewhere)} is on the mains side, but the way from {ref} to it is not recognised"
        return clause.opens(subject, what, because, step, missing)
    if elsewhere:
        because = f"{', '.join(loads[:6])} {'is' if len(loads) == 1 else 'are'} met before fuse {', '.join(elsewhere)}"
        subject = Subject((*loads[:6], *elsewhere[:4]), entry.poles, key=(ref, "fuse"))
        return clause.fails(subject, "A part is tapped ahead of the fuse.", because, step)
    extra = f"; {', '.join(resettable)} limits but does not open the circuit" if resettable else ""
    return clause.fails(subject, "There is no fuse at the supply entry.", step.text + extra, step)


def _is_fusible(analysis: Analysis, ref: str) -> bool:
    part = analysis.design.parts[ref]
    return any("fusib" in part.text(name).casefold() for name in ("value", "description", "symbol"))


def _on_mains(analysis: Analysis, ref: str) -> bool:
    return any(
        analysis.isolation.domains[analysis.isolation.domain_of[net]].hazard == "mains"
        for net in analysis.design.parts[ref].nets()
        if net in analysis.isolation.domain_of
    )


RULE = Rule("fuse", "fire", Params, ask, __doc__ or "")
