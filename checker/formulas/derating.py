"""Rated voltages that no maker's text states: of a resistor by its size or power, and what a share of a rating makes of a voltage.

compared(371.0, 373.4, 380.0, 380.0)    "pass"   never above the limit
compared(371.0, 373.4, 237.5, 237.5)    "fail"   surely above it
compared(0.0, 373.4, 200.0, 500.0)      "open"
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

# Maximum working voltage, V r.m.s. or d.c., by imperial size: the lowest and the highest of the ordinary series of five
# makers' data sheets.
# 0402 to 1206 agree but for 0603 (50 or 75); from 2010 on they differ. Special high-voltage series go further and say so.
CHIP: Mapping[str, tuple[float, float]] = {
    "01005": (15.0, 15.0),
    "0201": (25.0, 25.0),
    "0402": (50.0, 50.0),
    "0603": (50.0, 75.0),
    "0805": (150.0, 150.0),
    "1206": (200.0, 200.0),
    "1210": (200.0, 200.0),
    "1218": (200.0, 200.0),
    "1812": (200.0, 200.0),
    "2010": (200.0, 400.0),
    "2512": (200.0, 500.0),
}
# (least rated power in W, maximum working voltage in V) of leaded carbon and metal film resistors (from memory)
_LEADED = ((1.0, 500.0), (0.5, 350.0), (0.25, 250.0), (0.0, 150.0))
_CHIP_OF_POWER = ((0.5, 200.0), (0.25, 150.0), (0.0, 50.0))  # what the smallest chip of that power stands (from memory)

# Usual rated voltages of the trade, V (common practice, no source)
DIRECT = (4, 6.3, 10, 16, 25, 35, 50, 63, 80, 100, 160, 200, 250, 350, 400, 450, 500, 630, 1000, 1600, 2000)
REVERSE = (20, 30, 40, 60, 100, 150, 200, 300, 400, 600, 650, 800, 1000, 1200, 1600, 2000)
STANDOFF = (
    5, 6, 6.5, 7, 7.5, 8, 8.5, 9, 10, 11, 12, 13, 14, 15, 16, 17, 18, 20, 22, 24, 26, 28, 30, 33, 36, 40, 43, 45, 48, 51, 54, 58,
    60, 64, 70, 75, 78, 85, 90, 100, 110, 120, 130, 150, 160, 170, 180, 200, 220, 250, 300, 350, 400, 440,
)  # fmt: skip
RESISTORS = (50, 75, 150, 200, 250, 300, 350, 400, 500, 750, 1000, 1500, 2000)
POWERS = (0.063, 0.1, 0.125, 0.25, 0.5, 0.75, 1, 2, 3, 5, 7, 10)
ALTERNATING = (125, 250, 275, 300, 310, 400, 440, 500)


def of_chip(size: str) -> tuple[float, float] | None:
    """The lowest and the highest maximum working voltage of ordinary chip resistors of that size [V]; None for other sizes.

    >>> of_chip("1206"), of_chip("0603"), of_chip("axial")
    ((200.0, 200.0), (50.0, 75.0), None)
    """
    return CHIP.get(size)


def of_leaded(power: float, leaded: bool) -> tuple[float, float]:
    """The lowest and the highest maximum working voltage of a resistor of that rated power [W] whose size nobody states [V].

    leaded: whether it is known to have leads; else it may be the smallest chip of that power.

    >>> of_leaded(0.25, True), of_leaded(0.5, True), of_leaded(1.0, True), of_leaded(0.25, False)
    ((250.0, 250.0), (350.0, 350.0), (500.0, 500.0), (150.0, 250.0))
    """
    high = next(volts for least, volts in _LEADED if power >= least)
    return (high, high) if leaded else (next(volts for least, volts in _CHIP_OF_POWER if power >= least), high)


def of_power(power: float, resistance: float) -> float:
    """The voltage at which a resistor turns its rated power into heat, U = sqrt(P x R) (MIL-PRF-39005 3.5.8, rated voltage).

    power: [W]; resistance: [ohm]; the result is d.c. or r.m.s. [V].

    >>> round(of_power(0.25, 1e6)), round(of_power(0.25, 15e3), 1)
    (500, 61.2)
    """
    return math.sqrt(power * resistance)


def compared(surely: float, never_above: float | None, strict: float, lax: float) -> str:
    """ "pass", "fail" or "open" of a voltage against a limit that is at least `strict` and at most `lax`, all in one unit and form.

    >>> [compared(100, 110, limit, limit) for limit in (110, 105, 99)], compared(100, 110, 90, 120), compared(100, None, 200, 200)
    (['pass', 'open', 'fail'], 'open', 'open')
    """
    if never_above is not None and never_above <= strict:
        return "pass"
    return "fail" if surely > lax else "open"


def next_usual(least: float, series: Sequence[float]) -> float | None:
    """The first value of a usual series that is not below `least`; None beyond its end.

    >>> next_usual(466.7, DIRECT), next_usual(63, DIRECT), next_usual(5000, DIRECT)
    (500.0, 63.0, None)
    """
    return next((float(value) for value in series if value >= least * (1 - 1e-9)), None)
