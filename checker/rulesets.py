"""Rulesets by name, by name and edition, or by file, with the layers they are based on.

A shipped or installed ruleset `NAME` is a file `NAME.yaml`, which holds the newest edition; older ones are
`NAME-EDITION.yaml` beside it.
"""

from __future__ import annotations

import os
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path

from checker import files, limits, plugins, ruleset_file
from checker.errors import ArgumentError, InputError
from checker.model.ruleset import Ruleset
from checker.model.table import Table
from checker.neutral import neutral
from checker.ruleset_file import RulesetFile
from checker.ruleset_layers import Layer, joined
from checker.strict_yaml import Node, suggestion

LAYERS = 8
DEFAULT = ("iec-62368-1", "derating-commercial")
_NAME = re.compile(r"[a-z0-9]+(?:[-.][a-z0-9]+)*\Z")


@dataclass(frozen=True, slots=True)
class RulesetInfo:
    """A ruleset that can be named. clauses and unverified count the layers below too; origin: shipped, or the package."""

    name: str
    edition: str
    revision: str
    title: str
    clauses: int
    unverified: int
    origin: str


@dataclass(frozen=True, slots=True)
class _Place:
    """Where a ruleset file lies. shown: its name in messages and reports. named: the id it must have, "" for any."""

    path: Path
    shown: str
    named: str = ""
    edition: str = ""
    inside: Path | None = None


def load(value: str, folder: Path | None = None) -> Ruleset:
    """The ruleset of a name, `NAME:EDITION` or file (a value with `/` or ending in `.yaml`), layers applied.

    folder: what a file is relative to and must lie in; None takes it from the current folder without that bound.
    Raises ArgumentError for a name that there is none of, InputError for a file that cannot be used.
    """
    return load_layers(value, folder)[-1]


def load_layers(value: str, folder: Path | None = None) -> tuple[Ruleset, ...]:
    """As `load`, with every ruleset it rests on before it, the ground layer first: the files to list as inputs."""
    return tuple(layer.ruleset for layer in _layers(_place(value, folder), ()))


def load_all(values: tuple[str, ...], folder: Path | None = None) -> tuple[Ruleset, ...]:
    """Rulesets that are judged side by side. Raises ArgumentError when two have one id, as two editions do."""
    found: dict[str, Ruleset] = {}
    for value in values:
        ruleset = load(value, folder)
        if ruleset.id in found:
            raise ArgumentError(
                f"the ruleset {ruleset.id} is given twice (edition {found[ruleset.id].edition or 'not said'} and edition "
                f"{ruleset.edition or 'not said'}); rulesets judged side by side need different ids"
            )
        found[ruleset.id] = ruleset
    return tuple(found.values())


def faults(ruleset: Ruleset) -> Iterator[InputError]:
    """What is wrong with a loaded ruleset although it can be read: a distance that shrinks while the voltage rises."""
    for table in ruleset.tables.values():
        first, *others = table.columns.items()
        if table.lookup == "exact" or first[1].split(" ")[0] != "V":
            continue
        for at, (column, unit) in enumerate(others, 1):
            if unit == "mm":
                yield from _falls(table, at, column)


def _falls(table: Table, at: int, column: str) -> Iterator[InputError]:
    filled = [(row[0], row[at]) for row in table.rows if isinstance(row[0], float) and isinstance(row[at], float)]
    for (low, before), (high, after) in pairwise(filled):
        if isinstance(before, float) and isinstance(after, float) and after < before:
            yield InputError(
                table.origin.path,
                f"the column {column} of the table {table.id} falls while the voltage rises",
                line=table.origin.line,
                found=f"{after:g} mm at {high:g} V after {before:g} mm at {low:g} V",
                expected="distances that rise or stay",
                remedy="Compare the two rows with the source.",
            )


def clause_id(ruleset: Ruleset, asked: str) -> str:
    """The id of the clause a person means by `clearance` or `iec-62368-1/clearance`. Raises ArgumentError with a suggestion."""
    ids = tuple(clause.id for clause in ruleset.clauses)
    id = asked.removeprefix(f"{ruleset.id}/")
    if id not in ids:
        raise ArgumentError(
            f"the ruleset {ruleset.id} has no clause {neutral(asked, 80)}{suggestion(id, ids)} It has: {', '.join(ids) or 'none'}."
        )
    return id


def available() -> tuple[RulesetInfo, ...]:
    """Every ruleset that can be named, in alphabetical order, the newest edition of a name first."""
    found = []
    for name, (origin, paths) in _named().items():
        for path in paths:
            ruleset = _layers(_Place(path, _shown(origin, path), name), ())[-1].ruleset
            found.append(
                RulesetInfo(
                    name=ruleset.id,
                    edition=ruleset.edition,
                    revision=ruleset.revision,
                    title=ruleset.title,
                    clauses=len(ruleset.clauses),
                    unverified=ruleset.unverified,
                    origin=origin,
                )
            )
    return tuple(found)


def shipped_folder() -> Path:
    """The folder of the shipped rulesets: beside the package in a checkout, inside it when installed."""
    package = Path(__file__).parent
    inside = package / "shipped"
    return inside if inside.is_dir() else package.parent / "rulesets"


def _named() -> Mapping[str, tuple[str, tuple[Path, ...]]]:
    """name -> (origin, its files, newest edition first), in alphabetical order."""
    found: dict[str, tuple[str, tuple[Path, ...]]] = {}
    shipped = sorted(shipped_folder().glob("*.yaml"))
    stems = sorted((path.stem for path in shipped), key=len, reverse=True)
    for path in shipped:
        name = next((stem for stem in stems if _is_edition(path.stem, stem)), path.stem)
        found[name] = ("shipped", (*found.get(name, ("", ()))[1], path))
    for name, (package, paths) in plugins.ruleset_files().items():
        if name in found:
            raise plugins.clash("rulesets", name, plugins.OURSELVES, package)
        found[name] = (package, tuple(sorted(paths)))
    return {name: (origin, _newest_first(name, paths)) for name, (origin, paths) in sorted(found.items())}


def _is_edition(stem: str, name: str) -> bool:
    return stem.startswith(f"{name}-") and stem[len(name) + 1 :][:1].isdigit()


def _newest_first(name: str, paths: tuple[Path, ...]) -> tuple[Path, ...]:
    newest = [path for path in paths if path.stem == name]
    return (*newest, *sorted((path for path in paths if path.stem != name), key=lambda path: path.stem, reverse=True))


def _shown(origin: str, path: Path) -> str:
    return f"rulesets/{path.name}" if origin == "shipped" else f"{origin}/{path.name}"


def is_file(value: str) -> bool:
    """Whether a `--ruleset` value is a file rather than a name."""
    return "/" in value or value.endswith(".yaml")


def _place(value: str, folder: Path | None) -> _Place:
    if is_file(value):
        return _Place(Path(value) if folder is None else folder / value, value, inside=folder)
    name, colon, edition = value.partition(":")
    known = _named() if _NAME.match(name) else {}
    if name not in known or (colon and not edition):
        names = tuple(_named())
        raise ArgumentError(
            f"there is no ruleset {neutral(value, 80)}{suggestion(name, names)} "
            f"Available: {', '.join(names) or 'none'}. A file is given with its path or its ending .yaml."
        )
    origin, paths = known[name]
    path = next((path for path in paths if path.stem == f"{name}-{edition}"), paths[0])
    return _Place(path, _shown(origin, path), name, edition)


def _layers(place: _Place, above: tuple[str, ...]) -> tuple[Layer, ...]:
    """The ruleset at `place` last, what it is based on before it. above: the files of the layers that led here."""
    blob = files.read(place.path, limit=limits.YAML_BYTES, inside=place.inside, shown=place.shown)
    file = ruleset_file.read(blob, plugins.rule)
    if place.named and file.id != place.named:
        raise InputError(place.shown, "the file holds another ruleset than its name says", found=file.id, expected=place.named)
    if place.edition and file.edition != place.edition:
        raise ArgumentError(_no_edition(place, file))
    below: tuple[Layer, ...] = ()
    if file.based_on is not None:
        if len(above) + 1 >= LAYERS:
            raise file.based_on.error("makes too many layers", expected=f"at most {LAYERS}")
        below = _below(file.based_on, place, (*above, os.path.realpath(place.path)))
    return (*below, joined(file, blob, below[-1] if below else None))


def _no_edition(place: _Place, file: RulesetFile) -> str:
    _, paths = _named()[place.named]
    held = [path.stem.removeprefix(f"{place.named}-") for path in paths if path.stem != place.named]
    newest = [file.edition] if place.path == paths[0] and file.edition else []
    return (
        f"there is no edition {neutral(place.edition, 40)} of the ruleset {place.named}; "
        f"available: {', '.join((*newest, *held)) or 'one without an edition'}"
    )


def _below(based_on: Node, place: _Place, above: tuple[str, ...]) -> tuple[Layer, ...]:
    value = based_on.text(limit=limits.NAME)
    folder = Path(os.path.realpath(place.path)).parent
    try:
        below = _place(value, folder)
        if os.path.realpath(below.path) in above:
            raise based_on.error("leads back to a layer above", expected="layers that end in a ruleset based on none")
        return _layers(replace(below, shown=_beside(place.shown, value)) if is_file(value) else below, above)
    except ArgumentError as error:
        raise based_on.error(f"names no ruleset: {error}") from None


def _beside(shown: str, value: str) -> str:
    """How the file `value` is named when a file shown as `shown` refers to it."""
    folder, slash, _ = shown.rpartition("/")
    return f"{folder}{slash}{value}"
