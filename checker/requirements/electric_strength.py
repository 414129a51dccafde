"""Electric strength: the highest test voltage that transients, working voltage and temporary overvoltage ask for.

Test voltages are peak values and direct voltages alike; as r.m.s. they are divided by the square root of two.
Bases: IEC 62368-1:2018 5.4.9.1; IEC 60664-1:2007 5.3.3.2.2 (the temporary overvoltage, doubled for reinforced insulation).
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping

from checker.model.requirement import Required
from checker.model.verified import weakest
from checker.requirements.duty import Duty
from checker.requirements.figures import changed, highest, perhaps, read


def electric_strength(duty: Duty) -> Mapping[str, Required]:
    """The test voltage needed by form: "peak" (d.c. as well) and "rms"; empty when the ruleset asks for none."""
    found = list(_asked(duty))
    if not found:
        return {}
    peak = highest(found, "test voltage")
    root = math.sqrt(2)
    return {"peak": peak, "rms": changed(peak, lambda volts: volts / root, "the same as r.m.s.", "U / sqrt(2)", form="rms")}


def _asked(duty: Duty) -> Iterator[Required]:
    outside = duty.sources
    for name, source, what in (
        ("transient", outside.impulse, "transients"),
        ("temporary", outside.mains, "temporary overvoltage of the mains"),
    ):
        table = duty.table(f"electric-strength.{name}")
        if table is not None and source is not None:
            found = read(table, (duty.grade,), source, f"test voltage by {what}, {duty.grade} insulation")
            # what rests on a voltage that may not be there at all is itself not sure
            yield found if source.at_least else perhaps(found, found.missing or source.missing)
    for name, voltage, what in (
        ("working", duty.peak, "the peak working voltage"),
        ("overvoltage", outside.temporary, "temporary overvoltage"),
    ):
        table = duty.table(f"electric-strength.{name}")
        row = table.find(duty.grade) if table is not None else None
        if table is not None and row is not None and voltage is not None:
            yield _share(voltage, float(row["factor"] or 0.0), what, duty.grade, table.citation, table.verified)


def _share(voltage: Required, factor: float, what: str, grade: str, citation: str, verified: str) -> Required:
    text, verified = f"test voltage by {what}, {grade} insulation", weakest(voltage.verified, verified)
    return changed(voltage, lambda volts: volts * factor, text, f"{factor:g} x U", citation, verified=verified)
