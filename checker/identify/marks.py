"""Safety classes and approvals out of part text and of a Class or Approval column.

    read("1nF 250V X1/Y2 IEC60384-14")     (("X1", "X1"), ("Y2", "Y2"), ("IEC 60384-14", "IEC60384-14"))
    column("Y1, VDE, ENEC")                (("Y1", "Y1"), ("VDE", "VDE"), ("ENEC", "ENEC"))
    class_voltages("X1 440V / Y2 300V")    {"X1": 440.0, "Y2": 300.0}

A class counts as a whole token in capitals only (`VY2...` is a type number, `10k x2` is two resistors), never after a word
that takes it back (`not Y1`, `instead of X2`), never from a link. Class names: IEC 60384-14.
"""

from __future__ import annotations

import re

from checker.identify.values import plain

# what stands behind takes it back too: `Y1 pending`, `X2: no`
_NOT_YET = r"(?!\s?[:=(-]?\s?(?:pending|tbd|like|equiv\w{0,8}|no|not|none)(?![^\W_]))"
_CLASS = re.compile(
    r"(?<![^\W_])(?P<classes>(?:X[1-3]|Y[1-4])(?:X[1-3]|Y[1-4])?)(?![^\W_])(?![.,][0-9])(?!\s?(?:mm|pcs|\?))" + _NOT_YET,
)
_SMALL_CLASS = re.compile(
    r"(?<![^\W_])(?i:class)[\s:=-]{1,3}(?P<classes>(?:x[1-3]|y[1-4])(?:/?(?:x[1-3]|y[1-4]))?)(?![^\W_])(?!\s?\?)" + _NOT_YET
)
# `100 pcs X2`, `2 X2`: a count in front makes it `times two`
_COUNT_BEFORE = re.compile(r"(?:(?<![^\W_])pcs|(?<![^\W_])qty|(?<![^\W_.,])[1-9])[\s:]{1,2}\Z", re.IGNORECASE)
_TAKEN_BACK = re.compile(
    r"(?<![^\W_])(?:not|no|non|never|without|instead\sof|formerly|was|replaces|replaced|unlike|isn't|lacks|missing)"
    r"[\s:-]{1,2}(?:an?\s|the\s)?(?:class[\s-]|rated\s)?\Z",
    re.IGNORECASE,
)
_BACK = 32

_STANDARD = re.compile(
    r"(?:(?<![^\W_])(?P<prefix>IEC|EN|UL|CSA|VDE|DIN|GB|BS|V)|(?<![^\W_]))(?:[\s-]?(?:IEC|EN|V))?[\s-]{0,2}"
    r"(?P<number>60384-14|60747-5-[25]|60747-17|61558-1|61558-2-1[67]|61558-2-6|62368-1|60601-1|60335-1|60950-1|60065|61010-1|61051-2"
    r"|61810-1|60127|0884-1[017]|0884|1577|248-14)"
    r"(?:(?<=60127)(?:-[0-9]{1,2})?)?(?![^\W_])(?!-[0-9])(?!\s?\?)" + _NOT_YET,
    re.IGNORECASE,
)
_IEC_NEAR = re.compile(r"(?<![^\W_])(?:IEC|EN)[\s/&,+]{0,3}\Z", re.IGNORECASE)
_GRADES = {
    "functional": "functional", "operational": "functional", "funktions": "functional", "basic": "basic", "basis": "basic",
    "double": "double", "doppelte": "double", "reinforced": "reinforced", "verst\u00e4rkte": "reinforced",
}  # fmt: skip
_GRADE = r"reinforced|basic|double|functional|operational|verst\u00e4rkte|doppelte|basis|funktions"
_INSULATION = re.compile(
    rf"(?<![^\W_])(?P<grade>{_GRADE})(?:[\s/-]{{1,2}}(?:or|and)[\s-]|/)?\s{{0,2}}(?:(?P<also>reinforced)\s)?-?"
    r"(?P<noun>(?:electrical\s)?(?:insulat|isolat|isolier)(?:ion|ed|or|ors|ung))(?![^\W_])",
    re.IGNORECASE,
)
# the grade beside a test voltage or behind `isolated`: `5.7KVRMS REINFORCED`, `1500VDC BASIC`, `ISOLATED REINFORCED 5.2KVDC`
_TEST = r"(?<![^\W_.,])(?:[0-9]{1,2}(?:[.,][0-9]{1,2})?\s?k|[0-9]{4,5}\s?)V(?:[\s-]?(?:ac|dc|rms|pk|peak))?"
_BESIDE = re.compile(
    rf"(?:{_TEST}|(?<![^\W_])(?:isolated|insulated|isolation|insulation)(?:\s?[:=])?)"
    r"(?:[\s,;(]{1,2}(?=reinforced)|[\s(]{1,2})(?P<grade>reinforced|basic|functional)"
    rf"(?![^\W_])(?!\s?(?:part|plastic|pin|lead|terminal|case|housing|fib))"
    rf"|(?<![^\W_])(?P<before>reinforced|basic|functional)[\s,]{{1,2}}(?={_TEST}(?![^\W_]))",
    re.IGNORECASE,
)
# what says that the part is no protection against shock
_NO_SAFETY = re.compile(
    r"(?<![^\W_])(?:not?|never)\s(?:to\sbe\s)?(?:(?:suitable|intended|designed|used|meant|approved|rated)\s)?(?:(?:for|as)\s)?(?:an?\s)?"
    r"safety[\s-](?:isolat|insulat|barrier)\w{0,4}(?![^\W_])",
    re.IGNORECASE,
)
# winding wire whose three layers are made to be reinforced insulation by themselves
_TRIPLE = re.compile(
    r"(?<![^\W_])(?:tripl[ey][\s-]{0,2}insulat(?:ed|ion)|TIW|dreifach[\s-]?isoliert\w{0,2})(?![^\W_])", re.IGNORECASE
)


def read(text: str) -> tuple[tuple[str, str], ...]:
    """(name, words) of every class and approval the text states, once each, in the order of the text."""
    return tuple((name, words) for name, words, _, _ in _found(plain(text)))


def _found(text: str) -> list[tuple[str, str, int, int]]:
    found: list[tuple[str, str, int, int]] = []
    for pattern in (_CLASS, _SMALL_CLASS):
        for match in pattern.finditer(text):
            before = text[max(0, match.start() - _BACK) : match.start()]
            if not _COUNT_BEFORE.search(before) and not _TAKEN_BACK.search(_listed(before)):
                letters = match["classes"].upper().replace("/", "")
                found += [(letters[at : at + 2], match[0], *match.span()) for at in range(0, len(letters), 2)]
    for match in _STANDARD.finditer(text):
        name = _standard(match, text)
        if name and not _TAKEN_BACK.search(text[max(0, match.start() - _BACK) : match.start()]):
            found.append((name, match[0], *match.span()))
    found += _grades(text)
    found.sort(key=lambda one: one[2])
    return list({name: (name, words, start, end) for name, words, start, end in reversed(found)}.values())[::-1]


def _grades(text: str) -> list[tuple[str, str, int, int]]:
    """Stated grades of insulation, and winding wire made for it."""
    found: list[tuple[str, str, int, int]] = []
    for pattern in (_INSULATION, _BESIDE, _NO_SAFETY, _TRIPLE):
        for match in pattern.finditer(text):
            if _TAKEN_BACK.search(text[max(0, match.start() - _BACK) : match.start()]):
                continue
            if pattern is _TRIPLE:
                names = ["triple insulated"]
            elif pattern is _NO_SAFETY:
                names = ["functional"]
            else:
                words = [word for word in match.groupdict().items() if word[1] and word[0] != "noun"]
                names = [_GRADES[word.lower()] for _, word in words]
            found += [(name, match[0], *match.span()) for name in names]
    return found


_CLASS_LIST = re.compile(r"(?:[XY][1-4]\s?[/,&+]\s?){1,4}\Z")


def _listed(before: str) -> str:
    """`not X1/` before `Y2`: the word takes back the whole list."""
    return _CLASS_LIST.sub("", before)


def _standard(match: re.Match[str], text: str) -> str:
    """`EN 60747-5-5` is named as the IEC publication; `UL 60384-14` is the adoption of one country and stays so."""
    number, prefix = match["number"], (match["prefix"] or "").upper()
    if number.startswith("0884"):
        return f"VDE {number}" if prefix in ("VDE", "V", "DIN") else ""
    if number in ("1577", "248-14"):
        return f"UL {number}" if prefix == "UL" else ""
    if prefix in ("UL", "CSA", "GB") and not _IEC_NEAR.search(text[max(0, match.start() - 8) : match.start()]):
        return f"{prefix} {number}"
    if not prefix and "-" not in number:
        return ""
    return f"IEC {number}"


_PIECES = re.compile(r"[\s,;/+|()\[\]]+")
_NAMES = {name.lower(): name for name in "UL UR cUL cULus cURus VDE ENEC CSA CQC CE CCC BSI KC PSE T\u00dcV".split()} | {
    "tuv": "T\u00dcV",
    **{word: word for word in ("functional", "basic", "double", "reinforced")},
}
_FILLERS = frozenset(
    "and or to per the class classes safety approved approval approvals certified recognized recognised listed insulation "
    "isolation file iec en din ed edition with rated capacitor cap n/a na none no not nil null nan any tbd yes pending only".split()
)
_REFUSING = frozenset("no not non without pending".split())
_MARKS_PER_CELL = 16
_MARK_LENGTH = 24


def column(text: str) -> tuple[tuple[str, str], ...]:
    """Marks of a Class or Approval cell: those of `read`, then each other word as it is usually written. `none` gives ()."""
    cell = plain(text)
    found = _found(cell)
    kept = [(name, words) for name, words, _, _ in found]
    last = 0
    rest: list[str] = []
    for _, _, start, end in sorted(found, key=lambda one: one[2]):
        rest.append(cell[last:start])
        last = max(last, end)
    rest.append(cell[last:])
    pieces = [piece for part in rest for piece in _PIECES.split(part) if piece]
    refused, previous = False, ""
    for piece in pieces:
        word = piece.strip(".:-_'\"*")
        key = word.lower()
        small = re.fullmatch(r"(?:x[1-3]|y[1-4])(?:x[1-3]|y[1-4])?", key)
        if key in ("pending", "no", "not") and kept and kept[-1][1] == previous:
            kept.pop()  # `VDE pending`
        if small is not None and not refused and not piece.endswith("?"):
            kept += [(key[at : at + 2].upper(), piece) for at in range(0, len(key), 2)]
        elif (
            key not in _FILLERS
            and not refused
            and len(word) >= 2
            and len(word) <= _MARK_LENGTH
            and word[0].isalpha()
            and "?" not in word
        ):
            kept.append((_NAMES.get(key, word.upper() if len(word) <= 6 else word), piece))
        previous = piece
        refused = key in _REFUSING or (refused and key in _FILLERS)
    return tuple({name: (name, words) for name, words in reversed(kept)}.values())[::-1][:_MARKS_PER_CELL]


_CLASS_OR_VOLTS = re.compile(
    r"(?<![^\W_])(?:(?P<classes>(?:X[1-3]|Y[1-4])(?:X[1-3]|Y[1-4])?)|(?P<number>[0-9]{2,4}(?:\.[0-9])?)\s?"
    r"(?:(?P<kilo>[kK])?V(?:\s?(?i:ac|~|a\.c\.|rms|dc))?|(?=\s?/\s?[0-9]{2,4}\s?V)))(?![^\W_])"
)


def class_voltages(text: str) -> dict[str, float]:
    """Rated voltage [V] of each class where there is one voltage a class (`X1 440V / Y2 300V`, `X1/Y2 440/300V`), else {}."""
    names: list[str] = []
    volts: list[float] = []
    order = ""
    for match in _CLASS_OR_VOLTS.finditer(plain(text)):
        if match["classes"]:
            letters = match["classes"]
            names += [letters[at : at + 2] for at in range(0, len(letters), 2)]
            order += "c" * (len(letters) // 2)
        else:
            volts.append(float(match["number"]) * (1000 if match["kilo"] else 1))
            order += "v"
    count = len(names)
    if not count or count != len(volts) or len(set(names)) != count:
        return {}
    if order in ("cv" * count, "vc" * count, "c" * count + "v" * count, "v" * count + "c" * count):
        return dict(zip(names, volts, strict=True))
    return {}
