"""Is there a fuse in the line, before what it must protect?

Equipment on the mains needs a protective device that opens the supply when a part behind it fails short. It belongs in
the line conductor; where the supply entry has two poles and no polarity (protection class II), either pole will do. What
lies before it must be wiring: inlet, switch, terminals. A varistor, a rectifier, a converter module or a transformer that is
tapped ahead of the fuse is not protected by it. A line capacitor ahead of the fuse is accepted and mentioned.

Per supply entry: pass when every load behind a pole is reached through a fitted fuse; fail when there is no fuse, when the
fuse is not fitted, when it stands in the neutral of a polarised or class I entry alone, or when a load is tapped before it.
A resettable thermistor is no fuse: it limits, it does not open the circuit. Open when the board has a mains side but no
connector that is recognised as its entry.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.clause import Clause, Subject
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Verdict, Words
from checker.rules.supply_entry import Entry, entries

# carried past on the way to the fuse: still the same conductor
_ON_THE_WAY = frozenset(
    {
        "switch",
        "jumper",
        "net-tie",
        "test-point",
        "connector",
        "inlet",
        "ferrite",
        "inductor",
        "common-mode-choke",
        "filter",
        "thermistor",
    }
)
_LOADS = frozenset(
    "varistor gas-tube tvs bridge diode transformer isolated-module thyristor controller mosfet bipolar igbt regulator ic module "
    "lamp motor optocoupler led zener".split()
)


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters."""


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per supply entry of the mains side."""
    if analysis.setting.mains is None or not any(domain.hazard == "mains" for domain in analysis.isolation.domains.values()):
        return
    found = entries(analysis)
    if not found:
        yield _no_entry(analysis, clause)
    for ref, entry in found.items():
        yield _of_entry(analysis, clause, ref, entry)


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


def _of_entry(analysis: Analysis, clause: Clause, ref: str, entry: Entry) -> Verdict:
    what = "Fuse in the line, before what it must protect."
    line = [entry.line] if entry.line else [pole for pole in entry.poles if pole != entry.neutral]
    either = len(entry.poles) <= 2 and not entry.earth and analysis.setting.protection_class != "I"
    poles = list(entry.poles) if either else line
    reached = {pole: _before(analysis, pole) for pole in entry.poles}
    fuses = [fuse for pole in poles for fuse in reached[pole].fuses]
    key = Subject((ref, *dict.fromkeys(fuses)), entry.poles, key=(ref, "fuse"))
    facts = (analysis.design.parts[ref].fact, *(analysis.design.parts[fuse].fact for fuse in dict.fromkeys(fuses)))
    if not fuses:
        return _without(analysis, clause, ref, entry, reached, what)
    # the pole with the fewest parts before its fuse is the one the fuse is meant for
    best = min((pole for pole in poles if reached[pole].fuses), key=lambda pole: len(reached[pole].loads))
    before = reached[best]
    tapped = _unprotected(analysis, before, [reached[pole] for pole in entry.poles if pole != best and not reached[pole].fuses])
    step = Step(
        f"from {ref} on {best}: fuse {', '.join(before.fuses)}, before it {', '.join(before.passed) or 'only wiring'}", facts
    )
    if tapped:
        parts = tuple(tapped)
        ahead = f"{', '.join(parts[:6])} hang{'s' * (len(parts) == 1)} on {best} ahead of fuse {', '.join(before.fuses)}"
        because = f"{ahead}, which cannot clear a short there"
        step = Step(because, (*facts, *(analysis.design.parts[part].fact for part in parts[:6])))
        return clause.fails(
            Subject((*parts[:6], *before.fuses), (best,), key=(ref, "fuse")), "A part is tapped ahead of the fuse.", because, step
        )
    because = step.text + (f"; line capacitor {', '.join(before.capacitors)} stands ahead of it" if before.capacitors else "")
    return clause.passes(key, what, because, step, found=Words(", ".join(before.fuses)))


@dataclass(frozen=True, slots=True)
class _Before:
    """What a pole meets before any fuse: fuses that end it, parts passed, loads tapped, line capacitors."""

    fuses: tuple[str, ...]
    passed: tuple[str, ...]
    loads: tuple[str, ...]
    capacitors: tuple[str, ...]
    nets: tuple[str, ...]


def _before(analysis: Analysis, pole: str) -> _Before:
    """What a pole meets before a fuse. Contacts, triacs and current transformers hand the line to a load outside the board, whose
    protection is not this board's; they are neither loads nor a way to the fuse.

    Walk a pole's conductor up to its fuses. A choke or filter is passed on the pins that share its winding, unknown ones
    on all."""
    nets, fuses, passed, loads, capacitors = (
        {pole: None},
        dict[str, None](),
        dict[str, None](),
        dict[str, None](),
        dict[str, None](),
    )
    queue = [pole]
    for net in queue:
        for ref, _ in analysis.design.nets[net].pins:
            part = analysis.design.parts.get(ref)
            if part is None or not part.fitted:
                continue
            kind = analysis.kind(ref)
            if kind == "fuse":
                fuses[ref] = None
            elif kind == "capacitor":
                capacitors[ref] = None
            elif kind in ("connector", "inlet", "test-point"):
                continue
            elif kind in _ON_THE_WAY or kind == "resettable-fuse":
                passed[ref] = None
                if len(part.nets()) == 2:
                    for other in part.nets():
                        if other not in nets:
                            nets[other] = None
                            queue.append(other)
                else:
                    loads[ref] = None
            elif kind in _LOADS:
                loads[ref] = None
    loads_only = tuple(ref for ref in loads if ref not in fuses)
    return _Before(tuple(fuses), tuple(passed), loads_only, tuple(capacitors), tuple(nets))


def _unprotected(analysis: Analysis, before: _Before, other_poles: list[_Before]) -> dict[str, None]:
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


def _without(analysis: Analysis, clause: Clause, ref: str, entry: Entry, reached: dict[str, _Before], what: str) -> Verdict:
    part = analysis.design.parts[ref]
    fuses = [name for name, candidate in analysis.choice.items() if candidate.kind == "fuse"]
    left_out = [name for name in fuses if not analysis.design.parts[name].fitted]
    in_neutral = [fuse for pole, before in reached.items() if pole == entry.neutral for fuse in before.fuses]
    resettable = [name for before in reached.values() for name in before.passed if analysis.kind(name) == "resettable-fuse"]
    elsewhere = [name for name in fuses if analysis.design.parts[name].fitted and _on_mains(analysis, name)]
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
        return clause.fails(subject, "A part is tapped ahead of the fuse.", because, step)
    extra = f"; {', '.join(resettable)} limits but does not open the circuit" if resettable else ""
    return clause.fails(subject, "There is no fuse at the supply entry.", step.text + extra, step)


def _on_mains(analysis: Analysis, ref: str) -> bool:
    return any(
        analysis.isolation.domains[analysis.isolation.domain_of[net]].hazard == "mains"
        for net in analysis.design.parts[ref].nets()
        if net in analysis.isolation.domain_of
    )


RULE = Rule("fuse", "fire", Params, ask, __doc__ or "")
