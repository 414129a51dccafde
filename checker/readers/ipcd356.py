"""IPC-D-356 and 356A, the netlist a bare board is tested with: nets, references and pins, and where their copper lies.

Read: through holes (317), surface lands (327), holes without copper (367), blind and buried vias (307), what continues them
(017 ...), parameters, net aliases, the end (999). Conductors, adjacency, outlines and the like are stepped over and counted.
The form has no values: those come from the bill of materials. Lands larger than its four digits are written too small by many
programs, so that pads may be larger than read, never smaller.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from checker import limits
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.model.fact import Source
from checker.model.reading import NetRecord, Node, Note, PadRecord, PartRecord, Reader, Reading, SymbolPin
from checker.neutral import neutral
from checker.readers import sniff
from checker.readers.ipcd356_names import NAMELESS, Aliases, told_apart
from checker.readers.ipcd356_records import CODES, WIDTH, Record, record

FORM = "IPC-D-356 netlist"

_BEGINNING = re.compile(r"[CP](?:[ \t]|$)|3[0-9]7", re.MULTILINE)
_CLAIM = re.compile(r"^(?:3[0-9]7[^,;\t\n]{20}|[CP] +NNAME|P +(?:JOB|CODE|UNITS|TITLE|NUM|REV|VER|IMAGE)(?: |$))", re.MULTILINE)
_CONTINUED = frozenset("0" + code[1:] for code in CODES)
_OUTLINES = frozenset({"389", "089"})  # the edge of the board: no net of ours
_PARAMETER = re.compile(r"P[ \t]+(\S+)[ \t]*(.*)")
_END = "999"
_SHOWN = 5
_NAMES = 32  # columns in front of the figures
_NO_UNITS = "Add the line `P  UNITS CUST 0` (0.0001 inch) or `P  UNITS CUST 1` (0.001 mm), whichever the board was exported in."


@dataclass(frozen=True, slots=True)
class _Units:
    """What a figure counts. length: mm. angle: degrees."""

    length: float
    angle: float = 1.0


_UNITS = {
    "CUST": _Units(0.00254),
    "CUST 0": _Units(0.00254),
    "CUST 1": _Units(0.001),
    "CUST 2": _Units(0.00254, math.degrees(1.0)),
    "SI": _Units(0.001),  # from memory: metric
}


class _Board:
    """Collects the records of one file in file order; `reading` checks the whole and returns it."""

    def __init__(self, path: str):
        self.path = path
        self.aliases = Aliases(path)
        self.records: list[Record] = []
        self.units: _Units | None = None
        self.ended = 0  # the line of the end record
        self.last = 0
        self._continues = False  # the line before is a test record
        self._image = ""
        self._read_image = ""
        self._skipped: dict[str, int] = {}  # what is stepped over -> first line
        self._count = 0
        self._long: list[int] = []

    def take(self, text: str, line: int) -> None:
        """One line. Raises InputError for a record whose names cannot be told, units that are missing or changed, a second file."""
        if len(text) > limits.TOKEN:
            raise InputError(self.path, "a line is too long", line=line, expected=f"{WIDTH} columns")
        text = text.rstrip(" \t\x1a")
        if not text:
            return
        if self.ended:
            raise InputError(
                self.path,
                f"there is more after the end record 999 of line {self.ended}",
                line=line,
                found=text,
                expected="one board in a file",
                remedy="Cut the file in two behind that line.",
            )
        self.last = line
        if len(text) > WIDTH:
            self._long.append(line)
        code = text[:3]
        if code in CODES or (code in _CONTINUED and self._continues):
            self._test(text, line, code)
            return
        self._continues = False
        if text[0] in "CP" and text[1:2] in ("", " ", "\t"):
            if not self.aliases.take(text, line) and text[0] == "P":
                self._parameter(text, line)
        elif code == _END:
            self.ended = line
        elif code not in _OUTLINES:
            self._skip(code if code.isdecimal() else text[:10], line)

    def _skip(self, word: str, line: int) -> None:
        self._count += 1
        if len(self._skipped) < _SHOWN:
            self._skipped.setdefault(word, line)

    def _test(self, text: str, line: int, code: str) -> None:
        if self.units is None:
            what = "the file does not say its units before the first record"
            raise InputError(self.path, what, line=line, expected="P  UNITS CUST 0", remedy=_NO_UNITS)
        if self.records and self._image != self._read_image:
            self._continues = False
            self._skip(f"image {self._image}", line)
            return
        if len(self.records) >= limits.PADS:
            raise InputError(self.path, "the file holds too many records", line=line, expected=f"at most {limits.PADS:,}")
        before = self.records[-1] if code in _CONTINUED else None
        found = record(text, line, self.path, before)
        self._continues = True
        self._read_image = self._image
        if before is None or text[_NAMES:].strip():
            self.records.append(found)

    def _parameter(self, text: str, line: int) -> None:
        match = _PARAMETER.match(text)
        word = match[1].upper() if match else ""
        if match and word == "IMAGE":
            self._image = match[2].strip()
        if not match or word != "UNITS":
            return
        said = " ".join(match[2].upper().split())
        units = _UNITS.get(said)
        if units is None:
            raise InputError(self.path, "the units are not known", line=line, found=said or "nothing", expected=", ".join(_UNITS))
        if self.units not in (None, units) and self.records:
            raise InputError(
                self.path, "the units change between the records", line=line, found=said, expected="one unit in a file"
            )
        self.units = units

    def reading(self, blob: Blob, notes: list[Note]) -> Reading:
        """The whole file. Raises InputError when it holds no pins, or connects nothing."""
        if not self.records:
            what = "the file holds no test records"
            raise InputError(self.path, what, expected="lines that begin with 317 or 327", remedy="Export the file again, whole.")
        notes = [*notes, *self.aliases.resolve(self.records)]
        of_parts = [found for found in self.records if found.ref]
        for found in of_parts:
            found.pin = found.pin or (NAMELESS if found.net else "")
        notes += told_apart(of_parts, self.path)
        nets = self._nets()
        if not any(len(net.nodes) > 1 for net in nets):
            what = "the file connects nothing: no net has two pins"
            raise InputError(self.path, what, remedy="Check that the records have net names in columns 4 to 17.")
        return Reading(
            role="netlist",
            form=FORM,
            path=self.path,
            sha256=blob.sha256,
            parts=self._parts(of_parts),
            nets=nets,
            pads=tuple(self._pads(notes)),
            notes=(*notes, *self._notes()),
        )

    def _parts(self, records: list[Record]) -> tuple[PartRecord, ...]:
        pins: dict[str, dict[str, SymbolPin]] = {}
        lines: dict[str, int] = {}
        for found in records:
            lines.setdefault(found.ref, found.line)
            numbers = pins.setdefault(found.ref, {})
            if found.pin:
                numbers.setdefault(found.pin, SymbolPin(found.pin))
        self._bounded(len(pins), "parts", limits.PARTS)
        self._bounded(max(map(len, pins.values()), default=0), "pins of one part", limits.PINS_PER_PART)
        return tuple(PartRecord(ref, (), Source(self.path, lines[ref]), tuple(found.values())) for ref, found in pins.items())

    def _nets(self) -> tuple[NetRecord, ...]:
        nodes: dict[str, dict[tuple[str, str], Node]] = {}
        lines: dict[str, int] = {}
        for found in self.records:
            if found.net:
                lines.setdefault(found.net, found.line)
                on = nodes.setdefault(found.net, {})
                if found.ref and (found.ref, found.pin) not in on:
                    on[found.ref, found.pin] = Node(found.ref, found.pin, source=Source(self.path, found.line))
        self._bounded(len(nodes), "nets", limits.NETS)
        self._bounded(max(map(len, nodes.values()), default=0), "pins of one net", limits.PINS_PER_NET)
        return tuple(NetRecord(net, net, tuple(on.values()), Source(self.path, lines[net])) for net, on in nodes.items())

    def _bounded(self, count: int, what: str, limit: int) -> None:
        if count > limit:
            raise InputError(self.path, f"the file holds too many {what}", found=f"{count:,}", expected=f"at most {limit:,}")

    def _pads(self, notes: list[Note]) -> list[PadRecord]:
        """The copper of each record that says where it lies; a note on those that do not, or lie inside the board."""
        assert self.units is not None  # every record was read with units
        length, angle = self.units.length, self.units.angle
        bottom = max(2, *(found.access or 0 for found in self.records))  # a board has two sides, whether or not lands are on both
        pads: list[PadRecord] = []
        faults: list[Record] = []
        inside = 0
        for found in self.records:
            if found.fault or found.x is None or found.y is None:
                faults.append(found)
                continue
            side = {0: "both", None: "both", 1: "top", bottom: "bottom"}.get(found.access)
            if side is None:
                inside += 1
                continue
            width = (found.width or 0) * length
            pads.append(
                PadRecord(
                    found.ref,
                    found.pin,
                    found.net,
                    round(found.x * length, 6),
                    round(found.y * length, 6),
                    round(width, 6),
                    round((found.height or 0) * length or width, 6),
                    round((found.turned or 0) * angle % 360, 6),
                    round((found.hole or 0) * length, 6),
                    side,
                    Source(self.path, found.line),
                )
            )
        if faults:
            first = faults[0]
            text = f"{len(faults):,} records tell no place for their copper; the first: line {first.line}, {first.fault}"
            refs = tuple(dict.fromkeys(found.ref for found in faults if found.ref))[:_SHOWN]
            notes.append(Note("skipped", text, tuple(Source(self.path, found.line) for found in faults[:_SHOWN]), refs))
        if inside:
            notes.append(Note("skipped", f"{inside:,} records are of copper inside the board", (Source(self.path),)))
        return pads

    def _notes(self) -> list[Note]:
        notes = []
        if not self.ended:
            text = f"the file has no end record 999 and may have been cut off after line {self.last}"
            notes.append(Note("skipped", text, (Source(self.path, self.last),)))
        if self._long:
            text = f"{len(self._long):,} lines are longer than {WIDTH} columns; what stands beyond was not read"
            notes.append(Note("skipped", text, tuple(Source(self.path, line) for line in self._long[:_SHOWN])))
        if self._count:
            words = ", ".join(neutral(word, 40) for word in self._skipped) + (", ..." if len(self._skipped) == _SHOWN else "")
            text = f"{self._count:,} lines that do not bear on nets and pads, or were not understood, were skipped: {words}"
            notes.append(Note("skipped", text, tuple(Source(self.path, line) for line in self._skipped.values())))
        return notes


def claims(head: str) -> bool:
    """Whether the text begins with a line of the form and holds a record, an alias or a parameter it knows."""
    lines = head.replace("\r", "\n")
    return _BEGINNING.match(lines) is not None and _CLAIM.search(lines) is not None


def read(blob: Blob) -> Reading:
    """The netlist with its pads. Raises InputError, with the line, for anything that cannot be read for sure."""
    head = sniff.head(blob)
    if not claims(head):
        what = "the file is not an IPC-D-356 netlist" if head else "the file is empty"
        raise InputError(blob.path, what, found=sniff.describe(head), expected="lines that begin with P, C, 317 or 327")
    text, note = decoded(blob)
    board = _Board(blob.path)
    for line, found in enumerate(text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n"), 1):
        board.take(found, line)
    return board.reading(blob, [Note("encoding", note, (Source(blob.path),))] if note else [])


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
