"""Writes the two demo designs from one description: python tests/demo_source.py [FOLDER], default fixtures/designs.

`greenhouse` is a complete 12 V, 1.5 A flyback supply for an irrigation controller; `greenhouse-wrong` is the same board with
the eight mistakes of its mistakes.yaml. Each gets greenhouse.net (S-expression), greenhouse.xml (its XML twin, same state) and
bom.csv. declaration.yaml and mistakes.yaml are written by hand. Change the board here, run the script, commit what it writes.

How the figures were chosen (formulas of common application notes for flyback supplies; tests/test_demo.py works them out again).
Component stress uses 264 V (240 V + 10 %), insulation the rated 240 V.

 mains        sqrt2 x 264 V = 373.4 V peak; input 18 W / 0.82 = 22 W;
              22 W / (90 V x power factor 0.6) = 0.41 A through F1 (2 A) and L1 (1 A)
 bulk low     sqrt(2 x 90^2 - 2 Po (1/(2 f) - tc)/(eta C)), C = 68 uF - 20 %, f = 50 Hz, tc = 3 ms: 102.7 V, taken as 100 V
 bulk high    373.4 V on 450 V (0.83); ripple 0.41 A line + 0.33 A switching = 0.52 A on 0.75 A
 oscillator   1.72/(RT CT) = 129 kHz, halved by the 3844 kind: f = 64.7 kHz, duty at most 48 %
 reflected    n (Vo + Vf) = 70/10 x (12 V + 0.7 V) = 88.9 V
 peak current sqrt(2 Pin/(Lp f)) = 1.06 A with Lp = 600 uH (discontinuous mode); 1.12 A with Lp - 10 %
 duty         Lp Ip f/100 V = 0.41; secondary conducts Lp Ip f/88.9 V = 0.46; together 0.88, below 1: discontinuous
 sense        0.9 V/0.68 ohm = 1.32 A at least, 1.1 V/0.68 ohm + 0.1 A delay = 1.72 A at most; r.m.s. 0.39 A, 0.11 W on 1 W
 flux         Lp I/(Np Ae) = 0.17 T, 0.28 T at 1.72 A, with Ae = 52.5 mm2 (E25)
 clamp        leakage 2 % = 12 uH: Vc (Vc - 88.9 V) = R x Llk Ip^2 f/2 gives 137 V and 1.3 W in R8 (3 W);
              at the current limit of 1.72 A 183 V and 2.2 W
 drain        373.4 + 88.9 = 462 V plateau, 510 V with the clamp, 556 V at the current limit, on 800 V (0.70); D1 the same on 1000 V
 output diode Vo + 373.4 V/n = 65.3 V plateau, 85 V with 30 % ringing, on 150 V (0.57); 1.5 A mean, 7.4 A peak on 10 A
 output caps  sqrt(Isec^2 - Io^2) with Isec = 7.4 A x sqrt(0.46/3) = 2.9 A: 2.5 A on two capacitors of 1.8 A each
 snubber      C V^2 f = 330 pF x (65.3 V)^2 x 64.7 kHz = 0.09 W in R15 (0.5 W)
 bias         12.7 V x 12/10 - 0.9 V = 14.3 V: stops at 11 V, starts at 16 V, part for 30 V; D2 14.3 + 373.4 x 12/70 = 78 V on 200 V
 start-up     3 x 150 kohm: 124.5 V and 0.10 W each (200 V, 0.25 W);
              at 127 V (90 V mains) 0.25 mA for a controller that needs 0.1 mA
 output       2.495 V x (1 + 38.3k/10k) = 12.05 V; D4 stands off 15 V and clamps at 24.4 V, the capacitors are for 25 V
 coupler      (12 - 1.2 - 2.5) V/1 kohm = 8.3 mA at most on 50 mA
 discharge    two strings of 2 x 1 Mohm on 220 nF: 1 Mohm x 220 nF = 0.22 s; with +10 % capacitor and +1 % resistors 0.244 s,
              6 V left after 1 s; one resistor open 0.49 s, 6 V left after 2 s; 132 V r.m.s. on each resistor (200 V), 17 mW
 touch        2 pi x 60 Hz x 1 nF x 264 V = 99.5 uA, with +20 % capacitor 119 uA r.m.s., 169 uA peak
 inrush       373.4 V/(10 ohm - 20 %) = 47 A on 60 A (BR1);
              0.5 x 373.4^2 x 82 uF/8 ohm = 0.71 A2s, 0.22 x 9.7 A2s allowed for F1 (T2A)
 surge        RV1 320 V a.c. >= 1.25 x 240 V = 300 V; lets through 845 V, BR1 is for 1000 V
 insulation   drain to output at 240 V, continuous-mode bound: 318 V r.m.s., 361 V with the clamp added to the plateau: reinforced
              creepage at most 2 x 3.7 = 7.4 mm; T1 has 9 mm. Coupler and CY1 at 240 to 250 V: 4.8 to 5.0 mm, both have 8 mm
"""

from __future__ import annotations

import csv
import io
import re
import sys
import uuid
import xml.etree.ElementTree as ET
from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from pathlib import Path

TITLE = "Greenhouse irrigation controller, 12 V supply"
DATE = "2026-03-02T09:00:00+0000"
SHEET = "greenhouse.sch"
IDENTITIES = uuid.UUID("6f0f2c1e-8f3b-5a57-9d52-3f2b1c7e4a10")  # any fixed value: identities must not change from run to run

HEADINGS = {
    "voltage": "Voltage",
    "current": "Current",
    "power": "Power",
    "tolerance": "Tolerance",
    "mark": "Class",
    "breaking": "Breaking capacity",
    "creepage": "Creepage",
    "clearance": "Clearance",
    "dti": "DTI",
    "test": "Isolation voltage",
    "working": "Isolation working voltage",
    "turns": "Turns",
    "windings": "Windings",
}

# symbol: library, description, pins as "number name type"; a pin without a name has two words
SYMBOLS = {
    "R": ("Passive", "Resistor", "1 passive, 2 passive"),
    "C": ("Passive", "Capacitor", "1 passive, 2 passive"),
    "C_Polarized": ("Passive", "Polarized capacitor", "1 passive, 2 passive"),
    "L": ("Passive", "Inductor", "1 passive, 2 passive"),
    "Fuse": ("Passive", "Fuse", "1 passive, 2 passive"),
    "Varistor": ("Passive", "Voltage dependent resistor", "1 passive, 2 passive"),
    "Thermistor_NTC": ("Passive", "Temperature dependent resistor, negative coefficient", "1 passive, 2 passive"),
    "D": ("Discrete", "Diode", "1 K passive, 2 A passive"),
    "D_Schottky": ("Discrete", "Schottky diode", "1 K passive, 2 A passive"),
    "D_TVS": ("Discrete", "Unidirectional transient-voltage-suppression diode", "1 K passive, 2 A passive"),
    "LED": ("Discrete", "Light emitting diode", "1 K passive, 2 A passive"),
    "Bridge_Rectifier": ("Discrete", "Bridge rectifier", "1 + passive, 2 AC passive, 3 AC passive, 4 - passive"),
    "NMOS": ("Discrete", "N-channel MOSFET", "1 G input, 2 D passive, 3 S passive"),
    "UC3844": (
        "Analog",
        "Current-mode PWM controller, 50 % duty",
        "1 COMP output, 2 VFB input, 3 ISENSE input, 4 RT/CT passive, 5 GND power_in, 6 OUT output, 7 VCC power_in, "
        "8 VREF power_out",
    ),
    "TL431": ("Analog", "Adjustable shunt reference", "1 REF passive, 2 A passive, 3 K passive"),
    "Optocoupler_817": (
        "Analog",
        "Optocoupler, transistor output",
        "1 A passive, 2 K passive, 3 E open_emitter, 4 C open_collector",
    ),
    "Choke_CommonMode": ("Magnetic", "Common-mode choke", "1 passive, 2 passive, 3 passive, 4 passive"),
    "Transformer_Flyback": (
        "Magnetic",
        "Flyback transformer: primary, bias, secondary",
        "1 P1 passive, 2 P2 passive, 3 B1 passive, 4 B2 passive, 7 S1 passive, 8 S2 passive",
    ),
    "Inlet_C8": ("Connector", "Mains inlet IEC 60320 C8, two poles", "1 L passive, 2 N passive"),
    "Terminal_1x02": ("Connector", "Terminal block, two poles", "1 Pin_1 passive, 2 Pin_2 passive"),
    "Header_1x04": ("Connector", "Pin header, four pins", "1 Pin_1 passive, 2 Pin_2 passive, 3 Pin_3 passive, 4 Pin_4 passive"),
}

CHIP = {  # size: power as people write it, power, limiting element voltage (the lowest of makers' data sheets)
    "0805": ("1/8W", "0.125 W", "150 V"),
    "1206": ("1/4W", "0.25 W", "200 V"),
    "2010": ("1/2W", "0.5 W", "200 V"),
    "2512": ("1W", "1 W", "200 V"),
}


@dataclass(frozen=True, slots=True)
class Part:
    """One part as drawn and as bought. nets: one per pin of the symbol, in its order; `?name` is a net nobody named."""

    ref: str
    symbol: str
    value: str
    footprint: str
    nets: tuple[str, ...]
    bought: str
    description: str
    mpn: str = ""
    columns: dict[str, str] = field(default_factory=dict)


def part(
    ref: str, symbol: str, value: str, footprint: str, nets: str, bought: str, description: str, mpn: str = "", **columns: str
) -> Part:
    return Part(ref, symbol, value, footprint, tuple(nets.split()), bought, description, mpn, columns)


def resistor(ref: str, value: str, nets: str, bought: str, size: str = "1206") -> Part:
    words, power, voltage = CHIP[size]
    text = f"RES {bought.upper()} 1% {words} {size}"
    return part(ref, "R", value, f"SMD:R_{size}", nets, bought, text, voltage=voltage, power=power, tolerance="1 %")


def chip_capacitor(
    ref: str, value: str, nets: str, bought: str, voltage: int, size: str, kind: str = "X7R", tolerance: int = 10
) -> Part:
    text = f"CAP CER {bought.upper()} {voltage}V {kind} {size} {tolerance}%"
    return part(ref, "C", value, f"SMD:C_{size}", nets, bought, text, voltage=f"{voltage} V", tolerance=f"{tolerance} %")


def electrolytic(ref: str, value: str, nets: str, bought: str, voltage: int, case: str, ripple: str) -> Part:
    text = f"CAP ALU {bought.upper()} {voltage}V 20% 105C RIPPLE {ripple} RADIAL {case.upper()}MM"
    return part(ref, "C_Polarized", value, f"THT:CP_{case}", nets, bought, text, voltage=f"{voltage} V", tolerance="20 %")


MAINS = (
    part("J1", "Inlet_C8", "C8 2.5A 250V", "THT:INLET_C8", "L N", "C8 inlet", "INLET IEC 60320 C8 2-POLE 2.5A 250VAC PCB",
         voltage="250 VAC", current="2.5 A", mark="IEC 60320-1"),
    part("F1", "Fuse", "T2A", "THT:FUSE_5x20", "L L_FUSED", "2A", "FUSE 2A 250VAC T 5x20 1500A CERAMIC", "T2AH250",
         voltage="250 VAC", current="2 A", breaking="1500 A", mark="IEC 60127-2"),
    part("RV1", "Varistor", "14D511K", "THT:DISC_P7.5", "L_FUSED N", "14D511K", "VARISTOR 320VAC 14MM DISC RADIAL", "14D511K",
         voltage="320 VAC", mark="IEC 61051-2"),
    part("CX1", "C", "220n X2", "THT:C_BOX_P15", "L_FUSED N", "220nF", "CAP FILM 0.22UF 310VAC X2 10% RADIAL 15MM",
         voltage="310 VAC", tolerance="10 %", mark="X2"),
    resistor("R1", "1M", "L_FUSED ?dis1", "1M"),
    resistor("R2", "1M", "?dis1 N", "1M"),
    resistor("R3", "1M", "L_FUSED ?dis2", "1M"),
    resistor("R4", "1M", "?dis2 N", "1M"),
    part("RT1", "Thermistor_NTC", "10R", "THT:DISC_P7.5", "L_FUSED ?ntc", "10R", "NTC INRUSH LIMITER 10 OHM 20% 3A 11MM DISC",
         "NTC10D-11", current="3 A", tolerance="20 %"),
    part("L1", "Choke_CommonMode", "2x10mH", "THT:CMC_UU10", "?ntc L_FILT N N_FILT", "10mH", "CHOKE COMMON MODE 2X10MH 1A 300VAC",
         voltage="300 VAC", current="1 A", windings="1-2, 3-4"),
    part("BR1", "Bridge_Rectifier", "KBP210", "THT:KBP", "VBULK L_FILT N_FILT PGND", "KBP210", "BRIDGE RECT 1000V 2A IFSM 60A KBP",
         "KBP210", voltage="1000 V", current="2 A"),
)  # fmt: skip

PRIMARY = (
    electrolytic("C1", "68u", "VBULK PGND", "68uF", 450, "18x40", "0.75A"),
    resistor("R5", "150k", "VBULK ?start1", "150k"),
    resistor("R6", "150k", "?start1 ?start2", "150k"),
    resistor("R7", "150k", "?start2 VCC", "150k"),
    part("R8", "R", "15k 3W", "THT:R_AXIAL_P20", "VBULK ?clamp", "15k", "RES 15K 5% 3W METAL OXIDE AXIAL 500V",
         voltage="500 V", power="3 W", tolerance="5 %"),
    chip_capacitor("C2", "10n 1kV", "VBULK ?clamp", "10nF", 1000, "1206"),
    part("D1", "D", "UF4007", "THT:DO-41", "?clamp DRAIN", "UF4007", "DIODE ULTRAFAST 1000V 1A DO-41", "UF4007",
         voltage="1000 V", current="1 A"),
    part("T1", "Transformer_Flyback", "GH18-E25", "THT:E25_8PIN", "VBULK DRAIN PGND ?bias SGND ?sec", "GH18-E25",
         "TRANSFORMER FLYBACK E25 600UH 10% TRIPLE INSULATED SECONDARY", "GH18-E25", tolerance="10 %", mark="IEC 61558-2-16",
         creepage="9 mm", clearance="8 mm", dti="0.5 mm", test="4200 Vrms", working="800 V peak",
         turns="1-2:70, 3-4:12, 7-8:10", windings="1-2, 3-4, 7-8"),
    part("Q1", "NMOS", "8N80", "THT:TO-220F", "GATE DRAIN SOURCE", "8N80", "MOSFET N-CH 800V 8A VGS 30V TO-220F", "8N80",
         voltage="800 V", current="8 A"),
    resistor("R9", "22R", "?drive GATE", "22R"),
    resistor("R10", "10k", "GATE PGND", "10k", "0805"),
    resistor("R11", "0R68", "SOURCE PGND", "0.68R", "2512"),
    resistor("R12", "1k", "SOURCE ISENSE", "1k", "0805"),
    chip_capacitor("C3", "470p", "ISENSE PGND", "470pF", 50, "0805", "C0G", 5),
    part("U1", "UC3844", "UC3844", "SMD:SOIC-8", "COMP PGND ISENSE ?rtct PGND ?drive VCC VREF", "UC3844",
         "IC PWM CTRL CURRENT MODE 50% DUTY START-UP 0.1MA VCC 30V SOIC-8", "UC3844", voltage="30 V"),
    resistor("R13", "13k3", "VREF ?rtct", "13.3k", "0805"),
    chip_capacitor("C4", "1n", "?rtct PGND", "1nF", 50, "0805", "C0G", 5),
    chip_capacitor("C5", "100n", "VREF PGND", "0.1uF", 50, "0805"),
    chip_capacitor("C6", "1n", "COMP PGND", "1nF", 50, "0805", "C0G", 5),
    chip_capacitor("C7", "100n", "VCC PGND", "0.1uF", 50, "0805"),
    electrolytic("C8", "22u", "VCC PGND", "22uF", 50, "5x11", "0.12A"),
    resistor("R14", "10R", "?bias ?rectified", "10R"),
    part("D2", "D", "UF4003", "THT:DO-41", "VCC ?rectified", "UF4003", "DIODE ULTRAFAST 200V 1A DO-41", "UF4003",
         voltage="200 V", current="1 A"),
)  # fmt: skip

BARRIER = (
    part("U2", "Optocoupler_817", "817C", "THT:DIP-4_W10.16mm", "?led ?sink PGND COMP", "817C",
         "OPTOISO 5KV TRANS CTR 200% 80V 50MA 4DIP 400MIL", "817C-W", voltage="80 V", current="50 mA", mark="IEC 60747-5-5",
         creepage="8 mm", clearance="8 mm", dti="0.4 mm", test="5000 Vrms", working="1140 V peak"),
    part("CY1", "C", "1n Y1", "THT:DISC_P10", "PGND SGND", "1nF", "CAP CER 1NF 500VAC Y1 20% DISC RADIAL 10MM", "DISC-Y1-102M",
         voltage="500 VAC", tolerance="20 %", mark="Y1", creepage="8 mm", clearance="8 mm", test="4000 Vrms"),
)  # fmt: skip

SECONDARY = (
    part("D3", "D_Schottky", "MBR10150", "THT:TO-220-2", "+12V_RAW ?sec", "MBR10150", "DIODE SCHOTTKY 150V 10A TO-220-2",
         "MBR10150", voltage="150 V", current="10 A"),
    resistor("R15", "22R", "?sec ?snub", "22R", "2010"),
    chip_capacitor("C9", "330p 500V", "?snub +12V_RAW", "330pF", 500, "1206", "C0G", 5),
    electrolytic("C10", "1000u", "+12V_RAW SGND", "1000uF", 25, "10x20", "1.8A"),
    electrolytic("C11", "1000u", "+12V_RAW SGND", "1000uF", 25, "10x20", "1.8A"),
    part("L2", "L", "3u3", "THT:L_RADIAL_D8", "+12V_RAW +12V", "3.3uH", "INDUCTOR 3.3UH 20% 4A ISAT 6A RADIAL 8MM",
         current="4 A", tolerance="20 %"),
    electrolytic("C12", "470u", "+12V SGND", "470uF", 25, "8x16", "0.9A"),
    chip_capacitor("C13", "1u", "+12V SGND", "1uF", 50, "0805"),
    resistor("R16", "1k", "+12V_RAW ?led", "1k"),
    resistor("R17", "1k", "?led ?sink", "1k", "0805"),
    part("U3", "TL431", "TL431", "THT:TO-92", "FB SGND ?sink", "TL431", "IC SHUNT REF ADJ 2.495V 1% 36V 100MA TO-92", "TL431",
         voltage="36 V", current="100 mA", tolerance="1 %"),
    resistor("R18", "38k3", "+12V FB", "38.3k", "0805"),
    resistor("R19", "10k", "FB SGND", "10k", "0805"),
    resistor("R20", "4k7", "FB ?comp", "4.7k", "0805"),
    chip_capacitor("C14", "100n", "?comp ?sink", "0.1uF", 50, "0805"),
    part("D4", "D_TVS", "SMBJ15A", "SMD:SMB", "+12V SGND", "SMBJ15A", "TVS 15V STANDOFF 24.4V CLAMP 600W UNIDIR SMB", "SMBJ15A",
         voltage="15 V", power="600 W"),
    resistor("R21", "1k5", "+12V SGND", "1.5k"),
    resistor("R22", "4k7", "+12V ?lamp", "4.7k", "0805"),
    part("D5", "LED", "green", "SMD:LED_0805", "SGND ?lamp", "green", "LED GREEN 20MA 0805", current="20 mA"),
    part("J2", "Terminal_1x02", "12V 1.5A", "THT:TERMINAL_P5.08", "+12V SGND", "terminal", "TERMINAL BLOCK 2-POLE 5.08MM 10A 300V",
         voltage="300 V", current="10 A"),
)  # fmt: skip

BOARD = MAINS + PRIMARY + BARRIER + SECONDARY


def spoil(board: Iterable[Part]) -> tuple[Part, ...]:
    """The board with seven of the eight mistakes and half of the last; the names are the ids of mistakes.yaml."""
    parts = {item.ref: item for item in board}
    # bleed-across-barrier
    parts["R23"] = replace(resistor("R23", "1M", "PGND SGND", "1M"), description="RES 1M 1% 1/4W 1206 STATIC BLEED")
    # ordinary-capacitor-across-barrier
    parts["CY1"] = part("CY1", "C", "1n", "THT:DISC_P10", "PGND SGND", "1nF", "CAP CER 1NF 1KV X7R 10% DISC RADIAL 10MM",
                        "DISC-1KV-102K", voltage="1 kV", tolerance="10 %")  # fmt: skip
    # tapped-before-fuse
    for ref in ("RV1", "CX1"):
        parts[ref] = replace(parts[ref], nets=("L", "N"))
    # header-on-primary
    parts["J3"] = part("J3", "Header_1x04", "SERVICE", "THT:HEADER_1x04_P2.54", "VCC COMP VREF PGND", "header",
                       "HEADER 1X4 2.54MM PROGRAMMING AND TEST")  # fmt: skip
    # capacitor-on-switching-node; its BOM value is half of bom-disagrees: 102 is the code of 1 nF, not 102 nF
    parts["CY2"] = replace(BARRIER[1], ref="CY2", value="102", nets=("DRAIN", "SGND"), bought="102nF")
    # no-discharge-path
    for ref in ("R1", "R2", "R3", "R4"):
        del parts[ref]
    # bulk-capacitor-voltage
    parts["C1"] = electrolytic("C1", "68u", "VBULK PGND", "68uF", 250, "18x40", "0.75A")
    return tuple(parts.values())


# bom-disagrees, the other half: bought, never drawn
LEFT_OVER = part(
    "F2", "Fuse", "", "", "", "115C 2A", "THERMAL CUT-OFF 115C 2A 250VAC AXIAL", "TCO115-2A", voltage="250 VAC", current="2 A"
)

DESIGNS = {"greenhouse": (BOARD, BOARD), "greenhouse-wrong": (spoil(BOARD), (*spoil(BOARD), LEFT_OVER))}


def natural(text: str) -> list[tuple[int, str]]:
    return [(int(word), "") if word.isdigit() else (-1, word) for word in re.split(r"(\d+)", text) if word]


def pins(symbol: str) -> list[tuple[str, str, str]]:
    """(number, name, type) of each pin."""
    words = [pin.split() for pin in SYMBOLS[symbol][2].split(", ")]
    return [(pin[0], pin[1] if len(pin) == 3 else "", pin[-1]) for pin in words]


def tree(board: Iterable[Part]) -> ET.Element:
    """The netlist as an element tree, the XML form's own shape; the S-expression is written from it."""
    board = sorted(board, key=lambda item: natural(item.ref))
    root = ET.Element("export", version="E")
    design = ET.SubElement(root, "design")
    for tag, text in (("source", SHEET), ("date", DATE), ("tool", "demo_source.py")):
        ET.SubElement(design, tag).text = text
    block = ET.SubElement(ET.SubElement(design, "sheet", number="1", name="/", tstamps="/"), "title_block")
    for tag, text in (("title", TITLE), ("company", ""), ("rev", "1.0"), ("date", "2026-03-02"), ("source", SHEET)):
        ET.SubElement(block, tag).text = text
    ET.SubElement(block, "comment", number="1", value="18 W, protection class II, 100-240 V")

    components = ET.SubElement(root, "components")
    for item in board:
        library, what, _ = SYMBOLS[item.symbol]
        comp = ET.SubElement(components, "comp", ref=item.ref)
        ET.SubElement(comp, "value").text = item.value
        ET.SubElement(comp, "footprint").text = item.footprint
        named = {"Footprint": item.footprint, "Datasheet": "", "Description": what} | ({"MPN": item.mpn} if item.mpn else {})
        fields = ET.SubElement(comp, "fields")
        for name, text in named.items():
            ET.SubElement(fields, "field", name=name).text = text
        ET.SubElement(comp, "libsource", lib=library, part=item.symbol, description=what)
        own = {"MPN": item.mpn} if item.mpn else {}
        for name, text in (own | {"Sheetname": "Root", "Sheetfile": SHEET}).items():
            ET.SubElement(comp, "property", name=name, value=text)
        ET.SubElement(comp, "sheetpath", names="/", tstamps="/")
        ET.SubElement(comp, "tstamps").text = str(uuid.uuid5(IDENTITIES, item.ref))

    libparts = ET.SubElement(root, "libparts")
    used = {item.symbol: re.sub(r"\d+$", "", item.ref) for item in reversed(board)}
    for symbol in sorted(used, key=lambda name: (SYMBOLS[name][0], name)):
        library, what, _ = SYMBOLS[symbol]
        libpart = ET.SubElement(libparts, "libpart", lib=library, part=symbol)
        ET.SubElement(libpart, "description").text = what
        ET.SubElement(libpart, "docs").text = "~"
        fields = ET.SubElement(libpart, "fields")
        for name, text in (("Reference", used[symbol]), ("Value", symbol), ("Footprint", ""), ("Datasheet", "~")):
            ET.SubElement(fields, "field", name=name).text = text
        drawn = ET.SubElement(libpart, "pins")
        for number, name, kind in pins(symbol):
            ET.SubElement(drawn, "pin", num=number, name=name, type=kind)

    libraries = ET.SubElement(root, "libraries")
    for library in sorted({SYMBOLS[symbol][0] for symbol in used}):
        ET.SubElement(ET.SubElement(libraries, "library", logical=library), "uri").text = f"{library}.lib"

    nets: dict[str, list[tuple[str, str, str, str]]] = {}
    for item in board:
        for net, pin in zip(item.nets, pins(item.symbol), strict=True):
            nets.setdefault(net, []).append((item.ref, *pin))
    called = {automatic(nodes) if net.startswith("?") else net: nodes for net, nodes in nets.items()}
    assert len(called) == len(nets), "two nets of one name"
    section = ET.SubElement(root, "nets")
    for code, (net, nodes) in enumerate(sorted(called.items()), start=1):
        element = ET.SubElement(section, "net", {"code": str(code), "name": net, "class": "Default"})
        for ref, number, name, kind in nodes:
            node = {"ref": ref, "pin": number} | ({"pinfunction": name} if name else {}) | {"pintype": kind}
            ET.SubElement(element, "node", node)
    return root


def automatic(nodes: list[tuple[str, str, str, str]]) -> str:
    """The name a drawing program makes up: from the first pin that has a name, else from the first pin."""
    ref, number, name, _ = next((node for node in nodes if node[2]), nodes[0])
    word = name.replace("/", "{slash}") if name else f"Pad{number}"
    return f"Net-({ref}-{word})"


def quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def sexpr(element: ET.Element, indent: int = 0) -> str:
    """The element as a form: attributes become one-atom children, text an atom, except where the two forms differ."""
    start = f"{'  ' * indent}({element.tag}"
    atoms = "".join(f" ({name} {quoted(value)})" for name, value in element.attrib.items())
    if element.text and element.text.strip():
        atoms += f" {quoted(element.text)}"
    return "\n".join([start + atoms, *(sexpr(child, indent + 1) for child in element)]) + ")"


def table(board: Iterable[Part]) -> str:
    """The bill of materials; parts that differ in nothing but their reference share a row."""
    rows: dict[tuple[str, ...], list[str]] = {}
    for item in board:
        key = (item.bought, item.description, "any", item.mpn, *(item.columns.get(name, "") for name in HEADINGS))
        rows.setdefault(key, []).append(item.ref)
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(["Reference", "Qty", "Value", "Description", "Manufacturer", "MPN", *HEADINGS.values()])
    for key, refs in rows.items():
        writer.writerow([", ".join(refs), len(refs), *key])
    return out.getvalue()


def main(folder: Path) -> None:
    for name, (drawn, bought) in DESIGNS.items():
        target = folder / name
        target.mkdir(parents=True, exist_ok=True)
        root = tree(drawn)
        files = {"greenhouse.net": sexpr(root) + "\n", "bom.csv": table(bought)}
        ET.indent(root)
        files["greenhouse.xml"] = '<?xml version="1.0" encoding="UTF-8"?>\n' + ET.tostring(root, encoding="unicode") + "\n"
        for file, text in files.items():
            (target / file).write_text(text, encoding="utf-8", newline="\n")


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parents[1] / "fixtures" / "designs")
