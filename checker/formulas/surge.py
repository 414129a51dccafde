"""Surges: what a varistor stands all the time, and what charging a capacitor through a resistance does.

continuous(470.0)          300.0 V a.c. of a varistor that conducts 1 mA at 470 V
charging_peak(325.0, 0.5)  650.0 A
"""

from __future__ import annotations

import math
from bisect import bisect_left
from collections.abc import Mapping

# V at 1 mA -> highest continuous V r.m.s. of metal oxide varistors: the usual series, the lowest of several makers' sheets
# (from memory; 430 -> 275, 470 -> 300 and 820 -> 510 also stand in public sheets)
VARISTORS: Mapping[int, float] = {
    18: 11.0, 22: 14.0, 27: 17.0, 33: 20.0, 39: 25.0, 47: 30.0, 56: 35.0, 68: 40.0, 82: 50.0, 100: 60.0, 120: 75.0, 150: 95.0,
    180: 115.0, 200: 130.0, 220: 140.0, 240: 150.0, 270: 175.0, 300: 190.0, 330: 210.0, 360: 230.0, 390: 250.0, 430: 275.0,
    470: 300.0, 510: 320.0, 560: 350.0, 620: 385.0, 680: 420.0, 750: 460.0, 780: 485.0, 820: 510.0, 910: 550.0, 1000: 625.0,
    1100: 680.0, 1800: 1000.0,
}  # fmt: skip
SUPPLY = 2.0  # ohm; of the wiring of a supply and the parts in the line without a limiter, at most (common practice, no source)
LOSS = 0.25  # tan delta of an aluminium electrolytic capacitor at 120 Hz, at most (from memory)
HALF_WAVE = (1 / 120, 1 / 100)  # s; the half sine that a rectifier's surge current is stated for


def continuous(varistor_voltage: float) -> float | None:
    """The highest continuous voltage [V r.m.s.] of a varistor by its voltage at 1 mA [V]; None outside the usual series.

    >>> continuous(470.0), continuous(391.0)
    (300.0, None)
    """
    return VARISTORS.get(int(varistor_voltage)) if varistor_voltage == int(varistor_voltage) else None


def next_varistor(least: float) -> float | None:
    """The first usual continuous voltage [V r.m.s.] that is not below `least`; None beyond the series.

    >>> next_varistor(300.0), next_varistor(287.5), next_varistor(2000.0)
    (300.0, 300.0, None)
    """
    series = sorted(VARISTORS.values())
    at = bisect_left(series, least * (1 - 1e-9))
    return series[at] if at < len(series) else None


def charging_peak(voltage: float, resistance: float) -> float:
    """The largest current that charges a capacitor, I = U / R.

    voltage: crest of the supply [V]; resistance: of the whole loop, above 0 [ohm]; the result is a peak [A]. Switched on at the
    crest, the capacitor empty.

    >>> charging_peak(325.0, 0.5)
    650.0
    """
    return voltage / resistance


def charging_integral(voltage: float, resistance: float, capacitance: float) -> float:
    """The current-squared integral of charging a capacitor, I2t = U^2 x C / (2 x R): a peak U / R that decays with R x C.

    voltage: crest of the supply [V]; resistance: of the whole loop, above 0 [ohm]; capacitance: [F]; the result is in A2s. An
    exponential decay counts half its peak squared times its time constant (fuse maker's table of waveforms).

    >>> round(charging_integral(373.4, 10.0, 100e-6), 3)
    0.697
    """
    return voltage**2 * capacitance / (2 * resistance)


def charging_energy(voltage: float, capacitance: float) -> float:
    """The energy that a limiter takes when it charges a capacitor, E = C x U^2 / 2 [J]. voltage: [V]; capacitance: [F].

    >>> round(charging_energy(746.7, 2350e-6))
    655
    """
    return capacitance * voltage**2 / 2


def least_resistance(voltage: float, current: float) -> float:
    """The resistance that keeps a charging current down, R = U / I [ohm]. voltage: crest [V]; current: allowed peak [A].

    >>> round(least_resistance(746.7, 30.0), 1)
    24.9
    """
    return voltage / current


def surge_integral(current: float, duration: float) -> float:
    """What a rectifier stands by its surge current, I2t = I^2 x t / 2 of one half sine [A2s].

    current: peak, one half wave not repeated [A]; duration: of the half sine [s]. A data sheet gives the figure for 1 ms to a
    half wave; shorter pulses are judged by it too (common practice, no source).

    >>> round(surge_integral(30.0, 1 / 120), 2)
    3.75
    """
    return current**2 * duration / 2


def series_resistance(capacitance: float) -> float:
    """The most an aluminium capacitor [F] has as resistance in series, tan d / (2 pi f C) at 120 Hz [ohm].

    >>> round(series_resistance(100e-6), 2)
    3.32
    """
    return LOSS / (2 * math.pi * 120 * capacitance)


def least_varistor(voltage: float, factor: float) -> float:
    """The continuous voltage that a varistor across the mains needs, U_ac >= k x U [V r.m.s.].

    voltage: rated, of a range the upper end, without tolerance [V r.m.s.]; factor: 1.1 is the makers' least, 1.25 the rule of
    the equipment standard.

    >>> round(least_varistor(220.0, 1.1), 1), least_varistor(220.0, 1.25)
    (242.0, 275.0)
    """
    return voltage * factor
