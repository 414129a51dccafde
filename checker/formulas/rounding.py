"""Rounding of what is printed. Comparisons are made before it."""

from __future__ import annotations

import math


def significant(value: float, digits: int = 6) -> float:
    """`value` rounded to `digits` significant digits, half to even on the decimal expansion; -0.0 becomes 0.0.

    Raises ValueError for a value that is not finite: such a value is a fault of the program, never a figure.

    >>> significant(0.000351858377), significant(373.35230013), significant(1234567.0)
    (0.000351858, 373.352, 1234570.0)
    """
    if not math.isfinite(value):
        raise ValueError(f"a figure must be finite, not {value}")
    return float(f"{value:.{digits - 1}e}") or 0.0
