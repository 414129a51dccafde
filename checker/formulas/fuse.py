"""Fuses: how much of the rated current may be used, what a class breaks, and what a supply draws.

needed_rating(1.5, 0.7, 0.95)   2.256 A
line_current(5.0, 90.0, 0.7, 0.5)   0.159 A
"""

from __future__ import annotations

from collections.abc import Mapping

# Breaking capacity of IEC 60127-2 at 250 V a.c.: letter -> A. H was read on two makers' sheets, L and E are from memory.
CLASSES: Mapping[str, float] = {"L": 35.0, "E": 150.0, "H": 1500.0}
OF_RATED = 10.0  # the low class breaks that many times the rated current where this is more (from memory)
# UL 248-14 at 250 V a.c., a fuse maker's guide: (up to this rated current in A, least interrupting rating in A)
LISTED = ((1.0, 35.0), (3.5, 100.0), (10.0, 200.0), (15.0, 750.0), (30.0, 1500.0))

# usual rated currents of IEC 60127-2, A (from memory)
RATINGS = (0.05, 0.063, 0.08, 0.1, 0.125, 0.16, 0.2, 0.25, 0.315, 0.4, 0.5, 0.63, 0.8, 1, 1.25, 1.6, 2, 2.5, 3.15, 4, 5, 6.3, 8, 10)


def breaking_capacity(letter: str, rated: float | None = None) -> float | None:
    """What a fuse of that class breaks at 250 V a.c. [A]; None for another letter. rated: its rated current [A] (IEC 60127-2).

    >>> breaking_capacity("H"), breaking_capacity("L", 2.0), breaking_capacity("L", 6.3), breaking_capacity("X")
    (1500.0, 35.0, 63.0, None)
    """
    least = CLASSES.get(letter)
    return max(least, OF_RATED * (rated or 0.0)) if letter == "L" and least is not None else least


def listed_capacity(rated: float) -> float | None:
    """The least interrupting rating at 250 V a.c. of a listed fuse [A] by its rated current [A] (UL 248-14); None above 30 A.

    >>> listed_capacity(1.0), listed_capacity(2.0), listed_capacity(12.0), listed_capacity(40.0)
    (35.0, 100.0, 750.0, None)
    """
    return next((least for most, least in LISTED if rated <= most), None)


def needed_rating(current: float, load: float, temperature: float = 1.0) -> float:
    """The rated current that a steady current needs, I_n >= I / (k_load x k_temp) [A].

    current: [A]; load: share of the rating at room temperature, 1 for IEC 60127, 0.75 for UL 248-14; temperature: further share
    by the maker's curve.

    >>> round(needed_rating(1.0, 1.0, 0.83), 3), round(needed_rating(1.5, 0.7, 0.95), 3)
    (1.205, 2.256)
    """
    return current / (load * temperature)


def line_current(power: float, voltage: float, efficiency: float, power_factor: float) -> float:
    """What a supply draws from the mains, I = P / (eta x lambda x U) [A r.m.s.].

    power: delivered [W]; voltage: [V r.m.s.]; efficiency and power_factor: shares of 1.

    >>> round(line_current(5.0, 90.0, 0.7, 0.5), 3)
    0.159
    """
    return power / (efficiency * power_factor * voltage)


def melting_needed(pulse: float, share: float) -> float:
    """The melting integral that a repeated pulse needs, I2t / share [A2s].

    pulse: [A2s]; share: of the melting integral for that many pulses, 0.22 for 100,000 of them (fuse maker's table).

    >>> round(melting_needed(0.697, 0.22), 2)
    3.17
    """
    return pulse / share
