"""One circuit in every form: read back it is the same circuit, and with the same papers it gets the same verdicts.

S-expression, XML and EDIF say everything a schematic says. The other forms do not: the legacy list has no names of pins and no
library, lines and IPC-D-356A have no values, footprints and symbols either. Values and footprints come back with the bill of
materials, so that only what rests on names of pins and symbols is lost, in these ways and no other:

- `WITHOUT_NAMES`: a question is not asked, or left open, since it is not known which pins of a bridge, a diode or a controller
  are which, so that a voltage is not known, or which end of a capacitor is which;
- nothing fails, and nothing passes, that does not with the full netlist.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache
from pathlib import Path

import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from checker import declaration, pipeline, plugins, rulesets
from checker.assemble.join import assemble
from checker.files import Blob
from checker.files import read as read_file
from checker.model.circuit import Design
from checker.model.declaration import Declaration
from checker.model.reading import Reading
from checker.model.report import Report, VerdictShown
from tests import carriers, trial_circuits
from tests.trial_circuits import Part, Symbol, Trial

DESIGNS = Path(__file__).resolve().parents[1] / "fixtures" / "designs"
FORMS = list(carriers.FORMS)
POOR = ["legacy-list", "ipcd356"]

# Rules whose questions rest on the names of pins, and what is not known without them.
WITHOUT_NAMES = {
    "capacitor-voltage": "the bus behind a bridge, the rails of a controller",
    "resistor-voltage": "the bus behind a bridge",
    "voltage-rating": "the terminals of transistors and diodes, the supply pins of controllers",
    "inrush": "the bus behind a bridge",
    "polarity": "anode and cathode, and a capacitor drawn as polarised",
    "touch-current": "the voltage of a net on the core, which the bus behind a bridge drives",
    "insulation-grade": "the peak voltage across a part, for the same reason",
    "clearance": "the same",
    "creepage": "the same",
    "electric-strength": "the same",
    "through-insulation": "the same",
    "pad-span": "what is needed on the pads, for the same reason",
}


def reading(form: str, trial: Trial) -> Reading:
    """The netlist of a form, by the reader that claims it."""
    blob = Blob(f"board-{form}", carriers.FORMS[form](trial))
    return plugins.reader_for(blob, "netlist").read(blob)


def bill(trial: Trial) -> Reading:
    blob = Blob("values.csv", carriers.values(trial))
    return plugins.reader_for(blob, "bom").read(blob)


def wires(design: Design) -> dict[str, set[tuple[str, str]]]:
    """Net -> its pins. Nets of one pin are left out: some forms make one for each pin that is on none."""
    return {name: set(net.pins) for name, net in design.nets.items() if len(net.pins) > 1}


def essence(report: Report) -> Counter[tuple[str, tuple[str, ...], str]]:
    """(rule, parts, outcome) of each verdict; the order of the parts follows the file."""
    return Counter((verdict.rule, tuple(sorted(verdict.parts)), verdict.outcome) for verdict in report.verdicts)


# --- the boards that ship --------------------------------------------------------------------------------------------

BOARDS = ["greenhouse", "greenhouse-wrong", *(folder.name for folder in trial_circuits.folders())]


def folder_of(name: str) -> Path:
    return DESIGNS / name if name.startswith("greenhouse") else DESIGNS / "trials" / name


@cache
def board(name: str) -> Trial:
    return carriers.demo(name) if name.startswith("greenhouse") else trial_circuits.read(folder_of(name))


@cache
def report(name: str, form: str) -> Report:
    """A board in a form, judged."""
    return judged(name, reading(form, board(name)))


def judged(name: str, netlist: Reading) -> Report:
    """A netlist of a board, judged with the board's own bill and declaration and a bill of all its values."""
    folder = folder_of(name)
    blobs = [read_file(path) for path in (folder / "bom.csv", folder / "bom.tsv") if path.is_file()]
    bills = [plugins.reader_for(blob, "bom").read(blob) for blob in blobs]
    path = folder / "declaration.yaml"
    declared = declaration.read(read_file(path)) if path.is_file() else Declaration()
    chosen = rulesets.load_all(declared.rulesets or rulesets.DEFAULT)
    return pipeline.judge(name, [netlist, *bills, bill(board(name))], declared, chosen, ()).report


def bald(design: Design) -> tuple[object, ...]:
    """What the stages behind see of parts and pins that are on nets, without the places in files."""
    parts = {
        ref: ({pin.number: pin for pin in part.pins if pin.net}, {(fact.attribute, fact.value) for fact in part.facts}, part.fitted)
        for ref, part in design.parts.items()
        if part.nets()
    }
    return parts, wires(design)


@pytest.mark.parametrize(("form", "other"), [("xml", "sexpr"), ("legacy-lines", "ipcd356")])
@pytest.mark.parametrize("name", BOARDS)
def test_forms_that_say_the_same_give_the_same_design(name: str, form: str, other: str) -> None:
    """What stands behind the readers cannot tell them apart: the verdicts are the same, and one of the two is judged below."""
    one, two = (assemble(name, [reading(of, board(name)), bill(board(name))], Declaration()) for of in (form, other))
    assert bald(one) == bald(two)


@pytest.mark.parametrize("form", [form for form in FORMS if form in carriers.CARRY_PIN_NAMES - {"sexpr", "xml"}])
@pytest.mark.parametrize("name", BOARDS)
def test_full_forms_get_the_same_verdicts(name: str, form: str) -> None:
    assert essence(report(name, form)) == essence(report(name, "sexpr"))


@pytest.mark.parametrize("form", POOR)
@pytest.mark.parametrize("name", BOARDS)
def test_poorer_forms_only_lose_what_rests_on_names_of_pins(name: str, form: str) -> None:
    full, poor = essence(report(name, "sexpr")), essence(report(name, form))
    lost, found = full - poor, poor - full
    assert {rule for rule, _, _ in lost} <= set(WITHOUT_NAMES), lost
    gained = [key for key in found if key[2] != "open"]
    assert not gained
    settled = {(rule, part) for rule, parts, _ in lost for part in parts}
    assert all(settled & {(rule, part) for part in parts} for rule, parts, outcome in found if outcome == "open")


@pytest.mark.parametrize("form", POOR)
@pytest.mark.parametrize("name", BOARDS)
def test_every_form_shows_the_same_domains_and_barriers(name: str, form: str) -> None:
    def shown(found: Report) -> tuple[object, ...]:
        alone = {net for net, nodes in board(name).nets().items() if len(nodes) == 1}
        domains = {(domain.side, frozenset(domain.nets) - alone) for domain in found.domains}
        barriers = {(barrier.id, barrier.grade, tuple(sorted(barrier.bridged_by))) for barrier in found.barriers}
        return {of for of in domains if not all(net.startswith("unconnected-(") for net in of[1])}, barriers

    assert shown(report(name, form)) == shown(report(name, "sexpr"))


@pytest.mark.parametrize("name", BOARDS[:8])
def test_the_places_of_pads_add_questions_of_their_own_only(name: str) -> None:
    """No pad is nearer than 8 mm to another: one note a barrier asks for the tracks, and footprints may have other rows."""
    trial = board(name)
    blob = Blob("board.ipc", carriers.ipcd356(trial, places=True))
    found = plugins.reader_for(blob, "netlist").read(blob)
    assert {(pad.ref, pad.pin, pad.label) for pad in found.pads} == {
        (part.ref, pin, part.nets.get(pin, "")) for part in trial.parts for pin, _ in part.symbol.pins
    }
    placed = judged(name, found)
    more = essence(placed) - essence(report(name, "ipcd356"))
    assert not essence(report(name, "ipcd356")) - essence(placed)
    assert {rule for rule, _, _ in more} <= {"pad-distance"}
    basic = [barrier for barrier in placed.barriers if barrier.grade in ("basic", "reinforced") and barrier.required]
    assert bool(basic) == bool(more)


# --- circuits nobody drew --------------------------------------------------------------------------------------------


def symbol(name: str, description: str, pins: str) -> Symbol:
    """pins: `1 A, 2 K`, or `1, 2` for pins without a name."""
    named = [(f"{pin} ".split(" ")[0], f"{pin} ".split(" ")[1]) for pin in pins.split(", ")]
    return Symbol(name, "Parts", name, description, tuple(named), ())


KINDS = (
    ("R", symbol("R", "Resistor", "1, 2"), ("1k", "4R7", "1M 1%", "0R"), ("R_0603", "SMD:R_1206", "")),
    ("C", symbol("C", "Capacitor", "1, 2"), ("100n", "1n Y1", "220n X2 310VAC", "2.2µF"), ("C_0603", "THT:DISC_P10", "")),
    ("F", symbol("Fuse", "Fuse", "1, 2"), ("T2A 250V", "1A"), ("FUSE_5x20", "")),
    ("D", symbol("D", "Diode", "1 K, 2 A"), ("1N4007", "1N4148"), ("DO-41",)),
    ("BR", symbol("Bridge_Rectifier", "Bridge rectifier", "1 +, 2 AC, 3 AC, 4 -"), ("KBP210",), ("KBP",)),
    ("U", symbol("Optocoupler", "Optocoupler, transistor output", "1 A, 2 K, 3 E, 4 C"), ("817C", "PC817"), ("DIP-4_W7.62mm",)),
    ("J", symbol("Inlet_C8", "Mains inlet IEC 60320 C8, two poles", "1 L, 2 N"), ("C8 inlet",), ("INLET_C8",)),
    ("J", symbol("Conn_01x03", "Generic connector, single row", "1, 2, 3"), ("OUT",), ("PinHeader_1x03",)),
)
NETS = (
    "L",
    "N",
    "PE",
    "GND",
    "+12V",
    "/Supply/VBUS",
    "Net-(R1-Pad1)",
    "N-000015",
    "unnamed_net7",
    "A_NET_WITH_A_NAME_THAT_IS_LONG",
)
names = st.one_of(
    st.sampled_from(NETS), st.text("ABab019/_+-.$~{}[]", min_size=1, max_size=18).filter(lambda name: name not in ("~", "N/C"))
)


@st.composite
def circuits(draw: st.DrawFn, loose: bool = True) -> Trial:
    """Two to ten parts of usual kinds, their pins on a few nets; now and then a part that is left out. loose: or on none."""
    wiring = draw(st.lists(names, min_size=2, max_size=6, unique_by=lambda name: name.casefold()))
    parts: list[Part] = []
    for at in range(draw(st.integers(2, 10))):
        prefix, shape, texts, footprints = draw(st.sampled_from(KINDS))
        nets = {number: draw(st.sampled_from([*wiring, ""] if loose else wiring)) for number, _ in shape.pins}
        keys = {"unfitted": ""} if draw(st.integers(0, 9)) == 0 else {}
        value, footprint = draw(st.sampled_from(texts)), draw(st.sampled_from(footprints))
        parts.append(Part(f"{prefix}{at + 1}", value, shape, footprint, {pin: net for pin, net in nets.items() if net}, keys))
    trial = Trial("drawn", {"form": "E", "title": "Drawn", "flag": "property"}, tuple(parts))
    assume(any(len(nodes) > 1 for nodes in trial.nets().values()))
    return trial


@pytest.mark.parametrize("form", FORMS)
@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.filter_too_much])
@given(circuits())
def test_a_circuit_is_read_back(form: str, trial: Trial) -> None:
    """References, pins, nets always; values, footprints, names of pins and what is left out where the form has them."""
    alone = assemble("drawn", [reading(form, trial)], Declaration())
    joined = assemble("drawn", [reading(form, trial), bill(trial)], Declaration())
    meant = {net: {(part.ref, pin) for part, pin in nodes} for net, nodes in trial.nets().items()}
    for design in (alone, joined):
        assert wires(design) == {net: pins for net, pins in meant.items() if len(pins) > 1}
        for part in trial.parts:
            if form == "legacy-lines" and not part.nets:
                assert part.ref not in design.parts
                continue
            read = {pin.number: pin for pin in design.parts[part.ref].pins}
            assert {number: read[number].net for number in part.nets} == part.nets
            assert read.keys() == (part.nets.keys() if form == "legacy-lines" else dict(part.symbol.pins).keys())
            if form in carriers.CARRY_PIN_NAMES:
                assert {number: pin.name for number, pin in read.items()} == dict(part.symbol.pins)
            if design is joined and not part.nets:
                continue
            if design is joined or form in carriers.CARRY_VALUES:
                value = part.value if design is joined or form != "legacy-list" or part.fitted else f"DNP {part.value}"
                found = design.parts[part.ref]
                assert (found.text("value"), found.text("footprint"), found.fitted) == (value, part.footprint, part.fitted)


def tied(trial: Trial) -> bool:
    """Whether each net joins two parts and no inlet is shorted by its own net, which only names of pins tell.

    Forms differ in loose pins: a net of its own, no net, not listed at all.
    """
    inlets = (part for part in trial.parts if part.symbol.name == "Inlet_C8")
    joined = all(len({part.ref for part, _ in nodes}) > 1 for nodes in trial.nets().values())
    return joined and all(len(set(part.nets.values())) == 2 for part in inlets)


@settings(max_examples=40, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.filter_too_much])
@given(circuits(loose=False).filter(tied))
def test_a_circuit_gets_the_same_verdicts(trial: Trial) -> None:
    """Where names of pins count, circuits nobody would build may be read otherwise than drawn: usage gives pins their names."""
    chosen = rulesets.load_all(rulesets.DEFAULT)
    found = {
        form: essence(pipeline.judge("drawn", [reading(form, trial), bill(trial)], Declaration(), chosen, ()).report)
        for form in FORMS
    }  # fmt: skip
    for form, verdicts in found.items():
        if form in carriers.CARRY_PIN_NAMES:
            assert verdicts == found["sexpr"]
        else:
            passed = Counter({key: count for key, count in verdicts.items() if key[2] == "pass" and key[0] not in WITHOUT_NAMES})
            assert not passed - found["sexpr"]


@pytest.mark.parametrize("name", BOARDS)
def test_the_order_of_a_file_changes_nothing(name: str) -> None:
    """Parts, pins and nets the other way round: the same report, but for the places in the file."""
    netlist = reading("sexpr", board(name))
    parts = tuple(replace(part, pins=part.pins[::-1]) for part in netlist.parts[::-1])
    nets = tuple(replace(net, nodes=net.nodes[::-1]) for net in netlist.nets[::-1])
    turned = judged(name, replace(netlist, parts=parts, nets=nets))
    assert [said(verdict) for verdict in turned.verdicts] == [said(verdict) for verdict in report(name, "sexpr").verdicts]


def said(verdict: VerdictShown) -> tuple[object, ...]:
    return verdict.fingerprint, verdict.rule, verdict.parts, verdict.outcome, verdict.level, verdict.because, verdict.found
