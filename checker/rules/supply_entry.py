"""Where the mains enters a board, its poles, and what counts as wiring. Shared by the rules about the mains side."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from checker.model.rule import Analysis

# parts that only carry the line on: what lies behind them is still the same conductor
SERIES = frozenset(
    {
        "switch",
        "jumper",
        "net-tie",
        "thermistor",
        "common-mode-choke",
        "filter",
        "inductor",
        "ferrite",
        "test-point",
        "fuse",
        "resettable-fuse",
    }
)
_BARE = frozenset({"connector", "inlet", "test-point"})
_WIRING = (
    SERIES
    | _BARE
    | {
        "relay",
        "capacitor",
        "varistor",
        "gas-tube",
        "lamp",
        "motor",
        "triac",
        "resistor",
        "transformer",
        "current-transformer",
        "isolated-module",
        "solid-state-relay",
        "hall-sensor",
    }
)


@dataclass(frozen=True, slots=True)
class Entry:
    """A supply entry. poles: line and neutral nets in pin order; earth: nets of its earth contact; named: poles known by name."""

    ref: str
    poles: tuple[str, ...]
    earth: tuple[str, ...]
    line: str | None
    neutral: str | None


def entries(analysis: Analysis) -> Mapping[str, Entry]:
    """Supply entries of the mains side by reference, the best-evidenced first.

    A connector on the mains side is one when it is an inlet, when it carries both poles (by net name, pin name or because
    all its mains nets are wiring and a fuse or line filter hangs on it). When several qualify, those with a fuse at a pole win.
    """
    scored: list[tuple[int, str, Entry]] = []
    for ref, candidate in analysis.choice.items():
        part = analysis.design.parts[ref]
        if candidate.kind not in ("connector", "inlet") or not part.fitted:
            continue
        entry = _entry(analysis, ref)
        if entry is None:
            continue
        score = (
            4 * (candidate.kind == "inlet") + 2 * (entry.line is not None and entry.neutral is not None) + (len(entry.poles) == 2)
        )
        at_poles = {
            analysis.kind(other) for net in entry.poles for other, _ in analysis.design.nets[net].pins if other in analysis.choice
        }
        score += 3 * ("fuse" in at_poles) + ("filter" in at_poles or "common-mode-choke" in at_poles) + ("varistor" in at_poles)
        if score > 1 and (candidate.kind == "inlet" or is_wiring(analysis, ref)):
            scored.append((score, ref, entry))
    best = max((score for score, _, _ in scored), default=0)
    return {ref: entry for score, ref, entry in scored if score == best}


def _entry(analysis: Analysis, ref: str) -> Entry | None:
    isolation = analysis.isolation
    poles: dict[str, None] = {}
    earth: dict[str, None] = {}
    line = neutral = None
    for pin in analysis.design.parts[ref].pins:
        if pin.net is None or pin.net not in isolation.domain_of:
            continue
        domain = isolation.domains[isolation.domain_of[pin.net]]
        if domain.hazard == "mains":
            poles[pin.net] = None
            words = {_word(pin.net), _word(pin.name)}
            line = pin.net if words & _LINES else line
            neutral = pin.net if words & _NEUTRALS else neutral
        elif domain.earthed:
            earth[pin.net] = None
    if not poles:
        return None
    return Entry(ref, tuple(poles), tuple(earth), line, neutral)


_LINES = frozenset({"L", "LINE", "LIVE", "PHASE", "ACL", "L1"})
_NEUTRALS = frozenset({"N", "NEUTRAL", "NEUT", "ACN"})


def _word(name: str) -> str:
    """The word of a pole's name that tells the pole: `AC_L` and `L_IN` give L."""
    words = [
        word
        for word in name.rsplit("/", 1)[-1].upper().replace("-", "_").split("_")
        if word not in ("AC", "IN", "MAINS", "INPUT", "PWR")
    ]
    return words[0] if len(words) == 1 else ""


def is_wiring(analysis: Analysis, ref: str) -> bool:
    """Whether every mains net of a connector meets only line parts: nothing that a signal would come from."""
    isolation = analysis.isolation
    for net in analysis.design.parts[ref].nets():
        if net in isolation.domain_of and isolation.domains[isolation.domain_of[net]].hazard == "mains":
            for other, _ in analysis.design.nets[net].pins:
                if other in analysis.choice and analysis.kind(other) not in _WIRING and not _rectifier_at_line(analysis, other):
                    return False
    return True


def _rectifier_at_line(analysis: Analysis, ref: str) -> bool:
    """A bridge hangs straight on the line on boards without a filter; so do the four diodes that stand for one."""
    return analysis.kind(ref) in ("bridge", "diode", "tvs")
