"""Ratings out of free part text and out of rating columns.

    read("CAP CER 2200PF 400VAC Y1 RADIAL", "capacitor").ratings["voltage"]    Rating(400.0, "V", "rms", "400VAC")
    read("OPTOISO 5KV TRANS 4DIP", "optocoupler").ratings["isolation_test"]    Rating(5000.0, "V", "", "5KV")
    column("power", "1/4W")                                                    Rating(0.25, "W", "", "1/4W")

A bare high voltage at a part made to insulate is its test voltage, never a rated and never a working voltage; a working
voltage of insulation needs the word. Of several ratings the text gives, the lower is kept (a.c. before d.c.), so that a
wrong choice asks for too much, not too little. Styles of text: common practice, no source.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from decimal import Decimal

from checker import limits
from checker.identify.values import decode, plain
from checker.model.candidate import INSULATING


@dataclass(frozen=True, slots=True)
class Rating:
    """value in `unit` (V, A, W, %, degC, mm, A2s); form "rms", "dc", "peak" or ""; words: the text it was read from."""

    value: float
    unit: str
    form: str
    words: str


@dataclass(frozen=True, slots=True)
class Found:
    """ratings: by the names of `model.fact.ATTRIBUTES` after `rating:`, and `tolerance`. attributes: name -> (value, words):
    technology, dielectric, size, characteristic and breaking_class of fuses, coil_voltage of relays."""

    ratings: dict[str, Rating] = field(default_factory=dict)
    attributes: dict[str, tuple[str, str]] = field(default_factory=dict)


_PASSIVE = frozenset("resistor capacitor inductor ferrite common-mode-choke filter network potentiometer thermistor".split())
_SEMICONDUCTORS = frozenset("diode bridge bipolar mosfet igbt jfet triac thyristor".split())
_CONTACTS = frozenset("relay solid-state-relay".split())
_WITH_VOLTAGE = _PASSIVE | _SEMICONDUCTORS | frozenset("varistor fuse resettable-fuse switch connector inlet jumper".split())
_WITH_CURRENT = (_PASSIVE - {"resistor"}) | _SEMICONDUCTORS | _CONTACTS | frozenset("switch connector inlet jumper led".split())
_WITH_TOLERANCE = _PASSIVE | frozenset("varistor zener crystal".split())
# kinds whose text also names a voltage of the load or the transistor: 600 V there is no test voltage
_SWITCHING = _CONTACTS | {"optocoupler"}
# a working voltage of these is that of their input or contacts unless the text says insulation
_FED = _CONTACTS | {"isolated-module", "transformer"}
_LOWEST_TEST = 500.0  # a lower bare voltage at an insulating part is a supply or a winding
_LOWEST_TEST_SWITCHING = 1000.0
_LOWEST_LABELLED = 100.0
_LOWEST_RATED_TEST = 1500.0  # a `rated insulation voltage` from here on means the test voltage (common practice, no source)
_LOWEST_WORKING = 50.0  # `working voltage 5 V` at an isolator is its supply
_HIGHEST_COIL = 110.0

_NUMBER = r"[0-9]{1,7}(?:[.,][0-9]{1,4})?|\.[0-9]{1,4}"
_END = r"(?![^\W_])(?!\.[0-9])"
_START = r"(?<![^\W_])(?<!\.)(?<![0-9],)"
# the value before a rating may touch it: 470u25V, T2AH250V
_TOUCHING = rf"(?:{_START}|(?<=[0-9][npuA])|(?<=[0-9]{{3}}[JKM])|(?<=[0-9][npu]F)|(?<=[0-9]A[HLTF]))"
_FORM = r"rms|r\.m\.s\.|ac[\s-]?rms|ac|a\.c\.|~|dc|d\.c\.|=|\u2393|peak|pk|p"
_VOLTAGE = re.compile(
    rf"{_TOUCHING}(?P<number>{_NUMBER})(?:(?P<gap>\s{{1,2}})|)(?P<prefix>[kKm]?)W?(?P<volt>[Vv])"
    rf"(?:(?!\s(?i:dc[\s/-](?:to[\s-])?dc)(?![^\W_]))[\s(-]?(?P<form>(?i:{_FORM}))\)?)?"  # `5 kV DC-to-DC converter`
    rf"{_END}(?!\s?/\s?(?:[num]?s|[mc]?m)(?![^\W_]))(?!-[0-2](?![0-9.]))"
)
# the stand-off voltage of a suppressor: `15VWM 24.4VC`, `VRWM 33V`
_STANDOFF = re.compile(
    rf"{_START}(?P<before>{_NUMBER})\s?VR?WM(?![^\W_])|(?<![^\W_])VR?WM[\s=:]{{0,2}}(?P<after>{_NUMBER})\s?V{_END}", re.IGNORECASE
)
_SPLIT_VOLTAGE = re.compile(rf"{_START}(?P<whole>[0-9]{{1,2}})V(?P<part>[0-9]){_END}")
_CURRENT = re.compile(
    rf"{_START}(?P<number>{_NUMBER})\s{{0,2}}(?P<prefix>[mMkK]?)(?:A|Amps?|AMPS?)[\s]?(?P<form>(?i:rms|dc|ac|pk|peak)?){_END}"
)
_POWER = re.compile(
    rf"{_START}(?:1\s?/\s?(?P<share>[0-9]{{1,2}})|(?P<number>{_NUMBER}))\s{{0,2}}(?P<prefix>[mMk]?)(?:W|w|Watts?|WATTS?){_END}"
    r"(?!/(?:m|cm|K|C|mK)(?![^\W_]))(?!-[0-9]{2})"
)
_PERCENT = re.compile(
    rf"{_START}(?P<number>[0-9]{{1,3}}(?:[.,][0-9]{{1,3}})?|\.[0-9]{{1,3}})\s?%(?!\s?(?:RH|hum|duty|eff|load|derat))", re.IGNORECASE
)
_TWO_SIDED = re.compile(r"[+-]\s?(?P<one>[0-9]{1,3})\s?%?\s?[/,]?\s?[+-]\s?(?P<two>[0-9]{1,3})\s?%")
_NO_TOLERANCE_BEFORE = re.compile(
    r"(?:humidity|(?<!%)(?<!%\s)RH|eff\.?|efficiency|derat\w{0,5}|load|duty)[\s=:<>]{0,2}\Z", re.IGNORECASE
)
_DEGREES = r"(?:\s?(?:\u00b0|deg)\s?C|[oC]?C)"
_TEMPERATURE_RANGE = re.compile(
    rf"-\s?[0-9]{{1,3}}{_DEGREES}?\s?(?:~|\.{{2,3}}|to|/|-|\u2013)\s?\+?(?P<high>[0-9]{{2,3}}){_DEGREES}{_END}", re.IGNORECASE
)
_TEMPERATURE = re.compile(rf"{_START}(?<!-)(?P<high>[0-9]{{2,3}}){_DEGREES}{_END}(?!/)")
_NO_TEMPERATURE_BEFORE = re.compile(r"(?:storage|solder\w{0,4}|reflow|peak)[\s=:]{0,2}\Z", re.IGNORECASE)
_MILLIMETRES = re.compile(rf"{_START}(?P<number>[0-9]{{1,3}}(?:[.,][0-9]{{1,2}})?)\s?mm{_END}")
_DISTANCE = re.compile(
    r"(?P<creepage>creepage|kriech(?:strecke|weg)\w?)|(?P<clearance>clearance|luft(?:strecke|-)\w?)"
    r"|(?P<through_insulation>(?<![^\W_])DTI(?![^\W_])|(?:distance\s)?through\s(?:the\s)?insulation|insulation\sthickness)",
    re.IGNORECASE,
)
# the outline of a dual-in-line part as distributors write it: `4DIP 400MIL`, `4-DIP (0.300", 7.62mm)`
_ROWS = re.compile(r"(?<![0-9.])(?:0?\.(?P<inch>[346]00?)\s?(?:\"|''|in)|(?P<mil>300|400|600)\s?MIL)(?![^\W_])", re.IGNORECASE)
_DUAL_IN_LINE = re.compile(r"(?<![A-Z])(?:P|C)?DI[PL](?![A-Z])|(?<![A-Z])(?:P|C)?DI[PL](?=[-_ ]?[0-9])", re.IGNORECASE)
_GROUPED = re.compile(r"(?<![0-9.,])([1-9][0-9]{0,2}),([0-9]{3})(?=\s?V)")
_LONG_BEFORE_COMMA = re.compile(r"(?<![0-9.,])([0-9]{4,7}),")
_DATE = re.compile(r"(?<![0-9])(?:[0-9]{4}[-/.][0-9]{1,2}[-/.][0-9]{1,2}|[0-9]{1,2}[./][0-9]{1,2}[./][0-9]{4})(?![0-9])")
_PRICE = re.compile(
    r"[$\u20ac\u00a3]\s?[0-9][0-9.,]{0,9}|[0-9][0-9.,]{0,9}\s?(?:[$\u20ac\u00a3]|EUR(?![^\W_])|USD(?![^\W_])|GBP(?![^\W_]))"
)

# what a word beside a voltage makes of it
_LABEL = re.compile(
    r"(?P<none>(?<![^\W_])(?:V(?:F|GS|GE|TH|BE|EB|C|CL|CC|DD|IN|OUT|IOTM)|gate[\s-]?(?:voltage|threshold)|ansteuer\w{0,4}|transient|ESD|HBM|CDM|CMTI|surge|pulse|sat|clamp\w{0,4})(?![^\W_]))"
    r"|(?P<impulse>(?<![^\W_])(?:impulse|VIOSM)(?![^\W_]))"
    r"|(?P<viorm>(?<![^\W_])(?:VIORM|repetitive\speak(?:\s(?:isolation|insulation))?(?:\svoltage)?)(?![^\W_]))"
    r"|(?P<viowm>(?<![^\W_])(?:VIOWM|continuous\s(?:barrier|isolation|insulation)(?:\swithstand)?(?:\svoltage)?)(?![^\W_]))"
    r"|(?P<working>(?<![^\W_])working(?:\svoltage)?(?![^\W_]))"
    r"|(?P<rated>(?<![^\W_])rated\sinsulation\svoltage(?![^\W_]))"
    r"|(?P<test>(?<![^\W_])(?:iso|viso|isol|isolation|insulation(?!\sres)|withstand\w{0,3}|hi-?pot|dwv|dielectric\sstrength|test(?:ed)?)(?:\svoltage)?(?![^\W_]))"
    r"|(?P<coil>(?<![^\W_])(?:coil|spule|bobine|bobina)(?![^\W_]))",
    re.IGNORECASE,
)
_LABEL_REACH = 24
_DIGIT = re.compile("[0-9]")


@dataclass(frozen=True, slots=True)
class _Volts:
    rating: Rating
    start: int
    end: int
    labels: frozenset[str]


def read(text: str, kind: str) -> Found:
    """What free text says about a part of this kind (one of `model.candidate.KINDS`)."""
    text = plain(text)
    if "," in text:
        text = _LONG_BEFORE_COMMA.sub(r"\1, ", _GROUPED.sub(r"\1\2", text))
    if "-" in text or "/" in text or "." in text:
        text = _DATE.sub(" ", text)
    text = _PRICE.sub(" ", text)
    found = Found()
    volts = _labelled(text) if "V" in text or "v" in text else []
    amperes = _currents(text) if "A" in text else []
    if kind in INSULATING:
        _insulating(found, volts, amperes, kind)
    else:
        _ordinary(found, volts, text, kind)
    if kind in ("fuse", "resettable-fuse"):
        _fuse(found, text, kind)
    elif kind in _WITH_CURRENT and amperes:
        steady = [rating for rating, _ in amperes if rating.form != "peak"]
        if steady:
            found.ratings["current"] = steady[0] if kind in _SEMICONDUCTORS else min(steady, key=_value)
    if kind in ("diode", "bridge") and (surge := _SURGE.search(text)) is not None:
        found.ratings["surge_current"] = Rating(_float(surge["before"] or surge["after"]), "A", "peak", surge[0].strip())
    _thermal(found, text, kind)
    if kind in _WITH_TOLERANCE and "%" in text and (tolerance := _tolerance(text)) is not None:
        found.ratings["tolerance"] = tolerance
    if "mm" in text:
        found.ratings.update(_distances(text))
    _made_of(found, text, kind)
    return found


def _value(rating: Rating) -> float:
    return rating.value


def _float(number: str, power: int = 0) -> float:
    return float(Decimal(number.replace(",", ".")).scaleb(power))


def _form(written: str | None) -> str:
    letters = (written or "").lower().replace(".", "").strip()
    if letters.startswith(("rms", "ac", "~")):
        return "rms"
    return "dc" if letters in ("dc", "=", "\u2393") else "peak" if letters else ""


def _voltages(text: str) -> Iterator[tuple[Rating, int, int]]:
    for match in _VOLTAGE.finditer(text):
        start, end = match.span()
        if match["prefix"] == "m" or (match["gap"] and match["volt"] == "v"):
            continue
        before = text[max(0, start - 3) : start].rstrip()
        if before.endswith(("\u00b1", "+/-", "+-", "<")) or not match["number"].strip("0.,"):
            continue
        form = match["form"]
        if form == "=" and text[end : end + 1].isdigit():
            form = ""
        yield Rating(_float(match["number"], 3 if match["prefix"] else 0), "V", _form(form), match[0].strip()), start, end


def _labelled(text: str) -> list[_Volts]:
    """The voltages of the text, each with the sorts of words beside it. A word between two belongs to the nearer, else the next."""
    found = list(_voltages(text))
    labels: list[set[str]] = [set() for _ in found]
    for at in range(len(found) + 1):
        left = found[at - 1][2] if at else 0
        right = found[at][1] if at < len(found) else len(text)
        for match in _LABEL.finditer(text, left, right):
            sort = match.lastgroup or ""
            to_left, to_right = match.start() - left, right - match.end()
            if at < len(found) and to_right <= _LABEL_REACH and (at == 0 or to_right <= to_left):
                if not _DIGIT.search(text, match.end(), right):  # another quantity stands between
                    labels[at].add(sort)
            elif at and to_left <= _LABEL_REACH and not _DIGIT.search(text, left, match.start()):
                labels[at - 1].add(sort)
    for at in range(1, len(found)):  # `working voltage 600VRMS/849VPK`: one voltage in two forms
        if not labels[at] and text[found[at - 1][2] : found[at][1]].strip() == "/":
            labels[at] |= labels[at - 1] & {"working", "viorm", "viowm"}
    return [_Volts(rating, start, end, frozenset(sorts)) for (rating, start, end), sorts in zip(found, labels, strict=True)]


def _lowest(candidates: list[_Volts]) -> Rating | None:
    """The lowest a.c. voltage, or the lowest of all when none is a.c."""
    alternating = [one.rating for one in candidates if one.rating.form == "rms"]
    return min(alternating or [one.rating for one in candidates], key=_value, default=None)


def _insulating(found: Found, volts: list[_Volts], amperes: list[tuple[Rating, int]], kind: str) -> None:
    bare: list[_Volts] = []
    stated: list[_Volts] = []
    working: list[_Volts] = []
    for one in volts:
        value = one.rating.value
        if "none" in one.labels:
            continue
        if "impulse" in one.labels:
            found.ratings.setdefault("impulse", one.rating)
        elif "rated" in one.labels and value >= _LOWEST_RATED_TEST:
            stated.append(one)
        elif one.labels & {"viorm", "viowm", "rated"} or (
            "working" in one.labels and value >= _LOWEST_WORKING and (kind not in _FED or "test" in one.labels)
        ):
            working.append(one)
        elif "test" in one.labels and "working" not in one.labels and value >= _LOWEST_LABELLED:
            stated.append(one)
        else:
            bare.append(one)
    if working:
        lowest = min(working, key=lambda one: one.rating.value)
        rating = lowest.rating
        # VIORM is a repetitive peak voltage by definition (IEC 60747-5-5 and IEC 60747-17, from memory)
        if "viorm" in lowest.labels and not rating.form:
            rating = Rating(rating.value, "V", "peak", rating.words)
        found.ratings["isolation_working"] = rating
    after_current = {end for _, end in amperes}
    contacts = [one for one in bare if any(0 <= one.start - end <= 3 for end in after_current)] if kind in _CONTACTS else []
    least = _LOWEST_TEST_SWITCHING if kind in _SWITCHING else _LOWEST_TEST
    test = _lowest(stated) or _lowest([one for one in bare if one.rating.value >= least and one not in contacts])
    if test is not None:
        found.ratings["isolation_test"] = test
    if kind in _CONTACTS:
        _contacts(found, [one for one in bare if one.rating.value < least or one in contacts], contacts, kind)


def _contacts(found: Found, volts: list[_Volts], contacts: list[_Volts], kind: str) -> None:
    """`RELAY 12VDC 10A 250VAC`: the coil is the low voltage that does not follow a current as d.c. or a.c."""
    coil = next((one for one in volts if "coil" in one.labels), None)
    if coil is None:
        low = [one for one in volts if one.rating.form != "rms" and one.rating.value <= _HIGHEST_COIL]
        coil = next((one for one in low if one not in contacts or not one.rating.form), None)
    if coil is not None and kind == "relay":
        rating = coil.rating
        found.attributes["coil_voltage"] = (f"{rating.value:g} V {rating.form}".strip(), rating.words)
    switched = [
        one for one in volts if one is not coil and (one.rating.form == "rms" or one.rating.value >= 100 or one in contacts)
    ]
    if (voltage := _lowest(switched)) is not None:
        found.ratings["voltage"] = voltage


def _ordinary(found: Found, volts: list[_Volts], text: str, kind: str) -> None:
    rated: list[_Volts] = []
    tests: list[_Volts] = []
    for one in volts:
        if "none" in one.labels:
            continue
        if "impulse" in one.labels:
            found.ratings.setdefault("impulse", one.rating)
        elif one.labels & {"test", "viorm", "viowm"} and "working" not in one.labels:
            if one.rating.value >= _LOWEST_LABELLED:
                tests.append(one)
        else:
            rated.append(one)
    if (test := _lowest(tests)) is not None:
        found.ratings["isolation_test"] = test
    if kind == "tvs" and (standoff := _STANDOFF.search(text)) is not None:
        found.ratings["voltage"] = Rating(_float(standoff["before"] or standoff["after"]), "V", "dc", standoff[0].strip())
    if kind == "regulator" and (entry := _input(text)) is not None:
        found.ratings["voltage"] = entry
    if kind not in _WITH_VOLTAGE:
        return
    if kind == "fuse":  # the voltage of a breaking capacity is not the rated one where another stands beside it
        rated = [one for one in rated if not _BREAKS_BEFORE.search(text[max(0, one.start - 12) : one.start])] or rated
    voltage = rated[0].rating if kind in _SEMICONDUCTORS and rated else _lowest(rated)
    if voltage is None and kind == "capacitor" and (split := _SPLIT_VOLTAGE.search(text)) is not None:
        voltage = Rating(float(f"{split['whole']}.{split['part']}"), "V", "", split[0])
    if voltage is not None:
        found.ratings["voltage"] = voltage


# the highest voltage a regulator may be fed with: `4.5 to 28V input`, `VIN 4.5-36 V`, `up to 36 V input`; at a step-down
# regulator also a voltage above the usual outputs, since texts name that of the input
_SPAN = r"(?:(?<=[0-9])\s?V?\s?(?:to|-|~|\u2013|\.{2,3})\s?|up\sto\s|bis\s|max\.?\s)"
_INPUT = re.compile(
    rf"{_SPAN}(?P<before>{_NUMBER})\s?V(?:DC)?\s(?:max\.?\s)?(?:input|in)(?![^\W_])"
    rf"|(?<![^\W_])(?:VIN|input|eingang(?:sspannung)?)(?:\s(?:voltage|range)){{0,2}}[\s:=]{{0,2}}(?:{_NUMBER})?{_SPAN}(?P<after>{_NUMBER})\s?V{_END}",
    re.IGNORECASE,
)
_STEP_DOWN = re.compile(r"(?<![^\W_])(?:buck(?![\s/-]?boost)|step[\s-]?down)(?![^\W_])", re.IGNORECASE)
_ABOVE_OUTPUTS = 28.0  # V (common practice, no source)


def _input(text: str) -> Rating | None:
    match = _INPUT.search(text)
    if match is not None:
        return Rating(_float(match["before"] or match["after"]), "V", "", match[0].strip())
    if not _STEP_DOWN.search(text):
        return None
    return next((rating for rating, _, _ in _voltages(text) if _ABOVE_OUTPUTS <= rating.value < 1000), None)


# the peak of one half wave that a rectifier stands: `IFSM 60A`, `30A surge`
_SURGE = re.compile(
    rf"(?<![^\W_])IFSM[\s=:]{{0,2}}(?P<after>{_NUMBER})\s?A{_END}|{_START}(?P<before>{_NUMBER})\s?A\s?(?:IFSM|surge)(?![^\W_])(?![\s=:]{{0,2}}[0-9])",
    re.IGNORECASE,
)
_NOT_STEADY_BEFORE = re.compile(r"(?:IFSM|ITSM|IDM|ICM|IR|surge|peak|pulsed?|leakage|trip|@)[\s=:<]{0,2}\Z", re.IGNORECASE)
_NOT_STEADY_AFTER = re.compile(r"\s?(?:surge|peak|pulse|trip|leak)", re.IGNORECASE)


def _currents(text: str) -> list[tuple[Rating, int]]:
    """Steady and peak currents with the place where each ends; leakage, surge and trip currents left out."""
    found = []
    for match in _CURRENT.finditer(text):
        start, end = match.span()
        if _NOT_STEADY_BEFORE.search(text[max(0, start - 12) : start]) or _NOT_STEADY_AFTER.match(text, end):
            continue
        power = {"": 0, "k": 3, "K": 3}.get(match["prefix"], -3)
        if match["number"].strip("0.,"):
            found.append((Rating(_float(match["number"], power), "A", _form(match["form"]), match[0].strip()), end))
    return found


_CHARACTERISTIC = re.compile(
    r"(?<![^\W_])(?P<before>TT|FF|[TFM])\s?(?=[0-9.][0-9.,]{0,5}\s?m?A)|[0-9]\s?m?A(?P<after>TT|FF|[TFM])(?=[HL]?(?:[0-9]|(?![^\W_])))"
    r"|(?<![^\W_])(?P<alone>TT|FF|[TFM])(?![^\W_])"
)
_BREAKS_BEFORE = re.compile(r"[0-9]\s?k?A\s?@\s?\Z", re.IGNORECASE)
_SPEEDS = (
    ("FF", re.compile(r"(?:very|super|ultra)[\s-]?(?:fast|quick)", re.IGNORECASE)),
    ("T", re.compile(r"(?<![^\W_])(?:slow|time[\s-]?(?:lag|delay)|tr\u00e4ge)", re.IGNORECASE)),
    ("F", re.compile(r"(?<![^\W_])(?:fast|quick|flink)", re.IGNORECASE)),
    ("M", re.compile(r"(?<![^\W_])medium", re.IGNORECASE)),
)
_BREAKING_CLASS = re.compile(
    r"[0-9]\s?m?A(?:TT|FF|[TFM])?(?P<joined>[HLE])(?=[0-9]|(?![^\W_]))|(?<![^\W_])(?P<alone>[HL])(?![^\W_])"
    r"|(?<![^\W_])(?P<high>HBC|HRC|high\sbreaking)|(?<![^\W_])(?P<low>LBC|low\sbreaking)"
)
_CERAMIC_TUBE = re.compile(r"ceramic|keramik|sand[\s-]?filled", re.IGNORECASE)
_TUBE = re.compile(r"(?<![0-9.])(?:5\s?x\s?20|6[.,]3\d?\s?x\s?32)(?![0-9])", re.IGNORECASE)  # mm; the bodies of IEC 60127-2
# what a fuse of IEC 60127 bears: T2AH250V, `T 3.15A L 250V`
_FUSE_MARKING = re.compile(
    r"(?<![^\W_])(?:TT|FF|[TFM])\s?(?P<number>[0-9]{1,2}(?:[.,][0-9]{1,3})?|[0-9]{2,3}(?=\s?m))\s?(?P<prefix>m?)A\s?(?P<letter>[HLE])"
    r"\s?(?P<volts>[0-9]{2,3})(?:\s?V(?:AC)?)?(?![^\W_])"
)
_BREAKS_AT = re.compile(r"(?P<number>[0-9]{1,5}(?:[.,][0-9])?)\s?(?P<prefix>k?)A\s?@\s?(?P<volts>[0-9]{2,4})\s?V", re.IGNORECASE)
_BREAKING_LEAST = 35.0  # IEC 60127-2: the low breaking class is 35 A or 10 x rated, whichever is greater (from memory)
_BREAKING_ALONE = 100.0


def _fuse(found: Found, text: str, kind: str) -> None:
    decoded = decode(text, kind)
    rated = decoded.value if decoded is not None else 0.0
    all_currents = [rating for rating, _ in _currents(text)]
    if decoded is not None and not (rated >= _BREAKING_ALONE and all_currents and len(all_currents) == 1 and kind == "fuse"):
        words = next((rating.words for rating in all_currents if rating.value == rated), text)
        found.ratings["current"] = Rating(rated, "A", "", words)
    else:
        rated = 0.0
    if kind != "fuse":
        return
    marking = _FUSE_MARKING.search(text)
    if marking is not None:
        amperes, volts = _float(marking["number"], -3 if marking["prefix"] else 0), float(marking["volts"])
        found.ratings.setdefault("current", Rating(amperes, "A", "", marking[0]))
        found.ratings.setdefault("voltage", Rating(volts, "V", "", marking[0]))
    at = max(_BREAKS_AT.finditer(text), key=lambda match: int(match["volts"]), default=None)
    breaking = max(all_currents, key=_value, default=None)
    if at is not None:  # `10kA@125VAC, 100A@250VAC`: the one at the higher voltage; below the rated voltage it says nothing
        below = "voltage" in found.ratings and float(at["volts"]) < found.ratings["voltage"].value
        breaking = None if below else Rating(_float(at["number"], 3 if at["prefix"] else 0), "A", "", at[0])
    if breaking is not None and breaking.value >= max(_BREAKING_LEAST, 5 * rated, 0.0 if rated else _BREAKING_ALONE):
        found.ratings["breaking_capacity"] = breaking
    letter = _CHARACTERISTIC.search(text)
    if letter is not None:
        found.attributes["characteristic"] = (letter[letter.lastgroup or 0], letter[0].strip())
    else:
        for name, pattern in _SPEEDS:
            if (word := pattern.search(text)) is not None:
                found.attributes["characteristic"] = (name, word[0])
                break
    breaks = _BREAKING_CLASS.search(text)
    if breaks is not None:
        name = breaks["joined"] or breaks["alone"] or ("H" if breaks["high"] else "L")
        found.attributes["breaking_class"] = (name, breaks[0])
    elif (body := _CERAMIC_TUBE.search(text)) is not None and (tube := _TUBE.search(text)) is not None:
        # a ceramic body of that size is of the high breaking sheets of IEC 60127-2 (from memory)
        found.attributes["breaking_class"] = ("H", f"{body[0]} {tube[0]}")


# converter modules bear their power in the type: `F0505S-2WR2`
_MODULE_POWER = re.compile(r"(?<=[A-Z]-)(?P<number>[0-9]{1,2})W(?=R[0-9])")
HOTTEST = 300  # degC; a larger figure before a C is a type number, such as 817C


def _thermal(found: Found, text: str, kind: str) -> None:
    """Power and highest temperature. The power of a suppressor is that of a pulse, not a rating to run at."""
    if kind != "tvs":
        powers = [_power(match) for match in _POWER.finditer(text)]
        if kind == "isolated-module" and not powers and (typed := _MODULE_POWER.search(text)) is not None:
            powers = [Rating(float(typed["number"]), "W", "", typed[0])]
        if powers:
            found.ratings["power"] = min(powers, key=_value)
    if "C" not in text and "c" not in text:
        return
    spans = [match for match in _TEMPERATURE_RANGE.finditer(text) if not _NO_TEMPERATURE_BEFORE.search(text, 0, match.start())]
    if not spans:
        spans = [
            match
            for match in _TEMPERATURE.finditer(text)
            if 60 <= int(match["high"]) <= HOTTEST
            and not _NO_TEMPERATURE_BEFORE.search(text[max(0, match.start() - 14) : match.start()])
        ]
    if spans:
        lowest = min(spans, key=lambda match: int(match["high"]))
        found.ratings["temperature"] = Rating(float(lowest["high"]), "degC", "", lowest[0].strip())


def _power(match: re.Match[str]) -> Rating:
    power = {"": 0, "k": 3}.get(match["prefix"], -3)  # 500MW in capitals is milliwatt
    value = float(1 / Decimal(match["share"])) if match["share"] and int(match["share"]) else _float(match["number"] or "0", power)
    return Rating(value, "W", "", match[0].strip())


def _tolerance(text: str) -> Rating | None:
    two = _TWO_SIDED.search(text)
    if two is not None:
        return Rating(float(max(int(two["one"]), int(two["two"]))), "%", "", two[0])
    for match in _PERCENT.finditer(text):
        value = _float(match["number"])
        if 0 < value <= 100 and not _NO_TOLERANCE_BEFORE.search(text[max(0, match.start() - 14) : match.start()]):
            return Rating(value, "%", "", match[0])
    return None


def _distances(text: str) -> dict[str, Rating]:
    """Creepage, clearance and distance through insulation, only where the word stands before or behind the length."""
    found: dict[str, Rating] = {}
    lengths = list(_MILLIMETRES.finditer(text))
    # `creepage 8 mm, clearance 7 mm` or `8 mm creepage, 7 mm clearance`: one order through the whole text
    leads = bool(lengths) and _DISTANCE.search(text, 0, lengths[0].start()) is not None
    for at, match in enumerate(lengths):
        if leads:
            left = lengths[at - 1].end() if at else 0
            words = _DISTANCE.finditer(text, max(left, match.start() - 30), match.start())
        else:
            right = lengths[at + 1].start() if at + 1 < len(lengths) else len(text)
            words = _DISTANCE.finditer(text, match.end(), min(right, match.end() + 24))
        value = _float(match["number"])
        for name in (word.lastgroup or "" for word in words):
            kept = found.get(name)
            if kept is None or value < kept.value:
                found[name] = Rating(value, "mm", "", match[0])
    return found


# --- what it is made of -----------------------------------------------------------------------------------------------------

_CAPACITOR_WORDS = {
    **dict.fromkeys(("ceramic", "cer", "mlcc", "keramik", "kerko"), "ceramic"),
    **dict.fromkeys(
        ("film", "mkp", "mkt", "mks", "mpp", "fkp", "polypropylene", "polyester", "folie", "metallized", "metallised"), "film"
    ),
    **dict.fromkeys(("electrolytic", "elko", "elec", "aluminium", "aluminum", "alu", "alum"), "aluminium"),
    **dict.fromkeys(("tantalum", "tant", "tantal"), "tantalum"),
    "polymer": "polymer",
    "mica": "mica",
}
_WORD = re.compile(r"(?<![^\W_])[A-Za-z]{3,13}(?![^\W_])")
_RESISTOR_WORDS = re.compile(
    r"(?<![^\W_])(?:(?P<thick>thick[\s-]?film)|(?P<thin>thin[\s-]?film)|(?P<metal>metal[\s-]?film)|(?P<wire>wire[\s-]?wound)|(?P<carbon>carbon))",
    re.IGNORECASE,
)
_RESISTOR_NAMES = {"thick": "thick-film", "thin": "thin-film", "metal": "metal-film", "wire": "wirewound", "carbon": "carbon"}
# EIA class 2 and 3 letters: temperature low, temperature high, change (from memory); C0G is class 1
_DIELECTRIC = re.compile(r"(?<![^\W_])(?:[XYZ][4-9][FPRSTUVW]|[CN][0OP][0OG]|U2J)(?![^\W_])", re.IGNORECASE)
_C0G = frozenset({"C0G", "COG", "NP0", "NPO"})
_SIZE = re.compile(
    r"(?<![^\W_])(?:(?:RES|CAP|LED|IND|SMD|FB|[RCLDF])[_-]?|)"
    r"(?P<size>0201|0402|0603|0805|1206|1210|1218|1808|1812|1825|2010|2220|2225|2512)"
    r"(?![^\W_])(?![.,][0-9])(?!\s?(?:metric|[kKMRVAWFH%\u03a9]|ohm|[munp][FHVA])(?![^\W_]))",
    re.IGNORECASE,
)


def _made_of(found: Found, text: str, kind: str) -> None:
    if kind == "capacitor":
        named = [
            (_CAPACITOR_WORDS[word[0].lower()], word[0]) for word in _WORD.finditer(text) if word[0].lower() in _CAPACITOR_WORDS
        ]
        dielectric = next(
            (match[0] for match in _DIELECTRIC.finditer(text) if match[0].upper() in _C0G or match[0][0] not in "cnCN"), ""
        )
        if dielectric:
            name = dielectric.upper()
            found.attributes["dielectric"] = ("C0G" if name in _C0G else name, dielectric)
            named.append(("ceramic", dielectric))
        if named:
            # `aluminium polymer` is a polymer capacitor
            found.attributes["technology"] = next((one for one in named if one[0] == "polymer"), named[0])
    elif kind in ("resistor", "network", "potentiometer"):
        word = _RESISTOR_WORDS.search(text)
        if word is not None:
            found.attributes["technology"] = (_RESISTOR_NAMES[word.lastgroup or ""], word[0])
    if kind in INSULATING and (rows := _ROWS.search(text)) is not None and _DUAL_IN_LINE.search(text):
        millimetres = int((rows["mil"] or rows["inch"])[0]) * 2.54
        found.attributes["row_span"] = (f"{millimetres:g} mm", rows[0])
    if kind not in INSULATING:
        sizes = list(_SIZE.finditer(text))
        if sizes and len({match["size"] for match in sizes}) == 1:
            found.attributes["size"] = (sizes[0]["size"], sizes[0][0])


# --- one cell of a rating column ----------------------------------------------------------------------------------------------

_NATURAL = {
    **dict.fromkeys(("voltage", "isolation_working", "isolation_test", "impulse"), "V"),
    **dict.fromkeys(("current", "breaking_capacity", "surge_current"), "A"),
    **dict.fromkeys(("clearance", "creepage", "through_insulation"), "mm"),
    "power": "W",
    "temperature": "degC",
    "melting_integral": "A2s",
    "tolerance": "%",
}
_CELL_UNITS = {
    "V": {"": 0, "v": 0, "kv": 3, "mv": -3, "wv": 0},
    "A": {"": 0, "a": 0, "ma": -3, "ka": 3, "ua": -6},
    "W": {"": 0, "w": 0, "mw": -3, "kw": 3, "watt": 0, "watts": 0},
    "degC": {"": 0, "c": 0, "\u00b0c": 0, "degc": 0, "\u00b0": 0},
    "mm": {"": 0, "mm": 0, "um": -3, "cm": 1},
    "A2s": {"": 0, "a2s": 0, "a\u00b2s": 0, "a^2s": 0},
    "%": {"": 0, "%": 0},
}
_CELL = re.compile(
    r"(?:\u00b1|\+/?-|\+|>=?|\u2265|min\.?|max\.?|\u2264|<=)?\s{0,2}(?:(?P<one>[0-9])\s?/\s?(?P<share>[0-9]{1,2})|"
    r"(?P<number>[0-9]{1,9}(?:[.,][0-9]{1,6})?|\.[0-9]{1,6}))\s{0,2}"
    rf"(?P<unit>[A-Za-z\u00b0%^\u00b2]{{0,6}}?[0-9]?s?)[\s(]{{0,2}}(?P<form>{_FORM})?\)?(?:\s?(?:min|max)\.?)?",
    re.IGNORECASE,
)
_RANGE = re.compile(r"(?:\.{2,3}|~(?=\s?[+-]?[0-9])|\u2026|\sto\s|\u2013|(?<=[0-9CcVvA\u00b0])\s?-\s?(?=\+?[0-9]))", re.IGNORECASE)
_DURATION = re.compile(r"\s?(?:/|,|@|for|\()?\s?(?:1|60)\s?(?:min(?:ute)?|s(?:ec(?:ond)?)?)s?\.?\)?\s*\Z", re.IGNORECASE)
_TOLERANCE_LETTERS = {"B": 0.1, "C": 0.25, "D": 0.5, "F": 1.0, "G": 2.0, "J": 5.0, "K": 10.0, "M": 20.0}  # IEC 60062, from memory
# a range of these says up to where the part may be used; a range of a distance or a test voltage does not say what is kept
_UP_TO = frozenset({"temperature", "voltage"})


def column(name: str, text: str) -> Rating | None:
    """The rating in a cell of the column `name` (or `rating:<name>`), a bare number in the natural unit; None if unreadable."""
    name = name.removeprefix("rating:")
    unit = _NATURAL.get(name)
    words = text[: limits.CELL].strip()
    cell = plain(words).strip()
    if unit is None or not cell:
        return None
    if unit == "%" and cell.upper() in _TOLERANCE_LETTERS:
        return Rating(_TOLERANCE_LETTERS[cell.upper()], "%", "", words)
    if name in ("isolation_test", "isolation_working"):
        cell = _DURATION.sub("", cell)
    if unit == "V":
        cell = _GROUPED.sub(r"\1\2", cell)
    ends = _RANGE.split(cell)
    if len(ends) > 2 or (len(ends) == 2 and name not in _UP_TO):
        return None
    rating = _cell(ends[-1].strip(), unit, words)
    if len(ends) == 2 and _cell(ends[0].strip().removeprefix("-"), unit, words) is None:
        return None
    return rating


def _cell(cell: str, unit: str, words: str) -> Rating | None:
    match = _CELL.fullmatch(cell)
    if match is None or (cell[:1] in "<\u2264" and unit == "mm"):
        return None
    written = match["unit"].lower()
    power = _CELL_UNITS[unit].get(written)
    if power is None or (match["form"] and unit not in ("V", "A")):
        return None
    number = match["number"]
    if match["share"]:
        if not int(match["share"]):
            return None
        value = float(Decimal(match["one"]).scaleb(power) / Decimal(match["share"]))
    elif "," in number and len(number.partition(",")[2]) == 3 and not number.startswith("0,"):
        return None  # 8,000 may be eight or eight thousand
    else:
        value = _float(number, power)
    return Rating(value, unit, _form(match["form"]), words)
