"""The one function behind the command line: `checker.verify(...)`."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable, Sequence
from pathlib import Path

from checker import declaration as declarations
from checker import files, limits, pipeline, plugins, project, rulesets
from checker.errors import WithstandError
from checker.files import Blob
from checker.model.declaration import Declaration
from checker.model.report import Report, Reports, Unreadable
from checker.model.ruleset import Ruleset

PathLike = str | os.PathLike[str]


def verify(
    netlist: PathLike,
    *,
    bom: Iterable[PathLike] = (),
    parts: Iterable[PathLike] = (),
    declaration: PathLike | None = None,
    ruleset: Iterable[str] = (),
    variant: str | None = None,
    name: str | None = None,
) -> Report:
    """Judge one design and return its report.

    netlist: path of a netlist, `-` for standard input. bom, parts: paths of bills of materials and parts files.
    declaration: path of a declaration. ruleset: names (`iec-62368-1`, `iec-62368-1:2014`) or files, in place of the
    declaration's. variant: an assembly variant of the netlist or the declaration. name: the design's name in the report.

    Raises checker.errors.InputError or ArgumentError when an input cannot be used; nothing is printed and nothing is
    written. A rule that raises leaves its question open; `judged` tells it from other opens.
    """
    return judged(netlist, bom=bom, parts=parts, declaration=declaration, ruleset=ruleset, variant=variant, name=name).report


def judged(
    netlist: PathLike,
    *,
    bom: Iterable[PathLike] = (),
    parts: Iterable[PathLike] = (),
    declaration: PathLike | None = None,
    ruleset: Iterable[str] = (),
    variant: str | None = None,
    name: str | None = None,
) -> pipeline.Judged:
    """As `verify`, with the tracebacks of rules that raised."""
    blobs = [("netlist", _read(netlist))]
    blobs += [("bom", _read(path)) for path in bom] + [("parts", _read(path)) for path in parts]
    declared, extra = Declaration(), []
    folder: Path | None = None
    if declaration is not None:
        blob = files.read(declaration, limit=limits.YAML_BYTES, shown=shown_path(declaration))
        declared = declarations.read(blob)
        folder = Path(declaration).parent
        extra.append(("declaration", blob.path, blob.sha256))
    chosen = _rulesets(tuple(ruleset), declared, folder)
    return _judge(name or _stem(netlist), blobs, declared, chosen, extra, variant)


def verify_project(path: PathLike, *, ruleset: Iterable[str] = ()) -> tuple[Reports, tuple[str, ...]]:
    """Judge every design of a project file: (reports, tracebacks of rules that raised).

    A design that cannot be read is listed under `unreadable` and the others are judged. Raises InputError when the
    project file itself cannot be used.
    """
    plan = project.read(path)
    found: list[Report] = []
    lost = [Unreadable(design=name, message=str(error)) for name, error in plan.unreadable]
    raised: list[str] = []
    for design in plan.designs:
        try:
            named = [("netlist", design.netlist), *(("bom", f) for f in design.bom), *(("parts", f) for f in design.parts)]
            blobs = [(role, files.read(f.path, inside=plan.folder, shown=f.shown)) for role, f in named]
            chosen = _rulesets(tuple(ruleset), design.declaration, None)
            extra = [(paper.role, paper.path, paper.sha256) for paper in design.inputs]
            result = _judge(design.name, blobs, design.declaration, chosen, extra, design.variant)
        except WithstandError as error:
            lost.append(Unreadable(design=design.name, message=str(error)))
        else:
            found.append(result.report)
            raised += result.raised
    total: dict[str, int] = {}
    for report in found:
        for key, count in report.summary.items():
            total[key] = total.get(key, 0) + count
    return Reports(reports=found, unreadable=lost, summary=total), tuple(raised)


def _judge(
    name: str,
    blobs: Sequence[tuple[str, Blob]],
    declared: Declaration,
    chosen: Sequence[Ruleset],
    extra: Sequence[tuple[str, str, str]],
    variant: str | None,
) -> pipeline.Judged:
    readings = [plugins.reader_for(blob, role).read(blob) for role, blob in blobs]
    inputs = [(role, blob.path, blob.sha256) for role, blob in blobs]
    inputs += list(extra)
    return pipeline.judge(name, readings, declared, chosen, inputs, variant)


def _rulesets(asked: tuple[str, ...], declared: Declaration, folder: Path | None) -> tuple[Ruleset, ...]:
    """The rulesets in force: those asked for, else the declaration's (files relative to its folder), else the default."""
    if asked:
        return rulesets.load_all(asked)
    if declared.rulesets:
        return rulesets.load_all(declared.rulesets, folder)
    return rulesets.load_all(rulesets.DEFAULT)


def shown_path(path: PathLike) -> str:
    """How a path is printed: relative to the current folder when it lies in it, else the file name alone; never absolute."""
    text = os.fspath(path)
    if not os.path.isabs(text):
        return text
    try:
        inside = os.path.relpath(text)
    except ValueError:
        inside = ".."
    return inside if not inside.startswith("..") else os.path.basename(text)


def _read(path: PathLike) -> Blob:
    if os.fspath(path) == "-":
        return files.bounded_stream(sys.stdin.buffer, "standard input")
    return files.read(path, shown=shown_path(path))


def _stem(path: PathLike) -> str:
    text = os.fspath(path)
    return "standard input" if text == "-" else Path(text).stem
