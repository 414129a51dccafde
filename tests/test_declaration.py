"""The declaration: the whole contract read into the expected object, short forms, and every mistake with its line."""

from pathlib import Path

import pytest

from checker import declaration, files
from checker.errors import InputError
from checker.files import Blob
from checker.model.candidate import KINDS, Mark, Winding
from checker.model.declaration import (
    Conductor,
    Declaration,
    DeclaredBarrier,
    DeclaredDomain,
    DeclaredPart,
    Output,
    Range,
    Supply,
    Variant,
)
from checker.model.fact import ATTRIBUTES, Fact, Source, Trust
from checker.model.kind_words import SYNONYMS
from checker.readers import parts_file

FOLDER = Path(__file__).resolve().parents[1] / "fixtures" / "declarations"


def read(text: str) -> Declaration:
    return declaration.read(Blob("d.yaml", text.encode()))


def fixture(name: str) -> Declaration:
    return declaration.read(files.read(FOLDER / name, shown=name))


def at(line: int, column: int, path: str = "full.yaml") -> Source:
    return Source(path, line, column)


def test_the_full_contract():
    def one(value: float, unit: str, form: str, line: int, column: int, text: str) -> Range:
        return Range(value, value, unit, form, at(line, column), text)

    def fact(attribute: str, value: str | float, line: int, column: int, unit: str = "", form: str = "", text: str = "") -> Fact:
        return Fact(attribute, value, at(line, column), Trust.DECLARED, unit, form, text)

    assert fixture("full.yaml") == Declaration(
        path="full.yaml",
        supplies=(
            Supply(
                name="supply",
                kind="mains",
                voltage=Range(100, 240, "V", "rms", at(3, 10), "100-240 V"),
                phases=1,
                tolerance=one(10, "%", "", 5, 14, "10 %"),
                frequency=Range(50, 60, "Hz", "", at(6, 14), "50-60 Hz"),
                protection_class="II",
                overvoltage_category="II",
                connection="pluggable-A",
                outputs=(Output("VOUT", one(5, "V", "", 10, 19, "5 V")),),
                power=one(5, "W", "", 11, 10, "5 W"),
                source=at(3, 3),
            ),
        ),
        environment={
            "pollution_degree": fact("pollution_degree", "2", 12, 33),
            "altitude": fact("altitude", 2000, 12, 46, "m", text="2000 m"),
            "material_group": fact("material_group", "IIIb", 12, 70),
            "ambient": fact("ambient", 40, 12, 85, "degC", text="40 degC"),
        },
        rulesets=("iec-62368-1", "derating-commercial"),
        impulse=one(1500, "V", "peak", 14, 10, "1500 V"),
        barriers=(
            DeclaredBarrier(
                ("logic", "field"),
                "basic",
                one(150, "V", "rms", 16, 68, "150 V"),
                one(212, "V", "peak", 16, 81, "212 V"),
                at(16, 5),
            ),
        ),
        domains={
            "field": DeclaredDomain("field", ("GNDI",), source=at(17, 11)),
            "logic": DeclaredDomain("logic", ("GND",), "secondary", True, at(17, 26)),
        },
        rails=(Output("VPFC", one(400, "V", "", 18, 15, "400 V")),),
        parts={
            "T1": DeclaredPart(
                "T1",
                (fact("kind", "transformer", 20, 14),),
                windings=(Winding(("1", "3"), (40,)), Winding(("4", "5"), (6,)), Winding(("7", "8", "10"), (6, 6))),
                core="floating",
                source=at(20, 3),
            ),
            "C7": DeclaredPart(
                "C7",
                (fact("rating:voltage", 250, 21, 40, "V", "rms", "250 V rms"),),
                marks=(Mark("Y1", fact("mark", "Y1", 21, 16)),),
                source=at(21, 3),
            ),
        },
        conductors=(Conductor("heatsink", ("Q1.2",), True, at(22, 14)),),
        unreachable={"J5": at(23, 15)},
        variants={"eu": Variant("eu", ("R9",), ("C8",), at(24, 12))},
        concessions="concessions.yaml",
    )


def test_short_forms_and_several_supplies():
    found = fixture("telecom.yaml")
    line, service = found.supplies
    assert (line.name, line.kind, line.origin, line.voltage.low, line.voltage.high, line.voltage.form) == (
        *("line", "dc", "isolated"),
        *(36, 72, "dc"),
    )
    assert [(output.net, output.voltage.low, output.return_net) for output in line.outputs] == [
        ("VOUT", 5, "SGND"),
        ("VNEG", -12, ""),
    ]
    assert line.outputs[0].current is not None
    assert (line.outputs[0].current.low, line.outputs[0].current.high, line.outputs[0].current.unit) == (1.5, 2, "A")
    assert (service.voltage.low, service.voltage.form, service.connection, service.protection_class) == (
        230,
        "rms",
        "permanent",
        "I",
    )
    assert service.frequency is not None
    assert (service.frequency.low, service.frequency.high) == (50, 60)
    (barrier,) = found.barriers
    assert barrier.rms is not None
    assert barrier.peak is not None
    assert [(b.high, b.form) for b in (barrier.rms, barrier.peak)] == [(72, "rms"), (72, "peak")]
    assert {name: domain.nets for name, domain in found.domains.items()} == {"field": ("GNDI",), "mains": ("L", "N", "null")}
    assert found.outputs == (
        *line.outputs,
        Output("VBUS", Range(380, 400, "V", "dc", at(16, 25, "telecom.yaml"), "380-400 V dc"), "PGND"),
    )
    assert found.conductors[0].touches == ("J1", "Q1.2")
    assert list(found.unreachable) == ["J5"]
    assert found.rulesets == ("house.yaml",)


def test_what_is_declared_about_a_part():
    parts = fixture("telecom.yaml").parts
    said = {fact.attribute: (fact.value, fact.unit, fact.form) for fact in parts["U1"].facts}
    assert said == {
        "kind": ("isolated-module", "", ""),
        "rating:temperature": (85, "degC", ""),
        "rating:isolation_working": (630, "V", "peak"),
        "rating:isolation_test": (5000, "V", "rms"),
        "rating:clearance": (8, "mm", ""),
        "rating:creepage": (8.128, "mm", ""),  # 0.32 x 25.4 mm
        "rating:through_insulation": (0.4, "mm", ""),
        "material_group": ("IIIa", "", ""),
    }
    assert all(fact.trust is Trust.DECLARED and fact.text.endswith("data sheet, page 4") for fact in parts["U1"].facts)
    assert [(mark.name, mark.record, mark.valid_until) for mark in parts["U1"].marks] == [
        ("X1", "", ""),
        ("Y2", "", ""),
        ("IEC 60747-5-5", "LIC 12", "2027-01-31"),
    ]
    assert parts["U1"].windings == (Winding(("1", "2")), Winding(("3", "4", "5")))
    assert parts["01"].windings == (Winding(("1", "2"), (40,)),)
    assert {fact.attribute: fact.value for fact in parts["01"].facts} == {"kind": "optocoupler", "value": "4n7", "fitted": True}


def test_no_supply_is_not_the_same_as_nothing_said():
    assert fixture("none.yaml").no_supply == at(1, 9, "none.yaml")
    assert read("supply:").no_supply is None
    assert read("supply: null") == read("") == Declaration(path="d.yaml")


def test_pins_and_references_are_text():
    found = read("parts: {01: {windings: [{pins: [01, 1e3]}]}}\nunreachable: [1_0, no, 12:30]")
    assert found.parts["01"].windings == (Winding(("01", "1e3")),)
    assert list(found.unreachable) == ["1_0", "no", "12:30"]


def test_units_at_the_edge():
    found = read("supply: {dc: 0.048 kV, power: 500 mW}\nenvironment: {altitude: 6500 ft, ambient: 104 degF}")
    assert found.supplies[0].voltage.high == 48
    assert found.supplies[0].power is not None
    assert found.supplies[0].power.high == 0.5
    assert (found.environment["altitude"].value, found.environment["ambient"].value) == (1981.2, 40)


@pytest.mark.parametrize("said", ["300 V rms", "300 Vpk"])
def test_a_working_voltage_of_one_form_leaves_the_other_open(said):
    (barrier,) = read(f"barriers: [{{between: [a, b], working_voltage: {said}}}]").barriers
    assert (barrier.rms is None, barrier.peak is None) == (said.endswith("pk"), said.endswith("rms"))


@pytest.mark.parametrize(
    "text, message",
    [
        ("suply: {mains: 230 V}", "1: unknown key `suply`; did you mean `supply`?"),
        ("\nsupply: {mian: 230 V}", "2: `supply` lacks the key `mains`; is it meant by `mian`?; expected mains: 230 V or dc: 24 V"),
        ("supply:\n  mains: 230", "2: `supply.mains` has no unit; found 230; expected a voltage with its unit such as 230 V"),
        ("supply: {mains: 230 A}", "1: `supply.mains` is not a voltage; found 230 A; expected a voltage such as 230 V (in"),
        ("supply:\n  dc: 24 V\n  mains: 230 V", "2: `supply.dc` stands beside `mains` (line 3); expected one of them;"),
        (
            "supply: 230 V",
            "1: `supply` does not say what supplies the board; found 230 V; expected none, {mains: 230 V} or {dc: 24 V}",
        ),
        ("supply: none\nsupplies: {a: {dc: 5 V}}", "2: `supplies` stands beside `supply` (line 1); expected either `supply`"),
        (
            "supply: {mains: 230 V,\n protection_class: 2}",
            "2: `supply.protection_class` is none of the accepted words; found 2; expected I, II or III",
        ),
        ("supply: {mains: 230 V, overvoltage_category: V}", "1: `supply.overvoltage_category` is none of the accepted words"),
        (
            "supply: {mains: 230 V, connection: plugable-a}",
            "1: `supply.connection` is none of the accepted words; did you mean `pluggable-A`?",
        ),
        ("supply: {mains: 230 V, phases: 4}", "1: `supply.phases` is out of range; found 4; expected a whole number, from 1 to 3"),
        ("supply: {mains: 230 V, tolerance: 0.1}", "1: `supply.tolerance` has no unit; found 0.1; expected a percentage"),
        ("supply: {mains: 230 V, tolerance: 100 %}", "1: `supply.tolerance` is out of range"),
        ("supply: {mains: 230 V, tolerance: -5 %}", "1: `supply.tolerance` is out of range"),
        ("supply: {mains: 230 V dc}", "1: `supply.mains` is a d.c. value; found 230 V dc; expected an r.m.s. value"),
        ("supply: {dc: 24 V rms}", "1: `supply.dc` is an r.m.s. value; found 24 V rms; expected a d.c. value"),
        ("supply: {dc: -48 V}", "1: `supply.dc` is not above zero; found -48 V; expected a figure above zero (the magnitude"),
        ("supply: {mains: 0-240 V}", "1: `supply.mains` is not above zero"),
        ("supply: {dc: 48 V, phases: 1}", "1: `supply.phases` belongs to a mains supply only"),
        ("supply: {dc: 48 V, frequency: 50 Hz}", "1: `supply.frequency` belongs to a mains supply only"),
        ("supply: {mains: 230 V, origin: mains}", "1: `supply.origin` belongs to a d.c. supply only"),
        ("supply: {dc: 48 V, origin: battery}", "1: `supply.origin` is none of the accepted words"),
        ("supply: {dc: 48 V, outputs: {VOUT: {volts: 5 V}}}", "1: `supply.outputs.VOUT` lacks the key `voltage`"),
        ("supply: {dc: 48 V, outputs: [VOUT]}", "1: `supply.outputs` has the wrong shape"),
        (
            "environment: {altitude: 2000}",
            "1: `environment.altitude` has no unit; found 2000; expected a length with its unit such as 2000 m",
        ),
        ("environment: {material_group: III}", "1: `environment.material_group` is none of the accepted words"),
        (
            "environment: {polution_degree: 2}",
            "1: unknown key `polution_degree` in `environment`; did you mean `pollution_degree`?",
        ),
        ("environment: {pollution_degree: 5}", "1: `environment.pollution_degree` is none of the accepted words"),
        ("environment: {ambient: -10..40 degC}", "1: `environment.ambient` is a range; found -10..40 degC; expected a temperature"),
        ("impulse: 1500 V rms", "1: `impulse` is an r.m.s. value"),
        ("barriers: {between: [a, b]}", "1: `barriers` has the wrong shape; found a map of keys; expected a list"),
        (
            "barriers:\n- {between: [a]}",
            "2: `barriers[0].between` does not name two domains; found a; expected two different names",
        ),
        ("barriers:\n- {between: [a, a]}", "2: `barriers[0].between` does not name two domains"),
        ("barriers:\n- {betwen: [a, b]}", "2: `barriers[0]` lacks the key `between`; is it meant by `betwen`?"),
        (
            "barriers:\n- {between: [a, b], grade: none}",
            "2: `barriers[0].grade` is none of the accepted words; found none; expected functional, basic",
        ),
        ("barriers:\n- {between: [a, b]}\n- {between: [b, a]}", "3: `barriers[1]` names the same two domains as line 2"),
        (
            "barriers:\n- {between: [a, b], working_voltage: 300 V}",
            "2: `barriers[0].working_voltage` does not say its form; found 300 V; expected 300 V rms,",
        ),
        (
            "barriers:\n- {between: [a, b], working_voltage: {rms: 300 V, peak: 250 V}}",
            "2: `barriers[0].working_voltage.peak` is below the r.m.s. value",
        ),
        (
            "barriers:\n- {between: [a, b], working_voltage: {rms: 300 V peak}}",
            "2: `barriers[0].working_voltage.rms` is a peak value",
        ),
        ("domains:\n  a: [X]\n  b: {nets: [Y,\n X]}", "4: `domains.b.nets[1]` already seeds the domain `a` (line 2); found X"),
        (
            "domains: {a: {side: hot}}",
            "1: `domains.a.side` is none of the accepted words; found hot; expected primary, secondary, earth or floating",
        ),
        ("domains: {a: [null]}", '1: `domains.a[0]` is empty; found null; expected a text (in quotes when it is meant: "null")'),
        (
            "domains: {a: {nets: [X], accessible: yes}}",
            "1: `domains.a.accessible` is neither true nor false; found yes; expected true or false",
        ),
        ("rails: {V: 400}", "1: `rails.V` has no unit; found 400"),
        ("parts: T1", "1: `parts` has the wrong shape; found T1; expected a map"),
        ("parts: {C1: [Y1]}", "1: `parts.C1` has the wrong shape; found a list; expected a map"),
        (
            "parts:\n  T1:\n    kind: tranformer",
            "3: `parts.T1.kind` is no kind of part; did you mean `transformer`?; found tranformer",
        ),
        (
            "parts: {T1: {kind: widget}}",
            "1: `parts.T1.kind` is no kind of part; found widget; expected a kind such as transformer, optocoupler",
        ),
        ("parts: {U1: {kind: DC/DC}}", "1: `parts.U1.kind` is no kind of part"),
        ("parts: {U1: {kind: dc-dc}}", "1: `parts.U1.kind` may or may not insulate; found dc-dc; expected isolated-module when"),
        ("parts: {T1: {windings: [{pins: [1]}]}}", "1: `parts.T1.windings[0]` is no winding; found 1; expected two different pins"),
        ("parts: {T1: {windings: 1-1}}", "1: `parts.T1.windings` is no winding; found 1, 1"),
        ("parts: {T1: {windings: '1-2,'}}", "1: `parts.T1.windings` is no winding"),
        (
            "parts: {T1: {windings: 1-2:4k}}",
            "1: `parts.T1.windings` has turns that are no number; found 4k; expected turns such as 1-2:40",
        ),
        (
            "parts: {T1: {windings: [{pins: [1, 2, 3], turns: 5}]}}",
            "1: `parts.T1.windings[0]` has the wrong number of turns; found 1 for 3 pins; expected 2",
        ),
        ("parts: {T1: {windings: [{pins: [1, 2], turns: 0}]}}", "1: `parts.T1.windings[0]` has turns that are not above zero"),
        ("parts: {T1: {windings: [{pin: [1, 2]}]}}", "1: `parts.T1.windings[0]` lacks the key `pins`; is it meant by `pin`?"),
        ("parts: {C1: {ratings: {volage: 5 V}}}", "1: unknown key `volage` in `parts.C1.ratings`; did you mean `voltage`?"),
        ("parts: {C1: {ratings: {voltage: 5 A}}}", "1: `parts.C1.ratings.voltage` is not a voltage; found 5 A"),
        ("parts: {C1: {ratings: {voltage: 0 V}}}", "1: `parts.C1.ratings.voltage` is not above zero"),
        ("parts: {C1: {marks: [{clas: Y1}]}}", "1: `parts.C1.marks[0]` lacks the key `class`; is it meant by `clas`?"),
        (
            "parts: {C1: {marks: [{class: Y1, valid_until: 2027-02-30}]}}",
            "1: `parts.C1.marks[0].valid_until` is not a date; found 2027-02-30",
        ),
        (
            "parts: {U1: {ratings: {clearance: 8 mm},\n body: {clearance: 9 mm}}}",
            "2: `parts.U1.body.clearance` is given twice (first in line 1)",
        ),
        ("parts: {U1: {body: {creapage: 8 mm}}}", "1: unknown key `creapage` in `parts.U1.body`; did you mean `creepage`?"),
        (
            "parts: {U1: {body: {creepage: 8}}}",
            "1: `parts.U1.body.creepage` has no unit; found 8; expected a distance with its unit such as 8 mm",
        ),
        ("parts: {C1: {fitted: no}}", "1: `parts.C1.fitted` is neither true nor false; found no"),
        ("parts: {C1: {knd: relay}}", "1: unknown key `knd` in `parts.C1`; did you mean `kind`?"),
        (
            "conductors: {h: {touches: [Q1], accesible: true}}",
            "1: unknown key `accesible` in `conductors.h`; did you mean `accessible`?",
        ),
        ("unreachable: {J5: true}", "1: `unreachable` has the wrong shape"),
        (
            "variants:\n  eu: {fitted: [R1], not_fitted: [R2, R1]}",
            "2: `variants.eu.not_fitted[1]` is both fitted and not fitted in this variant",
        ),
        (
            "schema: withstand-parts/1",
            "1: `schema` names another kind of file; found withstand-parts/1; expected withstand-declaration/1",
        ),
        ("a: &x 1", "1: `&x` names a value for reuse (an anchor)"),
    ],
)
def test_mistakes_are_told_with_their_line(text, message):
    with pytest.raises(InputError) as caught:
        read(text)
    assert str(caught.value).startswith(f"d.yaml:{message}")


def test_kinds_are_read_however_they_are_written():
    for kind in KINDS:
        for said in (kind, kind.upper(), kind.replace("-", "_"), kind.replace("-", " ")):
            (fact,) = read(f"parts: {{X1: {{kind: {said}}}}}").parts["X1"].facts
            assert fact.value == kind


def test_synonyms_lead_to_kinds_and_no_synonym_hides_a_kind():
    assert set(SYNONYMS.values()) <= KINDS
    assert not set(SYNONYMS) & KINDS


def test_every_rating_of_the_model_can_be_declared():
    assert {f"rating:{name}" for name in parts_file.RATINGS} == {name for name in ATTRIBUTES if name.startswith("rating:")}


def test_every_attribute_declared_is_one_of_the_model():
    found = fixture("telecom.yaml").parts
    assert {fact.attribute for part in found.values() for fact in part.facts} <= set(ATTRIBUTES)
