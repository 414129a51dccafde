"""Parts file (`withstand-parts/1`): what data sheets and approvals say about parts, by type or by reference.

    parts:
      - match: {type: ABC-123}            # or {ref: [U1, U2]}
        kind: optocoupler
        marks: [{class: IEC 60747-5-5, record: "...", valid_until: 2027-01-31}]
        ratings: {isolation_working: 630 V peak, isolation_test: 5000 V rms}
        body: {clearance: 8 mm, creepage: 8 mm, through_insulation: 0.4 mm, material_group: IIIa}
        source: data sheet, page 4

`stated` reads what such an entry says about a part; the declaration's `parts` say the same things in the same words.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from checker.files import Blob
from checker.model.candidate import KINDS, Mark, Winding
from checker.model.fact import Fact, Source, Trust
from checker.model.kind_words import normal_kind
from checker.model.reading import Note, Reader, Reading, Row
from checker.strict_yaml import Map, Node, either, load, suggestion
from checker.units import Quantity, UnitError, parse, quantity, span

SCHEMA = "withstand-parts/1"

RATINGS = {
    "voltage": "V",
    "current": "A",
    "power": "W",
    "temperature": "degC",
    "isolation_working": "V",
    "isolation_test": "V",
    "impulse": "V",
    "clearance": "mm",
    "creepage": "mm",
    "through_insulation": "mm",
    "breaking_capacity": "A",
    "melting_integral": "A2s",
    "surge_current": "A",
}
MATERIAL_GROUPS = ("I", "II", "IIIa", "IIIb")

_TEXTS = ("value", "type", "maker", "technology")
_CAPACITOR_CLASS = re.compile(r"[XxYy][1-4]")
_STANDARD = re.compile(r"\b(IEC|EN|UL|VDE|DIN|CQC|CSA|GB) ?(?=[0-9])", re.IGNORECASE)
_PIN_IN_TEXT = re.compile(r"[^-,: ]+")
# top-level `parts:` or the schema, in block form or as the first key in braces; a table or a form starts otherwise
_CLAIM = re.compile(
    r"""^(?:\{ ?)?["']?(?:schema["']?[ ]?:[ ]*["']?withstand-parts/|parts["']?[ ]?:[ \r]*(?:$|[\[{#]))""", re.MULTILINE
)


@dataclass(frozen=True, slots=True)
class Stated:
    """What one entry says about a part. facts: kind, ratings and attributes; marks and windings stand apart."""

    facts: tuple[Fact, ...]
    marks: tuple[Mark, ...]
    windings: tuple[Winding, ...]


def source_of(node: Node) -> Source:
    """The place of a YAML node as the source of a fact."""
    return Source(node.path, node.line, node.column)


def stated(entry: Map, trust: Trust) -> Stated:
    """Takes the keys that describe a part from `entry`, all optional; raises InputError."""
    origin = entry.take("source")
    remark = origin.text() if origin else ""
    facts: list[Fact] = []
    kind = entry.take("kind")
    if kind:
        facts.append(_fact("kind", kind_of(kind), kind, trust, remark))
    for attribute in _TEXTS:
        node = entry.take(attribute)
        if node:
            facts.append(_fact(attribute, node.name_text(), node, trust, remark))
    tolerance = entry.take("tolerance")
    if tolerance:
        facts.append(_figure("tolerance", "%", tolerance, trust, remark))
    fitted = entry.take("fitted")
    if fitted:
        facts.append(_fact("fitted", fitted.flag(), fitted, trust, remark))
    facts += _ratings(entry, trust, remark)
    marks = entry.take("marks")
    windings = entry.take("windings")
    return Stated(
        tuple(facts),
        tuple(mark for item in (marks.each() if marks else ()) for mark in _marks(item, trust, remark)),
        windings_of(windings) if windings else (),
    )


def kind_of(node: Node) -> str:
    """A kind of checker.model.candidate.KINDS; case, blanks and underscores do not matter, plain synonyms are known."""
    found = normal_kind(node.name_text())
    if found is not None:
        return found
    said = "-".join(node.name_text().casefold().replace("_", " ").replace("-", " ").split())
    if said in ("dc-dc", "dcdc", "dc-dc-converter", "converter"):
        raise node.error("may or may not insulate", expected="isolated-module when its output is insulated, else module")
    close = suggestion(said, sorted(KINDS))
    some = either(("transformer", "optocoupler", "digital-isolator", "isolated-module", "relay", "capacitor", "connector"))
    raise node.error(f"is no kind of part{close}", expected="" if close else f"a kind such as {some}")


def windings_of(node: Node) -> tuple[Winding, ...]:
    """`"1-2, 3-4"`, `"1-2:128, 3-4:16"`, a list of such texts, or a list of {pins, turns, name}."""
    found: list[Winding] = []
    for item in node.each():
        found += [_winding(item)] if item.kind == "map" else _windings_in_text(item)
    return tuple(found)


def _winding(node: Node) -> Winding:
    keys = node.map()
    pins_node = keys.need("pins", "two pins, or more with taps, such as [1, 3]")
    pins, turns_node, name = pins_node.names(), keys.take("turns"), keys.take("name")
    keys.done()
    turns = tuple(item.number(high=1e6) for item in turns_node.each()) if turns_node else ()
    return _checked_winding(node, Winding(pins, turns, name.name_text() if name else ""))


def _windings_in_text(node: Node) -> list[Winding]:
    found = []
    for piece in node.text().split(","):
        pins, _, turns = piece.partition(":")
        try:
            counts = (parse(turns.strip(), "").value,) if turns.strip() else ()
        except UnitError as error:
            raise node.error("has turns that are no number", found=error.found, expected="turns such as 1-2:40") from None
        found.append(_checked_winding(node, Winding(tuple(pin.strip() for pin in pins.split("-")), counts)))
    return found


def _checked_winding(node: Node, winding: Winding) -> Winding:
    pins, turns = winding.pins, winding.turns
    if len(pins) < 2 or not all(pins) or len(set(pins)) < len(pins):
        raise node.error("is no winding", found=", ".join(pins), expected="two different pins, or more with taps, such as 1-2")
    if turns and len(turns) != len(pins) - 1:
        raise node.error(
            "has the wrong number of turns",
            found=f"{len(turns)} for {len(pins)} pins",
            expected=f"{len(pins) - 1}, one for each section between neighbouring pins",
        )
    if any(count <= 0 for count in turns):
        raise node.error("has turns that are not above zero", found=", ".join(f"{count:g}" for count in turns))
    return winding


def _marks(node: Node, trust: Trust, remark: str) -> list[Mark]:
    said, record, valid_until = node, "", ""
    if node.kind == "map":
        keys = node.map()
        said = keys.need("class", "a class or approval such as Y1 or IEC 60747-5-5")
        record_node, day = keys.take("record"), keys.take("valid_until")
        keys.done()
        record, valid_until = record_node.name_text() if record_node else "", day.date() if day else ""
    words = [f"record {record.replace(';', ',')}" if record else "", f"valid until {valid_until}" if valid_until else "", remark]
    text = "; ".join(word for word in words if word)
    return [
        Mark(name, Fact("mark", name, source_of(said), trust, text=text), record, valid_until)
        for name in _mark_names(said.name_text())
    ]


def _mark_names(said: str) -> list[str]:
    """`x1/y2` is two marks, X1 and Y2; `iec60747-5-5` is IEC 60747-5-5; anything else stays as written."""
    pieces = [piece.strip() for piece in said.split("/")]
    if all(_CAPACITOR_CLASS.fullmatch(piece) for piece in pieces):
        return [piece.upper() for piece in pieces]
    return [_STANDARD.sub(lambda match: match.group(1).upper() + " ", " ".join(said.split()))]


def _ratings(entry: Map, trust: Trust, remark: str) -> list[Fact]:
    facts: list[Fact] = []
    lines: dict[str, int] = {}
    for section, names in (("ratings", tuple(RATINGS)), ("body", ("clearance", "creepage", "through_insulation"))):
        node = entry.take(section)
        keys = node.map() if node else None
        for name in names if keys else ():
            figure = keys.take(name) if keys else None
            if figure is None:
                continue
            if name in lines:
                raise figure.error(f"is given twice (first in line {lines[name]})", remedy="Keep one of them.")
            lines[name] = figure.line
            facts.append(_figure(f"rating:{name}", RATINGS[name], figure, trust, remark))
        if keys and section == "body":
            group = keys.take("material_group")
            if group:
                facts.append(_fact("material_group", group.one_of(MATERIAL_GROUPS), group, trust, remark))
        if keys:
            keys.done()
    return facts


def _figure(attribute: str, unit: str, node: Node, trust: Trust, remark: str) -> Fact:
    found = quantity(node, unit) if unit != "degC" else span(node, unit)
    value = found.value if isinstance(found, Quantity) else found.high  # of a temperature range, the end that limits
    if value <= 0 and unit != "degC":
        raise node.error("is not above zero", expected="a figure above zero")
    text = "; ".join(word for word in (found.text, remark) if word)
    return Fact(attribute, value, source_of(node), trust, unit, found.form, text)


def _fact(attribute: str, value: str | bool, node: Node, trust: Trust, remark: str) -> Fact:
    return Fact(attribute, value, source_of(node), trust, text=remark)


def claims(head: str) -> bool:
    """Whether this is YAML with our schema or a top-level key `parts`."""
    return head[:1] not in ("<", "(") and _CLAIM.search(head) is not None


def read(blob: Blob) -> Reading:
    """The rows of a parts file, in file order; raises InputError."""
    root = load(blob, SCHEMA)
    parts = root.take("parts")
    root.done()
    if parts is not None and parts.kind == "map":
        raise parts.error(
            "has the wrong shape", expected="a list of {match: ..., kind: ...}; parts by reference stand in a declaration"
        )
    rows = tuple(_row(item) for item in (parts.items() if parts else ()))
    empty = (Note("empty", "the parts file lists no part", (Source(blob.path),)),)
    return Reading("parts", "parts file", blob.path, blob.sha256, rows=rows, notes=() if rows else empty)


def _row(node: Node) -> Row:
    entry = node.map()
    match = entry.need("match", "match: {type: ABC-123} or match: {ref: [U1]}")
    keys = match.map()
    types, refs = keys.take("type"), keys.take("ref")
    keys.done()
    if (types is None) == (refs is None):
        raise match.error("does not name one way to find the part", found="both" if types else "neither", expected="type or ref")
    windings = entry.peek("windings") or node
    found = stated(entry, Trust.PARTS_FILE)
    entry.done()
    facts = (*found.facts, *(mark.fact for mark in found.marks), *_winding_facts(windings, found.windings))
    return Row(refs.names() if refs else (), facts, source_of(node), types.names() if types else ())


def _winding_facts(node: Node, windings: tuple[Winding, ...]) -> tuple[Fact, ...]:
    """Windings as the texts a BOM would hold: `1-3, 7-8-10` and, where turns are known, `1-3:40, 7-8:6, 8-10:6`."""
    if not windings:
        return ()
    for pin in (pin for winding in windings for pin in winding.pins):
        if not _PIN_IN_TEXT.fullmatch(pin):
            raise node.error(
                "names a pin that a winding cannot", found=pin, expected="a pin without blank, comma, colon and hyphen"
            )
    facts = [Fact("windings", ", ".join("-".join(winding.pins) for winding in windings), source_of(node), Trust.PARTS_FILE)]
    sections = [
        f"{first}-{second}:{count:g}"
        for winding in windings
        for first, second, count in zip(winding.pins, winding.pins[1:], winding.turns, strict=False)
    ]
    if sections:
        facts.append(Fact("turns", ", ".join(sections), source_of(node), Trust.PARTS_FILE))
    return tuple(facts)


READER = Reader("parts file", "parts", claims, read)
