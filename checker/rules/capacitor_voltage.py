"""Does a capacitor on a declared rail keep the voltage margin of the house?

A capacitor that sits directly between a declared output or rail and its return sees the rail's voltage all the time. Its
rated voltage times the ratio for its technology must not be below that. The rule looks only at rails whose voltage and
return are declared: what it cannot bound it leaves to the stress rules.

Pass or fail by the numbers. Open, once per rail, when rated voltages are stated nowhere. The technology is taken from the
text of the part; when it is not stated the strictest ratio decides a pass and the laxest a fail.

To settle it: BOM column `Voltage`, or `ratings: {voltage: 25 V}` in a parts file or the declaration.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated

from checker.model.candidate import Candidate
from checker.model.clause import Clause, Subject
from checker.model.declaration import Output
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.verdict import Missing, Number, Verdict
from checker.parameters import Ratio


@dataclass(frozen=True, slots=True)
class Params:
    """Share of the rated voltage that may be used, by technology."""

    ceramic: Annotated[float, Ratio()] = 0.8
    film: Annotated[float, Ratio()] = 0.8
    aluminium: Annotated[float, Ratio()] = 0.9
    tantalum: Annotated[float, Ratio()] = 0.5
    polymer: Annotated[float, Ratio()] = 0.8


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per rated capacitor between a declared rail and its declared return, one per rail for those without a rating."""
    rails = {frozenset((output.net, output.return_net)): output for output in analysis.declaration.outputs if output.return_net}
    if not rails:
        return
    unrated: dict[str, list[str]] = {}
    for ref, candidate in analysis.choice.items():
        if candidate.kind == "capacitor" and analysis.design.parts[ref].fitted:
            output = rails.get(frozenset(analysis.design.parts[ref].nets()))
            if output is not None and "voltage" in candidate.ratings:
                yield _judge(analysis, clause, ref, candidate, output)
            elif output is not None:
                unrated.setdefault(output.net, []).append(ref)
    for output in rails.values():
        if output.net in unrated:
            yield _unrated(analysis, clause, tuple(unrated[output.net]), output)


def _judge(analysis: Analysis, clause: Clause, ref: str, candidate: Candidate, output: Output) -> Verdict:
    ratios = {name: getattr(clause.params, name) for name in ("ceramic", "film", "aluminium", "tantalum", "polymer")}
    said = candidate.attributes.get("technology")
    technology = str(said.value) if said is not None and said.value in ratios else ""
    strict, lax = (ratios[technology],) * 2 if technology else (min(ratios.values()), max(ratios.values()))
    rating = candidate.ratings["voltage"]
    high = Number(output.voltage.high, "V", output.voltage.form or "dc")
    rail = Fact("output", output.net, output.voltage.source, text=output.voltage.text)
    subject = Subject((ref,), (output.net,), key=(ref, "rail"))
    what = f"Voltage of a capacitor on a declared rail, with the margin for {technology or 'any technology'}."
    rated = float(rating.value)
    facts = (rail, rating) + ((said,) if said is not None else ())
    step = Step(
        f"{output.net} reaches {high.value:g} V; {ref} is rated {rated:g} V, {technology or 'technology not stated'}",
        facts, formula="U <= ratio x U_rated", result=strict * rated, unit="V", form=high.form, citation=clause.citation,
    )  # fmt: skip
    # without a technology the strictest ratio decides a pass and the laxest a fail
    usable = strict if high.value <= strict * rated or strict == lax else lax
    surely = Number(output.voltage.low, "V", high.form)
    limit = Number(usable * rated, "V", high.form)
    if not technology and strict * rated < high.value <= lax * rated:
        answers = tuple((name, "pass" if high.value <= ratio * rated else "fail") for name, ratio in ratios.items())
        missing = Missing("technology", "BOM column Technology, or its name in the description", answers, ref)
        return clause.opens(subject, what, step.text, step, missing, found=high)
    missing = Missing("the highest voltage of this rail", "outputs or rails in the declaration, as a single figure", (), ref)
    return clause.at_most(subject, what, step.text, step, surely=surely, never_above=high, limit=limit, missing=missing)


def _unrated(analysis: Analysis, clause: Clause, refs: tuple[str, ...], output: Output) -> Verdict:
    """One open verdict for all capacitors of a rail that state no rating: one question, one answer in the BOM."""
    ratios = [clause.params.ceramic, clause.params.film, clause.params.aluminium, clause.params.tantalum, clause.params.polymer]
    high = Number(output.voltage.high, "V", output.voltage.form or "dc")
    rail = Fact("output", output.net, output.voltage.source, text=output.voltage.text)
    facts = tuple(analysis.design.parts[ref].fact for ref in refs[:12])
    step = Step(f"{', '.join(refs[:12])} between {output.net} and {output.return_net}: no rated voltage is stated", (rail, *facts))
    then = ((f"{high.value / min(ratios):.3g} V or more", "pass"), (f"below {high.value / max(ratios):.3g} V", "fail"))
    missing = Missing("rated voltage", "BOM column Voltage, or ratings in a parts file", then, refs[0])
    what = "Voltage of capacitors on a declared rail: no rating is stated."
    return clause.opens(Subject(refs, (output.net,), key=(output.net, "unrated")), what, step.text, step, missing, found=high)


RULE = Rule("capacitor-voltage", "overstress", Params, ask, __doc__ or "")
