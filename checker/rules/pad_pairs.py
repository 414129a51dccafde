"""The nearest pads of two circuits on one side of a board, and how they are told to people."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from checker import units
from checker.formulas.pad_gap import Field, Shape, gap, nearest, rectangle, rounded
from checker.model.circuit import Pad
from checker.model.fact import Fact
from checker.model.step import Step

_SIDES = ("top", "bottom")


@dataclass(frozen=True, slots=True)
class Pair:
    """Two pads of the two circuits on one side of the board. most: mm between them at most."""

    one: Pad
    two: Pad
    most: float
    side: str

    @property
    def ref(self) -> str:
        """The part both are of, "" when they are of two."""
        return self.one.ref if self.one.ref == self.two.ref else ""

    @property
    def least(self) -> float:
        """If their corners are square, mm."""
        return min(self.most, gap(rectangle(*_sizes(self.one)), rectangle(*_sizes(self.two))))

    @property
    def nets(self) -> tuple[str, ...]:
        """The net of each."""
        return tuple(pad.net for pad in (self.one, self.two) if pad.net is not None)

    @property
    def step(self) -> Step:
        """Where they lie, and what that leaves."""
        facts = (pad_fact(self.one), pad_fact(self.two))
        where = "both sides" if self.one.side == self.two.side == "both" else f"the {self.side} side"
        text = f"{_name(self.one)} and {_name(self.two)} lie {mm(self.most)} apart on {where} of the board, copper to copper"
        return Step(text, facts, "distance of the centre lines of two pads - half the width of each", self.most, "mm")


class Copper:
    """The pads of one circuit; what is asked of them often is made once."""

    def __init__(self, pads: Sequence[Pad]):
        self.pads = pads

    @cached_property
    def by_part(self) -> Mapping[str, Copper]:
        """The pads of each part."""
        found: dict[str, list[Pad]] = {}
        for pad in self.pads:
            if pad.ref:
                found.setdefault(pad.ref, []).append(pad)
        return {ref: Copper(pads) for ref, pads in found.items()}

    @cached_property
    def through(self) -> bool:
        """Whether every pad is on both sides of the board."""
        return all(pad.side == "both" for pad in self.pads)

    @cached_property
    def sides(self) -> Mapping[str, tuple[tuple[Pad, ...], Field]]:
        """For each side of the board its pads and their least copper."""
        there = {side: tuple(pad for pad in self.pads if pad.side in (side, "both")) for side in _SIDES}
        return {side: (pads, Field.of([_least_copper(pad) for pad in pads])) for side, pads in there.items()}


def nearest_pads(one: Copper, two: Copper, apart: bool = False) -> Pair | None:
    """The nearest two pads on one side of the board. apart: pads of one part do not count."""
    found: list[Pair] = []
    for side in _SIDES[: 1 if one.through and two.through else 2]:
        (first, field), (second, other) = one.sides[side], two.sides[side]
        known = nearest(field, other, _of_two(first, second)) if apart else nearest(field, other)
        if known is not None:
            found.append(Pair(first[known[1]], second[known[2]], round(known[0], 6), side))
    return min(found, key=lambda pair: pair.most, default=None)


def _of_two(first: Sequence[Pad], second: Sequence[Pad]) -> Callable[[int, int], bool]:
    return lambda at, to: not first[at].ref or first[at].ref != second[to].ref


def _sizes(pad: Pad) -> tuple[float, float, float, float, float]:
    return pad.x, pad.y, pad.width or pad.drill, pad.height or pad.drill, pad.turned


def _least_copper(pad: Pad) -> Shape:
    """The strip with round ends; a disc where the file may count the angle the other way round."""
    x, y, width, height, turned = _sizes(pad)
    if pad.side == "bottom" and turned % 90:
        width = height = min(width, height)
    return rounded(x, y, width, height, turned)


def _name(pad: Pad) -> str:
    return f"{pad.ref}.{pad.pin or '?'} on {pad.net}" if pad.ref else f"a via on {pad.net}"


def pad_fact(pad: Pad) -> Fact:
    """Where the file says that a pad lies."""
    at = f"{pad.ref}.{pad.pin}" if pad.ref else "via"
    turned = f" turned {pad.turned:g} deg" if pad.turned else ""
    return Fact("pad", f"{at} at ({pad.x:g}, {pad.y:g}) mm, {pad.width:g} x {pad.height:g} mm{turned}, {pad.side}", pad.source)


def mm(value: float) -> str:
    """A distance for people."""
    return units.shown(round(value, 3), "mm")
