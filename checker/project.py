"""The project file `withstand.yaml`: which designs there are, and what is declared about each.

    designs:
      charger:
        netlist: charger/board.net
        bom: charger/bom.csv                 # one or a list
        parts: [parts/couplers.yaml]         # parts files; a map of references is a declaration instead
        declaration: charger/declaration.yaml
        supply: {mains: 100-240 V}           # keys of a declaration, over those of the file
        variant: eu
    defaults: {ruleset: [iec-62368-1]}       # keys of a declaration and `parts`, under every design's own

A design's key replaces the same key of its declaration file, and that the one of `defaults`, whole: they are not merged
further. `supply` and `supplies` count as one key. Paths are taken from the folder of the file that names them and never
lead outside the folder of the project file.
"""

from __future__ import annotations

import os
import posixpath
from dataclasses import dataclass, replace
from pathlib import Path

from checker import limits
from checker.declaration import SCHEMA as DECLARATION_SCHEMA
from checker.declaration import from_map
from checker.errors import InputError
from checker.files import confined
from checker.files import read as read_file
from checker.model.circuit import Input
from checker.model.declaration import Declaration
from checker.model.fact import Source
from checker.readers.parts_file import source_of
from checker.strict_yaml import Map, Node, load

SCHEMA = "withstand-project/1"


@dataclass(frozen=True, slots=True)
class NamedFile:
    """A file the project names. path: where to open it. shown: from the project's folder, for messages and reports."""

    path: Path
    shown: str
    source: Source


@dataclass(frozen=True, slots=True)
class ProjectDesign:
    """One design; declaration holds everything declared for it. inputs: project and declaration file with their hashes.

    Rulesets of the declaration that are files hold a path that opens from the current folder.
    """

    name: str
    netlist: NamedFile
    bom: tuple[NamedFile, ...]
    parts: tuple[NamedFile, ...]
    declaration: Declaration
    variant: str | None
    concessions: NamedFile | None
    source: Source
    inputs: tuple[Input, ...]


@dataclass(frozen=True, slots=True)
class Project:
    """folder: what every file must lie in. unreadable: designs whose declaration file cannot be used, and why."""

    path: str
    folder: Path
    designs: tuple[ProjectDesign, ...]
    unreadable: tuple[tuple[str, InputError], ...] = ()


def read(path: str | os.PathLike[str]) -> Project:
    """The project file at `path`. Raises InputError; a declaration file that cannot be used only costs its own design."""
    blob = read_file(path, limit=limits.YAML_BYTES)
    folder = _Folder(Path(path).parent, blob.path)
    root = load(blob, SCHEMA)
    entries, defaults = root.take("designs"), root.take("defaults")
    root.done()
    named = entries.entries() if entries else ()
    if not named:
        raise root.node.error("names no designs", found="", expected="designs: {name: {netlist: board.net}}")
    if len(named) > limits.DESIGNS and entries:
        raise entries.error("holds too many designs", found=f"{len(named):,}", expected=f"at most {limits.DESIGNS:,}")
    below = defaults.map() if defaults else Map(Node(blob.path, 1, 1, {}))
    parts = folder.parts(below)
    from_map(below.over(), blob.path)  # so that a mistake in the defaults is found even where every design replaces it
    project = Input("project", blob.path, blob.sha256)
    designs: list[ProjectDesign] = []
    unreadable: list[tuple[str, InputError]] = []
    for key, node in named:
        try:
            designs.append(_design(key.name_text(), node, folder, below, parts, project))
        except InputError as error:
            if error.path == blob.path:
                raise
            unreadable.append((key.name_text(), error))
    return Project(blob.path, folder.root, tuple(designs), tuple(unreadable))


def _design(
    name: str, node: Node, folder: _Folder, below: Map, default_parts: tuple[NamedFile, ...], project: Input
) -> ProjectDesign:
    keys = node.map()
    netlist = folder.file(keys.need("netlist", "netlist: board.net"))
    bom, parts, variant = keys.take("bom"), folder.parts(keys), keys.take("variant")
    stated = keys.take("declaration")
    declared_in = folder.project
    inputs: tuple[Input, ...] = (project,)
    layers: tuple[Map, ...] = (below,)
    if stated:
        file = folder.file(stated)
        blob = read_file(file.path, limit=limits.YAML_BYTES, inside=folder.root, shown=file.shown)
        declared_in, inputs = blob.path, (project, Input("declaration", blob.path, blob.sha256))
        layers = (load(blob, DECLARATION_SCHEMA), below)
    merged = _merged(keys, *layers)
    rulesets, concessions = merged.peek("ruleset"), merged.peek("concessions")
    declaration = from_map(merged, declared_in)
    if rulesets:
        declaration = replace(declaration, rulesets=tuple(dict.fromkeys(folder.ruleset(item) for item in rulesets.each())))
    return ProjectDesign(
        name=name,
        netlist=netlist,
        bom=folder.files(bom),
        parts=parts or default_parts,
        declaration=declaration,
        variant=variant.name_text() if variant else None,
        concessions=folder.file(concessions) if concessions else None,
        source=source_of(node),
        inputs=inputs,
    )


def _merged(keys: Map, *layers: Map) -> Map:
    """The design's keys over those of each layer; `supply` and `supplies` replace each other."""
    merged = keys.over()
    for layer in layers:
        lower = layer.over()
        if "supply" in merged or "supplies" in merged:
            lower.take("supply")
            lower.take("supplies")
        merged = merged.over(lower)
    return merged


@dataclass(frozen=True, slots=True)
class _Folder:
    """The folder of the project file, and the name of that file as shown."""

    root: Path
    project: str

    def file(self, node: Node) -> NamedFile:
        """The file a value names, which must lie in the folder."""
        said = node.name_text()
        base = "" if node.path == self.project else posixpath.dirname(node.path)
        shown = posixpath.normpath(posixpath.join(base, said))
        outside = node.error(
            "leads outside the folder of the project file", expected="a path inside that folder, not starting with /"
        )
        if posixpath.isabs(shown) or Path(shown).is_absolute() or shown.split("/")[0] == "..":
            raise outside
        try:
            confined(self.root / shown, self.root, shown)
        except InputError:
            raise outside from None
        return NamedFile(self.root / shown, shown, source_of(node))

    def files(self, node: Node | None) -> tuple[NamedFile, ...]:
        """The files of a key that takes one or several."""
        return tuple(self.file(item) for item in node.each()) if node else ()

    def parts(self, keys: Map) -> tuple[NamedFile, ...]:
        """Parts files under `parts`; a map there is part of the declaration and stays."""
        node = keys.peek("parts")
        return () if node is None or node.kind == "map" else self.files(keys.take("parts"))

    def ruleset(self, node: Node) -> str:
        """A ruleset's name as it is; one that is a file as a path that opens from the current folder."""
        said = node.name_text()
        return str(self.file(node).path) if "/" in said or said.endswith(".yaml") else said
