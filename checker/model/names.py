"""What a net's or pin's name hints at. Names lie, so a hint is evidence among others and never joins or separates nets.

All words are common practice, no source; the list of names that must not count (`VBUS`, `Earth` alone, `GNDA`, `MISO`, `CAN_L`)
comes from real boards.
"""

from __future__ import annotations

import re
from functools import lru_cache

_LINE = frozenset({"L", "LINE", "LIVE", "PHASE", "ACL", "L1", "L2", "L3"})
_NEUTRAL = frozenset({"N", "NEUTRAL", "NEUT", "ACN"})
_EARTH = frozenset({"PE", "PROTECTIVEEARTH", "SAFETYEARTH"})
_EARTH_LIKE = frozenset(
    {"PE", "EARTH", "CHASSIS", "SHIELD", "SHLD", "FG", "FGND", "CHGND", "CASE", "GNDPWR", "FRAME", "CHASIS", "ERDE"}
)
_BESIDE = frozenset(
    "AC MAINS MAIN IN INPUT VAC FUSED FUSE F F1 SW SWITCHED OUT FILT FILTERED LINE NET PROT PWR POWER LOAD RECT AFTER NTC "
    "X RAW HV".split()
)
_ENTRY = frozenset({"VIN", "DCIN", "IN", "INPUT", "VBAT", "PWR", "POWER", "SUPPLY", "BATT", "VS", "VPWR"})
_BEHIND_V = re.compile(r"V(3|5|9|12|15|18|19|24|28|36|48)(?:V(\d))?")  # `V1` and `V2` are no voltages
_MAINS_VOLTS = re.compile(r"(?:1[0-3]\d|2[0-6]\d|400)V?(?:AC)|(?:110|115|120|220|230|240)V")


@lru_cache(maxsize=200_000)
def tokens(name: str) -> tuple[str, ...]:
    """The words of the last path component of a name, upper case."""
    base = name.rsplit("/", 1)[-1].replace("{slash}", "/").upper()
    return tuple(word for word in re.split(r"[^A-Z0-9]+", base) if word)


@lru_cache(maxsize=200_000)
def role(name: str) -> str:
    """ "line", "neutral", "earth", "mains" or "": what the words of a net or pin name say when nothing else stands beside them.

    `AC_L`, `L_FUSED`, `N` count; `CAN_L`, `AUDIO_L` and `D_N` do not.
    """
    words = tokens(name)
    if not words or name.startswith(("Net-(", "unconnected-(", "N-0", "<unnamed")):
        return ""
    if "".join(words) in ("PROTECTIVEEARTH", "EARTHPROTECTIVE", "SAFETYEARTH", "PROTEARTH"):
        return "earth"
    for position in (len(words) - 1, *range(len(words) - 1)):
        others = words[:position] + words[position + 1 :]
        if all(word in _BESIDE or _MAINS_VOLTS.fullmatch(word) for word in others):
            word = words[position]
            if word in _NEUTRAL:
                return "neutral"
            if word in _EARTH:
                return "earth"
            if word in _LINE:
                return "line"
    if "MAINS" in words or any(_MAINS_VOLTS.fullmatch(word) for word in words):
        return "mains"
    return ""


def earth_like(name: str) -> bool:
    """Whether a name sounds like earth, chassis or a shield; such a net is never joined by a small capacitor."""
    return not _EARTH_LIKE.isdisjoint(tokens(name))


def high_voltage(name: str) -> bool:
    """Whether a name sounds like a hazardous direct voltage."""
    return any(word in ("HV", "HVDC", "VPP", "HT") or re.fullmatch(r"(?:[2-9]\d\d|1\d\d\d)V(?:DC)?", word) for word in tokens(name))


def supply_volts(name: str) -> float | None:
    """The voltage a rail's name states (`+12V`, `3V3`, `5V0_ISO`, `V24`), None when it states none."""
    for word in tokens(name):
        match = re.fullmatch(r"(\d{1,3})V(\d{0,2})", word) or _BEHIND_V.fullmatch(word)
        if match:
            return float(f"{match[1]}.{match[2] or 0}")
    return None


def entry_like(name: str) -> bool:
    """Whether a net or pin sounds like the input of a supply (`VIN`, `DC_IN`, `VBAT`)."""
    return not _ENTRY.isdisjoint(tokens(name))


def ground_like(name: str) -> bool:
    """Whether a name sounds like a reference conductor."""
    return any("GND" in word or word in ("0V", "COM", "COMMON", "VSS", "RTN", "RETURN", "MASSE") for word in tokens(name))
