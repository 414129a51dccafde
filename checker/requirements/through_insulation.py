"""Distance through insulation: a fixed one by grade above class ES2, whatever the voltage; none for basic insulation.

Base: IEC 62368-1:2018 5.4.4.2; class ES2 up to 1 kHz by table 4: 120 V d.c., 70.7 V peak.
"""

from __future__ import annotations

from checker.model.requirement import Required
from checker.model.step import Step
from checker.requirements.duty import Duty


def through_insulation(duty: Duty) -> Required | None:
    """The distance needed, in mm; None where the ruleset asks for none."""
    table = duty.table("through-insulation.table")
    row = table.find(duty.wanted) if table is not None else None
    if table is None or row is None:
        return None
    distance = float(row["distance"] or 0.0)
    direct = duty.shape == "dc"
    limit = float(duty.basis.figures["through-insulation.above_dc" if direct else "through-insulation.above_peak"])
    if duty.peak.enough is not None and duty.peak.enough <= limit:
        return None
    sure = duty.peak.at_least > limit
    text = f"distance through {duty.wanted} insulation, as the working voltage exceeds {limit:g} V {'dc' if direct else 'peak'}"
    step = Step(f"{text}: {distance:g} mm", (duty.peak.step,), "", distance, "mm", citation=table.citation)
    missing = "" if sure else duty.peak.missing
    return Required(distance if sure else 0.0, distance, step, table.verified, missing=missing)
