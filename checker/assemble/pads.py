"""The pads of a layout carrier, put on the parts and nets of the design."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from checker.model.circuit import Net, Pad
from checker.model.reading import PadRecord


def placed(records: Sequence[PadRecord], nets: Mapping[str, Net], joined: Mapping[str, str]) -> tuple[Pad, ...]:
    """Every pad with the net as the design calls it, None for copper on no net. joined: names given up -> the name kept."""
    found = []
    for pad in records:
        net = joined.get(pad.label, pad.label)
        found.append(
            Pad(
                pad.ref,
                pad.pin,
                net if net in nets else None,
                pad.x,
                pad.y,
                pad.width,
                pad.height,
                pad.turned,
                pad.drill,
                pad.side,
                pad.source,
            )
        )
    return tuple(found)
