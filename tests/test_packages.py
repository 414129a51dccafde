"""What footprint names say about the distance between the pads of two sides, and what that leaves; other names say nothing."""

from __future__ import annotations

import pytest

from checker.identify import packages
from checker.model.candidate import Candidate
from checker.model.domain import Crossing
from checker.model.fact import Fact
from checker.model.step import Step
from checker.rules.pad_room import Params, room

WIDTHS = {
    "Package_SO:SOIC-16W_7.5x10.3mm_P1.27mm": 7.5,
    "SOIC-16_7.5x12.8mm": 7.5,
    "SOIC-8_3.9x4.9mm": 3.9,
    "Package_SO:SOIC-8-1EP_3.9x4.9mm": 3.9,
    "SO-4_4.4x3.6mm_P2.54mm": 4.4,
    "SOP-4_3.8x4.1mm_P2.54mm": 3.8,
    "TSSOP-20_4.4x6.5mm": 4.4,
    "MFSOP6-4_4.4x3.6mm_P1.27mm": 4.4,
    "SO-6L_10x3.84mm_P1.27mm": 10.0,
    "SOIC-8W": None,
    "SO-16-W": None,
    "QFN-16_3x3mm": None,
    "DIP-4_W7.62mm": None,
    "Crystal_SMD_3225-4Pin_3.2x2.5mm": None,
    "Bosch_LGA-14_3x2.5mm": None,
    "": None,
}
SPANS = {
    "SOIC127P1030X265-16N": 10.3,
    "_abc:SOIC127P600X175-8N": 6.0,
    "SOP65P780X200-20N": 7.8,
    "SOIC-8_3.9x4.9mm": None,
    "QFN50P300X300-16": None,
}
GAPS = {"SMDIP-4_W9.53mm_Clearance8mm": 8.0, "SMDIP-4_W9.53mm": None, "DIP-4_W10.16mm": None, "Clearance": None}


@pytest.mark.parametrize("name", WIDTHS)
def test_the_width_of_a_body_with_gull_wing_leads(name: str) -> None:
    assert packages.body_width(name) == WIDTHS[name]


@pytest.mark.parametrize("name", SPANS)
def test_the_distance_over_the_leads(name: str) -> None:
    assert packages.lead_span(name) == SPANS[name]


@pytest.mark.parametrize("name", GAPS)
def test_a_name_that_states_the_distance_of_the_copper(name: str) -> None:
    assert packages.pad_gap(name) == GAPS[name]


# --- what that leaves between the pads of the two sides; expected figures by hand from the drawings of the packages ---------------


def kept(footprint: str, one: str, two: str, ordered: str = "") -> tuple[float, float | None] | None:
    """(most, usual) between pins `1 2` and `3 4`, as mm."""
    read = {"pad_span": packages.pad_span, "pad_gap": packages.pad_gap, "body_width": packages.body_width}
    read |= {"lead_span": packages.lead_span, "package_pins": packages.body_pins}
    said = {name: Fact(name, float(value), text=footprint) for name, get in read.items() if (value := get(footprint)) is not None}
    if ordered:
        said["row_span"] = Fact("row_span", ordered)
    crossing = Crossing("U1", "insulating", ("a", "b"), (tuple(one.split()), tuple(two.split())), ("U1",), True, Step(""))
    found = room(Candidate("optocoupler", attributes=said), crossing, footprint, Params())
    return None if found is None else (found.most, found.usual)


@pytest.mark.parametrize(
    ("footprint", "one", "two", "expected"),
    [
        ("DIP-4_W7.62mm", "1 2", "3 4", (6.62, 6.02)),
        ("DIP-4_W10.16mm", "1 2", "3 4", (9.16, 8.56)),
        ("DIP-4_W10.16mm_LongPads", "1 2", "3 4", (9.16, 7.76)),
        ("DIP-6_W7.62mm", "1 2", "4 6", (6.62, 6.02)),
        ("SMDIP-4_W9.53mm", "1 2", "3 4", (8.53, 7.53)),
        ("SMDIP-4_W9.53mm_Clearance8mm", "1 2", "3 4", (8.0, 8.0)),
        ("SOIC-16W_7.5x10.3mm_P1.27mm", "1 2 8", "9 15 16", (9.5, 6.5)),
        ("SOIC127P1030X265-16N", "1", "16", (9.5, 7.3)),
        ("SO-6L_10x3.84mm_P1.27mm", "1 3", "4 6", (12.0, None)),
        # both sides on one row: pins 2 and 3 are one pitch apart
        ("DIP-8_W7.62mm", "1 2", "3 4", (1.54, 0.94)),
        # sides at the two ends: pins 3 and 9 lie 6 pitches apart, pins 22 and 16 too
        ("DIP-24_W15.24mm", "1 2 3 22 23", "9 11 14 16", (14.24, 13.64)),
        # no two pins face one another: 2.54 mm aside
        ("DIP-4_W7.62mm", "1", "3", (7.032, 6.432)),
        ("SOIC-8_3.9x4.9mm", "1 2", "3 4", None),
        ("SMDIP-4_W9.53mm", "1 4", "2 3", None),
        ("DIP-4", "1 2", "3 4", None),
        ("DIP-4_W7.62mm", "A K", "C E", None),
        ("DIP-4_W7.62mm", "1 2", "3 5", None),
    ],
)
def test_what_the_pads_keep(footprint: str, one: str, two: str, expected: tuple[float, float | None] | None) -> None:
    assert kept(footprint, one, two) == (expected if expected is None else pytest.approx(expected, abs=1e-3))


@pytest.mark.parametrize(
    ("footprint", "expected"), [("", (9.16, 8.56)), ("Package_DIP:DIP-4", (9.16, 8.56)), ("SMDIP-4", None), ("SOP-4", None)]
)
def test_the_ordered_outline_where_the_footprint_tells_nothing(footprint: str, expected: tuple[float, float] | None) -> None:
    assert kept(footprint, "1 2", "3 4", "10.16 mm") == expected
