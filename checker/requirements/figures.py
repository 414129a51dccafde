"""Arithmetic with figures that lie between two bounds: reading tables at both, scaling, the highest of several.

A `Required` carries every figure of this stage, the voltages too: at_least is surely reached, enough is never exceeded.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from functools import lru_cache

from checker import units
from checker.formulas.lookup import column_of, last, look_up
from checker.model.fact import Fact
from checker.model.requirement import Required
from checker.model.step import Step
from checker.model.table import Table
from checker.model.verified import weakest


@lru_cache(4096)
def shown(value: float, unit: str, form: str = "") -> str:
    """A figure with its unit for people."""
    return units.shown(value, unit, form)


def span(at_least: float, enough: float | None, unit: str, form: str) -> str:
    """Both bounds for people: `3 mm`, `3 mm to 5.5 mm`, `at least 3 mm, with no upper bound`."""
    if enough is None:
        return f"at least {shown(at_least, unit, form)}, with no upper bound"
    if enough == at_least:
        return shown(enough, unit, form)
    return f"{shown(at_least, unit)} to {shown(enough, unit, form)}"


def said(figure: Required) -> str:
    """Both bounds of a figure for people."""
    return span(figure.at_least, figure.enough, figure.unit, figure.form)


def result(figure: Required) -> float:
    """The one figure a step shows: what suffices, else what is needed in any case."""
    return figure.at_least if figure.enough is None else figure.enough


def read(
    table: Table, names: Sequence[str], at: Required, what: str, inputs: tuple[Step | Fact, ...] = (), between: str = ""
) -> Required:
    """The table's figure at both bounds of `at`, in the first of the columns `names` that the table has.

    A lower bound beyond the last row needs the last row at least; an upper bound beyond it leaves the figure without one,
    and so does a table that has none of the columns.
    """
    column = column_of(table, names)
    if column is None:
        missing = f"column {names[0]} in the table {table.id}"
        step = Step(f"{what}: the table {table.id} has no column {names[0]}", (at.step, *inputs), citation=table.citation)
        unit, _, form = list(table.columns.values())[-1].partition(" ")
        return Required(0.0, None, step, table.verified, unit, form, missing)
    unit, _, form = table.columns[column].partition(" ")
    unit = "" if unit == "1" else unit
    end = last(table, column)
    low = look_up(table, column, at.at_least, between) or end
    high = low if at.enough == at.at_least and low is not end else None
    if high is None and at.enough is not None:
        high = look_up(table, column, at.enough, between)
    enough = None if high is None else high.value
    missing = ""
    if at.enough is not None and high is None:
        missing = f"a limit for {shown(at.enough, at.unit, at.form)}: {table.citation} ends at {_key(table, end.keys)}"
    elif low.value != enough:
        missing = at.missing
    deciding = high or low
    line = len(deciding.keys) == 2
    where = f"row {_key(table, deciding.keys)}"
    if line:
        where = f"between the rows {_key(table, deciding.keys[:1])} and {_key(table, deciding.keys[1:])}"
    text = f"{what}: {span(low.value, enough, unit, form)} at {said(at)}, {where}, column {column}"
    formula = deciding.how if line else ""
    step = Step(text, (at.step, *inputs), formula, deciding.value, unit, form, table.citation)
    return Required(low.value, enough, step, table.verified, unit, form, missing)


def _key(table: Table, keys: tuple[float, ...]) -> str:
    unit, _, form = next(iter(table.columns.values())).partition(" ")
    return shown(keys[0], unit, form) if keys else "no row"


def changed(
    figure: Required,
    change: Callable[[float], float],
    text: str,
    formula: str,
    citation: str = "",
    form: str | None = None,
    verified: str | None = None,
) -> Required:
    """`change` applied to both bounds. text: what was done, the result is added. form, verified: None as they were."""
    low = change(figure.at_least)
    high = None if figure.enough is None else change(figure.enough)
    form = figure.form if form is None else form
    step = Step(
        f"{text}: {span(low, high, figure.unit, form)}",
        (figure.step,),
        formula,
        low if high is None else high,
        figure.unit,
        form,
        citation,
    )
    missing = "" if low == high else figure.missing
    return Required(low, high, step, verified or figure.verified, figure.unit, form, missing)


def highest(figures: Sequence[Required], what: str) -> Required:
    """The highest of several figures, bound by bound; verified as the weakest of them."""
    if len(figures) == 1:
        return figures[0]
    at_least = max(figure.at_least for figure in figures)
    tops = [figure.enough for figure in figures if figure.enough is not None]
    enough = max(tops) if len(tops) == len(figures) else None
    missing = ""
    if at_least != enough:
        unsettled = [figure for figure in figures if figure.enough is None or figure.enough == enough]
        missing = next((figure.missing for figure in unsettled if figure.missing), "")
    unit, form = figures[0].unit, figures[0].form
    step = Step(
        f"{what}, the highest of {len(figures)}: {span(at_least, enough, unit, form)}",
        tuple([figure.step for figure in figures]),
        f"max({', '.join([f'{result(figure):.6g}' for figure in figures])})",
        at_least if enough is None else enough,
        unit,
        form,
    )
    verified = weakest(*[figure.verified for figure in figures])
    return Required(at_least, enough, step, verified, unit, form, missing)


def perhaps(figure: Required, missing: str = "") -> Required:
    """The figure where it may not apply at all: nothing is sure of it. missing: the fact that tells."""
    return replace(figure, at_least=0.0, missing=missing or figure.missing)
