"""What insulation needs, against worked examples from outside, and where each figure comes from."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import pytest

from checker import pipeline, rulesets, testing
from checker.formulas.lookup import look_up
from checker.model.condition import NORMAL
from checker.model.declaration import Range, Supply
from checker.model.fact import Fact, Source
from checker.model.requirement import Need, Required
from checker.model.rule import Analysis
from checker.model.step import Step
from checker.model.stress import Bounds, Stress, Voltage
from checker.requirements.duty import Duty, Sources, from_mains, rated_mains, word
from checker.requirements.needs import need, needs

ROOT = Path(__file__).resolve().parents[1]
HERE = Step("given by the test")


def volts(low: float, high: float | None = -1.0, form: str = "peak", missing: str = "working voltage") -> Required:
    """A voltage; high -1: exactly `low`."""
    top = low if high == -1.0 else high
    return Required(low, top, HERE, "true", "V", form, "" if top == low else missing)


def asked(
    ruleset: str = "iec-62368-1",
    grade: str = "reinforced",
    rms: Required | float = 240.0,
    peak: Required | float = 340.0,
    mains: float | None = 240.0,
    category: str = "II",
    phases: int = 1,
    impulse: float | None = None,
    degree: str = "2",
    group: str = "IIIb",
    altitude: float = 2000.0,
    frequency: float | None = 50.0,
    shape: str = "ac",
    **params: dict[str, object],
) -> Need:
    """The need of one insulation by a shipped ruleset. params: parameters of a clause set anew, `creepage={...}`."""
    ruled = rulesets.load(ruleset)
    clauses = tuple(
        replace(clause, params=replace(clause.params, **params[clause.rule])) if clause.rule in params else clause
        for clause in ruled.clauses
    )
    basis = pipeline.basis(replace(ruled, clauses=clauses))
    sources = Sources()
    if mains is not None:
        supply = Supply("mains", "mains", Range(mains, mains, "V", "rms"), phases=phases, overvoltage_category=category)
        sources = from_mains(rated_mains(supply), supply, basis)
    elif impulse is not None:
        sources = Sources(impulse=volts(impulse))
    surroundings = {
        "pollution_degree": Fact("pollution_degree", degree),
        "material_group": Fact("material_group", group),
        "altitude": Fact("altitude", altitude, unit="m"),
    }
    at = [volts(each, form=form) if isinstance(each, float) else each for each, form in ((rms, "rms"), (peak, "peak"))]
    return need(Duty(word(grade), grade, at[0], at[1], frequency, shape, sources, surroundings, basis))


def exact(required: Required | None) -> float | None:
    """The figure that is needed, when both bounds are the same."""
    if required is None:
        return None
    assert (required.at_least, required.missing) == (required.enough, "")
    return required.enough


# Worked examples: what is asked, which figure, its value, and where the value was read. Keys in brackets are those of
# ../shared/reference/standards.yaml.
WORKED = [
    # published test report to IEC 62368-1, pages 43 and 44: 420 V peak, 240 V r.m.s., category II (b_ex04, a_gl44, a_gl45)
    ({"grade": "basic", "peak": 420.0}, "clearance", 1.5),
    ({"peak": 420.0}, "clearance", 3.0),
    ({"peak": 420.0, "creepage": {"between_rows": "next-higher"}}, "creepage", 5.0),
    ({"peak": 420.0}, "electric_strength", 4000.0),
    ({"peak": 420.0}, "through_insulation", 0.4),
    ({"grade": "basic", "peak": 420.0}, "through_insulation", None),  # no least distance for basic (a_pstc80046)
    # product-safety list, November 2024: 230 V is 2.3 mm basic (a_pstc80046)
    ({"grade": "basic", "rms": 230.0, "mains": 230.0}, "creepage", 2.3),
    ({"rms": 230.0, "mains": 230.0}, "creepage", 4.6),
    # 240 V by interpolation: 2.0 + 0.5 x 40/50 = 2.4, doubled
    ({}, "creepage", 4.8),
    # published test report to IEC 60950-1: 281 V is 2.81, rounded 2.9, doubled 5.8; 250 V is 5.0; basic 2.5 (b_ex01, b_ex02,
    # b_ex03; for the rounding only)
    ({"rms": 281.0, "peak": 530.0}, "creepage", 5.8),
    ({"rms": 250.0, "peak": 428.0}, "creepage", 5.0),
    ({"grade": "basic", "rms": 250.0, "peak": 420.0}, "creepage", 2.5),
    # terminal maker's table of altitude factors: 1.48 at 5000 m; rounded up to 0.1 mm by a guide to J60950-1 (a_wago_a2, c_j60950)
    ({"altitude": 5000.0}, "clearance", 4.5),
    ({"grade": "basic", "altitude": 5000.0}, "clearance", 2.3),
    # product-safety list: 3000 m is 14 % more than 2000 m (a_alt14)
    ({"altitude": 3000.0}, "clearance", 3.5),
    ({"ruleset": "iec-60664-1", "altitude": 3000.0}, "clearance", 3.5),
    # linear between them: 1.07 at 2500 m
    ({"altitude": 2500.0}, "clearance", 3.3),
    # isolated amplifier data sheet: 1000 V unearthed, category II, reinforced: 6000 V impulse, next step 8.0 mm, 2200 V r.m.s.
    # doubled to 4400 V (b_ex06, a_amc1411)
    ({"ruleset": "iec-60664-1", "mains": 1000.0, "rms": 1000.0, "peak": 1414.0, "group": "I"}, "clearance", 8.0),
    ({"ruleset": "iec-60664-1", "mains": 1000.0, "rms": 1000.0, "peak": 1414.0}, "electric_strength", 4400.0 * math.sqrt(2)),
    ({"ruleset": "iec-60664-1", "grade": "basic", "mains": 1000.0, "rms": 1000.0}, "electric_strength", 2200.0 * math.sqrt(2)),
    ({"ruleset": "iec-60664-1", "mains": 1000.0, "rms": 1000.0, "peak": 1414.0, "group": "I"}, "creepage", 10.0),
    # connector manual and data sheet: 2500 V is 1.5 mm, its next step 4000 V 3.0 mm (a_harting41612)
    ({"ruleset": "iec-60664-1", "grade": "basic"}, "clearance", 1.5),
    ({"ruleset": "iec-60664-1"}, "clearance", 3.0),
    # national edition of IEC 60255-5: 4 kV is 3.0 mm, 8 kV 8.0 mm (a_gost_60255_5); category IV of 300 V is 6000 V
    ({"ruleset": "iec-60664-1", "grade": "basic", "category": "III"}, "clearance", 3.0),
    ({"ruleset": "iec-60664-1", "category": "IV"}, "clearance", 8.0),
    # IEC 60255-27, table D.3: 300 V, category II, degree 1 is 1.5 mm (a_gost_60255_27)
    ({"ruleset": "iec-60664-1", "grade": "basic", "mains": 300.0, "rms": 300.0, "degree": "1"}, "clearance", 1.5),
    # copy of table 11, above 30 kHz: 1000 V is 0.6 mm basic, 1800 V 16.08 mm reinforced; degree 1 x 0.8, degree 3 x 1.4 (a_readit)
    ({"mains": None, "peak": 1800.0, "frequency": 100e3}, "clearance", 16.08),
    ({"mains": None, "peak": 1800.0, "frequency": 100e3, "degree": "1"}, "clearance", 12.9),
    ({"mains": None, "grade": "basic", "peak": 2000.0, "frequency": 64.1e3, "degree": "3"}, "clearance", 18.5),
    # terminal catalogue: 400 V in pollution degree 3, group III is 6.3 mm (a_wago_f4)
    ({"grade": "basic", "rms": 400.0, "peak": 566.0, "degree": "3"}, "creepage", 6.3),
    # three phases of 400 V are 231 V to the neutral: row 300 V (a_harting41612)
    ({"mains": 400.0, "phases": 3}, "clearance", 3.0),
    # a declared impulse of 2500 V with no mains: the same row of table 14 (a_gl44)
    ({"mains": None, "impulse": 2500.0}, "clearance", 3.0),
    ({"mains": None, "impulse": 2500.0}, "electric_strength", 4000.0),
]


@pytest.mark.parametrize(("given", "figure", "value"), WORKED)
def test_a_worked_example_is_reproduced(given, figure, value):
    found = getattr(asked(**given), figure)
    if figure == "electric_strength":
        assert exact(found["peak"]) == pytest.approx(value, rel=1e-9)
        assert exact(found["rms"]) == pytest.approx(value / math.sqrt(2), rel=1e-9)
    else:
        assert exact(found) == value


@pytest.mark.parametrize(("column", "rms"), [("pd2_i", 830.0), ("pd2_iii", 415.0)])
def test_the_working_voltage_of_a_body_of_8_3_mm(column, rms):
    """Maker's answer: 8.3 mm is 830 V in group I and 415 V in group III (b_ex05, b_ad7403); it does not round to 0.1 mm."""
    for ruleset in ("iec-62368-1", "iec-60664-1"):
        table = replace(rulesets.load(ruleset).tables["creepage"], round="")
        assert 2 * look_up(table, column, rms).value == pytest.approx(8.3, rel=1e-9)


def test_the_temporary_overvoltage_of_the_data_sheet():
    """1000 V unearthed, reinforced: 4400 V r.m.s. is 6223 V peak (b_ex06; the sheet prints 6250)."""
    found = asked("iec-60664-1", mains=1000.0, rms=1000.0, peak=1414.0).electric_strength
    assert exact(found["peak"]) == pytest.approx(6223, abs=1)
    assert exact(found["rms"]) == pytest.approx(4400, abs=1e-6)


def test_creepage_is_never_below_the_clearance():
    """A product-safety rule of IEC 60950-1 and 62368-1 (a_an3962_10): here group I, where 240 V asks for 1.2 mm only."""
    found = asked(group="I")
    assert exact(found.creepage) == exact(found.clearance) == 3.0


# bounds


def test_between_two_bounds_the_need_has_two_bounds():
    found = asked(rms=volts(240.0, 400.0, "rms"), peak=volts(340.0, 600.0))
    assert (found.creepage.at_least, found.creepage.enough) == (4.8, 8.0)
    assert found.creepage.missing == "working voltage"
    assert exact(found.clearance) == 3.0  # the transient decides, whatever the working voltage is


def test_without_an_upper_bound_nothing_is_enough_but_the_floor_stays():
    found = asked(rms=volts(240.0, None, "rms"), peak=volts(340.0, None))
    assert (found.creepage.at_least, found.creepage.enough, found.creepage.missing) == (4.8, None, "working voltage")
    assert (found.clearance.at_least, found.clearance.enough) == (3.0, None)
    peak = found.electric_strength["peak"]
    assert (peak.at_least, peak.enough) == (4000.0, None)


def test_a_table_is_not_extended_beyond_its_end():
    found = asked(altitude=5200.0).clearance
    assert (found.at_least, found.enough) == (4.5, None)
    assert found.missing == "altitude 5200 m: no factor beyond 5000 m"
    far = asked(mains=None, rms=12000.0, peak=17000.0, group="I").creepage
    assert far.enough is None
    assert "ends at 10 kV rms" in far.missing


def test_a_missing_column_leaves_the_need_open():
    found = asked(degree="4")
    assert (found.clearance.enough, found.creepage.enough) == (None, None)
    assert found.clearance.missing == "column reinforced_pd4 in the table clearance-steady"
    assert found.creepage.missing == "column pd4_iiib in the table creepage"


def test_an_unknown_frequency_may_need_more_but_surely_needs_what_a_low_one_does():
    low, unknown = asked(peak=1000.0, frequency=50.0), asked(peak=1000.0, frequency=None)
    assert unknown.clearance.at_least == low.clearance.at_least == 3.0
    high = asked(peak=1600.0, frequency=None).clearance
    assert (high.at_least, high.enough, high.missing) == (3.0, 9.6, "frequency of the working voltage")


@pytest.mark.parametrize("grade", ["", "none", "functional", "1-MOOP", "2-MOPP"])
def test_grades_without_distances_of_this_standard_ask_for_none(grade):
    assert word(grade) == ""


def test_below_class_es2_no_distance_through_insulation_is_asked():
    assert asked(mains=None, rms=30.0, peak=42.0).through_insulation is None
    assert exact(asked(mains=None, rms=100.0, peak=121.0, shape="dc").through_insulation) == 0.4
    assert asked(mains=None, rms=110.0, peak=110.0, shape="dc").through_insulation is None


def test_the_need_is_marked_as_the_weakest_table_it_rests_on():
    assert asked().clearance.verified == "false"  # the table of steady voltages is from memory
    assert asked().through_insulation.verified == "partial"
    assert asked("iec-60664-1", mains=None, rms=100.0).creepage.verified == "false"
    assert asked("iec-60664-1", mains=None, rms=100.0, clearance={"steady": ""}).creepage.verified == "true"


def test_every_figure_ends_in_tables_and_facts():
    found = asked(peak=420.0)
    cited = set()
    stack = [found.clearance.step, found.creepage.step, found.electric_strength["rms"].step]
    while stack:
        step = stack.pop()
        if isinstance(step, Step):
            cited.add(step.citation)
            stack += step.inputs
    for number in ("table 12", "table 10", "table 14", "table 16", "table 17", "table 25", "table 26", "table 27"):
        assert any(number in citation for citation in cited), number
    assert "5 mm where a laboratory reads the row 250 V" in " ".join(step.text for step in _steps(found.creepage.step))


def _steps(step: Step):
    yield step
    for each in step.inputs:
        if isinstance(each, Step):
            yield from _steps(each)


# needs of a board

CASES = testing.load_cases(ROOT / "fixtures" / "rules" / "clearance.yaml")
NOTHING_STATED = next(case for case in CASES.cases if case.name.startswith("nothing says"))


def analysis(case: testing.Case = NOTHING_STATED) -> Analysis:
    design = pipeline.assemble(case.name, testing.readings(case.parts), case.declaration, None)
    identity = pipeline.identify(design, case.declaration)
    choice = next(pipeline.choices(identity))
    return pipeline.analyse(design, case.declaration, identity, choice, rulesets.load_all(("iec-62368-1",)))


def on_board(stress: Stress, board: Analysis | None = None) -> dict[tuple[str, str, str], Need]:
    at = board or analysis()
    assert at.condition is NORMAL
    return dict(needs(at, at.isolation.separations, stress, at.grades, pipeline.basis(rulesets.load("iec-62368-1"))))


def voltage(surely: float, top: float, rms: float) -> Voltage:
    return Voltage(Bounds(rms, rms, HERE, form="rms"), Bounds(surely, top, HERE), "mixed", 65e3)


BARRIER = ("iec-62368-1", "mains|VOUT")


def test_where_nothing_is_known_the_floor_is_the_rated_mains():
    found = on_board(Stress())
    assert set(found) == {(*BARRIER, ref) for ref in ("", "T1", "U2")}
    for each in found.values():
        assert (each.grade, each.clearance.at_least, each.creepage.at_least) == ("reinforced", 3.0, 4.8)
        assert each.creepage.enough is None
    assert found[(*BARRIER, "U2")].creepage.missing == "working voltage between PGND and OPTO_A"
    assert found[(*BARRIER, "")].creepage.missing == "working voltage between mains and VOUT"


def test_a_part_is_judged_on_its_own_pins_and_never_below_the_mains():
    own = {("U2", ("mains", "VOUT")): voltage(100.0, 100.0, 70.0), ("T1", ("mains", "VOUT")): voltage(500.0, 510.0, 370.0)}
    found = on_board(Stress(across=own, barriers={"mains|VOUT": voltage(500.0, 510.0, 370.0)}))
    assert exact(found[(*BARRIER, "U2")].creepage) == 4.8  # 240 V mains, not its own 70 V
    assert exact(found[(*BARRIER, "T1")].creepage) == exact(found[(*BARRIER, "")].creepage) == 7.4  # 370 V, as in design section 8
    assert exact(found[(*BARRIER, "T1")].clearance) == 3.0


def test_a_part_nobody_knows_needs_no_more_than_the_whole_barrier():
    found = on_board(Stress(barriers={"mains|VOUT": voltage(500.0, 510.0, 370.0)}))[(*BARRIER, "U2")].creepage
    assert (found.at_least, found.enough) == (4.8, 7.4)


def test_a_declared_working_voltage_wins_for_the_barrier_and_its_parts():
    stated = next(case for case in CASES.cases if case.outcome == "pass" and "barriers" in str(case.declaration))
    found = on_board(Stress(barriers={"mains|VOUT": voltage(900.0, 1000.0, 800.0)}), analysis(stated))
    assert all(exact(each.creepage) == 4.8 for each in found.values())
    facts = found[(*BARRIER, "T1")].creepage.step.facts()
    assert any(fact.attribute == "working_voltage" and fact.source.line for fact in facts)


@pytest.mark.parametrize(
    ("origin", "at_least", "enough", "missing"),
    [
        ("isolated", 0.2, 0.2, ""),  # no transient is known: 212 V peak by the table of steady voltages
        ("mains", 1.27, 1.5, "impulse"),  # a mains nobody named: 2000 V of temporary overvoltage, up to 2500 V of transients
        ("unknown", 0.2, 1.5, "origin of the d.c. supply"),
    ],
)
def test_behind_a_direct_supply_its_origin_tells_the_transient(origin, at_least, enough, missing):
    case = next(case for case in CASES.cases if case.name.startswith("a declared basic barrier behind"))
    supply = replace(case.declaration.supplies[0], origin=origin)
    at = analysis(replace(case, declaration=replace(case.declaration, supplies=(supply,))))
    found = at.needs[("iec-62368-1", "logic|field", "U3")].clearance
    assert (found.at_least, found.enough, found.missing) == (at_least, enough, missing)
    alone = any("no transient is known" in step.text for step in _steps(found.step))
    assert alone == (origin == "isolated")


def test_a_house_layer_can_use_a_creepage_table_of_its_own(tmp_path):
    path = tmp_path / "house.yaml"
    path.write_text(
        "schema: withstand-ruleset/1\nid: house\nrevision: '1'\nbased_on: iec-62368-1:2018\n"
        "sources: {HB: {title: House handbook}}\ntables:\n"
        "  creepage-house: {columns: {voltage: V rms, pd2_iiib: mm, pd2: mm}, lookup: interpolate,\n"
        "    round: up to 0.1 mm, source: HB table 3, verified: true, rows: [[250, 2.7, 9], [320, 3.2, 9]]}\n"
        "change:\n  iec-62368-1/creepage: {params: {table: creepage-house}, because: field returns}\n",
        encoding="utf-8",
    )
    house = rulesets.load(str(path))
    assert next(clause for clause in house.clauses if clause.id == "creepage").loosened == ""  # it asks for no less anywhere
    at = analysis()
    grades = {("house", separation): grade for (_, separation), grade in at.grades.items()}
    own = {("U2", ("mains", "VOUT")): voltage(350.0, 350.0, 240.0)}
    found = dict(needs(at, at.isolation.separations, Stress(across=own), grades, pipeline.basis(house)))
    assert exact(found[("house", "mains|VOUT", "U2")].creepage) == 5.4  # its first row, doubled; column pd2_iiib before pd2
    damp = replace(at, setting=replace(at.setting, environment={**at.setting.environment, "pollution_degree": _damp()}))
    open_ = dict(needs(damp, at.isolation.separations, Stress(across=own), grades, pipeline.basis(house)))[
        ("house", "mains|VOUT", "U2")
    ].creepage
    assert (open_.enough, open_.missing) == (None, "column pd3_iiib in the table creepage-house")


def _damp() -> Fact:
    return Fact("pollution_degree", "3", Source("declaration.yaml", 4))


def test_a_ruleset_without_these_clauses_asks_nothing():
    at = analysis()
    grades = {("derating-commercial", separation): grade for (_, separation), grade in at.grades.items()}
    found = dict(needs(at, at.isolation.separations, Stress(), grades, pipeline.basis(rulesets.load("derating-commercial"))))
    assert all(each == Need("derating-commercial", "reinforced") for each in found.values())
