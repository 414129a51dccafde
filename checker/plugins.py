"""The doors: readers, rules, writers and rulesets, built in or installed by another package.

Built-ins are an explicit table of import strings and installed ones are entry points; both are imported only when used
and pass the same validation. The installed packages are looked through once, on the first call, so a command that
calls nothing here (`--help`) never pays for it. Nothing is ever imported from a design's folder.
"""

from __future__ import annotations

import importlib
import re
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

from checker import parameters
from checker.errors import ArgumentError, InputError, PluginError
from checker.files import Blob
from checker.model.reading import Reader
from checker.model.rule import Rule
from checker.neutral import neutral
from checker.readers import sniff
from checker.strict_yaml import suggestion
from checker.writers.door import Writer

BUILT_IN: Mapping[str, Mapping[str, str]] = {
    "readers": {
        "sexpr": "checker.readers.sexpr_netlist:READER",
        "xml": "checker.readers.xml_netlist:READER",
        "ipcd356": "checker.readers.ipcd356:READER",
        "edif": "checker.readers.edif:READER",
        "legacy-list": "checker.readers.legacy_list:READER",
        "legacy-lines": "checker.readers.legacy_lines:READER",
        "spice": "checker.readers.spice:READER",
        "bom": "checker.readers.bom_table:READER",
        "workbook": "checker.readers.workbook:READER",
        "parts": "checker.readers.parts_file:READER",
    },
    "rules": {
        "hazardous-source": "checker.rules.hazardous_source:RULE",
        "barrier-insulation": "checker.rules.barrier_insulation:RULE",
        "reachable-connector": "checker.rules.reachable_connector:RULE",
        "bridging-capacitor": "checker.rules.bridging_capacitor:RULE",
        "fuse": "checker.rules.fuse:RULE",
        "protective-earth": "checker.rules.protective_earth:RULE",
        "records": "checker.rules.records:RULE",
        "capacitor-voltage": "checker.rules.capacitor_voltage:RULE",
        "insulation-grade": "checker.rules.insulation_grade:RULE",
        "clearance": "checker.rules.clearance:RULE",
        "creepage": "checker.rules.creepage:RULE",
        "through-insulation": "checker.rules.through_insulation:RULE",
        "electric-strength": "checker.rules.electric_strength:RULE",
        "pad-span": "checker.rules.pad_span:RULE",
        "pad-distance": "checker.rules.pad_distance:RULE",
        "touch-current": "checker.rules.touch_current:RULE",
        "earth-current": "checker.rules.earth_current:RULE",
        "line-capacitor": "checker.rules.line_capacitor:RULE",
        "stored-charge": "checker.rules.stored_charge:RULE",
        "fuse-rating": "checker.rules.fuse_rating:RULE",
        "surge-limiter": "checker.rules.surge_limiter:RULE",
        "inrush": "checker.rules.inrush:RULE",
        "resistor-voltage": "checker.rules.resistor_voltage:RULE",
        "polarity": "checker.rules.polarity:RULE",
        "voltage-rating": "checker.rules.voltage_rating:RULE",
    },
    "writers": {
        "text": "checker.writers.text:WRITER",
        "json": "checker.writers.json:WRITER",
        "csv": "checker.writers.csv:WRITER",
    },
    "rulesets": {},  # shipped rulesets are files, found by checker.rulesets
}
OURSELVES = "withstand (built in)"
HAZARDS = ("shock", "fire", "overstress", "record")
ROLES = ("netlist", "bom", "parts")
_NAME = re.compile(r"[a-z0-9]+(?:[-.][a-z0-9]+)*\Z")


@dataclass(frozen=True, slots=True)
class Entry:
    """One object behind a door. target: `module:attribute`. package: name and version of who put it there."""

    door: str
    name: str
    target: str
    package: str

    def __str__(self) -> str:
        return f"{self.door.removesuffix('s')} {neutral(self.name, 80)} of {neutral(self.package, 80)}"


@cache
def _installed() -> tuple[Entry, ...]:
    """Every entry point of every door, in the order of door, name and package; the names of packages stay as installed."""
    from importlib.metadata import entry_points

    points, found = entry_points(), []
    for door in BUILT_IN:
        for point in points.select(group=f"withstand.{door}"):
            package = f"{point.dist.name} {point.dist.version}" if point.dist else "a package without a name"
            found.append(Entry(door, point.name, point.value, package))
    return tuple(sorted(found, key=lambda entry: (entry.door, entry.name, entry.package)))


@cache
def _entries(door: str) -> Mapping[str, Entry]:
    """name -> entry, built-ins first. Raises PluginError when two have one name."""
    entries = {name: Entry(door, name, target, OURSELVES) for name, target in BUILT_IN[door].items()}
    for entry in _installed():
        if entry.door != door:
            continue
        if entry.name in entries:
            raise clash(door, entry.name, entries[entry.name].package, entry.package)
        entries[entry.name] = entry
    return entries


def clash(door: str, name: str, first: str, second: str) -> PluginError:
    """The error for two objects of one name behind one door."""
    return PluginError(
        f"two {door} are called {neutral(name, 80)}: one of {neutral(first, 80)} and one of {neutral(second, 80)}. "
        "Uninstall one of the two packages."
    )


@cache
def _loaded(entry: Entry) -> Any:
    """The validated object of an entry. Raises PluginError when it cannot be imported or has not the door's shape."""
    if not _NAME.match(entry.name):
        raise PluginError(f"{entry}: a name is made of words of small letters and digits joined by - or .")
    module, _, attribute = entry.target.partition(":")
    try:
        found: Any = importlib.import_module(module)
        for step in filter(None, attribute.split(".")):
            found = getattr(found, step)
    except Exception as error:  # whatever a plugin raises while it is imported is the plugin's fault, told as such
        raise PluginError(f"{entry} cannot be loaded: {type(error).__name__}: {neutral(str(error), 300)}") from error
    wanted, complaints = _SHAPES[entry.door]
    if not isinstance(found, wanted):
        raise PluginError(f"{entry}: it is a {type(found).__name__}, not a {wanted.__module__}.{wanted.__qualname__}")
    for complaint in complaints(entry, found):
        raise PluginError(f"{entry}: {neutral(complaint)}")
    return found


def _reader(entry: Entry, found: Any) -> Iterator[str]:
    if not isinstance(found.form, str) or not found.form:
        yield "it names no form"
    if found.role not in ROLES:
        yield f"its role is {found.role!r}, not one of {', '.join(ROLES)}"
    if not callable(found.claims) or not callable(found.read):
        yield "claims and read must be functions"


def _rule(entry: Entry, found: Any) -> Iterator[str]:
    if found.id != entry.name:
        yield f"its id is {found.id!r}, but the entry is called {entry.name!r}"
    if found.hazard not in HAZARDS:
        yield f"its hazard is {found.hazard!r}, not one of {', '.join(HAZARDS)}"
    if not isinstance(found.manual, str) or not found.manual.strip():
        yield "it has no manual, the text that `withstand explain` prints"
    if not callable(found.ask):
        yield "ask must be a function"
    yield from parameters.complaints(found.params)


def _writer(entry: Entry, found: Any) -> Iterator[str]:
    if found.form != entry.name:
        yield f"its form is {found.form!r}, but the entry is called {entry.name!r}"
    if not callable(found.write):
        yield "write must be a function"


def _rulesets(entry: Entry, found: Any) -> Iterator[str]:
    if not found or not all(isinstance(path, Path) for path in found):
        yield "it does not hold pathlib.Path objects, one for each edition"
        return
    for path in found:
        if path.suffix != ".yaml" or (path.stem != entry.name and not path.stem.startswith(f"{entry.name}-")):
            yield f"the file {path.name!r} is called neither {entry.name}.yaml nor {entry.name}-EDITION.yaml"


_SHAPES: Mapping[str, tuple[type, Callable[[Entry, Any], Iterator[str]]]] = {
    "readers": (Reader, _reader),
    "rules": (Rule, _rule),
    "writers": (Writer, _writer),
    "rulesets": (tuple, _rulesets),
}


def readers(role: str) -> tuple[Reader, ...]:
    """Every reader of a role (netlist, bom, parts), built-ins first."""
    return tuple(reader for _, reader in _readers(role))


def _readers(role: str) -> tuple[tuple[Entry, Reader], ...]:
    loaded = ((entry, _loaded(entry)) for entry in _entries("readers").values())
    return tuple((entry, reader) for entry, reader in loaded if reader.role == role)


def reader_for(blob: Blob, role: str) -> Reader:
    """The one reader of `role` that claims the content; the file's suffix is never looked at.

    Raises InputError when none does, PluginError when two do or when a reader raises while it is asked.
    """
    head = sniff.head(blob)
    claiming = [(entry, reader) for entry, reader in _readers(role) if _claims(entry, reader, head)]
    if len(claiming) > 1:
        both = " and ".join(str(entry) for entry, _ in claiming[:2])
        raise PluginError(f"{neutral(blob.path)} is claimed by {both}. Uninstall the package whose reader is not wanted.")
    if not claiming:
        raise InputError(
            blob.path,
            f"no reader of the role {role} knows this content",
            found=sniff.describe(head),
            expected=", ".join(reader.form for reader in readers(role)),
            remedy="Export one of these forms, or install a package with a reader for this one.",
        )
    return claiming[0][1]


def _claims(entry: Entry, reader: Reader, head: str) -> bool:
    try:
        return bool(reader.claims(head))
    except Exception as error:  # a reader must answer for every text
        raise PluginError(f"{entry} raised {type(error).__name__} when it was asked whether it knows a file") from error


def rule(id: str) -> Rule:
    """The rule of that id. Raises ArgumentError, with a suggestion, when there is none."""
    entry = _entries("rules").get(id)
    if entry is None:
        raise ArgumentError(f"there is no rule {neutral(id, 80)}{suggestion(id, _entries('rules'))}")
    found: Rule = _loaded(entry)
    return found


def rule_ids() -> tuple[str, ...]:
    """The ids of every rule, built-ins first; nothing is imported."""
    return tuple(_entries("rules"))


def rules() -> tuple[Rule, ...]:
    """Every rule, built-ins first."""
    return tuple(map(rule, rule_ids()))


def writer(form: str) -> Writer:
    """The writer of that form. Raises ArgumentError, with a suggestion, when there is none."""
    entry = _entries("writers").get(form)
    if entry is None:
        raise ArgumentError(f"there is no output form {neutral(form, 80)}{suggestion(form, _entries('writers'))}")
    found: Writer = _loaded(entry)
    return found


def forms() -> tuple[str, ...]:
    """The names of every output form, built-ins first; nothing is imported."""
    return tuple(_entries("writers"))


def ruleset_files() -> Mapping[str, tuple[str, tuple[Path, ...]]]:
    """Rulesets that packages bring: id -> (package, its files, one an edition)."""
    return {name: (entry.package, _loaded(entry)) for name, entry in _entries("rulesets").items()}


def plugin_names() -> tuple[str, ...]:
    """`name version` of each package with something behind a door, in alphabetical order."""
    return tuple(sorted({neutral(entry.package, 80) for entry in _installed()}))


def forget() -> None:
    """Looks at the installed packages anew on the next call; for tests and for programs that install while they run."""
    for memory in (_installed, _entries, _loaded):
        memory.cache_clear()
