"""Distances between pads: the geometry against another library, the join of pads, and what the rule says of whole boards."""

from __future__ import annotations

import random
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import testing
from checker.assemble.join import assemble
from checker.formulas.pad_gap import Field, Shape, gap, nearest, rectangle, rounded
from checker.model.declaration import Declaration
from checker.model.fact import Fact, Source
from checker.model.reading import NetRecord, Node, PadRecord, PartRecord, Reading
from checker.model.report import Report, VerdictShown

RULES = Path(__file__).resolve().parents[1] / "fixtures" / "rules"

lengths = st.floats(0.05, 20)
places = st.floats(-50, 50)
angles = st.one_of(st.sampled_from([0.0, 45.0, 90.0, 135.0, 180.0, 270.0]), st.floats(0, 360))
sizes = st.tuples(places, places, lengths, lengths, angles)


def drawn(shape: Shape):  # type: ignore[no-untyped-def]
    """The same shape in shapely, from its corners."""
    geometry = pytest.importorskip("shapely.geometry")
    corners = shape.corners
    if len(corners) == 1:
        return geometry.Point(corners[0])
    return geometry.LineString(corners) if len(corners) == 2 else geometry.Polygon(corners)


def boxed(x: float, y: float, width: float, height: float, turned: float):  # type: ignore[no-untyped-def]
    """A rectangle that shapely turns itself."""
    geometry = pytest.importorskip("shapely.geometry")
    affinity = pytest.importorskip("shapely.affinity")
    return affinity.rotate(geometry.box(x - width / 2, y - height / 2, x + width / 2, y + height / 2), turned, origin=(x, y))


@settings(max_examples=400, deadline=None)
@given(sizes, sizes)
def test_rectangles_are_as_far_apart_as_another_library_says(one: tuple[float, ...], two: tuple[float, ...]) -> None:
    assert gap(rectangle(*one), rectangle(*two)) == pytest.approx(boxed(*one).distance(boxed(*two)), abs=1e-7)


@settings(max_examples=400, deadline=None)
@given(sizes, sizes)
def test_round_ends_are_as_far_apart_as_their_centre_lines_less_the_radii(one: tuple[float, ...], two: tuple[float, ...]) -> None:
    a, b = rounded(*one), rounded(*two)
    meant = max(0.0, drawn(a).distance(drawn(b)) - a.radius - b.radius)
    assert gap(a, b) == pytest.approx(meant, abs=1e-7)
    assert gap(a, rectangle(*two)) == pytest.approx(max(0.0, drawn(a).distance(boxed(*two)) - a.radius), abs=1e-7)


@settings(max_examples=200, deadline=None)
@given(sizes, sizes)
def test_round_ends_never_leave_less_than_square_corners(one: tuple[float, ...], two: tuple[float, ...]) -> None:
    assert gap(rounded(*one), rounded(*two)) >= gap(rectangle(*one), rectangle(*two)) - 1e-9


@settings(max_examples=200, deadline=None)
@given(sizes)
def test_a_strip_lies_in_its_rectangle_and_its_box(size: tuple[float, ...]) -> None:
    strip = rounded(*size)
    assert boxed(*size).buffer(1e-6).contains(drawn(strip).buffer(strip.radius))
    assert strip.box == pytest.approx(drawn(strip).buffer(strip.radius, quad_segs=64).bounds, abs=1e-2)
    assert min(size[2:4]) == pytest.approx(2 * strip.radius)


@pytest.mark.parametrize(
    ("one", "two", "meant"),
    [
        ((0, 0, 2, 2), (5, 0, 2, 2), 3.0),  # discs
        ((0, 0, 4, 1), (0, 3, 4, 1), 2.0),  # side by side
        ((0, 0, 4, 1), (5, 0, 4, 1), 1.0),  # end to end
        ((0, 0, 4, 1, 90), (3, 0, 1, 4), 2.0),  # the same one turned
        ((0, 0, 4, 1, 45), (0, 0, 4, 1, 135), 0.0),  # crossed
        ((0, 0, 0, 0), (3, 4, 0, 0), 5.0),  # no sizes
    ],
)
def test_distances_by_hand(one: tuple[float, ...], two: tuple[float, ...], meant: float) -> None:
    assert gap(rounded(*one), rounded(*two)) == pytest.approx(meant)


def test_a_rectangle_without_one_side_is_a_line() -> None:
    assert gap(rectangle(0, 0, 4, 0), rectangle(3, 0, 0, 0)) == 1.0
    assert gap(rectangle(0, 0, 4, 2), rectangle(0, 0, 0, 0)) == 0.0


@settings(max_examples=100, deadline=None)
@given(st.lists(sizes, max_size=40), st.lists(sizes, max_size=40))
def test_the_nearest_pair_is_the_one_that_trying_every_pair_finds(
    one: list[tuple[float, ...]], two: list[tuple[float, ...]]
) -> None:
    a, b = [rounded(*size) for size in one], [rounded(*size) for size in two]
    found = nearest(Field.of(a), Field.of(b))
    every = [gap(first, second) for first in a for second in b]
    assert (found[0] if found else None) == min(every, default=None)
    if found:
        assert gap(a[found[1]], b[found[2]]) == found[0]
    even = nearest(Field.of(a), Field.of(b), lambda at, to: (at + to) % 2 == 0)
    some = [gap(first, second) for at, first in enumerate(a) for to, second in enumerate(b) if (at + to) % 2 == 0]
    assert (even[0] if even else None) == min(some, default=None)


def test_few_of_many_pairs_are_measured() -> None:
    """Counted, not timed: 5,000 pads in one place, two facing rows, and a scatter on two halves of a board."""
    rng = random.Random(3)
    rows = [[rounded(x, 2 * k, 1, 1) for k in range(5000)] for x in (0, 5)]
    halves = [[rounded(rng.uniform(a, a + 90), rng.uniform(0, 200), 2, 1, 45) for _ in range(5000)] for a in (0, 100)]
    for one, two in ([[rounded(0, 0, 1, 1)] * 5000] * 2, rows, halves):
        asked = 0

        def counts(at: int, to: int) -> bool:
            nonlocal asked
            asked += 1
            return True

        assert nearest(Field.of(one), Field.of(two), counts) is not None
        assert asked < 5000
    assert nearest(Field.of(halves[0]), Field.of(halves[1]), lambda at, to: False) is None


# the join

HERE = Source("a.ipc", 1)


def pad(ref: str, pin: str, label: str, x: float = 0.0) -> PadRecord:
    return PadRecord(ref, pin, label, x, 0.0, 1.0, 2.0, 90.0, 0.8, "top", HERE)


def test_pads_lie_on_the_nets_of_the_design() -> None:
    """A name that was given up leads to the one that was kept, a nameless net to its label, an unknown one nowhere."""
    nets = (
        NetRecord("Net-(R1-Pad1)", "Net-(R1-Pad1)", (Node("R1", "1", source=HERE), Node("R2", "1", source=HERE)), HERE),
        NetRecord("IN", "IN", (Node("R1", "1", source=HERE),), HERE),
        NetRecord("", "<unnamed:3>", (Node("R1", "2", source=HERE), Node("R2", "2", source=HERE)), HERE),
    )
    pads = (
        pad("R1", "1", "Net-(R1-Pad1)"),
        pad("", "", "IN"),
        pad("R2", "2", "<unnamed:3>"),
        pad("R2", "3", ""),
        pad("X", "1", "Z"),
    )
    parts = tuple(PartRecord(ref, (), HERE) for ref in ("R1", "R2"))
    design = assemble("a", [Reading("netlist", "case", "a.ipc", "", parts, nets, pads=pads)], Declaration())
    assert [found.net for found in design.pads] == ["IN", "IN", "<unnamed:3>", None, None]
    first = design.pads[0]
    assert (first.ref, first.pin, first.x, first.width, first.height, first.turned) == ("R1", "1", 0.0, 1.0, 2.0, 90.0)
    assert (first.drill, first.side, first.source) == (0.8, "top", HERE)


# the rule

CASES = testing.load_cases(RULES / "pad-distance.yaml").cases


def report(name: str, **changed: object) -> Report:
    (case,) = [case for case in CASES if case.name == name]
    return testing.report_of(replace(case, **changed))  # type: ignore[arg-type]


def told(found: Report) -> list[VerdictShown]:
    return [verdict for verdict in found.verdicts if verdict.rule == "pad-distance"]


def test_a_fail_says_which_pads_how_far_and_how_much_is_needed() -> None:
    (verdict,) = told(report("two parts on the top are 2.5 mm apart"))
    assert verdict.because.startswith("C1.1 on VBULK and C4.1 on VOUT lie 2.5 mm apart on the top side")
    assert "3 mm of clearance" in verdict.because
    assert "slot" not in verdict.because
    assert [place.line for place in verdict.evidence if "C1.1" in place.text or "C4.1" in place.text]


def test_a_slot_is_spoken_of_for_creepage_alone() -> None:
    (verdict,) = told(report("enough in air, too little along the surface"))
    assert "a slot in the board between them would lengthen it" in verdict.because


def test_what_lies_nearer_does_not_change_the_question() -> None:
    """The fingerprint of a barrier stays when another pair of pads is the nearest."""
    (before,) = told(report("pads far apart leave one question of level note"))
    (after,) = told(report("exactly what is needed leaves the question of the tracks"))
    (worse,) = told(report("two parts on the top are 2.5 mm apart"))
    assert before.fingerprint == after.fingerprint == worse.fingerprint


def test_an_own_material_group_of_a_part_says_nothing_of_the_board() -> None:
    """U2 states group I, which asks for less on its body: on the board only the clearance is sure."""
    (case,) = [case for case in CASES if case.name.startswith("the coupler on pads that are too long")]
    parts = tuple(
        replace(part, facts=(*part.facts, Fact("material_group", "I", HERE))) if part.ref == "U2" else part for part in case.parts
    )
    assert ("fail", ["U2"]) not in [(v.outcome, list(v.parts)) for v in told(testing.report_of(replace(case, parts=parts)))]


def test_ten_thousand_pads_ask_one_question() -> None:
    (case,) = [case for case in CASES if case.name == "pads far apart leave one question of level note"]
    rng = random.Random(1)
    sides = [("VBULK", 0.0), ("VOUT", 60.0)]
    pads = tuple(
        PadRecord("", "", net, start + rng.uniform(0, 50), rng.uniform(0, 100), 0.6, 0.6)
        for net, start in sides
        for _ in range(5000)
    )
    (verdict,) = told(testing.report_of(replace(case, pads=pads)))
    assert (verdict.outcome, verdict.level) == ("open", "note")
