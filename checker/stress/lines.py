"""Which pole of the mains each line conductor carries, and the potential of the poles."""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Iterable, Iterator, Mapping

from checker.formulas.waveform import Wave, sine
from checker.model.entry import Entry
from checker.model.rule import Board
from checker.model.step import Step
from checker.model.terminals import coil
from checker.stress.potential import SERIES, Potential

_TWO_ENDS = frozenset(
    "switch jumper net-tie thermistor inductor ferrite fuse resettable-fuse current-transformer hall-sensor".split()
)
DOUBLED = 150.0  # V r.m.s.; below it a selector doubles, above it rectifies (common practice, no source)
_FOR_BOTH = frozenset({"common-mode-choke", "filter", "switch"})
_CONTACTS = frozenset({"relay", "solid-state-relay", "triac"})
_SWITCHES = frozenset("mosfet igbt bipolar controller regulator ic module unknown".split())


def poles(board: Board, entries: Iterable[Entry]) -> dict[str, str]:
    """Line conductor -> the entry's net it belongs to; a net that two poles reach is left out."""
    found: dict[str, str] = {}
    mixed: set[str] = set()
    waiting: dict[str, None] = {}  # parts for both poles, looked at once nothing else carries a pole on
    queue = deque((pole, pole) for entry in entries for pole in entry.poles)
    while queue:
        net, pole = queue.popleft()
        if net in found:
            if found[net] != pole:
                mixed.add(net)
        elif net in board.isolation.domain_of:
            found[net] = pole
            for ref in board.fitted_on(net):
                if board.kind(ref) in _FOR_BOTH and len(board.design.parts[ref].nets()) > 2:
                    waiting[ref] = None
                else:
                    queue.extend((other, pole) for other in _beyond(board, ref, net))
        while waiting and not queue:
            queue.extend(_through(board, waiting.popitem()[0], found))
    return {net: pole for net, pole in found.items() if net not in mixed}


def _beyond(board: Board, ref: str, net: str) -> Iterator[str]:
    """The net that a part with two ends carries the conductor `net` on to."""
    part, kind = board.design.parts[ref], board.kind(ref)
    wound = coil(part) if kind == "relay" else frozenset()
    nets = [other for other in part.nets() if other != net and other not in wound and _on_mains(board, other)]
    if net in wound:
        return
    if len(nets) == 1 and (kind in _CONTACTS or (len(part.nets()) == 2 and (kind in _TWO_ENDS or _in_series(board, ref)))):
        if kind == "inductor" and any(board.kind(other) in _SWITCHES for other in board.fitted_on(nets[0])):
            return
        if kind not in ("switch", "jumper") or not _selects(board, ref, nets[0]):
            yield nets[0]


def _selects(board: Board, ref: str, net: str) -> bool:
    """Whether a contact ties a pole to the middle of two capacitors: the selector of a doubler, open where the supply is high."""
    voltage = board.setting.mains_voltage(tolerance=False)
    others = [board.kind(other) for other in board.fitted_on(net) if other != ref]
    middle = others.count("capacitor") >= 2 and set(others) <= {"capacitor", "resistor", "test-point"}
    return middle and voltage is not None and voltage > DOUBLED


def _through(board: Board, ref: str, found: Mapping[str, str]) -> Iterator[tuple[str, str]]:
    """(net, pole) behind a choke, filter or switch for both poles: by its windings where they are stated, else in order.

    Which of two ends is which pole decides the sign of a voltage, never its size.
    """
    part = board.design.parts[ref]
    at = {pin.number: pin.net for pin in part.pins if pin.net is not None}
    stated = [(at.get(winding.pins[0]), at.get(winding.pins[-1])) for winding in board.choice[ref].windings]
    if stated:
        for one, other in (*stated, *(pair[::-1] for pair in stated)):
            if one is not None and other is not None and one in found and other not in found and _on_mains(board, other):
                yield other, found[one]
        return
    entered = dict.fromkeys(found[net] for net in part.nets() if net in found)
    free = [net for net in part.nets() if net not in found and _on_mains(board, net)]
    if len(entered) > 1 and len(part.nets()) == 2 * len(entered):
        yield from zip(free, entered, strict=False)


def _on_mains(board: Board, net: str) -> bool:
    name = board.isolation.domain_of.get(net)
    return name is not None and board.isolation.domains[name].hazard == "mains"


def _in_series(board: Board, ref: str) -> bool:
    value = board.choice[ref].value
    return board.kind(ref) == "resistor" and value is not None and float(value.value) <= SERIES


def pole_potentials(board: Board, entries: Iterable[Entry], tolerance: bool) -> dict[str, Potential]:
    """Entry net -> its potential against the neutral, or against its second pole where none is the neutral."""
    voltage = board.setting.mains_voltage(tolerance)
    mains = board.setting.mains
    if voltage is None or mains is None:
        return {}
    found: dict[str, Potential] = {}
    for entry in entries:
        frame = board.isolation.domain_of[entry.poles[0]]
        waves = _waves(entry, voltage, mains.phases or 1)
        said = f"{mains.voltage.high:g} V" + (f" + {mains.tolerance.high:g} %" if tolerance and mains.tolerance else "")
        for net, (wave, what) in waves.items():
            step = Step(
                f"{net} is {what} of a supply of {said}", (*board.setting.facts, board.design.parts[entry.ref].fact),
                formula=f"sqrt(2) x {voltage:g} V", result=math.sqrt(2) * voltage, unit="V", form="peak",
            )  # fmt: skip
            found.setdefault(net, Potential(frame, wave, wave, step, held=True))
    return found


def _waves(entry: Entry, voltage: float, phases: int) -> dict[str, tuple[Wave, str]]:
    """Net -> (its wave, what it is). Three phases: `voltage` is from line to line."""
    lines = [net for net in entry.poles if net != entry.neutral]
    if phases == 3 and len(lines) >= 2:
        amplitude = math.sqrt(2 / 3) * voltage
        found: dict[str, tuple[Wave, str]] = {net: (sine(amplitude, at / 3), "a phase") for at, net in enumerate(lines[:3])}
        return found | ({entry.neutral: (0.0, "the neutral")} if entry.neutral else {})
    if len(entry.poles) < 2:
        return {}
    neutral = entry.neutral or next((net for net in reversed(entry.poles) if net != entry.line), entry.poles[-1])
    crest = math.sqrt(2) * voltage
    found = {net: (sine(crest), "the line") for net in entry.poles if net != neutral}
    return found | {neutral: (0.0, "the other pole")}
