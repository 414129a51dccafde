"""Resistors in series: nets where two resistors meet and nothing else does divide the voltage by value and tolerance."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from checker.model.fact import Fact
from checker.model.rule import Board
from checker.stress.rails import resistor_tolerance


@dataclass(frozen=True, slots=True)
class String:
    """nets: from one end to the other, the ends included; members: the resistor between each two of them.

    ohms: (least, most) of each member with its tolerance; (0, inf) where no value was read. steady: a capacitor hangs on an
    inner net, so that only direct voltage divides so.
    """

    nets: tuple[str, ...]
    members: tuple[str, ...]
    ohms: tuple[tuple[float, float], ...]
    steady: bool = False

    def share(self, one: int, other: int) -> tuple[float, float]:
        """The least and the largest part of the whole voltage between the nets at these positions: R / (R + rest)."""
        first, last = sorted((one, other))
        inside, outside = self.ohms[first:last], self.ohms[:first] + self.ohms[last:]
        if not outside:
            return 1.0, 1.0
        return _ratio(sum(low for low, _ in inside), sum(high for _, high in outside), 0.0), _ratio(
            sum(high for _, high in inside), sum(low for low, _ in outside), 1.0
        )


def _ratio(part: float, rest: float, otherwise: float) -> float:
    whole = part + rest
    return part / whole if 0 < whole < float("inf") else otherwise


def strings(board: Board) -> dict[str, String]:
    """Resistor -> the string of two or more that it belongs to."""
    inner = {net: refs for net in board.design.nets if (refs := _meeting(board, net)) is not None}
    found: dict[str, String] = {}
    for refs in inner.values():
        if refs[0] not in found:
            made = _walked(board, refs[0], inner)
            found.update(dict.fromkeys(made.members, made))
    return found


def _meeting(board: Board, net: str) -> tuple[str, str] | None:
    """The two resistors that meet on a net where nothing else does but capacitors."""
    if len(board.design.nets[net].pins) > 8 or net not in board.isolation.domain_of:
        return None
    refs = [ref for ref in board.fitted_on(net) if board.kind(ref) not in ("test-point", "capacitor")]
    if len(refs) == 2 and all(board.kind(ref) == "resistor" and len(board.design.parts[ref].nets()) == 2 for ref in refs):
        return refs[0], refs[1]
    return None


def _walked(board: Board, ref: str, inner: Mapping[str, tuple[str, str]]) -> String:
    """The whole string around one member; a ring of resistors alone is cut where the walk began."""
    start, end = board.design.parts[ref].nets()
    members, nets = [ref], [start, end]
    for backwards in (False, True):
        while nets[-1] in inner:
            one, other = inner[nets[-1]]
            following = other if members[-1] == one else one
            if following in members:
                break
            members.append(following)
            ends = board.design.parts[following].nets()
            nets.append(ends[1] if ends[0] == nets[-1] else ends[0])
        if not backwards:
            members.reverse()
            nets.reverse()
    steady = any(board.kind(other) == "capacitor" for net in nets[1:-1] for other in board.fitted_on(net))
    return String(tuple(nets), tuple(members), tuple(_ohms(board, member) for member in members), steady)


def _ohms(board: Board, ref: str) -> tuple[float, float]:
    value = board.choice[ref].value
    if value is None:
        return 0.0, float("inf")
    spread = resistor_tolerance(board, ref)
    return float(value.value) * (1 - spread), float(value.value) * (1 + spread)


def facts(board: Board, string: String) -> tuple[Fact, ...]:
    """The values the division rests on."""
    return tuple(value for ref in string.members if (value := board.choice[ref].value) is not None)
