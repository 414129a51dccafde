"""Do parts with a polarity stand the right way round?

Judged where the stress stage knows which of two nets is surely above the other all the time:

- an electrolytic capacitor: pin + above pin -, by the names of its pins, or by the symbol of a polarised capacitor, whose pin 1
  is + (from memory);
- a rectifier diode whose anode is always more than 2 V above its cathode conducts all the time or dies; so does one whose
  cathode is a winding end: a winding has no mean voltage, so the diode feeds the rail into the winding's other end;
- a zener diode or a suppressor with anode and cathode: the cathode above the anode, else it conducts like any diode;
- the diode of a coupler: the anode above the cathode, else the coupler never switches;
- a rectifier bridge: + above -.

Pass: the part stands right. Fail: it stands the wrong way round. Open: every capacitor drawn with one symbol would stand the
wrong way round by its pin numbers, so that the numbering of the symbol is in doubt. Nothing: parts whose pins do not tell their
polarity, and nets of which neither is surely above the other.

To settle it: pins named `+` and `-`, or `A` and `K`, in the symbol.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.circuit import Part
from checker.model.clause import Clause, Subject
from checker.model.fact import Fact
from checker.model.rule import Analysis, Rule
from checker.model.step import Step
from checker.model.terminals import anode_and_cathode, bridge, coupler, named
from checker.model.verdict import Missing, Verdict, Words
from checker.rules.part_voltage import is_polarised

FORWARD = 2.0  # V; no silicon diode in use has more in its forward direction (common practice, no source)
_PLUS, _MINUS = ("+", "POS", "P", "V+"), ("-", "NEG", "N", "V-")
_BOTH_WAYS = ("BIDIR", "BI-DIR", "814", "AC INPUT", "AC-INPUT")
_WHAT = "Polarity of a part."


@dataclass(frozen=True, slots=True)
class Params:
    """No parameters."""


@dataclass(frozen=True, slots=True)
class _Way:
    """How a part has to stand: net `above` over net `below`. wrong: what happens when it does not.

    least: volts that must be sure before it counts as wrong. numbered: the symbol's name whose numbers alone tell the polarity.
    proof: whether standing right is worth a verdict. mean: its mean voltage tells as well.
    """

    above: str
    below: str
    how: str
    wrong: str
    least: float = 0.0
    numbered: str = ""
    proof: bool = True
    mean: bool = False


def ask(analysis: Analysis, clause: Clause) -> Iterator[Verdict]:
    """One verdict per part whose polarity and voltage are both known."""
    ways = {ref: way for ref in analysis.choice if analysis.design.parts[ref].fitted and (way := _way(analysis, ref)) is not None}
    signs = {ref: analysis.stress.sign(way.above, way.below) for ref, way in ways.items()}
    means = {ref: signs[ref] or analysis.stress.mean_sign(way.above, way.below) for ref, way in ways.items() if way.mean}
    doubted = _doubted(ways, {**signs, **means})
    for ref, way in ways.items():
        if signs[ref] > 0 and way.proof:
            yield _told(analysis, clause, ref, way, "pass")
        elif (signs[ref] < 0 and _surely(analysis, way) > way.least) or (not signs[ref] and means.get(ref, 0) < 0):
            yield _told(analysis, clause, ref, way, "open" if way.numbered in doubted else "fail")


def _doubted(ways: dict[str, _Way], signs: dict[str, int]) -> frozenset[str]:
    """Symbols that tell the polarity by number, are used twice or more, and always the wrong way round."""
    of_symbol: dict[str, list[int]] = {}
    for ref, way in ways.items():
        if way.numbered and signs[ref]:
            of_symbol.setdefault(way.numbered, []).append(signs[ref])
    return frozenset(name for name, found in of_symbol.items() if len(found) > 1 and max(found) < 0)


def _surely(analysis: Analysis, way: _Way) -> float:
    voltage = analysis.stress.between(way.above, way.below)
    return 0.0 if voltage is None else voltage.peak.surely


def _way(analysis: Analysis, ref: str) -> _Way | None:
    """How the part has to stand; None for parts without a polarity and for those whose pins do not tell it."""
    part, kind = analysis.design.parts[ref], analysis.kind(ref)
    if any(pin.usual for pin in part.pins):
        return None
    if kind == "capacitor":
        return _of_capacitor(analysis, part)
    if kind in ("diode", "zener", "tvs"):
        ends = anode_and_cathode(part)
        if ends is None or len(part.nets()) != 2 or _both_ways(part):
            return None
        how, wrong = "its cathode above its anode", "its anode is above its cathode, it conducts all the time"
        return _Way(ends[1], ends[0], how, wrong, least=FORWARD, mean=kind == "diode")
    if kind == "bridge" and (poles := bridge(part)) is not None:
        return _Way(poles[0], poles[1], "its + above its -", "its + is below its -, it shorts the supply", FORWARD, proof=False)
    if kind == "optocoupler" and not _both_ways(part) and (pins := coupler(part)) is not None:
        return _Way(pins[0], pins[1], "its anode above its cathode", "its anode is below its cathode, it never lights")
    return None


def _of_capacitor(analysis: Analysis, part: Part) -> _Way | None:
    plus, minus = named(part, _PLUS), named(part, _MINUS)
    how, wrong = "its + above its -", "its + is below its -"
    if len(plus) == len(minus) == 1 and plus != minus:
        return _Way(plus[0], minus[0], how, wrong, mean=True)
    at = {pin.number: pin.net for pin in part.pins}
    one, two = at.get("1"), at.get("2")
    if plus or minus or set(at) != {"1", "2"} or one is None or two is None or not is_polarised(analysis, part.ref):
        return None
    return _Way(one, two, "pin 1, its +, above pin 2", "pin 1, its +, is below pin 2", numbered=part.text("symbol"), mean=True)


def _both_ways(part: Part) -> bool:
    """Whether the text says that the part has no polarity: suppressors named ..CA, a.c.-input couplers."""
    said = " ".join(part.text(name) for name in ("value", "type", "description", "symbol")).upper()
    numbers = (part.text("value").upper(), part.text("type").upper())
    suppressor = any(text.startswith(("SM", "P4", "P6", "1.5KE", "5KP", "15KP")) and "CA" in text for text in numbers)
    return suppressor or any(word in said for word in _BOTH_WAYS)


def _told(analysis: Analysis, clause: Clause, ref: str, way: _Way, outcome: str) -> Verdict:
    voltage = analysis.stress.between(way.above, way.below)
    facts = (analysis.design.parts[ref].fact, *(analysis.design.nets[net].fact for net in (way.above, way.below)))
    inputs: tuple[Step | Fact, ...] = facts if voltage is None else (voltage.peak.step, *facts)
    subject = Subject((ref,), (way.above, way.below), key=(ref, "polarity"))
    if outcome == "pass":
        because = f"{ref} stands with {way.how}: {way.above} is always above {way.below}"
        return clause.passes(subject, _WHAT, because, Step(because, inputs), found=Words(f"{way.above} above {way.below}"))
    when = "always" if analysis.stress.sign(way.above, way.below) else "on the mean of a cycle"
    because = f"{way.below} is {when} above {way.above}, and {ref} needs {way.how}: {way.wrong}"
    found = Words(f"{way.below} above {way.above}")
    if outcome == "fail":
        return clause.fails(subject, "A part stands the wrong way round.", because, Step(because, inputs), found=found)
    told = f"{because}; so does every capacitor drawn as {way.numbered}, whose pins bear no names"
    missing = Missing(
        "which pin of the symbol is +", "pins named + and - in the symbol", (("pin 1", "fail"), ("pin 2", "pass")), ref
    )
    return clause.opens(subject, _WHAT, told, Step(told, inputs), missing, found=found)


RULE = Rule("polarity", "overstress", Params, ask, __doc__ or "")
