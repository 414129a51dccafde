"""Nets that are one conductor for direct voltage: joined by fuses, links, ferrites, limiters, filter chokes and sense resistors."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from checker.model.names import ground_like
from checker.model.rule import Board
from checker.model.terminals import named
from checker.stress.potential import SENSE, SMOOTHING

_SWITCHES = frozenset({"mosfet", "igbt", "bipolar"})
SWITCH_PINS = frozenset("DRAIN D SW HV COLLECTOR C D1 D2 SW1 SW2 DRAIN1 DRAIN2 LX PH".split())
_JOINS = frozenset({"fuse", "resettable-fuse", "jumper", "net-tie", "ferrite", "thermistor"})


def conductors(board: Board, poles: Mapping[str, str]) -> dict[str, str]:
    """Net -> representative of its conductor, for every net that is not alone; a line conductor's is its pole."""
    held = _held(board)
    pairs = [*poles.items(), *_joined(board, held)]
    return _united(board, pairs, dict.fromkeys(poles.values()))


def _joined(board: Board, held: frozenset[str]) -> Iterator[tuple[str, str]]:
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if not part.fitted:
            continue
        nets = part.nets()
        if candidate.kind in ("inductor", "common-mode-choke"):
            for one, other in _windings(board, ref):
                if one in held and other in held:
                    yield one, other
        elif len(nets) == 2 and (candidate.kind in _JOINS or board.is_link(ref) or _senses(board, ref)):
            yield nets[0], nets[1]


def _senses(board: Board, ref: str) -> bool:
    """Whether a resistor measures the current of a switch: small, and one end on its source or emitter."""
    value = board.choice[ref].value
    if board.kind(ref) != "resistor" or value is None or float(value.value) > SENSE:
        return False
    for net in board.design.parts[ref].nets():
        for other in board.fitted_on(net):
            if board.kind(other) in _SWITCHES and net in named(board.design.parts[other], ("S", "E", "SOURCE", "EMITTER")):
                return True
    return False


def _windings(board: Board, ref: str) -> Iterator[tuple[str, str]]:
    """The nets at the two ends of each winding of an inductor; a choke of one winding needs no statement."""
    part = board.design.parts[ref]
    at = {pin.number: pin.net for pin in part.pins if pin.net is not None}
    for winding in board.choice[ref].windings:
        one, other = at.get(winding.pins[0]), at.get(winding.pins[-1])
        if one is not None and other is not None and one != other:
            yield one, other
    if not board.choice[ref].windings and len(part.nets()) == 2:
        yield part.nets()[0], part.nets()[1]


def _held(board: Board) -> frozenset[str]:
    """Nets with a smoothing capacitor: a choke between two of them carries direct current and drops none of its voltage.

    One with an end on a switch or a winding couples on what swings there, unless its other end is a return.
    """
    swinging, returns = _swinging(board), _returns(board)
    found: set[str] = set()
    for ref, candidate in board.choice.items():
        value = candidate.value
        if (
            candidate.kind == "capacitor"
            and board.design.parts[ref].fitted
            and value is not None
            and float(value.value) >= SMOOTHING
        ):
            nets = board.design.parts[ref].nets()
            if swinging.isdisjoint(nets) or not returns.isdisjoint(nets):
                found.update(nets)
    return frozenset(found)


def _swinging(board: Board) -> frozenset[str]:
    """Nets on windings, and on drains, collectors, switch pins, and pins of circuits that have no name."""
    found: set[str] = set()
    for ref, candidate in board.choice.items():
        part = board.design.parts[ref]
        if part.fitted and candidate.kind == "transformer":
            found.update(part.nets())
        elif part.fitted and candidate.kind in _SWITCHES:
            found.update(named(part, ("D", "C", "DRAIN", "COLLECTOR")))
        elif part.fitted and candidate.kind in ("controller", "ic", "regulator"):
            found.update(named(part, SWITCH_PINS))
            found.update(pin.net for pin in part.pins if pin.net is not None and not pin.name.strip())
    return frozenset(found)


def _returns(board: Board) -> frozenset[str]:
    """Per circuit the net with most pins, and every net that is named as ground."""
    found: set[str] = set()
    for domain in board.isolation.domains.values():
        nets = [net for net in domain.nets if net in board.design.nets]
        found.update(net for net in nets if ground_like(net))
        if nets:
            found.add(max(nets, key=lambda net: (len(board.design.nets[net].pins), net)))
    return frozenset(found)


def _united(board: Board, pairs: Iterable[tuple[str, str]], names: Iterable[str]) -> dict[str, str]:
    """Net -> representative, for nets joined by `pairs`; `names` go before others as representatives and are never joined.

    Among others the net that a person named goes first, then the one with most pins: it is the name in derivations.
    """
    parent: dict[str, str] = {}
    first = {name: at for at, name in enumerate(names)}

    def find(net: str) -> str:
        while parent.setdefault(net, net) != net:
            parent[net] = parent[parent[net]]
            net = parent[net]
        return net

    def rank(net: str) -> tuple[int, bool, int, str]:
        there = board.design.nets[net]
        return first.get(net, len(first)), there.automatic, -len(there.pins), net

    for one, other in pairs:
        kept, joined = sorted((find(one), find(other)), key=rank)
        if kept != joined and not (kept in first and joined in first):
            parent[joined] = kept
    return {net: find(net) for net in parent}
