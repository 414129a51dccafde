"""The windings of a transformer, as a BOM column or a description states them."""

from __future__ import annotations

import re

from checker import limits
from checker.model.candidate import Winding

MOST = 64
"""Windings of one part that are read; a longer list is not a list of windings."""

_PIN = r"[A-Za-z]{0,3}\d{1,3}[A-Za-z]?"
_PINS = re.compile(rf"{_PIN}(?:-{_PIN}){{1,7}}")
_TURNS = re.compile(r"\d{1,5}(?:[.,]\d{1,3})?")
# `1-3:128, 4-5:16` inside other words; a range of values such as 10-20 has no colon and turns
_COUNT = r"\d{1,5}(?:\.\d{1,3})?T?"
_IN_WORDS = re.compile(rf"(?<![\w.-]){_PIN}(?:-{_PIN}){{1,7}} ?: ?{_COUNT}(?:[+:]{_COUNT}){{0,6}}(?![\w.])")
_RATIO = re.compile(r"turns\s*:?\s*(\d{1,5}(?:\.\d{1,3})?(?:\s*:\s*\d{1,5}(?:\.\d{1,3})?){1,15})", re.IGNORECASE)
_WOUND = re.compile(
    rf"(?<!\w)(?:windings?|coils?|wicklung(?:en)?|enroulements?)\s?:?\s({_PIN}(?:-{_PIN}){{1,7}}(?:\s?[,;/]\s?{_PIN}(?:-{_PIN}){{1,7}}){{1,15}})(?![\w:-])",
    re.IGNORECASE,
)
_NAMED = re.compile(rf"(?<![\w-])([A-Za-z][A-Za-z ]{{0,30}}?)\s?({_PIN}(?:-{_PIN}){{1,7}})(?![\w-])")


def read(text_turns: str, text_windings: str, description: str) -> tuple[Winding, ...]:
    """The windings of a part, the best statement first: turns (`1-2:128, 3-4:16`), windings (`1-2, 3-4`), description.

    Taps are further pins with one number per section (`7-8-10: 6+6` or `7-8-10:6:6`). A column that cannot be read says
    nothing and the next is tried; () when none says anything. Pins are text, turns plain numbers.
    """
    return _listed(text_turns) or _listed(text_windings) or _described(description)


def _listed(text: str) -> tuple[Winding, ...]:
    """A comma-separated list of windings; () unless all of it is one."""
    pieces = [piece.strip() for piece in re.split(r"[,;]", text[: limits.CELL])]
    if len(pieces) > MOST or not any(pieces):
        return ()
    found = [_winding(piece) for piece in pieces if piece]
    whole = _tapped([winding for winding in found if winding is not None])
    return tuple(whole) if all(winding is not None for winding in found) and _apart(whole) else ()


def _winding(piece: str) -> Winding | None:
    pins_text, colon, turns_text = piece.partition(":")
    pins = _pins(pins_text.strip())
    if pins is None:
        return None
    if not colon:
        return Winding(pins)
    turns = tuple(_number(count.strip().removesuffix("T").removesuffix("t")) for count in re.split(r"[+:]", turns_text))
    numbers = tuple(count for count in turns if count)
    return Winding(pins, numbers) if len(numbers) == len(turns) == len(pins) - 1 else None


def _pins(text: str) -> tuple[str, ...] | None:
    pins = tuple(text.split("-"))
    return pins if _PINS.fullmatch(text) and len(set(pins)) == len(pins) else None


def _number(text: str) -> float:
    """The number of turns; 0 when it is none."""
    return float(text.replace(",", ".")) if _TURNS.fullmatch(text) else 0.0


def _apart(windings: list[Winding]) -> bool:
    """Whether no pin belongs to two windings; such a list is a mistake and joins what is apart."""
    pins = [pin for winding in windings for pin in winding.pins]
    return len(set(pins)) == len(pins)


def _tapped(windings: list[Winding]) -> list[Winding]:
    """Windings with the two halves of a tapped one joined: `7-8:7, 8-9:7` has its tap at 8. Both halves state their turns."""
    found: list[Winding] = []
    for winding in windings:
        before = found[-1] if found else None
        if before is not None and before.turns and winding.turns and before.pins[-1] == winding.pins[0]:
            found[-1] = Winding((*before.pins, *winding.pins[1:]), before.turns + winding.turns)
        else:
            found.append(winding)
    return found


def _described(description: str) -> tuple[Winding, ...]:
    text = description[: limits.CELL]
    spelled = [_winding(re.sub(r"\s", "", match[0])) for match in _IN_WORDS.finditer(text)]
    whole = _tapped([winding for winding in spelled if winding is not None])
    if whole:
        return tuple(whole) if all(winding is not None for winding in spelled) and len(whole) <= MOST and _apart(whole) else ()
    listed = _WOUND.search(text)
    if listed is not None:
        return _listed(re.sub(r"[;/]", ",", listed[1]))
    ratio = _RATIO.search(text)
    if ratio is None:
        return ()
    turns = [_number(count.strip()) for count in ratio[1].split(":")]
    named = [(match[1].strip(), _pins(match[2])) for match in _NAMED.finditer(text, ratio.end())]
    if len(named) != len(turns) or not all(turns):
        return ()
    found = [Winding(pins, (count,), name) for (name, pins), count in zip(named, turns, strict=True) if pins and len(pins) == 2]
    return tuple(found) if len(found) == len(turns) and _apart(found) else ()


_RATED = re.compile(r"(?<![\w.,])(?:\d ?[xX*\u00d7] ?)?(?<![\d.,])(\d{1,3}(?:[.,]\d)?) ?V(?:AC|~| ?rms)?(?!\w)", re.IGNORECASE)
_PRIMARY = ((100.0, 127.0), (200.0, 240.0), (380.0, 415.0))  # rated mains voltages of the world
_SECONDARY = 60.0  # V; above it a figure may be either side's


def rated_voltages(text: str) -> tuple[float, float] | None:
    """(primary, highest secondary) rated voltage of one winding each, V r.m.s., of a mains transformer: `2x115V/2x15V 12VA`,
    `230V 9V 3VA`. None unless there is one figure of a mains voltage and at least one of a low one, and no other."""
    figures = {float(found[1].replace(",", ".")) for found in _RATED.finditer(text[: limits.CELL])}
    primary = {volts for volts in figures if any(low <= volts <= high for low, high in _PRIMARY)}
    secondary = {volts for volts in figures if 0 < volts <= _SECONDARY}
    if len(primary) != 1 or not secondary or primary | secondary != figures:
        return None
    return primary.pop(), max(secondary)
