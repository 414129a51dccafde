"""How much current flows through a person who touches the output?

Capacitors between the mains side and a circuit that people can touch let a current through, by their capacitance, the highest
supply voltage with its tolerance and the highest frequency. All of them count together: from either pole, from the rectified
line, and through chains. The current is judged over the states of the supply: connected either way round, and, where the
ruleset says so, with one pole alone connected, as a switch or fuse leaves it: then the whole mains side rides on that pole. In
protection class I, protective earth and what is bonded to it are judged with the earth conductor interrupted, against a limit
of their own. Capacitors that do not state a tolerance may have 20 % more than their value.

Per circuit that is no mains side: pass when the current is never above the limit, r.m.s. and peak; fail when even the lowest
capacitances let more through; open when a value is not known, or when only the tolerance decides. The finding is what flows
into an earthed circuit; the network that stands for a person (IEC 60990 figure 4) reads slightly less.

The capacitance of windings and what a module contains are not in the files, so they are not included; tens of picofarads
add some microamperes. A circuit that is fed by a module alone is therefore left to the approval of the module.

To settle it: value and tolerance of the capacitors, and `supply` in the declaration.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Annotated

from checker.model.clause import Clause, Subject
from checker.model.domain import Domain
from checker.model.order import natural
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Number, Verdict
from checker.parameters import AtMost, Flag
from checker.rules.leakage import CIRCUIT, EARTH, Network, earth_open, network, one_pole, polarities
from checker.rules.leakage_current import Leak, mains, missing, said, smaller, state_steps, worst

_NOT_INCLUDED = "capacitance of windings and wiring is not in the files and not included"


@dataclass(frozen=True, slots=True)
class Params:
    """Touch current in normal use, r.m.s. and peak; fault: with protective earth interrupted.

    open_pole: whether the limit of normal use also holds with one pole of the supply alone connected.
    """

    rms: Annotated[float, AtMost("A", "rms")] = 0.0005
    peak: Annotated[float, AtMost("A", "peak")] = 0.000707
    fault_rms: Annotated[float, AtMost("A", "rms")] = 0.005
    fault_peak: Annotated[float, AtMost("A", "peak")] = 0.00707
    open_pole: Annotated[bool, Flag()] = True


@dataclass(frozen=True, slots=True)
class _Touched:
    """A circuit that a person touches. words: how it is called; key: stable name for the fingerprint; nets: where it is tied."""

    words: str
    key: tuple[str, ...]
    nets: tuple[str, ...]


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per circuit that people can touch, and one per circuit that an interrupted earth conductor makes live."""
    supply, isolation, params = mains(analysis), analysis.isolation, clause.params
    if supply is None or not any(domain.hazard == "mains" for domain in isolation.domains.values()):
        return
    whole = network(analysis)
    around, tied = whole.around(), _tied(analysis, whole)
    turned = polarities(analysis)
    normal = (*turned, one_pole(analysis)) if params.open_pole else turned
    fault = earth_open(turned)
    for name, domain in isolation.domains.items():
        if domain.hazard or domain.side in ("primary", "earth") or name in whole.earths or domain.accessible is False:
            continue
        node, key, nets = (CIRCUIT, name), _anchor(domain), tied.get(name) or domain.nets[:1]
        leak = Leak(around(node), node, normal, supply, params.rms, params.peak, person=True)
        if not leak.around.ties:
            yield from _untied(analysis, clause, domain, key, nets)
            continue
        yield _judged(clause, leak, _Touched(name, (key, "touch"), nets))
        if any((EARTH, "") in tie.ends for tie in leak.around.ties):
            broken = replace(leak, states=fault, rms=params.fault_rms, peak=params.fault_peak)
            yield _judged(clause, broken, _Touched(name, (key, "touch", "earth"), nets))
    if whole.earths:
        nets = tuple(net for name in whole.earths for net in tied.get(name) or isolation.domains[name].nets[:1])
        node = (EARTH, "")
        leak = Leak(around(node), node, fault, supply, params.fault_rms, params.fault_peak, person=True)
        yield _of_earth(analysis, clause, leak, whole.earths, nets)


def _of_earth(analysis: Analysis, clause: Clause, leak: Leak, earths: tuple[str, ...], nets: tuple[str, ...]) -> Verdict:
    touched = _Touched(f"protective earth ({', '.join(earths)})", ("earth", "touch"), nets)
    if leak.around.ties:
        return _judged(clause, leak, touched)
    step = Step(f"no capacitor ties {touched.words} to the mains", tuple(analysis.isolation.domains[name].step for name in earths))
    what = "Touch current of protective earth, its conductor interrupted."
    return clause.passes(Subject((), nets, key=touched.key), what, step.text, step, found=Number(0.0, "A", "rms"))


def _judged(clause: Clause, leak: Leak, touched: _Touched) -> Verdict:
    reading = worst(leak.readings())
    because = said(leak, touched.words, reading)
    step = Step(f"{because}; {_NOT_INCLUDED}", state_steps(leak), "largest of the states", reading.never_above, "A", reading.form)
    return clause.at_most(
        Subject(leak.refs, touched.nets, touched.key, reading.state.text), f"Touch current of {touched.words}.", because, step,
        surely=reading.number(reading.surely),
        never_above=None if leak.around.unread else reading.number(reading.never_above),
        limit=reading.number(reading.limit),
        missing=missing(leak, reading),
        remedy=smaller(leak) if reading.surely > reading.limit else None,
    )  # fmt: skip


def _untied(analysis: Analysis, clause: Clause, domain: Domain, key: str, nets: Sequence[str]) -> Iterator[Verdict]:
    """A circuit that no capacitor ties to the mains: asked about where a person can get at it."""
    outlets = [ref for ref in domain.parts if analysis.kind(ref) == "connector" and analysis.design.parts[ref].fitted]
    if not outlets and not domain.accessible:
        return
    crossings = [crossing for crossing in analysis.isolation.crossings if domain.name in crossing.between]
    modules = [
        crossing
        for crossing in crossings
        if analysis.kind(crossing.part) == "isolated-module" and _live(analysis, crossing.between)
    ]
    subject = Subject(tuple(crossing.part for crossing in modules), tuple(nets), (key, "touch"))
    what = f"Touch current of {domain.name}."
    if modules:
        refs = ", ".join(crossing.part for crossing in modules)
        text = f"no capacitor of the board ties {domain.name} to the mains; what is inside {refs} is left to its approval"
        step = Step(text, tuple(crossing.step for crossing in modules))
        yield clause.does_not_apply(subject, what, text, step)
        return
    step = Step(f"no capacitor ties {domain.name} to the mains; {_NOT_INCLUDED}", (domain.step, *(c.step for c in crossings[:8])))
    yield clause.passes(subject, what, step.text, step, found=Number(0.0, "A", "rms"))


def _live(analysis: Analysis, between: tuple[str, str]) -> bool:
    return any(analysis.isolation.domains[name].hazard == "mains" for name in between)


def _anchor(domain: Domain) -> str:
    """A name for the circuit that does not change with automatic net names."""
    return domain.name if domain.named else min(domain.parts, key=natural, default=domain.name)


def _tied(analysis: Analysis, whole: Network) -> dict[str, tuple[str, ...]]:
    """Circuit -> its nets that the capacitors hang on."""
    found: dict[str, dict[str, None]] = {}
    for ref in dict.fromkeys(tie.ref for tie in whole.ties):
        for net in analysis.design.parts[ref].nets():
            name = analysis.isolation.domain_of.get(net)
            if name is not None:
                found.setdefault(name, {})[net] = None
    return {name: tuple(nets) for name, nets in found.items()}


RULE = Rule("touch-current", "shock", Params, ask, __doc__ or "")
