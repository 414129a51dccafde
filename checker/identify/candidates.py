"""The identify stage: every choice of every part gets a kind, a value, ratings, marks and windings, each with its source.

Where several places state the same thing the most trusted wins and the others stay visible; statements that cannot both be
true become disagreements.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from typing import Any

from checker.identify import catalogue, described, kinds, marks, packages, ratings, values, windings
from checker.identify.winding_names import named_turns
from checker.model.candidate import Candidate, Disagreement, Mark, Winding
from checker.model.circuit import Design, Part
from checker.model.declaration import Declaration, DeclaredPart
from checker.model.fact import Fact, Trust

# free text of a part, most telling first; links and distributor numbers are never among them
_TEXTS = ("value", "description", "type")
# what an alternate states anew; everything else it takes over from the part
_REPLACED = frozenset({"type", "maker", "description", "mark", "technology", "tolerance", "material_group", "distributor"})
DECADE = 3.0  # a factor between two statements of one value from which both cannot be meant


def identify(design: Design, declaration: Declaration) -> dict[str, tuple[Candidate, ...]]:
    """Reference -> candidates, first choice first, then one per alternate."""
    memory: dict[Any, Any] = {}

    def once(function: Callable[..., Any], *arguments: Any) -> Any:
        key = (function, *arguments)
        if key not in memory:
            memory[key] = function(*arguments)
        return memory[key]

    found = {}
    for ref, part in design.parts.items():
        declared = declaration.parts.get(ref)
        choices = [part.facts, *(_merged(part.facts, alternate) for alternate in part.alternates)]
        found[ref] = tuple(
            _candidate(part, facts, declared, "" if at == 0 else _label(part.alternates[at - 1], at), once)
            for at, facts in enumerate(choices)
        )
    return found


def _merged(facts: Sequence[Fact], alternate: Sequence[Fact]) -> tuple[Fact, ...]:
    """The facts of an alternate: its own, and those of the part where it is silent and they describe the place, not the product."""
    said = {fact.attribute for fact in alternate}
    kept = [
        fact
        for fact in facts
        if fact.trust >= Trust.DECLARED
        or (
            fact.attribute not in said
            and fact.attribute not in _REPLACED
            and not (fact.trust == Trust.BOM and fact.attribute.startswith("rating:"))
        )
    ]
    return (*kept, *alternate)


def _label(alternate: Sequence[Fact], at: int) -> str:
    named = next((str(fact.value) for fact in alternate if fact.attribute == "type"), "")
    return named or f"alternate {at}"


def _candidate(part: Part, facts: Sequence[Fact], declared: DeclaredPart | None, label: str, once: Callable[..., Any]) -> Candidate:
    judged = kinds.judge(part, facts)
    kind = judged.kind
    texts = described.own(_texts(facts), facts, kind)
    value, stated = _value(facts, texts, kind, once)
    rated, said_ratings = _ratings(facts, texts, kind, once)
    attributes = _attributes(facts, texts, judged, part, kind, once)
    ordinary = _bought_ordinary(facts, texts, kind, once)
    # what the schematic wants is no proof of what an alternate is, nor of a part the bill describes as an ordinary one
    vouched = facts if ordinary is None and not label else [fact for fact in facts if fact.trust >= Trust.BOM]
    marked = _marks(vouched, described.own(_texts(vouched), facts, kind), declared, once)
    generic = _generic(texts, once)
    if generic is not None:
        fact, found = generic
        for name, (number, unit, form) in found.ratings.items():
            rated.setdefault(
                name, Fact(f"rating:{name}", number, fact.source, Trust.CATALOGUE, unit, form, f"{found.type}: {found.source}")
            )
    if kind == "transformer":
        rated.update(_rated_voltages(texts, once))
    wound = declared.windings if declared is not None and declared.windings else _windings(facts, once)
    if kind == "transformer" and not any(winding.turns for winding in wound):
        said = tuple(_best(facts, attribute) for attribute in ("turns", "description", "value"))
        wound = once(named_turns, said, tuple((pin.number, pin.name) for pin in part.pins)) or wound
    return Candidate(
        kind=kind,
        label=label,
        sure=judged.sure,
        listed=judged.listed,
        because=judged.because,
        value=value,
        tolerance=rated.pop("tolerance", None),
        ratings=rated,
        attributes=attributes,
        marks=marked,
        windings=wound,
        maker=_best(facts, "maker"),
        type=_best(facts, "type"),
        disagreements=(
            *_value_disagreements(value, stated),
            *said_ratings,
            *_mark_disagreements(facts, texts, declared, ordinary if not label else None, once),
        ),
    )


def _texts(facts: Sequence[Fact]) -> list[Fact]:
    """The text facts worth reading, most trusted first; equal texts once."""
    found = [
        fact for attribute in _TEXTS for fact in facts if fact.attribute == attribute and isinstance(fact.value, str) and fact.value
    ]
    found.sort(key=lambda fact: -fact.trust)
    return list({(fact.attribute, fact.value): fact for fact in reversed(found)}.values())[::-1]


def _best(facts: Sequence[Fact], attribute: str) -> str:
    named = [fact for fact in facts if fact.attribute == attribute]
    return str(max(reversed(named), key=lambda fact: fact.trust).value) if named else ""


def _value(facts: Sequence[Fact], texts: Sequence[Fact], kind: str, once: Callable[..., Any]) -> tuple[Fact | None, list[Fact]]:
    """The value, and every statement of it."""
    stated: list[Fact] = []
    for fact, read in _value_texts(facts, texts):
        decoded = once(read, fact.value, kind)
        if decoded is not None:
            trust = fact.trust if decoded.sure and read is not values.part_number_value else Trust.GUESSED
            stated.append(Fact("value", decoded.value, fact.source, trust, decoded.unit, "", str(fact.value)))
    if not stated:
        return None, []
    # a statement that is only guessed (a bare number, a part number) never wins over one that says its unit
    sure = [fact for fact in stated if fact.trust > Trust.GUESSED]
    chosen = max(sure, key=lambda fact: fact.trust) if sure else stated[0]
    return chosen, stated


def _value_texts(
    facts: Sequence[Fact], texts: Sequence[Fact]
) -> Iterator[tuple[Fact, Callable[[str, str], values.Decoded | None]]]:
    """Where a value may stand, most telling first, and how it is read there. A part number may stand in the place of the value."""
    of = {attribute: [fact for fact in texts if fact.attribute == attribute] for attribute in _TEXTS}
    yield from ((fact, values.decode) for fact in of["value"])
    for fact in facts:
        read = values.FIELDS.get(fact.attribute)
        if read is not None and isinstance(fact.value, str):
            yield fact, read
    yield from ((fact, values.decode) for fact in of["description"])
    for fact in of["type"]:
        yield fact, values.whole
        yield fact, values.part_number_value
    for fact in (*of["value"], *(fact for fact in of["description"] if described.is_name("description", str(fact.value)))):
        yield fact, values.part_number_value


def _value_disagreements(kept: Fact | None, stated: Sequence[Fact]) -> list[Disagreement]:
    if kept is None:
        return []
    found = []
    for other in stated:
        one, two = float(kept.value), float(other.value)
        if other is kept or other.unit != kept.unit or one == two or one <= 0 or two <= 0:
            continue
        factor = max(one, two) / min(one, two)
        if factor >= DECADE and (other.trust > Trust.GUESSED or _near_decade(factor)):
            found.append(Disagreement("value", kept, other, factor))
    return found[:1]


def _near_decade(factor: float) -> bool:
    """Whether a factor is a power of ten within 25 %: a misread multiplier, not another part."""
    exponent = math.log10(factor)
    return round(exponent) >= 1 and abs(exponent - round(exponent)) < math.log10(1.25)


def _ratings(
    facts: Sequence[Fact], texts: Sequence[Fact], kind: str, once: Callable[..., Any]
) -> tuple[dict[str, Fact], list[Disagreement]]:
    """Ratings from columns and files first, then from free text; figures of one rating that differ are disagreements."""
    stated: dict[str, list[Fact]] = {}
    for fact in facts:
        if fact.attribute.startswith("rating:") or fact.attribute == "tolerance":
            name = fact.attribute.removeprefix("rating:")
            if isinstance(fact.value, float):
                stated.setdefault(name, []).append(fact)
            elif (rating := once(ratings.column, name, str(fact.value))) is not None:
                stated.setdefault(name, []).append(
                    Fact(fact.attribute, rating.value, fact.source, fact.trust, rating.unit, rating.form, str(fact.value))
                )
    for fact in texts:
        if fact.attribute == "type":
            continue
        found = once(ratings.read, fact.value, kind).ratings
        for name, rating in found.items():
            if name == "voltage" and described.labels(fact, kind, rating.value, with_current="current" in found):
                continue
            attribute = name if name == "tolerance" else f"rating:{name}"
            stated.setdefault(name, []).append(
                Fact(attribute, rating.value, fact.source, fact.trust, rating.unit, rating.form, str(fact.value))
            )
    chosen, disagreements = {}, []
    for name, said in stated.items():
        kept = max(said, key=lambda fact: fact.trust)
        chosen[name] = kept
        # a part with more than was asked for contradicts nobody, one with less does
        asked = [f for f in said if f.trust < kept.trust and f.form in (kept.form, "") and float(f.value) > float(kept.value)]
        if asked and name == "voltage" and kind in ("capacitor", "fuse"):
            disagreements.append(Disagreement("rating:voltage", kept, asked[0]))
    return chosen, disagreements


def _attributes(
    facts: Sequence[Fact], texts: Sequence[Fact], judged: kinds.Judged, part: Part, kind: str, once: Callable[..., Any]
) -> dict[str, Fact]:
    place = part.fact.source
    found: dict[str, Fact] = {
        name: Fact(name, text, place, Trust.CATALOGUE, text=judged.because) for name, text in judged.attributes.items()
    }
    for fact in sorted(texts, key=lambda fact: fact.trust):
        for name, (text, _) in once(ratings.read, fact.value, kind).attributes.items():
            found[name] = Fact(name, text, fact.source, fact.trust, text=str(fact.value))
    for name in ("technology", "material_group"):
        said = [fact for fact in facts if fact.attribute == name]
        if said:
            best = max(said, key=lambda fact: fact.trust)
            words = once(ratings.read, best.value, kind).attributes.get(name) if name == "technology" else None
            found[name] = Fact(name, words[0] if words else best.value, best.source, best.trust, text=str(best.value))
    footprint = next((fact for fact in reversed(facts) if fact.attribute == "footprint"), None)
    if footprint is not None:
        for name, read, unit in (
            ("package_pins", packages.body_pins, ""),
            ("pad_span", packages.pad_span, "mm"),
            ("pad_gap", packages.pad_gap, "mm"),
            ("body_width", packages.body_width, "mm"),
            ("lead_span", packages.lead_span, "mm"),
            ("size", packages.size, ""),
        ):
            value = once(read, str(footprint.value))
            if value is not None:
                shown = float(value) if isinstance(value, int | float) else value
                found.setdefault(name, Fact(name, shown, footprint.source, footprint.trust, unit, "", str(footprint.value)))
    return found


def _marks(
    facts: Sequence[Fact], texts: Sequence[Fact], declared: DeclaredPart | None, once: Callable[..., Any]
) -> tuple[Mark, ...]:
    """Marks of the most trusted source that states a class, a part number last; approvals of every source."""
    found: dict[str, Mark] = {mark.name: mark for mark in declared.marks} if declared is not None else {}
    columns = sorted((fact for fact in facts if fact.attribute == "mark"), key=lambda fact: -fact.trust)
    classed = any(name[:1] in "XY" for name in found)
    for group in (
        columns,
        [fact for fact in texts if fact.attribute != "type"],
        [fact for fact in texts if fact.attribute == "type"],
    ):
        seen_class = False
        for fact in group:
            read = marks.column if fact.attribute == "mark" else marks.read
            for name, words in once(read, fact.value):
                is_class = name in _CLASSES
                if name in found or (is_class and classed):
                    continue
                seen_class = seen_class or is_class
                record, until = _record(fact.text)
                found[name] = Mark(name, Fact("mark", name, fact.source, fact.trust, text=fact.text or words), record, until)
            classed = classed or seen_class
    return tuple(found.values())


_CLASSES = frozenset({"X1", "X2", "X3", "Y1", "Y2", "Y3", "Y4"})


def _bought_ordinary(facts: Sequence[Fact], texts: Sequence[Fact], kind: str, once: Callable[..., Any]) -> Fact | None:
    """The bill's description of a capacitor as an ordinary one: a rated voltage, and nothing of the bill states a class."""
    if kind != "capacitor":
        return None
    bought = [fact for fact in texts if fact.trust >= Trust.BOM]
    if any(fact.attribute == "mark" for fact in facts) or any(once(marks.read, fact.value) for fact in bought):
        return None
    return next(
        (fact for fact in bought if fact.attribute == "description" and "voltage" in once(ratings.read, fact.value, kind).ratings),
        None,
    )


def _record(text: str) -> tuple[str, str]:
    """`record ...; valid until 2027-01-31` as a parts file leaves it in the fact's text."""
    record = until = ""
    for piece in text.split("; "):
        if piece.startswith("record "):
            record = piece.removeprefix("record ")
        elif piece.startswith("valid until "):
            until = piece.removeprefix("valid until ")
    return record, until


def _mark_disagreements(
    facts: Sequence[Fact], texts: Sequence[Fact], declared: DeclaredPart | None, ordinary: Fact | None, once: Callable[..., Any]
) -> list[Disagreement]:
    """A class in one place and another class of the same letter, or of the other letter alone, in another."""
    stated: list[tuple[frozenset[str], Fact]] = []
    for mark in declared.marks if declared is not None else ():
        if mark.name in _CLASSES:
            stated.append((frozenset({mark.name}), mark.fact))
    for fact in [*(fact for fact in facts if fact.attribute == "mark"), *(fact for fact in texts if fact.attribute != "type")]:
        read = marks.column if fact.attribute == "mark" else marks.read
        names = frozenset(name for name, _ in once(read, fact.value)) & _CLASSES
        if names:
            stated.append((names, fact))
    if ordinary is not None and stated and stated[0][1].trust < Trust.BOM:
        return [Disagreement("mark", ordinary, stated[0][1])]
    for names, fact in stated[1:]:
        if names.isdisjoint(stated[0][0]):
            return [Disagreement("mark", stated[0][1], fact)]
    return []


def _generic(texts: Sequence[Fact], once: Callable[..., Any]) -> tuple[Fact, Any] | None:
    for fact in texts:
        named = fact.attribute in ("value", "type") or described.is_name(fact.attribute, str(fact.value))
        if named and (found := once(catalogue.find, fact.value)) is not None:
            return fact, found
    return None


def _rated_voltages(texts: Sequence[Fact], once: Callable[..., Any]) -> dict[str, Fact]:
    """Ratings `primary` and `secondary` of a mains transformer, out of the first text that states both."""
    for fact in texts:
        volts = once(windings.rated_voltages, fact.value) if fact.attribute in ("value", "description") else None
        if volts is not None:
            names = ("primary", "secondary")
            return {
                name: Fact(f"rating:{name}", figure, fact.source, fact.trust, "V", "rms", str(fact.value))
                for name, figure in zip(names, volts, strict=True)
            }
    return {}


def _windings(facts: Sequence[Fact], once: Callable[..., Any]) -> tuple[Winding, ...]:
    found: tuple[Winding, ...] = once(windings.read, _best(facts, "turns"), _best(facts, "windings"), _best(facts, "description"))
    return found
