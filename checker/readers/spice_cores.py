"""Coupled coils of a SPICE netlist: each core is one part of kind transformer, with a winding per coil.

    L1 IN SW 2m
    L2 OUT 0 20u
    K1 L1 L2 0.98        pins 1-2 are L1, pins 3-4 L2

Cards that share a coil are of one core. Coils on one core have turns in the ratio of the square roots of their inductances
(L = N^2 A_L), which is stated as turns, the smallest winding as one. It is left out where a coupling is loose or no number, where
an inductance is no number, and where words stand behind the coupling: with a model of the core the inductances are turns
themselves in some simulators and not in others.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from decimal import Decimal
from itertools import dropwhile, takewhile

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.neutral import neutral
from checker.readers.spice_cards import Device
from checker.readers.spice_figures import figure
from checker.readers.spice_lines import Card

TIGHT = Decimal("0.9")
"""A coupling below it shares too little flux for one ratio of turns (common practice, no source)."""
_MOST = 100_000  # a ratio of turns beyond it is no winding
_SHOWN = 8


@dataclass(slots=True, eq=False)
class Core:
    """device: the first of its cards as a part, whose nodes are the ends of its coils in order."""

    device: Device
    coils: list[Device] = field(default_factory=list)
    tight: bool = True

    @property
    def turns(self) -> list[str]:
        """The ratio of turns, coil by coil; () where the file does not say."""
        values = [figure(coil.value) for coil in self.coils] if self.tight else []
        known = [value for value in values if value is not None and value > 0]
        if not known or len(known) < len(values):
            return []
        ratios = [(value / min(known)).sqrt() for value in known]
        return [f"{round(ratio, 3).normalize():f}" for ratio in ratios] if max(ratios) < _MOST else []


def cores(couplings: Sequence[Card], coils: dict[str, Device], path: str) -> list[Core]:
    """The cores of one circuit in the order of their first cards. coils: its parts L by name in small letters.

    Raises InputError for a coupling of fewer than two coils or of one that is not there, and for two of one name.
    """
    parent: dict[str, str] = {}
    names: dict[str, Card] = {}
    for card in couplings:
        first = names.setdefault(card.keyword, card)
        if first is not card:
            what = f"a part is listed twice (first in line {first.line})"
            raise InputError(path, what, line=card.line, found=card.words[0])
        if len(card.words[0]) > limits.NAME:
            expected = f"at most {limits.NAME:,} characters"
            raise InputError(path, "a name is too long", line=card.line, found=card.words[0], expected=expected)
        named = _coils(card)
        missing = next((name for name in named if name not in coils), "")
        if missing or len(named) < 2:
            what = "a coupling names a coil that is not there" if missing else "a coupling names fewer than two coils"
            found = missing or " ".join(card.words)[:200]
            raise InputError(path, what, line=card.line, found=found, expected="two or more parts L and a factor")
        for name in named:
            parent[root(parent, name)] = root(parent, named[0])
    found_at: dict[str, Core] = {}
    for card in couplings:
        named = _coils(card)
        core = found_at.setdefault(root(parent, named[0]), Core(Device("K", card.words[0], card.line, [])))
        core.tight = core.tight and _tight(card)
    for name in parent:
        found_at[root(parent, name)].coils.append(coils[name])
    for core in found_at.values():
        core.device.nodes = [(coil.ref, node) for coil in core.coils for _, node in coil.nodes]
        if len(core.device.nodes) > limits.PINS_PER_PART:
            what, expected = "the file holds too many pins of one part", f"at most {limits.PINS_PER_PART:,}"
            raise InputError(path, what, line=core.device.line, expected=expected)
    return list(found_at.values())


def _coils(card: Card) -> list[str]:
    """The coils a card names, up to its factor."""
    return list(dict.fromkeys(word.lower() for word in takewhile(lambda word: word[0] in "Ll", card.positional()[1:])))


def root(parent: dict[str, str], name: str) -> str:
    """What stands for everything that is joined to a name."""
    parent.setdefault(name, name)
    while parent[name] != name:
        parent[name] = parent[parent[name]]
        name = parent[name]
    return name


def _tight(card: Card) -> bool:
    """Whether a card ends in a factor near 1, with nothing behind it."""
    behind = list(dropwhile(lambda word: word[0] in "Ll", card.words[1:]))
    factor = figure(behind[0]) if len(behind) == 1 else None
    return factor is not None and TIGHT <= factor <= 1


def facts(core: Core, path: str) -> tuple[Fact, ...]:
    """Kind, windings and, where the inductances tell, the ratio of their turns."""
    source = Source(path, core.device.line)
    pairs = [f"{at}-{at + 1}" for at in range(1, 2 * len(core.coils), 2)]
    found = [
        Fact("kind", "transformer", source, text=f"coupled coils {listed(core)}"),
        Fact("windings", ", ".join(pairs), source, text=f"coupled coils {listed(core)}"),
        Fact("symbol", "Transformer", source),
    ]
    turns = core.turns
    if turns:
        text = "ratio of turns, square roots of the inductances " + ", ".join(coil.value for coil in core.coils[:_SHOWN])
        ratio = ", ".join(f"{pair}:{count}" for pair, count in zip(pairs, turns, strict=True))
        found.append(Fact("turns", ratio, source, text=text))
    return tuple(found)


def listed(core: Core) -> str:
    """The names of its coils, the first few of very many."""
    return ", ".join(neutral(coil.ref, 40) for coil in core.coils[:_SHOWN]) + (", ..." if len(core.coils) > _SHOWN else "")
