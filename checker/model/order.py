"""The order people expect references and net names in: R2 before R10."""

from __future__ import annotations

import re
from functools import lru_cache

_DIGITS = re.compile(r"(\d{1,18})")


@lru_cache(maxsize=500_000)
def natural(text: str) -> tuple[tuple[int, int, str], ...]:
    """A sort key that compares runs of digits as numbers."""
    return tuple(
        (1, int(piece), piece) if piece.isdecimal() and piece.isascii() else (0, 0, piece) for piece in _DIGITS.split(text) if piece
    )
