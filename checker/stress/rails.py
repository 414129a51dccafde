"""Direct voltages that something fixes: declared outputs, d.c. supplies, regulators, dividers, zeners, and names of rails.

Each gives a voltage between two nets. Who says it decides which is believed when two speak of one net: a declaration, then
the supply, then a regulator, then a divider, then the name.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from checker.model.declaration import Output
from checker.model.domain import Domain
from checker.model.fact import Fact
from checker.model.names import entry_like, ground_like, supply_volts, tokens
from checker.model.rule import Board
from checker.model.step import Step
from checker.model.terminals import ANODE, CATHODE, GROUND, SUPPLY, anode_and_cathode, coupler, named

NAMED = 0.10  # tolerance of a voltage that only a name states (common practice, no source)
RESISTORS, REFERENCE, ZENER = 0.05, 0.02, 0.05  # tolerances when none is stated (common practice, no source)
ZENER_MOST = 1.1  # of the nominal voltage while it clamps, tolerance and heat included (common practice, no source)
LED = (1.0, 1.3)  # V, forward drop of a coupler's diode (common practice, no source)
_BESIDE_VOLTS = frozenset("ISO OUT SEC A B C D P AUX MAIN DC VCC VDD VOUT V SYS LOGIC REG STBY SB DIG ANA EXT USB RAIL".split())
_VOLTS = re.compile(r"(?<![\d.,x-])(\d{1,3}(?:[.,]\d{1,2})?) ?V(?![A-Za-z\d~])")
_OUTPUT = re.compile(r"(?<![A-Za-z])(?:V?OUT|OUTPUT|SORTIE|AUSGANG|SALIDA|USCITA|V?OUT[+-])(?![A-Za-z])", re.IGNORECASE)
TOUCHED = 60.0  # V; above this a connector's figure is rather its rating
_PLAIN_FIGURE = re.compile(r"[+-]?(\d{1,3}V\d{0,2}|V\d{1,2}V?\d?)")

SUPPLY_TRUST = 4


@dataclass(frozen=True, slots=True)
class Rail:
    """`low` to `high` volts from `back` to `net`; negative below it. trust: how much it is believed, the higher wins.

    both: either net follows from the other; False for what only keeps `net` near `back`. fed: by the board, not by a supply.
    """

    net: str
    back: str
    low: float
    high: float
    step: Step
    trust: int
    both: bool = True

    @property
    def fed(self) -> bool:
        """Whether it lives on what the board transforms or regulates."""
        return self.trust != SUPPLY_TRUST


def _rail(net: str, back: str, volts: float, spread: float, step: Step, trust: int) -> Rail:
    low, high = sorted((volts * (1 - spread), volts * (1 + spread)))
    return Rail(net, back, low, high, step, trust)


def rails(board: Board, grounds: Mapping[str, str]) -> Iterator[Rail]:
    """Every voltage that something fixes. grounds: domain name -> its reference net."""
    for output in board.declaration.outputs:
        yield from _declared(board, output, grounds)
    yield from _direct_supply(board, grounds)
    for ref, candidate in board.choice.items():
        if not board.design.parts[ref].fitted:
            continue
        if candidate.kind == "regulator":
            yield from _regulator(board, ref)
        elif candidate.kind == "shunt-reference":
            yield from _shunt_reference(board, ref)
        elif candidate.kind == "zener":
            yield from _zener(board, ref)
        elif candidate.kind == "optocoupler":
            yield from _zener_and_led(board, ref, grounds)
    for name, domain in board.isolation.domains.items():
        if name in grounds and domain.hazard != "mains":
            yield from _by_name(board, domain, grounds[name])
            yield from _by_connector(board, domain, grounds[name])


def grounds(board: Board) -> dict[str, str]:
    """Domain name -> its reference net: the return of a declared output, else a net that is ground by its name, or by what hangs on
    it, else the busiest net. Ties go by name, so that every form of a file gives the same."""
    found: dict[str, str] = {}
    domain_of = board.isolation.domain_of
    for output in board.declaration.outputs:
        if output.return_net in domain_of:
            found.setdefault(domain_of[output.return_net], output.return_net)
    for name, domain in board.isolation.domains.items():
        if name not in found and domain.nets and domain.hazard != "mains":
            nets = [net for net in domain.nets if net in board.design.nets]
            low = {net: _low(board, net) for net in nets}
            alike = [net for net in nets if ground_like(net)] or [net for net in nets if low[net] > 0] or nets
            if alike:
                found[name] = min(
                    alike,
                    key=lambda net: (
                        -max(low[net], 0) if not ground_like(net) else 0,
                        -len(board.design.nets[net].pins),
                        supply_volts(net) is not None or net[:1] in "V+",
                        net,
                    ),
                )
    return found


def _low(board: Board, net: str) -> int:
    """How many parts say by the names of their pins that a net is ground, less those that say that it is a supply."""
    score = 0
    for ref, number in board.design.nets[net].pins:
        if ref not in board.choice or not board.design.parts[ref].fitted:
            continue
        kind = board.kind(ref)
        name = next((pin.name.strip().upper() for pin in board.design.parts[ref].pins if pin.number == number), "")
        if kind in ("ic", "controller", "regulator", "module"):
            score += (name in GROUND) - (name in SUPPLY)
        elif kind == "capacitor":
            score += (name == "-") - (name == "+")
        elif kind == "shunt-reference":
            score += name in ANODE
    return score


def _declared(board: Board, output: Output, grounds: Mapping[str, str]) -> Iterator[Rail]:
    domain = board.isolation.domain_of.get(output.net)
    back = output.return_net or (grounds.get(domain, "") if domain else "")
    if domain is None or not back or board.isolation.domain_of.get(back) != domain or back == output.net:
        return
    text = output.voltage.text or f"{output.voltage.high:g} V"
    fact = Fact("output", output.net, output.voltage.source, text=f"{output.net}: {text}")
    step = Step(f"{output.net} is declared as {text} against {back}", (fact,), result=output.voltage.high, unit="V", form="dc")
    yield Rail(output.net, back, output.voltage.low, output.voltage.high, step, 5)


def _direct_supply(board: Board, grounds: Mapping[str, str]) -> Iterator[Rail]:
    """A declared d.c. supply between the two poles of a connector of its side."""
    for supply in board.setting.supplies:
        if supply.kind != "dc":
            continue
        for domain in board.isolation.domains.values():
            back = grounds.get(domain.name)
            if domain.hazard != "dc" or back is None:
                continue
            for ref in domain.parts:
                nets = [net for net in board.design.parts[ref].nets() if net in domain.nets]
                if board.kind(ref) == "connector" and len(nets) == 2 and back in nets:
                    net = nets[1 - nets.index(back)]
                    if not _is_above(board, net, back):
                        continue
                    fact = Fact("supply", supply.voltage.text or f"{supply.voltage.high:g} V", supply.source)
                    step = Step(
                        f"the supply of {supply.voltage.high:g} V comes in at {ref} between {net} and {back}",
                        (fact, board.design.parts[ref].fact), result=supply.voltage.high, unit="V", form="dc",
                    )  # fmt: skip
                    yield Rail(net, back, supply.voltage.high, supply.voltage.high, step, SUPPLY_TRUST)
                    return


def _is_above(board: Board, net: str, back: str) -> bool:
    """Whether anything says which of two nets is the higher: a declared return, names, pins of circuits, polarised capacitors."""
    returned = any(output.return_net == back for output in board.declaration.outputs)
    named_so = ground_like(back) or supply_volts(net) is not None or entry_like(net) or (net.endswith("+") and back.endswith("-"))
    return returned or named_so or _low(board, back) > 0 or _low(board, net) < 0


def _regulator(board: Board, ref: str) -> Iterator[Rail]:
    """A fixed linear regulator holds its output, an adjustable one by its divider."""
    part, candidate = board.design.parts[ref], board.choice[ref]
    out = named(part, ("OUT", "VO", "VOUT", "OUTPUT", "O"))
    back = named(part, ("GND", "G", "ADJ/GND", "GND/ADJ", "COM", "VSS"))
    stated, reference = candidate.ratings.get("output"), candidate.ratings.get("reference")
    if len(out) != 1:
        return
    if stated is not None and len(back) == 1:
        volts = float(stated.value)
        step = Step(
            f"{ref} regulates {volts:g} V from {out[0]} to {back[0]}", (stated, part.fact), result=volts, unit="V", form="dc"
        )
        yield _rail(out[0], back[0], volts, RESISTORS, step, 3)
    adjust = named(part, ("ADJ", "ADJ/GND", "GND/ADJ"))
    if reference is not None and stated is None and len(adjust) == 1:
        top = _resistance(board, out[0], adjust[0])
        for net, bottom in _resistors_from(board, adjust[0], {out[0]}).items():
            if top is not None:
                yield _divided(board, ref, reference, bottom, top, out[0], net, 3)
                return


@dataclass(frozen=True, slots=True)
class _Resistance:
    low: float
    high: float
    nominal: float
    refs: tuple[str, ...]


def _shunt_reference(board: Board, ref: str) -> Iterator[Rail]:
    """A shunt reference holds its sensed rail at Vref x (1 + top/bottom), when it pulls a coupler's diode or the rail itself."""
    part, candidate = board.design.parts[ref], board.choice[ref]
    reference = candidate.ratings.get("reference")
    sense, anode, cathode = named(part, ("REF", "R", "ADJ", "FB")), named(part, ANODE), named(part, CATHODE)
    if reference is None or not (len(sense) == len(anode) == len(cathode) == 1):
        return
    if sense == cathode:
        volts = float(reference.value)
        step = Step(f"{ref} holds {cathode[0]} at its reference", (reference, part.fact), result=volts, unit="V", form="dc")
        yield Rail(cathode[0], anode[0], volts * (1 - REFERENCE), volts * (1 + REFERENCE), step, 3)
        return
    bottom = _resistance(board, sense[0], anode[0])
    tops = _resistors_from(board, sense[0], {anode[0]})
    if bottom is None or len(tops) != 1 or not _regulates(board, cathode[0], next(iter(tops))):
        return
    net, top = next(iter(tops.items()))
    yield _divided(board, ref, reference, top, bottom, net, anode[0], 2)


def _regulates(board: Board, cathode: str, rail: str) -> bool:
    """Whether the cathode pulls current through a coupler's diode, or through a resistor from the rail it senses."""
    for ref in board.fitted_on(cathode):
        if board.kind(ref) == "optocoupler" or rail == cathode:
            return True
        if board.kind(ref) == "resistor":
            for net in board.design.parts[ref].nets():
                if net != cathode and (net == rail or any(board.kind(other) == "optocoupler" for other in board.fitted_on(net))):
                    return True
    return False


def _divided(
    board: Board, ref: str, reference: Fact, top: _Resistance, bottom: _Resistance, net: str, back: str, trust: int
) -> Rail:
    """Reference across `bottom`, sensed rail across both: V = Vref x (1 + top/bottom)."""
    volts = float(reference.value)
    tolerance = board.choice[ref].tolerance
    spread = min(0.1, float(tolerance.value) / 100) if tolerance is not None and tolerance.unit == "%" else REFERENCE
    facts = tuple(fact for name in (*top.refs, *bottom.refs) if (fact := board.choice[name].value) is not None)
    found = volts * (1 + top.nominal / bottom.nominal)
    step = Step(
        f"{ref} holds {net} by the divider {', '.join(top.refs)} over {', '.join(bottom.refs)} against {back}",
        (reference, *facts), formula="Vref x (1 + R_top / R_bottom)", result=found, unit="V", form="dc",
    )  # fmt: skip
    low = volts * (1 - spread) * (1 + top.low / bottom.high)
    return Rail(net, back, low, volts * (1 + spread) * (1 + top.high / bottom.low), step, trust)


def _resistance(board: Board, one: str, other: str) -> _Resistance | None:
    """What fitted resistors directly between two nets make together."""
    conductance = [0.0, 0.0, 0.0]
    refs = []
    for ref in board.fitted_on(one):
        value = board.choice[ref].value
        if board.kind(ref) != "resistor" or value is None or set(board.design.parts[ref].nets()) != {one, other}:
            continue
        ohms = float(value.value)
        if ohms <= 0:
            return None
        spread = resistor_tolerance(board, ref)
        refs.append(ref)
        for at, factor in enumerate((1 + spread, 1 - spread, 1.0)):
            conductance[at] += 1 / (ohms * factor)
    return _Resistance(1 / conductance[1], 1 / conductance[0], 1 / conductance[2], tuple(refs)) if refs else None


def _resistors_from(board: Board, net: str, without: set[str]) -> dict[str, _Resistance]:
    """Far net -> resistance from `net`, leaving out networks that only a capacitor ends."""
    found = {}
    for ref in board.fitted_on(net):
        for other in board.design.parts[ref].nets() if board.kind(ref) == "resistor" else ():
            if other != net and other not in without and not _blocked(board, other, ref):
                resistance = _resistance(board, net, other)
                if resistance is not None:
                    found[other] = resistance
    return found


def _blocked(board: Board, net: str, ref: str) -> bool:
    """Whether nothing but capacitors hangs on a net beside one part: no direct current flows there."""
    return all(board.kind(other) in ("capacitor", "test-point") for other in board.fitted_on(net) if other != ref)


def resistor_tolerance(board: Board, ref: str) -> float:
    """The stated tolerance of a resistor as a ratio, else RESISTORS."""
    tolerance = board.choice[ref].tolerance
    return float(tolerance.value) / 100 if tolerance is not None and tolerance.unit == "%" else RESISTORS


def _zener(board: Board, ref: str) -> Iterator[Rail]:
    """A zener across a net keeps it from nothing to its voltage above the other, whatever feeds it."""
    pins, volts = anode_and_cathode(board.design.parts[ref]), zener_voltage(board, ref)
    if pins is not None and volts is not None:
        anode, cathode = pins
        high = volts.value if isinstance(volts.value, float) else 0.0
        step = Step(
            f"{ref} keeps {cathode} at most {high:g} V above {anode}", (volts, board.design.parts[ref].fact), result=high, unit="V"
        )
        yield Rail(cathode, anode, 0.0, high * ZENER_MOST, step, 0, both=False)


def zener_voltage(board: Board, ref: str) -> Fact | None:
    """The nominal voltage of a zener, V: its value, else what its type says."""
    found = board.choice[ref].value or board.choice[ref].ratings.get("zener_voltage")
    return found if found is not None and found.unit == "V" else None


def _zener_and_led(board: Board, ref: str, grounds: Mapping[str, str]) -> Iterator[Rail]:
    """A zener in series with a coupler's diode, from a rail to its return, holds the rail at their sum."""
    pins_of = coupler(board.design.parts[ref])
    if pins_of is None:
        return
    ends = pins_of[:2]
    domain = board.isolation.domain_of.get(ends[0])
    back = grounds.get(domain) if domain is not None else None
    if back is None or (ends[1] != back and ends[0] == back):
        return
    for at, net in enumerate(ends):
        for zener in board.fitted_on(net):
            pins = anode_and_cathode(board.design.parts[zener]) if board.kind(zener) == "zener" else None
            value = board.choice[zener].value or board.choice[zener].ratings.get("zener_voltage")
            if pins is None or value is None or net not in pins:
                continue
            anode, cathode = pins
            above, below = (
                (cathode, ends[1]) if at == 0 and anode == net else (ends[0], anode) if at and cathode == net else ("", "")
            )
            if above and below == back and above != back:
                volts = float(value.value)
                step = Step(
                    f"{zener} in series with the diode of {ref} holds {above} against {back}",
                    (value, board.design.parts[ref].fact),
                    formula="Vz + V_LED", result=volts + sum(LED) / 2, unit="V", form="dc", citation="common practice, no source",
                )  # fmt: skip
                yield Rail(above, back, volts * (1 - ZENER) + LED[0], volts * (1 + ZENER) + LED[1], step, 2)


def _by_name(board: Board, domain: Domain, back: str) -> Iterator[Rail]:
    for net in domain.nets:
        volts = supply_volts(net)
        if volts is None or net == back or board.design.nets[net].automatic or volts > 60:
            continue
        rest = [word for word in tokens(net) if not _PLAIN_FIGURE.fullmatch(word)]
        if not set(rest) <= _BESIDE_VOLTS:
            continue
        if net.rsplit("/", 1)[-1].startswith("-"):
            volts = -volts
        step = Step(f"{net} is named after {volts:g} V", (board.design.nets[net].fact,), result=volts, unit="V", form="dc")
        yield _rail(net, back, volts, NAMED, step, 1)


def _by_connector(board: Board, domain: Domain, back: str) -> Iterator[Rail]:
    """The voltage that the text of an output connector of two nets states: `12V OUT`, `sortie LED 36V 550mA`."""
    for ref in domain.parts:
        part = board.design.parts[ref]
        nets = part.nets()
        if board.kind(ref) != "connector" or not part.fitted or len(nets) != 2 or back not in nets:
            continue
        for fact in (fact for fact in part.facts if fact.attribute in ("value", "description")):
            text = str(fact.value)
            found = {float(volts.replace(",", ".")) for volts in _VOLTS.findall(text)}
            if len(found) == 1 and _OUTPUT.search(text) and (volts := found.pop()) <= TOUCHED:
                net = nets[0] if nets[1] == back else nets[1]
                if not (ground_like(back) or (net.endswith("+") and back.endswith("-"))):
                    continue  # which of the two is above the other is not said
                step = Step(f"{ref} says {text[:60]!r}: {net} is at {volts:g} V", (fact,), result=volts, unit="V", form="dc")
                yield _rail(net, back, volts, NAMED, step, 1)
                break
