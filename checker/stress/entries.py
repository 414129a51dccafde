"""Where the hazardous supply enters a board, its poles, and what is wiring of the line, for the rules about the primary side."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace

from checker.model.entry import Entry
from checker.model.names import entry_like, role, supply_volts, tokens
from checker.model.rule import Board

# parts that carry a line conductor on: what lies behind them is still the line, switched or fused or filtered
_CARRY_ON = frozenset(
    "switch jumper net-tie thermistor common-mode-choke filter inductor ferrite fuse resettable-fuse relay solid-state-relay triac "
    "current-transformer hall-sensor".split()
)
_OUTLET = frozenset({"OUT", "OUT1", "OUT2", "OUTPUT", "LOAD"})


def entries(board: Board, hazard: str = "mains") -> Mapping[str, Entry]:
    """Supply entries of the side with this hazard ("mains" or "dc"), by reference.

    A connector on that side is a candidate; an inlet, both poles named, a fuse, varistor or filter at a pole each speak for
    it, an integrated circuit at one of three or more nameless contacts against it. The best win; a connector that nothing
    speaks for is the entry only when it is the only one. A further connector with both poles named, or an inlet, whose poles
    no line conductor of these reaches must bring the supply in itself.
    """
    scored: list[tuple[int, str, Entry]] = []
    for ref, candidate in board.choice.items():
        if candidate.kind in ("connector", "inlet") and board.design.parts[ref].fitted:
            entry = _entry(board, ref, hazard)
            if entry is not None and not all(_OUTLET & set(tokens(net)) for net in entry.poles):
                scored.append((_score(board, candidate.kind, entry, hazard), ref, entry))
    best = max((score for score, _, _ in scored), default=0)
    if best == 0 and len(scored) > 1:
        return {}
    found = {ref: entry for score, ref, entry in scored if score == best}
    if hazard == "mains":
        reached = set(carried(board, found.values()))
        for score, ref, entry in sorted(scored, key=lambda item: -item[0]):
            alone = board.kind(ref) == "inlet" or (entry.line is not None and entry.neutral is not None)
            if score < best and alone and reached.isdisjoint(entry.poles):
                found[ref] = entry
                reached |= carried(board, (entry,))
        found.update(_other_pole(found, [entry for _, _, entry in scored]))
    return _together(found)


def _together(found: Mapping[str, Entry]) -> Mapping[str, Entry]:
    """The entries; contacts of one pole each (a terminal for the line, one for the neutral) are one entry together."""
    single = [entry for entry in found.values() if len(entry.poles) == 1]
    poles = dict.fromkeys(pole for entry in single for pole in entry.poles)
    if len(poles) < 2:
        return found
    lines = tuple(dict.fromkeys(line for entry in single for line in entry.lines))
    first = replace(
        single[0],
        poles=tuple(poles),
        earth=tuple(dict.fromkeys(net for entry in single for net in entry.earth)),
        line=lines[-1] if lines else None,
        neutral=next((entry.neutral for entry in single if entry.neutral), None),
        lines=lines,
        also=tuple(entry.ref for entry in single[1:]),
    )
    return {ref: first if entry is single[0] else entry for ref, entry in found.items() if entry not in single[1:]}


def _other_pole(found: Mapping[str, Entry], every: Iterable[Entry]) -> Mapping[str, Entry]:
    """Contacts of one pole each, such as the two pins of a plug: where an entry has one pole only, those with the other.

    The other pole is the one whose name says so; without names, the only other contact of one pole that is no outlet.
    """
    poles = {pole for entry in found.values() for pole in entry.poles}
    if len(poles) != 1:
        return {}
    first = next(iter(found.values()))
    others = [entry for entry in every if len(entry.poles) == 1 and entry.poles[0] not in poles]
    named = [entry for entry in others if (entry.neutral if first.neutral is None else entry.line) is not None]
    chosen = named if first.line is not None or first.neutral is not None else others
    nets = {entry.poles[0] for entry in chosen}
    return {entry.ref: entry for entry in chosen} if len(nets) == 1 else {}


def _names_supply(board: Board, entry: Entry) -> bool:
    """Whether a pole or its contact is named as an input, or after the voltage of a declared d.c. supply."""
    volts = [supply.voltage for supply in board.setting.supplies if supply.kind == "dc"]
    contacts = [pin.name for pin in board.design.parts[entry.ref].pins if pin.net in entry.poles]
    return any(
        entry_like(name) or ((said := supply_volts(name)) is not None and any(v.low <= said <= v.high for v in volts))
        for name in (*entry.poles, *contacts)
    )


def _score(board: Board, kind: str, entry: Entry, hazard: str) -> int:
    kinds = {
        board.kind(other)
        for net in entry.poles
        for other, _ in board.design.nets[net].pins
        if other in board.choice and board.design.parts[other].fitted
    }
    left_out = any(
        board.kind(other) == "fuse" for net in entry.poles for other, _ in board.design.nets[net].pins if other in board.choice
    )
    named = (entry.line is not None and entry.neutral is not None) or (hazard == "dc" and _names_supply(board, entry))
    signals = len(entry.poles) > 2 and not entry.lines and entry.neutral is None and bool(kinds & {"ic", "controller"})
    score = 4 * (kind == "inlet") + 2 * named + 3 * ("fuse" in kinds or left_out) - 3 * signals
    return score + ("varistor" in kinds) + bool(kinds & {"filter", "common-mode-choke"}) + ("bridge" in kinds)


def _entry(board: Board, ref: str, hazard: str) -> Entry | None:
    isolation = board.isolation
    poles: dict[str, None] = {}
    earth: dict[str, None] = {}
    lines: dict[str, None] = {}
    neutral = None
    for pin in board.design.parts[ref].pins:
        if pin.net is None or pin.net not in isolation.domain_of:
            continue
        domain = isolation.domains[isolation.domain_of[pin.net]]
        if domain.hazard == hazard:
            poles[pin.net] = None
            roles = {role(pin.net), role(pin.name)}
            if "line" in roles:
                lines[pin.net] = None
            neutral = pin.net if "neutral" in roles else neutral
        elif domain.earthed:
            earth[pin.net] = None
    return Entry(ref, tuple(poles), tuple(earth), next(reversed(lines), None), neutral, tuple(lines)) if poles else None


def carried(board: Board, found: Iterable[Entry]) -> frozenset[str]:
    """The poles of these entries and every mains net that parts which carry a line on reach from them."""
    isolation = board.isolation
    reached = dict.fromkeys(net for entry in found for net in entry.poles)
    queue = list(reached)
    for net in queue:
        for ref, _ in board.design.nets[net].pins:
            part = board.design.parts.get(ref)
            if part is None or not (board.kind(ref) in _CARRY_ON or board.is_link(ref)):
                continue
            for other in part.nets():
                domain = isolation.domain_of.get(other)
                if other not in reached and domain is not None and isolation.domains[domain].hazard == "mains":
                    reached[other] = None
                    queue.append(other)
    return frozenset(reached)
