"""What must be kept apart besides the barriers, and how needs and voltages reach the report."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from circuits import choice, design

from checker import api, declaration, files, pipeline, plugins, reporting, rulesets
from checker.model.declaration import Declaration, DeclaredBarrier, Range
from checker.model.domain import Domain, Isolation
from checker.model.entry import Entry
from checker.model.fact import Source
from checker.model.requirement import Need, Required, Spacing
from checker.model.rule import Analysis, Board, Setting
from checker.model.step import Step
from checker.model.stress import Bounds, Stress, Voltage
from checker.model.table import Table
from checker.requirements.separations import APART, FUSE, MOST_EQUALS, POLES, grades, separations, sides, voltages

DEMO = Path(__file__).resolve().parents[1] / "fixtures" / "designs" / "greenhouse"
ROW = Table("needed-grade", {"first": "", "second": "", "grade": ""}, "exact", (("live", "neutral", "basic"),), "S 1", "true")


def board(
    parts: dict[str, tuple[str, dict[str, str]]], entries: dict[str, Entry], poles: dict[str, str], **domains: str
) -> tuple[Board, Stress]:
    """A small board of these parts whose mains enters here. domains: name -> nets, the first is the mains."""
    found = {
        name: Domain(name, "primary" if not at else "secondary", tuple(nets.split()), (), Step(name), hazard="" if at else "mains")
        for at, (name, nets) in enumerate(domains.items())
    }
    domain_of = {net: name for name, domain in found.items() for net in domain.nets}
    drawn, chosen = design(parts), choice(parts)
    made = Board(drawn, Declaration(), {}, chosen, Isolation(found, domain_of), Setting(None, (), "II", None, ()))
    return made, Stress(entries=entries, poles=poles, rated=lambda one, other: volts(240.0, 339.4) if one != other else None)


def volts(rms: float, peak: float, bounded: bool = True) -> Voltage:
    step = Step("made up", result=peak, unit="V")
    return Voltage(
        Bounds(rms, rms if bounded else None, step, form="rms"), Bounds(peak, peak if bounded else None, step, form="peak"), "ac"
    )


MAINS = {
    "J1": ("inlet", {"1": "L", "2": "N"}),
    "S1": ("switch", {"1": "L", "2": "L_SW"}),
    "RV1": ("varistor", {"1": "L_SW", "2": "N"}),
    "F1": ("fuse", {"1": "L_SW", "2": "L_F"}),
    "BR1": ("bridge", {"1": "L_F", "2": "N", "3": "VP", "4": "G"}),
}
ENTRY = {"J1": Entry("J1", ("L", "N"), (), "L", "N", ("L",))}
ON_POLE = {"L": "L", "L_SW": "L", "L_F": "L", "N": "N"}


def test_live_and_neutral_before_the_fuse_and_the_ends_of_the_fuse():
    made, stressed = board(MAINS, ENTRY, ON_POLE, mains="L N L_SW L_F VP G")
    poles, fuse = separations(made, stressed)
    assert isinstance(poles, Spacing)
    assert isinstance(fuse, Spacing)
    assert (poles.id, poles.reason, poles.nets, poles.across) == ("live|neutral", POLES, (("L", "L_SW"), ("N",)), ("L", "N"))
    assert (fuse.id, fuse.reason, fuse.nets, fuse.across) == ("F1 before|F1 behind", FUSE, (("L_SW",), ("L_F",)), ("L", "N"))
    assert [[side.name for side in sides(made, one)] for one in (poles, fuse)] == [["mains", "mains"]] * 2
    assert voltages((poles, fuse), stressed).keys() == {poles.id, fuse.id}
    found = grades((poles, fuse), ROW)
    assert (found[poles.id].grade, found[poles.id].step.citation) == ("basic", "S 1")
    assert (found[fuse.id].grade, found[fuse.id].step.text) == ("", "the ruleset does not say which spacing ends of a fuse takes")


def test_phases_several_entries_and_terminals_of_one_pole_have_names_of_their_own():
    three = {"J1": Entry("J1", ("A", "B", "C", "N"), (), "C", "N", ("A", "B", "C"))}
    pins = {str(at): net for at, net in enumerate("ABCN", 1)}
    made, stressed = board({"J1": ("connector", pins)}, three, {net: net for net in "ABCN"}, mains="A B C N")
    assert [one.id for one in separations(made, stressed)] == [
        "live 1|live 2",
        "live 1|live 3",
        "live 1|neutral",
        "live 2|live 3",
        "live 2|neutral",
        "live 3|neutral",
    ]
    two = {"J1": Entry("J1", ("A", "B"), (), None, None), "J10": Entry("J10", ("D", "C"), (), "D", "C", ("D",), ("J2",))}
    parts = {ref: ("connector", dict(enumerate(map(str, entry.poles)))) for ref, entry in two.items()}
    made, stressed = board(parts, two, {net: net for net in "ABCD"}, mains="A B C D")
    assert [one.id for one in separations(made, stressed)] == ["J1 live|J1 neutral", "J2 and J10 live|J2 and J10 neutral"]


def test_pairs_of_circuits_that_nothing_lies_between():
    made, stressed = board(MAINS, {}, {}, mains="L N", VOUT="A", VAUX="B")
    assert [(one.id, one.reason) for one in separations(made, stressed)] == [
        ("mains|VOUT", APART),
        ("mains|VAUX", APART),
        ("VOUT|VAUX", APART),
    ]
    many = {f"V{at}": f"X{at}" for at in range(MOST_EQUALS)}
    made, stressed = board(MAINS, {}, {}, mains="L N", **many)
    assert [one.id for one in separations(made, stressed)] == [f"mains|V{at}" for at in range(MOST_EQUALS)]


@pytest.fixture(scope="module")
def analysis() -> Analysis:
    """The demo up to the rules, with what else is kept apart."""
    blobs = [("netlist", "greenhouse.net"), ("bom", "bom.csv")]
    readings = [plugins.reader_for(blob, role).read(blob) for role, name in blobs for blob in [files.read(DEMO / name, shown=name)]]
    declared = declaration.read(files.read(DEMO / "declaration.yaml", shown="declaration.yaml"))
    drawn = pipeline.assemble("greenhouse", readings, declared, None)
    identity = pipeline.identify(drawn, declared)
    return pipeline.analyse(drawn, declared, identity, next(pipeline.choices(identity)), rulesets.load_all(("iec-62368-1",)))


def test_the_demo_has_poles_and_a_fuse_and_no_other_circuit(analysis):
    assert [one.id for one in analysis.further] == ["live|neutral", "F1 before|F1 behind"]
    assert analysis.further[0].nets == (("L",), ("N", "N_FILT"))


BARRIER = ("iec-62368-1", "mains|+12V")


def shown(analysis: Analysis, **more):
    """(barriers, separations, steps by id) of the report of this analysis with other stress, needs or declaration."""
    report = reporting.report(replace(analysis, **more), (), rulesets.load_all(("iec-62368-1",)), (), ())
    return report.barriers, report.separations, {step.id: step for step in report.steps}


def figure(at_least: float, enough: float | None, name: str, **more) -> Required:
    return Required(at_least, enough, Step(name), more.pop("verified", "true"), **more)


def test_needs_reach_the_report_with_a_step_for_every_figure(analysis):
    air = figure(3.0, 3.0, "air")
    need = Need(
        "iec-62368-1",
        "reinforced",
        air,
        figure(4.8, None, "surface", missing="the voltage of DRAIN", verified="partial"),
        None,
        {"peak": figure(4000.0, 4000.0, "test", unit="V", form="peak"), "rms": figure(2828.4271, 2828.4271, "test", unit="V")},
    )
    two = Need("iec-62368-1", "basic", figure(3.0, 5.6, "wide", missing="the turns"))
    needs = {(*BARRIER, ""): need, (*BARRIER, "U2"): Need("iec-62368-1", "basic", air), (*BARRIER, "T1"): two}
    (barrier,), _, steps = shown(analysis, needs=needs)
    (asked,) = barrier.required
    assert {name: asked[name] for name in ("ruleset", "grade", "clearance", "creepage", "electric_strength")} == {
        "ruleset": "iec-62368-1",
        "grade": "reinforced",
        "clearance": 3.0,
        "creepage": 4.8,
        "electric_strength": {"dc": 4000.0, "rms": 2828.43},
    }
    assert (asked["bounded"], asked["unbounded"], asked["at_least"]) == (False, ["creepage"], {"creepage": 4.8})
    assert asked["missing"] == ["the voltage of DRAIN"]
    assert asked["verified"] == "partial"
    assert steps[asked["steps"]["creepage"]].text == "surface"
    assert steps[asked["steps"]["electric_strength"]["dc"]].text == "test"
    assert [steps[id].text for id in steps[asked["step"]].inputs] == ["air", "surface", "test", "test"]
    by_part = {bridge.part: bridge for bridge in barrier.parts}
    assert [need["clearance"] for need in by_part["U2"].required] == [3.0]
    assert by_part["U2"].required[0].keys().isdisjoint({"bounded", "at_least", "unbounded", "missing"})
    assert by_part["T1"].required[0]["clearance"] == 5.6
    assert by_part["T1"].required[0]["at_least"] == {"clearance": 3.0}
    assert by_part["T1"].required[0]["missing"] == ["the turns"]
    assert by_part["CY1"].required == []
    assert by_part["U2"].sides == [["3", "4"], ["1", "2"]]


def test_a_need_that_asks_nothing_is_not_listed(analysis):
    (barrier,), _, _ = shown(analysis, needs={(*BARRIER, ""): Need("iec-62368-1", "functional")})
    assert barrier.required == []


def test_the_working_voltage_is_what_is_never_exceeded_and_null_where_nothing_bounds_it(analysis):
    stressed = Stress(
        barriers={"mains|+12V": volts(240.0, 351.40000001)}, across={("U2", ("mains", "+12V")): volts(120.0, 170.0, False)}
    )
    (barrier,), _, steps = shown(analysis, stress=stressed)
    assert (barrier.working_voltage.rms, barrier.working_voltage.peak) == (240.0, 351.4)
    assert steps[barrier.working_voltage.step].text == "working voltage, the highest over the pairs of nets"
    coupler = next(bridge for bridge in barrier.parts if bridge.part == "U2")
    assert (coupler.rms, coupler.peak) == (None, None)
    assert [steps[id].text for id in steps[coupler.voltage_step].inputs] == ["made up"]
    (barrier,), _, _ = shown(analysis, stress=Stress())
    assert barrier.working_voltage is None


def test_a_declared_working_voltage_wins(analysis):
    rms = Range(150.0, 150.0, "V", "rms", Source("d.yaml", 7), "150 V rms")
    declared = replace(analysis.declaration, barriers=(DeclaredBarrier(("+12V", "mains"), "basic", rms),))
    (barrier,), _, steps = shown(analysis, declaration=declared, stress=Stress(barriers={"mains|+12V": volts(240.0, 351.4)}))
    assert (barrier.working_voltage.rms, barrier.working_voltage.peak) == (150.0, 351.4)
    assert [(seen.path, seen.line) for seen in steps[barrier.working_voltage.step].evidence] == [("d.yaml", 7)]


def test_the_further_separations_have_the_shape_of_barriers(analysis):
    _, (poles, fuse), steps = shown(analysis, stress=Stress(barriers={"live|neutral": volts(240.0, 339.4)}))
    assert (poles.id, poles.between, poles.reason, poles.parts) == ("live|neutral", ["live", "neutral"], POLES, [])
    assert poles.working_voltage.peak == 339.4
    assert fuse.working_voltage is None
    assert (fuse.grade, steps[fuse.step].text) == ("basic", "ends of a fuse: basic insulation")
    assert steps[steps[fuse.step].inputs[0]].text.startswith("fuse F1 sits in the conductor of L")


def test_surroundings_stand_in_the_report():
    report = api.verify(DEMO / "greenhouse.net", bom=[DEMO / "bom.csv"], declaration=DEMO / "declaration.yaml")
    assert report.environment == {"pollution_degree": "2", "altitude": 2000.0, "material_group": "IIIb", "ambient": 45.0}
