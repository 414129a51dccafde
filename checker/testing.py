"""Cases for rules as data, and the one runner for them: for this project's rules and for plugin authors.

A case file holds `rule: ID` and `cases:`; a case describes a small circuit the way a netlist and a bill of materials would and
lists every verdict the rule must give. The whole pipeline runs, so a case also shows what people have to write.

    rule: barrier-insulation
    cases:
      - name: a resistor joins both sides
        outcome: fail                       # what the case is there to show: pass, fail, open, not-applicable
        base: [mains-flyback, class-i]      # optional: circuits of `circuits:` that this one extends, later parts replace
        declaration: {supply: {mains: 230 V}}
        parts:
          R9: {value: 1M, pins: {1: PGND, 2: SGND}}
        without: [C9]                       # optional: parts of the base to leave out
        expect:
          - [fail, error, [R9]]             # outcome, level, parts

A part takes `value`, `symbol`, `library`, `footprint`, `description`, `type`, `maker`, `mark`, any `rating:...`, `turns`,
`windings`, `fitted`, `kind`; `pins` maps pin numbers to nets, `names` pin numbers to pin names. `bom: true` puts its facts
into a bill of materials instead of the netlist, `bom: {description: ...}` adds a row of its own to them, `bom: false` keeps the
part out of the bill that the other parts are then in. `rows: {R7: {value: 1k}}` of a case are rows for parts that the netlist
lacks. `pads: {U2.1: [0, 10, 1.6, 2, top]}` says where copper lies as a layout file does: x, y, width and height in mm, then the
side and the angle in degrees where it is not on both sides and upright; a name that is a net stands for a via. `circuits:` is a
map of named circuits, or the name of a file beside this one that holds them. `never: {fail: why}` says which outcomes the rule
cannot have.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from checker import declaration as declarations
from checker import files, limits, pipeline, rulesets
from checker.model.clause import LEVELS
from checker.model.declaration import Declaration
from checker.model.fact import ATTRIBUTES, Fact, Source, Trust
from checker.model.reading import NetRecord, Node, PadRecord, PartRecord, Reading, Row, SymbolPin
from checker.model.report import Report
from checker.model.verdict import OUTCOMES
from checker.strict_yaml import Map, load, suggestion
from checker.strict_yaml import Node as YamlNode

Expected = tuple[str, str, tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Described:
    """One part of a case: its facts, pins (number -> net) and pin names (number -> name).

    row: the facts of its row in the bill of materials, None for none of its own; listed: whether a bill lists it at all.
    """

    ref: str
    facts: tuple[Fact, ...]
    pins: tuple[tuple[str, str], ...]
    names: tuple[tuple[str, str], ...]
    row: tuple[Fact, ...] | None
    listed: bool
    source: Source


@dataclass(frozen=True, slots=True)
class Case:
    """outcome: what it shows. parts: the circuit. rows: BOM rows of parts it lacks. line: where the case stands.

    expect: every verdict of the rule as (outcome, level, parts).
    """

    rule: str
    name: str
    outcome: str
    parts: tuple[Described, ...]
    declaration: Declaration
    rulesets: tuple[str, ...]
    expect: tuple[Expected, ...]
    rows: tuple[Row, ...] = ()
    line: int = 0
    pads: tuple[PadRecord, ...] = ()


@dataclass(frozen=True, slots=True)
class Cases:
    """A case file. never: outcomes that the rule cannot have, each with the reason, so that a missing case is no oversight."""

    rule: str
    cases: tuple[Case, ...]
    never: Mapping[str, str]


def load_cases(path: Path) -> Cases:
    """The cases of a file. Raises InputError with the line for a case that cannot be read."""
    keys = load(files.read(path, limit=limits.YAML_BYTES, shown=path.name))
    rule = keys.need("rule").text()
    bases = _circuits(keys.take("circuits"), path)
    never = keys.take("never")
    reasons = {key.one_of(OUTCOMES): node.text() for key, node in never.entries()} if never is not None else {}
    found = tuple(_case(rule, node.map(), bases, path.name) for node in keys.need("cases").items())
    keys.done()
    return Cases(rule, found, reasons)


def _circuits(node: YamlNode | None, path: Path) -> dict[str, dict[str, Described]]:
    """Named circuits: written here, or in a file beside this one."""
    if node is None:
        return {}
    if node.kind == "scalar":
        if Path(node.text()).name != node.text():
            raise node.error("is not the name of a file beside this one", expected="a file name such as circuits.yaml")
        beside = load(files.read(path.parent / node.text(), limit=limits.YAML_BYTES, shown=node.text()))
        return {key.text(): _parts(circuit.map()) for key, circuit in beside.rest()}
    return {key.text(): _parts(circuit.map()) for key, circuit in node.entries()}


def _case(rule: str, keys: Map, bases: dict[str, dict[str, Described]], path: str) -> Case:
    base = keys.take("base")
    parts: dict[str, Described] = {}
    for node in base.each() if base is not None else ():
        parts.update(bases[node.one_of(bases)])
    without = keys.take("without")
    for node in without.each() if without is not None else ():
        parts.pop(node.one_of(parts))
    own = keys.take("parts")
    parts.update(_parts(own.map()) if own is not None else {})
    declared, extra, pads = keys.take("declaration"), keys.take("rows"), keys.take("pads")
    chosen = keys.take("rulesets")
    case = Case(
        rule,
        keys.need("name").text(),
        keys.need("outcome").one_of(OUTCOMES),
        tuple(parts.values()),
        declarations.from_map(declared.map(), path) if declared is not None else Declaration(),
        chosen.texts() if chosen is not None else rulesets.DEFAULT,
        tuple(_expected(node) for node in keys.need("expect").items()),
        tuple(_row(key, node.map()) for key, node in extra.entries()) if extra is not None else (),
        keys.node.line,
        tuple(_pad(key, node, parts) for key, node in pads.entries()) if pads is not None else (),
    )
    keys.done()
    return case


def _expected(node: YamlNode) -> Expected:
    items = node.items()
    if len(items) != 3:
        raise node.error("is not a verdict", found=f"{len(items)} items", expected="[outcome, level, [parts]]")
    outcome, level, parts = items
    return outcome.one_of(OUTCOMES), level.one_of(LEVELS), tuple(part.text() for part in parts.items())


def _parts(keys: Map) -> dict[str, Described]:
    return {key.text(): _part(key, node.map()) for key, node in keys.rest()}


def _part(key: YamlNode, keys: Map) -> Described:
    source = Source(key.path, key.line, key.column)
    pins, names, bom = keys.take("pins"), keys.take("names"), keys.take("bom")
    row = _facts(bom.map(), Trust.BOM) if bom is not None and bom.kind == "map" else None
    whole = bom is not None and row is None and bom.flag()
    facts = _facts(keys, Trust.BOM if whole else Trust.NETLIST)
    listed = bom is None or whole or row is not None
    if whole:
        facts, row = (), facts
    return Described(key.text(), facts, _pairs(pins), _pairs(names), row, listed, source)


def _facts(keys: Map, trust: Trust) -> tuple[Fact, ...]:
    found = []
    for name, node in keys.rest():
        attribute = name.text()
        if attribute not in ATTRIBUTES:
            raise node.error("is no attribute of a part" + suggestion(attribute, ATTRIBUTES), found=attribute)
        value: str | bool = node.flag() if attribute in ("fitted", "in_bom") else node.text()
        found.append(Fact(attribute, value, Source(node.path, node.line, node.column), trust))
    return tuple(found)


def _row(key: YamlNode, keys: Map) -> Row:
    return Row((key.text(),), _facts(keys, Trust.BOM), Source(key.path, key.line, key.column))


def _pad(key: YamlNode, node: YamlNode, parts: Mapping[str, Described]) -> PadRecord:
    """The copper of one pin, or of a via on a net of the case."""
    items = node.items()
    if not 4 <= len(items) <= 6:
        raise node.error("is not a pad", found=f"{len(items)} items", expected="[x, y, width, height] and then side, angle")
    ref, _, pin = key.text().rpartition(".")
    nets = dict(parts[ref].pins) if ref in parts else {}
    if pin not in nets:
        ref, pin, nets = "", "", {"": key.one_of({net for part in parts.values() for _, net in part.pins})}
    x, y, width, height = (item.number() for item in items[:4])
    side = items[4].one_of(("top", "bottom", "both")) if len(items) > 4 else "both"
    turned = items[5].number() if len(items) > 5 else 0.0
    return PadRecord(ref, pin, nets[pin], x, y, width, height, turned, 0.0, side, Source(key.path, key.line, key.column))


def _pairs(node: YamlNode | None) -> tuple[tuple[str, str], ...]:
    return tuple((key.text(), value.text()) for key, value in node.entries()) if node is not None else ()


def readings(parts: tuple[Described, ...], rows: tuple[Row, ...] = (), pads: tuple[PadRecord, ...] = ()) -> list[Reading]:
    """A netlist reading of the described parts, and a BOM reading when some have their facts there or `rows` are given."""
    nets: dict[str, list[Node]] = {}
    records = []
    for part in parts:
        names = dict(part.names)
        for pin, net in part.pins:
            nets.setdefault(net, []).append(Node(part.ref, pin, names.get(pin, ""), "", part.source))
        symbol = tuple(SymbolPin(pin, names.get(pin, "")) for pin in dict.fromkeys([*dict(part.pins), *names]))
        records.append(PartRecord(part.ref, part.facts, part.source, symbol))
    listed = tuple(NetRecord(name, name, tuple(nodes), nodes[0].source) for name, nodes in nets.items())
    path = parts[0].source.path if parts else ""
    found = [Reading("netlist", "case", path, "", tuple(records), listed, pads=pads)]
    if rows or any(part.row is not None or not part.listed for part in parts):
        bill = tuple(Row((part.ref,), part.row or (), part.source) for part in parts if part.listed)
        found.append(Reading("bom", "case", path, "", rows=(*bill, *rows)))
    return found


def report_of(case: Case) -> Report:
    """The report of a case, judged by its rulesets. A rule that raises fails the case."""
    judged = pipeline.judge(
        case.name, readings(case.parts, case.rows, case.pads), case.declaration, rulesets.load_all(case.rulesets), ()
    )
    if judged.raised:
        raise AssertionError("\n".join(judged.raised))
    return judged.report


def verdicts_of(case: Case) -> tuple[Expected, ...]:
    """Every verdict of the case's rule as (outcome, level, parts), in the order of the report."""
    return tuple((v.outcome, v.level, tuple(v.parts)) for v in report_of(case).verdicts if v.rule == case.rule)
