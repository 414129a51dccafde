"""Names from a stranger's file, made harmless before anybody prints them.

Control characters, bidirectional marks and line separators are shown escaped, so that nothing from a file can
move a cursor, colour a terminal, start a line or reorder the text around it.
"""

from __future__ import annotations

import re
import unicodedata

# Cc control, Cf format (bidirectional marks, zero-width), Zl / Zp separators, Cs lone surrogates
_PLAIN = re.compile(r"[ -~]*\Z")
_UNSAFE = frozenset({"Cc", "Cf", "Zl", "Zp", "Cs", "Co", "Cn"})
_COMMAND = re.compile(r"##(?=[A-Za-z]{0,32}\[)")
# What makes a spreadsheet program read a cell as a formula, the wide forms included. After a semicolon as well, since programs
# of many countries take that for the end of a cell.
_FORMULA = re.compile("(^|;)([\\s'\"]*)(?=[-=+@\uff0d\uff1d\uff0b\uff20])")


def neutral(text: str, limit: int = 1024) -> str:
    """`text` on one line with unsafe characters as `\\xNN` / `\\uNNNN`, cut to `limit` characters with an ellipsis."""
    if len(text) > limit:
        text = text[: limit - 1] + "\u2026"
    if _PLAIN.match(text):
        return text
    return "".join(_escaped(character) for character in text)


def _escaped(character: str) -> str:
    if unicodedata.category(character) not in _UNSAFE:
        return character
    code = ord(character)
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}"


def harmless(line: str) -> str:
    """A line that no program which reads a log takes for a command: those begin with `::`, even after spaces, or hold `##[` or
    `##name[` anywhere."""
    bare = line.lstrip()
    if bare.startswith("::"):
        line = line[: len(line) - len(bare)] + "\\x3a" + bare[1:]
    return _COMMAND.sub(r"#\\x23", line)


def cell(text: str) -> str:
    """`text` as a spreadsheet cell that stays text: neutral, no command of a log, the start of a formula behind an apostrophe."""
    return _FORMULA.sub(r"\1\2'", harmless(neutral(text, limit=2000)))
