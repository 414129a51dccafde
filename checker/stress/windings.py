"""What a core is wound with: sections of turns between conductors, and what follows from a winding without its turns."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from itertools import pairwise

from checker.model.candidate import Winding
from checker.model.rule import Board
from checker.stress.buses import diodes
from checker.stress.potential import Potential

NO_LOAD = 1.3  # a small mains transformer without load over its rated voltage, at most (from memory: 10 to 30 % above)


@dataclass(frozen=True, slots=True)
class Section:
    """Turns between two conductors; winding: which of the core's windings it belongs to (all its sections point one way)."""

    one: str
    two: str
    turns: float
    winding: int


def sections(board: Board, ref: str, same: Mapping[str, str]) -> list[Section]:
    """The sections of those windings of a core whose turns are stated or follow from rated voltages."""
    at = {pin.number: pin.net for pin in board.design.parts[ref].pins}
    found = []
    for number, winding in enumerate(board.choice[ref].windings or _by_sides(board, ref)):
        turns = winding.turns or (_rated_turns(board, ref, [at.get(pin) for pin in winding.pins]),) * (len(winding.pins) - 1)
        if len(turns) != len(winding.pins) - 1 or not all(turns):
            continue
        for count, (first, second) in zip(turns, pairwise(winding.pins), strict=True):
            one, two = at.get(first), at.get(second)
            if one is not None and two is not None:
                found.append(Section(same.get(one, one), same.get(two, two), count, number))
    return found


def _rated_turns(board: Board, ref: str, nets: Iterable[str | None]) -> float:
    """For a mains transformer the rated voltage of the winding stands for its turns, that of a secondary without load."""
    primary, secondary = (board.choice[ref].ratings.get(name) for name in ("primary", "secondary"))
    domain = next((name for net in nets if (name := board.isolation.domain_of.get(net or "")) is not None), None)
    if primary is None or secondary is None or domain is None:
        return 0.0
    on_mains = board.isolation.domains[domain].hazard == "mains"
    return float(primary.value) if on_mains else NO_LOAD * float(secondary.value)


def _by_sides(board: Board, ref: str) -> tuple[Winding, ...]:
    """The windings of a transformer of which none is stated, with two or three pins on each side: one a side, else none."""
    sides: dict[str, list[str]] = {}
    for pin in board.design.parts[ref].pins:
        domain = board.isolation.domain_of.get(pin.net or "")
        if domain is not None:
            sides.setdefault(domain, []).append(pin.number)
    return tuple(Winding(tuple(pins)) for pins in sides.values()) if all(len(pins) in (2, 3) for pins in sides.values()) else ()


def means(board: Board, sources: Mapping[str, Potential], same: Mapping[str, str]) -> dict[str, str]:
    """Conductor on a winding -> the held conductor at whose potential it lies on the mean of a cycle: a winding has no direct
    voltage, whatever its turns."""
    found: dict[str, str] = {}
    for ref, candidate in board.choice.items():
        if candidate.kind not in ("transformer", "inductor") or not board.design.parts[ref].fitted:
            continue
        at = {pin.number: same.get(pin.net, pin.net) for pin in board.design.parts[ref].pins if pin.net is not None}
        for winding in candidate.windings or _by_sides(board, ref):
            ends = dict.fromkeys(at[pin] for pin in winding.pins if pin in at)
            held = [end for end in ends if end in sources]
            if len(held) == 1:
                found.update({end: held[0] for end in ends if end not in sources})
    return found


def rectified(board: Board, means: Mapping[str, str], same: Mapping[str, str]) -> dict[str, tuple[int, str]]:
    """Conductor that a diode ties to a winding end -> (1 above or -1 below, the held conductor of that winding's mean)."""
    found: dict[str, tuple[int, str]] = {}
    both: set[str] = set()
    for ref, candidate in board.choice.items():
        if candidate.kind not in ("diode", "bridge") or not board.design.parts[ref].fitted:
            continue
        for ends in diodes(board, ref):
            anode, cathode = (same.get(net, net) for net in ends)
            for net, end, sign in ((cathode, anode, 1), (anode, cathode, -1)):
                if end in means and net not in means and found.setdefault(net, (sign, means[end])) != (sign, means[end]):
                    both.add(net)
    return {net: told for net, told in found.items() if net not in both}
