"""The declaration (`withstand-declaration/1`): what the netlist cannot say.

Every key is optional and what is absent stays absent; what is assumed instead is decided, and reported, elsewhere. Every
value keeps its place in the file. `from_map` reads the same keys inside a design of the project file.
"""

from __future__ import annotations

from checker.files import Blob
from checker.model.declaration import (
    Conductor,
    Declaration,
    DeclaredBarrier,
    DeclaredDomain,
    DeclaredPart,
    Output,
    Range,
    Supply,
    Variant,
)
from checker.model.domain import SIDES
from checker.model.fact import Fact, Source, Trust
from checker.readers.parts_file import MATERIAL_GROUPS, source_of, stated
from checker.strict_yaml import Map, Node, load
from checker.units import quantity, span

SCHEMA = "withstand-declaration/1"
CONNECTIONS = ("pluggable-A", "pluggable-B", "permanent")
ORIGINS = ("isolated", "mains", "unknown")
GRADES = ("functional", "basic", "supplementary", "double", "reinforced", "1-MOOP", "2-MOOP", "1-MOPP", "2-MOPP")
_FORMS = {"dc": "a d.c.", "rms": "an r.m.s.", "peak": "a peak"}


def read(blob: Blob) -> Declaration:
    """The declaration in a file; raises InputError with the line of the first thing that cannot be used."""
    return from_map(load(blob, SCHEMA), blob.path)


def from_map(keys: Map, path: str) -> Declaration:
    """The declaration made of the keys not yet taken from a map; a key it does not know is an error."""
    supplies, no_supply = _supplies(keys)
    declaration = Declaration(
        path=path,
        supplies=supplies,
        no_supply=no_supply,
        environment=_environment(keys),
        rulesets=_names(keys, "ruleset"),
        impulse=_range_at(keys, "impulse", "V", form="peak", above_zero=True),
        barriers=_barriers(keys),
        domains=_domains(keys),
        rails=tuple(_output(key, value) for key, value in _entries(keys, "rails")),
        parts={key.name_text(): _part(key, value) for key, value in _entries(keys, "parts")},
        conductors=tuple(_conductor(key, value) for key, value in _entries(keys, "conductors")),
        unreachable=_unreachable(keys),
        variants={key.name_text(): _variant(key, value) for key, value in _entries(keys, "variants")},
        concessions=_text(keys, "concessions"),
    )
    keys.done()
    return declaration


# supplies


def _supplies(keys: Map) -> tuple[tuple[Supply, ...], Source | None]:
    one, several = keys.take("supply"), keys.take("supplies")
    if one and several:
        raise several.error(
            f"stands beside `supply` (line {one.line})", found="", expected="either `supply` for one or `supplies` for several"
        )
    if several:
        return tuple(_supply(key.name_text(), value) for key, value in several.entries()), None
    if one is None:
        return (), None
    if one.kind == "scalar":
        if one.text().casefold() == "none":
            return (), source_of(one)
        raise one.error("does not say what supplies the board", expected="none, {mains: 230 V} or {dc: 24 V}")
    return (_supply("supply", one),), None


def _supply(name: str, node: Node) -> Supply:
    keys = node.map()
    mains, dc = keys.take("mains"), keys.take("dc")
    if mains and dc:
        raise dc.error(
            f"stands beside `mains` (line {mains.line})", found="", expected="one of them; two supplies go under `supplies`"
        )
    rated = mains or dc or keys.need("mains", "mains: 230 V or dc: 24 V")
    for key, needed, why in (("origin", dc, "d.c."), ("phases", mains, "mains"), ("frequency", mains, "mains")):
        misplaced = keys.peek(key)
        if misplaced and not needed:
            raise misplaced.error(f"belongs to a {why} supply only", expected=f"no `{key}` here")
    phases = keys.take("phases")
    supply = Supply(
        name=name,
        kind="mains" if mains else "dc",
        voltage=_range(rated, "V", form="rms" if mains else "dc", above_zero=True),
        origin=_one_of(keys, "origin", ORIGINS),
        phases=phases.whole(1, 3) if phases else None,
        tolerance=_tolerance(keys),
        frequency=_range_at(keys, "frequency", "Hz", above_zero=True),
        protection_class=_one_of(keys, "protection_class", ("I", "II", "III")),
        overvoltage_category=_one_of(keys, "overvoltage_category", ("I", "II", "III", "IV")),
        connection=_one_of(keys, "connection", CONNECTIONS),
        outputs=tuple(_output(key, value) for key, value in _entries(keys, "outputs")),
        power=_range_at(keys, "power", "W", above_zero=True),
        source=source_of(node),
    )
    keys.done()
    return supply


def _tolerance(keys: Map) -> Range | None:
    """One figure for both directions, in %."""
    node = keys.take("tolerance")
    if node is None:
        return None
    found = quantity(node, "%")
    if not 0 <= found.value < 100:
        raise node.error("is out of range", expected="a percentage from 0 to below 100")
    return Range(found.value, found.value, "%", "", source_of(node), found.text)


def _output(key: Node, node: Node) -> Output:
    if node.kind == "scalar":
        return Output(key.name_text(), _range(node, "V"))
    keys = node.map()
    voltage = _range(keys.need("voltage", "voltage: 5 V"), "V")
    output = Output(key.name_text(), voltage, _text(keys, "return"), _range_at(keys, "current", "A"))
    keys.done()
    return output


# surroundings and separations


def _environment(keys: Map) -> dict[str, Fact]:
    node = keys.take("environment")
    if node is None:
        return {}
    inner = node.map()
    facts: dict[str, Fact] = {}
    for name, choices in (("pollution_degree", ("1", "2", "3", "4")), ("material_group", MATERIAL_GROUPS)):
        word = inner.take(name)
        if word:
            facts[name] = Fact(name, word.one_of(choices), source_of(word), Trust.DECLARED)
    for name, unit in (("altitude", "m"), ("ambient", "degC")):
        figure = inner.take(name)
        if figure:
            found = quantity(figure, unit)
            facts[name] = Fact(name, found.value, source_of(figure), Trust.DECLARED, unit, text=found.text)
    inner.done()
    return facts


def _barriers(keys: Map) -> tuple[DeclaredBarrier, ...]:
    node = keys.take("barriers")
    found: dict[frozenset[str], DeclaredBarrier] = {}
    for item in node.items() if node else ():
        barrier = _barrier(item)
        first = found.setdefault(frozenset(barrier.between), barrier)
        if first is not barrier:
            raise item.error(f"names the same two domains as line {first.source.line}", found=" and ".join(barrier.between))
    return tuple(found.values())


def _barrier(node: Node) -> DeclaredBarrier:
    keys = node.map()
    pair = keys.need("between", "between: [mains, logic]")
    names = pair.names()
    if len(names) != 2 or names[0] == names[1]:
        raise pair.error("does not name two domains", found=", ".join(names), expected="two different names such as [mains, logic]")
    grade = _one_of(keys, "grade", GRADES)
    rms, peak = _working_voltage(keys)
    keys.done()
    return DeclaredBarrier((names[0], names[1]), grade, rms, peak, source_of(node))


def _working_voltage(keys: Map) -> tuple[Range | None, Range | None]:
    """`{rms: 150 V, peak: 212 V}`, or one figure with its form; a d.c. voltage is its own r.m.s. and peak value."""
    node = keys.take("working_voltage")
    if node is None:
        return None, None
    if node.kind == "scalar":
        found = _figure(node, "V")
        if not found.form:
            raise node.error("does not say its form", expected=f"{found.text} rms, {found.text} peak or {found.text} dc")
        rms = Range(found.low, found.high, "V", "rms", found.source, found.text) if found.form != "peak" else None
        return rms, Range(found.low, found.high, "V", "peak", found.source, found.text) if found.form != "rms" else None
    inner = node.map()
    rms_node, peak_node = inner.take("rms"), inner.take("peak")
    inner.done()
    rms = _figure(rms_node, "V", form="rms") if rms_node else None
    peak = _figure(peak_node, "V", form="peak") if peak_node else None
    if rms and peak and peak_node and peak.high < rms.high:
        raise peak_node.error("is below the r.m.s. value, which cannot be", expected=f"at least {rms.text}")
    return rms, peak


def _domains(keys: Map) -> dict[str, DeclaredDomain]:
    domains: dict[str, DeclaredDomain] = {}
    claimed: dict[str, tuple[str, int]] = {}
    for key, node in _entries(keys, "domains"):
        name = key.name_text()
        domains[name], seeds = _domain(name, key, node)
        for seed in seeds:
            other, line = claimed.setdefault(seed.name_text(), (name, seed.line))
            if other != name:
                raise seed.error(f"already seeds the domain `{other}` (line {line})", expected="each net in one domain")
    return domains


def _domain(name: str, key: Node, node: Node) -> tuple[DeclaredDomain, tuple[Node, ...]]:
    if node.kind != "map":
        seeds = node.each()
        return DeclaredDomain(name, _unique(seeds), source=source_of(key)), seeds
    keys = node.map()
    nets, accessible = keys.take("nets"), keys.take("accessible")
    side = _one_of(keys, "side", SIDES)
    keys.done()
    seeds = nets.each() if nets else ()
    return DeclaredDomain(name, _unique(seeds), side, accessible.flag() if accessible else None, source_of(key)), seeds


# parts, conductors, variants


def _part(key: Node, node: Node) -> DeclaredPart:
    keys = node.map()
    found = stated(keys, Trust.DECLARED)
    part = DeclaredPart(key.name_text(), found.facts, found.marks, found.windings, _text(keys, "core"), source_of(key))
    keys.done()
    return part


def _conductor(key: Node, node: Node) -> Conductor:
    if node.kind != "map":
        return Conductor(key.name_text(), _unique(node.each()), source=source_of(key))
    keys = node.map()
    touches, accessible = keys.take("touches"), keys.take("accessible")
    keys.done()
    return Conductor(
        key.name_text(),
        _unique(touches.each()) if touches else (),
        accessible.flag() if accessible else None,
        source_of(key),
    )


def _unreachable(keys: Map) -> dict[str, Source]:
    node = keys.take("unreachable")
    return {item.name_text(): source_of(item) for item in (node.each() if node else ())}


def _variant(key: Node, node: Node) -> Variant:
    keys = node.map()
    fitted = _names(keys, "fitted")
    left_out = keys.take("not_fitted")
    keys.done()
    for item in left_out.each() if left_out else ():
        if item.name_text() in fitted:
            raise item.error("is both fitted and not fitted in this variant", expected="each reference once")
    return Variant(key.name_text(), fitted, left_out.names() if left_out else (), source_of(key))


# values


def _range(node: Node, unit: str, *, form: str = "", above_zero: bool = False) -> Range:
    """A range or single figure in `unit`; `form` is what it must be, and is when nothing is said."""
    found = span(node, unit)
    return _checked(node, Range(found.low, found.high, unit, found.form, source_of(node), found.text), form, above_zero)


def _figure(node: Node, unit: str, *, form: str = "") -> Range:
    """A single figure above zero."""
    found = quantity(node, unit)
    return _checked(node, Range(found.value, found.value, unit, found.form, source_of(node), found.text), form, True)


def _checked(node: Node, found: Range, form: str, above_zero: bool) -> Range:
    if form and found.form not in ("", form):
        raise node.error(f"is {_FORMS[found.form]} value", expected=f"{_FORMS[form]} value")
    if above_zero and found.low <= 0:
        raise node.error("is not above zero", expected="a figure above zero (the magnitude, whatever the polarity)")
    return Range(found.low, found.high, found.unit, form or found.form, found.source, found.text)


def _range_at(keys: Map, key: str, unit: str, *, form: str = "", above_zero: bool = False) -> Range | None:
    node = keys.take(key)
    return _range(node, unit, form=form, above_zero=above_zero) if node else None


def _one_of(keys: Map, key: str, choices: tuple[str, ...]) -> str:
    node = keys.take(key)
    return node.one_of(choices) if node else ""


def _text(keys: Map, key: str) -> str:
    node = keys.take(key)
    return node.name_text() if node else ""


def _names(keys: Map, key: str) -> tuple[str, ...]:
    node = keys.take(key)
    return _unique(node.each()) if node else ()


def _unique(nodes: tuple[Node, ...]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(node.name_text() for node in nodes))


def _entries(keys: Map, key: str) -> tuple[tuple[Node, Node], ...]:
    node = keys.take(key)
    return node.entries() if node else ()
