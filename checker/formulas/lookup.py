"""Reading a figure out of a table of a ruleset: the row, the line between two rows, and the rounding the table states.

clearance = Table("t", {"voltage": "V peak", "basic": "mm"}, "interpolate", ((2000.0, 1.0), (2500.0, 1.5)), "S table 1",
                  "true", "up to 0.1 mm")
look_up(clearance, "basic", 2500.0).value      1.5
look_up(clearance, "basic", 2220.0).value      1.3   (1.22, rounded up)
look_up(clearance, "basic", 2501.0)            None: a table is never extended beyond its last row
"""

from __future__ import annotations

import math
from bisect import bisect_left
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cache

from checker import units
from checker.model.table import Table

NOISE = 1e-9  # part of a value that is arithmetic of floats, not a figure: 2.5000000001 is 2.5


@dataclass(frozen=True, slots=True)
class Reading:
    """value: in the column's unit. keys: the row, or the two rows it lies between. how: the arithmetic in words."""

    value: float
    keys: tuple[float, ...]
    how: str


def column_of(table: Table, names: Iterable[str]) -> str | None:
    """The first of `names` that is a column of the table; names go from the most to the least specific."""
    return next((name for name in names if name in table.columns), None)


def look_up(table: Table, column: str, key: float, between: str = "") -> Reading | None:
    """The figure of `column` at `key`, a value of the first column; None beyond the last row or where no figure stands.

    Below the first row the first row holds. A row whose key equals `key` is read as it stands; what lies between two rows is
    the higher row (lookup next-higher), or a straight line rounded as the table says (lookup interpolate).
    between: "next-higher" to take the higher row whatever the table's own lookup says.
    """
    at = list(table.columns).index(column)
    place = bisect_left(table.rows, key * (1 - NOISE), key=_first)
    if place == len(table.rows):
        return None
    high, upper = _first(table.rows[place]), table.rows[place][at]
    if not isinstance(upper, float) or (table.lookup == "exact" and not math.isclose(high, key, rel_tol=NOISE)):
        return None
    low, lower = (_first(table.rows[place - 1]), table.rows[place - 1][at]) if place else (high, None)
    plain = math.isclose(high, key, rel_tol=NOISE) or not isinstance(lower, float)
    if plain or table.lookup != "interpolate" or between == "next-higher":
        return Reading(upper, (high,), f"row {high:g}")
    assert isinstance(lower, float)
    value = lower + (upper - lower) * (key - low) / (high - low)
    line = f"{lower:g} + ({upper:g} - {lower:g}) x ({key:.6g} - {low:g}) / ({high:g} - {low:g}) = {value:.5g}"
    found = rounded(value, table.round)
    return Reading(found, (low, high), line + (f", rounded {table.round}" if table.round else ""))


def _first(row: tuple[float | str | None, ...]) -> float:
    """The key of a row; tables that are read by a figure have one in every row."""
    key = row[0]
    assert isinstance(key, float)
    return key


def last(table: Table, column: str) -> Reading:
    """The last row that has a figure in that column; value 0 when none has."""
    at = list(table.columns).index(column)
    for row in reversed(table.rows):
        if isinstance(row[at], float) and isinstance(row[0], float):
            return Reading(float(row[at] or 0.0), (row[0],), f"row {row[0]:g}, the last")
    return Reading(0.0, (), "no row")


def rounded(value: float, way: str) -> float:
    """`value` rounded as a table says: `up to 0.1 mm`, `nearest to 0.1 mm`, `up to 0.01 mm, above 0.5 mm to 0.1 mm`, "" not.

    >>> rounded(2.41, "up to 0.1 mm"), rounded(2.5000000001, "up to 0.1 mm"), rounded(2.44, "nearest to 0.1 mm")
    (2.5, 2.5, 2.4)
    >>> [rounded(value, "up to 0.01 mm, above 0.5 mm to 0.1 mm") for value in (0.123, 0.5, 0.501, 1.22)]
    [0.13, 0.5, 0.6, 1.3]
    """
    if not way:
        return value
    direction, step, limit, coarse = _steps(way)
    if coarse and value > limit * (1 + NOISE):
        step = coarse
    count = value / step
    whole = math.ceil(count * (1 - NOISE)) if direction == "up" else math.floor(count + 0.5)
    return round(whole * step, 9)


@cache
def _steps(way: str) -> tuple[str, float, float, float]:
    """(direction, step, limit above which the coarse step holds, coarse step or 0)."""
    direction, _, steps = way.partition(" to ")
    fine, _, above = steps.partition(", above ")
    limit, _, coarse = above.partition(" to ")
    return direction, _figure(fine), _figure(limit) if coarse else 0.0, _figure(coarse) if coarse else 0.0


def _figure(said: str) -> float:
    """The number of `0.1 mm` in the unit that stands there; a table states its columns and its rounding in one unit."""
    unit = said.split(" ")[-1]
    return units.parse(said, unit).value
