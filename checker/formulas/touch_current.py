"""The current through a person who touches a circuit that capacitors tie to the mains, and the network it is measured with.

A person is taken for the network of IEC 60990 figure 4 (component values as on a page about such test equipment):

    RS 1500 ohm parallel to CS 0.22 uF, in series with RB 500 ohm;  R1 10 kohm and C1 22 nF in series across RB

    unweighted current = U1 / 500 ohm, U1 across RB;  weighted current = U2 / 500 ohm, U2 across C1

Capacitors of a few nanofarads have megohms at mains frequency, the person 2 kohm, so the capacitors alone set the current.
"""

from __future__ import annotations

import math

RS = 1500.0  # ohm
CS = 0.22e-6  # F
RB = 500.0  # ohm
R1 = 10e3  # ohm
C1 = 22e-9  # F


def z_input(frequency: float) -> complex:
    """Impedance of the network of IEC 60990 figure 4 [ohm].

    frequency: [Hz], above 0.

    >>> round(abs(z_input(60.0)), 1), round(abs(z_input(1000.0)), 1)
    (1985.7, 972.5)
    """
    return RS / (1 + 2j * math.pi * frequency * RS * CS) + _across_rb(frequency)


def u1_per_ampere(frequency: float) -> float:
    """Magnitude of the unweighted voltage U1 for one ampere into the network, IEC 60990 figure 4 [V/A].

    >>> round(u1_per_ampere(60.0), 2)
    499.83
    """
    return abs(_across_rb(frequency))


def u2_per_ampere(frequency: float) -> float:
    """Magnitude of the weighted voltage U2 for one ampere into the network, IEC 60990 figure 4 [V/A].

    >>> round(u2_per_ampere(60.0), 3), round(u2_per_ampere(10e3), 3)
    (498.115, 34.368)
    """
    return abs(_across_rb(frequency) / (1 + 2j * math.pi * frequency * R1 * C1))


def _across_rb(frequency: float) -> complex:
    branch = R1 + 1 / (2j * math.pi * frequency * C1)
    return RB * branch / (RB + branch)


def capacitor_current(frequency: float, capacitance: float, voltage: float) -> float:
    """I = 2 pi f C U, the current of a capacitor [A], in the form of the voltage.

    frequency: [Hz]; capacitance: [F]; voltage: [V].

    >>> round(capacitor_current(50.0, 4.7e-9, 240.0) * 1e6)
    354
    """
    return 2 * math.pi * frequency * capacitance * voltage


def rms_of(frequency: float, voltage: float, full: float, half: float) -> float:
    """R.m.s. current into an earthed circuit of capacitors on a pole and on the rectified line [A].

    The rectified line follows the pole for half of every cycle and stands still for the other half, so that

        I = 2 pi f U sqrt(((F + H)^2 + F^2) / 2)

    and a capacitor on the rectified line alone gives 0.707 of what it would give on the pole.
    frequency: [Hz]; voltage: of the pole against earth [V r.m.s.]; full: F, to the pole [F]; half: H, to the rectified line [F].

    >>> round(rms_of(60.0, 264.0, 1e-9, 0.0) * 1e6, 1), round(rms_of(60.0, 264.0, 0.0, 1e-9) * 1e6, 1)
    (99.5, 70.4)
    """
    return capacitor_current(frequency, math.sqrt(((full + half) ** 2 + full**2) / 2), voltage)


def peak_of(frequency: float, voltage: float, full: float, half: float) -> float:
    """Peak of the same current [A]: sqrt(2) x 2 pi f U (F + H), since both follow the pole at once while it passes zero.

    >>> round(peak_of(60.0, 264.0, 0.0, 1e-9) * 1e6)
    141
    """
    return math.sqrt(2) * capacitor_current(frequency, full + half, voltage)


def share_read(frequency: float, capacitance: float) -> float:
    """What the network reads (weighted) of the current that would flow into an earthed circuit, 0 to 1.

        U2 / (500 ohm x |1 + j omega C Z|)

    capacitance: everything that feeds the circuit [F].

    >>> round(share_read(60.0, 4.7e-9), 4)
    0.9959
    """
    loading = abs(1 + 2j * math.pi * frequency * capacitance * z_input(frequency))
    return u2_per_ampere(frequency) / (RB * loading)
