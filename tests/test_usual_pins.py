"""Names of pins that only have numbers: what symbols spell, what usage implies, and what the board's other diodes confirm."""

from __future__ import annotations

from dataclasses import replace

import pytest

from checker.identify.usual_pins import with_pin_names
from checker.model.fact import Fact
from tests.circuits import choice, design


def named(parts, symbols=None, footprints=None):
    """{reference: ({number: name}, whether by usage alone)} of a small circuit with pins by number."""
    bare = design(parts)
    texts = {"symbol": symbols or {}, "footprint": footprints or {}}
    with_texts = {
        ref: replace(part, facts=tuple(Fact(name, said[ref]) for name, said in texts.items() if ref in said))
        for ref, part in bare.parts.items()
    }
    made = with_pin_names(replace(bare, parts=with_texts), choice(parts))
    return {
        ref: ({pin.number: pin.name for pin in part.pins}, any(pin.usual for pin in part.pins)) for ref, part in made.parts.items()
    }


@pytest.mark.parametrize(
    ("kind", "symbol", "names"),
    [
        ("mosfet", "Q_NMOS_GDS", "GDS"),
        ("mosfet", "Q_PMOS_GSD", "GSD"),
        ("bipolar", "Q_NPN_EBC", "EBC"),
        ("bridge", "D_Bridge_+-AA", "+-~~"),
        ("bridge", "D_Bridge_+A-A", "+~-~"),
        ("diode", "D_Schottky_Dual_CommonCathode_AKA", "AKA"),
    ],
)
def test_letters_of_a_symbol_are_its_pins_in_order(kind, symbol, names):
    pins = {str(at + 1): f"n{at}" for at in range(len(names))}
    assert named({"X1": (kind, pins)}, {"X1": symbol})["X1"] == ({str(at + 1): name for at, name in enumerate(names)}, False)


@pytest.mark.parametrize(
    ("kind", "symbol"), [("ic", "U_GDS"), ("mosfet", "Q_NMOS_BCE"), ("mosfet", "Q_NMOS"), ("bridge", "D_Bridge_++AA")]
)
def test_other_words_at_the_end_of_a_symbol_name_nothing(kind, symbol):
    pins = {str(at + 1): f"n{at}" for at in range(4 if kind == "bridge" else 3)}
    assert set(named({"X1": (kind, pins)}, {"X1": symbol})["X1"][0].values()) == {""}


def test_packages_that_everybody_numbers_alike():
    parts = {
        "Q1": ("mosfet", {"1": "a", "2": "b", "3": "c"}),
        "Q2": ("mosfet", {"1": "a", "2": "b", "3": "c"}),
        "Q3": ("bipolar", {"1": "a", "2": "b", "3": "c"}),
        "BR1": ("bridge", {"1": "a", "2": "b", "3": "c", "4": "d"}),
    }
    prints = {"Q1": "TO-220-3_Vertical", "Q2": "SOT-23", "Q3": "TO-92_Inline", "BR1": "Diode_Bridge_GBU"}
    found = named(parts, footprints=prints)
    assert found["Q1"] == ({"1": "G", "2": "D", "3": "S"}, True)
    assert found["Q2"] == ({"1": "G", "2": "S", "3": "D"}, True)
    assert set(found["Q3"][0].values()) == {""}
    assert found["BR1"] == ({"1": "+", "2": "~", "3": "~", "4": "-"}, True)


def test_the_cathode_of_a_diode_is_pin_1_and_others_confirm_it():
    alone = {"D1": ("diode", {"1": "A1", "2": "B1"}), "R1": ("resistor", {"1": "A1", "2": "B1"})}
    assert named(alone)["D1"] == ({"1": "K", "2": "A"}, True)
    rails = {f"D{at}": ("diode", {"1": "+12V", "2": f"n{at}"}) for at in range(3)}
    assert named(rails)["D0"] == ({"1": "K", "2": "A"}, False)
    turned = {f"D{at}": ("diode", {"2": "+12V", "1": f"n{at}"}) for at in range(3)}
    assert named(turned)["D0"] == ({"1": "A", "2": "K"}, False)


def test_one_diode_that_stands_against_the_others_is_told_by_them():
    parts = {f"D{at}": ("diode", {"1": "+12V", "2": "GND"}) for at in range(3)} | {"D9": ("diode", {"1": "GND", "2": "+12V"})}
    assert named(parts)["D9"] == ({"1": "K", "2": "A"}, False)


def test_pins_with_names_keep_them():
    parts = {"D1": ("diode", {"1": "GND", "2": "+12V"})}
    bare = design(parts)
    said = replace(
        bare.parts["D1"], pins=tuple(replace(pin, name=name) for pin, name in zip(bare.parts["D1"].pins, "AK", strict=True))
    )
    made = with_pin_names(replace(bare, parts={"D1": said}), choice(parts))
    assert [pin.name for pin in made.parts["D1"].pins] == ["A", "K"]


@pytest.mark.parametrize(
    ("nets", "kept"),
    [
        (("a", "b", "c", "d"), True),
        (("VBULK", "b", "c", "PGND"), True),
        (("PGND", "b", "c", "d"), False),  # + on ground
        (("a", "GND", "c", "d"), False),  # ~ on ground
        (("a", "b", "c", "+400V"), False),  # - on a rail
    ],
)
def test_a_bridge_whose_surroundings_say_otherwise_is_not_named_by_usage(nets, kept):
    parts = {"BR1": ("bridge", dict(zip("1234", nets, strict=True)))}
    pins, _ = named(parts, footprints={"BR1": "Diode_Bridge_GBU"})["BR1"]
    assert "".join(pins.values()) == ("+~~-" if kept else "")
