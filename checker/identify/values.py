"""The value of a part out of free text: `4n7`, `0.1uF/250V`, `RES 1M 1% 1/4W 1206`, `T2A 250V`, `BZX84C5V1`, `104`.

    decode("4n7/50V/X7R", "capacitor")       Decoded(4.7e-09, "F", True, "/50V/X7R")
    decode("103", "capacitor")               Decoded(1e-08, "F", True, "")         a marking code
    decode("10m", "resistor")                Decoded(0.01, "ohm", False, "")       readable two ways
    decode("LM317", "regulator")             None

Text is cut into numbers with the letters that follow; a table per quantity says which letters are a value. Any other number
(size, tolerance, voltage, temperature, part number) has other letters and is left alone. Where people write one text for two
values a million apart, the answer is None, or `sure` is False where one reading is far more usual.
Styles and codes: common practice, no source; preferred numbers: IEC 60063 (E24), letter and digit code: IEC 60062, from memory.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from decimal import Decimal

from checker import limits


@dataclass(frozen=True, slots=True)
class Decoded:
    """value in `unit` (ohm, F, H, A, V, Hz). sure: False when the text can be read another way. rest: text without the value."""

    value: float
    unit: str
    sure: bool
    rest: str


@dataclass(frozen=True, slots=True)
class _Found:
    value: Decimal
    sure: bool
    explicit: bool  # a unit was written, not only a prefix
    start: int
    end: int


_UNITS = {
    **dict.fromkeys(("resistor", "thermistor", "potentiometer", "network", "ferrite"), "ohm"),
    "capacitor": "F",
    **dict.fromkeys(("inductor", "common-mode-choke"), "H"),
    **dict.fromkeys(("fuse", "resettable-fuse"), "A"),
    **dict.fromkeys(("zener", "tvs"), "V"),
    "crystal": "Hz",
}
# capital letters that touch a value and belong to it: taper, time characteristic, the letter of a crystal
_LEADS = {
    "fuse": frozenset({"T", "F", "M", "TT", "FF"}),
    "crystal": frozenset({"Q", "X", "Y"}),
    "potentiometer": frozenset({"A", "B", "C"}),
    "thermistor": frozenset({"NTC", "PTC"}),
}
_E24 = frozenset("10 11 12 13 15 16 18 20 22 24 27 30 33 36 39 43 47 51 56 62 68 75 82 91".split())
_E96 = frozenset(round(100 * 10 ** (step / 96)) for step in range(96))
_SIZES = frozenset("0201 0402 0603 0805 1206 1210 1218 1808 1812 1825 2010 2220 2225 2512".split())

# U+00B5 and U+03BC micro, U+2126 and U+03A9 ohm, Cyrillic letters that look like Latin ones
_FOLD = str.maketrans({"\u00b5": "u", "\u03bc": "u", "\u2126": "\u03a9", "\u041a": "K", "\u043a": "k", "\u041c": "M"})
_MAYBE_LINK = re.compile(r"://|www\.|\.[A-Za-z]{2}", re.IGNORECASE)
_LINK = re.compile(r"://|\bhttps?|www\.|[^\W_]\.(?:com|org|net|html?|pdf|php|aspx?)(?![^\W_])", re.IGNORECASE)
_DOTTED = re.compile(r"[A-Za-z]{2}\.[A-Za-z]{2}")


def plain(text: str) -> str:
    """The first `limits.CELL` characters in plain letters (micro as u, ohm sign as U+03A9, wide forms narrow), without links."""
    text = text[: limits.CELL]
    if not text.isascii():
        # a superscript two stays one, or A²s would read as A2s
        parts = text.translate(_FOLD).split("\u00b2")
        text = "\u00b2".join(unicodedata.normalize("NFKC", part) for part in parts).translate(_FOLD)
    if _MAYBE_LINK.search(text):
        text = " ".join(word for word in text.split() if not (_LINK.search(word) or ("/" in word and _DOTTED.search(word))))
    return text


def _spellings() -> dict[str, dict[str, tuple[int, bool, bool]]]:
    """unit -> letters after the number -> (power of ten, sure, explicit)."""
    ohm = {"R": (0, True, False), "r": (0, True, False), "E": (0, True, False)}
    ohm |= {"k": (3, True, False), "K": (3, True, False), "M": (6, True, False), "G": (9, True, False), "m": (-3, False, False)}
    ohm |= dict.fromkeys(("Meg", "meg", "MEG", "Mega", "mega", "MEGA"), (6, True, False))
    ohm |= {prefix + "R": (power, True, False) for prefix, power in (("u", -6), ("m", -3), ("k", 3), ("K", 3), ("M", 6))}
    for word in ("\u03a9", "ohm", "ohms", "Ohm", "Ohms", "OHM", "OHMS"):
        ohm |= {prefix + word: (power, True, True) for prefix, power in (("", 0), ("u", -6), ("m", -3), ("k", 3), ("K", 3))}
        ohm |= {prefix + word: (power, True, True) for prefix, power in (("M", 6), ("G", 9), ("Meg", 6), ("meg", 6), ("MEG", 6))}
    for word in ("MOHM", "MOHMS", "mohm", "mohms"):  # text in one case does not say whether milli or mega
        ohm[word] = (ohm[word][0], False, True)
    for prefix in ("k", "K", "M"):  # IEC 60062 tolerance letters that touch the value
        ohm |= {prefix + letter: (ohm[prefix][0], True, False) for letter in "FGJ"}

    farad = {"F": (0, True, True), "mF": (-3, False, True), "m": (-3, False, False)}  # mF was long written for microfarad
    farad |= dict.fromkeys(("MFD", "mfd", "Mfd", "uFD", "ufd", "uFd", "UFD"), (-6, True, True))
    henry = {"H": (0, True, True), "mH": (-3, True, True), "mh": (-3, True, True), "MH": (-3, True, True), "m": (-3, True, False)}
    for prefix, power in (("p", -12), ("n", -9), ("u", -6)):
        for letter in (prefix, prefix.upper()):
            farad |= {letter: (power, True, False), letter + "F": (power, True, True), letter + "f": (power, True, True)}
            henry |= {letter: (power, True, False), letter + "H": (power, True, True), letter + "h": (power, True, True)}
        farad |= {prefix + tolerance: (power, True, False) for tolerance in "JKM"}

    hertz = {"k": (3, True, False), "K": (3, True, False), "M": (6, True, False)}
    for word in ("Hz", "HZ", "hz"):
        hertz |= {
            prefix + word: (power, True, True) for prefix, power in (("", 0), ("k", 3), ("K", 3), ("M", 6), ("m", 6), ("G", 9))
        }

    ampere: dict[str, tuple[int, bool, bool]] = {}
    for prefix, power in (("", 0), ("m", -3), ("M", -3), ("k", 3)):
        ampere |= {prefix + word: (power, True, True) for word in ("A", "Amp", "AMP", "Amps", "AMPS", "amp", "amps", "Ampere")}
        ampere |= {f"{prefix}A{letter}": (power, True, True) for letter in ("T", "F", "H", "L", "TH", "TL", "FH", "FL", "DC", "AC")}
    return {"ohm": ohm, "F": farad, "H": henry, "Hz": hertz, "A": ampere}


_SPELLINGS = _spellings()
# prefix letters that may stand for the decimal point, and what may touch the digits behind
_INFIX = {
    "ohm": frozenset("RrEkKMGm") | {"Meg", "meg"},
    "F": frozenset("pPnNuUm"),
    "H": frozenset("num"),
    "Hz": frozenset("kKM"),
    "A": frozenset("A"),
}
_AFTER_INFIX = {
    "ohm": frozenset({"", "\u03a9", "R", "ohm", "Ohm", "F", "G", "J"}),
    "F": frozenset({"", "F", "f", "J", "K", "M"}),
    "H": frozenset({"", "H"}),
    "Hz": frozenset({"", "Hz"}),
    "A": frozenset({"", "A"}),
}
_VOLTS = frozenset({"V", "v", "VAC", "VDC", "Vac", "Vdc"})

# [2x] [T] number [blank] letters [digits letters] [ ohm], on both sides no letter or digit
_TOKEN = re.compile(
    r"(?<![^\W_])(?<!\.)(?<![0-9],)"
    r"(?:(?P<times>[0-9]{1,2})\s?[xX*\u00d7]\s?|(?P<lead>[A-Z]{1,3}))?"
    r"(?P<number>[0-9]{1,7}(?:[.,][0-9]{1,6})?|\.[0-9]{1,6})(?P<gap>\s{1,2})?(?P<letters>[A-Za-z\u03a9]{1,8})"
    r"(?:(?P<digits>(?(gap)(?!)|[0-9]{1,4}))(?P<more>[A-Za-z\u03a9]{0,4})|[ -](?P<ohm>(?i:ohms?)|\u03a9))?(?![^\W_])(?!\.[0-9])"
)
_DASHED = re.compile(r"-(?:[0-9]{1,4}(?:\.[0-9]{1,2})?(?:[kK]?V|W|%)|X[1-9]|Y[1-5]|C0G|COG|NP0)")
_TOLERANCE_BEFORE = re.compile(r"(?:\u00b1|\+/?-)\s{0,2}\Z")
_LABEL_BEFORE = re.compile(
    r"(?:DCR|ESR|ESL|RDC|TCR|SRF|TRIP|BREAKING|B[0-9/]{0,6}|LEAK|LEAKAGE|MAX|MIN)[\s=:<\u2264~(.]{1,4}\Z|(?:DCR|ESR|RDC)\Z",
    re.IGNORECASE,
)
_ELECTROLYTIC = re.compile(r"(?<![^\W_])(?:elko|elec|electrolytic|alu|alum|alumini?um|elca|supercap|edlc)(?![^\W_])", re.IGNORECASE)
_SUPERCAP = re.compile(r"super\s?cap|ultra\s?cap|edlc|double.?layer|(?<![^\W_])[0-9][.,][0-9]\s?V(?![^\W_])", re.IGNORECASE)
_LONG_BEFORE_COMMA = re.compile(r"(?<![0-9.,])([0-9]{4,7}),")


_SCIENTIFIC = re.compile(  # 4.7E-7 and 0.00000047, as spreadsheets write them
    r"(?<![\w.,])(?:[0-9]{1,6}(?:\.[0-9]{1,17})?[eE][+-][0-9]{1,2}|0\.000[0-9]{1,17})(?![0-9.,])"
)
_PREFIXES = {-12: "p", -9: "n", -6: "u", -3: "m", 0: "", 3: "k", 6: "M", 9: "G"}


def _with_prefix(found: re.Match[str]) -> str:
    """A figure with a power of ten as one with a prefix: `4.7E-7` is `470n`; as it stands where no prefix reaches it."""
    value = Decimal(found[0])
    power = value.adjusted() // 3 * 3
    return f"{value.scaleb(-power).normalize():f}{_PREFIXES[power]}" if value and power in _PREFIXES else found[0]


def decode(text: str, kind: str) -> Decoded | None:
    """The value that `text` gives a part of this kind (one of `model.candidate.KINDS`), or None when it gives none."""
    unit = _UNITS.get(kind)
    if unit is None:
        return None
    text = _SCIENTIFIC.sub(_with_prefix, plain(text))
    if "," in text:
        text = _LONG_BEFORE_COMMA.sub(r"\1, ", text)  # `1206,100n` is a list, not a decimal comma
    found: _Found | None
    if unit == "V":
        found = _volts(text, kind)
    elif unit == "A":
        found = _amperes(text, kind)
    else:
        found = _pick(list(_tokens(text, unit, kind))) or _coded(text, kind)
        if kind == "ferrite" or (found is None and unit == "H"):
            found, unit = _impedance(text, kind, found)
        elif kind == "thermistor":
            found = _disc(text) or found
    if found is None:
        return None
    return Decoded(float(found.value), unit, found.sure, f"{text[: found.start].rstrip()} {text[found.end :].lstrip()}".strip())


def _number(text: str, *, comma_decimal: bool) -> Decimal | None:
    """None for `0603` and for `1,000`, where the comma may group thousands."""
    if len(text) > 1 and text[0] == "0" and text[1] not in ".,":
        return None
    whole, comma, fraction = text.partition(",")
    if comma and len(fraction) == 3 and whole != "0" and not comma_decimal:
        return None
    return Decimal(text.replace(",", "."))


def _tokens(text: str, unit: str, kind: str) -> Iterator[_Found]:
    spellings = _SPELLINGS[unit]
    leads = _LEADS.get(kind)
    for match in _TOKEN.finditer(text):
        times, lead, digits_before, _, letters, digits, more, ohm = match.groups()
        meaning = spellings.get(letters)
        if meaning is None or (lead and (leads is None or lead not in leads)):
            continue
        power, sure, explicit = meaning
        if ohm:
            if unit != "ohm":
                continue
            explicit, sure = True, sure or letters != "m"
        start, end = match.span()
        if unit == "A" and lead:
            start = match.start("number")  # the time characteristic stays for the ratings
        if digits is not None:
            joined = _joined(digits_before, letters, digits, more, unit)
            if joined is None:
                continue
            number, keeps = joined
            end = end if keeps else match.end("letters")
            if letters == "E" and keeps:
                if number >= 1 and len(digits) > 1:
                    continue  # 1E03 of a spreadsheet
                sure = number < 1
        else:
            plain_number = _number(digits_before, comma_decimal=unit == "Hz" and power > 0)
            if plain_number is None:
                continue
            number = plain_number
        if not _stands(text, match, unit, kind, letters, explicit, number):
            continue
        if times and kind not in ("network", "common-mode-choke"):
            sure = False
        yield _Found(number.scaleb(power), sure, explicit, start, end)


def _joined(before: str, letters: str, digits: str, more: str, unit: str) -> tuple[Decimal, bool] | None:
    """The number of `4n7`, or of `470u25V` where the digits are a voltage; True when the digits are part of it."""
    if more in _VOLTS and (unit in ("F", "A")):
        number = _number(before, comma_decimal=False)
        return None if number is None else (number, False)
    if letters not in _INFIX[unit] or more not in _AFTER_INFIX[unit] or not before.isdigit() or len(digits) > 3:
        return None
    if (before[0] == "0" and len(before) > 1) or (unit == "A" and len(digits) > 2) or len(before) > 4:
        return None
    return Decimal(f"{before}.{digits}"), True


def _stands(text: str, match: re.Match[str], unit: str, kind: str, letters: str, explicit: bool, number: Decimal) -> bool:
    """Whether what stands around the number leaves it a value: no tolerance, no label of another quantity, no part number."""
    start, end = match.span()
    before = text[max(0, start - 12) : start]
    if before and (_TOLERANCE_BEFORE.search(before) or _LABEL_BEFORE.search(before)):
        return False
    if unit == "F":
        if letters == "m" and not _ELECTROLYTIC.search(text):
            return False
        if letters == "F" and number >= 100 and not _SUPERCAP.search(text):
            return False  # 105F may be a marking code with its tolerance letter
    if explicit:
        return True
    if before.endswith("-") or (text.startswith("-", end) and not _DASHED.match(text, end)):
        return False
    if letters in ("P", "N", "U"):
        return not match["gap"] and (match["digits"] is not None or number >= 10 or letters != "P")  # 4P: four poles
    # 3435K: the B constant of a thermistor in kelvin
    return not (kind == "thermistor" and letters == "K" and 2000 <= number <= 5000)


def _pick(found: list[_Found]) -> _Found | None:
    """The first with a written unit, else the first; not sure when another of its sort says something else."""
    if not found:
        return None
    if len(found) == 1:
        return found[0]
    best = [one for one in found if one.explicit] or found
    first = best[0]
    agree = all(other.value == first.value for other in best)
    return _Found(first.value, first.sure and agree, first.explicit, first.start, first.end)


# --- values without letters, or with the letter in front -------------------------------------------------------------------

_WORDS_BEFORE = (
    r"\s*(?:(?:RES|RESISTOR|CAP|CAPACITOR|CER|CERAMIC|MLCC|DISC|DISK|CY|CX|[RCL]|IND|INDUCTOR|DNP|NA|NP|NF)(?:[\s:(]|\Z)\s*){0,3}"
)
_NO_UNIT_AFTER = r"(?![^\W_])(?!\.[0-9])(?![,][0-9])(?!\s*(?:[A-Za-z%\u00b0\u03a9-]|/\s*[0-9]{1,2}\s?W))"
_LEADING_LETTER = re.compile(
    _WORDS_BEFORE + r"(?P<letter>[RpnuE])(?P<digits>[0-9]{1,4})(?P<unit>[FH\u03a9]?)(?![^\W_])(?!\.[0-9])(?!-)"
)
_BARE = re.compile(_WORDS_BEFORE + r"(?P<number>[0-9]{1,7}(?:[.,][0-9]{1,6})?|\.[0-9]{1,6})" + _NO_UNIT_AFTER)
_CODE = re.compile(
    _WORDS_BEFORE + r"(?P<code>[1-9][0-9][0-689])(?P<tolerance>[GJKMZ](?=[0-9]{2,4}V)|[GJKMZ]?(?![^\W_]))(?!\.[0-9])(?!,[0-9])"
    r"(?!\s*(?:V|\u00b0|C(?![^\W_])|mm|%|[WA](?![^\W_])|[kM]?Hz|pcs|x\s?[0-9]|-))"
)
_DECIMAL_R = re.compile(_WORDS_BEFORE + r"(?P<code>[0-9]R[0-9]{1,2}|R[0-9]{2})[BCDJKMN]?(?![^\W_])(?!-)")
_VOLTAGE = re.compile(r"[0-9]\s?[kK]?V(?![^\W_]*[a-z])|/\s?[0-9]")


def _coded(text: str, kind: str) -> _Found | None:
    if kind == "capacitor":
        return _leading(text, {"p": -12, "n": -9, "u": -6}, "F") or _marked_capacitor(text)
    if kind in ("inductor", "common-mode-choke"):
        return _leading(text, {"n": -9, "u": -6}, "H") or _marked_inductor(text)
    if kind in ("resistor", "network", "potentiometer"):
        return _leading(text, {"R": 0, "E": 0}, "\u03a9") or _bare_resistor(text)
    return None


def _leading(text: str, powers: dict[str, int], unit: str) -> _Found | None:
    """`R33`, `u47`: the letter is the decimal point. `R0603` is a size."""
    match = _LEADING_LETTER.match(text)
    if match is None or match["letter"] not in powers or match["unit"] not in ("", unit) or match["digits"] in _SIZES:
        return None
    if match["letter"] in "RE" and set(match["digits"]) == {"0"}:
        return None
    value = Decimal(f"0.{match['digits']}").scaleb(powers[match["letter"]])
    return _Found(value, len(match["digits"]) > 1, False, match.start("letter"), match.end())


def _code(digits: str, unit_power: int) -> Decimal:
    """Two digits and a power of ten: 102 -> 10 x 10^2; 8 and 9 stand for 10^-2 and 10^-1."""
    power = int(digits[2])
    return Decimal(digits[:2]).scaleb((power if power < 8 else power - 10) + unit_power)


def _marked_capacitor(text: str) -> _Found | None:
    match = _CODE.match(text)
    if match is not None and (match["code"][:2] in _E24 or match["code"][:2] in ("25", "50")):
        code, tolerance = match["code"], match["tolerance"]
        if code[2] != "0" or tolerance:
            # 275 and 305 are also the rated voltages of X capacitors; 470K is 47 pF, but was used for 470 pF too
            return _Found(_code(code, -12), code not in ("275", "305") and code[2] != "0", False, match.start("code"), match.end())
    match = _BARE.match(text)
    if match is None or _ELECTROLYTIC.search(text):
        match = _DECIMAL_R.match(text)
        if match is None:
            return None
        return _Found(Decimal(match["code"].replace("R", ".")).scaleb(-12), False, False, match.start("code"), match.end())
    number = _number(match["number"], comma_decimal=False)
    if number is None or number == 0:
        return None
    if number < 1:  # 0.1 and .22 on a capacitor are microfarad
        return _Found(number.scaleb(-6), False, False, match.start("number"), match.end())
    # 470/25V may be picofarad or microfarad
    if number not in range(10, 1000) or "." in match["number"] or _VOLTAGE.search(text):
        return None
    if number >= 100 and number % 10:
        return None
    return _Found(number.scaleb(-12), False, False, match.start("number"), match.end())


def _marked_inductor(text: str) -> _Found | None:
    """Marking codes of inductors are in microhenry."""
    match = _DECIMAL_R.match(text)
    if match is not None:
        return _Found(Decimal(match["code"].replace("R", ".")).scaleb(-6), False, False, match.start("code"), match.end())
    match = _CODE.match(text)
    if match is None or match["code"][:2] not in _E24 or match["code"][2] not in "01234":
        return None
    return _Found(_code(match["code"], -6), False, False, match.start("code"), match.end())


def _bare_resistor(text: str) -> _Found | None:
    """A number alone is ohm, unless it may be a marking code (`103`, `1002`) or is a size (`1206`)."""
    match = _BARE.match(text)
    if match is None or match["number"] in _SIZES:
        return None
    number = _number(match["number"], comma_decimal=False)
    if number is None:
        return None
    digits, sure = match["number"], True
    if digits.isdigit() and digits[-1] != "0" and (len(digits) >= 4 or (len(digits) == 3 and digits[:2] in _E24)):
        # 165 is a value of E96, and as a code an unlikely one
        if len(digits) > 3 or int(digits) not in _E96 or digits[-1] < "5" or digits[:2] == "10":
            return None
        sure = False
    return _Found(number, sure, False, match.start("number"), match.end())


# --- kinds with their own habits ----------------------------------------------------------------------------------------------

_DISC = re.compile(r"(?<![0-9.])(?P<number>[0-9]{1,3}(?:\.[0-9])?)D-?[0-9]{1,2}(?![^\W_])")
_AT = re.compile(r"(?P<number>[0-9]{1,5})\s?@\s?[0-9]{1,4}\s?MHz", re.IGNORECASE)


def _disc(text: str) -> _Found | None:
    """`5D-11`: a 5 ohm inrush limiter of 11 mm."""
    match = _DISC.search(text)
    return None if match is None else _Found(Decimal(match["number"]), True, True, match.start(), match.end())


def _impedance(text: str, kind: str, other: _Found | None) -> tuple[_Found | None, str]:
    """A bead is named by ohm at 100 MHz, rarely by inductance; an inductor by ohm only where the frequency is written."""
    ohms = list(_tokens(text, "ohm", kind))
    at = [one for one in ohms if text[one.end : one.end + 3].lstrip().startswith("@")]
    if at:
        return _pick(at), "ohm"
    match = _AT.search(text)
    if match is not None and (match.start() == 0 or not (text[match.start() - 1].isalnum() or text[match.start() - 1] in ".,")):
        return _Found(Decimal(match["number"]), True, True, match.start(), match.end("number")), "ohm"
    if kind == "ferrite":
        return (_pick(ohms), "ohm") if ohms else (_pick(list(_tokens(text, "H", kind))), "H")
    return other, "H"


_NO_UNIT_FUSE = re.compile(r"(?<![^\W_])(?:TT|FF|[TFM])\s?(?P<number>[0-9]{1,2}[.,][0-9]{1,2})(?![^\W_])")


# the current of a holder is the most it may hold, not that of the fuse in it
_HOLDER = re.compile(r"fuse[\s-]?(?:holder|clip)|sicherungshalter|porte[\s-]?fusible|porta[\s-]?fus[i\u00ed][bv]", re.IGNORECASE)
_MARKED = re.compile(r"(?<![^\W_])(?:TT|FF|[TFM])\s?[0-9]")


def _amperes(text: str, kind: str) -> _Found | None:
    """The smallest current: the others are breaking capacity or trip current."""
    if _HOLDER.search(text) and not _MARKED.search(text):
        return None
    found = list(_tokens(text, "A", "fuse"))
    if not found:
        match = _NO_UNIT_FUSE.search(text) if kind == "fuse" else None
        return (
            None if match is None else _Found(Decimal(match["number"].replace(",", ".")), False, False, match.start(), match.end())
        )
    smallest = min(found, key=lambda one: one.value)
    if smallest.value <= 0 or (len(found) == 1 and smallest.value > 1000):
        return None
    return smallest


_DECIMAL_V = re.compile(r"(?<![0-9.,])(?P<whole>[0-9]{1,3})V(?P<part>[0-9]{1,2})(?![0-9])(?![A-Za-z]{3})")
_ZENER_TYPE = re.compile(
    r"(?<![^\W_])(?:BZ[A-Z][0-9]{2,3}-?[A-D]|MM[35]Z(?=[0-9]{1,3}V))(?P<number>[0-9]{1,3})(?![0-9]|V[0-9])", re.IGNORECASE
)
_STANDOFF_TYPE = re.compile(
    r"(?<![A-Za-z])(?:SM[ABCDF]J|SMF|5KP|SM8S)(?P<number>[0-9]{1,3}(?:\.[0-9])?)(?:C?A)?(?![^\W_])(?!\.[0-9])", re.IGNORECASE
)
_BREAKDOWN_TYPE = re.compile(r"(?<![A-Za-z])(?:P[46]KE|1\.5KE|P[46]SM[AB]|SM6T|SM15T|1\.5SMC)[0-9]", re.IGNORECASE)
_PLAIN_V = re.compile(
    r"(?<![^\W_])(?<![.\u00b1<])(?<![0-9],)(?P<number>[0-9]{1,3}(?:[.,][0-9]{1,2})?)\s?V(?P<wm>R?WM)?(?![^\W_])(?!\.[0-9])"
)


def _volts(text: str, kind: str) -> _Found | None:
    """Zener voltage, or the stand-off voltage of a suppressor (types named by breakdown voltage give None)."""
    upper = text.upper()
    plain_volts = list(_PLAIN_V.finditer(upper))
    for match in plain_volts:
        if match["wm"]:
            return _Found(Decimal(match["number"].replace(",", ".")), True, True, match.start(), match.end())
    typed = _STANDOFF_TYPE.search(text) if kind == "tvs" else _ZENER_TYPE.search(text)
    if typed is not None:
        return _Found(Decimal(typed["number"]), True, True, typed.start(), typed.end())
    if kind == "tvs" and _BREAKDOWN_TYPE.search(text):
        return None
    split = _DECIMAL_V.search(text)
    if split is not None:
        return _Found(Decimal(f"{split['whole']}.{split['part']}"), True, True, split.start(), split.end())
    if not plain_volts:
        return None
    values = [Decimal(match["number"].replace(",", ".")) for match in plain_volts]
    first = plain_volts[0]
    sure = kind == "zener" and all(value == values[0] for value in values)
    return None if values[0] == 0 else _Found(values[0], sure, True, first.start(), first.end())


# --- fields named for the quantity, values in the place of a part number ---------------------------------------------------------


def _field(unit: str) -> Callable[[str, str], Decoded | None]:
    return lambda text, kind: decode(text, kind) if _UNITS.get(kind) == unit else None


# fields of a symbol that hold its value where the value text is a part number
FIELDS: dict[str, Callable[[str, str], Decoded | None]] = {
    f"field:{name}": _field(unit)
    for unit, names in (("ohm", "R Resistance"), ("F", "C Capacitance"), ("H", "L Inductance"), ("Hz", "Freq Frequency"))
    for name in names.split()
}


def whole(text: str, kind: str) -> Decoded | None:
    """The value of a text that is nothing but a value with its unit or prefix: `100nF` in the column of part numbers."""
    decoded = decode(text, kind) if text[:1].isdigit() and not text.isdigit() else None
    return None if decoded is None or decoded.rest else decoded


# --- codes inside a maker's part number -----------------------------------------------------------------------------------------

_PART_NUMBER = re.compile(r"[A-Za-z0-9][A-Za-z0-9./+-]{5,39}")
_CAPACITOR_CODE = re.compile(r"(?:(?<=[A-Z])|(?<=^[A-Z]{2}[0-9])|(?<=^[A-Z][0-9]))([1-9][0-9][0-6])([JKMZ])(?![0-9]{0,2}\Z[0-9])")
_PACKED_OHMS = (
    re.compile(r"[A-Z]{2}[0-9]{4}[A-Z]{2,3}-(?:07|13)([0-9]{1,3}(?:\.[0-9]{1,2})?[RKM][0-9]{0,2})L\Z"),
    re.compile(r"[A-Z]{3,5}(?:0201|0402|0603|0805|1206|1210|1812|2010|2512)([0-9]{1,3}[RKM][0-9]{0,3})(?:[BDFGJ][A-Z]{2,5})?\Z"),
)
_OHM_CODE = re.compile(r"(?<=[FD])([1-9][0-9]{2}[0-6])(?![0-9])|(?<![0-9])([1-9][0-9]{2}[0-6])(?=F(?![0-9]))")
_COIL_CODE = re.compile(r"-(?P<code>[0-9]R[0-9]|R[0-9]{2}|[1-9][0-9][0-4])[KLMNY]?(?=-|\Z)")
_OHM_CODE_SHORT = re.compile(r"(?<=[A-Z]J)([1-9][0-9][0-6])(?=V\Z)")


def part_number_value(type_text: str, kind: str) -> Decoded | None:
    """The value a maker's part number spells, when exactly one reading fits; evidence for a disagreement, never a value by itself.

    A capacitor: `..104K..` in pF; with tolerance M or Z `sure` is False, since electrolytic types count the same digits in uF.
    A chip resistor: `..-0710KL`, `..0603100K`, `..F1001V`; never sure. An inductor: `..-3R3N` in uH. A zener or
    suppressor: `BZX84C6V2L`, `SMBJ24CA`.
    """
    number = type_text[: limits.CELL].strip().upper()
    if not _PART_NUMBER.fullmatch(number) or number.isdigit() or number.isalpha():
        return None
    if kind == "capacitor":
        codes = [match for match in _CAPACITOR_CODE.finditer(number) if match[1][:2] in _E24]
        if len({match[1] for match in codes}) != 1:
            return None
        return Decoded(float(_code(codes[0][1], -12)), "F", codes[0][2] in "JK", "")
    if kind == "inductor":
        coil = _COIL_CODE.search(number)
        marked = None if coil is None else _marked_inductor(coil["code"])
        return None if marked is None else Decoded(float(marked.value), "H", False, "")
    if kind in ("zener", "tvs"):
        spelled = _volts(number, kind)
        return None if spelled is None else Decoded(float(spelled.value), "V", False, "")
    if kind != "resistor":
        return None
    for pattern in _PACKED_OHMS:
        packed = pattern.match(number)
        if packed is not None:
            decoded = decode(packed[1], "resistor")
            return None if decoded is None else Decoded(decoded.value, "ohm", False, "")
    values = {Decimal(code[:3]).scaleb(int(code[3])) for code in map("".join, _OHM_CODE.findall(number)) if code not in _SIZES}
    values |= {Decimal(code[:2]).scaleb(int(code[2])) for code in _OHM_CODE_SHORT.findall(number)}
    return Decoded(float(values.pop()), "ohm", False, "") if len(values) == 1 else None
