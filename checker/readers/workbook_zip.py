"""A zip file from a stranger, and the XML in it: few members, none larger than it says, no entities, nothing outside it."""

from __future__ import annotations

import zipfile
import zlib
from collections.abc import Iterator
from io import BytesIO
from typing import Any

from lxml import etree

from checker import limits
from checker.errors import InputError
from checker.files import Blob

_SETTINGS: dict[str, Any] = {
    "resolve_entities": False,
    "no_network": True,
    "load_dtd": False,
    "dtd_validation": False,
    "huge_tree": False,
    "remove_comments": True,
    "remove_pis": True,
}
_SAVE = "Save the bill of materials anew, as XLSX, ODS or CSV."


class Archive:
    """The members of a zip file, read one at a time. Raises InputError for a file that is none, or that is not harmless."""

    def __init__(self, blob: Blob):
        self.path = blob.path
        try:
            self._zip = zipfile.ZipFile(BytesIO(blob.data))
            members = self._zip.infolist()
        except (zipfile.BadZipFile, NotImplementedError, ValueError, OverflowError, EOFError) as error:
            raise self._broken(error) from None
        if len(members) > limits.ZIP_MEMBERS:
            found, most = f"{len(members):,}", f"at most {limits.ZIP_MEMBERS:,}"
            raise InputError(self.path, "the workbook holds too many files", found=found, expected=most)
        self._members: dict[str, zipfile.ZipInfo] = {}
        for member in members:
            self._accept(member)

    def _accept(self, member: zipfile.ZipInfo) -> None:
        name = member.filename
        if name.startswith("/") or "\\" in name or ".." in name.split("/") or ":" in name:
            raise InputError(self.path, "a file in the workbook has a path that leads outside it", found=name, remedy=_SAVE)
        if name in self._members:
            raise InputError(self.path, "the workbook holds a file twice", found=name, remedy=_SAVE)
        if member.flag_bits & 1:
            raise InputError(self.path, "the workbook is locked with a password", remedy="Save it without a password.")
        if member.file_size > limits.ZIP_MEMBER_BYTES:
            found, most = f"{member.file_size:,} bytes in {name}", f"at most {limits.ZIP_MEMBER_BYTES:,} bytes"
            raise InputError(self.path, "a file in the workbook is too large", found=found, expected=most)
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
            raise InputError(self.path, "the workbook lacks one of its files", expected=name, remedy=_SAVE)
        try:
            with self._zip.open(member) as stream:
                data = stream.read(member.file_size + 1)
        except (zipfile.BadZipFile, zlib.error, NotImplementedError, RuntimeError, EOFError, OSError, ValueError) as error:
            raise self._broken(error, name) from None
        if len(data) > member.file_size:
            raise InputError(self.path, "a file in the workbook is longer than it says", found=name, remedy=_SAVE)
        return data

    def elements(self, name: str, *tags: str) -> Iterator[Any]:
        """Each element of these local names, whole, in file order; what was given is cleared when the next is asked for.

        Raises InputError for XML that is not well formed, has a document type, or holds too many elements.
        """
        context = etree.iterparse(BytesIO(self.data(name)), events=("start", "end"), **_SETTINGS)
        count, inside = 0, 0
        try:
            for event, element in context:
                if event == "start":
                    count += 1
                    if count == 1 and element.getroottree().docinfo.doctype:
                        raise InputError(self.path, "a document type stands in the workbook", found=name, remedy=_SAVE)
                    if count > limits.ATOMS:
                        raise InputError(self.path, "the workbook holds too many elements", found=name)
                    inside += local(element) in tags
                    continue
                if local(element) in tags:
                    inside -= 1
                    if not inside:
                        yield element
                if not inside:
                    element.clear()
                    while element.getprevious() is not None:
                        del element.getparent()[0]
        except (etree.XMLSyntaxError, ValueError, LookupError) as error:
            said = str(error).split("\n")[0][:200]
            raise InputError(self.path, f"{name} of the workbook is no XML ({said})", remedy=_SAVE) from None

    def _broken(self, error: Exception, name: str = "") -> InputError:
        what = f"the workbook is damaged ({str(error)[:120] or type(error).__name__})"
        return InputError(self.path, what, found=name, remedy="It may have been cut off: copy or save it again.")


def local(element: Any) -> str:
    """The name of an element without its namespace; the same parts are written in two namespaces."""
    return str(element.tag).rpartition("}")[2]


def attribute(element: Any, name: str, default: str = "") -> str:
    """An attribute by its local name."""
    value = element.get(name)
    if value is not None:
        return str(value)
    return next((str(text) for key, text in element.attrib.items() if key.rpartition("}")[2] == name), default)
