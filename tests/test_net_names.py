"""Names of nets are evidence and no more: without them a board is judged with more questions, never with other answers."""

from __future__ import annotations

from dataclasses import replace

import pytest

from checker.model.reading import Reading
from tests.test_carriers import BOARDS, board, folder_of, judged, reading, report

UNDECLARED = [name for name in BOARDS if not (folder_of(name) / "declaration.yaml").is_file()]


def nameless(netlist: Reading) -> Reading:
    """The netlist with names for its nets such as programs give."""
    nets = tuple(replace(net, name=f"Net-(X{at}-Pad1)", label=f"Net-(X{at}-Pad1)") for at, net in enumerate(netlist.nets))
    return replace(netlist, nets=nets)


@pytest.mark.parametrize("name", UNDECLARED)
def test_without_names_of_nets_nothing_new_passes_or_fails(name: str) -> None:
    named = {(verdict.rule, frozenset(verdict.parts), verdict.outcome) for verdict in report(name, "sexpr").verdicts}
    found = judged(name, nameless(reading("sexpr", board(name)))).verdicts
    new = [v for v in found if v.outcome in ("pass", "fail") and (v.rule, frozenset(v.parts), v.outcome) not in named]
    assert [(v.rule, v.parts, v.because) for v in new] == []
