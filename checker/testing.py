"""Cases for rules as data, and the one runner for them: for this project's rules and for plugin authors.

A case file holds `rule: ID` and `cases:`; a case describes a small circuit the way a netlist and a bill of materials would and
lists every verdict the rule must give. The whole pipeline runs, so a case also shows what people have to write.

    rule: barrier-insulation
    cases:
      - name: a resistor joins both sides
        outcome: fail                       # what the case is there to show: pass, fail, open, not-applicable
        base: mains-flyback                 # optional: a circuit of `circuits:` that this one extends
        declaration: {supply: {mains: 230 V}}
        parts:
          R9: {value: 1M, pins: {1: PGND, 2: SGND}}
        without: [C9]                       # optional: parts of the base to leave out
        expect:
          - [fail, error, [R9]]             # outcome, level, parts

A part takes `value`, `symbol`, `library`, `footprint`, `description`, `type`, `maker`, `mark`, any `rating:...`, `turns`,
`windings`, `fitted`, `kind`; `pins` maps pin numbers to nets, `names` pin numbers to pin names. `bom: true` puts its facts
into a bill of materials instead of the netlist.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from checker import declaration as declarations
from checker import files, limits, pipeline, rulesets
from checker.model.declaration import Declaration
from checker.model.fact import Fact, Source, Trust
from checker.model.reading import NetRecord, Node, PartRecord, Reading, Row, SymbolPin
from checker.model.report import Report
from checker.strict_yaml import Map, load
from checker.strict_yaml import Node as YamlNode

Expected = tuple[str, str, tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Described:
    """One part of a case: its facts, pins (number -> net) and pin names (number -> name)."""

    ref: str
    facts: tuple[Fact, ...]
    pins: tuple[tuple[str, str], ...]
    names: tuple[tuple[str, str], ...]
    bom: bool
    source: Source


@dataclass(frozen=True, slots=True)
class Case:
    """outcome: what it shows. parts: the circuit. expect: every verdict of the rule as (outcome, level, parts)."""

    rule: str
    name: str
    outcome: str
    parts: tuple[Described, ...]
    declaration: Declaration
    rulesets: tuple[str, ...]
    expect: tuple[Expected, ...]


def load_cases(path: Path) -> tuple[Case, ...]:
    """The cases of a file. Raises InputError with the line for a case that cannot be read."""
    keys = load(files.read(path, limit=limits.YAML_BYTES, shown=path.name))
    rule = keys.need("rule").text()
    circuits = keys.take("circuits")
    bases = {key.text(): _parts(node.map()) for key, node in circuits.entries()} if circuits is not None else {}
    found = tuple(_case(rule, node.map(), bases, path.name) for node in keys.need("cases").items())
    keys.done()
    return found


def _case(rule: str, keys: Map, bases: dict[str, dict[str, Described]], path: str) -> Case:
    base = keys.take("base")
    parts = dict(bases[base.one_of(bases)]) if base is not None else {}
    without = keys.take("without")
    for node in without.each() if without is not None else ():
        parts.pop(node.one_of(parts))
    own = keys.take("parts")
    parts.update(_parts(own.map()) if own is not None else {})
    declared = keys.take("declaration")
    chosen = keys.take("rulesets")
    case = Case(
        rule,
        keys.need("name").text(),
        keys.need("outcome").one_of(("pass", "fail", "open", "not-applicable")),
        tuple(parts.values()),
        declarations.from_map(declared.map(), path) if declared is not None else Declaration(),
        chosen.texts() if chosen is not None else rulesets.DEFAULT,
        tuple(_expected(node) for node in keys.need("expect").items()),
    )
    keys.done()
    return case


def _expected(node: YamlNode) -> Expected:
    outcome, level, parts = node.items()
    return outcome.text(), level.text(), parts.texts()


def _parts(keys: Map) -> dict[str, Described]:
    return {key.text(): _part(key, node.map()) for key, node in keys.rest()}


def _part(key: YamlNode, keys: Map) -> Described:
    source = Source(key.path, key.line, key.column)
    pins, names, bom = keys.take("pins"), keys.take("names"), keys.take("bom")
    in_bom = bom is not None and bom.flag()
    facts = []
    for name, node in keys.rest():
        attribute = name.text()
        value: str | bool = node.flag() if attribute in ("fitted", "in_bom") else node.text()
        facts.append(Fact(attribute, value, Source(node.path, node.line, node.column), Trust.BOM if in_bom else Trust.NETLIST))
    return Described(key.text(), tuple(facts), _pairs(pins), _pairs(names), in_bom, source)


def _pairs(node: YamlNode | None) -> tuple[tuple[str, str], ...]:
    return tuple((key.text(), value.text()) for key, value in node.entries()) if node is not None else ()


def readings(parts: tuple[Described, ...]) -> list[Reading]:
    """A netlist reading of the described parts, and a BOM reading when some have their facts there."""
    nets: dict[str, list[Node]] = {}
    records, rows = [], []
    for part in parts:
        names = dict(part.names)
        for pin, net in part.pins:
            nets.setdefault(net, []).append(Node(part.ref, pin, names.get(pin, ""), "", part.source))
        symbol = tuple(SymbolPin(pin, names.get(pin, "")) for pin in dict.fromkeys([*dict(part.pins), *names]))
        records.append(PartRecord(part.ref, () if part.bom else part.facts, part.source, symbol))
        if part.bom:
            rows.append(Row((part.ref,), part.facts, part.source))
    listed = tuple(NetRecord(name, name, tuple(nodes), nodes[0].source) for name, nodes in nets.items())
    found = [Reading("netlist", "case", parts[0].source.path if parts else "", "", tuple(records), listed)]
    if rows:
        others = [Row((part.ref,), (), part.source) for part in parts if not part.bom]
        found.append(Reading("bom", "case", parts[0].source.path, "", rows=(*rows, *others)))
    return found


def report_of(case: Case) -> Report:
    """The report of a case, judged by its rulesets. A rule that raises fails the case."""
    judged = pipeline.judge(case.name, readings(case.parts), case.declaration, rulesets.load_all(case.rulesets), ())
    if judged.raised:
        raise AssertionError("\n".join(judged.raised))
    return judged.report


def verdicts_of(case: Case) -> tuple[Expected, ...]:
    """Every verdict of the case's rule as (outcome, level, parts), in the order of the report."""
    return tuple((v.outcome, v.level, tuple(v.parts)) for v in report_of(case).verdicts if v.rule == case.rule)
