"""How a ruleset file is laid over the ruleset it is based on.

A layer may always tighten what lies below it. It may loosen only what is not mandatory, and then the clause says so.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from checker import parameters
from checker.errors import InputError
from checker.files import Blob
from checker.formulas.lookup import look_up
from checker.model.clause import LEVELS, Clause
from checker.model.ruleset import Ruleset
from checker.model.table import Table
from checker.parameters import TableName
from checker.ruleset_file import Alteration, RulesetFile, place
from checker.strict_yaml import suggestion


@dataclass(frozen=True, slots=True)
class Layer:
    """A ruleset with what a layer above it needs: which layer made a clause, by `ruleset/clause-id`."""

    ruleset: Ruleset
    made: Mapping[str, str]  # clause id -> id of the layer that made it

    @property
    def label(self) -> str:
        return f"{self.ruleset.id}:{self.ruleset.edition}" if self.ruleset.edition else self.ruleset.id


def joined(file: RulesetFile, blob: Blob, below: Layer | None) -> Layer:
    """The ruleset of `file` over `below`. Raises InputError for a change that is refused and for an id that is taken."""
    tables, clauses, made = dict[str, Table](), dict[str, Clause](), dict[str, str]()
    if below is not None:
        tables |= below.ruleset.tables
        clauses |= {clause.id: replace(clause, ruleset=file.id) for clause in below.ruleset.clauses}
        made |= below.made
    for name, table in file.tables.items():
        if name in tables:
            raise _twice(file, f"the table {name}", tables[name].origin.path, tables[name].origin.line, table.origin.line)
        tables[name] = table
    for alteration in file.changes:
        id = _target(alteration, made, file)
        clauses[id] = _altered(clauses[id], alteration, file, below.label if below else "", tables)
    for clause in file.clauses:
        if clause.id in clauses:
            other = clauses[clause.id].origin
            raise _twice(file, f"the clause {clause.id}", other.path, other.line, clause.origin.line)
        clauses[clause.id] = clause
        made[clause.id] = file.id
    for clause in clauses.values():
        _tables_exist(clause, tables)
    ruleset = Ruleset(
        id=file.id,
        edition=file.edition,
        revision=file.revision,
        title=file.title,
        path=blob.path,
        sha256=blob.sha256,
        clauses=tuple(clauses.values()),
        tables=tables,
    )
    return Layer(ruleset, made)


def _weighed(change: parameters.Change, old: object, new: object, tables: Mapping[str, Table]) -> parameters.Change:
    """A change of table is looser when the new one asks for less anywhere, where its figures can be compared."""
    kind = parameters.types_of(type(old))[change.name]
    before, after = tables.get(getattr(old, change.name)), tables.get(getattr(new, change.name))
    if not isinstance(kind, TableName) or not kind.more or before is None or after is None:
        return change
    return replace(change, looser=asks_less(before, after))


def asks_less(old: Table, new: Table) -> bool:
    """Whether a table of needs has a smaller figure than `old` at any row of either, or no column that `old` has.

    A column for one half of a material group (`pd2_iiib`) is compared with that of the whole group (`pd2_iii`).
    """
    pairs = [
        (column, like)
        for column in list(new.columns)[1:]
        for like in (column, column[:-1])
        if like in list(old.columns)[1:] and new.columns[column] == old.columns[like]
    ]
    keys = {float(row[0]) for table in (old, new) for row in table.rows if isinstance(row[0], float)}
    for column, like in pairs:
        for key in keys:
            before, after = look_up(old, like, key), look_up(new, column, key)
            if before is not None and after is not None and after.value < before.value:
                return True
    return not pairs or not keys


def _twice(file: RulesetFile, what: str, path: str, line: int, here: int) -> InputError:
    return InputError(
        file.node.path,
        f"{what} stands in a layer below already ({path}:{line})",
        line=here,
        expected="another id",
        remedy="To change a clause use `change`; to use another table give it another id and name it in `change`.",
    )


def _tables_exist(clause: Clause, tables: Mapping[str, Table]) -> None:
    for name, table in parameters.tables_in(clause.params).items():
        if table not in tables:
            raise InputError(
                clause.origin.path,
                f"the clause {clause.id} names a table that there is none of{suggestion(table, tables)}",
                line=clause.origin.line,
                found=f"{name}: {table}",
                expected=", ".join(tables) or "a table under `tables`",
            )


def _target(alteration: Alteration, made: Mapping[str, str], file: RulesetFile) -> str:
    """The id of the clause an alteration means."""
    layer, _, id = alteration.target.partition("/")
    if made.get(id) == layer:
        return id
    known = tuple(f"{layer}/{id}" for id, layer in made.items())
    close = suggestion(alteration.target, known)
    raise alteration.node.error(
        f"is no clause of the layers below{close}",
        found=alteration.target,
        expected="" if close else ", ".join(known) or f"a ruleset with clauses below {file.id}",
    )


def _altered(clause: Clause, alteration: Alteration, file: RulesetFile, below: str, tables: Mapping[str, Table]) -> Clause:
    params, changes = parameters.changed(clause.params, alteration.params)
    changes = tuple(_weighed(change, clause.params, params, tables) for change in changes)
    looser = [(change.node, change.text) for change in changes if change.looser]
    level = clause.level
    if alteration.level is not None:
        level = alteration.level.one_of(LEVELS)
        if LEVELS.index(level) > LEVELS.index(clause.level):
            looser.append((alteration.level, f"level {clause.level} -> {level}"))
    for node, text in looser if clause.mandatory else ():
        raise node.error(
            "loosens a clause that is mandatory",
            found=text,
            expected=f"a value at least as tight as in {below}",
            remedy="A mandatory clause can only be tightened.",
        )
    said = [clause.loosened] if clause.loosened else []
    said += [f"{text}, looser than {below}" for _, text in looser]
    return replace(
        clause,
        params=params,
        level=level,
        citation=f"{alteration.cites or clause.citation}; changed by {file.id}: {alteration.because}",
        # a figure that was loosened is no longer the one that was read in the source
        verified=alteration.verified or ("false" if any(change.looser for change in changes) else clause.verified),
        origin=place(alteration.node),
        loosened="; ".join(said),
    )
