"""The netlist of lines, one a net: its name, then each pin as reference, hyphen, number.

    GND<TAB>R1-2 U1-4 J1-3

The last hyphen divides, so that `USB-UART1-3` is pin 3 of USB-UART1. The name ends at the first TAB, in a line without one at the
first blank. The form has no values: those come from the bill of materials.
"""

from __future__ import annotations

import re

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
_PIN = re.compile(r"[^\s\d,;:\"'()\[\]{}<>=-][^\s,;\"'(){}<>=]*-[^\s,;\"'(){}<>=]+\Z")
_SHOWN = 5
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
    if not lines or head.startswith(("(", "<", "*", ".")):
        return False
    rows = [_split(line) for line in lines]
    if len(head) > sniff.HEAD // 2:
        rows[-1] = rows[-1][0], rows[-1][1][:-1] or rows[-1][1]  # the window may cut the last word
    fitting = [pins for name, pins in rows if name and name[-1] not in ":,;=" and pins and all(map(_PIN.match, pins))]
    return any(len(pins) > 1 for pins in fitting) and 10 * len(fitting) >= 9 * len(rows)


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


def _doubtful(reading: Reading) -> list[Note]:
    """Parts that may be pins of another part with a hyphen in their names: `U1-OUT-A` beside `U1-3`."""
    lines = {part.ref: part.source for part in reading.parts}
    found = {
        ref: ref[: at.start()] for ref in lines for at in re.finditer("-", ref) if at.start() and ref[: at.start()] in lines
    }  # fmt: skip
    if not found:
        return []
    shown = list(found)[:_SHOWN]
    names = ", ".join(f"{neutral(ref, 40)} or a pin of {neutral(found[ref], 40)}" for ref in shown)
    text = f"{len(found):,} parts may be pins of another part, since the last hyphen divides ({names})"
    return [Note("skipped", text, tuple(lines[ref] for ref in shown), tuple(shown))]


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
    reading = circuit.reading(blob, FORM, (Note("encoding", note, (Source(blob.path),)),) if note else ())
    notes = _doubtful(reading)
    return circuit.reading(blob, FORM, (*reading.notes, *notes)) if notes else reading


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
