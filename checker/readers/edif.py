"""EDIF 2 0 0, netlist view, and schematic views as far as they say what is connected.

    (edif board (edifVersion 2 0 0) (edifLevel 0) (keywordMap (keywordLevel 0))
      (library parts (edifLevel 0) (technology (numberDefinition))
        (cell R (cellType GENERIC) (view v (viewType NETLIST)
          (interface (port A (designator "1")) (port B (designator "2"))))))
      (library boards (edifLevel 0) (technology (numberDefinition))
        (cell board (cellType GENERIC) (view v (viewType NETLIST) (interface) (contents
          (instance I1 (viewRef v (cellRef R (libraryRef parts))) (designator "R1") (property Value (string "4k7")))
          (net (rename N1 "+5V") (joined (portRef A (instanceRef I1)) ...))))))
      (design board (cellRef board (libraryRef boards))))

A part is an instance of a cell without contents. Its reference is its designator, else a property such as `RefDes`, else the name
of the instance; in a cell inside a cell it gets the way there in front, `/A/B/R1`, unless its designator names it and the cell is
placed once. A pin's number is its designator at the instance, at the port, else the port's name. Nets of inner cells are
`/A/B/NET` unless a port carries them further out. Bus members count from 0 at the left end of the range: `D[3:0]` begins with D[3].

An instance of a `TIE` cell with one port is a symbol (ground, supply), no part; it joins nothing by itself. One with several ports
is a part that ties nets. A `RIPPER` is no part; what its interface joins is one. The form of boards rests on general knowledge of
EDIF: all files looked at were of digital logic.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from checker.errors import InputError
from checker.files import Blob, decoded
from checker.model.fact import Source
from checker.model.reading import Note, Reader, Reading
from checker.neutral import neutral
from checker.readers import edif_text, sniff
from checker.readers.edif_blocks import Plan
from checker.readers.edif_circuit import Circuit
from checker.readers.edif_flat import Flat
from checker.readers.edif_tree import Library

FORM = "EDIF 2 0 0 netlist"

_CLAIM = re.compile(r"\([ \t\r\n\f\v]*+edif(?![^ \t\r\n\f\v()\"])", re.IGNORECASE)
_SHOWN = 5


def claims(head: str) -> bool:
    """Whether the text begins with `(edif`, in letters of any case."""
    return _CLAIM.match(head) is not None


def _skipped(library: Library) -> Iterator[Note]:
    """One note for all forms that were not understood."""
    if library.skipped:
        words = ", ".join(neutral(word, 40) for word in list(library.skipped)[:_SHOWN])
        more = ", ..." if len(library.skipped) > _SHOWN else ""
        text = f"{sum(library.skipped.values())} sections or items not understood and skipped: {words}{more}"
        yield Note("skipped", text, (Source(library.path),))


def read(blob: Blob) -> Reading:
    """The netlist. Raises InputError, with the line, for anything that is not a whole netlist."""
    head = sniff.head(blob)
    if not claims(head):
        what = "the file is not an EDIF netlist" if head else "the file is empty"
        raise InputError(blob.path, what, found=sniff.describe(head), expected="a file that begins with (edif")
    text, note = decoded(blob)
    library = Library(blob.path)
    edif_text.walk(text.removeprefix("\ufeff"), blob.path, library)
    plan = Plan(library)
    circuit = Circuit(Flat(plan))
    title = library.tops[0][4]
    return Reading(
        role="netlist",
        form=FORM,
        path=blob.path,
        sha256=blob.sha256,
        parts=circuit.parts,
        nets=circuit.nets,
        notes=(*((Note("encoding", note, (Source(blob.path),)),) if note else ()), *_skipped(library), *plan.notes, *circuit.notes),
        title="" if re.search(r"[/\\]", title) else title,  # no path of somebody's machine
    )


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
