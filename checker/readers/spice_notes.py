"""What a user is told of a SPICE netlist: what it cannot show, what was left out, what was taken for what. Each sort once."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Sequence
from decimal import Decimal

from checker.model.fact import Source
from checker.model.reading import Note
from checker.neutral import neutral
from checker.readers import spice_cards, spice_cores, spice_figures
from checker.readers.spice_cards import Device
from checker.readers.spice_flat import GROUND, Flat, Supply
from checker.readers.spice_ground import joined_by_ground
from checker.readers.spice_lines import Card

_SHOWN = 5
_LIMITED = (
    "this is the netlist of a simulation: it shows what is connected, little of ratings, nothing of connectors, fuses and bodies, "
    "and its pins are numbered by their order in the file; bill of materials and declaration must say the rest"
)
_PART = re.compile(r"(?:[RCLDQMX][A-Za-z_]*[0-9]+(?:[ \t]+[^ \t]+){3}|\.subckt[ \t])", re.IGNORECASE)
_SINE = re.compile(r"sine?[ \t]*\(?[ \t]*[^\s,()]+[\s,]+([^\s,()]+)[\s,]+([^\s,()]+)", re.IGNORECASE)
_STEADY = re.compile(r"(?:dc[ \t]+)?([^\s,()]+)(?=\s|\Z)", re.IGNORECASE)
_HARMLESS = {"peak": Decimal("42.4"), "steady": Decimal(60)}  # V, ES1 of IEC 62368-1 (from memory); below it a source needs no word
_MAINS = Decimal(45), Decimal(65)  # Hz


def notes(path: str, flat: Flat, opening: Sequence[Card], unread: Sequence[Card], first: str) -> Iterator[Note]:
    """All of a file. opening: statements that name other files. unread: those not understood. first: its first line."""
    yield Note("skipped", _LIMITED, (Source(path),))
    if opening:
        text = f"{_count(opening, 'statement')} that would open other files, which is never done: {_keywords(opening)}"
        yield Note("skipped", text, _places(path, opening))
    if unread:
        yield Note(
            "skipped", f"{_count(unread, 'statement')} not understood and skipped: {_keywords(unread)}", _places(path, unread)
        )
    yield from _values(path, flat)
    yield from _ground(path, flat)
    if flat.coupled:
        shown = "; ".join(f"{neutral(ref, 40)} is {spice_cores.listed(core)}" for ref, core in flat.coupled[:_SHOWN])
        text = f"coupled coils are one part of kind transformer, with pins numbered in the order of its coils: {shown}"
        refs = tuple(ref for ref, _ in flat.coupled[:_SHOWN])
        yield Note("no-symbol", text, _places(path, [core.device for _, core in flat.coupled]), refs)
    if flat.whole:
        shown = ", ".join(neutral(ref, 40) for ref in flat.whole[:_SHOWN])
        text = f"{_count(flat.whole, 'sub-circuit')} taken as one part each, with pins in the order of the file: {shown}"
        yield Note("no-symbol", text, (Source(path),), tuple(flat.whole[:_SHOWN]))
    for supply in flat.supplies:
        yield from _supply(path, supply)
    if _PART.match(first):
        yield Note("skipped", f"the first line is the title, whatever it holds: {neutral(first, 80)}", (Source(path, 1),))


def _values(path: str, flat: Flat) -> Iterator[Note]:
    used = list(flat.used)
    unsolved = [device for device in used if spice_figures.is_expression(device.value)]
    if unsolved:
        yield Note("skipped", f"values that are expressions are not worked out: {_refs(unsolved)}", _places(path, unsolved))
    controlled = [device for device in used if device.letter in spice_cards.CONTROLLED]
    if controlled:
        text = (
            f"of controlled sources and switches only the output is read, not what they sense: {_refs(controlled)}; "
            "a transformer or a coupler that is written so is not seen"
        )
        yield Note("skipped", text, _places(path, controlled))
    substrates = [device for device in used if device.substrate]
    if substrates:
        yield Note("skipped", f"the substrates of transistors are left out: {_refs(substrates)}", _places(path, substrates))


def _ground(path: str, flat: Flat) -> Iterator[Note]:
    if len(flat.grounds) > 1:
        text = f"nodes {' and '.join(neutral(name, 40) for name in flat.grounds.values())} are one, as in most simulators"
        yield Note("nets-merged", text, (Source(path),), nets=(GROUND,))
    joined = list(joined_by_ground(flat))
    if joined:
        text = (
            f"node 0 is one net wherever it stands, at both sides of {', '.join(neutral(ref, 40) for ref in joined[:_SHOWN])}: "
            "what they would keep apart is joined; where the board has two grounds, give one of them a node of its own"
        )
        yield Note("nets-merged", text, (Source(path),), tuple(joined[:_SHOWN]), (GROUND,))


def _supply(path: str, supply: Supply) -> Iterator[Note]:
    """A source of a voltage that hurts. Nothing is concluded from it: a test voltage and the mains look alike."""
    sine = _SINE.search(supply.device.value)
    steady = None if sine else _STEADY.match(supply.device.value)
    declared = ""
    if sine:
        peak, frequency = spice_figures.figure(sine[1]), spice_figures.figure(sine[2])
        if peak is not None and frequency is not None and abs(peak) > _HARMLESS["peak"] and _MAINS[0] <= frequency <= _MAINS[1]:
            given = f"{_plain(peak)} V peak at {_plain(frequency)} Hz; where it stands for the mains"
            declared = f"supply: {{mains: {abs(peak) / Decimal(2).sqrt():.0f} V}}"
    elif steady:
        volts = spice_figures.figure(steady[1])
        if volts is not None and abs(volts) > _HARMLESS["steady"]:
            given = f"{_plain(volts)} V d.c.; where it stands for the supply"
            declared = f"supply: {{dc: {_plain(volts)} V}}"
    if declared:
        side = f"domains: {{supply: {{nets: [{neutral(supply.net, 80)}], side: primary}}}}"
        text = f"{neutral(supply.ref, 40)} gives {given}, declare {declared} and {side}"
        yield Note("skipped", text, (Source(path, supply.device.line),), (supply.ref,), (supply.net,))


def _plain(number: Decimal) -> str:
    return f"{abs(number).normalize():f}"


def _count(found: Sequence[object], what: str) -> str:
    return f"{len(found):,} {what}{'s' * (len(found) != 1)}"


def _keywords(found: Sequence[Card]) -> str:
    """Keywords or references, no paths: these are of somebody's machine."""
    words = list(dict.fromkeys(neutral(card.words[0], 40) for card in found))
    return ", ".join(words[:_SHOWN]) + (", ..." if len(words) > _SHOWN else "")


def _refs(found: Sequence[Device]) -> str:
    return ", ".join(neutral(device.ref, 40) for device in found[:_SHOWN]) + (", ..." if len(found) > _SHOWN else "")


def _places(path: str, found: Iterable[Card | Device]) -> tuple[Source, ...]:
    return tuple(Source(path, one.line) for one in list(found)[:_SHOWN])
