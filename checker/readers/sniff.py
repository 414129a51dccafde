"""What a file is, seen from its first 4 KiB. The suffix is never looked at: one suffix stands for many forms."""

from __future__ import annotations

import re

from checker.errors import InputError
from checker.files import Blob, decoded
from checker.neutral import neutral

HEAD = 4096  # bytes
WHITE = " \t\r\n\f\v"  # and nothing else: a no-break space is an ordinary character in netlists

_LEADING = re.compile(rb"(?:\xef\xbb\xbf)?[ \t\r\n\f\v]*+")
_BINARY = (b"PK\x03\x04", b"%PDF", b"\xd0\xcf\x11\xe0", b"\x1f\x8b")
_WORD = re.compile(r"\([ \t\r\n\f\v]*+([^ \t\r\n\f\v()\"]++)")
LEGACY_LIST = re.compile(  # its header, or a list that begins with a part of it
    r"#[ \t]*+\S++ Netlist Version|(?:#[^\n]*+\n[ \t\r\n]*+)*+\([ \t\r\n]*+(?:\{|\([ \t]++/[0-9A-Fa-f/]++(?:[ \t]++\S++){3})"
)
_PIN_OF = r"[A-Za-z+_#][^\s,;:=]*-[^\s,;:=]+"
NET_LINE = re.compile(  # a net, then pins such as R1-2; only a TAB ends a name with blanks
    rf"(?:[^\t,;]*[^\s,;:=]\t|[^\s,;]*[^\s,;:=] )[ \t]*+{_PIN_OF}(?:[ \t]++{_PIN_OF})*+[ \t]*\Z"
)
SPICE_START = re.compile(r"\*|\.title\b", re.IGNORECASE)
_STATEMENT = re.compile(  # to a simulator, at the beginning of a line
    r"\.(?:subckt|ends?|model|tran|ac|dc|op|include|lib|param|global|options?|ic|backanno)(?!\S)", re.IGNORECASE
)
_CARD = re.compile(r"[A-Za-z]\S*(?:[ \t]+[^\s,;:]+){3}|[*+.]")  # a part with two nodes and a value, or a line beside one
_TAG = re.compile(r"<([^\s<>/!?&\"'=]++)")
_TEST_RECORD = re.compile(r"^(?:3[0-9]7[^,;\t\n]{20}|P  +(?:JOB|CODE|UNITS|TITLE|NUM|REV|NNAME))", re.MULTILINE)
_JSON = re.compile(r"\{[ \t\r\n]*+[\"}]|\[[ \t\r\n]*+[\[{\]\"0-9-]")
_KEY_LINE = re.compile(r"[ \t]*(?:-(?:[ \t]|\Z)|#|---|[^\s,;:{}\[\]\"']++:(?:[ \t]|\Z))")
_CONTROL = re.compile(r"[\x00-\x08\x0e-\x1f\x7f]")
# the first words of a form, in the order they are asked for
_BEGINNINGS = (
    ("%PDF", "a PDF document"),
    ("%FS", "a Gerber file"),
    ("%MO", "a Gerber file"),
    ("%TF", "a Gerber file"),
    ("G04", "a Gerber file"),
    ("M48", "a drill file"),
    ("*", "a SPICE netlist"),
    (".title", "a SPICE netlist"),
)


def head(blob: Blob) -> str:
    """The first 4 KiB as text, decoded as `checker.files.decoded` does; byte-order mark and leading white space gone.

    Never raises: bytes that are no text come back one character a byte.
    """
    data = blob.data
    start = 0
    if not data.startswith(_BINARY):
        start = _LEADING.match(data).end()  # type: ignore[union-attr]  # matches the empty text too
        second = ""
        for cut in range(4):  # the last character of the window may be cut in two
            try:
                text, note = decoded(Blob(blob.path, data[start : start + HEAD - cut]))
            except InputError:
                continue
            if not note.startswith("not UTF-8"):
                return text.lstrip(WHITE + "\ufeff")
            second = second or text
            if len(data) <= start + HEAD:
                break
        if second:
            return second
    return data[start : start + HEAD].decode("latin-1")


def root(text: str) -> str:
    """The name of the first element of XML text, "" when there is none: declarations and comments are stepped over."""
    at = 0
    while text.startswith("<", at):
        found = _TAG.match(text, at)
        if found:
            return found[1]
        at = _after(text, at)
        while at < len(text) and text[at] in WHITE:
            at += 1
    return ""


def _after(text: str, at: int) -> int:
    """Where the declaration, comment or document type that begins at `at` ends."""
    for opening, closing in (("<!--", "-->"), ("<?", "?>")):
        if text.startswith(opening, at):
            end = text.find(closing, at + len(opening))
            return end + len(closing) if end >= 0 else len(text)
    end = text.find(">", at)
    subset = text.find("[", at)
    if 0 <= subset < end:
        close = text.find("]", subset)
        end = text.find(">", close) if close >= 0 else -1
    return end + 1 if end >= 0 else len(text)


def describe(head: str) -> str:
    """What content with this head looks like, named by its form, for the `found` of a message."""
    if not head:
        return "an empty file"
    if head.startswith("PK\x03\x04"):
        return "a spreadsheet workbook (zip)"
    if head.startswith("\xd0\xcf\x11\xe0"):
        return "a spreadsheet workbook of the old binary form"
    if _CONTROL.search(head):
        return "binary data"
    if LEGACY_LIST.match(head):
        return "a legacy parenthesised netlist"
    if head.startswith("("):
        return _parenthesised(head)
    if head.startswith("<"):
        return _marked_up(head)
    if head.startswith(("P  ", "C  ", "3")) and _TEST_RECORD.search(head):
        return "an IPC-D-356 netlist"
    if _JSON.match(head):
        return "a JSON file"
    for beginning, form in _BEGINNINGS:
        if head[: len(beginning)].casefold() == beginning.casefold():
            return form
    return "a SPICE netlist" if spice_lines(head) else _lines(head)


def spice_lines(head: str) -> bool:
    """Whether lines that look like parts stand beside a statement to a simulator; the first line is a title and may be anything."""
    lines = [line for line in head.replace("\r", "\n").split("\n")[1:] if line.strip(WHITE)]
    return any(map(_STATEMENT.match, lines)) and 10 * sum(map(bool, map(_CARD.match, lines))) >= 8 * len(lines)


def _parenthesised(head: str) -> str:
    found = _WORD.match(head)
    word = found[1] if found else ""
    if word == "export":
        return "an S-expression netlist"
    if word.casefold() == "edif":
        return "an EDIF 2 0 0 file"
    return f"an S-expression file of another kind (keyword {neutral(word, 40)})" if word else "text in parentheses"


def _marked_up(head: str) -> str:
    name = root(head)
    if name == "export":
        return "an XML netlist"
    if name == "IPC-2581":
        return "an IPC-2581 file"
    return f"an XML file of another kind (root element {neutral(name, 40)})" if name else "an XML file of unknown kind"


def _lines(head: str) -> str:
    """Tables and key-value text have no signature: what most of their lines look like decides."""
    lines = [line for line in head.splitlines() if line.strip()][:50]
    if 10 * sum(bool(_KEY_LINE.match(line)) for line in lines) >= 8 * len(lines):
        return "a YAML file"
    if 10 * sum(bool(NET_LINE.match(line)) for line in lines) >= 8 * len(lines):
        return "a netlist of lines"
    if any(2 * sum(mark in line for line in lines) > len(lines) for mark in "\t;,"):
        return "a delimited table"
    return "text of no known form"
