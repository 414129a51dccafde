"""Can a person touch a hazardous voltage at a connector?

A connector that a user can reach must carry nothing above the touchable voltage (ES1 of IEC 62368-1 table 4: 60 V d.c.,
30 V r.m.s., 42.4 V peak). The rule looks at every fitted connector:

- on the mains side, or on a d.c. source above the limit: fail, unless it is the supply entry or mains wiring (its contacts
  lead to line, neutral, earth or switched line only), or the declaration lists it under `unreachable`;
- on a declared output or rail: its voltage against the limit;
- on another circuit kept apart from the hazard: the highest voltage between two of its nets in normal use, out of regulators,
  rail names and windings. Signals that nothing bounds give no verdict.

Open: mains wiring on a connector that is not the supply entry (is it in a closed terminal box?), or an output that a rectifier
feeds from a winding and whose voltage nobody states. To settle it: list the connector under `unreachable:` in the declaration,
move it behind a barrier, or state the output under `supply.outputs`.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import combinations
from typing import Annotated

from checker.model.clause import Clause, Subject
from checker.model.declaration import Output, Range
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.stress import Voltage
from checker.model.verdict import Missing, Number, Verdict, Words
from checker.parameters import AtMost


@dataclass(frozen=True, slots=True)
class Params:
    """The touchable voltage, V."""

    dc: Annotated[float, AtMost("V", "dc")] = 60.0
    rms: Annotated[float, AtMost("V", "rms")] = 30.0
    peak: Annotated[float, AtMost("V", "peak")] = 42.4


@dataclass(frozen=True, slots=True)
class _Touched:
    """What a person can touch between two nets against its limit: surely reached, and never exceeded (inf: not bounded), V."""

    sure: float
    most: float
    limit: Number
    step: Step

    @property
    def doubtful(self) -> bool:
        return self.sure <= self.limit.value < self.most


def _touched(voltage: Voltage, params: Params) -> _Touched:
    """The figure that has a limit: the direct voltage, the r.m.s. value, or the peak of a mixture, which only proves a pass."""
    bounds, limit, form = {
        "dc": (voltage.rms, params.dc, "dc"),
        "ac": (voltage.rms, params.rms, "rms"),
    }.get(voltage.shape, (replace(voltage.peak, surely=0.0), params.peak, "peak"))  # fmt: skip
    most = math.inf if bounds.never_above is None else bounds.never_above
    return _Touched(bounds.surely, most, Number(limit, "V", form), bounds.step)


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
        elif analysis.isolation.separations:
            yield from _of_circuit(analysis, clause, ref, nets)


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


def _of_circuit(analysis: Analysis, clause: Clause, ref: str, nets: list[str]) -> Iterator[Verdict]:
    """The worst pair of nets of a connector in normal use; nothing where it carries signals that nothing bounds."""
    pairs = list(combinations(nets, 2))
    known = {pair: _touched(voltage, clause.params) for pair in pairs if (voltage := analysis.stress.between(*pair))}
    worst = max(known, key=lambda pair: known[pair].sure / known[pair].limit.value, default=None)
    if worst is None or known[worst].sure <= known[worst].limit.value:
        doubtful = [pair for pair in pairs if (known[pair].doubtful if pair in known else analysis.stress.mean_sign(*pair))]
        if not doubtful and len(known) < len(pairs):
            return
        worst = doubtful[0] if doubtful else max(known, key=lambda pair: known[pair].most / known[pair].limit.value, default=None)
    if worst is None or (worst in known and known[worst].most == 0):
        return
    yield _of_pair(analysis, clause, ref, worst, known.get(worst))


def _of_pair(analysis: Analysis, clause: Clause, ref: str, pair: tuple[str, str], touched: _Touched | None) -> Verdict:
    subject, carries = Subject((ref,), pair, key=(ref,)), f"{ref} carries {pair[0]} and {pair[1]}"
    fact = analysis.design.parts[ref].fact
    step = Step(carries, (fact, touched.step)) if touched else Step(f"{carries}; nothing bounds the voltage between them", (fact,))
    if ref in analysis.declaration.unreachable:
        return clause.passes(subject, "An output connector that no user reaches.", "declared unreachable", step)
    limit = touched.limit if touched else Number(clause.params.dc, "V", "dc")
    what = "Voltage a person can touch at this connector, in normal use."
    missing = Missing(
        f"voltage between {pair[0]} and {pair[1]}",
        f"outputs in the declaration (supply: {{outputs: {{{pair[0]}: 12 V}}}})",
        ((f"at most {limit.value:g} V", "pass"), ("more", "fail")),
        ref,
    )
    if touched is None:
        return clause.opens(subject, what, step.text, step, missing)
    most = replace(limit, value=touched.most) if math.isfinite(touched.most) else None
    sure = replace(limit, value=touched.sure)
    return clause.at_most(subject, what, carries, step, surely=sure, never_above=most, limit=limit, missing=missing)


def _is_wiring(analysis: Analysis, ref: str, lines: frozenset[str]) -> bool:
    """Whether every mains net of a connector is a line conductor: an outlet or a load terminal, not a signal."""
    isolation = analysis.isolation
    for net in analysis.design.parts[ref].nets():
        if net in isolation.domain_of and isolation.domains[isolation.domain_of[net]].hazard == "mains" and net not in lines:
            return False
    return True


RULE = Rule("reachable-connector", "shock", Params, ask, __doc__ or "")
