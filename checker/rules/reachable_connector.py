"""Can a person touch a hazardous voltage at a connector?

A connector that a user can reach must carry nothing above the touchable voltage (ES1 of IEC 62368-1 table 4: 60 V d.c.,
30 V r.m.s., 42.4 V peak). The rule looks at every fitted connector:

- on the mains side, or on a d.c. source above the limit: fail, unless it is the supply entry or mains wiring (its contacts
  lead to line, neutral, earth or switched line only), or the declaration lists it under `unreachable`;
- on a declared output or rail: its voltage against the limit;
- on a circuit kept apart from the hazard whose voltage nobody states: no verdict here, the stress rules bound it.

Open: mains wiring on a connector that is not the supply entry (is it in a closed terminal box?). To settle it: list the
connector under `unreachable:` in the declaration, or move it behind a barrier.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.clause import Clause, Subject
from checker.model.declaration import Output, Range
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Number, Verdict, Words
from checker.parameters import AtMost


@dataclass(frozen=True, slots=True)
class Params:
    """The touchable voltage, V."""

    dc: Annotated[float, AtMost("V", "dc")] = 60.0
    rms: Annotated[float, AtMost("V", "rms")] = 30.0
    peak: Annotated[float, AtMost("V", "peak")] = 42.4


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per connector that carries a net of known hazard or voltage."""
    found = {**analysis.stress.entries, **analysis.stress.direct_entries}
    supply_entries = {*found, *(ref for entry in found.values() for ref in entry.also)}
    lines = analysis.stress.lines
    outputs = {output.net: output for output in analysis.declaration.outputs}
    for ref, candidate in analysis.choice.items():
        if candidate.kind not in ("connector", "inlet") or not analysis.design.parts[ref].fitted:
            continue
        nets = [net for net in analysis.design.parts[ref].nets() if net in analysis.isolation.domain_of]
        hazardous = [net for net in nets if _hazard(analysis, net, clause.params)]
        if hazardous:
            yield _of_hazard(analysis, clause, ref, tuple(hazardous), ref in supply_entries, lines)
            continue
        rails = [outputs[net] for net in nets if net in outputs]
        if rails:
            yield _of_rail(analysis, clause, ref, max(rails, key=lambda output: output.voltage.high))


def _hazard(analysis: Analysis, net: str, params: Params) -> bool:
    hazard = analysis.isolation.domains[analysis.isolation.domain_of[net]].hazard
    if hazard != "dc":
        return hazard == "mains"
    direct = [supply.voltage.high for supply in analysis.setting.supplies if supply.kind == "dc"]
    return not direct or max(direct) > params.dc


def _of_hazard(analysis: Analysis, clause: Clause, ref: str, nets: tuple[str, ...], entry: bool, lines: frozenset[str]) -> Verdict:
    part = analysis.design.parts[ref]
    domain = analysis.isolation.domains[analysis.isolation.domain_of[nets[0]]]
    step = Step(f"{ref} carries {', '.join(nets[:6])} of {domain.name}", (part.fact, domain.step))
    subject = Subject((ref,), nets, key=(ref,))
    declared = analysis.declaration.unreachable.get(ref)
    if declared is not None:
        step = Step(step.text + "; declared unreachable", (*step.inputs, Fact("unreachable", ref, declared)))
        return clause.passes(subject, "A connector on the hazardous side that no user reaches.", f"{step.text}", step)
    if entry:
        return clause.does_not_apply(subject, "This connector is the supply entry.", step.text, step)
    missing = Missing(
        "whether a user can reach it",
        f"unreachable: [{ref}] in the declaration",
        (("no user can reach it", "pass"), ("a user can", "fail")),
        ref,
    )
    if _is_wiring(analysis, ref, lines) if domain.hazard == "mains" else not _meets_signals(analysis, nets):
        what = "Supply wiring leaves the board at a connector that is not the supply entry."
        return clause.opens(subject, what, step.text, step, missing)
    if not analysis.choice[ref].sure:
        return clause.opens(subject, "A part that may be a connector carries the hazardous side.", step.text, step, missing)
    what = "A connector that a user can reach carries the hazardous side."
    limit = Words(f"{clause.params.dc:g} V d.c., {clause.params.rms:g} V r.m.s., {clause.params.peak:g} V peak")
    return clause.fails(subject, what, step.text, step, found=Words(domain.hazard), limit=limit)


def _meets_signals(analysis: Analysis, nets: tuple[str, ...]) -> bool:
    """Whether a connector of a d.c. side carries signals: more than a pair of nets, one of which meets an integrated circuit."""
    if len(nets) <= 2:
        return False
    refs = {ref for net in nets for ref, _ in analysis.design.nets[net].pins if ref in analysis.choice}
    return any(analysis.kind(ref) in ("ic", "controller", "module", "regulator", "optocoupler", "digital-isolator") for ref in refs)


def _of_rail(analysis: Analysis, clause: Clause, ref: str, output: Output) -> Verdict:
    voltage: Range = output.voltage
    form = voltage.form or "dc"
    limit = {"rms": clause.params.rms, "peak": clause.params.peak}.get(form, clause.params.dc)
    fact = Fact("output", output.net, voltage.source, text=voltage.text)
    step = Step(
        f"{output.net} is declared as {voltage.text or voltage.high}",
        (fact, analysis.design.parts[ref].fact),
        result=voltage.high,
        unit="V",
        form=form,
    )
    subject = Subject((ref,), (output.net,), key=(ref,))
    if ref in analysis.declaration.unreachable:
        return clause.passes(subject, "An output connector that no user reaches.", "declared unreachable", step)
    return clause.at_most(
        subject, "Voltage a person can touch at this connector, in normal use as declared.", f"{ref} carries {output.net}", step,
        surely=Number(voltage.low, "V", form), never_above=Number(voltage.high, "V", form), limit=Number(limit, "V", form),
        missing=Missing("the highest voltage of this output", "outputs in the declaration, as a single figure", (), ref),
    )  # fmt: skip


def _is_wiring(analysis: Analysis, ref: str, lines: frozenset[str]) -> bool:
    """Whether every mains net of a connector is a line conductor: an outlet or a load terminal, not a signal."""
    isolation = analysis.isolation
    for net in analysis.design.parts[ref].nets():
        if net in isolation.domain_of and isolation.domains[isolation.domain_of[net]].hazard == "mains" and net not in lines:
            return False
    return True


RULE = Rule("reachable-connector", "shock", Params, ask, __doc__ or "")
