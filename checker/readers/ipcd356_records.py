"""One test record of IPC-D-356: fixed columns, 80 of them.

Columns (1-based): 1-3 code, 4-17 net, 21-26 reference, 27 a hyphen, 28-31 pin, 32 `M` mid-point, 33 `D` and 34-37 the hole, 38
plated or not, 39 `A` and 40-41 access, 42 `X` and 43-49, 50 `Y` and 51-57 the place, 58 `X` and 59-62, 63 `Y` and 64-67 the size,
68 `R` and 69-71 the angle. Figures are whole numbers, blanks or zeros in front.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from checker.errors import InputError

CODES = frozenset({"317", "327", "367", "307"})
WIDTH = 80  # columns of a line
REFERENCE, PIN, NET = 6, 4, 14  # characters the form keeps of each name
VIA = "VIA"

_NUMBERS = (  # what, column of the letter in front, last column, letter; 0-based and half open
    ("hole", 32, 37, "D"),
    ("access", 38, 41, "A"),
    ("x", 41, 49, "X"),
    ("y", 49, 57, "Y"),
    ("width", 57, 62, "X"),
    ("height", 62, 67, "Y"),
    ("turned", 67, 71, "R"),
)
_FIGURES = re.compile(
    r"(?:D([ 0-9]{4})|     )[PU ](?:A([ 0-9]{2})|   )X([ +-][ 0-9]{6})Y([ +-][ 0-9]{6})"
    r"(?:X([ 0-9]{4})|     )(?:Y([ 0-9]{4})|     )(?:R([ 0-9]{3})|    )"
).match


@dataclass(slots=True)
class Record:
    """A pin, via or hole. net: "" for none. ref: "" for copper of no part. Figures in the units of the file, None: not there.

    fault: what is wrong with its figures, "" when nothing is; the names are sound in any case.
    """

    line: int
    code: str
    net: str
    ref: str
    pin: str
    plated: bool
    hole: int | None = None
    access: int | None = None
    x: int | None = None
    y: int | None = None
    width: int | None = None
    height: int | None = None
    turned: int | None = None
    fault: str = ""


def record(text: str, line: int, path: str, before: Record | None = None) -> Record:
    """The record on one line. before: the record that this line continues, whose names it may leave out.

    Raises InputError where the columns of the names cannot be told, since a wrong name is a wrong circuit.
    """
    columns = _columns(text)
    net, ref, pin = columns[3:17].strip(), columns[20:26].strip(), columns[27:31].strip()
    if columns[17:20].strip():
        raise _shifted(path, line, "columns 18 to 20 are not blank", columns[17:20])
    unnumbered = not pin and columns[26] == " " and columns[41] == "X" and columns[49] == "Y"  # such as a peg of a connector
    if ref and ref != VIA and columns[26] != "-" and not unnumbered:
        raise _shifted(path, line, "there is no hyphen between reference and pin in column 27", columns[20:31])
    if pin and not ref and before is None:
        raise _shifted(path, line, "a pin has no reference", columns[20:31])
    if before is not None:
        net, ref, pin = net or before.net, ref or before.ref, pin or before.pin
    found = Record(line, columns[:3], "" if net.upper() == "N/C" else net, "" if ref == VIA else ref, pin, columns[37] != "U")
    if match := _FIGURES(columns, 32):  # nearly every record
        try:
            hole, access, x, y, width, height, turned = (
                int(digits) if digits and digits.strip() else None for digits in match.groups()
            )
        except ValueError:
            pass
        else:
            if x is not None and y is not None:
                found.hole, found.access, found.x, found.y = hole, access, x, y
                found.width, found.height, found.turned = width, height, turned
                return found
    _read_one_by_one(found, columns)
    return found


def _read_one_by_one(found: Record, columns: str) -> None:
    """The figures up to the first that cannot be read."""
    for name, start, end, letter in _NUMBERS:
        field = columns[start:end]
        digits = field[1:].strip()
        if field[0] not in (letter, " ") or (digits and (field[0] == " " or not _whole(digits, name in "xy"))):
            found.fault = f"columns {start + 1} to {end} are no {name}"
            return
        if digits:
            setattr(found, name, int(digits))
    if found.x is None or found.y is None:
        found.fault = "it has no place on the board"


def _columns(text: str) -> str:
    """80 columns. Programs that count bytes shift whatever stands behind a name that is not ASCII."""
    if not text.isascii() and text[41:42] not in ("X", ""):
        coded = text.encode("utf-8", "replace")
        if coded[41:42] == b"X":
            fields = ((a, b, coded[a:b].decode("utf-8", "replace")) for a, b in ((0, 3), (3, 17), (17, 20), (20, 26), (26, WIDTH)))
            return "".join(field.ljust(b - a)[: b - a] for a, b, field in fields)
    return text.ljust(WIDTH)


def _whole(digits: str, signed: bool) -> bool:
    if signed and digits[0] in "+-":
        digits = digits[1:]
    return digits.isascii() and digits.isdecimal()


def _shifted(path: str, line: int, what: str, found: str) -> InputError:
    return InputError(
        path,
        f"the columns of this record cannot be told: {what}",
        line=line,
        found=found.strip() or "blanks",
        expected="net in columns 4 to 17, reference in 21 to 26, a hyphen in 27, pin in 28 to 31",
        remedy="The file may have been edited or cut off; export or copy it again.",
    )
