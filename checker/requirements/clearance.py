"""Clearance: the highest of what the steady and temporary voltages ask and what the transients ask, then the altitude.

Procedure 1: the highest of the peak working voltage and the temporary overvoltage, read in the table of steady voltages; a
working voltage of high frequency in a table of its own as well. Procedure 2: the required impulse withstand voltage, read in
the table of transients. Reinforced insulation has columns of its own, or, where a ruleset names the preferred series of
impulse voltages, is basic insulation for the next step of the series and for 160 % of any other voltage.
Bases: IEC 62368-1:2018 5.4.2.2, 5.4.2.3, 5.4.2.5; IEC 60664-1:2007 5.1.6.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from checker.formulas.lookup import NOISE, last, rounded
from checker.model.requirement import Required
from checker.model.step import Step
from checker.model.table import Table
from checker.model.verified import weakest
from checker.requirements.duty import Duty
from checker.requirements.figures import changed, highest, perhaps, read, result, said


def clearance(duty: Duty) -> Required | None:
    """The clearance needed, in mm; None when the ruleset asks for none."""
    asked = [*_of_steady(duty), *_of_transient(duty)]
    if not asked:
        return None
    found = highest(asked, "clearance")
    none = duty.sources.none
    if none is not None:
        text = f"{none.text}: {said(found)} of clearance by the working voltage alone"
        found = replace(found, step=Step(text, (found.step, none), "", result(found), "mm"))
    return _at_altitude(found, duty)


def _columns(duty: Duty) -> tuple[str, ...]:
    degree = f"pd{duty.surroundings['pollution_degree'].value}"
    own = (f"{duty.grade}_{degree}", duty.grade)
    return (
        own if duty.grade == "reinforced" and duty.table("clearance.series") is None else (*own, f"basic_{degree}", degree, "basic")
    )


def _of_steady(duty: Duty) -> Iterator[Required]:
    table, series = duty.table("clearance.steady"), duty.table("clearance.series")
    if table is not None:
        voltages = (duty.peak, duty.sources.temporary) if duty.sources.temporary is not None else (duty.peak,)
        voltage = highest(voltages, "voltage that stands or recurs")
        if series is not None and duty.grade == "reinforced":
            voltage = _share(voltage, duty)
        what = f"clearance for steady and temporary voltages, {duty.place('pollution_degree')}"
        yield read(table, _columns(duty), voltage, what, (duty.surroundings["pollution_degree"],))
    fast = duty.table("clearance.high_frequency")
    if fast is None:
        return
    limit = float(duty.basis.figures["clearance.frequency"])
    if duty.frequency is not None and duty.frequency <= limit:
        return
    found = by_pollution(read(fast, _columns(duty), duty.peak, f"clearance above {limit / 1000:g} kHz"), duty, "clearance", fast)
    yield found if duty.frequency is not None else perhaps(found, found.missing or "frequency of the working voltage")


def by_pollution(figure: Required, duty: Duty, rule: str, table: Table) -> Required:
    """A figure for high frequency, times the factor of the pollution degree; rounded as its table says."""
    factors = duty.table(f"{rule}.pollution")
    if factors is None:
        return figure
    fact = duty.surroundings["pollution_degree"]
    degree = float(fact.value)
    at = Required(degree, degree, Step(f"pollution degree {degree:g}", (fact,)), "true", "")
    factor = read(factors, ("factor",), at, "factor of the pollution degree")
    if factor.enough is None:
        return replace(figure, enough=None, missing=factor.missing, verified="false")
    times = factor.enough
    verified = weakest(figure.verified, factor.verified)
    if times == 1.0:
        return replace(figure, verified=verified)
    return changed(
        figure, lambda value: rounded(value * times, table.round), f"{duty.place('pollution_degree')}, times {times:g}",
        f"clearance x {times:g}" if rule == "clearance" else f"creepage x {times:g}", citation=factors.citation, verified=verified,
    )  # fmt: skip


def _share(voltage: Required, duty: Duty) -> Required:
    factor = float(duty.basis.figures["clearance.reinforced_factor"])
    return changed(voltage, lambda volts: volts * factor, f"reinforced: {100 * factor:g} % of it", f"{factor:g} x U")


def _of_transient(duty: Duty) -> Iterator[Required]:
    table, series, voltage = duty.table("clearance.withstand"), duty.table("clearance.series"), duty.sources.impulse
    if table is None or voltage is None:
        return
    if series is not None and duty.grade == "reinforced":
        voltage = _next_step(voltage, series, float(duty.basis.figures["clearance.reinforced_factor"]))
    what = f"clearance for transients, {duty.place('pollution_degree')}"
    found = read(table, _columns(duty), voltage, what, (duty.surroundings["pollution_degree"],))
    yield perhaps(found) if duty.sources.impulse is not None and not duty.sources.impulse.at_least else found


def _next_step(voltage: Required, series: Table, factor: float) -> Required:
    """The next step of the preferred series above a voltage of the series, else `factor` times it."""
    steps = [float(row[0] or 0.0) for row in series.rows]

    def higher(volts: float) -> float:
        at = next((at for at, step in enumerate(steps) if abs(step - volts) <= NOISE * step), None)
        return volts * factor if at is None or at + 1 == len(steps) else steps[at + 1]

    text = f"reinforced: the next step of the preferred series, {100 * factor:g} % of a voltage outside it"
    return changed(voltage, higher, text, "", citation=series.citation, verified=weakest(voltage.verified, series.verified))


def _at_altitude(figure: Required, duty: Duty) -> Required:
    """Times the altitude factor, rounded as the clearance tables say. No factor is known beyond the last row."""
    table = duty.table("clearance.altitude")
    if table is None:
        return figure
    fact = duty.surroundings["altitude"]
    height = float(fact.value)
    at = Required(height, height, Step(f"{duty.place('altitude')}", (fact,), "", height, "m"), "true", "m")
    factor = read(table, ("factor",), at, "altitude factor")
    way = next((t.round for name in ("clearance.withstand", "clearance.steady") if (t := duty.table(name)) is not None), "")
    verified = weakest(figure.verified, factor.verified)
    if factor.enough is None:
        end = last(table, "factor").keys[0]
        missing = f"altitude {height:g} m: no factor beyond {end:g} m"
        found = replace(
            figure, at_least=rounded(figure.at_least * factor.at_least, way), enough=None, missing=missing, verified=verified
        )
        return replace(found, step=Step(f"{missing}: {said(found)}", (figure.step, factor.step), citation=table.citation))
    times = factor.enough
    text = f"clearance at {duty.place('altitude')}"
    if times == 1.0:
        step = Step(
            f"{text}, factor 1: {said(figure)}", (figure.step, factor.step), "", result(figure), "mm", citation=table.citation
        )
        return replace(figure, step=step, verified=verified)
    formula = f"clearance x {times:g}" + (f", rounded {way}" if way else "")
    found = changed(figure, lambda value: rounded(value * times, way), text, formula, table.citation, verified=verified)
    return replace(found, step=replace(found.step, inputs=(figure.step, factor.step)))
