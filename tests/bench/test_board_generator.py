"""The boards of the bench are what they say they are; nothing here is timed."""

from __future__ import annotations

import csv
import re
from pathlib import Path

import board_generator
import pytest
from lxml import etree

import checker


@pytest.mark.parametrize("parts", [board_generator.SMALLEST_BOARD, 50, 137, 1000])
def test_both_forms_and_the_bill_hold_the_same_parts(tmp_path: Path, parts: int) -> None:
    """Counted without the project's readers: by pattern, by an XML library and by the csv module."""
    board = board_generator.write(parts, tmp_path)
    drawn = re.findall(r'^ *\(comp \(ref "([A-Z]+[0-9]+)"\)$', board.netlist.read_text(), re.MULTILINE)
    nets = re.findall(r'^ *\(net \(code "[0-9]+"\) \(name "([^"]+)"\)$', board.netlist.read_text(), re.MULTILINE)
    tree = etree.parse(board.xml)
    assert [comp.get("ref") for comp in tree.findall("components/comp")] == drawn
    assert [net.get("name") for net in tree.findall("nets/net")] == nets
    with board.bom.open(newline="") as stream:
        bought = [ref for row in csv.DictReader(stream) for ref in row["Reference"].split(", ")]
    assert sorted(bought) == sorted(drawn)
    assert board.parts == parts == len(set(drawn)) == len(drawn)
    assert board.nets == len(set(nets)) == len(nets)
    assert board.bridging == 3 * board.barriers
    connected = tree.findall("nets/net/node")
    assert len({(node.get("ref"), node.get("pin")) for node in connected}) == len(connected)
    assert {node.get("ref") for node in connected} == set(drawn)


def test_the_share_of_logic(tmp_path: Path) -> None:
    board = board_generator.write(1000, tmp_path)
    logic = len(re.findall(r'"Sheetname"', board.netlist.read_text())) - 1 - board.supplies * board_generator.FULL
    assert 0.2 <= logic / board.parts <= 0.25


def test_the_seed_decides(tmp_path: Path) -> None:
    one, same, other = (board_generator.write(200, tmp_path / name, seed) for name, seed in (("a", 1), ("b", 1), ("c", 2)))
    for form in ("netlist", "xml", "bom"):
        assert getattr(one, form).read_bytes() == getattr(same, form).read_bytes() != getattr(other, form).read_bytes()


def test_a_board_too_small_for_a_supply_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="at least"):
        board_generator.write(board_generator.SMALLEST_BOARD - 1, tmp_path)


@pytest.mark.parametrize("parts", [50, 700])
def test_every_barrier_is_found_and_nothing_fails(tmp_path: Path, parts: int) -> None:
    """A sound board: one barrier a supply, a transformer, a coupler and a Y capacitor across each, whichever form is read."""
    board = board_generator.write(parts, tmp_path)
    for netlist in (board.netlist, board.xml):
        report = checker.verify(netlist, bom=[board.bom])
        assert len(report.barriers) == board.barriers
        assert sum(len(barrier.bridged_by) for barrier in report.barriers) == board.bridging
        assert {"".join(filter(str.isalpha, ref)) for barrier in report.barriers for ref in barrier.bridged_by} == {"C", "T", "U"}
        assert [verdict.what for verdict in report.verdicts if verdict.outcome == "fail"] == []
