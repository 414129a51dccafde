"""How well parts are told from their text: `python -m tests.score` prints a table and every miss.

fixtures/identify/scored.csv holds part rows of public boards as short facts: file, line and licence name the origin, `pins` are
as `pins_of` of tests/test_kinds.py reads them, `other` holds further facts as `name=text`, parted by ` | `. They were drawn at
random (one seed, file by file in turn, equal rows once, rows that are a bare reference three times a file at most).

The columns from is_kind on were written by hand before the program saw the rows: what somebody of the trade reads from this row
alone, empty where it does not say.
- is_kind: a kind of `model.candidate.KINDS`, ` / ` between kinds that are both right; empty where a reference alone leaves it
  open or no kind fits.
- is_voltage: the rated voltage; of a part made to insulate that of the insulation (`test 2500 V`) and of its contacts. Supply
  and output voltages and the forward voltage of a lamp are no ratings.
- is_class: safety classes and grades of insulation.
- In brackets stands what the row does not say but the type is known for: right when given, no miss when not.

precision = right / given; recall = found / stated. A part of kind `unknown` has no kind given.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from checker.identify.candidates import identify
from checker.model.candidate import UNKNOWN, Candidate
from checker.model.circuit import Design, Part, Pin
from checker.model.declaration import Declaration
from checker.model.fact import Fact, Source, Trust
from checker.units import parse

SCORED = Path(__file__).resolve().parents[1] / "fixtures" / "identify" / "scored.csv"
TEXTS = ("value", "symbol", "library", "footprint", "description", "type")
FIELDS = ("kind", "value", "voltage", "power", "class")
VOLTAGES = {"voltage": "", "isolation_test": "test", "isolation_working": "working", "impulse": "impulse"}


@dataclass(frozen=True, slots=True)
class Said:
    """One statement: words, or a number with its unit and form; what: `test` and the like before a voltage."""

    words: str = ""
    number: float = 0.0
    unit: str = ""
    form: str = ""
    what: str = ""

    def __str__(self) -> str:
        return self.words or " ".join(word for word in (self.what, f"{self.number:g}", self.unit, self.form) if word)


@dataclass(frozen=True, slots=True)
class Row:
    """A row of the file. line: in scored.csv; cells: by heading."""

    line: int
    cells: dict[str, str]

    @property
    def trust(self) -> Trust:
        return Trust.BOM if self.cells["carrier"] == "bom" else Trust.NETLIST

    @property
    def origin(self) -> str:
        return f"{self.cells['file']}:{self.cells['line']}"

    def facts(self) -> tuple[tuple[str, str], ...]:
        """(attribute, text) of everything the row says."""
        named = [(name, self.cells[name]) for name in TEXTS if self.cells[name]]
        others = [fact.partition("=") for fact in self.cells["other"].split(" | ") if fact]
        return (*named, *((name, text) for name, _, text in others))

    def pins(self) -> tuple[Pin, ...]:
        text = self.cells["pins"]
        if text.startswith("*"):
            return tuple(Pin(str(at + 1)) for at in range(int(text[1:])))
        return tuple(Pin(*word.split("=", 1)) for word in text.split())

    def part(self) -> Part:
        place = Source(self.cells["file"], int(self.cells["line"]))
        facts = tuple(Fact(name, text, place, self.trust) for name, text in self.facts())
        return Part(self.cells["ref"], self.pins(), facts, (place,))

    def stated(self, field: str) -> tuple[tuple[Said, ...], tuple[Said, ...]]:
        """What the row says about the field, and what may be given besides (in brackets, or as a second right kind)."""
        cell = self.cells[f"is_{field}"]
        if field == "kind":
            kinds = [Said(kind) for kind in cell.split(" / ") if kind]
            optional = Said(UNKNOWN) in kinds
            return (() if optional else tuple(kinds[:1])), tuple(kinds if optional else kinds[1:])
        certain = [part for part in cell.split("; ") if part and not part.startswith("(")]
        known = [part.strip("()") for part in cell.split("; ") if part.startswith("(")]
        return tuple(_said(field, part) for part in certain), tuple(_said(field, part) for part in known)


_WHATS = frozenset(VOLTAGES.values()) - {""}
_UNITS = ("ohm", "Hz", "F", "H", "V", "A", "W")


def _said(field: str, text: str) -> Said:
    if field == "class":
        return Said(text)
    first, _, rest = text.partition(" ")
    what, text = (first, rest) if first in _WHATS else ("", text)
    written = text.removesuffix(" rms").removesuffix(" dc").removesuffix(" peak").split()[1]
    unit = next(unit for unit in _UNITS if written.endswith(unit))
    number = parse(text, unit)
    return Said("", number.value, unit, number.form, what)


def rows() -> tuple[Row, ...]:
    """Every row of scored.csv; the header is line 1, no cell has a line break."""
    with SCORED.open(encoding="utf-8", newline="") as stream:
        return tuple(Row(at, cells) for at, cells in enumerate(csv.DictReader(stream), 2))


def told(part: Part) -> Candidate:
    """What the program makes of one part alone."""
    return identify(Design("row", {part.ref: part}, {}), Declaration())[part.ref][0]


def given(candidate: Candidate, field: str) -> tuple[Said, ...]:
    """What the program says about the field."""
    if field == "kind":
        return () if candidate.kind == UNKNOWN else (Said(candidate.kind),)
    if field == "class":
        return tuple(Said(mark.name) for mark in candidate.marks)
    if field == "voltage":
        found = [(what, candidate.ratings.get(name)) for name, what in VOLTAGES.items()]
    else:
        found = [("", candidate.value if field == "value" else candidate.ratings.get(field))]
    return tuple(Said("", float(fact.value), fact.unit, fact.form, what) for what, fact in found if fact is not None)


def agree(said: Said, other: Said, *, known: bool = False) -> bool:
    """Whether two statements are the same. known: the form of the first need not be written."""
    if said.words or other.words:
        return said.words == other.words
    same = math.isclose(said.number, other.number, rel_tol=1e-6) and (said.unit, said.what) == (other.unit, other.what)
    return same and (said.form == other.form or (known and not said.form))


@dataclass(frozen=True, slots=True)
class Fault:
    """A statement the row makes and the program does not (missed), or one the program makes and the row does not (wrong)."""

    sort: str
    field: str
    row: Row
    said: Said

    def __str__(self) -> str:
        texts = ", ".join(text for _, text in self.row.facts())
        place = f"{SCORED.name}:{self.row.line}"
        return f"{place}: {self.field} {self.sort}: {self.said} ({self.row.origin} {self.row.cells['ref']}: {texts[:120]})"


@dataclass(frozen=True, slots=True)
class Score:
    """stated: statements of the rows; given: those of the program."""

    field: str
    stated: int
    given: int
    faults: tuple[Fault, ...]

    def count(self, sort: str) -> int:
        return sum(fault.sort == sort for fault in self.faults)

    @property
    def precision(self) -> float:
        return 1 - self.count("wrong") / self.given if self.given else 1.0

    @property
    def recall(self) -> float:
        return 1 - self.count("missed") / self.stated if self.stated else 1.0


def scores(judged: Sequence[tuple[Row, Candidate]]) -> tuple[Score, ...]:
    """One score a field."""
    found = []
    for field in FIELDS:
        stated, says, faults = 0, 0, []
        for row, candidate in judged:
            certain, known = row.stated(field)
            answers = given(candidate, field)
            stated += len(certain)
            says += len(answers)
            faults += _faults(field, row, certain, known, answers)
        found.append(Score(field, stated, says, tuple(faults)))
    return tuple(found)


def _faults(field: str, row: Row, certain: Sequence[Said], known: Sequence[Said], answers: Sequence[Said]) -> Iterator[Fault]:
    for answer in answers:
        if not any(agree(said, answer) for said in certain) and not any(agree(said, answer, known=True) for said in known):
            yield Fault("wrong", field, row, answer)
    for said in certain:
        also = known if field == "kind" else ()
        if not any(agree(right, answer) for right in (said, *also) for answer in answers):
            yield Fault("missed", field, row, said)


def report() -> str:
    """The table, how many parts have no kind, and every fault."""
    judged = [(row, told(row.part())) for row in rows()]
    lines = ["| field | rows | stated | given | right | wrong | missed | precision | recall |", "|---|" + "---:|" * 8]
    found = scores(judged)
    for score in found:
        wrong, missed = score.count("wrong"), score.count("missed")
        counts = f"{len(judged)} | {score.stated} | {score.given} | {score.given - wrong} | {wrong} | {missed}"
        lines.append(f"| {score.field} | {counts} | {score.precision:.3f} | {score.recall:.3f} |")
    unknown = [row for row, candidate in judged if candidate.kind == UNKNOWN]
    meant = sum(bool(row.stated("kind")[0]) for row in unknown)
    lines += ["", f"kind unknown: {len(unknown)} of {len(judged)} parts; {meant} of them say what they are"]
    lines += [str(fault) for score in found for fault in score.faults]
    return "\n".join(lines)


if __name__ == "__main__":
    print(report())
