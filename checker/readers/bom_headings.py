"""What column headings and field names mean, and what a cell or a value says about being fitted.

One alias table for BOM columns and for the fields of a schematic, since people use the same names in both.
"""

from __future__ import annotations

import re
import unicodedata
from functools import lru_cache

from checker import limits

_ALIASES = {
    "ref": "ref refs reference references refdes refdesignator refname designator designators referencedesignator "
    "referencedesignators schematicreference componentreference partreference referenz referenzen "
    "bauteil bauteile bauteilbezeichner bezeichner repère repères repere reperes rep",
    "row": "item itemno id index row rowno sno lineno line lineitem pos posno no",
    "quantity": "qty qnty quantity quantityperpcb quantityperboard qtyboard qtyperboard qtyperpcb qtypcb qtypcs count orderqty "
    "anzahl menge stk stück stückzahl amount pcs quantité qté",
    "value": "value val values comment designation displayvalue descriptionvalue name partname componentvalue wert "
    "valeur capacitance kapazität capacité resistance widerstand résistance inductance induktivität",
    "footprint": "footprint package packagecase case casepackage pcbfootprint pattern packagetype footprintname landpattern "
    "gehäuse bauform boîtier boitier",
    "type": "mpn manufacturerpartno manufacturerpart manufacturerpn manufacturerno manufacturingpartno manufacturerpartid "
    "manufacturertype manufacturertypeno mfrpart mfrpartno mfrpn mfrno mfgpart mfgpartno mfgpn mfgno manfpart manfpartno manfpn "
    "manfno manpn manpartno manufacturercode makerpartno makerpart originalmpn typeno pn partno part# partcode type parttype "
    "herstellernummer herstellerno herstellernr herstellerteilenummer typ référencefabricant referencefabricant",
    "maker": "manufacturer manufacturername mfr mfrname mfg mfgname manf manfname maker make vendor hersteller brand fabricant",
    "distributor": "lcsc lcscpart lcscpartno lcscpartnooptional lcscstockcode jlcpcbpart jlcpcbpartno "
    "mouser mouserpartno mouserno mouserpn "
    "digikey digikeypn digikeypartno digikeyno farnell farnellno newark newarkno rs rsno tme spn "
    "supplierpart supplierpartno "
    "supplierandref supplierpn supplierno distributorpn distributorpartno distributorpart distributorno orderno ordercode "
    "catno catalogno vendorpartno vendorpn vendorno stockcode sku bestellnummer bestellnr artikelnummer artikelnr farnellordercode "
    "farnellpartno newarkpartno rspartno rsstockno tmepartno arrowpartno",
    "description": "description desc partdescription kidescription details longdescription rating ratings part parts component "
    "components specification specifications spec specs bezeichnung beschreibung bemerkung bemerkungen text produktbezeichnung "
    "désignation remarque remarques note notes remark remarks anmerkung anmerkungen",
    "datasheet": "datasheet datasheeturl datasheetlink datenblatt",
    "kind": "kind",
    "mark": "class safetyclass safetyapproval safetyapprovals approval approvals mark marks standard standards certification "
    "certifications safetystandard safetymark klasse sicherheitsklasse",
    "windings": "windings winding",
    "turns": "turns turn windingturns",
    "rating:voltage": "voltage ratedvoltage ratedv vrated vrating voltagerating voltagerated workingvoltage "
    "capratedvoltage maxvoltage nominalvoltage dcvoltage acvoltage spannung nennspannung bemessungsspannung "
    "tension tensionnominale tensionassignée",
    "rating:current": "current ratedcurrent rateda irated currentrating maxcurrent nominalcurrent strom nennstrom courant "
    "courantnominal",
    "rating:power": "power ratedpower ratedw prated powerrating maxpower wattage powerdissipation leistung puissance",
    "rating:temperature": "temperature operatingtemperature temperaturerating temperaturerange maxtemperature tempmax "
    "ratedtemperature",
    "rating:isolation_working": "isolationworkingvoltage workingisolationvoltage insulationworkingvoltage viorm viowm "
    "maxworkinginsulationvoltage workinginsulationvoltage isolationworking",
    "rating:isolation_test": "isolationvoltage insulationvoltage testvoltage isolationtestvoltage insulationtestvoltage viso "
    "withstandvoltage isolationtest hipot dielectricwithstandvoltage",
    "rating:impulse": "impulse impulsevoltage impulsewithstand impulsewithstandvoltage",
    "rating:clearance": "clearance externalclearance airgap luftstrecke",
    "rating:creepage": "creepage externalcreepage creepagedistance kriechstrecke",
    "rating:through_insulation": "distancethroughinsulation dti throughinsulation insulationthickness internalclearance",
    "rating:breaking_capacity": "breakingcapacity ratedbreakingcapacity breakingcurrent interruptrating interruptingrating "
    "interruptingcapacity schaltvermögen ausschaltvermögen abschaltvermögen bemessungsschaltvermögen pouvoirdecoupure",
    "rating:melting_integral": "i2t meltingintegral meltingi2t schmelzintegral",
    "rating:surge_current": "surgecurrent ifsm peaksurgecurrent maxsurgecurrent forwardsurgecurrent peakforwardsurgecurrent "
    "nonrepetitivesurgecurrent nonrepetitivepeakforwardsurgecurrent surgecurrentifsm stossstrom",
    "tolerance": "tolerance tol toleranz tolérance",
    "technology": "technology dielectric dielectrictype tech dielektrikum",
    "material_group": "materialgroup cti comparativetrackingindex",
    "fitted+": "fit fitted place placed placeyesno populate populated populateyesno mount mounted assemble assembled assembly "
    "jlcassembly install installed stuff stuffed load loaded fityesno fittedyesno mountyesno "
    "bestückt bestückung bestücken bestueckt bestueckung montiert monté montée",
    "fitted-": "dnp dni dnf dnm donotplace donotpopulate donotfit donotinstall donotmount donotstuff donotassemble nofit notfitted "
    "notpopulated notplaced notmounted notinstalled notassembled nopop nostuff unpopulated dnpyesno noload notloaded "
    "nichtbestückt nichtbestueckt nonmonté",
}
_MEANING = {alias.replace("#", "no"): name for name, aliases in _ALIASES.items() for alias in aliases.split()}

# Headings that hold references in one file and something else in the next; the cells decide.
_PERHAPS = (
    "part parts component components location locations position positions designation customerreference pos id item bauteil "
    "bauteile référence références"
)
_PERHAPS_REFERENCES = frozenset(_PERHAPS.split())
# Headings that mean `attribute` only while no plainer heading of that attribute stands beside them -> what they are then.
_WEAK: dict[str, str | None] = {
    **dict.fromkeys(("comment", "designation", "displayvalue", "descriptionvalue", "name", "partname", "values"), "description"),
    **dict.fromkeys(("capacitance", "kapazität", "capacité", "inductance", "induktivität"), "description"),
    **dict.fromkeys(("resistance", "widerstand", "résistance"), "description"),
    **dict.fromkeys(("pn", "partno", "partcode", "type", "parttype", "typ", "typeno"), None),
    **dict.fromkeys(("vendor", "brand", "make"), None),
}
_ALTERNATE = ("alternate", "alternative", "alt", "secondsource", "2ndsource", "second")

_UNITS = (
    "V kV mV Vac Vdc VAC VDC Vrms Vpk Vp VRMS A mA uA kA W mW kW F mF uF nF pF H mH uH nH ohm Ohm Ohms ohms kohm kOhm Mohm MOhm "
    "Ω kΩ MΩ mΩ mm cm um mil °C degC C % ppm Hz kHz MHz A2s A²s"
)
_UNIT_TEXTS = frozenset(unicodedata.normalize("NFKC", unit) for unit in _UNITS.split())
_UNIT_FORMS = frozenset({"", "rms", "peak", "pk", "dc", "ac", "d.c.", "a.c.", "r.m.s.", "max", "min"})
_UNSAID = dict.fromkeys(("resistance", "widerstand", "résistance"), "ohm")  # headings whose bare numbers can only be of one unit
_BRACKETED = re.compile(r"[(\[{]([^()\[\]{}]{1,16})[)\]}]\s*\Z")
_SEPARATED = re.compile(r"(?:\s+in|,|/)\s+(\S{1,8})\s*\Z")
# `Kapazität nF`, `Voltage_V`: only behind a heading of a figure
_BEHIND = re.compile(r"[\s_]+(\S{1,8}(?: (?:rms|ac|dc|peak|pk))?)\s*\Z", re.IGNORECASE)
_DROPPED = re.compile(r"[\s:()\[\]{}*_\-./\\&'\"?!]+")

_EMPTY = frozenset({"", "nan", "any", "~", "-", "--", "–", "—", "n/a", "n.a.", "na", "#n/a", "none", "null", "nil", "tbd", "?"})
_VERBS = ("place", "populate", "fit", "install", "mount", "stuff", "assemble", "load", "solder")
_DONE = ("placed", "populated", "fitted", "installed", "mounted", "stuffed", "assembled", "loaded", "soldered")
_ABSENT = frozenset(
    {"dnp", "dni", "dnf", "dnm", "dns", "nofit", "nopop", "nostuff", "noload", "noplace", "nomount", "unpopulated", "unfitted"}
    | {"nichtbestückt", "nichtbestueckt", "nichtbestücken", "unbestückt", "nichtmontiert", "entfällt", "entfaellt"}
    | {"nonmonté", "nonmontée", "nepasmonter", "noncâblé", "nonmontato", "nonmontare", "nomontar"}
    | {"donotuse", "omit", "omitted"}
    | {f"donot{verb}" for verb in _VERBS}
    | {f"dont{verb}" for verb in _VERBS}
    | {f"not{done}" for done in _DONE}
)
# what such a phrase begins with, brackets and stars around it included: spares the full look at most cells of a long table
_ABSENT_STARTS = frozenset("dDnNuUoOeE([*_-.' ")
_PRESENT = frozenset({*_VERBS, *_DONE, "fit", "all", "bestückt", "always"})
_YES = frozenset({"yes", "y", "x", "1", "1.0", "true", "t", "on", "ja", "oui", "si", "✓", "✔", "☑", "✗", "✘", "×"})
_NO = frozenset({"no", "n", "0", "0.0", "false", "f", "off", "nein", "non", "☐"})
_CROSSES = frozenset({"✗", "✘", "×"})
_WEAK_ABSENT = frozenset({"np", "nf", "nm"})
_ABSENT_IN_COLUMN = _WEAK_ABSENT | {"nc", "nb", "ns", "nl"}  # as a value these say nothing or something else
_NOT_ASSEMBLED = re.compile(r"(?:na|ns|dnp|dni)\s*\(.*\)\Z|na\s*/\s*[a-z0-9].*\Z", re.DOTALL)
_TAIL = re.compile(r"[(\[,;:\n]")
_WORDS = re.compile(r"[\s/,;:()\[\]{}|_+*!<>]+")


@lru_cache(maxsize=4096)
def heading_key(heading: str) -> str:
    """The heading without its unit, case, punctuation and blanks; `#` and `number` read as `no`, so `MFG#` is not `MFG`."""
    text = unicodedata.normalize("NFKC", heading).strip()
    found = _unit(text)
    return _key(text[: found[1]] if found else text)


def _key(text: str) -> str:
    return _DROPPED.sub("", text.casefold().replace("#", "no").replace("number", "no").replace("²", "2"))


@lru_cache(maxsize=4096)
def attribute(heading: str) -> str | None:
    """The meaning of a heading: a name of `model.fact.ATTRIBUTES`, `ref`, `row`, `fitted+`, `fitted-`, or None.

    `fitted+`: a true cell means fitted; `fitted-`: a true cell means absent. Headings that are only perhaps
    references (see `perhaps_references`) give what they mean when they are not.
    """
    key = heading_key(heading)
    if key in _MEANING:
        return _MEANING[key]
    plain = key.rstrip("0123456789")
    for prefix in _ALTERNATE:
        if plain.startswith(prefix) and _MEANING.get(plain[len(prefix) :]) in ("type", "maker", "distributor"):
            return _MEANING[plain[len(prefix) :]]
    return _MEANING.get(plain) if plain else None


def perhaps_references(heading: str) -> bool:
    """Whether the column holds references in some files and something else in others, such as `Part`."""
    return heading_key(heading) in _PERHAPS_REFERENCES


def is_weak(heading: str) -> bool:
    """Whether the heading gives way when a plainer heading of the same attribute stands in the table."""
    return heading_key(heading).rstrip("0123456789") in _WEAK


def weak_meaning(heading: str) -> str | None:
    """What a weak heading means beside a plainer one: `Comment` beside `Value` is a description; None: nothing of its own."""
    return _WEAK.get(heading_key(heading).rstrip("0123456789"))


@lru_cache(maxsize=4096)
def unit_in(heading: str) -> str:
    """The unit a heading carries (`Voltage (V)`, `Value [nF]`, `Power / W`), "" when it carries none."""
    text = unicodedata.normalize("NFKC", heading).strip()
    found = _unit(text)
    return found[0] if found else _UNSAID.get(_key(text), "")


def _unit(text: str) -> tuple[str, int] | None:
    """The unit at the end of a heading and where it begins."""
    match = _BRACKETED.search(text) or _SEPARATED.search(text)
    if match is None and (match := _BEHIND.search(text)) is not None:
        meaning = _MEANING.get(_key(text[: match.start()]), "")
        if not (meaning.startswith("rating:") or (meaning in ("value", "tolerance") and (len(match[1]) > 1 or match[1] in "Ω%"))):
            return None
    if match is None or match.start() == 0:
        return None
    unit, _, form = match[1].strip().partition(" ")
    unit = unit.replace("μ", "u")  # NFKC has made one letter of the two micro signs
    if unit not in _UNIT_TEXTS or form.strip().casefold() not in _UNIT_FORMS:
        return None
    unit = {"C": "degC", "°C": "degC"}.get(unit, unit)
    return (f"{unit} {form.strip()}" if form else unit), match.start()


def is_empty(text: str) -> bool:
    """Whether a cell only says that there is nothing to say: blank, `nan`, `any`, `~`, `-`, `n/a`, `nan, nan`."""
    text = text.strip().casefold()
    return text in _EMPTY or ("," in text and all(part.strip() in _EMPTY for part in text.split(",")))


def not_fitted_phrase(text: str) -> bool:
    """Whether the whole text is an unmistakable phrase for a part left out: `DNP`, `do not place`, `not fitted`."""
    return text[:1] in _ABSENT_STARTS and len(text) <= 40 and _phrase(text) in _ABSENT


def fitted(column: str, text: str) -> bool | None:
    """Whether a cell or field says the part is fitted; None when it does not tell.

    column: a heading, or `fitted+` / `fitted-`. Its polarity decides first: `no` under `Fit` is absent, `no` under
    `DNP` is fitted. A column without polarity is believed only for plain phrases such as `DNP` or `not fitted`.
    """
    polarity = column if column in ("fitted+", "fitted-") else attribute(column)
    if is_empty(text):
        if polarity == "fitted+" and text.strip().casefold() == "none":  # in no variant
            return False
        return True if polarity == "fitted-" else None
    label, _, rest = text[: limits.CELL].rpartition(":")
    if rest.strip() and attribute(label) in ("fitted+", "fitted-"):  # `fit: none` in a field, whatever the field is called
        return fitted(label, rest)
    whole = _said(polarity, text)
    if whole is not None:
        return whole
    words = [word for word in re.split(r"[,;:/|]", text) if not is_empty(word)]
    answers = {_said(polarity, word) for word in words}
    if len(answers) == 1 and None not in answers:
        return answers.pop()
    starts = text.split(maxsplit=1)[0].strip(",;:-()"), _TAIL.split(text, maxsplit=1)[0]
    return False if any(map(not_fitted_phrase, starts)) else None


def _said(polarity: str | None, text: str) -> bool | None:
    phrase = _phrase(text)
    if phrase in _ABSENT:
        return False
    if polarity not in ("fitted+", "fitted-"):
        return True if phrase in _DONE else None
    if phrase in _PRESENT:
        return True
    if phrase in _ABSENT_IN_COLUMN:
        return False
    if phrase in _CROSSES:  # a cross marks what is absent under DNP, and under Fit it may mean either
        return False if polarity == "fitted-" else None
    if phrase in _YES:
        return polarity == "fitted+"
    if phrase in _NO:
        return polarity == "fitted-"
    return None


def _phrase(text: str) -> str:
    folded = unicodedata.normalize("NFKC", text).strip().casefold()
    if folded in _YES or folded in _NO:
        return folded
    return re.sub(r"[\s_\-'’.()\[\]!*]+", "", folded)


@lru_cache(maxsize=16384)
def not_fitted_value(text: str) -> bool:
    """Whether a value text itself says that the part is left out: `DNP`, `NF`, `DNP 100n`, `NA(100k)`, `NA/R0402`, `n.m.`.

    Two-letter forms count only as the whole text or before a bracket: `100 NF` is a value, `NP0` a dielectric.
    A bare `NA`, `N/A` or `NC` does not tell and is not taken for it.
    """
    folded = unicodedata.normalize("NFKC", text[:256]).strip().casefold()
    if not folded:
        return False
    if _phrase(folded) in _ABSENT | _WEAK_ABSENT or _NOT_ASSEMBLED.match(folded):
        return True
    words = [word.strip(".-\"'") for word in _WORDS.split(folded)]
    if any(word in _ABSENT for word in words) or folded.startswith("dnp-") or folded.endswith("-dnp"):
        return True
    joined = " ".join(words)
    return any(f"{start} {verb}" in joined for start, verbs in (("do not", _VERBS), ("not", _DONE)) for verb in verbs)
