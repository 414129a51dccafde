"""The facts a netlist states about one part."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

from checker import limits
from checker.errors import InputError
from checker.model.fact import Fact, Source
from checker.readers.bom_headings import attribute, fitted, heading_key, is_weak, not_fitted_value, unit_in, weak_meaning
from checker.readers.netlist_form import Form, identifier
from checker.readers.sniff import WHITE

_NOTHING = frozenset({"", "~", "-"})
# Properties of the drawing that say nothing about the part; the file of a sheet is a path of somebody's machine.
_IGNORED = frozenset({"sheetname", "sheetfile", "exclude_from_board", "exclude_from_sim", "exclude_from_pos_files"})
_FALSE = frozenset({"no", "false", "0", "off"})
# Headings whose cells count or number the rows of a table: in a schematic they mean nothing of the kind.
_ROW_WORDS = frozenset({"quantity", "fitted", "in_bom"})
_NUMBER = re.compile(r"[0-9]+(?:[.,][0-9]+)?\Z")


@dataclass(frozen=True, slots=True)
class Drafted:
    """A part before its symbol is known. symbol: (library, name). described: some fact is a description.

    variants: (name of a variant, whether it fits the part; None when it does not say). overrides: how many values or
    fields variants change.
    """

    ref: str
    facts: tuple[Fact, ...]
    source: Source
    symbol: tuple[str, str]
    described: bool
    units: tuple[tuple[str, tuple[str, ...]], ...]
    variants: tuple[tuple[str, bool | None], ...]
    overrides: int


def draft(form: Form, path: str) -> Drafted:
    """The part a `comp` form describes. Raises InputError when it has no reference."""
    ref = identifier(form, "ref", path, "the reference of a part")
    if not ref.strip(WHITE):
        raise InputError(path, "a part has no reference", line=form.line, expected="a text such as R1")
    said = _Statements(path)
    library = symbol = ""
    described = Form()
    units: list[tuple[str, tuple[str, ...]]] = []
    variants: list[tuple[str, bool | None, int]] = []
    for item in form.forms():
        word, line = item.keyword, item.line
        if word == "property":
            value = item.child("value")
            name = item.said("name")
            if value is None:
                said.flag(name, line)
            elif name == "ki_description":
                described = described or value
            else:
                said.named(name, value.text, line)
        elif word == "fields":
            for field in item.children("field"):
                said.named(field.said("name"), field.text, field.line)
        elif word == "value":
            said.value(item.text, line)
        elif word in ("footprint", "datasheet", "description"):
            said.add(word, item.text, line)
        elif word == "libsource":
            library, symbol = (identifier(item, key, path, "the symbol of a part") for key in ("lib", "part"))
            said.add("library", library, line)
            said.add("symbol", symbol, line)
            described = item.child("description") or described
        elif word == "sheetpath":
            said.add("sheet", item.said("names"), line)
        elif word == "units":
            units.extend(_units(item, path))
        elif word == "variants":
            variants.extend(_variant(variant, path) for variant in item.children("variant"))
    said.weak_fields()
    if described and "description" not in said.attributes:
        said.add("description", described.text, described.line)
    return Drafted(
        ref=ref,
        facts=tuple(said.facts),
        source=Source(path, form.line),
        symbol=(library, symbol),
        described="description" in said.attributes,
        units=tuple(units),
        variants=tuple((name, fits) for name, fits, _ in variants if name),
        overrides=sum(count for _, _, count in variants),
    )


@lru_cache(maxsize=4096)
def _sense(name: str) -> tuple[str, str]:
    """How a field or property of that name is read, and the attribute it states."""
    folded = name.casefold()
    if not name or folded in _IGNORED:
        return "ignored", ""
    if folded == "exclude_from_bom":
        return "in_bom", ""
    meaning = attribute(name)
    if meaning in ("ref", "row"):
        return "ignored", ""
    if meaning in ("fitted+", "fitted-"):
        return "fitted", meaning
    if meaning is None or meaning in _ROW_WORDS or len(name) > limits.NAME:
        return "field", f"field:{name[: limits.NAME]}"
    if is_weak(name) or heading_key(name)[-1:].isdigit():
        return "weak", meaning
    return ("value" if meaning == "value" else "plain"), meaning


class _Statements:
    """Facts in file order; what is said twice with one text (field and property) is one fact."""

    def __init__(self, path: str):
        self.path = path
        self.facts: list[Fact] = []
        self.attributes: set[str] = set()
        self._seen: set[tuple[str, str | bool]] = set()
        self._weak: list[tuple[str, str, str, int]] = []
        self._last = Source(path)

    def _say(self, attribute: str, value: str | bool, line: int, text: str = "") -> None:
        if (attribute, value) in self._seen:
            return
        self._seen.add((attribute, value))
        self.attributes.add(attribute)
        if line != self._last.line:
            self._last = Source(self.path, line)
        self.facts.append(Fact(attribute, value, self._last, text=text))

    def add(self, attribute: str, value: str, line: int, text: str = "") -> None:
        """A fact, unless the text says that there is none."""
        value = value.strip()
        if value not in _NOTHING:
            self._say(attribute, value, line, text)

    def value(self, text: str, line: int) -> None:
        """The value text, which may also say that the part is left out."""
        self.add("value", text, line)
        if not_fitted_value(text):
            self._say("fitted", False, line, text.strip())

    def flag(self, name: str, line: int) -> None:
        """A property without a value: it is there when it is true."""
        match name.casefold():
            case "dnp":
                self._say("fitted", False, line, name)
            case "exclude_from_bom":
                self._say("in_bom", False, line, name)

    def named(self, name: str, text: str, line: int) -> None:
        """A field or property with a name of the user's choice."""
        name, text = name.strip(), text.strip()
        if text in _NOTHING:
            return
        how, meaning = _sense(name)
        if how == "field":
            self.add(meaning, text, line)
        elif how == "plain":
            self._measured(meaning, name, text, line)
        elif how == "value":
            self.value(text, line)
        elif how == "weak":
            self._weak.append((meaning, name, text, line))
        elif how == "fitted":
            state = fitted(meaning, text)
            if state is None:
                self.add(f"field:{name}", text, line)
            else:
                self._say("fitted", state, line, text)
        elif how == "in_bom" and text.casefold() not in _FALSE:
            self.flag(name, line)

    def _measured(self, meaning: str, name: str, text: str, line: int) -> None:
        """`Voltage (V)` with the text 250 says 250 V."""
        unit = unit_in(name) if _NUMBER.match(text) else ""
        self.add(meaning, f"{text} {unit}" if unit else text, line, text if unit else "")

    def weak_fields(self) -> None:
        """Fields such as `Comment` or `MPN2` mean value or type only where no plainer one says it."""
        strong = frozenset(self.attributes)
        for meaning, name, text, line in self._weak:
            if meaning not in strong:
                self._measured(meaning, name, text, line)
            elif (meaning, text) not in self._seen:
                other = weak_meaning(name) if is_weak(name) else None
                self.add(other or f"field:{name}", text, line)


def _units(form: Form, path: str) -> Iterator[tuple[str, tuple[str, ...]]]:
    """The pins of each unit of a part with several, where the file tells."""
    for unit in form.children("unit"):
        pins = tuple(identifier(pin, "num", path, "the number of a unit's pin") for pin in unit.nested("pins", "pin"))
        yield identifier(unit, "name", path, "the name of a unit"), tuple(pin for pin in pins if pin)


def _variant(form: Form, path: str) -> tuple[str, bool | None, int]:
    """What an assembly variant changes about the part: whether it is fitted (None: not said), how many other things."""
    fits: bool | None = None
    overrides = 0
    for item in form.forms():
        word = item.keyword
        if word == "dnp" or (word == "property" and item.said("name").casefold() == "dnp"):
            text = item.text if word == "dnp" else item.said("value")
            fits = text.strip().casefold() in _FALSE
        elif word == "fields":
            overrides += len(item.children("field"))
        elif word in ("field", "value", "footprint"):
            overrides += 1
    return identifier(form, "name", path, "the name of a variant"), fits, overrides
