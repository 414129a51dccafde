"""How far the figures of a ruleset were verified: all read in a public source, some, none."""

from __future__ import annotations

MARKS = ("false", "partial", "true")  # from the weakest


def weakest(*marks: str) -> str:
    """What may be said of a result that rests on several figures."""
    return min(marks, key=MARKS.index)
