"""Kinds of parts: hand-made rows, tables held to what they promise, and the boards of the sample folder."""

import random
import re
from pathlib import Path

import pytest
import yaml

from checker.files import read
from checker.identify import families
from checker.identify.insulating_types import INSULATING_FAMILIES
from checker.identify.kinds import judge, normal_kind, prefix
from checker.identify.ordinary_types import ORDINARY_FAMILIES
from checker.identify.references import CLASSES
from checker.identify.word_kinds import hits
from checker.model.candidate import INSULATING, KINDS
from checker.model.circuit import Part, Pin
from checker.model.fact import Fact, Trust
from checker.model.kind_words import SYNONYMS
from checker.model.reading import Reading
from checker.readers import sexpr_netlist, xml_netlist

ROOT = Path(__file__).resolve().parents[1]
SAMPLES = ROOT.parent / "shared" / "samples"
ROWS = yaml.safe_load((ROOT / "fixtures" / "identify" / "kinds.yaml").read_text("utf-8"))["rows"]
TEXTS = ("value", "symbol", "library", "footprint", "description", "type")


def pins_of(text: str) -> tuple[Pin, ...]:
    """`A K E C` numbered from 1, `3=NO` with its number, `*4` four pins without names."""
    if text.startswith("*"):
        return tuple(Pin(str(at + 1)) for at in range(int(text[1:])))
    found = []
    for at, word in enumerate(text.split(), 1):
        number, equals, name = word.partition("=")
        found.append(Pin(number, name) if equals else Pin(str(at), word))
    return tuple(found)


def part_of(row: dict) -> Part:  # type: ignore[type-arg]
    facts = [Fact(attribute, str(row[attribute])) for attribute in TEXTS if attribute in row]
    if "given" in row:
        facts.append(Fact("kind", row["given"], trust=Trust.BOM))
    return Part(row["ref"], pins_of(row.get("pins", "")), tuple(facts), ())


def test_there_are_many_rows_and_they_are_well_formed() -> None:
    known = {"ref", "pins", "given", "kind", "sure", "listed", "attributes", *TEXTS}
    assert len(ROWS) >= 250
    assert all(row["kind"] in KINDS and set(row) <= known for row in ROWS)


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row['ref']}-{row.get('value', row.get('symbol', ''))}-{row['kind']}")
def test_kind(row: dict) -> None:  # type: ignore[type-arg]
    judged = judge(part_of(row))
    assert judged.kind == row["kind"], judged.because
    for name in ("sure", "listed"):
        if name in row:
            assert getattr(judged, name) == row[name], judged.because
    for name, text in row.get("attributes", {}).items():
        assert judged.attributes.get(name) == text
    if row.get("attributes") == {}:
        assert not {"offline", "magnetics", "acdc"} & set(judged.attributes)
    assert judged.because


def test_what_is_never_read() -> None:
    for attribute in ("datasheet", "distributor", "field:Link", "maker", "sheet"):
        facts = (Fact("value", "QX1"), Fact(attribute, "https://shop.example/optocoupler-PC817-transformer-relay"))
        assert judge(Part("U1", pins_of("*4"), facts, ())).kind == "ic", attribute


def test_a_text_is_read_to_the_limit_of_a_cell() -> None:
    late = "x " * 600 + "optocoupler"
    assert judge(Part("U1", pins_of("*4"), (Fact("description", late),), ())).kind == "ic"


def test_the_facts_of_an_alternate_are_judged_instead_of_the_part() -> None:
    part = Part("U1", pins_of("*4"), (Fact("value", "PC817"),), ())
    assert judge(part).kind == "optocoupler"
    assert judge(part, (Fact("value", "LM358"),)).kind == "ic"
    assert judge(part, ()).kind == "ic"


def test_the_more_trusted_fact_goes_first() -> None:
    facts = (Fact("value", "LM358"), Fact("value", "ADUM1201", trust=Trust.BOM))
    assert judge(Part("U1", pins_of("*8"), facts, ())).kind == "digital-isolator"


def test_answers_do_not_share_their_attributes() -> None:
    part = Part("U1", (), (Fact("value", "MOC3021"),), ())
    judge(part).attributes["output"] = "changed"
    assert judge(part).attributes == {"output": "triac"}


def test_names_from_a_file_are_harmless_in_the_sentence() -> None:
    for value in ("PC817\x1b[31m\u202e", "PC817\n::error::", "U\u202e1"):
        because = judge(Part("U1", (), (Fact("value", value), Fact("kind", f"relay{value}")), ())).because
        assert not re.search(r"[\x00-\x1f\u202e]", because)


@pytest.mark.parametrize(
    ("text", "kind"),
    [
        ("optocoupler", "optocoupler"),
        ("Opto", "optocoupler"),
        ("PHOTOCOUPLER", "optocoupler"),
        ("Digital Isolator", "digital-isolator"),
        ("digital_isolator", "digital-isolator"),
        ("AC-DC module", "isolated-module"),
        ("isolated DC-DC converter", "isolated-module"),
        ("EMI choke", "common-mode-choke"),
        ("common mode choke", "common-mode-choke"),
        ("MOV", "varistor"),
        ("NTC", "thermistor"),
        ("Y capacitor", "capacitor"),
        ("X-capacitor", "capacitor"),
        ("Capacitors", "capacitor"),
        ("terminal block", "connector"),
        ("nfet", "mosfet"),
        ("polyfuse", "resettable-fuse"),
        ("SSR", "solid-state-relay"),
        ("switches", "switch"),
        ("transistor", None),
        ("dc-dc converter", None),
        ("", None),
        ("banana", None),
        ("x" * 5000, None),
    ],
)
def test_declared_words(text: str, kind: str | None) -> None:
    assert normal_kind(text) == kind


def test_every_kind_is_its_own_word() -> None:
    for kind in KINDS:
        assert normal_kind(kind) == kind
        assert normal_kind(kind.upper().replace("-", "_")) == kind


def test_prefixes() -> None:
    expected = {"R1": "R", "u12": "U", "LAN_CON1": "CON", "USB-UART1": "USB", "CN3": "CN", "+": "", "1": "", "TP_I1P_0": "TP"}
    assert {ref: prefix(ref) for ref in expected} == expected


# the tables


def test_tables_use_known_kinds() -> None:
    assert {row[0] for row in INSULATING_FAMILIES} <= INSULATING | {"connector"}
    assert not {row[0] for row in ORDINARY_FAMILIES} & INSULATING
    assert {row[0] for row in ORDINARY_FAMILIES} <= KINDS
    assert all(group.kind in KINDS and group.kinds <= KINDS for group in CLASSES.values())
    assert set(SYNONYMS.values()) <= KINDS


def test_patterns_are_found_by_their_first_character() -> None:
    """`starts` against brute force: a pattern can only begin with the characters it names."""
    for row in INSULATING_FAMILIES + ORDINARY_FAMILIES:
        for pattern in row[3].split():
            first = families.starts(pattern)
            assert first, pattern
            assert all(character.isupper() or character.isdigit() for character in first), pattern
            assert not re.search(r"[+*]", re.sub(r"\\.", "", pattern)), f"unbounded repetition in {pattern}"


# E24 and E96 figures: IEC 60063, tables of preferred numbers
E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)
E96 = tuple(round(100 * 10 ** (step / 96)) for step in range(96))


def ordinary_values() -> list[str]:
    found = []
    for number in E24:
        digits = f"{number / 10:g}"
        whole, _, part = f"{number / 10:.1f}".partition(".")
        for unit in ("R", "k", "M", "p", "n", "u", "m", "pF", "nF", "uF", "uH", "mH", "nH", "ohm", "K", "V", "A", "mA", "W", "MHz"):
            found += [f"{digits}{unit}", f"{number}{unit}", f"{number}0{unit}", f"{digits} {unit}", f"{whole},{part}{unit}"]
            if len(unit) == 1:
                found += [f"{whole}{unit}{part}", f"{whole}{unit}{part}/50V", f"{whole}{unit}{part}/X2", f"{whole}{unit}{part}/Y1"]
        for volts in ("6.3V", "16V", "25V", "50V", "100V", "250V", "400V", "1kV", "2kV", "275VAC"):
            found += [f"{digits}n/{volts}", f"{digits}u {volts}", f"{number}0u/{volts}", f"{digits}nF/{volts}/10%/X7R/C0603"]
    for number in E96:
        found += [
            f"{number / 100:.2f}k",
            f"{number / 10:.1f}k",
            f"{number}R",
            f"{number}k",
            f"{number / 100:.2f}R",
            f"{number}",
            f"{number / 100:.2f}",
        ]
        found += [f"{number // 100}k{number % 100:02d}", f"{number // 10}R{number % 10}", f"{number / 10:.1f}"]
    found += [f"{first}{second}" for first in E24 for second in ("0", "1", "2", "3", "4", "5", "6")]
    return found


def test_no_ordinary_value_is_a_type() -> None:
    wrong = {value: found.family.what for value in ordinary_values() if (found := families.find(value)) is not None}
    assert wrong == {}


def test_no_package_pin_or_size_is_a_type() -> None:
    words = [f"{row}{number}" for row in "ABCDEFGHJKLMNPRSTUVWXY" for number in range(1, 100)]
    words += [
        "SOT-23",
        "SOT-23-5",
        "SOIC-8",
        "SOIC-16W",
        "TO-220",
        "TO-92",
        "DIP-8",
        "QFN-32",
        "LQFP-48",
        "DO-41",
        "SMA",
        "SMB",
        "SMC",
        "SOD-123",
    ]
    words += [
        "R0402",
        "C0603",
        "C1206",
        "L0805",
        "0402",
        "0603",
        "0805",
        "1206",
        "1210",
        "1812",
        "2512",
        "SMD0805",
        "D2PAK",
        "DPAK",
        "TSSOP-20",
    ]
    words += [
        "VDD1",
        "GND2",
        "VCC",
        "COM",
        "NO",
        "NC",
        "PC13",
        "PB5",
        "PA10",
        "GPIO12",
        "IO34",
        "RXD",
        "TX1",
        "SDA",
        "VO1",
        "XTAL2",
        "VOUT",
        "RS485",
    ]
    words += [
        "IEC",
        "UL94",
        "X7R",
        "C0G",
        "NP0",
        "FR4",
        "5x20",
        "2x15mH",
        "T6.3A",
        "F500mA",
        "1/4W",
        "0.1%",
        "SWD",
        "CAN",
        "I2C",
        "UART",
        "USB_C",
    ]
    wrong = {}
    for word in words:
        found = families.find(word)
        # M7, S1M, T1.. are types and pin names alike: only whole two-letter diode codes are accepted
        if found is not None and found.word not in ("M7",):
            wrong[word] = found.family.what
    assert wrong == {}


def test_hostile_texts_end_quickly_and_quietly() -> None:
    seed = random.Random(7)
    alphabet = "ABKLMNOPRSTUVX0123456789-/ .,()_~{}"
    for _ in range(300):
        text = "".join(seed.choice(alphabet) for _ in range(seed.choice((5, 40, 2000))))
        names = tuple(Pin(str(at), "".join(seed.choice(alphabet) for _ in range(6))) for at in range(seed.choice((0, 4, 16, 200))))
        judged = judge(Part(text[:20], names, (Fact("value", text), Fact("description", text), Fact("kind", text)), ()))
        assert judged.kind in KINDS


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("transformer driver", ["ic"]),
        ("relay driver board", ["ic"]),
        ("DC relay base", []),
        ("MOSFET with zener", ["mosfet"]),
        ("OnePiece", []),
        ("ScrewTerminal", ["connector"]),
        ("non isolated DC/DC converter", []),
        ("IC for an isolated gate driver", ["ic"]),
        ("eFuse", ["ic"]),
    ],
)
def test_words(text: str, found: list[str]) -> None:
    assert [hit.kind for hit in hits(text)] == found


# whole boards

# the parts that insulate, by hand from the schematics' types
BOARDS = {
    "bull-iso/board.net": set(),
    "bull-iso/board.xml": set(),
    "can-adapter/board.xml": set(),
    "coupler-bank/board.net": {f"U{number}" for number in range(1, 9)},
    "mains-dimmer/board.net": set(),
    "mains-rectifier/board.net": {"RL1", "RL2", "U4", "U5"},
    "no-barrier/board.net": {"U4", "U6"},
    "no-barrier/board.xml": {"U4", "U6"},
    "poe-isolated/board.net": {"DCDC1"},
    "usb-isolator/board.net": {"U1", "U2"},
    "formats/sexpr-e-large.net": {"IC6"},
}


def parts_of(reading: Reading) -> list[Part]:
    """Parts with every pin of symbol or net, as the joined design has them."""
    pins: dict[str, dict[str, str]] = {}
    for record in reading.parts:
        pins[record.ref] = {pin.number: pin.name for pin in record.pins}
    for net in reading.nets:
        for node in net.nodes:
            own = pins.setdefault(node.ref, {})
            own[node.pin] = own.get(node.pin) or node.name
    return [
        Part(record.ref, tuple(Pin(number, name) for number, name in pins[record.ref].items()), record.facts, (record.source,))
        for record in reading.parts
    ]


def reading_of(path: Path) -> Reading:
    reader = xml_netlist.READER if path.suffix == ".xml" else sexpr_netlist.READER
    return reader.read(read(path))


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="no sample folder")
@pytest.mark.parametrize("name", BOARDS)
def test_insulating_parts_of_real_boards(name: str) -> None:
    found = {part.ref: judge(part) for part in parts_of(reading_of(SAMPLES / name))}
    assert found
    insulating = {ref for ref, judged in found.items() if judged.kind in INSULATING}
    assert insulating == BOARDS[name]
    assert not [ref for ref in insulating if ref[0] in "CRDQJ" and ref[1:].isdigit()]
    assert all(found[ref].listed for ref in insulating if not ref.startswith("RL"))


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="no sample folder")
def test_connectors_capacitors_and_resistors_of_real_boards() -> None:
    kinds_by_letter: dict[str, set[str]] = {}
    for name in BOARDS:
        for part in parts_of(reading_of(SAMPLES / name)):
            # C30 of one board is a six-pin header, in spite of its letter
            if re.fullmatch(r"[CRLDJ]\d+", part.ref) and not (part.ref == "C30" and len(part.pins) == 6):
                kinds_by_letter.setdefault(part.ref[0], set()).add(judge(part).kind)
    assert kinds_by_letter["C"] == {"capacitor"}
    assert kinds_by_letter["R"] == {"resistor"}
    assert kinds_by_letter["L"] <= {"inductor", "ferrite"}
    assert kinds_by_letter["D"] <= {"diode", "led", "tvs", "zener", "bridge"}
    assert kinds_by_letter["J"] == {"connector"}
