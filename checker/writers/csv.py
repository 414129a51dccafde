"""Tables for spreadsheets: the verdicts, and the spacing table for the layout engineer.

UTF-8 without a mark, commas, quotes as RFC 4180 has them. Lines end with LF alone, as everything the program prints: the
standard asks for CRLF, every reader takes both, and one form keeps version control and `diff` quiet. Text that a spreadsheet
program would run as a formula stands behind an apostrophe (`'+12V`). Figures are plain numbers with at most six digits.
"""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import Any

from msgspec import UNSET

from checker.formulas.rounding import significant
from checker.model.report import BarrierShown, BridgingPart, Figure, LimitShown, Report, Reports, VerdictShown
from checker.neutral import cell
from checker.writers.door import Writer

VERDICTS = (
    "design,outcome,level,hazard,rule,clause,citation,parts,nets,what,found,found_unit,found_form,limit,limit_unit,limit_form,"
    "bound,margin,missing,because,remedy,path,line,fingerprint"
).split(",")
SPACING = (
    "design,separation,between_1,between_2,part,pins,grade,working_rms_V,working_peak_V,clearance_mm,creepage_mm,"
    "through_insulation_mm,strength_peak_V,bounded,pollution_degree,material_group,altitude_m,ruleset,because"
).split(",")
UNREADABLE = "unreadable"  # the outcome of a design that could not be judged at all

_Value = str | float | int | None


def write(report: Report | Reports) -> bytes:
    """One row a verdict, in the order of the report; a design that could not be read is a row of its own."""
    rows: list[Sequence[_Value]] = []
    for one in _each(report):
        rows += [_verdict(one.design, verdict) for verdict in one.verdicts]
    for lost in report.unreadable if isinstance(report, Reports) else ():
        known = {"design": lost.design, "outcome": UNREADABLE, "what": lost.message}
        rows.append([known.get(name) for name in VERDICTS])
    return _table(VERDICTS, rows)


def spacing(report: Report | Reports) -> bytes:
    """One row a separation and ruleset, then one a part across it and ruleset.

    Figures suffice when `bounded` is true, else some of them are only what is needed at least; `because` says what would settle
    a figure. What no ruleset asks anything of stands there once with empty figures.
    """
    rows: list[Sequence[_Value]] = []
    for one in _each(report):
        because = {step.id: step.text for step in one.steps}
        for barrier in (*one.barriers, *one.separations):
            rows += _spacings(one, barrier, because)
    return _table(SPACING, rows)


def _each(report: Report | Reports) -> Iterable[Report]:
    return report.reports if isinstance(report, Reports) else (report,)


def _verdict(design: str, verdict: VerdictShown) -> Sequence[_Value]:
    limit, missing = verdict.limit, verdict.missing
    place = verdict.evidence[0] if verdict.evidence else None
    bound = limit.bound if isinstance(limit, LimitShown) and limit.bound is not UNSET else None
    return [
        design,
        verdict.outcome,
        verdict.level,
        verdict.hazard,
        verdict.rule,
        verdict.clause,
        verdict.citation,
        ", ".join(verdict.parts),
        ", ".join(verdict.nets),
        verdict.what,
        *_figure(verdict.found),
        *_figure(limit),
        bound,
        verdict.margin,
        f"{missing.fact} ({missing.supply_as})" if missing else None,
        verdict.because,
        verdict.remedy,
        place.path if place else None,
        place.line if place and place.line else None,
        verdict.fingerprint,
    ]


def _figure(figure: Figure | None) -> tuple[_Value, _Value, _Value]:
    """Value, unit and form; a finding in words stands in the place of the value."""
    if figure is None:
        return None, None, None
    said = [None if item is UNSET else item for item in (figure.value, figure.unit, figure.form)]
    value = said[0] if said[0] is not None else None if figure.text is UNSET else figure.text
    return value, said[1], said[2]


def _spacings(report: Report, barrier: BarrierShown, because: dict[str, str]) -> Iterator[Sequence[_Value]]:
    working = barrier.working_voltage
    voltage = (working.rms, working.peak) if working else (None, None)
    why = because.get(barrier.step or "", "")
    for need in barrier.required or [{}]:
        yield _spacing(report, barrier, None, voltage, need, why)
    for bridge in {bridge.part: bridge for bridge in barrier.parts}.values():
        for need in bridge.required or [{}]:
            yield _spacing(report, barrier, bridge, (bridge.rms, bridge.peak), need, because.get(bridge.step or "", ""))


def _spacing(
    report: Report,
    barrier: BarrierShown,
    bridge: BridgingPart | None,
    voltage: tuple[float | None, float | None],
    need: dict[str, Any],
    why: str,
) -> Sequence[_Value]:
    around = report.environment
    settles = "more may be needed" if need.get("bounded") is False else "less may suffice"
    missing = [f"{settles}, settled by {text}" for text in need.get("missing", ())]
    return [
        report.design,
        barrier.id,
        *barrier.between,
        bridge.part if bridge else None,
        " | ".join(", ".join(side) for side in bridge.sides or [bridge.pins]) if bridge else None,
        need.get("grade") or barrier.grade,
        *voltage,
        *(
            need.get(name) or None for name in ("clearance", "creepage", "through_insulation")
        ),  # zero: nothing is known to be needed
        _peak(need.get("electric_strength", {})) or None,
        None if not need else "false" if need.get("bounded") is False else "true",
        around.get("pollution_degree"),
        around.get("material_group"),
        around.get("altitude"),
        need.get("ruleset"),
        "; ".join([why, *missing]),
    ]


def _peak(strength: Mapping[str, float]) -> float | None:
    """The test voltage as d.c. or peak, from the r.m.s. one where only that is asked for."""
    return strength.get("dc", strength["rms"] * math.sqrt(2) if "rms" in strength else None)


def _table(header: Sequence[str], rows: Iterable[Sequence[_Value]]) -> bytes:
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(header)
    for row in rows:
        writer.writerow([_cell(value) for value in row])
    return text.getvalue().encode("utf-8", "backslashreplace")


def _cell(value: object) -> str:
    """A figure as a plain number, text neutral and never a formula, nothing for None."""
    if value is None:
        return ""
    if isinstance(value, float | int):
        return f"{significant(float(value)):.6g}"
    return cell(str(value))


WRITER = Writer("csv", write)
