"""One ruleset file as data: its head, sources, tables, clauses and the changes it makes to the layers below.

Nothing here follows `based_on`; see checker.rulesets for layers and names.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass

from checker import parameters, units
from checker.errors import ArgumentError
from checker.files import Blob
from checker.model.candidate import KINDS
from checker.model.clause import LEVELS, Clause
from checker.model.domain import SIDES
from checker.model.fact import Source
from checker.model.rule import Rule
from checker.model.separation import GRADES
from checker.model.table import LOOKUPS, Table
from checker.strict_yaml import Map, Node, either, load, suggestion

SCHEMA = "withstand-ruleset/1"
VERIFIED = ("true", "partial", "false")
TEXT = "text"  # the unit of a column of words
PLAIN = "1"  # the unit of a column of plain numbers
_ID = re.compile(r"[a-z0-9]+(?:[-.][a-z0-9]+)*")
_CLAUSE_ID = re.compile(r"[A-Za-z0-9]+(?:[-.][A-Za-z0-9]+)*")
_EDITION = re.compile(r"[A-Za-z0-9]+(?:[-.+][A-Za-z0-9]+)*")
_GRADES = (*GRADES, "1-MOOP", "2-MOOP", "1-MOPP", "2-MOPP")
_FORMS = dict.fromkeys(("V", "A"), ("", "dc", "rms", "peak"))
_WORDS: Mapping[str, tuple[str, ...]] = {
    "grade": _GRADES,
    "side": SIDES,
    "kind": tuple(sorted(KINDS)),
    "accessible": ("true", "false"),
    "protection_class": ("I", "II", "III"),
    "overvoltage_category": ("I", "II", "III", "IV"),
}
_ABOVE = {"frequency_above": "Hz", "altitude_above": "m"}
WHEN = (*_WORDS, *_ABOVE)


@dataclass(frozen=True, slots=True)
class Alteration:
    """What a layer changes of a clause below it: `target` is `ruleset/clause-id`, the rest is None where it stays."""

    target: str
    node: Node
    params: Node | None
    level: Node | None
    cites: str
    verified: str
    because: str


@dataclass(frozen=True, slots=True)
class RulesetFile:
    """One file. based_on: the node of that key, None for a ground layer. sources: the keys that may be cited."""

    id: str
    edition: str
    revision: str
    title: str
    based_on: Node | None
    node: Node
    sources: tuple[str, ...]
    tables: Mapping[str, Table]
    clauses: tuple[Clause, ...]
    changes: tuple[Alteration, ...]


def read(blob: Blob, rule: Callable[[str], Rule]) -> RulesetFile:
    """The ruleset in a file. rule: the rule of an id, raising ArgumentError when there is none. Raises InputError."""
    root = load(blob, SCHEMA, required=True)
    id = _spelt(root.need("id", "the name of the ruleset"), _ID, "small letters, digits, - and .")
    edition, revision = root.take("edition"), root.take("revision")
    title, based_on = root.take("title"), root.take("based_on")
    cites = _Sources(root.take("sources"))
    tables = _tables(root.take("tables"), cites)
    clauses = _clauses(id, root.take("clauses"), cites, rule)
    changes = _changes(root.take("change"), cites)
    if changes and based_on is None:
        raise changes[0].node.error("changes a clause, but the ruleset is based on none", found="no key `based_on`")
    root.done()
    return RulesetFile(
        id=id,
        edition=_spelt(edition, _EDITION, "letters, digits, -, . and +") if edition else "",
        revision=revision.text(limit=40) if revision else "",
        title=title.text(limit=200) if title else "",
        based_on=based_on,
        node=root.node,
        sources=cites.keys,
        tables=tables,
        clauses=clauses,
        changes=changes,
    )


def _spelt(node: Node, pattern: re.Pattern[str], expected: str) -> str:
    said = node.text(limit=80)
    if not pattern.fullmatch(said):
        raise node.error("is no name that can be used here", expected=expected)
    return said


def place(node: Node) -> Source:
    """Where a node stands."""
    return Source(node.path, node.line, node.column)


class _Sources:
    """The documents a file may cite: every citation begins with the key of one of them."""

    def __init__(self, node: Node | None):
        entries = () if node is None else node.entries()
        self.keys = tuple(key.name for key, _ in entries)
        for _, value in entries:
            source = value.map()
            source.need("title", "the name of the document").text(limit=300)
            for optional in ("edition", "date", "url", "note"):
                said = source.take(optional)
                if said is not None:
                    said.text()
            source.done()

    def cite(self, node: Node) -> str:
        said = node.text(limit=300)
        if not any(said == key or said.startswith(f"{key} ") for key in self.keys):
            first = said.split(" ")[0]
            raise node.error(
                f"cites a document that is not under `sources`{suggestion(first, self.keys)}",
                expected=f"a text that begins with {either(self.keys)}" if self.keys else "a key `sources` that names it",
            )
        return said

    def citation(self, node: Node) -> str:
        cites = [self.cite(item) for item in node.each()]
        if not cites:
            raise node.error("is empty", expected="at least one document and the place in it")
        return "; ".join(cites)


def _tables(node: Node | None, cites: _Sources) -> Mapping[str, Table]:
    found = {}
    for key, value in () if node is None else node.entries():
        found[_spelt(key, _ID, "small letters, digits, - and .")] = _table(key, value.map(), cites)
    return found


def _table(key: Node, entry: Map, cites: _Sources) -> Table:
    columns = [_Column(name, unit) for name, unit in entry.need("columns", "a map of column name to unit").entries()]
    if not columns:
        raise entry.node.error("has no columns", found="")
    lookup = entry.need("lookup", either(LOOKUPS)).one_of(LOOKUPS)
    rounding = entry.take("round")
    rows = entry.need("rows", "a list of rows")
    cells = tuple(_row(row, columns) for row in rows.items())
    _ordered(rows, cells, columns, lookup)
    table = Table(
        id=key.name,
        columns={column.name: column.unit for column in columns},
        lookup=lookup,
        rows=cells,
        citation=cites.citation(entry.need("source", "where the figures were read")),
        verified=entry.need("verified", either(VERIFIED)).one_of(VERIFIED),
        round=_rounding(rounding, columns[-1]) if rounding else "",
        origin=place(key),
    )
    note = entry.take("note")
    if note is not None:
        note.text()
    entry.done()
    return table


class _Column:
    """A column: its cells are words, plain numbers, or figures in its unit."""

    def __init__(self, name: Node, unit: Node):
        said = unit.text(limit=20)
        symbol, _, form = said.partition(" ")
        if said not in (TEXT, PLAIN) and (symbol not in units.UNITS or form not in _FORMS.get(symbol, ("",))):
            raise unit.error(
                "is no unit of a column", expected=f"{TEXT}, {PLAIN} for plain numbers, or a unit such as mm, A or V rms"
            )
        self.name, self.unit = name.name, "" if said == TEXT else said

    def cell(self, node: Node) -> float | str | None:
        if node.null:
            return None
        return node.number() if self.unit else node.text(limit=300)


def _row(node: Node, columns: list[_Column]) -> tuple[float | str | None, ...]:
    cells = node.items()
    if len(cells) != len(columns):
        names = ", ".join(column.name for column in columns)
        raise node.error("has the wrong number of cells", found=str(len(cells)), expected=f"{len(columns)}: {names}")
    return tuple(column.cell(cell) for column, cell in zip(columns, cells, strict=True))


def _ordered(node: Node, rows: tuple[tuple[float | str | None, ...], ...], columns: list[_Column], lookup: str) -> None:
    """Refuses rows that a lookup could not tell apart or would meet in the wrong order."""
    if not rows:
        raise node.error("is empty", found="no row", expected="at least one row")
    if lookup != "exact" and not columns[0].unit:
        raise node.error(f"cannot be looked up by {lookup}", found="words in the first column", expected="a column of figures")
    seen: dict[tuple[float | str | None, ...], int] = {}
    for at, (row, item) in enumerate(zip(rows, node.items(), strict=True)):
        key = row[: max(1, len(row) - 1)] if lookup == "exact" else row[:1]
        if key in seen:
            raise item.error("has the same key as an earlier row", found=str(key[0]), expected="one row for each key")
        seen[key] = at
        first = row[0]
        if lookup == "exact":
            continue
        before = rows[at - 1][0] if at else None
        if not isinstance(first, float):
            raise item.error("has no figure in the first column", found="nothing", expected="a number")
        if isinstance(before, float) and first < before:
            raise item.error("is out of order", found=f"{first:g} after {before:g}", expected="a first column that rises")


def _rounding(node: Node, column: _Column) -> str:
    """`up to 0.1 mm`, `nearest to 0.1 mm`, or in two steps `up to 0.01 mm, above 0.5 mm to 0.1 mm`."""
    said = node.text(limit=60)
    way, _, steps = said.partition(" to ")
    fine, above, coarse = steps.partition(", above ")
    figures = (fine, *coarse.split(" to ")) if above else (fine,)
    if way not in ("up", "nearest") or not all(figures) or len(figures) == 2 or not column.unit or column.unit == PLAIN:
        raise node.error("is no way of rounding", expected="`up to 0.1 mm` or `nearest to 0.1 mm`, in the unit of the last column")
    try:
        for figure in figures:
            units.parse(figure, column.unit.split(" ")[0])
    except units.UnitError as error:
        raise node.error(error.what, found=error.found, expected=error.expected) from None
    return said


def _clauses(ruleset: str, node: Node | None, cites: _Sources, rule: Callable[[str], Rule]) -> tuple[Clause, ...]:
    found: dict[str, Clause] = {}
    for item in () if node is None else node.items():
        clause = _clause(ruleset, item, cites, rule)
        if clause.id in found:
            raise item.error(
                "has the id of another clause", found=clause.id, expected=f"another id than in line {found[clause.id].origin.line}"
            )
        found[clause.id] = clause
    return tuple(found.values())


def _clause(ruleset: str, item: Node, cites: _Sources, rule: Callable[[str], Rule]) -> Clause:
    entry = item.map()
    id = _spelt(entry.need("id", "the clause's name in this ruleset"), _CLAUSE_ID, "letters, digits, - and .")
    named = entry.need("rule", "the id of a rule")
    try:
        law = rule(named.text(limit=80))
    except ArgumentError as error:
        raise named.error(f"names no rule: {error}") from None
    level = entry.need("level", either(LEVELS)).one_of(LEVELS)
    mandatory, verified = entry.take("mandatory"), entry.take("verified")
    params, _ = parameters.changed(law.params(), entry.take("params"))
    clause = Clause(
        ruleset=ruleset,
        id=id,
        rule=law.id,
        level=level,
        citation=cites.citation(entry.need("cites", "the documents the clause rests on")),
        params=params,
        hazard=law.hazard,
        verified=verified.one_of(VERIFIED) if verified else "false",
        mandatory=mandatory.flag() if mandatory else False,
        when=_when(entry.take("when")),
        origin=place(item),
    )
    note = entry.take("note")
    if note is not None:
        note.text()
    entry.done()
    return clause


def _when(node: Node | None) -> Mapping[str, tuple[str, ...]]:
    found: dict[str, tuple[str, ...]] = {}
    for key, value in () if node is None else node.entries():
        if key.name in _WORDS:
            found[key.name] = tuple(item.one_of(_WORDS[key.name]) for item in value.each())
            if not found[key.name]:
                raise value.error("is empty", expected=either(_WORDS[key.name]))
        elif key.name in _ABOVE:
            found[key.name] = (repr(units.quantity(value, _ABOVE[key.name]).value),)
        else:
            close = suggestion(key.name, WHEN)
            raise key.error(f"is no condition of a clause{close}", found=key.name, expected="" if close else either(WHEN))
    return found


def _changes(node: Node | None, cites: _Sources) -> tuple[Alteration, ...]:
    found = []
    for key, value in () if node is None else node.entries():
        entry = value.map()
        params, level, cited, verified = (entry.take(name) for name in ("params", "level", "cites", "verified"))
        if params is None and level is None:
            raise key.error("changes nothing", found="neither `params` nor `level`")
        because = entry.need("because", "why the clause is changed").text(limit=300)
        entry.done()
        found.append(
            Alteration(
                target=key.name,
                node=key,
                params=params,
                level=level,
                cites=cites.citation(cited) if cited else "",
                verified=verified.one_of(VERIFIED) if verified else "",
                because=because,
            )
        )
    return tuple(found)
