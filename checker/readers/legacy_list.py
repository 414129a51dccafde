"""The legacy parenthesised netlist, part by part:

    ( { a comment }
     ( /4EDEDC07 SM0603 C1 10uF {Lib=C}
      ( 1 /5V_IN )
      ( 2 ? )
     )
    )
    *

A part has a stamp, a footprint (`$noname` for none), a reference and a value, which may be of several words. A pin has a number and
a net, `?` for none. Parentheses stand alone between blanks; those inside a word belong to it, as in `Net-(R1-Pad1)`. What follows
the list in braces (footprints that were allowed, the pins again net by net) is stepped over.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import NoReturn

from checker import limits
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.model.fact import Source
from checker.model.reading import Note, Reader, Reading
from checker.neutral import neutral
from checker.readers import sniff
from checker.readers.legacy_circuit import Circuit
from checker.readers.netlist_form import Form, form
from checker.readers.netlist_part import draft

FORM = "legacy parenthesised netlist"

_WORD = re.compile(r"[^ \t\r\n\f\v]++")
_REFERENCE = re.compile(r"[^\W\d]")  # begins with a letter or _
_LIBRARY = re.compile(r"\{Lib=(.*)\}\Z", re.DOTALL)
_NOTHING = frozenset({"$noname", "~", "?"})  # as a footprint
_NOWHERE = "?"  # the net of a pin that is on none
_CUT = "The file may have been cut off; export or copy it again."
_NAMED = "a stamp, a footprint, a reference and a value"


@dataclass(slots=True)
class _Entry:
    """One part as written. words: what stands in front of its pins. pins: number -> its nets and their lines, "" for no net."""

    line: int
    words: list[str] = field(default_factory=list)
    pins: dict[str, dict[str, int]] = field(default_factory=dict)


class _List:
    """The words of a file in order, and what is open at each."""

    def __init__(self, path: str):
        self.path = path
        self.circuit = Circuit(path)
        self.notes: list[Note] = []
        self._depth = 0  # 1 in the list, 2 in a part, 3 in a pin
        self._line = 0  # where the innermost open form begins
        self._entry = _Entry(0)
        self._pin: list[str] = []
        self._closed = False
        self._braces = 0  # the line of the comment that is open
        self._known: dict[str, list[tuple[str, _Entry]]] = {}  # reference as written -> names given to its parts

    def take(self, text: str, line: int) -> None:
        """One line. Raises InputError for words that do not fit where they stand."""
        if len(text) > limits.TOKEN:
            raise InputError(self.path, "a line is too long", line=line, expected=f"at most {limits.TOKEN:,} characters")
        if self._depth < 2 and text.lstrip(sniff.WHITE).startswith("#") and not self._braces:
            return
        for word in _WORD.findall(text):
            if self._braces:
                if word.endswith("}") and "{" not in word:
                    self._braces = 0
            elif self._depth < 2:
                self._outside(word, line)
            elif word == "(":
                self._open(line)
            elif word == ")":
                self._close(line)
            else:
                self._inside(word, line)

    def _outside(self, word: str, line: int) -> None:
        """A word that belongs to no part."""
        if word.startswith("{"):
            self._braces = 0 if len(word) > 1 and word.endswith("}") else line
        elif word == "(" and not (self._closed and self._depth == 0):
            self._open(line)
        elif word == ")" and self._depth == 1:
            self._depth, self._closed = 0, True
        elif word == "*" and self._closed:
            return
        else:
            after = "after the end of the list" if self._closed else "outside the parts"
            self._fail(f"text {after}", line, word, "parts in parentheses that stand between blanks")

    def _open(self, line: int) -> None:
        self._depth += 1
        self._line = line
        if self._depth == 2:
            self._entry = _Entry(line)
        elif self._depth == 3:
            self._pin = []
        elif self._depth > 3:
            self._fail("parentheses are nested too deep", line, "(", "a list of parts, each with a list of pins")

    def _close(self, line: int) -> None:
        self._depth -= 1
        if self._depth == 1:
            self._part(self._entry)
            return
        if len(self._pin) != 2:
            self._fail("a pin has not two words", line, " ".join(self._pin) or "nothing", "its number and its net")
        number, net = (self.circuit.name(word, "the name of a pin or net", line) for word in self._pin)
        self._entry.pins.setdefault(number, {}).setdefault("" if net == _NOWHERE else net, line)

    def _inside(self, word: str, line: int) -> None:
        if word.count("(") != word.count(")") and (word[0] == "(" or word[-1] == ")"):
            self._fail("a parenthesis does not stand alone", line, word, "a blank before and after it")
        if self._depth == 3:
            self._pin.append(word)
        elif self._entry.pins:
            self._fail("text behind the pins of a part", line, word, "the next part")
        else:
            self._entry.words.append(word)

    def _part(self, entry: _Entry) -> None:
        """One whole part."""
        words = list(entry.words)
        library = ""
        for at, word in enumerate(words):
            if at > 2 and word.startswith("{Lib="):
                match = _LIBRARY.match(" ".join(words[at:]))
                library, words = (match[1] if match else ""), words[:at]
                break
        if len(words) < (3 if library else 4) or (len(words) > 4 and not _REFERENCE.match(words[2])):
            # with a blank in the footprint, or without the value, another word would pass for the reference
            self._fail("the reference of a part cannot be told", entry.line, " ".join(entry.words) or "nothing", _NAMED)
        footprint, ref, value = words[1], self.circuit.name(words[2], "the reference of a part", entry.line), " ".join(words[3:])
        said: list[str | Form] = ["comp", form(entry.line, "ref", ref), form(entry.line, "value", value)]
        if footprint not in _NOTHING:
            said.append(form(entry.line, "footprint", footprint))
        if library:
            said.append(form(entry.line, "libsource", form(entry.line, "part", library)))
        entry.words = words
        name = self._called(ref, entry)
        self.circuit.part(name, entry.line, draft(form(entry.line, *said), self.path).facts)
        for number, nets in entry.pins.items():
            for net, line in nets.items():
                self.circuit.pin(name, number, net, line)

    def _called(self, ref: str, entry: _Entry) -> str:
        """The name of a part: its reference, or one of its own when another part has that and this is no further unit of it."""
        known = self._known.setdefault(ref, [])
        for name, other in known[-1:]:
            if _of_one_part(other, entry):
                other.pins.update(entry.pins)
                return name
        name, number = ref, len(known) + 1
        while known and (name == ref or name in self._known):
            name, number = f"{ref} ({number})", number + 1
        if known:
            first = known[0][1].line
            text = (
                f"{neutral(ref, 80)} is listed twice (lines {first} and {entry.line}); "
                f"both are kept, the second as {neutral(name, 80)}"
            )
            places = Source(self.path, first), Source(self.path, entry.line)
            self.notes.append(Note("duplicate-reference", text, places, (ref, name)))
            self._known.setdefault(name, [])
        known.append((name, entry))
        return name

    def end(self) -> None:
        """Raises InputError for a file that ends inside something."""
        if self._braces:
            raise InputError(self.path, "the file ends inside the braces that open here", line=self._braces, remedy=_CUT)
        if not self._closed:
            raise InputError(self.path, "the file ends inside the parentheses that open here", line=self._line, remedy=_CUT)

    def _fail(self, what: str, line: int, found: str, expected: str) -> NoReturn:
        raise InputError(self.path, what, line=line, found=found, expected=expected)


def _of_one_part(one: _Entry, other: _Entry) -> bool:
    """Whether the second entry is a further unit of the first: written alike, with pins of its own, none of them on two nets."""
    shared = [number for number in other.pins if number in one.pins]
    fits = all(one.pins[number].keys() == other.pins[number].keys() for number in shared)
    return one.words[1:] == other.words[1:] and fits and len(shared) < len(other.pins)


def claims(head: str) -> bool:
    """Whether the text begins with the header of the form, or with a list whose first entry looks like a part of it."""
    return sniff.LEGACY_LIST.match(head) is not None


def read(blob: Blob) -> Reading:
    """The netlist. Raises InputError, with the line, for anything that is not a whole netlist."""
    head = sniff.head(blob)
    if not claims(head):
        what = "the file is not a legacy parenthesised netlist" if head else "the file is empty"
        raise InputError(blob.path, what, found=sniff.describe(head), expected="( ( /STAMP FOOTPRINT REFERENCE VALUE")
    text, note = decoded(blob)
    found = _List(blob.path)
    for line, row in enumerate(text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n"), 1):
        found.take(row.rstrip("\x1a"), line)
    found.end()
    notes = [Note("encoding", note, (Source(blob.path),))] if note else []
    return found.circuit.reading(blob, FORM, (*notes, *found.notes))


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
