"""Nets of one circuit: elements of one name merged, nets that share a pin joined, never by an empty name."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from checker.model.circuit import Net
from checker.model.fact import NOWHERE, Source
from checker.model.reading import NetRecord, Node, Note
from checker.neutral import neutral

_SHOWN = 5
_AUTOMATIC = re.compile(  # the last line: the end of such a name, all that some forms keep
    r"Net-\(.*|unconnected-\(.*|N-[0-9]{4,}|<unnamed:.*>|unnamed_net[0-9]*|N\$[0-9]+|\$[0-9]+N[0-9]+"
    r"|Net[A-Z]{1,6}[0-9]+_[0-9A-Za-z]+|N[0-9]{5,}|[0-9]+|"
    r"|[a-z]{0,10}-?\([a-z]{1,6}[0-9]+[a-z]?-[^()]*\)(?:_[0-9]+)?|[^(]*\)(?:_[0-9]+)?",
    re.DOTALL | re.IGNORECASE,
)


def is_automatic(name: str) -> bool:
    """Whether a net name was made by a program: none at all, digits only, `Net-(R1-Pad1)`, `N$12`, `NetR1_2` and the like.

    Forms that keep a few characters of a name or write it in capitals leave `NET-(R100-PAD1`, `ED-(U1-PAD15)` or `D4{SLASH}SDA)`.
    """
    return _AUTOMATIC.fullmatch(name.removeprefix("/")) is not None


@dataclass(frozen=True, slots=True)
class Merged:
    """nets: by name in file order. joined: a name that was given up -> the name of the net it is part of."""

    nets: dict[str, Net]
    joined: dict[str, str]
    notes: tuple[Note, ...]


def merged(records: Sequence[NetRecord]) -> Merged:
    """One net per name and per shared pin, in linear time; the kept name is the first that a person wrote, else the first."""
    names, groups, again = _by_name(records)
    notes = list(_merged_note(again))
    parent = list(range(len(names)))
    first: dict[tuple[str, str], int] = {}  # pin -> its first place in `places`
    places: list[tuple[NetRecord, Node]] = []
    of: list[int] = []  # place -> group
    pins: list[list[tuple[str, str]]] = []
    told: set[tuple[str, str, int]] = set()
    for at, group in enumerate(groups):
        pins.append([])
        for record in group:
            for node in record.nodes:
                pin = node.ref, node.pin
                seen = first.setdefault(pin, len(places))
                if seen == len(places):
                    places.append((record, node))
                    of.append(at)
                    pins[at].append(pin)
                elif of[seen] != at and (*pin, at) not in told:
                    told.add((*pin, at))
                    one, two = _root(parent, of[seen]), _root(parent, at)
                    parent[max(one, two)] = min(one, two)
                    notes.append(_joined_note(pin, names[of[seen]], names[at], _place(*places[seen]), _place(record, node)))
    automatic = [is_automatic(group[0].name) for group in groups]
    members: dict[int, list[int]] = {}
    for at in range(len(names)):
        members.setdefault(_root(parent, at), []).append(at)
    nets: dict[str, Net] = {}
    joined: dict[str, str] = {}
    for group_of in members.values():
        kept = next((at for at in group_of if not automatic[at]), group_of[0])
        name = names[kept]
        joined.update((names[at], name) for at in group_of if at != kept)
        on = tuple(pins[kept]) if len(group_of) == 1 else tuple(pin for at in group_of for pin in pins[at])
        classes = dict.fromkeys(word for at in group_of for record in groups[at] for word in record.classes)
        nets[name] = Net(name, on, groups[kept][0].source, automatic[kept], tuple(classes))
    return Merged(nets, joined, tuple(notes))


def _by_name(records: Sequence[NetRecord]) -> tuple[list[str], list[list[NetRecord]], dict[str, list[NetRecord]]]:
    """Names, the records of each, and the records that came again under a name; a nameless record stands alone."""
    taken = {record.name for record in records if record.name}
    at: dict[str, int] = {}
    names: list[str] = []
    groups: list[list[NetRecord]] = []
    again: dict[str, list[NetRecord]] = {}
    counts: dict[str, int] = {}
    for record in records:
        if record.name and record.name in at:
            groups[at[record.name]].append(record)
            again.setdefault(record.name, []).append(record)
            continue
        name = record.name or record.label
        while not record.name and (name in taken or name in at):
            counts[record.label] = counts.get(record.label, 1) + 1
            name = f"{record.label} ({counts[record.label]})"
        at[name] = len(names)
        names.append(name)
        groups.append([record])
    return names, groups, again


def _place(record: NetRecord, node: Node) -> Source:
    return node.source if node.source != NOWHERE else record.source


def _root(parent: list[int], at: int) -> int:
    while parent[at] != at:
        parent[at] = parent[parent[at]]
        at = parent[at]
    return at


def _merged_note(again: dict[str, list[NetRecord]]) -> list[Note]:
    if not again:
        return []
    shown = ", ".join(neutral(name, 40) for name in list(again)[:_SHOWN]) + (", ..." if len(again) > _SHOWN else "")
    text = f"{len(again):,} nets are written as several elements of one name and were merged ({shown})"
    sources = tuple(found[0].source for found in list(again.values())[:_SHOWN])
    return [Note("nets-merged", text, sources, nets=tuple(again))]


def _joined_note(pin: tuple[str, str], one: str, two: str, place: Source, again: Source) -> Note:
    text = (
        f"{neutral(pin[0], 80)}.{neutral(pin[1], 40)} stands on net {neutral(one, 80)} (line {place.line}) "
        f"and on net {neutral(two, 80)} (line {again.line}); the nets were joined"
    )
    return Note("pin-on-two-nets", text, (place, again), (pin[0],), (one, two))
