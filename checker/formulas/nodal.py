"""Networks of admittances reduced to the nodes that matter.

Capacitances may stand for admittances: the factor j omega is common to all of them, so a network of capacitors alone divides
alike at every frequency.
"""

from __future__ import annotations

from collections.abc import Collection, Hashable, Iterable
from typing import TypeVar

Node = TypeVar("Node", bound=Hashable)


def star_mesh(branches: Iterable[tuple[Node, Node, float]], kept: Collection[Node]) -> dict[Node, dict[Node, float]]:
    """The admittance between every two kept nodes when no current enters at the others.

    Each node that is not kept is taken out by the star-mesh transform (Kron reduction of the nodal equations):

        Y_ij := Y_ij + Y_im Y_jm / (sum of Y_km over all k)

    branches: (node, node, admittance), in any one unit, which is that of the result; several between two nodes add up.

    >>> star_mesh([("L", "middle", 2.0), ("middle", "out", 2.0)], ("L", "out"))["L"]
    {'out': 1.0}
    """
    mesh: dict[Node, dict[Node, float]] = {}
    for one, other, admittance in branches:
        if one != other:
            _add(mesh, one, other, admittance)
    wanted = set(kept)
    for node in sorted((node for node in mesh if node not in wanted), key=lambda node: len(mesh[node])):
        _take_out(mesh, node)
    return mesh


def _add(mesh: dict[Node, dict[Node, float]], one: Node, other: Node, admittance: float) -> None:
    for here, there in ((one, other), (other, one)):
        row = mesh.setdefault(here, {})
        row[there] = row.get(there, 0.0) + admittance


def _take_out(mesh: dict[Node, dict[Node, float]], node: Node) -> None:
    star = list(mesh.pop(node).items())
    total = sum(admittance for _, admittance in star)
    for at, (one, first) in enumerate(star):
        del mesh[one][node]
        for other, second in star[:at]:
            if total:
                _add(mesh, one, other, first * second / total)
