"""The only place that opens or writes a file.

Reading: regular files only, opened once without blocking, the size checked on the open handle, optionally confined to
a folder. Writing: a temporary file in the target folder, then a rename; a target that is a link is refused.
"""

from __future__ import annotations

import hashlib
import os
import stat
import tempfile
from dataclasses import dataclass
from pathlib import Path

from checker import limits
from checker.errors import InputError


@dataclass(frozen=True, slots=True)
class Blob:
    """The bytes of one input: `path` as the user named it, `data`, and the hash that the report prints."""

    path: str
    data: bytes

    @property
    def sha256(self) -> str:
        return hashlib.sha256(self.data).hexdigest()


def read(path: str | os.PathLike[str], *, limit: int = limits.FILE_BYTES, inside: Path | None = None, shown: str = "") -> Blob:
    """The bytes of a regular file of at most `limit` bytes.

    inside: a folder the real path must lie in (links resolved). shown: the name used in messages and reports.
    Raises InputError for a missing file, a folder, a device or pipe, a file too large, or one outside `inside`.
    """
    shown = shown or os.fspath(path)
    target = Path(path)
    if inside is not None:
        target = confined(target, inside, shown)
    try:
        handle = os.open(target, os.O_RDONLY | os.O_NONBLOCK | os.O_CLOEXEC)
    except FileNotFoundError:
        raise InputError(shown, "there is no such file", remedy="Check the path; it is taken from the current folder.") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(shown, f"the file cannot be opened ({reason})") from None
    mode = os.fstat(handle).st_mode
    if not stat.S_ISREG(mode):  # os.fdopen would refuse a folder with an error of its own
        os.close(handle)
        if stat.S_ISDIR(mode):
            raise InputError(shown, "this is a folder", expected="a file")
        raise InputError(
            shown,
            "this is not a regular file",
            expected="a file, not a pipe, socket or device",
            remedy="To read standard input give - as the path.",
        )
    with os.fdopen(handle, "rb") as stream:
        return Blob(shown, _bounded(stream.read(limit + 1), limit, shown))


def bounded_stream(stream, shown: str, limit: int = limits.FILE_BYTES) -> Blob:  # type: ignore[no-untyped-def]
    """The bytes of an open binary stream (standard input), at most `limit` of them."""
    return Blob(shown, _bounded(stream.read(limit + 1), limit, shown))


def _bounded(data: bytes, limit: int, shown: str) -> bytes:
    if len(data) > limit:
        raise InputError(shown, "the file is too large", found=f"more than {limit:,} bytes", expected=f"at most {limit:,} bytes")
    return data


def confined(target: Path, folder: Path, shown: str) -> Path:
    """The real path of `target`, which must lie in `folder`; raises InputError when it leads outside."""
    try:
        real, root = target.resolve(), folder.resolve()
    except (OSError, RuntimeError, ValueError) as error:
        raise InputError(shown, f"the path cannot be followed ({error})") from None
    if not real.is_relative_to(root):
        raise InputError(shown, "the path leads outside the folder of the file that names it", expected="a path inside that folder")
    return real


def write(path: str | os.PathLike[str], data: bytes) -> None:
    """Write `data` so that the file is either whole or untouched. Raises InputError when the target cannot be written."""
    target = Path(path)
    shown = os.fspath(path)
    if target.is_symlink():
        raise InputError(shown, "the output file is a link", remedy="Name the file itself; links are not followed when writing.")
    if target.is_dir():
        raise InputError(shown, "the output is a folder", expected="a file name")
    name = None
    try:
        handle, name = tempfile.mkstemp(prefix=f".{target.name[:40]}.", dir=target.parent)
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
        umask = os.umask(0)
        os.umask(umask)
        os.chmod(name, 0o666 & ~umask)
        os.replace(name, target)
    except OSError as error:
        if name is not None and os.path.exists(name):
            os.unlink(name)
        raise InputError(shown, f"the output cannot be written ({error.strerror})") from None


_MARKS = ((b"\xef\xbb\xbf", "utf-8"), (b"\xff\xfe", "utf-16-le"), (b"\xfe\xff", "utf-16-be"))


def decoded(blob: Blob) -> tuple[str, str]:
    """The text of a file and a note about its encoding ("" when it was plain UTF-8).

    Byte-order marks first, then the NUL pattern of UTF-16 without one, then strict UTF-8, then cp1252 with a note naming
    the first offending byte. Raises InputError for NUL characters and for bytes that no accepted encoding explains.
    """
    data = blob.data
    for mark, codec in _MARKS:
        if data.startswith(mark):
            return _strict(blob, data[len(mark) :], codec), "" if codec == "utf-8" else f"read as {codec}"
    head = data[:4096]
    if len(head) >= 4:
        odd, even = head[1::2].count(0), head[0::2].count(0)
        if odd > len(head) // 4 and even == 0:
            return _strict(blob, data, "utf-16-le"), "read as utf-16-le without a byte-order mark"
        if even > len(head) // 4 and odd == 0:
            return _strict(blob, data, "utf-16-be"), "read as utf-16-be without a byte-order mark"
    try:
        return _no_nul(blob, data.decode("utf-8")), ""
    except UnicodeDecodeError as error:
        offset = error.start
    return _strict(blob, data, "cp1252"), f"not UTF-8 from byte {offset} on, read as cp1252"


def _strict(blob: Blob, data: bytes, codec: str) -> str:
    try:
        return _no_nul(blob, data.decode(codec))
    except UnicodeDecodeError as error:
        raise InputError(
            blob.path, f"byte {error.start} fits no accepted encoding", expected="UTF-8, UTF-16 or cp1252 text"
        ) from None


def _no_nul(blob: Blob, text: str) -> str:
    at = text.find("\0")
    if at >= 0:
        raise InputError(blob.path, "the file holds NUL characters", line=text.count("\n", 0, at) + 1, expected="a text file")
    return text
