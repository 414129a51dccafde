"""The netlist of lines, one a net: its name, then each pin as reference, hyphen, number.

    GND<TAB>R1-2 U1-4 J1-3

The last hyphen divides, so that `USB-UART1-3` is pin 3 of USB-UART1. The name ends at the first TAB, in a line without one at the
first blank. The form has no values: those come from the bill of materials.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping

from checker import limits
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.model.fact import Source
from checker.model.reading import Note, Reader, Reading
from checker.neutral import neutral
from checker.readers import sniff
from checker.readers.legacy_circuit import Circuit

FORM = "netlist of lines"

_WORD = re.compile(r"[^ \t\r\n\f\v]++")
_SHOWN = 5
_LOOKED_AT = 4  # hyphens of a reference
_BARE = "a netlist of lines names nets and pins only: values, types and bodies must come from a bill of materials"
_ROW = "a net, a TAB, then pins such as R1-2"


def _split(line: str) -> tuple[str, list[str]]:
    """(name of the net, its pins as written)."""
    name, tab, rest = line.partition("\t")
    if not tab:
        words = _WORD.findall(line)
        return (words[0] if words and line[0] not in sniff.WHITE else ""), words[1:]
    return name.strip(sniff.WHITE), _WORD.findall(rest)


def claims(head: str) -> bool:
    """Whether nearly every line is a net with pins, and one of them connects two."""
    lines = [line for line in head.replace("\r", "\n").split("\n") if line.strip(sniff.WHITE)]
    if lines and len(head) > sniff.HEAD // 2:
        lines[-1] = lines[-1].rpartition(" ")[0]  # the window may cut the last word
    fitting = [line for line in lines if sniff.NET_LINE.match(line)]
    return any(len(_split(line)[1]) > 1 for line in fitting) and 10 * len(fitting) >= 9 * len(lines)


def _net(circuit: Circuit, line: str, at: int) -> None:
    """One line. Raises InputError for one that is not a net with pins."""
    name, pins = _split(line)
    if not name:
        raise InputError(circuit.path, "a net has no name", line=at, found=line.strip(), expected=_ROW)
    if not pins:
        raise InputError(circuit.path, "a net has no pins", line=at, found=line.strip(), expected=_ROW)
    circuit.name(name, "the name of a net", at)
    for word in pins:
        ref, hyphen, number = word.rpartition("-")
        if not number and ref.endswith("-"):  # the pin `-` of a rectifier
            ref, number = ref[:-1], "-"
        if not (ref and hyphen and number):
            raise InputError(circuit.path, "this is no pin of a part", line=at, found=word, expected=_ROW)
        circuit.part(circuit.name(ref, "the reference of a part", at), at)
        circuit.pin(ref, circuit.name(number, "the number of a pin", at), name, at)


def _doubtful(places: Mapping[str, Source]) -> Iterator[Note]:
    """Parts that may be pins of another part with a hyphen in their names: `U1-OUT-A` beside `U1-3`."""
    found: dict[str, str] = {}
    for ref in places:
        words = ref.split("-", _LOOKED_AT)
        for count in range(1, len(words)):
            if (stem := "-".join(words[:count])) in places:
                found[ref] = stem
    if found:
        shown = list(found)[:_SHOWN]
        names = ", ".join(f"{neutral(ref, 40)} or a pin of {neutral(found[ref], 40)}" for ref in shown)
        text = f"{len(found):,} parts may be pins of another part, since the last hyphen divides ({names})"
        yield Note("skipped", text, tuple(places[ref] for ref in shown), tuple(shown))


def read(blob: Blob) -> Reading:
    """The netlist. Raises InputError, with the line, for a line that is not a net with pins."""
    head = sniff.head(blob)
    if not claims(head):
        what = "the file is not a netlist of lines" if head else "the file is empty"
        raise InputError(blob.path, what, found=sniff.describe(head), expected=f"lines of {_ROW}")
    text, note = decoded(blob)
    circuit = Circuit(blob.path)
    count = 0
    for at, line in enumerate(text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n"), 1):
        row = line.rstrip(sniff.WHITE + "\x1a")
        count += row.count("-")
        if count > limits.ATOMS:
            raise InputError(blob.path, "the file holds too many pins", line=at, expected=f"at most {limits.ATOMS:,}")
        if row.strip(sniff.WHITE):
            _net(circuit, row, at)
    notes = [Note("encoding", note, (Source(blob.path),))] if note else []
    notes.append(Note("skipped", _BARE, (Source(blob.path),)))
    return circuit.reading(blob, FORM, (*notes, *_doubtful(circuit.places())))


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
