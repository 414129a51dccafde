"""Node 0 of a SPICE netlist on both sides of coupled coils: it is one net there, and may be two grounds of a board."""

from __future__ import annotations

from collections.abc import Iterator

from checker.readers.spice_cores import root
from checker.readers.spice_flat import GROUND, Flat

_APART = frozenset("XCK")  # sub-circuits may insulate, capacitors conduct no direct current, coupled coils are what is asked about


def joined_by_ground(flat: Flat) -> Iterator[str]:
    """Transformers of which two windings would be apart, were it not for node 0.

    Without node 0 every other net is joined to those it is one circuit with; a winding stands on node 0 when one of its ends does
    or when the circuit of an end has a part that does.
    """
    parent: dict[str, str] = {}
    grounded = set()
    for part in flat.parts:
        nets = [net for _, _, net in part.pins]
        others = [net for net in nets if net != GROUND]
        if part.letter in _APART or not others:
            continue
        for net in others[1:]:
            parent[root(parent, net)] = root(parent, others[0])
        if len(others) < len(nets):
            grounded.add(others[0])
    on = {root(parent, net) for net in grounded}
    for part in flat.parts:
        if part.letter == "K":
            nets = [net for _, _, net in part.pins]
            standing = set()
            for ends in zip(nets[::2], nets[1::2], strict=True):
                circuits = {root(parent, net) for net in ends if net != GROUND}
                if GROUND in ends or circuits & on:
                    standing.add(frozenset(circuits))
            if len(standing) > 1 and not frozenset.intersection(*standing):
                yield part.ref
