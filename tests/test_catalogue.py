"""Ratings of generic types, package names and windings.

The figures are those that makers' data sheets share, written here from memory a second time and row by row, not computed.
"""

import pytest

from checker.identify import catalogue, packages, windings
from checker.model.candidate import KINDS, Winding

REVERSE = {  # type: repetitive reverse voltage, mean current
    "1N4001": (50, 1),
    "1N4002": (100, 1),
    "1N4003": (200, 1),
    "1N4004": (400, 1),
    "1N4005": (600, 1),
    "1N4006": (800, 1),
    "1N4007": (1000, 1),
    "UF4003": (200, 1),
    "UF4007": (1000, 1),
    "HER104": (300, 1),
    "HER105": (400, 1),
    "HER108": (1000, 1),
    "FR107": (1000, 1),
    "1N4148": (75, 0.15),
    "1N5817": (20, 1),
    "1N5819": (40, 1),
    "1N5820": (20, 3),
    "1N5822": (40, 3),
    "SS12": (20, 1),
    "SS14": (40, 1),
    "SS16": (60, 1),
    "SS34": (40, 3),
    "SS36": (60, 3),
    "ES1A": (50, 1),
    "ES1D": (200, 1),
    "ES1J": (600, 1),
    "MB6S": (600, 0.5),
    "MB10S": (1000, 0.5),
    "DB107": (1000, 1),
    "KBP206": (600, 2),
    "KBP210": (1000, 2),
}
ZENERS = {"1N4728A": 3.3, "1N4733": 5.1, "1N4739A": 9.1, "1N4742A": 12, "1N4749": 24, "1N4764": 100, "BZX84C11": 11}
ZENERS |= {"BZX55C5V1": 5.1, "BZT52C3V3": 3.3, "BZX84-C12": 12, "BZX55-B6V8": 6.8}
SWITCHES = {"2N7002": 60, "BSS138": 50, "2N3904": 40, "MMBT3904": 40, "2N2222A": 40, "2N2222": 30, "BC847B": 45, "BC817-40": 45}


# highest continuous a.c. voltage of varistors by type code, and the voltage at 1 mA
VARISTORS = {
    "10D471K": (300, 470),
    "MOV-10D471K": (300, 470),
    "MOV-14D471KTR": (300, 470),
    "471KD10": (300, 470),
    "TVR10471": (300, 470),
    "14D511K": (320, 510),
    "07D431K": (275, 430),
    "10D391K": (250, 390),
    "10D561K": (350, 560),
    "14D621K": (385, 620),
    "20D201K": (130, 200),
    "20D102K": (625, 1000),
    "S14K275": (275, 430),
    "S10K300": (300, 470),
    "S20K250": (250, 390),
    "B72214S0271K101": (275, 430),
    "B72210S0301K101": (300, 470),
    "V275LA20AP": (275, 430),
}
SURGES = {"1N4007": 30, "UF4007": 30, "FR107": 30, "RS1M": 30, "MB6S": 30, "DB107": 30, "KBP210": 60}


@pytest.mark.parametrize("name", VARISTORS)
def test_varistor_voltage(name: str) -> None:
    found = catalogue.find(name)
    assert found is not None
    assert (found.kind, found.ratings["voltage"]) == ("varistor", (VARISTORS[name][0], "V", "rms"))
    assert found.ratings["varistor_voltage"] == (VARISTORS[name][1], "V", "dc")
    assert "memory" in found.source


@pytest.mark.parametrize("name", SURGES)
def test_surge_current(name: str) -> None:
    found = catalogue.find(name)
    assert found is not None
    assert found.ratings["surge_current"] == (SURGES[name], "A", "peak")


@pytest.mark.parametrize("name", REVERSE)
def test_reverse_voltage_and_current(name: str) -> None:
    found = catalogue.find(name)
    assert found is not None
    assert found.ratings["voltage"] == (REVERSE[name][0], "V", "peak")
    assert found.ratings["current"] == (REVERSE[name][1], "A", "dc")


@pytest.mark.parametrize("name", ZENERS)
def test_zener_voltage(name: str) -> None:
    found = catalogue.find(name)
    assert found is not None
    assert (found.kind, found.ratings["zener_voltage"]) == ("zener", (ZENERS[name], "V", "dc"))


@pytest.mark.parametrize("name", SWITCHES)
def test_transistor_voltage(name: str) -> None:
    found = catalogue.find(name)
    assert found is not None
    assert found.ratings["voltage"] == (SWITCHES[name], "V", "peak")


def test_every_zener_of_the_1n47_series_is_an_e24_value_or_close() -> None:
    """IEC 60063 E24 figures; the series skips some and never leaves it."""
    e24 = {10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91}
    last = 0.0
    for number in range(4728, 4765):
        found = catalogue.find(f"1N{number}A")
        assert found is not None
        volts = found.ratings["zener_voltage"][0]
        assert volts > last
        assert round(volts * 10 if volts < 10 else volts) in e24 | {100}
        last = volts


def test_suppressors_and_references() -> None:
    assert catalogue.find("SMBJ6.5CA").ratings["voltage"] == (6.5, "V", "dc")  # type: ignore[union-attr]
    assert catalogue.find("SMAJ58A").ratings["voltage"][0] == 58  # type: ignore[union-attr]
    assert catalogue.find("P6KE200A").ratings["zener_voltage"][0] == 200  # type: ignore[union-attr]
    tl431 = catalogue.find("TL431AIDBZR").ratings  # type: ignore[union-attr]
    assert (tl431["voltage"][0], tl431["reference"][0], tl431["minimum_current"]) == (36, 2.495, (0.001, "A", "dc"))
    tlv431 = catalogue.find("TLV431").ratings  # type: ignore[union-attr]
    assert (tlv431["voltage"][0], tlv431["reference"][0]) == (6, 1.24)


def test_types_in_longer_texts_are_found() -> None:
    for text, name in (("1N5819S4/SOD123", "1N5819"), ("DIODE 1N4007 DO-41", "1N4007"), ("ES1J R2", "ES1J"), ("1n4148w", "1N4148")):
        found = catalogue.find(text)
        assert found is not None, text
        assert found.type == name


@pytest.mark.parametrize(
    "text",
    [
        "",
        "10k",
        "1N40077",
        "SS8050",
        "SS345",
        "1N4765",
        "100n/50V",
        "LM4315",
        "BC8471",
        "R1206",
        "MB5S",
        "S1",
        "10D-9",
        "NTC10D-11",
        "5D-11",
        "10D999K",
        "S14K999",
    ],
)
def test_other_texts_name_no_generic_type(text: str) -> None:
    assert catalogue.find(text) is None


def test_rows_are_whole() -> None:
    for name in (*REVERSE, *ZENERS, *SWITCHES, "TL431", "SMCJ33A", "P4KE15CA", "1.5KE200A"):
        found = catalogue.find(name)
        assert found is not None, name
        assert found.kind in KINDS
        assert "memory" in found.source
        assert found.ratings
        assert all(
            value > 0 and unit in ("V", "A", "W") and form in ("dc", "peak", "") for value, unit, form in found.ratings.values()
        )


PINS = {
    "DIP-4_W7.62mm": 4,
    "Package_SO:SOIC-16W_7.5x10.3mm_P1.27mm": 16,
    "SMD_Packages:SO-16-W": 16,
    "SOIC127P600X175-16N": 16,
    "SON127P800X600X65-8N": 8,
    "TSSOP-20_4.4x6.5mm_P0.65mm": 20,
    "LQFP-48_7x7mm_P0.5mm": 48,
    "Package_DFN_QFN:QFN-24-1EP_4x4mm": 24,
    "QFN32_EP(33)_5.00x5.00x0.90mm": 32,
    "SIP-7": 7,
    "Converter_DCDC_SIP4": 4,
    "SMDIP-4_W9.53mm": 4,
    "TO-220-3_Vertical": 3,
    "SOT-23-5": 5,
    "SOT-23": 3,
    "8-SOIC": 8,
    "Relay_SPDT_5-pin": 5,
    "Connector_PinHeader_2.54mm:PinHeader_1x04_P2.54mm": None,
    "TerminalBlock_1x02_P5.08mm": None,
    "IDC-Header_2x03": None,
    "C_0603_1608Metric": None,
    "CP_Radial_D10.0mm_P5.00mm": None,
    "D_DO-41_SOD81": None,
    "Optocoupler_SMD_HandSoldering_KPC357_": None,
    "": None,
}
SPANS = {
    "DIP-4_W7.62mm": 7.62,
    "Package_DIP:DIP-4_W10.16mm": 10.16,
    "SMDIP-4_W9.53mm": 9.53,
    "DIP-8": None,
    "C_Rect_L18.0mm_W5.0mm_P15.00mm": None,
    "R_Axial_DIN0207_L6.3mm_W2.5mm": None,
    "": None,
}
SIZES = {
    "C_0603_1608Metric": "0603",
    "C_0201_0603Metric": "0201",
    "R0402": "0402",
    "stmbl:C_1808": "1808",
    "R_1206": "1206",
    "rlc:C_0603_5MIL_DWS": "0603",
    "C_1808(4520)_5MIL": "1808",
    "LED_0805": "0805",
    "1206": "1206",
    "R_Axial_DIN0207_L6.3mm": None,
    "R_Axial_DIN0414": None,
    "Crystal_SMD_3225-4Pin_3.2x2.5mm": None,
    "PinHeader_1x04": None,
    "L_6045": None,
    "C_1608Metric": None,
    "": None,
}


@pytest.mark.parametrize("name", PINS)
def test_body_pins(name: str) -> None:
    assert packages.body_pins(name) == PINS[name]


@pytest.mark.parametrize("name", SPANS)
def test_pad_span(name: str) -> None:
    assert packages.pad_span(name) == SPANS[name]


@pytest.mark.parametrize("name", SIZES)
def test_size(name: str) -> None:
    assert packages.size(name) == SIZES[name]


THREE = (Winding(("1", "2"), (128.0,)), Winding(("3", "4"), (16.0,)), Winding(("5", "6"), (8.0,)))
TAPPED = (Winding(("7", "8", "10"), (6.0, 6.0)),)


@pytest.mark.parametrize(
    ("turns", "pins", "description", "expected"),
    [
        ("1-2:128, 3-4:16, 5-6:8", "", "", THREE),
        ("1-2:128; 3-4:16; 5-6:8", "", "", THREE),
        ("", "1-2, 3-4", "", (Winding(("1", "2")), Winding(("3", "4")))),
        ("7-8-10: 6+6", "", "", TAPPED),
        ("7-8-10:6:6", "", "", TAPPED),
        ("7-8-10:6", "", "", ()),
        ("S1-S2:4.5", "", "", (Winding(("S1", "S2"), (4.5,)),)),
        ("not known", "1-2, 3-4", "", (Winding(("1", "2")), Winding(("3", "4")))),
        ("", "", "XFMR FLYBACK EE16 128T:8T BIAS 16T 3KV 1-2:128, 3-4:16, 5-6:8", THREE),
        (
            "",
            "",
            "turns 128:16:8 (primary 1-2, aux 3-4, secondary 5-6)",
            (
                Winding(("1", "2"), (128.0,), "primary"),
                Winding(("3", "4"), (16.0,), "aux"),
                Winding(("5", "6"), (8.0,), "secondary"),
            ),
        ),
        ("", "", "turns 128:16 (primary 1-2, aux 3-4, secondary 5-6)", ()),
        ("", "", "XFMR GATE DRIVE 1:1:1 REINFORCED 4KV", ()),
        (
            "",
            "",
            "Printtrafo 3 VA, Wicklungen 1-5, 6-7, 8-9, 4000 Vrms",
            (Winding(("1", "5")), Winding(("6", "7")), Winding(("8", "9"))),
        ),
        ("", "", "windings 1-2 / 3-4, 3 kV", (Winding(("1", "2")), Winding(("3", "4")))),
        ("", "", "0.1 to 0.2 A, 10-20 turns", ()),
        ("", "", "0.1 to 0.2 A, windings 10-20", ()),
        ("", "", "windings 1-2, 2-3", ()),
        ("1-1:4", "", "", ()),
        ("1-2:3, 2-4:5", "", "", (Winding(("1", "2", "4"), (3.0, 5.0)),)),  # a tap at 2
        ("1-2:3, 4-2:5", "", "", ()),
        ("1-2:0", "", "", ()),
        ("1-2:-4", "", "", ()),
        ("1-2:x", "", "", ()),
        (",,,", "", "", ()),
        ("1-2:3," * 400, "", "", ()),
        ("1-" * 5000, "2-" * 5000, "3-4:" * 5000, ()),
    ],
)
def test_windings(turns: str, pins: str, description: str, expected: tuple[Winding, ...]) -> None:
    assert windings.read(turns, pins, description) == expected
