"""Steps and facts as the report shows them: steps by number, facts as places."""

from __future__ import annotations

from collections.abc import Iterable

from checker.formulas.rounding import significant
from checker.model.fact import Fact, Source
from checker.model.report import Evidence, StepShown
from checker.model.step import Step


class Steps:
    """Numbers steps in the order they are first shown, inputs before what rests on them."""

    def __init__(self) -> None:
        self._ids: dict[int, str] = {}
        self._kept: list[Step] = []  # a step that is gone would leave its id() to another
        self.shown: list[StepShown] = []

    def id(self, step: Step | None) -> str | None:
        """The number of a step, which is shown from now on with all it rests on; None for None."""
        if step is None:
            return None
        stack: list[tuple[Step, bool]] = [(step, False)]
        while stack:
            at, ready = stack.pop()
            if id(at) in self._ids:
                continue
            if not ready:
                stack.append((at, True))
                stack.extend((link, False) for link in reversed(at.inputs) if isinstance(link, Step))
                continue
            self._ids[id(at)] = f"s{len(self.shown) + 1}"
            self._kept.append(at)
            self.shown.append(
                StepShown(
                    id=self._ids[id(at)],
                    text=at.text,
                    formula=at.formula,
                    inputs=[self._ids[id(link)] for link in at.inputs if isinstance(link, Step)],
                    result=significant(at.result) if isinstance(at.result, float) else at.result,
                    unit=at.unit,
                    form=at.form,
                    citation=at.citation,
                    evidence=evidence(link for link in at.inputs if isinstance(link, Fact)),
                )
            )
        return self._ids[id(step)]


def evidence(facts: Iterable[Fact]) -> list[Evidence]:
    """Facts with their places, each statement of each place once."""
    found: dict[tuple[Source, str], Evidence] = {}
    for fact in facts:
        said = fact.text or (f"{fact.value:g} {fact.unit}".strip() if isinstance(fact.value, float) else str(fact.value))
        text = f"{fact.attribute}: {said}"
        place = fact.source
        found.setdefault(
            (place, text), Evidence(path=place.path, line=place.line, column=place.column, cell=place.cell or None, text=text)
        )
    return list(found.values())
