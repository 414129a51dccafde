"""How far apart the pads of a part's two sides can lie, from what the names of its footprint and outline say.

Pins of a package with two rows are numbered around it: pin 1 faces the last pin. The distance between the copper of two pads
is that of their centres less one pad; the nearest two pins of the two sides decide. Sizes of pads: common practice, no source.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Annotated

from checker.model.candidate import Candidate
from checker.model.domain import Crossing
from checker.model.fact import Fact
from checker.model.step import Step
from checker.parameters import AtLeast, AtMost

PITCH = 2.54  # mm; of the leads of a dual-in-line package


@dataclass(frozen=True, slots=True)
class Params:
    """Sizes of pads, mm.

    hole_pad: usual and least diameter of a pad with a hole for a dual-in-line lead (least: 0.7 mm hole, ring of 0.15 mm).
    lead_pad: usual and least length of a pad under a bent lead of such a package. long_pad: usual length where the footprint
    is named LongPads. beyond_body: how much further apart than the body is wide the pads of gull-wing leads are at most;
    within_body: how much less they usually are. foot: length of such a foot with its pad, usual and least.
    """

    hole_pad: Annotated[float, AtLeast("mm")] = 1.6
    hole_pad_least: Annotated[float, AtLeast("mm")] = 1.0
    lead_pad: Annotated[float, AtLeast("mm")] = 2.0
    lead_pad_least: Annotated[float, AtLeast("mm")] = 1.0
    long_pad: Annotated[float, AtLeast("mm")] = 2.4
    beyond_body: Annotated[float, AtMost("mm")] = 2.0
    within_body: Annotated[float, AtLeast("mm")] = 1.0
    foot: Annotated[float, AtLeast("mm")] = 1.5
    foot_least: Annotated[float, AtLeast("mm")] = 0.4


@dataclass(frozen=True, slots=True)
class Room:
    """What the pads keep, mm. most: never more; usual: with pads of the usual size, None when the name tells no such thing."""

    most: float
    usual: float | None
    step: Step


@dataclass(frozen=True, slots=True)
class _Sides:
    """The pin numbers of the two sides, and the number of pins of the package."""

    one: tuple[int, ...]
    two: tuple[int, ...]
    count: int

    @property
    def straight(self) -> bool:
        """Whether each side has a row of its own and two of their pins face one another."""
        rows = [{pin > self.count // 2 for pin in side} for side in (self.one, self.two)]
        facing = any(one + two == self.count + 1 for one in self.one for two in self.two)
        return facing and rows[0].isdisjoint(rows[1])

    def nearest(self, span: float) -> float:
        """The least distance between centres of pads of the two sides, mm; span: that of the rows."""
        half = self.count // 2
        places = [
            [(min(pin, self.count + 1 - pin) * PITCH, span if pin > half else 0.0) for pin in side] for side in (self.one, self.two)
        ]
        return min(math.dist(one, two) for one in places[0] for two in places[1])


def room(candidate: Candidate, crossing: Crossing, footprint: str, params: Params) -> Room | None:
    """What the names tell of the distance between the pads of the two sides; None when they tell nothing.

    footprint: its name, "" for none; the outline that is ordered counts where that leaves it open.
    """
    said, ref = candidate.attributes, crossing.part
    sides = _sides(candidate, crossing)
    if sides is None:
        return None
    if sides.straight and (gap := said.get("pad_gap")) is not None:
        kept = float(gap.value)
        return Room(kept, kept, Step(f"the footprint of {ref} names {kept:g} mm between its pads", (gap,), result=kept, unit="mm"))
    span = said.get("pad_span") or (said.get("row_span") if _may_be_straight(footprint) else None)
    if span is not None:
        return _dual_in_line(ref, span, sides, params)
    if sides.straight and (tips := said.get("lead_span")) is not None:
        over = float(tips.value)
        what = f"the leads of {ref} span {over:g} mm and stand on feet of at least {params.foot_least:g} mm"
        return _room(what, tips, over - 2 * params.foot_least, over - 2 * params.foot, f"{over:g} - 2 x {params.foot_least:g}")
    if sides.straight and (body := said.get("body_width")) is not None:
        wide = float(body.value)
        what = f"the body of {ref} is {wide:g} mm wide and its pads lie at most {params.beyond_body:g} mm further apart"
        usual = None if _stretched(body) else wide - params.within_body
        return _room(what, body, wide + params.beyond_body, usual, f"{wide:g} + {params.beyond_body:g}")
    return None


def _may_be_straight(footprint: str) -> bool:
    """Whether a footprint, if there is one, is for straight leads in two rows."""
    name = footprint.rpartition(":")[2].upper()
    return not name or (name.startswith(("DIP", "PDIP", "DIL")) and "SMD" not in name)


def outline(said: Fact) -> float:
    """The distance of the lead rows, mm, of an outline as `7.62 mm` or a footprint's number."""
    return float(str(said.value).removesuffix("mm"))


def _dual_in_line(ref: str, span: Fact, sides: _Sides, params: Params) -> Room | None:
    """Pads of a dual-in-line package; bent leads are judged only where the sides face one another."""
    name, rows = span.text.upper(), outline(span)
    bent = span.attribute == "pad_span" and "SMD" in name
    if bent and not sides.straight:
        return None
    least, usual = (params.lead_pad_least, params.lead_pad) if bent else (params.hole_pad_least, params.hole_pad)
    usual = params.long_pad if "LONGPADS" in name else usual
    centres = sides.nearest(rows)
    lie = "pad" if span.attribute == "pad_span" else "lead"
    which = f"the {lie} rows of {ref} are {rows:g} mm" if sides.straight else f"pads of both sides of {ref} are {centres:.3g} mm"
    pad = "a pad" if bent else "a hole with its ring"
    what = f"{which} apart, centre to centre, and {pad} takes {least:g} mm of that or more"
    return _room(what, span, centres - least, centres - usual, f"{centres:.4g} - {least:g}")


def _room(what: str, fact: Fact, most: float, usual: float | None, formula: str) -> Room:
    kept = round(most, 6)
    step = Step(f"{what}, which leaves {kept:.3g} mm at most", (fact,), formula, kept, "mm")
    return Room(kept, None if usual is None else round(usual, 6), step)


def _stretched(body: Fact) -> bool:
    """Whether the name may mean the width over the leads: `SO-6L`, `SSO-8`, `LSOP`, or wider than any body of the kind."""
    name = body.text.upper().rpartition(":")[2]
    return name.startswith(("SSO", "LSOP")) or "L_" in name or float(body.value) > 7.7


def _sides(candidate: Candidate, crossing: Crossing) -> _Sides | None:
    """None when the pins are not numbered, or nothing tells how many the package has."""
    pins = [[int(pin) for pin in side if pin.isdecimal() and pin.isascii()] for side in crossing.sides]
    if not all(pins) or any(len(found) != len(side) for found, side in zip(pins, crossing.sides, strict=True)):
        return None
    said, highest = candidate.attributes.get("package_pins"), max(pin for side in pins for pin in side)
    count = int(float(said.value)) if said is not None else highest
    if count % 2 or count < highest or min(pin for side in pins for pin in side) < 1:
        return None
    return _Sides(tuple(pins[0]), tuple(pins[1]), count)
