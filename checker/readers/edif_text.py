"""The lexis of EDIF 2 0 0: `(keyword item ...)`, handed on form by form.

Keywords are folded to small letters; identifiers and strings stay as written. A string has no backslash escapes: decimal codes
stand between per cent signs (`%34%` is a quote, `%13 10%` a line end), and line breaks inside it count for nothing. Per cent signs
that hold no codes are kept, since many writers leave `5%` as it is.
"""

from __future__ import annotations

import re
from sys import intern
from typing import Any, NoReturn, Protocol

from checker import limits
from checker.errors import InputError
from checker.readers.netlist_form import Form, form
from checker.readers.sniff import WHITE

_SPACE = r"[ \t\r\n\f\v]*+"
_WORD = r"[^ \t\r\n\f\v()\"]++"
_TOKEN = re.compile(
    rf"{_SPACE}(?:\({_SPACE}({_WORD}){_SPACE}(?:\"([^\"]*+)\"|({_WORD})){_SPACE}\)"  # `(keyword item)`: most forms
    rf"|\({_SPACE}({_WORD})|(\))|\"([^\"]*+)\"|({_WORD})|([(\"]))"
).match
_LEAF_STRING, _LEAF_WORD, _OPEN, _CLOSE, _STRING, _ATOM, _BAD = range(2, 9)
_CODES = re.compile(r"%([0-9]{1,7}(?:[ \t]+[0-9]{1,7})*)%")
_CONTROLS = frozenset({9, 10, 13})  # the only codes below the blank that a text has a use for
_BREAKS = re.compile(r"[\r\n]+")
_CUT = "The file may have been cut off; export or copy it again."


class Sink(Protocol):
    """Takes the forms of one file. Some forms are containers, whose items are handed over one by one."""

    def enter(self, keyword: str, line: int) -> bool:
        """Whether the form that opens here is a container; asked where no other form than containers is open."""

    def item(self, item: str | Form) -> None:
        """One complete item of the innermost container."""

    def leave(self) -> None:
        """The innermost container is closed."""


def unescaped(text: str) -> str:
    """A string as it is meant."""
    if "\n" in text or "\r" in text:
        text = _BREAKS.sub("", text)
    return _CODES.sub(_characters, text) if "%" in text else text


def _characters(found: re.Match[str]) -> str:
    """The characters of codes between per cent signs, or the text itself where these are no codes, as in `1%5%`."""
    codes = [int(code) for code in found[1].split()]
    if all((32 <= code < 0xD800 or 0xDFFF < code <= 0x10FFFF or code in _CONTROLS) for code in codes):
        return "".join(map(chr, codes))
    return found[0]


class _Walk:
    """One pass over the text."""

    def __init__(self, text: str, path: str, sink: Sink):
        self.text, self.path, self.sink = text, path, sink
        self.line, self.counted = 1, 0  # the line at the character offset `counted`
        self.forms: list[Form] = []  # open forms inside the innermost container
        self.containers: list[tuple[str, int]] = []  # keyword and line of the open containers
        self.atoms = 0

    def run(self) -> None:
        """Raises InputError for text that is not one complete form."""
        text, at, end = self.text, 0, len(self.text.rstrip(WHITE + "\x1a"))
        while at < end:
            token = _TOKEN(text, at)
            if token is None or token.lastindex == _BAD:
                self._bad(token.start(_BAD) if token else at)
            at = self._take(token, token.lastindex or 0)
            if not self.containers and not self.forms and at < end:
                self.fail("text after the end of the file's form", at, found=text[at : at + 40].strip(WHITE))
        if self.forms or self.containers:
            keyword, line = (self.forms[-1].keyword, self.forms[-1].line) if self.forms else self.containers[-1]
            raise InputError(self.path, f"the file ends inside the form `{keyword}` that opens here", line=line, remedy=_CUT)

    def _take(self, token: re.Match[str], kind: int) -> int:
        """One token; returns where it ends."""
        if kind <= _OPEN:
            self._open(token, kind)
        elif kind == _CLOSE:
            self._close(token.start(_CLOSE))
        else:
            text = token[kind]
            self._checked(text, token.start(kind))
            self._item(unescaped(text) if kind == _STRING else intern(text))
        return token.end()

    def _open(self, token: re.Match[str], kind: int) -> None:
        start = token.start(_OPEN if kind == _OPEN else 1)
        self.line += self.text.count("\n", self.counted, start)
        self.counted = start
        keyword = intern((token[4] if kind == _OPEN else token[1]).lower())
        self._checked(keyword, start)
        if len(self.forms) + len(self.containers) >= limits.DEPTH:
            self.fail("the forms are nested too deep", start, expected=f"at most {limits.DEPTH} levels")
        container = not self.forms and self.sink.enter(keyword, self.line)
        if container:
            self.containers.append((keyword, self.line))
        if kind != _OPEN:
            text = token[kind]
            self._checked(text, start)
            item = unescaped(text) if kind == _LEAF_STRING else intern(text)
            if container:
                self.sink.item(item)
                self._close(start)
            else:
                self._item(form(self.line, keyword, item))
        elif not container:
            self.forms.append(form(self.line, keyword))

    def _close(self, at: int) -> None:
        if self.forms:
            made = self.forms.pop()
            self._item(made)
        elif self.containers:
            self.containers.pop()
            self.sink.leave()
        else:
            self.fail("a parenthesis closes nothing", at, found=")")

    def _item(self, item: str | Form) -> None:
        if self.forms:
            self.forms[-1].append(item)
        elif self.containers:
            self.sink.item(item)
        else:
            found = item if isinstance(item, str) else f"({item.keyword}"
            self.fail("text outside the file's form", self.counted, found=found, expected="(edif")

    def _checked(self, text: str, at: int) -> None:
        self.atoms += 1
        if self.atoms > limits.ATOMS:
            self.fail("the file holds too many items", at, expected=f"at most {limits.ATOMS:,}")
        if len(text) > limits.TOKEN:
            self.fail("a text is too long", at, found=f"{len(text):,} characters", expected=f"at most {limits.TOKEN:,}")

    def _bad(self, at: int) -> NoReturn:
        """Where no token begins: a string without its end, or a parenthesis without a keyword."""
        if self.text.startswith('"', at):
            self.fail("a text in double quotes is not closed", at, remedy=_CUT)
        self.fail("a form has no keyword", at, found=self.text[at : at + 20], expected="( and a word")

    def fail(self, what: str, offset: int, **more: Any) -> NoReturn:
        line = self.line + self.text.count("\n", self.counted, max(self.counted, offset))
        raise InputError(self.path, what, line=line, **more)


def walk(text: str, path: str, sink: Sink) -> None:
    """Hands a whole file over. Raises InputError, with the line, for text that is not one complete form."""
    _Walk(text, path, sink).run()
