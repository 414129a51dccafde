"""The XML netlist: `<export version="..."><components>...</components><nets>...</nets></export>`.

A document type is refused: with entities left unresolved it would turn into missing text instead of an error.
"""

from __future__ import annotations

import re
from io import BytesIO
from typing import Any

from lxml import etree

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.model.reading import Reader, Reading
from checker.readers import sniff
from checker.readers.netlist_form import Form, form
from checker.readers.netlist_tree import Netlist

FORM = "XML netlist"

SETTINGS = {
    "resolve_entities": False,
    "no_network": True,
    "load_dtd": False,
    "dtd_validation": False,
    "huge_tree": False,
    "remove_comments": True,
    "remove_pis": True,
}
# Encodings in which every byte means one thing and "<" is always the character; UTF-7, for one, can hide a tag.
_ENCODINGS = re.compile(r"utf-?8|utf-?16(?:[bl]e)?|(?:us-)?ascii|iso-?8859-?[0-9]{1,2}|latin-?[0-9]|(?:windows-|cp)125[0-9]", re.I)
_DECLARED = re.compile(r"<\?xml[^>]*?\bencoding[ \t\r\n]*+=[ \t\r\n]*+[\"']([^\"'<>]*+)")
ATTRIBUTES = 256  # of one element; real files have at most six, and lxml lists them in quadratic time
_LATE_DECLARATION = re.compile(rb"(?:\xef\xbb\xbf)?[ \t\r\n]++<\?xml")
_ITEM = 3  # <export> <components> <comp>


def claims(head: str) -> bool:
    """Whether the first element of the text is `export`."""
    return head.startswith("<") and sniff.root(head) == "export"


def read(blob: Blob) -> Reading:
    """The netlist. Raises InputError, with the line, for anything that is not a whole netlist."""
    head = sniff.head(blob)
    if not claims(head):
        what = "the file is not an XML netlist" if head else "the file is empty"
        raise InputError(blob.path, what, found=sniff.describe(head), expected="an XML file with the root element export")
    if _LATE_DECLARATION.match(blob.data):
        raise InputError(
            blob.path,
            "white space stands before the XML declaration",
            line=1,
            expected="<?xml as the very first characters",
            remedy="Delete the blank characters in front of it.",
        )
    declared = _DECLARED.match(head)
    if declared and not _ENCODINGS.fullmatch(declared[1]):
        what = "the encoding of the XML is not accepted"
        raise InputError(blob.path, what, line=1, found=declared[1], expected="UTF-8, UTF-16 or a Latin encoding")
    netlist = Netlist(blob.path)
    try:
        _walk(blob, netlist)
    except etree.XMLSyntaxError as error:
        raise InputError(
            blob.path,
            "the XML is damaged",
            line=error.lineno or 0,
            found=(error.msg or "").split(", line ")[0].strip(),
            remedy="The file may have been cut off or edited; export or copy it again.",
        ) from None
    return netlist.reading(blob, FORM)


def _walk(blob: Blob, netlist: Netlist) -> None:
    """Hand over every item when its element closes, and drop the elements before it."""
    depth, count = 0, 0
    section = ""
    for event, element in etree.iterparse(BytesIO(blob.data), events=("start", "end"), **SETTINGS):
        if event == "start":
            depth += 1
            attributes = len(element.attrib)
            count += 1 + attributes
            if depth > limits.DEPTH:
                raise _beyond(blob.path, "elements are nested too deep", element, limits.DEPTH)
            if count > limits.ATOMS:
                raise _beyond(blob.path, "the file holds too many elements and attributes", element, limits.ATOMS)
            if attributes > ATTRIBUTES:
                raise _beyond(blob.path, "an element has too many attributes", element, ATTRIBUTES)
            if depth == 1:
                _check_document(element, blob.path)
            elif depth == _ITEM - 1:
                section = str(element.tag)
                netlist.open(section)
            continue
        if depth == _ITEM:
            netlist.take(section, _form(element, blob.path))
            _forget(element)
        depth -= 1


def _check_document(element: etree._Element, path: str) -> None:
    document: Any = element.getroottree().docinfo  # Any here and below: the stubs do not know that both may be None
    if document.internalDTD is not None:
        found, expected = "<!DOCTYPE", "plain XML without one"
        raise InputError(path, "the file has a document type declaration", line=1, found=found, expected=expected)
    if element.tag != "export":
        raise InputError(path, "the root element is not export", line=_line(element), found=str(element.tag))


def _forget(element: etree._Element) -> None:
    """Free a finished item. The element itself must stay until its tail is read; those before it can go."""
    element.clear()
    section = element.getparent()
    while section is not None and section[0] is not element:
        del section[0]


def _form(element: etree._Element, path: str) -> Form:
    """The neutral form of an element: attributes become forms with one text, as the other writing has them."""
    line = _line(element)
    made = form(line, str(element.tag))
    for key, value in element.attrib.items():
        if len(value) > limits.TOKEN:
            raise _beyond(path, "a text is too long", element, limits.TOKEN)
        made.append(form(line, str(key), str(value)))
    texts = [element.text]
    for inner in element:
        made.append(_form(inner, path))
        texts.append(inner.tail)
    for text in texts:
        if text is not None and (stripped := text.strip(sniff.WHITE)):
            if len(stripped) > limits.TOKEN:
                raise _beyond(path, "a text is too long", element, limits.TOKEN)
            made.append(stripped)
    return made


def _beyond(path: str, what: str, element: etree._Element, limit: int) -> InputError:
    return InputError(path, what, line=_line(element), expected=f"at most {limit:,}")


def _line(element: etree._Element) -> int:
    """The line of an element's opening tag, 0 when unknown; beyond line 65,535 the library may be off by a line or more."""
    line: Any = element.sourceline
    return line or 0


READER = Reader(form=FORM, role="netlist", claims=claims, read=read)
