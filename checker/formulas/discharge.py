"""What is left of the charge of a capacitor, and the largest resistor that takes it away in time.

    V(t) = V0 exp(-t / (R C))        R_max = t / (C ln(V0 / V_limit))

Source: exponential decay of an RC circuit; worked examples b_ex07 to b_ex10 of the reference figures.
"""

from __future__ import annotations

import math
from bisect import bisect_right

E12 = (1.0, 1.2, 1.5, 1.8, 2.2, 2.7, 3.3, 3.9, 4.7, 5.6, 6.8, 8.2)  # IEC 60063, from memory


def left(start: float, ohms: float, farads: float, seconds: float) -> float:
    """The voltage left after `seconds`, V: `start` V on `farads` F through `ohms` ohm; inf ohm discharges nothing.

    >>> round(left(1500.0, 50.0, 195e-6, 0.01506), 1)
    320.1
    """
    if farads <= 0:
        return 0.0
    return start * math.exp(-seconds / (ohms * farads)) if math.isfinite(ohms) else start


def seconds_until(start: float, ohms: float, farads: float, limit: float) -> float:
    """The time until `limit` V are left, s; 0 when there is no more at the start.

    >>> round(seconds_until(1500.0, 50.0, 195e-6, 320.0), 5)
    0.01506
    """
    return ohms * farads * math.log(start / limit) if start > limit else 0.0


def most_ohms(start: float, farads: float, limit: float, seconds: float) -> float:
    """The largest resistance that leaves at most `limit` V after `seconds`, ohm; inf when nothing has to be taken away.

    >>> round(most_ohms(373.4, 1e-6, 60.0, 2.0) / 1e3)
    1094
    """
    return seconds / (farads * math.log(start / limit)) if start > limit and farads > 0 else math.inf


def usual_ohms(most: float) -> float:
    """The largest resistance of the E12 series up to `most` ohm, which is above 0.

    >>> usual_ohms(1094e3), usual_ohms(0.99e6)
    (1000000.0, 820000.0)
    """
    decade = 10.0 ** math.floor(math.log10(most))
    place = bisect_right(E12, most / decade * (1 + 1e-9))
    return round(E12[place - 1] * decade, 9)
