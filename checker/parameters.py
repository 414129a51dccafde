"""Parameters of rules: each type knows its unit, how it is written in a ruleset and which direction is tighter.

A rule states its parameters as a frozen dataclass whose fields are annotated with one of the types below:

    @dataclass(frozen=True, slots=True)
    class Params:
        current: Annotated[float, AtMost("A", "rms")] = 0.0005
        classes: Annotated[tuple[str, ...], TextSet()] = ("Y1", "Y2+Y2")
"""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, get_type_hints

from checker import units
from checker.neutral import neutral
from checker.strict_yaml import Node, either, suggestion


class Parameter:
    """Base of the closed list of parameter types; `values` is what Python holds."""

    def read(self, node: Node) -> Any:
        """The value written at `node`; raises InputError."""
        raise NotImplementedError

    def accepts(self, value: Any) -> bool:
        """Whether a default of a rule is a value of this type."""
        raise NotImplementedError

    def looser(self, old: Any, new: Any) -> bool:
        """Whether `new` lets something pass that `old` did not, or cannot be shown not to."""
        raise NotImplementedError

    def show(self, value: Any) -> str:
        """The value as a person would write it in a ruleset."""
        return ", ".join(value) if isinstance(value, tuple) else str(value)


@dataclass(frozen=True, slots=True)
class _Limit(Parameter):
    """A positive figure with unit and form ("dc", "rms", "peak" or "" for units without one)."""

    unit: str
    form: str = ""

    def read(self, node: Node) -> float:
        found = units.quantity(node, self.unit)
        like = self.show(found.value)
        if found.form != self.form:
            raise node.error("does not say which form it is" if self.form else "has a form where none is meant", expected=like)
        if found.value < 0:
            raise node.error("cannot be negative", expected=f"a limit such as {self.show(-found.value)}")
        return found.value

    def accepts(self, value: Any) -> bool:
        return isinstance(value, float) and math.isfinite(value) and value >= 0

    def show(self, value: float) -> str:
        return units.shown(value, self.unit, self.form)


class AtMost(_Limit):
    """The largest value that is allowed: smaller is tighter."""

    def looser(self, old: float, new: float) -> bool:
        return new > old


class AtLeast(_Limit):
    """The smallest value that is allowed: larger is tighter."""

    def looser(self, old: float, new: float) -> bool:
        return new < old


@dataclass(frozen=True, slots=True)
class Ratio(Parameter):
    """The share of a rating that may be used, a plain number above 0 and up to `most`: smaller is tighter."""

    most: float = 1.0

    def read(self, node: Node) -> float:
        value = node.number(low=0.0, high=self.most)
        if not value:
            raise node.error("cannot be zero", expected=f"a number above 0, at most {self.most:g}")
        return value

    def accepts(self, value: Any) -> bool:
        return isinstance(value, float) and 0 < value <= self.most

    def looser(self, old: float, new: float) -> bool:
        return new > old

    def show(self, value: float) -> str:
        return f"{value:g}"


@dataclass(frozen=True, slots=True)
class TextSet(Parameter):
    """What is accepted, from `choices` when these are given: fewer is tighter.

    An item `Y2+Y2` means two in series; a series is accepted wherever one of its members alone is.
    """

    choices: tuple[str, ...] = ()

    def read(self, node: Node) -> tuple[str, ...]:
        items = node.each()
        values = tuple(item.one_of(self.choices) if self.choices else item.name_text() for item in items)
        for at, item in enumerate(items):
            if values[at] in values[:at]:
                raise item.error("is listed twice", expected="each item once")
        return values

    def accepts(self, value: Any) -> bool:
        return isinstance(value, tuple) and all(isinstance(item, str) and item for item in value)

    def looser(self, old: tuple[str, ...], new: tuple[str, ...]) -> bool:
        return any(item not in old and not any(member in old for member in item.split("+")) for item in new)


@dataclass(frozen=True, slots=True)
class Flag(Parameter):
    """true or false: true is tighter."""

    def read(self, node: Node) -> bool:
        return node.flag()

    def accepts(self, value: Any) -> bool:
        return isinstance(value, bool)

    def looser(self, old: bool, new: bool) -> bool:
        return old and not new

    def show(self, value: bool) -> str:
        return "true" if value else "false"


@dataclass(frozen=True, slots=True)
class Choice(Parameter):
    """One of `order`, which goes from the loosest to the tightest."""

    order: tuple[str, ...]

    def read(self, node: Node) -> str:
        return node.one_of(self.order)

    def accepts(self, value: Any) -> bool:
        return value in self.order

    def looser(self, old: str, new: str) -> bool:
        return self.order.index(new) < self.order.index(old)


@dataclass(frozen=True, slots=True)
class TableName(Parameter):
    """The id of a table of the ruleset. more: its larger figures are tighter, so that two tables can be compared.

    By its name alone another table is not known to be tighter, so it counts as looser; `checker.ruleset_layers`, which has the
    tables, compares their figures.
    """

    more: bool = False

    def read(self, node: Node) -> str:
        return node.name_text()

    def accepts(self, value: Any) -> bool:
        return isinstance(value, str)

    def looser(self, old: str, new: str) -> bool:
        return new != old


@dataclass(frozen=True, slots=True)
class Text(Parameter):
    """A text that decides nothing: no direction is tighter."""

    def read(self, node: Node) -> str:
        return node.name_text()

    def accepts(self, value: Any) -> bool:
        return isinstance(value, str)

    def looser(self, old: str, new: str) -> bool:
        return False


@dataclass(frozen=True, slots=True)
class Change:
    """A parameter that a layer set anew. text: `params.ratio 0.8 -> 0.9`."""

    name: str
    node: Node
    text: str
    looser: bool


def types_of(params: type) -> Mapping[str, Parameter]:
    """Field name -> parameter type of a rule's dataclass, in order; fields without one are left out."""
    hints = get_type_hints(params, include_extras=True)
    found = {}
    for field in dataclasses.fields(params):
        types = [extra for extra in getattr(hints[field.name], "__metadata__", ()) if isinstance(extra, Parameter)]
        if len(types) == 1:
            found[field.name] = types[0]
    return found


def complaints(params: Any) -> Iterator[str]:
    """What keeps `params` from being the parameters of a rule; nothing when it is as it should be."""
    if not isinstance(params, type) or not dataclasses.is_dataclass(params):
        yield "its params are not a dataclass"
        return
    if not params.__dataclass_params__.frozen:  # type: ignore[attr-defined]
        yield "its params are not a frozen dataclass"
        return
    try:
        types = types_of(params)
    except Exception as error:  # annotations are the plugin's code
        yield f"the types of its params cannot be read ({type(error).__name__}: {neutral(str(error), 200)})"
        return
    for field in dataclasses.fields(params):
        if field.name not in types:
            yield f"its parameter {field.name} has no type of checker.parameters in an Annotated"
        elif field.default is dataclasses.MISSING:
            yield f"its parameter {field.name} has no default"
        elif not types[field.name].accepts(field.default):
            yield f"the default {field.default!r} of its parameter {field.name} is no {type(types[field.name]).__name__}"


def changed(params: Any, node: Node | None) -> tuple[Any, tuple[Change, ...]]:
    """`params` with the values written in the map at `node`, and what changed by it.

    Raises InputError for a name that is no parameter and for a value of the wrong type or unit.
    """
    if node is None:
        return params, ()
    types = types_of(type(params))
    values, changes = {}, []
    for key, value in node.entries():
        kind = types.get(key.name)
        if kind is None:
            close = suggestion(key.name, types)
            expected = "" if close else either(types) if types else "no parameters"
            raise key.error(f"is no parameter of this rule{close}", found=key.name, expected=expected)
        old, new = getattr(params, key.name), kind.read(value)
        values[key.name] = new
        if new != old:
            text = f"params.{key.name} {kind.show(old)} -> {kind.show(new)}"
            changes.append(Change(key.name, value, text, kind.looser(old, new)))
    return dataclasses.replace(params, **values), tuple(changes)


def tables_in(params: Any) -> Mapping[str, str]:
    """Parameter name -> id of the table it names, for parameters that name one."""
    types = types_of(type(params))
    return {name: getattr(params, name) for name, kind in types.items() if isinstance(kind, TableName) and getattr(params, name)}
