"""A condition is an overlay on the circuit, never a copy: the empty one is normal use."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Condition:
    """removed: parts taken out; joined: groups of nets made one; supply: name of a supply state; text: how it is printed."""

    text: str = ""
    removed: frozenset[str] = frozenset()
    joined: tuple[frozenset[str], ...] = ()
    supply: str = ""


NORMAL = Condition()
