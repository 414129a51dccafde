"""A zip file from a stranger, and the XML in it: few members, none larger than it says, no entities, nothing outside it."""

from __future__ import annotations

import struct
import zipfile
import zlib
from collections.abc import Iterator
from io import BytesIO
from typing import Any

from lxml import etree

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.readers.xml_netlist import ATTRIBUTES, SETTINGS

SAVE = "Save the bill of materials anew, as XLSX, ODS or CSV."
_ENTRY = b"PK\x01\x02"  # begins each entry of the list of members
_BROKEN = (
    zipfile.BadZipFile,
    zlib.error,
    struct.error,
    NotImplementedError,
    RuntimeError,
    EOFError,
    OSError,
    ValueError,
    OverflowError,
)


class Archive:
    """The members of a zip file, read one at a time. Raises InputError for a file that is none, or that is not harmless."""

    def __init__(self, blob: Blob):
        self.path = blob.path
        if blob.data.count(_ENTRY) > 2 * limits.ZIP_MEMBERS:  # before each becomes an object; chance and zips inside leave room
            raise self._beyond("the workbook holds too many files", "", limits.ZIP_MEMBERS)
        try:
            self._zip = zipfile.ZipFile(BytesIO(blob.data))
            members = self._zip.infolist()
        except _BROKEN as error:
            raise self._broken(error) from None
        if len(members) > limits.ZIP_MEMBERS:
            raise self._beyond("the workbook holds too many files", f"{len(members):,}", limits.ZIP_MEMBERS)
        self._members: dict[str, zipfile.ZipInfo] = {}
        for member in members:
            self._accept(member)
        total = sum(member.file_size for member in members)
        if total > limits.ZIP_BYTES:
            raise self._beyond("the files of the workbook are too large together", f"{total:,} bytes", limits.ZIP_BYTES)

    def _accept(self, member: zipfile.ZipInfo) -> None:
        name = member.filename
        if name.startswith("/") or "\\" in name or ".." in name.split("/") or ":" in name:
            raise InputError(self.path, "a file in the workbook has a path that leads outside it", found=name, remedy=SAVE)
        if name in self._members:
            raise InputError(self.path, "the workbook holds a file twice", found=name, remedy=SAVE)
        if member.flag_bits & 1:
            raise InputError(self.path, "the workbook is locked with a password", remedy="Save it without a password.")
        if member.compress_type not in (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED):
            what = "a file in the workbook is packed in a way that workbooks are not"
            raise InputError(self.path, what, found=name, expected="deflate", remedy=SAVE)
        if member.file_size > limits.ZIP_MEMBER_BYTES:
            found = f"{member.file_size:,} bytes in {name}"
            raise self._beyond("a file in the workbook is too large", found, limits.ZIP_MEMBER_BYTES)
        if member.file_size > limits.ZIP_SMALL and member.file_size > limits.ZIP_RATIO * max(1, member.compress_size):
            found = f"{member.compress_size:,} bytes that unpack to {member.file_size:,} in {name}"
            most = f"at most {limits.ZIP_RATIO} times as many"
            raise InputError(self.path, "a file in the workbook unpacks to far more than it should", found=found, expected=most)
        self._members[name] = member

    def __contains__(self, name: str) -> bool:
        return name in self._members

    def data(self, name: str) -> bytes:
        """The bytes of a member. Raises InputError when it is absent or damaged, or longer than it says."""
        member = self._members.get(name)
        if member is None:
            raise InputError(self.path, "the workbook lacks one of its files", expected=name, remedy=SAVE)
        try:
            with self._zip.open(member) as stream:
                data = stream.read(member.file_size + 1)
        except _BROKEN as error:
            raise self._broken(error, name) from None
        if len(data) > member.file_size:
            raise InputError(self.path, "a file in the workbook is longer than it says", found=name, remedy=SAVE)
        return data

    def elements(self, name: str, *tags: str) -> Iterator[Any]:
        """Each outermost element of these local names, whole, in file order; it is cleared when the next is asked for.

        Its ancestors are there too, as far as they have been read. Raises InputError for XML that is not well formed, has a
        document type, or holds too many elements.
        """
        context = etree.iterparse(BytesIO(self.data(name)), events=("start", "end"), **SETTINGS)
        count, inside = 0, 0
        try:
            for event, element in context:
                wanted = local(element) in tags
                if event == "start":
                    count += 1
                    if count == 1 and element.getroottree().docinfo.doctype:
                        raise InputError(self.path, "a document type stands in the workbook", found=name, remedy=SAVE)
                    if count > limits.ATOMS:
                        raise self._beyond("the workbook holds too many elements", name, limits.ATOMS)
                    if len(element.attrib) > ATTRIBUTES:
                        raise self._beyond("an element of the workbook has too many attributes", name, ATTRIBUTES)
                    inside += wanted
                    continue
                if wanted:
                    inside -= 1
                    if not inside:
                        yield element
                if not inside:
                    _forget(element)
        except (etree.XMLSyntaxError, ValueError, LookupError) as error:
            said = str(error).split("\n")[0][:200]
            raise InputError(self.path, f"{name} of the workbook is no XML ({said})", remedy=SAVE) from None

    def _beyond(self, what: str, found: str, limit: int) -> InputError:
        return InputError(self.path, what, found=found, expected=f"at most {limit:,}")

    def _broken(self, error: Exception, name: str = "") -> InputError:
        what = f"the workbook is damaged ({str(error)[:120] or type(error).__name__})"
        return InputError(self.path, what, found=name, remedy="It may have been cut off: copy or save it again.")


def _forget(element: Any) -> None:
    """Free a finished element and those before it; itself it stays until its tail is read."""
    element.clear()
    parent = element.getparent()
    while parent is not None and parent[0] is not element:
        del parent[0]


def local(element: Any) -> str:
    """The name of an element without its namespace; the same parts are written in two namespaces."""
    return str(element.tag).rpartition("}")[2]


def attribute(element: Any, name: str, default: str = "") -> str:
    """An attribute by its local name."""
    value = element.get(name)
    return str(value) if value is not None else attributes(element).get(name, default)


def attributes(element: Any) -> dict[str, str]:
    """All attributes by their local names; the first counts where two namespaces have one of the same name."""
    return {key.rpartition("}")[2]: value for key, value in reversed(element.items())}
