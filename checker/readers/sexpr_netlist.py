"""The S-expression netlist: `(export (version ...) (components ...) (nets ...) ...)`.

The lexical rules differ from Lisp: white space is ASCII only, brackets, apostrophes, semicolons, `#` and backslashes are
ordinary characters of a bare word, and no word is a number: `01`, `+5`, `1E3` and `nil` are names.
"""

from __future__ import annotations

import re
from typing import Any, NoReturn

import sexpdata

from checker import limits
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.model.fact import Source
from checker.model.reading import Note, Reader, Reading
from checker.readers import sniff
from checker.readers.netlist_form import Form
from checker.readers.netlist_tree import Netlist

FORM = "S-expression netlist"

_ITEM = 3  # how many forms are open inside a part or net: (export (components (comp
_CLAIM = re.compile(r"\([ \t\r\n\f\v]*+export(?![^ \t\r\n\f\v()\"])")
_WORD = re.compile(r"[^ \t\r\n\f\v()\"]++")
_STRING = re.compile(r'"([^"\\]*+(?:\\.[^"\\]*+)*+)"', re.DOTALL)
_ESCAPE = re.compile(r"\\(.)", re.DOTALL)
_ESCAPED = {"n": "\n", "r": "\r", "t": "\t"}
# `(keyword)`, `(keyword word)` and `(keyword "text")`: nine forms of ten
_LEAF = re.compile(
    r"[ \t\r\n\f\v]*+\(([^ \t\r\n\f\v()\"]++)[ \t\r\n\f\v]*+(?:\"([^\"\\]*+)\"|([^ \t\r\n\f\v()\"]++))?+[ \t\r\n\f\v]*+\)"
).match
_FIRST = re.compile(r"[ \t\r\n\f\v]*+([^ \t\r\n\f\v()\"]++)").match


class _Parser(sexpdata.Parser):  # type: ignore[misc]  # the library has no annotations
    """sexpdata with the lexical rules of netlists. Every item is handed over when it closes and then forgotten."""

    def __init__(self, text: str, netlist: Netlist):
        super().__init__(text, line_comment="")  # "" equals no character: there are no comments
        self.brackets = {"(": ")"}
        # An apostrophe in front of a word would be a Lisp quote. As a "closing bracket" it only ends the library's
        # loop, and parse_sexp below reads on with the word.
        self.closing_brackets = {")", "'"}
        self.netlist = netlist
        self.path = netlist.path
        self.depth = 0  # forms that are open
        self.section = ""
        self.atoms = 0
        self.closed = False  # the root form is complete
        self.line, self.counted = 1, 0  # the line at the character offset `counted`

    def parse(self) -> None:
        """Hand over the whole text. Raises InputError for text that is not one complete form."""
        end, _ = super().parse_sexp(0)
        if end < len(self.string):
            self.fail("text after the end of the netlist", end, found=self.string[end : end + 40])

    def parse_sexp(self, i: int) -> tuple[int, Form | None]:
        """The form that opens before offset i, and the offset of its closing parenthesis."""
        string = self.string
        made = Form()
        made.line = self.line_at(i)
        self.opened(i)
        while True:
            i = self.leaves(i, made)
            i, items = super().parse_sexp(i)
            made.extend(items)
            if i == len(string):
                word = f" `{made.keyword}`" if made.keyword else ""
                raise InputError(self.path, f"the file ends inside the form{word} that opens here", line=made.line, remedy=_CUT)
            if string[i] == ")":
                break
            i, word = self.parse_atom(i)
            made.append(word)
        self.depth -= 1
        if self.depth == _ITEM - 1:
            self.netlist.take(self.section, made)
            return i, None
        self.closed = self.depth == 0
        return i, made

    def leaves(self, i: int, made: Form) -> int:
        """Read the keyword and the plain forms that follow at i; the library reads whatever is not as plain."""
        if self.depth < _ITEM:
            return i
        string = self.string
        if not made and (first := _FIRST(string, i)) and len(first[1]) <= limits.TOKEN:
            made.append(first[1])
            self.atoms += 1
            i = first.end()
        if self.depth >= limits.DEPTH:
            return i
        while leaf := _LEAF(string, i):
            end = leaf.end()
            if end - i > limits.TOKEN or self.atoms >= limits.ATOMS:
                break
            inner = Form(leaf.group(1, leaf.lastindex) if leaf.lastindex != 1 else (leaf[1],))  # type: ignore[arg-type]
            inner.line = self.line_at(leaf.start(1))
            made.append(inner)
            self.atoms += 1
            i = end
        return i

    def line_at(self, i: int) -> int:
        """The line of an offset; offsets only grow."""
        self.line += self.string.count("\n", self.counted, i)
        self.counted = i
        return self.line

    def opened(self, i: int) -> None:
        """One more form is open."""
        self.atoms += 1
        self.checked()
        self.depth += 1
        if self.depth > limits.DEPTH:
            self.fail("parentheses are nested too deep", i, expected=f"at most {limits.DEPTH} levels")
        if self.depth > _ITEM - 1:
            return
        first = _FIRST(self.string, i)
        keyword = first[1] if first else ""
        if self.depth == _ITEM - 1:
            self.section = keyword
            self.netlist.open(keyword)
        elif self.closed:
            self.fail("text after the end of the netlist", i - 1, found=self.string[i - 1 : i + 40])

    def parse_atom(self, i: int) -> tuple[int, str]:
        """A bare word: everything up to white space, a parenthesis or a double quote."""
        match = _WORD.match(self.string, i)
        assert match is not None  # the caller has seen the first character
        return match.end(), self.token(match[0], i)

    def parse_str(self, i: int) -> tuple[int, str]:
        """A quoted text. A backslash before anything but n, r, t stands for the character after it."""
        match = _STRING.match(self.string, i)
        if match is None:
            self.fail("a text in double quotes is not closed", i, remedy=_CUT)
        text = match[1]
        if "\\" in text:
            text = _ESCAPE.sub(lambda escape: _ESCAPED.get(escape[1], escape[1]), text)
        return match.end(), self.token(text, i)

    def token(self, text: str, i: int) -> str:
        """The text of an atom, checked."""
        if not self.depth:
            self.fail("text outside the netlist form", i, found=text)
        if len(text) > limits.TOKEN:
            self.fail("a text is too long", i, found=f"{len(text):,} characters", expected=f"at most {limits.TOKEN:,}")
        self.atoms += 1
        self.checked()
        return text

    def checked(self) -> None:
        """The count of forms and atoms is within the limit."""
        if self.atoms > limits.ATOMS:
            raise InputError(self.path, "the file holds too many items", line=self.line, expected=f"at most {limits.ATOMS:,}")

    def fail(self, what: str, offset: int, **more: Any) -> NoReturn:
        raise InputError(self.path, what, line=self.line + self.string.count("\n", self.counted, offset), **more)


_CUT = "The file may have been cut off; export or copy it again."


def claims(head: str) -> bool:
    """Whether the text begins with `(export`."""
    return _CLAIM.match(head) is not None


def read(blob: Blob) -> Reading:
    """The netlist. Raises InputError, with the line, for anything that is not a whole netlist."""
    head = sniff.head(blob)
    if not claims(head):
        what = "the file is not an S-expression netlist" if head else "the file is empty"
        raise InputError(blob.path, what, found=sniff.describe(head), expected="a file that begins with (export")
    text, note = decoded(blob)
    netlist = Netlist(blob.path)
    _Parser(text, netlist).parse()
    return netlist.reading(blob, FORM, [Note("encoding", note, (Source(blob.path),))] if note else [])


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
