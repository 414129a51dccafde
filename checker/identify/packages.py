"""What a footprint name says about the body: how many pins, how far the pad rows stand apart, how wide it is, which chip size.

Every function returns None rather than a guess: names of connectors count poles, and numbers of a body's
dimensions (`SOIC127P600X175-16N`) are no pin counts.
"""

from __future__ import annotations

import re
from functools import lru_cache

from checker import limits

# package names that are followed by their number of pins; the longer name stands first
_NAMES = (
    "CERDIP|SMDIP|PDIP|HDIP|CDIP|SDIP|DIP|DIL|SIP|ZIP|TSSOP|HTSSOP|MSOP|HMSOP|VSSOP|QSOP|SSOP|LSOP|HSOP|PSOP|STSOP|TSOP|SOP|MFSOP|"
    "HSOIC|SOIC|SOIJ|SOJ|ESOP|SO|VQFN|WQFN|UQFN|HVQFN|QFN|VDFN|WDFN|UDFN|TDFN|DFN|VSON|WSON|SON|MLF|MLP|LFCSP|LQFP|TQFP|HTQFP|HLQFP|"
    "VQFP|PQFP|QFP|PLCC|CLCC|LCC|LGA|TFBGA|LFBGA|VFBGA|UFBGA|FBGA|BGA|WLCSP|TSOT|SOT|TO|SC|DCDC_SIP|ACDC_SIP"
)
_COUNTED = re.compile(rf"(?<![A-Z])(?:{_NAMES})[-_]?(\d{{1,4}})(?![0-9])")
# the land-pattern naming of surface-mount packages: pitch P span X height - pins
_LAND_PATTERN = re.compile(
    r"(?:SOIC|SOP|SSOP|TSSOP|SON|QFN|QFP|DFN|SOJ|SOT|DIP\w?|TO)\d{1,4}P\d{2,5}X\d{2,5}(?:X\d{2,5})?-(\d{1,4})(?![0-9])"
)
_OUTLINES = re.compile(r"(?<![A-Z])(?:SOT|TSOT|TO|SC)-?(\d{1,3})-(\d{1,2})(?![0-9])")
_PINS_IN_WORDS = re.compile(r"(?<![0-9A-Z.])(\d{1,3})-?(?:PIN|LEAD)S?(?![A-Z])")
_DIGITS_FIRST = re.compile(
    r"(?<![0-9A-Z.])(\d{1,2})-?(?:PDIP|SMDIP|DIP|SIP|SOIC|SO|SOP|TSSOP|SSOP|MSOP|QFN|DFN|LQFP|TQFP)(?![A-Z])"
)
_POLES = re.compile(r"(?<![0-9A-Z])\d{1,2}X\d{1,2}(?![0-9.MX])")
_CONNECTORS = re.compile(r"(?<![A-Z])(?:CONN\w{0,8}|PIN_?HEADER|PIN_?SOCKET|TERMINAL_?BLOCK|HEADER|RECEPTACLE|IDC|JACK)")
# with a TO, SOT or SC number the name is an outline; its pins are the well-known ones only
_KNOWN_OUTLINES = {"SOT-23": 3, "SOT-223": 4, "SOT-89": 3, "SOT-323": 3, "SC-70": 3, "TO-92": 3}

_WIDTH = re.compile(r"(?<![A-Z])W(\d{1,2}\.\d{1,3})MM")
_DUAL_IN_LINE = re.compile(r"(?<![A-Z])(?:SM|P|CER|H)?DI[PL]")
# bodies with leads on two sides: width across the leads first, then the length along them
_GULL_WING = re.compile(
    r"(?<![A-Z])(?:H?SOIC|SOP|SSOP|H?TSSOP|SO|SSO|LSOP|MFSOP|PSOP|ESOP)-?\d{1,2}\w{0,3}?(?:-\d{1,2}(?:EP)?)?_(\d{1,2}(?:\.\d{1,2})?)X\d{1,2}(?:\.\d{1,2})?MM"
)
_LEAD_SPAN = re.compile(r"(?<![A-Z])(?:SOIC|SOP|SSOP|TSSOP)\d{2,3}P(\d{3,4})X\d{2,5}(?:X\d{2,5})?-\d{1,3}(?![0-9])")
_GAP = re.compile(r"(?<![A-Z])CLEARANCE(\d{1,2}(?:\.\d{1,2})?)MM")
_SIZES = "01005|0201|0402|0504|0603|0805|1008|1111|1206|1210|1806|1808|1812|1825|2010|2220|2225|2410|2512|2816|2917|3640|4020"
_CHIP = re.compile(rf"(?<![0-9A-Z])(?:R|RES|C|CAP|L|IND|D|LED|F|FB|FUSE|SMD|NTC|PTC|RV|VAR)?[-_]?({_SIZES})(?![0-9.])(?!\d*METRIC)")


@lru_cache(maxsize=4096)
def body_pins(footprint: str) -> int | None:
    """The number of pins of the body, e.g. 16 for `SOIC-16W_7.5x10.3mm_P1.27mm`; None when the name does not say."""
    name = _name(footprint)
    if _CONNECTORS.search(footprint[: limits.CELL].upper()) or _POLES.search(name):
        return None
    for pattern in (_LAND_PATTERN, _OUTLINES, _COUNTED, _DIGITS_FIRST, _PINS_IN_WORDS):
        match = pattern.search(name)
        if match is None:
            continue
        if pattern is _OUTLINES:
            return int(match[2])
        if pattern is _COUNTED and re.match(r"T?SOT|TO|SC", match[0]):
            return _KNOWN_OUTLINES.get(match[0].replace("_", "-"))
        count = int(match[1])
        return count if 2 <= count <= 2000 else None
    return None


@lru_cache(maxsize=4096)
def pad_span(footprint: str) -> float | None:
    """The distance of the two pad rows in mm as `_W7.62mm` gives it, centre to centre; None when it is not said.

    Only for dual-in-line bodies: on other footprints W is the width of the body.
    """
    name = _name(footprint)
    return _millimetres(_WIDTH, name) if _DUAL_IN_LINE.search(name) else None


@lru_cache(maxsize=4096)
def body_width(footprint: str) -> float | None:
    """The width of a body with gull-wing leads across its leads in mm, e.g. 7.5 for `SOIC-16W_7.5x10.3mm`.

    Names of stretched bodies (`SO-6L_10x3.84mm`) may give the width over the leads instead, which is never less.
    """
    return _millimetres(_GULL_WING, _name(footprint))


@lru_cache(maxsize=4096)
def lead_span(footprint: str) -> float | None:
    """The distance over the tips of the leads in mm that land-pattern names give, e.g. 10.3 for `SOIC127P1030X265-16N`."""
    hundredths = _millimetres(_LEAD_SPAN, _name(footprint))
    return None if hundredths is None else hundredths / 100


@lru_cache(maxsize=4096)
def pad_gap(footprint: str) -> float | None:
    """The distance between the copper of the two pad rows in mm, e.g. 8.0 for `SMDIP-4_W9.53mm_Clearance8mm`."""
    return _millimetres(_GAP, _name(footprint))


def _millimetres(pattern: re.Pattern[str], name: str) -> float | None:
    match = pattern.search(name)
    return float(match[1]) if match else None


@lru_cache(maxsize=4096)
def size(footprint: str) -> str | None:
    """The imperial size of a chip part, e.g. `0603` for `C_0603_1608Metric` and `R0402`; None when it is no such name."""
    match = _CHIP.search(_name(footprint))
    return match[1] if match else None


def _name(footprint: str) -> str:
    """The name without its library, in upper case."""
    return footprint[: limits.CELL].rpartition(":")[2].upper()
