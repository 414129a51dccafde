"""Creepage: by the r.m.s. working voltage, pollution degree and material group; never below the clearance.

Read in the table, interpolated and rounded as it says, then doubled for reinforced insulation (round first: 281 V is
2.81 -> 2.9 -> 5.8 mm). Above the frequency limit the higher of this and a table by peak voltage and frequency applies.
Bases: IEC 62368-1:2018 5.4.3; IEC 60664-1:2007 5.2.
"""

from __future__ import annotations

from dataclasses import replace

from checker.formulas.lookup import column_of, look_up
from checker.model.requirement import Required
from checker.model.table import Table
from checker.requirements.clearance import by_pollution
from checker.requirements.duty import Duty
from checker.requirements.figures import changed, highest, perhaps, read

GROUPS = {"I": ("i",), "II": ("ii",), "IIIa": ("iiia", "iii"), "IIIb": ("iiib", "iii")}
NEXT_ROW = "next-higher"


def creepage(duty: Duty, clearance: Required | None) -> Required | None:
    """The creepage needed, in mm; None when the ruleset asks for none. clearance: what the same insulation needs in air."""
    table = duty.table("creepage.table")
    if table is None:
        return None
    columns = _columns(duty)
    what = f"creepage of basic insulation, {duty.place('pollution_degree')}, {duty.place('material_group')}"
    places = (duty.surroundings["pollution_degree"], duty.surroundings["material_group"])
    between = str(duty.basis.figures["creepage.between_rows"])
    found = highest(
        (read(table, columns, duty.rms, what, places, between), *_of_high_frequency(duty)), "creepage of basic insulation"
    )
    if duty.grade == "reinforced":
        factor = float(duty.basis.figures["creepage.reinforced_factor"])
        text = f"creepage of reinforced insulation{_by_the_next_row(table, columns, duty.rms, factor, found)}"
        found = changed(found, lambda value: round(value * factor, 9), text, f"{factor:g} x creepage", citation=table.citation)
    return found if clearance is None else highest((found, clearance), "creepage, not below the clearance")


def _columns(duty: Duty) -> tuple[str, ...]:
    """From the most specific: pd2_iiib, pd2_iii, pd2."""
    degree, group = f"pd{duty.surroundings['pollution_degree'].value}", str(duty.surroundings["material_group"].value)
    return (*(f"{degree}_{name}" for name in GROUPS.get(group, (group.lower(),))), degree)


def _of_high_frequency(duty: Duty) -> tuple[Required, ...]:
    table, limit = duty.table("creepage.high_frequency"), float(duty.basis.figures["creepage.frequency"])
    if table is None or (duty.frequency is not None and duty.frequency <= limit):
        return ()
    bands = [name for name in table.columns if name.startswith("khz_")]
    upper = [name for name in bands if duty.frequency is not None and 1000 * float(name[4:]) >= duty.frequency]
    if duty.frequency is not None and not upper:
        beyond = read(table, (bands[-1],), duty.peak, "creepage at high frequency")
        missing = f"a limit for {duty.frequency / 1000:g} kHz: {table.citation} ends at {bands[-1][4:]} kHz"
        return (replace(beyond, enough=None, missing=missing),)
    # an unknown frequency is taken as the highest of the table
    found = read(table, (upper[0] if upper else bands[-1],), duty.peak, f"creepage above {limit / 1000:g} kHz")
    found = by_pollution(found, duty, "creepage", table)
    return (found if upper else perhaps(found, found.missing or "frequency of the working voltage"),)


def _by_the_next_row(table: Table, columns: tuple[str, ...], rms: Required, factor: float, found: Required) -> str:
    """What a laboratory asks that reads the next row instead of interpolating, "" where it is the same."""
    column = column_of(table, columns)
    if column is None or rms.enough is None or found.enough is None:
        return ""
    row = look_up(table, column, rms.enough, NEXT_ROW)
    if row is None or row.value <= found.enough:
        return ""
    return f" ({round(row.value * factor, 9):g} mm where a laboratory reads the row {row.keys[0]:g} V instead of interpolating)"
