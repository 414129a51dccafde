"""A ruleset for a person at a terminal: its layers, every clause with the figures it judges by, every table with its rows."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from checker import parameters, units
from checker.model.clause import Clause
from checker.model.report import CAUTION
from checker.model.ruleset import Ruleset
from checker.model.table import Table
from checker.writers.page import Page

WIDTH = 100
COLUMN = 13  # where the text behind a label starts
_MARKS = {
    "true": "read in the source",
    "partial": "read in the source in part",
    "false": "not read in a source",
}


def write(layers: Sequence[Ruleset], clause: str = "", width: int = WIDTH) -> str:
    """The whole ruleset, or one clause of it with its tables. layers: ground layer first, as judged last.

    clause: a clause id, "" for all; it must be there.
    """
    page, top = Page(width), layers[-1]
    kept = [one for one in top.clauses if clause in ("", one.id)]
    _head(page, layers)
    for one in kept:
        _clause(page, one, layers)
    named = {table for one in kept for table in parameters.tables_in(one.params).values()}
    for table in top.tables.values():
        if not clause or table.id in named:
            _table(page, table, [one.id for one in top.clauses if table.id in parameters.tables_in(one.params).values()])
    page.put()
    page.put(CAUTION, "Caution:")
    return page.text()


def name(ruleset: Ruleset) -> str:
    """`iec-62368-1:2018`."""
    return f"{ruleset.id}:{ruleset.edition}" if ruleset.edition else ruleset.id


def counts(ruleset: Ruleset) -> str:
    """`21 clauses, 3 tables, 5 figures not fully verified`."""
    clauses, tables, weak = len(ruleset.clauses), len(ruleset.tables), ruleset.unverified
    return (
        f"{clauses} clause{'s' * (clauses != 1)}, {tables} table{'s' * (tables != 1)}, "
        f"{weak} figure{'s' * (weak != 1)} not fully verified"
    )


def _head(page: Page, layers: Sequence[Ruleset]) -> None:
    top = layers[-1]
    page.put(f"{name(top)}, revision {top.revision or 'not said'}: {top.title or 'without a title'}", "Ruleset")
    page.put(counts(top), "holds", 2, COLUMN)
    for at, layer in enumerate(layers, 1):
        said = f"{name(layer)}, revision {layer.revision or 'not said'}, {layer.path} (sha256 {layer.sha256[:12]})"
        page.put(said, f"layer {at}", 2, COLUMN)


def _clause(page: Page, clause: Clause, layers: Sequence[Ruleset]) -> None:
    page.put()
    page.put(f"{clause.ruleset}/{clause.id}", "Clause")
    page.put(f"{clause.rule} ({clause.hazard})", "rule", 2, COLUMN)
    page.put(clause.level + (", mandatory: a layer above can only tighten it" if clause.mandatory else ""), "level", 2, COLUMN)
    for key, accepted in clause.when.items():
        page.put(f"{key} {' or '.join(accepted)}", "when", 2, COLUMN)
    set_by = _set_by(clause, layers)
    for key, kind in parameters.types_of(type(clause.params)).items():
        value = kind.show(getattr(clause.params, key)) or "none"
        page.put(
            f"{key} {value}" + (f" (set in {set_by[key]})" if key in set_by else " (default of the rule)"), "parameter", 2, COLUMN
        )
    page.put(f"{clause.citation} ({_MARKS[clause.verified]})", "cites", 2, COLUMN)
    if clause.loosened:
        page.put(clause.loosened, "loosens", 2, COLUMN)
    page.put(str(clause.origin), "set in", 2, COLUMN)


def _set_by(clause: Clause, layers: Sequence[Ruleset]) -> Mapping[str, str]:
    """Parameter -> file and line of the clause or change that gave it another value than the layer below, or the rule itself."""
    found: dict[str, str] = {}
    before = type(clause.params)()
    for layer in layers:
        for one in layer.clauses:
            if one.id == clause.id:
                for key in parameters.types_of(type(one.params)):
                    if getattr(one.params, key) != getattr(before, key):
                        found[key] = str(one.origin)
                before = one.params
    return found


def _table(page: Page, table: Table, clauses: Sequence[str]) -> None:
    page.put()
    page.put(table.id, "Table")
    page.put(f"{table.lookup}" + (f", rounded {table.round}" if table.round else ""), "lookup", 2, COLUMN)
    page.put(f"{table.citation} ({_MARKS[table.verified]})", "source", 2, COLUMN)
    if clauses:
        page.put(", ".join(clauses), "used by", 2, COLUMN)
    page.put(str(table.origin), "set in", 2, COLUMN)
    rows = [list(table.columns), [unit or "text" for unit in table.columns.values()]]
    rows += [[_cell(value) for value in row] for row in table.rows]
    page.put()
    if not page.grid(rows, indent=4):
        for row in rows[2:]:
            page.put("; ".join(f"{column} {value}" for column, value in zip(rows[0], row, strict=True) if value != "-"), "-", 4)


def _cell(value: float | str | None) -> str:
    return "-" if value is None else value if isinstance(value, str) else units.shown(value, "")
