"""Reference lists and ranges as people write them in a BOM cell, and the words they write beside them."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from checker import limits

_DASH = r"[-‐‑–—−~～]|\.{2,3}|…"
# `C1 - C4` and `R1 to R4`: blanks around the sign; the second side of a bare dash needs its letters, `R1 - 10` is no range
_SPACED_DASH = re.compile(rf"(?<=\d)[ \t]{{1,4}}(?:{_DASH})[ \t]{{0,4}}(?=[A-Za-z_]{{1,16}}\d{{1,9}}(?![^\s,;()\[\]]))")
_TIGHT_DASH = re.compile(rf"(?<=\d)(?:{_DASH})[ \t]{{1,4}}(?=[A-Za-z_]{{1,16}}\d{{1,9}}(?![^\s,;()\[\]]))")
_SPACED_WORD = re.compile(
    r"(?<=\d)[ \t]{1,4}(?:to|thru|through|bis|à)[ \t]{1,4}(?=[A-Za-z_]{0,16}\d{1,9}(?![^\s,;()\[\]]))", re.IGNORECASE
)
_RANGE = re.compile(rf"([A-Za-z_]{{1,16}})([0-9]{{1,9}})(?:{_DASH})([A-Za-z_]{{0,16}})([0-9]{{1,9}})\Z")
# `R 1, R 2`: anywhere in cells where no number touches its letters, else only between separators
_SPACED_NUMBER = re.compile(rf"(?<![^\s,;])([A-Z][A-Za-z]{{0,2}})[ \t\xa0]{{1,4}}(?=[0-9]{{1,4}}(?:{_DASH}|(?![^\s,;])))")
_SPACED_ALONE = re.compile(r"((?:\A|[,;\n])\s*[A-Z][A-Za-z]{0,2})[ \t\xa0]{1,4}(?=[0-9]{1,4}\s*(?:[,;\n]|\Z))")
_TOUCHING = re.compile(r"[A-Za-z_][0-9]")
_INVISIBLE = dict.fromkeys((0xAD, 0x200B, 0x200C, 0x200D, 0x2060, 0xFEFF))
_SEPARATOR = r"\s,;，；、&|"
_TOKEN = re.compile(rf"(?P<aside>\((?:[^()]|\([^()]*+\))*+\)|\[[^\[\]]*+\])|[^{_SEPARATOR}()\[\]]++|[()\[\]]")
_REFERENCE = re.compile(r"[^\W\d][\w.$+\-/#]*\Z")  # starts with a letter or underscore
_NUMBERED = re.compile(r"[^\W\d][A-Za-z_+\-.$]{0,16}[0-9]{1,6}(?:[-._]?[A-Za-z0-9]{1,3})?[*.:]?\Z")
_PLAIN = re.compile(r"[A-Za-z]{1,8}[0-9]{1,9}\Z")
_PLAIN_LIST = re.compile(r"[A-Za-z]{1,8}[0-9]{1,9}(?:[,; ]{1,3}[A-Za-z]{1,8}[0-9]{1,9})*+\Z")
_BETWEEN = re.compile(r"[,; ]+")
_SLASHED = re.compile(r"[A-Za-z]{1,8}[0-9]{1,9}(?:/[A-Za-z]{1,8}[0-9]{1,9})+\Z")
_FOOTNOTE = re.compile(r"(?<=[0-9])(?:\*{1,3}|[.:])\Z")
_DIGIT = re.compile(r"\d")
_PLACEHOLDER = re.compile(r"[A-Za-z_]{1,8}[?*]+\Z")
_JOINING = frozenset({"and", "und", "et", "sowie", "plus"})
# a word that begins a remark behind a list, wherever it stands
_BEGINS_REMARK = re.compile(
    r"(?:[-–—:]+[ \t]*)?(?:optional|option|opt|only|see|notes?|if|when|for|except|instead|alternative|alternatively|or|not|do"
    r"|dnp|dni|on|with|without|nur|siehe|wenn|falls|für|fuer|bei|außer|ausser|oder|statt|nicht|unbestückt|seulement|voir|pour|sauf)"
    r"(?![^\s.,;:!])",
    re.IGNORECASE,
)
_SMALL_WORD = re.compile(r"(?:[-–—:]+[ \t]*)?[a-zäöüßàâéèêîôç]{2,}(?![^\s.,;:!])")


@dataclass(frozen=True, slots=True)
class Remark:
    """Words beside references, such as `(optional)`. refs: those of the entry right before it."""

    text: str
    refs: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Listed:
    """What a cell lists. refs: each once and in order; unread: the words that are no references, joined with blanks;
    remarks: words that only comment on them; repeated: references that stand there more than once."""

    refs: tuple[str, ...]
    unread: str = ""
    remarks: tuple[Remark, ...] = ()
    repeated: tuple[str, ...] = ()


def listed(text: str) -> Listed:
    """The references of a cell.

    `C1-C4`, `C1..C4`, `C1 to C4` and `R1-4` stand for every number between; leading zeros are kept. A token stays whole
    unless both sides of the dash are letters and digits with equal letters, or the second side is digits only and the
    letters are at most three: `USB-UART1`, `Digital_0-7`, `U1-B` and part numbers are no ranges. Words without
    a digit count as references only when no word of the cell has one. What stands in brackets behind a reference, and
    everything behind a word such as `only`, is a remark: `R1, R2 only with R3` lists two references.
    Raises ValueError beyond limits.REFERENCES_PER_ROW.
    """
    if _PLAIN.match(text):  # most cells of a long table
        return Listed((text,))
    if _PLAIN_LIST.match(text):
        plain = Counter(_BETWEEN.split(text))
        if len(plain) <= limits.REFERENCES_PER_ROW:
            return Listed(tuple(plain), repeated=tuple(ref for ref, count in plain.items() if count > 1))
    refs: dict[str, int] = {}
    unread: list[str] = []
    remarks: list[Remark] = []
    last: tuple[str, ...] = ()
    text = _tidied(text)
    numbered = _numbered(text)
    for word, is_remark in _words(text, numbered):
        members = None if is_remark else _members(_bare(word))
        if is_remark and last:
            remarks.append(Remark(word, last))
        elif members is None or (numbered and not _DIGIT.search(word)):
            if word.casefold() not in _JOINING or not last:
                unread.append(word)
        else:
            for ref in members:
                refs[ref] = refs.get(ref, 0) + 1
            last = members
            if len(refs) > limits.REFERENCES_PER_ROW:
                raise ValueError(f"more than {limits.REFERENCES_PER_ROW:,} references in one cell")
    return Listed(tuple(refs), " ".join(unread), tuple(remarks), tuple(ref for ref, count in refs.items() if count > 1))


def look_like_references(text: str) -> bool:
    """Whether the first word of a cell has the usual shape of a reference, a range or a placeholder such as `R?`."""
    text = text[: limits.CELL].strip()
    found = _TOKEN.match(text)
    if found is None:
        return False
    word = found[0]
    return any(shape.match(word) for shape in (_NUMBERED, _RANGE, _PLACEHOLDER, _SLASHED)) or bool(_SPACED_NUMBER.match(text))


def _tidied(text: str) -> str:
    """The cell without invisible characters, ranges and `R 1` drawn together."""
    if not text.isascii():
        text = text.translate(_INVISIBLE)
    whole = _TOKEN.match(text.strip())
    if whole is not None and whole["aside"] and whole.end() == len(text.strip()):
        text = text.strip()[1:-1]
    text = (_SPACED_ALONE if _TOUCHING.search(text) else _SPACED_NUMBER).sub(r"\1", text)
    return _SPACED_WORD.sub("-", _TIGHT_DASH.sub("-", _SPACED_DASH.sub("-", text)))


def _numbered(text: str) -> bool:
    return any(_DIGIT.search(word[0]) and _REFERENCE.match(_bare(word[0])) for word in _TOKEN.finditer(text))


def _words(text: str, numbered: bool) -> Iterator[tuple[str, bool]]:
    """Each word of a cell, and whether it is a remark; the remark that ends a list comes as one."""
    before = 0
    read = False
    for found in _TOKEN.finditer(text):
        word = found[0]
        if found["aside"]:
            inside = word[1:-1].strip()
            # brackets around references alone do not tell what is meant, nor do empty ones
            yield word, numbered and read and not all(_DIGIT.search(one) for one in inside.split())
        elif numbered and read and _begins_remark(text, found.start(), text[before : found.start()]):
            yield text[found.start() :].strip(), True
            return
        else:
            read = read or _DIGIT.search(word) is not None
            yield from ((one, False) for one in (word.split("/") if _SLASHED.match(word) else (word,)))
        before = found.end()


def _begins_remark(text: str, at: int, gap: str) -> bool:
    if _BEGINS_REMARK.match(text, at):
        return True
    word = _SMALL_WORD.match(text, at)
    return word is not None and gap.isspace() and word[0] not in _JOINING


def _bare(word: str) -> str:
    """A word without the star or full stop behind it."""
    return _FOOTNOTE.sub("", word)


def _members(token: str) -> tuple[str, ...] | None:
    """What one token stands for; None when it is no reference."""
    match = _RANGE.match(token)
    if match is None:
        return (token,) if _REFERENCE.match(token) else None
    letters, first, second, last = match.groups()
    low, high = int(first), int(last)
    if second.casefold() == letters.casefold():
        if high < low or high - low > limits.RANGE:
            return None  # backwards or far too long: a slip, not a name
    elif second or len(letters) > 3 or not low < high <= low + limits.RANGE:
        return (token,)  # a name of its own, such as `J1-1` or `A1-B2`
    width = len(first) if first.startswith("0") else 0
    return tuple(f"{letters}{number:0{width}d}" for number in range(low, high + 1))
