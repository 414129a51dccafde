"""Names of EDIF: an identifier to refer to, the name it stands for, and the members of an array."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from decimal import Decimal
from math import prod
from typing import Generic, NamedTuple, TypeVar

from checker import limits
from checker.errors import InputError
from checker.readers.netlist_form import Form

Item = TypeVar("Item")
Index = tuple[int, ...]

_RANGE = re.compile(r"(.*)([\[(<{])([0-9]{1,9}):([0-9]{1,9})([\])>}])", re.DOTALL)
_WHOLE = re.compile(r"[+-]?[0-9]{1,12}\Z")
_DIMENSIONS = 8
_LONGEST = 40  # characters a number may have when it is written out
_UNITS = {
    "voltage": "V", "current": "A", "resistance": "ohm", "capacitance": "F", "inductance": "H", "power": "W",
    "frequency": "Hz", "temperature": "degC", "time": "s",
}  # fmt: skip


class Names(Generic[Item]):
    """Things by identifier. Case does not matter, except where a file has two that differ in nothing else."""

    def __init__(self) -> None:
        self._exact: dict[str, Item] = {}
        self._folded: dict[str, Item | None] = {}  # None: several

    def add(self, ident: str, item: Item) -> bool:
        """False when the identifier is taken."""
        if ident in self._exact:
            return False
        self._exact[ident] = item
        folded = ident.lower()
        self._folded[folded] = None if folded in self._folded else item
        return True

    def find(self, ident: str) -> Item | None:
        """The one thing meant, None when there is none or it cannot be told which."""
        found = self._exact.get(ident)
        return self._folded.get(ident.lower()) if found is None else found

    def __iter__(self) -> Iterator[Item]:
        return iter(self._exact.values())

    def __len__(self) -> int:
        return len(self._exact)


class Named(NamedTuple):
    """ident: as other forms refer to it. text: the true name. dims: sizes of an array, () for one thing."""

    ident: str
    text: str
    dims: Index = ()

    @property
    def width(self) -> int:
        """How many members it has."""
        return prod(self.dims)


@dataclass(frozen=True, slots=True)
class Place:
    """A file, for messages."""

    path: str

    def wrong(self, what: str, at: Form, expected: str = "") -> InputError:
        """The error for a form that cannot be used."""
        said = " ".join(item if isinstance(item, str) else f"({item.keyword} ...)" for item in at)
        return InputError(self.path, what, line=at.line, found=f"({said})", expected=expected)

    def whole(self, text: str, at: Form) -> int:
        """A whole number."""
        if not _WHOLE.match(text):
            raise self.wrong("this is no whole number", at, "digits")
        return int(text)

    def named(self, item: str | Form, at: Form, what: str) -> Named:
        """The name that an identifier, `rename`, `name` or `array` gives. Raises InputError when it gives none."""
        if isinstance(item, Form) and item.keyword == "array" and len(item) > 2:
            inner = self.named(item[1], item, what)
            dims = tuple(self.whole(word, item) for word in item[2:] if isinstance(word, str))
            if len(dims) != len(item) - 2 or len(dims) > _DIMENSIONS or not all(size > 0 for size in dims):
                raise self.wrong("an array has no size", item, "(array NAME SIZE)")
            if prod(dims) > limits.ARRAY:
                raise self.wrong("an array is too wide", item, f"at most {limits.ARRAY:,} members")
            return inner._replace(dims=dims)
        ident, text = self._plain(item)
        if not ident:
            raise self.wrong(f"{what} has no name", at, "an identifier or (rename IDENTIFIER TEXT)")
        for word in (ident, text):
            if len(word) > limits.NAME:
                expected = f"at most {limits.NAME:,} characters"
                raise InputError(self.path, f"the name of {what} is too long", line=at.line, found=word, expected=expected)
        return Named(ident, text or ident)

    def _plain(self, item: str | Form) -> tuple[str, str]:
        if isinstance(item, str):
            return item, item.removeprefix("&")
        if item.keyword == "rename" and len(item) > 2:
            second = item[2]
            return self._plain(item[1])[0], second if isinstance(second, str) else words(second)
        if item.keyword == "name" and len(item) > 1:
            return self._plain(item[1])
        return "", ""

    def member(self, item: str | Form, at: Form) -> tuple[str, Index]:
        """(identifier, member of its array), () for the whole, of a reference."""
        if isinstance(item, Form) and item.keyword == "member" and len(item) > 2:
            ident, _ = self.member(item[1], at)
            return ident, tuple(self.whole(word if isinstance(word, str) else "", item) for word in item[2:])
        ident, _ = self._plain(item)
        if not ident:
            raise self.wrong("a reference names nothing", at, f"({at.keyword} IDENTIFIER)")
        return ident, ()

    def offset(self, index: Index, dims: Index, at: int, what: str) -> int:
        """The place of a member, counted row by row from 0. Raises InputError for one that is not there. at: line."""
        place = 0
        if len(index) != len(dims) or not all(0 <= one < size for one, size in zip(index, dims, strict=True)):
            found, sizes = " ".join(map(str, index)), " x ".join(map(str, dims)) or "one thing, no array"
            raise InputError(self.path, f"{what} has no such member", line=at, found=found, expected=sizes)
        for one, size in zip(index, dims, strict=True):
            place = place * size + one
        return place


def words(form: Form) -> str:
    """The text a form holds, itself or in a form such as `stringDisplay` that says where it is drawn."""
    for item in form[1:]:
        if isinstance(item, str):
            return item
        if item.keyword.endswith("display") and (inner := words(item)):
            return inner
    return ""


def members(named: Named) -> Iterator[str]:
    """The names of the members of an array in order: `D[3:0]` of four is D[3], D[2] ...; of what is no array its name."""
    if not named.dims:
        yield named.text
        return
    span = _RANGE.fullmatch(named.text)
    if span and len(named.dims) == 1:
        first, last = int(span[3]), int(span[4])
        if abs(first - last) + 1 == named.dims[0]:
            for number in range(first, last - 1, -1) if first > last else range(first, last + 1):
                yield f"{span[1]}{span[2]}{number}{span[5]}"
            return
    for place in range(named.width):
        left, index = place, []
        for size in reversed(named.dims):
            left, one = divmod(left, size)
            index.append(f"[{one}]")
        yield named.text + "".join(reversed(index))


def scales(technology: Form) -> Iterator[tuple[str, Decimal]]:
    """(unit, what one of a file's numbers is in it) of the forms `(scale 1 (e 1 -12) (unit CAPACITANCE))`."""
    for scale in technology.nested("numberdefinition", "scale"):
        numbers = [number for item in scale[1:] if (number := _number(item)) is not None]
        unit = scale.said("unit").lower()
        if len(numbers) == 2 and numbers[0] and unit:
            yield unit, numbers[1] / numbers[0]


def _number(item: str | Form) -> Decimal | None:
    """`12` or `(e 12 -3)`."""
    said = [item] if isinstance(item, str) else item.atoms() if item.keyword == "e" else []
    if not said or len(said) > 2 or not all(map(_WHOLE.match, said)):
        return None
    power = int(said[1]) if len(said) == 2 else 0
    return Decimal(said[0]).scaleb(power) if abs(power) < _LONGEST else None


def value(form: Form, scale: dict[str, Decimal]) -> str:
    """The text of a property: of its string, number, truth value or the middle one of three numbers; "" for another."""
    unit = form.said("unit").lower()
    for item in form.forms():
        match item.keyword:
            case "string":
                return words(item)
            case "integer" | "number":
                return _figure(item[1:], unit, scale)
            case "boolean":
                return next((said.keyword for said in item.forms()), "")
            case "minomax":
                three = next((said for said in item.forms() if said.keyword == "mnm"), item)
                return _figure(three[2:3] or three[1:], unit, scale)
    return ""


def _figure(items: Iterable[str | Form], unit: str, scale: dict[str, Decimal]) -> str:
    """A number with its unit, in SI."""
    for item in items:
        number = _number(item)
        if number is not None:
            if unit not in _UNITS:
                return f"{number.normalize():f} {unit}".strip()
            return f"{(number * scale.get(unit, Decimal(1))).normalize():f} {_UNITS[unit]}"
        return item if isinstance(item, str) else item.text
    return ""
