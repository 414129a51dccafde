"""Resolution of what several places say about one part: who wins, what stays visible, what cannot both be true."""

from __future__ import annotations

import pytest

from checker.identify.candidates import identify
from checker.model.candidate import Mark, Winding
from checker.model.circuit import Design, Part
from checker.model.declaration import Declaration, DeclaredPart
from checker.model.fact import Fact, Source, Trust

NETLIST, BOM, PARTS = Source("board.net", 7), Source("bom.csv", 3), Source("parts.yaml", 2)


def said(trust=Trust.NETLIST, source=NETLIST, **texts):
    """Facts of one place; `rating_voltage` stands for the attribute `rating:voltage`."""
    return tuple(Fact(name.replace("rating_", "rating:"), value, source, trust) for name, value in texts.items())


def first(facts, alternates=(), declared=None, ref="C1"):
    """Candidates of a design with one part."""
    declared_facts = declared.facts if declared else ()  # assemble puts them beside the others
    part = Part(ref, (), (*facts, *declared_facts), (NETLIST,), tuple(alternates))
    declaration = Declaration(parts={ref: declared}) if declared else Declaration()
    return identify(Design("d", {ref: part}, {}), declaration)[ref]


def test_the_bom_wins_over_the_netlist_and_both_places_stay_known():
    (found,) = first(said(value="100n", symbol="C") + said(Trust.BOM, BOM, value="100nF/50V/X7R/C0603"))
    assert found.kind == "capacitor"
    assert found.value.value == 1e-7
    assert found.value.source == BOM
    assert found.ratings["voltage"].value == 50.0
    assert found.ratings["voltage"].source == BOM
    assert found.disagreements == ()


def test_a_capacitor_marked_102_is_one_nanofarad():
    # common practice, no source: three digits are two figures and a count of zeros, in picofarad
    (found,) = first(said(value="102", symbol="C"))
    assert (found.value.value, found.value.unit) == (1e-9, "F")


def test_102_against_102nf_cannot_both_be_true():
    (found,) = first(said(value="102", symbol="C") + said(Trust.BOM, BOM, value="102nF"))
    (disagreement,) = found.disagreements
    assert disagreement.attribute == "value"
    assert disagreement.factor == pytest.approx(102)
    assert {disagreement.kept.source, disagreement.other.source} == {NETLIST, BOM}


def test_value_and_description_a_power_of_ten_apart():
    (found,) = first(said(value="1n", symbol="C") + said(Trust.BOM, BOM, description="CAP CER 10NF 250VAC Y2 RADIAL"))
    assert [d.attribute for d in found.disagreements] == ["value"]
    assert found.disagreements[0].factor == pytest.approx(10)


def test_a_bought_part_with_a_higher_voltage_contradicts_nothing_one_with_a_lower_does():
    (higher,) = first(said(value="1u 25V", symbol="C") + said(Trust.BOM, BOM, rating_voltage="50 V"))
    (lower,) = first(said(value="1u 50V", symbol="C") + said(Trust.BOM, BOM, rating_voltage="25 V"))
    assert higher.disagreements == ()
    assert [d.attribute for d in lower.disagreements] == ["rating:voltage"]


def test_marks_of_the_bom_column_win_over_the_value_and_the_contradiction_is_shown():
    (found,) = first(said(value="2n2/Y1", symbol="C") + said(Trust.BOM, BOM, mark="X2"))
    assert [mark.name for mark in found.marks] == ["X2"]
    assert [d.attribute for d in found.disagreements] == ["mark"]


@pytest.mark.parametrize("attribute", ["datasheet", "distributor"])
def test_no_mark_and_no_rating_comes_from_a_link_or_a_distributor(attribute):
    # a class "Y1" was once read out of a shop link and collapsed a barrier
    (found,) = first(said(value="1n", symbol="C", **{attribute: "https://shop.example/y1/400vac/102"}))
    assert found.marks == ()
    assert found.ratings == {}


def test_an_alternate_keeps_the_place_but_none_of_the_first_choice_marks_or_ratings():
    row = said(Trust.BOM, BOM, type="DISC-Y1-102M", mark="Y1", rating_voltage="500 VAC", description="CAP CER 1NF Y1")
    other = said(Trust.BOM, BOM, type="DISC-1KV-102K")
    chosen, alternate = first(said(value="1n", symbol="C", footprint="THT:DISC_P10") + row, [other])
    assert [mark.name for mark in chosen.marks] == ["Y1"]
    assert alternate.label == "DISC-1KV-102K"
    assert alternate.kind == "capacitor"
    assert alternate.marks == ()
    assert "voltage" not in alternate.ratings


def test_the_declaration_wins_over_everything():
    declared = DeclaredPart(
        "T1",
        said(Trust.DECLARED, Source("d.yaml", 4), kind="transformer"),
        (Mark("IEC 61558-2-16", Fact("mark", "IEC 61558-2-16")),),
        (Winding(("1", "2"), (40.0,)), Winding(("7", "8"), (6.0,))),
    )
    (found,) = first(said(value="whatever", symbol="R", turns="1-2:10, 7-8:10"), declared=declared, ref="T1")
    assert found.kind == "transformer"
    assert [winding.turns for winding in found.windings] == [(40.0,), (6.0,)]
    assert [mark.name for mark in found.marks] == ["IEC 61558-2-16"]


def test_a_test_voltage_is_never_a_working_voltage():
    (found,) = first(said(value="817C", description="OPTOISO 5KV TRANS 4DIP"), ref="U1")
    assert found.kind == "optocoupler"
    assert found.ratings["isolation_test"].value == 5000.0
    assert "isolation_working" not in found.ratings
    assert "temperature" not in found.ratings  # 817C is a type, not 817 degrees


def test_a_part_nobody_describes_still_has_a_candidate():
    (found,) = first((), ref="U9")
    assert (found.kind, found.sure, found.listed) == ("ic", False, False)


def test_a_class_the_schematic_wants_does_not_survive_a_bill_that_describes_an_ordinary_part():
    (found,) = first(
        said(value="1n Y1", symbol="C") + said(Trust.BOM, BOM, description="CAP CER 1NF 1KV X7R", type="DISC-1KV-102K")
    )
    assert found.marks == ()
    assert [d.attribute for d in found.disagreements] == ["mark"]


def test_a_class_of_the_schematic_stands_while_the_bill_only_names_a_type():
    (found,) = first(said(value="1n Y1", symbol="C") + said(Trust.BOM, BOM, value="1nF", type="ABC-102M"))
    assert [mark.name for mark in found.marks] == ["Y1"]


def test_what_the_schematic_wants_says_nothing_about_an_alternate():
    _, alternate = first(said(value="1n Y1", symbol="C"), [said(Trust.BOM, BOM, type="ABC-102M")])
    assert alternate.marks == ()
