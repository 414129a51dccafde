"""Voltages between nets, across parts and across barriers, as bounds with their derivation."""

from __future__ import annotations

from checker.model.rule import Board
from checker.model.stress import Stress
from checker.stress.entries import carried, entries


def stressed(board: Board) -> Stress:
    """Everything the stress stage finds."""
    mains = entries(board, "mains")
    return Stress(
        entries=mains,
        direct_entries=entries(board, "dc"),
        lines=carried(board, mains.values()),
    )
