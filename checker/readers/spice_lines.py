"""The lines of a SPICE netlist as cards: continuations joined, comments gone, words told apart, nothing evaluated."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field

from checker import limits
from checker.errors import InputError
from checker.readers.sniff import WHITE

_WORD = re.compile(
    r"\"[^\"]*+\"?"  # a text
    r"|\{[^{}]*+\}?|'[^']*+'?"  # an expression
    r"|(?:[^\s,\"'{}()=]|\([^()]*+\))++|[()=}]"  # a word, with what stands in parentheses inside it: SINE(0 325 50)
)
_COMMENT = re.compile(r"\"[^\"]*+\"|(;|(?<![^\s])\$(?=\s|\Z))")


@dataclass(slots=True)
class Card:
    """One statement. words: as written, `=` a word of its own."""

    line: int
    words: list[str] = field(default_factory=list)

    @property
    def letter(self) -> str:
        """The first letter of a part, upper case; "." for a statement to the simulator."""
        return self.words[0][0].upper()

    @property
    def keyword(self) -> str:
        """The first word in small letters."""
        return self.words[0].lower()

    def positional(self) -> list[str]:
        """The words in front of parameters such as `Rser=1` or `params: A=2`."""
        end = next((at for at, word in enumerate(self.words) if word == "=" or word.lower() == "params:"), len(self.words))
        return self.words[: end - (self.words[end] == "=")] if end < len(self.words) else self.words

    def parameters(self) -> dict[str, str]:
        """name in small letters -> text."""
        marks = (at for at, word in enumerate(self.words) if word == "=" and 0 < at < len(self.words) - 1)
        return {self.words[at - 1].lower(): self.words[at + 1].strip('"') for at in marks}


def cards(text: str, path: str) -> Iterator[Card]:
    """The statements behind the first line, which is the title whatever it holds, up to `.end`.

    Raises InputError for a line that is too long, too many words, and a line that continues nothing.
    """
    count = 0
    open_card: Card | None = None
    control = 0  # the line of a `.control` section, whose lines are commands
    for number, line in enumerate(text.split("\n")[1:], 2):
        if len(line) > limits.TOKEN:
            raise InputError(path, "a line is too long", line=number, expected=f"at most {limits.TOKEN:,} characters")
        row = line.strip(WHITE + "\x1a")
        if not row or row[0] == "*":
            continue
        words = _WORD.findall(_plain(row[1:] if row[0] == "+" else row))
        if control or (words and words[0].lower() == ".control"):
            control = 0 if words and words[0].lower() == ".endc" else control or number
            continue
        count += len(words)
        if count > limits.ATOMS:
            raise InputError(path, "the file holds too many words", line=number, expected=f"at most {limits.ATOMS:,}")
        if row[0] == "+":
            if open_card is None:
                raise InputError(path, "a line continues nothing", line=number, found=row, expected="a part in a line above")
            open_card.words += words
            continue
        if open_card is not None:
            yield open_card
        open_card = Card(number, words) if words else None
        if open_card is not None and open_card.keyword == ".end":
            return
    if open_card is not None:
        yield open_card


def _plain(row: str) -> str:
    """A line without the comment at its end."""
    if ";" in row or "$" in row:
        for found in _COMMENT.finditer(row):
            if found[1]:
                return row[: found.start()]
    return row
