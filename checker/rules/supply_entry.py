"""Where the hazardous supply enters a board, its poles, and what is wiring of the line, for the rules about the primary side."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from checker.model.names import entry_like, role, supply_volts, tokens
from checker.model.rule import Analysis

# parts that carry a line conductor on: what lies behind them is still the line, switched or fused or filtered
_CARRY_ON = frozenset(
    "switch jumper net-tie thermistor common-mode-choke filter inductor ferrite fuse resettable-fuse relay solid-state-relay triac "
    "current-transformer hall-sensor".split()
)
_OUTLET = frozenset({"OUT", "OUT1", "OUT2", "OUTPUT", "LOAD"})
LINK = 1.0  # ohm; a resistor below this in the line is a link or a shunt, not a load (common practice, no source)


@dataclass(frozen=True, slots=True)
class Entry:
    """A supply entry. poles: hazardous nets in pin order; line, neutral: where names tell them; earth: nets of earth contacts.

    lines: every pole named as a line, in pin order, of which `line` is the last; phases have several.
    """

    ref: str
    poles: tuple[str, ...]
    earth: tuple[str, ...]
    line: str | None
    neutral: str | None
    lines: tuple[str, ...] = ()


def entries(analysis: Analysis, hazard: str = "mains") -> Mapping[str, Entry]:
    """Supply entries of the side with this hazard ("mains" or "dc"), by reference.

    A connector on that side is a candidate; an inlet, both poles named, a fuse, varistor or filter at a pole each speak for
    it. The best win; a connector that nothing speaks for is the entry only when it is the only one. A further connector with
    both poles named, or an inlet, whose poles no line conductor of these reaches must bring the supply in itself.
    """
    scored: list[tuple[int, str, Entry]] = []
    for ref, candidate in analysis.choice.items():
        if candidate.kind in ("connector", "inlet") and analysis.design.parts[ref].fitted:
            entry = _entry(analysis, ref, hazard)
            if entry is not None and not all(_OUTLET & set(tokens(net)) for net in entry.poles):
                scored.append((_score(analysis, candidate.kind, entry, hazard), ref, entry))
    best = max((score for score, _, _ in scored), default=0)
    if best == 0 and len(scored) > 1:
        return {}
    found = {ref: entry for score, ref, entry in scored if score == best}
    if hazard == "mains":
        reached = set(_carried(analysis, found.values()))
        for score, ref, entry in sorted(scored, key=lambda item: -item[0]):
            alone = analysis.kind(ref) == "inlet" or (entry.line is not None and entry.neutral is not None)
            if score < best and alone and reached.isdisjoint(entry.poles):
                found[ref] = entry
                reached |= _carried(analysis, (entry,))
    return found


def _names_supply(analysis: Analysis, entry: Entry) -> bool:
    """Whether a pole or its contact is named as an input, or after the voltage of a declared d.c. supply."""
    volts = [supply.voltage for supply in analysis.setting.supplies if supply.kind == "dc"]
    contacts = [pin.name for pin in analysis.design.parts[entry.ref].pins if pin.net in entry.poles]
    return any(
        entry_like(name) or ((said := supply_volts(name)) is not None and any(v.low <= said <= v.high for v in volts))
        for name in (*entry.poles, *contacts)
    )


def _score(analysis: Analysis, kind: str, entry: Entry, hazard: str) -> int:
    kinds = {
        analysis.kind(other)
        for net in entry.poles
        for other, _ in analysis.design.nets[net].pins
        if other in analysis.choice and analysis.design.parts[other].fitted
    }
    left_out = any(
        analysis.kind(other) == "fuse"
        for net in entry.poles
        for other, _ in analysis.design.nets[net].pins
        if other in analysis.choice
    )
    named = (entry.line is not None and entry.neutral is not None) or (hazard == "dc" and _names_supply(analysis, entry))
    score = 4 * (kind == "inlet") + 2 * named + 3 * ("fuse" in kinds or left_out)
    return score + ("varistor" in kinds) + bool(kinds & {"filter", "common-mode-choke"}) + ("bridge" in kinds)


def _entry(analysis: Analysis, ref: str, hazard: str) -> Entry | None:
    isolation = analysis.isolation
    poles: dict[str, None] = {}
    earth: dict[str, None] = {}
    lines: dict[str, None] = {}
    neutral = None
    for pin in analysis.design.parts[ref].pins:
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


def is_link(analysis: Analysis, ref: str) -> bool:
    """Whether a part is a resistor so small that it carries the line on: a link or a current shunt."""
    value = analysis.choice[ref].value
    return analysis.kind(ref) == "resistor" and value is not None and isinstance(value.value, float) and value.value < LINK


def line_nets(analysis: Analysis) -> frozenset[str]:
    """Nets that are line conductors: the poles of the supply entries and what switches, fuses and filters carry on from them.

    Rectified nets are none: what hangs on them is a circuit, not wiring.
    """
    return _carried(analysis, entries(analysis).values())


def _carried(analysis: Analysis, found: Iterable[Entry]) -> frozenset[str]:
    """The poles of these entries and every mains net that parts which carry a line on reach from them."""
    isolation = analysis.isolation
    reached = dict.fromkeys(net for entry in found for net in entry.poles)
    queue = list(reached)
    for net in queue:
        for ref, _ in analysis.design.nets[net].pins:
            part = analysis.design.parts.get(ref)
            if part is None or not (analysis.kind(ref) in _CARRY_ON or is_link(analysis, ref)):
                continue
            for other in part.nets():
                domain = isolation.domain_of.get(other)
                if other not in reached and domain is not None and isolation.domains[domain].hazard == "mains":
                    reached[other] = None
                    queue.append(other)
    return frozenset(reached)


def is_wiring(analysis: Analysis, ref: str, lines: frozenset[str]) -> bool:
    """Whether every mains net of a connector is a line conductor: an outlet or a load terminal, not a signal."""
    isolation = analysis.isolation
    for net in analysis.design.parts[ref].nets():
        if net in isolation.domain_of and isolation.domains[isolation.domain_of[net]].hazard == "mains" and net not in lines:
            return False
    return True
