"""How much current flows in the protective conductor?

In protection class I the capacitors from the mains side to protective earth, and to circuits bonded to it, send a current
through the protective conductor in normal use. All of them count together, at the highest supply voltage with its tolerance,
the highest frequency and the upper end of their tolerances, with the supply connected either way round.

Pass when the r.m.s. current is never above the limit. Above it equipment needs a marking and a larger protective conductor, and
the current may not exceed a share of the input current: open, since the files show neither; fail when even that share is surely
exceeded, by the declared power of the supply. Open too when a value is not known or only the tolerance decides.

To settle it: value and tolerance of the capacitors, `supply` in the declaration, smaller capacitors, or a concession.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.clause import Clause, Subject
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Limit, Missing, Number, Verdict
from checker.parameters import AtMost, Ratio
from checker.rules.leakage import EARTH, network, polarities
from checker.rules.leakage_current import Leak, Reading, amount, mains, missing, said, smaller, state_steps, worst

LEAST_POWER_SHARE = 0.2  # efficiency times power factor is surely more (common practice, no source)
_WHAT = "Current in the protective conductor."


@dataclass(frozen=True, slots=True)
class Params:
    """rms: what needs no further measures. share: of the input current, what no measure allows to exceed."""

    rms: Annotated[float, AtMost("A", "rms")] = 0.005
    share: Annotated[float, Ratio()] = 0.05


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict for a design with protective earth."""
    supply = mains(analysis)
    if supply is None or not any(domain.hazard == "mains" for domain in analysis.isolation.domains.values()):
        return
    whole = network(analysis)
    if not whole.earths:
        yield _without_earth(analysis, clause)
        return
    node = (EARTH, "")
    leak = Leak(whole.around()(node), node, polarities(analysis), supply, clause.params.rms, 0.0, person=False)
    nets = tuple(net for name in whole.earths for net in analysis.isolation.domains[name].nets[:2])
    if leak.around.ties:
        yield _judged(analysis, clause, leak, nets)
        return
    step = Step("no capacitor ties protective earth to the mains", tuple(analysis.isolation.domains[n].step for n in whole.earths))
    subject = Subject((), nets, ("earth-current",))
    yield clause.passes(subject, _WHAT, step.text, step, found=Number(0.0, "A", "rms"))


def _without_earth(analysis: Analysis, clause: Clause) -> Verdict:
    protection, subject = analysis.setting.protection_class, Subject(key=("earth-current",))
    step = Step(f"protection class {protection}, no protective earth on the board", analysis.setting.facts)
    if protection == "I":
        return clause.does_not_apply(subject, "There is no protective conductor, though class I needs one.", step.text, step)
    return clause.passes(subject, _WHAT, step.text, step, found=Number(0.0, "A", "rms"))


def _judged(analysis: Analysis, clause: Clause, leak: Leak, nets: tuple[str, ...]) -> Verdict:
    reading = worst(leak.readings())
    because = said(leak, "protective earth", reading)
    step = Step(because, state_steps(leak), "largest of the states", reading.never_above, "A", reading.form)
    subject = Subject(leak.refs, nets, ("earth-current",), reading.state.text)
    if reading.surely > reading.limit:
        return _too_much(analysis, clause, leak, subject, reading, step)
    return clause.at_most(
        subject, _WHAT, because, step,
        surely=reading.number(reading.surely),
        never_above=None if leak.around.unread else reading.number(reading.never_above),
        limit=reading.number(reading.limit),
        missing=missing(leak, reading),
    )  # fmt: skip


def _too_much(analysis: Analysis, clause: Clause, leak: Leak, subject: Subject, reading: Reading, step: Step) -> Verdict:
    """More than needs no measures: a fail when it also exceeds the share of what the declared power can draw."""
    share, declared = clause.params.share, analysis.setting.mains
    shown = Limit(reading.limit, "A", "rms", "at-most", clause.verified)
    if declared is not None and declared.power is not None:
        drawn = declared.power.high / (LEAST_POWER_SHARE * declared.voltage.low)
        if reading.surely > max(share * drawn, reading.limit):
            because = f"{step.text}; more than {100 * share:g} % of the input current, which is surely below {amount(drawn, 'A')}"
            margin = (reading.limit - reading.surely) / reading.limit
            found = reading.number(reading.surely)
            return clause.fails(subject, _WHAT, because, step, found=found, limit=shown, margin=margin, remedy=smaller(leak))
    measures = Missing(
        "the measures for a high protective conductor current",
        "a smaller capacitor, or a concession that names the marking and the protective conductor",
        (
            (f"marked, with a larger conductor, at most {100 * share:g} % of the input current", "pass with a concession"),
            ("none of these", "fail"),
        ),
    )
    return clause.opens(subject, _WHAT, step.text, step, measures, found=reading.number(reading.never_above), limit=shown)


RULE = Rule("earth-current", "shock", Params, ask, __doc__ or "")
