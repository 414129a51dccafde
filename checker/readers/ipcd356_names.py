"""What IPC-D-356 cuts off, put right as far as the file tells: aliases of long net names, references and pins cut alike.

A net name has 14 characters, a reference 6, a pin 4. Long net names get an alias in a parameter or a comment:

    P  NNAME1 A_REALLY_LONG_NET_NAME      records say NNAME1
    P  NNAMEm0000 A_REALLY_LONG_NET_NAME  records say m0000
    C  NNAMEm0000 A_REALLY_LONG_NET_NAME  the same in a comment

Two references that are cut alike look like one part with a pin on two nets. They are told apart where the file lists part by
part; where it does not, the circuit cannot be known and the file is refused.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from itertools import count

from checker import limits
from checker.errors import InputError
from checker.model.fact import Source
from checker.model.reading import Note
from checker.neutral import neutral
from checker.readers.ipcd356_records import NET, PIN, REFERENCE, Record

NAMELESS = "?"  # the pin of a land that belongs to a part and has no number

_ALIAS = re.compile(r"[CP][ \t]+NNAME(\S++)[ \t]++(\S.*)\Z")
_WHOLE = re.compile(r"Net-\([^()]*\)\Z", re.IGNORECASE)  # a name that nothing is missing from
_SHOWN = 5


class Aliases:
    """Real net names by alias, each resolved once: the name of an alias is never itself an alias."""

    def __init__(self, path: str):
        self._path = path
        self._named: dict[str, tuple[str, int]] = {}

    def take(self, text: str, line: int) -> bool:
        """Whether a C or P line declares an alias. Raises InputError for one that was declared with another name."""
        match = _ALIAS.match(text)
        if match is None:
            return False
        alias, name = match[1], match[2].strip()
        if max(len(alias), len(name)) > limits.NAME:
            raise InputError(self._path, "a net name is too long", line=line, expected=f"at most {limits.NAME:,} characters")
        known, before = self._named.setdefault(alias, (name, line))
        if known != name:
            what = f"the net alias NNAME{alias} has another name than in line {before}"
            raise InputError(self._path, what, line=line, found=f"{name} and {known}", expected="one name")
        if len(self._named) > limits.NETS:
            raise InputError(self._path, "the file holds too many net aliases", line=line, expected=f"at most {limits.NETS:,}")
        return True

    def resolve(self, records: Sequence[Record]) -> list[Note]:
        """Put the real names into the records; notes on aliases without a name and on names that may be cut."""
        full = {f"NNAME{alias}": name for alias, (name, _) in self._named.items()}
        bare: Mapping[str, str] = {}
        if not any(record.net in full for record in records):
            bare = {alias: name for alias, (name, _) in self._named.items() if not alias.isdecimal()}
        unknown: dict[str, int] = {}
        cut: dict[str, int] = {}
        for record in records:
            name = full.get(record.net) or bare.get(record.net)
            if name is not None:
                record.net = name
            elif re.fullmatch(r"NNAME\d+", record.net):
                unknown.setdefault(record.net, record.line)
            elif len(record.net) == NET and not _WHOLE.match(record.net):
                cut.setdefault(record.net, record.line)
        return [*self._unknown(unknown), *self._cut(cut)]

    def _unknown(self, nets: Mapping[str, int]) -> list[Note]:
        text = f"{len(nets):,} net aliases are not declared and stand for themselves"
        return [_note("skipped", text, nets, self._path)] if nets else []

    def _cut(self, nets: Mapping[str, int]) -> list[Note]:
        text = (
            f"{len(nets):,} net names have {NET} characters, as many as the form keeps, and may be cut: "
            "two nets whose names were cut alike would be read as one"
        )
        return [_note("nets-merged", text, nets, self._path)] if nets else []


def _note(kind: str, text: str, nets: Mapping[str, int], path: str) -> Note:
    shown = list(nets)[:_SHOWN]
    names = ", ".join(neutral(name, 40) for name in shown) + (", ..." if len(nets) > _SHOWN else "")
    return Note(kind, f"{text} ({names})", tuple(Source(path, nets[name]) for name in shown), nets=tuple(nets))


def told_apart(records: Sequence[Record], path: str) -> list[Note]:
    """Give records of different parts, or of different pins, that carry one name names of their own.

    records: those of parts, in file order. Raises InputError where they cannot be told apart.
    """
    pins_of: dict[str, set[tuple[str, str]]] = {}
    by_ref: dict[str, list[int]] = {}
    for at, record in enumerate(records):
        by_ref.setdefault(record.ref, []).append(at)
        if record.net:
            pins_of.setdefault(record.net, set()).add((record.ref, record.pin))
    wired = frozenset(net for net, pins in pins_of.items() if len(pins) > 1)  # a net of one pin ends there: it joins nothing
    twice = {ref: found for ref, places in by_ref.items() if (found := _on_two_nets([records[at] for at in places], wired))}
    if not twice:
        return []
    runs = {ref: _runs(places) for ref, places in by_ref.items()}
    several = [ref for ref, places in by_ref.items() if len(places) > 1 and ref not in twice]
    part_by_part = 10 * sum(len(runs[ref]) == 1 for ref in several) >= 9 * len(several)
    notes = []
    for ref, pins in twice.items():
        first = records[by_ref[ref][0]]
        places = Source(path, first.line), Source(path, records[by_ref[ref][-1]].line)
        if all(len(pin) >= PIN or pin == NAMELESS for pin in pins):
            _number_pins([records[at] for at in by_ref[ref]], pins, wired)
            written = neutral(", ".join(pins), 80)
            text = f"pins of {neutral(ref, 80)} written {written} stand on several nets and were told apart by them"
            notes.append(Note("pin-on-two-nets", text, places, (ref,)))
            continue
        copies = [copy for run in runs[ref] for copy in _restarts([records[at] for at in run], wired)]
        if not part_by_part or any(_on_two_nets(copy, wired) for copy in copies):
            raise _mixed(path, first, pins[0])
        free = (name for number in count(2) if (name := f"{ref} ({number})") not in by_ref)
        kept = [ref, *(next(free) for _ in copies[1:])]
        for name, copy in zip(kept, copies, strict=True):
            for record in copy:
                record.ref = name
        cut = len(ref) >= REFERENCE
        why = f"were cut to the {REFERENCE} characters" if cut else "carry the reference"
        shown = ", ".join(neutral(name, 80) for name in kept[:_SHOWN]) + (", ..." if len(kept) > _SHOWN else "")
        text = f"{len(copies)} parts {why} {neutral(ref, 80)}; they are kept as {shown}"
        notes.append(Note("pin-on-two-nets" if cut else "duplicate-reference", text, places, (ref,)))
    return notes


def _on_two_nets(records: Sequence[Record], wired: frozenset[str]) -> list[str]:
    """The pins that stand on two nets which lead on to other pins."""
    nets: dict[str, set[str]] = {}
    for record in records:
        if record.net in wired:
            nets.setdefault(record.pin, set()).add(record.net)
    return [pin for pin, found in nets.items() if len(found) > 1]


def _runs(places: Sequence[int]) -> list[list[int]]:
    """Places in stretches without a gap."""
    found = [[places[0]]]
    for at in places[1:]:
        if at == found[-1][-1] + 1:
            found[-1].append(at)
        else:
            found.append([at])
    return found


def _restarts(records: Sequence[Record], wired: frozenset[str]) -> list[list[Record]]:
    """One stretch cut where its pins begin anew: a pin comes again behind another one, or at once on another net."""
    if not _on_two_nets(records, wired):
        return [list(records)]
    found: list[list[Record]] = []
    seen: set[str] = set()
    for record in records:
        last = found[-1][-1] if found else record
        if not found or (record.pin in seen and (last.pin != record.pin or _on_two_nets((last, record), wired))):
            found.append([])
            seen = set()
        seen.add(record.pin)
        found[-1].append(record)
    return found


def _number_pins(records: Sequence[Record], pins: Sequence[str], wired: frozenset[str]) -> None:
    numbers: dict[str, dict[str, int]] = {pin: {} for pin in pins}
    for record in records:
        if record.pin in numbers and record.net in wired:
            known = numbers[record.pin]
            at = known.setdefault(record.net, len(known) + 1)
            record.pin = record.pin if at == 1 else f"{record.pin} ({at})"


def _mixed(path: str, first: Record, pin: str) -> InputError:
    cut = len(first.ref) >= REFERENCE
    return InputError(
        path,
        f"pin {pin} of {first.ref} stands on several nets, and the records of the parts of that reference are mixed",
        line=first.line,
        expected="records part by part, or a reference for each part",
        remedy=f"References are cut to {REFERENCE} characters: give those parts shorter ones, or use a netlist of the schematic."
        if cut
        else "Give each part a reference of its own and export the file again.",
    )
