"""Two groups of nets that must be kept apart; a barrier is a separation between two domains."""

from __future__ import annotations

from dataclasses import dataclass

from checker.model.step import Step

GRADES = ("none", "functional", "basic", "supplementary", "double", "reinforced")


@dataclass(frozen=True, slots=True)
class Separation:
    """id: the two names joined by `|`. between: names of domains (barrier) or of groups of nets.

    reason: "barrier" or why else the nets are kept apart.
    bridged_by: references across it in natural order; chains: the series strings, each from the first side to the second.
    named: both names may enter a fingerprint. step: why it exists.
    """

    id: str
    between: tuple[str, str]
    reason: str
    bridged_by: tuple[str, ...]
    chains: tuple[tuple[str, ...], ...]
    named: bool
    step: Step
