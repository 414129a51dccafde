"""What one piece of insulation has to withstand, and where: the inputs that the four requirements share.

The working voltage is the declared one, else what the stress stage found. Across a barrier with the mains on one side no
pair is taken below the rated mains voltage. Transients come with the mains; where there is none, the declaration tells them,
else the origin of the d.c. supply.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace

from checker.model.declaration import DeclaredBarrier, Range, Supply
from checker.model.fact import Fact
from checker.model.requirement import Basis, Required
from checker.model.rule import Board
from checker.model.separation import Separation
from checker.model.step import Step
from checker.model.stress import Bounds, Stress, Voltage
from checker.model.table import Table
from checker.requirements.figures import changed, highest, perhaps, read
from checker.requirements.separations import sides

_REINFORCED = frozenset({"double", "reinforced"})
_BASIC = frozenset({"basic", "supplementary"})
_UNKNOWN_MAINS = (
    240.0  # V r.m.s.; taken for a mains nobody named, the upper end of the usual 100-240 V (common practice, no source)
)
_SQRT2 = math.sqrt(2)
ORIGIN = "origin of the d.c. supply"


@dataclass(frozen=True, slots=True)
class Sources:
    """What comes into a separation from outside. mains: its rated voltage in V r.m.s. to the neutral, None without mains.

    impulse: required impulse withstand voltage, V peak; temporary: temporary overvoltage, V peak; None when there is none.
    none: why there is no transient, where one would be looked for.
    """

    mains: Required | None = None
    impulse: Required | None = None
    temporary: Required | None = None
    none: Step | None = None


@dataclass(frozen=True, slots=True)
class Duty:
    """grade: `basic` (supplementary too) or `reinforced` (double too), the word of the tables' columns; wanted: as needed.

    rms, peak: the working voltage. frequency: Hz, None unknown. shape: as in `Voltage`, "" unknown.
    surroundings: pollution_degree, altitude, material_group.
    """

    grade: str
    wanted: str
    rms: Required
    peak: Required
    frequency: float | None
    shape: str
    sources: Sources
    surroundings: Mapping[str, Fact]
    basis: Basis

    def table(self, name: str) -> Table | None:
        """The table a parameter names, None when it names none."""
        return self.basis.tables.get(name)

    def place(self, attribute: str) -> str:
        """A fact of the surroundings for people: `pollution degree 2 (assumed)`."""
        fact = self.surroundings[attribute]
        value = f"{fact.value:g} {fact.unit}" if isinstance(fact.value, float) else str(fact.value)
        return f"{attribute.replace('_', ' ')} {value}" + ("" if fact.source.path else " (assumed)")


def word(grade: str) -> str:
    """The grade as the tables know it; "" for grades that ask for no distance (functional, none, not known)."""
    return "reinforced" if grade in _REINFORCED else "basic" if grade in _BASIC else ""


def sources(board: Board, separation: Separation, basis: Basis) -> Sources:
    """The mains and its transients at a separation, by the tables of the ruleset."""
    domains = sides(board, separation)
    mains = board.setting.mains
    if any(domain.hazard == "mains" for domain in domains):
        if mains is None:
            return Sources()
        return from_mains(rated_mains(mains, basis.figures.get("clearance.supply") == "with-tolerance"), mains, basis)
    declared = board.declaration.impulse
    if declared is not None:
        fact = Fact("impulse", declared.high, declared.source, unit="V", form="peak")
        step = Step(f"impulse withstand voltage declared as {declared.high:g} V", (fact,), "", declared.high, "V", "peak")
        return Sources(impulse=Required(declared.high, declared.high, step, "true", "V", "peak"))
    direct = [supply for supply in board.setting.supplies if supply.kind == "dc"]
    if not direct or not any(domain.hazard == "dc" for domain in domains):
        return Sources(none=Step("no mains and no d.c. supply on either side, so no transient is known", (separation.step,)))
    supply = next((one for one in direct if one.origin != "isolated"), direct[0])
    fact = Fact("origin", supply.origin or "not declared", supply.source)
    if supply.origin == "isolated":
        text = "the d.c. supply is isolated from the mains and no impulse is declared, so no transient is known"
        return Sources(none=Step(text, (fact,)))
    volts = max(_UNKNOWN_MAINS, supply.voltage.high)
    text = f"the d.c. supply hangs on a mains nobody named, taken as up to {volts:g} V"
    sure = supply.origin == "mains"
    if not sure:
        text = f"whether the d.c. supply is isolated from the mains is not said, so a mains of up to {volts:g} V is thought of"
    found = Required(0.0, volts, Step(text, (fact,), "", volts, "V", "rms"), "true", "V", "rms", ORIGIN if not sure else "impulse")
    outside = from_mains(found, supply, basis)
    if sure:
        return outside
    return replace(
        outside,
        impulse=outside.impulse and perhaps(outside.impulse, ORIGIN),
        temporary=outside.temporary and perhaps(outside.temporary, ORIGIN),
    )


def rated_mains(supply: Supply, tolerance: bool = False) -> Required:
    """The highest rated mains voltage, line to neutral; of three phases the declared voltage is from line to line."""
    volts = supply.voltage.high
    said = f"rated mains voltage {volts:g} V" + ("" if supply.voltage.source.path else " (assumed)")
    fact = Fact("supply", supply.voltage.text or f"{volts:g} V", supply.voltage.source, unit="", form="rms")
    if tolerance and supply.tolerance is not None:
        volts *= 1 + supply.tolerance.high / 100
        said += f", {volts:g} V with its tolerance"
    if supply.phases == 3:
        volts /= math.sqrt(3)
        said += f", {volts:.4g} V to the neutral of three phases"
    return Required(volts, volts, Step(said, (fact,), "", volts, "V", "rms"), "true", "V", "rms")


def from_mains(mains: Required, supply: Supply, basis: Basis) -> Sources:
    """The transients of a mains of that voltage, by the tables of the ruleset."""
    category = supply.overvoltage_category or "II"
    impulse, temporary = basis.tables.get("clearance.impulse"), basis.tables.get("clearance.temporary")
    added = float(basis.figures.get("clearance.temporary_added") or 0.0)
    found = Sources(mains=mains)
    if impulse is not None:
        what = f"transient of the mains in overvoltage category {category}"
        found = replace(found, impulse=read(impulse, (f"ovc_{category.lower()}",), mains, what))
    if temporary is not None:
        found = replace(found, temporary=read(temporary, ("overvoltage",), mains, "temporary overvoltage"))
    elif added:
        over = changed(
            mains,
            lambda volts: _SQRT2 * (volts + added),
            "temporary overvoltage",
            f"sqrt(2) x (U + {added:g} V)",
            form="peak",
            citation="IEC 60664-1 5.3.3.2.2",
            verified="partial",
        )
        found = replace(found, temporary=over)
    return found


def working(
    board: Board, stress: Stress, separation: Separation, ref: str, outside: Sources
) -> tuple[Required, Required, Voltage | None]:
    """(r.m.s., peak, the voltage they come from) across a separation, or across a part on its own pins (ref not "")."""
    found = stress.across.get((ref, separation.between)) if ref else stress.barriers.get(separation.id)
    whole = stress.barriers.get(separation.id)
    named = found or (whole if not ref else None)
    ends = " and ".join(named.worst if named is not None and named.worst[0] else _ends(board, separation, ref))
    missing = f"working voltage between {ends}"
    nothing = Step(f"nothing that was read bounds the voltage between {ends}", (separation.step,))
    if found is not None:
        rms, peak = _bounds(found.rms, missing), _bounds(found.peak, missing)
    elif ref and whole is not None:
        rms, peak = perhaps(_bounds(whole.rms, missing), missing), perhaps(_bounds(whole.peak, missing), missing)
    else:
        rms = Required(0.0, None, nothing, "true", "V", "rms", missing)
        peak = Required(0.0, None, nothing, "true", "V", "peak", missing)
    barrier = next((one for one in board.declaration.barriers if frozenset(one.between) == frozenset(separation.between)), None)
    if barrier is not None and (barrier.rms is not None or barrier.peak is not None):
        rms, peak = _declared(barrier, peak)
    if outside.mains is not None:
        crest = changed(outside.mains, lambda volts: _SQRT2 * volts, "crest of the mains", "sqrt(2) x U", form="peak")
        what = "voltage across the barrier, not taken below the rated mains voltage"
        rms, peak = highest((rms, outside.mains), what), highest((peak, crest), what)
    return rms, peak, found or whole


def _bounds(found: Bounds, missing: str) -> Required:
    settled = "" if found.surely == found.never_above else missing
    return Required(found.surely, found.never_above, found.step, "true", "V", found.form if found.form != "dc" else "", settled)


def _declared(barrier: DeclaredBarrier, peak: Required) -> tuple[Required, Required]:
    """The declared working voltage. Only r.m.s. declared: a sine, unless the circuit tells the peak; only peak: r.m.s. up to it."""
    one, two = barrier.between
    if barrier.rms is not None:
        rms = _exact(barrier.rms, f"working voltage declared between {one} and {two}", "rms")
        if barrier.peak is None and (peak.enough is None or peak.enough < rms.at_least):
            return rms, changed(rms, lambda volts: _SQRT2 * volts, "its peak, taken as that of a sine", "sqrt(2) x U", form="peak")
    if barrier.peak is not None:
        peak = _exact(barrier.peak, f"peak working voltage declared between {one} and {two}", "peak")
        if barrier.rms is None:
            text = f"r.m.s. working voltage between {one} and {two}, at most its declared peak"
            step = Step(text, (peak.step,), "", peak.enough, "V", "rms")
            return Required(0.0, peak.enough, step, "true", "V", "rms", f"r.m.s. working voltage between {one} and {two}"), peak
    return rms, peak


def _exact(figure: Range, what: str, form: str) -> Required:
    fact = Fact("working_voltage", figure.high, figure.source, unit="V", form=form)
    step = Step(f"{what}: {figure.high:g} V {form}", (fact,), "", figure.high, "V", form)
    return Required(figure.high, figure.high, step, "true", "V", form)


def _ends(board: Board, separation: Separation, ref: str) -> tuple[str, str]:
    """The first net of a part on each side, or the names of the two sides."""
    crossing = next((one for one in board.isolation.crossing(ref) if one.between == separation.between), None) if ref else None
    if crossing is None:
        return separation.between
    nets = {pin.number: pin.net for pin in board.design.parts[ref].pins if pin.net is not None}
    first = [
        next((nets[pin] for pin in side if pin in nets), name) for side, name in zip(crossing.sides, crossing.between, strict=True)
    ]
    return first[0], first[1]
