"""The report as JSON: what `--format json` prints and what `explain`, `compare` and `barrier` read back."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from typing import Any

import msgspec

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.formulas.rounding import significant
from checker.model.report import SCHEMA, SCHEMA_SEVERAL, Report, Reports
from checker.neutral import neutral
from checker.writers.door import Writer

_SCHEMAS: dict[str, type[Report] | type[Reports]] = {SCHEMA: Report, SCHEMA_SEVERAL: Reports}
_BEYOND_ASCII = re.compile("[\x7f-\U0010ffff]")
_REMEDY = "Give a report that `withstand verify --format json` wrote."


class _Header(msgspec.Struct):
    schema: str = ""


def write(report: Report | Reports) -> bytes:
    """The report as UTF-8 JSON: two spaces a level, keys in the order of the records, a newline at the end.

    Every float has at most six significant digits. Characters that could move a cursor or reorder text stand as `\\uNNNN`
    escapes, so that the bytes are harmless to print and read back equal. Raises ValueError for a figure that is not finite.
    """
    tree = msgspec.to_builtins(report)
    _round(tree)
    try:
        data = msgspec.json.encode(tree)
    except UnicodeEncodeError:  # a path of the command line may hold bytes that are no text
        data = msgspec.json.encode(_encodable(tree))
    data = msgspec.json.format(data, indent=2) + b"\n"
    if data.isascii() and b"\x7f" not in data:
        return data
    return _BEYOND_ASCII.sub(_escaped, data.decode()).encode()


def read(blob: Blob) -> Report | Reports:
    """The report in the file; keys it does not know are ignored.

    Raises InputError for a file that is no JSON, of another schema, or with a key missing or of the wrong type.
    """
    try:
        schema = msgspec.json.decode(blob.data, type=_Header).schema
    except (msgspec.DecodeError, RecursionError) as error:
        raise InputError(
            blob.path, "this is not a report", found=str(error), expected=f"{SCHEMA} in JSON", remedy=_REMEDY
        ) from None
    if schema not in _SCHEMAS:
        raise InputError(
            blob.path,
            "the report is of a schema that this version does not read" if schema else "this is not a report",
            found=f"schema {schema}" if schema else "JSON without a schema",
            expected=" or ".join(_SCHEMAS),
            remedy=_REMEDY,
        )
    try:
        report = msgspec.json.decode(blob.data, type=_SCHEMAS[schema])
    except (msgspec.DecodeError, RecursionError) as error:
        raise InputError(blob.path, f"the report is damaged: {error}", expected=schema, remedy=_REMEDY) from None
    for one in report.reports if isinstance(report, Reports) else (report,):
        if one.schema != SCHEMA:
            raise InputError(
                blob.path, "a report inside it is of another schema", found=one.schema, expected=SCHEMA, remedy=_REMEDY
            )
        if not all(_shallow(item, limits.DEPTH) for item in _free(one)):
            raise InputError(blob.path, "the report is nested too deep", expected=f"at most {limits.DEPTH} levels", remedy=_REMEDY)
    return report


def _free(report: Report) -> Iterator[Any]:
    """The parts of a report whose shape no record bounds."""
    for barrier in (*report.barriers, *report.separations):
        yield barrier.required
        for part in barrier.parts:
            yield part.required
            yield part.provided
    for verdict in report.verdicts:
        yield verdict.conceded


def _shallow(value: Any, levels: int) -> bool:
    items = value.values() if isinstance(value, dict) else value if isinstance(value, list) else ()
    return levels > 0 and all(_shallow(item, levels - 1) for item in items)


def _round(tree: Any) -> None:
    """Rounds every float of a tree of dicts and lists in place; the tree may be large, so the loop stays flat."""
    entries: Iterable[tuple[Any, Any]] = tree.items() if isinstance(tree, dict) else enumerate(tree)
    for key, value in entries:
        kind = type(value)
        if kind is dict or kind is list:
            _round(value)
        elif kind is float:
            tree[key] = significant(value)


def _encodable(value: Any) -> Any:
    """`value` with its lone surrogates, which UTF-8 cannot hold, shown as `\\uNNNN`."""
    if isinstance(value, str):
        return "".join(neutral(c) if "\ud800" <= c <= "\udfff" else c for c in value)
    if isinstance(value, dict):
        return {_encodable(key): _encodable(item) for key, item in value.items()}
    return [_encodable(item) for item in value] if isinstance(value, list) else value


def _escaped(match: re.Match[str]) -> str:
    """One character, as JSON escapes when it is not safe to print; outside strings JSON has nothing but ASCII."""
    character = match.group()
    if neutral(character) == character:
        return character
    units = character.encode("utf-16-be")
    return "".join(f"\\u{units[at] << 8 | units[at + 1]:04x}" for at in range(0, len(units), 2))


WRITER = Writer("json", write)
