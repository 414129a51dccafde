"""The neutral tree of a netlist: a keyword followed by texts and further forms, as both writings have it."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Union

from checker import limits
from checker.errors import InputError


class Form(list[Union[str, "Form"]]):
    """`(keyword text text (keyword ...) ...)`; an XML attribute is a form with one text. line: 1-based."""

    __slots__ = ("line",)
    line: int

    @property
    def keyword(self) -> str:
        """The first text, "" when the form is empty or begins with another form."""
        return self[0] if self and isinstance(self[0], str) else ""

    def atoms(self) -> list[str]:
        """The texts after the keyword."""
        return [item for item in self[1:] if isinstance(item, str)]

    @property
    def text(self) -> str:
        """The texts after the keyword as one, a blank between them."""
        if len(self) == 2 and isinstance(self[1], str):
            return self[1]
        return " ".join(self.atoms())

    def forms(self) -> list[Form]:
        """The forms inside this one that are not empty, in order."""
        return [item for item in self if item.__class__ is Form and item]

    def children(self, keyword: str) -> list[Form]:
        """The forms inside this one that begin with the keyword, in order."""
        return [item for item in self if item.__class__ is Form and item and item[0] == keyword]

    def nested(self, outer: str, inner: str) -> Iterator[Form]:
        """The `inner` forms of every `outer` form inside this one."""
        return (item for group in self.children(outer) for item in group.children(inner))

    def child(self, keyword: str) -> Form | None:
        """The first form inside with that keyword."""
        for item in self:
            if item.__class__ is Form and item and item[0] == keyword:
                return item
        return None

    def said(self, keyword: str) -> str:
        """The text of the first form inside with that keyword, "" when there is none."""
        found = self.child(keyword)
        return "" if found is None else found.text


def form(line: int, *items: str | Form) -> Form:
    """A form that stands on a line."""
    made = Form(items)
    made.line = line
    return made


def identifier(parent: Form, keyword: str, path: str, what: str) -> str:
    """The text of the one form inside that names something, "" when there is none.

    Nothing is guessed about names: two different ones, one of several words (a blank or parenthesis without quotes)
    or one that is too long raise InputError.
    """
    found: str | None = None
    for item in parent:
        if item.__class__ is not Form or not item or item[0] != keyword:
            continue
        if len(item) > 2 or (len(item) == 2 and not isinstance(item[1], str)):
            raise InputError(
                path,
                f"{what} is more than one word",
                line=item.line,
                found=item.text,
                expected="one text",
                remedy="Names with blanks, quotes or parentheses stand in double quotes.",
            )
        text = item.text
        if found is not None and found != text:
            raise InputError(path, f"{what} is given twice", line=item.line, found=f"{found} and {text}", expected="one text")
        if len(text) > limits.NAME:
            raise InputError(
                path, f"{what} is too long", line=item.line, found=text, expected=f"at most {limits.NAME:,} characters"
            )
        found = text
    return found or ""
