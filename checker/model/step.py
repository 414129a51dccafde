"""One link of a derivation. Every number and every decision ends in steps, every step in facts."""

from __future__ import annotations

from dataclasses import dataclass

from checker.model.fact import Fact


@dataclass(frozen=True, slots=True)
class Step:
    """text: one plain sentence. formula: the equation, "" for a decision. result: number in `unit`, text, or None.

    inputs: the steps and facts it rests on. citation: document, clause, equation; "" for plain graph reasoning.
    """

    text: str
    inputs: tuple[Step | Fact, ...] = ()
    formula: str = ""
    result: float | str | None = None
    unit: str = ""
    form: str = ""
    citation: str = ""

    def facts(self) -> tuple[Fact, ...]:
        """Every fact the step rests on, directly or through other steps, each once, in first-seen order."""
        seen: dict[int, None] = {}
        found: dict[Fact, None] = {}
        stack: list[Step | Fact] = [self]
        while stack:
            link = stack.pop()
            if isinstance(link, Fact):
                found[link] = None
            elif id(link) not in seen:
                seen[id(link)] = None
                stack.extend(reversed(link.inputs))
        return tuple(found)
