"""Published worked examples and simulated check values of converters, as netlists in own words.

Each example names its source and how far it was seen: `seen` on the cited page, `copy` in notes that name the source, `memory`,
or `simulated` (own transient simulation with ideal switches, coupling 0.9999, plateaus read by hand). What the source does not
print is computed from what it prints by the closed form named in `by`.

A plateau is the bound before spikes. The published figure must lie within the bounds; where the plateau follows from turns and
rails alone the upper bound is within 3 % of it, beside what conducting parts may drop more than the source assumes (`drops`, V).
Where an upper bound would need what a netlist does not hold (equal times of the two switches of a half bridge), the figure is held
against what is surely reached instead (`surely`).
"""

from __future__ import annotations

from dataclasses import dataclass, field

import pytest
from analyses import analysis
from converters import (
    FREEWHEEL,
    FULL_WAVE,
    INPUT,
    MAINS,
    OUTPUT,
    capacitor,
    choke,
    core,
    diode,
    direct,
    flyback,
    mains,
    part,
    schottky,
    switch,
)

NEAR = 0.03


@dataclass(frozen=True)
class Plateau:
    """between: two nets; volts: published. drops: V, that the tool allows conducting parts beyond the source. surely: see above."""

    one: str
    two: str
    volts: float
    drops: float = 0.0
    surely: bool = False


@dataclass(frozen=True)
class Example:
    name: str
    source: str
    status: str
    circuit: str
    declaration: str
    plateaus: tuple[Plateau, ...] = field(default=())
    by: str = ""


EXAMPLES = [
    Example(
        "W1: crest of the line", "Power Integrations AN-17 p.8", "seen", MAINS, "{supply: {mains: 265 V, tolerance: 0 %}}",
        (Plateau("VIN", "GND", 375),), "VMAX is printed",
    ),
    Example(
        "W3: flyback from 132 V", "National LM3101 p.15", "seen; plateaus recomputed",
        MAINS + flyback("1-2:8.5, 3-4:1", schottky("D1", "S1", "VO")), mains(132, 5),
        (Plateau("DR", "GND", 235), Plateau("VO", "S1", 27)), "Vin + n (Vo + Vf); Vo + Vin / n",
    ),
    Example(
        "W4: resonant half bridge", "Fairchild AN-4151", "inputs copy; figure memory",
        INPUT + core("1-2:18, 3-4-5:2+2", "P1", "P2", "S1", "SGND", "S2") + choke("L2", "LEG", "P1", "118uH")
        + capacitor("C3", "P2", "GND", "22nF") + switch("Q1", "VIN", "LEG") + switch("Q2", "LEG", "GND")
        + schottky("D1", "S1", "VO") + schottky("D2", "S2", "VO") + OUTPUT,
        direct(400, 24), (Plateau("VO", "S1", 49.8), Plateau("VO", "S2", 49.8), Plateau("LEG", "GND", 400)), "2 (Vo + Vf)",
    ),
    Example(
        "W5: resonant half bridge, transformerless figure of its switches", "Kazimierczuk & Czarkowski, example 18.1", "copy",
        INPUT + core("1-2:1, 3-4-5:1+1", "P1", "P2", "S1", "SGND", "S2") + choke("L2", "LEG", "P1", "807uH")
        + capacitor("C3", "P2", "GND", "3.1nF") + switch("Q1", "VIN", "LEG") + switch("Q2", "LEG", "GND")
        + diode("D1", "S1", "VO") + diode("D2", "S2", "VO") + OUTPUT,
        direct(250, 40), (Plateau("LEG", "GND", 250),), "the switches see the supply",
    ),
    Example(
        "W6: phase-shifted full bridge with a series choke", "TI SLUA560", "memory; plateau recomputed",
        INPUT + core("1-2:21, 3-4-5:1+1", "P1", "LEGB", "S1", "SGND", "S2") + choke("L2", "LEGA", "P1", "26uH")
        + switch("Q1", "VIN", "LEGA") + switch("Q2", "LEGA", "GND") + switch("Q3", "VIN", "LEGB") + switch("Q4", "LEGB", "GND")
        + FULL_WAVE + OUTPUT,
        direct(410, 12), (Plateau("X", "S1", 39.0), Plateau("X", "S2", 39.0), Plateau("LEGA", "GND", 410)), "2 Vin / n",
    ),
    Example(
        "W6: the same with synchronous rectifiers to ground and the choke at the tap", "TI SLUA560", "memory; plateau recomputed",
        INPUT + core("1-2:21, 3-4-5:1+1", "LEGA", "LEGB", "S1", "X", "S2")
        + switch("Q1", "VIN", "LEGA") + switch("Q2", "LEGA", "GND") + switch("Q3", "VIN", "LEGB") + switch("Q4", "LEGB", "GND")
        + switch("Q5", "S1", "SGND") + switch("Q6", "S2", "SGND") + choke("L1", "X", "VO") + OUTPUT,
        direct(410, 12), (Plateau("S1", "SGND", 39.0), Plateau("S2", "SGND", 39.0)), "2 Vin / n",
    ),
    Example(
        "W7: flyback from 42 V", "TI LM5002 data sheet", "inputs seen; plateaus recomputed",
        INPUT + flyback("1-2:2.667, 3-4:1", schottky("D1", "S1", "VO")), direct(42, 5),
        (Plateau("DR", "GND", 56.7), Plateau("VO", "S1", 20.8)), "Vin + n (Vo + Vf); Vo + Vin / n",
    ),
    Example(
        "W9: flyback 3:1", "LT3575 data sheet p.9", "inputs seen; plateaus recomputed",
        INPUT + flyback("1-2:3, 3-4:1", schottky("D1", "S1", "VO")), direct(30, 5),
        (Plateau("DR", "GND", 46.5), Plateau("VO", "S1", 15, drops=0.1)), "Vin + n (Vo + Vf); Vo + Vin / n",
    ),
    *(
        Example(
            f"W10: flyback with an RCD clamp at {line} V", "public flyback notes", "seen; plateau recomputed",
            MAINS + core("1-2:48, 3-4:8", "VIN", "DR", "S1", "SGND") + switch("Q1", "DR", "GND")
            + diode("D3", "DR", "CL") + capacitor("C3", "CL", "VIN", "150nF") + part("R3", "1.8k", "R", "1: CL, 2: VIN")
            + part("D1", "MBR20100", "D_Schottky", "1: VO, 2: S1", "1: K, 2: A") + OUTPUT,
            mains(line, 12), (Plateau("DR", "GND", plateau), Plateau("VO", "S1", bus / 6 + 12)), "Vin + n (Vo + Vf)",
        )
        for line, bus, plateau in ((207, 293, 373), (265, 375, 455))
    ),
    Example(
        "W11: flyback of 90 W", "Basso, Switch-Mode Power Supplies, chapter 7", "memory",
        MAINS + flyback("1-2:4, 3-4:1", diode("D1", "S1", "VO")), mains(265, 19), (Plateau("VO", "S1", 113),), "N Vin + Vo",
    ),
    Example(
        "W12: flyback of 20 W", "Basso, Switch-Mode Power Supplies, chapter 7", "memory",
        MAINS + flyback("1-2:6, 3-4:1", diode("D1", "S1", "VO")), mains(265, 12), (Plateau("VO", "S1", 74),), "N Vin + Vo",
    ),
    Example(
        "W13: push-pull driver", "TI SN6501 data sheet", "memory",
        INPUT + core("1-2-3:10+10, 4-5-6:13+13", "DA", "VIN", "DB", "S1", "SGND", "S2")
        + part("U1", "driver", "Driver", "1: DA, 2: VIN, 3: DB, 4: GND", "1: D1, 2: VCC, 3: D2, 4: GND",
               ", description: Transformer driver IC")
        + schottky("D1", "S1", "VO") + schottky("D2", "S2", "VO") + OUTPUT,
        direct(5.5, None), (Plateau("DA", "GND", 11, drops=1.5), Plateau("DB", "GND", 11, drops=1.5)), "2 Vcc",
    ),
    *(
        Example(
            f"W14: active clamp forward at {volts} V", "TI SLUA535", "inputs memory; plateau recomputed",
            INPUT + core("1-2:6, 3-4:1", "VIN", "DR", "S1", "SGND") + switch("Q1", "DR", "GND") + switch("Q2", "CL", "DR")
            + capacitor("C3", "CL", "VIN", "100nF") + FREEWHEEL + OUTPUT,
            direct(volts, 3.3, f"VIN: {{voltage: {volts} V, return: GND}}, CL: {{voltage: {clamp} V, return: VIN}}"),
            (Plateau("DR", "GND", plateau, drops=0.8),), "Vin / (1 - D); the clamp's voltage is declared",
        )
        for volts, clamp, plateau in ((36, 44.0, 80.0), (72, 27.3, 99.3))
    ),
    Example(
        "W16: flyback without a drop", "calculatorpod flyback page", "seen",
        INPUT + flyback("1-2:3.2, 3-4:1", schottky("D1", "S1", "VO")), direct(24, 5), (Plateau("DR", "GND", 40, drops=2.9),),
        "Vin + n Vo",
    ),
    Example(
        "forward with a reset winding", "own check value", "simulated",
        INPUT + core("1-2:10, 3-4:10, 5-6:5", "VIN", "DR", "R1", "GND", "S1", "SGND") + switch("Q1", "DR", "GND")
        + diode("D3", "R1", "VIN") + FREEWHEEL + OUTPUT,
        direct(48, 8),
        (Plateau("DR", "GND", 96.1), Plateau("X", "S1", 23.9 + 8, drops=0.5), Plateau("X", "SGND", 23.8, drops=0.8),
         Plateau("R1", "VIN", 96.0)),
        "the series diode sees Vo more when the choke runs dry",
    ),
    Example(
        "two-switch forward", "own check value", "simulated",
        INPUT + core("1-2:12, 3-4:1", "A", "B", "S1", "SGND") + switch("Q1", "VIN", "A") + switch("Q2", "B", "GND")
        + diode("D3", "GND", "A") + diode("D4", "B", "VIN") + FREEWHEEL + OUTPUT,
        direct(400, 10),
        (Plateau("B", "GND", 400.1), Plateau("A", "VIN", 400.1), Plateau("X", "S1", 33.2 + 10), Plateau("X", "SGND", 33.2)),
        "the series diode sees Vo more when the choke runs dry",
    ),
    Example(
        "push-pull", "own check value", "simulated",
        INPUT + core("1-2-3:10+10, 4-5-6:20+20", "DA", "VIN", "DB", "S1", "SGND", "S2")
        + switch("Q1", "DA", "GND") + switch("Q2", "DB", "GND") + FULL_WAVE + OUTPUT,
        direct(24, 24),
        (Plateau("DA", "GND", 47.9, drops=1.5), Plateau("X", "S1", 95.7, drops=6), Plateau("X", "S2", 95.7, drops=6)),
    ),
    Example(
        "half bridge", "own check value", "simulated",
        INPUT + core("1-2:10, 3-4-5:1+1", "LEG", "MID", "S1", "SGND", "S2")
        + switch("Q1", "VIN", "LEG") + switch("Q2", "LEG", "GND")
        + capacitor("C3", "VIN", "MID", "2.2uF") + capacitor("C4", "MID", "GND", "2.2uF") + FULL_WAVE + OUTPUT,
        direct(400, 12),
        (Plateau("LEG", "GND", 400), *(Plateau("X", end, 39.6, drops=0.4, surely=True) for end in ("S1", "S2"))),
    ),
    Example(
        "active clamp forward", "own check value", "simulated",
        INPUT + core("1-2:6, 3-4:1", "VIN", "DR", "S1", "SGND") + switch("Q1", "DR", "GND") + switch("Q2", "CL", "DR")
        + capacitor("C3", "CL", "VIN", "1uF") + FREEWHEEL + OUTPUT,
        direct(48, 3.9, "VIN: {voltage: 48 V, return: GND}, CL: {voltage: 46.1 V, return: VIN}"),
        (Plateau("DR", "GND", 94.7), Plateau("X", "S1", 7.6 + 3.9, drops=0.6), Plateau("X", "SGND", 7.9, drops=0.2)),
        "the clamp's voltage is declared; the series diode sees Vo more when the choke runs dry",
    ),
    Example(
        "isolated SEPIC", "own check value", "simulated",
        INPUT + core("1-2:20, 3-4:10", "P1", "GND", "S1", "SGND") + choke("L2", "VIN", "SW") + capacitor("C3", "SW", "P1", "10uF")
        + switch("Q1", "SW", "GND") + schottky("D1", "S1", "VO") + OUTPUT,
        direct(48, 11.9), (Plateau("SW", "GND", 72.6), Plateau("SW", "P1", 48.0), Plateau("VO", "S1", 36.1)),
    ),
    Example(
        "isolated Cuk", "own check value", "simulated",
        INPUT + core("1-2:20, 3-4:10", "P1", "GND", "S1", "SGND") + choke("L2", "VIN", "SW") + capacitor("C3", "SW", "P1", "10uF")
        + switch("Q1", "SW", "GND") + capacitor("C4", "S1", "Y", "10uF") + schottky("D1", "Y", "SGND") + choke("L3", "Y", "VO")
        + OUTPUT,
        direct(48, -11.9),
        (Plateau("SW", "GND", 73.0), Plateau("SW", "P1", 48.8, surely=True), Plateau("S1", "Y", 11.9), Plateau("SGND", "Y", 36.1)),
    ),
    Example(
        "fly-buck", "own check value", "simulated",
        INPUT + core("1-2:10, 3-4:15", "SW", "VP", "S1", "SGND") + switch("Q1", "VIN", "SW") + switch("Q2", "SW", "GND")
        + capacitor("C3", "VP", "GND", "22uF") + schottky("D1", "S1", "VO") + OUTPUT,
        "{supply: {dc: 48 V, origin: isolated}, rails: {VIN: {voltage: 48 V, return: GND}, VP: {voltage: 10.2 V, return: GND}, "
        "VO: {voltage: 15.1 V, return: SGND}}}",
        (Plateau("SW", "GND", 48.2), Plateau("VO", "S1", 71.8, drops=0.2)), "Vo2 + (Vin - Vo1) N2 / N1",
    ),
]  # fmt: skip


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda one: one.name)
def test_a_published_plateau_is_within_the_bounds_and_near_them(example):
    stress = analysis(example.circuit, example.declaration).stress
    for plateau in example.plateaus:
        where = f"{plateau.one} to {plateau.two}"
        found = stress.between(plateau.one, plateau.two)
        assert found is not None, where
        assert found.peak.surely <= plateau.volts * (1 + NEAR), where
        assert found.peak.never_above >= plateau.volts * (1 - NEAR), where
        if plateau.surely:
            assert found.peak.surely >= plateau.volts * (1 - NEAR) - plateau.drops, where
        else:
            assert found.peak.never_above <= plateau.volts * (1 + NEAR) + plateau.drops, where


def test_at_least_twelve_examples_come_from_outside():
    assert len({one.name.split(":")[0] for one in EXAMPLES if one.status != "simulated"}) >= 12
