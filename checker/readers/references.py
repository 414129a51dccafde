"""Reference lists and ranges as people write them in a BOM cell."""

from __future__ import annotations

import re

from checker import limits

_DASH = r"[-‐‑–—−~～]|\.{2,3}|…"
# `C1 - C4` and `R1 to R4`: blanks around the sign; the second side of a bare dash needs its letters, `R1 - 10` is no range
_SPACED_DASH = re.compile(rf"(?<=\d)[ \t]{{1,4}}(?:{_DASH})[ \t]{{0,4}}(?=[A-Za-z_]{{1,16}}\d{{1,9}}(?![^\s,;]))")
_SPACED_WORD = re.compile(r"(?<=\d)[ \t]{1,4}(?:to|thru|through|bis)[ \t]{1,4}(?=[A-Za-z_]{0,16}\d{1,9}(?![^\s,;]))", re.IGNORECASE)
_RANGE = re.compile(rf"([A-Za-z_]{{1,16}})([0-9]{{1,9}})(?:{_DASH})([A-Za-z_]{{0,16}})([0-9]{{1,9}})\Z")
_SEPARATORS = re.compile(r"[\s,;，；、&|]+")
_REFERENCE = re.compile(r"[^\W\d][\w.$+\-/#]*\Z")  # starts with a letter or underscore
_NUMBERED = re.compile(r"[^\W\d][A-Za-z_+\-.$]{0,16}[0-9]{1,6}(?:[-._]?[A-Za-z0-9]{1,3})?\Z")
_PLAIN = re.compile(r"[A-Za-z]{1,8}[0-9]{1,9}\Z")
_DIGIT = re.compile(r"\d")
_PLACEHOLDER = re.compile(r"[A-Za-z_]{1,8}[?*]+\Z")


def expand(text: str) -> tuple[tuple[str, ...], str]:
    """The references a cell lists, each once and in order, and the words that are none, joined with blanks.

    `C1-C4`, `C1..C4`, `C1 to C4` and `R1-4` stand for every number between; leading zeros are kept. A token stays whole
    unless both sides of the dash are letters and digits with equal letters, or the second side is digits only and the
    letters are at most three: `USB-UART1`, `Digital_0-7`, `U1-B` and part numbers are no ranges. Words without
    a digit count as references only when no word of the cell has one, so that notes behind a list stay unread.
    Raises ValueError beyond limits.REFERENCES_PER_ROW.
    """
    if _PLAIN.match(text):  # most cells of a long table
        return (text,), ""
    tokens = [token for token in _SEPARATORS.split(_SPACED_WORD.sub("-", _SPACED_DASH.sub("-", text))) if token]
    numbered = any(_DIGIT.search(token) and _REFERENCE.match(token) for token in tokens)
    refs: dict[str, None] = {}
    unread = []
    for token in tokens:
        members = _members(token)
        if members is None or (numbered and not _DIGIT.search(token)):
            unread.append(token)
            continue
        refs.update(dict.fromkeys(members))
        if len(refs) > limits.REFERENCES_PER_ROW:
            raise ValueError(f"more than {limits.REFERENCES_PER_ROW:,} references in one cell")
    return tuple(refs), " ".join(unread)


def look_like_references(text: str) -> bool:
    """Whether the first word of a cell has the usual shape of a reference, a range or a placeholder such as `R?`."""
    words = _SEPARATORS.split(text[: limits.CELL].strip(), maxsplit=1)
    return bool(_NUMBERED.match(words[0]) or _RANGE.match(words[0]) or _PLACEHOLDER.match(words[0]))


def _members(token: str) -> tuple[str, ...] | None:
    """What one token stands for; None when it is no reference."""
    match = _RANGE.match(token)
    if match is None:
        return (token,) if _REFERENCE.match(token) else None
    letters, first, second, last = match.groups()
    low, high = int(first), int(last)
    if second == letters:
        if high < low or high - low > limits.RANGE:
            return None  # backwards or far too long: a slip, not a name
    elif second or len(letters) > 3 or not low < high <= low + limits.RANGE:
        return (token,)  # a name of its own, such as `J1-1` or `A1-B2`
    width = len(first) if first.startswith("0") else 0
    return tuple(f"{letters}{number:0{width}d}" for number in range(low, high + 1))
