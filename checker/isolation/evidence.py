"""What shows that an island hangs on the mains, on earth, or on another hazardous source.

Each sort of evidence counts once per island and carries its reason. Strong 3, middling 2, weak 1 (weights: common practice,
no source; chosen on real boards so that no side was swapped). A fuse, a bridge, a varistor or a voltage rating alone never
suffices.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.isolation.islands import Islands, is_stub
from checker.model.candidate import CONNECTORS
from checker.model.fact import Fact
from checker.model.names import earth_like, high_voltage, role

STRONG, MIDDLING, WEAK = 3, 2, 1
_LINE_CLASSES = ("X1", "X2", "X3")


@dataclass(slots=True)
class Evidence:
    """For one island: sort of evidence -> (weight, sentence, fact). stub: nothing on the island processes anything."""

    mains: dict[str, tuple[int, str, Fact]] = field(default_factory=dict)
    earth: dict[str, tuple[int, str, Fact]] = field(default_factory=dict)
    voltage: dict[str, tuple[int, str, Fact]] = field(default_factory=dict)
    stub: bool = False

    @property
    def score(self) -> int:
        """Sum of the weights of the mains evidence."""
        return sum(weight for weight, _, _ in self.mains.values())

    @property
    def is_strong(self) -> bool:
        """Whether one piece of mains evidence suffices alone."""
        return any(weight == STRONG for weight, _, _ in self.mains.values())

    @property
    def is_mains(self) -> bool:
        """One strong piece, or middling ones with enough besides: two middling, or one that is no varistor with two weak, or
        a varistor with three."""
        weights = {sort: weight for sort, (weight, _, _) in self.mains.items()}
        if self.is_strong:
            return True
        middling = [sort for sort, weight in weights.items() if weight == MIDDLING]
        return bool(middling) and self.score >= (5 if middling == ["varistor"] else 4)

    @property
    def is_earth(self) -> bool:
        """A conductor somebody calls protective earth."""
        return any(weight == STRONG for weight, _, _ in self.earth.values())


def on_mains(gathered: Mapping[str, Evidence]) -> list[str]:
    """The islands taken for mains: every one with strong evidence; without any, the one with most evidence if that is enough.

    Weak evidence never makes a second mains side: it would be merged with the first and hide the barrier between them.
    """
    strong = [island for island, piece in gathered.items() if piece.is_strong]
    if any(len(gathered[island].mains) > 1 for island in strong):
        # a name alone lies: a signal of a whole circuit called LIVE is no mains where another side shows more than a name
        strong = [island for island in strong if gathered[island].stub or set(gathered[island].mains) != {"name"}]
    if strong:
        return strong
    likely = [island for island, piece in gathered.items() if piece.is_mains]
    best = max((gathered[island].score for island in likely), default=0)
    likely = [island for island in likely if gathered[island].score == best]
    return likely if len(likely) == 1 else []


def gather(isle: Islands, members: Mapping[str, list[str]]) -> dict[str, Evidence]:
    """Evidence per island, for every island (without any: an empty Evidence)."""
    found = {island: Evidence(stub=is_stub(isle, nets)) for island, nets in members.items()}
    roles = {net: role(net) for net in isle.live}
    paired = {"line", "neutral"} <= {role(net) for net in isle.design.nets}
    for net, word in roles.items():
        if net not in isle.links:
            _from_name(found[isle.island(net)], isle, net, word, paired)
    for ref, candidate in isle.choice.items():
        if isle.design.parts[ref].fitted:
            _from_part(found, isle, ref, candidate.kind)
    _from_feeds(found, isle, members)
    return found


def _from_name(evidence: Evidence, isle: Islands, net: str, word: str, paired: bool) -> None:
    fact = isle.design.nets[net].fact
    if word in ("line", "neutral"):
        evidence.mains.setdefault("name", (STRONG if paired else WEAK, f"net {net} is named as a {word} conductor", fact))
    elif word == "mains":
        evidence.mains.setdefault("mains-name", (MIDDLING, f"net {net} is named after the mains", fact))
    elif word == "earth":
        evidence.earth.setdefault("name", (STRONG, f"net {net} is named as protective earth", fact))
    elif earth_like(net):
        evidence.earth.setdefault("like", (WEAK, f"net {net} sounds like earth or chassis", fact))
    if high_voltage(net):
        evidence.voltage.setdefault("name", (WEAK, f"net {net} is named as a hazardous direct voltage", fact))


def _from_part(found: Mapping[str, Evidence], isle: Islands, ref: str, kind: str) -> None:
    part, candidate = isle.design.parts[ref], isle.choice[ref]
    islands = isle.part_islands(ref)
    if not islands:
        return
    here = found[islands[0]]
    if kind in CONNECTORS:
        _from_connector(found, isle, ref, kind)
    elif kind == "isolated-module":
        for pin in part.pins:
            if pin.net in isle.live and pin.net not in isle.links and (role(pin.name) in ("line", "neutral") or _is_ac(pin.name)):
                found[isle.island(pin.net)].mains.setdefault(
                    "module", (STRONG, f"a.c. pin {pin.number} of module {ref}", part.fact)
                )
    elif kind == "triac":
        here.mains.setdefault("triac", (STRONG, f"triac {ref}", part.fact))
    elif kind == "capacitor" and candidate.marked(*_LINE_CLASSES) and not candidate.marked("Y1", "Y2", "Y3", "Y4"):
        ends = [net for net in part.nets() if earth_like(net) or role(net) == "earth" or _meets_earth_contact(isle, net)]
        for island in islands if not ends else ():
            sort = "line-capacitor" if len(islands) == 1 else "line-capacitor-end"
            weight = STRONG if len(islands) == 1 else MIDDLING
            found[island].mains.setdefault(sort, (weight, f"line capacitor {ref} (class {candidate.marks[0].name})", part.fact))
    elif kind == "varistor":
        rating = candidate.ratings.get("voltage")
        if rating is None or float(rating.value) >= 100:
            for island in islands:
                if not found[island].earth:
                    found[island].mains.setdefault("varistor", (MIDDLING, f"varistor {ref}", part.fact))
    elif kind in ("common-mode-choke", "filter"):
        here.mains.setdefault("filter", (MIDDLING if kind == "filter" else WEAK, f"line filter {ref}", part.fact))
    elif candidate.attributes.get("offline") is not None:
        here.mains.setdefault("offline", (MIDDLING, f"off-line controller {ref}", part.fact))
    elif (
        kind in ("optocoupler", "solid-state-relay")
        and "triac" in (candidate.because + str(candidate.attributes.get("output", ""))).lower()
    ):
        for island in islands[1:]:
            found[island].mains.setdefault("opto-triac", (MIDDLING, f"triac output of {ref}", part.fact))
    elif kind == "bridge":
        here.mains.setdefault("bridge", (WEAK, f"bridge rectifier {ref}", part.fact))
    elif kind == "fuse":
        if any(isle.kind(other) in CONNECTORS for net in part.nets() if net in isle.live for other in isle.live[net]):
            here.mains.setdefault("fuse", (WEAK, f"fuse {ref} at a connector", part.fact))
    elif kind == "capacitor" and (rating := candidate.ratings.get("voltage")) is not None and 250 <= float(rating.value) < 1000:
        if len(islands) == 1:
            here.mains.setdefault("rating", (WEAK, f"capacitor {ref} rated {float(rating.value):.0f} V", part.fact))


def _behind_y_capacitors(isle: Islands, net: str, connector: str) -> bool:
    """Whether capacitors of class Y tie a contact to two nets of the same connector's other circuits: an unnamed earth contact."""
    here = isle.island(net)
    others = {other for pin in isle.design.parts[connector].pins if (other := pin.net) in isle.live and isle.island(other) != here}
    islands = {isle.island(other) for other in others}
    tied = [
        other
        for ref in isle.live[net]
        if isle.kind(ref) == "capacitor" and isle.choice[ref].marked("Y1", "Y2", "Y3", "Y4") and isle.design.parts[ref].fitted
        for other in isle.design.parts[ref].nets()
        if other in isle.live and isle.island(other) in islands
    ]
    return len(set(tied)) > 1


def _meets_earth_contact(isle: Islands, net: str) -> bool:
    """Whether a net leads to the earth contact of a connector."""
    return any(
        isle.kind(ref) in CONNECTORS and pin.net == net and role(pin.name) == "earth"
        for ref in isle.live.get(net, ())
        for pin in isle.design.parts[ref].pins
    )


def _is_ac(name: str) -> bool:
    return name.upper().replace("_", "").replace("/", "").replace("-", "") in (
        "AC",
        "AC1",
        "AC2",
        "ACL",
        "ACN",
        "ACIN",
        "VAC",
        "~",
        "LAC",
        "NAC",
        "ACINL",
        "ACINN",
    )


def _from_connector(found: Mapping[str, Evidence], isle: Islands, ref: str, kind: str) -> None:
    part, candidate = isle.design.parts[ref], isle.choice[ref]
    pins = [pin for pin in part.pins if pin.net in isle.live and pin.net not in isle.links]
    named = {pin.number: role(pin.name) for pin in pins}
    mains_entry = kind == "inlet" or {"line", "neutral"} <= set(named.values()) or _says_mains(part)
    poles = {role(pin.net or "") for pin in pins}
    carries = mains_entry or {"line", "neutral"} <= poles
    for pin in pins:
        evidence = found[isle.island(pin.net or "")]
        earth = named[pin.number] == "earth" or ((earth_like(pin.name) or pin.name.upper() in ("E", "G", "GND")) and carries)
        if earth or (carries and role(pin.net or "") not in ("line", "neutral") and earth_like(pin.net or "")):
            evidence.earth.setdefault("inlet", (STRONG, f"earth contact {ref}.{pin.number}", part.fact))
        elif role(pin.net or "") == "earth" or named[pin.number] == "earth" or _behind_y_capacitors(isle, pin.net or "", ref):
            continue
        elif mains_entry or ({"line", "neutral"} <= poles and role(pin.net or "") in ("line", "neutral")):
            evidence.mains.setdefault("connector", (STRONG, f"mains connector {ref} ({candidate.because})", part.fact))


def _says_mains(part) -> bool:  # type: ignore[no-untyped-def]
    """Whether value, description or symbol of a connector name the mains."""
    words = " ".join(part.text(attribute) for attribute in ("value", "description", "symbol")).upper()
    return role(words.replace(" ", "_")) == "mains" or any(
        phrase in words
        for phrase in (
            "MAINS",
            "AC INPUT",
            "AC IN",
            "AC_IN",
            "ACIN",
            "85-265",
            "100-240",
            "IEC 60320",
            "IEC60320",
            "AC INLET",
            "AC LINE",
        )
    )


def _from_feeds(found: Mapping[str, Evidence], isle: Islands, members: Mapping[str, list[str]]) -> None:
    """A connector, a fuse or switch and a transformer winding with no semiconductor between: an a.c. supply feeds that winding."""
    for ref, candidate in isle.choice.items():
        if candidate.kind != "transformer":
            continue
        fed = []
        for island in isle.part_islands(ref):
            nets = members.get(island, [])
            if 0 < len(nets) <= 12 and is_stub(isle, nets):
                kinds = {isle.kind(other) for net in nets for other in isle.live[net]}
                if kinds & CONNECTORS and kinds & {"fuse", "switch"}:
                    fed.append(island)
        if len(fed) == 1:
            part = isle.design.parts[ref]
            found[fed[0]].mains.setdefault(
                "feed", (STRONG, f"a connector and a fuse or switch feed a winding of {ref} directly", part.fact)
            )
