"""Which words of a schematic are about the part, and where a value may stand."""

import pytest
from score import told

from checker.identify.described import of_symbol
from checker.identify.values import whole
from checker.model.circuit import Part, Pin
from checker.model.fact import Fact, Trust


def candidate(ref, *facts):
    stated = tuple(Fact(name, text, trust=trust) for name, text, trust in facts)
    return told(Part(ref, (Pin("1"), Pin("2")), stated, ()))


def drawn(ref, **texts):
    return candidate(ref, *((name.replace("__", ":"), text, Trust.NETLIST) for name, text in texts.items()))


@pytest.mark.parametrize(
    ("symbol", "names", "expected"),
    [
        ("1N4148WS", ("B5819W",), True),
        ("LM7805_TO220", ("L7812CV",), True),
        ("1N4148WS", ("1N4148W-7-F",), False),
        ("2N3904", ("MMBT3904",), False),
        ("1N4148", ("D", "1N4148W"), False),
        ("1N4148", ("signal diode",), False),
        ("D_Schottky", ("B5819W",), False),
        ("LED_0603", ("KT-0805R",), False),
        ("CONN_01X04", ("B5819W",), False),
        ("", ("B5819W",), False),
    ],
)
def test_a_symbol_of_another_type(symbol, names, expected):
    assert of_symbol(symbol, names) is expected


def test_a_description_of_another_type_rates_nothing():
    words = "75V 0.15A Fast switching Diode"
    assert drawn("D1", value="1N4148W", symbol="1N4148", description=words).ratings["voltage"].value == 75.0
    assert drawn("D1", value="XB5822", symbol="1N4148", description=words).ratings == {}


def test_a_description_of_the_bill_is_about_the_part_bought():
    found = candidate(
        "D1",
        ("value", "XB5822", Trust.NETLIST),
        ("symbol", "1N4148", Trust.NETLIST),
        ("description", "DIODE SCHOTTKY 40V 3A", Trust.BOM),
    )
    assert found.ratings["voltage"].value == 40.0


def test_marks_of_another_type_are_not_taken_over():
    words = "DC Optocoupler, reinforced insulation, IEC 60747-5-5"
    assert drawn("U1", value="PC817", symbol="PC817", description=words).marks
    assert not drawn("U1", value="EL3021", symbol="PC817", description=words).marks


@pytest.mark.parametrize(
    ("value", "expected"), [("24V OUT", None), ("Breakout 1.1v", None), ("300V", 300.0), ("24V 10A", 24.0), ("2 pin", None)]
)
def test_a_low_voltage_in_the_value_of_a_connector_is_a_label(value, expected):
    rating = drawn("J1", value=value, symbol="Conn_01x02").ratings.get("voltage")
    assert (None if rating is None else rating.value) == expected


@pytest.mark.parametrize(
    ("ref", "texts", "expected"),
    [
        ("R1", {"value": "C25744", "symbol": "R", "field__R": "33r"}, 33.0),
        ("R1", {"value": "0201WMJ0000TEE", "symbol": "R", "field__R": "0"}, 0.0),
        ("R1", {"value": "RC0201FR-0733RL", "symbol": "R"}, 33.0),
        ("R1", {"value": "4k7", "symbol": "R", "field__R": "10k"}, 4700.0),
        ("C1", {"value": "CL03A104KO3NNNC", "symbol": "C", "type": "100nF"}, 100e-9),
        ("C1", {"value": "X1", "symbol": "C", "field__R": "10k"}, None),
        ("L1", {"value": "FXL0530-4R7-M", "symbol": "L"}, 4.7e-6),
        ("Y1", {"value": "Q13FC", "symbol": "Crystal", "field__Freq": "32.768k"}, 32768.0),
        ("D1", {"value": "D", "symbol": "D_Zener", "type": "BZX84C6V2L"}, 6.2),
    ],
)
def test_where_a_value_may_stand(ref, texts, expected):
    value = drawn(ref, **texts).value
    assert (None if value is None else value.value) == (None if expected is None else pytest.approx(expected))


@pytest.mark.parametrize("text", ["1200", "104", "100nF 0603", "GRM188R71C104", ""])
def test_a_part_number_is_no_value(text):
    assert whole(text, "capacitor") is None
