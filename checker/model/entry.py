"""Where the supply enters a board."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Entry:
    """A supply entry. poles: hazardous nets in pin order; line, neutral: where names tell them; earth: nets of earth contacts.

    lines: every pole named as a line, in pin order, of which `line` is the last; phases have several. also: further contacts of
    one pole each that belong to it, such as the second pin of a plug.
    """

    ref: str
    poles: tuple[str, ...]
    earth: tuple[str, ...]
    line: str | None
    neutral: str | None
    lines: tuple[str, ...] = ()
    also: tuple[str, ...] = ()
